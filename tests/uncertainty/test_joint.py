"""Inputs that move together: correlation and leaders with followers, against JCGM 100 and linear algebra."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.model import Quantity, Scene
from irsurvey.uncertainty import correlation_matrix, propagate

# JCGM 100:2008, table H.2: amplitude V [V], current I [mA], phase shift φ [rad], five sets of simultaneous readings.
READINGS = np.array(
    [
        [5.007, 4.994, 5.005, 4.990, 4.999],
        [19.663, 19.639, 19.640, 19.685, 19.678],
        [1.0456, 1.0438, 1.0468, 1.0428, 1.0433],
    ]
)


def circuit():
    """The scene of example H.2: means, their experimental standard deviations and correlation coefficients."""
    means, u = READINGS.mean(axis=1), READINGS.std(axis=1, ddof=1) / np.sqrt(READINGS.shape[1])
    r = np.corrcoef(READINGS)
    names = ("voltage", "current", "phase")
    return Scene(
        tuple(Quantity(name, value, spread) for name, value, spread in zip(names, means, u, strict=True)),
        tuple((names[i], names[j], float(r[i, j])) for i, j in ((0, 1), (0, 2), (1, 2))),
    )


def impedance(v):
    z = 1000 * v["voltage"] / v["current"]
    return np.hstack([z * np.cos(v["phase"]), z * np.sin(v["phase"]), z])


def test_resistance_and_reactance_have_the_published_values_and_uncertainties():
    # JCGM 100:2008, table H.3: R, X, Z [Ω], printed to 1 mΩ.  Table H.4 has the same from the single sets.
    budget = propagate(impedance, circuit())
    assert budget.values == pytest.approx([127.732, 219.847, 254.260], abs=0.001)  # the print rounds inputs first
    assert budget.u == pytest.approx([0.071, 0.295, 0.236], abs=0.0006)


def test_resistance_and_reactance_are_correlated_as_published():
    # JCGM 100:2008, table H.3: r(R,X) −0.588, r(R,Z) −0.485, r(X,Z) 0.993, printed to 0.001.
    budget = propagate(impedance, circuit())
    covariance = budget.half_swings.T @ budget.correlation @ budget.half_swings  # H.2.3
    r = covariance / np.outer(budget.u, budget.u)
    assert [r[0, 1], r[0, 2], r[1, 2]] == pytest.approx([-0.588, -0.485, 0.993], abs=0.0006)


def test_inputs_of_the_circuit_correlate_as_published():
    # JCGM 100:2008, table H.2: r(V,I) −0.36, r(V,φ) 0.86, r(I,φ) −0.65, printed to 0.01.
    correlation = propagate(impedance, circuit()).correlation
    assert [correlation[0, 1], correlation[0, 2], correlation[1, 2]] == pytest.approx([-0.36, 0.86, -0.65], abs=0.0051)


# JCGM 100:2008, table H.6: thermometer readings [°C] and observed corrections [°C].
THERMOMETER = (21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511)
CORRECTIONS = (-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160)


@pytest.mark.parametrize(("origin", "r"), [(20.0, -0.930), (24.0085, 0.0)])
def test_a_thermometers_correction_at_30_degrees_has_the_published_uncertainty(origin, r):
    # JCGM 100:2008, H.3.3 and H.3.4: intercept and slope at t0 = 20 °C correlate by −0.930, at the mean reading not
    # at all; the correction at 30 °C, −0.1494 °C with u 0.0041 °C, is the same (figures from memory, readings seen).
    t = np.array(THERMOMETER) - origin
    design = np.stack([np.ones_like(t), t], axis=1)
    fitted, squares, _, _ = np.linalg.lstsq(design, CORRECTIONS, rcond=None)
    covariance = np.linalg.inv(design.T @ design) * squares[0] / (t.size - 2)
    u = np.sqrt(np.diag(covariance))
    coefficient = float(covariance[0, 1] / u.prod())
    assert coefficient == pytest.approx(r, abs=0.0006)
    scene = Scene(
        (Quantity("intercept", fitted[0], u[0]), Quantity("slope", fitted[1], u[1])),
        (("intercept", "slope", coefficient),),
    )
    budget = propagate(lambda v: v["intercept"] + v["slope"] * (30 - origin), scene)
    assert budget.values[0] == pytest.approx(-0.1494, abs=0.00005)
    assert budget.u[0] == pytest.approx(0.0041, abs=0.00005)


def test_ten_resistors_calibrated_together_add_up_their_uncertainties():
    # JCGM 100:2008, 5.2.2, example: ten resistors of 1000 Ω against one standard, u 100 mΩ each, r = 1: u = 1 Ω, not
    # 0.32 Ω as if independent.
    names = [f"resistor {number}" for number in range(10)]
    pairs = tuple((one, other, 1.0) for i, one in enumerate(names) for other in names[i + 1 :])
    resistors = tuple(Quantity(name, 1000.0, 0.1) for name in names)

    def in_series(v):
        return sum(v[name] for name in names)

    assert propagate(in_series, Scene(resistors, pairs)).u[0] == pytest.approx(1, rel=1e-9)
    assert propagate(in_series, Scene(resistors)).u[0] == pytest.approx(0.32, abs=0.005)


def test_what_is_fully_correlated_cancels_in_a_difference():
    scene = Scene((Quantity("a", 1.0, 0.3), Quantity("b", 2.0, 0.3)), (("a", "b", 1.0),))
    budget = propagate(lambda v: v["a"] - v["b"], scene)
    assert budget.u[0] == 0
    assert [term.share for term in budget.terms(0)] == [0.0, 0.0]


def test_shares_under_correlation_split_what_two_do_together_and_sum_to_one():
    # y = a + b, u 1 and 2, r 0.5: u² = 1 + 4 + 2·0.5·2 = 7; half of the last 2 to each: (1 + 1)/7 and (4 + 1)/7.
    scene = Scene((Quantity("a", 0.0, 1.0), Quantity("b", 0.0, 2.0)), (("b", "a", 0.5),))
    terms = propagate(lambda v: v["a"] + v["b"], scene).terms(0)
    assert [(term.name, term.share) for term in terms] == [
        ("b", pytest.approx(5 / 7, rel=1e-12)),
        ("a", pytest.approx(2 / 7, rel=1e-12)),
    ]
    opposed = propagate(lambda v: v["a"] - v["b"], scene).terms(0)  # u² = 3: (1 − 1)/3, (4 − 1)/3
    assert [term.share for term in opposed] == pytest.approx([1, 0], abs=1e-12)


@st.composite
def linear_laws(draw):
    count = draw(st.integers(1, 5))
    numbers = st.lists(st.floats(-3, 3), min_size=count, max_size=count)
    factors = np.array([draw(numbers) for _ in range(count)]) + 0.1 * np.eye(count)
    correlation = factors @ factors.T + 1e-6 * np.eye(count)
    scale = np.sqrt(np.diag(correlation))
    u = draw(st.lists(st.floats(0.01, 3), min_size=count, max_size=count))
    return np.array(draw(numbers)), np.array(u), correlation / np.outer(scale, scale)


@given(linear_laws())
def test_linear_laws_with_correlation_are_the_quadratic_form_of_their_covariance(law):
    # JCGM 100:2008, eq. 13 (JCGM 102:2011, eq. 3): u² = c Σ cᵀ; rounding of doubles only.
    slopes, u, correlation = law
    names = [str(i) for i in range(u.size)]
    scene = Scene(
        tuple(Quantity(name, 1.0, spread) for name, spread in zip(names, u, strict=True)),
        tuple((names[i], names[j], float(correlation[i, j])) for i in range(u.size) for j in range(i)),
    )
    budget = propagate(lambda v: sum(slope * v[name] for slope, name in zip(slopes, names, strict=True)), scene)
    expected = slopes @ (correlation * np.outer(u, u)) @ slopes
    assert budget.u[0] ** 2 == pytest.approx(expected, rel=1e-6, abs=1e-10)
    assert budget.adjusted == 0
    shares = sum(term.share for term in budget.terms(0))
    assert shares == pytest.approx(1.0 if budget.u[0] > 0 else 0.0, abs=1e-6)


def test_coefficients_that_contradict_each_other_still_give_a_number_and_say_so():
    # a = b and b = c fully, a and c fully opposed: no three numbers do that, and a − c + b would have u² < 0.
    scene = Scene(
        (Quantity("a", 0.0, 1.0), Quantity("b", 0.0, 1.0), Quantity("c", 0.0, 1.0)),
        (("a", "b", 1.0), ("b", "c", 1.0), ("a", "c", -1.0)),
    )
    assert np.array([1.0, -1.0, 1.0]) @ np.array([[1, 1, -1], [1, 1, 1], [-1, 1, 1]]) @ [1, -1, 1] < 0
    budget = propagate(lambda v: np.hstack([v["a"] - v["b"] + v["c"], v["a"]]), scene)
    assert budget.u == pytest.approx([0.0, 1.0], abs=1e-7)  # a square root of rounding
    assert budget.adjusted == pytest.approx(0.5, rel=1e-9)  # eigenvalues 2, 2, −1: all coefficients become ±1/2
    assert np.linalg.eigvalsh(budget.correlation).min() > -1e-12
    assert np.diag(budget.correlation) == pytest.approx(np.ones(3), rel=1e-12)


def test_a_possible_matrix_is_kept_as_stated_and_names_not_there_are_passed_over():
    matrix, adjusted = correlation_matrix(["a", "b"], [("b", "a", -1.0), ("a", "window", 0.7), ("a", "a", 0.2)])
    assert matrix.tolist() == [[1.0, -1.0], [-1.0, 1.0]]
    assert adjusted == 0


def test_moving_a_leader_moves_its_followers_along_a_chain():
    # One air temperature given for air, ambient and mean radiant: a difference of two of them keeps only their own u.
    scene = Scene(
        (
            Quantity("air", 293.0, 1.0),
            Quantity("radiant", 295.0, 0.5, follows="ambient"),
            Quantity("ambient", 294.0, 0.0, follows="air"),
        )
    )
    budget = propagate(lambda v: np.hstack([v["radiant"], v["radiant"] - v["air"], v["ambient"] - v["air"]]), scene)
    assert budget.values.tolist() == [295.0, 2.0, 1.0]
    assert budget.u == pytest.approx([np.hypot(1, 0.5), 0.5, 0], rel=1e-12)
    assert [term.name for term in budget.terms(0)] == ["air", "radiant"]


def test_a_follower_equals_one_quantity_used_twice():
    shared = Scene((Quantity("a", 2.0, 0.3),))
    split = Scene((Quantity("a", 2.0, 0.3), Quantity("b", 2.0, follows="a")))
    one = propagate(lambda v: v["a"] ** 3 / (1 + v["a"]), shared)
    two = propagate(lambda v: v["a"] ** 3 / (1 + v["b"]), split)
    assert two.u[0] == pytest.approx(one.u[0], rel=1e-14)


def test_a_leader_stops_where_a_follower_reaches_the_end_of_its_domain():
    scene = Scene(
        (Quantity("lug", 0.90, 0.05, high=1.0), Quantity("cover", 0.98, 0.0, high=1.0, follows="lug")),
    )
    highest = []

    def model(v):
        highest.append(v["cover"].max())
        return v["lug"] + v["cover"]

    assert propagate(model, scene).u[0] == pytest.approx(0.1, rel=1e-12)  # linear: the cut step keeps the slope
    assert max(highest) == 1.0


@pytest.mark.parametrize(("leaders", "error"), [(("b", "a"), ValueError), (("window", None), KeyError)])
def test_a_circle_of_followers_and_a_leader_that_is_not_there_are_refused(leaders, error):
    scene = Scene((Quantity("a", 1.0, 0.1, follows=leaders[0]), Quantity("b", 1.0, follows=leaders[1])))
    with pytest.raises(error):
        propagate(lambda v: v["a"], scene)
