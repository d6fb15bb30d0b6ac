"""Everything in one line each: conditions, anomalies, warm areas of a roof, components, groups of parts, assets."""

from __future__ import annotations

from irsurvey import numbers, texts
from irsurvey.model import ComponentReport, Finding
from irsurvey.numbers import Style
from irsurvey.report import condition_rows, results
from irsurvey.report.html import SUMMARY_LENGTH
from irsurvey.report.pdf.blocks import H2, NOTE, SMALL, SMALL_STRONG, heading, paragraph, space, text
from irsurvey.report.pdf.layout import Entry, Layout, Piece, total
from irsurvey.report.pdf.parts import (
    asked_for,
    chip,
    class_of,
    found,
    frame_name,
    head,
    item_place,
    joined,
    outcome,
    title,
    unbroken,
    worded,
)
from irsurvey.report.pdf.runs import DEEP, Face, Run, Runs
from irsurvey.report.pdf.story import Story
from irsurvey.report.pdf.tables import DENSE, Head, table
from irsurvey.report.style import short
from irsurvey.texts import say

_OF_FINDINGS = ("mean_delta_k", "delta_k", "extreme_c", "area_m2", "excess_heat_w")
_OF_COMPONENTS = ("max_c", "delta_similar_k", "delta_ambient_k")
_BRIEF = 12  # letters of a requirement that stays on one line
_LEAST_ROOM = 60.0
"""A section that does not fit begins on a new page where less is left of the last one [mm]."""


def overview(story: Story, layout: Layout) -> None:
    """All these tables, as many as there is something to tell of."""
    for place, name, pieces in (
        ("conditions", say("conditions"), _conditions(story)),
        ("anomalies", say("anomalies_all"), _anomalies(story)),
        ("roof", say("roof"), _roof(story)),
        ("components", say("components_all"), _components(story)),
        ("populations", say("populations"), _populations(story)),
        ("assets", say("assets"), _assets(story)),
    ):
        if not pieces:
            continue
        pieces = [*heading(name, H2, gap=9, entry=Entry(name, 0), place=place), *pieces]
        layout.go_on(name, min(_LEAST_ROOM, total(pieces) + pieces[0].gap))
        layout.add(pieces)


def _conditions(story: Story) -> list[Piece]:
    """What is not met or not recorded; then, in small rows, what is met."""
    rows = condition_rows.rows(story.report.conditions_review, style=story.style)
    pieces: list[Piece] = []
    for is_met in (False, True):
        same = [row for row in rows if row.is_met == is_met]
        asked = ("condition", "groups", "required", "recorded", *(() if is_met else ("verdict", "leaves")), "source")
        caption = say("conditions_caption")
        if is_met:
            caption = f"{say('conditions_met', count=len(same))}. {say('met_caption')}"
        if same:
            pieces += [space(3.0)] if pieces else []
            cells = [_requirement(row) for row in same]
            heads = [Head(say(key)) for key in asked]
            pieces += table(heads, cells, caption=text(caption, NOTE), airy=DENSE if is_met else 1.0)
    return [*pieces, *paragraph(text(say("marks"), NOTE), gap=2.0)] if pieces else []


def _requirement(row: condition_rows.Row) -> list[Runs]:
    check, face, strong = row.check, SMALL, SMALL_STRONG
    verdict: list[Runs] = [(chip(texts.condition(check.verdict), "weak"),), text(row.leaves or numbers.NOTHING, face)]
    if row.is_met:
        face, strong, verdict = Face(6.6), Face(6.6, "B"), []
    return [
        text(check.check, strong),
        text(short(row.groups, 400) or numbers.NOTHING, face),
        text(unbroken(check.requirement) if len(check.requirement) < _BRIEF else check.requirement, face),
        text(say("to_record", what=row.to_record) if row.to_record else row.recorded, face),
        *verdict,
        text(check.source, Face(6.4, ink=NOTE.ink)),
    ]


def _anomalies(story: Story) -> list[Piece]:
    rows: list[list[Runs]] = []
    for entry in story.findings:
        item = entry.item
        assert isinstance(item, Finding)
        label = f", {short(entry.frame.label)}" if entry.frame.label else ""
        rows.append(
            [
                (title(entry, SMALL), Run(f" {texts.sense(item.sense)}{label}", NOTE)),
                *(text(results.reading(item, key, unit=False, style=story.style), SMALL) for key in _OF_FINDINGS),
                text(class_of(item), SMALL),
                (outcome(item), Run(": ", SMALL), *asked_for(item)),
            ]
        )
    heads = [
        Head(say("anomaly_head")),
        *(Head(head(key, say(key), story.style), at_right=True) for key in _OF_FINDINGS),
        *(Head(say(key)) for key in ("class", "outcome")),
    ]
    return table(heads, rows, caption=text(say("anomalies_caption"), NOTE)) if rows else []


