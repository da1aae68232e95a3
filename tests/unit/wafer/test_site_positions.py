import numpy as np
import pytest

from sheenmap.wafer import Disc, Region, RegionError, SiteError, SiteSpec, site_positions
from sheenmap.wafer.locate import disc_inside

DISC = Disc(x_px=250.0, y_px=240.0, radius_px=200.0)


def wafer(exclusion_mm=3.0, rotation_deg=0.0):
    inside = disc_inside(DISC, (480, 500), exclusion_mm * 2)
    return Region(
        inside=inside,
        origin_px=(250.0, 240.0),
        mm_per_px=0.5,
        disc=DISC,
        rotation_deg=rotation_deg,
        edge_exclusion_mm=exclusion_mm,
    )


def frame(mm_per_px=0.5):
    return Region(inside=np.ones((100, 200), bool), origin_px=(99.5, 49.5), mm_per_px=mm_per_px)


def test_rings_reach_to_the_edge_exclusion():
    sites = site_positions(SiteSpec(layout="rings-49"), wafer())
    assert sites.x_mm.size == 49 and np.hypot(sites.x_mm, sites.y_mm).max() == pytest.approx(97.0)
    assert sites.radius_px == 2.0


def test_sites_go_counter_clockwise_from_the_right_with_y_up():
    sites = site_positions(SiteSpec(layout="rings-5"), wafer())
    assert np.allclose(np.column_stack([sites.x_mm, sites.y_mm]), [[0, 0], [97, 0], [0, 97], [-97, 0], [0, -97]])
    assert np.allclose(np.column_stack([sites.x_px, sites.y_px]), [[250, 240], [444, 240], [250, 46], [56, 240], [250, 434]])


def test_sites_turn_with_the_notch():
    """The notch at the right of the picture (turned by -90 degrees to be down): site 5, at the notch, is at the right."""
    sites = site_positions(SiteSpec(layout="rings-5"), wafer(rotation_deg=-90.0))
    assert [sites.x_px[4], sites.y_px[4]] == pytest.approx([444.0, 240.0])


def test_grid_is_numbered_by_rows_from_the_top():
    sites = site_positions(SiteSpec(layout="grid", pitch_mm=60.0), wafer())
    places = list(zip(sites.x_mm, sites.y_mm))
    assert places == [(x, y) for y in (60.0, 0.0, -60.0) for x in (-60.0, 0.0, 60.0)]
    assert sites.layout == "grid 60"


def test_grid_covers_a_frame():
    sites = site_positions(SiteSpec(layout="grid", pitch_mm=10.0), frame())
    assert sites.x_mm.size == 9 * 5


def test_points_are_kept_in_their_order():
    points = np.array([[5.0, -3.0], [0.0, 0.0], [-40.0, 12.0]])
    sites = site_positions(SiteSpec(layout="points", points_mm=points, radius_mm=2.5), wafer())
    assert np.array_equal(np.column_stack([sites.x_mm, sites.y_mm]), points) and sites.radius_px == 5.0


def test_point_on_the_region_s_own_rim_is_allowed():
    assert site_positions(SiteSpec(layout="points", points_mm=np.array([[97.0, 0.0]])), wafer()).x_mm.size == 1


def test_points_outside_are_named():
    points = np.array([[0.0, 0.0], [120.0, 0.0], [98.5, 0.0]])
    with pytest.raises(SiteError, match=r"2 of 3 sites lie outside the region: site 2 at x 120 mm, y 0 mm; site 3"):
        site_positions(SiteSpec(layout="points", points_mm=points), wafer())


def test_spot_smaller_than_a_pixel_still_holds_one():
    assert site_positions(SiteSpec(layout="rings-5", radius_mm=0.01), wafer()).radius_px > 0.7


@pytest.mark.parametrize(
    ("spec", "region", "message"),
    [
        (SiteSpec(layout="rings-5"), frame(), 'needs region.shape = "disc"'),
        (SiteSpec(layout="rings-7"), wafer(), "no site layout named 'rings-7'"),
        (SiteSpec(layout="grid"), wafer(), "pitch above 0"),
        (SiteSpec(layout="grid", pitch_mm=-1.0), wafer(), "pitch above 0"),
        (SiteSpec(layout="grid", pitch_mm=0.01), wafer(), "more than 20000 sites"),
        (SiteSpec(layout="points"), wafer(), "empty"),
    ],
)
def test_impossible_sites_are_refused(spec, region, message):
    with pytest.raises(SiteError, match=message):
        site_positions(spec, region)


def test_sites_without_scale_are_refused():
    with pytest.raises(RegionError, match="need a scale"):
        site_positions(SiteSpec(layout="grid", pitch_mm=5.0), frame(mm_per_px=None))
