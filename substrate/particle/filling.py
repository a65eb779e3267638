"""How much of a body each cell of a grid holds.

Vertical chords are exact; Gauss-Legendre quadrature integrates them over the footprint of each column of cells. Where the silhouette (the
body's outline seen from above) cuts the footprint, this is divided along x into strips, which end where the silhouette begins or
ends, has a corner or meets the footprint's sides, and in a strip each line along y ends at the silhouette. The integrand then is smooth but for
the square roots at its ends, which the substitution by a sine takes out, and for the kinks where the surface leaves a cell through its floor or
ceiling. These leave 2e-4 of a cell (2e-3 at worst) in single cells; over the cells of a column they cancel,
and volumes come out to 1e-6, at worst to 1e-5 (walls that are nearly vertical).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from substrate.particle.placement import Particle

_NODES, _WEIGHTS = (0.5 * values for values in np.polynomial.legendre.leggauss(24))  # for an interval of length 1 about 0
_SAMPLES = np.linspace(0.0, 1.0, 65)  # where the silhouette is looked for
_CHUNK = 1000  # footprints or cells at once, 24 x 24 lines each: some 5 MB an array
_BISECTIONS = 28  # from 1/64 of a cell to 6e-11


@dataclass(frozen=True)
class CellGrid:
    """Cubic cells of edge cell_nm in a box of shape (nx, ny, nz) with its low corner at corner_nm (3,)."""

    cell_nm: float
    shape: tuple[int, int, int]
    corner_nm: np.ndarray

    @property
    def count(self) -> int:
        nx, ny, nz = self.shape
        return nx * ny * nz

    def centers_nm(self, cells: np.ndarray) -> np.ndarray:
        """Centres (n, 3) of cells given by their flat numbers (n,)."""
        return self.corner_nm + self.cell_nm * (np.stack(np.unravel_index(cells, self.shape), axis=-1) + 0.5)

    def intervals(self, body: Particle, x: np.ndarray, y: np.ndarray) -> list:
        """`body.intervals` with all lengths in cells from the box's low corner."""
        h, (x0, y0, z0) = self.cell_nm, self.corner_nm
        return [((low - z0) / h, (high - z0) / h) for low, high in body.intervals(x0 + h * x, y0 + h * y)]


@dataclass(frozen=True)
class Share:
    """What one body fills.

    fill: (all cells of the box,), from 0 to 1.  cells: (k,), flat numbers in ascending order of the cells that the surface crosses.
    moment: (k, 3), integral of the distance from the cell's centre over the body's part, in cells (elsewhere it is zero).
    """

    fill: np.ndarray
    cells: np.ndarray
    moment: np.ndarray


def share_of_convex(body: Particle, grid: CellGrid) -> Share:
    """The share of each cell that a convex body fills."""
    fill = np.zeros(grid.count)
    parts = [part for strips in _strips(body, grid) for part in _integrated(body, grid, strips, fill)]
    cells = np.concatenate([np.zeros(0, dtype=int), *(cells for cells, _ in parts)])
    values = np.concatenate([np.zeros((0, 4)), *(values for _, values in parts)])
    cells, which = np.unique(cells, return_inverse=True)
    sums = np.stack([np.bincount(which, column, len(cells)) for column in values.T], axis=1)
    fill[cells] = np.clip(sums[:, 0], 0.0, 1.0)
    return Share(fill, cells, sums[:, 1:])


@dataclass(frozen=True)
class _Strips:
    """Quadrature over footprints or strips of them: column (s, 2), x and weight_x (s, 24), y and weight_y (s, 24, 24), in cells."""

    column: np.ndarray
    x: np.ndarray
    weight_x: np.ndarray
    y: np.ndarray
    weight_y: np.ndarray
    whole: bool


def _strips(body: Particle, grid: CellGrid) -> Iterator[_Strips]:
    """Nodes for all footprints that a convex body reaches, in chunks."""
    low, high = ((np.array(corner) - grid.corner_nm) / grid.cell_nm for corner in body.bounds_nm())
    first = np.maximum(np.floor(low[:2] + 1e-9), 0).astype(int)
    stop = np.minimum(np.ceil(high[:2] - 1e-9), grid.shape[:2]).astype(int)
    x, y = (np.arange(a, b + 1.0) for a, b in zip(first, stop))
    corner = _reached(body, grid, x[:, None], y)
    whole = corner[1:, 1:] & corner[:-1, 1:] & corner[1:, :-1] & corner[:-1, :-1]  # its silhouette is convex
    for make, which in ((_over_whole, whole), (_over_cut, ~whole)):
        columns = first + np.argwhere(which)
        for start in range(0, len(columns), _CHUNK):
            yield make(body, grid, columns[start : start + _CHUNK])