def _roof(story: Story) -> list[Piece]:
    areas = story.warm_areas
    rows: list[list[Runs]] = []
    for entry in areas:
        item = entry.item
        verify = item.indication.verify_by if item.indication else ""
        by = f" {say('verified_by', how=short(verify))}" if verify else ""
        rows.append(
            [
                (title(entry, SMALL),),
                text(short(entry.frame.label) or numbers.NOTHING, SMALL),
                text(results.reading(item, "area_m2", unit=False, style=story.style), SMALL),
                text(results.reading(item, "mean_delta_k", unit=False, style=story.style), SMALL),
                (chip(say("needs_verification"), "weak"), Run(by, SMALL)),
            ]
        )
    heads = [
        *(Head(say(key)) for key in ("warm_area", "where")),
        *(Head(head(key, say(key), story.style), at_right=True) for key in ("area_m2", "mean_delta_k")),
        Head(say("status")),
    ]
    caption = text(say("roof_caption", count=len(areas)), NOTE)
    how = say("roof_how", needs_verification=say("needs_verification"))
    return [*paragraph(text(how)), *table(heads, rows, caption=caption)] if rows else []


def _components(story: Story) -> list[Piece]:
    rows: list[list[Runs]] = []
    for entry in story.components:
        item = entry.item
        assert isinstance(item, ComponentReport)
        label = f", {short(entry.frame.label)}" if entry.frame.label else ""
        rows.append(
            [
                (title(entry, SMALL), *found(item)),
                (frame_name(entry.frame, SMALL), Run(label, SMALL)),
                *(text(results.reading(item, key, unit=False, style=story.style), SMALL) for key in _OF_COMPONENTS),
                text(class_of(item), SMALL),
                (outcome(item), Run(": ", SMALL), *asked_for(item)),
            ]
        )
    heads = [
        *(Head(say(key)) for key in ("component_head", "where")),
        *(Head(head(key, say(key), story.style), at_right=True) for key in _OF_COMPONENTS),
        *(Head(say(key)) for key in ("class", "outcome")),
    ]
    return table(heads, rows, caption=text(say("components_caption"), NOTE)) if rows else []


def _populations(story: Story) -> list[Piece]:
    named = story.named
    rows: list[list[Runs]] = []
    for group in story.report.populations:
        names = []
        for key in group.exceeding[:SUMMARY_LENGTH]:
            entry = named.get(key)
            words = f"{entry.frame.id} {entry.item.name}" if entry and isinstance(entry.item, ComponentReport) else key
            names.append(Run(short(words), Face(SMALL.size, ink=DEEP), link=item_place(entry) if entry else ""))
        more = len(group.exceeding) - SUMMARY_LENGTH
        listed = tuple(joined(names, SMALL))
        rows.append(
            [
                text(short(group.group) or numbers.NOTHING, SMALL_STRONG),
                text(str(group.count), SMALL),
                text(_alarm(group.alarm_k, story.style), SMALL),
                text(texts.usual(group.how), SMALL),
                (worded("and_more", SMALL, names=listed, count=more) if more > 0 else listed)
                if names
                else text(say("none"), SMALL),
            ]
        )
    heads = [
        Head(say("group")),
        Head(say("parts"), at_right=True),
        Head(head("alarm_k", say("stands_out_above"), story.style), at_right=True),
        Head(say("usual_by")),
        Head(say("stand_out")),
    ]
    caption = text(say("populations_caption"), NOTE)
    return [*paragraph(text(texts.repairs("population"))), *table(heads, rows, caption=caption)] if rows else []


def _alarm(alarm_k: float, style: Style) -> str:
    return numbers.number(numbers.converted(alarm_k, "alarm_k", style=style), 3, style=style)


def _assets(story: Story) -> list[Piece]:
    frames = {frame.id: frame for frame in story.report.frames}
    rows: list[list[Runs]] = []
    for asset in story.report.assets:
        if asset.inspected:
            names = [frame_name(frames[id_], SMALL) if id_ in frames else Run(id_, SMALL) for id_ in asset.frames]
            seen: Runs = tuple(joined(names, SMALL)) or text(say("yes"), SMALL)
        else:
            seen = (chip(say("not_inspected"), "weak"), Run(f" {asset.reason or say('no_reason')}", SMALL))
        rows.append(
            [
                text(short(asset.id), SMALL_STRONG),
                text(asset.description or numbers.NOTHING, SMALL),
                text(asset.location or numbers.NOTHING, SMALL),
                text(numbers.NOTHING if asset.criticality is None else str(asset.criticality), SMALL),
                seen,
            ]
        )
    heads = [Head(say(key)) for key in ("asset_head", "description", "location", "criticality", "inspected")]
    return table(heads, rows, caption=text(say("assets_caption"), NOTE)) if rows else []
