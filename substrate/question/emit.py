"""What a stack and particles do to an emitter: decay-rate factors by channel, yield and lifetime, each with its bar."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from substrate.constants import DOUBTFUL_GAP_NM, SMALLEST_GAP_NM
from substrate.errors import InputError, NotConverged
from substrate.errors import Problem as Fault
from substrate.green.far_field import DipoleSet
from substrate.green.sommerfeld import reflected_scalars
from substrate.medium.material import material
from substrate.medium.stack import Layers, Stack
from substrate.observe.collector import Collector
from substrate.observe.near_field import FilledParts, emitter_coupling
from substrate.observe.power import delivered, guided, pattern, radiated_down, radiated_up
from substrate.quantity import Quantity, html_table, text_table
from substrate.question.grids import Grid, cautions, grids, tell, viewing_table
from substrate.question.refine import Convergence, Progress, ProgressEvent, Series, doubts, materials_of, plan_grids, unbalanced
from substrate.question.scatter import collected_power, collector_windows, stack_share
from substrate.solve.krylov import SolveReport
from substrate.solve.problem import Solution
from substrate.source.emitter import Emitter

# The emitter sees near cells spread over their filled part, the far field sees their centres: up to 1.5e-3 at 16 cells across, measured.
_CELL_CLOSURE = 2e-3
_CLOSURE = 1e-6  # of the bare stack: adaptive quadrature leaves 1e-9
_CHANNELS = ("total", "up", "down", "guided", "particle", "stack")
_DEFINITIONS = {
    "total": "total decay-rate factor (Purcell): power of the emitter over that of the same emitter in the unbounded host",
    "up": "power to the far field above over the host power of the emitter",
    "down": "power to the far field in the base over the host power of the emitter; zero for an absorbing base",
    "guided": "power into guided modes of lossless films over the host power of the emitter",
    "particle": "power absorbed in the particles over the host power of the emitter",
    "stack": "power absorbed in films and base over the host power of the emitter",
    "balance": "1 - (sum of all channels)/total: a check of the calculation, not of its accuracy",
}


@dataclass(frozen=True)
class Emission:
    """Answer of `emit`: decay-rate factors without unit, `quantum_yield` and `lifetime_ratio` from them and the intrinsic yield q0.

    lifetime_ratio = 1/(1 - q0 + q0 total); quantum_yield = q0 (up + down)/(1 - q0 + q0 total); lifetime_ns where one was given.
    """

    total: Quantity
    up: Quantity
    down: Quantity
    guided: Quantity
    particle: Quantity
    stack: Quantity
    balance: Quantity
    collected: dict[str, Quantity]
    quantum_yield: Quantity
    lifetime_ratio: Quantity
    lifetime_ns: Quantity | None
    warnings: tuple[str, ...]
    method: str
    convergence: dict[str, Convergence]
    reports: tuple[SolveReport, ...]
    _layers: Layers = field(repr=False)
    _sources: tuple[tuple[DipoleSet, float], ...] = field(repr=False)

    def quantities(self) -> dict[str, Quantity]:
        """All numbers by name."""
        named = {name: getattr(self, name) for name in (*_DEFINITIONS, "quantum_yield", "lifetime_ratio", "lifetime_ns")}
        collected = {f"collected, {name}": quantity for name, quantity in self.collected.items()}
        return {name: quantity for name, quantity in (named | collected).items() if quantity is not None}

    def __str__(self) -> str:
        return "\n".join([text_table(self.quantities()), self.method, *self.warnings])

    def _repr_html_(self) -> str:
        return html_table(self.quantities(), (self.method, *self.warnings))

    def pattern(self, polar_deg, azimuth_deg) -> np.ndarray:
        """Power per steradian over the host power of the emitter at directions (n,), averaged over orientations. Finest grid."""
        host = host_power(self._layers.k_host)
        parts = [weight * pattern(dipoles, self._layers, polar_deg, azimuth_deg) for dipoles, weight in self._sources]
        return np.sum(parts, axis=0) / host


def host_power(k: float) -> float:
    """Power of a unit dipole (1 nm^3) in the unbounded host, as a cross section: k^4/(6 pi)."""
    return k**4 / (6.0 * np.pi)


def emit(
    stack: Stack,
    particles: Sequence,
    emitter: Emitter,
    collectors: Sequence[Collector] = (),
    *,
    accuracy: float = 0.02,
    cell_nm: float | None = None,
    quick: bool = False,
    progress: Progress | None = None,
) -> Emission:
    """Decay-rate factors of an emitter over the stack among the particles; particles=() is the plane stack alone, exact, a fraction of a second.

    Arguments as in `scatter`. Raises InputError for an emitter in or on a particle and NotConverged, whose `best` is an
    Emission without bars, if an iteration fails.
    """
    layers = stack.at(emitter.wavelength_nm)
    windows = collector_windows(collectors, layers)
    near = _surface_cautions(layers, emitter)
    if not particles:
        values, error = _plane_stack(layers, emitter, windows)
        missing = unbalanced(values["balance"], _CLOSURE)
        if missing:
            error += abs(values["balance"])
        series = Series((0.0,), {name: (value,) for name, value in values.items()}, 0.0, 0.0)
        sources = tuple((_point(emitter, moment), weight) for moment, weight in emitter.moments())
        return _answer(series, emitter, windows, layers, sources, (), [*stack.cautions(), *near, *missing], "exact, plane stack", error)
    distance = _distance(particles, emitter)
    plan = plan_grids(particles, layers, accuracy, cell_nm, quick, distance)
    rows, sizes, reports, sources, last, failure = [], [], [], (), [], None
    for grid in grids(particles, layers, plan, progress):
        solved, failure = _solve_moments(grid, particles, emitter, progress)
        reports += [solution.report for solution, *_ in solved]
        rows.append(_observe(solved, emitter, layers, windows))
        sizes.append(grid.cells.cell_nm)
        sources = tuple((_joined(solution, emitter, moment), weight) for solution, moment, weight, _ in solved)
        last = [solution for solution, *_ in solved]
        if failure is not None:
            break
    if progress is not None:
        progress(ProgressEvent("done", 1.0))
    if failure is not None:
        sizes, rows = sizes[-1:], rows[-1:]
    table_error = max((s.problem.table.error for s in last if s.problem.table is not None), default=0.0)
    residual = max(report.residual for report in reports)
    series = Series(tuple(sizes), {name: tuple(row[name] for row in rows) for name in rows[0]}, residual, table_error)
    unresolved = _distance_cautions(distance, sizes[-1], particles, layers)
    stated = residual + table_error + _CELL_CLOSURE
    warnings = [*cautions(stack, particles), *near, *unresolved, *doubts(plan, quick, series.values["balance"][-1], stated)]
    method = f"coupled dipoles, {len(sizes)} grid{'s' if len(sizes) > 1 else ''}, finest cell {sizes[-1]:.3g} nm"
    out = _answer(series, emitter, windows, layers, sources, reports, warnings, method, None, resolved=not unresolved)
    if failure is not None:
        raise NotConverged(str(failure), best=out, report=failure.report)
    return out


def _point(emitter: Emitter, moment) -> DipoleSet:
    return DipoleSet(np.array([emitter.position_nm]), np.array([moment], dtype=complex))


def _joined(solution: Solution, emitter: Emitter, moment) -> DipoleSet:
    return DipoleSet(solution.problem.cells.centers_nm, solution.dipoles).joined(_point(emitter, moment))


def _distance(particles: Sequence, emitter: Emitter) -> float:
    """Distance of the emitter from the nearest particle's surface. InputError if it is inside or within 0.5 nm."""
    distance = min(float(particle.signed_distance(np.array([emitter.position_nm]))[0]) for particle in particles)
    if distance < 0.5:
        place = "inside of a particle" if distance < 0.0 else f"{distance:.2g} nm from a particle"
        raise InputError(
            Fault(
                "emitter position_nm",
                emitter.position_nm,
                "a point in the host at least 0.5 nm from every particle",
                f"It lies {place}; nearer than that local bulk optics has no meaning.",
            )
        )
    return distance


