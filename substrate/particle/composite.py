"""Bodies made of bodies: a shell around a core, a union of parts."""

from __future__ import annotations

from dataclasses import dataclass

from substrate.errors import InputError, Problem
from substrate.particle.placement import STANDING, Particle


@dataclass(frozen=True, kw_only=True)
class Shell(Particle):
    """A layer of `material` and constant thickness_nm around another shape, the core, which keeps its own material.

    Place: of the whole, core and layer, whose lowest point gap_nm refers to; where the core itself stands is not used.
    The thickness is exact for sphere, box, disc and rod; for an ellipsoid and at a cone's rim see their `grown`. The geometry (chord,
    distance, volume, ...) is that of the whole.
    """

    around: Particle
    thickness_nm: float

    def _check(self):
        allowed = "a sphere, ellipsoid, box, disc, rod, cone or shell"
        if not isinstance(self.around, Particle):
            raise InputError(Problem("shell around", self.around, allowed))
        if isinstance(self.around, Union):
            raise InputError(Problem("shell around", "union", allowed, "Put shells around the parts."))
        self._positive("thickness_nm")

    @property
    def outer(self) -> Particle:
        """The outline of the whole as a shape of the core's kind."""
        return self.grown(0.0, gap_nm=self.gap_nm, center_xy_nm=self.center_xy_nm, center_nm=self.center_nm)

    @property
    def core(self) -> Particle:
        """The core in its place."""
        return self.around._within(self.center)

    def half_extents(self):
        return self.grown(0.0, **STANDING).half_extents()

    def chord(self, x, y):
        return self.outer.chord(x, y)

    def signed_distance(self, points_nm):
        return self.outer.signed_distance(points_nm)

    @property
    def volume_nm3(self) -> float:
        """Volume of core and layer together."""
        return self.outer.volume_nm3

    def grown(self, thickness_nm, **place):
        """The outline of the whole with one more layer on it, as a shape of the core's kind."""
        return self.around.grown(self.thickness_nm + thickness_nm, **(place or {"center_nm": self.center}))


@dataclass(frozen=True, kw_only=True)
class Union(Particle):
    """Several shapes of one material as one body; they may overlap. Each part has its own place; the union has none.

    The union's material counts, what the parts say of theirs is not used.
    """

    parts: tuple[Particle, ...]

    def _check(self):
        allowed = "a list of one or more shapes that are neither shells nor unions"
        if not isinstance(self.parts, (list, tuple)) or not self.parts:
            raise InputError(Problem("union parts", self.parts, allowed))
        for part in self.parts:
            if not isinstance(part, Particle) or isinstance(part, (Shell, Union)):
                raise InputError(Problem("union parts", getattr(part, "word", part), allowed))
        object.__setattr__(self, "parts", tuple(self.parts))
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

    def chord(self, x, y):
        """Lowest and highest z of any part; between them there may be gaps (`intervals` has the pieces)."""
        import numpy as np

        pieces = self.intervals(x, y)
        low = np.min([np.where(low > high, np.inf, low) for low, high in pieces], axis=0)
        return low, np.max([np.where(low > high, -np.inf, high) for low, high in pieces], axis=0)

    def intervals(self, x, y):
        return [part.chord(x, y) for part in self.parts]

    def signed_distance(self, points_nm):
        """Smallest over the parts: exact outside, a bound inside."""
        import numpy as np

        return np.min([part.signed_distance(points_nm) for part in self.parts], axis=0)

    @property
    def volume_nm3(self) -> float:
        """Sum of the parts: an upper bound where they overlap."""
        return sum(part.volume_nm3 for part in self.parts)

    def grown(self, thickness_nm, **place):
        """Every part grown around its own centre; a union takes no place."""
        return Union(material=self.material, parts=tuple(part.grown(thickness_nm) for part in self.parts), **place)

    def outline_xz(self, count: int = 241):
        """The parts' outlines, each cut through its own centre, one after the other with nan between them."""
        import numpy as np

        lines = [line for part in self.parts for line in (part.outline_xz(count), ([np.nan], [np.nan]))][:-1]
        return np.concatenate([line[0] for line in lines]), np.concatenate([line[1] for line in lines])
