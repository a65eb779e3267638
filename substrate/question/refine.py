"""Which grids answer a question, and what their answers say about cells of size zero: the one place that makes error bars.

A value is computed on nine grids over a 2:1 span of the cell size and extrapolated to zero by a quadratic; its bar is the larger
of the distance between the linear and the quadratic extrapolation and two standard errors of the quadratic one. Against exact
spheres over real stacks such bars held in 60 of 61 quantities; with three grids they failed in 20 % and are not offered. The
solver's residual and the error of the reflected tensor's table are added.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from substrate.errors import InputError, Problem
from substrate.quantity import Quantity

GRIDS = 9
FEWEST_ACROSS = 8.0  # with coarser finest grids bars were seen not to hold: none is given
MOST_BOX_CELLS = 6_000_000
COMFORTABLE_BOX_CELLS = 400_000
_SECONDS_PER_CELL = 6e-7  # of one product in single precision, per box cell, on two cores: for estimates only
_BYTES_PER_CELL = 520
_STRONG = 2.2  # |index| of particle over host above which 24 cells across are not enough


@dataclass(frozen=True)
class ProgressEvent:
    """stage: what is being done; done: share of all the work, 0 to 1; detail: in a few words."""

    stage: str
    done: float
    detail: str = ""


Progress = Callable[[ProgressEvent], None]


@dataclass(frozen=True)
class GridPlan:
    """Cells across the smallest particle extent, coarsest first; `extent_nm` is that extent; residual at which the iteration stops."""

    extent_nm: float
    cells_across: tuple[float, ...]
    tolerance: float

    def cell_nm(self, number: int) -> float:
        return self.extent_nm / self.cells_across[number]

    def costs(self) -> list[float]:
        """Rough share of the work of each grid."""
        raw = [n**3.2 for n in self.cells_across]
        return [cost / sum(raw) for cost in raw]


@dataclass(frozen=True)
class Convergence:
    """One quantity on a series of grids. fit: coefficients c of c0 + c1 h + c2 h^2, h the cell size in nm; fitted = c0."""

    cell_nm: tuple[float, ...]
    values: tuple[float, ...]
    fitted: float
    error: float
    fit: tuple[float, float, float]


@dataclass(frozen=True)
class Estimate:
    """What a run would cost: finest cell in nm, number of grids, cells of the finest box, occupied ones, bytes, seconds (rough)."""

    cell_nm: float
    grids: int
    cells_in_box: int
    occupied_cells: int
    memory_bytes: int
    seconds: float


def plan_grids(particles: Sequence, layers, accuracy: float, cell_nm: float | None, quick: bool, clearance_nm: float = math.inf) -> GridPlan:
    """Choose the grids. cell_nm fixes the finest cell; otherwise accuracy, contrast, wavelength and the clearance of emitters and spots do.

    Raises InputError if the finest box would hold more than MOST_BOX_CELLS cells.
    """
    from substrate.medium.material import material
    from substrate.particle.cells import reference_extent_nm

    if not 0.0 < accuracy < 1.0:
        raise InputError(Problem("accuracy", accuracy, "a relative accuracy between 0 and 1, such as 0.02"))
    if cell_nm is not None and not 0.0 < cell_nm < math.inf:
        raise InputError(Problem("cell_nm", cell_nm, "a length above 0"))
    extent = reference_extent_nm(particles)
    if cell_nm is not None and cell_nm > extent:
        raise InputError(Problem("cell_nm", cell_nm, f"at most the smallest extent of the particles ({extent:g} nm)", "Take eight cells across it or more."))
    index = max(abs(complex(material(spec).index(layers.wavelength_nm))) for spec in materials_of(particles))
    contrast = index / layers.index[0].real
    if cell_nm is not None:
        finest = max(1.0, extent / cell_nm)
    else:
        finest = 24.0 if contrast <= _STRONG else 32.0
        if accuracy < 0.01:
            finest *= 1.25
        finest = max(finest, 2.0 * contrast * layers.k_host * extent / 2.0)
        if math.isfinite(clearance_nm) and contrast > _STRONG:
            finest = max(finest, min(48.0, 4.0 * extent / clearance_nm))
        finest = _comfortable(particles, extent, float(math.ceil(finest)), contrast * layers.k_host * extent)
    _check_size(particles, extent / finest)
    tolerance = solver_tolerance(accuracy, contrast)
    if quick or finest < FEWEST_ACROSS:
        return GridPlan(extent, (finest,), tolerance)
    if cell_nm is None and finest >= 16.0:
        across = sorted({round(finest * (0.5 + 0.5 * i / (GRIDS - 1))) for i in range(GRIDS)})
    else:
        across = [finest * (0.5 + 0.5 * i / (GRIDS - 1)) for i in range(GRIDS)]
    return GridPlan(extent, tuple(float(n) for n in across), tolerance)


def _comfortable(particles: Sequence, extent: float, finest: float, least: float) -> float:
    """Fewer cells across a thin particle of large area, so that the box stays moderate; never below 8, nor below the wavelength's need."""
    box = _box_cells(particles, extent / finest)
    if box <= COMFORTABLE_BOX_CELLS:
        return finest
    return min(finest, max(8.0, least, float(math.ceil(finest * (COMFORTABLE_BOX_CELLS / box) ** (1.0 / 3.0)))))


