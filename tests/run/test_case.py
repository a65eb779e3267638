"""Case files: what is accepted, what is filled in, and that every fault is told, in words that help."""

import json
import re
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from substrate.errors import InputError
from substrate.run.case import parse_case, read_case

STACK = """
[stack]
host = "water"
films = [ {material = "gold", thickness_nm = 60} ]
"""
SPHERE = """
[[particle]]
shape = "sphere"
material = "gold"
diameter_nm = 60
"""
LIGHT = """
[light]
wavelength_nm = 633
"""
ASK = """
[[ask]]
what = "cross sections"
"""
GOOD = STACK + SPHERE + LIGHT + ASK


def problems(text: str, path="case.toml") -> dict[str, list[str]]:
    """The sentences of a wrong case, by the key that they name."""
    with pytest.raises(InputError) as caught:
        parse_case(text, path)
    found: dict[str, list[str]] = {}
    for problem in caught.value.problems:
        found.setdefault(problem.where, []).append(str(problem))
    return found


def test_defaults_are_filled_in_and_stand_in_the_tables():
    case = parse_case(GOOD, "ball.toml")
    assert case.title == "ball"
    assert case.tables["stack"]["base"] == "glass"
    assert case.tables["particle"][0]["gap_nm"] == 0.0
    assert case.tables["light"]["angle_deg"] == 0.0 and case.tables["light"]["polarization"] == "p"
    assert case.tables["accuracy"] == {"relative": 0.02, "cell_nm": None, "quick": False}
    assert json.loads(json.dumps(case.tables)) == case.tables  # the resolved case can be written as JSON


def test_defaults_are_not_shared_between_cases():
    first, second = parse_case(GOOD), parse_case(GOOD)
    first.tables["particle"][0]["center_xy_nm"].append(1.0)
    assert second.tables["particle"][0]["center_xy_nm"] == [0.0, 0.0]


def test_all_problems_at_once():
    found = problems("""
titel = "x"
[stack]
host = "watr"
films = [ {material = "gold", thickness_nm = -4} ]
[[particle]]
shape = "sphere"
material = "gold"
diameter_nm = "60 nm"
gap_nm = 0.2
[light]
wavelength_nm = 50
angle_deg = 90
polarization = "q"
[[collector]]
na = 0.9
polar_deg = [10, 20]
[[emitter]]
position_nm = [0, 0, 0]
wavelength_nm = 600
quantum_yield = 1.5
[[ask]]
what = "cross section"
[accuracy]
relative = 2
quick = "yes"
""")
    assert set(found) == {
        "case",
        "stack.host",
        "stack.films[1].thickness_nm",
        "particle[1].diameter_nm",
        "particle[1].gap_nm",
        "light.wavelength_nm",
        "light.angle_deg",
        "light.polarization",
        "collector[1]",
        "emitter[1].position_nm.z",
        "emitter[1].quantum_yield",
        "ask[1].what",
        "accuracy.relative",
        "accuracy.quick",
    }


