"""Survey file in, output folder out: what a run promises whatever happens to single frames."""

from __future__ import annotations

import html
import json
import re
import shutil
from pathlib import Path

import jsonschema
import numpy as np
import pytest
import tifffile
from PIL import Image
from samples import HOUSE, PUMP_STATION

from irsurvey import run as runs
from irsurvey.errors import OutputError, SurveyError
from irsurvey.report.json import report_schema
from irsurvey.run import check, run
from irsurvey.survey.places import OUTPUT_MARKER

SURVEY = """
format = 1
[survey]
title = "Two walls"
kind = "building"
viewed_from = "inside"
[camera]
band_um = [7.5, 13.0]
ifov_mrad = 1.0
noise_k = 0.05
signal = { quantity = "apparent-temperature", unit = "K", scale = 0.01 }
[conditions]
air_c = 20.0
reflected_c = 20.0
distance_m = 2.0
[target]
emissivity = 0.95
[[frame]]
id = "one"
file = "one.tif"
reference = { polygon = [[2, 2], [50, 2], [50, 117], [2, 117]] }
[[frame]]
id = "two"
file = "two.tif"
"""


@pytest.fixture
def site(tmp_path):
    """A survey of two frames, one with a cold patch; returns the survey file."""
    t = np.full((120, 160), 29_115.0) + np.random.default_rng(5).normal(0, 5, (120, 160))
    tifffile.imwrite(tmp_path / "two.tif", np.rint(t).astype(np.uint16), compression="zlib")
    t[40:80, 90:130] -= 300
    tifffile.imwrite(tmp_path / "one.tif", np.rint(t).astype(np.uint16), compression="zlib")
    path = tmp_path / "survey.toml"
    path.write_text(SURVEY, "utf-8")
    return path


