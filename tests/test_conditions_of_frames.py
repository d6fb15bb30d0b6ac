"""What was recorded of a frame's conditions, what it allows to claim, and what a complete report states of it."""

from __future__ import annotations

import pickle
from dataclasses import replace
from datetime import UTC, datetime
from typing import Any

import pytest
import tasks

from irsurvey.analysis.checklist import present_in
from irsurvey.analysis.conditions import claimed_by, element_time_constant, recorded, reviewed
from irsurvey.assess.checklist import asked, checklist
from irsurvey.assess.conditions import claim, requirement_sets
from irsurvey.model import (
    Component,
    Element,
    FrameReport,
    FrameTask,
    Indication,
    Layer,
    Pair,
    Quantity,
    Scene,
    Survey,
)

HOUR = 3600.0
BRICK = Element("wall", layers=(Layer("brick", 0.215),), u_value=1.5)
FRAMED = Element("wall", layers=(Layer("plasterboard", 0.0125), Layer("mineral wool", 0.14), Layer("OSB", 0.012)))

WELL = {
    "indoor_air": 293.15,
    "outdoor_air": 273.15,
    "outdoor_24h_low": 270.65,
    "outdoor_24h_high": 274.65,
    "wind": 1.0,
    "irradiance": 0.0,
    "hours_since_sun": 14 * HOUR,
    "hours_since_rain": 40 * HOUR,
    "hours_difference_held": 48 * HOUR,
    "hours_steady": 24 * HOUR,
    "hours_furniture_clear": 9 * HOUR,
}
"""A calm night after two days of heating."""
SURVEY_LOG = (("outdoor_change_survey_k", 0.5), ("indoor_change_survey_k", 0.2))


def frame(**changes: Any) -> FrameTask:
    """A task under good conditions; `values` replace those of its scene, None leaves one out."""
    values = {**WELL, **changes.pop("values", {})}
    given: dict[str, Any] = {"history": SURVEY_LOG, "element": BRICK, **changes}
    return tasks.task(scene=tasks.scene(**{key: of for key, of in values.items() if of is not None}), **given)


def test_conditions_are_told_in_the_units_requirements_are_written_in() -> None:
    told = recorded(frame(values={"pressure_difference": -50.0}))
    assert told["air_difference_k"] == pytest.approx(20, abs=1e-9)
    assert told["hours_since_sun"] == 14
    assert told["hours_since_rain"] == 40
    assert told["hours_difference_held"] == 48
    assert told["hours_steady"] == 24
    assert told["hours_furniture_clear"] == 9
    assert told["outdoor_change_24h_k"] == pytest.approx(2.5, abs=1e-9)  # the day's extremes against now
    assert told["outdoor_change_survey_k"] == 0.5
    assert told["indoor_change_survey_k"] == 0.2
    assert told["wind_m_s"] == 1
    assert told["pressure_difference_pa"] == 50
    assert told["u_value_w_m2k"] == 1.5
    # 215 mm of brick between films of 7.69 and 25 (0.77 W/mK, 1700 kg/m³, 800 J/kgK): 5.2 h, see tests/heat
    assert told["time_constant_h"] == pytest.approx(5.2, abs=0.05)
    assert told["is_heavy"] == 1
    assert told["is_outside"] == 0
    assert recorded(frame(viewed_from="outside"))["is_outside"] == 1


def test_every_number_a_requirement_asks_for_has_its_place_in_what_is_recorded() -> None:
    asked_for = {
        key
        for one in requirement_sets()
        for row in one.requirements
        for key in (row.key, row.over, row.times, *row.when)
        if key
    }
    assert asked_for <= set(recorded(frame()))


def test_a_frame_of_which_nothing_was_stated_records_nothing_but_its_side() -> None:
    told = recorded(tasks.task())
    assert {key for key, value in told.items() if value is not None} == {"is_outside"}


def test_what_was_assumed_was_not_recorded() -> None:
    stated = frame()
    assumed = tuple(replace(one, source="default") for one in stated.scene.quantities)
    told = recorded(replace(stated, scene=Scene(assumed), element=None, history=()))
    assert {key for key, value in told.items() if value is not None} == {"is_outside"}


def test_what_is_stated_goes_before_what_a_log_tells_and_a_log_before_silence() -> None:
    log = (("hours_difference_held", 6.0), ("hours_since_rain", 2.0), ("outdoor_change_24h_k", 8.0))
    told = recorded(frame(history=log))
    assert (told["hours_difference_held"], told["hours_since_rain"]) == (48, 40)
    assert told["outdoor_change_24h_k"] == 8  # every reading of the day, not only its extremes
    silent = dict.fromkeys(("hours_difference_held", "hours_since_rain"))
    told = recorded(frame(history=log, values=silent))
    assert (told["hours_difference_held"], told["hours_since_rain"]) == (6, 2)


