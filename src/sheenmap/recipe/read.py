"""A recipe's TOML read into types, every fault reported at once."""

import tomllib
from pathlib import Path
from typing import Any

from sheenmap.errors import Fault, RecipeError
from sheenmap.lookup import band_nm
from sheenmap.recipe.files import VISIBLE_NM, Folder, coverage_faults
from sheenmap.recipe.part import read_region, read_sites, read_tolerance
from sheenmap.recipe.reader import Reader
from sheenmap.recipe.shot import Around, read_shot
from sheenmap.recipe.stack import ReadStack, read_stack
from sheenmap.recipe.types import Recipe, Shot

LARGEST_BYTES = 1_000_000


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
    folder = Folder(path.parent)
    title = reader.text("title", path.stem)
    holds_ends = reader.flag("allow_extrapolation")
    stack = _stack(reader, folder)
    around = Around(folder=folder, stack=stack.stack, substrate_text=_substrate_text(reader), curves=list(stack.curves))
    main = read_shot(reader, around, None)
    shots = (main, *_further_shots(reader, around, main))
    region = read_region(reader.table_of("region"), folder)
    sites = read_sites(reader.table_of("sites"), folder, region)
    tolerance = read_tolerance(reader.table_of("tolerance"), has_region="region" in reader.table)
    reader.finish()
    faults.extend(_band_faults(shots, around, holds_ends=holds_ends))
    if faults or stack.stack is None or stack.search_nm is None:
        raise RecipeError(faults, where=path.name)
    return Recipe(
        path=path, title=title, text=text, digest=folder.digest(text), stack=stack.stack, search_nm=stack.search_nm,
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
    except FileNotFoundError:
        raise refuse("no such file", "a recipe's TOML file") from None
    except UnicodeDecodeError:
        raise refuse("no UTF-8 text", "a recipe in UTF-8") from None
    except OSError as fault:
        raise refuse(fault.strerror or "cannot be read", "a file that can be read") from None


def _parsed(path: Path, text: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError) as fault:
        raise RecipeError([Fault(key="TOML", found=str(fault) or "nested too deeply", allowed="")], where=path.name) from None


def _stack(reader: Reader, folder: Folder) -> ReadStack:
    inner = reader.table_of("stack")
    if inner is None:
        if "stack" not in reader.table:
            reader.fault("stack", "nothing", "a table with medium, layers and substrate")
        inner = Reader({}, "stack", [])
    return read_stack(inner, folder)


def _substrate_text(reader: Reader) -> object:
    stack = reader.table.get("stack")
    return stack.get("substrate") if isinstance(stack, dict) else None


def _further_shots(reader: Reader, around: Around, main: Shot) -> list[Shot]:
    shots = []
    for k, inner in enumerate(reader.tables_of("shot"), start=2):
        text = inner.text("photo", None)
        if text is None and "photo" not in inner.table:
            inner.fault("photo", "nothing", "the picture's file")
        photo = None if text is None else around.folder.path(inner, "photo", text)
        name = inner.text("name", f"shot {k}")
        shot = read_shot(inner, around, main)
        inner.finish()
        shots.append(Shot(light=shot.light, camera=shot.camera, view=shot.view, photo=photo, name=name))
    return shots


def _band_faults(shots: tuple[Shot, ...], around: Around, *, holds_ends: bool) -> list[Fault]:
    """Curves that end within the band that lamp and camera span; the band itself must hold the visible."""
    if holds_ends:
        return []
    faults: list[Fault] = []
    for shot in shots:
        band = band_nm(shot.light, shot.camera.response)
        if band[0] > VISIBLE_NM[0] or band[1] < VISIBLE_NM[1]:
            found = f"they share {band[0]:g} to {band[1]:g} nm"
            allowed = f"at least {VISIBLE_NM[0]:g} to {VISIBLE_NM[1]:g} nm"
            faults.append(Fault(key="light.spectrum, camera.response", found=found, allowed=allowed))
            continue
        optical = [(key, spectrum) for key, spectrum in around.curves if not key.endswith((".spectrum", ".response"))]
        faults.extend(coverage_faults(optical, band))
    return list(dict.fromkeys(faults))
