"""The results file: what goes in comes out, every point is on the disk at once, and plain h5py can read it."""

import csv
import io
import json
import math

import h5py
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from substrate.errors import InputError
from substrate.quantity import Quantity
from substrate.run.results import (
    ArrayResult,
    MaterialTable,
    PointResult,
    ResultsWriter,
    Sketch,
    csv_table,
    new_results,
    read_results,
)

SKETCH = Sketch(
    layers=[{"name": "air", "thickness_nm": None, "index_text": "1"}, {"name": "glass", "thickness_nm": None, "index_text": "1.5"}],
    outlines=[{"name": "sphere 1, gold", "x_nm": [0.0, 1.0], "z_nm": [0.0, 1.0]}],
    light={"angle_deg": 65.0, "side": "above", "polarization": "p"},
)
MATERIALS = {
    "gold": MaterialTable([[500.0, 0.9, 1.8], [600.0, 0.2, 3.1]], "made up for this test", "20 °C", (500.0, 600.0)),
    "a/b": MaterialTable([[math.nan, 1.5, 0.0]], "given as a number"),
}


def head(planned: int = 3):
    return new_results("Ball", "title = 'Ball'\n", {"light": {"wavelength_nm": [500.0, 600.0]}}, MATERIALS, SKETCH, planned)


def point(wavelength: float = 500.0, error: float | None = 0.1) -> PointResult:
    return PointResult(
        label=f"light.wavelength_nm = {wavelength:g}",
        parameters={"light.wavelength_nm": wavelength},
        method="a fake",
        warnings=("a film is thin",),
        seconds=1.5,
        quantities={
            "emission": {"emitter_2/total": Quantity(2.0, error, "1", "rate"), "emitter_1/total": Quantity(1.0, 0.0, "1", "rate")},
            "cross_sections": {"work": Quantity(10.0, 1.0, "nm^2", "work"), "collected/objective": Quantity(3.0, None, "nm^2", "collected")},
        },
        arrays={
            "field_map_e2": ArrayResult(np.arange(6.0).reshape(2, 3), "1", "|E|^2", (("x", "nm"), ("z", "nm")), None, {"plane": "xz at y = 0 nm"}),
            "convergence/work/values": ArrayResult(np.array([1.0, 2.0]), "nm^2", "work on each grid", (("grid", "1"),), 0.5),
        },
    )


def same(first: PointResult, second: PointResult) -> bool:
    for name, array in first.arrays.items():
        other = second.arrays[name]
        assert np.array_equal(array.values, other.values)
        assert (array.unit, array.definition, array.axes, array.error, dict(array.attributes)) == (
            other.unit, other.definition, other.axes, other.error, dict(other.attributes),
        )  # fmt: skip
    plain = [{**vars(item), "arrays": None} for item in (first, second)]
    return plain[0] == plain[1] and list(first.arrays) == sorted(second.arrays, key=list(first.arrays).index)


def test_what_goes_in_comes_out(tmp_path):
    path = tmp_path / "ball.h5"
    with ResultsWriter(path, head()) as writer:
        writer.add_point(point(500.0))
        writer.add_point(point(600.0, None))
    results = read_results(path)
    assert (results.title, results.case_text) == ("Ball", "title = 'Ball'\n")
    assert results.resolved == {"light": {"wavelength_nm": [500.0, 600.0]}}
    assert results.sketch == SKETCH
    assert list(results.materials) == ["gold", "a/b"]
    assert results.materials["gold"].range_nm == (500.0, 600.0) and results.materials["a/b"].range_nm is None
    assert np.array_equal(results.materials["gold"].table, MATERIALS["gold"].table)
    assert not results.complete and results.planned_points == 3
    assert same(point(500.0), results.points[0]) and same(point(600.0, None), results.points[1])
    assert list(results.points[0].quantities["emission"]) == ["emitter_2/total", "emitter_1/total"]  # in the order of writing


def test_every_point_is_on_the_disk_when_it_is_added(tmp_path):
    path = tmp_path / "ball.h5"
    writer = ResultsWriter(path, head())
    for count in range(3):
        assert len(read_results(path).points) == count
        writer.add_point(point())
    assert read_results(path).complete
    assert [item.name for item in tmp_path.iterdir()] == ["ball.h5"]  # no temporary file is left


