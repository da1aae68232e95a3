"""Each thing wrong in a recipe is named by its full key, with what was found and what is allowed; and all of them at once."""

from pathlib import Path
from typing import Any

import cv2
import numpy as np
import pytest

from recipes import bench, changed, dumped, every_key, faults_of, put_files, write
from sheenmap.errors import RecipeError
from sheenmap.recipe import read_recipe

FILM = {"material": "SiO2", "search_nm": [0, 800]}
BLANK = {"photo": "blank.png", "surface": "Si"}
NAN = float("nan")

# path that is changed, value (None: taken out), key of the fault, a part of what was found
SMALL_ROWS: list[tuple[str, Any, str, str]] = [
    ("stack", None, "stack", "nothing"),
    ("stack", 3, "stack", "found 3"),
    ("stack.substrate", None, "stack.substrate", "nothing"),
    ("stack.substrate", "", "stack.substrate", 'found ""'),
    ("stack.substrate", True, "stack.substrate", "found true"),
    ("stack.substrate", 40, "stack.substrate", "found 40"),
    ("stack.substrate", "Sj", "stack.substrate", 'found "Sj"'),
    ("stack.substrate", "database:main/Si/Nobody-1900", "stack.substrate", "Nobody-1900"),
    ("stack.medium", "Si", "stack.medium", "absorbing"),
    ("stack.substrate_rough_nm", -1, "stack.substrate_rough_nm", "found -1"),
    ("stack.layers", None, "stack.layers", "no layers"),
    ("stack.layers", [], "stack.layers", "no layers"),
    ("stack.layers", "SiO2", "stack.layers", 'found "SiO2"'),
    ("stack.layers", ["SiO2"], "stack.layers", "SiO2"),
    ("stack.layers", [FILM, FILM], "stack.layers", "2 layers"),
    ("stack.layers", [{"material": "SiO2", "thickness_nm": 5}], "stack.layers", "no layers"),
    ("stack.layers.0.material", None, "stack.layers[0].material", "nothing"),
    ("stack.layers.0.material", "SiO3", "stack.layers[0].material", 'found "SiO3"'),
    ("stack.layers.0.search_nm", [800, 0], "stack.layers[0].search_nm", "found [800, 0]"),
    ("stack.layers.0.search_nm", [5, 5], "stack.layers[0].search_nm", "found [5, 5]"),
    ("stack.layers.0.search_nm", [-5, 5], "stack.layers[0].search_nm", "found [-5, 5]"),
    ("stack.layers.0.search_nm", [0, 30000], "stack.layers[0].search_nm", "found [0, 30000]"),
    ("stack.layers.0.search_nm", [0, NAN], "stack.layers[0].search_nm", "nan"),
    ("stack.layers.0.search_nm", [0], "stack.layers[0].search_nm", "found [0]"),
    ("stack.layers.0.search_nm", "0-800", "stack.layers[0].search_nm", "0-800"),
    ("stack.layers.0.thickness_nm", 5, "stack.layers[0].thickness_nm", "both"),
    ("stack.layers.0.search_nm", None, "stack.layers[0].thickness_nm", "neither"),
    ("stack.layers.0.index_scale", 3, "stack.layers[0].index_scale", "found 3"),
    ("stack.layers.0.index_scale", {"u": 0.1}, "stack.layers[0].index_scale.value", "nothing"),
    ("stack.layers.0.index_scale", {"value": 1, "u": -1}, "stack.layers[0].index_scale.u", "found -1"),
    ("stack.layers.0.rough_nm", -1, "stack.layers[0].rough_nm", "found -1"),
    ("stack.layers.0.fraction", {"material": "air"}, "stack.layers[0].fraction.volume", "nothing"),
    ("stack.layers.0.fraction", {"volume": 0.5}, "stack.layers[0].fraction.material", "nothing"),
    ("stack.layers.0.fraction", {"material": "air", "volume": 2}, "stack.layers[0].fraction.volume", "found 2"),
    ("stack.back", {"medium": "air"}, "stack.back.thickness_mm", "nothing"),
    ("stack.back", {"thickness_mm": 0}, "stack.back.thickness_mm", "found 0"),
    ("title", 3, "title", "found 3"),
    ("allow_extrapolation", "yes", "allow_extrapolation", 'found "yes"'),
    ("light", None, "light", "nothing"),
    ("light", "D65", "light", 'found "D65"'),
    ("light.spectrum", None, "light.spectrum", "nothing"),
    ("light.spectrum", "D66", "light.spectrum", 'found "D66"'),
    ("light.spectrum", "daylight 100", "light.spectrum", "daylight 100"),
    ("camera.response", None, "camera.response", "nothing"),
    ("camera.response", "cie-1932", "camera.response", "cie-1932"),
    ("camera.encoding", "sRGB", "camera.encoding", "sRGB"),
    ("camera.encoding", "power 9", "camera.encoding", "power 9"),
    ("camera.encoding", 2.2, "camera.encoding", "found 2.2"),
    ("camera.profile", "bench2.toml", "camera.profile", "not supported yet"),
    ("camera.dark", "none.png", "camera.dark", "no such file"),
    ("camera.dark", ".", "camera.dark", "a folder"),
    ("camera.dark", [], "camera.dark", "found []"),
    ("camera.dark", [1], "camera.dark", "found [1]"),
    ("camera.blank", {"photo": "blank.png"}, "camera.blank.surface", "nothing"),
    ("camera.blank", BLANK | {"photo": "blnk.png"}, "camera.blank.photo", "blnk.png"),
    ("camera.blank", BLANK | {"surface": 0.9}, "camera.blank.surface", "found 0.9"),
    ("camera.blank", BLANK | {"surface": "air"}, "camera.blank.surface", "reflects nothing"),
    ("camera.blank", BLANK | {"surface": "lamp.csv"}, "camera.blank.surface", "wavelength_nm,power"),
    ("camera.blank", BLANK | {"surface": {"substrate": "Si", "layers": [FILM]}}, "camera.blank.surface.layers", "search_nm"),
    ("camera.blank", BLANK | {"surface": {"layers": []}}, "camera.blank.surface.substrate", "nothing"),
    ("camera.noise", {"full_well_e": 5000}, "camera.noise.read_noise_e", "nothing"),
    ("camera.noise", {"full_well_e": 0, "read_noise_e": 3}, "camera.noise.full_well_e", "found 0"),
    ("camera.level_u", 0.6, "camera.level_u", "found 0.6"),
    ("camera.colour_u", -0.1, "camera.colour_u", "found -0.1"),
    ("camera.shading_u", "small", "camera.shading_u", "small"),
    ("view.angle_deg", 90, "view.angle_deg", "found 90"),
    ("view.angle_deg", -1, "view.angle_deg", "found -1"),
    ("view.angle_deg", 10**400, "view.angle_deg", "found 1000"),
    ("view.angle_deg", {"value": 95, "u": 1}, "view.angle_deg.value", "found 95"),
    ("view.angle_deg", {"photo": "none.tif"}, "view.angle_deg.photo", "none.tif"),
    ("view.angle_deg", {"photo": "angle.tif", "value": 3}, "view.angle_deg.value", "both value and photo"),
    ("view.angle_deg", {}, "view.angle_deg.value", "nothing"),
    ("view.aperture", 1.2, "view.aperture", "found 1.2"),
    ("view.aperture", NAN, "view.aperture", "found nan"),
    ("view.polarisation", "x", "view.polarisation", 'found "x"'),
    ("view.camera_mm", [0, 0, 300], "view.camera_mm", "without a scale"),
    ("view.camera_mm", [0, 0, 0], "view.camera_mm", "height of 0"),
    ("view.camera_mm", [0, 0], "view.camera_mm", "found [0, 0]"),
    ("view", {"camera_mm": [0, 0, 9], "angle_deg": 3}, "view.camera_mm", "both"),
    ("region.shape", "dsic", "region.shape", "dsic"),
    ("region.shape", "polygon", "region.points", "nothing"),
    ("region.shape", "mask", "region.mask", "nothing"),
    ("region.mask", "mask.png", "region.mask", 'shape = "frame"'),
    ("region", {"shape": "mask", "mask": "blank.png"}, "region.mask", "not a PNG"),
    ("region", {"shape": "mask", "mask": "black.png"}, "region.mask", "black everywhere"),
    ("region", {"shape": "polygon", "points": [[0, 0], [1, 1]]}, "region.points", "found [[0, 0]"),
    ("region", {"shape": "polygon", "points": [[0, 0], [1, 1], [1, "2"]]}, "region.points", "found [[0, 0]"),
    ("region.diameter_mm", 200, "region.diameter_mm", 'shape = "frame"'),
    ("region.width_mm", 0, "region.width_mm", "found 0"),
    ("region.edge_exclusion_mm", 3, "region.edge_exclusion_mm", "without a scale"),
    ("region", {"shape": "disc", "diameter_mm": 4, "edge_exclusion_mm": 2}, "region.edge_exclusion_mm", "found 2"),
    ("region.notch", "north", "region.notch", "north"),
    ("region.parts", 3, "region.parts", "not supported yet"),
    ("region.die", {"width_mm": 8}, "region.die", "not supported yet"),
    ("sites", {}, "sites.layout", "nothing"),
    ("sites.layout", "grid 10", "sites.layout", "without a scale"),
    ("shot", {"photo": "shot.png"}, "shot", "found"),
    ("shot", [{"light": {"spectrum": "A"}}], "shot[0].photo", "nothing"),
    ("shot", [{"photo": "none.png"}], "shot[0].photo", "none.png"),
    ("shot", [{"photo": "shot.png", "view": {"angle_deg": 91}}], "shot[0].view.angle_deg", "found 91"),
    ("tolerance", {"target_nm": 5, "plus_nm": 1}, "tolerance", "without [region]"),
    ("tolerance", {}, "tolerance", "nothing is asked"),
    ("tolerance.plus_nm", 3, "tolerance.target_nm", "nothing"),
    ("tolerance.target_nm", 500, "tolerance.plus_nm", "nothing"),
    ("tolerance", {"target_nm": 5, "plus_nm": 0, "minus_nm": 0}, "tolerance.plus_nm", "no width"),
    ("tolerance.nonuniformity_percent", 0, "tolerance.nonuniformity_percent", "found 0"),
    ("tolerance.formula", "rnage", "tolerance.formula", "rnage"),
    ("tolerance.rule", "share risk", "tolerance.rule", "share risk"),
    ("tolerance.risk", 0.5, "tolerance.risk", "found 0.5"),
    ("tolerance.scope", "site", "tolerance.scope", "site"),
    ("tolerance.max_defect_percent", 101, "tolerance.max_defect_percent", "found 101"),
]

