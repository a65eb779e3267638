"""Series: how lists and ranges become points."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from substrate.run.case import parse_case
from substrate.run.series import Axis, expand, point_count, spread

TEXT = """
[[emitter]]
position_nm = [0, {from = 1, to = 2, count = 2}, [5, 10, 20]]
wavelength_nm = 600
[[ask]]
what = "emission"
[stack]
host = [1, 1.33]
"""


def test_points_are_the_product_in_the_order_of_the_file():
    points = parse_case(TEXT).points()
    assert len(points) == 12
    assert [list(point.parameters) for point in points[:1]] == [["emitter[1].position_nm.y", "emitter[1].position_nm.z", "stack.host"]]
    assert [tuple(point.parameters.values()) for point in points[:3]] == [(1.0, 5.0, 1.0), (1.0, 5.0, 1.33), (1.0, 10.0, 1.0)]
    assert points[7].tables["emitter"][0]["position_nm"] == [0.0, 2.0, 5.0]
    assert points[7].tables["stack"]["host"] == 1.33
    assert points[7].label == "emitter[1].position_nm.y = 2, emitter[1].position_nm.z = 5, stack.host = 1.33"
    assert [point.index for point in points] == list(range(12))


def test_points_do_not_share_tables():
    first, second = parse_case(TEXT).points()[:2]
    first.tables["emitter"][0]["position_nm"][0] = 99.0
    assert second.tables["emitter"][0]["position_nm"][0] == 0.0


def test_no_series_is_one_point():
    case = parse_case("[[emitter]]\nposition_nm = [0, 0, 5]\nwavelength_nm = 600\n[[ask]]\nwhat = 'emission'\n")
    (point,) = case.points()
    assert point.label == "" and point.parameters == {}


def test_round_numbers_stay_round():
    assert spread(0.1, 0.4, 4) == [0.1, 0.2, 0.3, 0.4]


@given(st.floats(-1e6, 1e6), st.floats(-1e6, 1e6), st.integers(2, 200))
def test_ranges_end_where_they_should_and_are_even(start, stop, count):
    values = spread(start, stop, count)
    assert len(values) == count and values[0] == start and values[-1] == stop
    step = (stop - start) / (count - 1)
    size = max(abs(start), abs(stop))
    # inner values are rounded to 12 digits: 1e-11 of the largest number, on both sides of a step
    assert all(b - a == pytest.approx(step, abs=2e-11 * size + 1e-300) for a, b in zip(values, values[1:]))


@given(st.lists(st.integers(1, 4), max_size=4))
def test_every_combination_comes_once(lengths):
    axes = [Axis(f"k{i}", (f"k{i}",), tuple(range(n))) for i, n in enumerate(lengths)]
    points = expand({f"k{i}": None for i in range(len(lengths))}, axes)
    assert len(points) == point_count(axes) == len({tuple(point.parameters.values()) for point in points})
    assert all(point.tables == dict(point.parameters) for point in points)
