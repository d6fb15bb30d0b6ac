"""The byte order mark before the tables: one, only where it is asked for, and nothing else of them changes."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from irsurvey.cli import main
from irsurvey.model import Report
from irsurvey.report import findings_csv, marked_csv, repairs_csv

SURVEY = """
format = 1
[survey]
title = "Lodge"
kind = "building"
[camera]
band_um = [7.5, 13.0]
signal = { quantity = "apparent-temperature", unit = "C" }
[conditions]
air_c = 20.0
reflected_c = 20.0
distance_m = 2.0
[[frame]]
file = "wall.npy"
label = "Süd, Wand"
"""


def test_a_marked_table_is_the_table_behind_one_mark(switch_room: Report, tmp_path: Path) -> None:
    plain = findings_csv.write(switch_room, (), tmp_path).read_bytes()
    repairs = (repairs_csv.write(switch_room, (), tmp_path) or tmp_path).read_bytes()
    for _ in range(2):  # a second time adds no second mark
        marked_csv.write(switch_room, (), tmp_path)
        # RFC 3629, section 6: U+FEFF in UTF-8 is EF BB BF
        assert (tmp_path / "findings.csv").read_bytes() == b"\xef\xbb\xbf" + plain
        assert (tmp_path / "repairs.csv").read_bytes() == b"\xef\xbb\xbf" + repairs
    with (tmp_path / "findings.csv").open(encoding="utf-8-sig", newline="") as stream:
        assert next(csv.reader(stream))[0] == "frame"
    assert marked_csv.is_marked(tmp_path / "findings.csv")


def test_without_tables_there_is_nothing_to_mark(report: Report, tmp_path: Path) -> None:
    assert marked_csv.write(report, (), tmp_path) is None
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(("option", "begins"), [(["--csv-bom"], b"\xef\xbb\xbfframe"), ([], b"frame")])
def test_the_command_marks_tables_where_it_is_asked_to(tmp_path: Path, option: list[str], begins: bytes) -> None:
    celsius = np.random.default_rng(3).normal(18.0, 0.05, (60, 80))
    celsius[20:40, 50:70] -= 4
    np.save(tmp_path / "wall.npy", celsius.astype(np.float32))
    (tmp_path / "survey.toml").write_text(SURVEY, "utf-8")
    done = CliRunner().invoke(main, ["run", str(tmp_path), "-o", str(tmp_path / "out"), *option])
    assert done.exit_code == 0
    assert (tmp_path / "out" / "findings.csv").read_bytes().startswith(begins)
