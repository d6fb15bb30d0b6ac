"""One frame through the whole pipeline: what must cancel, what must never be cleared, what must be said."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import tasks
from hypothesis import given, settings
from hypothesis import strategies as st

from irsurvey import pipeline
from irsurvey.errors import FrameError
from irsurvey.model import Component, Frame, Surface
from irsurvey.radiometry.measurement import Path, apparent_temperature

SHAPE = (120, 160)
BAND = (7.5e-6, 13e-6)


def square(left, top, side=30.0):
    return ((left, top), (left + side, top), (left + side, top + side), (left, top + side))


def seen_through(task, t_object, emissivity=None, reflected=None):
    """Apparent temperature of an object temperature field for the stated scene of a task."""
    values = task.scene.values()
    path = Path(values["air"], values["distance"], 0.00862, values["pressure"])
    return apparent_temperature(
        t_object, emissivity or values["emissivity"], reflected or values["reflected"], path, BAND
    )


def wall(delta=-3.0, level=291.15):
    t = np.full(SHAPE, level)
    t[40:80, 90:130] += delta
    return t


def test_a_stated_surface_comes_back_through_emissivity_reflection_and_air():
    task = tasks.task(scene=tasks.scene(emissivity=(0.85, 0.02), reflected=(280.15, 1.0), distance=(20.0, 0.5)))
    report, maps = pipeline.analyse(tasks.frame(seen_through(task, wall()), seed=None), task)
    # Stored in 0.01 K steps, amplified by 1/0.85; vapour stated to three figures.
    assert np.nanmax(np.abs(maps.temperature_c - (wall() - tasks.KELVIN))) < 0.012
    assert report.findings[0].mean_delta_k.value == pytest.approx(-3, abs=0.02)


@pytest.mark.parametrize("offset", [-2.0, 3.0])
def test_the_offset_of_the_camera_cancels_in_differences_and_not_in_temperatures(offset):
    task = tasks.task()
    one, _ = pipeline.analyse(tasks.frame(wall()), task)
    other, _ = pipeline.analyse(tasks.frame(wall() + offset), task)
    shift = offset / (0.95 * one.atmosphere_transmittance)
    # ∂To/∂T_app = S′(T_app)/(τ ε S′(To)): the wall reads 0.1 K above what it is, and the slope falls with the shift.
    assert other.findings[0].mean_c.value - one.findings[0].mean_c.value == pytest.approx(shift, rel=0.006)
    assert other.findings[0].delta_k.value == pytest.approx(one.findings[0].delta_k.value, abs=0.01)


def test_the_uncertainty_of_a_difference_is_far_below_that_of_a_temperature():
    finding = pipeline.analyse(tasks.frame(wall()), tasks.task())[0].findings[0]
    assert finding.mean_c.u > 1.1  # ±2 K, rectangular: 2/√3 = 1.15 K
    assert finding.mean_delta_k.u < 0.25  # lens shading of 0.3 K between corner and centre is most of it


def test_with_another_emissivity_on_the_region_the_difference_knows_the_reflected_temperature():
    # A patch of ε 0.7 against a wall of 0.95: what they reflect is not shared.
    patch = Surface("patch", square(90.0, 40.0, 40.0), emissivity="emissivity:patch")
    shared = tasks.task(scene=tasks.scene(reflected=(283.15, 3.0)))
    apart = replace(
        shared,
        surfaces=(patch,),
        scene=tasks.scene(reflected=(283.15, 3.0), **{"emissivity:patch": (0.7, 0.03)}),
    )
    t = seen_through(shared, wall())
    mixed = t.copy()
    mixed[40:81, 90:131] = seen_through(shared, np.full((41, 41), 288.15), emissivity=0.7)
    one = pipeline.analyse(tasks.frame(t), shared)[0].findings[0]
    other = pipeline.analyse(tasks.frame(mixed), apart)[0].findings[0]
    assert other.mean_delta_k.value == pytest.approx(-3, abs=0.05)
    # ∂T/∂T_r = (1 − ε)/ε·S'(T_r)/S'(T): 3 K · 0.4 ≈ 1.2 K on the patch alone, 3 K · 0.05 on the wall.
    assert other.mean_delta_k.u > 1.0
    assert one.mean_delta_k.u < 0.35


def test_borders_between_emissivities_are_no_findings():
    # A shiny plate at the temperature of the wall, blurred as a lens does: the rim mixes two emissivities.
    import cv2

    task = tasks.task(
        scene=tasks.scene(reflected=(300.15, 1.0), **{"emissivity:plate": (0.3, 0.03)}),
        surfaces=(Surface("plate", square(80.0, 30.0, 50.0), emissivity="emissivity:plate"),),
    )
    seen = seen_through(task, np.full(SHAPE, 291.15))
    seen[30:81, 80:131] = seen_through(task, np.full((51, 51), 291.15), emissivity=0.3)
    report, maps = pipeline.analyse(tasks.frame(cv2.GaussianBlur(seen, (0, 0), 0.7), noise=0.03), task)
    assert report.findings == ()
    rim = np.abs(maps.temperature_c[28:33, 90:120] - 18.0)
    assert rim.max() > 1.5  # the rim does read wrong; it is the border that keeps it out


def test_a_reflector_measures_the_reflected_temperature_for_its_frame():
    # ASTM E1862: the foil shows what reaches the wall; here 9 °C, while nothing was stated.
    foil = Surface("foil", square(100.0, 80.0), role="reflector")
    stated = tasks.scene(emissivity=(0.8, 0.02), reflected=(282.15, 0.0))
    unstated = replace(stated, quantities=tuple(q for q in stated.quantities if q.name != "reflected"))
    t = seen_through(tasks.task(scene=stated), np.full(SHAPE, 293.15))
    t[80:111, 100:131] = seen_through(tasks.task(scene=stated), np.full((31, 31), 282.15), emissivity=1.0)
    report, maps = pipeline.analyse(tasks.frame(t, noise=0.03), tasks.task(scene=unstated, surfaces=(foil,)))
    assert report.inputs["reflected_c"].value == pytest.approx(9.0, abs=0.02)
    assert report.inputs["reflected_c"].from_ == "measured in frame"
    assert np.nanmedian(maps.temperature_c[:, :60]) == pytest.approx(20.0, abs=0.02)


def test_without_any_reflected_temperature_the_frame_says_what_is_missing():
    scene = replace(tasks.scene(), quantities=tuple(q for q in tasks.scene().quantities if q.name != "reflected"))
    with pytest.raises(FrameError, match="reflected apparent temperature"):
        pipeline.analyse(tasks.frame(wall()), tasks.task(scene=scene))


def test_a_surface_of_known_temperature_fixes_the_offset_and_its_uncertainty():
    panel = Surface("panel", square(100.0, 80.0), role="known-temperature", temperature="temperature:panel")
    scene = tasks.scene(**{"temperature:panel": (293.15, 0.2)})
    task = tasks.task(scene=scene, surfaces=(panel,))
    t = wall()
    t[80:111, 100:131] = 293.15
    report, _ = pipeline.analyse(tasks.frame(seen_through(task, t) - 1.7, noise=0.03), task)
    finding = report.findings[0]
    assert report.inputs["camera_offset_k"].value == pytest.approx(1.7, abs=0.02)
    assert finding.mean_c.value == pytest.approx(15.0, abs=0.03)
    assert finding.mean_c.u < 0.4  # with ±2 K of the camera alone it would be 1.15 K


def test_saturated_pixels_form_a_finding_with_a_bound_ranked_first():
    t = wall(delta=-8)
    t[90:100, 60:70] += 60  # 100 pixels
    camera = tasks.camera(range=(253.15, 323.15))
    report, maps = pipeline.analyse(tasks.frame(t), tasks.task(camera=camera))
    first = report.findings[0]
    assert first.sense == "hot"
    assert "saturated" in first.flags
    assert report.temperature.saturated_pixels == 100
    assert np.isnan(maps.temperature_c[95, 65])
    bound = 50 + (50 - 20) * 0.05 / 0.95  # linearised: reflected 20 °C, ε 0.95; the law's curvature adds to it
    assert first.extreme_c.value == pytest.approx(bound, abs=0.6)


def test_what_has_no_solution_is_no_number_is_counted_and_never_cleared():
    # ε 0.5 under surroundings at 60 °C: whatever reads below some 34 °C would have to emit nothing.
    task = tasks.task(
        kind="electrical",
        method="contact",
        viewed_from=None,
        convection="churchill-chu",
        scene=tasks.scene(emissivity=(0.9, 0.02), ambient=(293.15, 1.0), **{"emissivity:bar": (0.1, 0.02)}),
        components=(
            Component("bar", square(90.0, 40.0), load=390.0, rated=400.0, emissivity="emissivity:bar"),
        ),
    )
    t = np.full(SHAPE, 293.15)
    t[40:71, 90:121] = 260.0
    report, maps = pipeline.analyse(tasks.frame(t, noise=0.02), task)
    assert np.isnan(maps.temperature_c[50, 100])
    assert report.temperature.unmeasurable_pixels == 31 * 31
    (bar,) = report.components
    assert bar.max_c is None
    assert not bar.cleared
    assert "no physical solution" in bar.flags


def test_pixels_without_data_are_counted_and_belong_to_nothing():
    stored = np.rint(wall() * 100).astype(np.float32) / 100
    stored[:20] = np.nan
    camera = tasks.camera(signal=replace(tasks.CENTIKELVIN, scale=1.0))
    report, maps = pipeline.analyse(Frame(stored, "0" * 64), tasks.task(camera=camera))
    assert report.temperature.unmeasurable_pixels == 20 * 160
    assert np.isnan(maps.temperature_c[:20]).all()
    assert len(report.findings) == 1


def test_a_float_frame_and_the_same_frame_in_integers_agree():
    t = np.rint((wall() + np.random.default_rng(4).normal(0, 0.05, SHAPE)) * 100) / 100
    stored = Frame((t * 100).round().astype(np.uint16), "0" * 64)
    floats = Frame(t.astype(np.float32), "0" * 64)
    kelvin = tasks.camera(signal=replace(tasks.CENTIKELVIN, scale=1.0))
    one, one_maps = pipeline.analyse(stored, tasks.task())
    other, other_maps = pipeline.analyse(floats, tasks.task(camera=kelvin))
    # Floats are quantised to 1 mK; float32 itself resolves 0.03 mK at 290 K.
    assert np.nanmax(np.abs(one_maps.temperature_c - other_maps.temperature_c)) < 1e-3
    assert one.findings[0].mean_delta_k.value == pytest.approx(other.findings[0].mean_delta_k.value, abs=1e-3)


def test_one_far_off_number_that_makes_a_float_frame_coarse_is_told():
    stored = np.rint(wall() * 100).astype(np.float32) / 100
    camera = tasks.camera(signal=replace(tasks.CENTIKELVIN, scale=1.0))
    fine, _ = pipeline.analyse(Frame(stored.copy(), "0" * 64), tasks.task(camera=camera))
    assert not any("steps of" in flag for flag in fine.flags)
    stored[0, 0] = 1700.0
    coarse, _ = pipeline.analyse(Frame(stored, "0" * 64), tasks.task(camera=camera))
    assert any("steps of" in flag for flag in coarse.flags)


@pytest.mark.parametrize("number", [-9999.0, 0.0, 65_535.0, 1e6, 1e38])
@pytest.mark.parametrize("limits", [None, (253.15, 423.15)])
def test_a_fill_value_nobody_declared_costs_its_own_pixel_and_nothing_else(number, limits):
    stored = np.rint(wall() * 100).astype(np.float32) / 100
    camera = tasks.camera(signal=replace(tasks.CENTIKELVIN, scale=1.0), range=limits)
    clean, clean_maps = pipeline.analyse(Frame(stored.copy(), "0" * 64), tasks.task(camera=camera))
    stored[0, 0] = number
    report, maps = pipeline.analyse(Frame(stored, "0" * 64), tasks.task(camera=camera))
    assert np.isnan(maps.temperature_c[0, 0])
    # 150…1800 K in 65 534 steps are 25 mK, half of that is rounding
    assert np.nanmax(np.abs(maps.temperature_c - clean_maps.temperature_c)) < 0.02
    found = [finding for finding in report.findings if "saturated" not in finding.flags]  # beyond the range: one
    assert [finding.pixels for finding in found] == [finding.pixels for finding in clean.findings]


def test_wide_integers_keep_their_values_beside_a_far_off_one():
    stored = np.rint(wall() * 100).astype(np.int32)
    _, clean = pipeline.analyse(Frame(stored.copy(), "0" * 64), tasks.task())
    stored[0, 0] = -(2**31)
    _, maps = pipeline.analyse(Frame(stored, "0" * 64), tasks.task())
    assert np.isnan(maps.temperature_c[0, 0])
    # 180 000 hundredths of a kelvin in 65 534 steps are three at a time: 0.03 K, half of that is rounding
    assert np.nanmax(np.abs(maps.temperature_c - clean.temperature_c)) < 0.02


def test_a_clean_frame_is_a_bounded_statement():
    report, _ = pipeline.analyse(tasks.frame(wall(delta=0)), tasks.task())
    assert report.findings == ()
    assert report.detectable.min_delta_k == pytest.approx(1.0, abs=0.1)
    assert report.detectable.min_area_m2 == pytest.approx(25 * 0.002**2, rel=1e-9)


def test_at_distance_0_no_area_is_made_up():
    # distance 0 leaves out the air or stands for "not recorded"; a pixel's footprint, distance × IFOV, would be nothing
    report, _ = pipeline.analyse(tasks.frame(wall()), tasks.task(scene=tasks.scene(distance=0.0)))
    (finding,) = report.findings
    assert (finding.area_m2, finding.excess_heat_w, report.detectable.min_area_m2) == (None, None, None)
    assert finding.excess_heat_w_m2 is not None


def test_what_is_stated_detectable_is_found_and_half_of_it_is_not():
    report, _ = pipeline.analyse(tasks.frame(wall(delta=0)), tasks.task())
    least = report.detectable.min_delta_k
    assert len(pipeline.analyse(tasks.frame(wall(delta=-1.1 * least)), tasks.task())[0].findings) == 1
    assert pipeline.analyse(tasks.frame(wall(delta=-0.5 * least)), tasks.task())[0].findings == ()


def test_an_automatic_reference_is_a_suggestion_without_severity():
    report, _ = pipeline.analyse(tasks.frame(wall()), tasks.task(reference=None))
    assert report.reference.how == "automatic"
    assert report.findings[0].mean_delta_k.value == pytest.approx(-3 / 0.95, abs=0.05)
    assert "automatic reference" in report.findings[0].flags
    assert report.findings[0].urgency is None
    assert all(one.class_ is None for one in report.findings[0].assessments)


def test_ignored_surfaces_are_corrected_but_are_neither_finding_nor_reference():
    lamp = Surface("lamp", square(20.0, 20.0), role="ignore")
    t = wall(delta=0)
    t[20:51, 20:51] += 30
    ignored, maps = pipeline.analyse(tasks.frame(t), tasks.task(surfaces=(lamp,)))
    assert ignored.findings == ()
    assert maps.temperature_c[30, 30] > 40
    assert ignored.reference.pixels == 49 * 116 - 31 * 31


def test_only_what_lies_inside_the_inspected_area_is_found():
    t = wall()
    t[90:110, 100:130] -= 4
    inspect = ((80.0, 30.0), (150.0, 30.0), (150.0, 85.0), (80.0, 85.0))
    report, maps = pipeline.analyse(tasks.frame(t), tasks.task(inspect=inspect))
    assert len(report.findings) == 1
    assert not (maps.labels[86:] > 0).any()


def test_too_reflective_a_finding_gets_no_class():
    plate = Surface("plate", square(90.0, 40.0, 40.0), emissivity="emissivity:plate")
    task = tasks.task(surfaces=(plate,), scene=tasks.scene(**{"emissivity:plate": (0.5, 0.02)}))
    finding = pipeline.analyse(tasks.frame(wall(delta=-8)), task)[0].findings[0]
    assert "too reflective for a claim" in finding.flags
    assert all(one.class_ is None for one in finding.assessments)


def test_heat_flux_map_agrees_with_the_flux_of_a_finding():
    task = tasks.task(scene=tasks.scene(indoor_air=(293.15, 0.5), outdoor_air=(273.15, 0.5)))
    report, maps = pipeline.analyse(tasks.frame(wall()), task, maps=("heat-flux",))
    region = maps.labels == 1
    # Mean of the map against the same law on the histogram: float32 maps, 1e-5 of 60 W/m².
    assert maps.heat_flux[region].mean(dtype=float) == pytest.approx(
        report.findings[0].heat_flux_w_m2.value, abs=2e-3
    )


def test_means_of_a_finding_are_the_means_of_the_map():
    report, maps = pipeline.analyse(tasks.frame(wall()), tasks.task())
    region = maps.labels == 1
    # float32 map at 18 °C after subtracting 273.15 K: 1.5e-5 K per pixel
    of_map = float(maps.temperature_c[region].mean(dtype=float))
    assert report.findings[0].mean_c.value == pytest.approx(of_map, abs=5e-5)


def test_identical_input_gives_equal_reports_which_survive_pickling():
    import pickle

    one, _ = pipeline.analyse(tasks.frame(wall()), tasks.task())
    other, _ = pipeline.analyse(tasks.frame(wall()), tasks.task())
    assert one == other
    assert pickle.loads(pickle.dumps(one)) == one
    assert all(type(place) is int for point in one.findings[0].polygon for place in point)


def test_a_frame_whose_numbers_mean_nothing_fails_with_the_reason():
    with pytest.raises(FrameError, match="under camera"):
        pipeline.analyse(Frame(np.array([[1, 2], [3, 4]], np.uint16), "0" * 64), tasks.task())


@settings(max_examples=40, deadline=None)
@given(
    rise=st.floats(0, 40),
    emissivity=st.floats(0.15, 0.95),
    load=st.one_of(st.none(), st.floats(5, 155)),
    size=st.integers(1, 6),
    ceiling=st.floats(300, 400),
)
def test_nothing_doubtful_is_ever_cleared(rise, emissivity, load, size, ceiling):
    # The one-sided safety rule, through the whole pipeline: saturation, low emissivity, a part smaller than
    # the spot, low or unknown load, no solution: none of them may clear, and no doubt may lower an urgency.
    t = np.full(SHAPE, 293.15)
    t[40 : 40 + size, 60 : 60 + size] += rise
    t[40:60, 100:120] += 1.0
    parts = (
        Component("lug", square(60.0, 40.0, size - 1.0), "lugs", load=load, rated=100.0, emissivity="emissivity:lug"),
        Component("twin", square(100.0, 40.0, 19.0), "lugs", load=load, rated=100.0, emissivity="emissivity:lug"),
    )
    task = tasks.task(
        kind="electrical",
        method="contact",
        viewed_from=None,
        convection="churchill-chu",
        camera=tasks.camera(range=(233.15, ceiling)),
        scene=tasks.scene(ambient=(293.15, 1.0), **{"emissivity:lug": (emissivity, 0.02)}),
        components=parts,
    )
    report, maps = pipeline.analyse(tasks.frame(t, noise=0.02), task)
    lug = report.components[0]
    saturated = bool(np.isnan(maps.temperature_c[40 : 40 + size, 60 : 60 + size]).any())
    doubtful = saturated or emissivity < 0.6 or load is None or load < 40 or size < 3
    if doubtful:
        assert not lug.cleared
        assert "cannot be cleared" in lug.flags
    if lug.cleared:
        assert lug.delta_similar_k.value < 1.0
