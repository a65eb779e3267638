"""Reads the tables of a case by the schema: every value is checked, every fault collected, lists and ranges become series."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import replace

from substrate.errors import Problem, nearest
from substrate.run.schema import REQUIRED, Key, Variants
from substrate.run.series import Axis, spread

MOST_VALUES = 10_000  # of one series
_RANGE_KEYS = ("from", "to", "count")
_COMPONENTS = "xyz"


class Refused(Exception):
    """A reader does not take a value. allowed: what it would take; advice: what to do."""

    def __init__(self, allowed: str, advice: str = ""):
        super().__init__(allowed)
        self.allowed = allowed
        self.advice = advice


class Reading:
    """Collects the problems and the series axes while tables are read. A refused value stays in the table as it was written."""

    def __init__(self):
        self.problems: list[Problem] = []
        self.axes: list[Axis] = []

    def table(self, written: object, keys: Mapping[str, Key] | Variants, where: str = "", path: tuple = ()) -> dict:
        """One table with every default filled in, its keys in the order of the schema."""
        if not isinstance(written, dict):
            brackets = f"Write [{where}] with single brackets." if isinstance(written, list) and len(path) == 1 else ""
            self.refuse(where, written, "a table", brackets)
            names = keys.keys(None) if isinstance(keys, Variants) else keys
            return {name: [] if key.kind == "tables" else None for name, key in names.items()}
        variants = keys if isinstance(keys, Variants) else None
        word = written.get(variants.selector) if variants else None
        known = variants.keys(word) if variants else keys
        read = {}
        for name, value in written.items():  # in the order of the file: it is the order of the series
            inner = f"{where}.{name}" if where else name
            if name in known:
                read[name] = self.value(value, known[name], inner, (*path, name))
            else:
                self.unknown(name, known, variants, word, where)
        sure = variants is None or (isinstance(word, str) and word in variants.own)
        misspelt = [name for name in written if name not in known]
        complete = {}
        for name, key in known.items():
            inner = f"{where}.{name}" if where else name
            if name in read:
                complete[name] = read[name]
            elif key.default is REQUIRED:
                complete[name] = None
                certain = sure or name in variants.common or name == variants.selector
                if certain and not any(nearest(other, (name,)) for other in misspelt):
                    self.refuse(inner, REQUIRED, allowed_words(key))
            else:
                complete[name] = self.default(key, inner, (*path, name))
        return complete

    def default(self, key: Key, where: str, path: tuple) -> object:
        """What stands in for a key that is left out, as a value of its own."""
        if key.kind == "table" and key.default is not None:
            return self.table(dict(key.default), key.keys, where, path)
        return list(key.default) if isinstance(key.default, tuple) else key.default

    def tables(self, written: object, keys, where: str, path: tuple) -> list[dict]:
        """A list of tables; in messages the first one has the number 1."""
        if not isinstance(written, list):
            advice = f"Write [[{where}]] with double brackets." if isinstance(written, dict) and len(path) == 1 else ""
            self.refuse(where, written, "a list of tables", advice)
            return []
        return [self.table(item, keys, f"{where}[{i + 1}]", (*path, i)) for i, item in enumerate(written)]

    def value(self, written: object, key: Key, where: str, path: tuple):
        """One value, or the list of values of a series, which is noted as an axis."""
        if key.kind == "table":
            return self.table(written, key.keys, where, path)
        if key.kind == "tables":
            return self.tables(written, key.keys, where, path)
        if key.kind == "numbers":
            return self.numbers(written, key, where, path)
        if key.series and _is_series(written, key):
            return self.series(written, key, where, path)
        return self.single(written, key, where)

    def single(self, written: object, key: Key, where: str):
        """One value through its reader."""
        try:
            return READERS[key.kind](written, key)
        except Refused as refused:
            self.refuse(where, written, refused.allowed, refused.advice)
            return written

    def numbers(self, written: object, key: Key, where: str, path: tuple) -> object:
        """A point or sizes as a list of numbers along x, y, z, each of which may be a series."""
        names = _COMPONENTS[: key.size]
        if not isinstance(written, list) or len(written) != key.size:
            self.refuse(where, written, allowed_words(key))
            return written
        number = replace(key, kind="number")
        return [self.value(item, number, f"{where}.{name}", (*path, i)) for i, (name, item) in enumerate(zip(names, written))]

    def series(self, written: object, key: Key, where: str, path: tuple) -> object:
        """The values of a list or of {from, to, count}."""
        before = len(self.problems)
        if isinstance(written, dict):
            values = self._range(written, key, where)
        else:
            values = [self.single(item, key, f"{where}[{i + 1}]") for i, item in enumerate(written)]
            if not values:
                self.refuse(where, written, allowed_words(key), "A series needs at least one value.")
            if len(values) > MOST_VALUES:
                self.refuse(where, f"{len(values)} values", f"at most {MOST_VALUES} values in a series")
        if len(self.problems) > before:
            return written
        self.axes.append(Axis(where, path, tuple(values)))
        return values

    def _range(self, written: dict, key: Key, where: str) -> list:
        known = {"from": key, "to": key, "count": Key("count", low=2, high=MOST_VALUES)}
        before = len(self.problems)
        for name in written:
            if name not in known:
                self.unknown(name, known, None, None, where)
        read = {}
        for name in _RANGE_KEYS:
            if name in written:
                read[name] = self.single(written[name], known[name], f"{where}.{name}")
            else:
                self.refuse(f"{where}.{name}", REQUIRED, allowed_words(known[name]), "A range is {from, to, count}.")
        return [] if len(self.problems) > before else spread(read["from"], read["to"], read["count"])

    def unknown(self, name: str, known: Mapping, variants: Variants | None, word: object, where: str) -> None:
        """Note a key that does not exist here, with the nearest one that does, or with the variant to which it belongs."""
        advice = nearest(name, known)
        if variants and variants.owners(name) and word in variants.own:
            owners = ", ".join(repr(owner) for owner in variants.owners(name))
            advice = f"{name!r} belongs to {variants.selector} {owners}."
        self.refuse(where or "case", name, f"the keys {', '.join(known)}", advice)

    def refuse(self, where: str, received: object, allowed: str, advice: str = "") -> None:
        """Note a problem."""
        self.problems.append(Problem(where, received, allowed, advice))


def _is_series(written: object, key: Key) -> bool:
    """Is this a list or range of values where one value is the natural form?"""
    if isinstance(written, dict):
        return key.kind in ("number", "material")
    if not isinstance(written, list):
        return False
    if key.kind in ("polarization", "orientation"):  # here a list of numbers is one value, a list of words a series
        return any(isinstance(item, str) and item in key.choices for item in written)
    return True


# ---- readers of one value, by the kind of the key


def _is_number(value: object) -> bool:
    return isinstance(value, (int, float)) and not isinstance(value, bool) and math.isfinite(value)


def _number(value: object, key: Key) -> float:
    if _is_number(value) and key.within(value):
        return float(value)
    raise Refused(allowed_words(key), _number_advice(value))


def _number_advice(value: object) -> str:
    if not isinstance(value, str):
        return ""
    words = value.split()
    if words and words[0].replace(".", "", 1).isdigit():
        return "Write the number without quotes" + (" and without its unit, which the key names." if len(words) > 1 else ".")
    return ""


def _count(value: object, key: Key) -> int:
    if _is_number(value) and isinstance(value, int) and key.within(value):
        return value
    raise Refused(allowed_words(key))


def _word(value: object, key: Key) -> str:
    if isinstance(value, str) and value in key.choices:
        return value
    raise Refused(allowed_words(key), nearest(value, key.choices) if isinstance(value, str) else "")


def _text(value: object, key: Key) -> str:
    if isinstance(value, str) and value.strip():
        return value
    raise Refused(allowed_words(key))


def _name(value: object, key: Key) -> str:
    if isinstance(value, str) and value.strip() and "/" not in value and len(value) <= 40:
        return value
    raise Refused(allowed_words(key))


def _flag(value: object, key: Key) -> bool:
    if isinstance(value, bool):
        return value
    raise Refused(allowed_words(key), "TOML writes these without quotes." if isinstance(value, str) else "")


def _material(value: object, key: Key) -> object:
    if _is_number(value) and value > 0:
        return float(value)
    if isinstance(value, str) and value.strip():
        return value
    raise Refused(allowed_words(key))


def _vector(value: object, key: Key) -> list[float]:
    if isinstance(value, list) and len(value) == key.size and all(_is_number(item) and key.within(item) for item in value):
        return [float(item) for item in value]
    raise Refused(allowed_words(key))


def _interval(value: object, key: Key) -> list[float]:
    pair = Key("vector", low=key.low, high=key.high, size=2)
    try:
        low, high = _vector(value, pair)
    except Refused:
        raise Refused(allowed_words(key)) from None
    if low < high:
        return [low, high]
    raise Refused(allowed_words(key), "The smaller number comes first.")


def _counts(value: object, key: Key) -> list[int]:
    if isinstance(value, list) and len(value) == 2 and all(isinstance(item, int) and _is_number(item) and key.within(item) for item in value):
        return list(value)
    raise Refused(allowed_words(key))


def _points(value: object, key: Key) -> list[list[float]]:
    point = Key("vector", size=3)
    if not isinstance(value, list) or not value:
        raise Refused(allowed_words(key))
    if all(_is_number(item) for item in value):
        raise Refused(allowed_words(key), "One point too stands in double brackets.")
    return [_vector_of_points(item, point, key) for item in value]


def _vector_of_points(item: object, point: Key, key: Key) -> list[float]:
    try:
        x, y, z = _vector(item, point)
    except Refused:
        raise Refused(allowed_words(key)) from None
    return [x, y, z]


def _polarization(value: object, key: Key) -> object:
    if isinstance(value, list) and len(value) == 2:
        amplitudes = [_amplitude(item, key) for item in value]
        if any(amplitudes):
            return value
        raise Refused(allowed_words(key), "Both amplitudes are zero.")
    return _word(value, key)


def _amplitude(value: object, key: Key) -> complex:
    if _is_number(value):
        return complex(value)
    if isinstance(value, str):
        return complex_number(value, key)
    raise Refused(allowed_words(key))


def complex_number(text: str, key: Key | None = None) -> complex:
    """The number of a text such as "0.5+0.5i"; Refused if it is none."""
    try:
        number = complex(text.replace(" ", "").replace("i", "j"))
    except ValueError:
        raise Refused(allowed_words(key) if key else 'a number such as "0.5+0.5i"') from None
    if math.isfinite(number.real) and math.isfinite(number.imag):
        return number
    raise Refused(allowed_words(key) if key else "a finite number")


def _orientation(value: object, key: Key) -> object:
    if isinstance(value, list):
        vector = _vector(value, Key("orientation", choices=key.choices, size=3))
        if any(vector):
            return vector
        raise Refused(allowed_words(key), "The vector is zero.")
    return _word(value, key)


READERS: dict[str, Callable] = {
    "number": _number,
    "count": _count,
    "word": _word,
    "text": _text,
    "name": _name,
    "flag": _flag,
    "material": _material,
    "vector": _vector,
    "interval": _interval,
    "counts": _counts,
    "points": _points,
    "polarization": _polarization,
    "orientation": _orientation,
}


def allowed_words(key: Key) -> str:
    """What a key takes, in words."""
    limits = key.limits()
    one_of = ", ".join(repr(word) for word in key.choices)
    return {
        "number": f"a number {limits}".strip(),
        "count": f"a whole number {limits}".strip(),
        "word": one_of,
        "text": "a text that is not empty",
        "name": "a text of 1 to 40 characters without '/'",
        "flag": "true or false",
        "material": "a built-in material's name, a refractive index above 0, a complex index as a text \"1.5+0.1i\", or the name of a table file",
        "vector": f"a list of {key.size} numbers {limits}".strip(),
        "numbers": f"[{', '.join(_COMPONENTS[: key.size])}] in nm" + (f", each {limits}" if limits else ""),
        "interval": f"[low, high] with low < high, {limits}",
        "counts": f"two whole numbers {limits}",
        "points": "a list of points [[x, y, z], ...] in nm with z from 0",
        "polarization": f"{one_of}, or a Jones pair [s, p] of numbers or texts \"0.5+0.5i\"",
        "orientation": f"{one_of}, or a vector [x, y, z] that is not zero",
        "table": "a table",
        "tables": "at least one table",
    }[key.kind]
