"""Convex bodies in closed form: sphere, ellipsoid, rounded box, rounded disc, rod.

Box and disc are the sum (in Minkowski's sense) of a smaller sharp body and a ball of the rounding radius, the rod that of a line and a
ball; vertical chords and distances follow from those of the sharp body.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from substrate.errors import InputError, Problem
from substrate.particle.placement import Particle


@dataclass(frozen=True, kw_only=True)
class Sphere(Particle):
    """A ball."""

    diameter_nm: float

    def _check(self):
        self._positive("diameter_nm")

    def half_extents(self):
        return (0.5 * self.diameter_nm,) * 3

    def _chord(self, x, y):
        return _raised(0.0, 0.5 * self.diameter_nm, x * x + y * y)

    def _distance(self, points):
        import numpy as np

        return np.linalg.norm(points, axis=1) - 0.5 * self.diameter_nm

    @property
    def volume_nm3(self) -> float:
        return math.pi / 6.0 * self.diameter_nm**3

    def grown(self, thickness_nm, **place):
        return self._resized(place, diameter_nm=self.diameter_nm + 2.0 * thickness_nm)


@dataclass(frozen=True, kw_only=True)
class Ellipsoid(Particle):
    """diameters_nm: along its own axes a, b, c. tilt_deg turns a up from the surface, azimuth_deg turns it about z from x."""

    diameters_nm: tuple[float, float, float]
    azimuth_deg: float = 0.0
    tilt_deg: float = 0.0

    def _check(self):
        self._vector("diameters_nm", 3, "three lengths above 0 (a, b, c)", above=0.0)
        self._finite("azimuth_deg", "tilt_deg")

    def _axes(self):
        """Unit vectors of the axes as rows."""
        import numpy as np

        f, t = math.radians(self.azimuth_deg), math.radians(self.tilt_deg)
        a = np.array([math.cos(t) * math.cos(f), math.cos(t) * math.sin(f), math.sin(t)])
        b = np.array([-math.sin(f), math.cos(f), 0.0])
        return np.stack([a, b, np.cross(a, b)])

    def _matrix(self):
        """Q with x . Q x = 1 on the surface."""
        import numpy as np

        axes, half = self._axes(), 0.5 * np.asarray(self.diameters_nm)
        return axes.T @ np.diag(half**-2) @ axes

    def half_extents(self):
        import numpy as np

        axes, half = self._axes(), 0.5 * np.asarray(self.diameters_nm)
        return tuple(float(v) for v in np.sqrt(((axes * half[:, None]) ** 2).sum(axis=0)))

    def _chord(self, x, y):
        import numpy as np

        q = self._matrix()
        slope = q[0, 2] * x + q[1, 2] * y
        rest = q[0, 0] * x * x + 2.0 * q[0, 1] * x * y + q[1, 1] * y * y - 1.0
        square = slope * slope - q[2, 2] * rest
        half = np.where(square >= 0.0, np.sqrt(np.maximum(square, 0.0)), -1.0) / q[2, 2]
        middle = -slope / q[2, 2]
        return middle - half, middle + half

    def _distance(self, points):
        """t |p_i/(t + a_i^2)|, where t solves sum (a_i p_i/(t + a_i^2))^2 = 1: the nearest point of the surface is a_i^2 p_i/(t + a_i^2).

        The sum falls and is convex in t, so that Newton's steps from the left, where one term alone makes it at least 1, never overshoot.
        """
        import numpy as np

        half = 0.5 * np.asarray(self.diameters_nm, dtype=float)
        own = np.maximum(np.abs(points @ self._axes().T), 1e-8 * half)  # off the planes on which two points may be nearest
        t = (half * own - half**2).max(axis=1)
        for _ in range(50):
            ratio = half * own / (t[:, None] + half**2)
            step = ((ratio**2).sum(axis=1) - 1.0) / (2.0 * ratio**2 / (t[:, None] + half**2)).sum(axis=1)
            t += step
            if (np.abs(step) <= 1e-14 * (np.abs(t) + half.max() ** 2)).all():
                break
        return t * np.linalg.norm(own / (t[:, None] + half**2), axis=1)

    @property
    def volume_nm3(self) -> float:
        return math.pi / 6.0 * math.prod(self.diameters_nm)

    def grown(self, thickness_nm, **place):
        """All axes longer by the thickness at both ends: constant thickness on the axes only."""
        return self._resized(place, diameters_nm=tuple(d + 2.0 * thickness_nm for d in self.diameters_nm))


@dataclass(frozen=True, kw_only=True)
class Box(Particle):
    """size_nm: full sizes along its own x, y and along z; all edges and corners rounded; turned about z."""

    size_nm: tuple[float, float, float]
    edge_radius_nm: float = 0.0
    azimuth_deg: float = 0.0

    def _check(self):
        self._vector("size_nm", 3, "three lengths above 0 (x, y, z)", above=0.0)
        self._finite("azimuth_deg")
        self._radius("edge_radius_nm", 0.5 * min(self.size_nm), "half the shortest edge")

    def _core(self):
        return tuple(0.5 * s - self.edge_radius_nm for s in self.size_nm)

    def half_extents(self):
        cosine, sine = abs(math.cos(math.radians(self.azimuth_deg))), abs(math.sin(math.radians(self.azimuth_deg)))
        a, b, c = self._core()
        r = self.edge_radius_nm
        return (a * cosine + b * sine + r, a * sine + b * cosine + r, c + r)

    def _own(self, x, y):
        cosine, sine = math.cos(math.radians(self.azimuth_deg)), math.sin(math.radians(self.azimuth_deg))
        return cosine * x + sine * y, cosine * y - sine * x

    def _chord(self, x, y):
        import numpy as np

        a, b, c = self._core()
        u, v = self._own(x, y)
        square = np.maximum(np.abs(u) - a, 0.0) ** 2 + np.maximum(np.abs(v) - b, 0.0) ** 2
        return _raised(c, self.edge_radius_nm, square)

    def silhouette_corners(self):
        (a, b, _), r, (x0, y0, _) = self._core(), self.edge_radius_nm, self.center
        cosine, sine = math.cos(math.radians(self.azimuth_deg)), math.sin(math.radians(self.azimuth_deg))
        own = [(i * u, j * v) for i in (-1, 1) for j in (-1, 1) for u, v in {(a + r, b), (a, b + r)}]
        return [(x0 + cosine * u - sine * v, y0 + sine * u + cosine * v) for u, v in own]

    def _distance(self, points):
        import numpy as np

        u, v = self._own(points[:, 0], points[:, 1])
        beyond = np.abs(np.stack([u, v, points[:, 2]], axis=1)) - np.array(self._core())
        return np.linalg.norm(np.maximum(beyond, 0.0), axis=1) + np.minimum(beyond.max(axis=1), 0.0) - self.edge_radius_nm

    @property
    def volume_nm3(self) -> float:
        a, b, c = (2.0 * h for h in self._core())
        r = self.edge_radius_nm
        return a * b * c + 2.0 * r * (a * b + b * c + c * a) + math.pi * r * r * (a + b + c) + 4.0 * math.pi / 3.0 * r**3

    def grown(self, thickness_nm, **place):
        """Exact: rounding grows with the layer."""
        size = tuple(s + 2.0 * thickness_nm for s in self.size_nm)
        return self._resized(place, size_nm=size, edge_radius_nm=self.edge_radius_nm + thickness_nm)


@dataclass(frozen=True, kw_only=True)
class Disc(Particle):
    """A flat cylinder with its axis along z; both rims rounded with rim_radius_nm."""

    diameter_nm: float
    height_nm: float
    rim_radius_nm: float = 0.0

    def _check(self):
        self._positive("diameter_nm", "height_nm")
        most = 0.5 * min(self.diameter_nm, self.height_nm)
        self._radius("rim_radius_nm", most, "half the smaller of diameter and height")

    def half_extents(self):
        return (0.5 * self.diameter_nm, 0.5 * self.diameter_nm, 0.5 * self.height_nm)

    def _chord(self, x, y):
        import numpy as np

        beyond = np.maximum(np.hypot(x, y) - (0.5 * self.diameter_nm - self.rim_radius_nm), 0.0)
        return _raised(0.5 * self.height_nm - self.rim_radius_nm, self.rim_radius_nm, beyond**2)

    def _distance(self, points):
        import numpy as np

        r = self.rim_radius_nm
        beyond = np.stack(
            [np.hypot(points[:, 0], points[:, 1]) - 0.5 * self.diameter_nm + r, np.abs(points[:, 2]) - 0.5 * self.height_nm + r], axis=1
        )
        return np.linalg.norm(np.maximum(beyond, 0.0), axis=1) + np.minimum(beyond.max(axis=1), 0.0) - r

    @property
    def volume_nm3(self) -> float:
        """Cylinder plus the rounded rim: Steiner's formula for a disc of radius R and a slab of height H with rounding r."""
        r = self.rim_radius_nm
        big, tall = 0.5 * self.diameter_nm - r, self.height_nm - 2.0 * r
        flat = math.pi * big * big * tall
        return flat + 2.0 * math.pi * big * tall * r + 2.0 * math.pi * big * big * r + math.pi * r * r * (math.pi * big + tall) + 4.0 * math.pi / 3.0 * r**3

    def grown(self, thickness_nm, **place):
        """Exact: rounding grows with the layer."""
        return self._resized(
            place,
            diameter_nm=self.diameter_nm + 2.0 * thickness_nm,
            height_nm=self.height_nm + 2.0 * thickness_nm,
            rim_radius_nm=self.rim_radius_nm + thickness_nm,
        )


