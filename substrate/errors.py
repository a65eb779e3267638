"""What can go wrong, as sentences: what was received, where, what is allowed, what to do."""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True)
class Problem:
    """One fault of an input.

    where: the key of a case file ("particle[1].diameter_nm") or the argument of a call.
    received: the value as the user wrote it.  allowed: what would be accepted.  advice: what to do, may be empty.
    """

    where: str
    received: object
    allowed: str
    advice: str = ""

    def __str__(self) -> str:
        sentence = f"{self.where}: received {self.received!r}; allowed: {self.allowed}."
        return f"{sentence} {self.advice}" if self.advice else sentence


class SubstrateError(Exception):
    """Base of every error that the program raises on purpose."""


class InputError(SubstrateError, ValueError):
    """The case, an argument or a file is wrong; `problems` lists every fault that was found."""

    def __init__(self, problems: Problem | str | Iterable[Problem]):
        if isinstance(problems, str):
            self.problems: tuple[Problem, ...] = ()
            super().__init__(problems)
            return
        self.problems = (problems,) if isinstance(problems, Problem) else tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class OutOfRange(InputError):
    """A value lies outside of the range in which a table or a formula holds."""


class NotConverged(SubstrateError):
    """The iteration stopped before its tolerance; `best` is the best vector found, `report` says how far it came."""

    def __init__(self, message: str, best=None, report=None):
        super().__init__(message)
        self.best = best
        self.report = report


def nearest(word: str, allowed: Iterable[str]) -> str:
    """A sentence that names the allowed word closest to `word`, or an empty text if none is close."""
    close = difflib.get_close_matches(word.lower(), [name.lower() for name in allowed], n=1, cutoff=0.6)
    return f"Did you mean {close[0]!r}?" if close else ""


def choose(word: str, table: dict, where: str):
    """Look `word` up in a visible table of choices; an unknown word raises InputError that prints the keys."""
    try:
        return table[word]
    except (KeyError, TypeError):
        allowed = ", ".join(repr(key) for key in table)
        advice = nearest(word, table) if isinstance(word, str) else ""
        raise InputError(Problem(where, word, allowed, advice)) from None
