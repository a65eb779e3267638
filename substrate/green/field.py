"""Fields of many dipoles at many points above the stack: direct sum and reflected sum."""

from __future__ import annotations

import numpy as np

from substrate.green import _kernels
from substrate.green.table import ReflectedTable
from substrate.threads import share

_FINEST_GRID = 6000  # points of the uniform rho grid


def direct_field(k: float, points, sources, centers, dipoles, skip_nm: float) -> np.ndarray:
    """Field (n, 3) at points (n, 3) of point dipoles (m, 3) in nm^3 at sources (m, 3).

    Sources whose centre (m, 3) lies nearer to a point than skip_nm are left out there: the caller adds them in a better way.
    """
    out = np.zeros((len(points), 3), dtype=complex)

    def part(start: int, stop: int) -> None:
        _kernels.direct_sum(k, points[start:stop], sources, centers, dipoles, skip_nm, out[start:stop])

    if len(points) * len(sources) < 50_000:  # cheaper than starting threads
        part(0, len(points))
    else:
        share(len(points), part)
    return out


def averaged_tensors(k: float, point, spots, weights) -> np.ndarray:
    """k^2 G (n, 3, 3) between one point (3,) and n sources, each averaged over its own weighted spots (n, m, 3), weights (n, m)."""
    out = np.zeros((len(spots), 3, 3), dtype=complex)
    _kernels.averaged_tensors(k, point, spots, weights, out)
    return out


def reflected_field(table: ReflectedTable, points, sources, dipoles) -> np.ndarray:
    """Field (n, 3) that the stack returns to points (n, 3) from dipoles (m, 3) in nm^3 at sources (m, 3).

    Points are taken by common height, sources by common level; the smooth remainder is interpolated by cubics on a fine uniform
    grid in rho (1e-6 of the reflected tensor typically), the image added in closed form. OutOfRange outside of the table's box.
    """
    out = np.zeros((len(points), 3), dtype=complex)
    if table.layers.is_uniform or len(points) == 0:
        return out
    k = table.layers.k_host
    heights, level = np.unique(np.round(sources[:, 2], 9), return_inverse=True)
    span = np.hypot(
        max(np.ptp(np.concatenate([points[:, 0], sources[:, 0]])), 1e-3),
        max(np.ptp(np.concatenate([points[:, 1], sources[:, 1]])), 1e-3),
    )
    for z in np.unique(points[:, 2]):
        here = np.flatnonzero(points[:, 2] == z)
        sums = z + heights
        reach = min(span, table.box[0])
        table.check_inside(_farthest(points[here], sources), sums.min(), sums.max())
        count = int(min(_FINEST_GRID, max(64, 30.0 * reach / sums.min(), 30.0 * reach / table.rho.edges[1])))
        step = reach / (count - 1)
        rest = table.remainder_at(np.minimum(step * np.arange(count), table.box[0]), sums)
        rest = np.ascontiguousarray(rest.transpose(2, 1, 0))
        group = np.ascontiguousarray(points[here])
        carriers = np.exp(1j * k * sums)
        field = np.zeros((len(here), 3), dtype=complex)

        def part(start: int, stop: int) -> None:
            _kernels.reflected_sum(
                k, complex(table.beta), group[start:stop], sources, level, sums, carriers, dipoles, rest, step, field[start:stop]
            )

        share(len(here), part)
        out[here] = field
    return out


def _farthest(points: np.ndarray, sources: np.ndarray) -> float:
    """Largest horizontal distance between two sets, from above by their bounding boxes' corners (exact to the box)."""
    low = np.minimum(points[:, :2].min(axis=0), sources[:, :2].min(axis=0))
    high = np.maximum(points[:, :2].max(axis=0), sources[:, :2].max(axis=0))
    return float(np.hypot(*(high - low)))
