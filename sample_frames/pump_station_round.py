"""The rest of the round at Saltmarsh pumping station, invented: a small camera indoors, the yard, the roof."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
from camera_model import Air, Camera, Window
from painting import Corners, Defect, Field, Part, Subject, box, grid, inside, soft, unevenness, wall
from pump_station_frames import CLOSE, HANDHELD, LUG, PAINTED, PANEL_C, REFLECTED_C, THRESHOLD_K
from scipy.ndimage import gaussian_filter
from shot import Shot

COMPACT = Camera("compact", (8.0, 14.0), (120, 160), 2.6, 0.05, 0.6, (-20.0, 150.0), "K", 0.04, "uint16")
SHAPE = COMPACT.shape
YARD_AIR, ROOF_AIR = Air(0, 70, 2.0), Air(0, 70, 13.0)
WINDOW = Window(transmittance=0.75, reflectance=0.05, temperature_c=23.0, ambient_c=21.0)
BARE_BOLTED = (90.0, 50.0)  # IEC 60694, bolted connection of bare copper or aluminium in air
WEATHERED, GLASS = 0.85, 0.88
CELL_PX, CELLS = 9, (6, 10)  # of a PV module: pixels a cell is wide, columns and rows
MODULE_GAP_PX = 5


def parts_in_a_row(
    name: str, base: Field, corners: list[Corners], parts_c: list[float], cables: list[tuple[Corners, float]]
) -> Field:
    """Flat-topped parts on a base they warm a little, with their cables."""
    field = base
    for where, at_c in cables + list(zip(corners, parts_c, strict=True)):
        mask = inside(where, base.shape)
        near = gaussian_filter(mask.astype(float), 4)
        field = np.where(mask, at_c, field + min(0.04 * (at_c - float(np.median(base))), 0.8) * near)
    return field + unevenness(f"{name} parts", base.shape, 0.03, grain_px=4.0)


def small_lug(x: int) -> Corners:
    """The palm of a cable lug, 31 × 62 mm at 1 m with the small camera."""
    return box(x - 6, 40, x + 5, 63)


def three_lugs(name: str, lugs_c: tuple[float, ...]) -> Field:
    """Three lugs with their cables in front of a painted plate."""
    xs = (40, 80, 120)
    cables = [(box(x - 4, 64, x + 3, 119), PANEL_C + 0.7 * (at - PANEL_C)) for x, at in zip(xs, lugs_c, strict=True)]
    base = wall(name, SHAPE, PANEL_C, rise_k=0.4)
    return parts_in_a_row(name, base, [small_lug(x) for x in xs], list(lugs_c), cables)


def lug_parts(group: str, loads: tuple[float, ...], rated: float, **more: Any) -> tuple[Part, ...]:
    """The three lugs as components."""
    return tuple(
        Part(f"phase {k} lug", small_lug(x), LUG, group, load, rated, **more)
        for k, (x, load) in enumerate(zip((40, 80, 120), loads, strict=True), start=1)
    )


def subject(sound: Field, found: Field, kind: str, parts: tuple[Part, ...], **optics: float) -> Subject:
    """What was found, and by how much it departs from what a sound one would show."""
    shown = {"emissivity": PAINTED, "reflected_c": REFLECTED_C} | optics
    threshold = shown.pop("threshold_k", THRESHOLD_K)
    return Subject(sound, defects=(Defect(kind, found - sound, threshold, "its twins"),), parts=parts, **shown)


def window_plate() -> Shot:
    """A painted plate at 58 °C that fills the view."""
    plate = wall("window plate", SHAPE, 58.0, rise_k=0.2)
    seen = Subject(plate, PAINTED, REFLECTED_C)
    return Shot("window-plate", "window-plate.tif", COMPACT, CLOSE, seen, sound=True)


def window_plate_through() -> Shot:
    """The same plate a minute later, through the infrared window."""
    return replace(window_plate(), id="window-plate-through", file="window-plate-through.tif", window=WINDOW)


def bus_coupler() -> Shot:
    """Lugs of the bus coupler through that window; phase 1 is 12 K above its twins."""
    sound, found = (three_lugs("bus-coupler", (phase_1, 44.1, 44.4)) for phase_1 in (44.2, 56.3))
    parts = lug_parts("bus coupler lugs", (300, 296, 304), 400, joint={"area_m2": 0.006})
    seen = subject(sound, found, "bad joint", parts)
    return Shot("bus-coupler", "bus-coupler.tif", COMPACT, CLOSE, seen, sound=False, window=WINDOW, ambient_c=PANEL_C)


def heating() -> Shot:
    """A heating feeder, one phase of which carries less: rises of 14.0, 13.4 and 6.0 K that load alone explains."""
    seen = Subject(
        three_lugs("heating", (38.0, 37.4, 30.0)),
        PAINTED,
        REFLECTED_C,
        parts=lug_parts("heating lugs", (80, 78, 50), 100),
    )
    return Shot("heating", "heating.tif", COMPACT, CLOSE, seen, sound=True, ambient_c=PANEL_C)


def terminals() -> Shot:
    """Control terminals four pixels wide, narrower than the camera's spot of five; one is 4 K above the other."""
    corners = [box(60, 52, 63, 60), box(96, 52, 99, 60)]
    base = wall("terminals", SHAPE, PANEL_C, rise_k=0.4)
    base = np.where(inside(box(20, 44, 140, 70), SHAPE), base + 4.0, base)
    sound, found = (parts_in_a_row("terminals", base, corners, [at, 32.6], []) for at in (32.6, 36.6))
    parts = tuple(
        Part(f"terminal {k}", where, LUG, "terminals", 4.0, 6.0) for k, where in zip((12, 18), corners, strict=True)
    )
    seen = subject(sound, found, "bad joint", parts)
    return Shot("terminals", "terminals.tif", COMPACT, CLOSE, seen, sound=False, ambient_c=PANEL_C)


