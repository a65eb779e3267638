"""Built-in optical constants against the published figures, and what users may write."""

import pickle
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

import substrate.medium.material as module
from substrate.errors import InputError, OutOfRange
from substrate.medium.material import catalogue, material, material_names

# n + ik at 532 and 632.8 nm to five decimals, read from the records of the open database (Polyanskiy, Sci. Data 11, 94 (2024)) by linear
# interpolation, apart from the code under test.
MEASURED = {
    "alumina": (1.63108, 1.62527),  # Zhukovsky et al., PRL 115, 177402 (2015)
    "aluminium": (0.93878 + 6.41954j, 1.44819 + 7.53669j),  # Rakic, Appl. Opt. 34, 4755 (1995)
    "chromium": (3.03429 + 3.33000j, 3.13990 + 3.31505j),  # Johnson & Christy, PRB 9, 5056 (1974)
    "copper": (1.11588 + 2.59558j, 0.27002 + 3.40809j),  # Johnson & Christy, PRB 6, 4370 (1972)
    "germanium": (4.91937 + 2.36123j, 5.47166 + 0.81627j),  # Aspnes & Studna, PRB 27, 985 (1983)
    "gold": (0.54386 + 2.23087j, 0.18377 + 3.43125j),  # Johnson & Christy 1972
    "ito": (1.88133 + 0.00340j, 1.78256 + 0.00325j),  # Koenig et al., ACS Nano 8, 6182 (2014)
    "platinum": (1.87672 + 4.36952j, 2.17710 + 5.07761j),  # Tselin et al., PRB 110, 195130 (2024)
    "polystyrene": (1.59558, 1.58537),  # Zhang et al., Appl. Opt. 59, 2337 (2020)
    "silicon": (4.15203 + 0.05179j, 3.88265 + 0.01963j),  # Aspnes & Studna 1983
    "silicon green": (4.14320 + 0.03255j, 3.87396 + 0.01616j),  # Green, Sol. Energ. Mat. Sol. Cells 92, 1305 (2008)
    "silver": (0.05401 + 3.42899j, 0.05625 + 4.27603j),  # Johnson & Christy 1972
    "titania": (2.44998, 2.38938),  # Siefke et al., Adv. Opt. Mater. 4, 1780 (2016)
    "titanium": (2.47929 + 3.35107j, 2.70386 + 3.76514j),  # Johnson & Christy 1974
    "titanium nitride": (1.23494 + 1.95277j, 1.35120 + 2.75990j),  # Pflueger & Fink 1991; Pflueger et al., PRB 30, 1155 (1984)
    "tungsten": (3.49531 + 2.71828j, 3.62400 + 2.91262j),  # Weaver et al., PRB 12, 1293 (1975)
}
# The same for formula records: there the figures were read off chords between multiples of 10 nm.
FROM_FORMULAS = {
    "air": (1.00028, 1.00028),  # Ciddor, Appl. Opt. 35, 1566 (1996)
    "bk7": (1.51948, 1.51509),  # Schott catalogue
    "hafnia": (1.90444, 1.89430),  # Al-Kuhaili, Opt. Mat. 27, 383 (2004)
    "magnesium fluoride": (1.37893, 1.37698),  # Dodge, Appl. Opt. 23, 1980 (1984)
    "pmma": (1.49527, 1.49082),  # Beadie et al., Appl. Opt. 54, F139 (2015)
    "rutile": (2.66787, 2.58373),  # Devore, JOSA 41, 416 (1951)
    "sapphire": (1.77170, 1.76591),  # Malitson & Dodge 1972, Dodge 1986
    "silica": (1.46071, 1.45702),  # Malitson, JOSA 55, 1205 (1965)
    "silicon nitride": (2.05593, 2.03947),  # Luke et al., Opt. Lett. 40, 4823 (2015)
    "water": (1.33538, 1.33211),  # Daimon & Masumura, Appl. Opt. 46, 3811 (2007)
}


def sellmeier(*terms):
    """n(um) = sqrt(1 + sum a x/(x - c)), x = um^2, with terms (a, c)."""
    return lambda um: np.sqrt(1.0 + sum(a * um**2 / (um**2 - c) for a, c in terms))


