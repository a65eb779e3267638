"""The results file: one HDF5 file a run, readable without the program, written point by point.

    /                       attributes program, version, created (ISO 8601), title, planned_points
    /case_text /resolved    the case verbatim; every value that was used, as JSON
    /materials/<name>       (n, 3): wavelength nm, n, k; attributes citation, conditions, range
    /sketch                 the sample in the xz plane, as JSON
    /points/0000            attributes label, parameters, status, message, method, warnings, seconds
        quantities/<ask>/<name>   a number with attributes unit, definition, error (nan: no bar), ask
        arrays/<name>             an array with attributes unit, definition, error, axes (JSON) and its own
"""

from __future__ import annotations

import csv
import io
import json
import math
import os
from collections.abc import Iterable, Mapping
from dataclasses import asdict, dataclass, field
from datetime import datetime, timezone
from pathlib import Path

import h5py
import numpy as np

from substrate import __version__
from substrate.errors import InputError, Problem
from substrate.quantity import Quantity

FINISHED, NOT_CONVERGED, FAILED = "finished", "not converged", "failed"
STATUSES = (FINISHED, NOT_CONVERGED, FAILED)
MISSED = "the accuracy asked for"  # how a point's warning begins if its bars are wider
_UNFINISHED_GROUP = "writing"  # a point in the making; renamed to its number when it is complete


@dataclass(frozen=True)
class Sketch:
    """The sample to scale in the xz plane, as plain lists and dictionaries.

    layers: from the host down to the base, {name, thickness_nm or None, index_text}.
    outlines: one a particle, {name, x_nm: list, z_nm: list}.  emitters: {x_nm, z_nm, orientation}.
    light: {angle_deg, side, polarization} or None.  collectors: {name, side, half_angle_deg} or {name, side, polar_deg}.
    """

    layers: list
    outlines: list = field(default_factory=list)
    emitters: list = field(default_factory=list)
    light: dict | None = None
    collectors: list = field(default_factory=list)


@dataclass(frozen=True)
class MaterialTable:
    """A material as it was used. table: (n, 3) wavelength nm, n, k; a constant index is one row with wavelength nan."""

    table: object
    citation: str
    conditions: str = ""
    range_nm: tuple[float, float] | None = None


@dataclass(frozen=True)
class ArrayResult:
    """An array with its unit and meaning.

    axes: one (name, unit) pair a dimension.  error: half width of the bar, in the unit; None without a bar.
    attributes: further words about the array, such as {"plane": "xz at y = 0 nm"}.
    """

    values: object
    unit: str
    definition: str
    axes: tuple[tuple[str, str], ...] = ()
    error: float | None = None
    attributes: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True)
class PointResult:
    """One point of the series. quantities: {ask: {name: Quantity}}; arrays: {name: ArrayResult}.

    parameters: the series' values at this point, {"light.wavelength_nm": 633.0}.  status: "finished", "not converged" or "failed".
    message: why it is not finished, else empty.  method: how it was computed.  warnings: sentences.  seconds: of wall time.
    """

    label: str
    parameters: Mapping[str, object] = field(default_factory=dict)
    status: str = FINISHED
    message: str = ""
    method: str = ""
    warnings: tuple[str, ...] = ()
    seconds: float = 0.0
    quantities: Mapping[str, Mapping[str, Quantity]] = field(default_factory=dict)
    arrays: Mapping[str, ArrayResult] = field(default_factory=dict)


@dataclass(frozen=True)
class Results:
    """A whole results file in memory. resolved: the case with every default; materials: {name: MaterialTable}."""

    title: str
    version: str
    created: str
    case_text: str
    resolved: Mapping
    materials: Mapping[str, MaterialTable]
    sketch: Sketch | None
    points: tuple[PointResult, ...]
    planned_points: int | None = None

    @property
    def complete(self) -> bool:
        """True once every planned point is in the file, whatever its status."""
        return self.planned_points is None or len(self.points) >= self.planned_points


