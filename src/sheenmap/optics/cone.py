"""The cone of light that a lens takes in, as a few angles with weights for s and p.

Over an evenly filled pupil each direction counts alike. A direction's plane of incidence is turned by an azimuth against
that of the axis, so that light polarised s or p to the axis is part s and part p to the film: cos^2 and sin^2 of it.
Reflectance is smooth over the angle, so that it is taken at Gauss nodes and interpolated between them.
"""

from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.optics.stack import View

RINGS, SPOKES = 40, 64
FEWEST, MOST = 8, 64


@dataclass(frozen=True, kw_only=True, eq=False)
class Directions:
    """Angles (N,) in radians and the weights (N,) of their s and p reflectance; all weights add up to 1."""

    angle_rad: FloatArray
    s: FloatArray
    p: FloatArray


def directions(view: View, phase_span: float) -> Directions:
    """The angles to be averaged over; ``phase_span`` is 2 pi n d / wavelength of the thickest film, in radians."""
    axis_rad = np.deg2rad(view.angle_deg)
    share_s = {"none": 0.5, "s": 1.0, "p": 0.0}[view.polarisation]
    if view.aperture == 0:
        return Directions(angle_rad=np.array([axis_rad]), s=np.array([share_s]), p=np.array([1 - share_s]))
    cosine, mixed, weight = _pupil(axis_rad, view.aperture)
    low, high = float(cosine.min()), float(cosine.max())
    count = int(np.clip(FEWEST + np.ceil(1.2 * phase_span * (high - low)), FEWEST, MOST))
    x, _ = np.polynomial.legendre.leggauss(count)
    nodes = 0.5 * (low + high) + 0.5 * (high - low) * x
    terms = _lagrange(nodes, cosine)
    part_s = share_s * (1 - mixed) + (1 - share_s) * mixed
    return Directions(angle_rad=np.arccos(np.clip(nodes, -1, 1)), s=terms @ (weight * part_s), p=terms @ (weight * (1 - part_s)))


def _pupil(axis_rad: float, aperture: float) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Cosine to the film's normal, sin^2 of the azimuth, and weight of directions that fill the pupil; none from below."""
    x, w = np.polynomial.legendre.leggauss(RINGS)
    radius = aperture * np.sqrt(0.5 * (x + 1))
    turn = (np.arange(SPOKES) + 0.5) * 2 * np.pi / SPOKES
    across, along = np.outer(radius, np.sin(turn)), np.outer(radius, np.cos(turn))
    forward = np.sqrt(1 - across**2 - along**2)
    cosine = forward * np.cos(axis_rad) - along * np.sin(axis_rad)
    in_plane = forward * np.sin(axis_rad) + along * np.cos(axis_rad)
    mixed = across**2 / np.maximum(across**2 + in_plane**2, 1e-300)
    weight = np.broadcast_to(w[:, None], cosine.shape)
    seen = cosine > 0
    return cosine[seen], mixed[seen], weight[seen] / weight[seen].sum()


def _lagrange(nodes: FloatArray, at: FloatArray) -> FloatArray:
    """(N, P) terms of the polynomial through Gauss nodes, barycentric (Berrut and Trefethen, SIAM Rev. 46, 501, 2004)."""
    scale = 4.0 / (nodes[-1] - nodes[0])
    gaps = (nodes[:, None] - nodes) * scale
    np.fill_diagonal(gaps, 1.0)
    strength = 1.0 / np.prod(gaps, axis=1)
    distance = (at - nodes[:, None]) * scale
    hit = np.abs(distance) < 1e-14
    terms = strength[:, None] / np.where(hit, 1.0, distance)
    terms = np.where(hit.any(axis=0), hit.astype(float), terms)
    return np.asarray(terms / terms.sum(axis=0))
