"""Bare checkouts in small: first and second start, together, interrupted, refused."""

from __future__ import annotations

import contextlib
import http.server
import os
import signal
import threading
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from tests.start.small_checkout import SmallCheckout, ended, make_wheel

if os.name == "nt":
    pytest.skip("sends POSIX signals", allow_module_level=True)


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> SmallCheckout:
    """A checkout whose environment is ready; tests that change it take a copy."""
    folder = tmp_path_factory.mktemp("start")
    checkout = SmallCheckout.make(folder / "checkout", folder / "wheels")
    first = checkout.run("explorer", "solve", "frame.json")
    assert (first.code, first.answer) == (0, "weighed 85 solve frame.json\n"), first.words
    assert "for the first time" in first.words
    assert f"1 packages from {checkout.folder / 'pins.txt'}" in first.words
    assert f"where: {checkout.venv}" in first.words
    return checkout


@pytest.fixture
def copy(made: SmallCheckout, tmp_path: Path) -> SmallCheckout:
    return made.copy(tmp_path / "copy")


class StallingHandler(http.server.SimpleHTTPRequestHandler):
    """Serves the folder of wheels, but no wheel before ``go`` is set."""

    go: threading.Event
    asked: threading.Event

    def do_GET(self) -> None:
        if self.path.endswith(".whl"):
            self.asked.set()
            self.go.wait(30)
        with contextlib.suppress(BrokenPipeError):
            super().do_GET()

    def log_message(self, *_: object) -> None:
        """Say nothing."""


Handler = type[StallingHandler]


@pytest.fixture
def stalled(copy: SmallCheckout, tmp_path: Path) -> Iterator[tuple[SmallCheckout, Handler]]:
    """A checkout with a list to install, from a server that makes pip wait."""
    ask_for_newer_scales(copy, tmp_path / "wheels")

    class Here(StallingHandler):
        go, asked = threading.Event(), threading.Event()

        def __init__(self, *given: Any) -> None:
            super().__init__(*given, directory=str(tmp_path / "wheels"))

    with http.server.ThreadingHTTPServer(("127.0.0.1", 0), Here) as server:
        server.daemon_threads = True
        threading.Thread(target=server.serve_forever, daemon=True).start()
        address = f"http://127.0.0.1:{server.server_address[1]}/"
        yield SmallCheckout(copy.folder, address), Here
        Here.go.set()
        server.shutdown()


def ask_for_newer_scales(checkout: SmallCheckout, wheels: Path) -> SmallCheckout:
    """Change the list, so that the next start has something to install."""
    line = make_wheel(wheels, "scales", "1.1", "KG = 90\n")
    (checkout.folder / "pins.txt").write_text(line, "utf-8")
    return SmallCheckout(checkout.folder, str(wheels))


def test_the_second_start_is_quick_and_says_nothing(made):
    began = time.monotonic()
    second = made.run("explorer", "solve")
    assert time.monotonic() - began < 3
    assert (second.code, second.answer, second.words) == (0, "weighed 85 solve\n", "")


def test_the_exit_code_of_the_command_comes_through(made):
    assert made.run("explorer", "seven").code == 7


def test_the_version_needs_no_environment(tmp_path):
    checkout = SmallCheckout.make(tmp_path / "checkout", tmp_path / "wheels")
    assert checkout.run("explorer", "--version").answer.startswith("twistfront ")
    assert not checkout.venv.exists()


def test_the_start_works_from_any_folder_and_after_a_move(copy, tmp_path):
    (tmp_path / "elsewhere").mkdir()
    moved = SmallCheckout(copy.folder.rename(tmp_path / "moved"), copy.wheels)
    here = SmallCheckout(tmp_path / "elsewhere", copy.wheels)
    got = here.run("explorer", "x", environment={"PYTHONPATH": str(moved.folder)})
    assert (got.code, got.answer, got.words) == (0, "weighed 85 x\n", "")


def test_the_tests_add_their_tools_to_the_same_environment(copy):
    tests = copy.run("tests")
    assert (tests.code, tests.answer) == (0, "measured 25\n"), tests.words
    assert "adds the test tools" in tests.words
    assert copy.run("tests").words == ""
    assert copy.run("explorer", "x").words == ""


def test_two_starts_at_once_install_a_changed_list_once(copy, tmp_path):
    newer = ask_for_newer_scales(copy, tmp_path / "wheels")
    both = [ended(process) for process in [newer.start("explorer", name) for name in "ab"]]
    assert [one.answer for one in both] == ["weighed 90 a\n", "weighed 90 b\n"]
    words = both[0].words + both[1].words
    assert words.count("the list of packages has changed") == 1
    assert words.count("Another start is preparing the environment; waiting for it.") <= 1


def test_control_c_says_that_nothing_is_lost(stalled):
    checkout, server = stalled
    first = checkout.start("explorer", "x")
    assert server.asked.wait(30)
    os.killpg(first.pid, signal.SIGINT)  # as a terminal does: to pip too
    stopped = ended(first)
    assert stopped.code == 130
    assert stopped.words.endswith("The next start makes it anew.\n")
    assert "Traceback" not in stopped.words


def test_a_killed_start_is_not_trusted_and_its_orphaned_pip_is_waited_for(stalled):
    checkout, server = stalled
    first = checkout.start("explorer", "x")
    assert server.asked.wait(30)
    os.kill(first.pid, signal.SIGKILL)  # pip lives on
    first.communicate()
    second = checkout.start("explorer", "x")
    assert second.stderr is not None
    assert "waiting for it" in second.stderr.readline()
    server.go.set()
    got = ended(second)
    assert (got.code, got.answer) == (0, "weighed 90 x\n"), got.words
    assert "the last start was interrupted" in got.words
    assert not list(checkout.folder.glob(".venv-old-*"))


def test_a_package_that_differs_is_refused(copy, tmp_path):
    newer = ask_for_newer_scales(copy, tmp_path / "wheels")
    pins = copy.folder / "pins.txt"
    pins.write_text(pins.read_text("utf-8")[:-9] + "00000000\n", "utf-8")
    got = newer.run("explorer", "x")
    assert (got.code, got.answer) == (1, "")
    assert "DO NOT MATCH THE HASHES" in got.words
    assert got.words.splitlines()[-1].startswith("What to try: a package differs")


def test_without_network_the_message_says_what_to_try(copy):
    line = "absent==1.0 --hash=sha256:" + "0" * 64
    (copy.folder / "pins.txt").write_text(line, "utf-8")
    offline = {"PIP_INDEX_URL": "http://127.0.0.1:9/simple", "PIP_RETRIES": "1"}
    got = copy.run("explorer", "x", environment=offline | {"PIP_NO_INDEX": "0"})
    assert got.code == 1
    assert "pip's last words:" in got.words
    assert got.words.splitlines()[-1].startswith("What to try: is this computer online? Behind a")


def test_an_environment_in_the_cache_folder_serves_where_another_stands_beside_the_code(copy):
    copy.cached_venv.parent.mkdir(parents=True)
    copy.venv.rename(copy.cached_venv)
    (copy.venv / "bin").mkdir(parents=True)  # somebody else's
    got = copy.run("explorer", "x")
    assert (got.code, got.answer, got.words) == (0, "weighed 85 x\n", "")
    assert [path.name for path in copy.venv.iterdir()] == ["bin"]
