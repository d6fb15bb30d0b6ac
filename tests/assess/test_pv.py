"""PV modules: scaling and neighbours against the trade's worked example, patterns against painted modules."""

from __future__ import annotations

import math

import cv2
import numpy as np
import pytest
from scipy.ndimage import gaussian_filter

from irsurvey.anomalies.modules import module_shares
from irsurvey.anomalies.patch import cropped
from irsurvey.assess.pv import neighbour_reference, neighbours, pv_indication, scaled, sound
from irsurvey.geometry.polygons import mask

SHAPE = (120, 160)
COLUMNS, ROWS = 6, 10
"""Cells across and along a module of 60."""


# --- scaling ----------------------------------------------------------------------------------------------------------


def test_16_k_at_860_w_is_18_6_k_at_full_sun():
    # worked example of the trade [S]: 16·1000/860 = 18.605, printed to a tenth
    assert float(scaled(16.0, 860.0)) == pytest.approx(18.6, abs=0.05)


@pytest.mark.parametrize(("irradiance", "known"), [(599.9, False), (600.0, True), (1000.0, True), (math.nan, False)])
def test_below_600_w_nothing_is_scaled(irradiance, known):
    # 600 W/m² [S]
    assert np.isfinite(scaled(5.0, irradiance)) == known


def test_a_rise_at_full_sun_stays_and_arrays_are_like_numbers():
    deltas, suns = np.array([[1.0], [-4.0]]), np.array([1000.0, 700.0, 500.0])
    together = scaled(deltas, suns)
    assert together.shape == (2, 3)
    assert together[:, 0].tolist() == [1.0, -4.0]
    each = [[float(scaled(delta, sun)) for sun in suns] for delta in deltas[:, 0]]
    np.testing.assert_array_equal(together, each)


# --- neighbours -------------------------------------------------------------------------------------------------------

GRID = [(20.0 * column, 35.0 * row) for row in range(3) for column in range(8)]


def test_neighbours_are_the_nearest_of_all_but_itself():
    found = neighbours(11, GRID)  # second row, fourth column
    assert len(found) == 10
    assert 11 not in found
    away = [math.dist(GRID[11], GRID[k]) for k in found]
    assert away == sorted(away)
    assert max(away) <= min(math.dist(GRID[11], GRID[k]) for k in set(range(24)) - {11, *found})
    assert set(found[:2]) == {10, 12}  # 20 px beside it


def test_a_small_group_gives_all_there_are_and_one_alone_none():
    assert sorted(neighbours(0, GRID[:4])) == [1, 2, 3]
    assert neighbours(0, GRID[:1]) == ()


def test_a_module_at_the_corner_of_a_field_has_neighbours_too():
    assert len(neighbours(0, GRID)) == 10


def test_the_reference_is_the_median_of_the_sound_ones():
    t = [320.0, 320.4, 319.8, 320.2, 335.0, 320.1, 320.3]
    assert sound(t).tolist() == [True, True, True, True, False, True, True]
    assert neighbour_reference(t) == pytest.approx(float(np.median(sorted(t)[:-1])), abs=1e-12)


def test_fewer_than_six_sound_neighbours_are_no_reference():
    # 6 to 10 [S]
    assert math.isnan(neighbour_reference([320.0] * 5))
    assert math.isnan(neighbour_reference([320.0] * 5 + [math.nan] * 3))
    assert math.isnan(neighbour_reference([]))
    assert neighbour_reference([320.0] * 6) == 320.0


def test_neighbours_of_which_a_third_are_hot_do_not_raise_the_reference():
    # A reference that hot neighbours raise would hide a hot module.
    rng = np.random.default_rng(7)
    for _ in range(50):
        t = 320.0 + rng.normal(0, 0.3, 10)
        t[:3] += rng.uniform(4.0, 30.0, 3)
        assert abs(neighbour_reference(t) - np.median(t[3:])) < 0.3


# --- patterns ---------------------------------------------------------------------------------------------------------


def seen(warm, corners, seed):
    """What is said of a module whose unit-square map `warm` [K] (cells of 8 × 8 points) lies under four corners."""
    side = 8
    source = np.array([(0, 0), (COLUMNS * side, 0), (COLUMNS * side, ROWS * side), (0, ROWS * side)], np.float32)
    placed = cv2.getPerspectiveTransform(source - 0.5, np.array(corners, np.float32))
    t = cv2.warpPerspective(warm.astype(np.float32), placed, SHAPE[::-1], flags=cv2.INTER_NEAREST)
    rng = np.random.default_rng(seed)
    t = gaussian_filter(t, 0.7) + rng.normal(0, 0.1, SHAPE)
    module = cropped(mask(corners, SHAPE))
    return pv_indication(module_shares(t.astype(np.float32), module, corners, least=2.0))


def cells(columns, rows, rise, base=0.0):
    warm = np.full((ROWS, COLUMNS), base)
    warm[rows, columns] += rise
    return np.kron(warm, np.ones((8, 8)))


def corners_of(rng, turned):
    """A module of about 50 × 80 px, standing or lying, a little askew."""
    width, height = (80, 50) if turned else (50, 80)
    left, top = rng.uniform(20, 60), rng.uniform(15, 25)
    square = np.array([(0, 0), (width, 0), (width, height), (0, height)], float)
    square = square + np.array([left, top]) + rng.uniform(-4, 4, (4, 2))
    return [tuple(map(float, corner)) for corner in (np.roll(square, 1, axis=0) if turned else square)]


