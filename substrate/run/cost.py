"""What a case would cost, without computing it: cells, memory, time, and the sentences that warn about the model."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from substrate.run.build import build
from substrate.run.series import Point
from substrate.source.plane_wave import PlaneWave


@dataclass(frozen=True)
class Cost:
    """Of a whole case. solves: series of grids to be solved; cells and memory of the largest one; seconds of all (rough)."""

    solves: int
    grids: int
    cell_nm: float
    cells_in_box: int
    occupied_cells: int
    memory_bytes: int
    seconds: float
    cautions: tuple[str, ...]


def costs(points: Sequence[Point]) -> Cost:
    """Sum over all points. Points without particles are exact and cost nothing worth a number."""
    from substrate.question.refine import estimate

    found, seconds, cautions = [], 0.0, {}
    solves = 0
    for point in points:
        sample = build(point.tables)
        cautions.update(dict.fromkeys(sample.stack.cautions()))
        if not sample.particles:
            continue
        accuracy = point.tables["accuracy"]
        for source in sample.sources():
            layers = sample.stack.at(source.wavelength_nm)
            is_light = isinstance(source, PlaneWave)
            spots = [spot for ask in point.tables["ask"] if ask["what"] == "near field" for spot in ask["points_nm"]]
            near = spots if is_light else [source.position_nm]
            one = estimate(sample.particles, layers, accuracy["relative"], accuracy["cell_nm"], accuracy["quick"], near)
            times = len(source.jones() if is_light else source.moments())
            found.append(one)
            solves += times
            seconds += times * one.seconds
    if not found:
        return Cost(0, 0, 0.0, 0, 0, 0, 0.0, tuple(cautions))
    largest = max(found, key=lambda one: one.memory_bytes)
    return Cost(
        solves, largest.grids, largest.cell_nm, largest.cells_in_box, largest.occupied_cells, largest.memory_bytes, seconds, tuple(cautions)
    )
