"""Emitters over plane stacks: three routes of the second implementation against each other and against calculated figures.

Routes: the rates of Chance, Prock & Silbey (`half_space_emitter`), the reflected tensor (`reflected_tensor`: other path, other film
algebra), the balance of power (`emitter_on_dielectric`: real angles only). "Calculated" means evaluated from the published formula
with 25 to 30 digits, apart from the code here.
"""

import math

import mpmath as mp
import numpy as np
import pytest

from tests.reference.emitter_on_dielectric import parallel, perpendicular
from tests.reference.half_space_emitter import PlaneStack, mirror_rates, radiated_up, static_rates, total_rates
from tests.reference.multilayer import LayerStack
from tests.reference.reflected_tensor import reflected_scalars, reflected_tensor


def root(eps: complex):
    """Index from permittivity with all digits of mpmath."""
    return mp.sqrt(mp.mpmathify(eps))


SILVER = ((1.5, root(-16.89961 + 0.48198548j)), (), 612.0)
GOLD = ((1.0, root(-12.030815 + 1.228664j)), (), 637.0)
SILICON = ((1.0, root(15.074612 + 0.1524001j)), (), 632.8)
TRANSFER = ((1.33, root(-15.051234 + 1.0515786j), 1.52), (10.0,), 680.0)
LOSSLESS = ((1.0, root(2.1316), 1.5), (100.0,), 600.0)
THIN_SILVER = ((1.0, root(-18.0 + 0.5j), 1.5), (5.0,), 633.0)
NEAR_RESONANCE = ((1.0, root(-2.0 + 0.001j)), (), 633.0)
FOUR_FILMS = ((1.0, 1.46, 2.0, 1.46, root(-18.0 + 0.5j), 3.88 + 0.02j), (100.0, 50.0, 20.0, 30.0), 633.0)


@pytest.mark.parametrize(
    ("index", "normal", "along"),
    [
        # perpendicular, then parallel: total, fraction into the base
        (1.5, (2.303574466, 0.86137083), (1.388094563, 0.83658567)),
        (1.457, (2.194324315, 0.85666798), (1.347165645, 0.8250859)),
        (2.0, (3.448513556, 0.88747827), (1.902269139, 0.9179883)),
        (4.0, (6.407683144, 0.8987494), (3.999759902, 0.98523466)),
    ],
)
def test_emitter_in_contact_with_a_dielectric(index, normal, along):
    """Lukosz & Kunz, JOSA 67, 1607 and 1615 (1977), z = 0: calculated; nine decimals of the rate, eight of the fraction (seven where fewer are given)."""
    for shares, expected in ((perpendicular(index), normal), (parallel(index), along)):
        assert shares.total == pytest.approx(expected[0], abs=6e-10)
        assert shares.fraction_down == pytest.approx(expected[1], abs=6e-9)


def test_light_beyond_the_critical_angle():
    """Lukosz & Kunz 1977, n = 1.5, z = 0: super-critical shares 0.68175772 and 0.55402458, isotropic ensemble 0.84782526 into the glass: calculated."""
    normal, along = perpendicular(1.5), parallel(1.5)
    assert normal.fraction_beyond == pytest.approx(0.68175772, abs=6e-9)
    assert along.fraction_beyond == pytest.approx(0.55402458, abs=6e-9)
    assert (normal.down + 2.0 * along.down) / (normal.total + 2.0 * along.total) == pytest.approx(0.84782526, abs=6e-9)


@pytest.mark.parametrize("height", [1.0, 50.0, 700.0])
@pytest.mark.parametrize("index", [1.5, 3.0])
def test_power_balance_is_the_rate(index, height):
    """Lossless half-space: power up + down equals the rate from the reflected field; 1e-13, both are rounded from 20 digits and more."""
    stack = PlaneStack((1.0, index), (), 633.0)
    kz = 2 * mp.pi * mp.mpf(height) / 633
    normal, along, rates, up = perpendicular(index, kz), parallel(index, kz), total_rates(stack, height), radiated_up(stack, height)
    assert (normal.total, along.total) == pytest.approx((rates.perpendicular, rates.parallel), rel=1e-13)
    assert (normal.up, along.up) == pytest.approx((up.perpendicular, up.parallel), rel=1e-12)  # the latter runs with 15 digits


def test_fifty_nanometres_above_glass():
    """z = 50 nm, 633 nm, n = 1.5: 1.62723830585 and 1.06643324421, calculated by two routes; eleven decimals given."""
    rates = total_rates(PlaneStack((1.0, 1.5), (), 633.0), 50.0)
    assert (rates.perpendicular, rates.parallel) == pytest.approx((1.62723830585, 1.06643324421), abs=6e-12)


