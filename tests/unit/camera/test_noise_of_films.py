"""Noise of pictures as films make them: islands with many edges, fringes, dust, and parts that are clipped."""

import numpy as np
import pytest
from scipy.ndimage import gaussian_filter

from sheenmap.camera import Encoding, encode, estimate_noise, linear_frame
from sheenmap.lookup import evaluate
from simulated import film_on, ramp, table_of

FULL_WELL, READ = 12_000.0, 6.0
WITHIN = 0.05  # of sigma, at any level that much of the picture has


def islands(rng, size_px, colours=3, shape=(480, 480)):
    """Levels of 5 to 80 % in round-edged islands of a few colours; ``size_px`` is the radius of what smooths their outline."""
    heights = gaussian_filter(rng.normal(size=shape), size_px)
    which = np.digitize(heights, np.quantile(heights, np.arange(1, colours) / colours))
    return rng.uniform(0.05, 0.8, (colours, 3))[which]


def photographed(level, rng, *, bits=16, encoding="linear"):
    electrons = rng.poisson(level * FULL_WELL) + rng.normal(0, READ, level.shape)
    full_scale = 2**bits - 1
    codes = np.rint(encode(Encoding(kind=encoding), np.clip(electrons / FULL_WELL, 0, 1), full_scale))
    return linear_frame(codes.astype(np.uint8 if bits == 8 else np.uint16), Encoding(kind=encoding), float(full_scale))


def sigma_over_truth(frame):
    """Estimated over true sigma (3,) at each channel's middle level, rounding left out of both."""
    middle = np.median(frame.values.reshape(-1, 3), axis=0).astype(float)
    found = frame.noise.variance(middle) - frame.noise.rounding.variance(middle)
    return np.sqrt(found / (middle / FULL_WELL + (READ / FULL_WELL) ** 2))


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize(("bits", "encoding"), [(16, "linear"), (8, "srgb"), (8, "linear"), (16, "srgb")])
@pytest.mark.parametrize("colours", [2, 3])
def test_islands_with_many_edges_do_not_lift_it(seed, bits, encoding, colours):
    rng = np.random.default_rng(seed)
    frame = photographed(islands(rng, 20.0, colours), rng, bits=bits, encoding=encoding)
    assert sigma_over_truth(frame) == pytest.approx(1, abs=WITHIN)


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize(("size_px", "colours"), [(8.0, 2), (8.0, 3), (12.0, 5)])
def test_edges_do_not_look_like_noise_that_neighbours_share(seed, size_px, colours):
    """Between edges 10 to 20 pixels apart few tiles of a wide spacing are free of them."""
    rng = np.random.default_rng(seed)
    frame = photographed(islands(rng, size_px, colours), rng)
    assert frame.noise.spread == 1.0
    assert sigma_over_truth(frame) == pytest.approx(1, abs=0.07)


@pytest.mark.parametrize("size_px", [16.0, 24.0])
def test_noise_that_neighbours_share_is_seen_between_edges_too(size_px):
    rng = np.random.default_rng(1)
    white = rng.normal(0, 0.01, (480, 480, 3))
    shared = sum(np.roll(white, (i, j), (0, 1)) for i in range(2) for j in range(2)) / 2
    between, flat = (estimate_noise(level + shared).spread for level in (islands(rng, size_px), 0.4))
    assert between == pytest.approx(flat, rel=0.1)


@pytest.mark.parametrize("seed", range(3))
def test_fringes_of_a_thick_film_do_not_lift_it(seed):
    table = table_of(film_on("Si", "SiO2"), (0.0, 2000.0))
    thickness_nm = ramp(200, 1900, (300, 400))
    level = 0.6 * np.clip(evaluate(table, thickness_nm.ravel())[0].reshape(300, 400, 3), 0, 1.2)
    frame = photographed(level, np.random.default_rng(seed))
    assert sigma_over_truth(frame) == pytest.approx(1, abs=WITHIN)


@pytest.mark.parametrize("seed", range(3))
def test_dust_and_scratches_do_not_lift_it(seed):
    rng = np.random.default_rng(seed)
    level = ramp(0.2, 0.7, (320, 320))[..., None] * np.ones(3)
    rows, columns = rng.integers(0, 320, (2, 300))
    level[rows, columns] = 0.9
    level[np.arange(320), (np.arange(320) * 0.7).astype(int)] = 0.05
    assert sigma_over_truth(photographed(level, rng)) == pytest.approx(1, abs=WITHIN)


def test_what_is_clipped_does_not_lower_it():
    rng = np.random.default_rng(1)
    level = ramp(0.2, 0.7, (320, 320))[..., None] * np.ones(3)
    level[80:240, 40:280] = 1.3
    assert sigma_over_truth(photographed(level, rng)) == pytest.approx(1, abs=WITHIN)


def test_a_picture_that_is_clipped_all_over_knows_no_noise_and_says_so_by_none():
    frame = linear_frame(np.full((100, 100, 3), 255, np.uint8), Encoding(), 255.0)
    assert frame.clipped.all()
    assert not frame.noise.read_variance.any() and not frame.noise.shot.any()
