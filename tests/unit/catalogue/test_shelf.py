"""Files, heads and names of the catalogue."""

import pytest

from sheenmap.catalogue import shelf
from sheenmap.errors import CurveError, UnknownNameError

ROWS = "wavelength_nm,n,k\n400,1.5,0\n700,1.4,0.1\n"


def put(folder, file_name, text):
    (folder / file_name).write_text(text, encoding="utf-8")


def test_a_file_of_ones_own_without_a_head_is_found_by_its_file_name(tmp_path):
    put(tmp_path, "my-oxide.csv", ROWS)
    records = shelf.records_in(tmp_path, "material")
    assert list(records) == ["my-oxide"]
    assert shelf.read(records["my-oxide"]).source == "file my-oxide.csv"


def test_the_head_gives_name_other_names_and_source(tmp_path):
    put(tmp_path, "x.csv", "\ufeff# name: furnace oxide\n# also: oxide 2, wet oxide\n# source: our own: bench 3\n" + ROWS)
    (record,) = shelf.records_in(tmp_path, "material").values()
    assert (record.name, record.also) == ("furnace oxide", ("oxide 2", "wet oxide"))
    assert shelf.read(record).source == "our own: bench 3"


def test_words_below_the_head_are_no_head():
    assert shelf.head_of("# name: a\n\nwavelength_nm,n,k\n# name: b\n# licence: c\n") == {"name": "a"}


def test_an_own_name_goes_before_the_alias_of_another(tmp_path):
    put(tmp_path, "a.csv", "# name: glass\n" + ROWS)
    put(tmp_path, "b.csv", "# name: aaa\n# also: glass\n" + ROWS)
    put(tmp_path, "c.csv", "# name: zzz\n# also: glass\n" + ROWS)
    by_name = shelf.by_folded_name(shelf.records_in(tmp_path, "material").values())
    assert by_name["glass"].file.name == "a.csv"


@pytest.mark.parametrize("spelling", ["soap water", "Soap-Water", "SOAP_WATER", "  soap   water ", "soap - water"])
def test_case_and_joints_of_words_do_not_count(spelling):
    assert shelf.find("material", spelling).name == "soap water"


def test_a_spoilt_file_is_named_with_its_fault(tmp_path):
    put(tmp_path, "x.csv", "wavelength_nm,n,k\n400,1.5,0\n390,1.4,0\n")
    (record,) = shelf.records_in(tmp_path, "material").values()
    with pytest.raises(CurveError, match=r"x\.csv: wavelength_nm does not rise"):
        shelf.read(record)


def test_other_files_in_the_folder_are_left_alone(tmp_path):
    put(tmp_path, "notes.txt", "hello")
    assert shelf.records_in(tmp_path, "lamp") == {}


def test_an_unknown_name_comes_with_the_nearest_one():
    with pytest.raises(UnknownNameError, match="did you mean 'Si3N4'") as caught:
        shelf.find("material", "Si3N5")
    assert caught.value.nearest == "Si3N4"


def test_an_unknown_kind_is_a_programmers_mistake():
    with pytest.raises(ValueError, match="allowed: material, lamp, observer, camera"):
        shelf.shelf("surface")


def test_the_data_folder_is_the_checkouts_or_the_packages():
    assert {child.name for child in shelf.data_folder().iterdir()} >= {"materials", "lamps", "observers", "cameras", "daylight"}
