"""Circles, and slightly oval outlines of tilted discs, through points: algebraic for a start, geometric and robust at last."""

from dataclasses import dataclass, replace

import numpy as np

from sheenmap.arrays import BoolArray, FloatArray

TUKEY_CUT = 4.685  # in standard deviations: 95 % efficient on normal residuals, blind to anything farther away
MAD_TO_SD = 1.4826  # of a normal distribution
SHORTH_SHARE, SHORTH_TO_SD = 0.4, 1 / (2 * 0.5244)  # the shortest interval that holds 40 % of a normal distribution
GROSS_CUT = 3.0  # multiples of the scale at which the first rounds turn from square to linear
MOST_OVAL = 0.08  # minor over major axis 0.85: a tilt of 31 degrees


@dataclass(frozen=True, kw_only=True)
class Circle:
    """Centre and radius in pixels, and the standard uncertainty of the least certain of them.

    Points p on an oval outline have |M (p - centre)| = radius with M = [[1 + s, t], [t, 1 - s]] and (s, t) = ``oval``;
    M makes it round again.
    """

    x_px: float
    y_px: float
    radius_px: float
    u_px: float = 0.0
    oval: tuple[float, float] = (0.0, 0.0)

    @property
    def major_px(self) -> float:
        """The longer half axis: the radius of the disc itself, which a tilt does not change."""
        return self.radius_px / (1 - float(np.hypot(*self.oval)))


