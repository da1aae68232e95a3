"""Discs in a reduced copy of the picture: edges, votes for centres, and how much of each rim is there."""

from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray
from sheenmap.wafer.circle import Circle, algebraic_circle, from_upright, radial_residual, robust_circle, robust_oval

Copy = NDArray[np.float32]
REDUCED_PX = 360  # longest side of the reduced copy: a disc of a tenth of the picture still has 36 pixels of radius
SMOOTHING_PX = 1.2
SHARPNESS = 1.2  # an edge's gradient falls as 1 / width of the smoothing (2.5 here), that of a ring of colour stays (1)
SMOOTHER_PX = 3.0
LEAST_EDGE = 6.0  # in standard deviations of a noise gradient: 1 in 10^7 pixels of pure noise
MOST_EDGES = 15_000
LEAST_RADIUS_SHARE, MOST_RADIUS_SHARE = 0.04, 0.9  # of the longest side
ALIGNED = 0.94  # cosine between gradient and radius on a rim: within 20 degrees
SECTORS = 120


@dataclass(frozen=True, kw_only=True)
class Hint:
    """A circle in the reduced copy: what share of its rim lies in the frame, and what share of that shows an edge."""

    circle: Circle
    visible: float
    covered: float


@dataclass(frozen=True, kw_only=True, eq=False)
class Edges:
    """(E,) places of edges, their unit normals (either sense) and the reduced copy's shape."""

    x: FloatArray
    y: FloatArray
    normal_x: FloatArray
    normal_y: FloatArray
    shape: tuple[int, int]


