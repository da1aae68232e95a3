"""Rough faces."""

import numpy as np
import pytest

from films import layer, stack
from sheenmap.optics import View, bare_reflectance, reflectance

GREEN_NM = np.array([550.0])


@pytest.mark.parametrize("angle_deg", [0.0, 60.0])
def test_rough_face_reflects_as_bennett_and_porteus_say(angle_deg):
    """H. E. Bennett and J. O. Porteus, J. Opt. Soc. Am. 51, 123 (1961): R / R_smooth = exp(-(4 pi s cos(theta) / L)^2)."""
    view = View(angle_deg=angle_deg)
    smooth, rough = (bare_reflectance(stack(1, on=4, substrate_rough_nm=s), GREEN_NM, view)[0] for s in (0.0, 15.0))
    expected = np.exp(-((4 * np.pi * 15.0 * np.cos(np.deg2rad(angle_deg)) / 550.0) ** 2))
    assert rough / smooth == pytest.approx(expected, rel=1e-12)


def test_roughness_of_a_layer_is_that_of_its_upper_face():
    thick = 1e5  # and absorbing, so that nothing comes back from below
    rough = reflectance(stack(1, layer(2.0 - 0.5j, rough_nm=20.0), on=4), np.array([thick]), GREEN_NM, View())[0, 0]
    alone = bare_reflectance(stack(1, on=2.0 - 0.5j, substrate_rough_nm=20.0), GREEN_NM, View())[0]
    assert rough == pytest.approx(alone, rel=1e-12)


def test_rough_faces_wash_fringes_out():
    thickness_nm = np.linspace(0, 400, 401)
    swing = [
        np.ptp(reflectance(stack(1, layer(1.46, rough_nm=s), on=4, substrate_rough_nm=s), thickness_nm, GREEN_NM, View()))
        for s in (0.0, 5.0, 15.0)
    ]
    assert swing[0] > swing[1] > swing[2] > 0
