"""Nonuniformity by its formula's name, with its uncertainty.

Formulas that look at extremes grow with the number of values that noise moves, so they are for sites (means over a spot)
and never for the pixels of a map: noise alone spreads 10^6 values over 9.8 standard deviations.
"""

import re
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from sheenmap.arrays import FloatArray
from sheenmap.errors import UnknownNameError

Reduction = Callable[[FloatArray, float], FloatArray]
DRAWS = 4000  # of the simulation: the uncertainty is good to 1.2 %
OPEN_LIST = "mems-exchange.org mems-talk message {} (2009, open mailing list)"
SEMI = OPEN_LIST.format("22023") + ", naming SEMI MF1618 for the standard-deviation form"
COMMON, BASIC = "common practice", "statistics"


@dataclass(frozen=True, kw_only=True)
class Formula:
    """One way to say how uneven values are.

    ``reduce`` takes (..., N) values and a target and gives (...) numbers in ``unit``. ``of_extremes``: it looks at the least or
    largest value, and is for sites only. ``wants_target``: it needs a target. ``larger_is_better``: uniformity, not
    nonuniformity, so no upper limit goes with it. ``at_least`` is the fewest values that define it.
    """

    name: str
    expression: str
    source: str
    reduce: Reduction
    unit: str = "%"
    of_extremes: bool = False
    wants_target: bool = False
    larger_is_better: bool = False
    at_least: int = 2


@dataclass(frozen=True, kw_only=True)
class Estimate:
    """A number with its standard uncertainty, and the part of it that noise alone adds (``bias``, not taken off ``value``)."""

    value: float
    u: float
    bias: float = 0.0


def _mean(t: FloatArray) -> FloatArray:
    return np.asarray(t.mean(axis=-1))


def _sd(t: FloatArray, ddof: int) -> FloatArray:
    return np.asarray(t.std(axis=-1, ddof=ddof))


def _median(t: FloatArray) -> FloatArray:
    return np.asarray(np.median(t, axis=-1))


def _low(t: FloatArray) -> FloatArray:
    return np.asarray(t.min(axis=-1))


def _high(t: FloatArray) -> FloatArray:
    return np.asarray(t.max(axis=-1))


def _range(t: FloatArray) -> FloatArray:
    return np.asarray(np.ptp(t, axis=-1))


def _farthest(t: FloatArray, centre: FloatArray | float) -> FloatArray:
    return np.asarray(np.abs(t - np.asarray(centre)[..., None]).max(axis=-1))


def _absolute(t: FloatArray) -> FloatArray:
    return np.asarray(np.abs(t - _mean(t)[..., None]).mean(axis=-1))


def _interquartile(t: FloatArray) -> FloatArray:
    low, high = np.percentile(t, [25, 75], axis=-1)
    return np.asarray(high - low)


def _percent(part: FloatArray, whole: FloatArray | float) -> FloatArray:
    """100 part / whole; NaN where the whole is not above zero, as a share of it means nothing."""
    whole = np.asarray(whole, float)
    return np.asarray(100 * part / np.where(whole > 0, whole, np.nan))


