"""Power balances: what the excitation spends arrives somewhere, every term computed on its own."""

import numpy as np
import pytest

import substrate as sb
from substrate.green.far_field import DipoleSet
from substrate.observe.power import delivered, guided, radiated_down, radiated_up

WAVELENGTH = 600.0


@pytest.mark.parametrize(
    "stack",
    [
        sb.Stack(1.0, [], 1.5),
        sb.Stack(1.33, [], 1.33),
        sb.Stack(1.0, [sb.Film(2.0, 200.0)], 1.5),
        sb.Stack(1.0, [sb.Film(1.46, 90.0), sb.Film(2.3, 120.0)], 1.46),
    ],
    ids=["glass", "uniform", "waveguide", "two films"],
)
@pytest.mark.parametrize("side", ["above", "below"])
def test_lossless_stack_gives_back_all_that_the_particle_does_not_keep(stack, side):
    """work = absorbed + up + down + guided, the last by residues: nothing is found by difference."""
    body = [sb.Ellipsoid(material=1.8 + 0.2j, diameters_nm=(90.0, 60.0, 60.0), gap_nm=5.0)]
    out = sb.scatter(stack, body, sb.PlaneWave(WAVELENGTH, 35.0, 20.0, "p", side), quick=True, cell_nm=6.0, accuracy=1e-3)
    parts = out.absorbed.value + out.up.value + out.down.value + out.guided.value
    assert abs(parts / out.work.value - 1.0) < 3e-5  # residual of the iteration, 1e-5
    assert abs(out.balance.value) < 3e-5
    if len(stack.films):
        assert out.guided.value > 1e-3 * out.work.value


@pytest.mark.parametrize("film", [0.06 + 4.0j, 0.3 + 2.9j, 1.9 + 0.05j], ids=["silver-like", "gold-like", "absorbing dielectric"])
def test_power_into_lossy_films_by_flux_and_by_difference(film):
    """The flux of the spectrum through z = 0 against what the balance leaves: catches signs and branches that other tests pass."""
    stack = sb.Stack(1.0, [sb.Film(film, 45.0)], 1.5)
    body = [sb.Sphere(material=1.7 + 0.1j, diameter_nm=36.0, gap_nm=12.0)]
    out = sb.scatter(stack, body, sb.PlaneWave(WAVELENGTH, 40.0, 0.0, "p"), quick=True, cell_nm=6.0, accuracy=1e-3)
    layers = stack.at(WAVELENGTH)
    solution = out._solutions[0]
    dipoles = DipoleSet(solution.problem.cells.centers_nm, solution.dipoles)
    # nearest dipoles at 15 nm: the near field at q = 1.2/nm has decayed by e^-36
    through = delivered(dipoles, layers, 1.2)
    assert abs(through - (out.stack.value + out.down.value)) < 1e-6 * through  # table and quadrature, 1e-8 each, over a difference of like terms
    assert abs(out.balance.value) < 3e-5


@pytest.mark.parametrize("height", [3.0, 20.0, 120.0])
@pytest.mark.parametrize("direction", [(0.0, 0.0, 1.0), (1.0, 0.0, 0.0), (0.48, 0.6, 0.64)])
def test_emitter_over_a_silver_film(height, direction):
    """Total rate by the Sommerfeld integral against the sum of the fluxes up and down: the balance of the bare stack."""
    stack = sb.Stack(1.0, [sb.Film(0.056 + 4.0j, 50.0)], 1.5)
    out = sb.emit(stack, [], sb.Emitter((0.0, 0.0, height), WAVELENGTH, direction))
    assert abs(out.balance.value) < 1e-8  # adaptive quadrature to 1e-9 a panel


@pytest.mark.parametrize("direction", ["vertical", "horizontal"])
def test_emitter_over_a_lossless_waveguide(direction):
    """Total = up + down + guided to 1e-10, TE and TM modes by residues."""
    stack = sb.Stack(1.0, [sb.Film(2.0, 200.0), sb.Film(1.7, 80.0)], 1.5)
    out = sb.emit(stack, [], sb.Emitter((0.0, 0.0, 30.0), WAVELENGTH, direction))
    assert out.guided.value > 0.05
    assert abs(out.balance.value) < 1e-10


