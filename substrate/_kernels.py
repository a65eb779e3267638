"""How compiled functions are made: cached on disk where that is possible, in memory where it is not (a read-only install)."""

import numba


def compiled(function):
    """Compile for the argument types of the first call; releases the interpreter lock so that two threads can share the work."""
    try:
        return numba.njit(cache=True, nogil=True, error_model="numpy")(function)
    except RuntimeError:  # no folder for the cache can be written
        return numba.njit(nogil=True, error_model="numpy")(function)
