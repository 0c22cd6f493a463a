"""What all tests share: settings, missing tools, the workbench and a browser before it.

A missing browser or reference library skips its tests with advice on a user's computer. Where the
environment variable CI is set nothing may be skipped: there a skipped test counts as failed.
"""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Callable, Generator, Iterator
from pathlib import Path
from types import ModuleType
from typing import TYPE_CHECKING, Any
from urllib.parse import urlsplit

import hypothesis
import pytest

from explorer.server import ADDRESS, free_port
from tests import reference_libraries

if TYPE_CHECKING:
    from playwright.sync_api import Browser, ConsoleMessage, Page

ROOT = Path(__file__).resolve().parent.parent
IN_CI = bool(os.environ.get("CI"))

hypothesis.settings.register_profile("default", deadline=None)
hypothesis.settings.register_profile("ci", derandomize=True, deadline=None, print_blob=True)
hypothesis.settings.load_profile("ci" if IN_CI else "default")

BROWSERS = ("chromium", "chromium-browser", "google-chrome", "google-chrome-stable", "chrome")
USUAL_PLACES = (
    "/Applications/Google Chrome.app/Contents/MacOS/Google Chrome",
    "/Applications/Chromium.app/Contents/MacOS/Chromium",
    "/snap/bin/chromium",
    "C:/Program Files/Google/Chrome/Application/chrome.exe",
    "C:/Program Files (x86)/Google/Chrome/Application/chrome.exe",
)
BROWSER_OPTIONS = (
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Mark what drives a browser: by folder, or by the fixtures it asks for."""
    for item in items:
        fixtures: set[str] = set(getattr(item, "fixturenames", ()))
        if ROOT / "tests" / "browser" in item.path.parents or fixtures & {"browser", "page"}:
            item.add_marker("browser")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Generator[None, Any, Any]:
    """In CI, a skipped test counts as failed."""
    return _not_skipped((yield))


@pytest.hookimpl(wrapper=True)
def pytest_make_collect_report(collector: pytest.Collector) -> Generator[None, Any, Any]:
    """In CI, a skipped file of tests counts as failed."""
    return _not_skipped((yield))


def _not_skipped(report: Any) -> Any:
    if IN_CI and report.outcome == "skipped" and not hasattr(report, "wasxfail"):
        told = report.longrepr
        report.outcome = "failed"
        report.longrepr = f"CI allows no skipped test. {told[-1] if told else ''}"
    return report


@pytest.fixture(scope="session")
def opensees() -> ModuleType:
    """OpenSeesPy, or skipped with advice."""
    return _or_skip(reference_libraries.opensees)


@pytest.fixture(scope="session")
def pynite() -> ModuleType:
    """Pynite, or skipped with advice."""
    return _or_skip(reference_libraries.pynite)


def _or_skip(library: Callable[[], ModuleType]) -> ModuleType:
    try:
        return library()
    except ImportError as error:
        pytest.skip(str(error))


def browser_path() -> str | None:
    """The Chromium or Chrome of this computer; TWISTFRONT_BROWSER names another."""
    chosen = os.environ.get("TWISTFRONT_BROWSER")
    if chosen:
        return chosen
    found = (shutil.which(name) for name in BROWSERS)
    usual = (place for place in USUAL_PLACES if Path(place).is_file())
    return next((path for path in (*found, *usual) if path), None)


@pytest.fixture(scope="session")
def browser() -> Iterator[Browser]:
    """This computer's own Chromium, without a window, driven by Playwright."""
    path = browser_path()
    if path is None:
        pytest.skip("no Chromium or Chrome found: install one, or set TWISTFRONT_BROWSER to it")
    playwright = pytest.importorskip("playwright.sync_api")
    manager = playwright.sync_playwright()
    try:
        driver = manager.start()
        started = driver.chromium.launch(executable_path=path, args=list(BROWSER_OPTIONS))
    except Exception as error:  # its driver ends without a word where libatomic is missing
        pytest.skip(f"Playwright cannot start {path}; on Debian: apt install libatomic1 ({error})")
    yield started
    started.close()
    driver.stop()


@pytest.fixture(scope="module")
def workbench(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """The address of a workbench with an empty folder for its runs, one for each test file."""
    home = tmp_path_factory.mktemp("twistfront")
    port = free_port(8700 + 200 * _worker())
    log = home / "server.log"
    command = [sys.executable, "-m", "explorer", "--no-browser", "--port", str(port)]
    with log.open("w", encoding="utf-8") as words:
        server = subprocess.Popen(
            command,
            cwd=ROOT,
            env=os.environ | {"TWISTFRONT_HOME": str(home)},
            stdin=subprocess.DEVNULL,
            stdout=words,
            stderr=subprocess.STDOUT,
        )
    url = f"http://{ADDRESS}:{port}"
    try:
        _wait_for_health(url, server, log)
        yield url
    finally:
        server.terminate()
        try:
            server.wait(timeout=10)
        except subprocess.TimeoutExpired:
            server.kill()
            server.wait()


def _worker() -> int:
    return int(os.environ.get("PYTEST_XDIST_WORKER", "gw0").removeprefix("gw"))


def _wait_for_health(url: str, server: subprocess.Popen[bytes], log: Path) -> None:
    until = time.monotonic() + 60
    while time.monotonic() < until and server.poll() is None:
        try:
            with urllib.request.urlopen(f"{url}/_stcore/health", timeout=2) as answer:
                if answer.status == 200:
                    return
        except (urllib.error.URLError, OSError):
            time.sleep(0.1)
    pytest.fail(f"the workbench did not start:\n{log.read_text('utf-8', errors='replace')}")


@pytest.fixture
def page(browser: Browser) -> Iterator[Page]:
    """A fresh browser page, 1280 x 900; console errors and requests to elsewhere fail the test."""
    context = browser.new_context(viewport={"width": 1280, "height": 900}, reduced_motion="reduce")
    context.set_default_timeout(20_000)
    opened = context.new_page()
    trouble: list[str] = []
    opened.on("pageerror", lambda error: trouble.append(f"page error: {error}"))
    opened.on("console", lambda said: _note_trouble(said, trouble))
    elsewhere: list[str] = []
    opened.on("request", lambda asked: _note_elsewhere(asked.url, elsewhere))
    opened.on("websocket", lambda asked: _note_elsewhere(asked.url, elsewhere))
    yield opened
    context.close()
    assert elsewhere == [], "requests left this computer"
    assert trouble == []


def _note_trouble(said: ConsoleMessage, trouble: list[str]) -> None:
    """Note an error; not that the page server first seeks its own parts below the page's path."""
    if said.type == "error" and "/_stcore/" not in said.location["url"]:
        trouble.append(f"console: {said.text}")


def _note_elsewhere(url: str, elsewhere: list[str]) -> None:
    parts = urlsplit(url)
    if parts.scheme not in ("data", "blob") and parts.hostname != ADDRESS:
        elsewhere.append(url)


@pytest.fixture(scope="session")
def screenshots() -> Path:
    """Where pictures for a person to look at go: TWISTFRONT_SCREENSHOTS, else .screenshots."""
    folder = Path(os.environ.get("TWISTFRONT_SCREENSHOTS") or ROOT / ".screenshots")
    folder.mkdir(parents=True, exist_ok=True)
    return folder
