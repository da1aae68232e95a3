"""Where the film is, roughly: a plane through the blocks around each block, of one region only.

The plane tells a pixel where to look; it never enters the pixel's thickness but as a wide window.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import distance_transform_edt

from sheenmap.arrays import BoolArray, FloatArray

REACH = 2  # blocks to each side
FLATTEST = 1e-3  # ridge on the slopes, so that a lone block stays level


@dataclass(frozen=True, kw_only=True, eq=False)
class Planes:
    """A plane for each block (h, w): thickness at its centre, slopes in nm per pixel, scatter of the blocks about it in nm.

    ``region`` is -1 where a block knows nothing, and ``leader`` the flat number of the block that speaks for it: itself, or
    the nearest that knows.
    """

    size: int
    centre_nm: FloatArray
    right_nm: FloatArray
    down_nm: FloatArray
    scatter_nm: FloatArray
    region: NDArray[np.intp]
    leader: NDArray[np.intp]

    def at(
        self, row: NDArray[np.intp], column: NDArray[np.intp], block_row: NDArray[np.intp], block_column: NDArray[np.intp]
    ) -> FloatArray:
        """Thickness of the planes of blocks (N,), carried on to pixels (N,)."""
        middle = (self.size - 1) / 2
        right = column - (block_column * self.size + middle)
        down = row - (block_row * self.size + middle)
        block = (block_row, block_column)
        return np.asarray(self.centre_nm[block] + right * self.right_nm[block] + down * self.down_nm[block])


def fit_planes(thickness_nm: FloatArray, sigma_nm: FloatArray, region: NDArray[np.intp], size: int) -> Planes:
    """Planes through blocks (h, w) with standard uncertainty ``sigma_nm``; region -1 marks blocks that know nothing."""
    known = region >= 0
    weight = np.where(known, 1.0 / np.maximum(sigma_nm, 0.05) ** 2, 0.0)
    value = np.where(known, thickness_nm, 0.0)
    moments = np.zeros((*thickness_nm.shape, 3, 3))
    sums = np.zeros((*thickness_nm.shape, 3))
    square = np.zeros(thickness_nm.shape)
    total = np.zeros(thickness_nm.shape)
    for down in range(-REACH, REACH + 1):
        for right in range(-REACH, REACH + 1):
            same = (_shifted(region, down, right, -1) == region) & known
            w = np.where(same, _shifted(weight, down, right, 0.0), 0.0)
            step = _shifted(value, down, right, 0.0) - value
            base = np.array([1.0, right * size, down * size])
            moments += w[..., None, None] * np.outer(base, base)
            sums += (w * step)[..., None] * base
            square += w * step**2
            total += w
    ridge = np.diag([0.0, FLATTEST, FLATTEST]) * total[..., None, None] * size**2
    moments += ridge + np.eye(3) * 1e-12 + np.where(known, 0.0, 1.0)[..., None, None] * np.eye(3)
    solved = np.linalg.solve(moments, sums[..., None])[..., 0]
    left_over = np.maximum(square - np.einsum("hwi,hwi->hw", sums, solved), 0.0) / np.maximum(total, 1e-12)
    return Planes(
        size=size, region=region, leader=_leaders(known), centre_nm=value + solved[..., 0],
        right_nm=solved[..., 1], down_nm=solved[..., 2], scatter_nm=np.sqrt(left_over),
    )  # fmt: skip


def _leaders(known: BoolArray) -> NDArray[np.intp]:
    own = np.arange(known.size).reshape(known.shape)
    if known.all() or not known.any():
        return own
    row, column = distance_transform_edt(~known, return_distances=False, return_indices=True)
    return np.asarray(own[row, column])


def _shifted(values: NDArray, down: int, right: int, fill: float) -> NDArray:  # type: ignore[type-arg]
    """Element [r, c] of the result is values[r + down, c + right], or ``fill`` beyond the edge."""
    result = np.full_like(values, fill)
    height, width = values.shape
    rows, columns = slice(max(0, -down), min(height, height - down)), slice(max(0, -right), min(width, width - right))
    source = values[max(0, down) : max(0, height + min(0, down)), max(0, right) : max(0, width + min(0, right))]
    result[rows, columns] = source
    return result
