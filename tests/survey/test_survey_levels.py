"""survey → group → frame → surface: each level overrides the one above, and what nobody stated is assumed and said."""

from __future__ import annotations

import tempfile
import tomllib
from collections.abc import Callable
from importlib.resources import files
from math import isfinite, sqrt
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from irsurvey.model import Scene, Survey
from irsurvey.survey.defaults import defaults
from irsurvey.survey.load import Known, load

LEVELS = ("survey", "group", "frame")
CAMERA = 'camera = { band_um = [8, 14], signal = { quantity = "apparent-temperature", unit = "C" } }\n'
KNOWN = Known((), ("iso-6946",), {"brick": (0.93, 0.02), "copper": (0.1, 0.05)}, sky_models={"swinbank": 6.0})

Load = Callable[..., Survey]


def loaded(text: str) -> Survey:
    with tempfile.TemporaryDirectory() as name:
        path = Path(name) / "survey.toml"
        path.write_text(text, "utf-8")
        return load(path, known=KNOWN)


def scene_of(load_text: Load, text: str) -> Scene:
    return load_text(text).tasks[0].scene


@settings(max_examples=60, deadline=None)
@given(
    stated=st.dictionaries(
        st.tuples(
            st.sampled_from(LEVELS),
            st.sampled_from(["air_c", "reflected_c", "distance_m", "relative_humidity_percent", "wind_m_s", "sky_c"]),
        ),
        st.integers(0, 50),
        max_size=12,
    )
)
def test_the_lowest_level_that_states_a_condition_counts_and_is_named(stated: dict[tuple[str, str], int]) -> None:
    for needed in ("air_c", "reflected_c", "distance_m"):
        stated.setdefault(("survey", needed), 1)
    tables = {
        level: "{ " + ", ".join(f"{key} = {value}" for (at, key), value in stated.items() if at == level) + " }"
        for level in LEVELS
    }
    text = (
        f'{CAMERA}survey = {{ title = "T", kind = "building" }}\nconditions = {tables["survey"]}\n'
        f'[[group]]\nid = "g"\nconditions = {tables["group"]}\n'
        f'[[frame]]\nid = "F"\nfile = "f.npy"\ngroup = "g"\nconditions = {tables["frame"]}\n'
    )
    scene = loaded(text).tasks[0].scene
    names = {
        "air_c": ("air", 1, 273.15),
        "reflected_c": ("reflected", 1, 273.15),
        "distance_m": ("distance", 1, 0),
        "relative_humidity_percent": ("relative_humidity", 0.01, 0),
        "wind_m_s": ("wind", 1, 0),
        "sky_c": ("sky", 1, 273.15),
    }
    for key, (name, factor, shift) in names.items():
        at = [level for level in LEVELS if (level, key) in stated]
        if at:
            # 1e-12: one multiplication and one addition of doubles
            assert scene[name].value == pytest.approx(stated[at[-1], key] * factor + shift, rel=1e-12)
            assert scene[name].source == at[-1]
        else:
            assert name not in scene or scene[name].source == "default"


@pytest.mark.parametrize(
    ("kinds", "method", "expected"),
    [
        (("building", None, None), None, ("building", "envelope")),
        (("electrical", None, None), None, ("electrical", "contact")),
        (("building", "electrical", None), None, ("electrical", "contact")),
        (("building", "electrical", "building"), None, ("building", "envelope")),
        ((None, "electrical", None), "pv", ("electrical", "pv")),
        (("building", "electrical", None), "air-leakage", ("electrical", "contact")),
        (("building", None, None), "air-leakage", ("building", "air-leakage")),
    ],
)
def test_a_method_goes_with_its_kind(
    kinds: tuple[str | None, ...], method: str | None, expected: tuple[str, str], minimal: str, load_text: Load
) -> None:
    survey, group, frame = (f'kind = "{kind}"\n' if kind else "" for kind in kinds)
    own = f'method = "{method}"\n' if method else ""
    text = minimal.replace('kind = "building"\n', survey + own) + f'group = "g"\n{frame}[[group]]\nid = "g"\n{group}'
    task = load_text(text).tasks[0]
    assert (task.kind, task.method) == expected


