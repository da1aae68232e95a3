"""Make the demonstration's photographs again: ``python demo_images/make.py [SCENE ...]`` (needs the package ``tmm``).

The scenario is invented: a small coating bench, the Alder Bench, and a university's cleanroom. Each scene's set-up is read
from the recipe beside it. Written are photo, blank, dark where there is one, and ``known.csv``: the true thickness of some
150 pixels away from dirt and edges. The same seed gives the same pictures, byte for byte on one version of the libraries.
"""

import sys
import tomllib
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import cv2
import numpy as np
import tifffile
from numpy.typing import NDArray
from rendering import Array, Frames, Sensor, blank_signal, expose, film_signal, grid, oblique_signal, smooth_field
from scipy.ndimage import binary_dilation, gaussian_filter

HERE = Path(__file__).resolve().parent
KNOWN_PIXELS = 150
DUST_GREY = (0.95, 0.9, 0.8)  # of the blank: lint and skin flakes scatter a warm grey
SCRATCH_GREY = (0.22, 0.24, 0.3)


@dataclass(frozen=True, kw_only=True)
class Scene:
    """What a scene gives: its frames, the true thickness (H, W) in nm, and where it may be checked (H, W) bool."""

    frames: Frames
    thickness_nm: Array
    checkable: NDArray[np.bool_]
    photo_name: str = "photo.png"
    angle_deg: Array | None = None


def oxide_wafer(recipe: dict[str, Any], rng: np.random.Generator) -> Scene:
    """A 200-mm wafer seen whole, notch down, on a dark bench: a bowl, a tilt, a few grains of dust."""
    size = (480, 480)
    y, x = grid(size)
    radius = 0.9
    u, v = (x - 0.012) / radius, (y + 0.008) / radius
    thickness_nm = 503.2 - 6.5 * (u**2 + v**2) + 2.2 * u - 1.4 * v + 1.1 * np.cos(3 * np.arctan2(v, u)) * (u**2 + v**2)
    on_wafer = _disc_with_notch(u, v, pixel=2 / max(size) / radius)
    dust = dirt(size, rng, grains=9, within=np.hypot(u, v) < 0.9)
    bench = 0.016 * (1 + 0.25 * smooth_field(size, rng, 0.25) + 0.2 * gaussian_filter(rng.normal(size=size), (0.5, 12)) * 4)
    colour = np.where(dust[..., None] > 0, np.array(DUST_GREY), np.maximum(bench, 0.004)[..., None] * (0.9, 1.0, 1.15))
    cover = np.dstack([colour, np.maximum(dust, 1 - on_wafer)])
    frames = expose(
        film_signal(recipe, thickness_nm, 2.0), blank_signal(recipe),
        Sensor(full_well_e=16000, read_noise_e=6, black=5 / 255), rng, cover=cover,
    )  # fmt: skip
    return Scene(frames=frames, thickness_nm=thickness_nm, checkable=(np.hypot(u, v) < 0.96) & clear_of(dust))


def _disc_with_notch(u: Array, v: Array, pixel: float) -> Array:
    """Share (H, W) of each pixel that lies on the wafer; a notch 1.2 mm deep of 90 degrees stands at the bottom."""
    disc = np.clip((1 - np.hypot(u, v)) / pixel + 0.5, 0, 1)
    notch = np.clip((v - 0.988 - np.abs(u)) / pixel + 0.5, 0, 1)
    return disc * (1 - notch)


def nitride_phone(recipe: dict[str, Any], rng: np.random.Generator) -> Scene:
    """A test piece of nitride, thicker to one side, with a scratch; a JPEG with halved colour resolution."""
    size = (400, 600)
    y, x = grid(size)
    thickness_nm = 105 + 21 * x - 9 * y - 6 * x * y + 2.0 * smooth_field(size, rng, 0.2)
    marks = scratch(size, [(90, 320), (250, 240), (415, 120)], width=2)
    dust = dirt(size, rng, grains=5)
    cover = np.dstack([np.where(dust[..., None] > 0, DUST_GREY, SCRATCH_GREY), np.maximum(dust, 0.85 * marks)])
    frames = expose(
        film_signal(recipe, thickness_nm, 2.0), blank_signal(recipe),
        Sensor(full_well_e=14000, read_noise_e=7, srgb=True), rng, cover=cover,
    )  # fmt: skip
    return Scene(frames=frames, thickness_nm=thickness_nm, checkable=clear_of(dust + marks), photo_name="photo.jpg")


