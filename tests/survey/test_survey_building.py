"""What the building inspector states: elements, strips, pairs, surroundings, standards, and the air's convection."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import radians

import pytest

from irsurvey.errors import Fault
from irsurvey.model import Element, FrameTask, Layer, Quantity, Strip, Survey
from irsurvey.survey.defaults import defaults
from irsurvey.survey.outside import is_drawn_on, polygon_faults

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]

WALL = """
[[element]]
id = "wall"
description = "brick, insulated"
layers = [
  { material = "gypsum plaster", thickness_m = 0.015 },
  { material = "brick", thickness_m = 0.215, conductivity_w_mk = 0.6 },
  { resistance_m2k_w = 0.18 },
  { thickness_m = 0.1, conductivity_w_mk = 0.04, density_kg_m3 = 20, specific_heat_j_kgk = 1450 },
]
u_value_w_m2k = 0.3
area_m2 = 40
[[element]]
id = "roof"
mass = "light"
"""
BRICK_WALL = Element(
    "wall",
    "brick, insulated",
    (
        Layer("gypsum plaster", 0.015, 0.4, 1000.0, 1000.0),
        Layer("brick", 0.215, 0.6, 1700.0, 800.0),  # conductivity as stated, the rest of the table
        Layer(resistance=0.18),
        Layer("", 0.1, 0.04, 20.0, 1450.0),
    ),
    None,
    0.3,
    40.0,
)
LEVELS = ("survey", "group", "frame")
SECOND = '[[frame]]\nid = "F02"\nfile = "f02.tif"\n'


def task_of(load_text: Load, text: str) -> FrameTask:
    return load_text(text).tasks[0]


def outside(text: str) -> str:
    return text.replace('kind = "building"', 'kind = "building"\nviewed_from = "outside"')


# --- elements --------------------------------------------------------------------------------------------------


def test_elements_have_their_layers_from_inside_to_outside_with_the_values_of_their_materials(
    minimal: str, load_text: Load
) -> None:
    assert load_text(minimal + WALL).elements == (BRICK_WALL, Element("roof", mass="light"))


def test_a_frame_shows_its_own_element_or_its_group_s(minimal: str, load_text: Load) -> None:
    group = '[[group]]\nid = "g"\nelement = "wall"\norientation = "north"\n'
    text = f'{minimal}group = "g"\n{SECOND}group = "g"\nelement = "roof"\norientation = "up"\n{SECOND}'
    survey = load_text(text.replace("F02", "F03", 1) + 'element = "wall"\n' + group + WALL)
    found = [(task.element and task.element.id, task.orientation) for task in survey.tasks]
    assert found == [("wall", "north"), ("roof", "up"), ("wall", "")]


def test_a_frame_without_an_element_has_none_though_the_survey_lists_some(minimal: str, load_text: Load) -> None:
    assert task_of(load_text, minimal + WALL).element is None


def test_a_stated_u_value_is_in_the_scene_with_the_uncertainty_of_a_design(minimal: str, load_text: Load) -> None:
    scene = task_of(load_text, f'{minimal}element = "wall"\n{WALL}').scene
    assert scene["u_value"] == Quantity("u_value", 0.3, pytest.approx(0.06, rel=1e-12), "survey", low=0.0)  # 20 %
    stated = task_of(load_text, f'{minimal}element = "wall"\n{WALL}[uncertainty]\nu_value_fraction = 0.1\n').scene
    assert stated["u_value"].u == pytest.approx(0.03, rel=1e-12)
    assert "u_value" not in task_of(load_text, f'{minimal}element = "roof"\n{WALL}').scene


def test_a_table_of_frames_may_name_elements_pairs_and_strips(minimal: str, load_text: Load) -> None:
    header = "file,element,orientation,conditions.tilt_deg,pair.with,pair.pressure_pa,strip,target.emissivity_total"
    row = 'b.tif,wall,north,45,F01,-50,"[{ from = [1, 2], to = [3, 4] }]",0.8'
    task = load_text(f'frame_table = "t.csv"\n{minimal}{WALL}', {"t.csv": f"{header}\n{row}\n"}).tasks[1]
    assert (task.element, task.orientation, task.scene["tilt"].value) == (BRICK_WALL, "north", radians(45))
    assert (task.pair and task.pair.partner.id, task.pair and task.pair.pressure) == ("F01", -50.0)
    assert task.strips == (Strip("strip 1", (1.0, 2.0), (3.0, 4.0)),)
    assert task.scene["total_emissivity"].value == 0.8


# --- strips ----------------------------------------------------------------------------------------------------


def test_strips_are_lines_with_a_width_and_numbered_where_they_have_no_name(minimal: str, load_text: Load) -> None:
    text = (
        f'{minimal}[[frame.strip]]\nfrom = [1, 2]\nto = [30, 4]\n[[frame.strip]]\nname = "lintel"\nfrom = [5, 6]\n'
        'to = [7, 8]\nwidth_px = 9\nundisturbed = "to"\n'
    )
    assert task_of(load_text, text).strips == (
        Strip("strip 1", (1.0, 2.0), (30.0, 4.0), 5, "both"),
        Strip("lintel", (5.0, 6.0), (7.0, 8.0), 9, "to"),
    )


def test_a_strip_that_leaves_the_frame_is_a_fault_once_its_size_is_known(minimal: str, load_text: Load) -> None:
    task = task_of(load_text, f'{minimal}[[frame.strip]]\nname = "s"\nfrom = [1, 2]\nto = [30, 4]\n')
    assert is_drawn_on(task)
    assert polygon_faults(task, (5, 31)) == ()
    (fault,) = polygon_faults(task, (5, 30))
    assert (fault.where, fault.got) == ("frame[F01].strip[s]", "(30, 4)")


# --- pairs -----------------------------------------------------------------------------------------------------


def test_a_pair_carries_the_whole_task_of_the_frame_without_pressure(minimal: str, load_text: Load) -> None:
    reflector = '[[frame.surface]]\nrole = "ignore"\nemissivity = 0.5\npolygon = [[0, 0], [1, 0], [1, 1]]\n'
    text = f'{minimal}pair = {{ with = "F02", pressure_pa = -50 }}\n{SECOND}conditions = {{ air_c = 7 }}\n{reflector}'
    first, second = load_text(text).tasks
    assert first.pair is not None
    assert first.pair.partner == second
    assert second.pair is None
    assert second.scene["air"].value == 280.15


def test_the_pressure_of_a_pair_is_that_of_its_frame(minimal: str, load_text: Load) -> None:
    text = minimal.replace("air_c = 20", "air_c = 20\npressure_pa = 3")
    first, second = load_text(f'{text}pair = {{ with = "F02", pressure_pa = -50 }}\n{SECOND}').tasks
    pressures = [
        (task.scene["pressure_difference"].value, task.scene["pressure_difference"].source) for task in (first, second)
    ]
    assert pressures == [(-50.0, "frame"), (3.0, "survey")]
    assert first.pair == replace(first.pair, pressure=-50.0)


def test_a_frame_of_another_camera_is_no_partner(minimal: str, faults_of: Faults) -> None:
    text = minimal.replace("[camera]", "[cameras.a]") + 'camera = "a"\npair = { with = "F02", pressure_pa = 5 }\n'
    other = '[cameras.b]\nband_um = [8, 14]\nsignal = { quantity = "counts", gain = 1 }\n'
    (fault,) = faults_of(f'{text}{SECOND}camera = "b"\n{other}')
    assert (fault.where, fault.expected, fault.got) == ("frame[F01].pair.with", "a frame of the same camera, a", "b")


# --- standards and texts ---------------------------------------------------------------------------------------


def test_standards_are_those_of_the_survey_or_left_to_the_method(minimal: str, load_text: Load) -> None:
    stated = minimal.replace('kind = "building"', 'kind = "building"\nstandards = ["astm-c1060", "en-13187"]')
    assert task_of(load_text, stated).standards == ("astm-c1060", "en-13187")
    assert task_of(load_text, minimal).standards == ()


def test_the_texts_of_a_complete_report_are_carried_in_a_fixed_order(minimal: str, load_text: Load) -> None:
    keys = ("signed_by", "influences", "supplementary", "test_description", "standard", "notes")
    text = minimal.replace('kind = "building"', 'kind = "building"\n' + "".join(f'{key} = "{key}!"\n' for key in keys))
    about = load_text(text).about
    assert about == tuple(
        (key, f"{key}!")
        for key in ("standard", "test_description", "supplementary", "influences", "signed_by", "notes")
    )


# --- convection ------------------------------------------------------------------------------------------------

HEATED, COOLED = "indoor_air_c = 20\noutdoor_air_c = 0", "indoor_air_c = 24\noutdoor_air_c = 35"


@pytest.mark.parametrize(
    ("side", "air", "tilt", "expected"),
    [
        # ISO 6946:2017: 5.0 where heat flows up, 2.5 sideways, 0.7 down; a ceiling faces down, its heat goes up
        ("inside", HEATED, None, "iso-6946"),
        ("inside", HEATED, 90, "iso-6946"),
        ("inside", HEATED, 180, "iso-6946-up"),
        ("inside", HEATED, 150.5, "iso-6946-up"),
        ("inside", HEATED, 150, "iso-6946"),
        ("inside", HEATED, 0, "iso-6946-down"),
        ("inside", HEATED, 29.5, "iso-6946-down"),
        ("inside", HEATED, 30, "iso-6946"),
        ("inside", COOLED, 180, "iso-6946-down"),
        ("inside", COOLED, 0, "iso-6946-up"),
        ("inside", COOLED, 90, "iso-6946"),
        ("inside", "", 180, "iso-6946-up"),  # not recorded: heated
        ("outside", HEATED, 0, "iso-6946"),
        ("outside", COOLED, 180, "iso-6946"),
    ],
)
def test_the_convection_of_a_building_follows_from_tilt_and_heat_flow(
    side: str, air: str, tilt: float | None, expected: str, minimal: str, load_text: Load
) -> None:
    conditions = f"air_c = 20\n{air}\n" + ("" if tilt is None else f"tilt_deg = {tilt}")
    text = minimal.replace('kind = "building"', f'kind = "building"\nviewed_from = "{side}"')
    text = text.replace("air_c = 20", conditions)
    assert task_of(load_text, text).convection == expected
    named = text.replace("distance_m", 'convection = "churchill-chu"\ndistance_m')
    assert task_of(load_text, named).convection == "churchill-chu"


def test_electrical_parts_have_no_tilt(minimal: str, load_text: Load) -> None:
    task = task_of(load_text, minimal.replace("building", "electrical"))
    assert (task.convection, "tilt" in task.scene) == ("churchill-chu", False)


def test_a_surface_is_a_wall_unless_stated_and_that_is_no_notice(minimal: str, load_text: Load) -> None:
    survey = load_text(minimal)
    tilt = survey.tasks[0].scene["tilt"]
    assert (tilt.value, tilt.source, tilt.low, tilt.high) == (radians(90), "default", 0.0, radians(180))
    assert not [notice for notice in survey.notices if "tilt" in notice]


@pytest.mark.parametrize(("stated", "is_asked"), [("0.5", True), ("2.9", True), ("3", False), ("50", False)])
def test_a_humidity_that_looks_like_a_fraction_is_asked_about(
    stated: str, is_asked: bool, minimal: str, load_text: Load
) -> None:
    # even the air of deserts is seldom below 5 % (common practice); 0.5 as a fraction is an ordinary room
    survey = load_text(minimal.replace("[conditions]", f"[conditions]\nindoor_relative_humidity_percent = {stated}"))
    asked = [notice for notice in survey.notices if "was a fraction stated?" in notice]
    assert bool(asked) == is_asked
    assert all(notice.startswith(f"indoor relative humidity of {stated} %") for notice in asked)


# --- what a face sees outside ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("stated", "modelled"),
    [
        ("", {"ground", "cloud", "sky_model"}),
        ("cloud_fraction = 0.5", {"ground", "sky_model"}),
        ("ground_c = 1", {"cloud", "sky_model"}),
        ("sky_c = -10", {"ground"}),
        ("mean_radiant_c = 1", set()),
    ],
)
def test_what_is_assumed_of_sky_and_ground_is_in_the_scene_and_told(
    stated: str, modelled: set[str], minimal: str, load_text: Load
) -> None:
    survey = load_text(outside(minimal).replace("air_c = 20", f"air_c = 20\noutdoor_air_c = 1\n{stated}"))
    scene = survey.tasks[0].scene
    names = {"ground", "cloud", "sky_model"}
    assert {name for name in names if name in scene and scene[name].source == "default"} == modelled
    told = {
        "ground": "ground not recorded: the temperature of the outdoor air assumed (all frames)",
        "cloud": "cloud cover not recorded: 50% assumed (all frames)",
        "sky_model": "sky not recorded: its temperature is to be modelled by berdahl-martin (all frames)",
    }
    assert {name for name in names if told[name] in survey.notices} == modelled
    assert not [notice for notice in survey.notices if "mean radiant" in notice]


def test_a_modelled_sky_may_be_off_by_what_its_model_is_unless_stated(minimal: str, load_text: Load) -> None:
    text = outside(minimal).replace("air_c = 20", 'air_c = 20\nsky_model = "swinbank"')
    task = task_of(load_text, text)
    assert (task.sky_model, task.scene["sky_model"]) == ("swinbank", Quantity("sky_model", 0.0, 6.0))  # conftest
    stated = task_of(load_text, f"{text}[uncertainty]\nsky_model_k = 3\n").scene["sky_model"]
    assert (stated.value, stated.u, stated.u_source) == (0.0, 3.0, "survey")


def test_a_cloud_cover_that_nobody_noted_may_be_any(minimal: str, load_text: Load) -> None:
    cloud = task_of(load_text, outside(minimal)).scene["cloud"]
    assert (cloud.value, cloud.low, cloud.high, cloud.distribution) == (0.5, 0.0, 1.0, "rectangular")
    assert cloud.u == defaults("assumed")["cloud_fraction"].u  # of the whole sky, not of the half
    noted = outside(minimal).replace("air_c = 20", "air_c = 20\ncloud_fraction = 0.1")
    assert task_of(load_text, noted).scene["cloud"].u == defaults("stated")["cloud_fraction"].u


def test_inside_no_sky_is_modelled(minimal: str, load_text: Load) -> None:
    survey = load_text(minimal)
    assert not {"sky_model", "cloud", "ground"} & survey.tasks[0].scene.values().keys()
    assert "mean radiant temperature not stated: that of the air assumed (all frames)" in survey.notices


# --- humidity --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("stated", "told"),
    [
        ("humidity_class = 3\noutdoor_relative_humidity_percent = 80", "humidity class 3 assumed (all frames)"),
        ("humidity_class = 3", "assumed, once outdoor_relative_humidity_percent is recorded (all frames)"),
        ("humidity_class = 3\nindoor_relative_humidity_percent = 50", None),
        ("", None),
    ],
)
def test_humidity_by_class_is_told(stated: str, told: str | None, minimal: str, load_text: Load) -> None:
    survey = load_text(minimal.replace("air_c = 20", f"air_c = 20\n{stated}"))
    assert survey.tasks[0].humidity_class == (3 if stated else None)
    notices = [notice for notice in survey.notices if "humidity class" in notice]
    assert [notice.endswith(told or "") for notice in notices] == ([True] if told else [])


@pytest.mark.parametrize(
    ("key", "name", "value", "si"),
    [
        ("tilt_deg", "tilt", 45, radians(45)),
        ("cloud_fraction", "cloud", 0.5, 0.5),
        ("indoor_relative_humidity_percent", "indoor_humidity", 40, 0.4),
        ("outdoor_relative_humidity_percent", "outdoor_humidity", 40, 0.4),
        ("hours_difference_held", "hours_difference_held", 2, 7200),
        ("hours_steady", "hours_steady", 2, 7200),
        ("hours_furniture_clear", "hours_furniture_clear", 2, 7200),
    ],
)
@pytest.mark.parametrize("level", ["survey", "group", "frame"])
def test_a_new_condition_may_stand_at_every_level(
    level: str, key: str, name: str, value: float, si: float, minimal: str, load_text: Load
) -> None:
    depth = LEVELS.index(level)
    stated = {at: f"{key} = 1" * (number < depth) for number, at in enumerate(LEVELS)} | {level: f"{key} = {value}"}
    text = minimal.replace("air_c = 20", f"air_c = 20\n{stated['survey']}")
    text += f'group = "g"\nconditions = {{ {stated["frame"]} }}\n'
    text += f'[[group]]\nid = "g"\nconditions = {{ {stated["group"]} }}\n'
    quantity = task_of(load_text, text).scene[name]
    # 1e-12: one conversion of a unit
    assert (quantity.value, quantity.source) == (pytest.approx(si, rel=1e-12), level)
