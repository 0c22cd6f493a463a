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
from model.solver.compiled import LANES, Compiled, compile_for
from model.solver.plain import Plain
from model.solver.problem import Solution, empty_solution, problem

__all__ = ["Solution", "compile_now", "solve"]

BLOCK = 256
"""Frames a thread takes at a time."""

COMPILING = "Preparing the frame solver for this machine; the first time takes about ten seconds."


def compile_now(progress: Callable[[str], None] | None = None) -> None:
    """Have the solver compiled before it is needed; says so if that takes more than a moment.

    The compiled code is kept in numba's cache, beside the package or, where that cannot be
    written, in the user's cache folder; later starts only fetch it.
    """
    notice = threading.Timer(1.0, progress or str, (COMPILING,))
    notice.daemon = True
    notice.start()
    try:
        compile_for(LANES)
    finally:
        notice.cancel()


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
    gradients : bool
        Whether to return the slope of the ``energy_case``'s compliance with all joint positions,
        its forces kept as they are. Where they depend on a position x too, add 2 u'(df/dx).
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
    solver = Plain(asked, solution) if plain else Compiled(asked, solution)
    in_blocks(solver.worker, len(asked), threads or os.cpu_count() or 1, block)
    return solution


def in_blocks(
    make_worker: Callable[[], Callable[[int, int], None]], n: int, threads: int, block: int
) -> None:
    """Hand out blocks of ``n`` frames to threads until none is left.

    Every thread makes itself a worker, which solves frames from the first to the last it is
    told. What a thread raises is raised here once all have ended.
    """
    starts = range(0, n, block)
    ticket = count()
    failures: list[BaseException] = []

    def work() -> None:
        try:
            worker = make_worker()
            while not failures and (turn := next(ticket)) < len(starts):
                worker(starts[turn], min(starts[turn] + block, n))
        except BaseException as failure:  # handed to the caller below
            failures.append(failure)

    crew = [threading.Thread(target=work) for _ in range(min(threads, len(starts)) - 1)]
    for member in crew:
        member.start()
    work()
    for member in crew:
        member.join()
    if failures:
        raise failures[0]
