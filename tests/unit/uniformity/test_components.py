import numpy as np
import pytest

from sheenmap.uniformity import nested_components
from sheenmap.uniformity.components import StudyError, pooled_sd


def study(seed, lots=8, wafers=3, sites=3, sd=(10.0, 6.0, 3.0)):
    rng = np.random.default_rng(seed)
    lot, wafer, _ = np.indices((lots, wafers, sites))
    values = (
        2000
        + rng.normal(0, sd[0], (lots, 1, 1))
        + rng.normal(0, sd[1], (lots, wafers, 1))
        + rng.normal(0, sd[2], (lots, wafers, sites))
    )
    return values.ravel(), [("lot", lot.ravel()), ("wafer", wafer.ravel())]


def test_intervals_hold_the_truth_as_often_as_they_say():
    """600 studies: 95 % within 3.3 standard deviations (0.9 % each) for each of three components."""
    held = np.zeros(3)
    for seed in range(600):
        found = nested_components(*study(seed)).components
        held += [component.low <= sd**2 <= component.high for component, sd in zip(found, (10.0, 6.0, 3.0))]
    assert (np.abs(held / 600 - 0.95) < 0.03).all()


def test_estimates_are_unbiased_also_for_unequal_groups():
    """Half of the readings of a fixed pattern are dropped; the mean of 800 estimates is within four of its standard errors."""
    keep = np.random.default_rng(0).random(8 * 3 * 3) < 0.6
    found = []
    for seed in range(800):
        values, labels = study(seed)
        kept = nested_components(values[keep], [(name, column[keep]) for name, column in labels])
        found.append([component.estimate for component in kept.components])
    error = np.std(found, axis=0) / np.sqrt(800)
    assert (np.abs(np.mean(found, axis=0) - [100, 36, 9]) < 4 * error).all()


def test_negative_estimate_is_shown_and_counts_as_nothing():
    found = nested_components([1.0, 9.0, 2.0, 8.0], [("part", [0, 0, 1, 1])]).components[0]
    assert found.estimate < 0 and found.variance == found.sd == found.share == 0


def test_shares_add_to_one():
    assert sum(component.share for component in nested_components(*study(1)).components) == pytest.approx(1)


def test_wafers_are_numbered_within_their_lot():
    values, labels = study(2)
    apart = [labels[0], ("wafer", labels[1][1] + 10 * labels[0][1])]
    assert nested_components(values, labels) == nested_components(values, apart)


@pytest.mark.parametrize("labels", [[("lot", [0, 0, 0])], [("lot", [0, 1, 2])]])
def test_study_without_repeats_or_with_one_group_is_refused(labels):
    with pytest.raises(StudyError, match="no variation of"):
        nested_components([1.0, 2.0, 3.0], labels)


def test_labels_of_another_length_are_a_mistake():
    with pytest.raises(ValueError, match="labels of shape"):
        nested_components([1.0, 2.0, 3.0], [("lot", [0, 1])])


def test_pooling_needs_repeats():
    with pytest.raises(StudyError):
        pooled_sd([0.0], [0])
