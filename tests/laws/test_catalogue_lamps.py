"""Laws of radiation that the lamps by temperature must obey."""

import numpy as np
from hypothesis import given
from hypothesis.strategies import floats, sampled_from
from pytest import approx

from sheenmap.catalogue import blackbody, lamp

WIEN_NM_K = 2.897771955e6  # CODATA 2018
SECOND_RADIATION_NM_K = 1.438776877e7  # CODATA 2018


@given(temperature_k=floats(2900, 9000))
def test_blackbody_peaks_where_wien_says(temperature_k):
    body = blackbody(temperature_k)
    peak_nm = body.wavelength_nm[np.argmax(body.values)]
    assert abs(peak_nm - WIEN_NM_K / temperature_k) <= 1.01  # half of the 2 nm step; the curve is lopsided by far less


@given(cool_k=floats(500, 50000), hotter=floats(1.001, 2.0))
def test_hotter_blackbody_is_bluer_everywhere(cool_k, hotter):
    ratio = blackbody(cool_k * hotter).values / blackbody(cool_k).values
    assert np.all(np.diff(ratio) < 0)


@given(temperature_k=floats(500, 1500))
def test_cool_blackbody_follows_wiens_approximation(temperature_k):
    body = blackbody(temperature_k)
    visible = body.wavelength_nm <= 780
    x = body.wavelength_nm[visible]
    wien = x**-5.0 * np.exp(-SECOND_RADIATION_NM_K / (x * temperature_k))
    ratio = body.values[visible] / wien
    # what the approximation leaves out is exp(-x) < 5e-6 at 780 nm and 1500 K
    assert ratio == approx(np.full_like(ratio, ratio[0]), rel=1e-5)


def test_very_hot_blackbody_falls_as_rayleigh_and_jeans_say():
    body = blackbody(100000.0)
    slope = np.gradient(np.log(body.values), np.log(body.wavelength_nm))
    # d ln B/d ln x = -5 + (u e^u)/(e^u - 1), u = c2/(x T), which is -4 + u/2 + u^2/12 for small u
    u = SECOND_RADIATION_NM_K / (body.wavelength_nm * 100000.0)
    assert slope[5:-5] == approx((-4 + u / 2 + u**2 / 12)[5:-5], abs=1e-3)


@given(family=sampled_from(["daylight", "blackbody"]), temperature_k=floats(4000, 25000))
def test_lamp_by_temperature_is_a_hundred_at_560_nm_and_never_negative(family, temperature_k):
    light = lamp(f"{family} {temperature_k:.2f}")
    assert np.all(light.values >= 0)
    assert light.values[light.wavelength_nm == 560.0] == approx([100.0], abs=1e-9)


@given(temperature_k=floats(4000, 20000), hotter=floats(1.05, 1.25))
def test_hotter_daylight_is_bluer(temperature_k, hotter):
    def blue_share(light):
        return light.values[light.wavelength_nm == 450.0] / light.values[light.wavelength_nm == 650.0]

    assert blue_share(lamp(f"daylight {temperature_k * hotter:.3f}")) > blue_share(lamp(f"daylight {temperature_k:.3f}"))
