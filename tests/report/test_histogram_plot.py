"""The drawing of how many pixels have which temperature: columns where numpy counts them, lines where numbers say."""

from __future__ import annotations

import re
from dataclasses import replace
from math import log10
from pathlib import Path

import numpy as np
import pytest

from irsurvey.model import Maps, Report
from irsurvey.numbers import Style
from irsurvey.report import frame_files
from irsurvey.report.axes import BOTTOM, LEFT, RIGHT, TOP
from irsurvey.report.histogram_plot import Plot, plot


@pytest.fixture
def drawn(report: Report, wall_maps: Maps, tmp_path: Path) -> Plot:
    frame_files.write(report.frames[0], wall_maps, tmp_path)
    found = plot(report.frames[0], tmp_path)
    assert found
    return found


def columns(path: str) -> np.ndarray:
    """Heights above the foot at the middle of each of the 64 columns of an outline."""
    assert path.startswith(f"M{LEFT} {BOTTOM}")
    steps = [(float(x), float(y)) for x, y in re.findall(r"H([\d.]+)V([\d.]+)", path)]
    middles = LEFT + (np.arange(64) + 0.5) * (RIGHT - LEFT) / 64
    level = [next((y for x, y in reversed(steps[:-1]) if x <= middle), BOTTOM) for middle in middles]
    return BOTTOM - np.array(level)


def temperature_at(drawn: Plot, x: float) -> float:
    """The temperature at a place of the drawing, read off its outermost ticks."""
    first, last = drawn.across[0], drawn.across[-1]
    per_pixel = (float(last.text) - float(first.text)) / (last.at - first.at)
    return float(first.text) + (x - first.at) * per_pixel


def test_columns_are_as_high_as_the_logarithm_of_what_numpy_counts(drawn: Plot, wall_maps: Maps) -> None:
    edges = np.linspace(temperature_at(drawn, LEFT), temperature_at(drawn, RIGHT), 65)
    one, ten = (BOTTOM - tick.at for tick in drawn.up[:2])
    for path, values in (
        (drawn.all_, wall_maps.temperature_c),
        (drawn.found, wall_maps.temperature_c[wall_maps.labels > 0]),
    ):
        counts = np.histogram(values, edges)[0]
        for height, count in zip(columns(path), counts, strict=True):
            if count > 300:  # an edge read off the ticks lies up to 0.01 °C beside, which moves few of so many
                assert height == pytest.approx(one + (ten - one) * log10(count), abs=3.0)
            if count == 0:
                assert height <= one + (ten - one) * log10(30)


def test_ticks_of_pixels_are_powers_of_ten_evenly_spaced(drawn: Plot) -> None:
    assert [tick.text for tick in drawn.up[:4]] == ["1", "10", "100", "1000"]
    steps = np.diff([tick.at for tick in drawn.up])
    assert np.ptp(steps) <= 0.2 + 1e-9  # coordinates are rounded to 0.1
    assert all(TOP <= tick.at <= BOTTOM for tick in drawn.up)


def test_the_reference_and_what_counts_stand_at_their_temperatures(drawn: Plot, report: Report) -> None:
    wall = report.frames[0]
    assert wall.reference
    assert drawn.reference is not None
    assert temperature_at(drawn, drawn.reference) == pytest.approx(wall.reference.median_c, abs=0.01)  # 0.1 of 306 px
    assert [temperature_at(drawn, x) for x in drawn.limits] == pytest.approx([18.55 - 0.35, 18.55 + 0.35], abs=0.01)


def test_in_fahrenheit_only_the_lettering_moves(report: Report, drawn: Plot, tmp_path: Path) -> None:
    us = plot(report.frames[0], tmp_path, style=Style("us", True))
    assert us
    assert (us.all_, us.found, us.reference, us.limits) == (drawn.all_, drawn.found, drawn.reference, drawn.limits)
    assert us.across_unit == "°F"
    for tick in us.across:
        assert float(tick.text.replace(",", ".")) == pytest.approx(1.8 * temperature_at(drawn, tick.at) + 32, abs=0.02)
    assert "°F" in us.words
    assert "0,63" in us.words.replace("\u00a0", " ")  # 0.35 K


@pytest.mark.usefixtures("drawn")
def test_a_frame_without_a_reference_has_no_lines(report: Report, tmp_path: Path) -> None:
    bare = plot(replace(report.frames[0], reference=None), tmp_path)
    assert bare
    assert (bare.reference, bare.limits) == (None, ())
    assert "reference" not in bare.words


def test_nothing_is_drawn_of_nothing(report: Report, wall_maps: Maps, tmp_path: Path) -> None:
    assert plot(report.frames[0], tmp_path) is None  # no maps there
    assert plot(report.frames[2], tmp_path) is None  # a frame that failed
    lost = replace(wall_maps, temperature_c=np.full_like(wall_maps.temperature_c, np.nan))
    frame_files.write(report.frames[0], lost, tmp_path)
    assert plot(report.frames[0], tmp_path) is None


def test_a_map_of_one_value_and_one_pixel_is_drawn(report: Report, wall_maps: Maps, tmp_path: Path) -> None:
    one = np.full_like(wall_maps.temperature_c, np.nan)
    one[3, 4] = 18.5
    frame_files.write(report.frames[0], replace(wall_maps, temperature_c=one), tmp_path)
    drawn = plot(replace(report.frames[0], reference=None), tmp_path)
    assert drawn
    assert (columns(drawn.all_) > 0).sum() == 1
    assert "1 pixels" in drawn.words.replace("\u202f", "")
