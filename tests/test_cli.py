"""The command line as people meet it: exit codes, one line per error, tables, and quick help."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import jsonschema
import numpy as np
import pytest
from click.testing import CliRunner, Result

import irsurvey.run
from irsurvey.assess.criteria import criteria
from irsurvey.cli import main
from irsurvey.radiometry.emissivity import materials

SURVEY = """
format = 1
[survey]
title = "Lodge"
kind = "building"
viewed_from = "inside"
[camera]
band_um = [7.5, 13.0]
ifov_mrad = 1.5
[camera.signal]
quantity = "apparent-temperature"
unit = "C"
[conditions]
air_c = 20.0
reflected_c = 20.0
distance_m = 2.0
relative_humidity_percent = 50
indoor_air_c = 20.0
outdoor_air_c = 0.0
[target]
emissivity = 0.95
[[frame]]
file = "sound.npy"
[[frame]]
file = "faint.npy"
[[frame]]
file = "strong.npy"
"""


def wall(depth: float, seed: int) -> np.ndarray[Any, np.dtype[np.float32]]:
    """A wall at 18 °C with 0.05 K noise and a colder rectangle in it."""
    celsius = np.random.default_rng(seed).normal(18.0, 0.05, (60, 80))
    celsius[20:40, 50:70] -= depth
    return celsius.astype(np.float32)


@pytest.fixture
def lodge(tmp_path: Path) -> Path:
    """A survey of three small frames; the last one shows the strongest defect."""
    folder = tmp_path / "lodge"
    folder.mkdir()
    for seed, (name, depth) in enumerate({"sound": 0.0, "faint": 2.0, "strong": 5.0}.items()):
        np.save(folder / f"{name}.npy", wall(depth, seed))
    (folder / "survey.toml").write_text(SURVEY, encoding="utf-8")
    return folder


def irsurvey_(*arguments: object) -> Result:
    return CliRunner().invoke(main, [str(argument) for argument in arguments])


def error_lines(result: Result) -> list[str]:
    assert "Traceback" not in result.output
    return result.stderr.splitlines()


def test_a_run_without_failures_ends_with_0_and_says_where_the_report_is(lodge: Path) -> None:
    result = irsurvey_("run", lodge)
    assert (result.exit_code, error_lines(result)) == (0, [])
    assert f"report: {lodge / 'report' / 'report.html'}" in result.stdout
    assert (lodge / "report" / "report.html").is_file()
    assert json.loads((lodge / "report" / "report.json").read_text(encoding="utf-8"))["format"] == 1


def test_the_summary_lists_every_frame_the_most_urgent_first(lodge: Path) -> None:
    lines = irsurvey_("run", lodge / "survey.toml").stdout.splitlines()
    order = [line.split()[0] for line in lines if line.split() and line.split()[0] in ("sound", "faint", "strong")]
    assert order == ["strong", "faint", "sound"]


def test_a_failed_frame_gets_one_line_and_ends_with_1(lodge: Path, tmp_path: Path) -> None:
    (lodge / "faint.npy").write_bytes(b"\x93NUMPY\x01\x00")
    result = irsurvey_("run", lodge, "-o", tmp_path / "out")
    assert result.exit_code == 1
    (line,) = error_lines(result)
    assert line.startswith("frame faint failed: faint.npy: expected ")
    assert "not inspected: failed" in result.stdout
    frames = json.loads((tmp_path / "out" / "report.json").read_text(encoding="utf-8"))["frames"]
    assert [frame["status"] for frame in frames] == ["analysed", "failed", "analysed"]


def test_all_faults_of_a_survey_get_a_line_each_and_nothing_is_run(lodge: Path) -> None:
    text = SURVEY.replace("emissivity = 0.95", "emisivity = 0.95").replace("distance_m = 2.0", "distance_m = -2.0")
    (lodge / "survey.toml").write_text(text, encoding="utf-8")
    for command in ("run", "check"):
        result = irsurvey_(command, lodge)
        assert result.exit_code == 2
        lines = error_lines(result)
        assert len(lines) == 2
        assert any("emisivity" in line and "emissivity" in line for line in lines)
        assert any("distance_m: expected" in line for line in lines)
    assert not (lodge / "report").exists()


def test_check_lists_what_is_assumed_and_frames_that_cannot_be_read(lodge: Path) -> None:
    sound = irsurvey_("check", lodge)
    assert (sound.exit_code, error_lines(sound)) == (0, [])
    assert "no faults; 3 of 3 frames can be read" in sound.stdout
    assert "assumed" in sound.stdout
    (lodge / "faint.npy").unlink()
    lacking = irsurvey_("check", lodge)
    assert lacking.exit_code == 1
    assert error_lines(lacking)[0].startswith("frame faint cannot be read: faint.npy: expected")
    assert not (lodge / "report").exists()


def test_a_folder_of_somebody_else_is_left_alone(lodge: Path, tmp_path: Path) -> None:
    (tmp_path / "diary").mkdir()
    (tmp_path / "diary" / "today.txt").write_text("mine")
    result = irsurvey_("run", lodge, "-o", tmp_path / "diary")
    assert result.exit_code == 2
    (line,) = error_lines(result)
    assert "choose another -o" in line
    assert [path.name for path in (tmp_path / "diary").iterdir()] == ["today.txt"]


def test_a_link_among_the_folders_of_the_report_gets_one_line_and_nothing_is_run(lodge: Path, tmp_path: Path) -> None:
    assert irsurvey_("run", lodge).exit_code == 0
    (tmp_path / "photographs").mkdir()
    (lodge / "report" / "frames").rename(tmp_path / "kept")
    (lodge / "report" / "frames").symlink_to(tmp_path / "photographs", target_is_directory=True)
    result = irsurvey_("run", lodge)
    assert result.exit_code == 2
    (line,) = error_lines(result)
    assert line.startswith("report/frames: expected a folder of this report, got a link")
    assert list((tmp_path / "photographs").iterdir()) == []


def test_jobs_change_nothing_but_the_time(lodge: Path, tmp_path: Path) -> None:
    assert irsurvey_("run", lodge, "-o", tmp_path / "one").exit_code == 0
    assert irsurvey_("run", lodge, "-o", tmp_path / "two", "--jobs", 2).exit_code == 0
    written = {path.relative_to(tmp_path / "one") for path in (tmp_path / "one").rglob("*") if path.is_file()}
    assert written == {path.relative_to(tmp_path / "two") for path in (tmp_path / "two").rglob("*") if path.is_file()}
    for path in written:
        assert (tmp_path / "one" / path).read_bytes() == (tmp_path / "two" / path).read_bytes()


def test_further_maps_are_written_on_request(lodge: Path) -> None:
    assert irsurvey_("run", lodge, "--maps", "heat-flux, uncertainty").exit_code == 0
    written = {path.name for path in (lodge / "report" / "frames" / "strong").iterdir()}
    assert {"heat_flux.tif", "u_temperature.tif"} <= written


def test_the_way_to_propagate_is_handed_on_and_told(lodge: Path) -> None:
    for chosen in ("first-order", "monte-carlo"):
        assert irsurvey_("run", lodge, "--uncertainty", chosen).exit_code == 0
        frames = json.loads((lodge / "report" / "report.json").read_text(encoding="utf-8"))["frames"]
        assert {frame["uncertainty"] for frame in frames} == {chosen}


def test_a_plan_needs_no_frame_and_writes_nothing(lodge: Path) -> None:
    with_frames = irsurvey_("plan", lodge)
    for frame in lodge.glob("*.npy"):
        frame.unlink()
    result = irsurvey_("plan", lodge)
    assert (result.exit_code, error_lines(result)) == (0, [])
    assert result.stdout == with_frames.stdout
    assert [path.name for path in lodge.iterdir()] == ["survey.toml"]
    for table in ("Temperature differences", "Sizes", "U-values", "What to improve first", "How"):
        assert table in result.stdout
    assert "sound, faint, strong" in result.stdout  # one answer for frames that are alike
    assert "Lens shading" in result.stdout.split("assumed, as the survey does not state it")[1]


def test_a_plan_answers_for_the_contrast_and_size_it_is_asked_for(lodge: Path) -> None:
    result = irsurvey_("plan", lodge, "--contrast-k", 7, "--size-mm", 45)
    assert "7.00\u00a0±" in result.stdout
    (sizes,) = (line for line in result.stdout.splitlines() if "a part of 45 mm up to" in line)
    # 45 mm over three pixels of 1.5 mrad: 10 m
    assert any(line.rstrip().endswith("10.00 m") for line in result.stdout.split(sizes)[1].splitlines())


def test_a_plan_for_a_contrast_below_absolute_zero_is_refused_in_one_line(lodge: Path) -> None:
    result = irsurvey_("plan", lodge, "--contrast-k", "400")  # a wall at 20 °C, 400 K colder
    assert result.exit_code == 2
    (line,) = error_lines(result)
    assert line.startswith("--contrast-k: expected a difference that what is seen can have, got 400")


def test_a_plan_of_a_faulty_survey_tells_its_faults(lodge: Path) -> None:
    (lodge / "survey.toml").write_text(SURVEY.replace("reflected_c = 20.0\n", ""), encoding="utf-8")
    result = irsurvey_("plan", lodge)
    assert result.exit_code == 2
    assert error_lines(result)[0].startswith("conditions.reflected_c: expected a value")


@pytest.mark.parametrize(
    ("arguments", "wanted"),
    [
        (["bogus"], "No such command 'bogus'; see irsurvey --help"),
        (["run"], "Missing argument 'SURVEY'; see irsurvey run --help"),
        (["run", ".", "--jobs", "0"], "'--jobs'"),
        (["run", ".", "--documents", "html,scroll"], "documents: expected some of json, csv, repairs, html"),
        (["run", ".", "--maps", "flux"], "maps: expected some of heat-flux, uncertainty, got flux"),
        (["run", ".", "--uncertainty", "guess"], "'guess' is not one of 'first-order', 'monte-carlo'"),
        (["readings", "in.csv", "-o", "out.csv", "--uncertainty", "guess"], "'guess' is not one of 'first-order'"),
        (["plan"], "Missing argument 'SURVEY'; see irsurvey plan --help"),
        (["plan", "nowhere/survey.toml"], "survey.toml: expected a survey file"),
        (["plan", ".", "--contrast-k", "0"], "'--contrast-k'"),
        (["plan", ".", "--size-mm", "-3"], "'--size-mm'"),
        (["plan", ".", "--size-mm", "nan"], "'--size-mm': nan is not a finite number"),
        (["plan", ".", "--contrast-k", "inf"], "'--contrast-k'"),
        (["run", "nowhere/survey.toml"], "survey.toml: expected a survey file"),
        (["check", "nowhere/survey.toml"], "survey.toml: expected a survey file"),
        (["start", "nowhere"], "nowhere: expected a folder of frames"),
        (["readings", "nowhere.csv", "-o", "out.csv"], "nowhere.csv: expected"),
        (["schema", "plan"], "'plan' is not one of 'survey', 'report'"),
        (["--bogus"], "No such option '--bogus'"),
    ],
)
def test_a_wrong_command_ends_with_2_and_one_line(arguments: list[str], wanted: str) -> None:
    result = irsurvey_(*arguments)
    assert result.exit_code == 2
    (line,) = error_lines(result)
    assert wanted in line


@pytest.mark.parametrize(
    ("error", "line"),
    [
        (RuntimeError("two\nlines"), "irsurvey: RuntimeError: two lines; IRSURVEY_DEBUG=1 shows where it happened"),
        (PermissionError(13, "Permission denied", "a/b"), "a/b: Permission denied; IRSURVEY_DEBUG=1"),
        (MemoryError(), "irsurvey: MemoryError:"),
    ],
)
def test_no_error_whatever_shows_a_traceback(
    lodge: Path, monkeypatch: pytest.MonkeyPatch, error: Exception, line: str
) -> None:
    def fails(*_: object, **__: object) -> None:
        raise error

    monkeypatch.setattr(irsurvey.run, "run", fails)
    monkeypatch.delenv("IRSURVEY_DEBUG", raising=False)
    result = irsurvey_("run", lodge)
    assert result.exit_code == 2
    assert error_lines(result)[0].startswith(line)
    monkeypatch.setenv("IRSURVEY_DEBUG", "1")
    assert irsurvey_("run", lodge).exception is error


def test_stopping_by_hand_ends_with_130_and_says_what_remains(lodge: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def stopped(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(irsurvey.run, "run", stopped)
    result = irsurvey_("run", lodge)
    assert result.exit_code == 130
    assert error_lines(result)[-1] == "stopped: every file written so far is whole, the next run starts anew"


def test_readings_ends_with_1_where_a_row_failed(tmp_path: Path) -> None:
    (tmp_path / "in.csv").write_text("apparent_c,emissivity,reflected_c\n30,0.9,20\n30,0,20\n")
    result = irsurvey_("readings", tmp_path / "in.csv", "-o", tmp_path / "out.csv")
    assert result.exit_code == 1
    assert "1 of 2 readings corrected" in result.stdout
    assert error_lines(result) == ["in.csv, line 3: emissivity: expected a number above 0, up to 1, got 0"]
    (tmp_path / "in.csv").write_text("apparent_c\n30\n")
    assert irsurvey_("readings", tmp_path / "in.csv", "-o", tmp_path / "out.csv").exit_code == 0


def test_readings_propagates_as_it_is_told(tmp_path: Path) -> None:
    (tmp_path / "in.csv").write_text("apparent_c,emissivity,reflected_c,u_emissivity\n44,0.3,25,0.05\n")
    written = {}
    for chosen in ("first-order", "monte-carlo"):
        done = irsurvey_("readings", tmp_path / "in.csv", "-o", tmp_path / "out.csv", "--uncertainty", chosen)
        assert done.exit_code == 0
        written[chosen] = (tmp_path / "out.csv").read_text(encoding="utf-8").splitlines()[1].split(",")
    assert written["first-order"][4] == written["monte-carlo"][4]  # object_c
    assert float(written["first-order"][5]) < float(written["monte-carlo"][5])  # u_object_k, low to first order


def test_start_then_check_leads_to_what_is_missing(lodge: Path) -> None:
    (lodge / "survey.toml").unlink()
    started = irsurvey_("start", lodge, "--known", "0,0=18", "--known", "60,30=18")
    assert (started.exit_code, error_lines(started)) == (0, [])
    assert "3 frames" in started.stdout
    checked = irsurvey_("check", lodge)
    assert checked.exit_code == 2
    assert any("air_c" in line for line in error_lines(checked))
    again = irsurvey_("start", lodge)
    assert again.exit_code == 2
    assert "somebody's work" in error_lines(again)[0]


def test_materials_and_criteria_list_every_entry_with_its_source() -> None:
    listed = irsurvey_("materials").stdout
    assert all(name in listed for name in materials())
    listed = irsurvey_("criteria").stdout
    for criterion in criteria().values():
        assert criterion.name in listed
        assert all(kind.name in listed for kind in criterion.classes)
        assert f"({criterion.mark})" in listed


@pytest.mark.parametrize("which", ["survey", "report"])
def test_schema_prints_a_json_schema(which: str) -> None:
    schema = json.loads(irsurvey_("schema", which).stdout)
    jsonschema.Draft202012Validator.check_schema(schema)
    assert len(schema["properties"]) > 3


def test_every_report_of_a_run_is_valid_under_its_schema(lodge: Path) -> None:
    (lodge / "faint.npy").write_bytes(b"")
    assert irsurvey_("run", lodge).exit_code == 1
    report = json.loads((lodge / "report" / "report.json").read_text(encoding="utf-8"))
    jsonschema.validate(report, json.loads(irsurvey_("schema", "report").stdout))


def test_text_from_a_survey_is_printed_as_it_is(lodge: Path) -> None:
    text = SURVEY.replace('file = "sound.npy"', 'file = "sound.npy"\nlabel = "[red]north[/red] :skull:"')
    (lodge / "survey.toml").write_text(text, encoding="utf-8")
    assert "[red]north[/red] :skull:" in irsurvey_("run", lodge).stdout


def test_what_a_terminal_would_obey_is_not_printed(lodge: Path) -> None:
    text = SURVEY.replace(
        'file = "sound.npy"', 'file = "sound.npy"\nlabel = "a\\u001b[31mb\\u0007"\ngroup = "g\\u001b]0;x"'
    )
    (lodge / "survey.toml").write_text(text + '[[group]]\nid = "g\\u001b]0;x"\n', encoding="utf-8")
    for command in ("check", "run"):
        result = irsurvey_(command, lodge)
        assert result.exit_code == 0
        assert not set("\x1b\x07") & set(result.output)
    assert "a\ufffd[31mb\ufffd" in result.stdout


def test_a_frame_in_which_nothing_can_be_compared_says_so_in_the_summary(lodge: Path) -> None:
    text = SURVEY.replace('file = "sound.npy"', 'file = "sound.npy"\ninspect = { polygon = [[1, 1], [3, 1], [3, 3]] }')
    (lodge / "survey.toml").write_text(text, encoding="utf-8")
    (row,) = (line for line in irsurvey_("run", lodge).stdout.splitlines() if line.split()[:1] == ["sound"])
    assert "nothing compared" in row


def test_letters_a_terminal_lacks_do_not_stop_a_command() -> None:
    environment = os.environ | {"PYTHONIOENCODING": "ascii"}
    command = [sys.executable, "-c", "from irsurvey.cli import main; main(['criteria'])"]
    done = subprocess.run(command, env=environment, capture_output=True, text=True, check=True)
    assert "visible: ? 1 and < 3" in done.stdout


def test_no_command_at_all_shows_the_help() -> None:
    result = irsurvey_()
    assert result.exit_code == 2
    assert "Usage:" in result.stderr


@pytest.mark.parametrize("arguments", [["--help"], ["run", "--help"], ["--version"]])
def test_help_imports_click_and_the_standard_library_only(arguments: list[str]) -> None:
    script = (
        "import sys, irsurvey.cli\n"
        f"try: irsurvey.cli.main({arguments!r})\n"
        "except SystemExit: print(*{name.partition('.')[0] for name in sys.modules}, file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-I", "-c", script], capture_output=True, text=True, check=True)
    loaded = {name for name in done.stderr.split() if not name.startswith("_")}
    started = set(subprocess.run(  # what an interpreter of this environment has loaded before it does anything
        [sys.executable, "-I", "-c", "import sys; print(*{name.partition('.')[0] for name in sys.modules})"],
        capture_output=True, text=True, check=True,
    ).stdout.split())  # fmt: skip
    assert loaded - started - set(sys.stdlib_module_names) == {"irsurvey", "click"}
