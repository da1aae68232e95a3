"""CSV files that a recipe names and that are no curves: the fault stands at the key that names the file."""

from pathlib import Path

import pytest

from recipes import CAMERA_CSV, bench, changed, every_key, faults_of, put_files

HEAD = "wavelength_nm,n,k\n"
GOOD = HEAD + "380,1.5,0\n580,1.49,0\n780,1.48,0\n"

MATERIALS = [
    ("", "the file is empty"),
    ("# only a remark\n", "the file is empty"),
    (HEAD, "0 rows"),
    (HEAD + "380,1.5,0\n", "1 rows"),
    ("nm,n,k\n380,1.5,0\n780,1.5,0\n", "header"),
    (GOOD.replace(",", ";"), "header"),
    (GOOD.replace("1.49", "glass"), "line 3 is not numbers"),
    (GOOD.replace("1.49", "nan"), "line 3: every number must be finite"),
    (GOOD.replace("1.49", "inf"), "line 3: every number must be finite"),
    (GOOD.replace("1.49", ""), "line 3 is not numbers"),
    (GOOD.replace("580,1.49,0", "580,1.49"), "2 fields on line 3"),
    (GOOD.replace("580,1.49,0", "580,1,49,0"), "4 fields on line 3"),
    (GOOD.replace("580", "380"), "wavelength_nm 380 stands twice"),
    (GOOD.replace("580", "880"), "wavelength_nm does not rise"),
    (GOOD.replace("380", "-380"), "a wavelength of zero or less"),
    (GOOD.replace("1.49", "-1.49"), "an index n of zero or less"),
    (GOOD.replace("1.49,0", "1.49,-0.1"), "negative k at 580 nm"),
    (GOOD.replace("380", "450"), "covers 450 to 780 nm"),
    (GOOD.replace("780", "650"), "covers 380 to 650 nm"),
]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    put_files(tmp_path)
    return tmp_path


@pytest.mark.parametrize(("content", "found"), MATERIALS)
def test_a_file_that_is_no_material_is_named_with_its_line(folder: Path, content: str, found: str) -> None:
    (folder / "film.csv").write_text(content)
    (fault,) = faults_of(folder, changed(bench(), "stack.layers.0.material", "film.csv"))
    assert fault.key == "stack.layers[0].material"
    assert found in fault.found
    assert "allowed" not in fault.found


def test_the_rows_before_are_wrong_by_their_change_alone(folder: Path) -> None:
    (folder / "film.csv").write_text(GOOD)
    assert faults_of(folder, changed(bench(), "stack.layers.0.material", "film.csv")) == []


def test_a_curve_too_narrow_is_told_the_range_and_the_way_out(folder: Path) -> None:
    (folder / "film.csv").write_text(GOOD.replace("380", "450"))
    (fault,) = faults_of(folder, changed(bench(), "stack.layers.0.material", "film.csv"))
    assert "where the lamp shines and the camera sees" in fault.allowed
    assert "allow_extrapolation = true" in fault.hint


@pytest.mark.parametrize("way", ["stack.medium", "stack.substrate", "stack.back.medium", "stack.layers.0.fraction.material"])
def test_every_material_must_cover_the_band(folder: Path, way: str) -> None:
    (folder / "narrow.csv").write_text(GOOD.replace("380", "450"))
    table = changed(changed(every_key()[0], way, "narrow.csv"), "camera.blank.surface", "tile.csv")
    assert [fault.key for fault in faults_of(folder, table)] == [way.replace(".0", "[0]")]


def test_a_reflectance_must_cover_the_band_and_stay_below_one(folder: Path) -> None:
    for content, found in (
        ("wavelength_nm,reflectance\n450,0.9\n780,0.9\n", "covers 450 to 780 nm"),
        ("wavelength_nm,reflectance\n380,0.9\n780,1.1\n", "a reflectance of 1.1"),
        ("wavelength_nm,reflectance\n380,90\n780,91\n", "a reflectance of 91"),
        ("wavelength_nm,reflectance\n380,0\n780,0\n", "reflects nothing"),
        ("wavelength_nm,reflectance\n380,-0.1\n780,0.1\n", "a negative value"),
    ):
        (folder / "tile.csv").write_text(content)
        table = changed(bench(), "camera.blank", {"photo": "blank.png", "surface": "tile.csv"})
        (fault,) = faults_of(folder, table)
        assert fault.key == "camera.blank.surface"
        assert found in fault.found


@pytest.mark.parametrize(
    ("content", "found"),
    [
        ("wavelength_nm,power\n450,1\n780,1\n", "covers 450 to 780 nm"),
        ("wavelength_nm,power\n380,1\n690,1\n", "covers 380 to 690 nm"),
        ("wavelength_nm,power\n380,0\n780,0\n", "sees nothing"),
        ("wavelength_nm,power\n380,1\n780,-1\n", "negative value"),
        (GOOD, "header"),
    ],
)
def test_a_lamp_must_shine_over_the_visible(folder: Path, content: str, found: str) -> None:
    (folder / "lamp.csv").write_text(content)
    (fault,) = faults_of(folder, changed(bench(), "light.spectrum", "lamp.csv"))
    assert fault.key == "light.spectrum"
    assert found in fault.found


