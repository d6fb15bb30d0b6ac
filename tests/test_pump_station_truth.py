"""The switch-room sample is what it says: loads, heat of joints, classes, a window, wind, earlier rounds, modules."""

from __future__ import annotations

import csv
import json
import tomllib
from collections.abc import Iterator
from datetime import datetime
from types import ModuleType
from typing import Any

import numpy as np
import pytest
from ht.conv_external import Nu_cylinder_Churchill_Bernstein
from ht.conv_free_immersed import Nu_horizontal_cylinder_Churchill_Chu, Nu_vertical_plate_Churchill
from numpy.typing import NDArray
from samples import PUMP_STATION, SAMPLES, truth, truth_facts
from scipy.stats import theilslopes
from test_samples_truth import apparent_c, survey_frames

FOLDER = PUMP_STATION.parent
SURVEY: dict[str, Any] = tomllib.loads(PUMP_STATION.read_text("utf-8"))
FRAMES = survey_frames("pump_station")
FACTS = truth_facts("pump_station")
ROUND: dict[str, Any] = json.loads((FOLDER / "truth" / "round.json").read_text("utf-8"))
CIRCUITS = {circuit["id"]: circuit for circuit in SURVEY["circuit"]}
CASES = [(frame, part["name"]) for frame, facts in FACTS.items() for part in facts["components"]]


