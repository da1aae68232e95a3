"""What the page says: headline, numbers, flags, what to do next, cautions."""

import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from sheenmap.flags import FLAGS, OUTSIDE, WEAK, Flag, FlagArray
from sheenmap.measure import Measurement
from sheenmap.uniformity import FORMULAS

MOST_ADVICE = 6
WORTH_ADVICE = 0.002  # share of the region from which a flag's advice is given without looking it up
WORTH_WEAK = 0.05
JUDGED, USUAL_FORMULA = "nonuniformity (", "half-range over mean"  # how a check of nonuniformity is named; the first is its start
CHUNK = 1 << 20  # pixels counted at once: the counter's copy stays inside the cache

CAUTIONS = (
    "A screening and mapping aid. Decisions to ship, to accept under a contract, or where safety hangs on the coating rest on "
    "qualified instruments (ellipsometry, spectral reflectometry, profilometry) traceable to standards, under your own quality "
    "system.",
    "A pass is a statement under the rule that is named beside it, with the risk that goes with it, and nothing more.",
    "What the recipe states is believed: a wrong index, angle, lamp or encoding moves the thickness and can leave no trace in "
    "the picture.",
    "Hatched areas are not known. Do not fill them by eye or by averaging.",
    "u is a standard uncertainty: where the recipe is right, plus or minus 2 u holds the truth about 95 times in 100.",
    "No diagnosis, no evidence on food or skin, no volume of an oil slick: a photograph cannot carry such answers.",
)
OUTCOME_MARK = {"passed": "✓", "failed": "✕", "not decidable": "?", "measured": "•", "not measured": "?"}


@dataclass(frozen=True, kw_only=True)
class FlagRow:
    """One flag of the legend: how many pixels carry it, and their share of the region (of the picture for ``outside``)."""

    flag: Flag
    pixels: int
    share: float


@dataclass(frozen=True, kw_only=True)
class Limits:
    """Tolerance limits of the thickness in nm; None where there is none on that side."""

    low_nm: float | None
    high_nm: float | None


def has_map(measurement: Measurement) -> bool:
    """Whether enough is claimed to show a map."""
    return measurement.is_measured and measurement.statistics.claimed > 0


def outcome(measurement: Measurement) -> str:
    """The verdict in a word or two; where nothing was judged, whether there is a map."""
    if not has_map(measurement):
        return "not measured"
    return "measured" if measurement.verdict is None else measurement.verdict.outcome


def headline(measurement: Measurement) -> tuple[str, str]:
    """The sentence on top without the outcome's word, which stands before it, and the line below it (may be empty)."""
    if not has_map(measurement) or measurement.verdict is None:
        return _without(measurement.sentence, outcome(measurement)), ""
    return _without(measurement.verdict.sentence, measurement.verdict.outcome), _sentence(measurement.sentence)


def _without(text: str, word: str) -> str:
    start = word + ":"
    return _sentence(text[len(start) :].strip() if text.casefold().startswith(start) else text)


def _sentence(text: str) -> str:
    return text[:1].upper() + text[1:] + ("" if text.endswith((".", "!", "?")) else ".")


def flag_rows(flags: FlagArray) -> tuple[FlagRow, ...]:
    """Every flag of the registry with its pixels; shares are of the region, that of ``outside`` of the picture."""
    counts = _counts(flags)
    inside = flags.size - counts[OUTSIDE.bit]
    return tuple(
        FlagRow(flag=flag, pixels=counts[flag.bit], share=counts[flag.bit] / max(flags.size if flag is OUTSIDE else inside, 1))
        for flag in FLAGS
    )


def _counts(flags: FlagArray) -> dict[int, int]:
    flat = flags.reshape(-1)
    histogram = np.zeros(1 << 16, np.int64)
    for start in range(0, flat.size, CHUNK):
        histogram += np.bincount(flat[start : start + CHUNK], minlength=1 << 16)
    values = np.arange(histogram.size)
    return {flag.bit: int(histogram[(values >> flag.bit) & 1 == 1].sum()) for flag in FLAGS}


def number_rows(measurement: Measurement) -> tuple[tuple[str, str, str], ...]:
    """Name, value, and what it is of."""
    found = measurement.statistics
    claimed = percent(found.claimed / max(found.pixels, 1))
    rows = [("claimed", claimed, f"{found.claimed:,} of {found.pixels:,} pixels of the region")]
    if not has_map(measurement):
        return tuple(rows)
    rows += [
        (name, f"{value:.2f} nm", of)
        for name, value, of in (
            ("mean", found.mean_nm, "of the claimed area" + _plus_u(found.u_mean_nm)),
            ("median", found.median_nm, "half of the area is thinner"),
            ("standard deviation", found.sd_nm, "over the pixels, their noise included"),
            ("without noise", found.sd_noise_corrected_nm, "what is left of it when the noise is taken off"),
            ("shared u", measurement.u_common_nm, "standard uncertainty that all pixels have in common"),
        )
        if value is not None
    ]
    judged = judged_formula(measurement)
    value = measurement.nonuniformity_percent.get(judged)
    if value is not None:
        rows.append(("nonuniformity", f"{value:.3g} %", f"{judged}, over the sites"))
    return tuple(rows)


