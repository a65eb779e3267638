"""Quantities against the parameter of a series, power balances, optical constants."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass

import matplotlib
import numpy as np
from matplotlib.figure import Figure
from matplotlib.ticker import LogLocator, NullFormatter

from substrate.picture.style import COLOURS, FAINT, INK, LINES, MAP, MARKERS, new_figure, plain_axes
from substrate.picture.words import finite_error, label, number_of, parameter_value, parameter_words, quantity_text, quantity_words, value_text
from substrate.quantity import Quantity
from substrate.run.results import FAILED, NOT_CONVERGED, PointResult, Results

# Parts of one balance, and the whole that they add up to.
BALANCES = {
    "cross_sections": (("absorbed", "up", "down", "guided", "stack"), "work"),
    "emission": (("up", "down", "guided", "particle", "stack"), "total"),
}
_ASIDE = ("balance",)
_SHARES = ("reflectance",)
_ALONE = ("quantum_yield", "lifetime_ratio")  # pure numbers that share no axis with rates
_LOGARITHMIC_FROM = 100.0  # largest over smallest value
_NEGLIGIBLE = 0.01  # of the largest value: curves that stay below it do not choose the scale
_MOST_CURVES = 24
_MANY = 30  # points of a curve whose markers become small
_AXIS_WORDS = {"emission": "power / host power of the emitter", "near_field": "|E|² / |E incident|²", "reflectance": "share of the incident power"}


@dataclass(frozen=True)
class Curve:
    """One curve: x (m,), y (m,), bars (m,) or None where no point has one."""

    title: str
    x: np.ndarray
    y: np.ndarray
    bars: np.ndarray | None


def axis_parameter(results: Results) -> tuple[str | None, tuple[str, ...]]:
    """The series parameter for the abscissa, and the others: the one with the most distinct numbers, or else the most distinct words."""
    names = list(dict.fromkeys(name for point in results.points for name in point.parameters))
    values = {name: [point.parameters.get(name) for point in results.points] for name in names}
    numeric = [name for name in names if all(number_of(value) is not None for value in values[name])]
    for candidates in (numeric, names):
        distinct = {name: len(set(map(str, values[name]))) for name in candidates}
        if distinct and max(distinct.values()) > 1:
            along = max(distinct, key=lambda name: distinct[name])
            return along, tuple(name for name in names if name != along)
    return None, tuple(names)


def abscissa(results: Results, along: str) -> tuple[list[float], list[str]]:
    """Place of each point along the series parameter, and the words at the places 0, 1, 2 ... if it is one of words."""
    values = [point.parameters.get(along) for point in results.points]
    numbers = [number_of(value) for value in values]
    if None not in numbers:
        return numbers, []
    words = list(dict.fromkeys(value_text(value) for value in values))
    return [float(words.index(value_text(value))) for value in values], words


def quantity_groups(results: Results, ask: str) -> dict[tuple[str, str], list[str]]:
    """Names of the quantities of an ask that share a figure, by unit and, for those that share no axis with others, name.

    Closures of balances are left out.
    """
    groups: dict[tuple[str, str], list[str]] = {}
    for point in results.points:
        for name, quantity in point.quantities.get(ask, {}).items():
            last = name.rpartition("/")[2]
            if last in _ASIDE:
                continue
            group = groups.setdefault((quantity.unit, last if last in _ALONE else ""), [])
            if name not in group:
                group.append(name)
    return groups


def curves(results: Results, ask: str, names: list[str]) -> list[Curve]:
    """One curve a quantity and combination of the further parameters; those that are zero everywhere are left out."""
    along, others = axis_parameter(results)
    groups: dict[str, list[tuple[float, PointResult]]] = {}
    for place, point in zip(abscissa(results, along)[0], results.points):
        words = ", ".join(parameter_value(name, point.parameters[name]) for name in others if name in point.parameters)
        groups.setdefault(words, []).append((place, point))
    found = []
    for name in names:
        for words, points in groups.items():
            known = [(place, p.quantities[ask][name]) for place, p in points if name in p.quantities.get(ask, {})]
            known.sort(key=lambda pair: pair[0])
            title = quantity_words(name) if len(names) > 1 or not words else ""
            if any(quantity.value for _, quantity in known):
                found.append(_curve(", ".join(part for part in (title, words) if part), known))
    return found


def _curve(title: str, known: list[tuple[float, Quantity]]) -> Curve:
    bars = [np.nan if finite_error(q) is None else q.error for _, q in known]
    x, y = np.array([x for x, _ in known]), np.array([q.value for _, q in known])
    return Curve(title, x, y, None if np.all(np.isnan(bars)) else np.array(bars))


def zero_everywhere(results: Results, ask: str, names: list[str]) -> list[str]:
    """The quantities that a figure leaves out because they are zero at every point."""
    values = {name: [p.quantities[ask][name].value for p in results.points if name in p.quantities.get(ask, {})] for name in names}
    return [name for name in names if not any(values[name])]


def curve_rows(results: Results, ask: str, names: list[str]) -> tuple[list[str], list[list]]:
    """Header and rows of the data behind a curve: parameters, status, then value and error of each name."""
    parameters = list(dict.fromkeys(name for point in results.points for name in point.parameters))
    header = [*parameters, "status", *(column for name in names for column in (name, f"{name} error"))]
    rows = []
    for point in results.points:
        row: list = [*(point.parameters.get(name, "") for name in parameters), point.status]
        for name in names:
            quantity = point.quantities.get(ask, {}).get(name)
            row += ["", ""] if quantity is None else [quantity.value, "" if quantity.error is None else quantity.error]
        rows.append(row)
    return header, rows


def draw_curve(results: Results, ask: str, unit: str, names: list[str]) -> Figure:
    """Quantities of one unit against the series parameter, bars where there are any; one curve for each value of further parameters."""
    along, _ = axis_parameter(results)
    found = curves(results, ask, names)
    step = -(-len(found) // _MOST_CURVES)  # each step-th curve is drawn
    figure = new_figure(7.6, 4.4)
    axes = figure.add_subplot()
    plain_axes(axes)
    drawn = found[::step] if found else []
    largest = max((np.abs(curve.y).max() for curve in drawn), default=0.0)
    words = abscissa(results, along)[1]
    for curve, style in zip(drawn, _styles(len(drawn))):
        size = 2.0 if len(curve.x) > _MANY else 4.0
        most = np.abs(curve.y).max()
        title = curve.title + (f" (at most {most:.2g})" if most < _NEGLIGIBLE * largest else "")
        line = {"linestyle": "none"} if words else {}
        axes.errorbar(curve.x, curve.y, yerr=curve.bars, label=title, capsize=2, markersize=size, linewidth=1.4, **{**style, **line})
    _scales(axes, [curve for curve in drawn if np.abs(curve.y).max() >= _NEGLIGIBLE * largest], ask in _SHARES)
    if words:
        axes.set_xticks(range(len(words)), words)
        axes.set_xlim(-0.5, len(words) - 0.5)
    _mark_points(axes, results, along)
    axes.set_xlabel(label(*parameter_words(along)))
    axes.set_ylabel(label(_ordinate(ask, unit, names), unit))
    if axes.get_legend_handles_labels()[0]:
        title = f"each {step}th curve of {len(found)}" if step > 1 else None
        figure.legend(loc="outside right upper", fontsize=8, frameon=False, title=title, title_fontsize=8)
    return figure


def _styles(count: int) -> list[dict]:
    """Colour, marker and dash of each curve: told apart by colour and marker, or in order of a colour map if there are many."""
    if count <= len(COLOURS):
        return [{"color": COLOURS[i], "marker": MARKERS[i]} for i in range(count)]
    colours = matplotlib.colormaps[MAP](np.linspace(0.0, 0.92, count))
    return [{"color": colours[i], "marker": MARKERS[i % len(MARKERS)], "linestyle": LINES[i % len(LINES)]} for i in range(count)]


def _ordinate(ask: str, unit: str, names: list[str]) -> str:
    """What the quantities of one figure have in common."""
    last = {name.rpartition("/")[2] for name in names}
    if ask == "near_field":
        return _AXIS_WORDS[ask] + (f", {quantity_words(names[0])}" if len(names) == 1 else "")
    if len(names) == 1 or len(last) == 1:
        return quantity_words(names[0] if len(names) == 1 else last.pop())
    return {"nm^2": "cross section", "ns": "lifetime"}.get(unit, _AXIS_WORDS.get(ask, "value"))


def _scales(axes, counting: list[Curve], are_shares: bool) -> None:
    """Logarithmic axes where all values are positive and span more than a factor of 100, but for shares of a whole."""
    if not counting:
        return
    x, y = (np.concatenate([getattr(curve, values) for curve in counting]) for values in ("x", "y"))
    if x.min() > 0.0 and x.max() > _LOGARITHMIC_FROM * x.min():
        axes.set_xscale("log")
    if y.min() > 0.0 and y.max() > _LOGARITHMIC_FROM * y.min() and not are_shares:
        axes.set_yscale("log")
        axes.set_ylim(bottom=0.5 * y.min())


def _mark_points(axes, results: Results, along: str) -> None:
    """A mark at the foot for each point that failed or did not converge."""
    x, _ = abscissa(results, along)
    for status, marker, colour in ((FAILED, "x", COLOURS[1]), (NOT_CONVERGED, "^", COLOURS[4])):
        places = sorted({place for place, point in zip(x, results.points) if point.status == status})
        if places:
            style = {"linestyle": "none", "marker": marker, "color": colour, "markersize": 7, "clip_on": False}
            axes.plot(places, [0.0] * len(places), transform=axes.get_xaxis_transform(), label=status, **style)


def balance_parts(point: PointResult, ask: str, prefix: str = "") -> list[tuple[str, Quantity]]:
    """The parts of a balance that the point has."""
    named = point.quantities[ask]
    return [(part, named[f"{prefix}{part}"]) for part in BALANCES[ask][0] if f"{prefix}{part}" in named]


def draw_balance(point: PointResult, ask: str, prefix: str = "") -> Figure:
    """Where the power goes: one bar a channel, as a share of the whole."""
    whole = BALANCES[ask][1]
    named = point.quantities[ask]
    total = named[f"{prefix}{whole}"]
    found = balance_parts(point, ask, prefix)
    figure = new_figure(7.0, 0.42 * len(found) + 1.4)
    axes = figure.add_subplot()
    plain_axes(axes)
    unit = 100.0 / total.value if total.value else 0.0
    shares = [unit * quantity.value for _, quantity in found]
    errors = [abs(unit) * (finite_error(quantity) or 0.0) for _, quantity in found]
    places = np.arange(len(found))[::-1]
    axes.barh(places, shares, xerr=errors if any(errors) else None, color=COLOURS[0], ecolor=INK, capsize=3, height=0.6)
    axes.set_yticks(places, [part for part, _ in found])
    axes.set_xlabel(f"share of the {whole} (%)")
    reach = max([abs(share) + error for share, error in zip(shares, errors)] + [1.0])
    for place, share, error, (_, quantity) in zip(places, shares, errors, found):
        missing = ", no error bar" if finite_error(quantity) is None else ""
        axes.text(max(share, 0.0) + error + 0.015 * reach, place, f"{share:.3g} %{missing}", va="center", fontsize=8)
    axes.set_xlim(min([0.0, *(s - e for s, e in zip(shares, errors))]), 1.28 * reach)
    closure = named.get(f"{prefix}balance")
    words = f"{whole} = {quantity_text(total)}" + (f"; closure {quantity_text(closure)}" if closure else "")
    axes.set_title(words, fontsize=9, color=FAINT)
    return figure


def balance_rows(point: PointResult, ask: str, prefix: str = "") -> tuple[list[str], list[list]]:
    """Header and rows of the data behind the bars: the parts, the whole, the closure."""
    named = point.quantities[ask]
    rows = [*balance_parts(point, ask, prefix), *((name, named[prefix + name]) for name in (BALANCES[ask][1], "balance") if prefix + name in named)]
    return ["quantity", "value", "error", "unit"], [[name, q.value, "" if q.error is None else q.error, q.unit] for name, q in rows]


def draw_material(name: str, table, citation: str) -> Figure:
    """n and k of a table (n, 3): wavelength nm, n, k."""
    nm, n, k = np.asarray(table, dtype=float).T
    figure = new_figure(7.0, 4.2)
    axes = figure.add_subplot()
    plain_axes(axes)
    dots = {"marker": "o", "markersize": 3} if len(nm) <= 2 * _MANY else {}
    axes.plot(nm, n, color=COLOURS[0], label="n" if k.any() else "n (k = 0)", **dots)
    if k.any():
        axes.plot(nm, k, color=COLOURS[1], linestyle="--", label="k", **dots)
    if nm.max() > 10.0 * nm.min():
        axes.set_xscale("log")
        axes.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        axes.xaxis.set_major_formatter("{x:g}")
        axes.xaxis.set_minor_formatter(NullFormatter())
    axes.set_xlabel("vacuum wavelength (nm)")
    axes.set_ylabel("refractive index n + ik")
    figure.legend(loc="outside right upper", frameon=False)
    axes.set_title(f"{name}\n{textwrap.fill(citation, 95)}", fontsize=8, color=FAINT)
    return figure
