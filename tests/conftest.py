"""Fakes that let the run and the command be tested without solving anything."""

from __future__ import annotations

import sys
from types import ModuleType, SimpleNamespace

import numpy as np
import pytest

from substrate.errors import InputError, NotConverged
from substrate.quantity import Quantity


class FakeQuestions:
    """Stands in for `scatter` and `emit`: simple numbers, all calls noted, faults on demand.

    fail_at: {number of the call from 0: exception to raise}.  bar: relative error bar of every number.
    """

    def __init__(self):
        self.calls: list[SimpleNamespace] = []
        self.fail_at: dict[int, BaseException] = {}
        self.bar = 0.01

    def _call(self, name: str, source, particles, collectors, options) -> None:
        number = len(self.calls)
        self.calls.append(SimpleNamespace(name=name, source=source, particles=particles, collectors=collectors, **options))
        if options["progress"] is not None:
            for done in (0.25, 1.0):
                options["progress"](SimpleNamespace(stage="solving", done=done, detail=""))
        if number in self.fail_at:
            raise self.fail_at[number]

    def quantity(self, value: float, unit: str, quick: bool = False) -> Quantity:
        return Quantity(value, None if quick else self.bar * abs(value), unit, f"a fake of {value:g}")

    def scatter(self, stack, particles, light, collectors=(), *, spots_nm=(), **options):
        """Every cross section is a multiple of the wavelength."""
        self._call("scatter", light, particles, collectors, options)
        return self.scattering(light, collectors, spots_nm, options["quick"])

    def scattering(self, light, collectors=(), spots_nm=(), quick=False):
        names = ("work", "absorbed", "up", "down", "guided", "stack")
        parts = {name: self.quantity(light.wavelength_nm * (6 - i), "nm^2", quick) for i, name in enumerate(names)}
        fit = SimpleNamespace(cell_nm=(4.0, 2.0), values=(1.0, 2.0), fitted=3.0, error=0.1, fit=(3.0, -0.5, 0.0))
        return SimpleNamespace(
            **parts,
            balance=self.quantity(1e-6, "1"),
            collected={c.name: self.quantity(7.0, "nm^2", quick) for c in collectors},
            spots=tuple(self.quantity(10.0 + i, "1", quick) for i, _ in enumerate(spots_nm)),
            warnings=("a film is thin",),
            method="fake cells",
            convergence={"work": fit, "collected objective": fit},
            reports=(),
            intensity=lambda points: points[:, 0] + 1000.0 * points[:, 2],
            inside=lambda points: points[:, 2] < 20.0,
            pattern=lambda polar, azimuth: polar + 1000.0 * azimuth,
        )

    def emit(self, stack, particles, emitter, collectors=(), **options):
        """The total rate is the height of the emitter in nm."""
        self._call("emit", emitter, particles, collectors, options)
        names = ("total", "up", "down", "guided", "particle", "stack", "balance", "quantum_yield", "lifetime_ratio")
        parts = {name: self.quantity(emitter.position_nm[2] / (i + 1), "1", options["quick"]) for i, name in enumerate(names)}
        return SimpleNamespace(
            **parts,
            lifetime_ns=None if emitter.lifetime_ns is None else self.quantity(emitter.lifetime_ns, "ns"),
            collected={c.name: self.quantity(0.3, "1") for c in collectors},
            warnings=(),
            method="fake emission",
            convergence={},
            reports=(),
            pattern=lambda polar, azimuth: 0.0 * polar + 1.0,
        )

    def not_converged(self, light) -> NotConverged:
        """The fault of an iteration that stopped early, with an answer without bars."""
        return NotConverged("the residual is 1e-2 after 500 products", best=self.scattering(light, quick=True))

    def wrong_input(self) -> InputError:
        return InputError("the emitter sits in a wall")


@pytest.fixture
def questions(monkeypatch) -> FakeQuestions:
    """Puts fakes in the place of the modules that solve."""
    fake = FakeQuestions()
    for name in ("scatter", "emit"):
        module = ModuleType(f"substrate.question.{name}")
        setattr(module, name, getattr(fake, name))
        monkeypatch.setitem(sys.modules, module.__name__, module)
    cells = ModuleType("substrate.particle.cells")
    cells.reference_extent_nm = lambda particles: 60.0
    monkeypatch.setitem(sys.modules, cells.__name__, cells)
    return fake


@pytest.fixture
def pictures(monkeypatch) -> list[tuple]:
    """Puts fakes in the place of the modules that draw; returns the list of what they were asked for."""
    asked: list[tuple] = []

    def writer(name: str):
        def write(*arguments):
            path = arguments[-1]
            asked.append((name, path))
            if name == "save_figures":
                path.mkdir(parents=True, exist_ok=True)
                return [path / "power.png"]
            path.write_text(name, encoding="utf-8")
            return None

        return write

    for module_name, names in {"figure": ("save_figures", "save_sketch", "save_material_plot"), "report": ("write_report",)}.items():
        module = ModuleType(f"substrate.picture.{module_name}")
        for name in names:
            setattr(module, name, writer(name))
        monkeypatch.setitem(sys.modules, module.__name__, module)
    return asked
