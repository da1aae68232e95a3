"""How well a thickness explains a signal.

-2 ln L = r' C^-1 r with r = signal - table. C holds the noise of the two pictures (with the channels' correlation), the
shading that is left after the blank (the same share in all channels, so a rank-one term along the signal), and, where
far apart thicknesses are weighed against each other, the doubt about lamp and camera (a share of each channel).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import chdtri

from sheenmap.arrays import FloatArray

Floats = NDArray[np.floating]
CHANNELS = 3  # of one shot; several shots stand one after the other


def shots(channels: int) -> list[slice]:
    """The channels of each shot."""
    return [slice(start, start + CHANNELS) for start in range(0, channels, CHANNELS)]


def same_shot(channels: int) -> FloatArray:
    """(C, C): 1 where two channels belong to one shot, and so share its brightness, else 0."""
    shot = np.arange(channels) // CHANNELS
    return np.asarray(shot[:, None] == shot, dtype=float)


def chi_square_limit(false_alarms: float, channels: int) -> float:
    """Chi-square that a film exceeds with the probability ``false_alarms``; one of the channels' freedoms is thickness."""
    return float(chdtri(channels - 1, false_alarms))


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
    """C (N, C, C) of signals (N, C) with noise ``variance`` (N, C), all doubts included."""
    sd = np.sqrt(variance)
    result = sd[:, :, None] * correlation * sd[:, None, :]
    alike = doubts.brightness_u**2 * same_shot(signal.shape[1])
    result = result + alike * signal[:, :, None] * signal[:, None, :]
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
        is_white = np.array_equal(correlation, np.eye(len(correlation)))
        self._mix = None if is_white else np.linalg.inv(np.linalg.cholesky(correlation)).T
        self._shading_u = shading_u

    def white(self, vectors: Floats) -> FloatArray:
        """Vectors (N, C) in units of their noise."""
        scaled = vectors * self._inverse_sd
        return np.asarray(scaled if self._mix is None else scaled @ self._mix)

    def fit(self, residual: Floats, expected: Floats, slope: Floats) -> Fit:
        """Chi-square, pull and information of residual (N, C) about the expected signal with its slope per nm."""
        r, f, g = self.white(residual), self.white(expected), self.white(slope)
        chi_square, pull, information = _dot(r, r), _dot(g, r), _dot(g, g)
        if self._shading_u > 0:
            for shot in shots(r.shape[-1]):
                free = 1.0 / (self._shading_u**-2 + _dot(f[:, shot], f[:, shot]))
                rf, gf = _dot(r[:, shot], f[:, shot]), _dot(g[:, shot], f[:, shot])
                chi_square = chi_square - rf * rf * free
                pull = pull - gf * rf * free
                information = information - gf * gf * free
        information = np.maximum(information, 1e-12)
        return Fit(chi_square=chi_square, pull=pull / information, information=information)


def _dot(a: FloatArray, b: FloatArray) -> FloatArray:
    return np.asarray(np.einsum("...c,...c->...", a, b))
