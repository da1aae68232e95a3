"""The verdict on a part: each check of its tolerance, then all of them.

Three outcomes. A part passes when conformity is shown under the rule, fails when nonconformity is, and is not decidable
otherwise: what was not measured, and what is ambiguous, never turns into a pass.
"""

from collections.abc import Sequence

import numpy as np

from sheenmap.errors import Fault, SettingsError
from sheenmap.uniformity.area import PixelEvidence, judge_area
from sheenmap.uniformity.conformity import guard_factor
from sheenmap.uniformity.formulas import Estimate, formula_named, nonuniformity_estimate
from sheenmap.uniformity.judge_thickness import judge_mean, judge_sites, limits_of
from sheenmap.uniformity.records import Check, Outcome, SiteReading, Statistics, Verdict
from sheenmap.uniformity.tolerance import Tolerance

RULE_TEXT = {
    "shared risk": "shared risk (a value inside the limits is accepted)",
    "guarded": "guarded (limits drawn in so that the risk of accepting a bad part is at most {risk:.3g} %)",
}


def judge(
    tolerance: Tolerance,
    readings: Sequence[SiteReading],
    statistics: Statistics,
    *,
    u_common_nm: float = 0.0,
    pixels: PixelEvidence | None = None,
) -> Verdict:
    """Whether a part is within its tolerance.

    Parameters
    ----------
    tolerance : Tolerance
        What is asked of the part.
    readings : sequence of SiteReading
        Empty when the recipe has no sites.
    statistics : Statistics
        Of the claimed pixels.
    u_common_nm : float
        Standard uncertainty that all pixels share.
    pixels : PixelEvidence or None
        The map itself: needed for scope "area", and to judge sites whose pixels are ambiguous but whose candidates all
        conform.

    Returns
    -------
    Verdict

    Raises
    ------
    SettingsError
        A tolerance that cannot be judged, such as one of no width.

    References
    ----------
    JCGM 106:2012: conformance probability, guarded acceptance. ISO 14253-1: proof of nonconformity (both from memory).
    """
    faults = tolerance_faults(tolerance)
    if faults:
        raise SettingsError(faults, where="tolerance")
    checks = tuple(
        check
        for check in (
            _thickness(tolerance, readings, statistics, u_common_nm, pixels),
            _nonuniformity(tolerance, readings, statistics, u_common_nm),
            _defects(tolerance, statistics),
            _claimed(tolerance, statistics),
        )
        if check is not None
    )
    outcome = worst([check.outcome for check in checks])
    rule = RULE_TEXT[tolerance.rule].format(risk=100 * tolerance.risk)
    return Verdict(outcome=outcome, sentence=_sentence(outcome, checks), rule=rule, checks=checks)


def worst(outcomes: Sequence[Outcome]) -> Outcome:
    """Failed before not decidable before passed; not decidable when nothing was judged."""
    for outcome in ("failed", "not decidable"):
        if outcome in outcomes:
            return outcome
    return "passed" if outcomes else "not decidable"


def tolerance_faults(tolerance: Tolerance) -> tuple[Fault, ...]:
    """Everything that makes a tolerance impossible to judge."""
    faults = []
    if tolerance.target_nm is None and (tolerance.plus_nm is not None or tolerance.minus_nm is not None):
        faults.append(Fault(key="tolerance.target_nm", found="nothing", allowed="a thickness, as plus_nm or minus_nm is given"))
    if tolerance.target_nm is not None:
        faults += _width_faults(tolerance)
    if tolerance.nonuniformity_percent is not None and not tolerance.nonuniformity_percent > 0:
        faults.append(_fault("nonuniformity_percent", tolerance.nonuniformity_percent, "above 0"))
    if not 0 < tolerance.risk < 0.5:
        faults.append(_fault("risk", tolerance.risk, "above 0 and below 0.5"))
    for key in ("max_defect_percent", "min_claimed_percent", "max_outside_percent"):
        value = getattr(tolerance, key)
        if value is not None and not 0 <= value <= 100:
            faults.append(_fault(key, value, "0 to 100"))
    formula, _ = formula_named(tolerance.formula)
    if tolerance.nonuniformity_percent is not None and (formula.larger_is_better or formula.unit != "%"):
        faults.append(_fault("formula", tolerance.formula, "a nonuniformity in %, which a limit from above goes with"))
    return tuple(faults)


def _width_faults(tolerance: Tolerance) -> list[Fault]:
    sides = {"plus_nm": tolerance.plus_nm, "minus_nm": tolerance.minus_nm}
    faults = [_fault(key, value, "0 or above") for key, value in sides.items() if value is not None and not value >= 0]
    if all(value is None for value in sides.values()):
        faults.append(Fault(key="tolerance.plus_nm", found="nothing", allowed="plus_nm, minus_nm or both beside target_nm"))
    elif tolerance.plus_nm is not None and tolerance.minus_nm is not None and tolerance.plus_nm + tolerance.minus_nm == 0:
        faults.append(Fault(key="tolerance.plus_nm", found="a tolerance of no width", allowed="plus_nm + minus_nm above 0"))
    return faults


