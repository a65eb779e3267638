"""The rounded cone in closed form."""

from __future__ import annotations

import math
from dataclasses import dataclass

from substrate.errors import InputError, Problem
from substrate.particle.placement import Particle


@dataclass(frozen=True, kw_only=True)
class Cone(Particle):
    """A circular cone about z with a ball of tip_radius_nm as its tip, tangent to the side; height_nm is the whole. points: "up" or "down"."""

    base_diameter_nm: float
    height_nm: float
    tip_radius_nm: float
    points: str = "up"

    def _check(self):
        self._positive("base_diameter_nm", "height_nm", "tip_radius_nm")
        most = min(0.5 * self.base_diameter_nm, 0.5 * self.height_nm)
        if self.tip_radius_nm >= most:
            raise InputError(Problem("cone tip_radius_nm", self.tip_radius_nm, f"below half of base diameter and of height ({most:g} nm)"))
        if self.points not in ("up", "down"):
            raise InputError(Problem("cone points", self.points, "'up' or 'down'"))

    def half_extents(self):
        return (0.5 * self.base_diameter_nm, 0.5 * self.base_diameter_nm, 0.5 * self.height_nm)

    def _profile(self) -> tuple[float, float]:
        """Half opening angle a, and height of the ball's centre above the base.

        The side, at distance r from the ball's centre at height t = H - r, meets the base at R: R cos a = t sin a + r, solved for a.
        """
        big, tall = 0.5 * self.base_diameter_nm, self.height_nm - self.tip_radius_nm
        return math.acos(self.tip_radius_nm / math.hypot(big, tall)) - math.atan2(tall, big), tall

    def _chord(self, x, y):
        import numpy as np

        angle, centre = self._profile()
        rho, big, r = np.hypot(x, y), 0.5 * self.base_diameter_nm, self.tip_radius_nm
        side = (big - rho) / math.tan(angle)
        ball = centre + np.sqrt(np.maximum(r * r - rho * rho, 0.0))
        top = np.where(rho <= r * math.cos(angle), ball, side) - 0.5 * self.height_nm
        hit = rho <= big
        low, high = np.where(hit, -0.5 * self.height_nm, 1.0), np.where(hit, top, -1.0)
        return (low, high) if self.points == "up" else (np.where(hit, -top, 1.0), np.where(hit, 0.5 * self.height_nm, -1.0))

    def _distance(self, points):
        """To the nearest of base, side and tip, in the plane of the point and the axis; exact."""
        import numpy as np

        angle, centre = self._profile()
        sine, cosine = math.sin(angle), math.cos(angle)
        big, r = 0.5 * self.base_diameter_nm, self.tip_radius_nm
        rho = np.hypot(points[:, 0], points[:, 1])
        z = (points[:, 2] if self.points == "up" else -points[:, 2]) + 0.5 * self.height_nm
        base = np.hypot(np.maximum(rho - big, 0.0), z)
        length = math.hypot(big - r * cosine, centre + r * sine)  # of the side, from the rim to where it meets the ball
        along = np.clip(z * cosine - (rho - big) * sine, 0.0, length)
        side = np.hypot(rho - big + along * sine, z - along * cosine)
        from_ball = np.hypot(rho, z - centre) - r
        at_tip = (z - centre) * cosine - rho * sine > 0.0
        nearest = np.minimum(base, np.where(at_tip, np.abs(from_ball), side))
        inside = (z > 0.0) & (np.where(at_tip, from_ball, (rho - big) * cosine + z * sine) < 0.0)
        return np.where(inside, -nearest, nearest)

    @property
    def volume_nm3(self) -> float:
        """Frustum up to the tangent circle, and the cap of the ball above it."""
        angle, centre = self._profile()
        big, r = 0.5 * self.base_diameter_nm, self.tip_radius_nm
        circle, height = r * math.cos(angle), centre + r * math.sin(angle)
        frustum = math.pi / 3.0 * height * (big * big + big * circle + circle * circle)
        cap = r - r * math.sin(angle)
        return frustum + math.pi * cap * cap * (3.0 * r - cap) / 3.0

    def grown(self, thickness_nm, **place):
        """Side, base plane and tip moved outward by the thickness; the base's rim stays sharp, so that the layer is thicker there."""
        angle, _ = self._profile()
        base = 0.5 * self.base_diameter_nm + thickness_nm * (math.tan(angle) + 1.0 / math.cos(angle))
        return self._resized(
            place,
            base_diameter_nm=2.0 * base,
            height_nm=self.height_nm + 2.0 * thickness_nm,
            tip_radius_nm=self.tip_radius_nm + thickness_nm,
        )
