"""[tolerance]: what is asked of the part."""

from sheenmap.errors import Fault
from sheenmap.recipe.reader import Reader
from sheenmap.uniformity import FORMULAS, Tolerance, tolerance_faults

RULES, SCOPES = ("shared risk", "guarded"), ("sites", "area", "mean")
LARGEST_NM = 1e6
ASKING = ("target_nm", "plus_nm", "minus_nm", "nonuniformity_percent", "max_defect_percent", "min_claimed_percent")


def read_tolerance(reader: Reader | None, *, has_region: bool) -> Tolerance | None:
    """What is asked of the part, or None."""
    if reader is None:
        return None
    before = len(reader.faults)
    tolerance = _read(reader)
    if not any(key in reader.table for key in ASKING):
        reader.faults.append(Fault(key=reader.path, found="nothing is asked", allowed=f"one or more of {', '.join(ASKING)}"))
    reader.finish()
    if len(reader.faults) == before:
        reader.faults.extend((*tolerance_faults(tolerance), *_formula_faults(reader, tolerance)))
    if not has_region:
        allowed = 'a [region] that says what is judged, if only shape = "frame"'
        reader.faults.append(Fault(key=reader.path, found="a tolerance without [region]", allowed=allowed))
    return tolerance


def _read(reader: Reader) -> Tolerance:
    return Tolerance(
        target_nm=reader.number("target_nm", None, low=0.0, high=LARGEST_NM),
        plus_nm=reader.number("plus_nm", None, low=0.0, high=LARGEST_NM),
        minus_nm=reader.number("minus_nm", None, low=0.0, high=LARGEST_NM),
        nonuniformity_percent=reader.number("nonuniformity_percent", None, low=0.0, high=100.0, open_low=True),
        formula=reader.choice("formula", tuple(FORMULAS), "half-range over mean"),
        rule=reader.choice("rule", RULES, "guarded"),  # type: ignore[arg-type]
        risk=reader.number("risk", 0.05, low=0.0, high=0.5, open_low=True, open_high=True),
        scope=reader.choice("scope", SCOPES, "sites"),  # type: ignore[arg-type]
        max_defect_percent=reader.number("max_defect_percent", None, low=0.0, high=100.0),
        min_claimed_percent=reader.number("min_claimed_percent", None, low=0.0, high=100.0),
        max_outside_percent=reader.number("max_outside_percent", 1.0, low=0.0, high=100.0),
    )


def _formula_faults(reader: Reader, tolerance: Tolerance) -> list[Fault]:
    if not FORMULAS[tolerance.formula].wants_target or tolerance.target_nm is not None:
        return []
    return [
        Fault(key=reader.name("target_nm"), found="nothing", allowed=f'a thickness, as formula = "{tolerance.formula}" needs')
    ]
