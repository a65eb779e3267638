"""From the tables of one point to the objects that the questions take, and the faults that only these objects know."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from substrate.errors import InputError, Problem
from substrate.medium.stack import Film, Stack
from substrate.observe.collector import Collector
from substrate.particle.shape import SHAPES
from substrate.run.reading import complex_number
from substrate.run.series import Point
from substrate.source.emitter import Emitter
from substrate.source.plane_wave import PlaneWave

NEAREST_EMITTER_NM = 0.5  # below it the local bulk optics of the model has no meaning


@dataclass(frozen=True)
class Sample:
    """Everything of one point as objects; light is None where the case has none."""

    stack: Stack
    particles: tuple
    light: PlaneWave | None
    emitters: tuple[Emitter, ...]
    collectors: tuple[Collector, ...]

    def sources(self) -> tuple[PlaneWave | Emitter, ...]:
        """The light, if there is one, and the emitters."""
        return (*((self.light,) if self.light else ()), *self.emitters)


def build(tables: Mapping) -> Sample:
    """The objects of one point. Raises InputError with the key in front of what the object says."""
    films = [Film(film["material"], film["thickness_nm"]) for film in tables["stack"]["films"]]
    light = tables["light"]
    return Sample(
        Stack(tables["stack"]["host"], films, tables["stack"]["base"]),
        tuple(_made(_shape, item, f"particle[{i}]") for i, item in enumerate(tables["particle"], 1)),
        None if light is None else _made(_light, light, "light"),
        tuple(_made(_emitter, item, f"emitter[{i}]") for i, item in enumerate(tables["emitter"], 1)),
        tuple(_made(_collector, item, f"collector[{i}]") for i, item in enumerate(tables["collector"], 1)),
    )


def _made(make, table: Mapping, where: str):
    try:
        return make(table)
    except InputError as error:
        raise _placed(error, where) from error


def _placed(error: InputError, where: str) -> InputError:
    """The same error with the table of the case file in front of each place."""
    if not error.problems:
        return InputError(f"{where}: {error}")
    return InputError(Problem(f"{where}, {p.where}", p.received, p.allowed, p.advice) for p in error.problems)


def _fields(table: Mapping, *without: str) -> dict:
    """Arguments for a dataclass: keys that were left out stay out, lists become tuples."""
    return {key: _frozen(value) for key, value in table.items() if value is not None and key not in without}


def _frozen(value: object) -> object:
    return tuple(_frozen(item) for item in value) if isinstance(value, list) else value


def _shape(table: Mapping, material: object = None):
    """A shape of its table; material: of the union to which it belongs."""
    arguments = _fields(table, "shape", "around", "parts")
    arguments.setdefault("material", material)
    if table.get("around"):
        arguments["around"] = _shape(table["around"])
    if table.get("parts"):
        arguments["parts"] = tuple(_shape(part, arguments["material"]) for part in table["parts"])
    return SHAPES[table["shape"]](**arguments)


def _light(table: Mapping) -> PlaneWave:
    arguments = _fields(table, "kind", "polarization")
    pair = table["polarization"]
    if not isinstance(pair, str):
        pair = tuple(complex_number(part) if isinstance(part, str) else complex(part) for part in pair)
    return PlaneWave(polarization=pair, **arguments)


def _emitter(table: Mapping) -> Emitter:
    return Emitter(**_fields(table))


def _collector(table: Mapping) -> Collector:
    return Collector(**_fields(table))


# ---- faults that show only when the objects meet


def check_points(points: Sequence[Point]) -> None:
    """Build every point without computing anything. Raises InputError with every fault, each told once."""
    problems: dict[str, Problem | str] = {}
    for point in points:
        try:
            sample = build(point.tables)
        except InputError as error:
            _note(problems, error)
            continue
        for error in _faults(sample):
            _note(problems, error)
    if problems:
        raise InputError([found if isinstance(found, Problem) else Problem("case", found, "see the sentence") for found in problems.values()])


def _note(problems: dict, error: InputError) -> None:
    for problem in error.problems or (str(error),):
        problems.setdefault(str(problem), problem)


def _faults(sample: Sample) -> Iterator[InputError]:
    for source in sample.sources():
        try:
            layers = sample.stack.at(source.wavelength_nm)
            if isinstance(source, PlaneWave):
                source.waves(sample.stack)
        except InputError as error:
            yield error
            continue
        for collector in sample.collectors:
            try:
                collector.window(layers)
            except InputError as error:
                yield error
    for number, emitter in enumerate(sample.emitters, 1):
        for other, particle in enumerate(sample.particles, 1):
            distance = float(particle.signed_distance([emitter.position_nm])[0])
            if distance < NEAREST_EMITTER_NM:
                place = "inside of" if distance < 0.0 else f"{distance:.2g} nm from"
                allowed = f"a point at least {NEAREST_EMITTER_NM:g} nm from every particle"
                yield InputError(Problem(f"emitter[{number}].position_nm", emitter.position_nm, allowed, f"It lies {place} particle[{other}]."))
