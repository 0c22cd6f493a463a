"""Start: find, or make, the Python environment that a checkout's pinned list asks for.

``enter`` is called first by every ``python3 -m ...`` of this project. It returns where all needed
packages are at hand; otherwise it prepares ``.venv`` beside the code and starts the same command
again with that environment's Python. Only the standard library is imported here.
"""

import hashlib
import json
import os
import re
import subprocess
import sys
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal, NoReturn

Needs = Literal["run", "test"]

LISTS: dict[Needs, tuple[str, ...]] = {"run": ("pins.txt",), "test": ("pins.txt", "tests/pins.txt")}
"""The lists that hold once prepared for this; only the last is installed, it holds all others."""

STATE = "twistfront.json"
"""File in an environment of ours: its Python and, once installed, the digest of each list."""

_ENTERED = "twistfront"  # a -X option: unlike a variable, child processes do not inherit it


@dataclass(frozen=True)
class State:
    """What an environment says of itself.

    python : as ``python_tag``; lists : file name -> digest of the list that is installed;
    unfinished : an installation began here and has not come to its end.
    """

    python: str
    lists: dict[str, str]
    unfinished: bool


def enter(needs: Needs, module: str, arguments: Sequence[str]) -> None:
    """Return with every needed package importable, or become ``python -m module arguments``.

    needs : "run" for the tool, "test" for the test tools as well.

    An installed copy (no list beside the code) and an active virtual environment that already
    holds the packages are taken as they are. Ends the process with a message and code 1 where
    the environment cannot be made, 130 where Ctrl-C stops it.
    """
    root = checkout()
    if root is None:
        return
    here = Path(sys.prefix).resolve()
    venvs = [folder.resolve() for folder in folders(root)]
    if sys.prefix != sys.base_prefix and here not in venvs and not lacking(root, needs):
        if needs == "test":
            say(f"Using the packages of {here}.")
        return
    venv = next((venv for venv in venvs if ready(venv, root, needs)), None)
    if venv is None:
        from explorer.preparing import prepare

        try:
            venv = prepare(root, needs)
        except KeyboardInterrupt:
            say("Stopped before the environment was ready. The next start makes it anew.")
            sys.exit(130)
    if here != venv:
        _become(venv, module, arguments)


def checkout() -> Path | None:
    """The folder of a source checkout, or None for an installed copy."""
    root = Path(__file__).resolve().parent.parent
    return root if all((root / name).is_file() for name in ("pins.txt", "pyproject.toml")) else None


def folders(root: Path) -> tuple[Path, Path]:
    """Where the environment may be: beside the code, else in the user's cache folder."""
    mark = hashlib.sha256(str(root).encode()).hexdigest()[:12]
    return root / ".venv", cache_folder() / f"{root.name}-{mark}" / ".venv"


def cache_folder() -> Path:
    """The folder for what can be made again, by the custom of each system."""
    home = Path.home()
    if sys.platform == "win32":
        return Path(os.environ.get("LOCALAPPDATA") or home / "AppData/Local", "twistfront", "Cache")
    if sys.platform == "darwin":
        return home / "Library" / "Caches" / "twistfront"
    return Path(os.environ.get("XDG_CACHE_HOME") or home / ".cache", "twistfront")


def ready(venv: Path, root: Path, needs: Needs) -> bool:
    """Whether the environment holds what the lists say, for this version of Python."""
    state = read_state(venv)
    return (
        state is not None
        and state.python == python_tag()
        and all(state.lists.get(name) == digest(root / name) for name in LISTS[needs])
        and python_of(venv).exists()  # follows the link: false once that Python is gone
    )


def read_state(venv: Path) -> State | None:
    """What the environment says of itself; None where it is absent or not one of ours."""
    try:
        told: dict[str, Any] = json.loads((venv / STATE).read_text("utf-8"))
        return State(str(told["python"]), dict(told["lists"]), bool(told["unfinished"]))
    except (OSError, ValueError, KeyError, TypeError):
        return None


def python_tag() -> str:
    """Which Python an environment is made for, like ``cpython-3.11``."""
    major, minor = sys.version_info[:2]
    return f"{sys.implementation.name}-{major}.{minor}{getattr(sys, 'abiflags', '')}"


def digest(pins: Path) -> str:
    """SHA-256 of a list of packages, whatever its line ends."""
    return hashlib.sha256(pins.read_bytes().replace(b"\r\n", b"\n")).hexdigest()


def python_of(venv: Path) -> Path:
    """The environment's Python."""
    return venv / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def lacking(root: Path, needs: Needs) -> list[str]:
    """Requirements of ``pyproject.toml`` that this Python's packages do not meet.

    Looks at names and lowest versions; requirements for some systems only are passed over.
    """
    import tomllib  # seldom needed, and every start would wait for it

    project = tomllib.loads((root / "pyproject.toml").read_text("utf-8"))
    wanted: list[str] = list(project["project"]["dependencies"])
    if needs == "test":
        wanted += _group(project["dependency-groups"], "test")
    return [line for line in wanted if ";" not in line and not _met(line)]


def say(text: str) -> None:
    """Tell the person at the terminal; answers go to stdout, words about the start to stderr."""
    print(text, file=sys.stderr, flush=True)


def _group(groups: dict[str, list[Any]], name: str) -> list[str]:
    lines: list[str] = []
    for entry in groups[name]:
        lines += [entry] if isinstance(entry, str) else _group(groups, entry["include-group"])
    return lines


def _met(requirement: str) -> bool:
    import importlib.metadata

    name, _, lowest = requirement.partition(">=")
    try:
        found = importlib.metadata.version(name.strip())
    except importlib.metadata.PackageNotFoundError:
        return False
    return _numbers(found) >= _numbers(lowest)


def _numbers(version: str) -> list[int]:
    leading = re.match(r"\s*\d*(\.\d+)*", version)
    return [int(part) for part in leading[0].split(".") if part.strip()] if leading else []


def _become(venv: Path, module: str, arguments: Sequence[str]) -> NoReturn:
    """Go on as the environment's Python, with the same command in the same folder."""
    if _ENTERED in sys._xoptions:
        sys.exit(f"{python_of(venv)} does not start in its own environment; delete {venv}.")
    command = [str(python_of(venv)), "-X", _ENTERED, "-m", module, *arguments]
    sys.stdout.flush()
    sys.stderr.flush()
    if os.name == "nt":  # exec there returns to the shell at once
        try:
            sys.exit(subprocess.call(command))
        except KeyboardInterrupt:
            sys.exit(130)
    os.execv(command[0], command)
