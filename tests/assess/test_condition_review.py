"""Conditions of a survey: requirements as data, verdicts, and what may be claimed."""

from __future__ import annotations

from math import nan

import pytest

from irsurvey.assess.conditions import LEVELS, claim, requirement_sets, review
from irsurvey.assess.criteria import MARKS, METHODS

GOOD = {"air_difference_k": 20.0, "wind_m_s": 2.0, "hours_since_sun": 12.0, "hours_since_rain": 48.0}


def verdicts(recorded: dict[str, float | None], kind: str = "building", method: str = "envelope") -> list[str]:
    return [row.verdict for row in review(kind, method, recorded)]


# Limits of EN 13187 as applied in practice (quoted by secondary texts): 10 K, 5 m/s, 2 h without sun, 24 h dry.
@pytest.mark.parametrize(
    ("key", "meets", "fails", "then"),
    [
        ("air_difference_k", 10.0, 9.99, "not valid"),
        ("wind_m_s", 5.0, 5.01, "qualitative"),
        ("hours_since_sun", 2.0, 1.99, "not valid"),
        ("hours_since_rain", 24.0, 23.9, "qualitative"),
    ],
)
def test_each_requirement_of_an_envelope_survey_has_its_limit(key: str, meets: float, fails: float, then: str) -> None:
    assert verdicts({**GOOD, key: meets}) == ["met"] * 4
    assert claim("building", "envelope", {**GOOD, key: meets})[0] == "quantitative"
    assert verdicts({**GOOD, key: fails}).count("not met") == 1
    level, reason = claim("building", "envelope", {**GOOD, key: fails})
    assert level == then
    assert f"{fails:g}" in reason


@pytest.mark.parametrize("missing", [None, nan])
def test_what_nobody_recorded_is_never_taken_as_met(missing: float | None) -> None:
    assert verdicts({}) == ["not recorded"] * 4
    assert verdicts(dict.fromkeys(GOOD, missing)) == ["not recorded"] * 4
    assert [row.value for row in review("building", "envelope", dict.fromkeys(GOOD, missing))] == [None] * 4
    assert claim("building", "envelope", {})[0] == "qualitative"


def test_unrecorded_weather_is_named_in_the_reason_of_a_quantitative_claim() -> None:
    level, reason = claim("building", "envelope", {"air_difference_k": 15.0})
    assert level == "quantitative"
    assert "wind: not recorded" in reason


def test_the_worst_requirement_decides() -> None:
    level, reason = claim("building", "envelope", {**GOOD, "wind_m_s": 9.0, "air_difference_k": 3.0})
    assert level == "not valid"
    assert "3 K" in reason
    assert "9 m/s" not in reason


# NFPA 70B-2023, 7.4, as quoted: at least 40 % of load.
@pytest.mark.parametrize(
    ("load", "verdict", "level"),
    [(0.40, "met", "quantitative"), (0.39, "not met", "qualitative"), (None, "not recorded", "qualitative")],
)
def test_the_load_of_a_contact_survey(load: float | None, verdict: str, level: str) -> None:
    assert verdicts({"load_ratio": load}, "electrical", "contact") == [verdict]
    assert claim("electrical", "contact", {"load_ratio": load})[0] == level


def test_a_row_carries_its_group_bound_value_and_source() -> None:
    row = review("building", "envelope", GOOD, "north")[0]
    assert (row.group, row.requirement, row.value) == ("north", "≥ 10 K", 20.0)
    assert row.source == "EN 13187 as applied [S]"


def test_a_method_without_requirements_is_qualitative_and_says_why() -> None:
    assert review("electrical", "pv", {}) == ()
    level, reason = claim("electrical", "pv", {})
    assert level == "qualitative"
    assert "pv" in reason


def test_every_requirement_is_well_formed() -> None:
    for one in requirement_sets():
        assert set(one.methods) <= set(METHODS[one.kind])
        assert one.requirements
        for requirement in one.requirements:
            assert requirement.source
            assert requirement.mark in MARKS
            assert {requirement.if_not_met, requirement.if_not_recorded} <= set(LEVELS)
            assert (requirement.at_least is None) != (requirement.at_most is None)
