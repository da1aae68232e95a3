"""Areas of wafers inside the edge exclusion, and of what their flats take, in a drawn region."""

import csv
import re
from pathlib import Path

import numpy as np
import pytest

from sheenmap.wafer import Disc
from sheenmap.wafer.locate import disc_inside

TABLE = Path(__file__).parent / "wafer_geometry.csv"
ROWS = list(csv.DictReader(line for line in TABLE.read_text(encoding="utf-8").splitlines() if not line.startswith("#")))
VALUE = {(row["wafer_mm"], row["quantity"]): float(row["value"]) for row in ROWS if re.fullmatch(r"[\d.]+", row["value"])}
RADIUS_PX, SHAPE = 400.0, (820, 820)
# pixels counted by their centre miss the area of a circle of 400 pixels by less than 1 in 10^4 (its rim has 2500 pixels)
RELATIVE = 2e-4


@pytest.mark.parametrize("key", [key for key in VALUE if key[1].startswith("area_inside")], ids="-".join)
def test_area_inside_the_edge_exclusion(key):
    diameter_mm, exclusion_mm = float(key[0]), float(key[1].removeprefix("area_inside_edge_exclusion_").removesuffix("mm"))
    px_per_mm = 2 * RADIUS_PX / diameter_mm
    disc = Disc(x_px=409.3, y_px=410.8, radius_px=RADIUS_PX)
    area_mm2 = np.count_nonzero(disc_inside(disc, SHAPE, exclusion_mm * px_per_mm)) / px_per_mm**2
    assert area_mm2 == pytest.approx(VALUE[key], rel=RELATIVE)


@pytest.mark.parametrize("wafer", sorted({key[0] for key in VALUE if key[1] == "primary_flat_depth"}))
def test_flat_takes_its_circular_segment(wafer):
    px_per_mm = 2 * RADIUS_PX / float(wafer)
    depth_px = VALUE[wafer, "primary_flat_depth"] * px_per_mm
    whole = Disc(x_px=409.3, y_px=410.8, radius_px=RADIUS_PX)
    cut = Disc(x_px=409.3, y_px=410.8, radius_px=RADIUS_PX, notch_deg=-73.0, flat_px=depth_px)
    taken = np.count_nonzero(disc_inside(whole, SHAPE, 0)) - np.count_nonzero(disc_inside(cut, SHAPE, 0))
    assert taken / px_per_mm**2 == pytest.approx(VALUE[wafer, "primary_flat_segment_area"], rel=5e-3)  # its chord has 230 pixels
