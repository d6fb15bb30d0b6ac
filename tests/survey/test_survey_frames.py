"""Frames from globs and tables, and paths that stay in the survey's folder."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from irsurvey.errors import Fault
from irsurvey.model import Survey

Load = Callable[..., Survey]
Faults = Callable[..., tuple[Fault, ...]]

GLOB = '[[group]]\nid = "north"\nframes = "{}"\n'


def globbed(load_text: Load, minimal: str, pattern: str, *files: str) -> list[str]:
    survey = load_text(minimal + GLOB.format(pattern), dict.fromkeys(files, ""))
    return [task.file for task in survey.tasks if task.group == "north"]


def test_a_glob_is_sorted_and_matches_what_it_says(minimal: str, load_text: Load) -> None:
    files = ("n/b.tif", "n/a.tif", "n/a10.tif", "n/a9.tif", "n/c.npy", "n/deep/d.tif", "n/.a.tif", "s/a.tif")
    assert globbed(load_text, minimal, "n/*.tif", *files) == ["n/a.tif", "n/a10.tif", "n/a9.tif", "n/b.tif"]
    assert globbed(load_text, minimal, "n/*", *files) == ["n/a.tif", "n/a10.tif", "n/a9.tif", "n/b.tif", "n/c.npy"]
    assert globbed(load_text, minimal, "n/**/*.tif", *files)[-1] == "n/deep/d.tif"
    assert globbed(load_text, minimal, "n/.a.tif", *files, "n/.a.tif") == ["n/.a.tif"]


def test_a_glob_passes_over_what_a_run_wrote(minimal: str, load_text: Load) -> None:
    files = ("n/a.tif", "report/made-by-irsurvey.txt", "report/frames/a/temperature.tif")
    assert globbed(load_text, minimal, "**/*.tif", *files) == ["n/a.tif"]


def test_marks_of_a_globbed_frame_are_given_by_its_file_or_its_id(minimal: str, load_text: Load) -> None:
    text = (
        minimal
        + '[[frame]]\nid = "door"\nfile = "./n/a.tif"\nlabel = "by file"\n'
        + '[[frame]]\nid = "b"\nlabel = "by id"\n'
        + '[[frame]]\nid = "page1"\nfile = "n/c.tif"\npage = 1\n'
        + '[[frame]]\nid = "page2"\nfile = "n/c.tif"\npage = 2\ngroup = "south"\n'
        + GLOB.format("n/*.tif")
        + '[[group]]\nid = "south"\n'
    )
    survey = load_text(text, {"n/a.tif": "", "n/b.tif": "", "n/c.tif": "", "n/d.tif": ""})
    assert [(task.id, task.file, task.label, task.group) for task in survey.tasks] == [
        ("F01", "f01.tif", "", None),
        ("door", "n/a.tif", "by file", "north"),
        ("b", "n/b.tif", "by id", "north"),
        ("page1", "n/c.tif", "", "north"),
        ("page2", "n/c.tif", "", "south"),
        ("d", "n/d.tif", "", "north"),
    ]


def test_two_globs_that_find_one_file_are_a_fault(minimal: str, faults_of: Faults) -> None:
    text = minimal + GLOB.format("n/*.tif") + GLOB.format("n/*").replace("north", "south")
    (fault,) = faults_of(text, {"n/a.tif": ""})
    assert (fault.where, fault.got) == ("frame[a].id", "2 with this one: n/a.tif, n/a.tif")


def test_a_globbed_file_whose_name_is_no_id_is_a_fault_that_says_what_to_do(minimal: str, faults_of: Faults) -> None:
    (fault,) = faults_of(minimal + GLOB.format("n/*"), {"n/IR 001 (2).tif": ""})
    assert fault.where == "frame[IR 001 (2)].id"
    assert "[[frame]]" in fault.remedy


TOML_FRAMES = """
[[frame]]
id = "A1"
file = "a/f1.tif"
label = "Wall, \\"north\\""
notes = "2.50"
taken = 2026-01-18T07:12:00
group = "g"
conditions = { distance_m = 3.5, reflected_c = -4, convection = "churchill-chu" }
target = { emissivity = 0.9 }
reference = { polygon = [[40, 40], [160, 40], [160, 440]] }
page = 2
[[frame]]
file = "a/f2.tif"
reference = "automatic"
window = { transmittance = 0.75, temperature_c = 30.0 }
shape = [480, 640]
surface = [{ name = "p", polygon = [[0, 0], [1, 0], [1, 1]], emissivity = 0.5 }]
known_length = { from = [1, 2], to = [3, 4], metres = 0.9 }
"""
COLUMNS = [
    "id",
    "file",
    "label",
    "notes",
    "taken",
    "group",
    "conditions.distance_m",
    "conditions.reflected_c",
    "conditions.convection",
    "target.emissivity",
    "reference.polygon",
    "page",
    "window.transmittance",
    "window.temperature_c",
    "shape",
    "surface",
    "known_length.from",
    "known_length.to",
    "known_length.metres",
]
ROWS = (
    {
        "id": "A1",
        "file": "a/f1.tif",
        "label": 'Wall, "north"',
        "notes": "2.50",
        "taken": "2026-01-18 07:12",
        "group": "g",
        "conditions.distance_m": "3.5",
        "conditions.reflected_c": "-4",
        "conditions.convection": "churchill-chu",
        "target.emissivity": ".9",
        "reference.polygon": "[[40, 40], [160, 40], [160, 440]]",
        "page": "2",
    },
    {
        "file": "a/f2.tif",
        "window.transmittance": "0.75",
        "window.temperature_c": "30",
        "shape": "[480, 640]",
        "surface": '[{ name = "p", polygon = [[0, 0], [1, 0], [1, 1]], emissivity = 0.5 }]',
        "known_length.from": "[1, 2]",
        "known_length.to": "[3, 4]",
        "known_length.metres": "0.9",
    },
)


def table(separator: str, end: str = "\n") -> str:
    def cell(text: str) -> str:
        return '"' + text.replace('"', '""') + '"' if any(mark in text for mark in '",;\t ') else text

    lines = [COLUMNS, *([row.get(column, "") for column in COLUMNS] for row in ROWS)]
    return "".join(separator.join(map(cell, line)) + end for line in lines)


@pytest.mark.parametrize("where", ["top", "survey"])
@pytest.mark.parametrize(
    "text",
    [
        table(","),
        table(";"),
        table("\t"),
        table(",", "\r\n"),
        "\ufeff" + table(","),
        "# made on site\n\n" + table(","),
        table(";").replace("3.5", "3,5"),
        table(",").replace("\n", ",,\n"),
    ],
    ids=["comma", "semicolon", "tab", "CRLF", "BOM", "comment", "decimal comma", "trailing separators"],
)
def test_a_table_of_frames_is_as_good_as_frames_in_the_file(
    text: str, where: str, minimal: str, load_text: Load
) -> None:
    base = minimal + '[[group]]\nid = "g"\n'
    named = 'frame_table = "t.csv"\n'
    by_table = named + base if where == "top" else base.replace("[survey]\n", "[survey]\n" + named)
    from_table = load_text(by_table, {"t.csv": text})
    from_toml = load_text(base + TOML_FRAMES)
    assert len(from_toml.tasks) == 3
    assert from_table == replace(from_toml, as_read=from_table.as_read)


@pytest.mark.parametrize(
    ("text", "where", "expected"),
    [
        ("file,distance_m\na.tif,3\n", "frame_table[t.csv].distance_m", "a key of [[frame]]"),
        ("file,conditions.distnace_m\na.tif,3\n", "frame_table[t.csv].conditions.distnace_m", "a key of [[frame]]"),
        ("file,file\na.tif,b.tif\n", "frame_table[t.csv].file", "each column once"),
        ("file,window,window.transmittance\na.tif,{},0.5\n", "frame_table[t.csv].window.transmittance", None),
        ("file,id\na.tif,a,b\n", "frame_table[t.csv], line 2", "2 cells"),
        ("file,\na.tif,b\n", "frame_table[t.csv], line 2", "2 cells"),
        ('file,id\na.tif,"b\n', "frame_table[t.csv], line 2", "cells of a CSV file"),
        ("", "frame_table[t.csv]", "a line of column names"),
        ("file,conditions.distance_m\na.tif,far\n", "frame[a].conditions.distance_m", "a number"),
        ("file,target.emissivity\na.tif,1.5\n", "frame[a].target.emissivity", "a number above 0 and at most 1"),
        ("file,taken\na.tif,18.1.2026\n", "frame[a].taken", None),
        ("id\nF02\n", "frame[F02].file", "the frame's raw file"),
    ],
)
def test_a_wrong_table_is_a_fault_at_its_column_line_or_frame(
    text: str, where: str, expected: str | None, minimal: str, faults_of: Faults
) -> None:
    fault = faults_of('frame_table = "t.csv"\n' + minimal, {"t.csv": text})[0]
    assert fault.where == where
    assert expected in (None, fault.expected)


def test_a_column_of_a_nested_key_is_told_its_full_name(minimal: str, faults_of: Faults) -> None:
    text = 'frame_table = "t.csv"\n' + minimal
    (fault,) = faults_of(text, {"t.csv": "file,emissivity\na.tif,0.3\n"})
    assert fault.remedy == "name it target.emissivity"
    (fault,) = faults_of(text, {"t.csv": "file,band_um\na.tif,3\n"})  # of a camera, which no frame describes
    assert fault.remedy.startswith("did you mean")


def test_a_table_that_is_missing_or_in_another_encoding_is_a_fault(
    minimal: str, faults_of: Faults, folder: Path
) -> None:
    text = 'frame_table = "t.csv"\n' + minimal
    assert [fault.where for fault in faults_of(text)] == ["frame_table[t.csv]"]
    (folder / "t.csv").write_bytes("file,label\na.tif,Wände\n".encode("latin-1"))
    assert [fault.where for fault in faults_of(text)] == ["frame_table[t.csv], line 2"]
    assert [fault.where for fault in faults_of(text.replace("t.csv", "../t.csv"))] == ["frame_table"]


@pytest.mark.parametrize("link", ["file", "folder"])
def test_a_link_out_of_the_folder_is_a_fault(
    link: str, minimal: str, faults_of: Faults, folder: Path, tmp_path: Path
) -> None:
    (tmp_path / "secret").mkdir()
    (tmp_path / "secret" / "b.tif").write_bytes(b"")
    (folder / "in").mkdir()
    if link == "file":
        (folder / "in" / "b.tif").symlink_to(tmp_path / "secret" / "b.tif")
    else:
        (folder / "in").rmdir()
        (folder / "in").symlink_to(tmp_path / "secret")
    frame = '[[frame]]\nid = "F02"\nfile = "in/b.tif"\nphoto = "in/b.tif"\n'
    assert {fault.where for fault in faults_of(minimal + frame)} == {"frame[F02].file"}
    assert {fault.where for fault in faults_of(minimal + GLOB.format("in/*.tif"))} == {"group[north].frames"}
    assert {fault.where for fault in faults_of(minimal + 'photo = "in/b.tif"\n')} == {"frame[F01].photo"}
    log = minimal.replace("air_c", 'log = "in/b.tif"\nair_c')
    assert {fault.where for fault in faults_of(log)} == {"conditions.log"}
    assert {fault.where for fault in faults_of('frame_table = "in/b.tif"\n' + minimal)} == {"frame_table"}


def test_links_that_stay_in_the_folder_and_loops_of_links(
    minimal: str, load_text: Load, faults_of: Faults, folder: Path
) -> None:
    (folder / "real").mkdir()
    (folder / "real" / "b.tif").write_bytes(b"")
    (folder / "also").symlink_to(folder / "real")
    frame = '[[frame]]\nid = "F02"\nfile = "{}"\n'
    assert load_text(minimal + frame.format("also/b.tif")).tasks[1].file == "also/b.tif"
    (folder / "loop").symlink_to(folder / "loop")
    assert {fault.where for fault in faults_of(minimal + frame.format("loop/b.tif"))} == {"frame[F02].file"}


@pytest.mark.parametrize("written", ["frames\\\\f.tif", "./frames/f.tif", "frames//f.tif", "frames/x/../f.tif"])
def test_a_path_inside_the_folder_is_kept_with_forward_slashes(written: str, minimal: str, load_text: Load) -> None:
    task = load_text(minimal.replace("f01.tif", written)).tasks[0]
    assert "\\" not in task.file
    assert Path(task.path).resolve().parts[-2:] == ("frames", "f.tif")
