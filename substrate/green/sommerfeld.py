"""Sommerfeld integrals: the field that the stack returns to a dipole, as four scalars of (rho, Z).

For source and observer above the stack, rho apart horizontally (azimuth f of field point minus source) and Z = z + z',
k^2 G_reflected = [[A0 + A2 cos 2f, A2 sin 2f, B cos f], [A2 sin 2f, A0 - A2 cos 2f, B sin f], [-B cos f, -B sin f, C]] with

    A0 = i/(8 pi)   int (q/kz) J0(q rho) [r_s k^2 - r_p kz^2]   e^{i kz Z} dq
    A2 = i/(8 pi)   int (q/kz) J2(q rho) [r_s k^2 + r_p kz^2]   e^{i kz Z} dq
    B  = 1/(4 pi)   int q^2    J1(q rho) r_p                    e^{i kz Z} dq
    C  = i/(4 pi)   int (q^3/kz) J0(q rho) r_p                  e^{i kz Z} dq

all in 1/nm^3. The static image of the first interface (`substrate.green.image`) is subtracted under the integrals and can be
added back in closed form.

The path: a half-ellipse below the real axis from 0 to a, right of every pole; the real axis on to q_tail; there J is split into
Hankel functions and both parts go off at +-45 degrees, where they decay for every ratio of rho to Z. That no pole hides in the
wedge between the tails is checked by the winding number of the pole functions, never assumed.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import j0, j1, jv

from substrate.errors import SubstrateError
from substrate.green.image import image_scalars, image_strength
from substrate.medium.fresnel import POLARIZATIONS, normal_wave_number, pole_function, reflection
from substrate.medium.stack import Layers

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(16)
_DECAYED = 40.0  # e^-40 = 4e-18: below the rounding of a double


@dataclass(frozen=True)
class Path:
    """Nodes for one block of (rho, Z): `near` carries Bessel functions, `tail` (upper ray) Hankel functions."""

    near: np.ndarray
    near_weight: np.ndarray
    tail: np.ndarray
    tail_weight: np.ndarray


def tail_start(layers: Layers) -> float:
    """A wave number right of every pole of r_s and r_p, in 1/nm, found by winding numbers; the margin to the poles is 0.4 k or more."""
    largest = max(abs(n.real) for n in layers.index) * layers.k0
    start = 1.02 * largest
    for _ in range(60):
        if all(_winding(layers, start, polarization) == 0 for polarization in POLARIZATIONS):
            return start + 0.45 * layers.k_host
        start *= 1.25
    raise SubstrateError(
        f"no wave number up to {start / layers.k0:.3g} k0 lies right of all poles of this stack at {layers.wavelength_nm:g} nm: "
        "two media with exactly opposite permittivities touch; give them their measured loss"
    )


def _winding(layers: Layers, start: float, polarization: str) -> int:
    """Number of zeros of the pole function in the wedge |arg(q - start)| < 45 degrees, by the turns of its argument."""
    scale = layers.k_host
    distance = np.concatenate([np.linspace(0.0, 1.0, 200)[:-1], np.geomspace(1.0, 1e7, 500)]) * scale
    count = len(layers.thickness_nm) + 1
    for _ in range(8):
        turn, largest_step = 0.0, 0.0
        for sign in (1.0, -1.0):
            q = start + distance * np.exp(0.25j * np.pi * sign)
            value = pole_function(layers, q, polarization) / q**count
            step = np.angle(value[1:] / value[:-1])
            turn -= sign * step.sum()
            largest_step = max(largest_step, np.abs(step).max())
        turns = turn / (2.0 * np.pi)
        if largest_step < 0.8 and abs(turns - round(turns)) < 0.1:
            return round(turns)
        distance = np.sort(np.concatenate([distance, 0.5 * (distance[1:] + distance[:-1])]))
    raise SubstrateError(f"the winding number of the {polarization} pole function came out as {turns:.3f}, not as a whole number")


def _gauss(edges: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    half = 0.5 * np.diff(edges)
    middle = 0.5 * (edges[1:] + edges[:-1])
    return (middle[:, None] + half[:, None] * _NODES).ravel(), (half[:, None] * _WEIGHTS).ravel()


def _edges(start: float, end: float, longest) -> np.ndarray:
    """Panel edges from start to end, each panel no longer than longest(left edge)."""
    edges = [start]
    while edges[-1] < end:
        edges.append(min(end, edges[-1] + longest(edges[-1])))
    return np.array(edges)


def make_path(layers: Layers, right_of_poles: float, rho: tuple[float, float], height: tuple[float, float], fineness: float) -> Path:
    """Nodes and weights that serve every rho and Z in the given ranges (nm).

    fineness: 1 gives about 1e-10 for ordinary stacks, larger is finer; panels follow both rho and the oscillation along Z.
    """
    k = layers.k_host
    rho_low, rho_high = rho
    z_low, z_high = height
    a = right_of_poles
    pole_limit = a - 0.4 * k
    depth = min(0.45 * k, 2.5 / max(rho_high, 1e-9))
    turning = 6.0 / (rho_high + z_high)

    ellipse_length = min(2.0 * depth, turning) / fineness
    count = max(3, int(np.ceil(a / ellipse_length)))
    angle, angle_weight = _gauss(np.linspace(0.0, np.pi, count + 1))
    bend = 0.5 * a * (1.0 - np.cos(angle)) - 1j * depth * np.sin(angle)
    bend_weight = (0.5 * a * np.sin(angle) - 1j * depth * np.cos(angle)) * angle_weight

    with_tail = rho_high > 4.0 * z_low
    end = max(a, 20.0 / rho_low) if with_tail else max(a, _DECAYED / z_low + k)
    by_rho = 6.0 / max(rho_high, 1e-9)
    straight_edges = _edges(
        a, end, lambda q: min(by_rho, max(6.0 / z_high, 0.5 * (q - k)), 1.5 * (q - pole_limit)) / fineness
    )
    straight, straight_weight = _gauss(straight_edges)
    near = np.concatenate([bend, straight.astype(complex)])
    near_weight = np.concatenate([bend_weight, straight_weight.astype(complex)])
    if not with_tail:
        return Path(near, near_weight, np.empty(0, complex), np.empty(0, complex))

    slant = np.exp(0.25j * np.pi)
    reach = np.sqrt(2.0) * _DECAYED / (rho_low + z_low)
    step = 8.0 / (rho_high + z_high)
    tail_edges = _edges(0.0, reach, lambda t: min(max(step, 0.5 * t), 1.2 * (end - pole_limit + 0.5 * t)) / fineness)
    t, t_weight = _gauss(tail_edges)
    return Path(near, near_weight, end + t * slant, t_weight * slant)


def _hankel(x: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Half of H1 of orders 0, 1, 2 for |x| >= 20 by the large-argument series (Abramowitz & Stegun 9.2.7), error below 1e-15."""
    carrier = 0.5 * np.sqrt(2.0 / (np.pi * x)) * np.exp(1j * (x - 0.25 * np.pi))
    inverse = 1j / (8.0 * x)
    out = []
    for order in (0, 1, 2):
        total = np.ones_like(x)
        coefficients = []
        coefficient = 1.0
        for m in range(1, 22):
            coefficient *= (4.0 * order**2 - (2 * m - 1) ** 2) / m
            coefficients.append(coefficient)
        total = np.full_like(x, coefficients[-1])
        for coefficient in coefficients[-2::-1]:
            total = total * inverse + coefficient
        out.append(carrier * (-1j) ** order * (1.0 + total * inverse))
    return tuple(out)


