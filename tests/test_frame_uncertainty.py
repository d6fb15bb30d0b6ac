"""The uncertainty of one frame's numbers: what must cancel, what must grow, and how both ways of propagation agree."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import tasks

from irsurvey import pipeline
from irsurvey.analysis.correction import correct
from irsurvey.analysis.measurand import names, reach, stacked
from irsurvey.analysis.planning import planned
from irsurvey.analysis.regions import screen
from irsurvey.model import Frame, Signal, Surface
from irsurvey.uncertainty import propagate

SHAPE = (120, 160)


def wall(rows=slice(40, 80), columns=slice(90, 130), delta=-3.0, level=291.15):
    t = np.full(SHAPE, level)
    t[rows, columns] += delta
    return t


def analysed(task, t=None, **options):
    return pipeline.analyse(tasks.frame(wall() if t is None else t), task, **options)


def first(task, t=None, **options):
    return analysed(task, t, **options)[0].findings[0]


def contribution(finding, number, name):
    return next((term.contribution for term in finding.budgets[number] if term.input.startswith(name)), 0.0)


def with_u(task, **us):
    changed = (replace(task.scene[name], u=u) for name, u in us.items())
    return replace(task, scene=task.scene.with_(*changed))


def test_the_terms_of_a_budget_make_up_its_uncertainty():
    # JCGM 100:2008, eq. 11a; terms below 1e-4 of the variance are left out of the report.
    finding = first(tasks.task())
    for number, estimate in (("delta_k", finding.delta_k), ("extreme_c", finding.extreme_c)):
        terms = finding.budgets[number]
        assert np.sqrt(sum(term.contribution**2 for term in terms)) == pytest.approx(estimate.u, rel=1e-3)
        assert sum(term.share for term in terms) == pytest.approx(1, abs=2e-3)
        assert [term.contribution for term in terms] == sorted((term.contribution for term in terms), reverse=True)
        for term in terms:
            assert abs(term.sensitivity) * term.u == pytest.approx(term.contribution, rel=1e-9)


@pytest.mark.parametrize("accuracy", [0.5, 2.0, 5.0])
def test_with_one_surface_the_difference_does_not_know_the_offset_of_the_camera(accuracy):
    fine = first(tasks.task(camera=tasks.camera(accuracy=0.1, accuracy_fraction=0.0)))
    coarse = first(tasks.task(camera=tasks.camera(accuracy=accuracy, accuracy_fraction=0.0)))
    # ∂T/∂T_app = S′(T_app)/(τ ε S′(T)) changes by about 2e-4 K⁻¹: 3 K apart, of ±5 K some mK are left.
    assert coarse.delta_k.u == pytest.approx(fine.delta_k.u, abs=0.005)
    assert coarse.extreme_c.u > 2 * fine.extreme_c.u


def test_with_another_emissivity_the_difference_does_know_it():
    patch = Surface("patch", ((85.0, 35.0), (135.0, 35.0), (135.0, 85.0), (85.0, 85.0)), emissivity="emissivity:patch")
    scene = tasks.scene(**{"emissivity:patch": (0.7, 0.02)})
    apart = [
        first(tasks.task(camera=tasks.camera(accuracy=accuracy), surfaces=(patch,), scene=scene)).delta_k.u
        for accuracy in (0.5, 5.0)
    ]
    assert apart[1] > 2 * apart[0]  # 5/√3 K · (1/0.7 − 1/0.95) ≈ 1.1 K


def test_uncertainty_grows_with_distance():
    us = [first(tasks.task(scene=tasks.scene(distance=(d, 0.1 * d)))).extreme_c.u for d in (2.0, 20.0, 100.0, 300.0)]
    assert us == sorted(us)
    assert us[-1] > us[0]


def test_twice_the_pixels_shrink_the_noise_term_and_no_other_input():
    # Same place in the lens, twice as many pixels: a mean over n pixels has noise σ/√n.
    small, large = (
        first(tasks.task(), wall(rows=slice(60 - half, 60 + half), columns=slice(90, 130))) for half in (14, 28)
    )
    names = ("emissivity", "camera_gain", "reflected_c", "air_c", "convection_factor", "mean_radiant_c")
    for name in names:
        assert contribution(large, "heat_flux_w_m2", name) == pytest.approx(
            contribution(small, "heat_flux_w_m2", name), rel=0.02
        )
    noise = [contribution(one, "heat_flux_w_m2", "noise_k:") for one in (small, large)]
    # One 28 × 40 and one 56 × 40 region; the term may fall below the 1e-4 of the variance that is reported.
    assert noise[1] == 0 or noise[1] == pytest.approx(noise[0] / 2**0.5, rel=0.02)


def test_what_follows_the_air_moves_with_it():
    # Surroundings nobody measured are taken to be at air temperature: an error of the air is one of both.
    alone = tasks.task(scene=tasks.scene(indoor_air=(293.15, 0.5), mean_radiant=(293.15, 0.0)))
    radiant = replace(alone.scene["mean_radiant"], follows="indoor_air")
    together = replace(alone, scene=alone.scene.with_(radiant))
    film, emission = 2.5, 0.95 * 4 * 5.67e-8 * 293.15**3
    one, other = (contribution(first(task), "heat_flux_w_m2", "indoor_air_c") for task in (alone, together))
    assert one == pytest.approx(0.5 * film, rel=0.01)
    assert other == pytest.approx(0.5 * (film + emission), rel=0.01)


def test_declared_correlation_changes_the_sum_and_not_the_terms():
    task = tasks.task(scene=tasks.scene(indoor_air=(293.15, 0.5), mean_radiant=(293.15, 0.5)))
    joined = replace(task, scene=replace(task.scene, correlations=(("indoor_air", "mean_radiant", 1.0),)))
    apart, together = first(task), first(joined)
    a, b = (contribution(apart, "heat_flux_w_m2", name) for name in ("indoor_air_c", "mean_radiant_c"))
    # JCGM 100:2008, eq. 16: u² grows by 2 r a b.
    expected = np.sqrt(apart.heat_flux_w_m2.u**2 + 2 * a * b)
    assert together.heat_flux_w_m2.u == pytest.approx(expected, rel=1e-6)


def test_monte_carlo_and_first_order_agree_where_the_law_is_nearly_straight():
    report, _ = analysed(tasks.task(), uncertainty="monte-carlo")
    drawn, straight = report.findings[0], first(tasks.task())
    assert report.uncertainty == "monte-carlo"
    assert report.draws >= 10_000
    assert drawn.delta_k.value == straight.delta_k.value  # what is reported does not depend on draws
    # The draws of an emissivity of 0.95 ± 0.02 end at 1: a few per cent.
    assert drawn.delta_k.u == pytest.approx(straight.delta_k.u, rel=0.06)
    assert drawn.extreme_c.u == pytest.approx(straight.extreme_c.u, rel=0.03)
    low, high = drawn.delta_k.interval_95
    assert low < drawn.delta_k.value < high


def test_monte_carlo_is_the_same_for_the_same_frame():
    one, other = (analysed(tasks.task(), uncertainty="monte-carlo")[0] for _ in range(2))
    assert one == other


def test_a_low_emissivity_is_told_to_be_strongly_curved_and_the_draws_show_it():
    # Computed in the domain notes: ε 0.30 ± 0.05 makes the distribution skewed and first order low by some 8 %.
    task = tasks.task(scene=tasks.scene(emissivity=(0.30, 0.05), reflected=(298.15, 1.0)))
    t = np.full(SHAPE, 300.15)
    t[40:80, 90:130] += 15
    told, _ = analysed(task, t)
    assert any("monte-carlo" in flag for flag in told.flags)
    report, _ = analysed(task, t, uncertainty="monte-carlo")
    low, high = report.findings[0].extreme_c.interval_95
    value = report.findings[0].extreme_c.value
    assert high - value > 1.2 * (value - low)
    assert any("differs by more than 20 %" in flag for flag in report.flags)


def test_the_uncertainty_map_is_the_budget_of_each_pixel():
    task = with_u(tasks.task(), shading=0.0, shading_x=0.0, shading_y=0.0, size_of_source=0.0, outline=0.0)
    report, maps = analysed(task, maps=("uncertainty",))
    finding = report.findings[0]
    # A spot of nine pixels has a third of a pixel's noise, and may owe something to having been picked.
    own = {name: contribution(finding, "extreme_c", name) for name in ("noise_k", "selection")}
    shared = finding.extreme_c.u**2 - own["noise_k"] ** 2 - own["selection"] ** 2
    expected = np.sqrt(shared + 9 * own["noise_k"] ** 2)
    x, y = (round(place) for place in finding.shape.extreme_at)
    assert maps.u_temperature[y, x] == pytest.approx(expected, rel=2e-3)  # gain term of a pixel beside a spot's mean
    assert maps.u_temperature.shape == maps.temperature_c.shape
    assert report.temperature.unmeasurable_pixels == int(np.isnan(maps.u_temperature).sum())


def test_the_uncertainty_map_knows_lens_shading_where_a_pixel_lies():
    # Black wall at no distance, an exact camera: in the middle nothing but noise is left, in a corner all of the 0.4 K
    # of shading as well, at the ends of the axes its fourth power of their distance from the centre.
    scene = tasks.scene(emissivity=(1.0, 0.0), distance=0.0, shading=(0.0, 0.4), shading_x=0.0, shading_y=0.0)
    task = tasks.task(camera=tasks.camera(accuracy=0.0, accuracy_fraction=0.0, noise=None), scene=scene)
    _, maps = analysed(task, wall(delta=0), maps=("uncertainty",))
    u, noise = maps.u_temperature, maps.u_temperature[59:61, 79:81].mean()
    assert noise == pytest.approx(0.05, abs=0.003)  # the frame's own, estimated from it
    # Tolerance: half a pixel, by which pixels miss the axes, is below 1e-4 of the fourth power.
    for place, share in (((0, 0), 1.0), ((60, 159), 1 / (1 + 0.75**2) ** 2), ((0, 80), (0.75**2 / (1 + 0.75**2)) ** 2)):
        assert u[place] == pytest.approx(np.hypot(0.4 * share, noise), abs=2e-4)


def test_the_uncertainty_map_leaves_out_what_lies_beyond_a_calibration_and_falls_with_falling_counts():
    rising = ((1000.0, 273.15), (2000.0, 293.15), (3000.0, 313.15))
    falling = ((3000.0, 273.15), (2000.0, 293.15), (1000.0, 313.15))
    us = []
    for points, sign in ((rising, 1), (falling, -1)):
        counts = 2000 + sign * np.random.default_rng(0).normal(-100, 3, SHAPE)
        counts[:3, :3] = 3500  # above every calibration point
        camera = tasks.camera(signal=Signal("counts", points=points))
        frame = Frame(np.rint(counts).astype(np.uint16), "0" * 64)
        _, maps = pipeline.analyse(frame, tasks.task(camera=camera), maps=("uncertainty",))
        assert np.array_equal(np.isnan(maps.u_temperature), np.isnan(maps.temperature_c))
        us.append(np.nanmedian(maps.u_temperature))
    assert us[0] == pytest.approx(us[1], rel=1e-3)  # the same temperatures, stored the other way round


BLACK = {"emissivity": (1.0, 0.0), "distance": 0.0, "reflected": (293.15, 0.0), "size_of_source": 0.0, "outline": 0.0}


def read_beside_a_known_surface(place, t_known=291.15, fraction=0.0, **us):
    """Standard uncertainties of offset and extreme of a black wall with a black surface of known temperature."""
    left, top = place
    polygon = ((left, top), (left + 24.0, top), (left + 24.0, top + 24.0), (left, top + 24.0))
    known = Surface("panel", polygon, "known-temperature", temperature="temperature:panel")
    stated = {"shading": 0.0, "shading_x": 0.0, "shading_y": 0.0} | us
    scene = tasks.scene(**BLACK | stated | {"temperature:panel": (t_known, 0.1)})
    camera = tasks.camera(accuracy=2.0, accuracy_fraction=fraction, noise=1e-6)
    t = wall()
    t[int(top) : int(top) + 25, int(left) : int(left) + 25] = t_known
    report, _ = pipeline.analyse(tasks.frame(t, noise=0.001), tasks.task(scene=scene, camera=camera, surfaces=(known,)))
    (finding,) = [one for one in report.findings if one.shape.centre[0] > 85]
    return report.inputs["camera_offset_k"].u, finding


def shading_at(x, y):
    """Of a lens that darkens with the fourth power of the distance from the centre: 1 in the corners."""
    half_width, half_height = (SHAPE[1] - 1) / 2, (SHAPE[0] - 1) / 2
    squares = (x - half_width) ** 2 + (y - half_height) ** 2
    return (squares / (half_width**2 + half_height**2)) ** 2


def test_an_offset_fixed_on_a_known_surface_knows_the_lens_where_that_lies():
    # Shading of 0.5 K (corner), panel in a corner, read without its outermost two pixels.
    offset_u, finding = read_beside_a_known_surface((2.0, 90.0), shading=(0.0, 0.5))
    y, x = np.mgrid[92:113, 4:25]
    at_panel, at_spot = 0.5 * shading_at(x, y).mean(), 0.5 * shading_at(*finding.shape.extreme_at)
    # Tolerances: noise of a frame that has 1 mK of it, and the spot's extent.
    assert offset_u == pytest.approx(np.hypot(0.1, at_panel), rel=0.005)
    # What spot and panel have of it in common cancels; independent, it would be √(0.1² + panel² + spot²).
    assert finding.extreme_c.u == pytest.approx(np.hypot(0.1, at_panel - at_spot), rel=0.01)
    # A panel no further from the centre than the spot, in another direction, leaves the thermometer alone.
    _, near = read_beside_a_known_surface((38.0, 48.0), shading=(0.0, 0.5))
    assert near.extreme_c.u == pytest.approx(0.1, abs=0.01)


def test_an_offset_fixed_on_a_warm_surface_knows_the_gain_of_the_camera():
    # Panel at 40 °C, spot at 15 °C, gain known to 2 % (rectangular): 25 K · 0.02/√3 between them, wherever the pivot.
    _, finding = read_beside_a_known_surface((60.0, 90.0), t_known=313.15, fraction=0.02)
    assert finding.extreme_c.u == pytest.approx(np.hypot(0.1, 25 * 0.02 / 3**0.5), abs=0.003)


def test_a_foil_owes_part_of_what_it_shows_to_itself():
    # Sky of −30 °C on foil as warm as the air, 20 °C, emissivity 0.04 (handbook compilations: 0.03 to 0.05); by
    # Planck's law in 7.5–13 µm, L(20 °C) 45.97 and L(−30 °C) 17.0, dL/dT there 0.40 W m⁻² sr⁻¹ (K⁻¹): 0.04·29/0.40.
    foil = Surface("foil", ((100.0, 90.0), (130.0, 90.0), (130.0, 115.0), (100.0, 115.0)), role="reflector")
    t = wall()
    t[90:116, 100:131] = 243.15
    camera = tasks.camera(accuracy=1.0, accuracy_fraction=0.0)
    scene = tasks.scene(distance=0.0)
    report, _ = pipeline.analyse(tasks.frame(t, noise=0.01), tasks.task(scene=scene, camera=camera, surfaces=(foil,)))
    assert report.inputs["reflected_c"].u == pytest.approx(0.04 * 29 / 0.40, rel=0.1)  # to first order


def test_what_a_shiny_part_may_have_lost_to_blur_is_a_share_of_what_is_seen_of_it():
    # ε 0.3: 3 K of deviation are about 1 K in the picture, of which blur may take its share; that is stretched again
    # to the same share of 3 K, as for a matt part that deviates by 3 K.
    plate = Surface("plate", ((80.0, 30.0), (140.0, 30.0), (140.0, 90.0), (80.0, 90.0)), emissivity="emissivity:plate")
    shiny = tasks.task(
        scene=tasks.scene(distance=0.0, **{"emissivity:plate": (0.3, 0.0)}), surfaces=(plate,), camera=tasks.camera()
    )
    matt = replace(shiny, surfaces=())
    parts = []
    for task, seen in ((shiny, 0.3 * 6.0), (matt, 0.95 * 6.0)):
        t = np.full(SHAPE, 293.15)
        t[50:70, 100:104] += seen  # four pixels wide: blur matters
        parts.append(contribution(analysed(task, t)[0].findings[0], "delta_k", "size_of_source"))
    assert parts[0] == pytest.approx(parts[1], rel=0.1)  # radiance is not quite straight in temperature


def test_a_class_that_hangs_on_one_input_is_fragile_and_says_on_which():
    # ΔT of −2.9 K, an edge at 3: a little less emissivity makes it strong.
    task = tasks.task(scene=tasks.scene(emissivity=(0.95, 0.03), reflected=(293.15, 0.5)))
    finding = first(task, wall(delta=-2.6))
    (governing,) = [one for one in finding.assessments if one.governs]
    assert "fragile" in finding.flags
    flip = next(flip for flip in finding.flips if flip.input == "emissivity")
    term = next(term for term in finding.budgets["delta_k"] if term.input == "emissivity")
    assert flip.class_ != governing.class_
    # To first order ΔT moves by sensitivity × change, onto the edge of 3 K.
    assert abs(finding.delta_k.value + term.sensitivity * flip.change) == pytest.approx(3.0, abs=1e-6)
    assert abs(flip.change) <= 2 * 0.03


def test_a_finding_near_the_threshold_says_how_sure_it_is():
    near, far = (first(tasks.task(), wall(delta=delta)) for delta in (-1.05, -4.0))
    assert 0.5 < near.exceeds_threshold < 0.97
    assert far.exceeds_threshold > 0.999


def test_the_u_value_of_the_reference_is_its_flux_over_the_difference_that_drives_it():
    # What the wall faces is as warm as the air: then the environmental temperature is that of the air.
    scene = tasks.scene(
        indoor_air=(294.15, 0.3), outdoor_air=(274.15, 0.3), mean_radiant=(294.15, 0.3), **tasks.GOOD_CONDITIONS
    )
    camera = tasks.camera(accuracy=0.5, accuracy_fraction=0.0)
    reference = analysed(tasks.task(scene=scene, camera=camera))[0].reference
    assert reference.u_value_w_m2k.value == pytest.approx(reference.heat_flux_w_m2.value / 20.0, rel=1e-12)
    assert reference.u_value_w_m2k.u > 0


def test_a_foil_read_in_the_same_frame_errs_with_the_camera_and_not_on_its_own():
    # Wall and foil read too warm together: with ε 0.5 the wall's own error is then 1 K for 1 K of offset, where an
    # independent reflected temperature would make it √(2² + 1²) K, and a stated one 2 K.
    foil = Surface("foil", ((5.0, 90.0), (45.0, 90.0), (45.0, 115.0), (5.0, 115.0)), role="reflector")
    scene = tasks.scene(emissivity=0.5, distance=0.0, reflected=(291.15, 0.0), outline=0.0, size_of_source=0.0)
    camera = tasks.camera(accuracy=1.0, accuracy_fraction=0.0)
    shared = tasks.task(scene=scene, camera=camera, surfaces=(foil,))
    one, other = (analysed(task, wall(delta=-4.0))[0].reference for task in (shared, replace(shared, surfaces=())))
    offset = 1.0 / 3**0.5
    assert other.u_c == pytest.approx(2 * offset, rel=0.25)  # shading of the lens adds to it
    assert one.u_c < 0.75 * other.u_c


def test_what_belongs_to_one_anomaly_moves_no_other_number():
    # every input moved by itself, through the whole frame, gives the same budgets
    t = wall()
    for row, column in ((5, 60), (5, 100), (95, 90)):
        t[row : row + 15, column : column + 20] -= 4
    task = tasks.task()
    corrected = correct(tasks.frame(t), task)
    measured = planned(corrected, screen(corrected, task), task)
    assert len(measured.plan.regions) == 4
    numbers = names(measured.plan, measured.scene)
    reached = reach(measured.plan, numbers)
    assert {name.partition(":")[0] for name in reached} == {"noise", "outline"}
    assert len(reached) >= 3 * 4  # of each its spot, its whole and its outline

    def model(values):
        return stacked(measured.plan, values)

    together, alone = propagate(model, measured.scene, reached), propagate(model, measured.scene)
    # to rounding of sums over different numbers of scenes
    np.testing.assert_allclose(together.half_swings, alone.half_swings, rtol=1e-9, atol=1e-12)
