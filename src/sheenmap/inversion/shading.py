"""How much brightness differs from place to place after the blank, seen in the blocks' own signals.

With a block's thickness free, what is left of its residual along the signal itself tells its brightness. Noise is white
from block to block and shading is smooth, so that a smoothed map of brightness holds shading alone.
"""

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.inversion.likelihood import shots
from sheenmap.inversion.regions import Evidence
from sheenmap.lookup import Table, evaluate

SMOOTHED_BLOCKS = 4.0  # standard deviation of the smoothing
LEAST_U, MOST_U = 0.001, 0.05
FEWEST = 200  # blocks


def estimate_shading(thickness_nm: FloatArray, sure: BoolArray, evidence: Evidence, table: Table) -> float | None:
    """Rms of the brightness left, relative, over the ``sure`` blocks (h, w) with their thickness; None where too few are."""
    rows = np.flatnonzero(sure)
    if rows.size < FEWEST:
        return None
    brightness, information = _brightness(rows, thickness_nm.ravel()[rows], evidence, table)
    weight, weighted = np.zeros(sure.shape), np.zeros(sure.shape)
    weight.flat[rows] = information
    weighted.flat[rows] = information * brightness
    total = gaussian_filter(weight, SMOOTHED_BLOCKS, mode="constant")
    smooth = gaussian_filter(weighted, SMOOTHED_BLOCKS, mode="constant") / np.maximum(total, 1e-12)
    # Smoothing by a Gaussian of s blocks averages 4 pi s^2 of them.
    noise = 1.0 / np.maximum(total * 4 * np.pi * SMOOTHED_BLOCKS**2, 1e-12)
    counted = sure & (total > np.quantile(total[sure], 0.1))
    variance = float(np.average(smooth[counted] ** 2 - noise[counted], weights=1.0 / (noise[counted] + LEAST_U**2)))
    # The brightness seen is the mean of all shots', each with a shading of its own.
    each = variance * len(shots(table.signal.shape[-1]))
    return float(np.clip(np.sqrt(max(each, 0.0)), LEAST_U, MOST_U))


def _brightness(
    rows: NDArray[np.intp], thickness_nm: FloatArray, evidence: Evidence, table: Table
) -> tuple[FloatArray, FloatArray]:
    """Brightness (N,) over the table's, less 1, and its information."""
    expected, slope = evaluate(table, thickness_nm, None if evidence.angle_deg is None else evidence.angle_deg[rows])
    precision = evidence.precision[rows]
    along, with_signal = np.einsum("nij,nj->ni", precision, slope), np.einsum("nij,nj->ni", precision, expected)
    residual = evidence.signal[rows] - expected
    gg = np.maximum(np.einsum("ni,ni->n", slope, along), 1e-12)
    gf = np.einsum("ni,ni->n", expected, along)
    information = np.maximum(np.einsum("ni,ni->n", expected, with_signal) - gf**2 / gg, 1e-9)
    pull = np.einsum("ni,ni->n", residual, with_signal) - gf * np.einsum("ni,ni->n", residual, along) / gg
    return pull / information, information
