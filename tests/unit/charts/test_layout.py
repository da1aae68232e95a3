from sheenmap.charts.chart import Repeat
from sheenmap.charts.drawing import place_brackets
from sheenmap.charts.layout import centred_extent, rows_without_overlap


def test_labels_that_would_touch_go_to_another_row():
    assert rows_without_overlap([(0, 10), (5, 15), (20, 30)], 2, 1) == [0, 1, 0]


def test_a_label_without_room_is_left_out():
    assert rows_without_overlap([(0, 10), (5, 15)], 1, 0) == [0, None]


def test_the_gap_is_kept():
    assert rows_without_overlap([(0, 10), (10.5, 20)], 2, 1) == [0, 1]
    assert rows_without_overlap([(10.5, 20), (0, 10)], 2, 1) == [0, 1]


def test_a_label_at_the_edge_is_pushed_inside():
    assert centred_extent(1, 10, 0, 100) == (0, 10)
    assert centred_extent(99, 10, 0, 100) == (90, 100)


def test_a_label_wider_than_the_page_starts_at_its_left():
    assert centred_extent(50, 200, 0, 100) == (0, 200)


def test_brackets_stay_in_their_rows_and_the_most_alike_are_served_first():
    repeats = [Repeat(one_nm=100.0 + k, other_nm=500.0 + k, de00=1.0) for k in range(5)]
    brackets = place_brackets(repeats, (0.0, 800.0), 80.0, 3)
    assert [bracket.row for bracket in brackets] == [0, 1, 2]
    assert [bracket.repeat.one_nm for bracket in brackets] == [100.0, 101.0, 102.0]


def test_a_bracket_narrower_than_its_words_has_them_beside_it():
    (bracket,) = place_brackets([Repeat(one_nm=100.0, other_nm=110.0, de00=1.0)], (0.0, 800.0), 80.0, 3)
    assert bracket.middle_nm > 110.0
