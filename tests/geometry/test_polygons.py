"""Polygons on the pixel grid against exact arithmetic, scikit-image and OpenCV."""

from __future__ import annotations

from fractions import Fraction

import cv2
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from skimage.measure import grid_points_in_poly, label

from irsurvey.geometry.polygons import area, inside_fault, mask, outline
from irsurvey.model import Polygon

SHAPE = (11, 14)


def exactly_inside(polygon: Polygon, x: int, y: int) -> bool:
    """In or on, by definition and in fractions: on an edge, or an odd number of edges to the right (even-odd)."""
    corners = [(Fraction(str(a)), Fraction(str(b))) for a, b in polygon]
    odd = False
    for (x1, y1), (x2, y2) in zip(corners, corners[1:] + corners[:1], strict=True):
        turn = (x2 - x1) * (y - y1) - (x - x1) * (y2 - y1)
        if turn == 0 and min(x1, x2) <= x <= max(x1, x2) and min(y1, y2) <= y <= max(y1, y2):
            return True
        if (y1 <= y) != (y2 <= y) and x1 + (y - y1) / (y2 - y1) * (x2 - x1) > x:
            odd = not odd
    return odd


def exact_mask(polygon: Polygon, shape: tuple[int, int]) -> NDArray[np.bool_]:
    return np.array([[exactly_inside(polygon, x, y) for x in range(shape[1])] for y in range(shape[0])])


def corners_in(step: int) -> st.SearchStrategy[Polygon]:
    """Polygons of 1 to 9 corners in and around the frame, coordinates in 1/step px; many meet pixel centres."""
    x = st.integers(-3 * step, (SHAPE[1] + 2) * step).map(lambda n: n / step)
    y = st.integers(-3 * step, (SHAPE[0] + 2) * step).map(lambda n: n / step)
    return st.lists(st.tuples(x, y), min_size=1, max_size=9).map(tuple)


@settings(max_examples=300, deadline=None)
@given(st.one_of(corners_in(1), corners_in(2), corners_in(10), corners_in(1000)))
def test_mask_is_the_exact_even_odd_rule_with_its_outline(polygon: Polygon) -> None:
    """Convex or not, crossing itself or not, decimals included: 0.1 is meant as a tenth although no float is."""
    np.testing.assert_array_equal(mask(polygon, SHAPE), exact_mask(polygon, SHAPE))


@pytest.mark.parametrize("seed", range(40))
def test_mask_agrees_with_scikit_image_inside_and_on_the_outline(seed: int) -> None:
    """grid_points_in_poly labels outside 0, inside 1, corner 2, edge 3.  Corners in the order of their direction from
    a point inside: scikit-image counts an edge walked twice as no edge, so outlines that overlap are not compared."""
    random = np.random.default_rng(seed)
    x, y = random.integers(0, SHAPE[1], 40), random.integers(0, SHAPE[0], 40)
    _, chosen = np.unique(np.arctan2(y - 5.5, x - 6.5), return_index=True)
    chosen = chosen[:: 1 + seed % 3]
    outside = grid_points_in_poly(SHAPE, list(zip(y[chosen], x[chosen], strict=True)), binarize=False)
    inside = mask(tuple(zip(x[chosen].tolist(), y[chosen].tolist(), strict=True)), SHAPE)
    np.testing.assert_array_equal(inside, outside > 0)


def test_a_rectangle_holds_its_edges_and_corners() -> None:
    """Definition: a polygon contains the pixels whose centres lie inside or on it: 3…7 × 2…5 is 5 × 4 pixels."""
    inside = mask(((3, 2), (7, 2), (7, 5), (3, 5)), SHAPE)
    assert inside.sum() == 20
    assert inside[2:6, 3:8].all()
    assert mask(((3.5, 2.5), (7.5, 2.5), (7.5, 5.5), (3.5, 5.5)), SHAPE).sum() == 12


def test_a_five_pointed_star_has_a_hollow_middle() -> None:
    """Even-odd rule: the pentagon in the middle of a star drawn in one stroke is outside."""
    angles = np.radians(90 + 144 * np.arange(5))
    star = tuple((50 + 40 * float(c), 50 - 40 * float(s)) for c, s in zip(np.cos(angles), np.sin(angles), strict=True))
    inside = mask(star, (101, 101))
    assert not inside[50, 50]
    assert inside[20, 50]


def test_a_polygon_wholly_or_partly_outside_the_frame_is_cut_off() -> None:
    assert mask(((-5, -5), (50, -5), (50, 50), (-5, 50)), SHAPE).all()
    assert not mask(((20, 2), (30, 2), (30, 8)), SHAPE).any()
    assert not mask(((2, -9), (9, -9), (9, -2)), SHAPE).any()


