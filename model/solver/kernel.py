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
    KEPT,
    KINDS,
    NEAR,
    add_energy,
    assemble_member,
    prepare_group,
)
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
from model.solver.problem import NO_CASE


def _source_digest() -> int:
    """Changes with any source the compiled code is made from."""
    here = Path(__file__).parent
    names = ("kernel.py", "vector.py", "elimination.py", "assembly.py", "workspace.py")
    text = b"".join((here / name).read_bytes() for name in names)
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
            work[(layout.here + m) * width + w] = present[frame, m]


@njit(nogil=True)
def assemble(lanes, work, layout, tables):
    """Stiffness of all members into their blocks, and the supports."""
    width = len(lanes)
    work[layout.diagonal * width : layout.motion * width] = 0.0
    for g in range((layout.group - layout.given) // GIVEN):
        prepare_group(lanes, work, layout.group + GROUP * g, layout.given + GIVEN * g)
    for m in range(len(tables.group)):
        group, turned = layout.group + GROUP * tables.group[m], tables.turned[m]
        assemble_member(
            lanes,
            work,
            layout.place + 3 * tables.late[m],
            layout.place + 3 * tables.early[m],
            tables.up,
            3 * m,
            layout.here + m,
            group,
            group + NEAR + turned,
            group + NEAR + 1 - turned,
            layout.diagonal + TRIANGLE * tables.late[m],
            layout.diagonal + TRIANGLE * tables.early[m],
            tables.block[m],
            layout.kept + KEPT * m,
        )
    for extra in range(len(tables.twin_block)):
        source = (layout.below + BLOCK * (len(tables.filled) + extra)) * width
        target = tables.twin_block[extra] * width
        for k in range(BLOCK * width):
            work[target + k] += work[source + k]
    for held in tables.held:
        for w in range(width):
            work[(layout.diagonal + held) * width + w] *= 2.0


@njit(nogil=True)
def take_forces(lanes, work, layout, tables, value, start, stop):
    """Joint forces of every case; impossible ones (see ``plain.impossible_loads``) as status."""
    width = len(lanes)
    joints = len(tables.order)
    work[layout.motion * width : layout.place * width] = 0.0
    work[layout.status * width : layout.assembled * width] = 0.0
    for w in range(width):
        frame = min(start + w, stop - 1)
        for k in range(len(tables.load_step)):
            step, direction = tables.load_step[k], tables.load_direction[k]
            absent = is_absent(work, layout.diagonal + TRIANGLE * step, width, w)
            for case in range(value.shape[1]):
                force = value[frame, case, k]
                at = layout.motion + SIZE * (case * joints + step) + direction
                work[at * width + w] += force
                wrong = (absent and force != 0.0) or not np.isfinite(force)
                if wrong and work[layout.status * width + w] == 0.0:
                    work[layout.status * width + w] = 1 + SIZE * tables.load_joint[k] + direction


@njit(nogil=True)
def is_absent(work, diagonal, width, w):
    """Whether a joint has no stiffness at all before elimination."""
    total = 0.0
    for k in range(SIZE):
        total += work[(diagonal + (k * (k + 3)) // 2) * width + w]
    return total == 0.0


@njit(nogil=True)
def factor_and_solve(lanes, work, layout, tables, cases):
    """K = L L' joint by joint, and L y = f alongside while the blocks are in the near cache."""
    stride = SIZE * len(tables.order)
    for j in range(len(tables.order)):
        diagonal = layout.diagonal + TRIANGLE * j
        start, stop = tables.left_start[j], tables.left_start[j + 1]
        factor_diagonal(
            lanes,
            work,
            diagonal,
            layout.assembled,
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
    work[layout.energy * width : layout.status * width] = 0.0
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
            layout.kept + KEPT * m,
        )


@njit(nogil=True)
def give_compliance(lanes, work, layout, compliance, status, start, stop):
    """Status, and y'y of every case; not a number where the frame is loose."""
    width = len(lanes)
    for w in range(stop - start):
        status[start + w] = int(work[layout.status * width + w])
        for case in range(compliance.shape[1]):
            total = work[(layout.work_done + case) * width + w]
            compliance[start + w, case] = total if status[start + w] == 0 else np.nan


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
        first,
        last,
    ):
        """Solve frames ``first`` to ``last``; arrays as in ``Problem`` and ``Solution``.

        lanes : tuple with one entry a lane. work : aligned, ``layout.end`` vectors.
        energy, displacement : without entries where they are not wanted.
        """
        if sources == 0:
            return
        for start in range(first, last, len(lanes)):
            stop = min(start + len(lanes), last)
            take_in(lanes, work, layout, tables, xyz, rigidity, ends, present, start, stop)
            assemble(lanes, work, layout, tables)
            take_forces(lanes, work, layout, tables, value, start, stop)
            factor_and_solve(lanes, work, layout, tables, value.shape[1])
            give_compliance(lanes, work, layout, compliance, status, start, stop)
            for case in range(value.shape[1]):
                if len(displacement) > 0 or case == energy_case:
                    solve_back(lanes, work, layout, tables, case)
            if len(displacement) > 0:
                give_displacement(lanes, work, layout, tables, status, displacement, start, stop)
            if energy_case != NO_CASE:
                add_energies(lanes, work, layout, tables, energy_case)
                give_energy(lanes, work, layout, status, energy, start, stop)

    try:
        return njit(cache=True, nogil=True)(solve_frames)
    except RuntimeError:  # no folder to keep compiled code in: compile in every session
        return njit(nogil=True)(solve_frames)


solve_frames = _make(_source_digest())
