"""Where a curve of colours comes back to itself."""

import numpy as np
from scipy.ndimage import minimum_filter

from sheenmap.arrays import FloatArray, chunks
from sheenmap.charts.chart import Repeat
from sheenmap.colour import delta_e_2000

MOST_NODES = 1600  # all pairs are compared: 2.5 million differences
ROWS_AT_ONCE = 64


def pair_differences(lab: FloatArray) -> FloatArray:
    """CIEDE2000 (N, N) of all pairs of colours (N, 3)."""
    differences = np.empty((len(lab), len(lab)))
    for rows in chunks(len(lab), ROWS_AT_ONCE):
        differences[rows] = delta_e_2000(lab[rows, None, :], lab[None, :, :])
    return differences


def find_repeats(
    lab: FloatArray, thickness_nm: FloatArray, within: float, *, apart_nm: float
) -> tuple[tuple[tuple[float, ...], ...], tuple[Repeat, ...]]:
    """For each thickness its look-alikes, and the pairs where the curve comes nearest to itself.

    Parameters
    ----------
    lab : (T, 3) float
        The curve of colours.
    thickness_nm : (T,) float
        Rising.
    within : float
        Largest CIEDE2000 of two colours that count as alike.
    apart_nm : float
        Pairs of ``repeats`` whose two ends both lie nearer than this to those of a better pair say nothing new and are left out.

    Returns
    -------
    look_alikes : (T,) tuple of tuples of float
        The most alike thickness of each other stretch that is alike, rising.
    repeats : tuple of Repeat
        Local minima of the difference over both thicknesses, the smallest first.

    Notes
    -----
    A stretch that runs on from the thickness itself is no repeat but a slow change. More than ``MOST_NODES`` thicknesses are
    compared on every second, third ... of them, so that a long chart takes a second and not a minute.
    """
    stride = -(-len(lab) // MOST_NODES)
    nodes_nm = thickness_nm[::stride]
    differences = pair_differences(lab[::stride])
    by_node = [tuple(float(nodes_nm[j]) for j in _others(row, i, within)) for i, row in enumerate(differences)]
    nearest = np.minimum((np.arange(len(lab)) + stride // 2) // stride, len(nodes_nm) - 1)
    return tuple(by_node[i] for i in nearest), _nearest_passes(differences, nodes_nm, within, apart_nm)


def _others(row: FloatArray, own: int, within: float) -> list[int]:
    """The least of each stretch of ``row`` within the limit, but for the stretch that holds ``own``."""
    is_alike = np.concatenate([[False], row <= within, [False]])
    edges = np.flatnonzero(is_alike[1:] != is_alike[:-1]).reshape(-1, 2)
    return [int(start + np.argmin(row[start:end])) for start, end in edges if not start <= own < end]


def _nearest_passes(differences: FloatArray, nodes_nm: FloatArray, within: float, apart_nm: float) -> tuple[Repeat, ...]:
    lowest = minimum_filter(differences, size=3, mode="nearest")
    ones, others = np.nonzero(np.triu((differences <= lowest) & (differences <= within), k=2))
    best_first = np.argsort(differences[ones, others], kind="stable")
    found: list[Repeat] = []
    for i, j in zip(ones[best_first], others[best_first]):
        pair = Repeat(one_nm=float(nodes_nm[i]), other_nm=float(nodes_nm[j]), de00=float(differences[i, j]))
        leaves_between = differences[i, i:j].max() > within and differences[i:j, j].max() > within
        if leaves_between and not any(_is_beside(pair, better, apart_nm) for better in found):
            found.append(pair)
    return tuple(found)


def _is_beside(one: Repeat, other: Repeat, apart_nm: float) -> bool:
    return abs(one.one_nm - other.one_nm) < apart_nm and abs(one.other_nm - other.other_nm) < apart_nm
