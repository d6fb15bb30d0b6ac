"""One finding or component as people see it: readings that are bounds, budgets, and what a class hangs on."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from irsurvey.model import Assessment, BudgetTerm, ComponentReport, Estimate, Finding, Flip, Report
from irsurvey.report import results
from irsurvey.report.results import budgets, changes, exceeds, interval, probabilities, reading


@pytest.fixture
def wall_finding(report: Report) -> Finding:
    return report.frames[0].findings[0]


@pytest.mark.parametrize(
    ("change", "text"),
    [
        ({"flags": ("saturated",)}, "≥ 71.5 ± 2.8 °C"),
        ({"flags": ("size-limited",)}, "≥ 71.5 ± 2.8 °C"),
        ({"flags": ()}, "71.5 ± 2.8 °C"),
        ({"flags": ("saturated",), "max_c": None}, "–"),
    ],
)
def test_a_reading_that_is_a_bound_is_shown_as_one(report: Report, change: dict[str, Any], text: str) -> None:
    part: ComponentReport = replace(report.frames[3].components[1], **change)
    assert reading(part, "max_c").replace("\u00a0", " ") == text


def test_a_small_cold_finding_is_at_most_its_reading(report: Report) -> None:
    finding: Finding = replace(report.frames[0].findings[0], flags=("size-limited",), extreme_c=Estimate(15.0, None))
    assert reading(finding, "extreme_c").replace("\u00a0", " ") == "≤ 15 °C"
    assert reading(finding, "area_m2").replace("\u00a0", " ") == "0.419 ± 0.043 m²"


def test_a_difference_of_two_parts_that_are_both_too_small_is_no_bound(report: Report) -> None:
    part = replace(report.frames[3].components[1], flags=("size-limited", "twin size-limited"))
    assert not reading(part, "delta_similar_k").startswith("≥")
    assert reading(part, "delta_ambient_k").startswith("≥")


def test_a_bound_has_no_interval(report: Report) -> None:
    part = report.frames[3].components[1]
    assert interval(part, "max_c").replace("\u00a0", " ") == "68.9 to 74.4 (95 %)"
    assert interval(replace(part, flags=("saturated",)), "max_c") == ""
    assert interval(report.frames[3].components[0], "max_c") == ""


@pytest.mark.parametrize(
    ("p", "text"), [(0.9991, "> 99 %"), (1.0, "> 99 %"), (0.62, "62 %"), (0.0, "< 1 %"), (None, "")]
)
def test_a_deviation_is_never_certain_to_count(wall_finding: Finding, p: float | None, text: str) -> None:
    assert exceeds(replace(wall_finding, exceeds_threshold=p)).replace("\u00a0", " ") == text


def test_of_a_component_no_such_probability_is_told(report: Report) -> None:
    assert exceeds(report.frames[3].components[0]) == ""


def test_the_number_that_is_judged_comes_first_then_other_differences(wall_finding: Finding) -> None:
    terms = wall_finding.budgets["delta_k"]
    keys = ("extreme_c", "temperature_factor_at_0_25", "delta_k")
    finding = replace(wall_finding, budgets=dict.fromkeys(keys, terms))
    assert [shown.key for shown in budgets(finding)] == ["delta_k", "extreme_c", "temperature_factor_at_0_25"]
    by_factor = replace(
        wall_finding.assessments[1], criterion="own.toml", quantity="temperature_factor_at_0_25", governs=True
    )
    finding = replace(finding, assessments=(by_factor,))
    assert [shown.key for shown in budgets(finding)] == ["temperature_factor_at_0_25", "delta_k", "extreme_c"]


def test_a_number_without_uncertainty_has_no_budget(report: Report) -> None:
    first = report.frames[3].components[0]
    assert first.budgets["delta_similar_k"] == ()  # the coolest twin against itself
    assert [shown.key for shown in budgets(first)] == ["delta_ambient_k"]
    assert budgets(report.frames[3].findings[0]) == ()


def test_a_line_of_a_budget_has_the_units_of_input_and_number(wall_finding: Finding) -> None:
    # hand-worked from the record: |slope · u| is the contribution, its square over u² = 4.4² the share
    lines = {line.name: line for shown in budgets(wall_finding) for line in shown.lines if shown.key != "delta_k"}
    offset, radiant, factor = (
        lines[name]
        for name in (
            "Camera offset",
            "Mean radiant temperature",
            "Film coefficient, as a factor of the one calculated",
        )
    )
    spaces = "\u00a0"
    assert (offset.u, offset.sensitivity, offset.contribution) == (f"0.58{spaces}K", f"6.4{spaces}W/m² per K", "3.7")
    assert (offset.share, offset.bar) == (f"71{spaces}%", 71)  # (6.4 · 0.58 / 4.4)² = 0.712
    assert radiant.sensitivity == f"−4.1{spaces}W/m² per K"  # a temperature in °C is as uncertain as it is in K
    assert (factor.u, factor.sensitivity) == ("0.1", f"9.7{spaces}W/m²")


def test_small_terms_are_shown_together_and_all_shares_make_one(wall_finding: Finding) -> None:
    shares = (0.6, 0.3, 0.06, 0.02, 0.004, 0.003, 0.003)
    terms = tuple(BudgetTerm(f"emissivity:{n}", 0.01, 1.0, 0.01, share) for n, share in enumerate(shares))
    (shown,) = budgets(replace(wall_finding, budgets={"delta_k": terms}))
    assert [line.share.replace("\u00a0", " ") for line in shown.lines] == ["60 %", "30 %", "6 %", "2 %", "2 %"]
    assert [line.bar for line in shown.chart] == [60, 30, 6, 2, 2]
    assert shown.lines[-1].name == shown.chart[-1].name == "All other inputs together"


def test_a_share_that_a_correlation_takes_away_is_told_and_has_no_bar(wall_finding: Finding) -> None:
    terms = tuple(
        BudgetTerm(name, 0.5, 1.0, 0.5, share) for name, share in (("air_c", 0.7), ("ambient_c", 0.5), ("sky_c", -0.2))
    )
    (shown,) = budgets(replace(wall_finding, budgets={"delta_k": terms}))
    assert [line.share.replace("\u00a0", " ") for line in shown.lines] == ["70 %", "50 %", "−20 %"]
    assert [line.bar for line in shown.lines] == [70, 50, 0]


def test_changes_are_gathered_by_the_class_they_lead_to(report: Report) -> None:
    fragile = changes(report.frames[0].findings[1])
    assert [change.class_ for change in fragile] == ["slight deviation", "severe deviation"]
    assert [text.replace("\u00a0", " ") for change in fragile for text in change.inputs] == [
        "−1.3 K in reflected apparent temperature",
        "+0.021 in emissivity",
        "+9.1 points in relative humidity",
    ]


def test_a_component_is_fragile_in_the_same_words(report: Report) -> None:
    part = replace(report.frames[3].components[0], flips=(Flip("load_exponent", 0.1, "marked"),))
    assert changes(part)[0].inputs == ("+0.1 in load exponent (rise grows as load to its power)",)


@pytest.mark.parametrize(
    ("stated", "shown"),
    [
        ({"a": 0.25, "b": 0.75}, {"a": 0.25, "b": 0.75}),
        ({"a": 0.023, "b": 0.974, "c": 0.003}, {"a": 0.023, "b": 0.974}),
        ({"a": 0.02, "b": 0.98}, {}),  # an edge 2.05 u away: beyond U, so not near
        ({"a": 1.0, "b": 0.0}, {}),
        ({}, {}),
    ],
)
def test_probabilities_are_told_where_an_edge_is_within_u(
    wall_finding: Finding, stated: dict[str, float], shown: dict[str, float]
) -> None:
    assert probabilities(replace(wall_finding.assessments[0], probabilities=stated)) == shown


def weighed_against(deciding: str, *others: str) -> list[str]:
    """What is said of assessments of these numbers where the first decides; it stands second among them."""
    made = [Assessment(key, "hot", 2, "", {}, "", governs=key == deciding, quantity=key) for key in (deciding, *others)]
    told = results.weighed((*made[1:2], made[0], *made[2:]))
    assert [one.decides for one in told] == [True, *(False for _ in others)]
    assert [one.is_aside for one in told] == [False, *(True for _ in others)]
    return [one.weight for one in told]


def test_the_assessment_that_decides_comes_first_and_the_others_say_why_they_do_not() -> None:
    assert weighed_against("delta_similar_k", "delta_ambient_k", "above_limit_k") == [
        "Decides",
        "does not decide here: twins decide",
        "does not decide here",
    ]
    assert weighed_against("delta_ambient_in_calm_k", "relative_difference_percent") == [
        "Decides",
        "does not decide here: the rise over air does",
    ]
    alone = Assessment("a", "hot", 2, "", {}, "", governs=True)
    assert [(one.decides, one.weight, one.is_aside) for one in results.weighed((alone,))] == [(True, "", False)]
    unsettled = results.weighed((replace(alone, governs=False), replace(alone, governs=False)))
    assert [one.decides for one in unsettled] == [False, False]
    assert results.weighed(()) == ()
