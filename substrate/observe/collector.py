"""The collecting optics: which directions count, in the words of the instrument."""

from __future__ import annotations

import math
from dataclasses import dataclass

from substrate.errors import InputError, Problem, choose
from substrate.medium.stack import Layers

SIDES = {"above": "the host", "below": "the base"}


@dataclass(frozen=True)
class Collector:
    """A collector of far-field power.

    Either na, the numerical aperture of a cone about the surface normal on `side` ("above" or "below", na up to the index there);
    or polar_deg = (low, high), polar angles from +z (0..90 above, 90..180 below), with azimuth_deg = (low, high), the full circle
    unless given. The specular beam of the incident light is not part of the scattered power and never counted.
    """

    name: str = "objective"
    na: float | None = None
    side: str = "above"
    polar_deg: tuple[float, float] | None = None
    azimuth_deg: tuple[float, float] | None = None

    def __post_init__(self):
        where = f"collector {self.name!r}"
        choose(self.side, SIDES, f"{where} side")
        if (self.na is None) == (self.polar_deg is None):
            raise InputError(Problem(where, (self.na, self.polar_deg), "exactly one of na and polar_deg"))
        if self.na is not None and not 0.0 < self.na < math.inf:
            raise InputError(Problem(f"{where} na", self.na, "a number above 0"))
        if self.polar_deg is not None:
            low, high = self.polar_deg
            if not (0.0 <= low < high <= 90.0 or 90.0 <= low < high <= 180.0):
                allowed = "(low, high) within 0..90 (above) or within 90..180 (below)"
                raise InputError(Problem(f"{where} polar_deg", self.polar_deg, allowed, "Use two collectors for both sides."))
        if self.azimuth_deg is not None:
            low, high = self.azimuth_deg
            if not 0.0 < high - low <= 360.0:
                raise InputError(Problem(f"{where} azimuth_deg", self.azimuth_deg, "(low, high) with low < high, at most 360 apart"))

    @property
    def is_above(self) -> bool:
        return self.side == "above" if self.polar_deg is None else self.polar_deg[1] <= 90.0

    def window(self, layers: Layers) -> tuple[tuple[float, float], tuple[float, float]]:
        """Polar angles from the outward normal of its side and azimuths, in radians, in the medium there.

        Raises InputError for an aperture above the medium's index and for a collector below an absorbing base.
        """
        index = layers.index[0 if self.is_above else -1]
        if not self.is_above and not layers.base_is_lossless:
            raise InputError(
                Problem(f"collector {self.name!r}", "below", "'above' for an absorbing base", "Nothing leaves an absorbing half-space.")
            )
        azimuth = tuple(math.radians(a) for a in self.azimuth_deg or (0.0, 360.0))
        if self.na is not None:
            if self.na > index.real * (1.0 + 1e-12):
                allowed = f"at most {index.real:.6g}, the index of {SIDES[self.side]} at {layers.wavelength_nm:g} nm"
                raise InputError(Problem(f"collector {self.name!r} na", self.na, allowed))
            return (0.0, math.asin(min(1.0, self.na / index.real))), azimuth
        low, high = (math.radians(a) for a in self.polar_deg)
        return ((low, high) if self.is_above else (math.pi - high, math.pi - low)), azimuth

    def describe(self) -> str:
        """The window in a few words, for definitions."""
        azimuth = "all azimuths" if self.azimuth_deg is None else f"azimuth {self.azimuth_deg[0]:g} to {self.azimuth_deg[1]:g} deg"
        if self.na is not None:
            return f"NA {self.na:g} {self.side}" + ("" if self.azimuth_deg is None else f", {azimuth}")
        return f"polar angle {self.polar_deg[0]:g} to {self.polar_deg[1]:g} deg, {azimuth}"