def fuses() -> Shot:
    """Three fuses that nobody drew; the third is 8.6 K above the others."""
    corners = [box(x - 7, 36, x + 7, 79) for x in (40, 80, 120)]
    base = wall("fuses", SHAPE, PANEL_C, rise_k=0.4)
    sound, found = (parts_in_a_row("fuses", base, corners, [40.5, 40.2, at], []) for at in (40.3, 48.9))
    parts = tuple(
        Part(f"fuse {k}", where, PAINTED, "fuses", is_drawn=False) for k, where in enumerate(corners, start=1)
    )
    seen = subject(sound, found, "bad joint", parts)
    return Shot("fuses", "fuses.tif", COMPACT, CLOSE, seen, sound=False, ambient_c=PANEL_C)


def breakers(name: str, numbers: tuple[int, ...], parts_c: list[float], sound_c: list[float]) -> Shot:
    """Four of eight breakers of one size under one load."""
    corners = [box(x - 7, 46, x + 7, 65) for x in (25, 61, 97, 133)]
    base = wall(name, SHAPE, PANEL_C, rise_k=0.4)
    sound, found = (parts_in_a_row(name, base, corners, at, []) for at in (sound_c, parts_c))
    parts = tuple(
        Part(f"breaker {k}", where, LUG, "motor breakers", 40.0, 63.0)
        for k, where in zip(numbers, corners, strict=True)
    )
    is_sound = parts_c == sound_c
    seen = Subject(sound, PAINTED, REFLECTED_C, parts=parts)
    seen = seen if is_sound else subject(sound, found, "bad joint", parts)
    return Shot(name, f"{name}.tif", COMPACT, CLOSE, seen, sound=is_sound, ambient_c=PANEL_C)


def breakers_left() -> Shot:
    """Breakers 1 to 4, all alike."""
    parts_c = [32.8, 33.2, 33.0, 32.6]
    return breakers("breakers-left", (1, 2, 3, 4), parts_c, parts_c)


def breakers_right() -> Shot:
    """Breakers 5 to 8; the seventh stands out from all eight."""
    return breakers("breakers-right", (5, 6, 7, 8), [33.1, 32.9, 39.6, 33.2], [33.1, 32.9, 33.0, 33.2])


