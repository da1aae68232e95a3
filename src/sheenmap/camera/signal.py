"""From pictures to the signal: the photograph relative to the blank, with its variance and its first flags.

Values, variance and flags travel together, and each step leaves a line in the history.
"""

from dataclasses import dataclass
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray
from sheenmap.camera.encoding import Encoding, decode
from sheenmap.camera.noise import Noise, Rounding, estimate_noise
from sheenmap.flags import DARK, SATURATED, FlagArray

Floats = NDArray[np.float32]

LOWEST_BLANK_IN_SIGMA = 8.0  # a blank weaker than this multiple of its own noise divides by nothing
SMOOTHING = 5  # pixels; the variance is taken at a local mean so that it does not follow the pixel's own noise


@dataclass(frozen=True, kw_only=True, eq=False)
class Frame:
    """A picture made linear: ``values`` (H, W, 3) float32, full scale 1; ``clipped`` (H, W) bool; its noise."""

    values: Floats
    clipped: NDArray[np.bool_]
    noise: Noise
    frames: int = 1


@dataclass(frozen=True, kw_only=True, eq=False)
class Signal:
    """The photograph relative to the blank.

    Parameters
    ----------
    values, variance : (H, W, 3) float32
        Ratio to the blank in each channel, and its variance by noise of both pictures.
    flags : (H, W) uint16
        ``saturated`` and ``dark`` where they hold.
    correlation : (3, 3) float
        Of the channels' noise.
    spread : float
        Variance of a mean of many neighbours over what white noise would leave.
    history : tuple of str
        What was done, in order.
    """

    values: Floats
    variance: Floats
    flags: FlagArray
    correlation: FloatArray
    spread: float
    history: tuple[str, ...]


def linear_frame(
    codes: NDArray[Any], encoding: Encoding, full_scale: float, *, frames: int = 1, noise: Noise | None = None
) -> Frame:
    """A picture's codes (H, W, 3) made linear; its noise is estimated when ``noise`` is None.

    ``codes`` may be a mean of ``frames`` pictures (then float). A value at full scale in any channel is clipped.
    """
    is_float_picture = full_scale == 1 and codes.dtype.kind == "f"
    clipped = np.any(codes > full_scale if is_float_picture else codes >= full_scale, axis=-1)
    values = linear_codes(codes, encoding, full_scale)
    rounding = Rounding(encoding=encoding, full_scale=full_scale) if full_scale > 1 else None
    if noise is None:
        noise = estimate_noise(values, usable=~clipped, rounding=rounding)
    return Frame(values=values, clipped=clipped, noise=noise, frames=frames)


def linear_codes(codes: NDArray[Any], encoding: Encoding, full_scale: float) -> Floats:
    """Codes (H, W, 3) made linear, full scale 1."""
    if codes.dtype.kind == "u":
        every = decode(encoding, np.arange(full_scale + 1), full_scale).astype(np.float32)
        return np.asarray(every[codes])
    return decode(encoding, codes.astype(np.float64), full_scale).astype(np.float32)


def relative_signal(photo: Frame, blank: Frame, dark: Floats | None) -> Signal:
    """The photograph over the blank, after the dark (H, W, 3), or the lit light trap, is taken from both."""
    above_dark = photo.values if dark is None else photo.values - dark
    blank_above = blank.values if dark is None else blank.values - dark
    blank_variance = blank.noise.variance(_local_mean(blank.values))
    too_dark = np.any(blank_above < LOWEST_BLANK_IN_SIGMA * np.sqrt(blank_variance), axis=-1) | np.any(blank_above <= 0, axis=-1)
    divisor = np.maximum(blank_above, np.float32(1e-6))
    values = above_dark / divisor
    smooth = _local_mean(above_dark)
    own = photo.noise.variance(_local_mean(photo.values)) / divisor**2
    from_blank = (smooth / divisor) ** 2 * blank_variance / divisor**2
    flags = np.zeros(values.shape[:2], np.uint16)
    flags[_grown(photo.clipped | blank.clipped)] |= np.uint16(SATURATED.mask)
    flags[too_dark] |= np.uint16(DARK.mask)
    return Signal(
        values=np.asarray(values, dtype=np.float32),
        variance=(own + from_blank).astype(np.float32),
        flags=flags,
        correlation=photo.noise.correlation,
        spread=photo.noise.spread,
        history=_history(photo, blank, dark, flags),
    )


def _local_mean(values: Floats) -> Floats:
    return np.asarray(cv2.blur(values, (SMOOTHING, SMOOTHING)), dtype=np.float32)


def _grown(mask: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """A pixel's margin more: what blooms or is resampled beside a clipped pixel cannot be trusted either."""
    return np.asarray(cv2.dilate(mask.astype(np.uint8), np.ones((3, 3), np.uint8)), dtype=bool)


def _history(photo: Frame, blank: Frame, dark: Floats | None, flags: FlagArray) -> tuple[str, ...]:
    lines = [] if dark is None else [f"dark subtracted: mean {100 * float(dark.mean()):.3f} % of full scale"]
    level = np.maximum(np.median(photo.values.reshape(-1, 3), axis=0), 1e-6)
    share = 100 * np.sqrt(photo.noise.variance(level)) / level
    lines.append("divided by the blank, mean level " + ", ".join(f"{100 * v:.1f}" for v in blank.values.mean(axis=(0, 1))) + " %")
    lines.append("noise of one pixel at the middle level, red green blue: " + ", ".join(f"{v:.2f}" for v in share) + " %")
    if photo.noise.spread > 1:
        lines.append(f"neighbouring pixels share noise (variance {photo.noise.spread:.1f} times that of their differences)")
    lines.append(f"saturated with margin: {100 * float(np.mean((flags & SATURATED.mask) > 0)):.2f} % of the picture")
    return tuple(lines)
