"""What particles on a stack do to a plane wave: cross sections, collected power, field, pattern, each number with its bar."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from substrate.errors import InputError, NotConverged
from substrate.errors import Problem as Fault
from substrate.green.far_field import DipoleSet
from substrate.medium.stack import Layers, Stack
from substrate.observe.collector import Collector
from substrate.observe.near_field import FilledParts, total_field
from substrate.observe.power import guided, pattern, radiated_down, radiated_up
from substrate.quantity import Quantity, html_table, text_table
from substrate.question.grids import Grid, cautions, grids, tell, viewing_table
from substrate.question.refine import Convergence, Progress, ProgressEvent, Series, doubts, plan_grids
from substrate.solve.krylov import SolveReport
from substrate.solve.problem import Solution
from substrate.source.plane_wave import PlaneWave, StackWave

_DEFINITIONS = {
    "work": "power that the excitation (incident wave and what the bare stack makes of it) spends on the particles, over the irradiance "
    "of the incident wave normal to its own direction; in a uniform host the extinction cross section",
    "absorbed": "power absorbed in the particles over the incident irradiance",
    "up": "power scattered to the far field above over the incident irradiance (without interference with the specular beam)",
    "down": "power scattered to the far field in the base over the incident irradiance; zero for an absorbing base",
    "guided": "power scattered into guided modes of lossless films over the incident irradiance",
    "stack": "power that the particles' own field delivers to absorbing films and base over the incident irradiance",
    "balance": "1 - (absorbed + what the particles' field carries away)/work on the finest grid: a check of the calculation, not of its accuracy",
}


@dataclass(frozen=True)
class Scattering:
    """Answer of `scatter`: Quantities in nm^2, `balance` without unit; see their definitions.

    spots: |E|^2 over that of the incident wave at the points asked for.  method: how it was found.
    convergence: values on all grids, by name.  reports: one an iteration.
    """

    work: Quantity
    absorbed: Quantity
    up: Quantity
    down: Quantity
    guided: Quantity
    stack: Quantity
    balance: Quantity
    collected: dict[str, Quantity]
    spots: tuple[Quantity, ...]
    warnings: tuple[str, ...]
    method: str
    convergence: dict[str, Convergence]
    reports: tuple[SolveReport, ...]
    _layers: Layers = field(repr=False)
    _waves: tuple[StackWave, ...] = field(repr=False)
    _solutions: tuple[Solution, ...] = field(repr=False)
    _filled: FilledParts | None = field(repr=False)

    def quantities(self) -> dict[str, Quantity]:
        """All numbers by name."""
        named = {name: getattr(self, name) for name in _DEFINITIONS}
        collected = {f"collected, {name}": quantity for name, quantity in self.collected.items()}
        return named | collected | {f"spot {i + 1}": quantity for i, quantity in enumerate(self.spots)}

    def __str__(self) -> str:
        return "\n".join([text_table(self.quantities()), self.method, *self.warnings])

    def _repr_html_(self) -> str:
        return html_table(self.quantities(), (self.method, *self.warnings))

    def fields(self, points_nm) -> np.ndarray:
        """Total E at points (n, 3), z >= 0 (any z without particles), for unit incident amplitude: (waves, n, 3), one entry, two for unpolarized light. Finest grid."""
        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        if not self._solutions:
            return np.array([wave.field_anywhere(points) for wave in self._waves])
        table = viewing_table(self._filled.cells, self._layers, points)
        pairs = zip(self._solutions, self._waves)
        return np.array([total_field(solution, self._filled, table, wave.field, points) for solution, wave in pairs])

    def field(self, points_nm) -> np.ndarray:
        """Total E (n, 3) for unit incident amplitude, of one polarisation state. InputError for unpolarized light (see `intensity`)."""
        if len(self._waves) > 1:
            raise InputError(Fault("field", "unpolarized light", "one polarisation state", "Use intensity(points_nm), or ask s and p apart."))
        return self.fields(points_nm)[0]

    def intensity(self, points_nm) -> np.ndarray:
        """|E|^2 over |E_incident|^2 at points (n, 3): (n,), averaged over polarisations for unpolarized light. Finest grid."""
        return (np.abs(self.fields(points_nm)) ** 2).sum(axis=2).mean(axis=0)

    def pattern(self, polar_deg, azimuth_deg) -> np.ndarray:
        """dC/dOmega in nm^2/sr, both polarisations of the scattered wave summed, at directions (n,). Finest grid."""
        pairs = zip(self._solutions, self._waves)
        found = [pattern(_dipoles(solution), self._layers, polar_deg, azimuth_deg) / wave.irradiance for solution, wave in pairs]
        return np.mean(found, axis=0)

    def inside(self, points_nm) -> np.ndarray:
        """True where a point (n, 3) lies in a particle."""
        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        if self._filled is None:
            return np.zeros(len(points), dtype=bool)
        return np.any([body.inside(points) for body in self._filled.bodies], axis=0)


def scatter(
    stack: Stack,
    particles: Sequence,
    light: PlaneWave,
    collectors: Sequence[Collector] = (),
    *,
    spots_nm: Sequence = (),
    accuracy: float = 0.02,
    cell_nm: float | None = None,
    quick: bool = False,
    progress: Progress | None = None,
) -> Scattering:
    """Solve for the particles in the light over the stack.

    collectors: collecting optics, names all different.  spots_nm: points (n, 3) at which |E|^2 gets a bar.  accuracy: relative, chooses the grids;
    cell_nm fixes the finest cell instead; quick runs one grid and gives no bars.  particles=() gives the fields of the bare stack.
    Raises InputError for wrong input and NotConverged, whose `best` is a Scattering without bars, if an iteration fails.
    """
    layers = stack.at(light.wavelength_nm)
    waves = light.waves(stack)
    windows = collector_windows(collectors, layers)
    spots = _checked_spots(spots_nm, above_only=bool(particles))
    if not particles:
        return _bare(layers, waves, windows, spots)
    clearance = _clearance(particles, spots)
    plan = plan_grids(particles, layers, accuracy, cell_nm, quick, clearance)
    collected: list[dict[str, float]] = []
    reports, sizes, failure, finest = [], [], None, ()
    filled = None
    for grid in grids(particles, layers, plan, progress):
        filled = FilledParts(grid.cells, particles)
        solutions = []
        for number, wave in enumerate(waves):
            listener = tell(progress, grid, number / len(waves), (number + 1) / len(waves))
            try:
                solution = grid.problem.solve(wave.field(grid.cells.centers_nm), on_step=listener)
            except NotConverged as stop:
                solution, failure = stop.best, stop
            solutions.append(solution)
            reports.append(solution.report)
        values = [_observe(s, w, windows, filled, spots) for s, w in zip(solutions, waves)]
        collected.append({name: float(np.mean([v[name] for v in values])) for name in values[0]})
        sizes.append(grid.cells.cell_nm)
        finest = tuple(solutions)
        if failure is not None:
            break
    if progress is not None:
        progress(ProgressEvent("done", 1.0))
    if failure is not None:
        sizes, collected = sizes[-1:], collected[-1:]
    table = finest[0].problem.table
    series = Series(
        tuple(sizes),
        {name: tuple(entry[name] for entry in collected) for name in collected[0]},
        max(report.residual for report in reports),
        0.0 if table is None else table.error,
    )
    warnings = cautions(stack, particles) + doubts(plan, quick, series.values["balance"][-1], series.residual + series.table_error)
    out = _answer(series, windows, spots, layers, waves, finest, filled, reports, warnings, plan)
    if failure is not None:
        raise NotConverged(str(failure), best=out, report=failure.report)
    return out


def collector_windows(collectors: Sequence[Collector], layers: Layers) -> dict[str, tuple[Collector, tuple, tuple]]:
    windows = {}
    for collector in collectors:
        if collector.name in windows:
            raise InputError(Fault("collector name", collector.name, "a name of its own for each collector"))
        windows[collector.name] = (collector, *collector.window(layers))
    return windows


def _checked_spots(spots_nm, above_only: bool) -> np.ndarray:
    spots = np.asarray(spots_nm, dtype=float).reshape(-1, 3) if len(spots_nm) else np.zeros((0, 3))
    if not np.isfinite(spots).all() or (above_only and (spots[:, 2] < 0.0).any()):
        allowed = "finite points (n, 3) with z >= 0 (with particles; without them any z)"
        raise InputError(Fault("spots_nm", spots_nm, allowed))
    return spots


def _clearance(particles: Sequence, points: np.ndarray) -> float:
    """Smallest distance of the points from a particle's surface; infinite without points."""
    if not len(points):
        return np.inf
    distance = np.min([np.abs(particle.signed_distance(points)) for particle in particles], axis=0)
    return float(max(distance.min(), 1e-3))


