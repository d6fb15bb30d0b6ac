"""What people read in the units, with the comma and the days that a survey asks for; what machines read stays."""

from __future__ import annotations

import io
import re
from base64 import b64decode
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PIL import Image
from report.pages import Page, section

from irsurvey.model import FrameTask, Maps, Report
from irsurvey.numbers import Style
from irsurvey.report import findings_csv, frame_files, json, picture, pictures, repairs_csv, scale
from irsurvey.report.html import page
from irsurvey.report.inks import LEVELS

ASKED = {"display_units": "us", "decimal_comma": True, "date_format": "%d.%m.%Y"}
Show = Callable[[Report], str]


def asking(report: Report, **keys: object) -> Report:
    return replace(report, survey={**report.survey, "survey": {**report.survey["survey"], **keys}})  # type: ignore[dict-item]


@pytest.fixture
def show(tasks: tuple[FrameTask, ...], wall_maps: Maps, board_maps: Maps, report: Report, tmp_path: Path) -> Show:
    frame_files.write(report.frames[0], wall_maps, tmp_path)
    frame_files.write(report.frames[3], board_maps, tmp_path)
    return lambda shown: page(shown, tasks, tmp_path)


def test_the_numbers_of_a_finding_are_told_in_us_units_with_a_comma(report: Report, show: Show) -> None:
    html = show(asking(report, **ASKED))
    # 2.5341 ± 0.236 K, 15.4312 ± 1.22 °C, 0.4188 ± 0.0426 m², 38.21 ± 8.8 W/m² and 8.505 ± 1.66 W: by 1.8 and 32,
    # 0.3048², 3.154591 W/m² and 0.2930711 W (NIST SP 811, B.8 [M]), U to two digits
    text = Page(html).text
    assert "−4,56 ± 0,42 −5,63 ± 0,51 60,8 ± 2,2 59,8 ± 2,2 4,51 ± 0,46 12,1 ± 2,8 5,7 ± 2,6 29,0 ± 5,7" in text
    for heading in ("Mean ΔT, °F", "Spot extreme, °F", "Area, ft²", "Heat flux, Btu/(h·ft²)", "Excess heat, Btu/h"):
        assert heading in text
    summary = section(html, "summary").text
    assert "ΔT −4,56 ± 0,42 °F over 4,51 ± 0,46 ft²; saturated" not in summary
    assert "colder than its reference, ΔT −4,56 ± 0,42 °F over 4,51 ± 0,46 ft²" in summary
    assert "Mean deviation of 4,5 °F inside at 36 °F between indoor and outdoor air." in text
    assert "A change of −2,3 °F in reflected apparent temperature" in text
    assert "Temperatures and their differences are °F" in text
    assert "Date 18.01.2026" in text
    assert "18.01.2026 07:12 +01:00" in text
    assert "≥ 18 °F 36" not in text  # a condition whose requirement has no unit of its own in any file stays a number
    assert "Distance 8,20 ± 0,33 ft" in text  # 2.5 ± 0.1 m


def test_no_si_temperature_and_no_decimal_point_is_left_anywhere(
    report: Report, switch_room: Report, show: Show
) -> None:
    for shown in (report, switch_room):
        text = Page(show(asking(shown, **ASKED))).text
        text = text.replace("1,8 °F of difference are 1 K", "").replace("irsurvey 0.0.test", "")
        text = re.sub(r"7\.2\.6|1000 W/m²|\d\d\.\d\d\.\d{4}", "", text)
        assert not re.search(r"\d[\s\u00a0](K|°C|m|m²|W/K|m/s|hPa)\b", text)
        assert not re.findall(r"(?<![\d.])\d+\.\d+(?!\w)", text)


@pytest.mark.parametrize("keys", [{"display_units": "us"}, {"decimal_comma": True}, {"date_format": "%d.%m.%y"}, ASKED])
def test_what_machines_read_is_the_same_in_every_style(
    report: Report, switch_room: Report, tasks: tuple[FrameTask, ...], tmp_path: Path, keys: dict[str, object]
) -> None:
    for shown in (report, switch_room):
        for name, writer in (("json", json.write), ("csv", findings_csv.write), ("repairs", repairs_csv.write)):
            plain, asked = (
                writer(one, tasks, tmp_path / folder) for one, folder in ((shown, "si"), (asking(shown, **keys), "us"))
            )
            if plain is None or asked is None:
                assert plain is asked
                continue
            written = [path.read_text("utf-8") for path in (plain, asked)]
            if name == "json":  # that tells what the survey file asked for
                written = [re.sub(r'"survey": \{.*?\n \},', "", text, count=1, flags=re.DOTALL) for text in written]
            assert written[0] == written[1]


