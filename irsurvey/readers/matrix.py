"""Text matrices (CSV, TSV, TXT): one line per row; separator and decimal sign are found from the text itself.

Separators are tab, semicolon, comma or blanks; decimals stand after a point or, where it does not separate, a comma.
Passed over are comments (#), empty lines, a byte order mark, either kind of line end, a separator at the end of
every line, and lines above the matrix that do not belong to it.  Numbers become float64, empty cells NaN.
"""

from __future__ import annotations

import csv
import math
from collections import Counter

import numpy as np
from numpy.typing import NDArray

from irsurvey.readers.raw_file import RawFile

SEPARATORS = ("\t", ";", ",")
"""In the order of looking: between tabs or semicolons a comma is a decimal sign."""

Line = tuple[int, str]  # its number in the file, from 1, and its text


def numbers(raw: RawFile) -> NDArray[np.float64]:
    """The matrix; a line of another length and a cell that is no number are named in the error."""
    lines = _lines(raw)
    separator = _separator(lines)
    widths = [len(_cells(text, separator)) for _, text in lines]
    columns = Counter(widths).most_common(1)[0][0]
    rows = [text for (_, text), width in zip(lines, widths, strict=True) if width == columns]
    if separator is not None and all(text.endswith(separator) for text in rows):
        lines = [(number, text.removesuffix(separator)) for number, text in lines]
        columns -= 1
    while lines and _is_heading(_cells(lines[0][1], separator), columns):
        del lines[0]
    if not lines:
        raise raw.refusal("a matrix of numbers", "none", "export the stored numbers, one line per row")
    raw.check((len(lines), columns), np.float64)
    stored = np.empty((len(lines), columns))
    for row, line in zip(stored, lines, strict=True):
        row[:] = _row(raw, line, separator, columns)
    if _has_numbered_edges(stored):
        raise raw.refusal("stored numbers only", "row and column numbers along the edges", "export without them")
    return stored


def _lines(raw: RawFile) -> list[Line]:
    """The lines that say something, without blanks at their ends."""
    is_utf_16 = raw.data.startswith((b"\xff\xfe", b"\xfe\xff"))
    text = raw.data.decode("utf-16" if is_utf_16 else "utf-8-sig", errors="replace")
    if "\0" in text:
        raise raw.refusal("a text of numbers", "binary content", "name it .raw and declare shape, dtype and byte_order")
    lines = [(number, line.strip(" ")) for number, line in enumerate(text.splitlines(), 1)]
    lines = [(number, line) for number, line in lines if line and not line.startswith("#")]
    if not lines:
        raise raw.refusal("a matrix of numbers", "a text without any", "export it again")
    return lines


def _separator(lines: list[Line]) -> str | None:
    """What separates most lines of the lower half, where no heading is to be expected; None: blanks."""
    texts = [text for _, text in lines[len(lines) // 2 :]]
    for separator in SEPARATORS:
        if 2 * sum(separator in text for text in texts) > len(texts):
            is_decimal_sign = separator == "," and any(len(cell.split()) > 1 for cell in texts[0].split(","))
            return None if is_decimal_sign else separator
    return None


def _cells(text: str, separator: str | None) -> list[str]:
    """The cells of a line, decimal points in place of decimal commas."""
    if separator != ",":
        text = text.replace(",", ".")
    if '"' in text:
        return next(csv.reader([text], delimiter=separator or " ", skipinitialspace=True))
    return text.split(separator)


def _number(cell: str) -> float | None:
    """The number in a cell, NaN where it is empty, None where it holds something else."""
    try:
        return float(cell) if cell.strip() else math.nan
    except ValueError:
        return None


def _is_heading(cells: list[str], columns: int) -> bool:
    """Whether a line above the matrix is text: titles without any number, or words of another count than the columns.

    A line of the matrix's width with some numbers in it is a damaged row, and must not vanish.
    """
    found = [_number(cell) for cell in cells]
    return None in found and (len(cells) != columns or all(number is None for number in found))


def _row(raw: RawFile, line: Line, separator: str | None, columns: int) -> list[float]:
    """The numbers of one line."""
    place, text = line
    cells = _cells(text, separator)
    if len(cells) != columns:
        raise raw.refusal(f"{columns} cells in every line", f"{len(cells)} in line {place}", "copy or export it again")
    if separator != "," and "," in text and "." in text:
        raise raw.refusal("one decimal sign", f"comma and point in line {place}", "export without thousands separators")
    try:
        return list(map(float, cells))
    except ValueError:  # an empty cell, or none that is a number
        return [_stated(raw, cell, f"line {place}, cell {index}") for index, cell in enumerate(cells, 1)]


def _stated(raw: RawFile, cell: str, place: str) -> float:
    number = _number(cell)
    if number is None:
        raise raw.refusal("numbers or empty cells", f"{cell.strip()[:40]!r} in {place}", "export numbers alone")
    return number


def _has_numbered_edges(stored: NDArray[np.float64]) -> bool:
    """Whether the first row and column count from 0 around an empty corner, as tables with an index are written."""
    return (
        math.isnan(stored[0, 0])
        and np.array_equal(stored[0, 1:], np.arange(stored.shape[1] - 1))
        and np.array_equal(stored[1:, 0], np.arange(stored.shape[0] - 1))
    )
