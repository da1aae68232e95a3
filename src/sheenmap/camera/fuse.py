"""Several photographs of one part as one signal: their channels one after the other."""

from collections.abc import Sequence
from dataclasses import replace

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray
from sheenmap.camera.signal import Signal
from sheenmap.flags import DARK, SATURATED

KNOWS_NOTHING = 1e4  # variance of a ratio to the blank that says nothing
UNUSABLE = np.uint16(SATURATED.mask | DARK.mask)
UNMOVED_PX = 0.05


def fused_signal(signals: Sequence[Signal]) -> Signal:
    """One signal (H, W, 3 S) of S signals in register.

    Where a shot is saturated or too dark its channels are given no weight; only a pixel that no shot can use keeps the flag.
    """
    first = signals[0]
    size = sum(signal.values.shape[-1] for signal in signals)
    correlation = np.zeros((size, size))
    start = 0
    for signal in signals:
        stop = start + len(signal.correlation)
        correlation[start:stop, start:stop] = signal.correlation
        start = stop
    variance = [
        np.where((signal.flags & UNUSABLE)[..., None] > 0, np.float32(KNOWS_NOTHING), signal.variance) for signal in signals
    ]
    flags = first.flags.copy()
    for signal in signals[1:]:
        flags &= signal.flags
    return Signal(
        values=np.concatenate([signal.values for signal in signals], axis=-1),
        variance=np.concatenate(variance, axis=-1),
        flags=flags,
        correlation=correlation,
        spread=max(signal.spread for signal in signals),
        history=tuple(line for signal in signals for line in signal.history),
    )


def moved_signal(signal: Signal, matrix: FloatArray) -> Signal:
    """The signal as it lies in the main photograph; ``matrix`` (2, 3) leads from main pixels to this shot's.

    What comes from outside the picture is flagged ``dark``.
    """
    if _moves(matrix, signal.flags.shape) < UNMOVED_PX:
        return signal
    height, width = signal.flags.shape
    flags = cv2.warpAffine(signal.flags, matrix, (width, height), flags=_how(cv2.INTER_NEAREST), borderValue=int(DARK.mask))
    values, variance = (_moved(array, matrix) for array in (signal.values, signal.variance))
    return replace(signal, values=values, variance=variance, flags=np.asarray(flags, dtype=np.uint16))


def _moved(array: NDArray[np.float32], matrix: FloatArray) -> NDArray[np.float32]:
    size = array.shape[1::-1]
    moved = cv2.warpAffine(array, matrix, size, flags=_how(cv2.INTER_LINEAR), borderMode=cv2.BORDER_REPLICATE)
    return np.asarray(moved, dtype=np.float32)


def _how(interpolation: int) -> int:
    return interpolation | cv2.WARP_INVERSE_MAP


def _moves(matrix: FloatArray, shape: tuple[int, ...]) -> float:
    """The largest move in pixels of a corner of the picture."""
    height, width = shape
    corners: NDArray[np.float64] = np.array([[0, 0, 1], [width, 0, 1], [0, height, 1], [width, height, 1]], dtype=float)
    return float(np.abs(corners @ matrix.T - corners[:, :2]).max())
