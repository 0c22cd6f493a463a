"""Long work: one sweep at a time, with progress, cancel and resume; knows nothing of pages."""

from __future__ import annotations

import threading
import time
import traceback
from collections.abc import Callable, Iterator
from concurrent.futures import (
    FIRST_COMPLETED,
    BrokenExecutor,
    CancelledError,
    Executor,
    Future,
    wait,
)
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, TypeVar

import pandas as pd

from model.errors import DesignError
from sweeps.evaluate import OK, evaluate
from sweeps.runs import Run, RunError, locked
from sweeps.study import Study

T = TypeVar("T")


@dataclass(frozen=True)
class Progress:
    """How far a sweep is. rate : rows a second of this session, 0 before the first block."""

    rows: int
    solved: int
    failed: int
    seconds: float
    rate: float
    state: str
    message: str = ""

    @property
    def share(self) -> float:
        """Part that is solved, 0 to 1."""
        return self.solved / self.rows if self.rows else 1.0

    @property
    def seconds_left(self) -> float | None:
        """Time still needed at the present rate; None before there is one."""
        return (self.rows - self.solved) / self.rate if self.rate > 0 else None


WAITING, RUNNING, DONE, CANCELLED, FAILED = "waiting", "running", "done", "cancelled", "failed"


class Here(Executor):
    """Does each block in the calling thread, which shares it among the solver's own threads."""

    def submit(self, fn: Callable[..., T], /, *args: Any, **kwargs: Any) -> Future[T]:
        """Do the work now."""
        done: Future[T] = Future()
        try:
            done.set_result(fn(*args, **kwargs))
        except Exception as fault:
            done.set_exception(fault)
        return done


@dataclass(frozen=True, eq=False)
class Solved:
    """Rows of a block, and the seconds that drawing and solving them took."""

    rows: pd.DataFrame
    drawing: float
    solving: float


def solve_block(
    study: Study, second_order: bool, first: int, samples: int, threads: int | None
) -> Solved:
    """Solve the frames of some base samples; the same bits wherever it is done."""
    begin = time.perf_counter()
    design = study.design(second_order)
    unit = design.unit(first, samples)
    middle = time.perf_counter()
    rows = evaluate(study, unit, first * design.rows_per_sample, threads)
    return Solved(rows, middle - begin, time.perf_counter() - middle)


def carry_out(
    run: Run,
    tell: Callable[[Progress], None] = lambda _: None,
    stop: Callable[[], bool] = lambda: False,
    threads: int | None = None,
    executor: Executor | None = None,
    ahead: int = 8,
) -> Progress:
    """Solve the blocks that a run still misses; block by block, until done or told to stop.

    threads : of the solver in each block. executor : who solves the blocks: the calling thread
        when not given, or any ``concurrent.futures`` executor, such as a ``ProcessPoolExecutor``
        or what ``dask.distributed.Client.get_executor()`` gives. Its workers read and write no
        files. ahead : so many blocks are given to it at a time.

    Raises
    ------
    RunError
        The folder is in use or may not be written, or a worker ended; all blocks written stay.
    """
    with locked(run.folder):
        began = time.perf_counter()
        run.clear_scratch()
        missing, aside = run.inspect()
        rows = run.design.rows
        solved = rows - len(missing) * _block_rows(run)
        before, failed = solved, 0
        drawing = solving = writing = 0.0
        state = DONE
        tell(Progress(rows, solved, failed, 0.0, 0.0, RUNNING))
        for block, found in _results(run, missing, stop, threads, executor or Here(),
                                     ahead if executor else 1):  # fmt: skip
            if found is None:
                state = CANCELLED
                break
            middle = time.perf_counter()
            run.write_block(block, found.rows)
            drawing += found.drawing
            solving += found.solving
            writing += time.perf_counter() - middle
            failed += int((found.rows["status"] != OK).sum())
            solved += len(found.rows)
            seconds = time.perf_counter() - began
            tell(Progress(rows, solved, failed, seconds, (solved - before) / seconds, RUNNING))
        seconds = time.perf_counter() - began
        if solved > before:
            rate = (solved - before) / seconds
            times = {"drawing": drawing, "building_and_solving": solving, "writing": writing}
            run.note(
                rows_per_second=round(rate),
                seconds={key: round(value, 4) for key, value in times.items()},
            )
        else:
            rate = 0.0
        last = Progress(rows, solved, failed, seconds, rate, state, "; ".join(aside))
        tell(last)
        return last


