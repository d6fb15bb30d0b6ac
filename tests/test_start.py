"""`irsurvey start`: what the frames tell, what is guessed, what is left to the surveyor."""

from __future__ import annotations

import re
import shutil
import tomllib
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from irsurvey.errors import OutputError, SurveyError, UsageError
from irsurvey.model import ReadOptions
from irsurvey.readers import read
from irsurvey.run import check, load_survey, run
from irsurvey.start import write_start
from irsurvey.start.scaling import SCALES, Scaling, known_point, ordinary, scalings

REAL = Path(__file__).parent / "real"
SAMPLES = Path(__file__).parents[1] / "sample_frames"
RAW = read(REAL / "derived" / "22-20-28-391_raw.png", ReadOptions()).stored
CELSIUS = RAW * 0.025 - 100
"""The real house front: °C = 0.025·stored − 100, as its author documents it (Sutherland 2025, MIT)."""
CROP = (slice(128, 384), slice(160, 480))
"""Rows and columns of the cropped encodings."""

ENCODINGS = {
    "22-20-28-391_K_f32.tif": Scaling("K", 1.0),
    "22-20-28-391_centikelvin_u16.tif": Scaling("K", 0.01),
    "22-20-28-391_degC.npz": Scaling("C", 1.0),
    "22-20-28-391_degC_crop.csv": Scaling("C", 1.0),
    "22-20-28-391_degC_crop_semicolon_decimalcomma.csv": Scaling("C", 1.0),
    "22-20-28-391_degC_f32.npy": Scaling("C", 1.0),
    "22-20-28-391_degC_f32_deflate.tif": Scaling("C", 1.0),
    "22-20-28-391_raw.png": Scaling("C", 0.025, -100.0),
}

HEADERLESS = {
    "raw": (RAW, Scaling("C", 0.025, -100.0)),
    "centikelvin": (np.round((CELSIUS + 273.15) * 100).astype(np.uint16), Scaling("K", 0.01)),
    "signed hundredths of °C": (np.round(CELSIUS * 100).astype(np.int16), Scaling("C", 0.01)),
    "°C in single precision": (CELSIUS.astype(np.float32), Scaling("C", 1.0)),
    "K in double precision": (CELSIUS + 273.15, Scaling("K", 1.0)),
    "°F in single precision": ((CELSIUS * 1.8 + 32).astype(np.float32), Scaling("F", 1.0)),
}


def written(folder: Path, known: Sequence[str] = ()) -> dict[str, Any]:
    """survey.toml as start writes it."""
    return tomllib.loads(write_start(folder, known).path.read_text(encoding="utf-8"))


def scaling_of(survey: dict[str, Any]) -> Scaling:
    signal = survey["camera"]["signal"]
    return Scaling(signal["unit"], signal.get("scale", 1.0), signal.get("offset", 0.0))


def known(celsius: NDArray[np.float64], *points: tuple[int, int]) -> list[str]:
    """Points (x, y) with the temperature to a tenth, as a camera shows it."""
    return [f"{x},{y}={celsius[y, x]:.1f}" for x, y in points]


def completed(path: Path, **values: str) -> None:
    """Fill in the marked lines, as a surveyor would."""
    text = path.read_text(encoding="utf-8")
    for key, value in values.items():
        text, count = re.subn(rf"# fill in: {key} = *(?=#|$)", f"{key} = {value} ", text, flags=re.MULTILINE)
        assert count, key
    path.write_text(text, encoding="utf-8")


SITE = {"viewed_from": '"outside"', "air_c": "3.0", "reflected_c": "-20.0", "distance_m": "12.0"}


@pytest.mark.parametrize("name", ENCODINGS)
def test_start_with_two_known_points_recovers_every_encoding(tmp_path: Path, name: str) -> None:
    shutil.copy(REAL / "derived" / name, tmp_path)
    is_crop = "crop" in name or "K_f32" in name
    celsius = CELSIUS[CROP] if is_crop else CELSIUS
    survey = written(tmp_path, known(celsius, (40, 172), (140, 22)))
    assert scaling_of(survey) == ENCODINGS[name]

    completed(tmp_path / "survey.toml", **SITE)
    (task,) = load_survey(tmp_path / "survey.toml").tasks
    stored = read(Path(task.path), task.read).stored.astype(np.float64)
    kelvin = task.camera.signal.scale * stored + task.camera.signal.offset
    # 0.005 K is the rounding of the centikelvin file, 1e-5 K that of single precision
    assert np.abs(kelvin - 273.15 - celsius).max() < 0.005 + 1e-5


