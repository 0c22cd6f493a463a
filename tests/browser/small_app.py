"""A page server for one small script, so that one part of the workbench stands alone."""

from __future__ import annotations

import os
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from explorer.server import ADDRESS, as_arguments, free_port, server_options

ROOT = Path(__file__).resolve().parents[2]


@contextmanager
def served(script: str, folder: Path) -> Iterator[str]:
    """The address of a server that runs ``script`` with the options of the workbench."""
    path = folder / "app.py"
    path.write_text(script, encoding="utf-8")
    worker = int(os.environ.get("PYTEST_XDIST_WORKER", "gw0").removeprefix("gw"))
    port = free_port(9100 + 50 * worker)
    options = as_arguments(server_options(port, headless=True))
    server = subprocess.Popen(
        [sys.executable, "-m", "streamlit", "run", str(path), *options],
        cwd=folder,
        env=os.environ | {"PYTHONPATH": str(ROOT)},
        stdin=subprocess.DEVNULL,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    url = f"http://{ADDRESS}:{port}"
    try:
        _wait(url)
        yield url
    finally:
        server.terminate()
        server.wait(timeout=20)


def _wait(url: str) -> None:
    until = time.monotonic() + 60
    while True:
        try:
            urllib.request.urlopen(f"{url}/_stcore/health", timeout=2).close()
            return
        except (urllib.error.URLError, OSError):
            if time.monotonic() > until:
                raise
            time.sleep(0.2)
