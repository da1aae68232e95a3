"""Thickness against its limits, at sites or of the mean."""

from collections.abc import Sequence

import numpy as np

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.uniformity.area import PixelEvidence, site_conforms_anyway
from sheenmap.uniformity.conformity import (
    Limits,
    acceptance_zone,
    all_conform,
    conformance,
    finite,
    guard_factor,
    is_accepted,
    limits_text,
)
from sheenmap.uniformity.records import Check, Outcome, SiteReading, Statistics
from sheenmap.uniformity.tolerance import Tolerance

LEAST_MEAN_SHARE = 0.5  # of the region: the mean of less does not stand for the part
MOST_PLACES = 10


def limits_of(tolerance: Tolerance) -> Limits:
    """Lower and upper limit of thickness; a side that is not given has none. The tolerance has a target."""
    target = tolerance.target_nm if tolerance.target_nm is not None else np.nan
    return Limits(
        low=-np.inf if tolerance.minus_nm is None else target - tolerance.minus_nm,
        high=np.inf if tolerance.plus_nm is None else target + tolerance.plus_nm,
    )


def judge_mean(tolerance: Tolerance, statistics: Statistics) -> Check:
    """The mean over the claimed area against the limits."""
    limits = limits_of(tolerance)
    low, high = finite(limits.low), finite(limits.high)
    share = statistics.claimed / max(statistics.pixels, 1)
    if statistics.mean_nm is None or statistics.u_mean_nm is None or share < LEAST_MEAN_SHARE:
        reason = f"Only {100 * share:.3g} % of the area is measured, too little for its mean to stand for the part."
        return Check(name="mean thickness", outcome="not decidable", reason=reason, low=low, high=high)
    mean, u = statistics.mean_nm, statistics.u_mean_nm
    outcome = _one_value(mean, u, limits, tolerance)
    said = f"mean thickness is {mean:.2f} nm (u {u:.2g} nm), limits {limits_text(limits)}"
    reason = {"passed": f"The {said}.", "failed": f"Outside the limits: the {said}."}.get(
        outcome, f"Too near a limit to decide: the {said}."
    )
    p = float(conformance(mean, u, limits))
    return Check(name="mean thickness", outcome=outcome, reason=reason, value=mean, u=u, low=low, high=high, conformance=p)


def _one_value(value: float, u: float, limits: Limits, tolerance: Tolerance) -> Outcome:
    if tolerance.rule == "shared risk":
        return "passed" if is_accepted(value, limits) else "failed"
    guard = guard_factor(tolerance.risk)
    probability = float(conformance(value, u, limits))
    if is_accepted(value, acceptance_zone(u, limits, guard)) and probability >= 1 - tolerance.risk:
        return "passed"
    return "failed" if probability <= tolerance.risk else "not decidable"


def judge_sites(
    tolerance: Tolerance, readings: Sequence[SiteReading], u_common_nm: float, pixels: PixelEvidence | None = None
) -> Check:
    """Thickness at all sites against the limits.

    Notes
    -----
    Guarded: passes when each site lies in its acceptance zone and all conform at once with probability 1 - risk or more,
    the shared error integrated over. Fails when a site's own probability is at most 1 - (1 - risk)^(1/N) (Sidak): among N
    good sites at a limit, one is then called bad with probability ``risk`` at most.
    """
    limits = limits_of(tolerance)
    measured = [reading for reading in readings if reading.thickness_nm is not None]
    conforming, missing = _unmeasured(readings, _pixel_zone(tolerance, limits, u_common_nm), pixels)
    values = np.array([reading.thickness_nm for reading in measured], float)
    u = np.array([reading.u_nm for reading in measured], float)
    local = np.array([reading.u_local_nm for reading in measured], float)
    p = conformance(values, u, limits) if values.size else np.zeros(0)
    together = all_conform(values, local, u_common_nm, limits) if values.size else None
    outside = ~((values >= limits.low) & (values <= limits.high))
    bad = outside if tolerance.rule == "shared risk" else p <= 1 - (1 - tolerance.risk) ** (1 / max(values.size, 1))
    doubtful = _doubtful(values, u, together, limits, tolerance)
    outcome: Outcome = "failed" if bad.any() else "not decidable" if missing or not values.size or doubtful.any() else "passed"
    shown = bad if bad.any() else doubtful
    places = [*(_place(reading) for reading, flag in zip(measured, shown) if flag), *(_place(reading) for reading in missing)]
    worst = int(np.argmin(p)) if p.size else None
    return Check(
        name="thickness at sites", outcome=outcome,
        reason=_sites_reason(outcome, tolerance, limits, len(readings), values.size + conforming, missing, bad, doubtful, u),
        value=None if worst is None else float(values[worst]), u=None if worst is None else float(u[worst]),
        low=finite(limits.low), high=finite(limits.high), conformance=together, places=tuple(places[:MOST_PLACES]),
    )  # fmt: skip


