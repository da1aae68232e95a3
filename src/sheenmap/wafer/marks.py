"""The notch or flat of a wafer's rim."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.wafer.rim import Rim, along_rays, ray_angles

DEEPEST = 0.10  # of the radius: the flat of a 150 mm wafer takes 7.6 %
NOTCH_DEPTH = (0.004, 0.04)  # of the radius: 1 mm on 300 mm is 0.7 %, and hand-made ones are deeper
NOTCH_WIDTH = (0.7, 6.0)  # times its depth: 90 degrees with a rounded bottom is about 2 to 3
LEAST_FLAT_DEG = 6.0  # half the angle that a flat takes: 50.8 mm wafers have 18 and secondary flats 9 to 10
LEAST_DEPTH = 6.0  # in standard deviations of one ray's depth: the longest of 3000 rays reaches 3.5 by chance
NEAR_DEG = 25.0


@dataclass(frozen=True, kw_only=True)
class Mark:
    """A notch or flat: where it points (counter-clockwise from the picture's +x as a viewer sees it) and how deep it is."""

    kind: Literal["notch", "flat"]
    angle_deg: float
    depth_px: float
    area_px: float


def find_mark(picture: NDArray[np.generic], rim: Rim, *, near_deg: float | None = None) -> Mark | None:
    """The notch or flat of a disc, or None when nothing on its rim is significantly one.

    Parameters
    ----------
    picture : (H, W) or (H, W, C)
        Anything that grows with the light.
    rim : Rim
        The circle found in it.
    near_deg : float or None
        Where it is expected; one within 25 degrees is taken before a larger one elsewhere.

    Notes
    -----
    A ray's depth is the length that looks like the bench, from the rim inwards. A clip spoils the bench's look outside the
    rim too, which tells it from a notch; a flat's depth follows a chord, R (1 - cos a / cos t).
    """
    angle_rad = ray_angles(rim.circle.radius_px, most=2880)
    depth, known = _bench_depth(picture, rim, angle_rad)
    marks = [mark for mark in (_shaped(angle_rad, depth, run, rim) for run in _runs(depth, known)) if mark is not None]
    if not marks:
        return None
    expected = [mark for mark in marks if near_deg is not None and _apart(mark.angle_deg, near_deg) < NEAR_DEG]
    return max(expected or marks, key=lambda mark: mark.area_px)


def _apart(a_deg: float, b_deg: float) -> float:
    return abs((a_deg - b_deg + 180) % 360 - 180)


def _bench_depth(picture: NDArray[np.generic], rim: Rim, angle_rad: FloatArray) -> tuple[FloatArray, BoolArray]:
    """How far the bench reaches in from the rim on each ray, in pixels (A,), and where the bench itself looks as elsewhere."""
    radius = rim.circle.radius_px
    margin = max(2.5 * rim.blur_px, 1.5)
    spacing = max(0.5, DEEPEST * radius / 240)
    offsets = np.arange(-DEEPEST * radius, margin + max(2.0, 0.012 * radius), spacing)
    values, inside = along_rays(picture, rim.circle, angle_rad, offsets)
    film = np.median(values[:, : max(3, offsets.size // 8)], axis=1)
    beyond = offsets > margin
    bench = values[:, beyond].mean(axis=1)
    usual_film, usual_bench = _smoothed(film), _smoothed(bench)
    step = usual_film - usual_bench
    weight = step / np.maximum(np.sum(step**2, axis=-1, keepdims=True), 1e-12)
    likeness = np.einsum("aoc,ac->ao", values - usual_bench[:, None], weight)  # 0 bench, 1 film
    oddness = np.sqrt(np.sum((bench - usual_bench) ** 2, axis=-1) / np.maximum(np.sum(step**2, axis=-1), 1e-12))
    known = (oddness < 0.25) & inside[:, beyond].all(axis=1)
    run = np.minimum.accumulate(np.clip(1 - likeness, 0, 1)[:, ::-1], axis=1)[:, ::-1]
    depth = run[:, offsets <= margin].sum(axis=1) * spacing
    base = _smoothed(depth[:, None])[:, 0]
    return depth - base, known


def _smoothed(values: FloatArray | NDArray[np.float32]) -> FloatArray:
    """Median over a wide arc around each ray (A, C): shading and film vary slowly, marks and clips are short."""
    count = values.shape[0]
    stride = max(1, count // 72)
    thin = values[: count - count % stride].reshape(-1, stride, values.shape[1])
    coarse = np.median(thin, axis=1)
    wide = 17  # of 72 sectors: 85 degrees, so that a flat of 45 degrees is outvoted
    padded = np.concatenate([coarse[-(wide // 2) :], coarse, coarse[: wide // 2]])
    windows = np.lib.stride_tricks.sliding_window_view(padded, wide, axis=0)
    medians = np.median(windows, axis=-1)
    centres = (np.arange(medians.shape[0]) + 0.5) * stride
    places = np.arange(count)
    period = float(medians.shape[0] * stride)
    return np.column_stack([np.interp(places, centres, column, period=period) for column in medians.T])


def _runs(depth: FloatArray, known: BoolArray) -> list[NDArray[np.intp]]:
    """Stretches of rays that are significantly deep, as indices that may pass the end of the turn."""
    noise = max(1.4826 * float(np.median(np.abs(depth[known] - np.median(depth[known])))), 0.05) if known.any() else np.inf
    deep = depth > LEAST_DEPTH * noise
    if not deep.any() or deep.all():
        return []
    start = int(np.flatnonzero(~deep)[0])
    turned = np.roll(deep, -start)
    edges = np.flatnonzero(np.diff(np.concatenate([[0], turned.astype(int), [0]])))
    runs = [np.arange(a, b) + start for a, b in zip(edges[::2], edges[1::2])]
    return [run % depth.size for run in runs if known[run % depth.size].mean() > 0.8]


def _shaped(angle_rad: FloatArray, depth: FloatArray, run: NDArray[np.intp], rim: Rim) -> Mark | None:
    """The run as a flat or notch, or None when it has the shape of neither."""
    radius = rim.circle.radius_px
    spacing = float(angle_rad[1] - angle_rad[0])
    wide = np.arange(run[0] - run.size // 3 - 2, run[0] + run.size + run.size // 3 + 3) % depth.size
    weight = np.clip(depth[wide], 0, None)
    unrolled = angle_rad[wide[0]] + np.arange(wide.size) * spacing
    middle = float(np.sum(unrolled * weight) / np.sum(weight))
    deepest = float(np.percentile(depth[run], 95))
    half_rad = run.size * spacing / 2
    chord = radius * (1 - np.cos(half_rad))
    angle_deg = float((180 - np.rad2deg(middle)) % 360 - 180)  # y up: the sense of turning is reversed
    area = float(weight.sum() * spacing * radius)
    if np.rad2deg(half_rad) >= LEAST_FLAT_DEG and 0.7 * chord < deepest < 1.5 * chord + 2:
        return Mark(kind="flat", angle_deg=angle_deg, depth_px=deepest, area_px=area)
    width = 2 * half_rad * radius
    is_notch = NOTCH_DEPTH[0] * radius < deepest < NOTCH_DEPTH[1] * radius and NOTCH_WIDTH[0] < width / deepest < NOTCH_WIDTH[1]
    return Mark(kind="notch", angle_deg=angle_deg, depth_px=deepest, area_px=area) if is_notch else None
