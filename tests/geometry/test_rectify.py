"""Rectification against scikit-image, OpenCV and a pinhole camera made of plain vectors."""

from __future__ import annotations

from math import cos, radians, sin

import cv2
import numpy as np
import pytest
from numpy.typing import NDArray
from skimage.transform import ProjectiveTransform

from irsurvey.geometry.footprint import pixel_area
from irsurvey.geometry.polygons import mask
from irsurvey.geometry.rectify import homography, pixel_areas
from irsurvey.model import Polygon

WINDOW: Polygon = ((112.25, 80.5), (520.0, 61.0), (561.5, 430.0), (70.0, 401.75))
SQUARE_ON: Polygon = ((99.5, 49.5), (499.5, 49.5), (499.5, 349.5), (99.5, 349.5))


def apply(matrix: NDArray[np.float64], points: NDArray[np.float64]) -> NDArray[np.float64]:
    u, v, w = matrix @ np.vstack([points.T, np.ones(len(points))])
    return np.column_stack([u / w, v / w])


def pinhole(points: NDArray[np.float64], *, focal: float, distance: float, tilt: float) -> NDArray[np.float64]:
    """Picture (x, y) [px] of points (X, Y) [m] on a wall turned about the upright through the optical axis."""
    depth = distance + points[:, 0] * sin(tilt)
    return np.column_stack([320 + focal * points[:, 0] * cos(tilt) / depth, 240 + focal * points[:, 1] / depth])


def test_corners_become_the_corners_of_the_rectangle() -> None:
    metres = apply(homography(WINDOW, 2.0, 1.5), np.array(WINDOW))
    np.testing.assert_allclose(metres, [(0, 0), (2, 0), (2, 1.5), (0, 1.5)], atol=1e-12)


def test_homography_is_that_of_scikit_image_and_opencv() -> None:
    """Both outside solutions agree with ours to the rounding of theirs: float64 for scikit-image, corners in float32
    (exact here) and a float64 solution for OpenCV."""
    ours = homography(WINDOW, 2.0, 1.5)
    ours /= ours[2, 2]
    rectangle = np.array([(0, 0), (2, 0), (2, 1.5), (0, 1.5)])
    opencv = cv2.getPerspectiveTransform(np.array(WINDOW, np.float32), rectangle.astype(np.float32))
    np.testing.assert_allclose(ours, opencv, rtol=1e-9, atol=1e-12)
    skimage = ProjectiveTransform.from_estimate(np.array(WINDOW), rectangle).params
    np.testing.assert_allclose(ours, skimage / skimage[2, 2], rtol=1e-8, atol=1e-11)


def test_a_corner_of_the_picture_on_the_horizon_does_no_harm() -> None:
    """A trapezium whose sides meet at pixel (0, 0), where a solution normalised at that pixel breaks down."""
    corners: Polygon = ((10, 5), (20, 10), (20, 40), (10, 20))
    matrix = homography(corners, 1.0, 1.0)
    np.testing.assert_allclose(apply(matrix, np.array(corners)), [(0, 0), (1, 0), (1, 1), (0, 1)], atol=1e-12)
    areas = pixel_areas((3, 3), corners, 1.0, 1.0)
    assert np.isnan(areas[:, 0]).all()


def test_areas_of_a_wall_seen_square_on_add_up_exactly() -> None:
    """400 × 300 pixels of a rectangle 2 m × 1.5 m, edges between pixels: no pixel is cut, only rounding remains."""
    areas = pixel_areas((480, 640), SQUARE_ON, 2.0, 1.5)
    assert areas[mask(SQUARE_ON, (480, 640))].sum() == pytest.approx(3.0, rel=1e-10)
    np.testing.assert_allclose(areas, 2.5e-5, rtol=1e-9)


