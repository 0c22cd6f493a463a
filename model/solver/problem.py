"""What the solver is asked and what it answers: arrays over frames, checked and of one length."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from model.frame.batch import Batch
from model.frame.skeleton import F64, I32, Skeleton
from model.solver.cases import Loads
from model.solver.plan import Plan, plan_for

BoolArray = NDArray[np.bool_]

LOOSE_PIVOT = 1e-10
"""A direction is loose when elimination leaves less than this part of its assembled stiffness."""

NO_CASE = -1


@dataclass(frozen=True, eq=False)
class Problem:
    """Frames of one skeleton under the same cases. Arrays may be broadcast (stride 0).

    xyz : (n, joints, 3); rigidity, ends : (n, groups, 6); present : (n, members), see ``Batch``.
    joint, direction : (loaded,); value : (n, cases, loaded), see ``Loads``.
    gauge : (held, 2) int32, joint and direction of the supports that carry nothing.
    energy_case : case whose strain energy is wanted, or ``NO_CASE``.
    """

    skeleton: Skeleton
    plan: Plan
    xyz: F64
    rigidity: F64
    ends: F64
    present: BoolArray
    joint: I32
    direction: I32
    value: F64
    gauge: I32
    energy_case: int

    def __len__(self) -> int:
        return len(self.xyz)

    @property
    def cases(self) -> int:
        """Number of load cases."""
        return int(self.value.shape[1])


@dataclass(frozen=True, eq=False)
class Solution:
    """Answers, one entry a frame; all NaN where ``status`` is not 0.

    compliance : (n, cases) f'u, the work-conjugate of each balanced set of forces; rad/(N·m) for
        a unit couple, m/N for a unit force.
    status : (n,) int32: 0 solved; otherwise 1 + 6 x joint + direction (0..5 are x, y, z, rx, ry,
        rz) of a direction in which a joint moves freely, or where a value that is not a number
        was met first.
    energy : (n, groups, 5) strain energy [J] under the chosen case by group and kind: axial,
        bending, torsion, shear, joints. None when no case was chosen.
    displacement : (n, cases, joints, 6) [m], [rad] relative to the supports, or None.
    gradient : (n, joints, 3) change of the chosen case's compliance with the joint positions
        while its forces stay as they are, or None.
    """

    compliance: F64
    status: I32
    energy: F64 | None = None
    displacement: F64 | None = None
    gradient: F64 | None = None


def problem(batch: Batch, loads: Loads, gauge: I32, energy_case: int | None) -> Problem:
    """The problem that a batch and its loads pose; arrays with one row serve all frames."""
    n = len(batch)
    skeleton = batch.skeleton
    joints, members, groups = (
        len(skeleton.joints),
        len(skeleton.members),
        len(skeleton.groups),
    )
    loaded = len(loads.joint)
    cases = np.shape(loads.value)[-2]
    if energy_case is not None and not 0 <= energy_case < cases:
        raise ValueError(f"energy_case = {energy_case}: the loads hold cases 0 to {cases - 1}")
    joint = np.ascontiguousarray(loads.joint, dtype=np.int32)
    held = np.ascontiguousarray(gauge, dtype=np.int32).reshape(-1, 2)
    for where in (joint, held[:, 0]):
        if where.size and not (where.min() >= 0 and where.max() < joints):
            raise ValueError(f"a load or support names a joint outside 0 to {joints - 1}")
    for axis in (loads.direction, held[:, 1]):
        if axis.size and not (axis.min() >= 0 and axis.max() < 6):
            raise ValueError("a load or support has a direction outside 0 to 5")
    return Problem(
        skeleton=skeleton,
        plan=plan_for(skeleton),
        xyz=_rows(batch.xyz, n, (joints, 3), "xyz"),
        rigidity=_rows(batch.rigidity, n, (groups, 6), "rigidity"),
        ends=_rows(batch.ends, n, (groups, 6), "ends"),
        present=_present(batch.present, n, members),
        joint=joint,
        direction=np.ascontiguousarray(loads.direction, dtype=np.int32),
        value=_rows(loads.value, n, (cases, loaded), "loads"),
        gauge=held,
        energy_case=NO_CASE if energy_case is None else energy_case,
    )


def empty_solution(problem: Problem, displacements: bool, gradients: bool) -> Solution:
    """Room for the answers, filled in block by block."""
    n, cases, joints = len(problem), problem.cases, len(problem.skeleton.joints)
    chosen = problem.energy_case != NO_CASE
    return Solution(
        compliance=np.empty((n, cases)),
        status=np.empty(n, dtype=np.int32),
        energy=np.empty((n, len(problem.skeleton.groups), 5)) if chosen else None,
        displacement=np.empty((n, cases, joints, 6)) if displacements else None,
        gradient=np.empty((n, joints, 3)) if gradients else None,
    )


def _rows(array: F64, n: int, shape: tuple[int, ...], name: str) -> F64:
    values = np.asarray(array, dtype=np.float64)
    _check(values.shape, n, shape, name)
    return np.broadcast_to(values, (n, *shape))


def _present(array: BoolArray, n: int, members: int) -> BoolArray:
    values = np.asarray(array, dtype=np.bool_)
    _check(values.shape, n, (members,), "present")
    return np.broadcast_to(values, (n, members))


def _check(got: tuple[int, ...], n: int, shape: tuple[int, ...], name: str) -> None:
    if got not in ((n, *shape), (1, *shape)):
        raise ValueError(f"{name} has shape {got}, expected {(n, *shape)}")
