"""The other thicknesses that fit each pixel, with their odds."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray
from sheenmap.inversion.invert import Inversion
from sheenmap.inversion.local import pixels_at
from sheenmap.inversion.posterior import posterior_near
from sheenmap.lookup import Table

LISTED_GAP = 25.0  # chi-square over the best; odds of e^-12 and less are not listed
LISTED = 4
SEARCH_NM = 8.0


def list_candidates(
    table: Table, inversion: Inversion, angle_deg: NDArray[np.floating] | None
) -> tuple[NDArray[np.float32], NDArray[np.float32]]:
    """Other thicknesses (K, H, W) that fit each pixel that was led by a block, best first, and their odds against the best.

    A thickness is fitted to the pixel itself, near where its block has a candidate. NaN where there are fewer.
    """
    shape = inversion.flags.shape
    places, odds = np.full((LISTED, *shape), np.nan, np.float32), np.full((LISTED, *shape), np.nan, np.float32)
    rows = np.flatnonzero(inversion.block >= 0)
    block = inversion.block.ravel()[rows]
    chosen_nm = inversion.settled.thickness_nm.ravel()[block]
    pixels = pixels_at(inversion.signal, angle_deg, rows)
    gaps = np.full((rows.size, inversion.settled.rivals_nm.shape[-1]), np.inf)
    found = np.full(gaps.shape, np.nan)
    for k in range(gaps.shape[1]):
        rival_nm = inversion.settled.rivals_nm.reshape(-1, gaps.shape[1])[block, k]
        other = np.flatnonzero(np.abs(rival_nm - chosen_nm) > 2 * inversion.settled.link_nm)
        fit = posterior_near(pixels.part(other), table, rival_nm[other], np.full(other.size, SEARCH_NM), inversion.doubts)
        found[other, k] = fit.thickness_nm
        gaps[other, k] = fit.chi_square - inversion.chi_square.ravel()[rows[other]]
    _keep_best(places, odds, rows, found, gaps)
    return places, odds


def _keep_best(
    places: NDArray[np.float32], odds: NDArray[np.float32], rows: NDArray[np.intp], found: FloatArray, gaps: FloatArray
) -> None:
    gaps = np.where(gaps < LISTED_GAP, gaps, np.inf)
    order = np.argsort(gaps, axis=1)[:, :LISTED]
    best_gap = np.take_along_axis(gaps, order, axis=1)
    best = np.where(np.isfinite(best_gap), np.take_along_axis(found, order, axis=1), np.nan)
    likelihood = np.exp(-0.5 * np.clip(best_gap, -40.0, None))
    for k in range(best.shape[1]):
        places[k].flat[rows] = best[:, k]
        odds[k].flat[rows] = np.where(np.isfinite(best[:, k]), likelihood[:, k], np.nan)
