"""From the text of a case file to a Case: every value checked, every default filled in, all problems told at once."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from substrate.errors import InputError, Problem
from substrate.run.checks import check, complete
from substrate.run.reading import Reading
from substrate.run.schema import CASE
from substrate.run.series import Axis, Point, expand


@dataclass(frozen=True)
class Case:
    """A case that is ready to run. text: the file verbatim.  tables: every key with its value or default, a series as the list of
    its values.  axes: the series in the order of the file."""

    title: str
    text: str
    path: Path
    tables: Mapping
    axes: tuple[Axis, ...]

    def points(self) -> list[Point]:
        """The points of the product of all series, the last series of the file fastest; one point without a series."""
        return expand(self.tables, self.axes)

    def quick(self) -> Case:
        """The same case on one grid, without error bars."""
        accuracy = {**self.tables["accuracy"], "quick": True}
        return replace(self, tables={**self.tables, "accuracy": accuracy})


def read_case(path) -> Case:
    """Read a case file. Raises InputError with all its problems, or with one sentence if it cannot be read at all."""
    path = Path(path)
    try:
        text = path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise InputError(Problem(str(path), f"byte {error.start} that is not UTF-8", "a TOML text in UTF-8")) from None
    except OSError as error:
        reason = error.strerror or str(error)
        raise InputError(Problem("case file", str(path), "a TOML file that can be read", f"({reason})")) from None
    return parse_case(text, path)


def parse_case(text: str, path="case.toml") -> Case:
    """Make a Case of its TOML text; path: names the case and tells where relative table files are. Raises InputError with all problems."""
    path = Path(path)
    reading = Reading()
    tables = reading.table(_toml(text, path), CASE)
    tables["title"] = tables["title"] or path.stem
    problems = [*reading.problems, *check(tables, reading.axes, path.parent)]
    if problems:
        raise InputError(problems)
    complete(tables, path.parent)
    return Case(tables["title"], text, path, tables, tuple(reading.axes))


def _toml(text: str, path: Path) -> dict:
    try:
        return tomllib.loads(text.replace("\r\n", "\n"))
    except tomllib.TOMLDecodeError as error:
        reason, place = str(error), ""
        found = re.search(r"\s*\(at (?:line (\d+), column (\d+)|end of document)\)$", reason)
        if found:
            reason = reason[: found.start()]
            line = int(found[1]) if found[1] else text.count("\n") + 1
            place = f", line {line}" + (f", column {found[2]}" if found[2] else "")
        raise InputError(f"{path.name}{place}: this is not valid TOML: {reason[:1].lower()}{reason[1:]}.") from None
