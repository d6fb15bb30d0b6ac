"""What the correction of one frame costs against a bare table look-up of the same frame.

Run with `pytest tests/benchmarks/bench_correction.py -s`.  Prints ratios of medians measured in turn in one run;
no time decides pass or fail, only that what is timed is right."""

from __future__ import annotations

from collections.abc import Callable
from statistics import median
from time import perf_counter

import cv2
import numpy as np
import pytest

from irsurvey.model import Signal
from irsurvey.radiometry import measurement
from irsurvey.radiometry.band import band_table
from irsurvey.radiometry.lookup import encode, look_up, temperature_table
from irsurvey.radiometry.measurement import Path, object_temperature

BAND = (7.5e-6, 13e-6)
SIGNAL = Signal("apparent-temperature", scale=0.04)
PATH = Path(t_air=293.15, distance=5.0, vapour_density=0.0086, pressure=101_325.0)
SURFACE = (SIGNAL, BAND, 0.0, 0.0, 293.0, 0.92, 290.0, PATH)

pytestmark = pytest.mark.benchmark


def medians(steps: dict[str, Callable[[], object]], rounds: int) -> dict[str, float]:
    """Median time of each step [s], taken in turn so that all meet the same conditions."""
    times: dict[str, list[float]] = {name: [] for name in steps}
    for _ in range(rounds):
        for name, step in steps.items():
            start = perf_counter()
            step()
            times[name].append(perf_counter() - start)
    return {name: median(taken) for name, taken in times.items()}


def frame() -> np.ndarray:
    """512 × 640 stored numbers, 3000 values wide, smooth along rows as pictures are."""
    walk = np.cumsum(np.random.default_rng(0).normal(0, 20, (512, 640)), axis=1)
    picture = np.clip(7500 + walk, 6000, 8999).astype(np.uint16)
    picture[0, :2] = 6000, 8999
    return picture


def test_one_frame_with_one_emissivity_against_a_bare_look_up() -> None:
    codes = encode(frame(), None, resolution=0.001)
    assert codes.highest - codes.lowest + 1 == 3000
    bare = np.full(65_536, np.nan, np.float32)

    def first_of_a_scene() -> np.ndarray:
        measurement._one_scene.cache_clear()
        return look_up(codes, temperature_table.__wrapped__(codes.key, *SURFACE) - 273.15)

    def next_of_a_scene() -> np.ndarray:
        return look_up(codes, temperature_table.__wrapped__(codes.key, *SURFACE) - 273.15)

    def again() -> np.ndarray:
        return look_up(codes, temperature_table(codes.key, *SURFACE) - 273.15)

    expected = object_temperature(codes.codes * SIGNAL.scale, 0.92, 290.0, PATH, BAND) - 273.15
    for step in (first_of_a_scene, next_of_a_scene, again):
        # 1e-5 K of the inverse, and float32 near 86 °C
        np.testing.assert_allclose(step(), expected, rtol=0, atol=2e-5)

    taken = medians(
        {
            "bare cv2.LUT": lambda: cv2.LUT(codes.codes, bare),
            "correction, first frame of a scene": first_of_a_scene,
            "correction, next frame of that scene": next_of_a_scene,
            "correction, table cached": again,
            "encode": lambda: encode(codes.codes, None, resolution=0.001),
        },
        rounds=500,
    )
    floor = taken["bare cv2.LUT"]
    print()
    for name, seconds in taken.items():
        print(f"{name:38s} {seconds * 1e6:7.0f} µs  {seconds / floor:5.2f} × bare")


def test_the_inverse_alone() -> None:
    band_table(BAND)
    rng = np.random.default_rng(1)
    values, many = np.linspace(260, 360, 3000), np.sort(rng.uniform(280, 300, (1, 1500)))
    emissivity, reflected = rng.uniform(0.8, 0.95, (31, 1)), rng.uniform(285, 295, (31, 1))
    scenes = Path(
        t_air=rng.uniform(290, 295, (31, 1)), distance=rng.uniform(4, 6, (31, 1)), vapour_density=0.008, pressure=1e5
    )
    result = object_temperature(many, emissivity, reflected, scenes, BAND)
    assert result.shape == (31, 1500)
    assert np.isfinite(result).all()
    taken = medians(
        {
            "np.interp, 3000 values": lambda: band_table(BAND).temperature(band_table(BAND).radiance(values)),
            "object_temperatures, 3000 values": lambda: measurement.object_temperatures(values, 0.9, 290.0, PATH, BAND),
            "object_temperature, 3000 values": lambda: object_temperature(values, 0.9, 290.0, PATH, BAND),
            "object_temperature, 31 × 1500": lambda: object_temperature(many, emissivity, reflected, scenes, BAND),
        },
        rounds=100,
    )
    floor = taken["np.interp, 3000 values"]
    print()
    for name, seconds in taken.items():
        print(f"{name:38s} {seconds * 1e6:7.0f} µs  {seconds / floor:5.1f} × two interpolations of 3000 values")


def test_a_table_of_a_new_band() -> None:
    def built() -> object:
        band_table.cache_clear()
        return band_table(BAND)

    seconds = medians({"built": built}, rounds=10)["built"]
    assert band_table(BAND).worst_error < 0.02
    print(f"\nband table: {seconds * 1e3:.1f} ms, worst error {band_table(BAND).worst_error:.1e} K")
