"""The recipe's region in a picture: which pixels are measured, the scale and the orientation."""

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray, read_only
from sheenmap.wafer.coordinates import from_above
from sheenmap.wafer.disc import find_disc, find_discs
from sheenmap.wafer.faults import RegionError
from sheenmap.wafer.region import Disc, Region
from sheenmap.wafer.spec import Direction, RegionSpec

DIRECTION_DEG: dict[Direction, float] = {"right": 0.0, "up": 90.0, "left": 180.0, "down": -90.0}


def locate(spec: RegionSpec, picture: NDArray[np.generic]) -> Region:
    """The region that a recipe asks for.

    Parameters
    ----------
    spec : RegionSpec
        What the recipe says.
    picture : (H, W) or (H, W, 3)
        Anything that grows with the light; only a disc looks at it, other shapes take its size.

    Returns
    -------
    Region
        A pixel is inside when its centre is. The rotation follows the notch or flat that was found, and where none was, the
        recipe's ``notch``.

    Raises
    ------
    NoDiscError
        A disc is asked for and not found.
    RegionError
        Mask of another size, polygon outside the picture, nothing left inside, or an edge exclusion without a scale.
    """
    shape = picture.shape[:2]
    if spec.shape == "disc":
        return _disc_region(spec, picture)
    inside = {"frame": _frame, "polygon": _polygon, "mask": _mask}[spec.shape](spec, shape)
    mm_per_px = None if spec.width_mm is None else spec.width_mm / shape[1]
    inside = _without_rim(inside, _exclusion_px(spec, mm_per_px))
    return Region(
        inside=_checked(inside),
        origin_px=((shape[1] - 1) / 2, (shape[0] - 1) / 2) if spec.shape == "frame" else _middle(inside),
        mm_per_px=mm_per_px, rotation_deg=_rotation(DIRECTION_DEG[spec.notch]), edge_exclusion_mm=spec.edge_exclusion_mm,
    )  # fmt: skip


def _disc_region(spec: RegionSpec, picture: NDArray[np.generic]) -> Region:
    return _about(find_disc(picture, notch_near_deg=DIRECTION_DEG[spec.notch]), spec, picture.shape[:2])


def locate_each(spec: RegionSpec, picture: NDArray[np.generic]) -> tuple[Region, ...]:
    """Regions of all discs of about the same size in a picture, by rows from the top and in a row from the left.

    Parameters, Raises
        As ``locate``, for the shape "disc".
    """
    discs = find_discs(picture, notch_near_deg=DIRECTION_DEG[spec.notch])
    return tuple(_about(disc, spec, picture.shape[:2]) for disc in discs)


def _about(disc: Disc, spec: RegionSpec, shape: tuple[int, ...]) -> Region:
    mm_per_px = _disc_scale(spec, disc, shape[1])
    pointing_deg = DIRECTION_DEG[spec.notch] if disc.notch_deg is None else disc.notch_deg
    return Region(
        inside=_checked(disc_inside(disc, shape, _exclusion_px(spec, mm_per_px))),
        origin_px=(disc.x_px, disc.y_px), mm_per_px=mm_per_px, disc=disc, rotation_deg=_rotation(pointing_deg),
        edge_exclusion_mm=spec.edge_exclusion_mm,
    )  # fmt: skip


def disc_inside(disc: Disc, shape: tuple[int, ...], exclusion_px: float) -> BoolArray:
    """True where a pixel's centre is on the disc, ``exclusion_px`` or more from its rim and from its flat. (H, W)."""
    columns, rows = np.arange(shape[1], dtype=np.float64), np.arange(shape[0], dtype=np.float64)[:, None]
    x, y = from_above(disc, columns - disc.x_px, rows - disc.y_px)
    reach = max(disc.radius_px - exclusion_px, 0.0)
    inside = x**2 + y**2 <= reach**2
    if disc.flat_px > 0 and disc.notch_deg is not None:
        angle_rad = np.deg2rad(disc.notch_deg)
        inside &= x * np.cos(angle_rad) - y * np.sin(angle_rad) <= disc.radius_px - disc.flat_px - exclusion_px
    return np.asarray(inside)


