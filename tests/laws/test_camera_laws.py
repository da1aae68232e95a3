"""What holds for any encoding, sensor and exposure: from codes to the signal over the blank."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.ndimage import binary_dilation

from sheenmap.camera import (
    Encoding,
    code_step,
    decode,
    encode,
    estimate_noise,
    fused_signal,
    linear_codes,
    linear_frame,
    moved_signal,
    relative_signal,
    stated_noise,
)
from sheenmap.flags import DARK, SATURATED, has
from simulated import Sensor
from strategies import encodings, sensors

SHAPE = (24, 32)
SINGLE = 1e-6  # signals are kept in single precision, 6e-8 of each, through some ten operations
seeds = st.integers(0, 2**32 - 1)
exposures = st.sampled_from([0.25, 0.5, 1.0, 2.0])  # powers of two: single precision scales by them without rounding


def light(seed, shape=SHAPE, low=0.05, high=0.4):
    return np.random.default_rng(seed).uniform(low, high, (*shape, 3)).astype(np.float32)


def frame(values, noise):
    return linear_frame(values, Encoding(), 1.0, noise=noise)


def exposed(sensor, level, rng):
    """Codes of a photograph of ``level`` (H, W, 3), 0 to 1 of full well."""
    electrons = rng.poisson(level * sensor.full_well) + rng.normal(0, sensor.read, level.shape)
    full_scale = 2**sensor.bits - 1
    codes = np.rint(encode(Encoding(kind=sensor.encoding), np.clip(electrons / sensor.full_well, 0, 1), full_scale))
    return codes.astype(np.uint8 if sensor.bits == 8 else np.uint16)


@settings(deadline=None)
@given(encodings(), st.lists(st.floats(0, 255), min_size=1, max_size=8).map(np.array))
def test_light_and_codes_are_each_other_s_inverse(encoding, codes):
    linear = decode(encoding, codes, 255.0)
    assert np.all((linear >= 0) & (linear <= 1))
    # a code of a strong power can stand for light of 1e-12 of full scale and less, and sRGB is defined with 4 digits at its break
    assert encode(encoding, linear, 255.0) == pytest.approx(codes, abs=1e-4)


@settings(deadline=None)
@given(encodings())
def test_more_light_is_never_a_lower_code(encoding):
    linear = decode(encoding, np.arange(256.0), 255.0)
    assert linear[0] == pytest.approx(0, abs=1e-15)
    assert linear[-1] == pytest.approx(1, abs=1e-12)
    assert np.all(np.diff(linear) > 0)


@settings(deadline=None)
@given(encodings(), st.floats(8, 247))
def test_a_code_s_width_is_the_slope_of_its_decoding(encoding, code):
    if encoding.kind == "curve":  # its slope is smoothed over its points, where it has two
        assume(False)
    if encoding.kind == "srgb":
        assume(abs(code / 255 - 0.04045) > 1e-4)
    h = 1e-3
    behind, here, ahead = decode(encoding, code + h * np.array([-1.0, 0.0, 1.0]), 255.0)
    width = code_step(encoding, np.array([here]), 255.0)[0]
    assume(here > 1e-5)  # darker, the width is held up, so that it never is nothing
    assert width == pytest.approx((ahead - behind) / (2 * h), rel=1e-5)


@settings(deadline=None)
@given(encodings(), st.sampled_from([np.uint8, np.uint16]), seeds)
def test_whole_codes_are_decoded_as_their_numbers_are(encoding, dtype, seed):
    assume(encoding.kind != "curve" or dtype == np.uint8)  # a curve is written for one full scale
    full_scale = float(np.iinfo(dtype).max)
    codes = np.random.default_rng(seed).integers(0, full_scale, (4, 5, 3), endpoint=True).astype(dtype)
    assert linear_codes(codes, encoding, full_scale) == pytest.approx(decode(encoding, codes.astype(float), full_scale), rel=1e-6)


@settings(deadline=None)
@given(seeds, exposures)
def test_exposing_photo_and_blank_alike_changes_no_value(seed, gain):
    noise = stated_noise(12_000.0, 5.0)
    photo, blank = light(seed), light(seed + 1, low=0.3)
    once, again = (relative_signal(frame(k * photo, noise), frame(k * blank, noise), None) for k in (1, np.float32(gain)))
    assert np.array_equal(once.values, again.values)


@settings(max_examples=30, deadline=None)
@given(seeds, exposures)
def test_shot_noise_falls_as_light_rises(seed, gain):
    noise = stated_noise(12_000.0, 0.0)
    photo, blank = light(seed), light(seed + 1, low=0.3)
    once, again = (relative_signal(frame(k * photo, noise), frame(k * blank, noise), None) for k in (1, np.float32(gain)))
    assert again.variance == pytest.approx(once.variance / gain, rel=SINGLE)


@settings(deadline=None)
@given(seeds)
def test_the_blank_itself_reads_one(seed):
    blank = frame(light(seed, low=0.2), stated_noise(12_000.0, 5.0))
    assert relative_signal(blank, blank, None).values == pytest.approx(1.0, abs=SINGLE)


@settings(max_examples=30, deadline=None)
@given(seeds, st.floats(0, 0.1))
def test_stray_light_that_the_dark_shows_cancels(seed, stray):
    noise = stated_noise(12_000.0, 5.0)
    dark = light(seed + 2, low=0.0, high=0.01) + np.float32(stray)
    photo, blank = light(seed), light(seed + 1, low=0.3)
    plain = relative_signal(frame(photo, noise), frame(blank, noise), None)
    lifted = relative_signal(frame(photo + dark, noise), frame(blank + dark, noise), dark)
    assert lifted.values == pytest.approx(plain.values, abs=SINGLE)
    assert np.all(lifted.variance >= plain.variance * (1 - 1e-3))  # its own shot noise stays


@settings(max_examples=30, deadline=None)
@given(seeds, st.permutations(range(3)))
def test_channels_do_not_know_their_names(seed, order):
    noise = replace(stated_noise(12_000.0, 5.0), read_variance=np.array([1e-7, 2e-7, 4e-7]), shot=np.array([1e-4, 5e-5, 2e-4]))
    turned = replace(noise, read_variance=noise.read_variance[order], shot=noise.shot[order])
    photo, blank = light(seed), light(seed + 1, low=0.3)
    one = relative_signal(frame(photo, noise), frame(blank, noise), None)
    other = relative_signal(frame(photo[..., order], turned), frame(blank[..., order], turned), None)
    assert np.array_equal(one.values[..., order], other.values)
    assert one.variance[..., order] == pytest.approx(other.variance, rel=SINGLE)


@settings(deadline=None)
@given(seeds, st.floats(0, 0.05), st.booleans())
def test_saturated_is_a_clipped_pixel_or_a_neighbour_of_one(seed, share, in_blank):
    noise = stated_noise(12_000.0, 5.0)
    rng = np.random.default_rng(seed)
    clipped = rng.random(SHAPE) < share
    codes = [np.full((*SHAPE, 3), level, np.uint16) for level in (30_000, 50_000)]
    codes[in_blank][clipped, rng.integers(0, 3, clipped.sum())] = 65_535
    photo, blank = (linear_frame(one, Encoding(), 65_535.0, noise=noise) for one in codes)
    flags = relative_signal(photo, blank, None).flags
    assert np.array_equal(has(flags, SATURATED), binary_dilation(clipped, np.ones((3, 3))))


@settings(deadline=None)
@given(seeds)
def test_a_blank_fainter_than_its_noise_is_never_divided_by_unsaid(seed):
    noise = stated_noise(1_000.0, 10.0)
    blank = light(seed, low=0.0, high=0.2)
    blank[:, :8] *= np.float32(0.01)
    flags = relative_signal(frame(light(seed + 1), noise), frame(blank, noise), None).flags
    faint = np.any(blank < 0.02, axis=-1)  # ten electrons are 0.01 of full scale: below two sigma
    assert np.all(has(flags, DARK)[faint])


@settings(deadline=None)
@given(seeds, st.lists(st.floats(0, 0.3), min_size=2, max_size=4))
def test_of_several_shots_a_pixel_is_lost_only_where_all_lose_it(seed, shares):
    noise, rng = stated_noise(12_000.0, 5.0), np.random.default_rng(seed)
    photos = [light(seed + k) for k in range(len(shares))]
    lost = [rng.random(SHAPE) < share for share in shares]
    signals = []
    for photo, where in zip(photos, lost):
        photo[where] = 1.5
        signals.append(relative_signal(frame(photo, noise), frame(light(seed, low=0.3), noise), None))
    both = fused_signal(signals)
    every = np.logical_and.reduce([has(one.flags, SATURATED) for one in signals])
    assert np.array_equal(has(both.flags, SATURATED), every)
    for k, one in enumerate(signals):
        own = both.variance[..., 3 * k : 3 * k + 3]
        assert np.all(own[has(one.flags, SATURATED)] > 1e3)
        assert np.array_equal(own[one.flags == 0], one.variance[one.flags == 0])


@settings(max_examples=30, deadline=None)
@given(seeds, st.integers(-6, 6), st.integers(-6, 6))
def test_a_shot_moved_by_whole_pixels_comes_back_as_it_was(seed, right, down):
    noise = stated_noise(12_000.0, 5.0)
    signal = relative_signal(frame(light(seed), noise), frame(light(seed + 1, low=0.3), noise), None)
    moved = moved_signal(signal, np.array([[1.0, 0.0, right], [0.0, 1.0, down]]))
    rows, columns = np.indices(SHAPE)
    inside = (rows + down >= 0) & (rows + down < SHAPE[0]) & (columns + right >= 0) & (columns + right < SHAPE[1])
    there = (rows[inside] + down, columns[inside] + right)
    assert moved.values[inside] == pytest.approx(signal.values[there], rel=SINGLE)
    assert moved.variance[inside] == pytest.approx(signal.variance[there], rel=SINGLE)
    assert np.all(has(moved.flags, DARK)[~inside])
    assert np.array_equal(moved.flags[inside], signal.flags[there])


@settings(max_examples=10, deadline=None)
@given(seeds, st.sampled_from([0.25, 0.5]))
def test_noise_scales_with_the_picture(seed, gain):
    rng = np.random.default_rng(seed)
    level = np.linspace(0.2, 0.8, 128)[None, :, None] * np.ones((128, 1, 3))
    picture = level + rng.normal(size=level.shape) * np.sqrt(1e-6 + 1e-4 * level)
    once, again = estimate_noise(picture), estimate_noise(gain * picture)
    probe = np.full(3, 0.5)
    assert again.variance(gain * probe) == pytest.approx(gain**2 * once.variance(probe), rel=0.02)  # its first line is on a grid


@settings(max_examples=10, deadline=None)
@given(seeds)
def test_noise_does_not_know_rows_from_columns(seed):
    rng = np.random.default_rng(seed)
    level = np.linspace(0.2, 0.8, 128)[None, :, None] * np.ones((128, 1, 3))
    picture = level + rng.normal(size=level.shape) * np.sqrt(1e-6 + 1e-4 * level)
    probe = np.full(3, 0.5)
    sideways = estimate_noise(picture.transpose(1, 0, 2))
    assert sideways.variance(probe) == pytest.approx(estimate_noise(picture).variance(probe), rel=1e-9)


def noise_over_truth(sensor, seed, told=1.0):
    """Estimated over true sigma (3,) at a middle level, of a picture whose level rises from corner to corner."""
    rows, columns = np.indices((256, 256)) / 255
    level = sensor.level * (0.15 + 0.85 * np.stack([rows, (rows + columns) / 2, 1 - columns], axis=-1))
    full_scale = 2.0**sensor.bits - 1
    codes = exposed(
        replace(sensor, full_well=sensor.full_well * told, read=sensor.read * told), level, np.random.default_rng(seed)
    )
    noise = linear_frame(codes, Encoding(kind=sensor.encoding), full_scale).noise
    probe = np.full(3, sensor.level / 2)
    variance = probe / sensor.full_well + (sensor.read / sensor.full_well) ** 2
    rounding = code_step(Encoding(kind=sensor.encoding), probe, full_scale) ** 2 / 12
    return np.sqrt(noise.variance(probe) / (variance + rounding))


@settings(max_examples=20, deadline=None)
@given(sensors(), seeds)
def test_any_sensor_s_noise_is_found_within_five_percent(sensor, seed):
    # 900 tiles know a line's middle to 1 % of the variance, half that of sigma; a false alarm at 5 % is none in a million
    assert noise_over_truth(sensor, seed) == pytest.approx(1, abs=0.05)


@pytest.mark.parametrize("told", [0.8, 1.25])
def test_the_band_would_catch_noise_of_another_sensor(told):
    assert not np.all(np.abs(noise_over_truth(Sensor(bits=16), 1, told) - 1) < 0.05)
