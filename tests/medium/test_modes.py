"""Guided modes against the closed dispersion relation of a slab."""

import numpy as np

from substrate.medium.modes import guided_modes
from substrate.medium.stack import Layers


def test_slab_modes_satisfy_the_slab_equation():
    """Asymmetric slab: kappa d = m pi + atan(c1 g1/kappa) + atan(c2 g2/kappa), c = 1 (TE) or (n_f/n_c)^2 (TM) (Marcuse; any textbook)."""
    host, film, base, d, wavelength = 1.0, 2.0, 1.5, 650.0, 633.0
    layers = Layers(wavelength, (host, film, base), (d,))
    modes = guided_modes(layers)
    for mode in modes:
        n = mode.index
        kappa, g1, g2 = (layers.k0 * np.sqrt(abs(a**2 - n**2)) for a in (film, host, base))
        c1, c2 = (1.0, 1.0) if mode.polarization == "s" else ((film / host) ** 2, (film / base) ** 2)
        order = (kappa * d - np.arctan(c1 * g1 / kappa) - np.arctan(c2 * g2 / kappa)) / np.pi
        assert abs(order - round(order)) < 1e-9  # root finding to rounding
    # number of TE modes from the cut-off condition of the same equation
    v = layers.k0 * d * np.sqrt(film**2 - base**2)
    expected = int((v - np.arctan(np.sqrt((base**2 - host**2) / (film**2 - base**2)))) // np.pi) + 1
    assert sum(mode.polarization == "s" for mode in modes) == expected


def test_residues_of_a_lossless_stack_are_real_and_positive():
    for mode in guided_modes(Layers(633.0, (1.0, 2.2, 1.6, 1.45), (180.0, 300.0))):
        assert mode.residue.real > 0.0
        assert abs(mode.residue.imag) < 1e-9 * mode.residue.real  # no loss: the mode only carries power away


def test_no_modes_without_a_film_of_higher_index():
    assert guided_modes(Layers(633.0, (1.0, 1.5))) == ()
    assert guided_modes(Layers(633.0, (1.0, 1.4, 1.5), (500.0,))) == ()


def test_pairs_of_modes_of_twin_guides_are_both_found():
    """Two equal guides far apart: even and odd modes split by e^(-2 g gap), closer than any sampling of the dispersion function."""
    for gap, split in ((500.0, 1e-3), (1000.0, 3e-5)):
        modes = guided_modes(Layers(600.0, (1.45, 2.0, 1.45, 2.0, 1.45), (200.0, gap, 200.0)))
        te = [mode for mode in modes if mode.polarization == "s"]
        assert len(te) == 2 and len(modes) == 4
        assert 0.0 < te[0].index - te[1].index < split
        assert all(mode.residue.real > 0.0 for mode in modes)
