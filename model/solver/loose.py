"""Find what moves freely in a frame, and say which joint, in which direction, what would hold it.

The softest motion of the factored frame comes from a few inverse iterations. It is free when no
member deforms by more than a hundred-thousandth of the turning it goes along with; this is a
statement about geometry alone, so a long slender frame passes and a pinned joint that lies on a
line only to six decimals does not.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_matrix, csc_matrix
from scipy.sparse.csgraph import connected_components

from model.errors import LooseFrame
from model.frame.skeleton import F64
from model.solver import beam
from model.solver.structure import DIRECTIONS, RELEASED, UNHELD, BoolArray, Frame, Idle

STRAINLESS = 1e-5
"""A motion is free when it strains every member less than this part of what it turns."""

ITERATIONS = 5
NOTHING = 1e-11
"""Rotations with less than this part of the largest rotational stiffness have none."""

STILL = 1e-6
"""Parts that move less than this, against the largest motion, are at rest."""


def check_pieces(frame: Frame) -> None:
    """Refuse a frame with a part that neither a support nor another part holds."""
    count, piece = _pieces(frame, np.ones(len(frame.members), dtype=bool))
    held = np.bincount(piece, weights=frame.held.any(axis=1), minlength=count) > 0
    if not held.all():
        joint = int(np.flatnonzero(~held[piece])[0])
        together = _names(frame, np.flatnonzero(piece == piece[joint]))
        raise LooseFrame(
            frame.joints[joint],
            "every direction",
            f"nothing joins {together} to a support; join or support this part",
        )


def check_idle_loads(frame: Frame, idle: Idle) -> None:
    """Refuse a load on a rotation that nothing holds."""
    if not frame.cases:
        return
    loads = frame.loads.reshape(len(frame.cases), -1)
    work = np.abs(idle.vectors.T @ loads.T).T
    moment = np.abs(frame.loads[:, :, 3:]).max(axis=(1, 2), initial=0.0)
    bad = work > STILL * moment[:, None]
    if bad.any():
        case, k = (int(v[0]) for v in np.nonzero(bad))
        dof = int(np.abs(idle.vectors[:, k].toarray().ravel()).argmax())
        raise LooseFrame(
            frame.joints[dof // 6],
            DIRECTIONS[dof % 6],
            f"case {frame.cases[case]} puts a moment where every member end is pinned; "
            "weld one of them or take the moment away",
        )


def spins_or_refuse(
    frame: Frame,
    stiffness: csc_matrix,
    free: BoolArray,
    scale: F64,
    solve: Callable[[F64], F64],
) -> tuple[F64, F64] | None:
    """None when the frame is held; otherwise the ways joints turn together between free ends.

    stiffness : (6J, 6J) of the members and of the grounded idle motions.
    Returns (6J, ways) orthonormal motions and a stiffness each, for ``Idle``.

    Raises
    ------
    LooseFrame
        The motion moves joints, or turns the frame as a whole.
    """
    motion = _softest(free, scale, solve)
    if motion is None or _strain(frame, motion) > STRAINLESS:
        return None
    move, turn = motion[:, :3], motion[:, 3:]
    size = float(np.ptp(frame.xyz, axis=0).max())
    if np.abs(move).max() <= STILL * np.abs(turn).max() * size:
        spins = _spins(frame, stiffness, turn)
        if spins is not None:
            return spins
    raise _refusal(frame, motion, size)


def _softest(free: BoolArray, scale: F64, solve: Callable[[F64], F64]) -> F64 | None:
    """(J, 6) the motion that costs least, unit of no meaning."""
    if not free.any():
        return None
    vector = np.random.default_rng(1).standard_normal(len(scale))
    for _ in range(ITERATIONS):
        vector = solve(vector)
        vector /= np.linalg.norm(vector)
    motion = np.zeros(free.size)
    motion[free] = scale * vector
    return motion.reshape(-1, 6)


def _strain(frame: Frame, motion: F64) -> float:
    """Largest deformation of a member over the largest turning in a motion (both are angles).

    A stretch counts over the member's length; bending and twist count with the flexible ends
    they go through; what a free end does counts nothing.
    """
    xi, xj, up, rigidity, ends = frame.geometry()
    ui, uj = (motion[frame.members[:, end]] for end in (0, 1))
    forces = beam.natural_forces(xi, xj, up, rigidity, ends, ui, uj)
    length = frame.lengths
    ea, eiy, eiz, gj = (rigidity[:, k] for k in range(4))
    own = np.stack([length / ea, length / gj, *[length / eiy] * 2, *[length / eiz] * 2], axis=1)
    deformation = forces * np.where(ends >= RELEASED, 0.0, own + ends)
    deformation[:, 0] /= length
    chord = np.linalg.norm(uj[:, :3] - ui[:, :3], axis=1) / length
    size = float(np.ptp(frame.xyz, axis=0).max())
    turning = max(
        float(chord.max()),
        float(np.abs(motion[:, 3:]).max()),
        float(np.abs(motion[:, :3]).max()) / size,
    )
    return float(np.abs(deformation).max()) / turning


def _spins(frame: Frame, stiffness: csc_matrix, turn: F64) -> tuple[F64, F64] | None:
    """All ways in which the turning joints turn without strain; None when no free end turns.

    A motion that moves no joint strains nothing exactly when the rotations alone say so: the
    stiffness has no negative energy. The rotations that touch one another through members that
    carry torque or moment form blocks, and each block shows its own ways.
    """
    rotation = np.flatnonzero(np.tile([0, 0, 0, 1, 1, 1], len(turn)) * ~frame.held.ravel())
    block = stiffness[rotation][:, rotation]
    reference = float(block.diagonal().max())
    block.data[np.abs(block.data) < UNHELD * reference] = 0.0
    block.eliminate_zeros()
    part = connected_components(block, directed=False)[1]
    turning = np.zeros((len(turn), 6))
    turning[:, 3:] = np.where(np.abs(turn) > STILL * np.abs(turn).max(), turn, 0.0)
    ways = []
    for p in np.unique(part[turning.ravel()[rotation] != 0]):
        mine = rotation[part == p]
        alone = np.zeros(turning.size)
        alone[mine] = turning.ravel()[mine]
        if not _turns_at_a_free_end(frame, alone.reshape(-1, 6)):
            return None
        value, vector = np.linalg.eigh(block[part == p][:, part == p].toarray())
        still = value <= NOTHING * reference
        way = np.zeros((turning.size, int(still.sum())))
        way[mine] = vector[:, still]
        ways.append(way)
    vectors = np.concatenate(ways, axis=1)
    if not vectors.shape[1]:
        return None
    return vectors, np.full(vectors.shape[1], reference)


def _turns_at_a_free_end(frame: Frame, motion: F64) -> bool:
    xi, xj, up, _, ends = frame.geometry()
    modes = beam.natural_modes(beam.member_axes(xi, xj, up), beam.lengths(xi, xj))
    both = np.concatenate([motion[frame.members[:, end]] for end in (0, 1)], axis=1)
    deformation = np.abs(np.einsum("map,mp->ma", modes, both))[ends >= RELEASED]
    return bool(deformation.max(initial=0.0) > STILL * np.abs(motion).max())


def _refusal(frame: Frame, motion: F64, size: float) -> LooseFrame:
    lever = motion * np.array([1.0, 1.0, 1.0, size, size, size])
    move = np.abs(motion[:, :3])
    turns_only = move.max() <= STILL * np.abs(lever).max()
    amount = np.abs(lever) if turns_only else move
    joint, direction = np.unravel_index(
        int(np.flatnonzero(amount >= (1 - 1e-6) * amount.max())[0]), amount.shape
    )
    name, word = frame.joints[joint], DIRECTIONS[direction]
    if _is_rigid(frame, motion, size):
        how = "turn" if np.abs(motion[:, 3:]).max() * size > STILL * move.max() else "slide"
        remedy = f"the supports let the whole frame {how}; hold {word} there or elsewhere as well"
    else:
        remedy = ", ".join(_local_remedies(frame, motion, int(joint), turns_only))
        remedy += f" or hold {word} there"
    return LooseFrame(name, word, remedy)


def _is_rigid(frame: Frame, motion: F64, size: float) -> bool:
    """Whether all joints move as one body does."""
    x, y, z = (frame.xyz - frame.xyz.mean(axis=0)).T
    basis = np.zeros((len(frame.joints), 6, 6))
    basis[:, :, :] = np.eye(6)
    basis[:, 1, 3], basis[:, 2, 3] = -z, y
    basis[:, 0, 4], basis[:, 2, 4] = z, -x
    basis[:, 0, 5], basis[:, 1, 5] = -y, x
    weight = np.array([1.0, 1.0, 1.0, size, size, size])
    a = (basis * weight[:, None]).reshape(-1, 6)
    b = (motion * weight).ravel()
    fit = a @ np.linalg.lstsq(a, b, rcond=None)[0]
    return bool(np.abs(fit - b).max() <= 1e3 * STRAINLESS * np.abs(b).max())


def _local_remedies(frame: Frame, motion: F64, joint: int, turns_only: bool) -> list[str]:
    """What inside the frame would hold a joint: ends to weld, a brace."""
    remedies = []
    pinned = [
        name
        for name, ends, release in zip(frame.member_names, frame.members, frame.ends, strict=True)
        if joint in ends and (release >= RELEASED).any()
    ]
    if pinned:
        remedies.append(f"weld the pinned ends of {_list(pinned)}")
    other = None if turns_only else _brace_to(frame, motion, joint)
    if other is not None:
        remedies.append(f"add a brace from {frame.joints[joint]} to {frame.joints[other]}")
    return remedies or ["weld a pinned member end nearby"]


def _brace_to(frame: Frame, motion: F64, joint: int) -> int | None:
    """The joint from which a brace would feel the motion most: largest strain."""
    apart = frame.xyz - frame.xyz[joint]
    length = np.linalg.norm(apart, axis=1)
    moved = motion[:, :3] - motion[joint, :3]
    with np.errstate(divide="ignore", invalid="ignore"):
        strain = np.abs(np.einsum("jk,jk->j", apart, moved)) / length**2
    for end in (0, 1):
        strain[frame.members[frame.members[:, 1 - end] == joint, end]] = 0.0
    strain[~(length > 0)] = 0.0
    best = int(strain.argmax())
    largest = np.abs(motion[:, :3]).max() / float(np.ptp(frame.xyz, axis=0).max())
    return best if strain[best] > 1e-3 * largest else None


def _pieces(frame: Frame, members: BoolArray) -> tuple[int, NDArray[np.int32]]:
    """Number of pieces, and the piece of each joint, with only some members in place."""
    i, j = frame.members[members].T
    size = len(frame.joints)
    graph = coo_matrix((np.ones(len(i)), (i, j)), shape=(size, size))
    count, piece = connected_components(graph, directed=False)
    return int(count), piece


def _names(frame: Frame, joints: NDArray[np.intp]) -> str:
    word = "joint " if len(joints) == 1 else "joints "
    return word + _list([frame.joints[int(j)] for j in joints])


def _list(words: list[str]) -> str:
    shown = words[:3]
    more = f" and {len(words) - 3} more" if len(words) > 3 else ""
    return ", ".join(shown) + more
