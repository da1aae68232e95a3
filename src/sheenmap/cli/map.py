"""``sheenmap map``: one photograph."""

from pathlib import Path
from typing import TYPE_CHECKING

import click

from sheenmap.cli.failures import Command, set_up_logging
from sheenmap.cli.options import PATH, Place, folder_option, json_option, recipe_option, verbose_option
from sheenmap.cli.progress import progress_bar
from sheenmap.cli.statuses import EPILOG, NOT_DECIDABLE, OF_OUTCOME
from sheenmap.cli.telling import tell_map

if TYPE_CHECKING:
    from sheenmap.measure import Measurement
    from sheenmap.recipe import Recipe


@click.command("map", cls=Command, epilog=EPILOG)
@click.argument("photo", type=PATH)
@recipe_option()
@folder_option(required=False, text="Folder for the map; made when it is missing. Needed unless --explain is given.")
@click.option("--candidates", "with_candidates", is_flag=True, help="Also write candidates.tif: the other thicknesses that fit.")
@click.option("--compress", is_flag=True, help="Deflate the TIFF files: smaller, and slower to write.")
@click.option("--explain", "place", type=Place(), help="Print why this pixel is as it is, and write nothing.")
@json_option
@verbose_option
@click.pass_context
def map_command(
    ctx: click.Context,
    photo: Path,
    recipe_path: Path,
    folder: Path | None,
    with_candidates: bool,
    compress: bool,
    place: tuple[int, int] | None,
    as_json: bool,
    verbose: bool,
) -> None:
    """Map the film thickness in PHOTO.

    Writes thickness.tif, sigma.tif, flags.tif, summary.json and report.html into the folder given by --out.
    """
    from sheenmap.recipe import read_recipe
    from sheenmap.storage import check_folder

    set_up_logging(verbose=verbose)
    if folder is None and place is None:
        raise click.UsageError(
            "Missing option '--out' / '-o': the folder for the map (or --explain X,Y, which writes nothing).", ctx
        )
    if folder is not None:
        check_folder(folder)
    recipe = read_recipe(recipe_path)
    if place is not None:
        _explain(photo, recipe, place, as_json=as_json)
    if folder is not None:
        measurement = _map(photo, recipe, folder, with_candidates=with_candidates, compress=compress)
        if place is None:
            tell_map(measurement, folder, as_json=as_json)
        ctx.exit(_status(measurement))


def _map(photo: Path, recipe: "Recipe", folder: Path, *, with_candidates: bool, compress: bool) -> "Measurement":
    from sheenmap.measure import measure
    from sheenmap.report import write_report
    from sheenmap.storage import write_measurement

    with progress_bar(f"mapping {photo.name}") as progress:
        measurement = measure(photo, recipe, progress=progress, with_candidates=with_candidates)
    write_measurement(measurement, folder, compress=compress)
    write_report(measurement, folder / "report.html")
    return measurement


def _explain(photo: Path, recipe: "Recipe", place: tuple[int, int], *, as_json: bool) -> None:
    from sheenmap.measure import explain
    from sheenmap.storage import render_json, to_plain

    explanation = explain(photo, recipe, *place)
    click.echo(render_json(to_plain(explanation.as_dict())) if as_json else explanation.text.rstrip(), nl=not as_json)


def _status(measurement: "Measurement") -> int:
    if not measurement.is_measured:
        return NOT_DECIDABLE
    return OF_OUTCOME[measurement.verdict.outcome] if measurement.verdict is not None else 0
