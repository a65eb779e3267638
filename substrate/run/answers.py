"""From the answers of the questions to what the results file holds: quantities by ask, arrays by name."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from substrate.quantity import Quantity
from substrate.run.results import ArrayResult

CROSS_SECTIONS = ("absorbed", "up", "down", "guided", "stack", "work", "balance")
_RATES = ("total", "up", "down", "guided", "particle", "stack")
EMISSION = (*_RATES, "quantum_yield", "lifetime_ratio", "lifetime_ns", "balance")
_WHOLE = {"cross_sections": "work"}
_PLANES = {"xz": (0, 2, 1), "yz": (1, 2, 0), "xy": (0, 1, 2)}  # axes along u, along v, and across


def scattering_quantities(answer, asked: set[str]) -> dict[str, dict[str, Quantity]]:
    """Quantities of a `scatter` answer for the questions that were asked."""
    collected = {f"collected/{name}": quantity for name, quantity in answer.collected.items()}
    out: dict[str, dict[str, Quantity]] = {}
    if "cross sections" in asked:
        out["cross_sections"] = {**_named(answer, CROSS_SECTIONS), **collected}
    if "near field" in asked and answer.spots:
        out["near_field"] = {f"spot_{i}": quantity for i, quantity in enumerate(answer.spots, 1)}
    if "far field" in asked and "cross sections" not in asked:
        out["far_field"] = {**_named(answer, ("up", "down")), **collected}
    return out


def reflectance_quantities(found) -> dict[str, Quantity]:
    """Shares of a plane wave's power over the bare stack."""
    films = {f"absorbed/film_{number}": share for number, share in enumerate(found.absorbed, 1)}
    return {"reflected": found.reflected, "transmitted": found.transmitted, **films}


def emission_quantities(answer, prefix: str) -> dict[str, Quantity]:
    """Quantities of an `emit` answer; prefix: "" or "emitter_1/"."""
    named = {**_named(answer, EMISSION), **{f"collected/{name}": quantity for name, quantity in answer.collected.items()}}
    return {prefix + name: quantity for name, quantity in named.items()}


def _named(answer, names) -> dict[str, Quantity]:
    """The attributes of these names that hold a quantity."""
    found = {name: getattr(answer, name) for name in names}
    return {name: quantity for name, quantity in found.items() if quantity is not None}


def field_map(answer, ask: Mapping, prefix: str = "") -> dict[str, ArrayResult]:
    """|E|^2 on the plane of a "near field" ask, at the middles of its count[0] x count[1] fields, in one call."""
    along_u, along_v, across = _PLANES[ask["plane"]]
    u, v = (_middles(ask["center_nm"][i], ask["size_nm"][i], ask["count"][i]) for i in range(2))
    points = np.empty((len(u), len(v), 3))
    points[..., along_u], points[..., along_v], points[..., across] = u[:, None], v[None, :], ask["at_nm"]
    flat = points.reshape(-1, 3)
    u_name, v_name, w_name = "xyz"[along_u], "xyz"[along_v], "xyz"[across]
    about = {"plane": f"{ask['plane']} at {w_name} = {ask['at_nm']:g} nm"}
    axes = ((u_name, "nm"), (v_name, "nm"))
    shape = (len(u), len(v))
    inside = np.asarray(answer.inside(flat)).reshape(shape).astype(np.uint8)
    words = "|E|^2 over |E|^2 of the incident wave alone, on the finest grid (without a bar); inside of particles the field of the cells"
    return {
        f"{prefix}field_map_e2": ArrayResult(answer.intensity(flat).reshape(shape), "1", words, axes, None, about),
        f"{prefix}field_map_u_nm": ArrayResult(u, "nm", f"{u_name} of the map", ((u_name, "nm"),)),
        f"{prefix}field_map_v_nm": ArrayResult(v, "nm", f"{v_name} of the map", ((v_name, "nm"),)),
        f"{prefix}field_map_inside": ArrayResult(inside, "1", "1 in a particle, 0 outside", axes, None, about),
    }


