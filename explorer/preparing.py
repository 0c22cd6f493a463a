"""Make the environment: an empty ``.venv``, then every package of a hash-pinned list.

In goes a checkout and what it is needed for, out comes the folder of a finished environment.
It is trusted only by its state file, replaced in one step when all is done; whatever was
interrupted is made anew. Only the standard library is imported here.
"""

import errno
import importlib.util
import json
import os
import shutil
import subprocess
import sys
import time
from collections import deque
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from explorer.environment import (
    LISTS,
    STATE,
    Needs,
    State,
    digest,
    folders,
    python_of,
    python_tag,
    read_state,
    ready,
    say,
)

_MISMATCH = (
    "a package differs from the one that was checked; do not use it. Clear pip's cache "
    "(python3 -m pip cache purge), or ask whoever runs the package mirror."
)
_NO_SUCH = (
    "is this computer online? If so, a package is not to be had ready-made for this Python on "
    "this system: try a 64-bit Python 3.11, 3.12 or 3.13."
)
_FULL_DISK = "free some disk space (about 1 GB is needed) and start again."
_OFFLINE = (
    "is this computer online? Behind a proxy set HTTPS_PROXY=http://name:port; with a package "
    "mirror set PIP_INDEX_URL; without any network see `pip download` and PIP_FIND_LINKS."
)


def prepare(root: Path, needs: Needs) -> Path:
    """The folder of an environment that holds the list for ``needs``; made where it is missing.

    Waits while another start makes it. Ends the process with a message and code 1 on failure.
    """
    venv = _place(root)
    with _alone(venv.with_name(".venv.lock")) as lock:
        if not ready(venv, root, needs):
            _make(venv, root, needs, lock)
    return venv


def _place(root: Path) -> Path:
    """The first folder that can be written and holds nothing of somebody else's."""
    for venv in folders(root):
        if not ours(venv):
            say(f"{venv} was not made by Twistfront and is left as it is.")
            continue
        try:
            venv.parent.mkdir(parents=True, exist_ok=True)
            with open(venv.with_name(".venv.lock"), "ab"):
                return venv.resolve()
        except OSError:
            continue
    sys.exit(
        f"Twistfront can write neither to {root} nor to {folders(root)[1].parent}. "
        "Copy the checkout to a folder of your own and start there."
    )


def ours(venv: Path) -> bool:
    """Whether the folder may be made anew: absent, empty, or an environment made here."""
    try:
        return read_state(venv) is not None or not any(venv.iterdir())
    except OSError:
        return not venv.exists()


def _make(venv: Path, root: Path, needs: Needs, lock: int) -> None:
    began = time.monotonic()
    pins = root / LISTS[needs][-1]
    state = read_state(venv)
    usable = (
        state is not None
        and not state.unfinished
        and state.python == python_tag()
        and python_of(venv).exists()
    )
    say(f"Twistfront {_reason(state, usable, needs)}. This takes about a minute.")
    say(f"  what:  {_how_many(pins)} packages from {pins}, each checked against its hash")
    say(f"  where: {venv} (about 1 GB; delete the folder to undo, nothing else changes)")
    if not usable:
        _check_python()
        _clear(venv)
        venv.mkdir(parents=True, exist_ok=True)
    kept = state.lists if state and usable else {}
    kept = {name: kept[name] for name in LISTS["test"] if kept.get(name) == digest(root / name)}
    _write_state(venv, State(python_tag(), kept, unfinished=True))
    if not usable:
        _create(venv, root)
    _install(venv, pins, lock)
    _compile(venv)
    lists = {name: digest(root / name) for name in LISTS[needs]}
    _write_state(venv, State(python_tag(), kept | lists, unfinished=False))
    say(f"Ready after {time.monotonic() - began:.0f} s. The next start is quick.")


def _reason(state: State | None, usable: bool, needs: Needs) -> str:
    if state is None:
        return "starts here for the first time and prepares its own Python environment"
    if state.unfinished:
        return "makes its Python environment anew: the last start was interrupted"
    if not usable:
        return f"makes its Python environment anew: it was for {state.python}, not {python_tag()}"
    if needs == "test" and LISTS["test"][-1] not in state.lists:
        return "adds the test tools to its Python environment"
    return "brings its Python environment up to date: the list of packages has changed"


def _how_many(pins: Path) -> int:
    return sum("==" in line for line in pins.read_text("utf-8").splitlines())


def _check_python() -> None:
    if any(importlib.util.find_spec(part) is None for part in ("venv", "ensurepip")):
        major, minor = sys.version_info[:2]
        sys.exit(
            "This Python cannot make virtual environments (venv or ensurepip is missing). Debian, "
            f"Ubuntu: apt install python{major}.{minor}-venv; elsewhere install Python from "
            "python.org, then start again."
        )


def _clear(venv: Path) -> None:
    """Take an old environment away; renamed first, so that no half of it can be mistaken."""
    try:
        if venv.exists():
            venv.rename(venv.with_name(f".venv-old-{os.getpid()}"))
    except OSError as error:
        sys.exit(f"{venv} is in use ({error.strerror}): close what runs from it and start again.")
    for old in venv.parent.glob(".venv-old-*"):
        shutil.rmtree(old, ignore_errors=True)


