"""Ring layouts against a table computed on paper."""

import csv
from pathlib import Path

import numpy as np
import pytest

from sheenmap.wafer.sites import RINGS, unit_rings

TABLE = Path(__file__).parent / "site_patterns_unit_radius.csv"
ROWS = list(csv.DictReader(line for line in TABLE.read_text(encoding="utf-8").splitlines() if not line.startswith("#")))


@pytest.mark.parametrize("layout", list(RINGS))
def test_rings_stand_and_are_numbered_as_in_the_table(layout):
    rows = [row for row in ROWS if row["layout"] == layout]
    expected = np.array([[float(row["x"]), float(row["y"])] for row in rows])
    assert [int(row["site"]) for row in rows] == list(range(1, len(rows) + 1))
    assert unit_rings(layout) == pytest.approx(expected, abs=1e-8)  # the table has nine decimals


def test_no_layout_of_the_table_is_missing():
    assert {row["layout"] for row in ROWS if row["layout"].startswith("rings")} == set(RINGS)
