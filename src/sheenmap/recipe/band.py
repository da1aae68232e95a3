"""The wavelengths that count: where lamp and camera both have power; every curve of the recipe must reach over them."""

import numpy as np

from sheenmap.errors import Fault
from sheenmap.lookup import band_nm, blank_signal
from sheenmap.optics import View
from sheenmap.recipe.curves import NamedCurve
from sheenmap.recipe.types import Shot
from sheenmap.spectra import sample

VISIBLE_NM = (400.0, 700.0)
NARROWEST_NM = 10.0  # of what lamp and camera share, where the recipe allows less than the visible
TAIL = 1e-3  # of a channel's power; reflectance held over a tail is off by a tenth at most: 1e-4, where 5e-3 is the usual doubt
DARKEST_BLANK = 1e-6  # of a perfect mirror; below, dividing by the blank makes no sense
CHANNELS = ("red", "green", "blue")
HOLDS_ENDS = "allow_extrapolation = true holds the end values"


def band_faults(shots: tuple[Shot, ...], curves: list[NamedCurve], *, holds_ends: bool) -> list[Fault]:
    """What is too narrow or too dark in any of the photographs; ``holds_ends`` is the recipe's allow_extrapolation."""
    faults, bands = [], []
    for k, shot in enumerate(shots):
        prefix = "" if k == 0 else f"shot[{k - 1}]."
        band = _band(shot, prefix, holds_ends=holds_ends)
        if isinstance(band, Fault):
            faults.append(band)
        else:
            bands.append(band)
            faults.extend(_dark_blank(shot, prefix))
    if bands and not holds_ends:
        whole = min(low for low, _ in bands), max(high for _, high in bands)
        faults.extend(_too_narrow(curve, whole) for curve in curves if not curve.spectrum.covers(*whole))
    return faults


def _band(shot: Shot, prefix: str, *, holds_ends: bool) -> tuple[float, float] | Fault:
    """Where lamp and camera have power, in nm, or why they are no pair."""
    shared = band_nm(shot.light, shot.camera.response)
    narrow = shared[1] - shared[0] < NARROWEST_NM if holds_ends else shared[0] > VISIBLE_NM[0] or shared[1] < VISIBLE_NM[1]
    if narrow:
        return _narrow(shot, prefix, holds_ends=holds_ends)
    powered = _powered_nm(shot, shared)
    if isinstance(powered, str):
        found, allowed = f"the camera's {powered} sees nothing of this light", "power in each of red, green and blue"
        return Fault(key=f"{prefix}light.spectrum", found=found, allowed=allowed)
    return powered


def _narrow(shot: Shot, prefix: str, *, holds_ends: bool) -> Fault:
    """Lamp and camera share too little; the one that ends first is named."""
    ranges = {
        f"{prefix}light.spectrum": shot.light.wavelength_nm,
        f"{prefix}camera.response": shot.camera.response.wavelength_nm,
    }
    short = [key for key, grid in ranges.items() if grid[0] > VISIBLE_NM[0] or grid[-1] < VISIBLE_NM[1]]
    found = " and ".join(f"{ranges[key][0]:g} to {ranges[key][-1]:g} nm" for key in short)
    if holds_ends:
        return Fault(key=", ".join(short), found=f"covers {found}", allowed="lamp and camera that share 10 nm or more")
    return Fault(
        key=", ".join(short),
        found=f"covers {found}",
        allowed=f"at least {VISIBLE_NM[0]:g} to {VISIBLE_NM[1]:g} nm",
        hint="where it is dark, give rows of zero",
    )


def _powered_nm(shot: Shot, shared: tuple[float, float]) -> tuple[float, float] | str:
    """Where light times response lies, but for ``TAIL`` of it at each end; or the name of a channel that sees nothing."""
    at_nm = np.linspace(*shared, max(2, round(shared[1] - shared[0]) + 1))
    power = np.cumsum(sample(shot.light, at_nm) * sample(shot.camera.response, at_nm), axis=-1)
    dark = ~(power[:, -1] > 0)
    if dark.any():
        return CHANNELS[int(np.argmax(dark))]
    shares = power / power[:, -1:]
    first, last = (shares > TAIL).argmax(axis=-1), (shares >= 1 - TAIL).argmax(axis=-1)
    return float(at_nm[first.min()]), float(at_nm[last.max()])


def _too_narrow(curve: NamedCurve, band: tuple[float, float]) -> Fault:
    grid = curve.spectrum.wavelength_nm
    return Fault(
        key=curve.key,
        found=f"covers {grid[0]:g} to {grid[-1]:g} nm",
        allowed=f"{band[0]:g} to {band[1]:g} nm, where the lamp shines and the camera sees",
        hint=HOLDS_ENDS,
    )


def _dark_blank(shot: Shot, prefix: str) -> list[Fault]:
    surface = shot.camera.blank_surface
    if surface is None:
        return []
    view = View(angle_deg=shot.view.angle_deg.value, polarisation=shot.view.polarisation)
    shares = blank_signal(surface, shot.light, shot.camera.response, view)
    shares = shares / blank_signal(None, shot.light, shot.camera.response, view)
    if np.all(shares > DARKEST_BLANK):
        return []
    found, allowed = "a surface that reflects nothing", "one that reflects light in red, green and blue"
    return [Fault(key=f"{prefix}camera.blank.surface", found=found, allowed=allowed)]
