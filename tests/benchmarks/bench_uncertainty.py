"""What uncertainty costs: ratios against a floor measured in the same run; prints, never passes or fails on time."""

from __future__ import annotations

from statistics import median
from time import perf_counter

import numpy as np
import pytest
import tasks

from irsurvey import pipeline
from irsurvey.analysis.correction import correct
from irsurvey.analysis.measurand import stacked
from irsurvey.analysis.planning import planned
from irsurvey.analysis.propagation import FIRST_ORDER, propagated
from irsurvey.analysis.regions import screen
from irsurvey.uncertainty import monte_carlo

PLACES = ((60, 250), (60, 400), (250, 250), (250, 400), (400, 300))


def seconds(function, repeats=7):
    times = []
    for _ in range(repeats):
        start = perf_counter()
        function()
        times.append(perf_counter() - start)
    return median(times)


@pytest.mark.benchmark
def test_what_uncertainty_adds_to_a_frame_with_five_findings(capsys):
    t = np.full((512, 640), 291.15)
    for row, column in PLACES:
        t[row : row + 60, column : column + 80] -= 3
    frame = tasks.frame(t)
    task = tasks.task(reference=((10.0, 10.0), (200.0, 10.0), (200.0, 500.0), (10.0, 500.0)))
    corrected = correct(frame, task)
    screened = screen(corrected, task)
    measured = planned(corrected, screened, task)
    assert len(measured.anomalies) == len(PLACES)

    def model(values):
        return stacked(measured.plan, values)

    whole = seconds(lambda: pipeline.analyse(frame, task))
    first_order = seconds(lambda: propagated(measured, FIRST_ORDER, seed=""))
    drawn = seconds(lambda: monte_carlo(model, measured.scene, seed=1, draws_at_most=10_000), repeats=3)
    with capsys.disabled():
        print(f"\nframe with five findings: {1e3 * whole:.1f} ms; first order {1e3 * first_order:.1f} ms of it,")
        print(f"added to the rest: {first_order / (whole - first_order):.0%}; 10,000 draws: {drawn:.2f} s")
