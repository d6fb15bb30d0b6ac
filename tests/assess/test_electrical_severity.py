"""Components: twins, governing column, load, and the one-sided safety rule."""

from __future__ import annotations

from dataclasses import replace
from math import nan

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from irsurvey.assess.criteria import Criterion, class_of, criteria, load_criterion
from irsurvey.assess.electrical import (
    ALL_HOT,
    NO_TWIN,
    NORMALISED,
    TWIN_SIZE_LIMITED,
    Member,
    TwinPlan,
    assess_component,
    load_factor,
    load_ratio,
    rated_band,
    similar_rise,
    twins,
)
from irsurvey.assess.severity import (
    BLOCKERS,
    LOAD_UNKNOWN,
    LOW_LOAD,
    MIRRORS,
    NO_CRITERION,
    NO_SOLUTION,
    NOT_CLEARED,
    REFLECTIVE,
    SATURATED,
    SIZE_LIMITED,
    Verdict,
)
from irsurvey.model.quantities import Estimate

SIMILAR = criteria()["neta-similar"]
AMBIENT = criteria()["neta-ambient"]
BOTH = (SIMILAR, AMBIENT)
AIR = 298.15  # 25 °C


def lug(name: str, rise: float, **known: object) -> Member:
    """A lug of the feeder group, `rise` above the air, at 60 % of its rating unless told otherwise."""
    given_ = {"emissivity": 0.9, "group": "feeder lugs", "load": 240.0, "rated": 400.0, **known}
    return Member(name=name, t_spot=AIR + rise, **given_)  # type: ignore[arg-type]


def rises(members: tuple[Member, ...], plans: tuple[TwinPlan, ...]) -> list[float | None]:
    """Each member's delta_similar_k, worked out as a pipeline would."""
    return [
        None
        if plan.twin is None
        else float(similar_rise(member.t_spot, members[plan.twin].t_spot, AIR, load_factor(plan.load_ratio)))
        for member, plan in zip(members, plans, strict=True)
    ]


def judged(members: tuple[Member, ...], u: float = 0.1, chosen: tuple[Criterion, ...] = BOTH) -> dict[str, Verdict]:
    """The verdict on each member of one frame, every difference with the same u."""
    plans = twins(members, AIR, chosen)
    verdicts = {}
    for member, plan, similar in zip(members, plans, rises(members, plans), strict=True):
        values = {
            "delta_similar_k": None if similar is None or similar != similar else Estimate(similar, u),
            "delta_ambient_k": None if member.t_spot != member.t_spot else Estimate(member.t_spot - AIR, u),
        }
        verdicts[member.name] = assess_component(member, plan, values, chosen)
    return verdicts


def governing(verdict: Verdict) -> list[str]:
    return [one.criterion for one in verdict.assessments if one.governs]


# --- twins: product definition, "against the coolest comparable twin; the coolest twin's own is 0; null without" ---


def test_each_is_compared_with_the_coolest_of_its_group_whose_own_difference_is_zero() -> None:
    members = (lug("phase 1", 9.0), lug("phase 2", 27.5), lug("phase 3", 8.0), lug("other", 1.0, group="spare lugs"))
    plans = twins(members, AIR)
    assert rises(members, plans) == pytest.approx([1.0, 19.5, 0.0, None], abs=1e-9)  # rounding of the temperatures
    assert [plan.name for plan in plans] == ["phase 3", "phase 3", "phase 3", None]
    assert [plan.is_coolest for plan in plans] == [False, False, True, False]
    assert plans[3].flags == (NO_TWIN,)


def test_a_component_without_a_group_has_no_twin() -> None:
    plans = twins((lug("a", 5.0, group=None), lug("b", 9.0, group=None)), AIR)
    assert [plan.twin for plan in plans] == [None, None]


def test_two_components_of_one_name_in_two_groups_keep_their_own_twins() -> None:
    members = (lug("1", 5.0), lug("2", 6.0), lug("1", 30.0, group="b"), lug("2", 31.0, group="b"))
    assert [plan.twin for plan in twins(members, AIR)] == [0, 0, 2, 2]


