"""What the maintenance crew states: limits, shapes, logged loads, measured windows, parts to be looked for."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from math import radians, sqrt
from pathlib import Path

import pytest

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Component, FrameTask, JointShape, Survey
from irsurvey.survey.load import Known, load
from irsurvey.survey.outside import is_drawn_on, polygon_faults

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]

TAKEN = datetime(2026, 3, 11, 10, tzinfo=UTC)
AREA = "polygon = [[0, 0], [9, 0], [9, 9]]\n"
LUG = "frame[F01].component[lug]"
OWN = "survey.criteria[#1][site.toml]"


@pytest.fixture
def panel(minimal: str) -> str:
    """The shortest electrical survey: one frame F01, taken at TAKEN."""
    return minimal.replace('"building"', '"electrical"') + f"taken = {TAKEN.isoformat()}\n"


def part(stated: str = "", name: str = "lug") -> str:
    return f'[[frame.component]]\nname = "{name}"\n{AREA}{stated}\n'


def parts(survey: Survey) -> tuple[Component, ...]:
    return survey.tasks[0].components


def told(survey: Survey, word: str) -> list[str]:
    return [notice for notice in survey.notices if word in notice]


def places(faults: tuple[Fault, ...]) -> list[str]:
    return [fault.where for fault in faults]


# --- limits and shapes -----------------------------------------------------------------------------------------


def test_limits_are_carried_by_name_each_once(panel: str, load_text: Load) -> None:
    stated = 'limits = ["insulation/F", "iec-60694/bolted-bare", "insulation/F"]'
    (lug,) = parts(load_text(panel + part(stated)))
    assert lug.limits == ("insulation/F", "iec-60694/bolted-bare")
    assert parts(load_text(panel + part()))[0].limits == ()


def test_an_unknown_limit_names_the_nearest(panel: str, faults_of: Faults) -> None:
    (fault,) = faults_of(panel + part('limits = ["insulation/F", "iec-60694/bolted-bar"]'))
    assert (fault.where, fault.remedy) == (f"{LUG}.limits[#2]", "did you mean iec-60694/bolted-bare?")


@pytest.mark.parametrize(
    ("stated", "shape"),
    [
        ("cylinder = { diameter_m = 0.03, length_m = 0.12 }", JointShape("cylinder", diameter=0.03, length=0.12)),
        ("plate = { height_m = 0.1, width_m = 0.04 }", JointShape("plate", length=0.1, width=0.04)),
        ("sphere = { diameter_m = 0.05 }", JointShape("sphere", diameter=0.05)),
        ("area_m2 = 0.02", JointShape("area", area=0.02)),
        ("", None),
    ],
)
def test_a_joint_is_taken_for_one_shape(stated: str, shape: JointShape | None, panel: str, load_text: Load) -> None:
    assert parts(load_text(panel + part(stated)))[0].shape == shape


@pytest.mark.parametrize(
    ("stated", "where", "got"),
    [
        ("area_m2 = 0.02\nsphere = { diameter_m = 0.05 }", LUG, "sphere and area_m2"),
        ("sphere = { diameter_m = 50 }", f"{LUG}.sphere.diameter_m", "50"),  # millimetres
        ("cylinder = { diameter_m = 0.05 }", f"{LUG}.cylinder.length_m", "nothing"),
        ("plate = { height_m = 0, width_m = 1 }", f"{LUG}.plate.height_m", "0"),
        ("area_m2 = -1", f"{LUG}.area_m2", "-1"),
        ("time_constant_min = 0", f"{LUG}.time_constant_min", "0"),
    ],
)
def test_an_impossible_shape_is_a_fault(stated: str, where: str, got: str, panel: str, faults_of: Faults) -> None:
    (fault,) = faults_of(panel + part(stated))
    assert (fault.where, fault.got) == (where, got)


def test_a_table_of_frames_may_hold_what_crews_state(panel: str, load_text: Load) -> None:
    header = "file,find_components,window_from.without,window_from.through,window_from.polygon,component"
    component = '"[{ name = ""lug"", limits = [""insulation/F""], area_m2 = 0.1, polygon = [[0, 0], [9, 0], [9, 9]] }]"'
    table = f'{header}\nb.tif,true,F01,b,"[[0, 0], [9, 0], [9, 9]]",{component}\n'
    task = load_text(f'frame_table = "t.csv"\n{panel}', {"t.csv": table}).tasks[1]
    assert (task.find_components, task.has_window, task.components[0].limits) == (True, True, ("insulation/F",))


# --- loads from a log ------------------------------------------------------------------------------------------


def log(*readings: tuple[float, ...], columns: str = "load_a") -> dict[str, str]:
    """A log by minutes from TAKEN."""
    rows = [
        ",".join([(TAKEN + timedelta(minutes=minutes)).isoformat(), *map(str, amperes)])
        for minutes, *amperes in readings
    ]
    return {"load.csv": "\n".join([f"time,{columns}", *rows])}


def circuit(stated: str = "", component: str = "") -> str:
    lug = part(f'circuit = "C3"\n{component}')
    return f'{lug}[[circuit]]\nid = "C3"\nlog = "load.csv"\n{stated}\n'


def test_a_logged_load_is_that_of_the_moment_between_two_readings(panel: str, load_text: Load) -> None:
    (lug,) = parts(load_text(panel + circuit(), log((-10, 100), (10, 140))))
    assert lug.load == pytest.approx(120, abs=1e-9)  # half-way, to the rounding of doubles near 1e9 s
    # 108 A, ten per cent below, is passed 4 of 10 minutes after the first reading
    assert lug.steady == pytest.approx(6 * 60, abs=1e-3)  # seconds since 1970 carry about 1e-7 s


@pytest.mark.parametrize(
    ("readings", "minutes"),
    [
        (((-120, 200), (-60, 200), (0, 200), (60, 50)), 120),  # what comes after does not matter
        (((-180, 200), (-61, 200), (-1, 200), (1, 200)), 61),  # two hours without a reading: before that nobody knows
        (((-40, 181), (-20, 219), (0, 200)), 40),  # within ±10 %
        (((-40, 300), (-30, 200), (0, 200)), 32),  # 220 A is passed 8 of 10 minutes after 300 A
        (((-40, 0), (-30, 200), (0, 200)), 31),
        (((-30, 0), (0, 0)), 30),  # switched off all the time
        (((0, 200), (1, 200)), 0),
    ],
)
def test_a_load_is_steady_while_within_ten_per_cent_of_what_it_is(
    readings: tuple[tuple[float, float], ...], minutes: float, panel: str, load_text: Load
) -> None:
    (lug,) = parts(load_text(panel + circuit(), log(*readings)))
    assert lug.steady == pytest.approx(60 * minutes, abs=1e-3)


def test_each_phase_has_its_column_and_else_that_of_all(panel: str, load_text: Load) -> None:
    phases = "".join(part(f'circuit = "C3"\nphase = "{phase}"', f"lug {phase}") for phase in ("1", "2"))
    text = panel + phases + '[[circuit]]\nid = "C3"\nlog = "load.csv"\n'
    files = log((-10, 100, 90), (0, 100, 90), columns="load_a_1,load_a")
    assert [component.load for component in parts(load_text(text, files))] == [100, 90]


def test_a_log_counts_before_the_load_its_circuit_states_and_after_the_part_s_own(panel: str, load_text: Load) -> None:
    files = log((-10, 100), (0, 100))
    assert parts(load_text(panel + circuit("load_a = 70"), files))[0].load == 100
    survey = load_text(panel + circuit("load_a = 70", "load_a = 105"), files)
    assert (parts(survey)[0].load, parts(survey)[0].steady) == (105, pytest.approx(600, abs=1e-3))
    assert told(survey, "by the log") == []


def test_a_log_that_contradicts_a_stated_load_is_told_and_still_says_how_steady_it_was(
    panel: str, load_text: Load
) -> None:
    survey = load_text(panel + circuit("", "load_a = 150"), log((-10, 100), (0, 100)))
    assert (parts(survey)[0].load, parts(survey)[0].steady) == (150, pytest.approx(600, abs=1e-3))
    text = "load_a of lug stated as 150, by the log 100: what is stated counts (all frames)"
    assert told(survey, "by the log") == [text]


@pytest.mark.parametrize(
    ("readings", "notice"),
    [
        (
            ((-60, 100), (-10, 100)),
            "load.csv does not reach to this time: load_a of circuit C3 not taken from it, "
            "2026-03-11T09:00:00+00:00 to 2026-03-11T09:50:00+00:00 (all frames)",
        ),
        (
            ((-31, 100), (30, 100)),
            "load.csv has no load_a from 2026-03-11T09:29:00+00:00 to 2026-03-11T10:30:00+00:00: "
            "load_a of circuit C3 not taken from it (all frames)",
        ),
    ],
)
def test_a_log_that_does_not_tell_leaves_what_is_stated_and_says_so(
    readings: tuple[tuple[float, float], ...], notice: str, panel: str, load_text: Load
) -> None:
    for stated, amperes in (("load_a = 70", 70), ("", None)):
        survey = load_text(panel + circuit(stated), log(*readings))
        assert (parts(survey)[0].load, parts(survey)[0].steady) == (amperes, None)
        assert notice in survey.notices
        assert len(told(survey, "nothing can be cleared for lug")) == (amperes is None)


def test_without_a_time_no_load_is_taken_from_a_log(panel: str, load_text: Load) -> None:
    survey = load_text(panel.split("taken")[0] + circuit(), log((-10, 100), (0, 100)))
    assert (parts(survey)[0].load, parts(survey)[0].steady) == (None, None)
    assert "time not stated: load.csv not used (all frames)" in survey.notices


@pytest.mark.parametrize(
    ("content", "where"),
    [
        (None, "circuit[C3].log[load.csv]"),
        ("time,amperes\n2026-03-11T10:00,3\n", "circuit[C3].log[load.csv]"),
        ("when,load_a\n2026-03-11T10:00,3\n", "circuit[C3].log[load.csv]"),
        ("time,load_a\n2026-03-11T10:00,-3\n", "circuit[C3].log[load.csv].load_a, line 2"),
        ("time,load_a_1\n2026-03-11T10:00,off\n", "circuit[C3].log[load.csv].load_a_1, line 2"),
        ("time,load_a\nnoon,3\n", "circuit[C3].log[load.csv], line 2"),
    ],
)
def test_a_file_that_is_no_log_of_loads_is_one_fault(
    content: str | None, where: str, panel: str, faults_of: Faults
) -> None:
    text = panel + circuit("", 'phase = "2"')
    assert places(faults_of(text, {} if content is None else {"load.csv": content})) == [where]


def test_a_load_log_outside_the_folder_is_a_fault(panel: str, faults_of: Faults) -> None:
    assert places(faults_of(panel + circuit().replace("load.csv", "../load.csv"))) == ["circuit[C3].log"]


def test_a_phase_that_is_neither_stated_nor_logged_is_a_fault(panel: str, faults_of: Faults, load_text: Load) -> None:
    files = log((-10, 100), (0, 100), columns="load_a_L1")
    (fault,) = faults_of(panel + circuit('load_a = { "L2" = 3 }', 'phase = "L"'), files)
    assert (fault.where, fault.remedy) == (f"{LUG}.phase", "did you mean L2?")
    for phase, amperes in (("L1", 100), ("L2", 3)):
        text = panel + circuit('load_a = { "L2" = 3 }', f'phase = "{phase}"')
        assert parts(load_text(text, files))[0].load == amperes


def test_a_time_constant_is_the_part_s_own_or_its_circuit_s(panel: str, load_text: Load) -> None:
    files = log((-10, 100), (0, 100))
    for own, of_circuit, seconds in (("", "", None), ("", "30", 1800), ("12.5", "30", 750)):
        text = circuit(
            f"time_constant_min = {of_circuit}" if of_circuit else "", f"time_constant_min = {own}" if own else ""
        )
        survey = load_text(panel + text, files)
        assert parts(survey)[0].time_constant == seconds
        open_ = "time_constant_min not stated: whether the logged load was steady for long enough stays open for lug"
        assert (f"{open_} (all frames)" in survey.notices) == (seconds is None)


def test_before_going_out_a_load_log_need_not_be_there(panel: str, folder: Path) -> None:
    (folder / "survey.toml").write_text(panel + circuit("load_a = 70"), "utf-8")
    survey = load(folder / "survey.toml", known=Known((), (), {}), ahead=True)
    assert parts(survey)[0].load == 70
    assert any(notice.startswith("circuit[C3].log[load.csv]") for notice in survey.notices)


# --- criteria of the site's own --------------------------------------------------------------------------------


def with_criteria(panel: str, *names: str) -> str:
    listed = ", ".join(f"'{name}'" for name in names)
    return panel.replace('title = "T"', f'title = "T"\ncriteria = [{listed}]')


def test_a_criteria_file_is_carried_as_text_under_its_name(panel: str, load_text: Load) -> None:
    text = with_criteria(panel, "building-delta-t", "rules\\site.toml", "rules/site.toml")
    task = load_text(text, {"rules/site.toml": "\ufeffname = 'ß'\n"}).tasks[0]
    assert task.criteria == ("building-delta-t", "rules/site.toml")
    assert task.own_criteria == (("rules/site.toml", "name = 'ß'\n"),)


def test_what_is_wrong_in_a_criteria_file_is_told_with_its_name_and_key(panel: str, faults_of: Faults) -> None:
    faults = faults_of(with_criteria(panel, "site.toml"), {"site.toml": "urgency = bad\nedge = bad\n"})
    assert [(fault.where, fault.got) for fault in faults] == [(f"{OWN}: urgency", "bad"), (f"{OWN}: edge", "bad")]
    assert places(faults_of(with_criteria(panel, "site.toml"), {"site.toml": ""})) == [OWN]


@pytest.mark.parametrize(
    ("name", "where"),
    [
        ("site.toml", OWN),
        ("../site.toml", "survey.criteria[#1]"),
        ("/site.toml", "survey.criteria[#1]"),
        (".toml/x.toml", "survey.criteria[#1][.toml/x.toml]"),
    ],
)
def test_a_criteria_file_must_be_in_the_survey_s_folder(name: str, where: str, panel: str, faults_of: Faults) -> None:
    assert places(faults_of(with_criteria(panel, name))) == [where]


def test_a_criteria_file_in_another_encoding_is_a_fault(panel: str, folder: Path, faults_of: Faults) -> None:
    (folder / "site.toml").write_bytes("name = 'ß'".encode("latin-1"))
    (fault,) = faults_of(with_criteria(panel, "site.toml"))
    assert (fault.where, fault.expected) == (OWN, "text in UTF-8")


def test_where_nothing_can_judge_a_criteria_file_none_is_let_pass(panel: str, folder: Path) -> None:
    (folder / "survey.toml").write_text(with_criteria(panel, "site.toml"), "utf-8")
    (folder / "site.toml").write_text("name = 'x'", "utf-8")
    with pytest.raises(SurveyError, match="cannot be judged"):
        load(folder / "survey.toml", known=Known((), (), {}))


# --- windows ---------------------------------------------------------------------------------------------------

FRAMES = "".join(f'[[frame]]\nid = "{name}"\nfile = "{name}.tif"\n' for name in ("W1", "W2"))
FROM = 'window_from = { without = "W1", through = "W2", polygon = [[1, 1], [8, 1], [8, 8]] }\n'
CORNERS = ((1.0, 1.0), (8.0, 1.0), (8.0, 8.0))


def by_id(survey: Survey) -> dict[str, FrameTask]:
    return {task.id: task for task in survey.tasks}


def test_a_window_is_measured_by_two_whole_frames(panel: str, load_text: Load) -> None:
    tasks = by_id(load_text(f"{panel}{FROM}window = {{ reflectance = 0.1, temperature_c = 25 }}\n{FRAMES}"))
    task, frames = tasks["F01"], tasks["F01"].window_frames
    assert frames is not None
    assert (frames.without, frames.through, frames.polygon) == (tasks["W1"], tasks["W2"], CORNERS)
    assert task.has_window
    assert "window_transmittance" not in task.scene
    assert (task.scene["window_reflectance"].value, task.scene["window_reflectance"].high) == (0.1, 1.0)
    assert task.scene["window_temperature"].value == 298.15
    assert not tasks["W1"].has_window


def test_a_measured_window_needs_no_table_of_its_own(panel: str, load_text: Load) -> None:
    task = by_id(load_text(panel + FROM + FRAMES))["F01"]
    assert task.has_window
    assert task.scene["window_reflectance"].source == "default"
    assert task.scene["window_temperature"].follows == "air"


def test_a_group_s_window_is_not_before_the_frame_that_was_taken_without_it(panel: str, load_text: Load) -> None:
    frames = FRAMES.replace("\nfile", '\ngroup = "g"\nfile')
    group = f'[[group]]\nid = "g"\n{FROM}window = {{ reflectance = 0.1 }}\n'
    tasks = by_id(load_text(f'{panel}group = "g"\n{frames}{group}'))
    assert {name: task.has_window for name, task in tasks.items()} == {"F01": True, "W1": False, "W2": True}
    for name in ("F01", "W2"):
        frames_of = tasks[name].window_frames
        assert frames_of is not None
        assert frames_of.without == tasks["W1"]
        assert frames_of.through == replace(tasks["W2"], window_frames=None)
    assert tasks["W1"].window_frames is None


def test_a_stated_transmittance_of_a_lower_level_counts_and_of_the_same_is_told(panel: str, load_text: Load) -> None:
    group = f'[[group]]\nid = "g"\n{FROM}'
    tasks = by_id(load_text(f'{panel}group = "g"\nwindow = {{ transmittance = 0.8 }}\n{FRAMES}{group}'))
    assert (tasks["F01"].window_frames, tasks["F01"].scene["window_transmittance"].value) == (None, 0.8)
    survey = load_text(f"{panel}{FROM}window = {{ transmittance = 0.8 }}\n{FRAMES}")
    assert by_id(survey)["F01"].window_frames is not None
    assert "window.transmittance stated beside window_from: what W1 and W2 measure counts (F01)" in survey.notices


def test_a_window_needs_a_transmittance_at_some_level(panel: str, faults_of: Faults) -> None:
    group = '[[group]]\nid = "g"\nwindow = { reflectance = 0.1 }\n'
    (fault,) = faults_of(f'{panel}group = "g"\n{group}')
    assert (fault.where, fault.got) == ("group[g].window.transmittance", "nothing")


def test_window_frames_at_fault_are_not_also_a_missing_transmittance(panel: str, faults_of: Faults) -> None:
    text = f"{panel}{FROM}window = {{ reflectance = 0.1 }}\n{FRAMES}".replace("[8, 1], [8, 8]", "[8, 1]")
    assert places(faults_of(text)) == ["frame[F01].window_from.polygon"]


@pytest.mark.parametrize(
    ("old", "new", "where", "remedy"),
    [
        ('"W1", t', '"W3", t', "frame[F01].window_from.without", "did you mean W2?"),
        ('h = "W2"', 'h = "W9"', "frame[F01].window_from.through", "did you mean W2?"),
        ('h = "W2"', 'h = "W1"', "frame[F01].window_from.through", "one without the window, one through it"),
        ('"W1", t', '"F01", t', "frame[F01].window_from.without", None),  # it has the window
        ('file = "W1', 'window = { transmittance = 1 }\nfile = "W1', "frame[F01].window_from.without", None),
        ('file = "W2', 'camera = "b"\nfile = "W2', "frame[F01].window_from.through", ""),
        ('file = "W1', 'camera = "b"\nfile = "W1', "frame[F01].window_from.without", ""),
    ],
)
def test_frames_that_cannot_measure_a_window_are_faults(
    old: str, new: str, where: str, remedy: str | None, panel: str, faults_of: Faults
) -> None:
    other = '[cameras.b]\nband_um = [8, 14]\nsignal = { quantity = "counts", gain = 1 }\n'
    text = panel.replace("[camera]", "[cameras.a]").replace('title = "T"', 'title = "T"\ncamera = "a"')
    faults = faults_of((text + FROM + FRAMES).replace(old, new) + other)
    assert [fault.where for fault in faults] == [where]
    assert remedy in (None, faults[0].remedy)


def test_the_reference_of_a_window_must_lie_in_the_frame(panel: str, load_text: Load) -> None:
    task = by_id(load_text(panel + FROM + FRAMES))["F01"]
    assert is_drawn_on(task)
    assert polygon_faults(task, (9, 9)) == ()
    assert places(polygon_faults(task, (8, 9))) == ["frame[F01].window_from.polygon"]


def test_before_it_is_measured_a_window_is_assumed_for_planning(panel: str, folder: Path) -> None:
    text = f"{panel}{FROM}window = {{ reflectance = 0.4 }}\n{FRAMES}"
    (folder / "survey.toml").write_text(text, "utf-8")
    survey = load(folder / "survey.toml", known=Known((), (), {}), ahead=True)
    tau = by_id(survey)["F01"].scene["window_transmittance"]
    assert (tau.value, tau.source, tau.high) == (0.6, "default", 0.6)  # of 0.7, what the reflectance leaves
    assert tau.u == pytest.approx(0.25 / sqrt(3), rel=1e-12)
    assert "transmittance of the window not measured yet: 0.60 assumed (F01)" in survey.notices


# --- parts to be looked for ------------------------------------------------------------------------------------


def test_parts_are_looked_for_where_a_group_or_frame_says_so(panel: str, load_text: Load) -> None:
    assert not load_text(panel).tasks[0].find_components
    group = '[[group]]\nid = "g"\nfind_components = true\n'
    assert load_text(f'{panel}group = "g"\n{group}').tasks[0].find_components
    assert not load_text(f'{panel}group = "g"\nfind_components = false\n{group}').tasks[0].find_components


def test_what_is_not_known_of_parts_that_are_found_is_told(panel: str, load_text: Load) -> None:
    looked = f"{panel}find_components = true\n"
    assert len(told(load_text(looked), "find_components")) == 3
    measured = looked.replace("air_c = 20", "air_c = 20\nambient_c = 22")
    assert told(load_text(measured), "find_components without am") == []
    assert told(load_text(looked + f"reference = {{ {AREA.strip()} }}\n"), "find_components without a ref") == []
    assert told(load_text(panel), "find_components") == []


@pytest.mark.parametrize(("method", "needs_load"), [("contact", True), ("voltage-driven", False), ("pv", False)])
def test_a_load_is_missed_only_where_a_load_law_holds(
    method: str, needs_load: bool, panel: str, load_text: Load
) -> None:
    text = panel.replace('"electrical"', f'"electrical"\nmethod = "{method}"')
    survey = load_text(f"{text}find_components = true\n{part()}")
    assert len(told(survey, "nothing can be cleared for lug")) == needs_load
    assert len(told(survey, "nothing can be cleared for them")) == needs_load


def test_in_a_building_no_parts_are_looked_for(minimal: str, load_text: Load) -> None:
    survey = load_text(f"{minimal}find_components = true\n")
    assert told(survey, "find_components") == ["find_components has no effect in a building survey (all frames)"]
    assert not survey.tasks[0].find_components


def test_modules_without_irradiance_are_told(panel: str, load_text: Load) -> None:
    text = panel.replace('"electrical"', '"electrical"\nmethod = "pv"')
    assert told(load_text(text), "irradiance_w_m2 not recorded")
    sunny = load_text(text.replace("air_c = 20", "air_c = 20\nirradiance_w_m2 = 860"))
    assert (sunny.tasks[0].scene["irradiance"].value, told(sunny, "irradiance_w_m2")) == (860, [])


# --- what is for the other kind of survey ----------------------------------------------------------------------


def test_what_is_for_buildings_has_no_effect_in_an_electrical_survey_and_that_is_told(
    panel: str, load_text: Load
) -> None:
    text = (
        f'{panel}group = "g"\npair = {{ with = "W1", pressure_pa = -50 }}\n'
        f"[[frame.strip]]\nfrom = [1, 2]\nto = [30, 4]\n{FRAMES}"
        '[[group]]\nid = "g"\nelement = "wall"\n[[element]]\nid = "wall"\nu_value_w_m2k = 0.3\n'
    )
    survey = load_text(text)
    task = survey.tasks[0]
    assert (task.pair, task.strips, task.element, "u_value" in task.scene) == (None, (), None, False)
    for key in ("pair", "strip", "element"):
        assert f"{key} has no effect in an electrical survey (group g)" in survey.notices
    as_building = load_text(text.replace('"electrical"', '"building"'))
    assert told(as_building, "has no effect") == []
    assert as_building.tasks[0].pair is not None


OUTSIDE = "viewed_from not stated: outside assumed"
LEVEL = "tilt_deg not stated: a level roof assumed"
ROOF = 'kind = "building"\nmethod = "roof-moisture"'


@pytest.mark.parametrize(
    ("survey", "conditions", "side", "tilt", "notices"),
    [
        ("", "", "outside", 0, {OUTSIDE, LEVEL}),
        ('viewed_from = "outside"', "", "outside", 0, {LEVEL}),
        ("", "tilt_deg = 12", "outside", 12, {OUTSIDE}),
        ('viewed_from = "inside"', "", "inside", 90, set()),
    ],
)
def test_a_roof_searched_for_moisture_is_seen_from_outside_and_level_unless_stated(
    survey: str, conditions: str, side: str, tilt: float, notices: set[str], minimal: str, load_text: Load
) -> None:
    text = minimal.replace('kind = "building"', f"{ROOF}\n{survey}").replace("air_c = 20", f"air_c = 20\n{conditions}")
    found = load_text(text)
    task = found.tasks[0]
    assert (task.viewed_from, task.scene["tilt"].value) == (side, pytest.approx(radians(tilt), rel=1e-12))
    assert {f"{notice} (all frames)" for notice in notices} == {*told(found, "viewed_from"), *told(found, "tilt")}


def test_a_level_roof_is_level_within_ten_degrees(minimal: str, load_text: Load) -> None:
    tilt = load_text(minimal.replace('kind = "building"', ROOF)).tasks[0].scene["tilt"]
    assert (tilt.u, tilt.source) == (pytest.approx(radians(10) / sqrt(3), rel=1e-12), "default")
