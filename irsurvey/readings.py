"""Single spot readings from a table: each corrected to the object's temperature, with its uncertainty."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from functools import partial
from math import inf, isnan, nan, nextafter
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from irsurvey.analysis.correction import air_path
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.errors import Fault, OutputError, SurveyError
from irsurvey.files import write_text
from irsurvey.model import Camera, Quantity, Scene, Signal
from irsurvey.radiometry.atmosphere import absorptance_u, fitted_band, transmittance, validity_notes
from irsurvey.radiometry.measurement import amplification, object_temperature
from irsurvey.survey.defaults import defaults
from irsurvey.uncertainty import Budget, Drawn, differ, monte_carlo, propagate

ADDED = ("object_c", "u_object_k", "atmosphere_transmittance", "note")

REFLECTIVE = 0.6
"""Below this emissivity a temperature carries no claim (common practice)."""
DELICATE = 3.0
"""From this many kelvin of object temperature per kelvin of apparent temperature on, the note warns (judgement)."""
FIRST_ORDER, DRAWN = "first-order", "monte-carlo"
_CURVED_U, _CURVED_GAIN = 0.1, 2.0
"""u(ε)/ε and kelvin per kelvin from which first order is held against draws (computed, ε 0.30 ± 0.05)."""
_SEED = 18434
"""Of the draws: the same table gives the same result."""
_TOLD_SHARE = 0.1
"""Of the variance: smaller terms are not named in the note."""


@dataclass(frozen=True, slots=True)
class Column:
    """A column: its name in the Scene, what it must be, its closed range, its default; SI = scale·value + offset."""

    name: str
    expected: str
    low: float
    high: float
    default: float = nan
    scale: float = 1.0
    offset: float = 0.0

    def si(self, value: float) -> float:
        """The value in SI units."""
        return self.scale * value + self.offset


_SEEN = ("a temperature of -120…1500 °C", -120.0, 1500.0, nan, 1.0, ZERO_CELSIUS)
_AIR = ("an air temperature of -45…60 °C", -45.0, 60.0, nan, 1.0, ZERO_CELSIUS)
_ABOVE_ZERO = nextafter(0.0, 1.0)  # a closed range that leaves out zero
COLUMNS = {
    "apparent_c": Column("apparent", *_SEEN),
    "emissivity": Column("emissivity", "a number above 0, up to 1", _ABOVE_ZERO, 1.0, 1.0),
    "reflected_c": Column("reflected", *_SEEN),
    "distance_m": Column("distance", "a distance of 0…100000 m", 0.0, 1e5, 0.0),
    "air_c": Column("air", *_AIR),
    "relative_humidity_percent": Column("relative_humidity", "0…100 %", 0.0, 100.0, 50.0, 0.01),
    "pressure_hpa": Column("pressure", "a pressure above 0 hPa", _ABOVE_ZERO, inf, 1013.25, 100.0),
    "window_transmittance": Column("window_transmittance", "a number above 0, up to 1", _ABOVE_ZERO, 1.0, 1.0),
    "window_reflectance": Column("window_reflectance", "a number from 0, below 1", 0.0, 1.0, 0.0),
    "window_c": Column("window_temperature", *_SEEN),
    "window_ambient_c": Column("window_ambient", *_SEEN),
}
BAND = {
    "band_low_um": Column("band_low", "a wavelength of 1…30 µm", 1.0, 30.0, 7.5, 1e-6),
    "band_high_um": Column("band_high", "a wavelength of 1…30 µm", 1.0, 30.0, 14.0, 1e-6),
}
_DEFAULT_U = {
    "emissivity": "emissivity",
    "reflected_c": "reflected_k",
    "distance_m": "distance_fraction",
    "air_c": "air_k",
    "relative_humidity_percent": "relative_humidity_percent",
    "pressure_hpa": "pressure_hpa",
    "window_transmittance": "window_transmittance",
    "window_reflectance": "window_reflectance",
    "window_c": "window_k",
    "window_ambient_c": "window_ambient_k",
}
"""Column → its entry in the defaults that count for surveys too."""
_EXACT = {"emissivity": 1.0, "distance_m": 0.0, "window_transmittance": 1.0, "window_reflectance": 0.0}
"""Values that say: there is no such thing."""
_CAMERA = Camera("", (7.5e-6, 14e-6), Signal("apparent-temperature"))
"""Its accuracy is that of a camera of which nothing is stated."""
_TERMS = {column.name: name for name, column in COLUMNS.items()} | {"atmosphere": "the air-path model"}


@dataclass(frozen=True, slots=True)
class Corrected:
    """One reading; `object_c` None: it cannot be corrected, and `note` says why."""

    object_c: float | None
    u_object_k: float | None
    atmosphere_transmittance: float | None
    note: str


@dataclass(frozen=True, slots=True)
class Summary:
    """What became of a table: its rows, a line for each that failed, and what to know about its columns."""

    rows: int
    failed: tuple[str, ...]
    notices: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class _Table:
    header: list[str]
    separator: str
    decimal_comma: bool
    rows: list[tuple[int, list[str]]]  # (line in the file, cells)


def correct(stated: Mapping[str, float], uncertainty: str = FIRST_ORDER) -> Corrected:
    """The object temperature of one reading.

    `stated` maps names of `COLUMNS` and `BAND`, and `u_<name>` for standard uncertainties, to numbers in the
    unit the name ends in; what is absent takes its default, uncertainties those of a survey that states none.
    `uncertainty` is "first-order" or "monte-carlo".  `u_object_k` is None where none exists.
    """
    value = {name: stated.get(name, column.default) for name, column in (COLUMNS | BAND).items()}
    u = {name: stated.get(f"u_{name}", 0.0) for name in COLUMNS}
    fault = next(_faults(value, u), None)
    if fault is not None:
        return Corrected(None, None, None, str(fault))
    band = (BAND["band_low_um"].si(value["band_low_um"]), BAND["band_high_um"].si(value["band_high_um"]))
    by_default = _by_default(stated, value, u)
    u |= by_default
    scene, model = _scene(value, u, by_default, band), partial(_results, band=band)
    budget = propagate(model, scene)
    t_object, tau, gain = (float(result) for result in budget.values)
    if isnan(t_object):
        return Corrected(None, None, None, "no physical solution: reflection, air and window alone exceed the reading")
    is_curved = gain > _CURVED_GAIN or u["emissivity"] > _CURVED_U * value["emissivity"]
    drawn = monte_carlo(model, scene, seed=_SEED) if uncertainty == DRAWN or is_curved else None
    is_drawn = drawn is not None and (uncertainty == DRAWN or isnan(drawn.u[0]))  # what does not exist is not claimed
    u_object = float(drawn.u[0] if drawn is not None and is_drawn else budget.u[0])
    notes = [*_notes(stated, value, band), *_notes_on_u(budget, drawn, by_default)]
    if gain >= DELICATE:
        notes.append(f"1 K in apparent_c is {gain:.1f} K in object_c")
    return Corrected(t_object - ZERO_CELSIUS, None if isnan(u_object) else u_object, tau, "; ".join(notes))


def correct_table(source: Path, out: Path, *, uncertainty: str = FIRST_ORDER) -> Summary:
    """Correct every row of a CSV file and write it, with the columns of `ADDED`, to `out`.

    Separator (comma, semicolon or tab) and decimal comma follow the file.  Raises SurveyError where the
    table as a whole cannot be used, OutputError rather than overwrite anything but an earlier result.
    """
    table = _read(source)
    if out.exists() and (not out.is_file() or out.samefile(source) or not _is_result(out)):
        got = "another file" if out.is_file() else "a folder or a device"
        raise OutputError(Fault(str(out), "a new file, or an earlier result of readings", got, "choose another -o"))
    text = io.StringIO()
    writer = csv.writer(text, delimiter=table.separator, lineterminator="\n")
    writer.writerow([*table.header, *ADDED])
    failed = []
    for line, cells in table.rows:
        result = _correct_row(cells, table, uncertainty)
        if result.object_c is None:
            failed.append(f"{source.name}, line {line}: {result.note}")
        numbers = [
            _cell(result.object_c, 3),
            _cell(result.u_object_k, 3),
            _cell(result.atmosphere_transmittance, 5),
        ]
        if table.decimal_comma:
            numbers = [number.replace(".", ",") for number in numbers]
        padding = [""] * (len(table.header) - len(cells))
        writer.writerow([*cells[: len(table.header)], *padding, *numbers, result.note])
    write_text(out, text.getvalue())
    return Summary(len(table.rows), tuple(failed), tuple(_notices(table.header)))


def _faults(value: Mapping[str, float], u: Mapping[str, float]) -> Iterator[Fault]:
    """What keeps a reading from being corrected."""
    for name, column in (COLUMNS | BAND).items():
        if not isnan(value[name]) and not column.low <= value[name] <= column.high:
            yield Fault(name, column.expected, f"{value[name]:g}")
    for name, spread in u.items():
        if not spread >= 0:
            yield Fault(f"u_{name}", "a standard uncertainty of 0 or more", f"{spread:g}")
    if value["window_transmittance"] + value["window_reflectance"] > 1:
        got = f"{value['window_transmittance']:g} and {value['window_reflectance']:g}"
        yield Fault("window_transmittance and window_reflectance", "a sum of 1 or less", got)
    if value["band_low_um"] >= value["band_high_um"]:
        yield Fault("band_low_um", f"less than band_high_um {value['band_high_um']:g}", f"{value['band_low_um']:g}")
    for name, because in _needed(value, u):
        if isnan(value[name]):
            yield Fault(name, f"a temperature, {because}", "an empty cell")


def _needed(value: Mapping[str, float], u: Mapping[str, float]) -> Iterator[tuple[str, str]]:
    """Columns without a default that this reading depends on, and why.  Air is never taken for surroundings."""
    yield "apparent_c", "which is what was read"
    if value["emissivity"] < 1 or u["emissivity"] > 0:
        yield "reflected_c", "as the surface reflects"
    if value["distance_m"] > 0 or u["distance_m"] > 0:
        yield "air_c", "as there is air in the path"
    if _has_window(value, u):
        yield "window_c", "as there is a window"
    if value["window_reflectance"] > 0 or u["window_reflectance"] > 0:
        yield "window_ambient_c", "as the window reflects"


def _has_window(value: Mapping[str, float], u: Mapping[str, float]) -> bool:
    is_clear = value["window_transmittance"] == 1 and value["window_reflectance"] == 0
    return not is_clear or u["window_transmittance"] > 0 or u["window_reflectance"] > 0


def _by_default(stated: Mapping[str, float], value: Mapping[str, float], u: Mapping[str, float]) -> dict[str, float]:
    """Standard uncertainties, in the columns' units, of what this reading depends on and whose own nobody stated."""
    unstated = [name for name in _uses(stated, value, u) if f"u_{name}" not in stated]
    found = {}
    for name in unstated:
        if name == "apparent_c":
            found[name] = max(_CAMERA.accuracy, _CAMERA.accuracy_fraction * abs(value[name])) / 3**0.5
        elif value[name] != _EXACT.get(name):
            key = _DEFAULT_U[name]
            default = (
                defaults("stated")[key] if name in stated else defaults("assumed").get(key, defaults("stated")[key])
            )
            found[name] = default.u * (abs(value[name]) if key.endswith("_fraction") else 1.0)
    return found


