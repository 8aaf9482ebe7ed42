"""The package as it is built and installed, and the tools the tests themselves rely on."""

import json
import math
import os
import re
import shutil
import subprocess
import sys
import time
import tomllib
import zipfile
from pathlib import Path

import pytest

import trapdesk
from tests.bench import yardstick
from trapdesk import engine
from trapdesk.faces import cli

ROOT = Path(__file__).resolve().parent.parent
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))
README = (ROOT / "README.md").read_text("utf-8")

# What store/store.py does to find the presets, once in an installed copy and once in a checkout.
FIND_PRESETS = """
from importlib import resources
from pathlib import Path
import trapdesk
packaged = resources.files("trapdesk") / "presets"
folder = packaged if packaged.is_dir() else Path(trapdesk.__file__).parents[1] / "presets"
print(*sorted(file.name for file in folder.iterdir() if file.name.endswith(".toml")))
"""


def preset_names() -> list[str]:
    return sorted(path.name for path in (ROOT / "presets").glob("*.toml"))


@pytest.fixture(scope="module")
def wheel(tmp_path_factory) -> Path:
    """Build the wheel from a copy, so that no build folder is left in the checkout."""
    copy = tmp_path_factory.mktemp("copy")
    for name in ("pyproject.toml", "README.md", "LICENSE"):
        shutil.copy(ROOT / name, copy)
    for name in ("trapdesk", "presets"):
        shutil.copytree(ROOT / name, copy / name, ignore=shutil.ignore_patterns("__pycache__"))
    target = tmp_path_factory.mktemp("wheel")
    build = f"from setuptools import build_meta; build_meta.build_wheel({str(target)!r})"
    done = subprocess.run(
        [sys.executable, "-c", build], cwd=copy, capture_output=True, text=True, timeout=120, check=False
    )
    assert done.returncode == 0, done.stderr[-2000:]
    (built,) = target.glob("*.whl")
    return built


def run_unpacked(wheel: Path, folder: Path, *arguments: str) -> str:
    """Run a clean interpreter that sees the wheel's content and not the checkout."""
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(folder)
    environment = {**os.environ, "PYTHONPATH": str(folder), "PYTHONSAFEPATH": "1"}
    return subprocess.run(
        [sys.executable, *arguments], cwd=folder, env=environment, capture_output=True, text=True, check=True
    ).stdout


def test_wheel_holds_every_file(wheel):
    held = set(zipfile.ZipFile(wheel).namelist())
    wanted = {f"trapdesk/presets/{name}" for name in preset_names()}
    for path in (ROOT / "trapdesk").rglob("*"):
        if path.is_file() and path.suffix != ".pyc":
            wanted.add(path.relative_to(ROOT).as_posix())
    assert not wanted - held
    assert any(name.endswith("licenses/LICENSE") for name in held)


def test_wheel_has_the_version_and_the_command(wheel):
    assert wheel.name.startswith(f"trapdesk-{trapdesk.__version__}-py3-")
    with zipfile.ZipFile(wheel) as archive:
        (points,) = (name for name in archive.namelist() if name.endswith("entry_points.txt"))
        assert "trapdesk = trapdesk.faces.cli:main" in archive.read(points).decode()


def test_presets_are_found_in_an_installed_copy(wheel, tmp_path):
    assert preset_names()
    assert run_unpacked(wheel, tmp_path, "-c", FIND_PRESETS).split() == preset_names()
    assert (tmp_path / "trapdesk" / "presets").is_dir()


def test_presets_are_found_in_a_checkout():
    done = subprocess.run(
        [sys.executable, "-c", FIND_PRESETS], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert done.stdout.split() == preset_names()


def test_every_folder_of_code_is_a_package():
    folders = {path.parent for path in (ROOT / "trapdesk").rglob("*.py")}
    names = {".".join(folder.relative_to(ROOT).parts) for folder in folders}
    assert set(PROJECT["tool"]["setuptools"]["packages"]) == names | {"trapdesk.presets"}
    assert not [str(folder) for folder in folders if not (folder / "__init__.py").is_file()]


def test_engine_map_names_every_file():
    named = re.findall(r"^``(\w+)``  ", engine.__doc__.split("The symbols")[0], re.MULTILINE)
    files = (ROOT / "trapdesk" / "engine").glob("*.py")
    assert sorted(named) == sorted(path.stem for path in files if path.stem != "__init__")


def test_readme_has_two_commands():
    commands = re.findall(r"^python3 .*$", README, re.MULTILINE)
    assert len(commands) == 2
    opens, tests = commands
    assert opens.endswith(".venv/bin/trapdesk")
    assert tests.endswith("python -m pytest -q")
    fenced = re.findall(r"^```sh\n(.*?)\n```$", README, re.MULTILINE | re.DOTALL)
    assert fenced[:2] == commands


def test_runs_of_the_linear_algebra_have_one_thread():
    assert os.environ["OPENBLAS_NUM_THREADS"] == os.environ["OMP_NUM_THREADS"] == "1"


def test_yardstick_measures_its_own_definition():
    assert len(yardstick.PROBLEMS) == 100
    for matrix, right in yardstick.PROBLEMS:
        assert matrix.shape == (64, 64)
        assert right.shape == (64,)
        assert matrix.dtype == right.dtype == complex
    assert yardstick.yardstick(runs=3) > 0


def test_ratio_is_time_in_yardsticks():
    unit = yardstick.yardstick()
    slept = yardstick.ratio(lambda: time.sleep(4 * unit), runs=5)
    # A sleep lasts at least as long as asked; the other side allows for a busy machine.
    assert 2 < slept < 12


def test_record_fails_past_twice_the_limit(monkeypatch):
    monkeypatch.setattr(yardstick, "RECORDS", [])
    yardstick.record("fast", 2.0, limit=1.0)
    with pytest.raises(AssertionError, match="slow: 2.01 yardsticks, more than twice the limit of 1"):
        yardstick.record("slow", 2.01, limit=1.0)
    with pytest.raises(AssertionError, match="broken"):
        yardstick.record("broken", math.nan, limit=1.0)
    lines = yardstick.table(yardstick.RECORDS)
    assert len(lines) == 4
    assert "over the limit" in lines[1]
    assert "FAILED" in lines[2]
    assert "FAILED" in lines[3]
    assert yardstick.table([]) == []


def test_design_in_the_readme_works_as_it_stands(tmp_path, capsys):
    (text,) = re.findall(r"^```toml\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)
    path = tmp_path / "own.toml"
    path.write_text(text)
    assert cli.main(["figures", str(path), "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert all(band["worst_swr"] <= 2 for band in found["bands"].values())
    assert not [finding for finding in found["findings"] if finding["level"] == "stop"]
