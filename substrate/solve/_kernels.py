"""Compiled loops of the product. Contiguous arrays, no defaults, no checks: `interaction` knows shapes and units."""

import numpy as np

from substrate._kernels import compiled


@compiled
def fill_direct(octant, lateral, difference):
    """octant (nx, 6, ny, nz): xx yy zz xy xz yz of lateral I + difference R_hat R_hat, tables over squared index distance."""
    nx, ny, nz = octant.shape[0], octant.shape[2], octant.shape[3]
    for i in range(nx):
        for j in range(ny):
            for k in range(nz):
                square = i * i + j * j + k * k
                if square == 0:
                    continue
                t = lateral[square]
                d = difference[square] / square
                octant[i, 0, j, k] = t + d * (i * i)
                octant[i, 1, j, k] = t + d * (j * j)
                octant[i, 2, j, k] = t + d * (k * k)
                octant[i, 3, j, k] = d * (i * j)
                octant[i, 4, j, k] = d * (i * k)
                octant[i, 5, j, k] = d * (j * k)


@compiled
def fill_reflected(quadrant, scalars, row_of_square, levels):
    """quadrant (nx, 6, ny, mz): reflected tensor from scalars (4, rows, levels); row_of_square maps i^2 + j^2 to a row."""
    nx, ny = quadrant.shape[0], quadrant.shape[2]
    for i in range(nx):
        for j in range(ny):
            square = i * i + j * j
            row = row_of_square[square]
            cosine, sine = 1.0, 0.0
            if square > 0:
                rho = np.sqrt(float(square))
                cosine, sine = i / rho, j / rho
            cos2 = cosine * cosine - sine * sine
            sin2 = 2.0 * cosine * sine
            for m in range(levels):
                a0 = scalars[0, row, m]
                a2 = scalars[1, row, m]
                b = scalars[2, row, m]
                quadrant[i, 0, j, m] = a0 + a2 * cos2
                quadrant[i, 1, j, m] = a0 - a2 * cos2
                quadrant[i, 2, j, m] = scalars[3, row, m]
                quadrant[i, 3, j, m] = a2 * sin2
                quadrant[i, 4, j, m] = b * cosine
                quadrant[i, 5, j, m] = b * sine


@compiled
def place(work, index, dipoles):
    """work (mx, 3, ny, nz) <- zero, then dipoles (n, 3) at cell indices (n, 3)."""
    work[:] = 0.0
    for a in range(index.shape[0]):
        for c in range(3):
            work[index[a, 0], c, index[a, 1], index[a, 2]] = dipoles[a, c]


@compiled
def collect(work, index, out):
    """out (n, 3) <- work (mx, 3, ny, nz) at cell indices (n, 3)."""
    for a in range(index.shape[0]):
        for c in range(3):
            out[a, c] = work[index[a, 0], c, index[a, 1], index[a, 2]]


@compiled
def multiply_direct(plane, direct, sign_x):
    """plane (3, my, mz) <- direct (6, my/2+1, mz/2+1) times plane, in Fourier space at one kx."""
    my, mz = plane.shape[1], plane.shape[2]
    for j in range(my):
        row, sign_y = j, 1
        if 2 * j > my:
            row, sign_y = my - j, -1
        for m in range(mz):
            column, sign_z = m, 1
            if 2 * m > mz:
                column, sign_z = mz - m, -1
            xy = direct[3, row, column] * (sign_x * sign_y)
            xz = direct[4, row, column] * (sign_x * sign_z)
            yz = direct[5, row, column] * (sign_y * sign_z)
            x, y, z = plane[0, j, m], plane[1, j, m], plane[2, j, m]
            plane[0, j, m] = direct[0, row, column] * x + xy * y + xz * z
            plane[1, j, m] = xy * x + direct[1, row, column] * y + yz * z
            plane[2, j, m] = xz * x + yz * y + direct[2, row, column] * z


