"""One body of each kind, random bodies, and points around them."""

import numpy as np
from hypothesis import strategies as st

from substrate.particle.shape import Box, Cone, Disc, Ellipsoid, Rod, Shell, Sphere, Union

BODIES = {
    "sphere": Sphere(material=1.5, diameter_nm=60.0, gap_nm=3.0),
    "ellipsoid": Ellipsoid(material=1.5, diameters_nm=(80.0, 50.0, 40.0), azimuth_deg=30.0, tilt_deg=25.0),
    "box": Box(material=1.5, size_nm=(50.0, 60.0, 40.0), edge_radius_nm=6.0, azimuth_deg=20.0),
    "sharp box": Box(material=1.5, size_nm=(50.0, 60.0, 40.0), azimuth_deg=-35.0),
    "disc": Disc(material=1.5, diameter_nm=80.0, height_nm=30.0, rim_radius_nm=8.0),
    "sharp disc": Disc(material=1.5, diameter_nm=80.0, height_nm=30.0),
    "rod": Rod(material=1.5, diameter_nm=30.0, length_nm=90.0, azimuth_deg=20.0, tilt_deg=35.0),
    "lying rod": Rod(material=1.5, diameter_nm=30.0, length_nm=90.0, azimuth_deg=65.0),
    "standing rod": Rod(material=1.5, diameter_nm=30.0, length_nm=90.0, tilt_deg=90.0),
    "cone": Cone(material=1.5, base_diameter_nm=60.0, height_nm=80.0, tip_radius_nm=8.0),
    "hanging cone": Cone(material=1.5, base_diameter_nm=60.0, height_nm=80.0, tip_radius_nm=8.0, points="down"),
    "shell": Shell(around=Disc(material=2.0, diameter_nm=50.0, height_nm=20.0, rim_radius_nm=4.0), material=1.5, thickness_nm=6.0),
    "union": Union(
        material=1.5,
        parts=[Sphere(material=1.5, diameter_nm=40.0, center_nm=(0, 0, 20)), Sphere(material=1.5, diameter_nm=30.0, center_nm=(22, 5, 25))],
    ),
}


def lens(a: float, b: float, apart: float) -> float:
    """Volume common to two balls of radii a, b (elementary geometry: two caps)."""
    return np.pi * (a + b - apart) ** 2 * (apart**2 + 2 * apart * (a + b) - 3 * (a - b) ** 2) / (12 * apart)


VOLUMES = {name: body.volume_nm3 for name, body in BODIES.items()}
VOLUMES["union"] -= lens(20.0, 15.0, np.sqrt(22.0**2 + 5.0**2 + 5.0**2))


def points_around(body, seed: int, count: int = 4000) -> np.ndarray:
    """Random points (count, 3) in the bounding box and 5 nm around it."""
    low, high = (np.array(corner) for corner in body.bounds_nm())
    return low - 5.0 + (high - low + 10.0) * np.random.default_rng(seed).uniform(size=(count, 3))


def surface_points(body, count: int) -> np.ndarray:
    """Points (n, 3) of the surface: the ends of chords on a square grid of count x count lines, denser near the ends of the box."""
    low, high = (np.array(corner) for corner in body.bounds_nm())
    t = 0.5 - 0.5 * np.cos(np.linspace(0.0, np.pi, count))
    x, y = np.meshgrid(low[0] + t * (high[0] - low[0]), low[1] + t * (high[1] - low[1]), indexing="ij")
    bottom, top = body.chord(x, y)
    hit = bottom <= top
    return np.concatenate([np.stack([x[hit], y[hit], z[hit]], axis=1) for z in (bottom, top)])


_ANGLE, _TILT, _SIZE, _SHARE = st.floats(-180, 180), st.floats(-90, 90), st.floats(20, 60), st.floats(0, 0.5)


@st.composite
def convex_bodies(draw):
    """Any convex body of extents between 20 and 180 nm."""
    kind = draw(st.sampled_from([Sphere, Ellipsoid, Box, Disc, Rod, Cone]))
    a, b, c = draw(_SIZE), draw(_SIZE), draw(_SIZE)
    place = {"material": 1.5, "gap_nm": draw(st.sampled_from([0.0, 2.5])), "center_xy_nm": (draw(_SIZE), -draw(_SIZE))}
    if kind is Sphere:
        return Sphere(diameter_nm=a, **place)
    if kind is Ellipsoid:
        return Ellipsoid(diameters_nm=(a, b, c), azimuth_deg=draw(_ANGLE), tilt_deg=draw(_TILT), **place)
    if kind is Box:
        return Box(size_nm=(a, b, c), edge_radius_nm=draw(_SHARE) * min(a, b, c), azimuth_deg=draw(_ANGLE), **place)
    if kind is Disc:
        return Disc(diameter_nm=a, height_nm=b, rim_radius_nm=draw(_SHARE) * min(a, b), **place)
    if kind is Rod:
        return Rod(diameter_nm=a, length_nm=a * draw(st.floats(1, 3)), azimuth_deg=draw(_ANGLE), tilt_deg=draw(_TILT), **place)
    radius = draw(st.floats(0.05, 0.45)) * min(a, b)
    return Cone(base_diameter_nm=a, height_nm=b, tip_radius_nm=radius, points=draw(st.sampled_from(["up", "down"])), **place)
