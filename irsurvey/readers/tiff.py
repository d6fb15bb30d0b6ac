"""TIFF, classic and big: one page of stored numbers, whatever its photometric tag says or lacks."""

from __future__ import annotations

import io
import logging
from math import prod
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from irsurvey.readers.raw_file import STORED_TYPES, RawFile

if TYPE_CHECKING:
    from tifffile import TiffFile, TiffPage

COMPRESSIONS = (1, 5, 8, 32773, 32946, 34925, 50000)
"""None, LZW, deflate (twice), PackBits, LZMA, Zstandard: lossless, and unpacked no further than the page is large.

Others are made for pictures, and may unpack to anything."""

GREYSCALE = (0, 1)
"""PhotometricInterpretation (TIFF 6.0): white is zero, black is zero; either way the numbers are taken as stored."""

logging.getLogger("tifffile").addHandler(logging.NullHandler())  # else its remarks reach the user's terminal


def page(raw: RawFile) -> NDArray[np.generic]:
    """The numbers of page `raw.options.page` (from 0); not needed where only one page could be a frame."""
    import tifffile

    with tifffile.TiffFile(io.BytesIO(raw.data)) as file:
        chosen = _chosen(raw, file)
        _check(raw, chosen)
        return chosen.asarray(maxworkers=1)


def _chosen(raw: RawFile, file: TiffFile) -> TiffPage:
    """The page asked for, or the only one there is to ask for."""
    wanted, count = raw.options.page, len(file.pages)
    if wanted is not None:
        if not 0 <= wanted < count:
            raise raw.refusal(f"a page from 0 to {count - 1}", f"page = {wanted}", f"write page = {count - 1} or less")
        return file.pages[wanted].aspage()
    candidates = [k for k in range(count) if _could_be_frame(file.pages[k].aspage())]
    if len(candidates) > 1:
        listed = ", ".join(map(str, candidates[:20])) + (f" … {candidates[-1]}" if len(candidates) > 20 else "")
        raise raw.refusal("one page, or its number", f"pages {listed}", f"write page = {candidates[0]} or another")
    return file.pages[candidates[0] if candidates else 0].aspage()


def _could_be_frame(page: TiffPage) -> bool:
    return (
        len(page.shape) == 2
        and not page.is_reduced  # a thumbnail
        and page.photometric in GREYSCALE
        and page.compression in COMPRESSIONS
        and page.dtype is not None
        and page.dtype.name in STORED_TYPES
    )


def _check(raw: RawFile, page: TiffPage) -> None:
    """Raise `FrameError` unless the page is greyscale numbers, within the limit and all there."""
    if page.compression not in COMPRESSIONS:
        raise raw.refusal(
            "no compression, or LZW, deflate, PackBits, LZMA, Zstandard",
            _name(page.compression),
            "export the stored numbers without loss",
        )
    if page.photometric not in GREYSCALE and len(page.shape) == 2:
        raise raw.refusal("greyscale", f"a {_name(page.photometric)} picture", "export the stored numbers, no colours")
    if page.dtype is None:
        raise raw.refusal("integers or floats", f"{page.bitspersample} bits of an unknown kind", "export it as 16-bit")
    raw.check(page.shape, page.dtype)
    if prod(page.chunks) > max(raw.pixel_limit, prod(page.shape)):
        tile = " × ".join(map(str, page.chunks))
        raise raw.refusal(f"tiles of at most {raw.pixel_limit} pixels", tile, "export it again")
    segments = list(zip(page.dataoffsets, page.databytecounts, strict=False))
    if len(segments) < prod(page.chunked) or any(
        offset <= 0 or count <= 0 or offset + count > len(raw.data) for offset, count in segments
    ):
        raise raw.refusal("all strips of the page", "one that breaks off, or is missing", "copy or export it again")


def _name(tag_value: int) -> str:
    return getattr(tag_value, "name", str(tag_value))
