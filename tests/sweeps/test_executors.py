"""Blocks solved by other threads, processes or a cluster are the same bits; nothing gets lost."""

import os
import signal
import sys
from concurrent.futures import Executor, ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import replace
from multiprocessing import get_context
from pathlib import Path
from types import ModuleType

import pandas as pd
import pytest

from model.errors import InputError
from sweeps import jobs, runs
from sweeps.cluster import cluster
from sweeps.study import Study


@pytest.fixture(autouse=True)
def small_blocks(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(runs, "BLOCK_ROWS", 160)
    # the page tests leave a page behind as the main module, which a new process would run
    monkeypatch.setitem(sys.modules, "__main__", ModuleType("__main__"))


def kill_oneself(_: object) -> None:
    os.kill(os.getpid(), signal.SIGKILL)


def same(run: runs.Run, folder: Path) -> None:
    whole = runs.prepare(run.study, folder)
    jobs.carry_out(whole)
    pd.testing.assert_frame_equal(run.table(), whole.table(), check_exact=True)
    for one, other in zip(run.blocks, whole.blocks, strict=True):
        assert run.path_of(one).read_bytes() == whole.path_of(other).read_bytes()


@pytest.mark.parametrize("kind", ["threads", "processes"])
def test_the_result_is_the_local_one_bit_for_bit(
    kind: str, small_study: Study, tmp_path: Path
) -> None:
    run = runs.prepare(replace(small_study, samples=128), tmp_path / "a")
    executor: Executor = (
        ThreadPoolExecutor(2)
        if kind == "threads"
        else ProcessPoolExecutor(2, mp_context=get_context("spawn"))
    )
    seen = []
    with executor:
        ended = jobs.carry_out(run, lambda p: seen.append(p.solved), threads=1, executor=executor)
    assert ended.state == jobs.DONE
    assert seen == sorted(seen)
    assert run.facts()["seconds"]["building_and_solving"] > 0
    same(run, tmp_path / "b")


def test_a_worker_that_is_killed_is_named_and_loses_nothing(
    small_study: Study, tmp_path: Path
) -> None:
    run = runs.prepare(replace(small_study, samples=64), tmp_path / "a")
    with ProcessPoolExecutor(1, mp_context=get_context("spawn")) as pool:

        def tell(progress: jobs.Progress) -> None:
            if progress.solved:
                pool.submit(kill_oneself, None)

        with pytest.raises(runs.RunError, match=r"a worker ended .* resume"):
            jobs.carry_out(run, tell, threads=1, executor=pool, ahead=1)
    assert 0 < run.rows_solved < run.design.rows
    assert not (run.folder / "in-use").exists()
    assert jobs.carry_out(run).state == jobs.DONE
    same(run, tmp_path / "b")


def test_stopping_keeps_what_is_written(small_study: Study, tmp_path: Path) -> None:
    run = runs.prepare(replace(small_study, samples=128), tmp_path / "a")
    calls = iter([False, False, True])
    with ThreadPoolExecutor(2) as pool:
        ended = jobs.carry_out(run, stop=lambda: next(calls), threads=1, executor=pool, ahead=2)
    assert ended.state == jobs.CANCELLED
    assert 0 < run.rows_solved < run.design.rows
    jobs.carry_out(run)
    same(run, tmp_path / "b")


def test_a_cluster_of_two_processes_gives_the_same_bits_though_one_is_killed(
    small_study: Study, tmp_path: Path
) -> None:
    distributed = pytest.importorskip("distributed")
    run = runs.prepare(replace(small_study, samples=512), tmp_path / "a")
    with distributed.LocalCluster(
        n_workers=2, threads_per_worker=1, dashboard_address=None
    ) as local:
        workers = [worker.pid for worker in local.workers.values()]
        assert len(set(workers)) == 2
        killed: list[int] = []

        def tell(progress: jobs.Progress) -> None:
            if progress.share > 0.2 and not killed:
                killed.append(workers[0])
                os.kill(workers[0], signal.SIGKILL)

        with cluster(local.scheduler_address) as executor:
            ended = jobs.carry_out(run, tell, threads=1, executor=executor)
    assert killed
    assert ended.state == jobs.DONE
    same(run, tmp_path / "b")


def test_no_scheduler_is_said_in_words(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(InputError, match="install the library"), cluster("tcp://127.0.0.1:1"):
        pass


def test_a_scheduler_that_is_not_there_is_named(monkeypatch: pytest.MonkeyPatch) -> None:
    pytest.importorskip("distributed")
    monkeypatch.setattr("sweeps.cluster.PATIENCE", 0.5)
    for address in ("tcp://127.0.0.1:1", "nonsense"):
        with pytest.raises(InputError, match="one that runs"), cluster(address):
            pass
