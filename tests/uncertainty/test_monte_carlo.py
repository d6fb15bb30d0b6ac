"""Monte Carlo against the worked examples of JCGM 101 and 102, exact distributions and its promises."""

from __future__ import annotations

from math import floor, log10, pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from irsurvey.model import Estimate, Quantity, Scene
from irsurvey.uncertainty import differ, monte_carlo, propagate

FOUR = ("a", "b", "c", "d")


def rectangular(name, value, half_width, **more):
    return Quantity(name, value, half_width / sqrt(3), distribution="rectangular", **more)


def total(v):
    return sum(v[name] for name in FOUR)


def fixed(model, scene, draws, seed=1):
    """All of these draws, in batches of 10,000: six significant digits are never reached."""
    return monte_carlo(model, scene, seed=seed, draws_at_most=draws, digits=6)


# Tolerances on what is drawn: half a unit of the last printed digit and three standard deviations of the draws,
# u/√n of a mean, u/√(2n) of u of a normal distribution, √(0.025·0.975/n)/p(y) of an end at density p(y).


def test_four_normal_inputs_add_up_as_published():
    # JCGM 101:2008, 9.2.2, table 2: y 0.00, u 2.00, interval −3.92…3.92.
    drawn = fixed(total, Scene(tuple(Quantity(name, 0.0, 1.0) for name in FOUR)), 200_000)
    assert drawn.draws == 200_000
    assert drawn.means[0] == pytest.approx(0, abs=0.014)
    assert drawn.u[0] == pytest.approx(2.00, abs=0.010)
    assert drawn.interval[:, 0] == pytest.approx([-3.92, 3.92], abs=0.041)
    assert drawn.shortest[:, 0] == pytest.approx([-3.92, 3.92], abs=0.2)  # flat: its place scatters, not its width
    assert np.ptp(drawn.shortest[:, 0]) == pytest.approx(2 * 3.92, abs=0.06)


def test_four_rectangular_inputs_add_up_as_published():
    # JCGM 101:2008, 9.2.3, table 3: u 2.00, interval −3.88…3.88 (exact to the print).
    drawn = fixed(total, Scene(tuple(rectangular(name, 0.0, sqrt(3)) for name in FOUR)), 200_000)
    assert drawn.u[0] == pytest.approx(2.00, abs=0.010)
    assert drawn.interval[:, 0] == pytest.approx([-3.88, 3.88], abs=0.035)


def test_one_dominant_rectangular_input_gives_the_published_narrow_interval():
    # JCGM 101:2008, 9.2.4, table 4: u 10.1 (exactly √103), interval −17.0…17.0; first order with k = 1.96: ±19.9.
    scene = Scene((*(rectangular(name, 0.0, sqrt(3)) for name in FOUR[:3]), rectangular("d", 0.0, 10 * sqrt(3))))
    drawn = fixed(total, scene, 200_000)
    budget = propagate(total, scene)
    assert budget.u[0] == pytest.approx(sqrt(103), rel=1e-12)
    assert drawn.u[0] == pytest.approx(sqrt(103), abs=0.05)
    assert drawn.interval[:, 0] == pytest.approx([-17.0, 17.0], abs=0.09)
    assert 1.96 * budget.u[0] == pytest.approx(19.9, abs=0.05)


