"""A run: what is asked of the questions, what reaches the file, and what happens when a point goes wrong or the run is stopped."""

import numpy as np
import pytest

from substrate.run.case import parse_case
from substrate.run.execute import choose_place, execute, run_point
from substrate.run.results import read_results

SAMPLE = """
title = "Fake"
[stack]
host = "water"
films = [ {material = "gold", thickness_nm = 50} ]
[[particle]]
shape = "sphere"
material = "gold"
diameter_nm = 60
"""
LIGHT = """
[light]
wavelength_nm = [500, 600, 700]
"""
CROSS = "[[ask]]\nwhat = 'cross sections'\n"
EMITTER = "[[emitter]]\nposition_nm = [0, 0, 70]\nwavelength_nm = 600\n"


def run(text: str, folder, listener=None):
    case = parse_case(text, "fake.toml")
    return read_results(execute(case, choose_place(case, folder), listener))


def test_each_point_is_asked_once_and_written(questions, tmp_path):
    results = run(SAMPLE + LIGHT + CROSS + "[[collector]]\nna = 0.9\n", tmp_path / "out")
    assert [call.source.wavelength_nm for call in questions.calls] == [500.0, 600.0, 700.0]
    assert results.complete and [point.status for point in results.points] == ["finished"] * 3
    cross = results.points[1].quantities["cross_sections"]
    assert list(cross) == ["absorbed", "up", "down", "guided", "stack", "work", "balance", "collected/objective"]
    assert cross["work"].value == 3600.0 and cross["work"].error == 36.0 and cross["work"].unit == "nm^2"
    assert results.points[1].method == "fake cells" and results.points[1].warnings == ("a film is thin",)
    assert (tmp_path / "out" / "fake.h5").is_file()


def test_materials_and_sketch_are_recorded(questions, tmp_path):
    results = run(SAMPLE.replace('"water"', "1.33") + LIGHT + CROSS + EMITTER, tmp_path)
    assert "gold" in results.materials and results.materials["gold"].citation
    assert len(results.materials["gold"].table) > 1 and results.materials["gold"].range_nm is not None
    constant = next(material for material in results.materials.values() if material.range_nm is None and len(material.table) == 1)
    assert np.isnan(constant.table[0, 0]) and constant.table[0, 1] in (1.33, 1.5)
    sketch = results.sketch
    assert [layer["thickness_nm"] for layer in sketch.layers] == [None, 50.0, None]
    (outline,) = sketch.outlines
    # a circle of radius 30 around (0, 30): the outline's points lie on it to the bisection's last step, 60/240/2^12 nm, and 4 digits
    assert np.hypot(outline["x_nm"], np.array(outline["z_nm"]) - 30.0) == pytest.approx(30.0, abs=3e-4)
    assert sketch.emitters == [{"x_nm": 0.0, "z_nm": 70.0, "orientation": "vertical"}]


def test_options_of_accuracy_reach_the_questions(questions, tmp_path):
    run(SAMPLE + LIGHT + CROSS + "[accuracy]\nrelative = 0.05\ncell_nm = 3\nquick = true\n", tmp_path)
    call = questions.calls[0]
    assert (call.accuracy, call.cell_nm, call.quick) == (0.05, 3.0, True)


def test_light_and_emitters_share_a_point(questions, tmp_path):
    text = SAMPLE + LIGHT + CROSS + EMITTER + EMITTER.replace("70", "80") + "lifetime_ns = 3\n[[ask]]\nwhat = 'emission'\n"
    results = run(text, tmp_path)
    assert [call.name for call in questions.calls[:3]] == ["scatter", "emit", "emit"]
    emission = results.points[0].quantities["emission"]
    assert emission["emitter_1/total"].value == 70.0 and emission["emitter_2/total"].value == 80.0
    assert emission["emitter_2/lifetime_ns"].unit == "ns" and "emitter_1/lifetime_ns" not in emission
    assert "cross_sections" in results.points[0].quantities


def test_what_was_not_asked_is_not_computed(questions, tmp_path):
    results = run(SAMPLE + LIGHT + EMITTER + "[[ask]]\nwhat = 'emission'\n", tmp_path)
    assert {call.name for call in questions.calls} == {"emit"}
    assert list(results.points[0].quantities) == ["emission"] and "total" in results.points[0].quantities["emission"]


