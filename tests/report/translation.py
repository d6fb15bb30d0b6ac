"""A made-up translation of all words of the documents: every letter of them turned into one of another script.

What still shows Latin letters was not taken from the table of words, or comes from the survey and its records."""

from __future__ import annotations

import json
import re
import string
import tomllib
from collections.abc import Collection, Iterable, Iterator
from dataclasses import fields, is_dataclass
from html.parser import HTMLParser
from importlib.resources import files
from typing import Any

from irsurvey.model import FrameTask, Report
from irsurvey.numbers import expressed
from irsurvey.report.style import asked
from irsurvey.units import UNITS

ENGLISH: dict[str, Any] = tomllib.loads((files("irsurvey") / "texts.toml").read_text(encoding="utf-8"))

_LETTERS = {
    **{letter: chr(0x0430 + place) for place, letter in enumerate(string.ascii_lowercase)},
    **{letter: chr(0x0410 + place) for place, letter in enumerate(string.ascii_uppercase)},
}
_TRANSLATED = str.maketrans(_LETTERS)
_GAP = re.compile(r"(\{\w*\})")
_WORD = re.compile(r"[A-Za-z]{2,}")
_VOID = {"meta", "link", "img", "br", "hr", "input"}
_WHOLE = {
    *("address", "article", "caption", "dd", "details", "div", "dl", "dt", "figcaption", "figure", "footer", "h1"),
    *("h2", "h3", "h4", "h5", "header", "li", "main", "nav", "ol", "option", "p", "section", "summary", "svg"),
    *("table", "tbody", "td", "text", "th", "thead", "title", "tr", "ul"),
}
"""Elements whose text is read on its own; what stands in others belongs to the words around it."""
_SHOWN = ("aria-label", "alt", "title", "data-label", "placeholder", "data-asks", "data-outcome")
"""Attributes that a reader sees or hears."""
_FILES = ("report.json", "findings.csv", "repairs.csv", "report.html", "report-1.pdf", "frames", "review.json")
_OF_CODES = (
    *("urgency", "outcomes", "verdicts", "claims", "conditions", "founded", "origin", "sense", "units", "basis"),
    *("form", "usual", "terms", "cues", "risk", "air", "asked_by", "season", "flagged", "uncertainty"),
)
"""Tables of words for codes of the records."""
_CUT = (33, 39, 40, 59, 69, 79, 80, 89, 99, 139, 239, 319, 399, 419)
"""Letters after which the documents cut a free text."""


def translated(words: Any) -> Any:
    """The table of words with all letters in another script; keys and gaps as they are."""
    if isinstance(words, dict):
        return {key: translated(value) for key, value in words.items()}
    if isinstance(words, list):
        return [translated(value) for value in words]
    assert isinstance(words, str)
    return "".join(part if _GAP.fullmatch(part) else part.translate(_TRANSLATED) for part in _GAP.split(words))


