"""The repair list with its pictures, and what a season costs."""

from __future__ import annotations

from dataclasses import replace

from irsurvey import numbers, texts
from irsurvey.model import ComponentReport
from irsurvey.report import season_table
from irsurvey.report.facts import Fact
from irsurvey.report.pdf.blocks import (
    ASIDE,
    BODY,
    H2,
    NOTE,
    SMALL,
    Column,
    aside,
    beside,
    bullets,
    emphasis,
    facts,
    heading,
    over,
    paragraph,
    picture,
    text,
)
from irsurvey.report.pdf.images import image
from irsurvey.report.pdf.layout import BREADTH, Entry, Layout, Piece
from irsurvey.report.pdf.paper import HAIR, STRONG_RULE
from irsurvey.report.pdf.parts import asks, finding_place, frame_place, item_place, quiet, worded
from irsurvey.report.pdf.runs import DEEP, GAP, Face, Run, Runs
from irsurvey.report.pdf.story import Story
from irsurvey.report.pdf.tables import Head, table
from irsurvey.report.repair_list import Line
from irsurvey.report.style import short
from irsurvey.texts import say

_RANK = 9.0  # mm, of the column of ranks
_VIEW = 33.0  # mm, width of a picture
_HIGHEST = 42.0  # mm, of a picture


def repair_list(story: Story, layout: Layout) -> None:
    """What to repair first stands first; then what is only to be looked at again."""
    if not story.report.repairs:
        return
    layout.turn(say("repair_list"))
    layout.add(heading(say("repair_list"), H2, entry=Entry(say("repair_list"), 0), place="repairs"))
    layout.add(aside(paragraph(text(texts.repairs("safety")), x=ASIDE, width=BREADTH - ASIDE)))
    if story.repairs.repair:
        layout.add(quiet(texts.repairs("how")))
        for line in story.repairs.repair:
            layout.add(_item(line))
    else:
        layout.add(paragraph(text(texts.repairs("nothing"))))
    if story.repairs.again:
        layout.add(heading(say("look_again"), entry=Entry(say("look_again"), 1), place="look again"))
        layout.add(paragraph(text(texts.repairs("again")), keep=True))
        layout.add(_again(story.repairs.again))
    layout.add(quiet(f"{texts.repairs('moment')} {say('repairs_csv', file='repairs.csv')}"))


def season_costs(story: Story, layout: Layout) -> None:
    """Energy and money of a season, as an owner can read it."""
    if not story.seasons:
        return
    layout.turn(say("what_it_costs"))
    layout.add(heading(say("what_it_costs"), H2, entry=Entry(say("what_it_costs"), 0), place="season"))
    for season in story.seasons:
        layout.add(heading(season.heading))
        layout.add(paragraph(text(season.basis)))
        for part in season.parts:
            layout.add(_costs(season, part))
    layout.add(heading(say("how_to_read")))
    layout.add(bullets(text(told) for told in season_table.notes(story.seasons, story.report)))


def _item(line: Line) -> list[Piece]:
    item = line.item
    views = [view for view in (image(line.thermal), image(line.photo)) if view]
    width = BREADTH - _RANK - len(views) * (_VIEW + 2)
    link = item_place(line.entry) if line.entry else ""
    named: Runs = (Run(short(item.what), Face(9.2, "B", DEEP), link=link), Run(" "), _asks(line))
    told = [
        *paragraph(named, x=_RANK, width=width, gap=0),
        *paragraph(_where(line, NOTE), x=_RANK, width=width, gap=0.4),
        *facts(_facts(line), x=_RANK, width=width, gap=1.2),
        *paragraph((emphasis(say("to_do"), 7.6), Run(f" {short(item.action, 400)}", Face(7.6))), x=_RANK, width=width),
    ]
    if item.inspect_again:
        again: Runs = (emphasis(say("inspect_again"), 7.6), Run(f" {short(item.inspect_again, 400)}", Face(7.6)))
        told += paragraph(again, x=_RANK, width=width, gap=0.6)
    columns = [Column(0, paragraph(text(str(item.rank), Face(13, "B", DEEP)), width=_RANK, gap=0)), Column(0, told)]
    for number, view in enumerate(views):
        left = BREADTH - (len(views) - number) * (_VIEW + 2) + 2
        columns.append(Column(0, [picture(view.data, view.size(_VIEW, _HIGHEST), x=left)]))
    pieces = beside(columns, gap=5.0, place=f"repair {item.rank}")

    return [
        over(
            pieces[0], lambda paper, x, y: paper.path([(x, y - 2.4), (x + BREADTH, y - 2.4)], STRONG_RULE, width=HAIR)
        ),
        *pieces[1:],
    ]


