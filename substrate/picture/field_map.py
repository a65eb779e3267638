"""A map of |E|^2 on a plane."""

from __future__ import annotations

import numpy as np
from matplotlib.colors import LogNorm, Normalize
from matplotlib.figure import Figure

from substrate.picture.style import FAINT, MAP, new_figure
from substrate.run.results import PointResult


def draw_field_map(point: PointResult, prefix: str = "") -> Figure:
    """|E|^2 over that of the incident wave; a logarithmic scale where the largest value is more than 30 times the median."""
    found = point.arrays[f"{prefix}field_map_e2"]
    u, v = (np.asarray(point.arrays[f"{prefix}field_map_{name}_nm"].values) for name in "uv")
    values = np.asarray(found.values, dtype=float)
    inside = point.arrays.get(f"{prefix}field_map_inside")
    width, height = np.ptp(u), np.ptp(v)
    figure = new_figure(6.4, float(np.clip(5.2 * height / width + 0.9, 3.0, 7.5)))
    axes = figure.add_subplot()
    positive = values[values > 0.0]
    logarithmic = positive.size > 0 and positive.max() > 30.0 * np.median(positive)
    floor = max(positive.min(), 1e-4 * positive.max()) if logarithmic else 0.0
    norm = LogNorm(floor, positive.max()) if logarithmic else Normalize(0.0, values.max() or 1.0)
    mesh = axes.pcolormesh(u, v, np.maximum(values.T, floor), norm=norm, cmap=MAP, shading="nearest", rasterized=True)
    bar = figure.colorbar(mesh, ax=axes)
    bar.set_label("|E|² / |E incident|²" + (", logarithmic" if logarithmic else ""))
    if inside is not None and np.any(inside.values):
        axes.contour(u, v, np.asarray(inside.values, dtype=float).T, levels=[0.5], colors="white", linewidths=1.2)
    names = [axis[0] for axis in found.axes]
    if names[1] == "z" and v.min() <= 0.0 <= v.max():
        axes.axhline(0.0, color="white", linewidth=0.8, linestyle="--")
    axes.set_aspect("equal")
    axes.set_xlabel(f"{names[0]} (nm)")
    axes.set_ylabel(f"{names[1]} (nm)")
    axes.set_title(f"plane {found.attributes.get('plane', '')}; largest value {values.max():.3g}", fontsize=10, color=FAINT)
    return figure
