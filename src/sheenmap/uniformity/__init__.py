"""Statistics over a map, nonuniformity by formula, shape, variance components, and the verdict.

Conventions of this room: nm throughout; ``u`` is a standard uncertainty, ``u_local`` the part that values do not share and
``u_common`` the part that all of them do.
"""

from sheenmap.uniformity.area import PixelEvidence
from sheenmap.uniformity.components import nested_components
from sheenmap.uniformity.conformity import conformance
from sheenmap.uniformity.die_statistics import statistics_by_die
from sheenmap.uniformity.formulas import FORMULAS, Formula, nonuniformity, nonuniformity_estimate
from sheenmap.uniformity.gauge import gauge_study
from sheenmap.uniformity.judge import judge, tolerance_faults
from sheenmap.uniformity.records import Check, Outcome, SiteReading, Statistics, Verdict
from sheenmap.uniformity.shape import azimuth_profile, edge_roll_off, radial_profile, shape_of
from sheenmap.uniformity.sites import read_sites
from sheenmap.uniformity.statistics import statistics
from sheenmap.uniformity.tolerance import Tolerance

__all__ = [
    "FORMULAS",
    "Check",
    "Formula",
    "Outcome",
    "PixelEvidence",
    "SiteReading",
    "Statistics",
    "Tolerance",
    "Verdict",
    "azimuth_profile",
    "conformance",
    "edge_roll_off",
    "gauge_study",
    "judge",
    "nested_components",
    "nonuniformity",
    "nonuniformity_estimate",
    "radial_profile",
    "read_sites",
    "shape_of",
    "statistics",
    "statistics_by_die",
    "tolerance_faults",
]
