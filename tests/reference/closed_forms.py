"""Closed forms of electrostatics for small particles: spheroids alone, and a sphere with its image."""

from __future__ import annotations

import math

import mpmath as mp


def depolarisation_factors(ratio: float) -> tuple[float, float]:
    """(along the axis of revolution, across) of a spheroid; ratio = axis length over equatorial diameter. They obey N + 2 N' = 1.

    Bohren & Huffman, Absorption and Scattering of Light by Small Particles (Wiley 1983), section 5.3.
    """
    if ratio == 1.0:
        along = 1.0 / 3.0
    elif ratio > 1.0:
        e = math.sqrt(1.0 - 1.0 / ratio**2)
        along = (1.0 - e * e) / e**2 * (math.atanh(e) / e - 1.0)
    else:
        e = math.sqrt(1.0 / ratio**2 - 1.0)
        along = (1.0 + e * e) / e**3 * (e - math.atan(e))
    return along, 0.5 * (1.0 - along)


def spheroid_polarizability(eps: complex, volume: float, factor: float) -> complex:
    """Static polarizability (volume units: moment over eps0 eps_host E) along an axis of depolarisation factor `factor`; eps over the host's."""
    return volume * (eps - 1.0) / (1.0 + factor * (eps - 1.0))


def sphere_polarizability(eps: complex, radius: float) -> complex:
    """4 pi a^3 (eps - 1)/(eps + 2)."""
    return 4.0 * math.pi * radius**3 * (eps - 1.0) / (eps + 2.0)


def sphere_over_half_space(eps: complex, eps_base: complex, radius: float, height: float) -> tuple[complex, complex]:
    """(perpendicular, parallel) polarizability of a small sphere, centre at `height` over a half-space, with the image of its dipole.

    Both permittivities relative to the host. The image of a moment p is b p (perpendicular) or -b p (parallel) with
    b = (eps_base - 1)/(eps_base + 1), a distance 2 height away; its field on the sphere is b p/(16 pi h^3) or b p/(32 pi h^3).
    Neglected: higher multipoles, of relative order (radius/2 height)^5, and retardation, so height must be far below the wavelength.
    """
    own = sphere_polarizability(eps, radius)
    image = (eps_base - 1.0) / (eps_base + 1.0)
    return own / (1.0 - own * image / (16.0 * math.pi * height**3)), own / (1.0 - own * image / (32.0 * math.pi * height**3))


def ellipsoid_depolarisation(axis: float, second: float, third: float) -> float:
    """Depolarisation factor along `axis` of an ellipsoid with these half axes (any common unit); the three of one ellipsoid add to 1.

    Bohren & Huffman (5.33): (a b c/2) int_0^inf du / ((a^2 + u)^(3/2) (b^2 + u)^(1/2) (c^2 + u)^(1/2)), Carlson's R_D of three squares.
    """
    return float(axis * second * third / 3 * mp.elliprd(mp.mpf(second) ** 2, mp.mpf(third) ** 2, mp.mpf(axis) ** 2))