def test_collectors_add_up_to_the_half_spaces():
    stack = sb.Stack(1.0, [sb.Film(1.9, 120.0)], 1.5)
    body = [sb.Sphere(material=2.0, diameter_nm=80.0)]
    windows = [
        sb.Collector("cone", na=0.6),
        sb.Collector("ring", polar_deg=(np.degrees(np.arcsin(0.6)), 90.0)),
        sb.Collector("front", polar_deg=(0.0, 90.0), azimuth_deg=(-90.0, 90.0)),
        sb.Collector("back", polar_deg=(0.0, 90.0), azimuth_deg=(90.0, 270.0)),
        sb.Collector("below", na=1.5, side="below"),
        sb.Collector("below far", polar_deg=(90.0, 130.0)),
        sb.Collector("below near", polar_deg=(130.0, 180.0)),
    ]
    out = sb.scatter(stack, body, sb.PlaneWave(WAVELENGTH, 50.0, 0.0, "p"), windows, quick=True, cell_nm=8.0, accuracy=1e-3)
    got = {name: quantity.value for name, quantity in out.collected.items()}
    for parts, whole in ((("cone", "ring"), out.up), (("front", "back"), out.up), (("below",), out.down), (("below far", "below near"), out.down)):
        assert abs(sum(got[name] for name in parts) / whole.value - 1.0) < 1e-8  # quadrature of smooth patterns


def test_pattern_integrates_to_the_power():
    """dC/dOmega on a product grid of directions, summed by Gauss and equal steps, against the powers up and down."""
    stack = sb.Stack(1.0, [], 1.5)
    out = sb.scatter(stack, [sb.Sphere(material=2.0, diameter_nm=80.0)], sb.PlaneWave(WAVELENGTH, 50.0), quick=True, cell_nm=8.0, accuracy=1e-3)
    nodes, weights = np.polynomial.legendre.leggauss(60)
    azimuth = np.arange(48) * 7.5
    critical = 180.0 - np.degrees(np.arcsin(1.0 / 1.5))
    got = []
    for low, high in ((0.0, 90.0), (90.0, critical), (critical, 180.0)):
        polar = 0.5 * (low + high) + 0.5 * (high - low) * nodes
        values = out.pattern(np.repeat(polar, 48), np.tile(azimuth, 60)).reshape(60, 48)
        got.append(np.radians(0.5 * (high - low)) * weights @ (np.sin(np.radians(polar)) * values.mean(axis=1)) * 2 * np.pi)
    assert abs(got[0] / out.up.value - 1.0) < 1e-9
    assert abs((got[1] + got[2]) / out.down.value - 1.0) < 1e-4  # square-root ends at the critical angle: 60 nodes leave some 1e-5


def test_sources_of_power_helpers_agree_for_one_dipole():
    """radiated up + delivered = host power + reflected part, for a lone dipole at an odd place."""
    layers = sb.Stack(1.2, [sb.Film(0.2 + 3.0j, 30.0)], 1.6).at(WAVELENGTH)
    source = DipoleSet(np.array([[14.0, -33.0, 25.0]]), np.array([[0.3 + 0.1j, -0.5, 0.9j]]))
    up, through = radiated_up(source, layers), delivered(source, layers, 1.2)
    assert radiated_down(source, layers) < through
    assert guided(source, layers) == {}
    from substrate.green.sommerfeld import reflected_scalars, tensor_from_scalars

    k = layers.k_host
    tensor = tensor_from_scalars(reflected_scalars(layers, 0.0, 50.0)[0], 1.0, 0.0)
    p = source.dipoles[0]
    total = k**4 / (6 * np.pi) * np.vdot(p, p).real + k * (p.conj() @ tensor @ p).imag
    assert abs((up + through) / total - 1.0) < 1e-9  # quadrature


def test_light_from_below_is_referred_to_its_own_irradiance():
    """Under a base of the host's index times n, at normal incidence through an index-matched film nothing but the irradiance changes.

    A small particle in the transmitted wave of amplitude t = 2 n_b/(n_b + n_h): absorbed power over I_inc, which is n_b/n_h times that of a
    unit wave in the host; so C_below/C_free = t^2 n_h/n_b as far as the particle's own reflection is weak.
    """
    n = 1.5
    body = [sb.Sphere(material=1.05 + 0.02j, diameter_nm=10.0, gap_nm=400.0)]
    settings = {"quick": True, "cell_nm": 1.0, "accuracy": 1e-3}
    below = sb.scatter(sb.Stack(1.0, [], n), body, sb.PlaneWave(WAVELENGTH, side="below"), **settings)
    free = sb.scatter(sb.Stack(1.0, [], 1.0), body, sb.PlaneWave(WAVELENGTH), **settings)
    expected = (2 * n / (n + 1)) ** 2 / n
    assert abs(below.absorbed.value / free.absorbed.value / expected - 1.0) < 1e-5  # a 10 nm sphere of such weak contrast scatters nothing worth it
