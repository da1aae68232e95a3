"""Statistics for each die."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.flags import FlagArray
from sheenmap.uniformity.statistics import claimed_pixels
from sheenmap.wafer import Dies


@dataclass(frozen=True, kw_only=True, eq=False)
class DieStatistics:
    """Of each die (D,): pixels inside the region, claimed ones, their mean, standard deviation and the mean's uncertainty in nm.

    ``u_mean_nm`` is the part that dies do not share. NaN where nothing is claimed (the standard deviation: fewer than two).
    """

    pixels: NDArray[np.int64]
    claimed: NDArray[np.int64]
    mean_nm: NDArray[np.float64]
    sd_nm: NDArray[np.float64]
    u_mean_nm: NDArray[np.float64]


def statistics_by_die(
    thickness_nm: NDArray[np.floating],
    sigma_nm: NDArray[np.floating],
    flags: FlagArray,
    dies: Dies,
    *,
    noise_correlation: float = 1.0,
) -> DieStatistics:
    """Mean and spread of the claimed pixels of each die.

    Parameters
    ----------
    thickness_nm, sigma_nm : (H, W) float
        Map and the standard uncertainty of each pixel that its neighbours do not share.
    flags : (H, W) uint16
        Those that block take a pixel out.
    dies : Dies
        From ``die_grid``.
    noise_correlation : float
        How many pixels share one draw of the noise.
    """
    count = dies.x_mm.size
    inside = dies.index >= 0
    claimed = claimed_pixels(thickness_nm, flags, inside)
    index = dies.index[claimed]
    values = thickness_nm[claimed].astype(np.float64)
    offset = float(values.mean()) if values.size else 0.0
    number = np.bincount(index, minlength=count)
    known = np.where(number > 0, number, np.nan)
    mean = np.bincount(index, weights=values - offset, minlength=count) / known
    spread = np.bincount(index, weights=(values - offset - np.nan_to_num(mean)[index]) ** 2, minlength=count)
    noise = np.bincount(index, weights=np.nan_to_num(sigma_nm[claimed].astype(np.float64)) ** 2, minlength=count)
    return DieStatistics(
        pixels=np.bincount(dies.index[inside], minlength=count), claimed=number, mean_nm=mean + offset,
        sd_nm=np.sqrt(spread / np.where(number > 1, number - 1, np.nan)), u_mean_nm=np.sqrt(noise * noise_correlation) / known,
    )  # fmt: skip
