"""A survey file that states every key becomes the records it should: names, SI units, sources, references."""

from __future__ import annotations

import json
import pickle
import tomllib
from collections.abc import Callable, Iterator
from datetime import date, datetime, timedelta, timezone
from math import radians, sqrt
from pathlib import Path

import pytest

from irsurvey.model import (
    Asset,
    Component,
    Detection,
    InCameraCorrection,
    JointShape,
    KnownLength,
    KnownRectangle,
    Quantity,
    ReadOptions,
    Survey,
)
from irsurvey.survey.load import schema
from irsurvey.survey.outside import polygon_faults

EVERYTHING = Path(__file__).with_name("everything.toml").read_text("utf-8")
FILES = {
    "tables/frames.csv": "file,conditions.distance_m\nframes/t1.tif,3.5\n",
    "tables/logger.csv": "time,air_c,battery\n2026-01-18T07:00,20,3.1\n2026-01-18T08:00,26,3.0\n",
    "tables/year.csv": "time,outdoor_air_c\n2025-01-01,20\n2025-07-01,16\n2026-01-01,20\n",
    "tables/load.csv": "time,load_a_1,load_a_2\n2026-01-18T06:00,180,180\n2026-01-18T07:00,200,210\n",
    "tables/history.csv": "date,asset,component,delta_ambient_k\n2025-01-18,,phase 1 lug,4.5\n",
    "site.toml": 'name = "site"\n',
    "north/f10.tif": "",
    "north/f02.tif": "",
    "north/f03.tif": "",
    "north/.f02.tif": "",
    "north/notes.txt": "",
}
ULP = 1e-12
"""Relative: a unit conversion is a few roundings of a double (2e-16 each)."""


@pytest.fixture
def survey(load_text: Callable[..., Survey]) -> Survey:
    return load_text(EVERYTHING, FILES)


def frame(survey: Survey, name: str):
    return next(task for task in survey.tasks if task.id == name)


def keys_of(value: object) -> Iterator[str]:
    if isinstance(value, dict):
        yield from value
        for inner in value.values():
            yield from keys_of(inner)
    elif isinstance(value, list):
        for inner in value:
            yield from keys_of(inner)


def test_the_example_states_every_key_that_the_schema_knows() -> None:
    described = {name for table in [schema(), *schema()["$defs"].values()] for name in table.get("properties", {})}
    assert described - set(keys_of(tomllib.loads(EVERYTHING))) == set()


def test_frames_are_listed_ones_then_table_rows_then_globbed_ones_sorted(survey: Survey) -> None:
    assert [task.id for task in survey.tasks] == ["F01", "F04", "F03", "P01", "P02", "P03", "t1", "f02", "f10"]


def test_a_listed_frame_whose_file_a_glob_finds_is_that_group_s_and_not_a_second_one(survey: Survey) -> None:
    assert frame(survey, "F03").group == "north"
    assert [task.file for task in survey.tasks].count("north/f03.tif") == 1


def test_the_survey_carries_its_texts_and_assets(survey: Survey) -> None:
    assert (survey.title, survey.date, survey.timezone) == (
        "Weir Cottage, heating season",
        date(2026, 1, 18),
        "Europe/Vienna",
    )
    assert dict(survey.about)["notes"] == "<b>windy</b> & cold"
    texts = ("standard", "test_description", "supplementary", "influences", "signed_by")
    assert [dict(survey.about)[name] for name in texts] == [
        "EN 13187, simplified",
        "from inside, room by room",
        "moisture meter behind the sink",
        "sun in the afternoon before",
        "B. Signatory",
    ]
    assert survey.assets == (
        Asset("W-N-01", "North wall", "Living room", 2),
        Asset("W-N-02", not_inspected="blocked by scaffolding"),
    )
    assert frame(survey, "F01").criteria == ("building-delta-t", "temperature-factor", "site.toml")


def test_the_file_as_read_is_kept_as_json_with_iso_dates(survey: Survey) -> None:
    as_read = json.loads(survey.as_read)
    assert as_read["survey"]["date"] == "2026-01-18"
    assert as_read["frame"][0]["taken"] == "2026-01-18T07:12:00"
    assert as_read["target"] == tomllib.loads(EVERYTHING)["target"]


