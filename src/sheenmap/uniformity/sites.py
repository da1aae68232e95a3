"""Readings at sites: the robust mean over each spot, with its uncertainty."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.flags import FLAGS, OUTSIDE, FlagArray, has, is_blocked
from sheenmap.uniformity.records import SiteReading
from sheenmap.wafer import Sites

LEAST_CLAIMED = 0.5  # of the spot's pixels inside the region
FAR, MOST_FAR = 6.0, 0.2  # a fifth of the pixels six standard deviations off: the spot holds two thicknesses, not one
HUBER_CUT = 1.5  # standard deviations: 96 % efficient on normal noise


def read_sites(
    thickness_nm: NDArray[np.floating],
    sigma_nm: NDArray[np.floating],
    flags: FlagArray,
    sites: Sites,
    u_common_nm: float = 0.0,
    *,
    noise_correlation: float = 1.0,
) -> tuple[SiteReading, ...]:
    """Values at sites.

    Parameters
    ----------
    thickness_nm, sigma_nm : (H, W) float
        Map and the standard uncertainty of each pixel that its neighbours do not share.
    flags : (H, W) uint16
        Pixels outside the region carry ``outside``.
    sites : Sites
        Where to read.
    u_common_nm : float
        Standard uncertainty that all pixels share; it does not shrink with the spot.
    noise_correlation : float
        How many pixels share one draw of the noise.

    Returns
    -------
    tuple of SiteReading
        Numbered from 1 in the order of ``sites``. A spot that reaches over the region's border counts only its pixels inside.

    Notes
    -----
    The mean is Huber's. Its local uncertainty comes from the larger of the pixels' own sigma and the scatter found in the
    spot, so that a sigma that is too small shows. Where the spot holds a step, by how far the plain mean is off is added.

    References
    ----------
    Huber, Ann. Math. Stat. 35, 73 (1964) (from memory).
    """
    readings = []
    for index in range(sites.x_px.size):
        rows, columns = _spot(sites, index, (flags.shape[0], flags.shape[1]))
        values, sigma = thickness_nm[rows, columns].astype(float), sigma_nm[rows, columns].astype(float)
        readings.append(_reading(index, sites, values, sigma, flags[rows, columns], u_common_nm, noise_correlation))
    return tuple(readings)


def _spot(sites: Sites, index: int, shape: tuple[int, int]) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Rows and columns of the pixels whose centre is in the spot."""
    x, y, reach = float(sites.x_px[index]), float(sites.y_px[index]), sites.radius_px
    columns = np.arange(max(0, int(np.ceil(x - reach))), min(shape[1], int(np.floor(x + reach)) + 1))
    rows = np.arange(max(0, int(np.ceil(y - reach))), min(shape[0], int(np.floor(y + reach)) + 1))
    row, column = np.meshgrid(rows, columns, indexing="ij")
    near = (column - x) ** 2 + (row - y) ** 2 <= reach**2 * (1 + 1e-9)
    return row[near], column[near]


def _reading(
    index: int, sites: Sites, values: FloatArray, sigma: FloatArray, flags: FlagArray, u_common_nm: float, correlation: float
) -> SiteReading:
    within = ~has(flags, OUTSIDE)
    claimed = within & ~is_blocked(flags) & np.isfinite(values)
    pixels, count = int(np.count_nonzero(within)), int(np.count_nonzero(claimed))
    status = "measured" if pixels and count >= LEAST_CLAIMED * pixels else _why_not(flags, within, pixels, count)
    mean, u_local, u = None, None, None
    if status == "measured":
        mean, u_local = _robust_mean(values[claimed], sigma[claimed], correlation)
        u = float(np.hypot(u_local, u_common_nm))
    return SiteReading(
        number=index + 1, x_mm=float(sites.x_mm[index]), y_mm=float(sites.y_mm[index]), x_px=float(sites.x_px[index]),
        y_px=float(sites.y_px[index]), thickness_nm=mean, u_nm=u, u_local_nm=u_local, pixels=pixels, claimed=count, status=status,
    )  # fmt: skip


def _why_not(flags: FlagArray, within: BoolArray, pixels: int, count: int) -> str:
    """The share claimed, and the flag that stands on the most pixels of the spot."""
    if not pixels:
        return "not measured: the spot lies outside the region"
    share = {flag.name: int(np.count_nonzero(has(flags, flag) & within)) for flag in FLAGS if flag.blocks}
    name = max(share, key=lambda key: share[key])
    cause = f", most are {name}" if share[name] else ""
    return f"not measured: {count} of {pixels} pixels are claimed{cause}"


def _robust_mean(values: FloatArray, sigma: FloatArray, correlation: float) -> tuple[float, float]:
    """Huber's mean, and its standard uncertainty from noise and scatter."""
    noise = float(np.sqrt(np.mean(np.square(sigma[np.isfinite(sigma)])))) if np.isfinite(sigma).any() else 0.0
    centre = float(np.median(values))
    scale = max(1.4826 * float(np.median(np.abs(values - centre))), noise, 1e-9)
    for _ in range(50):
        weights = np.minimum(1.0, HUBER_CUT * scale / np.maximum(np.abs(values - centre), 1e-12))
        moved = float(np.sum(weights * values) / np.sum(weights))
        done, centre = abs(moved - centre) < 1e-9 * max(abs(centre), 1.0), moved
        if done:
            break
    residual = np.clip(values - centre, -HUBER_CUT * scale, HUBER_CUT * scale)
    scatter = float(np.sqrt(np.sum(residual**2) / max(values.size - 1, 1)))
    inner = max(float(np.mean(np.abs(values - centre) <= HUBER_CUT * scale)), 0.5)
    effective = max(values.size / correlation, 1.0)
    local = max(noise, scatter / inner if values.size > 1 else 0.0) / float(np.sqrt(effective))
    is_split = float(np.mean(np.abs(values - centre) > FAR * scale)) > MOST_FAR
    return centre, float(np.hypot(local, np.mean(values) - centre)) if is_split else local
