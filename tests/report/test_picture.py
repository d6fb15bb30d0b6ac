"""The annotated picture: colours that mean temperatures, inks that are reserved, extremes that stay visible."""

from __future__ import annotations

import io
import time
from dataclasses import replace
from pathlib import Path

import cv2
import matplotlib
import numpy as np
import pytest
from PIL import Image

from irsurvey.model import FrameReport, Maps, Report
from irsurvey.report import labels
from irsurvey.report.inks import DARK, LEVELS, LIGHT, UNMEASURABLE, lettering, palette
from irsurvey.report.labels import Label, component_mark, leader, place, put, strip_mark
from irsurvey.report.outlines import WIDTH
from irsurvey.report.picture import (
    MINIMUM_SPAN_K,
    NUMBERED,
    annotated,
    display_range,
    enlargement,
    save,
    shades,
)
from irsurvey.report.scale import LEAST_HEIGHT, round_step, strip


def relative_luminance(colours: np.ndarray) -> np.ndarray:
    """Relative luminance of sRGB colours 0…255, shape (n, 3) (WCAG 2.2, "relative luminance")."""
    part = colours / 255
    linear = np.where(part <= 0.04045, part / 12.92, ((part + 0.055) / 1.055) ** 2.4)
    return linear @ np.array([0.2126, 0.7152, 0.0722])


def has_tag(picture: np.ndarray, label: Label) -> bool:
    """Whether the whole tag of a label stands somewhere in the picture, pixel by pixel."""
    tag = label.tag()
    windows = np.lib.stride_tricks.sliding_window_view(picture, tag.shape)
    return bool((windows == tag).all(axis=(2, 3)).any())


@pytest.fixture
def wall(report: Report) -> FrameReport:
    return report.frames[0]


@pytest.fixture
def board(report: Report) -> FrameReport:
    return report.frames[3]


def test_the_picture_is_palette_indexed(wall: FrameReport, wall_maps: Maps) -> None:
    picture = annotated(wall, wall_maps)
    assert picture.mode == "P"
    assert picture.size == (2 * 320 + 92, 2 * 240)  # twice its pixels, and the scale beside it


def test_temperatures_have_the_colours_of_matplotlib(wall: FrameReport, wall_maps: Maps) -> None:
    for name in ("cividis", "inferno"):
        colours = np.array(annotated(wall, wall_maps, colormap=name).getpalette()).reshape(-1, 3)[:LEVELS]
        expected = matplotlib.colormaps[name](np.linspace(0, 1, LEVELS))[:, :3] * 255
        np.testing.assert_allclose(colours, expected, rtol=0, atol=0.5)  # a colour is stored in whole steps


def test_hotter_is_lighter_in_every_print_and_for_every_eye() -> None:
    colours = np.frombuffer(palette("cividis"), np.uint8).reshape(-1, 3)[:LEVELS]
    # neighbours may round to the same step; over eight entries the lightness always grows
    assert (relative_luminance(colours)[8:] > relative_luminance(colours)[:-8]).all()


def test_the_inks_are_no_temperature_colours() -> None:
    colours = [tuple(colour) for colour in np.frombuffer(palette("cividis"), np.uint8).reshape(-1, 3)]
    assert len(colours) == 256
    assert not set(colours[:LEVELS]) & set(colours[LEVELS:])
    assert colours[LIGHT] == (255, 255, 255)


def test_light_and_dark_ink_are_legible_on_each_other() -> None:
    light, dark = relative_luminance(np.frombuffer(palette("cividis"), np.uint8).reshape(-1, 3)[[LIGHT, DARK]])
    assert (light + 0.05) / (dark + 0.05) >= 7  # WCAG 2.2, 1.4.6: enhanced contrast


def test_what_is_not_drawn_over_has_the_shade_of_its_temperature(wall: FrameReport, wall_maps: Maps) -> None:
    picture = np.asarray(annotated(wall, wall_maps))[:, :640]
    low, high = display_range(wall_maps.temperature_c, wall_maps.labels)
    exact = np.clip((wall_maps.temperature_c.astype(float) - low) / (high - low), 0, 1) * (LEVELS - 1)
    untouched = picture < LEVELS
    # half a shade by rounding, 0.01 for single precision
    assert abs(picture.astype(float) - exact.repeat(2, 0).repeat(2, 1))[untouched].max() <= 0.51
    assert untouched.mean() > 0.95


