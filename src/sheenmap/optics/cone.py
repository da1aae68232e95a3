"""The cone of light that a lens takes in, as a few angles with weights for s and p.

An evenly filled pupil weighs a direction by the cosine of its angle psi to the axis (u du = -cos psi d cos psi with
u = sin psi). About the film's normal a direction has the polar angle theta and the azimuth phi, and
cos psi = cos theta cos axis + sin theta sin axis cos phi. Everything depends on cos theta alone once phi is summed, so that
reflectance is computed at Gauss nodes of cos theta, as few as its smoothness asks for, and the pupil's weights are put on them.
At a critical angle reflectance bends like a square root: such angles part the nodes into stretches, each eased at its ends.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import pairwise

import numpy as np

from sheenmap.arrays import FloatArray, read_only
from sheenmap.optics.stack import View

CONVERGED = 1e-10  # in reflectance; the nodes' own rounding is 1e-14
COUNTS = (3, 4, 6, 9, 13, 19, 28, 42, 63, 95, 143, 215)  # the last ones are for critical angles that move with wavelength
NARROWEST = 1e-7  # a narrower cone changes reflectance by about its square
NEAR_RAD = 0.05  # a critical angle this far outside the cone still bends what is inside
RINGS, SPOKES = 256, 32  # of the pupil's own sums, which cost no reflectance


@dataclass(frozen=True, kw_only=True, eq=False)
class Directions:
    """Angles (N,) in radians and the weights (N,) of their s and p reflectance; all weights add up to 1."""

    angle_rad: FloatArray
    s: FloatArray
    p: FloatArray


def directions(
    view: View, medium_index: float, critical_rad: Sequence[float], average: Callable[[Directions], FloatArray]
) -> Directions:
    """Angles to be averaged over, as many as it takes.

    Parameters
    ----------
    medium_index : float
        The sine of the cone's half angle is the aperture over it.
    critical_rad : sequence of float
        Critical angles of what lies below the medium.
    average : callable
        Reflectance over some directions, at thicknesses and wavelengths that stand for all: taken on ever more nodes until
        it stays within 1e-10.
    """
    share_s = {"none": 0.5, "s": 1.0, "p": 0.0}[view.polarisation]
    if view.aperture < NARROWEST:
        return Directions(angle_rad=np.deg2rad([view.angle_deg]), s=np.array([share_s]), p=np.array([1 - share_s]))
    pupil = _pupil(np.deg2rad(view.angle_deg), np.arcsin(min(1.0, view.aperture / medium_index)), critical_rad)
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
    """Angles (P,) to the film's normal, their share of the pupil, and how much of s light (to the axis) is s to the film.

    ``bounds`` are the angles where the stretches begin and end, rising; ``bent`` says that a critical angle is one or is near.
    """

    angle_rad: FloatArray
    share: FloatArray
    s_of_s: FloatArray
    bounds: FloatArray
    bent: bool


def _pupil(axis_rad: float, half_angle_rad: float, critical_rad: Sequence[float]) -> _Pupil:
    """Sum the pupil over azimuth. Directions from below the film's plane are left out, and the rest fills the pupil.

    The widest azimuth that the pupil reaches leaves the ends of its range as a square root, so that each piece is eased too.
    """
    low, high = max(0.0, axis_rad - half_angle_rad), min(np.pi / 2, axis_rad + half_angle_rad)
    bounds = np.unique([low, *(angle for angle in critical_rad if low < angle < high), high])
    pieces = np.unique([*bounds, max(low, half_angle_rad - axis_rad)])
    angle_rad, step = (np.concatenate(part) for part in zip(*(_eased(*ends, RINGS) for ends in pairwise(pieces))))
    circles, s_of_s = _over_azimuth(axis_rad, angle_rad, _widest_azimuth(axis_rad, half_angle_rad, angle_rad))
    share = step * np.sin(angle_rad) * circles
    s_of_s = np.divide(s_of_s, circles, out=np.full_like(circles, 0.5), where=circles > 0)
    bent = any(low - NEAR_RAD < angle < high + NEAR_RAD for angle in critical_rad)
    return _Pupil(angle_rad=angle_rad, share=share / share.sum(), s_of_s=s_of_s, bounds=bounds, bent=bent)


def _widest_azimuth(axis_rad: float, half_angle_rad: float, angle_rad: FloatArray) -> FloatArray:
    """How far, to either side of the axis, the pupil reaches along the circle of an angle.

    Notes
    -----
    sin^2(phi / 2) = sin((b + a - t) / 2) sin((b - a + t) / 2) / (sin a sin t), the half-angle formula of the spherical triangle
    of normal, axis and the pupil's rim, keeps its digits for narrow cones.
    """
    rim = np.sin((half_angle_rad + axis_rad - angle_rad) / 2) * np.sin((half_angle_rad - axis_rad + angle_rad) / 2)
    sines = np.sin(axis_rad) * np.sin(angle_rad)
    ratio = np.divide(np.clip(rim, 0.0, sines), sines, out=np.ones_like(sines), where=sines > 0)
    return np.asarray(2 * np.arcsin(np.sqrt(ratio)))


def _over_azimuth(axis_rad: float, angle_rad: FloatArray, widest: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Integral over azimuth of the pupil's weight, and of that times the s part of light that is s to the axis.

    Notes
    -----
    A lens turns the field as it turns the ray, about the normal of both. So turned, the field that is s to the axis makes with
    the film's s direction an angle of cosine cos phi + sin theta sin^2 phi sin axis / (1 + cos psi).
    """
    x, w = _gauss(0.0, 1.0, SPOKES)
    azimuth, step = widest[:, None] * x, widest[:, None] * w
    sine, cosine = np.sin(angle_rad)[:, None], np.cos(angle_rad)[:, None]
    cos_psi = cosine * np.cos(axis_rad) + sine * np.sin(axis_rad) * np.cos(azimuth)
    along_s = np.cos(azimuth) + sine * np.sin(azimuth) ** 2 * np.sin(axis_rad) / (1 + cos_psi)
    weight = step * cos_psi
    return np.asarray(weight.sum(axis=1)), np.asarray((weight * along_s**2).sum(axis=1))


