"""The part of the reflection that is known in closed form: the static image in the first interface, with retardation.

r_p tends to beta = (e2 - e1)/(e2 + e1) for large in-plane wave numbers; the field that a constant beta would reflect is a
derivative of exp(ikR)/R with R the distance to the mirror point. It is taken out of the integrals so that the rest is smooth.
"""

from __future__ import annotations

import numpy as np

from substrate.medium.stack import Layers


def image_strength(layers: Layers) -> complex:
    """beta of the first interface."""
    eps_host, eps_next = layers.index[0] ** 2, layers.index[1] ** 2
    return (eps_next - eps_host) / (eps_next + eps_host)


def image_scalars(beta: complex, k: float, rho, height) -> np.ndarray:
    """The four scalars A0, A2, B, C of the image field, times k^2, in 1/nm^3; rho and height = z + z' > 0 broadcast; (4, ...).

    Scalars as in `substrate.green.sommerfeld`.
    """
    rho, height = np.broadcast_arrays(np.asarray(rho, dtype=float), np.asarray(height, dtype=float))
    distance = np.sqrt(rho**2 + height**2)
    x = 1j * k * distance
    g = np.exp(x) / distance
    g1 = g * (x - 1.0) / distance**2  # (dg/dR)/R
    g2 = g * (x * x - 3.0 * x + 3.0) / distance**4  # (d2g/dR2 - g1)/R^2
    g_zz = g1 + g2 * height**2
    detour = rho**2 / (distance + height)
    phase = 1j * k * np.where(detour > 0.0, detour, 1.0)
    phi = np.where(detour > 0.0, np.expm1(phase) / phase, 1.0)
    j2_term = 2.0 * np.exp(1j * k * height) * phi / (distance + height) - g
    strength = beta / (8.0 * np.pi)
    a0 = strength * g_zz
    a2 = strength * (k * k * j2_term - g2 * rho**2)
    b = 2.0 * strength * g2 * rho * height
    c = 2.0 * strength * (k * k * g + g_zz)
    return np.stack([a0, a2, b, c])
