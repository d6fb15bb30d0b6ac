"""Components found in a frame: which, with what outline and optics, beside what is drawn, and never cleared."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import panels
import pytest
import tasks

from irsurvey import pipeline
from irsurvey.analysis.correction import correct
from irsurvey.analysis.found import with_found
from irsurvey.geometry.polygons import area, inside_fault, mask
from irsurvey.model import Component, Surface

SHAPE = (120, 160)
AIR = 293.15


def box(left, top, width=13.0, height=17.0):
    return ((left, top), (left + width, top), (left + width, top + height), (left, top + height))


def lugs(*rises, left=20, top=40, step=30):
    """Lugs of 14 × 18 px, 30 px apart, so much above a plate at the temperature of the air [K]."""
    t = np.full(SHAPE, AIR)
    for k, rise in enumerate(rises):
        t[top : top + 18, left + step * k : left + step * k + 14] += rise
    return t


def task(**changes):
    given = {
        "kind": "electrical",
        "method": "contact",
        "viewed_from": None,
        "convection": "churchill-chu",
        "surface_height": 0.1,
        "reference": box(2.0, 2.0, 148.0, 23.0),
        "scene": tasks.scene(ambient=(AIR, 0.3), reflected=(AIR, 0.1)),
        "find_components": True,
        **changes,
    }
    return tasks.task(**given)


def found(t, **changes):
    """The task as it is, and with what was found."""
    asked = task(**changes)
    return asked, with_found(asked, correct(tasks.frame(t, noise=0.03), asked))


def test_nothing_is_looked_for_where_nobody_asks():
    asked, after = found(lugs(20, 20, 20), find_components=False)
    assert after is asked


def test_a_balanced_row_becomes_three_components_of_one_group():
    _, after = found(lugs(12, 12, 12))
    assert [one.name for one in after.components] == ["found 1", "found 2", "found 3"]
    assert {one.group for one in after.components} == {"found A"}
    for k, one in enumerate(after.components):
        assert one.is_found
        assert one.load is None
        assert one.rated is None
        assert one.phase is None
        drawn = mask(box(20.0 + 30 * k, 40.0), SHAPE)
        outline = mask(one.polygon, SHAPE)
        assert not (outline & ~drawn).any()
        assert np.count_nonzero(drawn & ~outline) == 4  # its corners, which cleaning against noise rounds off


def test_outlines_hold_what_they_stand_for_on_any_panel():
    for seed in range(10):
        panel = panels.panel("bad joint", seed)
        scene = tasks.scene(emissivity=(panel.emissivity, 0.02), distance=(1.0, 0.05), **panel.stated)
        asked = task(scene=scene, reference=panel.reference)
        after = with_found(asked, correct(tasks.frame(panel.t, seed=seed, noise=panel.noise), asked))
        together = np.sum([mask(one.polygon, SHAPE) for one in after.components], axis=0)
        assert together.max() == 1  # none overlaps another
        for one in after.components:
            assert inside_fault(one.polygon, SHAPE) is None
            assert area(one.polygon) > 0
        for part in panel.parts:
            if part.rise > 2:  # with room for the noise, what is warm by less is not told from its plate
                x, y = round(part.x), round(part.y)
                assert together[y, x] == 1, (seed, part.name)


def test_a_part_without_twins_belongs_to_no_group():
    t = lugs(12, 12, 12)
    t[80:86, 30:120] += 15
    _, after = found(t)
    assert [one.group for one in after.components] == ["found A"] * 3 + [None]


def test_what_is_drawn_wins():
    drawn = Component("left lug", box(18.0, 38.0, 16.0, 20.0), "feeder", load=80.0, rated=100.0)
    asked, after = found(lugs(12, 12, 12), components=(drawn,))
    assert after.components[0] is drawn
    assert [one.name for one in after.components] == ["left lug", "found 1", "found 2"]
    whole = mask(drawn.polygon, SHAPE)
    for one in after.components[1:]:
        assert not (mask(one.polygon, SHAPE) & whole).any()
    assert asked.components == (drawn,)


def test_a_twin_that_a_drawn_one_took_leaves_the_other_alone():
    drawn = Component("left lug", box(20.0, 40.0), "feeder", load=80.0, rated=100.0)
    _, after = found(lugs(12, 12), components=(drawn,))
    assert [(one.name, one.group) for one in after.components[1:]] == [("found 1", None)]


def test_no_name_is_given_twice():
    taken = Component("found 1", box(100.0, 90.0), "found A")
    _, after = found(lugs(12, 12, 12), components=(taken,))
    assert [one.name for one in after.components] == ["found 1", "found 2", "found 3", "found 4"]
    assert [one.group for one in after.components] == ["found A", "found B", "found B", "found B"]


def test_looking_twice_finds_no_more():
    asked, after = found(lugs(12, 12, 12))
    again = with_found(after, correct(tasks.frame(lugs(12, 12, 12), noise=0.03), asked))
    assert again == after


def test_it_has_the_optics_of_the_surface_it_lies_on():
    plate = Surface("plate", box(90.0, 30.0, 60.0, 60.0), emissivity="emissivity:plate")
    scene = tasks.scene(ambient=(AIR, 0.3), reflected=(AIR, 0.1), **{"emissivity:plate": (0.8, 0.01)})
    _, after = found(lugs(12, 12, 12, left=20, step=40), surfaces=(plate,), scene=scene)
    assert [one.emissivity for one in after.components] == ["emissivity", "emissivity", "emissivity:plate"]
    report, _ = pipeline.analyse(tasks.frame(lugs(12, 12, 12, left=20, step=40), noise=0.03), after)
    # ε 0.8 instead of 0.95 under surroundings as warm as the air: 12/0.8 instead of 12/0.95 K; 5 % for curvature
    rises = [one.delta_ambient_k.value for one in report.components]
    assert rises[2] / rises[0] == pytest.approx(0.95 / 0.8, rel=0.05)


def test_nothing_is_found_on_what_is_ignored():
    lamp = Surface("lamp", box(18.0, 38.0, 18.0, 22.0), role="ignore")
    _, after = found(lugs(12, 12, 12), surfaces=(lamp,))
    assert len(after.components) == 2


def test_a_part_beyond_the_range_is_found():
    camera = tasks.camera(range=(253.15, 313.15))
    hot = np.minimum(lugs(12, 40, 12), 313.15)
    _, after = found(hot, camera=camera)
    assert len({one.group for one in after.components}) == 1
    assert len(after.components) == 3


def test_without_a_reference_area_parts_are_found_all_the_same():
    # a checked plate: no uniform area to suggest
    y, x = np.indices(SHAPE)
    t = lugs(30, 30, 30) + 0.8 * ((x // 3 + y // 3) % 2)
    _, after = found(t, reference=((0.2, 0.2), (0.4, 0.2), (0.4, 0.4)))  # holds no pixel centre
    assert len(after.components) == 3


@pytest.mark.parametrize("rises", [(3.0, 3.0, 3.0), (12.0, 12.0, 40.0), (45.0, 45.0, 45.0)])
def test_what_is_found_is_never_cleared_as_nobody_knows_its_load(rises):
    report, _ = pipeline.analyse(tasks.frame(lugs(*rises), noise=0.03), task())
    assert len(report.components) == 3
    for one in report.components:
        assert one.is_found
        assert not one.cleared
        assert "load unknown" in one.flags


def test_what_is_found_tells_of_its_own_warmth_and_is_no_finding_besides():
    report, _ = pipeline.analyse(tasks.frame(lugs(12, 12, 40), noise=0.03), task())
    assert report.findings == ()
    hot = report.components[2]
    assert hot.urgency == 4  # 28 K above its twins (ANSI/NETA, above 15 K: at once)
    assert hot.delta_similar_k.value == pytest.approx(28 / 0.95, abs=0.5)  # ε 0.95 stretches it; curvature, 2 m of air


def test_drawn_and_found_components_come_to_one_report():
    drawn = Component("left lug", box(20.0, 40.0), "feeder", load=80.0, rated=100.0)
    asked = replace(task(), components=(drawn,))
    report, _ = pipeline.analyse(tasks.frame(lugs(12, 12, 12), noise=0.03), asked)
    assert [(one.name, one.is_found) for one in report.components] == [
        ("left lug", False),
        ("found 1", True),
        ("found 2", True),
    ]
