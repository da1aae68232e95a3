"""The notch or flat of a wafer's rim."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.wafer.rim import Rim, along_rays, ray_angles

DEEPEST = 0.10  # of the radius: the flat of a 150 mm wafer takes 7.6 %
NOTCH_SIZE = (0.005, 0.035)  # root of its area over the radius: 1 mm deep at 90 degrees is 0.0067 on 300 mm, 0.01 on 200 mm
NOTCH_WIDTH = 3.0  # area over depth, in roots of the area: 1 for 90 degrees, 1.2 for a half circle
LEAST_FLAT_DEG = 6.0  # half the angle that a flat takes: 50.8 mm wafers have 18, secondary flats 9 to 15
LEAST_DEPTH = 6.0  # in standard deviations of one ray's depth: the longest of 3000 rays reaches 3.5 by chance
MOST_ODDNESS = 0.25  # of the step from bench to film: what is farther from the bench's colour is a clip or dirt
NEAR_DEG = 25.0
RIVAL = 0.4  # a second mark with this share of the first one's area and depth leaves it open which is the notch


@dataclass(frozen=True, kw_only=True)
class Mark:
    """A notch or flat: where it points (counter-clockwise from the picture's +x as a viewer sees it), depth and area."""

    kind: Literal["notch", "flat"]
    angle_deg: float
    depth_px: float
    area_px: float


@dataclass(frozen=True, kw_only=True, eq=False)
class Bites:
    """How far the bench reaches in from the rim, by rays at ``angle_rad`` (A,).

    ``depth_px`` (A,) has the usual depth taken off; ``is_plain`` (A,) is True where the bench outside the rim looks as
    elsewhere; ``oddness`` (A, C) is how far the bite is from the line between the colours of bench and film, times its depth.
    """

    angle_rad: FloatArray
    depth_px: FloatArray
    is_plain: BoolArray
    oddness: FloatArray


def find_mark(picture: NDArray[np.generic], rim: Rim, *, near_deg: float | None = None) -> Mark | None:
    """The notch or flat of a disc, or None when nothing on its rim is significantly one.

    Parameters
    ----------
    picture : (H, W) or (H, W, C)
        Anything that grows with the light.
    rim : Rim
        The circle found in it.
    near_deg : float or None
        Where it is expected; one within 25 degrees is taken before others elsewhere.

    Notes
    -----
    A ray's depth is the length that looks like the bench, from the rim inwards. A clip spoils the bench's look outside the
    rim too, which tells it from a notch; a flat's depth follows a chord, R (1 - cos a / cos t). Blur makes a notch wider and
    less deep but keeps its area, so its size is judged by that.
    """
    bites = _bites(picture, rim)
    marks = [mark for mark in (_shaped(bites, run, rim) for run in _runs(bites)) if mark is not None]
    expected = [mark for mark in marks if near_deg is not None and _apart(mark.angle_deg, near_deg) < NEAR_DEG]
    ranked = sorted(expected or marks, key=lambda mark: mark.area_px * mark.depth_px, reverse=True)
    if not ranked or (ranked[0].kind == "notch" and any(_rivals(ranked[0], other) for other in ranked[1:])):
        return None
    return ranked[0]


def _rivals(best: Mark, other: Mark) -> bool:
    return other.area_px > RIVAL * best.area_px and other.depth_px > RIVAL * best.depth_px


def _apart(a_deg: float, b_deg: float) -> float:
    return abs((a_deg - b_deg + 180) % 360 - 180)


def _bites(picture: NDArray[np.generic], rim: Rim) -> Bites:
    radius = rim.circle.radius_px
    angle_rad = ray_angles(radius, most=2880)
    margin = max(2.5 * rim.blur_px, 1.5)
    spacing = max(0.5, DEEPEST * radius / 240)
    offsets = np.arange(-DEEPEST * radius, margin + max(2.0, 0.012 * radius), spacing)
    values, inside = along_rays(picture, rim.circle, angle_rad, offsets)
    beyond, within = offsets > margin, (offsets < -margin) & (offsets > -margin - max(3.0, 0.02 * radius))
    bench = values[:, beyond].mean(axis=1)
    usual_bench = _usual(bench)
    step = _usual(values[:, within].mean(axis=1)) - usual_bench
    square = np.maximum(np.sum(step**2, axis=-1), 1e-12)
    above = values - usual_bench[:, None]
    likeness = np.einsum("aoc,ac->ao", above, step / square[:, None])  # 0 bench, 1 film
    reached = offsets <= margin
    bite = np.minimum.accumulate(np.clip(1 - likeness, 0, 1)[:, ::-1], axis=1)[:, ::-1] * reached
    aside = above - likeness[..., None] * step[:, None]
    depth = bite.sum(axis=1) * spacing
    is_plain = (np.sum((bench - usual_bench) ** 2, axis=-1) < MOST_ODDNESS**2 * square) & inside[:, beyond].all(axis=1)
    oddness = np.einsum("ao,aoc->ac", bite, aside) * spacing / np.sqrt(square)[:, None]
    return Bites(angle_rad=angle_rad, depth_px=depth - _usual(depth[:, None])[:, 0], is_plain=is_plain, oddness=oddness)


def _usual(values: FloatArray | NDArray[np.float32]) -> FloatArray:
    """Median over a wide arc around each ray (A, C): shading and film vary slowly, marks and clips are short."""
    count = values.shape[0]
    stride = max(1, count // 72)
    coarse = np.median(values[: count - count % stride].reshape(-1, stride, values.shape[1]), axis=1)
    wide = 17  # of 72 sectors: 85 degrees, so that a flat of 45 degrees is outvoted
    padded = np.concatenate([coarse[-(wide // 2) :], coarse, coarse[: wide // 2]])
    medians = np.median(np.lib.stride_tricks.sliding_window_view(padded, wide, axis=0), axis=-1)
    centres = (np.arange(medians.shape[0]) + 0.5) * stride
    columns = [np.interp(np.arange(count), centres, column, period=count) for column in medians.T]
    return np.column_stack(columns).astype(np.float64)


def _runs(bites: Bites) -> list[NDArray[np.intp]]:
    """Stretches of rays that are significantly deep, as indices; a stretch may pass the end of the turn."""
    depth, plain = bites.depth_px, bites.is_plain
    if not plain.any():
        return []
    noise = max(1.4826 * float(np.median(np.abs(depth[plain] - np.median(depth[plain])))), 0.04)
    deep = depth > LEAST_DEPTH * noise
    if not deep.any() or deep.all():
        return []
    start = int(np.flatnonzero(~deep)[0])
    edges = np.flatnonzero(np.diff(np.concatenate([[0], np.roll(deep, -start).astype(int), [0]])))
    runs = [(np.arange(first, last) + start) % depth.size for first, last in zip(edges[::2], edges[1::2])]
    return [run for run in runs if plain[run].mean() > 0.8]


def _shaped(bites: Bites, run: NDArray[np.intp], rim: Rim) -> Mark | None:
    """The run as a flat or notch, or None when it has the shape or colour of neither."""
    radius, depth = rim.circle.radius_px, bites.depth_px
    spacing = float(bites.angle_rad[1] - bites.angle_rad[0])
    wide = np.arange(run[0] - run.size // 3 - 2, run[0] + run.size + run.size // 3 + 3)
    weight = np.clip(depth[wide % depth.size], 0, None)
    middle = float(np.sum(wide * weight) / np.sum(weight)) * spacing
    angle_deg = float((180 - np.rad2deg(middle)) % 360 - 180)  # y up: the sense of turning is reversed
    deepest = float(np.percentile(depth[run], 95))
    area = float(weight.sum() * spacing * radius)
    oddness = float(np.linalg.norm(bites.oddness[run].sum(axis=0)) / np.sum(depth[run]))
    if oddness > MOST_ODDNESS:
        return None
    half_rad, size = run.size * spacing / 2, float(np.sqrt(area))
    chord = radius * (1 - np.cos(half_rad))
    if np.rad2deg(half_rad) >= LEAST_FLAT_DEG and 0.7 * chord < deepest < 1.5 * chord + 2:
        return Mark(kind="flat", angle_deg=angle_deg, depth_px=deepest, area_px=area)
    widest = NOTCH_WIDTH * size + 3 * rim.blur_px
    if NOTCH_SIZE[0] * radius < size < NOTCH_SIZE[1] * radius and area / deepest < widest:
        return Mark(kind="notch", angle_deg=angle_deg, depth_px=deepest, area_px=area)
    return None
