"""Quarry Cottage, the rest of it: a solved slab edge, ceiling, floor, damp, a pressure pair, glass, a roof, the sun."""

from __future__ import annotations

from collections.abc import Callable
from math import cos, exp, log, radians, sin

import numpy as np
from camera_model import Air
from conduction import Edge, Sheet, across, incidence_factor, slab_edge
from house_frames import (
    GARDEN_REFLECTED_C,
    INDOOR_C,
    OUTDOOR_C,
    PLASTER,
    ROOM_REFLECTED_C,
    THRESHOLD_K,
    U_SOUND,
    WIDE,
    inside_c,
    missing,
    outside_c,
    room_wall,
)
from painting import (
    Corners,
    Defect,
    Field,
    Mirage,
    Patch,
    Subject,
    bell,
    box,
    grid,
    inside,
    plume,
    soft,
    unevenness,
    wall,
)
from scipy.ndimage import affine_transform
from scipy.special import ndtr
from shot import Shot

FELT, FLOORBOARDS, GLASS, GLASS_TOTAL = 0.93, 0.90, 0.875, 0.84
U_CEILING, U_BARE_CEILING, U_FLOOR = 0.21, 2.56, 0.31  # [W m⁻² K⁻¹], of the layers in the survey file
U_GLAZING = 2.8
U_FLAT_ROOF, U_WET_ROOF = 0.25, 1.6
R_UP, R_DOWN = 0.10, 0.17  # inside film resistances where heat flows up and down [m² K W⁻¹], ISO 6946
ZENITH_C = -45.0  # reflected in the camera's band by something that faces a clear sky

LANDING = Air(20, 50, 4.0)
SLAB_M = 0.12
SLAB_SHEETS = (  # plasterboard; mineral wool, or concrete; mineral wool; OSB
    Sheet(0.0125, 0.25, 8, 0.25),
    Sheet(0.085, 0.037, 48, 2.0),
    Sheet(0.010, 0.037, 16, 0.037),
    Sheet(0.009, 0.13, 6, 0.13),
)
MARGIN = 24  # pixels around the picture, so that a camera that has moved still sees something
SHIFT_PX, TURN_DEG = (3.0, -2.0), 0.8
LEAK_K = {0: -2.5, -50: -6.0}  # by pressure inside minus outside [Pa]
HEIGHT_M, PITCH_DEG = 6.0, 55.0  # of the camera over the flat roof, and how far below the horizon it looks


def surface_c(u_value: float, r_inside: float) -> float:
    """Inside surface temperature of a ceiling or floor in steady state."""
    return INDOOR_C - r_inside * u_value * (INDOOR_C - OUTDOOR_C)


def landing_slab() -> Shot:
    """The edge of a concrete slab behind the plasterboard, with 10 mm of mineral wool left over it: a solved field."""
    edge, edge_25 = (slab_edge(SLAB_SHEETS, SLAB_M, r_inside=r, step=0.001) for r in (0.13, 0.25))
    x, y = grid(WIDE.shape)
    pixel_m = WIDE.ifov_mrad * 1e-3 * LANDING.distance_m
    slope = 0.02
    distance = (y - (118 + slope * (x - 160))) / (1 + slope**2) ** 0.5 * pixel_m
    span_k = INDOOR_C - OUTDOOR_C
    sound = OUTDOOR_C + span_k * edge.factor_undisturbed + unevenness("landing-slab", WIDE.shape, 0.01)
    panel = box(34, 150, 86, 206)  # matt, with a contact thermometer: it sets the camera right
    sound = np.where(inside(panel, WIDE.shape), 19.6, sound)
    slab = Defect("bridge", span_k * (across(edge, distance) - edge.factor_undisturbed), THRESHOLD_K)
    patch = Patch("matt panel", panel, 0.95, "known-temperature")
    subject = Subject(sound, PLASTER, ROOM_REFLECTED_C, (slab,), (patch,))
    strip = [[156, 18], [160, 218]]  # square to the slab
    start, end = (float(distance[y_px, x_px]) for x_px, y_px in strip)
    more = {
        "strip": {"from": strip[0], "to": strip[1], "length_m": round(end - start, 4)}
        | slab_truth(edge, edge_25, start, end)
    }
    return Shot("landing-slab", "landing-slab.tif", WIDE, LANDING, subject, sound=False, offset_k=-0.6, more=more)


