"""Pictures as files hold them: depth, order of channels, orientation, and what is refused."""

import hashlib
import struct
import zlib

import cv2
import numpy as np
import pytest
import tifffile
from PIL import Image, ImageOps

from sheenmap.errors import PictureError
from sheenmap.pictures import average_frames, read_mask, read_picture, read_plane

RNG = np.random.default_rng(3)
EIGHT = RNG.integers(0, 256, (30, 40, 3), dtype=np.uint8)
SIXTEEN = RNG.integers(0, 65536, (30, 40, 3), dtype=np.uint16)


def refused(path, match):
    with pytest.raises(PictureError, match=match) as caught:
        read_picture(path)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("codes", [EIGHT, SIXTEEN], ids=["8 bits", "16 bits"])
def test_png_comes_back_code_by_code_in_red_green_blue(tmp_path, codes):
    path = tmp_path / "a.png"
    cv2.imwrite(str(path), codes[..., ::-1])
    found = read_picture(path)
    np.testing.assert_array_equal(found.codes, codes)
    assert found.codes.dtype == codes.dtype
    assert found.full_scale == np.iinfo(codes.dtype).max
    assert found.digest == hashlib.sha256(path.read_bytes()).hexdigest()


@pytest.mark.parametrize("codes", [EIGHT, SIXTEEN, (EIGHT / 255).astype(np.float32)], ids=["8 bits", "16 bits", "float"])
def test_tiff_comes_back_code_by_code(tmp_path, codes):
    tifffile.imwrite(tmp_path / "a.tif", codes, photometric="rgb")
    found = read_picture(tmp_path / "a.tif")
    np.testing.assert_array_equal(found.codes, codes)
    assert found.full_scale == (1.0 if codes.dtype.kind == "f" else np.iinfo(codes.dtype).max)


def test_planes_of_a_tiff_one_after_the_other_are_put_together(tmp_path):
    tifffile.imwrite(tmp_path / "a.tif", np.moveaxis(EIGHT, -1, 0), photometric="rgb", planarconfig="separate")
    np.testing.assert_array_equal(read_picture(tmp_path / "a.tif").codes, EIGHT)


@pytest.mark.parametrize("orientation", range(1, 9))
def test_a_jpeg_stands_as_its_exif_orientation_says(tmp_path, orientation):
    smooth = cv2.resize(EIGHT[:6, :8], (64, 48), interpolation=cv2.INTER_CUBIC)
    image = Image.fromarray(smooth)
    exif = Image.Exif()
    exif[0x0112] = orientation
    image.save(tmp_path / "a.jpg", quality=95, exif=exif)
    expected = np.asarray(ImageOps.exif_transpose(Image.open(tmp_path / "a.jpg")))
    found = read_picture(tmp_path / "a.jpg")
    assert found.codes.shape == expected.shape
    assert np.abs(found.codes.astype(int) - expected).mean() < 2  # two decoders round apart
    assert any("orientation" in note for note in found.notes) == (orientation != 1)


def test_an_opaque_alpha_is_dropped_with_a_word_and_another_refused(tmp_path):
    opaque = np.dstack([EIGHT, np.full(EIGHT.shape[:2], 255, np.uint8)])
    cv2.imwrite(str(tmp_path / "a.png"), cv2.cvtColor(opaque, cv2.COLOR_RGBA2BGRA))
    found = read_picture(tmp_path / "a.png")
    np.testing.assert_array_equal(found.codes, EIGHT)
    assert any("alpha" in note for note in found.notes)
    opaque[3, 4, 3] = 100
    cv2.imwrite(str(tmp_path / "b.png"), opaque)
    refused(tmp_path / "b.png", "partly transparent")


def test_a_palette_is_converted_with_a_word(tmp_path):
    Image.fromarray(EIGHT).quantize(16).save(tmp_path / "a.png")
    assert any("palette" in note for note in read_picture(tmp_path / "a.png").notes)


@pytest.mark.parametrize("mode", ["L", "CMYK", "1", "LA"])
def test_what_has_no_three_colours_is_refused(tmp_path, mode):
    path = tmp_path / ("a.jpg" if mode == "CMYK" else "a.png")
    Image.fromarray(EIGHT).convert(mode).save(path)
    refused(path, "not a colour picture")


