"""What the eye gets of a film: tristimulus values over thickness, and the white it is adapted to."""

from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.catalogue import observer as observer_named
from sheenmap.charts.chart import White
from sheenmap.colour import white_point, xyz
from sheenmap.errors import Fault, SettingsError
from sheenmap.optics import Stack, View, bare_reflectance, reflectance_and_slope
from sheenmap.recipe import Shot
from sheenmap.spectra import Spectrum, sample

WAVELENGTH_STEP_NM = 1.0
WHITE_Y = 100.0
SHOWN_Y = 80.0  # of the brightest film when it is shown brightened: room above it keeps vivid colours from clipping


@dataclass(frozen=True, kw_only=True, eq=False)
class Sight:
    """What the eye gets: XYZ (T, 3) with the mirror at Y = 100; the same and its slope per nm with the white at Y = 100."""

    band_nm: tuple[float, float]
    xyz: FloatArray
    relative: FloatArray
    relative_slope: FloatArray
    white: FloatArray


def look(stack: Stack, shot: Shot, view: View, thickness_nm: FloatArray, observer: str, white: White) -> Sight:
    """The film at all thicknesses (T,), under the shot's light; ``white`` is the light or the blank."""
    eye = observer_named(observer)
    wavelength_nm = shared_wavelengths(stack, shot.light, eye)
    curves = wavelength_nm, sample(shot.light, wavelength_nm), sample(eye, wavelength_nm)
    reflected, slope = reflectance_and_slope(stack, thickness_nm, wavelength_nm, view)
    tristimulus = xyz(reflected, *curves)
    white_xyz = white_point(*curves) if white == "light" else xyz(_blank(shot, wavelength_nm, view), *curves)
    gain = WHITE_Y / white_xyz[1]
    return Sight(
        band_nm=(float(wavelength_nm[0]), float(wavelength_nm[-1])),
        xyz=tristimulus,
        relative=gain * tristimulus,
        relative_slope=gain * xyz(slope, *curves),
        white=gain * white_xyz,
    )


def view_of(shot: Shot) -> View:
    """The one angle, cone and polarisation of a shot; a map of angles is left aside."""
    return View(angle_deg=shot.view.angle_deg.value, aperture=shot.view.aperture, polarisation=shot.view.polarisation)


def thicknesses(search_nm: tuple[float, float], step_nm: float) -> FloatArray:
    """From the low end of the range in equal steps, up to the last that is inside it."""
    low_nm, high_nm = search_nm
    return np.asarray(low_nm + step_nm * np.arange(int(np.floor((high_nm - low_nm) / step_nm + 1e-9)) + 1))


def shared_wavelengths(stack: Stack, light: Spectrum, observer: Spectrum) -> FloatArray:
    """Whole nanometres (W,) that the light, the observer and all materials of the stack cover.

    Raises
    ------
    SettingsError
        They share less than two.
    """
    curves = [light, observer, stack.medium, stack.substrate, *(layer.index for layer in stack.layers)]
    curves += [layer.inclusion for layer in stack.layers if layer.inclusion is not None]
    curves += [stack.back.medium] if stack.back is not None else []
    sampled = [curve for curve in curves if curve.wavelength_nm.size > 1]
    lowest = max(sampled, key=lambda curve: curve.wavelength_nm[0])
    highest = min(sampled, key=lambda curve: curve.wavelength_nm[-1])
    low, high = np.ceil(lowest.wavelength_nm[0] - 1e-9), np.floor(highest.wavelength_nm[-1] + 1e-9)
    if high - low < WAVELENGTH_STEP_NM:
        found = f"{lowest.name!r} begins at {low:g} nm, {highest.name!r} ends at {high:g} nm"
        raise SettingsError(
            [Fault(key="stack, light", found=found, allowed="curves that share visible wavelengths")], where="chart"
        )
    return np.asarray(np.arange(low, high + WAVELENGTH_STEP_NM / 2, WAVELENGTH_STEP_NM))


def _blank(shot: Shot, wavelength_nm: FloatArray, view: View) -> FloatArray:
    surface = shot.camera.blank_surface
    if surface is None:
        return np.ones(wavelength_nm.size)
    return bare_reflectance(surface, wavelength_nm, view) if isinstance(surface, Stack) else sample(surface, wavelength_nm)


def exposure_for(relative: FloatArray) -> float:
    """The factor that lifts the brightest of the colours (..., 3) to ``SHOWN_Y``."""
    return float(SHOWN_Y / max(float(relative[..., 1].max()), 1e-6))
