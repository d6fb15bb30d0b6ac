"""Made-up but complete records of a report: invented site, invented numbers, nothing computed by the package."""

from __future__ import annotations

from dataclasses import replace

import cv2
import numpy as np
import pytest
from report.buildings import envelope, rectangle, seasons
from report.switch_room import limit, lug, populations, repairs

from irsurvey.model import (
    Assessment,
    AssetReport,
    Band,
    BudgetTerm,
    Camera,
    ChecklistItem,
    ComponentReport,
    ConditionCheck,
    Detectable,
    Estimate,
    Finding,
    Flip,
    FrameReport,
    FrameTask,
    Indication,
    Input,
    Maps,
    NextMeasurement,
    Quantity,
    RatedLoad,
    ReferenceReport,
    Report,
    Scene,
    Shape,
    Signal,
    Source,
    TemperatureSummary,
)

SHA = "5f2b" * 16


def budget(*rows: tuple[str, float, float], of: float) -> tuple[BudgetTerm, ...]:
    """Terms of a number with standard uncertainty `of`, from (input, its u, sensitivity) and uncorrelated."""
    return tuple(BudgetTerm(name, u, slope, abs(slope * u), (slope * u / of) ** 2) for name, u, slope in rows)


def finding(frame: str, label: int, box: tuple[int, int, int, int], **fields: object) -> Finding:
    left, top, right, bottom = box
    values = {
        "id": f"{frame}-{label}",
        "key": f"{frame}@{(left + right) // 2},{(top + bottom) // 2}",
        "label": label,
        "sense": "cold",
        "polygon": rectangle(*box),
        "pixels": (right - left + 1) * (bottom - top + 1),
        "area_m2": Estimate(0.4187654321, 0.0213),
        "extreme_c": Estimate(15.4312, 0.61),
        "mean_c": Estimate(16.0208, 0.6),
        "delta_k": Estimate(-3.1275, 0.142),
        "mean_delta_k": Estimate(-2.5341, 0.118),
        "heat_flux_w_m2": Estimate(38.21, 4.4),
        "reference_heat_flux_w_m2": Estimate(17.9, 4.1),
        "excess_heat_w_m2": Estimate(20.31, 1.6),
        "excess_heat_w": Estimate(8.505, 0.83),
        "excess_heat_w_k": Estimate(0.4252, 0.0415),
        "heat_flux_terms_w_m2": {"convection": Estimate(14.12, 2.1), "radiation:mean_radiant": Estimate(24.09, 3.3)},
        "u_value_w_m2k": Estimate(1.912, 0.23),
        "u_value_increase_w_m2k": Estimate(1.016, 0.081),
        "u_value_from_contrast_w_m2k": None,
        "temperature_factor": Estimate(0.721, 0.031),
        "temperature_factor_at_0_25": Estimate(0.573, 0.041),
        "dew_point_margin_k": Estimate(5.412, 0.71),
        "mould_margin_k": Estimate(1.871, 0.74),
        "condensation_probability": 0.0,
        "mould_probability": 0.0131,
        "pressure_change_k": None,
        "refusals": {
            "u_value_from_contrast_w_m2k": "no U-value is stated for the element: state u_value_w_m2k and run again"
        },
        "shape": Shape(2.4, 0.31, ((left + right) / 2, (top + bottom) / 2), (left + 3.0, top + 3.0)),
        "assessments": (
            Assessment(
                "building-delta",
                "marked deviation",
                2,
                "Mean deviation of 2.5 K inside at 20 K between indoor and outdoor air.",
                {"slight deviation": 0.003, "marked deviation": 0.9971},
                "invented for this test",
                governs=True,
                verdict="fail",
            ),
            Assessment(
                "temperature-factor",
                "above the limit",
                0,
                "f = 0.72 with the heat-transfer resistance seen by the camera; limit 0.70.",
                {"below the limit": 0.25, "above the limit": 0.75},
                "invented for this test",
                verdict="conditional pass",
            ),
        ),
        "exceeds_threshold": 0.9991,
        "urgency": 2,
        "outcome": "act",
        "flips": (),
        "budgets": {
            "delta_k": budget(
                ("reflected_c", 1.0, 0.105),
                ("emissivity", 0.02, -3.7),
                (f"noise_k:{frame}-{label} spot", 0.046, 1.09),
                ("shading_k", 0.1, 0.21),
                ("camera_gain", 0.005, -1.4),
                of=0.142,
            ),
            "heat_flux_w_m2": budget(
                ("camera_offset_k", 0.58, 6.4), ("mean_radiant_c", 0.5, -4.1), ("convection_factor", 0.1, 9.7), of=4.4
            ),
        },
        "indication": Indication(
            "missing or displaced insulation",
            "Consistent with missing or displaced insulation; verify by borescope or opening up at one point.",
            {
                "edge_sharpness_per_pixel": 0.31,
                "elongation": 2.4,
                "changed_with_pressure": 0.0,
                "plateau_share": 0.83,
                "gap_to_opening_px": float("nan"),
            },
            "borescope or opening up at one point",
        ),
        "flags": (),
    }
    return Finding(**(values | fields))  # type: ignore[arg-type]


