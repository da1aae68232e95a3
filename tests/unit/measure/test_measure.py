"""The main road on picture files: what is claimed, what is said, what is refused."""

from dataclasses import replace

import cv2
import numpy as np
import pytest
from scipy.ndimage import shift as shifted

from sheenmap import catalogue
from sheenmap.errors import PictureError, SettingsError
from sheenmap.flags import AMBIGUOUS, BY_CONTINUITY, OFF_CURVE, has, is_blocked
from sheenmap.measure import explain, measure
from sheenmap.recipe import read_recipe
from sheenmap.render import render

RECIPE = """
title = "a test"
[stack]
layers = [{{ material = "{film}", search_nm = [0, {high}] }}]
substrate = "Si"
[light]
spectrum = "{lamp}"
[camera]
response = "generic"
encoding = "{encoding}"
blank = {{ photo = "{prefix}blank.png", surface = "Si" }}
[region]
shape = "frame"
width_mm = 30
{more}
"""


def write_recipe(folder, *, film="SiO2", lamp="LED-B3", encoding="linear", high=700, prefix="", more="", name="recipe.toml"):
    path = folder / name
    path.write_text(RECIPE.format(film=film, lamp=lamp, encoding=encoding, high=high, prefix=prefix, more=more))
    return path


def shoot(folder, truth, *, seed=1, prefix="", lamp="LED-B3", encoding="linear", high=700):
    """Write a photograph of a film and its blank, and return the photograph's path."""
    cv2.imwrite(str(folder / f"{prefix}blank.png"), np.full((4, 4, 3), 200, np.uint8))
    path = write_recipe(folder, lamp=lamp, encoding=encoding, high=high, prefix=prefix, name="shoot.toml")
    recipe = read_recipe(path)
    camera = replace(recipe.shots[0].camera, blank_frames=())
    recipe = replace(recipe, shots=(replace(recipe.shots[0], camera=camera),))
    taken = render(truth, recipe, np.random.default_rng(seed))
    for name, codes in (("photo", taken.photo), ("blank", taken.blank)):
        cv2.imwrite(str(folder / f"{prefix}{name}.png"), codes[..., ::-1])
    path.unlink()
    return folder / f"{prefix}photo.png"


def hills(shape=(120, 150), low=180.0, high=330.0):
    rows, columns = np.indices(shape)
    return low + (high - low) * (0.5 + 0.25 * np.sin(columns / 25) + 0.25 * np.cos(rows / 20))


@pytest.mark.parametrize("encoding", ["linear", "srgb", "power 2.2"])
def test_a_rendered_film_is_read_within_what_is_claimed(tmp_path, encoding):
    truth = hills()
    photo = shoot(tmp_path, truth, encoding=encoding)
    found = measure(photo, read_recipe(write_recipe(tmp_path, encoding=encoding)))
    claimed = np.isfinite(found.thickness_nm)
    error = (found.thickness_nm - truth)[claimed]
    u = np.hypot(found.sigma_nm[claimed], found.u_common_nm)
    assert claimed.mean() > 0.99
    assert np.mean(np.abs(error) <= 1.96 * u) > 0.93
    assert found.statistics.mean_nm == pytest.approx(truth.mean(), abs=4 * found.u_common_nm + 0.2)


def test_the_wrong_material_is_not_measured_and_says_why(tmp_path):
    photo = shoot(tmp_path, hills())
    found = measure(photo, read_recipe(write_recipe(tmp_path, film="TiO2")))
    assert not found.is_measured
    assert np.isfinite(found.thickness_nm).mean() < 0.01
    assert found.sentence.startswith("not measured")
    assert "film SiO2" in found.sentence  # what was photographed is among the causes that are told
    assert has(found.flags, OFF_CURVE).mean() > 0.9


def test_a_second_lamp_settles_an_island_that_one_cannot(tmp_path):
    truth = np.full((96, 96), 1292.0)  # looks like 983 nm under this lamp
    for prefix, lamp, seed in (("", "LED-B3", 1), ("second-", "FL11", 2)):
        shoot(tmp_path, truth, prefix=prefix, lamp=lamp, seed=seed, high=1500)
    alone = measure(tmp_path / "photo.png", read_recipe(write_recipe(tmp_path, high=1500)))
    more = """
[[shot]]
photo = "second-photo.png"
light = { spectrum = "FL11" }
camera = { blank = { photo = "second-blank.png" } }
"""
    both = measure(tmp_path / "photo.png", read_recipe(write_recipe(tmp_path, high=1500, more=more)))
    assert has(alone.flags, AMBIGUOUS).mean() > 0.95
    assert np.isfinite(both.thickness_nm).mean() > 0.97
    assert np.nanmax(np.abs(both.thickness_nm - truth)) < 40
    assert any("laid over each other" in note or "laid over the main" in note for note in both.notes)


