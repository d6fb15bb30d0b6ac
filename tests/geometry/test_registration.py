"""Registration against known transforms, against another method, and its refusals."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from skimage.registration import phase_cross_correlation
from view_pairs import SHAPE, leak, moved, placed, wall

from irsurvey.geometry.registration import RESIDUAL, laid_over, register

NOISE = 0.05
PIXELS = RESIDUAL
"""What everything after a registration allows for."""
DEGREES = 0.1
"""Moves no pixel of these frames by more than 0.17 px, about half of the allowance."""


def noisy(t, rng, noise=NOISE):
    return t + rng.normal(0, noise, t.shape)


def views(seed, shape=SHAPE):
    """The moved and the first view of a wall, a leak in neither or one of them, 0.5 K of drift between."""
    rng = np.random.default_rng(seed)
    built, plume, (shift, turned) = wall(rng, shape), leak(rng, shape), moved(rng)
    here, there = placed(shape), placed(shape, shift, turned)
    first = built(*here) + (plume(*here) if seed % 3 == 1 else 0)
    other = built(*there) + (plume(*there) if seed % 3 == 2 else 0) + 0.5
    return noisy(other, rng), noisy(first, rng), shift, turned


def blobs(rng, at, count=40):
    """A picture without any long line, for a method that knows nothing of edges of frames."""
    x, y = at
    places = rng.uniform(0.15, 0.85, (count, 2)) * (SHAPE[1], SHAPE[0])
    return 291 + sum(
        height * np.exp(-((x - px) ** 2 + (y - py) ** 2) / (2 * width**2))
        for (px, py), height, width in zip(places, rng.normal(0, 1.5, count), rng.uniform(2, 5, count), strict=True)
    )


@pytest.mark.parametrize("seed", range(48))
def test_a_known_shift_and_rotation_come_back_with_and_without_a_leak_in_one_of_the_two(seed):
    moving, fixed, shift, turned = views(seed)
    found = register(moving, fixed)
    assert found.accepted, found.reason
    assert np.hypot(*np.subtract(found.shift_px, shift)) < PIXELS
    assert found.rotation_deg == pytest.approx(turned, abs=DEGREES)


def test_a_large_frame_is_registered_as_well_as_a_small_one():
    moving, fixed, shift, turned = views(2, (240, 320))
    found = register(moving, fixed)
    assert np.hypot(*np.subtract(found.shift_px, shift)) < PIXELS
    assert found.rotation_deg == pytest.approx(turned, abs=DEGREES)


@pytest.mark.parametrize("seed", range(6))
def test_pure_shifts_agree_with_upsampled_phase_correlation(seed):
    rng, other = np.random.default_rng(seed), np.random.default_rng(seed)
    shift, _ = moved(np.random.default_rng(seed + 100))
    fixed = noisy(blobs(rng, placed()), np.random.default_rng(1))
    moving = noisy(blobs(other, placed(shift=shift)), np.random.default_rng(2))
    # scikit-image, Guizar-Sicairos et al. (2008): what must be added to the moving picture's (row, column).
    (down, right), _, _ = phase_cross_correlation(fixed - 291, moving - 291, upsample_factor=50, normalization=None)
    found = register(moving, fixed)
    # Each is within 0.1 px of the truth on such pictures: the other resolves 0.02 px and knows no border.
    assert found.shift_px == pytest.approx((-right, -down), abs=0.2)


@pytest.mark.parametrize("seed", range(3))
def test_the_matrix_maps_pixels_of_the_fixed_frame_to_those_of_the_moving_one(seed):
    moving, fixed, shift, turned = views(3 * seed)
    found = register(moving, fixed)
    at = np.array([30.0, 90.0, 1.0])  # a pixel of the fixed frame, far from the centre
    x, y = placed(shift=shift, turned=turned)
    there_x, there_y = found.matrix @ at
    column, row = round(there_x), round(there_y)
    # That pixel of the moving view shows what lies there in the first; half a pixel is lost in rounding.
    assert (x[row, column], y[row, column]) == pytest.approx((30.0, 90.0), abs=0.5 + PIXELS)


@pytest.mark.parametrize("seed", [0, 3, 6])
def test_there_and_back_again_is_nowhere(seed):
    moving, fixed, _, _ = views(seed)
    there, back = register(moving, fixed).matrix, register(fixed, moving).matrix
    corner = np.array([0.0, 0.0, 1.0])
    returned = back @ np.append(there @ corner, 1.0)
    assert returned == pytest.approx((0.0, 0.0), abs=PIXELS)  # both errors, at a corner


def test_neither_gain_nor_offset_nor_slow_drift_matter():
    moving, fixed, _, _ = views(0)
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]]
    drifted = 1.2 * moving - 40 + 0.5 * x / SHAPE[1] - 0.3 * y / SHAPE[0]
    plain, other = register(moving, fixed), register(drifted, fixed)
    # A tenth of the allowance: the slow gradient is taken out but for a trace near the border.
    assert other.matrix == pytest.approx(plain.matrix, abs=0.1 * RESIDUAL)


def test_a_frame_lies_on_itself():
    _, fixed, _, _ = views(0)
    found = register(fixed, fixed)
    assert found.accepted
    assert found.correlation == pytest.approx(1, abs=1e-5)
    assert found.matrix == pytest.approx(np.eye(2, 3), abs=1e-3)


def test_pixels_without_data_do_not_matter():
    moving, fixed, shift, _ = views(0)
    moving[20:40, 100:130] = np.nan
    fixed[:, :7] = np.nan
    found = register(moving, fixed)
    assert found.accepted
    assert np.hypot(*np.subtract(found.shift_px, shift)) < PIXELS


@pytest.mark.parametrize("seed", range(30))
def test_a_wall_without_features_is_refused_and_marks_are_asked_for(seed):
    """Gradients, lens shading, a noise that repeats on the sensor and a leak in one frame are no features."""
    rng = np.random.default_rng(seed)
    x, y = placed()
    flat = 291 + rng.uniform(0, 1) * x / SHAPE[1]
    if seed % 2:
        flat = flat + rng.normal(0, NOISE, SHAPE)  # as strong as the noise that changes
    if seed % 3 == 0:
        flat = flat - 0.5 * (((x - 79.5) ** 2 + (y - 59.5) ** 2) / (79.5**2 + 59.5**2)) ** 2
    plume = leak(rng)(x, y) if seed % 5 == 0 else 0
    found = register(noisy(flat + plume, rng), noisy(flat, rng))
    assert not found.accepted
    assert "foil marks" in found.reason


def test_two_foil_marks_make_a_bare_wall_registrable():
    rng = np.random.default_rng(0)

    def marked(x, y):
        marks = ((30, 25), (130, 90))
        return 291 + sum(4 / (1 + np.exp(np.hypot(x - mx, y - my) - 4)) for mx, my in marks)

    shift, turned = (2.3, -1.6), 0.8
    found = register(noisy(marked(*placed(shift=shift, turned=turned)), rng), noisy(marked(*placed()), rng))
    assert found.accepted
    assert np.hypot(*np.subtract(found.shift_px, shift)) < PIXELS
    assert found.rotation_deg == pytest.approx(turned, abs=DEGREES)


def test_upright_studs_alone_leave_the_height_open_and_are_refused():
    rng = np.random.default_rng(0)
    x, _ = placed()
    studs = 291 - np.exp(-(((x - 40) / 4) ** 2)) - np.exp(-(((x - 110) / 4) ** 2))
    found = register(noisy(studs, rng), noisy(studs, rng))
    assert not found.accepted
    assert "foil marks" in found.reason


WALLS = [noisy(wall(rng)(*placed()), rng) for rng in (np.random.default_rng(seed + 1000) for seed in range(41))]


@pytest.mark.parametrize(("moving", "fixed"), list(pairwise(WALLS)))
def test_another_wall_is_refused(moving, fixed):
    found = register(moving, fixed)
    assert not found.accepted
    assert "tripod" in found.reason


@pytest.mark.parametrize(
    ("shift", "turned", "says"),
    [((0.0, 14.0), 0.0, "more than a tenth"), ((1.0, 0.0), 5.8, "more than 5°")],
)
def test_what_moved_too_far_is_refused(shift, turned, says):
    rng = np.random.default_rng(3)
    built = wall(rng)
    found = register(noisy(built(*placed(shift=shift, turned=turned)), rng), noisy(built(*placed()), rng))
    assert not found.accepted
    assert says in found.reason
    assert np.isfinite(found.correlation)


@pytest.mark.parametrize(
    ("moving", "fixed", "says"),
    [
        (np.zeros((120, 160)), np.zeros((240, 320)), "160 × 120 and 320 × 240"),
        (np.full(SHAPE, np.nan), np.zeros(SHAPE), "no temperatures"),
        (np.full(SHAPE, 291.0), np.full(SHAPE, 291.0), "foil marks"),
        (np.zeros((12, 16)), np.zeros((12, 16)), "too small"),
    ],
    ids=["sizes", "no data", "constant", "tiny"],
)
def test_what_cannot_be_compared_is_refused_without_numbers(moving, fixed, says):
    found = register(moving, fixed)
    assert not found.accepted
    assert says in found.reason
    assert np.isnan(found.correlation)
    assert np.isnan(found.matrix).all()


def test_a_plane_is_laid_over_exactly_and_ends_where_the_other_view_does():
    moving, fixed, _, _ = views(0)
    found = register(moving, fixed)
    y, x = np.mgrid[: SHAPE[0], : SHAPE[1]].astype(float)
    laid = laid_over(290 + 0.02 * x - 0.01 * y, found)
    there_x, there_y = (row[0] * x + row[1] * y + row[2] for row in found.matrix)
    expected = 290 + 0.02 * there_x - 0.01 * there_y
    outside = (there_x < -0.05) | (there_y < -0.05) | (there_x > SHAPE[1] - 0.95) | (there_y > SHAPE[0] - 0.95)
    assert np.isnan(laid[outside]).all()
    inside = (there_x > 0) & (there_y > 0) & (there_x < SHAPE[1] - 1) & (there_y < SHAPE[0] - 1)
    # Positions are kept to 1/32 px by the resampling: 0.02 K px⁻¹ of that, and float32 at 290 K.
    assert np.abs(laid - expected)[inside].max() < 0.022 / 32 + 3e-5


def test_what_is_laid_over_is_unknown_next_to_the_unknown():
    _, fixed, _, _ = views(0)
    same = register(fixed, fixed)
    holed = fixed.copy()
    holed[50:60, 70:90] = np.nan
    laid = laid_over(holed, same)
    assert np.isnan(laid[50:60, 70:90]).all()
    assert np.isfinite(laid[45:65, 65:95]).sum() >= 20 * 30 - 12 * 22
