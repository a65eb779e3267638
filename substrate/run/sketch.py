"""The sample of one point as a Sketch: layers, outlines in the xz plane, emitters, light, collectors."""

from __future__ import annotations

import math

import numpy as np

from substrate.run.build import Sample
from substrate.run.results import Sketch

_ROWS = 121  # heights at which an outline is looked up
_ACROSS = 241  # points along x at each height, refined by bisection
_BISECTIONS = 12


def sketch(sample: Sample) -> Sketch:
    """The sample to scale. Indices are those at the wavelength of the light, or of the first emitter."""
    wavelength = sample.sources()[0].wavelength_nm
    layers = sample.stack.at(wavelength)
    names = [sample.stack.host, *(film.material for film in sample.stack.films), sample.stack.base]
    thickness = [None, *(film.thickness_nm for film in sample.stack.films), None]
    light = sample.light
    return Sketch(
        layers=[
            {"name": _name(spec), "thickness_nm": size, "index_text": index_text(index)}
            for spec, size, index in zip(names, thickness, layers.index)
        ],
        outlines=[found for number, particle in enumerate(sample.particles, 1) for found in outlines(particle, number)],
        emitters=[
            {"x_nm": e.position_nm[0], "z_nm": e.position_nm[2], "orientation": _words(e.orientation)} for e in sample.emitters
        ],
        light=None if light is None else {"angle_deg": light.angle_deg, "side": light.side, "polarization": _words(light.polarization)},
        collectors=[_collector(c, layers) for c in sample.collectors],
    )


def index_text(index: complex) -> str:
    """A refractive index in few digits: "1.33", "0.18+3.43i"."""
    return f"{index.real:.4g}" if index.imag == 0.0 else f"{index.real:.4g}+{index.imag:.4g}i"


def outlines(particle, number: int = 1) -> list[dict]:
    """The cut of a particle by the xz plane through its middle, as closed lines; of a shell its core's too, of a union each part's."""
    if hasattr(particle, "parts"):
        return [line for part in particle.parts for line in outlines(part, number)]
    found = [{"name": f"{particle.word} {number}, {_name(particle.material)}", **_outline(particle)}]
    return found + outlines(particle.core, number) if hasattr(particle, "core") else found


def _outline(particle) -> dict:
    """Left and right edge at each height, joined to one line; heights at which the cut is empty are left out."""
    low, high = (np.asarray(edge, dtype=float) for edge in particle.bounds_nm())
    y = 0.5 * (low[1] + high[1])
    heights = low[2] + (high[2] - low[2]) * 0.5 * (1.0 - np.cos(np.linspace(0.0, math.pi, _ROWS)))  # denser at both ends
    heights[0] += 1e-6 * (high[2] - low[2])
    heights[-1] -= 1e-6 * (high[2] - low[2])
    x = np.linspace(low[0], high[0], _ACROSS)
    inside = particle.inside(np.array([(a, y, z) for z in heights for a in x])).reshape(len(heights), len(x))
    filled = np.flatnonzero(inside.any(axis=1))
    if not len(filled):
        return {"x_nm": [], "z_nm": []}
    z = heights[filled]
    step = x[1] - x[0]
    first = x[inside[filled].argmax(axis=1)]
    last = x[len(x) - 1 - inside[filled][:, ::-1].argmax(axis=1)]
    left = _edge(particle, y, z, first, first - step)
    right = _edge(particle, y, z, last, last + step)
    xs, zs = np.concatenate([left, right[::-1], left[:1]]), np.concatenate([z, z[::-1], z[:1]])
    return {"x_nm": [round(float(v), 4) for v in xs], "z_nm": [round(float(v), 4) for v in zs]}


def _edge(particle, y: float, z, inner, outer):
    """x of the surface at heights z (n,), between points inside and points outside."""
    for _ in range(_BISECTIONS):
        middle = 0.5 * (inner + outer)
        inside = particle.inside(np.column_stack([middle, np.full(len(z), y), z]))
        inner, outer = np.where(inside, middle, inner), np.where(inside, outer, middle)
    return inner


def _collector(collector, layers) -> dict:
    side = "above" if collector.is_above else "below"
    if collector.polar_deg is not None:
        return {"name": collector.name, "side": side, "polar_deg": list(collector.polar_deg)}
    (_, half), _ = collector.window(layers)
    return {"name": collector.name, "side": side, "half_angle_deg": math.degrees(half)}


def _name(spec: object) -> str:
    return spec if isinstance(spec, str) else getattr(spec, "name", f"{spec:g}" if isinstance(spec, float) else str(spec))


def _words(value: object) -> str:
    return value if isinstance(value, str) else "(" + ", ".join(f"{part:.3g}" for part in value) + ")"
