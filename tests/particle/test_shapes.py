"""Shapes: closed forms against each other, chords against distances, and what is refused."""

import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from substrate.errors import InputError
from substrate.particle.shape import SHAPES, Box, Cone, Disc, Ellipsoid, Rod, Shell, Sphere, Union
from tests.particle.bodies import BODIES, VOLUMES, convex_bodies, points_around, surface_points


@pytest.mark.parametrize("name", BODIES)
def test_chords_and_distances_tell_the_same_inside(name):
    """Two separate closed forms: vertical chords, and the signed distance."""
    body = BODIES[name]
    points = points_around(body, 1)
    distance = body.signed_distance(points)
    clear = np.abs(distance) > 1e-9  # on the surface rounding decides
    assert np.array_equal(body.inside(points)[clear], (distance < 0.0)[clear])


@settings(max_examples=150, deadline=None)
@given(body=convex_bodies(), u=st.floats(-0.2, 1.2), v=st.floats(-0.2, 1.2))
def test_chords_end_on_the_surface_and_miss_nothing(body, u, v):
    low, high = (np.array(corner) for corner in body.bounds_nm())
    x, y = low[0] + u * (high[0] - low[0]), low[1] + v * (high[1] - low[1])
    bottom, top = body.chord(x, y)
    if bottom <= top:
        ends = np.array([[x, y, bottom], [x, y, top]])
        # chord ends are square roots: near the silhouette rounding of 1e-14 nm^2 moves them by 1e-7 nm, but along the surface
        assert np.abs(body.signed_distance(ends)).max() < 1e-6
        assert body.signed_distance([[x, y, 0.5 * (bottom + top)]])[0] <= 1e-9
    else:
        line = np.column_stack([np.full(200, x), np.full(200, y), np.linspace(low[2] - 1.0, high[2] + 1.0, 200)])
        assert body.signed_distance(line).min() >= -1e-9


@pytest.mark.parametrize("name", BODIES)
def test_volume_by_random_points(name):
    body = BODIES[name]
    low, high = (np.array(corner) for corner in body.bounds_nm())
    count = 100_000
    points = low + (high - low) * np.random.default_rng(2).uniform(size=(count, 3))
    share = body.inside(points).mean()
    deviation = np.sqrt(share * (1.0 - share) / count)
    assert abs(share - VOLUMES[name] / np.prod(high - low)) < 4.0 * deviation + 1e-12  # four standard deviations of the sampling


@pytest.mark.parametrize("name", BODIES)
def test_bounds_are_touched_from_inside_and_the_floor_is_where_it_was_put(name):
    body = BODIES[name]
    low, high = (np.array(corner) for corner in body.bounds_nm())
    points = surface_points(body, 301)
    assert (points >= low - 1e-9).all() and (points <= high + 1e-9).all()
    # the lines are at most (pi/2)/300 of the box apart: a pointed corner is missed by as much, and as the other coordinate counts too, by twice
    assert (points.min(axis=0) - low < 0.011 * (high - low)).all() and (high - points.max(axis=0) < 0.011 * (high - low)).all()
    assert abs(low[2] - body.gap_nm) < 1e-9 or name == "union"


@pytest.mark.parametrize("name", [name for name in BODIES if name != "union"])
def test_distance_is_that_of_the_nearest_surface_point(name):
    """Told by the chords alone: the surface is met at that distance along the normal, and nowhere nearer."""
    body = BODIES[name]
    points = points_around(body, 8, 400)
    distance, normal = body.signed_distance(points), body.normal(points)
    foot = points - distance[:, None] * normal
    inward = np.array(body.center) - foot
    inward /= np.linalg.norm(inward, axis=1)[:, None]
    hair = 2e-4  # nm: differences give normals to 1e-7, distances are some nm
    met = body.inside(foot + hair * inward) & ~body.inside(foot + hair * normal)
    assert met.mean() > 0.99  # but for points that two faces are equally near to, where the normal is an average
    unit = np.random.default_rng(9).normal(size=(200, 3))
    unit /= np.linalg.norm(unit, axis=1)[:, None]
    around = points[:, None, :] + 0.9999 * np.abs(distance)[:, None, None] * unit
    same_side = body.inside(around.reshape(-1, 3)).reshape(len(points), -1) == (distance < 0.0)[:, None]
    assert same_side.all()


