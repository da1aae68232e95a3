"""The photograph small and in sRGB, for the report."""

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.camera import Encoding, encode
from sheenmap.measure.frames import Frames

WIDEST = 1600
BRIGHTEST = 0.98  # quantile that is shown white, so that a dim photograph can be seen


def preview(frames: Frames) -> tuple[NDArray[np.uint8], float]:
    """The photograph (h, w, 3) in sRGB codes, and its scale w / W."""
    height, width = frames.photo.values.shape[:2]
    scale = min(1.0, WIDEST / width)
    size = (max(1, round(width * scale)), max(1, round(height * scale)))
    small = frames.photo.values if scale == 1.0 else cv2.resize(frames.photo.values, size, interpolation=cv2.INTER_AREA)
    bright = float(np.quantile(small, BRIGHTEST))
    shown = np.clip(small / max(bright, 1e-3) * 0.9, 0.0, 1.0)
    return np.rint(encode(Encoding(kind="srgb"), shown.astype(float), 255.0)).astype(np.uint8), size[0] / width
