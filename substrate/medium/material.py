"""Optical constants: built-in tables with their sources, numbers, and the user's own tables. Never extrapolated.

Between the rows of a table n and k are interpolated linearly over wavelength: the measured rows come out as they were published, nothing
overshoots, k stays >= 0, and anyone can repeat it by hand. Built-in tables made from published formulas are sampled so densely that this is
within 2e-6 of the formula. Between coarse measured rows the curve is not known: from 300 to 1000 nm a monotone cubic through the same rows
differs in |n + ik| by at most 1 % for aluminium, chromium, titanium, tungsten and germanium, 2 % for gold (at 505 nm), copper and silicon (at
365 to 380 nm), 5 % for titanium nitride and 10 % for silver (at 328 nm, where |n + ik| is small); every other table within 0.04 %.

All tables come from the open database of M. N. Polyanskiy, Sci. Data 11, 94 (2024), by the script `tables/build_tables.py`; each file states
its original paper. `catalogue()` lists them.
"""

from __future__ import annotations

import cmath
import math
import re
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

from substrate.errors import InputError, OutOfRange, Problem, nearest

_FOLDER = Path(__file__).parent / "tables"
_ALIASES = {
    "al": "aluminium",
    "aluminum": "aluminium",
    "ag": "silver",
    "au": "gold",
    "cr": "chromium",
    "cu": "copper",
    "ge": "germanium",
    "pt": "platinum",
    "si": "silicon",
    "ti": "titanium",
    "w": "tungsten",
    "al2o3": "alumina",
    "hfo2": "hafnia",
    "mgf2": "magnesium fluoride",
    "si3n4": "silicon nitride",
    "sio2": "silica",
    "tio2": "titania",
    "h2o": "water",
    "silicon dioxide": "silica",
    "titanium dioxide": "titania",
    "hafnium dioxide": "hafnia",
    "fused silica": "silica",
    "glass": "bk7",
    "n-bk7": "bk7",
    "ps": "polystyrene",
    "indium tin oxide": "ito",
}
_CASED = {"TiN": "titanium nitride"}  # meant only in this spelling
_UNCLEAR = {
    "tin": "Write 'TiN' or 'titanium nitride' for the nitride; the metal tin is not built in.",
    "c": "Carbon has several forms: write 'diamond', or give a table of your own.",
    "carbon": "Carbon has several forms: write 'diamond', or give a table of your own.",
}
_CONSTANT = {"vacuum": 1.0}
_NUMBER_TEXT = re.compile(r"[-+(.\d][-+.\deE]*[ij]?\)?")
# First column of a user's table: factor or rule to nm.  Other columns: what they hold.
_FIRST_COLUMNS = ("wavelength_nm", "wavelength_um", "energy_ev")
_PAIRS = (("n", "k"), ("n",), ("eps1", "eps2"), ("eps1",))
_EV_NM = 1239.841984  # h c / e, CODATA 2018
_SHORTEST_NM = 10.0  # below lie X-rays; a table that reaches there has its wavelengths in another unit


@dataclass(frozen=True, eq=False)
class Material:
    """Optical constants of one medium; two are equal if every field is, the rows of the table too.

    table: rows (wavelength nm, n, k), rising, or None for a constant index.  range_nm: of the table, None for a constant.
    """

    name: str
    citation: str
    conditions: str
    range_nm: tuple[float, float] | None
    table: object = None
    constant: complex | None = None

    def __eq__(self, other) -> bool:
        import numpy as np

        if not isinstance(other, Material):
            return NotImplemented
        return self._words() == other._words() and np.array_equal(self.table, other.table)

    def __hash__(self) -> int:
        return hash(self._words())

    def _words(self) -> tuple:
        return self.name, self.citation, self.conditions, self.range_nm, self.constant

    def index(self, wavelength_nm):
        """n + ik at vacuum wavelengths in nm: complex for a number, an array for an array. OutOfRange outside of the table."""
        import numpy as np

        wanted = np.asarray(wavelength_nm, dtype=float)
        if self.table is None:
            return np.full(wanted.shape, self.constant) if wanted.ndim else complex(self.constant)
        low, high = self.range_nm
        if not ((wanted >= low * (1 - 1e-9)) & (wanted <= high * (1 + 1e-9))).all():
            raise OutOfRange(
                Problem(
                    f"wavelength of {self.name}",
                    wavelength_nm if wanted.ndim == 0 else (float(wanted.min()), float(wanted.max())),
                    f"{low:g} to {high:g} nm, the range of its table ({self.citation})",
                    "Tables are never extrapolated: give a number or a table of your own.",
                )
            )
        nm, n, k = self.table.T
        found = np.interp(wanted, nm, n) + 1j * np.interp(wanted, nm, k)
        return found if wanted.ndim else complex(found)


