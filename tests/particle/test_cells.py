"""Cells: volumes, shares, moments, normals, and where the grid stands."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from substrate.errors import InputError
from substrate.medium.material import material
from substrate.particle.cells import mesh, reference_extent_nm
from substrate.particle.shape import Box, Cone, Disc, Ellipsoid, Rod, Shell, Sphere, Union
from tests.particle.bodies import BODIES, VOLUMES, convex_bodies, lens


def volume(cells) -> float:
    return cells.fill.sum() * cells.cell_nm**3


@pytest.mark.parametrize("name", BODIES)
@pytest.mark.parametrize("across", [8, 11.7, 15])
def test_volume(name, across):
    """The sum of the shares is the volume. 1e-6 is what the quadrature leaves at tips and small roundings, and where parts of a union meet."""
    body = BODIES[name]
    cells = mesh([body], reference_extent_nm([body]) / across)
    assert volume(cells) == pytest.approx(VOLUMES[name], rel=1e-6)


@pytest.mark.parametrize("across", [8, 16, 24, 32, 48])
def test_volume_of_a_sphere(across):
    """Chord times node spacing is a polynomial of sines under the substitution: nothing but rounding and the bisections' 6e-11 is left."""
    assert volume(mesh([BODIES["sphere"]], 60.0 / across)) == pytest.approx(VOLUMES["sphere"], rel=1e-9)


@settings(max_examples=25, deadline=None)
@given(body=convex_bodies(), across=st.floats(8, 14))
def test_volume_of_any_convex_body(body, across):
    """1e-5 is the promise; walls that are nearly but not quite vertical come up to 7e-6."""
    cells = mesh([body], reference_extent_nm([body]) / across)
    assert volume(cells) == pytest.approx(body.volume_nm3, rel=1e-5)
    assert 0.0 < cells.fill.min() and cells.fill.max() <= 1.0
    normal = np.linalg.norm(cells.normal, axis=1)
    assert np.array_equal(normal > 0.5, cells.fill < 1.0) and (np.abs(normal[normal > 0.5] - 1.0) < 1e-12).all()
    assert (np.abs(cells.centroid_nm - cells.centers_nm) <= 0.5 * cells.cell_nm * (1.0 + 1e-9)).all()


@pytest.mark.parametrize(
    "parts",
    [
        [Disc(material=1, diameter_nm=40.0, height_nm=20.0), Disc(material=1, diameter_nm=30.0, height_nm=20.0, center_nm=(25.0, 3.0, 10.0))],
        [Rod(material=1, diameter_nm=20.0, length_nm=70.0, azimuth_deg=30.0), Rod(material=1, diameter_nm=20.0, length_nm=70.0, azimuth_deg=-30.0)],
        [Box(material=1, size_nm=(60, 20, 25)), Box(material=1, size_nm=(20, 60, 25)), Sphere(material=1, diameter_nm=35.0)],
    ],
)
def test_volume_of_overlapping_parts(parts):
    """Against smaller cells, of which fewer hold an overlap: kinks where the parts' surfaces cross leave up to 7e-6 at 8 across."""
    body = Union(material=1.5, parts=parts)
    coarse, fine = (volume(mesh([body], 20.0 / across)) for across in (8.1, 12.3))
    assert coarse == pytest.approx(fine, rel=1e-5)
    assert fine < 0.97 * body.volume_nm3  # they do overlap


def test_a_union_is_full_where_its_parts_together_are():
    bricks = [Box(material=1, size_nm=(11.0, 20.0, 20.0), center_nm=(x, 0.0, 10.0)) for x in (-5.0, 5.0)]
    cells = mesh([Union(material=1.5, parts=bricks)], 3.0)
    whole = mesh([Box(material=1.5, size_nm=(21.0, 20.0, 20.0))], 3.0)
    assert np.array_equal(cells.index, whole.index)
    assert np.abs(cells.fill - whole.fill).max() < 1e-9 and not cells.normal[whole.fill == 1.0].any()
    assert np.abs(cells.centroid_nm - whole.centroid_nm).max() < 1e-8


