"""Why a picture fits a recipe nowhere: what else would explain it, ranked by how much.

Each part of the recipe that could be wrong is changed by itself, and the share of the film's blocks that then fit is told. It
is a hint with its evidence and never applied.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from sheenmap import catalogue
from sheenmap.arrays import BoolArray
from sheenmap.camera import Encoding, Signal, linear_codes, linear_frame, relative_signal
from sheenmap.inversion import Inversion, share_that_fits
from sheenmap.lookup import Table
from sheenmap.measure.frames import Frames
from sheenmap.measure.shots import tabulated
from sheenmap.recipe import Recipe, Shot
from sheenmap.wafer import Region

FILMS = ("SiO2", "Si3N4", "Al2O3", "TiO2", "HfO2", "PMMA")
LAMPS = ("LED-B1", "LED-B3", "LED-B5", "D65", "A", "FL2", "FL11")
ENCODINGS = (Encoding(kind="linear"), Encoding(kind="srgb"), Encoding(kind="power", gamma=1.8))
FREE_LEVEL_U = 0.3
CROP = 512  # pixels; a piece of the picture is enough to tell
GAIN_WORTH_SAYING = 0.15
LISTED = 4


@dataclass(frozen=True, kw_only=True)
class Cause:
    """What would explain the picture better, and the share of the film that it would."""

    what: str
    share: float


def likely_causes(
    recipe: Recipe, shots: tuple[Frames, ...], region: Region, table: Table, inversion: Inversion
) -> tuple[Cause, ...]:
    """The causes that explain most, best first; only of a recipe of one shot at one angle, none otherwise."""
    if len(shots) > 1 or table.angle_deg.size > 1:
        return ()
    crop = _crop(region.inside)
    signal, inside, doubts = _cropped(inversion.signal, crop), region.inside[crop], inversion.doubts
    now = share_that_fits(signal, inside, table, doubts)
    level = share_that_fits(signal, inside, table, replace(doubts, level_u=FREE_LEVEL_U))
    found = [Cause(what="the level: exposure or blank unlike the photograph's", share=level)]
    for what, changed in (*_other_films(recipe), *_other_lamps(recipe)):
        found.append(Cause(what=what, share=share_that_fits(signal, inside, tabulated(changed, region, None), doubts)))
    found += [
        Cause(what=f'encoding "{encoding.kind}"', share=share_that_fits(other, inside, table, doubts))
        for encoding, other in _other_encodings(recipe.shots[0], shots[0], crop)
    ]
    worth = [cause for cause in found if cause.share > now + GAIN_WORTH_SAYING]
    return tuple(sorted(worth, key=lambda cause: -cause.share)[:LISTED])


def told(causes: tuple[Cause, ...]) -> str:
    """The causes in a few words."""
    if not causes:
        return "nothing that was tried explains it: check material, lamp, encoding and blank"
    return "it would fit better with " + "; ".join(f"{cause.what} ({100 * cause.share:.0f} % of the film)" for cause in causes)


def _crop(inside: BoolArray) -> tuple[slice, slice]:
    rows, columns = np.flatnonzero(inside.any(axis=1)), np.flatnonzero(inside.any(axis=0))
    middle = [int((line[0] + line[-1]) // 2) if line.size else 0 for line in (rows, columns)]
    starts = [max(0, place - CROP // 2) for place in middle]
    return slice(starts[0], starts[0] + CROP), slice(starts[1], starts[1] + CROP)


def _cropped(signal: Signal, crop: tuple[slice, slice]) -> Signal:
    return replace(signal, values=signal.values[crop], variance=signal.variance[crop], flags=signal.flags[crop])


def _other_films(recipe: Recipe) -> Iterator[tuple[str, Recipe]]:
    for name in FILMS:
        layers = [
            replace(layer, index=catalogue.material(name), index_scale=1.0) if layer.thickness_nm is None else layer
            for layer in recipe.stack.layers
        ]
        yield f"film {name}", replace(recipe, stack=replace(recipe.stack, layers=tuple(layers)))


def _other_lamps(recipe: Recipe) -> Iterator[tuple[str, Recipe]]:
    for name in LAMPS:
        yield f"lamp {name}", replace(recipe, shots=(replace(recipe.shots[0], light=catalogue.lamp(name)),))


def _other_encodings(shot: Shot, frames: Frames, crop: tuple[slice, slice]) -> Iterator[tuple[Encoding, Signal]]:
    full_scale = frames.picture.full_scale
    for encoding in ENCODINGS:
        if encoding.kind != shot.camera.encoding.kind:
            photo = linear_frame(np.ascontiguousarray(frames.picture.codes[crop]), encoding, full_scale)
            blank = linear_frame(np.ascontiguousarray(frames.blank_codes[crop]), encoding, full_scale)
            dark = None if frames.dark_codes is None else linear_codes(frames.dark_codes[crop], encoding, full_scale)
            yield encoding, relative_signal(photo, blank, dark)
