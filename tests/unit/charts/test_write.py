import struct
from dataclasses import replace

import pytest

from sheenmap.charts import chart_data, two_way_data, write_chart, write_side_by_side, write_table, write_two_way
from sheenmap.errors import OutputError, SettingsError

BEGINS = {".png": b"\x89PNG", ".svg": b"<?xml", ".pdf": b"%PDF", ".html": b"<!doctype html>"}


@pytest.mark.parametrize("suffix", BEGINS)
def test_a_chart_is_written_as_its_suffix_says(chart, tmp_path, suffix):
    path = tmp_path / f"chart{suffix}"
    write_chart(chart, path)
    assert path.read_bytes().startswith(BEGINS[suffix])
    assert [file.name for file in tmp_path.iterdir()] == [path.name]


@pytest.mark.parametrize("paper, inches", [("a4", (297 / 25.4, 210 / 25.4)), ("letter", (11.0, 8.5))])
def test_a_page_has_the_papers_true_size(chart, tmp_path, paper, inches):
    write_chart(chart, tmp_path / "chart.png", paper=paper)
    width, height = struct.unpack(">II", (tmp_path / "chart.png").read_bytes()[16:24])
    assert (width / 200, height / 200) == pytest.approx(inches, abs=0.01)


@pytest.mark.parametrize("suffix", BEGINS)
def test_the_same_chart_makes_the_same_bytes(chart, tmp_path, suffix):
    for name in ("one", "other"):
        write_chart(chart, tmp_path / f"{name}{suffix}")
    assert (tmp_path / f"one{suffix}").read_bytes() == (tmp_path / f"other{suffix}").read_bytes()


def test_a_title_with_markup_and_formula_signs_is_drawn_as_it_stands(chart, tmp_path):
    odd = replace(chart, setup=replace(chart.setup, title="$\\frac{$ <b> & 100 % {x"))
    for suffix in BEGINS:
        write_chart(odd, tmp_path / f"chart{suffix}")


@pytest.mark.parametrize("name", ["chart", "chart.jpg", "chart.png.txt"])
def test_another_suffix_is_refused_with_those_allowed(chart, tmp_path, name):
    with pytest.raises(SettingsError, match=r"\.svg, \.png, \.pdf, \.html"):
        write_chart(chart, tmp_path / name)
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize("suffix, begins", [(".csv", b"thickness_nm,X,Y"), (".json", b"{")])
def test_a_table_is_written_as_its_suffix_says(chart, tmp_path, suffix, begins):
    write_table(chart, tmp_path / f"table{suffix}")
    assert (tmp_path / f"table{suffix}").read_bytes().startswith(begins)


def test_a_folder_that_is_not_there_is_an_output_error(chart, tmp_path):
    with pytest.raises(OutputError, match="nowhere"):
        write_table(chart, tmp_path / "nowhere" / "table.csv")


def test_where_writing_fails_nothing_half_done_is_left(chart, tmp_path):
    (tmp_path / "table.csv").mkdir()  # a folder of that name cannot be replaced by a file
    with pytest.raises(OutputError):
        write_table(chart, tmp_path / "table.csv")
    assert [file.name for file in tmp_path.iterdir()] == ["table.csv"]


def test_charts_side_by_side_make_a_page(bench, chart, tmp_path):
    other = chart_data(bench("Si3N4", search_nm=(100.0, 900.0)), step_nm=4.0)
    write_side_by_side([chart, other], tmp_path / "both.png")
    assert (tmp_path / "both.png").read_bytes().startswith(BEGINS[".png"])


@pytest.mark.parametrize("count", [0, 9])
def test_a_page_holds_one_to_eight_charts(chart, tmp_path, count):
    with pytest.raises(SettingsError, match="1 to 8"):
        write_side_by_side([chart] * count, tmp_path / "many.png")


def test_a_chart_full_of_clipped_colours_and_without_repeats_is_drawn(bench, tmp_path):
    vivid = chart_data(bench("TiO2", "Al", search_nm=(0.0, 60.0), light="LED-RGB1"), step_nm=2.0, repeat_within=0.01)
    write_chart(vivid, tmp_path / "vivid.png")


@pytest.mark.parametrize("against", ["angle", "index"])
def test_a_two_way_chart_makes_a_page(oxide, tmp_path, against):
    values = (0.0, 30.0, 60.0) if against == "angle" else (0.9, 1.0, 1.1)
    write_two_way(two_way_data(oxide, against=against, values=values, step_nm=10.0), tmp_path / "two.pdf")
    assert (tmp_path / "two.pdf").read_bytes().startswith(BEGINS[".pdf"])
