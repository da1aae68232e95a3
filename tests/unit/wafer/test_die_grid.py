import numpy as np
import pytest

from sheenmap.wafer import Region, SiteError, die_grid


def region(inside=None, mm_per_px=0.5):
    return Region(inside=np.ones((60, 100), bool) if inside is None else inside, origin_px=(49.5, 29.5), mm_per_px=mm_per_px)


def test_every_pixel_inside_belongs_to_the_die_about_it():
    inside = np.hypot(np.arange(100) - 49.5, np.arange(60)[:, None] - 29.5) < 25
    dies = die_grid(region(inside), 4.0, 5.0)
    assert np.array_equal(dies.index >= 0, inside)
    rows, columns = np.nonzero(inside)
    which = dies.index[inside]
    assert (np.abs((columns - 49.5) * 0.5 - dies.x_mm[which]) <= 2).all()
    assert (np.abs(-(rows - 29.5) * 0.5 - dies.y_mm[which]) <= 2.5).all()


def test_dies_are_numbered_by_rows_from_the_top():
    dies = die_grid(region(), 10.0, 10.0)
    order = list(zip(-dies.row, dies.column))
    assert order == sorted(order) and dies.index[0, 0] == 0
    assert (dies.x_mm[dies.index[29, 49]], dies.y_mm[dies.index[29, 49]]) == (0.0, 0.0)


def test_offset_moves_the_grid():
    dies = die_grid(region(), 10.0, 10.0, offset_mm=(5.0, 5.0))
    assert set(dies.x_mm) == {-25.0, -15.0, -5.0, 5.0, 15.0, 25.0}  # the picture is 50 mm wide and 30 mm high
    assert set(dies.y_mm) == {-15.0, -5.0, 5.0, 15.0}


def test_dies_cut_by_the_region_are_not_whole():
    inside = np.hypot(np.arange(100) - 49.5, np.arange(60)[:, None] - 29.5) < 25
    dies = die_grid(region(inside), 4.0, 4.0)
    centre = dies.index[29, 49]
    assert dies.is_whole[centre] and not dies.is_whole[0] and 0 < dies.is_whole.mean() < 1


@pytest.mark.parametrize(("width", "message"), [(0.0, "above 0"), (-1.0, "above 0"), (0.01, "more than 20000")])
def test_impossible_dies_are_refused(width, message):
    with pytest.raises(SiteError, match=message):
        die_grid(region(), width, width)