@pytest.mark.parametrize(
    "unfit",
    [
        {"emissivity": 0.3},
        {"emissivity": nan},
        {"flags": (SATURATED,)},
        {"flags": (SIZE_LIMITED,)},
        {"flags": (NO_SOLUTION,)},  # some of its pixels
    ],
)
def test_what_is_not_measured_in_full_is_no_twin_for_others(unfit: dict[str, object]) -> None:
    members = (lug("1", 9.0), lug("2", 12.0), lug("3", 4.0, **unfit))
    plans = twins(members, AIR)
    assert [plan.twin for plan in plans] == [0, 0, 2]
    assert plans[0].is_coolest


def test_a_part_without_solution_has_no_value_and_is_no_twin() -> None:
    members = (lug("1", 9.0), lug("2", 12.0), lug("3", nan, flags=(NO_SOLUTION,)))
    assert [plan.twin for plan in twins(members, AIR)] == [0, 0, 0]
    verdict = judged(members)["3"]
    assert [one.class_ for one in verdict.assessments] == [None, None]
    assert verdict.urgency is None
    assert not verdict.cleared


def test_a_twin_too_small_for_the_spot_serves_only_while_nothing_better_is_left() -> None:
    members = (lug("1", 40.0), lug("2", 20.0, flags=(SIZE_LIMITED,)))
    plans = twins(members, AIR)
    assert [plan.twin for plan in plans] == [1, 1]  # it reads low at most: the difference can only be too large
    assert plans[0].flags == (TWIN_SIZE_LIMITED,)


def test_a_sound_part_beside_a_saturated_one_is_not_its_own_yardstick() -> None:
    members = (lug("1", 30.0), lug("2", 125.0, flags=(SATURATED,)))
    plans = twins(members, AIR)
    assert plans[0].twin is None
    assert plans[1].twin == 0
    verdicts = judged(members)
    assert governing(verdicts["1"]) == ["neta-ambient"]
    assert verdicts["2"].urgency == 4
    assert "≥ 95.00\u00a0±" in verdicts["2"].assessments[0].statement


def test_loads_within_a_tenth_are_compared_as_they_are() -> None:
    members = (lug("1", 10.0, load=240.0), lug("2", 14.0, load=262.0))
    plans = twins(members, AIR)
    assert rises(members, plans) == pytest.approx([0.0, 4.0], abs=1e-9)
    assert [plan.load_ratio for plan in plans] == [1.0, 1.0]
    assert all(NORMALISED not in plan.flags for plan in plans)


def test_unlike_loads_are_first_brought_to_one_load_and_that_is_said() -> None:
    # twice the load, 2^1.8 = 3.482 times the rise: 20 K at 200 A and 69.64 K at 400 A are the same joint
    members = (lug("1", 20.0, load=200.0), lug("2", 20.0 * 2**1.8 + 5.0, load=400.0))
    plans = twins(members, AIR)
    assert rises(members, plans) == pytest.approx([0.0, 5.0], abs=1e-9)
    assert plans[1].load_ratio == 2.0
    assert plans[1].flags == (NORMALISED,)
    assert "brought to 2.00 times its load" in judged(members)["2"].assessments[0].statement


def test_the_coolest_is_chosen_at_one_load_not_as_it_reads() -> None:
    members = (lug("1", 12.0, load=160.0), lug("2", 20.0, load=320.0))  # 12 K at half the load is the worse joint
    plans = twins(members, AIR)
    assert [plan.is_coolest for plan in plans] == [False, True]
    assert rises(members, plans) == pytest.approx([12.0 - 20.0 / 2**1.8, 0.0], abs=1e-9)


def test_a_hardly_loaded_part_is_no_yardstick_for_a_loaded_one() -> None:
    members = (lug("1", 60.0, load=400.0), lug("2", 2.0, load=20.0))  # 2 K at 5 % would "be" 440 K at full load
    plans = twins(members, AIR)
    assert plans[0].twin is None
    assert plans[1].twin == 0
    assert judged(members)["1"].urgency == 4


def test_currents_are_compared_where_ratings_are_missing() -> None:
    members = (lug("1", 20.0, load=200.0, rated=None), lug("2", 80.0, load=400.0, rated=None))
    assert [plan.load_ratio for plan in twins(members, AIR)] == [1.0, 2.0]