def judged_formula(measurement: Measurement) -> str:
    """The formula that the verdict's nonuniformity is by, or else the one that is usual."""
    checks = () if measurement.verdict is None else measurement.verdict.checks
    named = [check.name[len(JUDGED) : -1] for check in checks if check.name.startswith(JUDGED)]
    return named[0] if named else USUAL_FORMULA


def formula_rows(measurement: Measurement) -> tuple[tuple[str, str], ...]:
    """Every definition of the sites' spread with its value."""
    return tuple(
        (name, f"{value:.4g} {FORMULAS[name].unit if name in FORMULAS else '%'}")
        for name, value in measurement.nonuniformity_percent.items()
        if value is not None
    )


def _plus_u(u_nm: float | None) -> str:
    return "" if u_nm is None else f", u {u_nm:.2g} nm"


def next_steps(measurement: Measurement, rows: tuple[FlagRow, ...]) -> tuple[str, ...]:
    """What to do now: from the verdict first, then from the flags that cover most."""
    raised = sorted((row for row in rows if _is_worth(row)), key=lambda row: (not row.flag.blocks, -row.share))
    steps = [*_verdict_steps(measurement), *(f"{row.flag.name} on {percent(row.share)}: {row.flag.advice}" for row in raised)]
    return tuple(steps[:MOST_ADVICE]) or ("Nothing is in the way: use the numbers with their uncertainty.",)


def _is_worth(row: FlagRow) -> bool:
    if row.flag is OUTSIDE:
        return row.share > 0.995
    return row.share >= (WORTH_ADVICE if row.flag.blocks else WORTH_WEAK) and (row.flag.blocks or row.flag is WEAK)


def _verdict_steps(measurement: Measurement) -> Iterator[str]:
    word = outcome(measurement)
    if word == "not measured":
        yield "Take no thickness from this picture. Mend what is named below, and photograph or map again."
    elif word == "failed":
        yield "Hold the part. Confirm the places named under the verdict on a qualified instrument before rework or scrap."
    elif word == "not decidable":
        yield "Hold the part: this picture neither clears nor condemns it. Measure what the verdict names, or map again."
    elif word == "passed":
        yield "The tolerance is met under the rule that is named. Release it as your own quality system says."


def percent(share: float) -> str:
    """A share as a reader wants it: no 0 % for what is there, no 100 % for what is not whole."""
    if share == 0:
        return "none"
    if share < 0.0001:
        return "< 0.01 %"
    if 0.9995 <= share < 1:
        return "> 99.9 %"
    if share == 1:
        return "100 %"
    return f"{100 * share:.2f} %" if share < 0.01 else f"{100 * share:.1f} %"


def limits_of(measurement: Measurement) -> Limits | None:
    """The tolerance's limits: from the verdict's checks in nm, or else from the recipe that the verdict was made by."""
    if measurement.verdict is None:
        return None
    for check in measurement.verdict.checks:
        if check.unit == "nm" and (check.low is not None or check.high is not None):
            return Limits(low_nm=check.low, high_nm=check.high)
    return _limits_in_recipe(str(measurement.provenance.get("recipe_text", "")))


def _limits_in_recipe(text: str) -> Limits | None:
    try:
        tolerance = tomllib.loads(text).get("tolerance", {})
    except tomllib.TOMLDecodeError:
        return None
    target, plus, minus = (tolerance.get(key) for key in ("target_nm", "plus_nm", "minus_nm"))
    if target is None:
        return None
    return Limits(low_nm=None if minus is None else target - minus, high_nm=None if plus is None else target + plus)


def provenance_rows(provenance: Mapping[str, Any]) -> tuple[tuple[str, str], ...]:
    """Provenance as names and values, one level deep; the recipe's text stands on its own."""
    rows: list[tuple[str, str]] = []
    for name, value in provenance.items():
        if name == "recipe_text":
            continue
        if isinstance(value, Mapping):
            rows += [(f"{name}: {key}", _plain(item)) for key, item in value.items()]
        else:
            rows.append((str(name), _plain(value)))
    return tuple((name.replace("_", " "), value) for name, value in rows)


def _plain(value: Any) -> str:
    return f"{value:.4g}" if isinstance(value, float) else str(value)