def test_a_calibrated_mass_has_the_published_uncertainty_that_first_order_misses():
    # JCGM 101:2008, 9.3, tables 5 and 6: δm 1.234 mg, first order u 0.0539, Monte Carlo u 0.0754,
    # interval 1.0834…1.3825 (its ends from memory).
    scene = Scene(
        (
            Quantity("reference", 100_000.0, 0.050),
            Quantity("added", 1.234, 0.020),
            rectangular("air", 1.20, 0.10),
            rectangular("weight density", 8000.0, 1000.0),
            rectangular("reference density", 8000.0, 50.0),
        )
    )

    def deviation(v):
        buoyancy = (v["air"] - 1.2) * (1 / v["weight density"] - 1 / v["reference density"])
        return (v["reference"] + v["added"]) * (1 + buoyancy) - 100_000

    budget, drawn = propagate(deviation, scene), fixed(deviation, scene, 200_000)
    assert budget.u[0] == pytest.approx(0.0539, abs=0.00005)
    assert drawn.u[0] == pytest.approx(0.0754, abs=0.0005)
    assert drawn.means[0] == pytest.approx(1.234, abs=0.0006)
    assert drawn.interval[:, 0] == pytest.approx([1.0834, 1.3825], abs=0.0015)
    assert differ(budget, drawn).tolist() == [True]


@pytest.mark.parametrize(
    ("x", "r", "first_order", "mean", "u"),
    [
        (0.0, 0.0, 0, 50, 50),
        (0.010, 0.0, 100, 150, 112),
        (0.050, 0.0, 500, 2550, 502),
        (0.0, 0.9, 0, 50, 67),
        (0.010, 0.9, 100, 150, 121),
        (0.050, 0.9, 500, 2550, 505),
    ],
)
def test_the_comparison_loss_of_a_power_meter_is_as_published(x, r, first_order, mean, u):
    # JCGM 101:2008, 9.4, tables 8 and 9, in 10⁻⁶; those at 0.050 from memory.  Sampling: u of a χ²-like
    # distribution scatters by √((κ − 1)/4n) ≤ √(8/4n) of itself (κ 9: exponential) = 0.32 % at 200,000.
    scene = Scene((Quantity("x", x, 0.005), Quantity("y", 0.0, 0.005)), (("x", "y", r),))

    def loss(v):
        return v["x"] ** 2 + v["y"] ** 2

    budget, drawn = propagate(loss, scene), fixed(loss, scene, 200_000)
    assert 1e6 * budget.u[0] == pytest.approx(first_order, abs=1e-6)
    assert 1e6 * drawn.u[0] == pytest.approx(u, abs=0.5 + 0.01 * u)
    assert 1e6 * drawn.means[0] == pytest.approx(mean, abs=0.5 + 3 * u / sqrt(200_000))
    assert 1e6 * drawn.values[0] == pytest.approx(1e6 * x**2, rel=1e-12)  # the value stays the nominal one


@pytest.mark.parametrize("x", [0.0, 0.010, 0.050])
def test_the_ends_of_both_intervals_are_those_of_the_exact_distribution(x):
    # Two squares of independent normal inputs: u² times a noncentral χ² of two degrees of freedom (scipy).
    # JCGM 101:2008, table 8: shortest interval 0…150·10⁻⁶ at x = 0.
    exact = stats.ncx2(2, (x / 0.005) ** 2, scale=0.005**2) if x else stats.chi2(2, scale=0.005**2)
    scene = Scene((Quantity("x", x, 0.005), Quantity("y", 0.0, 0.005)))
    drawn = fixed(lambda v: v["x"] ** 2 + v["y"] ** 2, scene, 200_000)
    ends = exact.ppf([0.025, 0.975])
    sampling = np.sqrt(0.025 * 0.975 / drawn.draws) / exact.pdf(ends)
    assert np.abs(drawn.interval[:, 0] - ends).max() < 3 * sampling.max()
    covered = np.diff(exact.cdf(drawn.shortest[:, 0]))[0]
    assert covered == pytest.approx(0.95, abs=4 * sqrt(0.05 * 0.95 / drawn.draws))
    assert np.ptp(drawn.shortest) <= np.ptp(drawn.interval)
    if x == 0:
        assert 1e6 * drawn.shortest[:, 0] == pytest.approx([0, 150], abs=2)  # end at low density: 3 sd are 1.6


