"""Components against their past and against their like, from the records of frames and a history."""

from __future__ import annotations

from dataclasses import MISSING, fields, replace
from datetime import UTC, datetime, timedelta, timezone

import numpy as np
import pytest

from irsurvey.analysis.trends import LOAD_U, populations, trend_of
from irsurvey.assess.severity import LOW_LOAD, REFLECTIVE, SATURATED
from irsurvey.model import Assessment, BudgetTerm, ComponentReport, Earlier, Estimate, FrameReport, Source

NOW = datetime(2025, 6, 1, 10, 30, tzinfo=UTC)
FINITE = 1 + 2.8 * 3.8 / 6 * LOAD_U**2
"""What finite steps of ± u make of the slope of x^−1.8: its third derivative, n(n + 1)(n + 2), over 6."""


def record(of, /, **given):
    """A record with nothing in it but what is given: None, "", () or {} by the type of the field."""
    empty = {"str": "", "int": 0, "float": 0.0, "bool": False}
    for field in fields(of):
        if field.name not in given and field.default is MISSING:
            kind_of = str(field.type)
            blank = () if kind_of.startswith("tuple") else {} if kind_of.startswith("dict") else None
            given[field.name] = empty.get(kind_of, blank)
    return of(**given)


def component(name="lug", delta=20.0, u=1.0, load=400.0, rated=400.0, shares=(), **given):
    terms = tuple(BudgetTerm(key, 1.0, 1.0, u * share**0.5, share) for key, share in shares)
    return record(
        ComponentReport,
        name=name,
        key=given.pop("key", f"F01:component:{name}"),
        load_a=load,
        rated_a=rated,
        delta_ambient_k=Estimate(delta, u) if delta is not None else None,
        budgets={"delta_ambient_k": terms},
        **given,
    )


def frame(*components, id_="F01", kind="electrical", asset="MCC-1"):
    source = Source("f.tif", None, None, None)
    return record(FrameReport, id=id_, kind=kind, status="analysed", asset=asset, source=source, components=components)


def earlier(year, delta, load=400.0, rated=400.0, u=1.0, **given):
    given = {"asset": "MCC-1", "component": "lug", **given}
    return Earlier(datetime(year, 6, 1, tzinfo=UTC), delta_ambient=delta, load=load, rated=rated, u=u, **given)


def trend(part, history, taken=NOW):
    return trend_of(part, frame(part), history, taken)


def test_points_are_the_rises_at_rated_load_this_survey_last():
    found = trend(component(delta=20.0), [earlier(2024, 40.0, load=180.0), earlier(2023, 10.0)])
    assert [when for when, _ in found.points] == ["2023-06-01", "2024-06-01", "2025-06-01"]
    # 40 K at 45 % load are 168 K at rated load with n = 1.8 [C].
    assert [rise for _, rise in found.points] == [pytest.approx(10), pytest.approx(168, abs=0.5), pytest.approx(20)]


def test_a_rise_that_grew_with_the_load_alone_is_no_change():
    """The load law itself: 12 K at 60 %, 12·(1/0.6)^1.8 K at full load."""
    found = trend(component(delta=12 / 0.6**1.8, load=400.0), [earlier(2024, 12.0, load=240.0)])
    assert found.change_k.value == pytest.approx(0, abs=1e-9)
    assert found.is_significant is False


def test_other_assets_other_components_and_this_day_are_not_its_past():
    part = component()
    rows = [
        earlier(2024, 9.0, asset="MCC-2"),
        earlier(2024, 9.0, component="lug 2"),
        earlier(2025, 9.0),
        earlier(2026, 9.0),
    ]
    assert trend(part, rows) is None
    assert trend(part, []) is None
    mine = earlier(2024, 9.0)
    assert len(trend(part, [*rows, mine]).points) == 2
    without_asset = trend_of(part, frame(part, asset=None), [replace(mine, asset="")], NOW)
    assert len(without_asset.points) == 2


def test_days_are_those_of_the_survey_and_a_plain_date_is_taken_as_one():
    east = datetime(2025, 6, 2, 1, 0, tzinfo=timezone(timedelta(hours=9)))  # still 1 June in UTC
    assert trend(component(), [replace(earlier(2025, 9.0), when=datetime(2025, 6, 1))], east) is not None
    assert trend(component(), [replace(earlier(2025, 9.0), when=datetime(2025, 6, 2))], east) is None