def test_cells_that_two_balls_fill_together_are_full():
    balls = [Sphere(material=1.5, diameter_nm=40.0), Sphere(material=1.5, diameter_nm=36.0, center_nm=(20.0, 5.0, 21.0))]
    body = Union(material=1.5, parts=balls)
    cells = mesh([body], 1.7)
    offsets = 0.55 * 1.7 * np.stack(np.meshgrid(*[np.linspace(-1.0, 1.0, 5)] * 3), axis=-1).reshape(-1, 3)  # a little beyond the cell

    def filled_by(shape):
        return shape.inside((cells.centers_nm[:, None, :] + offsets).reshape(-1, 3)).reshape(len(cells.index), -1).all(axis=1)

    together = filled_by(body) & ~np.any([filled_by(part) for part in body.parts], axis=0)
    assert together.sum() > 5
    assert (cells.fill[together] == 1.0).all() and not cells.normal[together].any()


@pytest.mark.parametrize("name", [name for name in BODIES if name not in ("cone", "hanging cone", "union")])
def test_centre_of_mass_of_all_cells_is_that_of_the_body(name):
    body = BODIES[name]
    cells = mesh([body], reference_extent_nm([body]) / 9.0)
    centre = (cells.fill[:, None] * cells.centroid_nm).sum(axis=0) / cells.fill.sum()
    assert np.abs(centre - body.center).max() < 1e-6 * cells.cell_nm  # as the volumes


def test_centre_of_mass_of_a_cone_is_a_quarter_up():
    sharp = Cone(material=1.5, base_diameter_nm=60.0, height_nm=60.0, tip_radius_nm=0.01)
    cells = mesh([sharp], 6.0)
    centre = (cells.fill[:, None] * cells.centroid_nm).sum(axis=0) / cells.fill.sum()
    assert centre == pytest.approx([0.0, 0.0, 15.0], abs=2e-2)  # the tip of 0.01 nm makes the cone 0.013 nm blunter than sharp


def test_moments_of_a_single_cell():
    """A quarter of a ball of radius 1 in a cell of edge 1: the centroid is 3/8 of the radius from each flat side."""
    cells = mesh([Sphere(material=1.5, diameter_nm=2.0)], 1.0)
    assert len(cells.index) == 8 and np.abs(cells.fill - np.pi / 6.0).max() < 1e-9
    assert np.abs(np.abs(cells.centroid_nm - [0.0, 0.0, 1.0]) - 0.375).max() < 1e-9


def test_shares_of_a_shell_add_up():
    core, thickness = 50.0, 10.0
    shell = Shell(around=Sphere(material="gold", diameter_nm=core), material="silica", thickness_nm=thickness)
    cells = mesh([shell], 3.1)
    assert cells.materials == ("silica", "gold")
    layer, inner = cells.fraction.sum(axis=0) * cells.cell_nm**3
    assert inner == pytest.approx(np.pi / 6 * core**3, rel=1e-8)  # two spheres
    assert layer == pytest.approx(np.pi / 6 * ((core + 2 * thickness) ** 3 - core**3), rel=1e-8)
    assert cells.fraction.min() >= 0.0 and cells.fill.max() <= 1.0
    mixed = (cells.fraction > 0.0).sum(axis=1) == 2
    assert mixed.any() and np.abs(np.linalg.norm(cells.normal[mixed], axis=1) - 1.0).max() < 1e-12
    buried = mixed & (cells.fill == 1.0)
    assert buried.any() and np.abs(cells.centroid_nm - cells.centers_nm)[buried].max() < 1e-8


def test_a_shell_thinner_than_the_cells_has_no_negative_shares():
    shell = Shell(around=Disc(material="gold", diameter_nm=60.0, height_nm=20.0, rim_radius_nm=4.0), material="silica", thickness_nm=0.7)
    cells = mesh([shell], 3.3)
    assert cells.fraction.min() >= 0.0
    assert np.abs(cells.fill - mesh([shell.outer], 3.3).fill).max() < 1e-12  # the core does not stick out of the whole
    expected = shell.volume_nm3 - shell.core.volume_nm3
    assert cells.fraction[:, 0].sum() * 3.3**3 == pytest.approx(expected, rel=1e-6)  # two volumes of which each is good to 1e-9, ten times as large as the layer