def test_parts_whose_load_nobody_stated_are_compared_as_they_read() -> None:
    members = (lug("1", 20.0, load=None), lug("2", 24.0, load=None))
    assert rises(members, twins(members, AIR)) == pytest.approx([0.0, 4.0], abs=1e-9)


def test_unlike_loads_of_what_is_no_twin_do_not_take_the_others_twins_away() -> None:
    bars = (lug("bar 1", 5.0, load=100.0, emissivity=0.2), lug("bar 2", 5.0, load=300.0, emissivity=0.2))
    members = (lug("1", 20.0, load=None), lug("2", 24.0, load=None), *bars)
    assert rises(members, twins(members, AIR))[:2] == pytest.approx([0.0, 4.0], abs=1e-9)


# --- load: domain examples ------------------------------------------------------------------------------------------


def test_ten_kelvin_at_a_fifth_of_the_load_are_130_to_250_at_full_load() -> None:
    low, high = rated_band(10.0, 0.2)
    assert low == pytest.approx(130, abs=5)  # domain example, printed to tens
    assert high == pytest.approx(250, abs=1e-9)  # 10·5²


def test_full_load_rises_of_a_bare_bolted_joint() -> None:
    # domain example: 40 K rise at 45 % load; 197/168/144 K at full load for n 2/1.8/1.6, printed to whole kelvins
    low, high = rated_band(40.0, 0.45)
    middle = 40.0 / load_factor(0.45)
    assert [float(x) for x in (high, middle, low)] == pytest.approx([197, 168, 144], abs=0.55)  # one is 197.53
    # allowed rise now: 50 K·0.45^n, with 22 °C air 32.1/33.9/35.9 °C
    allowed = [22 + 50 * float(load_factor(0.45, n)) for n in (2.0, 1.8, 1.6)]
    assert allowed == pytest.approx([32.1, 33.9, 35.9], abs=0.05)


def test_a_cylinder_balance_gives_an_exponent_within_the_band() -> None:
    """Heat balance of a 30 mm cylinder, ε 0.8, 55 K at full load, by Churchill and Chu (1975) with air at film
    temperature from CoolProp; the loss of constant resistance grows as load²."""
    from CoolProp.CoolProp import PropsSI

    def loss(rise: float) -> float:
        surface, film = AIR + rise, AIR + rise / 2
        k, mu, rho, cp = (PropsSI(key, "T", film, "P", 101325, "Air") for key in ("L", "V", "D", "C"))
        ra = 9.80665 / film * rise * 0.03**3 * rho**2 * cp / (mu * k)
        nu = (0.60 + 0.387 * ra ** (1 / 6) / (1 + (0.559 * k / (mu * cp)) ** (9 / 16)) ** (8 / 27)) ** 2
        return float(nu * k / 0.03 * rise + 0.8 * 5.670374419e-8 * (surface**4 - AIR**4))

    for rise in (5.0, 10.0, 20.0):
        load = (loss(rise) / loss(55.0)) ** 0.5
        low, high = rated_band(rise, load)
        assert low <= 55.0 <= high


def test_more_than_rated_load_extrapolates_downwards() -> None:
    low, high = rated_band(20.0, 1.25)
    assert low < high < 20.0


def test_load_functions_broadcast_and_leave_their_domain_as_nan() -> None:
    ratios = np.array([[-1.0, 0.0], [0.2, nan]])
    low, high = rated_band(10.0, ratios)
    for place in np.ndindex(ratios.shape):
        one_low, one_high = rated_band(10.0, ratios[place])
        np.testing.assert_array_equal((low[place], high[place]), (one_low, one_high))
    assert np.isnan(low).tolist() == [[True, True], [False, True]]


def test_similar_rise_broadcasts_and_forgets_the_air_at_like_load() -> None:
    spots, airs = np.array([[310.0], [nan]]), np.array([290.0, 300.0])
    together = similar_rise(spots, 305.0, airs, 1.5)
    for i, j in np.ndindex(together.shape):
        np.testing.assert_array_equal(together[i, j], similar_rise(spots[i, 0], 305.0, airs[j], 1.5))
    assert similar_rise(310.0, 305.0, airs).tolist() == [5.0, 5.0]


# --- which column governs --------------------------------------------------------------------------------------------


