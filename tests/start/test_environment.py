"""When an environment is trusted, and what is said where none can be made."""

from __future__ import annotations

import ast
import importlib.util
import json
import subprocess
import sys
from pathlib import Path

import pytest

from explorer import environment, preparing, server
from explorer.environment import State
from tests.start.small_checkout import ROOT, SmallCheckout

BEFORE_READY = ("explorer.__main__", "explorer.preparing", "tests.__main__")


@pytest.fixture
def checkout(tmp_path: Path) -> SmallCheckout:
    """A checkout with an environment that looks ready."""
    small = SmallCheckout.make(tmp_path / "checkout", tmp_path / "wheels")
    python = environment.python_of(small.venv)
    python.parent.mkdir(parents=True)
    python.touch()
    lists = {name: environment.digest(small.folder / name) for name in ("pins.txt",)}
    tell(small, State(environment.python_tag(), lists, unfinished=False))
    return small


def tell(small: SmallCheckout, state: State) -> None:
    (small.venv / environment.STATE).write_text(json.dumps(vars(state)), "utf-8")


def is_ready(small: SmallCheckout, needs: environment.Needs = "run") -> bool:
    return environment.ready(small.venv, small.folder, needs)


@pytest.mark.parametrize("module", BEFORE_READY)
def test_only_the_standard_library_is_imported_before_the_environment_is_ready(module):
    listing = f"import sys; sys.path.insert(0, {str(ROOT)!r}); import {module}; print(*sys.modules)"
    ran = subprocess.run(
        [sys.executable, "-I", "-S", "-c", listing], capture_output=True, text=True, check=True
    )
    roots = {name.partition(".")[0] for name in ran.stdout.split()}
    assert roots - sys.stdlib_module_names <= {"explorer", "tests", "__main__", "__mp_main__"}


@pytest.mark.parametrize("file", ["explorer/__init__.py", "explorer/__main__.py",
                                  "tests/__init__.py", "tests/__main__.py"])  # fmt: skip
def test_an_older_python_gets_far_enough_to_be_told(file):
    tree = ast.parse((ROOT / file).read_text("utf-8"), feature_version=(3, 7))
    future = [node for node in tree.body if isinstance(node, ast.ImportFrom)]
    assert "__future__" not in [node.module for node in future]


