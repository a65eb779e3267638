"""Figures: what their axes say, what their data files hold."""

import csv

import numpy as np
import pytest

from substrate.picture.curve import axis_parameter, draw_balance, draw_curve
from substrate.picture.field_map import draw_field_map
from substrate.picture.figure import figures, save_figures, save_material_plot, save_sketch
from substrate.picture.pattern import draw_pattern_cuts
from substrate.picture.sketch import draw_sketch
from tests.picture.samples import hot_spot, lifetimes, wafer


def read(path):
    with open(path, encoding="utf-8", newline="") as file:
        return list(csv.reader(file))


@pytest.mark.parametrize("make", [hot_spot, lifetimes, wafer])
def test_every_figure_is_written_with_its_data(make, tmp_path):
    written = save_figures(make(), tmp_path)
    pictures = [path for path in written if path.suffix == ".png"]
    assert len(pictures) >= 2 and all(path.stat().st_size > 5000 for path in pictures)
    assert all(path.read_bytes()[:4] == b"\x89PNG" for path in pictures)
    assert {path.stem for path in written if path.suffix == ".csv"} <= {path.stem for path in pictures}


def test_names_of_the_figures_of_one_point():
    names = [stem for stem, *_ in figures(hot_spot())]
    assert names == ["sample", "power_cross_sections", "field_map", "pattern_cuts", "pattern_discs", "convergence"]


def test_field_map_says_plane_unit_and_scale(tmp_path):
    figure = draw_field_map(hot_spot().points[0])
    axes, bar = figure.axes
    assert (axes.get_xlabel(), axes.get_ylabel()) == ("x (nm)", "z (nm)")
    assert "|E incident|²" in bar.get_ylabel() and "logarithmic" in bar.get_ylabel()
    assert "xz at y = 0 nm" in axes.get_title()
    save_figures(hot_spot(), tmp_path)
    rows = read(tmp_path / "field_map.csv")
    assert rows[0] == ["x (nm)", "z (nm)", "|E|^2 / |E incident|^2"] and len(rows) == 1 + 31 * 25
    values = np.asarray(hot_spot().points[0].arrays["field_map_e2"].values)
    assert float(rows[1][2]) == values[0, 0] and float(rows[-1][2]) == values[-1, -1]


def test_curve_has_bars_labels_and_a_legend_outside(tmp_path):
    results = lifetimes()
    figure = draw_curve(results, "emission", "1", ["total"])
    (axes,) = figure.axes
    assert axes.get_xlabel() == "emitter[1]: position (nm)[3]" or "position" in axes.get_xlabel()
    assert axes.get_ylabel() == "total"
    assert axes.get_legend() is None and len(figure.legends) == 1
    line = axes.containers[0].lines[0]
    assert len(line.get_xdata()) == 11  # the failed point is left out
    save_figures(results, tmp_path)
    rows = read(tmp_path / "emission.csv")
    assert rows[0][:3] == ["emitter[1].position_nm[3]", "total", "total error"] and rows[5][1] == ""


def test_two_parameters_give_a_family():
    results = wafer()
    assert axis_parameter(results) == ("particle[1].diameter_nm", ("light.polarization",))
    figure = draw_curve(results, "cross_sections", "nm^2", ["collected/ring"])
    assert [text.get_text() for text in figure.legends[0].get_texts()] == ["collected/ring (polarization s)", "collected/ring (polarization p)"]
    assert figure.axes[0].get_yscale() == "log"


def test_balance_shows_shares_of_the_work():
    figure = draw_balance(hot_spot().points[0], "cross_sections")
    (axes,) = figure.axes
    assert axes.get_xlabel() == "share of the work (%)"
    assert [round(bar.get_width(), 6) for bar in axes.patches] == [60.0, 30.0, 0.0, 10.0]


def test_pattern_cut_follows_the_plane_of_incidence():
    figure = draw_pattern_cuts(hot_spot().points[0])
    angle, values = figure.axes[0].lines[0].get_data()
    forward = values[np.argmin(np.abs(angle - np.radians(20.0)))]
    backward = values[np.argmin(np.abs(angle + np.radians(20.0)))]
    assert forward == pytest.approx(3.0 * np.cos(np.radians(20.0)) ** 2) and backward == pytest.approx(forward / 3.0)


def test_sketch_names_everything_and_says_what_is_cut():
    texts = " | ".join(text.get_text() for text in draw_sketch(lifetimes().sketch).axes[0].texts)
    for words in ("water, n = 1.33", "sphere 1, gold", "emitter, vertical", "gold, 900 nm", "cut, not to scale", "silica, 1.5 nm", "objective"):
        assert words in texts


def test_sketch_and_material_plot_files(tmp_path):
    assert save_sketch(hot_spot().sketch, tmp_path / "s.png").stat().st_size > 5000
    path = save_material_plot("gold", np.array([[400.0, 1.5, 1.9], [800.0, 0.2, 4.9]]), "A. Author (1900)", tmp_path / "m.png")
    assert path.stat().st_size > 5000
