"""Small pieces that several parts of the paper share: chips, marks, names that lead somewhere, a result in a line."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from string import Formatter

from irsurvey import numbers, texts
from irsurvey.model import ComponentReport, Finding, FrameReport, Indication
from irsurvey.numbers import Style
from irsurvey.report import facts, results
from irsurvey.report.labels import component_mark
from irsurvey.report.pdf.blocks import BODY, NOTE, SMALL, emphasis, paragraph, text
from irsurvey.report.pdf.layout import BREADTH, Piece
from irsurvey.report.pdf.runs import DEEP, INK, PAPER, Box, Face, Run, Runs
from irsurvey.report.ranking import Ranked, governing
from irsurvey.report.sentences import in_style
from irsurvey.report.style import short
from irsurvey.texts import say

Item = Finding | ComponentReport

_WHITE, _UMBER = (255, 255, 255), (85, 70, 29)
_CHIPS = {
    "": (Box(), INK),
    "ok": (Box((232, 238, 246), (140, 165, 198)), INK),
    "weak": (Box(PAPER, (107, 90, 46), dashed=True), _UMBER),
    "ux": (Box(PAPER, (107, 90, 46), dashed=True), _UMBER),
    "u0": (Box(), INK),
    "u1": (Box((247, 239, 216), (201, 173, 98)), INK),
    "u2": (Box((236, 210, 138), (169, 130, 34)), INK),
    "u3": (Box((138, 75, 0), (138, 75, 0)), _WHITE),
    "u4": (Box((58, 28, 0), (58, 28, 0)), _WHITE),
}
"""How a chip is set → its box and the colour of its words."""
_CHIP_SIZE = 6.8
_MARK = Box(PAPER, (18, 24, 33), square=True)
_DARK_MARK = Box((18, 24, 33), (18, 24, 33), square=True)


def chip(words: str, kind: str = "", *, aside: bool = False) -> Run:
    """Words in a box; of what calls for nothing here, its outline alone."""
    box, ink = _CHIPS[kind]
    if aside:
        return Run(words, Face(_CHIP_SIZE), box=replace(box, fill=PAPER))
    return Run(words, Face(_CHIP_SIZE, "B" if kind == "u4" else "", ink), box=box)


def urgency(level: int | None, *, aside: bool = False) -> Run:
    """What an urgency asks for."""
    return chip(texts.urgency(level), "ux" if level is None else f"u{level}", aside=aside)


def decides(words: str) -> Run:
    """Marks the assessment that decides."""
    return Run(words, Face(_CHIP_SIZE, "B", _WHITE), box=Box(DEEP, DEEP, square=True))


def asks(level: int | None, outcome: str) -> Run:
    """What a result asks for."""
    words = texts.to_do(level, outcome)
    return urgency(level) if words == texts.urgency(level) else chip(words, "weak")


def to_do(item: Item) -> Run:
    """What a finding or component asks for."""
    return asks(item.urgency, item.outcome)


def claim(kind: str) -> Run:
    """What may be claimed."""
    return chip(texts.claim_name(kind), {"not valid": "weak", "quantitative": "ok"}.get(kind, ""))


def asked_for(item: Item) -> Runs:
    """The same in a narrow column: its colour, and words that may be broken."""
    one = to_do(item)
    return Run("\u00a0", Face(4), box=one.box), Run(one.text, Face(7.2, one.face.style))


def mark(item: Item, place: int) -> Run:
    """The number or letter that a finding or component has on the picture."""
    is_component = isinstance(item, ComponentReport)
    words = component_mark(place) if is_component else str(place)
    return Run(words, Face(_CHIP_SIZE, "", _WHITE if is_component else INK), box=_DARK_MARK if is_component else _MARK)


def dark_mark(words: str) -> Run:
    """The letter of a strip on the picture."""
    return Run(words, Face(_CHIP_SIZE, "", _WHITE), box=_DARK_MARK)


def light_mark(words: str) -> Run:
    """The letter of a change on its picture."""
    return Run(words, Face(_CHIP_SIZE), box=_MARK)


def outcome(item: Item, face: Face = SMALL) -> Run:
    """Its outcome, and whether one plausible change would make it another."""
    name = texts.outcome_name(item.outcome)
    words = say("fragile", outcome=name) if item.flips else name
    return Run(words, Face(face.size, "B" if item.outcome == "act" else "", face.ink))


def worded(key: str, /, face: Face = BODY, **values: object) -> Runs:
    """What `say` gives as runs: values that are runs stay so, all others are text like the words around them."""
    runs: list[Run] = []
    plain = ""
    for words, name, _, _ in Formatter().parse(say(key)):
        plain += words
        value = values[name] if name else ""
        if isinstance(value, Run | tuple):
            runs += [*([Run(plain, face)] if plain else []), *((value,) if isinstance(value, Run) else value)]
            plain = ""
        else:
            plain += str(value)
    return (*runs, Run(plain, face)) if plain else tuple(runs)


def found(item: ComponentReport) -> Runs:
    """Says of a component that nobody drew it."""
    return (Run(" "), chip(say("found"), "weak")) if item.is_found else ()


def frame_place(frame: str) -> str:
    """The name of the place where the sheet of a frame begins."""
    return f"frame {frame}"


def item_place(entry: Ranked) -> str:
    """The name of the place where a finding or component is told of."""
    if isinstance(entry.item, Finding):
        return finding_place(entry.item.id)
    return f"component {entry.frame.id} {entry.place}"


def finding_place(id_: str) -> str:
    """The name of the place where a finding is told of."""
    return f"finding {id_}"


def title(entry: Ranked, face: Face = BODY) -> Run:
    """The name of a finding or component, which leads to it."""
    name = entry.item.name if isinstance(entry.item, ComponentReport) else entry.item.id
    return Run(short(name), Face(face.size, "B", DEEP), link=item_place(entry))


def frame_name(frame: FrameReport, face: Face = BODY) -> Run:
    """The id of a frame, which leads to its sheet."""
    return Run(frame.id, Face(face.size, face.style, DEEP), link=frame_place(frame.id))


def class_of(item: Item) -> str:
    """Its class by the criterion that governs."""
    assessment = governing(item.assessments)
    return texts.class_name(assessment.class_ if assessment else None)


def headline(entry: Ranked, style: Style) -> str:
    """One finding or component in a sentence."""
    item = entry.item
    told = []
    if isinstance(item, ComponentReport):
        told.append(results.reading(item, "max_c", style=style))
        if item.similar_to and item.similar_to != item.name and item.delta_similar_k:
            told.append(
                say("above", delta=results.reading(item, "delta_similar_k", style=style), what=short(item.similar_to))
            )
        if item.delta_ambient_k:
            told.append(f"{results.reading(item, 'delta_ambient_k', style=style)} {texts.basis('ambient')}")
        if item.delta_neighbours_k:
            told.append(
                say("above", delta=results.reading(item, "delta_neighbours_k", style=style), what=say("its_neighbours"))
            )
    else:
        told.append(say("than_reference", sense=texts.sense(item.sense)))
        if item.delta_k or item.mean_delta_k:
            delta = results.reading(item, "mean_delta_k" if item.mean_delta_k else "delta_k", style=style)
            area = results.reading(item, "area_m2", style=style)
            told.append(say("delta_over_area" if item.area_m2 else "delta_of", delta=delta, area=area))
        elif item.extreme_c:
            told.append(results.reading(item, "extreme_c", style=style))
    return ", ".join(told)


def indication(one: Indication, style: Style) -> list[Piece]:
    """What the pattern of a finding is consistent with, and the cues it was read from."""
    statement = one.statement or upper_first(texts.pattern(one.pattern))
    verify = f" {say('verify_by', how=one.verify_by)}" if one.verify_by and one.verify_by not in one.statement else ""
    told: Runs = (
        emphasis(say("indication")),
        Run(f" {statement}{verify} "),
        Run(say("no_proof"), NOTE),
    )
    cues = facts.cues(one.evidence, style=style)
    read: list[Run] = []
    for number, cue in enumerate(cues):
        read += [Run(f"{'; ' if number else ''}{cue.name} ", NOTE), emphasis(cue.text, NOTE.size)]
    read_from = worded("read_from", NOTE, cues=tuple(read))
    return [*paragraph(told), *(paragraph(read_from, gap=0.4) if cues else ())]


def flags(codes: Sequence[str], style: Style) -> list[Piece]:
    """Flags and what they mean."""
    pieces = []
    for code in codes:
        meaning_ = in_style(texts.flag(code), style)
        told: Runs = (emphasis(texts.flag_name(code), 7.6), Run(f": {meaning_}" if meaning_ != code else "", Face(7.6)))
        pieces += paragraph(told, gap=0.8)
    return pieces


def cell(item: Item, key: str, style: Style) -> Runs:
    """One number of a finding or component in a table, with its 95 % interval where one was drawn."""
    drawn = results.interval(item, key, style=style)
    beside = (Run(f" {drawn}", Face(6.2, ink=NOTE.ink)),) if drawn else ()
    return (Run(results.reading(item, key, unit=False, style=style), SMALL), *beside)


def head(key: str, label: str, style: Style) -> str:
    """The heading of a column of numbers, with their unit."""
    unit = numbers.unit(key, style=style)
    return f"{label}, {unit}" if unit else label


def joined(names: Sequence[Run], face: Face = BODY) -> list[Run]:
    """Names with commas between them."""
    runs: list[Run] = []
    for number, name in enumerate(names):
        runs += [name, *([Run(", ", face)] if number < len(names) - 1 else [])]
    return runs


def unbroken(words: str) -> str:
    """A few words that stay on one line."""
    return words.replace(" ", "\u00a0")


def upper_first(words: str) -> str:
    """A text that begins with a capital."""
    return words[:1].upper() + words[1:]


def quiet(words: str) -> list[Piece]:
    """A paragraph of small print."""
    return paragraph(text(words, NOTE), width=BREADTH)
