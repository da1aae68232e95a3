"""Everything above and below the searched layer, folded into a few amplitudes.

Then each thickness costs one complex exponential: r = r_0 + t t' r_b z / (1 - r_t r_b z) with z = exp(-2 i delta).
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray
from sheenmap.optics.fresnel import Face, admittance, face, joined, normal_index, open_face, roughened
from sheenmap.optics.medium import Media, media_of
from sheenmap.optics.stack import Stack

# A layer within this of its critical angle is moved this far off it. The stack's amplitudes are even in q, so they move as
# q^2, while their rounding grows as 1 / q: about 1e-10 of each here.
NEAR_CRITICAL = 3e-11
NO_DIRECTION = 1e-60  # a half space needs no more than a q that can be divided by

CLEAR_K = 1e-3  # of water, alcohols and oils k is below 1e-4; metals and dyes are no medium to look through at an angle


@dataclass(frozen=True, kw_only=True, eq=False)
class Folded:
    """A stack at one angle and polarisation, all (W,); or at several angles, whose axes then come first.

    ``upper`` leads from the medium into the searched layer, ``lower`` from it into the substrate; ``phase_per_nm`` is
    2 pi q / wavelength of the searched layer. Without a searched layer ``upper`` is the whole stack, ``lower`` lets all
    through and ``phase_per_nm`` is 0. ``q_substrate`` and the admittances of both ends are for powers and for the back.
    """

    upper: Face
    lower: Face
    phase_per_nm: ComplexArray
    q_substrate: ComplexArray
    eta_medium: ComplexArray
    eta_substrate: ComplexArray


def fold(stack: Stack, wavelength_nm: FloatArray, angle_rad: float, polarisation: Literal["s", "p"]) -> Folded:
    """Fold a stack about its searched layer.

    Parameters
    ----------
    wavelength_nm : (W,) float
        In vacuum.
    angle_rad : float
        In the medium, 0 up to, not including, pi / 2.

    Raises
    ------
    ValueError
        For a medium that absorbs, seen at an angle.
    """
    return fold_media(stack, media_of(stack, wavelength_nm), angle_rad, polarisation)


def fold_media(stack: Stack, media: Media, angle_rad: float | FloatArray, polarisation: Literal["s", "p"]) -> Folded:
    """As ``fold``, from indices that have been sampled; angles (..., 1) are folded at once."""
    sine = snell_invariant(media, angle_rad)
    ends = (0, len(media.indices) - 1)
    q = [normal_index(n, sine, NO_DIRECTION if j in ends else NEAR_CRITICAL) for j, n in enumerate(media.indices)]
    eta = [admittance(index, q_j, polarisation) for index, q_j in zip(media.indices, q)]
    faces, crossings = _faces(stack, media, q, eta), _crossings(stack, media, q)
    at = stack.searched
    split = len(faces) if at is None else at + 1
    return Folded(
        upper=_joined_all(faces[:split], crossings[: split - 1]),
        lower=open_face(q[0]) if at is None else _joined_all(faces[split:], crossings[split:]),
        phase_per_nm=np.zeros_like(q[0]) if at is None else 2 * np.pi * q[at + 1] / media.wavelength_nm,
        q_substrate=q[-1],
        eta_medium=eta[0],
        eta_substrate=eta[-1],
    )


def snell_invariant(media: Media, angle_rad: float | FloatArray) -> FloatArray:
    """N_0 sin(theta_0) (..., W), the same in every layer."""
    medium = media.indices[0]
    darkest = float(np.max(-medium.imag, initial=0.0))
    if np.any(angle_rad) and darkest > CLEAR_K:
        raise ValueError(f"the medium absorbs (k = {darkest:g}); at an angle k may be up to {CLEAR_K:g}")
    return np.asarray(medium.real * np.sin(angle_rad))


def _faces(stack: Stack, media: Media, q: list[ComplexArray], eta: list[ComplexArray]) -> list[Face]:
    rough_nm = [*(layer.rough_nm for layer in stack.layers), stack.substrate_rough_nm]
    return [roughened(face(eta[j], eta[j + 1]), q[j], q[j + 1], rough, media.wavelength_nm) for j, rough in enumerate(rough_nm)]


def _crossings(stack: Stack, media: Media, q: list[ComplexArray]) -> list[ComplexArray | None]:
    return [
        None if layer.thickness_nm is None else np.exp(-2j * np.pi * q_j * layer.thickness_nm / media.wavelength_nm)
        for layer, q_j in zip(stack.layers, q[1:-1])
    ]


def _joined_all(faces: list[Face], crossings: list[ComplexArray | None]) -> Face:
    whole = faces[0]
    for crossing, next_face in zip(crossings, faces[1:]):
        if crossing is None:
            raise ValueError("a searched layer within a part that is folded")
        whole = joined(whole, crossing, next_face)
    return whole
