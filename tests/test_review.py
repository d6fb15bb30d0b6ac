"""A reviewer's decisions: read with all faults at once, kept over re-runs, asked again where a number moved."""

from __future__ import annotations

import csv
import json
import re
import shutil
from collections.abc import Callable
from copy import deepcopy
from dataclasses import replace
from math import nan
from pathlib import Path
from typing import Any

import jsonschema
import numpy as np
import pytest
from click.testing import CliRunner, Result
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from PIL import Image
from report.conftest import report as made_up  # noqa: F401 (a fixture)
from samples import SURVEYS

from irsurvey.assess.criteria import criteria
from irsurvey.cli import main
from irsurvey.errors import Fault, OutputError, UsageError
from irsurvey.model import Decision, Estimate, FrameTask, Report, Review
from irsurvey.report.json import report_schema, text
from irsurvey.report.kept import keep
from irsurvey.report.reading import read_report
from irsurvey.report.review import decisions
from irsurvey.report.review.standing import cells, identity, moved, numbers_of, reviewable, with_reviews
from irsurvey.report.review.words import InWords
from irsurvey.review import Applied, apply
from irsurvey.run import load_survey, run

SURVEY = """
format = 1
[survey]
title = "Lodge"
kind = "electrical"
[camera]
band_um = [7.5, 13.0]
ifov_mrad = 1.5
signal = { quantity = "apparent-temperature", unit = "C" }
[conditions]
air_c = 20.0
reflected_c = 20.0
distance_m = 2.0
relative_humidity_percent = 50
[target]
emissivity = 0.95
[[frame]]
id = "one"
file = "one.npy"
photo = "one.jpg"
reference = { polygon = [[2, 2], [30, 2], [30, 57], [2, 57]] }
[[frame]]
id = "two"
file = "two.npy"
[[frame.component]]
name = "lug, left"
group = "lugs"
load_a = 100
rated_a = 200
polygon = [[4, 4], [20, 4], [20, 30], [4, 30]]
[[frame.component]]
name = "lug, right"
group = "lugs"
load_a = 100
rated_a = 200
polygon = [[40, 4], [60, 4], [60, 30], [40, 30]]
"""


def panel(rise: float, seed: int) -> np.ndarray[Any, np.dtype[np.float32]]:
    """A panel at 30 °C with 0.05 K noise and one warmer rectangle."""
    celsius = np.random.default_rng(seed).normal(30.0, 0.05, (60, 80))
    celsius[6:28, 42:58] += rise
    return celsius.astype(np.float32)


def site(folder: Path, rise: float = 8.0) -> Path:
    """A survey with a finding in one frame and two components in the other; the survey file."""
    folder.mkdir(exist_ok=True)
    for seed, name in enumerate(("one", "two")):
        np.save(folder / f"{name}.npy", panel(rise, seed))
    Image.fromarray(np.random.default_rng(7).integers(0, 255, (90, 120, 3), dtype=np.uint8)).save(folder / "one.jpg")
    (folder / "survey.toml").write_text(SURVEY, encoding="utf-8")
    return folder / "survey.toml"