# the same, of a recipe with a disc, sites, a blank and a further shot
FULL_ROWS: list[tuple[str, Any, str, str]] = [
    ("camera.encoding", None, "camera.encoding", "nothing"),
    ("stack.layers.0.index_scale", {"value": 1, "u": 0.1}, "stack.layers[0].index_scale", "found u = 0.1"),
    ("sites.layout", "rings-48", "sites.layout", "rings-48"),
    ("sites.layout", "grid 0", "sites.layout", "grid 0"),
    ("sites.layout", "grid nan", "sites.layout", "grid nan"),
    ("sites.layout", "grid ten", "sites.layout", "grid ten"),
    ("sites.radius_mm", 0, "sites.radius_mm", "found 0"),
    ("region", {"shape": "frame", "width_mm": 9}, "sites.layout", "rings-49"),
    ("tolerance", {"nonuniformity_percent": 1, "formula": "largest deviation over target"}, "tolerance.target_nm", "nothing"),
    ("shot.0.camera", None, "shot[0].camera.blank", "nothing"),
    ("shot.0.camera.blank.photo", "none.png", "shot[0].camera.blank.photo", "none.png"),
    ("shot.0.light.spectrum", "B52", "shot[0].light.spectrum", "B52"),
]


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    place = tmp_path_factory.mktemp("bench")
    put_files(place)
    (place / "black.png").write_bytes(cv2.imencode(".png", np.zeros((4, 4), np.uint8))[1].tobytes())
    return place


