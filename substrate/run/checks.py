"""What must fit together in a case: gaps, collectors, the needs of each question, materials and ranges; and defaults that depend on it."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path

from substrate.constants import SMALLEST_GAP_NM
from substrate.errors import InputError, OutOfRange, Problem, nearest
from substrate.run.schema import REQUIRED
from substrate.run.series import Axis, point_count

MOST_POINTS = 10_000
_ONLY_ABOVE = "With particles, fields below the surface are not offered."
_NEEDS = {  # question -> tables of which at least one must be there
    "cross sections": ("light",),
    "near field": ("light",),
    "emission": ("emitter",),
    "far field": ("light", "emitter"),
    "reflectance": ("light",),
}
_PARTICLE_QUESTIONS = ("cross sections",)
_BRACKETS = {"light": "[light]", "emitter": "[[emitter]]", "particle": "[[particle]]"}
_PLANE_COUNT = [81, 81]


def check(tables: Mapping, axes: Sequence[Axis], folder: Path) -> list[Problem]:
    """All faults of tables that were read one by one already; folder: where relative table files are looked up."""
    problems: list[Problem] = []
    for part in (_particles(tables), _collectors(tables), _emitters(tables), _asks(tables), _points(axes)):
        problems.extend(part)
    problems.extend(_materials(tables, folder))
    return problems


def complete(tables: dict, folder: Path) -> None:
    """Fill in the defaults that depend on other keys, in place."""
    for _, body in _placed(tables):
        if body["center_nm"] is None:
            body["gap_nm"] = 0.0 if body["gap_nm"] is None else body["gap_nm"]
            body["center_xy_nm"] = body["center_xy_nm"] or [0.0, 0.0]
    for number, collector in enumerate(tables["collector"]):
        collector["name"] = collector["name"] or _collector_name(tables, number)
        if collector["side"] is None:
            polar = collector["polar_deg"]
            collector["side"] = "below" if polar and polar[0] >= 90.0 else "above"
    for ask in tables["ask"]:
        if ask["what"] == "near field" and ask["plane"]:
            ask["at_nm"] = 0.0 if ask["at_nm"] is None else ask["at_nm"]
            middle = 0.0 if ask["plane"] == "xy" else 0.5 * ask["size_nm"][1]
            ask["center_nm"] = ask["center_nm"] or [0.0, middle]
            ask["count"] = ask["count"] or list(_PLANE_COUNT)
    for _, holder, key in _material_places(tables):
        spec = holder[key]
        holder[key] = [_located(item, folder) for item in spec] if isinstance(spec, list) else _located(spec, folder)


def _values(value: object) -> list:
    """The values of a key: those of a series, or the one."""
    if value is None:
        return []
    return list(value) if isinstance(value, list) else [value]


def _numbers(value: object) -> list[float]:
    return [item for item in _values(value) if isinstance(item, float)]


def _placed(tables: Mapping) -> Iterator[tuple[str, dict]]:
    """Every body that has a place of its own: particles, and the parts of unions."""
    for number, particle in enumerate(tables["particle"], 1):
        parts = particle.get("parts")
        if isinstance(parts, list):
            yield from ((f"particle[{number}].parts[{i}]", part) for i, part in enumerate(parts, 1) if "gap_nm" in part)
        elif "gap_nm" in particle:
            yield f"particle[{number}]", particle


def _particles(tables: Mapping) -> Iterator[Problem]:
    for where, body in _placed(tables):
        if body["center_nm"] is not None:
            for key in ("gap_nm", "center_xy_nm"):
                if body[key] is not None:
                    yield Problem(f"{where}.{key}", body[key], f"either {key} or center_nm", "Leave one of the two out.")
        for gap in _numbers(body["gap_nm"]):
            if 0.0 < gap < SMALLEST_GAP_NM:
                allowed = f"0 (it touches) or at least {SMALLEST_GAP_NM:g} nm"
                yield Problem(f"{where}.gap_nm", gap, allowed, "In narrower gaps electrons tunnel and bulk optical constants do not hold.")


def _collector_name(tables: Mapping, number: int) -> str:
    collector = tables["collector"][number]
    if len(tables["collector"]) == 1 or number == 0:
        return "objective" if collector["na"] is not None else "collector"
    return f"collector {number + 1}"


def _collectors(tables: Mapping) -> Iterator[Problem]:
    names: list[str] = []
    for number, collector in enumerate(tables["collector"]):
        where = f"collector[{number + 1}]"
        polar = collector["polar_deg"]
        if (collector["na"] is None) == (polar is None):
            received = REQUIRED if polar is None else f"na = {collector['na']} and polar_deg = {polar}"
            yield Problem(where, received, "either na, a cone about the surface normal, or polar_deg = [low, high]")
        if isinstance(polar, list) and all(isinstance(edge, float) for edge in polar) and len(polar) == 2:
            yield from _polar(where, collector, *polar)
        azimuth = collector["azimuth_deg"]
        if isinstance(azimuth, list) and len(_numbers(azimuth)) == 2 and azimuth[1] - azimuth[0] > 360.0:
            yield Problem(f"{where}.azimuth_deg", azimuth, "[low, high] at most 360 apart")
        name = collector["name"] or _collector_name(tables, number)
        if name in names:
            yield Problem(f"{where}.name", name, "a name that no other collector has")
        names.append(name)


def _polar(where: str, collector: Mapping, low: float, high: float) -> Iterator[Problem]:
    if low < 90.0 < high:
        allowed = "[low, high] within 0..90 (above) or within 90..180 (below)"
        yield Problem(f"{where}.polar_deg", [low, high], allowed, "Take two collectors for the two sides.")
    elif collector["side"] is not None and (collector["side"] == "above") != (high <= 90.0):
        side = "above" if high <= 90.0 else "below"
        yield Problem(f"{where}.side", collector["side"], f"{side!r} for these polar angles", "Leave side out: polar_deg says it already.")


def _emitters(tables: Mapping) -> Iterator[Problem]:
    for number, emitter in enumerate(tables["emitter"], 1):
        position = emitter["position_nm"]
        if isinstance(position, list) and len(position) == 3:
            for z in _numbers(position[2]):
                if z <= 0.0:
                    yield Problem(f"emitter[{number}].position_nm.z", z, "above 0", "Emitters sit in the host, above the stack's top at z = 0.")


def _asks(tables: Mapping) -> Iterator[Problem]:
    if tables["ask"] == []:
        yield Problem("ask", REQUIRED, "at least one [[ask]] with what = " + ", ".join(repr(word) for word in _NEEDS))
    seen: list[str] = []
    for number, ask in enumerate(tables["ask"] or [], 1):
        what, where = ask.get("what"), f"ask[{number}]"
        if not isinstance(what, str) or what not in _NEEDS:
            continue
        if what in seen and what != "near field":
            yield Problem(f"{where}.what", what, "each question once", "Leave the second one out.")
        seen.append(what)
        needed = _NEEDS[what]
        if not any(tables[table] for table in needed):
            words = " or ".join(_BRACKETS[table] for table in needed)
            yield Problem(f"{where}.what", what, f"a question for which the case has what it needs: {words}", f"Add {words}.")
        lone_light = what == "far field" and not tables["emitter"]
        if (what in _PARTICLE_QUESTIONS or lone_light) and not tables["particle"]:
            yield Problem(f"{where}.what", what, "a question about a case with a [[particle]]", "Without a particle nothing is scattered.")
        if what == "near field":
            yield from _near_field(where, ask, bool(tables["particle"]))


def _near_field(where: str, ask: Mapping, with_particles: bool) -> Iterator[Problem]:
    for number, point in enumerate(ask["points_nm"] or [], 1):
        if with_particles and isinstance(point, list) and point[2] < 0.0:
            yield Problem(f"{where}.points_nm[{number}]", point, "z at least 0", _ONLY_ABOVE)
    if ask["plane"] is None:
        if not ask["points_nm"]:
            yield Problem(where, REQUIRED, "points_nm = [[x, y, z], ...], or plane with size_nm, or both")
        for key in ("at_nm", "size_nm", "center_nm", "count"):
            if ask[key] is not None:
                yield Problem(f"{where}.{key}", ask[key], "this key together with plane", "Add plane = \"xz\", \"yz\" or \"xy\".")
        return
    if ask["size_nm"] is None:
        yield Problem(f"{where}.size_nm", REQUIRED, "[width, height] of the plane in nm")
    if ask["plane"] == "xy":
        if ask["at_nm"] is None or (with_particles and isinstance(ask["at_nm"], float) and ask["at_nm"] <= 0.0):
            yield Problem(f"{where}.at_nm", REQUIRED if ask["at_nm"] is None else ask["at_nm"], "the height of the plane in nm, above 0")
        return
    size, center = _numbers(ask["size_nm"]), _numbers(ask["center_nm"])
    if with_particles and len(size) == 2 and len(center) == 2 and center[1] - 0.5 * size[1] < 0.0:
        allowed = f"a plane above the surface: center_nm[2] at least {0.5 * size[1]:g}"
        yield Problem(f"{where}.center_nm", ask["center_nm"], allowed, _ONLY_ABOVE)


def _points(axes: Sequence[Axis]) -> Iterator[Problem]:
    count = point_count(axes)
    if count > MOST_POINTS:
        product = " x ".join(f"{len(axis.values)} ({axis.key})" for axis in axes)
        yield Problem("series", f"{count} points = {product}", f"at most {MOST_POINTS} points", "Shorten a series or split the case.")


# ---- materials


def material_specs(tables: Mapping) -> list[tuple[str, object]]:
    """Every material of a case as (key, specification), those of a series one by one."""
    return [(where, spec) for where, holder, key in _material_places(tables) for spec in _values(holder[key])]


def _material_places(tables: Mapping) -> Iterator[tuple[str, dict, str]]:
    yield "stack.host", tables["stack"], "host"
    for number, film in enumerate(tables["stack"]["films"], 1):
        yield f"stack.films[{number}].material", film, "material"
    yield "stack.base", tables["stack"], "base"
    for number, particle in enumerate(tables["particle"], 1):
        yield from _particle_places(f"particle[{number}]", particle)


def _particle_places(where: str, particle: Mapping) -> Iterator[tuple[str, dict, str]]:
    if particle.get("material") is not None:
        yield f"{where}.material", particle, "material"
    if isinstance(particle.get("around"), dict):
        yield from _particle_places(f"{where}.around", particle["around"])
    for number, part in enumerate(particle.get("parts") or (), 1):
        if isinstance(part, dict):
            yield from _particle_places(f"{where}.parts[{number}]", part)


def _located(spec: object, folder: Path) -> object:
    """A table file's name as seen from the case file's folder; everything else as it is."""
    if isinstance(spec, str) and spec and (folder / spec).is_file():
        return str(folder / spec)
    return spec


def wavelengths(tables: Mapping) -> list[float]:
    """All wavelengths of the light and of the emitters."""
    sources = [tables["light"]] if tables["light"] else []
    found = {value for source in (*sources, *tables["emitter"]) for value in _numbers(source.get("wavelength_nm"))}
    return sorted(value for value in found if math.isfinite(value))


def _materials(tables: Mapping, folder: Path) -> Iterator[Problem]:
    from substrate.medium.material import material

    used = wavelengths(tables)
    for where, spec in material_specs(tables):
        if not isinstance(spec, (str, float)):
            continue  # noted already
        try:
            found = material(_located(spec, folder), where)
        except InputError as error:
            yield from error.problems or [Problem(where, spec, "a material", str(error))]
            continue
        if found.range_nm is None or not used:
            continue
        low, high = found.range_nm
        outside = [value for value in used if not low <= value <= high]
        if outside:
            words = ", ".join(f"{value:g}" for value in outside[:3]) + (" ..." if len(outside) > 3 else "")
            allowed = f"{low:g} to {high:g} nm, the range of its table ({found.citation})"
            yield Problem(where, f"{spec} at {words} nm", allowed, "Tables are never extrapolated.")
