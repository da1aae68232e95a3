"""Picture files read, or refused with a reason."""

import hashlib
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import NoReturn

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.errors import Failure, PictureError
from sheenmap.pictures.decode import Codes, Decoded, UnusableError, check_size, decode_jpeg, decode_png, decode_tiff, tiff_plane
from sheenmap.pictures.headers import ENDINGS, file_kind, png_header

MOST_PIXELS = 250_000_000
DECODERS: dict[str, Callable[[bytes, int], Decoded]] = {"png": decode_png, "jpeg": decode_jpeg, "tiff": decode_tiff}


@dataclass(frozen=True, kw_only=True, eq=False)
class Picture:
    """A picture as it stands in its file.

    Parameters
    ----------
    codes : (H, W, 3) uint8, uint16 or float32
        Red, green, blue, upright.
    full_scale : float
        255, 65535, or 1 for float.
    format : str
        "png", "jpeg" or "tiff".
    notes : tuple of str
        What was noticed or left out on the way.
    digest : str
        SHA-256 of the file, hexadecimal.
    """

    codes: Codes
    full_scale: float
    path: Path
    format: str
    notes: tuple[str, ...]
    digest: str


@dataclass(frozen=True, kw_only=True, eq=False)
class Averaged:
    """The mean (H, W, 3) of several pictures, as codes when there is one, else float32; their number and digests by name."""

    codes: Codes
    full_scale: float
    frames: int
    digests: dict[str, str]


def read_picture(path: Path, *, most_pixels: int = MOST_PIXELS) -> Picture:
    """Read an 8- or 16-bit PNG, JPEG or TIFF, or a float TIFF.

    Raises
    ------
    PictureError
        Missing, unreadable, cut off, no picture, no colour picture, several pages, zero or absurd size.
    """
    data = _read_bytes(path)
    kind = file_kind(data)
    if kind not in DECODERS:
        _refuse(path, "not a picture", f"its first bytes are those of {_looks_like(data, kind)}; allowed: PNG, JPEG, TIFF")
    try:
        decoded = DECODERS[kind](data, most_pixels)
    except UnusableError as why:
        _refuse(path, why.reason, why.detail)
    except MemoryError:
        _refuse(path, "too large", "the memory of this machine does not hold it")
    notes = decoded.notes
    if path.suffix.lower() not in ENDINGS[kind]:
        notes = (*notes, f"is a {kind.upper()} file although its name ends in {path.suffix or 'nothing'}")
    return Picture(
        codes=decoded.codes, full_scale=_full_scale(decoded.codes), path=path, format=kind, notes=notes,
        digest=hashlib.sha256(data).hexdigest(),
    )  # fmt: skip


def average_frames(paths: Sequence[Path]) -> Averaged:
    """The mean of one or more pictures of one size and depth. Raises ``PictureError`` naming the one that does not fit."""
    first = read_picture(paths[0])
    digests = {paths[0].name: first.digest}
    if len(paths) == 1:
        return Averaged(codes=first.codes, full_scale=first.full_scale, frames=1, digests=digests)
    total = first.codes.astype(np.float32)
    for path in paths[1:]:
        picture = read_picture(path)
        if picture.codes.shape != first.codes.shape or picture.full_scale != first.full_scale:
            _refuse(path, "does not fit the other frames", f"{_size(picture.codes)}; {paths[0].name} is {_size(first.codes)}")
        total += picture.codes
        digests[path.name] = picture.digest
    return Averaged(codes=total / np.float32(len(paths)), full_scale=first.full_scale, frames=len(paths), digests=digests)


def read_plane(path: Path, *, finite: bool = True, most_pixels: int = MOST_PIXELS) -> NDArray[np.float32]:
    """Read one number a pixel (H, W) from a TIFF of one channel; ``finite`` refuses NaN. Raises ``PictureError``."""
    data = _read_bytes(path)
    if file_kind(data) != "tiff":
        _refuse(path, "not a TIFF", "a TIFF with one float a pixel is needed")
    try:
        plane = tiff_plane(data, most_pixels)
    except UnusableError as why:
        _refuse(path, why.reason, why.detail)
    if finite and not np.all(np.isfinite(plane)):
        _refuse(path, "not finite", "every pixel needs a number")
    return plane


def read_mask(path: Path, *, most_pixels: int = MOST_PIXELS) -> NDArray[np.bool_]:
    """Read a mask (H, W) from a PNG of one channel or more: True where any channel but alpha is not zero."""
    data = _read_bytes(path)
    header = png_header(data) if file_kind(data) == "png" else None
    if header is None:
        _refuse(path, "not a PNG", "a mask is a PNG, white inside and black outside")
    try:
        check_size(header.width, header.height, len(data), most_pixels)
    except UnusableError as why:
        _refuse(path, why.reason, why.detail)
    codes = cv2.imdecode(np.frombuffer(data, np.uint8), cv2.IMREAD_UNCHANGED)
    if codes is None:
        _refuse(path, "damaged PNG", "its pixels cannot be decoded")
    if codes.ndim == 2:
        return np.asarray(codes > 0)
    return np.asarray(np.any(codes[..., :3] > 0, axis=-1))


def _read_bytes(path: Path) -> bytes:
    try:
        data = path.read_bytes()
    except FileNotFoundError:
        _refuse(path, "no such file")
    except IsADirectoryError:
        _refuse(path, "is a folder", "a picture file is needed")
    except OSError as fault:
        _refuse(path, "cannot be read", fault.strerror or "")
    if not data:
        _refuse(path, "empty file")
    return data


def _refuse(path: Path, reason: str, detail: str = "") -> NoReturn:
    raise PictureError(Failure(path=path, reason=reason, detail=detail)) from None


def _looks_like(data: bytes, kind: str) -> str:
    if kind:
        return f"a {kind.upper()} file"
    printable = sum(byte in b"\t\r\n" or 32 <= byte < 127 for byte in data[:512])
    return "text" if printable > 0.9 * len(data[:512]) else "no format that is known"


def _full_scale(codes: Codes) -> float:
    return {1: 255.0, 2: 65535.0, 4: 1.0}[codes.dtype.itemsize]


def _size(codes: Codes) -> str:
    return f"{codes.shape[1]} x {codes.shape[0]} pixels, {codes.dtype}"