@pytest.mark.parametrize(
    ("text", "where", "words"),
    [
        ("titel = 'x'\n" + GOOD, "case", "received 'titel'; allowed: the keys title, stack,"),
        ("titel = 'x'\n" + GOOD, "case", "Did you mean 'title'?"),
        (GOOD + "[particles]\n", "case", "Did you mean 'particle'?"),
        (GOOD.replace("diameter_nm", "diametr_nm"), "particle[1]", "Did you mean 'diameter_nm'?"),
        (GOOD.replace('"sphere"', '"spher"'), "particle[1].shape", "Did you mean 'sphere'?"),
        (GOOD.replace('"water"', '"watr"'), "stack.host", "Did you mean 'water'?"),
        (GOOD.replace("= 60\n", '= "60"\n'), "particle[1].diameter_nm", "Write the number without quotes."),
        (GOOD.replace("= 60\n", '= "60 nm"\n'), "particle[1].diameter_nm", "without its unit, which the key names."),
        (GOOD.replace("= 60\n", "= 0\n"), "particle[1].diameter_nm", "received 0; allowed: a number above 0."),
        (GOOD.replace("= 60\n", "= nan\n"), "particle[1].diameter_nm", "received nan; allowed: a number above 0."),
        (GOOD.replace("= 60\n", "= true\n"), "particle[1].diameter_nm", "received True; allowed: a number above 0."),
        (GOOD.replace("= 60\n", "= []\n"), "particle[1].diameter_nm", "A series needs at least one value."),
        (GOOD.replace("= 60\n", "= [50, -1]\n"), "particle[1].diameter_nm[2]", "received -1; allowed: a number above 0."),
        (GOOD.replace("diameter_nm = 60\n", ""), "particle[1].diameter_nm", "received nothing; allowed: a number above 0."),
        (GOOD + "[accuracy]\ncell_nm = -1", "accuracy.cell_nm", "allowed: a number above 0."),
        (GOOD.replace("633", "{from = 400, too = 800, count = 9}"), "light.wavelength_nm", "Did you mean 'to'?"),
        (GOOD.replace("633", "{from = 400, to = 800}"), "light.wavelength_nm.count", "A range is {from, to, count}."),
        (GOOD.replace("633", "{from = 400, to = 800, count = 1.5}"), "light.wavelength_nm.count", "a whole number from 2 up to 10000"),
        (GOOD.replace("633", "{from = 40, to = 800, count = 3}"), "light.wavelength_nm.from", "a number from 100 up to 3000"),
        (GOOD.replace("633", "633\nangle_deg = 90"), "light.angle_deg", "a number from 0 up to below 90"),
        (GOOD.replace("633", "633\npolarization = [0, 0]"), "light.polarization", "Both amplitudes are zero."),
        (GOOD.replace("633", "633\npolarization = ['a', 1]"), "light.polarization", "a Jones pair [s, p]"),
        (GOOD.replace("633", "100"), "stack.films[1].material", "Tables are never extrapolated."),
        (GOOD + "[[collector]]\n", "collector[1]", "received nothing; allowed: either na"),
        (GOOD + "[[collector]]\nna = 0\n", "collector[1].na", "above 0"),
        (GOOD + "[[collector]]\npolar_deg = [80, 100]\n", "collector[1].polar_deg", "Take two collectors for the two sides."),
        (GOOD + "[[collector]]\npolar_deg = [40, 20]\n", "collector[1].polar_deg", "The smaller number comes first."),
        (GOOD + "[[collector]]\npolar_deg = [100, 120]\nside = 'above'\n", "collector[1].side", "'below' for these polar angles"),
        (GOOD + "[[collector]]\nna = 0.5\n[[collector]]\nna = 0.9\nname = 'objective'\n", "collector[2].name", "no other collector has"),
        (GOOD + "[[collector]]\nna = 0.5\nname = 'a/b'\n", "collector[1].name", "without '/'"),
        (GOOD + "[[ask]]\nwhat = 'emission'\n", "ask[2].what", "Add [[emitter]]."),
        (GOOD + ASK, "ask[2].what", "each question once"),
        (GOOD.replace(LIGHT, ""), "ask[1].what", "Add [light]."),
        (GOOD.replace(SPHERE, ""), "ask[1].what", "Without a particle nothing is scattered."),
        (GOOD.replace(ASK, ""), "ask", "at least one"),
        (GOOD + "[[ask]]\nwhat = 'near field'\n", "ask[2]", "points_nm = [[x, y, z], ...], or plane with size_nm"),
        (GOOD + "[[ask]]\nwhat = 'near field'\npoints_nm = [0, 0, 1]\n", "ask[2].points_nm", "One point too stands in double brackets."),
        (GOOD + "[[ask]]\nwhat = 'near field'\npoints_nm = [[0, 0, -1]]\n", "ask[2].points_nm[1]", "below the surface"),
        (GOOD + "[[ask]]\nwhat = 'near field'\nplane = 'xz'\n", "ask[2].size_nm", "[width, height]"),
        (GOOD + "[[ask]]\nwhat = 'near field'\nplane = 'xy'\nsize_nm = [9, 9]\n", "ask[2].at_nm", "above 0"),
        (GOOD + "[[ask]]\nwhat = 'near field'\nplane = 'xz'\nsize_nm = [9, 9]\ncenter_nm = [0, 1]\n", "ask[2].center_nm", "at least 4.5"),
        (GOOD + "[[ask]]\nwhat = 'far field'\nplane = 'xz'\n", "ask[2]", "'plane' belongs to what 'near field'."),
        (GOOD.replace("[light]", "[[light]]"), "light", "Write [light] with single brackets."),
        (GOOD.replace("[[particle]]", "[particle]"), "particle", "Write [[particle]] with double brackets."),
        (GOOD.replace("= 60\n", "= 60\ncenter_nm = [0, 0, 40]\ngap_nm = 1\n"), "particle[1].gap_nm", "Leave one of the two out."),
        (GOOD.replace("= 60\n", "= 60\ncenter_nm = [0, 40]\n"), "particle[1].center_nm", "allowed: [x, y, z] in nm."),
        (GOOD.replace("= 60\n", "= 60\ngap_nm = [0, 0.2, 1]\n"), "particle[1].gap_nm", "received 0.2; allowed: 0 (it touches) or at least 0.5 nm."),
    ],
)
def test_each_fault_in_words(text, where, words):
    found = problems(text)
    assert any(words in sentence for sentence in found.get(where, [])), found


def test_a_misspelt_key_is_told_once():
    assert list(problems(GOOD.replace("diameter_nm", "diametr_nm"))) == ["particle[1]"]


def test_too_many_points_name_the_series():
    many = GOOD.replace("633", "{from = 500, to = 800, count = 400}").replace("= 60\n", "= {from = 20, to = 80, count = 30}\n")
    (sentence,) = problems(many)["series"]
    assert "12000 points = 30 (particle[1].diameter_nm) x 400 (light.wavelength_nm)" in sentence


