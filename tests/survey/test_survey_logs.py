"""What logs tell of the time before a frame, from the file to the record: figures by requirement key."""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime, timedelta

import pytest

from irsurvey.model import Scene, Survey

Load = Callable[..., Survey]

TAKEN = datetime(2026, 1, 18, 8, tzinfo=UTC)


def log(hours: float, step: float = 1.0, **columns: Callable[[float], float]) -> str:
    """A log up to an hour after TAKEN, `hours` before it; columns are functions of the hours since TAKEN."""
    count = int((hours + 1) / step)
    times = [1 - step * number for number in range(count + 1)][::-1]
    rows = [
        ",".join([(TAKEN + timedelta(hours=time)).isoformat(), *(str(of(time)) for of in columns.values())])
        for time in times
    ]
    return "\n".join([",".join(["time", *columns]), *rows])


def at(minimal: str, conditions: str = "", frame: str = "") -> str:
    text = minimal.replace("air_c = 20", f'air_c = 20\nlog = "log.csv"\n{conditions}')
    return f"{text}taken = {TAKEN.isoformat()}\n{frame}\n"


def told(survey: Survey, number: int = 0) -> dict[str, float]:
    return dict(survey.tasks[number].history)


def scene_of(survey: Survey) -> Scene:
    return survey.tasks[0].scene


def room(_: float) -> float:
    return 20.0


def steady_frost(time: float) -> float:
    """−2 °C until ten hours before, then 3 °C within the hour."""
    return -2.0 if time < -10 else 3.0


def test_two_days_of_both_airs_tell_all_there_is_to_tell(minimal: str, load_text: Load) -> None:
    survey = load_text(at(minimal), {"log.csv": log(48, indoor_air_c=room, outdoor_air_c=steady_frost)})
    figures = told(survey)
    assert figures == {
        "outdoor_change_24h_k": pytest.approx(5, abs=1e-9),
        "air_difference_24h_min_k": pytest.approx(17, abs=1e-9),
        "hours_difference_held": pytest.approx(48, abs=1e-9),
        # 2 K below 3 °C is passed 0.4 of an hour before the ten hours, on the straight line from −2 to 3 °C
        "hours_steady": pytest.approx(10.4, abs=1e-9),
        "outdoor_change_survey_k": 0.0,
        "indoor_change_survey_k": 0.0,
    }
    scene = scene_of(survey)
    assert [(scene[f"outdoor_24h_{end}"].value, scene[f"outdoor_24h_{end}"].source) for end in ("low", "high")] == [
        (pytest.approx(271.15, abs=1e-9), "log"),
        (pytest.approx(276.15, abs=1e-9), "log"),
    ]


def test_a_log_of_some_hours_tells_no_day_but_how_long_at_least(minimal: str, load_text: Load) -> None:
    survey = load_text(at(minimal), {"log.csv": log(9, indoor_air_c=room, outdoor_air_c=steady_frost)})
    figures = told(survey)
    assert {"outdoor_change_24h_k", "air_difference_24h_min_k"}.isdisjoint(figures)
    assert "outdoor_24h_low" not in scene_of(survey)
    assert (figures["hours_difference_held"], figures["hours_steady"]) == (pytest.approx(9), pytest.approx(9))


def test_one_air_alone_tells_no_difference(minimal: str, load_text: Load) -> None:
    figures = told(load_text(at(minimal, "indoor_air_c = 20"), {"log.csv": log(48, outdoor_air_c=steady_frost)}))
    assert {"air_difference_24h_min_k", "hours_difference_held"}.isdisjoint(figures)
    assert "outdoor_change_24h_k" in figures


def test_how_steady_is_steady_grows_with_the_difference_across_the_wall(minimal: str, load_text: Load) -> None:
    """0.1 of 50 K is 5 K: the 4 K of this log are steady then, and not at 20 K (house rule: 2 K or a tenth)."""

    def outdoor(time: float) -> float:
        return -26.0 if time < -10 else -30.0

    for indoor, hours in ((20.0, 24.0), (-10.0, 10.5)):
        files = {"log.csv": log(24, indoor_air_c=lambda _, t=indoor: t, outdoor_air_c=outdoor)}
        assert told(load_text(at(minimal), files))["hours_steady"] == pytest.approx(hours)