def slab_truth(edge: Edge, edge_25: Edge, start: float, end: float) -> dict[str, float]:
    """What the solution says about a strip from `start` to `end`; at an inside film of 0.13, and f_Rsi at 0.25 too."""
    return {
        "u_value_w_m2k": round(edge.u_value, 4),
        "linear_transmittance_w_mk": round(edge.psi, 4),
        "incidence_factor": round(incidence_factor(edge, start, end), 4),
        "undisturbed_c": round(OUTDOOR_C + (INDOOR_C - OUTDOOR_C) * edge.factor_undisturbed, 3),
        "coldest_c": round(OUTDOOR_C + (INDOOR_C - OUTDOOR_C) * float(edge.factor[0]), 3),
        "temperature_factor_at_0_13": round(float(edge.factor[0]), 4),
        "temperature_factor_at_0_25": round(float(edge_25.factor[0]), 4),
    }


def bedroom_ceiling() -> Shot:
    """Loft insulation pulled aside between two joists: the ceiling below is bare there."""
    bay = missing(
        "bedroom-ceiling",
        box(122, 62, 208, 182),
        WIDE.shape,
        surface_c(U_BARE_CEILING, R_UP) - surface_c(U_CEILING, R_UP),
    )
    x, _ = grid(WIDE.shape)
    joists = sum(-0.12 * np.exp(-(((x - at) / 3.0) ** 2) / 2) for at in (24, 117, 213, 306))
    sound = wall("bedroom-ceiling", WIDE.shape, surface_c(U_CEILING, R_UP), rise_k=0.1) + joists
    subject = Subject(sound, PLASTER, ROOM_REFLECTED_C, (bay,))
    return Shot("bedroom-ceiling", "bedroom-ceiling.tif", WIDE, Air(20, 50, 2.0), subject, False)


def hall_floor() -> Shot:
    """Sound floorboards over a ventilated void."""
    _, y = grid(WIDE.shape)
    gaps = -0.06 * (y % 20 < 1)
    subject = Subject(
        wall("hall-floor", WIDE.shape, surface_c(U_FLOOR, R_DOWN), rise_k=0.15) + gaps, FLOORBOARDS, ROOM_REFLECTED_C
    )
    return Shot("hall-floor", "hall-floor.tif", WIDE, Air(20, 50, 2.0), subject, True)


def attic_wall() -> Shot:
    """A sound wall of the attic room; nobody wrote down when it was taken."""
    subject = Subject(room_wall("attic-wall", [52, 130, 208, 286]), PLASTER, ROOM_REFLECTED_C)
    return Shot("attic-wall", "attic-wall.tif", WIDE, Air(20, 50, 2.5), subject, True)


def bathroom_corner() -> Shot:
    """The outer corner of a bathroom with 70 % humidity: cold enough for mould, and for dew at its foot."""
    x, y = grid(WIDE.shape)
    sound = wall("bathroom-corner", WIDE.shape, inside_c(U_SOUND), 0.3) + 0.1 * (x > 160)
    corner = Defect("bridge", -(4.0 + 1.4 * y / 239) * np.exp(-np.abs(x - 160) / 20.0), THRESHOLD_K)
    subject = Subject(sound, PLASTER, ROOM_REFLECTED_C, (corner,))
    truth_c = subject.temperature_c
    dew_c, mould_c = dew_point_c(70.0), dew_point_c(70.0 / 0.8)
    more = {
        "indoor_relative_humidity_percent": 70,
        "dew_point_c": round(dew_c, 2),
        "mould_surface_c": round(mould_c, 2),
        "pixels_below_dew_point": int((truth_c <= dew_c).sum()),
        "pixels_below_mould_surface": int((truth_c <= mould_c).sum()),
    }
    return Shot("bathroom-corner", "bathroom-corner.tif", WIDE, Air(20, 70, 2.0), subject, False, more=more)


def dew_point_c(relative_humidity_percent: float, air_c: float = INDOOR_C) -> float:
    """Where air of this humidity is saturated; above 100 % of itself it is the surface temperature for that share.

    Saturation over water after Sonntag (1990): 611.2 Pa · exp(17.62 θ/(243.12 + θ)).
    """
    ratio = log(relative_humidity_percent / 100) + 17.62 * air_c / (243.12 + air_c)
    return 243.12 * ratio / (17.62 - ratio)


