"""A number with its error bar, unit and definition: the form in which every answer leaves the program."""

from __future__ import annotations

import math
from dataclasses import dataclass
from html import escape


@dataclass(frozen=True)
class Quantity:
    """value +- error [unit], and the sentence that defines it.

    error: half width of the bar, in the unit of the value; None where no bar was asked for (`quick`).
    """

    value: float
    error: float | None
    unit: str
    definition: str

    @property
    def relative_error(self) -> float | None:
        """error / |value|; None without a bar, infinite for a value of zero with a bar."""
        if self.error is None:
            return None
        if self.value == 0.0:
            return 0.0 if self.error == 0.0 else math.inf
        return self.error / abs(self.value)

    def __str__(self) -> str:
        unit = "" if self.unit in ("", "1") else f" {self.unit}"
        if self.error is None:
            return f"{self.value:.5g}{unit} (no error bar)"
        if self.value == 0.0 and self.error == 0.0:
            return f"0{unit}"  # nothing there by construction, such as absorption in a lossless particle
        return f"{format_with_error(self.value, self.error)}{unit}"


def format_with_error(value: float, error: float) -> str:
    """Print a value to the digits that its error leaves: two digits of the error, the value to the same place."""
    if not (math.isfinite(value) and math.isfinite(error)) or error <= 0.0:
        return f"{value:.6g} ± {error:.2g}"
    scale = max(abs(value), error)
    exponent = math.floor(math.log10(scale))
    if -3 <= exponent < 5:
        digits = min(12, max(0, 1 - math.floor(math.log10(error))))
        return f"{value:.{digits}f} ± {error:.{digits}f}"
    power = 10.0**exponent
    digits = min(12, max(0, 1 - math.floor(math.log10(error / power))))
    return f"({value / power:.{digits}f} ± {error / power:.{digits}f})e{exponent}"


def text_table(rows: dict[str, Quantity]) -> str:
    """Names, values with bars and units, one a line."""
    width = max((len(name) for name in rows), default=0)
    return "\n".join(f"{name:<{width}}  {quantity}" for name, quantity in rows.items())


def html_table(rows: dict[str, Quantity], notes: tuple[str, ...] = ()) -> str:
    """The same for a notebook, with each number's definition, and notes below."""
    cells = "".join(
        f"<tr><td>{escape(name)}</td><td>{escape(str(quantity))}</td><td>{escape(quantity.definition)}</td></tr>"
        for name, quantity in rows.items()
    )
    below = "".join(f"<p>{escape(note)}</p>" for note in notes)
    return f"<table><tr><th>quantity</th><th>value</th><th>definition</th></tr>{cells}</table>{below}"
