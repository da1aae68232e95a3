"""Between pixels of the picture and millimetres on the part.

Picture: x to the right, y down, the centre of the first pixel is 0, 0. Part: millimetres from its centre, x to the right,
y up, the notch down. Where a disc is oval, its tilt is undone first.
"""

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.wafer.faults import RegionError
from sheenmap.wafer.region import Disc, Region


def scale(region: Region) -> float:
    """Millimetres a pixel.

    Raises
    ------
    RegionError
        The recipe gives no scale.
    """
    if region.mm_per_px is None:
        raise RegionError(
            "millimetres need a scale: give region.diameter_mm for a disc, or region.width_mm for the frame's width"
        )
    return region.mm_per_px


def part_mm(region: Region, x_px: FloatArray | float, y_px: FloatArray | float) -> tuple[FloatArray, FloatArray]:
    """Part coordinates in millimetres of points in the picture; shapes broadcast. Raises ``RegionError`` without a scale."""
    mm_per_px = scale(region)
    dx, dy = from_above(region.disc, np.asarray(x_px, float) - region.origin_px[0], np.asarray(y_px, float) - region.origin_px[1])
    right, up = dx * mm_per_px, -dy * mm_per_px
    cosine, sine = _turn(region.rotation_deg)
    return cosine * right - sine * up, sine * right + cosine * up


def picture_px(region: Region, x_mm: FloatArray | float, y_mm: FloatArray | float) -> tuple[FloatArray, FloatArray]:
    """Places in the picture of points on the part; the inverse of ``part_mm``."""
    mm_per_px = scale(region)
    cosine, sine = _turn(region.rotation_deg)
    x, y = np.asarray(x_mm, float), np.asarray(y_mm, float)
    right, up = cosine * x + sine * y, cosine * y - sine * x
    dx, dy = _as_tilted(region.disc, right / mm_per_px, -up / mm_per_px)
    return region.origin_px[0] + dx, region.origin_px[1] + dy


def distance_mm(region: Region) -> FloatArray:
    """Distance of every pixel from the part's centre, (H, W) mm."""
    height, width = region.inside.shape
    x = np.arange(width, dtype=np.float64) - region.origin_px[0]
    y = np.arange(height, dtype=np.float64)[:, None] - region.origin_px[1]
    return np.asarray(np.hypot(*from_above(region.disc, x, y)) * scale(region))


def from_above(disc: Disc | None, dx: FloatArray, dy: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Pixels from the centre (y down) as they would lie if a tilted disc were seen from straight above."""
    if disc is None or disc.oval == (0.0, 0.0):
        return dx, dy
    s, t = disc.oval
    stretch = 1 / (1 - float(np.hypot(s, t)))
    return stretch * ((1 + s) * dx + t * dy), stretch * (t * dx + (1 - s) * dy)


def _as_tilted(disc: Disc | None, dx: FloatArray, dy: FloatArray) -> tuple[FloatArray, FloatArray]:
    """The inverse of ``from_above``."""
    if disc is None or disc.oval == (0.0, 0.0):
        return dx, dy
    s, t = disc.oval
    shrink = (1 - float(np.hypot(s, t))) / (1 - s * s - t * t)
    return shrink * ((1 - s) * dx - t * dy), shrink * ((1 + s) * dy - t * dx)


def _turn(rotation_deg: float) -> tuple[float, float]:
    """Cosine and sine, exact at quarter turns so that a notch that is down leaves coordinates as they are."""
    quarter = rotation_deg / 90
    if quarter == round(quarter):
        return ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))[round(quarter) % 4]
    angle_rad = np.deg2rad(rotation_deg)
    return float(np.cos(angle_rad)), float(np.sin(angle_rad))
