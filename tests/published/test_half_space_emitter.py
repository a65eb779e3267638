"""Emitters over plane stacks: the program against a quadrature of its own kind and against figures of the literature."""

import cmath
import math

import pytest

import substrate as sb
from substrate.green.sommerfeld import reflected_scalars
from substrate.green.table import build_table
from tests.reference.half_space_emitter import PlaneStack, mirror_rates, radiated_up, static_rates, total_rates

STACKS = {
    "gold": ((1.0, cmath.sqrt(-12.030815 + 1.228664j)), (), 637.0),
    "silicon": ((1.0, cmath.sqrt(15.074612 + 0.1524001j)), (), 632.8),
    "glass": ((1.0, 1.5), (), 600.0),
    "silica and gold in water": ((1.33, 1.46, 0.2 + 3.4j, 1.52), (60.0, 30.0), 650.0),
}
HEIGHTS = [2.0, 30.0, 400.0]


def program_stack(index, thickness) -> sb.Stack:
    return sb.Stack(index[0], [sb.Film(n, d) for n, d in zip(index[1:-1], thickness)], index[-1])


def emission(index, thickness, wavelength, height, orientation="vertical", **options):
    emitter = sb.Emitter((0.0, 0.0, height), wavelength, orientation, **options)
    return sb.emit(program_stack(index, thickness), [], emitter)


def both(index, thickness, wavelength, height) -> tuple[float, float]:
    return tuple(emission(index, thickness, wavelength, height, o).total.value for o in ("vertical", "horizontal"))


@pytest.mark.parametrize("name", STACKS)
@pytest.mark.parametrize("height", HEIGHTS)
def test_total_rates_against_another_quadrature(name, height):
    """1e-9: the tolerance that the program sets itself for its integrals; the reference has 12 digits and more."""
    exact = total_rates(PlaneStack(*STACKS[name]), height)
    assert both(*STACKS[name], height) == pytest.approx((exact.perpendicular, exact.parallel), rel=1e-9)


@pytest.mark.parametrize("name", STACKS)
def test_power_up_against_another_quadrature(name):
    """1e-9: smooth integrals over real angles on both sides."""
    exact = radiated_up(PlaneStack(*STACKS[name]), 40.0)
    up = tuple(emission(*STACKS[name], 40.0, o).up.value for o in ("vertical", "horizontal"))
    assert up == pytest.approx((exact.perpendicular, exact.parallel), rel=1e-9)


@pytest.mark.parametrize("name", STACKS)
def test_table_against_another_quadrature(name):
    """1e-6: what the table accepts of itself in the worst case (its goal is 1e-8)."""
    index, thickness, wavelength = STACKS[name]
    layers = program_stack(index, thickness).at(wavelength)
    table = build_table(layers, 60.0, 20.0, 300.0)
    for height in (12.0, 130.0):
        a0, _, _, c = (complex(value) for value in table.scalars([0.0], [2.0 * height])[:, 0, 0])
        exact = total_rates(PlaneStack(*STACKS[name]), height)
        scale = 6.0 * math.pi / layers.k_host**3
        assert 1.0 + scale * c.imag == pytest.approx(exact.perpendicular, rel=1e-6)
        assert 1.0 + scale * a0.imag == pytest.approx(exact.parallel, rel=1e-6)


@pytest.mark.parametrize("kz", [0.1, 0.5, 1.0, 2.0, math.pi, 5.0])
def test_nearly_perfect_mirror(kz):
    """Chance, Prock & Silbey, Adv. Chem. Phys. 37, 1 (1978). A metal of index N i is a perfect mirror up to order 1/N: measured 1.3/N at kz = 1."""
    size = 1e6
    exact = mirror_rates(kz)
    found = both((1.0, size * 1j), (), 600.0, kz * 600.0 / (2.0 * math.pi))
    assert found == pytest.approx((exact.perpendicular, exact.parallel), abs=2.0 / size * max(1.0, kz**-2))