def test_conditions_are_si_with_stated_uncertainty_and_source(survey: Survey) -> None:
    scene = frame(survey, "P01").scene
    for name, value, u in (
        ("air", 294.15, 0.5 / sqrt(3)),
        ("relative_humidity", 0.45, 0.04),
        ("pressure", 99_000.0, 200.0),
        ("reflected", 293.65, 1.0),
        ("distance", 2.5, 0.1),
        ("view_angle", radians(30), radians(3)),
        ("indoor_air", 294.15, 0.4),
        ("outdoor_air", 274.15, 0.4),
        ("outdoor_24h_low", 270.15, 1.0),
        ("outdoor_24h_high", 277.15, 1.0),
        ("wind", 2.0, 0.2),
        ("ambient", 295.15, 0.6),
        ("tilt", radians(80), radians(2)),
        ("indoor_humidity", 0.5, 0.02),
        ("outdoor_humidity", 0.75, 0.03),
        ("cloud", 0.25, 0.1),
        ("total_emissivity", 0.9, 0.03),
        ("hours_difference_held", 86_400.0, 1800 / sqrt(3)),
        ("hours_steady", 21_600.0, 1800 / sqrt(3)),
        ("hours_furniture_clear", 7_200.0, 1800 / sqrt(3)),
        ("mean_radiant", 293.15, 0.8),
        ("ground", 276.15, 2.0),
        ("sky", 248.15, 4.0),
        ("hours_since_sun", 43_200.0, 1800 / sqrt(3)),
        ("hours_since_rain", 172_800.0, 1800 / sqrt(3)),
        ("irradiance", 0.0, 0.0),
        ("pressure_difference", -25.0, 1.0),
    ):
        quantity = scene[name]
        assert quantity.value == pytest.approx(value, rel=ULP), name
        assert quantity.u == pytest.approx(u, rel=ULP), name
        assert quantity.source == "survey", name
    assert scene["convection"] == Quantity("convection", 1.0, 0.2, "default", low=0.0, u_source="survey")
    assert scene["atmosphere"].u == 0.2


def test_the_camera_s_imperfections_are_in_every_scene_as_stated(survey: Survey) -> None:
    tilt = pytest.approx(0.3 / sqrt(3), rel=ULP)
    for task in survey.tasks:
        assert [task.scene[name] for name in ("shading", "shading_x", "shading_y", "outline", "size_of_source")] == [
            Quantity("shading", 0.0, 0.4, "survey", u_source="survey"),
            Quantity("shading_x", 0.0, tilt, "survey", distribution="rectangular", u_source="survey"),
            Quantity("shading_y", 0.0, tilt, "survey", distribution="rectangular", u_source="survey"),
            Quantity("outline", 0.0, 1.0, "survey", u_source="survey"),
            Quantity("size_of_source", 0.0, 0.2, "survey", u_source="survey"),
        ]


def test_correlations_are_between_names_of_the_scene(survey: Survey) -> None:
    air_and_reflected = ("air", "reflected", 0.8)
    assert frame(survey, "F01").scene.correlations == (
        air_and_reflected,
        ("emissivity", "emissivity:steel", 1.0),  # the cover plate's
    )
    assert frame(survey, "P01").scene.correlations == (air_and_reflected,)  # no cover plate there


def test_a_logged_value_says_so(survey: Survey) -> None:
    air = frame(survey, "F01").scene["air"]
    assert (air.value, air.source) == (pytest.approx(273.15 + 21.2, rel=ULP), "log")  # 12 of 60 minutes from 20 to 26


def test_a_group_overrides_the_survey_and_says_so(survey: Survey) -> None:
    task = frame(survey, "f02")
    assert (task.scene["distance"].value, task.scene["distance"].source) == (8.0, "group")
    assert task.scene["distance"].u == pytest.approx(0.4, rel=ULP)  # distance_fraction 0.05 in place of distance_m
    assert task.scene["wind"].u == 0.5
    assert (task.reflected_from, "reflected" in task.scene) == ("F03", False)
    assert (task.viewed_from, task.camera.name) == ("outside", "tele")
    assert task.detection == Detection(1.0, 25, 0.01)
    assert task.scene["emissivity"] == Quantity("emissivity", 0.93, 0.02, "material table", 0.001, 1.0, "rectangular")
    assert [surface.name for surface in task.surfaces] == ["pane"]
    assert (task.element.id, task.orientation) == ("north-wall", "north")
    assert task.reference == ((10.0, 10.0), (60.0, 10.0), (60.0, 60.0))


