"""The second implementations against printed and calculated figures, before the program is judged by them.

"Calculated" means evaluated from the published formula with 25 to 30 digits, apart from the code here. Tolerances: half a unit of
the last digit given, or one where that digit was rounded from rounded inputs.
"""

import cmath
import math

import mpmath as mp
import pytest

from tests.reference.closed_forms import depolarisation_factors
from tests.reference.dipole_near_sphere import field_at_pole, rates
from tests.reference.half_space_emitter import PlaneStack, mirror_rates, radiated_up, static_rates, total_rates
from tests.reference.mie import cross_sections, efficiencies


def test_sphere_of_the_textbook_example():
    """Bohren & Huffman 1983, appendix A: radius 0.525 um, 0.6328 um, m = 1.55; printed 3.10543 and 2.92534 (from memory, reproduced by the formula)."""
    q = efficiencies(1.55, 2.0 * math.pi * 525.0 / 632.8)
    assert q.q_ext == pytest.approx(3.105425531, abs=1e-9)
    assert q.q_sca == pytest.approx(q.q_ext, rel=1e-14)  # lossless: 30-digit arithmetic, rounded once to a double
    assert q.q_back == pytest.approx(2.92534065, abs=1e-8)


WISCOMBE = [
    # index, size parameter, Q_ext, Q_sca, g
    (0.75, 10, 2.232265, 2.232265, 0.896473),
    (1.5, 10, 2.881999, 2.881999, 0.742913),
    (1.5, 100, 2.094388, 2.094388, 0.818246),
    (1.33 + 1e-5j, 1, 0.093952, 0.093923, 0.184517),
    (1.33 + 1e-5j, 100, 2.101321, 2.096594, 0.868959),
    (1.5 + 1j, 0.055, 0.101491, 1.131687e-5, 0.000491),
    (1.5 + 1j, 1, 2.336321, 0.663454, 0.192136),
    (1.5 + 1j, 100, 2.097502, 1.283697, 0.850252),
    (10 + 10j, 1, 2.532993, 2.049405, -0.110664),
    (10 + 10j, 100, 2.071124, 1.836785, 0.556215),
]


@pytest.mark.parametrize(("index", "x", "extinction", "scattering", "g"), WISCOMBE)
def test_spheres_of_wiscombe(index, x, extinction, scattering, g):
    """Wiscombe, NCAR/TN-140+STR (1979), Appl. Opt. 19, 1505 (1980): from memory, reproduced by the formula; there the index is n - ik."""
    q = efficiencies(index, x)
    assert q.q_ext == pytest.approx(extinction, abs=6e-7)
    assert q.q_sca == pytest.approx(scattering, abs=6e-7 if scattering > 0.01 else 6e-12)  # the smallest is given to seven digits
    assert q.g == pytest.approx(g, abs=6e-7)


@pytest.mark.parametrize(
    ("diameter", "scattering"),
    [(20, 0.0277445), (40, 1.78850), (60, 20.5892), (80, 117.021), (100, 450.076), (150, 4930.33), (200, 22748.9)],
)
def test_power_law_of_small_spheres(diameter, scattering):
    """Free spheres of m = 1.61 at 488 nm: calculated; six digits given."""
    assert cross_sections(1.61, diameter / 2.0, 488.0).scattering == pytest.approx(scattering, rel=3e-6)


@pytest.mark.parametrize(
    ("spec", "diameter", "wavelength", "host", "expected"),
    [
        ("gold", 80, 550, 1.33, (32490.08, 14161.89, 18328.19)),
        ("gold", 80, 532, 1.0, (10819.91, 2756.895, 8063.014)),
        ("gold", 100, 637, 1.0, (3998.402, 3028.980, 969.423)),
        ("silver", 60, 400, 1.0, (4976.310, 3753.323, 1222.987)),
    ],
)
def test_metal_spheres_with_table_indices(spec, diameter, wavelength, host, expected):
    """Cross sections in nm^2 calculated with the tables of Johnson & Christy (1972): this also reads the program's tables.

    5e-7: six to seven digits are given. It holds only while the rows are those of the paper and are interpolated linearly in wavelength.
    """
    from substrate import material

    c = cross_sections(complex(material(spec).index(float(wavelength))), diameter / 2.0, wavelength, host)
    assert (c.extinction, c.scattering, c.absorption) == pytest.approx(expected, rel=5e-7)


