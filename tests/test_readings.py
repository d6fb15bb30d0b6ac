"""`irsurvey readings`: single spot readings against worked examples, and everything a table may hold."""

from __future__ import annotations

import csv
import io
import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tasks
from hypothesis import given, settings
from hypothesis import strategies as st

from irsurvey import pipeline
from irsurvey.errors import OutputError, SurveyError
from irsurvey.radiometry.planck import band_radiance
from irsurvey.readings import ADDED, BAND, COLUMNS, correct, correct_table

REFERENCE = Path(__file__).parent / "reference" / "worked_examples_public.csv"
TAU_ERROR = {"7.5-13": 0.0025, "8-14": 0.0010, "3-5": 0.0056}
"""The air-path model's largest error against LOWTRAN7 to 200 m, by which the examples were made."""


def examples() -> list[dict[str, str]]:
    lines = [line for line in REFERENCE.read_text(encoding="utf-8").splitlines() if not line.startswith("#")]
    return list(csv.DictReader(lines))


def stated(example: dict[str, str]) -> dict[str, float]:
    """A worked example as a row of readings."""
    low, high = example["band_um"].split("-")
    keys = {
        "apparent_c": "t_app_c",
        "emissivity": "emissivity",
        "reflected_c": "t_refl_c",
        "distance_m": "path_m",
        "air_c": "t_air_c",
        "relative_humidity_percent": "rh_pct",
        "pressure_hpa": "p_hpa",
        "window_transmittance": "win_tau",
        "window_c": "t_win_c",
    }
    return {name: float(example[key]) for name, key in keys.items()} | {
        "band_low_um": float(low),
        "band_high_um": float(high),
    }


def table(folder: Path, text: str, name: str = "in.csv") -> Path:
    path = folder / name
    path.write_bytes(text.encode("utf-8"))
    return path


def rows(path: Path, delimiter: str = ",") -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(path.read_text(encoding="utf-8")), delimiter=delimiter))


def one(folder: Path, header: str, row: str) -> dict[str, str]:
    """The only row of a table of one reading."""
    out = folder / "out.csv"
    correct_table(table(folder, f"{header}\n{row}\n"), out)
    (result,) = rows(out)
    return result


@pytest.mark.parametrize("example", examples(), ids=lambda example: example["id"])
def test_the_worked_examples_come_back_to_their_object_temperature(example: dict[str, str]) -> None:
    """Worked term by term with LOWTRAN7 transmittances; ours may differ by the air-path model's error and no more."""
    result = correct(stated(example))
    assert result.object_c is not None
    assert result.atmosphere_transmittance is not None
    error = TAU_ERROR[example["band_um"]]
    assert result.atmosphere_transmittance == pytest.approx(float(example["tau_at_Tobj"]), abs=error)
    emissivity, tau = float(example["emissivity"]), float(example["tau_at_Tobj"])
    l_object, l_reflected, l_air = (float(example[key]) for key in ("L_obj_bb", "L_refl_bb", "L_air_bb"))
    low, high = (float(edge) * 1e-6 for edge in example["band_um"].split("-"))
    kelvin = float(example["t_obj_c"]) + 273.15
    slope = float(band_radiance(kelvin + 0.5, (low, high)) - band_radiance(kelvin - 0.5, (low, high)))
    per_tau = abs(emissivity * l_object + (1 - emissivity) * l_reflected - l_air) / (tau * emissivity * slope)
    # 0.002 K: apparent temperatures are printed to 7 figures, the run-time table is good to 0.2 mK, ε down to 0.25
    assert result.object_c == pytest.approx(float(example["t_obj_c"]), abs=per_tau * error + 0.002)


def test_the_worked_examples_go_through_a_file(tmp_path: Path) -> None:
    header = [*stated(examples()[0])]
    lines = [",".join(header), *(",".join(f"{stated(row)[name]}" for name in header) for row in examples())]
    summary = correct_table(table(tmp_path, "\n".join(lines)), tmp_path / "out.csv")
    assert (summary.rows, summary.failed, summary.notices) == (len(examples()), (), ())
    for row, example in zip(rows(tmp_path / "out.csv"), examples(), strict=True):
        alone = correct(stated(example)).object_c
        assert float(row["object_c"]) == pytest.approx(alone, abs=0.0005)  # three decimals are written


