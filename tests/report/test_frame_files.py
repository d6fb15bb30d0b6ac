"""The files of a frame: what other programs read is what was measured, and a file is whole or not there."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import cv2
import numpy as np
import pytest
import tifffile
from PIL import Image

from irsurvey.model import Maps, Report
from irsurvey.report import frame_files, links


def by_tifffile(path: Path) -> np.ndarray:
    return tifffile.imread(path)


def by_opencv(path: Path) -> np.ndarray:
    return cv2.imread(str(path), cv2.IMREAD_UNCHANGED)


def by_pillow(path: Path) -> np.ndarray:
    with Image.open(path) as image:
        return np.asarray(image)


@pytest.mark.parametrize("reader", [by_tifffile, by_opencv, by_pillow])
def test_three_programs_read_the_same_maps(report: Report, board_maps: Maps, tmp_path: Path, reader: object) -> None:
    flux = np.float32(5) * (board_maps.temperature_c - np.float32(20))
    u = np.where(np.isnan(board_maps.temperature_c), np.nan, np.float32(0.7)).astype(np.float32)
    folder = frame_files.write(report.frames[3], replace(board_maps, heat_flux=flux, u_temperature=u), tmp_path)
    assert folder == tmp_path / "frames" / "S01"
    for name, expected in (
        ("temperature.tif", board_maps.temperature_c),
        ("findings.tif", board_maps.labels),
        ("heat_flux.tif", flux),
        ("u_temperature.tif", u),
    ):
        found = reader(folder / name)  # type: ignore[operator]
        assert found.dtype == expected.dtype
        assert np.array_equal(found, expected, equal_nan=expected.dtype.kind == "f")  # bit for bit, NaN kept


def test_exactly_the_named_files_are_written(report: Report, board_maps: Maps, tmp_path: Path) -> None:
    some = board_maps.temperature_c
    maps = replace(board_maps, heat_flux=some, u_temperature=some, change=some - np.float32(26))
    folder = frame_files.write(report.frames[3], maps, tmp_path)
    assert sorted(path.name for path in folder.iterdir()) == sorted({*frame_files.NAMES} - {links.SHEET})


@pytest.mark.parametrize("kind", ["heat_flux", "u_temperature"])
def test_a_map_of_an_earlier_run_does_not_stay(report: Report, board_maps: Maps, tmp_path: Path, kind: str) -> None:
    folder = frame_files.write(report.frames[3], replace(board_maps, **{kind: board_maps.temperature_c}), tmp_path)
    assert (folder / f"{kind}.tif").exists()
    frame_files.write(report.frames[3], board_maps, tmp_path)
    assert not (folder / f"{kind}.tif").exists()


def test_a_picture_of_changes_of_an_earlier_run_does_not_stay(report: Report, wall_maps: Maps, tmp_path: Path) -> None:
    folder = frame_files.write(report.frames[0], wall_maps, tmp_path)
    assert (folder / "change.png").exists()
    frame_files.write(report.frames[0], replace(wall_maps, change=None), tmp_path)
    assert not (folder / "change.png").exists()


def test_a_picture_that_fails_leaves_nothing_half_written(
    report: Report, board_maps: Maps, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def half(_image: Image.Image, path: Path) -> None:
        path.write_bytes(b"half")
        raise RuntimeError("killed")

    monkeypatch.setattr(frame_files.picture, "save", half)
    with pytest.raises(RuntimeError, match="killed"):
        frame_files.write(report.frames[3], board_maps, tmp_path)
    assert sorted(path.name for path in (tmp_path / "frames" / "S01").iterdir()) == ["findings.tif", "temperature.tif"]


def test_the_same_frame_gives_the_same_bytes(report: Report, board_maps: Maps, tmp_path: Path) -> None:
    first = frame_files.write(report.frames[3], board_maps, tmp_path / "a")
    second = frame_files.write(report.frames[3], board_maps, tmp_path / "b")
    for path in first.iterdir():
        assert path.read_bytes() == (second / path.name).read_bytes()


def test_another_colormap_changes_the_picture_alone(report: Report, wall_maps: Maps, tmp_path: Path) -> None:
    first = frame_files.write(report.frames[0], wall_maps, tmp_path / "a")
    second = frame_files.write(report.frames[0], wall_maps, tmp_path / "b", colormap="viridis")
    same = [path.name for path in first.iterdir() if path.read_bytes() == (second / path.name).read_bytes()]
    assert sorted(same) == ["change.png", "findings.tif", "temperature.tif"]
