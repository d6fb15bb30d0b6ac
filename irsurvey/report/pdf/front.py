"""The first pages: the title page, and the contents with their pages."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from irsurvey import texts
from irsurvey.report import pictures
from irsurvey.report.facts import Fact
from irsurvey.report.pdf import drawings
from irsurvey.report.pdf.blocks import BODY, H1, H2, NOTE, facts, heading, paragraph, picture, space, text
from irsurvey.report.pdf.images import image
from irsurvey.report.pdf.layout import BOTTOM, BREADTH, LEFT, TOP, Entry, Layout, Piece, total
from irsurvey.report.pdf.parts import claim, frame_name, frame_place
from irsurvey.report.pdf.runs import AMBER, DEEP, GAP, QUIET, Face, Run, Runs, broken
from irsurvey.report.pdf.story import Story, asked
from irsurvey.report.style import short
from irsurvey.texts import noun, say

if TYPE_CHECKING:
    from irsurvey.report.pdf.paper import Paper

_KIND = Face(8.5, ink=QUIET)
_FIGURE = Face(17, "B", DEEP)
_ALARMING = Face(17, "B", AMBER)
_BAND_Y, _BAND_HEIGHT = 62.0, 2.2
_PICTURE, _LEAST_PICTURE = 112.0, 60.0  # mm: its width, and the height from which it is worth having
_LONG_TITLE = 240  # letters of a title on the first page
_LONG_FACT = 420  # letters of a free text there; report.json has it all
_PAGE_NUMBER = 12.0  # mm, of the column of page numbers


@dataclass(frozen=True, slots=True)
class Listed:
    """A line of the contents: its words, the place it leads to, what stands before its page."""

    runs: Runs
    place: str
    level: int = 0
    after: Runs = ()


def cover(story: Story, layout: Layout, part: str = "") -> None:
    """The title page; `part` says which frames a volume holds."""
    layout.turn("", plain=True)
    title = paragraph(text(short(story.title, _LONG_TITLE), H1), gap=3)
    kind = paragraph(text(say("kind"), _KIND))
    above = total([*kind, *title])
    layout.y = max(TOP, _BAND_Y - 6 - above)
    first = replace(kind[0], entry=Entry(say("title_page"), 0), place="title")
    layout.add([first, *title])
    layout.add([space(5), drawings.band(LEFT, layout.y + 5, BREADTH, _BAND_HEIGHT), space(_BAND_HEIGHT + 6)])
    if part:
        layout.add([*paragraph(text(part, Face(11, "B", DEEP))), space(5)])
    layout.add(facts(_facts(story), gap=3.2))
    if not part:
        layout.add([space(5), *_claim(story)])
        layout.add([space(6), *figures(story)])
        layout.add(_foremost(story, BOTTOM - layout.y - 14))
    tool = story.report.tool
    foot = paragraph(text(say("made_with", name=tool.get("name", ""), version=tool.get("version", "")), NOTE), gap=0)
    layout.y = max(layout.y, BOTTOM - total(foot))
    layout.add(foot)


def figures(story: Story) -> list[Piece]:
    """How many frames, anomalies and components there are, and how many of them ask for something."""
    outcomes = [entry.item.outcome for entry in story.ranked]
    missed = sum(1 for asset in story.report.assets if not asset.inspected)
    told = [
        (len(story.analysed), "frame_analysed", False),
        (len(story.failed), "unreadable", True),
        (len(story.findings), "anomaly", False),
        *([(len(story.components), "component", False)] if story.components else []),
        (outcomes.count("act"), "to_act_on", True),
        (outcomes.count("not cleared"), "open_result", True),
        *([(outcomes.count("cleared"), "cleared", False)] if story.components else []),
        *([(missed, "not_inspected", True)] if missed else []),
    ]
    return [_figures([(str(number), noun(number, key), alarms and number > 0) for number, key, alarms in told])]


def contents(entries: Iterable[Listed], layout: Layout) -> None:
    """The list of what follows; its page numbers are looked up when it is drawn."""
    layout.turn(say("contents"))
    layout.add(heading(say("contents"), H2, entry=Entry(say("contents"), 0), place="contents"))
    layout.add(_listed(entry) for entry in entries)


def of_frames(story: Story, frames: Iterable[str]) -> list[Listed]:
    """A line for each frame: what it is, and what it asks for."""
    chosen = set(frames)
    return [
        Listed(
            (frame_name(frame), Run(f"{GAP}{short(frame.label, 70)}", BODY)),
            frame_place(frame.id),
            level=1,
            after=(asked(frame),),
        )
        for frame in story.report.frames
        if frame.id in chosen
    ]


def _listed(entry: Listed) -> Piece:
    """A line of the contents, which leads to its page."""
    indent = 5.0 * entry.level
    after = broken(entry.after, BREADTH)[:1]
    taken = (after[0].width + 3 if after else 0.0) + _PAGE_NUMBER
    lines = broken(entry.runs, BREADTH - indent - taken)
    line = lines[0]
    face = Face(BODY.size, "B" if entry.level == 0 else "", DEEP)
    height = 5.4 if entry.level == 0 else 4.9

    def draw(paper: Paper, x: float, y: float) -> None:
        paper.line(line, x + indent, y)
        if after:
            paper.line(after[0], x + BREADTH - taken, y)
        if entry.place in paper.page_of:
            number = str(paper.page_of[entry.place][0])
            paper.text(number, x + BREADTH - face.width(number), y + face.baseline, face)
            paper.link(entry.place, x, y, BREADTH, height)

    return Piece(height, draw, gap=1.4 if entry.level == 0 else 0.0, keep=entry.level == 0)


def _facts(story: Story) -> list[Fact]:
    """What the survey says of itself, its dates in short."""
    told = [Fact(name, short(words, _LONG_FACT)) for name, words in story.about.items()]
    return sorted(told, key=lambda fact: len(fact.text) > 150)


def _foremost(story: Story, room: float) -> list[Piece]:
    """The picture of the frame that matters most, where there is room for it."""
    frame = next((entry.frame for entry in story.ranked), story.analysed[0] if story.analysed else None)
    shown = image(pictures.stored(frame, story.out, "annotated.png")) if frame else None
    if not frame or not shown or room < _LEAST_PICTURE:
        return []
    caption = say("foremost_picture", id=frame.id, label=short(frame.label, 100))
    width, height = shown.size(_PICTURE, room - 14)
    return [
        space(10),
        picture(shown.data, (width, height)),
        *paragraph(text(caption.rstrip(" ,"), NOTE), gap=0.5),
    ]


def _claim(story: Story) -> list[Piece]:
    report = story.report
    told: Runs = (claim(report.claim), Run(" "), Run(texts.overall(report.claim), Face(9.2, "B")))
    return paragraph(told)


def _figures(told: Sequence[tuple[str, str, bool]]) -> Piece:
    """Large numbers over what they count."""
    each = BREADTH / max(len(told), 6)
    lines = [broken(text(words, NOTE), each - 3) for _, words, _ in told]

    def draw(paper: Paper, x: float, y: float) -> None:
        for place, ((number, _, alarm), under) in enumerate(zip(told, lines, strict=True)):
            left = x + place * each
            face = _ALARMING if alarm else _FIGURE
            paper.text(number, left, y + face.baseline, face)
            for row, line in enumerate(under):
                paper.line(line, left, y + face.height + row * line.height)

    tallest = max((len(under) for under in lines), default=0)
    return Piece(_FIGURE.height + tallest * NOTE.height, draw)
