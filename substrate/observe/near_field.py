"""The field at points above the stack, and the coupling of a point emitter to the cells: the same tensor for both.

Outside of a particle the dipole of a cell nearer than two cells is spread over the filled part of the cell, farther away it sits
at the centroid of that part; the filtered tensor of the solver rings outside and is never used there. Inside of a particle the
field is that of the cell, p/(V chi).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from substrate.errors import InputError, Problem
from substrate.green.field import averaged_tensors, direct_field, reflected_field
from substrate.green.free_space import point_tensor
from substrate.green.sommerfeld import tensor_from_scalars
from substrate.green.table import ReflectedTable
from substrate.particle.cells import Cells
from substrate.solve.problem import Solution

NEAR_CELLS = 2.000001  # not a round number: points at exactly two cells fall on one side for good
_SPOTS = 8  # per axis in a cell that is partly filled


class FilledParts:
    """Sample points in the filled part of cells, made when they are asked for.

    bodies: the particles' shapes.  A cell full of particle gets 4^3 Gauss points, a partly filled one those of 8^3 points that lie inside.
    """

    def __init__(self, cells: Cells, bodies: Sequence):
        self.cells = cells
        self.bodies = bodies
        self._known: dict[int, tuple[np.ndarray, np.ndarray]] = {}

    def spots(self, row: int) -> tuple[np.ndarray, np.ndarray]:
        """(m, 3) points in nm and their weights (m,) for the occupied cell `row`."""
        if row not in self._known:
            self._known[row] = self._make(row)
        return self._known[row]

    def _make(self, row: int) -> tuple[np.ndarray, np.ndarray]:
        h, centre = self.cells.cell_nm, self.cells.centers_nm[row]
        if self.cells.fill[row] > 1.0 - 1e-9:
            nodes, weights = np.polynomial.legendre.leggauss(4)
            axes, axis_weights = 0.5 * h * nodes, weights
        else:
            axes, axis_weights = h * ((np.arange(_SPOTS) + 0.5) / _SPOTS - 0.5), np.ones(_SPOTS)
        offsets = np.stack(np.meshgrid(axes, axes, axes, indexing="ij"), axis=-1).reshape(-1, 3)
        spots = centre + offsets
        weight = np.einsum("i,j,k->ijk", axis_weights, axis_weights, axis_weights).ravel()
        if self.cells.fill[row] <= 1.0 - 1e-9:
            inside = np.any([body.inside(spots) for body in self.bodies], axis=0)
            if not inside.any():
                return self.cells.centroid_nm[row : row + 1], np.ones(1)
            spots, weight = spots[inside], weight[inside]
        return spots, weight

    def padded(self, rows: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Spots (n, m, 3) and weights (n, m) of several cells, short ones padded with weight zero."""
        parts = [self.spots(int(row)) for row in rows]
        longest = max((len(weights) for _, weights in parts), default=0)
        spots, weights = np.zeros((len(rows), longest, 3)), np.zeros((len(rows), longest))
        for i, (part, weight) in enumerate(parts):
            spots[i, : len(part)], weights[i, : len(part)] = part, weight
        return spots, weights


def emitter_coupling(cells: Cells, filled: FilledParts, k: float, table: ReflectedTable | None, position_nm) -> np.ndarray:
    """Tensors (n, 3, 3) in 1/nm^3 that give the field at each cell for a dipole at the position; their transposes lead back."""
    position = np.asarray(position_nm, dtype=float)
    centres = cells.centers_nm
    tensors = point_tensor(k, cells.centroid_nm - position)
    distance = np.linalg.norm(centres - position, axis=1)
    near = np.flatnonzero(distance < NEAR_CELLS * cells.cell_nm)
    if len(near):
        tensors[near] = averaged_tensors(k, position, *filled.padded(near))
    if table is None:
        return tensors
    x, y = centres[:, 0] - position[0], centres[:, 1] - position[1]
    rho = np.round(np.hypot(x, y), 9)
    radii, row = np.unique(rho, return_inverse=True)
    levels, level = np.unique(np.round(centres[:, 2], 9), return_inverse=True)
    scalars = table.scalars(radii, levels + position[2])[:, row, level]
    safe = np.where(rho > 0.0, rho, 1.0)
    cosine, sine = np.where(rho > 0.0, x / safe, 1.0), np.where(rho > 0.0, y / safe, 0.0)
    return tensors + tensor_from_scalars(scalars, cosine, sine)


def total_field(
    solution: Solution,
    filled: FilledParts,
    table: ReflectedTable | None,
    excitation: Callable[[np.ndarray], np.ndarray],
    points_nm,
) -> np.ndarray:
    """Total E (n, 3) at points (n, 3) with z >= 0: excitation outside plus what the particles add; the cell's own field inside.

    table: reflected tensor for the heights of the points, None for a uniform surrounding.
    """
    points = np.ascontiguousarray(np.atleast_2d(np.asarray(points_nm, dtype=float)))
    if points.shape[1] != 3 or not np.isfinite(points).all() or (points[:, 2] < 0.0).any():
        raise InputError(Problem("points_nm", points_nm, "finite points (n, 3) with z >= 0", "Fields below the surface are not offered with particles."))
    cells = solution.problem.cells
    inside = np.any([body.inside(points) for body in filled.bodies], axis=0)
    field = np.empty((len(points), 3), dtype=complex)
    if inside.any():
        field[inside] = _inner(solution, points[inside])
    outside = np.ascontiguousarray(points[~inside])
    if len(outside):
        added = direct_field(
            solution.problem.layers.k_host, outside, cells.centroid_nm, cells.centers_nm, solution.dipoles, NEAR_CELLS * cells.cell_nm
        )
        _add_near(added, outside, solution, filled)
        if table is not None:
            added += reflected_field(table, outside, cells.centers_nm, solution.dipoles)
        field[~inside] = excitation(outside) + added
    return field


def _inner(solution: Solution, points: np.ndarray) -> np.ndarray:
    from scipy.spatial import cKDTree

    problem = solution.problem
    _, row = cKDTree(problem.cells.centers_nm).query(points)
    field = problem.polarizability.inner_field(solution.dipoles)[row]
    like_host = problem.polarizability.inverse_chi_across[row] == 0.0
    if like_host.any():  # no dipole to tell the field from: it is what excitation and the other cells make there
        reached = solution.excitation + problem.interaction.apply(solution.dipoles)
        field[like_host] = reached[row[like_host]]
    return field


def _add_near(added: np.ndarray, points: np.ndarray, solution: Solution, filled: FilledParts) -> None:
    """Add the fields of the cells near each point, spread over their filled parts."""
    from scipy.spatial import cKDTree

    cells = solution.problem.cells
    neighbours = cKDTree(points).query_ball_point(cells.centers_nm, NEAR_CELLS * cells.cell_nm)
    for row, close in enumerate(neighbours):
        if len(close):
            spots, weights = filled.spots(row)
            mean = _spread(solution.problem.layers.k_host, points[close], spots, weights, solution.dipoles[row])
            added[close] += mean


def _spread(k: float, points: np.ndarray, spots: np.ndarray, weights: np.ndarray, dipole: np.ndarray) -> np.ndarray:
    dipoles = (weights / weights.sum())[:, None] * dipole
    return direct_field(k, points, spots, spots, np.ascontiguousarray(dipoles), 0.0)
