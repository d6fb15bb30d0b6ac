"""Thermal bridges whose heat is known from conduction, rendered as frames, measured along strips, recovered."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import thermal_bridge_model as conduction
from forward import seen
from tasks import GOOD_CONDITIONS, frame, scene, task

from irsurvey import pipeline
from irsurvey.analysis.building import DISTURBED
from irsurvey.model import FrameReport, KnownLength, Strip

HEIGHT = 60
PIXELS = 301
PIXEL = 0.01  # [m]: 3 m of wall, enough for its ends to be undisturbed
NOISE = 0.01  # [K]: of a mean of some twenty frames; a single one would leave 3 % of the timber stud's Ψ uncertain
EMISSIVITY = 0.93
INDOOR, OUTDOOR = 293.15, 273.15
STRIP = Strip("across", (2.0, 30.0), (298.0, 30.0), width=21)

# The tool corrects with a film of 2.5 W/(m²·K) and exact radiation; the wall was solved with the same film.
FILM = conduction.radiating(2.5, EMISSIVITY, INDOOR)
WALLS = {
    "concrete through insulation": conduction.CONCRETE_COLUMN,
    "timber stud": conduction.TIMBER_STUD,
    "steel stud": conduction.STEEL_STUD,
}
BRIDGES = [
    ("concrete through insulation", PIXEL, PIXELS),
    ("timber stud", PIXEL, PIXELS),
    ("steel stud", 0.002, 1001),  # 1.5 mm of steel cool a line of a centimetre or two: seen from near
]


def surveyed(t_surface: np.ndarray, strip: Strip = STRIP, pixel: float = PIXEL) -> FrameReport:
    """A frame of these surface temperatures [K] along x, everything stated as it is, seen by a camera with noise."""
    reading = np.broadcast_to(seen(t_surface, EMISSIVITY, INDOOR), (HEIGHT, t_surface.size))
    stated = task(
        camera=replace(task().camera, noise=NOISE, accuracy=0.0, accuracy_fraction=0.0),
        scene=scene(
            emissivity=EMISSIVITY, reflected=INDOOR, air=INDOOR, mean_radiant=INDOOR, distance=0.0,
            indoor_air=INDOOR, outdoor_air=OUTDOOR, known_length=1.0, tilt=np.pi / 2,
            **GOOD_CONDITIONS,
        ),
        known_scale=KnownLength((0.0, 10.0), (1 / pixel, 10.0)),
        reference=((2.0, 2.0), (40.0, 2.0), (40.0, 57.0), (2.0, 57.0)),
        strips=(strip,),
    )  # fmt: skip
    report, _ = pipeline.analyse(frame(reading, seed=5, noise=NOISE), stated)
    return report


@pytest.mark.parametrize(("name", "pixel", "pixels"), BRIDGES)
def test_a_bridge_solved_by_finite_volumes_is_recovered_from_its_frame(name: str, pixel: float, pixels: int) -> None:
    """Ψ, incidence factor and temperature factor within 3 % of the solution (asked of the program as a whole)."""
    bridge = conduction.bridge(WALLS[name], inside=FILM)
    whole = Strip("across", (2.0, 30.0), (pixels - 3.0, 30.0), width=21)
    strip = surveyed(bridge.pixels(pixel, pixels), whole, pixel).strips[0]
    assert DISTURBED not in strip.flags
    assert strip.linear_transmittance_w_mk.value == pytest.approx(bridge.psi, rel=0.03)
    half = (pixels - 4) * pixel / 2  # that many samples of one pixel each
    assert strip.incidence_factor.value == pytest.approx(bridge.factor_within(half), rel=0.03)
    assert strip.temperature_factor.value == pytest.approx(bridge.f_rsi, rel=0.03)


def test_a_strip_too_short_says_that_its_ends_are_disturbed() -> None:
    """A strip of 0.5 m ends where the concrete still cools the wall: its Ψ is too small, and it says so."""
    bridge = conduction.bridge(conduction.CONCRETE_COLUMN, inside=FILM)
    strip = surveyed(bridge.pixels(PIXEL, PIXELS), Strip("short", (125.0, 30.0), (175.0, 30.0), width=21)).strips[0]
    assert DISTURBED in strip.flags
    assert strip.linear_transmittance_w_mk.value < 0.9 * bridge.psi


def test_a_wall_without_a_bridge_has_no_linear_transmittance() -> None:
    """A plane wall: incidence factor 1, Ψ 0, within three of their standard uncertainties from noise."""
    strip = surveyed(np.full(PIXELS, 291.0)).strips[0]
    assert strip.incidence_factor.value == pytest.approx(1.0, abs=0.01)
    assert strip.linear_transmittance_w_mk.value == pytest.approx(0.0, abs=0.02)


def test_one_end_alone_may_be_undisturbed() -> None:
    """Half of the symmetric bridge, from its middle to the undisturbed end: half of Ψ."""
    bridge = conduction.bridge(conduction.CONCRETE_COLUMN, inside=FILM)
    half = Strip("half", (150.0, 30.0), (298.0, 30.0), width=21, undisturbed="to")
    strip = surveyed(bridge.pixels(PIXEL, PIXELS), half).strips[0]
    assert strip.linear_transmittance_w_mk.value == pytest.approx(bridge.psi / 2, rel=0.05)


def test_the_field_of_iso_10211_comes_out_of_a_frame_as_it_went_in() -> None:
    """ISO 10211:2017 Annex A, case 1: half a square column, 20 °C on top, 0 °C at the other sides; 28 temperatures
    of the standard, printed to 0.1 K.  Of one column of points a frame is made, of the four the field."""
    printed = np.array([
        [9.7, 13.4, 14.7, 15.1], [5.3, 8.6, 10.3, 10.8], [3.2, 5.6, 7.0, 7.5], [2.0, 3.6, 4.7, 5.0],
        [1.3, 2.3, 3.0, 3.2], [0.7, 1.4, 1.8, 1.9], [0.3, 0.6, 0.8, 0.9],
    ])  # fmt: skip
    cells = 40  # to a quarter of the width: points lie on cell corners, the mean of the four around each
    field = conduction.solve(
        np.ones((8 * cells, 4 * cells)), np.full(4 * cells, 1 / cells), np.full(8 * cells, 1 / cells),
        top=(np.inf, 20.0), left=(np.inf, 0.0), bottom=(np.inf, 0.0),
    ).temperature  # fmt: skip
    reading = seen(field + 273.15, EMISSIVITY, INDOOR)
    stated = task(
        camera=replace(task().camera, noise=0.01),
        scene=scene(emissivity=EMISSIVITY, reflected=INDOOR, air=INDOOR, distance=0.0),
        reference=None,
    )
    _, maps = pipeline.analyse(frame(reading, None), stated)
    rows, columns = np.arange(1, 8) * cells, np.arange(1, 5) * cells
    padded = np.pad(maps.temperature_c, ((0, 0), (0, 1)), mode="edge")  # the right side is the plane of symmetry
    at = [[padded[r - 1 : r + 1, c - 1 : c + 1].mean() for c in columns] for r in rows]
    # 0.05 K for the printed digit, 0.01 K for frames of hundredths of a kelvin, 0.03 K for cells of a fortieth
    np.testing.assert_allclose(at, printed, atol=0.09)