@pytest.mark.parametrize("name", [name for name in BODIES if name != "union"])
def test_distance_grows_by_the_step_along_the_normal(name):
    """Beyond a convex body the distance is exact along each normal."""
    body = BODIES[name]
    points = surface_points(body, 25)
    outward = body.normal(points)
    for step in (0.5, 7.0):
        found = body.signed_distance(points + step * outward)
        assert np.abs(found - step).max() < 1e-4 * step  # normals by differences, 1e-7 where smooth; at edges an average of two faces
        inner = body.signed_distance(points + 0.01 * outward) - body.signed_distance(points)
        assert np.abs(inner - 0.01).max() < 1e-5


@pytest.mark.parametrize("name", BODIES)
def test_normals_point_outward(name):
    body = BODIES[name]
    points = points_around(body, 6, 3000)
    near = points[np.abs(body.signed_distance(points)) < 1.0]
    normal = body.normal(near)
    assert np.abs(np.linalg.norm(normal, axis=1) - 1.0).max() < 1e-12
    assert (body.signed_distance(near + 0.05 * normal) > body.signed_distance(near - 0.05 * normal)).all()


def test_normals_in_closed_form():
    ball, ellipsoid = BODIES["sphere"], Ellipsoid(material=1.5, diameters_nm=(80.0, 50.0, 40.0), gap_nm=1.0)
    unit = np.random.default_rng(1).normal(size=(50, 3))
    unit /= np.linalg.norm(unit, axis=1)[:, None]
    assert np.abs(ball.normal(np.array(ball.center) + 29.0 * unit) - unit).max() < 1e-7  # differences over 1e-4 of the radius
    half = np.array([40.0, 25.0, 20.0])
    gradient = unit / half
    expected = gradient / np.linalg.norm(gradient, axis=1)[:, None]
    assert np.abs(ellipsoid.normal(np.array(ellipsoid.center) + half * unit) - expected).max() < 1e-6
    assert np.array_equal(ball.normal([ball.center]), [[0.0, 0.0, 1.0]])


def test_turned_bodies_are_the_same_bodies():
    """Azimuth turns anticlockwise from x; tilt raises the first axis."""
    turned = Box(material=1.5, size_nm=(30.0, 60.0, 20.0), edge_radius_nm=3.0, azimuth_deg=90.0)
    assert turned.bounds_nm()[1] == pytest.approx((30.0, 15.0, 20.0))
    rod = Rod(material=1.5, diameter_nm=10.0, length_nm=60.0, azimuth_deg=40.0, tilt_deg=30.0)
    long = Ellipsoid(material=1.5, diameters_nm=(60.0, 10.0, 10.0), azimuth_deg=40.0, tilt_deg=30.0)
    f, t = np.radians(40.0), np.radians(30.0)
    axis = np.array([np.cos(t) * np.cos(f), np.cos(t) * np.sin(f), np.sin(t)])
    for body in (rod, long):
        assert np.abs(body.signed_distance(np.array(body.center) + np.outer([-30.0, 30.0], axis))).max() < 1e-9


def test_shell_grows_by_its_thickness():
    shell = BODIES["shell"]
    points = points_around(shell, 7, 30_000)
    outside = points[shell.signed_distance(points) > 0.0]
    apart = shell.core.signed_distance(outside) - shell.signed_distance(outside)
    assert np.abs(apart - 6.0).max() < 1e-9  # the disc grows exactly
    assert abs(shell.bounds_nm()[0][2]) < 1e-12 and shell.core.bounds_nm()[0][2] == pytest.approx(6.0)


@pytest.mark.parametrize("name", ["sphere", "box", "sharp box", "disc", "sharp disc", "rod", "lying rod", "standing rod"])
def test_exact_layers_have_their_thickness_everywhere(name):
    shell = Shell(around=BODIES[name], material=1.3, thickness_nm=4.0, gap_nm=2.0)
    assert np.abs(shell.core.signed_distance(surface_points(shell, 41)) - 4.0).max() < 1e-6  # chord ends, see above
    assert shell.bounds_nm()[0][2] == pytest.approx(2.0)


def test_other_layers_keep_what_is_promised():
    ellipsoid = Shell(around=BODIES["ellipsoid"], material=1.3, thickness_nm=4.0)
    thickness = ellipsoid.core.signed_distance(surface_points(ellipsoid, 41))
    assert thickness.max() == pytest.approx(4.0, abs=1e-3) and 3.6 < thickness.min()  # constant on the axes only
    cone = Shell(around=BODIES["cone"], material=1.3, thickness_nm=4.0)
    thickness = cone.core.signed_distance(surface_points(cone, 41))
    assert thickness.min() == pytest.approx(4.0, abs=1e-9) and thickness.max() > 4.5  # thicker at the rim only
    tip = np.array(cone.center) + [0.0, 0.0, cone.half_extents()[2]]
    assert cone.core.signed_distance(tip[None, :])[0] == pytest.approx(4.0)


