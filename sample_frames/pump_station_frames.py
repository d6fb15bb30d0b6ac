"""The switch room of Saltmarsh pumping station, invented: the first eight frames of a round, load currents noted."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from camera_model import Air, Camera, Window
from painting import Corners, Defect, Field, Mask, Part, Subject, box, grid, inside, unevenness, wall
from scipy.ndimage import gaussian_filter
from shot import Shot

THRESHOLD_K = 2.0  # a deviation counts as defect from here on
PANEL_C, REFLECTED_C = 24.0, 22.0
PAINTED, LUG, BARE = 0.92, 0.90, 0.10

HANDHELD = Camera("handheld", (8.0, 14.0), (240, 320), 1.3, 0.04, 0.6, (-20.0, 120.0), "K", 0.04, "uint16")
VETERAN = Camera("veteran", (8.0, 14.0), (120, 160), 2.6, 0.05, 0.7, (-20.0, 250.0), "C", 1.0, "float32")
CLOSE = Air(20, 70, 1.0)
STEP_BACK = Air(20, 70, 1.5)
PHASE_X = (80, 160, 240)
BARE_BOLTED = (90.0, 50.0)  # IEC 60694, bolted connection of bare copper or aluminium in air: highest °C, rise in K
TINNED_BOLTED = (105.0, 65.0)  # the same, tinned
PALM = {"cylinder": {"diameter_m": 0.031, "length_m": 0.062}}  # what the palm of a lug is taken for


def back_plate(name: str, shape: tuple[int, int] = HANDHELD.shape) -> Field:
    """The painted plate behind the parts, slightly warmer at the top."""
    return wall(name, shape, PANEL_C, rise_k=0.5)


def lug_corners(x: int) -> Corners:
    """The palm of a cable lug, 31 × 62 mm at 1 m."""
    return box(x - 12, 84, x + 11, 131)


def lug_and_cable(x: int, lug_c: float, cable_c: float) -> tuple[Mask, Field]:
    """Where a lug and its cable are, and their temperatures: hottest at the bolt, fading down the cable."""
    columns, rows = grid(HANDHELD.shape)
    across = columns - x + 0.5
    palm = inside(lug_corners(x), HANDHELD.shape)
    barrel_and_cable = (rows > 131) & (np.abs(across) <= np.where(rows < 152, 10, 8))
    from_bolt = np.hypot(across, rows - 102)
    lost = 0.03 * (lug_c - PANEL_C)
    on_palm = lug_c - lost * (from_bolt / 20) ** 2 + 0.5 * lost * (from_bolt < 7)
    on_cable = cable_c + (lug_c - 2.1 * lost - cable_c) * np.exp(-np.clip(rows - 131, 0, None) / 45)
    on_cable = on_cable - 0.02 * (cable_c - PANEL_C) * (across / 9) ** 2  # a round cable cools at its sides
    return palm | barrel_and_cable, np.where(palm, on_palm, on_cable)


def terminal_block() -> Field:
    """A moulded block with barriers between the phases: what it adds to the temperature of the plate."""
    columns, _ = grid(HANDHELD.shape)
    barriers = np.abs((columns - 40) % 80 - 0.5) < 3
    return np.where(inside(box(40, 40, 281, 83), HANDHELD.shape), np.where(barriers, 0.7, 1.2), 0.0)


def feeder(name: str, lugs_c: tuple[float, ...], cables_c: tuple[float, ...]) -> Field:
    """A three-phase feeder: terminal block, three lugs, three cables, each warming the plate around it a little."""
    field = back_plate(name) + terminal_block()
    for x, lug_c, cable_c in zip(PHASE_X, lugs_c, cables_c, strict=True):
        where, temperature = lug_and_cable(x, lug_c, cable_c)
        near = gaussian_filter(where.astype(float), 7)
        field = np.where(where, temperature, field + np.minimum(0.05 * (lug_c - PANEL_C), 1.0) * near)
    return field + unevenness(f"{name} parts", HANDHELD.shape, 0.04, grain_px=5.0)


def lug_parts(group: str, loads: tuple[float, ...], rated: float, **more: Any) -> tuple[Part, ...]:
    """The three lugs as components."""
    return tuple(
        Part(f"phase {k} lug", lug_corners(x), LUG, group, load, rated, **more)
        for k, (x, load) in enumerate(zip(PHASE_X, loads, strict=True), start=1)
    )


def three_lugs(name: str, sound: tuple[tuple[float, ...], tuple[float, ...]], parts: tuple[Part, ...]) -> Subject:
    """A feeder with nothing wrong."""
    return Subject(feeder(name, *sound), PAINTED, REFLECTED_C, parts=parts)


def with_defect(subject: Subject, found: Field, kind: str, against: str) -> Subject:
    """The same subject at the temperatures that were found."""
    defect = Defect(kind, found - subject.sound_c, THRESHOLD_K, against)
    return Subject(subject.sound_c, subject.emissivity, subject.reflected_c, (defect,), subject.patches, subject.parts)


def incomer() -> Shot:
    """Incoming cables at half load, all three alike."""
    parts = lug_parts("incoming lugs", (208, 205, 211), 400, limit=TINNED_BOLTED, joint=PALM)
    subject = three_lugs("incomer", ((38.4, 38.0, 38.7), (34.0, 33.8, 34.2)), parts)
    return Shot("incomer", "incomer.tif", HANDHELD, CLOSE, subject, ambient_c=PANEL_C, sound=True)


def pump_one() -> Shot:
    """One bad lug: phase 2 is 20 K above its twins, and heats its cable."""
    parts = lug_parts("pump 1 lugs", (165, 164, 166), 250, limit=BARE_BOLTED, joint=PALM)
    subject = three_lugs("pump-one", ((41.3, 41.5, 41.9), (36.4, 36.5, 36.8)), parts)
    found = feeder("pump-one", (41.3, 61.8, 41.9), (36.4, 36.5, 36.8))
    subject = with_defect(subject, found, "bad joint", "its twins")
    return Shot("pump-one", "pump-one.tif", HANDHELD, CLOSE, subject, ambient_c=PANEL_C, sound=False)


def pump_two() -> Shot:
    """All three hot and alike, at 118 % of rated current: an overload, not a joint."""
    parts = lug_parts("pump 2 lugs", (236, 235, 237), 200, limit=BARE_BOLTED)
    subject = three_lugs("pump-two", ((40.0, 39.6, 40.3), (36.0, 35.8, 36.2)), parts)
    found = feeder("pump-two", (60.2, 59.7, 60.6), (53.0, 52.6, 53.3))
    subject = with_defect(subject, found, "overload", "the same feeder at 70 % load")
    return Shot("pump-two", "pump-two.tif", HANDHELD, CLOSE, subject, ambient_c=PANEL_C, sound=False)


def drain_pump() -> Shot:
    """At 18 % load one lug is 2.7 K above its twins: little to see, and nothing that may be cleared."""
    parts = lug_parts("drain pump lugs", (18, 18, 18), 100)
    subject = three_lugs("drain-pump", ((26.5, 26.5, 26.4), (25.6, 25.6, 25.5)), parts)
    found = feeder("drain-pump", (26.5, 29.2, 26.4), (25.6, 25.7, 25.5))
    subject = with_defect(subject, found, "bad joint", "its twins")
    return Shot("drain-pump", "drain-pump.tif", HANDHELD, CLOSE, subject, ambient_c=PANEL_C, sound=False)


def transformer() -> Shot:
    """Transformer terminals behind an infrared window; phase 3 is 8 K above its twins."""
    parts = lug_parts("transformer lugs", (310, 308, 312), 450)
    subject = three_lugs("transformer", ((44.3, 44.0, 44.2), (39.0, 38.8, 38.9)), parts)
    found = feeder("transformer", (44.3, 44.0, 52.1), (39.0, 38.8, 39.1))
    subject = with_defect(subject, found, "bad joint", "its twins")
    window = Window(transmittance=0.75, reflectance=0.05, temperature_c=23.0, ambient_c=21.0)
    return Shot(
        "transformer", "transformer.tif", HANDHELD, CLOSE, subject, sound=False, window=window, ambient_c=PANEL_C
    )


def soft_starter() -> Shot:
    """A fuse clip that is on nobody's list is hotter than the camera's range reaches."""
    x, y = grid(HANDHELD.shape)
    field = back_plate("soft-starter")
    field = np.where(inside(box(30, 96, 250, 190), HANDHELD.shape), field + 1.3, field)
    middles = (66, 140, 214)
    parts = tuple(
        Part(f"phase {k} contact", box(at - 14, 118, at + 13, 167), LUG, "starter contacts", load, 250)
        for k, (at, load) in enumerate(zip(middles, (190, 189, 191), strict=True), 1)
    )
    for part, at, contact_c in zip(parts, middles, (47.4, 47.9, 47.1), strict=True):
        from_screw = np.hypot(x - at + 0.5, y - 136)
        field = np.where(inside(part.corners, HANDHELD.shape), contact_c - 0.0012 * from_screw**2, field)
    from_edge = np.hypot(np.clip(np.abs(x - 286) - 10, 0, None), np.clip(np.abs(y - 68) - 16, 0, None))
    on_clip = 138.0 - 0.02 * ((x - 286) ** 2 + (y - 68) ** 2)
    rise = np.where(from_edge == 0, on_clip, 9.0 * np.exp(-from_edge / 7.0))
    subject = Subject(field, PAINTED, REFLECTED_C, (Defect("hot clip", rise, THRESHOLD_K, "the plate"),), parts=parts)
    return Shot("soft-starter", "soft-starter.tif", HANDHELD, CLOSE, subject, ambient_c=PANEL_C, sound=False)


def busbars() -> Shot:
    """Three bare bars; the middle one is at 80 °C and hardly shows, for it mirrors the room."""
    _, y = grid(HANDHELD.shape)
    field = back_plate("busbars")
    for support in (box(50, 22, 270, 43), box(50, 196, 270, 217)):
        field = np.where(inside(support, HANDHELD.shape), field + 1.2, field)
    bars = tuple(
        Part(f"bar {k}", box(x - 13, 44, x + 12, 195), BARE, "bars", 420, 630)
        for k, x in enumerate((84, 160, 236), start=1)
    )
    found = field
    joint = np.exp(-np.abs(y - 110) / 90)
    for bar, sound_c, found_c in zip(bars, (46.8, 46.5, 46.2), (46.8, 80.0, 46.2), strict=True):
        where = inside(bar.corners, HANDHELD.shape)
        field = np.where(where, sound_c, field)
        found = np.where(where, sound_c + (found_c - sound_c) * joint, found)
    subject = with_defect(Subject(field, PAINTED, REFLECTED_C, parts=bars), found, "bad joint", "its twins")
    return Shot("busbars", "busbars.tif", HANDHELD, CLOSE, subject, ambient_c=PANEL_C, sound=False)


def control_panel() -> Shot:
    """The closed door of the control panel, evenly warm, with a row of louvres; an older camera."""
    x, y = grid(VETERAN.shape)
    warm = 0.4 * np.exp(-(((x - 95) / 40) ** 2 + ((y - 45) / 30) ** 2) / 2)
    louvres = 0.3 * ((y % 6 < 2) & inside(box(58, 12, 102, 28), VETERAN.shape))
    subject = Subject(back_plate("control-panel", VETERAN.shape) + warm + louvres, PAINTED, REFLECTED_C)
    return Shot("control-panel", "control-panel.npy", VETERAN, STEP_BACK, subject, sound=True, shading_k=0.35)


SHOTS: tuple[Callable[[], Shot], ...] = (
    incomer,
    pump_one,
    pump_two,
    drain_pump,
    transformer,
    soft_starter,
    busbars,
    control_panel,
)
