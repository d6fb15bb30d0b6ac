"""Frames as codes, and corrections looked up per stored value."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays

from irsurvey.model import Signal
from irsurvey.radiometry.lookup import encode, look_up, stored_values, temperature_table
from irsurvey.radiometry.measurement import Path, object_temperature

BAND = (7.5e-6, 13e-6)
PATH = Path(t_air=293.15, distance=5.0, vapour_density=0.008, pressure=101_325.0)
CENTIKELVIN = Signal("apparent-temperature", scale=0.01)


def decoded(codes) -> np.ndarray:
    """The frame again, as look_up gives it."""
    return look_up(codes, stored_values(codes))


def test_a_uint16_frame_is_not_copied_and_comes_back_as_it_is() -> None:
    frame = np.random.default_rng(1).integers(5000, 9000, (40, 60)).astype(np.uint16)
    codes = encode(frame, None, resolution=0.001)
    assert codes.codes is frame
    assert codes.key == (0.0, 1.0, frame.min(), frame.max())
    assert codes.no_data is None
    np.testing.assert_array_equal(decoded(codes), frame)
    assert decoded(codes).dtype == np.float32


@pytest.mark.parametrize("dtype", ["uint8", "int8", "int16", "uint16", "int32", "uint32", "int64"])
def test_integers_keep_their_values(dtype: str) -> None:
    """All numbers here are below 2²⁴, so float32 holds them."""
    limits = np.iinfo(dtype)
    low, high = max(limits.min, -30_000), min(limits.max, 30_000)
    frame = np.linspace(low, high, 600).astype(dtype).reshape(20, 30)
    missing = np.zeros(frame.shape, bool)
    missing[3, 4] = True
    codes = encode(frame, missing, resolution=0.001)
    np.testing.assert_array_equal(decoded(codes)[~missing], frame[~missing])
    assert np.isnan(decoded(codes)[missing]).all()
    assert codes.codes[3, 4] == codes.no_data


@settings(deadline=None)  # the first example builds tables
@given(
    arrays.arrays(np.float32, (6, 7), elements=st.floats(-60, 400, width=32)),
    arrays.arrays(np.bool_, (6, 7)),
)
def test_floats_are_rounded_to_the_resolution(frame: np.ndarray, missing: np.ndarray) -> None:
    codes = encode(frame, missing, resolution=0.01)
    back = decoded(codes)
    assert (np.isnan(back) == missing).all()
    # half a step; float32 near 400 adds 2e-5
    assert (np.abs(back - frame)[~missing] <= 0.005 + 4e-5).all()
    assert missing.all() or codes.step == 0.01


def test_not_a_number_and_infinity_are_no_data() -> None:
    frame = np.array([[20.0, np.nan, 21.0], [np.inf, -np.inf, 22.0]])
    codes = encode(frame, None, resolution=0.001)
    np.testing.assert_array_equal(np.isnan(decoded(codes)), ~np.isfinite(frame))
    assert not codes.lowest <= codes.no_data <= codes.highest


def test_a_range_too_wide_for_the_resolution_is_coarsened_as_little_as_possible() -> None:
    frame = np.array([[0.0, 65.534], [131.068, 40.0]])
    codes = encode(frame, None, resolution=0.001)
    assert codes.step == pytest.approx(0.002, rel=1e-12)
    assert np.abs(decoded(codes) - frame).max() <= 0.001 + 1e-5  # half a step; float32 near 131 adds 8e-6
    wide = encode(np.array([[0, 655_340]], np.int32), None, resolution=0.001)
    assert (wide.step, wide.highest) == (10.0, 65_534)


def test_a_full_uint16_range_with_missing_pixels_still_has_a_code_for_them() -> None:
    frame = np.array([[0, 65_535], [7, 30_000]], np.uint16)
    missing = np.array([[False, False], [True, False]])
    back = decoded(encode(frame, missing, resolution=0.001))
    assert np.isnan(back[1, 0])
    # 65 536 values on 65 535 codes: the step is 65 535/65 534, so half of it is what may be lost
    assert np.abs(back - frame)[~missing].max() <= 0.51


def test_a_frame_without_any_value_has_no_table() -> None:
    codes = encode(np.full((3, 3), np.nan), None, resolution=0.001)
    assert stored_values(codes).size == 0
    assert np.isnan(decoded(codes)).all()


def test_views_and_read_only_frames_are_looked_up() -> None:
    stack = np.arange(2 * 40 * 60, dtype=np.uint16).reshape(2, 40, 60)
    stack.setflags(write=False)
    frame = stack[1, ::2, ::3]
    np.testing.assert_array_equal(decoded(encode(frame, None, resolution=1.0)), frame)


def test_a_table_is_the_measurement_equation_at_every_stored_value() -> None:
    """Within 1e-5 K of the iterated inverse: what both claim."""
    key = (0.0, 1.0, 27_000, 33_000)
    table = temperature_table(key, CENTIKELVIN, BAND, 0.3, 0.01, 295.0, 0.92, 290.0, PATH)
    seen = np.arange(27_000, 33_001) * 0.01
    seen = seen + 0.3 + 0.01 * (seen - 295.0)
    assert table == pytest.approx(object_temperature(seen, 0.92, 290.0, PATH, BAND), abs=1e-5)


def test_a_table_is_made_once_and_nobody_can_spoil_it() -> None:
    arguments = ((0.0, 1.0, 29_000, 29_100), CENTIKELVIN, BAND, 0.0, 0.0, 295.0, 0.92, 290.0, PATH)
    table = temperature_table(*arguments)
    assert temperature_table(*arguments) is table
    with pytest.raises(ValueError, match="read-only"):
        table[0] = 300.0


def test_a_stored_value_without_a_solution_is_nan_on_the_map() -> None:
    """A shiny plate that seems colder than the sky it mirrors: no temperature explains it."""
    frame = np.array([[24_000, 29_500]], np.uint16)
    codes = encode(frame, None, resolution=1.0)
    table = temperature_table(codes.key, CENTIKELVIN, BAND, 0.0, 0.0, 295.0, 0.1, 290.0, PATH)
    celsius = look_up(codes, table - 273.15)
    assert np.isnan(celsius[0, 0])
    assert np.isfinite(celsius[0, 1])
