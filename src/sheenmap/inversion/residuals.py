"""Noise that neighbours and channels share, read off the residuals of a first fit.

A JPEG thins the colour and rounds it in patterns of 16 pixels, so that differences of neighbours see too little of it. The
residuals see it whole, but for the direction in which the signal moves with thickness. So the covariance is found by
expectation and maximisation (Dempster, Laird and Rubin, J. R. Stat. Soc. B 39, 1, 1977): residual squared, plus what the
fitted thickness has taken away, averaged over pixels of all thicknesses, until it stays.
"""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy.special import chdtr, chdtri

from sheenmap.arrays import FloatArray
from sheenmap.camera import Signal
from sheenmap.inversion.posterior import Pixels
from sheenmap.lookup import Table, evaluate

ROUNDS = 12
TRIMMED = 0.99  # of the pixels, those with the least residual; the rest may be dirt


def with_residual_noise(signal: Signal, pixels: Pixels, thickness_nm: FloatArray, table: Table) -> Signal:
    """The signal with variance and correlation as the residuals of fitted ``pixels`` (N,) show them."""
    expected, slope = evaluate(table, thickness_nm, pixels.angle_deg)
    sd = np.sqrt(pixels.variance)
    residual, along = (pixels.signal - expected) / sd, slope / sd
    matrix = signal.correlation * _scale(signal.correlation, residual, along)
    for _ in range(ROUNDS):
        matrix = _updated(matrix, residual, along)
    scale = np.sqrt(np.diag(matrix))
    factor = np.diag(matrix).astype(np.float32)
    line = "noise taken from the residuals: " + ", ".join(f"{v:.2f}" for v in scale) + " times that of neighbours' differences"
    return replace(
        signal,
        variance=signal.variance * factor,
        correlation=matrix / scale[:, None] / scale[None, :],
        history=(*signal.history, line),
    )


def _trimmed_mean(freedoms: int) -> float:
    """Mean of a chi-square variable over its lowest ``TRIMMED``, relative to its whole mean."""
    return float(chdtr(freedoms + 2, chdtri(freedoms, 1 - TRIMMED)) / TRIMMED)


def _scale(matrix: FloatArray, residual: FloatArray, along: FloatArray) -> float:
    """A first scale of the whole covariance.

    The direction in which thickness moves the signal is seen by neighbours' differences alone, which see too little, and
    the others by the residuals, which see all of what a JPEG does to them. The unseen direction gets the geometric mean.
    """
    _, chi_square, _ = _left_over(matrix, residual, along)
    return float(np.sqrt(np.median(chi_square) / chdtri(len(matrix) - 1, 0.5)))


def _left_over(matrix: FloatArray, residual: FloatArray, along: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Residuals (N, 3) with the thickness free, their chi-square (N,), and the information on thickness (N,)."""
    precision = np.linalg.inv(matrix)
    weighted = along @ precision
    information = np.maximum(np.einsum("ni,ni->n", weighted, along), 1e-12)
    left = residual - along * (np.einsum("ni,ni->n", weighted, residual) / information)[:, None]
    return left, np.einsum("ni,ij,nj->n", left, precision, left), information


def _updated(matrix: FloatArray, residual: FloatArray, along: FloatArray) -> FloatArray:
    left, chi_square, information = _left_over(matrix, residual, along)
    kept: NDArray[np.bool_] = chi_square <= np.quantile(chi_square, TRIMMED)
    taken = np.einsum("n,ni,nj->ij", 1 / information[kept], along[kept], along[kept])
    seen = np.einsum("ni,nj->ij", left[kept], left[kept]) / _trimmed_mean(len(matrix) - 1)
    return np.asarray((seen + taken) / kept.sum())
