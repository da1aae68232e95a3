"""[region]: where the part is in the picture."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.errors import PictureError
from sheenmap.pictures import read_mask
from sheenmap.recipe.files import Folder
from sheenmap.recipe.reader import Reader, as_number, shown
from sheenmap.wafer import RegionSpec

SHAPES = ("frame", "disc", "polygon", "mask")
DIRECTIONS = ("down", "up", "left", "right")
WIDEST_DISC_MM, WIDEST_FRAME_MM, WIDEST_RIM_MM = 2000.0, 1e5, 1000.0
BELONGS = {"diameter_mm": "disc", "points": "polygon", "mask": "mask"}


def read_region(reader: Reader | None, folder: Folder) -> RegionSpec:
    """The region; the whole frame when the recipe has none."""
    if reader is None:
        return RegionSpec()
    shape = reader.choice("shape", SHAPES, "frame")
    diameter_mm = reader.number("diameter_mm", None, low=0.0, high=WIDEST_DISC_MM, open_low=True)
    width_mm = reader.number("width_mm", None, low=0.0, high=WIDEST_FRAME_MM, open_low=True)
    spec = RegionSpec(
        shape=shape,  # type: ignore[arg-type]
        diameter_mm=diameter_mm,
        edge_exclusion_mm=_exclusion(reader, diameter_mm, width_mm),
        width_mm=width_mm,
        notch=reader.choice("notch", DIRECTIONS, "down"),  # type: ignore[arg-type]
        points=_points(reader),
        mask=_mask(reader, folder),
    )
    _check_belonging(reader, shape)
    reader.not_supported(["parts", "die"])
    reader.finish()
    return spec


def _exclusion(reader: Reader, diameter_mm: float | None, width_mm: float | None) -> float:
    exclusion_mm = reader.number("edge_exclusion_mm", 0.0, low=0.0, high=WIDEST_RIM_MM)
    if diameter_mm is not None and 2 * exclusion_mm >= diameter_mm:
        reader.fault("edge_exclusion_mm", f"found {exclusion_mm:g}", f"below the radius, {diameter_mm / 2:g}")
    if exclusion_mm > 0 and diameter_mm is None and width_mm is None:
        reader.fault(
            "edge_exclusion_mm", f"found {exclusion_mm:g} without a scale", "diameter_mm of a disc, or width_mm, with it"
        )
    return exclusion_mm


def _check_belonging(reader: Reader, shape: str) -> None:
    for key, needs in BELONGS.items():
        if key in reader.table and shape != needs:
            reader.fault(key, f'found with shape = "{shape}"', f'goes with shape = "{needs}"')
        if key not in reader.table and shape == needs != "disc":
            reader.fault(key, "nothing", f'what shape = "{needs}" is made of')


def _points(reader: Reader) -> NDArray[np.float64] | None:
    value = reader.raw("points")
    if value is None:
        return None
    corners = value if isinstance(value, list) else []
    numbers = [[as_number(item) for item in corner] for corner in corners if isinstance(corner, list) and len(corner) == 2]
    fits = len(corners) >= 3 and len(numbers) == len(corners)
    if not fits or any(item is None for corner in numbers for item in corner):
        reader.fault("points", f"found {shown(value)}", "three corners or more, each [x, y] in pixels")
        return None
    return np.array(numbers, dtype=float)


def _mask(reader: Reader, folder: Folder) -> NDArray[np.bool_] | None:
    text = reader.text("mask", None)
    path = None if text is None else folder.path(reader, "mask", text)
    if path is None:
        return None
    try:
        mask = read_mask(path)
    except PictureError as fault:
        detail = f", {fault.failure.detail}" if fault.failure.detail else ""
        reader.fault("mask", f"found {shown(text)}: {fault.failure.reason}{detail}", "a PNG, white inside and black outside")
        return None
    if not mask.any():
        reader.fault("mask", f"found {shown(text)}: black everywhere", "a PNG, white inside and black outside")
    return mask
