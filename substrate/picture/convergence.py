"""How the values approach their answers as the cells get smaller."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.figure import Figure

from substrate.picture.curve import BALANCES
from substrate.picture.style import COLOURS, MARKERS, new_figure, plain_axes
from substrate.picture.words import finite_error
from substrate.quantity import Quantity
from substrate.run.results import FAILED, PointResult, Results


@dataclass(frozen=True)
class Approach:
    """Values of one quantity on a series of grids, and what was concluded from them.

    cell_nm, values: (m,).  fit: c of c0 + c1 h + c2 h^2.  answer: as in the table, or c0 with the fit's own error if it was not asked for.
    scale: what differences are measured against, and scale_name its name.
    """

    name: str
    cell_nm: np.ndarray
    values: np.ndarray
    fit: np.ndarray
    answer: Quantity
    scale: float
    scale_name: str


def approaches(point: PointResult) -> list[Approach]:
    """All quantities of a point with a series of grids, but for those that are zero on each of them."""
    head, tail = "convergence/", "/values"
    names = [name[len(head) : -len(tail)] for name in point.arrays if name.startswith(head) and name.endswith(tail)]
    found = [_approach(point, name) for name in names]
    return [approach for approach in found if np.any(approach.values) and approach.scale > 0.0]


def _approach(point: PointResult, name: str) -> Approach:
    cell, values, fit = (np.asarray(point.arrays[f"convergence/{name}/{part}"].values, dtype=float) for part in ("cell_nm", "values", "fit"))
    answer = _answer(point, name)
    emitter, last = _split(name)
    wholes = [whole for parts, whole in BALANCES.values() if last in parts and f"convergence/{emitter}{whole}/fit" in point.arrays]
    scale = abs(_answer(point, emitter + wholes[0]).value) if wholes else abs(answer.value)
    return Approach(name, cell, values, fit, answer, scale, wholes[0] if wholes else "answer")


def _split(name: str) -> tuple[str, str]:
    """ "emitter_1_total" -> ("emitter_1_", "total")."""
    if not name.startswith("emitter_"):
        return "", name
    number, _, last = name.removeprefix("emitter_").partition("_")
    return f"emitter_{number}_", last


def _answer(point: PointResult, name: str) -> Quantity:
    """The quantity of the table that belongs to a series of grids."""
    emitter, last = _split(name)
    asks = ("emission",) if emitter else ("cross_sections", "far_field", "near_field", "emission")
    for ask in asks:
        for key, quantity in point.quantities.get(ask, {}).items():
            if key.replace("/", "_").replace(" ", "_") in (name, last):
                return quantity
    fit = point.arrays[f"convergence/{name}/fit"]
    return Quantity(float(np.asarray(fit.values)[0]), fit.error, fit.unit, "value at cells of size zero")


def least_certain(results: Results) -> PointResult | None:
    """The point with a series of grids whose bars are the widest; None if there is none."""
    widest, found = -1.0, None
    for point in results.points:
        if point.status == FAILED:
            continue
        for approach in approaches(point):
            bar = (finite_error(approach.answer) or 0.0) / approach.scale
            if bar > widest:
                widest, found = bar, point
    return found


def draw_convergence(point: PointResult) -> Figure:
    """Differences to the answers against the cell size, the quadratics through them, and the answers with their bars at zero."""
    figure = new_figure(7.6, 4.4)
    axes = figure.add_subplot()
    plain_axes(axes)
    axes.axhline(0.0, color="#bbbbbb", linewidth=0.8)
    found = approaches(point)
    largest = max(approach.cell_nm.max() for approach in found)
    for number, approach in enumerate(found):
        style = {"color": COLOURS[number % len(COLOURS)], "marker": MARKERS[number % len(MARKERS)]}
        unit = 100.0 / approach.scale
        words = f"{approach.name.replace('_', ' ')} (of the {approach.scale_name})"
        axes.plot(approach.cell_nm, unit * (approach.values - approach.answer.value), linestyle="none", markersize=5, label=words, **style)
        h = np.linspace(0.0, approach.cell_nm.max(), 100)
        axes.plot(h, unit * (np.polyval(approach.fit[::-1], h) - approach.answer.value), color=style["color"], linewidth=1.0)
        if finite_error(approach.answer) is not None:
            place = -0.012 * largest * (number + 1)  # side by side, left of zero
            axes.errorbar([place], [0.0], yerr=[unit * approach.answer.error], capsize=2, linewidth=1.6, markersize=3, **style)
    axes.set_xlim(-0.012 * largest * (len(found) + 2), 1.04 * largest)
    axes.set_xticks([tick for tick in axes.get_xticks() if 0.0 <= tick <= 1.04 * largest])
    axes.set_xlabel("cell size (nm); at zero: the answers with their bars")
    axes.set_ylabel("difference to the answer (%)")
    figure.legend(loc="outside right upper", fontsize=8, frameon=False)
    return figure


def convergence_rows(point: PointResult) -> tuple[list[str], list[list]]:
    """Header and rows of the data: one row a grid and quantity, then the answer at a cell size of zero with its bar."""
    rows: list[list] = []
    for approach in approaches(point):
        unit = approach.answer.unit
        rows += [[approach.name, unit, cell, value, ""] for cell, value in zip(approach.cell_nm.tolist(), approach.values.tolist())]
        rows.append([approach.name, unit, 0.0, approach.answer.value, "" if approach.answer.error is None else approach.answer.error])
    return ["quantity", "unit", "cell (nm)", "value", "error"], rows
