"""The CSV tables with a byte order mark: some spreadsheets take UTF-8 without one for another encoding."""

from __future__ import annotations

from codecs import BOM_UTF8
from pathlib import Path

from irsurvey import files
from irsurvey.model import FrameTask, Report

TABLES = ("findings.csv", "repairs.csv")


def write(_report: Report, _tasks: tuple[FrameTask, ...], out: Path) -> Path | None:
    """Put the mark before the tables already in `out`, each whole or not at all; None where there are none."""
    there = [out / name for name in TABLES if (out / name).is_file()]
    for path in there:
        if not is_marked(path):
            files.write_bytes(path, BOM_UTF8 + path.read_bytes())
    return there[0] if there else None


def is_marked(path: Path) -> bool:
    """Whether a file begins with the mark."""
    with path.open("rb") as stream:
        return stream.read(len(BOM_UTF8)) == BOM_UTF8
