"""CSV as spreadsheets and loggers write it: rows by column name, and a table of frames as [[frame]] entries."""

from __future__ import annotations

import csv
import io
import re
import tomllib
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from types import NoneType
from typing import Any, get_args

from irsurvey.errors import Fault, SurveyError
from irsurvey.survey.faults import field_at, home_of, keys_of, nearest, tables_at


@dataclass(frozen=True, slots=True)
class Sheet:
    """A CSV file: `where` names it in faults, `rows` are (line, cells by column) without empty cells."""

    where: str
    columns: tuple[str, ...]
    rows: tuple[tuple[int, dict[str, str]], ...]
    has_decimal_comma: bool

    def value(self, cell: str) -> Any:
        """What a cell says: a number, anything else TOML can say, a date and time, or the text itself."""
        if self.has_decimal_comma and re.fullmatch(r"[-+]?\d+,\d+([eE][-+]?\d+)?", cell):
            cell = cell.replace(",", ".")
        for read in _READINGS:
            try:
                return read(cell)
            except (ValueError, RecursionError):
                continue
        return cell


def sheet(path: Path, where: str) -> Sheet:
    """A CSV file with a header: comma, semicolon or tab, UTF-8 with or without byte order mark, `#` before comments.

    Numbers may have a decimal comma where the comma does not separate cells.  Raises SurveyError.
    """
    where = f"{where}[{path.name}]"
    try:
        text = path.read_bytes().decode("utf-8-sig")
    except OSError as error:
        raise SurveyError(
            Fault(where, "a readable CSV file", error.strerror or str(error), "check its name")
        ) from error
    except UnicodeDecodeError as error:
        line = error.object[: error.start].count(b"\n") + 1
        raise SurveyError(Fault(f"{where}, line {line}", "text in UTF-8", "another encoding", "save it so")) from error
    header = next((line for line in text.splitlines() if line.strip() and not line.startswith("#")), "")
    separator = max(",;\t", key=header.count)
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)
    try:
        lines = [(reader.line_num, [cell.strip() for cell in cells]) for cells in reader]
    except csv.Error as error:
        fault = Fault(f"{where}, line {reader.line_num}", "cells of a CSV file", str(error), "check its quotes")
        raise SurveyError(fault) from error
    lines = [(line, cells) for line, cells in lines if any(cells) and not cells[0].startswith("#")]
    columns = lines[0][1] if lines else []
    faults = list(_header_faults(columns, where))
    faults += [
        Fault(f"{where}, line {line}", f"{len(columns)} cells", f"{len(cells)}", "every cell needs a column name")
        for line, cells in lines[1:]
        if any(cells[len(columns) :]) or any(cell and not column for column, cell in zip(columns, cells, strict=False))
    ]
    if faults:
        raise SurveyError(*faults)
    rows = tuple((line, {k: v for k, v in zip(columns, cells, strict=False) if v}) for line, cells in lines[1:])
    return Sheet(where, tuple(filter(None, columns)), rows, separator != ",")


def frames(path: Path, where: str) -> tuple[list[dict[str, Any]], list[Fault]]:
    """Each row of a table as a [[frame]] of the survey file, and what is wrong with its columns.

    Columns are named as the keys of a frame, nested ones with dots: `conditions.distance_m`.  Raises SurveyError.
    """
    found = sheet(path, where)
    faults = {column: fault for column in found.columns if (fault := _column_fault(column, found))}
    readings = {
        column: str if _is_text(("frame", *column.split("."))) else found.value
        for column in found.columns
        if column not in faults
    }
    nested = [
        _nested({column: readings[column](cell) for column, cell in cells.items() if column in readings})
        for _, cells in found.rows
    ]
    return nested, list(faults.values())


def _number(cell: str) -> int | float:
    return int(cell) if re.fullmatch(r"[-+]?\d{1,18}", cell) else float(cell)


def _toml(cell: str) -> Any:
    content = tomllib.loads(f"x = {cell}")
    if len(content) != 1:
        raise ValueError(cell)
    return content["x"]


_READINGS: tuple[Callable[[str], Any], ...] = (_number, _toml, datetime.fromisoformat)


def _header_faults(columns: list[str], where: str) -> Iterator[Fault]:
    if not any(columns):
        yield Fault(where, "a line of column names", "nothing", "name the columns as the survey file's keys")
    for column in sorted({column for column in columns if column and columns.count(column) > 1}):
        yield Fault(
            f"{where}.{column}", "each column once", f"{columns.count(column)} of this name", "drop all but one"
        )


def _column_fault(column: str, found: Sheet) -> Fault | None:
    *path, name = column.split(".")
    known = [key for table in tables_at(["frame", *path]) for key in keys_of(table)]
    where = f"{found.where}.{column}"
    if field_at(("frame", *path, name)) is None:
        inner = (*path, home_of(("frame", *path, name)), name)
        remedy = f"name it {'.'.join(inner)}" if field_at(("frame", *inner)) else nearest(name, known)
        return Fault(where, "a key of [[frame]]", f"the unknown key {name}", remedy)
    if any(column.startswith(f"{other}.") for other in found.columns):
        return Fault(where, "a table in one column or in several", "both", "drop one")
    return None


def _is_text(place: tuple[str, ...]) -> bool:
    field = field_at(place)
    return field is not None and all(
        leaf is str or leaf is NoneType or isinstance(leaf, str) for leaf in _leaves(field.annotation)
    )


def _leaves(annotation: Any) -> Iterator[Any]:
    if hasattr(annotation, "__metadata__"):
        yield from _leaves(get_args(annotation)[0])
    elif parts := get_args(annotation):
        for part in parts:
            yield from _leaves(part)
    else:
        yield annotation


def _nested(cells: dict[str, Any]) -> dict[str, Any]:
    nested: dict[str, Any] = {}
    for column, value in cells.items():
        *path, name = column.split(".")
        table = nested
        for step in path:
            table = table.setdefault(step, {})
        table[name] = value
    return nested
