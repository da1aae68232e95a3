"""The pixels of PNG, JPEG and TIFF bytes, in red, green, blue, as they stand in the file."""

import io
import logging
import warnings
from dataclasses import dataclass
from typing import Any

import cv2
import numpy as np
import tifffile
from numpy.typing import NDArray

from sheenmap.pictures.headers import Header, jpeg_header, jpeg_is_whole, png_header, png_is_whole

Codes = NDArray[np.uint8] | NDArray[np.uint16] | NDArray[np.float32]
logging.getLogger("tifffile").addFilter(lambda record: False)  # what is wrong with a file is told once, by its reason
MOST_PIXELS_PER_BYTE = 1100  # deflate packs no more than 1032 to 1; a plain picture of one colour comes near it
CHANNEL_ADVICE = "a colour picture of three channels is needed"


class UnusableError(Exception):
    """Why the bytes are no usable picture; ``reason`` in a few words, ``detail`` what was found and what is allowed."""

    def __init__(self, reason: str, detail: str = "") -> None:
        super().__init__(reason)
        self.reason, self.detail = reason, detail


@dataclass(frozen=True, kw_only=True, eq=False)
class Decoded:
    """Codes (H, W, 3) and what was noticed on the way."""

    codes: Codes
    notes: tuple[str, ...] = ()


def check_size(width: int, height: int, data_length: int, most_pixels: int) -> None:
    """Raise ``UnusableError`` for a size of zero, beyond the limit, or that the file's bytes can never hold."""
    if width == 0 or height == 0:
        raise UnusableError("zero-size picture", f"{width} x {height} pixels")
    if width * height > most_pixels:
        raise UnusableError("too large", f"{width} x {height} pixels; allowed: {most_pixels / 1e6:g} million pixels")
    if width * height > MOST_PIXELS_PER_BYTE * max(data_length, 1):
        raise UnusableError("cut off", f"the header tells of {width} x {height} pixels, the file has {data_length} bytes")


def decode_png(data: bytes, most_pixels: int) -> Decoded:
    """Decode a PNG."""
    header = png_header(data)
    if header is None:
        raise UnusableError("cut off", "the PNG ends within its header")
    check_size(header.width, header.height, len(data), most_pixels)
    if header.channels == "animated":
        raise UnusableError("animated picture", "a single still is needed")
    _refuse_channels(header)
    if not png_is_whole(data):
        raise UnusableError("cut off", "the PNG has no end")
    return _from_opencv(data, header)


def decode_jpeg(data: bytes, most_pixels: int) -> Decoded:
    """Decode a JPEG; its EXIF orientation is applied."""
    header = jpeg_header(data)
    if header is None:
        raise UnusableError("cut off", "the JPEG ends within its header")
    check_size(header.width, header.height, 64 * len(data), most_pixels)
    _refuse_channels(header)
    if not jpeg_is_whole(data):
        raise UnusableError("cut off", "the JPEG has no end marker")
    decoded = _from_opencv(data, header)
    codes = oriented(decoded.codes, header.orientation)
    notes = () if header.orientation == 1 else (f"turned by its EXIF orientation {header.orientation}",)
    return Decoded(codes=codes, notes=decoded.notes + notes)


