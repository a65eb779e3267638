"""The result table as text: quantities of one point below each other, or one row a point, with bars and units."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from substrate.quantity import Quantity, format_with_error
from substrate.run.results import FINISHED, MISSED, PointResult, Results

WIDTH = 100  # columns of the screen that a table may fill
_GAP = "  "
_MOST_CAUTIONS = 6
_SIZING = "sizes read from a collected signal need a calibration with certified spheres (SEMI M53)"


def text_table(results: Results, most_rows: int | None = None) -> str:
    """The table of a run. most_rows: longer series are cut in the middle, and the text says so."""
    if not results.points:
        return "no finished point"
    if len(results.points) == 1 and not results.points[0].parameters:
        return _one_point(results.points[0])
    return _series(results, most_rows)


def _one_point(point: PointResult) -> str:
    lines = []
    for ask, named in point.quantities.items():
        lines.append(ask.replace("_", " "))
        width = max(len(name) for name in named)
        cells = [number_text(quantity) for quantity in named.values()]
        mark = max(text.find("±") for text in cells)
        cells = [" " * (mark - text.find("±")) + text if "±" in text else text for text in cells]
        wide = max(map(len, cells))
        for (name, quantity), text in zip(named.items(), cells):
            lines.append(f"  {name:<{width}}{_GAP}{text:<{wide}}{_GAP}{_unit(quantity)}".rstrip())
    if point.status != FINISHED:
        lines.append(f"{point.status}: {point.message}")
    return "\n".join(lines)


def number_text(quantity: Quantity) -> str:
    """Value and bar without the unit; a bar beyond the seventh digit of its value is told by its size only."""
    value, error = quantity.value, quantity.error
    if error is None:
        return f"{value:.5g}"
    if value == 0.0:
        return "0" if error == 0.0 else f"0 ± {error:.0e}"
    if error < 1e-6 * abs(value):
        return f"{value:.7g} ± {error:.0e}"
    return format_with_error(value, error)


def _unit(quantity: Quantity) -> str:
    return "" if quantity.unit == "1" else quantity.unit


def _series(results: Results, most_rows: int | None) -> str:
    """One row a point; quantities that are exactly zero everywhere are named below instead of filling a column."""
    points = results.points
    parameters = _parameter_columns(points)
    if any(point.status != FINISHED for point in points):
        parameters.append(["status", "", *(point.status for point in points)])
    quantities = _quantity_columns(points)
    zero = [column[0] for column in quantities if all(cell.split()[0] == "0" for cell in column[2:])]
    quantities = [column for column in quantities if column[0] not in zero]
    blocks = [_shortened(_rows(parameters + block), most_rows) for block in _blocks(parameters, quantities)]
    text = "\n\n".join("\n".join(rows) for rows in blocks)
    notes = ["zero at every point: " + ", ".join(zero)] if zero else []
    notes += dict.fromkeys(f"{point.status}: {point.message}" for point in points if point.message)
    return "\n".join([text, *notes])


def _shortened(rows: list[str], most: int | None) -> list[str]:
    """The rows of a table with two lines of header, cut in the middle to `most` points."""
    count = len(rows) - 2
    if most is None or count <= most:
        return rows
    tail = most // 4
    return [*rows[: 2 + most - tail], f"... {count - most} more points ...", *rows[len(rows) - tail :]]


def _parameter_columns(points: Sequence[PointResult]) -> list[list[str]]:
    """Header of two lines and cells of each series; the name is short where that is unambiguous."""
    keys = list(dict.fromkeys(key for point in points for key in point.parameters))
    short = [_short(key) for key in keys]
    columns = []
    for key, name in zip(keys, short):
        title = key if short.count(name) > 1 else name
        columns.append([title, "", *(_value(point.parameters.get(key)) for point in points)])
    return columns


def _short(key: str) -> str:
    parts = key.split(".")
    return ".".join(parts[-2:]) if parts[-1] in ("x", "y", "z") else parts[-1]


def _value(value: object) -> str:
    return "" if value is None else f"{value:g}" if isinstance(value, float) else str(value)


def _quantity_columns(points: Sequence[PointResult]) -> list[list[str]]:
    """Header of two lines (name, unit) and cells of every quantity that any point has."""
    first: dict[tuple[str, str], Quantity] = {}
    for point in points:
        for ask, named in point.quantities.items():
            for name, quantity in named.items():
                first.setdefault((ask, name), quantity)
    names = [name for _, name in first]
    columns = []
    for (ask, name), quantity in first.items():
        title = f"{ask}/{name}" if names.count(name) > 1 else name
        cells = [point.quantities.get(ask, {}).get(name) for point in points]
        columns.append([title, _unit(quantity), *("-" if cell is None else number_text(cell) for cell in cells)])
    return columns


def _blocks(parameters: list, quantities: list) -> Iterable[list]:
    """Groups of quantity columns that fit on the screen beside the parameters."""
    fixed = sum(_wide(column) + len(_GAP) for column in parameters)
    block: list = []
    used = fixed
    for column in quantities:
        wide = _wide(column) + len(_GAP)
        if block and used + wide > WIDTH:
            yield block
            block, used = [], fixed
        block.append(column)
        used += wide
    yield block


def _wide(column: Sequence[str]) -> int:
    return max(map(len, column))


def _rows(columns: list[list[str]]) -> list[str]:
    widths = [_wide(column) for column in columns]
    return [_GAP.join(f"{cell:>{wide}}" for cell, wide in zip(row, widths)).rstrip() for row in zip(*columns)]


def cautions(results: Results) -> list[str]:
    """What to keep in mind beside the numbers, in short; the report has all of it."""
    counts: dict[str, int] = {}
    missed = 0
    for point in results.points:
        for words in point.warnings:
            if words.startswith(MISSED):
                missed += 1
            else:
                counts[words] = counts.get(words, 0) + 1
    total = len(results.points)
    found = [words if count == total else f"{words} ({count} of {total} points)" for words, count in counts.items()]
    if len(found) > _MOST_CAUTIONS:
        found = [*found[:_MOST_CAUTIONS], f"{len(found) - _MOST_CAUTIONS} more in the report"]
    if missed:
        found.insert(0, _missed_text(results, missed))
    if _sizes_particles(results.resolved):
        found.append(_SIZING)
    return found


def _missed_text(results: Results, missed: int) -> str:
    if len(results.points) == 1:
        return next(words for words in results.points[0].warnings if words.startswith(MISSED))
    return f"{missed} of {len(results.points)} points do not reach the accuracy asked for: go by their bars"


def _sizes_particles(case) -> bool:
    """Is this the signal of a collector away from the specular beam, as used to size particles?"""
    ring = any(collector.get("polar_deg") for collector in case.get("collector") or ())
    return bool(ring and case.get("light") and case.get("particle"))
