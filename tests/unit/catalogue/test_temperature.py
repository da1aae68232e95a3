"""Names of lamps by temperature."""

import pytest

from sheenmap.catalogue import TemperatureError, lamp
from sheenmap.catalogue.temperature import read_temperature_lamp
from sheenmap.errors import UnknownNameError


@pytest.mark.parametrize("name", ["daylight 5600", "Daylight 5600 K", "daylight-5600", "daylight  5600.0", " DAYLIGHT 5600K "])
def test_spellings_of_one_lamp(name):
    assert lamp(name).name == "daylight 5600"


@pytest.mark.parametrize("name", ["D65", "A", "FL2", "daylighting 5000", "blackbody3200"])
def test_other_names_are_none_of_these(name):
    assert read_temperature_lamp(name) is None


@pytest.mark.parametrize("name", ["daylight 4000", "daylight 25000", "blackbody 500", "blackbody 100000"])
def test_the_ends_of_the_range_are_allowed(name):
    assert lamp(name).name == name


@pytest.mark.parametrize(
    "name,said",
    [
        ("daylight 3999", r"3999 K; allowed: a temperature of 4000 to 25000 kelvin"),
        ("daylight 25001", r"25001 K; allowed: a temperature of 4000 to 25000 kelvin"),
        ("blackbody 499", r"499 K; allowed: a temperature of 500 to 100000 kelvin"),
        ("blackbody 1000000", r"1e\+06 K; allowed"),
        ("blackbody -3200", r"'-3200' is no temperature"),
        ("daylight", r"no temperature; allowed: .*'daylight 5600'"),
        ("blackbody warm", r"'warm' is no temperature"),
        ("blackbody nan", r"'nan' is no temperature"),
    ],
)
def test_a_wrong_temperature_says_what_is_allowed(name, said):
    with pytest.raises(TemperatureError, match=said) as caught:
        lamp(name)
    assert isinstance(caught.value, UnknownNameError)
    assert str(caught.value).startswith("lamp ")