def test_a_frame_that_draws_a_reflector_measures_its_own_reflected_temperature(survey: Survey) -> None:
    task = frame(survey, "F03")
    assert (task.reflected_from, "reflected" in task.scene) == (None, False)
    assert [(surface.name, surface.role) for surface in task.surfaces] == [
        ("pane", "ignore"),
        ("surface 2", "reflector"),
    ]


def test_a_window_is_in_the_scene_and_what_it_does_not_state_is_the_air(survey: Survey) -> None:
    scene = frame(survey, "F01").scene
    assert frame(survey, "F01").has_window
    assert (scene["window_transmittance"].value, scene["window_reflectance"].value) == (0.75, 0.05)
    assert (scene["window_temperature"].value, scene["window_ambient"].value) == (303.15, 298.15)
    assert (scene["window_transmittance"].high, scene["window_reflectance"].high) == (0.95, 0.25)
    inherited = frame(survey, "f02").scene
    assert inherited["window_transmittance"].source == "group"
    assert (inherited["window_temperature"].value, inherited["window_temperature"].source) == (294.15, "default")
    assert inherited["window_reflectance"].source == "default"
    assert "window_transmittance" not in frame(survey, "t1").scene


def test_surfaces_refer_to_their_own_names_in_the_scene(survey: Survey) -> None:
    task = frame(survey, "F01")
    plate, panel = task.surfaces
    assert (plate.emissivity, plate.reflected, plate.material) == ("emissivity:steel", "reflected:cover plate", "steel")
    assert (task.scene[plate.emissivity].value, task.scene[plate.emissivity].source) == (0.30, "surface")
    assert task.scene[plate.reflected].value == 291.15
    assert (panel.emissivity, panel.reflected, panel.temperature) == (
        "emissivity",
        "reflected",
        "temperature:matt panel",
    )
    assert task.scene["temperature:matt panel"].value == pytest.approx(293.95, rel=ULP)
    assert task.scene["temperature:matt panel"].u == 0.2


def test_components_of_one_group_and_emissivity_share_a_name_and_take_loads_of_their_circuit(survey: Survey) -> None:
    task = frame(survey, "P01")
    assert task.components == (
        Component(
            "phase 1 lug",
            ((1.0, 1.0), (9.0, 1.0), (9.0, 9.0)),
            "feeder lugs",
            "1",
            190.0,
            400.0,
            "emissivity:feeder lugs",
            limits=("iec-60694/bolted-bare", "insulation/F"),
            shape=JointShape("cylinder", diameter=0.03, length=0.12),
            time_constant=1200.0,
        ),
        Component(
            "phase 2 lug",
            ((11.0, 1.0), (19.0, 1.0), (19.0, 9.0)),
            "feeder lugs",
            "2",
            200.0,
            400.0,
            "emissivity:feeder lugs",
            shape=JointShape("plate", length=0.1, width=0.05),
        ),
        Component(
            "bare bar",
            ((31.0, 1.0), (39.0, 1.0), (39.0, 9.0)),
            "feeder lugs",
            emissivity="emissivity:copper",
            shape=JointShape("sphere", diameter=0.05),
        ),
        Component("clamp", ((41.0, 1.0), (49.0, 1.0), (49.0, 9.0)), shape=JointShape("area", area=0.02)),
    )
    assert (task.kind, task.method, task.viewed_from) == ("electrical", "contact", None)
    copper = task.scene["emissivity:copper"]
    assert (copper.value, copper.u, copper.source) == (0.1, 0.05, "material table")


def test_what_reading_and_scaling_need_is_carried(survey: Survey) -> None:
    panel, wall = frame(survey, "P01"), frame(survey, "F01")
    assert panel.read == ReadOptions(1, "t", (480, 640), "uint16", "big", (-1.0,))
    assert wall.read == ReadOptions(fill_values=(0.0, 65535.0))
    assert wall.known_scale == KnownLength((10.0, 20.0), (110.0, 20.0))
    assert wall.scene["known_length"] == Quantity(
        "known_length", 0.9, pytest.approx(0.009, rel=ULP), "frame", low=0.0, u_source="survey"
    )
    assert panel.known_scale == KnownRectangle(((0.0, 0.0), (50.0, 0.0), (50.0, 40.0), (0.0, 40.0)))
    assert (panel.scene["known_width"].value, panel.scene["known_height"].value) == (0.6, 0.5)
    assert (wall.scene["ifov"].value, wall.scene["ifov"].u) == (1e-3, pytest.approx(1e-5, rel=ULP))
    assert "ifov" not in panel.scene
    assert (wall.convection, wall.surface_height) == ("churchill-chu", 2.4)
    assert (wall.photo, wall.label, wall.asset) == ("frames/f01.jpg", "Living room, north wall", "W-N-01")


