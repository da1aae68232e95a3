"""``sheenmap chart`` and ``sheenmap table``: colour against thickness, as a page and as numbers."""

from pathlib import Path
from typing import Literal

import click

from sheenmap.cli.failures import Command
from sheenmap.cli.options import file_option, recipe_option, verbose_option

STEP_HELP = "Distance of the thicknesses."
OBSERVERS = ("cie-1931", "cie-1964")


@click.command("chart", cls=Command)
@recipe_option()
@file_option("FILE", "The chart: .svg, .png, .pdf or .html.")
@click.option("--step", "step_nm", type=float, default=1.0, show_default=True, metavar="NM", help=STEP_HELP)
@click.option("--observer", type=click.Choice(OBSERVERS), default="cie-1931", show_default=True, help="The eye.")
@click.option(
    "--white", type=click.Choice(("light", "blank")), default="light", show_default=True, help="What the eye takes for white."
)
@click.option(
    "--alike", "repeat_within", type=float, default=3.0, show_default=True, metavar="DE00", help="Colours this near look alike."
)
@click.option("--paper", type=click.Choice(("a4", "letter")), default="a4", show_default=True, help="Size of the page.")
@verbose_option
def chart_command(
    recipe_path: Path,
    path: Path,
    step_nm: float,
    observer: str,
    white: Literal["light", "blank"],
    repeat_within: float,
    paper: Literal["a4", "letter"],
    verbose: bool,
) -> None:
    """Draw a reference chart of the film's colour against its thickness.

    Screens and printers shift colours: hold the chart against a known piece before you trust it.
    """
    from sheenmap.charts import chart_data, write_chart
    from sheenmap.recipe import read_recipe

    chart = chart_data(read_recipe(recipe_path), step_nm=step_nm, observer=observer, white=white, repeat_within=repeat_within)
    write_chart(chart, path, paper=paper)
    click.echo(f"written to {path}", err=True)


@click.command("table", cls=Command)
@recipe_option()
@file_option("FILE.csv", "The table: .csv, or .json for all that is known of each thickness.")
@click.option("--step", "step_nm", type=float, default=1.0, show_default=True, metavar="NM", help=STEP_HELP)
@click.option("--observer", type=click.Choice(OBSERVERS), default="cie-1931", show_default=True, help="The eye.")
@verbose_option
def table_command(recipe_path: Path, path: Path, step_nm: float, observer: str, verbose: bool) -> None:
    """Write the film's colour against its thickness as numbers.

    Columns: thickness_nm, X, Y, Z, L, a, b, srgb_r, srgb_g, srgb_b, red, green, blue. XYZ is under the recipe's light with the
    perfect mirror at Y = 100, Lab against that light, sRGB 0 to 1 adapted to it and clipped, the camera's signal relative to
    the blank's.
    """
    from sheenmap.charts import chart_data, write_table
    from sheenmap.recipe import read_recipe

    write_table(chart_data(read_recipe(recipe_path), step_nm=step_nm, observer=observer), path)
    click.echo(f"written to {path}", err=True)