def test_a_shot_that_lies_elsewhere_is_laid_over_the_main_one(tmp_path):
    rows, columns = np.indices((160, 200))
    truth = np.where((np.hypot(rows - 70, columns - 90) < 40) ^ (columns > 150), 180.0, 330.0)
    moved = shifted(truth, (4, -6), order=0, mode="nearest")
    shoot(tmp_path, truth, seed=1)
    shoot(tmp_path, moved, prefix="second-", lamp="A", seed=2)
    more = """
[[shot]]
photo = "second-photo.png"
light = { spectrum = "A" }
camera = { blank = { photo = "second-blank.png" } }
"""
    found = measure(tmp_path / "photo.png", read_recipe(write_recipe(tmp_path, more=more)))
    inner = np.s_[12:-12, 12:-12]
    claimed = np.isfinite(found.thickness_nm[inner])
    assert claimed.mean() > 0.9  # but for the edges of the steps, which resampling mixes
    assert np.quantile(np.abs(found.thickness_nm - truth)[inner][claimed], 0.99) < 6
    assert any("moved by" in note for note in found.notes)


def test_explain_tells_signal_candidates_and_flags(tmp_path):
    photo = shoot(tmp_path, hills())
    recipe = read_recipe(write_recipe(tmp_path))
    found = explain(photo, recipe, 40, 50)
    assert found.claimed
    assert found.candidates[0].thickness_nm == pytest.approx(hills()[50, 40], abs=5)
    assert "red" in found.text and "chi-square" in found.text
    with pytest.raises(SettingsError, match="--explain"):
        explain(photo, recipe, 4000, 50)


def test_candidates_of_a_repeating_colour_hold_the_other_orders(tmp_path):
    truth = np.broadcast_to(np.linspace(700, 1250, 200), (96, 200)).copy()
    photo = shoot(tmp_path, truth, high=1500)
    found = measure(photo, read_recipe(write_recipe(tmp_path, high=1500)), with_candidates=True)
    settled = has(found.flags, BY_CONTINUITY) & ~is_blocked(found.flags)
    assert settled.mean() > 0.1
    listed = np.isfinite(found.candidates_nm[0])
    assert listed[settled].mean() > 0.5
    assert np.nanmin(np.abs(found.candidates_nm[0] - found.thickness_nm)) > 15


@pytest.mark.parametrize(
    ("spoil", "key"),
    [
        ("blank of another size", "camera.blank.photo"),
        ("blank at full scale", "camera.blank.photo"),
        ("dark brighter than the photograph", "camera.dark"),
        ("one pixel", "PHOTO"),
    ],
)
def test_pictures_that_do_not_belong_together_are_refused_by_key(tmp_path, spoil, key):
    photo = shoot(tmp_path, hills())
    more_camera = ""
    if spoil == "blank of another size":
        cv2.imwrite(str(tmp_path / "blank.png"), np.full((20, 20, 3), 200, np.uint8))
    if spoil == "blank at full scale":
        cv2.imwrite(str(tmp_path / "blank.png"), np.full((120, 150, 3), 255, np.uint8))
    if spoil == "one pixel":
        cv2.imwrite(str(photo), np.full((1, 1, 3), 100, np.uint8))
    recipe_path = write_recipe(tmp_path, more=more_camera)
    if spoil == "dark brighter than the photograph":
        cv2.imwrite(str(tmp_path / "dark.png"), np.full((120, 150, 3), 250, np.uint8))
        recipe_path.write_text(recipe_path.read_text().replace("[camera]", '[camera]\ndark = "dark.png"'))
    with pytest.raises(SettingsError) as caught:
        measure(photo, read_recipe(recipe_path))
    assert key in {fault.key for fault in caught.value.faults}


def test_a_missing_photograph_is_named(tmp_path):
    shoot(tmp_path, hills())
    with pytest.raises(PictureError, match="no such file"):
        measure(tmp_path / "nowhere.png", read_recipe(write_recipe(tmp_path)))


def test_the_index_that_is_in_doubt_is_in_the_budget_and_about_proportional(tmp_path):
    truth = np.full((64, 64), 500.0)
    photo = shoot(tmp_path, truth)
    path = write_recipe(tmp_path)
    path.write_text(path.read_text().replace('material = "SiO2"', 'material = "SiO2", index_scale = { value = 1.0, u = 0.01 }'))
    found = measure(photo, read_recipe(path))
    line = next(line for line in found.budget if line.name == "index of the film")
    n = float(catalogue.material("SiO2").values.real.mean())
    # 1 % of n - 1 is (n - 1) / n % of the optical thickness; phases at the faces move by much less
    assert line.u_nm == pytest.approx(500 * 0.01 * (n - 1) / n, rel=0.15)
    assert line.shared


def test_an_exposure_that_has_drifted_is_told(tmp_path):
    photo = shoot(tmp_path, hills((200, 240)))
    recipe = read_recipe(write_recipe(tmp_path))
    assert not any("brightness differs" in note for note in measure(photo, recipe).notes)
    blank = cv2.imread(str(tmp_path / "blank.png"))
    cv2.imwrite(str(tmp_path / "blank.png"), np.rint(blank * 0.98).astype(np.uint8))
    assert any("brightness differs" in note for note in measure(photo, recipe).notes)
