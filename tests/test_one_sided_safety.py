"""What is doubtful never clears anything and is never told as milder than it may be, through the whole pipeline."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import tasks

from irsurvey import pipeline
from irsurvey.errors import FrameError
from irsurvey.model import Component, Detection, KnownRectangle, Surface

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
    monkeypatch.setattr(pipeline, "claim", lambda *_: ("not valid", "made up"))
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