def material_names() -> tuple[str, ...]:
    """Names of the built-in materials, sorted."""
    return tuple(sorted([*(path.stem.replace("_", " ") for path in _FOLDER.glob("*.txt")), *_CONSTANT]))


def catalogue() -> tuple[Material, ...]:
    """All built-in materials."""
    return tuple(_built_in(name) for name in material_names())


def material(spec, where: str = "material") -> Material:
    """A material from what a user writes.

    spec: a built-in name or its chemical formula ("gold", "Au"); a real or complex number; "1.5+0.1i" (or j); the path of a table file
    (see `read_table`); or a Material.  where: named in errors.  Raises InputError for unknown names, gain (k < 0) and bad files.
    """
    if isinstance(spec, Material):
        return spec
    if isinstance(spec, bool) or spec is None:
        raise InputError(Problem(where, spec, _ALLOWED))
    if isinstance(spec, (int, float, complex)):
        return _number(complex(spec), str(spec), where)
    if not isinstance(spec, (str, Path)):
        try:
            return _number(complex(spec), str(spec), where)  # numpy's scalars
        except (TypeError, ValueError):
            raise InputError(Problem(where, spec, _ALLOWED)) from None
    text = str(spec)
    number = _written_number(text)
    if number is not None:
        return _number(number, text, where)
    name = " ".join(text.lower().replace("_", " ").split())
    if text.strip() not in _CASED and name in _UNCLEAR:
        raise InputError(Problem(where, spec, _ALLOWED, _UNCLEAR[name]))
    name = _CASED.get(text.strip()) or _ALIASES.get(name, name)
    if name in material_names():
        return _built_in(name)
    if Path(text).suffix or "/" in text:
        return read_table(text, where)
    raise InputError(Problem(where, spec, _ALLOWED, nearest(name, [*material_names(), *_ALIASES])))


def _written_number(text: str) -> complex | None:
    """The number of "1.5", "1.5 + 0.1i", "(1.5+0.1j)" or "3.4i"; None for any other text."""
    closed = re.sub(r"\s*([-+])\s*|\s+(?=[ij])", r"\1", text.strip())
    if not _NUMBER_TEXT.fullmatch(closed):
        return None
    try:
        return complex(closed.replace("i", "j"))
    except ValueError:
        return None


_ALLOWED = "a built-in name (`substrate materials` lists them), a number, a text like '1.5+0.1i', or a table file"


def _number(index: complex, text: str, where: str) -> Material:
    if not (math.isfinite(index.real) and math.isfinite(index.imag)) or index.real < 0.0 or index == 0.0:
        raise InputError(Problem(where, text, "a finite index n + ik with n >= 0, not zero"))
    if index.imag < 0.0:
        raise InputError(Problem(where, text, "n + ik with k >= 0", _GAIN))
    index = complex(index.real + 0.0, index.imag + 0.0)  # a negative zero would pick the wrong side of square roots
    return Material(text, "a number given by the user", "", None, None, index)


_GAIN = "In the time factor exp(-i omega t) a negative k is gain, which has no steady state; for loss in the other sign convention turn the sign."


