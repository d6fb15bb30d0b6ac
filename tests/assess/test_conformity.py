"""Decisions with uncertainty, against JCGM 106:2012, scipy's normal distribution and exact limits."""

from __future__ import annotations

from math import nan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import norm

from irsurvey.assess.conformity import accepted, class_probabilities, exceedance
from irsurvey.assess.criteria import class_of, criteria, load_criterion

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


def test_the_class_probabilities_of_14_2_k() -> None:
    expected = {"alike": 0.0, "slight": 0.0, "clear": 0.7475, "severe": 0.2525}  # Φ by table, four digits
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
    for place in np.ndindex(values.shape):
        one = values[place], u[place[1]]
        np.testing.assert_array_equal(over[place], exceedance(*one, 3.0))
        assert cleared[place] == accepted(*one, SIMILAR)
        for name, p in class_probabilities(*one, SIMILAR).items():
            np.testing.assert_array_equal(together[name][place], p)


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
