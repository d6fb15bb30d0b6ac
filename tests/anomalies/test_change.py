"""What changed between two maps: a leak is found, what is built in cancels, noise and misregistration do not count."""

from __future__ import annotations

import numpy as np
import pytest
from view_pairs import SHAPE, leak, placed, wall

from irsurvey.anomalies.change import changes

NOISE = 0.05
ALL = np.ones(SHAPE, bool)


def compared(after, before, **given):
    given = {
        "noise": NOISE * 2**0.5,
        "usable": ALL,
        "steady": np.zeros(SHAPE, bool),
        "least": 0.5,
        "misregistration": 0.3,
        "min_pixels": 25,
        **given,
    }
    noise = given.pop("noise")
    return changes(np.asarray(after, np.float32), np.asarray(before, np.float32), noise, **given)


def covered(found):
    """Pixels of all patches."""
    drawn = np.zeros(SHAPE, bool)
    for _, patch in found.patches:
        drawn[patch.box] |= patch.mask
    return drawn


def noisy(t, rng):
    return t + rng.normal(0, NOISE, SHAPE)


@pytest.mark.parametrize("seed", range(20))
def test_identical_maps_have_no_changes(seed):
    rng = np.random.default_rng(seed)
    t = noisy(wall(rng)(*placed()), rng)
    found = compared(t, t)
    assert found.patches == ()
    assert not found.difference.any()
    assert (found.drift, found.drift_u) == (0, 0)


@pytest.mark.parametrize("seed", range(20))
def test_noise_drift_and_a_third_of_a_pixel_of_misregistration_are_no_changes(seed):
    rng = np.random.default_rng(seed)
    built, direction = wall(rng), rng.uniform(0, 2 * np.pi)
    there = placed(shift=(0.3 * np.cos(direction), 0.3 * np.sin(direction)))
    found = compared(noisy(built(*there) + 0.5, rng), noisy(built(*placed()), rng))
    assert found.patches == ()
    # Medians of 19 200 differences of 70 mK: 0.6 mK of noise, and what the steeper parts of 0.3 px leave.
    assert found.drift == pytest.approx(0.5, abs=0.02)


def test_without_the_allowance_that_much_would_be_a_change():
    """The test before this one would fail without the allowance: a window of 8 K moved by 0.3 px."""
    x, y = placed()
    x2, y2 = placed(shift=(0.3, 0.0))

    def window(x, y):
        across, down = (np.tanh((x - 40) / 0.8) - np.tanh((x - 90) / 0.8)), (np.tanh(y - 30) - np.tanh(y - 80))
        return 291 - 2 * across * down

    shifted = window(x2, y2) - window(x, y)
    assert np.abs(shifted).max() > 1
    assert compared(window(x2, y2), window(x, y), misregistration=0.0).patches != ()
    assert compared(window(x2, y2), window(x, y)).patches == ()


@pytest.mark.parametrize("seed", range(20))
def test_a_leak_is_found_where_it_is_and_nowhere_else(seed):
    rng = np.random.default_rng(seed)
    here = placed()
    built, plume = wall(rng)(*here), leak(rng)(*here)
    found = compared(noisy(built + plume + 0.5, rng), noisy(built, rng))
    true, seen = plume <= -0.5, covered(found)
    # The rim is a smooth 0.5 K of noise, gradients and cleaning; 0.7 is what is asked of it.
    assert (true & seen).sum() / (true | seen).sum() >= 0.7
    assert {sense for sense, _ in found.patches} == {"cold"}
    assert not (seen & (plume > -0.2)).any()


def test_a_leak_that_is_there_only_before_is_a_hot_change():
    here = placed()
    plume = leak(np.random.default_rng(0))(*here)
    (one,) = compared(np.full(SHAPE, 291.0), 291 + plume).patches
    assert one[0] == "hot"


def test_drift_is_that_of_the_steady_area_and_what_the_rest_did_is_told():
    before = np.full(SHAPE, 291.0)
    after = before + 0.4
    after[:, 40:] -= 2.0
    steady = np.zeros(SHAPE, bool)
    steady[:, 5:35] = True
    found = compared(after, before, steady=steady)
    assert found.drift == pytest.approx(0.4, abs=1e-4)  # float32 at 291 K: 3e-5
    assert found.elsewhere == pytest.approx(-1.6, abs=1e-4)


def test_uneven_drift_is_an_uncertainty():
    x, _ = placed()
    found = compared(291 + 0.4 * x / SHAPE[1], np.full(SHAPE, 291.0))
    # Medians of blocks at ±1/8 and ±3/8 of 0.4 K: median absolute deviation 0.25·0.4, to one σ 1.4826 of that.
    assert found.drift_u == pytest.approx(1.4826 * 0.1, rel=0.02)  # 40 columns: half a pixel is 1 %


def test_what_is_unknown_in_either_map_is_unknown_in_the_difference_and_no_change():
    before, after = np.full(SHAPE, 291.0), np.full(SHAPE, 291.0)
    after[30:60, 30:60] -= 3
    before[30:60, 30:60] = np.nan
    after[100:, :] = np.nan
    found = compared(after, before)
    assert np.isnan(found.difference[30:60, 30:60]).all()
    assert np.isnan(found.difference[100:]).all()
    assert found.patches == ()


def test_nothing_in_common_is_no_change_and_no_drift():
    found = compared(np.full(SHAPE, np.nan), np.full(SHAPE, 291.0))
    assert found.patches == ()
    assert np.isnan([found.drift, found.drift_u, found.elsewhere]).all()


def test_only_usable_pixels_and_enough_of_them_count():
    before, after = np.full(SHAPE, 291.0), np.full(SHAPE, 291.0)
    after[30:60, 30:60] -= 3
    after[90:94, 90:94] -= 3
    usable = ALL.copy()
    usable[:, 25:70] = False
    assert compared(after, before, usable=usable).patches == ()
    assert len(compared(after, before, usable=usable, min_pixels=16).patches) == 1


def test_slopes_are_those_that_both_maps_show():
    x, y = placed()
    tilted = 291 + 0.02 * x - 0.01 * y
    plume = leak(np.random.default_rng(0))(x, y)
    found = compared(tilted + plume, tilted)
    inner = (slice(8, -8), slice(8, -8))
    assert np.hypot(*found.slopes)[inner].max() < np.hypot(0.02, 0.01) + 1e-4  # float32 at 291 K: 3e-5 a pixel
    assert np.median(found.slopes[0][inner]) == pytest.approx(0.02, abs=1e-4)
    assert np.median(found.slopes[1][inner]) == pytest.approx(-0.01, abs=1e-4)