HELD_OUT = range(60)


@pytest.fixture(scope="module")
def said():
    """Pattern painted → what was said of it, over modules that stand or lie, a little askew, under noise."""
    told = {"hot cell": [], "substring band": [], "whole module warm": [], "no typical pattern": []}
    for seed in HELD_OUT:
        rng = np.random.default_rng(seed)
        corners = corners_of(rng, turned=bool(seed % 2))
        column, row = int(rng.integers(COLUMNS)), int(rng.integers(ROWS))
        band = 2 * int(rng.integers(3))
        painted = {
            "hot cell": cells(slice(column, column + 1), slice(row, row + 1), rng.uniform(8, 40), rng.uniform(0, 1.0)),
            "substring band": cells(slice(band, band + 2), slice(None), rng.uniform(3.5, 8)),
            "whole module warm": cells(slice(None), slice(None), rng.uniform(3.5, 8)),
            # half of it, as under a shadow's edge or over a warm roof
            "no typical pattern": cells(slice(None), slice(0, 5), rng.uniform(3.5, 8)),
        }
        for pattern, warm in painted.items():
            told[pattern].append(seen(warm, corners, seed).pattern)
    return told


@pytest.mark.parametrize("pattern", ["hot cell", "substring band", "whole module warm", "no typical pattern"])
def test_a_painted_pattern_is_told_by_its_shares(said, pattern):
    # 60 modules each; the project asks for 85 % of indications to be right
    assert said[pattern].count(pattern) >= 0.95 * len(HELD_OUT), said[pattern]


def test_a_hot_cell_in_a_warm_substring_is_told_as_the_cell():
    warm = cells(slice(0, 2), slice(None), 4.0)
    warm[16:24, 0:8] += 30
    corners = [(40.0, 20.0), (90.0, 20.0), (90.0, 100.0), (40.0, 100.0)]
    assert seen(warm, corners, 1).pattern == "hot cell"


def test_one_column_of_cells_is_no_substring_and_neither_is_a_band_between_two():
    corners = [(40.0, 20.0), (90.0, 20.0), (90.0, 100.0), (40.0, 100.0)]
    assert seen(cells(slice(2, 3), slice(None), 5.0), corners, 1).pattern == "no typical pattern"
    assert seen(cells(slice(1, 3), slice(None), 5.0), corners, 1).pattern == "no typical pattern"


def test_what_is_said_names_pattern_evidence_and_how_to_verify():
    found = pv_indication(
        {"warm_share": 1 / 3, "along": 1.0, "across": 1 / 3, "centre_along": 0.5, "centre_across": 5 / 6, "filled": 1.0}
    )
    assert found.pattern == "substring band"
    assert found.statement.startswith("Consistent with a substring")
    assert f"verify by {found.verify_by}" in found.statement
    assert found.evidence == {
        "across": pytest.approx(1 / 3),
        "along": 1.0,
        "filled": 1.0,
        "off_third": pytest.approx(0.0, abs=1e-12),
    }


def test_what_is_not_known_is_no_pattern():
    assert pv_indication({}).pattern == "no typical pattern"
    nothing = {"warm_share": 0.0, "along": math.nan, "across": math.nan, "filled": math.nan}
    found = pv_indication(nothing)
    assert found.pattern == "no typical pattern"
    assert found.evidence == {"warm_share": 0.0}


def test_a_module_without_anything_warm_has_no_extent():
    corners = [(40.0, 20.0), (90.0, 20.0), (90.0, 100.0), (40.0, 100.0)]
    module = cropped(mask(corners, SHAPE))
    shares = module_shares(np.zeros(SHAPE, np.float32), module, corners, least=2.0)
    assert shares["warm_share"] == 0.0
    assert all(math.isnan(value) for name, value in shares.items() if name != "warm_share")
    unknown = module_shares(np.full(SHAPE, np.nan, np.float32), module, corners, least=2.0)
    assert unknown["warm_share"] == 0.0


def test_shares_of_a_rectangle_are_those_it_was_drawn_with():
    # 20 × 30 of 50 × 80 px, an offset of 10 and 40: rounding to pixels is one in fifty
    corners = [(39.5, 19.5), (89.5, 19.5), (89.5, 99.5), (39.5, 99.5)]
    t = np.zeros(SHAPE, np.float32)
    t[60:90, 50:70] = 5.0
    for outline in (corners, [*corners[:3], (60.0, 99.5), corners[3]]):  # five corners: the rectangle around them
        shares = module_shares(t, cropped(mask(outline, SHAPE)), outline, least=2.0)
        assert shares["warm_share"] == pytest.approx(600 / 4000, abs=1e-9)
        assert shares["along"] == pytest.approx(30 / 80, abs=0.02)
        assert shares["across"] == pytest.approx(20 / 50, abs=0.02)
        assert shares["filled"] == pytest.approx(1.0, abs=1e-9)
        middle = {shares["centre_along"], 1 - shares["centre_along"]}
        assert min(abs(value - 55 / 80) for value in middle) < 0.01
