"""The second implementation of plane waves in stacks against closed forms, figures and laws.

"Calculated" means evaluated from the published formula with 25 to 30 digits, apart from the code here.
"""

import math

import mpmath as mp
import pytest

from tests.reference import plane_wave_forms as forms
from tests.reference.multilayer import LayerStack, ellipsometric_angles, field, plane_wave, reflection

# indices at 632.8 nm to five decimals: Malitson 1965; N-BK7, Schott catalogue; Aspnes & Studna 1983; Johnson & Christy 1972; Rakic 1995
SILICA, BK7, SILICON = 1.45702, 1.51509, 3.88265 + 0.01963j
GOLD, SILVER, ALUMINIUM = 0.18377 + 3.43125j, 0.05625 + 4.27603j, 1.44819 + 7.53669j
HALF = 5e-6  # half a unit of the fifth decimal of n and of k
MIXED = LayerStack((1.33, 1.46, 0.2 + 3.4j, 2.0 + 0.05j, 1.52), (60.0, 30.0, 80.0), 650.0)


def reflectance(index, angle=0.0, polarization="s") -> float:
    return plane_wave(LayerStack((1.0, index), (), 632.8), angle, polarization).reflected


def blur(function, index: complex) -> float:
    """How far the five-decimal rounding of n and k can move a result, to first order, plus one unit of the tenth digit."""
    return sum(abs(function(index + step) - function(index - step)) / 2.0 for step in (HALF, HALF * 1j) if index.imag or step.imag == 0) + 1e-10


@pytest.mark.parametrize(
    ("index", "expected"),
    [
        (1.5 + 0j, 0.04),
        (SILICA + 0j, 0.0345980497),
        (BK7 + 0j, 0.0419430432),
        (SILICON, 0.348566923),
        (GOLD, 0.944205426),
        (SILVER, 0.98840151),
        (ALUMINIUM, 0.907751705),
    ],
)
def test_normal_incidence(index, expected):
    """Fresnel at normal incidence, 632.8 nm: calculated with unrounded indices. The rounding of the indices here is the tolerance."""
    assert reflectance(index) == pytest.approx(forms.normal_reflectance(index), rel=1e-14)
    assert abs(reflectance(index) - expected) <= blur(forms.normal_reflectance, index)
    assert blur(forms.normal_reflectance, index) < 2e-6  # so at least five digits are checked


@pytest.mark.parametrize(("index", "s", "p"), [(1.5 + 0j, 0.29959468, 0.042490393), (SILICON, 0.69479024, 0.024228396), (GOLD, 0.98123567, 0.89260447)])
def test_seventy_degrees(index, s, p):
    """Reflectance at 70 degrees, 632.8 nm: calculated with unrounded indices; eight digits given."""
    for polarization, expected in (("s", s), ("p", p)):
        found = reflectance(index, 70.0, polarization)
        bound = blur(lambda n, which=polarization: abs(forms.fresnel(1.0, n, 70.0)["sp".index(which)]) ** 2, index)
        assert abs(found - expected) <= bound + 5e-9
        assert bound < 3e-6


@pytest.mark.parametrize("angle", [0.0, 30.0, 70.0, 89.0])
@pytest.mark.parametrize(("host", "base"), [(1.0, 1.5), (1.5, 1.0), (1.33, 0.2 + 3.4j), (1.0, 3.88 + 0.02j)])
def test_one_interface_is_fresnel(host, base, angle):
    """Amplitudes with their phases, total reflection included: 1e-13 is double precision of the closed form near grazing."""
    r_s, r_p, t_s, t_p = forms.fresnel(host, base, angle)
    s, p = (plane_wave(LayerStack((host, base), (), 600.0), angle, polarization) for polarization in "sp")
    assert (s.r, p.r, s.t, p.t) == pytest.approx((r_s, r_p, t_s, t_p), rel=1e-13)


def test_special_angles():
    """No reflected p light at Brewster's angle; all light comes back just beyond the critical one. From silicon: atan(3.8827) = 75.56 deg."""
    assert forms.brewster_angle_deg(1.0, 3.8827) == pytest.approx(75.56, abs=0.005)
    assert plane_wave(LayerStack((1.0, 1.5), (), 600.0), forms.brewster_angle_deg(1.0, 1.5), "p").reflected < 1e-30
    beyond = plane_wave(LayerStack((1.5, 1.0), (), 600.0), forms.critical_angle_deg(1.5, 1.0) + 1e-6, "s")
    assert beyond.reflected == pytest.approx(1.0, abs=1e-14)
    assert beyond.transmitted == pytest.approx(0.0, abs=1e-14)


