"""Plane waves in stacks against closed forms, and the laws that catch sign and branch errors."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from substrate.medium.fresnel import (
    layer_amplitudes,
    normal_wave_number,
    plane_wave_field,
    power_shares,
    reflection,
    transmission,
)
from substrate.medium.stack import Film, Layers, Stack

ROUNDING = 1e-12  # a few dozen operations in double precision


def at_angle(layers: Layers, angle_deg: float) -> np.ndarray:
    return np.array([layers.index[0].real * layers.k0 * np.sin(np.radians(angle_deg))])


def test_normal_incidence_reflectance_of_glass_silicon_and_gold():
    """R = |(n - 1)/(n + 1)|^2; the printed digits are for the indices stated (calculated with 25-digit arithmetic)."""
    for index, expected in ((1.5, 0.04), (1.45702, 0.0345980497), (0.18377 + 3.43125j, 0.944205426)):
        r_s, r_p = reflection(Layers(632.8, (1.0, index)), np.array([0.0]))
        assert abs(abs(r_s[0]) ** 2 - expected) < 2e-6  # the index is given to five digits
        assert abs(abs(r_p[0]) ** 2 - abs(r_s[0]) ** 2) < ROUNDING
        assert abs(r_s[0] - (1.0 - index) / (1.0 + index)) < ROUNDING
        assert abs(r_p[0] + r_s[0]) < ROUNDING  # p = k x s turns over with the wave


def test_reflectance_at_70_degrees():
    """Fresnel's formulas at 70 degrees, 632.8 nm: n = 1.5 and silicon (values calculated with 25-digit arithmetic)."""
    for index, s, p, digits in ((1.5, 0.29959468, 0.042490393, 1e-8), (3.88265 + 0.01963j, 0.69479024, 0.024228396, 2e-6)):
        layers = Layers(632.8, (1.0, index))
        r_s, r_p = reflection(layers, at_angle(layers, 70.0))
        assert abs(abs(r_s[0]) ** 2 - s) < digits and abs(abs(r_p[0]) ** 2 - p) < digits  # printed digits of index and result


def test_quarter_wave_stack():
    """R = ((n0 - Y)/(n0 + Y))^2 with Y = nH^2 (nH/nL)^(2N)/ns: closed form of a quarter-wave mirror (Born & Wolf, ch. 1.6)."""
    high, low, base, wavelength = 2.3, 1.35, 1.52, 550.0
    for pairs, expected in ((0, 0.306470359), (1, 0.672153337), (4, 0.983938487), (8, 0.999771917)):
        index = (1.0, high, *((low, high) * pairs), base)
        thickness = tuple(wavelength / 4.0 / n for n in index[1:-1])
        r_s, r_p = reflection(Layers(wavelength, index, thickness), np.array([0.0]))
        admittance = high**2 * (high / low) ** (2 * pairs) / base
        assert abs(abs(r_s[0]) ** 2 - ((1 - admittance) / (1 + admittance)) ** 2) < ROUNDING
        assert abs(abs(r_s[0]) ** 2 - expected) < 1e-9  # printed digits
        assert abs(abs(r_p[0]) ** 2 - expected) < 1e-9


def test_quarter_wave_antireflection_film():
    """MgF2-like 1.38 on 1.52: R = ((n0 ns - n1^2)/(n0 ns + n1^2))^2 = 0.01260079."""
    r_s, _ = reflection(Layers(550.0, (1.0, 1.38, 1.52), (550.0 / 4 / 1.38,)), np.array([0.0]))
    assert abs(abs(r_s[0]) ** 2 - 0.01260079) < 1e-8  # printed digits


def test_thick_absorbing_film_hides_what_is_under_it():
    thick = Layers(633.0, (1.0, 0.18 + 3.4j, 1.5), (1e5,))
    bare = Layers(633.0, (1.0, 0.18 + 3.4j))
    q = np.linspace(0.0, 30.0, 200) * thick.k0
    for with_film, without in zip(reflection(thick, q), reflection(bare, q)):
        assert np.isfinite(with_film).all()
        assert np.abs(with_film - without).max() < ROUNDING


def test_a_film_of_the_hosts_index_shifts_the_phase_only():
    d = 130.0
    film, bare = Layers(500.0, (1.33, 1.33, 1.0 + 2.0j), (d,)), Layers(500.0, (1.33, 1.0 + 2.0j))
    q = np.linspace(0.0, 3.0, 50) * film.k0
    shift = np.exp(2j * normal_wave_number(film.k_host, q) * d)
    for with_film, without in zip(reflection(film, q), reflection(bare, q)):
        assert np.abs(with_film - without * shift).max() < ROUNDING


def test_branch_on_the_real_axis_with_either_sign_of_zero():
    """A zero imaginary part must not decide between e^{ikz} and e^{-ikz}."""
    q = np.array([0.3, 0.9, 1.7])
    plus, minus = q + 0j, np.conj(q + 0j)
    assert np.array_equal(normal_wave_number(1.0, plus), normal_wave_number(1.0, minus))
    kz = normal_wave_number(1.0, plus)
    assert (kz.real[:2] > 0).all() and kz.imag[2] > 0


