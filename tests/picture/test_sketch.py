"""The sketch of the sample: what is to scale is, what is not says so, and names are readable."""

from dataclasses import replace

import numpy as np
import pytest
from matplotlib.patches import Rectangle
from matplotlib.text import Annotation, Text

from substrate.picture.sketch import draw_sketch, sketch_rows
from substrate.run.results import Sketch
from tests.picture.samples import hot_spot, lifetimes


def arrows(axes, linewidth):
    """Tips and tails (x, z) of the arrows of this line width."""
    notes = [note for note in axes.texts if isinstance(note, Annotation) and note.arrow_patch is not None]
    return [(note.xy, note.xyann) for note in notes if note.arrow_patch.get_linewidth() == linewidth]


def test_sketch_names_everything_and_says_what_is_cut():
    texts = " | ".join(text.get_text() for text in draw_sketch(lifetimes().sketch).axes[0].texts)
    for words in ("water", "n = 1.33", "sphere 1, gold", "emitter, vertical", "gold, 900 nm", "cut", "silica, 1.5 nm", "objective", "silicon", " nm"):
        assert words in texts
    assert "light, 65 deg, p" in " | ".join(text.get_text() for text in draw_sketch(hot_spot().sketch).axes[0].texts)


LAYERS = [{"name": "air", "thickness_nm": None, "index_text": "1"}, {"name": "silicon", "thickness_nm": None, "index_text": "3.9"}]


def films(*sizes):
    """Layers with films of these thicknesses."""
    between = [{"name": f"film{i}", "thickness_nm": size, "index_text": "1.5"} for i, size in enumerate(sizes)]
    return [LAYERS[0], *between, LAYERS[1]]


def drawn_films(axes):
    """Heights of the rectangles of the films, without the base, which is drawn first."""
    return [patch.get_height() for patch in axes.patches[1:] if isinstance(patch, Rectangle)]


def test_films_that_fit_are_to_scale_and_others_say_what_they_are():
    ball = hot_spot().sketch.outlines
    (axes,) = draw_sketch(Sketch(films(5.0, 30.0), ball)).axes
    assert drawn_films(axes) == pytest.approx([5.0, 30.0])
    assert not any(word in text.get_text() for text in axes.texts for word in ("cut", "thicker"))
    (axes,) = draw_sketch(Sketch(films(0.3, 5000.0), ball)).axes
    thin, thick = drawn_films(axes)
    assert thin > 0.3 and thick < 500.0
    texts = " | ".join(text.get_text() for text in axes.texts)
    assert "0.3 nm\nn = 1.5; drawn thicker" in texts and "5000 nm\nn = 1.5; cut" in texts


def test_scale_bar_has_the_length_that_it_says():
    (axes,) = draw_sketch(hot_spot().sketch).axes
    (words,) = (text.get_text() for text in axes.texts if text.get_text().endswith(" nm"))
    (bar,) = (line for line in axes.lines if line.get_linewidth() == 3.0)
    assert np.ptp(bar.get_xdata()) == pytest.approx(float(words.split()[0]))
    assert np.ptp(axes.get_ylim()) / np.ptp(axes.get_xlim()) == pytest.approx(axes.bbox.height / axes.bbox.width)  # one scale for x and z


@pytest.mark.parametrize("side", ["above", "below"])
@pytest.mark.parametrize("angle", [0.0, 35.0, 65.0, 89.0])
def test_light_arrow_has_the_angle_of_the_light(side, angle):
    sketch = replace(hot_spot().sketch, light={"angle_deg": angle, "side": side, "polarization": "p"})
    (axes,) = draw_sketch(sketch).axes
    (((x1, z1), (x0, z0)),) = arrows(axes, 2.4)
    assert np.degrees(np.arctan2(x1 - x0, abs(z1 - z0))) == pytest.approx(angle)
    assert (z1 < z0) == (side == "above")


@pytest.mark.parametrize(
    "orientation, expected", [("vertical", [90.0]), ("horizontal", [0.0]), ("(0.6, 0, 0.8)", [53.13]), ("y", []), ("isotropic", [45.0, -45.0])]
)
def test_emitters_show_their_moment(orientation, expected):
    sketch = Sketch(LAYERS, [], [{"x_nm": 5.0, "z_nm": 20.0, "orientation": orientation}])
    (axes,) = draw_sketch(sketch).axes
    angles = [np.degrees(np.arctan2(z1 - z0, x1 - x0)) for (x0, z0), (x1, z1) in arrows(axes, 1.4)]
    assert angles == pytest.approx(expected, abs=0.01)  # degrees; the vector has four digits


def test_names_beside_the_sketch_do_not_overlap():
    layers = films(*[80.0, 120.0] * 12)
    sketch = replace(hot_spot().sketch, layers=layers, emitters=[{"x_nm": 0.0, "z_nm": 70.0, "orientation": "isotropic"}])
    figure = draw_sketch(sketch)
    figure.canvas.draw()
    (axes,) = figure.axes
    column = [text for text in axes.texts if isinstance(text, Annotation) and text.arrow_patch is not None and text.get_text()]
    boxes = sorted((Text.get_window_extent(text) for text in column), key=lambda box: -box.y1)
    assert len(boxes) > 12 and "more films" in " | ".join(text.get_text() for text in column)
    assert all(lower.y1 <= upper.y0 + 0.5 for upper, lower in zip(boxes, boxes[1:]))  # half a pixel of rounding
    assert all(box.x1 <= figure.bbox.width and box.y0 >= 0.0 for box in boxes)


def test_data_of_the_sketch():
    header, rows = sketch_rows(lifetimes().sketch)
    assert header == ["what", "name", "thickness (nm)", "index", "x (nm)", "z (nm)"]
    assert ["layer", "gold", 900.0, "0.18+3.4i", "", ""] in rows and ["emitter", "vertical", "", "", 0.0, 90.0] in rows
    assert sum(row[0] == "outline" for row in rows) == 60
