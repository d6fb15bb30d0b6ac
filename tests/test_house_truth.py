"""The house sample is physically what it says: balances, logs, a solved thermal bridge, a pressure pair, a roof."""

from __future__ import annotations

import csv
import tomllib
from datetime import datetime, timedelta
from math import cosh, exp, sinh, sqrt
from types import ModuleType
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from samples import HOUSE, SAMPLES, truth, truth_facts
from scipy.ndimage import map_coordinates

SURVEY: dict[str, Any] = tomllib.loads(HOUSE.read_text("utf-8"))
GROUPS = {group["id"]: group for group in SURVEY["group"]}
FRAMES = {frame["id"]: frame for frame in SURVEY["frame"]}
ELEMENTS = {element["id"]: element for element in SURVEY["element"]}
# ISO 10456 (brick and mineral wool: typical, from memory) [W m⁻¹ K⁻¹]
CONDUCTIVITY = {"plasterboard": 0.25, "mineral wool": 0.037, "OSB": 0.13, "brick": 0.77, "timber": 0.13}


def log(name: str) -> list[tuple[datetime, dict[str, float]]]:
    with (SAMPLES / "house" / name).open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    return [
        (datetime.fromisoformat(row["time"]), {key: float(row[key]) for key in row if key != "time"}) for row in rows
    ]


def timed_frames() -> list[dict[str, Any]]:
    """All frames but the one whose time nobody wrote down."""
    timed = [frame for frame in FRAMES.values() if "taken" in frame]
    assert FRAMES.keys() - {frame["id"] for frame in timed} == {"attic-wall"}
    return timed


