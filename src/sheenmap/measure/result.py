"""What a map holds: the arrays, what is said of them, and how they came about."""

from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from sheenmap.flags import FlagArray
from sheenmap.uniformity import SiteReading, Statistics, Verdict
from sheenmap.wafer import Region


@dataclass(frozen=True, kw_only=True)
class BudgetLine:
    """One contribution to the uncertainty, in nm at the median of the map; ``shared`` ones do not shrink by averaging."""

    name: str
    u_nm: float
    shared: bool
    note: str = ""


@dataclass(frozen=True, kw_only=True, eq=False)
class Measurement:
    """One photograph, measured.

    Parameters
    ----------
    thickness_nm, sigma_nm : (H, W) float32
        NaN where nothing is claimed (sigma may stand where a value exists but is blocked).
    flags : (H, W) uint16
        Bits of ``sheenmap.flags``.
    candidates_nm, candidate_odds : (K, H, W) float32 or None
        The other thicknesses that fit each pixel, best first, and their odds; NaN where none.
    residual : (H, W) float32
        Goodness of fit: chi-square of the residual divided by its expectation, about 1 on a clean film.
    preview : (h, w, 3) uint8
        The photograph as sRGB for the report, at most about 1600 pixels wide; ``preview_scale`` is w / W.
    u_common_nm : float
        Standard uncertainty that all pixels share, at the median thickness.
    sentence : str
        What the map amounts to, in one line; the reason when nothing can be claimed.
    is_measured : bool
        False when so little is claimed that there is no map to speak of.
    notes : tuple of str
        Hints and findings about the set-up, each with its evidence.
    history : tuple of str
        Each step from file to map, in order.
    provenance : dict
        Version, hashes and settings that are needed to redo the map.
    """

    title: str
    thickness_nm: NDArray[np.float32]
    sigma_nm: NDArray[np.float32]
    flags: FlagArray
    residual: NDArray[np.float32]
    preview: NDArray[np.uint8]
    preview_scale: float
    region: Region
    statistics: Statistics
    sentence: str
    is_measured: bool = True
    candidates_nm: NDArray[np.float32] | None = None
    candidate_odds: NDArray[np.float32] | None = None
    sites: tuple[SiteReading, ...] = ()
    nonuniformity_percent: dict[str, float | None] = field(default_factory=dict)
    verdict: Verdict | None = None
    budget: tuple[BudgetLine, ...] = ()
    u_common_nm: float = 0.0
    notes: tuple[str, ...] = ()
    history: tuple[str, ...] = ()
    provenance: dict[str, Any] = field(default_factory=dict)
