"""What bodies have in common in the cells that several of them reach, and with it the share of a union."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from substrate.particle.composite import Union
from substrate.particle.filling import CellGrid, Share, between, breaks, line_ends, runs, share_of_convex, stretches
from substrate.particle.placement import Particle

_NODES = 24  # a stretch
_COLUMNS = 20  # footprints at once


def share(body: Particle, grid: CellGrid) -> Share:
    """The share of each cell that a body fills; of a union the parts' shares added up, less what they have in common."""
    if not isinstance(body, Union):
        return share_of_convex(body, grid)
    shares = [share_of_convex(part, grid) for part in body.parts]
    fill = np.sum([s.fill for s in shares], axis=0)
    moment = np.zeros((grid.count, 3))
    for s in shares:
        moment[s.cells] += s.moment
    full = np.any([s.fill >= 1.0 - 1e-12 for s in shares], axis=0)
    common = np.flatnonzero((np.count_nonzero([s.fill for s in shares], axis=0) > 1) & ~full)
    double = overlap(body.parts, grid, common)
    fill[common] -= double.fill
    moment[common] -= double.moment
    full[common[double.covered]] = True
    fill = np.where(full, 1.0, np.clip(fill, 0.0, 1.0))
    cells = np.flatnonzero((fill > 0.0) & ~full)
    return Share(fill, cells, moment[cells])


@dataclass(frozen=True)
class Overlap:
    """By how much the bodies' shares of some cells exceed that of all as one.

    fill: (n,).  moment: (n, 3), see `Share`.  covered: (n,), True where all together leave nothing of the cell.
    """

    fill: np.ndarray
    moment: np.ndarray
    covered: np.ndarray


def overlap(bodies: Sequence[Particle], grid: CellGrid, cells: np.ndarray) -> Overlap:
    """What bodies, unions among them, have in common in cells (n,), flat numbers in ascending order."""
    sums, covered = np.zeros((len(cells), 4)), np.zeros(len(cells), dtype=bool)
    columns, of_cell = np.unique(cells // grid.shape[2], return_inverse=True)
    footprints = np.stack(np.unravel_index(columns, grid.shape[:2]), axis=1)
    for start in range(0, len(columns), _COLUMNS):
        here = np.flatnonzero((of_cell >= start) & (of_cell < start + _COLUMNS))
        lines = _lines(bodies, grid, footprints[start : start + _COLUMNS])
        first, stop = (np.searchsorted(lines.column, of_cell[here] - start, side) for side in ("left", "right"))
        owner, line = runs(first, stop)
        middle = cells[here][owner] % grid.shape[2] + 0.5
        sums[here], depth = _common(bodies, grid, lines, line, middle, owner)
        covered[here] = np.minimum.reduceat(depth, np.searchsorted(owner, np.arange(len(here)))) > 1.0 - 1e-12
    return Overlap(sums[:, 0], sums[:, 1:], covered)


@dataclass(frozen=True)
class _Lines:
    """Stretches of lines along y on which no silhouette begins or ends: column (l,) in ascending order, x (l,), y and weight (l, 24).

    center: (l, 2), the middle of the footprint. All in cells.
    """

    column: np.ndarray
    x: np.ndarray
    y: np.ndarray
    weight: np.ndarray
    center: np.ndarray


def _lines(bodies: Sequence[Particle], grid: CellGrid, footprints: np.ndarray) -> _Lines:
    """Quadrature over footprints (c, 2), divided at the silhouettes of all bodies."""
    convex = [part for body in bodies for part in getattr(body, "parts", (body,))]
    sides = np.tile([0.0, 1.0], (len(footprints), 1))
    ends = np.concatenate([sides, *(breaks(body, grid, footprints) for body in convex)], axis=1)
    column, low, high = stretches(np.nan_to_num(ends, nan=0.0))
    nodes, weight_x = between(low, high, _NODES)
    column = np.repeat(column, _NODES)
    x, y = footprints[column, 0] + nodes.ravel(), footprints[column, 1]
    ends = [np.zeros(len(x)), np.ones(len(x)), *(end for body in convex for end in line_ends(body, grid, x, y))]
    line, low, high = stretches(np.nan_to_num(np.stack(ends, axis=1), nan=0.0))
    nodes, weight_y = between(low, high, _NODES)
    weight = weight_x.ravel()[line, None] * weight_y
    return _Lines(column[line], x[line], y[line, None] + nodes, weight, footprints[column[line]] + 0.5)


def _common(bodies, grid: CellGrid, lines: _Lines, line: np.ndarray, middle: np.ndarray, owner: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Sums (cells, 4) of fill and moments counted more than once, and the least length of any vertical line in all bodies together.

    line, middle, owner: (p,), a stretch, the height of a cell over it and the cell's place in the sums.
    """
    pieces = [
        [tuple(np.clip(end[line] - middle[:, None], -0.5, 0.5) for end in piece) for piece in grid.intervals(body, lines.x[:, None], lines.y)]
        for body in bodies
    ]
    together, moment_together = _joined([piece for body in pieces for piece in body])
    alone, moment_alone = (sum(values) for values in zip(*(_joined(body) for body in pieces)))
    weight = lines.weight[line]
    double = weight * (alone - together)
    fill = double.sum(axis=1)
    columns = [
        fill,
        fill * (lines.x - lines.center[:, 0])[line],
        (double * (lines.y - lines.center[:, 1:])[line]).sum(axis=1),
        (weight * (moment_alone - moment_together)).sum(axis=1),
    ]
    return np.stack([np.bincount(owner, values) for values in columns], axis=1), together.min(axis=1)


def _joined(pieces: list) -> tuple[np.ndarray, np.ndarray]:
    """Length and first moment of the union of intervals [(low, high), ...] within [-1/2, 1/2]; empty ones have low >= high."""
    lows, highs = (np.stack(ends) for ends in zip(*pieces))
    order = np.argsort(lows, axis=0)
    lows, highs = np.take_along_axis(lows, order, axis=0), np.take_along_axis(highs, order, axis=0)
    reached = np.full(lows.shape[1:], -0.5)
    length, moment = np.zeros_like(reached), np.zeros_like(reached)
    for low, high in zip(lows, highs):
        start = np.maximum(low, reached)
        stop = np.maximum(start, high)
        length += stop - start
        moment += 0.5 * (stop**2 - start**2)
        reached = np.maximum(reached, high)
    return length, moment