def _fault(key: str, found: object, allowed: str) -> Fault:
    return Fault(key=f"tolerance.{key}", found=str(found), allowed=allowed)


def _thickness(
    tolerance: Tolerance,
    readings: Sequence[SiteReading],
    statistics: Statistics,
    u_common_nm: float,
    pixels: PixelEvidence | None,
) -> Check | None:
    if tolerance.target_nm is None:
        return None
    if tolerance.scope == "mean":
        return judge_mean(tolerance, statistics)
    if tolerance.scope == "area":
        return judge_area(tolerance, limits_of(tolerance), pixels, u_common_nm)
    return judge_sites(tolerance, readings, u_common_nm, pixels)


def _nonuniformity(
    tolerance: Tolerance, readings: Sequence[SiteReading], statistics: Statistics, u_common_nm: float
) -> Check | None:
    limit = tolerance.nonuniformity_percent
    if limit is None:
        return None
    name = f"nonuniformity ({tolerance.formula})"
    measured = [reading for reading in readings if reading.thickness_nm is not None]
    missing = tuple(f"site {reading.number}" for reading in readings if reading.thickness_nm is None)
    estimate = nonuniformity_estimate(
        [reading.thickness_nm or np.nan for reading in measured], [reading.u_local_nm or 0.0 for reading in measured],
        tolerance.formula, u_common_nm=u_common_nm, target_nm=tolerance.target_nm,
    ) if measured else None  # fmt: skip
    if estimate is None:
        reason = "Nonuniformity is undefined: " + (
            f"{len(measured)} of {len(readings)} sites are measured." if readings else "the recipe has no sites to compute it on."
        )
        return Check(name=name, outcome="not decidable", reason=reason, high=limit, unit="%", places=missing)
    outcome = _below(estimate, limit, tolerance)
    said = f"{estimate.value:.3g} % (u {estimate.u:.2g} %) by {tolerance.formula} over {len(measured)} sites, limit {limit:g} %"
    reason = {"passed": f"Nonuniformity is {said}.", "failed": f"Nonuniformity is too large: {said}."}.get(
        outcome, f"Nonuniformity is too near its limit to decide: {said}."
    )
    if missing and outcome == "passed":
        outcome, reason = (
            "not decidable",
            f"{len(missing)} of {len(readings)} sites are not measured; over the others nonuniformity is {said}.",
        )
    return Check(
        name=name, outcome=outcome, reason=reason, value=estimate.value, u=estimate.u, high=limit, unit="%", places=missing
    )


def _below(estimate: Estimate, limit: float, tolerance: Tolerance) -> Outcome:
    """An upper limit. What noise adds to a spread makes passing harder, and must not make a part fail: it is taken off there."""
    if tolerance.rule == "shared risk":
        return "passed" if estimate.value <= limit else "failed"
    guard = guard_factor(tolerance.risk) * estimate.u
    if estimate.value <= limit - guard:
        return "passed"
    return "failed" if estimate.value - max(estimate.bias, 0.0) >= limit + guard else "not decidable"


def _defects(tolerance: Tolerance, statistics: Statistics) -> Check | None:
    limit = tolerance.max_defect_percent
    if limit is None:
        return None
    total = max(statistics.pixels, 1)
    least, most = 100 * statistics.off_curve / total, 100 * (statistics.off_curve + statistics.unseen) / total
    outcome: Outcome = "failed" if least > limit else "passed" if most <= limit and statistics.pixels else "not decidable"
    reason = f"{least:.3g} % of the area is off the curve, limit {limit:g} %" + (
        f"; another {most - least:.3g} % is saturated or dark and could hide more." if outcome == "not decidable" else "."
    )
    return Check(name="defect area", outcome=outcome, reason=reason, value=least, high=limit, unit="%")


def _claimed(tolerance: Tolerance, statistics: Statistics) -> Check | None:
    limit = tolerance.min_claimed_percent
    if limit is None:
        return None
    share = 100 * statistics.claimed / max(statistics.pixels, 1)
    enough = share >= limit
    reason = f"{share:.4g} % of the area is measured, {limit:g} % or more is asked for."
    return Check(
        name="measured area", outcome="passed" if enough else "not decidable", reason=reason, value=share, low=limit, unit="%"
    )


def _sentence(outcome: Outcome, checks: Sequence[Check]) -> str:
    if not checks:
        return "Not decidable: the recipe sets no limit."
    deciding = next(check for check in checks if check.outcome == outcome)
    if outcome == "passed":
        return "Passed: " + " ".join(check.reason for check in checks)
    return f"{outcome.capitalize()}: {deciding.reason}"
