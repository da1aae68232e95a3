"""Arrays inside the page: what comes out is what went in, within the step that is stated."""

import base64
import zlib
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from measurements import oxide_wafer
from sheenmap.flags import OFF_CURVE
from sheenmap.report.arrays import claimed_share, grid_of, pack_linear, pack_logarithmic, packed_planes


def unpacked(packed, shape):
    """As the page's script does it."""
    planes = np.frombuffer(zlib.decompress(base64.b64decode(packed["data"])), np.uint8).reshape(packed["bytes"], *shape)
    codes = sum(plane.astype(int) << (8 * (packed["bytes"] - 1 - k)) for k, plane in enumerate(planes))
    if "kind" not in packed:
        return codes
    steps = packed["step"] * (codes - 1)
    values = packed["low"] * np.exp(steps) if packed["kind"] == "log" else packed["low"] + steps
    return np.where(codes == 0, np.nan, values)


@given(st.lists(st.one_of(st.floats(-50, 20_000, width=32), st.just(float("nan"))), min_size=1, max_size=40))
def test_thickness_comes_back_within_half_a_step(values):
    plane = np.array([values], np.float32)
    packed = pack_linear(plane)
    assert np.allclose(unpacked(packed, plane.shape), plane, atol=0.5 * packed["step"] * 1.001, rtol=0, equal_nan=True)


def test_a_search_range_of_600_nm_is_kept_to_a_hundredth_of_a_nm():
    assert pack_linear(np.array([[0.0, 600.0]]))["step"] == 0.01


@given(st.lists(st.floats(2.0**-10, 2.0**13, width=32), min_size=1, max_size=40))
def test_uncertainty_comes_back_within_half_a_step_of_its_ratio(values):
    plane = np.array([values], np.float32)
    assert unpacked(pack_logarithmic(plane, 0.005), plane.shape) == pytest.approx(plane, rel=0.00251)


@pytest.mark.parametrize("pack", [pack_linear, lambda plane: pack_logarithmic(plane, 0.01)])
def test_a_plane_without_a_value_has_none_afterwards(pack):
    plane = np.full((3, 4), np.nan, np.float32)
    assert np.isnan(unpacked(pack(plane), plane.shape)).all()


@given(st.integers(1, 9000), st.integers(1, 9000))
def test_the_grid_stays_inside_the_picture_and_the_bound(height, width):
    grid = grid_of(height, width)
    assert 1 <= grid.columns <= 700 and 1 <= grid.rows <= 700
    assert grid.offset + grid.stride * (grid.columns - 1) < width
    assert grid.offset + grid.stride * (grid.rows - 1) < height


def test_the_page_holds_pixels_of_the_map_and_no_averages():
    wafer = oxide_wafer(width=320, height=260)
    grid = grid_of(260, 320, widest=100)
    planes = packed_planes(wafer, grid)
    shape = (grid.rows, grid.columns)
    kept = wafer.thickness_nm[1::4, 1::4]
    assert (grid.stride, grid.offset) == (4, 1)
    assert np.allclose(unpacked(planes["thickness"], shape), kept, atol=0.00501, rtol=0, equal_nan=True)
    assert np.array_equal(unpacked(planes["flags"], shape), wafer.flags[1::4, 1::4])


def test_a_scratch_between_the_kept_pixels_shows_in_the_claimed_share():
    wafer = oxide_wafer(width=320, height=260)
    flags = np.zeros_like(wafer.flags)
    flags[:, 100] = OFF_CURVE.mask  # columns 1, 5, 9, ... are kept
    grid = grid_of(260, 320, widest=100)
    share = claimed_share(replace(wafer, flags=flags), grid)
    assert share.shape == (grid.rows, grid.columns)
    assert np.all(np.abs(share[:, 25].astype(int) - round(255 * 3 / 4)) <= 1)
    assert np.all(np.delete(share, 25, axis=1) == 255)
