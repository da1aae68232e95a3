"""[sites]: which places of the part are read."""

import math

import numpy as np
from numpy.typing import NDArray

from sheenmap.errors import CurveError
from sheenmap.recipe.files import Folder, csv_header, is_csv
from sheenmap.recipe.reader import Reader, did_you_mean, shown
from sheenmap.wafer import RegionSpec, SiteSpec

RINGS = ("rings-5", "rings-9", "rings-13", "rings-25", "rings-49")
LAYOUTS = f'{", ".join(RINGS)}, "grid 10" (its pitch in mm), or a CSV x_mm,y_mm'
COLUMNS = "x_mm,y_mm"
WIDEST_PITCH_MM, WIDEST_SPOT_MM = 1e4, 100.0


def read_sites(reader: Reader | None, folder: Folder, region: RegionSpec) -> SiteSpec | None:
    """The sites that are read, or None."""
    if reader is None:
        return None
    reader.require("layout", LAYOUTS)
    text = reader.text("layout", None)
    radius_mm = reader.number("radius_mm", 1.0, low=0.0, high=WIDEST_SPOT_MM, open_low=True)
    reader.finish()
    if text is None:
        return None
    if region.diameter_mm is None and region.width_mm is None:
        reader.fault("layout", "sites without a scale", "region.diameter_mm of a disc, or region.width_mm, with them")
    if text in RINGS:
        if region.shape != "disc":
            reader.fault("layout", f'found {shown(text)} with region.shape = "{region.shape}"', "rings on a disc")
        return SiteSpec(layout=text, radius_mm=radius_mm)
    if is_csv(text):
        points_mm = _points_mm(reader, folder, text)
        return None if points_mm is None else SiteSpec(layout="points", points_mm=points_mm, radius_mm=radius_mm)
    pitch_mm = _pitch_mm(text)
    if pitch_mm is None:
        reader.fault("layout", f"found {shown(text)}", LAYOUTS, did_you_mean(text, (*RINGS, "grid 10")))
        return None
    return SiteSpec(layout="grid", pitch_mm=pitch_mm, radius_mm=radius_mm)


def _pitch_mm(text: str) -> float | None:
    word, _, pitch = text.partition(" ")
    try:
        pitch_mm = float(pitch)
    except ValueError:
        return None
    return pitch_mm if word == "grid" and 0 < pitch_mm <= WIDEST_PITCH_MM else None


def _points_mm(reader: Reader, folder: Folder, text: str) -> NDArray[np.float64] | None:
    content = folder.csv(reader, "layout", text)
    return None if content is None else reader.attempt("layout", lambda: _parsed(content), found=shown(text))


def _parsed(content: str) -> NDArray[np.float64]:
    if csv_header(content) != COLUMNS:
        raise CurveError(f"header {shown(csv_header(content))}; allowed: {COLUMNS}")
    lines = enumerate(content.splitlines(), start=1)
    rows = [(number, line) for number, line in lines if line.strip() and not line.lstrip().startswith("#")][1:]
    if not rows:
        raise CurveError(f"no rows; allowed: one row {COLUMNS} for each site")
    return np.array([_point(line, number) for number, line in rows])


def _point(line: str, number: int) -> list[float]:
    try:
        point = [float(field) for field in line.split(",")]
    except ValueError:
        point = []
    if len(point) != 2 or not all(math.isfinite(value) for value in point):
        raise CurveError(f"{shown(line.strip())} on line {number}; allowed: two finite numbers {COLUMNS}")
    return point