def upright(circle: Circle, x: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Points about the centre with the outline made round, M (p - centre)."""
    s, t = circle.oval
    dx, dy = x - circle.x_px, y - circle.y_px
    return (1 + s) * dx + t * dy, t * dx + (1 - s) * dy


def from_upright(circle: Circle, u: FloatArray, v: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Points in the picture of points about the centre of the round outline; the inverse of ``upright``."""
    s, t = circle.oval
    determinant = 1 - s * s - t * t
    return circle.x_px + ((1 - s) * u - t * v) / determinant, circle.y_px + ((1 + s) * v - t * u) / determinant


def algebraic_circle(x: FloatArray, y: FloatArray) -> Circle | None:
    """The circle of least algebraic distance, or None when the points lie on a line.

    Parameters
    ----------
    x, y : (N,) float
        Points in pixels, three or more.

    Notes
    -----
    Minimises the sum of (x^2 + y^2 + b x + c y + d)^2. It is biased to small radii on short arcs, so it only starts the
    geometric fit.

    References
    ----------
    Kasa, IEEE Trans. Instrum. Meas. 25, 8 (1976) (from memory).
    """
    if x.size < 3:
        return None
    middle_x, middle_y = float(x.mean()), float(y.mean())
    u, v = x - middle_x, y - middle_y
    design = np.column_stack([u, v, np.ones_like(u)])
    solution, _, rank, _ = np.linalg.lstsq(design, -(u**2 + v**2), rcond=1e-9)
    square = float(solution[0] ** 2 + solution[1] ** 2) / 4 - float(solution[2])
    if rank < 3 or square <= 0:
        return None
    x_px, y_px = middle_x - float(solution[0]) / 2, middle_y - float(solution[1]) / 2
    return Circle(x_px=x_px, y_px=y_px, radius_px=float(np.sqrt(square)))


def radial_residual(circle: Circle, x: FloatArray, y: FloatArray) -> FloatArray:
    """Distance of points from the outline, positive outside. (N,) pixels."""
    return np.hypot(*upright(circle, x, y)) - circle.radius_px


def robust_circle(x: FloatArray, y: FloatArray, start: Circle, *, rounds: int = 30) -> tuple[Circle, BoolArray]:
    """The outline of least geometric distance, as oval as ``start``, with points far off left out.

    Parameters
    ----------
    x, y : (N,) float
        Points in pixels, in order round the outline.
    start : Circle
        Where the search begins; within a few per cent of the radius.
    rounds : int
        At most so many reweighted steps.

    Returns
    -------
    Circle, (N,) bool
        Fit with its uncertainty; True where a point lies within the cut.

    Notes
    -----
    Gauss-Newton on |M (p - c)| - r, reweighted: Huber's weights first, which any start survives, then Tukey's, which forget a
    notch, a flat or a clip altogether. The scale is the median absolute deviation or, where a textured bench adds edges on one
    side, the shortest interval that holds 40 % of the residuals. The uncertainty allows for neighbours that share their error,
    by the lag-one correlation of the residuals.

    References
    ----------
    Rousseeuw and Leroy, Robust Regression and Outlier Detection (1987), shortest half (from memory).
    """
    return _fit(x, y, start, 3, rounds)


def robust_oval(x: FloatArray, y: FloatArray, start: Circle, *, rounds: int = 30) -> tuple[Circle, BoolArray]:
    """As ``robust_circle``, with the outline free to be oval, as a tilted disc is."""
    return _fit(x, y, start, 5, rounds)


def _fit(x: FloatArray, y: FloatArray, start: Circle, unknowns: int, rounds: int) -> tuple[Circle, BoolArray]:
    circle, weights, early = start, np.ones_like(x), rounds // 3
    for step in range(rounds):
        residual = radial_residual(circle, x, y)
        middle, scale = _scale(residual)
        if step == early:
            circle = replace(circle, radius_px=circle.radius_px + middle)
            residual = residual - middle
        weights = (
            _huber((residual - (np.median(residual) if step == 0 else 0.0)) / scale) if step < early else _tukey(residual / scale)
        )
        moved, circle = _gauss_newton(circle, x, y, residual, weights, unknowns)
        if step > early + 2 and moved < 1e-4:
            break
    residual = radial_residual(circle, x, y)
    support = weights > 0
    return replace(circle, u_px=_uncertainty(circle, x, y, residual, support, unknowns)), support


def _scale(residual: FloatArray) -> tuple[float, float]:
    """Middle of the shortest interval that holds 40 % of the residuals, and the smaller of its scale and the usual one."""
    ordered = np.sort(residual)
    span = max(1, int(SHORTH_SHARE * ordered.size))
    length = ordered[span:] - ordered[:-span]
    first = int(np.argmin(length))
    usual = MAD_TO_SD * float(np.median(np.abs(residual)))
    return float(ordered[first] + ordered[first + span]) / 2, max(min(usual, float(length[first]) * SHORTH_TO_SD), 1e-6)


def _huber(scaled: FloatArray) -> FloatArray:
    return 1.0 / np.maximum(np.abs(scaled) / GROSS_CUT, 1.0)


def _tukey(scaled: FloatArray) -> FloatArray:
    inside = np.clip(1 - (scaled / TUKEY_CUT) ** 2, 0, None)
    return np.asarray(inside**2)


def _design(circle: Circle, x: FloatArray, y: FloatArray, unknowns: int) -> FloatArray:
    """How each residual falls with x, y, radius and, with five unknowns, the oval's s and t. (N, 3 or 5)."""
    u, v = upright(circle, x, y)
    distance = np.maximum(np.hypot(u, v), 1e-9)
    s, t = circle.oval
    columns = [((1 + s) * u + t * v) / distance, (t * u + (1 - s) * v) / distance, np.ones_like(x)]
    if unknowns == 5:
        dx, dy = x - circle.x_px, y - circle.y_px
        columns += [-(u * dx - v * dy) / distance, -(u * dy + v * dx) / distance]
    return np.column_stack(columns)


def _gauss_newton(
    circle: Circle, x: FloatArray, y: FloatArray, residual: FloatArray, weights: FloatArray, unknowns: int
) -> tuple[float, Circle]:
    design = _design(circle, x, y, unknowns)
    weighted = design * weights[:, None]
    shift = np.linalg.lstsq(weighted.T @ design, weighted.T @ residual, rcond=1e-10)[0]
    s, t = np.add(circle.oval, shift[3:]) if unknowns == 5 else circle.oval
    shrink = min(1.0, MOST_OVAL / max(float(np.hypot(s, t)), 1e-12))
    moved = Circle(
        x_px=circle.x_px + float(shift[0]),
        y_px=circle.y_px + float(shift[1]),
        radius_px=max(circle.radius_px + float(shift[2]), 1e-3),
        oval=(float(s) * shrink, float(t) * shrink),
    )
    return float(np.abs(shift[:3]).max()), moved


def _uncertainty(circle: Circle, x: FloatArray, y: FloatArray, residual: FloatArray, support: BoolArray, unknowns: int) -> float:
    kept = residual[support]
    if kept.size < 2 * unknowns:
        return float("inf")
    variance = float(np.sum(kept**2)) / (kept.size - unknowns)
    centred = kept - kept.mean()
    shared = float(np.clip(np.sum(centred[1:] * centred[:-1]) / max(float(np.sum(centred**2)), 1e-12), 0.0, 0.95))
    design = _design(circle, x, y, unknowns)[support]
    covariance = np.linalg.pinv(design.T @ design) * variance * (1 + shared) / (1 - shared)
    return float(np.sqrt(np.max(np.diag(covariance)[:3])))
