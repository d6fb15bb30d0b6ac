"""The sheet of one frame: claim, then evidence, then how sure."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import chain, zip_longest

from irsurvey import numbers, texts
from irsurvey.model import ComponentReport, Estimate, Finding, FrameReport, FrameTask, Input
from irsurvey.numbers import Style
from irsurvey.report import facts, pictures, results
from irsurvey.report.facts import Fact
from irsurvey.report.pdf import envelope
from irsurvey.report.pdf.blocks import (
    H2,
    NOTE,
    SMALL,
    Column,
    beside,
    heading,
    labelled,
    paragraph,
    picture,
    space,
    text,
)
from irsurvey.report.pdf.blocks import facts as in_columns
from irsurvey.report.pdf.images import Image, image
from irsurvey.report.pdf.layout import BREADTH, Entry, Layout, Piece
from irsurvey.report.pdf.parts import (
    cell,
    chip,
    claim,
    flags,
    found,
    frame_place,
    head,
    mark,
    outcome,
    quiet,
    unbroken,
)
from irsurvey.report.pdf.result import result
from irsurvey.report.pdf.runs import DEEP, GAP, QUIET, Face, Run, Runs
from irsurvey.report.pdf.story import Story
from irsurvey.report.pdf.tables import TIGHT, Head, table
from irsurvey.report.picture import NUMBERED
from irsurvey.report.ranking import Ranked, foremost
from irsurvey.report.sentences import in_style
from irsurvey.report.style import day, moment, short
from irsurvey.texts import say

_OF_FINDINGS = (
    *("mean_delta_k", "delta_k", "mean_c", "extreme_c", "area_m2"),
    *("heat_flux_w_m2", "reference_heat_flux_w_m2", "excess_heat_w"),
)
_PICTURE = 108.0  # mm, width of the thermal picture
_SMALLER_PICTURE = 78.0  # mm, of one that saves a page
_TAIL = 40.0  # mm, of a last page that a smaller picture may save
_EVIDENCE = 2  # place of the picture among the parts of a sheet
_HIGHEST = 118.0  # mm, of a picture
_GUTTER = 6.0
_INPUT = Face(6.4)
_QUIET_INPUT = Face(6.4, ink=QUIET)
_ASSUMED = Face(6.4, "B", (85, 70, 29))
_SIGN = "*"
_MANY_INPUTS = 8  # from here two of them share a row, and those that are but assumed stand in a paragraph


def sheet(frame: FrameReport, story: Story, layout: Layout, above: Sequence[Piece] = ()) -> None:
    """All of one frame, from the top of a page; of one that could not be read, a few lines.  `above` stands first."""
    name = f"{frame.id}{GAP}{short(frame.label)}".strip()
    is_failed = frame.status == "failed"
    if not is_failed or above or layout.room < 40:
        layout.turn(name)
    layout.add(above)
    task = story.tasks.get(frame.id)
    title: Runs = (Run(f"{frame.id}{GAP}", Face(H2.size, "B", QUIET)), Run(frame.label, H2))
    entry = Entry(f"{frame.id}{GAP}{short(frame.label)}".rstrip(), 1)
    layout.add(heading(title, H2, gap=8, place=frame_place(frame.id), entry=entry))
    layout.add(paragraph(text(_where(frame, task, story.style), NOTE), gap=0.6, keep=True))
    notes = [*heading(say("notes")), *paragraph(text(frame.notes))] if frame.notes else []
    if is_failed:
        layout.add(paragraph((chip(say("not_readable"), "weak"), Run(f" {frame.reason}"))))
        layout.add([*paragraph(text(say("not_analysed_clears_nothing"))), *notes])
    else:
        thermal = image(pictures.stored(frame, story.out, "annotated.png"))
        photo = image(pictures.photograph(task, pictures.PHOTOGRAPH_SIDE)) if task else None
        parts = [*_analysed(frame, task, story, _evidence(frame, thermal, photo, story.style)), notes]
        begun, reached = layout.reach(chain.from_iterable(parts))
        if begun and reached < _TAIL:  # a little more than its pages hold: perhaps not with a smaller picture
            smaller = [*parts]
            smaller[_EVIDENCE] = _evidence(frame, thermal, photo, story.style, _SMALLER_PICTURE)
            parts = smaller if layout.reach(chain.from_iterable(smaller))[0] < begun else parts
        for pieces in parts:
            layout.add(pieces)


def _analysed(frame: FrameReport, task: FrameTask | None, story: Story, evidence: list[Piece]) -> list[list[Piece]]:
    why = f" {say('why_claimed', reason=in_style(frame.claim_reason, story.style))}" if frame.claim_reason else ""
    shown = foremost(frame, NUMBERED)
    entries = [Ranked(frame, finding, finding.label) for finding in shown]
    entries += [Ranked(frame, component, place) for place, component in enumerate(frame.components, 1)]
    return [
        paragraph((claim(frame.claim), Run(f" {texts.claim(frame.claim)}{why}"))),
        paragraph(text(bound(frame, story.style))),
        evidence,
        _findings(frame, shown, story.style),
        _components(frame, story.style),
        heading(say("assessment")) if entries else [],
        *(result(entry, story) for entry in entries),
        envelope.moisture(frame, story.style),
        envelope.strips(frame, story.style),
        envelope.pair(frame, story),
        _how_sure(frame, task, story.style),
        [*heading(say("to_know")), *flags(frame.flags, story.style)] if frame.flags else [],
    ]


def bound(frame: FrameReport, style: Style) -> str:
    """What the frame would have shown, so that nothing is taken for cleared which it could not."""
    d = frame.detectable
    if d and d.min_delta_k:
        area = say("pixels", count=d.min_pixels)
        if d.min_area_m2:
            area = f"{numbers.least_area(d.min_area_m2, style=style)} ({area})"
        key = "would_have_shown" if frame.findings or frame.components else "none_found"
        told = [say(key, delta=numbers.least(d.min_delta_k, "min_delta_k", style=style), area=area)]
    else:
        told = [say("not_known_what")]
    if _lost(frame):
        told.append(say("where_measured"))
    if frame.claim == "not valid":
        told.append(say("clears_nothing"))
    return " ".join(told)


def _lost(frame: FrameReport) -> int:
    return frame.temperature.unmeasurable_pixels + frame.temperature.saturated_pixels if frame.temperature else 0


def _where(frame: FrameReport, task: FrameTask | None, style: Style) -> str:
    parts = [
        moment(frame.taken, style=style) if frame.taken else "",
        frame.group or "",
        say("element", name=frame.element) if frame.element else "",
        say("faces", side=task.orientation) if task and task.orientation else "",
        say("asset", name=frame.asset) if frame.asset else "",
        frame.source.file,
    ]
    return " · ".join(part for part in parts if part)


def _evidence(
    frame: FrameReport, thermal: Image | None, photo: Image | None, style: Style, picture_width: float = _PICTURE
) -> list[Piece]:
    """The picture with its caption; beside it what it shows, and the photograph or what its reference tells."""
    shown = len(foremost(frame, NUMBERED))
    if thermal:
        size = thermal.size(picture_width, _HIGHEST)
        left = [picture(thermal.data, size)]
    else:
        left = paragraph(text(say("picture_missing")), width=picture_width)
    left += paragraph(text(_caption(frame, shown, style), NOTE), width=picture_width, gap=0)
    x, width = picture_width + _GUTTER, BREADTH - picture_width - _GUTTER
    right = [
        *paragraph(text(say("what_it_shows"), Face(9.4, "B", DEEP)), x=x, width=width, gap=0),
        *labelled(_shown(frame, style), x=x, width=width),
    ]
    told = facts.of_reference(frame.reference, style=style) if frame.reference else ()
    below: list[Piece] = []
    if photo:
        right += [picture(photo.data, photo.size(width, 60), x=x, gap=3)]
        below = [*heading(say("reference_tells")), *in_columns(told)] if told else []
    elif told:
        named = paragraph(text(say("reference_tells"), Face(9.4, "B", DEEP)), x=x, width=width, gap=4)
        right += [*named, *in_columns(told, columns=1, x=x, width=width)]
    return [space(2.2), *beside([Column(0, left), Column(0, right)]), *below]


def _caption(frame: FrameReport, shown: int, style: Style) -> str:
    told = [say("picture_caption", unit=numbers.unit("min_c", style=style))]
    if frame.findings:
        count = len(frame.findings)
        told.append(say("numbers_are_foremost" if shown < count else "numbers_are", shown=shown, all=count))
    told += [say("letters_are")] if frame.components else []
    told += [say("lines_are")] if frame.strips else []
    told += [say("dashed_is")] if frame.reference else []
    told += [say("hatched_is")] if _lost(frame) else []
    return " ".join(told)


def _shown(frame: FrameReport, style: Style) -> list[tuple[str, Runs]]:
    told = []
    if t := frame.temperature:
        low, high, median = (_degrees(value, style) for value in (t.min_c, t.max_c, t.median_c))
        high, median = (numbers.with_unit(value, "min_c", style=style) for value in (high, median))
        told.append((say("whole_frame"), say("range", low=low, high=high, median=median)))
        if _lost(frame):
            lost = say("lost", unmeasurable=t.unmeasurable_pixels, saturated=t.saturated_pixels)
            told.append((say("left_out"), lost))
    if r := frame.reference:
        bare = numbers.with_unit(_degrees(r.median_c, style), "median_c", style=style)
        value = numbers.measured(Estimate(r.median_c, r.u_c), "median_c", style=style) if r.u_c else bare
        how = say("drawn" if r.how == "polygon" else "suggested")
        spread, gradient = (_difference(one, style) for one in (r.spread_k, r.gradient_k))
        key = "reference_slopes" if r.gradient_k else "reference_is"
        reference = say(key, value=value, how=how, pixels=r.pixels, spread=spread, gradient=gradient)
        told.append((say("reference"), reference))
    if (d := frame.detectable) and d.noise_k is not None:
        noise, more = (_difference(one, style) for one in (d.noise_k, d.shading_allowance_k))
        noise = say("noise_and_corners", noise=noise, more=more) if d.shading_allowance_k else noise
        told.append((say("noise"), noise))
    return [(name, text(words, Face(7.6))) for name, words in told]


def _degrees(value: float | None, style: Style) -> str:
    """A temperature to a tenth of a degree, without its unit."""
    shown = None if value is None else numbers.converted(value, "min_c", style=style)
    return numbers.decimals(shown, 1, style=style)


def _difference(value: float | None, style: Style) -> str:
    return numbers.told(value, "delta_k", 2, style=style)


def _findings(frame: FrameReport, shown: tuple[Finding, ...], style: Style) -> list[Piece]:
    if not frame.findings:
        return []
    heads = [Head(say("anomaly_head")), *(Head(head(key, say(key), style), at_right=True) for key in _OF_FINDINGS)]
    rows: list[list[Runs]] = [
        [
            (mark(item, item.label), Run(f" {texts.sense(item.sense)}", SMALL)),
            *(cell(item, key, style) for key in _OF_FINDINGS),
        ]
        for item in shown
    ]
    more = len(frame.findings) - len(shown)
    return [
        *heading(say("anomalies_here")),
        *table(heads, rows, caption=text(say("anomalies_here_caption"), NOTE)),
        *(quiet(say("more_less_important", count=more, records="report.json", table="findings.csv")) if more else ()),
    ]


def _components(frame: FrameReport, style: Style) -> list[Piece]:
    if not frame.components:
        return []
    columns = results.columns(frame.components)
    labels = {key: say(key) for key in columns if key != "at_rated_load"}
    at_rated = Head(head("delta_similar_k", say("at_rated_over_similar"), style), at_right=True)
    heads = [
        *(Head(say(key)) for key in ("component_head", "group_phase")),
        *(Head(head(key, label, style), at_right=True) for key, label in labels.items()),
        *([at_rated] if "at_rated_load" in columns else []),
        Head(say("outcome")),
    ]
    rows = [_component(item, place, columns, style) for place, item in enumerate(frame.components, 1)]
    caption = text(say("components_here_caption"), NOTE)
    return [*heading(say("components_here")), *table(heads, rows, caption=caption)]


def _component(item: ComponentReport, place: int, columns: Sequence[str], style: Style) -> list[Runs]:
    group = f"{item.group or numbers.NOTHING}{f', {item.phase}' if item.phase else ''}"
    load = say("not_recorded")
    if item.load_a is not None:
        load = numbers.number(item.load_a, style=style)
        if item.rated_a is not None:
            load = say("of", load=load, rated=numbers.number(item.rated_a, style=style))
    own = {
        "load_a": text(load, SMALL),
        "at_rated_load": text(results.rated(item, style=style) or numbers.NOTHING, SMALL),
    }
    return [
        (mark(item, place), Run(f"\u00a0{item.name}", SMALL), *found(item)),
        text(group, SMALL),
        *(own[key] if key in own else cell(item, key, style) for key in columns),
        (outcome(item),),
    ]


def _how_sure(frame: FrameReport, task: FrameTask | None, style: Style) -> list[Piece]:
    is_long = len(frame.inputs) > _MANY_INPUTS
    apart = {key: entry for key, entry in frame.inputs.items() if is_long and texts.is_assumed(entry.from_)}
    rows = [_input(key, entry, style) for key, entry in frame.inputs.items() if key not in apart]
    heads = [Head(say("input")), Head(say("value"), at_right=True), Head(say("origin"))]
    pieces = heading(say("how_sure_head"), gap=3.0)
    if rows or apart:
        caption = say("inputs_caption")
        if any(_is_less_founded(entry) for entry in frame.inputs.values()):
            caption = say("inputs_caption_sign", caption=caption, sign=_SIGN)
        pieces += paragraph(text(caption, NOTE), gap=0.8, keep=True)
    if rows and is_long:
        half = (len(rows) + 1) // 2
        empty: list[Runs] = [(), (), ()]
        pairs = zip_longest(rows[:half], rows[half:], fillvalue=empty)
        pieces += table([*heads, *heads], [[*left, *right] for left, right in pairs], airy=TIGHT)
    elif rows:
        pieces += table(heads, rows, airy=TIGHT)
    for origin in dict.fromkeys(entry.from_ for entry in apart.values()):
        listed: list[Run] = [Run(f"{texts.origin(origin)}:", _ASSUMED)]
        for number, (key, entry) in enumerate((key, one) for key, one in apart.items() if one.from_ == origin):
            value = numbers.with_unit(numbers.stated(entry, key, style=style), key, style=style)
            listed += [Run(f"{';' if number else ''} {texts.name(key)} ", _QUIET_INPUT), Run(value, _INPUT)]
        pieces += paragraph(tuple(listed), gap=1.2)
    told = _known(frame, task, style)
    known: list[Run] = []
    for number, fact in enumerate(told):
        known += [Run(f"{GAP if number else ''}{fact.name} ", _QUIET_INPUT), Run(fact.text, _INPUT)]
    return [*pieces, *paragraph(tuple(known), gap=1.2)] if frame.inputs or told else []


def _input(key: str, entry: Input, style: Style) -> list[Runs]:
    """An input, and where its value comes from; a sign says that its uncertainty is but assumed."""
    assumed = texts.is_assumed(entry.from_)
    face = _ASSUMED if assumed else _INPUT
    origin = Run(unbroken(texts.origin(entry.from_)), face)
    of_u = texts.founded(entry.u_from)
    is_otherwise = entry.u > 0 and of_u != texts.founded(entry.from_) and not _is_less_founded(entry)
    value = numbers.with_unit(numbers.stated(entry, key, style=style), key, style=style)
    return [
        text(texts.name(key), _INPUT),
        text(f"{value}\u00a0{_SIGN}" if _is_less_founded(entry) else value, _INPUT),
        (origin, *((Run(f", {unbroken(f'± {of_u}')}", _QUIET_INPUT),) if is_otherwise else ())),
    ]


def _is_less_founded(entry: Input) -> bool:
    """Whether a value that somebody stated or measured has an uncertainty that is assumed."""
    return entry.u > 0 and texts.is_assumed(entry.u_from) and not texts.is_assumed(entry.from_)


def _known(frame: FrameReport, task: FrameTask | None, style: Style) -> list[Fact]:
    told = []
    if frame.uncertainty:
        how = texts.uncertainty(frame.uncertainty)
        how = say("draws", how=how, count=numbers.grouped(frame.draws)) if frame.draws else how
        told.append(Fact(say("uncertainty"), how))
    if frame.atmosphere_transmittance is not None:
        told.append(
            Fact(say("air_path"), say("transmittance", tau=numbers.number(frame.atmosphere_transmittance, style=style)))
        )
    told += [Fact(texts.name(key), numbers.told(value, key, 3, style=style)) for key, value in frame.humid_air.items()]
    if task:
        camera = task.camera
        low, high = (numbers.number(edge * 1e6, style=style) for edge in camera.band)
        parts = [say("band", low=low, high=high)]
        parts += [say("ifov", mrad=numbers.number(camera.ifov * 1e3, style=style))] if camera.ifov else []
        accuracy = numbers.told(camera.accuracy, "accuracy_k", style=style)
        share = numbers.number(camera.accuracy_fraction * 100, style=style)
        parts.append(say("accuracy", k=accuracy, percent=share))
        parts += [say("calibrated", on=day(camera.calibrated_on, style=style))] if camera.calibrated_on else []
        told.append(Fact(say("camera"), f"{camera.name}: {', '.join(parts)}"))
    return told
