"""What the sheet of a frame tells of an envelope: moisture, thermal bridges, what pressure changed."""

from __future__ import annotations

from irsurvey import numbers, texts
from irsurvey.model import FrameReport, FrameTask, PairReport
from irsurvey.numbers import Style
from irsurvey.report import facts, pictures, pressure, results, strip_plot
from irsurvey.report.facts import Fact
from irsurvey.report.labels import change_mark, strip_mark
from irsurvey.report.pdf import drawings
from irsurvey.report.pdf.blocks import (
    BODY,
    NOTE,
    SMALL,
    SMALL_STRONG,
    Column,
    beside,
    emphasis,
    heading,
    paragraph,
    picture,
    text,
)
from irsurvey.report.pdf.blocks import facts as in_columns
from irsurvey.report.pdf.images import image
from irsurvey.report.pdf.layout import BREADTH, Piece
from irsurvey.report.pdf.parts import (
    chip,
    dark_mark,
    finding_place,
    flags,
    frame_place,
    head,
    joined,
    light_mark,
    worded,
)
from irsurvey.report.pdf.runs import DEEP, GAP, Face, Run, Runs
from irsurvey.report.pdf.story import Story
from irsurvey.report.pdf.tables import Head, table
from irsurvey.report.picture import NUMBERED
from irsurvey.report.style import spoken
from irsurvey.texts import say

_PLOT = 78.0  # mm, width of a profile
_CHANGE = 84.0  # mm, width of a picture of change
_GUTTER = 6.0


def moisture(frame: FrameReport, style: Style) -> list[Piece]:
    """Room air, and how much of the surface is at or below a limit."""
    if not (frame.room_air or frame.surface_at_risk):
        return []
    pieces = heading(say("moisture"))
    if frame.room_air:
        pieces += paragraph(text(say("room_air", how=texts.air(frame.room_air.how))), keep=True)
        pieces += in_columns(facts.of_room(frame.room_air, style=style))
    rows: list[list[Runs]] = [
        [
            text(texts.risk(risk.risk), SMALL_STRONG),
            text(numbers.measured(risk.limit_c, "limit_c", style=style), SMALL),
            text(facts.share(risk), SMALL),
            text(facts.area(risk, style=style), SMALL),
            text(results.chance(risk.probability) or numbers.NOTHING, SMALL),
        ]
        for risk in frame.surface_at_risk
    ]
    heads = [
        Head(say("held_against")),
        *(Head(say(key), at_right=True) for key in ("at_or_below", "share", "area_m2", "coldest_is")),
    ]
    return [*pieces, *(table(heads, rows, caption=text(say("moisture_caption"), NOTE)) if rows else ())]


def strips(frame: FrameReport, style: Style) -> list[Piece]:
    """Each strip with its profile."""
    pieces = heading(say("bridges")) if frame.strips else []
    for place, strip in enumerate(frame.strips, 1):
        plot: strip_plot.Plot | None = spoken(strip_plot, style).plot(strip)
        width = BREADTH - _PLOT - _GUTTER if plot else BREADTH
        named: Runs = (dark_mark(strip_mark(place)), Run(f"{GAP}{strip.name}", Face(8.4, "B", DEEP)))
        told = in_columns(facts.of_strip(strip, style=style), columns=2 if plot else 3, width=width)
        columns = [Column(0, told)]
        if plot:
            level = f" {say('strip_level')}" if plot.level is not None else ""
            caption = f"{say('strip_caption', pixels=strip.width_px)}{level}"
            drawn = [drawings.profile(plot, numbers.unit("air_c", style=style), width + _GUTTER, _PLOT)]
            drawn += paragraph(text(caption, NOTE), x=width + _GUTTER, width=_PLOT, gap=0.4)
            columns.append(Column(0, drawn))
        pieces += [*heading(named, gap=2.4), *beside(columns, gap=0.8), *flags(strip.flags, style)]
    return pieces


