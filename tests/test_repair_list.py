"""The repair list of a survey, from the records of its frames."""

from __future__ import annotations

from dataclasses import MISSING, fields, replace

import numpy as np
import pytest

from irsurvey.analysis.repairs import repair_list
from irsurvey.assess.criteria import criteria
from irsurvey.assess.electrical import assess_component
from irsurvey.assess.severity import LOW_LOAD, SATURATED, SIZE_LIMITED, assess
from irsurvey.assess.twins import ALL_HOT, Member, TwinPlan
from irsurvey.model import AssetReport, ComponentReport, Estimate, Finding, FrameReport, Shape, Source

NETA = tuple(criteria()[name] for name in ("neta-similar", "neta-ambient"))
ASSETS = (AssetReport("MCC-1", "motor control centre", "pump hall, bay 3", 1, True, None, ("F01",)),)


def record(of, /, **given):
    """A record with nothing in it but what is given: None, "", () or {} by the type of the field."""
    empty = {"str": "", "int": 0, "float": 0.0, "bool": False}
    for field in fields(of):
        if field.name not in given and field.default is MISSING:
            kind_of = str(field.type)
            blank = () if kind_of.startswith("tuple") else {} if kind_of.startswith("dict") else None
            given[field.name] = empty.get(kind_of, blank)
    return of(**given)


def frame(id_="F01", components=(), findings=(), **given):
    given = {"status": "analysed", "kind": "electrical", "source": Source("f.tif", None, None, None), **given}
    return record(FrameReport, id=id_, components=tuple(components), findings=tuple(findings), **given)


def component(name="lug 2", similar=(8.0, 1.0), ambient=(30.0, 2.0), flags=(), frame_id="F01", **given):
    """Measured, and assessed as any component is."""
    values = {
        "delta_similar_k": None if similar is None else Estimate(*similar),
        "delta_ambient_k": None if ambient is None else Estimate(*ambient),
    }
    load, rated = given.setdefault("load_a", 300.0), given.setdefault("rated_a", 400.0)
    member = Member(name, 330.0, given.pop("emissivity", 0.95), "lugs", load, rated, flags)
    plan = TwinPlan() if similar is None else TwinPlan(0, "lug 1", flags=(ALL_HOT,) if ALL_HOT in flags else ())
    verdict = assess_component(member, plan, values, NETA)
    known = {one.name: one.quantity for one in NETA}
    return record(
        ComponentReport,
        name=name,
        key=f"{frame_id}:component:{name}",
        group="lugs",
        **values,
        assessments=tuple(replace(one, quantity=known[one.criterion]) for one in verdict.assessments),
        urgency=verdict.urgency,
        cleared=verdict.cleared,
        outcome=verdict.outcome,
        flags=verdict.flags,
        **given,
    )


def finding(delta=12.0, label=1, **given):
    criterion = criteria()["electrical-contrast"]
    told = replace(assess(criterion, Estimate(abs(delta), 1.0), "", ()), quantity="delta_k", governs=True)
    return record(
        Finding,
        id=f"F01-{label}",
        key=f"F01:hot:{label}",
        label=label,
        sense="hot" if delta > 0 else "cold",
        delta_k=Estimate(delta, 1.0),
        shape=record(Shape, centre=(0.0, 0.0), extreme_at=(0.0, 0.0)),
        assessments=(told,),
        urgency=told.urgency,
        outcome="act" if told.urgency else "not cleared",
        **given,
    )


def test_a_line_says_where_what_how_much_and_what_to_do():
    (line,) = repair_list([frame(components=[component()], asset="MCC-1", label="door 3")], ASSETS)
    assert (line.rank, line.key, line.frame) == (1, "F01:component:lug 2", "F01")
    assert line.what == "lug 2 (lugs)"
    assert (line.asset, line.location) == ("MCC-1", "pump hall, bay 3")
    assert (line.urgency, line.class_) == (2, "marked")
    assert (line.delta_k, line.delta_basis) == (Estimate(8.0, 1.0), "similar")
    assert (line.load_a, line.rated_a) == (300.0, 400.0)
    assert line.confidence == pytest.approx(1.0, abs=1e-6)  # 3 K is 5 u below
    assert "remake the joint" in line.action
    assert line.inspect_again.startswith("after repair")


def test_location_is_the_label_where_no_asset_says_it():
    frames = [frame(components=[component()], asset="unknown", label="door 3")]
    assert repair_list(frames, ASSETS)[0].location == "door 3"
    assert repair_list(frames, ())[0].location == "door 3"


def test_what_is_cleared_and_what_is_no_electrical_frame_is_not_listed():
    sound = component("lug 1", (0.2, 0.1), (5.0, 0.5))
    assert sound.outcome == "cleared"
    assert repair_list([frame(components=[sound]), frame("F02", findings=[finding()], kind="building")], ()) == ()


