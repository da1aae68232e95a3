"""The colour room against published numbers and against colour-science 0.4."""

import csv
from pathlib import Path

import colour
import numpy as np
import pytest

from sheenmap.colour import adapted, chromaticity, decode_srgb, delta_e_2000, encode_srgb, lab, srgb, white_point, xyz
from sheenmap.colour.srgb import SCREEN_WHITE, XYZ_TO_RGB

HERE = Path(__file__).parent
FINE_NM = np.arange(380.0, 781.0)
SHAPE = colour.SpectralShape(380, 780, 1)
CIE_1931 = "CIE 1931 2 Degree Standard Observer"
CIE_1964 = "CIE 1964 10 Degree Standard Observer"


def table(name):
    with (HERE / name).open(encoding="utf-8") as file:
        return list(csv.DictReader(line for line in file if not line.startswith("#")))


SRGB = {row["key"]: row["value"] for row in table("srgb_constants.csv")}


@pytest.mark.parametrize("row", table("ciede2000_sharma2005.csv"), ids=lambda row: row["pair"])
def test_difference_agrees_with_sharma_wu_dalal(row):
    one, other = (np.array([float(row[axis + side]) for axis in "Lab"]) for side in "12")
    assert delta_e_2000(one, other) == pytest.approx(float(row["dE00"]), abs=1e-4)  # the table has four decimals
    assert delta_e_2000(other, one) == pytest.approx(float(row["dE00"]), abs=1e-4)


@pytest.mark.parametrize("key", [key for key in SRGB if key.startswith(("encode(", "decode("))])
def test_srgb_curve_agrees_with_iec_61966(key):
    curve, argument = key.rstrip(")").split("(")
    numerator, _, denominator = argument.partition("/")
    at = float(numerator) / float(denominator or 1)
    got = encode_srgb(np.array(at)) if curve == "encode" else decode_srgb(np.array(at))
    assert got == pytest.approx(float(SRGB[key]), abs=1e-9)  # ten digits in the table


def test_srgb_matrices_agree_with_iec_61966():
    back = np.linalg.inv(XYZ_TO_RGB)
    for i, x in enumerate("XYZ"):
        for j, p in enumerate("RGB"):
            assert XYZ_TO_RGB[j, i] == float(SRGB[f"matrix_XYZ_to_RGB.{p}.{x}"])
            assert back[i, j] == pytest.approx(float(SRGB[f"matrix_RGB_to_XYZ.{x}.{p}"]), abs=5e-5)  # four decimals


def test_srgb_primaries_and_white_agree_with_iec_61966():
    for primary, column in zip("RGB", np.linalg.inv(XYZ_TO_RGB).T):
        listed = [float(SRGB[f"primary.{primary}.{axis}"]) for axis in "xy"]
        assert chromaticity(column) == pytest.approx(listed, abs=1e-4)  # both are rounded
    assert chromaticity(SCREEN_WHITE) == pytest.approx([float(SRGB["white.x"]), float(SRGB["white.y"])], abs=1e-12)


@pytest.mark.parametrize("name", ["red", "green", "blue", "white", "grey50"])
def test_lab_of_the_screen_colours_agrees_with_the_table(name):
    tristimulus, expected = (np.array(SRGB[f"{kind}({name})"].split(";"), dtype=float) for kind in ("XYZ", "Lab"))
    # XYZ stands there with four decimals of 100: in dark channels that moves a* and b* by up to 3e-4
    assert lab(tristimulus, np.array([95.05, 100.0, 108.90])) == pytest.approx(expected, abs=5e-4)