def test_the_logarithm_of_a_wide_rectangular_input_is_as_published():
    # NPL report DEM-ES-011, 9.2: y = ln x, x in 0.1…1.1: mean −0.665, u 0.606, shortest interval −1.895…0.095
    # (ln 1.1).  Sampling at 200,000: 0.0014 of the mean, 0.5 % of u; the lower end is at density e^−1.895 = 0.15.
    scene = Scene((rectangular("x", 0.6, 0.5),))
    drawn = fixed(lambda v: np.log(v["x"]), scene, 200_000)
    assert drawn.values[0] == pytest.approx(-0.511, abs=0.0005)
    assert drawn.means[0] == pytest.approx(-0.665, abs=0.005)
    assert drawn.u[0] == pytest.approx(0.606, abs=0.005)
    assert drawn.shortest[:, 0] == pytest.approx([-1.895, 0.095], abs=0.012)


@pytest.mark.parametrize(
    ("real", "r", "size", "phase"),
    [
        (0.001, 0.0, (0.013, 0.007), (0.0, 1.744)),
        (0.001, 0.9, (0.012, 0.008), (-0.556, 1.599)),
        (0.010, 0.9, (0.015, 0.008), (-0.343, 0.903)),
    ],
)
def test_size_and_phase_of_correlated_parts_are_as_published(real, r, size, phase):
    # JCGM 102:2011, 9.3, tables 6 and 7: mean and u of both, from real and imaginary parts with u 0.010.
    scene = Scene((Quantity("re", real, 0.010), Quantity("im", 0.0, 0.010)), (("re", "im", r),))
    drawn = fixed(lambda v: np.hstack([np.hypot(v["re"], v["im"]), np.arctan2(v["im"], v["re"])]), scene, 200_000)
    assert [drawn.means[0], drawn.u[0]] == pytest.approx(size, abs=0.0006)
    assert [drawn.means[1], drawn.u[1]] == pytest.approx(phase, abs=0.013)  # 3·1.744/√200,000 = 0.012


def test_draws_go_on_until_the_rule_of_the_standard_stops_them():
    # JCGM 101:2008, 7.9.4 written out for one normal input: the draws of a seed, batch by batch.
    u, digits, batch = 0.13, 2, 1000
    generator = np.random.default_rng(5)
    averages, everything = [], []
    while True:
        y = np.sort(u * generator.standard_normal(batch))
        everything.append(y)
        averages.append([y.mean(), y.std(ddof=1), y[24], y[974]])  # 950 of 1000 between the 25th and the 975th
        h = len(averages)
        if h > 1:
            scatter = np.std(averages, axis=0, ddof=1) / sqrt(h)
            exponent = floor(log10(np.concatenate(everything).std(ddof=1))) - digits + 1
            if np.all(2 * scatter <= 0.5 * 10**exponent):
                break
    drawn = monte_carlo(lambda v: v["x"], Scene((Quantity("x", 0.0, u),)), seed=5, batch=batch, digits=digits)
    assert drawn.draws == h * batch
    assert h > 5  # or the rule was not tried
    assert drawn.converged.all()
    ordered = np.sort(np.concatenate(everything))
    assert drawn.u[0] == pytest.approx(ordered.std(ddof=1), rel=1e-9)
    width = round(0.95 * ordered.size)
    first = (ordered.size - width + 1) // 2 - 1
    assert drawn.interval[:, 0] == pytest.approx([ordered[first], ordered[first + width]], rel=1e-9)


def test_converged_results_hold_their_digits():
    # u = 2: half a unit of its second digit is 0.05.  Twice the standard deviation (7.9.4) holds 95 % of the time; of
    # 20 runs' means, u and ends, 80 numbers with a standard deviation of 2.4 %, 90 % are asked for.
    scene = Scene(tuple(Quantity(name, 0.0, 1.0) for name in FOUR))
    runs = [monte_carlo(total, scene, seed=seed, draws_at_most=300_000, digits=2) for seed in range(20)]
    assert all(run.converged.all() for run in runs)
    ends = np.array([[run.means[0], run.u[0], *run.interval[:, 0]] for run in runs])
    within = np.abs(ends - [0, 2, -3.92, 3.92]) <= 0.05
    assert within.mean() >= 0.9