def contents(folder):
    return {path.relative_to(folder).as_posix(): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def test_a_run_writes_what_it_promises_into_a_folder_beside_the_survey(site):
    run(site)
    out = site.parent / "report"
    names = set(contents(out))
    assert {"report.json", "findings.csv", "report.html", OUTPUT_MARKER} <= names
    for frame in ("one", "two"):
        assert {f"frames/{frame}/{name}" for name in ("temperature.tif", "findings.tif", "annotated.png")} <= names
    assert not [name for name in names if ".part-" in name]


def test_pictures_are_lettered_in_the_units_of_the_survey_wherever_they_are_shown(site):
    site.write_text(SURVEY.replace("[survey]", '[survey]\ndisplay_units = "us"\ndecimal_comma = true'), "utf-8")
    run(site)
    with Image.open(site.parent / "report" / "frames" / "one" / "annotated.png") as picture:
        words = picture.info["Description"]
    # the wall reads about 18 °C = 64 °F, the patch 15 °C = 59 °F
    low, high = (float(end.replace(",", ".")) for end in re.search(r"scale (\S+) to (\S+) °F", words).groups())
    assert 57 < low < 60 < 63 < high < 66
    assert words in html.unescape((site.parent / "report" / "report.html").read_text("utf-8"))


def test_one_corrupt_frame_never_stops_the_others(site):
    (site.parent / "two.tif").write_bytes((site.parent / "two.tif").read_bytes()[:200])
    report = run(site)
    assert [(frame.id, frame.status) for frame in report.frames] == [("one", "analysed"), ("two", "failed")]
    assert "two.tif" in report.frames[1].reason
    assert len(report.frames[0].findings) == 1
    assert "two.tif" in (site.parent / "report" / "report.html").read_text("utf-8")


def test_a_fault_of_our_own_costs_one_frame_and_says_so(site, monkeypatch):
    analyse = runs.pipeline.analyse

    def stumble(frame, task, **options):
        if task.id == "two":
            raise ZeroDivisionError("made up")
        return analyse(frame, task, **options)

    monkeypatch.setattr(runs.pipeline, "analyse", stumble)
    report = run(site)
    assert [frame.status for frame in report.frames] == ["analysed", "failed"]
    assert "please report" in report.frames[1].reason


def test_identical_input_gives_byte_identical_output_also_in_two_processes(site, tmp_path):
    run(site, tmp_path / "once", maps=("heat-flux",))
    run(site, tmp_path / "again", maps=("heat-flux",), jobs=2)
    assert contents(tmp_path / "once") == contents(tmp_path / "again")
    assert "frames/one/heat_flux.tif" in contents(tmp_path / "once")


def test_no_output_names_a_folder_of_this_machine(site):
    run(site)
    for name, data in contents(site.parent / "report").items():
        assert str(site.parent).encode() not in data, name
        assert site.parent.name.encode() not in data, name


@pytest.mark.parametrize("survey", [HOUSE, PUMP_STATION], ids=lambda path: path.parent.name)
def test_reports_of_the_samples_are_valid_under_the_printed_schema(sample_runs, survey):
    _, out = sample_runs[survey.parent.name]
    document = json.loads((out / "report.json").read_text("utf-8"))
    jsonschema.Draft202012Validator(report_schema()).validate(document)
    assert len(document["frames"]) >= (8 if survey == HOUSE else 6)


def test_a_report_with_a_failed_frame_is_valid_under_the_printed_schema(site):
    (site.parent / "two.tif").unlink()
    run(site)
    document = json.loads((site.parent / "report" / "report.json").read_text("utf-8"))
    jsonschema.Draft202012Validator(report_schema()).validate(document)


def test_a_folder_that_belongs_to_something_else_is_left_alone(site, tmp_path):
    foreign = tmp_path / "photographs"
    foreign.mkdir()
    (foreign / "holiday.txt").write_text("mine", "utf-8")
    with pytest.raises(OutputError, match="other files"):
        run(site, foreign)
    assert contents(foreign) == {"holiday.txt": b"mine"}
    with pytest.raises(OutputError, match="a file"):
        run(site, site)  # the survey file itself
    with pytest.raises(OutputError):
        run(site, site.parent)  # the folder of the frames
    assert site.read_text("utf-8") == SURVEY


@pytest.mark.parametrize("link", ["frames", "frames/one", "frames/gone"])
def test_nothing_is_written_or_cleared_through_a_link_to_another_folder(site, tmp_path, link):
    run(site)
    out, elsewhere = site.parent / "report", tmp_path / "elsewhere"
    (elsewhere / "gone").mkdir(parents=True)
    for folder in (elsewhere, elsewhere / "gone"):
        for name in ("temperature.tif", ".part-a.tif"):
            (folder / name).write_bytes(b"mine")
    before = contents(elsewhere)
    shutil.rmtree(out / link, ignore_errors=True)
    (out / link).symlink_to(elsewhere, target_is_directory=True)
    with pytest.raises(OutputError, match=rf"report/{link}: expected a folder of this report, got a link; remove it"):
        run(site)
    assert contents(elsewhere) == before


def test_a_link_in_place_of_a_file_is_replaced_and_what_it_points_to_stays(site, tmp_path):
    run(site)
    mine = tmp_path / "mine.html"
    mine.write_text("mine", "utf-8")
    out = site.parent / "report"
    for name in ("report.html", "report.json", "frames/one/annotated.png", OUTPUT_MARKER):
        (out / name).unlink()
        (out / name).symlink_to(mine)
    run(site)
    assert mine.read_text("utf-8") == "mine"
    for name in ("report.html", "report.json", "frames/one/annotated.png", OUTPUT_MARKER):
        assert not (out / name).is_symlink()
        assert (out / name).read_bytes() != b"mine"


def test_a_slip_in_a_known_temperature_fails_its_frame_alone(site):
    panel = """[[frame.surface]]
    name = "panel"
    polygon = [[100, 2], [130, 2], [130, 30], [100, 30]]
    role = "known-temperature"
    temperature_c = 500
    """
    site.write_text(SURVEY + panel, "utf-8")
    one, two = run(site).frames
    assert (one.status, two.status) == ("analysed", "failed")
    assert "surface panel: temperature_c" in two.reason
    assert "500.0 °C" in two.reason


def test_frames_that_left_the_survey_leave_the_report(site):
    run(site)
    site.write_text(SURVEY.rsplit("[[frame]]", 1)[0], "utf-8")
    run(site)
    assert not (site.parent / "report" / "frames" / "two").exists()
    assert (site.parent / "report" / "frames" / "one" / "temperature.tif").exists()


def test_a_polygon_outside_its_frame_is_a_fault_and_nothing_is_run(site):
    site.write_text(SURVEY.replace("[50, 117]", "[50, 120]"), "utf-8")
    with pytest.raises(SurveyError, match=r"frame\[one\].reference.polygon"):
        run(site)
    assert not (site.parent / "report").exists()
    with pytest.raises(SurveyError, match=r"frame\[one\].reference.polygon"):
        check(site)


@pytest.mark.parametrize("corners", ["[[2.2, 2.2], [2.8, 2.2], [2.8, 2.8]]", "[[2.1, 3.5], [90.0, 3.5], [90.0, 3.6]]"])
def test_a_polygon_around_no_pixel_is_a_fault_and_nothing_is_run(site, corners):
    # it would be measured as nothing: no reference, no component, no word about why
    site.write_text(SURVEY.replace("[[2, 2], [50, 2], [50, 117], [2, 117]]", corners), "utf-8")
    for command in (run, check):
        with pytest.raises(SurveyError, match=r"reference.polygon: expected an outline around at least one pixel"):
            command(site)
    assert not (site.parent / "report").exists()


def test_what_a_killed_run_left_half_written_goes_with_the_next_one(site):
    run(site)
    out = site.parent / "report"
    parts = [out / ".part-a.html", out / "frames" / "one" / ".part-b.tif"]
    for part in parts:
        part.write_bytes(b"half")
    run(site)
    assert not [part for part in parts if part.exists()]


def test_check_tells_what_is_assumed_and_what_cannot_be_read(site):
    (site.parent / "two.tif").write_bytes(b"not a picture")
    checked = check(site)
    assert [frame for frame, _ in checked.unreadable] == ["two"]
    assert any("relative humidity" in notice for notice in checked.notices)
    assert not (site.parent / "report").exists()


def test_a_reflector_that_cannot_be_read_fails_the_frames_it_serves(tmp_path):
    shutil.copytree(HOUSE.parent, tmp_path / "house")
    (tmp_path / "house" / "frames" / "living-foil.tif").write_bytes(b"gone")
    report = run(tmp_path / "house" / "survey.toml", tmp_path / "out")
    status = {frame.id: frame for frame in report.frames}
    assert status["living-foil"].status == "failed"
    assert status["living-north"].status == "failed"
    assert "living-foil" in status["living-north"].reason
    assert status["kitchen-bays"].status == "analysed"


def test_a_frame_seen_through_the_whole_machine_reads_its_wall(site):
    report = run(site)
    # 291.15 K apparent, ε 0.95, surroundings and air at 20 °C, τ ≈ 0.99: (18 − 0.05·20 − 0.01·20)/0.94 ≈ 17.87 °C
    assert report.frames[1].temperature.median_c == pytest.approx(17.87, abs=0.03)


def test_a_full_disk_is_one_clear_message(site, monkeypatch):
    def full(*_, **__):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "write_bytes", full)
    with pytest.raises(OutputError, match="No space left"):
        run(site)