def test_what_cannot_be_brought_to_rated_load_has_no_point():
    rows = [
        earlier(2021, 9.0, load=None),
        earlier(2022, 9.0, load=80.0),  # 20 % load
        replace(earlier(2023, 9.0), delta_ambient=None, delta_similar=4.0),
        earlier(2024, 9.0, rated=None),  # rated as now
    ]
    assert [when for when, _ in trend(component(), rows).points] == ["2024-06-01", "2025-06-01"]
    for part in (component(load=None), component(load=80.0), component(delta=None)):
        found = trend(part, rows)
        assert [when for when, _ in found.points] == ["2024-06-01"]
        assert (found.change_k, found.is_significant) == (None, None)
    assert trend(component(), rows, None).change_k is None


def test_what_voltage_drives_is_compared_as_it_is():
    told = (Assessment("voltage-driven", None, None, "", {}, ""),)
    part = component(delta=3.0, u=0.2, load=None, rated=None, assessments=told)
    found = trend(part, [earlier(2024, 1.0, load=None, rated=None, u=0.2)])
    assert found.change_k.value == pytest.approx(2.0)
    assert found.change_k.u == pytest.approx(0.2 * 2**0.5)
    assert found.is_significant is True


def test_independent_errors_add_and_those_of_emissivity_camera_and_exponent_cancel():
    """Both at rated load and 20 K: by hand, u of each load 1.8·0.03·20 K, the rest √2 of what is not shared."""
    of_loads = FINITE * 1.8 * LOAD_U * 20 * 2**0.5
    alone = trend(component(shares=[("reflected_c", 1.0)]), [earlier(2024, 20.0)])
    assert alone.change_k.u == pytest.approx(np.hypot(2**0.5, of_loads), rel=1e-3)
    for shared in ("emissivity", "emissivity:lug", "camera_offset_k", "camera_gain", "window_transmittance"):
        together = trend(component(shares=[(shared, 1.0)]), [earlier(2024, 20.0)])
        assert together.change_k.u == pytest.approx(of_loads, rel=1e-3)
    half = trend(component(shares=[("emissivity", 0.5), ("ambient_c", 0.5)]), [earlier(2024, 20.0)])
    assert half.change_k.u == pytest.approx(np.hypot(1.0, of_loads), rel=1e-3)


def test_a_shared_emissivity_scales_a_change_and_a_shared_offset_leaves_it():
    """20 K − 10 K: an emissivity that is off by 5 % of the rise is off by 5 % of the change, an offset by nothing."""
    own = FINITE * 1.8 * LOAD_U * np.hypot(20, 10)
    scaled = trend(component(shares=[("emissivity", 1.0)]), [earlier(2024, 10.0, u=0.5)])
    assert scaled.change_k.u == pytest.approx(np.hypot(0.05 * 10, own), rel=1e-3)
    shifted = trend(component(shares=[("camera_offset_k", 1.0)]), [earlier(2024, 10.0)])
    assert shifted.change_k.u == pytest.approx(own, rel=1e-3)


def test_the_load_exponent_counts_by_the_difference_of_the_loads():
    """Same load then and now: what n may be off scales both; else it counts for the one that was extrapolated."""
    at_once = trend(component(load=200.0), [earlier(2024, 20.0, load=200.0)])
    apart = trend(component(load=400.0), [earlier(2024, 20.0, load=200.0)])
    of_exponent = 20 * 2**1.8 * np.log(2) * 0.2 / 3**0.5
    rest = np.hypot(np.hypot(1, 2**1.8), 1.8 * LOAD_U * np.hypot(20, 20 * 2**1.8))
    assert apart.change_k.u == pytest.approx(np.hypot(of_exponent, rest), rel=0.01)  # finite steps in n
    assert at_once.change_k.u == pytest.approx(2**1.8 * np.hypot(2**0.5, 1.8 * LOAD_U * 20 * 2**0.5), rel=1e-3)


@pytest.mark.parametrize(("delta", "significant"), [(23.0, False), (28.0, True), (17.0, False), (12.0, True)])
def test_a_change_is_significant_beyond_twice_its_uncertainty(delta, significant):
    found = trend(component(delta=delta), [earlier(2024, 20.0)])
    assert 3.0 < 2 * found.change_k.u < 7.0  # √2 of 1 K, and both loads: 1.7 % of a load, 3 % of a rise
    assert found.is_significant is significant


def test_an_earlier_uncertainty_that_nobody_stated_is_that_of_now():
    part = component(u=2.0)
    assert trend(part, [earlier(2024, 20.0, u=None)]).change_k == trend(part, [earlier(2024, 20.0, u=2.0)]).change_k
    unknown = trend(replace(part, delta_ambient_k=Estimate(29.0, None)), [earlier(2024, 20.0)])
    assert (unknown.change_k, unknown.is_significant) == (Estimate(9.0, None), None)


