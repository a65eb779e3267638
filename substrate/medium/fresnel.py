"""Plane waves in a stack: reflection, transmission, fields and absorbed shares for any in-plane wave number.

Everything is a recursion over the layers in which only decaying exponentials appear, so that neither thick nor strongly
absorbing films overflow. Amplitudes of p waves are those of E along p = k_hat x s, for each wave with its own direction k_hat;
with that choice r_p is also the ratio of the magnetic amplitudes, r_p = (e2 kz1 - e1 kz2)/(e2 kz1 + e1 kz2).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from substrate.medium.stack import Layers

POLARIZATIONS = ("s", "p")
_GRAZING = 1e-6


def normal_wave_number(k: complex, q: np.ndarray) -> np.ndarray:
    """kz = sqrt(k^2 - q^2) on the sheet of waves that decay or travel away: Im kz > 0, or Im kz = 0 and Re kz >= 0. Units of k.

    Within 1e-6 k of grazing, where up and down waves become one and the recursion 0/0, 1e-6 k is taken: an error of about 1e-12.
    """
    kz = np.sqrt(np.asarray(k * k - q * q, dtype=complex))
    wrong = (kz.imag < 0.0) | ((kz.imag == 0.0) & (kz.real < 0.0))
    kz = np.where(wrong, -kz, kz)
    least = _GRAZING * abs(k)
    return np.where(np.abs(kz) < least, least, kz)


def _admittances(layers: Layers, q, polarization: str) -> tuple[list[np.ndarray], list[np.ndarray]]:
    """kz of each layer, and the weight y with which the interface coefficient is (y1 - y2)/(y1 + y2): kz for s, kz/eps for p."""
    kz = [normal_wave_number(n * layers.k0, q) for n in layers.index]
    if polarization == "s":
        return kz, kz
    return kz, [kz_layer / (n * n) for kz_layer, n in zip(kz, layers.index)]


def _recursion(layers: Layers, q, polarization: str):
    """kz, interface coefficients, one-way phases and the reflection seen at each interface, from the base up."""
    kz, y = _admittances(layers, q, polarization)
    r = [(y[j] - y[j + 1]) / (y[j] + y[j + 1]) for j in range(len(y) - 1)]
    phase = [np.exp(1j * kz[j + 1] * d) for j, d in enumerate(layers.thickness_nm)]
    seen = [r[-1]]
    for j in range(len(r) - 2, -1, -1):
        below = seen[0] * phase[j] ** 2
        seen.insert(0, (r[j] + below) / (1.0 + r[j] * below))
    return kz, r, phase, seen


def reflection(layers: Layers, q) -> tuple[np.ndarray, np.ndarray]:
    """r_s, r_p of the whole stack for waves from the host; q: in-plane wave numbers in 1/nm, real or complex, any shape."""
    q = np.asarray(q)
    return tuple(_recursion(layers, q, polarization)[3][0] for polarization in POLARIZATIONS)


def pole_function(layers: Layers, q, polarization: str) -> np.ndarray:
    """A function of q whose zeros are the poles of the reflection (guided modes, surface plasmons).

    Numerator and denominator of the recursion carried apart, so that nothing is divided by a vanishing number; divided by
    q to the number of interfaces it tends to a constant at large |q|.
    """
    q = np.asarray(q, dtype=complex)
    kz, y = _admittances(layers, q, polarization)
    numerator, denominator = y[-2] - y[-1], y[-2] + y[-1]
    for j in range(len(layers.thickness_nm) - 1, -1, -1):
        below = numerator * np.exp(2j * kz[j + 1] * layers.thickness_nm[j])
        minus, plus = y[j] - y[j + 1], y[j] + y[j + 1]
        numerator, denominator = minus * denominator + plus * below, plus * denominator + minus * below
    return denominator


def layer_amplitudes(layers: Layers, q, polarization: str) -> tuple[list[np.ndarray], list[np.ndarray], list[np.ndarray]]:
    """Waves in each layer for a unit wave coming down from the host.

    Returns kz, down, up, one entry a layer. Down amplitudes refer to the layer's top (host: to z = 0), up amplitudes to its
    bottom (host: to z = 0; base: zero), so that both only decay away from there. For s they are amplitudes of E, for p of
    n E (the magnetic amplitude), which is what the interfaces conserve.
    """
    kz, r, phase, seen = _recursion(layers, np.asarray(q), polarization)
    start = np.ones_like(kz[0]) * (1.0 if polarization == "s" else layers.index[0])
    down, up = [start], [start * seen[0]]
    for j in range(len(r)):
        arriving = down[j] * (phase[j - 1] if j > 0 else 1.0)
        is_base = j == len(r) - 1
        below = 0.0 if is_base else seen[j + 1] * phase[j] ** 2
        down.append(arriving * (1.0 + r[j]) / (1.0 + r[j] * below))
        up.append(np.zeros_like(start) if is_base else down[j + 1] * phase[j] * seen[j + 1])
    return kz, down, up


def transmission(layers: Layers, q) -> tuple[np.ndarray, np.ndarray]:
    """t_s, t_p of the whole stack: amplitude of E just below the last interface over that in the host at z = 0."""
    t_s = layer_amplitudes(layers, q, "s")[1][-1]
    t_p = layer_amplitudes(layers, q, "p")[1][-1] / layers.index[-1]
    return t_s, t_p


@dataclass(frozen=True)
class PowerShares:
    """Shares of the incident power of one plane wave: reflected, absorbed in each film (n_films, ...), passed to the base."""

    reflected: np.ndarray
    absorbed: np.ndarray
    transmitted: np.ndarray


def power_shares(layers: Layers, q, polarization: str) -> PowerShares:
    """Where the power of a plane wave from above goes; q real, below the wave number of the host.

    transmitted: power that crosses into the base, whether it is absorbed there or not. The flux is evaluated from the
    tangential fields at every interface, so that reflected + absorbed + transmitted = 1 is a test and not a definition.
    """
    kz, down, up = layer_amplitudes(layers, q, polarization)
    _, y = _admittances(layers, np.asarray(q), polarization)
    incident = (y[0] * np.abs(down[0]) ** 2).real
    flux = []
    for j in range(1, len(kz)):
        thickness = layers.thickness_nm[j - 1] if j <= len(layers.thickness_nm) else 0.0
        phase = np.exp(1j * kz[j] * thickness) if j < len(kz) - 1 else 1.0
        for a, b in ((down[j], up[j] * phase), (down[j] * phase, up[j])):
            flux.append((y[j] * (a - b) * np.conj(a + b)).real / incident)
    absorbed = [flux[2 * j] - flux[2 * j + 1] for j in range(len(layers.thickness_nm))]
    shape = np.shape(incident)
    return PowerShares(np.abs(up[0] / down[0]) ** 2, np.array(absorbed).reshape((-1, *shape)), flux[-2])


def plane_wave_field(layers: Layers, q: float, azimuth_rad: float, amplitudes, points_nm) -> np.ndarray:
    """Total field of a plane wave from above at any points above, in or below the stack.

    q: in-plane wave number in 1/nm; azimuth_rad: of its direction of travel; amplitudes: (s, p) of E in the host at z = 0;
    points_nm: (n, 3). Returns complex (n, 3). On an interface the layer above is taken.
    """
    points = np.atleast_2d(np.asarray(points_nm, dtype=float))
    along = np.array([np.cos(azimuth_rad), np.sin(azimuth_rad), 0.0])
    across = np.array([-np.sin(azimuth_rad), np.cos(azimuth_rad), 0.0])
    heights = np.array(layers.interfaces_nm())
    layer = np.searchsorted(-heights, -points[:, 2], side="left")
    tops = np.concatenate([[0.0], heights])
    bottoms = np.concatenate([[0.0], heights[1:], [heights[-1]]])
    field = np.zeros((len(points), 3), dtype=complex)
    lateral = np.exp(1j * q * (points @ along))
    for polarization, amplitude in zip(POLARIZATIONS, amplitudes):
        if amplitude == 0.0:
            continue
        kz, down, up = layer_amplitudes(layers, q, polarization)
        for j, n in enumerate(layers.index):
            here = layer == j
            z = points[here, 2]
            going_down = down[j] * np.exp(1j * kz[j] * (tops[j] - z))
            going_up = up[j] * np.exp(1j * kz[j] * (z - bottoms[j])) if j < len(kz) - 1 else np.zeros_like(z)
            if polarization == "s":
                vector = (going_down + going_up)[:, None] * across
            else:
                k = n * layers.k0
                p_down = (kz[j] * along + q * np.array([0.0, 0.0, 1.0])) / (k * n)
                p_up = (-kz[j] * along + q * np.array([0.0, 0.0, 1.0])) / (k * n)
                vector = going_down[:, None] * p_down + going_up[:, None] * p_up
            field[here] += amplitude * lateral[here, None] * vector
    return field
