"""The reflected Green's tensor of a stack by quadrature in mpmath: slow, readable, 15 digits and more.

G is such that E = omega^2 mu0 G p for a dipole p in the host, field point and source at heights whose sum is Z, horizontal distance
rho; unit 1/length. From the plane-wave expansion of the dipole field (Novotny & Hecht, Principles of Nano-Optics, ch. 10), each wave
reflected and the azimuth integrated in closed form, four scalars remain (k host wave number, q in-plane, kz = sqrt(k^2 - q^2)):
    A0 = i/(8 pi) int q/kz J0 (r_s - r_p kz^2/k^2) e^{i kz Z} dq     A2 = i/(8 pi) int q/kz J2 (r_s + r_p kz^2/k^2) e^{i kz Z} dq
    B  = 1/(4 pi k^2) int q^2 J1 r_p e^{i kz Z} dq                   C  = i/(4 pi k^2) int q^3/kz J0 r_p e^{i kz Z} dq
r_p belongs to the magnetic field. Reflections by characteristic matrices (`multilayer`); nothing is subtracted in closed form.

The path is a polygon below the axis, 0 -> b(1 - i) -> (e - b) - ib -> e with e right of all poles, then the real axis: to the end
where Z is the larger distance; where rho is, to f > e, and then J = (H1 + H2)/2 and both parts run vertically, f + it and f - it,
where they fall as e^{-t rho}. `end` and `depth` move the path: results must not change, and a pole right of `end` shows as a change with `end`.
"""

from __future__ import annotations

from functools import lru_cache

import mpmath as mp
import numpy as np

from tests.reference.multilayer import LayerStack, reflection

DIGITS = 25
_ORDER = 22  # Gauss-Legendre nodes a panel
_DECAY = 42  # e^-42 = 6e-19 ends a tail


def reflected_tensor(stack: LayerStack, dx_nm: float, dy_nm: float, height_sum_nm: float, **path) -> np.ndarray:
    """(3, 3) complex in 1/nm: first index field, second source; (dx, dy) = field point minus source, height_sum_nm = z + z' > 0."""
    with mp.workdps(DIGITS):
        rho = mp.sqrt(mp.mpf(dx_nm) ** 2 + mp.mpf(dy_nm) ** 2)
        a0, a2, b, c = reflected_scalars(stack, rho, height_sum_nm, **path)
        cosine, sine = (dx_nm / rho, dy_nm / rho) if rho else (mp.mpf(1), mp.mpf(0))
        double, cross = a2 * (cosine**2 - sine**2), 2 * a2 * cosine * sine
        rows = [[a0 + double, cross, b * cosine], [cross, a0 - double, b * sine], [-b * cosine, -b * sine, c]]
        return np.array([[complex(value) for value in row] for row in rows])


def reflected_scalars(stack: LayerStack, rho_nm, height_sum_nm, end: float | None = None, depth: float = 0.4) -> tuple:
    """A0, A2, B, C in 1/nm as mpmath numbers. end in units of k0, depth in units of k: of the path, see above."""
    with mp.workdps(DIGITS):
        rho, height = mp.mpf(rho_nm), mp.mpf(height_sum_nm)
        if height <= 0:
            raise ValueError(f"height_sum_nm = {height_sum_nm}: the integrals exist for z + z' > 0 only")
        k = stack.k0 * stack.host
        right = stack.k0 * (right_of_poles(stack) if end is None else mp.mpf(end))
        near_axis = _finite_panels(k, right, rho, height, mp.mpf(depth))
        # films repeat their poles upwards and downwards: 4/rho further on, panels of 4/rho keep off that column
        near_axis += _graded(right, 1, 4 / max(rho, height), 4 / rho if rho >= height else _DECAY / height)
        parts = [(near_axis, _bessel_j)]
        if rho >= height:
            turning_point = near_axis[-1][1]
            for turn, function in ((mp.mpc(0, 1), _half_hankel_1), (mp.mpc(0, -1), _half_hankel_2)):
                parts.append((_graded(turning_point, turn, 4 / rho, _DECAY / rho), function))
        total = mp.matrix(4, 1)
        for panels, cylinder in parts:
            for low, high in panels:
                total += _panel(stack, low, high, rho, height, cylinder)
        unit = mp.mpc(0, 1) / (8 * mp.pi)
        return unit * total[0], unit * total[1], total[2] / (4 * mp.pi * k**2), 2 * unit * total[3] / k**2


def right_of_poles(stack: LayerStack):
    """An abscissa in units of k0 right of the indices, of the plasmons of each interface and of thin metal films.

    Estimates: a plasmon of one interface lies at sqrt(e1 e2/(e1 + e2)); the static wave of a film obeys e^{2qd} = b b' with
    b = (e_film - e)/(e_film + e) at its two faces. A film between films may carry others: then give `end` and vary it.
    """
    eps = [stack.eps(j) for j in range(len(stack.index))]
    candidates = [abs(mp.re(mp.mpmathify(n))) for n in stack.index]
    for one, other in zip(eps, eps[1:]):
        if mp.re(one) * mp.re(other) < 0:
            candidates.append(abs(mp.re(mp.sqrt(one * other / (one + other)))))
    for j in range(1, len(eps) - 1):
        strength = abs((eps[j] - eps[j - 1]) / (eps[j] + eps[j - 1]) * (eps[j] - eps[j + 1]) / (eps[j] + eps[j + 1]))
        if mp.re(eps[j]) < 0 and strength > 1:
            candidates.append(mp.log(strength) / (2 * stack.k0 * mp.mpmathify(stack.thickness_nm[j - 1])))
    return mp.mpf("1.5") * max(candidates) + mp.mpf("0.5")


