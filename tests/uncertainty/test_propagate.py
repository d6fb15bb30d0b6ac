"""First-order propagation against the GUM's own example, analytic laws and its promises."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.model import Quantity, Scene
from irsurvey.uncertainty import propagate


def test_end_gauge_calibration_gives_the_published_first_order_uncertainty():
    # JCGM 100:2008, H.1.6: l = ls + d − ls (δα·θ + αs·δθ); contributions 25, 9.7, 2.9, 16.6 nm; u_c(l) = 32 nm
    # (first order, printed to 1 nm; table H.1 prints the contributions to 0.1 nm).
    length = 50.000623e6  # nm
    scene = Scene(
        (
            Quantity("standard", length, 25),
            Quantity("difference", 215, 9.7),
            Quantity("expansion", 11.5e-6, 1.2e-6),
            Quantity("temperature", -0.1, 0.41),
            Quantity("expansion difference", 0.0, 0.58e-6),
            Quantity("temperature difference", 0.0, 0.029),
        )
    )

    def model(v):
        thermal = v["expansion difference"] * v["temperature"] + v["expansion"] * v["temperature difference"]
        return v["standard"] + v["difference"] - v["standard"] * thermal

    budget = propagate(model, scene)
    shares = {term.name: term.contribution for term in budget.terms(0)}
    assert shares["standard"] == pytest.approx(25, abs=0.05)
    assert shares["difference"] == pytest.approx(9.7, abs=0.05)
    assert shares["expansion difference"] == pytest.approx(2.9, abs=0.05)
    assert shares["temperature difference"] == pytest.approx(16.6, abs=0.1)  # H.1 rounds its u(δθ) to 0.029 first
    assert shares["expansion"] == 0
    assert shares["temperature"] == 0
    assert budget.u[0] == pytest.approx(32, abs=0.5)
    assert budget.values[0] == pytest.approx(50.000838e6, abs=0.5)


def test_what_two_results_share_cancels_in_their_difference():
    scene = Scene((Quantity("offset", 0.0, 2.0), Quantity("a", 17.0, 0.03), Quantity("b", 14.0, 0.04)))
    budget = propagate(lambda v: np.hstack([v["a"] + v["offset"], v["b"] + v["offset"], v["a"] - v["b"]]), scene)
    assert budget.u == pytest.approx([np.hypot(2, 0.03), np.hypot(2, 0.04), 0.05], rel=1e-12)


def test_a_step_out_of_the_domain_is_taken_one_sided():
    scene = Scene((Quantity("emissivity", 0.98, 0.05, low=0.0, high=1.0),))
    budget = propagate(lambda v: 3 * v["emissivity"], scene)
    assert budget.u[0] == pytest.approx(0.15, rel=1e-12)  # a linear law: cutting the step may not change its slope


def test_a_side_without_solution_leaves_the_other_to_count():
    scene = Scene((Quantity("x", 1.0, 0.5),))
    budget = propagate(lambda v: np.where(v["x"] < 1, np.nan, 2 * v["x"]), scene)
    assert budget.u[0] == pytest.approx(1.0, rel=1e-12)


def test_no_solution_at_all_is_no_number():
    scene = Scene((Quantity("x", 1.0, 0.5),))
    budget = propagate(lambda v: v["x"] * np.nan, scene)
    assert budget.estimates()[0] is None


def test_a_result_whose_uncertainty_does_not_exist_says_so():
    scene = Scene((Quantity("x", 1.0, 0.5),))
    budget = propagate(lambda v: np.where(v["x"] == 1, 2.0, np.nan), scene)
    estimate = budget.estimates()[0]
    assert estimate is not None
    assert estimate.value == 2.0
    assert estimate.u is None


@given(
    st.lists(st.tuples(st.floats(-5, 5), st.floats(0.01, 3)), min_size=1, max_size=6),
    st.lists(st.floats(-4, 4), min_size=6, max_size=6),
)
def test_linear_laws_follow_the_law_of_propagation_exactly(inputs, slopes):
    # JCGM 100:2008, eq. 10: u² = Σ (c_i u_i)²; rounding of doubles only.
    scene = Scene(tuple(Quantity(str(i), value, u) for i, (value, u) in enumerate(inputs)))
    budget = propagate(lambda v: sum(slopes[i] * v[str(i)] for i in range(len(inputs))), scene)
    expected = np.sqrt(sum((slopes[i] * u) ** 2 for i, (_, u) in enumerate(inputs)))
    assert budget.u[0] == pytest.approx(expected, abs=1e-9)


def test_every_step_of_the_whole_is_the_model_run_scene_by_scene():
    scene = Scene((Quantity("a", 3.0, 0.3), Quantity("b", 2.0, 0.1, high=2.05), Quantity("c", 1.0, 0.2, follows="a")))

    def scalar(a, b, c):
        return [a**2 * b, np.log(a) + c * b]

    def model(v):
        return np.hstack([v["a"] ** 2 * v["b"], np.log(v["a"]) + v["c"] * v["b"]])

    budget = propagate(model, scene)
    steps = [  # c goes with a; the step of b upwards ends at 2.05, three quarters of the way from end to end
        np.subtract(scalar(3.3, 2.0, 1.3), scalar(2.7, 2.0, 0.7)) / 2,
        np.subtract(scalar(3.0, 2.05, 1.0), scalar(3.0, 1.9, 1.0)) / 1.5,
        np.subtract(scalar(3.0, 2.0, 1.2), scalar(3.0, 2.0, 0.8)) / 2,
    ]
    assert budget.half_swings == pytest.approx(np.array(steps), rel=1e-12)  # the same operations on doubles
    assert budget.values == pytest.approx(scalar(3.0, 2.0, 1.0), rel=1e-15)


def test_terms_are_sorted_signed_and_sum_up_to_the_variance():
    # JCGM 100:2008, 5.1.3: contributions c_i u_i of y = 3 a − 4 b + 0 c: 3, 8 and 0, u² = 73.
    scene = Scene((Quantity("a", 1.0, 1.0), Quantity("b", 1.0, 2.0), Quantity("c", 1.0, 5.0)))
    terms = propagate(lambda v: 3 * v["a"] - 4 * v["b"] + 0 * v["c"], scene).terms(0)
    assert [term.name for term in terms] == ["b", "a", "c"]
    assert [term.u for term in terms] == [2.0, 1.0, 5.0]
    assert [term.sensitivity for term in terms] == pytest.approx([-4, 3, 0], rel=1e-12)
    assert [term.contribution for term in terms] == pytest.approx([8, 3, 0], rel=1e-12)
    assert [term.share for term in terms] == pytest.approx([64 / 73, 9 / 73, 0], rel=1e-12)


def test_a_term_without_any_solution_stands_first_and_has_no_share():
    scene = Scene((Quantity("a", 1.0, 1.0), Quantity("b", 1.0, 0.5)))
    terms = propagate(lambda v: np.where(v["b"] == 1, v["a"], np.nan), scene).terms(0)
    assert [term.name for term in terms] == ["b", "a"]
    assert np.isnan([terms[0].contribution, terms[0].share, terms[1].share]).all()
    assert terms[1].contribution == pytest.approx(1.0, rel=1e-12)


def test_where_nothing_contributes_all_shares_are_zero():
    scene = Scene((Quantity("a", 1.0, 1.0), Quantity("b", 1.0, 0.5)))
    budget = propagate(lambda v: 0 * v["a"] + 7, scene)
    assert [term.share for term in budget.terms(0)] == [0.0, 0.0]
    assert budget.u[0] == 0


def test_a_scene_without_uncertainty_has_results_and_no_terms():
    budget = propagate(lambda v: 2 * v["a"], Scene((Quantity("a", 1.5),)))
    assert budget.values[0] == 3.0
    assert budget.u[0] == 0
    assert budget.terms(0) == ()


def test_a_quantity_nobody_stated_is_not_moved():
    # A window temperature without a window: NaN, and its term has no weight.
    scene = Scene((Quantity("a", 1.0, 0.1), Quantity("window", np.nan, 2.0)))
    budget = propagate(lambda v: v["a"] + np.where(np.isnan(v["window"]), 0, v["window"]), scene)
    assert budget.names == ("a",)
    assert budget.u[0] == pytest.approx(0.1, rel=1e-12)


def test_a_rectangular_input_moves_by_its_standard_uncertainty_like_any_other():
    # JCGM 100:2008, 4.3.7: u = a/√3 for bounds ±a; H.1.3.4: ±1 °C gives 0.58 °C.
    half_width = 1.0
    scene = Scene((Quantity("a", 19.9, half_width / np.sqrt(3), distribution="rectangular"),))
    assert propagate(lambda v: v["a"], scene).u[0] == pytest.approx(0.58, abs=0.005)


@given(seed=st.integers(0, 10_000))
def test_inputs_that_reach_none_of_the_same_results_may_move_together(seed):
    # What each input does is the same to the last bit; only the number of scenes is smaller.
    rng = np.random.default_rng(seed)
    groups = [list(places) for places in np.array_split(rng.permutation(6), rng.integers(1, 4))]
    quantities = [Quantity("shared", 1.0, 0.1), Quantity("edge", 0.99, 0.05, high=1.0)]
    reach = {}
    for number, places in enumerate(groups):
        for k in range(rng.integers(1, 3)):
            name = f"own {number} {k}"
            quantities.append(Quantity(name, float(rng.normal()), 0.2, high=float(rng.choice([np.inf, 0.1]))))
            reach[name] = places
    order = rng.permutation(len(quantities))
    scene = Scene(tuple(quantities[k] for k in order), correlations=(("shared", quantities[-1].name, 0.5),))
    gaps = rng.random(6) < 0.2  # results without a solution
    scenes = []

    def model(v):
        scenes.append(v["shared"].size)
        results = np.repeat(v["shared"] * v["edge"], 6, axis=1)
        for name, places in reach.items():
            results[:, places] += np.sin(v[name]) * v["shared"]
        return np.where(gaps, np.nan, results)

    plain, together = propagate(model, scene), propagate(model, scene, reach)
    np.testing.assert_array_equal(together.half_swings, plain.half_swings)
    np.testing.assert_array_equal(together.u, plain.u)
    assert scenes[1] <= scenes[0]
    most = max(sum(1 for own in reach.values() if own == places) for places in groups)
    assert scenes[1] == 2 * (2 + most) + 1