@pytest.mark.parametrize("angle", [0.0, 45.0, 80.0])
@pytest.mark.parametrize("polarization", ["s", "p"])
def test_power_is_conserved(angle, polarization):
    """Reflected + transmitted + the loss integrated film by film: 1e-13 from quadrature with 18 digits. No lossless film absorbs."""
    out = plane_wave(MIXED, angle, polarization)
    assert out.reflected + out.transmitted + sum(out.absorbed) == pytest.approx(1.0, abs=1e-13)
    assert out.absorbed[0] == 0.0
    assert min(out.absorbed[1:]) > 0.001


@pytest.mark.parametrize("polarization", ["s", "p"])
def test_fields_match_at_the_interfaces(polarization):
    """Tangential E and eps E_z from both sides, 1e-9 nm apart: slopes of the order k |n| = 0.03/nm allow 1e-9. At z = 0: 1 + r."""
    eps = [n**2 for n in MIXED.index]
    for layer, z in enumerate((0.0, -60.0, -90.0, -170.0)):
        above, below = field(MIXED, 40.0, polarization, z), field(MIXED, 40.0, polarization, z - 1e-9)
        assert above[:2] == pytest.approx(below[:2], abs=1e-9)
        assert eps[layer] * above[2] == pytest.approx(eps[layer + 1] * below[2], abs=1e-8)
    cosine, sine = math.cos(math.radians(40.0)), math.sin(math.radians(40.0))
    r, top = plane_wave(MIXED, 40.0, polarization).r, field(MIXED, 40.0, polarization, 0.0)
    expected = (0.0, 1.0 + r, 0.0) if polarization == "s" else (cosine * (1.0 - r), 0.0, sine * (1.0 + r))
    assert top == pytest.approx(expected, abs=1e-14)


def test_incident_and_transmitted_waves_keep_their_amplitude():
    """Without interfaces the field is the incident wave at any depth; in the base it is t times a plane wave. 1e-13: double rounding."""
    cosine, sine = math.cos(math.radians(40.0)), math.sin(math.radians(40.0))
    even = LayerStack((1.33, 1.33, 1.33), (100.0,), 650.0)
    for z in (70.0, -30.0, -400.0):
        phase = complex(mp.expj(-2 * mp.pi * 1.33 / 650 * mp.mpf(cosine) * z))
        assert field(even, 40.0, "p", z) == pytest.approx((cosine * phase, 0.0, sine * phase), abs=1e-13)
        assert field(even, 40.0, "s", z)[1] == pytest.approx(phase, abs=1e-13)
    glass = LayerStack((1.0, 1.5), (), 650.0)
    assert sum(abs(e) ** 2 for e in field(glass, 40.0, "p", -500.0)) == pytest.approx(abs(plane_wave(glass, 40.0, "p").t) ** 2, rel=1e-13)


@pytest.mark.parametrize(
    ("thickness", "psi", "delta"),
    [
        (0, 10.577539, 179.205),
        (2, 10.623216, 173.4945),
        (25, 15.111949, 122.3669),
        (50, 22.864121, 95.852152),
        (100, 41.060384, 79.790036),
        (200, 33.85844, 278.90664),
    ],
)
def test_ellipsometry_of_silica_on_silicon(thickness, psi, delta):
    """70 degrees, 632.8 nm, sign of Delta as in handbooks: calculated with unrounded indices.

    3e-4 degrees: five decimals in n and k, of which k of silicon moves Delta most.
    """
    found = ellipsometric_angles(LayerStack((1.0, SILICA, SILICON), (thickness,), 632.8), 70.0)
    assert found == pytest.approx((psi, delta), abs=3e-4)


@pytest.mark.parametrize(
    ("pairs", "expected"), [(0, 0.306470359), (1, 0.672153337), (2, 0.872431695), (3, 0.954086816), (4, 0.983938487), (8, 0.999771917)]
)
def test_quarter_wave_stacks(pairs, expected):
    """ZnS 2.3 and cryolite 1.35 on glass 1.52: calculated, nine decimals given. Born & Wolf print such a table (30.6 % for no pair: from memory).

    The matrices with films of a quarter wave must give the closed form: 1e-14.
    """
    high, low, base, wavelength = 2.3, 1.35, 1.52, 500.0
    closed = forms.quarter_wave_reflectance(high, low, base, pairs)
    assert closed == pytest.approx(expected, abs=6e-10)
    films = [high, *[low, high] * pairs]
    stack = LayerStack((1.0, *films, base), tuple(wavelength / mp.mpf(4 * n) for n in films), wavelength)
    assert plane_wave(stack, 0.0, "s").reflected == pytest.approx(closed, abs=1e-14)


