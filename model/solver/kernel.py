"""The compiled solver: frames side by side in vector registers, from positions to answers.

As many frames as there are lanes go through together; ``workspace`` says where their numbers
lie. The steps are those of ``plain``, in the same order; the arithmetic of a member is in
``assembly``, that of a block in ``elimination``. Nothing here adds numbers of different frames,
so a frame's bits do not depend on its neighbours, its lane or the thread.

Places count in vectors, so number ``k`` of lane ``w`` is ``work[k * width + w]``.
"""

# mypy: disable-error-code="no-untyped-def, no-untyped-call, untyped-decorator"

from __future__ import annotations

import hashlib
from pathlib import Path
from typing import Any

import numpy as np
from numba import njit

from model.solver.assembly import (
    GIVEN,
    GROUP,
    KINDS,
    MEMBER,
    NEAR,
    add_energy,
    add_gradient,
    assemble_member,
    prepare_group,
    prepare_member,
)
from model.solver.beam import PARALLEL
from model.solver.elimination import (
    BLOCK,
    SIZE,
    TRIANGLE,
    factor_below,
    factor_diagonal,
    solve_backward,
    solve_forward_one,
    solve_forward_two,
)
from model.solver.problem import LOOSE_PIVOT, NO_CASE


def _source_digest() -> int:
    """Changes with any source the compiled code is made from."""
    here = Path(__file__).parent
    names = ("kernel.py", "vector.py", "elimination.py", "assembly.py", "workspace.py")
    text = b"".join((here / name).read_bytes() for name in names)
    text += repr((LOOSE_PIVOT, PARALLEL)).encode()
    return int.from_bytes(hashlib.sha256(text).digest()[:6], "little")


@njit(nogil=True)
def take_in(lanes, work, layout, tables, xyz, rigidity, ends, present, start, stop):
    """Positions, section values and presence of each lane's frame; spare lanes repeat the last."""
    width = len(lanes)
    for w in range(width):
        frame = min(start + w, stop - 1)
        for s in range(xyz.shape[1]):
            joint = tables.order[s]
            for k in range(3):
                work[(layout.place + 3 * s + k) * width + w] = xyz[frame, joint, k]
        for g in range(rigidity.shape[1]):
            for k in range(6):
                at = (layout.given + GIVEN * g + k) * width + w
                work[at] = rigidity[frame, g, k]
                work[at + 6 * width] = ends[frame, g, k]
        for m in range(present.shape[1]):
            work[(layout.here + m) * width + w] = present[frame, tables.member[m]]


@njit(nogil=True)
def take_forces(lanes, work, layout, tables, value, start, stop):
    """Joint forces of every case in the order of elimination."""
    width = len(lanes)
    joints = len(tables.order)
    work[layout.motion * width : layout.place * width] = 0.0
    for w in range(width):
        frame = min(start + w, stop - 1)
        for case in range(value.shape[1]):
            for k in range(len(tables.load_step)):
                joint = case * joints + tables.load_step[k]
                at = layout.motion + SIZE * joint + tables.load_direction[k]
                work[at * width + w] += value[frame, case, k]


