"""Quarry Cottage, an invented house on a clear, cold morning: sixteen frames from inside and outside.

Wall temperatures are those of a steady one-dimensional heat balance, so that heat flows and U-values can be
recovered from the frames; the films are those of ISO 6946.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from camera_model import Air, Camera
from painting import (
    Corners,
    Defect,
    Field,
    Patch,
    Subject,
    bell,
    box,
    grid,
    inside,
    plume,
    soft,
    studs,
    unevenness,
    wall,
)
from scipy.ndimage import gaussian_filter
from shot import Shot

INDOOR_C, OUTDOOR_C, SURROUNDINGS_OUTSIDE_C = 20.0, 0.0, -7.0  # mean radiant outside: half sky, half cold ground
U_SOUND, U_MISSING = 0.35, 1.7  # [W m⁻² K⁻¹]
THRESHOLD_K = 1.0  # a deviation counts as defect from here on

WIDE = Camera("wide", (7.5, 13.0), (240, 320), 2.4, 0.05, 0.6, (-20.0, 120.0), "K", 0.04, "uint16")
POCKET = Camera("pocket", (7.5, 13.0), (120, 160), 4.8, 0.05, 0.5, (-20.0, 120.0), "C", 1.0, "float64")
TELE = Camera("tele", (8.0, 14.0), (240, 320), 1.3, 0.05, 0.65, (-40.0, 120.0), "K", 0.01, "uint16")
ROOM = Air(20, 50, 2.5)
GARDEN = Air(0, 70, 8.0)
PLASTER, BRICK = 0.93, 0.92
ROOM_REFLECTED_C, LIVING_REFLECTED_C, GARDEN_REFLECTED_C = 19.5, 19.8, -12.0


def inside_c(u_value: float) -> float:
    """Inside surface temperature of a wall in steady state, film resistance 0.13 m² K W⁻¹ (ISO 6946)."""
    return INDOOR_C - 0.13 * u_value * (INDOOR_C - OUTDOOR_C)


def outside_c(u_value: float) -> float:
    """Outside surface temperature: conduction in equals convection (4 + 4v at 1 m/s) and radiation (4.0) out."""
    conductance = 1 / (1 / u_value - 0.04)
    film, radiative = 8.0, 4.0
    gains = conductance * INDOOR_C + film * OUTDOOR_C + radiative * SURROUNDINGS_OUTSIDE_C
    return gains / (conductance + film + radiative)


def room_wall(name: str, stud_positions: list[int], rise_k: float = 0.3) -> Field:
    """A plastered timber-frame wall with faint studs, seen by the wide camera."""
    return wall(name, WIDE.shape, inside_c(U_SOUND), rise_k) + studs(WIDE.shape, stud_positions, -0.2)


def brick_wall(name: str, rise_k: float = 0.3) -> Field:
    """A brick wall with faint mortar joints (0.25 m × 0.075 m bricks at 10.4 mm a pixel)."""
    x, y = grid(TELE.shape)
    course = np.floor(y / 7.2)
    upright = np.abs((x + 12 * (course % 2)) % 24 - 0.5) < 0.6
    joints = 0.18 * (upright | (y % 7.2 < 1))
    bricks = unevenness(f"{name} bricks", TELE.shape, 0.06, grain_px=4.0)
    return wall(name, TELE.shape, outside_c(U_SOUND), rise_k) + gaussian_filter(joints, 0.7) + bricks


def missing(name: str, corners: Corners, shape: tuple[int, int], delta_k: float, edge_px: float = 1.2) -> Defect:
    """Insulation left out: a plateau with sharp edges, uneven by a few per cent because air turns over in the void."""
    _, y = grid(shape)
    tops = [corner_y for _, corner_y in corners]
    turning = 0.06 * (y - (min(tops) + max(tops)) / 2) / (max(tops) - min(tops))
    uneven = 1 + turning + unevenness(f"{name} void", shape, 0.02, grain_px=9.0)
    return Defect("plateau", delta_k * uneven * soft(corners, shape, edge_px), THRESHOLD_K)


def foil_reflections(name: str, area: Corners, shape: tuple[int, int], middle_c: float, spread_k: float) -> Field:
    """Reflected temperatures where crumpled foil looks everywhere at once; the mean over the foil is `middle_c`."""
    glints = unevenness(name, shape, spread_k, grain_px=1.5)
    foil = inside(area, shape)
    return middle_c + np.where(foil, glints - glints[foil].mean(), 0.0)


def living_foil() -> Shot:
    """Crumpled foil hung on the sound east wall: gives the reflected temperature of the living room."""
    sheet = box(108, 66, 212, 168)
    subject = Subject(
        room_wall("living-foil", [30, 116, 202, 288]),
        PLASTER,
        foil_reflections("living-foil glints", sheet, WIDE.shape, LIVING_REFLECTED_C, 0.5),
        patches=(Patch("crumpled foil", sheet, 0.03, "reflector"),),
    )
    return Shot("living-foil", "living-foil.tif", WIDE, ROOM, subject, sound=True)


def living_north() -> Shot:
    """One bay between two studs was never filled: a cold rectangle with sharp edges."""
    bay = missing("living-north", box(121, 58, 203, 186), WIDE.shape, inside_c(U_MISSING) - inside_c(U_SOUND))
    subject = Subject(room_wall("living-north", [32, 118, 206, 292]), PLASTER, LIVING_REFLECTED_C, (bay,))
    return Shot("living-north", "living-north.tif", WIDE, ROOM, subject, sound=False)


def living_window() -> Shot:
    """Cold air leaks in under the sill of a window and falls down the wall."""
    x, y = grid(WIDE.shape)
    opening = box(178, 22, 300, 128)
    reveal = np.maximum(np.maximum(178 - x, x - 300), np.maximum(22 - y, y - 128))
    sound = room_wall("living-window", [40, 126]) - 0.4 * np.exp(-np.clip(reveal, 0, None) / 6)
    panes = inside(box(186, 30, 235, 120), WIDE.shape) | inside(box(243, 30, 292, 120), WIDE.shape)
    glass = np.where(panes, 13.4 + 1.2 * (1 - y / 128), 15.8)
    sound = np.where(inside(opening, WIDE.shape), glass, sound)
    leak = Defect("plume", -5.5 * plume("living-window leak", WIDE.shape, (212, 262, 130), 42.0), THRESHOLD_K)
    window = Patch("window", opening, 0.88, "ignore")
    subject = Subject(sound, PLASTER, LIVING_REFLECTED_C, (leak,), (window,))
    return Shot("living-window", "living-window.tif", WIDE, ROOM, subject, sound=False)


def living_corner() -> Shot:
    """The outer corner of the room, colder towards the floor: a geometric thermal bridge."""
    x, y = grid(POCKET.shape)
    sound = wall("living-corner", POCKET.shape, inside_c(U_SOUND), 0.3) + 0.15 * (x > 80)
    corner = Defect("bridge", -(2.4 + 1.0 * y / 119) * np.exp(-np.abs(x - 80) / 9.0), THRESHOLD_K)
    subject = Subject(sound, PLASTER, LIVING_REFLECTED_C, (corner,))
    return Shot("living-corner", "living-corner.csv", POCKET, ROOM, subject, sound=False)


def stairs_slab() -> Shot:
    """The edge of the first-floor slab runs through the stairwell wall uninsulated: a cold line across the frame."""
    x, y = grid(WIDE.shape)
    sound = wall("stairs-slab", WIDE.shape, inside_c(U_SOUND), 0.4)
    offset = y - (92 + 0.02 * x)
    slab = Defect("bridge", -3.2 * bell(offset, 13.0, 30.0), THRESHOLD_K)
    return Shot("stairs-slab", "stairs-slab.tif", WIDE, ROOM, Subject(sound, PLASTER, ROOM_REFLECTED_C, (slab,)), False)


def kitchen_bays() -> Shot:
    """Two unfilled bays, one low and one high, that touch along a short piece of their common stud."""
    low = missing("kitchen low", box(74, 122, 158, 212), WIDE.shape, -2.6)
    high = missing("kitchen high", box(161, 34, 245, 136), WIDE.shape, -3.6)
    subject = Subject(room_wall("kitchen-bays", [72, 160, 247]), PLASTER, ROOM_REFLECTED_C, (high, low))
    return Shot("kitchen-bays", "kitchen-bays.tif", WIDE, ROOM, subject, sound=False)


def bedroom_east() -> Shot:
    """A sound wall with a picture on it, through a lens that darkens the corners."""
    hung = 0.25 * soft(box(196, 60, 262, 118), WIDE.shape, 1.0)
    subject = Subject(room_wall("bedroom-east", [26, 112, 198, 284]) + hung, PLASTER, ROOM_REFLECTED_C)
    return Shot("bedroom-east", "bedroom-east.tif", WIDE, ROOM, subject, sound=True, shading_k=0.45)


def bedroom_west() -> Shot:
    """A sound wall in a room whose air is layered: 2.6 K from bottom to top, and nothing wrong with it."""
    _, y = grid(WIDE.shape)
    bow = 0.15 * np.sin(np.pi * y / 239)
    subject = Subject(room_wall("bedroom-west", [50, 136, 222, 308], rise_k=2.6) + bow, PLASTER, ROOM_REFLECTED_C)
    return Shot("bedroom-west", "bedroom-west.png", WIDE, ROOM, subject, sound=True, shading_k=0.35)


def bedroom_gable() -> Shot:
    """The same layering, and insulation slipped out of one bay."""
    bay = missing("bedroom-gable", [(48, 96), (128, 128), (128, 205), (48, 205)], WIDE.shape, -2.5, edge_px=1.5)
    subject = Subject(room_wall("bedroom-gable", [45, 131, 217, 303], rise_k=2.4), PLASTER, ROOM_REFLECTED_C, (bay,))
    return Shot("bedroom-gable", "bedroom-gable.tif", WIDE, ROOM, subject, sound=False)


def bedroom_lamp() -> Shot:
    """A sound wall behind a lit floor lamp, which the survey leaves out of account."""
    x, y = grid(WIDE.shape)
    shade_corners = [(204, 92), (240, 92), (254, 136), (190, 136)]
    sound = room_wall("bedroom-lamp", [36, 122, 294])
    sound = sound + 0.35 * np.exp(-(((x - 222) / 26) ** 2) / 2 - np.abs(y - 80) / 50)  # warm air above it
    shade = inside(shade_corners, WIDE.shape)
    glow = 31.0 + 12.0 * np.exp(-(((x - 222) / 12) ** 2 + ((y - 110) / 14) ** 2) / 2)
    pole = (np.abs(x - 222) <= 2) & (y > 136)
    sound = np.where(shade, glow, np.where(pole, 20.6, sound))
    lamp = Patch(
        "floor lamp", [(200, 86), (244, 86), (260, 140), (260, 239), (184, 239), (184, 140)], PLASTER, "ignore"
    )
    subject = Subject(sound, PLASTER, ROOM_REFLECTED_C, patches=(lamp,))
    return Shot("bedroom-lamp", "bedroom-lamp.tif", WIDE, ROOM, subject, sound=True)


def study_panel() -> Shot:
    """The camera read 1 K too high here; a matt panel of known temperature on the wall tells."""
    panel = box(34, 146, 86, 206)
    sound = np.where(inside(panel, WIDE.shape), 19.6, room_wall("study-panel", [22, 108, 194, 280]))
    bay = missing("study-panel", box(197, 70, 277, 170), WIDE.shape, inside_c(1.4) - inside_c(U_SOUND))
    patch = Patch("matt panel", panel, 0.95, "known-temperature")
    subject = Subject(sound, PLASTER, ROOM_REFLECTED_C, (bay,), (patch,))
    return Shot("study-panel", "study-panel.tif", WIDE, ROOM, subject, sound=False, offset_k=1.0)


def north_foil() -> Shot:
    """Crumpled foil in front of the north wall mirrors a clear sky, roofs and ground."""
    sheet = box(96, 84, 176, 160)
    sound = np.where(inside(sheet, TELE.shape), -3.0, brick_wall("north-foil"))
    reflected = foil_reflections("north-foil glints", sheet, TELE.shape, GARDEN_REFLECTED_C, 1.2)
    subject = Subject(sound, BRICK, reflected, patches=(Patch("crumpled foil", sheet, 0.03, "reflector"),))
    return Shot("north-foil", "north-foil.tif", TELE, GARDEN, subject, sound=True)


def north_wall() -> Shot:
    """Sound brickwork; the lens darkens the corners."""
    subject = Subject(brick_wall("north-wall", rise_k=0.4), BRICK, GARDEN_REFLECTED_C)
    return Shot("north-wall", "north-wall.tif", TELE, GARDEN, subject, sound=True, shading_k=0.4)


def north_cavity() -> Shot:
    """Part of the cavity was never filled: a warm patch from outside."""
    unfilled = missing(
        "north-cavity",
        [(122, 66), (232, 66), (220, 170), (134, 154)],
        TELE.shape,
        outside_c(U_MISSING) - outside_c(U_SOUND),
        edge_px=1.5,
    )
    subject = Subject(brick_wall("north-cavity"), BRICK, GARDEN_REFLECTED_C, (unfilled,))
    return Shot("north-cavity", "north-cavity.tif", TELE, GARDEN, subject, sound=False)


def north_meter() -> Shot:
    """A bare metal cover as warm as the bricks around it: it mirrors the sky and only looks cold."""
    cover = Patch("meter cover", box(140, 88, 204, 164), 0.30)
    subject = Subject(brick_wall("north-meter"), BRICK, GARDEN_REFLECTED_C, patches=(cover,))
    return Shot("north-meter", "north-meter.tif", TELE, GARDEN, subject, sound=True)


def north_lintel() -> Shot:
    """A concrete lintel bridges the insulation above a window 1.20 m wide."""
    _, y = grid(TELE.shape)
    opening = box(104, 110, 219, 232)
    panes = inside(box(112, 118, 157, 224), TELE.shape) | inside(box(165, 118, 211, 224), TELE.shape)
    sound = np.where(inside(opening, TELE.shape), np.where(panes, 1.6 - 0.006 * y, -0.3), brick_wall("north-lintel"))
    beam = soft(box(88, 82, 234, 104), TELE.shape, 3.0)
    lintel = Defect("bridge", 2.6 * beam, THRESHOLD_K)
    window = Patch("window", opening, 0.88, "ignore")
    subject = Subject(sound, BRICK, GARDEN_REFLECTED_C, (lintel,), (window,))
    return Shot("north-lintel", "north-lintel.tif", TELE, GARDEN, subject, sound=False)


SHOTS: tuple[Callable[[], Shot], ...] = (
    living_foil,
    living_north,
    living_window,
    living_corner,
    stairs_slab,
    kitchen_bays,
    bedroom_east,
    bedroom_west,
    bedroom_gable,
    bedroom_lamp,
    study_panel,
    north_foil,
    north_wall,
    north_cavity,
    north_meter,
    north_lintel,
)
