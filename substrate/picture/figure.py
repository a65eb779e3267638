"""All figures of a results file, as PNG with their data as CSV beside them."""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path

import numpy as np
from matplotlib.figure import Figure

from substrate.picture.curve import (
    BALANCES,
    axis_parameter,
    convergence_names,
    curve_rows,
    draw_balance,
    draw_convergence,
    draw_curve,
    draw_material,
    families,
)
from substrate.picture.field_map import draw_field_map
from substrate.picture.pattern import draw_pattern_cuts, draw_pattern_discs
from substrate.picture.sketch import draw_sketch
from substrate.picture.style import save, write_csv
from substrate.run.results import FAILED, PointResult, Results, Sketch

MOST_POINTS = 6  # maps and patterns of at most so many points of a series


def figures(results: Results) -> Iterator[tuple[str, str, Figure, tuple[list[str], list] | None]]:
    """(file name without ending, caption, figure, (header, rows) of its data or None), one at a time."""
    if results.sketch is not None:
        yield "sample", "The sample to scale.", draw_sketch(results.sketch), None
    along, _ = axis_parameter(results)
    good = [point for point in results.points if point.status != FAILED]
    if along is not None and len(good) > 1:
        for ask in dict.fromkeys(ask for point in good for ask in point.quantities):
            for unit, members in families(results, ask).items():
                names = [name for name, _ in members]
                words = {"cross_sections": "Cross sections", "emission": "Emission", "near_field": "Field at the points asked for", "reflectance": "Shares of the incident power"}.get(ask, ask)
                stem = f"{ask}_{_file_word(unit)}" if unit != "1" else ask
                yield stem, f"{words} over the series.", draw_curve(results, ask, unit, names), curve_rows(results, ask, names)
    for number, point in enumerate(good[:MOST_POINTS], 1):
        yield from _of_point(point, number, len(good) > 1)


def _of_point(point: PointResult, number: int, several: bool) -> Iterator:
    ending = f"_point_{number}" if several else ""
    where = f" ({point.label})" if several and point.label else ""
    for ask, (_, whole) in BALANCES.items():
        for name in point.quantities.get(ask, {}):
            prefix, slash, last = name.rpartition("/")
            if last == whole and not several:
                figure = draw_balance(point, ask, prefix + slash)
                yield f"power_{_file_word(prefix)}{ask}{ending}", f"Where the power goes{where}.", figure, None
    for name in point.arrays:
        if name.endswith("field_map_e2"):
            prefix = name[: -len("field_map_e2")]
            yield f"{_file_word(prefix)}field_map{ending}", f"|E|² in the plane{where}.", draw_field_map(point, prefix), _map_rows(point, prefix)
        elif name == "pattern" or name.endswith("/pattern"):
            prefix = name[: -len("pattern")]
            rows = _pattern_rows(point, prefix)
            yield f"{_file_word(prefix)}pattern_cuts{ending}", f"Far-field pattern{where}.", draw_pattern_cuts(point, prefix), rows
            yield f"{_file_word(prefix)}pattern_discs{ending}", f"Far-field pattern over direction cosines{where}.", draw_pattern_discs(point, prefix), None
    names = [name for name in convergence_names(point) if np.any(np.asarray(point.arrays[f"convergence/{name}/values"].values) != 0.0)]
    if names and not several:
        words = "Values on the series of grids, and the answer at cells of size zero."
        yield f"convergence{ending}", words, draw_convergence(point, names), _convergence_rows(point, names)


def _file_word(text: str) -> str:
    return re.sub(r"[^A-Za-z0-9_]+", "_", text)


def _map_rows(point: PointResult, prefix: str) -> tuple[list[str], list]:
    found = point.arrays[f"{prefix}field_map_e2"]
    u, v = (np.asarray(point.arrays[f"{prefix}field_map_{name}_nm"].values) for name in "uv")
    grid = np.meshgrid(u, v, indexing="ij")
    header = [f"{axis[0]} ({axis[1]})" for axis in found.axes] + ["|E|^2 / |E incident|^2"]
    return header, np.column_stack([grid[0].ravel(), grid[1].ravel(), np.asarray(found.values).ravel()]).tolist()


def _pattern_rows(point: PointResult, prefix: str) -> tuple[list[str], list]:
    found = point.arrays[f"{prefix}pattern"]
    polar, azimuth = (np.asarray(point.arrays[f"{prefix}pattern_{name}_deg"].values) for name in ("polar", "azimuth"))
    grid = np.meshgrid(polar, azimuth, indexing="ij")
    rows = np.column_stack([grid[0].ravel(), grid[1].ravel(), np.asarray(found.values).ravel()]).tolist()
    return ["polar (deg)", "azimuth (deg)", f"pattern ({found.unit})"], rows


def _convergence_rows(point: PointResult, names: list[str]) -> tuple[list[str], list]:
    cell = np.asarray(point.arrays[f"convergence/{names[0]}/cell_nm"].values)
    columns = [np.asarray(point.arrays[f"convergence/{name}/values"].values) for name in names]
    return ["cell (nm)", *names], np.column_stack([cell, *columns]).tolist()


def save_figures(results: Results, folder) -> list[Path]:
    """Write every figure as PNG into the folder, its data as CSV beside it; returns the paths."""
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    written = []
    for stem, _, figure, data in figures(results):
        written.append(save(figure, folder / f"{stem}.png"))
        if data is not None:
            written.append(write_csv(folder / f"{stem}.csv", *data))
    return written


def save_sketch(sketch: Sketch, path) -> Path:
    """Draw the sample to scale into a PNG file."""
    return save(draw_sketch(sketch), Path(path))


def save_material_plot(name: str, table, citation: str, path) -> Path:
    """Plot n and k of a table (n, 3) into a PNG file."""
    return save(draw_material(name, table, citation), Path(path))
