"""[region], [sites] and [tolerance]: where the part is, what is read of it, what is asked of it."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.errors import CurveError, Fault, PictureError
from sheenmap.pictures import read_mask
from sheenmap.recipe.files import Folder, csv_header, is_csv
from sheenmap.recipe.reader import Reader, is_number, shown
from sheenmap.uniformity import FORMULAS, Tolerance, tolerance_faults
from sheenmap.wafer import RegionSpec, SiteSpec

SHAPES = ("frame", "disc", "polygon", "mask")
DIRECTIONS = ("down", "up", "left", "right")
RINGS = ("rings-5", "rings-9", "rings-13", "rings-25", "rings-49")
LAYOUTS = f'{", ".join(RINGS)}, "grid 10" (pitch in mm), or a CSV x_mm,y_mm'
SITE_COLUMNS = "x_mm,y_mm"


def read_region(reader: Reader | None, folder: Folder) -> RegionSpec:
    """The region; the whole frame when the recipe has none."""
    if reader is None:
        return RegionSpec()
    shape = reader.choice("shape", SHAPES, "frame")
    diameter_mm = reader.number("diameter_mm", None, low=0.0, high=2000.0, open_low=True)
    exclusion_mm = reader.number("edge_exclusion_mm", 0.0, low=0.0, high=1000.0)
    width_mm = reader.number("width_mm", None, low=0.0, high=1e5, open_low=True)
    notch = reader.choice("notch", DIRECTIONS, "down")
    points, mask = _points(reader), _mask(reader, folder)
    reader.not_supported(["parts", "die"])
    if diameter_mm is not None and 2 * exclusion_mm >= diameter_mm:
        reader.fault("edge_exclusion_mm", f"found {exclusion_mm:g}", f"below the radius, {diameter_mm / 2:g} mm")
    if exclusion_mm > 0 and diameter_mm is None and width_mm is None:
        reader.fault("diameter_mm", "nothing", "the scale for edge_exclusion_mm: diameter_mm of a disc, or width_mm of the frame")
    for key, needed in (("points", "polygon"), ("mask", "mask")):
        if (key in reader.table) != (shape == needed):
            found = "nothing" if shape == needed else f"found with shape {shape}"
            reader.fault(key, found, f"goes with shape = {needed!r}, and is needed there")
    reader.finish()
    return RegionSpec(
        shape=shape, diameter_mm=diameter_mm, edge_exclusion_mm=exclusion_mm, width_mm=width_mm, notch=notch,  # type: ignore[arg-type]
        points=points, mask=mask,
    )  # fmt: skip


def _points(reader: Reader) -> NDArray[np.float64] | None:
    value = reader.raw("points")
    if value is None:
        return None
    fits = isinstance(value, list) and len(value) >= 3
    if not fits or not all(isinstance(p, list) and len(p) == 2 and all(is_number(v) for v in p) for p in value):
        reader.fault("points", f"found {shown(value)}", "three corners or more, each [x, y] in pixels")
        return None
    return np.array(value, dtype=float)


def _mask(reader: Reader, folder: Folder) -> NDArray[np.bool_] | None:
    text = reader.text("mask", None)
    path = None if text is None else folder.path(reader, "mask", text)
    if path is None:
        return None
    try:
        return read_mask(path)
    except PictureError as fault:
        detail = f": {fault.failure.detail}" if fault.failure.detail else ""
        reader.fault("mask", f'"{text}" {fault.failure.reason}{detail}', "a PNG, white inside and black outside")
        return None


def read_sites(reader: Reader | None, folder: Folder, region: RegionSpec) -> SiteSpec | None:
    """The sites that are read, or None."""
    if reader is None:
        return None
    text = reader.text("layout", None)
    radius_mm = reader.number("radius_mm", 1.0, low=0.0, high=100.0, open_low=True)
    if text is None and "layout" not in reader.table:
        reader.fault("layout", "nothing", LAYOUTS)
    if region.diameter_mm is None and region.width_mm is None:
        reader.fault("layout", "sites without a scale", "region.diameter_mm of a disc, or region.width_mm of the frame")
    reader.finish()
    if text is None:
        return None
    if text in RINGS:
        return SiteSpec(layout=text, radius_mm=radius_mm)
    if is_csv(text):
        points_mm = _points_mm(reader, folder, text)
        return None if points_mm is None else SiteSpec(layout="points", points_mm=points_mm, radius_mm=radius_mm)
    word, _, pitch = text.partition(" ")
    try:
        pitch_mm = float(pitch)
    except ValueError:
        pitch_mm = 0.0
    if word != "grid" or not 0 < pitch_mm < 1e4:
        reader.fault("layout", f'found "{text}"', LAYOUTS)
        return None
    return SiteSpec(layout="grid", pitch_mm=pitch_mm, radius_mm=radius_mm)


def _points_mm(reader: Reader, folder: Folder, text: str) -> NDArray[np.float64] | None:
    content = folder.csv(reader, "layout", text)
    if content is None:
        return None

    def read() -> NDArray[np.float64]:
        if csv_header(content).replace(" ", "") != SITE_COLUMNS:
            raise CurveError(f"header {csv_header(content)[:60]!r}; allowed: {SITE_COLUMNS}")
        rows = [line for line in content.splitlines() if line.strip() and not line.lstrip().startswith("#")][1:]
        try:
            points = np.array([[float(field) for field in row.split(",")] for row in rows])
        except ValueError:
            raise CurveError("rows that are not two numbers") from None
        if points.ndim != 2 or points.shape[1] != 2 or not np.all(np.isfinite(points)):
            raise CurveError("rows that are not two finite numbers")
        return points

    return reader.attempt("layout", read, found=f'"{text}"')


def read_tolerance(reader: Reader | None, *, has_region: bool) -> Tolerance | None:
    """What is asked of the part, or None."""
    if reader is None:
        return None
    if not has_region:
        found, allowed = "a tolerance without [region]", 'a [region] that says what is judged, if only shape = "frame"'
        reader.faults.append(Fault(key=reader.path, found=found, allowed=allowed))
    before = len(reader.faults)
    tolerance = Tolerance(
        target_nm=reader.number("target_nm", None, low=0.0, high=1e6),
        plus_nm=reader.number("plus_nm", None, low=0.0, high=1e6),
        minus_nm=reader.number("minus_nm", None, low=0.0, high=1e6),
        nonuniformity_percent=reader.number("nonuniformity_percent", None, low=0.0, high=100.0, open_low=True),
        formula=reader.choice("formula", tuple(FORMULAS), "half-range over mean"),
        rule=reader.choice("rule", ("shared risk", "guarded"), "guarded"),  # type: ignore[arg-type]
        risk=reader.number("risk", 0.05, low=0.0, high=0.5, open_low=True, open_high=True),
        scope=reader.choice("scope", ("sites", "area", "mean"), "sites"),  # type: ignore[arg-type]
        max_defect_percent=reader.number("max_defect_percent", None, low=0.0, high=100.0),
        min_claimed_percent=reader.number("min_claimed_percent", None, low=0.0, high=100.0),
        max_outside_percent=reader.number("max_outside_percent", 1.0, low=0.0, high=100.0),
    )
    reader.finish()
    if len(reader.faults) == before:
        reader.faults.extend(tolerance_faults(tolerance))
    return tolerance
