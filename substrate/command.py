"""The command line: run, check, show, report, materials. Only words in and out; nothing heavy is imported before it is needed."""

from __future__ import annotations

import argparse
import os
import sys
import textwrap
import time
from pathlib import Path

from substrate import __version__
from substrate.errors import InputError, SubstrateError

GOOD, WRONG, NOT_REACHED, INTERRUPTED = 0, 1, 2, 3
_SHOWN_ROWS = 40
_SCREEN = 100  # columns
_QUIET_SECONDS = 3.0  # of a run before it shows its progress

_ABOUT = """\
Light on small particles over flat layered samples: cross sections, fields, decay rates, each with an error bar.
Lengths in nm, angles in degrees, z up, z = 0 is the top of the stack; time factor exp(-i omega t), index n + ik."""
_EXIT = """\
exit codes: 0 good; 1 the case or an input is wrong, or a point failed; 2 not converged, or the accuracy asked for
was not reached (results are kept); 3 interrupted (finished points are kept, the same command goes on with the rest)"""


def main(arguments: list[str] | None = None) -> int:
    """Run one command; returns the exit code."""
    options = _parser().parse_args(arguments)
    try:
        return options.command(options)
    except InputError as error:
        _complain(error)
        return WRONG
    except SubstrateError as error:
        _tell(f"{error}")
        return WRONG
    except KeyboardInterrupt:
        _tell("interrupted")
        return INTERRUPTED
    except BrokenPipeError:  # the reader of the output, `head` for one, went away
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return GOOD
    except OSError as error:
        _tell(f"{error.filename or 'file'}: {error.strerror or error}")
        return WRONG


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="substrate", description=_ABOUT, epilog=_EXIT, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("--version", action="version", version=f"substrate {__version__}")
    commands = parser.add_subparsers(required=True, metavar="COMMAND")

    run = commands.add_parser("run", help="compute a case: table on screen, results file, figures, report")
    run.add_argument("case", metavar="CASE.toml", type=Path)
    run.add_argument("--out", metavar="DIR", type=Path, help="folder for the results (default: results/<name of the case>)")
    run.add_argument("--quick", action="store_true", help="one grid, no error bars: for a first look")
    run.add_argument("--no-figures", action="store_true", help="no figure files (the report has its own)")
    run.set_defaults(command=_run)

    check = commands.add_parser("check", help="compute nothing: every problem of a case, sketch to scale, cells, memory, time")
    check.add_argument("case", metavar="CASE.toml", type=Path)
    check.add_argument("--out", metavar="FILE", type=Path, help="the sketch (default: results/<name of the case>-sketch.png)")
    check.set_defaults(command=_check)

    show = commands.add_parser("show", help="print the table of a results file again")
    show.add_argument("results", metavar="RESULTS.h5", type=Path)
    show.set_defaults(command=_show)

    report = commands.add_parser("report", help="write the one-file report of a results file again")
    report.add_argument("results", metavar="RESULTS.h5", type=Path)
    report.add_argument("--out", metavar="FILE", type=Path, help="the page (default: report.html beside the results)")
    report.set_defaults(command=_report)

    materials = commands.add_parser("materials", help="list the built-in materials, or describe and plot one")
    materials.add_argument("name", metavar="NAME", nargs="?")
    materials.add_argument("--out", metavar="FILE", type=Path, help="the plot (default: results/materials/<name>.png)")
    materials.set_defaults(command=_materials)
    return parser


# ---- run


def _run(options) -> int:
    from substrate.run.case import read_case

    case = read_case(options.case)
    if options.quick:
        case = case.quick()

    from substrate.run.build import check_points
    from substrate.run.execute import choose_place, execute
    from substrate.run.results import read_results

    points = case.points()
    check_points(points)
    place = choose_place(case, options.out or Path("results") / case.path.stem)
    if place.resumed:
        print(f"{place.results} holds {place.resumed} of {len(points)} points of this case already; the rest follows.")
    progress = ProgressLine(sys.stderr)
    try:
        execute(case, place, progress)
    except KeyboardInterrupt:
        progress.clear()
        return _interrupted(place, len(points))
    progress.clear()
    results = read_results(place.results)
    written = [place.results, *_write_pictures(results, place.folder, not options.no_figures)]
    _print_table(results, _SHOWN_ROWS)
    print("\nwritten:", *(f"  {path}" for path in written), sep="\n")
    return exit_code(results)


def _interrupted(place, planned: int) -> int:
    kept = 0
    if place.results.exists():
        from substrate.run.results import read_results

        kept = len(read_results(place.results).points)
    _tell(f"interrupted: {kept} of {planned} points are kept in {place.results}; the same command goes on with the rest")
    return INTERRUPTED


def _write_pictures(results, folder: Path, figures: bool) -> list[Path]:
    """Table, figures and report of a run; returns the files and folders written."""
    from substrate.picture.report import write_report
    from substrate.run.results import csv_table

    table, report = folder / "table.csv", folder / "report.html"
    table.write_text(csv_table(results), encoding="utf-8")
    written = [table]
    if figures:
        from substrate.picture.figure import save_figures

        if save_figures(results, folder / "figures"):
            written.append(folder / "figures")
    write_report(results, report)
    return [*written, report]


def exit_code(results) -> int:
    """1 if a point failed, 2 if one did not converge or missed the accuracy asked for, else 0."""
    from substrate.run.results import FAILED, FINISHED, MISSED

    if any(point.status == FAILED for point in results.points):
        return WRONG
    missed = any(words.startswith(MISSED) for point in results.points for words in point.warnings)
    return NOT_REACHED if missed or any(point.status != FINISHED for point in results.points) else GOOD