@pytest.fixture(scope="module")
def first(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of a survey that was run once into `out` beside it."""
    folder = tmp_path_factory.mktemp("lodge")
    run(site(folder), folder / "out")
    return folder


@pytest.fixture
def out(first: Path, tmp_path: Path) -> Path:
    """A report of its own for one test, without its survey."""
    return Path(shutil.copytree(first / "out", tmp_path / "out"))


def contents(folder: Path) -> dict[str, bytes]:
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def words(page: bytes) -> str:
    """What people read on a page."""
    return re.sub(r"<script.*?</script>|<[^>]*>", "", page.decode("utf-8"), flags=re.DOTALL)


def exported(report: Report, /, *made: dict[str, Any], **top: Any) -> dict[str, Any]:
    """A decisions file as the page writes it; `made` in the order of the findings and components, {} skips one."""
    entries = []
    for one, own in zip(reviewable(report), made, strict=False):
        on = {name: value and {"value": value.value, "u": value.u} for name, value in numbers_of(one.item).items()}
        entry = {"key": one.key, "id": one.id, "frame": one.frame.id, "comment": "", "on": on}
        if own:
            entries.append({**entry, **own})
    return {
        "format": 1,
        "tool": report.tool,
        "survey": "Lodge",
        "report": identity(report),
        "reviewer": "A. Reviewer",
        "date": "2026-02-03",
        "decisions": entries,
        **top,
    }


ACCEPT, REJECT = {"decision": "accepted"}, {"decision": "rejected", "comment": "A reflection."}
LOWER = {"decision": "reclassified", "urgency": 1, "comment": "Load was falling."}


def applied(out: Path, *made: dict[str, Any], **top: Any) -> Applied:
    path = out.parent / "decisions.json"
    path.write_text(json.dumps(exported(read_report(out / "report.json"), *made, **top)), encoding="utf-8")
    return apply(out, path)


def statuses(report: Report) -> list[str]:
    return [status.status for status in report.review_status]


# reading back


def test_a_report_read_back_is_the_report(made_up: Report, first: Path) -> None:  # noqa: F811
    for report in (made_up, read_report(first / "out" / "report.json")):
        path = first / "copy.json"
        path.write_text(text(report), encoding="utf-8")
        read = read_report(path)
        assert text(read) == text(report)
        path.write_text(text(read), encoding="utf-8")
        assert read_report(path) == read


def test_null_where_a_number_must_be_is_read_as_not_a_number(made_up: Report, tmp_path: Path) -> None:  # noqa: F811
    finding = made_up.frames[0].findings[0]
    assert finding.indication is not None
    finding = replace(finding, indication=replace(finding.indication, evidence={"contrast_k": nan, "length_m": 1.5}))
    frame = replace(made_up.frames[0], findings=(finding,))
    (tmp_path / "report.json").write_text(text(replace(made_up, frames=(frame,))), encoding="utf-8")
    read = read_report(tmp_path / "report.json").frames[0].findings[0].indication
    assert read is not None
    assert np.isnan(read.evidence["contrast_k"])
    assert read.evidence["length_m"] == 1.5


@pytest.mark.parametrize(
    ("change", "complaint"),
    [
        (lambda text: text[:200], "JSON that a run wrote"),
        (lambda text: text.replace('"status": "analysed"', '"status": 3', 1), "frames[0].status: expected text, got 3"),
        (lambda text: text.replace('"findings": [', '"finding": [', 1), "frames[0].findings: expected a value"),
        (lambda text: text.replace('"format": 1', '"format": NaN', 1), "NaN is no number of JSON"),
        (lambda _: "[" * 100_000, "JSON that a run wrote"),
        (lambda text: text.replace('"id": "one"', '"id": "../../one"'), "ids of letters"),
    ],
)
def test_a_damaged_report_is_told_and_nothing_is_written(
    out: Path, change: Callable[[str], str], complaint: str
) -> None:
    good = exported(read_report(out / "report.json"), ACCEPT)
    (out / "report.json").write_text(change((out / "report.json").read_text("utf-8")), encoding="utf-8")
    (out.parent / "decisions.json").write_text(json.dumps(good), encoding="utf-8")
    before = contents(out)
    with pytest.raises(OutputError) as error:
        apply(out, out.parent / "decisions.json")
    assert complaint in str(error.value)
    assert contents(out) == before


@pytest.mark.parametrize("survey", SURVEYS.values(), ids=list(SURVEYS))
def test_tasks_kept_for_documents_come_back_whole_but_for_where_their_files_lay(survey: Path, tmp_path: Path) -> None:
    tasks = load_survey(survey).tasks

    def bare(task: FrameTask) -> FrameTask:
        pair, window = task.pair, task.window_frames
        pair = pair and replace(pair, partner=bare(pair.partner))
        window = window and replace(window, without=bare(window.without), through=bare(window.through))
        return replace(task, path="", photo_path=None, pair=pair, window_frames=window)

    assert keep(tasks, tmp_path) == tuple(map(bare, tasks))
    assert str(survey.parent) not in (tmp_path / "documents.json").read_text("utf-8")


# applying


def test_decisions_stand_beside_what_was_measured(out: Path) -> None:
    before = json.loads((out / "report.json").read_bytes())
    done = applied(out, ACCEPT, LOWER, REJECT)
    after = json.loads((out / "report.json").read_bytes())
    assert statuses(done.report) == ["accepted", "reclassified", "rejected"]
    (review,) = after.pop("reviews")
    assert (review["reviewer"], review["date"]) == ("A. Reviewer", "2026-02-03")
    assert [one["comment"] for one in review["decisions"]] == ["", "Load was falling.", "A reflection."]
    assert [one["status"] for one in after.pop("review_status")] == ["accepted", "reclassified", "rejected"]
    assert before.pop("reviews") == before.pop("review_status") == []
    assert after == before


def test_a_reviewed_report_is_valid_under_the_printed_schema(out: Path) -> None:
    applied(out, ACCEPT, LOWER)
    document = json.loads((out / "report.json").read_text("utf-8"))
    jsonschema.Draft202012Validator(report_schema()).validate(document)


def test_documents_are_made_again_without_the_survey_as_a_run_would_make_them(first: Path, out: Path) -> None:
    applied(out, ACCEPT, LOWER)
    again = first.parent / f"{first.name}-again"
    shutil.copytree(first, again, dirs_exist_ok=True)
    shutil.copy(out / "review.json", again / "out")
    run(again / "survey.toml", again / "out")
    made, ran = contents(out), contents(again / "out")
    # report.json keeps seven digits: in what is drawn from it the last one may differ, in what is read it does not
    assert words(made.pop("report.html")) == words(ran.pop("report.html"))
    assert made == ran
    assert b"image/jpeg" in (out / "report.html").read_bytes()  # the photograph is there still
    shutil.rmtree(again)


def test_only_documents_that_were_there_are_made(out: Path) -> None:
    (out / "report.html").unlink()
    done = applied(out, ACCEPT)
    assert "html" not in done.documents
    assert not (out / "report.html").exists()
    assert {"json", "csv"} <= set(done.documents)


def test_a_table_that_begins_with_a_byte_order_mark_still_does(first: Path, out: Path) -> None:
    run(first / "survey.toml", out, documents=("csv-bom",))
    assert "csv-bom" in applied(out, ACCEPT).documents
    assert (out / "findings.csv").read_bytes().startswith(b"\xef\xbb\xbf")
    run(first / "survey.toml", out)
    assert "csv-bom" not in applied(out, ACCEPT).documents


def test_the_same_file_applied_twice_counts_once_and_changes_no_byte(out: Path) -> None:
    assert applied(out, ACCEPT, LOWER).is_new
    once = contents(out)
    done = applied(out, ACCEPT, LOWER)
    assert not done.is_new
    assert len(done.report.reviews) == 1
    assert contents(out) == once


def test_what_is_not_decided_is_listed_as_open(out: Path) -> None:
    done = applied(out, {}, {"decision": "commented", "comment": "Ask the operator."}, ACCEPT)
    assert [(status.frame, status.id) for status in done.open] == [("one", "one-1"), ("two", "lug, left")]


def test_a_class_is_one_of_a_criterion_that_judges_it_and_brings_its_urgency(out: Path) -> None:
    component = read_report(out / "report.json").frames[1].components[1]
    for assessment in component.assessments:
        for kind in criteria()[assessment.criterion].classes:
            given = {"decision": "reclassified", "class": kind.name, "criterion": assessment.criterion}
            done = applied(out, {}, {}, given)
            last = done.report.review_status[2]
            assert (last.class_, last.urgency) == (kind.name, kind.urgency)
    assert component.assessments


def test_of_several_reviewers_the_later_date_counts_and_all_are_kept_in_order(out: Path) -> None:
    applied(out, ACCEPT, reviewer="Second", date="2026-02-05")
    applied(out, REJECT, reviewer="First", date="2026-02-04")
    done = applied(out, {"decision": "commented", "comment": "Seen."}, reviewer="Third", date="2026-02-06")
    assert [review.reviewer for review in done.report.reviews] == ["First", "Second", "Third"]
    assert (done.report.review_status[0].status, done.report.review_status[0].reviewer) == ("accepted", "Second")
    done = applied(out, REJECT, reviewer="Fourth", date="2026-02-06")  # of one date the one that came later
    assert (done.report.review_status[0].status, done.report.review_status[0].reviewer) == ("rejected", "Fourth")
    done = applied(out, {"decision": "open", "comment": "Wait."}, reviewer="Fifth", date="2026-02-07")
    assert done.open[0].reviewer == "Fifth"


# another version of the report


def rerun(out: Path, rise: float) -> Report:
    """The report after a run over frames whose parts are so much warmer, into the same folder."""
    return run(site(out.parent / "changed", rise), out)


def test_a_re_run_carries_decisions_over_and_asks_again_where_a_number_moved_beyond_its_u(
    first: Path, out: Path
) -> None:
    applied(out, ACCEPT, LOWER, REJECT)
    assert statuses(rerun(out, 8.0)) == ["accepted", "reclassified", "rejected"]
    report = rerun(out, 8.02)  # U of these differences is more than 0.1 K
    before = read_report(first / "out" / "report.json")
    assert identity(report) != identity(before)
    for old, new in zip(reviewable(before), reviewable(report), strict=True):
        for name, value in numbers_of(old.item).items():
            now = numbers_of(new.item)[name]
            if value and now and value.u and now.u:
                assert abs(value.value - now.value) <= 2 * min(value.u, now.u), (old.key, name)
    assert statuses(report) == ["accepted", "reclassified", "rejected"]
    report = rerun(out, 14.0)
    assert report.review_status[0].status == report.review_status[2].status == "asked again"
    assert "mean_delta_k" in report.review_status[0].moved
    assert "max_c" in report.review_status[2].moved
    assert report.review_status[1].status == "reclassified"  # that lug is as it was
    assert report.reviews == read_report(out / "report.json").reviews


def test_a_decision_on_what_a_re_run_does_not_find_is_listed_and_kept(out: Path) -> None:
    applied(out, ACCEPT)
    report = rerun(out, 0.0)
    assert [(status.status, status.id) for status in report.review_status if status.status == "gone"] == [
        ("gone", "one-1")
    ]
    assert report.reviews[0].decisions[0].decision == "accepted"
    assert rerun(out, 8.0).review_status[0].status == "accepted"  # found again


def test_decisions_made_before_a_re_run_are_applied_after_it(out: Path) -> None:
    made = exported(read_report(out / "report.json"), ACCEPT, LOWER, REJECT)
    rerun(out, 14.0)
    (out.parent / "decisions.json").write_text(json.dumps(made), encoding="utf-8")
    done = apply(out, out.parent / "decisions.json")
    assert not done.is_same
    assert statuses(done.report) == ["asked again", "reclassified", "asked again"]


@pytest.mark.parametrize(
    ("then", "now", "is_asked"),
    [
        (Estimate(-3.0, 0.1), Estimate(-3.19, 0.1), False),  # within 2u = 0.2
        (Estimate(-3.0, 0.1), Estimate(-3.21, 0.1), True),
        (Estimate(-3.0, 0.1), Estimate(-3.19, 0.05), True),  # beyond U as it is now
        (Estimate(-3.0, 0.05), Estimate(-3.19, 0.1), True),  # beyond U as it was then
        (Estimate(-3.0, None), Estimate(-3.0, None), False),  # a bound that stayed
        (Estimate(-3.0, None), Estimate(-3.1, None), True),
        (Estimate(-3.0, 0.1), None, True),
        (None, Estimate(-3.0, 0.1), True),
        (None, None, False),
    ],
)
def test_a_number_has_moved_when_it_left_either_of_its_intervals(
    made_up: Report,  # noqa: F811
    then: Estimate | None,
    now: Estimate | None,
    is_asked: bool,
) -> None:
    finding = replace(made_up.frames[0].findings[0], mean_delta_k=now)
    assert moved(finding, {"mean_delta_k": then}) == (("mean_delta_k",) if is_asked else ())


def test_another_urgency_is_asked_again_whatever_its_numbers_do(made_up: Report) -> None:  # noqa: F811
    finding = made_up.frames[0].findings[0]
    then = numbers_of(finding)
    assert moved(finding, then) == ()
    assert moved(replace(finding, urgency=(finding.urgency or 0) + 1), then) == ("urgency",)
    assert moved(replace(finding, urgency=None), then) == ("urgency",)


def test_a_decision_without_numbers_cannot_be_carried_over(made_up: Report) -> None:  # noqa: F811
    finding = made_up.frames[0].findings[0]
    made = Decision(finding.key, finding.id, "F01", "accepted", None, None, None, "", {})
    report = with_reviews(made_up, [Review("A", "2026-02-03", "0" * 64, (made,))])
    assert report.review_status[0].status == "asked again"


def test_the_identity_is_that_of_what_decisions_are_made_on(made_up: Report) -> None:  # noqa: F811
    frame = made_up.frames[0]
    finding = frame.findings[0]

    def changed(**fields: Any) -> Report:
        return replace(made_up, frames=(replace(frame, findings=(replace(finding, **fields),)), *made_up.frames[1:]))

    same = identity(changed())
    assert identity(with_reviews(changed(), [Review("A", "2026-02-03", same, ())])) == same
    assert identity(changed(mean_delta_k=Estimate(-2.6, 0.118))) != same
    assert identity(changed(key="elsewhere")) != same
    assert identity(changed(urgency=4)) != same


def test_reviews_survive_without_their_own_file_too(out: Path) -> None:
    applied(out, ACCEPT)
    (out / "review.json").unlink()
    done = applied(out, {}, REJECT, reviewer="B")
    assert statuses(done.report)[:2] == ["accepted", "rejected"]


def test_a_damaged_review_file_ends_a_run_before_it_begins(first: Path, out: Path) -> None:
    applied(out, ACCEPT)
    (out / "review.json").write_text('{"format": 1, "reviews": [{"reviewer": 3}]}', encoding="utf-8")
    before = contents(out)
    with pytest.raises(OutputError, match=r"review\.json\.reviews\[0\]\.reviewer: expected text, got 3"):
        run(first / "survey.toml", out)
    assert contents(out) == before


def test_a_table_of_results_can_say_how_each_was_reviewed(out: Path) -> None:
    report = read_report(out / "report.json")
    assert cells(report) == {}
    told = cells(applied(out, ACCEPT, LOWER).report)
    assert [tuple(row.values()) for row in told.values()] == [
        ("accepted", None, None, "A. Reviewer", "2026-02-03", None),
        ("reclassified", None, 1, "A. Reviewer", "2026-02-03", "Load was falling."),
        ("open", None, None, None, None, None),
    ]


def test_what_moved_is_told_as_the_survey_asks_numbers_and_days_to_be_written(made_up: Report) -> None:  # noqa: F811
    finding = made_up.frames[0].findings[0]
    then = Estimate(-10.0, 0.118)
    made = Decision(finding.key, finding.id, "F01", "accepted", None, None, None, "", {"mean_delta_k": then})
    survey = {"survey": {"title": "x", "display_units": "us", "decimal_comma": True, "date_format": "%d.%m.%Y"}}
    report = with_reviews(replace(made_up, survey=survey), [Review("A", "2026-02-03", "0" * 64, (made,))])
    told = InWords(report)
    # 1.8 × (−10.0 ± 0.236) and 1.8 × (−2.5341 ± 0.236) °F, by hand
    assert told.again(finding.key).replace("\u00a0", " ") == (
        "Asked again: mean ΔT was −18,00 ± 0,42 °F and is −4,56 ± 0,42 °F since that decision."
    )
    assert told.day(told.said(finding.key)[0].date) == "03.02.2026"


# faults


def faults(out: Path, content: object) -> list[str]:
    """What is told of a decisions file; nothing may have been written."""
    path = out.parent / "decisions.json"
    path.write_text(content if isinstance(content, str) else json.dumps(content), encoding="utf-8")
    before = contents(out)
    with pytest.raises(UsageError) as error:
        apply(out, path)
    assert contents(out) == before
    return [str(fault) for fault in error.value.faults]


@pytest.mark.parametrize(
    ("change", "complaint"),
    [
        (lambda c: c.update(format=2), "format: expected 1, got 2"),
        (lambda c: c.update(format=True), "format: expected 1, got true"),
        (lambda c: c.update(tool={"name": "other"}), 'tool.name: expected "irsurvey", got "other"'),
        (lambda c: c.pop("reviewer"), "reviewer: expected a value, got nothing"),
        (lambda c: c.update(reviewer="  "), "reviewer: expected text that is not empty"),
        (lambda c: c.update(reviewer=["A"]), "reviewer: expected text, got a list"),
        (lambda c: c.update(date="03.02.2026"), 'date: expected a date such as "2026-01-18", got "03.02.2026"'),
        (lambda c: c.update(date="20260203"), "date: expected a date"),
        (lambda c: c.update(date="2026-02-30"), "date: expected a date"),
        (lambda c: c.update(report="abc"), 'report: expected the 64 figures that name a report, got "abc"'),
        (lambda c: c.update(decisions=[]), "decisions: expected at least one decision"),
        (lambda c: c.update(decisions={}), "decisions: expected a list, got a table"),
        (lambda c: c.update(reviwer="x"), 'a known key, got the unknown key "reviwer"; did you mean "reviewer"?'),
        (lambda c: c["decisions"].append(3), "decisions[#4]: expected a table, got 3"),
        (lambda c: c["decisions"].append(c["decisions"][0]), "decisions[#1].key: expected one decision for each key"),
        (lambda c: c["decisions"][1].pop("on"), "decisions[#2].on: expected a value, got nothing"),
        (
            lambda c: c["decisions"][1].update(path="/etc"),
            'decisions[#2]: expected a known key, got the unknown key "path"',
        ),
        (lambda c: c["decisions"][0].update(decision="accept"), 'got "accept"; did you mean "accepted"?'),
        (lambda c: c["decisions"][0].update(decision={"a": 1}), "decision: expected"),
        (lambda c: c["decisions"][0].update(decision="commented"), "comment: expected what is said of it"),
        (
            lambda c: c["decisions"][0].update(key="one:hot:0-0"),
            'key: expected a key of this report, got "one:hot:0-0"',
        ),
        (lambda c: c["decisions"][0].update(id="one-2"), 'id: expected "one-1", got "one-2"'),
        (lambda c: c["decisions"][0].update(frame="two"), 'frame: expected "one", got "two"'),
        (lambda c: c["decisions"][0].update(urgency=2), "urgency: expected nothing, as it is not reclassified, got 2"),
        (lambda c: c["decisions"][1].pop("urgency"), "a class or an urgency it is reclassified to, got neither"),
        (lambda c: c["decisions"][1].update({"class": "x"}), "a class or an urgency it is reclassified to, got both"),
        (lambda c: c["decisions"][1].update(urgency=5), "urgency: expected 0, 1, 2, 3 or 4, got 5"),
        (lambda c: c["decisions"][1].update(urgency=True), "urgency: expected 0, 1, 2, 3 or 4, got true"),
        (lambda c: c["decisions"][1].update(criterion="neta-similar"), "criterion: expected nothing without a class"),
        (
            lambda c: c["decisions"][1].update(urgency=None, **{"class": "nonsense"}),
            "class: expected a class of its crit",
        ),
        (
            lambda c: c["decisions"][1].update(urgency=None, criterion="naval", **{"class": "x"}),
            'criterion: expected a criterion that judges it, got "naval"',
        ),
        (
            lambda c: c["decisions"][0].update(comment="x" * 20_001),
            "comment: expected text of at most 20000 characters",
        ),
        (lambda c: c["decisions"][0].update(comment=3), "comment: expected text, got 3"),
        (lambda c: c["decisions"][0]["on"].update(max_c={"value": "1", "u": 0}), "on.max_c.value: expected a number"),
        (
            lambda c: c["decisions"][0]["on"].update(max_c={"value": 1, "u": -1}),
            "on.max_c.u: expected a number of at least",
        ),
        (
            lambda c: c["decisions"][0]["on"].update(max_c={"value": 10**400, "u": 1}),
            "on.max_c.value: expected a number",
        ),
        (
            lambda c: c["decisions"][0]["on"].update(max_c=1.0),
            'on.max_c: expected {"value": …, "u": …} or null, got 1.0',
        ),
        (
            lambda c: c["decisions"][0]["on"].update(mean_k=None),
            "on.mean_k: expected a number of a finding or component",
        ),
        (lambda c: c["decisions"][0].update(on=[]), "on: expected a table of numbers, got a list"),
    ],
)
def test_what_is_wrong_with_a_decisions_file_is_told_with_its_place(
    out: Path, change: Callable[[dict[str, Any]], object], complaint: str
) -> None:
    content = deepcopy(exported(read_report(out / "report.json"), ACCEPT, LOWER, REJECT))
    change(content)
    told = faults(out, content)
    assert len(told) == 1, told
    assert complaint in told[0]
    assert told[0].startswith("decisions.json: ")


@pytest.mark.parametrize(
    ("content", "complaint"),
    [
        ("", "a decisions file in JSON"),
        ("[]", "a decisions file, a table of its own, got a list"),
        ('{"format": 1, "format": 1}', 'the key "format" stands twice'),
        ('{"format": Infinity}', "Infinity is no number of JSON"),
        ("[" * 100_000, "a decisions file in JSON"),
        ('{"format": ' + "1" * 5000 + "}", "a decisions file in JSON"),
    ],
)
def test_what_is_no_decisions_file_is_told(out: Path, content: str, complaint: str) -> None:
    (told,) = faults(out, content)
    assert complaint in told


def test_decisions_on_another_survey_are_refused(out: Path) -> None:
    content = exported(read_report(out / "report.json"), ACCEPT, report="0" * 64, survey="Barn")
    content["decisions"][0]["key"] = "elsewhere:hot:0-0"
    (told,) = faults(out, content)
    assert told.startswith('decisions.json: survey: expected "Lodge", got "Barn"; name the folder of the report')


def test_all_faults_are_told_at_once(out: Path) -> None:
    content = exported(read_report(out / "report.json"), ACCEPT, LOWER, REJECT, reviewer="", date="today")
    content["decisions"][0]["decision"] = "fine"
    content["decisions"][2]["frame"] = "three"
    told = faults(out, content)
    assert len(told) == 4
    assert ["reviewer" in told[0], "date" in told[1], "[#1].decision" in told[2], "[#3].frame" in told[3]] == [True] * 4


JSON = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False) | st.text(max_size=6),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=6), inner, max_size=3),
    max_leaves=8,
)


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_whatever_stands_in_a_decisions_file_it_is_read_or_its_faults_are_told(
    first: Path, tmp_path: Path, data: st.DataObject
) -> None:
    report = read_report(first / "out" / "report.json")
    content: Any = deepcopy(exported(report, ACCEPT, LOWER, REJECT))
    for _ in range(data.draw(st.integers(1, 3))):
        inside = content
        while True:
            keys = list(inside) if isinstance(inside, dict) else range(len(inside))
            place = data.draw(st.sampled_from(keys))
            if isinstance(inside[place], dict | list) and inside[place] and data.draw(st.booleans()):
                inside = inside[place]
                continue
            inside[place] = data.draw(JSON)
            break
    (tmp_path / "decisions.json").write_text(json.dumps(content), encoding="utf-8")
    told: tuple[Fault, ...] = ()
    try:
        review = decisions.read(tmp_path / "decisions.json", report, criteria())
    except UsageError as error:
        told = error.faults
    else:
        text(with_reviews(report, [review])).encode()
    assert all(fault.where.startswith("decisions.json") for fault in told)


# text of people

HOSTILE = (
    "<script>alert(1)</script>\"'</textarea></fieldset>",
    '=HYPERLINK("https://example.org")',
    "\u202eright to left\u202c \u05d1\u05d3\u05d9\u05e7\u05d4",
    "{criterion} {0} %s \\u003c </script> <!--",
    "half a pair \ud800 and \x00\x1b[31m",
    "x" * 10_000,
)


@pytest.mark.parametrize("words", HOSTILE, ids=["markup", "formula", "rtl", "braces", "surrogate", "long"])
def test_text_of_reviewers_is_text_everywhere(out: Path, words: str) -> None:
    done = applied(out, {"decision": "accepted", "comment": words}, LOWER, reviewer=words)
    kept = done.report.reviews[0].decisions[0].comment
    assert kept == words.replace("\ud800", "\ufffd")
    assert json.loads((out / "report.json").read_bytes())["reviews"][0]["decisions"][0]["comment"] == kept
    assert read_report(out / "report.json").reviews == done.report.reviews
    page = (out / "report.html").read_text("utf-8")
    assert "<script>alert(1)" not in page
    with (out / "findings.csv").open(encoding="utf-8", newline="") as stream:
        assert not [cell for row in csv.reader(stream) for cell in row if cell.startswith(("=", "@"))]
    assert not applied(out, {"decision": "accepted", "comment": words}, LOWER, reviewer=words).is_new


# the command


def irsurvey_(*arguments: object) -> Result:
    return CliRunner().invoke(main, [str(argument) for argument in arguments])


def test_the_command_lists_what_is_open_and_ends_with_0(out: Path) -> None:
    path = out.parent / "decisions.json"
    path.write_text(json.dumps(exported(read_report(out / "report.json"), ACCEPT, {}, REJECT)), encoding="utf-8")
    result = irsurvey_("review", "apply", out, path)
    assert result.exit_code == 0
    assert "lug, left" in result.stdout
    assert "nobody decided yet" in result.stdout
    assert "lug, right" not in result.stdout
    assert "1 still open of 3" in result.stdout


def test_the_command_says_what_moved_when_it_asks_again(out: Path) -> None:
    path = out.parent / "decisions.json"
    path.write_text(json.dumps(exported(read_report(out / "report.json"), ACCEPT, LOWER)), encoding="utf-8")
    rerun(out, 14.0)
    result = irsurvey_("review", "apply", out, path)
    assert result.exit_code == 0
    assert "asked again: mean ΔT was 8." in " ".join(result.stdout.split())


def test_the_command_tells_each_fault_in_a_line_and_ends_with_2(out: Path) -> None:
    path = out.parent / "decisions.json"
    content = exported(read_report(out / "report.json"), ACCEPT, reviewer="", date="x\ny")
    path.write_text(json.dumps(content), encoding="utf-8")
    result = irsurvey_("review", "apply", out, path)
    assert result.exit_code == 2
    assert len(result.stderr.splitlines()) == 2
    result = irsurvey_("review", "apply", out, out / "missing.json")
    assert result.exit_code == 2
    assert result.stderr.startswith("missing.json: expected a decisions file, got No such file")
    result = irsurvey_("review", "apply", out.parent, path)
    assert result.exit_code == 2
    assert "report.json: expected a file of a run" in result.stderr
