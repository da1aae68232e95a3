"""CIELAB: lightness, and the two axes green to red and blue to yellow, against a white."""

import numpy as np

from sheenmap.arrays import FloatArray

KNEE = 6 / 29  # below its cube the cube root gives way to a straight line; exact fractions of CIE 15:2004


def lab(tristimulus: FloatArray, white: FloatArray) -> FloatArray:
    """L*, a*, b* of colours against a white.

    Parameters
    ----------
    tristimulus : (..., 3) float
        X, Y, Z.
    white : (3,) or (..., 3) float
        X, Y, Z of the white on the same scale, all above zero.

    Returns
    -------
    (..., 3) float
        L* (0 black, 100 the white; above it for what is brighter), a*, b*.

    References
    ----------
    CIE 15:2004, section 8.2.1.1, with the knee in exact fractions (from memory).
    """
    x, y, z = np.moveaxis(_compressed(tristimulus / white), -1, 0)
    return np.stack([116 * y - 16, 500 * (x - y), 200 * (y - z)], axis=-1)


def xyz_from_lab(colours: FloatArray, white: FloatArray) -> FloatArray:
    """X, Y, Z (..., 3) of L*, a*, b* (..., 3) against a white (3,): the inverse of ``lab``."""
    lightness, a, b = np.moveaxis(colours, -1, 0)
    y = (lightness + 16) / 116
    compressed = np.stack([y + a / 500, y, y - b / 200], axis=-1)
    return np.where(compressed > KNEE, compressed**3, 3 * KNEE**2 * (compressed - 4 / 29)) * white


def lch(colours: FloatArray) -> FloatArray:
    """Lightness, chroma, hue angle (..., 3) of L*, a*, b* (..., 3); hue in degrees, 0 up to 360, and 0 for a perfect grey."""
    lightness, a, b = np.moveaxis(colours, -1, 0)
    hue_deg = np.degrees(np.arctan2(b, a)) % 360
    return np.stack([lightness, np.hypot(a, b), np.where(hue_deg < 360, hue_deg, 0.0)], axis=-1)


def _compressed(ratio: FloatArray) -> FloatArray:
    return np.where(ratio > KNEE**3, np.cbrt(ratio), ratio / (3 * KNEE**2) + 4 / 29)
