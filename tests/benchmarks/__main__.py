"""Frames a second of our solver and of others: ``python -m tests.benchmarks [--quick] [--busy]``.

One run on one machine. Every frame is assembled, factored and solved under twist and bending;
ours and the numpy ones also give strain energy by kind and group. All rates are of the best of
several runs, since other programs only ever make a run slower; the median stands beside ours.
"""

from __future__ import annotations

import os
import sys

from explorer.environment import enter

if __name__ == "__main__":
    enter("test", "tests.benchmarks", sys.argv[1:])  # before anything that is not in Python itself

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # before numpy: rates for each core

import argparse
import platform
import resource
import time
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np

from model.frame.batch import Batch
from model.solver.compiled import LANES
from model.solver.plan import plan_for
from model.solver.solve import compile_now
from tests import reference_libraries
from tests.benchmarks import others, ours
from tests.benchmarks.others import OneFrame, Task
from tests.benchmarks.ours import Clock
from tests.model.solver import frames

AGREE = 1e-8
"""Largest relative difference of compliances for which speeds are compared at all."""

SOLVERS = {"BandSPD": "banded", "ProfileSPD": "profile", "UmfPack": "sparse"}
"""OpenSees' own equation solvers that are tried; the fastest one counts."""


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks")
    parser.add_argument("--quick", action="store_true", help="fewer frames, no million")
    parser.add_argument(
        "--busy", action="store_true", help="count processor seconds: the machine does other work"
    )
    options = parser.parse_args()
    quick, clock = options.quick, ours.Clock(processor=options.busy)
    seconds = 0.4 if quick else 2.0
    threads = os.cpu_count() or 1
    start = time.perf_counter()
    compile_now(lambda text: print(text, file=sys.stderr))
    print(f"{platform.processor() or platform.machine()}, {threads} processors, ", end="")
    print(f"{LANES} frames side by side, compiled or fetched in ", end="")
    print(f"{time.perf_counter() - start:.1f} s")
    gemm = clock.matrix_multiply_rate()
    print(f"matrix product, one core: {gemm / 1e9:.1f} GFLOP/s\n")

    cases = {
        "ladder, 10 joints": frames.frame_a()[1],
        "box C, 36 joints": frames.frame_c()[1],
        "box C, 120 joints": frames.frame_c(29)[1],
    }
    rows = {name: measure(clock, batch, threads, seconds) for name, batch in cases.items()}
    print_table(rows)
    print()
    for name, batch in cases.items():
        details(clock, name, batch, rows[name], gemm, seconds)
    growth(clock, threads, seconds)
    if not quick:
        took = ours.million(frames.frame_c()[1])
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
        print(f"\na million frames C, made and solved: {took:.1f} s, process peak {peak:.0f} MB")


def measure(clock: Clock, batch: Batch, threads: int, seconds: float) -> dict[str, float]:
    """Frames a second by solver; NaN where it is not installed."""
    count = int(min(16384, 16384 * 36 / len(batch.skeleton.joints)))
    task = ours.many(batch, count)
    rows: dict[str, float] = {}
    for n in sorted({1, threads}):
        name = f"ours, {n} thread{'s' * (n > 1)}"
        best, median = clock.rates(lambda n=n: ours.answers(task, n), count, seconds, n)  # type: ignore[misc]
        rows[name], rows[f"{name} (median)"] = best, median
    few = ours.many(batch, 8)
    want = ours.answers(few, 1)
    rows["numpy dense, one at a time"] = one_at_a_time(clock, others.dense(few), want, seconds)
    rows["LAPACK banded, one at a time"] = one_at_a_time(clock, others.banded(few), want, seconds)
    rows["OpenSeesPy"] = np.nan
    ops = optional("opensees")
    if ops is not None:
        rows["OpenSeesPy"] = max(
            one_at_a_time(clock, others.opensees(few, ops, system), want, seconds)
            for system in SOLVERS
        )
    rows["PyNite"] = np.nan
    library = optional("pynite")
    if library is not None:
        rigidity = few.batch.rigidity.copy()
        rigidity[:, :, 4:] = 0.0
        stiff = Task(replace(few.batch, rigidity=rigidity), few.loads, few.held)
        rows["PyNite"] = one_at_a_time(
            clock, others.pynite(stiff, library), ours.answers(stiff, 1), seconds, least=2
        )
    return rows


