"""The wheel holds everything the program needs: a sample runs from it, outside the checkout."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]


def python(*arguments: object, cwd: Path, **environment: str) -> subprocess.CompletedProcess[str]:
    """Run this interpreter in a folder; its output is shown where it fails."""
    done = subprocess.run(
        [sys.executable, *map(str, arguments)],
        cwd=cwd,
        env=os.environ | environment,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stdout + done.stderr
    return done


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The wheel, built with what the test extra installs: no network."""
    folder = tmp_path_factory.mktemp("wheel")
    python("-m", "build", "--wheel", "--no-isolation", "--outdir", folder, ROOT, cwd=folder)
    (built,) = folder.glob("*.whl")
    return built


def test_the_wheel_holds_the_whole_package_and_nothing_else(wheel: Path) -> None:
    package = ROOT / "irsurvey"
    wanted = {
        f"irsurvey/{path.relative_to(package).as_posix()}"
        for path in package.rglob("*")
        if path.is_file() and "__pycache__" not in path.parts
    }
    with zipfile.ZipFile(wheel) as archive:
        names = set(archive.namelist())
    assert {name for name in names if ".dist-info/" not in name} == wanted
    assert any(name.endswith("licenses/LICENSE") for name in names)


def test_a_sample_runs_from_the_wheel_outside_the_checkout(wheel: Path, tmp_path: Path) -> None:
    site, away = tmp_path / "site", tmp_path / "away"
    python("-m", "pip", "install", "--quiet", "--no-index", "--no-deps", "--target", site, wheel, cwd=tmp_path)
    shutil.copytree(ROOT / "sample_frames" / "pump_station", away / "pump_station")
    environment = {"PYTHONPATH": str(site)}

    where = python("-c", "import irsurvey; print(irsurvey.__file__)", cwd=away, **environment).stdout.strip()
    assert Path(where).is_relative_to(site)
    command = site / "bin" / "irsurvey" if os.name == "posix" else site / "Scripts" / "irsurvey"
    printed = python(command, "run", "pump_station", "-o", "report", cwd=away, **environment).stdout
    assert "report/report.html" in printed.replace("\\", "/")
    report = json.loads((away / "report" / "report.json").read_text(encoding="utf-8"))
    assert {frame["status"] for frame in report["frames"]} == {"analysed"}
    for table in ("materials", "criteria"):
        assert len(python(command, table, cwd=away, **environment).stdout.splitlines()) > 5
    for schema in ("survey", "report"):
        assert json.loads(python(command, "schema", schema, cwd=away, **environment).stdout)
