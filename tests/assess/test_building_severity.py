"""Findings: temperature factor and contrast, against standards' limits and the definitions of the report."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.assess.building import assess_finding, factor_at_resistance, temperature_factor
from irsurvey.assess.building import judged as on_axis
from irsurvey.assess.criteria import Criterion, chosen, criteria
from irsurvey.assess.judged import Sensitivity
from irsurvey.assess.severity import (
    AUTOMATIC_REFERENCE,
    BLOCKERS,
    CONDITIONS,
    MIRRORS,
    NO_CRITERION,
    NOT_CLEARED,
    REFLECTIVE,
    SATURATED,
    SIZE_LIMITED,
    Verdict,
)
from irsurvey.model.quantities import Estimate

ENVELOPE = chosen((), "building", "envelope")
FACTOR_DE = criteria()["temperature-factor-de"]


def _at_limit(factor: float, u: float) -> tuple[float, float]:
    """A factor seen at 0.13 m² K/W at the 0.25 of the limits, and its u by half the swing over ±u."""
    low, at, high = factor_at_resistance([factor - u, factor, factor + u], 0.13, 0.25).tolist()
    return at, (high - low) / 2


def judged(
    delta: float,
    u: float | None = 0.2,
    *,
    factor: float | None = None,
    criteria_: tuple[Criterion, ...] = ENVELOPE,
    flags: tuple[str, ...] = (),
    emissivity: float = 0.92,
    viewed_from: str = "inside",
) -> Verdict:
    values = {
        "delta_k": Estimate(delta, u),
        "temperature_factor": None if factor is None else Estimate(factor, 0.01),
        "temperature_factor_at_0_25": None if factor is None else Estimate(*_at_limit(factor, 0.01)),
    }
    sense = "cold" if delta < 0 else "hot"
    return assess_finding(values, criteria_, sense=sense, emissivity=emissivity, flags=flags, viewed_from=viewed_from)


def test_the_temperature_factor_of_the_german_reference_case() -> None:
    # DIN 4108-2: 20 °C inside, −5 °C outside, 12.6 °C on the surface go with 0.70, printed to two decimals
    assert temperature_factor(12.6, 20.0, -5.0) == pytest.approx(0.70, abs=0.005)
    assert temperature_factor(285.65, 293.15, 268.15) == pytest.approx(0.70, abs=1e-12)  # 12.5 °C exactly


def test_the_temperature_factor_runs_from_outdoor_to_indoor_air() -> None:
    assert temperature_factor([268.15, 293.15], 293.15, 268.15).tolist() == [0.0, 1.0]


def test_without_a_colder_outdoors_there_is_no_temperature_factor() -> None:
    assert np.isnan(temperature_factor(290.0, 293.0, [293.0, 300.0, np.nan])).all()


def test_temperature_factors_of_arrays_are_those_of_their_numbers() -> None:
    surfaces, outdoors = np.array([[285.0], [290.0]]), np.array([270.0, 293.0, 275.0])
    together = temperature_factor(surfaces, 293.0, outdoors)
    for i, j in np.ndindex(together.shape):
        np.testing.assert_array_equal(together[i, j], temperature_factor(surfaces[i, 0], 293.0, outdoors[j]))


# Computed from series resistances, R_rest = R_si·f/(1 − f); printed to three digits.
@pytest.mark.parametrize(
    ("factor", "seen", "wanted", "expected"),
    [(0.87, 0.13, 0.25, 0.777), (0.70, 0.25, 0.13, 0.818), (0.75, 0.25, 0.13, 0.852)],
)
def test_a_factor_at_another_film_resistance(factor: float, seen: float, wanted: float, expected: float) -> None:
    assert factor_at_resistance(factor, seen, wanted) == pytest.approx(expected, abs=5e-4)


def test_the_conversion_equals_a_wall_worked_out_by_resistances() -> None:
    # EN ISO 6946 wall: 0.13 inside, 0.365 m of brick at 0.77 W/mK, 0.04 outside; f = 1 − R_si/R_total by hand
    rest = 0.365 / 0.77 + 0.04
    factor = {film: 1 - film / (film + rest) for film in (0.13, 0.25)}
    assert factor_at_resistance(factor[0.13], 0.13, 0.25) == pytest.approx(factor[0.25], abs=1e-12)


@given(st.floats(0.0, 1.0), st.floats(0.02, 1.0), st.floats(0.02, 1.0))
def test_converting_there_and_back_changes_nothing(factor: float, seen: float, wanted: float) -> None:
    there = factor_at_resistance(factor, seen, wanted)
    assert factor_at_resistance(there, wanted, seen) == pytest.approx(factor, abs=1e-12)
    if wanted >= seen:  # a thicker film of air leaves the surface colder
        assert there <= factor + 1e-12


def test_a_conversion_without_a_possible_wall_is_nan() -> None:
    assert np.isnan(factor_at_resistance([3.0, 0.5, 0.5], [0.13, 0.0, 0.13], [0.25, 0.25, -1.0])).all()


def test_conversions_of_arrays_are_those_of_their_numbers() -> None:
    factors, wanted = np.array([[0.5], [1.0], [-0.2]]), np.array([0.04, 0.25])
    together = factor_at_resistance(factors, 0.13, wanted)
    for i, j in np.ndindex(together.shape):
        assert together[i, j] == factor_at_resistance(factors[i, 0], 0.13, wanted[j])


@pytest.mark.parametrize(("delta", "urgency"), [(-0.9, 0), (-1.0, 1), (1.0, 1), (-2.99, 1), (-3.0, 2), (7.0, 2)])
def test_contrast_is_judged_by_its_magnitude(delta: float, urgency: int) -> None:  # house rule
    verdict = judged(delta, criteria_=(criteria()["building-contrast"],))
    assert verdict.urgency == urgency
    assert ("colder" if delta < 0 else "warmer") in verdict.assessments[0].statement


def test_a_cold_patch_seen_from_inside_gets_its_contrast_and_its_temperature_factor() -> None:
    contrast, factor = judged(-2.0, factor=0.87).assessments
    assert (contrast.criterion, contrast.class_) == ("building-contrast", "visible")
    assert (factor.criterion, factor.class_) == ("temperature-factor-ie", "factor meets limit")


def test_a_factor_is_classed_as_converted_and_both_are_told() -> None:
    # 0.80 is above 0.70 as seen at 0.13, but 0.675 at the 0.25 the limit assumes
    verdict = judged(-2.0, factor=0.80, criteria_=(FACTOR_DE,))
    (assessment,) = verdict.assessments
    assert assessment.class_ == "factor below limit"
    assert "0.675\u00a0±\u00a00.027" in assessment.statement  # U keeps two digits, the value its places
    assert "0.80 as seen" in assessment.statement
    assert "0.25 m² K/W the limit assumes" in assessment.statement


@pytest.mark.parametrize(("factor", "urgency"), [(0.819, 0), (0.817, 2)])
def test_the_limit_of_0_70_is_0_818_as_a_camera_sees_it(factor: float, urgency: int) -> None:
    assert judged(-2.0, factor=factor, criteria_=(FACTOR_DE,)).urgency == urgency


def test_the_most_urgent_criterion_governs_a_finding() -> None:
    verdict = judged(-1.5, factor=0.60)
    assert [one.governs for one in verdict.assessments] == [False, True]
    assert verdict.urgency == 2


def test_a_temperature_factor_is_asked_only_of_cold_findings_seen_from_inside() -> None:
    assert [one.criterion for one in judged(2.0, factor=0.9).assessments] == ["building-contrast"]
    outside = judged(-2.0, factor=0.9, viewed_from="outside")
    assert [one.criterion for one in outside.assessments] == ["building-contrast"]


def test_a_factor_that_could_not_be_worked_out_is_said_to_be_missing() -> None:
    factor = judged(-2.0, factor=None).assessments[1]
    assert (factor.class_, factor.urgency) == (None, None)
    assert "could not be measured" in factor.statement


def test_an_automatic_reference_gives_a_suggestion_without_severity() -> None:
    verdict = judged(-9.0, factor=0.9, flags=(AUTOMATIC_REFERENCE,))
    contrast, factor = verdict.assessments
    assert (contrast.class_, contrast.urgency, contrast.probabilities) == (None, None, {})
    assert "no severity until it is confirmed" in contrast.statement
    assert factor.class_ == "factor meets limit"  # needs no reference
    assert {AUTOMATIC_REFERENCE, NOT_CLEARED} <= set(verdict.flags)
    assert judged(-9.0, criteria_=ENVELOPE[:1], flags=(AUTOMATIC_REFERENCE,)).urgency is None


def test_a_reflective_patch_gets_no_class() -> None:
    verdict = judged(-4.0, emissivity=0.1)
    assert verdict.assessments[0].class_ is None
    assert REFLECTIVE in verdict.flags
    assert "tape or paint" in verdict.assessments[0].statement


def test_a_pane_that_may_mirror_has_neither_class_nor_urgency_and_is_not_cleared() -> None:
    verdict = judged(6.0, flags=(MIRRORS,))
    assert [(one.class_, one.urgency) for one in verdict.assessments] == [(None, None)]
    assert verdict.outcome == "not cleared"
    assert "moves with the camera" in verdict.assessments[0].statement


@pytest.mark.parametrize("flag", [SATURATED, SIZE_LIMITED])
def test_a_bound_is_shown_as_a_bound(flag: str) -> None:
    verdict = judged(12.0, flags=(flag,), criteria_=(criteria()["electrical-contrast"],))
    assert verdict.assessments[0].statement.startswith("≥ 12.00\u00a0±\u00a0")
    assert verdict.urgency == 2
    cold = judged(-2.0, factor=0.80, flags=(flag,), criteria_=(FACTOR_DE,))
    assert cold.assessments[0].statement.startswith("≤ 0.675")


# House rule: the edges of a part above ambient air, from the reference area.
@pytest.mark.parametrize(("delta", "urgency"), [(0.5, 0), (1.0, 1), (10.0, 1), (10.4, 2), (20.7, 3), (40.1, 4)])
def test_a_hot_spot_outside_any_component_is_graded(delta: float, urgency: int) -> None:
    verdict = judged(delta, criteria_=chosen((), "electrical", "contact"))
    assert [one.criterion for one in verdict.assessments] == ["electrical-contrast"]
    assert verdict.urgency == urgency


def test_without_a_criterion_a_finding_says_so() -> None:
    assert judged(5.0, criteria_=chosen((), "electrical", "pv")) == Verdict((), None, False, (NO_CRITERION,))


@given(
    st.floats(-60, 60),
    st.one_of(st.none(), st.floats(0, 20)),
    st.floats(-0.5, 1.5),
    st.sets(st.sampled_from([flag for flag in BLOCKERS if flag not in (AUTOMATIC_REFERENCE, MIRRORS)])),
    st.sampled_from([0.05, 0.59, 0.95]),
)
def test_no_blocker_lowers_the_urgency_of_a_finding_and_none_is_ever_cleared(
    delta: float, u: float | None, factor: float, flags: set[str], emissivity: float
) -> None:
    free = judged(delta, u, factor=factor)
    blocked = judged(delta, u, factor=factor, flags=tuple(sorted(flags)), emissivity=emissivity)
    assert not blocked.cleared
    assert (blocked.urgency or 0) >= (free.urgency or 0)
    assert (NOT_CLEARED in blocked.flags) == bool(flags or emissivity < 0.6)


def test_findings_of_an_invalid_survey_keep_their_class_and_say_so() -> None:
    verdict = judged(-4.0, flags=(CONDITIONS,))
    assert verdict.urgency == 2
    assert CONDITIONS in verdict.assessments[0].statement


def test_a_number_on_the_axis_of_its_criterion_brings_its_sensitivities_along() -> None:
    inputs = (Sensitivity("reflected", 1.0, -0.35),)
    cold = on_axis(criteria()["building-contrast"], Estimate(-2.4, 0.4), inputs)
    assert (cold.value, cold.u) == (2.4, 0.4)
    assert cold.sensitivities[0].sensitivity == 0.35  # what makes it colder makes its magnitude larger
    factor = on_axis(FACTOR_DE, Estimate(0.68, 0.01), (Sensitivity("outdoor_air", 0.5, 0.02),))
    assert (factor.value, factor.u, factor.sensitivities[0].sensitivity) == (0.68, 0.01, 0.02)


def test_a_number_without_an_uncertainty_has_none_on_the_axis() -> None:
    assert np.isnan(on_axis(FACTOR_DE, Estimate(0.8, None)).u)


def test_a_finding_that_asks_for_anything_is_acted_upon_and_no_finding_is_cleared() -> None:
    assert judged(-2.0, 5.0).outcome == "act"  # raised by the value itself
    assert judged(-0.5, 0.01).outcome == "not cleared"
    assert judged(-2.0, flags=(AUTOMATIC_REFERENCE,)).outcome == "not cleared"  # no severity until confirmed
    assert judged(-2.0, flags=(SATURATED, CONDITIONS)).outcome == "act"
