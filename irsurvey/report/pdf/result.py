"""One finding or component on the sheet of its frame: outcome, indication, class, numbers, where its ± comes from."""

from __future__ import annotations

from dataclasses import replace

from irsurvey import numbers, texts
from irsurvey.model import ComponentReport
from irsurvey.numbers import Style
from irsurvey.report import component_facts, facts, results, trend_plot
from irsurvey.report.facts import Fact
from irsurvey.report.pdf import drawings
from irsurvey.report.pdf.blocks import (
    ASIDE,
    NOTE,
    Column,
    aside,
    beside,
    emphasis,
    heading,
    over,
    paragraph,
    text,
)
from irsurvey.report.pdf.blocks import facts as in_columns
from irsurvey.report.pdf.layout import BREADTH, Piece
from irsurvey.report.pdf.paper import HAIR, RULE
from irsurvey.report.pdf.parts import Item, decides, flags, found, indication, item_place, mark, to_do, urgency
from irsurvey.report.pdf.runs import DEEP, GAP, Colour, Face, Run, Runs
from irsurvey.report.pdf.story import Story
from irsurvey.report.pdf.tables import DENSE, Head, table
from irsurvey.report.ranking import Ranked, governing
from irsurvey.report.sentences import in_style
from irsurvey.report.style import moment, spoken
from irsurvey.texts import say

_TEXT = Face(7.8)
_SMALL = Face(6.8, ink=NOTE.ink)
_BESIDE: Colour = (220, 218, 211)
_FRAGILE: Colour = (169, 130, 34)
_SHORT = 10  # lines of an assessment that stay on one page
_PLOT = 74.0  # mm, width of a drawing
_BARS = 150.0  # mm, width of a chart of shares


def result(entry: Ranked, story: Story) -> list[Piece]:
    """All that is told of one finding or component."""
    style = story.style
    item = entry.item
    name = item.name if isinstance(item, ComponentReport) else item.id
    named: Runs = (
        mark(item, entry.place),
        Run(f"{GAP}{name} ", Face(8.4, "B", DEEP)),
        *(found(item) if isinstance(item, ComponentReport) else ()),
        Run(" "),
        to_do(item),
    )
    head = heading(named, gap=4.2, place=item_place(entry))
    head[0] = over(head[0], lambda paper, x, y: paper.path([(x, y - 1.6), (x + BREADTH, y - 1.6)], RULE, width=HAIR))
    told = [flag for flag in item.flags if flag != "fragile" or not item.flips]
    of_kind = (
        _of_component(item, style)
        if isinstance(item, ComponentReport)
        else in_columns(facts.of_finding(item, style=style))
    )
    return [
        *head,
        *_decision(item, style),
        *_reviews(item, story),
        *(indication(item.indication, style) if item.indication else ()),
        *(piece for one in results.weighed(item.assessments) for piece in _assessment(one, style)),
        *of_kind,
        *flags(told, style),
        *_budgets(item, style),
    ]


def _decision(item: Item, style: Style) -> list[Piece]:
    """What is done about it and how sure that is."""
    assessment = governing(item.assessments)
    told = [Fact(say("outcome"), f"{texts.outcome_name(item.outcome)}: {texts.outcome(item.outcome)}")]
    if assessment and assessment.verdict:
        verdict = assessment.verdict
        told.append(Fact(say("at_the_edge"), f"{texts.verdict_name(verdict)}: {texts.verdict(verdict)}"))
    if results.exceeds(item):
        told.append(Fact(say("truly_beyond"), say("probability", p=results.exceeds(item))))
    pieces = in_columns(told)
    if item.flips:
        ways = []
        for change in results.changes(item, style=style):
            listed = say("or_of").join(change.inputs)
            key = "would_make_any" if len(change.inputs) > 1 else "would_make"
            ways.append(say(key, inputs=listed, name=change.class_))
        fragile: Runs = (
            emphasis(say("fragile_head"), _TEXT.size),
            Run(f" {' '.join(ways)} {say('within_its_u')}", _TEXT),
        )
        pieces += aside(paragraph(fragile, x=ASIDE, width=BREADTH - ASIDE), _FRAGILE)
    return pieces


def _reviews(item: Item, story: Story) -> list[Piece]:
    """What reviewers decided and said of it."""
    pieces: list[Piece] = []
    x, width = ASIDE, BREADTH - ASIDE
    for said in story.reviews.said(item.key):
        by = texts.review("by", decision=said.what, reviewer=said.reviewer, date=moment(said.date, style=story.style))
        pieces += paragraph((emphasis(f"{by}.", _TEXT.size), Run(f" {said.comment}", _TEXT)), x=x, width=width)
    again = story.reviews.again(item.key)
    pieces += paragraph(text(again, _TEXT), x=x, width=width) if again else []
    return aside(pieces, DEEP)