class ResultsWriter:
    """Writes a results file point by point; between two points the file is closed and complete.

    head: Results without points, for a new file, which appears under its name only once its head is whole; None adds to the file
    that is there already. Raises InputError if a new file would overwrite an old one.
    """

    def __init__(self, path, head: Results | None = None):
        self.path = Path(path)
        if head is None:
            with h5py.File(self.path, "r") as file:
                self.count = len(file["points"])
            return
        if self.path.exists():
            raise InputError(Problem("results file", str(self.path), "a name that is free", "Finished results are never overwritten."))
        self.count = 0
        unfinished = self.path.with_name(self.path.name + ".new")
        with h5py.File(unfinished, "w") as file:
            _write_head(file, head)
        os.replace(unfinished, self.path)
        for point in head.points:
            self.add_point(point)

    def __enter__(self) -> ResultsWriter:
        return self

    def __exit__(self, *exception) -> None:
        """Nothing is left to do: every point is on the disk already."""

    def add_point(self, point: PointResult) -> None:
        """Write one point to the disk. A write that is cut short leaves no half point behind."""
        with h5py.File(self.path, "r+") as file:
            if _UNFINISHED_GROUP in file:
                del file[_UNFINISHED_GROUP]
            _write_point(file.create_group(_UNFINISHED_GROUP, track_order=True), point)
            file.move(_UNFINISHED_GROUP, f"points/{self.count:04d}")
        self.count += 1


def new_results(title: str, case_text: str, resolved: Mapping, materials, sketch: Sketch | None, planned_points: int) -> Results:
    """The head of a results file of this program version, made now, with no points yet."""
    created = datetime.now(timezone.utc).isoformat(timespec="seconds")
    return Results(title, __version__, created, case_text, resolved, materials, sketch, (), planned_points)


# ---- writing


def _write_head(file, head: Results) -> None:
    file.attrs.update(program="substrate", version=head.version, created=head.created, title=head.title)
    if head.planned_points is not None:
        file.attrs["planned_points"] = head.planned_points
    file["case_text"] = head.case_text
    file["resolved"] = json.dumps(head.resolved, indent=1)
    materials = file.create_group("materials", track_order=True)
    for name, material in head.materials.items():
        dataset = materials.create_dataset(name.replace("/", "|"), data=np.asarray(material.table, dtype=float).reshape(-1, 3))
        dataset.attrs.update(name=name, columns="wavelength nm, n, k", citation=material.citation, conditions=material.conditions)
        dataset.attrs["range"] = "any wavelength" if material.range_nm is None else [float(edge) for edge in material.range_nm]
    if head.sketch is not None:
        file["sketch"] = json.dumps(asdict(head.sketch))
    file.create_group("points")


def _write_point(group, point: PointResult) -> None:
    group.attrs.update(
        label=point.label,
        parameters=json.dumps(dict(point.parameters)),
        status=point.status,
        message=point.message,
        method=point.method,
        warnings=json.dumps(list(point.warnings)),
        seconds=float(point.seconds),
    )
    for ask, quantities in point.quantities.items():
        _subgroup(group, f"quantities/{ask}")
        for name, quantity in quantities.items():
            dataset = _dataset(group, f"quantities/{ask}/{name}", np.float64(quantity.value))
            dataset.attrs.update(unit=quantity.unit, definition=quantity.definition, ask=ask, error=_bar(quantity.error))
    for name, array in point.arrays.items():
        dataset = _dataset(group, f"arrays/{name}", np.asarray(array.values))
        axes = json.dumps([{"name": axis, "unit": unit} for axis, unit in array.axes])
        dataset.attrs.update(unit=array.unit, definition=array.definition, error=_bar(array.error), axes=axes)
        dataset.attrs.update({f"about {key}": str(words) for key, words in array.attributes.items()})


def _dataset(group, path: str, data):
    folder, _, name = path.rpartition("/")
    return _subgroup(group, folder).create_dataset(name, data=data)


def _subgroup(group, path: str):
    """The group at `path`, made where it is missing, with its members kept in the order in which they were written."""
    for name in path.split("/"):
        group = group[name] if name in group else group.create_group(name, track_order=True)
    return group


def _bar(error: float | None) -> float:
    return math.nan if error is None else float(error)


# ---- reading


