"""A table as CSV that a spreadsheet shows and does not run."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

from irsurvey import files

Cell = str | float | None

_CONTROLS = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")
_FORMULA_STARTS = tuple("=+-@\t\r\n＝＋－＠")
"""What makes a spreadsheet run a cell as a formula, full-width forms included (OWASP, CSV Injection)."""


def write(path: Path, columns: Sequence[str], rows: Iterable[Mapping[str, Cell]]) -> Path:
    """Write a table (UTF-8, RFC 4180: comma, CRLF), whole or not at all; an absent column and None are empty cells."""
    stream = io.StringIO(newline="")
    writer = csv.DictWriter(stream, columns, restval="")
    writer.writeheader()
    for row in rows:
        writer.writerow({name: _cell(value) for name, value in row.items()})
    files.write_bytes(path, stream.getvalue().encode("utf-8", "replace"))
    return path


def as_text(cell: str) -> str:
    """A text that a spreadsheet shows instead of running it: an apostrophe before what would start a formula.

    Control characters, of which NUL ends a table in many a reader, become U+FFFD as on the page."""
    cell = _CONTROLS.sub("\ufffd", cell)
    return f"'{cell}" if cell.startswith(_FORMULA_STARTS) else cell


def _cell(value: Cell) -> str | float:
    if value is None:
        return ""
    return as_text(value) if isinstance(value, str) else value
