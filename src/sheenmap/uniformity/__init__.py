"""Statistics over a map, nonuniformity by formula, and the verdict."""

from sheenmap.uniformity.records import Check, Outcome, SiteReading, Statistics, Verdict
from sheenmap.uniformity.tolerance import Tolerance

__all__ = ["Check", "Outcome", "SiteReading", "Statistics", "Tolerance", "Verdict"]