def larder_damp() -> Shot:
    """Damp that has crept up from the foot of a wall and cools it as it dries: an irregular patch."""
    x, y = grid(WIDE.shape)
    creep = unevenness("larder-damp creep", WIDE.shape, 1.0, grain_px=11.0)
    fingers = unevenness("larder-damp fingers", WIDE.shape, 1.0, grain_px=4.0)
    height = 74 * np.exp(-(((x - 176) / 62) ** 4)) + (16 * creep + 6 * fingers)
    wet = ndtr((height - (239 - y)) / 4.0) * np.exp(-(((x - 176) / 78) ** 8))
    damp = Defect("damp", -2.4 * wet * (1 + 0.08 * creep), THRESHOLD_K)
    subject = Subject(room_wall("larder-damp", [40, 306]), PLASTER, ROOM_REFLECTED_C, (damp,))
    return Shot("larder-damp", "larder-damp.tif", WIDE, Air(20, 50, 2.5), subject, False)


def hall_window(pressure_pa: int) -> Shot:
    """A window whose sill joint leaks, more at 50 Pa below the pressure outdoors, under a lintel that does not care.

    With the fan on, the camera stands a little shifted and turned.
    """
    shape = (WIDE.shape[0] + 2 * MARGIN, WIDE.shape[1] + 2 * MARGIN)
    x, y = (axis - MARGIN for axis in grid(shape))
    left, top, right, bottom = 96, 66, 212, 150
    beside = np.maximum(np.maximum(left - x, x - right), np.maximum(top - y, y - bottom))
    sound = wall("hall-window", shape, inside_c(U_SOUND), 0.3) - 0.3 * np.exp(-np.clip(beside, 0, None) / 5)
    hooks = 0.35 * soft(box(262 + MARGIN, 96 + MARGIN, 286 + MARGIN, 110 + MARGIN), shape, 1.0)
    glass = np.where((np.abs(x - 154) < 4) | (beside > -8), 15.8, 13.6 + 0.008 * (150 - y))
    sound = np.where(beside <= 0, glass, sound + hooks)
    draught = plume("hall-window leak", shape, (126 + MARGIN, 168 + MARGIN, 152 + MARGIN), 30.0)
    leak_k = LEAK_K[pressure_pa]
    across_lintel = 2.4 * np.exp(-((np.clip(np.abs(x - 154) - 74, 0, None) / 5) ** 2)) * bell(y - 50, 7.0, 14.0)
    name = "hall-window" if pressure_pa == 0 else "hall-window-fan"
    turn_deg, shift_px = (0.0, (0.0, 0.0)) if pressure_pa == 0 else (TURN_DEG, SHIFT_PX)
    leak = Defect(
        "plume",
        seen(leak_k * draught * (beside > 0), turn_deg, shift_px),
        THRESHOLD_K,
        more={"changes_with_pressure": True},
    )
    lintel = Defect(
        "bridge", seen(-across_lintel, turn_deg, shift_px), THRESHOLD_K, more={"changes_with_pressure": False}
    )
    opening = moved(box(left, top, right, bottom), turn_deg, shift_px)
    subject = Subject(
        seen(sound, turn_deg, shift_px),
        PLASTER,
        ROOM_REFLECTED_C,
        (leak, lintel),
        (Patch("window", opening, 0.88, "ignore"),),
    )
    more = {} if pressure_pa == 0 else {"pair": pair_truth((LEAK_K[-50] - LEAK_K[0]) * draught)}
    return Shot(name, f"{name}.tif", WIDE, Air(20, 50, 2.5), subject, False, more=more)


def seen(painted: Field, turn_deg: float, shift_px: tuple[float, float]) -> Field:
    """The part of a painting that a camera sees which is turned about the picture's centre and shifted (x, y)."""
    turn = to_steady(turn_deg)
    centre = (np.array(WIDE.shape) - 1) / 2
    # affine_transform reads painted[matrix · (y, x) + offset]; x and y change places against to_steady
    matrix = turn[::-1, ::-1]
    offset = centre + MARGIN - np.array(shift_px[::-1]) - matrix @ centre
    return affine_transform(painted, matrix, offset, output_shape=WIDE.shape, order=1)


