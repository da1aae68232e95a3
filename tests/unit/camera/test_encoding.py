"""Codes to light and back, and what a code is worth."""

import numpy as np
import pytest

from sheenmap.camera import Encoding, code_step, decode, encode, parse_encoding_name

CURVE = Encoding(kind="curve", code=np.array([0.0, 40, 120, 255]), linear=np.array([0.0, 0.05, 0.3, 1.0]))
ALL = [Encoding(kind="linear"), Encoding(kind="srgb"), Encoding(kind="power", gamma=2.2), CURVE]


@pytest.mark.parametrize("encoding", ALL, ids=lambda e: e.kind)
def test_codes_come_back_from_light(encoding):
    codes = np.arange(256.0)
    np.testing.assert_allclose(encode(encoding, decode(encoding, codes, 255.0), 255.0), codes, atol=1e-9)


def test_srgb_is_that_of_the_standard():
    # IEC 61966-2-1:1999: code 128 of 255 is 0.2158605 of full scale; the branches meet at 0.04045
    assert decode(Encoding(kind="srgb"), np.array([128.0]), 255.0)[0] == pytest.approx(0.21586050, abs=1e-8)
    assert decode(Encoding(kind="srgb"), np.array([0.04045]), 1.0)[0] == pytest.approx(0.04045 / 12.92, abs=1e-12)


@pytest.mark.parametrize("encoding", ALL, ids=lambda e: e.kind)
def test_a_code_is_as_wide_as_the_difference_of_its_neighbours(encoding):
    codes = np.array([30.0, 90.0, 180.0, 230.0])
    ahead, behind = (decode(encoding, codes + step, 255.0) for step in (0.5, -0.5))
    width = code_step(encoding, decode(encoding, codes, 255.0), 255.0)
    # a curve of a few points has its slope smoothed at its points
    np.testing.assert_allclose(width, ahead - behind, rtol=0.6 if encoding.kind == "curve" else 2e-3)


def test_names_are_read_and_others_refused():
    assert parse_encoding_name("power 1.8").gamma == 1.8
    assert parse_encoding_name("srgb").kind == "srgb"
    assert parse_encoding_name("power 99") is None
    assert parse_encoding_name("gamma") is None
