"""Sums of dipole fields at points: against single tensors, and compiled against plain Python."""

import numpy as np

from substrate.green import _kernels
from substrate.green.field import averaged_tensors, direct_field, reflected_field
from substrate.green.free_space import point_tensor
from substrate.green.sommerfeld import reflected_scalars, tensor_from_scalars
from substrate.green.table import build_table
from substrate.medium.stack import Layers

LAYERS = Layers(560.0, (1.33, 1.6, 0.4 + 2.6j, 1.5), (4.0, 60.0))
K = LAYERS.k_host


def scene(seed: int = 0):
    rng = np.random.default_rng(seed)
    sources = np.column_stack([rng.uniform(-20, 20, (30, 2)), 6.0 + 3.0 * rng.integers(0, 8, 30)])
    dipoles = rng.standard_normal((30, 3)) + 1j * rng.standard_normal((30, 3))
    points = np.column_stack([rng.uniform(-40, 40, (7, 2)), rng.choice([2.0, 11.0, 40.0], 7)])
    points[0] = (*sources[0, :2], 2.0)  # straight below a source
    return points, sources, dipoles


def test_reflected_sum_equals_tensors_by_quadrature():
    points, sources, dipoles = scene()
    table = build_table(LAYERS, 150.0, 7.0, 80.0)
    found = reflected_field(table, points, sources, dipoles)
    expected = np.zeros_like(found)
    for a, point in enumerate(points):
        for source, dipole in zip(sources, dipoles):
            x, y = point[:2] - source[:2]
            rho = np.hypot(x, y)
            cosine, sine = (x / rho, y / rho) if rho > 0 else (1.0, 0.0)
            expected[a] += tensor_from_scalars(reflected_scalars(LAYERS, rho, point[2] + source[2], 1e-8)[0], cosine, sine) @ dipole
    assert np.abs(found - expected).max() < 1e-5 * np.abs(expected).max()  # cubic interpolation of the remainder


def test_direct_sum_equals_point_tensors():
    points, sources, dipoles = scene(1)
    found = direct_field(K, points, sources, sources, dipoles, 12.0)
    apart = points[:, None] - sources[None]
    far = np.linalg.norm(apart, axis=-1) >= 12.0
    expected = np.einsum("abij,bj,ab->ai", point_tensor(K, apart), dipoles, far)
    assert np.abs(found - expected).max() < 1e-12 * np.abs(expected).max()  # rounding


def test_averaged_tensor_is_the_weighted_mean():
    rng = np.random.default_rng(2)
    spots, weights = rng.uniform(-1, 1, (4, 9, 3)), rng.uniform(0, 1, (4, 9))
    weights[1, 3:] = 0.0
    point = np.array([3.0, 1.0, -2.0])
    expected = np.einsum("abij,ab->aij", point_tensor(K, point - spots), weights) / weights.sum(axis=1)[:, None, None]
    found = averaged_tensors(K, point, spots, weights)
    assert np.abs(found - expected).max() < 1e-12 * np.abs(expected).max()  # rounding


def test_kernels_compiled_and_as_plain_python():
    points, sources, dipoles = scene(3)
    levels = np.arange(30) % 3
    sums = np.array([8.0, 11.0, 19.0])
    rng = np.random.default_rng(4)
    rest = rng.standard_normal((3, 20, 4)) + 1j * rng.standard_normal((3, 20, 4))
    both = []
    for kernel in (_kernels.reflected_sum, _kernels.reflected_sum.py_func):
        out = np.zeros((7, 3), complex)
        kernel(K, 0.4 + 0.1j, points, sources, levels, sums, np.exp(1j * K * sums), dipoles, rest, 8.0, out)
        both.append(out)
    assert np.abs(both[0] - both[1]).max() < 1e-11 * np.abs(both[1]).max()  # fused multiply-adds round differently
    both = []
    for kernel in (_kernels.direct_sum, _kernels.direct_sum.py_func):
        out = np.zeros((7, 3), complex)
        kernel(K, points, sources, sources, dipoles, 9.0, out)
        both.append(out)
    assert np.abs(both[0] - both[1]).max() < 1e-11 * np.abs(both[1]).max()
