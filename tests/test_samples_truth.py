"""The sample frames are what their truth and their survey files say, and the script makes them again."""

from __future__ import annotations

import ast
import subprocess
import sys
import tomllib
from math import pi
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tifffile
from numpy.typing import NDArray
from PIL import Image
from samples import FRAMES, SAMPLES, SURVEYS, truth, truth_facts
from scipy.ndimage import label

SCRIPT = SAMPLES / "make_samples.py"
CELSIUS = {
    "wide": lambda stored: 0.04 * stored - 273.15,
    "handheld": lambda stored: 0.04 * stored - 273.15,
    "tele": lambda stored: 0.01 * stored - 273.15,
    "pocket": lambda stored: stored,
    "veteran": lambda stored: stored,
    "compact": lambda stored: 0.04 * stored - 273.15,
}


def stored(path: Path) -> NDArray[np.float64]:
    """The numbers of a sample frame, read without the readers under test."""
    if path.suffix == ".tif":
        return np.asarray(tifffile.imread(path), float)
    if path.suffix == ".png":
        return np.asarray(Image.open(path), float)
    if path.suffix == ".npy":
        return np.asarray(np.load(path), float)
    return np.loadtxt(path, delimiter=",")


def apparent_c(survey: str, frame: str) -> NDArray[np.float64]:
    """Apparent temperatures of a sample frame."""
    facts = truth_facts(survey)[frame]
    return CELSIUS[facts["camera"]](stored(SAMPLES / survey / facts["file"]))


def survey_frames(survey: str) -> dict[str, dict[str, Any]]:
    """Frames of a survey file with the values of survey and group put in where the frame has none of its own."""
    file = tomllib.loads(SURVEYS[survey].read_text("utf-8"))
    groups = {group["id"]: group for group in file["group"]}
    globbed = [
        {"id": path.stem, "file": f"frames/{path.name}", "group": group["id"]}
        for group in file["group"]
        for path in (SAMPLES / survey).glob(group.get("frames", "nothing"))
    ]
    frames = {frame["id"]: frame for frame in globbed}
    frames |= {frame["id"]: frames.get(frame["id"], {}) | frame for frame in file["frame"]}
    for id_, frame in frames.items():
        levels = (file, groups[frame["group"]], frame)
        merged = {
            key: {name: value for level in levels for name, value in level.get(key, {}).items()}
            for key in ("conditions", "target")
        }
        merged |= {key: level[key] for level in levels[1:] for key in ("window", "window_from") if key in level}
        if merged.get("window_from", {}).get("without") == id_:  # what is seen without the window has none
            merged = {key: value for key, value in merged.items() if not key.startswith("window")}
        camera = next(level["camera"] for level in reversed(levels) if "camera" in level)
        frames[id_] = frame | merged | {"camera": camera, "cameras": file["cameras"]}
    return frames


def within(polygon: list[list[int]], shape: tuple[int, int]) -> NDArray[np.bool_]:
    """Pixels of an upright rectangle, its outline included."""
    y, x = np.indices(shape)
    (left, top), (right, bottom) = np.min(polygon, axis=0), np.max(polygon, axis=0)
    return (x >= left) & (x <= right) & (y >= top) & (y <= bottom)


def corners(extent: list[int]) -> list[list[int]]:
    """Two opposite corners of an upright rectangle given as left, top, right, bottom."""
    return [extent[:2], extent[2:]]