def component(name: str, box: tuple[int, int, int, int], **fields: object) -> ComponentReport:
    left, top, right, bottom = box
    values = {
        "name": name,
        "key": f"S01@{(left + right) // 2},{(top + bottom) // 2}",
        "group": "feeder lugs",
        "phase": name.split()[1] if " " in name else None,
        "load_a": 200.0,
        "rated_a": 400.0,
        "polygon": rectangle(*box),
        "pixels": (right - left + 1) * (bottom - top + 1),
        "max_c": Estimate(35.12, 1.1),
        "mean_c": Estimate(33.4, 1.0),
        "delta_similar_k": Estimate(0.0, 0.0),
        "similar_to": None,
        "delta_ambient_k": Estimate(9.12, 1.3),
        "delta_similar_in_calm_k": None,
        "delta_ambient_in_calm_k": None,
        "relative_difference_percent": None,
        "above_limit_k": None,
        "above_allowed_k": None,
        "delta_neighbours_k": None,
        "heat_flux_w_m2": Estimate(96.1, 15.0),
        "is_found": False,
        "limit": None,
        "joint": None,
        "trend": None,
        "indication": None,
        "at_rated_load": None,
        "assessments": (
            Assessment(
                "twins",
                "no deficiency",
                0,
                "Within 1 K of its coolest twin at 50 % load.",
                {"no deficiency": 0.999, "possible deficiency": 0.001},
                "invented for this test",
                governs=True,
                verdict="pass",
            ),
        ),
        "urgency": 0,
        "cleared": True,
        "outcome": "cleared",
        "flips": (),
        "budgets": {
            "delta_ambient_k": budget(("camera_offset_k", 1.15, 1.05), ("ambient_c", 0.5, -1.0), of=1.3),
            "delta_similar_k": (),
        },
        "flags": (),
    }
    return ComponentReport(**(values | fields))  # type: ignore[arg-type]


def frame(id_: str, **fields: object) -> FrameReport:
    values = {
        "id": id_,
        "status": "analysed",
        "reason": None,
        "kind": "building",
        "claim": "quantitative",
        "claim_reason": "20 K between indoor and outdoor air, held for a day; no sun, no rain.",
        "group": "living-room",
        "label": "Living room, north wall",
        "asset": "W-N-01",
        "notes": "Curtains drawn back two hours before.",
        "taken": "2026-01-18T07:12:00+01:00",
        "source": Source(f"frames/{id_.lower()}.tif", SHA, (240, 320), "uint16"),
        "inputs": {
            "emissivity": Input(0.92, 0.02, "survey", "survey"),
            "reflected_c": Input(20.5, 1.0, "measured in frame", "measured in frame"),
            "air_c": Input(21.0, 0.5, "log", "default"),
            "relative_humidity_percent": Input(45.0, 5.0, "default"),
            "distance_m": Input(2.5, 0.05, "frame", "survey"),
            "pressure_hpa": Input(1013.25, 0.0, "survey"),
            "emissivity:cover plate": Input(0.3, 0.05, "material table", "material table"),
            "shading_k": Input(0.0, 0.1, "default"),
            "outline_px": Input(0.0, 1.0, "default"),
        },
        "uncertainty": "first-order",
        "draws": None,
        "humid_air": {"dew_point_c": 8.6, "vapour_density_g_m3": 8.25},
        "atmosphere_transmittance": 0.9934,
        "radiance_table_error_k": 0.0021,
        "detectable": Detectable(0.35, 0.4, 0.0010, 25, 0.06, 0.1),
        "temperature": TemperatureSummary(15.1, 19.8, 18.2, 18.4, 0, 0),
        "reference": ReferenceReport(
            "polygon",
            18.55,
            0.62,
            0.09,
            12000,
            0.31,
            Estimate(17.93, 4.1),
            {"convection": Estimate(6.125, 1.9), "radiation:mean_radiant": Estimate(11.81, 2.9)},
            Estimate(0.1308, 0.0124),
            Estimate(0.8965, 0.21),
            Estimate(0.9423, 0.34),
            {},
            rectangle(15, 20, 90, 220),
        ),
        "findings": (),
        "components": (),
        "element": None,
        "room_air": None,
        "surface_at_risk": (),
        "strips": (),
        "pair": None,
        "flags": (),
    }
    return FrameReport(**(values | fields))  # type: ignore[arg-type]


