"""An infrared window measured by two frames of one reference, painted by the forward model of the tests alone."""

from __future__ import annotations

from dataclasses import replace

import forward
import numpy as np
import pytest
import tasks

from irsurvey.analysis.window import DRIFT_U, MOST_U, window_by_frames
from irsurvey.errors import FrameError
from irsurvey.model import Frame, Quantity, Signal, WindowFrames

SHAPE = (40, 50)
DRAWN = ((10.0, 10.0), (39.0, 10.0), (39.0, 29.0), (10.0, 29.0))
INNER = 26 * 16
"""Pixels of it without its outermost two."""
FINE = Signal("apparent-temperature", scale=1e-4)
"""Stored in tenths of a millikelvin, so that rounding is no part of a check."""

TAU, RHO = 0.72, 0.06
T_WINDOW, T_FRONT = 302.0, 296.0


def through_window(t, tau=TAU, rho=RHO, t_window=T_WINDOW, t_front=T_FRONT):
    """What the camera sees of a black body at `t` through a window (ASTM E1897)."""
    own = (1 - tau - rho) * forward.radiance(t_window) + rho * forward.radiance(t_front)
    return forward.apparent(tau * forward.radiance(t) + own)


def stored(t_reference, t_around=296.0):
    t = np.full(SHAPE, t_around)
    t[8:32, 8:42] = t_reference
    return Frame(np.rint(t * 1e4).astype(np.uint32), sha256="0" * 64)


def window_task(camera=None, through_scene=None, without_camera=None, **values):
    stated = {
        "window_temperature": (T_WINDOW, 0.6),
        "window_ambient": (T_FRONT, 1.0),
        "window_reflectance": (RHO, 0.01),
        **values,
    }
    camera = camera or tasks.camera(signal=FINE, accuracy=2.0, accuracy_fraction=0.02)
    scene = tasks.scene(**stated)
    both = [
        tasks.task(id=name, kind="electrical", method="contact", viewed_from=None, camera=one, scene=of)
        for name, one, of in (
            ("F10", without_camera or camera, tasks.scene()),
            ("F11", camera, through_scene or tasks.scene()),
        )
    ]
    return tasks.task(
        kind="electrical",
        method="contact",
        viewed_from=None,
        camera=camera,
        scene=scene,
        window_frames=WindowFrames(*both, DRAWN),
    )


def exact_camera():
    return tasks.camera(signal=FINE, accuracy=0.0, accuracy_fraction=0.0, noise=0.0)


@pytest.mark.parametrize("t_reference", [328.0, 275.0, 255.0])
@pytest.mark.parametrize(("tau", "rho"), [(0.72, 0.06), (0.95, 0.0), (0.4, 0.1), (0.55, 0.45)])
def test_a_warm_or_cold_reference_gives_the_transmittance_back(t_reference, tau, rho):
    task = window_task(window_reflectance=(rho, 0.0))
    frames = stored(t_reference), stored(through_window(t_reference, tau, rho))
    found = window_by_frames(task, *frames)
    # Two band tables, interpolated in steps of 0.05 and 0.1 K: below a millikelvin of 26 K and more.
    assert found.value == pytest.approx(tau, abs=1e-4)
    assert (found.name, found.source, found.u_source) == ("window_transmittance",) + ("measured in frame",) * 2
    assert found.low < found.value <= found.high == pytest.approx(1 - rho)


def test_a_window_of_the_temperature_of_all_it_mirrors_is_a_ratio_of_contrasts():
    """The exact limit: τ is the ratio of radiance contrasts then, whatever ρ."""
    seen = through_window(328.0, t_front=T_WINDOW)
    contrast = [forward.radiance(t) - forward.radiance(T_WINDOW) for t in (328.0, seen)]
    for rho in (0.0, 0.2):
        task = window_task(window_ambient=(T_WINDOW, 1.0), window_reflectance=(rho, 0.01))
        found = window_by_frames(task, stored(328.0), stored(seen))
        assert found.value == pytest.approx(contrast[1] / contrast[0], abs=1e-4)


def test_neither_emissivity_nor_air_nor_what_the_reference_mirrors_is_in_it():
    """The reference is seen through the same air both times: what it is does not matter, nor how well it is known."""
    t = forward.seen(330.0, 0.7, 290.0)
    frames = stored(t), stored(through_window(t))
    known = window_by_frames(window_task(), *frames)
    unknown = {
        "emissivity": (0.7, 0.2),
        "reflected": (290.0, 15.0),
        "relative_humidity": (0.5, 0.3),
        "distance": (2.0, 1.0),
        "atmosphere": (0.0, 0.9),
        "air": (293.15, 10.0),
    }
    assert window_by_frames(window_task(**unknown), *frames) == known
    assert known.value == pytest.approx(TAU, abs=1e-4)


