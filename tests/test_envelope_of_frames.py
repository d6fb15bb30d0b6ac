"""What a building frame says of its envelope: heat by what takes it, U-values and their refusals, moisture, seasons."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import psychrolib
import pytest
from forward import SIGMA, seen
from tasks import GOOD_CONDITIONS, frame, scene, task

from irsurvey import pipeline
from irsurvey.analysis.seasons import seasons_of
from irsurvey.model import Element, Estimate, FrameReport, FrameTask, Scene, Season, Surface

INDOOR, OUTDOOR = 293.15, 273.15
EMISSIVITY = 0.9
SHAPE = (120, 160)
PATCH = (slice(40, 80), slice(80, 120))

psychrolib.SetUnitSystem(psychrolib.SI)


def exact(**changes: float | tuple[float, float]) -> Scene:
    """A scene in which everything is known exactly, unless the test says otherwise."""
    given = dict.fromkeys(("pressure", "atmosphere", "view_angle", "shading", "shading_x", "shading_y"), 0.0)
    given |= {"pressure": 101_325.0, "emissivity": EMISSIVITY, "reflected": INDOOR, "air": INDOOR, "distance": 1.0}
    given |= {"relative_humidity": 0.5, "mean_radiant": INDOOR, "convection": 1.0, "ifov": 1e-3, "outline": 0.0}
    given |= {"size_of_source": 0.0, "indoor_air": INDOOR, "outdoor_air": OUTDOOR, "tilt": np.pi / 2}
    return scene(**GOOD_CONDITIONS | given | changes)


def without(scene: Scene, *names: str) -> Scene:
    return replace(scene, quantities=tuple(one for one in scene.quantities if one.name not in names))


def building(scene: Scene, **changes: object) -> FrameTask:
    sure = replace(task().camera, accuracy=0.0, accuracy_fraction=0.0, noise=0.02)
    return task(**{"scene": scene, "camera": sure, "surface_height": 2.5, **changes})


def surveyed(wall: float, patch: float, stated: FrameTask, reflected: float = INDOOR) -> FrameReport:
    """A wall with a patch (both [K]) as the camera sees them through a metre of air, which is nothing here."""
    t = np.full(SHAPE, wall)
    t[PATCH] = patch
    reading = seen(t, EMISSIVITY, reflected)
    report, _ = pipeline.analyse(frame(reading, noise=0.02), stated)
    return report


def test_a_wall_of_known_u_value_has_it() -> None:
    """Steady state: U = 1/(R + 0.13) with the film of the tool, 2.5 W/(m²·K) and exact radiation; here U 0.60.

    The surface is where conduction equals the film; 0.03 K of the camera's steps and the metre of air are 2 % of it."""
    conductance = 0.65
    t = 290.0
    for _ in range(50):
        film = 2.5 + EMISSIVITY * SIGMA * (t + INDOOR) * (t**2 + INDOOR**2)
        t = (film * INDOOR + conductance * OUTDOOR) / (film + conductance)
    report = surveyed(t, t - 3, building(exact()))
    expected = conductance * (t - OUTDOOR) / (INDOOR - OUTDOOR)
    assert report.reference.u_value_w_m2k.value == pytest.approx(expected, rel=0.03)
    # The simple form takes the conventional 0.13 m² K/W, which the film of ε 0.9 nearly is (ISO 6946: 0.1308).
    assert report.reference.u_value_simple_w_m2k.value == pytest.approx(expected, rel=0.04)
    assert report.reference.film_resistance_m2k_w.value == pytest.approx(0.1308, abs=0.0015)  # 18.6 °C, not 20


def test_the_u_value_of_a_patch_is_that_of_the_wall_and_its_increase() -> None:
    report = surveyed(290.5, 287.5, building(exact(u_value=(0.5, 0.05))))
    finding = report.findings[0]
    increase = finding.u_value_increase_w_m2k.value
    assert finding.u_value_w_m2k.value - report.reference.u_value_w_m2k.value == pytest.approx(increase, abs=0.02)
    assert finding.u_value_from_contrast_w_m2k.value == pytest.approx(0.5 + increase, abs=1e-9)
    # contrast/(R_s ΔT), R_s 0.13 by convention: 3/(0.13·20) = 1.15; the film measured is 0.131 to 0.133
    assert increase == pytest.approx(3 / (0.13 * 20), rel=0.04)


def test_a_camera_of_one_kelvin_gives_no_u_value_of_a_good_wall_but_a_known_surface_makes_it_possible() -> None:
    """±1 K on U 0.3 at 20 K: 148 % (k = 2, computed from the stated equation); refused, and the remedy named."""
    camera = replace(task().camera, accuracy=1.0, accuracy_fraction=0.0, noise=0.02)
    wall = INDOOR - 0.3 * 0.13 * 20
    alone = surveyed(wall, wall - 3, building(exact(), camera=camera))
    assert alone.reference.u_value_w_m2k is None
    assert "known temperature" in alone.reference.refusals["u_value_w_m2k"]
    panel = Surface("panel", ((60.0, 90.0), (75.0, 90.0), (75.0, 110.0), (60.0, 110.0)), "known-temperature",
                    temperature="temperature:panel")  # fmt: skip
    stated = building(exact(**{"temperature:panel": (wall, 0.05)}), camera=camera, surfaces=(panel,))
    fixed = surveyed(wall, wall - 3, stated)
    assert fixed.reference.u_value_w_m2k.value == pytest.approx(0.3, abs=2 * fixed.reference.u_value_w_m2k.u)


