"""Damaged and hostile files: they read or raise FrameError, and claim no memory that their bytes do not back."""

from __future__ import annotations

import io
import lzma
import struct
import tracemalloc
import zipfile
import zlib
from collections.abc import Callable

import imagecodecs
import numpy as np
import pytest
import tifffile
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from irsurvey.errors import FrameError
from irsurvey.model.frame import Frame
from irsurvey.model.survey import ReadOptions
from irsurvey.readers import read

PICTURE = np.random.default_rng(4).normal(4000, 90, (12, 16)).astype(np.uint16)


def written(write: Callable[..., None], *arguments: object, **options: object) -> bytes:
    stream = io.BytesIO()
    write(stream, *arguments, **options)
    return stream.getvalue()


SOUND = {
    "plain.tif": written(tifffile.imwrite, PICTURE),
    "big_endian.tif": written(tifffile.imwrite, PICTURE, byteorder=">", bigtiff=True),
    "lzw.tif": written(tifffile.imwrite, PICTURE, compression="lzw", predictor=True, rowsperstrip=5),
    "deflate.tif": written(tifffile.imwrite, PICTURE.astype("f4"), compression="zlib", predictor=True, tile=(16, 16)),
    "zstd.tif": written(tifffile.imwrite, PICTURE, compression="zstd"),
    "lzma.tif": written(tifffile.imwrite, PICTURE, compression="lzma"),
    "packbits.tif": written(tifffile.imwrite, PICTURE, compression="packbits"),
    "pages.tif": written(tifffile.imwrite, np.stack([PICTURE] * 3), photometric="minisblack"),
    "f.npy": written(np.save, PICTURE),
    "f.npz": written(np.savez_compressed, PICTURE, mask=PICTURE > 4000),
    "f.png": imagecodecs.png_encode(PICTURE),
    "f.csv": written(np.savetxt, PICTURE / 40, delimiter=",", fmt="%.3f"),
    "f.txt": written(np.savetxt, PICTURE / 40, delimiter=";", fmt="%.3f"),
    "f.raw": PICTURE.astype("<u2").tobytes(),
}
OPTIONS = {
    "pages.tif": ReadOptions(page=1),
    "f.raw": ReadOptions(shape=(12, 16), dtype="uint16", byte_order="little"),
}


@pytest.mark.parametrize("name", SOUND)
def test_the_sound_files_read(name, tmp_path):
    (tmp_path / name).write_bytes(SOUND[name])
    assert read(tmp_path / name, OPTIONS.get(name, ReadOptions())).stored.shape == PICTURE.shape


def reads_or_is_refused(path, data: bytes, options: ReadOptions) -> None:
    """Anything but a Frame of the promised kind or a FrameError fails the test."""
    path.write_bytes(data)
    try:
        frame = read(path, options, pixel_limit=1_000_000)
    except FrameError as error:
        message = str(error)
    else:
        message = "read"
        assert isinstance(frame, Frame)
        assert frame.stored.ndim == 2
        assert frame.stored.size <= 1_000_000
    assert len(message.splitlines()) == 1


FUZZ = settings(
    max_examples=100, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.function_scoped_fixture]
)


@pytest.mark.parametrize("name", SOUND)
@FUZZ
@given(draw=st.data())
def test_cut_files_read_or_are_refused(name, tmp_path, draw):
    length = draw.draw(st.integers(0, len(SOUND[name]) - 1))
    reads_or_is_refused(tmp_path / name, SOUND[name][:length], OPTIONS.get(name, ReadOptions()))


@pytest.mark.parametrize("name", SOUND)
@FUZZ
@given(draw=st.data())
def test_files_with_changed_bits_read_or_are_refused(name, tmp_path, draw):
    """Half of the changes fall in the first 200 bytes, where headers are."""
    data = bytearray(SOUND[name])
    position = st.one_of(st.integers(0, min(200, len(data)) - 1), st.integers(0, len(data) - 1))
    for place, bit in draw.draw(st.lists(st.tuples(position, st.integers(0, 7)), min_size=1, max_size=8)):
        data[place] ^= 1 << bit
    reads_or_is_refused(tmp_path / name, bytes(data), OPTIONS.get(name, ReadOptions()))


@pytest.mark.parametrize("suffix", [".tif", ".npy", ".npz", ".png", ".csv"])
@FUZZ
@given(data=st.binary(min_size=1, max_size=300))
def test_any_bytes_under_any_name_read_or_are_refused(suffix, tmp_path, data):
    reads_or_is_refused(tmp_path / f"f{suffix}", data, ReadOptions())