def test_field_maps_and_spots(questions, tmp_path):
    near = "[[ask]]\nwhat = 'near field'\npoints_nm = [[0, 0, 1], [0, 0, 2]]\nplane = 'xz'\nsize_nm = [40, 60]\ncount = [4, 6]\n"
    second = "[[ask]]\nwhat = 'near field'\nplane = 'xy'\nat_nm = 5\nsize_nm = [40, 60]\ncenter_nm = [100, 0]\ncount = [4, 6]\n"
    point = run(SAMPLE + LIGHT + near + second, tmp_path).points[0]
    assert {name: quantity.value for name, quantity in point.quantities["near_field"].items()} == {"spot_1": 10.0, "spot_2": 11.0}
    field = point.arrays["field_map_e2"]
    u, v = point.arrays["field_map_u_nm"].values, point.arrays["field_map_v_nm"].values
    assert u.tolist() == [-15.0, -5.0, 5.0, 15.0] and v.tolist() == [5.0, 15.0, 25.0, 35.0, 45.0, 55.0]
    assert np.array_equal(field.values, u[:, None] + 1000.0 * v[None, :])  # the fake's intensity is x + 1000 z
    assert field.axes == (("x", "nm"), ("z", "nm")) and field.attributes["plane"] == "xz at y = 0 nm"
    assert np.array_equal(point.arrays["field_map_inside"].values, np.broadcast_to(v < 20.0, (4, 6)))
    other = point.arrays["map_2/field_map_e2"]
    assert other.attributes["plane"] == "xy at z = 5 nm" and np.all(other.values[0] == 85.0 + 5000.0)


def test_far_field_patterns_of_light_and_emitter(questions, tmp_path):
    far = "[[ask]]\nwhat = 'far field'\ncount = [7, 4]\n"
    point = run(SAMPLE + LIGHT + EMITTER + far, tmp_path).points[0]
    polar, azimuth = point.arrays["pattern_polar_deg"].values, point.arrays["pattern_azimuth_deg"].values
    assert polar.tolist() == [0.0, 30.0, 60.0, 90.0, 120.0, 150.0, 180.0] and azimuth.tolist() == [0.0, 90.0, 180.0, 270.0]
    pattern = point.arrays["pattern"]
    assert pattern.unit == "nm^2/sr" and np.array_equal(pattern.values, polar[:, None] + 1000.0 * azimuth[None, :])
    assert point.arrays["emitter_1/pattern"].unit == "1/sr"
    absorbing = run(SAMPLE.replace("[[particle]]", 'base = "silver"\n[[particle]]', 1) + LIGHT + far, tmp_path).points[0]
    assert absorbing.arrays["pattern_polar_deg"].values[-1] == 90.0  # nothing leaves below


def test_convergence_is_kept(questions, tmp_path):
    arrays = run(SAMPLE + LIGHT + CROSS, tmp_path).points[0].arrays
    assert arrays["convergence/work/cells_across"].values.tolist() == [15.0, 30.0]
    assert arrays["convergence/work/values"].values.tolist() == [1.0, 2.0]
    assert arrays["convergence/work/fit"].values.tolist() == [3.0, -0.5, 0.0] and arrays["convergence/work/fit"].error == 0.1
    assert "convergence/collected_objective/values" in arrays


def test_a_point_that_fails_does_not_stop_the_others(questions, tmp_path):
    questions.fail_at = {1: questions.wrong_input()}
    results = run(SAMPLE + LIGHT + CROSS, tmp_path)
    assert [point.status for point in results.points] == ["finished", "failed", "finished"]
    assert results.points[1].message == "the emitter sits in a wall" and results.points[1].quantities == {}


def test_an_iteration_that_stopped_keeps_its_best_answer(questions, tmp_path):
    from substrate.source.plane_wave import PlaneWave

    questions.fail_at = {0: questions.not_converged(PlaneWave(500.0))}
    first = run(SAMPLE + LIGHT + CROSS, tmp_path).points[0]
    assert first.status == "not converged" and "1e-2 after 500 products" in first.message
    assert first.quantities["cross_sections"]["work"].value == 3000.0 and first.quantities["cross_sections"]["work"].error is None


def test_a_fault_of_the_program_is_not_hidden(questions, tmp_path):
    questions.fail_at = {0: AttributeError("a bug")}
    with pytest.raises(AttributeError):
        run(SAMPLE + LIGHT + CROSS, tmp_path)