def test_the_columns_and_defaults_are_those_of_the_interface() -> None:
    defaults = {name: column.default for name, column in (COLUMNS | BAND).items() if column.default == column.default}
    assert defaults == {
        "emissivity": 1.0,
        "distance_m": 0.0,
        "relative_humidity_percent": 50.0,
        "pressure_hpa": 1013.25,
        "window_transmittance": 1.0,
        "window_reflectance": 0.0,
        "band_low_um": 7.5,
        "band_high_um": 14.0,
    }
    temperatures = {"apparent_c", "reflected_c", "air_c", "window_c", "window_ambient_c"}
    assert set(COLUMNS | BAND) == temperatures | set(defaults)
    assert ADDED == ("object_c", "u_object_k", "atmosphere_transmittance", "note")


@settings(max_examples=50, deadline=None)
@given(st.floats(-60, 300))
def test_a_black_body_without_air_or_window_is_what_it_looks_like(celsius: float) -> None:
    result = correct({"apparent_c": celsius, "u_apparent_c": 0.7})
    assert result.object_c == pytest.approx(celsius, abs=1e-9)
    assert result.u_object_k == pytest.approx(0.7, rel=1e-9)
    assert result.atmosphere_transmittance == 1


@settings(max_examples=50, deadline=None)
@given(st.floats(-20, 40), st.floats(0.2, 1), st.floats(0, 200), st.floats(0.5, 1), st.floats(0, 0.5))
def test_where_everything_is_equally_warm_nothing_changes(
    celsius: float, emissivity: float, distance: float, window: float, mirror: float
) -> None:
    """Exact limit: an enclosure at one temperature is a black body.  0.01 K: the per-term air model is not exact."""
    temperatures = dict.fromkeys(("apparent_c", "reflected_c", "air_c", "window_c", "window_ambient_c"), celsius)
    optics = {"emissivity": emissivity, "distance_m": distance, "window_transmittance": window}
    result = correct(temperatures | optics | {"window_reflectance": (1 - window) * mirror})
    assert result.object_c == pytest.approx(celsius, abs=0.01)


def test_uncertainty_is_the_sum_of_squares_of_what_was_stated() -> None:
    """Without air the only terms are those stated: each alone, then together (JCGM 100:2008, eq. 11a)."""
    base = {"apparent_c": 60.0, "emissivity": 0.8, "reflected_c": 20.0}
    spreads = {"u_apparent_c": 1.0, "u_emissivity": 0.02, "u_reflected_c": 2.0}
    exact = dict.fromkeys(spreads, 0.0)
    alone = [correct(base | exact | {name: u}).u_object_k for name, u in spreads.items()]
    together = correct(base | spreads).u_object_k
    assert together == pytest.approx(sum(u**2 for u in alone if u is not None) ** 0.5, rel=1e-9)
    for (name, u), term in zip(spreads.items(), alone, strict=True):
        column = name.removeprefix("u_")
        up, down = (correct(base | {column: base[column] + step}).object_c for step in (u, -u))
        assert up is not None
        assert down is not None
        assert term == pytest.approx(abs(up - down) / 2, rel=1e-6)


def test_the_air_path_model_is_uncertain_too() -> None:
    base = {"apparent_c": 60.0, "distance_m": 50.0, "air_c": 10.0, "u_apparent_c": 0.0}
    result = correct(base)
    assert result.u_object_k is not None
    assert result.u_object_k > 0.1  # 15 % of an absorptance of a few per cent, over 50 K between object and air


DEFAULTS = {
    "apparent_c": 2.0,
    "emissivity": 0.05,
    "reflected_c": 2.0,
    "distance_m": 2.0,
    "air_c": 1.0,
    "relative_humidity_percent": 5.0,
    "pressure_hpa": 5.0,
}
"""Half-widths by default (common practice: camera ±2 °C, ε ±0.05, T_refl ±2 indoors, distance ±10 % of the 20 m below,
T_air ±1, RH ±5 points; judgement: ±5 hPa); a rectangular distribution of half-width a has u = a/√3."""
STATED = {
    "apparent_c": 60.0,
    "emissivity": 0.9,
    "reflected_c": 20.0,
    "distance_m": 20.0,
    "air_c": 15.0,
    "relative_humidity_percent": 60.0,
    "pressure_hpa": 1000.0,
    "band_low_um": 8.0,
    "band_high_um": 14.0,
}