_ALL = (
    Formula(name="mean", expression="mean(t)", source=BASIC, unit="nm", at_least=1, reduce=lambda t, _: _mean(t)),
    Formula(name="median", expression="median(t)", source=BASIC, unit="nm", at_least=1, reduce=lambda t, _: _median(t)),
    Formula(name="min", expression="min(t)", source=BASIC, unit="nm", at_least=1, of_extremes=True,
            reduce=lambda t, _: _low(t)),
    Formula(name="max", expression="max(t)", source=BASIC, unit="nm", at_least=1, of_extremes=True,
            reduce=lambda t, _: _high(t)),
    Formula(name="range", expression="max-min", source=BASIC, unit="nm", of_extremes=True, reduce=lambda t, _: _range(t)),
    Formula(name="sd_sample", expression="sqrt(sum (t-mean)^2/(n-1))", source=BASIC, unit="nm",
            reduce=lambda t, _: _sd(t, 1)),
    Formula(name="sd_population", expression="sqrt(sum (t-mean)^2/n)", source=BASIC, unit="nm",
            reduce=lambda t, _: _sd(t, 0)),
    Formula(name="sample sd over mean", expression="100 sd_sample/mean", source=SEMI,
            reduce=lambda t, _: _percent(_sd(t, 1), _mean(t))),
    Formula(name="population sd over mean", expression="100 sd_population/mean", source=COMMON,
            reduce=lambda t, _: _percent(_sd(t, 0), _mean(t))),
    Formula(name="3 sample sd over mean", expression="100*3 sd_sample/mean", source=SEMI,
            reduce=lambda t, _: _percent(3 * _sd(t, 1), _mean(t))),
    Formula(name="3 population sd over mean", expression="100*3 sd_population/mean", source=COMMON,
            reduce=lambda t, _: _percent(3 * _sd(t, 0), _mean(t))),
    Formula(name="half-range over mean", expression="100 (max-min)/(2 mean)", source=OPEN_LIST.format("22028"), of_extremes=True,
            reduce=lambda t, _: _percent(_range(t) / 2, _mean(t))),
    Formula(name="range over mean", expression="100 (max-min)/mean", source=SEMI, of_extremes=True,
            reduce=lambda t, _: _percent(_range(t), _mean(t))),
    Formula(name="half-range over mid-range", expression="100 (max-min)/(max+min)", source=OPEN_LIST.format("22028"),
            of_extremes=True,
            reduce=lambda t, _: _percent(_range(t), _high(t) + _low(t))),
    Formula(name="half-range over max", expression="100 (max-min)/(2 max)", source=SEMI, of_extremes=True,
            reduce=lambda t, _: _percent(_range(t) / 2, _high(t))),
    Formula(name="range over max", expression="100 (max-min)/max", source=SEMI, of_extremes=True,
            reduce=lambda t, _: _percent(_range(t), _high(t))),
    Formula(name="half-range over median", expression="100 (max-min)/(2 median)", source=COMMON, of_extremes=True,
            reduce=lambda t, _: _percent(_range(t) / 2, _median(t))),
    Formula(name="half-range over min", expression="100 (max-min)/(2 min)", source=COMMON, of_extremes=True,
            reduce=lambda t, _: _percent(_range(t) / 2, _low(t))),
    Formula(name="range over min", expression="100 (max-min)/min", source=COMMON, of_extremes=True,
            reduce=lambda t, _: _percent(_range(t), _low(t))),
    Formula(name="largest deviation over mean", expression="100 max|t-mean|/mean", source=COMMON, of_extremes=True,
            reduce=lambda t, _: _percent(_farthest(t, _mean(t)), _mean(t))),
    Formula(name="largest deviation over target", expression="100 max|t-target|/target", source=COMMON, of_extremes=True,
            wants_target=True, at_least=1, reduce=lambda t, target: _percent(_farthest(t, target), target)),
    Formula(name="mean absolute deviation over mean", expression="100 mean|t-mean|/mean", source=COMMON,
            reduce=lambda t, _: _percent(_absolute(t), _mean(t))),
    Formula(name="interquartile range over median", expression="100 (q75-q25)/median", source=COMMON,
            reduce=lambda t, _: _percent(_interquartile(t), _median(t))),
    Formula(name="uniformity (100 minus half-range over mean)", expression="100 - 100 (max-min)/(2 mean)", source=COMMON,
            of_extremes=True, larger_is_better=True, reduce=lambda t, _: 100 - _percent(_range(t) / 2, _mean(t))),
    Formula(name="uniformity (100 times min over max)", expression="100 min/max", source=COMMON, of_extremes=True,
            larger_is_better=True, reduce=lambda t, _: _percent(_low(t), _high(t))),
)  # fmt: skip

