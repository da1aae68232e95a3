"""Colour difference CIEDE2000."""

import numpy as np

from sheenmap.arrays import FloatArray

HUE_TIE_DEG = 1e-9  # hues apart by 180 degrees within this count as exactly opposite, whichever way arctan2 was rounded


def delta_e_2000(one: FloatArray, other: FloatArray) -> FloatArray:
    """CIEDE2000 difference of colours, with all weighting factors at one.

    Parameters
    ----------
    one, other : (..., 3) float
        L*, a*, b*; they broadcast against each other.

    Returns
    -------
    (...) float
        Zero for equal colours; about one is what an eye just sees side by side.

    Notes
    -----
    The formula leaves open which way round the hue circle the mean of two exactly opposite hues goes, and rounding in arctan2
    would decide it. Here opposite hues take the plain mean (h1 + h2) / 2, as the published table does in its pair 14 (4.8045).

    References
    ----------
    Sharma, Wu and Dalal, Color Research and Application 30, 21-30 (2005), equations 2 to 22 (from memory, held to table 1).
    """
    lightness_1, chroma_1, hue_1 = _rescaled(one, other)
    lightness_2, chroma_2, hue_2 = _rescaled(other, one)
    step, hue = _hue_step_and_mean(hue_1, hue_2)
    chroma = (chroma_1 + chroma_2) / 2
    d_hue = 2 * np.sqrt(chroma_1 * chroma_2) * np.sin(np.radians(step) / 2)
    weight_l, weight_c, weight_h = _weights((lightness_1 + lightness_2) / 2, chroma, hue)
    l_term, c_term, h_term = (lightness_2 - lightness_1) / weight_l, (chroma_2 - chroma_1) / weight_c, d_hue / weight_h
    squared = l_term**2 + c_term**2 + h_term**2 + _rotation(chroma, hue) * c_term * h_term
    return np.sqrt(np.maximum(squared, 0.0))


def _rescaled(colour: FloatArray, partner: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """L, C', h' in degrees of ``colour``; a* is stretched for greys, by the mean chroma of the pair."""
    mean = (np.hypot(colour[..., 1], colour[..., 2]) + np.hypot(partner[..., 1], partner[..., 2])) / 2
    a = (1 + (1 - np.sqrt(_saturating(mean))) / 2) * colour[..., 1]
    b = colour[..., 2]
    return colour[..., 0], np.hypot(a, b), np.degrees(np.arctan2(b, a)) % 360


def _saturating(chroma: FloatArray) -> FloatArray:
    return np.asarray(chroma**7 / (chroma**7 + 25.0**7))


def _hue_step_and_mean(hue_1: FloatArray, hue_2: FloatArray) -> tuple[FloatArray, FloatArray]:
    """h2 - h1 the short way round, and the mean hue; with a grey, which has none, both come to nothing by its chroma of zero."""
    straight = hue_2 - hue_1
    total = hue_1 + hue_2
    is_short = np.abs(straight) <= 180 + HUE_TIE_DEG
    step = np.where(is_short, straight, straight - 360 * np.sign(straight))
    mean = np.where(is_short, total, np.where(total < 360, total + 360, total - 360)) / 2
    return step, mean


def _weights(lightness: FloatArray, chroma: FloatArray, hue_deg: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    hue = np.radians(hue_deg)
    turn = (
        1
        - 0.17 * np.cos(hue - np.radians(30))
        + 0.24 * np.cos(2 * hue)
        + 0.32 * np.cos(3 * hue + np.radians(6))
        - 0.20 * np.cos(4 * hue - np.radians(63))
    )
    from_middle = (lightness - 50) ** 2
    return 1 + 0.015 * from_middle / np.sqrt(20 + from_middle), 1 + 0.045 * chroma, 1 + 0.015 * chroma * turn


def _rotation(chroma: FloatArray, hue_deg: FloatArray) -> FloatArray:
    turn_deg = 30 * np.exp(-(((hue_deg - 275) / 25) ** 2))
    return np.asarray(-2 * np.sqrt(_saturating(chroma)) * np.sin(np.radians(2 * turn_deg)))
