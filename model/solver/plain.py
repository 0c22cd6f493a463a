"""The solver written out plainly in numpy: slow, easy to check, the twin of the compiled one.

Frames are the last axis of every array here, as they are in the compiled kernel, and every step
is taken in the same order; so the two can be held against each other entry by entry.

1. ``assemble``: stiffness blocks of every joint and of every pair of joined joints.
2. ``factor``: block Cholesky K = L L', joint by joint, testing every pivot.
3. ``forward``: L y = f for every load case; the compliance f'u is y'y.
4. ``backward``: L' u = y where displacements or energies are wanted.
5. ``energies``: strain energy by group and kind from the end displacements of every member;
   ``gradients``: change of the compliance with the joint positions.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from model.frame.skeleton import F64
from model.solver.beam import (
    KINDS,
    PARALLEL,
    member_energy,
    member_stiffness,
)
from model.solver.gradient import energy_slope
from model.solver.plan import Plan
from model.solver.problem import LOOSE_PIVOT, NO_CASE, Problem, Solution

Array = NDArray[Any]

AT_ONCE = 64
"""Frames side by side; only memory depends on it."""


@dataclass(frozen=True, eq=False)
class Members:
    """Members of the frames at hand, (frames, members, ...); absent or impossible ones stand in.

    start, end : (n, m, 3); up : (m, 3); rigidity, ends : (n, m, 6).
    here : (n, m) bool, the member exists. sound : it exists and has a length and local axes.
    """

    start: F64
    end: F64
    up: F64
    rigidity: F64
    ends: F64
    here: NDArray[np.bool_]
    sound: NDArray[np.bool_]


class Plain:
    """One problem ready for the plain solver; used like ``kernel.Compiled``."""

    def __init__(self, problem: Problem, solution: Solution) -> None:
        self.problem, self.solution = problem, solution

    def worker(self) -> Callable[[int, int], None]:
        """A function that solves frames ``first`` to ``last``."""

        def solve_some(first: int, last: int) -> None:
            for start in range(first, last, AT_ONCE):
                rows = slice(start, min(start + AT_ONCE, last))
                with np.errstate(all="ignore"):
                    _solve_side_by_side(self.problem, self.solution, rows)

        return solve_some


def _solve_side_by_side(problem: Problem, solution: Solution, rows: slice) -> None:
    plan = problem.plan
    members = take_members(problem, rows)
    diagonal, below = assemble(problem, members)
    support(problem, diagonal)
    absent = set_absent_joints(diagonal)
    status = impossible_loads(problem, rows, absent)
    factor(plan, diagonal, below, status)
    force = joint_forces(problem, rows)
    y = forward(plan, diagonal, below, force)
    loose = status != 0
    compliance = (y * y).sum(axis=(1, 2)).T
    solution.compliance[rows] = np.where(loose[:, None], np.nan, compliance)
    solution.status[rows] = status
    if solution.displacement is None and problem.energy_case == NO_CASE:
        return
    u = backward(plan, diagonal, below, y)
    displacement = np.moveaxis(u[:, plan.step], -1, 0)
    if solution.displacement is not None:
        solution.displacement[rows] = np.where(loose[:, None, None, None], np.nan, displacement)
    if solution.gradient is not None:
        slope = gradients(problem, members, displacement[:, problem.energy_case])
        solution.gradient[rows] = np.where(loose[:, None, None], np.nan, slope)
    if solution.energy is not None:
        energy = energies(problem, members, displacement[:, problem.energy_case])
        solution.energy[rows] = np.where(loose[:, None, None], np.nan, energy)


def take_members(problem: Problem, rows: slice) -> Members:
    """Ends and section values of every member, with a harmless stand-in where there is none."""
    skeleton = problem.skeleton
    i, j = skeleton.members.T
    xyz = problem.xyz[rows]
    start, end = xyz[:, i].copy(), xyz[:, j].copy()
    rigidity = problem.rigidity[rows][:, skeleton.group].copy()
    ends = problem.ends[rows][:, skeleton.group].copy()
    up = skeleton.up / np.linalg.norm(skeleton.up, axis=1, keepdims=True)
    along = end - start
    length = np.linalg.norm(along, axis=2)
    sine = np.linalg.norm(np.cross(up, along / length[..., None]), axis=2)
    here = np.array(problem.present[rows])
    sound = here & (length > 0) & (sine > PARALLEL)
    start[~sound] = 0.0
    end[~sound] = np.roll(up, 1, axis=1)[np.nonzero(~sound)[1]] + [0.1, 0.2, 0.3]
    rigidity[~here] = 1.0
    ends[~here] = 0.0
    return Members(start, end, up, rigidity, ends, here, sound)


def assemble(problem: Problem, members: Members) -> tuple[F64, F64]:
    """(joints, 6, 6, n) blocks on the diagonal, (blocks, 6, 6, n) blocks below it."""
    plan = problem.plan
    stiffness = member_stiffness(
        members.start, members.end, members.up, members.rigidity, members.ends
    )
    stiffness[members.here & ~members.sound] = np.nan
    stiffness[~members.here] = 0.0
    stiffness = np.moveaxis(stiffness, 0, -1)
    n = stiffness.shape[-1]
    diagonal = np.zeros((plan.joints, 6, 6, n))
    below = np.zeros((plan.blocks + plan.spare, 6, 6, n))
    for m, k in enumerate(stiffness):
        late, early = slice(0, 6), slice(6, 12)
        if plan.turned[m]:
            late, early = early, late
        diagonal[plan.member_late[m]] += k[late, late]
        diagonal[plan.member_early[m]] += k[early, early]
        below[plan.member_block[m]] = k[late, early]
        if plan.member_twin[m] >= 0:
            below[plan.member_twin[m]] += k[late, early]
    return diagonal, below


def support(problem: Problem, diagonal: F64) -> None:
    """Ground the frame: a spring as stiff as the frame itself in each held direction."""
    for joint, direction in problem.gauge:
        diagonal[problem.plan.step[joint], direction, direction] *= 2


def set_absent_joints(diagonal: F64) -> NDArray[np.bool_]:
    """Give joints without any stiffness a unit one, so that nothing moves there.

    Returns (joints, n) bool, in the order of elimination, True where a joint is absent.
    """
    trace = np.einsum("jaan->jn", diagonal)
    absent: NDArray[np.bool_] = trace == 0
    for a in range(6):
        diagonal[:, a, a] = np.where(absent, 1.0, diagonal[:, a, a])
    return absent


def factor(plan: Plan, diagonal: F64, below: F64, status: Array) -> None:
    """Block Cholesky in place; marks the first loose direction in ``status`` (n,)."""
    for j in range(plan.joints):
        assembled = np.einsum("aan->an", diagonal[j]).copy()
        for b in range(plan.left_start[j], plan.left_start[j + 1]):
            left = below[plan.left_block[b]]
            diagonal[j] -= np.einsum("ikn,jkn->ijn", left, left)
        _cholesky(diagonal[j], assembled, int(plan.order[j]), status)
        for b in range(plan.column_start[j], plan.column_start[j + 1]):
            for pair in range(plan.update_start[b], plan.update_start[b + 1]):
                left, above = below[plan.update_a[pair]], below[plan.update_b[pair]]
                below[b] -= np.einsum("ikn,jkn->ijn", left, above)
            _divide(below[b], diagonal[j])


def _cholesky(block: F64, assembled: F64, joint: int, status: Array) -> None:
    """Lower triangle of one block (6, 6, n) in place; marks the first loose direction."""
    for a in range(6):
        pivot = block[a, a] - (block[a, :a] ** 2).sum(axis=0)
        loose = ~(pivot > LOOSE_PIVOT * assembled[a])  # also where it is not a number
        status[loose & (status == 0)] = 1 + 6 * joint + a
        block[a, a] = np.sqrt(pivot)
        for b in range(a + 1, 6):
            rest = block[b, a] - (block[b, :a] * block[a, :a]).sum(axis=0)
            block[b, a] = rest / block[a, a]


def _divide(block: F64, lower: F64) -> None:
    """X with X L' = block, in place."""
    for a in range(6):
        rest = block[:, a] - np.einsum("ikn,kn->in", block[:, :a], lower[a, :a])
        block[:, a] = rest / lower[a, a]


