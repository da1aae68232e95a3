"""The shots of a recipe: read, laid over each other, and made one signal and one table."""

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from sheenmap.camera import Signal, fused_signal, moved_signal, relative_signal
from sheenmap.errors import Fault, SettingsError
from sheenmap.lookup import Table, build_table, fused_table
from sheenmap.measure.frames import Frames, read_frames
from sheenmap.optics import View
from sheenmap.recipe import Recipe, Shot
from sheenmap.wafer import Region, register, viewing_angle_deg

Angles = NDArray[np.float32]


def read_shots(photo: Path, recipe: Recipe) -> tuple[Frames, ...]:
    """The pictures of every shot, the main one first. Raises as ``read_frames`` does, and for shots of different sizes."""
    frames = [read_frames(photo if shot.photo is None else shot.photo, shot) for shot in recipe.shots]
    height, width = frames[0].picture.codes.shape[:2]
    faults = [
        Fault(
            key=f"shot[{k}].photo",
            found=f"{other.picture.codes.shape[1]} x {other.picture.codes.shape[0]} pixels",
            allowed=f"the main photograph's {width} x {height}",
        )
        for k, other in enumerate(frames[1:])
        if other.picture.codes.shape[:2] != (height, width)
    ]
    if faults:
        raise SettingsError(faults, where=recipe.path.name)
    return tuple(frames)


def angles_of(recipe: Recipe, frames: tuple[Frames, ...], region: Region) -> Angles | None:
    """The angle at every pixel, where any shot has one. Raises ``SettingsError`` when two shots have different ones."""
    places = {shot.view.camera_mm for shot in recipe.shots if shot.view.camera_mm is not None}
    paths = {shot.view.angle_photo for shot in recipe.shots if shot.view.angle_photo is not None}
    if len(places) + len(paths) > 1:
        allowed = "one angle picture or lens position for all shots, besides fixed angles"
        raise SettingsError(
            [Fault(key="shot.view", found=f"{len(places) + len(paths)} of them", allowed=allowed)], where=recipe.path.name
        )
    if places:
        return viewing_angle_deg(region, places.pop())
    return next((shot.angle_deg for shot in frames if shot.angle_deg is not None), None)


def seen_signal(recipe: Recipe, frames: tuple[Frames, ...]) -> tuple[Signal, tuple[str, ...]]:
    """One signal of all shots in register with the main one, and how they were laid over it, in words."""
    signals = [relative_signal(shot.photo, shot.blank, shot.dark) for shot in frames]
    if len(signals) == 1:
        return signals[0], ()
    words = []
    for k in range(1, len(signals)):
        found = register(frames[0].photo.values, frames[k].photo.values)
        name = recipe.shots[k].name
        if found.is_found:
            shift = found.matrix[:, 2]
            words.append(
                f"{name} laid over the main shot: moved by {shift[0]:.1f}, {shift[1]:.1f} pixels at the corner, "
                f"its edges agree with a correlation of {found.correlation:.2f}"
            )
        else:
            words.append(f"{name} and the main shot share too few edges to be laid over each other: taken as they lie")
        signals[k] = moved_signal(signals[k], found.matrix)
    return fused_signal(signals), tuple(words)


def tabulated(recipe: Recipe, region: Region, angle_deg: Angles | None) -> Table:
    """The table of all shots."""
    return fused_table([_table(recipe, shot, region, angle_deg) for shot in recipe.shots])


def _table(recipe: Recipe, shot: Shot, region: Region, angle_deg: Angles | None) -> Table:
    varies = shot.view.angle_photo is not None or shot.view.camera_mm is not None
    seen = None if angle_deg is None or not varies else angle_deg[region.inside]
    return build_table(
        recipe.stack,
        recipe.search_nm,
        light=shot.light,
        response=shot.camera.response,
        blank=shot.camera.blank_surface,
        view=View(angle_deg=shot.view.angle_deg.value, aperture=shot.view.aperture, polarisation=shot.view.polarisation),
        angle_range_deg=None if seen is None else (float(seen.min()), float(seen.max())),
    )
