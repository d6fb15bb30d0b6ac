"""The last pages: whether the report is complete, what must be known of every such report, how its numbers read."""

from __future__ import annotations

from irsurvey import numbers, texts
from irsurvey.model import ChecklistItem
from irsurvey.report import explained
from irsurvey.report.pdf.blocks import H2, NOTE, SMALL, SMALL_STRONG, bullets, heading, paragraph, text
from irsurvey.report.pdf.layout import Entry, Layout, Piece, total
from irsurvey.report.pdf.letters import MISSING
from irsurvey.report.pdf.parts import chip
from irsurvey.report.pdf.runs import Runs
from irsurvey.report.pdf.story import Story
from irsurvey.report.pdf.tables import Head, table
from irsurvey.report.style import short
from irsurvey.texts import say


def checklist(story: Story, layout: Layout) -> None:
    """What a complete report states, and whether this one does."""
    items = story.report.checklist
    if not items:
        return
    missing = sum(1 for item in items if not item.present)
    told = say("all_here", all=len(items))
    if missing:
        told = say("one_missing" if missing == 1 else "missing", count=missing, all=len(items))
    rows: list[list[Runs]] = [
        [
            text(item.item, SMALL_STRONG),
            text(texts.asked_by(item.asked_by), SMALL),
            (chip(say("present"), "ok") if item.present else chip(say("is_missing"), "weak"),),
            text(_where(item), SMALL),
        ]
        for item in items
    ]
    heads = [Head(say(key)) for key in ("item", "asked_by", "here", "where")]
    layout.turn(say("checklist"))
    layout.add(heading(say("checklist"), H2, entry=Entry(say("checklist"), 0), place="checklist"))
    layout.add(paragraph(text(told)))
    layout.add(table(heads, rows, caption=text(say("checklist_caption"), NOTE)))


def cautions(story: Story, layout: Layout) -> None:
    """The standing cautions, how the numbers are to be read, and what else was written."""
    pieces: list[Piece] = [
        *heading(say("cautions"), H2, gap=9, entry=Entry(say("cautions"), 0), place="cautions"),
        *bullets((text(caution) for caution in story.cautions), gap=1.4),
        *heading(say("how_numbers_read")),
        *paragraph(text(explained.numbers_how(style=story.style))),
        *paragraph(text(say("marks"), NOTE)),
        *paragraph(text(say("substitute", box=MISSING), NOTE)),
        *paragraph(text(say(explained.beside_files(style=story.style), files=_files(story)), NOTE)),
    ]
    layout.go_on(say("cautions"), min(120, total(pieces) + pieces[0].gap))
    layout.add(pieces)


def _where(item: ChecklistItem) -> str:
    where = short(item.where) or numbers.NOTHING
    return say("to_be_stated", where=where) if item.where and not item.present else where


def _files(story: Story) -> str:
    files = "report.json, findings.csv"
    return say("repairs_file", files=files, repairs="repairs.csv") if story.report.repairs else files