def test_an_uncertainty_nobody_stated_is_the_default_of_a_survey_and_is_named() -> None:
    stated = {f"u_{name}": half_width / 3**0.5 for name, half_width in DEFAULTS.items()}
    silent, told = correct(STATED), correct(STATED | stated)
    assert silent.u_object_k == pytest.approx(told.u_object_k, rel=1e-9)
    assert f"u by default: {', '.join(f'{name} {u / 3**0.5:.2g}' for name, u in DEFAULTS.items())}" in silent.note
    assert "u by default" not in told.note
    hot = correct({"apparent_c": 200.0})  # 2 % of 200 °C are more than 2 °C
    assert hot.u_object_k == pytest.approx(4 / 3**0.5, rel=1e-9)


def test_what_was_not_even_stated_is_less_certain() -> None:
    """Assumed humidity and pressure: ±30 points, ±100 hPa (judgement); a black surface or no distance is exact."""
    row = {"apparent_c": 60.0, "distance_m": 20.0, "air_c": 15.0}
    assert "relative_humidity_percent 17, pressure_hpa 58" in correct(row).note
    assert "relative_humidity_percent 2.9, pressure_hpa 58" in correct(row | {"relative_humidity_percent": 50.0}).note
    assert correct({"apparent_c": 30.0, "u_apparent_c": 0.0}).u_object_k == 0


def test_an_uncertainty_of_zero_is_a_statement() -> None:
    exact = {f"u_{name}": 0.0 for name in DEFAULTS}
    known = correct(STATED | exact)
    assert known.u_object_k is not None
    assert known.u_object_k < 0.5  # that of the air-path model alone
    assert "u_object_k mostly from the air-path model 100%" in known.note


def test_a_reading_is_as_uncertain_as_a_frame_of_it() -> None:
    """The same spot as a reading, and as a uniform frame whose reference area is read: one budget."""
    scene = tasks.scene(
        emissivity=(0.9, 0.02), reflected=(290.15, 1.0), distance=(20.0, 1.0), air=(288.15, 0.5),
        shading=0.0, shading_x=0.0, shading_y=0.0, outline=0.0,
    )  # fmt: skip
    camera = tasks.camera(band=(8e-6, 14e-6), noise=1e-3)
    report, _ = pipeline.analyse(
        tasks.frame(np.full((120, 160), 333.15), seed=None), tasks.task(scene=scene, camera=camera)
    )
    row = {"apparent_c": 60.0, "emissivity": 0.9, "u_emissivity": 0.02, "reflected_c": 17.0, "u_reflected_c": 1.0}
    row |= {"distance_m": 20.0, "u_distance_m": 1.0, "air_c": 15.0, "u_air_c": 0.5, "band_low_um": 8.0}
    row |= {"relative_humidity_percent": 50.0, "u_relative_humidity_percent": 5.0, "u_pressure_hpa": 5.0}
    result = correct(row)  # neither says how good its camera is: the default of ±2 °C counts for both
    assert report.reference is not None
    assert result.object_c == pytest.approx(report.reference.median_c, abs=0.001)  # the frame's table: 1 mK
    assert result.u_object_k == pytest.approx(report.reference.u_c, rel=1e-3)  # the frame's 1 mK of noise


def test_the_largest_terms_are_named_in_their_order() -> None:
    note = correct(STATED | {"u_emissivity": 0.1, "u_apparent_c": 1.0}).note
    assert "u_object_k mostly from emissivity 9" in note
    swapped = correct(STATED | {"u_emissivity": 0.01, "u_apparent_c": 1.0}).note
    assert swapped.index("mostly from apparent_c") < swapped.index("%")


LOW_EMISSIVITY = {"apparent_c": 44.0, "emissivity": 0.3, "reflected_c": 25.0, "band_low_um": 8.0, "band_high_um": 14.0}


def test_monte_carlo_and_first_order_agree_on_an_ordinary_reading() -> None:
    first, drawn = correct(STATED), correct(STATED, "monte-carlo")
    assert drawn.object_c == first.object_c
    assert drawn.u_object_k == pytest.approx(first.u_object_k, rel=0.02)  # 20,000 draws: 3 sd of u are 1.5 %
    assert drawn == correct(STATED, "monte-carlo")
    assert "strongly curved" not in first.note + drawn.note


