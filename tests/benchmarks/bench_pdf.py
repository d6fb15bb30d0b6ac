"""What report.pdf of 100 frames costs in time and size, against a document of the same pictures and nothing else.

Run with `pytest tests/benchmarks/bench_pdf.py -s`.  The frames are those of the sample house, again and again, each
with pixels of its own, so that no picture is embedded once for many frames; then the same with noise, as large
detectors give it.  At most 30 s and 25 MB are wanted, but no time decides pass or fail, only that there are sheets."""

from __future__ import annotations

import io
from collections.abc import Callable
from dataclasses import replace
from itertools import cycle, islice
from pathlib import Path
from time import perf_counter

import numpy as np
import pytest
from fpdf import FPDF
from PIL import Image
from pypdf import PdfReader

from irsurvey.model import FrameTask, Report
from irsurvey.report.pdf import write
from irsurvey.run import load_survey, run

pytestmark = pytest.mark.benchmark

HOUSE = Path(__file__).parents[2] / "sample_frames" / "house" / "survey.toml"
FRAMES = 100


def moved(picture: Image.Image, number: int) -> Image.Image:
    """The same picture, moved by so many pixels."""
    pixels = Image.fromarray(np.roll(np.asarray(picture), number, axis=1), "P")
    pixels.putpalette(picture.getpalette() or [])
    return pixels


def noisy(picture: Image.Image, number: int) -> Image.Image:
    """Of 1024 × 768 pixels, with noise of 2 % of the scale."""
    large = np.asarray(picture.resize((1116, 768))).astype(float)
    grain = np.random.default_rng(number).normal(0, 5, large.shape)
    pixels = Image.fromarray(np.clip(large + grain, 0, 246).astype(np.uint8), "P")
    pixels.putpalette(picture.getpalette() or [])
    return pixels


def repeated(
    report: Report, tasks: tuple[FrameTask, ...], out: Path, made: Callable[[Image.Image, int], Image.Image]
) -> tuple[Report, tuple[FrameTask, ...]]:
    """The report with its frames repeated until there are enough of them, each with a picture of its own."""
    by_id = {task.id: task for task in tasks}
    frames, of_frames = [], []
    for number, frame in enumerate(islice(cycle(report.frames), FRAMES)):
        id_ = f"{frame.id}.{number}"
        findings = (replace(one, id=f"{id_}-{one.label}", key=f"{one.key}.{number}") for one in frame.findings)
        frames.append(replace(frame, id=id_, findings=tuple(findings)))
        of_frames.append(replace(by_id[frame.id], id=id_))
        folder = out / "frames" / id_
        folder.mkdir(parents=True, exist_ok=True)
        with Image.open(out / "frames" / frame.id / "annotated.png") as picture:
            made(picture, number).save(folder / "annotated.png")
    return replace(report, frames=tuple(frames)), tuple(of_frames)


def pictures_alone(report: Report, out: Path) -> int:
    """The same pictures, one on each page, by the same library; its size in bytes."""
    pdf = FPDF()
    for frame in report.frames:
        pdf.add_page()
        pdf.image(io.BytesIO((out / "frames" / frame.id / "annotated.png").read_bytes()), w=100)
    return len(pdf.output())


def test_a_hundred_frames_against_their_pictures_alone(tmp_path: Path) -> None:
    report = run(HOUSE, tmp_path)
    tasks = load_survey(HOUSE).tasks
    print()
    for name, made in (("sample house", moved), ("1024 × 768 pixels with noise", noisy)):
        many, of_many = repeated(report, tasks, tmp_path, made)
        start = perf_counter()
        size = pictures_alone(many, tmp_path)
        floor = perf_counter() - start
        start = perf_counter()
        path = write(many, of_many, tmp_path)
        took = perf_counter() - start
        pages = len(PdfReader(path).pages)
        assert pages > FRAMES
        print(
            f"{name}: {FRAMES} frames, {pages} pages in {took:.1f} s, {took / floor:.1f} × the pictures alone;"
            f" {path.stat().st_size / 1e6:.1f} MB, the pictures alone {size / 1e6:.1f} MB"
        )
