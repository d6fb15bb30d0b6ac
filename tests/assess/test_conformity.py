"""Decisions with uncertainty, against JCGM 106:2012, scipy's normal distribution and exact limits."""

from __future__ import annotations

from math import nan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import norm

from irsurvey.assess.conformity import (
    FOUR_WAY,
    OUTCOMES,
    accepted,
    action_probability,
    class_probabilities,
    exceedance,
    exceeds,
    four_way,
    four_way_by,
    outcome,
    specific_risk,
)
from irsurvey.assess.criteria import Criterion, class_of, criteria, load_criterion

SIMILAR = criteria()["neta-similar"]
FACTOR = criteria()["temperature-factor-de"]

INTERVAL = """
name = "interval"
title = "The interval of JCGM 106:2012, 7.4"
edition = "2012"
kind = "electrical"
methods = ["contact"]
applies_to = "component"
quantity = "delta_similar_k"
sense = "hot"
source = "JCGM 106:2012"
mark = "P"
notes = "a test"
classes = [
  { name = "below", below = 12.5, urgency = 0, statement = "x" },
  { name = "inside", at_least = 12.5, at_most = 16.3, urgency = 1, statement = "x" },
  { name = "above", above = 16.3, urgency = 2, statement = "x" },
]
"""


def test_the_interval_example_of_jcgm_106() -> None:
    probabilities = class_probabilities(13.6, 1.8, load_criterion(INTERVAL, "interval"))
    assert probabilities["inside"] == pytest.approx(0.6626, abs=5e-5)  # last printed digit, JCGM 106:2012, 7.4


# Computed from Φ((y − T_U)/u) of JCGM 106:2012, printed to three digits: half the last one is the tolerance.
@pytest.mark.parametrize(
    ("delta", "probability"),
    [(12.0, 0.006), (14.0, 0.202), (15.0, 0.5), (16.0, 0.798), (17.4, 0.977), (18.0, 0.994)],
)
def test_the_probability_of_exceeding_a_limit_of_15_k(delta: float, probability: float) -> None:
    assert exceedance(delta, 1.2, 15.0) == pytest.approx(probability, abs=5e-4)


def test_the_one_sided_examples_of_jcgm_106() -> None:
    # JCGM 106:2012, 7.3.3, figures from memory, last printed digit: a breakdown voltage of −5.47 V, u 0.05 V,
    # with the upper limit −5.40 V, and a bursting pressure of 509.7 kPa, u 8.6 kPa, with the lower limit 490 kPa
    assert 1 - exceedance(-5.47, 0.05, -5.40) == pytest.approx(0.92, abs=5e-3)
    assert exceedance(509.7, 8.6, 490.0) == pytest.approx(0.99, abs=5e-3)


def test_the_resistor_example_of_jcgm_106() -> None:
    # JCGM 106:2012, 9.5: resistors of 1500 Ω with u 0.12 Ω and tolerance ±0.20 Ω; one in ten does not conform
    # (the inputs as quoted in public scripts, the result from memory, printed without decimals of a percent)
    outside = exceedance(1500.0, 0.12, 1500.20) + 1 - exceedance(1500.0, 0.12, 1499.80)
    assert outside == pytest.approx(0.10, abs=5e-3)


def test_the_guarded_rejection_example_of_jcgm_106() -> None:
    # JCGM 106:2012, 8.3.3, figures from memory: at a limit of 100 km/h and u = 2 % of the speed, 107 km/h is the first
    # whole km/h at which the limit was exceeded with 99.9 % probability
    speeds = np.array([106.0, 107.0])
    assert (exceedance(speeds, 0.02 * speeds, 100.0) >= 0.999).tolist() == [False, True]