def test_the_list_of_encodings_is_complete() -> None:
    assert set(ENCODINGS) == {path.name for path in (REAL / "derived").iterdir() if path.suffix != ".md"}


@pytest.mark.parametrize("byte_order", ["little", "big"])
@pytest.mark.parametrize("name", HEADERLESS)
def test_start_with_two_known_points_recovers_headerless_numbers(tmp_path: Path, name: str, byte_order: str) -> None:
    numbers, scaling = HEADERLESS[name]
    order = numbers.dtype.newbyteorder("<" if byte_order == "little" else ">")
    (tmp_path / "front.raw").write_bytes(numbers.astype(order).tobytes())
    survey = written(tmp_path, known(CELSIUS, (200, 300), (300, 150)))
    (frame,) = survey["frame"]
    assert scaling_of(survey) == scaling
    assert frame["shape"] == [512, 640]
    assert (frame["dtype"], frame["byte_order"]) == (numbers.dtype.name, byte_order)


@pytest.mark.parametrize("byte_order", ["little", "big"])
@pytest.mark.parametrize("turns", [0, 1])
def test_byte_order_and_shape_of_headerless_numbers_are_guessed_from_the_picture(
    tmp_path: Path, turns: int, byte_order: str
) -> None:
    numbers = np.ascontiguousarray(np.rot90(RAW, turns))
    (tmp_path / "front.bin").write_bytes(numbers.astype("<u2" if byte_order == "little" else ">u2").tobytes())
    (frame,) = written(tmp_path)["frame"]
    assert frame["shape"] == list(numbers.shape)
    assert (frame["dtype"], frame["byte_order"]) == ("uint16", byte_order)


@settings(max_examples=200, deadline=None)
@given(
    st.sampled_from([*ENCODINGS.values(), Scaling("F", 1.0), Scaling("K", 0.04), Scaling("C", 0.02, -40.0)]),
    st.floats(-25, 100),
    st.floats(10, 100),
)
def test_points_ten_kelvin_apart_tell_one_scaling(scaling: Scaling, cold: float, difference: float) -> None:
    one = scaling.celsius(1.0) - scaling.celsius(0.0)  # [K] per stored number
    step = 1.0 if scaling.scale < 1 else 0.01
    stored = [round((celsius - scaling.celsius(0.0)) / one / step) * step for celsius in (cold, cold + difference)]
    assume(min(stored) > 0 or scaling.scale == 1)
    points = [(number, round(scaling.celsius(number), 1), 0.05) for number in stored]
    assert scalings(points, step)[0] == scaling


def test_points_too_close_together_leave_several_scalings_and_start_says_so(tmp_path: Path) -> None:
    shutil.copy(REAL / "derived" / "22-20-28-391_raw.png", tmp_path)
    row, column = np.argwhere(np.abs(CELSIUS - CELSIUS[300, 200] - 0.3) < 0.02)[0]
    (notice,) = write_start(tmp_path, known(CELSIUS, (200, 300), (int(column), int(row)))).notices
    assert "so do" in notice
    assert "C = 0.025 × stored - 100" in notice


def test_numbers_that_fit_no_plain_scale_get_a_line_marked_as_a_guess(tmp_path: Path) -> None:
    np.save(tmp_path / "f.npy", np.arange(1000, 5800, dtype=np.uint16).reshape(60, 80))
    started = write_start(tmp_path, ["0,0=10.0", "79,59=99.7"])
    slope = 89.7 / 4799
    survey = tomllib.loads(started.path.read_text(encoding="utf-8"))
    assert scaling_of(survey).scale == pytest.approx(slope, rel=1e-5)  # written with six digits
    assert started.notices[0].startswith("npy-uint16: guess:")