def test_a_point_a_line_and_nothing_are_polygons_too() -> None:
    assert np.argwhere(mask(((4, 3),), SHAPE)).tolist() == [[3, 4]]
    assert not mask(((4.5, 3),), SHAPE).any()
    assert np.argwhere(mask(((2, 2), (6, 4)), SHAPE)).tolist() == [[2, 2], [3, 4], [4, 6]]
    assert not mask((), SHAPE).any()


def test_a_large_polygon_of_many_corners_is_exact_too() -> None:
    """512 × 640 pixels, 400 corners, against scikit-image; whose corners and edges meet no pixel centre."""
    angles = np.linspace(0, 2 * np.pi, 400, endpoint=False)
    radius = 150 + 60 * np.sin(9 * angles)
    x, y = 320.1 + radius * np.cos(angles), 250.3 + radius * np.sin(angles)
    polygon = tuple(zip(x.tolist(), y.tolist(), strict=True))
    outside = grid_points_in_poly((512, 640), [(y, x) for x, y in polygon])
    np.testing.assert_array_equal(mask(polygon, (512, 640)), outside)


@given(st.lists(st.tuples(st.integers(0, 500), st.integers(0, 500)), min_size=3, max_size=10))
def test_area_is_that_of_opencv(corners: list[tuple[int, int]]) -> None:
    """cv2.contourArea, exact for whole numbers of this size."""
    assert area(tuple(corners)) == cv2.contourArea(np.array(corners, np.float32))


def test_area_of_less_than_a_triangle_is_zero() -> None:
    assert area(()) == area(((1, 2),)) == area(((1, 2), (7, 9))) == 0


def test_the_frame_ends_half_a_pixel_beyond_the_outer_centres() -> None:
    """Definition: pixel centres at integers, so a frame of 14 × 11 reaches from −0.5 to 13.5 and 10.5."""
    assert inside_fault(((-0.5, -0.5), (13.5, -0.5), (13.5, 10.5), (-0.5, 10.5)), SHAPE) is None
    assert inside_fault(((0, 0), (14, 5), (3, 9)), SHAPE) == "corner [14, 5], outside a frame of 14 × 11 pixels"
    for corner in ((-0.6, 3), (3, -0.6), (13.6, 3), (3, 10.6), (float("nan"), 3), (3, float("inf"))):
        assert inside_fault(((0, 0), (5, 5), corner), SHAPE) is not None


# --- outlines ---------------------------------------------------------------------------------------------------------


def without_holes(region: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Background that cannot reach the frame's edge in four directions belongs to the region (scikit-image labels)."""
    background = label(~np.pad(region, 1), connectivity=1)
    return (background != background[0, 0])[1:-1, 1:-1]


@st.composite
def blobs(draw: st.DrawFn) -> NDArray[np.bool_]:
    """One connected region, at corners or at sides, solid or thin, often touching the frame's edge."""
    connectivity = draw(st.sampled_from([1, 2]))
    seed = draw(st.integers(0, 2**32 - 1))
    density = draw(st.floats(0.2, 0.9))
    noise = np.random.default_rng(seed).random(SHAPE) < density
    noise[draw(st.integers(0, SHAPE[0] - 1)), draw(st.integers(0, SHAPE[1] - 1))] = True
    labels = label(noise, connectivity=connectivity)
    return labels == draw(st.integers(1, int(labels.max())))


@settings(max_examples=500, deadline=None)
@given(blobs())
def test_the_mask_of_an_outline_is_the_region_with_its_holes_filled(region: NDArray[np.bool_]) -> None:
    """Definition: a finding's polygon is its outer outline; no pixel may be lost or won."""
    np.testing.assert_array_equal(mask(outline(region), SHAPE), without_holes(region))


@pytest.mark.parametrize(
    "pixels",
    [
        [(4, 3)],
        [(0, 0)],
        [(2, 2), (3, 2), (4, 2)],
        [(2, 2), (3, 3), (4, 4), (5, 5)],
        [(2, 2), (3, 2), (4, 2), (3, 3), (3, 4)],
        [(x, y) for x in range(3, 9) for y in range(2, 8) if x in (3, 8) or y in (2, 7)],
    ],
    ids=["one pixel", "one pixel in the corner", "a line", "a diagonal", "a T", "a ring"],
)
def test_thin_regions_come_back_from_their_outlines(pixels: list[tuple[int, int]]) -> None:
    region = np.zeros(SHAPE, dtype=np.bool_)
    for x, y in pixels:
        region[y, x] = True
    np.testing.assert_array_equal(mask(outline(region), SHAPE), without_holes(region))


def test_outlines_are_short_and_plain_numbers() -> None:
    """Straight runs have corners only; the numbers go into JSON as they are."""
    region = np.zeros(SHAPE, dtype=np.bool_)
    region[2:9, 3:12] = True
    corners = outline(region)
    assert set(corners) == {(3, 2), (11, 2), (11, 8), (3, 8)}
    assert len(corners) == 4
    assert all(type(x) is int and type(y) is int for x, y in corners)
    assert outline(np.zeros(SHAPE, dtype=np.bool_)) == ()
