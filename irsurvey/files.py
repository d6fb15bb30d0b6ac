"""Files as a whole: hash one, or write one completely or not at all."""

from __future__ import annotations

import hashlib
import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from irsurvey.errors import Fault, OutputError


def sha256(path: Path) -> str:
    """SHA-256 of a file's bytes, as lower-case hexadecimal."""
    with path.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


PART = ".part-"
"""What the name of a file begins with while it is written."""


@contextmanager
def whole(path: Path) -> Iterator[Path]:
    """Give a temporary path beside `path`; move it there only when the block ends without an error.

    The file appears complete or not at all, also when the program is killed half-way.
    Raises `OutputError` where the folder cannot be written or no space is left.
    """
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(prefix=PART, suffix=path.suffix, dir=path.parent)
        os.close(handle)
        part = Path(name)
        try:
            yield part
            part.chmod(0o644)
            part.replace(path)
        finally:
            part.unlink(missing_ok=True)
    except OSError as error:
        fault = Fault(str(path), "a place to write it", error.strerror or str(error), "free space or choose another -o")
        raise OutputError(fault) from error


def write_bytes(path: Path, data: bytes) -> None:
    """Write `data` to `path`, whole or not at all."""
    with whole(path) as part:
        part.write_bytes(data)


def write_text(path: Path, text: str) -> None:
    """Write `text` as UTF-8 with `\\n` line ends to `path`, whole or not at all."""
    write_bytes(path, text.encode("utf-8"))
