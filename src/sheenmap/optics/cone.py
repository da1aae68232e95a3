"""The cone of light that a lens takes in, as a few angles with weights for s and p.

An evenly filled pupil weighs a direction by the cosine of its angle psi to the axis (u du = -cos psi d cos psi with
u = sin psi). About the film's normal a direction has the polar angle theta and the azimuth phi, and
cos psi = cos theta cos axis + sin theta sin axis cos phi. Everything depends on cos theta alone once phi is summed, so that
reflectance is computed at Gauss nodes of cos theta, as few as its smoothness asks for, and the pupil's weights are put on them.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.optics.stack import View

CONVERGED = 1e-10  # in reflectance; the nodes' own rounding is 1e-14
COUNTS = (3, 4, 6, 9, 13, 19, 28, 42, 63, 95, 143, 215)  # only a critical angle within the cone needs the last ones
RINGS, SPOKES = 256, 32  # of the pupil's own sums, which cost no reflectance; polynomials of the last count stay exact


@dataclass(frozen=True, kw_only=True, eq=False)
class Directions:
    """Angles (N,) in radians and the weights (N,) of their s and p reflectance; all weights add up to 1."""

    angle_rad: FloatArray
    s: FloatArray
    p: FloatArray


def directions(view: View, medium_index: float, average: Callable[[Directions], FloatArray]) -> Directions:
    """Angles to be averaged over, as many as it takes.

    Parameters
    ----------
    medium_index : float
        The sine of the cone's half angle is the aperture over it.
    average : callable
        Reflectance over some directions, at thicknesses and wavelengths that stand for all: taken on ever more nodes until
        it stays within 1e-10.
    """
    share_s = {"none": 0.5, "s": 1.0, "p": 0.0}[view.polarisation]
    if view.aperture == 0:
        return Directions(angle_rad=np.deg2rad([view.angle_deg]), s=np.array([share_s]), p=np.array([1 - share_s]))
    pupil = _pupil(np.deg2rad(view.angle_deg), np.arcsin(min(1.0, view.aperture / medium_index)))
    tried = _on_nodes(pupil, share_s, COUNTS[0])
    seen = average(tried)
    for count in COUNTS[1:]:
        finer = _on_nodes(pupil, share_s, count)
        seen, before = average(finer), seen
        if np.max(np.abs(seen - before)) < CONVERGED:
            return tried
        tried = finer
    return tried


@dataclass(frozen=True, kw_only=True, eq=False)
class _Pupil:
    """Cosines (P,) to the film's normal, their share of the pupil, and how much of s light (to the axis) is s to the film."""

    cosine: FloatArray
    share: FloatArray
    s_of_s: FloatArray
    low: float
    high: float


def _pupil(axis_rad: float, half_angle_rad: float) -> _Pupil:
    """Sum the pupil over azimuth. Directions from below the film's plane are left out, and the rest fills the pupil."""
    parts = []
    if axis_rad > 0:
        parts.append(_crescent(axis_rad, half_angle_rad))
    if half_angle_rad > axis_rad:
        parts.append(_cap(axis_rad, half_angle_rad))
    cosine, step, widest = (np.concatenate(part) for part in zip(*parts))
    whole, s_of_s = _over_azimuth(axis_rad, cosine, widest)
    share = step * whole
    return _Pupil(
        cosine=cosine, share=share / share.sum(), s_of_s=s_of_s / whole,
        low=max(0.0, float(np.cos(axis_rad + half_angle_rad))), high=float(np.cos(max(0.0, axis_rad - half_angle_rad))),
    )  # fmt: skip


def _crescent(axis_rad: float, half_angle_rad: float) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Cosines, steps and widest azimuths where the pupil holds part of a circle about the normal.

    The widest azimuth leaves both ends as a square root; over the arc of which the cosine is a projection it is smooth.
    """
    ends = np.cos([axis_rad + half_angle_rad, abs(axis_rad - half_angle_rad)])
    middle, half = (ends[1] + ends[0]) / 2, (ends[1] - ends[0]) / 2
    last = np.pi if ends[0] >= 0 else np.arccos(-middle / half)
    arc, step = _gauss(0.0, last, RINGS)
    cosine = middle + half * np.cos(arc)
    sine = np.sqrt((1 - cosine) * (1 + cosine))
    reach = (np.cos(half_angle_rad) - cosine * np.cos(axis_rad)) / (sine * np.sin(axis_rad))
    return cosine, step * half * np.sin(arc), np.arccos(np.clip(reach, -1, 1))


def _cap(axis_rad: float, half_angle_rad: float) -> tuple[FloatArray, FloatArray, FloatArray]:
    """The same where the pupil holds whole circles about the normal."""
    cosine, step = _gauss(float(np.cos(half_angle_rad - axis_rad)), 1.0, RINGS)
    return cosine, step, np.full(RINGS, np.pi)


def _over_azimuth(axis_rad: float, cosine: FloatArray, widest: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Integral over azimuth of the pupil's weight, and of that times the s part of light that is s to the axis.

    Notes
    -----
    A lens turns the field as it turns the ray, about the normal of both. So turned, the field that is s to the axis makes with
    the film's s direction an angle of cosine cos phi + sin theta sin^2 phi sin axis / (1 + cos psi).
    """
    x, w = _gauss(0.0, 1.0, SPOKES)
    azimuth, step = widest[:, None] * x, widest[:, None] * w
    sine = np.sqrt((1 - cosine) * (1 + cosine))[:, None]
    cos_psi = cosine[:, None] * np.cos(axis_rad) + sine * np.sin(axis_rad) * np.cos(azimuth)
    along_s = np.cos(azimuth) + sine * np.sin(azimuth) ** 2 * np.sin(axis_rad) / (1 + cos_psi)
    weight = step * cos_psi
    return np.asarray(weight.sum(axis=1)), np.asarray((weight * along_s**2).sum(axis=1))


def _on_nodes(pupil: _Pupil, share_s: float, count: int) -> Directions:
    x, w = np.polynomial.legendre.leggauss(count)
    nodes = 0.5 * (pupil.low + pupil.high) + 0.5 * (pupil.high - pupil.low) * x
    terms = _lagrange(x, w, (2 * pupil.cosine - pupil.low - pupil.high) / (pupil.high - pupil.low))
    s = share_s * pupil.s_of_s + (1 - share_s) * (1 - pupil.s_of_s)
    return Directions(angle_rad=np.arccos(nodes), s=terms @ (pupil.share * s), p=terms @ (pupil.share * (1 - s)))


def _lagrange(x: FloatArray, w: FloatArray, at: FloatArray) -> FloatArray:
    """(N, P) terms of the polynomial through the Gauss nodes ``x`` of weights ``w``.

    References
    ----------
    H. Wang and S. Xiang, Math. Comp. 81, 861 (2012): barycentric weights (-1)^j sqrt((1 - x_j^2) w_j) (from memory).
    """
    strength = np.sqrt((1 - x * x) * w) * (-1.0) ** np.arange(x.size)
    distance = at - x[:, None]
    hit = distance == 0
    terms = strength[:, None] / np.where(hit, 1.0, distance)
    terms = np.where(hit.any(axis=0), hit.astype(float), terms)
    return np.asarray(terms / terms.sum(axis=0))


def _gauss(low: float, high: float, count: int) -> tuple[FloatArray, FloatArray]:
    x, w = np.polynomial.legendre.leggauss(count)
    return low + (high - low) * (x + 1) / 2, (high - low) * w / 2
