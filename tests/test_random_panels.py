"""Randomised switchboard panels, from raw frame to what comes first, what is raised and what is cleared.

The panels are painted by `panels.py`, which shares no code with irsurvey.  A "joint" is what is governed by the
comparison with its twins; a group that is alike and warm is told as a matter of load or ambient air, by its rise over
ambient (product definition), and may outrank a joint: 30 K above the air asks for more than 8 K above a twin.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from types import SimpleNamespace

import numpy as np
import panels
import pytest
import tasks

from irsurvey import pipeline
from irsurvey.assess.conformity import ACT, NOT_SETTLED
from irsurvey.geometry.polygons import mask
from irsurvey.model import ComponentReport, FrameReport
from irsurvey.report.ranking import governing, in_order

COUNTS = {
    "bad joint": 70,
    "bad joint beside warm rows": 40,
    "overload and a bad joint": 40,
    "saturated": 30,
    "too small a joint": 20,
    "balanced": 30,
    "overload": 15,
    "uneven overload": 15,
    "unbalanced": 20,
    "low load": 25,
    "bare bar": 25,
    "too small": 25,
}
"""How many panels of each kind: 200 with a bad joint that can be read, 75 with one that cannot, 80 that are sound."""
WITH_A_JOINT = ("bad joint", "bad joint beside warm rows", "overload and a bad joint", "saturated", "too small a joint")
UNREADABLE = ("low load", "bare bar", "too small")
SIMILAR, AMBIENT = "delta_similar_k", "delta_ambient_k"


@dataclass(frozen=True, eq=False)
class Seen:
    """A panel and what the pipeline says of it."""

    panel: panels.Panel
    report: FrameReport

    @property
    def ranked(self) -> list[ComponentReport]:
        """Components and findings, the most important first."""
        return [one.item for one in in_order(SimpleNamespace(frames=(self.report,)))]

    @property
    def joints(self) -> list[ComponentReport]:
        """Those of them that the comparison with a twin raises, in the same order."""
        return [one for one in self.ranked if one.urgency and governed_by(one) == SIMILAR]

    @property
    def suspect(self) -> ComponentReport:
        """The component with the bad joint."""
        return next(one for one in self.report.components if one.name == self.panel.bad.name)


def governed_by(item):
    assessment = governing(item.assessments)
    return assessment.quantity if assessment else ""


def task_of(panel, **changes):
    scene = tasks.scene(emissivity=(panel.emissivity, 0.02), distance=(1.0, 0.05), **panel.stated)
    given = {
        "kind": "electrical",
        "method": "contact",
        "viewed_from": None,
        "convection": "churchill-chu",
        "surface_height": 0.1,
        "camera": tasks.camera(range=panel.range),
        "reference": panel.reference,
        "components": panel.components,
        "scene": scene,
        **changes,
    }
    return tasks.task(**given)


@cache
def seen(kind: str) -> tuple[Seen, ...]:
    """All panels of a kind."""
    result = []
    for seed in range(COUNTS[kind]):
        panel = panels.panel(kind, seed)
        frame = tasks.frame(panel.t, seed=seed, noise=panel.noise)
        result.append(Seen(panel, pipeline.analyse(frame, task_of(panel))[0]))
    return tuple(result)


# --- the bad joint comes first ----------------------------------------------------------------------------------------


def test_the_bad_joint_is_the_first_joint_on_at_least_99_of_100_panels(capsys):
    all_seen = [one for kind in WITH_A_JOINT for one in seen(kind)]
    assert len(all_seen) >= 200  # what the project promises, and the rate it promises
    first = [bool(one.joints) and one.joints[0] is one.suspect for one in all_seen]
    with capsys.disabled():
        print(f"\nbad joint the first joint: {sum(first)} of {len(first)} panels")
    assert sum(first) >= 0.99 * len(first)


@pytest.mark.parametrize("kind", ["bad joint", "overload and a bad joint", "saturated"])
def test_it_is_the_first_of_everything_where_no_other_row_is_a_matter_of_load_or_air(kind):
    # rows beside it stay below 10 K above the air, or there are none, or it is beyond the range, which leads
    first = [one.ranked[0] is one.suspect for one in seen(kind)]
    assert sum(first) >= 0.99 * len(first)


def test_what_comes_before_a_joint_beside_warm_rows_is_told_as_load_or_air():
    for one in seen("bad joint beside warm rows"):
        before = one.ranked[: one.ranked.index(one.suspect)]
        joints = [item for item in before if governed_by(item) == SIMILAR]
        assert all(item in one.joints for item in joints)
        for item in before:
            if governed_by(item) == AMBIENT:
                assert "check load, harmonics and ambient air" in governing(item.assessments).statement


def test_the_bad_joint_is_raised_for_repair_by_what_it_is_above_its_twins(capsys):
    # painted 4 K and more above sound parts at this load: ANSI/NETA asks for a repair from 3 K on
    raised = [one.suspect.urgency >= 2 for kind in WITH_A_JOINT[:4] for one in seen(kind)]
    with capsys.disabled():
        print(f"\nbad joints of 4 K and more raised for repair: {sum(raised)} of {len(raised)}")
    assert sum(raised) >= 0.97 * len(raised)  # one of 4 K may read 3 K: n is not known, a spot is 3 × 3 pixels


def test_its_difference_is_what_was_painted():
    for one in seen("overload and a bad joint"):
        bad = one.panel.bad
        # A spot of 3 × 3 pixels on a bell of σ ≥ 3 px misses up to a twentieth of it, an ε off by 0.01 a hundredth of
        # the rise; loads alike to a hundredth leave two hundredths of the rise.  k = 2 of what is reported besides.
        allowed = 0.1 * bad.excess + 0.03 * bad.rise + 2 * one.suspect.delta_similar_k.u
        assert one.suspect.delta_similar_k.value == pytest.approx(bad.excess, abs=allowed)


# --- sound panels -----------------------------------------------------------------------------------------------------


def test_no_joint_is_raised_on_a_balanced_panel():
    for one in seen("balanced"):
        assert one.joints == []
        assert one.report.findings == ()


def test_a_warm_balanced_row_is_told_as_a_matter_of_load_or_air():
    told = 0
    for one in seen("balanced"):
        for item in one.report.components:
            if item.urgency:
                told += 1
                assert governed_by(item) == AMBIENT
                assert "whole group warm" in item.flags
                assert (
                    "check load, harmonics and ambient air before the joints" in governing(item.assessments).statement
                )
    assert told > 80  # most rows at load are that warm, so that the assertions above were made


def test_overloaded_rows_that_are_alike_are_told_as_a_matter_of_load_and_none_as_a_joint():
    for one in seen("overload"):
        assert one.joints == []
        for item in one.report.components:
            assert "whole group warm" in item.flags
            assert item.urgency >= 3  # 25 K and more above the air: ANSI/NETA watches from 21 K on
            assert not item.cleared


def test_of_overloaded_rows_that_differ_by_a_percent_it_is_still_the_load_that_is_told():
    # 1 K of 80 K is asked about between twins and no reason to forget the other 79
    for one in seen("uneven overload"):
        assert one.joints == []
        assert not any(item.cleared for item in one.report.components)


def test_of_unbalanced_rows_as_stated_no_joint_is_raised_for_repair(capsys):
    # n is 1.6 to 2.0 and not known: of 40 K at 0.6 of the load the twin may be 1.7 K off
    asked = [one for one in seen("unbalanced") if one.joints]
    with capsys.disabled():
        print(
            f"\nsound panels under unlike loads with a joint to be asked about: {len(asked)} of {COUNTS['unbalanced']}"
        )
    assert all(item.urgency <= 1 for one in asked for item in one.joints)


def test_some_sound_parts_are_cleared_so_that_the_next_tests_can_fail():
    assert sum(item.cleared for one in seen("balanced") for item in one.report.components) > 0


# --- nothing suspicious is cleared ------------------------------------------------------------------------------------


@pytest.mark.parametrize("kind", [*WITH_A_JOINT, *UNREADABLE])
def test_no_bad_joint_is_ever_cleared(kind):
    assert [one.panel.bad.name for one in seen(kind) if one.suspect.cleared] == []


@pytest.mark.parametrize("kind", [*WITH_A_JOINT, *UNREADABLE])
def test_no_bad_joint_is_called_settled(kind):
    assert {one.suspect.outcome for one in seen(kind)} <= {ACT, NOT_SETTLED}


@pytest.mark.parametrize(
    ("kind", "flag"),
    [("low load", "low load"), ("bare bar", "too reflective for a claim"), ("too small", "size-limited")],
)
def test_at_low_load_on_bare_metal_and_below_a_spot_no_part_is_cleared_and_each_says_why(kind, flag):
    for one in seen(kind):
        for item in one.report.components:
            assert not item.cleared
            assert {flag, "cannot be cleared"} <= set(item.flags)


def test_bare_metal_gets_no_class():
    for one in seen("bare bar"):
        assert all(each.class_ is None for item in one.report.components for each in item.assessments)


def test_beyond_the_range_the_bad_joint_is_a_bound_and_leads():
    for one in seen("saturated"):
        assert "saturated" in one.suspect.flags
        assert one.ranked[0] is one.suspect
        assert governing(one.suspect.assessments).statement.startswith("≥ ")


def test_a_joint_smaller_than_a_spot_is_told_as_such():
    told = ["size-limited" in one.suspect.flags for one in seen("too small a joint")]
    assert all(told)


# --- the same with parts that nobody drew -----------------------------------------------------------------------------


@pytest.fixture(scope="module")
def found():
    """Panels of one balanced bad row each, nothing drawn on them."""
    result = []
    for seed in range(15):
        panel = panels.panel("overload and a bad joint", seed)
        frame = tasks.frame(panel.t, seed=seed, noise=panel.noise)
        result.append(Seen(panel, pipeline.analyse(frame, task_of(panel, components=(), find_components=True))[0]))
    return result


def at(report, part):
    """The found component that covers the middle of a painted part, or None."""
    x, y = round(part.x), round(part.y)
    return next((one for one in report.components if mask(one.polygon, panels.SHAPE)[y, x]), None)


def test_every_part_of_a_warm_row_is_found_and_they_are_twins(found):
    for one in found:
        components = [at(one.report, part) for part in one.panel.parts]
        assert None not in components
        assert len({component.name for component in components}) == len(one.panel.parts)
        assert len({component.group for component in components}) == 1
        assert components[0].group is not None


def test_the_bad_joint_among_found_parts_is_the_first_joint(found):
    assert all(one.joints and one.joints[0] is at(one.report, one.panel.bad) for one in found)


def test_no_found_part_is_cleared(found):
    for kind in ("balanced", "low load", "bare bar", "saturated", "too small"):
        for seed in range(3):
            panel = panels.panel(kind, seed)
            frame = tasks.frame(panel.t, seed=seed, noise=panel.noise)
            report, _ = pipeline.analyse(frame, task_of(panel, components=(), find_components=True))
            assert not any(component.cleared for component in report.components)
    assert not any(component.cleared for one in found for component in one.report.components)


# --- the panels themselves --------------------------------------------------------------------------------------------


def test_a_panel_is_made_by_its_kind_and_seed_alone():
    for kind in panels.KINDS:
        np.testing.assert_array_equal(panels.panel(kind, 3).t, panels.panel(kind, 3).t)
        assert (panels.panel(kind, 3).t != panels.panel(kind, 4).t).any()


def test_painted_loads_and_rises_are_those_of_the_kind():
    for seed in range(20):
        for part in panels.panel("low load", seed).parts:
            assert part.load / part.rated < 0.4
        assert all(part.load / part.rated > 1.0 for part in panels.panel("overload", seed).parts)
        assert panels.panel("balanced", seed).bad is None
        assert panels.panel("bad joint", seed).bad.excess >= 4.0
        small = panels.panel("too small", seed).parts
        assert all(max(part.width, part.height) < 3 for part in small)


def test_a_quiet_panel_is_seen_at_the_temperatures_painted():
    panel = panels.panel("balanced", 1)
    one = max(panel.parts, key=lambda part: part.rise)
    frame = tasks.frame(panel.t, seed=None)
    report, _ = pipeline.analyse(frame, task_of(panel))
    component = next(item for item in report.components if item.name == one.name)
    # the same Planck sum, ε off by 0.01 and surroundings by 0.5 K as stated: k = 2 of what is reported
    expected = panel.ambient + one.rise - panels.KELVIN
    assert component.max_c.value == pytest.approx(expected, abs=2 * component.max_c.u)
