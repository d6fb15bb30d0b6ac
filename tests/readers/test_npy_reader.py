"""NPY and NPZ as numpy writes them, and what must never be opened."""

from __future__ import annotations

import io
import os
import pickle
import zipfile

import numpy as np
import pytest

DTYPES = ("u1", "u2", "u4", "u8", "i1", "i2", "i4", "i8", "f2", "f4", "f8")


def picture(dtype: str = "u2") -> np.ndarray:
    return np.random.default_rng(4).normal(60, 20, (21, 37)).astype(dtype)


@pytest.mark.parametrize("order", ["C", "F"])
@pytest.mark.parametrize("byte_order", ["<", ">"])
@pytest.mark.parametrize("dtype", DTYPES)
def test_every_type_and_order_comes_back_as_stored(dtype, byte_order, order, tmp_path, frame_of):
    stored = picture(dtype)
    np.save(tmp_path / "f.npy", np.asarray(stored, f"{byte_order}{dtype}", order=order))
    np.savez_compressed(tmp_path / "f.npz", np.asarray(stored, f"{byte_order}{dtype}", order=order))
    for name in ("f.npy", "f.npz"):
        frame = frame_of(tmp_path / name)
        assert frame.stored.dtype == np.dtype(dtype)
        assert frame.stored.dtype.isnative
        assert frame.stored.flags.c_contiguous
        assert frame.stored.flags.writeable
        np.testing.assert_array_equal(frame.stored, stored)


@pytest.mark.parametrize("version", [(1, 0), (2, 0), (3, 0)])
def test_every_version_of_the_format_reads(version, tmp_path, frame_of):
    with (tmp_path / "f.npy").open("wb") as stream:
        np.lib.format.write_array(stream, picture(), version=version)
    np.testing.assert_array_equal(frame_of(tmp_path / "f.npy").stored, picture())


def test_masks_texts_scalars_dates_records_and_stacks_beside_the_frame_need_no_name(tmp_path, frame_of):
    others = {
        "mask": picture() > 60,
        "unit": np.array("°C"),
        "scale": np.array(0.04),
        "stack": np.zeros((2, 3, 4)),
        "taken": np.array([["2026-01-18T07:12"]], "M8[s]"),
        "places": np.zeros((2, 2), [("x", "f4"), ("y", "f4")]),
    }
    np.savez(tmp_path / "f.npz", temperature=picture(), **others)
    np.testing.assert_array_equal(frame_of(tmp_path / "f.npz").stored, picture())


def test_several_arrays_need_a_name_and_the_error_lists_them(tmp_path, frame_of, fault_of):
    np.savez(tmp_path / "f.npz", near=picture(), far=picture("f4"), mask=picture() > 60)
    fault = fault_of(tmp_path / "f.npz")
    assert "near (uint16 21 × 37)" in fault.got
    assert "far (float32 21 × 37)" in fault.got
    assert 'array = "near"' in fault.remedy
    np.testing.assert_array_equal(frame_of(tmp_path / "f.npz", array="far").stored, picture("f4"))
    assert "'off'" in fault_of(tmp_path / "f.npz", array="off").expected


def test_what_is_no_frame_of_numbers_is_refused(tmp_path, fault_of):
    cases = {
        "bool": picture() > 60,
        "complex": picture() + 1j,
        "datetime": picture().astype("M8[s]"),
        "record": np.zeros((3, 3), [("a", "f4"), ("b", "f4")]),
        "text": np.array([["a", "b"]]),
        "flat": picture().ravel(),
        "stack": np.stack([picture()] * 3),
        "scalar": np.array(3.0),
        "no rows": np.zeros((0, 5)),
        "no columns": np.zeros((5, 0)),
    }
    for name, stored in cases.items():
        np.save(tmp_path / f"{name}.npy", stored)
        fault_of(tmp_path / f"{name}.npy")
        np.savez(tmp_path / f"{name}.npz", frame=stored)
        fault_of(tmp_path / f"{name}.npz")
        fault_of(tmp_path / f"{name}.npz", array="frame")
    np.savez(tmp_path / "nothing.npz")
    fault_of(tmp_path / "nothing.npz")


class Tripwire:
    """Leaves a folder behind when unpickled."""

    def __init__(self, folder: str) -> None:
        self.folder = folder

    def __reduce__(self):
        return os.mkdir, (self.folder,)


def test_the_tripwire_works(tmp_path):
    pickle.loads(pickle.dumps(Tripwire(str(tmp_path / "sprung"))))
    assert (tmp_path / "sprung").exists()


def test_nothing_is_ever_unpickled(tmp_path, fault_of):
    sprung = tmp_path / "sprung"
    trap = np.empty((2, 2), object)
    trap[:] = Tripwire(str(sprung))
    np.save(tmp_path / "a.npy", trap, allow_pickle=True)
    np.savez(tmp_path / "b.npz", trap=trap)
    for name in ("c.npy", "d.npz"):
        (tmp_path / name).write_bytes(pickle.dumps(Tripwire(str(sprung))))
    with zipfile.ZipFile(tmp_path / "e.npz", "w") as archive:
        archive.writestr("trap.npy", pickle.dumps(Tripwire(str(sprung))))
    # an object header over bytes that are a pickle, its shape that of a frame
    header = io.BytesIO()
    np.lib.format.write_array_header_1_0(header, {"descr": "|O", "fortran_order": False, "shape": (1, 2)})
    (tmp_path / "f.npy").write_bytes(header.getvalue() + pickle.dumps(Tripwire(str(sprung))))
    for path, options in [
        *((tmp_path / name, {}) for name in ("a.npy", "c.npy", "d.npz", "e.npz", "f.npy")),
        (tmp_path / "b.npz", {"array": "trap"}),
    ]:
        fault = fault_of(path, **options)
        assert "pickled" in fault.got
        assert not sprung.exists()
    assert "object" in fault_of(tmp_path / "b.npz").got
    assert not sprung.exists()


def test_a_pickled_array_beside_the_frame_is_left_alone(tmp_path, frame_of):
    trap = np.empty((2, 2), object)
    trap[:] = Tripwire(str(tmp_path / "sprung"))
    np.savez(tmp_path / "f.npz", trap=trap, temperature=picture())
    np.testing.assert_array_equal(frame_of(tmp_path / "f.npz").stored, picture())
    assert not (tmp_path / "sprung").exists()


@pytest.mark.parametrize("name", ["f.npy", "f.npz"])
def test_a_file_cut_anywhere_is_refused(name, tmp_path, fault_of):
    np.save(tmp_path / "f.npy", picture())
    np.savez_compressed(tmp_path / "f.npz", picture())
    data = (tmp_path / name).read_bytes()
    for length in (3, 11, 50, len(data) // 2, len(data) - 1):
        (tmp_path / name).write_bytes(data[:length])
        fault_of(tmp_path / name)


def test_bytes_after_the_array_are_refused(tmp_path, fault_of):
    np.save(tmp_path / "f.npy", picture())
    with (tmp_path / "f.npy").open("ab") as stream:
        np.save(stream, picture())
    assert "more bytes" in fault_of(tmp_path / "f.npy").got


def test_something_else_under_the_name_is_refused(tmp_path, fault_of):
    for name in ("f.npy", "f.npz"):
        (tmp_path / name).write_bytes(b"\xff\xd8\xff\xe0 a photograph")
        fault_of(tmp_path / name)
