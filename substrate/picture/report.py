"""The one-file report: question, answers with bars, figures, balance, convergence, warnings, cautions, the case. No outside links."""

from __future__ import annotations

import base64
import io
import math
from collections.abc import Iterable
from html import escape
from pathlib import Path

from substrate.picture.cautions import cautions
from substrate.picture.figure import ANSWERS, BALANCE, CONVERGENCE, FIELDS, MOST_POINTS, SAMPLE, Picture, pictures
from substrate.picture.words import ask_words, point_words, quantity_text, quantity_words
from substrate.quantity import Quantity
from substrate.run.results import FAILED, FINISHED, PointResult, Results

_STYLE = """
:root { color-scheme: light; }
body { font: 16px/1.5 Georgia, 'Times New Roman', serif; color: #222; background: #fff; max-width: 58rem; margin: 2rem auto; padding: 0 1rem; }
h1 { font-size: 1.7rem; line-height: 1.2; margin-bottom: .2rem; overflow-wrap: anywhere; }
h2 { font-size: 1.15rem; margin: 2.2rem 0 .6rem; border-bottom: 1px solid #bbb; padding-bottom: .2rem; }
h3 { font-size: 1rem; margin: 1.2rem 0 .4rem; }
.small { color: #666; font-size: .85rem; font-weight: normal; }
td.point { white-space: nowrap; }
.series td.value { font-weight: normal; }
.scroll { overflow-x: auto; }
table { border-collapse: collapse; width: 100%; font-size: .92rem; }
th, td { text-align: left; vertical-align: top; padding: .3rem .8rem .3rem 0; border-bottom: 1px solid #e3e3e3; }
td.value { white-space: nowrap; font-variant-numeric: tabular-nums; font-weight: bold; }
td.words { color: #555; font-size: .85rem; min-width: 14rem; }
figure { margin: 1.2rem 0; break-inside: avoid; }
figure img { max-width: 100%; height: auto; }
figcaption { color: #555; font-size: .85rem; }
pre { background: #f6f6f3; padding: 1rem; overflow-x: auto; font-size: .8rem; line-height: 1.35; }
.guard { border-left: 4px solid #D55E00; padding: .2rem 0 .2rem .8rem; margin: .5rem 0; }
.caution { border-left: 4px solid #0072B2; padding: .2rem 0 .2rem .8rem; margin: .5rem 0; }
@media (max-width: 42rem) {
  body { margin: 1rem auto; } figure { overflow-x: auto; } figure img { max-width: none; width: 42rem; } td.words { min-width: 0; }
  .stack table, .stack tbody, .stack tr, .stack td { display: block; } .stack th { display: none; }
  .stack tr { border-bottom: 1px solid #bbb; padding: .3rem 0; } .stack td { border: none; padding: 0; white-space: normal; }
}
@media print {
  body { margin: 0; max-width: none; font-size: 11pt; } h2, h3 { break-after: avoid; } tr { break-inside: avoid; }
  .scroll, pre { overflow: visible; } pre { white-space: pre-wrap; } td.value, td.point { white-space: normal; }
  .series table { font-size: 7pt; } .series th, .series td { padding: .15rem .3rem .15rem 0; }
}
"""

LONG_SERIES = 12  # points: longer series are summed up first, the table of all points stands at the end
_CONVENTIONS = (
    "Time factor exp(-i omega t), index n + ik with k at least 0. Lengths in nm, vacuum wavelengths too; angles in degrees. z points up, z = 0 "
    "is the top of the stack, the host is above. Cross sections are powers over the irradiance of the incident wave alone, taken normal to its "
    "own direction. Decay-rate factors are powers over that of the same emitter in the unbounded host. A bar is the half width within which "
    "the exact solution of the stated model is expected: cells of size zero, the residual of the iteration and the error of the reflected "
    "tensor; it says nothing of the materials' constants or of the sample's shape. A number without a unit is a ratio."
)


def write_report(results: Results, path) -> Path:
    """Write the page; one file with everything in it."""
    path = Path(path)
    path.write_text(report_html(results), encoding="utf-8")
    return path


