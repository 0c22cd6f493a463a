"""One frame with its supports, masses and load cases, and the matrices it is solved with."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp
from numpy.typing import NDArray

from model.frame.batch import Batch
from model.frame.skeleton import F64, I32
from model.solver import beam

DIRECTIONS = ("x", "y", "z", "rx", "ry", "rz")
"""The six directions of a joint, in the words of the frame file."""

UNHELD = 1e-12
"""A rotation is held by no member when its stiffness is below this part of the members' own."""

RELEASED = 1e29
"""End flexibilities from here on are free ends [rad/(N·m)]."""

BoolArray = NDArray[np.bool_]
Geometry = tuple[beam.Array, beam.Array, beam.Array, beam.Array, beam.Array]


@dataclass(frozen=True, eq=False)
class Frame:
    """One frame as it is solved: any joints, members, supports and load cases.

    joints : (J,) names; xyz : (J, 3) [m].
    member_names, groups : (M,) names; members : (M, 2) int32 joint numbers.
    up : (M, 3); rigidity, ends : (M, 6), as ``model.solver.beam`` takes them.
    line_mass : (M,) [kg/m]; rotary : (M,) bool, cross-sections have rotary inertia.
    held : (J, 6) bool, directions a support holds. lumps : (J,) point masses [kg].
    cases : (C,) names; loads : (C, J, 6) forces [N] and moments [N·m], vehicle axes.
    """

    joints: tuple[str, ...]
    xyz: F64
    member_names: tuple[str, ...]
    members: I32
    groups: tuple[str, ...]
    up: F64
    rigidity: F64
    ends: F64
    line_mass: F64
    rotary: BoolArray
    held: BoolArray
    lumps: F64
    cases: tuple[str, ...]
    loads: F64

    @property
    def lengths(self) -> F64:
        """(M,) length of the members between joint centres [m]."""
        i, j = self.members.T
        length: F64 = np.linalg.norm(self.xyz[j] - self.xyz[i], axis=1)
        return length

    @property
    def mass(self) -> float:
        """Mass of the members, without the point masses [kg]."""
        return float(self.line_mass @ self.lengths)

    def geometry(self, kind: type = np.float64) -> Geometry:
        """From, to, up, rigidity and ends of the members, as ``beam`` takes them."""
        i, j = self.members.T
        xyz: beam.Array = self.xyz.astype(kind)
        up: beam.Array = self.up.astype(kind)
        rigidity: beam.Array = self.rigidity.astype(kind)
        ends: beam.Array = self.ends.astype(kind)
        return xyz[i], xyz[j], up, rigidity, ends


def frame_of(
    batch: Batch, held: BoolArray, cases: tuple[str, ...], loads: F64, row: int = 0
) -> Frame:
    """One frame of a batch, to be solved by itself; members that are left out are dropped.

    held : (joints, 6) bool; loads : (cases, joints, 6). Joints that no member meets are held.
    """
    skeleton = batch.skeleton
    here = np.flatnonzero(batch.present[row])
    group = skeleton.group[here]
    lonely = np.ones(len(skeleton.joints), dtype=bool)
    lonely[skeleton.members[here]] = False
    return Frame(
        joints=skeleton.joints,
        xyz=batch.xyz[row],
        member_names=tuple(skeleton.member_names[m] for m in here),
        members=skeleton.members[here],
        groups=tuple(skeleton.groups[g] for g in group),
        up=skeleton.up[here],
        rigidity=batch.rigidity[row, group],
        ends=batch.ends[row, group],
        line_mass=batch.line_mass[row, group],
        rotary=np.ones(len(here), dtype=bool),
        held=held | lonely[:, None],
        lumps=np.zeros(len(skeleton.joints)),
        cases=cases,
        loads=loads,
    )