def test_a_log_counts_before_a_constant_of_its_level_and_after_one_of_a_lower(minimal: str, load_text: Load) -> None:
    logged = minimal.replace("air_c = 20", 'air_c = 20\nlog = "log.csv"') + "taken = 2026-01-18T00:30:00Z\n"
    files = {"log.csv": "time,air_c\n2026-01-18T00:00:00Z,10\n2026-01-18T01:00:00Z,12\n"}
    by_log = load_text(logged, files).tasks[0].scene["air"]
    assert (by_log.value, by_log.source) == (284.15, "log")
    by_frame = load_text(logged + "conditions = { air_c = 5 }\n", files).tasks[0].scene["air"]
    assert (by_frame.value, by_frame.source) == (278.15, "frame")


def test_emissivity_counts_before_material_at_one_level_and_a_lower_level_before_both(
    minimal: str, load_text: Load
) -> None:
    both = scene_of(load_text, minimal + '[target]\nemissivity = 0.5\nmaterial = "brick"\n')["emissivity"]
    assert (both.value, both.source) == (0.5, "survey")
    lower = minimal + 'target = { material = "brick" }\n[target]\nemissivity = 0.5\n'
    assert scene_of(load_text, lower)["emissivity"].value == 0.93


@pytest.mark.parametrize(
    ("uncertainty", "expected"),
    [
        ("", 0.02),
        ("[uncertainty]\nemissivity = 0.07\n", 0.07),
        ("[uncertainty]\nemissivity = { half_width = 0.03 }\n", 0.03 / sqrt(3)),
    ],
)
def test_the_uncertainty_of_a_material_is_the_table_s_unless_stated_where_the_material_is(
    uncertainty: str, expected: float, minimal: str, load_text: Load
) -> None:
    text = f'{minimal}[[frame.surface]]\nmaterial = "copper"\npolygon = [[0, 0], [1, 0], [1, 1]]\n'
    scene = scene_of(load_text, f'{text}[target]\nmaterial = "brick"\n{uncertainty}')
    assert scene["emissivity"].u == pytest.approx(expected, rel=1e-12)  # the same arithmetic, once
    assert scene["emissivity:copper"].u == 0.05  # a surface lies below the level that states an uncertainty


def test_surfaces_of_the_target_s_material_move_with_the_target(minimal: str, load_text: Load) -> None:
    surface = '[[frame.surface]]\nmaterial = "{}"\npolygon = [[0, 0], [1, 0], [1, 1]]\n'
    text = minimal + surface.format("brick") + surface.format("copper") + surface.format("copper")
    names = [s.emissivity for s in load_text(text + '[target]\nmaterial = "brick"\n').tasks[0].surfaces]
    assert names == ["emissivity", "emissivity:copper", "emissivity:copper"]


TOTAL = "total_emissivity"


@pytest.mark.parametrize(
    ("survey", "frame", "expected"),
    [
        ("emissivity = 0.9", "", (0.9, "emissivity", "default")),
        ("emissivity = 0.9\nemissivity_total = 0.84", "", (0.84, None, "survey")),
        ("emissivity = 0.9\nemissivity_total = 0.84", "emissivity_total = 0.8", (0.8, None, "frame")),
        # what a level above says of the total is not true of another surface
        ("emissivity = 0.9\nemissivity_total = 0.84", "emissivity = 0.3", (0.3, "emissivity", "default")),
        ("emissivity = 0.9\nemissivity_total = 0.84", 'material = "brick"', (0.93, "emissivity", "default")),
        ("emissivity_total = 0.84", "", (0.84, None, "survey")),
    ],
)
def test_the_total_emissivity_is_that_of_the_band_unless_stated_where_that_is(
    survey: str, frame: str, expected: tuple[float, str | None, str], minimal: str, load_text: Load
) -> None:
    scene = scene_of(load_text, f"{minimal}target = {{ {frame} }}\n[target]\n{survey}\n")
    assert (scene[TOTAL].value, scene[TOTAL].follows, scene[TOTAL].source) == expected
    assert scene[TOTAL].u == pytest.approx(0.02 if expected[1] else 0.05 / sqrt(3), rel=1e-12)  # defaults.toml


