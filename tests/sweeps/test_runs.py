"""A run folder survives what happens to folders; what it holds is the same bits every time."""

import json
import os
from dataclasses import replace
from pathlib import Path

import pandas as pd
import pytest

from model.errors import InputError
from sweeps import jobs, runs
from sweeps.study import Study


def solved(study: Study, folder: Path) -> pd.DataFrame:
    run = runs.prepare(study, folder)
    jobs.carry_out(run)
    return run.table()


@pytest.fixture(autouse=True)
def small_blocks(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(runs, "BLOCK_ROWS", 40)


def test_doubling_keeps_every_solved_row(small_study: Study, tmp_path: Path) -> None:
    half = solved(small_study, tmp_path / "a")
    before = {p: p.stat().st_mtime_ns for p in (tmp_path / "a/blocks").iterdir()}
    whole = solved(replace(small_study, samples=32), tmp_path / "a")
    assert all(p.stat().st_mtime_ns == t for p, t in before.items())
    pd.testing.assert_frame_equal(whole.iloc[: len(half)], half, check_exact=True)
    fresh = solved(replace(small_study, samples=32), tmp_path / "b")
    pd.testing.assert_frame_equal(whole, fresh, check_exact=True)


def test_a_run_smaller_than_a_block_can_be_doubled(
    small_study: Study, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(runs, "BLOCK_ROWS", 16384)
    half = solved(small_study, tmp_path / "a")
    whole = solved(replace(small_study, samples=64), tmp_path / "a")
    pd.testing.assert_frame_equal(whole.iloc[: len(half)], half, check_exact=True)
    fresh = solved(replace(small_study, samples=64), tmp_path / "b")
    pd.testing.assert_frame_equal(whole, fresh, check_exact=True)


def test_a_cancelled_run_resumes_to_the_same_bits(small_study: Study, tmp_path: Path) -> None:
    run = runs.prepare(small_study, tmp_path / "a")
    calls = iter([False, True])
    progress = jobs.carry_out(run, stop=lambda: next(calls))
    assert progress.state == jobs.CANCELLED
    assert 0 < progress.solved < progress.rows
    again = solved(small_study, tmp_path / "a")
    pd.testing.assert_frame_equal(again, solved(small_study, tmp_path / "b"), check_exact=True)


def test_a_damaged_block_is_set_aside_and_solved_again(small_study: Study, tmp_path: Path) -> None:
    good = solved(small_study, tmp_path / "a")
    run = runs.open_run(tmp_path / "a")
    run.path_of(1).write_bytes(b"half a block")
    assert run.missing() == [1]
    assert run.path_of(1).with_name("00001.parquet.set-aside-1").read_bytes() == b"half a block"
    pd.testing.assert_frame_equal(solved(small_study, tmp_path / "a"), good, check_exact=True)


def test_a_second_process_is_told_who_holds_the_folder(small_study: Study, tmp_path: Path) -> None:
    run = runs.prepare(small_study, tmp_path / "a")
    with runs.locked(run.folder), pytest.raises(runs.RunError, match=f"process {os.getpid()}"):
        jobs.carry_out(run)
    (run.folder / "in-use").write_text("999999999")  # of a process that is gone
    assert jobs.carry_out(run).state == jobs.DONE


def test_a_changed_study_and_foreign_folders_are_refused(
    small_study: Study, tmp_path: Path
) -> None:
    solved(small_study, tmp_path / "a")
    with pytest.raises(runs.RunError, match="another study"):
        runs.prepare(replace(small_study, seed=2), tmp_path / "a")
    (tmp_path / "b").mkdir()
    (tmp_path / "b/letter.txt").write_text("keep me")
    with pytest.raises(runs.RunError, match="other files"):
        runs.prepare(small_study, tmp_path / "b")
    assert (tmp_path / "b/letter.txt").read_text() == "keep me"
    with pytest.raises(InputError, match="a sweep was run into"):
        runs.open_run(tmp_path / "b")
    facts = json.loads((tmp_path / "a/run.json").read_text())
    (tmp_path / "a/run.json").write_text(json.dumps({**facts, "format": 99}))
    with pytest.raises(runs.RunError, match="another version"):
        runs.open_run(tmp_path / "a")


def test_a_study_edited_behind_the_run_is_noticed(small_study: Study, tmp_path: Path) -> None:
    solved(small_study, tmp_path / "a")
    path = tmp_path / "a/study.toml"
    path.write_text(path.read_text().replace("wall_mm = 3\n", "wall_mm = 3.5\n", 1))
    with pytest.raises(runs.RunError, match="changed since"):
        runs.open_run(tmp_path / "a")


def test_a_full_disk_is_named(
    small_study: Study, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    run = runs.prepare(small_study, tmp_path / "a")

    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "write_bytes", full)
    with pytest.raises(runs.RunError, match=r"00000\.parquet: No space left on device; free"):
        jobs.carry_out(run)
    monkeypatch.undo()
    assert not (run.folder / "in-use").exists()
    assert jobs.carry_out(run).state == jobs.DONE


def test_a_job_in_the_background_ends_and_can_be_found(small_study: Study, tmp_path: Path) -> None:
    run = runs.prepare(small_study, tmp_path / "a")
    job = jobs.start(run)
    assert job.wait(60)
    assert jobs.find(run.folder) is job
    assert job.progress.state == jobs.DONE
    assert job.progress.solved == run.design.rows
