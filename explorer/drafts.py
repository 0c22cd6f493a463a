"""Studies being worked on, kept on disk: text goes in under a name, and is there after a reload."""

from __future__ import annotations

import os
import re
import secrets
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

HOME = "TWISTFRONT_HOME"
"""Environment variable that names another folder for drafts and sweeps."""
OWN = "own"
"""Stands for the vehicle of a study that was opened from a file."""

_NAME = re.compile(r"[a-z0-9-]{1,60}\.[0-9a-f]{6}")


@dataclass(frozen=True)
class Draft:
    """A study on disk: its name, when it was last changed [s since 1970], and its text."""

    name: str
    changed: float
    text: str


def home() -> Path:
    """The folder of a person's drafts and sweeps, by the custom of each system."""
    chosen, own = os.environ.get(HOME), Path.home()
    if chosen:
        return Path(chosen)
    if sys.platform == "win32":
        return Path(os.environ.get("LOCALAPPDATA") or own / "AppData/Local", "twistfront")
    if sys.platform == "darwin":
        return own / "Library" / "Application Support" / "twistfront"
    return Path(os.environ.get("XDG_DATA_HOME") or own / ".local/share", "twistfront")


def runs_folder() -> Path:
    """The folder that holds one folder for each sweep."""
    return home() / "runs"


def new_name(vehicle: str) -> str:
    """A name for a new draft of a vehicle: ``orchard-truck.3fa2c1``."""
    return f"{vehicle}.{secrets.token_hex(3)}"


def vehicle_of(name: str) -> str:
    """The vehicle that a draft began as."""
    return name.partition(".")[0]


def is_name(name: str) -> bool:
    """Whether this can be the name of a draft; nothing else is ever looked up on disk."""
    return _NAME.fullmatch(name) is not None


def read(name: str) -> str | None:
    """The text of a draft, or None where there is no such draft."""
    if not is_name(name):
        return None
    try:
        return _path(name).read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError):
        return None


def write(name: str, text: str) -> None:
    """Put a draft on disk; whoever reads it finds the whole of the old or of the new text."""
    path = _path(name)
    path.parent.mkdir(parents=True, exist_ok=True)
    half = path.with_suffix(f".{secrets.token_hex(3)}.part")
    half.write_text(text, encoding="utf-8")
    os.replace(half, path)


def drafts(most: int = 30) -> list[Draft]:
    """The drafts on disk, the one changed last first."""
    return sorted(_drafts(), key=lambda draft: -draft.changed)[:most]


def _drafts() -> Iterator[Draft]:
    for path in (home() / "drafts").glob("*.toml"):
        text = read(path.stem)
        if text is not None:
            yield Draft(path.stem, path.stat().st_mtime, text)


def _path(name: str) -> Path:
    return home() / "drafts" / f"{name}.toml"
