"""Whole documents: one for a report, or its volumes and their summary."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from irsurvey.model import FrameReport
from irsurvey.report import about
from irsurvey.report.pdf import closing, front, overview, repairs, summary
from irsurvey.report.pdf.blocks import H2, NOTE, SMALL, heading, paragraph, space, text
from irsurvey.report.pdf.document import About, drawn, places
from irsurvey.report.pdf.front import Listed
from irsurvey.report.pdf.layout import Entry, Layout, Page
from irsurvey.report.pdf.parts import frame_place
from irsurvey.report.pdf.runs import DEEP, Face, Run, Runs
from irsurvey.report.pdf.sheet import sheet
from irsurvey.report.pdf.story import Story, asked, made_on
from irsurvey.report.pdf.tables import Head, table
from irsurvey.report.style import short
from irsurvey.texts import say

_SECTION = Face(8.6, "B", DEEP)


def whole(story: Story) -> bytes:
    """The report in one document."""
    body = _before(story)
    _sheets(story, story.report.frames, body)
    _behind(story, body)
    ids = [frame.id for frame in story.report.frames]
    return drawn(_pages(story, body, front.of_frames(story, ids)), _about(story))


def volume_of(story: Story, frames: Sequence[FrameReport], number: int, volumes: int) -> tuple[bytes, dict[str, int]]:
    """One volume with the sheets of its frames, and the page on which each of them begins."""
    body = Layout()
    _sheets(story, frames, body)
    closing.cautions(story, body)
    ids = [frame.id for frame in frames]
    part = say("volume", number=number, volumes=volumes, first=ids[0], last=ids[-1])
    pages = _pages(story, body, front.of_frames(story, ids), part)
    found = places(pages)
    return drawn(pages, _about(story, part)), {id_: found[frame_place(id_)][0] for id_ in ids}


def summary_of(story: Story, pages: Mapping[str, tuple[int, int]], volumes: int) -> bytes:
    """Everything but the sheets, and for each frame the volume and page of its sheet."""
    body = _before(story)
    body.turn(say("frames"))
    body.add(heading(say("frames"), H2, entry=Entry(say("frames"), 0), place="frames"))
    body.add(paragraph(text(say("in_volumes", volumes=volumes))))
    heads = [
        Head(say("frame_head")),
        Head(say("label")),
        Head(say("asks_for")),
        Head(say("volume_head"), at_right=True),
    ]
    rows: list[list[Runs]] = [
        [
            text(frame.id, Face(SMALL.size, "B", DEEP)),
            text(short(frame.label), SMALL),
            (asked(frame),),
            text(say("volume_page", volume=pages[frame.id][0], page=pages[frame.id][1]), SMALL),
        ]
        for frame in story.report.frames
    ]
    body.add(table(heads, rows, caption=text(say("frames_caption"), NOTE)))
    _behind(story, body)
    return drawn(_pages(story, body, []), _about(story))


def _before(story: Story) -> Layout:
    """What stands before the sheets."""
    layout = Layout()
    summary.summary(story, layout)
    repairs.repair_list(story, layout)
    summary.open_points(story, layout)
    repairs.season_costs(story, layout)
    overview.overview(story, layout)
    return layout


def _sheets(story: Story, frames: Sequence[FrameReport], layout: Layout) -> None:
    opening = replace(space(0), keep=True, entry=Entry(say("frames"), 0), place="frames")
    for number, frame in enumerate(frames):
        sheet(frame, story, layout, above=[opening] if number == 0 else [])


def _behind(story: Story, layout: Layout) -> None:
    """What stands behind them."""
    closing.checklist(story, layout)
    closing.cautions(story, layout)


def _pages(story: Story, body: Layout, frames: list[Listed], part: str = "") -> list[Page]:
    """Title page and contents before a body."""
    first = Layout()
    front.cover(story, first, part)
    front.contents(_entries(body, frames), first)
    return [*first.pages, *body.pages]


def _entries(body: Layout, frames: list[Listed]) -> list[Listed]:
    """The sections of a body, the frames under theirs."""
    listed: list[Listed] = []
    for page in body.pages:
        for placed in page.placed:
            entry, place = placed.piece.entry, placed.piece.place
            if entry and entry.level == 0:
                listed.append(Listed((Run(entry.title, _SECTION),), place))
                listed += frames if place == "frames" else []
    return listed


def _about(story: Story, part: str = "") -> About:
    tool = story.report.tool
    name = f"{tool.get('name', '')} {tool.get('version', '')}".strip()
    return About(
        title=f"{story.title}, {part}" if part else story.title,
        author=about.said(story.report).get("surveyor", ""),
        subject=say("kind"),
        creator=name,
        made=made_on(story.report),
        running=story.title,
        foot=f"{say('kind')} · {name}",
    )