@pytest.mark.parametrize(
    ("text", "line", "reason"),
    [
        ("a = ", 1, "invalid value"),
        ("title = 'x'\nb = [1,\n2", 3, "unclosed array"),
        ("x = 1\nx = 2", 2, "cannot overwrite a value"),
        ("[stack\nhost = 1\n", 1, "expected ']' at the end of a table declaration"),
    ],
)
def test_toml_faults_are_one_sentence_with_the_line(text, line, reason):
    with pytest.raises(InputError) as caught:
        parse_case(text)
    # some interpreters give the column too
    assert re.fullmatch(rf"case\.toml, line {line}(, column \d+)?: this is not valid TOML: {re.escape(reason)}\.", str(caught.value))


def test_files_that_cannot_be_read(tmp_path):
    with pytest.raises(InputError, match="a TOML file that can be read"):
        read_case(tmp_path / "missing.toml")
    with pytest.raises(InputError, match="a TOML file that can be read"):
        read_case(tmp_path)
    odd = tmp_path / "odd.toml"
    odd.write_bytes(b"title = '\xff'")
    with pytest.raises(InputError, match="byte 9 that is not UTF-8"):
        read_case(odd)


def test_a_file_is_kept_verbatim(tmp_path):
    path = tmp_path / "ball.toml"
    path.write_bytes((GOOD + "# grüße\r\n").encode())
    case = read_case(path)
    assert case.text.encode() == path.read_bytes() and case.path == path


def test_table_files_are_looked_up_beside_the_case(tmp_path):
    (tmp_path / "mine.txt").write_text("# made up for this test\nwavelength_nm, n, k\n500 1.5 0.0\n700 1.6 0.0\n", encoding="utf-8")
    case = parse_case(GOOD.replace('material = "gold"\n', 'material = "mine.txt"\n'), tmp_path / "case.toml")
    assert Path(case.tables["particle"][0]["material"]) == tmp_path / "mine.txt"
    assert "particle[1].material" in problems(GOOD.replace('material = "gold"\n', 'material = "mine.txt"\n'), "elsewhere/case.toml")


def test_series_of_words_and_jones_pairs():
    series = parse_case(GOOD.replace("633", "633\npolarization = ['s', 'p']"))
    assert [axis.values for axis in series.axes] == [("s", "p")]
    pair = parse_case(GOOD.replace("633", "633\npolarization = [1, '0.5i']"))
    assert pair.axes == () and pair.tables["light"]["polarization"] == [1, "0.5i"]


def test_dependent_defaults_of_collectors_and_maps():
    case = parse_case(GOOD + "[[collector]]\npolar_deg = [100, 150]\n[[ask]]\nwhat = 'near field'\nplane = 'xz'\nsize_nm = [200, 120]\n")
    assert case.tables["collector"][0]["side"] == "below"
    near = case.tables["ask"][1]
    assert near["center_nm"] == [0.0, 60.0] and near["at_nm"] == 0.0  # the map stands on the surface


def test_quick_changes_the_resolved_case_only():
    case = parse_case(GOOD)
    assert case.quick().tables["accuracy"]["quick"] is True
    assert case.tables["accuracy"]["quick"] is False and case.quick().text == case.text


LEAVES = st.one_of(
    st.none(), st.booleans(), st.integers(-5, 5), st.floats(-10, 10), st.text('ab1 /', max_size=4), st.lists(st.integers(-2, 2), max_size=4),
    st.dictionaries(st.sampled_from(["from", "to", "count", "x"]), st.integers(-2, 5), max_size=3),
)  # fmt: skip
TABLE = st.dictionaries(
    st.sampled_from(
        ["material", "shape", "diameter_nm", "gap_nm", "center_nm", "wavelength_nm", "angle_deg", "polarization", "position_nm", "orientation",
         "na", "polar_deg", "azimuth_deg", "name", "what", "plane", "points_nm", "size_nm", "count", "host", "films", "relative", "quick"]
    ),  # fmt: skip
    LEAVES,
    max_size=6,
)


@given(st.dictionaries(st.sampled_from(["title", "stack", "particle", "light", "emitter", "collector", "ask", "accuracy"]),
                       st.one_of(LEAVES, TABLE, st.lists(TABLE, max_size=2)), max_size=8))  # fmt: skip
def test_no_input_breaks_the_reader(data):
    """Whatever stands in the tables, the answer is a case or an InputError, never another exception."""
    from substrate.run.checks import check
    from substrate.run.reading import Reading
    from substrate.run.schema import CASE

    reading = Reading()
    tables = reading.table(data, CASE)
    told = [*reading.problems, *check(tables, reading.axes, Path("."))]
    assert all(str(problem).startswith(problem.where) for problem in told)
    assert told or tables["ask"]  # a case without a question is always refused