def _uses(stated: Mapping[str, float], value: Mapping[str, float], u: Mapping[str, float]) -> Iterator[str]:
    """Columns that this reading depends on."""
    yield "apparent_c"
    yield "emissivity"
    if value["emissivity"] < 1 or u["emissivity"] > 0:
        yield "reflected_c"
    if value["distance_m"] > 0 or u["distance_m"] > 0:
        yield from ("distance_m", "air_c", "relative_humidity_percent", "pressure_hpa")
    if _has_window(value, u):
        yield from (name for name in COLUMNS if name.startswith("window") and name in stated)


def _scene(
    value: Mapping[str, float], u: Mapping[str, float], by_default: Mapping[str, float], band: tuple[float, float]
) -> Scene:
    """The inputs in SI; a temperature that plays no part takes the apparent one, which keeps it finite."""
    has_window, quantities = _has_window(value, u), []
    for name, column in COLUMNS.items():
        if has_window or not name.startswith("window"):
            used = min(max(value["apparent_c"], column.low), column.high) if isnan(value[name]) else value[name]
            low, high = column.si(column.low), column.si(column.high)
            if name == "window_transmittance":
                high = 1 - value["window_reflectance"]
            if name == "window_reflectance":
                high = 1 - value["window_transmittance"]
            spread = column.scale * u[name] if not isnan(value[name]) else 0.0
            shape = "rectangular" if name in by_default else "normal"  # defaults are half-widths
            quantities.append(Quantity(column.name, column.si(used), spread, low=low, high=high, distribution=shape))
    model_u = absorptance_u(band) if value["distance_m"] > 0 else 0.0
    return Scene((*quantities, Quantity("atmosphere", 0.0, model_u, low=-1.0)))


