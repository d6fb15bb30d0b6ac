"""README.md and DEVELOPERS.md say what is so: commands, names, the session, the set-up, and what CI runs."""

from __future__ import annotations

import doctest
import importlib
import os
import re
import shutil
import stat
import subprocess
import tomllib
from pathlib import Path

import click
import numpy as np
import pytest
from click.testing import CliRunner
from PIL import Image

import irsurvey
from irsurvey.cli import main
from irsurvey.readings import BAND, COLUMNS
from irsurvey.run import check

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")


def blocks(text: str, language: str) -> list[str]:
    """The fenced blocks of a language."""
    return re.findall(rf"^```{language}\n(.*?)^```$", text, re.DOTALL | re.MULTILINE)


def shell_lines(text: str) -> list[str]:
    """Each sh block as one line, continuations joined."""
    return [block.replace("\\\n", " ").strip() for block in blocks(text, "sh")]


SETUP, TESTS = shell_lines(README)


@pytest.fixture
def checkout(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder that looks like a checkout to the sample commands, and is the current one."""
    shutil.copytree(ROOT / "sample_frames" / "house", tmp_path / "sample_frames" / "house")
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize("text", [README, DEVELOPERS], ids=["README", "DEVELOPERS"])
def test_documented_commands_exist_with_their_options(text: str) -> None:
    code = [*re.findall(r"`([^`\n]+)`", text), *blocks(text, "text"), *blocks(text, "sh")]
    calls = [call for part in code for call in re.findall(r"(?:^|[\s/`])irsurvey ([a-z]+)([^\n|&;`]*)", part)]
    assert calls
    for name, rest in calls:
        assert name in main.commands, f"irsurvey {name}"
        options = {option for parameter in main.commands[name].params for option in parameter.opts}
        assert set(re.findall(r"(?<![\w-])--?[a-z]+", rest)) <= options, f"irsurvey {name}{rest}"


def test_every_command_and_option_is_documented() -> None:
    (table,) = re.findall(r"^\| command \| does \|\n(.*?)\n\n", README, re.DOTALL | re.MULTILINE)
    for name, command in main.commands.items():
        assert f"irsurvey {name}" in table
        for parameter in command.params:
            if isinstance(parameter, click.Option):
                assert parameter.opts[0] in README, f"{name} {parameter.opts[0]}"


def test_exported_names_exist_and_are_documented() -> None:
    assert set(irsurvey.__all__) == set(irsurvey._HOMES)
    for name in irsurvey.__all__:
        module, _, attribute = irsurvey._HOMES[name].partition(":")
        assert getattr(irsurvey, name) is getattr(importlib.import_module(module), attribute)
        assert f"`{name}`" in README
        assert name in dir(irsurvey)
    with pytest.raises(AttributeError, match="no attribute 'nonsense'"):
        _ = irsurvey.nonsense


@pytest.mark.usefixtures("checkout")
def test_the_python_session_of_the_readme_runs() -> None:
    session = doctest.DocTestParser().get_doctest("\n".join(blocks(README, "python")), {}, "README.md", None, 0)
    assert len(session.examples) > 5
    runner = doctest.DocTestRunner(optionflags=doctest.NORMALIZE_WHITESPACE)
    runner.run(session)
    assert runner.failures == 0


def test_the_output_and_picture_of_the_readme_are_those_of_its_command(checkout: Path) -> None:
    command = SETUP.rpartition("&&")[2].split()
    assert command[0] == ".venv/bin/irsurvey"
    result = CliRunner().invoke(main, command[1:])
    assert result.exit_code == 0
    printed = [line.rstrip() for line in result.stdout.splitlines() if line.strip()]
    assert blocks(README, "text")[0].splitlines() == printed

    (picture,) = re.findall(r"!\[[^]]+\]\(([^)]+)\)", README)
    frame = Path(picture).stem
    made = checkout / "report" / "house" / "frames" / frame / "annotated.png"
    shown, real = (np.asarray(Image.open(path).convert("RGB")) for path in (ROOT / picture, made))
    assert shown.shape == real.shape
    # another version of the drawing libraries may set a letter or an edge a little differently, not more
    assert np.mean(np.any(shown != real, axis=-1)) < 0.01


def test_the_readme_has_two_commands_that_each_do_all_their_own_set_up() -> None:
    for command in (SETUP, TESTS):
        assert "\n" not in command
        assert ";" not in command
        assert subprocess.run(["bash", "-n", "-c", command], check=False).returncode == 0
        steps = command.split(" && ")
        assert steps[0].startswith("(python3 -m venv .venv || (apt-get update")
        assert any(step.startswith(".venv/bin/pip install") for step in steps)
        assert all(step.startswith(".venv/bin/") for step in steps[3:])  # behind the brackets of the first
        assert not re.search(r"(?<![\w.])/(?!/)", command.replace(".venv/bin/", ""))  # nothing outside the checkout
    assert "run sample_frames/house/survey.toml -o report/house" in SETUP
    assert "pip install --quiet ." in SETUP
    assert "pip install --quiet -e '.[test]'" in TESTS
    assert "-m pytest" in TESTS


def fake_checkout(folder: Path, test_command: str) -> subprocess.CompletedProcess[str]:
    """Run .ci/run beside a README with another test command, which also makes tools that leave a trace."""
    (folder / ".ci").mkdir()
    shutil.copy(ROOT / ".ci" / "run", folder / ".ci")
    (folder / "README.md").write_text(README.replace(TESTS, test_command), encoding="utf-8")
    (folder / ".venv" / "bin").mkdir(parents=True)
    for tool in ("python", "ruff", "mypy", "chromedriver"):
        path = folder / ".venv" / "bin" / tool
        path.write_text(f'#!/bin/sh\necho "{tool} $*"\n')
        path.chmod(0o755)
    found = {**os.environ, "PATH": f"{folder / '.venv' / 'bin'}{os.pathsep}{os.environ['PATH']}"}  # a browser is there
    return subprocess.run([folder / ".ci" / "run"], capture_output=True, text=True, cwd="/", check=False, env=found)


def test_ci_runs_the_test_command_of_the_readme_and_then_the_checks(tmp_path: Path) -> None:
    done = fake_checkout(tmp_path, "(false || echo made) && echo pytest && pwd")
    assert done.returncode == 0
    lines = done.stdout.splitlines()
    assert lines[1:4] == ["made", "pytest", str(tmp_path.resolve())]
    assert lines[4] == "python -m pytest -n auto -m browser"
    assert [line.split()[0] for line in lines[5:]] == ["ruff", "mypy"]


def test_ci_fails_with_the_test_command(tmp_path: Path) -> None:
    done = fake_checkout(tmp_path, "echo pytest && false")
    assert done.returncode != 0
    assert "ruff" not in done.stdout


def test_ci_fails_without_a_test_command(tmp_path: Path) -> None:
    assert fake_checkout(tmp_path, "echo nothing").returncode != 0


def test_ci_is_executable() -> None:
    assert (ROOT / ".ci" / "run").stat().st_mode & stat.S_IXUSR
    assert os.access(ROOT / ".ci" / "run", os.X_OK)


@pytest.mark.parametrize("text", blocks(README, "toml"), ids=["in short", "a building", "an electrical round"])
def test_the_survey_files_of_the_readme_are_some(text: str, tmp_path: Path) -> None:
    (tmp_path / "survey.toml").write_text(text, encoding="utf-8")
    stored = np.random.default_rng(0).normal(7300, 2, (480, 640)).astype(np.uint16)
    for frame in tomllib.loads(text)["frame"]:
        Image.fromarray(stored).save(tmp_path / frame["file"])
    checked = check(tmp_path / "survey.toml")
    assert checked.unreadable == ()


def test_the_columns_of_readings_are_documented() -> None:
    for name in COLUMNS | BAND:
        assert f"`{name}`" in README
        assert name in (main.commands["readings"].help or "")


def test_links_and_paths_of_the_documents_lead_somewhere() -> None:
    for text in (README, DEVELOPERS):
        for target in re.findall(r"\]\(([^)#]+)\)", text):
            assert (ROOT / target).exists(), target
        for path in re.findall(r"`((?:irsurvey|tests|sample_frames)/[\w./-]+)`", text):
            assert (ROOT / path).exists(), path


def test_the_tree_of_the_developers_guide_is_the_tree() -> None:
    (tree,) = (block for block in blocks(DEVELOPERS, "text") if block.startswith("irsurvey/"))
    inside = tree.split("tests/")[0].splitlines()[1:]
    named = {
        word.rstrip("/") for line in inside for word in re.findall(r"[\w.]+(?:\.py|\.toml|/)", line.split("  ")[1])
    }
    real = {path.name for path in (ROOT / "irsurvey").iterdir() if path.name not in ("py.typed", "__pycache__")}
    assert named == real
