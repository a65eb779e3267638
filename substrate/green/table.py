"""The reflected tensor tabulated: fast, with a measured error, and a box outside of which it refuses.

What is tabulated is the remainder after the static image, which is smooth: piecewise Chebyshev polynomials in rho and in
Z = z + z'. Panels grow with the distance from the mirror point and are never longer than half the shortest in-plane wavelength,
which follows from the largest pole and not from the largest index.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from substrate.errors import InputError, OutOfRange, Problem, SubstrateError
from substrate.green.image import image_scalars, image_strength
from substrate.green.sommerfeld import reflected_scalars, remainder, tail_start
from substrate.medium.stack import Layers

NODES = 12  # per panel
GOAL = 1e-8  # of the local tensor norm; 1e-6 is accepted near e1 + e2 = 0, where rounding limits it
ACCEPTED = 1e-6


@dataclass(frozen=True)
class Panels:
    """Edges of the panels along one axis and the Chebyshev nodes of all panels in one row."""

    edges: np.ndarray

    @property
    def nodes(self) -> np.ndarray:
        half = 0.5 * np.diff(self.edges)
        middle = 0.5 * (self.edges[1:] + self.edges[:-1])
        return (middle[:, None] + half[:, None] * _CHEBYSHEV).ravel()

    def interpolation(self, values: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """For each value its panel, and the weights (n, NODES) of that panel's nodes (barycentric, second form)."""
        panel = np.clip(np.searchsorted(self.edges, values, side="right") - 1, 0, len(self.edges) - 2)
        low, high = self.edges[panel], self.edges[panel + 1]
        x = (2.0 * values - low - high) / (high - low)
        gap = x[:, None] - _CHEBYSHEV
        hit = gap == 0.0
        weights = _BARYCENTRIC / np.where(hit, 1.0, gap)
        weights = np.where(hit.any(axis=1)[:, None], hit.astype(float), weights)
        return panel, weights / weights.sum(axis=1, keepdims=True)


_ANGLES = (np.arange(NODES) + 0.5) * np.pi / NODES
_CHEBYSHEV = -np.cos(_ANGLES)
_BARYCENTRIC = np.sin(_ANGLES) * (-1.0) ** np.arange(NODES)


@dataclass(frozen=True)
class ReflectedTable:
    """Reflected Green's tensor of a stack for rho in [0, rho_max] and Z = z + z' in [height_min, height_max], nm.

    rest: (4, rho nodes, Z nodes), remainder of A0, A2, B, C in 1/nm^3.  error: largest difference from direct quadrature over a set
    of points spread over the box, relative to the local tensor norm (the true error was 0.03 to 2 times this figure in the tests).
    """

    layers: Layers
    rho: Panels
    height: Panels
    rest: np.ndarray
    beta: complex
    error: float

    @property
    def box(self) -> tuple[float, float, float]:
        """(rho_max, height_min, height_max) in nm."""
        return float(self.rho.edges[-1]), float(self.height.edges[0]), float(self.height.edges[-1])

    def check_inside(self, rho_max: float, height_min: float, height_max: float) -> None:
        """Raise OutOfRange unless the given box lies in the table's."""
        box, slack = self.box, 1e-9
        if rho_max > box[0] * (1 + slack) or height_min < box[1] * (1 - slack) or height_max > box[2] * (1 + slack):
            raise OutOfRange(
                Problem(
                    "reflected tensor",
                    (rho_max, height_min, height_max),
                    f"rho up to {box[0]:.6g} nm and z + z' from {box[1]:.6g} to {box[2]:.6g} nm",
                    "Build the table for a larger box.",
                )
            )

    def remainder_at(self, rho: np.ndarray, height: np.ndarray) -> np.ndarray:
        """Remainder (4, n_rho, n_height) on the grid of two 1-D sets of values inside the box."""
        along_height = np.empty((4, self.rest.shape[1], len(height)), dtype=complex)
        _interpolate(self.height, height, self.rest, along_height)
        out = np.empty((4, len(height), len(rho)), dtype=complex)
        _interpolate(self.rho, rho, np.ascontiguousarray(along_height.swapaxes(1, 2)), out)
        return out.swapaxes(1, 2)

    def scalars(self, rho, height) -> np.ndarray:
        """A0, A2, B, C (4, n_rho, n_height) in 1/nm^3, image included, on the grid of two 1-D sets. OutOfRange outside of the box."""
        rho, height = np.atleast_1d(rho).astype(float), np.atleast_1d(height).astype(float)
        self.check_inside(rho.max(), height.min(), height.max())
        image = image_scalars(self.beta, self.layers.k_host, rho[:, None], height[None, :])
        return image + self.remainder_at(rho, height)