@pytest.fixture
def report() -> Report:
    """Two frames of a house (one clean), two of a switch room, one that could not be read."""
    wall = frame(
        "F01",
        findings=(
            finding("F01", 1, (150, 60, 209, 119), pressure_change_k=Estimate(0.051, 0.11)),
            finding(
                "F01",
                2,
                (250, 200, 319, 239),
                flags=("touches frame edge", "fragile"),
                urgency=1,
                flips=(
                    Flip("reflected_c", -1.27, "slight deviation"),
                    Flip("emissivity", 0.0213, "slight deviation"),
                    Flip("relative_humidity_percent", 9.1, "severe deviation"),
                ),
                indication=None,
                pressure_change_k=Estimate(-1.62, 0.11),
            ),
        ),
        flags=("corner shading",),
        **envelope(),
    )
    clean = frame("F02", label="Living room, east wall", asset=None, notes="", reference=wall.reference)
    lost = frame(
        "F03",
        status="failed",
        reason="f03.tif: expected a readable TIFF, got a file that ends after 4096 bytes; copy it again",
        claim="not valid",
        claim_reason="the frame could not be read",
        source=Source("frames/f03.tif", None, None, None),
        inputs={},
        humid_air={},
        uncertainty=None,
        atmosphere_transmittance=None,
        radiance_table_error_k=None,
        detectable=None,
        temperature=None,
        reference=None,
    )
    urgent = Assessment(
        "twins",
        "major discrepancy",
        4,
        "36.4 K above its coolest twin at the same load: above 15 K.",
        {"probable deficiency": 0.0, "major discrepancy": 1.0},
        "invented for this test",
        governs=True,
        verdict="fail",
    )
    board = frame(
        "S01",
        kind="electrical",
        claim="qualitative",
        claim_reason="load 50 % of rated",
        group="switch room",
        label="Feeder board 2",
        asset="FB-2",
        notes="",
        source=Source("frames/s01.npy", SHA, (480, 640), "float32"),
        inputs={"emissivity": Input(0.93, 0.02, "survey"), "ambient_c": Input(26.0, 0.5, "survey")},
        reference=None,
        uncertainty="monte-carlo",
        draws=20_000,
        components=(
            component("phase 1 lug", (110, 140, 169, 219)),
            component(
                "phase 2 lug",
                (290, 140, 349, 219),
                max_c=Estimate(71.5, 1.4, (68.9, 74.4)),
                delta_similar_k=Estimate(36.38, 0.9, (34.71, 38.22)),
                similar_to="phase 1 lug",
                delta_ambient_k=Estimate(45.5, 1.4),
                at_rated_load=RatedLoad(Band(110.3, 145.5), Band(137.9, 182.0)),
                assessments=(urgent,),
                urgency=4,
                cleared=False,
                outcome="act",
            ),
            component(
                "phase 3 bare bar",
                (470, 140, 529, 219),
                delta_similar_k=None,
                assessments=(
                    Assessment("twins", None, None, "Too reflective for a claim.", {}, "invented for this test"),
                ),
                urgency=None,
                cleared=False,
                outcome="not cleared",
                budgets={},
                flags=("too reflective for a claim",),
            ),
        ),
        findings=(
            finding(
                "S01",
                1,
                (300, 330, 329, 349),
                sense="hot",
                extreme_c=Estimate(150.0, None),
                delta_k=None,
                mean_delta_k=Estimate(47.2, None),
                heat_flux_w_m2=None,
                heat_flux_terms_w_m2={},
                u_value_w_m2k=None,
                u_value_increase_w_m2k=None,
                temperature_factor=None,
                temperature_factor_at_0_25=None,
                dew_point_margin_k=None,
                mould_margin_k=None,
                condensation_probability=None,
                mould_probability=None,
                excess_heat_w_k=None,
                refusals={},
                flags=("saturated", "size-limited"),
                exceeds_threshold=None,
                budgets={},
                urgency=4,
                assessments=(),
                indication=None,
            ),
        ),
        temperature=TemperatureSummary(24.4, 71.9, 27.0, 26.4, 0, 40),
    )
    return Report(
        format=1,
        tool={"name": "irsurvey", "version": "0.0.test"},
        survey={
            "format": 1,
            "survey": {
                "title": "Demo house and switch room",
                "kind": "building",
                "date": "2026-01-18",
                "surveyor": "N. N. (invented)",
                "limitations": "North side of the roof was not reached.",
            },
            "camera": {"band_um": [7.5, 13.0]},
            "element": [{"id": "north-wall", "description": "North wall, solid brick"}],
        },
        claim="not valid",
        claim_reason="the frame F03 could not be read",
        conditions_review=(
            ConditionCheck("living-room", "indoor–outdoor air", "≥ 10 K", 20.0, "met", "invented for this test"),
            ConditionCheck("living-room", "wind", "≤ 5 m/s", None, "not recorded", "invented for this test"),
            ConditionCheck("switch room", "load", "≥ 40 %", 31.0, "not met", "invented for this test", "qualitative"),
        ),
        next_visit=(
            NextMeasurement(
                "Put crumpled foil beside it and in the frame",
                ("F01-2", "S01@499,179"),
                "It gives its reflected apparent temperature: leaves reflected uncertain by ±1.2 K.",
            ),
            NextMeasurement("Confirm the reference area", ("S01-1",), "It gives a reference somebody answers for."),
        ),
        assets=(
            AssetReport("W-N-01", "North wall", "Living room", 2, True, None, ("F01",)),
            AssetReport("FB-3", "Feeder board 3", "Switch room", 1, False, "blocked by scaffolding", ()),
        ),
        frames=(wall, clean, lost, board),
        repairs=(),
        populations=(),
        seasons=seasons(),
        checklist=(
            ChecklistItem("client", "simplified report", False, "survey.client"),
            ChecklistItem("equipment, its make and serial number", "full report", True, "sheets of the frames"),
        ),
        cautions=("One invented caution.",),
    )


