"""Absolute limits: the table, the lower of two parts, and what is allowed at a load and ambient air."""

from __future__ import annotations

from math import nan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.assess.criteria import MARKS
from irsurvey.assess.limits import Limit, allowed_now, limits, lowest
from irsurvey.constants import ZERO_CELSIUS
from irsurvey.errors import SurveyError

BARE = limits()["iec-60694/bolted-bare"]
NAMES = st.lists(st.sampled_from(list(limits())), min_size=1, max_size=4)
LIMITS = st.sampled_from(list(limits().values()))
AIRS = st.floats(240, 330)
RATIOS = st.floats(0, 2)


# IEC 60694:1996, Table 3 [P], highest temperature [°C] and rise [K]; of insulation classes the rise is what is left
# above 40 °C.  IEC 62271-1:2017 from memory [M].  IEC 61439-1: 70 K [S] on a daily mean of 35 °C [M].  NEC 110.14(C)
# [S].  NEMA MG-1 windings [S], their skin 20 to 30 K cooler [S], the upper end here.  Sleeve bearing [S].
@pytest.mark.parametrize(
    ("name", "max_c", "rise"),
    [
        ("iec-60694/bolted-bare", 90, 50),
        ("iec-60694/bolted-silver", 115, 75),
        ("iec-60694/bolted-nickel", 115, 75),
        ("iec-60694/bolted-tin", 105, 65),
        ("iec-60694/contact-bare", 75, 35),
        ("iec-60694/contact-silver", 105, 65),
        ("iec-60694/contact-nickel", 105, 65),
        ("iec-60694/contact-tin", 90, 50),
        ("iec-60694/terminal-bare", 90, 50),
        ("iec-60694/terminal-coated", 105, 65),
        ("iec-60694/touchable", 70, 30),
        ("iec-60694/accessible", 80, 40),
        ("iec-62271-1-2017/bolted-bare", 100, 60),
        ("insulation/Y", 90, 50),
        ("insulation/A", 105, 65),
        ("insulation/E", 120, 80),
        ("insulation/B", 130, 90),
        ("insulation/F", 155, 115),
        ("insulation/H", 180, 140),
        ("iec-61439-1/terminal", 105, 70),
        ("nec-110.14/60", 60, None),
        ("nec-110.14/75", 75, None),
        ("nema-mg-1/winding-A", 105, None),
        ("nema-mg-1/winding-B", 130, None),
        ("nema-mg-1/winding-F", 155, None),
        ("nema-mg-1/winding-H", 180, None),
        ("nema-mg-1/skin-A", 85, None),
        ("nema-mg-1/skin-B", 110, None),
        ("nema-mg-1/skin-F", 135, None),
        ("nema-mg-1/skin-H", 160, None),
        ("bearing/sleeve", 85, None),
    ],
)
def test_each_limit_is_that_of_its_source(name: str, max_c: float, rise: float | None) -> None:
    limit = limits()[name]
    assert limit.t_max - ZERO_CELSIUS == pytest.approx(max_c, abs=1e-9)  # rounding of the kelvins
    assert limit.rise == rise
    if rise is not None and not name.startswith("iec-61439-1"):
        assert max_c - rise == 40  # the ambient air these rises are allowed in, IEC 60694


def test_every_limit_says_what_it_is_for_and_where_it_comes_from() -> None:
    assert len(limits()) == 31  # those above
    for name, limit in limits().items():
        assert limit.name == name
        assert limit.what
        assert limit.source
        assert limit.edition
        assert limit.mark in MARKS
        assert limit.t_sure <= limit.t_max


def test_a_figure_that_sizes_conductors_says_that_it_is_no_plain_limit_of_readings() -> None:
    for name in ("nec-110.14/60", "nec-110.14/75"):
        assert "sizing conductors at rated current" in limits()[name].notes


def test_what_hides_behind_a_skin_is_exceeded_for_sure_later_than_it_is_kept_for_sure() -> None:
    skin = limits()["nema-mg-1/skin-F"]  # 155 °C in the winding, its skin 20 to 30 K cooler [S]
    assert (skin.t_sure - ZERO_CELSIUS, skin.t_max - ZERO_CELSIUS) == pytest.approx((125, 135), abs=1e-9)
    assert [float(t) - ZERO_CELSIUS for t in allowed_now(skin, 290.0, 0.5)] == pytest.approx([125, 135], abs=1e-9)


