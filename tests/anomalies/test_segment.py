"""Segmentation and shape measures against scikit-image's own, and against what was drawn."""

from __future__ import annotations

import numpy as np
import pytest
from skimage import draw, measure

from irsurvey.anomalies import segment, shape
from irsurvey.anomalies.patch import cropped

SHAPE = (120, 160)
EVERYWHERE = np.ones(SHAPE, np.bool_)
NOISE = 0.05


def canvas(seed=3):
    return np.random.default_rng(seed).normal(0, NOISE, SHAPE).astype(np.float32)


def disk(centre, radius):
    drawn = np.zeros(SHAPE, np.bool_)
    drawn[draw.disk(centre, radius, shape=SHAPE)] = True
    return drawn


def regions(delta, sense="hot", min_delta=1.0, usable=EVERYWHERE, **options):
    limits = segment.thresholds(min_delta, NOISE)
    found = segment.segment(delta, usable, sense, limits, min_pixels=25, **options)
    return [whole(patch) for patch in found]


def whole(patch):
    mask = np.zeros(SHAPE, np.bool_)
    mask[patch.box] = patch.mask
    return mask


def overlap(one, other):
    return np.count_nonzero(one & other) / np.count_nonzero(one | other)


def test_plateaus_are_found_as_drawn_in_both_senses():
    delta = canvas()
    hot, cold = disk((40, 40), 12), disk((80, 110), 15)
    delta[hot] += 3
    delta[cold] -= 2
    (found_hot,), (found_cold,) = regions(delta), regions(delta, "cold")
    assert overlap(found_hot, hot) > 0.95
    assert overlap(found_cold, cold) > 0.95


def test_as_many_regions_as_scikit_image_labels():
    delta = canvas()
    for row in (20, 60, 100):
        for column in (30, 80, 130):
            delta[disk((row, column), 6)] += 4
    labels = measure.label(delta >= 1.0, connectivity=2)  # outside reference; noise of 0.05 K never reaches 1 K
    assert len(regions(delta)) == labels.max() == 9


def test_noise_alone_is_no_finding():
    for seed in range(20):
        assert regions(canvas(seed)) == []
        assert regions(canvas(seed), "cold") == []


def test_what_stays_below_the_seed_is_no_finding():
    delta = canvas()
    delta[disk((60, 80), 15)] += 0.97  # its noise crosses 1 K here and there, its means do not
    assert regions(delta) == []


def test_too_few_pixels_are_no_finding():
    delta = canvas()
    delta[50:54, 50:54] += 5
    assert regions(delta) == []


def test_two_that_touch_by_a_neck_are_two_and_one_long_bar_is_one():
    delta = canvas()
    one, other = disk((60, 50), 15), disk((60, 84), 15)
    delta[one | other] += 3
    delta[58:63, 60:75] += np.where((one | other)[58:63, 60:75], 0, 3).astype(np.float32)
    found = regions(delta)
    assert len(found) == 2
    assert {max((one, other), key=lambda d: overlap(f, d)).sum() for f in found} == {one.sum(), other.sum()}
    bar = canvas()
    bar[50:70, 20:140] += 3
    assert len(regions(bar)) == 1


def test_two_peaks_over_a_low_saddle_are_two():
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]]
    delta = canvas()
    for centre in (55, 95):
        delta += (8 * np.exp(-(((x - centre) / 11) ** 2 + ((y - 60) / 11) ** 2))).astype(np.float32)
    assert delta[60, 75] == pytest.approx(0.6, abs=0.3)  # the saddle
    delta += np.float32(0.9)
    assert len(regions(delta)) == 2


def test_blocked_pixels_belong_to_no_region():
    delta = canvas()
    delta[40:80, 40:80] += 3
    usable = EVERYWHERE.copy()
    usable[:, 60:] = False
    (found,) = regions(delta, usable=usable)
    assert not found[:, 60:].any()


def test_saturated_pixels_are_kept_whatever_their_number():
    delta = canvas()
    certain = np.zeros(SHAPE, np.bool_)
    certain[30, 30] = True
    delta[30, 30] = 100
    (found,) = regions(delta, certain=certain)
    assert found[30, 30]


