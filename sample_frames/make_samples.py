"""Make the sample frames and their truth: `python sample_frames/make_samples.py [--into FOLDER] [--only ID …]`.

Needs numpy, scipy, tifffile and Pillow, nothing of irsurvey: the frames are an outside check of it.
Each frame depends on its own name and description only, so that any of them can be made again alone.
"""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from typing import Any

import camera_model
import electrical_truth
import house_detail_frames
import house_frames
import house_weather
import numpy as np
import pump_station_frames
import pump_station_logs
import pump_station_round
import tifffile
from painting import Field, Mask, inside
from PIL import Image
from scipy.ndimage import binary_dilation, binary_erosion, gaussian_filter, uniform_filter
from shot import Shot

SURVEYS = {
    "house": house_frames.SHOTS + house_detail_frames.SHOTS,
    "pump_station": pump_station_frames.SHOTS + pump_station_round.SHOTS,
}
LOGS = {"house": house_weather.LOGS, "pump_station": pump_station_logs.LOGS}
PATTERNS = {  # what a finding is consistent with, by what it truly is; the rest: no pattern of a building
    "plateau": "missing or displaced insulation",
    "bridge": "thermal bridge",
    "plume": "air leakage",
    "damp": "moisture",
    "wet insulation": "moisture",
    "reflection": "possible reflection",
}
EDGE_PX = 3  # pixels this near to an edge are blurred: they say nothing about temperature
BLUR_K = 0.05  # and so does every pixel whose temperature the blur alone changes by more


def main() -> None:
    """Write the frames asked for, or all of them with a fresh truth.json."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0] if __doc__ else None)
    parser.add_argument("--into", type=Path, default=Path(__file__).parent, help="folder to write to")
    parser.add_argument("--only", nargs="*", metavar="ID", help="frames to make; their truth.json holds only them")
    wanted = parser.parse_args()
    for survey, shots in SURVEYS.items():
        made = [make() for make in shots]
        chosen = [shot for shot in made if not wanted.only or shot.id in wanted.only]
        if chosen:
            facts = {shot.id: write(shot, wanted.into / survey) for shot in chosen}
            text = json.dumps(facts, indent=1, ensure_ascii=False)
            (wanted.into / survey / "truth" / "truth.json").write_text(text + "\n", encoding="utf-8")
        for name, log in LOGS[survey].items():
            if not wanted.only:
                (wanted.into / survey / name).write_text(log(), encoding="utf-8")


def write(shot: Shot, folder: Path) -> dict[str, Any]:
    """Write one frame and its truth arrays; return what else is true about it."""
    arriving = camera_model.radiance_at_camera(shot.subject, shot.camera, shot.air, shot.window)
    apparent_c = camera_model.expose(shot.id, arriving, shot.camera, shading_k=shot.shading_k, offset_k=shot.offset_k)
    over_range = camera_model.saturated(apparent_c, shot.camera)
    for name in ("frames", "truth"):
        (folder / name).mkdir(parents=True, exist_ok=True)
    encode(folder / "frames" / shot.file, camera_model.stored(apparent_c, shot.camera))
    truth_c = shot.subject.temperature_c
    np.savez_compressed(
        folder / "truth" / f"{shot.id}.npz",
        temperature_ck=np.rint((truth_c + 273.15) * 100).astype("uint16"),
        defect=labels(shot),
        exclude=blurred(shot) | binary_dilation(over_range, iterations=EDGE_PX),
    )
    return facts(shot, truth_c, over_range)


def encode(path: Path, numbers: np.ndarray) -> None:
    """Write stored numbers in the encoding that the file's suffix names."""
    if path.suffix == ".tif":
        tifffile.imwrite(path, numbers, photometric="minisblack", compression="deflate", metadata=None, software=False)
    elif path.suffix == ".png":
        Image.fromarray(numbers).save(path, optimize=True)
    elif path.suffix == ".npy":
        np.save(path, numbers)
    else:
        np.savetxt(path, numbers, fmt="%.2f", delimiter=",")


def labels(shot: Shot) -> np.ndarray:
    """0 where sound, k inside defect k; where two overlap the stronger one."""
    image = np.zeros(shot.camera.shape, "uint8")
    strongest = np.zeros(shot.camera.shape)
    for k, defect in enumerate(shot.subject.defects, start=1):
        here = defect.mask & (np.abs(defect.delta_k) > strongest)
        image[here], strongest[here] = k, np.abs(defect.delta_k)[here]
    return image


