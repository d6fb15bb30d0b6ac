"""report.json: valid under its own schema, rounded, readable, the same every time."""

from __future__ import annotations

import json
from collections.abc import Iterator
from copy import deepcopy
from dataclasses import replace
from math import inf, nan
from pathlib import Path
from typing import Any

import jsonschema
import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from irsurvey.model import Band, Detectable, Estimate, FrameTask, Input, Report
from irsurvey.report.json import plain, read, report_schema, text, write


def first(contents: dict[str, Any]) -> dict[str, Any]:
    finding: dict[str, Any] = contents["frames"][0]["findings"][0]
    return finding


VALIDATOR = jsonschema.Draft202012Validator(report_schema())


def without_underscores(value: Any) -> Iterator[str]:
    if isinstance(value, dict):
        for key, entry in value.items():
            yield key
            yield from without_underscores(entry)
    elif isinstance(value, list):
        for entry in value:
            yield from without_underscores(entry)


def test_the_schema_is_itself_valid() -> None:
    jsonschema.Draft202012Validator.check_schema(report_schema())


def test_a_written_report_is_valid_under_the_schema(
    report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path
) -> None:
    VALIDATOR.validate(read(write(report, tasks, tmp_path)))


def test_the_keys_are_those_of_the_records_without_trailing_underscore(report: Report) -> None:
    contents = plain(report)
    assert list(contents) == [
        *("format", "tool", "survey", "claim", "claim_reason", "conditions_review", "next_visit", "assets"),
        *("frames", "repairs", "populations", "seasons", "checklist", "cautions"),
        *("reviews", "review_status"),
    ]
    assert contents["frames"][0]["inputs"]["emissivity"] == {
        "value": 0.92,
        "u": 0.02,
        "from": "survey",
        "u_from": "survey",
    }
    assert contents["frames"][0]["findings"][0]["assessments"][0]["class"] == "marked deviation"
    assert not [key for key in without_underscores(contents) if key.endswith("_")]


@pytest.mark.parametrize(
    ("change", "complaint"),
    [
        (lambda contents: contents.pop("frames"), "'frames' is a required property"),
        (lambda contents: contents["frames"][0].pop("claim"), "'claim' is a required property"),
        (lambda contents: contents["frames"][0].update(colour="blue"), "Additional properties are not allowed"),
        (lambda contents: contents["frames"][0].update(status="fine"), "'fine' is not one of"),
        (lambda contents: first(contents).update(outcome="cleared"), "'cleared' is not one of"),  # a finding never is
        (lambda contents: first(contents)["assessments"][0].update(verdict="met"), "'met' is not one of"),
        (lambda contents: contents["conditions_review"][0].update(verdict="pass"), "'pass' is not one of"),
        (lambda contents: contents["conditions_review"][0].update(limits_to="nothing"), "'nothing' is not one of"),
        (lambda contents: contents.update(claim="fine"), "'fine' is not one of"),
        (lambda contents: contents["seasons"][0].update(sense="winter"), "'winter' is not one of"),
        (lambda contents: contents["checklist"][0].update(asked_by="me"), "'me' is not one of"),
        (lambda contents: contents["frames"][0]["strips"][0].pop("profile"), "'profile' is a required property"),
        (lambda contents: contents["frames"][0]["pair"].pop("with"), "is not valid under any"),
        (lambda contents: first(contents)["budgets"]["delta_k"][0].pop("share"), "'share' is a required property"),
        (lambda contents: contents["frames"][0]["findings"][0].update(delta_k=3.1), "3.1 is not valid"),
        (lambda contents: contents["frames"][0]["inputs"]["emissivity"].update(value=None), "None is not of type"),
    ],
)
def test_the_schema_refuses_what_is_no_report(report: Report, change: Any, complaint: str) -> None:
    contents = deepcopy(plain(report))
    change(contents)
    errors = [error.message for error in VALIDATOR.iter_errors(contents)]
    assert len(errors) == 1
    assert complaint in errors[0]


def test_the_schema_says_units_and_meanings() -> None:
    definitions = report_schema()["$defs"]
    assert definitions["Finding"]["properties"]["heat_flux_w_m2"]["description"] == "in W/m²"
    assert "per unit of the input" in definitions["BudgetTerm"]["properties"]["sensitivity"]["description"]
    assert "beyond" not in definitions["ConditionCheck"]["properties"]["verdict"].get("description", "")
    strip, risk = (definitions[name]["properties"] for name in ("StripReport", "SurfaceAtRisk"))
    assert strip["from"]["description"] == "start of the strip: x, y [px]"
    assert "inspected" in risk["share"]["description"]
    assert "variance" in definitions["BudgetTerm"]["properties"]["share"]["description"]
    assert "without the pressure" in definitions["PairReport"]["properties"]["with"]["description"]
    for record in ("Finding", "ReferenceReport", "StripReport"):
        assert "would make it possible" in definitions[record]["properties"]["refusals"]["description"]
    assert definitions["Estimate"]["description"].startswith("A measured number and its standard uncertainty")


@given(st.floats(allow_nan=False, allow_infinity=False, allow_subnormal=False))
def test_numbers_keep_seven_significant_digits(value: float) -> None:
    # half a unit of the seventh digit is at most 5e-7 of the number; 1e-15 for the binary representation
    assert plain(Band(value, 0.0))["low"] == pytest.approx(value, rel=5e-7 + 1e-15, abs=0)