def _reached(body: Particle, grid: CellGrid, x, y) -> np.ndarray:
    """True where the vertical lines at x, y (in cells) meet a convex body."""
    ((low, high),) = grid.intervals(body, x, y)
    return low <= high


def _over_whole(body: Particle, grid: CellGrid, columns: np.ndarray) -> _Strips:
    """Plain nodes for footprints that lie within the silhouette."""
    middle = columns + 0.5
    y = np.broadcast_to((middle[:, 1, None] + _NODES)[:, None, :], (len(columns), 24, 24))
    weights = np.broadcast_to(_WEIGHTS, y.shape)
    return _Strips(columns, middle[:, 0, None] + _NODES, weights[:, 0], y, weights, True)


def _over_cut(body: Particle, grid: CellGrid, columns: np.ndarray) -> _Strips:
    """Nodes within the silhouette, in up to five strips a footprint, and one more for each corner of the silhouette in it."""
    found = breaks(body, grid, columns)
    met = np.isfinite(found[:, 0])
    which, low, high = stretches(np.where(np.isnan(found), found[:, :1], found)[met])
    columns, (nodes, weight_x) = columns[met][which], between(low, high)
    x, y = (columns[:, 0, None] + nodes).ravel(), np.repeat(columns[:, 1], nodes.shape[1])
    inner, weight_y = between(*(np.nan_to_num(end, nan=0.5) for end in line_ends(body, grid, x, y)))
    shape = (*nodes.shape, inner.shape[1])
    return _Strips(columns, x.reshape(nodes.shape), weight_x, (y[:, None] + inner).reshape(shape), weight_y.reshape(shape), False)


def breaks(body: Particle, grid: CellGrid, columns: np.ndarray) -> np.ndarray:
    """Where along x, in cells from the footprint's low side, a convex body's silhouette begins, ends, has a corner or meets the footprint's sides.

    (c, at least 6), nan for what does not happen; the first two are the beginning and the end.
    """
    x, y = columns[:, 0, None], columns[:, 1, None]
    hit = _reached(body, grid, (x + _SAMPLES)[:, :, None], (y + _SAMPLES)[:, None, :])
    found = []
    for lines in (slice(None), slice(0, 1), slice(-1, None)):  # the whole footprint, its two sides

        def reached(t, rows, lines=lines):
            return _reached(body, grid, x[rows] + t[:, None], y[rows] + _SAMPLES[lines]).any(axis=1)

        found += _ends(hit[:, :, lines].any(axis=2), reached)
    for corner in (np.array(body.silhouette_corners()).reshape(-1, 2) - grid.corner_nm[:2]) / grid.cell_nm:
        here = (np.floor(corner) == columns).all(axis=1) & np.isfinite(found[0])
        found.append(np.where(here, corner[0] - columns[:, 0], np.nan))
    return np.stack(found, axis=1)


