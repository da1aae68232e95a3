"""The thickness of a pixel and its uncertainty, near a place that is given.

Where the table is straight over the pixel's uncertainty, the likelihood is a Gaussian: Gauss-Newton steps lead to its
middle, and its width is the Cramer-Rao limit. At turning points, at zero and in weak zones it is not; there the posterior
is integrated over the table itself: its mean and its standard deviation are claimed.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray, chunks
from sheenmap.inversion.likelihood import Doubts, Fit, Whitener
from sheenmap.lookup import Table, evaluate

STEPS = 3
LONGEST_STEP_NM = 6.0
WIDE_NM = 2.0  # a standard deviation above it is integrated, whatever the curvature
STRAIGHT = (0.85, 1.18)  # information one sigma further on, over that here, within which a pixel counts as Gaussian
POINTS = 41
REACH = 1.5  # of the window, to each side
CHUNK = 20_000


@dataclass(frozen=True, kw_only=True, eq=False)
class Pixels:
    """Signals (N, 3) with noise variance (N, 3), the channels' correlation, and angles (N,) or None."""

    signal: NDArray[np.floating]
    variance: NDArray[np.floating]
    correlation: FloatArray
    angle_deg: NDArray[np.floating] | None

    def part(self, rows: slice | NDArray[np.intp] | NDArray[np.bool_]) -> "Pixels":
        """Some of the pixels."""
        angle = None if self.angle_deg is None else self.angle_deg[rows]
        return Pixels(signal=self.signal[rows], variance=self.variance[rows], correlation=self.correlation, angle_deg=angle)


@dataclass(frozen=True, kw_only=True, eq=False)
class Posterior:
    """Thickness and standard deviation in nm, and chi-square of the best fit with all doubts in it; all (N,)."""

    thickness_nm: FloatArray
    sigma_nm: FloatArray
    chi_square: FloatArray


def posterior_near(pixels: Pixels, table: Table, reference_nm: FloatArray, window_nm: FloatArray, doubts: Doubts) -> Posterior:
    """Posterior of pixels whose film lies about ``window_nm`` (N,) or less from ``reference_nm`` (N,)."""
    parts = [
        _posterior(pixels.part(rows), table, reference_nm[rows], window_nm[rows], doubts)
        for rows in chunks(len(reference_nm), CHUNK)
    ]
    if not parts:
        return Posterior(thickness_nm=np.empty(0), sigma_nm=np.empty(0), chi_square=np.empty(0))
    return Posterior(
        thickness_nm=np.concatenate([p.thickness_nm for p in parts]),
        sigma_nm=np.concatenate([p.sigma_nm for p in parts]),
        chi_square=np.concatenate([p.chi_square for p in parts]),
    )


def _posterior(pixels: Pixels, table: Table, reference_nm: FloatArray, window_nm: FloatArray, doubts: Doubts) -> Posterior:
    whitener = Whitener(pixels.variance, pixels.correlation, doubts.shading_u)
    reference_nm = np.clip(reference_nm, table.thickness_nm[0], table.thickness_nm[-1])
    low = np.clip(reference_nm - window_nm, table.thickness_nm[0], table.thickness_nm[-1])
    high = np.clip(reference_nm + window_nm, table.thickness_nm[0], table.thickness_nm[-1])
    thickness_nm = np.clip(reference_nm, low, high)
    for _ in range(STEPS):
        fit = _fit(pixels, table, thickness_nm, whitener)
        thickness_nm = np.clip(thickness_nm + np.clip(fit.pull, -LONGEST_STEP_NM, LONGEST_STEP_NM), low, high)
    fit = _fit(pixels, table, thickness_nm, whitener)
    sigma_nm = 1 / np.sqrt(fit.information)
    ahead = _fit(pixels, table, thickness_nm + np.minimum(sigma_nm, 4 * WIDE_NM), whitener)
    bend = ahead.information / fit.information
    at_edge = (thickness_nm <= low) | (thickness_nm >= high) | (thickness_nm < table.thickness_nm[0] + 3 * sigma_nm)
    hard = np.flatnonzero((sigma_nm > WIDE_NM) | (bend < STRAIGHT[0]) | (bend > STRAIGHT[1]) | at_edge)
    for rows in (hard[part] for part in chunks(hard.size, CHUNK // 10)):
        thickness_nm[rows], sigma_nm[rows] = _integrated(pixels.part(rows), table, reference_nm[rows], window_nm[rows], doubts)
    return Posterior(thickness_nm=thickness_nm, sigma_nm=sigma_nm, chi_square=goodness(pixels, table, thickness_nm, doubts))


def _fit(pixels: Pixels, table: Table, thickness_nm: FloatArray, whitener: Whitener) -> Fit:
    expected, slope = evaluate(table, thickness_nm, pixels.angle_deg)
    return whitener.fit(pixels.signal - expected, expected, slope)


def goodness(pixels: Pixels, table: Table, thickness_nm: FloatArray, doubts: Doubts) -> FloatArray:
    """Chi-square (N,) of thicknesses, with the doubts about lamp, camera and level counted as noise."""
    expected, slope = evaluate(table, thickness_nm, pixels.angle_deg)
    variance = pixels.variance + (doubts.colour_u * expected) ** 2
    return Whitener(variance, pixels.correlation, doubts.brightness_u).fit(pixels.signal - expected, expected, slope).chi_square


def _integrated(
    pixels: Pixels, table: Table, reference_nm: FloatArray, window_nm: FloatArray, doubts: Doubts
) -> tuple[FloatArray, FloatArray]:
    """Mean and standard deviation (N,) of the likelihood over the table, times a window that is flat within its width."""
    offset = np.linspace(-REACH, REACH, POINTS)
    place_nm = reference_nm[:, None] + window_nm[:, None] * offset
    chi_square = np.empty(place_nm.shape)
    whitener = Whitener(pixels.variance, pixels.correlation, doubts.shading_u)
    for j in range(POINTS):
        chi_square[:, j] = _fit(pixels, table, place_nm[:, j], whitener).chi_square
    beyond = np.maximum(np.abs(offset) - 1, 0) * 6.0  # falls to nothing over half a window
    log_weight = -0.5 * (chi_square + beyond**2)
    log_weight[(place_nm < table.thickness_nm[0]) | (place_nm > table.thickness_nm[-1])] = -np.inf
    weight = np.exp(log_weight - log_weight.max(axis=1, keepdims=True))
    weight /= weight.sum(axis=1, keepdims=True)
    mean = np.sum(weight * place_nm, axis=1)
    step = window_nm * (offset[1] - offset[0])
    return mean, np.sqrt(np.sum(weight * (place_nm - mean[:, None]) ** 2, axis=1) + step**2 / 12)
