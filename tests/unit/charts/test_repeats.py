import numpy as np
import pytest

from sheenmap.charts.repeats import MOST_NODES, find_repeats


def circle(turns, count, *, radius=40.0):
    """A curve that goes round in hue at one lightness."""
    phase = 2 * np.pi * turns * np.linspace(0, 1, count)
    return np.stack([np.full(count, 50.0), radius * np.cos(phase), radius * np.sin(phase)], axis=-1)


def test_a_straight_curve_never_repeats():
    lab = np.stack([np.linspace(10, 90, 200), np.zeros(200), np.zeros(200)], axis=-1)
    look_alikes, repeats = find_repeats(lab, np.arange(200.0), 2.0, apart_nm=10.0)
    assert repeats == ()
    assert set(look_alikes) == {()}


def test_on_the_second_turn_each_colour_is_that_of_the_first():
    thickness_nm = np.arange(401.0)
    look_alikes, _ = find_repeats(circle(2, 401), thickness_nm, 2.0, apart_nm=30.0)
    assert look_alikes[50] == pytest.approx((250.0,))
    assert look_alikes[350] == pytest.approx((150.0,))


def test_where_two_turns_cross_there_is_one_repeat():
    lab = circle(2, 401)
    lab[:, 0] += 0.2 * (np.arange(401) - 200) * np.sign(np.arange(401) - 200)  # lightness meets again at one pair only
    lab[:, 0] += np.where(np.arange(401) > 200, -30.0, 0.0)
    _, repeats = find_repeats(lab, np.arange(401.0), 3.0, apart_nm=50.0)
    assert len(repeats) == 1
    assert repeats[0].other_nm - repeats[0].one_nm == pytest.approx(200, abs=3)


def test_a_slow_change_is_no_repeat():
    lab = np.stack([50 + np.linspace(0, 1, 100), np.zeros(100), np.zeros(100)], axis=-1)
    look_alikes, repeats = find_repeats(lab, np.arange(100.0), 3.0, apart_nm=5.0)
    assert repeats == ()
    assert set(look_alikes) == {()}


def test_the_most_alike_come_first():
    rng = np.random.default_rng(7)
    lab = circle(3, 301) + rng.normal(0, 0.3, (301, 3))
    _, repeats = find_repeats(lab, np.arange(301.0), 3.0, apart_nm=20.0)
    differences = [repeat.de00 for repeat in repeats]
    assert len(differences) > 1
    assert differences == sorted(differences)


def test_a_long_curve_is_compared_on_fewer_nodes_and_still_answers_for_each():
    count = 2 * MOST_NODES + 1
    thickness_nm = np.arange(count) * 0.5
    look_alikes, _ = find_repeats(circle(2, count), thickness_nm, 2.0, apart_nm=100.0)
    assert len(look_alikes) == count
    assert look_alikes[801] == pytest.approx((thickness_nm[801] + thickness_nm[-1] / 2,), abs=2.0)


def test_a_curve_that_trembles_in_place_never_repeats():
    lab = np.array([50.0, 20.0, 20.0]) + np.random.default_rng(8).normal(0, 0.2, (200, 3))
    _, repeats = find_repeats(lab, np.arange(200.0), 3.0, apart_nm=5.0)
    assert repeats == ()


def test_no_two_repeats_stand_beside_each_other():
    lab = circle(2, 401) + np.random.default_rng(9).normal(0, 0.3, (401, 3))
    _, repeats = find_repeats(lab, np.arange(401.0), 3.0, apart_nm=40.0)
    assert len(repeats) > 2
    ends = np.array([(repeat.one_nm, repeat.other_nm) for repeat in repeats])
    distance = np.abs(ends[:, None] - ends[None]).max(axis=-1)
    assert distance[~np.eye(len(ends), dtype=bool)].min() >= 40.0
