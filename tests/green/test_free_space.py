"""The direct tensor: definition, limits, and what filtering leaves."""

import numpy as np
from scipy.integrate import quad

from substrate.green.free_space import filtered_scalars, filtered_self_term, point_scalars, point_tensor

K = 0.0123


def test_point_tensor_is_the_definition_by_finite_differences():
    """k^2 G = (k^2 + grad grad) e^{ikR}/(4 pi R), differentiated numerically."""
    here, step = np.array([31.0, -17.0, 22.0]), 1e-2

    def g(r):
        distance = np.linalg.norm(r)
        return np.exp(1j * K * distance) / (4.0 * np.pi * distance)

    expected = K * K * g(here) * np.eye(3, dtype=complex)
    for i in range(3):
        for j in range(3):
            a, b = step * np.eye(3)[i], step * np.eye(3)[j]
            expected[i, j] += (g(here + a + b) - g(here + a - b) - g(here - a + b) + g(here - a - b)) / (4 * step**2)
    found = point_tensor(K, here)
    assert np.abs(found - expected).max() < 1e-6 * np.abs(found).max()  # truncation (step/R)^2 and rounding of the differences


def test_filtered_scalars_against_their_fourier_integral():
    """g_F = 1/(2 pi^2 R) int_0^c q sin(qR)/(q^2 - k^2 - i0) dq, differentiated numerically; pole by principal value plus half residue."""
    cutoff, r = np.pi / 4.0, 9.3

    def g(distance):
        def smooth(q):
            pole = K * np.sin(K * distance) / (2.0 * K)
            return q * np.sin(q * distance) / (q * q - K * K) - pole * (1.0 / (q - K))

        regular = quad(smooth, 0.0, cutoff, points=[K], limit=400, epsabs=1e-13, epsrel=1e-12)[0]
        principal = 0.5 * np.sin(K * distance) * np.log((cutoff - K) / K)
        return (regular + principal + 0.5j * np.pi * np.sin(K * distance)) / (2.0 * np.pi**2 * distance)

    step = 0.02
    first = (g(r + step) - g(r - step)) / (2 * step)
    second = (g(r + step) - 2 * g(r) + g(r - step)) / step**2
    x = cutoff * r
    delta = (np.sin(x) - x * np.cos(x)) / (2 * np.pi**2 * r**3)
    radial, lateral = filtered_scalars(K, cutoff, r)
    scale = abs(radial)
    # second-order differences: (cutoff step)^2/12 = 2e-5 of the curvature, whose size is that of radial
    assert abs(radial - (K * K * g(r) + second + delta / 3)) < 2e-4 * scale
    assert abs(lateral - (K * K * g(r) + first / r + delta / 3)) < 2e-4 * scale


def test_filtered_tensor_keeps_all_radiating_waves():
    """The imaginary part, made of waves with q = k only, is that of the point tensor: power is conserved by filtering."""
    distance = np.linspace(3.0, 500.0, 40)
    for filtered, point in zip(filtered_scalars(K, np.pi / 3.0, distance), point_scalars(K, distance)):
        assert np.abs(filtered.imag - point.imag).max() < 1e-12 * np.abs(point.imag).max() + 1e-18  # rounding


def test_filtered_tensor_tends_to_the_point_tensor_as_the_inverse_square():
    """Its longitudinal rest on the lattice falls as cos(cR)/R^2: it may never be cut off."""
    h = 4.0
    rest = []
    for distance in (40.0, 80.0, 160.0):
        filtered, point = filtered_scalars(K, np.pi / h, distance), point_scalars(K, distance)
        rest.append(abs(filtered[0] - point[0]) * distance**2)
    assert max(rest) < 1.15 * min(rest)  # constant but for terms of relative order h/R = 0.1


def test_self_term_radiates_like_a_dipole():
    """Imaginary part k^3/(6 pi): the power of a unit dipole."""
    assert abs(filtered_self_term(K, 3.0).imag - K**3 / (6 * np.pi)) < 1e-15 * K**3
