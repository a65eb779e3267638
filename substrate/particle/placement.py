"""What all shapes have in common: a material, a place above the surface, and the questions that can be asked of them."""

from __future__ import annotations

import copy
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from numbers import Real

from substrate.constants import SMALLEST_GAP_NM
from substrate.errors import InputError, Problem

STANDING = {"gap_nm": 0.0, "center_xy_nm": (0.0, 0.0), "center_nm": None}


@dataclass(frozen=True, kw_only=True)
class Particle:
    """A body above the stack. material: any material specification, not resolved here.

    Place: gap_nm, the height of the lowest point above z = 0, with the centre over center_xy_nm; or center_nm = (x, y, z), the centre of
    the shape (half way up its height). A body that dips below z = 0, and a gap between 0 and 0.5 nm, are refused: below that
    the local bulk optics of the program has no meaning.

    Raises InputError for sizes that make no body and for such places.
    """

    material: object = None
    gap_nm: float = 0.0
    center_xy_nm: tuple[float, float] = (0.0, 0.0)
    center_nm: tuple[float, float, float] | None = None

    def __post_init__(self):
        if self.material is None:
            raise InputError(Problem(f"{self.word} material", None, "a material name, a number or a table file"))
        self._check()
        if not (_is_number(self.gap_nm) and self.gap_nm >= 0.0):
            raise InputError(Problem(f"{self.word} gap_nm", self.gap_nm, "0 (touching) or a height above the surface"))
        self._vector("center_xy_nm", 2, "two finite numbers (x, y)")
        if self.center_nm is not None:
            self._vector("center_nm", 3, "three finite numbers (x, y, z)")
            if self.gap_nm != 0.0 or self.center_xy_nm != (0.0, 0.0):
                advice = "Leave out center_nm, or gap_nm and center_xy_nm."
                raise InputError(Problem(f"{self.word} center_nm", self.center_nm, "one way to give the place", advice))
        self._check_gap()

    def _check(self) -> None:
        """Raise InputError for sizes that make no body."""

    def _check_gap(self) -> None:
        gap = self.gap_nm if self.center_nm is None else self.bounds_nm()[0][2]
        where, received = ("gap_nm", self.gap_nm) if self.center_nm is None else ("center_nm", self.center_nm)
        if gap < -1e-9:
            advice = f"Lift it by {-gap:.6g} nm: its lowest point lies below the surface at z = 0."
            raise InputError(Problem(f"{self.word} {where}", received, "a place above the surface", advice))
        if 1e-9 < gap < SMALLEST_GAP_NM:
            allowed = f"0 (touching) or a gap of at least {SMALLEST_GAP_NM} nm"
            advice = f"The gap is {gap:.6g} nm; narrower ones need non-local optics and tunnelling, which are not in the model."
            raise InputError(Problem(f"{self.word} {where}", received, allowed, advice))

    @property
    def word(self) -> str:
        """The user's word for the shape."""
        return type(self).__name__.lower()

    def _positive(self, *names: str) -> None:
        for name in names:
            size = getattr(self, name)
            if not (_is_number(size) and size > 0.0):
                raise InputError(Problem(f"{self.word} {name}", size, "a length above 0"))

    def _finite(self, *names: str) -> None:
        for name in names:
            if not _is_number(getattr(self, name)):
                raise InputError(Problem(f"{self.word} {name}", getattr(self, name), "a finite number"))

    def _radius(self, name: str, most: float, words: str) -> None:
        radius = getattr(self, name)
        if not (_is_number(radius) and 0.0 <= radius <= most * (1.0 + 1e-12)):
            raise InputError(Problem(f"{self.word} {name}", radius, f"0 up to {words} ({most:g} nm)"))

    def _vector(self, name: str, count: int, allowed: str, above: float = -math.inf) -> None:
        """Check a field of several numbers, and keep it as a tuple."""
        values = getattr(self, name)
        is_list = hasattr(values, "__len__") and not isinstance(values, str) and len(values) == count
        if not (is_list and all(_is_number(value) and value > above for value in values)):
            raise InputError(Problem(f"{self.word} {name}", values, allowed))
        object.__setattr__(self, name, tuple(values))

    def half_extents(self) -> tuple[float, float, float]:
        """Half sizes of the bounding box, which is centred on the shape."""
        raise NotImplementedError

    @property
    def center(self) -> tuple[float, float, float]:
        """Centre of the bounding box, nm."""
        if self.center_nm is not None:
            return tuple(float(c) for c in self.center_nm)
        return (*(float(c) for c in self.center_xy_nm), self.gap_nm + self.half_extents()[2])

    def bounds_nm(self) -> tuple[tuple[float, ...], tuple[float, ...]]:
        """Low and high corner of the bounding box."""
        half, centre = self.half_extents(), self.center
        return tuple(c - h for c, h in zip(centre, half)), tuple(c + h for c, h in zip(centre, half))

    @property
    def volume_nm3(self) -> float:
        """Volume in closed form."""
        raise NotImplementedError

    def grown(self, thickness_nm: float, **place) -> Particle:
        """The body with a layer of this thickness on it, at the place given as for a new shape, or around the same centre.

        Raises InputError where the grown body would dip below z = 0.
        """
        raise NotImplementedError

    def _resized(self, place: dict, **sizes) -> Particle:
        return replace(self, **STANDING | (place or {"center_nm": self.center}) | sizes)

    def _within(self, center_nm: Sequence[float]) -> Particle:
        """The same body around another centre inside of a layer, where the rules for gaps to the surface do not apply."""
        moved = copy.copy(self)
        for name, value in (STANDING | {"center_nm": tuple(center_nm)}).items():
            object.__setattr__(moved, name, value)
        return moved

    # Geometry. Points are (n, 3) in nm; x, y any shape.

    def chord(self, x, y):
        """Lowest and highest z of the body over x, y, in closed form; z_low > z_high where the vertical line misses it."""
        import numpy as np

        centre = self.center
        low, high = self._chord(np.asarray(x, dtype=float) - centre[0], np.asarray(y, dtype=float) - centre[1])
        return low + centre[2], high + centre[2]

    def intervals(self, x, y) -> list:
        """The pieces (z_low, z_high) in which vertical lines at x, y meet the body: one, but for a union; they may overlap."""
        return [self.chord(x, y)]

    def silhouette_corners(self) -> list[tuple[float, float]]:
        """Points (x, y) at which the outline seen from above has a corner, or passes from straight to round; those of the box only."""
        return []

    def inside(self, points_nm):
        """True for points in the body, its surface included, (n,)."""
        import numpy as np

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        pieces = self.intervals(points[:, 0], points[:, 1])
        return np.any([(low <= points[:, 2]) & (points[:, 2] <= high) for low, high in pieces], axis=0)

    def signed_distance(self, points_nm):
        """Distance from the surface in nm, negative inside, (n,). Exact, but inside of unions, where it is a bound: the surface may be farther."""
        import numpy as np

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        return self._distance(points - np.array(self.center))

    def normal(self, points_nm):
        """Outward unit normal of the level set of the distance through each point, (n, 3), by central differences (to 1e-7 on a ball's surface).

        Where two faces are equally near it lies between theirs; where no direction is singled out (a ball's centre) it is +z.
        """
        import numpy as np

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        step = 1e-4 * min(self.half_extents())
        slope = np.stack(
            [self.signed_distance(points + step * axis) - self.signed_distance(points - step * axis) for axis in np.eye(3)], axis=1
        )
        slope[np.linalg.norm(slope, axis=1) < 1e-9 * step] = (0.0, 0.0, 1.0)
        return slope / np.linalg.norm(slope, axis=1)[:, None]

    def outline_xz(self, count: int = 241):
        """The cut by the plane y = centre as a closed polygon: x (2 count + 1,), z (2 count + 1,), denser near the left and right end."""
        import numpy as np

        (low, _, _), (high, _, _) = self.bounds_nm()
        x, y, _ = self.center
        left, right = (self._edge_of_cut(x, end, y) for end in (low, high))
        across = 0.5 * (left + right) - 0.5 * (right - left) * np.cos(np.linspace(0.0, np.pi, count))
        bottom, top = self.chord(across, np.full(count, y))
        missed = bottom > top  # only the ends, by rounding
        bottom, top = np.where(missed, 0.5 * (bottom + top), bottom), np.where(missed, 0.5 * (bottom + top), top)
        return np.concatenate([across, across[::-1], across[:1]]), np.concatenate([bottom, top[::-1], bottom[:1]])

    def _edge_of_cut(self, inner: float, outer: float, y: float) -> float:
        """Where the cut of a convex body ends on the way from `inner`, a point over it, to `outer`, by bisection to 1e-15 of the way."""

        def reached(x: float) -> bool:
            low, high = self.chord(x, y)
            return bool(low <= high)

        if reached(outer):
            return outer
        for _ in range(50):
            middle = 0.5 * (inner + outer)
            inner, outer = (middle, outer) if reached(middle) else (inner, middle)
        return inner

    def _chord(self, x, y):
        """The chord relative to the centre."""
        raise NotImplementedError

    def _distance(self, points):
        """The signed distance of points relative to the centre."""
        raise NotImplementedError


def _is_number(value: object) -> bool:
    return isinstance(value, Real) and not isinstance(value, bool) and math.isfinite(value)
