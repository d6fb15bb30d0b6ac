"""PNG as OpenCV, Pillow and imagecodecs write it, and as bytes laid out here after the PNG specification."""

from __future__ import annotations

import struct
import zlib

import cv2
import imagecodecs
import numpy as np
import pytest
from PIL import Image


def picture(dtype: str = "u2") -> np.ndarray:
    limits = np.iinfo(dtype)
    return np.random.default_rng(4).integers(limits.min, limits.max, (21, 37), dtype, endpoint=True)


def png(stored: np.ndarray, *between: bytes, bits: int = 16, colour_type: int = 0) -> bytes:
    """Unfiltered rows of big-endian numbers with further chunks before them."""
    rows = b"".join(b"\0" + row.astype(">u2").tobytes() for row in stored)
    header = struct.pack(">IIBBBBB", stored.shape[1], stored.shape[0], bits, colour_type, 0, 0, 0)
    return b"\x89PNG\r\n\x1a\n" + b"".join(
        [chunk(b"IHDR", header), *between, chunk(b"IDAT", zlib.compress(rows)), chunk(b"IEND", b"")]
    )


def chunk(kind: bytes, content: bytes) -> bytes:
    return struct.pack(">I", len(content)) + kind + content + struct.pack(">I", zlib.crc32(kind + content))


def test_every_writer_comes_back_as_stored(tmp_path, frame_of):
    cv2.imwrite(str(tmp_path / "opencv.png"), picture())
    Image.fromarray(picture()).save(tmp_path / "pillow.png")
    (tmp_path / "imagecodecs.png").write_bytes(imagecodecs.png_encode(picture()))
    (tmp_path / "by_hand.png").write_bytes(png(picture()))
    for path in tmp_path.iterdir():
        frame = frame_of(path)
        assert frame.stored.dtype == np.uint16
        assert frame.stored.dtype.isnative
        np.testing.assert_array_equal(frame.stored, picture())


def test_gamma_and_significant_bits_change_no_number(tmp_path, frame_of):
    extra = chunk(b"gAMA", struct.pack(">I", 45455)), chunk(b"sBIT", b"\x0e"), chunk(b"bKGD", b"\0\x07")
    (tmp_path / "f.png").write_bytes(png(picture(), *extra))
    np.testing.assert_array_equal(frame_of(tmp_path / "f.png").stored, picture())


@pytest.mark.parametrize(
    ("shape", "dtype", "words"),
    [
        ((9, 9), "u1", "8-bit greyscale"),
        ((9, 9, 3), "u1", "8-bit colour"),
        ((9, 9, 4), "u1", "8-bit colour and alpha"),
        ((9, 9, 3), "u2", "16-bit colour"),
        ((9, 9, 2), "u2", "16-bit greyscale and alpha"),
    ],
)
def test_pictures_for_the_eye_are_refused(shape, dtype, words, tmp_path, fault_of):
    stored = np.random.default_rng(4).integers(0, 255, shape, dtype)
    (tmp_path / "f.png").write_bytes(imagecodecs.png_encode(stored))
    assert words in fault_of(tmp_path / "f.png").got


def test_palettes_and_single_bits_are_refused(tmp_path, fault_of):
    Image.fromarray(picture("u1")).convert("P").save(tmp_path / "palette.png")
    Image.fromarray(picture("u1") > 99).save(tmp_path / "bits.png")
    assert "palette" in fault_of(tmp_path / "palette.png").got
    assert "1-bit" in fault_of(tmp_path / "bits.png").got


def test_a_transparent_value_is_refused_rather_than_read_as_two_channels(tmp_path, fault_of):
    (tmp_path / "f.png").write_bytes(png(picture(), chunk(b"tRNS", b"\0\x07")))
    fault_of(tmp_path / "f.png")


def test_a_file_cut_anywhere_is_refused(tmp_path, fault_of):
    data = png(picture())
    for length in (5, 20, 40, len(data) // 2, len(data) - 13, len(data) - 1):
        (tmp_path / "f.png").write_bytes(data[:length])
        fault_of(tmp_path / "f.png")


def test_something_else_under_the_name_is_refused(tmp_path, fault_of):
    (tmp_path / "f.png").write_bytes(b"\xff\xd8\xff\xe0 a photograph")
    fault_of(tmp_path / "f.png")
