"""Damaged pictures give a named refusal or a picture, and nothing else."""

import cv2
import numpy as np
import pytest
import tifffile

from sheenmap.errors import PictureError
from sheenmap.pictures import read_mask, read_picture, read_plane

COUNT = 250


def damaged(data, rng):
    """A few bytes changed, most of them in the header; at times cut or lengthened."""
    spoilt = bytearray(data)
    for _ in range(int(rng.integers(1, 8))):
        reach = len(spoilt) if rng.random() < 0.4 else min(len(spoilt), 180)
        spoilt[int(rng.integers(reach))] = int(rng.integers(256))
    if rng.random() < 0.2:
        spoilt = spoilt[: int(rng.integers(1, len(spoilt)))]
    if rng.random() < 0.1:
        spoilt += bytes(rng.integers(0, 256, 50, dtype=np.uint8))
    return bytes(spoilt)


@pytest.mark.parametrize("ending", ["png", "jpg", "tif"])
def test_damaged_files_never_end_in_a_traceback(tmp_path, ending):
    rng = np.random.default_rng(11)
    codes = rng.integers(0, 256, (24, 32, 3), dtype=np.uint8)
    whole, path = tmp_path / f"whole.{ending}", tmp_path / f"damaged.{ending}"
    if ending == "tif":
        tifffile.imwrite(whole, codes, photometric="rgb")
    else:
        cv2.imwrite(str(whole), codes)
    data = whole.read_bytes()
    refused = 0
    for _ in range(COUNT):
        path.write_bytes(damaged(data, rng))
        for read in (read_picture, read_plane, read_mask):
            try:
                read(path)
            except PictureError as fault:
                refused += 1
                assert fault.failure.reason
    assert refused > COUNT  # at the least the two readers that want another kind of file
