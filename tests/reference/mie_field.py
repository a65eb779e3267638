"""Amplitude functions of a homogeneous sphere and its field at points inside and outside, from the series of Mie.

Bohren & Huffman, Absorption and Scattering of Light by Small Particles (Wiley 1983): vector spherical harmonics (4.17)-(4.20),
incident, scattered and inner fields (4.37), (4.40), (4.45), coefficients (4.52)-(4.53), amplitude functions (4.74), matrix (4.77).
Time factor exp(-i omega t), index n + i k, incident amplitude 1. Angular functions by recursion, all in 30-digit arithmetic.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp
import numpy as np

from tests.reference.mie import DIGITS, coefficients, enough_terms


def angular_functions(cosine, count: int) -> tuple[list, list]:
    """pi_n and tau_n, orders 0..count (BH 4.47)."""
    pi, tau = [mp.mpf(0), mp.mpf(1)], [mp.mpf(0), mp.mpf(cosine)]
    for n in range(2, count + 1):
        pi.append(((2 * n - 1) * cosine * pi[n - 1] - n * pi[n - 2]) / (n - 1))
        tau.append(n * cosine * pi[n] - (n + 1) * pi[n - 1])
    return pi, tau


def amplitudes(m, x, angle_deg: float) -> tuple[complex, complex]:
    """S1 and S2 at the scattering angle; S1 acts on the field across the plane of scattering, S2 on the field in it.

    m: index over that of the host, x = k_host radius. dC_sca/dOmega = |S|^2 / k_host^2, C_ext = 4 pi Re S(0) / k_host^2.
    """
    with mp.workdps(DIGITS):
        a, b = coefficients(m, x)
        pi, tau = angular_functions(mp.cos(mp.mpf(angle_deg) * mp.pi / 180), len(a) - 1)
        weight = [mp.mpf(0)] + [mp.mpf(2 * n + 1) / (n * (n + 1)) for n in range(1, len(a))]
        s1 = mp.fsum(weight[n] * (a[n] * pi[n] + b[n] * tau[n]) for n in range(1, len(a)))
        s2 = mp.fsum(weight[n] * (a[n] * tau[n] + b[n] * pi[n]) for n in range(1, len(a)))
        return complex(s1), complex(s2)


@dataclass(frozen=True)
class ScatteringMatrix:
    """The four elements of the scattering matrix of a sphere (BH 4.77)."""

    s11: float
    s12: float
    s33: float
    s34: float


def scattering_matrix(m, x, angle_deg: float) -> ScatteringMatrix:
    """Elements at the scattering angle, not normalised; arguments as in `amplitudes`."""
    s1, s2 = amplitudes(m, x, angle_deg)
    cross = s2 * s1.conjugate()
    return ScatteringMatrix((abs(s1) ** 2 + abs(s2) ** 2) / 2, (abs(s2) ** 2 - abs(s1) ** 2) / 2, cross.real, cross.imag)


def riccati_bessel(z, count: int) -> tuple[list, list, list, list]:
    """psi, xi and their derivatives of complex z, orders 0..count (derivatives from 1), each order by its own Bessel function."""
    scale = mp.sqrt(mp.pi * z / 2)
    psi = [scale * mp.besselj(n + mp.mpf(1) / 2, z) for n in range(count + 1)]
    xi = [psi[n] + mp.mpc(0, 1) * scale * mp.bessely(n + mp.mpf(1) / 2, z) for n in range(count + 1)]

    def slope(values):
        return [None] + [values[n - 1] - n * values[n] / z for n in range(1, count + 1)]

    return psi, xi, slope(psi), slope(xi)


@dataclass(frozen=True)
class Sphere:
    """A sphere of complex index about center_nm in a host of real index; wavelength in vacuum."""

    index: complex
    radius_nm: float
    wavelength_nm: float
    host: float = 1.0
    center_nm: tuple[float, float, float] = (0.0, 0.0, 0.0)


def total_field(sphere: Sphere, points_nm, direction=(0.0, 0.0, 1.0), polarization=(1.0, 0.0, 0.0)) -> np.ndarray:
    """(n, 3) complex E of a plane wave with phase 0 at the coordinate origin; direction and polarization are real unit vectors, orthogonal.

    12 digits and more anywhere, inside (r < radius) and outside; on the surface itself the outer value. The centre is allowed.
    """
    frame = _frame(direction, polarization)
    with mp.workdps(DIGITS):
        series = _Series(sphere)
        out = []
        for point in np.atleast_2d(np.asarray(points_nm, dtype=float)):
            local = frame @ (point - np.asarray(sphere.center_nm))
            out.append(frame.T @ np.array([complex(c) for c in series.field(*local)]))
    phase = 2.0 * np.pi * sphere.host / sphere.wavelength_nm * np.dot(direction, sphere.center_nm)
    return np.exp(1j * phase) * np.array(out)


def _frame(direction, polarization) -> np.ndarray:
    """Rows: polarisation, direction x polarisation, direction."""
    z, x = np.asarray(direction, dtype=float), np.asarray(polarization, dtype=float)
    lengths = (abs(z @ z - 1.0), abs(x @ x - 1.0), abs(x @ z))
    if max(lengths) > 1e-12:
        raise ValueError(f"direction {direction} and polarization {polarization} must be orthogonal unit vectors")
    return np.array([x, np.cross(z, x), z])


class _Series:
    """Fields of a wave along z with E along x about the sphere's centre."""

    def __init__(self, sphere: Sphere):
        self.k = 2 * mp.pi * mp.mpf(sphere.host) / mp.mpf(sphere.wavelength_nm)
        self.radius = mp.mpf(sphere.radius_nm)
        self.m = mp.mpmathify(sphere.index) / mp.mpf(sphere.host)
        self._inner: list[tuple] = [(None, None)]

    def inner(self, count: int) -> list[tuple]:
        """(c_n, d_n), orders 1..count; the numerators of (4.52) are the Wronskian i."""
        if len(self._inner) <= count:
            x = self.k * self.radius
            _, xi, _, xi_slope = riccati_bessel(x, count)
            psi, _, psi_slope, _ = riccati_bessel(self.m * x, count)
            top = self.m * mp.mpc(0, 1)
            self._inner = [(None, None)] + [
                (top / (psi[n] * xi_slope[n] - self.m * xi[n] * psi_slope[n]), top / (self.m * psi[n] * xi_slope[n] - xi[n] * psi_slope[n]))
                for n in range(1, count + 1)
            ]
        return self._inner

    def field(self, x, y, z) -> tuple:
        """Cartesian components at a point relative to the centre."""
        x, y, z = mp.mpf(x), mp.mpf(y), mp.mpf(z)
        r = mp.sqrt(x * x + y * y + z * z)
        if r == 0:
            return (self.inner(enough_terms(float(self.k * self.radius)))[1][1], mp.mpf(0), mp.mpf(0))
        inside = r < self.radius
        rho = self.k * r * (self.m if inside else 1)
        count = enough_terms(float(abs(self.k * max(r, self.radius))))
        magnetic, electric = self._weights(inside, count)
        psi, xi, psi_slope, xi_slope = riccati_bessel(rho, count)
        cosine = z / r
        pi, tau = angular_functions(cosine, count)
        radial = polar = azimuthal = mp.mpc(0)
        for n in range(1, count + 1):
            unit = mp.mpc(0, 1) ** n * mp.mpf(2 * n + 1) / (n * (n + 1))
            # E = sum unit (M - i N) with psi for the regular part and xi for the scattered part
            m_value = unit * (magnetic[n][0] * psi[n] + magnetic[n][1] * xi[n]) / rho
            n_value = -mp.mpc(0, 1) * unit * (electric[n][0] * psi[n] + electric[n][1] * xi[n]) / rho**2
            n_slope = -mp.mpc(0, 1) * unit * (electric[n][0] * psi_slope[n] + electric[n][1] * xi_slope[n]) / rho
            radial += n * (n + 1) * pi[n] * n_value
            polar += pi[n] * m_value + tau[n] * n_slope
            azimuthal += tau[n] * m_value + pi[n] * n_slope
        across = mp.sqrt(x * x + y * y)
        cos_phi, sin_phi = (x / across, y / across) if across else (mp.mpf(1), mp.mpf(0))
        sine = across / r
        e_r, e_t, e_p = cos_phi * sine * radial, cos_phi * polar, -sin_phi * azimuthal
        along = sine * e_r + cosine * e_t
        return along * cos_phi - e_p * sin_phi, along * sin_phi + e_p * cos_phi, cosine * e_r - sine * e_t

    def _weights(self, inside: bool, count: int) -> tuple[list, list]:
        """Factors of (psi, xi) for M and for N, per order."""
        if inside:
            inner = self.inner(count)
            return [(c, 0) for c, _ in inner], [(d, 0) for _, d in inner]
        a, b = coefficients(self.m, self.k * self.radius, count)
        return [(1, -(b[n] or 0)) for n in range(count + 1)], [(1, -(a[n] or 0)) for n in range(count + 1)]
