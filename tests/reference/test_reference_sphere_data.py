"""Spheres on stacks: the stored values agree with themselves, and with the second implementations where those reach.

The values are given to eleven digits with a relative uncertainty below 1e-8.
"""

import math

import pytest

from tests.reference.half_space_emitter import PlaneStack, total_rates
from tests.reference.sphere_on_stack import SphereCase, cases

CASES = cases()
LIT = [name for name, case in CASES.items() if case.light is not None]
LOSSLESS_BASE = [name for name in LIT if "sigma_down_nm2" in CASES[name].results]
EMITTERS = [name for name, case in CASES.items() if case.emitter is not None]


def absorbing(case: SphereCase) -> bool:
    return case.sphere.imag > 0.0


def test_the_cases_are_all_there():
    """Eight cases of scattering, four over a lossless base, and two emitters; each case is either lit or holds an emitter."""
    assert (len(LIT), len(LOSSLESS_BASE), len(EMITTERS), len(CASES)) == (8, 4, 2, 10)


@pytest.mark.parametrize("name", LIT)
def test_work_is_spent_on_absorption_and_scattering(name):
    """sigma_ext = absorbed + up + to the stack: three separate quantities, eleven digits."""
    r = CASES[name].results
    assert r["sigma_ext_nm2"] == pytest.approx(r["sigma_abs_nm2"] + r["sigma_up_nm2"] + r["sigma_to_stack_nm2"], rel=3e-10)
    assert (r["sigma_abs_nm2"] > 0.0) == absorbing(CASES[name])


@pytest.mark.parametrize("name", LOSSLESS_BASE)
def test_power_below(name):
    """Below = below + beyond the critical angle; without an absorbing film it is all that goes to the stack."""
    case = CASES[name]
    r = case.results
    assert r["sigma_down_nm2"] == pytest.approx(r["sigma_down_below_critical_nm2"] + r["sigma_down_above_critical_nm2"], rel=3e-10)
    if any(index.imag for index, _ in case.films):
        assert r["sigma_down_nm2"] < r["sigma_to_stack_nm2"]
    else:
        assert r["sigma_down_nm2"] == pytest.approx(r["sigma_to_stack_nm2"], rel=3e-10)


@pytest.mark.parametrize("name", LIT)
def test_cones_nest(name):
    r = CASES[name].results
    assert 0.0 < r["sigma_up_cone_NA0.5_nm2"] < r["sigma_up_cone_NA0.9_nm2"] < r["sigma_up_nm2"]


@pytest.mark.parametrize("name", LIT)
def test_symmetry_of_the_pattern(name):
    """The plane of incidence is a plane of symmetry: no cross-polarised light in it. At normal incidence forward and back are alike."""
    angle, polarisation = CASES[name].light
    r = CASES[name].results
    crossed = "theta" if polarisation == "s" else "phi"
    assert all(r[f"dsdO_{crossed}_{direction}"] == 0.0 for direction in ("0_0", "30_0", "60_0", "60_180"))
    if angle == 0.0:
        assert r["dsdO_phi_60_0"] == pytest.approx(r["dsdO_phi_60_180"], rel=1e-10)


@pytest.mark.parametrize("name", LIT)
def test_points_lie_outside(name):
    """Each point has its |E|^2 and stands outside the sphere and above the stack, at the distance that its name tells."""
    case = CASES[name]
    assert {f"E2_{point}" for point in case.points_nm} == {key for key in case.results if key.startswith("E2_")}
    center = (0.0, 0.0, case.gap_nm + case.radius_nm)
    distances = {"1nm_above_top": 1.0, "20nm_above_top": 20.0, "beside_5nm_x": 5.0, "beside_5nm_y": 5.0, "gap_midpoint": case.gap_nm / 2.0}
    for point, place in case.points_nm.items():
        assert math.dist(place, center) - case.radius_nm == pytest.approx(distances[point], abs=1e-9)
        assert place[2] > 0.0


@pytest.mark.parametrize("name", EMITTERS)
def test_rate_of_the_stack_alone(name):
    """b_stack_only is the rate without the sphere: the quadrature of Chance, Prock & Silbey gives its eleven digits."""
    case = CASES[name]
    position, direction = case.emitter
    rates = total_rates(PlaneStack((case.host, case.base), (), case.wavelength_nm), position[2])
    expected = rates.perpendicular if direction[2] else rates.parallel
    assert case.results["b_stack_only"] == pytest.approx(expected, rel=1e-10)


@pytest.mark.parametrize("name", EMITTERS)
def test_balance_of_the_emitters(name):
    """Lossless: all power leaves up or down. With gold: sphere and far field together leave a rest that the gold below takes."""
    r = CASES[name].results
    if "b_down" in r:
        assert r["b_down"] == pytest.approx(r["b_down_below_critical"] + r["b_down_above_critical"], rel=3e-10)
        assert r["b_total"] == pytest.approx(r["b_up"] + r["b_down"] + r["b_abs_sphere"], rel=3e-10)
    else:
        assert 0.0 < r["b_up"] + r["b_abs_sphere"] < r["b_total"]
