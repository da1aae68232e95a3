"""Arrays of a map, thinned and packed small enough to travel inside a page."""

import base64
import math
import zlib
from dataclasses import dataclass
from typing import Any

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.flags import FLAGS, is_blocked
from sheenmap.measure import Measurement

WIDEST = 700  # cells along a side
SIGMA_STEP, RESIDUAL_STEP = 0.002, 0.03  # steps of a logarithmic scale
MOST_CANDIDATES = 3
LAST_CODE = 65_535
FLAG_BYTES = 1 if max(flag.bit for flag in FLAGS) < 8 else 2

Plane = NDArray[np.floating]
Packed = dict[str, Any]


@dataclass(frozen=True, kw_only=True)
class Grid:
    """Every ``stride``-th pixel from ``offset`` on: the pixels that the page holds."""

    stride: int
    offset: int
    columns: int
    rows: int

    def thin(self, plane: NDArray[Any]) -> NDArray[Any]:
        """The pixels of (..., H, W) that the page holds, (..., rows, columns)."""
        return plane[..., self.offset :: self.stride, self.offset :: self.stride]


def grid_of(height: int, width: int, *, widest: int = WIDEST) -> Grid:
    """The finest grid with no more than ``widest`` cells along a side."""
    stride = max(1, math.ceil(width / widest), math.ceil(height / widest))
    offset = min((stride - 1) // 2, height - 1, width - 1)
    return Grid(stride=stride, offset=offset, columns=len(range(offset, width, stride)), rows=len(range(offset, height, stride)))


def packed_planes(measurement: Measurement, grid: Grid) -> dict[str, Any]:
    """The arrays that the page's script draws and reads from, as text."""
    planes: dict[str, Any] = {
        "thickness": pack_linear(grid.thin(measurement.thickness_nm)),
        "sigma": pack_logarithmic(grid.thin(measurement.sigma_nm), SIGMA_STEP),
        "residual": pack_logarithmic(grid.thin(measurement.residual), RESIDUAL_STEP),
        "flags": _pack(grid.thin(measurement.flags), FLAG_BYTES),
        "share": None,
        "others": [],
    }
    if grid.stride > 1:
        planes["share"] = _pack(claimed_share(measurement, grid), 1)
    if measurement.candidates_nm is not None and measurement.candidate_odds is not None:
        for nm, odds in zip(measurement.candidates_nm[:MOST_CANDIDATES], measurement.candidate_odds[:MOST_CANDIDATES]):
            planes["others"].append({"nm": pack_linear(grid.thin(nm)), "odds": pack_linear(grid.thin(odds), finest=0.01)})
    return planes


def claimed_share(measurement: Measurement, grid: Grid) -> NDArray[np.uint8]:
    """How much of each cell is claimed, 0 to 255: a scratch between two of the page's pixels still shows. (rows, columns)."""
    claimed = (~is_blocked(measurement.flags)).view(np.uint8) * np.uint8(255)
    height, width = claimed.shape
    right, below = grid.columns * grid.stride - width, grid.rows * grid.stride - height
    whole = cv2.copyMakeBorder(claimed, 0, max(below, 0), 0, max(right, 0), cv2.BORDER_REPLICATE)
    whole = whole[: grid.rows * grid.stride, : grid.columns * grid.stride]
    return np.asarray(cv2.resize(whole, (grid.columns, grid.rows), interpolation=cv2.INTER_AREA), np.uint8)


def pack_linear(values: Plane, *, finest: float = 0.01) -> Packed:
    """Codes 1 to 65535 at a round step, ``finest`` or the least power of ten times it that spans the values; 0 is none."""
    finite = np.isfinite(values)
    if not finite.any():
        return {"kind": "linear", "low": 0.0, "step": finest, **_pack(np.zeros(values.shape, np.uint16), 2)}
    low, high = float(values[finite].min()), float(values[finite].max())
    step = finest
    while (high - low) / step > LAST_CODE - 2:
        step *= 10
    low = math.floor(low / step) * step
    codes = np.where(finite, np.rint((np.where(finite, values, low).astype(float) - low) / step) + 1, 0)
    return {"kind": "linear", "low": low, "step": step, **_pack(codes.astype(np.uint16), 2)}


def pack_logarithmic(values: Plane, step: float) -> Packed:
    """Codes at a constant ratio exp(``step``); 0 stands for what is not finite or not above 0."""
    usable = np.isfinite(values) & (values > 0)
    if not usable.any():
        return {"kind": "log", "low": 1.0, "step": step, **_pack(np.zeros(values.shape, np.uint16), 2)}
    low = float(values[usable].min())
    codes = np.where(usable, np.rint(np.log(np.where(usable, values, low) / low) / step) + 1, 0)
    return {"kind": "log", "low": low, "step": step, **_pack(np.minimum(codes, LAST_CODE).astype(np.uint16), 2)}


def _pack(codes: NDArray[Any], size: int) -> Packed:
    """Bytes of one weight together, highest first: the high ones hardly change and deflate to little."""
    high_first = [(codes >> (8 * place)).astype(np.uint8).tobytes() for place in reversed(range(size))]
    return {"bytes": size, "data": base64.b64encode(zlib.compress(b"".join(high_first), 3)).decode("ascii")}
