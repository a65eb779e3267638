"""The FFT product against a dense matrix written out pair by pair, with and without the stack."""

import numpy as np
import pytest

from substrate.green.free_space import filtered_scalars
from substrate.green.sommerfeld import tensor_from_scalars
from substrate.green.table import build_table
from substrate.medium.stack import Layers
from substrate.particle.cells import mesh
from substrate.particle.shape import Ellipsoid, Sphere
from substrate.solve import _kernels
from substrate.solve.interaction import Interaction

LAYERS = Layers(500.0, (1.1, 0.3 + 2.5j, 1.5), (30.0,))
ROUNDING = 1e-12  # sums of a few hundred terms and FFTs of a few hundred points in double precision


def dense(cells, layers, table) -> np.ndarray:
    """T as a matrix (3n, 3n), one pair of cells at a time."""
    k, h = layers.k_host, cells.cell_nm
    centres = cells.centers_nm
    n = len(centres)
    matrix = np.zeros((n, 3, n, 3), dtype=complex)
    for a in range(n):
        for b in range(n):
            apart = centres[a] - centres[b]
            distance = np.linalg.norm(apart)
            if a != b:
                radial, lateral = filtered_scalars(k, np.pi / h, distance)
                unit = apart / distance
                matrix[a, :, b, :] += lateral * np.eye(3) + (radial - lateral) * np.outer(unit, unit)
            if table is not None:
                rho = np.hypot(apart[0], apart[1])
                cosine, sine = (apart[0] / rho, apart[1] / rho) if rho > 1e-9 else (1.0, 0.0)
                scalars = table.scalars(rho, centres[a, 2] + centres[b, 2])[:, 0, 0]
                matrix[a, :, b, :] += tensor_from_scalars(scalars, cosine, sine)
    return matrix.reshape(3 * n, 3 * n)


@pytest.fixture(scope="module")
def cells():
    """A small body with three different extents, one of them an odd number of cells."""
    return mesh([Ellipsoid(material=2.0, diameters_nm=(18.0, 21.0, 12.0), gap_nm=1.0)], 3.0)


@pytest.fixture(scope="module")
def table():
    return build_table(LAYERS, 40.0, 3.0, 40.0)


@pytest.mark.parametrize("over_stack", [False, True])
def test_product_equals_dense_matrix(cells, table, over_stack):
    used = table if over_stack else None
    matrix = dense(cells, LAYERS, used)
    rng = np.random.default_rng(3)
    dipoles = rng.standard_normal((len(cells.index), 3)) + 1j * rng.standard_normal((len(cells.index), 3))
    expected = (matrix @ dipoles.ravel()).reshape(-1, 3)
    found = Interaction(cells, LAYERS.k_host, used).apply(dipoles)
    assert np.abs(found - expected).max() < ROUNDING * np.abs(expected).max()


def test_single_precision_product(cells, table):
    """Half the memory for an error of some units in the last place of a single."""
    rng = np.random.default_rng(5)
    dipoles = rng.standard_normal((len(cells.index), 3)) + 1j * rng.standard_normal((len(cells.index), 3))
    double, single = (Interaction(cells, LAYERS.k_host, table, precision).apply(dipoles) for precision in (np.complex128, np.complex64))
    error = np.abs(single - double).max() / np.abs(double).max()
    assert 1e-9 < error < 3e-6


def test_operator_is_complex_symmetric(cells, table):
    """a^T T b = b^T T a: reciprocity, which the iteration relies on."""
    product = Interaction(cells, LAYERS.k_host, table)
    rng = np.random.default_rng(4)
    a, b = (rng.standard_normal((len(cells.index), 3)) + 1j * rng.standard_normal((len(cells.index), 3)) for _ in range(2))
    left, right = (a * product.apply(b)).sum(), (b * product.apply(a)).sum()
    assert abs(left - right) < ROUNDING * abs(left)


def test_single_cell_sees_only_its_own_reflection(table):
    """A box of one cell: the direct self term is left out, the reflected one is the tensor at rho = 0."""
    cells = mesh([Sphere(material=2.0, diameter_nm=3.0, gap_nm=5.0)], 3.0)
    dipole = np.array([[0.3, -0.2j, 1.0 + 0.5j]])
    scalars = table.scalars(0.0, 13.0)[:, 0, 0]
    expected = tensor_from_scalars(scalars, 1.0, 0.0) @ dipole[0]
    found = Interaction(cells, LAYERS.k_host, table).apply(dipole)[0]
    assert np.abs(found - expected).max() < ROUNDING * np.abs(expected).max()


def test_kernels_compiled_and_as_plain_python():
    """The compiled loops do what their source says."""
    rng = np.random.default_rng(7)

    def random(*shape):
        return rng.standard_normal(shape) + 1j * rng.standard_normal(shape)

    direct, reflected = random(6, 4, 3), random(6, 4, 4)
    for sign in (1, -1):
        start = random(3, 6, 4)
        compiled, plain = start.copy(), start.copy()
        _kernels.multiply_both(compiled, direct, reflected, sign)
        _kernels.multiply_both.py_func(plain, direct, reflected, sign)
        assert np.abs(compiled - plain).max() < 1e-13  # fused multiply-adds may round differently
        compiled, plain = start.copy(), start.copy()
        _kernels.multiply_direct(compiled, direct, sign)
        _kernels.multiply_direct.py_func(plain, direct, sign)
        assert np.abs(compiled - plain).max() < 1e-13
    lateral, difference = random(30), random(30)
    compiled, plain = np.zeros((3, 6, 3, 2), complex), np.zeros((3, 6, 3, 2), complex)
    _kernels.fill_direct(compiled, lateral, difference)
    _kernels.fill_direct.py_func(plain, lateral, difference)
    assert np.abs(compiled - plain).max() < 1e-13
    scalars, rows = random(4, 6, 3), np.array([0, 1, 2, 0, 3, 4, 0, 0, 5])
    compiled, plain = np.zeros((3, 6, 3, 4), complex), np.zeros((3, 6, 3, 4), complex)
    _kernels.fill_reflected(compiled, scalars, rows, 3)
    _kernels.fill_reflected.py_func(plain, scalars, rows, 3)
    assert np.abs(compiled - plain).max() < 1e-13