def report_html(results: Results) -> str:
    """The page as text."""
    title = escape(results.title or "Results")
    figures: dict[str, str] = {}
    for picture in pictures(results):
        figures[picture.part] = figures.get(picture.part, "") + _figure(picture)
    parts = [
        "<!DOCTYPE html><html lang='en'><head><meta charset='utf-8'><meta name='viewport' content='width=device-width, initial-scale=1'>",
        f"<title>{title}</title><style>{_STYLE}</style></head><body>",
        f"<h1>{title}</h1>{_head(results)}",
        _section("Answer", _answers(results) + figures.get(ANSWERS, "")),
        _section("Sample", figures.get(SAMPLE, "")),
        _section("Power balance", _balance_words(results) + figures.get(BALANCE, "")),
        _section("Fields and patterns", _left_out(results) + figures.get(FIELDS, "")),
        _section("Convergence", figures.get(CONVERGENCE, "")),
        _section("Warnings", _warnings(results)),
        _section("Cautions", "".join(f"<p class='caution'>{escape(text)}</p>" for text in cautions(results))),
        _section("All points", _all_points(results) if len(results.points) > LONG_SERIES else ""),
        _section("How it was computed", _methods(results)),
        _section("Materials", _materials(results)),
        _section("Conventions", f"<p>{escape(_CONVENTIONS)}</p>"),
        _section("The case", f"<pre>{escape(results.case_text)}</pre>"),
        "</body></html>",
    ]
    return "\n".join(part for part in parts if part)


def _section(title: str, body: str) -> str:
    return f"<h2>{title}</h2>{body}" if body else ""


def _head(results: Results) -> str:
    """Version, date, number of points, and whether some are missing or bad."""
    count = len(results.points)
    words = f"<p class='small'>substrate {escape(results.version)}, {escape(results.created)}, {count} point{'s' if count != 1 else ''}</p>"
    if not results.complete:
        words += f"<p class='guard'>Unfinished: {count} of {results.planned_points} points are there.</p>"
    bad = sum(point.status != FINISHED for point in results.points)
    if bad and count > 1:
        words += f"<p class='guard'>{bad} of {count} points failed or did not converge; the reasons stand below the answers.</p>"
    return words


# ---- answers


def _answers(results: Results) -> str:
    if not results.points:
        return "<p>No point is finished.</p>"
    if len(results.points) == 1:
        return _one_point(results.points[0])
    answers = _summary(results) if len(results.points) > LONG_SERIES else _all_points(results) + _definitions(results)
    return answers + "".join(_reason(point) for point in results.points if point.status != FINISHED)


def _one_point(point: PointResult) -> str:
    out = [] if point.status == FINISHED else [_reason(point)]
    for ask, named in point.quantities.items():
        rows = "".join(
            f"<tr><td>{escape(quantity_words(name))}</td><td class='value'>{_value(quantity)}</td>"
            f"<td class='words'>{escape(quantity.definition)}</td></tr>"
            for name, quantity in named.items()
        )
        out.append(f"<h3>{escape(ask_words(ask))}</h3>{_table(('quantity', 'value', 'definition'), rows, 'stack')}")
    return "".join(out)


def _named(results: Results) -> dict[str, dict[str, list[tuple[PointResult, Quantity]]]]:
    """All answers of a series: {ask: {name: (point, quantity) of every point that has it}}."""
    found: dict[str, dict[str, list[tuple[PointResult, Quantity]]]] = {}
    for point in results.points:
        for ask, named in point.quantities.items():
            for name, quantity in named.items():
                found.setdefault(ask, {}).setdefault(name, []).append((point, quantity))
    return found


def _all_points(results: Results) -> str:
    """One table an ask: points down, quantities across."""
    out = []
    for ask, names in _named(results).items():
        rows = "".join(_series_row(point, ask, names) for point in results.points)
        out.append(f"<h3>{escape(ask_words(ask))}</h3>{_table(('point', *map(quantity_words, names)), rows, 'series')}")
    return "".join(out)


def _definitions(results: Results) -> str:
    """What the columns of the tables mean."""
    out = []
    for ask, names in _named(results).items():
        rows = "".join(
            f"<tr><td>{escape(quantity_words(name))}</td><td class='words'>{escape(found[0][1].definition)}</td></tr>" for name, found in names.items()
        )
        out.append(f"<h3>{escape(ask_words(ask))}: definitions</h3>{_table(('quantity', 'definition'), rows, 'stack')}")
    return "".join(out)


def _summary(results: Results) -> str:
    """Smallest and largest value of each quantity over the series, where they are, and its definition."""
    out = [f"<p class='small'>The smallest and the largest values of {len(results.points)} points; the table of all points stands further below.</p>"]
    for ask, names in _named(results).items():
        rows = ""
        for name, found in names.items():
            known = [pair for pair in found if math.isfinite(pair[1].value)] or found
            ends = (min(known, key=lambda pair: pair[1].value), max(known, key=lambda pair: pair[1].value))
            cells = "".join(f"<td class='value'>{_value(quantity)}<br><span class='small'>{escape(point_words(point))}</span></td>" for point, quantity in ends)
            rows += f"<tr><td>{escape(quantity_words(name))}</td>{cells}<td class='words'>{escape(found[0][1].definition)}</td></tr>"
        out.append(f"<h3>{escape(ask_words(ask))}</h3>{_table(('quantity', 'smallest', 'largest', 'definition'), rows, 'stack')}")
    return "".join(out)