class Seen(HTMLParser):
    """What a reader of a page sees or hears, piece by piece, and the data its scripts show."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.pieces: list[str] = []
        self.data: list[Any] = []
        self._open: list[str] = []
        self._words = ""
        self.feed(page)
        self.close()
        self._end()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.pieces += [value for name, value in attrs if name in _SHOWN and value]
        if tag in _WHOLE:
            self._end()
        if tag not in _VOID:
            self._open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        if tag in _WHOLE:
            self._end()
        self._open.pop()

    def handle_data(self, data: str) -> None:
        if self._open and self._open[-1] == "script":
            self.data += [json.loads(data)] if data.startswith("{") else []
        elif not (self._open and self._open[-1] == "style"):
            self._words += data

    def _end(self) -> None:
        self.pieces.append(re.sub(r"\s+", " ", self._words).strip(" "))
        self._words = ""


def told_by(report: Report, tasks: Collection[FrameTask], more: Iterable[str] = ()) -> list[str]:
    """What a document shows as it stands in the records, the survey and the tables of standards, the longest first.

    Codes that the table of words has a word for are not among it, nor are single words that stand there, too, unless
    they are names."""
    codes = {code for name in _OF_CODES for code in ENGLISH[name]}
    of_documents = {name: words for name, words in ENGLISH.items() if name not in ("statements", "tables")}
    vocabulary = set(_WORD.findall(" ".join(_leaves(of_documents))))
    style = asked(report)
    units = {symbol for unit in (*UNITS.values(), "cm²") for symbol in (unit, expressed(unit, style).symbol)}
    told = {*_leaves(report), *_leaves(list(tasks)), *_standards(), *more}
    kept = {text for text in told if _WORD.search(text) and text not in codes and text not in vocabulary}
    kept |= {*_FILES, *(units - set(ENGLISH["units"])), *_names(report), *_refused(report)}
    kept |= {task.orientation for task in tasks if task.orientation}
    kept |= {f"{text[:most].rstrip()}…" for text in kept for most in _CUT if len(text) > most}
    kept |= {f"{text[:1].upper()}{text[1:]}" for text in kept}
    alone = {f"^{text}$" for text in told - codes if text in vocabulary}
    return sorted((re.sub(r"\s+", " ", text).strip() for text in kept | alone), key=len, reverse=True)


def untranslated(pieces: Iterable[str], told: list[str]) -> list[str]:
    """The pieces in which Latin words are left that nobody told the documents."""
    whole = {text[1:-1] for text in told if text.startswith("^")}
    parts = [text for text in told if not text.startswith("^")]
    return [piece for piece in dict.fromkeys(pieces) if piece not in whole and _WORD.search(_rest(piece, parts))]


def labels(data: Any) -> Iterator[str]:
    """What the scripts of a page show of its data."""
    if isinstance(data, dict):
        told = ("label", "reported", *(["name"] if "kind" in data else []))
        yield from (data[key] for key in told if isinstance(data.get(key), str))
        for value in data.values():
            yield from labels(value)
    elif isinstance(data, list):
        for value in data:
            yield from labels(value)


def _rest(piece: str, told: list[str]) -> str:
    rest = piece
    for text in told:
        if not _WORD.search(rest):
            break
        if text in rest:
            rest = re.sub(rf"(?<![A-Za-z]){re.escape(text)}(?![A-Za-z])", " ", rest)
    return rest


def _names(report: Report) -> Iterator[str]:
    """Names that may be words as well: of the program, criteria, classes, patterns, frames, places, what an input
    belongs to; and the details of flags."""
    yield report.tool["name"]
    yield from (asset.location for asset in report.assets if asset.location)
    for frame in report.frames:
        yield from (name for name in (frame.id, frame.element, frame.asset, frame.group) if name)
        yield from (key.partition(":")[2] for key in frame.inputs if ":" in key)
        yield from (flag.partition(": ")[2] for flag in frame.flags)
        for item in (*frame.findings, *frame.components):
            yield from (flag.partition(": ")[2] for flag in item.flags)
            yield from ([item.indication.pattern] if item.indication else [])
            for one in item.assessments:
                yield from (one.criterion, one.class_ or one.criterion, *one.probabilities)


def _refused(report: Report) -> Iterator[str]:
    """Why a number is not given, and the remedy, which are shown apart."""
    for frame in report.frames:
        for one in (*([frame.reference] if frame.reference else []), *frame.findings, *frame.strips):
            for told in one.refusals.values():
                yield from (told.partition(": ")[0], told.partition(": ")[2])


def _leaves(record: Any) -> Iterator[str]:
    """All texts in a record, and the keys of its tables."""
    if isinstance(record, str):
        yield record
    elif is_dataclass(record):
        for field in fields(record):
            yield from _leaves(getattr(record, field.name))
    elif isinstance(record, dict):
        yield from (key for key in record if " " in key or not key.islower())
        for value in record.values():
            yield from _leaves(value)
    elif isinstance(record, list | tuple):
        for value in record:
            yield from _leaves(value)


def _standards() -> Iterator[str]:
    """Texts of the tables of criteria, limits, conditions and the like, which are data of their own."""
    pending = [files("irsurvey") / "assess"]
    while pending:
        place = pending.pop()
        if place.is_dir():
            pending += place.iterdir()
        elif place.name.endswith(".toml"):
            yield from _leaves(tomllib.loads(place.read_text(encoding="utf-8")))
