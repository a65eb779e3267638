"""Every shipped case: it is right, it says what it is, and it gives the number that it should.

The numbers of the cases with particles are those that the program gave when the cases were written, on the one grid of `quick`: they guard
against silent changes, not for truth, which the tests of laws and of published values are for. The mirror's is checked against a
quadrature written out here.
"""

from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import quad

from substrate.medium.material import material
from substrate.run.build import build, check_points
from substrate.run.case import read_case
from substrate.run.execute import run_point

CASES = Path(__file__).parents[2] / "cases"
ALL = sorted(CASES.glob("*.toml"))


@pytest.mark.parametrize("path", ALL, ids=lambda path: path.stem)
def test_each_case_is_right_and_introduces_itself(path):
    case = read_case(path)
    check_points(case.points())
    head = [line for line in case.text.splitlines()[:16] if line.startswith("#")]
    assert all(any(line.startswith(f"# {word}") for line in head) for word in ("What:", "Why:", "Time:"))
    assert case.title != path.stem and len(case.title) < 80


def test_there_are_cases():
    assert len(ALL) >= 4


def quick(name: str, number: int = 0):
    """One point of a case on one grid."""
    return run_point(read_case(CASES / f"{name}.toml").quick().points()[number])


def total_rate(layers, thickness, wavelength: float, height: float) -> float:
    """Isotropic total decay-rate factor over a plane stack: Chance, Prock & Silbey, Adv. Chem. Phys. 37, 1 (1978) (from memory), with

    F_vertical = 1 + 3/2 Re int u^3/l r_p e^{2 i k l z} du,  F_horizontal = 1 + 3/4 Re int u/l (r_s - l^2 r_p) e^{2 i k l z} du,
    l = sqrt(1 - u^2), u from 0 to infinity, r_p = +1 and r_s = -1 for a perfect mirror.
    """
    eps = [n * n / layers[0] ** 2 for n in layers]
    k = 2.0 * np.pi * layers[0].real / wavelength

    def reflections(u):
        l = [np.sqrt(e - u * u + 0j) for e in eps]
        out = []
        for admittance in ([x / e for x, e in zip(l, eps)], l):  # p, s
            r = 0.0
            for i in range(len(eps) - 2, -1, -1):
                step = (admittance[i] - admittance[i + 1]) / (admittance[i] + admittance[i + 1])
                if i + 1 < len(eps) - 1:
                    r = r * np.exp(2j * k * l[i + 1] * thickness[i])
                r = (step + r) / (1.0 + step * r)
            out.append(r)
        return l[0], *out

    def integrand(u, jacobian):
        l, r_p, r_s = reflections(u)
        vertical, horizontal = 1.5 * u**3 * r_p, 0.75 * u * (r_s - l * l * r_p)
        return float(((vertical + 2.0 * horizontal) / 3.0 * np.exp(2j * k * l * height) * jacobian(l)).real)

    # u = sin a below 1, du/l = da; u = cosh b above, du/l = -i db
    below, _ = quad(lambda a: integrand(np.sin(a), lambda l: 1.0), 0.0, np.pi / 2.0, epsabs=1e-9, limit=400)
    above, _ = quad(lambda b: integrand(np.cosh(b), lambda l: -1j), 0.0, np.arcsinh(30.0 / (k * height)), epsabs=1e-9, limit=400)
    return 1.0 + below + above


@pytest.mark.parametrize("number", [0, 30])
def test_lifetime_over_silver_mirror(number):
    point = quick("lifetime-over-silver-mirror", number)
    sample = build(read_case(CASES / "lifetime-over-silver-mirror.toml").points()[number].tables)
    layers = [complex(material(name).index(600.0)) for name in ("water", "silica", "silver", "glass")]
    expected = total_rate(layers, [10.0, 150.0], 600.0, sample.emitters[0].position_nm[2])
    emission = point.quantities["emission"]
    # 1e-6: both quadratures are good to 1e-8, and the program takes the host's index as real
    assert emission["total"].value == pytest.approx(expected, rel=1e-6)
    assert emission["lifetime_ns"].value == pytest.approx(3.5 / (0.2 + 0.8 * expected), rel=1e-6)


@pytest.mark.slow
def test_reference_sphere_on_wafer():
    cross = quick("reference-sphere-on-wafer").quantities["cross_sections"]
    # 2 %: room for a better choice of cells; the bar of the full run was 0.3 %
    assert cross["collected/ring"].value == pytest.approx(312.4, rel=0.02)
    # the two halves make up the ring; 1e-6 for three quadratures over angles
    halves = cross["collected/forward half"].value + cross["collected/backward half"].value
    assert halves == pytest.approx(cross["collected/ring"].value, rel=1e-6)


@pytest.mark.slow
def test_gap_over_gold_film():
    point = read_case(CASES / "gap-over-gold-film.toml").quick().points()[0]
    (near,) = [ask for ask in point.tables["ask"] if ask["what"] == "near field"]
    near["count"] = [31, 23]  # a coarse map: most of the time goes into it
    found = run_point(point)
    # 5 %: much less than the bar of a full run, about 20 %, of which a better choice of cells may use a part
    assert found.quantities["near_field"]["spot_1"].value == pytest.approx(159.7, rel=0.05)
    field, inside = found.arrays["field_map_e2"].values, found.arrays["field_map_inside"].values
    assert field.shape == (31, 23) and np.isfinite(field).all()
    # the ball's circle of 30 nm radius in the map of 120 x 90 nm; 10 %: fields of 3.9 nm along its rim
    assert inside.mean() == pytest.approx(np.pi * 30.0**2 / (120.0 * 90.0), rel=0.1)
    assert field[15].argmax() < 2  # above the middle the gap is the brightest place


@pytest.mark.slow
def test_lifetime_under_gold_sphere():
    emission = quick("lifetime-under-gold-sphere").quantities["emission"]
    # 5 %: a part of the full run's bar; the radiated part is the safest number near metals
    assert emission["up"].value == pytest.approx(3.73, rel=0.05)
    assert emission["quantum_yield"].value < 0.8  # quenching wins over the intrinsic yield


def test_coupling_into_a_gold_film():
    """Least reflection near 43.79 degrees for 50 nm of gold on N-BK7 at 632.8 nm (calculated with 25-digit arithmetic for gold of 0.18377+3.43125i)."""
    case = read_case(CASES / "coupling-into-a-gold-film.toml")
    points = [run_point(point) for point in case.points()]
    shares = [point.quantities["reflectance"] for point in points]
    reflected = [share["reflected"].value for share in shares]
    assert abs(35.0 + 0.25 * int(np.argmin(reflected)) - 43.786) <= 0.25  # steps of the case
    assert min(reflected) < 0.02  # the dip of 0.006 is narrow: steps of 0.25 degrees miss its bottom
    assert max(point.quantities["near_field"]["spot_1"].value for point in points) > 20.0
    total = [share["reflected"].value + share["transmitted"].value + share["absorbed/film_1"].value for share in shares]
    assert np.abs(np.array(total) - 1.0).max() < 1e-9  # rounding
