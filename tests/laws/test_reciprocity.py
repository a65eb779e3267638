"""Source and detector may be exchanged: Lorentz reciprocity, of scattering and between emission and excitation."""

import numpy as np
import pytest

import substrate as sb
from substrate.green.far_field import DipoleSet
from substrate.observe.power import amplitudes

STACK = sb.Stack(host=1.1, films=[sb.Film(1.9, 40.0), sb.Film(0.3 + 3.0j, 25.0)], base=1.5)
BODY = [sb.Ellipsoid(material=0.4 + 2.2j, diameters_nm=(50.0, 34.0, 26.0), azimuth_deg=20.0, gap_nm=2.0)]
SETTINGS = {"quick": True, "cell_nm": 3.0, "accuracy": 1e-3}  # with a metal this sets the residual to 1e-5
WAVELENGTH = 580.0
# the iteration stops at a residual of 1e-5, and both sides carry that error
TOLERANCE = 1e-4


def solved(angle: float, azimuth: float, polarization: str, side: str):
    light = sb.PlaneWave(WAVELENGTH, angle, azimuth, polarization, side)
    out = sb.scatter(STACK, BODY, light, **SETTINGS)
    return light.waves(STACK)[0], out._solutions[0]


@pytest.mark.parametrize("first,second", [((20, 10, "p", "above"), (65, 130, "s", "above")), ((50, 0, "p", "above"), (55, 75, "p", "below"))])
def test_directions_can_be_exchanged(first, second):
    """Dipoles made by wave 1, seen through wave 2, and the other way round; wave 2 from below is beyond the critical angle."""
    wave_1, solution_1 = solved(*first)
    wave_2, solution_2 = solved(*second)
    centres = solution_1.problem.cells.centers_nm
    forward = (wave_2.field(centres) * solution_1.dipoles).sum()
    backward = (wave_1.field(centres) * solution_2.dipoles).sum()
    assert abs(forward - backward) < TOLERANCE * abs(forward)


def test_far_field_is_the_projection_on_the_returning_wave():
    """Amplitudes found by the spectrum of the dipoles equal k^2/(4 pi) sum E . p with the wave sent in from there."""
    _, solution = solved(30, 0, "p", "above")
    centres, dipoles = solution.problem.cells.centers_nm, solution.dipoles
    layers = STACK.at(WAVELENGTH)
    source = DipoleSet(centres, dipoles)
    for polar, azimuth in ((35.0, 50.0), (80.0, -110.0), (105.0, 20.0), (170.0, 200.0)):
        side = "above" if polar < 90 else "below"
        incidence = polar if polar < 90 else 180.0 - polar
        s, p = amplitudes(source, layers, polar, azimuth)
        for found, polarization in ((s, "s"), (p, "p")):
            wave = sb.PlaneWave(WAVELENGTH, incidence, azimuth + 180.0, polarization, side).waves(STACK)[0]
            norm = layers.k_host**2 / (4 * np.pi) * (1.0 if side == "above" else np.sqrt(1.5 / 1.1))
            expected = norm * (wave.field(centres) * dipoles).sum()
            assert abs(abs(found) - abs(expected)) < 1e-10 * (abs(s) + abs(p))  # the same sums in another order


def test_emission_pattern_is_the_excitation_seen_backwards():
    """Power per steradian of an emitter = 3/(8 pi) |E . d|^2 at its place for plane waves from there, summed over s and p."""
    place, moment = (6.0, -9.0, 45.0), np.array([0.48, -0.6, 0.64])
    emission = sb.emit(STACK, BODY, sb.Emitter(place, WAVELENGTH, tuple(moment)), **SETTINGS)
    for polar, azimuth in ((40.0, 30.0), (75.0, 160.0)):
        power = 0.0
        for polarization in ("s", "p"):
            light = sb.PlaneWave(WAVELENGTH, polar, azimuth + 180.0, polarization)
            field = sb.scatter(STACK, BODY, light, **SETTINGS).field([place])[0]
            power += 3.0 / (8.0 * np.pi) * abs(field @ moment) ** 2
        assert abs(emission.pattern([polar], [azimuth])[0] - power) < 3 * TOLERANCE * power
