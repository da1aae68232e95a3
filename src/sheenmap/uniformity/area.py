"""Thickness against its limits over the area, pixel by pixel, ambiguous ones by all of their candidates."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.flags import AMBIGUOUS, FlagArray, has
from sheenmap.uniformity.conformity import Limits, conformance, finite, limits_text
from sheenmap.uniformity.records import Check, Outcome
from sheenmap.uniformity.statistics import claimed_pixels
from sheenmap.uniformity.tolerance import Tolerance

MOST_SAMPLED = 20_000  # pixels: a share of 1 % is then good to 0.07 %
SHARED_ERRORS = np.linspace(-4, 4, 161)  # in standard deviations: 6e-5 of a normal distribution lies beyond


@dataclass(frozen=True, kw_only=True, eq=False)
class PixelEvidence:
    """The map itself.

    Parameters
    ----------
    thickness_nm, sigma_nm : (H, W) float
    flags : (H, W) uint16
    inside : (H, W) bool
    all_candidates_nm : (K, H, W) float or None
        Every thickness that fits an ambiguous pixel, the best one included; NaN where there are fewer than K. A list that
        leaves one out could turn ambiguity into a pass.
    spot_px : float
        Radius of a site's spot.
    """

    thickness_nm: NDArray[np.floating]
    sigma_nm: NDArray[np.floating]
    flags: FlagArray
    inside: BoolArray
    all_candidates_nm: NDArray[np.floating] | None = None
    spot_px: float = 1.0


def site_conforms_anyway(pixels: PixelEvidence, zone: Limits, x_px: float, y_px: float) -> bool:
    """Whether a spot lies within a zone whichever candidate of its ambiguous pixels is true.

    Half of its pixels or more must conform (claimed and within, or ambiguous with all candidates within), and none may do
    otherwise; dust and the like are neither.
    """
    height, width = pixels.flags.shape
    rows, columns = np.arange(height)[:, None], np.arange(width)
    near = ((columns - x_px) ** 2 + (rows - y_px) ** 2 <= pixels.spot_px**2) & pixels.inside
    claimed = claimed_pixels(pixels.thickness_nm, pixels.flags, pixels.inside) & near
    values = pixels.thickness_nm[claimed]
    ambiguous = near & has(pixels.flags, AMBIGUOUS)
    conforming = ambiguous & _all_candidates_within(pixels, zone)
    strays = np.count_nonzero((values < zone.low) | (values > zone.high)) + np.count_nonzero(ambiguous & ~conforming)
    known = values.size + np.count_nonzero(conforming)
    return bool(strays == 0 and known > 0 and 2 * known >= np.count_nonzero(near))


def _all_candidates_within(pixels: PixelEvidence, zone: Limits) -> BoolArray:
    """True where two candidates or more are listed and all lie in a zone. (H, W)."""
    candidates = pixels.all_candidates_nm
    if candidates is None:
        return np.zeros(pixels.flags.shape, bool)
    listed = np.isfinite(candidates)
    within = (candidates >= zone.low) & (candidates <= zone.high)
    return np.asarray((within | ~listed).all(axis=0) & (listed.sum(axis=0) >= 2))


def judge_area(tolerance: Tolerance, limits: Limits, pixels: PixelEvidence | None, u_common_nm: float) -> Check:
    """The share of the area whose thickness is outside the limits, against ``tolerance.max_outside_percent``.

    Notes
    -----
    For a shared error c the share outside is the mean over pixels of 1 - p_i(c). Its distribution over c decides: passed when
    the share, with everything undecided added, stays within what is allowed with probability 1 - risk; failed when the share
    without it exceeds that with the same probability. Shared risk takes c = 0.
    """
    allowed = tolerance.max_outside_percent / 100
    low, high = finite(limits.low), finite(limits.high)
    if pixels is None or not pixels.inside.any():
        reason = 'The map itself is needed to judge on scope "area".'
        return Check(name="thickness over the area", outcome="not decidable", reason=reason, low=low, high=high)
    outside, undecided = _shares(pixels, limits, u_common_nm, shared_risk=tolerance.rule == "shared risk")
    weight = np.ones(1) if outside.size == 1 else np.exp(-(SHARED_ERRORS**2) / 2)
    weight = weight / weight.sum()
    conforms = float(weight @ (outside + undecided <= allowed))
    fails = float(weight @ (outside > allowed))
    sure = 0.5 if tolerance.rule == "shared risk" else 1 - tolerance.risk
    outcome: Outcome = "passed" if conforms >= sure else "failed" if fails >= sure else "not decidable"
    expected = float(weight @ outside)
    reason = f"{100 * expected:.3g} % of the area is outside {limits_text(limits)}, {100 * allowed:g} % is allowed" + (
        f"; {100 * undecided:.3g} % is not decided." if undecided else "."
    )
    u = float(np.sqrt(weight @ (outside - expected) ** 2))
    return Check(
        name="thickness over the area", outcome=outcome, reason=reason, value=100 * expected, u=100 * u,
        high=100 * allowed, conformance=conforms, unit="%",
    )  # fmt: skip


def _shares(pixels: PixelEvidence, limits: Limits, u_common_nm: float, *, shared_risk: bool) -> tuple[FloatArray, float]:
    """Share of the region outside the limits for each shared error, and the share that is not decided."""
    total = int(np.count_nonzero(pixels.inside))
    claimed = claimed_pixels(pixels.thickness_nm, pixels.flags, pixels.inside)
    anyway = pixels.inside & has(pixels.flags, AMBIGUOUS) & _all_candidates_within(pixels, limits)
    count = int(np.count_nonzero(claimed))
    undecided = 1 - (count + int(np.count_nonzero(anyway & ~claimed))) / total
    errors = np.zeros(1) if shared_risk or u_common_nm <= 0 else SHARED_ERRORS * u_common_nm
    if count == 0:
        return np.zeros(errors.size), undecided
    step = -(-count // MOST_SAMPLED)
    values = pixels.thickness_nm[claimed][::step].astype(float)
    sigma = np.nan_to_num(pixels.sigma_nm[claimed][::step].astype(float))
    outside = [1 - float(conformance(values + error, sigma, limits).mean()) for error in errors]
    return np.array(outside) * count / total, undecided