def _on_nodes(pupil: _Pupil, share_s: float, count: int) -> Directions:
    """The pupil's weights on ``count`` nodes in each stretch between critical angles."""
    x, w = _legendre(count)
    s = share_s * pupil.s_of_s + (1 - share_s) * (1 - pupil.s_of_s)
    parts = []
    for low, high in pairwise(pupil.bounds):
        inside = (pupil.angle_rad > low) & (pupil.angle_rad < high)
        at = 1 - 2 * _cosine_fall(low, pupil.angle_rad[inside]) / _cosine_fall(low, high)
        terms = _lagrange(x, w, 2 * np.arcsin(np.clip(at, -1, 1)) / np.pi if pupil.bent else at)
        cosine = np.cos(low) - _cosine_fall(low, high) * (1 - (np.sin(np.pi * x / 2) if pupil.bent else x)) / 2
        share, share_of_s = pupil.share[inside], s[inside]
        parts.append((np.arccos(cosine), terms @ (share * share_of_s), terms @ (share * (1 - share_of_s))))
    angle_rad, weight_s, weight_p = (np.concatenate(part) for part in zip(*parts))
    return Directions(angle_rad=angle_rad, s=weight_s, p=weight_p)


def _cosine_fall(low: float, angle_rad: float | FloatArray) -> FloatArray:
    """Cos(low) - cos(angle), with all its digits."""
    return np.asarray(2 * np.sin((angle_rad + low) / 2) * np.sin((angle_rad - low) / 2))


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


@cache
def _legendre(count: int) -> tuple[FloatArray, FloatArray]:
    """Gauss-Legendre nodes and weights on -1 to 1; an eigenvalue problem, worth keeping."""
    x, w = np.polynomial.legendre.leggauss(count)
    return read_only(x), read_only(w)


def _eased(low: float, high: float, count: int) -> tuple[FloatArray, FloatArray]:
    """Nodes and weights that take square roots at both ends without loss."""
    x, w = _legendre(count)
    slope = np.pi / 4 * (high - low) * np.cos(np.pi * x / 2)
    return low + (high - low) * (1 + np.sin(np.pi * x / 2)) / 2, w * slope


def _gauss(low: float, high: float, count: int) -> tuple[FloatArray, FloatArray]:
    x, w = _legendre(count)
    return low + (high - low) * (x + 1) / 2, (high - low) * w / 2
