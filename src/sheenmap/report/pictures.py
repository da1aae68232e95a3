"""The photograph and the colour scale, as text for the page."""

import base64
import csv
from importlib.resources import files

import cv2
import numpy as np
from numpy.typing import NDArray

WIDEST_PHOTO = 1200
JPEG_QUALITY = 84


def photo_address(preview: NDArray[np.uint8]) -> str:
    """The photograph (h, w, 3) in sRGB codes as the data address of a JPEG."""
    scale = min(1.0, WIDEST_PHOTO / max(preview.shape[:2]))
    if scale < 1.0:
        preview = np.asarray(cv2.resize(preview, None, fx=scale, fy=scale, interpolation=cv2.INTER_AREA), np.uint8)
    _, encoded = cv2.imencode(".jpg", preview[..., ::-1], [cv2.IMWRITE_JPEG_QUALITY, JPEG_QUALITY])
    return "data:image/jpeg;base64," + base64.b64encode(encoded.tobytes()).decode("ascii")


def colour_scale() -> list[str]:
    """The sequential scale of the map, lowest value first, as 256 colours "#rrggbb"."""
    text = files("sheenmap.report").joinpath("cividis.csv").read_text(encoding="utf-8")
    rows = csv.DictReader(line for line in text.splitlines() if not line.startswith("#"))
    return ["#" + "".join(f"{int(row[name]):02x}" for name in ("red", "green", "blue")) for row in rows]
