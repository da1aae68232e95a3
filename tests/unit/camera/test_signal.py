"""Photograph over blank: what cancels, what is flagged."""

import numpy as np
import pytest

from sheenmap.camera import Encoding, fused_signal, linear_frame, moved_signal, relative_signal, stated_noise
from sheenmap.flags import DARK, SATURATED, has

NOISE = stated_noise(12_000.0, 5.0)


def frame(level, *, noise=NOISE):
    codes = np.rint(np.broadcast_to(level, (40, 50, 3)) * 65535).astype(np.uint16)
    return linear_frame(codes, Encoding(), 65535.0, noise=noise)


def test_exposure_and_shading_cancel():
    shade = np.linspace(0.5, 1.0, 50)[None, :, None]
    ratio = np.array([0.3, 0.6, 0.9])
    signals = [relative_signal(frame(gain * shade * ratio), frame(gain * shade), None) for gain in (0.5, 0.9)]
    np.testing.assert_allclose(signals[0].values, np.broadcast_to(ratio, (40, 50, 3)), atol=1e-4)
    np.testing.assert_allclose(signals[0].values, signals[1].values, atol=1e-4)


def test_the_dark_is_taken_from_both():
    dark = np.full((40, 50, 3), 0.02, np.float32)
    signal = relative_signal(frame(0.32), frame(0.62), dark)
    np.testing.assert_allclose(signal.values, 0.5, atol=1e-4)
    assert any("dark" in line for line in signal.history)


def test_variance_is_that_of_a_ratio():
    signal = relative_signal(frame(0.4), frame(0.8), None)
    expected = NOISE.variance(np.full(3, 0.4)) / 0.8**2 + 0.5**2 * NOISE.variance(np.full(3, 0.8)) / 0.8**2
    np.testing.assert_allclose(signal.variance[20, 20], expected, rtol=1e-3)


def test_a_clipped_pixel_is_saturated_with_a_margin_of_one():
    level = np.full((40, 50, 3), 0.5)
    level[10, 20, 1] = 1.0
    flags = relative_signal(frame(level), frame(0.8), None).flags
    assert has(flags, SATURATED).sum() == 9
    assert has(flags, SATURATED)[9:12, 19:22].all()


def test_a_blank_without_light_is_dark():
    blank = np.full((40, 50, 3), 0.8)
    blank[:, :10] = 0.0
    flags = relative_signal(frame(0.4), frame(blank), None).flags
    assert has(flags, DARK)[:, :10].all() and not has(flags, DARK)[:, 10:].any()


def test_what_is_clipped_in_one_shot_is_taken_from_the_other():
    bright = np.full((40, 50, 3), 0.5)
    bright[5:15, 5:15] = 1.0
    first, second = (relative_signal(frame(level), frame(0.8), None) for level in (bright, np.full((40, 50, 3), 0.5)))
    both = fused_signal([first, second])
    assert both.values.shape == (40, 50, 6)
    assert not has(both.flags, SATURATED).any()
    assert (both.variance[8, 8, :3] > 100).all() and (both.variance[8, 8, 3:] < 1).all()


def test_a_moved_shot_is_brought_back_and_its_rim_is_dark():
    level = np.full((40, 50, 3), 0.3)
    level[10:20, 12:22] = 0.6
    moved = np.roll(level, (3, 2), axis=(0, 1))
    main, other = (relative_signal(frame(image), frame(0.8), None) for image in (level, moved))
    back = moved_signal(other, np.array([[1.0, 0.0, 2.0], [0.0, 1.0, 3.0]]))
    inner = np.s_[2:30, 2:40]
    np.testing.assert_allclose(back.values[inner], main.values[inner], atol=1e-3)
    assert has(back.flags, DARK)[-3:].all()


def test_history_tells_every_step():
    assert relative_signal(frame(0.4), frame(0.8), None).history[-1].startswith("saturated with margin")
    with pytest.raises(ValueError, match="needs code and linear"):
        linear_frame(np.zeros((20, 20, 3), np.float32), Encoding(kind="curve"), 1.0, noise=NOISE)
