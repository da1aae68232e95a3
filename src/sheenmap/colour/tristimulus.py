"""Tristimulus values: the sum over light, reflectance and the observer's functions."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray

MIRROR_Y = 100.0  # luminance factor of the perfect mirror, CIE 15


def xyz(spectral: NDArray[np.floating], wavelength_nm: FloatArray, light: FloatArray, observer: FloatArray) -> FloatArray:
    """XYZ of surfaces under a light, the perfect mirror at Y = 100.

    Parameters
    ----------
    spectral : (..., W) float
        Reflectance or transmittance, 0 to 1.
    wavelength_nm : (W,) float
        Strictly rising, two or more; 1 nm apart for the numbers of a standard.
    light : (W,) float
        Relative spectral power.
    observer : (3, W) float
        Colour-matching functions x, y, z.

    Returns
    -------
    (..., 3) float
        X, Y, Z.

    Raises
    ------
    ValueError
        Shapes that do not go together, or a light that the observer does not see at all.

    Notes
    -----
    X = k sum(S R xbar w), with k = 100 / sum(S ybar w); w is the width of the cell around each wavelength, its borders half-way
    to the neighbours. On an equal step all cells are equal, the first and last too, so that this is the plain sum of CIE 15;
    a trapezoid would halve the end cells and differ from it by up to 1e-5 at 380 nm, where xbar is not zero yet.

    References
    ----------
    CIE 15, Colorimetry, section 7 (from memory).
    """
    weights = _weights(wavelength_nm, light, observer)
    return np.asarray(spectral @ weights.T)


def white_point(wavelength_nm: FloatArray, light: FloatArray, observer: FloatArray) -> FloatArray:
    """XYZ (3,) of the perfect mirror under the light: Y is 100. Parameters and errors as for ``xyz``."""
    return np.asarray(_weights(wavelength_nm, light, observer).sum(axis=-1))


def chromaticity(tristimulus: FloatArray) -> FloatArray:
    """CIE x, y (..., 2) of XYZ (..., 3); NaN for a perfect black, which has none."""
    total = tristimulus.sum(axis=-1, keepdims=True)
    return np.where(total > 0, tristimulus[..., :2] / np.where(total > 0, total, 1.0), np.nan)


def _weights(wavelength_nm: FloatArray, light: FloatArray, observer: FloatArray) -> FloatArray:
    """(3, W) weights, so that a sum of weights times reflectance is X, Y, Z."""
    if wavelength_nm.ndim != 1 or wavelength_nm.size < 2 or light.shape != wavelength_nm.shape:
        raise ValueError(f"wavelength_nm is {wavelength_nm.shape}, light is {light.shape}; both are (W,) with W of 2 or more")
    if observer.shape != (3, wavelength_nm.size):
        raise ValueError(f"observer is {observer.shape}, should be (3, {wavelength_nm.size})")
    # np.gradient of the grid over its own count: half the distance of the two neighbours, the whole step at the ends
    weights = observer * (light * np.gradient(wavelength_nm))
    luminance = weights[1].sum()
    if not luminance > 0:
        raise ValueError("the observer sees nothing of this light (sum of light times ybar is not above zero)")
    return np.asarray(MIRROR_Y / luminance * weights)