def test_the_keys_of_the_style_are_not_shown_as_text_of_the_survey(report: Report, show: Show) -> None:
    text = Page(show(asking(report, **ASKED))).text
    assert "%d" not in text
    assert "Display units" not in text


def test_the_same_page_comes_of_the_same_report_in_a_style_too(report: Report, show: Show) -> None:
    assert show(asking(report, **ASKED)) == show(asking(report, **ASKED))


def opened(shown: pictures.Picture | None) -> Image.Image:
    assert shown
    return Image.open(io.BytesIO(b64decode(shown.uri.partition(",")[2])))


@pytest.mark.parametrize(("name", "unit"), [("annotated.png", "°C"), ("change.png", "K")])
def test_of_a_picture_only_the_scale_and_its_words_change(
    report: Report, wall_maps: Maps, tmp_path: Path, name: str, unit: str
) -> None:
    wall = report.frames[0]
    for folder, style in (("si", Style()), ("us", Style("us", True))):
        frame_files.write(wall, wall_maps, tmp_path / folder, style=style)
    plain, us = (pictures.stored(wall, tmp_path / folder, name) for folder in ("si", "us"))
    one, other = (np.asarray(opened(shown)) for shown in (plain, us))
    width = scale.strip(300, 0.0, 1.0, (False, False)).shape[1]
    assert one.shape == other.shape
    assert (one[:, :-width] == other[:, :-width]).all()
    assert (one[:, -width:] != other[:, -width:]).any()
    assert (one[:, -width : -width + 28] < LEVELS).sum() == (other[:, -width : -width + 28] < LEVELS).sum()  # the bar
    assert opened(plain).getpalette() == opened(us).getpalette()
    assert plain
    assert us
    ends = re.search(rf"scale (\S+) to (\S+) {unit}", plain.words)
    assert ends
    low, high = (float(end.replace("−", "-")) * 1.8 + (32 if unit == "°C" else 0) for end in ends.groups())
    shown = re.search(r"scale (\S+) to (\S+)\s°F", us.words)
    assert shown
    # both are rounded to tenths: 0.05 °F of its own, and 0.09 °F of the tenths of °C
    told = [float(end.replace("−", "-").replace(",", ".")) for end in shown.groups()]
    assert told == pytest.approx([low, high], abs=0.05 + 0.09 + 1e-9)


def test_a_picture_of_somebody_elses_is_shown_as_it_is(report: Report, tmp_path: Path) -> None:
    folder = tmp_path / "frames" / "F01"
    folder.mkdir(parents=True)
    Image.new("RGB", (20, 10), (1, 2, 3)).save(folder / "annotated.png")
    shown = pictures.stored(report.frames[0], tmp_path, "annotated.png")
    assert opened(shown).convert("RGB").getpixel((19, 9)) == (1, 2, 3)


def test_the_scale_is_lettered_in_the_unit_of_the_style() -> None:
    # the same ends given in °F draw the same strip; 10 °C are 50 °F, 20 °C 68 °F
    as_us = scale.strip(300, 10.0, 20.0, (True, False), style=Style("us"))
    drawn = scale.strip(300, 50.0, 68.0, (True, False), unit="°F")
    assert (as_us == drawn).all()
    assert (scale.strip(300, 10.0, 20.0, (True, False)) != drawn).any()


def test_names_in_the_words_of_a_picture_are_left_alone(report: Report, wall_maps: Maps) -> None:
    board = report.frames[3]
    named = replace(report.frames[0], components=(replace(board.components[0], name="busbar 20 K"),), findings=())
    drawn = picture.annotated(named, wall_maps, style=Style("us"))
    assert "busbar 20 K" in drawn.info["Description"]
    assert "°F (cividis)" in drawn.info["Description"]
