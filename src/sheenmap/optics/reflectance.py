"""Reflectance and transmittance of a stack as it is seen: any layers, angle, polarisation, cone and back."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from sheenmap.arrays import ComplexArray, FloatArray
from sheenmap.optics.back import FarSide, far_side, through_back, with_back
from sheenmap.optics.cone import Directions, directions
from sheenmap.optics.film import both_sides, entered, reflected, reflected_and_slope, round_trips
from sheenmap.optics.fold import Folded, fold_media, snell_invariant
from sheenmap.optics.medium import Media, media_of
from sheenmap.optics.stack import Stack, View

PROBE_THICKNESSES, PROBE_WAVELENGTHS = 6, 12
BENT_K = 0.1  # what absorbs more has no sharp critical angle


def reflectance(stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray, view: View) -> FloatArray:
    """Reflectance of a stack at thicknesses of its searched layer.

    Parameters
    ----------
    thickness_nm : (T,) float
        Zero or more. Without a searched layer every row is the same.
    wavelength_nm : (W,) float
        In vacuum.
    view : View
        Angle in the medium, aperture of the cone, polarisation.

    Returns
    -------
    (T, W) float
        0 to 1.

    Raises
    ------
    ValueError
        For a negative thickness, a wavelength that is not positive, or a medium that absorbs, seen at an angle.
    """
    thickness_nm, wavelength_nm = _checked(thickness_nm, wavelength_nm)
    media = media_of(stack, wavelength_nm)
    return _averaged(stack, media, thickness_nm, _directions(stack, media, thickness_nm, view))


def reflectance_and_slope(
    stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray, view: View
) -> tuple[FloatArray, FloatArray]:
    """Reflectance (T, W) as ``reflectance`` gives it, and its derivative per nm of thickness (T, W)."""
    thickness_nm, wavelength_nm = _checked(thickness_nm, wavelength_nm)
    media = media_of(stack, wavelength_nm)
    total, slope = np.zeros((2, thickness_nm.size, wavelength_nm.size))
    for beam in _beams(stack, media, _directions(stack, media, thickness_nm, view)):
        for rows, round_trip in round_trips(thickness_nm, beam.folded.phase_per_nm):
            r, r_slope = _reflected_and_slope(beam, round_trip)
            total[rows] += beam.weight * r
            slope[rows] += beam.weight * r_slope
    return total, slope


def bare_reflectance(stack: Stack, wavelength_nm: FloatArray, view: View) -> FloatArray:
    """Reflectance (W,) of a stack without a searched layer.

    Raises
    ------
    ValueError
        For a stack with a searched layer, and as ``reflectance`` does.
    """
    if stack.searched is not None:
        raise ValueError("the stack has a searched layer")
    return np.asarray(reflectance(stack, np.zeros(1), wavelength_nm, view)[0])


def transmittance(stack: Stack, thickness_nm: FloatArray, wavelength_nm: FloatArray, view: View) -> FloatArray:
    """Share of the light (T, W) that enters the substrate or, where the stack has a back, that leaves through it.

    What is neither reflected nor transmitted was absorbed, or scattered by rough faces. Arguments and errors are those of
    ``reflectance``.
    """
    thickness_nm, wavelength_nm = _checked(thickness_nm, wavelength_nm)
    media = media_of(stack, wavelength_nm)
    total = np.zeros((thickness_nm.size, wavelength_nm.size))
    for beam in _beams(stack, media, _directions(stack, media, thickness_nm, view)):
        for rows, round_trip in round_trips(thickness_nm, beam.folded.phase_per_nm):
            film = both_sides(beam.folded, round_trip)
            through = entered(beam.folded, film) if beam.far is None else through_back(beam.folded, film, beam.far)
            total[rows] += beam.weight * through
    return total


@dataclass(frozen=True, kw_only=True, eq=False)
class _Beam:
    """One direction and polarisation: its weight, the stack as it meets it, and what lies behind."""

    weight: float
    folded: Folded
    far: FarSide | None


def _directions(stack: Stack, media: Media, thickness_nm: FloatArray, view: View) -> Directions:
    probe_nm = np.linspace(thickness_nm.min(initial=0.0), thickness_nm.max(initial=0.0), PROBE_THICKNESSES)
    some = np.unique(np.linspace(0, media.wavelength_nm.size - 1, PROBE_WAVELENGTHS).astype(int))
    probed = Media(
        wavelength_nm=media.wavelength_nm[some],
        indices=tuple(index[some] for index in media.indices),
        behind=None if media.behind is None else media.behind[some],
    )
    medium_index, *below = (complex(np.median(index.real), np.median(index.imag)) for index in media.indices)
    critical_rad = [
        float(np.arcsin(index.real / medium_index.real))
        for index in below
        if index.real < medium_index.real and -index.imag < BENT_K
    ]
    return directions(view, medium_index.real, critical_rad, lambda tried: _at_once(stack, probed, probe_nm, tried))


def _at_once(stack: Stack, media: Media, thickness_nm: FloatArray, seen: Directions) -> FloatArray:
    """What ``_averaged`` gives, (T, W), with all directions in memory: quick for few thicknesses."""
    total = np.zeros((thickness_nm.size, media.wavelength_nm.size))
    polarised: tuple[tuple[Literal["s", "p"], FloatArray], ...] = (("s", seen.s), ("p", seen.p))
    for polarisation, weights in polarised:
        beam = _beam(stack, media, 1.0, seen.angle_rad[:, None, None], polarisation)
        round_trip = np.exp(thickness_nm[:, None] * (-2j * beam.folded.phase_per_nm))
        total += np.einsum("n,ntw->tw", weights, _reflected(beam, round_trip))
    return total


def _averaged(stack: Stack, media: Media, thickness_nm: FloatArray, seen: Directions) -> FloatArray:
    total = np.zeros((thickness_nm.size, media.wavelength_nm.size))
    for beam in _beams(stack, media, seen):
        for rows, round_trip in round_trips(thickness_nm, beam.folded.phase_per_nm):
            total[rows] += beam.weight * _reflected(beam, round_trip)
    return total


def _beams(stack: Stack, media: Media, seen: Directions) -> Iterator[_Beam]:
    """Everything that the lens takes in; at normal incidence s and p are one."""
    for angle_rad, weight_s, weight_p in zip(seen.angle_rad.tolist(), seen.s.tolist(), seen.p.tolist()):
        if angle_rad == 0:
            yield _beam(stack, media, weight_s + weight_p, 0.0, "s")
            continue
        if weight_s:
            yield _beam(stack, media, weight_s, angle_rad, "s")
        if weight_p:
            yield _beam(stack, media, weight_p, angle_rad, "p")


def _beam(stack: Stack, media: Media, weight: float, angle_rad: float | FloatArray, polarisation: Literal["s", "p"]) -> _Beam:
    folded = fold_media(stack, media, angle_rad, polarisation)
    if stack.back is None or media.behind is None:
        return _Beam(weight=weight, folded=folded, far=None)
    sine, depth_nm = snell_invariant(media, angle_rad), stack.back.thickness_mm * 1e6
    far = far_side(folded, media.behind, sine, polarisation, depth_nm=depth_nm, wavelength_nm=media.wavelength_nm)
    return _Beam(weight=weight, folded=folded, far=far)


def _reflected(beam: _Beam, round_trip: ComplexArray) -> FloatArray:
    if beam.far is None:
        return reflected(beam.folded, round_trip)
    return with_back(beam.folded, both_sides(beam.folded, round_trip), beam.far)[0]


def _reflected_and_slope(beam: _Beam, round_trip: ComplexArray) -> tuple[FloatArray, FloatArray]:
    if beam.far is None:
        return reflected_and_slope(beam.folded, round_trip)
    return with_back(beam.folded, both_sides(beam.folded, round_trip), beam.far)


def _checked(thickness_nm: ArrayLike, wavelength_nm: ArrayLike) -> tuple[FloatArray, FloatArray]:
    thickness, wavelength = (np.atleast_1d(np.asarray(values, dtype=float)) for values in (thickness_nm, wavelength_nm))
    if thickness.ndim != 1 or not np.all(np.isfinite(thickness) & (thickness >= 0)):
        raise ValueError(f"thickness_nm must be (T,), finite and zero or more; shape {thickness.shape}")
    if wavelength.ndim != 1 or not np.all(np.isfinite(wavelength) & (wavelength > 0)):
        raise ValueError(f"wavelength_nm must be (W,), finite and positive; shape {wavelength.shape}")
    return thickness, wavelength
