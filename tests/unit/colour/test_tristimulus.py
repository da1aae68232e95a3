import numpy as np
import pytest

from sheenmap.colour import chromaticity, white_point, xyz

WAVELENGTH_NM = np.arange(380.0, 781.0, 5.0)
LIGHT = np.linspace(1.0, 3.0, WAVELENGTH_NM.size)
OBSERVER = np.stack([np.exp(-(((WAVELENGTH_NM - centre) / 40) ** 2)) for centre in (600.0, 555.0, 450.0)])


def test_a_perfect_mirror_has_y_100_and_is_the_white_point():
    mirror = np.ones(WAVELENGTH_NM.size)
    white = white_point(WAVELENGTH_NM, LIGHT, OBSERVER)
    assert white[1] == pytest.approx(100, rel=1e-14)
    assert xyz(mirror, WAVELENGTH_NM, LIGHT, OBSERVER) == pytest.approx(white, rel=1e-13)


def test_on_an_equal_step_it_is_the_plain_sum_the_ends_counted_whole():
    reflectance = np.linspace(0.1, 0.9, WAVELENGTH_NM.size)
    wide_observer = np.ones_like(OBSERVER)  # the ends weigh as much as the rest
    expected = 100 * (LIGHT * reflectance).sum() / LIGHT.sum()
    assert xyz(reflectance, WAVELENGTH_NM, LIGHT, wide_observer) == pytest.approx(np.full(3, expected), rel=1e-13)


def test_on_an_uneven_step_a_sample_counts_by_the_width_of_its_cell():
    wavelength_nm = np.array([400.0, 410.0, 430.0])  # cells of 10, 15 and 20 nm
    got = xyz(np.array([1.0, 0.0, 0.0]), wavelength_nm, np.ones(3), np.ones((3, 3)))
    assert got == pytest.approx(np.full(3, 100 * 10 / 45), rel=1e-14)


def test_leading_axes_are_kept():
    assert xyz(np.ones((2, 5, WAVELENGTH_NM.size)), WAVELENGTH_NM, LIGHT, OBSERVER).shape == (2, 5, 3)


def test_power_of_the_lamp_does_not_matter():
    reflectance = np.linspace(0.9, 0.1, WAVELENGTH_NM.size)
    dim, bright = (xyz(reflectance, WAVELENGTH_NM, gain * LIGHT, OBSERVER) for gain in (1e-9, 1e9))
    assert dim == pytest.approx(bright, rel=1e-13)


@pytest.mark.parametrize(
    "wavelength_nm, light, observer",
    [
        (WAVELENGTH_NM, LIGHT[1:], OBSERVER),
        (WAVELENGTH_NM, LIGHT, OBSERVER[:2]),
        (WAVELENGTH_NM, LIGHT, OBSERVER.T),
        (WAVELENGTH_NM[:1], LIGHT[:1], OBSERVER[:, :1]),
        (WAVELENGTH_NM, 0 * LIGHT, OBSERVER),
    ],
)
def test_curves_that_do_not_go_together_are_refused(wavelength_nm, light, observer):
    with pytest.raises(ValueError):
        white_point(wavelength_nm, light, observer)


def test_chromaticity_of_a_perfect_black_is_not_a_number():
    assert np.isnan(chromaticity(np.zeros(3))).all()
    assert chromaticity(np.array([20.0, 50.0, 30.0])) == pytest.approx([0.2, 0.5])