def test_logs_of_several_levels_are_one(minimal: str, load_text: Load) -> None:
    text = at(minimal, frame='group = "g"\n[[group]]\nid = "g"\nconditions = { log = "room.csv" }')
    files = {"log.csv": log(30, outdoor_air_c=steady_frost), "room.csv": log(26, indoor_air_c=room)}
    assert told(load_text(text, files))["hours_difference_held"] == pytest.approx(26)


def test_sun_and_rain_come_from_the_log_where_nobody_states_them(minimal: str, load_text: Load) -> None:
    files = {
        "log.csv": log(
            30,
            irradiance_w_m2=lambda time: 300.0 if -20 <= time <= -16 else 0.0,
            rain_mm=lambda time: 0.4 if time == -12 else 0.0,
        )
    }
    scene = scene_of(load_text(at(minimal), files))
    assert (scene["hours_since_sun"].value, scene["hours_since_sun"].source) == (15 * 3600, "log")
    assert (scene["hours_since_rain"].value, scene["hours_since_rain"].source) == (12 * 3600, "log")
    assert "rain" not in scene


@pytest.mark.parametrize(
    ("conditions", "frame", "expected", "source"),
    [
        ("hours_since_sun = 8", "", 8, "survey"),  # shorter: somebody saw more than the log
        ("hours_since_sun = 20", "", 15, "log"),  # the log saw the sun since
        ("", "conditions = { hours_since_sun = 20 }", 20, "frame"),  # this face is in the shade all day
    ],
)
def test_what_is_stated_counts_unless_a_log_as_near_says_it_ended_sooner(
    conditions: str, frame: str, expected: float, source: str, minimal: str, load_text: Load
) -> None:
    files = {"log.csv": log(30, irradiance_w_m2=lambda time: 300.0 if time == -16 else 0.0)}
    survey = load_text(at(minimal, conditions, frame), files)
    quantity = scene_of(survey)["hours_since_sun"]
    assert (quantity.value, quantity.source) == (expected * 3600, source)
    notice = "hours_since_sun stated as 20, by the log 15.0: the log counts (all frames)"
    assert (notice in survey.notices) == (source == "log")


def test_a_log_that_is_merely_shorter_does_not_contradict(minimal: str, load_text: Load) -> None:
    files = {"log.csv": log(9, indoor_air_c=room, outdoor_air_c=room)}
    survey = load_text(at(minimal, "hours_steady = 30"), files)
    assert scene_of(survey)["hours_steady"].value == 30 * 3600
    assert "hours_steady" not in told(survey)


@pytest.mark.parametrize(("stated", "expected"), [("true", 1.0), ("false", 0.0), (None, None)])
def test_whether_the_building_was_unheated_is_yes_or_no_or_not_recorded(
    stated: str | None, expected: float | None, minimal: str, load_text: Load
) -> None:
    text = minimal.replace("air_c = 20", f"air_c = 20\nunheated_before = {stated}" if stated else "air_c = 20")
    assert told(load_text(text)).get("unheated_before") == expected


# --- over the survey -------------------------------------------------------------------------------------------


def frames(*stated: str, group: str = "") -> str:
    """Frames an hour apart from TAKEN on, with what they state."""
    return "".join(
        f'[[frame]]\nid = "G{number}"\nfile = "g{number}.tif"\n{group}'
        f"taken = {(TAKEN + timedelta(minutes=20 * number)).isoformat()}\n{one}\n"
        for number, one in enumerate(stated, 1)
    )


