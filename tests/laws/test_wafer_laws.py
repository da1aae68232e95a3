"""Laws of the room wafer: what is found moves, grows and turns with the picture."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from sheenmap.wafer import Disc, Region, RegionSpec, SiteSpec, find_disc, locate, part_mm, picture_px, site_positions
from sheenmap.wafer.circle import Circle, robust_circle

FEW = settings(max_examples=12, deadline=None, derandomize=True)
PIXEL = 0.05  # what sampling a rim of 600 pixels on the grid leaves


def disc_picture(x=98.0, y=80.0, radius=60.0, shape=(160, 200)):
    """A disc with a soft rim, brighter to one side, exact to the pixel's own area."""
    rows, columns = np.indices(shape)
    edge = np.clip(radius + 0.5 - np.hypot(columns - x, rows - y), 0, 1)
    return 0.05 + edge * (0.5 + 0.001 * (columns - x))


@FEW
@given(right=st.floats(-15, 15), down=st.floats(-15, 15))
def test_disc_moves_with_the_picture(right, down):
    still, moved = find_disc(disc_picture()), find_disc(disc_picture(x=98 + right, y=80 + down))
    shift = (moved.x_px - still.x_px, moved.y_px - still.y_px)
    assert shift == pytest.approx((right, down), abs=PIXEL)
    assert moved.radius_px == pytest.approx(still.radius_px, abs=PIXEL)


@FEW
@given(factor=st.integers(2, 5))
def test_disc_grows_with_the_picture(factor):
    small = find_disc(disc_picture())
    large = find_disc(np.kron(disc_picture(), np.ones((factor, factor))))
    assert large.radius_px == pytest.approx(factor * small.radius_px, abs=factor * PIXEL)
    assert large.x_px + 0.5 == pytest.approx(factor * (small.x_px + 0.5), abs=factor * PIXEL)


@FEW
@given(turns=st.integers(1, 3))
def test_disc_turns_with_the_picture(turns):
    """A quarter turn counter-clockwise takes column x, row y to column y, row width - 1 - x."""
    picture = disc_picture(shape=(200, 200))
    x, y = find_disc(picture).x_px, find_disc(picture).y_px
    for _ in range(turns):
        x, y = y, 199 - x
    turned = find_disc(np.rot90(picture, turns))
    assert (turned.x_px, turned.y_px) == pytest.approx((x, y), abs=PIXEL)


@FEW
@given(gain=st.floats(0.01, 1000), offset=st.floats(0, 50))
def test_disc_does_not_depend_on_exposure(gain, offset):
    still, other = find_disc(disc_picture()), find_disc(gain * disc_picture() + offset * gain)
    assert (other.x_px, other.y_px, other.radius_px) == pytest.approx((still.x_px, still.y_px, still.radius_px), abs=0.01)


@settings(max_examples=60, deadline=None)
@given(x=st.floats(-50, 50), y=st.floats(-50, 50), radius=st.floats(5, 500), share=st.floats(0, 0.35), seed=st.integers(0, 99))
def test_circle_fit_forgets_a_third_of_gross_errors(x, y, radius, share, seed):
    rng = np.random.default_rng(seed)
    angle_rad = np.arange(300) * 2 * np.pi / 300
    distance = radius + np.where(rng.random(300) < share, rng.uniform(-0.08, 0.08, 300) * radius, 0)
    start = Circle(x_px=x + 0.01 * radius, y_px=y - 0.01 * radius, radius_px=1.01 * radius)
    fit, _ = robust_circle(x + distance * np.cos(angle_rad), y + distance * np.sin(angle_rad), start)
    assert (fit.x_px, fit.y_px, fit.radius_px) == pytest.approx((x, y, radius), abs=1e-3 * radius)


@settings(deadline=None)
@given(
    rotation_deg=st.floats(-180, 180),
    s=st.floats(-0.05, 0.05),
    t=st.floats(-0.05, 0.05),
    x=st.floats(-99, 99),
    y=st.floats(-99, 99),
)
def test_millimetres_and_pixels_are_inverse(rotation_deg, s, t, x, y):
    disc = Disc(x_px=30.0, y_px=40.0, radius_px=20.0, oval=(s, t))
    region = Region(inside=np.ones((2, 2), bool), origin_px=(30.0, 40.0), mm_per_px=0.37, disc=disc, rotation_deg=rotation_deg)
    back = part_mm(region, *picture_px(region, x, y))
    assert np.array(back) == pytest.approx(np.array([x, y]), abs=1e-9)


@FEW
@given(exclusion=st.floats(0.1, 20), more=st.floats(0, 5))
def test_a_wider_exclusion_leaves_a_smaller_region(exclusion, more):
    wide, narrow = (
        locate(RegionSpec(shape="disc", diameter_mm=100.0, edge_exclusion_mm=e), disc_picture()).inside
        for e in (exclusion, exclusion + more)
    )
    assert not (narrow & ~wide).any()


@FEW
@given(mm_per_px=st.floats(0.05, 2))
def test_sites_keep_their_pixels_whatever_the_unit(mm_per_px):
    region = Region(
        inside=np.ones((160, 200), bool),
        origin_px=(98.0, 80.0),
        mm_per_px=mm_per_px,
        disc=Disc(x_px=98.0, y_px=80.0, radius_px=60.0),
    )
    sites = site_positions(SiteSpec(layout="rings-25", radius_mm=3 * mm_per_px), region)
    assert np.hypot(sites.x_px - 98, sites.y_px - 80).max() == pytest.approx(60)
    assert sites.radius_px == pytest.approx(3)
