"""Closed forms of plane waves at surfaces. Time factor exp(-i omega t), index n + i k; p amplitudes are those of E along k_hat x s.

With that sign of p a perfect mirror has r_s = -1, r_p = +1, and at normal incidence r_p = -r_s.
"""

from __future__ import annotations

import cmath
import math


def fresnel(index_in: float, index_out: complex, angle_deg: float) -> tuple[complex, complex, complex, complex]:
    """r_s, r_p, t_s, t_p of one interface, angle from the normal in the medium of incidence (Born & Wolf, section 1.5.2).

    Above the critical angle the transmitted wave decays. t_p is the ratio of the amplitudes of E, as everywhere.
    """
    cosine, sine = math.cos(math.radians(angle_deg)), math.sin(math.radians(angle_deg))
    normal = cmath.sqrt(index_out**2 - (index_in * sine) ** 2)  # n2 cos of the refracted angle
    if normal.imag < 0.0:
        normal = -normal
    own, eps = index_in * cosine, complex(index_out) ** 2
    below_p = eps * own + index_in**2 * normal
    r_s, r_p = (own - normal) / (own + normal), (eps * own - index_in**2 * normal) / below_p
    return r_s, r_p, 2.0 * own / (own + normal), 2.0 * index_in * index_out * own / below_p


def normal_reflectance(index: complex, host: float = 1.0) -> float:
    """|(n - n_host)/(n + n_host)|^2."""
    return abs((index - host) / (index + host)) ** 2


def brewster_angle_deg(index_in: float, index_out: float) -> float:
    """Angle without reflected p light between two lossless media."""
    return math.degrees(math.atan(index_out / index_in))


def critical_angle_deg(index_in: float, index_out: float) -> float:
    """Angle of total reflection; index_in > index_out, both real."""
    return math.degrees(math.asin(index_out / index_in))


def quarter_wave_reflectance(high: float, low: float, base: float, pairs: int, host: float = 1.0) -> float:
    """Host | H (L H)^pairs | base with quarter-wave films at normal incidence: ((n0 - Y)/(n0 + Y))^2, Y = nH^2 (nH/nL)^(2 pairs)/n_base."""
    admittance = high**2 * (high / low) ** (2 * pairs) / base
    return ((host - admittance) / (host + admittance)) ** 2


def quarter_wave_film_reflectance(film: float, base: float, host: float = 1.0) -> float:
    """One quarter-wave film at normal incidence: admittance n^2/n_base. Zero for n^2 = host base."""
    return ((host - film**2 / base) / (host + film**2 / base)) ** 2


def surface_plasmon_index(eps_metal: complex, eps_dielectric: complex) -> complex:
    """Wave number of the plasmon of one interface over k0: sqrt(e1 e2/(e1 + e2)), where r_p has its pole."""
    return cmath.sqrt(eps_metal * eps_dielectric / (eps_metal + eps_dielectric))


def surface_plasmon_length_nm(eps_metal: complex, eps_dielectric: complex, wavelength_nm: float) -> float:
    """Way after which the intensity of the plasmon has fallen to 1/e."""
    return wavelength_nm / (4.0 * math.pi * surface_plasmon_index(eps_metal, eps_dielectric).imag)


def goos_haenchen_shifts(index: float, angle_deg: float) -> tuple[float, float]:
    """(s, p) Artmann's shift of a beam totally reflected in `index` against vacuum, across the beam, in vacuum wavelengths."""
    sine = math.sin(math.radians(angle_deg))
    s = sine / (math.pi * math.sqrt((index * sine) ** 2 - 1.0))
    return s, s / ((1.0 + index**2) * sine**2 - 1.0)
