"""Regions of one order, and how sure the order of each is.

Blocks that continue each other form a region. The region is held as a whole on every other order, that is, moved by every
shift in thickness: its blocks' evidence adds up, but an error of lamp, camera or exposure is the same in all of them and
must not be counted N times. So the common error of each channel is fitted to the whole region, within its prior, once for
each shift: cost = sum r'Pr - (sum F'Pr)' (sum F'PF + S^-1)^-1 (sum F'Pr), with r = signal - table, F = diag(table), S the
prior covariance, and P the block's precision with its own thickness free by ``FREE_NM`` (Woodbury's identity).
"""

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from sheenmap.arrays import BoolArray, FloatArray, chunks
from sheenmap.inversion.likelihood import Doubts, same_shot
from sheenmap.inversion.order import link_cost
from sheenmap.lookup import Table, evaluate

DECIDED_GAP = 13.8  # chi-square; odds of 1000 to 1
LARGEST_GAP = 60.0
FREE_NM = 8.0  # by which each block may move about the shifted region
SHIFT_STEP_NM = 5.0
MOST_BLOCKS = 64  # of a region that are asked; more would only count the common error again
LISTED = 6
CHUNK = 60_000
FINE_STEPS = (-0.4, -0.2, 0.2, 0.4)  # of a shift step, tried about every low point
WORTH_REFINING = 200.0  # chi-square; a low point higher than this does not come below what decides by half a step


@dataclass(frozen=True, kw_only=True, eq=False)
class Evidence:
    """What each block knows (N blocks): signal (N, 3), precision by what blocks do not share (N, 3, 3), angle (N,) or None."""

    signal: FloatArray
    precision: FloatArray
    angle_deg: FloatArray | None


@dataclass(frozen=True, kw_only=True, eq=False)
class Shifts:
    """Regions held on other orders: labels (R,), shifts (D,) in nm, chi-square over that of no shift (R, D)."""

    labels: NDArray[np.intp]
    shift_nm: FloatArray
    gap: FloatArray


def label_regions(thickness_nm: FloatArray, known: BoolArray, width_nm: float) -> NDArray[np.intp]:
    """Number of the region (h, w) of each known block, -1 elsewhere."""
    first, second = neighbours(known)
    near = np.abs(thickness_nm.ravel()[first] - thickness_nm.ravel()[second]) < width_nm
    graph = coo_array((np.ones(np.count_nonzero(near)), (first[near], second[near])), shape=(known.size, known.size))
    _, label = connected_components(graph, directed=False)
    return np.where(known, label.reshape(known.shape), -1)


