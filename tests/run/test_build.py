"""The schema says what the objects take, and tables become these objects."""

from dataclasses import fields

import numpy as np
import pytest

from substrate.errors import InputError
from substrate.observe.collector import Collector
from substrate.particle.shape import SHAPES, Rod, Shell, Sphere, Union
from substrate.run.build import build, check_points
from substrate.run.case import parse_case
from substrate.run.schema import CASE, COLLECTOR, EMITTER, LIGHT, PARTICLE, PLACE
from substrate.run.sketch import outlines
from substrate.source.emitter import KINDS, ORIENTATIONS, Emitter
from substrate.source.plane_wave import POLARIZATIONS, SIDES, PlaneWave

REST = "\n[light]\nwavelength_nm = 633\n[[ask]]\nwhat = 'cross sections'\n"


def particles(text: str) -> tuple:
    """The particle of the first point of a case with one [[particle]]."""
    points = parse_case("[[particle]]\n" + text + REST).points()
    check_points(points)
    return build(points[0].tables).particles


@pytest.mark.parametrize("word", SHAPES)
def test_keys_of_shapes_are_the_fields_of_their_classes(word):
    place = set(PLACE) if word == "union" else set()  # parts of a union have places, the union has none
    assert set(PARTICLE.keys(word)) - {"shape"} == {field.name for field in fields(SHAPES[word])} - place


def test_all_shapes_can_be_asked_for():
    assert set(PARTICLE.own) == set(SHAPES)


@pytest.mark.parametrize(("keys", "made"), [(EMITTER, Emitter), (COLLECTOR, Collector), (LIGHT, PlaneWave)])
def test_keys_of_sources_and_collectors_are_the_fields_of_their_classes(keys, made):
    extra = {"kind"} if made is PlaneWave else set()  # the kind of light chooses the class
    assert set(keys) - extra == {field.name for field in fields(made)}


def test_words_are_those_that_the_classes_know():
    assert set(LIGHT["polarization"].choices) == set(POLARIZATIONS)
    assert set(LIGHT["side"].choices) == set(COLLECTOR["side"].choices) == set(SIDES)
    assert set(EMITTER["orientation"].choices) == set(ORIENTATIONS)
    assert set(EMITTER["kind"].choices) == set(KINDS)


def test_every_kind_of_key_has_a_reader_and_words():
    from substrate.run.reading import READERS, allowed_words

    def keys(table):
        table = table.keys(None) if hasattr(table, "own") else table
        for key in table.values():
            yield key
            if key.keys is not None and key.keys is not table and key.kind in ("table", "tables") and "around" not in table:
                yield from keys(key.keys)

    found = list(keys(CASE))
    assert len(found) > 50
    for key in found:
        assert key.kind in READERS or key.kind in ("table", "tables", "numbers")
        assert allowed_words(key)


def test_a_sphere_in_its_place():
    (ball,) = particles("shape = 'sphere'\nmaterial = 'gold'\ndiameter_nm = 60\ngap_nm = 2\ncenter_xy_nm = [5, 6]")
    assert isinstance(ball, Sphere) and ball.center == (5.0, 6.0, 32.0)
    (ball,) = particles("shape = 'sphere'\nmaterial = '1.5+0.1i'\ndiameter_nm = 60\ncenter_nm = [1, 2, [40, 50]]")
    assert ball.center == (1.0, 2.0, 40.0) and ball.material == "1.5+0.1i"


def test_shells_and_unions():
    core = "around = {shape = 'rod', material = 'silver', diameter_nm = [20, 30], length_nm = 60, tilt_deg = 90}"
    (shell,) = particles(f"shape = 'shell'\nmaterial = 'gold'\nthickness_nm = 4\n{core}\ngap_nm = 1")
    assert isinstance(shell, Shell) and isinstance(shell.around, Rod) and shell.around.material == "silver"
    assert shell.bounds_nm()[1] == pytest.approx((14.0, 14.0, 69.0))  # radius 10 + 4, 1 + 60 + 2 x 4
    parts = "parts = [{shape = 'sphere', diameter_nm = 50}, {shape = 'sphere', material = 'silver', diameter_nm = 40, center_nm = [60, 0, 40]}]"
    (pair,) = particles(f"shape = 'union'\nmaterial = 'gold'\n{parts}")
    assert isinstance(pair, Union) and [part.material for part in pair.parts] == ["gold", "silver"]
    assert pair.parts[0].center == (0.0, 0.0, 25.0)


def test_series_inside_of_shells_are_named():
    text = "[[particle]]\nshape = 'shell'\nmaterial = 'gold'\nthickness_nm = 4\naround = {shape = 'box', material = 1.5, size_nm = [10, [20, 30], 10]}"
    (axis,) = parse_case(text + REST).axes
    assert axis.key == "particle[1].around.size_nm.y" and axis.values == (20.0, 30.0)


def test_light_with_a_jones_pair():
    text = "[[particle]]\nshape = 'sphere'\nmaterial = 'gold'\ndiameter_nm = 60" + REST.replace("633", "633\npolarization = [1, '1i']")
    (pair,) = build(parse_case(text).points()[0].tables).light.jones()
    assert pair == pytest.approx((0.5**0.5, 1j * 0.5**0.5))


def test_what_a_class_refuses_comes_with_its_table_once():
    text = "[[particle]]\nshape = 'rod'\nmaterial = 'gold'\ndiameter_nm = [20, 70, 70]\nlength_nm = 60" + REST
    with pytest.raises(InputError) as caught:
        check_points(parse_case(text).points())
    (problem,) = caught.value.problems
    assert str(problem).startswith("particle[1], rod length_nm: received 60.0; allowed: at least the diameter (70 nm).")


def test_faults_of_the_whole_sample():
    ball = "[[particle]]\nshape = 'sphere'\nmaterial = 'gold'\ndiameter_nm = 60"
    below = ball + REST.replace("633", "633\nside = 'below'")
    with pytest.raises(InputError, match="light.side: received 'below'; allowed: 'above' for an absorbing base"):
        check_points(parse_case(below + "[stack]\nbase = 'gold'\n").points())
    with pytest.raises(InputError, match="allowed: a lossless medium"):
        check_points(parse_case(ball + REST + "[stack]\nhost = 'gold'\n").points())
    with pytest.raises(InputError, match=r"at most 1.000\d*, the index of the host"):
        check_points(parse_case(ball + REST + "[[collector]]\nna = 1.1\n").points())


def test_outlines_follow_the_surface():
    (rod,) = particles("shape = 'rod'\nmaterial = 'gold'\ndiameter_nm = 20\nlength_nm = 60\ntilt_deg = 30\ngap_nm = 3")
    (line,) = outlines(rod)
    points = np.column_stack([line["x_nm"], np.zeros(len(line["x_nm"])), line["z_nm"]])
    # the bisection ends at 62/240/2^12 nm along x; the surface is met at an angle, so that the distance is no larger
    assert np.abs(rod.signed_distance(points)).max() < 2e-4
    assert line["x_nm"][0] == line["x_nm"][-1] and line["z_nm"][0] == line["z_nm"][-1]  # closed
    # at the lowest and highest rows the cut is narrower than the spacing of the samples and may be missed: one row of 121
    assert min(line["z_nm"]) == pytest.approx(3.0, abs=0.05) and max(line["z_nm"]) == pytest.approx(rod.bounds_nm()[1][2], abs=0.05)