@FUZZ
@given(text=st.text('0123456789.,;\t \n-+eE"#naif\ufeff', min_size=1, max_size=80))
def test_any_text_that_looks_like_a_matrix_reads_or_is_refused(tmp_path, text):
    reads_or_is_refused(tmp_path / "f.csv", text.encode(), ReadOptions())


def tiff(width: int, length: int, strip: bytes, tags: dict[int, int]) -> bytes:
    """A little-endian TIFF of one strip or tile with these tags beside the sizes (TIFF 6.0, section 2)."""
    entries = {256: width, 257: length, 258: 16, 262: 1, **tags}
    at = 8 + 2 + 12 * len(entries) + 4
    entries = {tag: at if value == -1 else value for tag, value in sorted(entries.items())}
    directory = b"".join(struct.pack("<HHII", tag, 4, 1, value) for tag, value in entries.items())
    return b"II*\0\x08\0\0\0" + struct.pack("<H", len(entries)) + directory + bytes(4) + strip


def npy_header(shape: tuple[int, ...]) -> bytes:
    stream = io.BytesIO()
    np.lib.format.write_array_header_1_0(stream, {"descr": "<u2", "fortran_order": False, "shape": shape})
    return stream.getvalue()


def zipped(content: bytes, compression: int = zipfile.ZIP_DEFLATED) -> bytes:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", compression) as archive:
        archive.writestr("frame.npy", content)
    return stream.getvalue()


def png(width: int, length: int, rows: bytes) -> bytes:
    def chunk(kind: bytes, content: bytes) -> bytes:
        return struct.pack(">I", len(content)) + kind + content + struct.pack(">I", zlib.crc32(kind + content))

    header = struct.pack(">IIBBBBB", width, length, 16, 0, 0, 0, 0)
    return b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", header) + chunk(b"IDAT", zlib.compress(rows)) + chunk(b"IEND", b"")


ZEROS = bytes(50_000_000)
"""What a bomb unpacks to."""

BOMBS = {
    "huge.tif": lambda: tiff(10**6, 10**6, b"\0\0", {259: 1, 273: -1, 278: 10**6, 279: 2}),
    "huge_deflate.tif": lambda: tiff(10**6, 10**6, zlib.compress(ZEROS), {259: 8, 273: -1, 278: 10**6, 279: 48_000}),
    "huge_tile.tif": lambda: tiff(9, 9, zlib.compress(ZEROS), {259: 8, 322: 10**5, 323: 10**5, 324: -1, 325: 48_000}),
    "small_page.tif": lambda: tiff(9, 9, zlib.compress(ZEROS), {259: 8, 273: -1, 278: 9, 279: 48_000}),
    "small_page_lzma.tif": lambda: tiff(9, 9, lzma.compress(ZEROS), {259: 34925, 273: -1, 278: 9, 279: 7_000}),
    "small_page_jpeg.tif": lambda: tiff(9, 9, png(9999, 9999, b""), {259: 7, 273: -1, 278: 9, 279: 60}),
    "huge.npy": lambda: npy_header((10**6, 10**6)) + b"\0\0",
    "limit.npy": lambda: npy_header((10**4, 10**4)) + b"\0\0",
    "huge.npz": lambda: zipped(npy_header((10**6, 10**6)) + ZEROS),
    "more_than_it_says.npz": lambda: zipped(npy_header((9, 9)) + ZEROS),
    "more_than_it_says_lzma.npz": lambda: zipped(npy_header((9, 9)) + ZEROS, zipfile.ZIP_LZMA),
    "more_than_it_says_bzip2.npz": lambda: zipped(npy_header((9, 9)) + ZEROS, zipfile.ZIP_BZIP2),
    "endless_header.npz": lambda: zipped(b"\x93NUMPY\2\0" + struct.pack("<I", 2**31) + ZEROS),
    "huge.png": lambda: png(10**6, 10**6, b"\0"),
    "more_than_it_says.png": lambda: png(9, 9, ZEROS),
}


@pytest.mark.parametrize("name", BOMBS)
def test_a_bomb_is_refused_before_it_unpacks(name, tmp_path):
    """Memory traced by tracemalloc, which counts Python's and numpy's; 5 MB: a tenth of what the bomb holds."""
    path = tmp_path / name
    path.write_bytes(BOMBS[name]())
    tracemalloc.start()
    try:
        with pytest.raises(FrameError):
            read(path, ReadOptions())
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()
    assert peak < 5e6


def test_a_text_over_the_limit_is_refused_before_its_numbers_are_read(tmp_path):
    path = tmp_path / "f.csv"
    path.write_text("\n".join(["1,2,3,x"] * 1000))  # the x would be named, were it read
    with pytest.raises(FrameError, match="at most 3999 pixels"):
        read(path, ReadOptions(), pixel_limit=3999)