def test_shades_of_an_array_are_those_of_its_numbers() -> None:
    temperatures = np.array([[-5.0, 10.0, 12.5], [20.0, 99.0, np.nan]], np.float32)
    alone = [[shades(np.array([[value]]), 10.0, 20.0)[0, 0] for value in row] for row in temperatures]
    assert shades(temperatures, 10.0, 20.0).tolist() == alone == [[0, 0, 62], [246, 246, UNMEASURABLE]]


def test_what_is_not_measurable_has_an_ink_of_its_own_and_hatching(board: FrameReport, board_maps: Maps) -> None:
    picture = np.asarray(annotated(board, board_maps))[:480, :640]
    missing = np.isnan(board_maps.temperature_c)
    assert set(np.unique(picture[missing])) == {UNMEASURABLE, (LIGHT + DARK) // 2}
    assert not np.isin(picture[~missing], [UNMEASURABLE]).any()


def test_an_outline_runs_just_outside_its_finding(wall: FrameReport, wall_maps: Maps) -> None:
    picture = np.asarray(annotated(wall, wall_maps))
    left, top = 2 * 150, 2 * 60
    right, bottom = 2 * 210 - 1, 2 * 120 - 1
    assert (picture[top : bottom + 1, left : right + 1] < LEVELS).all()
    middle_x, middle_y = (left + right) // 2, (top + bottom) // 2
    for outwards in (picture[middle_y, left - 3 : left][::-1], picture[middle_y, right + 1 : right + 4]):
        assert outwards.tolist() == [DARK, LIGHT, DARK]
    for outwards in (picture[top - 3 : top, middle_x][::-1], picture[bottom + 1 : bottom + 4, middle_x]):
        assert outwards.tolist() == [DARK, LIGHT, DARK]
    assert WIDTH == 3


def test_a_component_is_outlined_along_its_polygon(board: FrameReport, board_maps: Maps) -> None:
    picture = np.asarray(annotated(board, board_maps))
    assert (picture[141:219, 110] == LIGHT).all()  # left side of the first one
    assert (picture[145:215, [109, 111]] == DARK).all()
    assert (picture[145:215, 113:167] < LEVELS).all()


def test_the_reference_is_dashed(wall: FrameReport, wall_maps: Maps) -> None:
    side = np.asarray(annotated(wall, wall_maps))[2 * 20 : 2 * 220, 2 * 15]
    lit = side == LIGHT
    assert 0.4 < lit.mean() < 0.75  # eight pixels on, six off
    assert (side < LEVELS).mean() > 0.2
    assert np.count_nonzero(np.diff(lit.astype(int)) == 1) > 20


def test_numbers_stand_beside_findings_and_letters_beside_components(
    wall: FrameReport, wall_maps: Maps, board: FrameReport, board_maps: Maps
) -> None:
    walls = np.asarray(annotated(wall, wall_maps))
    boards = np.asarray(annotated(board, board_maps))
    anywhere = (0, 0, 0, 0)
    assert all(has_tag(walls, Label(text, anywhere, True)) for text in ("1", "2"))
    assert all(has_tag(boards, Label(text, anywhere, False)) for text in ("A", "B", "C"))
    assert has_tag(boards, Label("1", anywhere, True))
    assert not has_tag(walls, Label("3", anywhere, True))
    assert (walls[2 * 200 : 2 * 240, 2 * 250 : 2 * 320] < LEVELS).all()  # nothing on finding 2 itself


@pytest.mark.parametrize("seed", range(12))
def test_the_hottest_and_the_coldest_pixel_are_never_covered(wall: FrameReport, wall_maps: Maps, seed: int) -> None:
    temperature = wall_maps.temperature_c.copy()
    rng = np.random.default_rng(seed)
    near = np.array([[213, 62], [216, 58], [148, 90], [180, 58], [245, 203], [249, 198], [20, 20], [90, 120]])
    hot, cold = near[rng.permutation(len(near))[:2]]  # on outlines, where the tags would go, on the reference
    temperature[hot[1], hot[0]], temperature[cold[1], cold[0]] = 40.0, -10.0
    maps = replace(wall_maps, temperature_c=temperature)
    picture = np.asarray(annotated(wall, maps))
    shade = shades(temperature, *display_range(temperature, maps.labels))
    for x, y in (hot, cold):
        assert (picture[2 * y : 2 * y + 2, 2 * x : 2 * x + 2] == shade[y, x]).all()
    assert all(has_tag(picture, Label(text, (0, 0, 0, 0), True)) for text in ("1", "2"))  # whole, put elsewhere


def test_the_extremes_of_every_finding_and_component_are_never_covered(board: FrameReport, board_maps: Maps) -> None:
    temperature = board_maps.temperature_c.copy()
    temperature[140, 130], temperature[219, 500], temperature[349, 329] = 80.0, 60.0, 90.0  # on outlines
    maps = replace(board_maps, temperature_c=temperature)
    picture = np.asarray(annotated(board, maps))
    shade = shades(temperature, *display_range(temperature, maps.labels))
    for x, y in ((130, 140), (500, 219), (329, 349)):
        assert picture[y, x] == shade[y, x]


def test_tags_hide_neither_each_other_nor_a_finding_while_there_is_room() -> None:
    busy = np.zeros((200, 300), np.int32)
    boxes = [(20 * n, 100, 20 * n + 10, 110) for n in range(4, 9)]
    for left, top, right, bottom in boxes:
        busy[top:bottom, left:right] = 1
    taken = busy.copy()
    for tag, (x, y) in place([Label(str(n), box, True) for n, box in enumerate(boxes)], busy):
        square = taken[y : y + tag.shape[0], x : x + tag.shape[1]]
        assert square.shape == tag.shape
        assert not square.any()
        square[:] = 1


def test_a_crowded_picture_still_names_everything_and_spares_what_must_stay_visible() -> None:
    busy = np.ones((120, 160), np.int32)
    busy[60:70, 80:90] = 100_000
    corners = [corner for _, corner in place([Label(str(n), (0, 0, 160, 120), True) for n in range(12)], busy)]
    assert len(set(corners)) == 12
    assert not [(x, y) for x, y in corners if 60 < x < 90 and 40 < y < 70]


def test_of_very_many_findings_the_foremost_are_numbered_and_the_picture_stays_visible(
    wall: FrameReport, wall_maps: Maps
) -> None:
    many = tuple(replace(wall.findings[0], label=k, id=f"F01-{k}") for k in range(1, 200))
    picture = np.asarray(annotated(replace(wall, findings=many), wall_maps))
    anywhere = (0, 0, 0, 0)
    assert all(has_tag(picture, Label(str(k), anywhere, True)) for k in (1, NUMBERED))
    assert not has_tag(picture, Label(str(NUMBERED + 1), anywhere, True))


def test_components_are_named_by_letters() -> None:
    assert [component_mark(n) for n in (1, 2, 26, 27, 52, 53, 702, 703)] == [
        *("A", "B", "Z", "AA", "AZ", "BA", "ZZ", "AAA")
    ]


def test_strips_are_named_by_small_roman_numbers() -> None:
    assert [strip_mark(n) for n in (1, 2, 3, 4, 5, 9, 14, 40, 99)] == [
        *("i", "ii", "iii", "iv", "v", "ix", "xiv", "xl", "xcix")
    ]


def test_the_dot_of_a_letter_stays_off_its_stem() -> None:
    rows = (lettering("i", 15) > LIGHT + 3).any(axis=1)
    assert rows[0]
    assert rows[-1]
    assert not rows.all()


def test_a_strip_is_a_line_with_a_bar_at_either_end(wall: FrameReport, wall_maps: Maps) -> None:
    picture = np.asarray(annotated(replace(wall, findings=()), wall_maps))
    y = 2 * 150 + 1  # the strip runs along row 150; a pixel is drawn as two, its centre rounded to even
    along = picture[y - 3 : y + 4, 2 * 110 : 2 * 210]
    assert (np.sort((along == LIGHT).sum(axis=0)) == 1).all()
    assert ((along == DARK).sum(axis=0) == 2).all()
    assert all((picture[y - 5 : y + 3, x - 1 : x + 3] == LIGHT).any(axis=1).all() for x in (2 * 100, 2 * 220))
    assert has_tag(picture, Label("i", (0, 0, 0, 0), False))


def test_the_range_covers_findings_that_percentiles_would_miss() -> None:
    temperature = np.full((480, 640), 20.0, np.float32)
    labels = np.zeros((480, 640), np.uint16)
    temperature[100:106, 100:106] = 60.0  # 36 pixels, 0.01 % of the frame
    labels[100:106, 100:106] = 1
    assert display_range(temperature, labels) == (20.0, 60.0)


def test_noise_alone_is_not_spread_over_all_colours() -> None:
    temperature = np.random.default_rng(1).normal(20.0, 0.05, (240, 320)).astype(np.float32)
    low, high = display_range(temperature, np.zeros((240, 320), np.uint16))
    assert high - low == pytest.approx(MINIMUM_SPAN_K, abs=0.2)  # its ends are rounded outwards to 0.1 °C
    assert low < 20 < high


def test_single_wild_pixels_do_not_set_the_range() -> None:
    temperature = np.linspace(10, 20, 240 * 320, dtype=np.float32).reshape(240, 320)
    wild = temperature.copy()
    wild[::60, ::60] = 500.0
    none = np.zeros((240, 320), np.uint16)
    assert display_range(wild, none) == pytest.approx(display_range(temperature, none), abs=0.2)  # 0.03 % wild


def test_a_frame_without_any_temperature_is_still_a_picture(wall: FrameReport) -> None:
    maps = Maps(np.full((24, 32), np.nan, np.float32), np.zeros((24, 32), np.uint16), np.zeros((24, 32), bool))
    picture = np.asarray(annotated(replace(wall, findings=()), maps))
    assert (picture >= LEVELS).all()


@pytest.mark.parametrize("shape", [(1, 1), (2, 900), (900, 2), (60, 80), (1024, 1280)])
def test_any_shape_of_frame_makes_a_picture(wall: FrameReport, shape: tuple[int, int]) -> None:
    temperature = np.linspace(10, 30, shape[0] * shape[1], dtype=np.float32).reshape(shape)
    maps = Maps(temperature, np.zeros(shape, np.uint16), np.ones(shape, bool))
    picture = annotated(replace(wall, findings=()), maps)
    assert picture.height == max(shape[0] * enlargement(shape), LEAST_HEIGHT)


@pytest.mark.parametrize(
    ("shape", "factor"), [((60, 80), 7), ((120, 160), 4), ((240, 320), 2), ((480, 640), 1), ((768, 1024), 1)]
)
def test_small_frames_are_enlarged_and_large_ones_left(shape: tuple[int, int], factor: int) -> None:
    assert enlargement(shape) == factor


def test_the_scale_shows_the_shade_that_each_temperature_has() -> None:
    low, high = 15.0, 40.0
    block = strip(480, low, high, (False, False))
    bar = block[34:-10, 20]
    assert bar[0] == LEVELS - 1
    assert bar[-1] == 0
    temperatures = np.linspace(high, low, bar.size, dtype=np.float32)[:, np.newaxis]
    assert abs(shades(temperatures, low, high)[:, 0].astype(int) - bar.astype(int)).max() <= 1  # two roundings


def test_the_scale_has_ticks_at_its_ends_and_at_round_temperatures() -> None:
    block = strip(480, 15.0, 40.0, (False, False))
    ticks = np.nonzero(block[:, 32] == DARK)[0]
    temperatures = 40.0 - (ticks - 34) / (480 - 34 - 10 - 1) * 25.0
    # a tick stands on a whole row of pixels: half a row is 0.03 K
    np.testing.assert_allclose(
        temperatures, [40.0, 38, 36, 34, 32, 30, 28, 26, 24, 22, 20, 18, 15.0], rtol=0, atol=0.03
    )


@pytest.mark.parametrize(("at_least", "step"), [(0.9, 1), (1.0, 1), (1.1, 2), (3, 5), (6, 10), (0.03, 0.05)])
def test_steps_are_one_two_five(at_least: float, step: float) -> None:
    assert round_step(at_least) == pytest.approx(step, rel=1e-12)


def test_the_picture_says_in_words_what_it_shows(board: FrameReport, board_maps: Maps, tmp_path: Path) -> None:
    save(annotated(board, board_maps), tmp_path / "picture.png")
    with Image.open(tmp_path / "picture.png") as picture:
        words = picture.info["Description"]
    assert words == (
        "Surface temperatures of frame S01, colour scale 25.9 to 71.1 °C (cividis); outlined findings: 1 (hot); "
        "components: A (phase 1 lug), B (phase 2 lug), C (phase 3 bare bar)."
    )


def test_the_picture_names_its_strips_in_words(wall: FrameReport, wall_maps: Maps) -> None:
    assert "; strips: i (ceiling edge); dashed: reference area." in annotated(wall, wall_maps).info["Description"]


def test_another_program_reads_the_same_colours(wall: FrameReport, wall_maps: Maps, tmp_path: Path) -> None:
    picture = annotated(wall, wall_maps)
    save(picture, tmp_path / "picture.png")
    blue_green_red = cv2.imread(str(tmp_path / "picture.png"), cv2.IMREAD_COLOR)
    assert np.array_equal(blue_green_red[:, :, ::-1], np.asarray(picture.convert("RGB")))


def test_the_same_frame_gives_the_same_bytes(wall: FrameReport, wall_maps: Maps, tmp_path: Path) -> None:
    save(annotated(wall, wall_maps), tmp_path / "a.png")
    save(annotated(wall, wall_maps), tmp_path / "b.png")
    assert (tmp_path / "a.png").read_bytes() == (tmp_path / "b.png").read_bytes()


@pytest.mark.benchmark
def test_a_picture_against_the_floor_of_encoding_it_in_true_colour(wall: FrameReport) -> None:
    y, x = np.mgrid[:512, :640]
    spot = 2 * np.exp(-((x - 300) ** 2 + (y - 200) ** 2) / 2000)
    noise = np.random.default_rng(1).normal(0, 0.05, x.shape)
    labels = np.zeros(x.shape, np.uint16)
    labels[60:120, 150:210] = 1
    labels[200:240, 250:320] = 2
    maps = Maps((18 + 3 * x / 640 + spot + noise).astype(np.float32), labels, x < 100)
    true_colour = annotated(wall, maps).convert("RGB")

    def best(work: object) -> float:
        times = []
        for _ in range(9):
            start = time.perf_counter()
            work()  # type: ignore[operator]
            times.append(time.perf_counter() - start)
        return min(times)

    def encoded(picture: Image.Image) -> None:
        picture.save(io.BytesIO(), format="PNG", compress_level=1)

    indexed, floor = best(lambda: encoded(annotated(wall, maps))), best(lambda: encoded(true_colour))
    print(f"512 × 640, drawn and encoded: {indexed * 1e3:.1f} ms, {indexed / floor:.2f} × encoding it in true colour")


def test_a_tag_that_stands_apart_has_a_line_to_what_it_names() -> None:
    square = ((40, 40), (80, 40), (80, 80), (40, 80))
    label = Label("7", (40, 40, 81, 81), True, square)
    tag = label.tag()
    height = tag.shape[0]
    assert leader(label, tag, (80 + 12, 50)) is None
    assert leader(label, tag, (50, 50)) is None  # it lies upon what it names
    assert leader(label, tag, (80 + 13, 50)) == ((93, 50 + height // 2), (80, 50 + height // 2))
    assert leader(replace(label, outline=()), tag, (180, 50)) is None
    canvas = np.zeros((200, 300), np.uint8)
    busy = np.zeros(canvas.shape, np.int32)
    busy[:, :150] = 1  # no room near it
    put(canvas, [label], busy)
    ys, xs = np.nonzero(canvas == LIGHT)
    inked = set(zip(xs.tolist(), ys.tolist(), strict=True))
    row = next(y for x, y in inked if x == 81)
    assert all(any((x, y) in inked for y in range(200)) for x in range(80, 150))
    assert 40 <= row <= 80


def test_no_line_to_a_tag_covers_the_hottest_pixel(
    wall: FrameReport, wall_maps: Maps, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(labels, "_GAPS", (40,))  # far enough for lines
    drawn = np.asarray(annotated(wall, wall_maps))
    with monkeypatch.context() as patch:
        patch.setattr(labels, "leader", lambda *_: None)
        on_line = np.argwhere((drawn != np.asarray(annotated(wall, wall_maps))) & (drawn == LIGHT))
    assert len(on_line) > 20
    y, x = on_line[len(on_line) // 4] // 2  # of the frame, which is drawn twice as large
    temperature = wall_maps.temperature_c.copy()
    temperature[y, x] = 40.0
    maps = replace(wall_maps, temperature_c=temperature)
    again = np.asarray(annotated(wall, maps))
    shade = shades(temperature, *display_range(temperature, maps.labels))
    assert (again[2 * y : 2 * y + 2, 2 * x : 2 * x + 2] == shade[y, x]).all()
    assert (again == LIGHT)[2 * y - 4 : 2 * y + 6, 2 * x - 4 : 2 * x + 6].any()  # the line is there all the same