def test_layers_thinner_than_the_smallest_gap_are_layers_not_gaps():
    shell = Shell(around=Sphere(material=1.5, diameter_nm=20.0), material=2.0, thickness_nm=0.3)
    assert shell.core.bounds_nm()[0][2] == pytest.approx(0.3)


def test_shell_of_a_shell():
    inner = Shell(around=Sphere(material=2.0, diameter_nm=40.0), material=1.5, thickness_nm=5.0)
    outer = Shell(around=inner, material=1.3, thickness_nm=3.0, gap_nm=2.0, center_xy_nm=(7.0, 0.0))
    assert outer.volume_nm3 == pytest.approx(np.pi / 6 * 56.0**3)
    assert outer.center == (7.0, 0.0, 30.0)
    assert outer.core.outer.center == outer.center and outer.core.core.center == outer.center


@pytest.mark.parametrize("name", BODIES)
def test_growing_moves_the_bounds(name):
    body = BODIES[name]
    lifted = {"gap_nm": 9.0} if name != "union" else None
    if lifted is None:
        parts = tuple(Sphere(material=1.5, diameter_nm=p.diameter_nm, center_nm=(*p.center_nm[:2], 40.0)) for p in body.parts)
        body = Union(material=1.5, parts=parts)
        grown, shift = body.grown(2.0), 0.0
    else:
        grown, shift = body.grown(2.0, **lifted), 9.0 - body.bounds_nm()[0][2] + 2.0
    (low, high), (low_grown, high_grown) = body.bounds_nm(), grown.bounds_nm()
    assert (low_grown[2], high_grown[2]) == pytest.approx((low[2] - 2.0 + shift, high[2] + 2.0 + shift), abs=0.2)  # 0.2: tilted ellipsoid
    assert grown.volume_nm3 > body.volume_nm3


def test_growing_in_place_keeps_the_centre_or_is_refused():
    ball = Sphere(material=1.5, diameter_nm=20.0, gap_nm=5.0)
    assert ball.grown(2.0).center == ball.center
    with pytest.raises(InputError, match="Lift it by 1 nm"):
        ball.grown(6.0)


@pytest.mark.parametrize(
    "name,area",
    [
        ("sphere", np.pi * 30.0**2),
        ("standing rod", 60.0 * 30.0 + np.pi * 15.0**2),
        ("sharp disc", 80.0 * 30.0),
        ("disc", 80.0 * 30.0 - (4.0 - np.pi) * 8.0**2),
        ("shell", 62.0 * 32.0 - (4.0 - np.pi) * 10.0**2),
        ("lying rod", 30.0 / np.sin(np.radians(65.0)) * 30.0 * np.pi / 4.0),  # an oblique cut of a cylinder: an ellipse
    ],
)
def test_outline_encloses_the_cut(name, area):
    x, z = BODIES[name].outline_xz()
    assert x[0] == x[-1] and z[0] == z[-1] and len(x) == len(z) == 483
    enclosed = 0.5 * np.sum(x[:-1] * z[1:] - x[1:] * z[:-1])
    assert enclosed == pytest.approx(area, rel=2e-4)  # polygon of 482 sides
    assert np.abs(BODIES[name].signed_distance(np.column_stack([x, np.full(len(x), BODIES[name].center[1]), z]))).max() < 1e-6


def test_outline_of_a_union_has_one_line_a_part():
    x, z = BODIES["union"].outline_xz(11)
    assert len(x) == 47 and np.isnan(x[23]) and np.isnan(z[23]) and np.isfinite(np.delete(x, 23)).all()


def test_union_has_gaps_between_its_pieces():
    parts = [Sphere(material=1.5, diameter_nm=10.0), Sphere(material=1.5, diameter_nm=10.0, gap_nm=20.0)]
    pair = Union(material=1.5, parts=parts)
    assert pair.chord(0.0, 0.0) == (0.0, 30.0)
    assert pair.inside([[0, 0, 5], [0, 0, 15], [0, 0, 25]]).tolist() == [True, False, True]
    low, high = pair.chord(6.0, 0.0)
    assert low > high


def test_every_word_makes_a_shape():
    assert sorted(SHAPES) == ["box", "cone", "disc", "ellipsoid", "rod", "shell", "sphere", "union"]
    assert all(SHAPES[body.word] is type(body) and type(body).__doc__ for body in BODIES.values())


def test_shapes_are_checked_without_numpy():
    """A wrong case is answered at once."""
    code = "import sys; from substrate.particle.shape import Sphere; Sphere(material=1.5, diameter_nm=9.0, center_nm=(0, 0, 5)); print('numpy' in sys.modules)"
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "False"


