"""TIFF pages as independent writers make them: tifffile, Pillow, OpenCV, and bytes laid out here after TIFF 6.0."""

from __future__ import annotations

import struct

import cv2
import numpy as np
import pytest
import tifffile
from PIL import Image

DTYPES = ("uint8", "uint16", "uint32", "int8", "int16", "int32", "float16", "float32", "float64")
PACKINGS = {  # tifffile's compression and predictor
    "uncompressed": {},
    "LZW": {"compression": "lzw"},
    "deflate": {"compression": "zlib"},
    "old deflate": {"compression": "deflate"},
    "packbits": {"compression": "packbits"},
    "zstd": {"compression": "zstd"},
    "lzma": {"compression": "lzma"},
    "LZW, predictor": {"compression": "lzw", "predictor": True},
    "deflate, predictor": {"compression": "zlib", "predictor": True},
    "deflate, tiles": {"compression": "zlib", "tile": (16, 32)},
    "many strips": {"rowsperstrip": 3},
    "LZW, many strips": {"compression": "lzw", "predictor": True, "rowsperstrip": 7},
}


def picture(dtype: str = "uint16", shape: tuple[int, int] = (21, 37)) -> np.ndarray:
    """Numbers over the whole range of the type, fractions and negative ones where it has them."""
    random = np.random.default_rng(4)
    if np.dtype(dtype).kind == "f":
        return random.normal(0, 40, shape).astype(dtype)
    limits = np.iinfo(dtype)
    return random.integers(limits.min, limits.max, shape, dtype, endpoint=True)


@pytest.mark.parametrize("byte_order", ["<", ">"])
@pytest.mark.parametrize("packing", PACKINGS)
@pytest.mark.parametrize("dtype", DTYPES)
def test_every_type_packing_and_byte_order_comes_back_as_stored(dtype, packing, byte_order, tmp_path, frame_of):
    stored = picture(dtype)
    tifffile.imwrite(tmp_path / "f.tif", stored, byteorder=byte_order, metadata=None, **PACKINGS[packing])
    frame = frame_of(tmp_path / "f.tif")
    assert frame.stored.dtype == np.dtype(dtype)
    assert frame.stored.dtype.isnative
    assert frame.stored.flags.c_contiguous
    assert frame.stored.flags.writeable
    np.testing.assert_array_equal(frame.stored, stored)


@pytest.mark.parametrize("photometric", ["miniswhite", "minisblack"])
def test_numbers_are_never_inverted(photometric, tmp_path, frame_of):
    tifffile.imwrite(tmp_path / "f.tif", picture(), photometric=photometric)
    np.testing.assert_array_equal(frame_of(tmp_path / "f.tif").stored, picture())


@pytest.mark.parametrize("order", ["<", ">"])
def test_a_file_without_photometric_interpretation_reads_as_stored(order, tmp_path, frame_of):
    stored = picture()
    (tmp_path / "f.tif").write_bytes(bare_tiff(*stored.shape[::-1], stored.astype(f"{order}u2").tobytes(), order=order))
    np.testing.assert_array_equal(frame_of(tmp_path / "f.tif").stored, stored)


def bare_tiff(width: int, length: int, strip: bytes, *, order: str = "<", **tags: int) -> bytes:
    """One strip of 16-bit numbers with the least tags, none of them photometric (TIFF 6.0, section 2)."""
    offset = 8 + 2 + 12 * 7 + 4
    entries = {256: width, 257: length, 258: 16, 259: tags.get("compression", 1)}
    entries |= {273: offset, 278: length, 279: tags.get("count", len(strip))}
    directory = b"".join(struct.pack(f"{order}HHII", tag, 4, 1, value) for tag, value in entries.items())
    header = {"<": b"II", ">": b"MM"}[order] + struct.pack(f"{order}HI", 42, 8)
    return header + struct.pack(f"{order}H", 7) + directory + struct.pack(f"{order}I", 0) + strip


def test_pillow_opencv_and_big_files_read_as_stored(tmp_path, frame_of):
    Image.fromarray(picture()).save(tmp_path / "pillow.tif", compression="tiff_lzw")
    cv2.imwrite(str(tmp_path / "opencv.tif"), picture())
    cv2.imwrite(str(tmp_path / "opencv_float.tif"), picture("float32"))
    tifffile.imwrite(tmp_path / "big.tif", picture(), bigtiff=True)
    np.testing.assert_array_equal(frame_of(tmp_path / "pillow.tif").stored, picture())
    np.testing.assert_array_equal(frame_of(tmp_path / "opencv.tif").stored, picture())
    np.testing.assert_array_equal(frame_of(tmp_path / "opencv_float.tif").stored, picture("float32"))
    np.testing.assert_array_equal(frame_of(tmp_path / "big.tif").stored, picture())