def test_a_survey_s_change_is_the_largest_between_any_two_of_its_frames(minimal: str, load_text: Load) -> None:
    one = "conditions = {{ outdoor_air_c = {}, indoor_air_c = {} }}"
    text = minimal.split("[[frame]]")[0] + frames(one.format(1, 20), one.format(4, 21), one.format(2, 20.5))
    for number in range(3):
        figures = told(load_text(text), number)
        assert figures == {"outdoor_change_survey_k": pytest.approx(3), "indoor_change_survey_k": pytest.approx(1)}


def test_a_log_tells_what_happened_between_two_frames(minimal: str, load_text: Load) -> None:
    text = at(minimal) + frames("")
    files = {"log.csv": log(2, 0.1, outdoor_air_c=lambda time: 5.0 if 0.05 < time < 0.15 else 0.0)}
    assert told(load_text(text, files))["outdoor_change_survey_k"] == pytest.approx(5)


def test_rooms_differ_without_a_change(minimal: str, load_text: Load) -> None:
    hall = frames(
        "conditions = { indoor_air_c = 20 }", "conditions = { indoor_air_c = 20.5 }", group='group = "hall"\n'
    )
    bath = frames("conditions = { indoor_air_c = 24 }", group='group = "bath"\n').replace("G1", "B1")
    groups = '[[group]]\nid = "hall"\n[[group]]\nid = "bath"\n'
    survey = load_text(minimal.split("[[frame]]")[0] + hall + bath + groups)
    assert [told(survey, number)["indoor_change_survey_k"] for number in range(3)] == [pytest.approx(0.5)] * 2 + [0.0]


def test_one_value_for_all_frames_tells_of_no_change_nor_of_none(minimal: str, load_text: Load) -> None:
    text = minimal.replace("air_c = 20", "air_c = 20\noutdoor_air_c = 1\nindoor_air_c = 20")
    survey = load_text(text.split("[[frame]]")[0] + frames("", ""))
    assert told(survey) == {}


def test_a_frame_without_a_time_is_none_of_those_between_which_the_air_changed(minimal: str, load_text: Load) -> None:
    text = at(minimal) + frames("") + '[[frame]]\nid = "when"\nfile = "when.tif"\n'
    survey = load_text(text, {"log.csv": log(2, outdoor_air_c=room)})
    assert [told(survey, number).get("outdoor_change_survey_k") for number in range(3)] == [0.0, 0.0, None]


# --- gaps ------------------------------------------------------------------------------------------------------


def test_a_long_gap_in_the_day_before_is_told_and_ends_what_is_known(minimal: str, load_text: Load) -> None:
    whole = log(30, indoor_air_c=room, outdoor_air_c=steady_frost).splitlines()
    lost = {(TAKEN + timedelta(hours=hour)).isoformat() for hour in range(-19, -12)}
    rows = [row for row in whole if row.split(",")[0] not in lost]
    survey = load_text(at(minimal), {"log.csv": "\n".join(rows)})
    assert told(survey)["hours_difference_held"] == pytest.approx(12)
    assert {"air_difference_24h_min_k", "outdoor_change_24h_k"}.isdisjoint(told(survey))
    gap = "from 2026-01-17T12:00:00+00:00 to 2026-01-17T20:00:00+00:00: what was before is not known (all frames)"
    assert f"log.csv has no outdoor_air_c {gap}" in survey.notices
    assert scene_of(survey)["outdoor_air"].source == "log"  # the moment itself is read


def test_a_short_gap_in_the_day_before_is_bridged_and_told(minimal: str, load_text: Load) -> None:
    whole = log(30, indoor_air_c=room, outdoor_air_c=steady_frost).splitlines()
    rows = [row for row in whole if row.split(",")[0] != (TAKEN - timedelta(hours=5)).isoformat()]
    survey = load_text(at(minimal), {"log.csv": "\n".join(rows)})
    assert told(survey)["hours_difference_held"] == pytest.approx(30)
    gap = "from 2026-01-18T02:00:00+00:00 to 2026-01-18T04:00:00+00:00: straight lines assumed (all frames)"
    assert f"log.csv has no outdoor_air_c {gap}" in survey.notices