# ILAC-G8:09/2019, table of decision rules: guard band in units of U = 2 u, and the highest specific risk of accepting
# wrongly.  0.50 and 0.025 as quoted publicly by laboratories, the other rows from memory.
@pytest.mark.parametrize(("in_U", "highest"), [(0, 0.50), (0.83, 0.05), (1, 0.025), (1.5, 0.0016), (3, 1e-6)])
def test_the_specific_risks_of_the_decision_rules_of_ilac_g8(in_U: float, highest: float) -> None:
    guard = 2 * in_U
    at_the_limit = specific_risk(-guard, 1.0, 0.0, guard=guard)
    assert at_the_limit <= highest
    assert at_the_limit > highest / 2 or in_U == 3  # the printed bound is the rounded risk; 1 ppm is a round one
    inside = specific_risk(-guard - np.array([0.1, 1.0, 5.0]), 1.0, 0.0, guard=guard)
    assert (inside < at_the_limit).all()


def test_the_specific_risk_is_the_consumers_where_accepted_and_the_producers_where_rejected() -> None:
    risk = specific_risk([12.0, 16.0], 1.2, 15.0)
    assert risk == pytest.approx([norm.sf(15, 12, 1.2), norm.cdf(15, 16, 1.2)], abs=1e-15)
    lower = specific_risk([18.0, 14.0], 1.2, 15.0, worse=-1)  # mirrored at the limit
    assert lower == pytest.approx(risk, abs=1e-15)
    assert np.isnan(specific_risk([nan, 1.0], [1.0, nan], 15.0)).all()


# ILAC-G8:09/2019, 4.2.3 (text seen): below T − w pass, up to T conditional pass, up to T + w conditional fail, above
# fail.  Limit 16, u 1, w 2: exact in binary.  The shared ends go to the milder side, as the limit itself conforms.
@pytest.mark.parametrize(
    ("value", "verdict"),
    [(13.9, 0), (14.0, 0), (14.1, 1), (16.0, 1), (16.1, 2), (18.0, 2), (18.1, 3)],
)
def test_the_four_way_statement_of_ilac_g8(value: float, verdict: int) -> None:
    assert four_way(value, 1.0, 16.0) == FOUR_WAY[verdict]
    assert four_way(32.0 - value, 1.0, 16.0, worse=-1) == FOUR_WAY[verdict]


def test_without_uncertainty_no_four_way_statement_is_unconditional() -> None:
    assert four_way([1.0, 30.0], [nan, -1.0], 16.0).tolist() == ["conditional pass", "conditional fail"]
    assert four_way([nan, 1.0], 1.0, [16.0, nan]).tolist() == ["", ""]
    assert four_way_by([0.0, 30.0, nan], [nan, nan, 0.1], SIMILAR).tolist() == [
        "conditional pass",
        "conditional fail",
        "",
    ]


def test_a_difference_exceeds_its_threshold_in_its_own_sense() -> None:
    # a cold difference of −1.4 ± 0.5 K against 1 K: Φ(0.8) = 0.7881 (table of the normal distribution, four digits)
    assert exceeds(-1.4, 0.5, 1.0, "cold") == pytest.approx(0.7881, abs=5e-5)
    assert exceeds(1.4, 0.5, 1.0, "hot") == pytest.approx(0.7881, abs=5e-5)
    assert exceeds(-1.4, 0.5, 1.0, "hot") == pytest.approx(norm.sf(1.0, -1.4, 0.5), abs=1e-15)
    both = norm.sf(1.0, 0.3, 0.5) + norm.cdf(-1.0, 0.3, 0.5)
    assert exceeds(0.3, 0.5, 1.0, "either") == pytest.approx(both, abs=1e-15)
    assert np.isnan(exceeds([nan, 1.0], [1.0, nan], 1.0, "hot")).all()


def test_the_class_probabilities_of_14_2_k() -> None:
    expected = {"alike": 0.0, "slight": 0.0, "marked": 0.7475, "severe": 0.2525}  # Φ by table, four digits
    assert class_probabilities(14.2, 1.2, SIMILAR) == pytest.approx(expected, abs=5e-5)