def test_a_point_that_was_cut_short_is_not_there(tmp_path):
    path = tmp_path / "ball.h5"
    writer = ResultsWriter(path, head())
    writer.add_point(point())
    broken = PointResult("x", arrays={"good": ArrayResult(np.ones(2), "1", ""), "bad": ArrayResult(np.array([object()]), "1", "")})
    with pytest.raises(TypeError):
        writer.add_point(broken)
    assert len(read_results(path).points) == 1
    again = ResultsWriter(path)
    again.add_point(point(600.0))
    assert [p.parameters["light.wavelength_nm"] for p in read_results(path).points] == [500.0, 600.0]


def test_old_results_are_not_overwritten(tmp_path):
    path = tmp_path / "ball.h5"
    ResultsWriter(path, head()).add_point(point())
    with pytest.raises(InputError, match="never overwritten"):
        ResultsWriter(path, head())
    assert len(read_results(path).points) == 1


def test_plain_h5py_reads_the_file_and_finds_unit_definition_and_error_beside_each_number(tmp_path):
    path = tmp_path / "ball.h5"
    ResultsWriter(path, head()).add_point(point())
    with h5py.File(path, "r") as file:
        assert file.attrs["program"] == "substrate" and file.attrs["title"] == "Ball"
        assert file["case_text"][()].decode() == "title = 'Ball'\n"
        assert json.loads(file["resolved"][()])["light"]["wavelength_nm"] == [500.0, 600.0]
        assert file["materials/gold"].attrs["citation"] == "made up for this test"
        group = file["points/0000"]
        assert json.loads(group.attrs["parameters"]) == {"light.wavelength_nm": 500.0} and group.attrs["status"] == "finished"
        work = group["quantities/cross_sections/work"]
        assert work.dtype == np.float64 and work.shape == () and work[()] == 10.0
        assert (work.attrs["unit"], work.attrs["error"], work.attrs["definition"], work.attrs["ask"]) == ("nm^2", 1.0, "work", "cross_sections")
        assert math.isnan(group["quantities/cross_sections/collected/objective"].attrs["error"])
        assert json.loads(group["arrays/field_map_e2"].attrs["axes"]) == [{"name": "x", "unit": "nm"}, {"name": "z", "unit": "nm"}]
        found = []
        group.visititems(lambda name, item: found.append(item) if isinstance(item, h5py.Dataset) else None)
        assert len(found) == 6 and all({"unit", "definition", "error"} <= set(item.attrs) for item in found)


def test_files_that_are_no_results(tmp_path):
    with pytest.raises(InputError, match="an existing .h5 file"):
        read_results(tmp_path / "missing.h5")
    (tmp_path / "text.h5").write_text("no HDF5", encoding="utf-8")
    with pytest.raises(InputError, match="an HDF5 file that `substrate run` wrote"):
        read_results(tmp_path / "text.h5")
    with h5py.File(tmp_path / "other.h5", "w") as file:
        file["x"] = 1
    with pytest.raises(InputError, match="an HDF5 file that `substrate run` wrote"):
        read_results(tmp_path / "other.h5")


def test_the_table_as_comma_separated_values(tmp_path):
    path = tmp_path / "ball.h5"
    writer = ResultsWriter(path, head())
    writer.add_point(point(500.0))
    writer.add_point(PointResult("x", {"light.wavelength_nm": 600.0}, "failed", "it broke"))
    first, second = csv.DictReader(io.StringIO(csv_table(read_results(path))))
    assert first["light.wavelength_nm"] == "500.0" and first["status"] == "finished"
    assert float(first["cross_sections/work [nm^2]"]) == 10.0 and float(first["cross_sections/work error [nm^2]"]) == 1.0
    assert first["cross_sections/collected/objective error [nm^2]"] == ""  # no bar
    assert second["status"] == "failed" and second["cross_sections/work [nm^2]"] == ""


@given(value=st.floats(allow_nan=False), error=st.one_of(st.none(), st.floats(0, allow_nan=False)), words=st.text("aß€\"\\\n{} ", max_size=8))
def test_any_number_and_text_survives(tmp_path_factory, value, error, words):
    path = tmp_path_factory.mktemp("any") / "x.h5"
    wanted = Quantity(value, error, "nm", words)
    ResultsWriter(path, head()).add_point(PointResult(words, quantities={"emission": {"total": wanted}}, message=words))
    (found,) = read_results(path).points
    assert found.quantities["emission"]["total"] == wanted and found.message == words
