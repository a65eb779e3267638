"""The keys of a case file: one visible table. To add a key, add a line here and use it in build.py.

Every key says its kind (a reader of that name is in case.py), what stands in for it when it is left out, and its limits. A default of
REQUIRED means that it must be given, None that it may be left out.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass


class _Required:
    def __repr__(self) -> str:
        return "nothing"


REQUIRED = _Required()


@dataclass(frozen=True)
class Key:
    """kind: name of its reader.  default: REQUIRED, None or a value.  low, high: limits, excluded where `above`, `below` say so.

    choices: the words of a "word".  size: of a "vector" and of "numbers", which may
    be series one by one.  keys: those of a nested table.  series: may it be a list or range?
    """

    kind: str
    default: object = REQUIRED
    low: float = -math.inf
    high: float = math.inf
    above: bool = False
    below: bool = False
    choices: tuple[str, ...] = ()
    size: int = 0
    keys: object = None
    series: bool = True

    def within(self, number: float) -> bool:
        """Is a number within the limits?"""
        over = number > self.low if self.above else number >= self.low
        under = number < self.high if self.below else number <= self.high
        return over and under

    def limits(self) -> str:
        """The limits in words: "above 0", "from 0 up to below 90"."""
        low = "" if self.low == -math.inf else f"above {self.low:g}" if self.above else f"from {self.low:g}"
        high = "" if self.high == math.inf else f"up to below {self.high:g}" if self.below else f"up to {self.high:g}"
        return " ".join(part for part in (low, high) if part)


@dataclass(frozen=True)
class Variants:
    """A table whose keys depend on one word in it. selector: that key; common: keys of all variants; own: {word: its keys}."""

    selector: str
    common: Mapping[str, Key]
    own: Mapping[str, Mapping[str, Key]]
    default: object = REQUIRED

    def keys(self, word: object) -> dict[str, Key]:
        """The keys of one variant; of all of them for a word that is not known."""
        known = isinstance(word, str) and word in self.own
        selected = [self.own[word]] if known else list(self.own.values())
        keys = {self.selector: Key("word", self.default, choices=tuple(self.own), series=False), **self.common}
        for variant in selected:
            keys.update(variant)
        return keys

    def owners(self, name: str) -> list[str]:
        """The variants that have a key of this name."""
        return [word for word, keys in self.own.items() if name in keys]


def length(default: object = REQUIRED, **limits) -> Key:
    """A length above 0."""
    return Key("number", default, **{"low": 0.0, "above": True, **limits})


def angle(default: object = REQUIRED, low: float = -360.0, high: float = 360.0, **limits) -> Key:
    """An angle in degrees."""
    return Key("number", default, low, high, **limits)


WAVELENGTH = Key("number", low=100.0, high=3000.0)
SIDE = Key("word", "above", choices=("above", "below"), series=False)

FILM = {"material": Key("material"), "thickness_nm": length()}
STACK = {
    "host": Key("material", "air"),
    "films": Key("tables", (), keys=FILM),
    "base": Key("material", "glass"),
}

# Shapes: the fields of the classes of particle/primitives.py and composite.py.
PLACE = {
    "gap_nm": Key("number", None, low=0.0),
    "center_xy_nm": Key("numbers", None, size=2),
    "center_nm": Key("numbers", None, size=3),
}
SIZES = Key("numbers", low=0.0, above=True, size=3)
RADIUS = length(0.0, above=False)
CONVEX: dict[str, dict[str, Key]] = {
    "sphere": {"diameter_nm": length()},
    "ellipsoid": {"diameters_nm": SIZES, "azimuth_deg": angle(0.0), "tilt_deg": angle(0.0)},
    "box": {"size_nm": SIZES, "edge_radius_nm": RADIUS, "azimuth_deg": angle(0.0)},
    "disc": {"diameter_nm": length(), "height_nm": length(), "rim_radius_nm": RADIUS},
    "rod": {"diameter_nm": length(), "length_nm": length(), "azimuth_deg": angle(0.0), "tilt_deg": angle(0.0)},
    "cone": {
        "base_diameter_nm": length(),
        "height_nm": length(),
        "tip_radius_nm": length(),
        "points": Key("word", "up", choices=("up", "down"), series=False),
    },
}
CORE_SHAPES = dict(CONVEX)
CORE = Variants("shape", {"material": Key("material")}, CORE_SHAPES)  # its place is that of the shell
CORE_SHAPES["shell"] = {"around": Key("table", keys=CORE), "thickness_nm": length()}
PART = Variants("shape", {"material": Key("material", None), **PLACE}, CONVEX)  # without a material: that of the union
PARTICLE = Variants(
    "shape",
    {"material": Key("material")},
    {
        **{word: {**keys, **PLACE} for word, keys in CORE_SHAPES.items()},
        "union": {"parts": Key("tables", keys=PART)},  # each part has its own place
    },
)

LIGHT = {
    "kind": Key("word", "plane wave", choices=("plane wave",), series=False),
    "wavelength_nm": WAVELENGTH,
    "angle_deg": angle(0.0, 0.0, 90.0, below=True),
    "azimuth_deg": angle(0.0),
    "polarization": Key("polarization", "p", choices=("s", "p", "unpolarized", "circular")),
    "side": SIDE,
}
EMITTER = {
    "position_nm": Key("numbers", size=3),
    "orientation": Key("orientation", "vertical", choices=("vertical", "horizontal", "isotropic", "x", "y", "z")),
    "kind": Key("word", "electric", choices=("electric",), series=False),
    "wavelength_nm": WAVELENGTH,
    "quantum_yield": Key("number", 1.0, 0.0, 1.0, above=True),
    "lifetime_ns": Key("number", None, 0.0, above=True),
}
COLLECTOR = {
    "name": Key("name", None, series=False),
    "na": Key("number", None, 0.0, 4.5, above=True),
    "side": Key("word", None, choices=("above", "below"), series=False),
    "polar_deg": Key("interval", None, 0.0, 180.0, series=False),
    "azimuth_deg": Key("interval", None, -360.0, 720.0, series=False),
}
ASK = Variants(
    "what",
    {},
    {
        "cross sections": {},
        "emission": {},
        "near field": {
            "points_nm": Key("points", (), series=False),
            "plane": Key("word", None, choices=("xz", "yz", "xy"), series=False),
            "at_nm": Key("number", None, series=False),
            "size_nm": Key("vector", None, 0.0, above=True, size=2, series=False),
            "center_nm": Key("vector", None, size=2, series=False),
            "count": Key("counts", None, 2, 1000, series=False),
        },
        "reflectance": {},
        "far field": {"count": Key("counts", (46, 72), 2, 1000, series=False)},
    },
)
ACCURACY = {
    "relative": Key("number", 0.02, 0.0005, 0.5),
    "cell_nm": length(None),
    "quick": Key("flag", False, series=False),
}

CASE: dict[str, Key] = {
    "title": Key("text", None, series=False),
    "stack": Key("table", {}, keys=STACK),
    "particle": Key("tables", (), keys=PARTICLE),
    "light": Key("table", None, keys=LIGHT),
    "emitter": Key("tables", (), keys=EMITTER),
    "collector": Key("tables", (), keys=COLLECTOR),
    "ask": Key("tables", keys=ASK),
    "accuracy": Key("table", {}, keys=ACCURACY),
}
