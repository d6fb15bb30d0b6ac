"""What holds for every kind of file: what is refused, what is missing, and what the error says."""

from __future__ import annotations

import hashlib
import pickle
from unittest.mock import Mock

import numpy as np
import pytest
import tifffile

from irsurvey.errors import FrameError
from irsurvey.model.survey import ReadOptions
from irsurvey.readers import READERS, read

PICTURE = np.random.default_rng(4).normal(200, 20, (8, 9))


def write(path, stored: np.ndarray) -> dict[str, object]:
    """Write `stored` in the format of the suffix; return the options needed to read it again."""
    match path.suffix:
        case ".tif" | ".tiff":
            tifffile.imwrite(path, stored)
        case ".npy":
            np.save(path, stored)
        case ".npz":
            np.savez(path, stored)
        case ".png":
            import imagecodecs

            path.write_bytes(imagecodecs.png_encode(stored.astype(np.uint16)))
        case ".csv" | ".tsv" | ".txt":
            np.savetxt(path, stored, delimiter={".csv": ",", ".tsv": "\t", ".txt": " "}[path.suffix])
        case ".raw" | ".bin" | ".dat":
            path.write_bytes(stored.astype(stored.dtype.newbyteorder("<")).tobytes())
            return {"shape": stored.shape, "dtype": stored.dtype.name, "byte_order": "little"}
    return {}


@pytest.mark.parametrize("suffix", READERS)
def test_every_reader_gives_the_numbers_and_the_hash_of_the_file(suffix, tmp_path, frame_of):
    path = tmp_path / f"f{suffix}"
    stored = PICTURE.astype(np.uint16)
    frame = frame_of(path, **write(path, stored))
    np.testing.assert_array_equal(frame.stored, stored)
    assert frame.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()


@pytest.mark.parametrize("suffix", READERS)
def test_missing_and_empty_files_are_refused(suffix, tmp_path, fault_of):
    options = {"shape": (8, 9), "dtype": "uint16", "byte_order": "little"}
    assert "nothing of that name" in fault_of(tmp_path / f"f{suffix}", **options).got
    (tmp_path / f"f{suffix}").touch()
    assert "an empty file" in fault_of(tmp_path / f"f{suffix}", **options).got
    (tmp_path / f"folder{suffix}").mkdir()
    assert "a folder" in fault_of(tmp_path / f"folder{suffix}", **options).got


@pytest.mark.parametrize("suffix", READERS)
@pytest.mark.parametrize("value", [0, 7, 65535])
def test_all_one_value_is_refused(value, suffix, tmp_path, fault_of):
    path = tmp_path / f"f{suffix}"
    options = write(path, np.full((8, 9), value, np.uint16))
    assert f"{value}" in fault_of(path, **options).got


@pytest.mark.parametrize("suffix", [".tif", ".npy", ".npz", ".csv", ".raw"])
@pytest.mark.parametrize("value", [np.nan, np.inf, -np.inf])
def test_all_nan_or_infinite_is_refused(value, suffix, tmp_path, fault_of):
    path = tmp_path / f"f{suffix}"
    options = write(path, np.full((8, 9), value, np.float32))
    assert "no pixel with a number" in fault_of(path, **options).got


@pytest.mark.parametrize("suffix", [".tif", ".npy", ".csv"])
def test_one_value_between_pixels_without_data_is_refused(suffix, tmp_path, fault_of):
    path = tmp_path / f"f{suffix}"
    write(path, np.where(PICTURE > 200, 21.5, np.nan))
    assert "21.5 in every pixel" in fault_of(path).got


@pytest.mark.parametrize("suffix", READERS)
def test_the_pixel_limit_holds_to_the_pixel(suffix, tmp_path, fault_of):
    path = tmp_path / f"f{suffix}"
    options = write(path, PICTURE.astype(np.uint16))
    assert read(path, ReadOptions(**options), pixel_limit=72).stored.size == 72
    fault = fault_of(path, pixel_limit=71, **options)
    assert "at most 71 pixels" in fault.expected
    assert "8 × 9 = 72" in fault.got


