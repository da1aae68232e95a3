"""What a recipe asks of the part."""

from dataclasses import dataclass
from typing import Literal

Rule = Literal["shared risk", "guarded"]
Scope = Literal["sites", "area", "mean"]


@dataclass(frozen=True, kw_only=True)
class Tolerance:
    """Target and limits in nm, the limit on nonuniformity, and the decision rule of JCGM 106.

    ``formula`` is a name of the registry of nonuniformity formulas. ``risk`` is the consumer's risk that sets the guard
    band of the rule "guarded" (0.05 is 1.645 u one-sided). ``scope`` says on what the thickness is judged: all sites, the mean,
    or the area, of which ``max_outside_percent`` may be outside the limits.
    """

    target_nm: float | None = None
    plus_nm: float | None = None
    minus_nm: float | None = None
    nonuniformity_percent: float | None = None
    formula: str = "half-range over mean"
    rule: Rule = "guarded"
    risk: float = 0.05
    scope: Scope = "sites"
    max_defect_percent: float | None = None
    min_claimed_percent: float | None = None
    max_outside_percent: float = 1.0