@pytest.fixture
def switch_room(report: Report) -> Report:
    """The electrical frame alone, with all that a maintenance crew is told: repairs, limits, joints, trends."""
    board = report.frames[3]
    first, second, third = board.components
    second = replace(second, **lug())
    third = replace(third, is_found=True, limit=limit(), flags=(*third.flags, "found, not drawn"))
    board = replace(board, components=(first, second, third), claim="quantitative", claim_reason="")
    return replace(
        report,
        claim="quantitative",
        claim_reason="",
        frames=(board,),
        repairs=repairs(),
        populations=populations(),
        seasons=(),
        checklist=(),
        next_visit=report.next_visit[1:],
        conditions_review=report.conditions_review[2:],
        cautions=(),
    )


def smooth_noise(shape: tuple[int, int], level: float, noise: float) -> np.ndarray:
    return (level + np.random.default_rng(7).normal(0, noise, shape)).astype(np.float32)


@pytest.fixture
def wall_maps() -> Maps:
    """Maps of frame F01, 240 × 320: a wall with a gradient, two cold patches, reference at the left."""
    temperature = smooth_noise((240, 320), 18.5, 0.04) + np.linspace(0, 0.5, 320, dtype=np.float32)
    labels = np.zeros((240, 320), np.uint16)
    labels[60:120, 150:210] = 1
    labels[200:240, 250:320] = 2
    drop = cv2.GaussianBlur((labels == 1) * np.float32(-3) + (labels == 2) * np.float32(-1.6), (0, 0), 1.5)
    reference = np.zeros((240, 320), bool)
    reference[20:221, 15:91] = True
    change = smooth_noise((240, 320), 0.0, 0.05) + cv2.GaussianBlur((labels == 2) * np.float32(-1.6), (0, 0), 1.5)
    change[:, :4] = np.nan  # not seen in the other frame
    return Maps(temperature + drop, labels, reference, change)


@pytest.fixture
def board_maps() -> Maps:
    """Maps of frame S01, 480 × 640: three lugs, the middle one hot, and a saturated spot (NaN)."""
    temperature = smooth_noise((480, 640), 26.0, 0.05)
    for left, rise in ((110, 9.0), (290, 45.0), (470, 8.0)):
        temperature[140:220, left : left + 60] += rise
    temperature = cv2.GaussianBlur(temperature, (0, 0), 2)
    labels = np.zeros((480, 640), np.uint16)
    labels[330:350, 300:330] = 1
    temperature[335:345, 305:325] = np.nan
    return Maps(temperature, labels, np.zeros((480, 640), bool))


@pytest.fixture
def tasks() -> tuple[FrameTask, ...]:
    camera = Camera("wide", (7.5e-6, 13e-6), Signal("apparent-temperature"), ifov=1e-3, noise=0.05)
    scene = Scene((Quantity("emissivity", 0.92, 0.02, "survey"),))
    return tuple(
        FrameTask(
            *(name, f"frames/{name}.tif", f"/secret/place/{name}.tif", "building", "envelope", camera, scene),
            viewed_from="inside",
        )
        for name in ("F01", "F02", "F03", "S01")
    )
