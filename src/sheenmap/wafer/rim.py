"""The rim in full resolution: where brightness or colour steps along rays from the centre, to a fraction of a pixel."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import uniform_filter1d

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.wafer.circle import MOST_OVAL, Circle, from_upright, radial_residual, robust_circle, robust_oval

FEWEST_RAYS, MOST_RAYS = 240, 2400
LEAST_STEP = 4.0  # standard deviations between inside and outside for a ray to count
LEAST_OVAL = 0.0005  # of the radius: minor over major axis 0.999, a tilt of 2.6 degrees
LEAST_FOR_OVAL = 0.6  # of the rim in the frame: on less, tilt and centre trade against each other
SHARED_RAYS = 72  # of a turn: arcs of 5 degrees
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


def _points(circle: Circle, angle_rad: FloatArray, distance: FloatArray) -> tuple[FloatArray, FloatArray]:
    return from_upright(circle, distance * np.cos(angle_rad), distance * np.sin(angle_rad))


def along_rays(
    picture: NDArray[np.generic], circle: Circle, angle_rad: FloatArray, offset_px: FloatArray
) -> tuple[NDArray[np.float32], BoolArray]:
    """Values along rays, at ``offset_px`` (O,) from the circle outwards: (A, O, C), and (A, O) True inside the frame."""
    return sample(picture, *_points(circle, angle_rad[:, None], circle.radius_px + offset_px))


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
    is kept: a sharp step there, between the lines through both flanks, has the integral that the pixels have. This is linear
    in the pixels, so noise makes no bias, and blur that is the same on both sides makes none either.

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
        rim = _kept_area(picture, circle, float(np.clip(6.0 * blur_px, 5.0, 0.2 * circle.radius_px)), blur_px)
        if rim is None:
            return None
        circle = rim.circle
    return rim


def _stepped(picture: NDArray[np.generic], circle: Circle, reach: float) -> Circle | None:
    """Fit to the strongest step of each ray, averaged with its neighbours: a texture of the bench averages out, the rim stays."""
    angle_rad = ray_angles(circle.radius_px, most=900)
    spacing = max(0.5, reach / 40)
    half = max(2, round(max(2.0, reach / 5) / spacing))
    offsets = np.arange(-reach - half * spacing, reach + half * spacing + spacing / 2, spacing)
    values, inside = along_rays(picture, circle, angle_rad, offsets)
    values = uniform_filter1d(values, max(1, angle_rad.size // SHARED_RAYS), axis=0, mode="wrap")
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
    x, y = _points(circle, angle_rad[seen], circle.radius_px + edge[seen])
    fit, _ = _outline(x, y, circle, float(inside.all(axis=1).mean()))
    near = np.abs(radial_residual(fit, x, y)) < max(1.5, 0.25 * reach)
    return fit if near.mean() > 0.4 else None


def _outline(x: FloatArray, y: FloatArray, start: Circle, visible: float) -> tuple[Circle, BoolArray]:
    """A circle, or an oval where enough of it is seen and it is significantly one."""
    round_fit, round_support = robust_circle(x, y, replace(start, oval=(0.0, 0.0)))
    if visible < LEAST_FOR_OVAL:
        return round_fit, round_support
    oval_fit, oval_support = robust_oval(x, y, start)
    size = float(np.hypot(*oval_fit.oval))
    is_oval = LEAST_OVAL + 5 * oval_fit.u_px / oval_fit.radius_px < size < 0.99 * MOST_OVAL
    fits = oval_support.sum() > 0.8 * round_support.sum()
    return (oval_fit, oval_support) if is_oval and fits else (round_fit, round_support)


@dataclass(frozen=True, kw_only=True, eq=False)
class Profiles:
    """Rays scaled to their own step: 1 inside, 0 outside (A, O), how that 1 grows a pixel (A,), step over noise (A,)."""

    share: FloatArray
    slope: FloatArray
    strength: FloatArray


def _scaled(values: NDArray[np.float32], offsets: FloatArray, flank: float) -> Profiles:
    """Profiles on straight lines through what lies ``flank`` or more inside and outside of the rim.

    The film's colour may change towards its rim; a level where a line is due would move the rim by half a pixel and more.
    Slopes are shared by neighbouring rays. Channels are weighted by step over noise squared, the best for one linear reading.
    """
    inner, outer = offsets <= max(-flank, offsets[2]), offsets >= min(flank, offsets[-3])
    inner_level, inner_slope, inner_noise = _line(values[:, inner], offsets[inner])
    outer_level, outer_slope, outer_noise = _line(values[:, outer], offsets[outer])
    step = inner_level - outer_level
    floor = 1e-6 + 1e-3 * np.median(np.abs(step), axis=0)
    variance = np.maximum((inner_noise + outer_noise) / 2, floor**2)
    weight = step / variance
    square = np.maximum(np.sum(step * weight, axis=-1), 1e-12)
    above = values - outer_level[:, None] - outer_slope[:, None] * offsets[:, None]
    share = np.einsum("aoc,ac->ao", above, weight) / square[:, None]
    slope = np.sum((inner_slope - outer_slope) * weight, axis=-1) / square
    return Profiles(share=share, slope=slope, strength=np.sqrt(square))


def _line(values: NDArray[np.float32], offsets: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Level at offset 0 and slope of each ray (A, C), and the noise variance of each channel (C,)."""
    mean_offset = float(offsets.mean())
    centred = offsets - mean_offset
    mean = values.mean(axis=1, dtype=np.float64)
    slope = np.einsum("aoc,o->ac", values, centred) / float(np.sum(centred**2))
    slope = uniform_filter1d(slope, max(5, slope.shape[0] // 90), axis=0, mode="wrap")
    residual = values - mean[:, None] - slope[:, None] * centred[:, None]
    noise = 2.2 * np.median(residual**2, axis=(0, 1))  # 2.2: from the median of squares to the variance of a normal
    return mean - slope * mean_offset, slope, noise


def _crossing(profiles: Profiles, offsets: FloatArray) -> FloatArray:
    """Where each ray's rim is so that the area under its profile is kept: I = (e + w) + b (e^2 - w^2) / 2, b the slope. (A,)."""
    window = float(offsets[-1])
    area = np.trapezoid(profiles.share, offsets, axis=1)
    slope = np.clip(profiles.slope, -0.8 / window, 0.8 / window)
    edge = np.zeros_like(area)
    for _ in range(6):
        edge = np.clip(area - window + slope * (window**2 - edge**2) / 2, -window, window)
    return edge


def _blur(picture: NDArray[np.generic], circle: Circle) -> float:
    """Standard deviation of the rim's spread, looked for over a wider reach only where the narrow one does not hold it."""
    for reach in (6.0, 12.0, 25.0):
        blur_px = _blur_within(picture, circle, float(min(reach, max(4.0, 0.15 * circle.radius_px))))
        if blur_px < reach / 5:
            break
    return blur_px


def _blur_within(picture: NDArray[np.generic], circle: Circle, reach: float) -> float:
    """Half the distance between 84 % and 16 % of the median profile, of arcs of 5 degrees."""
    angle_rad = ray_angles(circle.radius_px, most=720)
    offsets = np.linspace(-reach, reach, 2 * int(np.ceil(2 * reach)) + 1)
    values, inside = along_rays(picture, circle, angle_rad, offsets)
    values = uniform_filter1d(values, max(1, angle_rad.size // SHARED_RAYS), axis=0, mode="wrap")
    profiles = _scaled(values, offsets, 0.6 * reach)
    usable = inside.all(axis=1) & (profiles.strength > LEAST_STEP)
    if usable.sum() < 12:
        return 1.0
    shape = profiles.share / np.clip(1 + profiles.slope[:, None] * offsets, 0.2, 5.0)
    median = np.minimum.accumulate(np.median(shape[usable], axis=0))
    high, low = (float(np.interp(-level, -median, offsets)) for level in (0.84, 0.16))
    return float(np.clip((low - high) / 2, 0.3, reach / 3))


def _kept_area(picture: NDArray[np.generic], circle: Circle, window: float, blur_px: float) -> Rim | None:
    angle_rad = ray_angles(circle.radius_px)
    offsets = np.linspace(-window, window, 2 * int(np.ceil(2 * window)) + 1)
    values, inside = along_rays(picture, circle, angle_rad, offsets)
    profiles = _scaled(values, offsets, max(2.5 * blur_px, 0.4 * window))
    edge = _crossing(profiles, offsets)
    visible = inside.all(axis=1)
    usable = visible & (profiles.strength > LEAST_STEP) & (np.abs(edge) < 0.5 * window)
    if usable.sum() < 24:
        return None
    x, y = _points(circle, angle_rad[usable], circle.radius_px + edge[usable])
    fit, support = _outline(x, y, circle, float(visible.mean()))
    known = replace(fit, u_px=float(np.hypot(fit.u_px, GRID_U_PX)))
    return Rim(circle=known, supported=float(support.sum() / angle_rad.size), visible=float(visible.mean()), blur_px=blur_px)
