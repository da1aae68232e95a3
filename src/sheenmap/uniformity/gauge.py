"""Gauge study: how much readings differ when the part does not."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import fdtrc

from sheenmap.arrays import FloatArray
from sheenmap.uniformity.components import Component, Source, StudyError, components_of

POOLING_LEVEL = 0.25  # an interaction less significant than this is taken for repeatability, common practice
GOOD_PERCENT, UNFIT_PERCENT = 10.0, 30.0  # of the tolerance, common practice
WIDTH = 6.0  # standard deviations that a gauge is said to spread over


@dataclass(frozen=True, kw_only=True)
class Gauge:
    """Repeatability, reproducibility and part-to-part variation of a study, in nm; None for what the study cannot give.

    ``percent_of_tolerance`` is 100 x 6 sigma over the tolerance's width: under 10 is good, over 30 unfit. ``missing`` says in
    a sentence each what could not be given and why.
    """

    repeatability_nm: float
    repeatability_low_nm: float
    repeatability_high_nm: float
    reproducibility_nm: float | None
    gauge_nm: float
    parts_nm: float | None
    percent_of_tolerance: float | None
    fitness: str | None
    sources: tuple[Source, ...]
    missing: tuple[str, ...] = ()


def gauge_study(readings_nm: ArrayLike, *, tolerance_width_nm: float | None = None) -> Gauge:
    """Repeatability and reproducibility by the analysis of variance.

    Parameters
    ----------
    readings_nm : (P, O, R) float
        P parts (or sites), each read R times by O operators or set-ups; all finite.
    tolerance_width_nm : float or None
        Upper minus lower limit.

    Returns
    -------
    Gauge

    Raises
    ------
    StudyError
        Fewer than two readings each, or readings missing.

    Notes
    -----
    Two-way random model with interaction. The interaction is part of reproducibility; when it is not significant at 25 % it
    is pooled with repeatability.

    References
    ----------
    Montgomery, Introduction to Statistical Quality Control, section on gauge capability, ANOVA method (from memory).
    """
    data = np.asarray(readings_nm, float)
    if data.ndim != 3:
        raise ValueError(f"readings are (parts, operators, repeats), not of shape {data.shape}")
    parts, operators, repeats = data.shape
    if repeats < 2 or not np.isfinite(data).all():
        raise StudyError(f"a gauge study needs two readings or more of each part by each operator, none missing; found {repeats}")
    sources, table = _analysis(data)
    found = {component.name: component for component in components_of(float(data.mean()), sources, table).components}
    repeatability = found["repeatability"]
    across = _root_sum(found, ("operators", "parts x operators")) if operators > 1 else None
    spread = float(np.hypot(repeatability.sd, across or 0.0))
    percent = None if not tolerance_width_nm else 100 * WIDTH * spread / tolerance_width_nm
    return Gauge(
        repeatability_nm=repeatability.sd, repeatability_low_nm=float(np.sqrt(repeatability.low)),
        repeatability_high_nm=float(np.sqrt(repeatability.high)), reproducibility_nm=across, gauge_nm=spread,
        parts_nm=found["parts"].sd if parts > 1 else None, percent_of_tolerance=percent,
        fitness=None if percent is None else _fitness(percent), sources=sources, missing=_missing(parts, operators, repeats),
    )  # fmt: skip


def _root_sum(found: dict[str, Component], names: tuple[str, ...]) -> float:
    return float(np.sqrt(sum(found[name].variance for name in names if name in found)))


def _fitness(percent: float) -> str:
    return "good" if percent < GOOD_PERCENT else "unfit" if percent > UNFIT_PERCENT else "usable with care"


def _missing(parts: int, operators: int, repeats: int) -> tuple[str, ...]:
    lines = []
    if operators < 2:
        lines.append("Reproducibility cannot be given: two operators or set-ups or more are needed.")
    if parts < 2:
        lines.append("Part-to-part variation cannot be given: two parts or more are needed.")
    if repeats < 3:
        lines.append("Repeatability rests on pairs only: three repeats or more make it firmer.")
    return tuple(lines)


def _analysis(data: FloatArray) -> tuple[tuple[Source, ...], FloatArray]:
    """Sources from the outermost, and the coefficients of the components in their expected mean squares."""
    parts, operators, repeats = data.shape
    grand, by_part, by_operator, by_cell = data.mean(), data.mean(axis=(1, 2)), data.mean(axis=(0, 2)), data.mean(axis=2)
    squares = {
        "parts": operators * repeats * float(np.sum((by_part - grand) ** 2)),
        "operators": parts * repeats * float(np.sum((by_operator - grand) ** 2)),
        "parts x operators": repeats * float(np.sum((by_cell - by_part[:, None] - by_operator + grand) ** 2)),
        "repeatability": float(np.sum((data - by_cell[..., None]) ** 2)),
    }
    degrees = {
        "parts": parts - 1,
        "operators": operators - 1,
        "parts x operators": (parts - 1) * (operators - 1),
        "repeatability": parts * operators * (repeats - 1),
    }
    crossed = degrees["parts x operators"]
    if crossed and _significance(squares, degrees) > POOLING_LEVEL:
        squares["repeatability"] += squares.pop("parts x operators")
        degrees["repeatability"] += degrees.pop("parts x operators")
    sources = tuple(
        Source(name=name, sum_of_squares=squares[name], degrees=degrees[name], mean_square=squares[name] / degrees[name])
        for name in squares
        if degrees[name] > 0
    )
    names = tuple(source.name for source in sources)
    return sources, _coefficients(names, parts, operators, repeats)


def _significance(squares: dict[str, float], degrees: dict[str, int]) -> float:
    """Probability of an interaction as large as this by repeatability alone."""
    within = squares["repeatability"] / degrees["repeatability"]
    ratio = squares["parts x operators"] / degrees["parts x operators"] / max(within, 1e-300)
    return float(fdtrc(degrees["parts x operators"], degrees["repeatability"], ratio))


def _coefficients(names: tuple[str, ...], parts: int, operators: int, repeats: int) -> FloatArray:
    own = {"parts": operators * repeats, "operators": parts * repeats, "parts x operators": repeats, "repeatability": 1}
    table = np.diag([float(own[name]) for name in names])
    table[:, -1] = 1
    if "parts x operators" in names:
        table[: names.index("parts x operators"), names.index("parts x operators")] = repeats
    return np.asarray(table)