def test_too_few_draws_are_told():
    scene = Scene((Quantity("x", 0.0, 1.0),))
    drawn = monte_carlo(lambda v: v["x"], scene, seed=1, draws_at_most=10_000)
    assert drawn.draws == 10_000
    assert not drawn.converged[0]  # one batch says nothing of its own scatter
    assert drawn.u[0] == pytest.approx(1, abs=3 / sqrt(2 * 10_000))


def test_one_seed_gives_the_same_to_the_last_digit_and_another_does_not():
    scene = Scene((Quantity("x", 1.0, 0.3), rectangular("y", 2.0, 0.3)), (("x", "y", 0.4),))
    one, same, other = (monte_carlo(lambda v: v["x"] * v["y"], scene, seed=seed) for seed in (7, 7, 8))
    assert np.array_equal(one.interval, same.interval)
    assert np.array_equal(one.u, same.u)
    assert one.u[0] != other.u[0]
    assert one.draws == same.draws


def test_a_model_is_given_columns_and_each_scene_by_itself_gives_the_same():
    scene = Scene((Quantity("x", 1.0, 0.3), Quantity("y", 2.0, 0.1, high=2.05), Quantity("z", 5.0)))

    def model(v):
        assert {column.shape for column in v.values()} == {(len(v["x"]), 1)}
        return np.hstack([v["x"] * v["y"] + v["z"], np.exp(v["x"])])

    def one_by_one(v):
        return np.vstack([model({name: v[name][row : row + 1] for name in v}) for row in range(len(v["x"]))])

    whole, single = (monte_carlo(f, scene, seed=3, draws_at_most=2000, batch=1000) for f in (model, one_by_one))
    assert np.array_equal(whole.u, single.u)
    assert np.array_equal(whole.interval, single.interval)


def draws_of(scene, name, count=50_000):
    """What a model is given of one quantity."""
    seen = []

    def model(v):
        seen.append(v[name][:, 0])
        return v[name]

    fixed(model, scene, count)
    return np.concatenate(seen[1:])  # the first is the scene itself


def test_a_normal_input_near_the_end_of_its_domain_is_drawn_truncated():
    # scipy.stats.truncnorm; Kolmogorov–Smirnov at 0.1 %.
    emissivity = draws_of(Scene((Quantity("emissivity", 0.97, 0.03, low=0.0, high=1.0),)), "emissivity")
    assert emissivity.max() <= 1.0
    assert emissivity.min() > 0.0
    exact = stats.truncnorm(-0.97 / 0.03, 1.0, loc=0.97, scale=0.03)
    assert stats.kstest(emissivity, exact.cdf).pvalue > 0.001


def test_a_rectangular_input_beyond_the_end_of_its_domain_is_drawn_up_to_it():
    humidity = draws_of(Scene((rectangular("humidity", 0.95, 0.1, low=0.0, high=1.0),)), "humidity")
    assert humidity.max() <= 1.0
    assert stats.kstest(humidity, stats.uniform(0.85, 0.15).cdf).pvalue > 0.001


def test_a_value_at_the_end_of_its_domain_leaves_half_a_normal_distribution():
    emissivity = draws_of(Scene((Quantity("emissivity", 1.0, 0.02, low=0.0, high=1.0),)), "emissivity")
    assert emissivity.max() <= 1.0
    assert 1 - emissivity.mean() == pytest.approx(0.02 * sqrt(2 / pi), rel=0.02)  # 3 sd of the mean are 1 %


