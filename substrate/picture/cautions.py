"""What the reader must know before acting on the numbers, as far as it concerns the case."""

from __future__ import annotations

from substrate.run.results import Results

MODEL = (
    "The model is linear and uses local bulk optical constants: no heating, bleaching, saturation or damage, and no tunnelling or non-local "
    "response, which matter in gaps of about a nanometre and in films and particles of a few."
)
LASER = (
    "Light powers and intensities here are model inputs and no laser-safety calculation: follow IEC 60825-1 or ANSI Z136.1 and the local "
    "laser safety officer. Focused light comes back from wafers and mirrors into eyepieces and cameras."
)
NANOMATERIALS = "Handle nanoparticles by local rules; NIOSH 2012-147 is a general guide for laboratories."
WAFER = (
    "A scattering signal is no basis for accepting or rejecting a wafer without a calibration with certified spheres (SEMI M53); sizes "
    "found from it are sphere-equivalent ones."
)
HOT_SPOT = "The largest value of a map depends on the grid at sharp corners: take the values at stated points, which have bars."
LIFETIME = "Lifetimes and yields assume that the intrinsic rates of the emitter do not change with its surroundings."


def cautions(results: Results) -> list[str]:
    """The cautions that this case calls for."""
    sketch = results.sketch
    asks = {ask for point in results.points for ask in point.quantities}
    has_map = any("field_map_e2" in name for point in results.points for name in point.arrays)
    has_light = sketch is not None and sketch.light is not None
    base = sketch.layers[-1]["name"].lower() if sketch is not None else ""
    on_silicon = base.startswith("silicon") and "nitride" not in base
    scatter = "cross_sections" in asks or "far_field" in asks
    scattered = [point.quantities.get(ask, {}) for point in results.points for ask in ("cross_sections", "far_field")]
    collected = any("collected/" in name for named in scattered for name in named)
    called = (
        (MODEL, True),
        (LASER, has_light or bool({"cross_sections", "near_field", "reflectance"} & asks)),
        (NANOMATERIALS, sketch is not None and bool(sketch.outlines)),
        (WAFER, scatter and (on_silicon or collected)),
        (HOT_SPOT, has_map),
        (LIFETIME, "emission" in asks),
    )
    return [words for words, is_called in called if is_called]
