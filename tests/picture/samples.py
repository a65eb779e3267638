"""Made-up results of the three kinds of user, for the figures and the report."""

from dataclasses import replace

import numpy as np

from substrate.quantity import Quantity
from substrate.run.results import ArrayResult, MaterialTable, PointResult, Results, Sketch

ANGLES = np.linspace(0.0, 2.0 * np.pi, 60)


def _sketch(emitters=(), light=None, thickness=60.0) -> Sketch:
    layers = [
        {"name": "water", "thickness_nm": None, "index_text": "1.33"},
        {"name": "gold", "thickness_nm": thickness, "index_text": "0.18+3.4i"},
        {"name": "silica", "thickness_nm": 1.5, "index_text": "1.46"},
        {"name": "silicon", "thickness_nm": None, "index_text": "3.88+0.02i"},
    ]
    ball = {"name": "sphere 1, gold", "x_nm": (30 * np.cos(ANGLES)).tolist(), "z_nm": (35 + 30 * np.sin(ANGLES)).tolist()}
    collectors = [
        {"name": "objective", "side": "above", "half_angle_deg": 40.0},
        {"name": "ring <b>", "side": "above", "polar_deg": [25.0, 72.0]},
    ]
    return Sketch(layers, [ball], list(emitters), light, collectors)


def _results(title, points, sketch, case="title = 'made up'\n[stack]\nhost = '<script>'\n") -> Results:
    materials = {"silicon": MaterialTable(np.array([[400.0, 5.0, 0.3], [800.0, 3.7, 0.0]]), "A. Author, J. Made-up 1, 1 (1900)", "crystal", (400.0, 800.0))}
    return Results(title, "0.0", "2000-01-01T00:00:00", case, {}, materials, sketch, tuple(points), len(points))


def hot_spot() -> Results:
    """One point with everything: cross sections, spot, map, pattern, convergence."""
    u, v = np.linspace(-50, 50, 31), np.linspace(1, 81, 25)
    grid = np.meshgrid(u, v, indexing="ij")
    values = 1.0 + 900.0 * np.exp(-(grid[0] ** 2 + grid[1] ** 2) / 80.0)
    inside = (grid[0] ** 2 + (grid[1] - 35) ** 2 < 900).astype(np.uint8)
    polar, azimuth = np.linspace(0, 180, 19), np.arange(0, 360, 30.0)
    pattern = np.cos(np.radians(polar))[:, None] ** 2 * (2.0 + np.cos(np.radians(azimuth)))
    h = np.linspace(1.0, 2.0, 9)
    axes = (("x", "nm"), ("z", "nm"))
    arrays = {
        "field_map_e2": ArrayResult(values, "1", "|E|^2", axes, None, {"plane": "xz at y = 0 nm"}),
        "field_map_u_nm": ArrayResult(u, "nm", "x", (("x", "nm"),)),
        "field_map_v_nm": ArrayResult(v, "nm", "z", (("z", "nm"),)),
        "field_map_inside": ArrayResult(inside, "1", "inside", axes),
        "pattern": ArrayResult(pattern, "nm^2/sr", "dC/dOmega", (("polar", "deg"), ("azimuth", "deg"))),
        "pattern_polar_deg": ArrayResult(polar, "deg", "polar", (("polar", "deg"),)),
        "pattern_azimuth_deg": ArrayResult(azimuth, "deg", "azimuth", (("azimuth", "deg"),)),
        "convergence/work/cell_nm": ArrayResult(h, "nm", "cell"),
        "convergence/work/values": ArrayResult(100.0 + 2.0 * h, "nm^2", "work"),
        "convergence/work/fit": ArrayResult(np.array([100.0, 2.0, 0.0]), "nm^2", "fit", (), 1.5),
    }
    cross = {
        "absorbed": Quantity(60.0, 1.0, "nm^2", "power absorbed"),
        "up": Quantity(30.0, 2.0, "nm^2", "power up"),
        "down": Quantity(0.0, 0.0, "nm^2", "power down"),
        "stack": Quantity(10.0, None, "nm^2", "power to the stack"),
        "work": Quantity(100.0, 1.5, "nm^2", "power spent"),
        "balance": Quantity(1e-6, 1e-5, "1", "closure"),
    }
    spots = {"spot_1": Quantity(812.0, 31.0, "1", "|E|^2 at (0, 0, 1) nm")}
    point = PointResult("", {}, method="coupled dipoles", warnings=("spot 1 is <near>",), seconds=12.0, quantities={"cross_sections": cross, "near_field": spots}, arrays=arrays)
    return _results("Gap & <spot>", [point], _sketch(light={"angle_deg": 65.0, "side": "above", "polarization": "p"}))


def lifetimes() -> Results:
    """A series over height with one failed point."""
    points = []
    for i, z in enumerate(np.linspace(5, 300, 12)):
        total = 1.0 + 400.0 / z**1.5
        quantities = {"emission": {"total": Quantity(total, 0.01 * total, "1", "total decay-rate factor"), "lifetime_ns": Quantity(3.5 / total, None, "ns", "lifetime")}}
        label, parameters = f"z = {z:g}", {"emitter[1].position_nm.z": float(z)}
        points.append(PointResult(label, parameters, "finished", quantities=quantities) if i != 4 else PointResult(label, parameters, "failed", "the reason & why"))
    emitter = {"x_nm": 0.0, "z_nm": 90.0, "orientation": "vertical"}
    return _results("Lifetime over a mirror", points, _sketch(emitters=[emitter], thickness=900.0))


def wafer() -> Results:
    """A product of two series, diameter and polarisation, with a pattern above; one point has not converged."""
    points = []
    polar, azimuth = np.linspace(0, 90, 7), np.arange(0, 360, 60.0)
    arrays = {
        "pattern": ArrayResult(np.sin(2.0 * np.radians(polar))[:, None] * np.ones(6), "nm^2/sr", "dC/dOmega", (("polar", "deg"), ("azimuth", "deg"))),
        "pattern_polar_deg": ArrayResult(polar, "deg", "polar", (("polar", "deg"),)),
        "pattern_azimuth_deg": ArrayResult(azimuth, "deg", "azimuth", (("azimuth", "deg"),)),
    }
    for polarization in ("s", "p"):
        for d in (60.0, 80.0, 100.0, 150.0):
            signal = 1e-9 * d**6 * (1.0 if polarization == "p" else 0.3)
            quantities = {"cross_sections": {"collected/ring": Quantity(signal, 0.02 * signal, "nm^2", "power into the ring"), "work": Quantity(3 * signal, None, "nm^2", "work")}}
            points.append(PointResult(f"{d:g} nm, {polarization}", {"particle[1].diameter_nm": d, "light.polarization": polarization}, quantities=quantities))
    points[0] = replace(points[0], arrays=arrays)
    points[3] = replace(points[3], status="not converged", message="the iteration stopped at 1e-3")
    return _results("Sizing curve", points, _sketch(light={"angle_deg": 70.0, "side": "above", "polarization": "p"}))
