"""What a recipe asks for about the part: where it is and which sites are read."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Shape = Literal["frame", "disc", "polygon", "mask"]
Direction = Literal["down", "up", "left", "right"]


@dataclass(frozen=True, kw_only=True, eq=False)
class RegionSpec:
    """Where the part is.

    Parameters
    ----------
    shape : "frame", "disc", "polygon" or "mask"
    diameter_mm, edge_exclusion_mm : float
        Of a disc; the rim of ``edge_exclusion_mm`` is left out.
    width_mm : float or None
        Width of the whole frame, for the scale of the other shapes.
    notch : where the notch or flat points in the picture.
    points : (P, 2) float or None
        Corners x, y of a polygon in pixels of the picture (centre of the first pixel is 0, 0).
    mask : (H, W) bool or None
        True inside.
    """

    shape: Shape = "frame"
    diameter_mm: float | None = None
    edge_exclusion_mm: float = 0.0
    width_mm: float | None = None
    notch: Direction = "down"
    points: NDArray[np.float64] | None = None
    mask: NDArray[np.bool_] | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class SiteSpec:
    """Which sites are read: a named layout, a grid pitch, or points in millimetres; and the radius of each spot.

    ``layout`` is "rings-5", "rings-9", "rings-13", "rings-25", "rings-49", "grid" (with ``pitch_mm``) or "points"
    (with ``points_mm`` (S, 2): x to the right, y up, from the part's centre with the notch down).
    """

    layout: str
    pitch_mm: float | None = None
    points_mm: NDArray[np.float64] | None = None
    radius_mm: float = 1.0
