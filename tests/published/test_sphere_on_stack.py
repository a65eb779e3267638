"""Spheres over real stacks: the program against an independent multipole solution.

Quick runs with 16 cells across and a residual of 1e-5 (accuracy=1e-3). Every tolerance is about 1.3 times the error measured there, in %:
what it holds is the known error of the cells, and anything new is caught. The silver case is left out: its absorption is not
resolved by cells (25 to 40 % off), as the program warns.
"""

import pytest

import substrate as sb
from tests.reference.sphere_on_stack import SphereCase, cases

CASES = cases()
# name: extinction, up and cones, absorbed, down, pattern relative to its largest value, |E|^2 20 nm above the top and 5 nm beside
TOLERANCES = {
    "PSL100_Si488_gap0_th0_s": (0.16, 0.05, None, None, 0.05, 0.05, 0.35),  # -0.12, -0.04, pattern 0.03, field 0.02 and 0.26
    "PSL100_Si488_gap0_th70_s": (0.15, 0.03, None, None, 0.12, 0.05, 0.35),  # -0.11, -0.02, 0.08, 0.02, 0.24
    "PSL100_Si488_gap0_th70_p": (0.15, 0.03, None, None, 0.12, 0.05, 0.35),  # +0.12, +0.02, 0.09, 0.03, 0.25
    "PSL100_SiO2film100_Si488_gap0_th70_p": (0.14, 0.17, None, None, 0.2, 0.05, 0.35),  # -0.10, -0.13, 0.15, 0.02, 0.25
    "glass_r100_gap0_glass600_th60_s": (0.5, 0.65, None, 0.45, 0.55, 0.17, 0.6),  # -0.38, -0.49, down -0.34, 0.41, 0.13, 0.45
    # beside the silicon sphere along x the field is dark, a hundredth of that along y: the error is judged by the larger of both
    "Si_r60_gap0_glass550_th0_s": (7.1, 11.4, 9.4, 5.9, 10.6, 4.0, 1.4),  # -5.4, -8.8, absorbed -7.2, down -4.5, 8.1, 3.0, 1.0
    "Au40_gap3_Aufilm50_glass550_th60_p": (1.35, 4.2, 3.1, 4.6, 3.7, 6.0, 3.1),  # -1.0, -3.2, +2.4, -3.5, 2.8, 4.6, 2.4
}
DIRECTIONS = ((0, 0), (30, 0), (60, 0), (45, 90), (60, 180))


def stack_of(case: SphereCase) -> sb.Stack:
    return sb.Stack(case.host, [sb.Film(index, thickness) for index, thickness in case.films], case.base)


def sphere_of(case: SphereCase) -> "sb.Sphere":
    return sb.Sphere(material=case.sphere, diameter_nm=2.0 * case.radius_nm, gap_nm=case.gap_nm)


def light_of(case: SphereCase) -> "sb.PlaneWave":
    return sb.PlaneWave(case.wavelength_nm, case.light[0], 0.0, case.light[1])


CONES = [sb.Collector("NA0.5", na=0.5), sb.Collector("NA0.9", na=0.9)]