def test_areas_inside_an_oblique_rectangle_add_up_to_its_area() -> None:
    """Width × height, but for the pixels the outline cuts: each is counted whole or not at all, so the sum may be off
    by at most half their area (far less in fact, as they cancel)."""
    shape = (480, 640)
    areas = pixel_areas(shape, WINDOW, 2.0, 1.5)
    inside = mask(WINDOW, shape)
    kernel = np.ones((3, 3), np.uint8)
    rim = cv2.dilate(inside.astype(np.uint8), kernel) != cv2.erode(inside.astype(np.uint8), kernel)
    assert areas[inside].sum() == pytest.approx(3.0, abs=areas[rim].sum() / 2)
    # the cuts cancel like a random walk: √1700 pixels × 0.29 px is 12 of 170 000, four times that 3e-4; measured 3e-5
    assert areas[inside].sum() == pytest.approx(3.0, rel=3e-4)


def test_the_area_of_a_pixel_is_that_of_its_square_carried_over_to_the_wall() -> None:
    """Each pixel's four corners mapped by scikit-image, shoelace over them.  The determinant at the centre leaves out
    second-order terms, (1 px/300 px)² ≈ 1e-5."""
    outside = ProjectiveTransform.from_estimate(np.array(WINDOW), np.array([(0, 0), (2, 0), (2, 1.5), (0, 1.5)]))
    areas = pixel_areas((480, 640), WINDOW, 2.0, 1.5)
    for x, y in ((112, 81), (300, 240), (561, 430), (10, 470), (639, 0)):
        square = outside(np.array([(x - 0.5, y - 0.5), (x + 0.5, y - 0.5), (x + 0.5, y + 0.5), (x - 0.5, y + 0.5)]))
        u, v = square.T
        shoelace = abs(u @ np.roll(v, -1) - v @ np.roll(u, -1)) / 2
        assert areas[y, x] == pytest.approx(shoelace, rel=1e-4)


@pytest.mark.parametrize("tilt_degrees", [0, 25, 45, 60])
def test_on_the_optical_axis_rectification_and_footprint_agree(tilt_degrees: float) -> None:
    """A pinhole camera, 1 mrad pixels, 3 m from a wall turned by the view angle: footprint²/cos there, exactly, since
    on the axis a pixel subtends its IFOV and the wall is at the distance."""
    tilt = radians(tilt_degrees)
    rectangle = np.array([(-0.4, -0.3), (0.5, -0.3), (0.5, 0.35), (-0.4, 0.35)])
    corners = tuple((float(x), float(y)) for x, y in pinhole(rectangle, focal=1000.0, distance=3.0, tilt=tilt))
    areas = pixel_areas((480, 640), corners, 0.9, 0.65)
    assert areas[240, 320] == pytest.approx(pixel_area(3.0, 1e-3, tilt), rel=1e-9)


def test_beyond_the_horizon_there_is_no_wall() -> None:
    """A floor strip 1 m wide running away from the camera: its edges meet at x 320, y 100 (drawn so), and above that
    row no pixel shows the floor; towards it the areas grow without bound."""
    corners: Polygon = ((290, 200), (350, 200), (380, 300), (260, 300))
    areas = pixel_areas((480, 640), corners, 1.0, 2.0)
    assert np.isnan(areas[:101]).all()
    assert np.isfinite(areas[101:]).all()
    assert (np.diff(areas[101:, 320]) < 0).all()


@pytest.mark.parametrize(
    "corners",
    [
        ((0, 0), (10, 0), (20, 0), (0, 10)),  # three in line
        ((0, 0), (10, 0), (0, 10), (10, 10)),  # two sides cross
        ((0, 0), (10, 0), (2, 2), (0, 10)),  # re-entrant
        ((5, 5), (5, 5), (5, 5), (5, 5)),
    ],
)
@pytest.mark.filterwarnings("error")
def test_corners_of_no_rectangle_give_nan(corners: Polygon) -> None:
    assert np.isnan(homography(corners, 1.0, 1.0)).all()
    assert np.isnan(pixel_areas((4, 4), corners, 1.0, 1.0)).all()


def test_areas_scale_with_width_times_height() -> None:
    """So that the uncertainty of a side is a factor, and one map in parts of the rectangle serves all."""
    parts = pixel_areas((48, 64), ((9, 5), (50, 8), (52, 40), (7, 37)), 1.0, 1.0)
    np.testing.assert_allclose(
        pixel_areas((48, 64), ((9, 5), (50, 8), (52, 40), (7, 37)), 2.0, 1.5), 3.0 * parts, rtol=1e-12
    )
