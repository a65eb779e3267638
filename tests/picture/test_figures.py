"""Figures: what their axes say, what their data files hold."""

import csv
from dataclasses import replace

import numpy as np
import pytest

from substrate.picture.convergence import approaches, draw_convergence, least_certain
from substrate.picture.curve import axis_parameter, curves, draw_balance, draw_curve, quantity_groups
from substrate.picture.field_map import colour_scale, draw_field_map
from substrate.picture.figure import incidence_deg, pictures, save_material_plot, save_sketch
from substrate.picture.pattern import draw_pattern_cuts, draw_pattern_discs, pattern_of
from substrate.quantity import Quantity
from substrate.run.results import ArrayResult, PointResult
from tests.picture.samples import hot_spot, lifetimes, wafer


def read(path):
    with open(path, encoding="utf-8", newline="") as file:
        return list(csv.reader(file))


def legend(figure):
    return [text.get_text() for text in figure.legends[0].get_texts()]


STEMS = {
    "hot spot": {"sample", "power_cross_sections", "field_map", "pattern_cuts", "pattern_discs", "convergence"},
    "lifetimes": {"sample", "emission", "emission_ns"},
    "wafer": {"sample", "cross_sections_collected_ring", "cross_sections_work", "pattern_cuts_point_1", "pattern_discs_point_1"},
}


@pytest.mark.parametrize("name", STEMS)
def test_every_figure_is_written_with_its_data(name, folders):
    pictures = list(folders[name].glob("*.png"))
    assert {path.stem for path in pictures} == {path.stem for path in folders[name].glob("*.csv")} == STEMS[name]
    assert all(path.read_bytes()[:4] == b"\x89PNG" and path.stat().st_size > 5000 for path in pictures)
    assert all(len(read(path)) > 1 for path in folders[name].glob("*.csv"))


def test_field_map_says_plane_unit_and_scale(folders):
    figure = draw_field_map(hot_spot().points[0])
    axes, bar = figure.axes
    assert (axes.get_xlabel(), axes.get_ylabel()) == ("x (nm)", "z (nm)")
    assert bar.get_ylabel() == "|E|² / |E incident|², logarithmic"
    assert "xz at y = 0 nm" in axes.get_title()
    rows = read(folders["hot spot"] / "field_map.csv")
    assert rows[0] == ["x (nm)", "z (nm)", "|E|^2 / |E incident|^2"] and len(rows) == 1 + 31 * 25
    values = np.asarray(hot_spot().points[0].arrays["field_map_e2"].values)
    assert float(rows[1][2]) == values[0, 0] and float(rows[-1][2]) == values[-1, -1]


def test_colour_scale_is_logarithmic_from_thirty_times_the_median():
    flat = np.ones((5, 5))
    flat[0, 0] = 29.0
    assert colour_scale(flat)[1:] == ("neither", "")
    flat[0, 0] = 31.0
    assert colour_scale(flat)[2] == ", logarithmic"
    flat[0, 0], flat[1, 1] = 1e6, 0.0
    norm, extend, _ = colour_scale(flat)
    assert norm.vmin == pytest.approx(100.0) and extend == "min"  # four decades at most, and the bar says that there is more


def test_curve_has_bars_labels_and_a_legend_outside(folders):
    results = lifetimes()
    figure = draw_curve(results, "emission", "1", ["total"])
    (axes,) = figure.axes
    assert axes.get_xlabel() == "emitter 1: position z (nm)" and axes.get_ylabel() == "total"
    assert axes.get_legend() is None and legend(figure) == ["failed", "total"]
    line, _, (bars,) = axes.containers[0].lines
    assert len(line.get_xdata()) == 11  # the failed point has no value, and is marked at the foot
    first = bars.get_segments()[0]
    assert first[1][1] - first[0][1] == pytest.approx(2.0 * results.points[0].quantities["emission"]["total"].error)
    rows = read(folders["lifetimes"] / "emission.csv")
    assert rows[0] == ["emitter[1].position_nm.z", "status", "total", "total error"]
    assert rows[5][1:] == ["failed", "", ""]
    assert float(rows[1][2]) == results.points[0].quantities["emission"]["total"].value


