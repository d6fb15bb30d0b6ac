"""Headerless numbers: everything about them is declared, and the size must agree to the byte."""

from __future__ import annotations

import numpy as np
import pytest

from irsurvey.readers.raw_file import STORED_TYPES


def picture(dtype: str) -> np.ndarray:
    return np.random.default_rng(4).normal(60, 20, (21, 37)).astype(dtype)


@pytest.mark.parametrize("suffix", [".raw", ".bin", ".dat"])
@pytest.mark.parametrize("byte_order", ["little", "big"])
@pytest.mark.parametrize("dtype", STORED_TYPES)
def test_every_type_and_byte_order_comes_back_as_stored(dtype, byte_order, suffix, tmp_path, frame_of):
    sign = {"little": "<", "big": ">"}[byte_order]
    path = tmp_path / f"f{suffix}"
    path.write_bytes(picture(dtype).astype(np.dtype(dtype).newbyteorder(sign)).tobytes())
    frame = frame_of(path, shape=(21, 37), dtype=dtype, byte_order=byte_order)
    assert frame.stored.dtype == np.dtype(dtype)
    assert frame.stored.dtype.isnative
    assert frame.stored.flags.writeable
    np.testing.assert_array_equal(frame.stored, picture(dtype))


def test_single_bytes_need_no_byte_order(tmp_path, frame_of):
    (tmp_path / "f.raw").write_bytes(picture("uint8").tobytes())
    np.testing.assert_array_equal(frame_of(tmp_path / "f.raw", shape=(21, 37), dtype="uint8").stored, picture("uint8"))


def test_the_worked_example_of_two_bytes_reads_either_way(tmp_path, frame_of):
    (tmp_path / "f.raw").write_bytes(b"\x01\x02\x03\x04")
    little = frame_of(tmp_path / "f.raw", shape=(1, 2), dtype="uint16", byte_order="little")
    big = frame_of(tmp_path / "f.raw", shape=(1, 2), dtype="uint16", byte_order="big")
    assert little.stored.tolist() == [[0x0201, 0x0403]]
    assert big.stored.tolist() == [[0x0102, 0x0304]]


@pytest.mark.parametrize("change", [-1, 1, 2, 21 * 37 * 2])
def test_any_other_size_is_refused(change, tmp_path, fault_of):
    (tmp_path / "f.raw").write_bytes((picture("uint16").tobytes() * 2)[: 21 * 37 * 2 + change])
    fault = fault_of(tmp_path / "f.raw", shape=(21, 37), dtype="uint16", byte_order="little")
    assert "21 × 37 × 2 = 1554 bytes" in fault.expected
    assert f"{1554 + change} bytes" in fault.got


@pytest.mark.parametrize(
    ("options", "word"),
    [
        ({"dtype": "uint16", "byte_order": "little"}, "shape"),
        ({"shape": (21, 37), "byte_order": "little"}, "dtype"),
        ({"shape": (21, 37), "dtype": "uint16"}, "byte_order"),
        ({"shape": (21, 37), "dtype": "object", "byte_order": "little"}, "dtype"),
        ({"shape": (21, 37), "dtype": "complex64", "byte_order": "little"}, "dtype"),
        ({"shape": (21, 37), "dtype": "uint16", "byte_order": "middle"}, "byte_order"),
    ],
)
def test_what_is_not_declared_is_asked_for(options, word, tmp_path, fault_of):
    (tmp_path / "f.raw").write_bytes(picture("uint16").tobytes())
    assert word in fault_of(tmp_path / "f.raw", **options).remedy


def test_a_shape_without_pixels_is_refused(tmp_path, fault_of):
    (tmp_path / "f.raw").write_bytes(b"12")
    for shape in ((0, 5), (5, 0), (-1, -1)):
        fault_of(tmp_path / "f.raw", shape=shape, dtype="uint16", byte_order="little")
