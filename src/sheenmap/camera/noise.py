"""The camera's noise: read, shot and rounding, measured from a picture where nobody tells it.

A picture of a film is smooth between its edges, so that high differences between neighbours hold noise and nothing else.
Fourth differences (1, -4, 6, -4, 1) cancel cubic shading and slow fringes; their mean square over the weights' sum of
squares, 70, is the variance of white noise. Noise that a camera has smoothed or a JPEG has thinned is stronger at wider
spacing; then the wide spacing is what a pixel's error is made of.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray
from sheenmap.camera.encoding import Encoding, code_step

FOURTH_DIFFERENCE = (1.0, -4.0, 6.0, -4.0, 1.0)
SQUARED_WEIGHTS = 70.0
TILE = 8
WIDE_SPACING = 3
LOOKED_UP, LOOKUP_STEPS, HIGHEST_LEVEL = 300_000, 16_384, 1.25
MOST_PIXELS, BAND_ROWS = 1_000_000, 64  # of a large picture that are looked at, in bands
CORRELATED_RATIO = 1.15  # wide over narrow variance; white noise on 100 tiles stays under it with odds above 0.999
SMALLEST_SHARE_OF_ROUNDING = 3.0  # below, noise is finer than a code and rounding is no longer an independent twelfth
LARGEST_SHARE_OF_EDGES = (3.0, 2.2, 1.8, 1.6, 1.6, 1.6)  # tiles above this multiple of the line hold an edge, dust, a scratch
FEWEST_TILES = 12


@dataclass(frozen=True, kw_only=True, eq=False)
class Rounding:
    """The codes that a picture is rounded to."""

    encoding: Encoding
    full_scale: float

    def variance(self, level: NDArray[np.floating]) -> NDArray[np.floating]:
        """Variance of rounding at linear levels (...,): one twelfth of the code's width squared."""
        width = code_step(self.encoding, np.asarray(level, dtype=float), self.full_scale)
        return np.asarray(width * width / 12)


@dataclass(frozen=True, kw_only=True, eq=False)
class Noise:
    """Variance of a channel's linear value y (full scale is 1): ``read_variance + shot * y`` and rounding to codes.

    Parameters
    ----------
    read_variance, shot : (3,) float
        Full-scale units squared, and full-scale units.
    rounding : Rounding or None
        The codes that the picture was rounded to; None for a float picture.
    correlation : (3, 3) float
        Between channels; the unit matrix for an ordinary sensor, not for a JPEG with thinned colour.
    spread : float
        Variance of a mean of many neighbours over what white noise would leave, 1 for white noise.
    """

    read_variance: FloatArray
    shot: FloatArray
    correlation: FloatArray
    rounding: Rounding | None = None
    spread: float = 1.0

    def variance(self, level: NDArray[np.floating]) -> NDArray[np.floating]:
        """Variance at linear levels (..., 3); of a whole picture it is looked up, which errs by less than a thousandth."""
        if level.size <= LOOKED_UP:
            return self._exact(level)
        grid = np.linspace(0.0, HIGHEST_LEVEL, LOOKUP_STEPS)
        every = self._exact(np.repeat(grid[:, None], 3, axis=1)).astype(level.dtype)
        at = np.clip(level * ((LOOKUP_STEPS - 1) / HIGHEST_LEVEL) + 0.5, 0, LOOKUP_STEPS - 1).astype(np.uint16)
        return np.stack([every[:, c].take(at[..., c]) for c in range(3)], axis=-1)

    def _exact(self, level: NDArray[np.floating]) -> NDArray[np.floating]:
        dtype = level.dtype
        result: NDArray[np.floating] = self.read_variance.astype(dtype) + self.shot.astype(dtype) * np.maximum(level, 0)
        return result if self.rounding is None else result + self.rounding.variance(level).astype(dtype)


def stated_noise(full_well_e: float, read_noise_e: float, *, rounding: Rounding | None = None) -> Noise:
    """The noise that a data sheet gives: electrons at full scale and rms read noise in electrons (EMVA 1288)."""
    return Noise(
        read_variance=np.full(3, (read_noise_e / full_well_e) ** 2),
        shot=np.full(3, 1.0 / full_well_e),
        correlation=np.eye(3),
        rounding=rounding,
    )


def estimate_noise(
    linear: NDArray[np.floating], *, usable: NDArray[np.bool_] | None = None, rounding: Rounding | None = None
) -> Noise:
    """Noise of one picture, from its own fourth differences.

    Parameters
    ----------
    linear : (H, W, 3) float
        Linear values, full scale 1, not clipped where ``usable``.
    usable : (H, W) bool or None
        False where values are clipped.

    Notes
    -----
    Tiles are sorted by level; in each level the tiles without an edge give the variance, and a straight line through
    the levels the read and shot noise. A tile's variance has a relative standard error of about 0.2.
    """
    narrow = _tiles(linear, 1, usable)
    wide = _tiles(linear, WIDE_SPACING, usable)
    if narrow is None or wide is None:
        return Noise(read_variance=np.zeros(3), shot=np.zeros(3), correlation=np.eye(3), rounding=rounding)
    fine, coarse = _fitted(narrow, rounding), _fitted(wide, rounding)
    ratio = _ratio(fine, coarse, rounding)
    is_correlated = ratio > CORRELATED_RATIO
    chosen = coarse if is_correlated else fine
    return Noise(
        read_variance=chosen.read_variance, shot=chosen.shot, correlation=_correlation(chosen.tiles, chosen.keep),
        rounding=rounding, spread=ratio if is_correlated else 1.0,
    )  # fmt: skip