@pytest.mark.parametrize(("least", "held"), [(10.0, 24.0), (9.9, None)])
def test_a_day_that_never_fell_below_ten_kelvins_held_them_for_a_day(least: float, held: float | None) -> None:
    told = recorded(frame(history=(("air_difference_24h_min_k", least),), values={"hours_difference_held": None}))
    assert told["hours_difference_held"] == held


def test_the_pressure_of_a_pair_is_that_of_its_frame() -> None:
    partner = frame(id="F00")
    told = recorded(frame(pair=Pair(partner, -50.0), values={"pressure_difference": 4.0}))
    assert told["pressure_difference_pa"] == 50


@pytest.mark.parametrize(
    ("element", "hours", "is_heavy"),
    [
        (None, None, None),
        (Element("e"), None, None),
        (Element("e", mass="light"), 2, 0),
        (Element("e", mass="medium"), 12, 1),
        (Element("e", mass="heavy"), 24, 1),
        (replace(BRICK, mass="light"), 5.2, 1),  # layers say more than a name
        (FRAMED, 0.66, 0),
        (Element("e", layers=(Layer(thickness=0.2, conductivity=2.0, density=2400, specific_heat=1000),)), 5.9, 1),
        (Element("e", layers=(Layer("concrete", 0.2), Layer(resistance=100.0))), 21.9, 1),
        (Element("e", layers=(Layer("unheard of", 0.2),)), None, None),
        (Element("e", layers=(Layer("unheard of", 0.2),), mass="heavy"), 24, 1),
        (Element("e", layers=(Layer("brick", 0.215, specific_heat=1000),)), 6.54, 1),  # its own figure counts
    ],
)
def test_an_element_is_as_slow_as_its_layers_or_its_name_say(
    element: Element | None, hours: float | None, is_heavy: float | None
) -> None:
    told = recorded(frame(element=element))
    assert told["is_heavy"] == is_heavy
    # hours to the digits given in the list; checked against tables and the analytic solution in tests/heat
    assert told["time_constant_h"] == (None if hours is None else pytest.approx(hours, abs=0.05))
    assert (element_time_constant(element) is None) == (hours is None)


def test_the_load_is_that_of_the_least_loaded_component() -> None:
    def loaded(*loads: float | None) -> FrameTask:
        parts = tuple(Component(f"lug {k}", (), load=load, rated=400) for k, load in enumerate(loads))
        return tasks.task(kind="electrical", method="contact", viewed_from=None, components=parts)

    assert recorded(loaded(200, 160, 320))["load_ratio"] == 0.4
    assert recorded(loaded(200, None))["load_ratio"] is None
    assert recorded(loaded())["load_ratio"] is None


def test_a_well_recorded_night_is_quantitative_from_both_sides() -> None:
    assert claimed_by(frame()) == ("quantitative", "all requirements on the conditions are met")
    assert claimed_by(frame(viewed_from="outside"))[0] == "quantitative"


def test_the_claim_of_a_frame_is_that_of_what_it_recorded() -> None:
    windy = frame(values={"wind": 8.0})
    assert claimed_by(windy) == claim((), "building", "envelope", recorded(windy))
    assert claimed_by(windy)[0] == "qualitative"
    assert claimed_by(frame(values={"wind": 6.0}, standards=("astm-c1060",)))[0] == "quantitative"


def test_a_group_is_reviewed_by_the_frame_that_fares_worst() -> None:
    rows = reviewed(
        [
            frame(group="room"),
            frame(group="room", values={"wind": 8.0}),
            frame(group="room", values={"wind": None}),
            frame(group="yard", viewed_from="outside"),
        ]
    )
    wind = {row.group: row for row in rows if row.check == "wind"}
    assert (wind["room"].verdict, wind["room"].value, wind["room"].limits_to) == ("not met", 8.0, "qualitative")
    assert (wind["yard"].verdict, wind["yard"].value, wind["yard"].limits_to) == ("met", 1.0, None)
    assert len({(row.group, row.check, row.source) for row in rows}) == len(rows)


def test_the_standards_of_each_frame_are_reviewed_by_name() -> None:
    sources = {row.source for row in reviewed([frame(standards=("en-13187", "astm-c1060"))])}
    assert {"EN 13187:1998 as applied [S]", "ASTM C1060 [S]"} <= sources
    roof = tasks.task(method="roof-moisture", viewed_from="outside", standards=("en-13187",))
    assert {row.source.partition(" (")[0] for row in reviewed([roof])} >= {"ASTM C1153 [S]"}


def test_rows_and_claims_survive_pickling() -> None:
    rows = reviewed([frame()])
    assert pickle.loads(pickle.dumps(rows)) == rows


