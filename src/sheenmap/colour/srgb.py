"""sRGB: what a screen is told, and whether it can show it."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.colour.tristimulus import MIRROR_Y

# IEC 61966-2-1:1999: linear RGB from XYZ at Y = 1, with the four decimals that the standard prints, and the encoding curve.
# The primaries in full precision would move dark channels of vivid colours by up to 0.002 off what other programs show.
XYZ_TO_RGB = np.array([[3.2406, -1.5372, -0.4986], [-0.9689, 1.8758, 0.0415], [0.0557, -0.2040, 1.0570]])
WHITE_X, WHITE_Y = 0.3127, 0.3290  # D65
SCREEN_WHITE = MIRROR_Y * np.array([WHITE_X / WHITE_Y, 1.0, (1 - WHITE_X - WHITE_Y) / WHITE_Y])
BREAK_LINEAR, BREAK_ENCODED = 0.0031308, 0.04045
SLOPE, SCALE, OFFSET, EXPONENT = 12.92, 1.055, 0.055, 2.4

# Cone responses from XYZ, Lam's Bradford transform, as in the colour appearance model CIECAM97s (from memory).
BRADFORD = np.array([[0.8951, 0.2664, -0.1614], [-0.7502, 1.7135, 0.0367], [0.0389, -0.0685, 1.0296]])

GAMUT_SLACK = (
    2e-4  # of full scale: the printed matrix misses its own white by 1.6e-4; even in the dark less than one code in 8 bits
)


def encode_srgb(linear: NDArray[np.floating]) -> FloatArray:
    """Encoded values of linear ones, 0 to 1, any shape; negative values follow the straight part. IEC 61966-2-1."""
    curved = SCALE * np.maximum(linear, BREAK_LINEAR) ** (1 / EXPONENT) - OFFSET
    return np.where(linear <= BREAK_LINEAR, SLOPE * linear, curved)


def decode_srgb(encoded: NDArray[np.floating]) -> FloatArray:
    """Linear values of encoded ones, 0 to 1, any shape: the inverse of ``encode_srgb``. IEC 61966-2-1."""
    curved = ((np.maximum(encoded, BREAK_ENCODED) + OFFSET) / SCALE) ** EXPONENT
    return np.where(encoded <= BREAK_ENCODED, encoded / SLOPE, curved)


def adapted(tristimulus: FloatArray, white: FloatArray, to_white: FloatArray) -> FloatArray:
    """XYZ (..., 3) that look under ``to_white`` (3,) as the given ones look under ``white`` (3,).

    Notes
    -----
    Von Kries scaling of the Bradford cone responses; complete adaptation. Whites keep their Y.
    """
    gain = (BRADFORD @ to_white) / (BRADFORD @ white)
    turn = np.linalg.solve(BRADFORD, gain[:, None] * BRADFORD)
    return np.asarray(tristimulus @ turn.T)


def srgb(tristimulus: FloatArray, white: FloatArray) -> tuple[FloatArray, BoolArray]:
    """Encoded sRGB of colours, adapted from their white to sRGB's, and whether sRGB holds them.

    Parameters
    ----------
    tristimulus : (..., 3) float
        X, Y, Z with the white at Y = 100.
    white : (3,) float
        The white that the eye is adapted to; it comes out as 1, 1, 1 (within 1e-4, the rounding of the standard's matrix).

    Returns
    -------
    rgb : (..., 3) float
        Encoded, 0 to 1. A colour out of gamut is clipped channel by channel in linear light: it is not the colour asked for.
    in_gamut : (...) bool
        False where anything was clipped.
    """
    linear = adapted(tristimulus, white, SCREEN_WHITE) / MIRROR_Y @ XYZ_TO_RGB.T
    in_gamut = np.all((linear >= -GAMUT_SLACK) & (linear <= 1 + GAMUT_SLACK), axis=-1)
    return encode_srgb(np.clip(linear, 0.0, 1.0)), in_gamut