FORMULAS: dict[str, Formula] = {formula.name: formula for formula in _ALL}


def formula_named(name: str) -> tuple[Formula, float | None]:
    """The formula of a name, and the target where the name ends in one ("largest deviation over target 1000").

    Raises
    ------
    UnknownNameError
        With the nearest right name.
    """
    if name in FORMULAS:
        return FORMULAS[name], None
    ends_in_number = re.fullmatch(r"(.*\S)\s+(\d+(?:\.\d+)?)", name)
    if ends_in_number and ends_in_number[1] in FORMULAS and FORMULAS[ends_in_number[1]].wants_target:
        return FORMULAS[ends_in_number[1]], float(ends_in_number[2])
    raise UnknownNameError("nonuniformity formula", name, list(FORMULAS))


def nonuniformity(values: ArrayLike, formula: str, *, target_nm: float | None = None) -> float | None:
    """Nonuniformity of values by a formula of ``FORMULAS``.

    Parameters
    ----------
    values : (N,) float
        Values at sites in nm; those that are not finite were not measured and are left out.
    formula : str
        A name of ``FORMULAS``.
    target_nm : float or None
        For "largest deviation over target".

    Returns
    -------
    float or None
        In the formula's unit; None where it is undefined: too few values, a mean (or other divisor) not above zero, no target.

    Raises
    ------
    UnknownNameError
        No such formula.
    """
    known, named_target = formula_named(formula)
    finite = _finite(values)
    target = named_target if named_target is not None else target_nm
    if finite.size < known.at_least or (known.wants_target and target is None):
        return None
    result = float(known.reduce(finite, float("nan") if target is None else target))
    return result if np.isfinite(result) else None


def nonuniformity_estimate(
    values: ArrayLike,
    u_local_nm: ArrayLike,
    formula: str,
    *,
    u_common_nm: float = 0.0,
    target_nm: float | None = None,
    rng: np.random.Generator | None = None,
) -> Estimate | None:
    """Nonuniformity with its standard uncertainty.

    Parameters
    ----------
    values, u_local_nm : (N,) float
        Values at sites and the part of their standard uncertainty that they do not share, in nm.
    formula : str
        A name of ``FORMULAS``.
    u_common_nm : float
        The part that all sites share, taken as an offset (a shared scale error cancels).
    target_nm : float or None
        For "largest deviation over target".
    rng : Generator or None
        Of the simulation; None repeats the same draws each time, so that the same map gives the same verdict.

    Returns
    -------
    Estimate or None
        None where the formula is undefined.

    Notes
    -----
    Monte Carlo propagation: values are moved by normal errors, and the spread of the results is u. What they exceed the value
    by on average is ``bias``: noise widens a range or standard deviation, and did so once already in the values themselves.

    References
    ----------
    JCGM 101:2008, propagation of distributions using a Monte Carlo method (from memory).
    """
    value = nonuniformity(values, formula, target_nm=target_nm)
    if value is None:
        return None
    given = np.asarray(values, float).ravel()
    local = np.broadcast_to(np.asarray(u_local_nm, float), given.shape)[np.isfinite(given)]
    known, named_target = formula_named(formula)
    target = named_target if named_target is not None else target_nm
    random = np.random.default_rng(20240229) if rng is None else rng
    errors = random.standard_normal((DRAWS, local.size)) * local + u_common_nm * random.standard_normal((DRAWS, 1))
    drawn = known.reduce(given[np.isfinite(given)] + errors, float("nan") if target is None else target)
    drawn = drawn[np.isfinite(drawn)]
    return Estimate(value=value, u=float(drawn.std(ddof=1)), bias=float(drawn.mean()) - value)


def _finite(values: ArrayLike) -> NDArray[np.float64]:
    array = np.asarray(values, float).ravel()
    return np.asarray(array[np.isfinite(array)], np.float64)
