import numpy as np
import pytest

from sheenmap.colour import adapted, srgb

D65 = np.array([95.0456, 100.0, 108.9058])
A = np.array([109.85, 100.0, 35.58])


@pytest.mark.parametrize("white", [D65, A])
def test_the_white_that_the_eye_is_adapted_to_comes_out_white(white):
    rgb, in_gamut = srgb(white, white)
    assert rgb == pytest.approx(np.ones(3), abs=1e-4)  # the printed matrix misses its own white by that
    assert in_gamut


def test_a_colour_out_of_gamut_is_flagged_and_clipped():
    green_laser = np.array([[17.0, 80.0, 4.0], [30.0, 40.0, 30.0]])
    rgb, in_gamut = srgb(green_laser, D65)
    assert in_gamut.tolist() == [False, True]
    assert rgb.min() >= 0 and rgb.max() <= 1
    assert rgb[0, 0] == 0


def test_what_is_brighter_than_the_white_is_out_of_gamut():
    rgb, in_gamut = srgb(1.01 * D65, D65)
    assert not in_gamut
    assert rgb == pytest.approx(np.ones(3))


def test_adaptation_carries_one_white_to_the_other():
    assert adapted(A, A, D65) == pytest.approx(D65, rel=1e-12)
