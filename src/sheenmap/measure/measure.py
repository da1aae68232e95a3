"""The main road: photograph, linear signal, table, posterior, map, verdict. Each line is a call into one room."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from sheenmap.camera import relative_signal
from sheenmap.inversion import Doubts, Inversion, invert, list_candidates
from sheenmap.lookup import Table, build_table
from sheenmap.measure.assemble import assemble
from sheenmap.measure.frames import Frames, read_frames
from sheenmap.measure.refuse import refuse_what_is_not_supported
from sheenmap.measure.result import Measurement
from sheenmap.optics import View
from sheenmap.recipe import Recipe
from sheenmap.wafer import Region, locate, viewing_angle_deg

Progress = Callable[[int, int], None]
STAGES = 6
ASSUMED_COLOUR_U = 0.005  # of each channel, where the recipe does not say how well lamp and camera are known
ASSUMED_SHADING_U = 0.003  # left after a good blank


@dataclass(frozen=True, kw_only=True, eq=False)
class Road:
    """Everything that the road passes: the pictures, the region, the table, and what the inverse makes of them."""

    frames: Frames
    region: Region
    angle_deg: NDArray[np.float32] | None
    table: Table
    inversion: Inversion


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
    measurement = assemble(recipe, road.frames, road.region, road.angle_deg, road.table, road.inversion, listed)
    _tell(progress, STAGES)
    return measurement


def travel(photo: Path, recipe: Recipe, *, progress: Progress | None = None) -> Road:
    """Go the road up to the inverse; ``measure`` and ``explain`` start from here."""
    refuse_what_is_not_supported(recipe)
    shot = recipe.shots[0]
    frames = read_frames(photo, shot)
    _tell(progress, 1)
    region = locate(recipe.region, frames.photo.values)
    angle_deg = _angles(recipe, frames, region)
    signal = relative_signal(frames.photo, frames.blank, frames.dark)
    _tell(progress, 2)
    table = build_table(
        recipe.stack, recipe.search_nm, light=shot.light, response=shot.camera.response, blank=shot.camera.blank_surface,
        view=View(angle_deg=shot.view.angle_deg.value, aperture=shot.view.aperture, polarisation=shot.view.polarisation),
        angle_range_deg=None if angle_deg is None else _range(angle_deg, region),
    )  # fmt: skip
    _tell(progress, 3)
    inversion = invert(
        signal,
        table,
        region.inside,
        angle_deg=angle_deg,
        doubts=doubts_of(recipe),
        shading_is_known=shot.camera.shading_u is not None,
    )
    _tell(progress, 5)
    return Road(frames=frames, region=region, angle_deg=angle_deg, table=table, inversion=inversion)


def doubts_of(recipe: Recipe) -> Doubts:
    """The doubts that the recipe states, and the usual ones where it is silent."""
    camera = recipe.shots[0].camera
    return Doubts(
        shading_u=ASSUMED_SHADING_U if camera.shading_u is None else camera.shading_u,
        level_u=camera.level_u,
        colour_u=ASSUMED_COLOUR_U if camera.colour_u is None else camera.colour_u,
    )


def _angles(recipe: Recipe, frames: Frames, region: Region) -> NDArray[np.float32] | None:
    camera_mm = recipe.shots[0].view.camera_mm
    return frames.angle_deg if camera_mm is None else viewing_angle_deg(region, camera_mm)


def _range(angle_deg: NDArray[np.float32], region: Region) -> tuple[float, float]:
    seen = angle_deg[region.inside]
    return float(seen.min()), float(seen.max())


def _tell(progress: Progress | None, done: int) -> None:
    if progress is not None:
        progress(done, STAGES)