def test_curves_without_bars_have_none():
    (curve,) = curves(lifetimes(), "emission", ["lifetime_ns"])
    assert curve.bars is None and draw_curve(lifetimes(), "emission", "ns", ["lifetime_ns"]).axes[0].get_ylabel() == "lifetime (ns)"


def test_two_parameters_give_a_family_on_a_logarithmic_axis():
    results = wafer()
    assert axis_parameter(results) == ("particle[1].diameter_nm", ("light.polarization",))
    figure = draw_curve(results, "cross_sections", "nm^2", ["collected/ring"])
    assert legend(figure) == ["not converged", "polarization s", "polarization p"]
    axes = figure.axes[0]
    assert (axes.get_xlabel(), axes.get_ylabel()) == ("particle 1: diameter (nm)", "collected: ring (nm²)")
    assert axes.get_yscale() == "log" and axes.get_xscale() == "linear"


def test_more_curves_than_colours_stay_distinct():
    base = lifetimes()
    points = [
        replace(point, parameters={**point.parameters, "light.wavelength_nm": 500.0 + i})
        for i in range(11)
        for point in base.points
        if point.status == "finished"
    ]
    figure = draw_curve(replace(base, points=tuple(points)), "emission", "1", ["total"])
    looks = {(tuple(c.lines[0].get_color()), c.lines[0].get_marker(), c.lines[0].get_linestyle()) for c in figure.axes[0].containers}
    assert len(looks) == 11


def test_balance_shows_shares_of_the_work(folders):
    (axes,) = draw_balance(hot_spot().points[0], "cross_sections").axes
    assert axes.get_xlabel() == "share of the work (%)"
    assert [round(bar.get_width(), 6) for bar in axes.patches] == [60.0, 30.0, 0.0, 10.0]
    assert "closure" in axes.get_title() and "100.0 ± 1.5 nm²" in axes.get_title()
    assert any("no error bar" in text.get_text() for text in axes.texts)
    assert read(folders["hot spot"] / "power_cross_sections.csv")[4] == ["stack", "10.0", "", "nm^2"]


def test_pattern_cut_follows_the_plane_of_incidence():
    point = hot_spot().points[0]
    figure = draw_pattern_cuts(point, incidence_deg=0.0)
    angle, values = figure.axes[0].lines[0].get_data()
    forward = values[np.argmin(np.abs(angle - np.radians(20.0)))]
    backward = values[np.argmin(np.abs(angle + np.radians(20.0)))]
    assert forward == pytest.approx(3.0 * np.cos(np.radians(20.0)) ** 2) and backward == pytest.approx(forward / 3.0)
    assert "plane of incidence (azimuth 0 / 180 deg)" in legend(figure)[0]
    turned = draw_pattern_cuts(point, incidence_deg=180.0).axes[0].lines[0].get_ydata()
    assert turned == pytest.approx(values[::-1])


def test_pattern_between_azimuths_is_interpolated_across_zero():
    pattern = pattern_of(hot_spot().points[0])
    assert pattern.at(345.0) == pytest.approx(0.5 * (pattern.at(330.0) + pattern.at(0.0)))


def test_azimuth_of_the_light_comes_from_the_series_or_the_case():
    results = replace(hot_spot(), resolved={"light": {"azimuth_deg": 30.0}})
    assert incidence_deg(results, results.points[0]) == 30.0
    assert incidence_deg(results, replace(results.points[0], parameters={"light.azimuth_deg": 75.0})) == 75.0
    assert incidence_deg(hot_spot(), hot_spot().points[0]) == 0.0


def test_discs_show_the_sides_that_there_are():
    titles = [axes.get_title() for axes in draw_pattern_discs(hot_spot().points[0]).axes]
    assert titles[:2] == ["above", ""] and "below, seen from above" in titles
    axes, bar = draw_pattern_discs(wafer().points[0]).axes
    assert (axes.get_title(), axes.get_xlabel(), bar.get_ylabel()) == ("above", "sin(polar) cos(azimuth)", "pattern (nm²/sr)")


