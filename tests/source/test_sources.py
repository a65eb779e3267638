"""Plane waves and emitters: definitions and refusals."""

import numpy as np
import pytest

from substrate.errors import InputError
from substrate.medium.fresnel import plane_wave_field
from substrate.medium.stack import Film, Stack
from substrate.source.emitter import Emitter
from substrate.source.plane_wave import PlaneWave

STACK = Stack(1.1, [Film(2.0, 70.0), Film(0.3 + 3.0j, 20.0)], 1.6)
POINTS = np.array([[3.0, -8.0, 0.0], [40.0, 12.0, 25.0], [-7.0, 90.0, 300.0]])


@pytest.mark.parametrize("polarization", ["s", "p", "circular", (0.6, 0.8j)])
def test_excitation_above_is_that_of_the_layer_by_layer_field(polarization):
    light = PlaneWave(550.0, 40.0, 25.0, polarization)
    (wave,) = light.waves(STACK)
    expected = plane_wave_field(wave.layers, wave.q, wave.azimuth_rad, wave.amplitudes, POINTS)
    assert np.abs(wave.field(POINTS) - expected).max() < 1e-12


@pytest.mark.parametrize("angle", [20.0, 70.0])
def test_light_from_below_is_the_flipped_stack_seen_from_above(angle):
    """Mirror the stack in z: transmitted fields of s light agree, those of p light with z turned over and the sign of p = k x s."""
    flipped = Stack(1.6, [Film(0.3 + 3.0j, 20.0), Film(2.0, 70.0)], 1.1)
    for polarization, sign in (("s", 1.0), ("p", -1.0)):
        (wave,) = PlaneWave(550.0, angle, 0.0, polarization, side="below").waves(STACK)
        (other,) = PlaneWave(550.0, angle, 0.0, polarization).waves(flipped)
        mirrored = POINTS * [1, 1, -1] - [0.0, 0.0, 90.0]
        mirrored[:, 2] -= 1e-9  # just below the last interface
        expected = sign * plane_wave_field(other.layers, other.q, 0.0, other.amplitudes, mirrored) * [1, 1, -1]
        assert np.abs(wave.field(POINTS) - expected).max() < 1e-7


@pytest.mark.parametrize("side", ["above", "below"])
@pytest.mark.parametrize("polarization", ["s", "p"])
def test_field_anywhere_joins_the_field_above_and_is_continuous(side, polarization):
    """Above z = 0 both ways agree; tangential fields pass through every interface."""
    (wave,) = PlaneWave(550.0, 35.0, 25.0, polarization, side).waves(STACK)
    assert np.abs(wave.field_anywhere(POINTS) - wave.field(POINTS)).max() < 1e-10  # a shift of 1e-9 nm in the mirror
    for z in wave.layers.interfaces_nm():
        up, down = (wave.field_anywhere([[5.0, 3.0, z + step]])[0] for step in (1e-7, -1e-7))
        assert np.abs(up[:2] - down[:2]).max() < 1e-7  # the step times a slope of order k
    deep = wave.field_anywhere([[0.0, 0.0, -500.0]])[0]
    assert np.linalg.norm(deep) > 1e-3


def test_field_obeys_the_divergence_law():
    (wave,) = PlaneWave(550.0, 40.0, 25.0, "p").waves(STACK)
    step = 1e-3
    here = np.array([10.0, 5.0, 40.0])
    divergence = sum((wave.field(here + step * e)[0, i] - wave.field(here - step * e)[0, i]) / (2 * step) for i, e in enumerate(np.eye(3)))
    assert abs(divergence) < 1e-9  # the terms are of order k = 0.01; rounding of differences


def test_jones_pairs_are_normalised():
    ((s, p),) = PlaneWave(500.0, polarization=(3.0, 4.0j)).jones()
    assert (s, p) == (0.6, 0.8j)
    assert len(PlaneWave(500.0, polarization="unpolarized").jones()) == 2


@pytest.mark.parametrize(
    "make,words",
    [
        (lambda: PlaneWave(-1.0), "wavelength_nm"),
        (lambda: PlaneWave(500.0, 90.0), "below 90"),
        (lambda: PlaneWave(500.0, polarization="q"), "'unpolarized'"),
        (lambda: PlaneWave(500.0, polarization=(0, 0)), "not zero"),
        (lambda: PlaneWave(500.0, polarization=3), "Jones pair"),
        (lambda: PlaneWave(500.0, side="left"), "'above', 'below'"),
        (lambda: Emitter((0, 0, 0), 500.0), "z > 0"),
        (lambda: Emitter((0, 0, 5), 500.0, "upright"), "isotropic"),
        (lambda: Emitter((0, 0, 5), 500.0, (0, 0, 0)), "not zero"),
        (lambda: Emitter((0, 0, 5), 500.0, quantum_yield=0.0), "above 0 up to 1"),
        (lambda: Emitter((0, 0, 5), 500.0, lifetime_ns=-1.0), "above 0"),
    ],
)
def test_refusals(make, words):
    with pytest.raises(InputError, match=words):
        make()


def test_moments_have_unit_length_and_weights_add_up():
    for orientation in ("vertical", "horizontal", "isotropic", "x", "y", "z", (1.0, 2.0, 3.0)):
        moments = Emitter((0, 0, 5), 500.0, orientation).moments()
        assert sum(weight for _, weight in moments) == pytest.approx(1.0)
        assert all(np.linalg.norm(moment) == pytest.approx(1.0) for moment, _ in moments)