LUKOSZ_KUNZ = [
    # index, perpendicular total, fraction into the base, parallel total, fraction
    (1.5, 2.303574466, 0.86137083, 1.388094563, 0.83658567),
    (1.457, 2.194324315, 0.85666798, 1.347165645, 0.8250859),
    (2.0, 3.448513556, 0.88747827, 1.902269139, 0.9179883),
    (4.0, 6.407683144, 0.8987494, 3.999759902, 0.98523466),
]


@pytest.mark.parametrize(("index", "perpendicular", "below_perpendicular", "parallel", "below_parallel"), LUKOSZ_KUNZ)
def test_emitter_on_a_dielectric(index, perpendicular, below_perpendicular, parallel, below_parallel):
    """Lukosz & Kunz, JOSA 67, 1607 (1977), z -> 0: calculated from the formula with 25 digits.

    The program stands at z = 1e-3 nm; the first correction is of the order k z n^3 = 6e-4 at most for n = 4 (1e-5 each, times n^3).
    """
    for orientation, total, fraction in (("vertical", perpendicular, below_perpendicular), ("horizontal", parallel, below_parallel)):
        out = emission((1.0, index), (), 633.0, 1e-3, orientation)
        bound = 1e-5 * index**3
        assert out.total.value == pytest.approx(total, rel=bound)
        assert out.down.value / (out.up.value + out.down.value) == pytest.approx(fraction, rel=bound)


@pytest.mark.parametrize(("orientation", "fraction"), [("vertical", 0.68175772), ("horizontal", 0.55402458)])
def test_light_beyond_the_critical_angle(orientation, fraction):
    """Lukosz & Kunz 1977, n = 1.5, z -> 0: share of all power above the critical angle in the glass."""
    critical = 180.0 - math.degrees(math.asin(1.0 / 1.5))
    emitter = sb.Emitter((0.0, 0.0, 1e-3), 633.0, orientation)
    out = sb.emit(sb.Stack(1.0, [], 1.5), [], emitter, [sb.Collector("beyond", polar_deg=(90.0, critical))])
    assert out.collected["beyond"].value / out.total.value == pytest.approx(fraction, rel=4e-5)  # first order in k z = 1e-5, as above


def test_emitter_fifty_nanometres_above_glass():
    """z = 50 nm, 633 nm, n = 1.5: 1.62723830585 and 1.06643324421, from power balance and from the reflected field alike (calculated)."""
    assert both((1.0, 1.5), (), 633.0, 50.0) == pytest.approx((1.62723830585, 1.06643324421), rel=1e-9)


SILVER = ((1.5, cmath.sqrt(-16.89961 + 0.48198548j)), (), 612.0)
TRANSFER = ((1.33, cmath.sqrt(-15.051234 + 1.0515786j), 1.52), (10.0,), 680.0)
LOSSLESS = ((1.0, math.sqrt(2.1316), 1.5), (100.0,), 600.0)
# stack, height, total perpendicular and parallel, up perpendicular and parallel (None: not given)
CALCULATED = [
    (SILVER, 5, (13.456475, 4.7527784), (0.79055543, 0.22297649)),
    (SILVER, 10, (5.7566192, 1.1144731), (0.73902844, 0.28021438)),
    (SILVER, 20, (4.2222436, 0.73357183), (0.63342666, 0.41097891)),
    (SILVER, 50, (2.7079780, 1.0348117), (0.32768625, 0.86104048)),
    (SILVER, 100, (1.3336621, 1.4339349), (0.04000836, 1.3406407)),
    (SILVER, 200, (0.92286206, 0.83265509), (0.52704039, 0.80094833)),
    (SILVER, 300, (1.0338863, 1.0953299), (0.90517104, 1.0814683)),
    (STACKS["gold"], 2, (980.57854, 488.20314), None),
    (STACKS["gold"], 5, (67.257694, 31.810240), None),
    (STACKS["gold"], 10, (12.126815, 4.3983114), None),
    (STACKS["gold"], 20, (4.8241935, 0.95647319), (0.8566961, 0.23766374)),
    (STACKS["gold"], 50, (3.0856140, 0.67019777), None),
    (STACKS["gold"], 100, (2.0602361, 1.0678029), None),
    (STACKS["gold"], 200, (1.0147401, 1.3679799), None),
    (STACKS["silicon"], 2, (62.487062, 31.844088), None),
    (STACKS["silicon"], 5, (9.0699658, 4.9925066), None),
    (STACKS["silicon"], 10, (5.2103266, 2.8613358), None),
    (STACKS["silicon"], 20, (3.8295507, 1.9098958), None),
    (STACKS["silicon"], 50, (2.3647299, 0.98243231), None),
    (STACKS["silicon"], 100, (1.5765817, 0.86687923), None),
    (TRANSFER, 5, (84.385714, 38.652249), None),
    (TRANSFER, 10, (39.424371, 17.096605), None),
    (TRANSFER, 20, (19.643119, 8.3761122), None),
    (TRANSFER, 50, (4.4223955, 2.1817812), None),
    (TRANSFER, 100, (1.251038, 1.2292134), None),
    (TRANSFER, 150, (0.93107207, 1.1648471), None),
    (TRANSFER, 200, (0.92278969, 1.0131942), None),
    (LOSSLESS, 30, (1.774012069, 1.138763620), (0.3104610183, 0.2608162523)),
]


