"""A map of |E|^2 on a plane."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.colors import LogNorm, Normalize
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke

from substrate.picture.style import FAINT, MAP, new_figure
from substrate.run.results import PointResult

_LOGARITHMIC_FROM = 30.0  # largest value over the median
_DECADES = 4.0  # a logarithmic scale shows at most
_EDGED = withStroke(linewidth=2.4, foreground="#00000099")  # dark edges keep white lines visible on bright fields


def draw_field_map(point: PointResult, prefix: str = "", interfaces_nm: Sequence[float] = (0.0,), spots: Sequence = ()) -> Figure:
    """|E|^2 over that of the incident wave; a logarithmic scale where the largest value is more than 30 times the median.

    interfaces_nm: heights z to be drawn on upright planes.  spots: (number, u, v) of the points asked for on this plane, in nm.
    """
    found = point.arrays[f"{prefix}field_map_e2"]
    u, v = (np.asarray(point.arrays[f"{prefix}field_map_{name}_nm"].values, dtype=float) for name in "uv")
    values = np.asarray(found.values, dtype=float)
    norm, extend, scale = colour_scale(values)
    figure = new_figure(6.4, float(np.clip(5.2 * np.ptp(v) / np.ptp(u) + 0.9, 2.4, 7.5)), layout="compressed")
    axes = figure.add_subplot()
    mesh = axes.pcolormesh(u, v, np.maximum(values.T, norm.vmin), norm=norm, cmap=MAP, shading="nearest", rasterized=True)
    figure.colorbar(mesh, ax=axes, extend=extend).set_label(f"|E|² / |E incident|²{scale}")
    inside = point.arrays.get(f"{prefix}field_map_inside")
    if inside is not None and np.ptp(np.asarray(inside.values)) > 0:
        lines = axes.contour(u, v, np.asarray(inside.values, dtype=float).T, levels=[0.5], colors="white", linewidths=1.2)
        lines.set_path_effects([_EDGED])
    names = [axis[0] for axis in found.axes]
    low, high = axes.get_ylim()
    for z in interfaces_nm if names[1] == "z" else ():
        if low < z < high:
            axes.axhline(z, color="white", linewidth=1.0, linestyle="--", path_effects=[_EDGED])
    if names[1] == "z" and low < 0.0 < high:
        place = {"xycoords": ("axes fraction", "data"), "textcoords": "offset points", "ha": "right"}
        axes.annotate("surface", (1.0, 0.0), (-3, 2), fontsize=7, color="white", path_effects=[_EDGED], **place)
    for number, at_u, at_v in spots:
        if axes.get_xlim()[0] < at_u < axes.get_xlim()[1] and low < at_v < high:
            axes.plot(at_u, at_v, marker="+", markersize=8, color="white", markeredgewidth=1.3, linestyle="none", path_effects=[_EDGED])
            axes.annotate(f"spot {number}", (at_u, at_v), (5, 4), textcoords="offset points", fontsize=8, color="white", path_effects=[_EDGED])
    axes.set_aspect("equal")
    axes.set_xlabel(f"{names[0]} (nm)")
    axes.set_ylabel(f"{names[1]} (nm)")
    axes.set_title(f"plane {found.attributes.get('plane', '')}; largest value {values.max():.3g}", fontsize=10, color=FAINT)
    return figure


def colour_scale(values: np.ndarray) -> tuple[Normalize, str, str]:
    """Norm, whether the colour bar extends below it, and what to say about it, for values of one map."""
    positive = values[values > 0.0]
    if positive.size == 0 or positive.max() <= _LOGARITHMIC_FROM * np.median(positive):
        return Normalize(0.0, float(values.max()) or 1.0), "neither", ""
    floor = max(positive.min(), positive.max() * 10.0**-_DECADES)
    return LogNorm(float(floor), float(positive.max())), "min" if values.min() < floor else "neither", ", logarithmic"


def map_rows(point: PointResult, prefix: str = "") -> tuple[list[str], list[list[float]]]:
    """Header and rows of the data: the two places of each field of the map, its value."""
    found = point.arrays[f"{prefix}field_map_e2"]
    u, v = (np.asarray(point.arrays[f"{prefix}field_map_{name}_nm"].values, dtype=float) for name in "uv")
    along_u, along_v = np.meshgrid(u, v, indexing="ij")
    header = [f"{name} ({unit})" for name, unit in found.axes] + ["|E|^2 / |E incident|^2"]
    return header, np.column_stack([along_u.ravel(), along_v.ravel(), np.asarray(found.values, dtype=float).ravel()]).tolist()