@pytest.mark.parametrize(("ratio", "along"), [(2.0, 0.1735639975), (3.0, 0.1087094651), (0.5, 0.5272002826), (0.25, 0.7036414867), (1.0, 1 / 3)])
def test_depolarisation_factors(ratio, along):
    """Bohren & Huffman 1983, ch. 5: calculated; ten digits given."""
    factors = depolarisation_factors(ratio)
    assert factors[0] == pytest.approx(along, abs=6e-11)
    assert factors[0] + 2.0 * factors[1] == pytest.approx(1.0, abs=1e-14)


@pytest.mark.parametrize(
    ("kz", "perpendicular", "parallel"),
    [
        (0.1, 1.996005710, 0.007982874),
        (0.5, 1.903506037, 0.189546541),
        (1.0, 1.653096662, 0.644575261),
        (2.0, 1.087083062, 1.327342467),
        (math.pi, 0.924009112, 0.962004556),
        (5.0, 1.023540083, 1.093373208),
    ],
)
def test_perfect_mirror(kz, perpendicular, parallel):
    """Chance, Prock & Silbey, Adv. Chem. Phys. 37, 1 (1978): calculated; nine decimals given."""
    r = mirror_rates(kz)
    assert (r.perpendicular, r.parallel) == pytest.approx((perpendicular, parallel), abs=6e-10)


def root(eps: complex):
    """Index from permittivity with all digits of mpmath."""
    return mp.sqrt(mp.mpmathify(eps))


SILVER = PlaneStack((1.5, root(-16.89961 + 0.48198548j)), (), 612.0)
GOLD = PlaneStack((1.0, root(-12.030815 + 1.228664j)), (), 637.0)
SILICON = PlaneStack((1.0, root(15.074612 + 0.1524001j)), (), 632.8)
TRANSFER = PlaneStack((1.33, root(-15.051234 + 1.0515786j), 1.52), (10.0,), 680.0)
LOSSLESS = PlaneStack((1.0, root(2.1316), 1.5), (100.0,), 600.0)
RATES = [
    # stack, height, perpendicular, parallel
    *((SILVER, *row) for row in [(5, 13.456475, 4.7527784), (20, 4.2222436, 0.73357183), (100, 1.3336621, 1.4339349), (300, 1.0338863, 1.0953299)]),
    *((GOLD, *row) for row in [(2, 980.57854, 488.20314), (10, 12.126815, 4.3983114), (50, 3.0856140, 0.67019777), (200, 1.0147401, 1.3679799)]),
    *((SILICON, *row) for row in [(2, 62.487062, 31.844088), (10, 5.2103266, 2.8613358), (100, 1.5765817, 0.86687923)]),
    *((TRANSFER, *row) for row in [(5, 84.385714, 38.652249), (20, 19.643119, 8.3761122), (200, 0.92278969, 1.0131942)]),
    (LOSSLESS, 30, 1.774012069, 1.138763620),
]


@pytest.mark.parametrize(("stack", "height", "perpendicular", "parallel"), RATES)
def test_emitter_over_a_stack(stack, height, perpendicular, parallel):
    """Chance, Prock & Silbey 1978 for silver, gold, silicon, a thin gold film and a silica film: calculated; eight digits given."""
    r = total_rates(stack, height)
    assert (r.perpendicular, r.parallel) == pytest.approx((perpendicular, parallel), rel=1e-7)


