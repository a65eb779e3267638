"""The field that all dipoles of a grid make at all others, direct and reflected by the stack, by FFT.

The direct tensor depends on differences of the cell indices, the reflected one on differences in x and y and on the sum in z.
In Fourier space the latter acts on the mirrored vector p(kx, ky, -kz), which is at hand: the reflection costs no further
transform. Both tensors are even or odd in x and y (the direct one in z too), so that an octant and a quadrant are stored, made
by cosine and sine transforms. The transforms go axis by axis, plane by plane of kx: the padded box is never held.
"""

from __future__ import annotations

import numpy as np
from scipy import fft

from substrate.green.free_space import filtered_scalars
from substrate.green.table import ReflectedTable
from substrate.particle.cells import Cells
from substrate.solve import _kernels
from substrate.threads import share, thread_count

# Parity in (x, y, z) of the components xx, yy, zz, xy, xz, yz of the direct tensor; the reflected one has no parity in z.
_ODD = ((0, 0, 0), (0, 0, 0), (0, 0, 0), (1, 1, 0), (1, 0, 1), (0, 1, 1))


class Interaction:
    """T p for dipoles p (n, 3) in nm^3 on the occupied cells; returns fields (n, 3). The self term of the direct part is left out.

    cells: the grid.  k: wave number of the host, 1/nm.  table: reflected tensor, None for a uniform surrounding.
    precision: complex128, or complex64 for half the time and memory and an error of about 1e-6 in the fields. The direct tensor is the filtered one, the reflected tensor that of points (filtering the image was measured to do harm).
    """

    def __init__(self, cells: Cells, k: float, table: ReflectedTable | None, precision=np.complex128):
        self.cells = cells
        self.precision = precision
        self.padded = tuple(_padded_length(n) for n in cells.shape)
        self.direct = self._direct_octant(k)
        self.reflected = None if table is None else self._reflected_quadrant(table)
        nx, ny, nz = cells.shape
        self._work = np.zeros((self.padded[0], 3, ny, nz), dtype=precision)

    def _direct_octant(self, k: float) -> np.ndarray:
        nx, ny, nz = self.cells.shape
        h = self.cells.cell_nm
        farthest = (nx - 1) ** 2 + (ny - 1) ** 2 + (nz - 1) ** 2
        squares = np.arange(1, farthest + 1)
        radial, lateral = filtered_scalars(k, np.pi / h, h * np.sqrt(squares))
        lateral = np.concatenate([[0.0], lateral])
        difference = np.concatenate([[0.0], radial - lateral[1:]])
        mx, my, mz = self.padded
        octant = np.zeros((mx // 2 + 1, 6, my // 2 + 1, mz // 2 + 1), dtype=self.precision)
        _kernels.fill_direct(octant[:nx, :, :ny, :nz], lateral, difference)
        for component, (odd_x, odd_y, odd_z) in enumerate(_ODD):
            values = octant[:, component]
            for axis, odd in enumerate((odd_x, odd_y, odd_z)):
                values = _half_transform(values, axis, odd)
            octant[:, component] = values
        return octant

    def _reflected_quadrant(self, table: ReflectedTable) -> np.ndarray:
        nx, ny, nz = self.cells.shape
        h = self.cells.cell_nm
        grid = np.add.outer(np.arange(nx) ** 2, np.arange(ny) ** 2)
        squares = np.unique(grid)
        row_of_square = np.zeros(grid.max() + 1, dtype=np.int64)
        row_of_square[squares] = np.arange(len(squares))
        levels = 2 * nz - 1
        heights = 2.0 * self.cells.origin_nm[2] + h * np.arange(levels)
        scalars = np.ascontiguousarray(table.scalars(h * np.sqrt(squares), heights))
        mx, my, mz = self.padded
        quadrant = np.zeros((mx // 2 + 1, 6, my // 2 + 1, mz), dtype=self.precision)
        _kernels.fill_reflected(quadrant[:nx, :, :ny, :], scalars, row_of_square, levels)
        for component, (odd_x, odd_y, _) in enumerate(_ODD):
            values = _half_transform(quadrant[:, component], 0, odd_x)
            values = _half_transform(values, 1, odd_y)
            quadrant[:, component] = fft.fft(values, axis=2, workers=thread_count(), overwrite_x=True)
        return quadrant

    def apply(self, dipoles: np.ndarray) -> np.ndarray:
        """Fields (n, 3) of dipoles (n, 3)."""
        nx, ny, nz = self.cells.shape
        _kernels.place(self._work, self.cells.index, dipoles)
        spectrum = fft.fft(self._work, axis=0, workers=thread_count(), overwrite_x=True)
        mx, my, mz = self.padded

        def planes(start: int, stop: int) -> None:
            for kx in range(start, stop):
                row, sign = (kx, 1) if 2 * kx <= mx else (mx - kx, -1)
                plane = fft.fft(fft.fft(spectrum[kx], n=mz, axis=2), n=my, axis=1)
                if self.reflected is None:
                    _kernels.multiply_direct(plane, self.direct[row], sign)
                else:
                    _kernels.multiply_both(plane, self.direct[row], self.reflected[row], sign)
                lines = fft.ifft(plane, axis=1, overwrite_x=True)[:, :ny]
                spectrum[kx] = fft.ifft(lines, axis=2)[:, :, :nz]

        share(mx, planes)
        field = fft.ifft(spectrum, axis=0, workers=thread_count(), overwrite_x=True)
        out = np.empty(dipoles.shape, dtype=complex)
        _kernels.collect(field, self.cells.index, out)
        return out


def _padded_length(n: int) -> int:
    """An even length with small factors of at least 2 n."""
    length = max(4, 2 * n)
    while True:
        length = fft.next_fast_len(length)
        if length % 2 == 0:
            return length
        length += 1


def _half_transform(values: np.ndarray, axis: int, odd: int) -> np.ndarray:
    """The Fourier transform over one axis of an array that is even or odd about zero, from and to its non-negative half."""
    if not odd:
        return fft.dct(values, type=1, axis=axis, workers=thread_count())
    inner = [slice(None)] * values.ndim
    inner[axis] = slice(1, -1)
    out = np.zeros_like(values)
    out[tuple(inner)] = -1j * fft.dst(values[tuple(inner)], type=1, axis=axis, workers=thread_count())
    return out


def box_bytes(shape: tuple[int, int, int], with_stack: bool) -> int:
    """Peak memory in bytes of an Interaction and one product, in whole numbers that cannot overflow."""
    mx, my, mz = (_padded_length(n) for n in shape)
    quarter = (mx // 2 + 1) * (my // 2 + 1)
    octant = 16 * 6 * quarter * (mz // 2 + 1)
    quadrant = 16 * 6 * quarter * mz if with_stack else 0
    return octant + quadrant + 3 * 16 * 3 * mx * shape[1] * shape[2]
