"""Every nonuniformity formula on one worked set."""

import csv
from pathlib import Path

import pytest

from sheenmap.uniformity import FORMULAS, nonuniformity
from sheenmap.uniformity.formulas import formula_named

TABLE = Path(__file__).parent / "uniformity_definitions.csv"
ROWS = list(csv.DictReader(line for line in TABLE.read_text(encoding="utf-8").splitlines() if not line.startswith("#")))
WORKED_SET = (1000, 1010, 990, 1020, 985)


@pytest.mark.parametrize("row", ROWS, ids=[row["name"] for row in ROWS])
def test_formula_gives_the_worked_value(row):
    value = nonuniformity(WORKED_SET, row["name"])
    assert value == pytest.approx(float(row["value_for_1000_1010_990_1020_985"]), abs=6e-10)  # nine decimals are printed


@pytest.mark.parametrize("row", ROWS, ids=[row["name"] for row in ROWS])
def test_formula_has_the_unit_of_the_table(row):
    assert formula_named(row["name"])[0].unit == row["unit"]


def test_table_and_registry_list_the_same_formulas():
    assert {formula_named(row["name"])[0].name for row in ROWS} == set(FORMULAS)
