"""What is said of a part: readings at sites, statistics, verdict."""

from dataclasses import dataclass
from typing import Literal

Outcome = Literal["passed", "failed", "not decidable"]


@dataclass(frozen=True, kw_only=True)
class SiteReading:
    """One site: position, robust mean over its spot, standard uncertainties, and why it is empty when it is.

    ``u_nm`` holds all of the uncertainty, ``u_local_nm`` the part that other sites do not share. ``thickness_nm`` and both
    are None when too few pixels of the spot are claimed; then ``status`` says "not measured: ..." and else "measured".
    """

    number: int
    x_mm: float
    y_mm: float
    x_px: float
    y_px: float
    thickness_nm: float | None
    u_nm: float | None
    u_local_nm: float | None
    pixels: int
    claimed: int
    status: str


@dataclass(frozen=True, kw_only=True)
class Statistics:
    """Of the claimed pixels inside the region, in nm; None when nothing is claimed.

    ``percentiles`` maps "1", "5", "25", "50", "75", "95", "99". ``off_curve``, ``ambiguous`` and ``unseen`` (saturated or dark)
    count pixels inside the region that carry those flags.
    """

    pixels: int
    claimed: int
    mean_nm: float | None
    median_nm: float | None
    sd_nm: float | None
    sd_noise_corrected_nm: float | None
    u_mean_nm: float | None
    percentiles: dict[str, float]
    off_curve: int = 0
    ambiguous: int = 0
    unseen: int = 0


@dataclass(frozen=True, kw_only=True)
class Check:
    """One thing that was judged: its outcome, the reason in one sentence, and the numbers behind it."""

    name: str
    outcome: Outcome
    reason: str
    value: float | None = None
    u: float | None = None
    low: float | None = None
    high: float | None = None
    conformance: float | None = None
    unit: str = "nm"
    places: tuple[str, ...] = ()


@dataclass(frozen=True, kw_only=True)
class Verdict:
    """The outcome of all checks, the rule that was used, and the sentence on top of the report."""

    outcome: Outcome
    sentence: str
    rule: str
    checks: tuple[Check, ...] = ()
