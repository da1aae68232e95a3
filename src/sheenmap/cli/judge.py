"""``sheenmap judge``: a finished map against tolerances."""

from pathlib import Path

import click

from sheenmap.cli.failures import Command, set_up_logging
from sheenmap.cli.options import PATH, json_option, recipe_option, verbose_option
from sheenmap.cli.statuses import EPILOG, OF_OUTCOME
from sheenmap.cli.telling import tell_verdict


@click.command("judge", cls=Command, epilog=EPILOG)
@click.argument("folder", metavar="DIR", type=PATH)
@recipe_option()
@json_option
@verbose_option
@click.pass_context
def judge_command(ctx: click.Context, folder: Path, recipe_path: Path, as_json: bool, verbose: bool) -> None:
    """Judge the finished map in DIR against the [tolerance] of a recipe.

    The verdict is printed, and stands in summary.json under "verdict".
    """
    from sheenmap.measure import judge_map, read_recipe_sites
    from sheenmap.recipe import read_recipe
    from sheenmap.storage import read_map, render_json, renew_summary, to_plain

    set_up_logging(verbose=verbose)
    recipe, done = read_recipe(recipe_path), read_map(folder)
    planes = (done.thickness_nm, done.sigma_nm, done.flags)
    spread = float(done.document.get("provenance", {}).get("noise_spread", 1.0))
    readings = read_recipe_sites(recipe, done.region, *planes, done.u_common_nm, spread=spread)
    verdict = judge_map(recipe, done.region, *planes, readings, done.statistics, done.u_common_nm)
    renew_summary(folder, done.document | {"sites": readings, "verdict": verdict})
    if as_json:
        click.echo(render_json(to_plain(verdict)), nl=False)
    else:
        tell_verdict(verdict)
    ctx.exit(OF_OUTCOME[verdict.outcome])
