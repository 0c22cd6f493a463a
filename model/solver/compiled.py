"""The compiled solver made ready: compiled for this machine, one worker for every thread."""

# mypy: disable-error-code="no-untyped-call"

from __future__ import annotations

import threading
from collections.abc import Callable

import llvmlite.binding as llvm
import numpy as np
from numba import types

from model.solver.kernel import solve_frames
from model.solver.problem import Problem, Solution
from model.solver.workspace import Tables, Workspace, make_work, tables_of, workspace_of


def _lanes_of_this_machine() -> int:
    """8 where registers hold 8 numbers, 4 elsewhere; the answers are the same bits."""
    return 8 if llvm.get_host_cpu_features().get("avx512f", False) else 4


LANES = _lanes_of_this_machine()

_compiling = threading.Lock()
_ready: set[int] = set()


def compile_for(lanes: int) -> None:
    """Compile the solver, or fetch it from numba's cache, for any problem on ``lanes`` lanes.

    Large inputs are taken as they are: strided, read-only or broadcast.
    """
    with _compiling:
        if lanes in _ready:
            return
        wide = types.Array(types.float64, 3, "A", readonly=True)
        present = types.Array(types.boolean, 2, "A", readonly=True)
        places = types.Array(types.int32, 1, "C")
        tables = [
            types.Array(types.float64, 1, "C") if name == "up" else places
            for name in Tables._fields
        ]
        signature = (
            types.UniTuple(types.int64, lanes),
            types.Array(types.float64, 1, "C"),
            types.NamedUniTuple(types.int64, len(Workspace._fields), Workspace),
            types.NamedTuple(tables, Tables),
            *(wide, wide, wide, present, wide, types.int64),
            types.Array(types.float64, 2, "C"),
            places,
            types.Array(types.float64, 3, "C"),
            types.Array(types.float64, 4, "C"),
            types.Array(types.float64, 3, "C"),
            types.int64,
            types.int64,
        )
        solve_frames.disable_compile(False)
        solve_frames.compile(signature)
        solve_frames.disable_compile()
        _ready.add(lanes)


class Compiled:
    """One problem ready for the compiled solver; every thread asks for its own worker."""

    def __init__(self, problem: Problem, solution: Solution, lanes: int = LANES) -> None:
        compile_for(lanes)
        self.problem, self.lanes = problem, lanes
        self.layout = workspace_of(problem)
        self.tables = tables_of(problem, self.layout)
        self.compliance, self.status = solution.compliance, solution.status
        none3, none4 = np.empty((0, 0, 0)), np.empty((0, 0, 0, 0))
        self.energy = none3 if solution.energy is None else solution.energy
        self.gradient = none3 if solution.gradient is None else solution.gradient
        self.displacement = none4 if solution.displacement is None else solution.displacement

    def worker(self) -> Callable[[int, int], None]:
        """A function that solves frames ``first`` to ``last``, for one thread."""
        p = self.problem
        work = make_work(self.layout, self.lanes)
        lanes = (0,) * self.lanes

        def solve_some(first: int, last: int) -> None:
            solve_frames(
                lanes,
                work,
                self.layout,
                self.tables,
                p.xyz,
                p.rigidity,
                p.ends,
                p.present,
                p.value,
                p.energy_case,
                self.compliance,
                self.status,
                self.energy,
                self.displacement,
                self.gradient,
                first,
                last,
            )

        return solve_some
