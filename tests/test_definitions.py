"""The definitions everything rests on, each pinned by a worked case computed by hand in the test."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import tasks

from irsurvey import pipeline
from irsurvey.geometry.polygons import mask
from irsurvey.model import Component, KnownLength, KnownRectangle, Strip

ROOM = {"indoor_air": (294.15, 0.3), "outdoor_air": (274.15, 0.3), "mean_radiant": (294.15, 0.3)}
WELL = {
    "wind": 1.0,
    "hours_difference_held": 48 * 3600.0,
    "hours_since_sun": 14 * 3600.0,
    "hours_since_rain": 40 * 3600.0,
}
"""With `ROOM`: what has to be known before numbers may be claimed."""
SIGMA = 5.670374419e-8  # CODATA 2018
BLACK = {"emissivity": 1.0, "distance": 0.0}
"""A black surface at no distance: object temperature = apparent temperature, so that cases can be done by hand."""
PATCH = (slice(40, 80), slice(90, 130))


def wall(wall_c, patch_c, **scene):
    t = np.full((120, 160), wall_c + tasks.KELVIN)
    t[PATCH] = patch_c + tasks.KELVIN
    return tasks.frame(t, seed=None), tasks.task(scene=tasks.scene(**{**BLACK, **ROOM, **scene}))


def only_finding(frame, task):
    report, maps = pipeline.analyse(frame, task)
    (finding,) = report.findings
    return finding, maps, report


def test_delta_is_signed_extreme_minus_reference_and_mean_delta_likewise():
    finding, _, report = only_finding(*wall(18.6, 15.5))
    assert finding.sense == "cold"
    assert report.reference.median_c == pytest.approx(18.6, abs=0.006)  # stored to 0.01 K
    assert finding.extreme_c.value == pytest.approx(15.5, abs=0.006)
    assert finding.delta_k.value == pytest.approx(15.5 - 18.6, abs=0.011)
    assert finding.mean_delta_k.value == pytest.approx(15.5 - 18.6, abs=0.011)


def test_delta_is_taken_against_the_plane_at_that_place():
    # A wall 4 K warmer at its right edge than at its left, and a patch 3 K below it wherever it sits.
    gradient = np.broadcast_to(4 * np.arange(160) / 159, (120, 160))
    t = 288.15 + gradient
    t[PATCH] -= 3
    task = tasks.task(scene=tasks.scene(**BLACK), reference=((2.0, 2.0), (80.0, 2.0), (80.0, 117.0), (2.0, 117.0)))
    finding, _, report = only_finding(tasks.frame(t, noise=0.02), task)
    assert report.reference.gradient_k == pytest.approx(4 * 78 / 159, abs=0.05)
    assert finding.mean_delta_k.value == pytest.approx(-3, abs=0.05)  # the plane's own error this far out


def test_heat_flux_inside_is_positive_into_the_wall_and_larger_at_the_cold_patch():
    # Worked: inside, air and surroundings 21 °C, ISO 6946 h_c = 2.5:
    # q = −[2.5 (T − 294.15) + σ(T⁴ − 294.15⁴)], wall 18.6: 6.0 + 13.54 = 19.5; patch 15.5: 13.75 + 30.56 = 44.3 W/m²
    finding, _, _ = only_finding(*wall(18.6, 15.5))
    sigma = 5.670374419e-8
    expected = {
        t: -(2.5 * (t - 21) + sigma * ((t + 273.15) ** 4 - 294.15**4))  # the outside view of the same law
        for t in (18.6, 15.5)
    }
    assert finding.reference_heat_flux_w_m2.value == pytest.approx(expected[18.6], abs=0.1)  # 0.005 K × 8 W/m²K
    assert finding.heat_flux_w_m2.value == pytest.approx(expected[15.5], abs=0.1)
    assert finding.heat_flux_w_m2.value > finding.reference_heat_flux_w_m2.value > 0


def test_heat_flux_outside_is_positive_out_of_the_wall_and_larger_at_the_warm_patch():
    # Worked: outside, air and surroundings 5 °C, wind 2 m/s: h_c = 4 + 4·2 = 12 (ISO 6946).
    frame, task = wall(
        6.2, 8.8, outdoor_air=278.15, indoor_air=294.15, mean_radiant=278.15, air=278.15, reflected=278.15, wind=2.0
    )
    finding, _, _ = only_finding(frame, replace(task, viewed_from="outside"))
    sigma = 5.670374419e-8
    by_hand = 12 * (8.8 - 5) + sigma * (281.95**4 - 278.15**4)
    assert finding.sense == "hot"
    assert finding.heat_flux_w_m2.value == pytest.approx(by_hand, abs=0.2)  # 0.005 K × 17 W/m²K, twice
    assert finding.heat_flux_w_m2.value > finding.reference_heat_flux_w_m2.value > 0


def test_a_u_value_from_outside_is_against_what_air_and_surroundings_are_together():
    # Worked: h_c = 4 + 4·2 = 12, h_r = σ(T_s + T_r)(T_s² + T_r²); U = (h_c + h_r)(T_s − T_env)/(T_i − T_env) with
    # T_env = (h_c T_a + h_r T_r)/(h_c + h_r): surroundings at −5 °C before a wall at 6.2 °C in air at 5 °C.
    frame, task = wall(
        6.2, 8.8, outdoor_air=278.15, indoor_air=294.15, mean_radiant=268.15, air=278.15, reflected=278.15,
        **{**WELL, "wind": 2.0},
    )  # fmt: skip
    finding, _, report = only_finding(frame, replace(task, viewed_from="outside"))
    for t, u_value in ((279.35, report.reference.u_value_w_m2k), (281.95, finding.u_value_w_m2k)):
        radiative = SIGMA * (t + 268.15) * (t**2 + 268.15**2)
        environment = (12 * 278.15 + radiative * 268.15) / (12 + radiative)
        expected = (12 + radiative) * (t - environment) / (294.15 - environment)
        assert u_value.value == pytest.approx(expected, abs=0.01)  # 0.005 K × 17 W/m²K over 18 K


def test_heat_flux_of_a_cooled_building_turns_its_sign():
    warm_day = {"indoor_air": (295.15, 0.3), "outdoor_air": (306.15, 0.3), "mean_radiant": (295.15, 0.3)}
    finding, _, _ = only_finding(*wall(24.0, 27.0, **warm_day))
    # Inside, cooled: heat enters the room through the warm patch; the warm space is outdoors, which it leaves.
    assert finding.heat_flux_w_m2.value > finding.reference_heat_flux_w_m2.value > 0


def test_excess_heat_is_the_sum_of_excess_flux_times_area():
    finding, _, _ = only_finding(*wall(18.6, 15.5, distance=2.0))
    assert finding.area_m2.value == pytest.approx(finding.pixels * (2.0 * 1e-3) ** 2, rel=1e-12)
    expected = (finding.heat_flux_w_m2.value - finding.reference_heat_flux_w_m2.value) * finding.area_m2.value
    assert finding.excess_heat_w.value == pytest.approx(expected, rel=1e-9)


def test_area_grows_with_the_view_angle():
    # footprint² × pixels / cos 60° = twice the area seen straight on.
    straight, _, _ = only_finding(*wall(18.6, 15.5, distance=2.0))
    slanted, _, _ = only_finding(*wall(18.6, 15.5, distance=2.0, view_angle=np.radians(60)))
    assert slanted.area_m2.value == pytest.approx(2 * straight.area_m2.value, rel=1e-9)


def test_area_from_a_known_length_and_from_a_known_rectangle():
    # 40 px of the patch are said to be 0.80 m: 2 cm a pixel, 1600 px → 0.64 m².
    frame, task = wall(18.6, 15.5, known_length=0.80, known_width=0.80, known_height=0.80)
    by_length, _, _ = only_finding(frame, replace(task, known_scale=KnownLength((90.0, 60.0), (130.0, 60.0))))
    assert by_length.pixels == 1600 - 4  # the majority filter rounds the four corners
    assert by_length.area_m2.value == pytest.approx(by_length.pixels * 0.02**2, rel=1e-12)
    corners = ((89.5, 39.5), (129.5, 39.5), (129.5, 79.5), (89.5, 79.5))
    by_rectangle, _, _ = only_finding(frame, replace(task, known_scale=KnownRectangle(corners)))
    assert by_rectangle.area_m2.value == pytest.approx(by_length.area_m2.value, rel=1e-6)  # seen straight on


def test_extreme_is_the_mean_of_a_full_spot_and_not_one_noisy_pixel():
    frame, task = wall(18.6, 15.5)
    stored = frame.stored.copy()
    stored[60, 110] -= 300  # one pixel 3 K colder
    finding, _, _ = only_finding(replace(frame, stored=stored), task)
    assert finding.extreme_c.value == pytest.approx(15.5 - 3 / 9, abs=0.006)


def test_a_region_narrower_than_the_spot_is_size_limited():
    t = np.full((120, 160), 291.75)
    t[60:62, 70:140] -= 4
    finding, _, _ = only_finding(tasks.frame(t, seed=None), tasks.task(scene=tasks.scene(**BLACK, **ROOM)))
    assert "size-limited" in finding.flags


def test_extent_is_what_reaches_the_threshold_and_the_polygon_is_its_outer_outline():
    finding, maps, _ = only_finding(*wall(18.6, 15.5))
    assert np.array_equal(maps.labels == 1, mask(finding.polygon, (120, 160)))
    assert finding.pixels == np.count_nonzero(maps.labels == 1)
    y, x = np.nonzero(maps.labels == 1)
    assert (x.min(), x.max(), y.min(), y.max()) == (90, 129, 40, 79)


def test_labels_go_by_mean_delta_times_area_largest_first():
    t = np.full((120, 160), 291.75)
    t[10:30, 60:80] -= 9  # 400 px × 9 K = 3600
    t[50:100, 60:140] -= 2  # 4000 px × 2 K = 8000
    report, maps = pipeline.analyse(tasks.frame(t, seed=None), tasks.task(scene=tasks.scene(**BLACK, **ROOM)))
    assert [finding.id for finding in report.findings] == ["F01-1", "F01-2"]
    assert report.findings[0].mean_delta_k.value == pytest.approx(-2, abs=0.02)
    assert maps.labels[70, 100] == 1
    assert maps.labels[20, 70] == 2
    assert maps.labels.dtype == np.uint16


def test_the_key_of_a_finding_survives_a_rerun_with_other_inputs():
    frame, task = wall(18.6, 15.5)
    again = replace(task, scene=task.scene.with_(replace(task.scene["emissivity"], value=0.93)))
    one, _, _ = only_finding(frame, task)
    other, _, _ = only_finding(frame, again)
    assert one.mean_c != other.mean_c
    assert one.key == other.key


def switch_room(temperatures, **component):
    """Three lugs side by side; apparent = object temperature, ambient 20 °C."""
    t = np.full((120, 160), 295.15)
    parts = []
    for number, celsius in enumerate(temperatures):
        left = 20 + 45 * number
        t[40:80, left : left + 20] = celsius + tasks.KELVIN
        polygon = ((left, 40.0), (left + 19.0, 40.0), (left + 19.0, 79.0), (left, 79.0))
        given = {"group": "lugs", "phase": str(number + 1), "load": 300.0, "rated": 400.0, **component}
        parts.append(Component(f"lug {number + 1}", polygon, **given))
    # Calibrated against the lugs themselves: an offset all share and a small gain error.
    stated = tasks.scene(**BLACK, ambient=(293.15, 0.5))
    camera = tasks.camera(accuracy=1.0, accuracy_fraction=0.0)
    task = tasks.task(
        kind="electrical",
        method="contact",
        viewed_from=None,
        convection="churchill-chu",
        surface_height=0.1,
        camera=camera,
        scene=stated,
        components=tuple(parts),
        reference=((2.0, 2.0), (150.0, 2.0), (150.0, 30.0), (2.0, 30.0)),
    )
    return tasks.frame(t, seed=None), task


def test_twins_are_compared_with_the_coolest_whose_own_difference_is_zero():
    frame, task = switch_room((40.0, 47.0, 41.5))
    report, _ = pipeline.analyse(frame, task)
    differences = [component.delta_similar_k.value for component in report.components]
    assert differences == pytest.approx([0, 7, 1.5], abs=0.011)
    assert [component.similar_to for component in report.components] == [None, "lug 1", "lug 1"]
    assert report.components[1].delta_ambient_k.value == pytest.approx(27, abs=0.006)
    # A difference of two parts of one emissivity in one frame does not know the camera's offset (1 K / √3): what is
    # left is lens shading, outlines and what blur may have taken.
    terms = {term.input: term.contribution for term in report.components[1].budgets["delta_similar_k"]}
    assert "camera_offset_k" not in terms
    assert report.components[1].delta_similar_k.u < 0.3
    assert report.components[1].delta_ambient_k.u > 0.5


def test_twins_at_other_loads_are_brought_to_the_same_load_first():
    # Rises go with load^1.8 (the middle of 1.6…2.0): 10 K at 300 A is 10·(200/300)^1.8 = 4.82 K at 200 A.
    frame, task = switch_room((30.0, 32.0))
    loads = (300.0, 200.0)
    parts = tuple(replace(part, load=load) for part, load in zip(task.components, loads, strict=True))
    report, _ = pipeline.analyse(frame, replace(task, components=parts))
    first, second = report.components
    assert first.delta_similar_k.value == pytest.approx(0, abs=0.011)
    assert second.delta_similar_k.value == pytest.approx(12 - 10 * (200 / 300) ** 1.8, abs=0.02)
    assert "normalised to the same load" in second.flags


def test_a_single_component_has_no_similar_difference():
    frame, task = switch_room((40.0,))
    report, _ = pipeline.analyse(frame, task)
    assert report.components[0].delta_similar_k is None
    assert report.components[0].similar_to is None


def test_components_are_not_repeated_as_findings_and_what_is_clear_of_them_is_one():
    frame, task = switch_room((40.0, 47.0))
    assert pipeline.analyse(frame, task)[0].findings == ()
    stored = frame.stored.copy()
    stored[90:110, 120:150] += 1000  # 10 K, on nobody's drawing
    (finding,) = pipeline.analyse(replace(frame, stored=stored), task)[0].findings
    assert finding.sense == "hot"
    stored[38:40, 20:40] = 31_000  # the warm rim of a lug that was drawn a little small
    assert len(pipeline.analyse(replace(frame, stored=stored), task)[0].findings) == 1


def test_rated_load_is_a_band_for_exponents_from_1_6_to_2():
    # 10 K at half load: 10/0.5^1.6 = 30.3 K to 10/0.5² = 40 K.
    frame, task = switch_room((30.0, 40.0), load=200.0)
    hot = pipeline.analyse(frame, task)[0].components[1]
    assert hot.at_rated_load.delta_similar_k.low == pytest.approx(30.3, abs=0.05)
    assert hot.at_rated_load.delta_similar_k.high == pytest.approx(40.0, abs=0.05)


# ---- what must not matter -------------------------------------------------------------------------------------


def test_five_kelvins_more_everywhere_change_no_difference_and_no_convection():
    cool, warm = (
        only_finding(
            *wall(18.6 + more, 15.5 + more, **WELL, **{name: (t + more, 0.3) for name, (t, _) in ROOM.items()})
        )
        for more in (0.0, 5.0)
    )
    (one, _, one_frame), (other, _, other_frame) = cool, warm
    for name in ("delta_k", "mean_delta_k", "temperature_factor"):
        assert getattr(other, name).value == pytest.approx(getattr(one, name).value, abs=1e-5)
    by_convection = other.heat_flux_terms_w_m2["convection"].value
    assert by_convection == pytest.approx(one.heat_flux_terms_w_m2["convection"].value, abs=1e-4)
    # Radiation goes with T⁴: ε 1, σ(T_mr⁴ − T⁴), and so does what the patch loses more than the wall.
    for finding, frame, more in ((one, one_frame, 0.0), (other, other_frame, 5.0)):
        radiated = [SIGMA * ((294.15 + more) ** 4 - (t + more + tasks.KELVIN) ** 4) for t in (15.5, 18.6)]
        expected = 2.5 * 3.1 + radiated[0] - radiated[1]
        assert finding.excess_heat_w_m2.value == pytest.approx(expected, abs=0.1)  # stored to 0.01 K
        assert frame.reference.heat_flux_terms_w_m2["radiation:mean_radiant"].value == pytest.approx(
            radiated[1], abs=0.05
        )


def test_a_house_cooled_as_much_as_another_is_heated_lets_as_much_heat_through():
    # Every temperature turned about that of the room; without radiation the two are each other's mirror.
    given = {**WELL, "total_emissivity": 0.0, "u_value": (0.4, 0.0), "tilt": np.pi / 2}
    heated, _, heated_frame = only_finding(*wall(18.6, 15.5, **given))
    cooled, _, cooled_frame = only_finding(*wall(23.4, 26.5, **{**given, "outdoor_air": (314.15, 0.3)}))
    assert (heated.sense, cooled.sense) == ("cold", "hot")
    for name in ("heat_flux_w_m2", "excess_heat_w_m2", "u_value_increase_w_m2k", "u_value_from_contrast_w_m2k"):
        assert getattr(cooled, name).value == pytest.approx(getattr(heated, name).value, rel=1e-6)
    assert cooled.excess_heat_w_m2.value == pytest.approx(2.5 * 3.1, abs=0.05)  # stored to 0.01 K
    assert cooled.excess_heat_w_m2.u == pytest.approx(heated.excess_heat_w_m2.u, rel=0.01)  # noise grows with T
    assert cooled.u_value_increase_w_m2k.value == pytest.approx(2.5 * 3.1 / 20, abs=0.003)
    for frame in (heated_frame, cooled_frame):
        assert frame.reference.film_resistance_m2k_w.value == pytest.approx(1 / 2.5, rel=1e-9)


@pytest.mark.parametrize("axes", [(0,), (1,), (0, 1)], ids=["upside down", "left to right", "turned by 180°"])
def test_a_picture_turned_over_measures_the_same(axes):
    # A bell along a line that begins a quarter down the picture; noise, and a reference at the left.
    _, task = wall(18.6, 15.5, distance=2.0, **WELL)
    bell = np.exp(-(((np.arange(160) - 118) / 12) ** 2)) * (np.arange(120) > 30)[:, None]
    frame = tasks.frame(291.75 - 2.5 * bell, seed=3)
    right, bottom = (159.0 if 1 in axes else 0.0), (119.0 if 0 in axes else 0.0)
    turned_reference = tuple((abs(right - x), abs(bottom - y)) for x, y in task.reference)
    (one,) = pipeline.analyse(frame, task)[0].findings
    turned = replace(frame, stored=np.ascontiguousarray(np.flip(frame.stored, axes)))
    (other,) = pipeline.analyse(turned, replace(task, reference=turned_reference))[0].findings
    assert other.pixels == one.pixels
    assert other.indication.pattern == one.indication.pattern
    for name in ("delta_k", "mean_delta_k", "excess_heat_w", "temperature_factor", "area_m2"):
        assert getattr(other, name).value == pytest.approx(getattr(one, name).value, rel=1e-6)
        assert getattr(other, name).u == pytest.approx(getattr(one, name).u, rel=1e-3)  # noise is told from a sample


def bridged(start, end, metres_per_pixel=0.01, **changes):
    """A strip across a wall at 18 °C, the room at 20 °C, with a bridge 3 K colder that fades over 0.1 m, ten pixels."""
    away = np.abs(np.arange(301) - 150) * 0.01
    t = np.broadcast_to(291.15 - 3 * np.exp(-away / 0.1), (60, 301))
    room = {"indoor_air": (293.15, 0.3), "outdoor_air": (273.15, 0.3), "mean_radiant": (293.15, 0.3)}
    task = tasks.task(
        scene=tasks.scene(**BLACK, **room, **WELL, total_emissivity=0.0, known_length=100 * metres_per_pixel),
        known_scale=KnownLength((0.0, 10.0), (100.0, 10.0)),
        reference=((2.0, 2.0), (40.0, 2.0), (40.0, 57.0), (2.0, 57.0)),
        strips=(Strip("across", (start, 30.0), (end, 30.0), width=5, **changes),),
    )
    report, _ = pipeline.analyse(tasks.frame(t, seed=None), task)
    return report.strips[0], report


# Worked: h = 2.5 alone (no radiation), Ψ = h · 2 · 3 K · 0.1 m/20 K = 0.075 W/(m·K); the undisturbed wall loses
# 2.5 · 2/20 = 0.25 W/(m²·K); I = 1 + Ψ/(U l).
PSI, U_PLAIN = 0.075, 0.25


@pytest.mark.parametrize("half", [90, 115, 140])
def test_linear_transmittance_does_not_depend_on_how_long_the_strip_is_and_the_incidence_factor_does(half):
    strip, _ = bridged(150.0 - half, 150.0 + half)
    assert strip.flags == ()
    length = (2 * half + 1) * 0.01  # as many samples of a centimetre
    # Samples of 1 cm of e^(−x/0.1 m) sum to 0.1 % more than the integral; what its ends still hold takes up to 0.6 %.
    assert strip.linear_transmittance_w_mk.value == pytest.approx(PSI, rel=0.01)
    assert strip.incidence_factor.value == pytest.approx(1 + PSI / (U_PLAIN * length), rel=0.01)
    assert strip.length_m.value == pytest.approx(length, rel=1e-9)


def test_half_a_bridge_from_its_middle_out_is_half_its_linear_transmittance():
    strip, _ = bridged(150.0, 290.0, undisturbed="to")
    other_half = 2.5 * 3 * 0.005 / 20  # the sample in the middle counts whole: half a centimetre of the other side
    assert strip.linear_transmittance_w_mk.value == pytest.approx(PSI / 2 + other_half, rel=0.01)


def test_pixels_twice_as_large_double_lengths_and_quadruple_areas_and_leave_ratios_alone():
    (one, one_report), (other, other_report) = (bridged(10.0, 290.0, size) for size in (0.01, 0.02))
    for name in ("length_m", "linear_transmittance_w_mk"):
        assert getattr(other, name).value == pytest.approx(2 * getattr(one, name).value, rel=1e-9)
    for name in ("incidence_factor", "temperature_factor", "undisturbed_c", "extreme_c"):
        assert getattr(other, name).value == pytest.approx(getattr(one, name).value, rel=1e-9)
    (finding,), (larger,) = one_report.findings, other_report.findings
    for name in ("area_m2", "excess_heat_w", "excess_heat_w_k"):
        assert getattr(larger, name).value == pytest.approx(4 * getattr(finding, name).value, rel=1e-9)
    assert larger.excess_heat_w_m2 == finding.excess_heat_w_m2
