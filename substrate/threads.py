"""Share independent pieces of work among the processor's cores with plain threads."""

from __future__ import annotations

import os
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from functools import cache


def thread_count() -> int:
    """Cores that this process may use, at most 8."""
    try:
        cores = len(os.sched_getaffinity(0))
    except AttributeError:  # not on every system
        cores = os.cpu_count() or 1
    return max(1, min(cores, 8))


@cache
def _pool() -> ThreadPoolExecutor:
    return ThreadPoolExecutor(thread_count(), thread_name_prefix="substrate")


def share(count: int, work: Callable[[int, int], None]) -> None:
    """Call work(start, stop) on slices that cover range(count), one slice a thread; errors of a thread are raised here."""
    threads = min(thread_count(), count)
    if threads <= 1:
        work(0, count)
        return
    bounds = [count * i // threads for i in range(threads + 1)]
    futures = [_pool().submit(work, low, high) for low, high in zip(bounds[:-1], bounds[1:])]
    for future in futures:
        future.result()