def _disc_scale(spec: RegionSpec, disc: Disc, width: int) -> float | None:
    if spec.diameter_mm is not None:
        return spec.diameter_mm / (2 * disc.radius_px)
    return None if spec.width_mm is None else spec.width_mm / width


def _exclusion_px(spec: RegionSpec, mm_per_px: float | None) -> float:
    if spec.edge_exclusion_mm == 0:
        return 0.0
    if mm_per_px is None:
        wanted = "region.diameter_mm" if spec.shape == "disc" else "region.width_mm"
        raise RegionError(f"region.edge_exclusion_mm is {spec.edge_exclusion_mm:g} but the picture has no scale: give {wanted}")
    return spec.edge_exclusion_mm / mm_per_px


def _rotation(pointing_deg: float) -> float:
    """Turn that brings a direction down, in [-180, 180)."""
    return (-90.0 - pointing_deg + 180.0) % 360.0 - 180.0


def _frame(spec: RegionSpec, shape: tuple[int, int]) -> BoolArray:
    return np.ones(shape, bool)


def _mask(spec: RegionSpec, shape: tuple[int, int]) -> BoolArray:
    if spec.mask is None:
        raise RegionError('region.shape = "mask" needs region.mask')
    if spec.mask.shape != shape:
        found, wanted = (f"{size[1]} x {size[0]}" for size in (spec.mask.shape, shape))
        raise RegionError(f"region.mask is {found} pixels where the photograph is {wanted}")
    return spec.mask.astype(bool)


def _polygon(spec: RegionSpec, shape: tuple[int, int]) -> BoolArray:
    if spec.points is None or len(spec.points) < 3:
        raise RegionError('region.shape = "polygon" needs three region.points or more')
    return polygon_inside(np.asarray(spec.points, float), shape)


def polygon_inside(points: FloatArray, shape: tuple[int, int]) -> BoolArray:
    """True where a pixel's centre is inside a polygon by the even-odd rule.

    Parameters
    ----------
    points : (P, 2) float
        Corners x, y in pixels; the last joins the first.
    shape : (H, W)
        Of the picture.

    Notes
    -----
    Row by row: a pixel is inside when an odd number of sides cross the row to its left. A side owns its upper end and not
    its lower one, so that a corner counts once.
    """
    x0, y0 = points.T
    x1, y1 = np.roll(points, -1, axis=0).T
    flips = np.zeros((shape[0], shape[1] + 1), np.int32)
    for ax, ay, bx, by in zip(x0, y0, x1, y1):
        first, last = (int(np.clip(np.ceil(end), 0, shape[0])) for end in (min(ay, by), max(ay, by)))
        rows = np.arange(first, last)
        if rows.size:
            crossing = ax + (rows - ay) * (bx - ax) / (by - ay)
            flips[rows, np.clip(np.ceil(crossing), 0, shape[1]).astype(int)] += 1
    return np.asarray(np.cumsum(flips, axis=1)[:, :-1] % 2 == 1)


def _without_rim(inside: BoolArray, exclusion_px: float) -> BoolArray:
    """Pixels whose centre is ``exclusion_px`` or more from the region's border; the frame's border counts as one."""
    if exclusion_px <= 0:
        return inside
    padded = np.pad(inside.astype(np.uint8), 1)
    to_outside = cv2.distanceTransform(padded, cv2.DIST_L2, cv2.DIST_MASK_PRECISE)[1:-1, 1:-1]
    return np.asarray(to_outside - 0.5 >= exclusion_px)  # the border runs half a pixel before the first centre outside


def _middle(inside: BoolArray) -> tuple[float, float]:
    """Centre of gravity of the pixels inside."""
    columns, rows = inside.sum(axis=0, dtype=float), inside.sum(axis=1, dtype=float)
    total = max(float(columns.sum()), 1.0)
    return float(columns @ np.arange(columns.size)) / total, float(rows @ np.arange(rows.size)) / total


def _checked(inside: BoolArray) -> BoolArray:
    if not inside.any():
        raise RegionError("no pixel is inside the region; check region.points, region.mask or region.edge_exclusion_mm")
    return read_only(inside)
