import numpy as np
import pytest

from sheenmap.wafer import Disc, Region, RegionError, distance_mm, part_mm, picture_px

INSIDE = np.ones((50, 80), bool)


def region(rotation_deg=0.0, oval=(0.0, 0.0)):
    disc = Disc(x_px=40.0, y_px=25.0, radius_px=20.0, oval=oval)
    return Region(inside=INSIDE, origin_px=(40.0, 25.0), mm_per_px=0.5, disc=disc, rotation_deg=rotation_deg)


def test_millimetres_grow_to_the_right_and_upwards():
    assert part_mm(region(), 44.0, 19.0) == (2.0, 3.0)


def test_quarter_turn_is_exact():
    """The notch at the right of the picture is turned down: what is at the right lies at the bottom."""
    assert part_mm(region(-90.0), 44.0, 25.0) == (0.0, -2.0)


@pytest.mark.parametrize("rotation_deg", [0.0, 17.0, -90.0, 133.0])
@pytest.mark.parametrize("oval", [(0.0, 0.0), (0.03, -0.02)])
def test_there_and_back(rotation_deg, oval):
    x, y = np.random.default_rng(0).uniform(0, 50, (2, 9))
    back = picture_px(region(rotation_deg, oval), *part_mm(region(rotation_deg, oval), x, y))
    assert np.allclose(back, [x, y], atol=1e-12)


def test_tilt_is_undone_about_its_axis():
    """A disc squashed to 0.9 across x: what is 18 pixels to the right is 20 pixels away as seen from above."""
    squash = 0.9
    s = (1 - squash) / (1 + squash)
    x, y = part_mm(region(oval=(s, 0.0)), np.array([58.0, 40.0]), np.array([25.0, 5.0]))
    assert [*x, *y] == pytest.approx([10.0, 0.0, 0.0, 10.0], abs=1e-12)


def test_distance_is_from_the_centre():
    found = distance_mm(region())
    assert found.shape == (50, 80) and found[25, 40] == 0 and found[25, 50] == 5.0


def test_millimetres_without_scale_are_refused():
    with pytest.raises(RegionError, match="need a scale"):
        part_mm(Region(inside=INSIDE, origin_px=(0.0, 0.0)), 1.0, 1.0)