def test_convergence_ends_at_the_answer_with_its_bar(folders):
    (axes,) = draw_convergence(hot_spot().points[0]).axes
    assert axes.get_xlabel().startswith("cell size (nm)")
    (bars,) = axes.containers[0].lines[2]
    ((low, high),) = bars.get_segments()
    assert (low[1], high[1]) == pytest.approx((-1.5, 1.5))  # 1.5 nm^2 of 100 nm^2, in per cent
    rows = read(folders["hot spot"] / "convergence.csv")
    assert rows[-1] == ["work", "nm^2", "0.0", "100.0", "1.5"]


def test_convergence_shows_the_answer_even_where_it_is_not_the_fit():
    point = hot_spot().points[0]
    finest = Quantity(102.0, 3.5, "nm^2", "work")
    point = replace(point, quantities={"cross_sections": {"work": finest}})
    (found,) = approaches(point)
    assert found.answer == finest and found.fit[0] == 100.0


def test_parts_are_measured_against_their_whole():
    point = hot_spot().points[0]
    arrays = {f"convergence/up/{part}": point.arrays[f"convergence/work/{part}"] for part in ("cell_nm", "fit")}
    arrays["convergence/up/values"] = ArrayResult(np.full(9, 30.5), "nm^2", "up")
    found = {approach.name: approach for approach in approaches(replace(point, arrays={**point.arrays, **arrays}))}
    assert (found["up"].scale, found["up"].scale_name) == (100.0, "work") and found["up"].answer.value == 30.0


def test_least_certain_point_of_a_series():
    sure, unsure = hot_spot().points[0], hot_spot().points[0]
    unsure = replace(unsure, label="unsure", quantities={"cross_sections": {"work": Quantity(100.0, 9.0, "nm^2", "work")}})
    assert least_certain(replace(hot_spot(), points=(sure, unsure, sure))).label == "unsure"
    assert least_certain(lifetimes()) is None


def test_sketch_and_material_plot_files(tmp_path):
    assert save_sketch(hot_spot().sketch, tmp_path / "s.png").stat().st_size > 5000
    path = save_material_plot("gold", np.array([[400.0, 1.5, 1.9], [800.0, 0.2, 4.9]]), "A. Author (1900)", tmp_path / "m.png")
    assert path.stat().st_size > 5000


def marks(axes):
    """Words and points of what is marked on a map."""
    texts = [text.get_text() for text in axes.texts]
    lines = [(list(line.get_xdata()), list(line.get_ydata())) for line in axes.lines]
    return texts, lines


def test_field_map_marks_the_spots_on_its_plane_and_the_interfaces():
    near = {"what": "near field", "points_nm": [[0.0, 0.0, 2.5], [38.0, 20.0, 35.0], [-40.0, 0.0, 60.0]]}
    results = replace(hot_spot(), resolved={"ask": [near]})
    point = results.points[0]
    deep = replace(point.arrays["field_map_v_nm"], values=np.linspace(-70, 81, 25))
    point = replace(point, arrays={**point.arrays, "field_map_v_nm": deep})
    (picture,) = (picture for picture in pictures(replace(results, points=(point,))) if picture.stem == "field_map")
    texts, lines = marks(picture.figure.axes[0])
    assert texts == ["surface", "spot 1", "spot 3"]  # the second one lies 20 nm off the plane
    assert ([0.0], [2.5]) in lines and ([-40.0], [60.0]) in lines
    assert [ys[0] for xs, ys in lines if len(ys) == 2] == [0.0, -60.0, -61.5]


def test_interfaces_follow_a_series_of_thicknesses():
    results = hot_spot()
    point = replace(results.points[0], parameters={"stack.films[1].thickness_nm": 20.0})
    deep = replace(point.arrays["field_map_v_nm"], values=np.linspace(-70, 81, 25))
    point = replace(point, arrays={**point.arrays, "field_map_v_nm": deep})
    (picture,) = (picture for picture in pictures(replace(results, points=(point,))) if picture.stem == "field_map")
    assert [ys[0] for _, ys in marks(picture.figure.axes[0])[1]] == [0.0, -20.0, -21.5]


