"""Regions of one order, and how sure the order of each is.

Blocks that continue each other form a region. Another order is held against the chosen one for a region as a whole: its
blocks' evidence adds up, but an error of lamp, camera or exposure is the same in all of them and must not be counted N
times. So the common error of each channel is fitted to the whole region, within its prior, once for each order:
cost = sum r'Pr - (sum F'Pr)' (sum F'PF + S^-1)^-1 (sum F'Pr), with r = signal - table, F = diag(table), S the prior
covariance, and P the block's precision with its own thickness projected out.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.inversion.candidates import gap_of_second
from sheenmap.inversion.likelihood import Doubts
from sheenmap.inversion.order import STEP_COST
from sheenmap.lookup import Table, evaluate

DECIDED_GAP = 13.8  # chi-square; odds of 1000 to 1
LARGEST_ODDS = 60.0
MOSTLY = 0.5  # an order that agrees with the chosen one on more of the region than this is no other order


@dataclass(frozen=True, kw_only=True, eq=False)
class Evidence:
    """What each block knows (N blocks): signal (N, 3), precision by noise alone (N, 3, 3), angle (N,) or None."""

    signal: FloatArray
    precision: FloatArray
    angle_deg: FloatArray | None


@dataclass(frozen=True, kw_only=True, eq=False)
class Orders:
    """The settled labelling, block by block (N,).

    ``thickness_nm`` is the chosen candidate, ``gap`` the chi-square by which the best other order of its region is worse,
    ``others_nm`` (N, K) the thicknesses under the region's other orders whose gap is below ``DECIDED_GAP``, NaN where none.
    """

    region: NDArray[np.intp]
    thickness_nm: FloatArray
    gap: FloatArray
    others_nm: FloatArray


def label_regions(thickness_nm: FloatArray, known: BoolArray, width_nm: float) -> NDArray[np.intp]:
    """Number of the region (h, w) of each known block, -1 elsewhere."""
    first, second = _links(thickness_nm, known, width_nm)
    count = thickness_nm.size
    graph = coo_array((np.ones(first.size), (first, second)), shape=(count, count))
    _, label = connected_components(graph, directed=False)
    return np.where(known, label.reshape(known.shape), -1)


def _links(thickness_nm: FloatArray, known: BoolArray, width_nm: float) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    index = np.arange(thickness_nm.size).reshape(thickness_nm.shape)
    pairs = []
    for here, there in (((slice(None), slice(None, -1)), (slice(None), slice(1, None))), ((slice(None, -1),), (slice(1, None),))):
        near = known[here] & known[there] & (np.abs(thickness_nm[here] - thickness_nm[there]) < width_nm)
        pairs.append((index[here][near], index[there][near]))
    return np.concatenate([p[0] for p in pairs]), np.concatenate([p[1] for p in pairs])


def settle_regions(
    region: NDArray[np.intp],
    candidates_nm: FloatArray,
    chi_square: FloatArray,
    chosen: NDArray[np.intp],
    evidence: Evidence,
    table: Table,
    doubts: Doubts,
    width_nm: float,
) -> Orders:
    """Hold every region (labels (h, w)) on each of its other orders, and keep the best.

    ``candidates_nm`` and ``chi_square`` (h, w, K) and ``chosen`` (h, w) belong to the blocks; ``evidence`` is flat.
    """
    flat_region = region.ravel()
    known = flat_region >= 0
    kept = chi_square.shape[-1]
    places, costs = candidates_nm.reshape(-1, kept), chi_square.reshape(-1, kept)
    seeds = _seeds(flat_region, costs)
    walked_nm, jumps = _walk(region, places, seeds, candidates_nm.reshape(*region.shape, kept), chosen, width_nm)
    cost = _region_costs(flat_region, known, walked_nm, evidence, table, doubts) + STEP_COST * _sum_by(flat_region, known, jumps)
    original = np.take_along_axis(places, chosen.reshape(-1, 1), axis=1)[:, 0]
    differs = np.abs(walked_nm - original[:, None]) > width_nm
    share = _sum_by(flat_region, known, differs.astype(float)) / np.maximum(_sum_by(flat_region, known, np.ones((len(places), 1))), 1)
    return _best_orders(flat_region, known, original, walked_nm, cost, share)


def _seeds(flat_region: NDArray[np.intp], costs: FloatArray) -> NDArray[np.intp]:
    """The block of each region whose candidates lie furthest apart in chi-square: most other orders end there."""
    gap = gap_of_second(costs)
    order = np.lexsort((-np.nan_to_num(gap, posinf=1e9), flat_region))
    known = order[flat_region[order] >= 0]
    _, first = np.unique(flat_region[known], return_index=True)
    return known[first]


def _walk(
    region: NDArray[np.intp], places: FloatArray, seeds: NDArray[np.intp], grid_nm: FloatArray, chosen: NDArray[np.intp], width_nm: float
) -> tuple[FloatArray, FloatArray]:
    """Carry every candidate of each seed through its region, each block taking what continues its neighbour best.

    Returns thicknesses (N, K) and 1 where a block could not continue (N, K). All regions are walked together, ring by ring.
    """
    height, width = region.shape
    count, kept = places.shape
    walked, jumps = np.full((count, kept), np.nan), np.zeros((count, kept))
    walked[seeds] = places[seeds]
    reached = np.zeros(count, bool)
    reached[seeds] = True
    flat_region, original = region.ravel(), np.take_along_axis(grid_nm, chosen[..., None], axis=-1).ravel()
    front = seeds
    while front.size:
        parent, child = _neighbours(front, height, width)
        fresh = ~reached[child] & (flat_region[child] == flat_region[parent]) & (np.abs(original[child] - original[parent]) < width_nm)
        child, first = np.unique(child[fresh], return_index=True)
        parent = parent[fresh][first]
        distance = np.abs(places[child][:, None, :] - walked[parent][:, :, None])
        distance[np.isnan(distance)] = np.inf
        best = distance.argmin(axis=-1)
        walked[child] = np.where(np.isnan(walked[parent]), np.nan, np.take_along_axis(places[child], best, axis=1))
        jumps[child] = np.take_along_axis(distance, best[..., None], axis=-1)[..., 0] > width_nm
        reached[child] = True
        front = child
    return walked, np.where(np.isnan(walked), 0.0, jumps)


def _neighbours(front: NDArray[np.intp], height: int, width: int) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    row, column = front // width, front % width
    moves = ((row > 0, -width), (row < height - 1, width), (column > 0, -1), (column < width - 1, 1))
    parents = [front[allowed] for allowed, _ in moves]
    return np.concatenate(parents), np.concatenate([front[allowed] + step for allowed, step in moves])


def _region_costs(
    flat_region: NDArray[np.intp], known: BoolArray, walked_nm: FloatArray, evidence: Evidence, table: Table, doubts: Doubts
) -> FloatArray:
    """Chi-square (R, K) of each region under each walked order, the common error of lamp, camera and level fitted."""
    labels = np.unique(flat_region[known])
    costs = np.full((labels.size, walked_nm.shape[1]), np.inf)
    place = np.searchsorted(labels, flat_region)
    prior = np.linalg.inv(np.eye(3) * max(doubts.colour_u, 1e-5) ** 2 + doubts.brightness_u**2)
    for k in range(walked_nm.shape[1]):
        rows = np.flatnonzero(known & np.isfinite(walked_nm[:, k]))
        if not rows.size:
            continue
        parts = _evidence_parts(rows, walked_nm[rows, k], evidence, table)
        square, pull, fit = (_sum_rows(part, place[rows], labels.size) for part in parts)
        solved = np.linalg.solve(fit + prior, pull[..., None])[..., 0]
        has_all = np.bincount(place[rows], minlength=labels.size) == np.bincount(place[known], minlength=labels.size)
        costs[:, k] = np.where(has_all, square - np.einsum("rc,rc->r", pull, solved), np.inf)
    return costs


def _evidence_parts(
    rows: NDArray[np.intp], thickness_nm: FloatArray, evidence: Evidence, table: Table
) -> tuple[FloatArray, FloatArray, FloatArray]:
    expected, slope = evaluate(table, thickness_nm, None if evidence.angle_deg is None else evidence.angle_deg[rows])
    precision = evidence.precision[rows]
    along = np.einsum("nij,nj->ni", precision, slope)
    information = np.maximum(np.einsum("ni,ni->n", slope, along), 1e-9)
    precision = precision - along[:, :, None] * along[:, None, :] / information[:, None, None]
    residual = evidence.signal[rows] - expected
    weighted = np.einsum("nij,nj->ni", precision, residual)
    fit = expected[:, :, None] * precision * expected[:, None, :]
    return np.einsum("ni,ni->n", weighted, residual), weighted * expected, fit


def _sum_rows(values: FloatArray, place: NDArray[np.intp], count: int) -> FloatArray:
    flat = values.reshape(len(values), -1)
    sums = np.stack([np.bincount(place, weights=column, minlength=count) for column in flat.T], axis=1)
    return sums.reshape(count, *values.shape[1:])


def _sum_by(flat_region: NDArray[np.intp], known: BoolArray, values: FloatArray) -> FloatArray:
    labels = np.unique(flat_region[known])
    return _sum_rows(values[known], np.searchsorted(labels, flat_region[known]), labels.size)


def _best_orders(
    flat_region: NDArray[np.intp], known: BoolArray, original: FloatArray, walked_nm: FloatArray, cost: FloatArray, share: FloatArray
) -> Orders:
    labels = np.unique(flat_region[known])
    place = np.searchsorted(labels, np.where(known, flat_region, labels[0] if labels.size else 0))
    same = share <= MOSTLY
    reference = np.min(np.where(same, cost, np.inf), axis=1, initial=np.inf)
    rivals = np.where(same, np.inf, cost)
    best = rivals.argmin(axis=1)
    gain = rivals[np.arange(labels.size), best] - reference
    switched = gain < 0
    gaps = np.abs(np.where(np.isnan(gain), LARGEST_ODDS, gain))
    thickness_nm = np.where(switched[place] & known, walked_nm[np.arange(walked_nm.shape[0]), best[place]], original)
    base = np.where(switched, rivals[np.arange(labels.size), best], reference)
    close = (rivals - base[:, None] < DECIDED_GAP) & ~(switched[:, None] & (np.arange(cost.shape[1]) == best[:, None]))
    others = np.where(close[place] & known[:, None], walked_nm, np.nan)
    others = np.column_stack([others, np.where(switched[place] & (gaps[place] < DECIDED_GAP) & known, original, np.nan)])
    gap = np.where(known, np.minimum(gaps[place], LARGEST_ODDS), 0.0)
    return Orders(region=flat_region, thickness_nm=thickness_nm, gap=gap, others_nm=others)
