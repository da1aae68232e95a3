"""Noise that is known comes back from the picture."""

import numpy as np
import pytest

from sheenmap.camera import Encoding, encode, estimate_noise, linear_frame, stated_noise

FULL_WELL, READ = 12_000.0, 6.0


def picture(level, rng, *, bits=8, encoding="linear"):
    electrons = rng.poisson(level * FULL_WELL) + rng.normal(0, READ, level.shape)
    full_scale = 2**bits - 1
    codes = np.rint(encode(Encoding(kind=encoding), np.clip(electrons / FULL_WELL, 0, 1), full_scale))
    return codes.astype(np.uint8 if bits == 8 else np.uint16)


def smooth(shape=(320, 320)):
    rows, columns = np.indices(shape)
    waves = [0.5 + 0.3 * np.sin(columns / 30 + k) * np.cos(rows / 40) for k in range(3)]
    return np.stack(waves, axis=-1)


def true_sd(level):
    return np.sqrt(level / FULL_WELL + (READ / FULL_WELL) ** 2)


@pytest.mark.parametrize("bits", [8, 16])
@pytest.mark.parametrize("encoding", ["linear", "srgb"])
def test_noise_is_found_within_three_percent(bits, encoding):
    level = smooth()
    codes = picture(level, np.random.default_rng(1), bits=bits, encoding=encoding)
    noise = linear_frame(codes, Encoding(kind=encoding), float(2**bits - 1)).noise
    probe = np.full(3, 0.6)
    rounding = noise.rounding.variance(probe)
    # a thousand tiles of relative error 0.2 give 1 % of the variance at a level; 3 % of sigma is ten times that
    np.testing.assert_allclose(np.sqrt(noise.variance(probe) - rounding), true_sd(probe), rtol=0.03)
    assert noise.spread == 1.0
    np.testing.assert_array_equal(noise.correlation, np.eye(3))


def test_edges_do_not_lift_the_noise():
    level = smooth()
    rows, columns = np.indices(level.shape[:2])
    level[((rows // 24) + (columns // 24)) % 2 == 0] *= 0.4
    codes = picture(level, np.random.default_rng(2), bits=16)
    noise = linear_frame(codes, Encoding(), 65535.0).noise
    np.testing.assert_allclose(np.sqrt(noise.variance(np.full(3, 0.5))), true_sd(0.5), rtol=0.05)


def test_a_large_picture_gives_the_same_noise_from_its_bands():
    level = np.tile(smooth((160, 400)), (10, 3, 1))
    codes = picture(level, np.random.default_rng(3), bits=16)
    noise = linear_frame(codes, Encoding(), 65535.0).noise
    np.testing.assert_allclose(np.sqrt(noise.variance(np.full(3, 0.5))), true_sd(0.5), rtol=0.03)


def test_noise_that_neighbours_share_is_seen():
    rng = np.random.default_rng(4)
    white = rng.normal(0, 0.01, (300, 300, 3))
    shared = sum(np.roll(np.roll(white, i, 0), j, 1) for i in range(2) for j in range(2)) / 2
    noise = estimate_noise((0.5 + shared).astype(np.float32))
    assert noise.spread > 1.5
    assert np.sqrt(noise.variance(np.full(3, 0.5))) == pytest.approx(0.01, rel=0.1)


def test_a_data_sheet_is_taken_at_its_word():
    noise = stated_noise(FULL_WELL, READ)
    np.testing.assert_allclose(np.sqrt(noise.variance(np.full(3, 0.25))), true_sd(0.25))


def test_the_variance_of_a_whole_picture_is_that_of_its_values():
    codes = picture(smooth(), np.random.default_rng(5), encoding="srgb")
    noise = linear_frame(codes, Encoding(kind="srgb"), 255.0).noise
    level = np.random.default_rng(6).uniform(0.01, 1.0, (400, 300, 3)).astype(np.float32)
    whole = noise.variance(level)
    parts = np.concatenate([noise.variance(row) for row in level.reshape(-1, 300, 3)]).reshape(level.shape)
    np.testing.assert_allclose(whole, parts, rtol=5e-3)  # at a hundredth of full scale a step of the lookup is 0.8 %