@pytest.mark.parametrize(("path", "value", "key", "found"), SMALL_ROWS)
def test_a_fault_in_a_short_recipe_is_named(folder: Path, path: str, value: Any, key: str, found: str) -> None:
    faults = faults_of(folder, changed(bench(), path, value))
    assert [fault for fault in faults if fault.key == key and found in fault.found], faults


@pytest.mark.parametrize(("path", "value", "key", "found"), FULL_ROWS)
def test_a_fault_in_a_full_recipe_is_named(folder: Path, path: str, value: Any, key: str, found: str) -> None:
    faults = faults_of(folder, changed(every_key()[0], path, value))
    assert [fault for fault in faults if fault.key == key and found in fault.found], faults


@pytest.mark.parametrize("recipe", [bench(), *every_key()])
def test_the_recipes_that_these_rows_change_have_no_fault(folder: Path, recipe: dict[str, Any]) -> None:
    assert faults_of(folder, recipe) == []


def test_every_fault_says_what_is_allowed_or_that_it_is_not_supported(folder: Path) -> None:
    for path, value, key, _ in SMALL_ROWS:
        for fault in faults_of(folder, changed(bench(), path, value)):
            assert fault.allowed or fault.found == "not supported yet" or "found" in fault.found, (path, value, key, fault)


