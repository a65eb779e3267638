"""How all figures look: sizes, colours that colour-blind readers can tell apart, and how they are written."""

from __future__ import annotations

import csv
from pathlib import Path

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

# Okabe & Ito's palette for colour-blind readers, dark ones first.
COLOURS = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00", "#56B4E9", "#000000", "#8c6d1f")
MARKERS = ("o", "s", "^", "D", "v", "P", "X", "*")
LINES = ("-", "--", ":", "-.")
LAYER_COLOURS = ("#dfe7ee", "#c9b27c", "#b9c6b0", "#a9b8cc", "#d3bfc9", "#c4c4b4", "#b5ccd1")
INK, FAINT = "#222222", "#8a8a8a"
MAP = "viridis"


def new_figure(width: float = 7.0, height: float = 4.4, layout: str = "constrained") -> Figure:
    """An empty figure, size in inches, that lays itself out; layout "compressed" suits axes of equal scale beside a colour bar."""
    figure = Figure(figsize=(width, height), layout=layout)
    FigureCanvasAgg(figure)
    return figure


def blank_figure(width: float, height: float) -> Figure:
    """An empty figure, size in inches, in which everything is placed by hand."""
    figure = Figure(figsize=(width, height))
    FigureCanvasAgg(figure)
    return figure


def plain_axes(axes) -> None:
    """Left and bottom frame only, a faint grid."""
    axes.spines[["top", "right"]].set_visible(False)
    axes.grid(True, color="#e6e6e6", linewidth=0.8)
    axes.set_axisbelow(True)


def write_csv(path: Path, header: list[str], rows) -> Path:
    """The data of a figure beside it."""
    with open(path, "w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file)
        writer.writerow(header)
        writer.writerows(rows)
    return path


def save(figure: Figure, path: Path) -> Path:
    """Write a figure as PNG."""
    figure.savefig(path, dpi=150)
    return path
