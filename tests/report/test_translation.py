"""A translation is one file: with every word of it in another script, the documents show no word of English."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import replace
from importlib.resources import files
from pathlib import Path
from typing import Any

import pytest
from PIL import Image
from report.translation import ENGLISH, Seen, labels, told_by, translated, untranslated

from irsurvey import texts
from irsurvey.assess.conditions import requirement_sets
from irsurvey.assess.criteria import criteria
from irsurvey.assess.limits import limits
from irsurvey.model import Decision, FrameReport, FrameTask, Maps, Report, Review
from irsurvey.report import change_picture, frame_files, html, picture, pictures
from irsurvey.report.kept import kept
from irsurvey.report.pdf import blocks, document, drawings, front
from irsurvey.report.pdf.runs import Run
from irsurvey.report.pdf.story import gather
from irsurvey.report.pdf.volumes import summary_of, volume_of, whole
from irsurvey.report.review.standing import numbers_of, reviewable, with_reviews
from irsurvey.report.sentences import _quantity

Told = tuple[Report, tuple[FrameTask, ...], Path]

OTHER: dict[str, Any] = {**translated(ENGLISH), "document": {"language": "x-test"}}


@pytest.fixture(params=["house", "switch room", "house sample", "pump station sample"])
def told(request: pytest.FixtureRequest) -> Told:
    """A report with its pictures as an English run left them: two of invented records, two of the sample surveys."""
    if request.param.endswith("sample"):
        report, out = request.getfixturevalue("sample_runs")[request.param.removesuffix(" sample").replace(" ", "_")]
        return report, kept(out), out
    report = request.getfixturevalue("report" if request.param == "house" else "switch_room")
    out = request.getfixturevalue("tmp_path")
    wall, board = (request.getfixturevalue(name) for name in ("wall_maps", "board_maps"))
    for frame in report.frames:
        if frame.status != "failed":
            frame_files.write(frame, board if frame.id == "S01" else wall, out)
    photo = out / "photo.jpg"
    Image.new("RGB", (160, 120), (90, 140, 60)).save(photo)
    tasks = tuple(replace(task, photo_path=str(photo)) for task in request.getfixturevalue("tasks"))
    return reviewed(report), tasks, out


def reviewed(report: Report) -> Report:
    """The report with a decision of each kind, one of them on numbers that moved and one on what is gone."""
    kinds = ("rejected", "accepted", "reclassified", "open", "commented")
    decisions = []
    for place, one in enumerate(reviewable(report)):
        kind = kinds[place % len(kinds)]
        urgency = 2 if kind == "reclassified" else None
        on = {} if place == 1 else numbers_of(one.item)
        decisions.append(Decision(one.key, one.id, one.frame.id, kind, None, None, urgency, "Seen again.", on))
    decisions.append(Decision("S01@9,9", "Lug that went", "S01", "accepted", None, None, None, "", {}))
    return with_reviews(report, (Review("R. Viewer", "2026-02-01", "0" * 64, tuple(decisions)),))


@pytest.fixture
def alt(told: Told) -> list[str]:
    """What the pictures of the run say of themselves; it was said when they were drawn."""
    report, _, out = told
    found = (pictures.stored(f, out, name) for f in report.frames for name in ("annotated.png", "change.png"))
    return [one.words for one in found if one]


def translate(monkeypatch: pytest.MonkeyPatch) -> None:
    """From here on all words are in another script, save those of the tables of data, which the records hold, too."""
    for english in (criteria, limits, requirement_sets, _quantity):
        english()  # read once, and kept
    monkeypatch.setattr(texts, "_texts", lambda: OTHER)


def pages_of(report: Report, tasks: tuple[FrameTask, ...], out: Path) -> Iterator[str]:
    """The report as one page; of a few frames also as many pages, its tables cut short."""
    yield html.page(report, tasks, out)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(html, "IN_ONE_FILE", 0)
        patch.setattr(html, "MOST_ROWS", 1)
        pages = html._Pages.of(report, tasks, out)
        yield pages.of_report()
        yield from (pages.of_frame(frame) for frame in report.frames[:4])


def test_the_page_shows_no_word_that_is_not_of_the_table(
    told: Told, alt: list[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    report, tasks, out = told
    known = told_by(report, tasks, alt)
    translate(monkeypatch)
    for page in pages_of(report, tasks, out):
        seen = Seen(page)
        assert '<html lang="x-test">' in page
        assert len(seen.pieces) > 30
        assert untranslated(seen.pieces, known) == []


def test_what_scripts_say_is_of_the_table(told: Told, monkeypatch: pytest.MonkeyPatch) -> None:
    report, tasks, out = told
    known = told_by(report, tasks)
    translate(monkeypatch)
    data = Seen(html.page(report, tasks, out)).data
    words = [one["words"] for one in data if "words" in one]
    assert words == [OTHER["tools"], OTHER["review"]]
    urgencies = [word for one in data for word in one.get("urgencies", {}).values()]
    assert len(urgencies) >= 2 * 5  # of the live tools, and of the desk
    shown = [*(text for one in data if "optics_names" in one for text in labels(one)), *urgencies]
    assert untranslated(shown, known) == []


def test_the_paper_shows_no_word_that_is_not_of_the_table(told: Told, monkeypatch: pytest.MonkeyPatch) -> None:
    report, tasks, out = told
    known = told_by(report, tasks)
    translate(monkeypatch)
    drawn = written(monkeypatch)
    whole(gather(report, tasks, out))
    few = gather(replace(report, frames=report.frames[:2]), tasks, out)
    places = {frame.id: volume_of(few, [frame], 1, 2)[1][frame.id] for frame in few.report.frames}
    summary_of(few, {id_: (1, page) for id_, page in places.items()}, 2)
    assert len(drawn) > 100
    assert untranslated(drawn, known) == []


def written(monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """Where every text that is set on paper is put down, whole, before it is broken into lines."""
    drawn: list[str] = []

    def noting(broken: Callable[..., Any]) -> Callable[..., Any]:
        def noted(runs: Any, width: float) -> Any:
            runs = tuple(runs)
            drawn.append(" ".join("".join(run.text for run in runs if isinstance(run, Run)).split()))
            return broken(runs, width)

        return noted

    for module in (blocks, document, front):
        monkeypatch.setattr(module, "broken", noting(module.broken))
    letters = drawings._Frame.letters

    def lettered(self: drawings._Frame, words: str, x: float, y: float, share: float) -> None:
        drawn.append(words)
        letters(self, words, x, y, share)

    monkeypatch.setattr(drawings._Frame, "letters", lettered)
    return drawn


def test_pictures_say_what_they_show_in_words_of_the_table(
    report: Report, wall_maps: Maps, board_maps: Maps, monkeypatch: pytest.MonkeyPatch
) -> None:
    wall, *_, board = report.frames
    translate(monkeypatch)
    assert wall_maps.change is not None
    images = [picture.annotated(wall, wall_maps), picture.annotated(board, board_maps)]
    images += [picture.annotated(report.frames[1], replace(wall_maps, labels=wall_maps.labels * 0))]
    images += [change_picture.changed(wall, wall_maps.change), change_picture.changed(bare(wall), wall_maps.change)]
    said = [str(image.info["Description"]) for image in images]
    assert untranslated(said, [*told_by(report, ()), picture.COLORMAP, change_picture.COLORMAP]) == []


def bare(frame: FrameReport) -> FrameReport:
    """A frame whose pair shows no change."""
    assert frame.pair
    return replace(frame, pair=replace(frame.pair, changes=()))


def test_in_english_the_page_is_full_of_such_words(told: Told) -> None:
    report, tasks, out = told
    assert len(untranslated(Seen(html.page(report, tasks, out)).pieces, told_by(report, tasks))) > 100


TEMPLATES = sorted(
    (place for place in (files("irsurvey.report") / "templates").iterdir() if place.name.endswith(".j2")),
    key=lambda place: place.name,
)


@pytest.mark.parametrize("template", TEMPLATES, ids=lambda place: place.name)
def test_templates_hold_no_words(template: Any) -> None:
    # between tags, and in what is said of an element; also on paths that no report above takes
    text = re.sub(r"\{#.*?#\}|\{%.*?%\}|\{\{.*?\}\}", "", template.read_text(encoding="utf-8"), flags=re.DOTALL)
    text = re.sub(r"<(style|script)\b.*?</\1>", "", text, flags=re.DOTALL)
    text = re.sub(r'data-(value|urgency|asks|outcome)="[^"]*"', "", text)  # of macros that make attributes
    text = re.sub(r"\b(component|finding|frame)-", "", text)  # and places
    said = re.findall(r'(?:aria-label|alt|title|data-label|placeholder)="([^"]*)"', text)
    between = re.sub(r"<[^>]*>", " ", text)
    assert re.findall(r"[A-Za-z]{2,}", between) == []
    assert re.findall(r"[A-Za-z]{2,}", " ".join(said)) == []