def reduced(picture: NDArray[np.generic]) -> tuple[Copy, float]:
    """The picture averaged down to at most ``REDUCED_PX`` a side, (h, w, C) float32, and the factor that it shrank by."""
    height, width = picture.shape[:2]
    factor = max(1.0, max(height, width) / REDUCED_PX)
    rough = max(1, int(factor // 4))  # four samples or more to each reduced pixel and side keep the averaging honest
    thinned = np.ascontiguousarray(picture[rough // 2 :: rough, rough // 2 :: rough]).astype(np.float32, copy=False)
    thinned = np.nan_to_num(thinned, nan=0.0, posinf=0.0, neginf=0.0)
    if factor > 1:
        size = (max(1, round(width / factor)), max(1, round(height / factor)))
        thinned = np.asarray(cv2.resize(thinned, size, interpolation=cv2.INTER_AREA), np.float32)
    return np.atleast_3d(thinned), factor


def find_edges(copy: Copy, *, sharpness: float = SHARPNESS) -> Edges:
    """Ridge of the gradient, all channels together, each in units of its own noise; 0 for ``sharpness`` keeps soft ones too.

    References
    ----------
    Di Zenzo, Comput. Vision Graph. Image Process. 33, 116 (1986): gradient of a multi-channel image (from memory).
    """
    scales = [_gradient_noise(channel) for channel in np.moveaxis(copy, -1, 0)]
    strength, direction = _gradient(copy, scales, SMOOTHING_PX)
    smoother, _ = _gradient(copy, scales, SMOOTHER_PX)
    strength[strength < sharpness * smoother] = 0
    return _thinned(strength, np.cos(direction), np.sin(direction))


def _gradient(copy: Copy, scales: list[float], width_px: float) -> tuple[Copy, Copy]:
    """Strength in units of ``scales`` and direction in radians of the gradient of all channels together, (h, w) each."""
    xx, yy, xy = (np.zeros(copy.shape[:2], np.float32) for _ in range(3))
    for channel, scale in zip(np.moveaxis(copy, -1, 0), scales):
        smooth = cv2.GaussianBlur(channel, (0, 0), width_px, borderType=cv2.BORDER_REPLICATE)
        along_x = cv2.Sobel(smooth, cv2.CV_32F, 1, 0, ksize=3, scale=1 / (8 * scale))
        along_y = cv2.Sobel(smooth, cv2.CV_32F, 0, 1, ksize=3, scale=1 / (8 * scale))
        xx, yy, xy = xx + along_x**2, yy + along_y**2, xy + along_x * along_y
    root = np.sqrt(((xx - yy) / 2) ** 2 + xy**2)
    return np.sqrt((xx + yy) / 2 + root), 0.5 * np.arctan2(2 * xy, xx - yy)


def _gradient_noise(channel: Copy) -> float:
    """Standard deviation that noise gives the smoothed gradient; at least 0.3 % of the channel's spread, for clean pictures."""
    second = channel[:, 2:] - 2 * channel[:, 1:-1] + channel[:, :-2]
    noise = 1.4826 * float(np.median(np.abs(second))) / np.sqrt(6) if second.size else 0.0
    spread = float(np.ptp(np.percentile(channel, [1, 99])))
    # a Gaussian derivative of width s lets through noise / (s^2 sqrt(8 pi))
    through = 1 / (SMOOTHING_PX**2 * np.sqrt(8 * np.pi))
    return float(max(noise * through, 0.003 * spread, 1e-12))


def _thinned(strength: Copy, cosine: Copy, sine: Copy) -> Edges:
    """Pixels that are stronger than both neighbours across the edge, moved to the ridge's sub-pixel crest."""
    height, width = strength.shape
    rows, columns = np.nonzero(strength[1:-1, 1:-1] > LEAST_EDGE)
    rows, columns = rows + 1, columns + 1
    normal_x, normal_y = cosine[rows, columns], sine[rows, columns]
    step_x, step_y = np.rint(normal_x).astype(int), np.rint(normal_y).astype(int)
    here = strength[rows, columns].astype(float)
    ahead, behind = strength[rows + step_y, columns + step_x], strength[rows - step_y, columns - step_x]
    crest = (here >= ahead) & (here > behind)
    curvature = np.maximum(2 * here - ahead - behind, 1e-9)
    shift = np.clip(0.5 * (ahead - behind) / curvature, -0.5, 0.5)
    x, y = columns + shift * step_x, rows + shift * step_y
    strongest = np.argsort(here[crest])[::-1][:MOST_EDGES]
    kept = np.flatnonzero(crest)[strongest]
    return Edges(
        x=x[kept].astype(float), y=y[kept].astype(float),
        normal_x=normal_x[kept].astype(float), normal_y=normal_y[kept].astype(float), shape=(height, width),
    )  # fmt: skip


def find_hints(edges: Edges, *, slack: float = 1.0) -> list[Hint]:
    """Circles that the edges support, the best covered first; duplicates of one circle are joined.

    ``slack`` above 1 lets edges be farther from the circle, as those of a tilted disc are.
    """
    hints: list[Hint] = []
    for x, y in _voted_centres(edges, 1.5 * slack):
        for radius in _voted_radii(edges, x, y, slack):
            hint = _refined(edges, Circle(x_px=x, y_px=y, radius_px=radius), slack)
            if hint is not None and not any(_same(hint.circle, other.circle) for other in hints):
                hints.append(hint)
    return sorted(hints, key=lambda hint: hint.covered * hint.visible, reverse=True)


def _same(a: Circle, b: Circle) -> bool:
    near = 0.04 * max(a.radius_px, b.radius_px) + 2
    return float(np.hypot(a.x_px - b.x_px, a.y_px - b.y_px)) < near and abs(a.radius_px - b.radius_px) < near


def _voted_centres(edges: Edges, spread: float, *, most: int = 14) -> list[tuple[float, float]]:
    """Places that many edge normals run through; cells of two pixels, up to half a picture beyond the frame."""
    height, width = edges.shape
    longest = max(height, width)
    radii = np.arange(LEAST_RADIUS_SHARE * longest, MOST_RADIUS_SHARE * longest, 2.0)
    rows, columns = height + 2, width + 2  # cells of two pixels over twice the frame
    votes = np.zeros(rows * columns)
    for sense in (-1.0, 1.0):
        x = (edges.x[:, None] + sense * radii * edges.normal_x[:, None] + width / 2) / 2
        y = (edges.y[:, None] + sense * radii * edges.normal_y[:, None] + height / 2) / 2
        inside = (x >= 0) & (x < columns) & (y >= 0) & (y < rows)
        cells = y[inside].astype(np.int64) * columns + x[inside].astype(np.int64)
        votes += np.bincount(cells, minlength=votes.size)
    smooth = cv2.GaussianBlur(votes.reshape(rows, columns), (0, 0), spread)
    crest = (smooth == cv2.dilate(smooth, np.ones((9, 9), np.uint8))) & (smooth > 0.1 * smooth.max())
    row, column = np.nonzero(crest)
    order = np.argsort(smooth[row, column])[::-1][:most]
    return [(2.0 * column[i] + 1 - width / 2, 2.0 * row[i] + 1 - height / 2) for i in order]


def _voted_radii(edges: Edges, x: float, y: float, slack: float, *, most: int = 5) -> list[float]:
    """Radii about a centre at which the most sectors hold an edge that faces the centre."""
    distance, sector, aligned = _seen_from(edges, x, y)
    longest = max(edges.shape)
    bins = np.arange(LEAST_RADIUS_SHARE * longest, MOST_RADIUS_SHARE * longest, 1.0)
    reach = slack * np.minimum(1.5 + 0.015 * bins, 5.0)
    cell = np.floor(distance[aligned] - bins[0] + 0.5).astype(np.int64)
    within = (cell >= 0) & (cell < bins.size)
    votes = np.bincount(cell[within] * SECTORS + sector[aligned][within], minlength=bins.size * SECTORS)
    summed = np.cumsum(np.pad(votes.reshape(bins.size, SECTORS), ((1, 0), (0, 0))), axis=0)
    index = np.arange(bins.size)
    first = np.clip(np.ceil(index - reach), 0, bins.size).astype(int)
    last = np.clip(np.floor(index + reach) + 1, 0, bins.size).astype(int)
    counts = np.count_nonzero(summed[last] > summed[first], axis=1).astype(float)
    chosen: list[float] = []
    while counts.size and len(chosen) < most and counts.max() >= 0.15 * SECTORS:
        best = float(bins[int(np.argmax(counts))])
        chosen.append(best)
        counts[np.abs(bins - best) < 4 + 0.03 * best] = 0
    return chosen


def _seen_from(edges: Edges, x: float, y: float) -> tuple[FloatArray, NDArray[np.int64], NDArray[np.bool_]]:
    dx, dy = edges.x - x, edges.y - y
    distance = np.maximum(np.hypot(dx, dy), 1e-9)
    aligned = np.abs(dx * edges.normal_x + dy * edges.normal_y) > ALIGNED * distance
    sector = np.floor((np.arctan2(dy, dx) / (2 * np.pi) + 0.5) * SECTORS).astype(np.int64) % SECTORS
    return distance, sector, aligned


def _refined(edges: Edges, circle: Circle, slack: float) -> Hint | None:
    """The circle fitted to the edges near it, with the share of its rim that they cover; None when it dissolves."""
    fit = robust_circle if slack <= 1 else robust_oval
    for reach in (slack * (4 + 0.03 * circle.radius_px), 3 + 0.015 * circle.radius_px, 2 + 0.01 * circle.radius_px):
        _, _, aligned = _seen_from(edges, circle.x_px, circle.y_px)
        near = aligned & (np.abs(radial_residual(circle, edges.x, edges.y)) < reach)
        start = algebraic_circle(edges.x[near], edges.y[near]) if near.sum() >= 12 else None
        if start is None:
            return None
        if circle.oval != (0.0, 0.0) or abs(start.radius_px - circle.radius_px) > reach:
            start = circle
        circle, _ = fit(edges.x[near], edges.y[near], start, rounds=12)
    if not LEAST_RADIUS_SHARE * max(edges.shape) <= circle.radius_px <= 2 * max(edges.shape):
        return None
    return _judged(edges, circle)


def _judged(edges: Edges, circle: Circle) -> Hint | None:
    _, sector, aligned = _seen_from(edges, circle.x_px, circle.y_px)
    residual = radial_residual(circle, edges.x, edges.y)
    reach = 1.5 + 0.005 * circle.radius_px
    seen = np.zeros(SECTORS, bool)
    seen[sector[aligned & (np.abs(residual) < reach)]] = True
    angle = (np.arange(SECTORS) + 0.5) / SECTORS * 2 * np.pi - np.pi
    x, y = from_upright(circle, circle.radius_px * np.cos(angle), circle.radius_px * np.sin(angle))
    height, width = edges.shape
    visible = (x > 1) & (x < width - 2) & (y > 1) & (y < height - 2)
    if not visible.any():
        return None
    return Hint(circle=circle, visible=float(visible.mean()), covered=float((seen & visible).sum() / visible.sum()))
