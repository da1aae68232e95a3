"""Rendered photographs as PNG."""

from pathlib import Path
from typing import BinaryIO

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.errors import Fault, SettingsError
from sheenmap.storage.atomic import write_atomically


def write_png(path: Path, codes: NDArray[np.uint8] | NDArray[np.uint16]) -> None:
    """Write codes (H, W, 3), red green blue, as a PNG of their depth; whole or not at all.

    Raises
    ------
    SettingsError
        The name does not end in .png.
    OutputError
        It cannot be written; what was there before is whole.
    """
    if path.suffix.lower() != ".png":
        raise SettingsError([Fault(key="--out", found=str(path), allowed="a name that ends in .png")], where="render")
    data = cv2.imencode(".png", np.ascontiguousarray(codes[..., ::-1]))[1].tobytes()

    def write(file: BinaryIO) -> None:
        file.write(data)

    write_atomically(path, write)
