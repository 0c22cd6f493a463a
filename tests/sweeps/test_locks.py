"""One process at a time: a second one is told, what is dead is no hindrance."""

import os
import subprocess
import sys
import threading
from pathlib import Path

import pytest

from sweeps import folders
from sweeps.folders import RunError, locked

ROOT = Path(__file__).parents[2]

HOLDER = """
import sys, pathlib
from sweeps.folders import locked
with locked(pathlib.Path(sys.argv[1])):
    print("mine", flush=True)
    sys.stdin.read()
"""


def test_another_process_is_named_until_it_lets_go(tmp_path: Path) -> None:
    other = subprocess.Popen(
        [sys.executable, "-c", HOLDER, str(tmp_path)],
        stdin=subprocess.PIPE, stdout=subprocess.PIPE, cwd=ROOT,
    )  # fmt: skip
    assert other.stdout is not None
    assert other.stdin is not None
    assert other.stdout.readline() == b"mine\n"
    with pytest.raises(RunError, match=f"in use by process {other.pid};"), locked(tmp_path):
        pass
    other.stdin.close()
    other.wait(20)
    other.stdout.close()
    with locked(tmp_path):
        pass
    assert not list(tmp_path.iterdir())


def test_a_process_that_was_killed_holds_nothing(tmp_path: Path) -> None:
    other = subprocess.Popen(
        [sys.executable, "-c", HOLDER, str(tmp_path)],
        stdin=subprocess.PIPE, stdout=subprocess.PIPE, cwd=ROOT,
    )  # fmt: skip
    assert other.stdout is not None
    assert other.stdin is not None
    assert other.stdout.readline() == b"mine\n"
    other.kill()
    other.wait(20)
    other.stdout.close()
    other.stdin.close()
    assert (tmp_path / "in-use").exists()
    with locked(tmp_path):
        pass


def test_a_number_given_out_again_is_no_holder(tmp_path: Path) -> None:
    """The mark of a killed process whose number this process, or another program, has now."""
    mark = tmp_path / "in-use"
    mark.write_text(str(os.getpid()))
    with locked(tmp_path):
        pass
    if folders._name(os.getppid()) == str(os.getppid()):
        pytest.skip("this system does not say when a process began")
    mark.write_text(f"{os.getppid()} 1")
    with locked(tmp_path):
        pass
    mark.write_text(folders._name(os.getppid()))
    with pytest.raises(RunError, match=f"process {os.getppid()};"), locked(tmp_path):
        pass


@pytest.mark.parametrize("left", ["", "nonsense", "-1", "99999999999999999999", "²", "1e3 \x00"])
def test_marks_that_name_nobody_are_taken_away(
    left: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(folders, "PATIENCE", 0.05)
    (tmp_path / "in-use").write_text(left, encoding="utf-8")
    with locked(tmp_path):
        assert (tmp_path / "in-use").read_text().split()[0] == str(os.getpid())


def test_of_many_threads_one_at_a_time_gets_in(tmp_path: Path) -> None:
    inside, most = 0, 0
    told: list[str] = []
    begin = threading.Barrier(8)

    def work() -> None:
        nonlocal inside, most
        begin.wait()
        for _ in range(50):
            try:
                with locked(tmp_path):
                    inside += 1
                    most = max(most, inside)
                    inside -= 1
            except RunError as fault:
                told.append(str(fault))

    threads = [threading.Thread(target=work) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert most == 1
    assert all(f"process {os.getpid()};" in text for text in told)
    assert not list(tmp_path.iterdir())