class ProgressLine:
    """One line on the error stream with how far a run is and how long it still takes; only on a terminal, only after a few seconds."""

    def __init__(self, stream, clock=time.monotonic):
        self.stream, self.clock = stream, clock
        self.live = stream.isatty()
        self.started = self.last = clock()
        self.width = 0

    def __call__(self, event) -> None:
        """Takes a RunEvent."""
        now = self.clock()
        if not self.live or now - self.started < _QUIET_SECONDS or now - self.last < 0.2:
            return
        self.last = now
        parts = [f"{100.0 * event.done:3.0f} %"]
        if event.points > 1:
            parts.append(f"point {event.point} of {event.points}")
        parts.append(event.stage)
        if event.seconds_left is not None:
            parts.append(f"about {duration(event.seconds_left)} left")
        line = ", ".join(parts)
        self.stream.write(f"\r{line:<{self.width}}")
        self.stream.flush()
        self.width = len(line)

    def clear(self) -> None:
        """Take the line off the screen."""
        if self.width:
            self.stream.write("\r" + " " * self.width + "\r")
            self.stream.flush()
            self.width = 0


def duration(seconds: float) -> str:
    """A time in words to about ten per cent: "40 s", "3 min", "2.5 h"."""
    if seconds < 90.0:
        return f"{seconds:.0f} s" if seconds >= 1.0 else "1 s"
    return f"{seconds / 60.0:.0f} min" if seconds < 5400.0 else f"{seconds / 3600.0:.1f} h"


# ---- check


def _check(options) -> int:
    from substrate.run.case import read_case

    case = read_case(options.case)

    from substrate.picture.figure import save_sketch
    from substrate.run.build import build, check_points
    from substrate.run.cost import costs
    from substrate.run.sketch import sketch

    points = case.points()
    check_points(points)
    drawing = sketch(build(points[0].tables))
    path = options.out or Path("results") / f"{case.path.stem}-sketch.png"
    path.parent.mkdir(parents=True, exist_ok=True)
    save_sketch(drawing, path)
    print(case.title)
    for layer in drawing.layers:
        size = "" if layer["thickness_nm"] is None else f", {layer['thickness_nm']:g} nm"
        print(f"  {layer['name']}{size}, index {layer['index_text']}")
    for outline in drawing.outlines:
        print(f"  {outline['name']}")
    for axis in case.axes:
        print(f"series {axis.key}: {len(axis.values)} values, {_shortly(axis.values)}")
    total = costs(points)
    print(f"points: {len(points)}; series of grids to solve: {total.solves}")
    if total.solves:
        cells = f"{total.occupied_cells} occupied cells of {total.cells_in_box}"
        print(f"each on {total.grids} grid{'s' if total.grids > 1 else ''}; the finest: cells of {total.cell_nm:.3g} nm, {cells}")
        print(f"memory about {total.memory_bytes / 1e6:.0f} MB, time about {duration(total.seconds)} (rough)")
    for words in total.cautions:
        print(f"caution: {words}")
    print(f"sketch: {path}")
    print("no problem found")
    return GOOD


def _shortly(values) -> str:
    words = [f"{value:g}" if isinstance(value, float) else str(value) for value in values]
    return ", ".join(words if len(words) <= 8 else [*words[:3], "...", words[-1]])


# ---- show, report, materials


def _show(options) -> int:
    from substrate.run.results import read_results

    _print_table(read_results(options.results), None)
    return GOOD


def _report(options) -> int:
    from substrate.run.results import read_results

    results = read_results(options.results)

    from substrate.picture.report import write_report

    path = options.out or options.results.with_name("report.html")
    write_report(results, path)
    print(f"written: {path}")
    return GOOD


def _materials(options) -> int:
    from substrate.medium.material import material, material_names

    if options.name is None:
        rows = [(found.name, _range_text(found), found.citation) for found in map(material, material_names())]
        name, edges = (max(len(row[i]) for row in rows) for i in range(2))
        for row in rows:
            source = textwrap.shorten(row[2], _SCREEN - name - edges - 4, placeholder=" ...")
            print(f"{row[0]:<{name}}  {row[1]:<{edges}}  {source}")
        return GOOD
    found = material(options.name)
    print(f"{found.name}: {_range_text(found)}\nsource: {found.citation}\nconditions: {found.conditions}")
    if found.table is not None:
        from substrate.picture.figure import save_material_plot

        path = options.out or Path("results") / "materials" / f"{found.name}.png"
        path.parent.mkdir(parents=True, exist_ok=True)
        save_material_plot(found.name, found.table, found.citation, path)
        print(f"plot: {path}")
    return GOOD


def _range_text(found) -> str:
    return "any wavelength" if found.range_nm is None else f"{found.range_nm[0]:.6g} to {found.range_nm[1]:.6g} nm"


# ---- words on the screen


def _print_table(results, most_rows: int | None) -> None:
    from substrate.run.table import cautions, text_table

    print(results.title)
    if not results.complete:
        print(f"unfinished: {len(results.points)} of {results.planned_points} points")
    print()
    print(text_table(results, most_rows))
    for words in cautions(results):
        print(f"caution: {words}")


def _complain(error: InputError) -> None:
    count = len(error.problems)
    if count > 1:
        _tell(f"{count} problems:")
    _tell(str(error))


def _tell(words: str) -> None:
    print(words, file=sys.stderr)
