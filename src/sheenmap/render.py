"""The photograph that a thickness map would give under a recipe's set-up."""

from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.camera import encode, linear_codes
from sheenmap.errors import Fault, SettingsError
from sheenmap.lookup import Table, build_table, evaluate
from sheenmap.optics import View
from sheenmap.pictures import average_frames, read_plane
from sheenmap.recipe import CameraSetup, Recipe

USUAL_FULL_WELL_E, USUAL_READ_NOISE_E = 12_000.0, 5.0  # a small mosaic sensor (common practice)
BRIGHTEST = 0.85  # of full scale, where no blank says how bright the photograph is
CHUNK_ROWS = 256
DEPTHS = {8: (np.uint8, 255.0), 16: (np.uint16, 65535.0)}


@dataclass(frozen=True, kw_only=True, eq=False)
class Rendered:
    """Codes (H, W, 3) of the photograph and of a blank that goes with it, and their full scale."""

    photo: NDArray[np.uint8] | NDArray[np.uint16]
    blank: NDArray[np.uint8] | NDArray[np.uint16]
    full_scale: float


def render(
    thickness_nm: NDArray[np.floating], recipe: Recipe, rng: np.random.Generator | None = None, *, bits: int = 8
) -> Rendered:
    """Photograph of a film of ``thickness_nm`` (H, W), with noise when ``rng`` is given.

    Where the recipe's blank has the map's size, its light and shading are taken; else the light is even and the brightest
    colour of the map stands at 85 % of full scale. Where the map is NaN the picture is black.

    Raises
    ------
    SettingsError
        Thickness outside what the recipe searches, no thickness at all, or an angle picture of another size.
    """
    known = np.isfinite(thickness_nm)
    _check(thickness_nm, known, recipe)
    table, angle_deg = _table(recipe, thickness_nm.shape)
    ratio = np.zeros((*thickness_nm.shape, 3), np.float32)
    for start in range(0, len(ratio), CHUNK_ROWS):
        rows = np.s_[start : start + CHUNK_ROWS]
        here = known[rows]
        angles = None if angle_deg is None else angle_deg[rows][here]
        ratio[rows][here] = evaluate(table, thickness_nm[rows][here].astype(float), angles)[0]
    light = _light(recipe.shots[0].camera, ratio)
    kind, full_scale = DEPTHS[bits]
    photo, blank = ratio * light, np.broadcast_to(light, ratio.shape)
    if rng is not None:
        photo, blank = (_noisy(picture, recipe.shots[0].camera, rng) for picture in (photo, blank))
    codes = [_codes(picture, recipe.shots[0].camera, full_scale).astype(kind) for picture in (photo, blank)]
    return Rendered(photo=codes[0], blank=codes[1], full_scale=full_scale)


def _check(thickness_nm: NDArray[np.floating], known: NDArray[np.bool_], recipe: Recipe) -> None:
    if not known.any():
        raise SettingsError([Fault(key="THICKNESS", found="no finite thickness", allowed="a map in nm")], where="render")
    low, high = float(thickness_nm[known].min()), float(thickness_nm[known].max())
    if low < recipe.search_nm[0] or high > recipe.search_nm[1]:
        found = f"{low:g} to {high:g} nm"
        allowed = f"{recipe.search_nm[0]:g} to {recipe.search_nm[1]:g} nm, as search_nm says"
        raise SettingsError([Fault(key="THICKNESS", found=found, allowed=allowed)], where="render")


def _table(recipe: Recipe, shape: tuple[int, ...]) -> tuple[Table, NDArray[np.float32] | None]:
    shot = recipe.shots[0]
    angle_deg = None if shot.view.angle_photo is None else read_plane(shot.view.angle_photo)
    if angle_deg is not None and angle_deg.shape != shape:
        found = f"{angle_deg.shape[1]} x {angle_deg.shape[0]} pixels"
        raise SettingsError([Fault(key="view.angle_deg.photo", found=found, allowed=f"{shape[1]} x {shape[0]}")], where="render")
    table = build_table(
        recipe.stack,
        recipe.search_nm,
        light=shot.light,
        response=shot.camera.response,
        blank=shot.camera.blank_surface,
        view=View(angle_deg=shot.view.angle_deg.value, aperture=shot.view.aperture, polarisation=shot.view.polarisation),
        angle_range_deg=None if angle_deg is None else (float(angle_deg.min()), float(angle_deg.max())),
    )
    return table, angle_deg


def _light(camera: CameraSetup, ratio: NDArray[np.float32]) -> NDArray[np.float32]:
    """Linear level of the blank, (H, W, 3) or (3,)."""
    if camera.blank_frames:
        frames = average_frames(camera.blank_frames)
        light = linear_codes(frames.codes, camera.encoding, frames.full_scale)
        if light.shape == ratio.shape:
            return np.asarray(cv2.GaussianBlur(light, (0, 0), 8.0), dtype=np.float32)
        return np.asarray(light.mean(axis=(0, 1)), dtype=np.float32)
    return np.full(3, BRIGHTEST / max(1.0, float(np.quantile(ratio, 0.999))), np.float32)


def _noisy(picture: NDArray[np.floating], camera: CameraSetup, rng: np.random.Generator) -> NDArray[np.floating]:
    full_well = camera.noise.full_well_e or USUAL_FULL_WELL_E
    read = USUAL_READ_NOISE_E if camera.noise.read_noise_e is None else camera.noise.read_noise_e
    electrons = rng.poisson(np.maximum(picture, 0) * full_well) + rng.normal(0.0, read, picture.shape)
    return np.asarray(electrons / full_well)


def _codes(picture: NDArray[np.floating], camera: CameraSetup, full_scale: float) -> NDArray[np.floating]:
    codes = encode(camera.encoding, np.clip(picture, 0.0, 1.0).astype(float), full_scale)
    return np.clip(np.rint(codes), 0, full_scale)
