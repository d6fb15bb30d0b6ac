"""Cues of regions against closed forms for the shapes they were drawn from, and against scikit-image."""

from __future__ import annotations

from dataclasses import asdict
from math import hypot, isnan, log, pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.ndimage import gaussian_filter
from skimage import measure

from irsurvey.anomalies.cues import Cues, cues
from irsurvey.anomalies.patch import cropped

SHAPE = (120, 160)
Y, X = np.indices(SHAPE, dtype=float)
SHAPE_CUES = ("four_sidedness", "solidity", "raggedness", "plateau_share", "flat_top", "feathering", "frame_ends")


def seen(height, *, openings=None, noise=0.05, least=1.0, sense=-1):
    """Cues of the pixels above `least` of a field of heights, seen as colder ones."""
    patch = cropped(height >= least)
    assert patch is not None
    return cues((sense * height).astype(np.float32), patch, openings=openings, noise=noise)


def rectangle(left, top, right, bottom, edge=1.0, contrast=4.0):
    drawn = (np.abs(2 * X - left - right) <= right - left) & (np.abs(2 * Y - top - bottom) <= bottom - top)
    return contrast * gaussian_filter(drawn.astype(float), edge)


def plume(length=30.0, half=12.0, root=30, contrast=5.0):
    drawn = np.where(root <= Y, np.exp(-(Y - root) / length), 0) * (np.abs(X - 80) <= half)
    return contrast * gaussian_filter(drawn, 0.7)


def test_a_rectangle_has_four_sides_and_a_disk_has_pi_over_four_of_the_square_around_it():
    # A blurred corner is a little rounded: at half height an edge of σ = 1.4 px (with our own 1 px) leaves about 1 %.
    assert seen(rectangle(40, 30, 90, 80)).four_sidedness == pytest.approx(1, abs=0.015)
    disk = 4.0 / (1 + np.exp(np.hypot(X - 80, Y - 60) - 30))
    assert seen(disk).four_sidedness == pytest.approx(pi / 4, abs=0.01)


def test_a_quadrilateral_seen_askew_still_has_four_sides():
    askew = (X >= 40) & (X <= 90 + 0.1 * Y) & (Y <= 90) & (Y >= 30 + 0.4 * (X - 40))
    assert seen(4.0 * gaussian_filter(askew.astype(float), 1)).four_sidedness == pytest.approx(1, abs=0.04)


def test_solidity_is_that_of_scikit_image_for_the_same_pixels():
    ell = rectangle(40, 30, 100, 90, edge=0.5)
    ell[:70, 60:] = 0
    expected = measure.regionprops((ell >= 2).astype(int))[0].solidity
    # Pixels as squares against a contour through their centres: one row of pixels in about sixty, and a smoothed notch.
    assert seen(ell).solidity == pytest.approx(expected, abs=0.03)


def test_an_outline_with_teeth_is_ragged_and_a_straight_one_is_not():
    teeth = (np.hypot(X - 80, Y - 60) <= 28 + 8 * np.cos(9 * np.arctan2(Y - 60, X - 80))).astype(float)
    # Length of r = 28 + 8 cos 9φ by numerical integration: 352 px; the hull touches nine tips at r = 36: 222 px.
    angle = np.linspace(0, 2 * np.pi, 20_001)
    radius = 28 + 8 * np.cos(9 * angle)
    length = np.hypot(np.diff(radius * np.cos(angle)), np.diff(radius * np.sin(angle))).sum()
    hull = measure.perimeter(measure.regionprops(teeth.astype(int))[0].image_convex, 4)
    # Smoothing by 1 px rounds tips and notches, and a perimeter counted in pixels is a few per cent off.
    assert seen(4 * teeth).raggedness == pytest.approx(length / hull - 1, abs=0.12)
    assert seen(rectangle(40, 30, 90, 80)).raggedness < 0.01


