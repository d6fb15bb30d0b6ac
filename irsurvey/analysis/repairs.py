"""The repair list of a survey: every electrical part that asks for something or was not cleared, the worst first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from irsurvey.assess.building import judged
from irsurvey.assess.conformity import ACT, NOT_SETTLED
from irsurvey.assess.criteria import Criterion, criteria
from irsurvey.assess.repairs import action, confidence, inspect_again, repairs, situation
from irsurvey.model import Assessment, AssetReport, ComponentReport, Estimate, Finding, FrameReport, RepairItem
from irsurvey.texts import state

SIMILAR, AMBIENT, REFERENCE, NEIGHBOURS = "similar", "ambient", "reference", "neighbours"
_COMPARED = {
    "delta_similar_k": SIMILAR,
    "delta_neighbours_k": NEIGHBOURS,
    "delta_ambient_k": AMBIENT,
    "delta_k": REFERENCE,
}
"""Differences that a line may show → what they were taken against."""
_SHOWN_FOR = {
    "delta_similar_in_calm_k": "delta_similar_k",
    "relative_difference_percent": "delta_similar_k",
    "delta_ambient_in_calm_k": "delta_ambient_k",
    "above_limit_k": "delta_ambient_k",
    "above_allowed_k": "delta_ambient_k",
}
"""Number that governs → the difference, as it was measured, that stands for it."""

Item = ComponentReport | Finding


def repair_list(
    frames: Sequence[FrameReport], assets: Sequence[AssetReport], known: Mapping[str, Criterion] | None = None
) -> tuple[RepairItem, ...]:
    """Every component and finding of electrical frames that is not cleared, as the lines of a repair list.

    First what asks for action, by urgency, then confidence, then |ΔT|; below what is only to be looked at again.  The
    confidence is the probability of the urgency given or a higher one: the class probabilities of the assessment that
    governs, summed over the classes that are at least that urgent; of a bound, at least so much.  `known`: criteria by
    name, with those of the survey's own; default: the built-in ones.  A frame that failed has nothing to list: its
    assets say so.
    """
    named = criteria() if known is None else known
    places = {asset.id: asset for asset in assets}
    electrical = [frame for frame in frames if frame.kind == "electrical"]
    seen: list[tuple[FrameReport, Item]] = [(frame, item) for frame in electrical for item in frame.components]
    seen += [(frame, item) for frame in electrical for item in frame.findings]
    return repairs(_line(frame, item, places, named) for frame, item in seen if item.outcome in (ACT, NOT_SETTLED))


def _line(
    frame: FrameReport,
    item: Item,
    places: Mapping[str, AssetReport],
    known: Mapping[str, Criterion],
) -> RepairItem:
    governing = _governing(item.assessments)
    criterion = known.get(governing.criterion) if governing else None
    number = getattr(item, governing.quantity, None) if governing and governing.quantity else None
    seen = judged(criterion, number) if criterion is not None and number is not None else None
    of = situation(
        governing.quantity if governing else "",
        item.flags,
        methods=criterion.methods if criterion else (),
        sense=item.sense if isinstance(item, Finding) else "",
    )
    delta, basis = _difference(item, governing)
    place = places.get(frame.asset or "")
    load, rated = (item.load_a, item.rated_a) if isinstance(item, ComponentReport) else (None, None)
    return RepairItem(
        rank=0,  # set where the list is put in order
        key=item.key,
        frame=frame.id,
        what=_what(item),
        asset=frame.asset,
        location=(place.location if place else "") or frame.label,
        urgency=item.urgency,
        class_=governing.class_ if governing else None,
        confidence=confidence(governing, criterion, seen),
        delta_k=delta,
        delta_basis=basis,
        load_a=load,
        rated_a=rated,
        action=action(item.urgency, of, item.flags),
        inspect_again=inspect_again(item.urgency, of, item.flags),
    )


def _governing(assessments: Sequence[Assessment]) -> Assessment | None:
    """The assessment that decides; where none is marked, as without any urgency, the first."""
    return next((one for one in assessments if one.governs), next(iter(assessments), None))


def _difference(item: Item, governing: Assessment | None) -> tuple[Estimate | None, str]:
    """The difference that decides and its basis, or else the first that there is."""
    wanted = governing.quantity if governing else ""
    for key in _in_question(_SHOWN_FOR.get(wanted, wanted)):
        estimate = getattr(item, key, None)
        if estimate is not None:
            return estimate, _COMPARED[key]
    return None, REFERENCE if isinstance(item, Finding) else AMBIENT


def _in_question(first: str) -> Iterator[str]:
    if first in _COMPARED:
        yield first
    yield from ("delta_k", "delta_ambient_k", "delta_similar_k", "delta_neighbours_k")


def _what(item: Item) -> str:
    if isinstance(item, ComponentReport):
        told = f"{item.name} ({item.group})" if item.group else item.name
        return state("found_by_program", part=told) if item.is_found else told
    return state("region_warmer" if item.sense == "hot" else "region_colder", number=item.label)
