"""A checkout in small: the real start, one tiny package to install, no network.

``SmallCheckout`` is a folder with the start's own files, lists that pin two packages made here,
and a command that needs one of them.
"""

from __future__ import annotations

import hashlib
import os
import shutil
import subprocess
import sys
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from unittest import mock

from explorer.environment import folders

ROOT = Path(__file__).resolve().parents[2]
START = ("__init__.py", "__main__.py", "environment.py", "preparing.py")

COMMANDS = """
def main(arguments):
    import scales
    print("weighed", scales.KG, *arguments)
    return 7 if "seven" in arguments else 0
"""
TESTS = """
import sys
from explorer.environment import enter
enter("test", "tests", sys.argv[1:])
import rulers, scales
print("measured", rulers.MM)
"""


def make_wheel(folder: Path, name: str, version: str, text: str) -> str:
    """Write a wheel of one module; returns its line in a hash-pinned list."""
    folder.mkdir(parents=True, exist_ok=True)
    info = f"{name}-{version}.dist-info"
    files = {
        f"{name}.py": text,
        f"{info}/METADATA": f"Metadata-Version: 2.1\nName: {name}\nVersion: {version}\n",
        f"{info}/WHEEL": "Wheel-Version: 1.0\nRoot-Is-Purelib: true\nTag: py3-none-any\n",
    }
    record = "".join(f"{file},,\n" for file in (*files, f"{info}/RECORD"))
    wheel = folder / f"{name}-{version}-py3-none-any.whl"
    with zipfile.ZipFile(wheel, "w") as archive:
        for file, content in (files | {f"{info}/RECORD": record}).items():
            archive.writestr(zipfile.ZipInfo(file), content)
    mark = hashlib.sha256(wheel.read_bytes()).hexdigest()
    return f"{name}=={version} \\\n    --hash=sha256:{mark}\n"


@dataclass(frozen=True)
class SmallCheckout:
    """folder : the checkout; wheels : folder or address where pip finds the packages."""

    folder: Path
    wheels: str

    @classmethod
    def make(cls, folder: Path, wheels: Path) -> SmallCheckout:
        """Lay out a fresh checkout."""
        scales = make_wheel(wheels, "scales", "1.0", "KG = 85\n")
        rulers = make_wheel(wheels, "rulers", "2.0", "MM = 25\n")
        for package in ("explorer", "tests"):
            (folder / package).mkdir(parents=True)
        for name in START:
            shutil.copy(ROOT / "explorer" / name, folder / "explorer" / name)
        texts = {
            "explorer/commands.py": COMMANDS,
            "tests/__init__.py": "",
            "tests/__main__.py": TESTS,
            "pins.txt": scales,
            "tests/pins.txt": scales + rulers,
            "pyproject.toml": '[project]\ndependencies = ["scales>=1.0"]\n'
            '[dependency-groups]\ntest = ["rulers>=2"]\n',
        }
        for name, text in texts.items():
            (folder / name).write_text(text, "utf-8")
        return cls(folder, str(wheels))

    def copy(self, folder: Path) -> SmallCheckout:
        """The same, environment and all, in another place."""
        shutil.copytree(self.folder, folder, symlinks=True)
        return SmallCheckout(folder, self.wheels)

    @property
    def venv(self) -> Path:
        """Where its environment belongs."""
        return self.folder / ".venv"

    @property
    def homes(self) -> dict[str, str]:
        """Variables that lead to the user's folders, so that a test stays out of them."""
        names = ("HOME", "USERPROFILE", "XDG_CACHE_HOME", "LOCALAPPDATA")
        return dict.fromkeys(names, str(self.folder.parent / "home"))

    @property
    def cached_venv(self) -> Path:
        """Where its environment is when it cannot be beside the code."""
        with mock.patch.dict(os.environ, self.homes):
            return folders(self.folder)[1]

    def start(
        self, module: str = "explorer", *arguments: str, environment: Mapping[str, str] = {}
    ) -> subprocess.Popen[str]:
        """``python3 -m module arguments`` as a person would type it, not waited for."""
        clean = {
            name: value
            for name, value in os.environ.items()
            if not name.startswith(("PIP_", "PYTHON", "VIRTUAL_ENV"))
        }
        clean |= {
            "PIP_NO_INDEX": "1",
            "PIP_FIND_LINKS": self.wheels,
            "PIP_CONFIG_FILE": os.devnull,
            "PIP_NO_CACHE_DIR": "1",
            **self.homes,
        }
        return subprocess.Popen(
            [base_python(), "-m", module, *arguments],
            cwd=self.folder,
            env=clean | dict(environment),
            stdin=subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
            start_new_session=True,
        )

    def run(
        self, module: str = "explorer", *arguments: str, environment: Mapping[str, str] = {}
    ) -> Ended:
        """``start``, waited for."""
        return ended(self.start(module, *arguments, environment=environment))


@dataclass(frozen=True)
class Ended:
    """How a command ended: exit code, answer (stdout), words (stderr)."""

    code: int
    answer: str
    words: str


def ended(process: subprocess.Popen[str]) -> Ended:
    """Wait for a command and read it."""
    answer, words = process.communicate(timeout=60)
    return Ended(process.returncode, answer, words)


def base_python() -> str:
    """The Python outside of any environment."""
    path: str = getattr(sys, "_base_executable", sys.executable)
    return path
