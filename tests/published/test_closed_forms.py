"""Particles far smaller than the wavelength against closed forms of electrostatics."""

import cmath
import math

import numpy as np
import pytest

import substrate as sb
from tests.reference.closed_forms import depolarisation_factors, sphere_over_half_space, sphere_polarizability, spheroid_polarizability

WAVELENGTH = 4000.0
EPS = 4.0 + 3.0j
INDEX = cmath.sqrt(EPS)


@pytest.mark.parametrize("ratio", [2.0, 0.5])
@pytest.mark.parametrize("axis", ["along", "across"])
def test_absorption_of_small_spheroids(ratio, axis):
    """k Im(polarizability), Bohren & Huffman 1983, ch. 5. 0.7 %: 1.3 times the 0.1 to 0.5 % measured with 16 cells across the short axis."""
    k = 2.0 * math.pi / WAVELENGTH
    length, width = (8.0, 4.0) if ratio == 2.0 else (4.0, 8.0)
    body = sb.Ellipsoid(material=INDEX, diameters_nm=(length, width, width), gap_nm=10.0)
    wave = sb.PlaneWave(WAVELENGTH, 0.0, 0.0, "p" if axis == "along" else "s")
    out = sb.scatter(sb.Stack(1.0, [], 1.0), [body], wave, quick=True, cell_nm=0.25, accuracy=1e-3)
    factor = depolarisation_factors(ratio)[0 if axis == "along" else 1]
    volume = math.pi / 6.0 * length * width**2
    assert out.absorbed.value == pytest.approx(k * spheroid_polarizability(EPS, volume, factor).imag, rel=0.007)


@pytest.mark.parametrize(("angle", "polarization"), [(0.0, "s"), (75.0, "p")])
def test_small_sphere_and_its_image(angle, polarization):
    """Absorption over a high-index base and alone: their ratio is that of the squared polarizabilities, times |E|^2 of the bare stack.

    0.05 %: the neglected quadrupole is of order (a/2h)^5 = 0.1 % times a small factor, 0.012 and 0.015 % were measured; the image itself
    changes the ratio by 1.6 and 3.1 %.
    """
    stack, base = sb.Stack(1.0, [], 3.5), 3.5**2
    body = [sb.Sphere(material=INDEX, diameter_nm=4.0, gap_nm=2.0)]
    wave = sb.PlaneWave(WAVELENGTH, angle, 0.0, polarization)
    options = {"quick": True, "cell_nm": 0.25, "accuracy": 1e-3}
    ratio = sb.scatter(stack, body, wave, **options).absorbed.value / sb.scatter(sb.Stack(1.0, [], 1.0), body, wave, **options).absorbed.value
    own = sphere_polarizability(EPS, 2.0)
    perpendicular, parallel = sphere_over_half_space(EPS, base, 2.0, 4.0)
    field = np.abs(sb.scatter(stack, [], wave).field([[0.0, 0.0, 4.0]])[0]) ** 2
    expected = (field[0] + field[1]) * abs(parallel / own) ** 2 + field[2] * abs(perpendicular / own) ** 2
    assert abs(expected / field.sum() - 1.0) > 0.01  # the image matters here
    assert ratio == pytest.approx(expected, rel=5e-4)
