"""``pip install .`` into an empty environment, and the tool used from another folder."""

from __future__ import annotations

import os
import subprocess
import sys
import time
import urllib.request
import zipfile
from email.parser import Parser
from pathlib import Path

import pytest

from explorer import __version__
from explorer.environment import python_of
from explorer.server import free_port
from tests.start.small_checkout import ROOT, base_python

pytestmark = pytest.mark.slow

MODULES = ("explorer", "model", "sweeps", "presets")


def pip(python: str | Path, *arguments: str) -> None:
    """Run pip, or skip with its last words where packages cannot be fetched."""
    command = [str(python), "-I", "-m", "pip", "--disable-pip-version-check", *arguments]
    ran = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    if ran.returncode and "connection" in (ran.stdout + ran.stderr).lower():
        pytest.skip(f"needs the package index: {ran.stderr[-300:]}")
    assert ran.returncode == 0, ran.stdout[-2000:] + ran.stderr[-2000:]


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("wheel")
    pip(sys.executable, "wheel", "--quiet", "--no-deps", "--wheel-dir", str(folder), str(ROOT))
    (built,) = folder.glob("twistfront-*.whl")
    return built


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of programs of an environment that got nothing but the wheel and its needs."""
    folder = tmp_path_factory.mktemp("installed")
    subprocess.run([base_python(), "-m", "venv", str(folder / "venv")], check=True)
    lines = (ROOT / "pins.txt").read_text("utf-8").splitlines()
    known = [line.rstrip(" \\") for line in lines if "==" in line]
    (folder / "known.txt").write_text("\n".join(known), "utf-8")
    python = python_of(folder / "venv")
    pip(python, "install", "--quiet", "-c", str(folder / "known.txt"), str(wheel))
    return python.parent


def run(programs: Path, folder: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    clean = {name: value for name, value in os.environ.items() if not name.startswith("PYTHON")}
    program = programs / ("twistfront.exe" if os.name == "nt" else "twistfront")
    return subprocess.run(
        [str(program), *arguments],
        cwd=folder,
        env=clean,
        capture_output=True,
        text=True,
        check=False,
    )


def test_the_wheel_holds_the_four_folders_and_the_licence_only(wheel):
    names = zipfile.ZipFile(wheel).namelist()
    info = f"twistfront-{__version__}.dist-info"
    assert {name.split("/")[0] for name in names} == {*MODULES, info}
    assert f"{info}/licenses/LICENSE" in names
    shipped = {name for name in names if name.startswith("presets/")}
    presets = {path for path in (ROOT / "presets").rglob("*") if path.is_file()}
    assert shipped == {path.relative_to(ROOT).as_posix() for path in presets}
    assert {f"{package}/py.typed" for package in MODULES[:3]} <= set(names)


def test_the_wheel_says_what_it_is(wheel):
    with zipfile.ZipFile(wheel) as archive:
        text = archive.read(f"twistfront-{__version__}.dist-info/METADATA").decode()
    told = Parser().parsestr(text)
    assert told["Name"] == "twistfront"
    assert told["License-Expression"] == "MIT"
    assert told["Requires-Python"] == ">=3.11"
    assert told["Description-Content-Type"] == "text/markdown"
    assert told.get_all("Provides-Extra") == ["cluster"]  # the only optional one


def test_an_installed_copy_runs_from_any_folder_and_makes_no_environment(installed, tmp_path):
    version = run(installed, tmp_path, "--version")
    assert (version.returncode, version.stdout) == (0, f"twistfront {__version__}\n")
    described = run(installed, tmp_path, "--help")
    assert described.returncode == 0, described.stderr
    assert "sweep" in described.stdout
    assert list(tmp_path.iterdir()) == []


def test_an_installed_copy_opens_the_workbench(installed, tmp_path):
    port = free_port(9200)
    program = python_of(installed.parent)
    command = [str(program), "-m", "explorer", "--no-browser", "--port", str(port)]
    home = os.environ | {"TWISTFRONT_HOME": str(tmp_path)}
    with subprocess.Popen(command, cwd=tmp_path, env=home, stderr=subprocess.DEVNULL) as server:
        try:
            assert any(answers(port) for _ in range(300))
        finally:
            server.terminate()


def answers(port: int) -> bool:
    time.sleep(0.1)
    try:
        with urllib.request.urlopen(f"http://127.0.0.1:{port}/_stcore/health", timeout=1) as got:
            return bool(got.status == 200)
    except OSError:
        return False
