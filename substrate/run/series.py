"""Series: lists and ranges of a case file, and the points that they make together."""

from __future__ import annotations

import copy
import itertools
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

_DIGITS = 12  # of the values of a range, so that 0.1 + 0.2 reads 0.3


@dataclass(frozen=True)
class Axis:
    """One number that takes several values. key: its name, "particle[1].gap_nm"; path: its place in the tables; values: what it takes."""

    key: str
    path: tuple
    values: tuple


@dataclass(frozen=True)
class Point:
    """One point of the product. parameters: {axis key: value}; index: its number; tables: the case with these values in place."""

    label: str
    parameters: Mapping[str, object]
    index: int
    tables: Mapping


def spread(start: float, stop: float, count: int) -> list[float]:
    """count equally spaced numbers from start to stop, both ends exact. count >= 2."""
    inner = [float(f"{start + (stop - start) * i / (count - 1):.{_DIGITS}g}") for i in range(1, count - 1)]
    return [float(start), *inner, float(stop)]


def point_count(axes: Sequence[Axis]) -> int:
    """Points of the product; one for no axes."""
    return math.prod(len(axis.values) for axis in axes)


def expand(tables: Mapping, axes: Sequence[Axis]) -> list[Point]:
    """All points of the product, the last axis fastest."""
    points = []
    for index, values in enumerate(itertools.product(*(axis.values for axis in axes))):
        here = copy.deepcopy(dict(tables))
        for axis, value in zip(axes, values):
            _put(here, axis.path, value)
        parameters = {axis.key: value for axis, value in zip(axes, values)}
        points.append(Point(label_of(parameters), parameters, index, here))
    return points


def label_of(parameters: Mapping[str, object]) -> str:
    """The point in words: "light.wavelength_nm = 633, particle[1].gap_nm = 2"."""
    return ", ".join(f"{key} = {value:g}" if isinstance(value, float) else f"{key} = {value}" for key, value in parameters.items())


def _put(tables, path: tuple, value: object) -> None:
    for step in path[:-1]:
        tables = tables[step]
    tables[path[-1]] = value
