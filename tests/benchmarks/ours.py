"""How fast our solver is, and what it needs."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from model.frame.batch import Batch
from model.frame.skeleton import F64
from model.solver.compiled import Compiled
from model.solver.plan import Plan
from model.solver.problem import empty_solution, problem
from model.solver.solve import solve
from tests.benchmarks.others import Task
from tests.model.solver import frames


def many(batch: Batch, n: int, seed: int = 1) -> Task:
    """``n`` frames like ``batch`` with other positions and other tube sizes; two load cases.

    Flat frames stay flat and round tubes round, so that every library can be asked.
    """
    rng = np.random.default_rng(seed)
    skeleton = batch.skeleton
    flat = np.ptp(batch.xyz[0], axis=0) == 0
    xyz = batch.xyz + np.where(flat, 0.0, 0.015) * rng.uniform(-1, 1, (n, *batch.xyz.shape[1:]))
    loaded = [*frames.corners(skeleton), *frames.middle(skeleton)]
    xyz[:, loaded] = batch.xyz[:, loaded]
    factor = rng.uniform(0.95, 1.05, (n, len(skeleton.groups), 1))
    factor = np.repeat(factor, 6, axis=2)
    factor[:, :, 4:] = 1 / factor[:, :, 4:]
    result = Batch(
        skeleton=skeleton,
        rows=np.arange(n, dtype=np.int64),
        xyz=xyz,
        rigidity=batch.rigidity * factor,
        ends=np.repeat(batch.ends, n, axis=0),
        line_mass=np.repeat(batch.line_mass, n, axis=0),
        present=np.repeat(batch.present, n, axis=0),
    )
    return Task(result, frames.twist_and_bend_loads(result), frames.held(skeleton))


def answers(task: Task, threads: int, energy: bool = True) -> F64:
    """Compliances of all frames; with strain energy by group and kind, and status."""
    case = 0 if energy else None
    return solve(task.batch, task.loads, task.held, energy_case=case, threads=threads).compliance


@dataclass(frozen=True)
class Clock:
    """What a second is: one on the wall, or one of a processor at work for this process.

    The second kind is for machines that do other things as well. With several threads at work
    it takes them to share their processor seconds evenly.
    """

    processor: bool

    def now(self) -> float:
        return time.process_time() if self.processor else time.perf_counter()

    def rates(
        self, run: Callable[[], object], count: int, seconds: float, threads: int = 1
    ) -> tuple[float, float]:
        """Best and median number of frames a second over repeated runs of ``count`` frames."""
        run()
        taken: list[float] = []
        end = time.perf_counter() + seconds
        while time.perf_counter() < end or len(taken) < 5:
            start = self.now()
            run()
            spent = self.now() - start
            taken.append(spent / threads if self.processor else spent)
        return count / min(taken), count / float(np.median(taken))

    def matrix_multiply_rate(self, size: int = 1024, tries: int = 20) -> float:
        """Best rate of numpy's double-precision matrix product [flop/s]; one thread."""
        rng = np.random.default_rng(1)
        a, b = rng.normal(size=(2, size, size))
        run: Callable[[], object] = lambda: a @ b  # noqa: E731
        run()
        best = np.inf
        for _ in range(tries):
            start = self.now()
            run()
            best = min(best, self.now() - start)
        return 2 * size**3 / best


def flops(plan: Plan, cases: int) -> int:
    """Operations of elimination and solution alone: both cases forwards, one backwards.

    Assembly and energies, some fifth more, are not counted, so a rate in these is a low one.
    """
    one_way = 72 * plan.blocks + 42 * plan.joints
    return plan.flops + (cases + 1) * one_way


def work_bytes(task: Task) -> int:
    """Bytes of a thread's work array for one lane."""
    asked = problem(task.batch, task.loads, task.held, 0)
    return Compiled(asked, empty_solution(asked, False, False)).layout.end * 8


def million(batch: Batch, frames_in_all: int = 1_000_000, at_once: int = 16384) -> float:
    """Seconds to make and solve a million frames, positions made chunk by chunk."""
    start = time.perf_counter()
    done = 0
    while done < frames_in_all:
        count = min(at_once, frames_in_all - done)
        compliance = answers(many(batch, count, seed=done), threads=0)
        if not np.isfinite(compliance).all():
            raise RuntimeError("a frame was not solved")
        done += count
    return time.perf_counter() - start