BALL = {"material": 1.5, "diameter_nm": 60.0}


@pytest.mark.parametrize(
    "make,words",
    [
        (lambda: Sphere(material=1.5, diameter_nm=-3.0), "sphere diameter_nm: received -3.0; allowed: a length above 0."),
        (lambda: Sphere(diameter_nm=3.0), "sphere material: received None; allowed: a material name"),
        (lambda: Sphere(material=1.5, diameter_nm=float("nan")), "a length above 0"),
        (lambda: Sphere(material=1.5, diameter_nm=True), "a length above 0"),
        (lambda: Sphere(material=1.5, diameter_nm="60"), "received '60'"),
        (lambda: Sphere(**BALL, gap_nm=-1.0), r"gap_nm: received -1.0; allowed: 0 \(touching\) or a height above the surface"),
        (lambda: Sphere(**BALL, gap_nm="2"), "gap_nm: received '2'"),
        (lambda: Sphere(**BALL, gap_nm=0.2), "at least 0.5 nm. The gap is 0.2 nm; narrower ones need non-local optics"),
        (lambda: Sphere(**BALL, center_nm=(0, 0, 30.3)), r"center_nm: received \(0, 0, 30.3\); .* The gap is 0.3 nm"),
        (lambda: Sphere(**BALL, center_nm=(0, 0, 20)), "Lift it by 10 nm: its lowest point lies below the surface"),
        (lambda: Sphere(**BALL, center_nm=(0, 0)), "three finite numbers"),
        (lambda: Sphere(**BALL, center_nm=("a", 0, 40)), "three finite numbers"),
        (lambda: Sphere(**BALL, center_xy_nm=3.0), "two finite numbers"),
        (lambda: Sphere(**BALL, center_nm=(0, 0, 40), gap_nm=3.0), "one way to give the place. Leave out center_nm, or gap_nm"),
        (lambda: Ellipsoid(material=1.5, diameters_nm=(10, 10)), r"three lengths above 0 \(a, b, c\)"),
        (lambda: Ellipsoid(material=1.5, diameters_nm=(10, 10, 10), tilt_deg=float("inf")), "tilt_deg: received inf; allowed: a finite number"),
        (lambda: Box(material=1.5, size_nm=10), "size_nm: received 10; allowed: three lengths above 0"),
        (lambda: Box(material=1.5, size_nm=(10, 0, 10)), "three lengths above 0"),
        (lambda: Box(material=1.5, size_nm=(10, 10, 4), edge_radius_nm=3.0), r"0 up to half the shortest edge \(2 nm\)"),
        (lambda: Box(material=1.5, size_nm=(10, 10, 4), edge_radius_nm=-1.0), "edge_radius_nm: received -1.0"),
        (lambda: Disc(material=1.5, diameter_nm=10, height_nm=4, rim_radius_nm=3.0), "half the smaller of diameter and height"),
        (lambda: Rod(material=1.5, diameter_nm=10, length_nm=4), r"at least the diameter \(10 nm\). For a flat body take a disc"),
        (lambda: Cone(material=1.5, base_diameter_nm=10, height_nm=20, tip_radius_nm=6), r"below half of base diameter and of height \(5 nm\)"),
        (lambda: Cone(material=1.5, base_diameter_nm=10, height_nm=20, tip_radius_nm=0.0), "tip_radius_nm: received 0.0"),
        (lambda: Cone(material=1.5, base_diameter_nm=10, height_nm=20, tip_radius_nm=2, points="left"), "'up' or 'down'"),
        (lambda: Shell(around=BODIES["union"], material=1.5, thickness_nm=2), "Put shells around the parts"),
        (lambda: Shell(around="gold", material=1.5, thickness_nm=2), "shell around: received 'gold'"),
        (lambda: Shell(around=BODIES["sphere"], material=1.5, thickness_nm=0), "shell thickness_nm: received 0"),
        (lambda: Shell(around=BODIES["sphere"], material=1.5, thickness_nm=5, center_nm=(0, 0, 30)), "shell center_nm: .* Lift it by 5 nm"),
        (lambda: Union(material=1.5, parts=[]), "one or more shapes"),
        (lambda: Union(material=1.5, parts=BODIES["sphere"]), "a list of one or more shapes"),
        (lambda: Union(material=1.5, parts=[BODIES["shell"]]), "union parts: received 'shell'"),
        (lambda: Union(material=1.5, parts=[BODIES["sphere"]], gap_nm=4.0), "Give each part its gap_nm"),
    ],
)
def test_refusals(make, words):
    with pytest.raises(InputError, match=words):
        make()
