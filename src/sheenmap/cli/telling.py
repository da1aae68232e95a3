"""A map, and a verdict, in the few lines that a terminal wants."""

from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from sheenmap.measure import Measurement
    from sheenmap.uniformity import Verdict

USUAL_FORMULAS = ("half-range over mean", "sample sd over mean")  # the others stand in summary.json and in the report
LEAST_SHOWN = 0.00005  # share of the region: below it a flag would print as 0.00 %


def tell_map(measurement: "Measurement", folder: Path, *, as_json: bool) -> None:
    """Print what the map amounts to; the last line is the verdict, or why nothing can be claimed."""
    from sheenmap.storage import render_json, summary

    document = summary(measurement)
    click.echo(f"written to {folder}: open {folder / 'report.html'}", err=True)
    if as_json:
        click.echo(render_json(document), nl=False)
        if not measurement.is_measured:
            click.echo(measurement.sentence, err=True)
        return
    click.echo("\n".join([*_numbers(measurement), _flags_line(document["flags"])]))
    for note in measurement.notes:
        click.echo(f"note: {note}")
    for line in _closing(measurement):
        click.echo(line)


def tell_verdict(verdict: "Verdict") -> None:
    """Print each check with its reason, then the sentence."""
    width = max((len(check.name) for check in verdict.checks), default=0)
    for check in verdict.checks:
        click.echo(f"{check.name:<{width}}  {check.outcome:<13}  {check.reason}")
        for place in check.places:
            click.echo(f"{'':<{width}}  {'':<13}  look at {place}")
    click.echo(f"rule: {verdict.rule}")
    click.echo(verdict.sentence)


def columns(rows: Iterable[tuple[str, ...]]) -> list[str]:
    """Rows as lines, each column as wide as its longest entry."""
    table = list(rows)
    widths = [max(len(row[column]) for row in table) for column in range(len(table[0]))] if table else []
    return ["  ".join(f"{entry:<{width}}" for entry, width in zip(row, widths)).rstrip() for row in table]


def _numbers(measurement: "Measurement") -> list[str]:
    found = measurement.statistics
    if found.claimed == 0 or found.median_nm is None:
        return [measurement.title]
    spread = f"5 to 95 % of the area {found.percentiles['5']:.2f} to {found.percentiles['95']:.2f} nm"
    lines = [
        measurement.title,
        f"median {found.median_nm:.2f} nm, {spread}; all pixels share u = {measurement.u_common_nm:.2g} nm",
    ]
    for formula in USUAL_FORMULAS:
        if formula not in measurement.nonuniformity_percent:
            continue
        percent = measurement.nonuniformity_percent[formula]
        value = "undefined" if percent is None else f"{percent:.3g} %"
        lines.append(f"nonuniformity {value} ({formula}, over sites)")
    return lines


def _flags_line(table: dict[str, dict[str, Any]]) -> str:
    shares = {name: flag["region_fraction"] or 0.0 for name, flag in table.items()}
    raised = [f"{name} {100 * share:.2f} %" for name, share in shares.items() if share >= LEAST_SHOWN]
    return "flags, of the region: " + (", ".join(raised) or "none")


def _closing(measurement: "Measurement") -> list[str]:
    if measurement.verdict is None or not measurement.is_measured:
        return [measurement.sentence]
    return [measurement.sentence, measurement.verdict.sentence]
