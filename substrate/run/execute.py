"""Runs a case: one point of the series after the other, each written to the results file as soon as it is there."""

from __future__ import annotations

import json
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from substrate import __version__
from substrate.errors import NotConverged, SubstrateError
from substrate.run import answers
from substrate.run.build import Sample, build
from substrate.run.case import Case
from substrate.run.checks import material_specs
from substrate.run.results import (
    FAILED,
    FINISHED,
    MISSED,
    NOT_CONVERGED,
    MaterialTable,
    PointResult,
    Results,
    ResultsWriter,
    new_results,
    read_results,
)
from substrate.run.series import Point
from substrate.run.sketch import sketch

# What may go wrong at one point without harm to the others; anything else is a fault of the program and stops the run.
_POINT_FAULTS = (SubstrateError, ArithmeticError, MemoryError, np.linalg.LinAlgError)


@dataclass(frozen=True)
class RunEvent:
    """How far a run is. done: share of this run's work, 0 to 1; point: number from 1, of `points`; seconds_left: None until it can be told."""

    done: float
    point: int
    points: int
    label: str
    stage: str
    detail: str
    seconds: float
    seconds_left: float | None


Listener = Callable[[RunEvent], None]


@dataclass(frozen=True)
class Place:
    """Where a run writes. resumed: points that the file holds already."""

    folder: Path
    results: Path
    resumed: int


def choose_place(case: Case, folder) -> Place:
    """The folder of a run: `folder` if it is free or holds an unfinished run of the same case, else folder-2, folder-3, ...

    "The same case": same text, same resolved values, same program version. Finished results are never overwritten.
    """
    wanted, number = Path(folder), 1
    resolved = json.loads(json.dumps(case.tables))
    while True:
        here = wanted if number == 1 else wanted.with_name(f"{wanted.name}-{number}")
        file = here / f"{case.path.stem}.h5"
        if not here.exists() or (here.is_dir() and not any(here.iterdir())):
            return Place(here, file, 0)
        if file.is_file():
            old = _readable(file)
            if old and not old.complete and (old.case_text, old.resolved, old.version) == (case.text, resolved, __version__):
                return Place(here, file, len(old.points))
        number += 1


def _readable(file: Path) -> Results | None:
    try:
        return read_results(file)
    except SubstrateError:
        return None


def execute(case: Case, place: Place, listener: Listener | None = None) -> Path:
    """Compute the points that are missing and write them one by one; returns the results file.

    A point that fails is recorded with its sentence and the others go on. KeyboardInterrupt leaves the finished points in the file.
    """
    points = case.points()
    if place.results.exists():
        writer = ResultsWriter(place.results)
    else:
        place.folder.mkdir(parents=True, exist_ok=True)
        head = new_results(case.title, case.text, case.tables, materials_used(case), sketch(build(points[0].tables)), len(points))
        writer = ResultsWriter(place.results, head)
    missing = points[place.resumed :]
    started = time.perf_counter()
    with writer:
        for number, point in enumerate(missing):
            progress = _Progress(listener, point, len(points), number / len(missing), 1.0 / len(missing), started)
            writer.add_point(run_point(point, progress))
    return place.results


class _Progress:
    """Turns the events of one question into those of the run. start, width: the point's part of the run's work."""

    def __init__(self, listener: Listener | None, point: Point, points: int, start: float, width: float, started: float):
        self.listener, self.point, self.points = listener, point, points
        self.start, self.width, self.started = start, width, started
        self.question, self.questions = 0, 1

    def __call__(self, event) -> None:
        """Takes a ProgressEvent."""
        if self.listener is None:
            return
        done = self.start + self.width * (self.question + event.done) / self.questions
        seconds = time.perf_counter() - self.started
        left = seconds * (1.0 - done) / done if done > 0.0 else None
        self.listener(RunEvent(done, self.point.index + 1, self.points, self.point.label, event.stage, event.detail, seconds, left))


def run_point(point: Point, progress: _Progress | None = None) -> PointResult:
    """Everything that is asked at one point, its faults included."""
    started = time.perf_counter()
    answer = _Answer()
    status, message = FINISHED, ""
    try:
        _ask(point.tables, answer, progress)
    except _POINT_FAULTS as fault:
        status = FAILED
        message = str(fault) or type(fault).__name__
    if status == FINISHED and answer.stops:
        status, message = NOT_CONVERGED, " ".join(answer.stops)
    accuracy = point.tables["accuracy"]
    if status == FINISHED and accuracy["cell_nm"] is None:
        missed = answers.missed_accuracy(answer.quantities, accuracy["relative"])
        if missed:
            answer.warnings.append(f"{MISSED} of {100.0 * accuracy['relative']:g} % is not reached by " + ", ".join(missed))
    return PointResult(
        label=point.label,
        parameters=point.parameters,
        status=status,
        message=message,
        method="; ".join(dict.fromkeys(answer.methods)),
        warnings=tuple(dict.fromkeys(answer.warnings)),
        seconds=time.perf_counter() - started,
        quantities=answer.quantities,
        arrays=answer.arrays,
    )


