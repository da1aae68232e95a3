"""The order of every block: candidates, agreement of neighbours, and the odds of each region."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import distance_transform_edt

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.inversion.blocks import Blocks
from sheenmap.inversion.candidates import KEPT, Candidates, find_candidates
from sheenmap.inversion.likelihood import Doubts, chi_square_limit, covariance
from sheenmap.inversion.order import choose_order, filled, link_width_nm, no_trend, trend_of
from sheenmap.inversion.regions import (
    DECIDED_GAP,
    LARGEST_GAP,
    LISTED,
    Evidence,
    Shifts,
    boundary_gap,
    hold_on_shifts,
    label_regions,
    neighbours,
)
from sheenmap.inversion.strays import OFF_CURVE_FALSE_ALARMS
from sheenmap.lookup import Table, evaluate

ROUNDS = 2
TILE = 16  # blocks
SLIP_NM = 20.0  # minima nearer to the chosen one are the two sides of one turning point
SLIPPERY_SHARE = 0.05  # of a tile's blocks
RIVAL_NM = 30.0
TORN_NM = 12.0  # of scatter about a plane, in a slippery tile
MOST_SWEEPS = 4
SNAP_NM = 15.0  # a shifted block takes its own candidate when it has one this near
APART_NM = 40.0  # rivals nearer than this are one minimum


@dataclass(frozen=True, kw_only=True, eq=False)
class Settled:
    """What the blocks (h, w) say.

    Parameters
    ----------
    thickness_nm, sigma_nm : (h, w) float
        Chosen thickness and its standard uncertainty by noise.
    region : (h, w) int
        Number of the region, -1 where a block knows nothing.
    gap : (h, w) float
        Chi-square by which the region's best other order is worse.
    faded : (h, w) bool
        True where so long a piece of the search range fits that the colour no longer tells the thickness.
    alone : (h, w) bool
        True where a single pixel of the block would settle the order by itself.
    others_nm : (h, w, K) float
        Thicknesses under the region's undecided other orders, NaN where none.
    rivals_nm, rival_gap : (h, w, K) float
        All candidates that a single pixel could not rule out, and their chi-square over the best.
    """

    thickness_nm: FloatArray
    sigma_nm: FloatArray
    region: NDArray[np.intp]
    gap: FloatArray
    faded: BoolArray
    alone: BoolArray
    others_nm: FloatArray
    rivals_nm: FloatArray
    rival_gap: FloatArray
    link_nm: float
    evidence: Evidence
    shaded: Evidence

    @property
    def sure(self) -> BoolArray:
        """Blocks (h, w) whose order is decided."""
        return np.asarray((self.region >= 0) & (self.gap >= DECIDED_GAP))


def settle(blocks: Blocks, pixel_variance: FloatArray, correlation: FloatArray, table: Table, doubts: Doubts) -> Settled:
    """Settle the order of blocks; ``pixel_variance`` (h, w, 3) is the noise of one pixel there."""
    shape = blocks.even.shape
    even = np.flatnonzero(blocks.even)
    found = _candidates(blocks, even, blocks.variance, correlation, table, doubts)
    known = np.zeros(shape, bool)
    known.flat[even] = found.chi_square[:, 0] < chi_square_limit(OFF_CURVE_FALSE_ALARMS, blocks.signal.shape[-1])
    faded = np.zeros(shape, bool)
    faded.flat[even] = found.is_faded
    places, costs = _gridded(found, even, known)
    single = _candidates(blocks, even, pixel_variance, correlation, table, doubts)
    rivals_nm, rival_cost = _gridded(single, even, known)
    if not known.any():
        return _nothing(shape, _evidence(blocks, correlation))
    nearest = tuple(distance_transform_edt(~known, return_distances=False, return_indices=True))
    width_nm = link_width_nm(np.where(known[..., None], places, np.nan))
    thickness_nm = _ordered(filled(places, known, nearest), _without_data(costs, known, nearest), width_nm)
    evidence = _evidence(blocks, correlation)
    slippery = _slippery_tiles(thickness_nm, places, costs, known, width_nm)
    shaded = _evidence(blocks, correlation, shading_u=doubts.shading_u)
    moved = _move_regions(thickness_nm, known, slippery, places, shaded, table, doubts, width_nm)
    return Settled(
        thickness_nm=moved.thickness_nm,
        sigma_nm=_sigma(evidence, moved.thickness_nm.ravel(), table).reshape(shape),
        region=moved.region,
        gap=moved.gap,
        faded=faded & known,
        alone=_alone(rivals_nm, rival_cost, moved.thickness_nm, width_nm) & known,
        others_nm=moved.others_nm,
        rivals_nm=rivals_nm,
        rival_gap=_over_best(rival_cost),
        link_nm=width_nm,
        evidence=evidence,
        shaded=shaded,
    )


def _ordered(places: FloatArray, costs: FloatArray, width_nm: float) -> FloatArray:
    """Thickness (h, w) of the chosen candidates: once on a level film, then on one with the trend that this has shown."""
    trend = no_trend(places.shape[:2])
    for _ in range(ROUNDS):
        chosen = choose_order(places, costs, width_nm, trend)
        thickness_nm = np.take_along_axis(places, chosen[..., None], axis=-1)[..., 0]
        trend = trend_of(thickness_nm, width_nm)
    return np.asarray(thickness_nm)


@dataclass(frozen=True, kw_only=True, eq=False)
class _Moved:
    thickness_nm: FloatArray
    region: NDArray[np.intp]
    gap: FloatArray
    others_nm: FloatArray


def _slippery_tiles(
    thickness_nm: FloatArray, places: FloatArray, costs: FloatArray, known: BoolArray, width_nm: float
) -> NDArray[np.intp]:
    """Number of the tile (h, w) where order could slip from block to block without a step, -1 where it cannot.

    It can where noise makes blocks fit at thicknesses between two orders, as it does where colour has faded.
    """
    away = np.abs(places - thickness_nm[..., None])
    between = np.any((_over_best(costs) < DECIDED_GAP) & (away > SLIP_NM) & (away < width_nm + SLIP_NM), axis=-1) & known
    row, column = np.indices(known.shape) // TILE
    tile = row * (column.max() + 1) + column
    share = np.bincount(tile.ravel(), weights=between.ravel()) / np.maximum(np.bincount(tile.ravel(), weights=known.ravel()), 1)
    return np.where(share[tile] > SLIPPERY_SHARE, tile, -1)


def _move_regions(
    thickness_nm: FloatArray, known: BoolArray, slippery: NDArray[np.intp], places: FloatArray,
    evidence: Evidence, table: Table, doubts: Doubts, width_nm: float,
) -> _Moved:  # fmt: skip
    """Move regions to the order that they and their surest neighbours like best, until none moves.

    Slippery tiles are regions of their own, and only their own evidence decides them.
    """
    for _ in range(MOST_SWEEPS):
        region = label_regions(thickness_nm, known, width_nm)
        region = np.where((region >= 0) & (slippery >= 0), region + (slippery + 1) * region.size, region)
        shifts = hold_on_shifts(region, thickness_nm, evidence, table, doubts)
        rival = np.abs(shifts.shift_nm) > 2 * min(width_nm, RIVAL_NM)
        anchored = shifts.gap[:, rival].min(axis=1, initial=np.inf) >= DECIDED_GAP
        steps = boundary_gap(shifts, region, thickness_nm, anchored, width_nm)
        total = shifts.gap + np.where(shifts.labels[:, None] >= region.size, np.minimum(steps, 0.0), steps)
        best = np.where(rival | (shifts.shift_nm == 0), total, np.inf).argmin(axis=1)
        shift_nm = np.where(total[np.arange(best.size), best] < 0, shifts.shift_nm[best], 0.0)
        if not np.any(shift_nm):
            break
        thickness_nm = _shifted_to_candidates(thickness_nm, region, shifts, shift_nm, places)
    rivals = np.where(rival, total, np.inf)
    slipped = (shifts.labels >= region.size) & _is_torn(thickness_nm, region, shifts.labels, width_nm)
    rivals[slipped] = np.where(rival & (rivals[slipped] == rivals[slipped].min(axis=1, keepdims=True)), 0.0, rivals[slipped])
    return _with_odds(thickness_nm, region, shifts, rivals)


def _is_torn(thickness_nm: FloatArray, region: NDArray[np.intp], labels: NDArray[np.intp], width_nm: float) -> BoolArray:
    """Regions (R,) that are no smooth piece of film: far from a plane, or parted by a step from most of what they touch."""
    number = np.searchsorted(labels, np.where(region >= 0, region, labels[0]))
    torn = np.zeros(labels.size, bool)
    for r in np.flatnonzero(labels >= region.size):
        row, column = np.nonzero((number == r) & (region >= 0))
        place_nm = thickness_nm[row, column]
        base = np.column_stack([np.ones(row.size), row - row.mean(), column - column.mean()])
        left = place_nm - base @ np.linalg.lstsq(base, place_nm, rcond=None)[0]
        torn[r] = 1.48 * np.median(np.abs(left)) > TORN_NM or np.mean(np.abs(left) > 3 * TORN_NM) > SLIPPERY_SHARE
    first, second = neighbours(region >= 0)
    flat, place_nm = number.ravel(), thickness_nm.ravel()
    differs = flat[first] != flat[second]
    first, second = first[differs], second[differs]
    steps = (np.abs(place_nm[first] - place_nm[second]) > width_nm).astype(float)
    both = np.concatenate([flat[first], flat[second]])
    links = np.bincount(both, minlength=labels.size)
    return torn | (np.bincount(both, weights=np.tile(steps, 2), minlength=labels.size) > 0.5 * np.maximum(links, 1))


def _shifted_to_candidates(
    thickness_nm: FloatArray, region: NDArray[np.intp], shifts: Shifts, shift_nm: FloatArray, places: FloatArray
) -> FloatArray:
    number = np.searchsorted(shifts.labels, np.where(region >= 0, region, shifts.labels[0]))
    shift = np.where(region >= 0, shift_nm[number], 0.0)
    aim = thickness_nm + shift
    distance = np.abs(places - aim[..., None])
    distance[np.isnan(distance)] = np.inf
    nearest = distance.argmin(axis=-1)[..., None]
    close = np.take_along_axis(distance, nearest, axis=-1)[..., 0] <= SNAP_NM
    snapped = np.where(close, np.take_along_axis(places, nearest, axis=-1)[..., 0], aim)
    return np.where(shift != 0, snapped, thickness_nm)


def _with_odds(thickness_nm: FloatArray, region: NDArray[np.intp], shifts: Shifts, rivals: FloatArray) -> _Moved:
    order = np.argsort(rivals, axis=1)
    listed = [_apart(rivals[r], shifts.shift_nm, order[r]) for r in range(len(rivals))]
    number = np.searchsorted(shifts.labels, np.where(region >= 0, region, shifts.labels[0]))
    known = region >= 0
    gap = np.where(known, np.clip(rivals.min(axis=1, initial=LARGEST_GAP), 0.0, LARGEST_GAP)[number], 0.0)
    others = np.where(known[..., None], thickness_nm[..., None] + np.array(listed)[number], np.nan)
    return _Moved(thickness_nm=thickness_nm, region=region, gap=gap, others_nm=others)


def _apart(cost: FloatArray, shift_nm: FloatArray, order: NDArray[np.intp]) -> FloatArray:
    """Shifts (LISTED,) of the best undecided rivals, no two on one minimum; NaN where there are fewer."""
    found: list[float] = []
    for at in order:
        if cost[at] >= DECIDED_GAP or len(found) == LISTED:
            break
        if all(abs(shift_nm[at] - other) > APART_NM for other in found):
            found.append(float(shift_nm[at]))
    return np.array(found + [np.nan] * (LISTED - len(found)))


def _candidates(
    blocks: Blocks, rows: NDArray[np.intp], variance: FloatArray, correlation: FloatArray, table: Table, doubts: Doubts
) -> Candidates:
    angle = None if blocks.angle_deg is None else blocks.angle_deg.ravel()[rows]
    signal, noise = (array.reshape(-1, array.shape[-1])[rows] for array in (blocks.signal, variance))
    return find_candidates(signal, noise, correlation, table, doubts, angle)


def _gridded(found: Candidates, rows: NDArray[np.intp], known: BoolArray) -> tuple[FloatArray, FloatArray]:
    places, costs = np.full((known.size, KEPT), np.nan), np.full((known.size, KEPT), np.inf)
    places[rows], costs[rows] = found.thickness_nm, found.chi_square
    places[~known.ravel()], costs[~known.ravel()] = np.nan, np.inf
    return places.reshape(*known.shape, KEPT), costs.reshape(*known.shape, KEPT)


def _without_data(costs: FloatArray, known: BoolArray, nearest: tuple[NDArray[np.intp], ...]) -> FloatArray:
    """Costs with unknown blocks free to take any candidate of the nearest known one."""
    borrowed = costs[nearest]
    return np.where(known[..., None], costs, np.where(np.isfinite(borrowed), 0.0, np.inf))


def _evidence(blocks: Blocks, correlation: FloatArray, *, shading_u: float = 0.0) -> Evidence:
    """What the blocks know, by noise alone or with a shading of their own each."""
    signal, variance = (array.reshape(-1, array.shape[-1]) for array in (blocks.signal, blocks.variance))
    doubts = Doubts(shading_u=shading_u, level_u=0, colour_u=0)
    noise = covariance(np.maximum(variance, 1e-12), correlation, signal, doubts)
    return Evidence(
        signal=signal,
        precision=np.asarray(np.linalg.inv(noise), dtype=float),
        angle_deg=None if blocks.angle_deg is None else blocks.angle_deg.ravel(),
    )


def _sigma(evidence: Evidence, thickness_nm: FloatArray, table: Table) -> FloatArray:
    _, slope = evaluate(table, thickness_nm, evidence.angle_deg)
    return np.asarray(1 / np.sqrt(np.maximum(np.einsum("ni,nij,nj->n", slope, evidence.precision, slope), 1e-4)))


def _alone(rivals_nm: FloatArray, rival_cost: FloatArray, thickness_nm: FloatArray, width_nm: float) -> BoolArray:
    """Whether a pixel's own candidates leave only the chosen thickness within the odds that decide."""
    close = _over_best(rival_cost) < DECIDED_GAP
    elsewhere = np.abs(rivals_nm - thickness_nm[..., None]) > 2 * width_nm
    return np.asarray(~np.any(close & elsewhere, axis=-1))


def _over_best(cost: FloatArray) -> FloatArray:
    best = cost[..., :1]
    return np.where(np.isfinite(cost), cost - np.where(np.isfinite(best), best, 0.0), np.inf)


def _nothing(shape: tuple[int, int], evidence: Evidence) -> Settled:
    nan, none = np.full(shape, np.nan), np.full((*shape, 1), np.nan)
    no = np.zeros(shape, bool)
    return Settled(
        thickness_nm=nan,
        sigma_nm=nan,
        region=np.full(shape, -1),
        gap=np.zeros(shape),
        alone=no,
        faded=no,
        others_nm=none,
        rivals_nm=none,
        rival_gap=none,
        link_nm=0.0,
        evidence=evidence,
        shaded=evidence,
    )