def _series_row(point: PointResult, ask: str, names: Iterable[str]) -> str:
    named = point.quantities.get(ask, {})
    missing = "-" if point.status == FINISHED else escape(point.status)
    cells = "".join(f"<td class='value'>{_value(named[name]) if name in named else missing}</td>" for name in names)
    place = point_words(point) + (f" ({point.status})" if point.status != FINISHED else "")
    return f"<tr><td class='point'>{escape(place)}</td>{cells}</tr>"


def _reason(point: PointResult) -> str:
    words = ": ".join(text for text in (point_words(point), point.status) if text)
    return f"<p class='guard'>{escape(words)}. {escape(point.message)}</p>"


def _value(quantity: Quantity) -> str:
    return escape(quantity_text(quantity))


def _table(heads: Iterable[str], rows: str, kind: str = "") -> str:
    """kind: "stack" for tables whose rows fall apart into lines on narrow screens, "series" for one row a point."""
    head = "".join(f"<th>{escape(words)}</th>" for words in heads)
    return f"<div class='scroll {kind}'><table><tr>{head}</tr>{rows}</table></div>"


# ---- figures and what is said about them


def _figure(picture: Picture) -> str:
    buffer = io.BytesIO()
    picture.figure.savefig(buffer, format="png", dpi=130)
    data = base64.b64encode(buffer.getvalue()).decode("ascii")
    words = escape(picture.caption)
    return f"<figure><img alt='{words}' src='data:image/png;base64,{data}'><figcaption>{words}</figcaption></figure>"


def _balance_words(results: Results) -> str:
    """The closure of each balance: at one point as it is, of a series the largest."""
    found: dict[tuple[str, str], list[tuple[PointResult, Quantity]]] = {}
    for point in results.points:
        for ask, named in point.quantities.items():
            for name, quantity in named.items():
                if name.rpartition("/")[2] == "balance":
                    found.setdefault((ask, name), []).append((point, quantity))
    out = []
    for (ask, name), closures in found.items():
        point, worst = max(closures, key=lambda pair: abs(pair[1].value))
        where = "" if len(closures) == 1 else f", the largest of {len(closures)} points, at {point_words(point)}"
        words = f"{ask_words(ask)}, {quantity_words(name)}: closure {quantity_text(worst)}{where}. Definition: {worst.definition}."
        out.append(f"<p>{escape(words)}</p>")
    return "".join(out)


def _left_out(results: Results) -> str:
    drawn = sum(any(name.rpartition("/")[2] in ("field_map_e2", "pattern") for name in p.arrays) for p in results.points if p.status != FAILED)
    if drawn <= MOST_POINTS:
        return ""
    return f"<p class='small'>Maps and patterns of {MOST_POINTS} of {drawn} points; those of all points are in the results file.</p>"


# ---- warnings, methods, materials


def _warnings(results: Results) -> str:
    """Each warning once, with the number of points that raised it."""
    counts: dict[str, int] = {}
    for point in results.points:
        for text in dict.fromkeys(point.warnings):
            counts[text] = counts.get(text, 0) + 1
    total = len(results.points)
    rows = [text if total == 1 else f"{text} ({count} of {total} points)" for text, count in counts.items()]
    return "".join(f"<p class='guard'>{escape(text)}</p>" for text in rows) or "<p>None was raised.</p>"


def _methods(results: Results) -> str:
    """Points and time of each method."""
    found: dict[str, list[float]] = {}
    for point in results.points:
        found.setdefault(point.method or "-", []).append(point.seconds)
    rows = "".join(
        f"<tr><td>{escape(method)}</td><td>{len(seconds)}</td><td class='value'>{sum(seconds):.3g} s</td></tr>" for method, seconds in found.items()
    )
    return _table(("method", "points", "time in all"), rows) if rows else ""


def _materials(results: Results) -> str:
    rows = []
    for name, used in results.materials.items():
        span = "any wavelength" if used.range_nm is None else f"{used.range_nm[0]:g} to {used.range_nm[1]:g} nm"
        source = ". ".join(text.rstrip(".") for text in (used.citation, used.conditions) if text)
        rows.append(f"<tr><td>{escape(name)}</td><td>{span}</td><td class='words'>{escape(source)}</td></tr>")
    return _table(("name", "range", "source"), "".join(rows)) if rows else ""