@pytest.fixture(scope="module")
def made_again(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("samples")
    subprocess.run([sys.executable, str(SCRIPT), "--into", str(folder)], check=True, timeout=120)
    return folder


@pytest.mark.parametrize(("survey", "frame"), FRAMES)
def test_the_script_makes_the_stored_frame_again(survey: str, frame: str, made_again: Path) -> None:
    # One count (0.01 °C in the CSV): a sum that ends beside a rounding edge may fall on either side of it where
    # another mathematical library adds in another order.  float32 °C: eight of its steps at 24 °C are 1.5e-5 K.
    file = truth_facts(survey)[frame]["file"]
    step = {".csv": 0.0101, ".npy": 2e-5}.get(Path(file).suffix, 1.0)
    assert np.abs(stored(made_again / survey / file) - stored(SAMPLES / survey / file)).max() <= step


@pytest.mark.parametrize(("survey", "frame"), FRAMES)
def test_the_script_makes_the_stored_truth_again(survey: str, frame: str, made_again: Path) -> None:
    with np.load(made_again / survey / "truth" / f"{frame}.npz") as again:
        now = truth(survey, frame)
        # One hundredth of a kelvin, the step in which temperatures are stored, for the same reason as above.
        assert np.abs(again["temperature_ck"] / 100 - 273.15 - now.temperature_c).max() <= 0.0101
        assert np.array_equal(again["defect"], now.defect)
        assert np.array_equal(again["exclude"], now.exclude)


@pytest.mark.parametrize(
    ("survey", "name"),
    [
        ("house", "loggers.csv"),
        ("house", "bathroom.csv"),
        ("house", "year.csv"),
        ("pump_station", "pump-one.csv"),
        ("pump_station", "pump-two.csv"),
        ("pump_station", "history.csv"),
        ("pump_station", "truth/round.json"),
    ],
)
def test_the_script_makes_the_stored_logs_again(survey: str, name: str, made_again: Path) -> None:
    assert (made_again / survey / name).read_bytes() == (SAMPLES / survey / name).read_bytes()


def test_the_script_makes_the_stored_facts_again(made_again: Path) -> None:
    for survey in SURVEYS:
        again = (made_again / survey / "truth" / "truth.json").read_text("utf-8")
        assert again == (SAMPLES / survey / "truth" / "truth.json").read_text("utf-8")


def test_one_frame_made_alone_equals_the_one_made_with_all(made_again: Path, tmp_path: Path) -> None:
    subprocess.run(
        [sys.executable, str(SCRIPT), "--into", str(tmp_path), "--only", "transformer"], check=True, timeout=120
    )
    alone = tmp_path / "pump_station" / "frames" / "transformer.tif"
    assert [path.name for path in tmp_path.rglob("frames/*")] == [alone.name]
    assert np.array_equal(stored(alone), stored(made_again / "pump_station" / "frames" / "transformer.tif"))


def test_the_script_shares_no_code_with_irsurvey() -> None:
    own = {path.stem for path in SAMPLES.glob("*.py")}
    outside = {"numpy", "scipy", "tifffile", "PIL"}
    for path in SAMPLES.glob("*.py"):
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.Import):
                names = {alias.name.split(".")[0] for alias in node.names}
            elif isinstance(node, ast.ImportFrom):
                names = {str(node.module).split(".")[0]}
            else:
                continue
            assert names <= own | outside | set(sys.stdlib_module_names), f"{path.name} imports {names}"


@pytest.mark.parametrize("band_um", [(7.5, 13.0), (8.0, 14.0)])
def test_the_scripts_band_radiance_agrees_with_the_blackbody_series(
    band_um: tuple[float, float], monkeypatch: pytest.MonkeyPatch
) -> None:
    # Series of the blackbody fraction F(0–λT), as in the heat-transfer textbooks: Planck's law integrated term by term.
    monkeypatch.syspath_prepend(str(SAMPLES))
    from camera_model import radiance_table

    def fraction(wavelength_um: float, t: NDArray[np.float64]) -> NDArray[np.float64]:
        x = 14387.76877 / (wavelength_um * t)
        n = np.arange(1, 40)[:, None]
        return (15 / pi**4 * np.exp(-n * x) / n * (x**3 + 3 * x**2 / n + 6 * x / n**2 + 6 / n**3)).sum(axis=0)

    t_c, radiance = radiance_table(band_um)
    t = t_c[::500] + 273.15
    expected = 5.670374419e-8 * t**4 / pi * (fraction(band_um[1], t) - fraction(band_um[0], t))
    assert radiance[::500] == pytest.approx(expected, rel=1e-8)  # ten figures of c2 and sigma, terms added up