@pytest.mark.parametrize(
    ("path", "value", "hint"),
    [
        ("stack.layers.0", FILM | {"materail": "SiO2"}, "did you mean material?"),
        ("stack.substrate", "Sapphir", "did you mean sapphire?"),
        ("light.spectrum", "LED-B33", "did you mean LED-B3?"),
        ("camera.response", "cie-1932", "did you mean cie-1931?"),
        ("camera.dark", "drak.png", "did you mean dark.png?"),
        ("stack.layers.0.search_nm", [800, 0], "did you mean [0, 800]?"),
        ("tolerance.rule", "guard", "did you mean guarded?"),
    ],
)
def test_the_nearest_right_name_is_offered(folder: Path, path: str, value: Any, hint: str) -> None:
    assert hint in [fault.hint for fault in faults_of(folder, changed(bench(), path, value))]


def test_all_faults_come_at_once_in_one_error(folder: Path) -> None:
    table = bench()
    for path, value in (
        ("stack.layers.0.materail", "SiO2"),
        ("stack.substrate", "Sj"),
        ("light.spectrum", "D66"),
        ("camera.dark", "none.png"),
        ("view.angle_deg", 95),
        ("region.shape", "dsic"),
        ("sites.layout", "rings-48"),
        ("tolerance.risk", 2),
        ("titel", "bench"),
    ):
        table = changed(table, path, value)
    with pytest.raises(RecipeError) as caught:
        read_recipe(write(folder, table))
    keys = {fault.key for fault in caught.value.faults}
    assert keys >= {
        "stack.layers[0].materail", "stack.substrate", "light.spectrum", "camera.dark", "view.angle_deg",
        "region.shape", "sites.layout", "tolerance.risk", "titel",
    }  # fmt: skip
    lines = str(caught.value).splitlines()
    assert lines[0] == f"bench.toml: {len(caught.value.faults)} faults"
    assert len(lines) == len(caught.value.faults) + 1


def test_a_reading_fault_does_not_hide_what_stands_behind_it(folder: Path) -> None:
    faults = faults_of(folder, dumped(bench()).replace('"D65"', '"D66"') + "sites = { layout = 3 }\n")
    assert [fault.key for fault in faults] == ["light.spectrum", "sites.layout"]


@pytest.mark.parametrize(
    ("text", "key", "found"),
    [
        ("title = 'a'\n[stack\n", "line 2", "Expected"),
        ("title = \n", "line 1", "Invalid value"),
        ("title = 'a'\ntitle = 'b'\n", "line 2", "Cannot overwrite"),
        ("n = " + "9" * 5000, "TOML", "digits"),
        ("a = " + "[" * 5000, "TOML", "nested"),
        (b"title = '\xff\xfe'", "--recipe", "no UTF-8 text"),
        (b"\x00\x01", "line 1", ""),
        ("# " + "x" * 1_000_000, "--recipe", "1 MB"),
    ],
)
def test_what_is_no_toml_is_one_fault_with_its_line(folder: Path, text: str | bytes, key: str, found: str) -> None:
    (fault,) = faults_of(folder, text)
    assert fault.key == key
    assert found in fault.found


def test_an_empty_recipe_says_what_it_needs(folder: Path) -> None:
    assert [fault.key for fault in faults_of(folder, "")] == ["stack", "light"]


def test_a_whole_number_too_large_for_python_to_print_is_a_fault(folder: Path) -> None:
    text = dumped(bench()) + "view = { aperture = 0x" + "F" * 5000 + " }\n"
    assert [(fault.key, fault.found) for fault in faults_of(folder, text)] == [("view.aperture", "found a number far too large")]


@pytest.mark.parametrize("name", ["none.toml", "none/none.toml", ".", "bench.toml/inside.toml"])
def test_a_recipe_that_is_not_there_is_a_fault(folder: Path, name: str) -> None:
    write(folder, bench())
    with pytest.raises(RecipeError) as caught:
        read_recipe(folder / name)
    (fault,) = caught.value.faults
    assert fault.found in ("no such file", "a folder")


@pytest.mark.parametrize("name", ["x" * 300 + ".png", "a\0b.png", "blank.png/inside.png", "../none/blank.png"])
def test_file_names_that_no_file_can_have_are_faults(folder: Path, name: str) -> None:
    assert [fault.key for fault in faults_of(folder, changed(bench(), "camera.dark", name))] == ["camera.dark"]