def solver_tolerance(accuracy: float, contrast: float) -> float:
    """Residual at which the iteration stops, 1e-6 to 3e-4.

    Weak contrasts cost some ten products for any residual and get a two-thousandth of the accuracy; metals may need many hundreds, and a
    hundredth is enough: a residual of 1e-3 was seen to move powers by up to 2e-3, mostly by less than 1e-3.
    """
    return min(3e-4, max(1e-6, accuracy / (2000.0 if contrast <= _STRONG else 100.0)))


def materials_of(particles: Sequence) -> set:
    """All material specifications, cores of shells included."""
    found = set()
    for particle in particles:
        while hasattr(particle, "around"):
            found.add(particle.material)
            particle = particle.around
        found.add(particle.material)
    return found


def box_of(particles: Sequence) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Common bounding box (low, high) of all particles, nm."""
    bounds = [particle.bounds_nm() for particle in particles]
    low = tuple(float(min(b[0][axis] for b in bounds)) for axis in range(3))
    high = tuple(float(max(b[1][axis] for b in bounds)) for axis in range(3))
    return low, high


def _box_cells(particles: Sequence, cell_nm: float) -> int:
    low, high = box_of(particles)
    return math.prod(math.ceil((b - a) / cell_nm - 1e-9) for a, b in zip(low, high))


def _check_size(particles: Sequence, cell_nm: float) -> None:
    count = _box_cells(particles, cell_nm)
    if count > MOST_BOX_CELLS:
        raise InputError(
            Problem(
                "accuracy.cell_nm",
                round(cell_nm, 4),
                f"cells for which the box of all particles holds at most {MOST_BOX_CELLS} of them (here {count})",
                "Take larger cells, a lower accuracy, or particles closer together.",
            )
        )


def estimate(
    particles: Sequence, layers, accuracy: float = 0.02, cell_nm: float | None = None, quick: bool = False, near_nm: Sequence = ()
) -> Estimate:
    """Cost of one excitation, without meshing: box cells by the bounds, occupied cells by the share of the volume.

    near_nm: points (n, 3) of emitters or spots, whose distance from the particles helps to choose the grids.  seconds: within a factor
    of three on two cores; products from the distance of the material from resonance, as measured on gold at 550 to 785 nm.
    """
    clearance = min((abs(float(p.signed_distance([point])[0])) for p in particles for point in near_nm), default=math.inf)
    plan = plan_grids(particles, layers, accuracy, cell_nm, quick, max(clearance, 1e-3))
    finest = plan.extent_nm / plan.cells_across[-1]
    boxes = [_box_cells(particles, plan.extent_nm / n) for n in plan.cells_across]
    low, high = box_of(particles)
    volume = math.prod(b - a for a, b in zip(low, high))
    filled = sum(particle.volume_nm3 for particle in particles)
    products = max(_products(spec, layers) for spec in materials_of(particles)) * math.log(plan.tolerance) / math.log(1e-3)
    occupied = min(boxes[-1], int(boxes[-1] * min(1.0, filled / volume)))
    seconds = 2.0 + 0.5 * len(boxes) + products * _SECONDS_PER_CELL * sum(boxes)
    return Estimate(finest, len(boxes), boxes[-1], occupied, _BYTES_PER_CELL * boxes[-1], seconds)


def _products(spec, layers) -> float:
    """Products to a residual of 1e-3: 5.8/|Im(1/chi)| for metals, some ten for dielectrics."""
    from substrate.medium.material import material

    eps = (complex(material(spec).index(layers.wavelength_nm)) / layers.index[0]) ** 2
    if eps.real < 0.0:
        return min(1500.0, 40.0 + 5.8 / max(abs((1.0 / (eps - 1.0)).imag), 1e-4))
    return 5.0 + 3.0 * abs(eps) ** 0.75


def doubts(plan: GridPlan, quick: bool, balance: float, stated: float) -> list[str]:
    """Sentences about a grid too coarse for a bar, and about a balance that does not close to ten times what was stated."""
    found = []
    if not quick and plan.cells_across[-1] < FEWEST_ACROSS:
        found.append(f"only {plan.cells_across[-1]:.3g} cells across the smallest extent: no bars are given below {FEWEST_ACROSS:g}")
    return found + unbalanced(balance, 10.0 * stated)


def unbalanced(balance: float, limit: float) -> list[str]:
    """A sentence if the power balance misses more than `limit` of the whole."""
    if abs(balance) <= limit:
        return []
    return [f"the power balance misses {100.0 * balance:.2g} % of the whole: a channel is wrong or missing, do not rely on the shares"]


def extrapolate(cell_nm: Sequence[float], values: Sequence[float]) -> Convergence:
    """Value at zero cell size and its bar (discretisation only), from values on a series of grids over a 2:1 span."""
    import numpy as np

    h, y = np.asarray(cell_nm, dtype=float), np.asarray(values, dtype=float)
    weight = (h.min() / h) ** 1.5  # squared residuals weighted with 1/h^3: fine grids count more
    unit = h / h.max()
    quadratic, deviation = _fit(unit, y, weight, 2)
    linear, _ = _fit(unit, y, weight, 1)
    error = max(abs(linear[0] - quadratic[0]), 2.0 * deviation)
    scale = 1.0 / h.max()
    coefficients = (float(quadratic[0]), float(quadratic[1] * scale), float(quadratic[2] * scale**2))
    return Convergence(tuple(h.tolist()), tuple(y.tolist()), float(quadratic[0]), float(error), coefficients)


def _fit(x, y, weight, degree: int):
    """Weighted polynomial fit; returns coefficients from the constant up and the standard error of the constant."""
    import numpy as np

    matrix = np.vander(x, degree + 1, increasing=True) * weight[:, None]
    coefficients, *_ = np.linalg.lstsq(matrix, y * weight, rcond=None)
    rest = y * weight - matrix @ coefficients
    freedom = max(1, len(x) - degree - 1)
    covariance = np.linalg.inv(matrix.T @ matrix) * (rest @ rest) / freedom
    return coefficients, float(np.sqrt(covariance[0, 0]))


@dataclass(frozen=True)
class Series:
    """All quantities of one question on its grids: values[name] has one entry a grid."""

    cell_nm: tuple[float, ...]
    values: dict[str, tuple[float, ...]]
    residual: float
    table_error: float

    def quantity(self, name: str, unit: str, definition: str, scale: float, resolved: bool = True) -> Quantity:
        """The answer for one name.

        scale: size to which the solver's residual and the table's error refer (at least the value).  resolved=False: the grids do
        not resolve the question (an emitter a few cells from a metal), extrapolation overshoots; the finest grid's value is
        taken, and its distance from the extrapolated one added to the bar.
        """
        values = self.values[name]
        if not any(values):  # nothing there on any grid: a lossless particle absorbs nothing
            return Quantity(0.0, None if len(values) < GRIDS - 2 else 0.0, unit, definition)
        if len(values) < GRIDS - 2:
            return Quantity(float(values[-1]), None, unit, definition)
        found = self.convergence(name)
        numerical = (self.residual + self.table_error) * max(abs(scale), abs(found.fitted))
        if not resolved:
            finest = float(values[-1])
            return Quantity(finest, found.error + abs(found.fitted - finest) + numerical, unit, definition)
        return Quantity(found.fitted, found.error + numerical, unit, definition)

    def convergence(self, name: str) -> Convergence:
        return extrapolate(self.cell_nm, self.values[name])