def test_an_older_python_is_told_what_is_needed():
    pretend = "import sys; sys.version_info = (3, 9, 2); import explorer"
    ran = subprocess.run(
        [sys.executable, "-c", pretend], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert ran.returncode == 1
    assert ran.stderr.startswith("Twistfront needs Python 3.11 or newer; this is Python 3.9.")
    assert len(ran.stderr.splitlines()) == 1


def test_a_state_that_fits_is_trusted(checkout):
    assert is_ready(checkout)
    assert not is_ready(checkout, "test")


@pytest.mark.parametrize("change", ["list", "python", "gone", "garbled", "no state"])
def test_a_state_that_does_not_fit_is_not_trusted(checkout, change):
    state = checkout.venv / environment.STATE
    if change == "list":
        (checkout.folder / "pins.txt").write_text("other==1\n", "utf-8")
    elif change == "python":
        tell(checkout, State("cpython-3.10", {"pins.txt": "x"}, unfinished=False))
    elif change == "gone":
        environment.python_of(checkout.venv).unlink()
    elif change == "garbled":
        state.write_text(state.read_text("utf-8")[:20], "utf-8")
    else:
        state.unlink()
    assert not is_ready(checkout)


def test_line_ends_do_not_change_the_digest_of_a_list(tmp_path):
    (tmp_path / "a").write_bytes(b"x==1\ny==2\n")
    (tmp_path / "b").write_bytes(b"x==1\r\ny==2\r\n")
    assert environment.digest(tmp_path / "a") == environment.digest(tmp_path / "b")


def test_only_what_was_made_here_may_be_replaced(checkout, tmp_path):
    assert preparing.ours(tmp_path / "absent")
    (tmp_path / "empty").mkdir()
    assert preparing.ours(tmp_path / "empty")
    assert preparing.ours(checkout.venv)
    (checkout.venv / environment.STATE).unlink()
    assert not preparing.ours(checkout.venv)


def test_somebody_elses_environment_is_passed_over(checkout, tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(environment, "cache_folder", lambda: tmp_path / "cache")
    (checkout.venv / environment.STATE).unlink()
    assert preparing._place(checkout.folder) == environment.folders(checkout.folder)[1]
    assert "was not made by Twistfront and is left as it is" in capsys.readouterr().err


def test_a_checkout_that_cannot_be_written_uses_the_cache_folder(checkout, tmp_path, monkeypatch):
    monkeypatch.setattr(environment, "cache_folder", lambda: tmp_path / "cache")
    (checkout.folder / ".venv.lock").mkdir()  # cannot be opened as a file, not even by root
    place = preparing._place(checkout.folder)
    assert place == environment.folders(checkout.folder)[1]
    assert place.is_relative_to(tmp_path / "cache")


def test_two_checkouts_do_not_share_a_cached_environment(tmp_path):
    one, other = (environment.folders(tmp_path / name / "twistfront")[1] for name in "ab")
    assert one != other


def test_a_python_without_venv_is_told_the_remedy(monkeypatch):
    monkeypatch.setattr(importlib.util, "find_spec", lambda name: None)
    with pytest.raises(SystemExit, match=r"apt install python3\.\d+-venv"):
        preparing._check_python()


@pytest.mark.parametrize("said, advice", [
    ("ERROR: THESE PACKAGES DO NOT MATCH THE HASHES", "a package differs"),
    ("OSError: [Errno 28] No space left on device", "free some disk space"),
    ("ERROR: Could not find a version that satisfies numba", "try a 64-bit Python"),
    ("WARNING: connection broken\nERROR: Could not find a version", "Behind a proxy set HTTPS"),
    ("anything else", "Behind a proxy set HTTPS_PROXY"),
])  # fmt: skip
def test_pips_failures_come_with_something_to_try(said, advice):
    assert advice in preparing._advice(said)


def test_an_installed_copy_makes_no_environment(monkeypatch):
    monkeypatch.setattr(environment, "checkout", lambda: None)
    monkeypatch.setattr(preparing, "prepare", lambda *_: pytest.fail("made an environment"))
    environment.enter("run", "explorer", [])


def test_an_active_environment_with_all_packages_is_taken_as_it_is(checkout, monkeypatch):
    monkeypatch.setattr(environment, "checkout", lambda: checkout.folder)
    monkeypatch.setattr(environment, "lacking", lambda root, needs: [])
    monkeypatch.setattr(sys, "prefix", str(checkout.folder / "mine"))
    monkeypatch.setattr(preparing, "prepare", lambda *_: pytest.fail("made an environment"))
    environment.enter("run", "explorer", [])


def test_what_an_environment_lacks_is_found_by_name_and_version(tmp_path):
    (tmp_path / "pyproject.toml").write_text(
        '[project]\ndependencies = ["pytest>=8", "no-such-thing", "hypothesis>=999.1"]\n'
        "[dependency-groups]\ntest = [{ include-group = 'more' }]\n"
        "more = [\"never; sys_platform == 'plan9'\", 'pytest>=999']\n",
        "utf-8",
    )
    assert environment.lacking(tmp_path, "run") == ["no-such-thing", "hypothesis>=999.1"]
    assert environment.lacking(tmp_path, "test")[2:] == ["pytest>=999"]


def test_the_environment_of_the_tests_lacks_nothing():
    assert environment.lacking(ROOT, "test") == []


@pytest.mark.parametrize("name", ["pins.txt", "tests/pins.txt"])
def test_the_lists_name_packages_and_hashes_only(name):
    lines = (ROOT / name).read_text("utf-8").splitlines()
    assert all("==" in line or line.startswith("    --hash=sha256:") for line in lines)


def test_the_test_list_holds_the_run_list_word_for_word():
    run, test = ((ROOT / name).read_text("utf-8") for name in ("pins.txt", "tests/pins.txt"))
    entries = [set(text.replace("\\\n", "").splitlines()) for text in (run, test)]
    assert entries[0] < entries[1]


@pytest.mark.parametrize("given, workbench", [
    ([], True), (["--port", "8600"], True), (["--no-browser"], True),
    (["solve", "x.json"], False), (["--help"], False),
])  # fmt: skip
def test_without_a_command_the_workbench_opens(given, workbench):
    from explorer.__main__ import opens_workbench

    assert opens_workbench(given) is workbench


def test_the_page_server_knows_every_option_and_is_closed_to_others():
    from streamlit import config

    options = server.server_options(8571, headless=True)
    for name in options:
        config.get_option(name)  # raises for a name it does not know
    assert options["server.address"] == "127.0.0.1"
    assert options["server.enableXsrfProtection"] is True
    assert options["browser.gatherUsageStats"] is False
    assert options["client.showErrorDetails"] == "none"
    assert "--server.headless=true" in server.as_arguments(options)
    assert "--server.allowedHosts=localhost" in server.as_arguments(options)


def test_a_port_in_use_is_passed_over_and_refused_with_advice(capsys):
    import socket

    with socket.create_server(("127.0.0.1", 0)) as taken:
        port = taken.getsockname()[1]
        assert server.free_port(port) > port
        assert server.main(["--port", str(port)]) == 2
    assert f"--port = {port}: choose a free port" in capsys.readouterr().err


def test_no_browser_is_opened_where_there_is_no_screen():
    assert not server.has_screen({"CI": "true", "DISPLAY": ":0"})
    assert server.has_screen({"DISPLAY": ":0"})