def test_confidence_is_that_of_the_governing_number_and_orders_lines_of_one_urgency():
    lines = repair_list(
        [frame(components=[component("less sure", (16.0, 1.2)), component("surer", (17.4, 1.2))])],
        (),
    )
    assert [line.what for line in lines] == ["surer (lugs)", "less sure (lugs)"]
    assert [line.confidence for line in lines] == [
        pytest.approx(0.977, abs=5e-4),
        pytest.approx(0.798, abs=5e-4),
    ]  # [C]


def test_a_bound_keeps_its_confidence_as_a_least_one_and_says_how_to_read_it():
    (line,) = repair_list([frame(components=[component(similar=(16.0, 1.2), flags=(SATURATED,))])], ())
    assert line.confidence == pytest.approx(0.798, abs=5e-4)
    assert "temperature range" in line.action


def test_a_whole_warm_group_is_worded_as_a_matter_of_load_and_air():
    (line,) = repair_list([frame(components=[component(similar=(0.3, 0.4), flags=(ALL_HOT,))])], ())
    assert (line.urgency, line.delta_basis) == (3, "ambient")
    assert "harmonics" in line.action
    assert "remake" not in line.action


def test_low_load_is_listed_below_and_inspected_again_at_load():
    lines = repair_list(
        [
            frame(components=[component("idle", (0.1, 0.2), (0.4, 0.2), load_a=60.0)]),
            frame("F02", components=[component("bad", (16.0, 1.0), frame_id="F02")]),
        ],
        (),
    )
    assert [line.what for line in lines] == ["bad (lugs)", "idle (lugs)"]
    assert (lines[1].urgency, lines[1].confidence) == (0, None)
    assert "at load" in lines[1].action
    assert lines[1].inspect_again.startswith("at 40 % of its rating or more")


def test_a_region_that_nobody_drew_is_listed_against_its_reference():
    lines = repair_list([frame(findings=[finding(22.0), finding(-6.0, 2)], asset="MCC-1")], ASSETS)
    assert [line.what for line in lines] == [
        "region 1, warmer than its reference",
        "region 2, colder than its reference",
    ]
    assert {line.delta_basis for line in lines} == {"reference"}
    assert [line.delta_k.value for line in lines] == [22.0, -6.0]
    assert {(line.load_a, line.rated_a) for line in lines} == {(None, None)}


def test_a_limit_governs_with_the_difference_measured_beside_it():
    seen = component(similar=(0.2, 0.1), ambient=(75.0, 1.0))
    told = replace(seen.assessments[1], quantity="above_limit_k", governs=True)
    seen = replace(seen, assessments=(replace(seen.assessments[0], governs=False), told), urgency=4, outcome="act")
    (line,) = repair_list([frame(components=[seen])], ())
    assert (line.delta_k.value, line.delta_basis) == (75.0, "ambient")
    assert "below its limit" in line.action


def test_a_scheme_of_the_sites_own_gives_its_confidence_where_it_is_made_known():
    own = replace(criteria()["neta-similar"], name="site")
    seen = component(similar=(16.0, 1.2))
    marked = tuple(replace(one, criterion="site") if one.governs else one for one in seen.assessments)
    frames = [frame(components=[replace(seen, assessments=marked)])]
    assert repair_list(frames, (), {"site": own})[0].confidence == pytest.approx(0.798, abs=5e-4)
    assert repair_list(frames, ())[0].confidence is None
    assert repair_list(frames, ())[0].urgency == 4


def test_a_part_nobody_could_measure_is_listed_too():
    unread = component(similar=None, ambient=None)
    assert unread.outcome == "not cleared"
    (line,) = repair_list([frame(components=[unread])], ())
    assert (line.urgency, line.delta_k, line.confidence) == (None, None, None)
    assert "ook again" in line.action


def test_of_random_surveys_nothing_uncleared_is_left_out_and_the_worst_joint_leads():
    """200 surveys of 12 parts, one of them a bad joint of 18 to 60 K; deviations of sound ones below a kelvin.

    Whatever clouds a reading (low load, size, saturation, reflections) may hold any of them back from being cleared and
    never from the list."""
    rng = np.random.default_rng(11)
    clouds = [(), (), (), (SIZE_LIMITED,), (SATURATED,), ("no physical solution",)]
    for _ in range(200):
        bad = int(rng.integers(12))
        parts = []
        for number in range(12):
            truth = rng.uniform(18, 60) if number == bad else abs(rng.normal(0, 0.2))
            u = rng.uniform(0.1, 0.5)
            parts.append(
                component(
                    f"part {number}",
                    (truth + rng.normal(0, u), u),
                    (truth + rng.uniform(3, 9), 1.0),
                    clouds[rng.integers(len(clouds))],
                    emissivity=rng.choice([0.95, 0.95, 0.3]) if number != bad else 0.95,
                    load_a=rng.choice([80.0, 300.0, 390.0, None]),
                )
            )
        lines = repair_list([frame(components=parts[:7]), frame("F02", components=parts[7:])], ())
        assert {line.key for line in lines} == {part.key for part in parts if part.outcome != "cleared"}
        assert lines[0].what == f"part {bad} (lugs)"
        listed = {line.key: line for line in lines}
        assert all(LOW_LOAD not in part.flags or "at load" in listed[part.key].action for part in parts)
