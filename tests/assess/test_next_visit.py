"""The next-visit card, against an example worked by hand and the rule that nothing is settled by a blocker."""

from __future__ import annotations

from dataclasses import replace
from math import nan, sqrt

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from irsurvey.assess.criteria import MARKS, criteria
from irsurvey.assess.judged import Judged, Sensitivity
from irsurvey.assess.next_visit import Decision, is_open, measurements, next_visit, remaining_u
from irsurvey.assess.severity import (
    AUTOMATIC_REFERENCE,
    BLOCKERS,
    FEW_NEIGHBOURS,
    LOAD_UNKNOWN,
    LOW_LOAD,
    LOW_SUN,
    SIZE_LIMITED,
    SUN_UNKNOWN,
    UNSTEADY,
    WINDY,
)
from irsurvey.model.conclusions import NextMeasurement
from irsurvey.model.quantities import Scene

SIMILAR = criteria()["neta-similar"]
CONTRAST = criteria()["building-contrast"]
FOIL, TAPE = measurements()[:2]
BY_LIFTED = {flag: one for one in measurements() for flag in one.lifts}


def number(value: float, *inputs: tuple[str, float, float]) -> Judged:
    """A rise over a twin whose u is that of its inputs: name, u, sensitivity."""
    sensitivities = tuple(Sensitivity(*one) for one in inputs)
    return Judged(SIMILAR, value, sqrt(sum(one.contribution**2 for one in sensitivities)), sensitivities)


# Worked by hand; action begins at 1 K, foil leaves 0.6 K in reflected, tape 0.01 in emissivity.
DECISIONS = (
    # u = √(0.9² + 0.4²) = 0.985: Φ(1.015) = 0.845 open.  Foil: √(0.27² + 0.4²) = 0.483, Φ(2.07) = 0.981.  Tape: 0.861.
    Decision("F01-1", (number(2.0, ("reflected", 2.0, 0.45), ("emissivity:lug", 0.02, 20.0)),), urgency=1),
    # u = 0.5: 0.2 + 1.0 reaches 1 K.  Foil: 0.2 + 2·√(0.12² + 0.3²) = 0.846, accepted.  Tape: 0.2 + 2·0.427 = 1.054.
    Decision("F01-2", (number(0.2, ("reflected:F03", 2.0, 0.2), ("emissivity", 0.02, 15.0)),), urgency=0),
    # mild, but its load is not known
    Decision("breaker", (number(0.1, ("camera_offset", 0.05, 1.0)),), (LOAD_UNKNOWN,), 0),
    # 20 K: sure to be acted upon, nothing to settle
    Decision("feeder", (number(20.0, ("reflected", 2.0, 0.5)),), urgency=4),
    # u = 0.3: Φ(1) = 0.841 open.  Tape: Φ(2) = 0.977.
    Decision("F02-1", (number(1.3, ("emissivity:bar", 0.02, 15.0)),), urgency=1),
    # two blockers, and no measurement lifts both
    Decision("spout", (number(0.1, ("camera_offset", 0.05, 1.0)),), (LOW_LOAD, SIZE_LIMITED), 0),
)


def test_the_card_worked_by_hand() -> None:
    load = BY_LIFTED[LOAD_UNKNOWN]
    assert next_visit(DECISIONS) == (
        NextMeasurement(
            FOIL.how,
            ("F01-1", "F01-2"),
            "Gives its reflected apparent temperature: reflected to ±1.2 K (k = 2).",
        ),
        NextMeasurement(
            TAPE.how, ("F02-1",), "Gives its emissivity: emissivity to ±0.02 (k = 2)."
        ),  # as many as the load, but more urgent
        NextMeasurement(load.how, ("breaker",), "Gives its load: lifts “load unknown”."),
    )
    assert [one.id for one in DECISIONS if is_open(one)] == ["F01-1", "F01-2", "breaker", "F02-1", "spout"]


def test_the_uncertainties_left_worked_by_hand() -> None:
    left = [(remaining_u(one.judged[0], FOIL), remaining_u(one.judged[0], TAPE)) for one in DECISIONS[:2]]
    expected = [(sqrt(0.27**2 + 0.4**2), sqrt(0.9**2 + 0.2**2)), (sqrt(0.12**2 + 0.3**2), sqrt(0.4**2 + 0.15**2))]
    assert left == [pytest.approx(pair, abs=1e-12) for pair in expected]


def test_an_input_already_better_known_is_left_as_it_is() -> None:
    known = number(2.0, ("reflected", 0.2, 0.45), ("emissivity", 0.02, 20.0))
    assert remaining_u(known, FOIL) == pytest.approx(known.u, abs=1e-15)


