"""Incidence factor and Ψ against solvable profiles and the independent model of thermal bridges."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from thermal_bridge_model import CONCRETE_COLUMN, STEEL_STUD, TIMBER_STUD, Wall, bridge

from irsurvey.heat.bridge import incidence_factor, linear_transmittance

WALLS = {"concrete column": CONCRETE_COLUMN, "timber stud": TIMBER_STUD, "steel stud": STEEL_STUD}


def fin(pixels: int, step: float) -> tuple[NDArray[np.float64], float, float]:
    """A thin sheet with a line that draws heat: t − t_1D falls as exp(−m|x|), m² = (h_i + h_e)/(kd).

    Sheet kd 0.05 W/K, h_i 7.69, h_e 25, air 20 and 0 °C, 10 W/m drawn at the middle.  Pixel means [°C], t_1D, and Ψ:
    of what the line draws the inner face gives h_i/(h_i + h_e)."""
    both, h_i, sheet, drawn = 7.69 + 25, 7.69, 0.05, 10.0
    m = np.sqrt(both / sheet)
    undisturbed = 20 * h_i / both
    depth = drawn / (2 * np.sqrt(both * sheet))
    edges = (np.arange(pixels + 1) - pixels / 2) * step
    integral = np.sign(edges) * (1 - np.exp(-m * np.abs(edges))) / m
    return undisturbed - depth * np.diff(integral) / step, undisturbed, drawn * h_i / both / 20


def test_a_line_sink_in_a_sheet_has_its_analytic_psi_and_incidence_factor() -> None:
    """2 m of sheet, m = 25.6 per metre: e^−25 is missing."""
    profile, undisturbed, psi = fin(401, 0.005)
    length, u_value = 401 * 0.005, 7.69 * (20 - undisturbed) / 20
    found = linear_transmittance(7.69 * (20 - profile), 7.69 * (20 - undisturbed), length, 20.0)
    assert found == pytest.approx(psi, rel=1e-9)
    factor = incidence_factor(profile, undisturbed, 20.0)
    assert factor == pytest.approx(1 + psi / (u_value * length), rel=1e-9)


def test_two_walls_side_by_side_are_weighted_by_their_widths() -> None:
    """Without conduction between them: a fifth of the strip at U 2 among U 0.5: Ψ = (2 − 0.5)·0.2 m, I = 1.6."""
    flux = 20 * np.where(np.arange(100) < 20, 2.0, 0.5)
    assert linear_transmittance(flux, 10.0, 1.0, 20.0) == pytest.approx(0.3, rel=1e-12)
    assert incidence_factor(20 - 0.13 * flux, 20 - 0.13 * 10.0, 20.0) == pytest.approx(1.6, rel=1e-12)


@pytest.mark.parametrize("wall", WALLS.values(), ids=WALLS)
def test_the_independent_model_is_recovered_from_pixels(wall: Wall) -> None:
    """Two-dimensional conduction by finite volumes: pixels of 10 mm over 3 m, of which less than 0.1 % of the bridge's
    heat lies outside; temperatures alone, with the film of the model."""
    solved, film = bridge(wall), 1 / 0.13
    profile = solved.pixels(0.01, 301)
    factor = incidence_factor(profile, solved.t_undisturbed, solved.t_inside)
    assert factor == pytest.approx(solved.factor_within(1.505), rel=1e-9)
    psi = linear_transmittance(
        film * (solved.t_inside - profile), film * (solved.t_inside - solved.t_undisturbed), 3.01, 20.0
    )
    assert psi == pytest.approx(solved.psi, rel=0.001)


def test_a_strip_that_ends_too_soon_understates_the_bridge() -> None:
    solved = bridge(CONCRETE_COLUMN)
    short = solved.pixels(0.01, 61)
    excess = [
        linear_transmittance(solved.t_inside - profile, solved.t_inside - profile[0], 0.01 * profile.size, 20.0)
        for profile in (short, solved.pixels(0.01, 301))
    ]
    assert excess[0] < 0.9 * excess[1]


def test_a_cooled_building_has_the_same_factors() -> None:
    """Every temperature mirrored: I unchanged, and Ψ too, with flux positive out of the warm side."""
    profile, undisturbed, _ = fin(101, 0.02)
    mirrored = incidence_factor(40 - profile, 40 - undisturbed, 20.0)
    assert mirrored == pytest.approx(float(incidence_factor(profile, undisturbed, 20.0)), rel=1e-12)
    flux = 7.69 * (20 - profile)
    cooled, heated = (linear_transmittance(flux, 5.0, 2.02, delta_t) for delta_t in (-20.0, 20.0))
    assert cooled == heated


@pytest.mark.filterwarnings("error")
def test_bridges_broadcast_over_scenes_and_are_nan_without_a_difference() -> None:
    profiles = np.array([[18.0, 17.0, 18.0], [19.0, 15.0, 19.0]])
    together = incidence_factor(profiles, np.array([18.0, 20.0]), 20.0)
    assert together[0] == incidence_factor(profiles[0], 18.0, 20.0)
    assert np.isnan(together[1])
    psi = linear_transmittance(profiles, np.array([1.0, 2.0]), 0.3, np.array([20.0, 0.0]))
    assert psi[0] == linear_transmittance(profiles[0], 1.0, 0.3, 20.0)
    assert np.isnan(psi[1])
