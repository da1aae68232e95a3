"""Probability of conforming to limits, guard bands, and the probability that all of several values conform.

A limit that is absent is -inf or +inf, so one-sided limits need no case of their own.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtr, ndtri

from sheenmap.arrays import FloatArray

Proof = Literal["conformity", "nonconformity", "neither"]
GRID_REACH, GRID_POINTS = 8.0, 3201  # of the shared error, in its standard deviations
NEGLIGIBLE = 0.005  # of the shared uncertainty: one step of that grid


@dataclass(frozen=True, kw_only=True)
class Limits:
    """Lower and upper limit; infinite where there is none."""

    low: float = -np.inf
    high: float = np.inf


def limits_text(limits: Limits) -> str:
    """Limits as a reader says them."""
    if np.isinf(limits.low):
        return f"at most {limits.high:g} nm"
    return f"at least {limits.low:g} nm" if np.isinf(limits.high) else f"{limits.low:g} to {limits.high:g} nm"


def finite(limit: float) -> float | None:
    """A limit, or None where there is none."""
    return None if np.isinf(limit) else limit


def guard_factor(risk: float) -> float:
    """Guard band in standard uncertainties for a consumer's risk at the edge of the acceptance zone: 0.05 is 1.645."""
    return float(-ndtri(risk))


def conformance(value: ArrayLike, u: ArrayLike, limits: Limits) -> FloatArray:
    """Probability that the true value lies within the limits.

    Parameters
    ----------
    value, u : (...) float
        Measured values and their standard uncertainty, normal; they broadcast. u may be 0.
    limits : Limits
        Either may be infinite.

    Returns
    -------
    (...) float
        0 to 1; NaN where the value is.

    References
    ----------
    JCGM 106:2012, 7.4, two-sided interval with a normal distribution: Phi((T_U - y)/u) - Phi((T_L - y)/u) (from memory).
    """
    y, spread = np.broadcast_arrays(np.asarray(value, float), np.maximum(np.asarray(u, float), 1e-300))
    with np.errstate(over="ignore"):
        above, below = (limits.high - y) / spread, (limits.low - y) / spread
    # far above the upper limit both terms are near 0 and below the lower both near 1: take the tail that keeps digits
    return np.asarray(np.where(below > 0, ndtr(-below) - ndtr(-above), ndtr(above) - ndtr(below)))


def acceptance_zone(u: float, limits: Limits, guard_in_u: float) -> Limits:
    """The limits drawn in by ``guard_in_u`` times u; low above high when no value can be accepted."""
    return Limits(low=limits.low + guard_in_u * u, high=limits.high - guard_in_u * u)


def is_accepted(value: float, zone: Limits) -> bool:
    """Whether a value lies in a zone; on its edge counts as inside (JCGM 106:2012, 8.3, from memory)."""
    return bool(zone.low <= value <= zone.high)


def proof(value: float, u: float, limits: Limits, guard_in_u: float) -> Proof:
    """What is proven when uncertainty counts against whoever has to prove.

    References
    ----------
    ISO 14253-1: conformity within the limits drawn in, nonconformity outside the limits drawn out (from memory).
    """
    if is_accepted(value, acceptance_zone(u, limits, guard_in_u)):
        return "conformity"
    outer = acceptance_zone(u, limits, -guard_in_u)
    return "neither" if outer.low < value < outer.high else "nonconformity"


def all_conform(values: ArrayLike, u_local: ArrayLike, u_common: float, limits: Limits) -> float:
    """Probability that all values conform at once.

    Parameters
    ----------
    values, u_local : (N,) float
        Measured values, and the part of their standard uncertainty that they do not share.
    u_common : float
        The part that they share: one error moves all of them.
    limits : Limits
        Either may be infinite.

    Returns
    -------
    float
        The integral over the shared error c of the product of p_i(c). A product of each value's own probability would take
        the shared error for N independent ones.
    """
    y = np.asarray(values, float)
    local = np.broadcast_to(np.asarray(u_local, float), y.shape)
    if y.size == 0:
        return float("nan")
    if u_common <= 0:
        return float(np.prod(conformance(y, local, limits)))
    if local.max() < NEGLIGIBLE * u_common:  # one interval of the shared error keeps all of them inside
        within = Limits(low=float(np.max(limits.low - y)), high=float(np.min(limits.high - y)))
        return float(conformance(0.0, u_common, within)) if within.low < within.high else 0.0
    error = np.linspace(-GRID_REACH, GRID_REACH, GRID_POINTS)
    density = np.exp(-(error**2) / 2)
    soft = np.maximum(local, NEGLIGIBLE * u_common)  # a step sharper than the grid would be cut at random
    given = conformance(y[:, None] + u_common * error, soft[:, None], limits)
    return float(np.sum(density * np.prod(given, axis=0)) / np.sum(density))
