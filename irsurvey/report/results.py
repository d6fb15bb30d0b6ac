"""One finding or component as people see it: its numbers, their uncertainty budgets, what its class hangs on."""

from __future__ import annotations

from dataclasses import dataclass

from irsurvey import numbers, texts
from irsurvey.assess.electrical import OF_TWINS, OVER_AIR
from irsurvey.model import Assessment, BudgetTerm, ComponentReport, Estimate, Finding, Flip
from irsurvey.numbers import SI, Style
from irsurvey.report.ranking import governing, is_saturated
from irsurvey.texts import say

Item = Finding | ComponentReport

_LEAST_SHARE = 0.005
"""Terms below half a percent of the variance are shown together; report.json has them one by one."""
_BARS, _LEAST_BAR = 5, 0.02
"""The longest bars a chart shows, and the share from which a term gets one; the rest together get the last."""
COLDEST = ("temperature_factor", "temperature_factor_at_0_25", "dew_point_margin_k", "mould_margin_k")
"""Numbers of the coldest spot of a finding."""
_OF_SPOT = (
    *("extreme_c", "max_c", "delta_k", "delta_ambient_k", "delta_ambient_in_calm_k", *OF_TWINS),
    *("delta_neighbours_k", "above_limit_k", "above_allowed_k"),
)
"""Numbers that a spot too small, or beyond the range, makes a bound."""
_NO_DIFFERENCE = Estimate(0.0, 0.0)
_COLUMNS = ("load_a", "max_c", "mean_c", "delta_similar_k", "delta_ambient_k", "at_rated_load")
_NO_CHANCE = 1e-9
_NEAR_EDGE = 0.975
"""A class less probable than that has an edge within about U of the value: Φ(2) = 0.977."""


@dataclass(frozen=True, slots=True)
class Line:
    """One input in a budget, in words and with units; `bar` is its length in percent."""

    name: str
    u: str
    sensitivity: str
    contribution: str
    share: str
    bar: int


@dataclass(frozen=True, slots=True)
class Shown:
    """The budget of one number: its key, name and reading, the unit of contributions, lines, a chart of the largest."""

    key: str
    name: str
    reading: str
    unit: str
    lines: tuple[Line, ...]
    chart: tuple[Line, ...]


@dataclass(frozen=True, slots=True)
class Change:
    """Changes of single inputs, each in words, that would put something into another class."""

    class_: str
    inputs: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Weighed:
    """One assessment, whether it decides, and in words what it is worth; nothing where there is no other."""

    one: Assessment
    decides: bool
    weight: str

    @property
    def is_aside(self) -> bool:
        """Whether what it asks for is no call to action here: it is then drawn as an outline."""
        return bool(self.weight) and not self.decides


def weighed(assessments: tuple[Assessment, ...]) -> tuple[Weighed, ...]:
    """All assessments of a result, the one that decides first."""
    deciding = next((one for one in assessments if one.governs), None)
    if len(assessments) < 2:
        return tuple(Weighed(one, one.governs, "") for one in assessments)
    ordered = sorted(assessments, key=lambda one: one is not deciding)
    return tuple(Weighed(one, one is deciding, _weight(one, deciding)) for one in ordered)


def reading(item: Item, key: str, *, unit: bool = True, style: Style = SI) -> str:
    """One number of a finding or component ± U, with its unit, and with ≥ or ≤ where the reading is only a bound."""
    if key == "delta_similar_k" and is_coolest(item):
        return say("is_the_reference")
    estimate: Estimate | None = getattr(item, key)
    text = numbers.measured(estimate, key, unit=unit, style=style)
    return text if estimate is None or text == numbers.NOTHING else bounded(item, key, text)


def is_coolest(item: Item) -> bool:
    """Whether it is the twin that all others of its group are held against: its own difference is 0 by definition."""
    return isinstance(item, ComponentReport) and item.similar_to is None and item.delta_similar_k == _NO_DIFFERENCE


def columns(components: tuple[ComponentReport, ...]) -> tuple[str, ...]:
    """What a table of components has a column for: whatever one of them has at least; no load of a module or arrester.

    Keys of numbers, "load_a" and "at_rated_load"."""
    told = {
        "load_a": any(load(item, item.load_a, item.rated_a) for item in components),
        "at_rated_load": any(rated(item) for item in components),
    }
    return tuple(key for key in _COLUMNS if told.get(key, any(getattr(item, key) for item in components)))


def bounded(item: Item, key: str, text: str) -> str:
    """A number of a finding or component in words, with ≥ or ≤ before it where it is only a bound."""
    if not is_bound(item, key):
        return text
    return f"{'≤' if isinstance(item, Finding) and item.sense == 'cold' else '≥'}\u00a0{text}"


def interval(item: Item, key: str, *, style: Style = SI) -> str:
    """The 95 % interval of one number where it was drawn and the reading is not only a bound; else ""."""
    return "" if is_bound(item, key) else numbers.interval_of(getattr(item, key), key, style=style)


def is_bound(item: Item, key: str) -> bool:
    """Whether a reading tells only how far the truth lies at least: beyond the range, smaller than the spot."""
    if key in OF_TWINS and "twin size-limited" in item.flags:
        return False
    if key in ("mean_c", "mean_delta_k"):
        return is_saturated(item)
    if not (is_saturated(item) or "size-limited" in item.flags):
        return False
    if isinstance(item, Finding) and key in COLDEST:
        return item.sense == "cold"  # the true spot is colder still; of a warm finding the coldest is not its extreme
    return key in _OF_SPOT