def _surface_cautions(layers: Layers, emitter: Emitter) -> list[str]:
    """Below 0.5 nm over an absorbing medium local optics has no meaning (InputError); below 1 nm over any it is doubtful."""
    height = emitter.position_nm[2]
    if height < SMALLEST_GAP_NM and layers.index[1].imag > 0.0:
        allowed = f"z of at least {SMALLEST_GAP_NM} nm over an absorbing medium"
        raise InputError(Fault("emitter position_nm", emitter.position_nm, allowed, "Nearer than that local bulk optics has no meaning."))
    if height < DOUBTFUL_GAP_NM:
        return [f"the emitter lies {height:.3g} nm above the surface: below {DOUBTFUL_GAP_NM:g} nm local bulk optics is doubtful"]
    return []


def _plane_stack(layers: Layers, emitter: Emitter, windows: dict) -> tuple[dict[str, float], float]:
    """All channels over the bare stack, and the relative error of the total from its quadrature."""
    host = host_power(layers.k_host)
    scalars, difference = reflected_scalars(layers, 0.0, 2.0 * emitter.position_nm[2], 1e-9)
    out = dict.fromkeys((*_CHANNELS, "balance", *(f"collected {name}" for name in windows)), 0.0)
    lossless = all(n.imag == 0.0 for n in layers.index)
    for moment, weight in emitter.moments():
        source = _point(emitter, moment)
        total = _bare_total(layers, scalars, moment)
        up = radiated_up(source, layers) / host
        down = radiated_down(source, layers) / host if layers.base_is_lossless else 0.0
        modes = sum(guided(source, layers).values()) / host
        # 40/(2 z): the near field has decayed to e^-40 there
        stack = 0.0 if lossless else delivered(source, layers, 20.0 / emitter.position_nm[2] + layers.k_host) / host - down
        found = {"total": total, "up": up, "down": down, "guided": modes, "stack": stack}
        found |= {name: value / host for name, value in collected_power(source, layers, windows).items()}
        for name, value in found.items():
            out[name] += weight * value
    out["balance"] = 1.0 - (out["up"] + out["down"] + out["guided"] + out["stack"]) / out["total"]
    return out, max(difference, 1e-12) + 1e-9


