"""Plane waves from above or below, and the excitation they make above the stack: incident, reflected or transmitted."""

from __future__ import annotations

import math
from dataclasses import dataclass

from substrate.errors import InputError, Problem, choose
from substrate.medium.stack import Layers, Stack

SIDES = {"above": +1, "below": -1}
_ROOT_HALF = 1.0 / math.sqrt(2.0)
# Jones pairs (s, p). Unpolarized light is the mean of two solves. "circular": p leads s by a quarter period.
POLARIZATIONS: dict[str, tuple[tuple[complex, complex], ...]] = {
    "s": ((1.0, 0.0),),
    "p": ((0.0, 1.0),),
    "unpolarized": ((1.0, 0.0), (0.0, 1.0)),
    "circular": ((_ROOT_HALF, -1j * _ROOT_HALF),),
}


@dataclass(frozen=True)
class PlaneWave:
    """A plane wave of unit amplitude in its medium of incidence.

    wavelength_nm: in vacuum.  angle_deg: angle of incidence from the surface normal, 0 <= angle < 90, in the medium of incidence
    (the host for side "above", the base for "below", which must be lossless).  azimuth_deg: of the in-plane direction of travel.
    polarization: "s", "p", "unpolarized", "circular", or a Jones pair (s, p) of complex amplitudes, which is normalised.
    Irradiances and cross sections refer to this wave alone, taken normal to its own direction.
    """

    wavelength_nm: float
    angle_deg: float = 0.0
    azimuth_deg: float = 0.0
    polarization: object = "p"
    side: str = "above"

    def __post_init__(self):
        if not 0.0 < self.wavelength_nm < math.inf:
            raise InputError(Problem("wavelength_nm", self.wavelength_nm, "a number above 0"))
        if not 0.0 <= self.angle_deg < 90.0:
            raise InputError(Problem("angle_deg", self.angle_deg, "0 up to below 90", "It is measured from the surface normal."))
        if not math.isfinite(self.azimuth_deg):
            raise InputError(Problem("azimuth_deg", self.azimuth_deg, "a finite number"))
        choose(self.side, SIDES, "side")
        self.jones()

    def jones(self) -> tuple[tuple[complex, complex], ...]:
        """The normalised Jones pairs (s, p) whose intensities are averaged."""
        if isinstance(self.polarization, str):
            return choose(self.polarization, POLARIZATIONS, "polarization")
        try:
            s, p = (complex(value) for value in self.polarization)
        except (TypeError, ValueError):
            allowed = ", ".join(POLARIZATIONS) + ", or a Jones pair (s, p)"
            raise InputError(Problem("polarization", self.polarization, allowed)) from None
        norm = math.hypot(abs(s), abs(p))
        if not 0.0 < norm < math.inf:
            raise InputError(Problem("polarization", self.polarization, "a Jones pair that is not zero"))
        return ((s / norm, p / norm),)

    def waves(self, stack: Stack) -> tuple[StackWave, ...]:
        """The excitation above the stack, one entry a Jones pair."""
        layers = stack.at(self.wavelength_nm)
        if self.side == "below" and not layers.base_is_lossless:
            raise InputError(Problem("light.side", self.side, "'above' for an absorbing base", "Light cannot arrive through a lossy half-space."))
        medium = layers.index[0] if self.side == "above" else layers.index[-1]
        q = medium.real * layers.k0 * math.sin(math.radians(self.angle_deg))
        return tuple(StackWave(layers, q, math.radians(self.azimuth_deg), pair, self.side) for pair in self.jones())


@dataclass(frozen=True)
class StackWave:
    """One plane wave with everything that the particle-free stack makes of it; field in the host (z > 0).

    q: in-plane wave number, 1/nm; amplitudes: (s, p) in the medium of incidence.
    """

    layers: Layers
    q: float
    azimuth_rad: float
    amplitudes: tuple[complex, complex]
    side: str = "above"

    @property
    def irradiance(self) -> float:
        """Irradiance of the incident wave, normal to its own direction, over that of a unit wave in the host: n/n_host."""
        return (self.layers.index[0] if self.side == "above" else self.layers.index[-1]).real / self.layers.index[0].real

    def field(self, points_nm):
        """E at points (n, 3) with z >= 0; complex (n, 3)."""
        import numpy as np

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        modes = host_modes(self.layers, np.array([self.q]), self.side)
        cosine, sine = np.cos(self.azimuth_rad), np.sin(self.azimuth_rad)
        lateral = np.exp(1j * self.q * (cosine * points[:, 0] + sine * points[:, 1]))
        vertical = np.exp(1j * modes.kz * points[:, 2])
        across = np.array([-sine, cosine, 0.0])
        s_amplitude, p_amplitude = self.amplitudes
        along_part = modes.along_up * vertical + modes.along_down / vertical
        z_part = modes.z_up * vertical + modes.z_down / vertical
        s_part = modes.s_up * vertical + modes.s_down / vertical
        field = s_amplitude * s_part[:, None] * across
        field = field + p_amplitude * (along_part[:, None] * np.array([cosine, sine, 0.0]) + z_part[:, None] * np.array([0.0, 0.0, 1.0]))
        return lateral[:, None] * field


    def field_anywhere(self, points_nm):
        """E at points (n, 3) above, in or below the stack; complex (n, 3). Light from below is worked out in the mirrored stack."""
        import numpy as np

        from substrate.medium.fresnel import plane_wave_field

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        if self.side == "above":
            return plane_wave_field(self.layers, self.q, self.azimuth_rad, self.amplitudes, points)
        # a hair lower in the mirror, so that a point on an interface belongs to the layer above it here too
        mirrored = points * [1.0, 1.0, -1.0] - [0.0, 0.0, sum(self.layers.thickness_nm) + 1e-9]
        s_amplitude, p_amplitude = self.amplitudes
        # p = k_hat x s turns over in the mirror
        field = plane_wave_field(self.layers.flipped(), self.q, self.azimuth_rad, (s_amplitude, -p_amplitude), mirrored)
        return field * [1.0, 1.0, -1.0]


@dataclass(frozen=True)
class HostModes:
    """Field in the host of unit s and p waves sent at the stack, for several in-plane wave numbers (arrays (n,)).

    s wave: s_up e^{i kz z} + s_down e^{-i kz z} along s; p wave: the like along the in-plane direction of travel and along z.
    For waves from below the downward parts vanish; above the critical angle kz is imaginary and the upward part decays.
    """

    kz: object
    s_up: object
    s_down: object
    along_up: object
    along_down: object
    z_up: object
    z_down: object


def host_modes(layers: Layers, q, side: str) -> HostModes:
    """The host field of unit waves from `side` with in-plane wave numbers q (n,), 1/nm."""
    import numpy as np

    from substrate.medium.fresnel import normal_wave_number, reflection, transmission

    k = layers.k_host
    kz = normal_wave_number(k, q)
    zero = np.zeros_like(kz)
    if side == "above":
        r_s, r_p = reflection(layers, q)
        return HostModes(kz, r_s, zero + 1.0, -r_p * kz / k, kz / k, r_p * q / k, q / k + zero)
    t_s, t_p = transmission(layers.flipped(), q)
    return HostModes(kz, t_s, zero, -t_p * kz / k, zero, t_p * q / k, zero)