def exceeds(item: Item) -> str:
    """The probability that a finding's ΔT truly exceeds the least that counts, where it is known; else "".

    What carries an uncertainty is never certain: a probability that rounds to 1 is still shown as above 99 %."""
    return chance(item.exceeds_threshold) if isinstance(item, Finding) else ""


def chance(probability: float | None) -> str:
    """A probability in percent, never 0 or 100 %; "" where there is none."""
    return "" if probability is None else numbers.percent(min(max(probability, _NO_CHANCE), 1 - _NO_CHANCE))


def rated(item: ComponentReport, *, style: Style = SI) -> str:
    """Its rise over a similar one at rated load; "" where there is none, as of the twin all are compared with."""
    band = item.at_rated_load.delta_similar_k if item.at_rated_load else None
    if band is None or band.low == band.high == 0:
        return ""
    low, high = (numbers.converted(end, "delta_similar_k", style=style) for end in (band.low, band.high))
    return say("from_to", low=numbers.number(low, 2, style=style), high=numbers.number(high, 2, style=style))


def load(item: Item | None, load_a: float | None, rated_a: float | None, *, style: Style = SI) -> str:
    """The load of a part and what it is of: "200 A of 400 A rated (50 %)"; "" where load is not what heats it."""
    if load_a is None and rated_a is None and item and "load unknown" not in item.flags:
        return ""
    stated, rating = (numbers.with_symbol(numbers.number(current, style=style), "A") for current in (load_a, rated_a))
    if load_a is None:
        return say("not_recorded") if rated_a is None else say("load_rating_only", rated=rating)
    if not rated_a:
        return say("load_without_rating", load=stated)
    return say("load_of_rating", load=stated, rated=rating, share=numbers.percent(load_a / rated_a))


def budgets(item: Item, *, style: Style = SI) -> tuple[Shown, ...]:
    """The budgets of a finding or component: of the number it is judged by, of other differences, of the rest."""
    first = _judged(item)
    keys = sorted(item.budgets, key=lambda key: (key != first, not key.startswith("delta_")))
    return tuple(_shown(item, key, item.budgets[key], style) for key in keys if item.budgets[key])


def changes(item: Item, *, style: Style = SI) -> tuple[Change, ...]:
    """What would change the class, by the class it would become."""
    return tuple(
        Change(texts.class_name(class_), tuple(_told(flip, style) for flip in item.flips if flip.class_ == class_))
        for class_ in dict.fromkeys(flip.class_ for flip in item.flips)
    )


def probabilities(assessment: Assessment) -> dict[str, float]:
    """The classes that come into question where an edge is near; nothing where one class is as good as certain."""
    told = {texts.class_name(name): p for name, p in assessment.probabilities.items() if p >= _LEAST_SHARE}
    return told if max(told.values(), default=1.0) < _NEAR_EDGE else {}


def _weight(one: Assessment, deciding: Assessment | None) -> str:
    """What an assessment is worth beside the one that decides.

    A joint with a valid twin is judged by that alone; without one, or where all of them are warm, the air decides."""
    if one is deciding:
        return say("decides")
    if deciding and deciding.quantity in OF_TWINS and one.quantity in OVER_AIR:
        return say("twins_decide")
    if deciding and deciding.quantity in OVER_AIR and one.quantity in OF_TWINS:
        return say("air_decides")
    return say("decides_not")


def _judged(item: Item) -> str | None:
    """Key of the number that the governing assessment judges."""
    assessment = governing(item.assessments)
    return assessment.quantity if assessment else None


def _shown(item: Item, key: str, terms: tuple[BudgetTerm, ...], style: Style) -> Shown:
    listed = tuple(_line(term, key, style) for term in terms if abs(term.share) >= _LEAST_SHARE)
    charted = [term for term in terms if term.share >= _LEAST_BAR][:_BARS]
    return Shown(
        key=key,
        name=texts.name(key),
        reading=reading(item, key, style=style),
        unit=texts.symbol(numbers.difference_unit(key, style=style)),
        lines=(*listed, *_rest([term for term in terms if abs(term.share) >= _LEAST_SHARE])),
        chart=(*(_line(term, key, style) for term in charted), *_rest(charted)),
    )


def _line(term: BudgetTerm, key: str, style: Style) -> Line:
    of_input, of_number = (numbers.difference_scale(name, style) for name in (term.input, key))
    slope = numbers.number(term.sensitivity * of_number.factor / of_input.factor, 2, style=style)
    return Line(
        name=texts.name(term.input),
        u=numbers.in_symbol(term.u, of_input, 2, style=style),
        sensitivity=numbers.with_symbol(slope, _per(of_number.symbol, of_input.symbol)),
        contribution=numbers.number(term.contribution * of_number.factor, 2, style=style),
        share=numbers.percent(term.share),
        bar=_bar(term.share),
    )


def _rest(named: list[BudgetTerm]) -> tuple[Line, ...]:
    """What the named terms leave of the variance, as a line of its own."""
    share = 1 - sum(term.share for term in named)
    if abs(share) < 1e-3:  # nothing a whole percent could show
        return ()
    return (Line(say("other_inputs"), "", "", "", numbers.percent(share), _bar(share)),)


def _bar(share: float) -> int:
    return round(100 * min(max(share, 0.0), 1.0))


def _per(of_number: str, of_input: str) -> str:
    number = texts.symbol(of_number)
    return say("per", number=number, unit=texts.symbol(of_input.removesuffix("s"))).strip() if of_input else number


def _told(flip: Flip, style: Style) -> str:
    """A change of one input in words: "−1.3 K in reflected apparent temperature"."""
    to = numbers.difference_scale(flip.input, style)
    change = numbers.with_symbol(numbers.signed(flip.change * to.factor, style=style), to.symbol)
    return say("change_in", change=change, input=texts.inside(flip.input))