def _middles(center: float, size: float, count: int):
    return center + size * ((np.arange(count) + 0.5) / count - 0.5)


def pattern(answer, count, base_is_lossless: bool, unit: str, prefix: str = "") -> dict[str, ArrayResult]:
    """The far-field pattern on count[0] polar angles (0 to 180 deg, to 90 over an absorbing base) and count[1] azimuths."""
    polar = np.linspace(0.0, 180.0 if base_is_lossless else 90.0, count[0])
    azimuth = np.arange(count[1]) * (360.0 / count[1])
    grid = np.meshgrid(polar, azimuth, indexing="ij")
    values = answer.pattern(grid[0].ravel(), grid[1].ravel()).reshape(len(polar), len(azimuth))
    words = {
        "nm^2/sr": "differential scattering cross section, both polarisations of the scattered wave summed, finest grid (without a bar)",
        "1/sr": "power per steradian over the emitter's power in the unbounded host, finest grid (without a bar)",
    }[unit]
    axes = (("polar angle from +z", "deg"), ("azimuth", "deg"))
    return {
        f"{prefix}pattern": ArrayResult(values, unit, words, axes),
        f"{prefix}pattern_polar_deg": ArrayResult(polar, "deg", "polar angle from +z: 0 to 90 above, 90 to 180 below", axes[:1]),
        f"{prefix}pattern_azimuth_deg": ArrayResult(azimuth, "deg", "azimuth", axes[1:]),
    }


def convergence(answer, extent_nm: float | None, units: Mapping[str, str], prefix: str = "") -> dict[str, ArrayResult]:
    """The values of every quantity on the series of grids, and the fit that leads to cells of size zero.

    extent_nm: smallest extent of the particles, which turns cell sizes into cells across it.  units: {name: unit}.
    """
    out: dict[str, ArrayResult] = {}
    for name, found in answer.convergence.items():
        folder = f"convergence/{prefix}{name}".replace(" ", "_")
        cell = np.asarray(found.cell_nm, dtype=float)
        unit = units.get(name, "1")
        axes = (("grid", "1"),)
        if extent_nm is not None:
            out[f"{folder}/cells_across"] = ArrayResult(extent_nm / cell, "1", "cells across the smallest extent of the particles", axes)
        out[f"{folder}/cell_nm"] = ArrayResult(cell, "nm", "edge of a cell", axes)
        out[f"{folder}/values"] = ArrayResult(np.asarray(found.values, dtype=float), unit, f"{name} on each grid", axes)
        words = "coefficients c of c0 + c1 h + c2 h^2, h the cell in nm; c0 is the value at cells of size zero"
        out[f"{folder}/fit"] = ArrayResult(np.asarray(found.fit, dtype=float), unit, words, (("power of h", "1"),), found.error)
    return out


def missed_accuracy(quantities: Mapping[str, Mapping[str, Quantity]], asked: float) -> list[str]:
    """The quantities whose bar is wider than the accuracy asked for, each as "name (5.2 %)".

    Parts of a balance are measured against its whole (the work, the total rate): a share of 1e-4 need not be known to 2 %.
    """
    missed = []
    for ask, named in quantities.items():
        if ask == "reflectance":  # exact
            continue
        for name, quantity in named.items():
            folder, _, last = name.rpartition("/")
            collected = folder.endswith("collected")
            if quantity.error is None or (last == "balance" and not collected):
                continue
            scale = abs(quantity.value)
            if not collected and last in (*CROSS_SECTIONS, *_RATES):
                whole = named.get(f"{folder}/total" if folder else _WHOLE.get(ask, "total"))
                scale = max(scale, abs(whole.value)) if whole else scale
            if quantity.error > asked * scale:
                missed.append(f"{name} ({100.0 * quantity.error / scale:.2g} %)" if scale else f"{name} (zero within its bar)")
    return missed
