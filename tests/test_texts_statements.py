"""What the analysis says stands in texts.toml: every key is used, every gap is filled, and nothing is said past it."""

from __future__ import annotations

import ast
import re
import tomllib
from collections.abc import Iterator
from functools import cache
from importlib.resources import files
from itertools import product
from pathlib import Path
from string import Formatter
from typing import Any, NamedTuple

import numpy as np
import pytest
from samples import SURVEYS
from table_words import has_words, table_words

from irsurvey import texts
from irsurvey.assess import checklist, conditions, criteria, indication, limits, next_visit, pv, repairs
from irsurvey.assess.judged import Judged, Sensitivity
from irsurvey.assess.limits import limits as known_limits
from irsurvey.assess.severity import BLOCKERS
from irsurvey.geometry.registration import register
from irsurvey.model import Assessment, AssetReport, FrameReport, Indication, Report
from irsurvey.numbers import UNITS
from irsurvey.run import _assets, load_survey, own_criteria, run

PACKAGE = Path(str(files("irsurvey")))
TEXTS = tomllib.loads((PACKAGE / "texts.toml").read_text(encoding="utf-8"))
STATEMENTS: dict[str, str] = TEXTS["statements"]
SOURCES = sorted(path for path in PACKAGE.rglob("*.py") if path.name != "texts.py")


class Call(NamedTuple):
    """A call of `state`: the keys it may be given, () where they are worked out, and the names it gives values to."""

    keys: tuple[str, ...]
    names: frozenset[str]


@cache
def calls(path: Path) -> tuple[Call, ...]:
    found = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Call) and _called(node.func) == "state":
            assert all(given.arg for given in node.keywords), (
                f"{path.name}: gaps are filled by name, line {node.lineno}"
            )
            names = frozenset(given.arg for given in node.keywords if given.arg)
            found.append(Call(tuple(_literals(node.args[0])), names))
    return tuple(found)


@cache
def constants(path: Path) -> frozenset[str]:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    return frozenset(
        node.value for node in ast.walk(tree) if isinstance(node, ast.Constant) and isinstance(node.value, str)
    )


def gaps(text: str) -> frozenset[str]:
    return frozenset(name for _, name, _, _ in Formatter().parse(text) if name is not None)


def _called(function: ast.expr) -> str:
    return function.attr if isinstance(function, ast.Attribute) else getattr(function, "id", "")


def _literals(key: ast.expr) -> Iterator[str]:
    """Keys written out where they are asked for, also where one of two is chosen."""
    if isinstance(key, ast.IfExp):
        yield from (*_literals(key.body), *_literals(key.orelse))
    elif isinstance(key, ast.Constant):
        yield str(key.value)


LITERAL = [(path, key, call.names) for path in SOURCES for call in calls(path) for key in call.keys]


def test_every_sentence_that_is_asked_for_exists() -> None:
    assert len(LITERAL) > 80
    assert {key for _, key, _ in LITERAL} - STATEMENTS.keys() == set()


@pytest.mark.parametrize("key", STATEMENTS)
def test_every_sentence_is_used_and_its_gaps_are_those_it_is_given_values_for(key: str) -> None:
    given = [names for _, literal, names in LITERAL if literal == key]
    if not given:  # a code, or a key from a table of keys: what stands beside it asks for it by its name
        using = [path for path in SOURCES if key in constants(path)]
        given = [call.names for path in using for call in calls(path) if not call.keys]
        assert gaps(STATEMENTS[key]) in given
    else:
        assert set(given) == {gaps(STATEMENTS[key])}


def test_gaps_are_named_and_nothing_is_empty() -> None:
    for key, text in STATEMENTS.items():
        assert all(name.isidentifier() for name in gaps(text)), key
        assert text.strip() == text != "", key


def test_the_words_of_the_data_files_are_listed_and_no_others() -> None:
    asked = [word for words in table_words().values() for word in words]
    assert len(asked) > 200
    assert list(TEXTS["tables"]) == asked


def test_what_is_not_listed_is_shown_as_it_is() -> None:
    assert texts.of_table("a class of a survey's own") == "a class of a survey's own"


def test_words_of_limits_that_meet_in_a_part_are_listed_one_by_one() -> None:
    assert {one.what for one in known_limits().values()} <= TEXTS["tables"].keys()


# ---- a translation that anybody can tell from English --------------------------------------------------------------


def _marked(text: str) -> str:
    """A text in ⟦…⟧, its gaps left outside: what fills them has to be marked by itself."""
    parts = []
    for literal, name, _, _ in Formatter().parse(text):
        parts.append(f"⟦{literal}⟧" if literal else "")
        parts.append(f"{{{name}}}" if name is not None else "")
    return "".join(parts)


def _unmarked(text: str) -> str:
    return re.sub(r"⟦[^⟦⟧]*⟧", " ", text)


