"""Pixels that do not continue the film around them: dirt, a real line or step, or a mixture at an edge.

A pixel that no thickness explains seeds a defect; it grows by what touches it and by a margin, since up to a sixth of a
dust grain's pixels have by chance a colour that some thickness makes. What lies on the curve, is large or long, and holds
together is film of another thickness.
"""

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray

OFF_CURVE_FALSE_ALARMS = 1e-3  # clean pixels that are called off the curve; chi-square 13.8 for one shot
SURELY_OFF_FALSE_ALARMS = 3e-7  # chi-square 30 for one shot
SMALLEST_DEFECT = 3  # touching pixels; two neighbours by chance: one in a hundred thousand
MARGIN = 2  # pixels around a defect whose light is partly the defect's
LONGEST_SPECK = 10  # pixels; smaller objects that stand out of the film are specks, longer ones may be lines and steps
MOSTLY_ON_CURVE = 0.7


def split_strays(
    stray: BoolArray, on_curve: BoolArray, chi_square: FloatArray, at_step: BoolArray, surely_off: float
) -> tuple[BoolArray, BoolArray]:
    """Defects and film among the pixels (H, W) that do not continue their surroundings.

    Parameters
    ----------
    stray : (H, W) bool
        Pixels whose surroundings' thickness does not explain them.
    on_curve : (H, W) bool
        Those that some other thickness explains.
    chi_square : (H, W) float
        Of the best explanation.
    at_step : (H, W) bool
        Where film of one region meets another: strays there mix the light of both, and need no margin.
    surely_off : float
        Chi-square that not even a lone clean pixel reaches.

    Returns
    -------
    defect, film : (H, W) bool
        Defects with their margin, and strays that are film of another thickness. A lone stray pixel is in neither.
    """
    count, numbers, stats, _ = cv2.connectedComponentsWithStats(stray.astype(np.uint8), connectivity=8)
    label = np.asarray(numbers, dtype=np.int32)
    area = stats[:, cv2.CC_STAT_AREA]
    extent = np.maximum(stats[:, cv2.CC_STAT_WIDTH], stats[:, cv2.CC_STAT_HEIGHT])
    share_on = _sums(label, on_curve & stray, count) / np.maximum(area, 1)
    worst = np.zeros(count)
    np.maximum.at(worst, label[stray], chi_square[stray])
    film = (extent >= LONGEST_SPECK) & (share_on >= MOSTLY_ON_CURVE)
    defect = ~film & ((area >= SMALLEST_DEFECT) | (worst >= surely_off))
    film[0] = defect[0] = False
    found = defect[label]
    return found | _grown(found & ~at_step), film[label] & on_curve


def _sums(label: NDArray[np.int32], mask: BoolArray, count: int) -> FloatArray:
    return np.bincount(label[mask], minlength=count).astype(float)


def _grown(defect: BoolArray) -> BoolArray:
    """Defects with ``MARGIN`` pixels around."""
    kernel = cv2.getStructuringElement(cv2.MORPH_ELLIPSE, (2 * MARGIN + 1, 2 * MARGIN + 1))
    return np.asarray(cv2.dilate(defect.astype(np.uint8), kernel), dtype=bool)