def test_with_a_twin_the_similar_column_governs_and_both_are_shown() -> None:
    verdicts = judged((lug("1", 6.0), lug("2", 22.0), lug("3", 6.5)))
    assert [one.criterion for one in verdicts["2"].assessments] == ["neta-similar", "neta-ambient"]
    assert [one.urgency for one in verdicts["2"].assessments] == [4, 3]
    assert governing(verdicts["2"]) == ["neta-similar"]
    assert verdicts["2"].urgency == 4
    assert verdicts["3"].urgency == 0
    assert verdicts["3"].assessments[1].urgency == 1


def test_a_single_component_is_judged_by_ambient_and_told_it_may_be_load_or_air() -> None:
    verdict = judged((lug("breaker", 33.0, group=None),))["breaker"]
    assert governing(verdict) == ["neta-ambient"]
    assert verdict.urgency == 3
    assert verdict.assessments[0].class_ is None
    assert "load or the ambient air" in verdict.assessments[1].statement


def test_a_balanced_warm_group_is_a_load_or_ambient_matter() -> None:
    verdicts = judged((lug("1", 31.0), lug("2", 31.4), lug("3", 31.9)))
    for verdict in verdicts.values():
        assert governing(verdict) == ["neta-ambient"]
        assert verdict.urgency == 3
        assert ALL_HOT in verdict.flags
        assert "check load, harmonics and ambient air before the joints" in verdict.assessments[1].statement


def test_a_group_is_warm_only_if_every_member_is_more_than_ten_kelvin_above_the_air() -> None:
    assert governing(judged((lug("1", 10.0), lug("2", 10.5)))["2"]) == ["neta-similar"]
    assert governing(judged((lug("1", 10.01), lug("2", 10.5)))["2"]) == ["neta-ambient"]


def test_one_joint_that_stands_out_of_a_warm_group_is_a_joint() -> None:
    verdicts = judged((lug("1", 31.0), lug("2", 31.4), lug("3", 51.0)))
    assert governing(verdicts["3"]) == ["neta-similar"]
    assert verdicts["3"].urgency == 4
    assert verdicts["1"].urgency == 0
    assert not verdicts["1"].cleared  # comparing twins cannot clear what they share
    assert "What it shares" in verdicts["1"].assessments[0].statement


def test_a_scheme_of_the_site_says_from_where_on_twins_differ() -> None:
    text = """name = "site"\ntitle = "Site"\nedition = "1"\nkind = "electrical"\nmethods = ["contact"]
applies_to = "component"\nquantity = "delta_similar_k"\nsense = "hot"\nsource = "site"\nmark = "house"\nnotes = "x"
classes = [{ name = "a", at_most = 5, urgency = 0, statement = "a" },
{ name = "b", above = 5, urgency = 2, statement = "b" }]"""
    members = (lug("1", 30.0), lug("2", 34.0))
    site = (load_criterion(text, "site.toml"), AMBIENT)
    assert governing(judged(members, chosen=site)["2"]) == ["neta-ambient"]
    assert governing(judged(members)["2"]) == ["neta-similar"]


def test_a_difference_that_could_not_be_worked_out_leaves_it_to_ambient() -> None:
    values = {"delta_similar_k": None, "delta_ambient_k": Estimate(33.0, 0.5)}
    verdict = assess_component(lug("1", 33.0), TwinPlan(1, "2"), values, BOTH)
    assert governing(verdict) == ["neta-ambient"]
    assert verdict.urgency == 3


def test_a_difference_of_two_parts_too_small_for_the_spot_is_no_bound() -> None:
    small = {"flags": (SIZE_LIMITED,)}
    similar, ambient = judged((lug("1", 20.0, **small), lug("2", 40.0, **small)))["2"].assessments
    assert similar.statement.startswith("20.00\u00a0±")
    assert ambient.statement.startswith("≥ 40.00\u00a0±")
    assert similar.probabilities
    assert ambient.probabilities == {}  # a bound says nothing of how probable a class is


def test_ambient_alone_can_be_chosen_and_then_governs() -> None:
    verdict = judged((lug("1", 5.0), lug("2", 25.0)), chosen=(AMBIENT,))["2"]
    assert governing(verdict) == ["neta-ambient"]
    assert verdict.urgency == 3