indices = st.builds(complex, st.floats(0.05, 4.0), st.floats(0.0, 5.0))
real_indices = st.floats(1.0, 4.0).map(complex)


@settings(max_examples=80, deadline=None)
@given(
    films=st.lists(st.tuples(indices, st.floats(0.3, 3000.0)), max_size=5),
    base=indices,
    host=st.floats(1.0, 1.6),
    angle=st.floats(0.0, 88.0),
)
def test_energy_is_conserved_in_any_stack(films, base, host, angle):
    """R + A + T = 1 with absorbed shares from fluxes at every interface (Born & Wolf, ch. 1.6.5)."""
    layers = Layers(600.0, (complex(host), *(n for n, _ in films), base), tuple(d for _, d in films))
    for polarization in ("s", "p"):
        shares = power_shares(layers, at_angle(layers, angle), polarization)
        total = shares.reflected + shares.absorbed.sum(axis=0) + shares.transmitted
        # fluxes are differences of products of amplitudes up to |n|^2 ~ 25 large: rounding of 1e-16 grows to about 1e-9 at worst
        assert abs(total[0] - 1.0) < 1e-9
        assert (shares.absorbed > -1e-9).all()


@settings(max_examples=60, deadline=None)
@given(films=st.lists(st.tuples(indices, st.floats(0.3, 300.0)), max_size=4), base=real_indices, part=st.floats(0.0, 0.95))
def test_transmission_is_reciprocal(films, base, part):
    """t up / kz_host = t down / kz_base for s, and with the indices for p: reciprocity of a stack with lossless ends."""
    layers = Layers(600.0, (1.0 + 0j, *(n for n, _ in films), base), tuple(d for _, d in films))
    q = np.array([part * layers.k0])
    kz_host, kz_base = (normal_wave_number(n * layers.k0, q) for n in (layers.index[0], base))
    for down, up in zip(transmission(layers, q), transmission(layers.flipped(), q)):
        # rounding of the recursion, which grows to 1e-10 within 1e-6 of grazing in a film
        assert np.abs(down / kz_host - up / kz_base).max() <= 1e-9 * np.abs(down / kz_host).max()


def test_field_is_continuous_at_every_interface_and_obeys_maxwell():
    layers = Layers(580.0, (1.0, 2.1, 0.3 + 2.8j, 1.5), (90.0, 35.0))
    q = 0.6 * layers.k0
    offset = 1e-7
    for pair in ((1.0, 0.0), (0.0, 1.0), (0.6, 0.8j)):
        for z in layers.interfaces_nm():
            above = plane_wave_field(layers, q, 0.4, pair, [[12.0, -5.0, z + offset]])[0]
            below = plane_wave_field(layers, q, 0.4, pair, [[12.0, -5.0, z - offset]])[0]
            eps = [layers.index[i] ** 2 for i in _around(layers, z)]
            assert np.abs(above[:2] - below[:2]).max() < 1e-7  # offset times a slope of order k
            assert abs(above[2] * eps[0] - below[2] * eps[1]) < 1e-6


def _around(layers, z):
    number = layers.interfaces_nm().index(z)
    return number, number + 1


def test_field_above_agrees_with_incident_plus_reflected():
    layers = Layers(500.0, (1.2, 1.9, 3.0 + 0.5j), (60.0,))
    angle = 50.0
    q = at_angle(layers, angle)
    kz = normal_wave_number(layers.k_host, q)[0].real
    r_s, r_p = reflection(layers, q)
    z = 77.0
    field = plane_wave_field(layers, q[0], 0.0, (0.0, 1.0), [[0.0, 0.0, z]])[0]
    cosine, sine = np.cos(np.radians(angle)), np.sin(np.radians(angle))
    expected = np.array([cosine, 0, sine]) * np.exp(-1j * kz * z) + r_p[0] * np.array([-cosine, 0, sine]) * np.exp(1j * kz * z)
    assert np.abs(field - expected).max() < ROUNDING


def test_surface_plasmon_pole_of_a_gold_surface():
    """The p denominator vanishes at n_eff = sqrt(e1 e2/(e1 + e2)) (Raether, Surface Plasmons, 1988)."""
    from substrate.medium.fresnel import pole_function

    eps = -12.030815 + 1.228664j
    layers = Layers(637.0, (1.0, np.sqrt(eps)))
    q = layers.k0 * np.sqrt(eps / (1.0 + eps))
    near = abs(pole_function(layers, np.array([q]), "p")[0])
    assert near < 1e-12 * abs(pole_function(layers, np.array([0.5 * q]), "p")[0])


def test_lossy_host_and_zero_thickness_are_refused():
    with pytest.raises(ValueError, match="lossless medium"):
        Stack(host=1.3 + 0.1j, base=1.5).at(600.0)
    with pytest.raises(ValueError, match="above 0"):
        Film("gold", 0.0)


def test_amplitudes_never_grow():
    """Layer amplitudes decay away from where they are stated: finite for a 100 um waveguide and for deep evanescence."""
    layers = Layers(633.0, (1.0, 2.0, 1.5), (1e5,))
    for polarization in ("s", "p"):
        _, down, up = layer_amplitudes(layers, np.linspace(0.0, 50.0, 300) * layers.k0, polarization)
        assert all(np.isfinite(part).all() for part in (*down, *up))