@pytest.mark.parametrize("ending", ["png", "jpg", "tif"])
def test_a_file_cut_off_half_way_is_refused(tmp_path, ending):
    whole, cut = tmp_path / f"a.{ending}", tmp_path / f"b.{ending}"
    if ending == "tif":
        tifffile.imwrite(whole, EIGHT, photometric="rgb")
    else:
        cv2.imwrite(str(whole), EIGHT)
    data = whole.read_bytes()
    cut.write_bytes(data[: len(data) // 2])
    refused(cut, "cut off|damaged")


def png_header_alone(width, height):
    def chunk(kind, body):
        return struct.pack(">I", len(body)) + kind + body + struct.pack(">I", zlib.crc32(kind + body))

    start = struct.pack(">IIBBBBB", width, height, 8, 2, 0, 0, 0)
    return b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", start) + chunk(b"IEND", b"")


@pytest.mark.parametrize(
    ("data", "match"),
    [
        (b"", "empty"),
        (b"just some text\n" * 40, "text"),
        (bytes(range(256)), "not a picture"),
        (b"GIF89a" + bytes(100), "GIF"),
        (png_header_alone(30_000, 30_000), "too large"),
        (png_header_alone(12_000, 12_000), "cut off"),
        (png_header_alone(0, 10), "zero-size"),
    ],
    ids=["empty", "text", "bytes", "gif", "900 Mpx header", "144 Mpx header", "zero"],
)
def test_what_is_no_picture_is_told_by_what_it_is(tmp_path, data, match):
    path = tmp_path / "a.png"
    path.write_bytes(data)
    refused(path, match)


def test_missing_files_and_folders_are_named(tmp_path):
    refused(tmp_path / "nowhere.png", "no such file")
    refused(tmp_path, "is a folder")


def test_several_pages_are_refused(tmp_path):
    tifffile.imwrite(tmp_path / "a.tif", np.stack([EIGHT, EIGHT]), photometric="rgb")
    refused(tmp_path / "a.tif", "several pages")


def test_a_wrong_ending_is_read_with_a_word(tmp_path):
    cv2.imwrite(str(tmp_path / "a.png"), EIGHT)
    (tmp_path / "a.png").rename(tmp_path / "a.jpg")
    assert any("PNG" in note for note in read_picture(tmp_path / "a.jpg").notes)


def test_frames_are_averaged_and_must_be_of_one_size(tmp_path):
    for k in range(3):
        cv2.imwrite(str(tmp_path / f"{k}.png"), np.full((20, 30, 3), 10 + 3 * k, np.uint8))
    found = average_frames([tmp_path / f"{k}.png" for k in range(3)])
    assert found.frames == 3
    np.testing.assert_allclose(found.codes, 13.0)
    assert set(found.digests) == {"0.png", "1.png", "2.png"}
    cv2.imwrite(str(tmp_path / "small.png"), np.zeros((10, 30, 3), np.uint8))
    with pytest.raises(PictureError, match="30 x 10"):
        average_frames([tmp_path / "0.png", tmp_path / "small.png"])


def test_planes_and_masks_are_read(tmp_path):
    plane = np.linspace(0, 40, 600, dtype=np.float32).reshape(20, 30)
    tifffile.imwrite(tmp_path / "angle.tif", plane)
    np.testing.assert_array_equal(read_plane(tmp_path / "angle.tif"), plane)
    plane[3, 3] = np.nan
    tifffile.imwrite(tmp_path / "hole.tif", plane)
    with pytest.raises(PictureError, match="not finite"):
        read_plane(tmp_path / "hole.tif")
    assert np.isnan(read_plane(tmp_path / "hole.tif", finite=False)).sum() == 1
    cv2.imwrite(str(tmp_path / "mask.png"), np.where(np.arange(30) > 12, 255, 0)[None].repeat(20, 0).astype(np.uint8))
    assert read_mask(tmp_path / "mask.png").mean() == pytest.approx(17 / 30)
