"""The dipole field in a uniform host: the point tensor and its low-pass filtered form.

E = k^2 G p with G = (I + grad grad/k^2) exp(ikR)/(4 pi R), p in nm^3, so that T = k^2 G has the unit 1/nm^3. Every tensor here
is of the form T = radial R_hat R_hat + lateral (I - R_hat R_hat), and the functions return the two scalars.
"""

from __future__ import annotations

import numpy as np


def point_scalars(k: float, distance) -> tuple[np.ndarray, np.ndarray]:
    """(radial, lateral) parts of k^2 G in 1/nm^3 at distances R > 0 in nm: the field of a point dipole."""
    distance = np.asarray(distance, dtype=float)
    x = k * distance
    wave = np.exp(1j * x) / (4.0 * np.pi * distance**3)
    return 2.0 * wave * (1.0 - 1j * x), wave * (x * x + 1j * x - 1.0)


def point_tensor(k: float, separations) -> np.ndarray:
    """k^2 G for separations (..., 3) in nm, field point minus source point; returns complex (..., 3, 3)."""
    separations = np.asarray(separations, dtype=float)
    distance = np.linalg.norm(separations, axis=-1)
    radial, lateral = point_scalars(k, distance)
    unit = separations / distance[..., None]
    dyad = unit[..., :, None] * unit[..., None, :]
    return lateral[..., None, None] * np.eye(3) + (radial - lateral)[..., None, None] * dyad


def filtered_scalars(k: float, cutoff: float, distance) -> tuple[np.ndarray, np.ndarray]:
    """(radial, lateral) parts of the filtered tensor in 1/nm^3 at distances R > 0.

    The spatial frequencies above `cutoff` (pi over the cell size for cubes) are removed from the dipole field, except that the
    local depolarisation term stays local: T_F = (k^2 + grad grad) g_F + h/3, with g_F the filtered scalar Green function and
    h the filtered delta function. Closed form in sine and cosine integrals; Piller & Martin, IEEE Trans. Antennas Propag. 46,
    1126 (1998) and Gay-Balmaz & Martin, Comput. Phys. Commun. 144, 111 (2002) (from memory), rederived here:
    with F = 4 pi R g_F, F' = k C + 2 sin(cR)/(pi R) and F'' = -k^2 F - 4 pi R h.
    """
    from scipy.special import sici

    distance = np.asarray(distance, dtype=float)
    sine_low, cosine_low = sici((cutoff - k) * distance)
    sine_high, cosine_high = sici((cutoff + k) * distance)
    even, odd = sine_high + sine_low, 1j * np.pi + cosine_low - cosine_high
    sin_k, cos_k = np.sin(k * distance), np.cos(k * distance)
    x = cutoff * distance
    delta = (np.sin(x) - x * np.cos(x)) / (2.0 * np.pi**2 * distance**3)
    wave = (sin_k * odd + cos_k * even) / np.pi
    slope = k * (cos_k * odd - sin_k * even) / np.pi + 2.0 * np.sin(x) / (np.pi * distance)
    curvature = -k * k * wave - 4.0 * np.pi * distance * delta
    # g = F/(4 pi R): g' = (F' - F/R)/(4 pi R), g'' = (F'' - 2 F'/R + 2 F/R^2)/(4 pi R)
    norm = 1.0 / (4.0 * np.pi * distance)
    g = wave * norm
    g1 = (slope - wave / distance) * norm
    g2 = (curvature - 2.0 * slope / distance + 2.0 * wave / distance**2) * norm
    local = k * k * g + delta / 3.0
    return local + g2, local + g1 / distance


def filtered_self_term(k: float, cell_nm: float) -> complex:
    """The filtered field of a cell at itself in 1/nm^3, without the depolarisation -1/(3 V): (2/3) k^2 g_F(0) for cutoff pi/cell."""
    y = k * cell_nm
    bracket = 4.0 / 3.0 * y**2 + 2.0 / (3.0 * np.pi) * (np.log((np.pi - y) / (np.pi + y)) + 1j * np.pi) * y**3
    return complex(bracket / (4.0 * np.pi * cell_nm**3))
