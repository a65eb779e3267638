"""Bodies made of bodies: a shell around a core, a union of parts."""

from __future__ import annotations

from dataclasses import dataclass

from substrate.errors import InputError, Problem
from substrate.particle.placement import Particle


@dataclass(frozen=True, kw_only=True)
class Shell(Particle):
    """A layer of `material` and constant thickness_nm around another shape, the core, which keeps its own material.

    Place: of the whole, core and layer; where the core itself stands is not used. Exact for sphere, box, disc and rod; see `grown` of the others.
    """

    around: Particle
    thickness_nm: float

    def _check(self):
        if not isinstance(self.around, Particle):
            raise InputError(Problem("shell around", self.around, "a shape"))
        if isinstance(self.around, Union):
            raise InputError(Problem("shell around", "union", "a sphere, ellipsoid, box, disc, rod, cone or shell", "Put shells around the parts."))
        self._positive(thickness_nm=self.thickness_nm)

    @property
    def outer(self) -> Particle:
        """The outline of the whole as a shape of the core's kind."""
        inner = self.around.outer if isinstance(self.around, Shell) else self.around
        half = inner.moved_to((0.0, 0.0, 1e9)).grown(self.thickness_nm)
        return half.moved_to(self._centre_for(half.half_extents()))

    def _centre_for(self, half):
        return self.center_nm if self.center_nm is not None else (*self.center_xy_nm, self.gap_nm + half[2])

    @property
    def core(self) -> Particle:
        """The core in its place."""
        return self.around.moved_to(self.outer.center)

    def half_extents(self):
        inner = self.around.outer if isinstance(self.around, Shell) else self.around
        return inner.moved_to((0.0, 0.0, 1e9)).grown(self.thickness_nm).half_extents()

    def intervals(self, x, y):
        return self.outer.intervals(x, y)

    def signed_distance(self, points_nm):
        return self.outer.signed_distance(points_nm)

    @property
    def volume_nm3(self) -> float:
        """Volume of core and layer together."""
        return self.outer.volume_nm3


@dataclass(frozen=True, kw_only=True)
class Union(Particle):
    """Several shapes of one material as one body; they may overlap. Each part has its own place; the union has none."""

    parts: tuple[Particle, ...]

    def _check(self):
        object.__setattr__(self, "parts", tuple(self.parts))
        if not self.parts or not all(isinstance(part, Particle) and not isinstance(part, (Shell, Union)) for part in self.parts):
            raise InputError(Problem("union parts", self.parts, "one or more shapes that are neither shells nor unions"))
        if self.gap_nm != 0.0 or tuple(self.center_xy_nm) != (0.0, 0.0) or self.center_nm is not None:
            raise InputError(Problem("union", "a place of its own", "places for its parts", "Give each part its gap_nm or center_nm."))

    def _check_gap(self):
        """The parts have checked theirs."""

    def bounds_nm(self):
        bounds = [part.bounds_nm() for part in self.parts]
        return tuple(min(b[0][i] for b in bounds) for i in range(3)), tuple(max(b[1][i] for b in bounds) for i in range(3))

    @property
    def center(self):
        low, high = self.bounds_nm()
        return tuple(0.5 * (a + b) for a, b in zip(low, high))

    def half_extents(self):
        low, high = self.bounds_nm()
        return tuple(0.5 * (b - a) for a, b in zip(low, high))

    def intervals(self, x, y):
        return [piece for part in self.parts for piece in part.intervals(x, y)]

    def signed_distance(self, points_nm):
        """Smallest over the parts: exact outside, a bound inside."""
        import numpy as np

        return np.min([part.signed_distance(points_nm) for part in self.parts], axis=0)

    @property
    def volume_nm3(self) -> float:
        """Sum of the parts: an upper bound where they overlap."""
        return sum(part.volume_nm3 for part in self.parts)
