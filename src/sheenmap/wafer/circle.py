"""Circles through points: algebraic for a start, geometric and robust for the result."""

from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import BoolArray, FloatArray

TUKEY_CUT = 4.685  # in standard deviations: 95 % efficient on normal residuals, blind to anything farther away
MAD_TO_SD = 1.4826  # of a normal distribution
GROSS_CUT = 3.0  # multiples of the scale at which the first rounds turn from square to linear


@dataclass(frozen=True, kw_only=True)
class Circle:
    """Centre and radius in pixels, and the standard uncertainty of the least certain of the three."""

    x_px: float
    y_px: float
    radius_px: float
    u_px: float = 0.0


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
    """Distance of points from the circle, positive outside. (N,) pixels."""
    return np.hypot(x - circle.x_px, y - circle.y_px) - circle.radius_px


def robust_circle(x: FloatArray, y: FloatArray, start: Circle, *, rounds: int = 25) -> tuple[Circle, BoolArray]:
    """The circle of least geometric distance with points far off left out, and which points support it.

    Parameters
    ----------
    x, y : (N,) float
        Points in pixels.
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
    Gauss-Newton on hypot(x - a, y - b) - r, reweighted: Huber's weights first, which any start survives, then Tukey's, which
    forget a notch, a flat or a clip altogether. The scale is the median absolute deviation. The uncertainty allows for
    neighbours that share their error, by the lag-one correlation of the residuals: points are taken to be in order.
    """
    circle = start
    weights = np.ones_like(x)
    for step in range(rounds):
        residual = radial_residual(circle, x, y)
        scale = max(MAD_TO_SD * float(np.median(np.abs(residual - (np.median(residual) if step == 0 else 0.0)))), 1e-6)
        weights = _huber(residual / scale) if step < rounds // 3 else _tukey(residual / scale)
        moved, circle = _gauss_newton(circle, x, y, residual, weights)
        if step > rounds // 3 + 2 and moved < 1e-4:
            break
    residual = radial_residual(circle, x, y)
    support = weights > 0
    return _with_uncertainty(circle, x, y, residual, support), support


def _huber(scaled: FloatArray) -> FloatArray:
    return 1.0 / np.maximum(np.abs(scaled) / GROSS_CUT, 1.0)


def _tukey(scaled: FloatArray) -> FloatArray:
    inside = np.clip(1 - (scaled / TUKEY_CUT) ** 2, 0, None)
    return np.asarray(inside**2)


def _design(circle: Circle, x: FloatArray, y: FloatArray) -> FloatArray:
    distance = np.maximum(np.hypot(x - circle.x_px, y - circle.y_px), 1e-9)
    return np.column_stack([(x - circle.x_px) / distance, (y - circle.y_px) / distance, np.ones_like(x)])


def _gauss_newton(
    circle: Circle, x: FloatArray, y: FloatArray, residual: FloatArray, weights: FloatArray
) -> tuple[float, Circle]:
    design = _design(circle, x, y)
    weighted = design * weights[:, None]
    shift = np.linalg.lstsq(weighted.T @ design, weighted.T @ residual, rcond=1e-10)[0]
    moved = Circle(
        x_px=circle.x_px + float(shift[0]),
        y_px=circle.y_px + float(shift[1]),
        radius_px=max(circle.radius_px + float(shift[2]), 1e-3),
    )
    return float(np.abs(shift).max()), moved


def _with_uncertainty(circle: Circle, x: FloatArray, y: FloatArray, residual: FloatArray, support: BoolArray) -> Circle:
    kept = residual[support]
    if kept.size < 6:
        return Circle(x_px=circle.x_px, y_px=circle.y_px, radius_px=circle.radius_px, u_px=float("inf"))
    variance = float(np.sum(kept**2)) / (kept.size - 3)
    centred = kept - kept.mean()
    shared = float(np.clip(np.sum(centred[1:] * centred[:-1]) / max(float(np.sum(centred**2)), 1e-12), 0.0, 0.95))
    design = _design(circle, x, y)[support]
    covariance = np.linalg.pinv(design.T @ design) * variance * (1 + shared) / (1 - shared)
    u_px = float(np.sqrt(np.max(np.diag(covariance))))
    return Circle(x_px=circle.x_px, y_px=circle.y_px, radius_px=circle.radius_px, u_px=u_px)
