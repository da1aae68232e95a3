"""Where variation comes from: nested variance components (lots, wafers, sites) with confidence intervals."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import fdtri
from scipy.stats import chi2

from sheenmap.arrays import FloatArray
from sheenmap.errors import SheenmapError

CONFIDENCE = 0.95


class StudyError(SheenmapError):
    """A study whose data cannot give what is asked; the message says what is missing."""


@dataclass(frozen=True, kw_only=True)
class Source:
    """One line of an analysis of variance: its sum of squares, degrees of freedom and mean square."""

    name: str
    sum_of_squares: float
    degrees: int
    mean_square: float


@dataclass(frozen=True, kw_only=True)
class Component:
    """One variance component in squared units of the values, its confidence interval, and its share of the total.

    ``estimate`` may be negative, as an unbiased one can; ``variance`` is 0 then, and ``share`` (0 to 1) uses that.
    """

    name: str
    estimate: float
    variance: float
    low: float
    high: float
    sd: float
    share: float


@dataclass(frozen=True, kw_only=True)
class Components:
    """Grand mean, the analysis of variance, and the components from the outermost to the innermost."""

    mean: float
    sources: tuple[Source, ...]
    components: tuple[Component, ...]


def nested_components(values: ArrayLike, labels: Sequence[tuple[str, ArrayLike]], *, innermost: str = "within") -> Components:
    """Variance components of nested data by the analysis of variance.

    Parameters
    ----------
    values : (N,) float
        In nm, or any other unit.
    labels : sequence of (name, (N,) labels)
        From the outermost group inwards, such as ("lot", ...), ("wafer", ...). A label counts inside its outer group only, so
        wafers may be numbered from 1 in each lot.
    innermost : str
        Name of the variation inside the innermost group.

    Returns
    -------
    Components

    Raises
    ------
    StudyError
        A level with a single group, or no repeats inside the innermost group.

    Notes
    -----
    Unbalanced data are allowed: mean squares are set equal to their expectations (Henderson's first method); for balanced data
    this is restricted maximum likelihood wherever no component is negative.

    References
    ----------
    Searle, Casella, McCulloch, Variance Components (1992), chapters 3 and 5 (from memory).
    """
    data = np.asarray(values, float).ravel()
    levels = _levels([np.asarray(column) for _, column in labels], data.size)
    names = [*(name for name, _ in labels), innermost]
    sources = _analysis(data, levels, names)
    coefficients = _expected(levels, len(names))
    return components_of(float(data.mean()), sources, coefficients)


def _levels(columns: list[NDArray[np.generic]], size: int) -> list[NDArray[np.intp]]:
    """Group numbers at each level, the whole first and the single values last."""
    levels = [np.zeros(size, np.intp)]
    for column in columns:
        if column.shape != (size,):
            raise ValueError(f"labels of shape {column.shape} for {size} values")
        own = np.unique(column, return_inverse=True)[1].ravel()
        levels.append(np.unique(levels[-1] * (own.max() + 1) + own, return_inverse=True)[1].ravel())
    return [*levels, np.arange(size)]


def _analysis(data: FloatArray, levels: list[NDArray[np.intp]], names: list[str]) -> tuple[Source, ...]:
    centred = data - data.mean()
    explained = [float(np.sum(np.bincount(level, weights=centred) ** 2 / np.bincount(level))) for level in levels]
    groups = [int(level.max()) + 1 for level in levels]
    sources = []
    for index, name in enumerate(names):
        degrees, square = groups[index + 1] - groups[index], explained[index + 1] - explained[index]
        if degrees < 1:
            raise StudyError(f"no variation of {name} can be given: each group next above it holds a single one")
        sources.append(Source(name=name, sum_of_squares=square, degrees=degrees, mean_square=square / degrees))
    return tuple(sources)


def _expected(levels: list[NDArray[np.intp]], count: int) -> FloatArray:
    """Coefficient of component j in the expected mean square of source i. (count, count), upper triangular."""

    def shared(outer: int, inner: int) -> float:
        sizes = np.bincount(levels[inner])
        parent = np.zeros(sizes.size, np.intp)
        parent[levels[inner]] = levels[outer]
        return float(np.sum(sizes**2 / np.bincount(levels[outer])[parent]))

    table = np.zeros((count, count))
    for i in range(count):
        degrees = int(levels[i + 1].max()) - int(levels[i].max())
        for j in range(i, count):
            table[i, j] = (shared(i + 1, j + 1) - shared(i, j + 1)) / degrees
    return table


def components_of(mean: float, sources: Sequence[Source], coefficients: ArrayLike) -> Components:
    """Components from an analysis of variance.

    Parameters
    ----------
    mean : float
        Grand mean.
    sources : sequence of Source
        From the outermost to the innermost, S of them.
    coefficients : (S, S) float
        Row i: how often each component stands in the expected mean square of source i; upper triangular, last column 1.
    """
    table = np.asarray(coefficients, float)
    inverse = np.linalg.inv(table)
    squares = np.array([source.mean_square for source in sources])
    degrees = np.array([source.degrees for source in sources], float)
    estimates = inverse @ squares
    kept = np.maximum(estimates, 0)
    total = max(float(kept.sum()), 1e-300)
    found = []
    for index, source in enumerate(sources):
        low, high = (max(bound, 0.0) for bound in _interval(inverse[index], squares, degrees))
        variance = float(kept[index])
        found.append(
            Component(
                name=source.name, estimate=float(estimates[index]), variance=variance, low=low, high=high,
                sd=float(np.sqrt(variance)), share=variance / total,
            )
        )  # fmt: skip
    return Components(mean=mean, sources=tuple(sources), components=tuple(found))


def _interval(weights: FloatArray, squares: FloatArray, degrees: FloatArray) -> tuple[float, float]:
    """Interval of a sum of mean squares, of which the later ones may be subtracted.

    References
    ----------
    Ting, Burdick, Graybill, Jeyaratnam, Lu, J. Stat. Comput. Simul. 35, 135 (1990), modified large samples (from memory; cross
    terms of pairs with the same sign, which are small, are left out). A single mean square has its exact chi-square interval.
    """
    alpha = (1 - CONFIDENCE) / 2
    upper, lower = chi2.isf(alpha, degrees) / degrees, chi2.isf(1 - alpha, degrees) / degrees
    grow, shrink = 1 / lower - 1, 1 - 1 / upper
    parts = weights * squares
    plus, minus = np.maximum(parts, 0), np.maximum(-parts, 0)
    below = float(np.sum((shrink * plus) ** 2 + (grow * minus) ** 2))
    above = float(np.sum((grow * plus) ** 2 + (shrink * minus) ** 2))
    for i in np.flatnonzero(plus):
        for j in np.flatnonzero(minus):
            high, low = float(fdtri(degrees[i], degrees[j], 1 - alpha)), float(fdtri(degrees[i], degrees[j], alpha))
            below += ((high - 1) ** 2 - (shrink[i] * high) ** 2 - grow[j] ** 2) / high * plus[i] * minus[j]
            above += ((1 - low) ** 2 - (grow[i] * low) ** 2 - shrink[j] ** 2) / low * plus[i] * minus[j]
    middle = float(parts.sum())
    return middle - float(np.sqrt(max(below, 0.0))), middle + float(np.sqrt(max(above, 0.0)))


def pooled_sd(sums_of_squares: ArrayLike, degrees: ArrayLike) -> float:
    """Standard deviation pooled over groups: root of all squares over all degrees of freedom."""
    total = float(np.sum(np.asarray(degrees, float)))
    if total <= 0:
        raise StudyError("a pooled standard deviation needs a group with two readings or more")
    return float(np.sqrt(np.sum(np.asarray(sums_of_squares, float)) / total))