def _asks(line: Line) -> Run:
    return asks(line.item.urgency, line.entry.item.outcome if line.entry else "")


def _where(line: Line, face: Face) -> Runs:
    item = line.item
    parts = [short(item.location)] if item.location else []
    parts += [say("asset", name=short(item.asset))] if item.asset else []
    before = "".join(f"{part} · " for part in parts)
    frame = Run(item.frame, Face(face.size, ink=DEEP), link=frame_place(item.frame))
    named = (Run(before, face), *worded("frame", face, name=frame))
    if not line.mark:
        return named
    return (*named, Run(", ", face), *worded("marked", face, mark=emphasis(line.mark, face.size, face.ink)))


def _facts(line: Line) -> list[Fact]:
    spot = "spot_maximum" if line.entry and isinstance(line.entry.item, ComponentReport) else "spot_extreme"
    told = [
        (say("delta"), f"{line.delta} {short(line.basis)}" if line.delta else ""),
        (say(spot), line.spot),
        (say("load"), line.load),
        (say("class"), short(texts.class_name(line.item.class_))),
        (say("how_sure"), line.sure),
    ]
    return [Fact(name, words) for name, words in told if words]


def _again(lines: tuple[Line, ...]) -> list[Piece]:
    heads = [Head(say(key)) for key in ("part", "where", "delta", "load", "to_do_head")]
    rows: list[list[Runs]] = []
    for line in lines:
        item = line.item
        link = item_place(line.entry) if line.entry else ""
        again = f" {say('inspect_again')} {short(item.inspect_again)}" if item.inspect_again else ""
        rows.append(
            [
                (Run(f"{item.rank}{GAP}{short(item.what)} ", Face(7.2, "B", DEEP), link=link), _asks(line)),
                _where(line, SMALL),
                text(f"{line.delta} {short(line.basis)}" if line.delta else numbers.NOTHING, SMALL),
                text(line.load, SMALL),
                (Run(short(item.action, 400), SMALL), Run(again, Face(6.8, ink=NOTE.ink))),
            ]
        )
    return table(heads, rows, caption=text(say("again_caption"), NOTE))


def _costs(season: season_table.Table, part: season_table.Part) -> list[Piece]:
    heads = [Head(part.first), Head(part.second), Head(say("energy_a_season"), at_right=True)]
    heads += [Head(say("cost_a_season"), at_right=True)] if season.has_cost else []

    def row(line: season_table.Line, style: str = "") -> list[Runs]:
        face = Face(7.6, style)
        place = finding_place(line.finding) if line.finding else ""
        ink = DEEP if place else face.ink
        told: Runs = (Run(short(line.what), Face(7.6, "B", ink), link=place),)
        if line.note:
            told = (*told, Run(f"{GAP}{short(line.note)}", Face(6.8, ink=NOTE.ink)))
        cells = [told, text(short(line.where) or ("" if style else numbers.NOTHING), face), text(line.energy, face)]
        return [*cells, *([text(short(line.cost), face)] if season.has_cost else [])]

    caption = text(say("most_heat_first", what=part.heading), NOTE)
    pieces = table(
        heads, [row(line) for line in part.lines], caption=caption, foot=row(part.total, "B") if part.total else ()
    )
    return [replace(pieces[0], gap=3.0), *pieces[1:], *paragraph(text("", BODY))]
