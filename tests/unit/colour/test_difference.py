import numpy as np
import pytest

from sheenmap.colour import delta_e_2000

OPPOSITE = (np.array([50.0, 2.49, -0.001]), np.array([50.0, -2.49, 0.001]))


def test_exactly_opposite_hues_do_not_depend_on_rounding():
    base = float(delta_e_2000(*OPPOSITE))
    turned_up, turned_down = (delta_e_2000(OPPOSITE[0], OPPOSITE[1] * [1, 1, 1 + e]) for e in (1e-13, -1e-13))
    assert base == pytest.approx(float(turned_up), abs=1e-9)
    assert base == pytest.approx(float(turned_down), abs=1e-9)


def test_colours_broadcast():
    many = np.random.default_rng(1).uniform(-50, 50, (4, 1, 3))
    assert delta_e_2000(many, many.reshape(1, 4, 3)).shape == (4, 4)


def test_two_greys_differ_by_lightness_alone():
    assert delta_e_2000(np.array([50.0, 0, 0]), np.array([51.0, 0, 0])) == pytest.approx(1.0, abs=1e-3)
