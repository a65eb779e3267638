"""Cells: volumes, shares, normals, and where the grid stands."""

import numpy as np
import pytest

from substrate.errors import InputError
from substrate.particle.cells import mesh, reference_extent_nm
from substrate.particle.shape import Box, Cone, Disc, Ellipsoid, Rod, Shell, Sphere, Union
from tests.particle.test_shapes import BODIES, _lens


@pytest.mark.parametrize("name", [name for name in BODIES if name != "union"])
@pytest.mark.parametrize("across", [10, 17.3])
def test_volume(name, across):
    """The sum of the shares is the volume to 1e-5; 5e-5 where vertical walls put one quadrature error into a whole column of cells."""
    body = BODIES[name]
    cells = mesh([body], reference_extent_nm([body]) / across)
    found = cells.fill.sum() * cells.cell_nm**3 / body.volume_nm3 - 1.0
    walls = name in ("disc", "sharp disc", "standing rod", "box", "shell")
    assert abs(found) < (6e-5 if walls else 1e-5)


def test_volume_of_a_union_of_overlapping_balls():
    cells = mesh([BODIES["union"]], 1.5)
    expected = BODIES["union"].volume_nm3 - _lens(20.0, 15.0, np.sqrt(22.0**2 + 5**2 + 5**2))
    # kinks where the balls meet and silhouettes without fitted nodes: 24 x 24 nodes leave 1e-4
    assert abs(cells.fill.sum() * cells.cell_nm**3 / expected - 1.0) < 1e-4


def test_centre_of_mass_of_all_cells_is_that_of_the_body():
    for body in (BODIES["sphere"], BODIES["ellipsoid"], BODIES["lying rod"]):
        cells = mesh([body], reference_extent_nm([body]) / 9.0)
        centre = (cells.fill[:, None] * cells.centroid_nm).sum(axis=0) / cells.fill.sum()
        assert np.abs(centre - body.center).max() < 2e-4 * cells.cell_nm + 1e-9  # quadrature


def test_shares_of_a_shell_add_up():
    core, thickness = 50.0, 10.0
    shell = Shell(around=Sphere(material="gold", diameter_nm=core), material="silica", thickness_nm=thickness)
    cells = mesh([shell], 3.1)
    inner = cells.fraction[:, cells.materials.index("gold")].sum() * cells.cell_nm**3
    layer = cells.fraction[:, cells.materials.index("silica")].sum() * cells.cell_nm**3
    assert inner == pytest.approx(np.pi / 6 * core**3, rel=1e-5)
    assert layer == pytest.approx(np.pi / 6 * ((core + 2 * thickness) ** 3 - core**3), rel=1e-5)
    assert cells.fraction.min() >= 0.0 and cells.fill.max() <= 1.0 + 1e-9
    mixed = (cells.fraction > 0.0).sum(axis=1) == 2
    assert mixed.any() and np.abs(np.linalg.norm(cells.normal[mixed], axis=1) - 1.0).max() < 1e-9


def test_normals_only_where_media_meet_and_radial_on_a_sphere():
    body = BODIES["sphere"]
    cells = mesh([body], 4.0)
    full = cells.fill > 1.0 - 1e-9
    assert not cells.normal[full].any()
    radial = cells.centers_nm[~full] - np.array(body.center)
    radial /= np.linalg.norm(radial, axis=1)[:, None]
    assert np.abs(cells.normal[~full] - radial).max() < 1e-5  # central differences


@pytest.mark.parametrize("h", [3.0, 4.7])
def test_floor_is_flush_with_the_lowest_point_and_the_box_is_centred(h):
    bodies = [Sphere(material=1.5, diameter_nm=30.0, gap_nm=2.0), Box(material=2.0, size_nm=(20, 20, 50), gap_nm=5.0, center_xy_nm=(60.0, 0.0))]
    cells = mesh(bodies, h)
    assert cells.origin_nm[2] - 0.5 * h == pytest.approx(2.0)
    middle = cells.origin_nm + 0.5 * h * (np.array(cells.shape) - 1)
    assert middle[0] == pytest.approx(0.5 * (-15.0 + 70.0)) and middle[1] == pytest.approx(0.0)
    assert (cells.centers_nm[:, 2] > 2.0).all()
    assert cells.materials == (1.5, 2.0)
    assert cells.fraction[:, 0].sum() * h**3 == pytest.approx(np.pi / 6 * 30**3, rel=1e-5)
    assert cells.fraction[:, 1].sum() * h**3 == pytest.approx(20 * 20 * 50, rel=1e-5)


def test_a_box_that_fits_has_no_boundary_cells():
    cells = mesh([Box(material=1.5, size_nm=(12.0, 15.0, 9.0))], 3.0)
    assert cells.shape == (4, 5, 3) and len(cells.index) == 60
    assert (cells.fill == 1.0).all() and not cells.normal.any()


def test_symmetry_of_a_sphere():
    cells = mesh([Sphere(material=1.5, diameter_nm=30.0)], 30.0 / 8)
    box = np.zeros(cells.shape)
    box[tuple(cells.index.T)] = cells.fill
    for mirrored in (box[::-1], box[:, ::-1], box[:, :, ::-1]):
        assert np.abs(mirrored - box).max() < 1e-9  # rounding, and bisection to 1e-13 of a cell
    for turned in (box.swapaxes(0, 1), box.swapaxes(0, 2)):
        assert np.abs(turned - box).max() < 2e-3  # the axes are integrated in different ways: error of the worst single cell


def test_overlapping_particles_are_refused_and_touching_ones_not():
    a = Sphere(material=1.5, diameter_nm=30.0)
    with pytest.raises(InputError, match="do not overlap"):
        mesh([a, Sphere(material=2.0, diameter_nm=30.0, center_nm=(20.0, 0.0, 15.0))], 3.0)
    touching = mesh([a, Sphere(material=2.0, diameter_nm=30.0, center_nm=(30.0, 0.0, 15.0))], 3.0)
    assert touching.fill.max() <= 1.0 + 1e-3


def test_extent_is_that_of_the_smallest_particle():
    bodies = [Disc(material=1.5, diameter_nm=80.0, height_nm=12.0), Cone(material=1.5, base_diameter_nm=30, height_nm=40, tip_radius_nm=4)]
    assert reference_extent_nm(bodies) == pytest.approx(12.0)
    assert reference_extent_nm([Ellipsoid(material=1.5, diameters_nm=(30, 20, 10))]) == pytest.approx(10.0)
    assert reference_extent_nm([Rod(material=1.5, diameter_nm=10, length_nm=30)]) == pytest.approx(10.0)
    assert reference_extent_nm([Union(material=1.5, parts=[BODIES["sphere"]])]) == pytest.approx(60.0)
