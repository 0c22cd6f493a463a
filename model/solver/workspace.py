"""Where the numbers of the frames in hand lie: one work array for each thread, and its tables.

The frames that go through together lie side by side in one work array, which belongs to the
thread and stays in its cache. It is laid out in vectors, one number for each lane:

=========== ======================= =============================================
part        vectors                 holds
=========== ======================= =============================================
below       (blocks + spare) x 36   blocks of L below the diagonal, row by row
diagonal    joints x 21             lower triangles on the diagonal
motion      cases x joints x 6      forces, then y, then displacements
place       joints x 3              joint positions
here        members                 1 where the member is present
given       groups x 12             section values and end flexibilities as they came
group       groups x 12             the same as flexibilities
member      members x 19            local axes and natural stiffness of each member
energy      groups x 5              strain energy by group and kind
slope       joints x 3              change of the compliance with the joint positions
absent      joints                  1 where a joint has no stiffness
status      1                       0 or the first loose direction
work_done   cases                   y'y, the compliance
assembled   6                       diagonal of one joint before elimination
=========== ======================= =============================================
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from model.frame.skeleton import F64, I32
from model.solver.assembly import GIVEN, GROUP, KINDS, MEMBER
from model.solver.elimination import BLOCK, SIZE, TRIANGLE, low
from model.solver.problem import Problem


class Workspace(NamedTuple):
    """Places of the parts in the work array, counted in vectors."""

    below: int
    diagonal: int
    motion: int
    place: int
    here: int
    given: int
    group: int
    member: int
    energy: int
    slope: int
    absent: int
    status: int
    work_done: int
    assembled: int
    end: int


class Tables(NamedTuple):
    """The plan as places in the work array, and what members and loads refer to.

    Members stand in the order in which their earlier ends are eliminated; those of step ``j``
    are entries ``member_start[j]`` to ``member_start[j + 1]``. ``member`` is their own number,
    ``twin`` the block a second member between the same joints is added to, or -1.
    """

    column_start: I32
    row_motion: I32
    left_start: I32
    left_block: I32
    left_motion: I32
    update_start: I32
    update_a: I32
    update_b: I32
    filled: I32
    order: I32
    member_start: I32
    member: I32
    late: I32
    early: I32
    turned: I32
    block: I32
    twin: I32
    group: I32
    up: F64
    held_step: I32
    held_entry: I32
    load_step: I32
    load_joint: I32
    load_direction: I32


def workspace_of(problem: Problem) -> Workspace:
    """Where the parts of the work array start for one problem."""
    plan, skeleton = problem.plan, problem.skeleton
    groups, members = len(skeleton.groups), len(skeleton.members)
    sizes = (
        (plan.blocks + plan.spare) * BLOCK,
        plan.joints * TRIANGLE,
        problem.cases * plan.joints * SIZE,
        plan.joints * 3,
        members,
        groups * GIVEN,
        groups * GROUP,
        members * MEMBER,
        groups * KINDS,
        plan.joints * 3,
        plan.joints,
        1,
        problem.cases,
        SIZE,
    )
    return Workspace(*(int(k) for k in np.cumsum((0, *sizes))))


def tables_of(problem: Problem, layout: Workspace) -> Tables:
    """The plan's lists with numbers of blocks and joints turned into places."""
    plan, skeleton = problem.plan, problem.skeleton

    def int32(values: Any) -> I32:
        return np.array(values, dtype=np.int32, order="C").reshape(-1)

    member = np.argsort(plan.member_early, kind="stable")
    twin = plan.member_twin[member]
    return Tables(
        column_start=int32(plan.column_start),
        row_motion=int32(layout.motion + SIZE * plan.row),
        left_start=int32(plan.left_start),
        left_block=int32(layout.below + BLOCK * plan.left_block),
        left_motion=int32(layout.motion + SIZE * plan.left_column),
        update_start=int32(plan.update_start),
        update_a=int32(layout.below + BLOCK * plan.update_a),
        update_b=int32(layout.below + BLOCK * plan.update_b),
        filled=int32(plan.filled),
        order=int32(plan.order),
        member_start=int32(np.searchsorted(plan.member_early[member], np.arange(plan.joints + 1))),
        member=int32(member),
        late=int32(plan.member_late[member]),
        early=int32(plan.member_early[member]),
        turned=int32(plan.turned[member]),
        block=int32(layout.below + BLOCK * plan.member_block[member]),
        twin=int32(np.where(twin < 0, -1, layout.below + BLOCK * twin)),
        group=int32(skeleton.group[member]),
        up=_up_and_across(skeleton.up[member]).reshape(-1),
        held_step=int32(plan.step[problem.gauge[:, 0]]),
        held_entry=int32([low(d, d) for d in problem.gauge[:, 1]]),
        load_step=int32(plan.step[problem.joint]),
        load_joint=int32(problem.joint),
        load_direction=int32(problem.direction),
    )


def _up_and_across(up: F64) -> F64:
    """(members, 6) unit vector along ``up``, and one at right angles to it."""
    unit = up / np.sqrt((up**2).sum(axis=1, keepdims=True))
    axis = np.eye(3)[np.abs(unit).argmin(axis=1)]
    across = np.cross(unit, axis)
    across /= np.sqrt((across**2).sum(axis=1, keepdims=True))
    return np.concatenate([unit, across], axis=1)


def make_work(layout: Workspace, lanes: int) -> F64:
    """A work array that starts at a cache line."""
    room = np.empty(layout.end * lanes + 8)
    start = -room.ctypes.data % 64 // 8
    return room[start : start + layout.end * lanes]