def moved(corners: Corners, turn_deg: float, shift_px: tuple[float, float]) -> Corners:
    """Where corners of the painting lie in the picture, to the nearest pixel."""
    centre = (np.array(WIDE.shape[::-1]) - 1) / 2
    at = (np.array(corners) + np.array(shift_px) - centre) @ to_steady(turn_deg) + centre  # the inverse: transposed
    return [(round(float(x)), round(float(y))) for x, y in at]


def to_steady(turn_deg: float) -> Field:
    """Rotation of (x, y) from the picture of the turned camera to that of the steady one."""
    angle = radians(turn_deg)
    return np.array([[cos(angle), -sin(angle)], [sin(angle), cos(angle)]])


def pair_truth(painted_change: Field) -> dict[str, object]:
    """How the picture with the fan on lies to the one without, and what the pressure changed."""
    centre = (np.array(WIDE.shape[::-1]) - 1) / 2
    turn = to_steady(TURN_DEG)
    offset = centre - np.array(SHIFT_PX) - turn @ centre
    change = painted_change[MARGIN:-MARGIN, MARGIN:-MARGIN]
    return {
        "with": "hall-window",
        "pressure_pa": -50,
        "rotation_deg": TURN_DEG,
        "shift_px": list(SHIFT_PX),
        "to_partner": [[round(float(v), 8) for v in (*row, at)] for row, at in zip(turn, offset, strict=True)],
        "largest_change_k": round(float(change.min()), 2),
        "pixels_changed_by_1_k": int((np.abs(change) >= 1.0).sum()),
    }


def porch_glass() -> Shot:
    """A sound pane of a glazed door that mirrors a hot radiator."""
    _, y = grid(WIDE.shape)
    pane = box(20, 8, 299, 231)
    glass = inside_c(U_GLAZING) + 0.4 * (0.5 - y / 239)
    sound = np.where(inside(pane, WIDE.shape), glass, wall("porch-glass", WIDE.shape, inside_c(U_SOUND)))
    radiator = soft(box(178, 112, 246, 168), WIDE.shape, 4.0)
    reflected = ROOM_REFLECTED_C + (45.0 - ROOM_REFLECTED_C) * radiator
    subject = Subject(
        sound,
        PLASTER,
        reflected,
        patches=(Patch("pane", pane, GLASS, emissivity_total=GLASS_TOTAL),),
        mirages=(Mirage("reflection", radiator > 0.02, 45.0),),
    )
    return Shot("porch-glass", "porch-glass.tif", WIDE, Air(20, 50, 2.0), subject, sound=False)


def flat_roof() -> Shot:
    """The flat roof of the extension, hours after dark: some insulation boards under the felt are wet and warm."""
    x, y = grid(WIDE.shape)
    across_m, along_m, pixel_area = on_roof(x, y)
    wet_k = roof_c(U_WET_ROOF) - roof_c(U_FLAT_ROOF)

    def board(left: float, near: float, right: float, far: float) -> Field:
        """1 on a rectangle of the roof [m], with edges 3 cm soft as the felt and its bedding make them."""
        along = ndtr((along_m - near) / 0.03) - ndtr((along_m - far) / 0.03)
        return along * (ndtr((across_m - left) / 0.03) - ndtr((across_m - right) / 0.03))

    uneven = 1 + unevenness("flat-roof wet", WIDE.shape, 0.03, grain_px=9.0)
    corner = np.maximum(board(-1.5, 2.9, -0.3, 4.1), board(-1.5, 3.5, 0.3, 4.1))  # four boards of 1.2 × 0.6 m less one
    single = board(0.9, 4.7, 2.1, 5.3)
    sound = roof_c(U_FLAT_ROOF) + unevenness("flat-roof", WIDE.shape, 0.08, grain_px=10.0)
    subject = Subject(
        sound,
        FELT,
        ZENITH_C,
        (
            Defect("wet insulation", wet_k * uneven * corner, THRESHOLD_K),
            Defect("wet insulation", wet_k * uneven * single, THRESHOLD_K),
        ),
    )
    mark = [(-1.8, 5.6), (1.8, 5.6), (1.8, 2.6), (-1.8, 2.6)]
    rectangle = {"corners": [on_picture(*place) for place in mark], "width_m": 3.6, "height_m": 3.0}
    more = {
        "known_rectangle": rectangle,
        "sky_c": round(clear_sky_c(OUTDOOR_C, 70.0), 2),
        "sound_c": round(roof_c(U_FLAT_ROOF), 3),
        "wet_c": round(roof_c(U_WET_ROOF), 3),
        "u_value_w_m2k": U_FLAT_ROOF,
        "u_value_wet_w_m2k": U_WET_ROOF,
    }
    roof_air = Air(0, 70, round(HEIGHT_M / sin(radians(PITCH_DEG)), 1))
    return Shot("flat-roof", "flat-roof.tif", WIDE, roof_air, subject, False, pixel_area_m2=pixel_area, more=more)


