"""What all shapes have in common: a material, a place above the surface, and the questions that can be asked of them."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields

from substrate.constants import SMALLEST_GAP_NM
from substrate.errors import InputError, Problem


@dataclass(frozen=True, kw_only=True)
class Particle:
    """A body above the stack. material: any material specification, not resolved here.

    Place: gap_nm, the height of the lowest point above z = 0, with the centre over center_xy_nm; or center_nm = (x, y, z), the centre of
    the shape (half way up its height). A body that dips below z = 0, and a gap between 0 and 0.5 nm, are refused: below that
    the local bulk optics of the program has no meaning.
    """

    material: object = None
    gap_nm: float = 0.0
    center_xy_nm: tuple[float, float] = (0.0, 0.0)
    center_nm: tuple[float, float, float] | None = None

    def __post_init__(self):
        if self.material is None:
            raise InputError(Problem(f"{self.word} material", None, "a material name, a number or a table file"))
        self._check()
        if not (math.isfinite(self.gap_nm) and self.gap_nm >= 0.0):
            raise InputError(Problem(f"{self.word} gap_nm", self.gap_nm, "0 (touching) or a height above the surface"))
        if self.center_nm is not None and (len(self.center_nm) != 3 or not all(math.isfinite(c) for c in self.center_nm)):
            raise InputError(Problem(f"{self.word} center_nm", self.center_nm, "three finite numbers (x, y, z)"))
        if len(self.center_xy_nm) != 2 or not all(math.isfinite(c) for c in self.center_xy_nm):
            raise InputError(Problem(f"{self.word} center_xy_nm", self.center_xy_nm, "two finite numbers (x, y)"))
        self._check_gap()

    def _check(self) -> None:
        """Raise InputError for sizes that make no body."""

    def _check_gap(self) -> None:
        gap = self.gap_nm if self.center_nm is None else self.bounds_nm()[0][2]
        where = f"{self.word} {'gap_nm' if self.center_nm is None else 'center_nm'}"
        if gap < -1e-9:
            advice = "Lift it: its lowest point lies below the surface at z = 0."
            raise InputError(Problem(where, self.center_nm, "a place above the surface", advice))
        if 1e-9 < gap < SMALLEST_GAP_NM:
            allowed = f"0 (touching) or a gap of at least {SMALLEST_GAP_NM} nm"
            raise InputError(Problem(where, round(gap, 6), allowed, "Narrower gaps need non-local optics and tunnelling, which are not in the model."))

    @property
    def word(self) -> str:
        """The user's word for the shape."""
        return type(self).__name__.lower()

    def _positive(self, **sizes: float) -> None:
        for name, size in sizes.items():
            if isinstance(size, bool) or not isinstance(size, (int, float)) or not 0.0 < size < math.inf:
                raise InputError(Problem(f"{self.word} {name}", size, "a length above 0"))

    def _three(self, name: str, sizes) -> None:
        if len(sizes) != 3:
            raise InputError(Problem(f"{self.word} {name}", sizes, "three lengths (x, y, z)"))
        for axis, size in zip("xyz", sizes):
            self._positive(**{f"{name} along {axis}": size})

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

    def moved_to(self, center_nm) -> Particle:
        """The same body with its centre elsewhere."""
        values = {f.name: getattr(self, f.name) for f in fields(self)}
        return type(self)(**(values | {"center_nm": tuple(float(c) for c in center_nm), "gap_nm": 0.0}))

    # Geometry. Points are (n, 3) in nm; x, y any shape.

    def intervals(self, x, y) -> list:
        """The pieces (z_low, z_high) in which vertical lines at x, y meet the body; z_low > z_high where there is none. Exact."""
        import numpy as np

        centre = self.center
        low, high = self._chord(np.asarray(x, dtype=float) - centre[0], np.asarray(y, dtype=float) - centre[1])
        return [(low + centre[2], high + centre[2])]

    def chord(self, x, y):
        """Lowest and highest z of the body over x, y; z_low > z_high where the line misses it."""
        import numpy as np

        pieces = self.intervals(x, y)
        empty = [low > high for low, high in pieces]
        low = np.min([np.where(e, np.inf, p[0]) for e, p in zip(empty, pieces)], axis=0)
        high = np.max([np.where(e, -np.inf, p[1]) for e, p in zip(empty, pieces)], axis=0)
        return low, high

    def inside(self, points_nm):
        """True for points in the body, (n,)."""
        import numpy as np

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        pieces = self.intervals(points[:, 0], points[:, 1])
        return np.any([(low <= points[:, 2]) & (points[:, 2] <= high) for low, high in pieces], axis=0)

    def signed_distance(self, points_nm):
        """Distance from the surface in nm, negative inside, (n,); for an ellipsoid and a cone good near the surface only."""
        import numpy as np

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        return self._distance(points - np.array(self.center))

    def normal(self, points_nm):
        """Outward unit normal of the level set of the distance through each point, (n, 3), by central differences."""
        import numpy as np

        points = np.atleast_2d(np.asarray(points_nm, dtype=float))
        step = 1e-4 * min(self.half_extents())
        slope = np.stack(
            [self.signed_distance(points + step * axis) - self.signed_distance(points - step * axis) for axis in np.eye(3)], axis=1
        )
        length = np.linalg.norm(slope, axis=1)
        slope[length < 1e-9 * step] = (0.0, 0.0, 1.0)  # at a centre or on an axis there is no direction
        return slope / np.maximum(np.linalg.norm(slope, axis=1), 1e-300)[:, None]

    def _chord(self, x, y):
        raise NotImplementedError

    def _distance(self, points):
        raise NotImplementedError

    @property
    def volume_nm3(self) -> float:
        """Volume in closed form."""
        raise NotImplementedError

    def grown(self, thickness_nm: float) -> Particle:
        """The body with a layer of constant thickness on it, same centre."""
        raise NotImplementedError