def test_of_an_offset_common_to_both_frames_only_one_minus_tau_counts():
    """The camera is off by a kelvin, in both frames or in one; slopes of the radiance by the forward model."""
    t, off = 328.0, 1.0
    seen = through_window(t)
    task = window_task()

    def error(without, through):
        return window_by_frames(task, stored(t + without), stored(seen + through)).value - TAU

    contrast = forward.radiance(t) - forward.radiance(T_WINDOW)
    of_through = forward.slope(seen) / contrast * off
    of_without = -TAU * forward.slope(t) / contrast * off
    assert error(0, off) == pytest.approx(of_through, rel=0.05)  # a kelvin is no small step of 26 K
    assert error(off, 0) == pytest.approx(of_without, rel=0.05)
    assert error(off, off) == pytest.approx(of_through + of_without, abs=0.05 * of_through)
    assert abs(error(off, off)) < 0.35 * abs(error(0, off))


def test_u_has_the_common_offset_once_and_not_once_for_each_frame():
    """Everything else exact but the drift: u is (s(T₁) − τ s(T₀))/ΔL · 2 K/√3, and the drift of one frame."""
    t = 328.0
    exact = {"window_temperature": (T_WINDOW, 0.0), "window_ambient": (T_FRONT, 0.0), "window_reflectance": (RHO, 0.0)}
    camera = replace(exact_camera(), accuracy=2.0)
    frames = stored(t), stored(through_window(t))
    u = window_by_frames(window_task(camera, **exact), *frames).u
    contrast = forward.radiance(t) - forward.radiance(T_WINDOW)
    slopes = forward.slope(through_window(t)), TAU * forward.slope(t)
    offset = 2.0 / 3**0.5 * (slopes[0] - slopes[1]) / contrast
    drift = DRIFT_U * slopes[0] / contrast
    assert u == pytest.approx(np.hypot(offset, drift), rel=0.01)  # finite steps
    apart = 2.0 / 3**0.5 * np.hypot(*slopes) / contrast
    assert u < 0.4 * apart


def test_the_same_offset_cancels_altogether_where_nothing_is_lost():
    """τ → 1: what the camera errs without the window it errs through it."""
    frames = stored(328.0), stored(through_window(328.0, 0.999, 0.0))
    off, exact = (
        window_by_frames(window_task(camera, window_reflectance=(0.0, 0.0)), *frames).u
        for camera in (replace(exact_camera(), accuracy=2.0), exact_camera())
    )
    assert off == pytest.approx(exact, rel=0.01)


def test_what_varies_over_the_reference_cancels_pixel_by_pixel():
    gradient = np.linspace(315.0, 330.0, 34)[np.newaxis]
    without, through = stored(gradient), stored(through_window(gradient))
    assert window_by_frames(window_task(), without, through).value == pytest.approx(TAU, abs=1e-4)


def test_pixels_one_frame_lacks_are_left_out_of_both():
    gradient = np.linspace(315.0, 330.0, 34)[np.newaxis]
    without, through = stored(gradient), stored(through_window(gradient))
    missing = np.zeros(SHAPE, bool)
    missing[:, 30:] = True  # the warm end
    found = window_by_frames(window_task(), without, replace(through, missing=missing))
    assert found.value == pytest.approx(TAU, abs=1e-4)
    saturated = tasks.camera(signal=FINE, range=(253.15, 325.0))  # cuts the warm end of one frame only
    assert window_by_frames(window_task(saturated), without, through).value == pytest.approx(TAU, abs=1e-4)


def test_the_temperature_of_the_window_counts_by_its_emissivity():
    """∂τ/∂T_w = −ε_w s(T_w)/ΔL: by hand from the equation."""
    exact = {"window_ambient": (T_FRONT, 0.0), "window_reflectance": (RHO, 0.0)}
    frames = stored(328.0), stored(through_window(328.0))
    contrast = forward.radiance(328.0) - forward.radiance(T_WINDOW)
    drift = DRIFT_U * forward.slope(through_window(328.0)) / contrast
    u = window_by_frames(window_task(exact_camera(), window_temperature=(T_WINDOW, 2.0), **exact), *frames).u
    of_window = 2.0 * (1 - TAU - RHO) * forward.slope(T_WINDOW) / contrast
    assert u == pytest.approx(np.hypot(of_window, drift), rel=0.01)


