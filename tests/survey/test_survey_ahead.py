"""A survey file before going out: no frame, table or log needs to be there, and nothing else is let pass."""

from __future__ import annotations

import pytest

from irsurvey.errors import SurveyError
from irsurvey.survey.load import Known, load

SURVEY = """
format = 1
[survey]
title = "Tomorrow"
kind = "building"
viewed_from = "inside"
[camera]
band_um = [7.5, 13.0]
ifov_mrad = 1.0
signal = { quantity = "apparent-temperature", unit = "K" }
[conditions]
air_c = 20.0
reflected_c = 20.0
distance_m = 2.0
"""
GROUPS = """
[[group]]
id = "hall"
frames = "hall/*.tif"
[[group]]
id = "attic"
conditions = { distance_m = 4.0 }
"""


KNOWN = Known(criteria=(), convections=(), materials={})


def survey(tmp_path, text):
    path = tmp_path / "survey.toml"
    path.write_text(text, "utf-8")
    return path


def load_survey(path, *, ahead=False):
    return load(path, known=KNOWN, ahead=ahead)


def test_one_frame_stands_for_each_group_without_any(tmp_path):
    ahead = load_survey(survey(tmp_path, SURVEY + GROUPS), ahead=True)
    assert [(task.id, task.group) for task in ahead.tasks] == [("hall", "hall"), ("attic", "attic")]
    assert [task.scene["distance"].value for task in ahead.tasks] == [2.0, 4.0]


def test_a_survey_without_groups_and_frames_is_one_frame_to_come(tmp_path):
    assert [task.id for task in load_survey(survey(tmp_path, SURVEY), ahead=True).tasks] == ["frame"]


def test_frames_that_are_listed_stand_for_themselves(tmp_path):
    text = SURVEY + GROUPS + '[[frame]]\nid = "f1"\nfile = "f1.tif"\ngroup = "hall"\n'
    assert [task.id for task in load_survey(survey(tmp_path, text), ahead=True).tasks] == ["f1", "attic"]


def test_a_log_that_is_not_there_yet_is_a_notice_and_what_it_would_bring_is_still_required(tmp_path):
    logged = SURVEY.replace("air_c = 20.0", 'log = "logger.csv"\nair_c = 20.0')
    ahead = load_survey(survey(tmp_path, logged), ahead=True)
    assert any("log" in notice for notice in ahead.notices)
    with pytest.raises(SurveyError, match=r"conditions\.air_c"):
        load_survey(survey(tmp_path, logged.replace("\nair_c = 20.0", "")), ahead=True)


def test_after_the_visit_the_same_file_is_at_fault(tmp_path):
    with pytest.raises(SurveyError, match=r"group\[hall\]\.frames"):
        load_survey(survey(tmp_path, SURVEY + GROUPS))


def test_other_faults_are_not_let_pass(tmp_path):
    with pytest.raises(SurveyError, match="emissivity"):
        load_survey(survey(tmp_path, SURVEY + "[target]\nemissivity = 1.4\n" + GROUPS), ahead=True)
