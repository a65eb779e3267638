"""Plane-wave spectra of a set of dipoles above the stack, from which all powers that leave it follow.

With S(+-)(q) = sum_j p_j e^{-i q . rho_j} e^{+-i kz z_j}, a wave that a distant detector would send in (reciprocity) meets the
dipoles as a combination of S+ and S-: S- is what they send up directly, S+ what they send down to the stack, which reflects or
transmits it. The same S+ at q above the wave number of the host carries the near field's power to films and guided modes.

The s and p projections used everywhere, for azimuth f of the direction of travel away from the sample, u = (cos f, sin f, 0):
    s: s_hat . S;   p up, direct: (-kz u + q z) . S- / k;   p down: (kz u + q z) . S+ / k.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from substrate.medium.fresnel import normal_wave_number


@dataclass(frozen=True)
class DipoleSet:
    """Dipoles (n, 3) in nm^3 at positions (n, 3) in nm; positions on common x, y columns and z levels are summed fast."""

    positions_nm: np.ndarray
    dipoles: np.ndarray

    def joined(self, other: DipoleSet) -> DipoleSet:
        return DipoleSet(
            np.concatenate([self.positions_nm, other.positions_nm]), np.concatenate([self.dipoles, other.dipoles])
        )


@dataclass(frozen=True)
class Projections:
    """s and p projections of S- and S+, complex (n_q, n_azimuth)."""

    s_up: np.ndarray
    s_down: np.ndarray
    p_up: np.ndarray
    p_down: np.ndarray


def projections(sources: DipoleSet, k: float, q: np.ndarray, azimuth_rad: np.ndarray, upward: bool = True) -> Projections:
    """Project the spectrum of the dipoles at in-plane wave numbers q (n,) and azimuths (m,).

    k: wave number of the host.  q may exceed k (then upward=False: the upward sum would grow with height and has no use).
    """
    q = np.asarray(q, dtype=float)
    kz = normal_wave_number(k, q)
    cosine, sine = np.cos(azimuth_rad), np.sin(azimuth_rad)
    down = _sums(sources, q, kz, cosine, sine)
    up = _sums(sources, q, -kz, cosine, sine) if upward else np.zeros_like(down)
    kz_k, q_k = (kz / k)[:, None], (q / k)[:, None]

    def in_plane(sums):
        return sums[..., 0] * cosine + sums[..., 1] * sine

    def across(sums):
        return sums[..., 1] * cosine - sums[..., 0] * sine

    return Projections(
        across(up), across(down), -kz_k * in_plane(up) + q_k * up[..., 2], kz_k * in_plane(down) + q_k * down[..., 2]
    )


def _sums(sources: DipoleSet, q, kz, cosine, sine) -> np.ndarray:
    """sum_j p_j exp(-i q u.rho_j) exp(i kz z_j): levels first, then rows of x, then y. (n_q, n_azimuth, 3)."""
    position = np.round(sources.positions_nm, 9)
    x, ix = np.unique(position[:, 0], return_inverse=True)
    y, iy = np.unique(position[:, 1], return_inverse=True)
    z, iz = np.unique(position[:, 2], return_inverse=True)
    column, icol = np.unique(ix * len(y) + iy, return_inverse=True)
    box = np.zeros((len(z), len(column), 3), dtype=complex)
    np.add.at(box, (iz, icol), sources.dipoles)
    vertical = np.exp(1j * np.multiply.outer(kz, z))
    columns = (vertical @ box.reshape(len(z), -1)).reshape(len(q), len(column), 3)
    plane = np.zeros((len(q), len(x), len(y), 3), dtype=complex)
    plane[:, column // len(y), column % len(y)] = columns
    out = np.empty((len(q), len(cosine), 3), dtype=complex)
    for number, wave_number in enumerate(q):
        along_x = np.exp(-1j * wave_number * np.multiply.outer(cosine, x))
        along_y = np.exp(-1j * wave_number * np.multiply.outer(sine, y))
        rows = (along_x @ plane[number].reshape(len(x), -1)).reshape(len(cosine), len(y), 3)
        out[number] = np.einsum("ay,ayc->ac", along_y, rows)
    return out
