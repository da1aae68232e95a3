"""The order of every block: candidates, agreement of neighbours, and the odds of each region."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import distance_transform_edt

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.inversion.blocks import Blocks
from sheenmap.inversion.candidates import KEPT, Candidates, find_candidates
from sheenmap.inversion.likelihood import Doubts, covariance
from sheenmap.inversion.order import choose_order, filled, link_width_nm
from sheenmap.inversion.regions import DECIDED_GAP, Evidence, label_regions, settle_regions
from sheenmap.inversion.strays import OFF_CURVE_CHI_SQUARE
from sheenmap.lookup import Table, evaluate


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
    alone: BoolArray
    others_nm: FloatArray
    rivals_nm: FloatArray
    rival_gap: FloatArray
    link_nm: float


def settle(blocks: Blocks, pixel_variance: FloatArray, correlation: FloatArray, table: Table, doubts: Doubts) -> Settled:
    """Settle the order of blocks; ``pixel_variance`` (h, w, 3) is the noise of one pixel there."""
    shape = blocks.even.shape
    even = np.flatnonzero(blocks.even)
    found = _candidates(blocks, even, blocks.variance, correlation, table, doubts)
    known = np.zeros(shape, bool)
    known.flat[even] = found.chi_square[:, 0] < OFF_CURVE_CHI_SQUARE
    places, costs = _gridded(found, even, known)
    single = _candidates(blocks, even, pixel_variance, correlation, table, doubts)
    rivals_nm, rival_cost = _gridded(single, even, known)
    if not known.any():
        return _nothing(shape)
    nearest = tuple(distance_transform_edt(~known, return_distances=False, return_indices=True))
    width_nm = link_width_nm(np.where(known[..., None], places, np.nan))
    chosen = choose_order(filled(places, known, nearest), _without_data(costs, known, nearest), width_nm)
    thickness_nm = np.take_along_axis(filled(places, known, nearest), chosen[..., None], axis=-1)[..., 0]
    region = label_regions(thickness_nm, known, width_nm)
    evidence = _evidence(blocks, correlation)
    chosen = np.where(known, chosen, 0)
    orders = settle_regions(region, places, costs, chosen, evidence, table, doubts, width_nm)
    thickness_nm = np.where(known, orders.thickness_nm.reshape(shape), thickness_nm)
    region = label_regions(thickness_nm, known, width_nm)
    return Settled(
        thickness_nm=thickness_nm,
        sigma_nm=_sigma(evidence, thickness_nm.ravel(), table).reshape(shape),
        region=region,
        gap=orders.gap.reshape(shape),
        alone=_alone(rivals_nm, rival_cost, thickness_nm, width_nm) & known,
        others_nm=orders.others_nm.reshape(*shape, -1),
        rivals_nm=rivals_nm,
        rival_gap=_over_best(rival_cost),
        link_nm=width_nm,
    )


def _candidates(
    blocks: Blocks, rows: NDArray[np.intp], variance: FloatArray, correlation: FloatArray, table: Table, doubts: Doubts
) -> Candidates:
    angle = None if blocks.angle_deg is None else blocks.angle_deg.ravel()[rows]
    return find_candidates(blocks.signal.reshape(-1, 3)[rows], variance.reshape(-1, 3)[rows], correlation, table, doubts, angle)


def _gridded(found: Candidates, rows: NDArray[np.intp], known: BoolArray) -> tuple[FloatArray, FloatArray]:
    places, costs = np.full((known.size, KEPT), np.nan), np.full((known.size, KEPT), np.inf)
    places[rows], costs[rows] = found.thickness_nm, found.chi_square
    places[~known.ravel()], costs[~known.ravel()] = np.nan, np.inf
    return places.reshape(*known.shape, KEPT), costs.reshape(*known.shape, KEPT)


def _without_data(costs: FloatArray, known: BoolArray, nearest: tuple[NDArray[np.intp], ...]) -> FloatArray:
    """Costs with unknown blocks free to take any candidate of the nearest known one."""
    borrowed = costs[nearest]
    return np.where(known[..., None], costs, np.where(np.isfinite(borrowed), 0.0, np.inf))


def _evidence(blocks: Blocks, correlation: FloatArray) -> Evidence:
    signal = blocks.signal.reshape(-1, 3)
    noise = covariance(np.maximum(blocks.variance.reshape(-1, 3), 1e-12), correlation, signal, Doubts(shading_u=0, level_u=0, colour_u=0))
    return Evidence(
        signal=signal, precision=np.linalg.inv(noise), angle_deg=None if blocks.angle_deg is None else blocks.angle_deg.ravel()
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


def _nothing(shape: tuple[int, int]) -> Settled:
    nan, none = np.full(shape, np.nan), np.full((*shape, 1), np.nan)
    return Settled(
        thickness_nm=nan, sigma_nm=nan, region=np.full(shape, -1), gap=np.zeros(shape), alone=np.zeros(shape, bool),
        others_nm=none, rivals_nm=none, rival_gap=none, link_nm=0.0,
    )  # fmt: skip