def test_quarter_wave_coating():
    """MgF2 1.38 on glass 1.52: 0.01260079, calculated."""
    closed = forms.quarter_wave_film_reflectance(1.38, 1.52)
    assert closed == pytest.approx(0.01260079, abs=6e-9)
    stack = LayerStack((1.0, 1.38, 1.52), (mp.mpf(600) / 4 / mp.mpf(1.38),), 600.0)
    assert plane_wave(stack, 0.0, "p").reflected == pytest.approx(closed, abs=1e-14)
    assert forms.quarter_wave_film_reflectance(math.sqrt(1.52), 1.52) == pytest.approx(0.0, abs=1e-15)


PLASMONS = [
    # metal, dielectric index, n_eff, intensity length in um or None
    (GOLD, 1.0, 1.04492706 + 0.00516071j, 9.757689),
    (SILVER, 1.0, 1.02850473 + 0.00078251j, 64.352),
    (GOLD, 1.33, 1.44151279 + 0.01355073j, None),
]


@pytest.mark.parametrize(("metal", "dielectric", "expected", "length"), PLASMONS)
def test_surface_plasmon(metal, dielectric, expected, length):
    """sqrt(e1 e2/(e1 + e2)) at 632.8 nm: calculated with unrounded indices; tolerance from the rounding of the metal's index.

    The reflection of p light has its pole there: on a way of 1e-9 from it the amplitude is above 1e6.
    """

    def real(n):
        return forms.surface_plasmon_index(n**2, dielectric**2).real

    def imaginary(n):
        return forms.surface_plasmon_index(n**2, dielectric**2).imag

    found = forms.surface_plasmon_index(metal**2, dielectric**2)
    assert abs(found.real - expected.real) <= blur(real, metal) + 5e-9
    assert abs(found.imag - expected.imag) <= blur(imaginary, metal) + 5e-9
    if length is not None:
        assert forms.surface_plasmon_length_nm(metal**2, dielectric**2, 632.8) / 1000.0 == pytest.approx(length, rel=2e-4)  # k of silver: 1e-4
    stack = LayerStack((dielectric, metal), (), 632.8)
    with mp.workdps(30):
        at_pole = reflection(stack, mp.mpmathify(found) * (1 - mp.mpc("1e-9", "1e-9")), "p")
        aside = reflection(stack, mp.mpmathify(found) * (1 - mp.mpc("1e-3", "1e-3")), "p")
    assert abs(at_pole) > 1e6
    assert abs(aside) < 1e5


@pytest.mark.parametrize(
    ("metal", "dielectric", "angle", "least"), [(GOLD, 1.0, 43.785916, 0.005815), (SILVER, 1.0, 42.802863, 0.0262888), (GOLD, 1.33, 71.827045, 0.0094925)]
)
def test_plasmon_resonance_through_a_thin_film(metal, dielectric, angle, least):
    """Prism of N-BK7, 50 nm of metal, 632.8 nm (Kretschmann's arrangement): angle and depth of the dip, calculated with unrounded indices.

    The stated angle must be the minimum of R to 1e-4 degrees and R there equal to 5e-4: n of silver, 0.05625, is given to 1e-4 of itself.
    """
    stack = LayerStack((BK7, metal, dielectric), (50.0,), 632.8)
    with mp.workdps(30):
        reflected = {step: float(abs(reflection(stack, BK7 * mp.sin(mp.radians(mp.mpf(angle) + step)), "p")) ** 2) for step in (-5e-4, 0.0, 5e-4)}
    assert reflected[0.0] == pytest.approx(least, rel=5e-4)
    slope, curvature = (reflected[5e-4] - reflected[-5e-4]) / 1e-3, (reflected[5e-4] + reflected[-5e-4] - 2.0 * reflected[0.0]) / 2.5e-7
    assert curvature > 0.0
    assert abs(slope / curvature) < 1e-4


@pytest.mark.parametrize(("angle", "s", "p"), [(45.0, 0.63661977, 1.0185916), (60.0, 0.33246383, 0.23127919)])
def test_goos_haenchen_shift(angle, s, p):
    """Artmann's shift for n = 1.5, in vacuum wavelengths: calculated; eight digits. The phase of r gives the same: -(1/(2 pi n)) d(arg r)/d(angle)."""
    shifts = forms.goos_haenchen_shifts(1.5, angle)
    assert shifts == pytest.approx((s, p), rel=1e-7)
    for polarization, shift in zip("sp", shifts):
        phases = [mp.arg(mp.mpmathify(plane_wave(LayerStack((1.5, 1.0), (), 600.0), angle + step, polarization).r)) for step in (-1e-3, 1e-3)]
        slope = float((phases[1] - phases[0]) / mp.radians(mp.mpf("2e-3")))
        assert -slope / (2.0 * math.pi * 1.5) == pytest.approx(shift, rel=1e-6)  # third derivative times (1.7e-5 rad)^2
