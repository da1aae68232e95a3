"""How well a thickness explains a signal.

-2 ln L = r' C^-1 r with r = signal - table. C holds the noise of the two pictures (with the channels' correlation), the
shading that is left after the blank (the same share in all channels, so a rank-one term along the signal), and, where
far apart thicknesses are weighed against each other, the doubt about lamp and camera (a share of each channel).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray

Floats = NDArray[np.floating]


@dataclass(frozen=True, kw_only=True)
class Doubts:
    """Relative standard uncertainties of the set-up.

    Parameters
    ----------
    shading_u : float
        Brightness left after the blank, from place to place.
    level_u : float
        Exposure of the photograph against the blank's; the same all over the picture.
    colour_u : float
        Of each channel by itself, from lamp and camera response; the same all over the picture.
    """

    shading_u: float = 0.003
    level_u: float = 0.0
    colour_u: float = 0.005

    @property
    def brightness_u(self) -> float:
        """Shading and level together."""
        return float(np.hypot(self.shading_u, self.level_u))


def covariance(variance: Floats, correlation: FloatArray, signal: Floats, doubts: Doubts) -> FloatArray:
    """C (N, 3, 3) of signals (N, 3) with noise ``variance`` (N, 3), all doubts included."""
    sd = np.sqrt(variance)
    result = sd[:, :, None] * correlation * sd[:, None, :]
    result = result + doubts.brightness_u**2 * signal[:, :, None] * signal[:, None, :]
    diagonal = np.arange(signal.shape[1])
    result[:, diagonal, diagonal] += (doubts.colour_u * signal) ** 2
    return np.asarray(result, dtype=float)


@dataclass(frozen=True, kw_only=True, eq=False)
class Fit:
    """One thickness held against a signal, pixel by pixel (N,): chi-square, gradient along thickness, and information.

    ``pull`` is the Gauss-Newton step in nm, ``information`` the Fisher information per nm squared.
    """

    chi_square: FloatArray
    pull: FloatArray
    information: FloatArray


class Whitener:
    """Turns residuals into ones of unit variance, and takes the shading left over out of them (Woodbury's identity)."""

    def __init__(self, variance: Floats, correlation: FloatArray, shading_u: float) -> None:
        self._inverse_sd = 1.0 / np.sqrt(variance)
        self._mix = None if np.array_equal(correlation, np.eye(3)) else np.linalg.inv(np.linalg.cholesky(correlation)).T
        self._shading_u = shading_u

    def white(self, vectors: Floats) -> FloatArray:
        """Vectors (N, 3) in units of their noise."""
        scaled = vectors * self._inverse_sd
        return np.asarray(scaled if self._mix is None else scaled @ self._mix)

    def fit(self, residual: Floats, expected: Floats, slope: Floats) -> Fit:
        """Chi-square, pull and information of residual (N, 3) about the expected signal with its slope per nm."""
        r, f, g = self.white(residual), self.white(expected), self.white(slope)
        free = 1.0 / (self._shading_u**-2 + _dot(f, f)) if self._shading_u > 0 else np.zeros(len(r))
        rf, gf = _dot(r, f), _dot(g, f)
        information = np.maximum(_dot(g, g) - gf * gf * free, 1e-12)
        return Fit(
            chi_square=_dot(r, r) - rf * rf * free,
            pull=(_dot(g, r) - gf * rf * free) / information,
            information=information,
        )


def _dot(a: FloatArray, b: FloatArray) -> FloatArray:
    return np.asarray(np.einsum("...c,...c->...", a, b))
