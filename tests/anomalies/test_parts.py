"""Separate warm parts and their rows, against what was painted and scikit-image's own labelling."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.ndimage import binary_fill_holes, gaussian_filter
from skimage import measure

from irsurvey.anomalies.parts import parts

SHAPE = (120, 160)
NOISE = 0.05


def painted(*boxes, blur=0.7, noise=NOISE, seed=1):
    """Rectangles (left, top, width, height, rise [K]) over 0, seen by a lens."""
    t = np.zeros(SHAPE)
    for left, top, width, height, rise in boxes:
        t[top : top + height, left : left + width] = rise
    t = gaussian_filter(t, blur) if blur else t
    return (t + np.random.default_rng(seed).normal(0, noise, SHAPE)).astype(np.float32)


def found(delta, **options):
    given = {"usable": np.isfinite(delta), "least": 1.0, "min_pixels": 9, **options}
    return parts(delta, NOISE, **given)


def whole(part):
    out = np.zeros(SHAPE, np.bool_)
    out[part.patch.box] = part.patch.mask
    return out


def row(count, left, top, step, rise, width=12, height=16):
    rises = rise if isinstance(rise, list) else [rise] * count
    return [(left + k * step, top, width, height, rises[k]) for k in range(count)]


def groups(pieces):
    """Lefts and tops of the parts of each group, by its number."""
    told = {}
    for part in pieces:
        told.setdefault(part.group, []).append((part.patch.left, part.patch.top))
    return told


# --- segmentation -----------------------------------------------------------------------------------------------------


def test_a_balanced_row_is_found_as_it_was_painted_and_is_one_group():
    delta = painted(*row(3, 20, 30, 25, 20.0))
    three = found(delta)
    assert [part.group for part in three] == [0, 0, 0]
    drawn = measure.label(painted(*row(3, 20, 30, 25, 20.0), blur=0, noise=0.0) > 0)
    for part in three:
        overlap = np.count_nonzero(whole(part) & (drawn == drawn[part.patch.top + 8, part.patch.left + 6]))
        # half of a blurred edge is its middle, so only the four corners may be lost
        assert 12 * 16 - 4 <= overlap == part.patch.pixels


def test_parts_are_as_many_as_scikit_image_counts():
    rng = np.random.default_rng(3)
    for seed in range(20):
        boxes = [
            (20 * column + int(rng.integers(2, 6)), 30 * line + int(rng.integers(2, 8)), *sides, rng.uniform(2, 60))
            for column in range(8)
            for line in range(4)
            if rng.random() < 0.5 and (sides := rng.integers((6, 6), (12, 18)).tolist())
        ]
        clean = painted(*boxes, blur=0, noise=0.0)
        pieces = found(painted(*boxes, seed=seed))
        assert len(pieces) == measure.label(clean > 0, connectivity=2).max()
        covered = np.logical_or.reduce([whole(part) for part in pieces])
        # a blurred edge moves by less than a pixel, corners by one: of the smallest, 6 × 6, that is an eighth
        assert np.count_nonzero(covered & (clean > 0)) >= 0.87 * np.count_nonzero(clean)
        assert np.count_nonzero(covered & (clean == 0)) <= 0.02 * np.count_nonzero(clean)


def test_a_part_ten_times_hotter_than_its_twins_is_seen_no_larger():
    three = found(painted(*row(3, 20, 30, 25, [6.0, 60.0, 6.0])))
    sizes = [part.patch.mask.shape for part in three]
    assert len(set(sizes)) == 1
    assert [part.group for part in three] == [0, 0, 0]


@pytest.mark.parametrize("between", [0.0, 0.5, 0.7])
def test_two_parts_with_a_cooler_gap_between_them_are_two(between):
    # 3 px of gap at up to 0.7 of their own rise: a saddle below 0.8 even when blurred
    boxes = [(30, 40, 14, 20, 30.0), (44, 40, 4, 20, between * 30.0), (48, 40, 14, 20, 30.0)]
    assert len(found(painted(*boxes))) == 2


def test_two_parts_joined_by_a_bar_as_warm_as_they_are_cut_at_the_neck():
    boxes = [(30, 40, 16, 20, 30.0), (46, 48, 10, 4, 30.0), (56, 40, 16, 20, 30.0)]
    left, right = found(painted(*boxes))
    assert left.group == right.group == 0
    assert whole(left)[50, 38]
    assert whole(right)[50, 64]


def test_a_cool_part_that_touches_a_hot_one_is_a_part_of_its_own():
    # no dip between them: 60 K beside 8 K
    two = found(painted((30, 40, 16, 20, 60.0), (46, 40, 16, 20, 8.0)))
    assert len(two) == 2
    assert whole(min(two, key=lambda part: part.patch.left))[50, 38]
    assert whole(max(two, key=lambda part: part.patch.left))[50, 55]


@pytest.mark.parametrize(
    "boxes",
    [
        [(40, 20, 14, 70, 20.0)],
        [(40, 20, 14, 60, 20.0), (40, 66, 60, 14, 20.0)],  # an L
        [(40, 20, 60, 14, 20.0), (63, 34, 14, 40, 20.0)],  # a T
        [(40, 20, 30, 30, 10.0), (50, 30, 8, 8, 40.0)],  # a hot bolt on a warm plate
    ],
    ids=["bar", "L", "T", "bolt"],
)
def test_one_part_is_not_cut_in_two(boxes):
    pieces = found(painted(*boxes))
    largest = max(pieces, key=lambda part: part.patch.pixels)
    hottest = np.unravel_index(np.argmax(painted(*boxes, noise=0.0)), SHAPE)
    assert len(pieces) == 1
    assert whole(largest)[hottest]


@pytest.mark.parametrize("seed", range(5))
def test_a_wide_lukewarm_body_with_a_hot_lug_at_it_is_two_parts_and_not_more(seed):
    # the body hardly counts (1.2 K, least 1 K), and half its pixels are equally far from its rim
    pieces = found(painted((40, 10, 80, 40, 1.2), (66, 50, 22, 45, 14.0), seed=seed))
    assert len(pieces) == 2
    lug, body = sorted(pieces, key=lambda part: part.patch.pixels)
    assert whole(lug)[70, 77]
    assert whole(body)[30, 50]
    assert body.patch.pixels >= 0.9 * 80 * 40  # without the band of two pixels that the lug's blur covers


def test_a_graded_bar_is_not_cut_where_it_is_hotter_than_half():
    t = painted((20, 40, 100, 12, 1.0), noise=0.0) * np.linspace(40.0, 20.0, SHAPE[1])
    assert len(found(t.astype(np.float32))) == 1


def test_what_is_beyond_the_range_is_a_part_though_its_rise_is_not_known():
    delta = painted(*row(3, 20, 30, 25, 20.0))
    beyond = np.zeros(SHAPE, np.bool_)
    beyond[32:42, 47:55] = True
    delta[beyond] = np.nan
    three = found(delta, certain=beyond)
    assert [part.group for part in three] == [0, 0, 0]
    assert whole(three[1])[beyond].all()


def test_hot_pixels_without_solution_inside_a_part_belong_to_it():
    delta = painted(*row(3, 20, 30, 25, 20.0))
    delta[36:40, 24:28] = np.nan
    (first, *_) = found(delta)
    assert whole(first)[36:40, 24:28].all()


def test_nothing_warm_is_nothing_found():
    assert found(painted()) == ()
    assert found(painted(*row(3, 20, 30, 25, 0.5))) == ()  # below the least rise that counts
    assert found(painted(*row(3, 20, 30, 25, 20.0)), usable=np.zeros(SHAPE, np.bool_)) == ()
    assert found(np.full(SHAPE, np.nan, np.float32)) == ()


def test_a_background_is_no_part():
    # the warmer half of a cabinet, and a part before it
    assert found(painted((0, 0, 160, 60, 5.0))) == ()


def test_where_nothing_may_be_used_no_part_is():
    usable = np.ones(SHAPE, np.bool_)
    usable[:, :45] = False
    pieces = found(painted(*row(4, 20, 30, 25, 20.0)), usable=usable)
    assert len(pieces) == 3
    assert all(part.patch.left >= 45 for part in pieces)


def test_parts_never_overlap_have_no_holes_and_hold_what_is_hottest():
    rng = np.random.default_rng(11)
    for seed in range(40):
        count = int(rng.integers(1, 14))
        boxes = [
            (int(x), int(y), int(w), int(h), float(r))
            for x, y, w, h, r in zip(
                rng.integers(0, 140, count),
                rng.integers(0, 100, count),
                rng.integers(4, 40, count),
                rng.integers(4, 40, count),
                rng.uniform(0.5, 60, count),
                strict=True,
            )
        ]
        delta = painted(*boxes, seed=seed)
        pieces = found(delta)
        together = np.sum([whole(part) for part in pieces], axis=0, dtype=int) if pieces else np.zeros(SHAPE, int)
        assert together.max() <= 1
        for part in pieces:
            np.testing.assert_array_equal(binary_fill_holes(part.patch.mask), part.patch.mask)
            assert measure.label(part.patch.mask, connectivity=2).max() == 1
        if delta.max() > 10 and max((part.patch.pixels for part in pieces), default=0) < 1000:
            assert together[np.unravel_index(np.argmax(gaussian_filter(delta, 1.0)), SHAPE)]


# --- rows -------------------------------------------------------------------------------------------------------------


def test_groups_are_the_rows_and_do_not_look_at_temperature():
    boxes = [*row(3, 20, 10, 22, [10.0, 45.0, 4.0]), *row(4, 30, 70, 22, 8.0, height=12)]
    told = groups(found(painted(*boxes)))
    assert sorted(told) == [0, 1]
    assert [left for left, _ in told[0]] == [20, 42, 64]
    assert [left for left, _ in told[1]] == [30, 52, 74, 96]


def test_a_column_is_a_group_too():
    boxes = [(40, 8 + 22 * k, 20, 12, 15.0) for k in range(4)]
    assert [part.group for part in found(painted(*boxes))] == [0, 0, 0, 0]


def test_of_a_grid_the_narrower_steps_are_the_rows():
    # three phases, line and load side: 22 px from phase to phase, 50 px from line to load
    told = groups(found(painted(*row(3, 20, 10, 22, 15.0), *row(3, 20, 60, 22, 18.0))))
    assert {number: len(members) for number, members in told.items()} == {0: 3, 1: 3}
    assert all(len({top for _, top in members}) == 1 for members in told.values())


def test_two_feeders_side_by_side_are_two_groups():
    told = groups(found(painted(*row(3, 6, 40, 18, 15.0), *row(3, 90, 40, 18, 25.0))))
    assert [left for left, _ in told[0]] == [6, 24, 42]
    assert [left for left, _ in told[1]] == [90, 108, 126]


def test_a_row_seen_askew_is_a_row():
    # a camera held ten degrees off
    boxes = [(20 + 25 * k, 30 + round(25 * k * np.tan(np.radians(10))), 12, 16, 15.0) for k in range(4)]
    assert [part.group for part in found(painted(*boxes))] == [0, 0, 0, 0]


def test_a_hot_joint_that_shows_its_cable_stays_in_its_row():
    cable = (51, 46, 4, 10, 20.0)
    told = groups(found(painted(*row(3, 20, 30, 25, [15.0, 50.0, 15.0]), cable)))
    assert len(told[0]) == 3


def test_what_has_nothing_like_it_stands_alone():
    lone = [(20, 20, 12, 16, 15.0), (60, 20, 60, 5, 15.0), (30, 70, 40, 30, 15.0)]
    assert [part.group for part in found(painted(*lone))] == [None, None, None]


def test_two_alike_are_a_pair_only_where_they_are_near_each_other():
    near, far = row(2, 20, 30, 25, 15.0), row(2, 10, 30, 120, 15.0)
    assert [part.group for part in found(painted(*near))] == [0, 0]
    assert [part.group for part in found(painted(*far))] == [None, None]


def test_a_third_at_another_step_does_not_join_a_pair():
    boxes = [(10, 30, 12, 16, 15.0), (35, 30, 12, 16, 15.0), (100, 30, 12, 16, 15.0)]
    assert [part.group for part in found(painted(*boxes))] == [0, 0, None]


def test_groups_come_first_and_in_reading_order():
    boxes = [(5, 5, 50, 6, 12.0), *row(3, 20, 80, 25, 15.0), *row(3, 60, 30, 25, 15.0)]
    pieces = found(painted(*boxes))
    assert [part.group for part in pieces] == [0, 0, 0, 1, 1, 1, None]
    assert [part.patch.left for part in pieces] == [60, 85, 110, 20, 45, 70, 5]
