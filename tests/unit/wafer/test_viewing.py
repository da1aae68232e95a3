import numpy as np
import pytest

from sheenmap.wafer import Region, RegionError, viewing_angle_deg


def region(mm_per_px=1.0, rotation_deg=0.0):
    return Region(inside=np.ones((201, 201), bool), origin_px=(100.0, 100.0), mm_per_px=mm_per_px, rotation_deg=rotation_deg)


def test_rim_of_a_200_mm_wafer_under_300_mm_is_seen_at_18_degrees():
    """18.4 degrees, common practice; atan(100 / 300) is 18.435."""
    angle = viewing_angle_deg(region(), (0.0, 0.0, 300.0))
    assert angle.dtype == np.float32 and angle[100, 100] == 0
    assert angle[100, 0] == angle[0, 100] == pytest.approx(18.435, abs=1e-3)


def test_lens_beside_the_middle_sees_that_side_straight():
    angle = viewing_angle_deg(region(), (40.0, 30.0, 300.0))
    assert np.unravel_index(angle.argmin(), angle.shape) == (70, 140)


def test_lens_stays_where_it_is_when_the_wafer_turns():
    still, turned = (viewing_angle_deg(region(rotation_deg=r), (40.0, 30.0, 300.0)) for r in (0.0, -90.0))
    assert np.array_equal(still, turned)


@pytest.mark.parametrize("height_mm", [0.0, -5.0])
def test_lens_below_the_part_is_refused(height_mm):
    with pytest.raises(RegionError, match="third number must be above 0"):
        viewing_angle_deg(region(), (0.0, 0.0, height_mm))


def test_lens_without_scale_is_refused():
    with pytest.raises(RegionError, match="need a scale"):
        viewing_angle_deg(region(mm_per_px=None), (0.0, 0.0, 300.0))
