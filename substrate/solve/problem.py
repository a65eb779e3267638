"""One grid, one wavelength: the linear system of all cells, and its solution for any excitation."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from substrate.errors import NotConverged
from substrate.green.table import ReflectedTable
from substrate.medium.stack import Layers
from substrate.particle.cells import Cells
from substrate.solve.interaction import Interaction
from substrate.solve.krylov import SolveReport, cocr
from substrate.solve.polarizability import Polarizability, polarizability

MOST_PRODUCTS = 1500
SINGLE_PRECISION_FROM = 5e-5


@dataclass(frozen=True)
class Solution:
    """Dipoles (n, 3) in nm^3 on the cells for an excitation (n, 3), and how the iteration ended."""

    problem: Problem
    excitation: np.ndarray
    dipoles: np.ndarray
    report: SolveReport

    def work(self) -> float:
        """Power that the excitation spends on the dipoles, as a cross section in nm^2: k Im(E* . p)."""
        return float(self.problem.layers.k_host * np.vdot(self.excitation, self.dipoles).imag)

    def absorbed(self) -> float:
        """Ohmic loss in the cells, nm^2."""
        return self.problem.polarizability.absorbed(self.dipoles, self.problem.layers.k_host)

    def given_away(self) -> float:
        """Power that the dipoles radiate and hand to the stack, from their own field (one product): nm^2."""
        k = self.problem.layers.k_host
        own = np.vdot(self.dipoles, self.problem.interaction.apply(self.dipoles)).imag
        return float(k * own + k**4 / (6.0 * np.pi) * np.vdot(self.dipoles, self.dipoles).real)


class Problem:
    """The system A p = E of one grid: A = 1/alpha - T, solved in the symmetric scaling alpha^(1/2) A alpha^(1/2).

    cells: the grid.  layers: the stack at one wavelength.  eps: relative permittivities of the cells' materials over the host's.
    table: reflected tensor for this grid, None for a uniform surrounding.  tolerance: relative residual down to which it will be
    solved; above 5e-5 the fields of the dipoles are computed in single precision, whose error (1e-6) does not show there.
    """

    def __init__(self, cells: Cells, layers: Layers, eps, table: ReflectedTable | None, tolerance: float):
        self.cells = cells
        self.layers = layers
        self.table = table
        self.polarizability: Polarizability = polarizability(cells, eps, layers.k_host)
        self.tolerance = tolerance
        precision = np.complex64 if tolerance >= SINGLE_PRECISION_FROM else np.complex128
        self.interaction = Interaction(cells, layers.k_host, table, precision)

    def solve(
        self,
        excitation: np.ndarray,
        most_products: int = MOST_PRODUCTS,
        on_step: Callable[[int, float], None] | None = None,
    ) -> Solution:
        """Dipoles for an excitation (n, 3) at the cell centres, to the problem's tolerance. NotConverged carries the Solution of the best vector as `best`."""
        root = self.polarizability.root

        def scaled(y: np.ndarray) -> np.ndarray:
            return y - root(self.interaction.apply(root(y)))

        try:
            y, report = cocr(scaled, root(excitation.astype(complex)), self.tolerance, most_products, on_step)
        except NotConverged as stop:
            best = Solution(self, excitation, root(stop.best), stop.report)
            raise NotConverged(str(stop), best=best, report=stop.report) from None
        return Solution(self, excitation, root(y), report)
