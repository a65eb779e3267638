"""The table on the screen: aligned, within 100 columns, long series cut where one can see it."""

from substrate.quantity import Quantity
from substrate.run.results import MISSED, PointResult, new_results
from substrate.run.table import cautions, text_table


def point(wavelength: float, warnings=(), **named: Quantity) -> PointResult:
    return PointResult("", {"light.wavelength_nm": wavelength}, quantities={"cross_sections": named}, warnings=tuple(warnings))


def results(*points: PointResult, resolved=None):
    from dataclasses import replace

    return replace(new_results("t", "", resolved or {}, {}, None, len(points)), points=points)


def test_columns_are_aligned_and_wrapped_into_blocks_that_repeat_the_series():
    named = {f"collected/ring {i}": Quantity(1234.0 + i, 5.0, "nm^2", "") for i in range(9)}
    text = text_table(results(point(500.0, **named), point(1000.0, **named)))
    blocks = [block.splitlines() for block in text.split("\n\n")]
    assert len(blocks) > 1
    for block in blocks:
        assert block[0].startswith("wavelength_nm") and [line.split()[0] for line in block[2:]] == ["500", "1000"]
        assert len({len(line) for line in block if line.strip()}) == 1 and len(block[0]) <= 100
    assert sum(block[0].count("ring") for block in blocks) == 9


def test_zero_columns_are_named_instead_of_printed():
    named = {"up": Quantity(1.0, 0.1, "nm^2", ""), "guided": Quantity(0.0, 0.0, "nm^2", "")}
    text = text_table(results(point(500.0, **named), point(600.0, **named)))
    assert "zero at every point: guided" in text and text.count("guided") == 1


def test_long_series_are_cut_in_the_middle():
    many = results(*(point(500.0 + i, up=Quantity(1.0, 0.1, "nm^2", "")) for i in range(50)))
    lines = text_table(many, 8).splitlines()
    assert len(lines) == 2 + 8 + 1 and "... 42 more points ..." in lines
    assert lines[2].split()[0] == "500" and lines[-1].split()[0] == "549"
    assert len(text_table(many).splitlines()) == 52


def test_a_missing_quantity_is_a_dash():
    text = text_table(results(point(500.0, up=Quantity(1.0, 0.1, "nm^2", "")), PointResult("", {"light.wavelength_nm": 600.0}, "failed", "no")))
    assert text.splitlines()[3].split() == ["600", "failed", "-"] and text.endswith("failed: no")


def test_series_with_the_same_short_name_are_told_apart():
    two = {"light.wavelength_nm": 500.0, "emitter[1].wavelength_nm": 600.0, "emitter[1].position_nm.z": 5.0}
    header = text_table(results(PointResult("", two))).splitlines()[0].split()
    assert header == ["light.wavelength_nm", "emitter[1].wavelength_nm", "position_nm.z"]


def test_cautions_are_told_once_with_their_count():
    missed = f"{MISSED} of 2 % is not reached by work (3 %)"
    found = cautions(results(point(500.0, ["thin film", missed]), point(600.0, ["thin film", "near"]), point(700.0, ["thin film"])))
    assert found == ["1 of 3 points do not reach the accuracy asked for: go by their bars", "thin film", "near (1 of 3 points)"]
    assert cautions(results(point(500.0, [missed]))) == [missed]


def test_the_caution_about_sizing_stands_at_collected_signals():
    ring = {"light": {"wavelength_nm": 488.0}, "particle": [{}], "collector": [{"polar_deg": [25, 72]}]}
    assert any("SEMI M53" in words for words in cautions(results(point(488.0), resolved=ring)))
    assert cautions(results(point(488.0), resolved={**ring, "collector": [{"polar_deg": None}]})) == []
