import json
import os
from dataclasses import replace

import numpy as np
import pytest
import tifffile

from measurements import nothing_claimed, oxide_wafer
from sheenmap.errors import Fault
from sheenmap.storage import MapError, read_map, summary, to_plain, write_measurement


@pytest.fixture(scope="module")
def wafer():
    return oxide_wafer(width=240, height=200)


def test_arrays_come_back_as_they_were(wafer, tmp_path):
    write_measurement(wafer, tmp_path / "out")
    found = read_map(tmp_path / "out")
    for name in ("thickness_nm", "sigma_nm", "flags", "candidates_nm"):
        np.testing.assert_array_equal(getattr(found, name), getattr(wafer, name))
    assert found.statistics == wafer.statistics
    assert found.sites == wafer.sites
    assert found.region.disc == wafer.region.disc
    np.testing.assert_array_equal(found.region.inside, wafer.region.inside)


def test_compression_changes_the_size_and_nothing_else(wafer, tmp_path):
    write_measurement(wafer, tmp_path / "plain")
    write_measurement(wafer, tmp_path / "small", compress=True)
    for name in ("thickness.tif", "sigma.tif", "flags.tif", "candidates.tif"):
        plain, small = tmp_path / "plain" / name, tmp_path / "small" / name
        np.testing.assert_array_equal(tifffile.imread(plain), tifffile.imread(small))
        assert small.stat().st_size < plain.stat().st_size


def test_a_plane_is_one_contiguous_block(wafer, tmp_path):
    write_measurement(wafer, tmp_path)
    assert tifffile.memmap(tmp_path / "thickness.tif", mode="r").shape == wafer.thickness_nm.shape  # refuses what is in pieces


def test_types_and_units_are_those_of_the_contract(wafer, tmp_path):
    write_measurement(wafer, tmp_path)
    for name, kind in (("thickness", "float32"), ("sigma", "float32"), ("flags", "uint16")):
        with tifffile.TiffFile(tmp_path / f"{name}.tif") as file:
            assert file.pages.first.dtype == kind
            described = json.loads(file.pages.first.description)
            assert described["unit"] == ("" if name == "flags" else "nm")
            per_cm = file.pages.first.get_resolution("centimeter")
            assert per_cm[0] == pytest.approx(
                10 / wafer.region.mm_per_px, rel=1e-5
            )  # TIFF keeps it as a ratio of 32-bit integers


def test_flags_are_told_by_name_with_bit_blocks_pixels_and_fraction(wafer, tmp_path):
    write_measurement(wafer, tmp_path)
    table = json.loads((tmp_path / "summary.json").read_text())["flags"]
    assert {name: flag["bit"] for name, flag in table.items()} == {
        "outside": 0, "saturated": 1, "dark": 2, "off-curve": 3, "ambiguous": 4, "at-limit": 5, "by-continuity": 6, "weak": 7,
    }  # fmt: skip
    assert [name for name, flag in table.items() if not flag["blocks"]] == ["by-continuity", "weak"]
    for flag in table.values():
        pixels = int(np.count_nonzero(wafer.flags & (1 << flag["bit"])))
        assert flag["pixels"] == pixels
        assert flag["fraction"] == pixels / wafer.flags.size


def test_what_does_not_exist_is_null_in_the_summary_and_never_nan(tmp_path):
    write_measurement(nothing_claimed(), tmp_path)
    text = (tmp_path / "summary.json").read_text()
    document = json.loads(text, parse_constant=lambda found: pytest.fail(f"{found} in JSON"))
    assert document["statistics"]["mean_nm"] is None
    assert document["verdict"] is None


def test_the_same_measurement_gives_the_same_bytes(wafer, tmp_path):
    for name in ("one", "two"):
        write_measurement(wafer, tmp_path / name)
    for name in os.listdir(tmp_path / "one"):
        assert (tmp_path / "one" / name).read_bytes() == (tmp_path / "two" / name).read_bytes()


def test_candidates_of_an_earlier_map_do_not_stay(wafer, tmp_path):
    write_measurement(wafer, tmp_path)
    assert (tmp_path / "candidates.tif").exists()
    write_measurement(replace(wafer, candidates_nm=None, candidate_odds=None), tmp_path)
    assert not (tmp_path / "candidates.tif").exists()
    assert read_map(tmp_path).candidates_nm is None


def test_a_summary_says_how_the_number_came_about(wafer):
    document = summary(wafer)
    assert document["history"] == list(wafer.history)
    assert document["provenance"]["photo_sha256"] == "a1" * 32
    assert [line["name"] for line in document["budget"]] == [line.name for line in wafer.budget]


def test_a_thing_that_json_cannot_hold_is_a_mistake_of_ours():
    assert to_plain({"a": np.float32(1.5), "b": (np.nan, np.arange(2)), "c": Fault(key="k", found="f")}) == {
        "a": 1.5, "b": [None, [0, 1]], "c": {"key": "k", "found": "f", "allowed": "", "hint": ""},
    }  # fmt: skip
    with pytest.raises(ValueError, match="no place in a summary"):
        to_plain(object())


@pytest.mark.parametrize("name", ["thickness.tif", "sigma.tif", "flags.tif", "summary.json"])
def test_a_missing_file_is_named(wafer, tmp_path, name):
    write_measurement(wafer, tmp_path)
    (tmp_path / name).unlink()
    with pytest.raises(MapError, match=f"holds no {name}"):
        read_map(tmp_path)


def test_a_folder_that_is_none_is_named(tmp_path):
    with pytest.raises(MapError, match="no such folder"):
        read_map(tmp_path / "nowhere")


@pytest.mark.parametrize("keep", [0, 6, 200, 5000])
def test_a_broken_tiff_is_named(wafer, tmp_path, keep):
    write_measurement(wafer, tmp_path)
    path = tmp_path / "thickness.tif"
    path.write_bytes(path.read_bytes()[:keep])
    with pytest.raises(MapError, match=r"thickness\.tif"):
        read_map(tmp_path)


def test_a_mixture_of_two_runs_is_found(wafer, tmp_path):
    write_measurement(wafer, tmp_path / "one")
    write_measurement(oxide_wafer(width=240, height=200, seed=8), tmp_path / "two")
    (tmp_path / "one" / "sigma.tif").write_bytes((tmp_path / "two" / "sigma.tif").read_bytes())
    with pytest.raises(MapError, match="of another run"):
        read_map(tmp_path / "one")


@pytest.mark.parametrize(
    ("change", "found"),
    [
        (lambda text: text[: len(text) // 2], "is no JSON"),
        (lambda text: "[]", "schema_version is None"),
        (lambda text: text.replace('"schema_version": 1', '"schema_version": 99'), "schema_version is 99"),
        (lambda text: text.replace('"bit": 3', '"bit": 9'), "flags are of another version"),
        (lambda text: text.replace('"u_common_nm"', '"u"'), "not as sheenmap writes it"),
        (lambda text: text.replace('"origin_px"', '"o"'), "not as sheenmap writes it"),
        (lambda text: text.replace('"picture"', '"p"'), "not as sheenmap writes it"),
    ],
)
def test_a_summary_of_another_form_is_named(wafer, tmp_path, change, found):
    write_measurement(wafer, tmp_path)
    path = tmp_path / "summary.json"
    path.write_text(change(path.read_text()))
    with pytest.raises(MapError, match=found):
        read_map(tmp_path)