def powers(constant, *terms):
    """constant + sum a um^e, with terms (a, e)."""
    return lambda um: constant + sum(a * um**e for a, e in terms)


# The published formulas, wavelength in um, coefficients as the database prints them for the sources of FROM_FORMULAS.
FORMULAS = {
    "air": lambda um: 1.0 + 0.05792105 / (238.0185 - um**-2) + 0.00167917 / (57.362 - um**-2),
    "bk7": sellmeier((1.03961212, 0.00600069867), (0.231792344, 0.0200179144), (1.01046945, 103.560653)),
    "hafnia": powers(1.875, (6.28e-3, -2), (5.80e-4, -4)),
    "magnesium fluoride": sellmeier((0.48755108, 0.04338408**2), (0.39875031, 0.09461442**2), (2.3120353, 23.793604**2)),
    "pmma": lambda um: np.sqrt(
        powers(2.1778, (6.1209e-3, 2), (-1.5004e-3, 4), (2.3678e-2, -2), (-4.2137e-3, -4), (7.3417e-4, -6), (-4.5042e-5, -8))(um)
    ),
    "rutile": lambda um: np.sqrt(5.913 + 0.2441 / (um**2 - 0.0803)),
    "sapphire": sellmeier((1.4313493, 0.0726631**2), (0.65054713, 0.1193242**2), (5.3414021, 18.028251**2)),
    "silica": sellmeier((0.6961663, 0.0684043**2), (0.4079426, 0.1162414**2), (0.8974794, 9.896161**2)),
    "silicon nitride": sellmeier((3.0249, 0.1353406**2), (40314.0, 1239.842**2)),
    "water": sellmeier(
        (5.684027565e-1, 5.101829712e-3), (1.726177391e-1, 1.821153936e-2), (2.086189578e-2, 2.620722293e-2), (1.130748688e-1, 1.069792721e1)
    ),
}


@pytest.mark.parametrize("name", MEASURED)
def test_measured_tables_at_532_and_632_8_nm(name):
    for nm, expected in zip((532.0, 632.8), MEASURED[name]):
        difference = material(name).index(nm) - expected
        assert max(abs(difference.real), abs(difference.imag)) < 5.1e-6  # half of the fifth printed decimal