def test_the_profile_across_a_bell_is_as_flat_as_its_formula_says():
    # exp(−x²/2σ²): half-widths at 0.8 and at 0.5 are √(2 ln 1.25) σ and √(2 ln 2) σ; smoothing only widens it.
    bell = 4 * np.exp(-(((Y - 60) / 8) ** 2) / 2)
    assert seen(bell).flat_top == pytest.approx(sqrt(log(1.25) / log(2)), abs=0.03)  # samples half a pixel apart
    assert seen(rectangle(30, 40, 120, 80)).flat_top > 0.9


def test_the_plateau_of_a_round_soft_patch_is_as_small_as_its_formula_says():
    # Of exp(−r²/2σ²) the area above a height h is 2πσ² ln(1/h): heights are uniform in their logarithm.
    peak, least = 5.0, 1.0
    contrast = peak * (peak / least) ** -0.1  # nine tenths of its pixels are below
    expected = log(peak / (0.8 * contrast)) / log(peak / (0.5 * contrast))
    soft = peak * np.exp(-((X - 80) ** 2 + (Y - 60) ** 2) / (2 * 15.0**2))
    assert seen(soft).plateau_share == pytest.approx(expected, abs=0.02)  # smoothing by 1 of 15 px
    assert seen(rectangle(40, 30, 100, 90)).plateau_share > 0.9


def test_a_plume_is_feathered_by_its_length_and_a_bay_is_not():
    # exp(−run/L) falls from 0.8 to 0.4 in L ln 2; its root is as sharp as anything may be: 1.5 px.  The narrow top is
    # rounded by two blurs, which shortens what remains of the fall by one pixel.
    assert seen(plume(length=30)).feathering == pytest.approx(30 * log(2) / 1.5, rel=0.1)
    assert seen(plume(length=15)).feathering == pytest.approx(15 * log(2) / 1.5, rel=0.1)
    assert seen(rectangle(40, 30, 90, 80)).feathering < 1.4  # one half-pixel sample in two pixels


def test_what_comes_out_of_an_opening_has_its_sharp_end_there():
    opening = (Y < 30) & (Y >= 10) & (np.abs(X - 80) <= 20)
    falling = 5 * np.exp(-np.clip(Y - 30, 0, None) / 30) * (np.abs(X - 80) <= 12)  # as cold in the opening: no root
    height = np.where(Y < 33, 0, falling)  # where no region can be
    patch = cropped(height >= 1)
    colder = np.where(opening, -7, -falling).astype(np.float32)
    assert patch is not None
    assert cues(colder, patch, openings=opening, noise=0.05).feathering == pytest.approx(30 * log(2) / 1.5, rel=0.15)
    assert not cues(colder, patch, openings=None, noise=0.05).feathering > 5


def test_a_plume_that_leaves_the_frame_is_feathered_by_what_is_seen_of_it():
    assert seen(plume(length=60, root=75)).feathering > 5
    leaving = rectangle(40, 80, 90, 130)
    assert not seen(leaving).feathering > 2


def test_a_stud_between_two_bays_is_no_end_of_them():
    bays = rectangle(40, 30, 64, 90) + rectangle(67, 30, 91, 90)
    found = seen(bays)
    assert found.feathering < 1.4
    assert found.flat_top > 0.8
    assert found.four_sidedness > 0.95


def test_ends_at_the_edge_of_the_frame_are_counted():
    line = 4 * np.exp(-(((X - 80) / 4) ** 2) / 2)
    assert seen(line).frame_ends == 2
    assert seen(np.where(Y > 30, line, 0)).frame_ends == 1
    assert seen(np.where((Y > 30) & (Y < 90), line, 0)).frame_ends == 0


def test_the_gap_is_the_distance_to_the_nearest_opening():
    opening = np.zeros(SHAPE, np.bool_)
    assert isnan(seen(rectangle(40, 30, 60, 50, edge=0.1), openings=opening).gap_to_opening_px)
    opening[90:110, 100:120] = True  # corner to corner 40 right and 40 down of (60, 50)
    found = seen(rectangle(40, 30, 60, 50, edge=0.1), openings=opening)
    assert found.gap_to_opening_px == pytest.approx(hypot(40, 40), rel=0.02)  # cv2's 5 × 5 distance: within 2 %
    assert isnan(seen(rectangle(40, 30, 60, 50)).gap_to_opening_px)


