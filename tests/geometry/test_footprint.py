"""Footprint and spot size against the trade's arithmetic."""

from __future__ import annotations

from math import cos, radians, tan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.geometry.footprint import largest_distance, pixel_area, pixel_side, scale_from_length, spot_size


def test_three_pixel_spot_of_an_ordinary_lens() -> None:
    """0.923 mrad at 3 m: spot of 8.3 mm; a 6 mm lug can be read to 2.17 m (computed; the 3-pixel rule is common
    practice); printed rounding."""
    assert spot_size(3.0, 0.923e-3, 3) == pytest.approx(8.3e-3, abs=0.05e-3)
    assert largest_distance(6e-3, 0.923e-3, 3) == pytest.approx(2.17, abs=0.005)


def test_one_milliradian_is_one_millimetre_at_one_metre() -> None:
    """Common practice; the exact footprint 2d tan(IFOV/2) differs by 1e-7."""
    assert pixel_side(1.0, 1e-3) == pytest.approx(1e-3, rel=1e-12)
    assert pixel_side(1.0, 1e-3) == pytest.approx(2 * tan(1e-3 / 2), rel=1e-6)


def test_a_tilted_surface_fills_a_pixel_with_more_of_itself() -> None:
    """Cosine law: 60° from the normal doubles the area; the definition of area is footprint²/cos(view angle)."""
    assert pixel_area(2.0, 1e-3, 0.0) == pytest.approx(4e-6, rel=1e-12)
    assert pixel_area(2.0, 1e-3, radians(60)) == pytest.approx(8e-6, rel=1e-12)
    angles = np.radians([-40, 10, 40, 75])
    assert pixel_area(2.0, 1e-3, angles) == pytest.approx([4e-6 / cos(a) for a in angles], rel=1e-12)


def test_scale_from_a_known_length() -> None:
    """A door of 0.90 m across 3-4-5: 300 px right and 400 px down are 500 px, so 1.8 mm each (Pythagoras)."""
    assert scale_from_length((10, 20), (310, 420), 0.90) == pytest.approx(1.8e-3, rel=1e-12)


@given(st.floats(1e-3, 10), st.floats(1e-5, 1e-2), st.integers(1, 10))
def test_at_its_largest_distance_a_target_is_exactly_one_spot(size: float, ifov: float, pixels: int) -> None:
    assert spot_size(largest_distance(size, ifov, pixels), ifov, pixels) == pytest.approx(size, rel=1e-12)


@pytest.mark.filterwarnings("error")
def test_outside_the_domain_is_nan() -> None:
    assert np.isnan(pixel_side(np.array([-1.0, np.nan]), 1e-3)).all()
    assert np.isnan(pixel_area(1.0, 1e-3, np.radians([90.0, -90.0, 120.0]))).all()
    assert np.isnan(largest_distance(1e-3, np.array([0.0, -1.0]), 3)).all()
    assert np.isnan(scale_from_length((3, 3), (3, 3), 1.0))
    assert pixel_side(0.0, 1e-3) == 0


def test_arrays_give_what_numbers_give() -> None:
    distance, angle = np.array([[1.0], [2.5]]), np.array([0.0, 0.5, 1.0])
    together = pixel_area(distance, 1e-3, angle)
    singly = [[pixel_area(float(d), 1e-3, float(a)) for a in angle] for d in distance[:, 0]]
    np.testing.assert_allclose(together, singly, rtol=1e-14)
