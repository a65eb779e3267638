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


def riccati_psi(z, count: int) -> tuple[list, list]:
    """psi_n = z j_n of complex z, orders 0..count, and the derivatives (from order 1); each order by its own Bessel function."""
    scale = mp.sqrt(mp.pi * z / 2)
    return _with_slopes([scale * mp.besselj(n + mp.mpf(1) / 2, z) for n in range(count + 1)], z)


def riccati_xi(z, count: int) -> tuple[list, list]:
    """xi_n = z h1_n of real z, as `riccati_psi`."""
    scale = mp.sqrt(mp.pi * z / 2)
    return _with_slopes([scale * mp.hankel1(n + mp.mpf(1) / 2, z) for n in range(count + 1)], z)


def _with_slopes(values: list, z) -> tuple[list, list]:
    return values, [None] + [values[n - 1] - n * values[n] / z for n in range(1, len(values))]


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
            xi, xi_slope = riccati_xi(x, count)
            psi, psi_slope = riccati_psi(self.m * x, count)
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
        factors, m_values, n_values, n_slopes = self._radial(inside, rho, count)
        cosine = z / r
        pi, tau = angular_functions(cosine, count)
        radial = polar = azimuthal = mp.mpc(0)
        for n in range(1, count + 1):
            # E = sum over n of i^n (2n+1)/(n(n+1)) (M - i N)
            magnetic = factors[n] * m_values[n]
            electric, slope = mp.mpc(0, -1) * factors[n] * n_values[n], mp.mpc(0, -1) * factors[n] * n_slopes[n]
            radial += n * (n + 1) * pi[n] * electric
            polar += pi[n] * magnetic + tau[n] * slope
            azimuthal += tau[n] * magnetic + pi[n] * slope
        across = mp.sqrt(x * x + y * y)
        cos_phi, sin_phi = (x / across, y / across) if across else (mp.mpf(1), mp.mpf(0))
        sine = across / r
        e_r, e_t, e_p = cos_phi * sine * radial, cos_phi * polar, -sin_phi * azimuthal
        along = sine * e_r + cosine * e_t
        return along * cos_phi - e_p * sin_phi, along * sin_phi + e_p * cos_phi, cosine * e_r - sine * e_t

    def _radial(self, inside: bool, rho, count: int) -> tuple[list, list, list, list]:
        """Per order: i^n (2n+1)/(n(n+1)), z_n of M, z_n/rho and (rho z_n)'/rho of N, with the coefficients of the region."""
        factors = [None] + [mp.mpc(0, 1) ** n * mp.mpf(2 * n + 1) / (n * (n + 1)) for n in range(1, count + 1)]
        psi, psi_slope = riccati_psi(rho, count)
        orders = range(1, count + 1)
        if inside:
            inner = self.inner(count)
            values = [(inner[n][0] * psi[n], inner[n][1] * psi[n], inner[n][1] * psi_slope[n]) for n in orders]
        else:
            a, b = coefficients(self.m, self.k * self.radius, count)
            xi, xi_slope = riccati_xi(rho, count)
            values = [(psi[n] - b[n] * xi[n], psi[n] - a[n] * xi[n], psi_slope[n] - a[n] * xi_slope[n]) for n in orders]
        m_values, n_values, n_slopes = zip(*values)
        return factors, [None, *(v / rho for v in m_values)], [None, *(v / rho**2 for v in n_values)], [None, *(v / rho for v in n_slopes)]
