"""A sweep killed at random moments, again and again, ends in the same bits."""

import os
import subprocess
import sys
import textwrap
from dataclasses import replace
from pathlib import Path

import pandas as pd
import pytest

from sweeps import jobs, runs
from sweeps.study import Study

KILLS = 24
BLOCK_ROWS = 40

WORKERS = """
    import os, random, signal, sys, time
    from sweeps import evaluate, jobs, runs
    runs.BLOCK_ROWS = int(sys.argv[2])
    run = runs.open_run(sys.argv[1])
    evaluate.evaluate(run.study, run.unit_of(0), threads=1)  # compiled once, for all workers
    chance = random.Random(5)
    for _ in range(int(sys.argv[3])):
        heard, told = os.pipe()
        worker = os.fork()
        if worker == 0:
            tell = lambda progress: os.write(told, b".")
            jobs.carry_out(runs.open_run(sys.argv[1]), tell, threads=1)
            os._exit(0)
        for _ in range(chance.randint(1, 6)):
            os.read(heard, 1)  # it has the folder, then a block more each time
        time.sleep(chance.uniform(0.0, 0.01))
        os.kill(worker, signal.SIGKILL)
        _, ended = os.waitpid(worker, 0)
        print(os.WIFSIGNALED(ended), run.rows_solved, flush=True)
        os.close(heard), os.close(told)
"""


def test_a_folder_that_may_not_be_written_is_named(
    small_study: Study, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    run = runs.prepare(small_study, tmp_path / "a")
    for number, name in ((13, "Permission denied"), (30, "Read-only file system")):

        def refuse(*_: object, number: int = number, name: str = name, **__: object) -> None:
            raise OSError(number, name)

        monkeypatch.setattr(os, "open", refuse)
        with pytest.raises(runs.RunError, match="in-use: may not be written; choose a folder"):
            jobs.carry_out(run)
        monkeypatch.undo()
    assert jobs.carry_out(run).state == jobs.DONE


def test_a_read_only_place_for_a_new_run_is_named(
    small_study: Study, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """By the system's answer, for the superuser may write anywhere."""

    def refuse(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "mkdir", refuse)
    with pytest.raises(runs.RunError, match=r"run: may not be written; choose a folder"):
        runs.prepare(small_study, tmp_path / "run")


def test_only_the_wanted_columns_are_read(small_study: Study, tmp_path: Path) -> None:
    run = runs.prepare(small_study, tmp_path / "a")
    jobs.carry_out(run)
    table = run.table(["mass_kg", "frame", "mass_kg"])
    assert list(table.columns) == ["mass_kg", "frame"]
    pd.testing.assert_frame_equal(table, run.table()[["mass_kg", "frame"]])


@pytest.mark.skipif(not hasattr(os, "fork"), reason="workers are forked")
def test_a_process_killed_again_and_again_loses_nothing(
    small_study: Study, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(runs, "BLOCK_ROWS", BLOCK_ROWS)
    study = replace(small_study, samples=1024)
    run = runs.prepare(study, tmp_path / "killed")
    said = subprocess.run(
        [sys.executable, "-c", textwrap.dedent(WORKERS), str(run.folder), str(BLOCK_ROWS),
         str(KILLS)],
        check=True, capture_output=True, text=True, cwd=Path(__file__).parents[2], timeout=120,
    ).stdout.split()  # fmt: skip
    killed, solved = said[0::2].count("True"), [int(n) for n in said[1::2]]
    print(f"{killed} kills, rows after each: {solved}")
    assert killed >= 20
    assert solved == sorted(solved)
    assert 0 < solved[-1] < run.design.rows
    jobs.carry_out(run, threads=1)
    whole = runs.prepare(study, tmp_path / "whole")
    jobs.carry_out(whole, threads=1)
    pd.testing.assert_frame_equal(run.table(), whole.table(), check_exact=True)
    left = sorted(p.name for p in run.folder.iterdir())
    assert left == ["blocks", "run.json", "study.toml"]
    assert len(list((run.folder / "blocks").iterdir())) == len(run.blocks)
