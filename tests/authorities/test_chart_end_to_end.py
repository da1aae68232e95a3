"""Charts from end to end: reflectance by tmm 0.2, colour by colour-science 0.4, none of our own optics or colour."""

from pathlib import Path

import colour
import numpy as np
import pytest
import tmm

from sheenmap.camera import Encoding
from sheenmap.catalogue import camera, lamp, material
from sheenmap.charts import chart_data
from sheenmap.optics import Layer, Stack
from sheenmap.recipe.types import CameraSetup, Quantity, Recipe, Shot, ViewSetup
from sheenmap.spectra import sample
from sheenmap.wafer import RegionSpec

OBSERVERS = {"cie-1931": "CIE 1931 2 Degree Standard Observer", "cie-1964": "CIE 1964 10 Degree Standard Observer"}
THICKNESSES_NM = (*range(0, 400, 40), *range(400, 1000, 100), *range(1000, 1501, 250))

# name: medium, layers (None: searched), substrate, light, angle, polarisation, observer
CASES = {
    "oxide": ("air", [("SiO2", None)], "Si", "LED-B3", 0.0, "none", "cie-1931"),
    "nitride on pad oxide": ("air", [("Si3N4", None), ("SiO2", 20.0)], "Si", "D65", 30.0, "s", "cie-1931"),
    "titania on glass, front face": ("air", [("TiO2", None)], "N-BK7", "A", 45.0, "p", "cie-1964"),
    "soap film": ("air", [("soap-water", None)], "air", "D65", 0.0, "none", "cie-1931"),
    "absorbing film on metal": ("air", [("a-Si", None)], "Al", "FL11", 20.0, "s", "cie-1964"),
    "film under water": ("water", [("PMMA", None), ("HfO2", 80.0)], "Au", "LED-V1", 0.0, "none", "cie-1931"),
}


def recipe(medium, layers, substrate, light, angle_deg, polarisation):
    stack = Stack(
        medium=material(medium),
        layers=tuple(Layer(index=material(name), thickness_nm=thickness_nm) for name, thickness_nm in layers),
        substrate=material(substrate),
    )
    shot = Shot(
        light=lamp(light),
        camera=CameraSetup(response=camera("generic"), encoding=Encoding()),
        view=ViewSetup(angle_deg=Quantity(value=angle_deg), polarisation=polarisation),
    )
    return Recipe(
        path=Path("case.toml"), title="case", text="", digest="", stack=stack, search_nm=(0.0, 1500.0),
        index_scale=Quantity(value=1.0), shots=(shot,), region=RegionSpec(),
    )  # fmt: skip


def reflectance(stack, thickness_nm, wavelength_nm, angle_deg, polarisation):
    """By tmm, whose indices are n + ik: ours, conjugated. Between samples they follow the optics room's monotone cubic."""
    media = [stack.medium, *(layer.index for layer in stack.layers), stack.substrate]
    indices = np.conj(np.stack([sample(curve, wavelength_nm, interpolation="monotone cubic") for curve in media]))
    thicknesses = [
        np.inf,
        *(thickness_nm if layer.thickness_nm is None else layer.thickness_nm for layer in stack.layers),
        np.inf,
    ]
    mode = "s" if polarisation == "none" else polarisation  # "none" is only met at normal incidence here, where s and p are one
    angle_rad = np.radians(angle_deg)
    rows = zip(indices.T, wavelength_nm)
    return np.array([tmm.coh_tmm(mode, list(n), thicknesses, angle_rad, wavelength)["R"] for n, wavelength in rows])


@pytest.mark.parametrize("name", CASES)
def test_chart_agrees_with_tmm_and_colour_science(name):
    medium, layers, substrate, light, angle_deg, polarisation, observer = CASES[name]
    case = recipe(medium, layers, substrate, light, angle_deg, polarisation)
    chart = chart_data(case, step_nm=10.0, observer=observer)
    low_nm, high_nm = chart.setup.band_nm
    assert low_nm <= 400 and high_nm >= 700
    wavelength_nm = np.arange(low_nm, high_nm + 0.5)
    shape = colour.SpectralShape(low_nm, high_nm, 1)
    functions = colour.MSDS_CMFS[OBSERVERS[observer]].copy().align(shape)
    source = colour.SDS_ILLUMINANTS[light]
    power = colour.SpectralDistribution(dict(zip(wavelength_nm, np.interp(wavelength_nm, source.wavelengths, source.values))))
    mirror = colour.SpectralDistribution(dict.fromkeys(wavelength_nm, 1.0))
    white_xy = colour.XYZ_to_xy(colour.sd_to_XYZ(mirror, functions, power, method="Integration"))
    for thickness_nm in THICKNESSES_NM:
        seen = colour.SpectralDistribution(
            dict(zip(wavelength_nm, reflectance(case.stack, thickness_nm, wavelength_nm, angle_deg, polarisation)))
        )
        xyz = colour.sd_to_XYZ(seen, functions, power, method="Integration")
        lab = colour.XYZ_to_Lab(xyz / 100, white_xy)
        at = int(np.argmin(np.abs(chart.thickness_nm - thickness_nm)))
        assert chart.thickness_nm[at] == thickness_nm
        # reflectances agree to 1e-10, sums to 1e-12; the rest is the rounding of the frozen lamp and observer
        assert chart.xyz[at] == pytest.approx(xyz, rel=1e-6, abs=1e-6)
        assert chart.lab[at] == pytest.approx(lab, rel=1e-6, abs=1e-4)
        assert colour.delta_E(chart.lab[at], lab, method="CIE 2000") < 1e-3


def test_oxide_turns_through_the_hues_in_the_order_that_is_common_practice():
    """Under fluorescent light: 270 nm red-violet, 310 blue, 350 green, 390 yellow, 420 pink, 460 violet.

    Source: common practice (clean-room tables). Names and thicknesses are subjective, so only the direction is held: hue falls.
    """
    chart = chart_data(recipe("air", [("SiO2", None)], "Si", "FL2", 0.0, "none"), step_nm=10.0)
    hue_deg = np.degrees(np.unwrap(np.arctan2(chart.lab[:, 2], chart.lab[:, 1])))
    stretch = hue_deg[(chart.thickness_nm >= 260) & (chart.thickness_nm <= 460)]
    assert np.all(np.diff(stretch) < 0)
    assert stretch[0] - stretch[-1] > 330


def test_violets_of_oxide_stand_at_the_thicknesses_that_the_printed_tables_give():
    """About 100, 270, 460 and 630 nm are all violet or violet-red. Source: common practice, under fluorescent light."""
    chart = chart_data(recipe("air", [("SiO2", None)], "Si", "FL2", 0.0, "none"), step_nm=10.0)
    hue_deg = np.degrees(np.arctan2(chart.lab[:, 2], chart.lab[:, 1])) % 360
    for thickness_nm in (100, 270, 460, 630):
        assert 265 < hue_deg[thickness_nm // 10] < 350