def test_a_sunlit_face_has_no_u_value() -> None:
    report = surveyed(290.0, 287.0, building(exact(hours_since_sun=1800.0)))
    assert report.reference.u_value_w_m2k is None
    assert "sun" in report.reference.refusals["u_value_w_m2k"]
    assert any(flag.startswith("sunlit") for flag in report.flags)


def test_the_heat_of_a_roof_goes_to_the_air_and_to_the_whole_sky() -> None:
    """Facing up: all of the view is sky.  h 4 + 4·1 (ISO 6946), εσ(T⁴ − T_sky⁴)."""
    sky, roof = 258.15, 271.0
    stated = building(
        without(exact(sky=sky, ground=OUTDOOR, wind=1.0, tilt=0.0, air=OUTDOOR, reflected=OUTDOOR), "mean_radiant"),
        viewed_from="outside",
    )
    terms = surveyed(roof, roof + 3, stated, OUTDOOR).reference.heat_flux_terms_w_m2
    # 0.02 K of camera steps: 0.16 W/m² of convection, 0.07 of radiation
    assert terms["convection"].value == pytest.approx(8 * (roof - OUTDOOR), abs=0.4)
    assert terms["radiation:sky"].value == pytest.approx(EMISSIVITY * SIGMA * (roof**4 - sky**4), abs=0.2)
    assert terms["radiation:ground"].value == pytest.approx(0.0, abs=1e-9)


def test_half_of_what_a_wall_sees_is_ground() -> None:
    stated = building(
        without(exact(sky=258.15, ground=275.15, wind=1.0, air=OUTDOOR, reflected=OUTDOOR), "mean_radiant"),
        viewed_from="outside",
    )
    terms = surveyed(272.0, 275.0, stated, OUTDOOR).reference.heat_flux_terms_w_m2
    expected = EMISSIVITY * SIGMA * (272.0**4 - 275.15**4) / 2
    assert terms["radiation:ground"].value == pytest.approx(expected, abs=0.1)  # 0.02 K of camera steps


def test_heat_goes_by_the_total_emissivity_and_the_picture_by_that_of_the_band() -> None:
    """Window glass: 0.84 over all wavelengths, more in the band of the camera (handbooks)."""
    plain, glass = (surveyed(290.0, 287.0, building(exact(**more))) for more in ({}, {"total_emissivity": 0.84}))
    radiation = [report.reference.heat_flux_terms_w_m2["radiation:mean_radiant"].value for report in (plain, glass)]
    assert radiation[1] / radiation[0] == pytest.approx(0.84 / EMISSIVITY, abs=1e-6)
    assert plain.reference.median_c == glass.reference.median_c


def test_an_unmeasured_sky_is_modelled_and_said_so() -> None:
    stated = building(
        without(
            exact(wind=1.0, air=OUTDOOR, reflected=OUTDOOR, cloud=0.0, ground=OUTDOOR, sky_model=0.0), "mean_radiant"
        ),
        viewed_from="outside", sky_model="swinbank",
    )  # fmt: skip
    report = surveyed(272.0, 275.0, stated, OUTDOOR)
    assert "sky modelled: -24 °C by swinbank" in report.flags  # Swinbank at 0 °C: −23.95 °C
    assert report.reference.u_value_w_m2k is None


def test_the_share_at_risk_is_what_lies_below_the_dew_point() -> None:
    """Dew point by psychrolib (ASHRAE): 20 °C, 60 % → 12.0 °C; the patch at 10 °C is at risk, the wall is not."""
    dew = psychrolib.GetTDewPointFromRelHum(20.0, 0.6)
    report = surveyed(290.0, 283.15, building(exact(relative_humidity=(0.6, 0.02))))
    assert report.room_air.dew_point_c.value == pytest.approx(dew, abs=0.05)  # claimed by the formula
    at_risk = {one.risk: one for one in report.surface_at_risk}
    patch = 40 * 40 / (120 * 160)
    assert at_risk["condensation"].share == pytest.approx(patch, abs=1e-9)
    assert at_risk["condensation"].area_m2 == pytest.approx(40 * 40 * 1e-6, rel=1e-6)
    assert at_risk["condensation"].probability > 0.99
    finding = report.findings[0]
    assert finding.dew_point_margin_k.value == pytest.approx(10.0 - dew, abs=0.1)
    assert finding.condensation_probability > 0.99


