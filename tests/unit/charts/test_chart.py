import numpy as np

from sheenmap.charts.chart import runs_of


def test_a_run_ends_half_way_to_the_next_name():
    runs = runs_of(("red", "blue", "blue", "red"), np.array([10.0, 12.0, 14.0, 16.0]))
    assert [(run.name, run.low_nm, run.high_nm) for run in runs] == [("red", 10, 11), ("blue", 11, 15), ("red", 15, 16)]


def test_one_name_makes_one_run():
    assert len(runs_of(("grey",) * 3, np.array([0.0, 1.0, 2.0]))) == 1