def test_lamp_and_camera_must_overlap_even_where_ends_are_held(folder: Path) -> None:
    (folder / "lamp.csv").write_text("wavelength_nm,power\n200,1\n370,1\n")
    table = changed(changed(bench(), "light.spectrum", "lamp.csv"), "camera.response", "camera.csv")
    assert [fault.key for fault in faults_of(folder, table | {"allow_extrapolation": True})] == ["light.spectrum"]


def test_a_channel_that_sees_nothing_of_the_lamp_is_named(folder: Path) -> None:
    rows = CAMERA_CSV.splitlines()
    (folder / "camera.csv").write_text("\n".join([rows[0], *(row.rsplit(",", 1)[0] + ",0" for row in rows[1:])]))
    (fault,) = faults_of(folder, changed(bench(), "camera.response", "camera.csv"))
    assert fault.found == "the camera's blue sees nothing of this light"


def test_a_shot_is_held_to_its_own_band(folder: Path) -> None:
    (folder / "lamp.csv").write_text("wavelength_nm,power\n450,1\n780,1\n")
    table = bench() | {"shot": [{"photo": "shot.png", "light": {"spectrum": "lamp.csv"}}]}
    (fault,) = faults_of(folder, table)
    assert fault.key == "shot[0].light.spectrum"


@pytest.mark.parametrize(
    ("content", "found"),
    [
        ("code,linear\n0,0\n255,1.5\n", "linear values of 0 to 1.5"),
        ("code,linear\n0,-0.1\n255,1\n", "linear values of -0.1 to 1"),
        ("code,linear\n0,0\n128,0.6\n255,0.5\n", "linear does not rise"),
        ("code,linear\n255,1\n0,0\n", "code does not rise"),
        ("linear,code\n0,0\n1,255\n", "header"),
    ],
)
def test_an_encoding_must_rise_from_zero_to_one(folder: Path, content: str, found: str) -> None:
    (folder / "curve.csv").write_text(content)
    (fault,) = faults_of(folder, changed(bench(), "camera.encoding", "curve.csv"))
    assert fault.key == "camera.encoding"
    assert found in fault.found


@pytest.mark.parametrize(
    ("content", "found"),
    [
        ("x_mm,y_mm\n", "no rows"),
        ("x,y\n0,0\n", "header"),
        ("x_mm,y_mm\n0,0\n# remark\n1,top\n", "on line 4"),
        ("x_mm,y_mm\n0,0\n1,nan\n", "on line 3"),
        ("x_mm,y_mm\n0,0,0\n", "on line 2"),
    ],
)
def test_sites_are_two_numbers_a_row(folder: Path, content: str, found: str) -> None:
    (folder / "sites.csv").write_text(content)
    (fault,) = faults_of(folder, changed(every_key()[0], "sites.layout", "sites.csv"))
    assert fault.key == "sites.layout"
    assert found in fault.found


def test_a_csv_that_is_no_text_is_a_fault(folder: Path) -> None:
    (folder / "film.csv").write_bytes(b"wavelength_nm,n,k\n\xff\xfe\x00\n")
    (fault,) = faults_of(folder, changed(bench(), "stack.layers.0.material", "film.csv"))
    assert "not UTF-8 text" in fault.found


def test_a_csv_with_a_byte_order_mark_is_none(folder: Path) -> None:
    (folder / "film.csv").write_bytes(b"\xef\xbb\xbf" + GOOD.encode())
    assert faults_of(folder, changed(bench(), "stack.layers.0.material", "film.csv")) == []


def test_sites_with_a_byte_order_mark_are_read(folder: Path) -> None:
    (folder / "sites.csv").write_bytes(b"\xef\xbb\xbfx_mm,y_mm\r\n0,0\r\n")
    assert faults_of(folder, changed(every_key()[0], "sites.layout", "sites.csv")) == []


def test_a_curve_must_cover_the_bands_of_all_shots(folder: Path) -> None:
    dark, lit = "wavelength_nm,power\n380,0\n500,0\n501,1\n", "599,1\n600,0\n780,0\n"
    (folder / "lamp.csv").write_text(dark + lit)
    (folder / "film.csv").write_text(GOOD.replace("380", "501").replace("780", "620"))
    table = changed(changed(bench(), "stack.layers.0.material", "film.csv"), "light.spectrum", "lamp.csv")
    assert faults_of(folder, table) == []
    shot = {"photo": "shot.png", "light": {"spectrum": "E"}}
    (fault,) = faults_of(folder, table | {"shot": [shot]})
    assert fault.key == "stack.layers[0].material"
    low, high = fault.allowed.split(" nm")[0].split(" to ")
    assert float(low) < 501
    assert float(high) > 620


def test_a_huge_csv_is_not_read(folder: Path) -> None:
    with (folder / "film.csv").open("wb") as file:
        file.truncate(30_000_000)
    (fault,) = faults_of(folder, changed(bench(), "stack.layers.0.material", "film.csv"))
    assert "30 MB" in fault.found
