"""Names, units and numbers of a results file as a reader wants to see them."""

from __future__ import annotations

import math
import re
from dataclasses import replace

from substrate.quantity import Quantity
from substrate.run.results import PointResult, Results

ASKS = {
    "cross_sections": "Cross sections",
    "emission": "Emission",
    "near_field": "Field at the points asked for",
    "far_field": "Far field",
    "reflectance": "Plane stack",
}
_UNITS = {"nm": "nm", "deg": "deg", "ns": "ns"}


def ask_words(ask: str) -> str:
    """Heading of a question's answers."""
    return ASKS.get(ask, ask.replace("_", " "))


def quantity_words(name: str) -> str:
    """"emitter_1/collected/objective" -> "emitter 1: collected: objective"; the unit in a name is left to the unit."""
    return ": ".join(_plain(part) for part in name.split("/"))


def _plain(part: str) -> str:
    words = part.split("_")
    if len(words) > 1 and words[-1] in _UNITS:
        words.pop()
    return " ".join(words)


def parameter_words(key: str) -> tuple[str, str]:
    """Words and unit of a series parameter: "emitter[1].position_nm.z" -> ("emitter 1: position z", "nm")."""
    words, unit = [], ""
    for part in key.split("."):
        part = re.sub(r"\[(\d+)\]", r" \1", part)
        pieces = part.split("_")
        if len(pieces) > 1 and pieces[-1].split()[0] in _UNITS:  # "polar_deg[1]" has its number after the unit
            unit, *number = pieces.pop().split()
            pieces += number
        words.append(" ".join(pieces))
    if words[0] == "stack" and len(words) > 1:  # films say where they are
        words = words[1:]
    place, rest = words[0], " ".join(words[1:])
    place = re.sub(r"^films (\d+)$", r"film \1", place)
    return (f"{place}: {rest}" if rest else place), unit


def parameter_value(key: str, value: object) -> str:
    """One value of a series parameter in short words: "thickness 20 nm", "polarization p"."""
    words, unit = parameter_words(key)
    return f"{words.rpartition(': ')[2]} {value_text(value)} {unit}".rstrip()


def value_text(value: object) -> str:
    """A parameter's value in short: numbers to six digits."""
    return f"{value:.6g}" if isinstance(value, float) else str(value)


def point_words(point: PointResult) -> str:
    """Where in the series a point lies, in words; its label where it has no parameters."""
    return ", ".join(parameter_value(key, value) for key, value in point.parameters.items()) or point.label


def unit_words(unit: str) -> str:
    """A unit as it is printed, empty for pure numbers."""
    return "" if unit in ("", "1") else raised(unit)


def raised(text: str) -> str:
    """Squares as raised twos."""
    return text.replace("^2", "²")


def label(words: str, unit: str) -> str:
    """An axis label: words with their unit, none for pure numbers."""
    unit = unit_words(unit)
    return f"{words} ({unit})" if unit and words else words or unit


def number_of(value: object) -> float | None:
    """A parameter as a number, None if it is a word."""
    return float(value) if isinstance(value, (int, float)) and not isinstance(value, bool) else None


def finite_error(quantity: Quantity) -> float | None:
    """The bar where there is one: neither None nor nan nor infinite."""
    return quantity.error if quantity.error is not None and math.isfinite(quantity.error) else None


def quantity_text(quantity: Quantity) -> str:
    """Value, bar and unit; a bar that is no number is no bar, and one beyond the seventh digit is told by its size only."""
    value, error = quantity.value, quantity.error
    if error is not None and math.isnan(error):
        quantity = replace(quantity, error=None)
    elif error is not None and 0.0 < error < 1e-6 * abs(value):
        return f"{value:.7g} ± {error:.0e} {unit_words(quantity.unit)}".rstrip()
    return raised(str(quantity))


def value_at(results: Results, point: PointResult, table: str, key: str) -> object:
    """A value of the case at one point, from its series parameters or else from the case: value_at(r, p, "light", "azimuth_deg").

    None where the case has no such table or key.
    """
    name = f"{table}.{key}"
    return point.parameters[name] if name in point.parameters else (results.resolved.get(table) or {}).get(key)
