"""``sheenmap demo``: the whole journey on the demo images."""

from pathlib import Path
from typing import TYPE_CHECKING

import click

from sheenmap.cli.failures import Command
from sheenmap.cli.options import PATH, verbose_option
from sheenmap.cli.telling import columns
from sheenmap.errors import Fault, SettingsError

if TYPE_CHECKING:
    from sheenmap.measure import Measurement

KNOWN = "known.csv"


@click.command("demo", cls=Command)
@click.option(
    "--images", type=PATH, default=Path("demo_images"), show_default=True, metavar="DIR", help="Folder of the demo images."
)
@click.option(
    "--out", "-o", "folder", type=PATH, default=Path("demo_out"), show_default=True, metavar="DIR", help="Folder for the maps."
)
@verbose_option
def demo_command(images: Path, folder: Path, verbose: bool) -> None:
    """Map every demo image, hold the maps against the known thickness, and say where to look."""
    from sheenmap.storage import check_folder

    recipes = sorted(images.glob("*/recipe.toml"))
    if not recipes:
        allowed = "the folder demo_images of a checkout, with a recipe.toml in each of its folders"
        raise SettingsError([Fault(key="--images", found=str(images), allowed=allowed)], where="demo")
    check_folder(folder)
    rows: list[tuple[str, ...]] = [("image", "mean nm", "claimed", "known points", "rms error nm", "within 95 %", "verdict")]
    for recipe_path in recipes:
        click.echo(f"mapping {recipe_path.parent.name} ...", err=True)
        rows.append(_row(recipe_path, folder / recipe_path.parent.name))
    click.echo("\n".join(columns(rows)))
    click.echo(f"Look at the report of each: {folder / recipes[0].parent.name / 'report.html'} and its neighbours.")


def _row(recipe_path: Path, folder: Path) -> tuple[str, ...]:
    from sheenmap.measure import measure
    from sheenmap.recipe import read_recipe
    from sheenmap.report import write_report
    from sheenmap.storage import write_measurement

    photo = next(path for path in sorted(recipe_path.parent.iterdir()) if path.stem == "photo")
    measurement = measure(photo, read_recipe(recipe_path))
    write_measurement(measurement, folder)
    write_report(measurement, folder / "report.html")
    found = measurement.statistics
    mean = "-" if found.mean_nm is None else f"{found.mean_nm:.1f}"
    verdict = "-" if measurement.verdict is None else measurement.verdict.outcome
    share = f"{100 * found.claimed / max(found.pixels, 1):.1f} %"
    return (recipe_path.parent.name, mean, share, *_against_known(measurement, recipe_path.parent / KNOWN), verdict)


def _against_known(measurement: "Measurement", path: Path) -> tuple[str, str, str]:
    """Claimed known points, rms error, and the share within 1.96 standard uncertainties."""
    import numpy as np

    if not path.is_file():
        return "-", "-", "-"
    known = np.loadtxt(path, delimiter=",", skiprows=1, ndmin=2)
    row, column = known[:, 1].astype(int), known[:, 0].astype(int)
    error = measurement.thickness_nm[row, column] - known[:, 2]
    u = np.hypot(measurement.sigma_nm[row, column], measurement.u_common_nm)
    claimed = np.isfinite(error)
    if not claimed.any():
        return f"0 of {error.size}", "-", "-"
    rms = float(np.sqrt(np.mean(error[claimed] ** 2)))
    within = 100 * float(np.mean(np.abs(error[claimed]) <= 1.96 * u[claimed]))
    return f"{int(claimed.sum())} of {error.size}", f"{rms:.2f}", f"{within:.0f} %"
