"""NPY, and arrays by name in NPZ: headers are read first and on their own, and nothing is ever unpickled."""

from __future__ import annotations

import io
import re
import struct
import zipfile
from dataclasses import dataclass
from math import prod

import numpy as np
from numpy.typing import NDArray

from irsurvey.errors import FrameError
from irsurvey.readers.raw_file import STORED_TYPES, RawFile

LONGEST_HEADER = 16_384  # [bytes] numpy refuses texts above 10 000; what a file claims beyond is not even unpacked

DESCR = re.compile(r"""["']descr["']\s*:\s*["']([<>|=]?[a-zA-Z]\d*)["']""")
FORTRAN_ORDER = re.compile(r"""["']fortran_order["']\s*:\s*(True|False)""")
SHAPE = re.compile(r"""["']shape["']\s*:\s*\(([\d,\s]*)\)""")


def array(raw: RawFile) -> NDArray[np.generic]:
    """The array of an NPY file."""
    return _numbers(raw, _header(raw, raw.data[:LONGEST_HEADER]), raw.data)


def member(raw: RawFile) -> NDArray[np.generic]:
    """The array named by `raw.options.array` in an NPZ file; no name is needed where only one could be a frame."""
    if raw.data.startswith(b"\x80"):
        raise _pickled(raw)
    with zipfile.ZipFile(io.BytesIO(raw.data)) as archive:
        headers: dict[str, _Header] = {}
        for info in archive.infolist():
            if info.compress_type not in (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED):  # others unpack without bounds
                raise raw.refusal("arrays as numpy.savez packs them", "another compression", "save it with numpy.savez")
            if info.filename.endswith(".npy"):
                with archive.open(info) as stream:
                    headers[info.filename.removesuffix(".npy")] = _header(raw, stream.read(LONGEST_HEADER))
        name = _chosen(raw, headers)
        header = headers[name]
        _check(raw, header)
        with archive.open(f"{name}.npy") as stream:
            data = stream.read(header.end + 1)  # never more than the checked size, whatever the archive unpacks to
    return _numbers(raw, header, data)


@dataclass(frozen=True, slots=True)
class _Header:
    """What stands before the numbers (NPY format, versions 1 to 3: numpy.lib.format)."""

    dtype: np.dtype[np.generic]
    shape: tuple[int, ...]
    fortran_order: bool
    start: int  # [bytes] where the numbers begin

    @property
    def end(self) -> int:
        return self.start + prod(self.shape) * self.dtype.itemsize

    @property
    def could_be_frame(self) -> bool:
        return len(self.shape) == 2 and self.dtype.name in STORED_TYPES

    def __str__(self) -> str:
        return f"{self.dtype.name} {' × '.join(map(str, self.shape))}"


def _header(raw: RawFile, head: bytes) -> _Header:
    """The header at the beginning of `head`, read without evaluating it."""
    if head.startswith(b"\x80"):  # the first byte of every binary pickle
        raise _pickled(raw)
    if not head.startswith(b"\x93NUMPY") or len(head) < 12:
        raise raw.refusal("an NPY array", "something else under that name", "write it again with numpy.save")
    begin, length = (10, "<H") if head[6] == 1 else (12, "<I")
    start = begin + struct.unpack_from(length, head, 8)[0]
    text = head[begin:start].decode("latin-1")
    descr, order, shape = DESCR.search(text), FORTRAN_ORDER.search(text), SHAPE.search(text)
    if not (order and shape) or start > len(head):
        raise raw.refusal("an NPY header", repr(text.strip(" \0\n")[:60]), "write it again with numpy.save")
    sides = tuple(int(side) for side in shape[1].split(",") if side.strip())
    dtype = np.dtype(descr[1] if descr else "void")  # records and dates, which are no frames but may stand beside one
    return _Header(dtype, sides, order[1] == "True", start)


def _chosen(raw: RawFile, headers: dict[str, _Header]) -> str:
    """The name of the array to read."""
    listed = ", ".join(f"{name} ({header})" for name, header in headers.items()) or "no array"
    wanted = raw.options.array
    if wanted is not None:
        if wanted not in headers:
            raise raw.refusal(f"an array named {wanted!r}", listed, "correct array")
        return wanted
    candidates = [name for name, header in headers.items() if header.could_be_frame]
    if not candidates:
        raise raw.refusal("an array of rows × columns", listed, "save the frame as one 2-D array of numbers")
    if len(candidates) > 1:
        raise raw.refusal("one array, or its name", listed, f'write array = "{candidates[0]}" or another')
    return candidates[0]


def _numbers(raw: RawFile, header: _Header, data: bytes) -> NDArray[np.generic]:
    """The numbers behind `header` in `data`, which must end with them."""
    _check(raw, header)
    if len(data) != header.end:
        got = f"{len(data)} bytes" if len(data) < header.end else "more bytes than that"
        raise raw.refusal(f"{header.end} bytes for {header}", got, "copy or save it again")
    return np.frombuffer(data, header.dtype, offset=header.start).reshape(
        header.shape, order="F" if header.fortran_order else "C"
    )


def _check(raw: RawFile, header: _Header) -> None:
    if header.dtype.hasobject:
        raise _pickled(raw)
    raw.check(header.shape, header.dtype)


def _pickled(raw: RawFile) -> FrameError:
    return raw.refusal(
        "plain numbers",
        "a pickled object, which could run any program when opened",
        "save the numbers alone, for example with numpy.save(…, allow_pickle=False)",
    )
