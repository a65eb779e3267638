"""Quantities against the parameter of a series, power balances, convergence with the cell size, optical constants."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure

from substrate.picture.style import COLOURS, FAINT, INK, MARKERS, label, new_figure, plain_axes
from substrate.run.results import FAILED, PointResult, Results

# Quantities of one balance: shares of the last one.
BALANCES = {
    "cross_sections": (("absorbed", "up", "down", "guided", "stack"), "work"),
    "emission": (("up", "down", "guided", "particle", "stack"), "total"),
}
_ASIDE = ("balance",)


def number_of(value: object) -> float | None:
    """A parameter as a number, None if it is a word."""
    return float(value) if isinstance(value, (int, float)) and not isinstance(value, bool) else None


def axis_parameter(results: Results) -> tuple[str | None, tuple[str, ...]]:
    """The series parameter with the most distinct numbers, for the abscissa, and the others."""
    names = list(dict.fromkeys(name for point in results.points for name in point.parameters))
    numeric = {
        name: len({point.parameters.get(name) for point in results.points})
        for name in names
        if all(number_of(point.parameters.get(name)) is not None for point in results.points)
    }
    if not numeric or max(numeric.values()) < 2:
        return None, tuple(names)
    along = max(numeric, key=lambda name: numeric[name])
    return along, tuple(name for name in names if name != along)


def families(results: Results, ask: str) -> dict[str, list[tuple[str, str]]]:
    """Quantities of an ask by unit: {unit: [(name, definition)]}."""
    out: dict[str, list[tuple[str, str]]] = {}
    seen = set()
    for point in results.points:
        for name, quantity in point.quantities.get(ask, {}).items():
            if name not in seen and name.rpartition("/")[2] not in _ASIDE:
                seen.add(name)
                out.setdefault(quantity.unit, []).append((name, quantity.definition))
    return out


def curve_rows(results: Results, ask: str, names: list[str]) -> tuple[list[str], list[list]]:
    """Header and rows of the data behind a curve: parameters, then value and error of each name."""
    parameters = list(dict.fromkeys(name for point in results.points for name in point.parameters))
    header = [*parameters, *(column for name in names for column in (name, f"{name} error"))]
    rows = []
    for point in results.points:
        row: list = [point.parameters.get(name, "") for name in parameters]
        for name in names:
            quantity = point.quantities.get(ask, {}).get(name)
            row += ["", ""] if quantity is None else [quantity.value, "" if quantity.error is None else quantity.error]
        rows.append(row)
    return header, rows


def draw_curve(results: Results, ask: str, unit: str, names: list[str]) -> Figure:
    """Quantities of one unit against the series parameter, bars where there are any; one curve for each value of further parameters."""
    along, others = axis_parameter(results)
    figure = new_figure(7.6, 4.4)
    axes = figure.add_subplot()
    plain_axes(axes)
    groups: dict[str, list[PointResult]] = {}
    for point in results.points:
        if point.status != FAILED:
            words = ", ".join(f"{name.rpartition('.')[2]} {point.parameters.get(name)}" for name in others)
            groups.setdefault(words, []).append(point)
    shown: list[float] = []
    drawn = 0
    for name in names:
        for words, points in groups.items():
            known = sorted(((number_of(p.parameters[along]), p.quantities[ask][name]) for p in points if name in p.quantities.get(ask, {})), key=lambda pair: pair[0])
            if not known or not any(quantity.value for _, quantity in known):
                continue
            x, y = np.array([pair[0] for pair in known]), np.array([pair[1].value for pair in known])
            bars = np.array([0.0 if q.error is None or not np.isfinite(q.error) else q.error for _, q in known])
            title = name.replace("_", " ") + (f" ({words})" if words else "")
            style = {"color": COLOURS[drawn % len(COLOURS)], "marker": MARKERS[drawn % len(MARKERS)], "markersize": 4, "linewidth": 1.4}
            axes.errorbar(x, y, yerr=bars if bars.any() else None, label=title, capsize=2, **style)
            shown += y.tolist()
            drawn += 1
    if shown and min(shown) > 0.0 and max(shown) > 100.0 * min(shown):
        axes.set_yscale("log")
    axes.set_xlabel(_parameter_label(along))
    axes.set_ylabel(label(names[0].rpartition("/")[2] if len(names) == 1 else _family_word(ask, unit), unit))
    figure.legend(loc="outside right upper", fontsize=8, frameon=False)
    return figure


def _family_word(ask: str, unit: str) -> str:
    return {"nm^2": "cross section", "ns": "lifetime"}.get(unit, {"emission": "factor", "near_field": "|E|² / |E incident|²", "reflectance": "share"}.get(ask, "value"))


def _parameter_label(name: str) -> str:
    """"light.wavelength_nm" -> "light: wavelength (nm)"."""
    place, _, last = name.rpartition(".")
    for ending, unit in (("_nm", "nm"), ("_deg", "deg"), ("_ns", "ns")):
        if ending in last:
            last = f"{last.replace(ending, '')} ({unit})"
    return f"{place}: {last.replace('_', ' ')}" if place else last.replace("_", " ")


def draw_balance(point: PointResult, ask: str, prefix: str = "") -> Figure:
    """Where the power goes: one bar a channel, as a share of the whole."""
    parts, whole = BALANCES[ask]
    named = point.quantities[ask]
    total = named[f"{prefix}{whole}"].value
    found = [(part, named[f"{prefix}{part}"]) for part in parts if f"{prefix}{part}" in named]
    figure = new_figure(7.0, 0.45 * len(found) + 1.3)
    axes = figure.add_subplot()
    plain_axes(axes)
    shares = [100.0 * quantity.value / total if total else 0.0 for _, quantity in found]
    errors = [0.0 if q.error is None or not total else abs(100.0 * q.error / total) for _, q in found]
    places = np.arange(len(found))[::-1]
    axes.barh(places, shares, xerr=errors if any(errors) else None, color=COLOURS[0], ecolor=INK, capsize=3, height=0.6)
    axes.set_yticks(places, [part for part, _ in found])
    axes.set_xlabel(f"share of the {whole} (%)")
    reach = max([abs(s) + e for s, e in zip(shares, errors)] + [1.0])
    for place, share, error in zip(places, shares, errors):
        axes.text(max(share, 0.0) + error + 0.015 * reach, place, f"{share:.3g} %", va="center", fontsize=8)
    axes.set_xlim(min([0.0, *(s - e for s, e in zip(shares, errors))]), 1.15 * reach)
    return figure


def convergence_names(point: PointResult) -> list[str]:
    """Quantities with a series of grids behind them."""
    ending = "/values"
    return [name[len("convergence/") : -len(ending)] for name in point.arrays if name.startswith("convergence/") and name.endswith(ending)]


def draw_convergence(point: PointResult, names: list[str]) -> Figure:
    """Values over the extrapolated one against the cell size, the quadratic through them, and the answer with its bar at zero."""
    figure = new_figure(7.6, 4.2)
    axes = figure.add_subplot()
    plain_axes(axes)
    for number, name in enumerate(names):
        folder = f"convergence/{name}"
        cell, values, fit = (np.asarray(point.arrays[f"{folder}/{part}"].values, dtype=float) for part in ("cell_nm", "values", "fit"))
        answer, bar = fit[0], point.arrays[f"{folder}/fit"].error or 0.0
        if answer == 0.0:
            continue
        colour, marker = COLOURS[number % len(COLOURS)], MARKERS[number % len(MARKERS)]
        axes.plot(cell, values / answer, marker=marker, linestyle="none", markersize=5, color=colour, label=name.replace("_", " "))
        h = np.linspace(0.0, cell.max(), 100)
        axes.plot(h, (fit[0] + fit[1] * h + fit[2] * h * h) / answer, color=colour, linewidth=1.0)
        axes.errorbar([0.006 * cell.max() * number], [1.0], yerr=[abs(bar / answer)], color=colour, capsize=4, linewidth=1.6)
    axes.set_xlim(left=-0.03 * axes.get_xlim()[1])
    axes.set_xlabel("cell size (nm); the bars at zero are those of the answers")
    axes.set_ylabel("value / extrapolated value")
    figure.legend(loc="outside right upper", fontsize=8, frameon=False)
    return figure


def draw_material(name: str, table, citation: str) -> Figure:
    """n and k of a table (n, 3): wavelength nm, n, k."""
    nm, n, k = np.asarray(table, dtype=float).T
    figure = new_figure(7.0, 4.0)
    axes = figure.add_subplot()
    plain_axes(axes)
    axes.plot(nm, n, color=COLOURS[0], label="n")
    if k.any():
        axes.plot(nm, k, color=COLOURS[1], linestyle="--", label="k")
    axes.set_xlabel("vacuum wavelength (nm)")
    axes.set_ylabel("refractive index n + ik")
    figure.legend(loc="outside right upper", frameon=False)
    axes.set_title(f"{name}\n{citation[:95]}{'...' if len(citation) > 95 else ''}", fontsize=8, color=FAINT)
    return figure
