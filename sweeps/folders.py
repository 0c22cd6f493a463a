"""Folders that several processes may want and that disks may fail: locks, faults by name."""

from __future__ import annotations

import errno
import os
import sys
import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from model.errors import DesignError


class RunError(DesignError):
    """A run folder cannot be used; the message names the file and the remedy."""


PATIENCE = 1.0
"""Seconds after which a mark without a holder is taken for what a killed process left."""

_held: set[Path] = set()
_one_at_a_time = threading.Lock()


@contextmanager
def locked(folder: Path) -> Iterator[None]:
    """Hold a run folder for this process; a second one is told who has it."""
    key = folder.resolve()
    with _one_at_a_time:
        if key in _held:
            raise _in_use(folder, os.getpid())
        _held.add(key)
    try:
        path = _marked(folder)
        try:
            yield
        finally:
            path.unlink(missing_ok=True)
    finally:
        _held.discard(key)


def _marked(folder: Path) -> Path:
    """Mark a folder as this process's own."""
    path, until = folder / "in-use", time.monotonic() + PATIENCE
    with naming(path):
        while True:
            try:
                handle = os.open(path, os.O_CREAT | os.O_EXCL | os.O_WRONLY)
                break
            except FileExistsError:
                holder = _holder(path)
            if holder is None:
                continue
            if not holder and time.monotonic() < until:
                time.sleep(0.02)  # about to say who it is
                continue
            if _alive(holder):
                raise _in_use(folder, holder.split()[0])
            _take_stale(path, holder)
        try:
            os.write(handle, _name(os.getpid()).encode())
        finally:
            os.close(handle)
    return path


def _in_use(folder: Path, process: int | str) -> RunError:
    return RunError(f"{folder}: in use by process {process}; wait for it or stop it")


def _holder(path: Path) -> str | None:
    """What a mark says; None when it is gone meanwhile."""
    try:
        return path.read_text(encoding="utf-8", errors="replace").strip()
    except FileNotFoundError:
        return None


def _name(process: int) -> str:
    """A process by its number and, where the system tells it, when it began.

    Numbers are given out again, after a restart or in a container most likely of all.
    """
    try:
        # the name in brackets may hold blanks; the time is the 22nd field, counted from 1
        said = Path(f"/proc/{process}/stat").read_text(encoding="utf-8", errors="replace")
        return f"{process} {said.rpartition(')')[2].split()[19]}"
    except (OSError, IndexError):
        return str(process)


def _take_stale(path: Path, holder: str) -> None:
    """Take away the mark of a process that is gone, unless another one was quicker."""
    mine = path.with_name(f"{path.name}.stale{os.getpid()}")
    try:
        os.replace(path, mine)
    except FileNotFoundError:
        return
    if _holder(mine) != holder and not path.exists():
        os.replace(mine, path)
    else:
        mine.unlink()


def _alive(holder: str) -> bool:
    """Whether the process of a mark still runs, and is another one than this."""
    pid, _, began = holder.partition(" ")
    if not (pid.isascii() and pid.isdigit()) or int(pid) == os.getpid():
        return False
    if began and _name(int(pid)) != holder:
        return False
    if sys.platform == "win32":  # there a signal of 0 would not only ask
        import ctypes

        handle = ctypes.windll.kernel32.OpenProcess(0x1000, False, int(pid))
        if handle:
            ctypes.windll.kernel32.CloseHandle(handle)
        return bool(handle)
    try:
        os.kill(int(pid), 0)
    except (ProcessLookupError, OverflowError):
        return False
    except OSError:
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