CALCULATED = [
    # heights that the other file of printed values leaves out
    *((SILVER, *row) for row in [(10, 5.7566192, 1.1144731), (50, 2.7079780, 1.0348117), (200, 0.92286206, 0.83265509)]),
    *((GOLD, *row) for row in [(5, 67.257694, 31.810240), (20, 4.8241935, 0.95647319), (100, 2.0602361, 1.0678029)]),
    *((SILICON, *row) for row in [(5, 9.0699658, 4.9925066), (20, 3.8295507, 1.9098958), (50, 2.3647299, 0.98243231)]),
    *((TRANSFER, *row) for row in [(10, 39.424371, 17.096605), (50, 4.4223955, 2.1817812), (100, 1.251038, 1.2292134), (150, 0.93107207, 1.1648471)]),
]


@pytest.mark.parametrize(("stack", "height", "normal", "along"), CALCULATED)
def test_rates_over_metal_and_silicon(stack, height, normal, along):
    """Chance, Prock & Silbey, Adv. Chem. Phys. 37, 1 (1978), in the situations of Drexhage (silver) and of metal-induced energy transfer: calculated.

    1e-7: eight digits given, seven in places.
    """
    rates = total_rates(PlaneStack(*stack), height)
    assert (rates.perpendicular, rates.parallel) == pytest.approx((normal, along), rel=1e-7)


@pytest.mark.parametrize(
    ("height", "normal", "along"),
    [
        (5, 0.79055543, 0.22297649),
        (10, 0.73902844, 0.28021438),
        (20, 0.63342666, 0.41097891),
        (100, 0.04000836, 1.3406407),
        (200, 0.52704039, 0.80094833),
        (300, 0.90517104, 1.0814683),
    ],
)
def test_power_up_over_silver(height, normal, along):
    """Silver, 612 nm, host 1.5: power to the far field above, calculated; eight decimals given, seven digits in places."""
    up = radiated_up(PlaneStack(*SILVER), height)
    assert (up.perpendicular, up.parallel) == pytest.approx((normal, along), rel=1e-7, abs=6e-9)


def test_oxide_film_on_silicon():
    """Air, z = 10 nm over 100 nm of SiO2 on silicon, 637 nm: 2.560196541, 1.434301350, up 0.1667688733, 0.5678524145 (calculated).

    Indices from Malitson 1965 and, interpolated, Aspnes & Studna 1983: they came to six digits. A change of 1e-6 in that of SiO2
    moves the first figure by 2e-6; hence 3e-6.
    """
    stack = PlaneStack((1.0, 1.456897, 3.875052 + 0.018853j), (100.0,), 637.0)
    rates, up = total_rates(stack, 10.0), radiated_up(stack, 10.0)
    assert (rates.perpendicular, rates.parallel) == pytest.approx((2.560196541, 1.434301350), rel=3e-6)
    assert (up.perpendicular, up.parallel) == pytest.approx((0.1667688733, 0.5678524145), rel=3e-6)


@pytest.mark.parametrize(
    ("stack", "height"), [(SILVER, 2.0), (TRANSFER, 80.0), (LOSSLESS, 2.0), (THIN_SILVER, 80.0), (NEAR_RESONANCE, 2.0), (NEAR_RESONANCE, 80.0)]
)
def test_tensor_gives_the_rates(stack, height):
    """F = 1 + (6 pi/k) Im(C) and Im(A0) at rho = 0, Z = 2z: 1e-14, both leave 20 digits as doubles."""
    rates = total_rates(PlaneStack(*stack), height)
    a0, _, b, c = reflected_scalars(LayerStack(*stack), 0.0, 2.0 * height)
    scale = 6.0 * mp.pi / (2.0 * mp.pi * mp.mpf(stack[0][0]) / stack[2])
    assert (1.0 + float(scale * c.imag), 1.0 + float(scale * a0.imag)) == pytest.approx((rates.perpendicular, rates.parallel), rel=1e-14)
    assert b == 0


def spread(one: tuple, other: tuple) -> float:
    """Largest difference over the largest of the four scalars."""
    return float(max(abs(a - b) for a, b in zip(one, other)) / max(abs(a) for a in one))


SEVERAL_SECONDS = [
    (TRANSFER, 8.0, 5.0, 9.0),
    (THIN_SILVER, 2.0, 0.5, 9.0),
    (LOSSLESS, 400.0, 60.0, 5.0),
    (FOUR_FILMS, 25.0, 3.0, 18.0),
    (FOUR_FILMS, 60.0, 400.0, 18.0),
    (NEAR_RESONANCE, 2000.0, 300.0, 9.0),
]


@pytest.mark.parametrize(
    ("stack", "rho", "height", "end"),
    [(TRANSFER, 3.0, 5.0, 9.0), (GOLD, 8.0, 5.0, 5.0), *(pytest.param(*row, marks=pytest.mark.slow) for row in SEVERAL_SECONDS)],
)
def test_tensor_does_not_depend_on_the_path(stack, rho, height, end):
    """Both forms of the tail. 1e-16: what quadrature and the end of the tails leave (measured 1e-17 at most)."""
    layers = LayerStack(*stack)
    assert spread(reflected_scalars(layers, rho, height), reflected_scalars(layers, rho, height, end=end, depth=0.29)) < 1e-16


