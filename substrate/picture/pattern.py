"""Far-field patterns: cuts over the polar angle and discs in direction cosines."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from substrate.picture.style import COLOURS, FAINT, MAP, new_figure
from substrate.picture.words import label
from substrate.run.results import PointResult

_COSINES = (-1.0, -0.5, 0.0, 0.5, 1.0)
_FINE_DEG = 3.0  # azimuths of a disc are interpolated to at most this step, so that its rim is round


@dataclass(frozen=True)
class Pattern:
    """polar_deg (m,), azimuth_deg (l,) rising within one turn, values (m, l), and their unit."""

    polar_deg: np.ndarray
    azimuth_deg: np.ndarray
    values: np.ndarray
    unit: str

    def at(self, azimuth_deg: float) -> np.ndarray:
        """Values (m,) at one azimuth, linear between those of the table."""
        return np.array([np.interp(azimuth_deg, self.azimuth_deg, row, period=360.0) for row in self.values])

    def cut(self, azimuth_deg: float) -> tuple[np.ndarray, np.ndarray]:
        """Signed polar angle and values (2m,) in one plane: azimuth_deg on the positive side, the opposite one on the negative."""
        there, here = self.at(azimuth_deg + 180.0), self.at(azimuth_deg)
        return np.concatenate([-self.polar_deg[::-1], self.polar_deg]), np.concatenate([there[::-1], here])


def pattern_of(point: PointResult, prefix: str = "") -> Pattern:
    """The pattern of a point. prefix: "" or "emitter_1/"."""
    found = point.arrays[f"{prefix}pattern"]
    polar, azimuth = (np.asarray(point.arrays[f"{prefix}pattern_{name}_deg"].values, dtype=float) for name in ("polar", "azimuth"))
    return Pattern(polar, azimuth, np.asarray(found.values, dtype=float), found.unit)


def draw_pattern_cuts(point: PointResult, prefix: str = "", incidence_deg: float | None = None) -> Figure:
    """The pattern around the full circle of polar angles, in the plane of incidence and across it; without one, at azimuths 0 and 90 deg."""
    pattern = pattern_of(point, prefix)
    first = incidence_deg or 0.0
    above_only = pattern.polar_deg.max() <= 90.0
    figure = new_figure(6.4, 4.0 if above_only else 5.2)
    axes = figure.add_subplot(projection="polar")
    axes.set_theta_zero_location("N")
    axes.set_theta_direction(-1)
    for number, (at, words) in enumerate(((first, "in the plane of incidence"), (first + 90.0, "across it"))):
        angle, along = pattern.cut(at)
        where = f"azimuth {at % 360.0:g} / {(at + 180.0) % 360.0:g} deg"
        title = where if incidence_deg is None else f"{words} ({where})"
        axes.plot(np.radians(angle), along, color=COLOURS[number], linewidth=1.8, linestyle=("-", "--")[number], label=title)
    axes.set_xticks(np.radians(np.arange(-90, 91, 30) if above_only else np.arange(-150, 181, 30)))
    axes.set_thetalim(*(np.radians((-90.0, 90.0)) if above_only else (-np.pi, np.pi)))
    axes.xaxis.set_major_formatter(lambda angle, _: f"{np.degrees(angle):.0f}°")
    axes.set_ylim(bottom=0.0)
    axes.yaxis.set_major_locator(MaxNLocator(4))
    axes.tick_params(labelsize=8)
    axes.set_rlabel_position(75.0 if above_only else 105.0)
    figure.legend(loc="outside lower center", ncols=1, fontsize=8, frameon=False)
    axes.set_title(label("far-field pattern", pattern.unit) + ", polar angle from +z", fontsize=10, color=FAINT)
    return figure


def draw_pattern_discs(point: PointResult, prefix: str = "") -> Figure:
    """The pattern over the direction cosines, above and, where there is one, below."""
    pattern = pattern_of(point, prefix)
    sides = [("above", pattern.polar_deg <= 90.0)]
    if pattern.polar_deg.max() > 90.0:
        sides.append(("below", pattern.polar_deg >= 90.0))
    figure = new_figure(3.9 * len(sides) + 0.8, 3.9, layout="compressed")
    count = max(len(pattern.azimuth_deg), int(360.0 / _FINE_DEG))
    turn = np.linspace(0.0, 360.0, count + 1)
    values = np.stack([pattern.at(azimuth) for azimuth in turn], axis=1)
    for number, (side, chosen) in enumerate(sides, 1):
        axes = figure.add_subplot(1, len(sides), number)
        sine = np.sin(np.radians(pattern.polar_deg[chosen]))
        x, y = np.outer(sine, np.cos(np.radians(turn))), np.outer(sine, np.sin(np.radians(turn)))
        mesh = axes.pcolormesh(x, y, values[chosen], cmap=MAP, shading="gouraud", vmin=0.0, rasterized=True)
        axes.set(aspect="equal", xlim=(-1.02, 1.02), ylim=(-1.02, 1.02), xticks=_COSINES, yticks=_COSINES)
        axes.set_xlabel("sin(polar) cos(azimuth)")
        if number == 1:
            axes.set_ylabel("sin(polar) sin(azimuth)")
        axes.set_title("above" if side == "above" else "below, seen from above", fontsize=10, color=FAINT)
        figure.colorbar(mesh, ax=axes).set_label(label("pattern", pattern.unit))
    return figure


def pattern_rows(point: PointResult, prefix: str = "") -> tuple[list[str], list[list[float]]]:
    """Header and rows of the whole pattern: polar angle, azimuth, value."""
    pattern = pattern_of(point, prefix)
    polar, azimuth = np.meshgrid(pattern.polar_deg, pattern.azimuth_deg, indexing="ij")
    rows = np.column_stack([polar.ravel(), azimuth.ravel(), pattern.values.ravel()]).tolist()
    return ["polar (deg)", "azimuth (deg)", f"pattern ({pattern.unit})"], rows


def cut_rows(point: PointResult, prefix: str = "", incidence_deg: float | None = None) -> tuple[list[str], list[list[float]]]:
    """Header and rows of both cuts: signed polar angle, value in each plane."""
    pattern = pattern_of(point, prefix)
    first = incidence_deg or 0.0
    (angle, along), (_, across) = pattern.cut(first), pattern.cut(first + 90.0)
    header = ["polar, signed (deg)", *(f"azimuth {at % 360.0:g} deg ({pattern.unit})" for at in (first, first + 90.0))]
    return header, np.column_stack([angle, along, across]).tolist()