# ---- what a complete report states ----------------------------------------------------------------------------

ABOUT = {
    "client": "the owner",
    "construction": "brick, 215 mm",
    "standard": "EN 13187, simplified testing",
    "test_description": "rooms scanned from inside",
    "supplementary": "hygrometer",
    "influences": "none known",
    "signed_by": "S. Surveyor",
}


class Shown:
    """Stands in for a frame report: what the checklist asks of one."""

    def __init__(self, name: str, status: str = "analysed", kind: str = "building", findings: tuple[Any, ...] = ()):
        self.id, self.status, self.kind, self.findings = name, status, kind, findings


class Found:
    """Stands in for a finding."""

    def __init__(self, indication: Indication | None) -> None:
        self.indication = indication


INDICATED = Found(Indication("no typical pattern", "", {}, ""))


def complete(**changes: Any) -> FrameTask:
    told = {
        "camera": tasks.camera(serial="0001"),
        "orientation": "north",
        "label": "north wall",
        "photo": "f01.jpg",
        "taken": datetime(2026, 1, 18, 7, tzinfo=UTC),
        **changes,
    }
    return frame(values={"pressure_difference": 2.0, **told.pop("values", {})}, **told)


def missing(*shown: FrameTask, about: dict[str, str] = ABOUT, frames: tuple[Any, ...] | None = None) -> set[str]:
    """Names of the items that a report of these frames does not state."""
    reports: tuple[FrameReport, ...] = frames or tuple(Shown(task.id, findings=(INDICATED,)) for task in shown)  # type: ignore[assignment]
    found = present_in(Survey("a house", "", shown, about=tuple(about.items())), reports)
    assert all(found.values())
    checklist(found)  # knows every name
    return {one.name for one in asked()} - set(found)


def test_a_survey_that_states_everything_misses_nothing() -> None:
    assert missing(complete(), complete(id="F02")) == set()


@pytest.mark.parametrize(
    ("key", "item"),
    [
        ("client", "client"),
        ("construction", "construction"),
        ("standard", "standard"),
        ("test_description", "test"),
        ("supplementary", "supplementary"),
        ("influences", "influences"),
        ("signed_by", "signature"),
    ],
)
def test_a_text_that_nobody_wrote_is_missing(key: str, item: str) -> None:
    assert missing(complete(), about={name: text for name, text in ABOUT.items() if name != key}) == {item}


@pytest.mark.parametrize(
    ("changes", "items"),
    [
        ({"values": {"indoor_air": None}}, {"indoor air", "air difference"}),
        ({"values": {"outdoor_air": None}}, {"air difference", "outdoor air"}),
        ({"values": {"outdoor_24h_low": None}}, {"outdoor air before"}),
        ({"values": {"hours_since_rain": None}}, {"precipitation"}),
        ({"values": {"wind": None}}, {"wind"}),
        ({"values": {"hours_since_sun": None}}, {"sun before"}),
        ({"values": {"hours_since_sun": None, "irradiance": None}}, {"sun before", "sun"}),
        ({"taken": None}, {"when"}),
        ({"label": ""}, {"parts"}),
        ({"orientation": ""}, {"orientation"}),
        ({"camera": tasks.camera()}, {"equipment"}),
        ({"photo": None}, {"views"}),
    ],
)
def test_what_one_frame_does_not_state_is_missing(changes: dict[str, Any], items: set[str]) -> None:
    assert missing(complete(), complete(id="F02", **changes)) == items


def test_one_frame_that_tells_the_pressure_is_enough() -> None:
    still = {"values": {"pressure_difference": None}}
    assert missing(complete(**still)) == {"pressure"}
    assert missing(complete(**still), complete(id="F02")) == set()
    assert missing(complete(**still), complete(id="F02", pair=Pair(complete(**still), -50.0), **still)) == set()


def test_an_emissivity_nobody_stated_is_missing() -> None:
    known = complete()
    assumed = Quantity("emissivity", 0.93, 0.03, "default")
    assert missing(replace(known, scene=known.scene.with_(assumed))) == {"surfaces"}


def test_a_defect_without_its_type_is_missing_and_no_defect_is_an_answer() -> None:
    assert missing(complete(), frames=(Shown("F01", findings=(INDICATED, Found(None))),)) == {"defects"}
    assert missing(complete(), frames=(Shown("F01"),)) == set()


@pytest.mark.parametrize("shown", [Shown("F01", status="failed"), Shown("F01", kind="electrical")])
def test_frames_that_show_no_building_state_nothing(shown: Shown) -> None:
    left = missing(complete(), frames=(shown,))
    assert {one.name for one in asked()} - left == {
        *("test", "standard", "client", "construction", "supplementary", "influences", "signature")
    }