def neighbours(known: BoolArray) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Flat numbers of all pairs of known blocks (h, w) that share a side."""
    index = np.arange(known.size).reshape(known.shape)
    across, down = known[:, :-1] & known[:, 1:], known[:-1] & known[1:]
    return (
        np.concatenate([index[:, :-1][across], index[:-1][down]]),
        np.concatenate([index[:, 1:][across], index[1:][down]]),
    )


def hold_on_shifts(
    region: NDArray[np.intp], thickness_nm: FloatArray, evidence: Evidence, table: Table, doubts: Doubts
) -> Shifts:
    """Chi-square of every region (labels (h, w), -1 unknown) moved by every shift, over that of where it stands.

    Only evidence of its own blocks counts.
    """
    flat = region.ravel()
    labels, counts = np.unique(flat[flat >= 0], return_counts=True)
    span = table.thickness_nm[-1] - table.thickness_nm[0]
    most = int(np.floor(span / SHIFT_STEP_NM))
    shift_nm = SHIFT_STEP_NM * np.arange(-most, most + 1, dtype=float)
    gap = np.full((labels.size, shift_nm.size), LARGEST_GAP)
    for r, rows in enumerate(_asked(flat, labels, counts)):
        place_nm = thickness_nm.ravel()[rows]
        cost = _cost(rows, place_nm, shift_nm, evidence, table, doubts)
        gap[r] = cost - cost[most]
        at = partial(_cost, rows, place_nm, evidence=evidence, table=table, doubts=doubts)
        gap[r] = _refined(gap[r], shift_nm, at, cost[most])
    return Shifts(labels=labels, shift_nm=shift_nm, gap=gap)


def _refined(gap: FloatArray, shift_nm: FloatArray, cost_at: Callable[[FloatArray], FloatArray], base: float) -> FloatArray:
    """The gap (D,) with each low point replaced by the least of finer shifts about it."""
    is_low = np.zeros(gap.size, bool)
    is_low[1:-1] = (gap[1:-1] <= gap[:-2]) & (gap[1:-1] <= gap[2:]) & (gap[1:-1] < WORTH_REFINING) & (shift_nm[1:-1] != 0)
    low = np.flatnonzero(is_low)
    if not low.size:
        return gap
    fine_nm = shift_nm[low, None] + SHIFT_STEP_NM * np.array(FINE_STEPS)
    finer = cost_at(fine_nm.ravel()).reshape(fine_nm.shape) - base
    result = gap.copy()
    result[low] = np.minimum(gap[low], finer.min(axis=1))
    return result


def _asked(flat: NDArray[np.intp], labels: NDArray[np.intp], counts: NDArray[np.intp]) -> list[NDArray[np.intp]]:
    """The blocks of each region that are asked: all, or evenly spread ones of a large region."""
    order = np.argsort(flat, kind="stable")
    members = np.split(order[np.count_nonzero(flat < 0) :], np.cumsum(counts)[:-1])
    return (
        [rows[np.linspace(0, rows.size - 1, min(rows.size, MOST_BLOCKS)).astype(int)] for rows in members] if labels.size else []
    )


def _cost(
    rows: NDArray[np.intp], thickness_nm: FloatArray, shift_nm: FloatArray, evidence: Evidence, table: Table, doubts: Doubts
) -> FloatArray:
    """Chi-square (D,) of one region's blocks moved by each shift; inf where most of them leave the table."""
    channels = table.signal.shape[-1]
    common = np.eye(channels) * max(doubts.colour_u, 1e-5) ** 2 + doubts.brightness_u**2 * same_shot(channels)
    prior = np.linalg.inv(common)
    cost = np.full(shift_nm.size, np.inf)
    for part in chunks(shift_nm.size, max(1, CHUNK // rows.size)):
        place_nm = thickness_nm + shift_nm[part, None]
        inside = (place_nm >= table.thickness_nm[0]) & (place_nm <= table.thickness_nm[-1])
        angle = None if evidence.angle_deg is None else np.tile(evidence.angle_deg[rows], place_nm.shape[0])
        expected, slope = (v.reshape(*place_nm.shape, channels) for v in evaluate(table, place_nm.ravel(), angle))
        square, pull, fit = _sums(evidence.signal[rows], evidence.precision[rows], expected, slope)
        solved = np.linalg.solve(fit + prior, pull[..., None])[..., 0]
        cost[part] = np.where(2 * inside.sum(axis=1) > rows.size, square - np.einsum("dc,dc->d", pull, solved), np.inf)
    return cost


def _sums(
    signal: FloatArray, precision: FloatArray, expected: FloatArray, slope: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Sums over the blocks of r'Pr (D,), F'Pr (D, 3) and F'PF (D, 3, 3), for expected signals and slopes (D, N, 3)."""
    along = np.einsum("nij,dnj->dni", precision, slope)
    free = 1.0 / (np.einsum("dni,dni->dn", slope, along) + FREE_NM**-2)
    residual = signal - expected
    weighted = np.einsum("nij,dnj->dni", precision, residual)
    taken = np.einsum("dni,dni->dn", along, residual) * free
    weighted -= along * taken[..., None]
    fit = np.einsum("dni,nij,dnj->dij", expected, precision, expected)
    fit -= np.einsum("dni,dnj,dn->dij", along * expected, along * expected, free)
    return np.einsum("dni,dni->d", weighted, residual), np.einsum("dni,dni->di", weighted, expected), fit


def boundary_gap(
    shifts: Shifts, region: NDArray[np.intp], thickness_nm: FloatArray, anchored: BoolArray, width_nm: float
) -> FloatArray:
    """What each shift changes in the cost of a region's steps (R, D) against neighbours of ``anchored`` regions (R,)."""
    flat, place_nm = region.ravel(), thickness_nm.ravel()
    first, second = neighbours(region >= 0)
    both = np.concatenate([first, second]), np.concatenate([second, first])
    number = np.searchsorted(shifts.labels, np.where(flat >= 0, flat, shifts.labels[0] if shifts.labels.size else 0))
    own, other = number[both[0]], number[both[1]]
    step = (own != other) & anchored[other] & ~anchored[own]
    own, difference_nm = own[step], (place_nm[both[0]] - place_nm[both[1]])[step]
    result = np.zeros_like(shifts.gap)
    standing = link_cost(difference_nm, width_nm)
    for d, shift_nm in enumerate(shifts.shift_nm):
        result[:, d] = np.bincount(own, weights=link_cost(difference_nm + shift_nm, width_nm) - standing, minlength=len(result))
    return result