def _bare_total(layers: Layers, scalars: np.ndarray, moment) -> float:
    across = moment[0] ** 2 + moment[1] ** 2
    own = across * scalars[0] + moment[2] ** 2 * scalars[3]
    return 1.0 + 6.0 * np.pi / layers.k_host**3 * float(own.imag)


def _solve_moments(grid: Grid, particles: Sequence, emitter: Emitter, progress: Progress | None):
    """Solutions for each moment of the average: (solution, moment, weight, coupling), and the failure if there was one."""
    layers = grid.problem.layers
    filled = FilledParts(grid.cells, particles)
    table = viewing_table(grid.cells, layers, np.array([emitter.position_nm]))
    coupling = emitter_coupling(grid.cells, filled, layers.k_host, table, emitter.position_nm)
    moments = emitter.moments()
    solved, failure = [], None
    for number, (moment, weight) in enumerate(moments):
        listener = tell(progress, grid, number / len(moments), (number + 1) / len(moments))
        try:
            solution = grid.problem.solve(coupling @ np.array(moment, dtype=complex), on_step=listener)
        except NotConverged as stop:
            solution, failure = stop.best, stop
        solved.append((solution, moment, weight, coupling))
    return solved, failure


def _observe(solved, emitter: Emitter, layers: Layers, windows: dict) -> dict[str, float]:
    """All channels of one grid, averaged over the moments."""
    host = host_power(layers.k_host)
    scalars, _ = reflected_scalars(layers, 0.0, 2.0 * emitter.position_nm[2], 1e-9)
    out: dict[str, float] = {}
    for solution, moment, weight, coupling in solved:
        vector = np.array(moment)
        back = np.einsum("nij,ni,j->", coupling, solution.dipoles, vector)
        total = _bare_total(layers, scalars, moment) + 6.0 * np.pi / layers.k_host**3 * float(back.imag)
        dipoles = _joined(solution, emitter, moment)
        absorbed = solution.absorbed() / host
        up = radiated_up(dipoles, layers) / host
        down = radiated_down(dipoles, layers) / host if layers.base_is_lossless else 0.0
        modes = sum(guided(dipoles, layers).values()) / host

        def own_power(solution=solution, coupling=coupling, moment=moment, vector=vector) -> float:
            """Power that cells and emitter together give away: their own fields on each other."""
            cross = 2.0 * np.real(np.einsum("nij,ni,j->", coupling.imag, solution.dipoles, vector))
            return solution.given_away() / host + _bare_total(layers, scalars, moment) + layers.k_host * cross / host

        stack, closure = stack_share(layers, total, absorbed, up + down + modes, own_power)
        found = {"total": total, "up": up, "down": down, "guided": modes, "particle": absorbed, "stack": stack, "balance": closure}
        found |= {name: value / host for name, value in collected_power(dipoles, layers, windows).items()}
        for name, value in found.items():
            out[name] = out.get(name, 0.0) + weight * value
    return out


