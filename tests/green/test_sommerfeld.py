"""The reflected tensor: printed decay rates, limits, laws, and the table against quadrature."""

import numpy as np
import pytest

from substrate.errors import OutOfRange
from substrate.green.image import image_scalars, image_strength
from substrate.green.sommerfeld import reflected_scalars, remainder, tail_start, tensor_from_scalars
from substrate.green.table import build_table
from substrate.medium.stack import Layers

STACKS = {
    "glass": Layers(633.0, (1.0, 1.5)),
    "silicon": Layers(633.0, (1.0, 3.88 + 0.02j)),
    "silver": Layers(633.0, (1.0, np.sqrt(-18 + 0.5j))),
    "near resonance": Layers(633.0, (1.0, np.sqrt(-2 + 0.001j))),
    "waveguide": Layers(633.0, (1.0, 2.0, 1.5), (200.0,)),
    "thin silver": Layers(633.0, (1.0, np.sqrt(-18 + 0.5j), 1.5), (5.0,)),
    "silver film": Layers(633.0, (1.0, np.sqrt(-18 + 0.5j), 1.5), (50.0,)),
    "oxide on silicon": Layers(633.0, (1.0, 1.457, 3.88 + 0.02j), (100.0,)),
    "four films": Layers(633.0, (1.0, 1.46, 2.0, 1.46, np.sqrt(-18 + 0.5j), 3.88 + 0.02j), (100.0, 50.0, 20.0, 30.0)),
}


@pytest.mark.parametrize("name", STACKS)
def test_two_paths_agree(name):
    """The integrals may not depend on the path: depth, break points and panels all change with the fineness."""
    layers = STACKS[name]
    for rho, height in ((0.0, 4.0), (25.0, 3.0), (400.0, 60.0), (3000.0, 500.0)):
        _, difference = reflected_scalars(layers, rho, height, 1e-9)
        assert difference <= 1e-9


@pytest.mark.parametrize("name", STACKS)
def test_image_taken_out_or_not(name):
    """Extraction in closed form changes nothing: catches a wrong factor in either."""
    layers = STACKS[name]
    a = tail_start(layers)
    for rho, height in ((0.0, 20.0), (35.0, 12.0), (300.0, 80.0)):
        point = (np.array([rho]), np.array([height]))
        whole = remainder(layers, *point, a, 1.5, extract=False)[:, 0, 0]
        split = remainder(layers, *point, a, 1.5)[:, 0, 0] + image_scalars(image_strength(layers), layers.k_host, rho, height)
        assert np.abs(whole - split).max() < 1e-8 * np.abs(whole).max()  # quadrature; extraction amplifies it near e1 + e2 = 0


def test_perfect_mirror_gives_the_image_dipole():
    """Very high |eps|: the reflected tensor tends to that of a mirrored dipole in free space, error of order 1/|n|."""
    from substrate.green.free_space import point_tensor

    layers = Layers(600.0, (1.0, 1e6j))
    rho, height = 70.0, 110.0
    scalars, _ = reflected_scalars(layers, rho, height, 1e-9)
    found = tensor_from_scalars(scalars, 1.0, 0.0)
    mirrored = point_tensor(layers.k_host, np.array([rho, 0.0, height])) @ np.diag([-1.0, -1.0, 1.0])
    assert np.abs(found - mirrored).max() < 1e-5 * np.abs(mirrored).max()


def test_static_limit_of_a_small_distance():
    """k R -> 0: the electrostatic image, beta (3 R R - 1)/(4 pi R^3) of the mirrored dipole."""
    from substrate.green.free_space import point_tensor

    layers = Layers(1e7, (1.0, 2.0 + 0.5j))
    beta = image_strength(layers)
    scalars, _ = reflected_scalars(layers, 3.0, 5.0, 1e-9)
    found = tensor_from_scalars(scalars, 0.6, 0.8)
    mirrored = point_tensor(1e-12, np.array([1.8, 2.4, 5.0])) @ np.diag([-1.0, -1.0, 1.0])
    assert np.abs(found - beta * mirrored).max() < 1e-4 * np.abs(mirrored).max()  # corrections of order k R = 4e-6 with a log


def test_reciprocity_of_the_tensor():
    """G(r, r') = G(r', r)^T: the azimuth turns by half a circle."""
    scalars, _ = reflected_scalars(STACKS["four films"], 130.0, 70.0)
    there, back = tensor_from_scalars(scalars, 0.6, 0.8), tensor_from_scalars(scalars, -0.6, -0.8)
    assert np.abs(there - back.T).max() < 1e-15 * np.abs(there).max()