@pytest.mark.parametrize(("survey", "frame"), FRAMES)
def test_what_the_camera_saw_lies_between_the_temperatures_it_mixes(survey: str, frame: str) -> None:
    # Radiance at the camera is a weighted mean of black bodies, so the apparent temperature lies between theirs.
    now, seen = truth(survey, frame), apparent_c(survey, frame)
    facts = now.facts
    mirrored = [mirage["mirrored_c"] for mirage in facts["mirages"]]
    sources = [np.broadcast_to(one, seen.shape) for one in (facts["reflected_c"], facts["air_c"], *mirrored)]
    sources.append(now.temperature_c)
    if facts["window"]:
        sources += [np.broadcast_to(facts["window"][key], seen.shape) for key in ("temperature_c", "ambient_c")]
    noise = 6 * 1.8 * facts["noise_k_at_30_c"]  # six standard deviations (76 800 draws), 1.8 times larger at −20 °C
    clear = ~now.exclude
    above = seen - facts["camera_offset_k"] - np.max(sources, axis=0)
    below = np.min(sources, axis=0) - facts["shading_in_corners_k"] - (seen - facts["camera_offset_k"])
    assert above[clear].max() <= noise + 0.05  # and the blur that `exclude` allows
    assert below[clear].max() <= noise + 0.05
    assert seen.shape == now.defect.shape == now.exclude.shape


@pytest.mark.parametrize(("survey", "frame"), FRAMES)
def test_labels_are_the_listed_defects(survey: str, frame: str) -> None:
    now = truth(survey, frame)
    defects = now.facts["defects"]
    assert (not defects and not now.facts["mirages"]) == now.facts["sound"]
    assert set(np.unique(now.defect)) == {0, *(defect["label"] for defect in defects)}
    for defect in defects:
        mask = now.defect == defect["label"]
        assert mask.sum() == defect["pixels"]
        assert abs(defect["mean_delta_k"]) >= defect["threshold_k"]
        assert defect["sense"] == ("hot" if defect["delta_k"] > 0 else "cold")
        pieces, count = label(mask)
        if defect["kind"] != "overload":  # three lugs, one statement
            # Crumbs, where a feathered or uneven edge crosses the threshold more than once, stay below one per cent.
            assert np.bincount(pieces.ravel())[1:].max() >= 0.99 * mask.sum(), f"{count} pieces"


@pytest.mark.parametrize(("survey", "frame"), [(s, f) for s, f in FRAMES if s == "house"])
def test_sound_walls_are_even_and_plateaus_are_plain(survey: str, frame: str) -> None:
    # The samples promise: 0.5 K after a plane on sound walls, 1.8 K or more in a plateau, against a threshold of 1 K.
    now = truth(survey, frame)
    for defect in now.facts["defects"]:
        assert defect["kind"] != "plateau" or abs(defect["mean_delta_k"]) >= 1.8
    if now.facts["sound"]:
        plain = ~now.exclude
        for surface in now.facts["surfaces"]:
            plain &= ~within(surface["polygon"], plain.shape) | (surface["role"] == "inspect")
        y, x = np.nonzero(plain)
        plane = np.column_stack([np.ones(x.size), x, y])
        coefficients = np.linalg.lstsq(plane, now.temperature_c[plain], rcond=None)[0]
        assert np.abs(now.temperature_c[plain] - plane @ coefficients).max() <= 0.5


def test_the_shiny_cover_is_as_warm_as_the_bricks_and_looks_cold() -> None:
    now = truth("house", "north-meter")
    (cover,) = now.facts["surfaces"]
    on_cover = within(cover["polygon"], now.defect.shape)
    true_difference = now.temperature_c[on_cover].mean() - now.temperature_c[~on_cover].mean()
    seen = apparent_c("house", "north-meter")
    assert abs(true_difference) <= 0.2  # unevenness of the brickwork
    assert seen[on_cover].mean() - seen[~on_cover].mean() <= -4.0  # well beyond any threshold: a trap for the unwary


def test_the_saturated_spot_is_stored_at_the_end_of_the_range() -> None:
    facts = truth_facts("pump_station")["soft-starter"]
    camera = survey_frames("pump_station")["soft-starter"]["cameras"]["handheld"]
    seen = apparent_c("pump_station", "soft-starter")
    assert (seen >= camera["range_c"][1]).sum() == facts["saturated_pixels"] > 500
    assert truth("pump_station", "soft-starter").temperature_c.max() > 150