def test_layers_of_one_material_are_one_material():
    shell = Shell(around=Sphere(material=1.5, diameter_nm=30.0), material=1.5, thickness_nm=5.0)
    cells = mesh([shell], 4.0)
    plain = mesh([Sphere(material=1.5, diameter_nm=40.0)], 4.0)
    assert cells.materials == (1.5,) and np.abs(cells.fill - plain.fill).max() < 1e-9
    assert np.abs(cells.normal - plain.normal).max() < 1e-9  # centres differ by rounding


def test_equal_material_objects_are_one_material():
    balls = [Sphere(material=material("gold"), diameter_nm=20.0, center_xy_nm=(x, 0.0)) for x in (0.0, 30.0)]
    assert mesh(balls, 4.0).materials == (material("gold"),)


def test_normals_only_where_media_meet_and_radial_on_a_sphere():
    body = BODIES["sphere"]
    cells = mesh([body], 4.0)
    full = cells.fill == 1.0
    assert full.any() and not cells.normal[full].any()
    radial = cells.centers_nm[~full] - np.array(body.center)
    radial /= np.linalg.norm(radial, axis=1)[:, None]
    assert np.abs(cells.normal[~full] - radial).max() < 1e-7  # central differences over 1e-4 of the radius


@pytest.mark.parametrize("turn", [1, -1])
def test_normal_is_that_of_the_nearest_surface(turn):
    """Two walls 2 nm apart in one layer of cells, whose centres lie nearer to the left one."""
    left = Box(material=1.5, size_nm=(20.0, 30.0, 30.0), center_xy_nm=(-10.0, 0.0))
    right = Box(material=2.0, size_nm=(28.0, 30.0, 30.0), center_xy_nm=(16.0, 0.0))
    cells = mesh([left, right][::turn], 4.6)
    both = (cells.fraction > 0.0).all(axis=1)
    assert both.sum() == 49 and cells.centers_nm[both, 0] == pytest.approx(0.4)
    inner = both & (np.abs(cells.centers_nm[:, 1]) < 12.0) & (np.abs(cells.centers_nm[:, 2] - 15.0) < 12.0)  # away from the edges
    assert inner.any() and np.abs(cells.normal[inner] - [1.0, 0.0, 0.0]).max() < 1e-9


def test_normals_inside_of_a_shell_are_the_core_s():
    shell = Shell(around=Box(material=2.0, size_nm=(40.0, 40.0, 40.0)), material=1.5, thickness_nm=8.0)
    cells = mesh([shell], 5.5)
    buried = (cells.fraction > 0.0).all(axis=1) & (cells.fill == 1.0)
    assert buried.sum() > 100
    assert np.abs(cells.normal[buried] - shell.core.normal(cells.centers_nm[buried])).max() < 1e-12


@pytest.mark.parametrize("h", [3.0, 4.7])
def test_floor_is_flush_with_the_lowest_point_and_the_box_is_centred(h):
    bodies = [Sphere(material=1.5, diameter_nm=30.0, gap_nm=2.0), Box(material=2.0, size_nm=(20, 20, 50), gap_nm=5.0, center_xy_nm=(60.0, 0.0))]
    cells = mesh(bodies, h)
    assert cells.origin_nm[2] - 0.5 * h == pytest.approx(2.0)
    assert cells.shape == tuple(int(np.ceil(extent / h)) for extent in (85.0, 30.0, 53.0))
    middle = cells.origin_nm + 0.5 * h * (np.array(cells.shape) - 1)
    assert middle[0] == pytest.approx(0.5 * (-15.0 + 70.0)) and middle[1] == pytest.approx(0.0)
    assert (cells.centers_nm[:, 2] > 2.0).all()
    assert cells.materials == (1.5, 2.0)
    flat = np.ravel_multi_index(tuple(cells.index.T), cells.shape)
    assert (np.diff(flat) > 0).all()  # C order
    assert cells.fraction[:, 0].sum() * h**3 == pytest.approx(np.pi / 6 * 30**3, rel=1e-9)
    assert cells.fraction[:, 1].sum() * h**3 == pytest.approx(20 * 20 * 50, rel=1e-9)


