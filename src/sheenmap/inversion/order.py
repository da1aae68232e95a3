"""Which of its candidates each block has: a labelling that neighbours agree on, where film may also step.

The energy is the blocks' chi-square plus, for each pair of neighbours, a cost that grows with the difference of their
thicknesses up to ``STEP_COST`` and no further, so that a step costs the same whatever its height. It is lowered by
semi-global aggregation: the least cost of all paths that end in a block, along eight directions (Hirschmueller, IEEE
Trans. PAMI 30, 328, 2008).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import median_filter

from sheenmap.arrays import BoolArray, FloatArray

STEP_COST = 12.0  # chi-square; odds of e^-6 that two neighbouring blocks have a step between them
DATA_CAP = 40.0
NARROWEST_LINK_NM, WIDEST_LINK_NM = 8.0, 60.0
LINK_IN_USUAL = 5.0
TREND_REACH = 15  # blocks over which the trend of the film is taken
DIRECTIONS = ((0, 1), (0, -1), (1, 0), (-1, 0), (1, 1), (-1, -1), (1, -1), (-1, 1))


def link_width_nm(thickness_nm: FloatArray) -> float:
    """How far apart neighbours on one film may lie, from the usual distance of the nearest candidates (h, w, K)."""
    here, beside = thickness_nm[:, :-1, :1], thickness_nm[:, 1:, :]
    with np.errstate(invalid="ignore"):
        nearest = np.nanmin(np.abs(here - np.where(np.isnan(beside), np.inf, beside)), axis=-1, initial=np.inf)
    known = nearest[np.isfinite(nearest)]
    usual = float(np.median(known)) if known.size else 0.0
    return float(np.clip(NARROWEST_LINK_NM + LINK_IN_USUAL * usual, NARROWEST_LINK_NM, WIDEST_LINK_NM))


@dataclass(frozen=True, kw_only=True, eq=False)
class Trend:
    """How thickness usually changes from a block to its right and its lower neighbour (h, w), in nm."""

    right_nm: FloatArray
    down_nm: FloatArray


def no_trend(shape: tuple[int, int]) -> Trend:
    """A trend that is level everywhere."""
    return Trend(right_nm=np.zeros(shape), down_nm=np.zeros(shape))


def trend_of(thickness_nm: FloatArray, width_nm: float) -> Trend:
    """The middle of the changes around each block (h, w), those of steps left out."""
    right = np.pad(np.diff(thickness_nm, axis=1), ((0, 0), (0, 1)), mode="edge")
    down = np.pad(np.diff(thickness_nm, axis=0), ((0, 1), (0, 0)), mode="edge")
    return Trend(right_nm=_middle(np.clip(right, -width_nm, width_nm)), down_nm=_middle(np.clip(down, -width_nm, width_nm)))


def _middle(change_nm: FloatArray) -> FloatArray:
    reach = int(min(TREND_REACH, (min(change_nm.shape) - 1) // 2 * 2 + 1))
    return np.asarray(median_filter(change_nm, size=reach, mode="nearest"))


def choose_order(thickness_nm: FloatArray, chi_square: FloatArray, width_nm: float, trend: Trend) -> NDArray[np.intp]:
    """Position (h, w) of the chosen candidate of each block, of candidates (h, w, K); all blocks have one or more."""
    data = np.minimum(chi_square - chi_square[..., :1], DATA_CAP)
    data[~np.isfinite(chi_square)] = np.inf
    place_nm = np.where(np.isfinite(chi_square), thickness_nm, -1e9)
    total = -(len(DIRECTIONS) - 1) * np.where(np.isfinite(data), data, 0.0)
    for down, right in DIRECTIONS:
        expected_nm = down * trend.down_nm + right * trend.right_nm
        total += _aggregate(place_nm, data, width_nm, down, right, expected_nm)
    return np.asarray(np.argmin(np.where(np.isfinite(data), total, np.inf), axis=-1))


def link_cost(difference_nm: FloatArray, width_nm: float) -> FloatArray:
    """Cost of two neighbours whose thicknesses differ by ``difference_nm``."""
    return np.asarray(STEP_COST * np.minimum((difference_nm / width_nm) ** 2, 1.0))


def _aggregate(
    place_nm: FloatArray, data: FloatArray, width_nm: float, down: int, right: int, expected_nm: FloatArray
) -> FloatArray:
    """Least path cost (h, w, K) along one direction, in which thickness is expected to change by ``expected_nm`` (h, w)."""
    if down == 0:
        swapped = _aggregate(place_nm.swapaxes(0, 1), data.swapaxes(0, 1), width_nm, right, 0, expected_nm.T)
        return np.asarray(swapped.swapaxes(0, 1))
    cost = np.empty_like(data)
    rows = range(len(data)) if down > 0 else range(len(data) - 1, -1, -1)
    before: int | None = None
    for row in rows:
        cost[row] = data[row]
        if before is not None:
            from_nm, from_cost = _shifted(place_nm[before], right), _shifted(cost[before], right)
            cost[row] += _arriving(from_nm + expected_nm[row][:, None], from_cost, place_nm[row], width_nm)
        before = row
    return cost


def _arriving(from_nm: FloatArray, from_cost: FloatArray, to_nm: FloatArray, width_nm: float) -> FloatArray:
    least = from_cost.min(axis=-1, keepdims=True)
    steps = link_cost(from_nm[:, :, None] - to_nm[:, None, :], width_nm) + (from_cost - least)[:, :, None]
    return np.asarray(np.minimum(steps.min(axis=1), STEP_COST))


def _shifted(row: FloatArray, right: int) -> FloatArray:
    """The row (w, K) moved by ``right`` places; at the open end the nearest block stands in."""
    if right == 0:
        return row
    return np.concatenate([row[:1], row[:-1]]) if right > 0 else np.concatenate([row[1:], row[-1:]])


def filled(values: FloatArray, known: BoolArray, nearest: tuple[NDArray[np.intp], NDArray[np.intp]]) -> FloatArray:
    """``values`` (h, w, ...) with unknown blocks taken from the nearest known one."""
    return np.asarray(np.where(known.reshape(known.shape + (1,) * (values.ndim - 2)), values, values[nearest]))
