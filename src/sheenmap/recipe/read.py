"""A recipe's TOML read into types, every fault reported at once."""

import re
import tomllib
from dataclasses import replace
from pathlib import Path
from typing import Any

from sheenmap.errors import Fault, RecipeError
from sheenmap.recipe.around import Around
from sheenmap.recipe.band import band_faults
from sheenmap.recipe.files import Folder
from sheenmap.recipe.reader import Reader
from sheenmap.recipe.region import read_region
from sheenmap.recipe.shot import read_shots
from sheenmap.recipe.sites import read_sites
from sheenmap.recipe.stack import ReadStack, read_stack
from sheenmap.recipe.tolerance import read_tolerance
from sheenmap.recipe.types import Recipe, Shot
from sheenmap.wafer import RegionSpec

LARGEST_BYTES = 1_000_000
TOML_LINE = re.compile(r" \(at (line \d+), column \d+\)$")


def read_recipe(path: Path | str) -> Recipe:
    """Read a recipe and every curve that it names.

    Raises
    ------
    RecipeError
        Holding every fault: unknown keys, impossible values, names and files that do not exist, curves that are no curves
        or too narrow. Pictures are looked for, not opened, but for a mask.
    """
    path = Path(path)
    text = _text(path)
    faults: list[Fault] = []
    reader = Reader(_parsed(path, text), "", faults)
    around = Around(folder=Folder(path.parent), stack=None)
    title = reader.text("title", path.stem)
    holds_ends = reader.flag("allow_extrapolation")
    stack, around = _stack(reader, around)
    shots = read_shots(reader, around)
    region = read_region(reader.table_of("region"), around.folder)
    _check_scale(reader, shots, region)
    sites = read_sites(reader.table_of("sites"), around.folder, region)
    tolerance = read_tolerance(reader.table_of("tolerance"), has_region="region" in reader.table)
    reader.finish()
    faults.extend(band_faults(shots, around.curves, holds_ends=holds_ends))
    if faults or stack.stack is None or stack.search_nm is None:
        raise RecipeError(faults, where=path.name)
    return Recipe(
        path=path, title=title, text=text, digest=around.folder.digest(text), stack=stack.stack, search_nm=stack.search_nm,
        index_scale=stack.index_scale, shots=shots, region=region, sites=sites, tolerance=tolerance,
    )  # fmt: skip


def _text(path: Path) -> str:
    def refuse(found: str, allowed: str) -> RecipeError:
        return RecipeError([Fault(key="--recipe", found=found, allowed=allowed)], where=str(path))

    if path.is_dir():
        raise refuse("a folder", "a recipe's TOML file")
    try:
        if path.stat().st_size > LARGEST_BYTES:
            raise refuse(f"{path.stat().st_size / 1e6:.0f} MB", "a recipe of at most 1 MB")
        return path.read_bytes().decode("utf-8-sig")
    except (FileNotFoundError, NotADirectoryError):
        raise refuse("no such file", "a recipe's TOML file") from None
    except UnicodeDecodeError:
        raise refuse("no UTF-8 text", "a recipe in UTF-8") from None
    except OSError as fault:
        raise refuse(fault.strerror or "cannot be read", "a file that can be read") from None


def _parsed(path: Path, text: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except RecursionError:
        fault = Fault(key="TOML", found="tables or lists nested hundreds deep", allowed="a recipe's few levels")
    except ValueError as why:  # TOMLDecodeError, and numbers of more digits than Python reads
        line = TOML_LINE.search(str(why))
        fault = Fault(key=line[1] if line else "TOML", found=TOML_LINE.sub("", str(why)), allowed="TOML 1.0")
    raise RecipeError([fault], where=path.name)


def _stack(reader: Reader, around: Around) -> tuple[ReadStack, Around]:
    """The part's stack, and what is around from then on."""
    inner = reader.table_of("stack")
    if inner is None:
        if "stack" not in reader.table:
            reader.fault("stack", "nothing", "a table with medium, layers and substrate")
        return ReadStack(stack=None), around
    stack = read_stack(inner, around.folder, around.curves)
    medium, substrate = inner.table.get("medium", "air"), inner.table.get("substrate")
    return stack, replace(around, stack=stack.stack, medium_as_written=medium, substrate_as_written=substrate)


def _check_scale(reader: Reader, shots: tuple[Shot, ...], region: RegionSpec) -> None:
    """A lens that stands somewhere in millimetres needs the picture's scale."""
    if region.diameter_mm is None and region.width_mm is None and any(shot.view.camera_mm is not None for shot in shots):
        found, allowed = "camera_mm without a scale", "region.diameter_mm of a disc, or region.width_mm, with it"
        reader.faults.append(Fault(key="view.camera_mm", found=found, allowed=allowed))