def yard_isolator() -> Shot:
    """Clamps of an isolator outdoors; in 4 m/s of wind the middle one is 10 K above its twins, in calm it were 19."""
    xs = (32, 80, 128)
    corners = [box(x - 7, 48, x + 6, 63) for x in xs]
    cables = [(box(x - 2, 8, x + 1, 111), 4.0) for x in xs]
    base = wall("yard-isolator", SHAPE, 0.8, rise_k=0.4)
    sound, found = (parts_in_a_row("yard-isolator", base, corners, [7.0, at, 7.2], cables) for at in (7.1, 17.1))
    joint = {"cylinder": {"diameter_m": 0.073, "length_m": 0.083}}
    parts = tuple(
        Part(f"phase {k} clamp", where, WEATHERED, "isolator clamps", load, 300.0, joint, BARE_BOLTED)
        for k, (where, load) in enumerate(zip(corners, (180.0, 182.0, 179.0), strict=True), start=1)
    )
    seen = subject(sound, found, "bad joint", parts, emissivity=PAINTED, reflected_c=-8.0)
    return Shot(
        "yard-isolator", "yard-isolator.tif", COMPACT, YARD_AIR, seen, sound=False,
        ambient_c=0.0, mean_radiant_c=-6.0, wind_m_s=4.0,
    )  # fmt: skip


def arresters() -> Shot:
    """Surge arresters, which carry voltage and next to no current; the middle one is 1.5 K above its twins."""
    corners = [box(x - 6, 24, x + 6, 95) for x in (40, 80, 120)]
    base = wall("arresters", SHAPE, 20.3, rise_k=0.2)
    sound, found = (parts_in_a_row("arresters", base, corners, [21.2, at, 21.3], []) for at in (21.2, 22.7))
    parts = tuple(Part(f"arrester {k}", where, PAINTED, "arresters") for k, where in enumerate(corners, start=1))
    seen = subject(sound, found, "leakage", parts, threshold_k=0.75, reflected_c=20.0)
    return Shot(
        "arresters", "arresters.tif", COMPACT, CLOSE, seen, sound=False, method="voltage-driven", ambient_c=20.0,
        mean_radiant_c=20.0,
    )  # fmt: skip


def module(k: int) -> tuple[int, int]:
    """Left and top of the k-th of ten PV modules, two rows of five."""
    across, down = CELLS[0] * CELL_PX, CELLS[1] * CELL_PX
    return 16 + (k % 5) * (across + MODULE_GAP_PX), 16 + (k // 5) * (down + MODULE_GAP_PX)


def module_area(k: int, columns: tuple[int, int] = (0, 6), rows: tuple[int, int] = (0, 10)) -> Corners:
    """Cells of a module, from a column and a row on, up to others that are not in it."""
    left, top = module(k)
    (x0, x1), (y0, y1) = ((CELL_PX * one, CELL_PX * other - 1) for one, other in (columns, rows))
    return box(left + x0, top + y0, left + x1, top + y1)


def pv_row() -> Shot:
    """Ten PV modules in the sun: one has a hot cell, one a bypassed third, one is open; seven are healthy."""
    shape = HANDHELD.shape
    x, y = grid(shape)
    field = wall("pv-row", shape, 14.0, rise_k=0.6)
    uneven = 25.0 + unevenness("pv-row modules", shape, 0.15, grain_px=14.0)
    patterns = {2: "hot cell", 5: "substring", 8: "whole module"}
    for k in range(10):
        left, top = module(k)
        between = ((x - left) % CELL_PX < 1) | ((y - top) % CELL_PX < 1)  # bright ribbons, a little cooler
        field = np.where(inside(module_area(k), shape), uneven + 0.2 * np.sin(1.7 * k) - 0.15 * between, field)
    cell = module_area(2, (3, 4), (6, 7))
    faults: dict[str, Field] = {
        "hot cell": 14.0 * soft(cell, shape, 1.0) * inside(module_area(2), shape),
        "substring": 5.0 * inside(module_area(5, columns=(2, 4)), shape),
        "whole module": 4.5 * inside(module_area(8), shape),
    }
    defects = tuple(Defect(kind, delta, THRESHOLD_K, "its neighbours") for kind, delta in faults.items())
    parts = tuple(Part(f"module {k + 1}", module_area(k), GLASS, "row A", pattern=patterns.get(k)) for k in range(10))
    seen = Subject(field, GLASS, -35.0, defects, parts=parts)
    return Shot(
        "pv-row", "pv-row.tif", HANDHELD, ROOF_AIR, seen, sound=False, method="pv",
        ambient_c=0.0, mean_radiant_c=-15.0, wind_m_s=1.0, irradiance_w_m2=850.0,
    )  # fmt: skip


SHOTS: tuple[Callable[[], Shot], ...] = (
    window_plate,
    window_plate_through,
    bus_coupler,
    heating,
    terminals,
    fuses,
    breakers_left,
    breakers_right,
    yard_isolator,
    arresters,
    pv_row,
)