def test_a_single_precision_temperature_survives_to_a_tenth_of_a_millikelvin() -> None:
    assert plain(Band(np.float32(123.45678), 0.0))["low"] == pytest.approx(123.45678, rel=0, abs=1e-4)


@pytest.mark.parametrize("missing", [nan, inf, -inf, np.float32(nan)])
def test_what_is_not_a_number_becomes_null(report: Report, missing: float) -> None:
    assert plain(Detectable(None, missing, None, 25, None, None))["min_delta_k"] is None
    finding = replace(report.frames[0].findings[0], delta_k=Estimate(missing, 0.1), mean_c=Estimate(16.0, missing))
    assert plain(finding)["delta_k"] is None
    assert plain(finding)["mean_c"] == {"value": 16.0, "u": None}


def test_zero_has_no_sign() -> None:
    assert str(plain(Band(-0.0, -1e-320))["low"]) == "0.0"


def test_integers_and_truth_values_of_arrays_are_plain() -> None:
    contents = plain(Detectable(None, None, None, np.int64(25), None, None))
    assert type(contents["min_pixels"]) is int
    assert plain(Input(np.float64(0.1), 0.0, "x", "y")) == {"value": 0.1, "u": 0.0, "from": "x", "u_from": "y"}


def test_what_json_cannot_hold_is_refused_by_name() -> None:
    with pytest.raises(TypeError, match="no JSON for complex"):
        plain(Input(1j, 0.0, "x"))  # type: ignore[arg-type]


def test_the_survey_stays_as_it_was_read(report: Report) -> None:
    survey = {"survey": {"title": "x"}, "conditions": {"air_c": 21.123456789, "sky_c": nan}, "n": [1, 2.00000001]}
    assert plain(replace(report, survey=survey))["survey"] == {
        "survey": {"title": "x"},
        "conditions": {"air_c": 21.123456789, "sky_c": None},
        "n": [1, 2.00000001],
    }


@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(st.text(st.characters(exclude_categories=["Cs"]), max_size=80))
def test_any_text_comes_back_as_it_was(report: Report, words: str) -> None:
    frame = replace(report.frames[0], notes=words, label=f"[\n1,\n {words}]")
    contents = json.loads(text(replace(report, frames=(frame,))))
    assert contents["frames"][0]["notes"] == words
    assert contents["frames"][0]["label"] == f"[\n1,\n {words}]"


def test_half_a_surrogate_pair_does_not_break_the_encoding(
    report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path
) -> None:
    frame = replace(report.frames[0], notes="broken \udc80 name")
    path = write(replace(report, frames=(frame,)), tasks, tmp_path)
    assert json.loads(path.read_text(encoding="utf-8"))["frames"][0]["notes"] == "broken ? name"


def test_lists_of_numbers_stand_on_one_line(report: Report) -> None:
    lines = text(report).splitlines()
    assert '     "polygon": [[150, 60], [209, 60], [209, 119], [150, 119]],' in lines


def test_a_budget_has_one_term_a_line(report: Report) -> None:
    lines = text(report).splitlines()
    start = next(number for number, line in enumerate(lines) if line.strip() == '"delta_k": [')
    terms = [json.loads(line.strip().rstrip(",")) for line in lines[start + 1 : start + 6]]
    assert [term["input"] for term in terms] == [term.input for term in report.frames[0].findings[0].budgets["delta_k"]]
    assert terms[0] == {
        "input": "reflected_c",
        "u": 1.0,
        "sensitivity": 0.105,
        "contribution": 0.105,
        "share": 0.5467665,
    }  # (0.105/0.142)²


def test_an_estimate_and_an_input_stand_on_one_line(report: Report) -> None:
    lines = text(report).splitlines()
    assert '     "delta_k": {"value": -3.1275, "u": 0.142},' in lines
    assert '    "emissivity": {"value": 0.92, "u": 0.02, "from": "survey", "u_from": "survey"},' in lines
    assert '     "max_c": {"value": 71.5, "u": 1.4, "interval_95": [68.9, 74.4]},' in lines


@settings(deadline=None)
@given(
    st.recursive(
        st.none()
        | st.booleans()
        | st.integers()
        | st.floats(allow_nan=False, allow_infinity=False)
        | st.text(max_size=8),
        lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=4), inner, max_size=4),
        max_leaves=20,
    )
)
def test_however_lines_are_broken_the_contents_are_the_same(contents: Any) -> None:
    report = Report(1, {}, {"survey": contents}, "not valid", "", (), (), (), (), (), (), (), (), ())
    assert json.loads(text(report))["survey"]["survey"] == contents


def test_the_same_report_gives_the_same_bytes(report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path) -> None:
    first = write(report, tasks, tmp_path / "a").read_bytes()
    assert write(report, tasks, tmp_path / "b").read_bytes() == first


def test_where_a_frame_lies_on_this_machine_is_not_written(
    report: Report, tasks: tuple[FrameTask, ...], tmp_path: Path
) -> None:
    assert b"secret" not in write(report, tasks, tmp_path).read_bytes()