@pytest.mark.parametrize(
    ("stack", "height", "perpendicular", "parallel"),
    [(SILVER, 50, 0.32768625, 0.86104048), (GOLD, 20, 0.8566961, 0.23766374), (LOSSLESS, 30, 0.3104610183, 0.2608162523)],
)
def test_power_radiated_up(stack, height, perpendicular, parallel):
    """As above, power into the far field above: calculated; seven digits and more given."""
    r = radiated_up(stack, height)
    assert (r.perpendicular, r.parallel) == pytest.approx((perpendicular, parallel), rel=1e-7)


@pytest.mark.parametrize("stack", [SILVER, TRANSFER, LOSSLESS, SILICON], ids=["silver", "thin gold", "silica film", "silicon"])
@pytest.mark.parametrize("height", [3.0, 250.0])
def test_the_path_does_not_matter(stack, height):
    """12 digits from two contours; the integral is that of an analytic function."""
    one, other = total_rates(stack, height), total_rates(stack, height, depth=0.2, beyond=0.9)
    assert one.perpendicular == pytest.approx(other.perpendicular, rel=1e-12)
    assert one.parallel == pytest.approx(other.parallel, rel=1e-12)


def test_static_limit_near_gold():
    """Gold at 637 nm, z = 2 nm: static 975.35 and 488.17 (calculated); the exact values differ by less than 1 %."""
    r = static_rates(-12.030815 + 1.228664j, 2.0 * math.pi * 2.0 / 637.0)
    assert (r.perpendicular, r.parallel) == pytest.approx((975.35, 488.17), abs=0.006)


GOLD_SPHERE = [
    # distance, perpendicular total, radiative, excitation |E_r/E0|^2
    (2, 805.66892, 13.486117, 13.542582),
    (5, 63.119368, 10.185673, 10.232216),
    (10, 14.09735, 6.8732184, 6.913625),
    (20, 4.8875937, 3.8726362, 3.9116097),
    (60, 1.5526106, 1.5177254, 1.5546808),
]


@pytest.mark.parametrize(("distance", "total", "radiative", "excitation"), GOLD_SPHERE)
def test_dipole_near_a_gold_sphere(distance, total, radiative, excitation):
    """80 nm sphere, eps -12.99 + 1.09i, 650 nm, parameters of Anger, Bharadwaj & Novotny, PRL 96, 113002 (2006): calculated; seven digits given."""
    index = root(-12.99 + 1.09j)
    r = rates(index, 40.0, distance, 650.0)
    assert (r.total_perpendicular, r.radiative_perpendicular) == pytest.approx((total, radiative), rel=2e-7)
    assert field_at_pole(index, 40.0, distance, 650.0) == pytest.approx(excitation, rel=2e-7)


@pytest.mark.parametrize(("distance", "total", "radiative"), [(5, 22.869963, 0.042983895), (10, 2.7774294, 0.14580251), (20, 0.69711329, 0.42282006)])
def test_dipole_across_near_a_gold_sphere(distance, total, radiative):
    """The same, dipole parallel to the surface."""
    r = rates(root(-12.99 + 1.09j), 40.0, distance, 650.0)
    assert (r.total_parallel, r.radiative_parallel) == pytest.approx((total, radiative), rel=2e-7)


def test_a_lossless_sphere_radiates_all():
    """Total and radiative rates are different sums; without absorption they agree. 1e-14: both leave 30 digits as doubles."""
    r = rates(2.0, 40.0, 10.0, 600.0)
    assert r.radiative_perpendicular == pytest.approx(r.total_perpendicular, rel=1e-14)
    assert r.radiative_parallel == pytest.approx(r.total_parallel, rel=1e-14)


def test_indices_enter_with_a_positive_imaginary_part():
    """A sign error in the time factor would turn loss into gain."""
    assert cross_sections(cmath.sqrt(-5.4 + 2.3j), 40.0, 550.0).absorption > 0.0
