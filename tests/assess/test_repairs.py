"""The repair list: its order, how sure it is, what it recommends in which situation."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise, product

import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.assess import repairs as list_of
from irsurvey.assess.criteria import criteria
from irsurvey.assess.judged import Judged
from irsurvey.assess.repairs import action, confidence, inspect_again, repairs, situation
from irsurvey.assess.severity import (
    BLOCKERS,
    LOAD_UNKNOWN,
    LOW_LOAD,
    REFLECTIVE,
    SATURATED,
    SIZE_LIMITED,
    assess,
)
from irsurvey.assess.twins import ALL_HOT, NO_TWIN
from irsurvey.model import Estimate
from irsurvey.model.conclusions import RepairItem
from irsurvey.texts import state

SITUATIONS = (
    list_of.JOINT,
    list_of.GROUP,
    list_of.ALONE,
    list_of.LIMIT,
    list_of.VOLTAGE,
    list_of.MODULE,
    list_of.REGION,
    list_of.COLD,
    list_of.DOUBT,
)


def item(key="F01:component:lug", **changes):
    given_values = {
        "rank": 0,
        "key": key,
        "frame": "F01",
        "what": "lug",
        "asset": None,
        "location": "",
        "urgency": 2,
        "class_": "marked",
        "confidence": 0.9,
        "delta_k": Estimate(8.0, 1.0),
        "delta_basis": "similar",
        "load_a": None,
        "rated_a": None,
        "action": "",
        "inspect_again": "",
        **changes,
    }
    return RepairItem(**given_values)


def classed(value, u, name="neta-similar", blocked=()):
    criterion = criteria()[name]
    return assess(criterion, Estimate(value, u), "", blocked), criterion, Judged(criterion, value, u)


def test_order_is_urgency_then_confidence_then_difference_and_what_is_unknown_leads_what_is_open():
    expected = [
        item("severe, surer", urgency=4, confidence=0.99, delta_k=Estimate(20.0, 1.0)),
        item("severe, less sure, hotter", urgency=4, confidence=0.7, delta_k=Estimate(30.0, 20.0)),
        item("severe, as sure, less hot", urgency=4, confidence=0.7, delta_k=Estimate(16.0, 1.0)),
        item("severe, unclassed", urgency=4, confidence=None, delta_k=Estimate(90.0, 9.0)),
        item("marked", urgency=2),
        item("marked, cold", urgency=2, delta_k=Estimate(-3.0, 1.0)),
        item("marked, without ΔT", urgency=2, delta_k=None),
        item("slight", urgency=1, confidence=1.0),
        item("nothing known", urgency=None, confidence=None, delta_k=None),
        item("low load, warmer", urgency=0, confidence=None, delta_k=Estimate(0.9, 0.1)),
        item("low load", urgency=0, confidence=None, delta_k=Estimate(0.2, 0.1)),
    ]
    ordered = repairs(reversed(expected))
    assert [one.key for one in ordered] == [one.key for one in expected]
    assert [one.rank for one in ordered] == list(range(1, 12))
    assert [replace(one, rank=0) for one in ordered] == expected


@given(
    st.lists(
        st.tuples(
            st.sampled_from([None, 0, 1, 2, 3, 4]),
            st.one_of(st.none(), st.floats(0, 1)),
            st.one_of(st.none(), st.floats(-300, 300)),
        ),
        max_size=12,
    )
)
def test_nothing_is_lost_and_a_more_urgent_line_never_stands_below(rows):
    items = [
        item(str(number), urgency=urgency, confidence=sure, delta_k=None if delta is None else Estimate(delta, 1.0))
        for number, (urgency, sure, delta) in enumerate(rows)
    ]
    ordered = repairs(items)
    assert sorted(one.key for one in ordered) == sorted(one.key for one in items)
    urgencies = [one.urgency or 0 for one in ordered]
    assert urgencies == sorted(urgencies, reverse=True)
    for one, other in pairwise(ordered):
        if one.urgency == other.urgency:
            sure = [-1 if entry.confidence is None else round(entry.confidence, 2) for entry in (one, other)]
            assert sure[0] >= sure[1]  # as they are printed: what reads the same is ordered by what follows


def test_confidence_is_the_probability_of_that_urgency_or_a_higher_one():
    # Class probabilities for 14.2 ± 1.2 K with edges 1, 3 and 15 K: 0, 0, 0.7475, 0.2525 [C].
    assert confidence(*classed(14.2, 1.2)) == pytest.approx(1.0, abs=1e-6)  # marked or severe
    # 16.0 K with u 1.2 K against 15 K: P 0.798; 17.4: 0.977 [C].
    assert confidence(*classed(16.0, 1.2)) == pytest.approx(0.798, abs=5e-4)
    assert confidence(*classed(17.4, 1.2)) == pytest.approx(0.977, abs=5e-4)
    assert confidence(*classed(2.0, 0.5)) == pytest.approx(0.9772, abs=5e-4)  # Φ(2): slight, marked or severe


def test_classes_of_one_urgency_count_together_whatever_they_are_called():
    """JCGM 106 like all above: of the ambient column an urgency 3 at 25 K, u 5 K, is P(> 20 K) = Φ(1)."""
    assert confidence(*classed(25.0, 5.0, "neta-ambient")) == pytest.approx(0.8413, abs=5e-4)


def test_a_bound_is_at_least_as_sure_as_its_value():
    stated, criterion, judged = classed(16.0, 1.2, blocked=(SATURATED,))
    assert stated.probabilities == {}
    assert confidence(stated, criterion, judged) == pytest.approx(0.798, abs=5e-4)


def test_without_class_uncertainty_or_anything_asked_there_is_no_confidence():
    assert confidence(None, None, None) is None
    assert confidence(*classed(40.0, 1.2, blocked=(REFLECTIVE,))) is None
    assert confidence(*classed(40.0, None)[:2], Judged(criteria()["neta-similar"], 40.0)) is None
    assert confidence(*classed(0.3, 1.2)) is None


@pytest.mark.parametrize(
    ("quantity", "flags", "more", "expected"),
    [
        ("delta_similar_k", (), {}, list_of.JOINT),
        ("relative_difference_percent", (LOW_LOAD,), {}, list_of.JOINT),
        ("delta_similar_k", (ALL_HOT,), {}, list_of.GROUP),
        ("delta_ambient_k", (ALL_HOT,), {}, list_of.GROUP),
        ("delta_ambient_k", (NO_TWIN,), {}, list_of.ALONE),
        ("above_limit_k", (ALL_HOT,), {}, list_of.LIMIT),
        ("above_allowed_k", (), {}, list_of.LIMIT),
        ("delta_similar_k", (REFLECTIVE,), {}, list_of.DOUBT),
        ("delta_similar_k", (SATURATED,), {}, list_of.JOINT),
        ("delta_similar_k", (), {"methods": ("voltage-driven",)}, list_of.VOLTAGE),
        ("delta_neighbours_k", (), {"methods": ("pv",)}, list_of.MODULE),
        ("delta_k", (), {"sense": "hot"}, list_of.REGION),
        ("delta_k", (), {"sense": "cold"}, list_of.COLD),
        ("", (), {}, list_of.ALONE),
    ],
)
def test_situation_is_what_made_the_part_stand_out(quantity, flags, more, expected):
    assert situation(quantity, flags, **more) == expected


def test_a_single_joint_is_remade_and_a_whole_warm_group_is_a_matter_of_load_and_air():
    joint, group = action(4, list_of.JOINT, ()), action(4, list_of.GROUP, (ALL_HOT,))
    assert joint.startswith("Without delay: ")
    assert "remake the joint" in joint
    assert "remake" not in group
    assert all(word in group for word in ("load", "harmonics", "ambient air", "joints are alike"))
    assert "remake" not in action(1, list_of.JOINT, ())  # to investigate is not yet to repair


def test_a_reflective_part_is_taped_before_anything_is_opened():
    told = action(4, list_of.DOUBT, (REFLECTIVE,))
    assert "confirm its temperature before anything is opened" in told
    assert "matt tape" in told
    assert "remake" not in told


@pytest.mark.parametrize(
    ("flag", "word"),
    [(LOW_LOAD, "at load"), (SATURATED, "temperature range"), (SIZE_LIMITED, "closer"), (REFLECTIVE, "tape")],
)
def test_every_doubt_says_how_to_look_again_beside_the_repair(flag, word):
    assert word in action(4, list_of.JOINT, (flag,))
    assert word in action(0, list_of.JOINT, (flag,))
    assert word in action(None, list_of.ALONE, (flag,))


def test_every_line_says_what_to_do_when_to_inspect_again_and_who_may():
    for urgency, of, flag in product((None, 0, 1, 2, 3, 4), SITUATIONS, ("", *BLOCKERS)):
        flags = (flag,) if flag else ()
        told = action(urgency, of, flags)
        assert told.endswith("Qualified persons only.")
        assert len(told) > 40
        assert not flag or state(BLOCKERS[flag])[1:] in told
        assert inspect_again(urgency, of, flags)


def test_inspection_comes_again_after_repair_or_at_load():
    repaired = inspect_again(4, list_of.JOINT, ())
    assert repaired.startswith("after repair, under load")
    assert "12 months" in repaired  # NFPA 70B-2023, 7.4 [S]
    for flag in (LOW_LOAD, LOAD_UNKNOWN):
        assert inspect_again(0, list_of.JOINT, (flag,)) == "at 40 % of its rating or more, the current measured"
    both = inspect_again(0, list_of.JOINT, (LOW_LOAD, REFLECTIVE))
    assert both.startswith("at 40 % of its rating or more")
    assert "read that way" in both
    assert "load" not in inspect_again(2, list_of.VOLTAGE, ())


def test_words_blame_nobody():
    blaming = ("fault of", "negligen", "careless", "should have", "failed to", "poor workmanship", "blame")
    for urgency, of in product((1, 2, 3, 4), SITUATIONS):
        assert not any(word in action(urgency, of, tuple(BLOCKERS)).lower() for word in blaming)
