"""Scattering by a homogeneous sphere in a lossless host: the exact series of Mie, in 30-digit arithmetic.

Bohren & Huffman, Absorption and Scattering of Light by Small Particles (Wiley 1983), ch. 4. Time factor exp(-i omega t), index n + i k.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp

DIGITS = 30


@dataclass(frozen=True)
class RadialFunctions:
    """Riccati-Bessel functions psi = x j and xi = x h1 of real x, orders 0..count, and their derivatives (orders 1..count are used)."""

    psi: list
    xi: list
    psi_slope: list
    xi_slope: list


def radial_functions(x, count: int) -> RadialFunctions:
    """psi by recursion downwards, the second solution by recursion upwards: each in its stable direction."""
    x = mp.mpf(x)
    psi = [mp.mpf(0)] * (count + 1)
    for n in (count, count - 1):
        psi[n] = mp.sqrt(mp.pi * x / 2) * mp.besselj(n + mp.mpf(1) / 2, x)
    for n in range(count - 1, 0, -1):
        psi[n - 1] = (2 * n + 1) / x * psi[n] - psi[n + 1]
    y = [-mp.cos(x), -mp.cos(x) / x - mp.sin(x)]  # x y_n(x)
    for n in range(1, count):
        y.append((2 * n + 1) / x * y[n] - y[n - 1])
    xi = [mp.mpc(a, b) for a, b in zip(psi, y)]

    def slope(values):
        return [None] + [values[n - 1] - n / x * values[n] for n in range(1, count + 1)]

    return RadialFunctions(psi, xi, slope(psi), slope(xi))


def logarithmic_derivatives(z, count: int) -> list:
    """psi'/psi of complex z, orders 0..count, by recursion downwards from well above |z|."""
    z = mp.mpmathify(z)
    start = max(count, int(abs(z))) + 80
    value, out = mp.mpc(0), [None] * (count + 1)
    for n in range(start, 0, -1):
        value = n / z - 1 / (value + n / z)
        if n - 1 <= count:
            out[n - 1] = value
    return out


def enough_terms(x: float) -> int:
    """Orders after which the far-field series has converged to 20 digits and more."""
    return int(x + 12.0 * x ** (1.0 / 3.0) + 20.0)


def coefficients(m, x, count: int | None = None) -> tuple[list, list]:
    """a_n, b_n of orders 1..count (index 0 is unused) for relative index m and size parameter x = k_host radius."""
    with mp.workdps(DIGITS):
        count = count or enough_terms(float(x))
        m, x = mp.mpmathify(m), mp.mpf(x)
        outside, inside = radial_functions(x, count), logarithmic_derivatives(m * x, count)
        a, b = [None], [None]
        for n in range(1, count + 1):
            psi, xi, psi_slope, xi_slope = outside.psi[n], outside.xi[n], outside.psi_slope[n], outside.xi_slope[n]
            a.append((inside[n] / m * psi - psi_slope) / (inside[n] / m * xi - xi_slope))
            b.append((m * inside[n] * psi - psi_slope) / (m * inside[n] * xi - xi_slope))
        return a, b


@dataclass(frozen=True)
class Efficiencies:
    """Cross sections over the geometric one; q_back as in the example of Bohren & Huffman's appendix A; g is the mean cosine."""

    q_ext: float
    q_sca: float
    q_abs: float
    q_back: float
    g: float


def efficiencies(m, x) -> Efficiencies:
    """All efficiencies of a sphere of relative index m and size parameter x."""
    with mp.workdps(DIGITS):
        a, b = coefficients(m, x)
        orders = range(1, len(a))
        scale = 2 / mp.mpf(x) ** 2
        ext = scale * mp.fsum((2 * n + 1) * (a[n] + b[n]).real for n in orders)
        sca = scale * mp.fsum((2 * n + 1) * (abs(a[n]) ** 2 + abs(b[n]) ** 2) for n in orders)
        back = abs(mp.fsum((2 * n + 1) * (-1) ** n * (a[n] - b[n]) for n in orders)) ** 2 * scale / 2
        cosine = mp.mpf(0)
        for n in orders:
            if n + 1 < len(a):
                cross = a[n] * mp.conj(a[n + 1]) + b[n] * mp.conj(b[n + 1])
                cosine += mp.mpf(n * (n + 2)) / (n + 1) * cross.real
            cosine += mp.mpf(2 * n + 1) / (n * (n + 1)) * (a[n] * mp.conj(b[n])).real
        return Efficiencies(float(ext), float(sca), float(ext - sca), float(back), float(2 * scale * cosine / sca))


@dataclass(frozen=True)
class CrossSections:
    """Extinction, scattering and absorption in nm^2."""

    extinction: float
    scattering: float
    absorption: float


def cross_sections(index, radius_nm: float, wavelength_nm: float, host: float = 1.0) -> CrossSections:
    """Cross sections of a sphere; host is real, wavelength in vacuum."""
    with mp.workdps(DIGITS):
        x = 2 * mp.pi * host * mp.mpf(radius_nm) / wavelength_nm
        q = efficiencies(mp.mpmathify(index) / host, x)
        area = float(mp.pi * mp.mpf(radius_nm) ** 2)
    return CrossSections(area * q.q_ext, area * q.q_sca, area * q.q_abs)