def test_followers_move_with_their_leader_and_stay_in_their_domain():
    scene = Scene(
        (
            Quantity("cover", 0.96, 0.02, low=0.0, high=1.0, follows="bar"),
            Quantity("lug", 0.90, 0.05, low=0.0, high=1.0),
            Quantity("bar", 0.93, 0.0, low=0.0, high=1.0, follows="lug"),
        )
    )
    seen = []

    def model(v):
        seen.append(np.hstack([v[name] for name in ("lug", "bar", "cover")]))
        return v["cover"]

    fixed(model, scene, 50_000)
    lug, bar, cover = np.concatenate(seen[1:]).T
    assert max(lug.max(), bar.max(), cover.max()) <= 1.0
    assert (cover == 1.0).mean() < 0.001  # drawn inside, not pushed back onto the end
    assert bar - lug == pytest.approx(0.03, abs=1e-12)
    # The lug goes no further than the cover can: its own limit is 0.94.  The cover adds its own term.
    assert stats.kstest(lug, stats.truncnorm(-18, 0.8, loc=0.90, scale=0.05).cdf).pvalue > 0.001
    assert np.std(cover - bar) == pytest.approx(0.02, rel=0.35)  # cut where the bar is near its end
    assert np.corrcoef(lug, cover)[0, 1] > 0.8


def test_a_leader_and_its_follower_differ_by_what_is_their_own():
    scene = Scene((Quantity("air", 293.0, 1.0), Quantity("radiant", 295.0, 0.25, follows="air")))
    drawn = fixed(lambda v: np.hstack([v["radiant"] - v["air"], v["radiant"]]), scene, 50_000)
    assert drawn.u == pytest.approx([0.25, np.hypot(1, 0.25)], rel=0.01)  # 3 sd of u are 0.95 %


@pytest.mark.parametrize("r", [-1.0, -0.6, 0.5, 1.0])
def test_normal_draws_have_the_stated_correlation(r):
    scene = Scene((Quantity("a", 1.0, 0.2), Quantity("b", 2.0, 0.7), Quantity("c", 0.0, 1.0)), (("a", "b", r),))
    seen = []

    def model(v):
        seen.append(np.hstack([v["a"], v["b"], v["c"]]))
        return v["a"]

    fixed(model, scene, 50_000)
    found = np.corrcoef(np.concatenate(seen[1:]).T)
    sampling = 3 / sqrt(50_000)
    assert found[0, 1] == pytest.approx(r, abs=sampling * (1 - r**2) + 1e-9)  # sd of r: (1 − r²)/√n
    assert abs(found[0, 2]) < sampling * 4 / 3


def test_correlated_rectangular_inputs_keep_their_bounds_and_nearly_their_coefficient():
    # Normal draws of r turned rectangular correlate by (6/π)·asin(r/2) (Pearson 1907): 0.582 for 0.6.
    scene = Scene((rectangular("a", 0.0, 1.0), rectangular("b", 0.0, 1.0)), (("a", "b", 0.6),))
    seen = []

    def model(v):
        seen.append(np.hstack([v["a"], v["b"]]))
        return v["a"]

    fixed(model, scene, 50_000)
    found = np.concatenate(seen[1:])
    assert np.abs(found).max() <= 1.0
    assert np.corrcoef(found.T)[0, 1] == pytest.approx(6 / pi * np.arcsin(0.3), abs=0.012)
    assert stats.kstest(found[:, 1], stats.uniform(-1, 2).cdf).pvalue > 0.001


def test_contradicting_coefficients_are_drawn_as_near_as_possible():
    names = ("a", "b", "c")
    scene = Scene(
        tuple(Quantity(name, 0.0, 1.0) for name in names), (("a", "b", 1.0), ("b", "c", 1.0), ("a", "c", -1.0))
    )
    drawn = fixed(lambda v: np.hstack([v["a"] - v["b"] + v["c"], v["b"]]), scene, 50_000)
    assert drawn.u[0] == pytest.approx(0, abs=1e-6)  # as first order has it
    assert drawn.u[1] == pytest.approx(1, abs=0.01)


