"""The frozen CIE lamps and observers against listed chromaticities, and lamps by temperature against colour-science 0.4."""

import csv
from pathlib import Path

import colour
import numpy as np
import pytest

from sheenmap.catalogue import blackbody, lamp, observer

# CIE 15 chromaticities as listed by colour-science 0.4.7; 10-degree rows of FL and LED lamps are its calculation
TABLE = Path(__file__).parent / "cie_illuminants.csv"
OBSERVERS = {"2": "cie-1931", "10": "cie-1964"}
# 2 degrees: what summing at the tabulated step leaves (5e-5, FL and LED lamps) plus the rounding of the list;
# 10 degrees: the listed F and LED rows are calculations with another interpolation (FL10 is the worst)
TOLERANCE = {"2": 6e-5, "10": 3e-4}


def rows():
    with TABLE.open(encoding="utf-8") as file:
        return list(csv.DictReader(line for line in file if not line.startswith("#")))


def summed_chromaticity(light, functions):
    """x and y by summing at the lamp's own step."""
    weights = np.stack(
        [np.interp(light.wavelength_nm, functions.wavelength_nm, row, left=0, right=0) for row in functions.values]
    )
    x, y, z = weights @ light.values
    return x / (x + y + z), y / (x + y + z)


@pytest.mark.parametrize("row", rows(), ids=lambda row: f"{row['illuminant']}-{row['observer_deg']}")
def test_frozen_lamp_has_the_listed_white_point(row):
    got = summed_chromaticity(lamp(row["illuminant"]), observer(OBSERVERS[row["observer_deg"]]))
    assert got == pytest.approx((float(row["x"]), float(row["y"])), abs=TOLERANCE[row["observer_deg"]])


@pytest.mark.parametrize("row", rows(), ids=lambda row: f"{row['illuminant']}-{row['observer_deg']}")
def test_frozen_lamp_sums_as_the_table_says(row):
    got = summed_chromaticity(lamp(row["illuminant"]), observer(OBSERVERS[row["observer_deg"]]))
    listed = float(row["x_sum_own_step"]), float(row["y_sum_own_step"])
    assert got == pytest.approx(listed, abs=2e-6)  # six decimals in the table


@pytest.mark.parametrize("temperature_k", [4000, 5003, 5600, 6504, 7000, 7504, 12000, 25000])
def test_daylight_agrees_with_colour_science(temperature_k):
    xy = colour.temperature.CCT_to_xy_CIE_D(temperature_k)
    theirs = colour.sd_CIE_illuminant_D_series(xy)
    ours = lamp(f"daylight {temperature_k}")
    at = np.interp(theirs.wavelengths, ours.wavelength_nm, ours.values)
    # M1 and M2 are rounded to three decimals on both sides, so only floating point is left
    assert at == pytest.approx(np.maximum(theirs.values, 0), abs=1e-9)


@pytest.mark.parametrize("name,temperature_k", [("D50", 5003), ("D55", 5503), ("D65", 6504), ("D75", 7504)])
def test_daylight_gives_the_tabulated_illuminants(name, temperature_k):
    listed, ours = lamp(name), lamp(f"daylight {temperature_k}")
    at = np.interp(listed.wavelength_nm, ours.wavelength_nm, ours.values)
    # CIE rounds to 0.1 up to 2 decimals, and its temperatures (such as 5002.78) to whole kelvin here
    assert at == pytest.approx(listed.values, abs=0.06)


@pytest.mark.parametrize("temperature_k", [500, 1500, 3200, 6500, 100000])
def test_blackbody_agrees_with_colour_science(temperature_k):
    ours = blackbody(temperature_k)
    theirs = colour.colorimetry.planck_law(ours.wavelength_nm * 1e-9, temperature_k)
    share = ours.values / ours.values[0] / (theirs / theirs[0])
    # its second constant is 1.4388e-2 m K, ours 1.438776877e-2: their exponent differs by 1.6e-5 of up to 96 at 300 nm
    assert share == pytest.approx(np.ones_like(share), rel=2e-3)


def test_blackbody_of_cie_a_is_illuminant_a():
    listed, ours = lamp("A"), blackbody(2848 * 1.438776877e-2 / 1.435e-2)  # CIE 15: 2848 K with c2 = 1.435e-2 m K
    both = np.isin(listed.wavelength_nm, ours.wavelength_nm)
    at = ours.values[np.isin(ours.wavelength_nm, listed.wavelength_nm)]
    assert at == pytest.approx(listed.values[both], rel=1e-5)  # six digits in the table


@pytest.mark.parametrize(
    "name,title", [("cie-1931", "CIE 1931 2 Degree Standard Observer"), ("cie-1964", "CIE 1964 10 Degree Standard Observer")]
)
def test_frozen_observer_is_the_one_that_colour_science_carries(name, title):
    theirs = colour.MSDS_CMFS[title]
    ours = observer(name)
    assert np.array_equal(ours.wavelength_nm, theirs.wavelengths)
    assert ours.values == pytest.approx(theirs.values.T, rel=1e-8)  # nine digits in the file
