"""16-bit greyscale PNG; every other kind of PNG is a picture for the eye."""

from __future__ import annotations

import struct
import zlib

import numpy as np
from numpy.typing import NDArray

from irsurvey.readers.raw_file import RawFile

SIGNATURE = b"\x89PNG\r\n\x1a\n\x00\x00\x00\rIHDR"
KINDS = {0: "greyscale", 2: "colour", 3: "palette", 4: "greyscale and alpha", 6: "colour and alpha"}
"""PNG specification (third edition), 11.2.1: colour type."""


def image(raw: RawFile) -> NDArray[np.generic]:
    """The stored numbers, uint16; no gamma, background or transparency is applied."""
    if not raw.data.startswith(SIGNATURE) or len(raw.data) < len(SIGNATURE) + 10:
        raise raw.refusal("a PNG file", "something else under that name", "check the export")
    columns, rows, bits, colour_type = struct.unpack_from(">IIBB", raw.data, len(SIGNATURE))
    if (bits, colour_type) != (16, 0):
        raise raw.refusal(
            "16-bit greyscale",
            f"{bits}-bit {KINDS.get(colour_type, 'of unknown kind')}",
            "export the stored numbers, not the picture made of them",
        )
    raw.check((rows, columns), np.uint16)
    _check_chunks(raw)
    import imagecodecs

    pixels: NDArray[np.generic] = imagecodecs.png_decode(raw.data)
    return pixels


def _check_chunks(raw: RawFile) -> None:
    """Raise `FrameError` unless every chunk up to the last is whole and has its checksum (PNG specification, 5.3).

    The decoder would notice too, but writes about it to the terminal.
    """
    at, kind = 8, b""
    while kind != b"IEND":
        length, kind = struct.unpack_from(">I4s", raw.data, at) if at + 8 <= len(raw.data) else (0, b"")
        end = at + 12 + length
        if end > len(raw.data):
            raise raw.refusal("a whole PNG file", "one that breaks off", "copy or export it again")
        if struct.pack(">I", zlib.crc32(raw.data[at + 4 : end - 4])) != raw.data[end - 4 : end]:
            raise raw.refusal("an undamaged PNG file", f"a wrong checksum at byte {at}", "copy or export it again")
        at = end