def test_without_any_criterion_nothing_is_said_and_nothing_cleared() -> None:
    verdict = judged((lug("1", 0.0), lug("2", 0.0)), chosen=())["1"]
    assert verdict == Verdict((), None, False, (NO_CRITERION, NOT_CLEARED))


@pytest.mark.parametrize(
    ("delta", "urgency"), [(0.99, 0), (1.0, 1), (3.0, 1), (3.0001, 2), (15.0, 2), (15.4, 4), (40.1, 4)]
)
def test_a_component_gets_the_urgency_of_its_class(delta: float, urgency: int) -> None:
    values = {"delta_similar_k": Estimate(delta, 0.0), "delta_ambient_k": Estimate(delta + 2, 0.0)}
    verdict = assess_component(lug("1", delta + 2), TwinPlan(1, "2"), values, BOTH)
    assert verdict.urgency == urgency


# --- clearing -------------------------------------------------------------------------------------------------------


def test_sound_twins_at_load_are_cleared_with_a_guard_band() -> None:
    members = (lug("1", 5.0), lug("2", 5.5))
    assert [verdict.cleared for verdict in judged(members, u=0.2).values()] == [True, True]
    assert [verdict.cleared for verdict in judged(members, u=0.25).values()] == [True, False]  # 0.5 + 2·0.25 = 1


def test_a_component_is_cleared_looked_at_again_or_acted_upon() -> None:
    sound = (lug("1", 5.0), lug("2", 5.5))
    assert [verdict.outcome for verdict in judged(sound, u=0.2).values()] == ["cleared", "cleared"]
    assert [verdict.outcome for verdict in judged(sound, u=0.25).values()] == ["cleared", "not cleared"]
    low = (lug("1", 5.0, load=80.0), lug("2", 6.5, load=80.0))
    assert [verdict.outcome for verdict in judged(low).values()] == ["not cleared", "act"]
    assert judged((lug("1", nan), lug("2", 5.0)))["1"].outcome == "not cleared"


def test_the_four_way_statement_of_an_assessment_never_passes_what_is_blocked() -> None:
    # action begins at 1 K, guard band 2·0.2 = 0.4 K (ILAC-G8:09/2019, 4.2.3)
    members = [lug(str(k), t) for k, t in enumerate((5.0, 5.5, 5.8, 6.2, 6.5))]
    found = [verdict.assessments[0].verdict for verdict in judged(tuple(members), u=0.2).values()]
    assert found == ["pass", "pass", "conditional pass", "conditional fail", "fail"]
    low = tuple(replace(member, load=80.0) for member in members)
    found = [verdict.assessments[0].verdict for verdict in judged(low, u=0.2).values()]
    assert found == [None, None, None, "conditional fail", "fail"]
    small = tuple(replace(member, flags=(SIZE_LIMITED,)) for member in members)
    found = [verdict.assessments[0].verdict for verdict in judged(small, u=0.2).values()]
    assert found == [None, None, None, "conditional fail", "fail"]


def test_a_bare_bar_is_never_cleared_and_gets_no_class() -> None:
    # a bare bar at 35 °C apparent with 25 °C reflected may truly be at 80 to 151 °C (domain example)
    verdict = judged((lug("1", 1.0), lug("bar", 1.1, emissivity=0.15)))["bar"]
    assert [one.class_ for one in verdict.assessments] == [None, None]
    assert all(not one.probabilities for one in verdict.assessments)
    assert not verdict.cleared
    assert REFLECTIVE in verdict.flags
    assert "tape or paint" in verdict.assessments[0].statement


@pytest.mark.parametrize(("emissivity", "classed"), [(0.5999, False), (0.6, True), (nan, False)])
def test_an_emissivity_of_0_6_is_just_enough_for_a_class(emissivity: float, classed: bool) -> None:
    verdict = judged((lug("1", 1.0), lug("2", 5.0, emissivity=emissivity)))["2"]
    assert (verdict.assessments[0].class_ is not None) == classed


