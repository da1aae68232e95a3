"""Reflectance and transmittance of a stack as it is seen: any layers, angle, polarisation, cone and back."""

from collections.abc import Iterator
from typing import Literal

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.optics.cone import directions
from sheenmap.optics.film import crossing_share, film_powers, film_reflectance, with_back
from sheenmap.optics.fold import Folded, fold
from sheenmap.optics.fresnel import admittance, face, normal_index
from sheenmap.optics.medium import index_of, layer_index
from sheenmap.optics.stack import Stack, View


def reflectance(stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray, view: View) -> FloatArray:
    """Reflectance of a stack at thicknesses of its searched layer.

    Parameters
    ----------
    thickness_nm : (T,) float
        Zero or more. Without a searched layer every row is the same.
    wavelength_nm : (W,) float
    view : View
        Angle in the medium, aperture of the cone, polarisation.

    Returns
    -------
    (T, W) float
        0 to 1.
    """
    return np.asarray(reflectance_and_slope(stack, thickness_nm, wavelength_nm, view)[0])


def reflectance_and_slope(
    stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray, view: View
) -> tuple[FloatArray, FloatArray]:
    """Reflectance (T, W) as ``reflectance`` gives it, and its derivative per nm of thickness (T, W)."""
    thickness_nm = np.atleast_1d(np.asarray(thickness_nm, dtype=float))
    total, slope = np.zeros((2, thickness_nm.size, wavelength_nm.size))
    for weight, folded, angle_rad, polarisation in _seen(stack, thickness_nm, wavelength_nm, view):
        r, r_slope = _one(stack, folded, thickness_nm, wavelength_nm, angle_rad, polarisation)
        total += weight * r
        slope += weight * r_slope
    return total, slope


def bare_reflectance(stack: Stack, wavelength_nm: FloatArray, view: View) -> FloatArray:
    """Reflectance (W,) of a stack without a searched layer."""
    if stack.searched is not None:
        raise ValueError("the stack has a searched layer")
    return np.asarray(reflectance(stack, np.zeros(1), wavelength_nm, view)[0])


def transmittance(stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray, view: View) -> FloatArray:
    """Share of the light (T, W) that enters the substrate; what is neither reflected nor here was absorbed.

    Raises
    ------
    ValueError
        For a stack with a back, whose light goes on.
    """
    if stack.back is not None:
        raise ValueError("transmittance is into the substrate; the stack has a back")
    thickness_nm = np.atleast_1d(np.asarray(thickness_nm, dtype=float))
    total = np.zeros((thickness_nm.size, wavelength_nm.size))
    for weight, folded, _, _ in _seen(stack, thickness_nm, wavelength_nm, view):
        total += weight * film_powers(folded, thickness_nm).t
    return np.asarray(total)


def _seen(
    stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray, view: View
) -> Iterator[tuple[float, Folded, float, Literal["s", "p"]]]:
    """Weight, folded stack, angle and polarisation of everything that the lens takes in."""
    seen = directions(view, _phase_span(stack, thickness_nm, wavelength_nm) if view.aperture > 0 else 0.0)
    at_normal = seen.angle_rad.size == 1 and seen.angle_rad[0] == 0
    for angle_rad, weight_s, weight_p in zip(seen.angle_rad, seen.s, seen.p):
        if at_normal:
            yield 1.0, fold(stack, wavelength_nm, 0.0, "s"), 0.0, "s"
            continue
        if weight_s:
            yield float(weight_s), fold(stack, wavelength_nm, float(angle_rad), "s"), float(angle_rad), "s"
        if weight_p:
            yield float(weight_p), fold(stack, wavelength_nm, float(angle_rad), "p"), float(angle_rad), "p"


def _phase_span(stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray) -> float:
    largest = float(thickness_nm.max(initial=0.0))
    depth = sum(
        np.max(layer_index(layer, wavelength_nm).real) * (largest if layer.thickness_nm is None else layer.thickness_nm)
        for layer in stack.layers
    )
    return float(4 * np.pi * depth / wavelength_nm.min())


def _one(
    stack: Stack,
    folded: Folded,
    thickness_nm: FloatArray,
    wavelength_nm: FloatArray,
    angle_rad: float,
    polarisation: Literal["s", "p"],
) -> tuple[FloatArray, FloatArray]:
    if stack.back is None and folded.lower is not None:
        return film_reflectance(folded, thickness_nm)
    powers = film_powers(folded, thickness_nm)
    if stack.back is None:
        return powers.r, powers.r_slope
    behind = _far_face(stack, wavelength_nm, angle_rad, polarisation)
    return with_back(powers, behind, crossing_share(folded, stack.back, wavelength_nm))


def _far_face(stack: Stack, wavelength_nm: FloatArray, angle_rad: float, polarisation: Literal["s", "p"]) -> FloatArray:
    """Reflectance (W,) of the far face from inside the substrate."""
    if stack.back is None:
        raise ValueError("the stack has no back")
    sine = index_of(stack.medium, wavelength_nm).real * np.sin(angle_rad)
    ends = [index_of(material, wavelength_nm) for material in (stack.substrate, stack.back.medium)]
    inside, outside = (admittance(index, normal_index(index, sine), polarisation) for index in ends)
    return np.asarray(np.abs(face(inside, outside).r_down) ** 2)