def test_where_first_order_does_not_do_the_note_says_so() -> None:
    """ε 0.30 ± 0.05: first order is low by 8 % and the distribution skewed (computed for this project)."""
    row = LOW_EMISSIVITY | {"u_emissivity": 0.05, "u_apparent_c": 0.0, "u_reflected_c": 0.0}
    first, drawn = correct(row), correct(row, "monte-carlo")
    assert first.u_object_k is not None
    assert drawn.u_object_k is not None
    assert first.u_object_k / drawn.u_object_k == pytest.approx(0.92, abs=0.02)
    for result in (first, drawn):
        assert "strongly curved: u" in result.note
        assert "by Monte Carlo, 95 % within" in result.note
    low, high = (float(end) for end in re.findall(r"within ([\d.]+)…([\d.]+) °C", first.note)[0])
    # the ends at ε 0.40 and 0.20, two of its u away; 2.5 % are left out at 1.96
    ends = [correct(LOW_EMISSIVITY | {"emissivity": 0.3 + 1.96 * sign * 0.05}).object_c for sign in (1, -1)]
    assert [low, high] == pytest.approx(ends, abs=0.6)  # an end of 20,000 draws: 3 sd are 0.07 u, skewed more above


@pytest.mark.parametrize("uncertainty", ["first-order", "monte-carlo"])
def test_where_what_the_inputs_may_be_has_no_solution_there_is_no_uncertainty(uncertainty: str) -> None:
    row = {"apparent_c": 22.0, "emissivity": 0.1, "reflected_c": 25.0, "u_reflected_c": 8.0}
    result = correct(row, uncertainty)
    assert result.object_c is not None
    assert result.u_object_k is None
    assert "of what the inputs may be has no physical solution" in result.note


def test_the_way_to_propagate_reaches_every_row_of_a_table(tmp_path: Path) -> None:
    text = "apparent_c,emissivity,reflected_c,u_emissivity\n44,0.3,25,0.05\n44,0.9,25,0.02\n"
    for uncertainty in ("first-order", "monte-carlo"):
        correct_table(table(tmp_path, text), tmp_path / "out.csv", uncertainty=uncertainty)
        for row in rows(tmp_path / "out.csv"):
            numbers = {name: float(row[name]) for name in ("apparent_c", "emissivity", "reflected_c", "u_emissivity")}
            assert row["u_object_k"] == f"{correct(numbers, uncertainty).u_object_k:.3f}"


@pytest.mark.parametrize(
    ("changes", "reason"),
    [
        ({"emissivity": 0.0}, "emissivity: expected a number above 0, up to 1, got 0"),
        ({"emissivity": 1.2}, "emissivity: expected a number above 0, up to 1, got 1.2"),
        ({"emissivity": 0.9}, "reflected_c: expected a temperature, as the surface reflects"),
        ({"u_emissivity": 0.02}, "reflected_c"),
        ({"distance_m": -1.0}, "distance_m: expected a distance of 0…100000 m, got -1"),
        ({"distance_m": 5.0}, "air_c: expected a temperature, as there is air in the path"),
        ({"relative_humidity_percent": 101.0}, "relative_humidity_percent: expected 0…100 %, got 101"),
        ({"pressure_hpa": 0.0}, "pressure_hpa"),
        ({"window_transmittance": 0.8}, "window_c"),
        ({"window_transmittance": 0.8, "window_c": 20.0, "window_reflectance": 0.3}, "a sum of 1 or less"),
        ({"window_transmittance": 0.8, "window_c": 20.0, "window_reflectance": 0.1}, "window_ambient_c"),
        ({"band_low_um": 14.0, "band_high_um": 8.0}, "band_low_um: expected less than band_high_um 8"),
        ({"apparent_c": -300.0}, "apparent_c: expected a temperature"),
        ({"u_apparent_c": -0.1}, "u_apparent_c: expected a standard uncertainty of 0 or more"),
    ],
)
def test_a_reading_that_cannot_be_corrected_says_why(changes: dict[str, float], reason: str) -> None:
    result = correct({"apparent_c": 30.0, **changes})
    assert (result.object_c, result.u_object_k, result.atmosphere_transmittance) == (None, None, None)
    assert reason in result.note


