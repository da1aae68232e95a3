"""How one photograph of a part lies over another, taken under other light.

Interference colours change with the light, so that their fringes must not be matched. What stays is where the part ends and
where film steps: both photographs are turned into strength of edges, and the two are laid over each other by their phases
(Kuglin and Hines, 1975; the peak placed below a pixel), then by maximising their correlation (Evangelidis and Psarakis, IEEE
Trans. PAMI 30, 1858, 2008).
"""

from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray

LARGEST_SIDE = 1024
LEAST_RESPONSE = 0.06  # of the phases' peak; unrelated pictures stay below with odds of 1000 to 1
LEAST_CORRELATION = 0.35
STEPS, EPSILON = 60, 1e-5


@dataclass(frozen=True, kw_only=True, eq=False)
class Registration:
    """``matrix`` (2, 3) leads from a pixel of the main photograph to the other's; ``correlation`` of their edges, 0 to 1.

    ``is_found`` is False when the two share too few edges to tell; the matrix then leaves everything in its place.
    """

    matrix: FloatArray
    correlation: float
    is_found: bool


def register(main: NDArray[np.floating], other: NDArray[np.floating]) -> Registration:
    """Lay ``other`` (H, W, 3) over ``main`` (H, W, 3): shift, turn and stretch."""
    scale = min(1.0, LARGEST_SIDE / max(main.shape[:2]))
    first, second = (_edges(picture, scale) for picture in (main, other))
    window = cv2.createHanningWindow(first.shape[::-1], cv2.CV_32F)
    (right, down), response = cv2.phaseCorrelate(first, second, window)
    nothing = np.array([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0]])
    if response < LEAST_RESPONSE:
        return Registration(matrix=nothing, correlation=0.0, is_found=False)
    start = np.array([[1, 0, right], [0, 1, down]], dtype=np.float32)
    criteria = (cv2.TERM_CRITERIA_EPS | cv2.TERM_CRITERIA_COUNT, STEPS, EPSILON)
    try:
        correlation, matrix = cv2.findTransformECC(first, second, start, cv2.MOTION_AFFINE, criteria)
    except cv2.error:
        return Registration(matrix=nothing, correlation=0.0, is_found=False)
    if correlation < LEAST_CORRELATION:
        return Registration(matrix=nothing, correlation=float(correlation), is_found=False)
    full = np.asarray(matrix, dtype=float)
    full[:, 2] /= scale
    return Registration(matrix=full, correlation=float(correlation), is_found=True)


def _edges(picture: NDArray[np.floating], scale: float) -> NDArray[np.float32]:
    """Strength of edges, each picture's own noise taken off, in units of its upper tail."""
    size = (max(16, round(picture.shape[1] * scale)), max(16, round(picture.shape[0] * scale)))
    small = cv2.resize(np.ascontiguousarray(picture, np.float32), size, interpolation=cv2.INTER_AREA)
    smooth = cv2.GaussianBlur(small, (0, 0), 1.2)
    strength = np.zeros(smooth.shape[:2], np.float32)
    for channel in range(smooth.shape[2]):
        gradients = [cv2.Sobel(smooth[..., channel], cv2.CV_32F, *order) for order in ((1, 0), (0, 1))]
        strength = np.maximum(strength, np.hypot(*gradients) / max(float(smooth[..., channel].mean()), 1e-6))
    floor, ceiling = np.quantile(strength, [0.7, 0.995])
    return np.asarray(np.clip((strength - floor) / max(float(ceiling - floor), 1e-9), 0, 1), dtype=np.float32)