def blurred(shot: Shot) -> Mask:
    """Pixels where a camera cannot show the temperature: near edges of optics or temperature, and on reflectors."""
    truth_c = shot.subject.temperature_c
    edges = np.abs(gaussian_filter(truth_c, shot.camera.blur_px, mode="nearest") - truth_c) > BLUR_K
    for area in (*shot.subject.patches, *shot.subject.parts):
        mask = inside(area.corners, shot.camera.shape)
        rim = binary_dilation(mask, iterations=EDGE_PX) & ~binary_erosion(mask, iterations=EDGE_PX, border_value=1)
        edges |= mask | rim if getattr(area, "role", "") == "reflector" else rim
    for mirage in shot.subject.mirages:
        edges |= binary_dilation(mirage.mask, iterations=EDGE_PX)
    return edges


def facts(shot: Shot, truth_c: Field, over_range: Mask) -> dict[str, Any]:
    """What is true about a frame beside its arrays: inputs, surfaces, defects, components."""
    subject, camera, air = shot.subject, shot.camera, shot.air
    pixel_m = camera.ifov_mrad * 1e-3 * air.distance_m
    label_image = labels(shot)
    components = [
        {"name": part.name, "emissivity": part.emissivity, "polygon": part.corners}
        | component_temperatures(truth_c, inside(part.corners, camera.shape))
        for part in subject.parts
    ]
    parts = list(zip(electrical_truth.components(shot, components), subject.parts, strict=True))
    more = electrical(shot, [one for one, part in parts if not part.is_drawn]) | shot.more
    area_m2 = np.full(camera.shape, pixel_m**2) if shot.pixel_area_m2 is None else shot.pixel_area_m2
    return {
        "file": f"frames/{shot.file}",
        "sound": shot.sound,
        "camera": camera.name,
        "band_um": camera.band_um,
        "emissivity": subject.emissivity,
        "reflected_c": round(float(np.median(subject.reflected_c)), 3),
        "air_c": air.air_c,
        "relative_humidity_percent": air.relative_humidity_percent,
        "distance_m": air.distance_m,
        "atmosphere_transmittance": round(camera_model.air_transmittance(camera.band_um, air), 6),
        "window": vars(shot.window) if shot.window else None,
        "camera_offset_k": shot.offset_k,
        "shading_in_corners_k": shot.shading_k,
        "blur_px": camera.blur_px,
        "noise_k_at_30_c": camera.noise_k,
        "pixel_m": round(pixel_m, 6),
        "saturated_pixels": int(over_range.sum()),
        "surfaces": [
            {"name": patch.name, "role": patch.role, "emissivity": patch.emissivity, "polygon": patch.corners}
            | ({} if patch.emissivity_total is None else {"emissivity_total": patch.emissivity_total})
            | {"mean_c": round(float(truth_c[inside(patch.corners, camera.shape)].mean()), 2)}
            for patch in subject.patches
        ],
        "defects": [
            {
                "label": k,
                "kind": defect.kind,
                "pattern": PATTERNS.get(defect.kind),
                "sense": "hot" if defect.delta_k.sum() > 0 else "cold",
                "delta_k": round(float(defect.delta_k.flat[np.abs(defect.delta_k).argmax()]), 2),
                "mean_delta_k": round(float(defect.delta_k[label_image == k].mean()), 2),
                "threshold_k": defect.threshold_k,
                "against": defect.against,
                "pixels": int((label_image == k).sum()),
                "area_m2": round(float(area_m2[label_image == k].sum()), 6),
            }
            | defect.more
            for k, defect in enumerate(subject.defects, start=1)
        ],
        "components": [one for one, part in parts if part.is_drawn],
        "mirages": [
            {"kind": mirage.kind, "pattern": PATTERNS.get(mirage.kind), "mirrored_c": mirage.mirrored_c}
            | {"pixels": int(mirage.mask.sum()), "extent": extent(mirage.mask)}
            for mirage in subject.mirages
        ],
    } | more


def electrical(shot: Shot, to_be_found: list[dict[str, Any]]) -> dict[str, Any]:
    """Conditions that electrical parts are judged by, and the parts that the survey leaves to be found."""
    names = ("ambient_c", "mean_radiant_c", "wind_m_s", "irradiance_w_m2")
    facts = {name: getattr(shot, name) for name in names if getattr(shot, name) is not None}
    if shot.method != "contact":
        facts["method"] = shot.method
    return facts | ({"to_be_found": to_be_found} if to_be_found else {})


def extent(mask: Mask) -> list[int]:
    """The smallest upright rectangle around a mask: left, top, right, bottom [px]."""
    y, x = np.nonzero(mask)
    return [int(edge) for edge in (x.min(), y.min(), x.max(), y.max())]


def component_temperatures(truth_c: Field, mask: Mask) -> dict[str, float]:
    """Highest mean over 3 × 3 pixels that lie inside, and the mean over all."""
    spots = uniform_filter(truth_c, 3)[binary_erosion(mask, np.ones((3, 3)))]
    return {"max_c": round(float(spots.max()), 2), "mean_c": round(float(truth_c[mask].mean()), 2)}


if __name__ == "__main__":
    main()