def _bessel(x: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """J0, J1, J2 of a complex array; the cheaper real functions where the argument is real."""
    if np.all(x.imag == 0.0):
        real = x.real
        zero, one = j0(real), j1(real)
        small = real < 0.3
        safe = np.where(small, 1.0, real)
        two = np.where(small, jv(2, np.where(small, real, 0.1)), 2.0 * one / safe - zero)
        return zero, one, two
    return jv(0, x), jv(1, x), jv(2, x)


def _kernels(layers: Layers, q: np.ndarray, beta: complex) -> tuple[np.ndarray, np.ndarray]:
    """kz, and the factors (4, n) in front of J e^{i kz Z}, with the reflection beta of the static image taken out of r_p."""
    k2 = layers.k_host**2
    kz = normal_wave_number(layers.k_host, q)
    r_s, r_p = reflection(layers, q)
    rest = (r_p - beta) * q * q
    ring = 1j * q / kz / (8.0 * np.pi)
    a0 = ring * (rest + k2 * (r_s - r_p + beta))
    a2 = ring * (k2 * (r_s + r_p - beta) - rest)
    return kz, np.stack([a0, a2, rest / (4.0 * np.pi), 2.0 * ring * rest])


def remainder(layers: Layers, rho, height, right_of_poles: float | None = None, fineness: float = 1.0, extract: bool = True) -> np.ndarray:
    """The four integrals without the static image (with it if `extract` is false) on the grid rho x height: (4, n_rho, n_height).

    rho >= 0 and height > 0 in nm, each 1-D; the spans rho.max/rho.min and so on should be moderate, since one path serves all
    (`rest_on_panels` in the table splits wide ranges).
    """
    rho, height = np.atleast_1d(rho).astype(float), np.atleast_1d(height).astype(float)
    a = tail_start(layers) if right_of_poles is None else right_of_poles
    path = make_path(layers, a, (rho.min(), rho.max()), (height.min(), height.max()), fineness)
    beta = image_strength(layers) if extract else 0.0
    bent = np.flatnonzero(path.near.imag != 0.0)
    split = bent[-1] + 1 if len(bent) else 0
    total = np.zeros((4, len(rho), len(height)), dtype=complex)
    for part in (slice(0, split), slice(split, None)):
        q, weight = path.near[part], path.near_weight[part]
        if len(q):
            zero, one, two = _bessel(np.multiply.outer(rho, q))
            kz, factors = _kernels(layers, q, beta)
            wave = np.exp(1j * np.multiply.outer(kz, height))
            for i, bessel in enumerate((zero, two, one, zero)):
                total[i] += (bessel * (factors[i] * weight)) @ wave
    if len(path.tail):
        upper = _hankel(np.multiply.outer(rho, path.tail))
        for q, weight, hankel in (
            (path.tail, path.tail_weight, upper),
            (path.tail.conj(), path.tail_weight.conj(), tuple(h.conj() for h in upper)),
        ):
            kz, factors = _kernels(layers, q, beta)
            wave = np.exp(1j * np.multiply.outer(kz, height))
            for i, order in enumerate((0, 2, 1, 0)):
                total[i] += (hankel[order] * (factors[i] * weight)) @ wave
    return total


def reflected_scalars(layers: Layers, rho: float, height: float, tolerance: float = 1e-10) -> tuple[np.ndarray, float]:
    """A0, A2, B, C at one point by quadrature alone, refined until two different paths agree: the judge of the table.

    rho >= 0, height = z + z' > 0 in nm. Returns the scalars (4,) in 1/nm^3 and the difference of the last two paths
    relative to the largest of them. Raises SubstrateError if the tolerance is not reached. Near e1 + e2 = 0 rounding leaves about 1e-8.
    """
    if layers.is_uniform:
        return np.zeros(4, dtype=complex), 0.0
    a = tail_start(layers)
    points = np.array([rho]), np.array([height])
    best, difference = None, np.inf
    for fineness in (1.0, 1.4, 2.0, 2.8):
        values = remainder(layers, *points, a * (1.0 + 0.07 * fineness), fineness)[:, 0, 0]
        values = values + image_scalars(image_strength(layers), layers.k_host, rho, height)
        if best is not None:
            change = np.abs(values - best).max() / np.abs(values).max()
            difference = min(difference, change)
        best = values
        if difference <= tolerance:
            return best, difference
    raise SubstrateError(
        f"the Sommerfeld integrals at rho = {rho:g} nm, z + z' = {height:g} nm changed by {difference:.1e} between paths; "
        f"the tolerance is {tolerance:.1e}: allow a larger one"
    )


def tensor_from_scalars(scalars: np.ndarray, cosine, sine) -> np.ndarray:
    """The 3 x 3 reflected tensor (..., 3, 3) from scalars (4, ...) and the azimuth of field point minus source."""
    a0, a2, b, c = scalars
    cos2, sin2 = cosine**2 - sine**2, 2.0 * sine * cosine
    rows = [
        [a0 + a2 * cos2, a2 * sin2, b * cosine],
        [a2 * sin2, a0 - a2 * cos2, b * sine],
        [-b * cosine, -b * sine, c],
    ]
    return np.moveaxis(np.array([[np.asarray(entry) for entry in row] for row in rows]), (0, 1), (-2, -1))
