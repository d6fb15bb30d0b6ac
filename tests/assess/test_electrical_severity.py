"""Components: twins, governing column, load, and the one-sided safety rule."""

from __future__ import annotations

from dataclasses import replace
from math import nan

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from irsurvey.assess.criteria import Criterion, chosen, class_of, criteria, load_criterion
from irsurvey.assess.electrical import assess_component
from irsurvey.assess.limits import allowed_now, limits
from irsurvey.assess.severity import (
    BLOCKERS,
    CONDITIONS,
    FEW_NEIGHBOURS,
    LOAD_ABOVE_RATING,
    LOAD_UNKNOWN,
    LOW_LOAD,
    LOW_SUN,
    MIRRORS,
    NO_CRITERION,
    NO_SOLUTION,
    NOT_CLEARED,
    REFLECTIVE,
    SATURATED,
    SIZE_LIMITED,
    SUN_UNKNOWN,
    UNSTEADY,
    WINDY,
    Verdict,
)
from irsurvey.assess.twins import (
    ALL_HOT,
    NO_TWIN,
    NORMALISED,
    TWIN_SIZE_LIMITED,
    UNBALANCED,
    Member,
    TwinPlan,
    load_factor,
    load_ratio,
    rated_band,
    similar_rise,
    twins,
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


def test_loads_that_differ_by_less_than_a_meter_tells_are_compared_as_they_are() -> None:
    members = (lug("1", 10.0, load=240.0), lug("2", 14.0, load=246.0))
    plans = twins(members, AIR)
    assert rises(members, plans) == pytest.approx([0.0, 4.0], abs=1e-9)
    assert [plan.load_ratio for plan in plans] == [1.0, 1.0]
    assert all(plan.flags == () for plan in plans)


def test_unlike_loads_are_first_brought_to_one_load_and_that_is_said() -> None:
    # twice the load, 2^1.8 = 3.482 times the rise: 20 K at 200 A and 69.64 K at 400 A are the same joint
    members = (lug("1", 20.0, load=200.0), lug("2", 20.0 * 2**1.8 + 5.0, load=400.0))
    plans = twins(members, AIR)
    assert rises(members, plans) == pytest.approx([0.0, 5.0], abs=1e-9)
    assert plans[1].load_ratio == 2.0
    assert plans[1].flags == (UNBALANCED, NORMALISED)
    assert plans[0].flags == (UNBALANCED,)
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
            assert found_class.urgency <= 1  # asked about between twins, no repair


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


# --- several criteria at once ----------------------------------------------------------------------------------------

NAVAL, RELATIVE = criteria()["naval"], criteria()["relative-difference"]
AT_ONCE = criteria()["absolute-limit"]
AT_LOAD = criteria()["absolute-limit-at-load"]
CONTACT = chosen((), "electrical", "contact")
VOLTAGE = chosen((), "electrical", "voltage-driven")
PV = chosen((), "electrical", "pv")
TWIN = TwinPlan(0, "phase 3")
ALONE = TwinPlan(flags=(NO_TWIN,))


def of(u: float | None = 0.1, **numbers: float | None) -> dict[str, Estimate | None]:
    """Measured numbers by their key, all with the same u; None: not measured."""
    return {key: None if value is None else Estimate(value, u) for key, value in numbers.items()}


def classes(verdict: Verdict) -> dict[str, str | None]:
    return {one.criterion: one.class_ for one in verdict.assessments}


def test_all_criteria_are_shown_and_of_those_that_compare_twins_the_highest_governs() -> None:
    values = of(delta_similar_k=30.0, delta_ambient_k=80.0, relative_difference_percent=37.5)
    verdict = assess_component(lug("1", 80.0), TWIN, values, (NAVAL, RELATIVE, SIMILAR, AMBIENT))
    urgencies = {one.criterion: one.urgency for one in verdict.assessments}
    assert urgencies == {"naval": 2, "relative-difference": 2, "neta-similar": 4, "neta-ambient": 4}
    assert governing(verdict) == ["neta-similar"]
    milder = assess_component(lug("1", 80.0), TWIN, values, (NAVAL, RELATIVE, AMBIENT))
    assert (milder.urgency, governing(milder)) == (2, ["naval"])  # ambient air does not decide between joints


def test_every_assessment_names_the_number_it_judges() -> None:
    values = of(delta_similar_k=2.0, delta_ambient_k=12.0, relative_difference_percent=17.0, above_limit_k=-50.0)
    member = lug("1", 12.0, limits=("iec-60694/bolted-bare",))
    for ways in ((), (SATURATED,), (MIRRORS,)):
        for emissivity in (0.9, 0.2):
            known = replace(member, flags=ways, emissivity=emissivity)
            verdict = assess_component(known, TWIN, values, (*CONTACT, NAVAL, RELATIVE))
            judged_by = {one.criterion: one.quantity for one in verdict.assessments}
            assert judged_by == {name: criteria()[name].quantity for name in judged_by}
            assert len(judged_by) == 6  # all but the one for findings


def test_a_scheme_of_the_site_is_shown_beside_the_built_in_ones_and_governs_where_it_is_higher() -> None:
    text = """name = "site"\ntitle = "Site"\nedition = "1"\nkind = "electrical"\nmethods = ["contact"]
applies_to = "component"\nquantity = "delta_similar_k"\nsense = "hot"\nsource = "site"\nmark = "house"\nnotes = "x"
classes = [{ name = "a", below = 2, urgency = 0, statement = "a" },
{ name = "b", at_least = 2, urgency = 3, statement = "call the site" }]"""
    used = chosen(("neta-similar", "site.toml"), "electrical", "contact", (("site.toml", text),))
    verdict = assess_component(lug("1", 5.0), TWIN, of(delta_similar_k=2.5, delta_ambient_k=5.0), used)
    assert {one.criterion: one.urgency for one in verdict.assessments} == {"neta-similar": 1, "site": 3}
    assert (verdict.urgency, governing(verdict)) == (3, ["site"])
    assert "call the site" in verdict.assessments[1].statement


# --- relative difference: not classed below a rise of 10 K [S] ------------------------------------------------------


def test_the_relative_difference_is_not_classed_below_a_rise_of_ten_kelvin() -> None:
    for rise, class_ in ((9.99, None), (10.0, "wholly own rise")):
        values = of(delta_similar_k=0.5, delta_ambient_k=rise, relative_difference_percent=96.0)
        verdict = assess_component(lug("1", rise), TWIN, values, (RELATIVE,))
        assert classes(verdict) == {"relative-difference": class_}
        assert verdict.urgency == (4 if class_ else None)
        assert not verdict.cleared
    values = of(delta_similar_k=0.5, delta_ambient_k=5.0, relative_difference_percent=10.0)
    told = assess_component(lug("1", 5.0), TWIN, values, (RELATIVE,)).assessments[0].statement
    assert told.startswith("Not classed by this scheme, which grades from 10\u00a0K above ambient air on.")


def test_a_scheme_that_does_not_grade_a_part_neither_clears_it_nor_keeps_others_from_clearing_it() -> None:
    values = of(delta_similar_k=0.5, delta_ambient_k=5.0, relative_difference_percent=10.0)
    assert assess_component(lug("1", 5.0), TWIN, values, (SIMILAR, RELATIVE)).cleared
    assert not assess_component(lug("1", 5.0), TWIN, values, (RELATIVE,)).cleared


def test_a_scheme_that_does_not_grade_a_part_does_not_put_its_rise_over_the_air_aside() -> None:
    values = of(delta_similar_k=6.0, delta_ambient_k=9.0, relative_difference_percent=66.0)
    verdict = assess_component(lug("1", 9.0), TWIN, values, (RELATIVE, AMBIENT))
    assert (verdict.urgency, governing(verdict)) == (1, ["neta-ambient"])


# --- absolute limits -------------------------------------------------------------------------------------------------

BARE = ("iec-60694/bolted-bare",)  # 90 °C, 50 K


def against_limit(t: float, air: float, ratio: float | None, u: float = 0.1) -> dict[str, Estimate | None]:
    """Numbers of a bare bolted joint without a twin, temperatures [°C]: worked out apart from the program."""
    allowed = None if ratio is None else min(90.0, air + 50.0 * min(ratio, 1.0) ** 1.6)
    above = None if allowed is None else t - allowed
    return of(u, delta_ambient_k=t - air, above_limit_k=t - 90.0, above_allowed_k=above)


def test_a_part_without_a_stated_limit_is_not_held_against_one() -> None:
    values = of(delta_similar_k=0.2, delta_ambient_k=5.0)
    assert set(classes(assess_component(lug("1", 5.0), TWIN, values, CONTACT))) == {"neta-similar", "neta-ambient"}
    bearing = lug("1", 5.0, limits=("bearing/sleeve",))  # its limit does not grow with load
    values |= of(above_limit_k=-55.0)
    assert set(classes(assess_component(bearing, TWIN, values, CONTACT))) == {
        "neta-similar",
        "neta-ambient",
        "absolute-limit",
    }


def test_the_example_of_a_joint_at_45_percent_load_exceeds_what_it_is_allowed_and_tells_its_full_load_rise() -> None:
    # Specification: bare bolted copper, 62 °C at 22 °C, 45 % load, allowed 35.9 °C at most, full-load rise 144 to 197 K
    member = Member("1", 62 + 273.15, 0.9, "lugs", 45.0, 100.0, limits=BARE)
    verdict = assess_component(member, TWIN, against_limit(62.0, 22.0, 0.45, 0.5) | of(delta_similar_k=0.3), CONTACT)
    assert (verdict.urgency, governing(verdict)) == (2, ["absolute-limit-at-load"])
    (told,) = [one for one in verdict.assessments if one.governs]
    assert told.statement.startswith("26.1\u00a0±\u00a01.0\u00a0K")  # 62 − 35.9
    assert "(50 K at rated load, iec-60694/bolted-bare)" in told.statement
    assert "At rated load it would be 144 to 198 K" in told.statement  # 197.53, printed as 197 in the specification
    assert told.source.startswith("IEC 60694, Table 3, 1996 [P]; ")


def test_beyond_its_limit_a_part_is_at_once_whatever_its_twins_say() -> None:
    values = of(delta_similar_k=0.2, delta_ambient_k=66.0, above_limit_k=0.01, above_allowed_k=16.0)
    verdict = assess_component(lug("1", 66.0, limits=BARE), TWIN, values, CONTACT)
    assert (verdict.urgency, governing(verdict)) == (4, ["absolute-limit"])
    (told,) = [one.statement for one in verdict.assessments if one.governs]
    assert "against its limit of 90 °C (iec-60694/bolted-bare)" in told


def test_a_limit_exceeded_holds_at_low_and_at_unknown_load() -> None:
    for known in ({"load": None}, {"load": 20.0}):
        values = against_limit(95.0, 25.0, None) | of(delta_similar_k=0.1)
        verdict = assess_component(lug("1", 70.0, limits=BARE, **known), TWIN, values, CONTACT)
        assert verdict.urgency == 4
        assert not verdict.cleared


def test_keeping_an_absolute_limit_alone_clears_nothing() -> None:
    bearing = lug("1", 5.0, limits=("bearing/sleeve",))
    verdict = assess_component(bearing, ALONE, of(delta_ambient_k=5.0, above_limit_k=-55.0), (AT_ONCE, AT_LOAD))
    assert verdict.urgency == 0
    assert not verdict.cleared


def test_what_is_allowed_at_a_load_is_accepted_by_the_strictest_exponent_only() -> None:
    # at 60 % load 50 K allow 18.0 K for n = 2 and 22.1 K for n = 1.6: 20 K are within the one and beyond the other
    for rise, cleared in ((17.5, True), (20.0, False)):
        values = against_limit(25.0 + rise, 25.0, 0.6)
        verdict = assess_component(lug("1", rise, limits=BARE), ALONE, values, (AT_ONCE, AT_LOAD))
        assert verdict.urgency == 0
        assert verdict.cleared == cleared


def test_a_skin_known_to_within_ten_kelvin_is_kept_below_the_lower_end_and_exceeded_above_the_upper() -> None:
    motor = lug("1", 5.0, limits=("nema-mg-1/skin-F",))  # 125 to 135 °C
    for above, urgency, cleared in ((-10.5, 0, True), (-5.0, 0, False), (0.5, 4, False)):
        values = of(delta_similar_k=0.1, delta_ambient_k=5.0, above_limit_k=above)
        verdict = assess_component(motor, TWIN, values, CONTACT)
        assert (verdict.urgency, verdict.cleared) == (urgency, cleared)


@given(st.floats(-20, 60), st.floats(0, 150), st.floats(0.01, 1.5), st.floats(0.01, 1.5))
def test_the_same_rise_at_less_load_is_never_a_milder_case(air: float, rise: float, one: float, other: float) -> None:
    # the two exponents and the cap by the packaged table; what is allowed was checked apart in test_limits
    limit = limits()[BARE[0]]
    found = []
    for ratio in sorted((one, other)):
        allowed = float(allowed_now(limit, air + 273.15, ratio)[1]) - 273.15
        values = against_limit(air + rise, air, None) | of(above_allowed_k=air + rise - allowed)
        member = lug("1", rise, limits=BARE, load=400.0 * ratio)
        found.append(assess_component(member, ALONE, values, CONTACT))
    less, more = found
    assert (less.urgency or 0) >= (more.urgency or 0)
    assert more.cleared or not less.cleared or one > 1.05 or other > 1.05  # above rating nothing is cleared at all


# --- wind: a correction may raise a class, never lower it (specification) --------------------------------------------


def test_of_a_rise_as_it_reads_and_in_calm_the_worse_counts_and_is_named() -> None:
    values = of(
        delta_similar_k=8.0, delta_ambient_k=10.0, delta_similar_in_calm_k=16.5, delta_ambient_in_calm_k=20.6
    )  # 2.06 at 5 m/s, specification
    verdict = assess_component(lug("1", 10.0, wind=5.0), TWIN, values, BOTH)
    similar, ambient = verdict.assessments
    assert (similar.urgency, similar.quantity) == (4, "delta_similar_in_calm_k")
    assert (ambient.urgency, ambient.quantity) == (3, "delta_ambient_in_calm_k")
    assert "16.50\u00a0±\u00a00.20\u00a0K (k = 2) above “phase 3”" in similar.statement
    assert "when brought to 1 m/s of wind" in similar.statement
    mild = of(delta_similar_k=4.0, delta_ambient_k=6.0, delta_similar_in_calm_k=5.4, delta_ambient_in_calm_k=8.2)
    assert assess_component(lug("1", 6.0, wind=2.0), TWIN, mild, BOTH).assessments[0].quantity == "delta_similar_k"


def test_a_part_that_is_mild_only_because_of_the_wind_is_not_cleared() -> None:
    known = {"delta_similar_k": 0.5, "delta_ambient_k": 5.0}
    assert assess_component(lug("1", 5.0, wind=3.0), TWIN, of(**known), BOTH).cleared
    for calm in ({"delta_similar_in_calm_k": 0.9}, {"delta_ambient_in_calm_k": 10.1}):
        assert not assess_component(lug("1", 5.0, wind=3.0), TWIN, of(**known, **calm), BOTH).cleared
    limited = lug("1", 5.0, limits=BARE, wind=3.0)
    within = of(**known, above_limit_k=-60.0, above_allowed_k=-17.0)  # at 60 % load, 4.1 K of it by the exponent
    assert assess_component(limited, TWIN, within, CONTACT).cleared
    shared = within | of(delta_ambient_in_calm_k=9.0)  # 4 K more in calm, below the 10 K of a warm part
    assert assess_component(limited, TWIN, shared, CONTACT).cleared
    near = shared | of(above_allowed_k=-6.0)
    assert not assess_component(limited, TWIN, near, CONTACT).cleared


# --- load, wind and sun as flags: they keep from clearing and never lower -------------------------------------------


@pytest.mark.parametrize(
    ("known", "flag", "blocked"),
    [
        ({"steady": 3599.0, "time_constant": 1200.0}, UNSTEADY, True),  # three time constants [S] are 3600 s
        ({"steady": 3600.0, "time_constant": 1200.0}, UNSTEADY, False),
        ({"steady": None, "time_constant": 1200.0}, UNSTEADY, False),  # nobody logged the load
        ({"steady": 0.0, "time_constant": None}, UNSTEADY, True),  # of a usual part, 20 minutes [house]
        ({"steady": 3600.0, "time_constant": None}, UNSTEADY, False),
        ({"wind": 5.0}, WINDY, False),
        ({"wind": 5.01}, WINDY, True),
        ({"wind": 10.0}, CONDITIONS, False),
        ({"wind": 10.01}, CONDITIONS, True),
        ({"wind": None}, WINDY, False),
        ({"load": 420.0}, LOAD_ABOVE_RATING, False),
        ({"load": 421.0}, LOAD_ABOVE_RATING, True),
    ],
)
def test_circumstances_that_make_a_mild_reading_prove_nothing(
    known: dict[str, float | None], flag: str, blocked: bool
) -> None:
    verdict = assess_component(lug("1", 5.0, **known), TWIN, of(delta_similar_k=0.5, delta_ambient_k=5.0), BOTH)
    assert (flag in verdict.flags) == blocked
    assert verdict.urgency == 0
    if blocked:
        assert not verdict.cleared
        assert f"{flag}, look again" in verdict.assessments[0].statement
    elif flag in (UNSTEADY, LOAD_ABOVE_RATING) or known.get("wind") != 10.0:
        assert verdict.cleared


MEASURED = st.one_of(st.none(), st.floats(-20, 120), st.sampled_from([0.0, 0.5, 1.0, 3.0, 10.0, 15.0, 20.0, 40.0]))
KEYS = ("delta_similar_k", "delta_ambient_k", "relative_difference_percent", "above_limit_k", "above_allowed_k")
NUMBERS = st.fixed_dictionaries(dict.fromkeys(KEYS, MEASURED))
ALL_CONTACT = (SIMILAR, AMBIENT, NAVAL, RELATIVE, AT_ONCE, AT_LOAD)
SOME = st.lists(st.sampled_from(ALL_CONTACT), min_size=1, unique=True)
STATED = st.sampled_from([(), BARE, ("insulation/F", "nec-110.14/75"), ("nema-mg-1/skin-F",)])


@given(NUMBERS, uncertainties, plans, SOME, STATED, st.floats(1, 2.5), st.sets(st.sampled_from(["similar", "ambient"])))
def test_a_correction_for_wind_never_lowers_an_urgency_and_never_clears(
    numbers_: dict[str, float | None],
    u: float | None,
    plan: TwinPlan,
    chosen_: list[Criterion],
    stated: tuple[str, ...],
    factor: float,
    corrected: set[str],
) -> None:
    member = lug("1", numbers_["delta_ambient_k"] or 0.0, limits=stated, wind=2.0)
    as_read = of(u, **numbers_)
    rises = {which: numbers_[f"delta_{which}_k"] for which in corrected}
    calm = {f"delta_{which}_in_calm_k": None if rise is None else rise * factor for which, rise in rises.items()}
    before = assess_component(member, plan, as_read, chosen_)
    after = assess_component(member, plan, as_read | of(u, **calm), chosen_)
    assert (after.urgency or 0) >= (before.urgency or 0)
    assert (after.urgency is None) <= (before.urgency is None)
    assert before.cleared or not after.cleared
    for one, other in zip(after.assessments, before.assessments, strict=True):
        assert (one.urgency or 0) >= (other.urgency or 0)


WORSE_LOADS = st.sampled_from(
    [
        {"load": None},
        {"rated": None},
        {"load": 100.0},
        {"load": 0.0},
        {"load": 900.0},
        {"steady": 60.0, "time_constant": 900.0},
        {"wind": 6.0},
        {"wind": 20.0},
        {"flags": (SIZE_LIMITED,)},
        {"flags": (CONDITIONS,)},
    ]
)


@given(NUMBERS, uncertainties, plans, SOME, STATED, WORSE_LOADS)
def test_no_circumstance_clears_or_lowers_whatever_the_criteria(
    numbers_: dict[str, float | None],
    u: float | None,
    plan: TwinPlan,
    chosen_: list[Criterion],
    stated: tuple[str, ...],
    worse: dict[str, object],
) -> None:
    member = lug("1", numbers_["delta_ambient_k"] or 0.0, limits=stated)
    values = of(u, **numbers_)
    free = assess_component(member, plan, values, chosen_)
    blocked = assess_component(replace(member, **worse), plan, values, chosen_)  # type: ignore[arg-type]
    assert blocked.urgency == free.urgency
    assert not blocked.cleared
    assert [one.urgency for one in blocked.assessments] == [one.urgency for one in free.assessments]


# --- voltage-driven parts: no load law, tenths of a kelvin ----------------------------------------------------------


def test_parts_heated_by_voltage_are_compared_as_they_read_whatever_their_load() -> None:
    arresters = (lug("1", 3.0, load=100.0), lug("2", 3.2, load=400.0), lug("3", 4.5, load=None))
    members = tuple(replace(one, method="voltage-driven") for one in arresters)
    plans = twins(members, AIR, VOLTAGE)
    assert rises(members, plans) == pytest.approx([0.0, 0.2, 1.5], abs=1e-9)
    assert all(plan.load_ratio == 1.0 and plan.flags == () for plan in plans)
    verdicts = judged(members, u=0.05, chosen=VOLTAGE)
    assert [verdict.urgency for verdict in verdicts.values()] == [0, 0, 3]
    assert [verdict.cleared for verdict in verdicts.values()] == [True, True, False]
    assert all(verdict.flags == () for verdict in verdicts.values())
    assert "At rated load" not in verdicts["3"].assessments[0].statement


def test_a_part_heated_by_voltage_without_a_twin_is_not_classed_and_not_cleared() -> None:
    member = lug("1", 0.1, method="voltage-driven", group="arresters")
    plan = twins((member,), AIR, VOLTAGE)[0]
    verdict = assess_component(member, plan, of(delta_similar_k=None, delta_ambient_k=0.1), VOLTAGE)
    assert (verdict.urgency, verdict.cleared) == (None, False)
    assert "the only one of its group “arresters”" in verdict.assessments[0].statement
    assert "load" not in verdict.assessments[0].statement


def test_warm_parts_heated_by_voltage_share_sun_or_soiling_and_no_load() -> None:
    members = tuple(lug(str(k), 12.0 + 0.1 * k, method="voltage-driven") for k in range(3))
    for verdict in judged(members, chosen=VOLTAGE).values():
        assert ALL_HOT in verdict.flags
        assert not verdict.cleared
        assert "sun, soiling, or ageing" in verdict.assessments[0].statement


# --- PV modules ------------------------------------------------------------------------------------------------------


def module(**known: object) -> Member:
    return lug("m", 20.0, **{"method": "pv", "irradiance": 860.0, "neighbours": 8, "load": None, **known})


def test_a_module_is_held_against_its_neighbours_and_load_is_not_asked_for() -> None:
    # Specification: 16 K at 860 W/m² are 18.6 K at 1000 W/m²
    verdict = assess_component(module(), ALONE, of(delta_neighbours_k=18.6, delta_ambient_k=40.0), PV)
    assert (verdict.urgency, classes(verdict)) == (2, {"pv-modules": "hot spot"})
    assert "above the median of its 8 neighbours, at 1000 W/m²" in verdict.assessments[0].statement
    assert LOAD_UNKNOWN not in verdict.flags
    assert assess_component(module(), ALONE, of(delta_neighbours_k=0.5, delta_ambient_k=30.0), PV).cleared


@pytest.mark.parametrize(
    ("known", "flag"),
    [
        ({"irradiance": 599.0}, LOW_SUN),
        ({"irradiance": None}, SUN_UNKNOWN),
        ({"irradiance": nan}, SUN_UNKNOWN),
        ({"neighbours": 5}, FEW_NEIGHBOURS),
        ({"wind": 6.0}, WINDY),
    ],
)
def test_a_module_seen_in_little_sun_or_company_is_raised_and_never_cleared(
    known: dict[str, object], flag: str
) -> None:
    for value, urgency in ((0.5, 0), (25.0, 3)):
        verdict = assess_component(module(**known), ALONE, of(delta_neighbours_k=value, delta_ambient_k=30.0), PV)
        assert (verdict.urgency, verdict.cleared) == (urgency, False)
        assert flag in verdict.flags
    enough = assess_component(
        module(irradiance=600.0, neighbours=6), ALONE, of(delta_neighbours_k=0.5, delta_ambient_k=30.0), PV
    )
    assert enough.cleared


def test_modules_warmed_by_the_sun_are_not_a_warm_group() -> None:
    members = tuple(replace(module(), name=str(k)) for k in range(3))
    assert all(plan.flags == () for plan in twins(members, AIR, PV))


# --- what is said of a group ----------------------------------------------------------------------------------------


def told(verdict: Verdict) -> str:
    return " ".join(one.statement for one in verdict.assessments)


def test_a_part_by_itself_a_group_of_one_and_one_among_incomparable_ones_are_told_apart() -> None:
    alone = judged((lug("1", 15.0, group=None), lug("2", 15.0)))
    assert "With no twin to compare with this may be its load or the ambient air" in told(alone["1"])
    assert "As the only one of its group “feeder lugs”" in told(alone["2"])
    bare = judged((lug("1", 15.0), lug("2", 15.0, emissivity=0.2)))["1"]
    assert "As no other of its group “feeder lugs” can be compared with it" in told(bare)
    for verdict in (*alone.values(), bare):
        assert (verdict.urgency, governing(verdict)) == (2, ["neta-ambient"])


def test_an_unbalanced_group_is_told_so_and_compared_at_one_load() -> None:
    verdicts = judged((lug("1", 4.0, load=200.0), lug("2", 4.0 * 2**1.8, load=400.0)))
    for verdict in verdicts.values():
        assert UNBALANCED in verdict.flags
        assert "The loads of its group differ" in told(verdict)
        assert verdict.urgency == 0


def test_a_balanced_hot_group_is_no_matter_of_one_joint_and_an_overload_is_named() -> None:
    hot = told(judged((lug("1", 31.0), lug("2", 31.4)))["2"])
    assert "not the matter of one joint: check load, harmonics and ambient air before the joints" in hot
    assert "of its rating" not in hot.split("check load")[0]
    over = told(judged((lug("1", 31.0, load=480.0), lug("2", 31.4, load=480.0)))["2"])
    assert "at 120% of its rating, which is not the matter of one joint" in over
