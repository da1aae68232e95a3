"""Statistics over a map, nonuniformity by formula, and the verdict.

Conventions of this room: nm throughout; ``u`` is a standard uncertainty, ``u_local`` the part that values do not share and
``u_common`` the part that all of them do.
"""

from sheenmap.uniformity.area import PixelEvidence
from sheenmap.uniformity.formulas import FORMULAS, Estimate, nonuniformity, nonuniformity_estimate
from sheenmap.uniformity.judge import judge, tolerance_faults
from sheenmap.uniformity.records import Check, Outcome, SiteReading, Statistics, Verdict
from sheenmap.uniformity.sites import read_sites
from sheenmap.uniformity.statistics import statistics
from sheenmap.uniformity.tolerance import Tolerance

__all__ = [
    "FORMULAS",
    "Check",
    "Estimate",
    "Outcome",
    "PixelEvidence",
    "SiteReading",
    "Statistics",
    "Tolerance",
    "Verdict",
    "judge",
    "nonuniformity",
    "nonuniformity_estimate",
    "read_sites",
    "statistics",
    "tolerance_faults",
]