def test_a_reading_below_what_reflection_alone_gives_has_no_solution() -> None:
    result = correct({"apparent_c": -10.0, "emissivity": 0.1, "reflected_c": 30.0})
    assert result.object_c is None
    assert "no physical solution" in result.note


def test_shiny_and_delicate_readings_are_marked() -> None:
    """Below ε 0.6 no claim may rest on a temperature (common practice)."""
    shiny = correct({"apparent_c": 30.0, "emissivity": 0.25, "reflected_c": 20.0}).note
    assert "too reflective" in shiny
    assert "1 K in apparent_c is" in shiny
    assert "too reflective" not in correct({"apparent_c": 30.0, "emissivity": 0.6, "reflected_c": 20.0}).note


def test_paths_beyond_the_air_model_are_marked() -> None:
    note = correct({"apparent_c": 30.0, "distance_m": 800.0, "air_c": 20.0}).note
    assert "path of 800 m" in note
    assert "air model" not in correct({"apparent_c": 30.0}).note


def test_what_was_not_stated_is_shown_as_assumed() -> None:
    note = correct({"apparent_c": 30.0, "distance_m": 5.0, "air_c": 20.0}).note
    for assumed in ("emissivity 1", "relative_humidity_percent 50", "pressure_hpa 1013.25", "band_low_um 7.5"):
        assert assumed in note
    assert "nearest band with a model" in note  # 7.5–14 µm is served by a neighbour


def test_an_empty_cell_equals_an_absent_column(tmp_path: Path) -> None:
    full = one(tmp_path, "apparent_c,emissivity,reflected_c,u_emissivity", "30,0.9,20,")
    lean = one(tmp_path, "apparent_c,emissivity,reflected_c", "30,0.9,20")
    assert {name: full[name] for name in ADDED} == {name: lean[name] for name in ADDED}
    assert one(tmp_path, "apparent_c,emissivity", "30, ")["object_c"] == "30.000"


def test_other_columns_pass_through_unchanged(tmp_path: Path) -> None:
    source = table(tmp_path, 'tag,apparent_c,"remark, long",\r\n 007 ,30,"a ""b"", c\nd",x\r\n')
    correct_table(source, tmp_path / "out.csv")
    with (tmp_path / "out.csv").open(encoding="utf-8", newline="") as stream:
        header, row = csv.reader(stream)
    assert header == ["tag", "apparent_c", "remark, long", "", *ADDED]
    assert row[:5] == [" 007 ", "30", 'a "b", c\nd', "x", "30.000"]


def test_a_decimal_comma_in_any_column_is_one(tmp_path: Path) -> None:
    correct_table(table(tmp_path, "apparent_c;emissivity;reflected_c\n30;0,9;20\n"), tmp_path / "out.csv")
    (result,) = rows(tmp_path / "out.csv", ";")
    assert result["object_c"] == one(tmp_path, "apparent_c,emissivity,reflected_c", "30,0.9,20")["object_c"].replace(
        ".", ","
    )


def test_nothing_but_a_file_is_written_to(tmp_path: Path) -> None:
    source = table(tmp_path, "apparent_c\n30\n")
    for out in (tmp_path, Path("/dev/null")):  # /dev/full has a first line without an end
        with pytest.raises(OutputError, match="a folder or a device"):
            correct_table(source, out)


@pytest.mark.parametrize("separator", [";", "\t"])
def test_a_table_with_decimal_commas_stays_one(tmp_path: Path, separator: str) -> None:
    header, row = "apparent_c;emissivity;reflected_c;u_apparent_c;note to self", "30,5;0,90;20;0,5;a,b"
    text = f"\ufeff{header}\r\n{row}\r\n".replace(";", separator)
    correct_table(table(tmp_path, text), tmp_path / "out.csv")
    (result,) = rows(tmp_path / "out.csv", separator)
    plain = one(tmp_path, "apparent_c,emissivity,reflected_c,u_apparent_c", "30.5,0.90,20,0.5")
    assert result["object_c"] == plain["object_c"].replace(".", ",")
    assert result["note to self"] == "a,b"


