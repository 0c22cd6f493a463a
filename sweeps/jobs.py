"""Long work: one sweep at a time, with progress, cancel and resume; knows nothing of pages."""

from __future__ import annotations

import threading
import time
import traceback
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

from model.errors import DesignError
from sweeps.evaluate import OK, evaluate
from sweeps.runs import Run, locked


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


def carry_out(
    run: Run,
    tell: Callable[[Progress], None] = lambda _: None,
    stop: Callable[[], bool] = lambda: False,
    threads: int | None = None,
) -> Progress:
    """Solve the blocks that a run still misses; block by block, until done or told to stop."""
    with locked(run.folder):
        began = time.perf_counter()
        run.clear_scratch()
        missing = run.missing()
        rows = run.design.rows
        solved = rows - len(missing) * _block_rows(run)
        before, failed = solved, 0
        drawing = solving = writing = 0.0
        state = DONE
        tell(Progress(rows, solved, failed, 0.0, 0.0, RUNNING))
        for block in missing:
            if stop():
                state = CANCELLED
                break
            begin = time.perf_counter()
            unit = run.unit_of(block)
            start = time.perf_counter()
            table = evaluate(run.study, unit, run.rows_of(block).start, threads)
            middle = time.perf_counter()
            run.write_block(block, table)
            drawing += start - begin
            solving += middle - start
            writing += time.perf_counter() - middle
            failed += int((table["status"] != OK).sum())
            solved += len(table)
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
        last = Progress(rows, solved, failed, seconds, rate, state)
        tell(last)
        return last


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
