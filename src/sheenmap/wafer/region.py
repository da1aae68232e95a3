"""The part as found in the picture."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray


@dataclass(frozen=True, kw_only=True)
class Disc:
    """A round part in the picture: centre and radius in pixels (centre of the first pixel is 0, 0).

    ``notch_deg`` is where the notch or flat points, counter-clockwise from the picture's +x as a viewer sees it (y up), or
    None when none was found. ``flat_px`` is how deep a flat cuts in (0: a notch, or none). ``u_px`` is the standard uncertainty
    of the fitted centre and radius. ``rim_share`` is the share of the full turn whose rim supports the fit, and ``in_frame``
    the share that the picture shows at all: below 1 the frame cuts the part.

    A tilted disc looks oval; (s, t) = ``oval`` is (0, 0) for a round one. With M = [[1 + s, t], [t, 1 - s]] / (1 - |oval|),
    M times a pixel's offset from the centre (y down) is its offset as seen from straight above; radius, notch and flat are
    as seen so.
    """

    x_px: float
    y_px: float
    radius_px: float
    u_px: float = 0.0
    notch_deg: float | None = None
    flat_px: float = 0.0
    rim_share: float = 1.0
    in_frame: float = 1.0
    oval: tuple[float, float] = (0.0, 0.0)


@dataclass(frozen=True, kw_only=True, eq=False)
class Region:
    """Pixels that are measured, and the part's coordinates.

    Parameters
    ----------
    inside : (H, W) bool
        True where the recipe's region is, the edge exclusion left out.
    origin_px : (x, y)
        The part's centre in the picture.
    mm_per_px : float or None
        Scale; None when the recipe gives none.
    disc : Disc or None
        The whole disc, edge exclusion not yet taken off.
    rotation_deg : float
        Turns picture axes (x right, y up) into part axes with the notch down, counter-clockwise.
    edge_exclusion_mm : float
        The rim that ``inside`` leaves out.
    """

    inside: BoolArray
    origin_px: tuple[float, float]
    mm_per_px: float | None = None
    disc: Disc | None = None
    rotation_deg: float = 0.0
    edge_exclusion_mm: float = 0.0


@dataclass(frozen=True, kw_only=True, eq=False)
class Sites:
    """Where values are read: (S,) positions in mm (part axes, y up) and in pixels, and the radius of each spot."""

    layout: str
    x_mm: NDArray[np.float64]
    y_mm: NDArray[np.float64]
    x_px: NDArray[np.float64]
    y_px: NDArray[np.float64]
    radius_mm: float
    radius_px: float
