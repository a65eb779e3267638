"""Built-in optical constants against the published figures, and what users may write."""

import numpy as np
import pytest

from substrate.errors import InputError, OutOfRange
from substrate.medium.material import catalogue, material, material_names

# n + ik at 532 and 633 nm (632.8 nm where three figures of the second column come from the source's own fit), read from the records of
# the open database (Polyanskiy, Sci. Data 11, 94 (2024)) by linear interpolation, apart from the code under test.
PUBLISHED = {
    "gold": (0.54386 + 2.23087j, 0.18377 + 3.43125j),  # Johnson & Christy 1972
    "silver": (0.05401 + 3.42899j, 0.05625 + 4.27603j),  # Johnson & Christy 1972
    "copper": (1.11588 + 2.59558j, 0.27002 + 3.40809j),  # Johnson & Christy 1972
    "aluminium": (0.93878 + 6.41954j, 1.44819 + 7.53669j),  # Rakic 1995
    "chromium": (3.03429 + 3.33000j, 3.13990 + 3.31505j),  # Johnson & Christy 1974
}
AT_6328 = {
    "titanium": 2.70386 + 3.76514j,  # Johnson & Christy 1974
    "tungsten": 3.62400 + 2.91262j,  # Weaver 1975
    "platinum": 2.17710 + 5.07761j,  # Tselin 2024
    "silicon": 3.88265 + 0.01963j,  # Aspnes & Studna 1983
    "silicon green": 3.87396 + 0.01616j,  # Green 2008
    "silica": 1.45702,  # Malitson 1965
    "silicon nitride": 2.03946,  # Luke 2015
    "sapphire": 1.76591,  # Malitson & Dodge 1972
    "alumina": 1.62527,  # Zhukovsky 2015
    "rutile": 2.58373,  # Devore 1951
    "titania": 2.38938,  # Siefke 2016
    "hafnia": 1.89430,  # Al-Kuhaili 2004
    "polystyrene": 1.58537,  # Zhang 2020
    "pmma": 1.49082,  # Beadie 2015
    "water": 1.33211,  # Daimon & Masumura 2007
    "bk7": 1.51509,  # Schott catalogue
    "ito": 1.783 + 0.003j,  # Koenig 2014
}


@pytest.mark.parametrize("name", PUBLISHED)
def test_metals_at_532_and_633_nm(name):
    green, red = PUBLISHED[name]
    assert abs(material(name).index(532.0) - green) < 1e-5 * 5  # five printed decimals
    assert abs(material(name).index(632.8) - red) < 1e-5 * 5 or abs(material(name).index(633.0) - red) < 5e-5


@pytest.mark.parametrize("name", AT_6328)
def test_others_at_632_8_nm(name):
    found, expected = material(name).index(632.8), AT_6328[name]
    # printed decimals; the formula of rutile was read off at 10 nm steps, which leaves 4e-5
    digits = {"ito": 6e-4, "rutile": 5e-5}.get(name, 2e-5)
    assert abs(found.real - complex(expected).real) < digits and abs(found.imag - complex(expected).imag) < digits


def test_dispersion_formulas_at_spectral_lines():
    """Fused silica, N-BK7, sapphire, water from their published coefficients (Malitson; Schott; Malitson & Dodge; Daimon), catalogue n_d."""
    for name, nm, index in (
        ("silica", 587.56, 1.458464),
        ("bk7", 587.5618, 1.516800),
        ("bk7", 486.1327, 1.522376),
        ("bk7", 656.2725, 1.514322),
        ("sapphire", 587.56, 1.76817),
        ("water", 589.3, 1.33335),
    ):
        assert abs(material(name).index(nm) - index) < 1e-5  # five or six printed decimals, interpolation 2e-6


def test_interpolation_of_a_formula_record_is_within_its_goal():
    """Malitson's Sellmeier formula written out here, at wavelengths that fall between the rows."""
    um = np.linspace(0.2103, 2.9971, 4001)
    terms = ((0.6961663, 0.0684043), (0.4079426, 0.1162414), (0.8974794, 9.896161))
    exact = np.sqrt(1.0 + sum(a * um**2 / (um**2 - b**2) for a, b in terms))
    assert np.abs(material("silica").index(1000 * um).real - exact).max() < 3e-6  # goal 2e-6 and the rows' printed digits


