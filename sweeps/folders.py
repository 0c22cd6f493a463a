"""Folders that several processes may want and that disks may fail: locks, faults by name."""

from __future__ import annotations

import errno
import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from model.errors import DesignError


class RunError(DesignError):
    """A run folder cannot be used; the message names the file and the remedy."""


@contextmanager
def locked(folder: Path) -> Iterator[None]:
    """Hold a run folder for this process; a second one is told who has it."""
    path = folder / "in-use"
    mine = str(os.getpid())
    with naming(path):
        while True:
            try:
                handle = os.open(path, os.O_CREAT | os.O_EXCL | os.O_WRONLY)
                break
            except FileExistsError:
                holder = path.read_text(encoding="utf-8").strip()
                if holder and _alive(holder):
                    raise RunError(
                        f"{folder}: in use by process {holder}; wait for it or stop it"
                    ) from None
                _take_stale(path, holder)
        os.write(handle, mine.encode())
        os.close(handle)
    try:
        yield
    finally:
        path.unlink(missing_ok=True)


def _take_stale(path: Path, holder: str) -> None:
    """Take away the mark of a process that is gone, unless another one was quicker."""
    mine = path.with_name(f"{path.name}.stale{os.getpid()}")
    try:
        os.replace(path, mine)
    except FileNotFoundError:
        return
    if mine.read_text(encoding="utf-8").strip() != holder and not path.exists():
        os.replace(mine, path)
    else:
        mine.unlink()


def _alive(pid: str) -> bool:
    if not pid.isdigit():
        return False
    if sys.platform == "win32":  # there a signal of 0 would not only ask
        import ctypes

        handle = ctypes.windll.kernel32.OpenProcess(0x1000, False, int(pid))
        if handle:
            ctypes.windll.kernel32.CloseHandle(handle)
        return bool(handle)
    try:
        os.kill(int(pid), 0)
    except ProcessLookupError:
        return False
    except (PermissionError, OSError):
        return True
    return True


def set_aside(path: Path) -> Path:
    """Give a file that cannot be trusted another name; says which."""
    for number in range(1, 1000):
        other = path.with_name(f"{path.name}.set-aside-{number}")
        if not other.exists():
            with naming(path):
                os.replace(path, other)
            return other
    raise RunError(f"{path}: too many set-aside files; look at them and clear them away")


@contextmanager
def naming(path: Path) -> Iterator[None]:
    """Say which file an operating-system fault is about, and what would do."""
    try:
        yield
    except PermissionError as fault:
        raise RunError(f"{path}: may not be written; choose a folder of your own") from fault
    except OSError as fault:
        if fault.errno == errno.EROFS:
            raise RunError(f"{path}: may not be written; choose a folder of your own") from fault
        remedy = "free some space and resume" if fault.errno == errno.ENOSPC else "see the folder"
        raise RunError(f"{path}: {fault.strerror or fault}; {remedy}") from fault