@pytest.mark.parametrize(("stack", "height", "total", "up"), CALCULATED)
def test_rates_of_the_literature_situations(stack, height, total, up):
    """Situations of Drexhage, of metal-induced energy transfer (Gregor et al., Nanophotonics 2019, doi 10.1515/nanoph-2019-0201) and of a silica film.

    Calculated from Chance, Prock & Silbey 1978. 1e-7: seven to ten digits are given, and the last one of some is uncertain.
    """
    vertical, horizontal = (emission(*stack, float(height), o) for o in ("vertical", "horizontal"))
    assert (vertical.total.value, horizontal.total.value) == pytest.approx(total, rel=1e-7)
    if up is not None:
        assert (vertical.up.value, horizontal.up.value) == pytest.approx(up, rel=2e-7)


def test_static_limit():
    """At 1 nm above gold the static term is all but the whole: what it leaves out is of relative order (k z)^2 |eps| = 1e-3; 9e-4 measured."""
    eps = -12.030815 + 1.228664j
    exact = static_rates(eps, 2.0 * math.pi / 637.0)
    assert both(*STACKS["gold"], 1.0) == pytest.approx((exact.perpendicular, exact.parallel), rel=1.5e-3)


def test_yield_and_lifetime_follow_the_rates():
    """tau/tau0 = 1/(1 - q0 + q0 F), quantum yield q0 F_rad/(1 - q0 + q0 F) with F = 4.4223955 (thin gold, z = 50 nm) and q0 = 0.6."""
    out = emission(*TRANSFER, 50.0, "vertical", quantum_yield=0.6, lifetime_ns=3.2)
    expected = 1.0 / (0.4 + 0.6 * 4.4223955)
    assert out.lifetime_ratio.value == pytest.approx(expected, rel=1e-7)  # eight digits of F given
    assert out.lifetime_ns.value == pytest.approx(3.2 * expected, rel=1e-7)
    radiated = out.up.value + out.down.value
    assert out.quantum_yield.value == pytest.approx(0.6 * radiated * expected, rel=1e-7)


def test_emission_is_made_of_the_scalars():
    """total = 1 + 6 pi/k^3 Im(C), and Im(A0) for the horizontal dipole, at rho = 0 and Z = 2 z: exact to rounding."""
    index, thickness, wavelength = STACKS["gold"]
    layers = program_stack(index, thickness).at(wavelength)
    scalars, _ = reflected_scalars(layers, 0.0, 50.0)
    scale = 6.0 * math.pi / layers.k_host**3
    expected = (1.0 + scale * scalars[3].imag, 1.0 + scale * scalars[0].imag)
    assert both(index, thickness, wavelength, 25.0) == pytest.approx(expected, rel=1e-9)  # two refinements of one integral