def test_a_local_time_gets_the_survey_s_time_zone(survey: Survey) -> None:
    taken = frame(survey, "F01").taken
    assert taken == datetime(2026, 1, 18, 7, 12, tzinfo=timezone(timedelta(hours=1)))
    assert taken.isoformat() == "2026-01-18T07:12:00+01:00"


def test_cameras_are_in_si_units(survey: Survey) -> None:
    wide = frame(survey, "F01").camera
    assert (wide.name, wide.band, wide.ifov) == ("wide", (7.5e-6, 13e-6), 1e-3)
    assert (wide.spot_pixels, wide.noise, wide.accuracy, wide.accuracy_fraction) == (3, 0.05, 2.0, 0.02)
    assert wide.range == (pytest.approx(253.15, rel=ULP), pytest.approx(423.15, rel=ULP))
    assert (wide.serial, wide.lens, wide.calibrated_on) == ("0815", "24°", date(2025, 6, 1))
    assert (wide.signal.scale, wide.signal.offset) == (0.04, 0.0)
    assert frame(survey, "f02").camera.signal.assumed == InCameraCorrection(
        0.95, 293.15, None, 2.0, 293.15, 0.4, 100_000.0
    )
    points = frame(survey, "P01").camera.signal.points
    assert points == ((1000.0, 293.15), (2000.0, 313.15), (3000.0, 333.15))


@pytest.mark.parametrize(
    ("name", "quantity", "gain", "form"),
    [("radiance", "counts", 0.001, None), ("closed", "counts", None, (8.759872e-6, 171.0479e-6, 8738.607, 5.0))],
)
def test_counts_are_kept_as_radiance_or_closed_form(
    name: str, quantity: str, gain: float | None, form: tuple[float, ...] | None, load_text: Callable[..., Survey]
) -> None:
    text = EVERYTHING.replace('camera = "points"', f'camera = "{name}"')
    signal = frame(load_text(text, FILES), "P01").camera.signal
    closed = signal.closed_form
    assert (signal.quantity, signal.gain) == (quantity, gain)
    assert (closed and (closed.a, closed.b, closed.c, closed.bias)) == (form and pytest.approx(form, rel=ULP))


def test_a_survey_survives_pickling(survey: Survey) -> None:
    assert pickle.loads(pickle.dumps(survey)) == survey


def test_loading_twice_gives_the_same_survey(load_text: Callable[..., Survey], survey: Survey) -> None:
    assert load_text(EVERYTHING, FILES) == survey


def test_what_is_assumed_is_listed_with_the_frames_it_concerns(survey: Survey) -> None:
    notices = "\n".join(survey.notices)
    window = [notice for notice in survey.notices if "temperature of the window not stated" in notice]
    assert [(notice.split(":")[0], notice[-19:]) for notice in window] == [("warning", "F03, P02, f02, f10)")]
    assert "load not recorded: nothing can be cleared for bare bar, clamp (P01)" in notices
    assert "raw file missing: the frame will fail (F01, F04, P01, P02 and 2 more)" in notices
    assert "photograph missing (F01)" in notices
    assert "ifov_mrad of tele not stated: no spot size, no area (group north)" in notices
    assert "emissivity not stated" not in notices


def test_drawn_things_outside_the_frame_are_faults_once_its_size_is_known(survey: Survey) -> None:
    task = frame(survey, "F01")
    assert polygon_faults(task, (480, 640)) == ()
    faults = {fault.where: fault.got for fault in polygon_faults(task, (300, 400))}
    assert faults == {
        "frame[F01].reference.polygon": "(160, 440), (40, 440)",
        "frame[F01].inspect.polygon": "(630, 0), (630, 470)",
        "frame[F01].surface[cover plate].polygon": "(470, 200), (470, 300), (330, 300)",
    }
    assert [fault.where for fault in polygon_faults(task, (480, 640 - 10))] == ["frame[F01].inspect.polygon"]
    assert "frame[F01].known_length" in [fault.where for fault in polygon_faults(task, (480, 100))]
    panel = [fault.where for fault in polygon_faults(frame(survey, "P01"), (30, 35))]
    assert panel == [
        "frame[P01].component[bare bar].polygon",
        "frame[P01].component[clamp].polygon",
        "frame[P01].known_rectangle.corners",
    ]
