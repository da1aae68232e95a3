import numpy as np
import pytest

from sheenmap.uniformity import gauge_study
from sheenmap.uniformity.components import StudyError


def readings(seed=0, parts=10, operators=3, repeats=3, sd=(5.0, 1.0, 0.0, 0.5)):
    rng = np.random.default_rng(seed)
    part, operator, both, noise = sd
    return (
        500
        + rng.normal(0, part, (parts, 1, 1))
        + rng.normal(0, operator, (1, operators, 1))
        + rng.normal(0, both, (parts, operators, 1))
        + rng.normal(0, noise, (parts, operators, repeats))
    )


@pytest.mark.parametrize("interaction", [0.0, 1.5])
def test_components_are_unbiased(interaction):
    """Mean of 300 studies' variances within four standard errors of the truth."""
    found = [gauge_study(readings(seed, sd=(2.0, 1.0, interaction, 0.5))) for seed in range(300)]
    for name, truth in (("repeatability_nm", 0.25), ("parts_nm", 4.0)):
        variances = np.square([getattr(gauge, name) for gauge in found])
        assert variances.mean() == pytest.approx(truth, abs=4 * variances.std() / np.sqrt(300) + 0.01 * truth)
    across = np.square([gauge.reproducibility_nm for gauge in found])
    assert across.mean() == pytest.approx(1 + interaction**2, abs=4 * across.std() / np.sqrt(300) + 0.02)


def test_repeatability_s_interval_holds_the_truth():
    held = [g.repeatability_low_nm <= 0.5 <= g.repeatability_high_nm for g in map(gauge_study, map(readings, range(300)))]
    assert 0.91 < np.mean(held) < 0.985  # 95 % within three standard deviations of 1.3 %


def test_share_of_the_tolerance_is_six_standard_deviations():
    gauge = gauge_study(readings(), tolerance_width_nm=20.0)
    assert gauge.percent_of_tolerance == pytest.approx(100 * 6 * gauge.gauge_nm / 20)
    assert gauge.gauge_nm == pytest.approx(np.hypot(gauge.repeatability_nm, gauge.reproducibility_nm))


@pytest.mark.parametrize(("width", "fitness"), [(1000.0, "good"), (30.0, "usable with care"), (5.0, "unfit")])
def test_fitness_by_the_usual_limits(width, fitness):
    assert gauge_study(readings(3), tolerance_width_nm=width).fitness == fitness


def test_one_operator_gives_repeatability_alone_and_says_so():
    gauge = gauge_study(readings(operators=1))
    assert gauge.reproducibility_nm is None and gauge.repeatability_nm == pytest.approx(0.5, rel=0.4)
    assert any("Reproducibility cannot be given" in line for line in gauge.missing)


def test_one_part_gives_no_variation_of_parts():
    assert gauge_study(readings(parts=1)).parts_nm is None


def test_single_readings_are_refused():
    with pytest.raises(StudyError, match="two readings"):
        gauge_study(readings(repeats=1))


def test_missing_readings_are_refused():
    data = readings()
    data[0, 0, 0] = np.nan
    with pytest.raises(StudyError, match="none missing"):
        gauge_study(data)


def test_shape_is_checked():
    with pytest.raises(ValueError, match="parts, operators, repeats"):
        gauge_study(np.ones((3, 3)))