@dataclass(frozen=True, kw_only=True, eq=False)
class _Tiles:
    level: FloatArray  # (N, 3)
    covariance: FloatArray  # (N, 3, 3)


def _tiles(linear: NDArray[np.floating], spacing: int, usable: NDArray[np.bool_] | None) -> _Tiles | None:
    """Tiles of the whole picture, or of bands spread over it when it is large: some thousand tiles know the noise to 1 %."""
    height, width = linear.shape[:2]
    most = max(1, MOST_PIXELS // (BAND_ROWS * width))
    if height <= BAND_ROWS * most:
        return _band_tiles(linear, spacing, usable)
    starts = np.linspace(0, height - BAND_ROWS, most).astype(int)
    bands = [np.s_[start : start + BAND_ROWS] for start in starts]
    found = [_band_tiles(linear[band], spacing, None if usable is None else usable[band]) for band in bands]
    known = [tiles for tiles in found if tiles is not None]
    if not known:
        return None
    return _Tiles(
        level=np.concatenate([tiles.level for tiles in known]), covariance=np.concatenate([tiles.covariance for tiles in known])
    )


def _band_tiles(linear: NDArray[np.floating], spacing: int, usable: NDArray[np.bool_] | None) -> _Tiles | None:
    height, width = linear.shape[:2]
    if min(height, width) < 4 * spacing + TILE:
        return None
    rows, columns = ((side - 4 * spacing) // TILE for side in (height, width))
    sums, counts, level = (np.zeros((rows, columns, depth)) for depth in (9, 1, 3))
    for axis in (0, 1):
        difference = _fourth_difference(linear, spacing, axis)
        trimmed = _trimmed(linear, spacing, axis)
        good = np.ones(difference.shape[:2]) if usable is None else _all_usable(usable, spacing, axis).astype(float)
        pairs = np.stack([difference[..., i] * difference[..., j] for i in range(3) for j in range(3)], axis=-1)
        crop = (slice(0, rows * TILE), slice(0, columns * TILE))
        sums += _tile_sums(pairs[crop] * good[crop][..., None])
        counts += _tile_sums(good[crop][..., None])
        level += _tile_sums(trimmed[crop] * good[crop][..., None])
    full = counts[..., 0] >= TILE * TILE
    if not np.any(full):
        return None
    covariance = (sums / np.maximum(counts, 1))[full].reshape(-1, 3, 3) / SQUARED_WEIGHTS
    return _Tiles(level=(level / np.maximum(counts, 1))[full], covariance=covariance)


def _fourth_difference(linear: NDArray[np.floating], spacing: int, axis: int) -> FloatArray:
    length = linear.shape[axis] - 4 * spacing
    total = sum(weight * _along(linear, axis, k * spacing, length) for k, weight in enumerate(FOURTH_DIFFERENCE))
    other = 1 - axis
    return np.asarray(_along(np.asarray(total), other, 2 * spacing, linear.shape[other] - 4 * spacing), dtype=float)


def _trimmed(linear: NDArray[np.floating], spacing: int, axis: int) -> NDArray[np.floating]:
    inner = _along(linear, axis, 2 * spacing, linear.shape[axis] - 4 * spacing)
    return _along(inner, 1 - axis, 2 * spacing, linear.shape[1 - axis] - 4 * spacing)


def _all_usable(usable: NDArray[np.bool_], spacing: int, axis: int) -> NDArray[np.bool_]:
    length = usable.shape[axis] - 4 * spacing
    every = np.logical_and.reduce([_along(usable, axis, k * spacing, length) for k in range(5)])
    return _along(every, 1 - axis, 2 * spacing, usable.shape[1 - axis] - 4 * spacing)


def _along(array: NDArray, axis: int, start: int, length: int) -> NDArray:  # type: ignore[type-arg]
    return array[start : start + length] if axis == 0 else array[:, start : start + length]


def _tile_sums(values: FloatArray) -> FloatArray:
    height, width, depth = values.shape
    tiles = values.reshape(height // TILE, TILE, width // TILE, TILE, depth)
    return np.asarray(tiles.sum(axis=(1, 3)))


@dataclass(frozen=True, kw_only=True, eq=False)
class _Fitted:
    """Tiles with the line through those without an edge; ``keep`` (N,) tells which."""

    tiles: _Tiles
    read_variance: FloatArray
    shot: FloatArray
    keep: NDArray[np.bool_]


def _fitted(tiles: _Tiles, rounding: Rounding | None) -> _Fitted:
    read_variance, shot, keep = _lines(tiles, rounding)
    return _Fitted(tiles=tiles, read_variance=read_variance, shot=shot, keep=keep)


def _ratio(narrow: _Fitted, wide: _Fitted, rounding: Rounding | None) -> float:
    """Variance at the wide spacing over that at the narrow one, level by level.

    Only tiles without an edge are asked: wide ones meet edges oftener, which would look like noise that neighbours share.
    """
    medians = [_over_line(fitted.tiles, fitted.keep, narrow, rounding) for fitted in (wide, narrow)]
    return medians[0] / medians[1] if medians[1] > 0 else 1.0


def _over_line(tiles: _Tiles, keep: NDArray[np.bool_], line: _Fitted, rounding: Rounding | None) -> float:
    """Median over tiles of their variance over that of a line at their level."""
    level = np.maximum(tiles.level[keep], 0)
    known = 0.0 if rounding is None else rounding.variance(level)
    expected = (line.read_variance + line.shot * level + known).sum(axis=1)
    return float(np.median(np.trace(tiles.covariance[keep], axis1=1, axis2=2) / np.maximum(expected, 1e-18)))


def _lines(tiles: _Tiles, rounding: Rounding | None) -> tuple[FloatArray, FloatArray, NDArray[np.bool_]]:
    """Read variance and shot (3,) of each channel, and the tiles (N,) without an edge that they were drawn through."""
    variance = np.diagonal(tiles.covariance, axis1=1, axis2=2)
    known = np.zeros_like(variance) if rounding is None else rounding.variance(tiles.level)
    lines = np.array([_start(tiles.level[:, c], variance[:, c]) for c in range(3)])
    keep = np.ones(len(variance), bool)
    for share in LARGEST_SHARE_OF_EDGES:
        expected = lines[:, 0] + lines[:, 1] * np.maximum(tiles.level, 0) + known
        smooth = variance.sum(axis=1) <= share * expected.sum(axis=1)
        keep = smooth if np.count_nonzero(smooth) >= FEWEST_TILES else keep
        lines = np.array([_line(tiles.level[keep, c], variance[keep, c], known[keep, c]) for c in range(3)])
    return lines[:, 0], lines[:, 1], keep


def _start(level: FloatArray, variance: FloatArray) -> tuple[float, float]:
    """A first line that edges cannot lift: the lower quartile of tiles of like level, in logarithms, by the pinball loss."""
    parts = np.array_split(np.argsort(level, kind="stable"), max(1, min(24, level.size // 20)))
    levels = np.array([np.mean(level[part]) for part in parts])
    lower = np.log(np.maximum([np.quantile(variance[part], 0.25) for part in parts], 1e-16))
    read = np.concatenate([[0.0], np.geomspace(1e-11, 1e-2, 46)])[:, None, None]
    shot = np.concatenate([[0.0], np.geomspace(1e-9, 1e-1, 41)])[None, :, None]
    gap = lower - np.log(np.maximum(read + shot * np.maximum(levels, 0), 1e-16))
    loss = np.where(gap > 0, 0.3 * gap, -0.7 * gap).sum(axis=-1)
    best = np.unravel_index(np.argmin(loss), loss.shape)
    return float(read[best[0], 0, 0]), float(shot[0, best[1], 0])


def _line(level: FloatArray, total: FloatArray, known: FloatArray) -> tuple[float, float]:
    """Read variance and shot of ``total = read + shot * level + known``, both >= 0, tiles weighing by relative error."""
    blurred_by_codes = total < SMALLEST_SHARE_OF_ROUNDING * known
    if np.any(~blurred_by_codes):
        level, total, known = (part[~blurred_by_codes] for part in (level, total, known))
    variance = total - known
    weight = np.ones_like(level)
    for _ in range(4):
        mean_level, mean_variance = np.average(level, weights=weight), max(float(np.average(variance, weights=weight)), 0.0)
        scatter = np.sum(weight * (level - mean_level) ** 2)
        slope = np.sum(weight * (level - mean_level) * (variance - mean_variance)) / scatter if scatter > 0 else 0.0
        slope = float(np.clip(slope, 0.0, mean_variance / max(mean_level, 1e-9)))
        read = max(mean_variance - slope * mean_level, 0.0)
        expected = known + read + slope * np.maximum(level, 0)
        weight = 1.0 / np.maximum(expected, expected.mean() * 1e-3 + 1e-18) ** 2
    return read, slope


def _correlation(tiles: _Tiles, keep: NDArray[np.bool_]) -> FloatArray:
    variance = np.maximum(np.diagonal(tiles.covariance, axis1=1, axis2=2), 1e-18)
    scaled = tiles.covariance / np.sqrt(variance[:, :, None] * variance[:, None, :])
    mean = scaled[keep].mean(axis=0)
    significant = np.abs(mean) > 0.05
    return np.where(significant | np.eye(3, dtype=bool), np.clip(mean, -0.98, 0.98) * (1 - np.eye(3)) + np.eye(3), 0.0)