def test_2_u_holds_the_true_change_in_about_95_of_100_surveys():
    """Drawn: one emissivity, one camera, one exponent in both surveys, everything else anew; 2 u is 95.4 %.

    The exponent is drawn from its rectangle, 1.6 to 2.0, as electrical.md bounds it."""
    rng = np.random.default_rng(4)
    held, rises, ratios = 0, (12.0, 30.0), (0.7, 0.95)
    for _ in range(1500):
        n, scale, shift = rng.uniform(1.6, 2.0), rng.normal(0, 0.05), rng.normal(0, 0.8)
        read, loads = [], []
        for rise, ratio in zip(rises, ratios, strict=True):  # at rated load
            read.append(rise * ratio**n * (1 + scale) + shift + rng.normal(0, 0.7))
            loads.append(400 * ratio * (1 + rng.normal(0, LOAD_U)))
        before, now = read
        u = [float(np.sqrt((0.05 * one) ** 2 + 0.8**2 + 0.7**2)) for one in read]
        shares = [("emissivity", (0.05 * now / u[1]) ** 2), ("camera_offset_k", (0.8 / u[1]) ** 2)]
        found = trend(
            component(delta=now, u=u[1], load=loads[1], shares=shares), [earlier(2024, before, loads[0], u=u[0])]
        )
        held += abs(found.change_k.value - (rises[1] - rises[0])) <= 2 * found.change_k.u
    assert 0.936 < held / 1500 < 0.99  # 3.3 standard deviations of 1500 draws below; the rectangle holds more


def test_slope_per_year_with_its_interval_from_five_surveys_on():
    rows = [earlier(2019 + k, 10.0 + 2.0 * k) for k in range(6)]
    found = trend(component(delta=22.0), rows)
    assert found.slope_k_per_year.value == pytest.approx(2.0, rel=0.002)  # leap years
    assert found.slope_low_k_per_year == pytest.approx(2.0, rel=0.003)
    assert found.slope_high_k_per_year == pytest.approx(2.0, rel=0.003)
    odd = trend(component(delta=22.0), [*rows[:-1], earlier(2024, 90.0)])
    assert odd.slope_k_per_year.value == pytest.approx(2.0, rel=0.05)
    three = trend(component(delta=14.0), rows[:1] + rows[5:])
    assert three.slope_k_per_year.u is None
    assert (three.slope_low_k_per_year, three.slope_high_k_per_year) == (None, None)
    assert trend(component(), rows[:1]).slope_k_per_year is None


def test_of_like_parts_over_all_frames_the_one_that_stands_out_is_named():
    rng = np.random.default_rng(2)
    parts = [component(f"lug {k}", 20 + rng.normal(0, 0.7), key=f"k{k}", group="lugs") for k in range(9)]
    parts[4] = component("lug 4", 32.0, key="k4", group="lugs")
    (found,) = populations([frame(*parts[:5]), frame(*parts[5:], id_="F02")])
    assert (found.group, found.count, found.how, found.exceeding) == ("lugs", 9, "mean", ("k4",))
    assert 21 < found.alarm_k < 32
    assert populations([frame(*parts[:4])]) == ()
    assert populations([frame(*parts, kind="building")]) == ()
    assert populations([frame(*(replace(part, group=None) for part in parts))]) == ()


def test_parts_are_compared_at_rated_load():
    """Alike joints under loads of 50 to 100 % rise by 1 to 3.5 times as much; one of them is bad at half load."""
    ratios = np.linspace(0.5, 1.0, 12)
    parts = [
        component(f"lug {k}", (60.0 if k == 1 else 30.0) * ratio**1.8, load=400 * ratio, key=f"k{k}", group="lugs")
        for k, ratio in enumerate(ratios)
    ]
    (found,) = populations([frame(*parts)])
    assert found.exceeding == ("k1",)
    unloaded = [replace(part, load_a=None) for part in parts]
    assert populations([frame(*unloaded)])[0].exceeding == ()  # as they are it hides among the loaded ones
    some = [*parts[:6], *unloaded[6:]]
    assert populations([frame(*some)])[0].count == 6


def test_bounds_are_held_against_the_others_and_readings_in_doubt_are_not():
    usual = [component(f"lug {k}", 20.0 + 0.2 * k, key=f"k{k}", group="lugs") for k in range(6)]
    saturated = component("s", 60.0, key="s", group="lugs", flags=(SATURATED,))
    bare = component("b", 60.0, key="b", group="lugs", flags=(REFLECTIVE,))
    idle = component("i", 60.0, key="i", group="lugs", flags=(LOW_LOAD,))
    (alone,) = populations([frame(*usual)])
    (found,) = populations([frame(*usual, saturated, bare, idle)])
    assert found.alarm_k == alone.alarm_k
    assert found.exceeding == ("s",)