def joint_forces(problem: Problem, rows: slice) -> F64:
    """(cases, joints, 6, n) forces in the order of elimination."""
    value = problem.value[rows]
    force = np.zeros((problem.cases, problem.plan.joints, 6, len(value)))
    for k, (joint, direction) in enumerate(zip(problem.joint, problem.direction, strict=True)):
        force[:, problem.plan.step[joint], direction] += value[:, :, k].T
    return force


def impossible_loads(problem: Problem, rows: slice, absent: NDArray[np.bool_]) -> Array:
    """Status (n,) after forces that are not numbers, or that push a joint no member holds."""
    status = np.zeros(absent.shape[-1], dtype=np.int32)
    for k, (joint, direction) in enumerate(zip(problem.joint, problem.direction, strict=True)):
        value = problem.value[rows][:, :, k]
        pushed = (value != 0).any(axis=1) & absent[problem.plan.step[joint]]
        wrong = pushed | ~np.isfinite(value).all(axis=1)
        status[wrong & (status == 0)] = 1 + 6 * joint + direction
    return status


def forward(plan: Plan, diagonal: F64, below: F64, force: F64) -> F64:
    """y with L y = f; (cases, joints, 6, n) in the order of elimination."""
    y = force.copy()
    for j in range(plan.joints):
        for b in range(plan.left_start[j], plan.left_start[j + 1]):
            left, column = below[plan.left_block[b]], plan.left_column[b]
            y[:, j] -= np.einsum("ikn,ckn->cin", left, y[:, column])
        for a in range(6):
            rest = y[:, j, a] - np.einsum("kn,ckn->cn", diagonal[j, a, :a], y[:, j, :a])
            y[:, j, a] = rest / diagonal[j, a, a]
    return y