def _results(
    run: Run,
    missing: list[int],
    stop: Callable[[], bool],
    threads: int | None,
    executor: Executor,
    ahead: int,
) -> Iterator[tuple[int, Solved | None]]:
    """Blocks as they get done; None when told to stop."""
    count = run.samples_per_block
    waiting = list(reversed(missing))
    under_way: dict[Future[Solved], int] = {}
    try:
        while waiting or under_way:
            if stop():
                yield -1, None
                return
            while waiting and len(under_way) < ahead:
                block = waiting.pop()
                job = executor.submit(
                    solve_block, run.study, run.second_order, block * count, count, threads
                )
                under_way[job] = block
            for job in wait(under_way, return_when=FIRST_COMPLETED).done:
                yield under_way.pop(job), job.result()
    except (BrokenExecutor, CancelledError) as fault:
        raise RunError(
            f"{run.folder}: a worker ended before its block was solved; all that is solved stays, "
            "resume the sweep"
        ) from fault
    finally:
        for job in under_way:
            job.cancel()


def _block_rows(run: Run) -> int:
    return run.samples_per_block * run.design.rows_per_sample


@dataclass
class Job:
    """A sweep in the background."""

    run: Run
    progress: Progress
    _stop: threading.Event = field(default_factory=threading.Event)
    _done: threading.Event = field(default_factory=threading.Event)

    def cancel(self) -> None:
        """Stop after the block under way; everything solved stays."""
        self._stop.set()

    def wait(self, seconds: float | None = None) -> bool:
        """Wait until it has ended; False when it has not within ``seconds``."""
        return self._done.wait(seconds)

    @property
    def active(self) -> bool:
        """Whether it waits or runs."""
        return not self._done.is_set()

    def work(self) -> None:
        """Carry the run out; errors end up in the progress, never in the air."""
        try:
            self.progress = carry_out(self.run, self._tell, self._stop.is_set)
        except DesignError as fault:
            self._end(str(fault))
        except Exception as fault:  # our own fault: keep its name, the worker must live on
            traceback.print_exc()
            self._end(f"stopped by a fault of the program: {type(fault).__name__}: {fault}")
        finally:
            self._done.set()

    def _tell(self, progress: Progress) -> None:
        self.progress = progress

    def _end(self, message: str) -> None:
        p = self.progress
        self.progress = Progress(p.rows, p.solved, p.failed, p.seconds, p.rate, FAILED, message)


_jobs: dict[Path, Job] = {}
_queue: list[Job] = []
_ready = threading.Condition()
_worker: threading.Thread | None = None


def start(run: Run) -> Job:
    """Carry a run out in the background; a run already under way is given back as it is."""
    global _worker
    key = run.folder.resolve()
    with _ready:
        job = _jobs.get(key)
        if job is not None and job.active:
            return job
        waiting = Progress(run.design.rows, run.rows_solved, 0, 0.0, 0.0, WAITING)
        job = _jobs[key] = Job(run, waiting)
        _queue.append(job)
        if _worker is None or not _worker.is_alive():
            _worker = threading.Thread(target=_serve, name="sweeps", daemon=True)
            _worker.start()
        _ready.notify()
    return job


def find(folder: Path) -> Job | None:
    """The job of a run folder since the program started, if there was one."""
    with _ready:
        return _jobs.get(folder.resolve())


def _serve() -> None:
    while True:
        with _ready:
            while not _queue:
                _ready.wait()
            job = _queue.pop(0)
        job.work()