def test_2_u_holds_the_true_transmittance_in_about_95_of_100_pairs():
    """Drawn: an offset of the camera for the pair, drift, noise, and all that is stated of the window off by its u.

    2 u of a sum led by one rectangular input (±2 K) holds more than a normal one: 95 to 98 %."""
    rng = np.random.default_rng(6)
    task, held, draws = window_task(), 0, 600
    for _ in range(draws):
        t_window, t_front = T_WINDOW + rng.normal(0, 0.6), T_FRONT + rng.normal(0, 1.0)
        rho, t = RHO + rng.normal(0, 0.01), rng.choice([rng.uniform(318, 330), rng.uniform(260, 280)])
        seen = through_window(t, TAU, rho, t_window, t_front)
        offset = rng.uniform(-2, 2)
        noise = rng.normal(0, 0.05, (2, 24, 34))
        without, through = t + offset + noise[0], seen + offset + rng.normal(0, DRIFT_U) + noise[1]
        found = window_by_frames(task, stored(without), stored(through))
        held += abs(found.value - TAU) <= 2 * found.u
    assert 0.93 < held / draws < 0.995


@pytest.mark.parametrize("apart", [0.0, 1.0, -2.0, 3.0])
def test_a_reference_near_the_temperature_of_the_window_is_refused(apart):
    t = T_WINDOW + apart
    with pytest.raises(FrameError, match="20 K or more") as refused:
        window_by_frames(window_task(), stored(t), stored(through_window(t)))
    assert refused.value.exit_code == 1
    (fault,) = refused.value.faults
    assert fault.where == "F01: window_from"
    assert "°C" in fault.got


def test_u_falls_with_the_contrast_and_what_is_accepted_is_known_to_a_tenth():
    u = []
    for apart in (6.0, 10.0, 20.0, 27.0):
        t = T_WINDOW + apart
        u.append(window_by_frames(window_task(), stored(t), stored(through_window(t))).u)
    assert u == sorted(u, reverse=True)
    assert max(u) <= MOST_U
    assert u[2] < 0.03


def test_frames_that_do_not_fit_each_other_are_refused():
    frames = stored(328.0), stored(through_window(328.0))
    other = tasks.camera(name="other", signal=FINE)
    with pytest.raises(FrameError, match="one camera"):
        window_by_frames(window_task(without_camera=other), *frames)
    small = Frame(frames[1].stored[:-4], sha256="0" * 64)
    with pytest.raises(FrameError, match="one size"):
        window_by_frames(window_task(), frames[0], small)
    range_below = window_task(tasks.camera(signal=FINE, range=(253.15, 310.0)))
    with pytest.raises(FrameError, match="can be read in both"):
        window_by_frames(range_below, *frames)
    with pytest.raises(FrameError, match="which frame is which"):
        window_by_frames(window_task(), *reversed(frames))
    with pytest.raises(FrameError, match="name them"):
        window_by_frames(replace(window_task(), window_frames=None), *frames)
    without_window = replace(window_task(), scene=tasks.scene())
    with pytest.raises(FrameError, match="temperature of its own"):
        window_by_frames(without_window, *frames)


def test_the_window_is_as_it_was_in_the_frame_taken_through_it():
    warmer = {"window_temperature": (308.0, 0.6), "window_ambient": (T_FRONT, 1.0), "window_reflectance": (RHO, 0.01)}
    task = window_task(through_scene=tasks.scene(**warmer))
    found = window_by_frames(task, stored(328.0), stored(through_window(328.0, t_window=308.0)))
    assert found.value == pytest.approx(TAU, abs=1e-4)


def test_a_window_as_warm_as_the_air_follows_it():
    scene = window_task().scene.with_(Quantity("window_temperature", T_WINDOW, 2.0, follows="air"))
    found = window_by_frames(replace(window_task(), scene=scene), stored(328.0), stored(through_window(328.0)))
    alone = window_by_frames(
        window_task(window_temperature=(T_WINDOW, 2.0)), stored(328.0), stored(through_window(328.0))
    )
    assert found.u > alone.u  # the air's own u moves it too


def test_a_transmittance_a_little_past_what_the_reflectance_leaves_is_brought_back():
    task = window_task(window_reflectance=(0.10, 0.01))
    found = window_by_frames(task, stored(328.0), stored(through_window(328.0, 0.91, 0.09)))
    assert found.value == pytest.approx(0.90)
    assert found.high == pytest.approx(0.90)
