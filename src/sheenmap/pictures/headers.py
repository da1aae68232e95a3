"""What a picture file says of itself before it is decoded: its kind, size and channels, from its first bytes."""

import struct
from dataclasses import dataclass

SIGNATURES = (
    (b"\x89PNG\r\n\x1a\n", "png"),
    (b"\xff\xd8\xff", "jpeg"),
    (b"II*\x00", "tiff"),
    (b"MM\x00*", "tiff"),
    (b"II+\x00", "tiff"),
    (b"MM\x00+", "tiff"),
    (b"GIF8", "gif"),
    (b"BM", "bmp"),
    (b"RIFF", "webp"),
)
ENDINGS = {"png": (".png",), "jpeg": (".jpg", ".jpeg", ".jpe"), "tiff": (".tif", ".tiff")}
FRAME_MARKERS = frozenset(range(0xC0, 0xD0)) - {0xC4, 0xC8, 0xCC}
PNG_KINDS = {0: "greyscale", 2: "colour", 3: "palette", 4: "greyscale with alpha", 6: "colour with alpha"}


@dataclass(frozen=True, kw_only=True)
class Header:
    """Width and height in pixels, bits of a channel, what the channels are, and EXIF orientation (1 to 8).

    ``channels`` is "colour", "colour with alpha", "greyscale", "palette", "CMYK" and the like. ``has_profile`` tells of an
    embedded colour profile.
    """

    kind: str
    width: int
    height: int
    bits: int
    channels: str
    orientation: int = 1
    has_profile: bool = False


def file_kind(data: bytes) -> str:
    """Kind of the file by its signature, such as "png", "jpeg" or "tiff"; an empty string when no picture is known by it."""
    return next((kind for signature, kind in SIGNATURES if data.startswith(signature)), "")


def png_header(data: bytes) -> Header | None:
    """Header of a PNG, or None when it is cut off within it."""
    if len(data) < 33 or data[12:16] != b"IHDR":
        return None
    width, height, bits, colour = struct.unpack(">IIBB", data[16:26])
    start = data[: data.find(b"IDAT") if b"IDAT" in data[:65536] else 65536]
    channels = "animated" if b"acTL" in start else PNG_KINDS.get(colour, "unknown")
    if channels == "colour" and b"tRNS" in start:
        channels = "colour with alpha"
    return Header(kind="png", width=width, height=height, bits=bits, channels=channels, has_profile=b"iCCP" in start)


def png_is_whole(data: bytes) -> bool:
    """Whether a PNG's chunks follow each other to its end chunk."""
    at = 8
    while at + 12 <= len(data):
        length = struct.unpack(">I", data[at : at + 4])[0]
        if data[at + 4 : at + 8] == b"IEND":
            return True
        at += 12 + length
    return False


def jpeg_header(data: bytes) -> Header | None:
    """Header of a JPEG, or None when its segments cannot be followed to the frame's size."""
    at, orientation, has_profile, adobe_inverted = 2, 1, False, False
    while at + 4 <= len(data) and data[at] == 0xFF:
        marker = data[at + 1]
        if marker == 0xFF:
            at += 1
            continue
        length = struct.unpack(">H", data[at + 2 : at + 4])[0]
        body = data[at + 4 : at + 2 + length]
        if marker == 0xE1 and body.startswith(b"Exif\0\0"):
            orientation = exif_orientation(body[6:])
        has_profile |= marker == 0xE2 and body.startswith(b"ICC_PROFILE")
        adobe_inverted |= marker == 0xEE
        if marker in FRAME_MARKERS and len(body) >= 6:
            bits, height, width, components = struct.unpack(">BHHB", body[:6])
            channels = {1: "greyscale", 3: "colour", 4: "CMYK"}.get(components, "unknown")
            return Header(
                kind="jpeg",
                width=width,
                height=height,
                bits=bits,
                channels=channels,
                orientation=orientation,
                has_profile=has_profile,
            )
        at += 2 + length
    return None


def jpeg_is_whole(data: bytes) -> bool:
    """Whether a JPEG's end marker stands near its end (some cameras append data of their own after it)."""
    return b"\xff\xd9" in data[-65536:]


def exif_orientation(tiff: bytes) -> int:
    """Orientation tag (1 to 8) of an EXIF block that starts with its TIFF header; 1 when there is none."""
    order = {b"II": "<", b"MM": ">"}.get(tiff[:2])
    if order is None or len(tiff) < 8:
        return 1
    try:
        at = struct.unpack(order + "I", tiff[4:8])[0]
        count = struct.unpack(order + "H", tiff[at : at + 2])[0]
        for k in range(min(count, 200)):
            entry = tiff[at + 2 + 12 * k : at + 14 + 12 * k]
            tag, _, _, value = struct.unpack(order + "HHIH", entry[:10])
            if tag == 0x0112:
                return value if 1 <= value <= 8 else 1
    except struct.error:
        return 1
    return 1