# A joint of two parts takes the lower limit [S].
def test_a_joint_of_two_parts_takes_the_lower_limit() -> None:
    assert lowest(["iec-60694/bolted-silver", "iec-60694/bolted-bare"]) == BARE
    assert lowest(["insulation/F", "iec-60694/bolted-bare", "insulation/H"]) == BARE
    assert lowest(["iec-60694/bolted-bare"]) == BARE


def test_of_two_limits_each_lower_in_one_thing_both_lower_ones_hold_and_both_are_named() -> None:
    both = lowest(["iec-60694/bolted-bare", "nec-110.14/75"])
    assert (both.t_max, both.rise) == (limits()["nec-110.14/75"].t_max, 50)
    assert both.name == "nec-110.14/75 + iec-60694/bolted-bare"
    assert "NEC" in both.source
    assert "IEC 60694" in both.source
    assert both.mark == "S; P"


def test_a_name_that_does_not_exist_is_told_the_nearest() -> None:
    with pytest.raises(SurveyError, match="did you mean 'iec-60694/bolted-bare'"):
        lowest(["iec-60694/bolted-bear"])
    with pytest.raises(SurveyError, match="got none"):
        lowest([])


# Specification: bare bolted copper at 62 °C in air of 22 °C at 45 % load, 50 K allowed at rated load: allowed now
# 32.1/33.9/35.9 °C for n 2/1.8/1.6, printed to tenths.
def test_a_joint_at_part_load_is_allowed_a_part_of_its_rise() -> None:
    low, high = allowed_now(BARE, 22 + ZERO_CELSIUS, 0.45)
    assert (float(low) - ZERO_CELSIUS, float(high) - ZERO_CELSIUS) == pytest.approx((32.1, 35.9), abs=0.05)
    assert low < 33.9 + ZERO_CELSIUS < high
    assert high < 62 + ZERO_CELSIUS


def test_a_cool_day_does_not_buy_rise() -> None:
    # Specification: 68 K at 22 °C are just 90 °C, but would be 108 °C on a day of 40 °C.
    low, high = allowed_now(BARE, 22 + ZERO_CELSIUS, 1.0)
    assert float(low) == float(high) == pytest.approx(72 + ZERO_CELSIUS, abs=1e-9)
    assert high < 22 + 68 + ZERO_CELSIUS


def test_a_hot_day_takes_rise_away_and_a_load_above_rating_buys_none() -> None:
    at_50 = allowed_now(BARE, 50 + ZERO_CELSIUS, 1.0)
    assert [float(t) for t in at_50] == pytest.approx([BARE.t_max] * 2, abs=1e-9)
    assert allowed_now(BARE, 295.15, 1.2) == allowed_now(BARE, 295.15, 1.0)


def test_without_load_nothing_but_ambient_air_is_allowed_and_an_unknown_load_allows_nothing_known() -> None:
    assert [float(t) for t in allowed_now(BARE, 295.15, 0.0)] == [295.15, 295.15]
    for unknown in (nan, -0.1):
        assert np.isnan(allowed_now(BARE, 295.15, unknown)).all()


@given(LIMITS, AIRS, RATIOS, RATIOS)
def test_less_load_never_allows_more_and_nothing_is_allowed_beyond_the_limit(
    limit: Limit, t_ambient: float, one: float, other: float
) -> None:
    less, more = (allowed_now(limit, t_ambient, ratio) for ratio in sorted((one, other)))
    assert less[0] <= more[0]
    assert less[1] <= more[1]
    assert more[0] <= more[1] <= limit.t_max
    assert more[0] <= limit.t_sure


@given(NAMES)
def test_more_parts_in_a_joint_never_allow_it_more(names: list[str]) -> None:
    whole = lowest(names)
    for name in names:
        part = limits()[name]
        assert whole.t_max <= part.t_max
        assert whole.t_sure <= part.t_sure
        assert part.rise is None or (whole.rise is not None and whole.rise <= part.rise)
    assert lowest(names[::-1]).t_max == whole.t_max
    assert lowest(names[::-1]).rise == whole.rise


def test_what_is_allowed_broadcasts_and_equals_its_scalars() -> None:
    airs, ratios = np.array([[280.0], [300.0], [330.0]]), np.array([0.0, 0.45, 1.0, 1.3, nan])
    for limit in (BARE, limits()["bearing/sleeve"]):
        low, high = allowed_now(limit, airs, ratios)
        assert low.shape == high.shape == (3, 5)
        for i, j in np.ndindex(low.shape):
            one = allowed_now(limit, airs[i, 0], ratios[j])
            np.testing.assert_array_equal((low[i, j], high[i, j]), one)