@compiled
def multiply_both(plane, direct, reflected, sign_x):
    """As multiply_direct, plus reflected (6, my/2+1, mz) acting on the plane mirrored in kz: both of a pair (kz, -kz) at once."""
    my, mz = plane.shape[1], plane.shape[2]
    for j in range(my):
        row, sign_y = j, 1
        if 2 * j > my:
            row, sign_y = my - j, -1
        xy_sign = sign_x * sign_y
        for m in range(mz // 2 + 1):
            w = (mz - m) % mz
            dxx, dyy, dzz = direct[0, row, m], direct[1, row, m], direct[2, row, m]
            dxy = direct[3, row, m] * xy_sign
            dxz = direct[4, row, m] * sign_x
            dyz = direct[5, row, m] * sign_y
            x, y, z = plane[0, j, m], plane[1, j, m], plane[2, j, m]
            u, v, t = plane[0, j, w], plane[1, j, w], plane[2, j, w]
            rxy = reflected[3, row, m] * xy_sign
            rxz = reflected[4, row, m] * sign_x
            ryz = reflected[5, row, m] * sign_y
            plane[0, j, m] = dxx * x + dxy * y + dxz * z + reflected[0, row, m] * u + rxy * v + rxz * t
            plane[1, j, m] = dxy * x + dyy * y + dyz * z + rxy * u + reflected[1, row, m] * v + ryz * t
            plane[2, j, m] = dxz * x + dyz * y + dzz * z - rxz * u - ryz * v + reflected[2, row, m] * t
            if w != m:
                rxy = reflected[3, row, w] * xy_sign
                rxz = reflected[4, row, w] * sign_x
                ryz = reflected[5, row, w] * sign_y
                plane[0, j, w] = dxx * u + dxy * v - dxz * t + reflected[0, row, w] * x + rxy * y + rxz * z
                plane[1, j, w] = dxy * u + dyy * v - dyz * t + rxy * x + reflected[1, row, w] * y + ryz * z
                plane[2, j, w] = -dxz * u - dyz * v + dzz * t - rxz * x - ryz * y + reflected[2, row, w] * z


@compiled
def scale(vectors, along, across, normal, out):
    """out (n, 3) = along on the part of vectors along the normal (n, 3), across on the rest."""
    for a in range(vectors.shape[0]):
        x, y, z = vectors[a, 0], vectors[a, 1], vectors[a, 2]
        step = (along[a] - across[a]) * (normal[a, 0] * x + normal[a, 1] * y + normal[a, 2] * z)
        out[a, 0] = across[a] * x + step * normal[a, 0]
        out[a, 1] = across[a] * y + step * normal[a, 1]
        out[a, 2] = across[a] * z + step * normal[a, 2]


@compiled
def bilinear(a, b):
    """sum a b over two (n, 3) arrays, without conjugation."""
    total = 0j
    for i in range(a.shape[0]):
        for c in range(a.shape[1]):
            total += a[i, c] * b[i, c]
    return total


@compiled
def square_norm(a):
    """sum |a|^2 of an (n, 3) array."""
    total = 0.0
    for i in range(a.shape[0]):
        for c in range(a.shape[1]):
            total += a[i, c].real * a[i, c].real + a[i, c].imag * a[i, c].imag
    return total


@compiled
def advance(step, x, residual, direction, a_direction):
    """x += step direction, residual -= step a_direction; returns |residual|^2."""
    total = 0.0
    for i in range(x.shape[0]):
        for c in range(x.shape[1]):
            x[i, c] += step * direction[i, c]
            value = residual[i, c] - step * a_direction[i, c]
            residual[i, c] = value
            total += value.real * value.real + value.imag * value.imag
    return total


@compiled
def turn(ratio, residual, a_residual, direction, a_direction):
    """direction = residual + ratio direction, and the like for their products; returns a_direction . a_direction without conjugation."""
    total = 0j
    for i in range(direction.shape[0]):
        for c in range(direction.shape[1]):
            direction[i, c] = residual[i, c] + ratio * direction[i, c]
            value = a_residual[i, c] + ratio * a_direction[i, c]
            a_direction[i, c] = value
            total += value * value
    return total
