"""Powers that leave a set of dipoles: to the far field above and below, into guided modes, into films and base.

All as cross sections in nm^2 for unit incident amplitude. A channel is an integral over q of a smooth weight of the dipoles (their
projections squared, summed over azimuth) times a cheap, possibly sharp function of the stack; the weights are interpolated and
the stack is integrated adaptively, so that narrow resonances of the stack cost no further sums over dipoles.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from substrate.green.far_field import DipoleSet, projections
from substrate.medium.fresnel import normal_wave_number, reflection, transmission
from substrate.medium.modes import guided_modes
from substrate.medium.stack import Layers

_NODES = 16
_GAUSS, _GAUSS_WEIGHTS = np.polynomial.legendre.leggauss(_NODES)
FULL_CIRCLE = (0.0, 2.0 * np.pi)


@dataclass(frozen=True)
class Weights:
    """Azimuth sums of the projections at some q: |up|^2, |down|^2, down conj(up), for s and p; (n,) each."""

    up: tuple[np.ndarray, np.ndarray]
    down: tuple[np.ndarray, np.ndarray]
    cross: tuple[np.ndarray, np.ndarray]


def azimuth_nodes(span: tuple[float, float], size: float) -> tuple[np.ndarray, np.ndarray]:
    """Azimuths and weights for a source of phase radius `size` = q R: equal steps on the full circle, Gauss nodes on a part of it."""
    low, high = span
    count = int(2.2 * size) + 24
    if high - low >= FULL_CIRCLE[1] - 1e-12:
        return low + (np.arange(count) + 0.5) * (high - low) / count, np.full(count, (high - low) / count)
    nodes, weights = np.polynomial.legendre.leggauss(max(16, int(count * (high - low) / 4.0) + 12))
    return 0.5 * (low + high) + 0.5 * (high - low) * nodes, 0.5 * (high - low) * weights


def weights_at(sources: DipoleSet, k: float, q: np.ndarray, span=FULL_CIRCLE, upward: bool = True) -> Weights:
    """The azimuth sums over `span` (radians) at in-plane wave numbers q."""
    centre = sources.positions_nm[:, :2].mean(axis=0)
    radius = np.hypot(*(sources.positions_nm[:, :2] - centre).T).max()
    azimuth, weight = azimuth_nodes(span, float(np.max(q)) * radius)
    found = projections(sources, k, q, azimuth, upward)

    def summed(a, b):
        return (a * b.conj()) @ weight

    pairs = ((found.s_up, found.s_down), (found.p_up, found.p_down))
    return Weights(
        tuple(summed(up, up).real for up, _ in pairs),
        tuple(summed(down, down).real for _, down in pairs),
        tuple(summed(down, up) for up, down in pairs),
    )


def radiated_up(sources: DipoleSet, layers: Layers, polar=(0.0, 0.5 * np.pi), span=FULL_CIRCLE) -> float:
    """Power into the host between polar angles (radians from +z) and azimuths."""
    k = layers.k_host

    def stack_part(theta, w: Weights):
        r = reflection(layers, k * np.sin(theta))
        total = sum(w.up[i] + np.abs(r[i]) ** 2 * w.down[i] + 2.0 * (r[i] * w.cross[i]).real for i in (0, 1))
        return total * np.sin(theta)

    value = _integrate(polar, lambda theta: weights_at(sources, k, k * np.sin(theta), span), stack_part, _size(sources, k))
    return k**4 / (16.0 * np.pi**2) * value


def radiated_down(sources: DipoleSet, layers: Layers, polar=(0.0, 0.5 * np.pi), span=FULL_CIRCLE) -> float:
    """Power into a lossless base between polar angles measured from -z in the base (radians) and azimuths."""
    k, k_base = layers.k_host, layers.index[-1].real * layers.k0
    flipped = layers.flipped()

    def stack_part(theta, w: Weights):
        t = transmission(flipped, k_base * np.sin(theta))
        return sum(np.abs(t[i]) ** 2 * w.down[i] for i in (0, 1)) * np.sin(theta)

    def weights(theta):
        return weights_at(sources, k, k_base * np.sin(theta), span, upward=False)

    size = _size(sources, max(k, k_base))
    critical = np.arcsin(k / k_base) if k < k_base else 2.0
    parts = [(polar[0], min(polar[1], critical)), (max(polar[0], critical), polar[1])]
    total = 0.0
    for low, high in parts:
        if low < high:
            # the branch point at the critical angle goes as a square root: theta = end -+ (span) x^2 makes it smooth
            end, sign = (high, -1.0) if high <= critical else (low, 1.0)
            width = np.sqrt(high - low)

            def bent(x, w, end=end, sign=sign):
                return stack_part(end + sign * x * x, w) * 2.0 * x

            total += _integrate((0.0, width), lambda x, end=end, sign=sign: weights(end + sign * x * x), bent, size)
    return layers.index[-1].real / layers.index[0].real * k**4 / (16.0 * np.pi**2) * total


def guided(sources: DipoleSet, layers: Layers) -> dict[str, float]:
    """Power into each guided mode of a lossless stack: residues of the reflection; keys like 'TE 1.77776' (mode index)."""
    k = layers.k_host
    powers = {}
    for mode in guided_modes(layers):
        w = weights_at(sources, k, np.array([mode.q]), upward=False).down[0 if mode.polarization == "s" else 1][0]
        kappa = np.sqrt(mode.q**2 - k * k)
        powers[mode.name] = float(k**3 / (16.0 * np.pi**2) * mode.q * 2.0 * np.pi * mode.residue.real / kappa * w)
    return powers


def delivered(sources: DipoleSet, layers: Layers, q_max: float) -> float:
    """Power that crosses z = 0 downward, by the flux of the spectrum up to q_max (1/nm): films, base and far field below together.

    An independent check of balances: costs grow with q_max times the size of the source. Lossless guided modes are left out
    (they are poles on the path).
    """
    k = layers.k_host
    size = _size(sources, k)

    def propagating(theta, w: Weights):
        r = reflection(layers, k * np.sin(theta))
        return sum((1.0 - np.abs(r[i]) ** 2) * w.down[i] for i in (0, 1)) * k * np.sin(theta)

    def evanescent(u, w: Weights):
        r = reflection(layers, k * np.cosh(u))
        return sum(2.0 * r[i].imag * w.down[i] for i in (0, 1)) * k * np.cosh(u)

    total = _integrate(
        (0.0, 0.5 * np.pi), lambda theta: weights_at(sources, k, k * np.sin(theta), upward=False), propagating, size
    )
    reach = np.arccosh(max(q_max, 1.001 * k) / k)
    count = max(1, int(np.ceil(reach / 0.5)))
    edges = np.linspace(0.0, reach, count + 1)
    for low, high in zip(edges[:-1], edges[1:]):
        local = size * np.cosh(high)
        total += _integrate(
            (low, high), lambda u: weights_at(sources, k, k * np.cosh(u), upward=False), evanescent, local
        )
    return float(k**3 / (16.0 * np.pi**2) * total)


def _size(sources: DipoleSet, k: float) -> float:
    """Phase extent of the source, including its height above the surface, which sets how fast weights vary."""
    low, high = sources.positions_nm.min(axis=0), sources.positions_nm.max(axis=0)
    return float(k * (np.linalg.norm(high - low) + high[2]))


def _integrate(span, weights: Callable, integrand: Callable, size: float) -> float:
    """Integral of integrand(x, weights(x)): weights at Gauss nodes of panels, interpolated for the adaptive part of the stack."""
    low, high = span
    panels = max(1, int(np.ceil((high - low) * (0.12 * size + 0.35))))
    edges = np.linspace(low, high, panels + 1)
    total = 0.0
    for left, right in zip(edges[:-1], edges[1:]):
        middle, half = 0.5 * (left + right), 0.5 * (right - left)
        known = weights(middle + half * _GAUSS)
        total += _refine(known, integrand, middle, half)
    return float(total)


def _interpolate(known: Weights, matrix: np.ndarray) -> Weights:
    return Weights(*(tuple(matrix @ part for part in pair) for pair in (known.up, known.down, known.cross)))


def _refine(known: Weights, integrand: Callable, middle: float, half: float) -> float:
    """Adaptive bisection of one panel with the weights interpolated from its own nodes, to 1e-9 of the panel's absolute integral."""
    pending = [(-1.0, 1.0)]
    coarse = {(-1.0, 1.0): half * (_GAUSS_WEIGHTS @ integrand(middle + half * _GAUSS, known))}
    scale = half * (_GAUSS_WEIGHTS @ np.abs(integrand(middle + half * _GAUSS, known)))
    total, spent = 0.0, 0
    while pending:
        low, high = pending.pop()
        centre = 0.5 * (low + high)
        halves = {}
        for a, b in ((low, centre), (centre, high)):
            nodes = 0.5 * (a + b) + 0.5 * (b - a) * _GAUSS
            values = integrand(middle + half * nodes, _interpolate(known, _lagrange(nodes)))
            halves[(a, b)] = half * 0.5 * (b - a) * (_GAUSS_WEIGHTS @ values)
            spent += 1
        fine = sum(halves.values())
        if abs(fine - coarse[(low, high)]) <= 1e-9 * max(scale, abs(fine)) or spent > 400:
            total += fine
        else:
            coarse.update(halves)
            pending.extend(halves)
    return float(np.real(total))


