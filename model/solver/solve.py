"""Solve a batch of frames: many side by side in compiled code, blocks of them on plain threads.

No sum crosses frames and no frame's arithmetic depends on where it stands, so the bits of an
answer are the same for any number of threads, any block size and any neighbours.
"""

from __future__ import annotations

import os
import threading
from collections.abc import Callable
from itertools import count

from model.frame.batch import Batch
from model.frame.skeleton import I32
from model.solver.cases import Loads
from model.solver.plain import solve_plain
from model.solver.problem import Problem, Solution, empty_solution, problem

__all__ = ["Solution", "solve"]

BLOCK = 512
"""Frames a thread takes at a time."""

Worker = Callable[[Problem, Solution, int, int], None]


def solve(
    batch: Batch,
    loads: Loads,
    gauge: I32,
    *,
    energy_case: int | None = None,
    displacements: bool = False,
    gradients: bool = False,
    threads: int | None = None,
    block: int = BLOCK,
    plain: bool = False,
) -> Solution:
    """Compliance of every frame under every load case, and more when asked.

    Parameters
    ----------
    batch : Batch
        Frames of one skeleton. Arrays whose first axis is 1 serve all frames.
    loads : Loads
        Balanced sets of joint forces.
    gauge : (6, 2) int32
        Joint and direction of a statically determinate support. A spring as stiff as the frame
        holds each; balanced forces leave it without load, so the compliance is exact.
    energy_case : int, optional
        Case whose strain energy by group and kind is wanted.
    displacements : bool
        Whether to return the joint displacements of all cases.
    threads : int, optional
        Threads to use; all processors when not given.
    block : int
        Frames a thread takes at a time.
    plain : bool
        Use the plain numpy twin, which is some hundred times slower.

    Notes
    -----
    A joint that no member holds is left out. Anything else that moves freely makes that one
    frame loose: its status says where, its answers are not numbers.
    """
    if gradients and energy_case is None:
        raise ValueError("gradients belong to a case: give energy_case")
    asked = problem(batch, loads, gauge, energy_case)
    solution = empty_solution(asked, displacements, gradients)
    in_blocks(solve_plain, asked, solution, threads or os.cpu_count() or 1, block)
    return solution


def in_blocks(worker: Worker, asked: Problem, solution: Solution, threads: int, block: int) -> None:
    """Hand out blocks of frames to threads until none is left; raises what a thread raised."""
    n = len(asked)
    starts = range(0, n, block)
    if threads <= 1 or len(starts) <= 1:
        for start in starts:
            worker(asked, solution, start, min(start + block, n))
        return
    ticket = count()
    failures: list[BaseException] = []

    def work() -> None:
        try:
            while not failures and (turn := next(ticket)) < len(starts):
                worker(asked, solution, starts[turn], min(starts[turn] + block, n))
        except BaseException as failure:  # noqa: BLE001 - handed to the caller below
            failures.append(failure)

    crew = [threading.Thread(target=work) for _ in range(min(threads, len(starts)) - 1)]
    for member in crew:
        member.start()
    work()
    for member in crew:
        member.join()
    if failures:
        raise failures[0]