def test_rows_that_fail_do_not_stop_the_others(tmp_path: Path) -> None:
    text = "apparent_c,emissivity,reflected_c\n30,0.9,20\nwarm,0.9,20\n\n,0.9,20\n30,2,20\n30,0.9,20,7\n31,0.9,20\n"
    summary = correct_table(table(tmp_path, text), tmp_path / "out.csv")
    results = rows(tmp_path / "out.csv")
    assert [bool(row["object_c"]) for row in results] == [True, False, False, False, False, True]
    assert summary.rows == 6
    assert [line.split(":")[0] for line in summary.failed] == [f"in.csv, line {number}" for number in (3, 5, 6, 7)]
    assert 'apparent_c: expected a number, got "warm"' in results[1]["note"]
    assert "more cells than the header has: 7" in results[4]["note"]


@pytest.mark.parametrize("cell", ["nan", "inf", "-inf", "1e999", "0x1F", "30 °C", "=1+1"])
def test_only_finite_numbers_are_numbers(tmp_path: Path, cell: str) -> None:
    result = one(tmp_path, "apparent_c,tag", f"{cell},7")
    assert result["object_c"] == ""
    assert result["note"].startswith("apparent_c: expected")


@pytest.mark.parametrize(
    ("text", "wanted"),
    [
        ("", "a column apparent_c"),
        ("temperature,emissivity\n30,1\n", "a column apparent_c"),
        ("apparent_c,apparent_c\n30,31\n", "one column of this name"),
        ("apparent_c,object_c\n30,31\n", "the result adds it"),
        ('apparent_c\n"30\n', "a CSV file"),
    ],
)
def test_a_table_that_is_none_of_readings_is_refused_whole(tmp_path: Path, text: str, wanted: str) -> None:
    with pytest.raises(SurveyError, match=wanted):
        correct_table(table(tmp_path, text), tmp_path / "out.csv")
    assert not (tmp_path / "out.csv").exists()


def test_a_table_in_another_encoding_or_nowhere_is_refused(tmp_path: Path) -> None:
    (tmp_path / "in.csv").write_bytes("apparent_c,Ort\n30,Küche\n".encode("latin-1"))
    with pytest.raises(SurveyError, match="UTF-8"):
        correct_table(tmp_path / "in.csv", tmp_path / "out.csv")
    with pytest.raises(SurveyError, match="No such file"):
        correct_table(tmp_path / "no.csv", tmp_path / "out.csv")


def test_only_an_earlier_result_is_overwritten(tmp_path: Path) -> None:
    source = table(tmp_path, "apparent_c\n30\n")
    other = table(tmp_path, "time,air_c\n07:00,3\n", "logger.csv")
    for out in (source, other):
        before = out.read_bytes()
        with pytest.raises(OutputError, match="choose another -o"):
            correct_table(source, out)
        assert out.read_bytes() == before
    correct_table(source, tmp_path / "out.csv")
    table(tmp_path, "apparent_c\n31\n")
    correct_table(source, tmp_path / "out.csv")
    assert rows(tmp_path / "out.csv")[0]["object_c"] == "31.000"


def test_a_column_that_looks_misspelt_is_pointed_out(tmp_path: Path) -> None:
    source = table(tmp_path, "apparent_c,emisivity,u_band_low_um,tag\n30,0.9,0.1,x\n")
    misspelt, edge = correct_table(source, tmp_path / "out.csv").notices
    assert "did you mean emissivity?" in misspelt
    assert "not counted" in edge


def test_a_long_table_equals_its_rows(tmp_path: Path) -> None:
    """Vector = scalar: nothing of one row reaches another."""
    readings: list[dict[str, Any]] = [
        {"apparent_c": 20 + k, "emissivity": 0.95 - 0.01 * k, "reflected_c": 15 + k, "u_apparent_c": 0.5}
        for k in range(20)
    ]
    header = list(readings[0])
    text = "\n".join([",".join(header), *(",".join(f"{row[name]:.2f}" for name in header) for row in readings)])
    correct_table(table(tmp_path, text), tmp_path / "out.csv")
    for row, reading in zip(rows(tmp_path / "out.csv"), readings, strict=True):
        alone = correct({name: round(number, 2) for name, number in reading.items()})
        assert row["object_c"] == f"{alone.object_c:.3f}"
        assert row["u_object_k"] == f"{alone.u_object_k:.3f}"