@njit(nogil=True)
def prepare(lanes, work, layout, tables):
    """Flexibilities of the groups, local axes and natural stiffness of the members."""
    for g in range((layout.group - layout.given) // GIVEN):
        prepare_group(lanes, work, layout.group + GROUP * g, layout.given + GIVEN * g)
    for m in range(len(tables.group)):
        group, turned = layout.group + GROUP * tables.group[m], tables.turned[m]
        prepare_member(
            lanes,
            work,
            layout.member + MEMBER * m,
            layout.place + 3 * tables.late[m],
            layout.place + 3 * tables.early[m],
            tables.up,
            6 * m,
            layout.here + m,
            group,
            group + NEAR + turned,
            group + NEAR + 1 - turned,
        )


@njit(nogil=True, forceinline=True)
def add_members(lanes, work, layout, tables, j):
    """Stiffness of the members whose earlier end is eliminated in step ``j``, and supports.

    Together with the steps before, that is all the stiffness of joint ``j``.
    """
    width = len(lanes)
    for m in range(tables.member_start[j], tables.member_start[j + 1]):
        assemble_member(
            lanes,
            work,
            layout.member + MEMBER * m,
            layout.diagonal + TRIANGLE * tables.late[m],
            layout.diagonal + TRIANGLE * j,
            tables.block[m],
        )
        if tables.twin[m] >= 0:
            for k in range(BLOCK * width):
                work[tables.twin[m] * width + k] += work[tables.block[m] * width + k]
    for h in range(len(tables.held_step)):
        if tables.held_step[h] == j:
            at = layout.diagonal + TRIANGLE * j + tables.held_entry[h]
            for w in range(width):
                work[at * width + w] *= 2.0


@njit(nogil=True)
def factor_and_solve(lanes, work, layout, tables, cases):
    """K = L L' joint by joint, and L y = f alongside.

    Each step adds up its stiffness just before it is used, while it stays in the near cache.
    """
    width = len(lanes)
    work[layout.diagonal * width : layout.motion * width] = 0.0
    work[layout.status * width : layout.assembled * width] = 0.0
    stride = SIZE * len(tables.order)
    for j in range(len(tables.order)):
        add_members(lanes, work, layout, tables, j)
        diagonal = layout.diagonal + TRIANGLE * j
        start, stop = tables.left_start[j], tables.left_start[j + 1]
        factor_diagonal(
            lanes,
            work,
            diagonal,
            layout.assembled,
            layout.absent + j,
            layout.status,
            1 + SIZE * tables.order[j],
            tables.left_block,
            start,
            stop,
        )
        for case in range(0, cases, 2):
            before = stride * case
            y, work_done = layout.motion + before + SIZE * j, layout.work_done + case
            left, known = tables.left_block, tables.left_motion
            if case + 1 < cases:
                solve_forward_two(
                    lanes, work, y, work_done, before, stride, diagonal, left, known, start, stop
                )
            else:
                solve_forward_one(
                    lanes, work, y, work_done, before, stride, diagonal, left, known, start, stop
                )
        for b in range(tables.column_start[j], tables.column_start[j + 1]):
            factor_below(
                lanes,
                work,
                layout.below + BLOCK * b,
                diagonal,
                tables.filled[b],
                tables.update_a,
                tables.update_b,
                tables.update_start[b],
                tables.update_start[b + 1],
            )


@njit(nogil=True)
def solve_back(lanes, work, layout, tables, case):
    """L' u = y for one case, in place."""
    joints = len(tables.order)
    before = SIZE * joints * case
    for j in range(joints - 1, -1, -1):
        solve_backward(
            lanes,
            work,
            layout.motion + before + SIZE * j,
            before,
            layout.diagonal + TRIANGLE * j,
            layout.below,
            tables.row_motion,
            tables.column_start[j],
            tables.column_start[j + 1],
        )


@njit(nogil=True)
def add_energies(lanes, work, layout, tables, case):
    """Strain energy of every member under one case, summed by group and kind."""
    width = len(lanes)
    work[layout.energy * width : layout.slope * width] = 0.0
    motion = layout.motion + SIZE * len(tables.order) * case
    for m in range(len(tables.group)):
        group, turned = layout.group + GROUP * tables.group[m], tables.turned[m]
        add_energy(
            lanes,
            work,
            layout.energy + KINDS * tables.group[m],
            motion + SIZE * tables.late[m],
            motion + SIZE * tables.early[m],
            group,
            group + NEAR + turned,
            group + NEAR + 1 - turned,
            layout.member + MEMBER * m,
        )


@njit(nogil=True)
def add_gradients(lanes, work, layout, tables, case):
    """Slope of one case's compliance with the position of every joint."""
    width = len(lanes)
    work[layout.slope * width : layout.absent * width] = 0.0
    motion = layout.motion + SIZE * len(tables.order) * case
    for m in range(len(tables.group)):
        add_gradient(
            lanes,
            work,
            layout.slope + 3 * tables.late[m],
            layout.slope + 3 * tables.early[m],
            motion + SIZE * tables.late[m],
            motion + SIZE * tables.early[m],
            tables.up,
            6 * m,
            layout.group + GROUP * tables.group[m],
            layout.member + MEMBER * m,
        )


@njit(nogil=True)
def give_compliance(lanes, work, layout, tables, value, compliance, status, start, stop):
    """Status, and y'y of every case; not a number where the frame is loose.

    Forces that are not numbers, or that push a joint no member holds, come before all else.
    """
    width = len(lanes)
    for w in range(stop - start):
        frame = start + w
        code = 0
        for k in range(len(tables.load_step)):
            absent = work[(layout.absent + tables.load_step[k]) * width + w] == 1.0
            for case in range(value.shape[1]):
                force = value[frame, case, k]
                if code == 0 and ((absent and force != 0.0) or not np.isfinite(force)):
                    code = 1 + SIZE * tables.load_joint[k] + tables.load_direction[k]
        if code == 0:
            code = int(work[layout.status * width + w])
        status[frame] = code
        for case in range(value.shape[1]):
            total = work[(layout.work_done + case) * width + w]
            compliance[frame, case] = total if code == 0 else np.nan


@njit(nogil=True)
def give_displacement(lanes, work, layout, tables, status, displacement, start, stop):
    """Displacements of all joints under every case."""
    width = len(lanes)
    joints = len(tables.order)
    for w in range(stop - start):
        for case in range(displacement.shape[1]):
            for s in range(joints):
                at = layout.motion + SIZE * (case * joints + s)
                for k in range(SIZE):
                    u = work[(at + k) * width + w]
                    where = (start + w, case, tables.order[s], k)
                    displacement[where] = u if status[start + w] == 0 else np.nan


@njit(nogil=True)
def give_energy(lanes, work, layout, status, energy, start, stop):
    """Strain energy by group and kind; twice of it has been added up."""
    width = len(lanes)
    for w in range(stop - start):
        for g in range(energy.shape[1]):
            for kind in range(KINDS):
                stored = work[(layout.energy + KINDS * g + kind) * width + w] / 2.0
                energy[start + w, g, kind] = stored if status[start + w] == 0 else np.nan


@njit(nogil=True)
def give_gradient(lanes, work, layout, tables, status, gradient, start, stop):
    """Slopes of all joints in their own order."""
    width = len(lanes)
    for w in range(stop - start):
        for s in range(len(tables.order)):
            for k in range(3):
                slope = work[(layout.slope + 3 * s + k) * width + w]
                where = (start + w, tables.order[s], k)
                gradient[where] = slope if status[start + w] == 0 else np.nan


def _make(sources: int) -> Any:
    """The compiled entry; ``sources`` is part of what its cached form is found by."""

    def solve_frames(
        lanes,
        work,
        layout,
        tables,
        xyz,
        rigidity,
        ends,
        present,
        value,
        energy_case,
        compliance,
        status,
        energy,
        displacement,
        gradient,
        first,
        last,
    ):
        """Solve frames ``first`` to ``last``; arrays as in ``Problem`` and ``Solution``.

        lanes : tuple with one entry a lane. work : aligned, ``layout.end`` vectors.
        energy, displacement, gradient : without entries where they are not wanted.
        """
        if sources == 0:
            return
        for start in range(first, last, len(lanes)):
            stop = min(start + len(lanes), last)
            take_in(lanes, work, layout, tables, xyz, rigidity, ends, present, start, stop)
            take_forces(lanes, work, layout, tables, value, start, stop)
            prepare(lanes, work, layout, tables)
            factor_and_solve(lanes, work, layout, tables, value.shape[1])
            give_compliance(lanes, work, layout, tables, value, compliance, status, start, stop)
            for case in range(value.shape[1]):
                if len(displacement) > 0 or case == energy_case:
                    solve_back(lanes, work, layout, tables, case)
            if len(displacement) > 0:
                give_displacement(lanes, work, layout, tables, status, displacement, start, stop)
            if len(gradient) > 0:
                add_gradients(lanes, work, layout, tables, energy_case)
                give_gradient(lanes, work, layout, tables, status, gradient, start, stop)
            if energy_case != NO_CASE:
                add_energies(lanes, work, layout, tables, energy_case)
                give_energy(lanes, work, layout, status, energy, start, stop)

    try:
        return njit(cache=True, nogil=True)(solve_frames)
    except RuntimeError:  # no folder to keep compiled code in: compile in every session
        return njit(nogil=True)(solve_frames)


solve_frames = _make(_source_digest())
