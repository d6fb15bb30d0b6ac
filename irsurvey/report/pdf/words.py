"""The words of the paper that stand in no other place, from words.toml."""

from __future__ import annotations

import tomllib
from functools import cache
from importlib.resources import files
from typing import Any


def say(key: str, **values: object) -> str:
    """A word or sentence, with values in its gaps."""
    text: str = _words()[key]
    return text.format(**values) if values else text


def noun(number: int, key: str) -> str:
    """The word for one or for several: "frame", "frames"."""
    one, several = _words()["counted"][key]
    return str(one if number == 1 else several)


@cache
def _words() -> dict[str, Any]:
    return tomllib.loads((files("irsurvey.report.pdf") / "words.toml").read_text(encoding="utf-8"))