@pytest.mark.parametrize(
    ("known", "flag"),
    [
        ({"load": 159.9}, LOW_LOAD),  # below 40 % of 400 A
        ({"load": 0.0}, LOW_LOAD),
        ({"load": None}, LOAD_UNKNOWN),
        ({"rated": None}, LOAD_UNKNOWN),
        ({"flags": (SIZE_LIMITED,)}, SIZE_LIMITED),
        ({"flags": (SATURATED,)}, SATURATED),
        ({"flags": (NO_SOLUTION,)}, NO_SOLUTION),
    ],
)
def test_what_blocks_clearing_is_flagged_and_says_how_to_look_again(known: dict[str, object], flag: str) -> None:
    verdict = judged((lug("1", 5.0, **known), lug("2", 5.1, **known)))["1"]
    assert not verdict.cleared
    assert flag in verdict.flags
    assert NOT_CLEARED in verdict.flags
    told = " ".join(one.statement for one in verdict.assessments)
    assert f"cannot be cleared: {flag}, look again" in told


def test_exactly_forty_percent_load_is_enough() -> None:
    assert judged((lug("1", 5.0, load=160.0), lug("2", 5.1, load=160.0)))["1"].cleared


def test_a_lightly_loaded_hot_part_is_condemned_and_shows_its_full_load_rise() -> None:
    members = (lug("1", 2.0, load=80.0), lug("2", 12.0, load=80.0))
    verdict = judged(members)["2"]
    assert verdict.urgency == 2
    assert "At rated load it would be 158 to 300 K above ambient air." in verdict.assessments[0].statement


def test_probabilities_are_those_of_the_normal_distribution_between_the_edges() -> None:
    values = {"delta_similar_k": Estimate(14.2, 1.2), "delta_ambient_k": Estimate(30.0, 1.2)}
    verdict = assess_component(lug("1", 30.0), TwinPlan(1, "2"), values, BOTH)
    assert verdict.assessments[0].probabilities == pytest.approx(
        {"alike": 0, "slight": 0, "marked": 0.7475, "severe": 0.2525}, abs=5e-5
    )


# --- the one-sided safety rule, as a property ------------------------------------------------------------------------

numbers = st.one_of(st.floats(-20, 120), st.sampled_from([0.0, 1.0, 3.0, 10.0, 15.0, 20.0, 40.0]))
uncertainties = st.one_of(st.none(), st.floats(0, 20))
plans = st.builds(
    TwinPlan,
    twin=st.sampled_from([None, 0]),
    name=st.just("twin"),
    flags=st.lists(st.sampled_from([ALL_HOT, NORMALISED, TWIN_SIZE_LIMITED])).map(tuple),
)
OF_PARTS = sorted(set(BLOCKERS) - {MIRRORS})  # a wall or pane may be a reflection; a part stays one to look at
ways_to_block = st.sets(st.sampled_from(["load", "low load", "emissivity", *OF_PARTS]), min_size=1)
chosen_criteria = st.sampled_from([BOTH, (SIMILAR,), (AMBIENT,)])


def with_blockers(member: Member, ways: set[str]) -> Member:
    if "load" in ways:
        member = replace(member, load=None)
    elif "low load" in ways:
        member = replace(member, load=100.0)
    if "emissivity" in ways:
        member = replace(member, emissivity=0.2)
    return replace(member, flags=tuple(way for way in sorted(ways) if way in BLOCKERS))


@given(numbers, numbers, uncertainties, plans, ways_to_block, chosen_criteria)
@example(0.0, 0.0, 0.0, TwinPlan(0, "twin"), {"load"}, BOTH)
def test_no_blocker_ever_clears_or_lowers(
    similar: float, ambient: float, u: float | None, plan: TwinPlan, ways: set[str], chosen: tuple[Criterion, ...]
) -> None:
    values = {
        "delta_similar_k": None if plan.twin is None else Estimate(similar, u),
        "delta_ambient_k": Estimate(ambient, u),
    }
    sound = lug("1", ambient)
    free = assess_component(sound, plan, values, chosen)
    blocked = assess_component(with_blockers(sound, ways), plan, values, chosen)
    assert not blocked.cleared
    assert NOT_CLEARED in blocked.flags
    assert (blocked.urgency is None) == (free.urgency is None)
    assert (blocked.urgency or 0) >= (free.urgency or 0)
    for one, other in zip(blocked.assessments, free.assessments, strict=True):
        assert one.urgency == other.urgency