def test_few_draws_without_solution_are_counted_and_left_out():
    # P(x < 0) of 1 ± 0.5 is Φ(−2) = 2.28 %: under the 2.5 % that each side leaves outside.
    scene = Scene((Quantity("x", 1.0, 0.5),))
    drawn = fixed(lambda v: np.sqrt(np.where(v["x"] < 0, np.nan, v["x"])), scene, 50_000)
    assert drawn.missing[0] / drawn.draws == pytest.approx(stats.norm.cdf(-2), abs=0.002)
    exact = stats.truncnorm(-2, np.inf, loc=1, scale=0.5).ppf([0.025, 0.975])
    assert drawn.interval[:, 0] == pytest.approx(np.sqrt(exact), abs=0.02)
    assert drawn.estimates()[0] == Estimate(1.0, float(drawn.u[0]), tuple(drawn.interval[:, 0].tolist()))


def test_a_result_with_many_draws_without_solution_keeps_its_value_and_has_no_uncertainty():
    scene = Scene((Quantity("x", 1.0, 0.8),))

    def model(v):
        return np.hstack([np.where(v["x"] < 0, np.nan, v["x"]), v["x"], v["x"] * np.nan])

    drawn = monte_carlo(model, scene, seed=1)
    assert drawn.missing[0] / drawn.draws == pytest.approx(stats.norm.cdf(-1.25), abs=0.01)
    assert drawn.estimates()[0] == Estimate(1.0, None)
    assert np.isnan([drawn.u[0], drawn.means[0], *drawn.interval[:, 0], *drawn.shortest[:, 0]]).all()
    assert drawn.converged.tolist() == [False, True, False]
    assert drawn.estimates()[1].u == pytest.approx(0.8, rel=0.02)
    assert drawn.estimates()[2] is None
    assert drawn.missing[2] == drawn.draws
    assert differ(propagate(model, scene), drawn).tolist() == [True, False, False]


def test_a_scene_without_uncertainty_is_drawn_without_one():
    drawn = monte_carlo(lambda v: np.hstack([v["x"], v["x"] / 3]), Scene((Quantity("x", 0.1),)), seed=1)
    assert drawn.u.tolist() == [0.0, 0.0]
    assert drawn.interval[:, 1].tolist() == [0.1 / 3, 0.1 / 3]
    assert drawn.converged.all()
    assert drawn.draws == 20_000


def test_first_order_and_draws_differ_where_the_interval_is_skewed_though_u_agrees():
    # y = exp(0.15 z): u within 4 %, arms exp(±0.294) − 1 = 0.342 and 0.255: they differ by 29 % of their mean.
    scene = Scene((Quantity("z", 0.0, 0.15), Quantity("w", 1.0, 0.05)))

    def model(v):
        return np.hstack([np.exp(v["z"]), v["w"] ** 2, 0 * v["z"] + 3])

    budget, drawn = propagate(model, scene), fixed(model, scene, 100_000)
    assert budget.u[:2] == pytest.approx(drawn.u[:2], rel=0.05)
    assert differ(budget, drawn).tolist() == [True, False, False]
    assert differ(budget, drawn, by=0.35).tolist() == [False, False, False]


@settings(max_examples=15, deadline=None)
@given(
    st.lists(st.floats(0.5, 2), min_size=3, max_size=3),
    st.lists(st.floats(-2, 2), min_size=3, max_size=3),
    st.floats(-0.9, 0.9),
    st.integers(0, 1000),
)
def test_linear_laws_are_drawn_with_their_first_order_uncertainty(u, slopes, r, seed):
    scene = Scene(tuple(Quantity(name, 1.0, s) for name, s in zip("abc", u, strict=True)), (("a", "c", r),))

    def model(v):
        return sum(slope * v[name] for slope, name in zip(slopes, "abc", strict=True))

    budget = propagate(model, scene)
    drawn = fixed(model, scene, 20_000, seed)
    assert drawn.u[0] == pytest.approx(budget.u[0], rel=5 / sqrt(2 * 20_000), abs=1e-12)  # five sd of a normal u