def test_of_inputs_that_do_not_add_up_to_u_the_less_optimistic_is_taken() -> None:
    correlated = replace(number(2.0, ("reflected", 1.2, 1.0), ("air", 1.0, 1.0)), u=0.8)  # they partly cancel
    assert remaining_u(correlated, FOIL) == pytest.approx(0.8 * sqrt((0.36 + 1) / (1.44 + 1)), abs=1e-12)
    unlisted = replace(correlated, u=3.0)  # most of it comes from elsewhere
    assert remaining_u(unlisted, FOIL) == pytest.approx(sqrt(9 - (1.44 - 0.36)), abs=1e-12)


def test_an_automatic_reference_gives_no_decision_until_it_is_confirmed() -> None:
    strong = Judged(CONTRAST, 4.0, 0.3)
    suggested = Decision("F01-1", (strong,), (AUTOMATIC_REFERENCE,))
    assert is_open(suggested)
    assert [line.measurement for line in next_visit([suggested])] == [BY_LIFTED[AUTOMATIC_REFERENCE].how]
    assert not is_open(replace(suggested, blockers=()))
    doubtful = replace(suggested, judged=(Judged(CONTRAST, 1.1, 0.3),))  # confirmed, it would still be open
    assert next_visit([doubtful]) == ()


def test_every_number_that_governs_must_be_settled() -> None:
    strong, at_the_edge = Judged(CONTRAST, 4.0, 0.3), Judged(criteria()["temperature-factor-de"], 0.71, 0.02)
    assert not is_open(Decision("F01-1", (strong,)))
    assert is_open(Decision("F01-1", (strong, at_the_edge)))
    assert is_open(Decision("F01-1", ()))


def test_every_blocker_has_a_measurement_that_lifts_it() -> None:
    assert {flag for one in measurements() for flag in one.lifts} == set(BLOCKERS)


@pytest.mark.parametrize("flag", [UNSTEADY, WINDY, LOW_SUN, SUN_UNKNOWN, FEW_NEIGHBOURS])
def test_a_mild_part_seen_under_poor_circumstances_is_settled_by_coming_back_under_better_ones(flag: str) -> None:
    decision = Decision("lug", (number(0.1, ("camera_offset", 0.05, 1.0)),), (flag,), 0)
    (line,) = next_visit([decision])
    assert (line.measurement, line.settles) == (BY_LIFTED[flag].how, ("lug",))
    assert f"lifts “{flag}”" in line.why


def test_every_measurement_names_inputs_of_a_scene_and_where_its_figure_comes_from() -> None:
    assert Scene.__doc__ is not None
    for one in measurements():
        assert one.how
        assert one.lifts or one.leaves
        for residual in one.leaves:
            assert f"`{residual.term}`" in Scene.__doc__
            assert residual.source
            assert residual.mark in MARKS
            assert residual.u >= 0


INPUTS = st.lists(
    st.builds(
        Sensitivity,
        st.sampled_from(["reflected", "reflected:F03", "emissivity:lug", "air", "ambient", "noise:lug"]),
        st.floats(0, 3),
        st.floats(-5, 5),
    ),
    max_size=4,
)
NUMBERS = st.builds(
    lambda value, u, inputs: Judged(SIMILAR, value, u, tuple(inputs)),
    st.floats(-5, 30),
    st.one_of(st.floats(0, 10), st.just(nan)),
    INPUTS,
)
BLOCKED = st.lists(st.sampled_from(list(BLOCKERS)), max_size=3, unique=True).map(tuple)


@given(NUMBERS, st.sampled_from(list(BLOCKERS)), BLOCKED)
def test_a_blocker_never_closes_a_decision(one: Judged, more: str, blockers: tuple[str, ...]) -> None:
    if is_open(Decision("x", (one,), blockers)):
        assert is_open(Decision("x", (one,), (*blockers, more)))


@given(NUMBERS, st.floats(0, 5), BLOCKED)
def test_a_larger_uncertainty_never_closes_a_decision(one: Judged, more: float, blockers: tuple[str, ...]) -> None:
    if is_open(Decision("x", (one,), blockers)):
        assert is_open(Decision("x", (replace(one, u=one.u + more),), blockers))


@given(NUMBERS)
@example(Judged(SIMILAR, 0.0, 2.579536005666191e-160, (Sensitivity("reflected", 1.0, 1.0),)))  # its square is subnormal
def test_a_measurement_never_makes_a_number_worse_known(one: Judged) -> None:
    for measurement in measurements():
        left = remaining_u(one, measurement)
        assert left <= one.u * (1 + 1e-12) or left != left


@given(st.floats(-5, 0.9), st.floats(0, 10), INPUTS, BLOCKED)
def test_nothing_mild_is_settled_while_a_blocker_is_left(
    value: float, u: float, inputs: list[Sensitivity], blockers: tuple[str, ...]
) -> None:
    decision = Decision("x", (Judged(SIMILAR, value, u, tuple(inputs)),), blockers)
    lifts = {one.how: set(one.lifts) for one in measurements()}
    for line in next_visit([decision]):
        assert set(blockers) <= lifts[line.measurement]
