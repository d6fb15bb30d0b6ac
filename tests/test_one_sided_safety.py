"""What is doubtful never clears anything and is never told as milder than it may be, through the whole pipeline."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import tasks

from irsurvey import pipeline
from irsurvey.analysis.claims import limited
from irsurvey.analysis.correction import correct
from irsurvey.analysis.regions import has_small_reference, screen
from irsurvey.assess.criteria import criteria
from irsurvey.assess.electrical import assess_component
from irsurvey.assess.twins import Member, TwinPlan
from irsurvey.errors import FrameError
from irsurvey.model import Component, Detection, Estimate, KnownRectangle, Surface

SHAPE = (120, 160)
AIR = 293.15


def box(left, top, width=19.0, height=19.0):
    return ((left, top), (left + width, top), (left + width, top + height), (left, top + height))


def panel(t, **changes):
    """Two lugs of one group under load in front of a plate at the temperature of the air, read by a good camera."""
    parts = tuple(
        Component(name, box(left, 40.0), "lugs", load=80.0, rated=100.0)
        for name, left in (("left lug", 20.0), ("right lug", 130.0))
    )
    given = {
        "kind": "electrical",
        "method": "contact",
        "viewed_from": None,
        "convection": "churchill-chu",
        "surface_height": 0.1,
        "reference": box(2.0, 2.0, 148.0, 23.0),
        "components": parts,
        "scene": tasks.scene(ambient=(AIR, 0.3), reflected=(AIR, 0.1)),
        "camera": tasks.camera(accuracy=0.2, accuracy_fraction=0.0),
        **changes,
    }
    return pipeline.analyse(tasks.frame(t, noise=0.02), tasks.task(**given))[0]


def lugs(rise):
    t = np.full(SHAPE, AIR)
    t[40:60, 20:40] += rise
    t[40:60, 130:150] += rise
    return t


def test_sound_lugs_are_cleared_so_that_the_other_tests_can_fail():
    assert all(lug.cleared for lug in panel(lugs(3.0)).components)


def test_a_part_that_states_no_emissivity_has_that_of_the_bare_plate_it_lies_on():
    plate = Surface("plate", box(5.0, 30.0, 150.0, 80.0), emissivity="emissivity:plate")
    scene = tasks.scene(ambient=(AIR, 0.3), reflected=(AIR, 0.1), **{"emissivity:plate": (0.3, 0.01)})
    for lug in panel(lugs(0.3), surfaces=(plate,), scene=scene).components:
        assert not lug.cleared
        assert "too reflective for a claim" in lug.flags
        assert all(one.class_ is None for one in lug.assessments)


@pytest.mark.parametrize("gap", [0, 4, 8])
def test_what_touches_a_part_and_is_hotter_than_it_is_told_and_the_part_not_cleared(gap):
    # A joint 40 K warmer just outside the outline, joined to it by warm cable: the part's own spot does not show it.
    t = lugs(3.0)
    t[44:56, 40 : 60 + gap] += 3
    t[40:60, 40 + gap : 60 + gap] += 40
    report = panel(t)
    (finding,) = report.findings
    assert finding.sense == "hot"
    assert finding.urgency == 4
    left, right = report.components
    assert not left.cleared
    assert "hotter beside it" in left.flags
    assert right.cleared


def test_the_warm_rim_of_a_part_stays_its_own():
    t = lugs(8.0)
    t[38:62, 18:20] += 8  # drawn two pixels too small
    report = panel(t)
    assert report.findings == ()
    assert "hotter beside it" not in report.components[0].flags


def test_a_reference_area_on_bare_metal_carries_no_claim():
    plate = Surface("plate", box(0.0, 0.0, 159.0, 40.0), emissivity="emissivity:plate")
    scene = tasks.scene(reflected=(AIR, 0.5), **{"emissivity:plate": (0.3, 0.02)})
    t = np.full(SHAPE, AIR)
    t[60:90, 90:120] -= 4
    task = tasks.task(surfaces=(plate,), scene=scene, reference=box(4.0, 4.0, 150.0, 30.0))
    report, _ = pipeline.analyse(tasks.frame(t, noise=0.02), task)
    assert any(flag.startswith("too reflective for a claim") for flag in report.flags)
    assert report.findings
    for finding in report.findings:
        assert "too reflective for a claim" in finding.flags
        assert all(one.class_ is None for one in finding.assessments)


def test_what_is_colder_than_the_camera_can_read_is_a_finding_with_a_bound():
    # Wall at −18 °C, range from −20 °C: the patch is 6 K colder and stored at the range's end, sharp edges and all.
    t = np.full(SHAPE, 255.15)
    t[40:80, 90:130] -= 6
    cold = tasks.scene(reflected=(255.15, 1.0), air=(255.15, 1.0))
    task = tasks.task(camera=tasks.camera(range=(253.15, 393.15)), scene=cold)
    stored = tasks.frame(np.maximum(t, 253.15), seed=None)
    report, maps = pipeline.analyse(stored, task)
    (finding,) = report.findings
    assert finding.sense == "cold"
    assert "saturated" in finding.flags
    assert finding.delta_k.value == pytest.approx(-2 / 0.95, abs=0.05)  # at least that; ε 0.95 stretches it
    assert finding.assessments[0].statement.startswith("≥ ")
    assert np.isnan(maps.temperature_c[60, 110])


def test_a_foil_beyond_the_range_measures_nothing():
    # A clear sky far below the range is stored at its end: no reading, and no milder one either.
    foil = Surface("foil", box(100.0, 80.0), role="reflector")
    scene = replace(tasks.scene(), quantities=tuple(q for q in tasks.scene().quantities if q.name != "reflected"))
    t = np.full(SHAPE, AIR)
    t[80:101, 100:121] = 253.15
    task = tasks.task(camera=tasks.camera(range=(253.15, 393.15)), scene=scene, surfaces=(foil,))
    with pytest.raises(FrameError, match="readable reflector"):
        pipeline.analyse(tasks.frame(t, seed=None), task)


@pytest.mark.parametrize("place", [(0, 0), (50, 100), (115, 155)])
@pytest.mark.parametrize("sense", [-1, 1])
def test_the_smallest_size_that_is_stated_detectable_is_found_in_corners_too(place, sense):
    # 5 × 5 pixels, 0.2 K above the threshold (four standard deviations of a pixel), none smaller: 4 × 6 is 24 pixels.
    report, _ = pipeline.analyse(tasks.frame(np.full(SHAPE, 291.15)), tasks.task())
    detectable = report.detectable
    assert detectable.min_pixels == 25
    contrast = sense * 0.95 * (detectable.min_delta_k + 0.2)  # ε 0.95 stretches what is seen
    for height, width, expected in ((5, 5, 1), (4, 6, 0)):
        t = np.full(SHAPE, 291.15)
        rows, columns = (min(start, end - size) for start, end, size in zip(place, SHAPE, (height, width), strict=True))
        t[rows : rows + height, columns : columns + width] += contrast
        assert len(pipeline.analyse(tasks.frame(t), tasks.task())[0].findings) == expected


def test_a_smallest_area_is_stated_in_pixels_too():
    # 0.001 m² at (2 m × 1 mrad)² = 4e-6 m² a pixel: 250 pixels.
    task = tasks.task(detection=Detection(1.0, 25, 0.001))
    detectable = pipeline.analyse(tasks.frame(np.full(SHAPE, 291.15)), task)[0].detectable
    assert detectable.min_area_m2 == 0.001
    assert detectable.min_pixels == 250


def test_labels_go_by_area_in_metres_where_pixels_differ_in_size():
    # A wall seen at an angle: on its far side a pixel covers several times as much.
    t = np.full(SHAPE, 291.15)
    t[80:110, 60:80] -= 4  # 600 px near by
    t[5:25, 100:120] -= 4  # 400 px far away
    corners = ((60.0, 0.0), (119.0, 0.0), (159.0, 119.0), (5.0, 119.0))
    scene = tasks.scene(known_width=(4.0, 0.05), known_height=(12.0, 0.1))
    report, maps = pipeline.analyse(tasks.frame(t), tasks.task(known_scale=KnownRectangle(corners), scene=scene))
    weights = [abs(one.mean_delta_k.value) * one.area_m2.value for one in report.findings]
    assert weights == sorted(weights, reverse=True)
    assert maps.labels[15, 110] == 1


@pytest.mark.parametrize(("pixels", "rise"), [(2, 2.0), (1, 10.0)])
def test_a_hot_spot_too_small_to_be_read_does_not_hide_in_a_generous_outline(pixels, rise):
    # Blurred by a lens of 0.7 px, a joint of one or two pixels reads a fraction of what it is (electrical trade: a part
    # smaller than the measuring spot is at least as hot as it reads).
    import cv2

    t = lugs(0.3)
    t[50 : 50 + pixels, 30 : 30 + pixels] += rise
    left, right = panel(cv2.GaussianBlur(t, (0, 0), 0.7)).components
    assert not left.cleared
    assert "size-limited" in left.flags
    assert "size-limited" not in right.flags


def test_under_conditions_that_are_not_valid_no_part_is_cleared(monkeypatch):
    monkeypatch.setattr(pipeline, "limited", lambda *_: ("not valid", "made up"))
    for lug in panel(lugs(3.0)).components:
        assert not lug.cleared
        assert "conditions not valid" in lug.flags


def test_a_part_wholly_beyond_the_range_by_many_different_numbers_is_a_bound_and_no_failure():
    # 8 K of different stored numbers (hundredths of a kelvin), all of them beyond the range: one bound.
    t = lugs(3.0)
    t[40:60, 20:40] = np.linspace(325.0, 333.0, 20)
    report = panel(t, camera=tasks.camera(accuracy=0.2, accuracy_fraction=0.0, range=(253.15, 323.15)))
    left = report.components[0]
    assert "saturated" in left.flags
    assert not left.cleared
    # The end of the range, ε 0.95 under 20 °C: (50 − 0.05·20)/0.95, linear; 2 m of air and curvature add 0.3 K.
    assert left.max_c.value == pytest.approx(51.58, abs=0.5)
    assert left.urgency == 4


# --- beyond the range without a reference -----------------------------------------------------------------------------

BELOW_50 = tasks.camera(range=(253.15, 323.15))
WHOLLY_HOT = np.full(SHAPE, 330.0)


def hot_under_reference():
    """A wall with 120 saturated pixels, and the reference drawn on nothing else; 30 more of them elsewhere."""
    t = np.full(SHAPE, 291.15)
    t[20:30, 20:32] = 330.0
    t[80:85, 100:106] = 330.0
    return t, box(20.0, 20.0, 11.0, 9.0)


def speckled():
    """A picture without any uniform area, none of which is given: no reference can be suggested.  35 pixels beyond."""
    y, x = np.indices(SHAPE)
    t = 291.15 + 10.0 * ((x // 3 + y // 3) % 2)
    t[60:65, 100:107] = 330.0
    return t


def screened(t, **changes):
    task = tasks.task(**{"camera": BELOW_50, **changes})
    corrected = correct(tasks.frame(t, seed=None), task)
    return corrected, screen(corrected, task)


@pytest.mark.parametrize(
    ("t", "reference", "pixels"),
    [
        (WHOLLY_HOT, box(2.0, 2.0, 48.0, 115.0), [120 * 160]),
        (WHOLLY_HOT, None, [120 * 160]),
        (*hot_under_reference(), [120, 30]),  # the larger first
        (speckled(), None, [35]),
    ],
    ids=["all of it", "all of it, nothing drawn", "under the reference", "no uniform area"],
)
def test_what_is_beyond_the_range_is_found_without_anything_to_compare_it_with(t, reference, pixels):
    # product definition: saturated-hot pixels form a finding of their own with a "≥" bound, ranked first
    _, found = screened(t, reference=reference)
    assert found.reference is None
    assert found.delta is None
    assert [(one.sense, one.is_saturated, one.patch.pixels) for one in found.regions] == [
        ("hot", True, count) for count in pixels
    ]


def test_without_a_reference_hot_leads_cold_and_what_is_within_the_range_is_no_region():
    t, reference = hot_under_reference()
    t[90:118, 2:60] = 250.0  # beyond the other end, far larger
    t[50:60, 100:140] -= 5.0  # within the range
    _, found = screened(t, reference=reference)
    assert [(one.sense, one.patch.pixels) for one in found.regions] == [("hot", 120), ("hot", 30), ("cold", 28 * 58)]


def test_a_bound_without_reference_is_reported_as_one_and_has_no_difference():
    report, maps = pipeline.analyse(tasks.frame(WHOLLY_HOT, seed=None), tasks.task(camera=BELOW_50))
    (finding,) = report.findings
    # The end of the range, ε 0.95 under 20 °C: (50 − 0.05·20)/0.95, linear; 2 m of air and curvature add 0.3 K.
    assert finding.extreme_c.value == pytest.approx(51.58, abs=0.5)
    assert finding.delta_k is None
    assert finding.mean_delta_k is None
    assert finding.heat_flux_w_m2 is None
    assert finding.shape.edge_sharpness_per_pixel is None
    assert {"saturated", "cannot be cleared"} <= set(finding.flags)
    assert finding.area_m2.value == pytest.approx(120 * 160 * 4e-6, rel=0.01)  # (2 m × 1 mrad)² a pixel; view angle
    assert np.isnan(maps.temperature_c).all()
    assert (maps.labels == 1).all()


def test_a_component_wholly_beyond_the_range_is_told_by_itself_also_without_reference():
    lug = Component("lug", box(60.0, 40.0), load=80.0, rated=100.0)
    _, found = screened(WHOLLY_HOT, components=(lug,))
    assert found.regions == ()
    _, beside = screened(speckled(), components=(lug,), reference=None)
    assert [one.patch.pixels for one in beside.regions] == [35]


def test_a_shiny_part_beyond_the_range_whose_bound_has_no_solution_costs_the_frame_nothing_else():
    # ε 0.3 under surroundings stated at 20 °C cannot read −20 °C: its bound does not exist; the cold wall still counts.
    roof = Surface("roof", box(90.0, 40.0, 40.0, 40.0), emissivity="emissivity:roof")
    t = np.full(SHAPE, 283.15)
    t[40:81, 90:131] = 250.0
    t[90:110, 100:120] -= 5.0
    scene = tasks.scene(reflected=(293.15, 1.0), air=(283.15, 1.0), **{"emissivity:roof": (0.3, 0.02)})
    task = tasks.task(camera=BELOW_50, scene=scene, surfaces=(roof,))
    report, _ = pipeline.analyse(tasks.frame(np.maximum(t, 253.15), seed=None), task)
    (finding,) = report.findings
    assert (finding.sense, finding.shape.centre) == ("cold", (109.5, 99.5))
    assert any(flag.startswith("saturated: 1681 pixels") for flag in report.flags)


# --- what a frame may claim -------------------------------------------------------------------------------------------

FULL = ("quantitative", "all requirements on the conditions are met")


def test_a_frame_with_pixels_and_a_reference_keeps_its_claim_so_that_the_next_tests_can_fail():
    assert limited(FULL, *screened(np.full(SHAPE, 291.15))) == FULL


def test_without_a_reference_area_nothing_is_quantitative():
    seen = screened(speckled(), reference=None)
    level, reason = limited(FULL, *seen)
    assert level == "qualitative"
    assert "nothing could be compared" in reason
    assert "all requirements" not in reason
    assert limited(("qualitative", "wind: not recorded"), *seen) == (level, f"wind: not recorded; {reason}")
    assert limited(("not valid", "sun"), *seen) == ("not valid", "sun")


def test_a_frame_without_a_measurable_pixel_is_not_valid():
    level, reason = limited(FULL, *screened(WHOLLY_HOT))
    assert (level, reason) == ("not valid", "no pixel of the frame could be measured: 19200 saturated")


def test_what_is_partly_saturated_and_for_the_rest_without_solution_is_not_valid_and_counts_both():
    # ε 0.2 under surroundings at 60 °C sends more than a wall at 18 °C apparent does, whatever it emits itself.
    scene = tasks.scene(emissivity=(0.2, 0.02), reflected=(333.15, 1.0))
    t = np.full(SHAPE, 291.15)
    t[20:30, 20:32] = 330.0
    level, reason = limited(FULL, *screened(t, scene=scene))
    assert level == "not valid"
    assert "120 saturated, 19080 without physical solution" in reason


# --- inputs that contradict the picture -------------------------------------------------------------------------------

PANEL = Surface("panel", box(100.0, 80.0, 31.0, 31.0), role="known-temperature", temperature="temperature:panel")


def with_known(*stated, off=0.0, **changes):
    """The correction of a wall at 20 °C under 20 °C, with panels in it stated at other temperatures [K, u]."""
    places = [replace(PANEL, name=f"panel {n}", polygon=box(100.0, 10.0 + 40 * n)) for n in range(len(stated))]
    named = [replace(one, temperature=f"temperature:{one.name}") for one in places]
    scene = tasks.scene(**{one.temperature: value for one, value in zip(named, stated, strict=True)})
    task = tasks.task(scene=scene, surfaces=tuple(named), **changes)
    return correct(tasks.frame(np.full(SHAPE, AIR - off), noise=0.02), task)


def test_a_slip_in_a_known_temperature_fails_the_frame_and_says_so():
    # 500 instead of 20 °C: the whole frame would read some 450 K too much.
    with pytest.raises(FrameError) as caught:
        with_known((773.15, 0.3))
    (fault,) = caught.value.faults
    assert fault.where == "F01: surface panel 0: temperature_c"
    assert "8.0 K, 4 times its accuracy" in fault.expected  # ±2 K of the camera
    assert fault.got.startswith("500.0 °C, for which it would be off by -4")
    assert "temperature_c" in fault.remedy


def test_one_slip_among_several_known_temperatures_is_found_as_well():
    with pytest.raises(FrameError, match="panel 1"):
        with_known((AIR, 0.3), (AIR + 60.0, 0.3))


@pytest.mark.parametrize("off", [-7.0, 7.0])
def test_a_camera_off_by_less_than_four_times_its_accuracy_is_put_right(off):
    corrected = with_known((AIR, 0.3), off=off)
    # ε 0.95 under surroundings at the wall's own temperature: reads 0.95 and 0.05 of the same; 2 m of air as warm
    assert corrected.scene["camera_offset"].value == pytest.approx(off, abs=0.01)


@pytest.mark.parametrize("off", [-9.5, 9.5])
def test_a_camera_off_by_more_than_that_is_not_believed(off):
    # ±2 K, four times is 8 K, its own U 2·0.3 K (ε and the air add nothing at one temperature)
    with pytest.raises(FrameError, match="4 times its accuracy"):
        with_known((AIR, 0.3), off=off)


def test_what_is_known_badly_itself_contradicts_nothing():
    assert with_known((AIR, 2.0), off=9.5).scene["camera_offset"].value == pytest.approx(9.5, abs=0.01)


# --- parts ------------------------------------------------------------------------------------------------------------

BOTH = (criteria()["neta-similar"], criteria()["neta-ambient"])


def verdict_on(rise, u=0.5, load=80.0, emissivity=0.95):
    """Of a lug that is the coolest of its group, `rise` above its air, on a rating of 100 A."""
    values = {"delta_similar_k": Estimate(0.0, 0.0), "delta_ambient_k": Estimate(rise, u)}
    lug = Member("lug", AIR + rise, emissivity, "lugs", load, 100.0)
    return assess_component(lug, TwinPlan(0, "lug", is_coolest=True), values, BOTH)


@pytest.mark.parametrize(("rise", "blocked"), [(3.0, False), (0.0, False), (-0.9, False), (-1.1, True), (-30.0, True)])
def test_a_part_colder_than_its_air_by_more_than_u_is_never_cleared(rise, blocked):
    # A conductor under load gives off heat: it cannot be colder than the air around it.  U = 2 × 0.5 K.
    verdict = verdict_on(rise)
    assert verdict.cleared == (not blocked)
    assert ("colder than its air" in verdict.flags) == blocked
    told = " ".join(one.statement for one in verdict.assessments)
    assert ("ambient air, emissivity and reflected temperature" in told) == blocked


def test_the_air_stated_too_warm_clears_no_lug_of_a_panel():
    hot_room = tasks.scene(ambient=(AIR + 30.0, 0.3), reflected=(AIR, 0.1))
    for lug in panel(lugs(3.0), scene=hot_room).components:
        assert not lug.cleared
        assert {"colder than its air", "cannot be cleared"} <= set(lug.flags)


@pytest.mark.parametrize(("load", "blocked"), [(100.0, False), (105.0, False), (105.1, True), (180.0, True)])
def test_a_part_loaded_above_its_rating_is_told_and_never_cleared(load, blocked):
    verdict = verdict_on(3.0, load=load)
    assert verdict.cleared == (not blocked)
    assert ("load above rating" in verdict.flags) == blocked


def test_a_load_above_rating_lowers_no_urgency():
    usual, above = verdict_on(45.0), verdict_on(45.0, load=150.0)
    assert [one.urgency for one in above.assessments] == [one.urgency for one in usual.assessments]
    assert above.urgency == usual.urgency


# --- a reference of a few pixels --------------------------------------------------------------------------------------


@pytest.mark.parametrize(("side", "is_small"), [(0.0, True), (3.0, True), (4.0, False)], ids=["1 px", "16 px", "25 px"])
def test_a_reference_smaller_than_the_least_defect_is_told(side, is_small):
    # 25 pixels is the smallest region that counts, product definition: fewer may be one themselves
    _, found = screened(np.full(SHAPE, 291.15), reference=box(20.0, 20.0, side + 0.5, side + 0.5))
    assert found.reference.pixels == (int(side) + 1) ** 2
    assert has_small_reference(found) == is_small


def test_without_a_reference_none_is_called_small():
    assert not has_small_reference(screened(WHOLLY_HOT)[1])
