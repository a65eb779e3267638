"""From shapes to cubic cells: which are occupied, how much of each material they hold, and the normal of the surface in them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from numbers import Real

import numpy as np

from substrate.errors import InputError, Problem
from substrate.particle.composite import Shell
from substrate.particle.filling import CellGrid, Share
from substrate.particle.overlap import overlap, share
from substrate.particle.placement import Particle

_LEAST_FILL = 1e-6  # cells that hold less are dropped
_MIXED = 1e-9  # a share nearer than this to 0 or 1 is rounding
_MOST_OVERLAP = 1e-6  # of a cell: rounding of places that are meant to touch


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
        """Centres of the occupied cells, (n, 3)."""
        return self.origin_nm + self.cell_nm * self.index


def reference_extent_nm(particles: Sequence[Particle]) -> float:
    """The smallest extent of any particle's bounding box: "cells across" refers to it."""
    return min(2.0 * extent for particle in particles for extent in particle.half_extents())


def mesh(particles: Sequence[Particle], cell_nm: float) -> Cells:
    """Fill one cubic grid with all particles. Its floor is at their lowest point, never below the surface; x and y are centred.

    The normal is that of the nearest of the surfaces that cross the cell (of a shell: its outside or its core), at the cell's centre.
    Volumes come out to 1e-5, tests/particle/test_cells.py. Raises InputError if particles overlap or if no cell is filled.
    """
    grid = _grid(particles, cell_nm)
    nested = [_layers(particle) for particle in particles]
    shares = [[share(body, grid) for body, _ in layers] for layers in nested]
    _refuse_overlap([layers[0][0] for layers in nested], [found[0] for found in shares], grid)
    materials, fraction = _fractions(nested, shares, grid.count)
    total = fraction.sum(axis=1)
    kept = np.flatnonzero(total > _LEAST_FILL)
    if not len(kept):
        raise InputError(Problem("cell_nm", cell_nm, "a cell size for which the particles fill at least one cell"))
    total = total[kept, None]
    fraction = fraction[kept] / np.maximum(total, 1.0)  # touching bodies: quadrature errors may add up to more than 1
    fraction[fraction < 1e-12] = 0.0  # rounding
    full = fraction.max(axis=1) > 1.0 - _MIXED
    fraction[full] = np.round(fraction[full])
    normal = _normals([body for layers in nested for body, _ in layers], [s for found in shares for s in found], grid, kept)
    normal[full] = 0.0
    centroid = grid.centers_nm(kept) + grid.cell_nm * _moments([found[0] for found in shares], kept) / total
    index = np.stack(np.unravel_index(kept, grid.shape), axis=1)
    return Cells(grid.cell_nm, grid.shape, grid.corner_nm + 0.5 * grid.cell_nm, index, materials, fraction, normal, centroid)


def _grid(particles: Sequence[Particle], cell_nm: float) -> CellGrid:
    if not particles:
        raise InputError(Problem("particles", (), "at least one particle"))
    if not (isinstance(cell_nm, Real) and 0.0 < cell_nm < math.inf):
        raise InputError(Problem("cell_nm", cell_nm, "a length above 0"))
    bounds = np.array([particle.bounds_nm() for particle in particles])
    low, high = bounds[:, 0].min(axis=0), bounds[:, 1].max(axis=0)
    shape = np.maximum(1, np.ceil((high - low) / cell_nm - 1e-9)).astype(int)
    corner = 0.5 * (low + high - cell_nm * shape)
    corner[2] = max(low[2], 0.0)
    return CellGrid(float(cell_nm), tuple(int(n) for n in shape), corner)


def _layers(particle: Particle) -> list[tuple[Particle, object]]:
    """(outline, material) of the whole and of all that lies in it, from the outside in."""
    if isinstance(particle, Shell):
        return [(particle.outer, particle.material), *_layers(particle.core)]
    return [(particle, particle.material)]


def _fractions(nested: list, shares: list[list[Share]], count: int) -> tuple[tuple, np.ndarray]:
    """The distinct materials, and the share (count, m) of each: of a layer that of its outline less that of what lies in it."""
    materials = tuple(dict.fromkeys(material for layers in nested for _, material in layers))
    fraction = np.zeros((count, len(materials)))
    for layers, found in zip(nested, shares):
        fills = [s.fill for s in found] + [0.0]
        for (_, material), whole, inner in zip(layers, fills, fills[1:]):
            fraction[:, materials.index(material)] += whole - inner
    return materials, fraction


def _at(kept: np.ndarray, cells: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Where cells stand among the kept ones, and which of them do at all."""
    place = np.minimum(np.searchsorted(kept, cells), len(kept) - 1)
    there = kept[place] == cells
    return place[there], there


def _moments(shares: list[Share], kept: np.ndarray) -> np.ndarray:
    """First moment (n, 3) of everything in the kept cells, in cells."""
    moment = np.zeros((len(kept), 3))
    for found in shares:
        place, there = _at(kept, found.cells)
        moment[place] += found.moment[there]
    return moment


def _normals(bodies: list[Particle], shares: list[Share], grid: CellGrid, kept: np.ndarray) -> np.ndarray:
    """Normal (n, 3) of the nearest of the surfaces that cross the kept cells, at the cells' centres; zero where none does."""
    normal, nearest = np.zeros((len(kept), 3)), np.full(len(kept), np.inf)
    for body, found in zip(bodies, shares):
        fill = found.fill[found.cells]
        place, there = _at(kept, found.cells[(fill > _MIXED) & (fill < 1.0 - _MIXED)])
        if not len(place):
            continue
        centres = grid.centers_nm(kept[place])
        distance = np.abs(body.signed_distance(centres))
        nearer = distance < nearest[place]
        nearest[place[nearer]] = distance[nearer]
        normal[place[nearer]] = body.normal(centres[nearer])
    return normal


def _refuse_overlap(bodies: list[Particle], shares: list[Share], grid: CellGrid) -> None:
    """Raise InputError if two particles claim the same place."""
    for second in range(1, len(bodies)):
        for first in range(second):
            common = np.flatnonzero((shares[first].fill > 0.0) & (shares[second].fill > 0.0))
            claimed = shares[first].fill[common] + shares[second].fill[common]
            if (claimed > 1.5).any() or (overlap((bodies[first], bodies[second]), grid, common).fill > _MOST_OVERLAP).any():
                advice = "Move them apart; make one union of bodies of one material, or a shell of a body within another."
                received = f"particles {first + 1} and {second + 1}, which overlap"
                raise InputError(Problem("particles", received, "particles that do not overlap (they may touch)", advice))
