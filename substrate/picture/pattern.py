"""Far-field patterns: cuts over the polar angle and discs in direction cosines."""

from __future__ import annotations

import numpy as np
from matplotlib.figure import Figure

from substrate.picture.style import COLOURS, FAINT, MAP, label, new_figure
from substrate.run.results import PointResult


def _data(point: PointResult, prefix: str):
    found = point.arrays[f"{prefix}pattern"]
    polar = np.asarray(point.arrays[f"{prefix}pattern_polar_deg"].values, dtype=float)
    azimuth = np.asarray(point.arrays[f"{prefix}pattern_azimuth_deg"].values, dtype=float)
    return found, polar, azimuth, np.asarray(found.values, dtype=float)


def _cut(polar, azimuth, values, at_deg: float) -> tuple[np.ndarray, np.ndarray]:
    """Signed polar angle and values along one plane: azimuth at_deg on the positive side, the opposite one on the negative."""
    here = int(np.argmin(np.abs((azimuth - at_deg + 180.0) % 360.0 - 180.0)))
    there = int(np.argmin(np.abs((azimuth - at_deg) % 360.0 - 180.0)))
    return np.concatenate([-polar[::-1], polar]), np.concatenate([values[::-1, there], values[:, here]])


def draw_pattern_cuts(point: PointResult, prefix: str = "") -> Figure:
    """The pattern in the plane of incidence (azimuth 0 and 180) and across it, around the full circle of polar angles."""
    found, polar, azimuth, values = _data(point, prefix)
    figure = new_figure(6.4, 5.0)
    axes = figure.add_subplot(projection="polar")
    axes.set_theta_zero_location("N")
    axes.set_theta_direction(-1)
    for number, (at, words) in enumerate(((0.0, "azimuth 0 / 180 deg"), (90.0, "azimuth 90 / 270 deg"))):
        angle, along = _cut(polar, azimuth, values, at)
        axes.plot(np.radians(angle), along, color=COLOURS[number], linewidth=1.8, linestyle=("-", "--")[number], label=words)
    if polar.max() <= 90.0:
        axes.set_thetamin(-90.0)
        axes.set_thetamax(90.0)
    axes.tick_params(labelsize=8)
    axes.set_rlabel_position(67.5 if polar.max() <= 90.0 else 112.5)
    figure.legend(loc="outside lower center", ncols=2, fontsize=8, frameon=False)
    axes.set_title(label("far-field pattern", found.unit) + ", angle from +z", fontsize=10, color=FAINT)
    return figure


def draw_pattern_discs(point: PointResult, prefix: str = "") -> Figure:
    """The pattern over the direction cosines, above and, where there is one, below."""
    found, polar, azimuth, values = _data(point, prefix)
    sides = [("above", polar <= 90.0)]
    if polar.max() > 90.0:
        sides.append(("below", polar >= 90.0))
    figure = new_figure(3.9 * len(sides) + 0.6, 4.0)
    ring = np.radians(np.append(azimuth, azimuth[0] + 360.0))
    for number, (side, chosen) in enumerate(sides, 1):
        axes = figure.add_subplot(1, len(sides), number)
        sine = np.sin(np.radians(polar[chosen]))
        part = np.concatenate([values[chosen], values[chosen][:, :1]], axis=1)
        mesh = axes.pcolormesh(np.outer(sine, np.cos(ring)), np.outer(sine, np.sin(ring)), part, cmap=MAP, shading="gouraud", vmin=0.0, rasterized=True)
        axes.set_aspect("equal")
        axes.set_xlabel("sin(polar) cos(azimuth)")
        axes.set_ylabel("sin(polar) sin(azimuth)" if number == 1 else "")
        axes.set_title(side, fontsize=10, color=FAINT)
        figure.colorbar(mesh, ax=axes, shrink=0.8).set_label(label("", found.unit).strip() if found.unit != "1" else "")
    return figure
