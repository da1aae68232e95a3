"""Classes of oil on water by appearance: Bonn Agreement Oil Appearance Code (A. Lewis, January 2007, table 1)."""

import csv
from pathlib import Path

import pytest

from sheenmap.charts.appearance import OIL_CLASSES, appearance_classes

TABLE = Path(__file__).parent / "oil_on_water_classes.csv"
ROWS = list(csv.DictReader(line for line in TABLE.read_text(encoding="utf-8").splitlines() if not line.startswith("#")))
INTERFERENCE = [row for row in ROWS if int(row["code"]) <= 3]  # 4 and 5 are the oil's own colour


@pytest.mark.parametrize("row", INTERFERENCE, ids=lambda row: row["appearance"])
def test_limits_are_those_of_the_code(row):
    limits = {name: (low, high) for name, low, high in OIL_CLASSES}
    low_um, high_um = float(row["thickness_low_um"]), float(row["thickness_high_um"])
    assert limits[row["appearance"]] == pytest.approx((1000 * low_um, 1000 * high_um), rel=1e-12)  # exact, but for nm from um


def test_a_micrometre_is_a_thousand_litres_a_square_kilometre():
    for row in ROWS:
        assert float(row["litres_per_km2_low"]) == pytest.approx(1000 * float(row["thickness_low_um"]), rel=1e-12)


def test_classes_beyond_interference_are_never_named():
    assert {run.name for run in appearance_classes(0.0, 1e6)} == {row["appearance"] for row in INTERFERENCE}
