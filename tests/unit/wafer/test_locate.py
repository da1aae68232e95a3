import numpy as np
import pytest

from sheenmap.wafer import NoDiscError, RegionError, RegionSpec, locate
from sheenmap.wafer.locate import polygon_inside

PLAIN = np.zeros((40, 60))


def test_frame_is_all_of_the_picture_about_its_middle():
    region = locate(RegionSpec(shape="frame", width_mm=12.0), PLAIN)
    assert region.inside.all() and region.origin_px == (29.5, 19.5) and region.mm_per_px == 0.2


def test_frame_without_width_has_no_scale():
    assert locate(RegionSpec(), PLAIN).mm_per_px is None


def test_edge_exclusion_of_a_frame_leaves_out_its_border():
    region = locate(RegionSpec(shape="frame", width_mm=12.0, edge_exclusion_mm=0.4), PLAIN)
    assert region.inside.sum() == 56 * 36 and region.inside[2, 2]


def test_edge_exclusion_without_scale_is_refused():
    with pytest.raises(RegionError, match=r"region\.width_mm"):
        locate(RegionSpec(shape="frame", edge_exclusion_mm=1.0), PLAIN)


def test_polygon_holds_the_pixels_whose_centre_is_inside():
    square = np.array([[9.5, 4.5], [19.5, 4.5], [19.5, 14.5], [9.5, 14.5]])
    region = locate(RegionSpec(shape="polygon", points=square), PLAIN)
    assert region.inside.sum() == 100 and region.inside[5:15, 10:20].all()
    assert region.origin_px == (14.5, 9.5)


def test_polygon_that_crosses_itself_follows_the_even_odd_rule():
    star = np.array([[0, 0], [40, 0], [40, 30], [10, 30], [10, 10], [30, 10], [30, 20], [0, 20]], float)
    inside = polygon_inside(star + 0.25, (40, 60))
    assert inside[5, 20] and not inside[15, 20] and inside[25, 35] and not inside[25, 5]


def test_neighbouring_polygons_share_no_pixel_and_leave_none_out():
    corner = np.array([20.0, 15.0])
    whole = np.array([[5, 5], [35, 5], [35, 25], [5, 25]], float)
    parts = [np.array([whole[i], whole[(i + 1) % 4], corner]) for i in range(4)]
    count = sum(polygon_inside(part, (40, 60)).astype(int) for part in parts)
    assert np.array_equal(count, polygon_inside(whole, (40, 60)).astype(int))


def test_polygon_outside_the_picture_is_refused():
    with pytest.raises(RegionError, match="no pixel is inside"):
        locate(RegionSpec(shape="polygon", points=np.array([[100.0, 0], [120, 0], [110, 9]])), PLAIN)


@pytest.mark.parametrize("points", [None, np.zeros((2, 2))])
def test_polygon_of_fewer_than_three_corners_is_refused(points):
    with pytest.raises(RegionError, match="three"):
        locate(RegionSpec(shape="polygon", points=points), PLAIN)


def test_mask_is_taken_as_it_is():
    mask = np.zeros((40, 60), bool)
    mask[10:20, 5:9] = True
    region = locate(RegionSpec(shape="mask", mask=mask), PLAIN)
    assert np.array_equal(region.inside, mask) and region.origin_px == (6.5, 14.5)


def test_mask_of_another_size_is_refused():
    with pytest.raises(RegionError, match="30 x 20 pixels where the photograph is 60 x 40"):
        locate(RegionSpec(shape="mask", mask=np.ones((20, 30), bool)), PLAIN)


def test_disc_region_is_the_disc_without_its_rim(drawn):
    scene = drawn.Scene()
    region = locate(RegionSpec(shape="disc", diameter_mm=200.0, edge_exclusion_mm=3.0), drawn.scene(scene))
    distance = np.hypot(np.arange(640) - scene.x, np.arange(480)[:, None] - scene.y)
    reach = 0.97 * scene.radius
    sure = np.abs(distance - reach) > 0.1  # the fit's own error
    assert np.array_equal(region.inside[sure], (distance <= reach)[sure])
    assert region.mm_per_px == pytest.approx(100 / scene.radius, rel=1e-3)


def test_disc_region_stops_before_the_flat(drawn):
    region = locate(RegionSpec(shape="disc", diameter_mm=100.0, edge_exclusion_mm=2.0), drawn(flat_deg=-90.0, flat_half_deg=19.0))
    lowest = np.flatnonzero(region.inside.any(axis=1)).max()
    expected = 241.7 + 190.4 * np.cos(np.deg2rad(19.0)) - 2.0 * 190.4 / 50
    assert lowest == pytest.approx(expected, abs=1.0)


@pytest.mark.parametrize("notch_deg", [-90.0, -60.0, 5.0, 130.0])
def test_rotation_turns_the_notch_down(drawn, notch_deg):
    region = locate(RegionSpec(shape="disc", diameter_mm=200.0), drawn(notch_deg=notch_deg, notch_depth=0.016))
    assert (notch_deg + region.rotation_deg + 90 + 180) % 360 - 180 == pytest.approx(0, abs=0.3)


@pytest.mark.parametrize(("notch", "rotation"), [("down", 0.0), ("right", -90.0), ("up", -180.0), ("left", 90.0)])
def test_recipe_says_the_orientation_where_no_notch_is_found(drawn, notch, rotation):
    assert locate(RegionSpec(shape="disc", notch=notch), drawn()).rotation_deg == rotation


def test_disc_without_diameter_has_no_scale(drawn):
    assert locate(RegionSpec(shape="disc"), drawn()).mm_per_px is None


def test_edge_exclusion_of_a_disc_without_diameter_is_refused(drawn):
    with pytest.raises(RegionError, match=r"region\.diameter_mm"):
        locate(RegionSpec(shape="disc", edge_exclusion_mm=3.0), drawn())


def test_missing_disc_is_an_error():
    with pytest.raises(NoDiscError):
        locate(RegionSpec(shape="disc", diameter_mm=200.0), PLAIN)


def test_region_cannot_be_written_through():
    with pytest.raises(ValueError, match="read-only"):
        locate(RegionSpec(), PLAIN).inside[0, 0] = False