def _dipoles(solution: Solution) -> DipoleSet:
    return DipoleSet(solution.problem.cells.centers_nm, solution.dipoles)


def collected_power(dipoles: DipoleSet, layers: Layers, windows: dict) -> dict[str, float]:
    """Power into each collector, as a cross section."""
    out = {}
    for name, (collector, polar, azimuth) in windows.items():
        radiate = radiated_up if collector.is_above else radiated_down
        out[f"collected {name}"] = radiate(dipoles, layers, polar, azimuth)
    return out


def _observe(solution: Solution, wave: StackWave, windows: dict, filled: FilledParts, spots: np.ndarray) -> dict[str, float]:
    """All numbers of one grid and one polarisation, by name."""
    layers = solution.problem.layers
    dipoles = _dipoles(solution)
    work, absorbed = solution.work(), solution.absorbed()
    up = radiated_up(dipoles, layers)
    down = radiated_down(dipoles, layers) if layers.base_is_lossless else 0.0
    modes = sum(guided(dipoles, layers).values())
    stack, closure = stack_share(layers, work, absorbed, up + down + modes, solution.given_away)
    out = {"work": work, "absorbed": absorbed, "up": up, "down": down, "guided": modes, "stack": stack, "balance": closure}
    out |= collected_power(dipoles, layers, windows)
    out = {name: value if name == "balance" else value / wave.irradiance for name, value in out.items()}
    if len(spots):
        table = viewing_table(solution.problem.cells, layers, spots)
        e = total_field(solution, filled, table, wave.field, spots)
        out |= {f"spot {i + 1}": value for i, value in enumerate((np.abs(e) ** 2).sum(axis=1))}
    return out