def stretches(ends: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Row, low and high end of every stretch between neighbouring ends (n, k) that has a length."""
    ends = np.sort(ends, axis=1)
    row, number = np.nonzero(np.diff(ends) > 1e-9)
    return row, ends[row, number], ends[row, number + 1]


def line_ends(body: Particle, grid: CellGrid, x: np.ndarray, y: np.ndarray) -> list[np.ndarray]:
    """Where the silhouette of a convex body begins and ends on lines from (x, y) to (x, y + 1), (n,) each, relative to y; nan if nowhere."""
    hit = _reached(body, grid, x[:, None], y[:, None] + _SAMPLES)
    return _ends(hit, lambda t, rows: _reached(body, grid, x[rows], y[rows] + t))


def _ends(hit: np.ndarray, reached) -> list[np.ndarray]:
    """Low and high end of the part of [0, 1] on which `reached(t, rows)` holds, from its values `hit` (n, 65) at the samples; nan if nowhere."""
    ends = []
    for order in (slice(None), slice(None, None, -1)):
        samples = _SAMPLES[order]
        first = hit[:, order].argmax(axis=1)
        end = np.where(hit.any(axis=1), samples[first], np.nan)
        rows = np.flatnonzero(first > 0)
        inner, outer = samples[first[rows]], samples[first[rows] - 1]
        for _ in range(_BISECTIONS):
            middle = 0.5 * (inner + outer)
            inside = reached(middle, rows)
            inner, outer = np.where(inside, middle, inner), np.where(inside, outer, middle)
        end[rows] = inner
        ends.append(end)
    return ends


def between(low: np.ndarray, high: np.ndarray, count: int = 24) -> tuple[np.ndarray, np.ndarray]:
    """Nodes and weights (n, count) between two ends by x = middle + half sin t, which takes the square roots at the ends out."""
    nodes, weights = np.polynomial.legendre.leggauss(count)
    middle, half = 0.5 * (low + high)[:, None], 0.5 * (high - low)[:, None]
    return middle + half * np.sin(0.5 * np.pi * nodes), half * (0.5 * np.pi * np.cos(0.5 * np.pi * nodes) * weights)


def _integrated(body: Particle, grid: CellGrid, strips: _Strips, fill: np.ndarray) -> Iterator[tuple[np.ndarray, np.ndarray]]:
    """(cells, [fill, moments] (n, 4)) by pieces; cells that hold nothing but the body are set in `fill` at once."""
    ((low, high),) = grid.intervals(body, strips.x[:, :, None], strips.y)
    met = low <= high
    weight = np.where(met, strips.weight_x[:, :, None] * strips.weight_y, 0.0)
    nz = grid.shape[2]

    def layer(rounded, reduce, values, missing):
        return np.clip(rounded(reduce(np.where(met, values, missing), axis=(1, 2))), 0, nz).astype(int)

    first, low_end = layer(np.floor, np.min, low, nz), layer(np.ceil, np.max, low, 0)
    high_end, stop = layer(np.floor, np.min, high, nz), layer(np.ceil, np.max, high, 0)
    low_end, high_end = np.where(high_end > low_end, (low_end, high_end), stop)  # between them all lines are full
    base = np.ravel_multi_index((*strips.column.T, np.zeros(len(first), dtype=int)), grid.shape)
    owner, z = runs(low_end, high_end)
    if strips.whole:
        fill[base[owner] + z] = 1.0
    else:
        yield base[owner] + z, _sums(strips, np.arange(len(weight)), weight)[owner]
    owner, z = (np.concatenate(pair) for pair in zip(runs(first, low_end), runs(high_end, stop)))
    for start in range(0, len(owner), _CHUNK):
        s, floor = owner[start : start + _CHUNK], z[start : start + _CHUNK]
        yield base[s] + floor, _clipped(strips, s, floor, low, high, weight)


def runs(first: np.ndarray, stop: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """All (i, z) with first[i] <= z < stop[i]."""
    count = np.maximum(stop - first, 0)
    owner = np.repeat(np.arange(len(count)), count)
    return owner, np.arange(count.sum()) - np.repeat(np.cumsum(count) - count, count) + first[owner]


def _sums(strips: _Strips, s: np.ndarray, weight: np.ndarray) -> np.ndarray:
    """Fill and moments in x and y of cells over strips s, from the weighted lengths (n, 24, 24) in them; and a column for that in z: (n, 4)."""
    x, y = strips.x[s] - strips.column[s, :1] - 0.5, strips.y[s] - strips.column[s, 1, None, None] - 0.5
    sums = np.zeros((len(s), 4))
    sums[:, 0] = weight.sum(axis=(1, 2))
    sums[:, 1] = (weight.sum(axis=2) * x).sum(axis=1)
    sums[:, 2] = (weight * y).sum(axis=(1, 2))
    return sums


def _clipped(strips: _Strips, s: np.ndarray, floor: np.ndarray, low: np.ndarray, high: np.ndarray, weight: np.ndarray) -> np.ndarray:
    """Fill and moments (n, 4) of the cells over strips s with their floors at `floor`."""
    height = floor[:, None, None] + 0.5
    bottom, top = np.clip(low[s] - height, -0.5, 0.5), np.clip(high[s] - height, -0.5, 0.5)
    weighted = weight[s] * (top - bottom)
    sums = _sums(strips, s, weighted)
    sums[:, 3] = 0.5 * (weighted * (top + bottom)).sum(axis=(1, 2))
    return sums


