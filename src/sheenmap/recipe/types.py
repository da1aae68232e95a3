"""What a recipe is once it is read: every name and file resolved, nothing left to fail later."""

from dataclasses import dataclass
from pathlib import Path

from sheenmap.camera import Encoding
from sheenmap.optics import Polarisation, Stack
from sheenmap.spectra import Spectrum
from sheenmap.uniformity import Tolerance
from sheenmap.wafer import RegionSpec, SiteSpec


@dataclass(frozen=True, kw_only=True)
class Quantity:
    """A value with the standard uncertainty that the recipe states for it (0: taken as exact)."""

    value: float
    u: float = 0.0


@dataclass(frozen=True, kw_only=True)
class NoiseSpec:
    """The camera's noise where the recipe gives it: electrons at full scale, read noise in electrons. None: estimated."""

    full_well_e: float | None = None
    read_noise_e: float | None = None


@dataclass(frozen=True, kw_only=True)
class CameraSetup:
    """The camera, and the pictures that go with a photograph.

    Parameters
    ----------
    response : Spectrum
        (3, W) sensitivities per watt in the order red, green, blue.
    blank_surface : Stack, Spectrum or None
        A stack without a searched layer, or a reflectance curve.
    dark_frames, stray_frames, blank_frames : tuple of Path
        Each averaged.
    level_u : float
        Relative standard uncertainty of the exposure of the photograph against the blank's.
    colour_u : float or None
        That of each channel by itself, from lamp and response; None: a usual one is assumed.
    shading_u : float or None
        Brightness left after the blank, rms; None: taken from the picture.
    """

    response: Spectrum
    encoding: Encoding
    dark_frames: tuple[Path, ...] = ()
    stray_frames: tuple[Path, ...] = ()
    blank_frames: tuple[Path, ...] = ()
    blank_surface: Stack | Spectrum | None = None
    noise: NoiseSpec = NoiseSpec()
    level_u: float = 0.0
    colour_u: float | None = None
    shading_u: float | None = None


@dataclass(frozen=True, kw_only=True)
class ViewSetup:
    """How the part is seen. ``angle_photo`` (one float a pixel, degrees) replaces ``angle_deg`` where it is given.

    ``camera_mm`` is where the lens stands over the part's middle; the angle then follows per pixel from the scale.
    """

    angle_deg: Quantity = Quantity(value=0.0)
    angle_photo: Path | None = None
    camera_mm: tuple[float, float, float] | None = None
    aperture: float = 0.0
    polarisation: Polarisation = "none"


@dataclass(frozen=True, kw_only=True)
class Shot:
    """One photograph's conditions; ``photo`` is None for the one that the command names."""

    light: Spectrum
    camera: CameraSetup
    view: ViewSetup
    photo: Path | None = None
    name: str = "main"


@dataclass(frozen=True, kw_only=True)
class Recipe:
    """A set-up, checked.

    ``shots`` has the main photograph first; [[shot]] tables follow. ``search_nm`` is the range of the searched layer and
    ``index_scale`` its index scale with the stated uncertainty. ``digest`` is the SHA-256 over the recipe's text and every
    file that it names but the pictures.
    """

    path: Path
    title: str
    text: str
    digest: str
    stack: Stack
    search_nm: tuple[float, float]
    index_scale: Quantity
    shots: tuple[Shot, ...]
    region: RegionSpec
    sites: SiteSpec | None = None
    tolerance: Tolerance | None = None