def optional(name: str) -> Any:
    """A library that need not be there."""
    try:
        return getattr(reference_libraries, name)()
    except ImportError as reason:
        print(reason, file=sys.stderr)
        return None


def one_at_a_time(clock: Clock, one: OneFrame, want: Any, seconds: float, least: int = 8) -> float:
    """Best frames a second; first checks that the answers agree."""
    worst = float(np.abs(one(0) / want[0] - 1).max())
    if worst > AGREE:
        raise RuntimeError(f"{one.__qualname__} differs by {worst:.1e}")
    best = np.inf
    end, k = time.perf_counter() + seconds, 0
    while time.perf_counter() < end or k < least:
        start = clock.now()
        one(k % len(want))
        best = min(best, clock.now() - start)
        k += 1
    return 1 / best


def print_table(rows: dict[str, dict[str, float]]) -> None:
    """Frames a second, and how many times slower than ours on all threads."""
    names = list(rows)
    print(f"{'frames/s (ours is so many times faster)':42}" + "".join(f"{n:>25}" for n in names))
    solvers = list(rows[names[0]])
    ours_best = [s for s in solvers if s.startswith("ours") and "median" not in s][-1]
    for solver in solvers:
        line = f"{solver:42}"
        for name in names:
            rate = rows[name][solver]
            times = "" if solver.startswith("ours") else f" ({rows[name][ours_best] / rate:,.0f})"
            line += f"{f'{rate:,.0f}{times}' if np.isfinite(rate) else 'not installed':>25}"
        print(line)


def details(
    clock: Clock, name: str, batch: Batch, row: dict[str, float], gemm: float, seconds: float
) -> None:
    """Share of the matrix-multiply rate, threads, price of the energies, memory."""
    plan = plan_for(batch.skeleton)
    count = 4096 if plan.joints > 50 else 16384
    task = ours.many(batch, count)
    flops = ours.flops(plan, 2)
    both = [v for k, v in row.items() if k.startswith("ours") and "median" not in k]
    rate = flops * both[0]
    plainly, _ = clock.rates(lambda: ours.answers(task, 1, energy=False), count, seconds)
    with_energy, _ = clock.rates(lambda: ours.answers(task, 1), count, seconds)
    size = sum(
        getattr(task.batch, field).nbytes for field in ("xyz", "rigidity", "ends", "present")
    )
    size += task.loads.value.nbytes
    print(f"{name}: elimination and solution {flops / 1e3:.0f} kflop a frame, ", end="")
    print(f"{rate / 1e9:.1f} GFLOP/s a core = {rate / gemm:.0%} of the matrix product; ", end="")
    print(f"all threads against one x {both[-1] / both[0]:.2f}; ", end="")
    print(f"energies and all section slopes {plainly / with_energy - 1:+.0%}; ", end="")
    print(f"input {size / count / 1e3:.1f} kB a frame, ", end="")
    print(f"work {ours.work_bytes(task) * LANES / 1e3:.0f} kB a thread")


def growth(clock: Clock, threads: int, seconds: float) -> None:
    """Cost against the number of joints."""
    joints, cost = [], []
    for bays in (4, 9, 19, 39):
        batch = frames.frame_c(bays)[1]
        count = 20480 // (bays + 1)
        task = ours.many(batch, count)
        run: Callable[[], object] = lambda task=task: ours.answers(task, threads)  # type: ignore[misc]  # noqa: E731
        joints.append(4 * (bays + 1))
        cost.append(1 / clock.rates(run, count, seconds, threads)[0])
    power = np.polyfit(np.log(joints), np.log(cost), 1)[0]
    table = ", ".join(f"{n}: {1 / c:,.0f}" for n, c in zip(joints, cost, strict=True))
    print(f"\nframes/s by joints ({table}): cost grows like joints^{power:.2f}")


if __name__ == "__main__":
    main()