def member_matrices(frame: Frame) -> F64:
    """(M, 12, 12) stiffness of the members, vehicle axes; nothing at all against a free end."""
    xi, xj, up, rigidity, ends = frame.geometry()
    length = beam.lengths(xi, xj)
    modes = beam.natural_modes(beam.member_axes(xi, xj, up), length)
    natural = beam.natural_matrix(beam.natural_stiffness(length, rigidity, ends))
    kept = np.where(ends >= RELEASED, 0.0, 1.0)
    natural = natural * kept[:, :, None] * kept[:, None, :]
    matrices: F64 = np.einsum("map,mab,mbq->mpq", modes, natural, modes, optimize=True)
    return matrices


def assemble(frame: Frame, matrices: F64) -> sp.csc_matrix:
    """(6J, 6J) sparse sum of member matrices (M, 12, 12)."""
    size = 6 * len(frame.joints)
    place = (6 * frame.members[:, :, None] + np.arange(6)).reshape(-1, 12)
    rows = np.broadcast_to(place[:, :, None], matrices.shape)
    columns = np.broadcast_to(place[:, None, :], matrices.shape)
    entries = (matrices.ravel(), (rows.ravel(), columns.ravel()))
    return sp.coo_matrix(entries, shape=(size, size)).tocsc()


@dataclass(frozen=True, eq=False)
class Idle:
    """Motions of the joints that strain no member and do no harm: pinned ends turn under them.

    vectors : (6J, q) sparse, orthonormal columns; stiffness : (q,) a stiffness of the members
        nearby, for grounding. Because the motions strain nothing, a spring against them changes
        no force in the frame; it only says that they stay at rest.
    """

    vectors: sp.csc_matrix
    stiffness: F64

    def grounding(self) -> sp.csc_matrix:
        """(6J, 6J) stiffness of the springs that keep the idle motions at rest."""
        return sp.csc_matrix(self.vectors @ sp.diags(self.stiffness) @ self.vectors.T)

    def quiet(self, matrix: sp.csc_matrix) -> sp.csc_matrix:
        """A mass matrix from which the idle motions are taken out."""
        keep = sp.identity(matrix.shape[0], format="csc") - self.vectors @ self.vectors.T
        return sp.csc_matrix(keep @ matrix @ keep)

    def with_more(self, vectors: F64, stiffness: F64) -> Idle:
        """These and further motions: vectors (6J, more), stiffness (more,)."""
        both = sp.hstack([self.vectors, sp.csc_matrix(vectors)], format="csc")
        return Idle(both, np.concatenate([self.stiffness, stiffness]))


def idle_rotations(frame: Frame, matrices: F64) -> Idle:
    """Rotations of single joints that no member end and no support holds.

    The three rotations of a joint form a 3x3 block of the stiffness; where a direction (not
    necessarily along an axis) has no stiffness, every member there is free to turn about it.
    """
    joints = len(frame.joints)
    block, near = np.zeros((joints, 3, 3)), np.zeros(joints)
    members_own = frame.rigidity[:, 1:4].sum(axis=1) / frame.lengths
    for end in (0, 1):
        turn = slice(6 * end + 3, 6 * end + 6)
        np.add.at(block, frame.members[:, end], matrices[:, turn, turn])
        np.add.at(near, frame.members[:, end], members_own)
    held = frame.held[:, 3:]
    block = np.where(held[:, :, None] | held[:, None, :], 0.0, block)
    block += np.where(held, np.maximum(near, 1.0)[:, None], 0.0)[:, :, None] * np.eye(3)
    value, vector = np.linalg.eigh(block)
    joint, k = np.nonzero((value <= UNHELD * near[:, None]) & (near > 0)[:, None])
    rows = 6 * joint[:, None] + 3 + np.arange(3)
    columns = np.broadcast_to(np.arange(len(joint))[:, None], rows.shape)
    entries = (vector[joint, :, k].ravel(), (rows.ravel(), columns.ravel()))
    vectors = sp.coo_matrix(entries, shape=(6 * joints, len(joint))).tocsc()
    return Idle(vectors, near[joint])
