"""A point emitter: where it is, how it is oriented, and how its intrinsic yield and lifetime enter."""

from __future__ import annotations

import math
from dataclasses import dataclass

from substrate.errors import InputError, Problem, choose

_THIRD = 1.0 / 3.0
_X, _Y, _Z = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)
# Unit vectors of the moment and their weights in the average of rates.
ORIENTATIONS: dict[str, tuple[tuple[tuple[float, float, float], float], ...]] = {
    "vertical": ((_Z, 1.0),),
    "horizontal": ((_X, 0.5), (_Y, 0.5)),
    "isotropic": ((_X, _THIRD), (_Y, _THIRD), (_Z, _THIRD)),
    "x": ((_X, 1.0),),
    "y": ((_Y, 1.0),),
    "z": ((_Z, 1.0),),
}
KINDS = {"electric": "electric dipole"}


@dataclass(frozen=True)
class Emitter:
    """An electric point emitter in the host, above the stack and outside of particles.

    position_nm: (x, y, z), z > 0.  wavelength_nm: of emission, in vacuum.
    orientation: "vertical", "horizontal" (mean of rates over x and y), "isotropic" (mean of rates over x, y, z), "x", "y", "z",
    or a vector.  quantum_yield: intrinsic, in the unbounded host, 0 < q0 <= 1.  lifetime_ns: there too, optional.
    """

    position_nm: tuple[float, float, float]
    wavelength_nm: float
    orientation: object = "vertical"
    quantum_yield: float = 1.0
    lifetime_ns: float | None = None
    kind: str = "electric"

    def __post_init__(self):
        position = tuple(float(c) for c in self.position_nm)
        object.__setattr__(self, "position_nm", position)
        choose(self.kind, KINDS, "emitter kind")
        if len(position) != 3 or not all(math.isfinite(c) for c in position) or position[2] <= 0.0:
            raise InputError(
                Problem("emitter position_nm", position, "(x, y, z) with z > 0", "The emitter sits in the host, above the stack's top at z = 0.")
            )
        if not 0.0 < self.wavelength_nm < math.inf:
            raise InputError(Problem("emitter wavelength_nm", self.wavelength_nm, "a number above 0"))
        if not 0.0 < self.quantum_yield <= 1.0:
            raise InputError(Problem("emitter quantum_yield", self.quantum_yield, "above 0 up to 1"))
        if self.lifetime_ns is not None and not 0.0 < self.lifetime_ns < math.inf:
            raise InputError(Problem("emitter lifetime_ns", self.lifetime_ns, "a number above 0"))
        self.moments()

    def moments(self) -> tuple[tuple[tuple[float, float, float], float], ...]:
        """Unit vectors of the moment with their weights."""
        if isinstance(self.orientation, str):
            return choose(self.orientation, ORIENTATIONS, "emitter orientation")
        try:
            vector = tuple(float(c) for c in self.orientation)
        except (TypeError, ValueError):
            vector = ()
        norm = math.sqrt(sum(c * c for c in vector))
        if len(vector) != 3 or not 0.0 < norm < math.inf:
            allowed = ", ".join(ORIENTATIONS) + ", or a vector of three numbers that is not zero"
            raise InputError(Problem("emitter orientation", self.orientation, allowed))
        return ((tuple(c / norm for c in vector), 1.0),)

    def average(self) -> str:
        """How the average over orientations is meant, for definitions."""
        if isinstance(self.orientation, str):
            return {"horizontal": "mean of rates over x and y", "isotropic": "mean of rates over x, y and z"}.get(
                self.orientation, f"{self.orientation} moment"
            )
        return f"moment along {tuple(round(c, 4) for c in self.moments()[0][0])}"
