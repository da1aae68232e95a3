"""The far face of a clear substrate, whose light is added as power: it is too far away to interfere."""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray
from sheenmap.optics.film import BothSides, entered
from sheenmap.optics.fold import Folded
from sheenmap.optics.fresnel import Face, admittance, face, normal_index

NO_DIRECTION = 1e-60


@dataclass(frozen=True, kw_only=True, eq=False)
class FarSide:
    """What lies behind the film, all (W,): share left by one crossing of the substrate, reflectance and transmittance there."""

    crossing: FloatArray
    r: FloatArray
    t: FloatArray


def far_side(
    folded: Folded, behind: ComplexArray, sine: FloatArray, polarisation: Literal["s", "p"], *,
    depth_nm: float, wavelength_nm: FloatArray,
) -> FarSide:  # fmt: skip
    """The far side of a bare substrate, ``depth_nm`` thick, with the index ``behind`` (W,) beyond it.

    Notes
    -----
    One slanted crossing leaves exp(-4 pi |Im q| h / L).
    """
    eta = admittance(behind, normal_index(behind, sine, NO_DIRECTION), polarisation)
    return coated_far_side(folded, face(folded.eta_substrate, eta), eta, depth_nm=depth_nm, wavelength_nm=wavelength_nm)


def coated_far_side(
    folded: Folded, far: Face, eta_behind: ComplexArray, *, depth_nm: float, wavelength_nm: FloatArray
) -> FarSide:
    """The far side of a substrate with amplitudes ``far`` there, into a medium of admittance ``eta_behind`` (W,)."""
    inside = np.where(folded.eta_substrate.real > 0, folded.eta_substrate.real, 1.0)
    return FarSide(
        crossing=np.exp(-4 * np.pi * np.abs(folded.q_substrate.imag) * depth_nm / wavelength_nm),
        r=np.abs(far.r_down) ** 2,
        t=np.abs(far.t_down) ** 2 * eta_behind.real / inside,
    )


def with_back(folded: Folded, film: BothSides, far: FarSide) -> tuple[FloatArray, FloatArray]:
    """Reflectance (T, W), and its slope per nm, of a film with what comes back from the far side.

    Notes
    -----
    R = R_f + T_f T_f' tau^2 R_b / (1 - R_f' R_b tau^2), primes from inside; powers are added, per polarisation.
    """
    upper, lower = folded.upper, folded.lower
    echo, returned = _echo(film, far)
    there_and_back = np.abs(upper.t_down * lower.t_down * upper.t_up * lower.t_up) ** 2 * returned
    added = there_and_back * film.passed**2 / echo
    slope = (2 * there_and_back * film.passed * film.passed_slope + added * film.r_up_slope * returned) / echo
    return film.r + added, film.r_slope + slope


def through_back(folded: Folded, film: BothSides, far: FarSide) -> FloatArray:
    """Share (T, W) of the light that leaves through the far side: T_f tau T_b / (1 - R_f' R_b tau^2)."""
    echo, _ = _echo(film, far)
    return np.asarray(entered(folded, film) * far.crossing * far.t / echo)


def _echo(film: BothSides, far: FarSide) -> tuple[FloatArray, FloatArray]:
    """1 - R_f' R_b tau^2 (T, W), and R_b tau^2 (W,).

    Light that both faces reflect totally never gets in; the sum of its echoes is held above rounding, so that nothing times it
    is nothing.
    """
    returned = far.crossing**2 * far.r
    return np.maximum(1 - film.r_up * returned, np.finfo(float).eps), returned
