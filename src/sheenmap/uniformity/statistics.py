"""Statistics over the claimed pixels of a map."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.flags import AMBIGUOUS, DARK, OFF_CURVE, SATURATED, FlagArray, has, is_blocked
from sheenmap.uniformity.records import Statistics

PERCENTILES = (1, 5, 25, 50, 75, 95, 99)
MOST_SORTED = 2_000_000  # beyond it percentiles come from every k-th value: good to 0.1 % of the standard deviation


def claimed_pixels(thickness_nm: NDArray[np.floating], flags: FlagArray, inside: BoolArray) -> BoolArray:
    """True where a pixel is inside, finite and not blocked by a flag. (H, W)."""
    return np.asarray(inside & ~is_blocked(flags) & np.isfinite(thickness_nm))


def statistics(
    thickness_nm: NDArray[np.floating],
    sigma_nm: NDArray[np.floating],
    flags: FlagArray,
    inside: BoolArray,
    u_common_nm: float = 0.0,
    *,
    noise_correlation: float = 1.0,
) -> Statistics:
    """Statistics of the claimed pixels inside a region.

    Parameters
    ----------
    thickness_nm, sigma_nm : (H, W) float
        Map and the standard uncertainty of each pixel that its neighbours do not share.
    flags : (H, W) uint16
        Those that block take a pixel out.
    inside : (H, W) bool
        The region.
    u_common_nm : float
        Standard uncertainty that all pixels share.
    noise_correlation : float
        How many pixels share one draw of the noise (1: independent; a mosaic sensor has 2 to 4).

    Returns
    -------
    Statistics
        Each pixel stands for the same area, so these are area-weighted. The corrected standard deviation is
        sqrt(s^2 - mean(sigma^2)), 0 where noise explains all of the spread.
    """
    claimed = claimed_pixels(thickness_nm, flags, inside)
    values = thickness_nm[claimed]
    counts = _counts(flags, inside)
    if values.size == 0:
        return Statistics(
            pixels=int(np.count_nonzero(inside)), claimed=0, mean_nm=None, median_nm=None, sd_nm=None, sd_noise_corrected_nm=None,
            u_mean_nm=None, percentiles={}, **counts,
        )  # fmt: skip
    mean = float(values.mean(dtype=np.float64))
    sd = float(values.std(dtype=np.float64, ddof=1)) if values.size > 1 else 0.0
    noise_variance = _mean_square(sigma_nm[claimed])
    found = percentiles(values)
    return Statistics(
        pixels=int(np.count_nonzero(inside)), claimed=int(values.size), mean_nm=mean, median_nm=found["50"], sd_nm=sd,
        sd_noise_corrected_nm=float(np.sqrt(max(sd**2 - noise_variance, 0.0))),
        u_mean_nm=float(np.sqrt(u_common_nm**2 + noise_variance * noise_correlation / values.size)),
        percentiles=found, **counts,
    )  # fmt: skip


def percentiles(values: NDArray[np.floating]) -> dict[str, float]:
    """The percentiles of ``PERCENTILES`` by linear interpolation, as {"1": nm, ...}. ``values`` (N,) finite, one or more."""
    thin = values[:: max(1, -(-values.size // MOST_SORTED))]
    return {str(level): float(value) for level, value in zip(PERCENTILES, np.percentile(thin, PERCENTILES))}


def _mean_square(sigma_nm: NDArray[np.floating] | FloatArray) -> float:
    finite = sigma_nm[np.isfinite(sigma_nm)]
    return float(np.mean(np.square(finite, dtype=np.float64))) if finite.size else 0.0


def _counts(flags: FlagArray, inside: BoolArray) -> dict[str, int]:
    """How many pixels inside are off the curve, ambiguous, or could not be seen (saturated or dark)."""
    off_curve = inside & has(flags, OFF_CURVE)
    unseen = inside & (has(flags, SATURATED) | has(flags, DARK)) & ~off_curve
    return {
        "off_curve": int(np.count_nonzero(off_curve)),
        "ambiguous": int(np.count_nonzero(inside & has(flags, AMBIGUOUS))),
        "unseen": int(np.count_nonzero(unseen)),
    }