def test_known_points_may_lie_in_named_files(tmp_path: Path) -> None:
    for name in ("22-18-41-880", "22-20-28-391"):
        shutil.copy(REAL / "dunr" / f"{name}-radiometric.tiff", tmp_path / f"{name}.tiff")
    other = read(tmp_path / "22-18-41-880.tiff", ReadOptions()).stored * 0.025 - 100
    points = [f"22-20-28-391.tiff:200,300={CELSIUS[300, 200]:.1f}", f"22-18-41-880.tiff:40,500={other[500, 40]:.1f}"]
    points.append(f"22-20-28-391.tiff:300,150={CELSIUS[150, 300]:.1f}")
    assert scaling_of(written(tmp_path, points)) == Scaling("C", 0.025, -100.0)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("240,320=21.3", (None, 240, 320, 21.3, 0.05)),
        ("a:b.tif:1,2=-4", ("a:b.tif", 1, 2, -4.0, 0.5)),
        ("1,2=21,35", (None, 1, 2, 21.35, 0.005)),
    ],
)
def test_a_known_point_is_as_exact_as_it_is_written(text: str, expected: tuple[object, ...]) -> None:
    point = known_point(text)
    assert (point.file, point.x, point.y, point.celsius) == expected[:4]
    assert point.half == pytest.approx(expected[4], rel=1e-12)  # a power of ten, to rounding


@pytest.mark.parametrize(
    ("points", "wanted"),
    [
        (["240,320"], "a point as"),
        (["40,172=0.2"], "two points"),
        (["40,172=0.2", "640,22=2.5"], "x below 640"),
        (["40,172=0.2", "40,172=2.5"], "different numbers"),
        (["40,172=0.2", "other.png:40,22=2.5"], "a frame of the folder"),
    ],
)
def test_known_points_that_cannot_be_used_are_refused(tmp_path: Path, points: list[str], wanted: str) -> None:
    shutil.copy(REAL / "derived" / "22-20-28-391_raw.png", tmp_path)
    with pytest.raises(UsageError, match=wanted):
        write_start(tmp_path, points)
    assert not (tmp_path / "survey.toml").exists()


def test_a_survey_file_is_never_overwritten(tmp_path: Path) -> None:
    shutil.copy(REAL / "derived" / "22-20-28-391_raw.png", tmp_path)
    (tmp_path / "survey.toml").write_text("mine")
    with pytest.raises(OutputError, match="somebody's work"):
        write_start(tmp_path)
    assert (tmp_path / "survey.toml").read_text() == "mine"


