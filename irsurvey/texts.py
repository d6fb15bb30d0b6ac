"""The words of the documents, from texts.toml: what is said by its key, and what codes of the records are called.

A code without an entry there is shown as it is; `say` of an unknown key is a KeyError."""

from __future__ import annotations

import tomllib
from collections.abc import Iterable, Iterator
from functools import cache
from importlib.resources import files
from typing import Any

from irsurvey.model import FrameReport
from irsurvey.units import UNITS

_OF_AREAS = ("noise", "outline")
_OF_OWNERS = ("slope_x", "slope_y", "selection", "size_of_source")
"""Inputs that each area of a frame has of its own; those that only what is measured has."""
_PARTS = ("spot", "whole", "undisturbed")
"""Parts of a finding, a component or a strip that are measured."""
_ASSUMED = ("default", "material table")
_MEASURED = ("log", "measured in frame")
"""Where an input may come from, if nobody stated it."""


def language() -> str:
    """The language of these words, as documents name it."""
    code: str = _texts()["document"]["language"]
    return code


def say(key: str, /, **values: object) -> str:
    """A word or sentence, with values in its gaps."""
    text: str = _texts()["said"][key]
    return text.format(**values) if values else text


def noun(number: int, key: str) -> str:
    """The word for one or for several: "frame", "frames"."""
    one, several = _texts()["counted"][key]
    return str(one if number == 1 else several)


def tools() -> dict[str, str]:
    """The words of the tools on the live page, by key."""
    return dict(_texts()["tools"])


def review(key: str, /, **values: object) -> str:
    """A word or sentence of the review, with values in its gaps."""
    text: str = _texts()["review"][key]
    return text.format(**values) if values else text


def state(key: str, /, **values: object) -> str:
    """A sentence of the analysis, or a part of one, with values in its gaps; a code, as sentences name it."""
    text: str = _texts()["statements"][key]
    return text.format(**values) if values else text


def of_table(words: str) -> str:
    """What stands for words of a data file (a class, a requirement, a recommended action); without an entry, they."""
    found: str = _texts()["tables"].get(words, words)
    return found


def class_name(class_: str | None) -> str:
    """What a class of a criterion is called, or that there is none."""
    return of_table(class_) if class_ else say("no_class")


def of_review() -> dict[str, str]:
    """All words of the review, by key."""
    return dict(_texts()["review"])


def flag(code: str) -> str:
    """What a flag means to the reader, or the flag itself; after a colon it may give detail ("saturated: 3 pixels")."""
    meaning: str = _texts()["flags"].get(code.partition(":")[0], code)
    return meaning


def flag_name(code: str) -> str:
    """A flag in a few words, with the detail it may have."""
    stem, colon, detail = code.partition(":")
    return f"{_word('flagged', stem)}{colon}{detail}"


def urgency(level: int | None) -> str:
    """What an urgency asks for."""
    return _word("urgency", "none" if level is None else str(level))


def to_do(level: int | None, outcome: str) -> str:
    """What a result asks for: where its urgency asks for nothing although it is not cleared, to look again."""
    return _word("urgency", "open") if level == 0 and outcome == "not cleared" else urgency(level)


def outcome_name(kind: str) -> str:
    """An outcome in a word or two."""
    return _word("outcomes", kind)


def outcome(kind: str) -> str:
    """What an outcome means."""
    return _word("outcome", kind)


def verdict_name(kind: str) -> str:
    """A verdict in a word or two."""
    return _word("verdicts", kind)


def verdict(kind: str) -> str:
    """Where a number lies against the edge where action begins."""
    return _word("verdict", kind)


def uncertainty(kind: str) -> str:
    """How uncertainty was propagated."""
    return _word("uncertainty", kind)


def claim_name(kind: str) -> str:
    """A claim in a word or two."""
    return _word("claims", kind)


def claim(kind: str) -> str:
    """What a frame's claim allows."""
    return _word("claim", kind)


def overall(kind: str) -> str:
    """What the claim of a whole survey allows."""
    return _word("overall", kind)


def kept(kind: str | None) -> str:
    """The most that a requirement leaves to be claimed; "" where it takes nothing."""
    return _word("kept", kind) if kind else ""


def origin(source: str) -> str:
    """How well founded an input is: stated, measured or assumed."""
    return _word("origin", source)


def founded(source: str) -> str:
    """The same in one word: "stated", "measured" or "assumed"."""
    return _word("founded", "assumed" if is_assumed(source) else "measured" if source in _MEASURED else "stated")


def is_assumed(source: str) -> bool:
    """Whether nobody stated or measured an input."""
    return source in _ASSUMED


def condition(verdict: str) -> str:
    """How a condition of the survey was kept."""
    return _word("conditions", verdict)


def symbol(unit: str) -> str:
    """A unit as people write it: most are the same in every language."""
    return _word("units", unit)


def sense(kind: str) -> str:
    """Warmer or colder."""
    return _word("sense", kind)


