"""Plane waves in a stack by characteristic matrices: reflection, transmission, power, fields, loss in each film.

Born & Wolf, Principles of Optics, section 1.6: through a film the pair of tangential fields is multiplied by
[[cos d, i sin d/Y], [i Y sin d, cos d]]. Started in the base and carried upwards the growing solution is the wanted one, so nothing
cancels; mpmath knows no overflow. 30-digit arithmetic, time factor exp(-i omega t), index n + i k.

z points up and z = 0 is the top of the stack; indices run from the host (real) down to the base. The in-plane wave number is given
as S = q/k0 (S = n_host sin(angle) for a plane wave). U is E_y for s and Z0 H_y for p, D = U'/(i k0 w) with w = 1 for s, eps for p;
both are continuous. Amplitudes of p waves are those of E along k_hat x y: (cos, 0, sin) for the incident wave.
"""

from __future__ import annotations

from dataclasses import dataclass

import mpmath as mp

DIGITS = 30


@dataclass(frozen=True)
class LayerStack:
    """Indices host..base, thicknesses of the films between them, vacuum wavelength."""

    index: tuple
    thickness_nm: tuple
    wavelength_nm: float

    @property
    def k0(self):
        return 2 * mp.pi / mp.mpmathify(self.wavelength_nm)

    @property
    def host(self):
        """Index of the host, which must be real."""
        index = mp.mpmathify(self.index[0])
        if mp.im(index) != 0:
            raise ValueError(f"host index {self.index[0]}: a lossy host has no incident power and no cross sections")
        return mp.re(index)

    def eps(self, layer: int):
        return mp.mpmathify(self.index[layer]) ** 2


@dataclass(frozen=True)
class Response:
    """r, t: amplitudes of E. reflected, transmitted: shares of the incident power (transmitted: into the base, lossy or not).

    absorbed: share of each film, from the loss integrated over its depth, not from the difference of the others.
    """

    r: complex
    t: complex
    reflected: float
    transmitted: float
    absorbed: tuple[float, ...]


def normal_index(eps, s):
    """kz/k0 = i sqrt(S^2 - eps): decays or travels away for S on or below the real axis, and to the right of every branch point above it."""
    if mp.im(s) == 0 and mp.im(eps) == 0:
        return mp.sqrt(mp.re(eps) - mp.re(s) ** 2)
    return mp.mpc(0, 1) * mp.sqrt(s * s - eps)


def _ladder(stack: LayerStack, s, polarization: str) -> tuple[list, list, list]:
    """(U, D) at the bottom of each layer above the base from the lowest film up to the host, kz/k0, and w, by layer; base amplitude 1."""
    layers = range(len(stack.index))
    normal = [normal_index(stack.eps(j), s) for j in layers]
    weight = [mp.mpf(1) if polarization == "s" else stack.eps(j) for j in layers]
    pair = (mp.mpc(1), -normal[-1] / weight[-1])
    pairs = [pair]
    for film in range(len(stack.index) - 2, 0, -1):
        pair = _step(pair, normal[film], weight[film], stack.k0 * mp.mpmathify(stack.thickness_nm[film - 1]))
        pairs.append(pair)
    return pairs, normal, weight


def _step(pair: tuple, normal, weight, rise) -> tuple:
    """(U, D) carried up by `rise` (k0 times the distance) in one layer."""
    u, d = pair
    cosine = mp.cos(normal * rise)
    slope = mp.sin(normal * rise) / normal if normal else rise
    return cosine * u + mp.mpc(0, 1) * weight * slope * d, cosine * d + mp.mpc(0, 1) * normal**2 / weight * slope * u


def _incident(pairs, normal, weight) -> tuple:
    """Amplitudes of U that come down and go up in the host."""
    u, d = pairs[-1]
    return (u - d * weight[0] / normal[0]) / 2, (u + d * weight[0] / normal[0]) / 2


def reflection(stack: LayerStack, s, polarization: str):
    """Reflection amplitude at z = 0 as an mpmath number, for any complex S below the real axis (or right of all branch points)."""
    down, up = _incident(*_ladder(stack, s, polarization))
    return up / down