@pytest.mark.parametrize("survey", SURVEYS)
def test_survey_file_and_truth_name_the_same_frames(survey: str) -> None:
    frames = survey_frames(survey)
    assert {id_: frame["file"] for id_, frame in frames.items()} == {
        id_: facts["file"] for id_, facts in truth_facts(survey).items()
    }


@pytest.mark.parametrize(("survey", "frame"), FRAMES)
def test_survey_file_and_truth_state_the_same_inputs(survey: str, frame: str) -> None:
    facts, said = truth_facts(survey)[frame], survey_frames(survey)[frame]
    conditions = said["conditions"]
    for key in ("air_c", "distance_m"):
        assert conditions[key] == facts[key]
    # In the larder nobody measured the humidity; 50 % is what the program then assumes, and says so.
    assert conditions.get("relative_humidity_percent", 50) == facts["relative_humidity_percent"]
    if "reflected_from" in conditions:
        foil = truth_facts(survey)[conditions["reflected_from"]]
        assert [surface["role"] for surface in foil["surfaces"]] == ["reflector"]
        assert foil["reflected_c"] == facts["reflected_c"]
    else:
        assert conditions["reflected_c"] == facts["reflected_c"]
    assert said["target"]["emissivity"] == facts["emissivity"]
    camera = said["cameras"][said["camera"]]
    assert (said["camera"], camera["band_um"]) == (facts["camera"], facts["band_um"])
    assert camera["ifov_mrad"] * 1e-3 * conditions["distance_m"] == pytest.approx(facts["pixel_m"], abs=1e-6)  # rounded
    window = said.get("window")
    if "window_from" in said:  # which measures what is not stated
        assert "transmittance" not in window
        window = {"transmittance": facts["window"]["transmittance"]} | window
    assert window == facts["window"]
    for key in ("ambient_c", "mean_radiant_c", "wind_m_s", "irradiance_w_m2"):
        assert key not in facts or conditions[key] == facts[key]


@pytest.mark.parametrize(("survey", "frame"), FRAMES)
def test_survey_file_and_truth_draw_the_same_areas(survey: str, frame: str) -> None:
    facts, said = truth_facts(survey)[frame], survey_frames(survey)[frame]
    drawn = {surface["name"]: surface for surface in said.get("surface", [])}
    assert drawn.keys() == {surface["name"] for surface in facts["surfaces"]}
    for surface in facts["surfaces"]:
        mine = drawn[surface["name"]]
        assert mine["polygon"] == surface["polygon"]
        assert mine.get("role", "inspect") == surface["role"]
        if surface["role"] != "reflector":
            assert mine.get("emissivity", said["target"]["emissivity"]) == surface["emissivity"]
        assert mine.get("emissivity_total") == surface.get("emissivity_total")
        if surface["role"] == "known-temperature":
            assert mine["temperature_c"] == surface["mean_c"]
    usual = said["target"]["emissivity"]
    components = [(part["name"], part["polygon"], part.get("emissivity", usual)) for part in said.get("component", [])]
    assert components == [(part["name"], part["polygon"], part["emissivity"]) for part in facts["components"]]


@pytest.mark.parametrize(("survey", "frame"), FRAMES)
def test_reference_areas_lie_on_sound_ground(survey: str, frame: str) -> None:
    reference = survey_frames(survey)[frame].get("reference", "automatic")
    if reference != "automatic":
        now = truth(survey, frame)
        area = within(reference["polygon"], now.defect.shape)
        assert area.sum() > 1000
        assert not (area & (now.defect > 0)).any()
        for drawn in (*now.facts["surfaces"], *now.facts["components"]):
            on_it = within(drawn["polygon"], area.shape)
            assert not (area & on_it).any() or (drawn["role"] == "inspect" and (on_it | ~area).all())
        assert not any(within(corners(mirage["extent"]), area.shape)[area].any() for mirage in now.facts["mirages"])


def test_the_samples_stay_small() -> None:
    assert sum(path.stat().st_size for path in SAMPLES.rglob("*") if path.is_file()) < 4_000_000
