import numpy as np
import pytest

from sheenmap.flags import AMBIGUOUS, DARK, OFF_CURVE, OUTSIDE, SATURATED, WEAK
from sheenmap.uniformity import statistics


def field(size=200, mean=500.0, sd=3.0, noise=4.0, seed=0):
    rng = np.random.default_rng(seed)
    truth = mean + rng.normal(0, sd, (size, size))
    values = (truth + rng.normal(0, noise, truth.shape)).astype(np.float32)
    return values, np.full(truth.shape, noise, np.float32), np.zeros(truth.shape, np.uint16), np.ones(truth.shape, bool)


def test_blocked_pixels_and_those_outside_do_not_count():
    values, sigma, flags, inside = field(4, sd=0, noise=0)
    values[0, 0], flags[0, 0] = 9999, OFF_CURVE.mask
    values[0, 1], inside[0, 1] = 9999, False
    values[0, 2] = np.nan
    found = statistics(values, sigma, flags, inside)
    assert (found.pixels, found.claimed, found.mean_nm) == (15, 13, 500.0)


def test_informing_flags_do_not_block():
    values, sigma, flags, inside = field(4)
    flags[:] = WEAK.mask
    assert statistics(values, sigma, flags, inside).claimed == 16


def test_noise_is_taken_off_the_standard_deviation():
    found = statistics(*field())
    assert found.sd_nm == pytest.approx(5.0, rel=0.02)  # 3 and 4 add to 5; 40,000 values know it to 0.4 %
    assert found.sd_noise_corrected_nm == pytest.approx(3.0, rel=0.03)


def test_noise_only_part_has_no_spread_left():
    assert statistics(*field(sd=0.0)).sd_noise_corrected_nm < 0.5


def test_mean_s_uncertainty_has_a_floor_that_pixels_share():
    found = statistics(*field(), 0.7)
    assert found.u_mean_nm == pytest.approx(np.hypot(0.7, 4 / 200))


def test_correlated_noise_shrinks_more_slowly():
    one, four = (statistics(*field(), noise_correlation=c).u_mean_nm for c in (1.0, 4.0))
    assert four == pytest.approx(2 * one)


def test_percentiles_are_by_linear_interpolation():
    values = np.arange(101, dtype=float).reshape(1, 101)
    found = statistics(values, np.ones_like(values), np.zeros(values.shape, np.uint16), np.ones(values.shape, bool))
    assert found.percentiles == {"1": 1, "5": 5, "25": 25, "50": 50, "75": 75, "95": 95, "99": 99} and found.median_nm == 50


def test_nothing_claimed_is_none():
    values, sigma, flags, inside = field(4)
    flags[:] = OUTSIDE.mask
    found = statistics(values, sigma, flags, inside)
    assert found.claimed == 0 and found.mean_nm is None and found.percentiles == {}


def test_flags_are_counted_inside_the_region():
    values, sigma, flags, inside = field(4)
    flags[0] = [OFF_CURVE.mask, AMBIGUOUS.mask, SATURATED.mask, DARK.mask]
    flags[1, 0], inside[1, 0] = OFF_CURVE.mask, False
    found = statistics(values, sigma, flags, inside)
    assert (found.off_curve, found.ambiguous, found.unseen) == (1, 1, 2)
