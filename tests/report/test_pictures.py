"""Pictures in the page: the part of a frame around what is named, a photograph and nothing that goes along with it."""

from __future__ import annotations

import io
from base64 import b64decode
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from irsurvey.model import FrameTask, Maps, Report
from irsurvey.report import frame_files
from irsurvey.report.pictures import THUMBNAIL_SIDE, Picture, around, photograph, small


def opened(picture: Picture | None) -> Image.Image:
    assert picture
    return Image.open(io.BytesIO(b64decode(picture.uri.partition(",")[2])))


def of(task: FrameTask, path: Path) -> FrameTask:
    return replace(task, photo_path=str(path))


def test_a_thumbnail_is_the_part_of_the_picture_around_what_is_named(
    switch_room: Report, board_maps: Maps, tmp_path: Path
) -> None:
    board = switch_room.frames[0]
    frame_files.write(board, board_maps, tmp_path)
    hot = opened(around(board, board.components[1].polygon, "hot", tmp_path))
    cool = opened(around(board, board.components[0].polygon, "cool", tmp_path))
    assert max(hot.size) <= THUMBNAIL_SIDE
    hot_middle, cool_middle = (
        np.asarray(image)[image.height // 2, image.width // 2].astype(int) for image in (hot, cool)
    )
    assert hot_middle[:2].min() > 180  # the light end of the scale is yellow
    assert cool_middle[:2].max() < 120  # the dark end is blue


@pytest.mark.parametrize("corner", [(0, 0), (620, 0), (0, 460), (620, 460)])
def test_a_part_in_a_corner_is_shown_without_the_scale_and_without_what_lies_outside(
    switch_room: Report, board_maps: Maps, tmp_path: Path, corner: tuple[int, int]
) -> None:
    board = switch_room.frames[0]
    frame_files.write(board, board_maps, tmp_path)
    x, y = corner
    polygon = ((x, y), (x + 19, y), (x + 19, y + 19), (x, y + 19))
    image = opened(around(board, polygon, "", tmp_path))
    assert image.size == (256, 192)  # 0.4 of 640 × 480
    # the scale is on white paper, what lies outside a picture is black: neither fills a row or a column
    pixels = np.asarray(image).astype(int)
    for edge in (pixels[0], pixels[-1], pixels[:, 0], pixels[:, -1]):
        assert not (edge.min(axis=1) > 200).all()
        assert not (edge.max(axis=1) < 8).all()


def test_a_photograph_is_upright_small_and_tells_nothing_of_where_it_was_taken(
    tasks: tuple[FrameTask, ...], tmp_path: Path
) -> None:
    path = tmp_path / "photo.jpg"
    exif = Image.Exif()
    exif[0x0112] = 6  # orientation: to be turned by a quarter (EXIF 2.3, tag 274)
    exif[0x010E] = "taken at a secret place"
    Image.fromarray(np.full((600, 900, 3), 90, np.uint8)).save(path, exif=exif)
    assert b"secret place" in path.read_bytes()
    picture = photograph(of(tasks[0], path), 300)
    image = opened(picture)
    assert image.size == (200, 300)
    assert not image.getexif()
    assert picture
    assert b"secret" not in b64decode(picture.uri.partition(",")[2])
    assert picture.words == "Photograph of frame F01"


@pytest.mark.parametrize("content", [b"", b"no picture", b"\xff\xd8\xff\xe0 cut off", b"GIF89a" + bytes(40)])
def test_what_is_no_photograph_is_left_out(tasks: tuple[FrameTask, ...], tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "photo.jpg"
    path.write_bytes(content)
    assert photograph(of(tasks[0], path), 300) is None
    assert photograph(of(tasks[0], tmp_path / "missing.jpg"), 300) is None
    assert photograph(tasks[0], 300) is None


def test_a_photograph_that_claims_to_be_huge_is_not_opened(tasks: tuple[FrameTask, ...], tmp_path: Path) -> None:
    path = tmp_path / "bomb.png"
    Image.new("1", (14_000, 14_000)).save(path)  # 24 kB that would become 600 MB
    assert path.stat().st_size < 100_000
    assert photograph(of(tasks[0], path), 300) is None


def test_a_photograph_with_transparency_or_a_palette_is_shown(tasks: tuple[FrameTask, ...], tmp_path: Path) -> None:
    for mode in ("RGBA", "P", "L", "1"):
        path = tmp_path / f"{mode}.png"
        Image.new(mode, (400, 200)).save(path)
        assert opened(photograph(of(tasks[0], path), 100)).size == (100, 50)


def test_a_small_picture_is_the_whole_frame_without_its_scale(report: Report, wall_maps: Maps, tmp_path: Path) -> None:
    wall = report.frames[0]
    frame_files.write(wall, wall_maps, tmp_path)
    image = opened(small(wall, 240, tmp_path))
    assert image.size == (240, 180)  # 320 × 240 pixels, none beside them
    pixels = np.asarray(image.convert("RGB")).astype(int)
    assert pixels[90, 70, 0] > 150  # the wall: the warm end
    assert pixels[70, 135, 0] < 60  # the middle of the coldest patch: the cold end
    assert small(report.frames[2], 240, tmp_path) is None  # a frame that failed
    assert small(report.frames[3], 240, tmp_path) is None  # one whose picture is gone