def test_nothing_is_reflected_by_the_hosts_own_index():
    uniform = Layers(600.0, (1.33, 1.33, 1.33), (40.0,))
    assert not np.any(reflected_scalars(uniform, 10.0, 10.0)[0])
    table = build_table(uniform, 100.0, 2.0, 50.0)
    assert not np.any(table.scalars([0.0, 30.0], [3.0, 40.0])) and table.error == 0.0
    nearly = Layers(600.0, (1.33, 1.33, 1.33 + 1e-9), (40.0,))
    half_space = Layers(600.0, (1.33, 1.5))
    small = np.abs(reflected_scalars(nearly, 10.0, 10.0, 1e-4)[0]).max()
    assert small < 1e-8 * np.abs(reflected_scalars(half_space, 10.0, 10.0)[0]).max()


def test_a_film_of_the_hosts_index_moves_the_half_space_down():
    film, bare = Layers(600.0, (1.33, 1.33, 0.2 + 3.0j), (45.0,)), Layers(600.0, (1.33, 0.2 + 3.0j))
    with_film, _ = reflected_scalars(film, 20.0, 30.0)
    without, _ = reflected_scalars(bare, 20.0, 120.0)
    assert np.abs(with_film - without).max() < 1e-9 * np.abs(without).max()  # both to 1e-10


@pytest.mark.parametrize("name", STACKS)
def test_table_meets_its_goal_and_its_estimate(name):
    """Error on random points against quadrature: at most 1e-8 (1e-6 near e1 + e2 = 0), and within 30 times the table's own figure."""
    layers = STACKS[name]
    box = (300.0, 4.0, 420.0)
    table = build_table(layers, *box)
    rng = np.random.default_rng(5)
    worst = 0.0
    for rho, t in zip(box[0] * rng.uniform(0, 1, 40) ** 2, rng.uniform(0, 1, 40)):
        height = box[1] * (box[2] / box[1]) ** t
        exact, _ = reflected_scalars(layers, rho, height, 1e-7)
        worst = max(worst, np.abs(table.scalars(rho, height)[:, 0, 0] - exact).max() / np.abs(exact).max())
    assert worst < (1e-6 if name == "near resonance" else 1e-8)
    assert worst < 30.0 * table.error


def test_table_refuses_points_outside_of_its_box():
    table = build_table(STACKS["glass"], 100.0, 5.0, 80.0)
    for rho, height in ((120.0, 20.0), (50.0, 4.0), (50.0, 90.0)):
        with pytest.raises(OutOfRange, match="rho up to 100 nm and z . z. from 5 to 80 nm"):
            table.scalars(rho, height)


def test_missed_poles_are_noticed():
    """The wedge right of the start must hold no pole: under n = 1.4 with eps = -2 + 0.001i one lies near 10 k0."""
    layers = Layers(633.0, (1.4, np.sqrt(-2 + 0.001j)))
    pole = np.sqrt(1.96 * (-2 + 0.001j) / (1.96 - 2 + 0.001j))
    assert tail_start(layers) > pole.real * layers.k0


@pytest.mark.parametrize("name,rho,height", [("glass", 60.0, 30.0), ("near resonance", 20.0, 8.0), ("waveguide", 150.0, 90.0), ("silver film", 0.0, 5.0)])
def test_quadrature_and_table_against_multiple_precision(name, rho, height):
    """A second implementation: transfer matrices and its own path in mpmath, scalars of G, so that k^2 has to be added."""
    from tests.reference.multilayer import LayerStack
    from tests.reference.reflected_tensor import reflected_scalars as reference

    layers = STACKS[name]
    exact = reference(LayerStack(layers.index, layers.thickness_nm, layers.wavelength_nm), rho, height)
    exact = layers.k_host**2 * np.array([complex(value) for value in exact])
    found, _ = reflected_scalars(layers, rho, height, 1e-9)
    assert np.abs(found - exact).max() < 1e-9 * np.abs(exact).max()  # the goal of the quadrature
    table = build_table(layers, 200.0, 4.0, 120.0)
    assert np.abs(table.scalars(rho, height)[:, 0, 0] - exact).max() < 1e-7 * np.abs(exact).max()  # the table's, with room near resonance