def test_capital_suffixes_are_the_same_file_types(tmp_path, frame_of):
    tifffile.imwrite(tmp_path / "F.TIFF", picture())
    np.testing.assert_array_equal(frame_of(tmp_path / "F.TIFF").stored, picture())


@pytest.fixture
def sequence(tmp_path):
    """Three frames, one after the other."""
    path = tmp_path / "sequence.tif"
    tifffile.imwrite(path, np.stack([picture() // 2 + k for k in range(3)]), photometric="minisblack")
    return path


@pytest.mark.parametrize("page", [0, 1, 2])
def test_a_page_is_read_by_its_number_from_zero(page, sequence, frame_of):
    np.testing.assert_array_equal(frame_of(sequence, page=page).stored, picture() // 2 + page)


def test_several_pages_and_no_number_is_an_error_that_lists_them(sequence, fault_of):
    fault = fault_of(sequence)
    assert "0, 1, 2" in fault.got
    assert "page = 0" in fault.remedy


def test_a_long_list_of_pages_is_cut_short(tmp_path, fault_of):
    tifffile.imwrite(tmp_path / "f.tif", np.stack([picture()] * 30), photometric="minisblack")
    assert fault_of(tmp_path / "f.tif").got.endswith("18, 19 … 29")


@pytest.mark.parametrize("page", [-1, 3])
def test_a_page_that_is_not_there_is_an_error_that_says_which_are(page, sequence, fault_of):
    fault = fault_of(sequence, page=page)
    assert "from 0 to 2" in fault.expected
    assert str(page) in fault.got


def test_a_colour_picture_and_a_thumbnail_beside_the_frame_need_no_page(tmp_path, frame_of, fault_of):
    with tifffile.TiffWriter(tmp_path / "f.tif") as file:
        file.write(np.zeros((21, 37, 3), np.uint8), photometric="rgb")
        file.write(picture(shape=(5, 9)), subfiletype=1)
        file.write(picture())
    np.testing.assert_array_equal(frame_of(tmp_path / "f.tif").stored, picture())
    assert "21 × 37 × 3" in fault_of(tmp_path / "f.tif", page=0).got


def test_colours_are_refused(tmp_path, fault_of):
    tifffile.imwrite(tmp_path / "rgb.tif", np.arange(300, dtype=np.uint16).reshape(10, 10, 3), photometric="rgb")
    tifffile.imwrite(tmp_path / "planes.tif", np.arange(300).reshape(3, 10, 10).astype("u1"), photometric="rgb")
    Image.fromarray(picture("uint8")).convert("P").save(tmp_path / "palette.tif")
    assert "10 × 10 × 3" in fault_of(tmp_path / "rgb.tif").got
    assert "3 × 10 × 10" in fault_of(tmp_path / "planes.tif").got
    assert "PALETTE" in fault_of(tmp_path / "palette.tif").got


def test_lossy_pictures_are_refused(tmp_path, fault_of):
    tifffile.imwrite(tmp_path / "f.tif", picture("uint8"), compression="jpeg")
    assert "JPEG" in fault_of(tmp_path / "f.tif").got


def test_masks_and_complex_numbers_are_refused(tmp_path, fault_of):
    tifffile.imwrite(tmp_path / "mask.tif", picture() > 9999)
    tifffile.imwrite(tmp_path / "complex.tif", picture("float32") + 1j)
    assert "bool" in fault_of(tmp_path / "mask.tif").got
    assert "complex" in fault_of(tmp_path / "complex.tif").got


@pytest.mark.parametrize("packing", PACKINGS)
def test_a_file_cut_anywhere_is_refused(packing, tmp_path, fault_of):
    tifffile.imwrite(tmp_path / "whole.tif", picture(), metadata=None, **PACKINGS[packing])
    data = (tmp_path / "whole.tif").read_bytes()
    for share in (0.01, 0.3, 0.6, 0.9):
        (tmp_path / "cut.tif").write_bytes(data[: int(share * len(data))])
        fault_of(tmp_path / "cut.tif")


def test_a_missing_strip_is_not_taken_for_zeros(tmp_path, fault_of):
    stored = picture()
    (tmp_path / "f.tif").write_bytes(bare_tiff(37, 21, stored.tobytes(), count=0))
    assert "missing" in fault_of(tmp_path / "f.tif").got


def test_a_strip_shorter_than_its_rows_is_refused(tmp_path, fault_of):
    strip = picture().tobytes()
    (tmp_path / "f.tif").write_bytes(bare_tiff(37, 21, strip[:-74]))
    fault_of(tmp_path / "f.tif")


def test_something_else_under_the_name_is_refused(tmp_path, fault_of):
    (tmp_path / "f.tif").write_bytes(b"\xff\xd8\xff\xe0 a photograph")
    assert "TIFF" in fault_of(tmp_path / "f.tif").got