def pair(frame: FrameReport, story: Story) -> list[Piece]:
    """What changed between two frames of one view, with and without a pressure difference."""
    told = frame.pair
    if not told:
        return []
    difference = numbers.told(abs(told.pressure_pa), "pressure_pa", 3, style=story.style)
    other = Run(told.with_, Face(BODY.size, ink=DEEP), link=frame_place(told.with_))
    first = worded("pressure_below" if told.pressure_pa < 0 else "pressure_above", frame=other, pressure=difference)
    pieces = [*heading(say("pair")), *paragraph(first, keep=True)]
    if not told.accepted:
        refused: Runs = (chip(say("not_compared"), "weak"), Run(f" {told.reason} {say('nothing_concluded')}"))
        return [*pieces, *paragraph(refused), *in_columns(_likeness(told, story.style))]
    pieces += in_columns(_likeness(told, story.style))
    shown = image(pictures.stored(frame, story.out, "change.png"))
    x = _CHANGE + _GUTTER if shown else 0.0
    columns = [Column(0, _changes(frame, story.tasks.get(frame.id), told, x, BREADTH - x, style=story.style))]
    if shown:
        letters_ = f" {say('change_letters')}" if told.changes else ""
        unit = numbers.unit("change_k", style=story.style)
        caption = f"{say('change_caption', unit=unit)}{letters_} {say('change_hatched')}"
        drawn = [picture(shown.data, shown.size(_CHANGE, 110)), *paragraph(text(caption, NOTE), width=_CHANGE, gap=0)]
        columns.insert(0, Column(0, drawn))
    return [*pieces, *beside(columns, gap=2.0)]


def _likeness(told: PairReport, style: Style) -> list[Fact]:
    lines = []
    if told.correlation is not None:
        lines.append(Fact(say("likeness"), say("correlation", r=numbers.number(told.correlation, 2, style=style))))
    if told.shift_px:
        x, y = told.shift_px
        where = say(
            "shift" if told.rotation_deg is None else "shift_turned",
            x=numbers.number(abs(x), 2, style=style),
            side=say("left" if x < 0 else "right"),
            y=numbers.number(abs(y), 2, style=style),
            height=say("above_it" if y < 0 else "below_it"),
            by=numbers.told(told.rotation_deg, "rotation_deg", 2, style=style),
        )
        lines.append(Fact(say("middle_lies"), where))
    if told.threshold_k is not None:
        lines.append(Fact(say("least_change"), numbers.least(told.threshold_k, "threshold_k", style=style)))
    return lines


def _changes(
    frame: FrameReport, task: FrameTask | None, told: PairReport, x: float, width: float, *, style: Style
) -> list[Piece]:
    pieces: list[Piece] = []
    shown = pressure.told(frame, task)
    if told.changes:
        rows: list[list[Runs]] = [
            [
                (light_mark(change_mark(place)), Run(f" {texts.sense(change.sense)}", SMALL)),
                text(numbers.measured(change.mean_change_k, "mean_change_k", unit=False, style=style), SMALL),
                text(numbers.measured(change.area_m2, "area_m2", unit=False, style=style), SMALL),
                (_finding(change.finding),) if change.finding else text(say("none_lies_there"), SMALL),
            ]
            for place, change in enumerate(told.changes[:NUMBERED], 1)
        ]
        heads = [
            Head(say("change")),
            Head(head("mean_change_k", say("mean_change_k"), style), at_right=True),
            Head(head("area_m2", say("area_m2"), style), at_right=True),
            Head(say("finding")),
        ]
        pieces += table(heads, rows, caption=text(say("changed_with"), NOTE), x=x, width=width)
        more = len(told.changes) - NUMBERED
        rest = text(say("more_in_json", count=more, file="report.json"), NOTE)
        pieces += paragraph(rest, x=x, width=width) if more > 0 else []
        for sense in dict.fromkeys(change.sense for change in told.changes):
            pieces += paragraph(_meaning(sense, shown), x=x, width=width)
    else:
        pieces += paragraph(text(say("nothing_changed")), x=x, width=width)
    for ids, key in ((shown.construction, "did_not_change"), (shown.open, "not_told")):
        if ids:
            runs = worded(key, findings=tuple(joined([_finding(id_) for id_ in ids])))
            pieces += paragraph(runs, x=x, width=width)
    return [*pieces, *paragraph(text(say("other_side"), NOTE), x=x, width=width)]


def _meaning(sense: str, shown: pressure.Told) -> Runs:
    """What a change of that sense means at this pressure on the side seen."""
    meaning: str | Run = say("leak_no_trace")
    if shown.is_leak(sense):
        meaning = emphasis(say("leakage"))
    elif shown.leak is None:
        meaning = say("leak_not_told")
    elif shown.leak:
        meaning = say("leak_otherwise", sense=texts.sense(shown.leak))
    return worded("sense_changed", sense=texts.sense(sense).capitalize(), meaning=meaning)


def _finding(id_: str) -> Run:
    return Run(id_, Face(SMALL.size, ink=DEEP), link=finding_place(id_))
