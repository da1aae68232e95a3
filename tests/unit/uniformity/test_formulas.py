import numpy as np
import pytest

from sheenmap.errors import UnknownNameError
from sheenmap.uniformity import FORMULAS, nonuniformity, nonuniformity_estimate

SITES = 500 + np.random.default_rng(5).normal(0, 4, 49)


def test_unmeasured_sites_are_left_out():
    assert nonuniformity([500, np.nan, 510], "range") == 10


@pytest.mark.parametrize("values", [[], [np.nan], [500.0], [-5.0, 5.0], [0.0, 0.0]])
def test_one_site_or_a_mean_of_zero_is_undefined(values):
    assert nonuniformity(values, "half-range over mean") is None


def test_deviation_from_target_wants_one():
    assert nonuniformity([490, 505], "largest deviation over target") is None
    assert nonuniformity([490, 505], "largest deviation over target", target_nm=500) == pytest.approx(2)


def test_unknown_formula_names_the_nearest():
    with pytest.raises(UnknownNameError, match="half-range over mean"):
        nonuniformity([1, 2], "halfrange over mean")


@pytest.mark.parametrize("name", ["sample sd over mean", "half-range over mean", "interquartile range over median"])
def test_uncertainty_is_the_spread_over_repeated_readings(name):
    """The truth is drawn once and read 2000 times; the spread is known to 1.6 %, and one reading's own u wanders by some 20 %."""
    rng = np.random.default_rng(1)
    repeated = [nonuniformity(SITES + rng.normal(0, 0.5, SITES.size), name) for _ in range(2000)]
    assert nonuniformity_estimate(SITES, 0.5, name).u == pytest.approx(np.std(repeated), rel=0.2)


def test_noise_alone_widens_a_range_and_the_bias_says_by_how_much():
    """49 equal sites read with u = 1: the expected range of 49 normal values is 4.5 (Tippett), twice that variance 6.4."""
    rng = np.random.default_rng(2)
    estimates = [nonuniformity_estimate(500 + rng.normal(0, 1, 49), 1.0, "range") for _ in range(40)]
    assert np.mean([e.value for e in estimates]) == pytest.approx(4.5, abs=0.3)
    assert np.mean([e.bias for e in estimates]) == pytest.approx(4.5 * (np.sqrt(2) - 1), abs=0.4)


def test_shared_offset_moves_a_percentage_only_through_its_mean():
    """An offset of 1 % of the mean moves a share of the mean by 1 % of itself."""
    own, shared = (nonuniformity_estimate(SITES, 0.5, "sample sd over mean", u_common_nm=u) for u in (0, 5))
    assert shared.u == pytest.approx(np.hypot(own.u, 0.01 * own.value), rel=0.05)


def test_same_values_give_the_same_uncertainty():
    assert nonuniformity_estimate(SITES, 0.5, "range").u == nonuniformity_estimate(SITES, 0.5, "range").u


def test_undefined_has_no_estimate():
    assert nonuniformity_estimate([500], 0.5, "range") is None


def test_extremes_are_marked_as_for_sites_only():
    """A formula looks at extremes exactly when one value far out among 10^5 doubles it."""
    even = np.tile([499.0, 501.0], 50_000)
    far = even.copy()
    far[0] = 600
    for name, formula in FORMULAS.items():
        if formula.unit == "%" and not formula.larger_is_better:
            grown = nonuniformity(far, name, target_nm=500) > 2 * nonuniformity(even, name, target_nm=500)
            assert grown == formula.of_extremes, name