@given(st.floats(-50, 100), st.floats(1e-3, 30))
def test_class_probabilities_agree_with_scipy_and_add_up_to_one(value: float, u: float) -> None:
    found = class_probabilities(value, u, SIMILAR)
    cdf = norm.cdf([-np.inf, 1.0, 3.0, 15.0, np.inf], loc=value, scale=u)
    assert list(found.values()) == pytest.approx(list(np.diff(cdf)), abs=1e-14)  # both are rounded at 1
    assert sum(found.values()) == pytest.approx(1.0, abs=1e-14)
    assert all(0 <= p <= 1 for p in found.values())


@pytest.mark.parametrize("value", [-1.0, 0.9, 1.0, 3.0, 3.1, 15.0, 15.1])
def test_without_uncertainty_the_class_is_certain(value: float) -> None:
    found = class_of(value, SIMILAR)
    assert found is not None
    certain = {kind.name: float(kind is found) for kind in SIMILAR.classes}
    assert class_probabilities(value, 0.0, SIMILAR) == certain


def test_an_unknown_or_negative_uncertainty_gives_no_probability() -> None:
    for u in (nan, -1.0):
        assert all(np.isnan(p) for p in class_probabilities(5.0, u, SIMILAR).values())
        assert np.isnan(exceedance(5.0, u, 1.0))
        assert not accepted(0.0, u, SIMILAR)


def test_probabilities_of_arrays_are_those_of_their_numbers() -> None:
    values, u = np.array([[0.5, 2.0, nan], [14.2, 15.0, 40.0]]), np.array([0.0, 1.2, 0.5])
    together = class_probabilities(values, u, SIMILAR)
    over = exceedance(values, u, 3.0)
    cleared = accepted(values, u, SIMILAR)
    others = (
        lambda value, u: outcome(value, u, SIMILAR),
        lambda value, u: four_way(value, u, 3.0),
        lambda value, u: four_way_by(value, u, SIMILAR),
        lambda value, u: action_probability(value, u, SIMILAR),
        lambda value, u: specific_risk(value, u, 3.0, guard=2.0),
        lambda value, u: exceeds(value, u, 1.0, "either"),
    )
    whole = [function(values, u) for function in others]
    for place in np.ndindex(values.shape):
        one = values[place], u[place[1]]
        np.testing.assert_array_equal(over[place], exceedance(*one, 3.0))
        assert cleared[place] == accepted(*one, SIMILAR)
        for name, p in class_probabilities(*one, SIMILAR).items():
            np.testing.assert_array_equal(together[name][place], p)
        for function, found in zip(others, whole, strict=True):
            np.testing.assert_array_equal(found[place], function(*one))


def test_acceptance_keeps_a_guard_band_of_two_u_from_where_action_begins() -> None:
    # guard band w = U = 2 u, ILAC-G8:09/2019; action begins at 1 K, which itself belongs to "slight"
    assert accepted(0.5, 0.2, SIMILAR)
    assert not accepted(0.5, 0.25, SIMILAR)
    assert not accepted(0.5, 0.3, SIMILAR)
    # a temperature factor is worse the lower it is, and 0.70 itself meets the limit
    assert accepted(0.76, 0.02, FACTOR)
    assert not accepted(0.76, 0.04, FACTOR)


def test_a_criterion_that_never_asks_for_action_clears_nothing() -> None:
    harmless = load_criterion(INTERVAL.replace("urgency = 1", "urgency = 0").replace("urgency = 2", "urgency = 0"), "x")
    assert not accepted(0.0, 0.0, harmless)


@given(st.floats(-20, 60), st.floats(0, 20))
def test_what_is_accepted_would_be_wrong_at_most_once_in_44(value: float, u: float) -> None:
    if accepted(value, u, SIMILAR):
        assert exceedance(value, u, 1.0) <= norm.sf(2.0) + 1e-12  # one-sided, k = 2: 2.3 %


