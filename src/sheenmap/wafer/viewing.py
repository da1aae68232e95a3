"""The angle at which the lens sees each pixel, from where it stands."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.wafer.coordinates import from_above, scale
from sheenmap.wafer.faults import RegionError
from sheenmap.wafer.region import Region


def viewing_angle_deg(region: Region, camera_mm: tuple[float, float, float]) -> NDArray[np.float32]:
    """Angle between the part's normal and the line to the lens, for every pixel.

    Parameters
    ----------
    region : Region
        With a scale.
    camera_mm : (x, y, z)
        Where the lens stands from the part's centre: x to the right and y up in the picture (whatever way the notch points,
        as a bench stays while wafers turn), z above the part.

    Returns
    -------
    (H, W) float32
        Degrees, 0 straight above.

    Raises
    ------
    RegionError
        No scale, or a lens that is not above the part.
    """
    x_mm, y_mm, z_mm = camera_mm
    if not z_mm > 0:
        raise RegionError(f"view.camera_mm puts the lens {z_mm:g} mm above the part; its third number must be above 0")
    height, width = region.inside.shape
    mm_per_px = scale(region)
    columns = np.arange(width, dtype=np.float64) - region.origin_px[0]
    rows = np.arange(height, dtype=np.float64)[:, None] - region.origin_px[1]
    dx, dy = from_above(region.disc, columns, rows)
    aside = np.hypot(dx * mm_per_px - x_mm, -dy * mm_per_px - y_mm)
    return np.degrees(np.arctan2(aside, z_mm)).astype(np.float32)