def soap_film(recipe: dict[str, Any], rng: np.random.Generator) -> Scene:
    """A film in a wire frame that drains: 40 nm at the top, 700 nm at the bottom, swirls drawn down on the way."""
    size = (420, 480)
    y, x = grid(size)
    height = (y - y.min()) / np.ptp(y)
    swirl_y, swirl_x = (gaussian_filter(rng.normal(size=size), (34, 22), mode="reflect") for _ in range(2))
    plumes = gaussian_filter(rng.normal(size=size), (46, 11), mode="reflect")
    drawn = height + 0.055 * swirl_y / swirl_y.std() + 0.02 * np.sin(9 * x + 1.6 * swirl_x / swirl_x.std()) * height
    drawn = drawn + 0.03 * plumes / plumes.std() * height * (1.2 - height)
    thickness_nm = np.clip(40 + 660 * np.clip(gaussian_filter(drawn, 2), 0, 1.05) ** 1.25, 40, 700)
    inside = (np.abs(x) < 0.90) & (np.abs(y) < 0.78)
    wire = np.maximum(np.abs(x) - 0.895, np.abs(y) - 0.77)
    rod = 0.35 * np.exp(-(((wire - 0.045) / 0.018) ** 2)) + 0.01
    cover = np.dstack([np.repeat(rod[..., None], 3, axis=2), np.clip(wire / 0.004 + 0.5, 0, 1)])
    tile = (HERE / "soap-film" / "tile.csv").read_text(encoding="utf-8")
    frames = expose(
        film_signal(recipe, thickness_nm, 3.0), blank_signal(recipe, tile),
        Sensor(full_well_e=18000, read_noise_e=5, srgb=True), rng, cover=cover,
    )  # fmt: skip
    return Scene(frames=frames, thickness_nm=thickness_nm, checkable=inside & ~binary_dilation(~inside, iterations=12))


def resist_oblique(recipe: dict[str, Any], rng: np.random.Generator) -> Scene:
    """Spun resist at 27 to 33 degrees: a wedge, faint striations, dust with comets, a scratch; 16 bits."""
    size = (300, 400)
    y, x = grid(size)
    striations = 2.5 * np.sin(52 * np.arctan2(y + 1.6, x + 1.9)) * (0.6 + 0.4 * y)
    thickness_nm = 900 + 150 * x + 40 * y + 18 * np.sin(2.5 * x + 1) + striations
    angle_deg = np.round(30 + 3 * x + 0.15 * y * x, 4)
    dust = dirt(size, rng, grains=8)
    marks = scratch(size, [(300, 20), (330, 110), (372, 190)], width=1)
    comets = 25 * gaussian_filter(np.roll(dust, (5, 6), axis=(0, 1)), 4)
    film, bare = oblique_signal(recipe, thickness_nm + comets, angle_deg, 4.0)
    cover = np.dstack([np.where(dust[..., None] > 0, DUST_GREY, SCRATCH_GREY), np.maximum(dust, 0.9 * marks)])
    frames = expose(film, bare, Sensor(full_well_e=15000, read_noise_e=5, bits=16, black=1024 / 65535), rng, cover=cover)
    clean = clear_of(dust + marks, margin=24)
    return Scene(frames=frames, thickness_nm=thickness_nm + comets, checkable=clean, angle_deg=angle_deg)


def oxide_steps(recipe: dict[str, Any], rng: np.random.Generator) -> Scene:
    """Ten treads from 60 to 700 nm, edges a little aslant, each tread a few nanometres out of level."""
    size = (300, 500)
    y, x = grid(size)
    treads_nm = np.array([60, 118, 185, 250, 322, 400, 468, 545, 622, 700.0])
    along = (x + 1 + 0.03 * y) / 2 * treads_nm.size
    tread = np.clip(along.astype(int), 0, treads_nm.size - 1)
    thickness_nm = treads_nm[tread] * (1 - 0.004 * y) + 1.5 * (along - tread - 0.5)
    dust = dirt(size, rng, grains=6)
    edges = np.abs(along - np.rint(along)) * size[1] / treads_nm.size < 6
    cover = np.dstack([np.broadcast_to(np.array(DUST_GREY), (*size, 3)), dust])
    frames = expose(
        film_signal(recipe, thickness_nm, 3.0), blank_signal(recipe),
        Sensor(full_well_e=20000, read_noise_e=6, black=5 / 255), rng, cover=cover,
    )  # fmt: skip
    return Scene(frames=frames, thickness_nm=thickness_nm, checkable=clear_of(dust) & ~edges)