def rows(name: str) -> list[dict[str, str]]:
    with (FOLDER / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def known(frame: str, name: str) -> dict[str, Any]:
    (part,) = [part for part in FACTS[frame]["components"] if part["name"] == name]
    return part


def by_key(key: str) -> dict[str, Any]:
    frame, _, name = key.split(":")
    return known(frame, name)


def keys() -> Iterator[str]:
    return (key for column in ROUND["worst_by_urgency"].values() for key in column)


def logged(circuit: str, phase: str) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Minutes since midnight, and the current."""
    log = rows(CIRCUITS[circuit]["log"])
    times = [datetime.fromisoformat(row["time"]) for row in log]
    return np.array([60 * at.hour + at.minute for at in times]), np.array([float(r[f"load_a_{phase}"]) for r in log])


@pytest.fixture
def joint_heat(monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    monkeypatch.syspath_prepend(str(SAMPLES))
    import joint_heat

    return joint_heat


@pytest.mark.parametrize(("frame", "name"), CASES)
def test_loads_and_what_else_the_survey_says_of_a_part_are_those_of_its_truth(frame: str, name: str) -> None:
    part = known(frame, name)
    (said,) = [one for one in FRAMES[frame]["component"] if one["name"] == name]
    if "circuit" in said:
        taken = FRAMES[frame]["taken"]
        load = np.interp(60 * taken.hour + taken.minute, *logged(said["circuit"], said["phase"]))
        rated = CIRCUITS[said["circuit"]]["rated_a"]
    else:
        load, rated = said.get("load_a"), said.get("rated_a")
    assert (load, rated, said.get("group")) == (part["load_a"], part["rated_a"], part["group"])
    joint = part.get("joint", {})
    assert {key: said[key] for key in ("cylinder", "area_m2") if key in said} == {
        key: joint[key] for key in ("cylinder", "area_m2") if key in joint
    }
    assert ("limits" in said) == ("limit" in part)


@pytest.mark.parametrize("frame", ["incomer", "pump-one", "yard-isolator"])
def test_a_cylinder_is_as_large_as_the_part_that_was_painted(frame: str) -> None:
    pixel = FACTS[frame]["pixel_m"]
    for part in FACTS[frame]["components"]:
        (left, top), _, (right, bottom), _ = part["polygon"]
        size = part["joint"]["cylinder"]
        # A pixel belongs to a part with all its width; sizes are stated to a millimetre.
        assert (right - left + 1) * pixel == pytest.approx(size["diameter_m"], abs=1e-3)
        assert (bottom - top + 1) * pixel == pytest.approx(size["length_m"], abs=1e-3)


# Air at film temperature, Incropera's table A.4 [M]: kinematic viscosity, conductivity, Prandtl number at 300 K.
VISCOSITY, CONDUCTIVITY, PRANDTL = 15.89e-6, 26.3e-3, 0.707


def test_heat_of_a_joint_is_that_of_the_published_correlations(joint_heat: ModuleType) -> None:
    t_c, air_c, emissivity = 36.85, 16.85, 0.8  # a film of 300 K
    radiated = 5.670374419e-8 * emissivity * (310.0**4 - 290.0**4)

    def rayleigh(length: float) -> float:
        return 9.80665 / 300.0 * 20.0 * length**3 * PRANDTL / VISCOSITY**2

    cylinder = {"cylinder": {"diameter_m": 0.03, "length_m": 0.12}}
    still = Nu_horizontal_cylinder_Churchill_Chu(Pr=PRANDTL, Gr=rayleigh(0.03) / PRANDTL)
    windy = Nu_cylinder_Churchill_Bernstein(Re=4.0 * 0.03 / VISCOSITY, Pr=PRANDTL)
    plate = Nu_vertical_plate_Churchill(Pr=PRANDTL, Gr=rayleigh(0.1) / PRANDTL)
    for joint, wind, nusselt, length, area in (
        (cylinder, None, still, 0.03, np.pi * 0.03 * 0.12),
        (cylinder, 4.0, windy, 0.03, np.pi * 0.03 * 0.12),
        ({"area_m2": 0.01}, None, plate, 0.1, 0.01),
    ):
        expected = area * (nusselt * CONDUCTIVITY / length * 20.0 + radiated)
        assert joint_heat.power(joint, t_c, air_c, air_c, emissivity, wind) == pytest.approx(expected, rel=1e-6)


def test_the_steam_pipe_of_the_textbook_loses_what_it_says(joint_heat: ModuleType) -> None:
    # Incropera, example 9.4 [M]: 0.1 m, 438 K in air and surroundings of 296 K, ε 0.85: 763 W per metre.
    pipe = {"cylinder": {"diameter_m": 0.1, "length_m": 1.0}}
    power = joint_heat.power(pipe, 438 - 273.15, 296 - 273.15, 296 - 273.15, 0.85, None)
    assert power == pytest.approx(763, rel=0.01)  # two figures of h and of the table of air


@pytest.mark.parametrize("frame", ["incomer", "pump-one", "bus-coupler", "yard-isolator"])
def test_the_excess_resistance_is_the_excess_power_over_the_square_of_the_current(frame: str) -> None:
    parts = FACTS[frame]["components"]
    least = min(part["joint"]["power_w"] for part in parts)
    for part in parts:
        joint = part["joint"]
        assert joint["excess_power_w"] == pytest.approx(joint["power_w"] - least, abs=0.0011)  # rounded to a milliwatt
        # and half a milliwatt of rounding over I²
        rounding = 0.5e3 / part["load_a"] ** 2 + 0.006
        assert joint["excess_resistance_uohm"] == pytest.approx(1e6 * joint["excess_power_w"] / part["load_a"] ** 2,
                                                                abs=rounding)  # fmt: skip


# ANSI/NETA, Table 100.18 [P], at the edges the project checks: (rise, urgency by twins, urgency over ambient).
EDGES = [
    (0.99, 0, 0), (1.0, 1, 1), (3.0, 1, 1), (3.0001, 2, 1), (3.5, 2, 1), (4.0, 2, 1), (10.0, 2, 1), (10.4, 2, 2),
    (15.0, 2, 2), (15.4, 4, 2), (20.0, 4, 2), (20.7, 4, 3), (40.0, 4, 3), (40.1, 4, 4),
]  # fmt: skip


@pytest.mark.parametrize(("rise", "similar", "ambient"), EDGES)
def test_urgencies_in_the_truth_are_those_of_the_table(
    rise: float, similar: int, ambient: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.syspath_prepend(str(SAMPLES))
    import electrical_truth

    assert electrical_truth.urgency(rise, electrical_truth.SIMILAR) == similar
    assert electrical_truth.urgency(rise, electrical_truth.AMBIENT) == ambient


def test_the_parts_that_are_bad_have_the_urgency_that_the_round_says_and_no_twin_has_any() -> None:
    assert {by_key(key)["urgency_by_neta_similar"] for key in ROUND["worst_by_urgency"]["4"]} == {4}
    assert {by_key(key)["urgency_by_neta_similar"] for key in ROUND["worst_by_urgency"]["2"]} == {2}
    bad = set(keys()) | {"drain-pump:component:phase 2 lug", "busbars:component:bar 2"}  # low load; mirrors the room
    for frame, name in CASES:
        part = known(frame, name)
        if f"{frame}:component:{name}" not in bad and "urgency_by_neta_similar" in part:
            assert part["urgency_by_neta_similar"] == 0


def test_the_drain_pump_is_mild_now_and_bad_at_full_load() -> None:
    part = known("drain-pump", "phase 2 lug")
    assert part["is_low_load"]
    assert part["urgency_by_neta_similar"] == 1
    low, high = part["delta_ambient_at_rated_k"]
    # (18/100)^−1.6 = 15.5 and ^−2 = 30.9 [C]
    assert (low, high) == pytest.approx((15.55 * part["delta_ambient_k"], 30.86 * part["delta_ambient_k"]), rel=2e-3)


def test_only_pump_two_carries_more_than_it_may_and_all_its_phases_are_alike() -> None:
    overloaded = {frame for frame, name in CASES if known(frame, name).get("is_overload")}
    assert overloaded == {"pump-two"}
    assert all(part["urgency_by_neta_similar"] == 0 for part in FACTS["pump-two"]["components"])
    assert all(part["delta_ambient_k"] > 30 for part in FACTS["pump-two"]["components"])


def test_load_alone_explains_the_heating_feeder() -> None:
    parts = FACTS["heating"]["components"]
    assert max(part["load_a"] for part in parts) > 1.5 * min(part["load_a"] for part in parts)
    scaled = [part["delta_ambient_k"] * (80 / part["load_a"]) ** 1.8 for part in parts]
    assert max(scaled) - min(scaled) < 0.2  # unevenness of 0.03 K, brought from 50 to 80 A
    plain = [part["delta_ambient_k"] for part in parts]
    assert max(plain) - min(plain) > 3.0  # compared as they are, a class too many


def test_the_bad_lug_of_pump_one_is_above_what_its_load_allows_and_below_its_limit() -> None:
    for part in FACTS["pump-one"]["components"]:
        # IEC 60694, bare bolted joint [P]: 90 °C, rise 50 K at rated load; (164/250)^2 = 0.430, ^1.6 = 0.509 [C]
        assert (part["limit"]["max_c"], part["limit"]["rise_k"]) == (90.0, 50.0)
        assert part["limit"]["above_limit_k"] < -20
        is_bad = part["name"] == "phase 2 lug"
        assert (part["limit"]["above_allowed_k"][0] > 5) == is_bad
    assert known("pump-one", "phase 2 lug")["limit"]["allowed_rise_k"] == pytest.approx([21.5, 25.5], abs=0.05)
    for frame in ("incomer", "pump-two", "yard-isolator"):
        assert all(max(part["limit"]["above_allowed_k"]) < 0 for part in FACTS[frame]["components"])


def test_wind_hides_a_class_in_the_yard() -> None:
    part = known("yard-isolator", "phase 2 clamp")
    # 4^0.448 = 1.861 [C]; by the table 10.1 K is a repair as time permits, 18.8 K one at once
    assert part["delta_similar_in_calm_k"] == pytest.approx(1.861 * part["delta_similar_k"], abs=0.02)
    assert 3 < part["delta_similar_k"] <= 15 < part["delta_similar_in_calm_k"]


def test_the_two_plates_measure_the_window() -> None:
    # Band radiances of 8 to 14 µm, summed here wavelength by wavelength (Planck's law).
    wavelength = np.linspace(8e-6, 14e-6, 601)

    def radiance(t_c: NDArray[np.float64] | float) -> NDArray[np.float64]:
        exponent = 1.438776877e-2 / (wavelength * (np.asarray(t_c)[..., None] + 273.15))
        return np.trapezoid(1.191042972e-16 / wavelength**5 / np.expm1(exponent), wavelength, axis=-1)

    plates = [apparent_c("pump_station", frame) for frame in ("window-plate", "window-plate-through")]
    without, through = (radiance(np.array([plate[30:91, 40:121].mean()]))[0] for plate in plates)
    transmittance = (through - 0.20 * radiance(23.0) - 0.05 * radiance(21.0)) / without
    # 4941 pixels of 0.05 K, stored in steps of 0.04 K: 1e-3 K of 58; noise in the plate's radiance is below 1e-4
    assert transmittance == pytest.approx(0.75, abs=2e-4)
    first, second = (truth("pump_station", frame).temperature_c for frame in ("window-plate", "window-plate-through"))
    assert np.array_equal(first, second)


def test_the_logs_say_how_long_the_loads_had_been_steady() -> None:
    circuits = {"pump-one": "pump-1", "pump-two": "pump-2", "soft-starter": "pump-1"}
    for frame, (least, most) in ROUND["steady_min"].items():
        minutes, load = logged(circuits[frame], "1")
        at = 60 * FRAMES[frame]["taken"].hour + FRAMES[frame]["taken"].minute
        now = np.interp(at, minutes, load)
        outside = minutes[(np.abs(load - now) > 0.1 * now) & (minutes < at)]
        inside = minutes[minutes > outside[-1]][0] if outside.size else minutes[0]
        assert at - inside == least
        assert at - (outside[-1] if outside.size else minutes[0]) == most
    # three time constants of 20 min
    assert ROUND["steady_min"]["soft-starter"][1] < 60 < ROUND["steady_min"]["pump-two"][0]


def test_of_the_two_lugs_with_a_history_one_grows_worse() -> None:
    earlier = rows("history.csv")
    assets = {row["id"] for row in SURVEY["asset"]}
    for key, how in ROUND["trends"].items():
        frame, _, name = key.split(":")
        mine = [row for row in earlier if (row["asset"], row["component"]) == (FRAMES[frame]["asset"], name)]
        assert len(mine) == 5
        assert FRAMES[frame]["asset"] in assets
        years = [datetime.fromisoformat(row["date"]).toordinal() / 365.25 for row in mine]
        years.append(SURVEY["survey"]["date"].toordinal() / 365.25)
        now = by_key(key)
        rises = [
            float(row["delta_ambient_k"]) * (float(row["rated_a"]) / float(row["load_a"])) ** 1.8 for row in mine
        ] + [now["delta_ambient_k"] / now["load_ratio"] ** 1.8]
        slope, _, low, high = theilslopes(rises, years, 0.95)
        if how == "rising":
            assert 10 < low < slope < high
        else:
            assert low < 0 < high


def test_one_breaker_of_eight_stands_out() -> None:
    for group, expected in ROUND["standing_out"].items():
        rises = {
            f"{frame}:component:{name}": known(frame, name)["delta_ambient_k"]
            for frame, name in CASES
            if known(frame, name)["group"] == group
        }
        values = np.array(list(rises.values()))
        median = np.median(values)
        alarm = median + 3 * 1.4826 * np.median(np.abs(values - median))  # median and MAD, as in robust statistics
        assert len(rises) == 8
        assert [key for key, rise in rises.items() if rise > alarm] == expected


def test_the_terminals_are_narrower_than_the_spot_and_the_fuses_are_drawn_nowhere() -> None:
    spot = SURVEY["cameras"]["compact"]["spot_pixels"]
    for frame, name in CASES:
        (left, top), _, (right, bottom), _ = known(frame, name)["polygon"]
        is_narrow = FRAMES[frame]["camera"] == "compact" and min(right - left, bottom - top) + 1 < spot
        assert is_narrow == (frame == "terminals")
    assert FRAMES["fuses"]["find_components"]
    assert "component" not in FRAMES["fuses"]
    rises = [fuse["delta_similar_k"] for fuse in FACTS["fuses"]["to_be_found"]]
    assert rises[:2] == pytest.approx([0, 0], abs=0.5)  # twins, by design within half a kelvin
    assert rises[2] > 8


def test_arresters_differ_by_a_kelvin_and_a_half_and_carry_no_load() -> None:
    parts = FACTS["arresters"]["components"]
    assert [part["delta_similar_k"] for part in parts] == pytest.approx([0, 1.5, 0], abs=0.15)  # unevenness
    assert all(part["load_a"] is None for part in parts)
    assert FRAMES["arresters"]["group"] == "transformer-cell"
    assert FACTS["arresters"]["method"] == "voltage-driven"


def test_three_modules_of_ten_are_ill_each_in_its_own_way() -> None:
    parts, now = FACTS["pv-row"]["components"], truth("pump_station", "pv-row")
    ill = {part["pattern"]: part for part in parts if part["pattern"]}
    assert set(ill) == {"hot cell", "substring", "whole module"}
    healthy = np.median([part["max_c"] for part in parts if part["pattern"] is None])
    for part in parts:
        # brought from 850 to 1000 W/m²; both temperatures are rounded to 0.01 K
        assert part["delta_neighbours_k"] == pytest.approx((part["max_c"] - healthy) / 0.85, abs=0.02)
        assert (part["delta_neighbours_k"] > 2) == (part["pattern"] is not None)
    # A cell is a sixtieth of a module; a substring, of three, a third.  Outlines at 2 K of blurred edges add a little.
    shares = {
        defect["kind"]: defect["pixels"] / np.ptp(ill[defect["kind"]]["polygon"], axis=0).__add__(1).prod()
        for defect in now.facts["defects"]
    }
    assert shares == pytest.approx({"hot cell": 1 / 60, "substring": 1 / 3, "whole module": 1.0}, rel=0.5)


def test_every_asset_was_seen_or_the_survey_says_why_not() -> None:
    seen = {frame.get("asset") for frame in FRAMES.values()}
    for asset in SURVEY["asset"]:
        assert (asset["id"] in seen) != ("not_inspected" in asset)
        assert asset["description"]
        assert asset["location"]
        assert asset["criticality"] in (1, 2, 3)
    assert seen - {None} <= {asset["id"] for asset in SURVEY["asset"]}


def test_the_stations_own_scheme_is_a_whole_one() -> None:
    assert "site-scheme.toml" in SURVEY["survey"]["criteria"]
    scheme = tomllib.loads((FOLDER / "site-scheme.toml").read_text("utf-8"))
    edges = [one.get("below") for one in scheme["classes"]], [one.get("at_least") for one in scheme["classes"]]
    assert edges[0][:-1] == edges[1][1:]
    assert (edges[0][-1], edges[1][0]) == (None, None)