def test_every_built_in_is_physical_and_states_its_source():
    assert len(material_names()) >= 25
    for found in catalogue():
        assert found.citation and found.name
        if found.table is not None:
            low, high = found.range_nm
            assert (found.table[:, 1:] >= 0.0).all() and (np.diff(found.table[:, 0]) > 0.0).all()
            assert low < 633.0 < high
            assert np.isfinite(found.index(np.linspace(low, high, 50))).all()


def test_outside_of_the_range_is_refused_with_the_range():
    with pytest.raises(OutOfRange, match="187.9 to 1937 nm, the range of its table .P. B. Johnson"):
        material("gold").index(2500.0)
    with pytest.raises(OutOfRange, match="never extrapolated"):
        material("polystyrene").index(266.0)


@pytest.mark.parametrize(
    "spec,expected",
    [(1.5, 1.5), (2 + 0.1j, 2 + 0.1j), ("1.5", 1.5), ("1.5+0.1i", 1.5 + 0.1j), ("0.05 + 4.2j", 0.05 + 4.2j), ("1.5e0+1e-3i", 1.5 + 0.001j), (np.float64(1.2), 1.2)],
)
def test_numbers(spec, expected):
    assert material(spec).index(500.0) == expected
    assert material(spec).index(np.array([400.0, 5000.0])).tolist() == [expected, expected]


def test_aliases_mean_the_same():
    for short, name in (("Au", "gold"), ("SiO2", "silica"), ("Glass", "bk7"), ("fused silica", "silica"), ("silicon_nitride", "silicon nitride")):
        assert material(short).name == name


@pytest.mark.parametrize(
    "spec,words",
    [("goold", "Did you mean 'gold'"), (-1.5, "n >= 0"), ("1.5-0.1i", "gain"), (1.5 - 0.1j, "gain"), (True, "built-in name"), (None, "built-in"), ([1], "built-in"), ("nofile.csv", "cannot be read"), (float("nan"), "finite")],
)
def test_refusals_say_what_is_wrong(spec, words):
    with pytest.raises(InputError, match=words):
        material(spec, "stack.base")
    with pytest.raises(InputError, match="stack.base"):
        material(spec, "stack.base")


def test_own_tables_in_all_units(tmp_path):
    """The same medium written four ways; eV rows run backwards in wavelength."""
    n = {500.0: 1.5 + 0.1j, 600.0: 1.6 + 0.2j, 700.0: 1.7 + 0.3j}
    texts = {
        "nm": "# a remark\nwavelength_nm, n, k\n" + "".join(f"{w}, {i.real}, {i.imag}\n" for w, i in n.items()),
        "um": "wavelength_um n k\n" + "".join(f"{w / 1000} {i.real} {i.imag}  # remark\n" for w, i in n.items()),
        "ev": "energy_eV, n, k\n" + "".join(f"{1239.841984 / w!r}, {i.real}, {i.imag}\n" for w, i in n.items()),
        "eps": "wavelength_nm, eps1, eps2\n" + "".join(f"{w}, {(i * i).real!r}, {(i * i).imag!r}\n" for w, i in n.items()),
    }
    for name, text in texts.items():
        path = tmp_path / f"{name}.csv"
        path.write_text(text)
        found = material(str(path))
        assert abs(found.index(550.0) - (1.55 + 0.15j)) < 1e-9  # linear interpolation, rounding of the unit
        assert abs(found.range_nm[0] - 500.0) < 1e-9


@pytest.mark.parametrize(
    "text,words",
    [
        ("", "names the columns"),
        ("lambda, n, k\n500, 1, 0\n600, 1, 0\n", "names the columns"),
        ("wavelength_nm, n, k\n500, 1, 0\n", "at least two rows"),
        ("wavelength_nm, n, k\n500, 1\n600, 1, 0\n", "line 2"),
        ("wavelength_nm, n, k\n500, one, 0\n600, 1, 0\n", "line 2"),
        ("wavelength_nm, n, k\n500, nan, 0\n600, 1, 0\n", "finite"),
        ("wavelength_nm, n, k\n500, 1, -0.1\n600, 1, 0\n", "gain"),
        ("wavelength_nm, eps1, eps2\n500, -2, -0.1\n600, 1, 0\n", "gain"),
        ("wavelength_nm, n, k\n500, 1, 0\n500, 1.1, 0\n", "500 nm twice"),
    ],
)
def test_bad_tables_are_refused_with_their_line(tmp_path, text, words):
    path = tmp_path / "mine.txt"
    path.write_text(text)
    with pytest.raises(InputError, match=words):
        material(str(path))
