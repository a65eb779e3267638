"""Shapes: closed forms against each other, chords against distances, and what is refused."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from substrate.errors import InputError
from substrate.particle.shape import SHAPES, Box, Cone, Disc, Ellipsoid, Rod, Shell, Sphere, Union

BODIES = {
    "sphere": Sphere(material=1.5, diameter_nm=60.0, gap_nm=3.0),
    "ellipsoid": Ellipsoid(material=1.5, diameters_nm=(80.0, 50.0, 40.0), azimuth_deg=30.0, tilt_deg=25.0),
    "box": Box(material=1.5, size_nm=(50.0, 60.0, 40.0), edge_radius_nm=6.0, azimuth_deg=20.0),
    "sharp box": Box(material=1.5, size_nm=(50.0, 60.0, 40.0)),
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


def points_around(body, seed: int, count: int = 4000) -> np.ndarray:
    low, high = (np.array(corner) for corner in body.bounds_nm())
    return low - 5.0 + (high - low + 10.0) * np.random.default_rng(seed).uniform(size=(count, 3))


@pytest.mark.parametrize("name", BODIES)
def test_chords_and_distances_tell_the_same_inside(name):
    """Two separate closed forms: vertical chords, and the signed distance."""
    body = BODIES[name]
    points = points_around(body, 1)
    distance = body.signed_distance(points)
    clear = np.abs(distance) > 1e-9
    assert np.array_equal(body.inside(points)[clear], (distance < 0.0)[clear])


@pytest.mark.parametrize("name", BODIES)
def test_volume_by_random_points(name):
    body = BODIES[name]
    low, high = (np.array(corner) for corner in body.bounds_nm())
    count = 200_000
    points = low + (high - low) * np.random.default_rng(2).uniform(size=(count, 3))
    share = body.inside(points).mean()
    box = np.prod(high - low)
    expected = body.volume_nm3 / box
    if name == "union":
        expected -= _lens(20.0, 15.0, np.sqrt(22.0**2 + 5**2 + 5**2)) / box
    assert abs(share - expected) < 4.0 * np.sqrt(share * (1 - share) / count) + 1e-12  # four standard deviations of the sampling


def _lens(a: float, b: float, apart: float) -> float:
    """Volume common to two balls (elementary geometry)."""
    return np.pi * (a + b - apart) ** 2 * (apart**2 + 2 * apart * (a + b) - 3 * (a - b) ** 2) / (12 * apart)


@pytest.mark.parametrize("name", BODIES)
def test_bounds_are_tight_and_the_floor_is_where_it_was_put(name):
    body = BODIES[name]
    low, high = (np.array(corner) for corner in body.bounds_nm())
    assert not body.inside(points_around(body, 3)[:0]).any()
    points = points_around(body, 4, 40_000)
    inside = points[body.inside(points)]
    assert (inside >= low - 1e-9).all() and (inside <= high + 1e-9).all()
    assert (inside.min(axis=0) - low < 0.12 * (high - low)).all()  # 40 000 points come that near to each face, tips included
    assert abs(low[2] - body.gap_nm) < 1e-9 or name == "union"


@pytest.mark.parametrize("name", [name for name in BODIES if name not in ("ellipsoid", "cone", "hanging cone", "union")])
def test_distance_has_unit_slope(name):
    """An exact distance changes by one nm a nm wherever it is smooth."""
    body = BODIES[name]
    points = points_around(body, 5, 400)
    step = 1e-5
    slope = np.stack([(body.signed_distance(points + step * e) - body.signed_distance(points - step * e)) / (2 * step) for e in np.eye(3)])
    length = np.linalg.norm(slope, axis=0)
    assert np.mean(np.abs(length - 1.0) < 1e-4) > 0.97  # but for points next to an edge of the medial axis


@pytest.mark.parametrize("name", BODIES)
def test_normals_point_outward(name):
    body = BODIES[name]
    points = points_around(body, 6, 3000)
    near = points[np.abs(body.signed_distance(points)) < 1.0]
    normal = body.normal(near)
    assert np.abs(np.linalg.norm(normal, axis=1) - 1.0).max() < 1e-12
    assert (body.signed_distance(near + 0.05 * normal) > body.signed_distance(near - 0.05 * normal)).all()


def test_sphere_normal_is_radial():
    body = BODIES["sphere"]
    point = np.array(body.center) + [30.0 * 0.48, 30.0 * 0.6, 30.0 * 0.64]
    assert np.abs(body.normal(point[None, :])[0] - [0.48, 0.6, 0.64]).max() < 1e-6  # central differences


def test_shell_grows_by_its_thickness():
    shell = BODIES["shell"]
    surface = points_around(shell, 7, 30_000)
    outside = surface[shell.signed_distance(surface) > 0.0]
    apart = shell.core.signed_distance(outside) - shell.signed_distance(outside)
    assert np.abs(apart - 6.0).max() < 1e-9  # the disc grows exactly
    assert abs(shell.bounds_nm()[0][2]) < 1e-12 and shell.core.bounds_nm()[0][2] == pytest.approx(6.0)


def test_shell_of_a_shell():
    inner = Shell(around=Sphere(material=2.0, diameter_nm=40.0), material=1.5, thickness_nm=5.0)
    outer = Shell(around=inner, material=1.3, thickness_nm=3.0, gap_nm=2.0)
    assert outer.volume_nm3 == pytest.approx(np.pi / 6 * 56.0**3)
    assert outer.core.outer.center == outer.center and outer.core.core.center == outer.center


@settings(max_examples=50, deadline=None)
@given(azimuth=st.floats(-180, 180), tilt=st.floats(-90, 90), x=st.floats(-20, 20), y=st.floats(-20, 20))
def test_chord_ends_lie_on_the_surface_of_a_tilted_rod(azimuth, tilt, x, y):
    rod = Rod(material=1.0, diameter_nm=20.0, length_nm=70.0, azimuth_deg=azimuth, tilt_deg=tilt, center_nm=(0.0, 0.0, 50.0))
    low, high = rod.chord(np.array([x]), np.array([y]))
    if low[0] <= high[0]:
        ends = np.array([[x, y, low[0]], [x, y, high[0]]])
        assert np.abs(rod.signed_distance(ends)).max() < 1e-6  # square roots of differences near the silhouette


def test_every_word_makes_a_shape():
    assert sorted(SHAPES) == ["box", "cone", "disc", "ellipsoid", "rod", "shell", "sphere", "union"]
    assert all(kind.__doc__ for kind in SHAPES.values())


@pytest.mark.parametrize(
    "make,words",
    [
        (lambda: Sphere(material=1.5, diameter_nm=-3.0), "diameter_nm: received -3.0; allowed: a length above 0"),
        (lambda: Sphere(diameter_nm=3.0), "sphere material"),
        (lambda: Sphere(material=1.5, diameter_nm=float("nan")), "above 0"),
        (lambda: Sphere(material=1.5, diameter_nm=60.0, gap_nm=-1.0), "gap_nm"),
        (lambda: Sphere(material=1.5, diameter_nm=60.0, gap_nm=0.2), "at least 0.5 nm"),
        (lambda: Sphere(material=1.5, diameter_nm=60.0, center_nm=(0, 0, 20)), "lies below the surface"),
        (lambda: Sphere(material=1.5, diameter_nm=60.0, center_nm=(0, 0)), "three finite numbers"),
        (lambda: Box(material=1.5, size_nm=(10, 10, 4), edge_radius_nm=3.0), "half the shortest edge"),
        (lambda: Disc(material=1.5, diameter_nm=10, height_nm=4, rim_radius_nm=3.0), "half the smaller"),
        (lambda: Rod(material=1.5, diameter_nm=10, length_nm=4), "at least the diameter"),
        (lambda: Cone(material=1.5, base_diameter_nm=10, height_nm=20, tip_radius_nm=6), "below half of base diameter"),
        (lambda: Shell(around=BODIES["union"], material=1.5, thickness_nm=2), "Put shells around the parts"),
        (lambda: Union(material=1.5, parts=[]), "one or more shapes"),
        (lambda: Union(material=1.5, parts=[BODIES["sphere"]], gap_nm=4.0), "Give each part its gap_nm"),
    ],
)
def test_refusals(make, words):
    with pytest.raises(InputError, match=words):
        make()
