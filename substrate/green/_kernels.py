"""Compiled sums of dipole fields. Contiguous arrays, no defaults, no checks: `field` knows shapes and units."""

import numpy as np

from substrate._kernels import compiled


@compiled
def direct_sum(k, points, sources, centers, dipoles, skip, out):
    """out (n, 3) += sum over sources of k^2 G p; sources whose cell centre lies within `skip` of the point are left out."""
    skip2 = skip * skip
    for a in range(points.shape[0]):
        ex, ey, ez = 0j, 0j, 0j
        for b in range(sources.shape[0]):
            cx = points[a, 0] - centers[b, 0]
            cy = points[a, 1] - centers[b, 1]
            cz = points[a, 2] - centers[b, 2]
            if cx * cx + cy * cy + cz * cz < skip2:
                continue
            x = points[a, 0] - sources[b, 0]
            y = points[a, 1] - sources[b, 1]
            z = points[a, 2] - sources[b, 2]
            square = x * x + y * y + z * z
            distance = np.sqrt(square)
            phase = k * distance
            wave = complex(np.cos(phase), np.sin(phase)) / (4.0 * np.pi * distance * square)
            lateral = wave * complex(phase * phase - 1.0, phase)
            radial = wave * complex(2.0, -2.0 * phase)
            px, py, pz = dipoles[b, 0], dipoles[b, 1], dipoles[b, 2]
            along = (radial - lateral) * (px * x + py * y + pz * z) / square
            ex += lateral * px + along * x
            ey += lateral * py + along * y
            ez += lateral * pz + along * z
        out[a, 0] += ex
        out[a, 1] += ey
        out[a, 2] += ez


@compiled
def averaged_tensors(k, point, spots, weights, out):
    """out (n, 3, 3) = mean of k^2 G from `point` (3) over the weighted spots (n, m, 3) of each source."""
    for a in range(spots.shape[0]):
        total = 0.0
        for b in range(spots.shape[1]):
            weight = weights[a, b]
            if weight == 0.0:
                continue
            total += weight
            x = point[0] - spots[a, b, 0]
            y = point[1] - spots[a, b, 1]
            z = point[2] - spots[a, b, 2]
            square = x * x + y * y + z * z
            distance = np.sqrt(square)
            phase = k * distance
            wave = weight * complex(np.cos(phase), np.sin(phase)) / (4.0 * np.pi * distance * square)
            lateral = wave * complex(phase * phase - 1.0, phase)
            step = (wave * complex(2.0, -2.0 * phase) - lateral) / square
            out[a, 0, 0] += lateral + step * x * x
            out[a, 1, 1] += lateral + step * y * y
            out[a, 2, 2] += lateral + step * z * z
            out[a, 0, 1] += step * x * y
            out[a, 0, 2] += step * x * z
            out[a, 1, 2] += step * y * z
        for i in range(3):
            for j in range(i, 3):
                out[a, i, j] /= total
                out[a, j, i] = out[a, i, j]


@compiled
def reflected_sum(k, beta, points, sources, levels, sums, carriers, dipoles, rest, step, out):
    """out (n, 3) += reflected field at points of one common height; sums[level] = z + z', carriers[level] = e^{ik(z + z')}.

    rest (levels, n_rho, 4) is the remainder on a uniform rho grid; the image is added in closed form, with
    e^{ikR} = e^{ik(z + z')} e^{ik rho^2/(R + z + z')}, so that a pair costs one sine and one cosine.
    """
    last = rest.shape[1] - 3
    strength = beta / (8.0 * np.pi)
    for a in range(points.shape[0]):
        ex, ey, ez = 0j, 0j, 0j
        for b in range(sources.shape[0]):
            level = levels[b]
            x = points[a, 0] - sources[b, 0]
            y = points[a, 1] - sources[b, 1]
            z = sums[level]
            rho2 = x * x + y * y
            rho = np.sqrt(rho2)
            place = rho / step
            i = min(max(int(place) - 1, 0), last - 1)
            t = place - i
            w0 = -(t - 1.0) * (t - 2.0) * (t - 3.0) / 6.0
            w1 = t * (t - 2.0) * (t - 3.0) / 2.0
            w2 = -t * (t - 1.0) * (t - 3.0) / 2.0
            w3 = t * (t - 1.0) * (t - 2.0) / 6.0
            a0 = w0 * rest[level, i, 0] + w1 * rest[level, i + 1, 0] + w2 * rest[level, i + 2, 0] + w3 * rest[level, i + 3, 0]
            a2 = w0 * rest[level, i, 1] + w1 * rest[level, i + 1, 1] + w2 * rest[level, i + 2, 1] + w3 * rest[level, i + 3, 1]
            bb = w0 * rest[level, i, 2] + w1 * rest[level, i + 1, 2] + w2 * rest[level, i + 2, 2] + w3 * rest[level, i + 3, 2]
            cc = w0 * rest[level, i, 3] + w1 * rest[level, i + 1, 3] + w2 * rest[level, i + 2, 3] + w3 * rest[level, i + 3, 3]
            square = rho2 + z * z
            distance = np.sqrt(square)
            inverse = 1.0 / square
            phase = k * distance
            lift = 1.0 / (distance + z)
            bend = k * rho2 * lift
            turned = complex(np.cos(bend), np.sin(bend))
            if bend > 1e-4:
                phi = (turned - 1.0) * complex(0.0, -1.0 / bend)
            else:
                phi = complex(1.0 - bend * bend / 6.0, 0.5 * bend)
            g = carriers[level] * turned / distance
            g1 = g * complex(-1.0, phase) * inverse
            g2 = g * complex(3.0 - phase * phase, -3.0 * phase) * (inverse * inverse)
            j2 = 2.0 * lift * carriers[level] * phi - g
            g_zz = g1 + g2 * (z * z)
            a0 += strength * g_zz
            a2 += strength * (k * k * j2 - g2 * rho2)
            bb += 2.0 * strength * g2 * (rho * z)
            cc += 2.0 * strength * (k * k * g + g_zz)
            cosine, sine = 1.0, 0.0
            if rho > 0.0:
                cosine, sine = x / rho, y / rho
            cos2, sin2 = cosine * cosine - sine * sine, 2.0 * sine * cosine
            px, py, pz = dipoles[b, 0], dipoles[b, 1], dipoles[b, 2]
            ex += (a0 + a2 * cos2) * px + a2 * sin2 * py + bb * cosine * pz
            ey += a2 * sin2 * px + (a0 - a2 * cos2) * py + bb * sine * pz
            ez += cc * pz - bb * (cosine * px + sine * py)
        out[a, 0] += ex
        out[a, 1] += ey
        out[a, 2] += ez