def _assessment(told: results.Weighed, style: Style) -> list[Piece]:
    x, width = ASIDE, BREADTH - ASIDE
    one = told.one
    named: Runs = (
        *((decides(told.weight), Run(" ", _TEXT)) if told.decides and told.weight else ()),
        emphasis(one.criterion, _TEXT.size),
        Run(f": {texts.class_name(one.class_)}  ", _TEXT),
        urgency(one.urgency, aside=told.is_aside),
        *((Run(f" {told.weight}", _SMALL),) if told.is_aside else ()),
    )
    pieces = paragraph(named, x=x, width=width, gap=1.8, keep=True)
    pieces += paragraph(text(in_style(one.statement, style), _TEXT), x=x, width=width, gap=0)
    near = results.probabilities(one)
    if near:
        listed = ", ".join(f"{name} {results.chance(p)}" for name, p in near.items())
        pieces += paragraph(text(say("edge_is_near", classes=listed), _SMALL), x=x, width=width, gap=0)
    pieces += paragraph(text(say("source_of", source=one.source), _SMALL), x=x, width=width, gap=0)
    together = [replace(piece, keep=True) for piece in pieces[:-1]] if len(pieces) <= _SHORT else pieces[:-1]
    return aside([*together, pieces[-1]], DEEP if told.decides else _BESIDE)


def _of_component(item: ComponentReport, style: Style) -> list[Piece]:
    """Load, wind, limits, the heat of its joint, its trend."""
    pieces = in_columns(component_facts.of_component(item, style=style))
    heat = component_facts.of_joint(item, style=style)
    if heat:
        pieces += [*heading(say("joint"), Face(7.8, "B", DEEP), gap=2.4), *in_columns(heat)]
        pieces += paragraph(text(texts.remark("joint"), _SMALL), gap=0.8)
    if item.trend:
        pieces += [*heading(say("trend"), Face(7.8, "B", DEEP), gap=2.4), *_trend(item, style)]
    return pieces


def _trend(item: ComponentReport, style: Style) -> list[Piece]:
    assert item.trend
    plot: trend_plot.Plot | None = spoken(trend_plot, style).plot(item.trend)
    x = _PLOT + 6 if plot else 0.0
    told = [
        *in_columns(
            component_facts.of_trend(item.trend, style=style), columns=1 if plot else 3, x=x, width=BREADTH - x
        ),
        *paragraph(text(texts.remark("trend"), _SMALL), x=x, width=BREADTH - x, gap=0.8),
    ]
    if not plot:
        return told
    caption = " ".join((say("trend_caption"), *([say("trend_slope")] if plot.line else [])))
    drawn = [
        drawings.trend(plot, numbers.unit("delta_k", style=style), 0.0, _PLOT),
        *paragraph(text(caption, _SMALL), width=_PLOT, gap=0),
    ]
    return beside([Column(0, drawn), Column(0, told)], gap=1.0)


def _budgets(item: Item, style: Style) -> list[Piece]:
    """Where the uncertainty of its numbers comes from: a chart and a table for the number that decides, a line for
    each of the others."""
    pieces: list[Piece] = []
    for number, shown in enumerate(results.budgets(item, style=style)):
        if number == 0:
            named = say("where_from", number=in_style(texts.inside(shown.key), style))
            pieces += heading(text(named, Face(7.8, "B", DEEP)), Face(7.8), gap=2.6)
            pieces += drawings.bars(shown.chart, width=_BARS)
            contribution = f"{say('contribution')}, {shown.unit}" if shown.unit else say("contribution")
            heads = [
                Head(say("input")),
                *(Head(say(key), at_right=True) for key in ("standard_uncertainty", "sensitivity")),
                *(Head(words, at_right=True) for words in (contribution, say("share"))),
            ]
            face = Face(6.6)
            rows = [
                [text(told, face) for told in (line.name, line.u, line.sensitivity, line.contribution, line.share)]
                for line in shown.lines
            ]
            caption: Runs = (Run(f"{shown.name} ", _SMALL), emphasis(shown.reading, _SMALL.size, _SMALL.ink))
            pieces += table(heads, rows, caption=caption, width=_BARS, airy=DENSE)
        else:
            listed = ", ".join(f"{line.name} {line.share}" for line in shown.lines)
            line_: Runs = (
                Run(f"{shown.name} ", _SMALL),
                emphasis(shown.reading, _SMALL.size),
                Run(f": {listed}", _SMALL),
            )
            pieces += paragraph(line_, gap=1.0)
    return [*pieces, *(paragraph(text(say("budget_how"), _SMALL), gap=0.8) if pieces else ())]
