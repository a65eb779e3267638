"""A map of |E|^2 on a plane."""

from __future__ import annotations

import numpy as np
from matplotlib.colors import LogNorm, Normalize
from matplotlib.figure import Figure

from substrate.picture.style import FAINT, MAP, new_figure
from substrate.run.results import PointResult

_LOGARITHMIC_FROM = 30.0  # largest value over the median
_DECADES = 4.0  # a logarithmic scale shows at most


def draw_field_map(point: PointResult, prefix: str = "") -> Figure:
    """|E|^2 over that of the incident wave; a logarithmic scale where the largest value is more than 30 times the median."""
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
        axes.contour(u, v, np.asarray(inside.values, dtype=float).T, levels=[0.5], colors="white", linewidths=1.2)
    names = [axis[0] for axis in found.axes]
    if names[1] == "z" and axes.get_ylim()[0] < 0.0 < axes.get_ylim()[1]:
        axes.axhline(0.0, color="white", linewidth=1.0, linestyle="--")
        place = {"xycoords": ("axes fraction", "data"), "textcoords": "offset points", "ha": "right"}
        axes.annotate("surface", (1.0, 0.0), (-3, 2), fontsize=7, color="white", **place)
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