@given(numbers, numbers, uncertainties, plans, chosen_criteria)
@example(0.0, 0.0, 0.0, TwinPlan(0, "twin"), BOTH)
@example(0.5, 4.0, 0.25, TwinPlan(0, "twin"), BOTH)
@example(0.0, 9.9, 0.2, TwinPlan(0, "twin"), BOTH)
def test_only_guarded_acceptance_of_what_governs_clears(
    similar: float, ambient: float, u: float | None, plan: TwinPlan, chosen: tuple[Criterion, ...]
) -> None:
    values = {
        "delta_similar_k": None if plan.twin is None else Estimate(similar, u),
        "delta_ambient_k": Estimate(ambient, u),
    }
    verdict = assess_component(lug("1", ambient), plan, values, chosen)
    if verdict.cleared:
        assert u is not None
        (governs,) = governing(verdict)
        value = values[criteria()[governs].quantity]
        assert value is not None
        assert value.value + 2 * u < 1.0  # where action begins in both columns
        assert verdict.urgency == 0
        assert ambient + 2 * u <= 10.0


members_of_a_group = st.lists(
    st.builds(
        lug,
        st.just("lug"),
        st.floats(-5, 90),
        load=st.sampled_from([None, 0.0, 40.0, 200.0, 210.0, 400.0]),
        emissivity=st.sampled_from([0.2, 0.9, 0.9, 0.9]),
        flags=st.sampled_from([(), (), (), (SATURATED,), (SIZE_LIMITED,), (NO_SOLUTION,)]),
    ),
    min_size=1,
    max_size=5,
)


@given(members_of_a_group)
def test_plans_hold_their_promises_for_any_group(members: list[Member]) -> None:
    found = twins(members, AIR)
    for k, (member, plan) in enumerate(zip(members, found, strict=True)):
        assert (plan.twin is None) == (NO_TWIN in plan.flags)
        assert plan.is_coolest == (plan.twin == k)
        if plan.twin is None:
            continue
        twin = members[plan.twin]
        assert plan.is_coolest or twin.emissivity >= 0.6
        assert plan.is_coolest or SATURATED not in twin.flags
        assert plan.load_ratio > 0
        similar = float(similar_rise(member.t_spot, twin.t_spot, AIR, load_factor(plan.load_ratio)))
        if plan.is_coolest:
            assert similar == 0.0
        if ALL_HOT in plan.flags:
            found_class = class_of(similar, SIMILAR)
            assert found_class is not None
            assert found_class.urgency == 0


@given(members_of_a_group, st.integers(0, 4), st.sampled_from([SATURATED, SIZE_LIMITED, NO_SOLUTION, REFLECTIVE]))
def test_what_is_wrong_with_a_part_never_chooses_it_a_milder_comparison(
    members: list[Member], place: int, way: str
) -> None:
    members = [replace(member, name=str(k)) for k, member in enumerate(members)]
    k = place % len(members)
    sound = replace(members[k], flags=(), emissivity=0.9)
    faulty = replace(sound, emissivity=0.2) if way == REFLECTIVE else replace(sound, flags=(way,))
    before = judged((*members[:k], sound, *members[k + 1 :]))[str(k)]
    after = judged((*members[:k], faulty, *members[k + 1 :]))[str(k)]
    assert after.urgency == before.urgency
    assert not after.cleared


@given(members_of_a_group)
def test_in_a_sound_group_of_like_load_the_order_of_members_does_not_matter(members: list[Member]) -> None:
    alike = [replace(member, name=str(k), load=240.0, flags=(), emissivity=0.9) for k, member in enumerate(members)]
    forward = rises(tuple(alike), twins(alike, AIR))
    backward = rises(tuple(alike[::-1]), twins(alike[::-1], AIR))
    assert forward == backward[::-1]


def test_without_load_or_rating_there_is_no_load_ratio_and_nothing_is_cleared() -> None:
    for unknown in (lug("1", 1.0, load=None), lug("1", 1.0, rated=0.0)):
        assert np.isnan(load_ratio(unknown))
        verdict = judged((unknown, lug("2", 1.2)))["1"]
        assert verdict.urgency == 0
        assert not verdict.cleared
        assert LOAD_UNKNOWN in verdict.flags
