"""From shapes to cubic cells: which are occupied, how much of each material they hold, and the normal of the surface in them.

The share of a body in a cell is exact along z (vertical chords in closed form) and Gauss-Legendre in x and y, with the nodes
fitted to the silhouette, for cells at the surface only; cells that are surely inside are full. Volumes come out to 1e-5: errors of 1e-3 in them would spoil the
extrapolation to zero cell size.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from substrate.errors import InputError, Problem
from substrate.particle.composite import Shell
from substrate.particle.placement import Particle

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(24)
_CHUNK = 1500  # cells at once: 24 x 24 columns each
_LEAST_FILL = 1e-6


@dataclass(frozen=True)
class Cells:
    """Occupied cells of a cubic grid.

    cell_nm: edge.  shape: cells of the box along x, y, z.  origin_nm: centre of cell (0, 0, 0).  index: (n, 3), in C order.
    materials: the distinct material specifications (m).  fraction: (n, m), volume share of each; the rest is host.
    normal: (n, 3), outward unit normal of the surface in cells that hold more than one medium, zero elsewhere.
    centroid_nm: (n, 3), centre of mass of what is not host.
    """

    cell_nm: float
    shape: tuple[int, int, int]
    origin_nm: np.ndarray
    index: np.ndarray
    materials: tuple
    fraction: np.ndarray
    normal: np.ndarray
    centroid_nm: np.ndarray

    @property
    def fill(self) -> np.ndarray:
        """Share of each cell that is not host, (n,)."""
        return self.fraction.sum(axis=1)

    @property
    def centers_nm(self) -> np.ndarray:
        return self.origin_nm + self.cell_nm * self.index


@dataclass(frozen=True)
class _Share:
    """One body on the whole box: volume share and first moment (relative to the cell's centre, in cells) by flat cell number."""

    fill: np.ndarray
    moment: np.ndarray
    at_surface: np.ndarray


def reference_extent_nm(particles: Sequence[Particle]) -> float:
    """The smallest extent of any particle's bounding box: "cells across" refers to it."""
    return min(2.0 * extent for particle in particles for extent in particle.half_extents())


def mesh(particles: Sequence[Particle], cell_nm: float) -> Cells:
    """Fill one cubic grid with all particles. Its floor is at their lowest point, never below the surface; x and y are centred.

    Raises InputError if two particles overlap or if a grid of this cell size holds nothing.
    """
    if not particles:
        raise InputError(Problem("particles", (), "at least one particle"))
    bounds = [particle.bounds_nm() for particle in particles]
    low, high = np.min([b[0] for b in bounds], axis=0), np.max([b[1] for b in bounds], axis=0)
    shape = tuple(max(1, int(np.ceil((b - a) / cell_nm - 1e-9))) for a, b in zip(low, high))
    middle = 0.5 * (low + high)
    first = middle - 0.5 * cell_nm * (np.array(shape) - 1.0)
    first[2] = low[2] + 0.5 * cell_nm
    regions = [region for particle in particles for region in _regions(particle)]
    materials = tuple(dict.fromkeys(material for _, material, _ in regions))
    fraction = np.zeros((int(np.prod(shape)), len(materials)))
    moment = np.zeros((len(fraction), 3))
    normal = np.zeros((len(fraction), 3))
    for body, material, core in regions:
        share = _share(body, first, cell_nm, shape)
        inner = _share(core, first, cell_nm, shape) if core is not None else None
        fill = share.fill - (inner.fill if inner is not None else 0.0)
        fraction[:, materials.index(material)] += fill
        moment += share.moment - (inner.moment if inner is not None else 0.0)
        surface = share.at_surface[~normal[share.at_surface].any(axis=1)]
        centres = _centres(surface, first, cell_nm, shape)
        normal[surface] = body.normal(centres)
    _refuse_overlap(fraction, len(particles))
    total = fraction.sum(axis=1)
    kept = np.flatnonzero(total > _LEAST_FILL)
    if not len(kept):
        raise InputError(Problem("cell_nm", cell_nm, "a cell size for which the particles fill at least one cell"))
    fraction = np.where(fraction[kept] < 1e-12, 0.0, fraction[kept])
    full = fraction.max(axis=1) > 1.0 - 1e-9
    fraction[full] = np.round(fraction[full])
    centroid = _centres(kept, first, cell_nm, shape) + cell_nm * moment[kept] / total[kept, None]
    index = np.stack(np.unravel_index(kept, shape), axis=1)
    return Cells(float(cell_nm), shape, first, index, materials, fraction, np.where(full[:, None], 0.0, normal[kept]), centroid)


def _regions(particle: Particle) -> list[tuple[Particle, object, Particle | None]]:
    """(body, material, what is cut out of it): outermost first, so that its normal wins in cells that hold all."""
    if isinstance(particle, Shell):
        core = particle.core
        inner = core.outer if isinstance(core, Shell) else core
        return [(particle.outer, particle.material, inner), *_regions(core)]
    return [(particle, particle.material, None)]


def _centres(flat: np.ndarray, first: np.ndarray, h: float, shape) -> np.ndarray:
    return first + h * np.stack(np.unravel_index(flat, shape), axis=1)


def _share(body: Particle, first: np.ndarray, h: float, shape) -> _Share:
    """Volume shares of one body, cell by cell."""
    count = int(np.prod(shape))
    fill, moment = np.zeros(count), np.zeros((count, 3))
    full, surface = _classify(body, first, h, shape)
    fill[full] = 1.0
    for start in range(0, len(surface), _CHUNK):
        part = surface[start : start + _CHUNK]
        fill[part], moment[part] = _quadrature(body, _centres(part, first, h, shape), h)
    return _Share(fill, moment, surface[(fill[surface] > 0.0) & (fill[surface] < 1.0 - 1e-12)])


def _classify(body: Particle, first: np.ndarray, h: float, shape) -> tuple[np.ndarray, np.ndarray]:
    """Cells full of a body, and those that its surface may cross, by nine chords over the footprint of each column.

    Every piece of a chord belongs to a convex body: over a footprint its top is lowest at a corner, so that cells below the lowest
    corner are surely full, and it rises above the samples by less than their spread. Where some of the nine miss, the
    silhouette is near and all cells between the ends of the neighbouring chords are looked at.
    """
    nx, ny, nz = shape
    x = first[0] + h * (np.arange(2 * nx + 1) - 1.0) / 2.0
    y = first[1] + h * (np.arange(2 * ny + 1) - 1.0) / 2.0
    xs, ys = np.meshgrid(x, y, indexing="ij")
    bottoms = first[2] - 0.5 * h + h * np.arange(nz)
    full = np.zeros(shape, dtype=bool)
    touched = np.zeros(shape, dtype=bool)
    for low, high in body.intervals(xs, ys):
        missed = low > high
        lows, highs, nine = (_windows(values) for values in (low, high, missed))
        whole = ~nine.any(axis=0)
        covered = (lows.max(axis=0)[..., None] <= bottoms) & (highs.min(axis=0)[..., None] >= bottoms + h)
        full |= covered & whole[..., None]
        reach_low = lows.min(axis=0) - 0.5 * np.ptp(lows, axis=0) - 1e-9 * h
        reach_high = highs.max(axis=0) + 0.5 * np.ptp(highs, axis=0) + 1e-9 * h
        rim, rim_low, rim_high = _rim(np.where(missed, np.inf, low), np.where(missed, -np.inf, high), nine)
        reach_low, reach_high = np.where(rim, rim_low - h, reach_low), np.where(rim, rim_high + h, reach_high)
        touched |= (whole | rim)[..., None] & (reach_low[..., None] <= bottoms + h) & (reach_high[..., None] >= bottoms)
    return np.flatnonzero(full), np.flatnonzero(touched & ~full)


def _windows(values: np.ndarray) -> np.ndarray:
    """The nine samples of each column's footprint: (9, nx, ny)."""
    return np.stack([values[i : values.shape[0] - 2 + i : 2, j : values.shape[1] - 2 + j : 2] for i in range(3) for j in range(3)])


def _rim(low: np.ndarray, high: np.ndarray, nine_missed: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Columns at the silhouette (some of the nine chords miss, here or next door, and some hit), with the chords' ends around them."""
    from scipy.ndimage import maximum_filter, minimum_filter

    mixed = nine_missed.any(axis=0) & ~nine_missed.all(axis=0)
    near = maximum_filter(mixed, size=3, mode="constant", cval=False)
    lowest = minimum_filter(_windows(low).min(axis=0), size=3, mode="nearest")
    highest = maximum_filter(_windows(high).max(axis=0), size=3, mode="nearest")
    return near & nine_missed.any(axis=0), lowest, highest


def _quadrature(body: Particle, centres: np.ndarray, h: float) -> tuple[np.ndarray, np.ndarray]:
    """Share of the body in cells at these centres, and its first moment in cells."""
    n = len(_NODES)
    u, weight_u = np.tile(0.5 * _NODES, (len(centres), 1)), np.tile(0.5 * _WEIGHTS, (len(centres), 1))
    v, weight_v = np.tile(0.5 * _NODES, (len(centres), n, 1)), np.tile(0.5 * _WEIGHTS, (len(centres), n, 1))
    x0, y0, z0 = (centres[:, axis, None, None] for axis in range(3))
    found = body.intervals(x0 + h * u[:, :, None], y0 + h * v)
    if len(found) == 1 and (found[0][0] > found[0][1]).any():
        _fit_along_x(body, x0[:, 0], y0, h, found[0], u, weight_u)
        low, high = body.intervals(x0 + h * u[:, :, None], y0 + h * v)[0]
        _fit_along_y(body, x0[:, 0] + h * u, y0[:, 0], h, low > high, v, weight_v)
        found = body.intervals(x0 + h * u[:, :, None], y0 + h * v)
    pieces = [(np.clip((low - z0) / h, -0.5, 0.5), np.clip((high - z0) / h, -0.5, 0.5)) for low, high in found]
    length, moment_z = _joined(pieces)
    weight = weight_u[:, :, None] * weight_v
    weighted = weight * length
    moments = (weighted * u[:, :, None], weighted * v, weight * moment_z)
    return weighted.sum(axis=(1, 2)), np.stack([m.sum(axis=(1, 2)) for m in moments], axis=1)


def _fit_along_x(body: Particle, x0, y0, h: float, found, u, weight_u) -> None:
    """Move the x nodes of cells that a convex body reaches over a part of x only into that part."""
    hit = ~(found[0] > found[1]).all(axis=2)
    cut = np.flatnonzero(hit.any(axis=1) & ~hit.all(axis=1))
    if not len(cut):
        return
    base = 0.5 * np.concatenate([[-1.0], _NODES, [1.0]])

    def reached(middle):
        low, high = body.intervals((x0[cut] + h * middle[:, None])[:, :, None], y0[cut] + h * base)[0]
        return (low <= high).any(axis=(1, 2))

    u[cut], weight_u[cut] = _between(*_ends(hit[cut], reached))


def _fit_along_y(body: Particle, x, y0, h: float, missed, v, weight_v) -> None:
    """Move the y nodes of lines that a convex body meets on a part of the cell only into that part. x: (cells, 24), nm."""
    cut = missed.any(axis=2) & ~missed.all(axis=2)
    if not cut.any():
        return
    across, middle_y = x[cut], np.broadcast_to(y0, cut.shape)[cut]

    def reached(middle):
        low, high = body.intervals(across, middle_y + h * middle)[0]
        return low <= high

    v[cut], weight_v[cut] = _between(*_ends(~missed[cut], reached))


def _ends(hit: np.ndarray, reached) -> tuple[np.ndarray, np.ndarray]:
    """Ends of the part of [-1/2, 1/2] on which `reached` holds, by bisection from the nodes next to them; hit: (n, 24)."""
    u = 0.5 * np.concatenate([[-1.0], _NODES, [1.0]])
    first, last = hit.argmax(axis=1) + 1, hit.shape[1] - hit[:, ::-1].argmax(axis=1)
    ends = []
    for inner, outer in ((u[first], u[first - 1]), (u[last], u[last + 1])):
        for _ in range(44):
            middle = 0.5 * (inner + outer)
            inside = reached(middle)
            inner, outer = np.where(inside, middle, inner), np.where(inside, outer, middle)
        ends.append(inner)
    return tuple(ends)


def _between(low: np.ndarray, high: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Nodes and weights between two ends, by x = middle + half sin t, which takes the square-root ends of a round body out."""
    middle, half = 0.5 * (low + high)[:, None], 0.5 * (high - low)[:, None]
    angle = 0.5 * np.pi * _NODES
    return middle + half * np.sin(angle), half * 0.5 * np.pi * np.cos(angle) * _WEIGHTS


def _joined(pieces: list) -> tuple[np.ndarray, np.ndarray]:
    """Length and first moment of the union of clipped intervals [(low, high), ...]; empty ones have low >= high."""
    if len(pieces) == 1:
        low, high = pieces[0]
        high = np.maximum(low, high)
        return high - low, 0.5 * (high**2 - low**2)
    lows, highs = np.stack([p[0] for p in pieces]), np.stack([p[1] for p in pieces])
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


def _refuse_overlap(fraction: np.ndarray, particles: int) -> None:
    excess = fraction.sum(axis=1).max() - 1.0
    # touching bodies share boundary cells, whose quadrature errors may add up to some 1e-4
    if particles > 1 and excess > 1e-3:
        raise InputError(
            Problem("particles", f"{particles} particles", "particles that do not overlap", "Move them apart, or make one union of them if they are of one material.")
        )
