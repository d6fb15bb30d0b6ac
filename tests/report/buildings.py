"""What an invented frame and an invented survey tell of a building: moisture, a strip, a pair of frames, a season."""

from __future__ import annotations

from irsurvey.model import (
    Estimate,
    PairReport,
    PressureChange,
    RoomAir,
    SeasonReport,
    SeasonRow,
    StripReport,
    SurfaceAtRisk,
)


def rectangle(left: int, top: int, right: int, bottom: int) -> tuple[tuple[int, int], ...]:
    return ((left, top), (right, top), (right, bottom), (left, bottom))


def strip(name: str, **fields: object) -> StripReport:
    """A strip of 120 px across a bridge 40 px wide, a bell of 3.4 K."""
    values = {
        "name": name,
        "from_": (100.0, 150.0),
        "to": (220.0, 150.0),
        "width_px": 5,
        "length_m": Estimate(0.3, 0.006),
        "undisturbed_c": Estimate(18.55, 0.62),
        "undisturbed_gradient_k_per_m": Estimate(0.211, 0.093),
        "extreme_c": Estimate(15.17, 0.61),
        "temperature_factor": Estimate(0.7085, 0.031),
        "incidence_factor": Estimate(1.417, 0.047),
        "linear_transmittance_w_mk": Estimate(0.1123, 0.0241),
        "u_value_w_m2k": None,
        "refusals": {"u_value_w_m2k": "its U would be 128 % of it: ask for a larger difference of the airs"},
        "flags": ("ends still have a gradient",),
        "profile": tuple((float(x), 18.55 - 3.38 * 2.0 ** -(((x - 60) / 14) ** 2)) for x in range(121)),
    }
    return StripReport(**(values | fields))  # type: ignore[arg-type]


def envelope() -> dict[str, object]:
    """What frame F01 tells of an envelope."""
    return {
        "element": "north-wall",
        "room_air": RoomAir("measured", Estimate(1118.4, 71.2), Estimate(8.62, 0.93), Estimate(11.99, 0.95)),
        "surface_at_risk": (
            SurfaceAtRisk("condensation", Estimate(8.62, 0.93), 0.0, 0.0, 0.0012, 0.0, 0.0, 0.0041, 0.0),
            SurfaceAtRisk("mould", Estimate(11.99, 0.95), 0.031, 0.012, 0.084, 0.352, 0.121, 0.904, 0.62),
        ),
        "strips": (strip("ceiling edge"),),
        "pair": PairReport(
            "F02",
            -50.0,
            True,
            "",
            0.973,
            (3.21, -1.13),
            0.412,
            0.344,
            (
                PressureChange(
                    "cold", rectangle(250, 200, 319, 239), 2800, Estimate(0.31, 0.02), Estimate(-1.62, 0.11), "F01-2"
                ),
                PressureChange("cold", rectangle(100, 10, 119, 19), 200, Estimate(0.0021, 0.0004), None, None),
            ),
        ),
    }


def seasons() -> tuple[SeasonReport, ...]:
    """A heating season: two findings, the second too uncertain for its digits, and the wall as a whole."""
    return (
        SeasonReport(
            "heating",
            Estimate(3000.0, 300.0),
            "stated in the survey",
            0.9,
            0.12,
            "EUR",
            (
                SeasonRow(
                    "F01-1", "F01", Estimate(0.4252, 0.0415), Estimate(34.02, 4.91), Estimate(4.082, 0.72), False
                ),
                SeasonRow("F01-2", "F01", Estimate(0.13, 0.09), Estimate(10.4, 7.3), Estimate(1.248, 0.9), True),
            ),
            (
                SeasonRow(
                    "north-wall", "F01", Estimate(16.1, 3.9), Estimate(1288.0, 340.0), Estimate(154.6, 44.0), False
                ),
            ),
            SeasonRow("all findings", None, Estimate(0.5552, 0.1), Estimate(44.42, 8.8), Estimate(5.33, 1.15), False),
            None,
        ),
    )
