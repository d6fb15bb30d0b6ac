"""Fragile classes, against an example worked by hand and the measurement equation run again."""

from __future__ import annotations

from math import inf, nan

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from irsurvey.assess.criteria import class_of, criteria
from irsurvey.assess.fragile import fragile
from irsurvey.assess.judged import Sensitivity
from irsurvey.radiometry.measurement import Path, apparent_temperature, object_temperature

SIMILAR = criteria()["neta-similar"]
AMBIENT = criteria()["neta-ambient"]


def test_the_changes_that_flip_a_class_worked_by_hand() -> None:
    # 2.4 K is "slight", between 1 and 3 K: up it takes +0.6 K, down −1.4 K.
    # emissivity, −40 K per unit: −0.015 (0.75 u) up, +0.035 (1.75 u) down; reflected, −0.35 K/K: −1.714 K (1.71 u) up,
    # +4 K (4 u) down, too far; distance, 0.05 K/m: 12 m up, too far.
    inputs = (
        Sensitivity("distance", 0.1, 0.05),
        Sensitivity("reflected", 1.0, -0.35),
        Sensitivity("emissivity", 0.02, -40.0, most=0.05),
    )
    found = fragile(2.4, SIMILAR, inputs)
    assert [(flip.name, flip.to_class) for flip in found] == [
        ("emissivity", "marked"),
        ("reflected", "marked"),
        ("emissivity", "alike"),
    ]
    assert [flip.change for flip in found] == pytest.approx([-0.015, -0.6 / 0.35, 0.035], abs=1e-12)
    assert [flip.in_u for flip in found] == pytest.approx([0.75, 0.6 / 0.35, 1.75], abs=1e-12)


def test_no_change_leaves_the_domain_of_its_input() -> None:
    # at 0.97 an emissivity can rise by 0.03 only, and +0.035 would be needed
    found = fragile(2.4, SIMILAR, [Sensitivity("emissivity", 0.02, -40.0, most=0.03)])
    assert [flip.change for flip in found] == pytest.approx([-0.015], abs=1e-12)


def test_a_class_that_nothing_can_change_is_not_fragile() -> None:
    robust = [Sensitivity("reflected", 1.0, -0.35), Sensitivity("air", 0.0, 5.0), Sensitivity("distance", 1.0, 0.0)]
    assert fragile(8.0, SIMILAR, robust) == ()
    assert fragile(2.4, SIMILAR, []) == ()


def test_what_is_not_known_flips_nothing() -> None:
    inputs = [Sensitivity("a", nan, 1.0), Sensitivity("b", 1.0, nan), Sensitivity("c", 1.0, inf)]
    assert fragile(2.9, SIMILAR, inputs) == ()
    assert fragile(nan, SIMILAR, [Sensitivity("a", 1.0, 1.0)]) == ()


def test_the_change_found_carries_the_measurement_to_the_edge() -> None:
    # A part truly at 80 °C, reflected 25 °C, 8–14 µm, ε 0.70 ± 0.05, 42.5 K above ambient air: "extreme" begins above
    # 40 K.  The change of emissivity found to first order is put through the measurement equation.
    band, t, t_reflected = (8e-6, 14e-6), 353.15, 298.15
    path = Path(t_air=t_reflected, distance=0.0, vapour_density=0.01, pressure=101325.0)
    seen = apparent_temperature(t, 0.70, t_reflected, path, band)

    def rise(emissivity: float) -> float:
        return float(object_temperature(seen, emissivity, t_reflected, path, band)) - (t - 42.5)

    slope = (rise(0.75) - rise(0.65)) / 0.10
    assert [rise(0.75), rise(0.65)] == pytest.approx([76.9 - 37.5, 83.5 - 37.5], abs=0.06)  # handbook case, one decimal
    found = fragile(rise(0.70), AMBIENT, [Sensitivity("emissivity", 0.05, slope, -0.70, 0.30)])
    assert [flip.to_class for flip in found] == ["very hot"]
    # first order misses half the curvature: at ±u the rise is 0.2 K above the straight line
    assert rise(0.70 + found[0].change) == pytest.approx(40.0, abs=0.2)


RECORDS = st.lists(
    st.builds(Sensitivity, st.just("x"), st.floats(1e-3, 5), st.floats(-10, 10), st.floats(-9, 0), st.floats(0, 9)),
    max_size=4,
)


@given(st.floats(-5, 60), RECORDS)
@example(1.0, [Sensitivity("x", 1.0, 2.0), Sensitivity("x", 1.0, -2.0)])  # on an edge, which belongs to its class
@example(3.0, [Sensitivity("x", 1.0, 2.0), Sensitivity("x", 1.0, -2.0)])
def test_a_flip_is_the_smallest_change_to_another_class(value: float, inputs: list[Sensitivity]) -> None:
    found = fragile(value, SIMILAR, inputs)
    assert [flip.in_u for flip in found] == sorted(flip.in_u for flip in found)
    now = class_of(value, SIMILAR)
    for one in inputs:
        flips = fragile(value, SIMILAR, [one])
        least = min((abs(flip.change) for flip in flips), default=2 * one.u)
        for share in np.linspace(-0.999, 0.999, 9):  # nothing nearer flips
            change = float(np.clip(share * least, one.least, one.most))
            assert class_of(value + one.sensitivity * change, SIMILAR) == now
        for flip in flips:
            assert one.least <= flip.change <= one.most
            assert abs(flip.change) <= 2 * one.u
            beyond = value + one.sensitivity * flip.change
            beyond += np.copysign(1e-9, one.sensitivity * flip.change)  # over an edge that belongs to this class
            kind = class_of(beyond, SIMILAR)
            assert kind is not None
            assert kind.name == flip.to_class
