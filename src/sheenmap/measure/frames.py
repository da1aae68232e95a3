"""The pictures of a shot, read and held against each other before any work is done."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from sheenmap.camera import Frame, Noise, Rounding, linear_codes, linear_frame, stated_noise
from sheenmap.errors import Fault, SettingsError
from sheenmap.pictures import Averaged, Codes, Picture, average_frames, read_picture, read_plane
from sheenmap.recipe import CameraSetup, Shot

SMALLEST = 16  # pixels; below, neither noise nor neighbours can be told
MOST_CLIPPED = 0.2  # share of a blank at full scale above which it is no reference


@dataclass(frozen=True, kw_only=True, eq=False)
class Frames:
    """A shot's pictures.

    Linear ``photo`` and ``blank``, ``dark`` (H, W, 3) or None, the codes of both, ``angle_deg`` (H, W) or None.
    """

    picture: Picture
    photo: Frame
    blank: Frame
    dark: NDArray[np.float32] | None
    blank_codes: Codes
    dark_codes: Codes | None
    angle_deg: NDArray[np.float32] | None
    digests: dict[str, str]
    notes: tuple[str, ...]


def read_frames(photo_path: Path, shot: Shot) -> Frames:
    """Read a shot's pictures.

    Raises
    ------
    PictureError
        One that cannot be read.
    SettingsError
        Pictures that do not belong together, all faults at once.
    """
    setup = shot.camera
    if not setup.blank_frames or setup.blank_surface is None:
        raise SettingsError([Fault(key="camera.blank", found="nothing", allowed="a photograph of a bare surface that is known")])
    picture = read_picture(photo_path)
    blank = average_frames(setup.blank_frames)
    dark_paths = setup.stray_frames or setup.dark_frames
    dark = average_frames(dark_paths) if dark_paths else None
    angle_deg = None if shot.view.angle_photo is None else read_plane(shot.view.angle_photo)
    faults = [*_size_faults(picture, blank, dark, angle_deg), *_level_faults(picture, blank, dark)]
    if faults:
        raise SettingsError(faults, where=str(photo_path))
    return Frames(
        picture=picture,
        photo=linear_frame(picture.codes, setup.encoding, picture.full_scale, noise=_stated(setup, picture.full_scale)),
        blank=linear_frame(blank.codes, setup.encoding, blank.full_scale, frames=blank.frames),
        dark=None if dark is None else linear_codes(dark.codes, setup.encoding, dark.full_scale),
        blank_codes=blank.codes,
        dark_codes=None if dark is None else dark.codes,
        angle_deg=angle_deg,
        digests={photo_path.name: picture.digest} | blank.digests | ({} if dark is None else dark.digests),
        notes=picture.notes,
    )


def _stated(setup: CameraSetup, full_scale: float) -> Noise | None:
    """The noise that the recipe gives, or None where it is to be estimated."""
    noise = setup.noise
    if noise.full_well_e is None or noise.read_noise_e is None:
        return None
    rounding = Rounding(encoding=setup.encoding, full_scale=full_scale) if full_scale > 1 else None
    return stated_noise(noise.full_well_e, noise.read_noise_e, rounding=rounding)


def _size_faults(picture: Picture, blank: Averaged, dark: Averaged | None, angle_deg: NDArray[np.float32] | None) -> list[Fault]:
    height, width = picture.codes.shape[:2]
    faults = []
    if min(height, width) < SMALLEST:
        faults.append(Fault(key="PHOTO", found=f"{width} x {height} pixels", allowed=f"at least {SMALLEST} x {SMALLEST}"))
    others = {
        "camera.blank.photo": blank.codes,
        "camera.dark": None if dark is None else dark.codes,
        "view.angle_deg.photo": angle_deg,
    }
    for key, other in others.items():
        if other is not None and other.shape[:2] != (height, width):
            found = f"{other.shape[1]} x {other.shape[0]} pixels"
            faults.append(Fault(key=key, found=found, allowed=f"the photograph's {width} x {height}"))
    for key, frame in (("camera.blank.photo", blank), ("camera.dark", dark)):
        if frame is not None and frame.full_scale != picture.full_scale:
            found = f"codes up to {frame.full_scale:g}"
            faults.append(Fault(key=key, found=found, allowed=f"the photograph's depth, up to {picture.full_scale:g}"))
    if angle_deg is not None and not 0 <= float(angle_deg.min()) <= float(angle_deg.max()) < 90:
        found = f"{float(angle_deg.min()):g} to {float(angle_deg.max()):g} degrees"
        faults.append(Fault(key="view.angle_deg.photo", found=found, allowed="0 up to, not including, 90"))
    return faults


def _level_faults(picture: Picture, blank: Averaged, dark: Averaged | None) -> list[Fault]:
    faults = []
    clipped = float(np.mean(np.any(blank.codes >= blank.full_scale, axis=-1)))
    if clipped > MOST_CLIPPED:
        found = f"{100 * clipped:.0f} % of its pixels at full scale"
        faults.append(Fault(key="camera.blank.photo", found=found, allowed=f"{100 * MOST_CLIPPED:.0f} %", hint="expose less"))
    if dark is not None:
        levels = {
            name: float(np.mean(codes))
            for name, codes in (("photo", picture.codes), ("blank", blank.codes), ("dark", dark.codes))
        }
        brighter = [name for name in ("photo", "blank") if levels["dark"] >= levels[name]]
        if brighter:
            found = f"mean code {levels['dark']:.1f}, not below the {' and the '.join(brighter)}'s {levels[brighter[0]]:.1f}"
            faults.append(Fault(key="camera.dark", found=found, allowed="a picture with the lens cap on"))
    return faults
