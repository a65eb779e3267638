"""The sample in the xz plane: particles and gaps to scale, films to scale or marked, names in a column beside it."""

from __future__ import annotations

import math
from dataclasses import dataclass

from matplotlib.figure import Figure
from matplotlib.patches import Polygon, Rectangle, Wedge

from substrate.picture.style import COLOURS, FAINT, INK, LAYER_COLOURS, blank_figure
from substrate.run.results import Sketch

_WIDTH, _DRAWN = 8.4, 5.2  # inches: of the figure, of the sample in it
_EDGE, _HEAD = 0.15, 0.35  # inches: margins, room for the heading
_LINE = 0.145  # inches between lines of the names
_ARC = 0.085  # of the radius: from one collector's arc to the next
_FILMS_COUNT = 100.0  # nm: films widen the view no further if there is something above them
_MOST_NAMES = 11  # names of films in the column; more are counted
_PARTICLE_COLOURS = (COLOURS[4], COLOURS[5], COLOURS[3], COLOURS[2])
_ARROW = {"color": COLOURS[1], "shrinkA": 0, "shrinkB": 0}
_AXES = {"x": (1.0, 0.0), "z": (0.0, 1.0), "vertical": (0.0, 1.0), "horizontal": (1.0, 0.0)}


@dataclass(frozen=True)
class _Layer:
    """A film as drawn: from z = top down to z = bottom; `mark` says how that differs from the scale."""

    words: str
    top: float
    bottom: float
    mark: str = ""


@dataclass(frozen=True)
class _View:
    """What the drawing shows, in nm: left to right, bottom to top; `radius` of the collectors' arcs about (middle, 0); films as drawn."""

    left: float
    right: float
    bottom: float
    top: float
    radius: float
    films: tuple[_Layer, ...]

    @property
    def middle(self) -> float:
        return 0.5 * (self.left + self.right)

    @property
    def stack_bottom(self) -> float:
        return self.films[-1].bottom if self.films else 0.0


@dataclass(frozen=True)
class _Name:
    """An entry of the column: its words and the point (x, z) that they name."""

    words: str
    x: float
    z: float
    colour: str = INK


def draw_sketch(sketch: Sketch) -> Figure:
    """Layers, particles, emitters, light and collectors. Whatever is not to scale is said in its name: films that are cut (with a
    break across them) or thickened, and the opening of collectors, which is drawn from the middle of the surface."""
    view = _view(sketch)
    height = _DRAWN * (view.top - view.bottom) / (view.right - view.left)
    figure = blank_figure(_WIDTH, height + _HEAD + _EDGE)
    total = height + _HEAD + _EDGE
    axes = figure.add_axes((_EDGE / _WIDTH, _EDGE / total, _DRAWN / _WIDTH, height / total))
    axes.set(xlim=(view.left, view.right), ylim=(view.bottom, view.top), xticks=[], yticks=[])
    names = [
        *_layers(axes, sketch, view),
        *_particles(axes, sketch),
        *_collectors(axes, sketch, view),
        *_emitters(axes, sketch, view),
    ]
    if sketch.light is not None:
        _light(axes, sketch.light, view)
    _scale_bar(axes, view)
    _column(figure, axes, names, view, height)
    where = "at y = 0" if len(sketch.outlines) < 2 else "through each particle"
    figure.text(_EDGE / _WIDTH, 1.0 - 0.1 / total, f"cut {where}, to scale but where noted", va="top", fontsize=9, color=FAINT)
    return figure


def sketch_rows(sketch: Sketch) -> tuple[list[str], list[list]]:
    """Header and rows of what the sketch shows: layers, then the particles' outlines and the emitters as points."""
    layers = [["layer", layer["name"], "" if layer["thickness_nm"] is None else layer["thickness_nm"], layer["index_text"], "", ""] for layer in sketch.layers]
    lines = [["outline", line["name"], "", "", x, z] for line in sketch.outlines for x, z in zip(line["x_nm"], line["z_nm"])]
    emitters = [["emitter", emitter["orientation"], "", "", emitter["x_nm"], emitter["z_nm"]] for emitter in sketch.emitters]
    return ["what", "name", "thickness (nm)", "index", "x (nm)", "z (nm)"], [*layers, *lines, *emitters]


# ---- what is shown