def _results(values: Mapping[str, NDArray[np.float64]], band: tuple[float, float]) -> NDArray[np.float64]:
    """Object temperature [K], transmittance of the air path, and ∂(object)/∂(apparent), shape (n, 3)."""
    path, optics = air_path(values), (values["emissivity"], values["reflected"])
    t_object = object_temperature(values["apparent"], *optics, path, band)
    tau = transmittance(
        t_object,
        distance=path.distance,
        t_air=path.t_air,
        vapour_density=path.vapour_density,
        pressure=path.pressure,
        band=band,
        excess=path.excess,
    )
    return np.concatenate([t_object, tau, amplification(t_object, *optics, path, band)], axis=1)


def _notes(stated: Mapping[str, float], value: Mapping[str, float], band: tuple[float, float]) -> list[str]:
    """What a reader of the result should know: assumptions and limits."""
    uses = _uses(stated, value, {name: stated.get(f"u_{name}", 0.0) for name in COLUMNS})
    assumed = [f"{name} {value[name]:g}" for name in (*uses, *BAND) if name not in stated]
    notes = [f"assumed {', '.join(assumed)}"] if assumed else []
    has_air = value["distance_m"] > 0
    fit, is_exact = fitted_band(band)
    if has_air and not is_exact:
        notes.append(f"air path as for {fit}, the nearest band with a model")
    notes += validity_notes(value["distance_m"], *(COLUMNS[name].si(value[name]) for name in ("air_c", "pressure_hpa")))
    if value["emissivity"] < REFLECTIVE:
        notes.append("too reflective for a claim: tape or paint the spot and read again")
    return notes