def _distance_cautions(distance: float, cell: float, particles: Sequence, layers: Layers) -> list[str]:
    metal = any(abs(complex(material(spec).index(layers.wavelength_nm)).imag) > 0.5 for spec in materials_of(particles))
    if distance < (1.5 if metal else 0.5) * cell:
        return [
            f"the emitter lies {distance:.3g} nm from a particle, with finest cells of {cell:.3g} nm: its rates are not resolved, and their "
            "bars do not bound the error"
        ]
    if metal and distance < 8.0 * cell:
        return [
            f"the emitter lies {distance:.3g} nm ({distance / cell:.1f} finest cells) from an absorbing particle: below 8 cells the staircase "
            "of the surface over-absorbs; the values are those of the finest grid, their bars span it and the extrapolated ones"
        ]
    return []


def _answer(series, emitter, windows, layers, sources, reports, warnings, method, exact_error, resolved=True) -> Emission:
    average = emitter.average()
    total_size = abs(series.values["total"][-1])

    def quantity(name: str, text: str) -> Quantity:
        if exact_error is not None:
            value = series.values[name][-1]
            return Quantity(value, exact_error * max(abs(value), 1e-3 * total_size), "1", text)
        return series.quantity(name, "1", text, total_size, resolved)

    named = {name: quantity(name, f"{_DEFINITIONS[name]}; {average}") for name in _CHANNELS}
    closure_error = exact_error if exact_error is not None else series.residual + series.table_error + _CELL_CLOSURE
    balance = Quantity(series.values["balance"][-1], closure_error, "1", _DEFINITIONS["balance"])
    collected = {
        name: quantity(f"collected {name}", f"power into {c.describe()} over the host power of the emitter; {average}")
        for name, (c, *_) in windows.items()
    }
    enough = len(series.cell_nm) > 1
    convergence = {name: series.convergence(name) for name in series.values if name != "balance"} if enough else {}
    return Emission(
        **named, balance=balance, collected=collected, **_yield_and_lifetime(named, emitter), warnings=tuple(warnings), method=method,
        convergence=convergence, reports=tuple(reports), _layers=layers, _sources=sources,
    )


def _yield_and_lifetime(named: dict[str, Quantity], emitter: Emitter) -> dict[str, Quantity | None]:
    """q = q0 F_rad/(1 - q0 + q0 F) and tau/tau0 = 1/(1 - q0 + q0 F), bars propagated linearly (taken as adding up, not averaging out)."""
    q0 = emitter.quantum_yield
    total, radiated = named["total"], named["up"].value + named["down"].value
    rate = 1.0 - q0 + q0 * total.value
    ratio, efficiency = 1.0 / rate, q0 * radiated / rate
    ratio_error = yield_error = None
    if total.error is not None:
        ratio_error = q0 * total.error * ratio**2
        yield_error = q0 / rate * (named["up"].error + named["down"].error) + efficiency * q0 * total.error / rate
    average = emitter.average()
    lifetime = None
    if emitter.lifetime_ns is not None:
        error = None if ratio_error is None else emitter.lifetime_ns * ratio_error
        text = f"lifetime for {emitter.lifetime_ns:g} ns in the unbounded host; {average}"
        lifetime = Quantity(emitter.lifetime_ns * ratio, error, "ns", text)
    return {
        "quantum_yield": Quantity(efficiency, yield_error, "1", f"q0 (up + down)/(1 - q0 + q0 total) with q0 = {q0:g}; {average}"),
        "lifetime_ratio": Quantity(ratio, ratio_error, "1", f"lifetime over that in the unbounded host, 1/(1 - q0 + q0 total), q0 = {q0:g}; {average}"),
        "lifetime_ns": lifetime,
    }
