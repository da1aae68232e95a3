"""What the inverse does with films that people have: smooth, stepped, lined, dirty, isolated, thin, out of range."""

import numpy as np
import pytest

from sheenmap.flags import AMBIGUOUS, AT_LIMIT, BY_CONTINUITY, OFF_CURVE, OUTSIDE, SATURATED, has, is_blocked
from sheenmap.inversion import Doubts, invert
from sheenmap.lookup import evaluate
from simulated import Sensor, film_on, photograph, ramp, table_of

OXIDE = film_on("Si", "SiO2")


@pytest.fixture(scope="module")
def table():
    return table_of(OXIDE, (0.0, 800.0))


@pytest.fixture
def rng():
    return np.random.default_rng(20261201)


def everywhere(thickness_nm):
    return np.ones(thickness_nm.shape, bool)


def test_a_smooth_film_is_claimed_nearly_everywhere_and_right(table, rng):
    truth = ramp(120, 480)
    found = invert(photograph(truth, table, rng), table, everywhere(truth), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    error = found.thickness_nm - truth
    assert claimed.mean() > 0.99
    assert np.abs(error[claimed]).max() < 15  # the weakest zone has sigma 2 nm


def test_a_film_over_many_orders_is_never_in_the_wrong_one(rng):
    table = table_of(OXIDE, (0.0, 1500.0))
    truth = ramp(20, 1400, (160, 320))
    found = invert(photograph(truth, table, rng), table, everywhere(truth), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    assert claimed.mean() > 0.97
    assert np.mean(np.abs(found.thickness_nm - truth)[claimed] > 60) < 5e-4


def test_colours_that_repeat_are_marked_as_settled_by_neighbours(rng):
    table = table_of(OXIDE, (0.0, 1500.0))
    truth = ramp(600, 1400, (96, 200))
    found = invert(photograph(truth, table, rng), table, everywhere(truth), doubts=Doubts())
    assert has(found.flags, BY_CONTINUITY).mean() > 0.2


def test_a_step_is_kept_sharp(table, rng):
    truth = np.where(ramp(0, 1) < 0.5, 150.0, 330.0)
    found = invert(photograph(truth, table, rng), table, everywhere(truth), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    assert claimed.mean() > 0.97
    assert np.abs(found.thickness_nm - truth)[claimed].max() < 12


def test_a_line_two_pixels_wide_is_film_and_not_dirt(table, rng):
    truth = np.full((96, 96), 300.0)
    truth[20:76, 50:52] = 150.0
    found = invert(photograph(truth, table, rng, Sensor(bits=16)), table, everywhere(truth), doubts=Doubts())
    line = np.s_[24:72, 50:52]
    claimed = ~is_blocked(found.flags[line])
    assert claimed.mean() > 0.8
    assert np.abs(found.thickness_nm[line] - 150.0)[claimed].max() < 12


def test_dirt_is_off_the_curve_with_its_margin(table, rng):
    truth = np.full((96, 96), 260.0)
    rows, columns = np.indices(truth.shape)
    grain = np.hypot(rows - 40, columns - 60) <= 3
    found = invert(photograph(truth, table, rng, painted=(grain, (0.15, 0.16, 0.14))), table, everywhere(truth), doubts=Doubts())
    assert has(found.flags, OFF_CURVE)[grain].all()
    assert not has(found.flags, OFF_CURVE)[np.hypot(rows - 40, columns - 60) > 8].mean() > 0.005


def twins_of(table, *, apart_nm=60.0):
    """Two thicknesses whose colours differ least for their noise."""
    signal = table.signal[0]
    gap = np.abs(signal[:, None] - signal[None]) / (0.004 * np.maximum(signal[:, None], 0.05))
    distance = np.sqrt((gap**2).sum(-1))
    distance[np.abs(np.subtract.outer(table.thickness_nm, table.thickness_nm)) < apart_nm] = np.inf
    inside = (table.thickness_nm >= table.search_nm[0]) & (table.thickness_nm <= table.search_nm[1])
    distance[~inside], distance[:, ~inside] = np.inf, np.inf
    first, second = np.unravel_index(np.argmin(distance), distance.shape)
    return float(table.thickness_nm[first]), float(table.thickness_nm[second]), float(distance[first, second])


def test_an_island_with_a_twin_is_ambiguous_and_its_twin_is_listed(rng):
    table = table_of(OXIDE, (0.0, 1500.0))
    first, second, distance = twins_of(table)
    assert distance < 2  # there is a twin within the doubt about the colours
    truth = np.full((96, 96), np.nan)
    truth[30:66, 30:66] = first
    bench = (np.isnan(truth), (0.012, 0.013, 0.015))
    found = invert(photograph(truth, table, rng, painted=bench), table, everywhere(truth), doubts=Doubts())
    island = np.s_[34:62, 34:62]
    assert has(found.flags, AMBIGUOUS)[island].mean() > 0.98
    block = found.block[48, 48]
    others = found.settled.others_nm.reshape(-1, found.settled.others_nm.shape[-1])[block]
    listed = np.append(others[np.isfinite(others)], found.thickness_nm[48, 48])
    assert np.abs(listed - second).min() < 25
    assert np.abs(listed - first).min() < 25


def test_the_same_island_is_settled_by_a_narrower_search(rng):
    table = table_of(OXIDE, (0.0, 1500.0))
    first, _, _ = twins_of(table)
    narrow = table_of(OXIDE, (max(0.0, first - 40), first + 40))
    truth = np.full((96, 96), np.nan)
    truth[30:66, 30:66] = first
    bench = (np.isnan(truth), (0.012, 0.013, 0.015))
    found = invert(photograph(truth, table, rng, painted=bench), narrow, everywhere(truth), doubts=Doubts())
    assert (~is_blocked(found.flags[34:62, 34:62])).mean() > 0.95


def test_a_table_of_another_material_claims_nothing(table, rng):
    truth = ramp(120, 480)
    wrong = table_of(film_on("Si", "TiO2"), (0.0, 800.0))
    found = invert(photograph(truth, table, rng), wrong, everywhere(truth), doubts=Doubts())
    assert found.is_contradicted
    assert (~is_blocked(found.flags)).mean() < 0.01


def test_metal_beside_film_does_not_make_the_set_up_suspect(table, rng):
    truth = np.full((96, 96), 260.0)
    metal = np.zeros(truth.shape, bool)
    metal[:, :50] = True
    found = invert(photograph(truth, table, rng, painted=(metal, (1.9, 1.5, 0.9))), table, everywhere(truth), doubts=Doubts())
    assert not found.is_contradicted
    assert (~is_blocked(found.flags[:, 56:])).mean() > 0.98


def test_a_film_beyond_the_search_range_is_at_its_limit(table, rng):
    narrow = table_of(OXIDE, (100.0, 250.0))
    truth = ramp(200, 268)
    found = invert(photograph(truth, table, rng), narrow, everywhere(truth), doubts=Doubts())
    assert has(found.flags, AT_LIMIT)[truth > 258].mean() > 0.9
    assert not has(found.flags, AT_LIMIT)[truth < 240].any()


def test_bare_substrate_is_claimed_and_never_below_zero(table, rng):
    truth = ramp(0, 40)
    found = invert(photograph(truth, table, rng), table, everywhere(truth), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    assert claimed.mean() > 0.98
    assert found.thickness_nm[claimed].min() >= 0
    inside = np.abs(found.thickness_nm - truth)[claimed] <= 1.96 * found.sigma_nm[claimed]
    assert inside.mean() > 0.92


def test_values_do_not_pile_up_at_turning_points_or_table_steps(table, rng):
    truth = ramp(60, 700, (200, 640))
    found = invert(photograph(truth, table, rng), table, everywhere(truth), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    counts, _ = np.histogram(found.thickness_nm[claimed], bins=np.arange(80, 681, 10))
    assert counts.max() < 1.15 * np.median(counts)
    assert counts.min() > 0.85 * np.median(counts)


def test_pixels_outside_are_flagged_so_and_have_no_other_flag(table, rng):
    truth = np.full((64, 64), 200.0)
    inside = everywhere(truth)
    inside[:, :20] = False
    found = invert(photograph(truth, table, rng), table, inside, doubts=Doubts())
    assert (found.flags[:, :20] == OUTSIDE.mask).all()
    assert not has(found.flags, OUTSIDE)[:, 20:].any()


def test_clipped_pixels_are_saturated_and_not_guessed(table, rng):
    truth = np.full((64, 64), 200.0)
    bright = np.zeros(truth.shape, bool)
    bright[20:30, 20:30] = True
    found = invert(photograph(truth, table, rng, painted=(bright, (2.5, 2.5, 2.5))), table, everywhere(truth), doubts=Doubts())
    assert has(found.flags, SATURATED)[bright].all()
    assert is_blocked(found.flags)[bright].all()


def test_the_claimed_thickness_reproduces_the_signal(table, rng):
    truth = ramp(150, 300)
    signal = photograph(truth, table, rng)
    found = invert(signal, table, everywhere(truth), doubts=Doubts())
    claimed = ~is_blocked(found.flags)
    residual = (signal.values[claimed] - evaluate(table, found.thickness_nm[claimed])[0]) / np.sqrt(signal.variance[claimed])
    assert np.abs(residual.mean(axis=0)).max() < 0.5  # shading of 0.3 % is a third of the noise
    assert residual.std() == pytest.approx(np.sqrt(2 / 3), abs=0.12)  # one of three degrees of freedom is the thickness