def backward(plan: Plan, diagonal: F64, below: F64, y: F64) -> F64:
    """u with L' u = y."""
    u = y.copy()
    for j in reversed(range(plan.joints)):
        for b in range(plan.column_start[j], plan.column_start[j + 1]):
            u[:, j] -= np.einsum("kin,ckn->cin", below[b], u[:, plan.row[b]])
        for a in reversed(range(6)):
            later = slice(a + 1, 6)
            rest = u[:, j, a] - np.einsum("kn,ckn->cn", diagonal[j, later, a], u[:, j, later])
            u[:, j, a] = rest / diagonal[j, a, a]
    return u


def energies(problem: Problem, members: Members, displacement: F64) -> F64:
    """(n, groups, kinds) strain energy [J]; ``displacement`` (n, joints, 6) of one case."""
    skeleton = problem.skeleton
    ui, uj = (displacement[:, joints] for joints in skeleton.members.T)
    where = (members.start, members.end, members.up, members.rigidity, members.ends)
    energy = member_energy(*where, ui, uj)
    energy[~members.here] = 0.0
    total = np.zeros((len(energy), len(skeleton.groups), len(KINDS)))
    for m, group in enumerate(skeleton.group):
        total[:, group] += energy[:, m]
    return total


def gradients(problem: Problem, members: Members, displacement: F64) -> F64:
    """(n, joints, 3) slope of the compliance; ``displacement`` (n, joints, 6) of one case."""
    i, j = problem.skeleton.members.T
    where = (members.start, members.end, members.up, members.rigidity, members.ends)
    slope = energy_slope(*where, displacement[:, i], displacement[:, j])
    slope[~members.here] = 0.0
    total = np.zeros((*displacement.shape[:2], 3))
    for m in range(len(i)):
        total[:, i[m]] += slope[:, m]
        total[:, j[m]] -= slope[:, m]
    return total
