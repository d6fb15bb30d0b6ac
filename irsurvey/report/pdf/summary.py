"""The summary on one page, and behind it what stays open."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from irsurvey import texts
from irsurvey.model import AssetReport, ComponentReport, Finding
from irsurvey.report import condition_rows, facts
from irsurvey.report.html import SUMMARY_LENGTH
from irsurvey.report.pdf.blocks import (
    BODY,
    H2,
    NOTE,
    Column,
    beside,
    bullets,
    emphasis,
    heading,
    over,
    paragraph,
    space,
    text,
)
from irsurvey.report.pdf.front import figures
from irsurvey.report.pdf.layout import BREADTH, LENGTH, Entry, Layout, Piece, total
from irsurvey.report.pdf.paper import RULE
from irsurvey.report.pdf.parts import (
    asks,
    claim,
    frame_name,
    headline,
    item_place,
    joined,
    quiet,
    title,
    to_do,
    worded,
)
from irsurvey.report.pdf.runs import DEEP, GAP, Face, Run, Runs
from irsurvey.report.pdf.story import Story
from irsurvey.report.ranking import Ranked
from irsurvey.report.repair_list import Line
from irsurvey.report.sentences import in_style
from irsurvey.report.style import short
from irsurvey.texts import noun, say

_CHIPS = 41.0  # mm, of the column of what a result asks for
_NAMED_FRAMES = 12  # of one claim; of more, their number


def summary(story: Story, layout: Layout) -> None:
    """One page: what may be claimed, what was found in order of importance, under which conditions."""
    layout.turn(say("summary"))
    first = _opening(story)
    last = _closing(story)
    entries = [*map(_of_repair, story.repairs.repair), *(_of_result(entry, story) for entry in story.notable)]
    shown = _as_many_as_fit(entries, LENGTH - total([*first, *last]) - 16)
    layout.add(first)
    if entries:
        layout.add(heading(say("what_was_found")))
        for entry in entries[:shown]:
            layout.add(entry)
        if len(entries) > shown:
            layout.add(quiet(say("more_behind", count=len(entries) - shown)))
    else:
        layout.add(heading(say("what_was_found")))
        layout.add(paragraph(text(say("nothing_asks"))))
    layout.add(last)


def open_points(story: Story, layout: Layout) -> None:
    """What was not inspected, what could not be cleared, what to measure next time, what could not be read."""
    parts = [part for part in (_missed(story), _not_cleared(story), _next_visit(story), _failed(story)) if part]
    if not parts:
        return
    layout.turn(say("open"))
    layout.add(heading(say("open"), H2, entry=Entry(say("open"), 0), place="open"))
    for part in parts:
        layout.add(part)


def has_open_points(story: Story) -> bool:
    """Whether there is such a page."""
    missed = any(not asset.inspected for asset in story.report.assets)
    return bool(story.open_points or missed or story.report.next_visit or story.failed)


def _opening(story: Story) -> list[Piece]:
    report = story.report
    told: Runs = (claim(report.claim), Run(" "), emphasis(texts.overall(report.claim)))
    if report.claim_reason:
        told = (*told, Run(f" {say(facts.why(report), reason=short(in_style(report.claim_reason, story.style), 400))}"))
    return [
        *heading(say("summary"), H2, entry=Entry(say("summary"), 0), place="summary"),
        *paragraph(told),
        space(2),
        *figures(story),
        *_mouldy(story),
    ]


def _mouldy(story: Story) -> list[Piece]:
    """Where mould conditions are likely."""
    frames = facts.mouldy(story.report)
    if not frames:
        return []
    rest = " …" if len(frames) > _NAMED_FRAMES else ""
    named = (*joined([frame_name(frame) for frame in frames[:_NAMED_FRAMES]]), Run(rest))
    return paragraph((emphasis(f"{say('mould_likely_at')} "), *named))


def _closing(story: Story) -> list[Piece]:
    """What may be claimed frame by frame, and how conditions and checklist fared."""
    report = story.report
    lines: list[Runs] = []
    for kind in sorted({frame.claim for frame in story.analysed}):
        frames = [frame for frame in story.analysed if frame.claim == kind]
        names = joined([frame_name(frame) for frame in frames[:_NAMED_FRAMES]])
        rest = " …" if len(frames) > _NAMED_FRAMES else ""
        lines.append(
            (claim(kind), Run(f" {texts.claim(kind)} {len(frames)} {noun(len(frames), 'frame')}: "), *names, Run(rest))
        )
    if report.conditions_review:
        verdicts = [row.check.verdict for row in condition_rows.rows(report.conditions_review)]
        kinds = ("met", "not met", "not recorded")
        told = ", ".join(f"{verdicts.count(kind)} {texts.condition(kind)}" for kind in kinds)
        lines.append((Run(say("conditions_short", told=told), link="conditions"),))
    if report.checklist:
        stated = sum(item.present for item in report.checklist)
        lines.append((Run(say("checklist_short", stated=stated, all=len(report.checklist)), link="checklist"),))
    if report.reviews:
        who = ", ".join(dict.fromkeys(short(review.reviewer, 60) for review in report.reviews))
        lines.append(text(f"{texts.review('summary', reviewers=who)} {story.reviews.counts()}"))
    return [*heading(say("claim_by_frame")), *bullets(lines)] if lines else []


def _as_many_as_fit(entries: Sequence[list[Piece]], room: float) -> int:
    """How many of the entries the page has room for, the summary's length at most."""
    shown, used = 0, 0.0
    for entry in entries[:SUMMARY_LENGTH]:
        used += total(entry) + entry[0].gap
        if used > room:
            break
        shown += 1
    return shown


