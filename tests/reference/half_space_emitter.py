"""Decay-rate factors of a dipole over a stack, by quadrature in mpmath on a contour of its own.

Chance, Prock & Silbey, Adv. Chem. Phys. 37, 1 (1978), with s = q/k_host and l = sqrt(1 - s^2):
    perpendicular  1 + 3/2 Re int s^3/l r_p e^{2ilkz} ds,      parallel  1 + 3/4 Re int s/l (r_s - l^2 r_p) e^{2ilkz} ds.
All poles and cuts lie on or above the real axis, so the path runs below it: down from 0, along, and back up beyond the largest
index, then on along the real axis. For films the reflections come from products of 2 x 2 matrices that carry the tangential
fields from the base upwards; that differs from the recursion of reflections in the program. Tests of the module check the
independence of the path.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp

DIGITS = 22


@dataclass(frozen=True)
class PlaneStack:
    """Indices from the host (real) down to the base and the thicknesses of the films between; vacuum wavelength; all nm."""

    index: tuple
    thickness_nm: tuple
    wavelength_nm: float

    @property
    def k(self):
        """Wave number in the host."""
        return 2 * mp.pi * mp.mpmathify(self.index[0]) / self.wavelength_nm


@dataclass(frozen=True)
class PlaneRates:
    """Factors over the rate in the unbounded host."""

    perpendicular: float
    parallel: float


def reflections(stack: PlaneStack, s) -> tuple:
    """r_s, r_p at z = 0 for in-plane wave number s in units of k_host; r_p belongs to the magnetic field (+1 for a mirror)."""
    ratio = [mp.mpmathify(n) / mp.mpmathify(stack.index[0]) for n in stack.index]
    normal = [mp.sqrt(n * n - s * s) for n in ratio]
    out = []
    for weight in ([mp.mpf(1)] * len(ratio), [n * n for n in ratio]):
        admittance = [l / w for l, w in zip(normal, weight)]
        # at the top of the base: tangential field 1 and its admittance, up through each film
        first, second = mp.mpc(1), admittance[-1]
        for film in range(len(ratio) - 2, 0, -1):
            phase = normal[film] * stack.k * stack.thickness_nm[film - 1]
            # factor e^{i phase} taken out: no overflow for evanescent waves
            wave = mp.expj(2 * phase)
            cosine, sine = (1 + wave) / 2, (1 - wave) / 2
            first, second = cosine * first + sine * second / admittance[film], cosine * second + sine * first * admittance[film]
        up, down = admittance[0] * first - second, admittance[0] * first + second
        out.append(up / down)
    return tuple(out)


def total_rates(stack: PlaneStack, height_nm: float, depth: float = 0.3, beyond: float = 0.6) -> PlaneRates:
    """Both total factors, 12 digits and more. depth, beyond: of the path, in units of k_host; they must not matter."""
    with mp.workdps(DIGITS):
        kz2 = 2 * stack.k * mp.mpf(height_nm)
        largest = max(float(abs(mp.re(mp.mpmathify(n) / mp.mpmathify(stack.index[0])))) for n in stack.index)
        back = max(1.0, largest) + beyond
        sag = mp.mpf(depth) / max(1.0, float(kz2) / 12.0)
        end = back + 52 / kz2 + 1
        points = [mp.mpc(0), mp.mpc(sag, -sag)]
        points += [mp.mpc(sag + (back - 2 * sag) * j / 5, -sag) for j in range(1, 6)] + [mp.mpc(back)]
        while points[-1].real < end:
            # panels stay short against the distance of a lossy film's far poles
            step = min(max(mp.mpf(0.4), points[-1].real / 6), 12 / kz2)
            points.append(mp.mpc(min(end, points[-1].real + step)))
        return PlaneRates(*_integrals(stack, kz2, points))


def _integrals(stack: PlaneStack, kz2, points: list) -> tuple[float, float]:
    nodes = _gauss_nodes()
    across, along = mp.mpc(0), mp.mpc(0)
    for low, high in zip(points, points[1:]):
        half, middle = (high - low) / 2, (high + low) / 2
        for node, weight in nodes:
            s = middle + half * node
            normal = mp.sqrt(1 - s * s)
            r_s, r_p = reflections(stack, s)
            wave = half * weight * s / normal * mp.expj(normal * kz2)
            along += wave * s * s * r_p
            across += wave * (r_s - normal**2 * r_p)
    return float(1 + mp.mpf(3) / 2 * along.real), float(1 + mp.mpf(3) / 4 * across.real)


_NODES: list = []


def _gauss_nodes(count: int = 40) -> list:
    """Nodes and weights of Gauss and Legendre on -1..1, by Newton's method, computed once."""
    if not _NODES:
        for i in range(count):
            x = mp.cos(mp.pi * (i + mp.mpf(3) / 4) / (count + mp.mpf(1) / 2))
            for _ in range(8):
                p, before = mp.mpf(1), mp.mpf(0)
                for n in range(count):
                    p, before = ((2 * n + 1) * x * p - n * before) / (n + 1), p
                slope = count * (x * p - before) / (x * x - 1)
                x -= p / slope
            _NODES.append((x, 2 / ((1 - x * x) * slope**2)))
    return _NODES


def radiated_up(stack: PlaneStack, height_nm: float) -> PlaneRates:
    """Power to the far field above, from the interference of direct and reflected plane waves; s = sin(angle)."""
    with mp.workdps(15):
        phase = 2 * stack.k * mp.mpf(height_nm)

        def density(t):
            s, normal = mp.sin(t), mp.cos(t)
            r_s, r_p = reflections(stack, s)
            wave = mp.expj(phase * normal)
            along = s**3 * abs(1 + r_p * wave) ** 2
            across = s * (abs(1 + r_s * wave) ** 2 + normal**2 * abs(1 - r_p * wave) ** 2) / 2
            return along, across

        edges = mp.linspace(0, mp.pi / 2, 5)
        integrals = [mp.quad(lambda t, which=which: density(t)[which], edges) for which in (0, 1)]
        return PlaneRates(*(float(mp.mpf(3) / 4 * value) for value in integrals))


def mirror_rates(kz: float) -> PlaneRates:
    """Perfect mirror in closed form, kz = k_host z (Chance, Prock & Silbey 1978; Novotny & Hecht, Principles of Nano-Optics)."""
    with mp.workdps(DIGITS):
        x = 2 * mp.mpf(kz)
        sine, cosine = mp.sin(x), mp.cos(x)
        perpendicular = 1 - 3 * (cosine / x**2 - sine / x**3)
        parallel = 1 - mp.mpf(3) / 2 * (sine / x + cosine / x**2 - sine / x**3)
        return PlaneRates(float(perpendicular), float(parallel))


def static_rates(eps: complex, kz: float) -> PlaneRates:
    """Leading terms at short distance over an absorbing half-space, eps relative to the host."""
    g = ((eps - 1.0) / (eps + 1.0)).imag
    return PlaneRates(1.0 + 3.0 / 8.0 * g / kz**3, 1.0 + 3.0 / 16.0 * g / kz**3)