def _finite_panels(k, right, rho, height, depth) -> list:
    """Panels of the polygon, none longer than the depth (poles sit at that distance), few radians of J and of the wave each."""
    sag = min(depth * k, 3 / rho) if rho else depth * k
    longest = min(sag, 6 / height)
    corners = [mp.mpc(0), mp.mpc(sag, -sag), mp.mpc(right - sag, -sag), mp.mpc(right)]
    panels = []
    for low, high in zip(corners, corners[1:]):
        count = int(mp.ceil(abs(high - low) / longest))
        edges = [low + (high - low) * j / count for j in range(count + 1)]
        panels += list(zip(edges, edges[1:]))
    return panels


def _graded(start, turn, longest, length) -> list:
    """Panels from `start` in the direction `turn`, growing with the distance from 0 up to `longest`: kernels vary on the scale of q."""
    edges = [mp.mpf(0)]
    while edges[-1] < length:
        edges.append(edges[-1] + min(longest, abs(start + turn * edges[-1]) / 3))
    return [(start + turn * low, start + turn * high) for low, high in zip(edges, edges[1:])]


def _panel(stack: LayerStack, low, high, rho, height, cylinder) -> mp.matrix:
    """The four integrals without their prefactors over one straight panel."""
    k0, k = stack.k0, stack.k0 * stack.host
    middle, half = (low + high) / 2, (high - low) / 2
    total = mp.matrix(4, 1)
    for node, weight in _gauss_legendre(mp.mp.prec):
        q = middle + half * node
        kz = mp.mpc(0, 1) * mp.sqrt(q * q - k * k)
        r_s, r_p = reflection(stack, q / k0, "s"), reflection(stack, q / k0, "p")
        j0, j1, j2 = cylinder(q * rho)
        wave = half * weight * q * mp.expj(kz * height)
        tilted = r_p * kz**2 / k**2
        total += mp.matrix([wave / kz * j0 * (r_s - tilted), wave / kz * j2 * (r_s + tilted), wave * q * j1 * r_p, wave * q**2 / kz * j0 * r_p])
    return total


def _bessel_j(x) -> tuple:
    if x == 0:
        return mp.mpf(1), mp.mpf(0), mp.mpf(0)
    return tuple(mp.besselj(n, x) for n in (0, 1, 2))


@lru_cache(maxsize=4096)  # the nodes of both tails are conjugate
def _half_hankel_1(x) -> tuple:
    """H1/2 of orders 0, 1, 2 for x in the upper right quadrant, to the accuracy of a value that decays as e^{-Im x}."""
    zero, one = _hankel_far(x) if abs(x) > 1.3 * mp.mp.dps else _hankel_near(x)
    return zero / 2, one / 2, one / x - zero / 2


def _hankel_far(x) -> tuple:
    """Orders 0 and 1 from the asymptotic series, whose smallest term is of the order e^{-2|x|}: below the precision from 1.15 times the digits on."""
    out = []
    for n in (0, 1):
        term, total, k = mp.mpc(1), mp.mpc(1), 0
        while abs(term) > mp.eps:
            k += 1
            term *= mp.mpc(0, 1) * mp.mpf(4 * n * n - (2 * k - 1) ** 2) / (8 * k * x)
            total += term
        out.append(mp.sqrt(2 / (mp.pi * x)) * mp.expj(x - (2 * n + 1) * mp.pi / 4) * total)
    return tuple(out)


def _hankel_near(x) -> tuple:
    """Orders 0 and 1 from the power series of J0, J1, Y0 and the Wronskian J1 Y0 - J0 Y1 = 2/(pi x), with digits for e^{2|x|} to cancel."""
    with mp.extradps(int(0.9 * abs(x)) + 5):
        quarter, term, harmonic, k = -(x**2) / 4, mp.mpc(1), mp.mpf(0), 0
        j0, j1, y0 = mp.mpc(1), x / 2, mp.mpc(0)
        while abs(term) > mp.eps or k < abs(x):
            k += 1
            term *= quarter / k**2
            harmonic += mp.mpf(1) / k
            j0 += term
            j1 += term * x / (2 * (k + 1))
            y0 -= harmonic * term
        y0 = 2 / mp.pi * ((mp.log(x / 2) + mp.euler) * j0 + y0)
        y1 = (j1 * y0 - 2 / (mp.pi * x)) / j0
        return j0 + mp.mpc(0, 1) * y0, j1 + mp.mpc(0, 1) * y1


def _half_hankel_2(x) -> tuple:
    """H2(x) = conj H1(conj x)."""
    return tuple(mp.conj(value) for value in _half_hankel_1(mp.conj(x)))


@lru_cache(maxsize=4)
def _gauss_legendre(prec: int) -> list:
    """Nodes and weights on -1..1: roots of P_n by Newton's method from the usual estimates."""
    out = []
    for i in range(_ORDER):
        x = mp.cos(mp.pi * (i + mp.mpf(3) / 4) / (_ORDER + mp.mpf(1) / 2))
        for _ in range(8):
            value, before = x, mp.mpf(1)
            for n in range(2, _ORDER + 1):
                value, before = ((2 * n - 1) * x * value - (n - 1) * before) / n, value
            slope = _ORDER * (x * value - before) / (x * x - 1)
            x -= value / slope
        out.append((x, 2 / ((1 - x * x) * slope**2)))
    return out
