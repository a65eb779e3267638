"""What the bare stack does to a plane wave: reflected, transmitted and absorbed shares."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from substrate.medium.fresnel import POLARIZATIONS, layer_amplitudes, power_shares
from substrate.medium.stack import Stack
from substrate.quantity import Quantity
from substrate.source.plane_wave import PlaneWave

# Closed formulas in double precision: rounding grows with the number of layers, far below this.
_ROUNDING = 1e-12


@dataclass(frozen=True)
class Reflectance:
    """Shares of the incident power: reflected, transmitted into the base (host, for light from below), absorbed film by film."""

    reflected: Quantity
    transmitted: Quantity
    absorbed: tuple[Quantity, ...]
    phase_difference_deg: float | None

    @property
    def balance(self) -> float:
        """1 - (reflected + transmitted + absorbed): zero to rounding."""
        return 1.0 - self.reflected.value - self.transmitted.value - sum(a.value for a in self.absorbed)


def reflectance(stack: Stack, light: PlaneWave) -> Reflectance:
    """Reflected, transmitted and absorbed shares of a plane wave without any particle; exact.

    absorbed lists the films from the top down.  phase_difference_deg: arg(r_p) - arg(r_s) for light from above, in exp(-i omega t) with
    p = k_hat x s for each wave (at normal incidence 180 degrees apart from the convention of equal fields).
    Light from below takes a lossless base. Raises InputError and OutOfRange as `Stack.at` does.
    """
    layers = stack.at(light.wavelength_nm)
    light.waves(stack)  # refuses light from below through an absorbing base
    if light.side == "below":
        layers = layers.flipped()
    q = np.array([layers.index[0].real * layers.k0 * np.sin(np.radians(light.angle_deg))])
    pairs = light.jones()
    weight = {"s": np.mean([abs(s) ** 2 for s, _ in pairs]), "p": np.mean([abs(p) ** 2 for _, p in pairs])}
    shares = {polarization: power_shares(layers, q, polarization) for polarization in POLARIZATIONS}

    def mixed(part) -> float:
        return float(sum(weight[polarization] * part(shares[polarization]) for polarization in POLARIZATIONS))

    def quantity(value: float, text: str) -> Quantity:
        return Quantity(value, _ROUNDING, "1", f"{text} over the power of the incident plane wave, no particles")

    absorbed = [mixed(lambda found, i=i: found.absorbed[i][0]) for i in range(len(layers.thickness_nm))]
    if light.side == "below":
        absorbed.reverse()
    r_s, r_p = (layer_amplitudes(layers, q, pol)[2][0][0] / layer_amplitudes(layers, q, pol)[1][0][0] for pol in POLARIZATIONS)
    phase = float(np.degrees(np.angle(r_p / r_s))) if abs(r_s * r_p) > 0.0 else None
    return Reflectance(
        quantity(mixed(lambda found: found.reflected[0]), "power reflected"),
        quantity(mixed(lambda found: found.transmitted[0]), "power that crosses into the last medium"),
        tuple(quantity(value, f"power absorbed in film {i + 1}") for i, value in enumerate(absorbed)),
        phase,
    )