def _view(sketch: Sketch) -> _View:
    xs = [x for outline in sketch.outlines for x in outline["x_nm"]] + [emitter["x_nm"] for emitter in sketch.emitters]
    zs = [z for outline in sketch.outlines for z in outline["z_nm"]] + [emitter["z_nm"] for emitter in sketch.emitters]
    total = sum(layer["thickness_nm"] for layer in sketch.layers[1:-1])
    middle = 0.5 * (min(xs) + max(xs)) if xs else 0.0
    content = max([math.hypot(x - middle, z) for x, z in zip(xs, zs)], default=0.0)
    radius = max(1.12 * content, min(0.3 * total, _FILMS_COUNT) if xs else 1.25 * total) or 100.0
    outer = radius * (1.0 + _ARC * sum(c["side"] == "above" for c in sketch.collectors))
    top, half = 1.05 * outer, 1.1 * outer
    if sketch.light is not None and sketch.light["side"] == "above":  # room for its arrow outside of everything else
        angle = math.radians(sketch.light["angle_deg"])
        top, half = max(top, 1.5 * outer * math.cos(angle)), max(half, 1.5 * outer * math.sin(angle))
    below = any(item["side"] == "below" for item in [*sketch.collectors, *([sketch.light] if sketch.light else [])])
    base = (0.55 if below else 0.3) * top
    room = min(1.05 * total, 0.85 * top)
    films = _films(sketch.layers[1:-1], room, 0.014 * (top + base + room))
    bottom = (films[-1].bottom if films else 0.0) - base
    half = max(half, 0.5 * (top - bottom) / 0.95)  # never much higher than wide
    return _View(middle - half, middle + half, bottom, top, radius, films)


def _films(layers: list[dict], room: float, least: float) -> tuple[_Layer, ...]:
    """Films as drawn in `room`: the thickest are cut to a common size so that all fit, the thinnest are drawn `least` thick."""
    sizes = [layer["thickness_nm"] for layer in layers]
    least = min(least, room / (2.0 * max(len(sizes), 1)))
    cap = _cap(sizes, room)
    films, z = [], 0.0
    for number, (layer, size) in enumerate(zip(layers, sizes), 1):
        drawn = min(max(size, least), max(cap, least))
        mark = "cut" if drawn < size else "drawn thicker" if drawn > size else ""
        place = f"film {number}: " if len(layers) > 1 else "film: "
        films.append(_Layer(f"{place}{layer['name']}, {size:g} nm\nn = {layer['index_text']}" + (f"; {mark}" if mark else ""), z, z - drawn, mark))
        z -= drawn
    return tuple(films)


def _cap(sizes: list[float], room: float) -> float:
    """The size c for which min(size, c) add up to `room`; infinite if all fit."""
    if sum(sizes) <= room:
        return math.inf
    rest, left = room, len(sizes)
    for size in sorted(sizes):
        if size * left > rest:
            return rest / left
        rest, left = rest - size, left - 1
    return math.inf


# ---- what is drawn; each function returns the names for the column


