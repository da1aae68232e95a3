"""The grid of dies on a wafer."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.wafer.coordinates import part_mm
from sheenmap.wafer.faults import SiteError
from sheenmap.wafer.region import Region

MOST_DIES = 20_000
OUTSIDE = -1


@dataclass(frozen=True, kw_only=True, eq=False)
class Dies:
    """Dies that hold a pixel of the region, numbered by rows from the top and in a row from the left (notch down).

    Parameters
    ----------
    x_mm, y_mm : (D,) float
        Their centres in part coordinates.
    column, row : (D,) int
        Steps of the grid from the die at the part's centre; row grows upwards.
    is_whole : (D,) bool
        True where all pixels of the die are inside the region.
    index : (H, W) int32
        Which die each pixel belongs to; -1 outside the region.
    """

    width_mm: float
    height_mm: float
    x_mm: NDArray[np.float64]
    y_mm: NDArray[np.float64]
    column: NDArray[np.int64]
    row: NDArray[np.int64]
    is_whole: NDArray[np.bool_]
    index: NDArray[np.int32]


def die_grid(region: Region, width_mm: float, height_mm: float, *, offset_mm: tuple[float, float] = (0.0, 0.0)) -> Dies:
    """Dies of a size on a region.

    Parameters
    ----------
    region : Region
        With a scale.
    width_mm, height_mm : float
        Pitch of the grid.
    offset_mm : (x, y)
        Where the centre of a die lies from the part's centre; (0, 0) centres a die on the part.

    Returns
    -------
    Dies

    Raises
    ------
    SiteError
        A pitch not above 0, or more than 20000 dies.
    RegionError
        No scale.
    """
    if not (width_mm > 0 and height_mm > 0):
        raise SiteError(f"a die needs a width and height above 0 mm, found {width_mm:g} x {height_mm:g}")
    height, width = region.inside.shape
    x_mm, y_mm = part_mm(region, np.arange(width, dtype=np.float64), np.arange(height, dtype=np.float64)[:, None])
    column = np.floor((x_mm - offset_mm[0]) / width_mm + 0.5).astype(np.int64)
    row = np.floor((y_mm - offset_mm[1]) / height_mm + 0.5).astype(np.int64)
    across = int(column.max() - column.min()) + 1
    if across * (int(row.max() - row.min()) + 1) > 4 * MOST_DIES:
        raise SiteError(f"dies of {width_mm:g} x {height_mm:g} mm make more than {MOST_DIES}; take a wider pitch")
    key = (row.max() - row) * across + (column - column.min())  # by rows from the top
    total = np.bincount(key.ravel())
    held = np.bincount(key[region.inside], minlength=total.size)
    used = np.flatnonzero(held)
    number = np.full(total.size, OUTSIDE, np.int32)
    number[used] = np.arange(used.size)
    of_column, of_row = used % across + column.min(), row.max() - used // across
    return Dies(
        width_mm=width_mm, height_mm=height_mm,
        x_mm=of_column * width_mm + offset_mm[0], y_mm=of_row * height_mm + offset_mm[1], column=of_column, row=of_row,
        is_whole=(held[used] == total[used]) & ~_cut_by_frame(key, used), index=np.where(region.inside, number[key], OUTSIDE),
    )  # fmt: skip


def _cut_by_frame(key: NDArray[np.int64], used: NDArray[np.int64]) -> NDArray[np.bool_]:
    """True for dies that reach the picture's border, and may go on beyond it."""
    border = np.concatenate([key[0], key[-1], key[:, 0], key[:, -1]])
    return np.isin(used, border)
