"""The one-file report: question, answers with bars, figures, balance, guards, cautions, definitions, the case. No outside links."""

from __future__ import annotations

import base64
import io
from collections.abc import Iterable
from html import escape
from pathlib import Path

from matplotlib.figure import Figure

from substrate.picture.figure import figures
from substrate.quantity import Quantity
from substrate.run.results import FINISHED, PointResult, Results

_STYLE = """
:root { color-scheme: light; }
body { font: 16px/1.5 Georgia, 'Times New Roman', serif; color: #222; background: #fff; max-width: 58rem; margin: 2rem auto; padding: 0 1rem; }
h1 { font-size: 1.7rem; line-height: 1.2; margin-bottom: .2rem; }
h2 { font-size: 1.15rem; margin: 2.2rem 0 .6rem; border-bottom: 1px solid #bbb; padding-bottom: .2rem; }
h3 { font-size: 1rem; margin: 1.2rem 0 .4rem; }
.small { color: #666; font-size: .85rem; }
.scroll { overflow-x: auto; }
table { border-collapse: collapse; width: 100%; font-size: .92rem; }
th, td { text-align: left; vertical-align: top; padding: .3rem .8rem .3rem 0; border-bottom: 1px solid #e3e3e3; }
td.value { white-space: nowrap; font-variant-numeric: tabular-nums; font-weight: bold; }
td.words { color: #555; font-size: .85rem; }
figure { margin: 1.2rem 0; break-inside: avoid; }
figure img { max-width: 100%; height: auto; }
figcaption { color: #555; font-size: .85rem; }
pre { background: #f6f6f3; padding: 1rem; overflow-x: auto; font-size: .8rem; line-height: 1.35; }
.guard { border-left: 4px solid #D55E00; padding: .2rem 0 .2rem .8rem; margin: .5rem 0; }
.caution { border-left: 4px solid #0072B2; padding: .2rem 0 .2rem .8rem; margin: .5rem 0; }
@media print { body { margin: 0; max-width: none; font-size: 11pt; } h2 { break-after: avoid; } }
"""

_ASKS = {"cross_sections": "Cross sections", "emission": "Emission", "near_field": "Field at the points asked for", "far_field": "Far field", "reflectance": "Plane stack"}

_CONVENTIONS = (
    "Time factor exp(-i omega t), index n + ik with k at least 0. Lengths in nm, vacuum wavelengths too; angles in degrees. z points up, z = 0 "
    "is the top of the stack, the host is above. Cross sections are powers over the irradiance of the incident wave alone, taken normal to its "
    "own direction. Decay-rate factors are powers over that of the same emitter in the unbounded host. A bar is the half width within which "
    "the exact solution of the stated model is expected: cells of size zero, the residual of the iteration and the error of the reflected "
    "tensor; it says nothing of the materials' constants or of the sample's shape."
)


def write_report(results: Results, path) -> Path:
    """Write the page; one file with everything in it."""
    path = Path(path)
    path.write_text(report_html(results), encoding="utf-8")
    return path


def report_html(results: Results) -> str:
    """The page as text."""
    title = escape(results.title or "Results")
    count = len(results.points)
    parts = [
        f"<!DOCTYPE html><html lang='en'><head><meta charset='utf-8'><meta name='viewport' content='width=device-width, initial-scale=1'>"
        f"<title>{title}</title><style>{_STYLE}</style></head><body>",
        f"<h1>{title}</h1><p class='small'>substrate {escape(results.version)}, {escape(results.created)}, {count} point{'s' if count != 1 else ''}</p>",
        _section("Answer", _answers(results)),
        _section("Figures", "".join(_figure(words, figure) for _, words, figure, _ in figures(results))),
        _section("Guards", _guards(results)),
        _section("Cautions", "".join(f"<p class='caution'>{escape(text)}</p>" for text in cautions(results))),
        _section("How it was computed", _methods(results)),
        _section("Materials", _materials(results)),
        _section("Conventions", f"<p>{escape(_CONVENTIONS)}</p>"),
        _section("The case", f"<pre>{escape(results.case_text)}</pre>"),
        "</body></html>",
    ]
    return "\n".join(part for part in parts if part)


def _section(title: str, body: str) -> str:
    return f"<h2>{title}</h2>{body}" if body else ""


def _answers(results: Results) -> str:
    if len(results.points) == 1:
        return _one_point(results.points[0])
    return _series(results)


def _one_point(point: PointResult) -> str:
    out = [] if point.status == FINISHED else [f"<p class='guard'>{escape(point.status)}: {escape(point.message)}</p>"]
    for ask, named in point.quantities.items():
        rows = "".join(
            f"<tr><td>{_name(name)}</td><td class='value'>{_value(quantity)}</td><td class='words'>{escape(quantity.definition)}</td></tr>"
            for name, quantity in named.items()
        )
        out.append(f"<h3>{_ASKS.get(ask, escape(ask))}</h3><div class='scroll'><table><tr><th>quantity</th><th>value</th><th>definition</th></tr>{rows}</table></div>")
    return "".join(out)