class _Answer:
    """What one point has given so far."""

    def __init__(self):
        self.quantities: dict[str, dict] = {}
        self.arrays: dict = {}
        self.methods: list[str] = []
        self.warnings: list[str] = []
        self.stops: list[str] = []

    def settle(self, question: Callable):
        """Ask; an iteration that stopped early still leaves its best answer."""
        try:
            found = question()
        except NotConverged as stop:
            if stop.best is None:
                raise
            self.stops.append(str(stop))
            found = stop.best
        self.methods.append(found.method)
        self.warnings.extend(found.warnings)
        return found


def _ask(tables: Mapping, answer: _Answer, progress: _Progress | None) -> None:
    sample = build(tables)
    asked = {ask["what"] for ask in tables["ask"]}
    far = "far field" in asked and bool(sample.particles)
    light = sample.light is not None and (far or bool(asked & {"cross sections", "near field"}))
    emitters = sample.emitters if asked & {"emission", "far field"} else ()
    if progress is not None:
        progress.questions = max(1, light + len(emitters))
    if "reflectance" in asked:
        from substrate.question.plane_stack import reflectance

        answer.quantities["reflectance"] = answers.reflectance_quantities(reflectance(sample.stack, sample.light))
        answer.methods.append("exact, plane stack")
    if light:
        _ask_light(tables, sample, asked, answer, progress)
    for number, emitter in enumerate(emitters, 1):
        if progress is not None:
            progress.question = light + number - 1
        prefix = f"emitter_{number}/" if len(emitters) > 1 or light else ""
        _ask_emitter(tables, sample, emitter, prefix, asked, answer, progress)


def _ask_light(tables: Mapping, sample: Sample, asked: set[str], answer: _Answer, progress) -> None:
    from substrate.question.scatter import scatter

    near = [ask for ask in tables["ask"] if ask["what"] == "near field"]
    spots = [spot for ask in near for spot in ask["points_nm"]]
    options = _options(tables, progress)
    found = answer.settle(lambda: scatter(sample.stack, sample.particles, sample.light, sample.collectors, spots_nm=spots, **options))
    answer.quantities.update(answers.scattering_quantities(found, asked))
    maps = [ask for ask in near if ask["plane"]]
    for number, ask in enumerate(maps, 1):
        answer.arrays.update(answers.field_map(found, ask, "" if number == 1 else f"map_{number}/"))
    units = {name: "nm^2" for name in found.convergence if not name.startswith("spot")}
    _add_arrays(tables, sample, sample.light.wavelength_nm, found, units, "nm^2/sr", "", answer)


def _ask_emitter(tables: Mapping, sample: Sample, emitter, prefix: str, asked: set[str], answer: _Answer, progress) -> None:
    from substrate.question.emit import emit

    options = _options(tables, progress)
    found = answer.settle(lambda: emit(sample.stack, sample.particles, emitter, sample.collectors, **options))
    if "emission" in asked:
        own = prefix if len(sample.emitters) > 1 else ""
        answer.quantities.setdefault("emission", {}).update(answers.emission_quantities(found, own))
    _add_arrays(tables, sample, emitter.wavelength_nm, found, {}, "1/sr", prefix, answer)


def _options(tables: Mapping, progress) -> dict:
    accuracy = tables["accuracy"]
    return {"accuracy": accuracy["relative"], "cell_nm": accuracy["cell_nm"], "quick": accuracy["quick"], "progress": progress}


def _add_arrays(
    tables: Mapping, sample: Sample, wavelength_nm: float, found, units: Mapping, pattern_unit: str, prefix: str, answer: _Answer
) -> None:
    """The pattern, where it was asked for, and the convergence of one answer."""
    for ask in tables["ask"]:
        if ask["what"] == "far field" and (sample.particles or pattern_unit == "1/sr"):  # without a particle no light is scattered
            lossless = sample.stack.at(wavelength_nm).base_is_lossless
            answer.arrays.update(answers.pattern(found, ask["count"], lossless, pattern_unit, prefix))
    if found.convergence:
        from substrate.particle.cells import reference_extent_nm

        extent = reference_extent_nm(sample.particles)
        answer.arrays.update(answers.convergence(found, extent, units, prefix.replace("/", "_")))


def materials_used(case: Case) -> dict[str, MaterialTable]:
    """The tables and constants behind every material of the case, by name."""
    from substrate.medium.material import material

    used = {}
    for where, spec in material_specs(case.tables):
        found = material(spec, where)
        if found.table is not None:
            table = found.table
        else:
            index = complex(found.index(500.0))
            table = [[float("nan"), index.real, index.imag]]
        used[found.name] = MaterialTable(table, found.citation, found.conditions, found.range_nm)
    return used
