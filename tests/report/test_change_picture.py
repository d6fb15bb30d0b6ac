"""The picture of what pressure changed: nought is the middle, both ends are alike, changes are outlined."""

from __future__ import annotations

from dataclasses import replace

import matplotlib
import numpy as np
import pytest

from irsurvey.model import FrameReport, Maps, Report
from irsurvey.report.change_picture import COLORMAP, LEAST_SPAN_K, changed, display_end
from irsurvey.report.inks import DARK, LEVELS, LIGHT, UNMEASURABLE, palette


@pytest.fixture
def wall(report: Report) -> FrameReport:
    return report.frames[0]


@pytest.fixture
def change(wall_maps: Maps) -> np.ndarray:
    assert wall_maps.change is not None
    return wall_maps.change


def test_no_change_is_the_middle_of_a_diverging_scale(wall: FrameReport) -> None:
    still = np.zeros((240, 320), np.float32)
    picture = np.asarray(changed(replace(wall, pair=None), still))
    assert set(np.unique(picture[:480, :640])) == {(LEVELS - 1) // 2}
    colours = np.frombuffer(palette(COLORMAP), np.uint8).reshape(-1, 3)
    expected = matplotlib.colormaps[COLORMAP](np.linspace(0, 1, LEVELS))[:, :3] * 255
    np.testing.assert_allclose(colours[:LEVELS], expected, rtol=0, atol=0.5)  # a colour is stored in whole steps


def test_colder_and_warmer_by_as_much_are_as_far_from_the_middle(wall: FrameReport) -> None:
    both = np.zeros((240, 320), np.float32)
    both[:60], both[180:] = -1.5, 1.5
    picture = np.asarray(changed(replace(wall, pair=None), both)).astype(int)
    assert picture[10, 10] + picture[470, 10] == LEVELS - 1


def test_the_scale_holds_the_change_and_shows_noise_small(change: np.ndarray) -> None:
    assert display_end(change) == pytest.approx(1.7, abs=0.11)  # 1.6 K with noise of 0.05 K, rounded up to 0.1 K
    assert display_end(np.full((9, 9), 0.05, np.float32)) == LEAST_SPAN_K
    assert display_end(np.full((9, 9), np.nan, np.float32)) == LEAST_SPAN_K


def test_changes_are_outlined_and_what_one_frame_alone_saw_is_hatched(wall: FrameReport, change: np.ndarray) -> None:
    picture = np.asarray(changed(wall, change))
    x = 2 * 250 + 1  # left side of the first change: pixel 250, each drawn as two, its centre rounded to even
    side = picture[2 * 205 : 2 * 235, x - 2 : x + 2]
    assert (side == LIGHT).sum(axis=1).tolist() == [1] * len(side)
    assert ((side == DARK).sum(axis=1) >= 1).all()
    assert set(np.unique(picture[:480, :8])) == {UNMEASURABLE, (LIGHT + DARK) // 2}


def test_the_picture_of_changes_says_in_words_what_it_shows(wall: FrameReport, change: np.ndarray) -> None:
    end = display_end(change)
    assert changed(wall, change).info["Description"] == (
        f"Change of surface temperature from frame F02 to frame F01, colour scale −{end:.1f} to {end:.1f} K (PuOr_r); "
        "outlined changes: a (cold), b (cold)."
    )


def test_the_inks_are_no_colours_of_changes() -> None:
    colours = [tuple(colour) for colour in np.frombuffer(palette(COLORMAP), np.uint8).reshape(-1, 3)]
    assert not set(colours[:LEVELS]) & set(colours[LEVELS:])
