"""One product of the coupled-dipole system against the bare FFTs of the same padded box, and the reflected table in products.

Ratios within one run, minimum of several repeats after a warm-up; times alone say little on a shared machine.
    python bench/product.py [cells across, default 32 48 64]
"""

import sys
from time import perf_counter

import numpy as np
from scipy import fft

from substrate.green.table import build_table
from substrate.medium.stack import Layers
from substrate.particle.cells import mesh
from substrate.particle.shape import Box
from substrate.solve.interaction import Interaction
from substrate.threads import thread_count

REPEATS = 7
LAYERS = Layers(633.0, (1.0, 0.056 + 4.27j, 1.5), (50.0,))
CELL_NM = 5.0


def best(work, repeats: int = REPEATS) -> float:
    """Shortest of several runs, in seconds, after one that is not counted."""
    work()
    times = []
    for _ in range(repeats):
        start = perf_counter()
        work()
        times.append(perf_counter() - start)
    return min(times)


def bare_transforms(shape) -> float:
    """Three forward and three inverse complex transforms of the padded box, as a plain formulation has them."""
    box = np.random.default_rng(0).standard_normal((3, *shape)).astype(complex)

    def work():
        nonlocal box
        box = fft.fftn(box, axes=(1, 2, 3), workers=thread_count(), overwrite_x=True)
        box = fft.ifftn(box, axes=(1, 2, 3), workers=thread_count(), overwrite_x=True)

    return best(work)


def row(n: int) -> str:
    cells = mesh([Box(material=1.5, size_nm=(n * CELL_NM,) * 3)], CELL_NM)
    start = perf_counter()
    table = build_table(LAYERS, 1.5 * n * CELL_NM, CELL_NM, 2.0 * n * CELL_NM)
    table_seconds = perf_counter() - start
    start = perf_counter()
    over_stack = Interaction(cells, LAYERS.k_host, table)
    kernel_seconds = perf_counter() - start
    free = Interaction(cells, LAYERS.k_host, None)
    dipoles = np.random.default_rng(1).standard_normal((len(cells.index), 3)) + 0j
    without, with_stack = best(lambda: free.apply(dipoles)), best(lambda: over_stack.apply(dipoles))
    bare = bare_transforms(free.padded)
    return (
        f"| {n}^3 | {bare:.3f} | {without / bare:.2f} | {with_stack / bare:.2f} | {with_stack / without:.2f} "
        f"| {table_seconds / with_stack:.2f} | {kernel_seconds / with_stack:.2f} | {table.error:.0e} |"
    )


def main(sizes: list[int]) -> None:
    row(8)  # compiles the kernels
    print("| cells | bare FFTs, s | product / bare | with stack / bare | with / without | table / product | kernel / product | table error |")
    print("|---|---|---|---|---|---|---|---|")
    for n in sizes:
        print(row(n), flush=True)


if __name__ == "__main__":
    main([int(text) for text in sys.argv[1:]] or [32, 48, 64])
