"""All figures of a results file, as PNG with their data as CSV beside them."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from matplotlib.figure import Figure

from substrate.picture.convergence import convergence_rows, draw_convergence, least_certain
from substrate.picture.curve import (
    BALANCES,
    axis_parameter,
    balance_rows,
    curve_rows,
    draw_balance,
    draw_curve,
    draw_material,
    quantity_groups,
    zero_everywhere,
)
from substrate.picture.field_map import draw_field_map, map_rows
from substrate.picture.pattern import cut_rows, draw_pattern_cuts, draw_pattern_discs, pattern_rows
from substrate.picture.sketch import draw_sketch, sketch_rows
from substrate.picture.style import save, write_csv
from substrate.picture.words import ask_words, number_of, point_words, quantity_words, value_at
from substrate.run.results import FAILED, PointResult, Results, Sketch

MOST_POINTS = 6  # maps and patterns of at most so many points of a series, spread evenly over it
_ON_PLANE_NM = 0.5  # spots this close to the plane of a map are marked on it
SAMPLE, ANSWERS, BALANCE, FIELDS, CONVERGENCE = "sample", "answers", "balance", "fields", "convergence"


@dataclass(frozen=True)
class Picture:
    """A figure with its file name (no ending), what it shows, the part of the report it belongs to, and its data."""

    stem: str
    caption: str
    part: str
    figure: Figure
    header: list
    rows: list


def pictures(results: Results) -> Iterator[Picture]:
    """Every figure of a run, one at a time, in the order of the report."""
    series = len(results.points) > 1
    if results.sketch is not None:
        words = "The sample to scale" + (", at the first point of the series." if series else ".")
        yield Picture("sample", words, SAMPLE, draw_sketch(results.sketch), *sketch_rows(results.sketch))
    good = [point for point in results.points if point.status != FAILED]
    if axis_parameter(results)[0] is not None and len(good) > 1:
        yield from _curves(results)
    if not series:
        for point in good:
            yield from _balances(point)
    for number, point in _spread(good):
        yield from _fields(results, point, f"_point_{number}" if series else "", f" ({point_words(point)})" if series else "")
    found = least_certain(results)
    if found is not None:
        where = f" Of the series, the point with the widest bars is shown: {point_words(found)}." if series else ""
        words = f"Values on the series of grids, and at zero the answers with their bars.{where}"
        yield Picture("convergence", words, CONVERGENCE, draw_convergence(found), *convergence_rows(found))


def _curves(results: Results) -> Iterator[Picture]:
    """One figure for the quantities of an ask that share an axis; one a quantity if further parameters make a family of each."""
    family = len(axis_parameter(results)[1]) > 0
    for ask in dict.fromkeys(ask for point in results.points for ask in point.quantities):
        for (unit, alone), members in quantity_groups(results, ask).items():
            zero = zero_everywhere(results, ask, members)
            shown = [name for name in members if name not in zero]
            without = f" Zero at every point: {', '.join(quantity_words(name) for name in zero)}." if zero else ""
            for names in [[name] for name in shown] if family else [shown] if shown else []:
                last = names[0] if family else alone or ("" if unit == "1" else unit.replace("^", ""))
                stem = file_word(f"{ask}_{last}" if last else ask)
                words = f"{ask_words(ask)} over the series{': ' + quantity_words(names[0] if family else alone) if family or alone else ''}.{without}"
                yield Picture(stem, words, ANSWERS, draw_curve(results, ask, unit, names), *curve_rows(results, ask, names))


def _balances(point: PointResult) -> Iterator[Picture]:
    for ask, (_, whole) in BALANCES.items():
        for name in point.quantities.get(ask, {}):
            prefix, slash, last = name.rpartition("/")
            if last == whole:
                where = f" of {prefix.replace('_', ' ')}" if prefix else ""
                stem = file_word("_".join(part for part in ("power", prefix, ask) if part))
                figure = draw_balance(point, ask, prefix + slash)
                yield Picture(stem, f"Where the power{where} goes.", BALANCE, figure, *balance_rows(point, ask, prefix + slash))


def _spread(points: list[PointResult]) -> Iterator[tuple[int, PointResult]]:
    """At most MOST_POINTS of the points that have maps or patterns, with their numbers counted from 1."""
    drawn = [(number, point) for number, point in enumerate(points, 1) if any(_is_field(name) for name in point.arrays)]
    if len(drawn) <= MOST_POINTS:
        return iter(drawn)
    return iter([drawn[i] for i in np.linspace(0, len(drawn) - 1, MOST_POINTS).round().astype(int)])


def _is_field(name: str) -> bool:
    return name.rpartition("/")[2] in ("field_map_e2", "pattern")


def _fields(results: Results, point: PointResult, ending: str, where: str) -> Iterator[Picture]:
    """Maps and patterns of one point."""
    for name in filter(_is_field, point.arrays):
        prefix, slash, last = name.rpartition("/")
        stem, prefix = file_word(f"{prefix}_" if prefix else ""), prefix + slash
        if last == "field_map_e2":
            plane = point.arrays[name].attributes.get("plane", "")
            words = f"|E|² over |E|² of the incident wave alone, plane {plane}, finest grid{where}."
            yield Picture(f"{stem}field_map{ending}", words, FIELDS, draw_field_map(point, prefix, *_marks(results, point, name)), *map_rows(point, prefix))
            continue
        plane_deg = incidence_deg(results, point) if point.arrays[name].unit == "nm^2/sr" else None
        of = f" of {prefix[:-1].replace('_', ' ')}" if prefix else ""
        words = f"Far-field pattern{of}, finest grid{where}."
        cuts = draw_pattern_cuts(point, prefix, plane_deg)
        yield Picture(f"{stem}pattern_cuts{ending}", words, FIELDS, cuts, *cut_rows(point, prefix, plane_deg))
        words = f"Far-field pattern{of} over the direction cosines, finest grid{where}."
        yield Picture(f"{stem}pattern_discs{ending}", words, FIELDS, draw_pattern_discs(point, prefix), *pattern_rows(point, prefix))


def _marks(results: Results, point: PointResult, name: str) -> tuple[list[float], list[tuple[int, float, float]]]:
    """What to mark on the map `name`: heights of the interfaces in nm, and (number, u, v) of the spots on its plane."""
    found = point.arrays[name]
    interfaces = [0.0]
    for number, layer in enumerate(results.sketch.layers[1:-1] if results.sketch else (), 1):
        interfaces.append(interfaces[-1] - float(point.parameters.get(f"stack.films[{number}].thickness_nm", layer["thickness_nm"])))
    near = [ask for ask in results.resolved.get("ask", ()) if ask.get("what") == "near field"]
    spots = [spot for ask in near for spot in ask.get("points_nm") or ()]
    along_u, along_v = ("xyz".index(axis) for axis, _ in found.axes)
    across = 3 - along_u - along_v
    at = re.search(r"= (\S+) nm", found.attributes.get("plane", ""))
    if at is None:
        return interfaces, []
    return interfaces, [(n, s[along_u], s[along_v]) for n, s in enumerate(spots, 1) if abs(s[across] - float(at[1])) <= _ON_PLANE_NM]


def incidence_deg(results: Results, point: PointResult) -> float:
    """Azimuth of the light at a point: that of the series, else that of the case, else 0."""
    return number_of(value_at(results, point, "light", "azimuth_deg")) or 0.0


def file_word(text: str) -> str:
    """Text as a part of a file name."""
    return re.sub(r"[^A-Za-z0-9_]+", "_", text)


def save_figures(results: Results, folder) -> list[Path]:
    """Write every figure as PNG into the folder, its data as CSV beside it; returns the paths."""
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    written = []
    for picture in pictures(results):
        written.append(save(picture.figure, folder / f"{picture.stem}.png"))
        written.append(write_csv(folder / f"{picture.stem}.csv", picture.header, picture.rows))
    return written


def save_sketch(sketch: Sketch, path) -> Path:
    """Draw the sample to scale into a PNG file."""
    return save(draw_sketch(sketch), Path(path))


def save_material_plot(name: str, table, citation: str, path) -> Path:
    """Plot n and k of a table (n, 3) into a PNG file, the table as CSV beside it."""
    path = Path(path)
    write_csv(path.with_suffix(".csv"), ["wavelength (nm)", "n", "k"], np.asarray(table, dtype=float).tolist())
    return save(draw_material(name, table, citation), path)
