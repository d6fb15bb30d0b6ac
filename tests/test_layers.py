"""The layers of DEVELOPERS.md hold: the test reads the table there and the imports of every module."""

from __future__ import annotations

import ast
import sys
from collections.abc import Iterator
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PACKAGE = "irsurvey"

HOMES = {
    "click": {"cli"},
    "cv2": {"radiometry", "anomalies", "geometry", "analysis", "report"},
    "fpdf": {"report"},
    "imagecodecs": {"readers"},
    "jinja2": {"report"},
    "matplotlib": {"report"},
    "pydantic": {"survey", "report"},
    "rich": {"cli"},
    "skimage": {"anomalies", "geometry"},
    "tifffile": {"readers", "report"},
}
"""Where a heavy dependency may be imported."""

CALCULATING = {"radiometry", "heat", "anomalies", "geometry", "assess", "uncertainty", "analysis", "pipeline"}
"""Folders without input and output; their own tables come through importlib.resources."""
READS_OR_WRITES = {"io", "os", "pathlib", "shutil", "socket", "subprocess", "tempfile", "urllib"}


def layer_table(text: str) -> dict[str, int]:
    """Unit (folder or module right under the package) → height of its layer, 0 at the bottom."""
    block = text.split("## Layers", 1)[1].split("```text\n", 1)[1].split("```", 1)[0]
    lines = block.strip().splitlines()
    return {unit: height for height, line in enumerate(reversed(lines)) for unit in line.split()}


def modules(folder: Path) -> dict[str, Path]:
    """Dotted name → file of every module of the package in `folder`, the package's own __init__ left out."""
    found = {}
    for path in sorted(folder.rglob("*.py")):
        parts = path.relative_to(folder).with_suffix("").parts
        name = ".".join((PACKAGE, *(parts[:-1] if parts[-1] == "__init__" else parts)))
        if name != PACKAGE:
            found[name] = path
    return found


def imports(path: Path) -> Iterator[str]:
    """Every dotted name a module imports, anywhere in it; `from a import b` gives "a.b"."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path.name}: imports are absolute"
            yield from (f"{node.module}.{alias.name}" for alias in node.names)


def graph(folder: Path) -> dict[str, set[str]]:
    """Module → modules of the package it imports."""
    known = modules(folder)

    def target(name: str) -> str | None:
        while name and name not in known:
            name = name.rpartition(".")[0]
        return name or None

    def targets(path: Path) -> set[str]:
        inside = (name for name in imports(path) if name.split(".")[0] == PACKAGE)
        return {found for name in inside if name != f"{PACKAGE}.__version__" for found in [target(name) or PACKAGE]}

    return {name: targets(path) - {name} for name, path in known.items()}


def unit(module: str) -> str:
    return module.split(".")[1] if "." in module else module


def violations(folder: Path, layers: dict[str, int]) -> list[str]:
    """What breaks the layers: a unit without one, an import that does not point strictly down, a cycle."""
    found = [f"{name} has no layer" for name in sorted({unit(name) for name in modules(folder)} - layers.keys())]
    edges = graph(folder)
    for module, targets in edges.items():
        for other in sorted(targets):
            above, below = layers.get(unit(module), -1), layers.get(unit(other), sys.maxsize)
            if unit(module) != unit(other) and above <= below:
                found.append(f"{module} imports {other}")
    try:
        TopologicalSorter(edges).prepare()
    except CycleError as error:
        found.append(f"cycle {error.args[1]}")
    return found


SOUND = {
    "cli.py": "from irsurvey import __version__\nfrom irsurvey.pipeline import analyse\n",
    "pipeline.py": "from irsurvey.heat import air\nfrom irsurvey.radiometry.planck import band_radiance\n",
    "heat/__init__.py": "",
    "heat/air.py": "",
    "heat/wind.py": "from irsurvey.heat import air\n",
    "radiometry/__init__.py": "",
    "radiometry/planck.py": "",
}
SOUND_LAYERS = {"cli": 2, "pipeline": 1, "heat": 0, "radiometry": 0}

LAYERS = layer_table((ROOT / "DEVELOPERS.md").read_text(encoding="utf-8"))
MODULES = modules(ROOT / PACKAGE)


def test_every_import_points_strictly_down() -> None:
    assert violations(ROOT / PACKAGE, LAYERS) == []


def test_every_unit_of_the_table_exists() -> None:
    assert set(LAYERS) == {unit(name) for name in MODULES}


@pytest.mark.parametrize(
    ("module", "line", "complaint"),
    [
        ("heat/air.py", "from irsurvey.pipeline import analyse", "irsurvey.heat.air imports irsurvey.pipeline"),
        ("heat/air.py", "def f():\n    import irsurvey.cli", "irsurvey.heat.air imports irsurvey.cli"),
        (
            "heat/air.py",
            "from irsurvey.radiometry import planck",
            "irsurvey.heat.air imports irsurvey.radiometry.planck",
        ),
        ("heat/air.py", "from irsurvey import analyse", "irsurvey.heat.air imports irsurvey"),
        ("heat/air.py", "from irsurvey.heat.wind import gust", "cycle"),
        ("clouds/wind.py", "", "clouds has no layer"),
        ("clouds.py", "", "clouds has no layer"),
    ],
)
def test_the_check_sees_a_violation(tmp_path: Path, module: str, line: str, complaint: str) -> None:
    for name, text in (SOUND | {module: line + "\n"}).items():
        (tmp_path / name).parent.mkdir(exist_ok=True)
        (tmp_path / name).write_text(text)
    assert complaint in "\n".join(violations(tmp_path, SOUND_LAYERS))


def test_the_check_passes_what_points_down(tmp_path: Path) -> None:
    for name, text in SOUND.items():
        (tmp_path / name).parent.mkdir(exist_ok=True)
        (tmp_path / name).write_text(text)
    assert violations(tmp_path, SOUND_LAYERS) == []


@pytest.mark.parametrize("package", HOMES)
def test_a_heavy_dependency_has_its_homes(package: str) -> None:
    users = {
        unit(name) for name, path in MODULES.items() if package in {found.split(".")[0] for found in imports(path)}
    }
    assert users <= HOMES[package]


def test_calculating_folders_read_and_write_nothing() -> None:
    calculating = {name: path for name, path in MODULES.items() if unit(name) in CALCULATING}
    for name, path in calculating.items():
        assert {found.split(".")[0] for found in imports(path)} & READS_OR_WRITES == set(), name
        calls = {
            node.func.id
            for node in ast.walk(ast.parse(path.read_text(encoding="utf-8")))
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Name)
        }
        assert calls & {"open", "print", "input"} == set(), name
