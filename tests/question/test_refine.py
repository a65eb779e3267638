"""Choice of grids, extrapolation and bars."""

import math

import numpy as np
import pytest

import substrate as sb
from substrate.errors import InputError
from substrate.question.refine import GRIDS, Series, estimate, extrapolate, plan_grids, solver_tolerance

H = np.linspace(1.0, 2.0, 9)


def test_a_quadratic_is_extrapolated_exactly():
    found = extrapolate(H, 7.0 - 3.0 * H + 0.5 * H**2)
    assert found.fitted == pytest.approx(7.0, rel=1e-12)
    assert np.allclose(found.fit, (7.0, -3.0, 0.5), rtol=1e-9)
    # the bar reaches from the linear to the quadratic extrapolation
    assert 0.1 < found.error < 3.0


def test_a_straight_line_leaves_no_bar():
    found = extrapolate(H, 5.0 + 0.1 * H)
    assert found.fitted == pytest.approx(5.0) and found.error < 1e-10


def test_bars_hold_against_a_cubic_with_noise():
    """Values with a third-order term and 0.1 % of noise: the bar holds in at least 85 of 100 draws."""
    rng = np.random.default_rng(11)
    held = 0
    for _ in range(100):
        a, b, c = rng.uniform(-0.05, 0.05, 3)
        found = extrapolate(H, 1.0 + a * H + b * H**2 + 0.2 * c * H**3 + 1e-3 * rng.standard_normal(9))
        held += abs(found.fitted - 1.0) <= found.error
    assert held >= 85  # two standard errors of a fit with six degrees of freedom hold in about 92 %


def test_bar_widens_by_residual_and_table():
    series = Series(tuple(H), {"work": tuple(5.0 + 0 * H)}, residual=1e-3, table_error=1e-6)
    assert series.quantity("work", "nm^2", "", 0.0).error == pytest.approx(5.0 * (1e-3 + 1e-6), rel=1e-6)


def test_unresolved_questions_span_finest_and_extrapolated():
    values = 10.0 + 4.0 * H
    series = Series(tuple(H[::-1]), {"total": tuple(values[::-1])}, 0.0, 0.0)
    found = series.quantity("total", "1", "", 0.0, resolved=False)
    assert found.value == pytest.approx(14.0) and found.error == pytest.approx(4.0, rel=1e-6)


def test_one_grid_gives_no_bar_and_nothing_is_exactly_nothing():
    series = Series((1.0,), {"work": (3.0,), "guided": (0.0,)}, 0.0, 0.0)
    assert series.quantity("work", "nm^2", "", 0.0).error is None
    many = Series(tuple(H), {"guided": (0.0,) * 9}, 1e-3, 0.0)
    assert many.quantity("guided", "nm^2", "", 100.0).error == 0.0


BALL = [sb.Sphere(material=1.6, diameter_nm=60.0)]
METAL = [sb.Sphere(material=0.3 + 3j, diameter_nm=60.0)]
LAYERS = sb.Stack(1.0, [], 1.5).at(600.0)


def test_nine_grids_over_two_to_one():
    plan = plan_grids(BALL, LAYERS, 0.02, None, False)
    assert len(plan.cells_across) == GRIDS and plan.cells_across[-1] == 2 * plan.cells_across[0]
    assert plan_grids(METAL, LAYERS, 0.02, None, False).cells_across[-1] > plan.cells_across[-1]
    fixed = plan_grids(BALL, LAYERS, 0.02, 2.5, False)
    assert fixed.cell_nm(8) == pytest.approx(2.5) and fixed.cell_nm(0) == pytest.approx(5.0)
    assert plan_grids(BALL, LAYERS, 0.02, 2.5, True).cells_across == (24.0,)


def test_close_points_at_metals_ask_for_finer_grids():
    far, near = (plan_grids(METAL, LAYERS, 0.02, None, False, clearance).cells_across[-1] for clearance in (math.inf, 4.0))
    assert near > far


def test_tolerance_follows_accuracy_and_contrast():
    assert solver_tolerance(0.02, 1.5) == pytest.approx(1e-5)
    assert solver_tolerance(0.02, 4.0) == pytest.approx(2e-4)
    assert solver_tolerance(0.4, 4.0) == 3e-4 and solver_tolerance(1e-5, 1.5) == 1e-6


@pytest.mark.parametrize("accuracy,cell,words", [(0.0, None, "between 0 and 1"), (2.0, None, "between 0 and 1"), (0.02, -1.0, "above 0"), (0.02, 0.1, "holds at most|hold")])
def test_refusals(accuracy, cell, words):
    with pytest.raises(InputError, match=words):
        plan_grids(BALL, LAYERS, accuracy, cell, False)


def test_estimate_grows_with_loss_free_metal():
    """The less a metal absorbs, the longer the iteration."""
    lossy, clean = (estimate([sb.Sphere(material=n, diameter_nm=60.0)], LAYERS).seconds for n in (0.5 + 3j, 0.05 + 3j))
    assert clean > 2.0 * lossy
    found = estimate(BALL, LAYERS, cell_nm=3.0)
    assert found.grids == GRIDS and found.cells_in_box == 8000 and 0.4 < found.occupied_cells / 8000 < 0.6


def test_thin_plates_get_fewer_cells_across_but_still_nine_grids():
    plate = [sb.Disc(material=2.0, diameter_nm=120.0, height_nm=4.0)]
    plan = plan_grids(plate, LAYERS, 0.02, None, False)
    assert plan.cells_across[-1] == 8.0 and len(plan.cells_across) == GRIDS
    assert estimate(plate, LAYERS).cells_in_box < 500_000