def _of_words() -> tuple[Any, ...]:
    """Caches that hold words of the data files."""
    return (
        checklist.asked,
        conditions.requirement_sets,
        criteria._built_in,
        limits.limits,
        next_visit.measurements,
    )


@pytest.fixture(scope="module")
def translated() -> Iterator[None]:
    tables = {key: f"⟦{text}⟧" for key, text in TEXTS["tables"].items()}
    marked = TEXTS | {"statements": {key: _marked(text) for key, text in STATEMENTS.items()}, "tables": tables}
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(texts, "_texts", lambda: marked)
        for cached in _of_words():
            cached.cache_clear()
        yield
    for cached in _of_words():
        cached.cache_clear()


@pytest.fixture(scope="module")
def reports(translated: None, tmp_path_factory: pytest.TempPathFactory) -> dict[str, Report]:  # noqa: ARG001
    return {
        name: run(path, tmp_path_factory.mktemp(name) / "out", documents=(), jobs=1) for name, path in SURVEYS.items()
    }


def test_the_marks_are_those_of_a_translation() -> None:
    assert _marked("It {a}, of {b}.") == "⟦It ⟧{a}⟦, of ⟧{b}⟦.⟧"
    assert _unmarked("⟦It ⟧stays⟦, of ⟧5 K⟦.⟧").split() == ["stays", "5", "K"]


SAID_BY = (
    "claim",
    "conditions",
    "next visit",
    "statement",
    "indication",
    "refusal",
    "flag",
    "pair",
    "repairs",
    "checklist",
    "asset",
    "season",
)


@pytest.mark.parametrize("place", SAID_BY)
def test_nothing_is_said_past_the_texts(reports: dict[str, Report], place: str) -> None:
    told = {(text, _bare(text, _names(report))) for report in reports.values() for text in _said(report)[place]}
    assert any("⟦" in text for text, _ in told)
    assert {text: left for text, left in told if re.search(r"[^\W\d_]{2}", left)} == {}


def test_every_word_of_the_data_files_is_reached(translated: None) -> None:  # noqa: ARG001
    """But names of classes and patterns, which are codes: they are translated where they are shown."""
    codes = {kind.name for one in criteria.criteria().values() for kind in one.classes}
    codes |= {row["pattern"] for name in ("indications", "pv") for row in _rows(name)}
    reached = {word for text in _loaded() for word in re.findall(r"⟦([^⟦⟧]*)⟧", text)}
    assert TEXTS["tables"].keys() - reached - codes == set()


def _rows(name: str) -> list[dict[str, Any]]:
    """What may be said of a pattern: the rows of a table, and what is said where none fits."""
    table = tomllib.loads((PACKAGE / "assess" / f"{name}.toml").read_text(encoding="utf-8"))
    return [*table["row"], *(one for one in table.values() if isinstance(one, dict))]


def _loaded() -> Iterator[str]:
    """All that may be said in words of the data files."""
    for one in criteria.criteria().values():
        yield from (one.source, one.edition, *(kind.statement for kind in one.classes))
    for limit in limits.limits().values():
        yield from (limit.what, limit.source, limit.edition)
    for asked in (one for group in conditions.requirement_sets() for one in group.requirements):
        yield from (asked.check, asked.short, asked.stated_by, asked.unit, asked.source)
    for look in indication.looks():
        yield from _of_indication(indication._indication(look.pattern, look.says, look.verify_by, {}))
    for what in ("pressure", "reflection", "other_sense", "unclear", "none"):
        yield from _of_indication(indication._said(what, {}))
    for row in _rows("pv"):
        shares = {cue["name"]: cue["for"] for cue in row.get("cue", ())}
        yield from _of_indication(pv.pv_indication(shares | {"centre_across": 0.5}))
    situations = tomllib.loads((PACKAGE / "assess" / "repairs.toml").read_text(encoding="utf-8"))["situation"]
    for urgency, of, flag in product((None, 0, 1, 2, 3, 4), situations, ("", *BLOCKERS)):
        yield from (repairs.action(urgency, of, (flag,)), repairs.inspect_again(urgency, of, (flag,)))
    for measurement in next_visit.measurements():
        unknown = tuple(Sensitivity(left.term, u=1e6, sensitivity=1.0) for left in measurement.leaves)
        judged = Judged(criteria.criteria()["neta-similar"], 1.0, 1.0, unknown)
        yield from (
            measurement.how,
            next_visit._why(measurement, [next_visit.Decision("", (judged,), measurement.lifts)]),
        )
    for item in checklist.asked():
        yield from (item.item, item.stated_by)


def _bare(text: str, names: list[str]) -> str:
    """What is left of a text without what is marked, names of the survey, units, and keys and names of tables."""
    left = _unmarked(text)
    for name in names:
        left = re.sub(rf"(?<!\w){re.escape(name)}(?!\w)", " ", left)
    return " ".join(left.split())