def series_of(values: dict[str, list[float]], ask="emission", key="emitter[1].position_nm.z", places=None):
    """Points along one parameter with the values of each quantity, bars of a tenth."""
    count = len(next(iter(values.values())))
    points = []
    for i, place in enumerate(places or [float(i) for i in range(count)]):
        named = {name: Quantity(numbers[i], 0.1 * abs(numbers[i]), "1", name) for name, numbers in values.items()}
        points.append(PointResult(str(place), {key: place}, quantities={ask: named}))
    return replace(lifetimes(), points=tuple(points))


def test_yields_share_no_axis_with_rates():
    results = series_of({"total": [1.0, 2.0], "quantum_yield": [0.5, 0.2], "lifetime_ratio": [1.0, 0.5], "balance": [0.0, 1e-9]})
    groups = quantity_groups(results, "emission")
    assert list(groups.values()) == [["total"], ["quantum_yield"], ["lifetime_ratio"]]
    drawn = {picture.stem: picture for picture in pictures(results) if picture.stem.startswith("emission")}
    assert set(drawn) == {"emission", "emission_quantum_yield", "emission_lifetime_ratio"}
    assert drawn["emission_quantum_yield"].figure.axes[0].get_ylabel() == "quantum yield"


def test_a_negligible_curve_does_not_choose_the_scale():
    results = series_of({"total": [1.0, 2.0, 1.5], "down": [1e-4, 1e-5, 1e-6]})
    figure = draw_curve(results, "emission", "1", ["total", "down"])
    assert figure.axes[0].get_yscale() == "linear" and legend(figure) == ["total", "down (at most 0.0001)"]
    wide = draw_curve(series_of({"total": [1.0, 20.0, 150.0]}), "emission", "1", ["total"])
    assert wide.axes[0].get_yscale() == "log"


def test_shares_stay_on_a_linear_axis():
    results = series_of({"reflected": [0.9, 0.001, 0.8]}, "reflectance", "light.angle_deg")
    assert draw_curve(results, "reflectance", "1", ["reflected"]).axes[0].get_yscale() == "linear"


def test_a_series_of_words_is_drawn_over_its_words():
    results = series_of({"total": [1.0, 2.0]}, key="light.polarization", places=["s", "p"])
    assert axis_parameter(results) == ("light.polarization", ())
    (axes,) = draw_curve(results, "emission", "1", ["total"]).axes
    assert [text.get_text() for text in axes.get_xticklabels()] == ["s", "p"] and axes.get_xlabel() == "light: polarization"
    assert axes.containers[0].lines[0].get_linestyle() == "None"  # nothing lies between words


def test_bars_that_are_no_numbers_are_no_bars():
    results = series_of({"total": [1.0, 2.0, 3.0]})
    named = [{"total": Quantity(float(i + 1), error, "1", "total")} for i, error in enumerate((float("nan"), None, 0.5))]
    points = [replace(point, quantities={"emission": quantities}) for point, quantities in zip(results.points, named)]
    results = replace(results, points=tuple(points))
    (curve,) = curves(results, "emission", ["total"])
    assert np.isnan(curve.bars).tolist() == [True, True, False]
    assert draw_curve(results, "emission", "1", ["total"]).axes[0].get_xlabel() == "emitter 1: position z (nm)"


def test_material_plot_leaves_its_table_beside_it(tmp_path):
    save_material_plot("gold", np.array([[400.0, 1.5, 1.9], [800.0, 0.2, 4.9]]), "A. Author (1900)", tmp_path / "gold.png")
    assert read(tmp_path / "gold.csv") == [["wavelength (nm)", "n", "k"], ["400.0", "1.5", "1.9"], ["800.0", "0.2", "4.9"]]


def test_near_field_axis_says_what_and_where():
    results = series_of({"spot_1": [1.0, 2.0], "spot_2": [3.0, 4.0]}, "near_field")
    assert draw_curve(results, "near_field", "1", ["spot_1"]).axes[0].get_ylabel() == "|E|² / |E incident|², spot 1"
    assert draw_curve(results, "near_field", "1", ["spot_1", "spot_2"]).axes[0].get_ylabel() == "|E|² / |E incident|²"