def read_results(path) -> Results:
    """Read a results file. Raises InputError if the file is missing or is not a results file of this program."""
    path = Path(path)
    if not path.is_file():
        raise InputError(Problem("results file", str(path), "an existing .h5 file that `substrate run` wrote"))
    try:
        file = h5py.File(path, "r")
    except OSError as error:
        raise InputError(Problem("results file", str(path), "an HDF5 file that `substrate run` wrote", f"({error})")) from None
    with file:
        if file.attrs.get("program") != "substrate":
            raise InputError(Problem("results file", str(path), "an HDF5 file that `substrate run` wrote"))
        planned = file.attrs.get("planned_points")
        sketch = Sketch(**json.loads(_text(file["sketch"]))) if "sketch" in file else None
        return Results(
            title=str(file.attrs["title"]),
            version=str(file.attrs["version"]),
            created=str(file.attrs["created"]),
            case_text=_text(file["case_text"]),
            resolved=json.loads(_text(file["resolved"])),
            materials={str(dataset.attrs["name"]): _read_material(dataset) for dataset in file["materials"].values()},
            sketch=sketch,
            points=tuple(_read_point(file["points"][key]) for key in sorted(file["points"], key=int)),
            planned_points=None if planned is None else int(planned),
        )


def _read_material(dataset) -> MaterialTable:
    edges = dataset.attrs["range"]
    range_nm = None if isinstance(edges, str) else (float(edges[0]), float(edges[1]))
    return MaterialTable(dataset[()], str(dataset.attrs["citation"]), str(dataset.attrs["conditions"]), range_nm)


def _read_point(group) -> PointResult:
    attributes = group.attrs
    quantities = {}
    for ask, branch in group.get("quantities", {}).items():
        quantities[ask] = {name: _read_quantity(dataset) for name, dataset in _leaves(branch)}
    return PointResult(
        label=str(attributes["label"]),
        parameters=json.loads(attributes["parameters"]),
        status=str(attributes["status"]),
        message=str(attributes["message"]),
        method=str(attributes["method"]),
        warnings=tuple(json.loads(attributes["warnings"])),
        seconds=float(attributes["seconds"]),
        quantities=quantities,
        arrays={name: _read_array(dataset) for name, dataset in _leaves(group["arrays"])} if "arrays" in group else {},
    )


def _read_quantity(dataset) -> Quantity:
    error = float(dataset.attrs["error"])
    return Quantity(float(dataset[()]), None if math.isnan(error) else error, str(dataset.attrs["unit"]), str(dataset.attrs["definition"]))


def _read_array(dataset) -> ArrayResult:
    error = float(dataset.attrs["error"])
    axes = tuple((axis["name"], axis["unit"]) for axis in json.loads(dataset.attrs["axes"]))
    about = {key.removeprefix("about "): str(words) for key, words in dataset.attrs.items() if key.startswith("about ")}
    bar = None if math.isnan(error) else error
    return ArrayResult(dataset[()], str(dataset.attrs["unit"]), str(dataset.attrs["definition"]), axes, bar, about)


def _leaves(group, above: str = "") -> Iterable[tuple[str, h5py.Dataset]]:
    """All datasets below a group as (path, dataset), in the order in which they were written."""
    for name, member in group.items():
        if isinstance(member, h5py.Dataset):
            yield above + name, member
        else:
            yield from _leaves(member, f"{above}{name}/")


def _text(dataset) -> str:
    return dataset.asstr()[()]


# ---- the headline table


def csv_table(results: Results) -> str:
    """The headline table as comma-separated values: one row a point, each quantity with its error bar in the next column."""
    parameters = list(dict.fromkeys(key for point in results.points for key in point.parameters))
    units = {}
    for point in results.points:
        units |= {(ask, name): quantity.unit for ask, named in point.quantities.items() for name, quantity in named.items()}
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    header = ["point", "status", *parameters]
    for (ask, name), unit in units.items():
        header += [f"{ask}/{name} [{unit}]", f"{ask}/{name} error [{unit}]"]
    writer.writerow(header)
    for number, point in enumerate(results.points):
        row = [number, point.status, *(point.parameters.get(key, "") for key in parameters)]
        for ask, name in units:
            quantity = point.quantities.get(ask, {}).get(name)
            row += ["", ""] if quantity is None else [repr(quantity.value), "" if quantity.error is None else repr(quantity.error)]
        writer.writerow(row)
    return text.getvalue()