def _create(venv: Path, root: Path) -> None:
    """An environment with pip that finds this checkout's packages from any folder."""
    import venv as virtual  # a part that some systems leave out, see _check_python

    try:
        virtual.create(venv, with_pip=True, symlinks=os.name != "nt")
    except (OSError, subprocess.CalledProcessError) as error:
        sys.exit(f"The virtual environment could not be made in {venv}: {error}")
    packages = _packages(venv)
    path = root
    if venv.parent == root:  # a relative path survives a move of the checkout
        path = Path(*[".."] * len(packages.relative_to(root).parts))
    (packages / "twistfront.pth").write_text(f"{path}\n", "utf-8")


def _install(venv: Path, pins: Path, lock: int) -> None:
    command = [str(python_of(venv)), "-I", "-m", "pip", "install", "--require-hashes"]
    command += ["--only-binary=:all:", "--no-compile", "--no-input"]
    command += ["--disable-pip-version-check", "--progress-bar=off", "-r", str(pins)]
    environment = os.environ | {"PIP_USER": "0", "PYTHONUNBUFFERED": "1"}
    said: deque[str] = deque(maxlen=400)
    with subprocess.Popen(
        command,
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        text=True,
        encoding="utf-8",
        errors="replace",
        env=environment,
        # Held open by pip too: an orphaned pip keeps the next start waiting.
        pass_fds=() if os.name == "nt" else (lock,),
    ) as pip:
        try:
            assert pip.stdout is not None
            got = 0
            for line in pip.stdout:
                said.append(line.rstrip())
                got += line.startswith("Collecting ")
                _show(line, got)
        except KeyboardInterrupt:
            pip.terminate()
            raise
        finally:
            _show("", 0)
    if pip.returncode:
        _explain(list(said))


def _compile(venv: Path) -> None:
    """Compile to byte code on all cores: pip, told not to, would do it on one, tests and all.

    Only a matter of speed: what is missing, Python compiles when it is first imported.
    """
    _show("Compiling", 0)
    command = [str(python_of(venv)), "-I", "-m", "compileall", "-qq", "-j", "0"]
    command += ["-x", r"site-packages.*[\\/]tests?[\\/]", str(_packages(venv))]
    subprocess.run(command, stdin=subprocess.DEVNULL, capture_output=True, check=False)
    _show("", 0)


def _packages(venv: Path) -> Path:
    """Where the environment keeps its packages."""
    major, minor = sys.version_info[:2]
    library = "Lib" if os.name == "nt" else f"lib/python{major}.{minor}"
    return venv / library / "site-packages"


def _show(line: str, got: int) -> None:
    """One line that changes in place, for a person who watches."""
    if not sys.stderr.isatty():
        return
    if line.startswith("Collecting "):
        text = f"  {got}: {line.split()[1].partition('=')[0]}"
    elif line.startswith("Installing collected"):
        text = f"  unpacking {got} packages"
    elif line.startswith("Compiling"):
        text = "  compiling"
    elif line:
        return
    else:
        text = ""
    print(f"\r{text:<60}", end="\r" if not text else "", file=sys.stderr, flush=True)


def _explain(said: list[str]) -> None:
    """End with pip's last words and what to try."""
    words = [line for line in said if line.strip() and not line.startswith(("Collecting", "  "))]
    text = "\n".join(said)
    say("The packages could not be installed. pip's last words:")
    for line in words[-8:]:
        say(f"  | {line}")
    sys.exit(f"What to try: {_advice(text)}")


def _advice(text: str) -> str:
    """What to try, from all that pip said."""
    if "DO NOT MATCH THE HASHES" in text:
        return _MISMATCH
    if "No space left" in text:
        return _FULL_DISK
    if "Could not find a version" in text and "connection" not in text.lower():
        return _NO_SUCH
    return _OFFLINE


def _write_state(venv: Path, state: State) -> None:
    text = json.dumps(vars(state), indent=1)
    fresh = venv / f"{STATE}.{os.getpid()}"
    fresh.write_text(text, "utf-8")
    fresh.replace(venv / STATE)


@contextmanager
def _alone(path: Path) -> Iterator[int]:
    """Hold a file locked; the system itself lets go of the lock of a process that died."""
    lock = os.open(path, os.O_RDWR | os.O_CREAT, 0o644)
    try:
        if not _locked(lock):
            say("Another start is preparing the environment; waiting for it.")
            while not _locked(lock):
                time.sleep(0.2)
        yield lock
    finally:
        os.close(lock)


def _locked(lock: int) -> bool:
    """Whether the lock is ours now; taken as ours where the file system knows no locks."""
    try:
        if sys.platform == "win32":
            import msvcrt

            msvcrt.locking(lock, msvcrt.LK_NBLCK, 1)
        else:
            import fcntl

            fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError as error:
        return error.errno not in (errno.EACCES, errno.EAGAIN, errno.EDEADLK)
    return True