def test_every_emissivity_has_a_total_one_of_its_name(minimal: str, load_text: Load) -> None:
    area = "polygon = [[0, 0], [1, 0], [1, 1]]\n"
    stated = {
        "a": 'material = "copper"',
        "b": 'material = "copper"\nemissivity_total = 0.2',
        "c": "emissivity_total = 0.84",
        "d": "emissivity = 0.5",
        "e": "",
    }
    text = "".join(f'[[frame.surface]]\nname = "{name}"\n{own}\n{area}' for name, own in stated.items())
    task = load_text(minimal + text).tasks[0]
    names = [surface.emissivity for surface in task.surfaces]
    assert names == ["emissivity:copper", "emissivity:b", "emissivity:c", "emissivity:d", "emissivity"]
    total = [(task.scene[f"total_{name}"].value, task.scene[f"total_{name}"].follows) for name in names]
    assert total == [
        (0.1, "emissivity:copper"),
        (0.2, None),
        (0.84, None),
        (0.5, "emissivity:d"),
        (0.93, "emissivity"),
    ]
    # stated is only the total one: in the band the surface is as the target, and goes with it
    band = task.scene["emissivity:c"]
    assert (band.value, band.u, band.follows) == (0.93, 0.0, "emissivity")
    in_band = {name for name in task.scene.values() if name.partition(":")[0] == "emissivity"}
    assert {f"total_{name}" for name in in_band} == {n for n in task.scene.values() if n.startswith("total_")}


def test_different_emissivities_never_share_a_name(minimal: str, load_text: Load) -> None:
    part = '[[frame.component]]\nname = "{}"\ngroup = "lugs"\nemissivity = {}\npolygon = [[0, 0], [1, 0], [1, 1]]\n'
    text = minimal + part.format("a", 0.9) + part.format("b", 0.8) + part.format("lugs", 0.7)
    task = load_text(text).tasks[0]
    assert [(c.emissivity, task.scene[c.emissivity].value) for c in task.components] == [
        ("emissivity:lugs", 0.9),
        ("emissivity:b", 0.8),
        ("emissivity:lugs (2)", 0.7),
    ]


def test_a_frame_s_surface_takes_the_place_of_its_group_s_of_the_same_name(minimal: str, load_text: Load) -> None:
    area = "polygon = [[0, 0], [1, 0], [1, 1]]\n"
    text = (
        f'{minimal}group = "g"\n[[frame.surface]]\nname = "door"\nemissivity = 0.7\n{area}'
        f'[[group]]\nid = "g"\n[[group.surface]]\nname = "door"\nemissivity = 0.8\n{area}'
        f'[[group.surface]]\nname = "sill"\n{area}'
    )
    task = load_text(text).tasks[0]
    assert [(s.name, task.scene[s.emissivity].value) for s in task.surfaces] == [("sill", 0.93), ("door", 0.7)]


def test_what_nobody_stated_is_assumed_said_and_further_off_than_what_somebody_stated(
    minimal: str, load_text: Load
) -> None:
    survey = load_text(minimal)
    scene = survey.tasks[0].scene
    assumed = {q.name: q.value for q in scene.quantities if q.source == "default" and not isfinite(q.high - q.low)}
    camera = dict.fromkeys(("shading", "shading_x", "shading_y", "outline", "size_of_source"), 0.0)
    assert assumed == {"pressure": 101_325.0, "mean_radiant": 293.15, "convection": 1.0, "atmosphere": 0.0, **camera}
    assert (scene["relative_humidity"].value, scene["relative_humidity"].source) == (0.5, "default")
    assert (scene["emissivity"].value, scene["emissivity"].source) == (0.93, "default")
    assert "wind" not in scene
    stated = minimal.replace("air_c = 20", "air_c = 20\nrelative_humidity_percent = 50\npressure_hpa = 1013.25")
    for name in ("relative_humidity", "pressure"):
        assert scene_of(load_text, stated)[name].u < scene[name].u
    text = "\n".join(survey.notices)
    for words in (
        "relative humidity not recorded: 50% assumed",
        "emissivity not stated: 0.93",
        "viewed_from not stated",
    ):
        assert words in text


@pytest.mark.parametrize(
    ("where", "air", "expected"),
    [
        ('viewed_from = "inside"', "indoor_air_c = 22", (295.15, 0.5)),
        ('viewed_from = "outside"', "outdoor_air_c = 3", (276.15, 5.0)),
        ('viewed_from = "outside"', "", (293.15, 5.0)),
    ],
)
def test_the_mean_radiant_temperature_defaults_to_the_air_of_its_side(
    where: str, air: str, expected: tuple[float, float], minimal: str, load_text: Load
) -> None:
    text = minimal.replace('kind = "building"', f'kind = "building"\n{where}').replace(
        "air_c = 20", f"air_c = 20\n{air}"
    )
    quantity = scene_of(load_text, text)["mean_radiant"]
    # u: ±0.5 K inside (building side, common practice), ±5 K outside (judgement, defaults.toml)
    assert (quantity.value, quantity.u, quantity.source) == (*expected, "default")


