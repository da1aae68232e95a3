import numpy as np
import pytest

from sheenmap.colour import colour_name


@pytest.mark.parametrize(
    "lab, name",
    [
        ((3, 0, 0), "black"),
        ((20, 1, 1), "very dark grey"),
        ((40, 0, -2), "dark grey"),
        ((60, 0, 0), "grey"),
        ((80, 0, 0), "light grey"),
        ((98, 1, 0), "white"),
        ((60, 0, -9), "bluish grey"),
        ((30, 9, -4), "dark purplish grey"),
        ((60, 40, 20), "red"),
        ((40, 20, 30), "dark brown"),
        ((70, 20, 40), "orange"),
        ((85, 0, 60), "light yellow"),
        ((46, 5, 40), "olive"),
        ((60, -20, 45), "yellow-green"),
        ((60, -50, 30), "green"),
        ((60, -40, -10), "blue-green"),
        ((38, -5, -40), "dark blue"),
        ((20, 25, -45), "very dark violet"),
        ((50, 40, -30), "purple"),
        ((80, 40, -5), "light pink"),
        ((40, 60, 0), "dark crimson"),
    ],
)
def test_a_colour_is_called_by_its_range(lab, name):
    assert colour_name(np.array(lab, dtype=float)) == name


def test_the_screen_primaries_go_by_their_usual_names():
    # CIELAB of the sRGB primaries and of yellow, from srgb_constants.csv and (yellow) the same matrix
    primaries = {"red": (53.23, 80.11, 67.22), "light green": (87.74, -86.19, 83.19), "dark violet": (32.30, 79.19, -107.85)}
    assert {name: colour_name(np.array(lab)) for name, lab in primaries.items()} == {name: name for name in primaries}


def test_every_hue_has_a_name():
    hues = np.radians(np.linspace(0, 360, 721))
    assert all(colour_name(np.array([60, 30 * np.cos(hue), 30 * np.sin(hue)])) for hue in hues)
