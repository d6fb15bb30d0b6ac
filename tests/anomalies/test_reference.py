"""The reference area: centre, plane and spread against numpy's own least squares and drawn distributions."""

from __future__ import annotations

import numpy as np
import pytest

from irsurvey.anomalies import reference
from irsurvey.anomalies.noise import pixel_noise

SHAPE = (120, 160)
EVERYWHERE = np.ones(SHAPE, np.bool_)


def wall(seed=1, noise=0.05, slope=(0.0, 0.0), level=290.0):
    rng = np.random.default_rng(seed)
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]]
    return (level + slope[0] * x + slope[1] * y + rng.normal(0, noise, SHAPE)).astype(np.float32)


def test_a_uniform_wall_has_its_median_and_no_plane():
    t = wall()
    fitted = reference.fit(t, EVERYWHERE, 0.05)
    assert fitted.gradient == 0
    # Every k-th pixel is used: the median of the sample differs from that of all by about σ/√n ≈ 0.5 mK.
    assert fitted.level == pytest.approx(float(np.median(t)), abs=0.003)
    assert fitted.spread == pytest.approx(0.05, abs=0.002)
    assert fitted.pixels == t.size


def test_the_plane_of_a_wall_with_a_gradient_is_that_of_least_squares():
    t = wall(slope=(0.004, -0.012))
    fitted = reference.fit(t, EVERYWHERE, 0.05)
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]]
    design = np.stack([np.ones(t.size), x.ravel(), y.ravel()], axis=1)
    expected = np.linalg.lstsq(design, t.ravel().astype(float), rcond=None)[0]  # numpy as outside reference
    assert fitted.slope == pytest.approx(tuple(expected[1:]), abs=2e-5)  # 2e-5 K/px is 3 mK over the frame
    assert fitted.at(80, 60) == pytest.approx(expected @ [1, 80, 60], abs=0.003)
    assert fitted.gradient == pytest.approx(0.004 * 159 + 0.012 * 119, abs=0.02)


def test_a_patch_inside_the_reference_does_not_pull_it():
    clean, spoiled = wall(slope=(0.01, 0)), wall(slope=(0.01, 0))
    spoiled[20:50, 30:60] -= 5  # 5 % of the area
    before, after = (reference.fit(t, EVERYWHERE, 0.05) for t in (clean, spoiled))
    assert after.at(80, 60) == pytest.approx(before.at(80, 60), abs=0.005)
    assert after.slope == pytest.approx(before.slope, abs=1e-4)


def test_the_functionals_give_back_level_and_slopes():
    for t in (wall(), wall(slope=(0.01, 0.005))):
        fitted = reference.fit(t, EVERYWHERE, 0.05)
        values = t[fitted.rows, fitted.columns].astype(float)
        assert fitted.weights @ values == pytest.approx([fitted.level, *fitted.slope], abs=1e-9)


def test_a_shift_of_all_temperatures_shifts_the_level_alone():
    t = wall(slope=(0.01, 0.005))
    one, other = reference.fit(t, EVERYWHERE, 0.05), reference.fit(t + np.float32(8), EVERYWHERE, 0.05)
    assert other.level - one.level == pytest.approx(8, abs=1e-3)  # float32 maps: 3e-5 K near 300 K
    assert other.slope == pytest.approx(one.slope, abs=1e-5)


def test_standard_errors_cover_the_scatter_between_walls():
    # 60 walls of pure noise: the scatter of the level may not exceed its stated standard error by half.
    levels = [reference.fit(wall(seed), EVERYWHERE, 0.05) for seed in range(60)]
    scatter = np.std([fitted.level for fitted in levels])
    assert scatter < 1.5 * np.mean([fitted.u_level for fitted in levels])


def test_an_empty_area_is_no_reference():
    assert reference.fit(wall(), np.zeros(SHAPE, np.bool_), 0.05) is None


def test_the_automatic_reference_is_the_wall_and_not_the_window_or_the_plume():
    t = wall()
    t[20:80, 20:70] -= 6  # a window
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]]
    t -= (4 * np.exp(-(((x - 130) / 12) ** 2 + ((y - 100) / 12) ** 2))).astype(np.float32)
    area = reference.automatic(t, EVERYWHERE, 0.05)
    assert np.count_nonzero(area) > 0.3 * t.size
    assert not area[20:80, 20:70].any()
    assert not area[92:108, 122:138].any()
    assert np.median(t[area]) == pytest.approx(290, abs=0.02)


@pytest.mark.parametrize("sigma", [0.03, 0.05, 0.2])
def test_noise_is_found_under_structure(sigma):
    t = wall(noise=sigma, slope=(0.02, 0.01))
    t[30:60, 40:90] += 8  # edges are outvoted: 240 of 19,200 responses
    # Robust spread of n/3 responses scatters by about 1.2/√(2·6400) ≈ 1 %; kernel overlap and edges add to it.
    assert pixel_noise(t, EVERYWHERE, 0.0) == pytest.approx(sigma, rel=0.06)


def test_noise_is_never_below_the_step_of_the_stored_numbers():
    # Uniform distribution over one step: σ = step/√12.
    assert pixel_noise(np.full(SHAPE, 290, np.float32), EVERYWHERE, 0.04) == pytest.approx(0.04 / 12**0.5, rel=1e-9)