def coated_glass(recipe: dict[str, Any], rng: np.random.Generator) -> Scene:
    """Hafnia that grows from 90 to 230 nm along a glass slide, whose far face reflects as well."""
    size = (280, 440)
    y, x = grid(size)
    thickness_nm = 160 + 66 * x + 8 * y**2 + 3 * smooth_field(size, rng, 0.3)
    dust = dirt(size, rng, grains=5)
    cover = np.dstack([np.broadcast_to(np.array(DUST_GREY), (*size, 3)), dust])
    frames = expose(
        film_signal(recipe, thickness_nm, 3.0), blank_signal(recipe),
        Sensor(full_well_e=16000, read_noise_e=6, black=5 / 255), rng, cover=cover,
    )  # fmt: skip
    return Scene(frames=frames, thickness_nm=thickness_nm, checkable=clear_of(dust))


def dirt(size: tuple[int, int], rng: np.random.Generator, *, grains: int, within: NDArray[np.bool_] | None = None) -> Array:
    """Opacity (H, W) of dust: grains of one to four pixels, each a little oblong."""
    rows, columns = np.nonzero(np.ones(size, bool) if within is None else within)
    y, x = np.mgrid[: size[0], : size[1]].astype(float)
    opacity = np.zeros(size)
    for chosen in rng.integers(0, rows.size, grains):
        turn, long, short = rng.uniform(0, np.pi), rng.uniform(1.5, 4.0), rng.uniform(1.0, 2.2)
        dx, dy = x - columns[chosen], y - rows[chosen]
        along, across = dx * np.cos(turn) + dy * np.sin(turn), dy * np.cos(turn) - dx * np.sin(turn)
        opacity = np.maximum(opacity, 0.95 * (np.hypot(along / long, across / short) < 1))
    return opacity


def scratch(size: tuple[int, int], corners: list[tuple[int, int]], *, width: int) -> Array:
    """Opacity (H, W) of a scratch through ``corners`` (x, y in pixels)."""
    canvas = np.zeros(size, np.uint8)
    cv2.polylines(canvas, [np.array(corners, np.int32)], False, 255, thickness=width, lineType=cv2.LINE_AA)
    return canvas / 255.0


def clear_of(marks: Array, margin: int = 8) -> NDArray[np.bool_]:
    """Where (H, W) no mark is within ``margin`` pixels."""
    clear: NDArray[np.bool_] = ~binary_dilation(marks > 0.01, iterations=margin)
    return clear


SCENES: dict[str, Callable[[dict[str, Any], np.random.Generator], Scene]] = {
    "oxide-wafer": oxide_wafer,
    "nitride-phone": nitride_phone,
    "soap-film": soap_film,
    "resist-oblique": resist_oblique,
    "oxide-steps": oxide_steps,
    "coated-glass": coated_glass,
}


def write(scene: Scene, folder: Path, rng: np.random.Generator) -> None:
    """The scene's files; the JPEG is of quality 92 with colour at half resolution, as phones write it."""
    _write_picture(folder / scene.photo_name, scene.frames.photo)
    _write_picture(folder / "blank.png", scene.frames.blank)
    if scene.frames.dark is not None:
        _write_picture(folder / "dark.png", scene.frames.dark)
    if scene.angle_deg is not None:
        tifffile.imwrite(folder / "angle.tif", scene.angle_deg.astype(np.float32), compression="zlib", metadata=None)
    rows, columns = np.nonzero(scene.checkable)
    chosen = np.sort(rng.choice(rows.size, KNOWN_PIXELS, replace=False))
    lines = [f"{columns[i]},{rows[i]},{scene.thickness_nm[rows[i], columns[i]]:.3f}" for i in chosen]
    (folder / "known.csv").write_text("\n".join(["x_px,y_px,thickness_nm", *lines]) + "\n", encoding="utf-8", newline="\n")


def _write_picture(path: Path, codes: NDArray[Any]) -> None:
    options = [cv2.IMWRITE_PNG_COMPRESSION, 9]
    if path.suffix == ".jpg":
        half_colour = cv2.IMWRITE_JPEG_SAMPLING_FACTOR_420
        options = [cv2.IMWRITE_JPEG_QUALITY, 92, cv2.IMWRITE_JPEG_SAMPLING_FACTOR, half_colour]
    if not cv2.imwrite(str(path), codes[..., ::-1], options):
        raise OSError(f"{path} cannot be written")


def main(names: list[str]) -> None:
    """Make the scenes of that name, all when none is named."""
    for number, (name, make) in enumerate(SCENES.items()):
        if names and name not in names:
            continue
        recipe = tomllib.loads((HERE / name / "recipe.toml").read_text(encoding="utf-8"))
        rng = np.random.default_rng([2718, number])
        write(make(recipe, rng), HERE / name, rng)
        print(name)


if __name__ == "__main__":
    main(sys.argv[1:])
