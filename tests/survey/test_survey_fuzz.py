"""Whatever a survey file holds, loading it gives a Survey or a SurveyError, and nothing else."""

from __future__ import annotations

import datetime
import json
import tempfile
import tomllib
from copy import deepcopy
from pathlib import Path
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from irsurvey.errors import Fault, SurveyError
from irsurvey.model import Survey
from irsurvey.survey.load import Known, load, schema

EVERYTHING = Path(__file__).with_name("everything.toml").read_text("utf-8")


def summed(*readings: Any) -> float:
    """Any number will do for degree days."""
    return float(abs(readings[1] - readings[2]).sum())


KNOWN = Known(
    ("building-delta-t", "temperature-factor"),
    ("iso-6946", "churchill-chu"),
    dict.fromkeys(("plaster", "brick", "glass", "steel", "copper"), (0.9, 0.02)),
    ("en-13187", "astm-c1060"),
    dict.fromkeys(("berdahl-martin", "swinbank"), 5.0),
    dict.fromkeys(("brick", "gypsum plaster"), (1.0, 1000.0, 1000.0)),
    summed,
    ("iec-60694/bolted-bare", "insulation/F"),
    lambda text: [Fault("name", "a name", "another")] if "name" in text else [],
)
COLUMNS = ["file", "time", "air_c", "outdoor_air_c", "rain_mm", "surface", "strip", "pair.with", "taken"]
COLUMNS += ["load_a", "load_a_1", "date", "asset", "component", "delta_ambient_k", "u_k", "window_from.without"]
KEYS = sorted({key for table in [schema(), *schema()["$defs"].values()] for key in table.get("properties", {})})

text = st.text(st.characters(codec="utf-8", exclude_characters="\x7f"), max_size=12)
word = st.sampled_from(
    [
        "automatic",
        "building",
        "counts",
        "C",
        "F01",
        "*",
        "**/*",
        "../x",
        "/",
        "a\\..\\b",
        "north",
        "Europe/Vienna",
        "\0",
    ]
)
leaf = st.one_of(
    text,
    word,
    st.integers(-(2**70), 2**70),
    st.just(10**400),
    st.floats(),
    st.booleans(),
    st.datetimes(timezones=st.sampled_from([None, datetime.UTC])),
    st.dates(),
    st.times(),
)
value = st.recursive(
    leaf,
    lambda inner: st.one_of(
        st.lists(inner, max_size=4), st.dictionaries(st.one_of(st.sampled_from(KEYS), text), inner, max_size=5)
    ),
    max_leaves=12,
)


def toml(content: Any) -> str:
    """A value as TOML, tables inline."""
    if isinstance(content, dict):
        return "{" + ", ".join(f"{json.dumps(key, ensure_ascii=False)} = {toml(v)}" for key, v in content.items()) + "}"
    if isinstance(content, list):
        return "[" + ", ".join(map(toml, content)) + "]"
    if isinstance(content, bool):
        return str(content).lower()
    if isinstance(content, datetime.datetime | datetime.date | datetime.time):
        return content.isoformat()
    if isinstance(content, str):
        return json.dumps(content, ensure_ascii=False)
    return repr(content)


def outcome(data: bytes, csv: bytes = b"") -> Survey | SurveyError:
    with tempfile.TemporaryDirectory() as name:
        path = Path(name) / "survey.toml"
        path.write_bytes(data)
        (Path(name) / "t.csv").write_bytes(csv)
        (Path(name) / "north").mkdir()
        (Path(name) / "north" / "f03.tif").touch()
        (Path(name) / "tables").mkdir()
        (Path(name) / "tables" / "frames.csv").write_text("file,conditions.distance_m\nt.tif,3\n")
        (Path(name) / "tables" / "logger.csv").write_text(
            "time,air_c,indoor_air_c,outdoor_air_c,irradiance_w_m2,rain_mm\n"
            "2026-01-17T07:00,3,20,1,200,0.4\n2026-01-18T07:00,3,21,1,0,0\n2026-01-18T08:00,4,21,1,0,0\n"
        )
        (Path(name) / "tables" / "load.csv").write_text("time,load_a_1,load_a_2\n2026-01-18T07:00,200,210\n")
        (Path(name) / "tables" / "history.csv").write_text("date,component,delta_ambient_k\n2025-01-18,lug,4\n")
        (Path(name) / "site.toml").write_text("")
        (Path(name) / "tables" / "year.csv").write_text("time,outdoor_air_c\n2025-01-01,3\n2025-12-31,4\n")
        try:
            found: Survey | SurveyError = load(path, known=KNOWN)
        except SurveyError as error:
            found = error
    if isinstance(found, Survey):
        assert json.loads(found.as_read)
    else:
        assert found.faults
        assert all(fault.where and fault.expected and fault.got for fault in found.faults)
        assert len(str(found).split("\n")) >= len(found.faults)
    return found


def written(content: dict[str, Any]) -> bytes:
    return "".join(f"{json.dumps(key, ensure_ascii=False)} = {toml(v)}\n" for key, v in content.items()).encode("utf-8")


def test_the_fuzzed_file_is_sound_before_it_is_fuzzed() -> None:
    assert isinstance(outcome(EVERYTHING.encode("utf-8")), Survey)
    content = tomllib.loads(EVERYTHING)
    assert tomllib.loads(written(content).decode("utf-8")) == content
    assert isinstance(outcome(written(content)), Survey)


@settings(max_examples=300, deadline=None)
@given(data=st.data())
def test_a_sound_file_with_some_values_replaced(data: st.DataObject) -> None:
    content = deepcopy(tomllib.loads(EVERYTHING))
    for _ in range(data.draw(st.integers(1, 4))):
        inside: Any = content
        while True:
            keys = list(inside) if isinstance(inside, dict) else list(range(len(inside)))
            if not keys:
                break
            step = data.draw(st.sampled_from(keys))
            if isinstance(inside[step], dict | list) and data.draw(st.booleans()):
                inside = inside[step]
                continue
            inside[step] = data.draw(value)
            break
    outcome(written(content))


@settings(max_examples=120, deadline=None)
@given(st.dictionaries(st.one_of(st.sampled_from(list(schema()["properties"])), text), value, max_size=6))
def test_any_tables_at_all(content: dict[str, Any]) -> None:
    assert isinstance(outcome(written(content)), SurveyError)  # there is no title and kind, or no frame


@settings(max_examples=120, deadline=None)
@given(st.one_of(st.binary(max_size=200), text.map(str.encode)))
def test_any_bytes_at_all(data: bytes) -> None:
    assert isinstance(outcome(data), SurveyError)


@settings(max_examples=120, deadline=None)
@given(
    header=st.lists(
        st.one_of(
            st.sampled_from(COLUMNS),
            text,
        ),
        max_size=5,
    ),
    body=text,
)
def test_any_table_and_log(header: list[str], body: str) -> None:
    csv = (",".join(header) + "\n" + body).encode("utf-8")
    head = (
        'frame_table = "t.csv"\nhistory = "t.csv"\n[survey]\ntitle = "T"\nkind = "building"\n'
        '[camera]\nband_um = [8, 14]\nsignal = { quantity = "counts", gain = 1 }\n'
        '[conditions]\nlog = "t.csv"\nair_c = 1\nreflected_c = 1\ndistance_m = 1\n'
        '[season]\nheating = { base_c = 15, temperatures = "t.csv" }\n'
        '[[circuit]]\nid = "C"\nlog = "t.csv"\n'
    )
    outcome(head.encode("utf-8"), csv)
