"""Quantities in sentences of the program, in other units and with a comma; names and standards are left alone."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from irsurvey.numbers import SI, Style
from irsurvey.report.sentences import in_style

US = Style(units="us")
COMMA = Style(decimal_comma=True)
BOTH = Style("us", True, "%d.%m.%Y")


@pytest.mark.parametrize(
    ("said", "in_us"),
    [
        # 1 K is 1.8 °F exactly, 0 °C is 32 °F; 1 mph is 0.44704 m/s, 1 ft 0.3048 m, exactly
        ("3.69 ± 0.49 K (k = 2) colder than the reference area: a strong", "6.64 ± 0.88 °F (k = 2) colder than"),
        (
            "−66.4 ± 2.7 K (k = 2) against its limit of 105 °C (iec-60694)",
            "−119.5 ± 4.9 °F (k = 2) against its limit of 221",
        ),
        ("sky modelled: -25 °C by berdahl-martin", "sky modelled: −13 °F by berdahl-martin"),
        ("≥ 3/U = 8.57 K", "≥ 15.4 °F"),
        ("camera offset to ±0.6 K (k = 2).", "camera offset to ±1.1 °F (k = 2)."),
        ("at rated load 40 to 48 K above ambient", "at rated load 72 to 86.4 °F above ambient"),
        ("≤ 5 m/s", "≤ 11.2 mph"),
        ("0.25 m²·K/W as limits assume", "1.42 h·ft²·°F/Btu as limits assume"),
        ("at least 0.35 m² of it", "at least 3.77 ft² of it"),
        ("at least 10 K.", "at least 18 °F."),
        ("0 K by definition", "0 °F by definition"),
    ],
)
def test_a_sentence_tells_the_same_in_us_units(said: str, in_us: str) -> None:
    assert in_style(said, US).replace("\u00a0", " ").startswith(in_us)


@pytest.mark.parametrize(
    "said",
    [
        "“bus 20 K, 1.5 m” is as warm as its twin",  # somebody's name for it
        "irradiance ≥ 600 W/m², 50 Pa, 200 A, 12 h",  # in these units there as well
        "JCGM 100:2008, 7.2.6; f1.5.tif; K; 3 Kings; M5 m5",
        "a 5 K/m gradient, 2 K·d",  # units of which it knows only the beginning
    ],
)
def test_what_is_no_quantity_of_the_program_stays(said: str) -> None:
    assert in_style(said, US) == said


def test_a_comma_stands_in_numbers_and_in_nothing_else() -> None:
    said = "0.5 h, required ≥ 2.5 h; “lug 1.5” at 0.18 of rated load; 7.2.6; f1.5.tif; f = 0.72; limit 0.70. Next."
    assert in_style(said, COMMA) == (
        "0,5 h, required ≥ 2,5 h; “lug 1.5” at 0,18 of rated load; 7.2.6; f1.5.tif; f = 0,72; limit 0,70. Next."
    )


def test_days_of_a_sentence_are_written_as_asked_but_not_those_of_a_name() -> None:
    said = "year.csv, 2025-02-03 to 2026-02-02; log-2025-02-03.csv, 2025-02-03.csv; 2025-02-30; “of 2025-02-03”"
    assert in_style(said, BOTH) == (
        "year.csv, 03.02.2025 to 02.02.2026; log-2025-02-03.csv, 2025-02-03.csv; 2025-02-30; “of 2025-02-03”"
    )


@given(st.text(alphabet="0123456789.,±−- KC°m²/sWU=“”to\u00a0Pa", max_size=60), st.sampled_from([US, COMMA, BOTH]))
def test_nothing_is_changed_twice_and_si_not_at_all(said: str, style: Style) -> None:
    once = in_style(said, style)
    if "/U = " not in said and "°C" not in once:  # leaving something out may bring a number to its unit
        assert in_style(once, style) == once
    assert in_style(said, SI) == said