def test_a_box_that_fits_has_no_boundary_cells():
    cells = mesh([Box(material=1.5, size_nm=(12.0, 15.0, 9.0), center_xy_nm=(0.1, 0.7), gap_nm=0.6)], 3.0)
    assert cells.shape == (4, 5, 3) and len(cells.index) == 60
    assert (cells.fill == 1.0).all() and not cells.normal.any()


def test_symmetry_of_a_sphere():
    cells = mesh([Sphere(material=1.5, diameter_nm=30.0)], 30.0 / 8)
    box = np.zeros(cells.shape)
    box[tuple(cells.index.T)] = cells.fill
    for mirrored in (box[::-1], box[:, ::-1], box[:, :, ::-1]):
        assert np.abs(mirrored - box).max() < 1e-9  # rounding and bisection
    for turned in (box.swapaxes(0, 1), box.swapaxes(0, 2)):
        # the axes are integrated in different ways: shows the error of single cells, 1e-4 in the mean, from kinks at floors and ceilings
        assert np.abs(turned - box).max() < 1e-3


def test_overlapping_particles_are_refused_and_touching_ones_not():
    ball = Sphere(material=1.5, diameter_nm=30.0)

    def beside(x: float):
        return [ball, Sphere(material=2.0, diameter_nm=30.0, center_nm=(x, 0.0, 15.0))]

    for x in (0.0, 20.0, 29.5):
        with pytest.raises(InputError, match="'particles 1 and 2, which overlap'; allowed: particles that do not overlap"):
            mesh(beside(x), 3.1)
    with pytest.raises(InputError, match="a shell of a body within another"):
        mesh([ball, Sphere(material=2.0, diameter_nm=10.0, center_nm=(0.0, 0.0, 15.0))], 3.1)
    touching = mesh(beside(30.0), 3.1)
    assert touching.fill.max() <= 1.0


@pytest.mark.parametrize("azimuth", [0.0, 33.0])
def test_bodies_that_share_a_face_touch(azimuth):
    """Walls that meet within cells, and a lid on top."""
    f = np.radians(azimuth)
    step = 10.0 * np.array([np.cos(f), np.sin(f)])
    boxes = [Box(material=m, size_nm=(20, 30, 17), azimuth_deg=azimuth, center_xy_nm=tuple(s * step)) for m, s in ((1.5, -1), (2.0, 1))]
    lid = Box(material=3.0, size_nm=(40, 30, 10), azimuth_deg=azimuth, gap_nm=17.0)
    cells = mesh([*boxes, lid], 4.3)
    assert cells.fraction.sum(axis=0) * 4.3**3 == pytest.approx([10200.0, 10200.0, 12000.0], rel=1e-6)
    assert cells.fill.max() <= 1.0


@pytest.mark.parametrize("h", [0.0, -1.0, float("nan"), float("inf"), "3"])
def test_cell_sizes_that_are_none(h):
    with pytest.raises(InputError, match="cell_nm: received .*; allowed: a length above 0"):
        mesh([BODIES["sphere"]], h)


def test_nothing_to_mesh_and_cells_too_large():
    with pytest.raises(InputError, match="at least one particle"):
        mesh([], 3.0)
    with pytest.raises(InputError, match="at least one cell"):
        mesh([BODIES["sphere"]], 1e5)


def test_extent_is_that_of_the_smallest_particle():
    bodies = [Disc(material=1.5, diameter_nm=80.0, height_nm=12.0), Cone(material=1.5, base_diameter_nm=30, height_nm=40, tip_radius_nm=4)]
    assert reference_extent_nm(bodies) == pytest.approx(12.0)
    assert reference_extent_nm([Ellipsoid(material=1.5, diameters_nm=(30, 20, 10))]) == pytest.approx(10.0)
    assert reference_extent_nm([Rod(material=1.5, diameter_nm=10, length_nm=30)]) == pytest.approx(10.0)
    assert reference_extent_nm([Union(material=1.5, parts=[BODIES["sphere"]])]) == pytest.approx(60.0)


def test_lens_formula_at_its_limits():
    assert lens(20.0, 15.0, 35.0) == 0.0
    assert lens(20.0, 20.0, 1e-9) == pytest.approx(4.0 / 3.0 * np.pi * 20.0**3)
