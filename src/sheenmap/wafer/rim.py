"""The rim in full resolution: where brightness or colour steps along rays from the centre, to a fraction of a pixel."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.wafer.circle import Circle, radial_residual, robust_circle

FEWEST_RAYS, MOST_RAYS = 240, 2400
LEAST_STEP = 4.0  # standard deviations between inside and outside for a ray to count
GRID_U_PX = 0.01  # what pixels cut by a hard rim leave after averaging over a full turn


@dataclass(frozen=True, kw_only=True)
class Rim:
    """A circle fitted to the rim, the share of the full turn that supports it, and the share that lies in the frame.

    ``blur_px`` is the standard deviation of the blur across the rim.
    """

    circle: Circle
    supported: float
    visible: float
    blur_px: float


def ray_angles(radius_px: float, *, most: int = MOST_RAYS) -> FloatArray:
    """Evenly spaced angles in picture axes (y down), in radians; about one a pixel of the circumference."""
    count = int(np.clip(2 * np.pi * radius_px, FEWEST_RAYS, most))
    return np.asarray(np.arange(count) * (2 * np.pi / count), np.float64)


def sample(picture: NDArray[np.generic], x: FloatArray, y: FloatArray) -> tuple[NDArray[np.float32], BoolArray]:
    """Bilinear values at points.

    Parameters
    ----------
    picture : (H, W) or (H, W, C)
        Anything that grows with the light.
    x, y : (...) float
        Pixels, centre of the first pixel 0, 0.

    Returns
    -------
    (..., C) float32, (...) bool
        Values (of the nearest pixel inside where the point is outside), and True where the point lies in the frame.
    """
    height, width = picture.shape[:2]
    inside = (x >= 0) & (x <= width - 1) & (y >= 0) & (y <= height - 1)
    left = np.clip(np.floor(x), 0, max(width - 2, 0)).astype(np.intp)
    top = np.clip(np.floor(y), 0, max(height - 2, 0)).astype(np.intp)
    right, bottom = np.minimum(left + 1, width - 1), np.minimum(top + 1, height - 1)
    share_x = np.clip(x - left, 0, 1).astype(np.float32)[..., None]
    share_y = np.clip(y - top, 0, 1).astype(np.float32)[..., None]
    flat = picture.reshape(height * width, -1)
    upper = _gather(flat, top * width + left) * (1 - share_x) + _gather(flat, top * width + right) * share_x
    lower = _gather(flat, bottom * width + left) * (1 - share_x) + _gather(flat, bottom * width + right) * share_x
    values = upper * (1 - share_y) + lower * share_y
    return np.asarray(values, np.float32), np.asarray(inside)


def _gather(flat: NDArray[np.generic], index: NDArray[np.intp]) -> NDArray[np.float32]:
    return np.nan_to_num(flat[index].astype(np.float32), nan=0.0, posinf=0.0, neginf=0.0)


def along_rays(
    picture: NDArray[np.generic], circle: Circle, angle_rad: FloatArray, offset_px: FloatArray
) -> tuple[NDArray[np.float32], BoolArray]:
    """Values along rays, at ``offset_px`` (O,) from the circle outwards: (A, O, C), and (A, O) True inside the frame."""
    distance = circle.radius_px + offset_px
    x = circle.x_px + distance * np.cos(angle_rad)[:, None]
    y = circle.y_px + distance * np.sin(angle_rad)[:, None]
    return sample(picture, x, y)


def refine(picture: NDArray[np.generic], start: Circle, reach_px: float) -> Rim | None:
    """The circle through the rim near ``start``, or None when there is no rim there.

    Parameters
    ----------
    picture : (H, W) or (H, W, C)
        Anything that grows with the light; colour helps where brightness alone does not differ.
    start : Circle
        From the reduced copy.
    reach_px : float
        How far the rim may be from ``start``.

    Notes
    -----
    The strongest step within reach is searched first, with a narrower reach each time. Then each ray's rim is where its area
    is kept: minus w plus the integral over (-w, w) of the profile scaled to 1 inside and 0 outside. This is linear in the
    pixels, so noise makes no bias, and blur that is the same on both sides makes none either.

    References
    ----------
    Tabatabai and Mitchell, IEEE Trans. Pattern Anal. 6, 188 (1984): edges by moments (from memory; first moment only).
    """
    circle = start
    for reach in (reach_px, max(6.0, 0.35 * reach_px), 6.0):
        found = _stepped(picture, circle, reach)
        if found is None:
            return None
        circle = found
    blur_px = _blur(picture, circle)
    rim: Rim | None = None
    for _ in range(2):
        rim = _kept_area(picture, circle, np.clip(5.0 * blur_px, 4.0, 0.2 * circle.radius_px), blur_px)
        if rim is None:
            return None
        circle = rim.circle
    return rim


def _stepped(picture: NDArray[np.generic], circle: Circle, reach: float) -> Circle | None:
    """Fit to the strongest step of each ray."""
    angle_rad = ray_angles(circle.radius_px, most=900)
    spacing = max(0.5, reach / 40)
    half = max(2, round(max(2.0, reach / 5) / spacing))
    offsets = np.arange(-reach - half * spacing, reach + half * spacing + spacing / 2, spacing)
    values, inside = along_rays(picture, circle, angle_rad, offsets)
    sums = np.cumsum(np.pad(values, ((0, 0), (1, 0), (0, 0))), axis=1, dtype=np.float64)
    mean = (sums[:, half:] - sums[:, :-half]) / half  # of offsets i .. i + half - 1
    step = mean[:, :-half] - mean[:, half:]
    step /= np.maximum(np.median(np.abs(step), axis=(0, 1)), 1e-9 + 1e-3 * np.abs(step).max(axis=(0, 1)))
    strength = np.sqrt(np.sum(step**2, axis=-1))
    best = np.clip(np.argmax(strength, axis=1), 1, strength.shape[1] - 2)
    row = np.arange(best.size)
    before, here, after = strength[row, best - 1], strength[row, best], strength[row, best + 1]
    shift = np.clip(0.5 * (after - before) / np.maximum(2 * here - before - after, 1e-12), -0.5, 0.5)
    edge = offsets[0] + (best + half - 0.5 + shift) * spacing
    seen = inside.all(axis=1)
    if seen.sum() < 24:
        return None
    distance = circle.radius_px + edge
    x, y = circle.x_px + distance * np.cos(angle_rad), circle.y_px + distance * np.sin(angle_rad)
    fit, support = robust_circle(x[seen], y[seen], circle)
    near = np.abs(radial_residual(fit, x[seen], y[seen])) < max(1.5, 0.25 * reach)
    return fit if support.any() and near.mean() > 0.4 else None


def _levels(values: NDArray[np.float32]) -> tuple[NDArray[np.float32], NDArray[np.float32]]:
    """Mean of the inner and of the outer quarter of each ray: (A, C) each."""
    quarter = max(2, values.shape[1] // 4)
    return values[:, :quarter].mean(axis=1), values[:, -quarter:].mean(axis=1)


def _scaled(values: NDArray[np.float32]) -> tuple[FloatArray, FloatArray]:
    """Profiles from 1 inside to 0 outside (A, O), and each ray's step in standard deviations of its noise (A,).

    Channels are weighted by their step over their noise squared, the best weights for one linear reading.
    """
    inner, outer = _levels(values)
    quarter = max(2, values.shape[1] // 4)
    noise = np.concatenate([values[:, :quarter] - inner[:, None], values[:, -quarter:] - outer[:, None]], axis=1)
    step = inner - outer
    floor = 1e-6 + 1e-3 * np.median(np.abs(step), axis=0)
    variance = np.maximum(np.median(noise**2, axis=(0, 1)) * 2.2, floor**2)
    square = np.maximum(np.sum(step**2 / variance, axis=-1), 1e-12)
    profile = np.sum((values - outer[:, None]) * (step / variance)[:, None], axis=-1) / square[:, None]
    return profile.astype(np.float64), np.sqrt(square).astype(np.float64)


def _blur(picture: NDArray[np.generic], circle: Circle) -> float:
    """Standard deviation of the rim's spread: half the distance between 84 % and 16 % of the median profile."""
    reach = float(np.clip(0.1 * circle.radius_px, 6.0, 25.0))
    offsets = np.arange(-reach, reach + 0.25, 0.5)
    values, inside = along_rays(picture, circle, ray_angles(circle.radius_px, most=720), offsets)
    profile, step = _scaled(values)
    usable = inside.all(axis=1) & (step > LEAST_STEP)
    if usable.sum() < 12:
        return 1.0
    median = np.minimum.accumulate(np.median(profile[usable], axis=0))
    high, low = (float(np.interp(-level, -median, offsets)) for level in (0.84, 0.16))
    return float(np.clip((low - high) / 2, 0.3, reach / 3))


def _kept_area(picture: NDArray[np.generic], circle: Circle, window: float, blur_px: float) -> Rim | None:
    angle_rad = ray_angles(circle.radius_px)
    offsets = np.arange(-window, window + 0.25, 0.5)
    values, inside = along_rays(picture, circle, angle_rad, offsets)
    profile, step = _scaled(values)
    edge = offsets[0] + np.trapezoid(profile, offsets, axis=1)
    visible = inside.all(axis=1)
    usable = visible & (step > LEAST_STEP) & (np.abs(edge) < 0.5 * window)
    if usable.sum() < 24:
        return None
    distance = circle.radius_px + edge[usable]
    x = circle.x_px + distance * np.cos(angle_rad[usable])
    y = circle.y_px + distance * np.sin(angle_rad[usable])
    fit, support = robust_circle(x, y, circle)
    known = Circle(x_px=fit.x_px, y_px=fit.y_px, radius_px=fit.radius_px, u_px=float(np.hypot(fit.u_px, GRID_U_PX)))
    return Rim(circle=known, supported=float(support.sum() / angle_rad.size), visible=float(visible.mean()), blur_px=blur_px)
