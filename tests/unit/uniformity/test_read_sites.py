import numpy as np
import pytest

from sheenmap.flags import AMBIGUOUS, OUTSIDE
from sheenmap.uniformity import read_sites
from sheenmap.wafer import Sites


def spot(radius_px=5.0, x_px=20.0, y_px=20.0):
    one = np.ones(1)
    return Sites(
        layout="points", x_mm=0 * one, y_mm=0 * one, x_px=x_px * one, y_px=y_px * one, radius_mm=1.0, radius_px=radius_px
    )


def even(value=500.0, noise=0.0, seed=0):
    values = value + np.random.default_rng(seed).normal(0, noise, (41, 41)) if noise else np.full((41, 41), value)
    return values, np.full((41, 41), noise), np.zeros((41, 41), np.uint16)


def test_reading_is_the_mean_of_the_spot():
    reading = read_sites(*even(), spot())[0]
    assert (reading.thickness_nm, reading.status, reading.number) == (500.0, "measured", 1)
    assert reading.pixels == reading.claimed == 81  # centres within 5 pixels of a pixel's centre


def test_slope_across_the_spot_does_not_matter():
    values, sigma, flags = even()
    values = values + 2.0 * (np.arange(41) - 20)
    assert read_sites(values, sigma, flags, spot())[0].thickness_nm == pytest.approx(500)


def test_noise_shrinks_with_the_spot_and_what_is_shared_does_not():
    reading = read_sites(*even(noise=2.0), spot(15.0), 0.3)[0]
    assert reading.u_local_nm == pytest.approx(2 / np.sqrt(reading.pixels), rel=0.1)
    assert reading.u_nm == pytest.approx(np.hypot(reading.u_local_nm, 0.3))


def test_correlated_noise_shrinks_more_slowly():
    one, four = (read_sites(*even(noise=2.0), spot(), noise_correlation=c)[0].u_local_nm for c in (1.0, 4.0))
    assert four == pytest.approx(2 * one)


def test_uncertainty_is_true():
    """Readings of 400 spots of pure noise: 95 % lie within 1.96 u, give or take 2.2 % (two standard deviations)."""
    inside = []
    for seed in range(400):
        reading = read_sites(*even(noise=2.0, seed=seed), spot())[0]
        inside.append(abs(reading.thickness_nm - 500) < 1.96 * reading.u_local_nm)
    assert 0.92 < np.mean(inside) < 0.98


def test_a_few_wrong_orders_hardly_move_the_reading():
    values, sigma, flags = even(noise=1.0)
    values[18:21, 18:21] = 690.0  # 9 of 81 pixels
    assert read_sites(values, sigma, flags, spot())[0].thickness_nm == pytest.approx(500, abs=0.5)


def test_a_step_through_the_spot_shows_in_the_uncertainty():
    values, sigma, flags = even(noise=1.0)
    values[:, 21:] += 190
    assert read_sites(values, sigma, flags, spot())[0].u_local_nm > 20


def test_fewer_than_half_claimed_is_not_measured():
    values, sigma, flags = even()
    flags[:21] = AMBIGUOUS.mask
    reading = read_sites(values, sigma, flags, spot())[0]
    assert reading.thickness_nm is None and reading.u_nm is None and reading.u_local_nm is None
    assert reading.status == "not measured: 35 of 81 pixels are claimed, most are ambiguous"


def test_half_claimed_is_measured():
    values, sigma, flags = even()
    flags[:20] = AMBIGUOUS.mask
    assert read_sites(values, sigma, flags, spot())[0].status == "measured"


def test_spot_over_the_region_s_border_counts_its_part_inside():
    values, sigma, flags = even()
    flags[:, 21:] = OUTSIDE.mask
    reading = read_sites(values, sigma, flags, spot())[0]
    assert reading.status == "measured" and reading.pixels == reading.claimed == 46


@pytest.mark.parametrize("place", [(20.0, -30.0), (500.0, 20.0)])
def test_spot_outside_the_region_or_picture_is_not_measured(place):
    reading = read_sites(*even(), spot(x_px=place[0], y_px=place[1]))[0]
    assert reading.status == "not measured: the spot lies outside the region"


def test_not_finite_is_not_claimed():
    values, sigma, flags = even()
    values[:] = np.nan
    assert read_sites(values, sigma, flags, spot())[0].claimed == 0