def test_a_low_emissivity_surface_needs_more_to_be_found_and_the_main_surface_what_was_stated():
    noise = np.full(SHAPE, 0.3, np.float32)  # more than a fifth of what counts
    noise[:, 80:] = 0.9
    least = segment.least_delta(1.0, 0.3, noise)
    assert least[0, 0] == 1.0  # as stated, though less than 5 × noise: the seed guards against noise
    assert least[0, 100] == pytest.approx(4.5, abs=1e-6)  # five times its noise


def test_the_band_around_an_optics_border_is_two_pixels_wide_on_both_sides():
    optics = np.zeros((20, 20), np.uint8)
    optics[:, 10:] = 1
    band = segment.edge_band(optics)
    assert band[:, 8:12].all()
    assert not band[:, :8].any()
    assert not band[:, 12:].any()


def test_dark_corners_are_allowed_for_and_one_cold_corner_is_not():
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]]
    radius = ((x - 79.5) ** 2 + (y - 59.5) ** 2) / (79.5**2 + 59.5**2)
    amount, allowance = segment.shading_allowance(canvas() - (0.8 * radius**2).astype(np.float32), EVERYWHERE)
    assert -1.2 <= amount < -0.7  # corner blocks average 0.8 K over their extent; half as much again
    assert allowance[0, 0] == pytest.approx(amount, abs=1e-6)
    room = canvas()
    room[:40, :40] -= 3
    assert segment.shading_allowance(room, EVERYWHERE)[0] == pytest.approx(0, abs=3 * NOISE)


@pytest.mark.parametrize("angle", [0, 30, 77])
def test_elongation_is_that_of_scikit_image(angle):
    drawn = np.zeros(SHAPE, np.bool_)
    drawn[draw.ellipse(60, 80, 12, 36, shape=SHAPE, rotation=np.radians(angle))] = True
    properties = measure.regionprops(drawn.astype(int))[0]
    expected = properties.axis_major_length / properties.axis_minor_length
    # It takes pixels as points; 1/12 px² is 0.23 % of the minor moment 12²/4 px², and the ratio is its root.
    assert shape.elongation(cropped(drawn)) == pytest.approx(expected, rel=0.0015)


def test_a_sharp_plateau_has_a_sharp_edge_and_a_plume_has_not():
    plateau = canvas()
    drawn = disk((60, 80), 20)
    plateau[drawn] += 3
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]]
    plume = canvas() + (3 * np.exp(-(((x - 80) / 30) ** 2 + ((y - 60) / 30) ** 2))).astype(np.float32)
    assert shape.edge_sharpness(plateau, cropped(drawn)) > 0.3
    assert shape.edge_sharpness(plume, cropped(plume > 1)) < 0.06


def test_the_extreme_is_the_best_full_spot_and_not_the_noisiest_pixel():
    t = np.full(SHAPE, 300, np.float32)
    region = disk((60, 80), 15)
    t[60, 80] = 330  # one wild pixel
    t[50:53, 80:83] = 310
    spot = shape.extreme_spot(t, cropped(region), "hot", 3)
    assert spot.is_full
    assert spot.centre == (81.0, 51.0)
    assert t[spot.rows, spot.columns].mean() == 310
    sliding = np.lib.stride_tricks.sliding_window_view(np.where(region, t, -np.inf), (3, 3)).mean(axis=(2, 3))
    # numpy as outside reference; float32 means of nine numbers around 310
    assert t[spot.rows, spot.columns].mean() == pytest.approx(sliding.max(), abs=1e-4)


def test_a_region_narrower_than_the_spot_is_read_at_one_pixel_and_says_so():
    t = np.full(SHAPE, 300, np.float32)
    region = np.zeros(SHAPE, np.bool_)
    region[40:42, 20:90] = True
    t[41, 33] = 290
    spot = shape.extreme_spot(t, cropped(region), "cold", 3)
    assert not spot.is_full
    assert (spot.rows[0], spot.columns[0]) == (41, 33)
