"""Arrays as TIFF: contiguous and uncompressed for speed, or deflated for size."""

import json
from typing import Any, BinaryIO

import numpy as np
import tifffile
from numpy.typing import NDArray

from sheenmap import __version__

ROWS_PER_STRIP = 64  # of a compressed file: small enough that strips spread over the cores, large enough to compress well
DEFLATE_LEVEL = 1  # level 6 takes four times as long and saves a twentieth


def write_tiff(
    stream: BinaryIO, array: NDArray[Any], description: dict[str, Any], *, mm_per_px: float | None, compress: bool
) -> None:
    """Write (H, W) as one page, or (K, H, W) as K pages, with a JSON description and the scale.

    The same array and description give the same bytes: no date is written.
    """
    options: dict[str, Any] = {"metadata": None, "photometric": "minisblack", "software": f"sheenmap {__version__}"}
    options["description"] = json.dumps(description, ensure_ascii=True, allow_nan=False)
    if mm_per_px is not None:
        options |= {"resolution": (10.0 / mm_per_px, 10.0 / mm_per_px), "resolutionunit": "CENTIMETER"}
    if compress:
        options |= {
            "compression": "adobe_deflate",
            "compressionargs": {"level": DEFLATE_LEVEL},
            "rowsperstrip": ROWS_PER_STRIP,
        }
    pages = array if array.ndim == 3 else array[np.newaxis]
    with tifffile.TiffWriter(stream, bigtiff=array.nbytes > 2**32 - 2**25) as writer:
        for page in pages:
            writer.write(page, contiguous=False, **options)