def test_an_interrupted_run_keeps_its_points_and_goes_on(questions, tmp_path):
    text = SAMPLE + LIGHT + CROSS
    questions.fail_at = {2: KeyboardInterrupt()}
    case = parse_case(text, "fake.toml")
    with pytest.raises(KeyboardInterrupt):
        execute(case, choose_place(case, tmp_path / "out"))
    kept = read_results(tmp_path / "out" / "fake.h5")
    assert len(kept.points) == 2 and not kept.complete
    place = choose_place(case, tmp_path / "out")
    assert (place.folder, place.resumed) == (tmp_path / "out", 2)
    execute(case, place)
    assert [call.source.wavelength_nm for call in questions.calls] == [500.0, 600.0, 700.0, 700.0]
    results = read_results(place.results)
    assert results.complete and [point.parameters["light.wavelength_nm"] for point in results.points] == [500.0, 600.0, 700.0]
    assert results.created == kept.created


def test_a_run_that_was_interrupted_in_its_first_point_goes_on(questions, tmp_path):
    case = parse_case(SAMPLE + LIGHT + CROSS, "fake.toml")
    questions.fail_at = {0: KeyboardInterrupt()}
    with pytest.raises(KeyboardInterrupt):
        execute(case, choose_place(case, tmp_path / "out"))
    place = choose_place(case, tmp_path / "out")
    assert (place.folder, place.resumed) == (tmp_path / "out", 0)
    assert read_results(execute(case, place)).complete


def test_finished_results_and_other_cases_keep_their_folders(questions, tmp_path):
    text = SAMPLE + LIGHT + CROSS
    run(text, tmp_path / "out")
    case = parse_case(text, "fake.toml")
    assert choose_place(case, tmp_path / "out").folder == tmp_path / "out-2"
    questions.fail_at = {4: KeyboardInterrupt()}
    with pytest.raises(KeyboardInterrupt):
        execute(case, choose_place(case, tmp_path / "out"))
    # the unfinished run in out-2 is this case's; one with another text or other options is not continued
    assert choose_place(case, tmp_path / "out") == choose_place(case, tmp_path / "out-2")
    assert choose_place(parse_case(text + "# changed\n", "fake.toml"), tmp_path / "out").folder == tmp_path / "out-3"
    assert choose_place(case.quick(), tmp_path / "out").folder == tmp_path / "out-3"


def test_folders_of_other_things_are_left_alone(tmp_path):
    case = parse_case(SAMPLE + LIGHT + CROSS, "fake.toml")
    (tmp_path / "empty").mkdir()
    assert choose_place(case, tmp_path / "empty").folder == tmp_path / "empty"
    (tmp_path / "full").mkdir()
    (tmp_path / "full" / "notes.txt").write_text("mine", encoding="utf-8")
    assert choose_place(case, tmp_path / "full").folder == tmp_path / "full-2"
    (tmp_path / "file").write_text("mine", encoding="utf-8")
    assert choose_place(case, tmp_path / "file").folder == tmp_path / "file-2"


def test_missed_accuracy_is_said(questions, tmp_path):
    questions.bar = 0.05
    (point, *_) = run(SAMPLE + LIGHT + CROSS + "[[collector]]\nna = 0.9\n", tmp_path / "a").points
    (words,) = [words for words in point.warnings if words.startswith("the accuracy asked for of 2 % is not reached by")]
    assert "work (5 %)" in words and "collected/objective (5 %)" in words
    assert "guided" not in words  # 5 % of a sixth of the work is less than 2 % of the work
    relaxed = run(SAMPLE + LIGHT + CROSS + "[accuracy]\nrelative = 0.1\n", tmp_path / "b").points[0]
    assert not any("not reached" in words for words in relaxed.warnings)


def test_progress_rises_to_one_and_tells_the_time_left(questions, tmp_path):
    events = []
    run(SAMPLE + LIGHT + CROSS + EMITTER + "[[ask]]\nwhat = 'emission'\n", tmp_path, events.append)
    done = [event.done for event in events]
    assert done == sorted(done) and done[0] == pytest.approx(0.25 / 6) and done[-1] == pytest.approx(1.0)
    assert [event.point for event in events] == [1] * 4 + [2] * 4 + [3] * 4
    assert all(event.seconds_left >= 0.0 for event in events)


def test_a_point_can_be_run_on_its_own(questions):
    point = parse_case(SAMPLE + LIGHT + CROSS).points()[2]
    assert run_point(point).label == "light.wavelength_nm = 700"
