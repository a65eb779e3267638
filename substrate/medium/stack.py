"""The layered sample: host above, films, base below, and what it becomes at one wavelength."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from html import escape

from substrate.constants import DOUBTFUL_FILM_NM, TWO_PI
from substrate.errors import InputError, Problem

NEGLIGIBLE_LOSS = 1e-6  # k/n: the absorption length is more than 10^5 wavelengths, longer than any sample


@dataclass(frozen=True)
class Film:
    """One film. material: any material specification; thickness_nm > 0."""

    material: object
    thickness_nm: float

    def __post_init__(self):
        thickness = self.thickness_nm
        if isinstance(thickness, bool) or not isinstance(thickness, (int, float)) or not 0.0 < thickness < math.inf:
            raise InputError(Problem("film thickness_nm", thickness, "a number above 0", "Leave the film out if it is not there."))


@dataclass(frozen=True)
class Stack:
    """A stack of flat layers, listed from the top down; z = 0 is its first interface, the host is above.

    host: lossless medium above (the particles and emitters are in it).  films: from the top down, may be empty.
    base: half-space below.  A film or base with k below 1e-6 n counts as lossless: its light is far-field or guided light.  Materials are built-in names, numbers, "1.5+0.1i", table files or Material objects.
    """

    host: object = "air"
    films: tuple[Film, ...] = ()
    base: object = "glass"

    def __post_init__(self):
        object.__setattr__(self, "films", tuple(self.films))
        for film in self.films:
            if not isinstance(film, Film):
                raise InputError(Problem("films", film, "Film objects", "Write Film('gold', 50)."))

    def at(self, wavelength_nm: float) -> Layers:
        """The stack's numbers at one vacuum wavelength. Raises InputError for a lossy host, OutOfRange outside of a table."""
        from substrate.medium.material import material

        if not 0.0 < wavelength_nm < math.inf:
            raise InputError(Problem("wavelength_nm", wavelength_nm, "a number above 0"))
        films = ((f"stack.films[{i}].material", film.material) for i, film in enumerate(self.films, 1))
        specs = [("stack.host", self.host), *films, ("stack.base", self.base)]
        index = tuple(complex(material(spec, where).index(wavelength_nm)) for where, spec in specs)
        if abs(index[0].imag) > 1e-4 * index[0].real:
            raise InputError(
                Problem(
                    "stack.host",
                    self.host,
                    "a lossless medium",
                    "An absorbing host has no incident irradiance and no host decay rate to refer to; give its real index as a number.",
                )
            )
        index = (complex(index[0].real), *(complex(n.real) if n.imag < NEGLIGIBLE_LOSS * n.real else n for n in index[1:]))
        return Layers(float(wavelength_nm), index, tuple(float(film.thickness_nm) for film in self.films))

    def _repr_html_(self) -> str:
        rows = [("host", self.host, ""), *(("film", f.material, f"{f.thickness_nm:g} nm") for f in self.films), ("base", self.base, "")]
        cells = "".join(f"<tr><td>{kind}</td><td>{escape(str(name))}</td><td>{thickness}</td></tr>" for kind, name, thickness in rows)
        return f"<table>{cells}</table>"

    def cautions(self) -> tuple[str, ...]:
        """Sentences about films whose bulk constants are doubtful."""
        return tuple(
            f"film {i + 1} ({film.material}) is {film.thickness_nm:g} nm thick: below {DOUBTFUL_FILM_NM:g} nm the bulk constants "
            "used here are doubtful"
            for i, film in enumerate(self.films)
            if film.thickness_nm < DOUBTFUL_FILM_NM
        )


@dataclass(frozen=True)
class Layers:
    """A stack at one wavelength, as numbers.

    wavelength_nm: vacuum wavelength.  index: complex refractive indices from the host down to the base.
    thickness_nm: of the films, from the top down (two fewer than indices).
    """

    wavelength_nm: float
    index: tuple[complex, ...]
    thickness_nm: tuple[float, ...] = ()
    k0: float = field(init=False)

    def __post_init__(self):
        if len(self.index) != len(self.thickness_nm) + 2:
            raise InputError(Problem("layers", self.index, f"{len(self.thickness_nm) + 2} indices for these films"))
        object.__setattr__(self, "k0", TWO_PI / self.wavelength_nm)

    @property
    def k_host(self) -> float:
        """Wave number of the host, 1/nm."""
        return self.index[0].real * self.k0

    @property
    def base_is_lossless(self) -> bool:
        return self.index[-1].imag == 0.0

    @property
    def is_uniform(self) -> bool:
        """True where every layer has the host's index: the stack reflects nothing."""
        return all(n == self.index[0] for n in self.index[1:])

    def flipped(self) -> Layers:
        """The same stack seen from below."""
        return Layers(self.wavelength_nm, self.index[::-1], self.thickness_nm[::-1])

    def interfaces_nm(self) -> tuple[float, ...]:
        """Heights of the interfaces, from z = 0 down."""
        heights = [0.0]
        for thickness in self.thickness_nm:
            heights.append(heights[-1] - thickness)
        return tuple(heights)
