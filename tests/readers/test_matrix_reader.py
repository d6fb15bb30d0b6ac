"""Text matrices in the dialects that spreadsheets, loggers and numpy.savetxt write."""

from __future__ import annotations

import csv
import io
import itertools

import numpy as np
import pytest

MATRIX = np.round(np.random.default_rng(4).normal(4, 9, (6, 5)), 3)

SEPARATORS = {"comma": ",", "semicolon": ";", "tab": "\t", "blank": " ", "blanks": "   "}
DIALECTS = [  # a comma cannot be both: nobody could tell one from the other
    (separator, decimal) for separator in SEPARATORS for decimal in ".," if (separator, decimal) != ("comma", ",")
]
LINE_ENDS = {"LF": "\n", "CRLF": "\r\n", "CR": "\r"}
BEGINNINGS = {
    "bare": "",
    "comment": "# made by hand\n",
    "titles": "x;y\nTemperature in °C\n",
    "metadata": "Emissivity;0.95\n\n",
}
ENCODINGS = ("utf-8", "utf-8-sig", "utf-16")


@pytest.mark.parametrize("beginning", BEGINNINGS)
@pytest.mark.parametrize("ends_with_separator", [False, True])
@pytest.mark.parametrize(("separator", "decimal"), DIALECTS)
def test_every_dialect_reads_to_the_same_matrix(separator, decimal, ends_with_separator, beginning, tmp_path, frame_of):
    sign = SEPARATORS[separator]
    lines = [sign.join(f"{number:.3f}".replace(".", decimal) for number in row) for row in MATRIX]
    text = BEGINNINGS[beginning] + "".join(line + sign * ends_with_separator + "\n" for line in lines)
    for end, encoding in itertools.product(LINE_ENDS.values(), ENCODINGS):
        (tmp_path / "f.csv").write_bytes(text.replace("\n", end).encode(encoding))
        frame = frame_of(tmp_path / "f.csv")
        assert frame.stored.dtype == np.float64
        np.testing.assert_array_equal(frame.stored, MATRIX)


@pytest.mark.parametrize("form", ["%.18e", "%.3f", "%g", "%+.5E", "%d"])
def test_what_numpy_writes_reads_as_numpy_reads_it(form, tmp_path, frame_of):
    for name, separator in (("f.csv", ","), ("f.tsv", "\t"), ("f.txt", " ")):
        np.savetxt(tmp_path / name, MATRIX, fmt=form, delimiter=separator, header="one\ntwo, three")
        np.testing.assert_array_equal(
            frame_of(tmp_path / name).stored, np.loadtxt(tmp_path / name, delimiter=separator)
        )


def test_blanks_beside_the_separator_do_not_count(tmp_path, frame_of):
    (tmp_path / "f.csv").write_text(" 1.5 , 2.5,  -3\n4,5 ,6 \n")
    np.testing.assert_array_equal(frame_of(tmp_path / "f.csv").stored, [[1.5, 2.5, -3], [4, 5, 6]])


def test_aligned_columns_read(tmp_path, frame_of):
    (tmp_path / "f.txt").write_text("   1.5  22.5\n -10.0   3.0\n")
    np.testing.assert_array_equal(frame_of(tmp_path / "f.txt").stored, [[1.5, 22.5], [-10, 3]])


@pytest.mark.parametrize("separator", [",", ";", "\t"])
def test_quoted_cells_read(separator, tmp_path, frame_of):
    text = io.StringIO()
    csv.writer(text, delimiter=separator, quoting=csv.QUOTE_ALL).writerows(MATRIX.tolist())
    (tmp_path / "f.csv").write_text(text.getvalue())
    np.testing.assert_array_equal(frame_of(tmp_path / "f.csv").stored, MATRIX)


@pytest.mark.parametrize("separator", [",", ";", "\t"])
def test_empty_cells_and_nan_are_pixels_without_data(separator, tmp_path, frame_of):
    rows = [["", "2", "3"], ["4", "", "6"], ["7", "8", ""], ["NaN", "nan", " "]]
    (tmp_path / "f.csv").write_text("\n".join(separator.join(row) for row in rows))
    nan = np.nan
    expected = [[nan, 2, 3], [4, nan, 6], [7, 8, nan], [nan, nan, nan]]
    np.testing.assert_array_equal(frame_of(tmp_path / "f.csv").stored, expected)


def test_a_wholly_empty_row_between_tabs_is_kept(tmp_path, frame_of):
    (tmp_path / "f.tsv").write_text("1\t2\t3\n\t\t\n4\t5\t6\n")
    assert frame_of(tmp_path / "f.tsv").stored.shape == (3, 3)


@pytest.mark.parametrize(
    ("line", "cells"), [("1,2,3,4", 4), ("1,2", 2), ("1,2,3,", 4)], ids=["longer", "shorter", "closed by a separator"]
)
@pytest.mark.parametrize("place", [1, 3, 5])
def test_a_ragged_line_is_named(place, line, cells, tmp_path, fault_of):
    lines = ["1,2,3", "4,5,6", "7,8,9", "10,11,12"]
    lines.insert(place - 1, line)
    (tmp_path / "f.csv").write_text("\n".join(lines))
    fault = fault_of(tmp_path / "f.csv")
    assert "3 cells" in fault.expected
    assert f"{cells} in line {place}" in fault.got


def test_a_file_cut_within_a_row_names_its_last_line(tmp_path, fault_of):
    (tmp_path / "f.csv").write_text("# cut\n1,2,3\n4,5,6\n7,8")
    assert "2 in line 4" in fault_of(tmp_path / "f.csv").got


@pytest.mark.parametrize("cell", ["bad", "1.2.3", "--", "12 7", "0x1F", "21,5°"])
@pytest.mark.parametrize("row", [0, 1, 2])
def test_a_cell_that_is_no_number_is_named_also_in_the_first_row(row, cell, tmp_path, fault_of):
    rows = [["1", "2", "3"], ["4", "5", "6"], ["7", "8", "9"]]
    rows[row][1] = cell
    (tmp_path / "f.csv").write_text("\n".join(";".join(cells) for cells in rows))
    assert f"in line {row + 1}, cell 2" in fault_of(tmp_path / "f.csv").got


def test_thousands_separators_are_not_guessed_at(tmp_path, fault_of):
    (tmp_path / "a.csv").write_text("1.234,5;2\n3;4\n")
    (tmp_path / "b.csv").write_text('"1,234","2"\n"3","4"\n')
    (tmp_path / "c.csv").write_text("21.5;1,234\n3;4\n")
    for name in ("a.csv", "b.csv", "c.csv"):
        assert "line 1" in fault_of(tmp_path / name).got


def test_row_and_column_numbers_are_not_taken_for_temperatures(tmp_path, fault_of):
    lines = ["," + ",".join(map(str, range(5)))] + [f"{i}," + ",".join(map(str, row)) for i, row in enumerate(MATRIX)]
    (tmp_path / "f.csv").write_text("\n".join(lines))
    assert "row and column numbers" in fault_of(tmp_path / "f.csv").got


@pytest.mark.parametrize("text", ["# nothing\n", "\n \n", "one line of prose", "a,b\nc,d\n"])
def test_a_text_without_numbers_is_refused(text, tmp_path, fault_of):
    (tmp_path / "f.csv").write_text(text)
    fault_of(tmp_path / "f.csv")


def test_binary_content_is_refused(tmp_path, fault_of):
    (tmp_path / "f.csv").write_bytes(bytes(range(256)))
    assert "binary" in fault_of(tmp_path / "f.csv").got