def test_a_folder_without_frames_says_what_it_looked_for(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_text("cold in the corner\n")
    with pytest.raises(UsageError, match=r"\.tiff"):
        write_start(tmp_path)
    with pytest.raises(UsageError, match="a folder of frames"):
        write_start(tmp_path / "nowhere")


def test_what_nobody_can_tell_is_a_fault_until_it_is_filled_in(tmp_path: Path) -> None:
    shutil.copy(REAL / "derived" / "22-20-28-391_degC.npz", tmp_path)
    path = write_start(tmp_path).path
    with pytest.raises(SurveyError) as caught:
        load_survey(path)
    assert {name for name in SITE if name in str(caught.value)} == {"air_c", "reflected_c", "distance_m"}
    completed(path, **{key: value for key, value in SITE.items() if key != "viewed_from"})
    assert any("viewed_from" in notice for notice in check(path).notices)  # has a default, said so
    completed(path, viewed_from=SITE["viewed_from"])
    assert check(path).unreadable == ()


def test_a_scale_that_cannot_be_guessed_is_left_open(tmp_path: Path) -> None:
    shutil.copy(REAL / "derived" / "22-20-28-391_raw.png", tmp_path)
    assert "unit" not in written(tmp_path)["camera"]["signal"]
    completed(tmp_path / "survey.toml", **SITE, unit='"C"', scale="0.025")
    assert len(load_survey(tmp_path / "survey.toml").tasks) == 1


@pytest.mark.parametrize(
    ("middle", "expected"),
    [
        (18.0, [Scaling("C", 1.0)]),
        (291.0, [Scaling("K", 1.0)]),
        (29_100.0, [Scaling("K", 0.01)]),
        (7_000.0, [Scaling("K", 0.04)]),
        (4_000.0, []),
    ],
)
def test_without_points_only_ordinary_temperatures_are_guessed(middle: float, expected: list[Scaling]) -> None:
    assert list(ordinary(middle)) == expected


def test_a_mixed_folder_becomes_a_survey_with_a_camera_for_each_kind_of_file(tmp_path: Path) -> None:
    (tmp_path / "north wall").mkdir()
    shutil.copy(REAL / "derived" / "22-20-28-391_degC_f32.npy", tmp_path / "a.npy")
    shutil.copy(REAL / "derived" / "22-20-28-391_centikelvin_u16.tif", tmp_path / "north wall" / "a.tif")
    (tmp_path / "a.jpg").write_bytes(b"")
    (tmp_path / "logger.csv").write_text("time,air_c\n2026-01-18T07:00,3.1\n")
    started = write_start(tmp_path)
    completed(started.path, **SITE)
    first, second = load_survey(started.path).tasks
    assert (first.id, first.photo, first.camera.signal.offset) == ("a", "a.jpg", 273.15)
    assert (second.id, second.group, second.camera.signal.scale) == ("a-1", "north-wall", 0.01)
    assert any("logger.csv" in notice for notice in started.notices)


def test_cameras_that_share_a_format_are_told_apart_by_their_numbers(tmp_path: Path) -> None:
    """The sample house: rooms in steps of 0.04 K, elevations in hundredths of a kelvin, both uint16 TIFF."""
    shutil.copytree(SAMPLES / "house" / "frames", tmp_path / "site")
    survey = written(tmp_path / "site")
    scale_of = {name: camera["signal"].get("scale", 1.0) for name, camera in survey["cameras"].items()}
    scales = {Path(frame["file"]).stem: scale_of[frame["camera"]] for frame in survey["frame"]}
    assert (scales["living-north"], scales["north-wall"], scales["living-corner"]) == (0.04, 0.01, 1.0)


def test_a_fitted_scale_holds_for_the_other_frames_of_its_camera(tmp_path: Path) -> None:
    shutil.copytree(REAL / "dunr", tmp_path / "site")
    first = read(tmp_path / "site" / "22-18-41-880-radiometric.tiff", ReadOptions()).stored * 0.025 - 100
    survey = written(tmp_path / "site", known(first, (320, 20), (320, 400)))
    assert scaling_of(survey) == Scaling("C", 0.025, -100.0)
    assert len(survey["frame"]) == 8


def test_a_completed_survey_runs(tmp_path: Path) -> None:
    shutil.copy(REAL / "derived" / "22-20-28-391_raw.png", tmp_path)
    path = write_start(tmp_path, known(CELSIUS, (200, 300), (300, 150))).path
    completed(path, **SITE)
    (frame,) = run(path, tmp_path / "out").frames
    assert frame.status == "analysed"
    assert frame.temperature is not None


def test_frames_with_the_oddest_names_become_a_survey_that_checks(tmp_path: Path) -> None:
    names = ["A", "a", "con", "Nul.x", "dot.", "küche", "日本", 'quo"te', "new\nline", "esc\x1b[31m", "del\x7f"]
    names.append("x" * 200)
    numbers = np.random.default_rng(3).normal(20, 1, (60, 80)).astype(np.float32)
    for number, name in enumerate(names):
        (tmp_path / f"{number % 2}").mkdir(exist_ok=True)
        np.save(tmp_path / f"{number % 2}" / f"{name}.npy", numbers)
    (tmp_path / "no\x1b\x7fframe.csv").write_text("text\n", "utf-8")
    (tmp_path / b"latin-\xfc.npy".decode("utf-8", "surrogateescape")).write_bytes(b"")
    started = write_start(tmp_path)
    assert any("latin-?.npy: expected a name in UTF-8" in notice for notice in started.notices)
    completed(started.path, **SITE)
    checked = check(started.path)
    assert len(checked.survey.tasks) == len(names)
    assert not checked.unreadable
    lines = started.path.read_text("utf-8").splitlines()
    assert all(re.search(r'" +# \d', line) for line in lines if line.startswith("file"))


def test_start_is_deterministic(tmp_path: Path) -> None:
    texts = []
    for copy in ("one", "two"):
        shutil.copytree(REAL / "derived", tmp_path / copy / "site")
        texts.append(write_start(tmp_path / copy / "site").path.read_text(encoding="utf-8"))
    assert texts[0] == texts[1]


def test_every_guess_is_marked_and_every_mark_explained(tmp_path: Path) -> None:
    shutil.copytree(REAL / "derived", tmp_path / "site")
    text = write_start(tmp_path / "site").path.read_text(encoding="utf-8")
    for key in ("title", "kind", "band_um", "quantity", "emissivity"):
        lines = re.findall(rf"^{key} = .*$", text, re.MULTILINE)
        assert lines, key
        assert all("# guess" in line for line in lines)
    head = text.split("format = 1")[0]
    assert {"guess", "fill in", "optional"} <= set(re.findall(r"guess|fill in|optional", head))
    assert not re.search(r"^(air_c|reflected_c|distance_m|viewed_from) =", text, re.MULTILINE)


def test_scales_are_positive_and_ranked() -> None:
    assert min(SCALES) > 0
    assert SCALES[1.0] < SCALES[0.04] < SCALES[2.0**-6]