def _pixel_zone(tolerance: Tolerance, limits: Limits, u_common_nm: float) -> Limits:
    """Where candidates must lie: the limits, under the rule "guarded" drawn in by what all pixels share."""
    return acceptance_zone(u_common_nm, limits, guard_factor(tolerance.risk)) if tolerance.rule == "guarded" else limits


def _unmeasured(readings: Sequence[SiteReading], zone: Limits, pixels: PixelEvidence | None) -> tuple[int, list[SiteReading]]:
    """How many unmeasured sites conform whichever candidate is true, and those that stay open."""
    empty = [reading for reading in readings if reading.thickness_nm is None]
    settled = [
        reading for reading in empty if pixels is not None and site_conforms_anyway(pixels, zone, reading.x_px, reading.y_px)
    ]
    return len(settled), [reading for reading in empty if reading not in settled]


def _doubtful(values: FloatArray, u: FloatArray, together: float | None, limits: Limits, tolerance: Tolerance) -> BoolArray:
    """Sites that keep a part from passing under the rule "guarded". (N,) bool."""
    if tolerance.rule == "shared risk" or together is None:
        return np.zeros(values.size, bool)
    guard = guard_factor(tolerance.risk) * u
    doubtful = ~((values >= limits.low + guard) & (values <= limits.high - guard))
    if together < 1 - tolerance.risk and not doubtful.any():
        p = conformance(values, u, limits)
        doubtful = p <= np.sort(p)[min(2, p.size - 1)]  # none alone, all together: the three least sure are named
    return doubtful


def _place(reading: SiteReading) -> str:
    value = reading.status if reading.thickness_nm is None else f"{reading.thickness_nm:.2f} nm (u {reading.u_nm:.2g} nm)"
    return f"site {reading.number} (x {reading.x_mm:.1f} mm, y {reading.y_mm:.1f} mm): {value}"


def _sites_reason(
    outcome: Outcome, tolerance: Tolerance, limits: Limits, total: int, known: int, missing: Sequence[SiteReading],
    bad: BoolArray, doubtful: BoolArray, u: FloatArray,
) -> str:  # fmt: skip
    wanted = limits_text(limits)
    if not total:
        return 'The recipe has no sites: add [sites], or judge on scope "mean" or "area".'
    if outcome == "failed":
        return f"{int(bad.sum())} of {total} sites are outside {wanted}."
    if outcome == "passed":
        return f"All {known} sites are within {wanted}."
    if missing:
        numbers = ", ".join(str(reading.number) for reading in missing[:MOST_PLACES])
        return f"{len(missing)} of {total} sites are not measured: {numbers}{', ...' if len(missing) > MOST_PLACES else ''}."
    guard = guard_factor(tolerance.risk) * float(u.max())
    if 2 * guard >= limits.high - limits.low:
        return f"Not decidable with this set-up: two guard bands of {guard:.3g} nm are wider than {wanted}."
    return f"{int(doubtful.sum())} of {total} sites are too near a limit of {wanted} to decide."
