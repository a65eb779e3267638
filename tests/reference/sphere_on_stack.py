"""Spheres and emitters over a stack: values from an independent multipole solution, kept as data.

Vector spherical waves about the sphere's centre, their reflection through the angular spectrum, no grid; relative uncertainty
below 1e-8. The indices define the cases and are not quoted material data. `load()["about"]` tells the definitions.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path

_DATA = Path(__file__).parent / "data" / "sphere_on_stack.json"


@dataclass(frozen=True)
class SphereCase:
    """One case in plain numbers (nm, degrees). light: (angle_deg, polarisation) or None; emitter: (position_nm, direction) or None.

    results: cross sections in nm^2 (sigma_ext_nm2, ...), dsdO_theta_A_B and dsdO_phi_A_B in nm^2/sr at polar angle A and azimuth B,
    E2_<point> at points_nm, or the decay-rate factors b_total, b_up, b_abs_sphere, b_stack_only.
    """

    name: str
    wavelength_nm: float
    host: float
    films: tuple[tuple[complex, float], ...]
    base: complex
    sphere: complex
    radius_nm: float
    gap_nm: float
    light: tuple[float, str] | None
    emitter: tuple[tuple[float, ...], tuple[float, ...]] | None
    points_nm: dict[str, tuple[float, float, float]]
    results: dict[str, float]


def load() -> dict:
    """The file as it is."""
    return json.loads(_DATA.read_text(encoding="utf-8"))


def cases() -> dict[str, SphereCase]:
    """All cases by name."""
    data = load()
    return {name: _case(name, raw) for group in ("scattering", "emitters") for name, raw in data[group].items()}


def _case(name: str, raw: dict) -> SphereCase:
    return SphereCase(
        name,
        raw["wavelength_nm"],
        raw["n_host"],
        tuple((complex(*film["n"]), film["thickness_nm"]) for film in raw["layers"] or ()),
        complex(*raw["n_sub"]),
        complex(*raw["n_sphere"]),
        raw["sphere_radius_nm"],
        raw["gap_nm"],
        (raw["theta_deg"], raw["polarisation"]) if "theta_deg" in raw else None,
        (tuple(raw["position_nm"]), tuple(raw["direction"])) if "position_nm" in raw else None,
        {point: tuple(place) for point, place in raw.get("points_nm", {}).items()},
        raw["results"],
    )
