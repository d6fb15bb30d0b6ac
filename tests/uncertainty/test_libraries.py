"""The same budgets in the general-purpose libraries GTC and uncertainties, which differentiate analytically."""

from __future__ import annotations

from math import sqrt

import GTC
import numpy as np
import pytest
import uncertainties
from uncertainties import umath

from irsurvey.model import Quantity, Scene
from irsurvey.uncertainty import propagate

# A black-body-like signal S = 1/(exp(C/T) − 1) at 10 µm and the object temperature behind emissivity and reflection,
# written once for any arithmetic: an apparent temperature of two places, their offset, emissivity and reflected one.
C = 1438.78  # K
INPUTS = {"one": (340.0, 0.05), "two": (310.0, 0.05), "offset": (0.0, 1.2), "emissivity": (0.85, 0.02)}
INPUTS["reflected"] = (295.0, 2.0)
R = 0.4  # between emissivity and reflected temperature: both read from one foil
PAIR = ("emissivity", "reflected")


def temperatures(v, exp, log):
    def signal(t):
        return 1 / (exp(C / t) - 1)

    def object_temperature(apparent):
        own = (signal(apparent) - (1 - v["emissivity"]) * signal(v["reflected"])) / v["emissivity"]
        return C / log(1 + 1 / own)

    one, two = (object_temperature(v[name] + v["offset"]) for name in ("one", "two"))
    return one, two, one - two


def ours(correlations=()):
    scene = Scene(tuple(Quantity(name, *number) for name, number in INPUTS.items()), correlations)
    return propagate(lambda v: np.hstack(temperatures(v, np.exp, np.log)), scene)


# 1 %: they take derivatives, we take steps of ±u; the third derivative times u²/6 is 0.1 % of the first here.


def test_gtc_has_the_same_uncertainties_and_contributions():
    v = {name: GTC.ureal(*number, label=name) for name, number in INPUTS.items()}
    budget = ours()
    for index, result in enumerate(temperatures(v, GTC.exp, GTC.log)):
        assert budget.u[index] == pytest.approx(GTC.uncertainty(result), rel=0.01)
        for term in budget.terms(index):
            assert term.sensitivity * term.u == pytest.approx(
                GTC.rp.u_component(result, v[term.name]), rel=0.01, abs=1e-4
            )


def test_gtc_has_the_same_uncertainties_under_correlation():
    v = {name: GTC.ureal(*number, independent=name not in PAIR) for name, number in INPUTS.items()}
    GTC.set_correlation(R, *(v[name] for name in PAIR))
    expected = [GTC.uncertainty(result) for result in temperatures(v, GTC.exp, GTC.log)]
    assert ours(((*PAIR, R),)).u == pytest.approx(expected, rel=0.01)
    assert abs(ours(((*PAIR, R),)).u[0] / ours().u[0] - 1) > 0.02  # the coefficient matters


def test_uncertainties_has_the_same_uncertainties_and_shares():
    v = {name: uncertainties.ufloat(*number, name) for name, number in INPUTS.items()}
    budget = ours()
    for index, result in enumerate(temperatures(v, umath.exp, umath.log)):
        assert budget.u[index] == pytest.approx(result.std_dev, rel=0.01)
        shares = {variable.tag: part**2 / result.std_dev**2 for variable, part in result.error_components().items()}
        for term in budget.terms(index):
            assert term.share == pytest.approx(shares.get(term.name, 0), rel=0.02, abs=1e-4)  # squares: twice the 1 %


def test_uncertainties_has_the_same_uncertainties_under_correlation():
    correlation = np.eye(len(INPUTS))
    i, j = (list(INPUTS).index(name) for name in PAIR)
    correlation[i, j] = correlation[j, i] = R
    v = dict(zip(INPUTS, uncertainties.correlated_values_norm(list(INPUTS.values()), correlation), strict=True))
    results = temperatures(v, umath.exp, umath.log)
    budget = ours(((*PAIR, R),))
    assert budget.u == pytest.approx([result.std_dev for result in results], rel=0.01)
    covariance = budget.half_swings.T @ budget.correlation @ budget.half_swings
    expected = np.array(uncertainties.covariance_matrix(results))
    assert covariance == pytest.approx(expected, rel=0.02)
    assert sqrt(covariance[2, 2]) == pytest.approx(budget.u[2], rel=1e-12)