@pytest.fixture
def conduction(monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    monkeypatch.syspath_prepend(str(SAMPLES))
    import conduction

    return conduction


@pytest.fixture
def details(monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    monkeypatch.syspath_prepend(str(SAMPLES))
    import house_detail_frames

    return house_detail_frames


def test_the_loggers_agree_with_what_is_stated_at_every_frame() -> None:
    rows = log("loggers.csv")
    stated = SURVEY["conditions"]
    times = [time.timestamp() for time, _ in rows]
    for frame in timed_frames():
        moment = frame["taken"].timestamp()
        at = {key: float(np.interp(moment, times, [row[key] for _, row in rows])) for key in rows[0][1]}
        assert at["wind_m_s"] == stated["wind_m_s"]
        assert at["indoor_air_c"] == stated["indoor_air_c"]
        # The sun has begun to warm the air when the last frame, the sunlit wall, is taken.
        warmed = 0.07 if frame["id"] == "east-wall-sun" else 0.0
        assert at["outdoor_air_c"] == pytest.approx(stated["outdoor_air_c"], abs=warmed)
        assert frame["taken"] - rows[0][0] >= timedelta(hours=30)


@pytest.mark.parametrize("group", ["living-room", "other-rooms", "north-elevation"])
def test_the_loggers_agree_with_what_is_stated_of_the_day_before(group: str) -> None:
    rows, stated = log("loggers.csv"), GROUPS[group]["conditions"]
    taken = [frame["taken"] for frame in FRAMES.values() if frame.get("group") == group]
    for moment in taken:
        day = [row["outdoor_air_c"] for time, row in rows if moment - timedelta(hours=24) <= time <= moment]
        assert [min(day), max(day)] == stated["outdoor_24h_c"]
    for key, column in (("hours_since_sun", "irradiance_w_m2"), ("hours_since_rain", "rain_mm")):
        last = max(time for time, row in rows if row[column] > 0 and time < taken[0])
        since = (min(taken) - last).total_seconds() / 3600
        assert 0 <= since - stated[key] < 1  # stated in whole hours, rounded down


def test_the_bathroom_is_as_humid_as_its_frame_assumes() -> None:
    (frame,) = [frame for frame in FRAMES.values() if frame.get("group") == "bathroom"]
    before = [row for time, row in log("bathroom.csv") if abs(time - frame["taken"]) <= timedelta(hours=1)]
    humidity = truth_facts("house")[frame["id"]]["indoor_relative_humidity_percent"]
    assert {row["indoor_relative_humidity_percent"] for row in before} == {humidity}
    assert {row["indoor_air_c"] for row in before} == {20.0}


@pytest.mark.parametrize(
    ("element", "r_inside", "r_outside"),
    # ISO 6946: 0.13 horizontal, 0.10 up, 0.17 down, 0.04 outside; a ventilated void counts as an inside film (0.17).
    [
        ("timber-wall", 0.13, 0.04),
        ("north-wall", 0.13, 0.04),
        ("loft-ceiling", 0.10, 0.04),
        ("floor", 0.17, 0.17),
        ("flat-roof", 0.10, 0.04),
    ],
)
def test_u_values_are_those_of_the_layers(element: str, r_inside: float, r_outside: float) -> None:
    layers = ELEMENTS[element]["layers"]
    resistance = r_inside + r_outside
    for layer in layers:
        conductivity = layer.get("conductivity_w_mk") or CONDUCTIVITY.get(layer.get("material", ""), 1.0)
        resistance += layer.get("resistance_m2k_w") or layer["thickness_m"] / conductivity
    assert 1 / resistance == pytest.approx(ELEMENTS[element]["u_value_w_m2k"], abs=0.006)  # stated to two decimals


@pytest.mark.parametrize(
    ("frame", "element", "r_inside"),
    [
        ("landing-slab", "timber-wall", 0.13),
        ("hall-floor", "floor", 0.17),
        ("bedroom-ceiling", "loft-ceiling", 0.10),
        ("bathroom-corner", "timber-wall", 0.13),
        ("larder-damp", "timber-wall", 0.13),
        ("porch-glass", "glazing", 0.13),
        ("attic-wall", "timber-wall", 0.13),
        ("hall-window", "timber-wall", 0.13),
        ("hall-window-fan", "timber-wall", 0.13),
    ],
)
def test_sound_surfaces_have_the_temperature_of_a_steady_balance(frame: str, element: str, r_inside: float) -> None:
    # U (Ti − Te) = (Ti − Tsi)/Rsi
    (left, top), _, (right, bottom), _ = FRAMES[frame]["reference"]["polygon"]
    reference = truth("house", frame).temperature_c[top : bottom + 1, left : right + 1]
    expected = 20.0 - r_inside * ELEMENTS[element]["u_value_w_m2k"] * 20.0
    # 0.1 K: the reference lies above or below the middle of a wall that is 0.3 K warmer at its top, and is uneven
    assert np.median(reference) == pytest.approx(expected, abs=0.1)


def test_the_roof_loses_to_air_and_sky_what_comes_through_it() -> None:
    facts = truth_facts("house")["flat-roof"]
    for t_c, u_value in ((facts["sound_c"], 0.25), (facts["wet_c"], 1.6)):
        through = (20.0 - t_c) / (1 / u_value - 0.04)
        sky = 0.93 * 5.670374419e-8 * ((t_c + 273.15) ** 4 - (facts["sky_c"] + 273.15) ** 4)
        assert through == pytest.approx(8.0 * t_c + sky, abs=0.02)  # temperatures are rounded to 0.001 K: 12 mW
    # Berdahl–Martin at 0 °C, dew point −4.8 °C (70 %): 0.711 − 0.0269 + 0.0017 = 0.6858, 248.6 K
    assert facts["sky_c"] == pytest.approx(-24.6, abs=0.1)


def test_dew_points_are_those_of_the_tables(details: ModuleType) -> None:
    # Sonntag 1990, as computed with psychrolib and CoolProp: 20 °C at 50 and 60 %, 21 °C at 50 %, 25 °C at 60 %.
    for air_c, humidity, dew_c in ((20, 50, 9.265), (20, 60, 12.00), (21, 50, 10.18), (25, 60, 16.70)):
        assert details.dew_point_c(float(humidity), float(air_c)) == pytest.approx(dew_c, abs=0.01)  # their rounding


def test_the_corner_is_at_risk_in_part_and_the_wall_is_not() -> None:
    now = truth("house", "bathroom-corner")
    facts = now.facts
    assert 0 < facts["pixels_below_dew_point"] < facts["pixels_below_mould_surface"] < 0.25 * now.defect.size
    assert np.median(now.temperature_c) > facts["mould_surface_c"] + 1.0
    # Steam tables (from memory): 2.339 kPa at 20 °C; 0.70/0.80 of it is 2.047, between 17 °C (1.938) and 18 °C (2.064).
    assert facts["mould_surface_c"] == pytest.approx(17.87, abs=0.02)  # the tables' digits


def test_a_wall_without_a_slab_conducts_in_one_dimension(conduction: ModuleType) -> None:
    plain = tuple(conduction.Sheet(d, k, n, k) for d, k, n in ((0.0125, 0.25, 4), (0.095, 0.037, 24)))
    edge = conduction.slab_edge(plain, 0.12, r_inside=0.13)
    assert edge.psi == pytest.approx(0.0, abs=1e-9)  # a direct solver's rounding
    assert edge.u_value == pytest.approx(1 / (0.13 + 0.05 + 0.095 / 0.037 + 0.04), rel=1e-12)


def test_the_solved_slab_edge_agrees_with_the_fin_equation(conduction: ModuleType) -> None:
    # A thin aluminium lining (1 mm, 160 W/mK) with 1 mm behind it that conducts ten times better at the slab: heat
    # spreads in the lining alone, which is a fin with two films (any heat-transfer textbook): T'' = m² (T − T∞),
    # m² = (1/Ri + 1/Ro)/(k d), T∞ = (1/Ri)/(1/Ri + 1/Ro).
    k, d, half, r_in = 160.0, 1e-3, 0.06, 0.13
    sheets = (conduction.Sheet(d, k, 4, k), conduction.Sheet(1e-3, 0.001, 4, 0.01))
    edge = conduction.slab_edge(sheets, 2 * half, r_inside=r_in, reach=4.0)
    r_plain, r_slab = (0.04 + 1e-3 / lam for lam in (0.001, 0.01))
    m1, m2 = (sqrt((1 / r_in + 1 / r_out) / (k * d)) for r_out in (r_plain, r_slab))
    far, near = (r_out / (r_in + r_out) for r_out in (r_plain, r_slab))
    # far + b = near + a cosh(m2 half);  −b m1 = a m2 sinh(m2 half)
    a = (far - near) / (cosh(m2 * half) + m2 / m1 * sinh(m2 * half))
    b = near + a * cosh(m2 * half) - far
    expected = np.where(
        edge.offset < half,
        near + a * np.cosh(m2 * np.minimum(edge.offset, half)),
        far + b * np.exp(-m1 * np.clip(edge.offset - half, 0, None)),
    )
    # The film meets the lining's surface, 3 µK·m²/W in front of its middle, and 2 mm rows are coarse at the step.
    assert np.abs(edge.factor - expected).max() <= 5e-4
    missing = half * (far - near) - a / m2 * sinh(m2 * half) - b / m1 * (1 - exp(-m1 * (4.0 - half)))
    assert edge.psi == pytest.approx(2 * missing / r_in, rel=5e-3)


def test_the_slab_edge_is_solved_finely_enough(conduction: ModuleType, details: ModuleType) -> None:
    finer = tuple(
        conduction.Sheet(s.thickness, s.conductivity, 2 * s.cells, s.conductivity_at_slab) for s in details.SLAB_SHEETS
    )
    twice = conduction.slab_edge(finer, details.SLAB_M, r_inside=0.13, step=0.0005)
    strip = truth_facts("house")["landing-slab"]["strip"]
    assert strip["linear_transmittance_w_mk"] == pytest.approx(twice.psi, rel=0.003)  # a tenth of what is asked for
    assert strip["temperature_factor_at_0_13"] == pytest.approx(twice.factor[0], abs=0.0005)
    assert strip["temperature_factor_at_0_25"] < strip["temperature_factor_at_0_13"]


def test_the_strip_across_the_slab_holds_the_heat_it_says() -> None:
    now = truth("house", "landing-slab")
    strip = now.facts["strip"]
    said = FRAMES["landing-slab"]["strip"][0]
    assert (said["from"], said["to"]) == (strip["from"], strip["to"])
    (x0, y0), (x1, y1) = strip["from"], strip["to"]
    n = 2001
    line = map_coordinates(now.temperature_c, [np.linspace(y0, y1, n), np.linspace(x0, x1, n)], order=1)
    factor = (20.0 - line).mean() / (20.0 - strip["undisturbed_c"])
    # The wall's unevenness of 0.01 K on 0.91 K, and temperatures stored in hundredths of a kelvin.
    assert factor == pytest.approx(strip["incidence_factor"], rel=0.01)
    # Ψ = U l (I − 1) where the strip holds all of the disturbance
    assert strip["u_value_w_m2k"] * strip["length_m"] * (strip["incidence_factor"] - 1) == pytest.approx(
        strip["linear_transmittance_w_mk"], rel=2e-3
    )


def test_the_pair_shows_one_scene_and_only_the_leak_changes() -> None:
    before, after = truth("house", "hall-window"), truth("house", "hall-window-fan")
    pair = after.facts["pair"]
    y, x = np.indices(after.defect.shape).astype(float)
    at = np.einsum("ij,jkl->ikl", np.array(pair["to_partner"]), np.stack([x, y, np.ones_like(x)]))
    moved: NDArray[np.float64] = map_coordinates(before.temperature_c, at[::-1], order=1, cval=np.nan)
    change = after.temperature_c - moved
    window = map_coordinates(before.exclude.astype(float), at[::-1], order=1, cval=1.0) > 0
    clear = ~after.exclude & ~window & ~np.isnan(change)
    lintel = next(d["label"] for d in after.facts["defects"] if d["kind"] == "bridge")
    leak = next(d for d in after.facts["defects"] if d["kind"] == "plume")
    assert np.abs(change[clear & (after.defect == lintel)]).max() <= 0.05  # two straight-line interpolations
    assert np.abs(change[clear & (np.hypot(x - 150, y - 190) > 90)]).max() <= 0.05
    assert change[clear].min() == pytest.approx(pair["largest_change_k"], abs=0.1)
    assert leak["changes_with_pressure"]
    assert abs(leak["delta_k"]) > 2 * abs(before.facts["defects"][0]["delta_k"])
    assert 2.0 <= np.hypot(*pair["shift_px"]) <= 8.0
    assert 0 < pair["rotation_deg"] <= 3.0


def test_the_wet_boards_are_as_large_as_boards_are() -> None:
    facts = truth_facts("house")["flat-roof"]
    areas = [defect["area_m2"] for defect in facts["defects"]]
    # Three boards of 1.2 m × 0.6 m less a corner, and one; the outline at a third of the contrast lies 1.3 cm outside.
    assert areas == pytest.approx([1.8, 0.72], rel=0.08)


def test_the_marks_on_the_roof_are_a_rectangle_of_the_stated_size() -> None:
    mine, said = truth_facts("house")["flat-roof"]["known_rectangle"], FRAMES["flat-roof"]["known_rectangle"]
    assert said == mine


def test_every_defect_of_the_house_has_a_pattern_or_is_the_suns() -> None:
    kinds = {
        "plateau": "missing or displaced insulation",
        "bridge": "thermal bridge",
        "plume": "air leakage",
        "damp": "moisture",
        "wet insulation": "moisture",
        "sun": None,
    }
    seen = set()
    for facts in truth_facts("house").values():
        for defect in facts["defects"]:
            assert defect["pattern"] == kinds[defect["kind"]]
            seen.add(defect["kind"])
        assert all(mirage["pattern"] == "possible reflection" for mirage in facts["mirages"])
    assert seen == kinds.keys()


def test_the_year_is_a_whole_one_and_heats() -> None:
    rows = log("year.csv")
    assert rows[-1][0] - rows[0][0] == timedelta(days=364)
    degree_days = sum(max(15.5 - row["outdoor_air_c"], 0.0) for _, row in rows)
    assert 2000 < degree_days < 4000  # lowlands of central Europe