@pytest.mark.parametrize("name", FROM_FORMULAS)
def test_formula_records_at_532_and_632_8_nm(name):
    for nm, expected in zip((532.0, 632.8), FROM_FORMULAS[name]):
        ends = np.array([10.0 * (nm // 10.0), 10.0 * (nm // 10.0) + 10.0])
        read_off = np.interp(nm, ends, material(name).index(ends).real)
        assert abs(read_off - expected) < 7.1e-6  # half of the fifth printed decimal and 2e-6 of sampling
        assert material(name).index(nm).imag == 0.0


@pytest.mark.parametrize("name", FORMULAS)
def test_interpolation_of_formula_records_is_within_its_goal(name):
    """Everywhere in the range, between the rows too."""
    found = material(name)
    nm = np.linspace(*found.range_nm, 20011)  # falls between the rows, which are up to 600
    assert np.abs(found.index(nm).real - FORMULAS[name](nm / 1000.0)).max() < 2.2e-6  # goal 2e-6 and the rows' printed digits


def test_dispersion_formulas_at_spectral_lines():
    """n_d, n_F, n_C, n_D calculated from the published coefficients with 25-digit arithmetic; the catalogues print the same digits."""
    for name, nm, index in (
        ("silica", 587.56, 1.458464),
        ("bk7", 587.5618, 1.516800),
        ("bk7", 486.1327, 1.522376),
        ("bk7", 656.2725, 1.514322),
        ("sapphire", 587.56, 1.76817),
        ("water", 589.3, 1.33335),
    ):
        assert abs(material(name).index(nm) - index) < 1e-5  # five or six printed decimals, interpolation 2e-6


def test_diamond_at_the_sodium_line():
    """Handbook value 2.417 at 589 nm, from memory."""
    assert abs(material("diamond").index(589.3) - 2.417) < 3e-3  # printed digits, spread of samples


def test_every_material_with_a_table_is_checked_above():
    assert {found.name for found in catalogue() if found.table is not None} == {*MEASURED, *FROM_FORMULAS, "diamond"}
    assert set(FORMULAS) == set(FROM_FORMULAS)


def test_table_files_state_source_and_range():
    for path in sorted((Path(module.__file__).parent / "tables").glob("*.txt")):
        lines = path.read_text(encoding="utf-8").splitlines()
        about = dict(line[2:].split(": ", 1) for line in lines if line.startswith("# ") and ": " in line)
        rows = [line.split() for line in lines if not line.startswith("#")]
        assert {"name", "citation", "conditions", "database", "record", "range"} <= set(about), path.name
        assert about["range"] == f"{rows[0][0]} to {rows[-1][0]} nm, {len(rows)} rows"
        assert "Sci. Data 11, 94 (2024)" in about["database"]
        index_only = all(row[2] == "0" for row in rows)
        assert index_only == ("k = 0" in about["conditions"] or "left out" in about["conditions"]), path.name


def test_words_that_a_user_must_see():
    conditions = {found.name: found.conditions for found in catalogue()}
    for name in ("sapphire", "rutile", "magnesium fluoride"):
        assert "ordinary ray" in conditions[name]
    assert "energy loss" in conditions["titanium nitride"]
    assert "below 400 nm" in conditions["polystyrene"]
    assert "deposition" in conditions["alumina"] and "deposition" in conditions["titania"]


def test_names_are_listed_without_numpy():
    code = "import sys; from substrate.medium.material import material_names; material_names(); sys.exit('numpy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_equality_and_hash_follow_the_contents(tmp_path):
    gold = material("gold")
    again = pickle.loads(pickle.dumps(gold))
    assert again == gold and hash(again) == hash(gold) and gold != material("silver")
    assert material(1.5) == material(1.5) and material(1.5) != material(1.6)
    path = tmp_path / "mine.txt"
    path.write_text("wavelength_nm, n\n500, 1.5\n600, 1.5\n")
    before = material(path)
    path.write_text("wavelength_nm, n\n500, 1.6\n600, 1.6\n")
    assert material(path) != before and material(path) == material(path)


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
    with pytest.raises(OutOfRange, match=r"received \(300.0, 2500.0\)"):
        material("gold").index(np.array([300.0, 2500.0]))
    with pytest.raises(OutOfRange, match="received nan"):
        material("gold").index(float("nan"))
    low, high = material("gold").range_nm
    assert material("gold").index(low) == 1.28 + 1.188j and material("gold").index(high) == 0.92 + 13.78j  # first and last published row
    assert material("gold").index(np.array([])).shape == (0,)


@pytest.mark.parametrize(
    "spec,expected",
    [(1.5, 1.5), (2 + 0.1j, 2 + 0.1j), ("1.5", 1.5), ("1.5+0.1i", 1.5 + 0.1j), ("0.05 + 4.2j", 0.05 + 4.2j), ("1.5e0+1e-3i", 1.5 + 0.001j), (np.float64(1.2), 1.2), ("2.", 2.0), ("3.4i", 3.4j), (str(1.5 + 0.1j), 1.5 + 0.1j)],
)
def test_numbers(spec, expected):
    assert material(spec).index(500.0) == expected
    assert material(spec).index(np.array([400.0, 5000.0])).tolist() == [expected, expected]


def test_a_negative_zero_is_no_gain_and_no_other_branch():
    for spec in (complex(1.5, -0.0), "1.5-0i"):
        assert not np.signbit(material(spec).index(500.0).imag)


def test_aliases_mean_the_same():
    for short, name in (("Au", "gold"), ("TiN", "titanium nitride"), ("SiO2", "silica"), ("Glass", "bk7"), ("fused silica", "silica"), ("silicon_nitride", "silicon nitride")):
        assert material(short).name == name


@pytest.mark.parametrize(
    "spec,words",
    [("goold", "Did you mean 'gold'"), ("tin", "the metal tin is not built in"), ("C", "write 'diamond'"), ("1,5", "a number"), ("1_5", "a number"), (-1.5, "n >= 0"), ("1.5-0.1i", "gain"), (1.5 - 0.1j, "gain"), (True, "built-in name"), (None, "built-in"), ([1], "built-in"), ("nofile.csv", "cannot be read"), (float("nan"), "finite")],
)
def test_refusals_say_what_is_wrong(spec, words):
    with pytest.raises(InputError, match=words):
        material(spec, "stack.base")
    with pytest.raises(InputError, match="stack.base"):
        material(spec, "stack.base")


def test_own_tables_in_all_units(tmp_path):
    """The same medium written in every form; eV rows run backwards in wavelength, one file has a byte-order mark and rows out of order."""
    n = {500.0: 1.5 + 0.1j, 600.0: 1.6 + 0.2j, 700.0: 1.7 + 0.3j}
    texts = {
        "nm": "# a remark\nwavelength_nm, n, k\n" + "".join(f"{w}, {i.real}, {i.imag}\n" for w, i in n.items()),
        "um": "wavelength_um n k\n" + "".join(f"{w / 1000} {i.real} {i.imag}  # remark\n" for w, i in n.items()),
        "ev": "energy_eV, n, k\n" + "".join(f"{1239.841984 / w!r}, {i.real}, {i.imag}\n" for w, i in n.items()),
        "unsorted": "\ufeffwavelength_nm, n, k\n" + "".join(f"{w}, {n[w].real}, {n[w].imag}\n" for w in (600.0, 500.0, 700.0)),
        "eps": "wavelength_nm, eps1, eps2\n" + "".join(f"{w}, {(i * i).real!r}, {(i * i).imag!r}\n" for w, i in n.items()),
    }
    for name, text in texts.items():
        path = tmp_path / f"{name}.csv"
        path.write_text(text, encoding="utf-8")
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
        ("500, 1, 0\n600, 1, 0\n", "names the columns"),
        ("wavelength_nm, n, k\n500, 1, 0\n600, inf, 0\n", "line 3.*finite"),
        ("wavelength_nm, n, k\n-500, 1, 0\n600, 1, 0\n", "line 2.*above 0"),
        ("wavelength_nm, n, k\n600, 1, 0\n500, 1, -0.1\n", "line 3.*k >= 0.*gain, which has no steady state"),
        ("wavelength_nm, eps1, eps2\n500, -2, -0.1\n600, 1, 0\n", "line 2.*eps2 >= 0.*gain"),
        ("wavelength_nm, n, k\n500, -1, 0\n600, 1, 0\n", "line 2.*n >= 0, not zero"),
        ("wavelength_nm, n, k\n500, 1, 0\n600, 0, 0\n", "line 3.*n >= 0, not zero"),
        ("wavelength_nm, n, k\n0.5, 1, 0\n0.6, 1, 0\n", "0.5 nm.*unit of the first column"),
        ("energy_eV, n, k\n500, 1, 0\n600, 1, 0\n", "2.48 nm.*unit of the first column"),
        ("wavelength_nm, n, k\n500, 1, 0\n550, 1, 0\n500, 1.1, 0\n", "500 nm twice, in lines 2 and 4"),
    ],
)
def test_bad_tables_are_refused_with_their_line(tmp_path, text, words):
    path = tmp_path / "mine.txt"
    path.write_text(text)
    with pytest.raises(InputError, match=words):
        material(str(path))


def test_own_table_of_a_lossless_metal_without_eps2(tmp_path):
    """eps = -4, written with and without a (negative) zero: n + ik = 2i, on the side of loss."""
    for name, text in (("short", "wavelength_um eps1\n0.5 -4\n0.6 -4\n"), ("zero", "wavelength_um eps1 eps2\n0.5 -4 -0.0\n0.6 -4 -0.0\n")):
        path = tmp_path / f"{name}.txt"
        path.write_text(text)
        assert material(path).index(550.0) == 2j