def _names(report: Report) -> list[str]:
    """What is no word of ours, the longest first."""
    frames = report.frames
    survey = {
        *(frame.id for frame in frames),
        *(frame.group for frame in frames if frame.group),
        *(one.id for frame in frames for one in frame.findings),
        *(one.name for frame in frames for one in frame.components),
        *(one.group for frame in frames for one in frame.components if one.group),
        *(asset.id for asset in report.assets),
    }
    quantities = {one.quantity for one in _assessments(report)}
    sky = {"berdahl-martin", "clark-allen", "swinbank"}
    stated_by = {f"survey.{key}" for key in TEXTS["about"]}
    stated_by |= {one.stated_by for group in conditions.requirement_sets() for one in group.requirements}
    stated_by = {key for key in stated_by if key and not has_words(key)}
    cited = {one.source for one in conditions.requirement_sets() for one in one.requirements}
    cited |= {text for one in criteria.criteria().values() for text in (one.source, one.edition)}
    cited |= {text for one in limits.limits().values() for text in (one.source, one.edition, one.name)}
    survey |= {frame.source.file for frame in frames} | {method for of in criteria.METHODS.values() for method in of}
    survey |= _own_words()
    names = survey | quantities | sky | stated_by | set(UNITS.values()) | set(criteria.MARKS)
    names |= {text for text in cited if "⟦" not in text and (not has_words(text) or text in limits.limits())}
    names |= {item.where for item in report.checklist if not has_words(item.where)}
    return sorted(names, key=len, reverse=True)


@cache
def _own_words() -> set[str]:
    """Sentences and sources of the criteria that the samples bring along."""
    own = [tomllib.loads(text) for path in SURVEYS.values() for _, text in own_criteria(load_survey(path))]
    return {
        text
        for table in own
        for text in (table["source"], table["edition"], *(row["statement"] for row in table["classes"]))
    }


def _said(report: Report) -> dict[str, list[str]]:
    """Everything that a report says in words, by where it stands."""
    frames, items = report.frames, [one for frame in report.frames for one in (*frame.findings, *frame.components)]
    seasons = [total for one in report.seasons for total in (one.findings_total, one.elements_total) if total]
    parts = [one for frame in frames for one in frame.components if one.limit]
    return {
        "claim": [report.claim_reason, *(frame.claim_reason for frame in frames)],
        "conditions": [text for one in report.conditions_review for text in (one.check, one.requirement, one.source)],
        "next visit": [text for one in report.next_visit for text in (one.measurement, one.why)],
        "statement": [
            *(text for one in _assessments(report) for text in (one.statement, one.source)),
            *(one.limit.source for one in parts if one.limit),
        ],
        "indication": [text for one in items if one.indication for text in _of_indication(one.indication)],
        "refusal": [text for frame in frames for text in _refusals(frame)],
        "flag": [_detail(flag) for holder in (*frames, *items) for flag in holder.flags],
        "pair": [frame.pair.reason for frame in frames if frame.pair] + _refused_pairs(),
        "repairs": [
            *(text for one in report.repairs for text in (one.action, one.inspect_again)),
            *(one.what for one in report.repairs),
        ],
        "checklist": [text for one in report.checklist for text in (one.item, one.where)],
        "asset": [asset.reason for asset in (*report.assets, *_unseen()) if asset.reason not in (None, *_stated())],
        "season": [total.of for total in seasons],
    }


def _assessments(report: Report) -> list[Assessment]:
    return [one for frame in report.frames for item in (*frame.findings, *frame.components) for one in item.assessments]


def _of_indication(one: Indication) -> tuple[str, str]:
    return one.statement, one.verify_by


def _refusals(frame: FrameReport) -> list[str]:
    holders = [*frame.findings, *frame.strips, *([frame.reference] if frame.reference else [])]
    air = [frame.room_air.how] if frame.room_air and frame.room_air.how != "measured" else []
    return [*air, *(why for holder in holders for why in holder.refusals.values())]


def _detail(flag: str) -> str:
    """What a flag says: nothing where it is a code, what follows its colon where that is detail, else all of it."""
    code, _, detail = flag.partition(": ")
    return detail if code in TEXTS["flags"] else flag


@cache
def _stated() -> set[str | None]:
    """Why an asset was not inspected, as the samples state it."""
    return {asset.not_inspected for path in SURVEYS.values() for asset in load_survey(path).assets}


def _unseen() -> list[AssetReport]:
    """The assets of the samples, had no frame been analysed."""
    return [asset for path in SURVEYS.values() for asset in _assets(load_survey(path), ())]


def _refused_pairs() -> list[str]:
    """Reasons of pairs that cannot be compared; those of the samples can."""
    noise = np.random.default_rng(5).normal(size=(2, 120, 160))
    pairs = [(noise[0], noise[1]), (noise[0], noise[0][:60]), (noise[0, :4], noise[0, :4]), (np.ones((120, 160)),) * 2]
    return [register(moving, fixed).reason for moving, fixed in pairs]
