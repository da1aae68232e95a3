"""The demonstration's folder is whole, and its renderer, which goes through tmm, agrees with the program's optics."""

import importlib.util
import sys
import tomllib
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest
from numpy.testing import assert_allclose

from sheenmap.camera import Encoding, decode
from sheenmap.catalogue import material
from sheenmap.optics import Back, Layer, Stack, View, bare_reflectance, reflectance
from sheenmap.pictures import read_picture, read_plane
from sheenmap.recipe import read_recipe
from sheenmap.spectra import Spectrum, constant, sample

IMAGES = Path(__file__).resolve().parents[3] / "demo_images"
SCENES = sorted(path.parent.name for path in IMAGES.glob("*/recipe.toml"))
MEBIBYTE = 2**20
# tmm and the program round alike at 1e-15 per operation; a wrong term in either is far above this.
AGREEMENT = 1e-9


@pytest.fixture(scope="module")
def rendering() -> ModuleType:
    spec = importlib.util.spec_from_file_location("demo_rendering", IMAGES / "rendering.py")
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # dataclasses look their module up there
    spec.loader.exec_module(module)
    return module


def photo_of(scene: str) -> Path:
    return next(path for path in (IMAGES / scene).iterdir() if path.stem == "photo")


def known_of(scene: str) -> np.ndarray:
    return np.loadtxt(IMAGES / scene / "known.csv", delimiter=",", skiprows=1)


def test_the_scenes_are_those_that_the_readme_speaks_of():
    assert SCENES == ["coated-glass", "nitride-phone", "oxide-steps", "oxide-wafer", "resist-oblique", "soap-film"]


@pytest.mark.parametrize("scene", SCENES)
def test_a_recipe_reads_without_a_fault(scene):
    assert read_recipe(IMAGES / scene / "recipe.toml").title


@pytest.mark.parametrize("scene", SCENES)
def test_every_picture_has_the_photographs_size(scene):
    size = read_picture(photo_of(scene)).codes.shape
    assert all(read_picture(path).codes.shape == size for path in (IMAGES / scene).glob("*.png"))
    assert all(read_plane(path).shape == size[:2] for path in (IMAGES / scene).glob("*.tif"))


@pytest.mark.parametrize("scene", SCENES)
def test_no_photograph_is_overexposed_or_wastes_half_of_the_scale(scene):
    encoding = Encoding(kind=tomllib.loads((IMAGES / scene / "recipe.toml").read_text())["camera"]["encoding"])
    for path in (photo_of(scene), IMAGES / scene / "blank.png"):
        picture = read_picture(path)
        assert decode(encoding, picture.codes.astype(float), picture.full_scale).max() < 1
    both = [read_picture(path).codes / read_picture(path).full_scale for path in (photo_of(scene), IMAGES / scene / "blank.png")]
    assert max(decode(encoding, codes, 1.0).max() for codes in both) > 0.5


@pytest.mark.parametrize("scene", SCENES)
def test_known_pixels_lie_in_the_picture_and_in_the_searched_range(scene):
    height, width, _ = read_picture(photo_of(scene)).codes.shape
    x, y, thickness_nm = known_of(scene).T
    low, high = read_recipe(IMAGES / scene / "recipe.toml").search_nm
    assert len(x) >= 100
    assert x.min() >= 0 and x.max() < width and y.min() >= 0 and y.max() < height
    assert low < thickness_nm.min() and thickness_nm.max() < high


@pytest.mark.parametrize("scene", SCENES)
def test_a_scene_stays_below_two_megabytes(scene):
    assert sum(path.stat().st_size for path in (IMAGES / scene).iterdir()) < 2 * MEBIBYTE


def test_the_whole_folder_stays_below_six_megabytes():
    assert sum(path.stat().st_size for path in IMAGES.rglob("*") if path.is_file()) < 6 * MEBIBYTE


def smooth(name: str, wavelength_nm: np.ndarray) -> Spectrum:
    """The material read as the renderer reads it, so that only the physics is compared."""
    values = sample(material(name), wavelength_nm, interpolation="monotone cubic")
    return Spectrum(wavelength_nm=wavelength_nm, values=np.asarray(values, complex))


def our_stack(stack: dict, wavelength_nm: np.ndarray) -> Stack:
    substrate = constant(1.0) if stack["substrate"] == "air" else smooth(stack["substrate"], wavelength_nm)
    layers = tuple(Layer(index=smooth(layer["material"], wavelength_nm), thickness_nm=None) for layer in stack["layers"])
    back = Back(medium=constant(1.0), thickness_mm=stack["back"]["thickness_mm"]) if "back" in stack else None
    return Stack(medium=constant(1.0), layers=layers, substrate=substrate, back=back)


@pytest.mark.parametrize("scene", SCENES)
def test_the_renderers_films_agree_with_the_programs_optics(scene, rendering, monkeypatch):
    monkeypatch.setattr(rendering, "WAVELENGTH_NM", rendering.WAVELENGTH_NM[::8])
    wavelength_nm = rendering.WAVELENGTH_NM
    stack = tomllib.loads((IMAGES / scene / "recipe.toml").read_text())["stack"]
    thickness_nm = np.array([1.0, 137.0, 691.0])
    angle_deg = 31.0 if scene == "resist-oblique" else 0.0
    theirs = rendering.spectra(stack, thickness_nm, angle_deg)
    ours = reflectance(our_stack(stack, wavelength_nm), thickness_nm, wavelength_nm, View(angle_deg=angle_deg))
    assert_allclose(ours, theirs, rtol=0, atol=AGREEMENT)


@pytest.mark.parametrize("stack", [
    {"layers": [], "substrate": "Si"},
    {"layers": [], "substrate": "soda-lime glass", "back": {"medium": "air", "thickness_mm": 1.0}},
])  # fmt: skip
def test_the_renderers_blanks_agree_with_the_programs_optics(stack, rendering):
    wavelength_nm = rendering.WAVELENGTH_NM
    ours = bare_reflectance(our_stack(stack, wavelength_nm), wavelength_nm, View(angle_deg=0.0))
    assert_allclose(ours, rendering.spectra(stack, np.zeros(1))[0], rtol=0, atol=AGREEMENT)


def test_a_photograph_is_what_the_renderer_makes_of_its_known_thickness(rendering):
    # The share of the blank's signal at known pixels, by tmm alone, against what the files hold.
    scene = "oxide-wafer"
    recipe = tomllib.loads((IMAGES / scene / "recipe.toml").read_text())
    x, y, thickness_nm = known_of(scene)[:20].T
    photo, blank, dark = (read_picture(IMAGES / scene / f"{name}.png").codes.astype(float) for name in ("photo", "blank", "dark"))
    row, column = y.astype(int), x.astype(int)
    seen = (photo - dark)[row, column] / (blank - dark)[row, column]
    foreseen = rendering.spectra(recipe["stack"], thickness_nm) @ rendering.weights(recipe).T / rendering.blank_signal(recipe)
    # Noise of a pixel is about 1 % of the blank; the mean over 20 pixels and the leftover shading of 0.3 % stay within 1.5 %.
    assert_allclose(seen.mean(axis=0), foreseen.mean(axis=0), rtol=0, atol=0.015)