def _layers(axes, sketch: Sketch, view: _View) -> list[_Name]:
    host, base = sketch.layers[0], sketch.layers[-1]
    width = view.right - view.left
    axes.add_patch(Rectangle((view.left, view.stack_bottom), width, view.bottom - view.stack_bottom, facecolor=LAYER_COLOURS[0], edgecolor=INK, linewidth=0.7))
    materials = list(dict.fromkeys(layer["name"] for layer in sketch.layers[1:-1]))
    for layer, film in zip(sketch.layers[1:-1], view.films):
        colour = LAYER_COLOURS[1 + materials.index(layer["name"]) % (len(LAYER_COLOURS) - 1)]
        axes.add_patch(Rectangle((view.left, film.bottom), width, film.top - film.bottom, facecolor=colour, edgecolor=INK, linewidth=0.7))
        if film.mark == "cut" and film.top - film.bottom > 0.03 * width:
            _break(axes, view, film)
    axes.axhline(0.0, color=INK, linewidth=1.0)
    films = [_Name(film.words, view.right, 0.5 * (film.top + film.bottom)) for film in view.films]
    if len(films) > _MOST_NAMES:
        head, tail = films[: _MOST_NAMES // 2], films[-(_MOST_NAMES // 2) :]
        hidden = films[len(head) : -len(tail)]
        films = [*head, _Name(f"... {len(hidden)} more films ...", view.right, hidden[len(hidden) // 2].z), *tail]
    return [
        _Name(f"host: {host['name']}\nn = {host['index_text']}", view.right, view.top),
        *films,
        _Name(f"base: {base['name']}\nn = {base['index_text']}", view.right, 0.5 * (view.stack_bottom + view.bottom)),
    ]


def _break(axes, view: _View, film: _Layer) -> None:
    """A white zigzag band with dark edges across a film of which a part is left out."""
    teeth, size = 48, 0.012 * (view.right - view.left)
    size = min(size, 0.22 * (film.top - film.bottom))
    middle = 0.5 * (film.top + film.bottom)
    xs = [view.left + i * (view.right - view.left) / teeth for i in range(teeth + 1)]
    zig = [0.5 * size * (-1) ** i for i in range(teeth + 1)]
    axes.fill_between(xs, [middle + z - 0.5 * size for z in zig], [middle + z + 0.5 * size for z in zig], facecolor="white", edgecolor=INK, linewidth=0.6)


def _particles(axes, sketch: Sketch) -> list[_Name]:
    names: dict[str, _Name] = {}
    for number, outline in enumerate(line for line in sketch.outlines if line["x_nm"]):
        points = list(zip(outline["x_nm"], outline["z_nm"]))
        axes.add_patch(Polygon(points, facecolor=_PARTICLE_COLOURS[number % len(_PARTICLE_COLOURS)], edgecolor=INK, linewidth=1.1))
        x, z = max(points, key=lambda point: (round(point[0], 3), point[1]))
        names.setdefault(outline["name"], _Name(outline["name"], x, z))
    found = list(names.values())
    if len(found) > _MOST_NAMES:
        found = [*found[: _MOST_NAMES - 1], _Name(f"... {len(found) - _MOST_NAMES + 1} more particles", found[-1].x, found[-1].z)]
    return found


def _emitters(axes, sketch: Sketch, view: _View) -> list[_Name]:
    """A dot for each, with a double arrow along its moment as far as that lies in the plane of the drawing."""
    size = 0.05 * (view.right - view.left)
    names = []
    for number, emitter in enumerate(sketch.emitters, 1):
        x, z, orientation = emitter["x_nm"], emitter["z_nm"], emitter["orientation"]
        for dx, dz in _moments(orientation):
            if math.hypot(dx, dz) > 0.05:
                ends = (x - size * dx, z - size * dz), (x + size * dx, z + size * dz)
                axes.annotate("", *ends, arrowprops={"arrowstyle": "<|-|>", "linewidth": 1.4, "mutation_scale": 8, **_ARROW})
        if orientation == "y":  # an arrow seen from its tip
            axes.plot(x, z, marker="o", markersize=11, markerfacecolor="none", markeredgecolor=COLOURS[1], markeredgewidth=1.4, linestyle="none")
        axes.plot(x, z, marker="o", markersize=6, color=COLOURS[1], markeredgecolor=INK, linestyle="none")
        title = f"emitter {number}" if len(sketch.emitters) > 1 else "emitter"
        names.append(_Name(f"{title}, {orientation}", x, z, COLOURS[1]))
    return names


def _moments(orientation: str) -> list[tuple[float, float]]:
    """Directions (x, z) of the arrows of an orientation: none along y (drawn as a ring), two for all directions."""
    if orientation == "isotropic":
        return [(0.7, 0.7), (0.7, -0.7)]
    if orientation.startswith("("):
        x, y, z = (float(part) for part in orientation.strip("()").split(","))
        length = math.sqrt(x * x + y * y + z * z) or 1.0
        return [(x / length, z / length)]
    return [_AXES[orientation]] if orientation in _AXES else []


def _light(axes, light: dict, view: _View) -> None:
    """An arrow along the light's direction of travel, towards the middle of the surface on the side from which it comes."""
    angle = math.radians(light["angle_deg"])
    above = light["side"] == "above"
    dx, dz = math.sin(angle), -math.cos(angle) if above else math.cos(angle)
    middle = (view.middle, 0.0 if above else view.stack_bottom)
    room = view.top if above else view.stack_bottom - view.bottom
    far = 0.95 * min(room / max(abs(dz), 1e-9), (view.middle - view.left) / max(dx, 1e-9))
    near = (0.72 if above else 0.3) * far
    start, end = ((middle[0] - r * dx, middle[1] - r * dz) for r in (far, near))
    axes.annotate("", end, start, arrowprops={"arrowstyle": "-|>", "linewidth": 2.4, "mutation_scale": 17, **_ARROW})
    steep = light["angle_deg"] < 45.0
    words = f"light, {light['angle_deg']:g} deg, {light['polarization']}"
    if light.get("azimuth_deg"):
        words += f", azimuth {light['azimuth_deg']:g} deg"
    box = {"facecolor": "white", "edgecolor": "none", "alpha": 0.8, "pad": 1.0}
    if steep:
        place = {"xytext": (-7, 0), "ha": "right", "va": "top" if above else "bottom"}
    else:
        place = {"xytext": (0, 7 if above else -7), "ha": "left", "va": "bottom" if above else "top"}
    axes.annotate(words, start, textcoords="offset points", fontsize=8, color=COLOURS[1], bbox=box, annotation_clip=False, **place)


def _collectors(axes, sketch: Sketch, view: _View) -> list[_Name]:
    """An arc over the polar angles of each collector, seen from the middle of the surface (below: of the top of the base)."""
    names = []
    width = 0.035 * view.radius
    for number, collector in enumerate(sketch.collectors):
        colour = COLOURS[(number + 2) % len(COLOURS)]
        above = collector["side"] == "above"
        apex = (view.middle, 0.0 if above else view.stack_bottom)
        radius = (view.radius * (1.0 + _ARC * (number + 0.4))) if above else (view.stack_bottom - view.bottom) * (0.9 - 0.09 * number)
        for start, stop in _arcs(collector):  # degrees from +z, clockwise
            axes.add_patch(Wedge(apex, radius + width, 90.0 - stop, 90.0 - start, width=width, facecolor=colour, edgecolor="none", alpha=0.85))
            for angle in {start, stop}:
                tip = (apex[0] + radius * math.sin(math.radians(angle)), apex[1] + radius * math.cos(math.radians(angle)))
                axes.plot([apex[0], tip[0]], [apex[1], tip[1]], color=colour, linewidth=0.7, linestyle=(0, (5, 4)), zorder=0.9)
        last = max(_arcs(collector), key=lambda arc: math.sin(math.radians(arc[1])))[1 if above else 0]
        x, z = apex[0] + (radius + width) * math.sin(math.radians(last)), apex[1] + (radius + width) * math.cos(math.radians(last))
        names.append(_Name(f"collector: {collector['name']}", x, z, colour))
    return names


def _arcs(collector: dict) -> list[tuple[float, float]]:
    """Signed polar angles (from +z, positive towards +x) that a collector covers in the plane of the drawing."""
    if collector.get("polar_deg") is not None:
        low, high = collector["polar_deg"]
        return [(low, high), (-high, -low)] if low > 0.0 and high < 180.0 else [(-high, high)] if low <= 0.0 else [(low, 360.0 - low)]
    half = collector["half_angle_deg"]
    return [(-half, half)] if collector["side"] == "above" else [(180.0 - half, 180.0 + half)]


def _scale_bar(axes, view: _View) -> None:
    """A bar of a round length above the drawing's right corner, where nothing else is."""
    width = view.right - view.left
    length = _round_length(0.22 * width)
    z = view.top + 0.024 * width
    axes.plot([view.right - length, view.right], [z, z], color=INK, linewidth=3.0, solid_capstyle="butt", clip_on=False)
    axes.text(view.right - length - 0.012 * width, z, f"{length:g} nm", ha="right", va="center", fontsize=8)


def _round_length(most: float) -> float:
    """The largest of 1, 2, 5 times a power of ten that is not above `most`."""
    power = 10.0 ** math.floor(math.log10(most))
    return max(step * power for step in (1.0, 2.0, 5.0) if step * power <= most * (1.0 + 1e-12))


def _column(figure, axes, names: list[_Name], view: _View, height: float) -> None:
    """The names at the right of the drawing, from the top down without overlap, each with a thin line to what it names."""
    names = sorted(names, key=lambda name: -name.z)
    scale = height / (view.top - view.bottom)  # inches a nm
    sizes = [_LINE * (name.words.count("\n") + 1) + 0.05 for name in names]
    places, z = [], height + 0.1
    for name, size in zip(names, sizes):  # centres in inches above the bottom of the drawing
        z = min((name.z - view.bottom) * scale, z - 0.5 * size)
        places.append(z)
        z -= 0.5 * size
    floor = -0.5 * _EDGE
    for i in range(len(names) - 1, -1, -1):  # those that fell below the bottom are pushed up again
        places[i] = max(places[i], floor + 0.5 * sizes[i])
        floor = places[i] + 0.5 * sizes[i]
    for name, place in zip(names, places):
        tail = (view.right + 0.045 * (view.right - view.left), view.bottom + place / scale)
        axes.annotate(
            name.words, (name.x, name.z), tail, fontsize=8, color=name.colour, va="center", ha="left", annotation_clip=False, linespacing=1.15,
            arrowprops={"arrowstyle": "-", "color": FAINT, "linewidth": 0.6, "shrinkA": 2, "shrinkB": 0, "relpos": (0.0, 0.5)},
        )