@lru_cache(maxsize=None)
def _built_in(name: str) -> Material:
    if name in _CONSTANT:
        return Material(name, "by definition", "", None, None, complex(_CONSTANT[name]))
    import numpy as np

    path = _FOLDER / f"{name.replace(' ', '_')}.txt"
    about, rows = {}, []
    for line in path.read_text(encoding="utf-8").splitlines():
        if line.startswith("#"):
            key, _, words = line[1:].partition(":")
            about[key.strip()] = words.strip()
        else:
            rows.append([float(text) for text in line.split()])
    table = np.array(rows)
    table.setflags(write=False)
    return Material(name, about["citation"], f"{about['name']}; {about['conditions']}", (float(table[0, 0]), float(table[-1, 0])), table)


def read_table(path, where: str = "material") -> Material:
    """A user's table: text, columns separated by commas or blanks, '#' starts a remark, the first other line names the columns.

    First column wavelength_nm, wavelength_um or energy_eV, in any order of rows; then n and k, or n, or eps1 and eps2 (real and imaginary
    permittivity), or eps1. Raises InputError that names the line for anything that cannot be used.
    """
    import numpy as np

    path = Path(path)
    try:
        lines = path.read_text(encoding="utf-8-sig").splitlines()
    except (OSError, UnicodeDecodeError) as fault:
        raise InputError(Problem(where, str(path), _ALLOWED, f"The file cannot be read: {fault}.")) from None
    kept = [(number, line.split("#")[0].replace(",", " ").split()) for number, line in enumerate(lines, 1)]
    kept = [(number, words) for number, words in kept if words]
    form = "a first line that names the columns, such as 'wavelength_nm, n, k' or 'energy_eV, eps1, eps2'"
    names = tuple(word.lower() for word in kept[0][1]) if kept else ()
    here = f"{where}, file {path}"
    if not names or names[0] not in _FIRST_COLUMNS or names[1:] not in _PAIRS:
        raise InputError(Problem(here, " ".join(names) or "an empty file", form))
    rows = sorted((_row(words, names, f"{here}, line {number}"), number) for number, words in kept[1:])
    if len(rows) < 2:
        raise InputError(Problem(here, f"{len(rows)} rows", "at least two rows of numbers"))
    for (before, one), (after, two) in zip(rows, rows[1:]):
        if before[0] == after[0]:
            raise InputError(Problem(here, f"{after[0]:g} nm twice, in lines {one} and {two}", "each wavelength once"))
    table = np.array([row for row, _ in rows])
    table.setflags(write=False)
    return Material(str(path), f"the user's table {path.name}", "", (float(table[0, 0]), float(table[-1, 0])), table)


def _row(words: list[str], names: tuple[str, ...], where: str) -> tuple[float, float, float]:
    """(wavelength nm, n, k) from one line of a user's table."""
    received = " ".join(words)
    try:
        values = [float(word) for word in words]
    except ValueError:
        values = []
    if len(values) != len(names) or not all(math.isfinite(v) for v in values) or values[0] <= 0.0:
        raise InputError(Problem(where, received, f"{len(names)} finite numbers, the first above 0"))
    first, real, imaginary = values[0], values[1], (values[2] if len(values) > 2 else 0.0) + 0.0
    nm = {"wavelength_nm": first, "wavelength_um": 1000.0 * first, "energy_ev": _EV_NM / first}[names[0]]
    if nm < _SHORTEST_NM:
        advice = "Is the unit of the first column the one that its name says?"
        raise InputError(Problem(where, received, f"wavelengths of {_SHORTEST_NM:g} nm and more; this one is {nm:.4g} nm", advice))
    if imaginary < 0.0:
        raise InputError(Problem(where, received, f"loss, {'k' if names[1] == 'n' else 'eps2'} >= 0", _GAIN))
    index = complex(real, imaginary) if names[1] == "n" else cmath.sqrt(complex(real, imaginary))
    if index.real < 0.0 or index == 0.0:
        raise InputError(Problem(where, received, "an index n + ik with n >= 0, not zero"))
    return nm, index.real, index.imag
