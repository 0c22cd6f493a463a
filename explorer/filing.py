"""Files named on the command line: read whole, written whole, faults told by field and name."""

from __future__ import annotations

import os
import re
import sys
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path

from model.errors import InputError

LARGEST_FILE = 64_000_000
"""A file to be read holds at most so many bytes."""

_ENDLESS = re.compile(rb"[0-9_]{300}")
"""Digits of no number that a frame can have; no reader of ours gets to see them."""


def read(field: str, name: str) -> str:
    """The text of a file, or of stdin for ``-``."""
    with naming(field, name):
        data = sys.stdin.buffer.read() if name == "-" else _bytes(Path(name))
    if len(data) > LARGEST_FILE:
        raise InputError(field, repr(name), f"give a file of at most {LARGEST_FILE // 10**6} MB")
    if _ENDLESS.search(data):
        raise InputError(field, repr(name), "write numbers with fewer than 300 digits")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError(field, repr(name), "give a text file in UTF-8") from None


def write(field: str, texts: Mapping[str | Path, str]) -> None:
    """Write files whole or not at all; line ends stay as they are."""
    for name, text in texts.items():
        path = Path(name)
        with naming(field, str(name)):
            path.parent.mkdir(parents=True, exist_ok=True)
            scratch = path.with_name(f"{path.name}.part{os.getpid()}")
            try:
                scratch.write_bytes(text.encode("utf-8", errors="replace"))
                scratch.replace(path)
            finally:
                scratch.unlink(missing_ok=True)


@contextmanager
def naming(field: str, name: str) -> Iterator[None]:
    """Say of which file the operating system complains."""
    try:
        yield
    except (OSError, ValueError) as fault:
        why = getattr(fault, "strerror", None) or str(fault)
        raise InputError(field, repr(name), f"{why.lower()}; name another file") from fault


def _bytes(path: Path) -> bytes:
    with path.open("rb") as file:
        return file.read(LARGEST_FILE + 1)
