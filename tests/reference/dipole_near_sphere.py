"""Decay-rate factors of a dipole outside of a sphere in a lossless host, by the series of spherical waves.

Ruppin, J. Chem. Phys. 76, 1681 (1982); Chew, J. Chem. Phys. 87, 1355 (1987); Kim, Leung & George, Surf. Sci. 195, 1 (1988); from
memory, checked by the sum rule without a sphere. The functions span hundreds of decades near the surface, hence mpmath.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp

from tests.reference.mie import DIGITS, coefficients, enough_terms, radial_functions


@dataclass(frozen=True)
class SphereRates:
    """Factors over the rate in the unbounded host: dipole along the radius (perpendicular to the surface) and across (parallel)."""

    total_perpendicular: float
    total_parallel: float
    radiative_perpendicular: float
    radiative_parallel: float


def terms_for(x: float, y: float) -> int:
    """Orders for 1e-18 of the total: the terms fall as n^3 (x/y)^(2n+1)."""
    fall = 2.0 * float(mp.log(y / x))
    return max(enough_terms(y), int((42.0 + 3.0 * float(mp.log(60.0 / fall + 1.0))) / fall) + 20)


def rates(index, radius_nm: float, distance_nm: float, wavelength_nm: float, host: float = 1.0) -> SphereRates:
    """A dipole at distance_nm > 0 from the surface of a sphere; wavelength in vacuum, host real."""
    with mp.workdps(DIGITS):
        k = 2 * mp.pi * host / wavelength_nm
        x, y = k * radius_nm, k * (mp.mpf(radius_nm) + distance_nm)
        count = terms_for(x, y)
        a, b = coefficients(mp.mpmathify(index) / host, x, count)
        f = radial_functions(y, count)
        total = [mp.mpf(1), mp.mpf(1)]
        radiative = [mp.mpf(0), mp.mpf(0)]
        for n in range(1, count + 1):
            across, along = 2 * n + 1, n * (n + 1) * (2 * n + 1)
            psi, xi, psi_slope, xi_slope = f.psi[n], f.xi[n], f.psi_slope[n], f.xi_slope[n]
            total[0] -= 1.5 * along * (a[n] * xi**2).real / y**4
            total[1] -= 0.75 * across * (a[n] * xi_slope**2 + b[n] * xi**2).real / y**2
            radiative[0] += 1.5 * along * abs(psi - a[n] * xi) ** 2 / y**4
            radiative[1] += 0.75 * across * (abs(psi_slope - a[n] * xi_slope) ** 2 + abs(psi - b[n] * xi) ** 2) / y**2
        return SphereRates(*(float(v) for v in (*total, *radiative)))


def field_at_pole(index, radius_nm: float, distance_nm: float, wavelength_nm: float, host: float = 1.0) -> float:
    """|E|^2/|E0|^2 of the radial field on the polarisation axis of a plane wave, distance_nm outside the surface (Bohren & Huffman (4.45))."""
    with mp.workdps(DIGITS):
        k = 2 * mp.pi * host / wavelength_nm
        x, y = k * radius_nm, k * (mp.mpf(radius_nm) + distance_nm)
        count = enough_terms(y)
        a, _ = coefficients(mp.mpmathify(index) / host, x, count)
        f = radial_functions(y, count)
        # theta = 90 deg, phi = 0: P_n^1(0) is 0 for even n, (-1)^((n-1)/2) n!!/(n-1)!! for odd n (without the Condon-Shortley phase)
        field, legendre = mp.mpc(0), mp.mpf(1)
        for n in range(1, count + 1, 2):
            field += mp.mpc(0, 1) ** (n - 1) * (2 * n + 1) * legendre * (f.psi[n] - a[n] * f.xi[n]) / y**2
            legendre *= -mp.mpf(n + 2) / (n + 1)
        return float(abs(field) ** 2)