def _notes_on_u(budget: Budget, drawn: Drawn | None, by_default: Mapping[str, float]) -> Iterator[str]:
    """Which uncertainties nobody stated, what the result owes most of its own to, and where first order does not do."""
    if by_default:
        yield f"u by default: {', '.join(f'{name} {u:.2g}' for name, u in by_default.items())}"
    terms = [term for term in budget.terms(0) if term.share >= _TOLD_SHARE]
    if terms:
        yield f"u_object_k mostly from {', '.join(f'{_TERMS[term.name]} {term.share:.0%}' for term in terms)}"
    if drawn is not None and isnan(drawn.u[0]):
        yield f"no uncertainty: {drawn.missing[0] / drawn.draws:.0%} of what the inputs may be has no physical solution"
    elif drawn is not None and differ(budget, drawn)[0]:
        low, high = drawn.interval[:, 0] - ZERO_CELSIUS
        yield (
            f"strongly curved: u {budget.u[0]:.2g} K to first order, {drawn.u[0]:.2g} K by Monte Carlo, "
            f"95 % within {low:.1f}…{high:.1f} °C"
        )


def _correct_row(cells: Sequence[str], table: _Table, uncertainty: str) -> Corrected:
    surplus = [cell for cell in cells[len(table.header) :] if cell.strip()]
    if surplus:
        return Corrected(None, None, None, f"more cells than the header has: {', '.join(surplus)}")
    stated = {}
    for name, cell in zip(table.header, cells, strict=False):
        if _is_ours(name) and cell.strip():
            number = _number(cell, table.decimal_comma)
            if isnan(number):
                return Corrected(None, None, None, str(Fault(name.strip(), "a number", f'"{cell.strip()}"')))
            stated[name.strip()] = number
    return correct(stated, uncertainty)


