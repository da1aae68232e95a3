"""Film to picture, by a road of its own: the reference library ``tmm`` for the light, a plain sensor for the camera.

Nothing here uses the program's optics, lookup or camera: what the demonstration finds is checked against a second
calculation. Only the catalogue's curves are shared. They are n - ik; ``tmm`` wants n + ik, so they are conjugated here.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np
import tmm
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline, RectBivariateSpline
from scipy.ndimage import gaussian_filter

from sheenmap.catalogue import camera, lamp, material
from sheenmap.spectra import parse_csv, sample

Array = NDArray[np.float64]

WAVELENGTH_NM: Array = np.arange(380.0, 781.0)
BRIGHTEST = 0.82  # of full scale: where a careful photographer puts the brightest part
FRAMES = 16  # blank and dark are means of so many


def index(name: str) -> NDArray[np.complex128]:
    """The catalogue's index as n + ik (W,)."""
    if name == "air":
        return np.ones(WAVELENGTH_NM.size, complex)
    return np.conj(np.asarray(sample(material(name), WAVELENGTH_NM, interpolation="monotone cubic"), dtype=np.complex128))


def spectra(stack: dict[str, Any], thickness_nm: Array, angle_deg: float = 0.0) -> Array:
    """Reflectance (T, W) of a recipe's stack for unpolarised light, one call of ``tmm`` per thickness and wavelength.

    A stack without layers has a single row; with ``back`` the far face is added incoherently.
    """
    names = [stack.get("medium", "air"), *(layer["material"] for layer in stack["layers"]), stack["substrate"]]
    indices = np.stack([index(name) for name in names], axis=1)
    return np.array([[_reflectance(n, d, angle_deg, w, stack) for n, w in zip(indices, WAVELENGTH_NM)] for d in thickness_nm])


def _reflectance(
    n: NDArray[np.complex128], film_nm: float, angle_deg: float, wavelength_nm: float, stack: dict[str, Any]
) -> float:
    films = [film_nm] * len(stack["layers"])
    angle = np.deg2rad(angle_deg)
    ways = ("s", "p") if angle_deg else ("s",)
    if "back" not in stack:
        depths = [np.inf, *films, np.inf]
        return float(np.mean([tmm.coh_tmm(way, n, depths, angle, wavelength_nm)["R"] for way in ways]))
    depths = [np.inf, *films, stack["back"]["thickness_mm"] * 1e6, np.inf]
    coherent = ["i", *"c" * len(films), "i", "i"]
    beyond = [*n, 1.0]
    return float(np.mean([tmm.inc_tmm(way, beyond, depths, coherent, angle, wavelength_nm)["R"] for way in ways]))


def weights(recipe: dict[str, Any]) -> Array:
    """Light times sensitivity (3, W) with the trapezoid's weights: what turns reflectance into three signals."""
    light = sample(lamp(recipe["light"]["spectrum"]), WAVELENGTH_NM)
    product: Array = light * sample(camera(recipe["camera"]["response"]), WAVELENGTH_NM)
    product[:, [0, -1]] *= 0.5
    return product


def blank_signal(recipe: dict[str, Any], reflectance_csv: str | None = None) -> Array:
    """Signal (3,) of the blank: a tile's measured curve, a bare material, or a stack."""
    surface = recipe["camera"]["blank"]["surface"]
    if reflectance_csv is not None:
        reflectance = sample(parse_csv(reflectance_csv, "surface"), WAVELENGTH_NM)
    else:
        bare = {"layers": [], "substrate": surface} if isinstance(surface, str) else surface
        reflectance = spectra(bare, np.zeros(1), recipe["view"]["angle_deg"])[0]
    signal: Array = weights(recipe) @ reflectance
    return signal


def film_signal(recipe: dict[str, Any], thickness_nm: Array, step_nm: float) -> Array:
    """Signal (H, W, 3) of a film of that thickness (H, W) seen at one angle: a table by ``tmm``, a cubic spline between."""
    nodes = np.arange(max(0.0, thickness_nm.min() - 3 * step_nm), thickness_nm.max() + 3 * step_nm, step_nm)
    table = spectra(recipe["stack"], nodes, recipe["view"]["angle_deg"]) @ weights(recipe).T
    signal: Array = CubicSpline(nodes, table)(thickness_nm)
    return signal


