"""What each cell's dipole is for a given field: filtered coupled dipoles with effective-medium boundary cells.

A cell that holds several media is treated as flat layers along its surface normal n: 1/eps_n = sum f_i/eps_i and eps_t = sum f_i
eps_i (eps relative to the host, the host's own share included). With chi = eps - 1 the polarisability of a cell of volume V is
alpha = V chi / (1 + chi (1/3 - V M)), M the filtered self term; alpha_n is written in S = 1/eps_n so that it stays smooth where
eps_n passes infinity (a nearly full metal cell).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from substrate.green.free_space import filtered_self_term
from substrate.particle.cells import Cells
from substrate.solve._kernels import scale


@dataclass(frozen=True)
class Polarizability:
    """Per cell along the normal and across it: alpha in nm^3, 1/chi (inf where the cell is the host's equal); normal (n, 3), 1 a cell of one medium."""

    along: np.ndarray
    across: np.ndarray
    inverse_chi_along: np.ndarray
    inverse_chi_across: np.ndarray
    normal: np.ndarray
    cell_volume: float

    def _split(self, vectors: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        along = np.einsum("ij,ij->i", vectors, self.normal)[:, None] * self.normal
        return along, vectors - along

    def root(self, vectors: np.ndarray) -> np.ndarray:
        """alpha^(1/2) acting on vectors (n, 3): the symmetric scaling of the system."""
        return self._apply(vectors, *self._roots)

    @cached_property
    def _roots(self) -> tuple[np.ndarray, np.ndarray]:
        return np.sqrt(self.along), np.sqrt(self.across)

    def _apply(self, vectors: np.ndarray, along: np.ndarray, across: np.ndarray) -> np.ndarray:
        out = np.empty(vectors.shape, dtype=complex)
        scale(vectors, along, across, self.normal, out)
        return out

    def inner_field(self, dipoles: np.ndarray) -> np.ndarray:
        """Field inside of the cells, p/(V chi), (n, 3)."""
        return self._apply(dipoles, self.inverse_chi_along, self.inverse_chi_across) / self.cell_volume

    def absorbed(self, dipoles: np.ndarray, k: float) -> float:
        """Ohmic loss as a cross section in nm^2 for unit incident amplitude."""
        along, across = self._split(dipoles)
        loss = -self.inverse_chi_along.imag * (np.abs(along) ** 2).sum(axis=1)
        loss -= self.inverse_chi_across.imag * (np.abs(across) ** 2).sum(axis=1)
        return float(k / self.cell_volume * loss.sum())


def polarizability(cells: Cells, relative_permittivity: np.ndarray, k: float) -> Polarizability:
    """relative_permittivity: eps_i/eps_host, one a material of the cells, complex; k: wave number of the host, 1/nm."""
    volume = cells.cell_nm**3
    shift = 1.0 / 3.0 - volume * filtered_self_term(k, cells.cell_nm)
    eps = np.asarray(relative_permittivity, dtype=complex)
    host_share = 1.0 - cells.fraction.sum(axis=1)
    inverse_eps_along = cells.fraction @ (1.0 / eps) + host_share
    chi_across = cells.fraction @ (eps - 1.0)
    complement = 1.0 - inverse_eps_along
    along = volume * complement / (inverse_eps_along + complement * shift)
    across = volume * chi_across / (1.0 + chi_across * shift)
    return Polarizability(
        along, across, _inverse(complement, inverse_eps_along), _inverse(chi_across, 1.0), cells.normal, volume
    )


def _inverse(chi: np.ndarray, numerator) -> np.ndarray:
    """numerator/chi, zero where the cell equals the host: its dipole vanishes and carries nothing."""
    empty = np.abs(chi) < 1e-14
    return np.where(empty, 0.0, numerator / np.where(empty, 1.0, chi))
