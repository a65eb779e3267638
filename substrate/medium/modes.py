"""Guided modes of a lossless stack: wave numbers at which it carries light along itself, and their weight in the reflection."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq, minimize_scalar

from substrate.medium.fresnel import POLARIZATIONS, normal_wave_number, pole_function, reflection
from substrate.medium.stack import Layers


@dataclass(frozen=True)
class GuidedMode:
    """A pole of the reflection at the real wave number q (1/nm): r = residue/(q - q_mode) nearby."""

    polarization: str
    q: float
    index: float
    residue: complex

    @property
    def name(self) -> str:
        return f"{'TE' if self.polarization == 's' else 'TM'} {self.index:.5f}"


def guided_modes(layers: Layers) -> tuple[GuidedMode, ...]:
    """All modes between the largest index of host and base and the largest of the films; none if any layer absorbs or is metallic."""
    index = np.array(layers.index)
    if np.any(index.imag != 0.0):
        return ()
    low = max(index[0].real, index[-1].real) * layers.k0
    high = index.real.max() * layers.k0
    if high <= low * (1.0 + 1e-12):
        return ()
    phase = sum(high * d for d in layers.thickness_nm)
    # crowded towards both ends: modes near cut-off and near the film's own index
    x = np.linspace(0.0, 1.0, 200 + int(60 * phase / np.pi))[1:-1]
    samples = low + (high - low) * 0.5 * (1.0 - np.cos(np.pi * x))
    modes = []
    for polarization in POLARIZATIONS:
        value = _dispersion(layers, samples, polarization)
        reference = value[np.argmax(np.abs(value))]

        def real(x, polarization=polarization, reference=reference):
            return (_dispersion(layers, np.array([x]), polarization)[0] / reference).real

        brackets = _brackets(samples, (value / reference).real, real)
        roots = sorted(brentq(real, a, b, xtol=1e-16 + 1e-15 * high) for a, b in brackets)
        for i, q in enumerate(roots):
            apart = min([abs(q - other) for j, other in enumerate(roots) if j != i], default=high)
            residue = _residue(layers, q, polarization, low, high, 0.3 * apart)
            modes.append(GuidedMode(polarization, q, q / layers.k0, residue))
    return tuple(sorted(modes, key=lambda mode: -mode.q))


def _brackets(samples: np.ndarray, values: np.ndarray, real) -> list[tuple[float, float]]:
    """Intervals with one root each: sign changes between samples, and dips towards zero that cross it twice in between.

    Twin guides far apart have pairs of modes closer than any sampling; they show as such a dip.
    """
    found = [(samples[i], samples[i + 1]) for i in np.flatnonzero(values[:-1] * values[1:] < 0.0)]
    size = np.abs(values)
    for i in range(1, len(samples) - 1):
        same = values[i - 1] * values[i] > 0.0 and values[i] * values[i + 1] > 0.0
        if same and size[i] <= size[i - 1] and size[i] <= size[i + 1]:
            sign = np.sign(values[i])
            dip = minimize_scalar(lambda x, sign=sign: sign * real(x), bounds=(samples[i - 1], samples[i + 1]), method="bounded", options={"xatol": 1e-15 * samples[i]})
            if dip.fun < 0.0:
                found += [(samples[i - 1], dip.x), (dip.x, samples[i + 1])]
    return found


def _dispersion(layers: Layers, q, polarization: str) -> np.ndarray:
    """The pole function without the films' phases and factors kz (it is odd in each): of constant phase, so that its sign tells."""
    value = pole_function(layers, q, polarization)
    for n, d in zip(layers.index[1:-1], layers.thickness_nm):
        kz = normal_wave_number(n * layers.k0, q)
        value = value * np.exp(-1j * kz.real * d) / kz
    return value


def _residue(layers: Layers, q: float, polarization: str, low: float, high: float, most: float) -> complex:
    """Mean of r (q - q_mode) on a small circle around the pole, of a radius of at most `most`: exact but for its 16th power."""
    radius = min(most, 1e-3 * min(q - low, max(high - q, 1e-3 * q)))
    circle = radius * np.exp(2j * np.pi * (np.arange(16) + 0.5) / 16)
    r = reflection(layers, q + circle)[POLARIZATIONS.index(polarization)]
    return complex((r * circle).mean())