def test_what_is_too_small_or_too_faint_has_no_shape_and_says_so():
    small = seen(rectangle(40, 30, 43, 33, edge=0.1))
    faint = seen(rectangle(40, 30, 90, 80, contrast=1.5), noise=0.2)
    for found in (small, faint):
        assert all(isnan(getattr(found, name)) for name in SHAPE_CUES)
        assert found.elongation >= 1


def test_cues_are_the_same_for_warmer_turned_and_stronger_ones():
    height = rectangle(45, 30, 90, 70) + plume(root=72)
    one = asdict(seen(height))
    assert asdict(seen(height, sense=1)) == pytest.approx(one, nan_ok=True)
    assert asdict(seen(2 * height, least=2.0)) == pytest.approx(one, rel=1e-3, nan_ok=True)  # float32
    turned = np.rot90(height)
    patch = cropped(turned >= 1)
    assert patch is not None
    found = asdict(cues(turned.astype(np.float32), patch, openings=None, noise=0.05))
    # Profiles are sampled every half pixel from another end.
    assert found == pytest.approx(one, rel=0.12, abs=0.02, nan_ok=True)


def test_a_weak_region_is_followed_to_half_of_its_contrast_and_a_neighbour_cut_off_is_not():
    bay = rectangle(40, 30, 80, 80, edge=2.0, contrast=1.5)  # cut off at 1 K, two thirds
    assert seen(bay).four_sidedness > 0.95
    both = rectangle(40, 30, 80, 80) + rectangle(80.5, 30, 120, 60)
    patch = cropped((both >= 1) & (X <= 80))
    assert patch is not None
    assert cues(-both.astype(np.float32), patch, openings=None, noise=0.05).solidity > 0.95


@settings(deadline=None, max_examples=60)
@given(st.integers(0, 2**32 - 1), st.floats(0.5, 6), st.booleans())
def test_cues_stay_in_their_ranges_whatever_the_region(seed, grain, has_opening):
    rng = np.random.default_rng(seed)
    height = gaussian_filter(rng.normal(size=(48, 64)), grain)
    height = 3 * height / np.abs(height).max()
    height[rng.random(height.shape) < 0.01] = np.nan
    labels = measure.label(height >= 0.5)
    openings = None
    if has_opening:
        openings = np.zeros(height.shape, np.bool_)
        openings[10:20, 10:30] = True
    for label in range(1, min(labels.max(), 8) + 1):
        patch = cropped(labels == label)
        assert patch is not None
        found = cues(height.astype(np.float32), patch, openings=openings, noise=0.01)
        assert isinstance(found, Cues)
        for name, low, high in (
            ("elongation", 1, np.inf),
            ("edge_sharpness_per_pixel", 0, np.inf),
            ("four_sidedness", 0, 1 + 1e-4),
            ("solidity", 0, 1 + 1e-4),
            ("raggedness", 0, np.inf),
            ("plateau_share", 0, 1),
            ("flat_top", 0, 1),
            ("feathering", 1, np.inf),
            ("frame_ends", 0, 2),
            ("gap_to_opening_px", 0, np.inf),
        ):
            value = getattr(found, name)
            assert isnan(value) or low <= value <= high, name


def test_a_region_as_large_as_the_frame_has_cues():
    everywhere = np.full(SHAPE, -3.0, np.float32)
    patch = cropped(np.ones(SHAPE, np.bool_))
    assert patch is not None
    found = cues(everywhere, patch, openings=None, noise=0.05)
    assert found.four_sidedness == pytest.approx(1, abs=0.01)
    assert found.frame_ends == 2
    assert isnan(found.feathering)