@pytest.mark.parametrize("dtype", ["float16", "float32", "float64"])
def test_fill_values_become_nan_in_floats(dtype, tmp_path, frame_of):
    stored = PICTURE.astype(dtype)
    stored[2, 3], stored[4, 5] = -13.49, -9999.0  # -13.49 is no binary number: it must match as rounded in the file
    np.save(tmp_path / "f.npy", stored)
    frame = frame_of(tmp_path / "f.npy", fill_values=(-13.49, -9999.0))
    assert frame.missing is None
    assert np.argwhere(np.isnan(frame.stored)).tolist() == [[2, 3], [4, 5]]
    stored[2, 3] = stored[4, 5] = np.nan
    np.testing.assert_array_equal(frame.stored, stored)


@pytest.mark.parametrize("dtype", ["uint8", "uint16", "int16", "int32", "int64"])
def test_fill_values_are_marked_and_left_in_integers(dtype, tmp_path, frame_of):
    stored = np.arange(72).reshape(8, 9).astype(dtype)
    np.save(tmp_path / "f.npy", stored)
    frame = frame_of(tmp_path / "f.npy", fill_values=(0.0, 40.0, 12.5, -9999.0, 1e300))
    assert np.argwhere(frame.missing).tolist() == [[0, 0], [4, 4]]
    np.testing.assert_array_equal(frame.stored, stored)
    assert frame_of(tmp_path / "f.npy", fill_values=(99.0,)).missing is None


def test_a_fill_value_beyond_the_type_matches_nothing(tmp_path, frame_of, recwarn):
    np.save(tmp_path / "f.npy", PICTURE.astype("float16"))
    frame = frame_of(tmp_path / "f.npy", fill_values=(1e30, -1e300))
    np.testing.assert_array_equal(frame.stored, PICTURE.astype("float16"))
    assert not recwarn


def test_nothing_but_fill_values_is_refused(tmp_path, fault_of):
    np.save(tmp_path / "f.npy", np.tile(np.array([0, 65535], np.uint16), (8, 4)))
    assert "no pixel" in fault_of(tmp_path / "f.npy", fill_values=(0.0, 65535.0)).got
    assert "65535 in every pixel" in fault_of(tmp_path / "f.npy", fill_values=(0.0,)).got


def test_values_are_untouched_also_where_they_are_infinite_or_not_numbers(tmp_path, frame_of):
    stored = PICTURE.copy()
    stored[0, :3] = np.inf, -np.inf, np.nan
    np.save(tmp_path / "f.npy", stored)
    np.testing.assert_array_equal(frame_of(tmp_path / "f.npy").stored, stored)


@pytest.mark.parametrize("name", ["f.jpg", "f.jpeg", "f.bmp", "f", "f.tif.gz"])
def test_other_types_of_file_are_refused_with_a_list_of_those_that_are_read(name, tmp_path, fault_of):
    (tmp_path / name).write_bytes(b"anything")
    fault = fault_of(tmp_path / name)
    assert all(suffix in fault.expected for suffix in READERS)


def test_a_file_too_large_to_hold_is_refused_unread(tmp_path, fault_of):
    with (tmp_path / "f.tif").open("wb") as stream:
        stream.truncate(2**32 + 1)  # a hole: takes no place on the disk
    assert "4294967297 bytes" in fault_of(tmp_path / "f.tif").got


def test_the_error_survives_pickling(tmp_path):
    with pytest.raises(FrameError) as caught:
        read(tmp_path / "f.tif", ReadOptions())
    assert str(pickle.loads(pickle.dumps(caught.value))) == str(caught.value)


def test_running_out_of_memory_and_the_stop_key_are_not_taken_for_damage(tmp_path, monkeypatch):
    (tmp_path / "f.csv").write_text("1,2\n3,4\n")
    for stop in (MemoryError, KeyboardInterrupt):
        monkeypatch.setitem(READERS, ".csv", Mock(side_effect=stop))
        with pytest.raises(stop):
            read(tmp_path / "f.csv", ReadOptions())
