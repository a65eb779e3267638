"""Emitter in vacuum over a lossless half-space, by its power alone: what leaves upwards and what enters the base, angle by angle.

Lukosz & Kunz, JOSA 67, 1607 and 1615 (1977). No reflected field at the dipole is used, so this is a third way to the total rate;
it works at z = 0 too. With s = q/k, l = sqrt(1 - s^2), L = sqrt(n^2 - s^2), phase e = exp(i l k z), the shares of the host power are
    up    perpendicular 3/4 int s^3/l |1 + r_p e^2|^2 ds        parallel 3/8 int s/l (|1 + r_s e^2|^2 + l^2 |1 - r_p e^2|^2) ds
    down  perpendicular 3/4 int s^3 |t_p e|^2 L/|l|^2/n^2 ds    parallel 3/8 int s (|t_s e/l|^2 L + |t_p e|^2 L/n^2) ds
with t_s = 1 + r_s and t_p = 1 + r_p of the tangential magnetic field; up runs over s < 1, down over s < n, beyond the critical
angle for s > 1.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp

DIGITS = 20


@dataclass(frozen=True)
class PowerShares:
    """Powers over that of the same dipole in the unbounded host; down = below + beyond the critical angle."""

    up: float
    down: float
    beyond_critical: float

    @property
    def total(self) -> float:
        return self.up + self.down

    @property
    def fraction_down(self) -> float:
        return self.down / self.total

    @property
    def fraction_beyond(self) -> float:
        return self.beyond_critical / self.total


def perpendicular(index: float, kz: float = 0.0) -> PowerShares:
    """Dipole along the normal, kz = k_host z; index > 1 of the base over that of the host."""
    return _shares(index, kz, 0)


def parallel(index: float, kz: float = 0.0) -> PowerShares:
    """Dipole along the surface."""
    return _shares(index, kz, 1)


def _shares(index, kz, which: int) -> PowerShares:
    with mp.workdps(DIGITS):
        n, kz = mp.mpf(index), mp.mpf(kz)
        quarter = mp.pi / 2
        # s = sin(a), ds = l da up to 1; beyond, s^2 = 1 + (n^2 - 1) sin(b)^2 removes the roots of both ends
        up = mp.quad(lambda a: _up(n, mp.sin(a), mp.cos(a), kz)[which], mp.linspace(0, quarter, 5))
        inner = mp.quad(lambda a: mp.cos(a) * _down(n, mp.sin(a), mp.cos(a), kz)[which], mp.linspace(0, quarter, 5))

        def outer_density(b):
            width = mp.sqrt(n * n - 1)
            decay, s = width * mp.sin(b), mp.sqrt(1 + (width * mp.sin(b)) ** 2)
            return decay * width * mp.cos(b) / s * _down(n, s, mp.mpc(0, decay), kz)[which]

        outer = mp.quad(outer_density, mp.linspace(0, quarter, 5))
        return PowerShares(float(up), float(inner + outer), float(outer))


def _reflections(n, s, normal) -> tuple:
    below = mp.sqrt(n * n - s * s)
    return (normal - below) / (normal + below), (n * n * normal - below) / (n * n * normal + below), below


def _up(n, s, normal, kz) -> tuple:
    """Densities over the angle for s < 1: the factor 1/l is gone with ds = l da."""
    r_s, r_p, _ = _reflections(n, s, normal)
    wave = mp.expj(2 * normal * kz)
    along = mp.mpf(3) / 4 * s**3 * abs(1 + r_p * wave) ** 2
    across = mp.mpf(3) / 8 * s * (abs(1 + r_s * wave) ** 2 + normal**2 * abs(1 - r_p * wave) ** 2)
    return along, across


def _down(n, s, normal, kz) -> tuple:
    """Densities over s. (1 + r)/l is written out, so that l = 0 is no exception."""
    below = mp.re(mp.sqrt(n * n - s * s))
    s_part, p_part = abs(2 / (normal + below)) ** 2, abs(2 * n * n / (n * n * normal + below)) ** 2
    decay = mp.exp(-2 * mp.im(normal) * kz)
    along = mp.mpf(3) / 4 * s**3 * p_part * below / n**2 * decay
    across = mp.mpf(3) / 8 * s * (s_part * below + p_part * abs(normal) ** 2 * below / n**2) * decay
    return along, across
