"""Small squares of pixels taken together: the mean signal knows the order far better than a pixel does.

Only the order and a first thickness come from here; the thickness of a pixel is its own.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.camera import Signal

MOST_BLOCKS = 60_000
SMALLEST, LARGEST = 4, 16
EVEN = 2.0  # variance within a block, a tilt taken out, over noise; above, an edge or dirt lies in it


@dataclass(frozen=True, kw_only=True, eq=False)
class Blocks:
    """Means over squares of ``size`` pixels, on a grid (h, w).

    ``signal`` and ``variance`` (h, w, 3) are of the mean; ``even`` (h, w) is True where a block holds enough usable pixels
    that differ by noise and a tilt alone; ``angle_deg`` (h, w) or None. A mean is worth ``pixels_worth`` independent pixels:
    one only where neighbours share their noise, since it is not known over how far.
    """

    size: int
    signal: FloatArray
    variance: FloatArray
    even: BoolArray
    angle_deg: FloatArray | None
    pixels_worth: float


def block_size(shape: tuple[int, ...]) -> int:
    """Side of a block in pixels for a picture of ``shape``: as small as keeps their number bounded."""
    return int(np.clip(np.ceil(np.sqrt(shape[0] * shape[1] / MOST_BLOCKS)), SMALLEST, LARGEST))


def gather_blocks(
    signal: Signal, usable: BoolArray, angle_deg: NDArray[np.floating] | None, *, size: int | None = None
) -> Blocks:
    """Blocks of a signal, of its ``usable`` pixels (H, W)."""
    size = size or block_size(usable.shape)
    share = _tiled(usable[..., None].astype(np.float32), size, mode="constant")
    count = share.sum(axis=(2, 3))
    values, variance = (_tiled(array, size) for array in (signal.values, signal.variance))
    weighted = np.where(share > 0, values, 0)
    mean = weighted.sum(axis=(2, 3)) / np.maximum(count, 1)
    noise = np.where(share > 0, variance, 0).sum(axis=(2, 3)) / np.maximum(count, 1)
    full = count[..., 0] >= 0.999 * size * size
    worth = float(size * size) if signal.spread <= 1 else 1.0
    roughness = _unevenness(values - mean[:, :, None, None, :], noise)
    return Blocks(
        size=size,
        signal=mean.astype(float),
        variance=noise.astype(float) / worth,
        even=full & (roughness <= EVEN),
        angle_deg=None if angle_deg is None else _tiled(angle_deg[..., None], size).mean(axis=(2, 3))[..., 0],
        pixels_worth=worth,
    )


def _tiled(array: NDArray[np.floating], size: int, *, mode: Literal["edge", "constant"] = "edge") -> NDArray[np.floating]:
    """(h, w, size, size, C) view of an array (H, W, C), filled up to whole blocks with its last values or with zeros."""
    height, width = array.shape[:2]
    pad = (-height % size, -width % size)
    if any(pad):
        array = np.pad(array, ((0, pad[0]), (0, pad[1]), (0, 0)), mode=mode)
    return array.reshape(array.shape[0] // size, size, array.shape[1] // size, size, -1).swapaxes(1, 2)


def _unevenness(deviation: NDArray[np.floating], noise: NDArray[np.floating]) -> NDArray[np.floating]:
    """Variance within blocks (h, w) over that of noise, after a plane through each channel is taken out."""
    size = deviation.shape[2]
    ramp = np.arange(size) - (size - 1) / 2
    scatter = size * float(np.sum(ramp**2))
    across = np.einsum("hwyxc,x->hwc", deviation, ramp)
    down = np.einsum("hwyxc,y->hwc", deviation, ramp)
    total = np.einsum("hwyxc,hwyxc->hwc", deviation, deviation) - (across**2 + down**2) / scatter
    per_channel = total / (size * size - 3) / np.maximum(noise, 1e-18)
    return np.asarray(per_channel.mean(axis=-1))
