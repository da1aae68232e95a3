"""Powers of a folded stack against the thickness of its searched layer, with their slopes."""

from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray
from sheenmap.optics.fold import Folded
from sheenmap.optics.stack import Back


@dataclass(frozen=True, kw_only=True, eq=False)
class Powers:
    """Reflectance from above and below and transmittance both ways (T, W), each with its slope per nm."""

    r: FloatArray
    r_slope: FloatArray
    t: FloatArray
    t_slope: FloatArray
    r_up: FloatArray
    r_up_slope: FloatArray
    t_up: FloatArray
    t_up_slope: FloatArray


def film_reflectance(folded: Folded, thickness_nm: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Reflectance (T, W) and its slope per nm, coherent, of a stack with a searched layer."""
    if folded.lower is None:
        raise ValueError("the stack has no searched layer")
    z, z_slope, echo = _round_trip(folded, thickness_nm)
    gain = folded.upper.t_down * folded.upper.t_up * folded.lower.r_down
    r = folded.upper.r_down + gain * z / echo
    return _power(r, gain * z_slope / echo**2)


def film_powers(folded: Folded, thickness_nm: FloatArray) -> Powers:
    """All powers of a coherent stack, for what lies behind it."""
    upper, ratio = folded.upper, (folded.eta_substrate.real / folded.eta_medium.real)
    if folded.lower is None or folded.phase_per_nm is None:
        shape = (thickness_nm.size, folded.q_substrate.size)
        flat = [np.broadcast_to(np.abs(a) ** 2, shape) for a in (upper.r_down, upper.t_down, upper.r_up, upper.t_up)]
        zero = np.zeros(shape)
        return Powers(
            r=flat[0], t=flat[1] * ratio, r_up=flat[2], t_up=flat[3] / ratio,
            r_slope=zero, t_slope=zero, r_up_slope=zero, t_up_slope=zero,
        )  # fmt: skip
    z, z_slope, echo = _round_trip(folded, thickness_nm)
    lower = folded.lower
    gain = upper.t_down * upper.t_up * lower.r_down
    gain_up = lower.t_down * lower.t_up * upper.r_up
    r, r_slope = _power(upper.r_down + gain * z / echo, gain * z_slope / echo**2)
    r_up, r_up_slope = _power(lower.r_up + gain_up * z / echo, gain_up * z_slope / echo**2)
    once = np.exp(-1j * thickness_nm[:, None] * folded.phase_per_nm)
    passed = once / echo
    passed_slope = -1j * folded.phase_per_nm * passed + once * upper.r_up * lower.r_down * z_slope / echo**2
    t, t_slope = _power(upper.t_down * lower.t_down * passed, upper.t_down * lower.t_down * passed_slope)
    t_up, t_up_slope = _power(upper.t_up * lower.t_up * passed, upper.t_up * lower.t_up * passed_slope)
    return Powers(
        r=r, r_slope=r_slope, t=t * ratio, t_slope=t_slope * ratio,
        r_up=r_up, r_up_slope=r_up_slope, t_up=t_up / ratio, t_up_slope=t_up_slope / ratio,
    )  # fmt: skip


def with_back(powers: Powers, behind: FloatArray, once: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Reflectance (T, W) and slope with an incoherent far face.

    Parameters
    ----------
    behind : (W,) float
        Reflectance of the far face from inside the substrate.
    once : (W,) float
        Share of the light that one crossing of the substrate leaves.

    Notes
    -----
    R = R_f + T_f T_f' tau^2 R_b / (1 - R_f' R_b tau^2), primes from inside; powers are added, per polarisation.
    """
    returned = once**2 * behind
    echo = 1 - powers.r_up * returned
    both = powers.t * powers.t_up
    both_slope = powers.t_slope * powers.t_up + powers.t * powers.t_up_slope
    added = both * returned / echo
    slope = both_slope * returned / echo + added * powers.r_up_slope * returned / echo
    return powers.r + added, powers.r_slope + slope


def crossing_share(folded: Folded, back: Back, wavelength_nm: FloatArray) -> FloatArray:
    """Share of the light (W,) that one slanted crossing of the substrate leaves."""
    depth_nm = back.thickness_mm * 1e6
    return np.asarray(np.exp(-4 * np.pi * np.abs(folded.q_substrate.imag) * depth_nm / wavelength_nm))


def _round_trip(folded: Folded, thickness_nm: FloatArray) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
    if folded.lower is None or folded.phase_per_nm is None:
        raise ValueError("the stack has no searched layer")
    z = np.exp(-2j * thickness_nm[:, None] * folded.phase_per_nm)
    return z, -2j * folded.phase_per_nm * z, 1 - folded.upper.r_up * folded.lower.r_down * z


def _power(amplitude: ComplexArray, slope: ComplexArray) -> tuple[FloatArray, FloatArray]:
    return amplitude.real**2 + amplitude.imag**2, 2 * (amplitude.real * slope.real + amplitude.imag * slope.imag)