# Action begins at 1 K, which itself asks for it (classes 1/3/15 K of ANSI/NETA MTS, Table 100.18).
@pytest.mark.parametrize(
    ("value", "u", "blocked", "expected"),
    [
        (0.5, 0.2, False, "cleared"),
        (0.5, 0.2, True, "not cleared"),
        (0.5, 0.25, False, "not cleared"),
        (0.5, nan, False, "not cleared"),
        (1.0, 0.0, False, "act"),
        (1.0, 5.0, True, "act"),
        (40.0, nan, True, "act"),
        (nan, 0.1, False, "not cleared"),
    ],
)
def test_the_three_outcomes(value: float, u: float, blocked: bool, expected: str) -> None:
    assert outcome(value, u, SIMILAR, blocked) == expected


def test_action_begins_at_the_lowest_urgency_above_none_of_each_criterion() -> None:
    assert outcome([0.69, 0.70, 0.75], 0.01, FACTOR).tolist() == ["act", "not cleared", "cleared"]
    for criterion in criteria().values():
        edges = [kind for kind in criterion.classes if kind.urgency > 0]
        least = min(kind.urgency for kind in edges)
        first = next(kind for kind in edges if kind.urgency == least)
        inside = first.high - 1e-6 if np.isinf(first.low) else first.low + 1e-6
        assert outcome(inside, 0.0, criterion) == "act"


def test_a_criterion_that_never_asks_for_action_settles_nothing() -> None:
    harmless = load_criterion(INTERVAL.replace("urgency = 1", "urgency = 0").replace("urgency = 2", "urgency = 0"), "x")
    assert outcome(14.0, 0.0, harmless) == "not cleared"
    assert four_way_by(14.0, 0.0, harmless) == ""
    assert action_probability(14.0, 1.0, harmless) == 0


DOUBTFUL = st.one_of(st.floats(0, 20), st.just(nan), st.floats(-5, -1e-3))


@given(st.floats(-20, 60), DOUBTFUL, st.sampled_from([SIMILAR, FACTOR]), st.booleans())
def test_a_blocker_or_a_larger_uncertainty_never_clears_anything(
    value: float, u: float, criterion: Criterion, blocked: bool
) -> None:
    found = outcome(value, u, criterion, blocked)
    assert found in OUTCOMES
    assert not (blocked and found == "cleared")
    if outcome(value, u + 0.5, criterion) == "cleared":
        assert u >= -0.5
        assert outcome(value, max(u, 0.0), criterion) == "cleared"
    kind = class_of(value, criterion)
    assert kind is not None
    assert (found == "act") == (kind.urgency > 0)  # simple acceptance, whatever u and blockers


@given(st.floats(-20, 60), st.floats(0, 20), st.floats(0, 20), st.sampled_from([SIMILAR, FACTOR]))
def test_a_worse_value_never_has_a_milder_outcome(value: float, u: float, step: float, criterion: Criterion) -> None:
    worse = value + criterion.worse * step
    assert OUTCOMES.index(outcome(worse, u, criterion).item()) >= OUTCOMES.index(outcome(value, u, criterion).item())
    assert FOUR_WAY.index(four_way_by(worse, u, criterion).item()) >= FOUR_WAY.index(
        four_way_by(value, u, criterion).item()
    )


@given(st.floats(-20, 60), st.floats(0, 20), st.sampled_from([SIMILAR, FACTOR]))
def test_outcome_and_four_way_statement_agree(value: float, u: float, criterion: Criterion) -> None:
    verdict = FOUR_WAY.index(four_way_by(value, u, criterion).item())
    assert (verdict == 0) == bool(accepted(value, u, criterion))
    assert (verdict >= 2) == (outcome(value, u, criterion) == "act")
    if verdict == 3:  # even the best value within the guard band asks for action: k = 2, one-sided
        assert action_probability(value, u, criterion) >= norm.cdf(2.0) - 1e-12
    if verdict == 0:
        assert action_probability(value, u, criterion) <= norm.sf(2.0) + 1e-12
