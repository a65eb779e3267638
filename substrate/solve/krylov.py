"""The conjugate orthogonal conjugate residual iteration for complex symmetric systems: one product a step.

Sogabe & Zhang, J. Comput. Appl. Math. 199, 297 (2007) (from memory). It works with the bilinear form x^T y, never with x^H y.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from time import perf_counter

import numpy as np

from substrate.errors import NotConverged
from substrate.solve._kernels import advance, bilinear, square_norm, turn


@dataclass(frozen=True)
class SolveReport:
    """How an iteration ended. residual: |b - A x|/|b| of the system as given, from one explicit product at the end."""

    residual: float
    tolerance: float
    products: int
    seconds: float
    unknowns: int

    @property
    def converged(self) -> bool:
        """Twice the tolerance is allowed: rounding lets the iteration's own residual run ahead of the true one."""
        return self.residual <= 2.0 * self.tolerance


def cocr(
    apply: Callable[[np.ndarray], np.ndarray],
    right: np.ndarray,
    tolerance: float,
    most_products: int,
    on_step: Callable[[int, float], None] | None = None,
    guess: np.ndarray | None = None,
) -> tuple[np.ndarray, SolveReport]:
    """Solve A x = right for a complex symmetric A given as a product.

    apply: x -> A x, same shape.  on_step(products, residual) is told every step.  Raises NotConverged with the best vector and the report
    if the tolerance is not met within most_products, if the iteration stagnates, or if numbers stop being finite.
    """
    started = perf_counter()
    size = np.sqrt(square_norm(right))
    x = np.zeros_like(right) if guess is None else guess.astype(complex)
    if size == 0.0:
        return np.zeros_like(right), SolveReport(0.0, tolerance, 0, perf_counter() - started, right.size)
    products = 0
    residual = right.copy()
    if guess is not None:
        residual -= apply(x)
        products += 1
    best, best_norm, best_at, reason = x.copy(), np.sqrt(square_norm(residual)) / size, 0, ""
    a_residual = apply(residual)
    products += 1
    direction, a_direction = residual.copy(), a_residual.copy()
    rho, length = bilinear(residual, a_residual), bilinear(a_direction, a_direction)
    norm = best_norm
    while norm > tolerance:
        if products >= most_products:
            reason = f"{products} products were spent"
            break
        if not (np.isfinite(rho) and np.isfinite(length)):
            reason = "the numbers stopped being finite"
            break
        if rho == 0.0 or length == 0.0:
            reason = "the iteration broke down (a vector came out orthogonal to itself)"
            break
        norm = np.sqrt(advance(rho / length, x, residual, direction, a_direction)) / size
        if norm < best_norm:
            if norm < 0.97 * best_norm:
                best_at = products
            best_norm, best[:] = norm, x
        elif products - best_at > 400:
            reason = f"no progress in 400 products at a residual of {best_norm:.1e}"
            break
        if on_step is not None:
            on_step(products, float(norm))
        a_residual = apply(residual)
        products += 1
        rho, previous = bilinear(residual, a_residual), rho
        length = turn(rho / previous, residual, a_residual, direction, a_direction)
    final = float(np.sqrt(square_norm(right - apply(best))) / size)
    report = SolveReport(final, tolerance, products + 1, perf_counter() - started, right.size)
    if reason or not report.converged:
        reason = reason or "rounding has separated the iteration's residual from the true one"
        raise NotConverged(
            f"the iteration stopped at a residual of {final:.1e}, the tolerance is {tolerance:.1e}: {reason}; "
            "use a coarser grid, a looser tolerance, or treat the numbers as unreliable",
            best=best,
            report=report,
        )
    return best, report