def _interpolate(panels: Panels, values: np.ndarray, table: np.ndarray, out: np.ndarray) -> None:
    """out[..., i] = interpolated table[..., nodes] at values[i], panel by panel as small matrix products."""
    panel, weights = panels.interpolation(values)
    for number in np.unique(panel):
        here = np.flatnonzero(panel == number)
        block = table[..., number * NODES : (number + 1) * NODES]
        out[..., here] = block @ weights[here].T


def _panel_edges(start: float, end: float, first: float, longest: float, ratio: float) -> np.ndarray:
    edges = [start]
    while edges[-1] < end * (1.0 - 1e-12):
        length = min(max(first, ratio * edges[-1]), longest)
        left = end - edges[-1]
        edges.append(end if left < 1.3 * length else edges[-1] + length)
    return np.array(edges)


def build_table(layers: Layers, rho_max: float, height_min: float, height_max: float, goal: float = GOAL) -> ReflectedTable:
    """Tabulate the reflected tensor for rho <= rho_max and height_min <= z + z' <= height_max (nm).

    Refines until the measured error meets the goal; accepts up to 1e-6 (near e1 + e2 = 0) and raises SubstrateError beyond.
    """
    if not (rho_max >= 0.0 and 0.0 < height_min <= height_max):
        raise InputError(Problem("table box", (rho_max, height_min, height_max), "rho_max >= 0 and 0 < height_min <= height_max"))
    rho_max, height_max = max(rho_max, height_min), max(height_max, 1.01 * height_min)
    right = tail_start(layers)
    longest = np.pi / right
    best = None
    for fineness, shorter in ((1.0, 1.0), (1.25, 0.7), (1.6, 0.5)):
        rho_edges = _panel_edges(0.0, rho_max, 1.5 * height_min * shorter, longest * shorter, shorter)
        height_edges = _panel_edges(height_min, height_max, height_min * shorter, longest * shorter, shorter)
        table = _fill(layers, Panels(rho_edges), Panels(height_edges), right, fineness)
        if best is None or table.error < best.error:
            best = table
        if best.error <= goal:
            return best
    if best.error > ACCEPTED:
        raise SubstrateError(
            f"the table of the reflected tensor reached an error of {best.error:.1e}, not {ACCEPTED:.0e}, for rho up to {rho_max:g} nm and "
            f"z + z' from {height_min:g} nm: ask for a smaller box"
        )
    return best


def _fill(layers: Layers, rho: Panels, height: Panels, right: float, fineness: float) -> ReflectedTable:
    rho_nodes, height_nodes = rho.nodes, height.nodes
    rest = np.zeros((4, len(rho_nodes), len(height_nodes)), dtype=complex)
    if layers.is_uniform:
        return ReflectedTable(layers, rho, height, rest, 0.0, 0.0)
    beta = image_strength(layers)
    groups = _groups(height_nodes)
    for start in range(0, len(rho_nodes), NODES):
        block = slice(start, start + NODES)
        for group in groups:
            rest[:, block, group] = remainder(layers, rho_nodes[block], height_nodes[group], right, fineness)
    table = ReflectedTable(layers, rho, height, rest, beta, np.nan)
    return ReflectedTable(layers, rho, height, rest, beta, _measure(table))


def _groups(height_nodes: np.ndarray) -> list[slice]:
    """Split the heights into runs with a span of at most 60:1, each of which one path serves well."""
    groups, start = [], 0
    for i in range(len(height_nodes)):
        if height_nodes[i] > 60.0 * height_nodes[start]:
            groups.append(slice(start, i))
            start = i
    return [*groups, slice(start, len(height_nodes))]


def _measure(table: ReflectedTable) -> float:
    """Largest relative difference from direct quadrature on points between the nodes, all over the box."""
    worst = 0.0
    rho_max, low, high = table.box
    spread = np.array([0.0, 0.013, 0.06, 0.19, 0.47, 0.98])
    heights = low * (high / low) ** np.array([0.004, 0.17, 0.52, 0.93])
    for rho in spread * rho_max:
        for height in heights:
            exact, _ = reflected_scalars(table.layers, rho, height, 1e-7)
            found = table.scalars(rho, height)[:, 0, 0]
            worst = max(worst, np.abs(found - exact).max() / max(np.abs(exact).max(), 1e-300))
    return float(worst)
