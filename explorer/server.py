"""Serve the workbench: one page server on this computer, for the person who started it."""

from __future__ import annotations

import argparse
import json
import os
import socket
import sys
from collections.abc import Mapping, Sequence
from pathlib import Path

from explorer import theme

ADDRESS = "127.0.0.1"
FIRST_PORT = 8571
APP = Path(__file__).with_name("app.py")

_FIXED: dict[str, str | bool | int | tuple[str, ...]] = {
    "server.address": ADDRESS,
    "server.allowedHosts": (ADDRESS, "localhost"),
    "server.enableCORS": True,
    "server.enableXsrfProtection": True,
    "server.maxUploadSize": 5,
    "server.fileWatcherType": "none",
    "server.runOnSave": False,
    "server.showEmailPrompt": False,
    "browser.gatherUsageStats": False,
    "client.toolbarMode": "minimal",
    "client.showErrorDetails": "none",
    "client.showErrorLinks": False,
    "runner.magicEnabled": False,
    "logger.level": "warning",
    "logger.hideWelcomeMessage": True,
}


def main(argv: Sequence[str]) -> int:
    """Serve until Ctrl-C; returns the exit code. ``argv`` holds workbench options only."""
    parser = argparse.ArgumentParser(
        prog="twistfront", description="Open the workbench in the browser."
    )
    parser.add_argument("--port", type=int, help=f"default: the first free from {FIRST_PORT}")
    parser.add_argument("--no-browser", action="store_true", help="serve, open no browser")
    chosen = parser.parse_args(argv)
    port = free_port() if chosen.port is None else chosen.port
    if not 1 <= port <= 65535 or not is_free(port):
        print(f"--port = {port}: choose a free port between 1024 and 65535", file=sys.stderr)
        return 2
    print(f"Workbench: http://{ADDRESS}:{port}  (Ctrl-C stops it)", file=sys.stderr, flush=True)
    headless = chosen.no_browser or not has_screen(os.environ)
    from streamlit.web import cli

    sys.argv = ["streamlit", "run", str(APP)]
    cli.main_run(
        [str(APP), *as_arguments(server_options(port, headless=headless))],
        prog_name="twistfront",
        standalone_mode=False,
    )
    return 0


def server_options(port: int, *, headless: bool) -> dict[str, str | bool | int | tuple[str, ...]]:
    """Every option of the page server that is not left to its default, by its dotted name.

    Closed to other computers and other sites' pages, no statistics, no error details to the
    browser, no watching of files, our colours.
    """
    return {**_FIXED, "server.port": port, "server.headless": headless, **theme_options()}


def theme_options() -> dict[str, str | tuple[str, ...]]:
    """The workbench's colours for the page's light and dark look."""
    options: dict[str, str | tuple[str, ...]] = {}
    for look, colours in (("light", theme.LIGHT), ("dark", theme.DARK)):
        options |= {
            f"theme.{look}.primaryColor": colours.accent,
            f"theme.{look}.backgroundColor": colours.background,
            f"theme.{look}.secondaryBackgroundColor": colours.surface,
            f"theme.{look}.textColor": colours.ink,
            f"theme.{look}.linkColor": colours.accent,
            f"theme.{look}.borderColor": colours.rule,
            f"theme.{look}.chartCategoricalColors": json.dumps(colours.palette),
        }
    return options


def as_arguments(options: Mapping[str, str | bool | int | tuple[str, ...]]) -> list[str]:
    """Options as the page server's command line takes them."""
    words: list[str] = []
    for name, value in options.items():
        items = value if isinstance(value, tuple) else (value,)
        words += [f"--{name}={str(x).lower() if isinstance(x, bool) else x}" for x in items]
    return words


def has_screen(environment: Mapping[str, str]) -> bool:
    """Whether opening a browser makes sense: not in CI, not on a Linux without a display."""
    if environment.get("CI"):
        return False
    return not sys.platform.startswith("linux") or bool(
        environment.get("DISPLAY") or environment.get("WAYLAND_DISPLAY")
    )


def free_port(first: int = FIRST_PORT) -> int:
    """The first port from ``first`` on that nothing on this computer listens at."""
    return next((port for port in range(first, first + 200) if is_free(port)), first)


def is_free(port: int) -> bool:
    """Whether a server could listen at this port of the loopback address."""
    with socket.socket(socket.AF_INET, socket.SOCK_STREAM) as probe:
        if os.name != "nt":  # there it would allow a port in use
            probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            probe.bind((ADDRESS, port))
        except OSError:
            return False
    return True
