"""The far face of a clear substrate."""

import numpy as np
import pytest

from films import layer, stack
from sheenmap.optics import View, bare_reflectance, reflectance, reflectance_and_slope, transmittance

GREEN_NM = np.array([550.0])


@pytest.mark.parametrize("view", [View(), View(angle_deg=50.0), View(aperture=0.4)])
def test_back_of_an_opaque_substrate_is_not_seen(view):
    opaque, bulk = stack(1, layer(2.1), on=4.0 - 0.05j, back=1.0), stack(1, layer(2.1), on=4.0 - 0.05j)
    thickness_nm = np.array([0.0, 60.0, 300.0])
    assert reflectance(opaque, thickness_nm, GREEN_NM, view) == pytest.approx(
        reflectance(bulk, thickness_nm, GREEN_NM, view), abs=1e-15
    )


@pytest.mark.parametrize("polarisation", ["s", "p"])
def test_blank_slab_adds_both_faces_as_power(polarisation):
    view = View(angle_deg=40.0, polarisation=polarisation)
    face = bare_reflectance(stack(1, on=1.5), GREEN_NM, view)
    assert bare_reflectance(stack(1, on=1.5, back=1.0), GREEN_NM, view) == pytest.approx(2 * face / (1 + face), abs=1e-14)


def test_polarisations_are_added_up_apart():
    view = [View(angle_deg=60.0, polarisation=name) for name in ("none", "s", "p")]
    both, s, p = (bare_reflectance(stack(1, on=1.5, back=1.0), GREEN_NM, one)[0] for one in view)
    face = bare_reflectance(stack(1, on=1.5), GREEN_NM, view[0])[0]
    assert both == pytest.approx((s + p) / 2, abs=1e-15)
    assert abs(both - 2 * face / (1 + face)) > 0.01  # what adding the mean polarisation up would give


def test_substrate_takes_its_share_twice_on_the_slanted_way():
    slab = stack(1, on=1.5 - 1e-5j, back=1.0, back_mm=2.0)
    for angle_deg in (0.0, 70.0):
        view = View(angle_deg=angle_deg, polarisation="s")
        face = bare_reflectance(stack(1, on=1.5), GREEN_NM, view)[0]
        slant = np.sqrt(1 - (np.sin(np.deg2rad(angle_deg)) / 1.5) ** 2)
        passed = np.exp(-4 * np.pi * 1e-5 * 2e6 / 550.0 / slant)
        expected = face + (1 - face) ** 2 * passed**2 * face / (1 - face**2 * passed**2)
        assert bare_reflectance(slab, GREEN_NM, view)[0] == pytest.approx(expected, abs=1e-9)  # k^2 and k times a face's slope


def test_matched_back_is_as_if_it_went_on_for_ever():
    thickness_nm = np.linspace(0, 400, 9)
    endless, matched = stack(1, layer(2.1), on=1.5), stack(1, layer(2.1), on=1.5, back=1.5)
    for power in (reflectance, transmittance):
        assert power(matched, thickness_nm, GREEN_NM, View()) == pytest.approx(
            power(endless, thickness_nm, GREEN_NM, View()), abs=1e-15
        )


def test_light_that_cannot_enter_the_substrate_meets_no_back():
    """From glass of 1.9 at 60 degrees nothing but a fading field enters 1.4."""
    hidden = stack(1.9, layer(1.6), on=1.4, back=1.0)
    thickness_nm, view = np.array([0.0, 100.0]), View(angle_deg=60.0)
    r, slope = reflectance_and_slope(hidden, thickness_nm, GREEN_NM, view)
    assert r == pytest.approx(1, abs=1e-12)
    assert slope == pytest.approx(0, abs=1e-12)
    assert transmittance(hidden, thickness_nm, GREEN_NM, view) == pytest.approx(0, abs=1e-15)


def test_light_shut_in_between_two_total_reflections_never_got_there():
    """At 60 degrees from 1.52, a thick gap of 1.0 before glass of 1.5 with air behind: both faces reflect all, from inside."""
    shut = stack(1.52, layer(1.0), on=1.5, back=1.0)
    thickness_nm, view = np.array([0.0, 300.0, 5_000.0, 50_000.0]), View(angle_deg=60.0)
    r, slope = reflectance_and_slope(shut, thickness_nm, GREEN_NM, view)
    assert r == pytest.approx(1, abs=1e-12)
    assert slope == pytest.approx(0, abs=1e-12)
    assert transmittance(shut, thickness_nm, GREEN_NM, view) == pytest.approx(0, abs=1e-15)