def test_mould_needs_a_surface_above_that_of_eighty_percent() -> None:
    """ISO 13788: p_sat(T) = p/0.8.  By psychrolib: the temperature at which 20 °C, 50 % air is at 80 %."""
    pressure = 0.5 * psychrolib.GetSatVapPres(20.0)
    t = np.linspace(5, 20, 15001)
    saturated = np.array([psychrolib.GetSatVapPres(one) for one in t[::100]])
    needed = float(np.interp(pressure / 0.8, saturated, t[::100]))
    report = surveyed(290.0, 284.0, building(exact(relative_humidity=(0.5, 0.02))))
    assert report.room_air.mould_surface_c.value == pytest.approx(needed, abs=0.1)  # two formulas of saturation
    assert report.findings[0].mould_margin_k.value == pytest.approx(284.0 - 273.15 - needed, abs=0.15)


def test_a_wet_room_known_only_by_its_class_is_judged_by_the_class_and_says_so() -> None:
    """ISO 13788 (from memory): class 3 adds 810 Pa at 0 °C outdoors; psychrolib for the outdoor air at 80 %."""
    stated = without(exact(outdoor_humidity=(0.8, 0.05)), "relative_humidity")
    stated = stated.with_(replace(exact()["relative_humidity"], source="default"))
    report = surveyed(290.0, 284.0, building(stated, humidity_class=3))
    expected = 0.8 * psychrolib.GetSatVapPres(0.0) + 810
    assert report.room_air.how == "humidity class 3"
    assert report.room_air.vapour_pressure_pa.value == pytest.approx(expected, rel=0.005)  # over ice or water at 0 °C
    assert "humidity by class" in report.flags


def test_the_factor_at_the_film_of_the_limit_keeps_the_rest_of_the_wall() -> None:
    """0.87 at 0.13 m² K/W equals 0.777 at 0.25 (computed from R_rest = R f/(1 − f)); the film is 0.131 to 0.133."""
    report = surveyed(292.5, OUTDOOR + 0.87 * 20, building(exact()))
    finding = report.findings[0]
    assert finding.temperature_factor.value == pytest.approx(0.87, abs=0.003)
    assert finding.temperature_factor_at_0_25.value == pytest.approx(0.777, abs=0.008)


def season(**changes: object) -> Season:
    given = {"sense": "heating", "degree_days": 1560.0, "degree_days_u": 0.0, "how": "stated"}
    return Season(**{**given, **changes})


def test_a_season_is_the_sum_of_the_worked_example() -> None:
    """U 0.97 over 17.9 m² and 37 440 K·h is 650 071 Wh (published example)."""
    report = surveyed(290.0, 287.0, building(exact()))
    finding = replace(report.findings[0], excess_heat_w_k=Estimate(0.97 * 17.9, 0.0), flags=())
    (found,) = seasons_of([season()], [replace(report, findings=(finding,), claim="quantitative")], [])
    assert found.findings[0].energy_kwh.value == pytest.approx(650.071, abs=0.001)
    assert found.findings_total.energy_kwh.value == pytest.approx(650.071, abs=0.001)


def test_an_uncertain_season_tells_only_its_order_of_magnitude() -> None:
    report = surveyed(290.0, 287.0, building(exact()))
    rows = []
    for u in (0.4, 0.6):
        finding = replace(report.findings[0], excess_heat_w_k=Estimate(1.0, u), flags=())
        (found,) = seasons_of([season(price=0.3)], [replace(report, findings=(finding,), claim="quantitative")], [])
        rows.append(found.findings[0])
    assert [row.order_of_magnitude for row in rows] == [False, True]


def test_a_finding_that_may_be_a_reflection_or_was_never_confirmed_costs_nothing() -> None:
    report = replace(surveyed(290.0, 287.0, building(exact())), claim="quantitative")
    for flag in ("automatic reference", "too reflective for a claim"):
        doubtful = replace(report.findings[0], flags=(flag,))
        (found,) = seasons_of([season()], [replace(report, findings=(doubtful,))], [])
        assert found.findings == ()


def test_an_element_counts_with_its_measured_u_value_before_its_stated_one() -> None:
    report = replace(surveyed(288.0, 285.0, building(exact())), element="wall", claim="quantitative")
    measured = report.reference.u_value_w_m2k
    elements = [Element("wall", area=10.0, u_value=0.1), Element("roof", area=20.0, u_value=0.2), Element("floor")]
    (found,) = seasons_of([season()], [report], elements)
    rows = {row.of: row for row in found.elements}
    assert rows["wall"].heat_w_k.value == pytest.approx(10 * measured.value, rel=1e-9)
    assert rows["roof"].heat_w_k.value == pytest.approx(4.0, abs=1e-12)
    assert "floor" not in rows


def test_a_cooled_building_counts_the_heat_that_comes_in() -> None:
    """Inside 24 °C, outside 38 °C: a warm patch inside lets more heat in, and costs; signs are reversed."""
    hot = exact(indoor_air=297.15, outdoor_air=311.15, mean_radiant=297.15, air=297.15, reflected=297.15)
    report = surveyed(298.15, 301.15, building(hot), 297.15)
    finding = report.findings[0]
    assert finding.heat_flux_w_m2.value > report.reference.heat_flux_w_m2.value > 0
    assert finding.excess_heat_w_k.value > 0
    assert finding.u_value_increase_w_m2k.value > 0