def test_both_tails_join():
    """The path changes its form at rho = Z: across 2e-12 of it the scalars are continuous. 1e-10: their logarithmic slope is below 5."""
    layers = LayerStack(*GOLD)
    assert spread(reflected_scalars(layers, 20.0 * (1.0 - 1e-12), 20.0), reflected_scalars(layers, 20.0 * (1.0 + 1e-12), 20.0)) < 1e-10


def free_tensor(k: complex, separation) -> np.ndarray:
    """(I + grad grad/k^2) exp(ikR)/(4 pi R)."""
    r = np.linalg.norm(separation)
    outer = np.outer(separation, separation) / r**2
    ikr = 1j * k * r
    return np.exp(ikr) / (4.0 * math.pi * r) * ((1.0 - 1.0 / ikr + 1.0 / ikr**2) * np.eye(3) + (-1.0 + 3.0 / ikr - 3.0 / ikr**2) * outer)


def test_tensor_of_a_perfect_mirror():
    """An index of 1e10 i: the field of the mirrored dipole in free space, up to terms of order 1e-10; x and y of the image change sign."""
    found = reflected_tensor(LayerStack((1.33, 1e10j), (), 600.0), 42.0, -56.0, 110.0, end=4.0)
    mirrored = free_tensor(2.0 * math.pi * 1.33 / 600.0, np.array([42.0, -56.0, 110.0])) @ np.diag([-1.0, -1.0, 1.0])
    assert np.abs(found - mirrored).max() < 1e-9 * np.abs(mirrored).max()


def test_tensor_in_the_static_limit():
    """k R = 1e-6: the image of strength (e2 - e1)/(e2 + e1); what is left out is of relative order (k R)^2 |eps|."""
    eps, wavelength = -3.0 + 1.0j, 2.0 * math.pi * 1e7
    found = reflected_tensor(LayerStack((1.0, root(eps)), (), wavelength), 3.0, 4.0, 9.0)
    mirrored = free_tensor(1e-7, np.array([3.0, 4.0, 9.0])) @ np.diag([-1.0, -1.0, 1.0])
    assert np.abs(found - (eps - 1.0) / (eps + 1.0) * mirrored).max() < 1e-10 * np.abs(mirrored).max()


def test_tensor_is_reciprocal_and_turns_with_the_axes():
    """G(r, r') = G(r', r) transposed; a quarter turn of the separation about z turns the tensor. Exact to rounding."""
    layers = LayerStack(*LOSSLESS)
    there, back, turned = (reflected_tensor(layers, dx, dy, 40.0) for dx, dy in ((12.0, 5.0), (-12.0, -5.0), (-5.0, 12.0)))
    turn = np.array([[0.0, -1.0, 0.0], [1.0, 0.0, 0.0], [0.0, 0.0, 1.0]])
    assert np.abs(there - back.T).max() < 1e-15 * np.abs(there).max()
    assert np.abs(turn @ there @ turn.T - turned).max() < 1e-15 * np.abs(there).max()
    assert np.abs(there - there.T).max() > 0.01 * np.abs(there).max()  # the law is not empty


def test_tensor_of_nothing_is_nothing():
    assert not np.any(np.abs(reflected_tensor(LayerStack((1.33, 1.33, 1.33), (40.0,), 600.0), 10.0, 0.0, 20.0)) > 1e-25)


def test_tensor_refuses_the_interface():
    with pytest.raises(ValueError, match="z \\+ z' > 0"):
        reflected_tensor(LayerStack((1.0, 1.5), (), 600.0), 10.0, 0.0, 0.0)


@pytest.mark.parametrize("kz", [0.3, 1.0, 4.0])
def test_very_good_conductors_are_mirrors(kz):
    """The quadrature with an index of 1e8 i against the closed form of Chance, Prock & Silbey: the difference is of order 1e-8 /kz^2."""
    wavelength = 600.0
    rates, exact = total_rates(PlaneStack((1.0, 1e8j), (), wavelength), kz * wavelength / (2.0 * math.pi)), mirror_rates(kz)
    assert (rates.perpendicular, rates.parallel) == pytest.approx((exact.perpendicular, exact.parallel), abs=3e-8 * max(1.0, kz**-2))


def test_static_rates_are_the_limit():
    """Gold: static 975.35 against 980.57854 at 2 nm (calculated). What is left out falls with kz in second and third order: 100 to 1000 times to 0.2 nm."""
    differences = []
    for height in (2.0, 0.2):
        exact = total_rates(PlaneStack(*GOLD), height)
        static = static_rates(-12.030815 + 1.228664j, 2.0 * math.pi * height / 637.0)
        differences.append(exact.perpendicular / static.perpendicular - 1.0)
    assert differences[0] == pytest.approx(980.57854 / 975.35 - 1.0, abs=1e-5)  # six digits of the static value
    assert 100.0 < differences[0] / differences[1] < 1000.0