def plane_wave(stack: LayerStack, angle_deg: float, polarization: str) -> Response:
    """Everything about a plane wave from above at angle_deg from the normal, polarization "s" or "p"."""
    with mp.workdps(DIGITS):
        s = _in_plane(stack, angle_deg)
        pairs, normal, weight = _ladder(stack, s, polarization)
        down, up = _incident(pairs, normal, weight)
        r, t = up / down, 1 / down
        through = abs(t) ** 2 * mp.re(normal[-1] / weight[-1]) / mp.re(normal[0] / weight[0])
        if polarization == "p":
            t *= stack.host / mp.mpmathify(stack.index[-1])
        absorbed = tuple(float(_loss(stack, film, angle_deg, polarization)) for film in range(1, len(stack.index) - 1))
        return Response(complex(r), complex(t), float(abs(r) ** 2), float(through), absorbed)


def field(stack: LayerStack, angle_deg: float, polarization: str, z_nm: float) -> tuple[complex, complex, complex]:
    """(E_x, E_y, E_z) at x = 0 and any height for a unit incident wave; at an interface the value above it."""
    with mp.workdps(DIGITS):
        return tuple(complex(value) for value in _field(stack, angle_deg, polarization, mp.mpf(z_nm)))


def _field(stack: LayerStack, angle_deg, polarization: str, z) -> tuple:
    s = _in_plane(stack, angle_deg)
    pairs, normal, weight = _ladder(stack, s, polarization)
    bottoms = [mp.mpf(0)]
    for thickness in stack.thickness_nm:
        bottoms.append(bottoms[-1] - mp.mpmathify(thickness))
    layer = next((j for j, bottom in enumerate(bottoms) if z >= bottom), len(bottoms))
    scale = (1 if polarization == "s" else -stack.host) / _incident(pairs, normal, weight)[0]
    if layer == len(bottoms):  # the base holds one wave only
        u = mp.expj(-normal[-1] * stack.k0 * (z - bottoms[-1]))
        d = -normal[-1] / weight[-1] * u
    else:
        u, d = _step(pairs[len(pairs) - 1 - layer], normal[layer], weight[layer], stack.k0 * (z - bottoms[layer]))
    if polarization == "s":
        return mp.mpf(0), scale * u, mp.mpf(0)
    return scale * d, mp.mpf(0), -s * scale * u / stack.eps(min(layer, len(stack.index) - 1))


def _loss(stack: LayerStack, film: int, angle_deg, polarization: str):
    """k0 Im(eps) / (n_host cos) times the integral of |E|^2 over the film."""
    thickness = mp.mpmathify(stack.thickness_nm[film - 1])
    imaginary = mp.im(stack.eps(film))
    if imaginary == 0 or thickness == 0:
        return mp.mpf(0)
    top = -mp.fsum(mp.mpmathify(d) for d in stack.thickness_nm[: film - 1])

    def density(depth):
        return mp.fsum(abs(value) ** 2 for value in _field(stack, angle_deg, polarization, top - depth))

    # pieces of half a radian of the phase at most, Gauss-Legendre in each
    pieces = int(abs(mp.mpmathify(stack.index[film])) * stack.k0 * thickness) + 1
    nodes = [thickness * j / pieces for j in range(pieces + 1)]
    with mp.workdps(18):
        integral = mp.quad(density, nodes, method="gauss-legendre", maxdegree=5)
    return stack.k0 * imaginary / (stack.host * mp.cos(mp.mpf(angle_deg) * mp.pi / 180)) * integral


def _in_plane(stack: LayerStack, angle_deg):
    return stack.host * mp.sin(mp.mpf(angle_deg) * mp.pi / 180)


def ellipsometric_angles(stack: LayerStack, angle_deg: float) -> tuple[float, float]:
    """Psi and Delta in degrees, 0 <= Delta < 360, in the sign of handbooks (index n - ik): tan Psi exp(i Delta) = conj(r_p/r_s)."""
    with mp.workdps(DIGITS):
        s = _in_plane(stack, angle_deg)
        ratio = mp.conj(reflection(stack, s, "p") / reflection(stack, s, "s"))
        return float(mp.degrees(mp.atan(abs(ratio)))), float(mp.degrees(mp.arg(ratio)) % 360)
