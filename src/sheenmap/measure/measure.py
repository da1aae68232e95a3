"""The main road: photograph, linear signal, table, posterior, map, verdict. Each line is a call into one room."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from sheenmap.inversion import Doubts, Inversion, invert, list_candidates
from sheenmap.lookup import Table
from sheenmap.measure.assemble import assemble
from sheenmap.measure.frames import Frames
from sheenmap.measure.result import Measurement
from sheenmap.measure.shots import angles_of, read_shots, seen_signal, tabulated
from sheenmap.recipe import Recipe
from sheenmap.wafer import Region, locate

Progress = Callable[[int, int], None]
STAGES = 6
ASSUMED_COLOUR_U = 0.005  # of each channel, where the recipe does not say how well lamp and camera are known
ASSUMED_SHADING_U = 0.003  # left after a good blank


@dataclass(frozen=True, kw_only=True, eq=False)
class Road:
    """Everything that the road passes: the pictures of each shot, the region, the table, and what the inverse makes of them."""

    shots: tuple[Frames, ...]
    region: Region
    angle_deg: NDArray[np.float32] | None
    table: Table
    inversion: Inversion
    words: tuple[str, ...]


def measure(photo: Path, recipe: Recipe, *, progress: Progress | None = None, with_candidates: bool = False) -> Measurement:
    """Film thickness, its uncertainty and flags at every pixel of a photograph.

    Parameters
    ----------
    photo : Path
        An 8- or 16-bit PNG, JPEG or TIFF, or a float TIFF.
    recipe : Recipe
        The set-up.
    progress : callable or None
        Told (done, total) after each stage.
    with_candidates : bool
        Also list the other thicknesses that fit each pixel.

    Raises
    ------
    PictureError
        A picture that cannot be read.
    SettingsError
        Pictures, region or sites that do not belong together.
    """
    road = travel(Path(photo), recipe, progress=progress)
    listed = None
    if with_candidates:
        listed = list_candidates(road.table, road.inversion, road.angle_deg)
    measurement = assemble(recipe, road.shots, road.region, road.angle_deg, road.table, road.inversion, listed, words=road.words)
    _tell(progress, STAGES)
    return measurement


def travel(photo: Path, recipe: Recipe, *, progress: Progress | None = None) -> Road:
    """Go the road up to the inverse; ``measure`` and ``explain`` start from here."""
    shots = read_shots(photo, recipe)
    _tell(progress, 1)
    region = locate(recipe.region, shots[0].photo.values)
    angle_deg = angles_of(recipe, shots, region)
    signal, words = seen_signal(recipe, shots)
    _tell(progress, 2)
    table = tabulated(recipe, region, angle_deg)
    _tell(progress, 3)
    is_known = recipe.shots[0].camera.shading_u is not None
    inversion = invert(signal, table, region.inside, angle_deg=angle_deg, doubts=doubts_of(recipe), shading_is_known=is_known)
    _tell(progress, 5)
    return Road(shots=shots, region=region, angle_deg=angle_deg, table=table, inversion=inversion, words=words)


def doubts_of(recipe: Recipe) -> Doubts:
    """The doubts that the recipe states, and the usual ones where it is silent."""
    camera = recipe.shots[0].camera
    return Doubts(
        shading_u=ASSUMED_SHADING_U if camera.shading_u is None else camera.shading_u,
        level_u=camera.level_u,
        colour_u=ASSUMED_COLOUR_U if camera.colour_u is None else camera.colour_u,
    )


def _tell(progress: Progress | None, done: int) -> None:
    if progress is not None:
        progress(done, STAGES)