@dataclass(frozen=True, kw_only=True)
class Rod(Particle):
    """A cylinder with hemispherical ends; length_nm is the whole. tilt_deg 0 lies along azimuth_deg, 90 stands."""

    diameter_nm: float
    length_nm: float
    azimuth_deg: float = 0.0
    tilt_deg: float = 0.0

    def _check(self):
        self._positive("diameter_nm", "length_nm")
        self._finite("azimuth_deg", "tilt_deg")
        if self.length_nm < self.diameter_nm:
            raise InputError(Problem("rod length_nm", self.length_nm, f"at least the diameter ({self.diameter_nm:g} nm)", "For a flat body take a disc."))

    def _axis(self):
        f, t = math.radians(self.azimuth_deg), math.radians(self.tilt_deg)
        return math.cos(t) * math.cos(f), math.cos(t) * math.sin(f), math.sin(t)

    def half_extents(self):
        half, r = 0.5 * (self.length_nm - self.diameter_nm), 0.5 * self.diameter_nm
        return tuple(abs(u) * half + r for u in self._axis())

    def _chord(self, x, y):
        """Top of the rod: the highest of all balls along its axis; the place of the highest is in closed form, then clipped to the ends."""
        import numpy as np

        ux, uy, uz = self._axis()
        half, r = 0.5 * (self.length_nm - self.diameter_nm), 0.5 * self.diameter_nm
        flat = math.hypot(ux, uy)
        if flat < 1e-12:
            return _raised(half, r, x * x + y * y)
        s, across = (ux * x + uy * y) / flat, (ux * y - uy * x) / flat
        reach = r * r - across * across
        width = np.sqrt(np.maximum(reach, 0.0))
        ends = []
        for sign in (-1.0, 1.0):
            t = np.minimum(np.maximum((s + sign * uz * width) / flat, -half), half)
            square = reach - (s - flat * t) ** 2
            ends.append((uz * t + sign * np.sqrt(np.maximum(square, 0.0)), square >= 0.0))
        hit = ends[0][1] & ends[1][1]
        return np.where(hit, ends[0][0], 1.0), np.where(hit, ends[1][0], -1.0)

    def _distance(self, points):
        import numpy as np

        axis = np.array(self._axis())
        half = 0.5 * (self.length_nm - self.diameter_nm)
        along = np.clip(points @ axis, -half, half)
        return np.linalg.norm(points - along[:, None] * axis, axis=1) - 0.5 * self.diameter_nm

    @property
    def volume_nm3(self) -> float:
        r = 0.5 * self.diameter_nm
        return math.pi * r * r * (self.length_nm - 2.0 * r) + 4.0 * math.pi / 3.0 * r**3

    def grown(self, thickness_nm, **place):
        return self._resized(place, diameter_nm=self.diameter_nm + 2.0 * thickness_nm, length_nm=self.length_nm + 2.0 * thickness_nm)


def _raised(core: float, radius: float, square):
    """Chord of a body whose core reaches to +-core, rounded with a radius, at squared distance `square` beyond the core's outline."""
    import numpy as np

    left = radius * radius - square
    half = np.where(left >= 0.0, core + np.sqrt(np.maximum(left, 0.0)), -1.0)
    return -half, half