def decode_tiff(data: bytes, most_pixels: int) -> Decoded:
    """Decode the only page of a TIFF: 8 or 16 bits or float, three channels, orientation applied."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        try:
            return _tiff_page(data, most_pixels)
        except UnusableError:
            raise
        except Exception as fault:
            # The library raises whatever its parsers meet in damaged bytes.
            raise UnusableError("damaged TIFF", _one_line(fault)) from None


def tiff_plane(data: bytes, most_pixels: int) -> NDArray[np.float32]:
    """The only page of a TIFF of one channel, as float32 (H, W)."""
    try:
        with tifffile.TiffFile(io.BytesIO(data)) as file:
            page: Any = file.pages[0]
            check_size(page.imagewidth, page.imagelength, 64 * len(data), most_pixels)
            plane = np.squeeze(page.asarray())
    except UnusableError:
        raise
    except Exception as fault:
        raise UnusableError("damaged TIFF", _one_line(fault)) from None
    if plane.ndim != 2:
        raise UnusableError("not one channel", f"its shape is {plane.shape}; allowed: one number a pixel")
    return np.asarray(plane, dtype=np.float32)


def oriented(codes: Any, orientation: int) -> Any:
    """A picture (H, W, ...) turned and mirrored as its EXIF orientation (1 to 8) asks."""
    if orientation in (5, 6, 7, 8):
        codes = codes.swapaxes(0, 1)
    flips = {1: (1, 1), 2: (1, -1), 3: (-1, -1), 4: (-1, 1), 5: (1, 1), 6: (1, -1), 7: (-1, -1), 8: (-1, 1)}[orientation]
    return np.ascontiguousarray(codes[:: flips[0], :: flips[1]])


def _tiff_page(data: bytes, most_pixels: int) -> Decoded:
    with tifffile.TiffFile(io.BytesIO(data)) as file:
        if len(file.pages) != 1:
            raise UnusableError("several pages", f"the TIFF has {len(file.pages)}; allowed: one")
        page: Any = file.pages[0]
        check_size(page.imagewidth, page.imagelength, 64 * len(data), most_pixels)
        if page.photometric not in (tifffile.PHOTOMETRIC.RGB, tifffile.PHOTOMETRIC.YCBCR):
            raise UnusableError("not a colour picture", f"its channels are {page.photometric.name.lower()}; {CHANNEL_ADVICE}")
        codes = page.asarray()
        if page.planarconfig == tifffile.PLANARCONFIG.SEPARATE and codes.ndim == 3:
            codes = np.moveaxis(codes, 0, -1)
        orientation = int(getattr(page.tags.get("Orientation"), "value", 1) or 1)
        has_profile = "InterColorProfile" in page.tags
    notes = ("has an embedded colour profile, which is not applied",) if has_profile else ()
    codes, alpha_note = without_alpha(codes)
    if codes.dtype.kind == "f":
        if not np.all(np.isfinite(codes)):
            raise UnusableError("not finite", "a float TIFF holds NaN or infinite values")
        codes = codes.astype(np.float32)
    elif codes.dtype not in (np.uint8, np.uint16):
        raise UnusableError("unknown numbers", f"the TIFF holds {codes.dtype}; allowed: 8 or 16 bits or float")
    turned = oriented(codes, orientation if 1 <= orientation <= 8 else 1)
    return Decoded(codes=turned, notes=notes + alpha_note)


def _refuse_channels(header: Header) -> None:
    if header.channels not in ("colour", "colour with alpha", "palette"):
        raise UnusableError("not a colour picture", f"its channels are {header.channels}; {CHANNEL_ADVICE}")


def _from_opencv(data: bytes, header: Header) -> Decoded:
    try:
        decoded = cv2.imdecode(np.frombuffer(data, np.uint8), cv2.IMREAD_UNCHANGED)
    except cv2.error as fault:
        raise UnusableError(f"damaged {header.kind.upper()}", _one_line(fault)) from None
    if decoded is None or decoded.shape[:2] != (header.height, header.width):
        raise UnusableError(f"damaged {header.kind.upper()}", "its pixels cannot be decoded")
    if decoded.ndim != 3 or decoded.dtype not in (np.uint8, np.uint16):
        raise UnusableError("not a colour picture", CHANNEL_ADVICE)
    codes, notes = without_alpha(decoded)
    if header.has_profile:
        notes = ("has an embedded colour profile, which is not applied", *notes)
    if header.channels == "palette":
        notes = ("has a palette of at most 256 colours: too coarse for a good map", *notes)
    return Decoded(codes=cv2.cvtColor(codes, cv2.COLOR_BGR2RGB), notes=notes)


def without_alpha(codes: Any) -> tuple[Any, tuple[str, ...]]:
    """Three channels (H, W, 3) of a picture, a fully opaque alpha dropped with a word; anything else is refused."""
    if codes.ndim != 3 or codes.shape[2] not in (3, 4):
        raise UnusableError("not a colour picture", f"its shape is {codes.shape}; {CHANNEL_ADVICE}")
    if codes.shape[2] == 3:
        return codes, ()
    opaque = 1.0 if codes.dtype.kind == "f" else np.iinfo(codes.dtype).max
    if not np.all(codes[..., 3] == opaque):
        raise UnusableError("partly transparent", "its alpha channel is not opaque everywhere; save it without alpha")
    return np.ascontiguousarray(codes[..., :3]), ("its opaque alpha channel was dropped",)


def _one_line(fault: BaseException) -> str:
    return " ".join(str(fault).split())[:160] or type(fault).__name__