def on_roof(x: Field, y: Field) -> tuple[Field, Field, Field]:
    """Places [m] across and along the roof that pixels look at, from below the camera, and their areas [m²]."""
    focal, pitch = 1e3 / WIDE.ifov_mrad, radians(PITCH_DEG)
    right, down = (x - 159.5) / focal, (y - 119.5) / focal
    fall = sin(pitch) + down * cos(pitch)  # how fast a ray of unit depth comes down
    along = (cos(pitch) - down * sin(pitch)) / fall
    return HEIGHT_M * right / fall, HEIGHT_M * along, (HEIGHT_M / focal) ** 2 / fall**3


def on_picture(across_m: float, along_m: float) -> list[float]:
    """The pixel that looks at a place on the roof, to a tenth."""
    focal, pitch = 1e3 / WIDE.ifov_mrad, radians(PITCH_DEG)
    depth = along_m * cos(pitch) + HEIGHT_M * sin(pitch)
    down = HEIGHT_M * cos(pitch) - along_m * sin(pitch)
    return [round(159.5 + focal * across_m / depth, 1), round(119.5 + focal * down / depth, 1)]


def clear_sky_c(air_c: float, relative_humidity_percent: float) -> float:
    """Clear night sky over all wavelengths: emissivity 0.711 + 0.56 d + 0.73 d², d dew point in hundreds of °C.

    Berdahl and Martin (1984), without its terms for the hour and the height.
    """
    d = dew_point_c(relative_humidity_percent, air_c) / 100
    return float((0.711 + 0.56 * d + 0.73 * d**2) ** 0.25 * (air_c + 273.15) - 273.15)


def roof_c(u_value: float) -> float:
    """Felt that faces only the sky, in steady state: conduction in, convection (4 + 4v at 1 m/s) and radiation out."""
    conductance, film, sigma = 1 / (1 / u_value - 0.04), 8.0, 5.670374419e-8
    sky = (clear_sky_c(OUTDOOR_C, 70.0) + 273.15) ** 4
    t_c = OUTDOOR_C
    for _ in range(50):  # Newton's method has long converged
        loss = film * (t_c - OUTDOOR_C) + FELT * sigma * ((t_c + 273.15) ** 4 - sky) - conductance * (INDOOR_C - t_c)
        t_c -= loss / (film + 4 * FELT * sigma * (t_c + 273.15) ** 3 + conductance)
    return t_c


def east_wall_sun() -> Shot:
    """A rendered wall, partly in the sun until half an hour ago: the warm part is the sun's, not the house's."""
    cooling = 7.0 * exp(-0.5)  # half an hour into a time constant of about an hour
    sunlit = soft([(118, 0), (319, 0), (319, 239), (214, 239)], WIDE.shape, 3.0)
    sun = Defect("sun", cooling * sunlit, THRESHOLD_K, against="the same wall in the shade")
    sound = wall("east-wall-sun", WIDE.shape, outside_c(U_SOUND), 0.3)
    subject = Subject(sound, PLASTER, GARDEN_REFLECTED_C, (sun,))
    return Shot("east-wall-sun", "east-wall-sun.tif", WIDE, Air(0, 70, 6.0), subject, False)


def hall_window_calm() -> Shot:
    """The window of the hall as it stands every day."""
    return hall_window(0)


def hall_window_fan() -> Shot:
    """The same window with the fan on."""
    return hall_window(-50)


SHOTS: tuple[Callable[[], Shot], ...] = (
    landing_slab,
    bedroom_ceiling,
    hall_floor,
    bathroom_corner,
    larder_damp,
    hall_window_calm,
    hall_window_fan,
    porch_glass,
    flat_roof,
    east_wall_sun,
    attic_wall,
)
