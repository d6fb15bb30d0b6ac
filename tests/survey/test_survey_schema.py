"""The JSON Schema of the survey file agrees with what is loaded."""

from __future__ import annotations

import json
import tomllib
from collections.abc import Iterator
from copy import deepcopy
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from irsurvey.survey.load import schema

EVERYTHING = tomllib.loads(Path(__file__).with_name("everything.toml").read_text("utf-8"))
VALIDATOR = jsonschema.Draft202012Validator(schema())


def as_json(content: dict[str, Any]) -> Any:
    return json.loads(json.dumps(content, default=lambda moment: moment.isoformat()))


def tables() -> Iterator[tuple[str, dict[str, Any]]]:
    yield "top", schema()
    yield from schema()["$defs"].items()


def test_the_schema_is_a_schema_and_can_be_written() -> None:
    jsonschema.Draft202012Validator.check_schema(schema())
    assert json.loads(json.dumps(schema())) == schema()


def test_the_schema_accepts_a_file_that_states_every_key() -> None:
    VALIDATOR.validate(as_json(EVERYTHING))


def places(value: Any, place: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    if isinstance(value, dict):
        yield place
        for key, inner in value.items():
            yield from places(inner, (*place, key))
    elif isinstance(value, list):
        for index, inner in enumerate(value):
            yield from places(inner, (*place, index))


OF_A_SEASON = ("degree_days", "efficiency", "price")
FREE = {("cameras",), ("circuit", 0, "load_a")}
"""Tables whose keys are names: of cameras, of phases."""


@pytest.mark.parametrize("place", [place for place in places(EVERYTHING) if place not in FREE], ids=str)
def test_the_schema_rejects_an_unknown_key_in_every_table(place: tuple[Any, ...]) -> None:
    content = deepcopy(EVERYTHING)
    inside: Any = content
    for step in place:
        inside = inside[step]
    inside["unknown_key"] = 1
    assert not VALIDATOR.is_valid(as_json(content))


@pytest.mark.parametrize(
    ("place", "value"),
    [
        (("target", "emissivity"), 1.2),
        (("target", "emissivity"), 0),
        (("conditions", "distance_m"), -1),
        (("conditions", "relative_humidity_percent"), 101),
        (("conditions", "air_c"), None),
        (("survey", "kind"), "bridge"),
        (("survey", "display_units"), "imperial"),
        (("survey", "decimal_comma"), "yes"),
        (("survey", "date_format"), "%d.%m"),
        (("survey", "date_format"), "%d.%m.%Y %H"),
        (("frame", 0, "reference", "polygon"), [[1, 1], [2, 2]]),
        (("frame", 0, "reference"), "manual"),
        (("cameras", "wide", "signal", "quantity"), "radiance"),
        (("uncertainty", "air_k"), {"half_width": -1}),
        (("cameras", "wide", "noise_k"), 5.1),
        (("conditions", "tilt_deg"), 181),
        (("conditions", "cloud_fraction"), 1.1),
        (("conditions", "humidity_class"), 6),
        (("conditions", "unheated_before"), 1),
        (("element", 0, "mass"), "massive"),
        (("element", 0, "u_value_w_m2k"), 0),
        (("element", 0, "layers", 0, "thickness_m"), 0),
        (("frame", 0, "strip", 0, "undisturbed"), "none"),
        (("frame", 0, "pair", "pressure_pa"), None),
        (("season", "heating", "degree_days_kd"), -1),
        (("circuit", 0, "time_constant_min"), 0),
        (("circuit", 0, "log"), 3),
        (("group", 1, "find_components"), 1),
        (("group", 1, "component", 0, "cylinder", "diameter_m"), 30),
        (("group", 1, "component", 0, "limits"), "insulation/F"),
        (("history",), ["history.csv"]),
        (("uncertainty", "correlations", 0, "coefficient"), 1.01),
        (("uncertainty", "correlations", 0, "between"), ["air_c", "air_c"]),
        (("uncertainty", "correlations", 0, "between"), ["air_c"]),
        (("uncertainty", "correlations", 0, "between"), ["air_c", "reflected_c", "wind_m_s"]),
    ],
)
def test_the_schema_rejects_what_loading_rejects(place: tuple[Any, ...], value: Any) -> None:
    content = deepcopy(EVERYTHING)
    inside: Any = content
    for step in place[:-1]:
        inside = inside[step]
    inside[place[-1]] = value
    assert not VALIDATOR.is_valid(as_json(content))


def test_every_key_is_described_and_has_a_default_or_is_required() -> None:
    count = 0
    for name, table in tables():
        for key, described in table.get("properties", {}).items():
            count += 1
            assert described.get("description"), (name, key)
            assert (key in table.get("required", ())) != ("default" in described), (name, key)
    assert count > 150


def test_known_defaults_are_listed() -> None:
    definitions = schema()["$defs"]
    assert definitions["Conditions"]["properties"]["relative_humidity_percent"]["default"] == 50
    assert definitions["Conditions"]["properties"]["pressure_hpa"]["default"] == 1013.25
    assert definitions["Camera"]["properties"]["accuracy_k"]["default"] == 2.0
    assert definitions["Uncertainty"]["properties"]["emissivity"]["default"] == {"half_width": 0.05}
    assert definitions["Uncertainty"]["properties"]["size_of_source_fraction"]["default"] == {"half_width": 1.0}
    assert definitions["Uncertainty"]["properties"]["correlations"]["default"] == []
    assert definitions["Detection"]["properties"]["min_pixels"]["default"] == 25
    assert definitions["Conditions"]["properties"]["tilt_deg"]["default"] == 90
    assert definitions["Conditions"]["properties"]["sky_model"]["default"] == "berdahl-martin"
    assert definitions["Strip"]["properties"]["width_px"]["default"] == 5
    shares = [definitions["OneSeason"]["properties"][f"{of}_fraction"]["default"] for of in OF_A_SEASON]
    assert shares == [0.10, 0.05, 0.10]
    assert schema()["required"] == ["survey"]
    assert definitions["About"]["required"] == ["title"]