def oblique_signal(recipe: dict[str, Any], thickness_nm: Array, angle_deg: Array, step_nm: float) -> tuple[Array, Array]:
    """Signals (H, W, 3) of a film and of the bare substrate where the angle (H, W) changes over the picture."""
    nodes = np.arange(thickness_nm.min() - 3 * step_nm, thickness_nm.max() + 3 * step_nm, step_nm)
    angles = np.linspace(angle_deg.min() - 0.1, angle_deg.max() + 0.1, 6)
    film = np.stack([spectra(recipe["stack"], nodes, a) @ weights(recipe).T for a in angles])
    bare_stack = {"layers": [], "substrate": recipe["stack"]["substrate"]}
    bare = np.concatenate([spectra(bare_stack, np.zeros(1), a) @ weights(recipe).T for a in angles])
    seen = [RectBivariateSpline(angles, nodes, film[..., c]).ev(angle_deg, thickness_nm) for c in range(3)]
    return np.stack(seen, axis=-1), CubicSpline(angles, bare)(angle_deg)


@dataclass(frozen=True, kw_only=True)
class Sensor:
    """A camera: full well and read noise in electrons, its codes, and its black level (share of full scale)."""

    full_well_e: float
    read_noise_e: float
    bits: int = 8
    srgb: bool = False
    black: float = 0.0

    def codes(self, light: Array, rng: np.random.Generator, *, frames: int = 1) -> NDArray[Any]:
        """Codes (H, W, 3) of light (H, W, 3) given as a share of full scale; the mean of ``frames`` exposures."""
        electrons = rng.poisson(np.maximum(light, 0) * self.full_well_e * frames) / frames
        electrons = electrons + rng.normal(0, self.read_noise_e / np.sqrt(frames), light.shape)
        level = electrons / self.full_well_e + self.black
        encoded = np.clip(_srgb(level) if self.srgb else level, 0, 1)
        codes: NDArray[Any] = np.rint(encoded * (2**self.bits - 1)).astype(np.uint16 if self.bits == 16 else np.uint8)
        return codes


def _srgb(level: Array) -> Array:
    """The transfer curve of IEC 61966-2-1."""
    return np.where(level <= 0.0031308, 12.92 * level, 1.055 * np.maximum(level, 1e-9) ** (1 / 2.4) - 0.055)


@dataclass(frozen=True, kw_only=True)
class Frames:
    """What the camera wrote: the photograph, the blank and, where the camera has a black level, the dark frame."""

    photo: NDArray[Any]
    blank: NDArray[Any]
    dark: NDArray[Any] | None


def expose(part: Array, blank: Array, sensor: Sensor, rng: np.random.Generator, *, cover: Array | None = None) -> Frames:
    """Photograph a part and a blank, both signals (H, W, 3) or (3,), at one exposure with the lens's own fall-off.

    ``cover`` (H, W, 4) hides the part: red, green, blue of what lies on it (as shares of the blank) and its opacity.
    White balance is set on the blank and then left alone; 0.3 % of shading differs between the two exposures.
    """
    size = part.shape[:2]
    balanced = part / blank
    blank_level = np.broadcast_to(np.ones(3), part.shape)
    if cover is not None:
        balanced = balanced * (1 - cover[..., 3:]) + cover[..., :3] * cover[..., 3:]
    gain = (BRIGHTEST - sensor.black) / max(float(np.percentile(balanced, 99.8)), 1.0)
    fall_off = vignette(size)[..., None]
    leftover = 1 + 0.003 * smooth_field(size, rng, 0.35)[..., None]
    sharp = balanced * gain * fall_off * leftover
    photo = gaussian_filter(sharp, (0.5, 0.5, 0), mode="nearest")
    dark = sensor.codes(np.zeros(part.shape), rng, frames=FRAMES) if sensor.black else None
    return Frames(
        photo=sensor.codes(photo, rng), blank=sensor.codes(blank_level * gain * fall_off, rng, frames=FRAMES), dark=dark
    )


def vignette(size: tuple[int, int]) -> Array:
    """Fall-off (H, W) of a lens and a light box, 1 near the middle and some 0.88 in the corners."""
    y, x = grid(size)
    return 1 - 0.075 * ((x - 0.08) ** 2 + (y + 0.05) ** 2)


def grid(size: tuple[int, int]) -> tuple[Array, Array]:
    """Coordinates y, x (H, W): -1 to 1 along the longer side, so that circles stay round."""
    half = max(size) / 2
    y, x = np.mgrid[: size[0], : size[1]].astype(float)
    return (y - (size[0] - 1) / 2) / half, (x - (size[1] - 1) / 2) / half


def smooth_field(size: tuple[int, int], rng: np.random.Generator, scale: float) -> Array:
    """A random field (H, W) of mean 0 and standard deviation 1 whose features are ``scale`` of the longer side."""
    field: Array = gaussian_filter(rng.normal(size=size), scale * max(size) / 2, mode="reflect")
    spread: Array = (field - field.mean()) / field.std()
    return spread