_BARYCENTRIC = np.array([1.0 / np.prod(_GAUSS[i] - np.delete(_GAUSS, i)) for i in range(_NODES)])


def _lagrange(x: np.ndarray) -> np.ndarray:
    """Matrix that takes values at the Gauss nodes to values at x in [-1, 1]."""
    gap = x[:, None] - _GAUSS
    hit = np.abs(gap) < 1e-15
    weights = _BARYCENTRIC / np.where(hit, 1.0, gap)
    weights = np.where(hit.any(axis=1)[:, None], hit.astype(float), weights)
    return weights / weights.sum(axis=1, keepdims=True)


def pattern(sources: DipoleSet, layers: Layers, polar_deg, azimuth_deg) -> np.ndarray:
    """dC/dOmega in nm^2/sr summed over both polarisations at directions (n,): polar from +z (0..90 above, 90..180 below)."""
    s, p = amplitudes(sources, layers, polar_deg, azimuth_deg)
    return np.abs(s) ** 2 + np.abs(p) ** 2


def amplitudes(sources: DipoleSet, layers: Layers, polar_deg, azimuth_deg) -> tuple[np.ndarray, np.ndarray]:
    """Far-field amplitudes (s, p), complex (n,), scaled so that |s|^2 + |p|^2 = dC/dOmega in nm^2/sr.

    Zero below for an absorbing base, and at exactly 90 degrees. s and p refer to the wave that would come back along the direction.
    """
    polar, azimuth = np.broadcast_arrays(np.radians(np.asarray(polar_deg, float)), np.radians(np.asarray(azimuth_deg, float)))
    shape, polar, azimuth = polar.shape, polar.ravel(), azimuth.ravel()
    k = layers.k_host
    s, p = np.zeros(len(polar), dtype=complex), np.zeros(len(polar), dtype=complex)
    above = np.cos(polar) > 1e-12
    below = (np.cos(polar) < -1e-12) & layers.base_is_lossless
    for side, chosen in (("above", above), ("below", below)):
        medium = layers.index[0 if side == "above" else -1].real
        for theta in np.unique(polar[chosen]):
            here = chosen & (polar == theta)
            q = np.array([medium * layers.k0 * np.sin(theta)])
            found = projections(sources, k, q, azimuth[here], upward=side == "above")
            norm = k * k / (4.0 * np.pi)
            if side == "above":
                r = reflection(layers, q)
                s[here] = norm * (found.s_up + r[0] * found.s_down)[0]
                p[here] = norm * (found.p_up + r[1] * found.p_down)[0]
            else:
                t = transmission(layers.flipped(), q)
                norm *= np.sqrt(medium / layers.index[0].real)
                s[here], p[here] = norm * (t[0] * found.s_down)[0], norm * (t[1] * found.p_down)[0]
    return s.reshape(shape), p.reshape(shape)
