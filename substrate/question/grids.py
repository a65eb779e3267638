"""The series of grids behind an answer: meshing, one reflected table for all of them, one problem a grid."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from substrate.constants import DOUBTFUL_GAP_NM
from substrate.green.table import ReflectedTable, build_table
from substrate.medium.material import material
from substrate.medium.stack import Layers, Stack
from substrate.particle.cells import Cells, mesh
from substrate.question.refine import GridPlan, Progress, ProgressEvent, box_of
from substrate.solve.problem import Problem


@dataclass(frozen=True)
class Grid:
    """One grid of the series: its number, problem, and the share of all work that is done when it is solved."""

    number: int
    cells: Cells
    problem: Problem
    done_before: float
    done_after: float


def grids(particles: Sequence, layers: Layers, plan: GridPlan, progress: Progress | None) -> Iterator[Grid]:
    """Problems from the coarsest to the finest grid, made one at a time."""
    table = solver_table(particles, layers, plan)
    done = 0.0
    for number, cost in enumerate(plan.costs()):
        if progress is not None:
            progress(ProgressEvent("meshing", done, f"grid {number + 1} of {len(plan.cells_across)}"))
        cells = mesh(particles, plan.cell_nm(number))
        eps = [complex(material(spec).index(layers.wavelength_nm)) ** 2 / layers.index[0] ** 2 for spec in cells.materials]
        yield Grid(number, cells, Problem(cells, layers, np.array(eps), table, plan.tolerance), done, done + cost)
        done += cost


def solver_table(particles: Sequence, layers: Layers, plan: GridPlan) -> ReflectedTable | None:
    """The reflected tensor for the cells of every grid of the plan; None where the stack reflects nothing."""
    if layers.is_uniform:
        return None
    low, high = box_of(particles)
    largest = max(plan.cell_nm(i) for i in range(len(plan.cells_across)))
    smallest = min(plan.cell_nm(i) for i in range(len(plan.cells_across)))
    across = np.hypot(high[0] - low[0] + 2.0 * largest, high[1] - low[1] + 2.0 * largest)
    return build_table(layers, float(across), 2.0 * low[2] + smallest, 2.0 * (high[2] + largest))


def viewing_table(cells: Cells, layers: Layers, points_nm: np.ndarray) -> ReflectedTable | None:
    """The reflected tensor between all cells and all points (n, 3)."""
    if layers.is_uniform:
        return None
    centres, points = cells.centers_nm, np.atleast_2d(points_nm)
    low = np.minimum(points[:, :2].min(axis=0), centres[:, :2].min(axis=0))
    high = np.maximum(points[:, :2].max(axis=0), centres[:, :2].max(axis=0))
    bottom, top = centres[:, 2].min() + points[:, 2].min(), centres[:, 2].max() + points[:, 2].max()
    return build_table(layers, float(np.hypot(*(high - low))) * 1.0001, bottom * 0.9999, top * 1.0001)


def cautions(stack: Stack, particles: Sequence) -> list[str]:
    """Sentences about what the model leaves out for this sample."""
    found = list(stack.cautions())
    for number, particle in enumerate(particles):
        gap = particle.bounds_nm()[0][2]
        if 0.0 < gap < DOUBTFUL_GAP_NM:
            found.append(
                f"particle {number + 1} floats {gap:.3g} nm above the surface: below {DOUBTFUL_GAP_NM:g} nm tunnelling and non-local "
                "response, which are not in the model, matter"
            )
    return found


def tell(progress: Progress | None, grid: Grid, share_from: float, share_to: float):
    """A listener for the iteration; share_from..share_to is its part of the grid's work."""
    if progress is None:
        return None
    width = grid.done_after - grid.done_before
    farthest = 0.0

    def on_step(products: int, residual: float) -> None:
        nonlocal farthest  # the residual does not fall at every step
        farthest = part = min(1.0, max(farthest, np.log(max(residual, 1e-12)) / np.log(grid.problem.tolerance)))
        done = grid.done_before + width * (share_from + (share_to - share_from) * part)
        progress(ProgressEvent("solving", done, f"grid {grid.number + 1}: {products} products, residual {residual:.1e}"))

    return on_step
