"""The data of a frame in the page are those of its report, to a hundredth of a kelvin, and safe to stand there."""

from __future__ import annotations

import json
import zlib
from base64 import b64decode
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
import tifffile
from live.runs import Run

from irsurvey.constants import ZERO_CELSIUS
from irsurvey.geometry.polygons import mask
from irsurvey.report import live
from irsurvey.report.inks import COLORMAP, LEVELS, palette
from irsurvey.report.live.payload import payload

EXACT = 1e-3  # K: float32 temperatures are good to 0.03 mK, merging an area's values to less than 1 mK


def both(house: Run, pumps: Run) -> list[tuple[Run, Any]]:
    return [(run, frame) for run in (house, pumps) for frame in run.report.frames]


def data_of(run: Run, id_: str) -> dict[str, Any]:
    data = payload(run.frame(id_), run.task(id_), run.out)
    assert data is not None
    return data


def unpacked(data: dict[str, Any]) -> np.ndarray[Any, Any]:
    """The map [°C] by the description of the format, pixel after pixel."""
    packed, size = data["map"], data["rows"] * data["columns"]
    stream = zlib.decompress(b64decode(packed["data"]))
    levels = np.frombuffer(stream[: 2 * packed["count"]], "<u2")
    folded = np.frombuffer(stream[2 * packed["count"] :], np.uint8).reshape(2, size).T @ np.array([1, 256])
    differences = np.where(folded % 2, -(folded + 1) // 2, folded // 2).reshape(data["rows"], data["columns"])
    index = np.cumsum(differences, axis=1) % 65_536
    values = np.concatenate([[np.nan], packed["low"] + packed["step"] * levels])
    return np.asarray(values[index])


def functional(parts: list[dict[str, Any]], number: int = 0) -> float:
    return sum(float(np.dot(part["w"][number], part["t"])) for part in parts)


def test_maps_are_those_of_the_run_to_half_a_hundredth(house: Run, pumps: Run) -> None:
    for run, frame in both(house, pumps):
        t = tifffile.imread(run.out / "frames" / frame.id / "temperature.tif").astype(float)
        found = unpacked(data_of(run, frame.id))
        assert np.array_equal(np.isnan(found), np.isnan(t)), frame.id
        assert np.nanmax(np.abs(found - t)) <= 0.005 + 1e-6, frame.id  # half a step, and float32


def test_areas_give_the_numbers_of_the_report(house: Run, pumps: Run) -> None:
    checked = 0
    for run, frame in both(house, pumps):
        data = data_of(run, frame.id)
        shown = (*data["findings"], *data["components"])
        for item, reported in zip(shown, (*frame.findings, *frame.components), strict=True):
            extreme = getattr(reported, "extreme_c", None) or reported.max_c
            if item["areas"] is None or extreme is None:
                assert "saturated" in reported.flags
                continue
            assert functional(item["areas"]["spot"]) - ZERO_CELSIUS == pytest.approx(extreme.value, abs=EXACT, rel=0)
            assert functional(item["areas"]["whole"]) - ZERO_CELSIUS == pytest.approx(
                reported.mean_c.value, abs=EXACT, rel=0
            )
            checked += 1
    assert checked > 12


def test_the_reference_plane_gives_the_differences_of_the_report(house: Run) -> None:
    """At the centre of each finding the plane is its mean minus its mean ΔT."""
    checked = 0
    for frame in house.report.frames:
        data = data_of(house, frame.id)
        for item, finding in zip(data["findings"], frame.findings, strict=True):
            plane, (x, y) = data["reference"], item["areas"]["whole_at"]
            level = plane["level"] - ZERO_CELSIUS
            level += plane["slope"][0] * (x - plane["centre"][0]) + plane["slope"][1] * (y - plane["centre"][1])
            left, top, right, bottom = plane["box"]
            inside = 2 * left - right <= x <= 2 * right - left and 2 * top - bottom <= y <= 2 * bottom - top
            if inside and finding.mean_c and finding.mean_delta_k:
                expected = finding.mean_c.value - finding.mean_delta_k.value
                assert level == pytest.approx(expected, abs=EXACT, rel=0), finding.id
                checked += 1
    assert checked >= 3


def test_weights_of_the_reference_are_those_of_its_fit(house: Run) -> None:
    """Moving every pixel of it alike moves the level alone."""
    for frame in house.report.frames:
        parts = data_of(house, frame.id)["reference"]["parts"]
        sums = [sum(sum(part["w"][number]) for part in parts) for number in range(3)]
        assert sums == pytest.approx([1, 0, 0], abs=1e-4)  # six figures a weight, 24 of them


def test_a_frame_of_usual_size_stays_below_90_kb(house: Run, pumps: Run) -> None:
    for run, frame in both(house, pumps):
        text = live.frame_data(frame, run.task(frame.id), run.out)
        assert text is not None
        assert len(text) <= 90_000 * (frame.source.shape[0] * frame.source.shape[1]) / (240 * 320) + 15_000


def test_the_same_run_gives_the_same_bytes(house: Run) -> None:
    frame, task = house.frame("hall-window"), house.task("hall-window")
    assert live.frame_data(frame, task, house.out) == live.frame_data(frame, task, house.out)
    assert live.page_data(house.report, house.tasks) == live.page_data(house.report, house.tasks)


def test_no_text_of_a_survey_can_end_the_script_it_stands_in(pumps: Run) -> None:
    frame, task = pumps.frame("pump-one"), pumps.task("pump-one")
    name = "</script><script>alert(1)</script><!--\u2028\"'"
    hostile = replace(frame, components=tuple(replace(one, name=f"{name}{one.name}") for one in frame.components))
    text = live.frame_data(hostile, task, pumps.out)
    assert text is not None
    assert not set("<>&\u2028\u2029") & set(text)
    assert json.loads(text)["components"][0]["name"].startswith(name)


def test_no_path_of_the_machine_is_in_the_page(house: Run) -> None:
    for frame in house.report.frames:
        text = live.frame_data(frame, house.task(frame.id), house.out)
        assert str(house.out.parent) not in (text or "")


def test_a_frame_without_a_map_has_no_data(house: Run) -> None:
    frame, task = house.frame("hall-window"), house.task("hall-window")
    assert live.frame_data(replace(frame, status="failed"), task, house.out) is None
    assert live.frame_data(frame, task, house.out / "elsewhere") is None
    assert live.frame_data(frame, None, house.out) is None


def test_a_frame_of_which_nothing_may_be_concluded_tells_no_heat(house: Run) -> None:
    frame, task = house.frame("hall-window"), house.task("hall-window")
    data = payload(replace(frame, claim="not valid"), task, house.out)
    assert data is not None
    assert data["around"]["film"]["values"] == []


def test_surfaces_of_their_own_optics_are_told_apart(house: Run) -> None:
    data, task = data_of(house, "north-meter"), house.task("north-meter")
    optics = np.frombuffer(zlib.decompress(b64decode(data["optics"])), np.uint8).reshape(data["rows"], data["columns"])
    (surface,) = [one for one in task.surfaces if one.emissivity != "emissivity"]
    assert np.array_equal(optics == 1, mask(surface.polygon, optics.shape))
    assert data["optics_names"][1]["emissivity"] == surface.emissivity


def test_no_colour_of_the_report_s_scale_is_an_ink() -> None:
    """The page tells what is drawn in a picture from its temperatures by colour."""
    entries = np.frombuffer(palette(COLORMAP), np.uint8).reshape(-1, 3).tolist()
    assert [entry for entry in entries[:LEVELS] if entry in entries[LEVELS:]] == []
