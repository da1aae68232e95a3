"""``sheenmap render``: the photograph that a thickness map would give."""

from pathlib import Path

import click

from sheenmap.cli.failures import Command
from sheenmap.cli.options import PATH, file_option, recipe_option, verbose_option


@click.command("render", cls=Command)
@click.argument("thickness", metavar="THICKNESS.tif", type=PATH)
@recipe_option()
@file_option("PHOTO.png", "The photograph, as PNG.")
@click.option("--blank", "blank_path", type=PATH, metavar="BLANK.png", help="Also write the blank that goes with it.")
@click.option("--noise-seed", type=click.IntRange(min=0), metavar="N", help="Add the camera's noise, drawn from this seed.")
@click.option("--bits", type=click.Choice(("8", "16")), default="8", show_default=True, help="Bits of a channel.")
@verbose_option
def render_command(
    thickness: Path, recipe_path: Path, path: Path, blank_path: Path | None, noise_seed: int | None, bits: str, verbose: bool
) -> None:
    """Render the photograph that the map in THICKNESS.tif (float, nm) would give under a recipe."""
    import numpy as np

    from sheenmap.pictures import read_plane
    from sheenmap.recipe import read_recipe
    from sheenmap.render import render
    from sheenmap.storage import write_png

    recipe = read_recipe(recipe_path)
    rng = None if noise_seed is None else np.random.default_rng(noise_seed)
    rendered = render(read_plane(thickness, finite=False), recipe, rng, bits=int(bits))
    write_png(path, rendered.photo)
    click.echo(f"written to {path}", err=True)
    if blank_path is not None:
        write_png(blank_path, rendered.blank)
        click.echo(f"written to {blank_path}", err=True)