@pytest.mark.parametrize("name", TOLERANCES)
def test_quick_run_of_sixteen_cells(name):
    case = CASES[name]
    exact = case.results
    work, up, absorbed, down, pattern, above, beside = (None if t is None else t / 100.0 for t in TOLERANCES[name])
    spots = [case.points_nm[point] for point in ("20nm_above_top", "beside_5nm_x", "beside_5nm_y")]
    cell = 2.0 * case.radius_nm / 16.0
    out = sb.scatter(
        stack_of(case), [sphere_of(case)], light_of(case), CONES, spots_nm=spots, quick=True, cell_nm=cell, accuracy=1e-3
    )
    assert out.work.value == pytest.approx(exact["sigma_ext_nm2"], rel=work)
    assert out.up.value == pytest.approx(exact["sigma_up_nm2"], rel=up)
    for cone in ("NA0.5", "NA0.9"):
        assert out.collected[cone].value == pytest.approx(exact[f"sigma_up_cone_{cone}_nm2"], rel=up)
    if absorbed is not None:
        assert out.absorbed.value == pytest.approx(exact["sigma_abs_nm2"], rel=absorbed)
    if down is not None:
        assert out.down.value == pytest.approx(exact["sigma_down_nm2"], rel=down)
    lost = exact["sigma_ext_nm2"] - exact["sigma_abs_nm2"] - exact["sigma_up_nm2"]
    # what goes into the stack, by flux or by difference: a sum of terms with the errors of work and up
    assert out.stack.value + out.down.value + out.guided.value == pytest.approx(lost, rel=1.4 * max(work, up))
    expected = [exact[f"dsdO_theta_{t}_{f}"] + exact[f"dsdO_phi_{t}_{f}"] for t, f in DIRECTIONS]
    found = out.pattern([float(t) for t, _ in DIRECTIONS], [float(f) for _, f in DIRECTIONS])
    assert list(found) == pytest.approx(expected, rel=0.0, abs=pattern * max(expected))
    top, *sides = (spot.value for spot in out.spots)
    assert top == pytest.approx(exact["E2_20nm_above_top"], rel=above)
    exact_sides = [exact["E2_beside_5nm_x"], exact["E2_beside_5nm_y"]]
    assert sides == pytest.approx(exact_sides, rel=0.0, abs=beside * max(exact_sides))


@pytest.mark.parametrize(
    ("name", "cells", "total", "up"),
    [
        # %: 1.3 times the measured +13.6 and -5.0 (one cell from gold: over-absorbed, and the program says so); -0.54 and -0.47
        ("emitter_Au40_gap10_Au_mid_perp", 16, 17.7, 6.5),
        ("emitter_diel_n2_r100_gap0_glass_top10_par", 24, 0.7, 0.62),
    ],
)
def test_emitter_among_sphere_and_stack(name, cells, total, up):
    case = CASES[name]
    position, direction = case.emitter
    emitter = sb.Emitter(position, case.wavelength_nm, direction)
    out = sb.emit(stack_of(case), [sphere_of(case)], emitter, quick=True, cell_nm=2.0 * case.radius_nm / cells, accuracy=1e-3)
    assert out.total.value == pytest.approx(case.results["b_total"], rel=total / 100.0)
    assert out.up.value == pytest.approx(case.results["b_up"], rel=up / 100.0)
    if "b_down" in case.results:
        assert out.down.value == pytest.approx(case.results["b_down"], rel=up / 100.0)
    bare = sb.emit(stack_of(case), [], emitter)
    assert bare.total.value == pytest.approx(case.results["b_stack_only"], rel=1e-9)  # the quadrature's own tolerance
    if "Au" in name:
        assert any("not resolved" in warning for warning in out.warnings)


@pytest.mark.slow
def test_bars_of_nine_grids_hold_the_exact_values():
    """Polystyrene on silicon at 70 degrees, p: a full run as a user starts it. Distances of 0.2 to 0.5 bars were measured."""
    case = CASES["PSL100_Si488_gap0_th70_p"]
    exact = case.results
    spots = [case.points_nm[point] for point in ("20nm_above_top", "beside_5nm_x")]
    out = sb.scatter(stack_of(case), [sphere_of(case)], light_of(case), CONES, spots_nm=spots)
    pairs = [
        (out.work, exact["sigma_ext_nm2"]),
        (out.up, exact["sigma_up_nm2"]),
        (out.stack, exact["sigma_to_stack_nm2"]),
        (out.collected["NA0.5"], exact["sigma_up_cone_NA0.5_nm2"]),
        (out.collected["NA0.9"], exact["sigma_up_cone_NA0.9_nm2"]),
        (out.spots[0], exact["E2_20nm_above_top"]),
        (out.spots[1], exact["E2_beside_5nm_x"]),
    ]
    for quantity, value in pairs:
        assert abs(quantity.value - value) <= quantity.error, quantity.definition
        assert quantity.error < 0.02 * value  # the accuracy that was asked for: a bar of any size would hold anything