def stack_share(layers: Layers, work: float, absorbed: float, far: float, given_away) -> tuple[float, float]:
    """Power delivered to absorbing films and base, and the closure error of the balance relative to the work.

    far: power to the far fields and guided modes. A lossless stack takes nothing, and then every term of the balance is computed
    on its own. Otherwise the dipoles' own power (`given_away()`) closes the balance, and the stack's share is what of it does not travel away.
    """
    if all(n.imag == 0.0 for n in layers.index):
        return 0.0, 1.0 - (absorbed + far) / work if work else 0.0
    own = given_away()
    return own - far, 1.0 - (absorbed + own) / work if work else 0.0


def _bare(layers, waves, windows, spots) -> Scattering:
    """No particle: nothing is scattered, the fields are those of the bare stack, exact to rounding."""
    zero = {name: Quantity(0.0, 0.0, "nm^2", text) for name, text in _DEFINITIONS.items() if name != "balance"}
    values = np.mean([(np.abs(wave.field_anywhere(spots)) ** 2).sum(axis=1) for wave in waves], axis=0) if len(spots) else []
    found = tuple(Quantity(float(v), 1e-12 * float(v), "1", _spot_text(p)) for v, p in zip(values, spots))
    collected = {name: Quantity(0.0, 0.0, "nm^2", f"power scattered into {c.describe()}") for name, (c, *_) in windows.items()}
    balance = Quantity(0.0, 0.0, "1", _DEFINITIONS["balance"])
    return Scattering(
        **zero, balance=balance, collected=collected, spots=found, warnings=(), method="exact, plane stack", convergence={}, reports=(),
        _layers=layers, _waves=waves, _solutions=(), _filled=None,
    )


def _spot_text(point) -> str:
    place = ", ".join(f"{c:g}" for c in point)
    return f"|E|^2 at ({place}) nm over |E|^2 of the incident wave alone"


def _answer(series, windows, spots, layers, waves, finest, filled, reports, warnings, plan) -> Scattering:
    scale = abs(series.values["work"][-1])
    named = {name: series.quantity(name, "nm^2", text, scale) for name, text in _DEFINITIONS.items() if name != "balance"}
    balance = Quantity(series.values["balance"][-1], series.residual + series.table_error, "1", _DEFINITIONS["balance"])
    collected = {
        name: series.quantity(f"collected {name}", "nm^2", f"power scattered into {c.describe()} over the incident irradiance", 0.0)
        for name, (c, *_) in windows.items()
    }
    found = tuple(series.quantity(f"spot {i + 1}", "1", _spot_text(point), 0.0) for i, point in enumerate(spots))
    enough = len(series.cell_nm) > 1
    convergence = {name: series.convergence(name) for name in series.values if name != "balance"} if enough else {}
    across = f"{plan.cells_across[0]:g} to {plan.cells_across[-1]:g}" if enough else f"{plan.extent_nm / series.cell_nm[-1]:.3g}"
    warnings = warnings + _spot_cautions(spots, filled, layers)
    return Scattering(
        **named, balance=balance, collected=collected, spots=found, warnings=tuple(warnings), convergence=convergence, reports=tuple(reports),
        method=f"coupled dipoles, {len(series.cell_nm)} grid{'s' if enough else ''} with {across} cells across the smallest extent",
        _layers=layers, _waves=waves, _solutions=finest, _filled=filled,
    )


def _spot_cautions(spots: np.ndarray, filled: FilledParts, layers: Layers) -> list[str]:
    cell = filled.cells.cell_nm
    found = []
    for i, point in enumerate(spots):
        distance = _clearance(filled.bodies, point[None, :])
        if distance < cell:
            found.append(
                f"spot {i + 1} lies {distance:.2g} nm from a particle's surface, less than the finest cell ({cell:.2g} nm): near metals its "
                "|E|^2 can be off by ten per cent and more beyond its bar"
            )
    return found
