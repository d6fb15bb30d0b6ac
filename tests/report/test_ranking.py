"""What comes first in a report, and which assessment decides."""

from __future__ import annotations

from dataclasses import replace

from irsurvey.model import Assessment, ComponentReport, Estimate, Report
from irsurvey.report.ranking import governing, in_order


def assessment(criterion: str, urgency: int | None, *, governs: bool = False) -> Assessment:
    return Assessment(criterion, None, urgency, "", {}, "", governs)


def test_the_marked_assessment_governs_even_below_a_more_urgent_one() -> None:
    marked = assessment("a", 1, governs=True)
    assert governing((assessment("b", 4), marked)) is marked


def test_without_a_mark_the_most_urgent_governs() -> None:
    urgent = assessment("b", 3)
    assert governing((assessment("a", 0), urgent, assessment("c", None))) is urgent


def test_what_may_not_be_classed_outranks_what_asks_for_nothing() -> None:
    unclassed = assessment("a", None)
    assert governing((assessment("b", 0), unclassed)) is unclassed


def test_without_assessments_nothing_governs() -> None:
    assert governing(()) is None


def names(report: Report) -> list[str]:
    return [entry.item.name if isinstance(entry.item, ComponentReport) else entry.item.id for entry in in_order(report)]


def test_saturated_first_then_urgency_then_unclassed_before_no_action(report: Report) -> None:
    assert names(report) == ["S01-1", "phase 2 lug", "F01-1", "phase 3 bare bar", "F01-2", "phase 1 lug"]


def test_what_is_colder_than_the_range_does_not_lead(report: Report) -> None:
    # A clear sky at the edge of a picture is as cold: only heat comes before everything else.
    frames = tuple(
        replace(
            frame,
            findings=tuple(replace(one, sense="cold") if one.id == "S01-1" else one for one in frame.findings),
        )
        for frame in report.frames
    )
    assert names(replace(report, frames=frames))[0] != "S01-1"


def test_at_one_urgency_the_larger_deviation_times_area_leads(report: Report) -> None:
    wall = report.frames[0]
    small = replace(wall.findings[0], area_m2=Estimate(0.1, 0.01), mean_delta_k=Estimate(-4.0, 0.1))
    large = replace(wall.findings[1], urgency=2, area_m2=Estimate(1.0, 0.1), mean_delta_k=Estimate(-2.0, 0.1))
    assert names(replace(report, frames=(replace(wall, findings=(small, large)),))) == ["F01-2", "F01-1"]


def test_the_number_of_an_entry_is_the_one_on_the_picture(report: Report) -> None:
    places = {entry.item.key: entry.place for entry in in_order(report)}
    for frame in report.frames:
        assert [places[finding.key] for finding in frame.findings] == [finding.label for finding in frame.findings]
        assert [places[part.key] for part in frame.components] == list(range(1, len(frame.components) + 1))
