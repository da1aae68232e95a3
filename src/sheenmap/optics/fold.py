"""Everything above and below the searched layer, folded into a few amplitudes.

Then each thickness costs one complex exponential: r = r_0 + t t' r_b z / (1 - r_t r_b z) with z = exp(-2 i delta).
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray
from sheenmap.optics.fresnel import Face, admittance, face, joined, normal_index, roughened
from sheenmap.optics.medium import index_of, layer_index
from sheenmap.optics.stack import Stack


@dataclass(frozen=True, kw_only=True, eq=False)
class Folded:
    """A stack at one angle and polarisation, all (W,).

    ``upper`` leads from the medium into the searched layer, ``lower`` from it into the substrate; ``phase_per_nm`` is
    2 pi q / wavelength of the searched layer. Without a searched layer ``lower`` and ``phase_per_nm`` are None and ``upper``
    is the whole stack. ``q_substrate`` and the admittances of both ends are for powers and for the back.
    """

    upper: Face
    lower: Face | None
    phase_per_nm: ComplexArray | None
    q_substrate: ComplexArray
    eta_medium: ComplexArray
    eta_substrate: ComplexArray


def fold(stack: Stack, wavelength_nm: FloatArray, angle_rad: float, polarisation: Literal["s", "p"]) -> Folded:
    """Fold a stack about its searched layer; ``angle_rad`` is in the medium, which must not absorb."""
    medium = index_of(stack.medium, wavelength_nm)
    indices = [medium, *(layer_index(layer, wavelength_nm) for layer in stack.layers), index_of(stack.substrate, wavelength_nm)]
    sine = medium.real * np.sin(angle_rad)
    q = [normal_index(index, sine) for index in indices]
    eta = [admittance(index, q_j, polarisation) for index, q_j in zip(indices, q)]
    rough_nm = [*(layer.rough_nm for layer in stack.layers), stack.substrate_rough_nm]
    faces = [roughened(face(eta[j], eta[j + 1]), q[j], q[j + 1], rough_nm[j], wavelength_nm) for j in range(len(indices) - 1)]
    crossings = [
        None if layer.thickness_nm is None else np.exp(-2j * np.pi * q_j * layer.thickness_nm / wavelength_nm)
        for layer, q_j in zip(stack.layers, q[1:-1])
    ]
    at = stack.searched
    split = len(faces) if at is None else at + 1
    return Folded(
        upper=_joined_all(faces[:split], crossings[: split - 1]),
        lower=None if at is None else _joined_all(faces[split:], crossings[split:]),
        phase_per_nm=None if at is None else 2 * np.pi * q[at + 1] / wavelength_nm,
        q_substrate=q[-1],
        eta_medium=eta[0],
        eta_substrate=eta[-1],
    )


def _joined_all(faces: list[Face], crossings: list[ComplexArray | None]) -> Face:
    whole = faces[0]
    for crossing, next_face in zip(crossings, faces[1:]):
        if crossing is None:
            raise ValueError("a searched layer within a part that is folded")
        whole = joined(whole, crossing, next_face)
    return whole
