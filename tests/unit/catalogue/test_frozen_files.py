"""What every file of the catalogue must hold."""

import hashlib
import re

import numpy as np
import pytest

from sheenmap.catalogue import camera, entry, lamp, material, names, observer, shelf
from sheenmap.spectra import sample

KINDS = tuple(shelf.FOLDERS)
VISIBLE_NM = np.arange(380.0, 781.0)
EVERY = [(kind, name) for kind in KINDS for name in names(kind)]
FILES = [
    file for folder in shelf.data_folder().iterdir() if folder.is_dir() for file in folder.iterdir() if file.name.endswith(".csv")
]


@pytest.mark.parametrize("name", names("material"))
def test_material_is_an_index_over_the_visible_range(name):
    index = material(name)
    assert np.all(np.isfinite(index.values))
    assert np.all(index.values.real > 0)
    assert np.all(index.values.imag <= 0)
    assert index.covers(380, 780)


TRANSPARENT = [name for name in names("material") if np.all(sample(material(name), VISIBLE_NM).imag > -0.01)]


@pytest.mark.parametrize("name", TRANSPARENT)
def test_film_material_does_not_depend_on_how_one_reads_between_its_lines(name):
    index = material(name)
    straight, curved = (sample(index, VISIBLE_NM, interpolation=how) for how in ("linear", "monotone cubic"))
    assert np.abs(straight - curved).max() < 1e-3  # 0.07 % of a thickness; metals and semiconductors reach 0.07 in n


@pytest.mark.parametrize("kind,name", EVERY)
def test_every_name_says_what_it_is_and_where_it_comes_from(kind, name):
    said = entry(kind, name)
    assert said.name == name
    assert said.kind == kind
    assert said.description and said.source
    assert said.licence != "not stated"
    assert said.range_nm[0] <= 380 and said.range_nm[1] >= 780


@pytest.mark.parametrize("kind,name", EVERY)
def test_spectrum_carries_its_name_and_source(kind, name):
    read = {"material": material, "lamp": lamp, "observer": observer, "camera": camera}[kind]
    spectrum = read(name)
    assert (spectrum.name, spectrum.source) == (name, entry(kind, name).source)


@pytest.mark.parametrize("kind", KINDS)
def test_no_two_names_of_a_kind_are_alike(kind):
    folded = [shelf.fold(name) for name in shelf.all_names(kind)]
    assert len(folded) == len(set(folded))


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.name)
def test_the_numbers_are_the_ones_that_were_frozen(file):
    text = file.read_text(encoding="utf-8")
    data = "".join(line for line in text.splitlines(keepends=True) if not line.startswith("#"))
    assert shelf.head_of(text)["sha256"] == hashlib.sha256(data.encode()).hexdigest()


def test_the_readme_lists_every_file():
    readme = (shelf.data_folder() / "README.md").read_text(encoding="utf-8")
    listed = set(re.findall(r"^\| `([a-z]+/[^`]+\.csv)` \|", readme, flags=re.MULTILINE))
    assert listed == {
        f"{folder}/{file.name}"
        for folder in (*shelf.FOLDERS.values(), "daylight")
        for file in (shelf.data_folder() / folder).iterdir()
        if file.name.endswith(".csv")
    }


@pytest.mark.parametrize("name", names("camera"))
def test_camera_has_its_channels_in_the_order_red_green_blue(name):
    response = camera(name)
    centres_nm = (response.values @ response.wavelength_nm) / response.values.sum(axis=1)
    assert centres_nm[0] > centres_nm[1] > centres_nm[2]


@pytest.mark.parametrize("name", names("camera"))
def test_measured_cameras_bear_no_makers_name(name):
    assert name == "generic" or re.fullmatch(r"sensor-\d\d", name)


def test_models_from_memory_say_so():
    generic = [name for name in names("material") if "from memory" in entry("material", name).source]
    assert len(generic) >= 5
    assert all("from memory" in entry("material", name).caution for name in generic)


def test_the_catalogue_has_what_was_promised():
    assert len(names("material")) >= 60
    assert set(names("lamp")) == {
        *("A", "D50", "D55", "D65", "D75", "E"),
        *(f"FL{number}" for number in range(1, 13)),
        *("LED-B1", "LED-B2", "LED-B3", "LED-B4", "LED-B5", "LED-BH1", "LED-RGB1", "LED-V1", "LED-V2"),
    }
    assert names("observer") == ("cie-1931", "cie-1964")