def _number(cell: str, decimal_comma: bool) -> float:
    try:
        return float(cell.replace(",", ".") if decimal_comma else cell)
    except ValueError:
        return nan


def _cell(number: float | None, digits: int) -> str:
    return "" if number is None else f"{number:.{digits}f}"


def _is_ours(name: str) -> bool:
    return name.strip().removeprefix("u_") in COLUMNS or name.strip() in BAND


def _read(source: Path) -> _Table:
    """The table of a CSV file.  Raises SurveyError where it is none, or not one of readings."""
    try:
        text = source.read_text(encoding="utf-8-sig")
        separator = max(",;\t", key=text.partition("\n")[0].count)
        reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)
        rows = [(reader.line_num, cells) for cells in reader if any(cell.strip() for cell in cells)]
    except OSError as error:
        raise SurveyError(Fault(str(source), "a CSV file", error.strerror or str(error))) from error
    except UnicodeDecodeError as error:
        fault = Fault(str(source), "a CSV file in UTF-8", "another encoding", "save it as CSV UTF-8")
        raise SurveyError(fault) from error
    except csv.Error as error:
        raise SurveyError(Fault(str(source), "a CSV file", str(error), "check its quotes")) from error
    header = rows.pop(0)[1] if rows else []
    names = [name.strip() for name in header]
    faults = []
    if "apparent_c" not in names:
        got = ", ".join(names) or "nothing"
        faults.append(Fault(str(source), "a column apparent_c in the first line", got, "name the column so"))
    for name in sorted(set(names)):
        if _is_ours(name) and names.count(name) > 1:
            faults.append(Fault(f"{source}: {name}", "one column of this name", f"{names.count(name)}", "remove one"))
        if name in ADDED:
            faults.append(Fault(f"{source}: {name}", "no column of this name", "one", "rename it: the result adds it"))
    if faults:
        raise SurveyError(*faults)
    ours = [_is_ours(name) for name in names]
    numbers = (cell for _, cells in rows for cell, is_ours in zip(cells, ours, strict=False) if is_ours)
    decimal_comma = separator != "," and any("," in cell for cell in numbers)
    return _Table(header, separator, decimal_comma, rows)


def _is_result(path: Path) -> bool:
    """Whether a file is an earlier result, which may be replaced."""
    with path.open(encoding="utf-8", errors="replace") as stream:
        return stream.readline().rstrip("\n").replace(";", ",").replace("\t", ",").endswith(",".join(ADDED))


def _notices(header: Sequence[str]) -> Iterator[str]:
    """Columns that pass through unused although their name looks like one of ours."""
    known = [*COLUMNS, *(f"u_{name}" for name in COLUMNS), *BAND]
    for name in (name.strip() for name in header):
        if name in (f"u_{edge}" for edge in BAND):
            yield f"{name}: passed through, the uncertainty of a band edge is not counted"
        elif not _is_ours(name) and (near := get_close_matches(name, known, 1, 0.85)):
            yield f"{name}: passed through as a column of yours; did you mean {near[0]}?"