@pytest.mark.parametrize("row", table("cie_illuminants.csv"), ids=lambda row: f"{row['illuminant']}-{row['observer_deg']}")
def test_white_points_agree_with_cie_15(row):
    lamp = colour.SDS_ILLUMINANTS[row["illuminant"]]
    observer = colour.MSDS_CMFS[CIE_1931 if row["observer_deg"] == "2" else CIE_1964]
    wavelength_nm = lamp.wavelengths
    sampled = np.stack(
        [np.interp(wavelength_nm, observer.wavelengths, channel, left=0, right=0) for channel in observer.values.T]
    )
    x, y = chromaticity(white_point(wavelength_nm, lamp.values, sampled))
    # summed at the lamp's own step; for 10 degrees the listed F and LED rows are calculations of colour-science, no CIE print
    tolerance = 6e-5 if row["observer_deg"] == "2" else 3e-4
    assert (x, y) == pytest.approx((float(row["x"]), float(row["y"])), abs=tolerance)


def films():
    """Reflectances (12, W) with fringes, from slow to quick, and dark ones among them."""
    wave_number = 1 / FINE_NM
    return np.stack([depth * (1 + np.cos(4 * np.pi * path * wave_number)) / 2 for path, depth in
                     zip(np.linspace(0, 4000, 12), np.tile([0.9, 0.3, 0.01], 4))])  # fmt: skip


def curve(values):
    return colour.SpectralDistribution(dict(zip(FINE_NM, values)))


@pytest.mark.parametrize("lamp_name", ["A", "D65", "FL11", "LED-B3"])
@pytest.mark.parametrize("observer_name", [CIE_1931, CIE_1964])
def test_xyz_and_lab_agree_with_colour_science(lamp_name, observer_name):
    source = colour.SDS_ILLUMINANTS[lamp_name]
    lamp = np.interp(FINE_NM, source.wavelengths, source.values)
    observer = colour.MSDS_CMFS[observer_name].copy().align(SHAPE)
    ours = xyz(films(), FINE_NM, lamp, observer.values.T)
    theirs = np.stack([colour.sd_to_XYZ(curve(film), observer, curve(lamp), method="Integration") for film in films()])
    assert ours == pytest.approx(theirs, rel=1e-10)  # same sum; 400 terms round at 1e-14
    white = white_point(FINE_NM, lamp, observer.values.T)
    assert lab(ours, white) == pytest.approx(colour.XYZ_to_Lab(theirs / 100, colour.XYZ_to_xy(white)), abs=1e-8)


def test_differences_agree_with_colour_science():
    rng = np.random.default_rng(20)
    one, other = rng.uniform([0, -100, -100], [100, 100, 100], (2, 5000, 3))
    near = one + rng.normal(0, 1, one.shape)
    assert delta_e_2000(one, other) == pytest.approx(colour.delta_E(one, other, method="CIE 2000"), abs=1e-9)
    assert delta_e_2000(one, near) == pytest.approx(colour.delta_E(one, near, method="CIE 2000"), abs=1e-9)


@pytest.mark.parametrize("white_xy", [(0.44758, 0.40745), (0.3127, 0.3290), (0.3756, 0.3723)])
def test_srgb_and_adaptation_agree_with_colour_science(white_xy):
    colours = np.random.default_rng(21).uniform([5, 5, 2], [90, 95, 70], (500, 3))
    white, screen = (100 * colour.xy_to_XYZ(np.array(xy)) for xy in (white_xy, (0.3127, 0.3290)))
    theirs = colour.chromatic_adaptation(colours, white, screen, method="Von Kries", transform="Bradford")
    assert adapted(colours, white, screen) == pytest.approx(theirs, rel=1e-9)
    encoded = colour.XYZ_to_sRGB(theirs / 100)
    rgb, in_gamut = srgb(colours, white)
    assert rgb == pytest.approx(np.clip(encoded, 0, 1), abs=1e-9)  # the same printed matrix
    is_clear = np.min(np.abs(encoded * (1 - encoded)), axis=1) > 1e-3
    assert np.array_equal(in_gamut[is_clear], np.all((encoded >= 0) & (encoded <= 1), axis=1)[is_clear])
    assert 50 < in_gamut.sum() < 450
