"""Numbers of sites and second moments of the ring layouts, against sums on paper."""

import csv
from pathlib import Path

import numpy as np
import pytest

from sheenmap.wafer import Disc, Region, SiteSpec, site_positions

TABLE = Path(__file__).parent / "site_patterns_summary.csv"
ROWS = list(csv.DictReader(line for line in TABLE.read_text(encoding="utf-8").splitlines() if not line.startswith("#")))
RINGS = [row for row in ROWS if row["layout"].startswith("rings-")]


def unit_disc():
    """A disc of 2 mm with no exclusion, so that millimetres are radii."""
    rows, columns = np.indices((201, 201))
    inside = np.hypot(rows - 100, columns - 100) <= 100
    disc = Disc(x_px=100.0, y_px=100.0, radius_px=100.0)
    return Region(inside=inside, origin_px=(100.0, 100.0), mm_per_px=0.01, disc=disc)


@pytest.mark.parametrize("row", RINGS, ids=lambda row: row["layout"])
def test_layouts_have_their_sites_and_second_moment(row):
    sites = site_positions(SiteSpec(layout=row["layout"], radius_mm=0.02), unit_disc())
    assert sites.x_mm.size == int(row["sites"])
    assert np.mean(sites.x_mm**2 + sites.y_mm**2) == pytest.approx(float(row["mean_r2_unweighted"]), abs=1e-8)