def test_an_electrical_part_sits_in_the_air_on_the_path_unless_stated(minimal: str, load_text: Load) -> None:
    text = minimal.replace("building", "electrical")
    scene = scene_of(load_text, text)
    assert [(scene[n].value, scene[n].u, scene[n].source) for n in ("ambient", "mean_radiant")] == [
        (293.15, 1.0, "default"),
        (293.15, 1.0, "default"),
    ]
    stated = scene_of(load_text, text.replace("air_c = 20", "air_c = 20\nambient_c = 30"))
    assert (stated["ambient"].value, stated["ambient"].source) == (303.15, "survey")
    assert stated["mean_radiant"].value == 303.15


def test_reflected_is_less_certain_outside(minimal: str, load_text: Load) -> None:
    outside = minimal.replace('kind = "building"', 'kind = "building"\nviewed_from = "outside"')
    # common practice: ±1 to ±2 K indoors, ±5 K under open sky, half-widths
    assert scene_of(load_text, minimal)["reflected"].u == pytest.approx(2 / sqrt(3), rel=1e-12)
    assert scene_of(load_text, outside)["reflected"].u == pytest.approx(5 / sqrt(3), rel=1e-12)


def test_every_default_has_a_source_and_a_mark() -> None:
    table = tomllib.loads(files("irsurvey.survey").joinpath("defaults.toml").read_text("utf-8"))
    entries = [(key, entry) for section in table.values() for key, entry in section.items()]
    assert len(entries) > 30
    for key, entry in entries:
        assert entry["source"], key
        assert entry["mark"] in ("CP", "C", "J"), key
        assert ("standard" in entry) != ("half_width" in entry), key


def test_every_key_of_uncertainty_has_a_default_or_one_in_another_unit() -> None:
    from irsurvey.survey.schema import Uncertainty

    in_fractions = {"distance_m": "distance_fraction", "wind_m_s": "wind_fraction"}
    in_fractions |= {"known_length_m": "known_length_fraction"}
    without = {"correlations", "sky_model_k"}  # a sky model has its own
    keys = {in_fractions.get(key, key) for key in Uncertainty.model_fields if key not in without}
    assert keys <= set(defaults("stated"))


def test_no_stated_uncertainty_key_is_without_effect(minimal: str, load_text: Load) -> None:
    from irsurvey.survey.schema import Uncertainty

    rich = minimal.replace(
        "air_c = 20",
        "air_c = 20\nindoor_air_c = 1\noutdoor_air_c = 1\noutdoor_24h_c = [0, 1]\nwind_m_s = 2\nambient_c = 3\n"
        "mean_radiant_c = 3\nground_c = 1\nsky_c = 1\nirradiance_w_m2 = 100\npressure_pa = 4\nlog = 'log.csv'\n"
        "indoor_relative_humidity_percent = 1\noutdoor_relative_humidity_percent = 1\ncloud_fraction = 0",
    ).replace("[camera]", "[camera]\nifov_mrad = 1") + (
        "window = { transmittance = 0.8, reflectance = 0.1, temperature_c = 20, ambient_c = 20 }\n"
        "known_length = { from = [0, 0], to = [1, 1], metres = 2 }\n"
        'element = "wall"\n'
        '[[frame.surface]]\nrole = "known-temperature"\ntemperature_c = 20\npolygon = [[0, 0], [1, 0], [1, 1]]\n'
        '[[frame]]\nid = "out"\nfile = "b.tif"\nviewed_from = "outside"\nconditions = { sky_model = "swinbank" }\n'
        '[[element]]\nid = "wall"\nu_value_w_m2k = 0.3\n'
    )
    files = {"log.csv": "time,sky_c\n2026-01-01T00:00,0\n"}
    unstated = rich.replace("mean_radiant_c = 3\n", "").replace("sky_c = 1\n", "")  # so that the sky is modelled
    for key in Uncertainty.model_fields.keys() - {"correlations"}:  # not one number; it has tests of its own
        text, number = (unstated, 1) if key == "sky_model_k" else (rich, 0)
        before = load_text(text, files).tasks[number].scene
        after = load_text(f"{text}[uncertainty]\n{key} = 0.0123\n", files).tasks[number].scene
        assert before.values() == after.values(), key
        assert before != after, key