def pattern(name: str) -> str:
    """A pattern in half a sentence: "consistent with …", or that there is none."""
    words: str | None = _texts()["pattern"].get(name)
    return words or say("consistent_with", pattern=of_table(name))


def cue(key: str) -> str:
    """What a measured cue of a pattern is called."""
    words: str = _texts()["cues"].get(key, inside(key))
    return words


def term(key: str) -> str:
    """Where a part of a heat flux goes: "to the sky by radiation"."""
    words: str = _texts()["terms"].get(key, inside(key))
    return words


def risk(kind: str) -> str:
    """What a surface temperature is held against."""
    words: str | None = _texts()["risk"].get(kind)
    return words or say("limit_of", kind=kind)


def air(how: str) -> str:
    """Where the humidity of the room air comes from."""
    return _word("air", how)


def asked_by(report: str) -> str:
    """Which report asks for an item."""
    return _word("asked_by", report)


def season(sense: str) -> str:
    """Heating or cooling, as a heading."""
    return _word("season", sense)


def owner(note: str) -> str:
    """A sentence on how to read what a season costs."""
    return _word("owner", note)


def basis(kind: str) -> str:
    """What a difference was taken against: "above ambient air"."""
    return _word("basis", kind)


def form(kind: str) -> str:
    """What a joint is taken for when its heat is estimated."""
    return _word("form", kind)


def remark(kind: str) -> str:
    """What must be known with a number of a component; "" where nothing must."""
    words: str = _texts()["remark"].get(kind, "")
    return words


def repairs(note: str) -> str:
    """A sentence beside the repair list."""
    return _word("repairs", note)


def usual(how: str) -> str:
    """How what is usual among many components was found."""
    return _word("usual", how)


def about(key: str) -> str:
    """The heading of a free text of the survey."""
    return _word("about", key) if key in _texts()["about"] else _plain(key)


def name(key: str) -> str:
    """What people call a key of report.json, without unit: "emissivity:cover plate" → "Emissivity, cover plate".

    Noise and outlines belong to an area: "noise_k:F01-1 spot" → "Pixel noise, measurement spot of F01-1"."""
    stem, _, owner = key.partition(":")
    names: dict[str, str] = _texts()["names"]
    bare = _without_unit(stem)
    found = names.get(stem) or names.get(bare) or _plain(bare)
    if not owner:
        return found
    if bare in _OF_AREAS:
        owner = _area(bare, owner)
    return f"{found}, {_owner(owner) if bare in _OF_OWNERS else owner}"


def inside(key: str) -> str:
    """The same within a sentence: "emissivity, cover plate", but "ΔT" and "U-value"."""
    found = name(key)
    return f"{found[0].lower()}{found[1:]}" if found[1:2].islower() else found


def cautions(kinds: Iterable[str]) -> tuple[str, ...]:
    """The standing cautions for these kinds of survey, and for moisture, joints, trends and seasons told of."""
    texts = _texts()["cautions"]
    return tuple(caution for kind in ("all", *sorted(set(kinds))) for caution in texts.get(kind, ()))


def cautions_for(frames: Iterable[FrameReport], *, has_season: bool) -> tuple[str, ...]:
    """The standing cautions that a report of these frames, and of a season's cost, has to carry."""
    return cautions((*(kind for frame in frames for kind in _told_of(frame)), *(["season"] if has_season else [])))


def _told_of(frame: FrameReport) -> Iterator[str]:
    """What a frame tells of that standing cautions are written for."""
    yield frame.kind
    if frame.room_air or frame.surface_at_risk:
        yield "moisture"
    if any(component.joint for component in frame.components):
        yield "joint"
    if any(component.trend for component in frame.components):
        yield "trend"


def _area(kind: str, owner: str) -> str:
    """Whose noise or outline it is, in words: of the reference area, or of a finding or component; noise, of its spot
    or of its whole."""
    areas: dict[str, str] = _texts()["areas"]
    if owner == "reference":
        return areas["reference"]
    whose, _, part = owner.rpartition(" ")
    return areas[part].replace("{name}", _owner(whose)) if kind == "noise" and part in _PARTS else _owner(owner)


def _owner(named: str) -> str:
    """What an area belongs to, in words: a finding by its id, a component or strip by its name."""
    kind, _, name = named.partition(" ")
    areas: dict[str, str] = _texts()["areas"]
    return areas[kind].replace("{name}", name) if kind in ("component", "strip") and name else named


def _without_unit(key: str) -> str:
    ending = next((f"_{ending}" for ending in UNITS if key.endswith(f"_{ending}") and ending != "per_pixel"), "")
    return key.removesuffix(ending)


def _plain(key: str) -> str:
    return key.replace("_", " ").strip().capitalize() or key


def _word(table: str, key: str) -> str:
    word: str = _texts()[table].get(key, key)
    return word


@cache
def _texts() -> dict[str, Any]:
    return tomllib.loads((files("irsurvey") / "texts.toml").read_text(encoding="utf-8"))