def _of_repair(line: Line) -> list[Piece]:
    """An item of the repair list in a line or two."""
    item = line.item
    where = short(item.location or item.asset or item.frame, 80)
    place = item_place(line.entry) if line.entry else ""
    delta = f": {line.delta} {short(line.basis)}" if line.delta else ""
    named: Runs = (
        Run(f"{item.rank}{GAP}", Face(BODY.size, "B", DEEP)),
        Run(short(item.what), Face(BODY.size, "B", DEEP), link=place),
        Run(f", {where}{delta}"),
    )
    return _entry(asks(item.urgency, line.entry.item.outcome if line.entry else ""), named, "")


def _of_result(entry: Ranked, story: Story) -> list[Piece]:
    """A finding or component in a line or two."""
    label = f", {short(entry.frame.label)}" if entry.frame.label else ""
    flags = f" ({short('; '.join(map(texts.flag_name, entry.item.flags)))})" if entry.item.flags else ""
    named: Runs = (title(entry), Run(f"{label}: {headline(entry, story.style)}"), Run(flags, NOTE))
    item = entry.item
    cost = story.season_costs.get(item.id, "") if isinstance(item, Finding) else ""
    told = facts.meaning(item, entry.frame, cost, style=story.style) if isinstance(item, Finding) else ""
    return _entry(to_do(entry.item), named, told)


def _entry(chip: Run, named: Runs, told: str) -> list[Piece]:
    pieces = beside(
        [
            Column(0, paragraph((chip,), width=_CHIPS, gap=0)),
            Column(
                0,
                [
                    *paragraph(named, x=_CHIPS, width=BREADTH - _CHIPS, gap=0),
                    *paragraph(text(told, NOTE), x=_CHIPS, width=BREADTH - _CHIPS, gap=0.2),
                ],
            ),
        ]
    )
    ruled = over(pieces[0], lambda paper, x, y: paper.path([(x, y - 0.9), (x + BREADTH, y - 0.9)], RULE))
    return [replace(ruled, gap=2.0), *pieces[1:]]


def _missed(story: Story) -> list[Piece]:
    missed = [asset for asset in story.report.assets if not asset.inspected]
    if not missed:
        return []
    head = heading(say("assets_not_inspected"), place="not inspected")
    return [*head, *quiet(say("nothing_said")), *bullets(map(_asset, missed))]


def _asset(asset: AssetReport) -> Runs:
    told = ", ".join(short(part) for part in (asset.description, asset.location) if part)
    return (emphasis(short(asset.id)), Run(f"{', ' if told else ''}{told}: {short(asset.reason or say('no_reason'))}"))


def _not_cleared(story: Story) -> list[Piece]:
    if not story.open_points:
        return []
    points = story.open_points
    shown = points[: 2 * SUMMARY_LENGTH]
    lines: list[Runs] = [
        (
            *joined([frame_name(frame) for frame in point.frames[:_NAMED_FRAMES]]),
            Run(" …, " if len(point.frames) > _NAMED_FRAMES else ", "),
            emphasis(short(point.what)),
            Run(f": {short(in_style(point.why, story.style), 320)}"),
        )
        for point in shown
    ]
    rest = quiet(say("more_on_sheets", count=len(points) - len(shown))) if len(points) > len(shown) else []
    return [*heading(say("could_not_be_cleared")), *bullets(lines), *rest]


def _next_visit(story: Story) -> list[Piece]:
    if not story.report.next_visit:
        return []
    pieces = [*heading(say("next_visit")), *quiet(say("next_visit_how"))]
    for number, measurement in enumerate(story.report.next_visit, 1):
        settled = tuple(joined(list(_settled(story, measurement.settles[:SUMMARY_LENGTH])), NOTE))
        more = len(measurement.settles) - SUMMARY_LENGTH
        listed = worded("and_more", NOTE, names=settled, count=more) if more > 0 else settled
        told: Runs = (
            emphasis(f"{number}{GAP}{measurement.measurement}."),
            Run(f" {in_style(measurement.why, story.style)}"),
        )
        settles = worded("settles", NOTE, count=len(measurement.settles), names=listed)
        pieces += [*paragraph(told, gap=1.8, keep=True), *paragraph(settles, x=4, width=BREADTH - 4, gap=0.2)]
    return pieces


def _settled(story: Story, names: Sequence[str]) -> Iterator[Run]:
    """Findings and components by name, leading to where they are told of."""
    named = story.named
    for name in names:
        entry = named.get(name)
        words = (
            f"{entry.frame.id} {short(entry.item.name)}" if entry and isinstance(entry.item, ComponentReport) else name
        )
        yield Run(short(words), Face(NOTE.size, ink=DEEP), link=item_place(entry) if entry else "")


def _failed(story: Story) -> list[Piece]:
    if not story.failed:
        return []
    lines: list[Runs] = [
        (frame_name(frame), Run(f": {short(frame.reason or say('no_reason'))}")) for frame in story.failed
    ]
    return [*heading(say("not_analysed")), *bullets(lines)]