def _series(results: Results) -> str:
    """One table an ask: points down, quantities across; the definitions below, once."""
    out = []
    for ask in dict.fromkeys(ask for point in results.points for ask in point.quantities):
        names = list(dict.fromkeys(name for point in results.points for name in point.quantities.get(ask, {})))
        head = "".join(f"<th>{_name(name)}</th>" for name in names)
        rows = "".join(_series_row(point, ask, names) for point in results.points)
        words = {}
        for point in results.points:
            for name, quantity in point.quantities.get(ask, {}).items():
                words.setdefault(name, quantity.definition)
        notes = "".join(f"<tr><td>{_name(name)}</td><td class='words'>{escape(text)}</td></tr>" for name, text in words.items())
        out.append(f"<h3>{_ASKS.get(ask, escape(ask))}</h3><div class='scroll'><table><tr><th>point</th>{head}</tr>{rows}</table></div>")
        out.append(f"<details open><summary class='small'>definitions</summary><table>{notes}</table></details>")
    bad = [point for point in results.points if point.status != FINISHED]
    out += [f"<p class='guard'>{escape(point.label)}: {escape(point.status)}. {escape(point.message)}</p>" for point in bad]
    return "".join(out)


def _series_row(point: PointResult, ask: str, names: Iterable[str]) -> str:
    named = point.quantities.get(ask, {})
    cells = "".join(f"<td class='value'>{_value(named[name]) if name in named else escape(point.status)}</td>" for name in names)
    return f"<tr><td>{escape(point.label)}</td>{cells}</tr>"


def _name(name: str) -> str:
    return escape(name.replace("_", " ").replace("/", ": "))


def _value(quantity: Quantity) -> str:
    return escape(str(quantity)).replace("nm^2", "nm²")


def _figure(words: str, figure: Figure) -> str:
    buffer = io.BytesIO()
    figure.savefig(buffer, format="png", dpi=130)
    data = base64.b64encode(buffer.getvalue()).decode("ascii")
    return f"<figure><img alt='{escape(words)}' src='data:image/png;base64,{data}'><figcaption>{escape(words)}</figcaption></figure>"


def _guards(results: Results) -> str:
    found = list(dict.fromkeys(text for point in results.points for text in point.warnings))
    if not found:
        return "<p>None was raised.</p>"
    return "".join(f"<p class='guard'>{escape(text)}</p>" for text in found)


def cautions(results: Results) -> list[str]:
    """What the reader must know before acting on the numbers, as far as it concerns this case."""
    asks = {ask for point in results.points for ask in point.quantities} | {"near_field" for p in results.points if any("field_map" in n for n in p.arrays)}
    names = {name.lower() for name in results.materials}
    out = [
        "The model is linear and uses local bulk optical constants: no heating, bleaching, saturation or damage, and no tunnelling or non-local "
        "response, which matter in gaps of about a nanometre and in films and particles of a few."
    ]
    if results.sketch is not None and results.sketch.light is not None:
        out.append(
            "Light powers and intensities here are model inputs and no laser-safety calculation: follow IEC 60825-1 or ANSI Z136.1 and the local "
            "laser safety officer. Focused light comes back from wafers and mirrors into eyepieces and cameras."
        )
    if results.sketch is not None and results.sketch.outlines:
        out.append("Handle nanoparticles by local rules; NIOSH 2012-147 is a general guide for laboratories.")
    if "cross_sections" in asks and any("silicon" in name for name in names):
        out.append(
            "A scattering signal is no basis for accepting or rejecting a wafer without a calibration with certified spheres (SEMI M53); sizes "
            "found from it are sphere-equivalent ones."
        )
    if "near_field" in asks:
        out.append("The largest value of a map depends on the grid at sharp corners: take the values at stated points, which have bars.")
    if "emission" in asks:
        out.append("Lifetimes and yields assume that the intrinsic rates of the emitter do not change with its surroundings.")
    return out


def _methods(results: Results) -> str:
    rows = "".join(
        f"<tr><td>{escape(point.label) or 'the point'}</td><td>{escape(point.method)}</td><td class='value'>{point.seconds:.3g} s</td></tr>" for point in results.points
    )
    return f"<div class='scroll'><table><tr><th>point</th><th>method</th><th>time</th></tr>{rows}</table></div>"


def _materials(results: Results) -> str:
    rows = []
    for name, used in results.materials.items():
        span = "a constant" if used.range_nm is None else f"{used.range_nm[0]:g} to {used.range_nm[1]:g} nm"
        rows.append(f"<tr><td>{escape(name)}</td><td>{span}</td><td class='words'>{escape(used.citation)}. {escape(used.conditions)}</td></tr>")
    return f"<div class='scroll'><table><tr><th>name</th><th>range</th><th>source</th></tr>{''.join(rows)}</table></div>" if rows else ""
