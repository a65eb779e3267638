"""The sample to scale, in the plane y = 0 through its middle."""

from __future__ import annotations

import math

from matplotlib.figure import Figure
from matplotlib.patches import Polygon, Rectangle

from substrate.picture.style import COLOURS, FAINT, INK, LAYER_COLOURS, new_figure
from substrate.run.results import Sketch


def draw_sketch(sketch: Sketch) -> Figure:
    """Layers, particles, emitters, light and collectors. Films thicker than the view are cut, which is said in them."""
    figure = new_figure(7.0, 5.0)
    axes = figure.add_subplot()
    half, top = _view(sketch)
    films = sum(layer["thickness_nm"] or 0.0 for layer in sketch.layers)
    depth = min(max(1.45 * films, 0.4 * top), 0.9 * top)
    _layers(axes, sketch, half, top, depth)
    for number, outline in enumerate(sketch.outlines):
        if outline["x_nm"]:
            points = list(zip(outline["x_nm"], outline["z_nm"]))
            axes.add_patch(Polygon(points, facecolor=COLOURS[4] if number % 2 == 0 else COLOURS[5], edgecolor=INK, linewidth=1.2, alpha=0.9))
    _names(axes, sketch, half)
    for emitter in sketch.emitters:
        axes.plot(emitter["x_nm"], emitter["z_nm"], marker="*", markersize=13, color=COLOURS[1], markeredgecolor=INK, linestyle="none")
        axes.annotate(f"emitter, {emitter['orientation']}", (emitter["x_nm"], emitter["z_nm"]), (8, 8), textcoords="offset points", fontsize=8)
    if sketch.light is not None:
        _light(axes, sketch.light, half, top, depth)
    _collectors(axes, sketch, half, top, depth)
    axes.set_xlim(-half, half)
    axes.set_ylim(-depth, top)
    axes.set_aspect("equal")
    axes.set_xlabel("x (nm)")
    axes.set_ylabel("z (nm)")
    axes.set_title("the sample to scale, cut at y = 0", fontsize=10, color=FAINT)
    return figure


def _view(sketch: Sketch) -> tuple[float, float]:
    """Half width and height above the surface that show everything with room for labels."""
    xs = [abs(x) for outline in sketch.outlines for x in outline["x_nm"]] + [abs(e["x_nm"]) for e in sketch.emitters]
    zs = [z for outline in sketch.outlines for z in outline["z_nm"]] + [e["z_nm"] for e in sketch.emitters]
    films = sum(layer["thickness_nm"] or 0.0 for layer in sketch.layers)
    top = 1.45 * max([*zs, 0.25 * min(films, 400.0), 20.0])
    return max(1.35 * max([*xs, 1.0]), 1.15 * top), top


def _layers(axes, sketch: Sketch, half: float, top: float, depth: float) -> None:
    host, *below = sketch.layers
    axes.add_patch(Rectangle((-half, 0.0), 2 * half, top, facecolor="#f7fafc", edgecolor="none"))
    axes.text(-0.97 * half, 0.95 * top, f"{host['name']}, n = {host['index_text']}", va="top", fontsize=8)
    z, base = 0.0, below[-1]
    room = 0.72 * depth  # the base keeps at least the rest
    thin: list[str] = []
    for number, layer in enumerate(below[:-1]):
        shown = min(layer["thickness_nm"], max(room + z, 0.06 * depth))
        cut = shown < layer["thickness_nm"]
        axes.add_patch(Rectangle((-half, z - shown), 2 * half, shown, facecolor=LAYER_COLOURS[(number + 1) % len(LAYER_COLOURS)], edgecolor=INK, linewidth=0.6))
        words = f"{layer['name']}, {layer['thickness_nm']:g} nm, n = {layer['index_text']}" + (" (cut, not to scale)" if cut else "")
        if shown > 0.075 * (top + depth):
            axes.text(-0.97 * half, z - 0.5 * shown, words, va="center", fontsize=8)
        else:
            thin.append(words)
        if cut:
            xs = [-half + i * half / 20.0 for i in range(41)]
            axes.plot(xs, [z - 0.82 * shown + 0.012 * depth * (-1) ** i for i in range(41)], color="white", linewidth=2.0)
        z -= shown
    axes.add_patch(Rectangle((-half, -depth), 2 * half, depth + z, facecolor=LAYER_COLOURS[0], edgecolor=INK, linewidth=0.6))
    lines = [f"{base['name']}, n = {base['index_text']}"]
    if thin:
        lines.insert(0, "above, from the top down: " + "; ".join(thin))
    axes.text(-0.97 * half, -0.96 * depth, "\n".join(lines), va="bottom", fontsize=8)


def _names(axes, sketch: Sketch, half: float) -> None:
    names = [outline["name"] for outline in sketch.outlines if outline["x_nm"]]
    for outline, name in zip([o for o in sketch.outlines if o["x_nm"]], names):
        x, z = max(zip(outline["x_nm"], outline["z_nm"]))
        side = 1 if x < 0.55 * half else -1
        x = x if side > 0 else min(outline["x_nm"])
        axes.annotate(name, (x, z), (8 * side, 0), textcoords="offset points", fontsize=8, va="center", ha="left" if side > 0 else "right")


def _light(axes, light: dict, half: float, top: float, depth: float) -> None:
    angle = math.radians(light["angle_deg"])
    length = 0.4 * top
    if light["side"] == "above":
        end = (-0.32 * half, 0.5 * top)
        start = (end[0] - length * math.sin(angle), end[1] + length * math.cos(angle))
    else:
        end = (-0.45 * half, -0.35 * depth)
        start = (end[0] - length * math.sin(angle), end[1] - length * math.cos(angle))
    start = (max(start[0], -0.95 * half), min(start[1], 0.9 * top))
    axes.annotate("", end, start, arrowprops={"arrowstyle": "-|>", "color": COLOURS[1], "linewidth": 2.2, "mutation_scale": 16})
    words = f"light, {light['angle_deg']:g} deg, {light['polarization']}"
    axes.annotate(words, start, (0, 7), textcoords="offset points", fontsize=8, color=COLOURS[1], ha="left")


def _collectors(axes, sketch: Sketch, half: float, top: float, depth: float) -> None:
    """Edges of each collector's opening, from the middle of the surface; rings as the two edges of their polar angles."""
    for number, collector in enumerate(sketch.collectors):
        colour = COLOURS[(number + 2) % len(COLOURS)]
        if collector.get("polar_deg") is not None:
            polar = [math.radians(a) for a in collector["polar_deg"]]
        else:
            opening = math.radians(collector["half_angle_deg"])
            polar = [opening] if collector["side"] == "above" else [math.pi - opening]
        reach = 0.92 * min(half, top)
        for angle in polar:
            for side in (-1.0, 1.0):
                axes.plot([0.0, side * reach * math.sin(angle)], [0.0, reach * math.cos(angle)], color=colour, linestyle="--", linewidth=1.0)
        height = 0.9 - 0.07 * number
        axes.text(0.97 * half, height * top, f"- - {collector['name']}", color=colour, fontsize=8, ha="right", va="top")
