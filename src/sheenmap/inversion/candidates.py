"""The thicknesses that fit a signal: every local minimum of chi-square over the whole table."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray, chunks
from sheenmap.inversion.likelihood import Doubts, covariance
from sheenmap.lookup import Table

LARGEST_GAP = 40.0  # chi-square above the best beyond which a thickness is no candidate (odds of e^-20)
INTERVAL_GAP = 6.0  # chi-square; 98.6 % of a Gaussian lies within
FADED_NM, FADED_SHARE = 100.0, 0.5  # a turning point stays below 60 nm
KEPT = 10
CHUNK = 2048


@dataclass(frozen=True, kw_only=True, eq=False)
class Candidates:
    """Best first (N, K): thickness in nm and chi-square (inf where there is none); all doubts are in the chi-square.

    ``is_faded`` (N,) where the colour no longer tells the thickness: within ``INTERVAL_GAP`` of the best lies a piece longer
    than ``FADED_NM`` without a break, or more than ``FADED_SHARE`` of the search range.
    """

    thickness_nm: FloatArray
    chi_square: FloatArray
    is_faded: BoolArray

    @property
    def gap(self) -> FloatArray:
        """(N,) chi-square of the second over the best; inf when alone, 0 when there is none."""
        return np.where(np.isfinite(self.chi_square[:, 0]), gap_of_second(self.chi_square), 0.0)


def gap_of_second(chi_square: FloatArray) -> FloatArray:
    """Chi-square (...,) of the second over the best of (..., K); inf where there is no second."""
    second = chi_square[..., 1]
    return np.where(np.isfinite(second), second - np.where(np.isfinite(second), chi_square[..., 0], 0.0), np.inf)


def find_candidates(
    signal: NDArray[np.floating],
    variance: NDArray[np.floating],
    correlation: FloatArray,
    table: Table,
    doubts: Doubts,
    angle_deg: NDArray[np.floating] | None = None,
) -> Candidates:
    """Candidates of signals (N, 3) with noise variance (N, 3), seen at angles (N,) where the table has an angle axis."""
    count = len(signal)
    thickness_nm, chi_square = np.full((count, KEPT), np.nan), np.full((count, KEPT), np.inf)
    is_faded = np.zeros(count, bool)
    searched = (table.thickness_nm >= table.search_nm[0]) & (table.thickness_nm <= table.search_nm[1])
    for angle, members in _by_angle(table, angle_deg, count):
        features = _features(table.signal[angle])
        for part in chunks(members.size, CHUNK):
            rows = members[part]
            curves = _chi_square_over_table(signal[rows], variance[rows], correlation, features, doubts)
            thickness_nm[rows], chi_square[rows] = _minima(curves, table)
            is_faded[rows] = _is_faded(curves[:, searched], table.step_nm)
    return Candidates(thickness_nm=thickness_nm, chi_square=chi_square, is_faded=is_faded)


def _by_angle(table: Table, angle_deg: NDArray[np.floating] | None, count: int) -> list[tuple[int, NDArray[np.intp]]]:
    if angle_deg is None or table.angle_deg.size == 1:
        return [(0, np.arange(count))]
    step = table.angle_deg[1] - table.angle_deg[0]
    nearest = np.clip(np.rint((angle_deg - table.angle_deg[0]) / step).astype(int), 0, table.angle_deg.size - 1)
    order = np.argsort(nearest, kind="stable")
    values, starts = np.unique(nearest[order], return_index=True)
    return [(int(value), members) for value, members in zip(values, np.split(order, starts[1:]))]


def _features(entries: FloatArray) -> FloatArray:
    """(P, T): the products and values of the table's signal in which chi-square is linear."""
    products = [entries[:, i] * entries[:, j] * (1 if i == j else 2) for i, j in _pairs(entries.shape[1])]
    return np.stack([*products, *(-2 * entries.T)])


def _pairs(channels: int) -> list[tuple[int, int]]:
    return [(i, j) for i in range(channels) for j in range(i, channels)]


def _chi_square_over_table(
    signal: NDArray[np.floating], variance: NDArray[np.floating], correlation: FloatArray, features: FloatArray, doubts: Doubts
) -> FloatArray:
    signal = signal.astype(float)
    precision = np.linalg.inv(covariance(variance, correlation, signal, doubts))
    weighted = np.einsum("nij,nj->ni", precision, signal)
    coefficients = np.column_stack([*(precision[:, i, j] for i, j in _pairs(signal.shape[1])), weighted])
    return np.asarray(coefficients @ features + np.einsum("ni,ni->n", weighted, signal)[:, None])


def _minima(curves: FloatArray, table: Table) -> tuple[FloatArray, FloatArray]:
    """Thickness and chi-square (N, KEPT) of the lowest local minima of curves (N, T), placed between entries by a parabola."""
    falls = np.diff(curves, axis=1) < 0
    is_minimum = np.ones(curves.shape, dtype=bool)
    is_minimum[:, 1:] &= falls
    is_minimum[:, :-1] &= ~falls
    is_minimum &= curves <= curves.min(axis=1, keepdims=True) + LARGEST_GAP
    row, at = np.nonzero(is_minimum)
    offset, depth = _parabola(curves, row, at)
    order = np.lexsort((depth, row))
    row, at, offset, depth = row[order], at[order], offset[order], depth[order]
    rank = np.arange(row.size) - np.searchsorted(row, row)
    kept = rank < KEPT
    thickness_nm, chi_square = np.full((len(curves), KEPT), np.nan), np.full((len(curves), KEPT), np.inf)
    thickness_nm[row[kept], rank[kept]] = table.thickness_nm[at[kept]] + table.step_nm * offset[kept]
    chi_square[row[kept], rank[kept]] = depth[kept]
    return thickness_nm, chi_square


def _is_faded(curves: FloatArray, step_nm: float) -> BoolArray:
    """Whether so much of curves (N, T) over the search range lies about their lowest that they tell no thickness."""
    best = curves.argmin(axis=1)[:, None]
    misses = curves > np.take_along_axis(curves, best, axis=1) + INTERVAL_GAP
    at, length = np.arange(curves.shape[1]), curves.shape[1]
    before = np.where(misses & (at < best), at, -1).max(axis=1)
    after = np.where(misses & (at > best), at, length).min(axis=1)
    piece = (after - before - 1) * step_nm > min(FADED_NM, FADED_SHARE * length * step_nm)
    return np.asarray(piece | (np.count_nonzero(misses, axis=1) < (1 - FADED_SHARE) * length))


def _parabola(curves: FloatArray, row: NDArray[np.intp], at: NDArray[np.intp]) -> tuple[FloatArray, FloatArray]:
    last = curves.shape[1] - 1
    inside = (at > 0) & (at < last)
    left, here, right = curves[row, np.maximum(at - 1, 0)], curves[row, at], curves[row, np.minimum(at + 1, last)]
    bend = left - 2 * here + right
    offset = np.where(inside & (bend > 0), np.clip(0.5 * (left - right) / np.where(bend > 0, bend, 1.0), -0.5, 0.5), 0.0)
    return offset, np.maximum(here - 0.25 * (left - right) * offset, 0.0)
