"""The order of elimination and the list of block updates for a skeleton, made once.

The stiffness matrix of a frame is sparse: a joint is coupled only to the joints it shares a
member with. Written in 6 x 6 blocks (one row and column of blocks a joint) its Cholesky factor
L stays sparse when joints with few neighbours are eliminated first. Which blocks of L exist, and
which pairs of them each one needs, depends on the skeleton alone; it is worked out here and then
serves every frame of it.

Blocks below the diagonal are numbered column by column. For block b = (i, j), joint i eliminated
after joint j::

    L[i, j] = (K[i, j] - sum over k of L[i, k] L[j, k]') inv(L[j, j])'

where k runs over the columns before j in which both joints have a block.

Source: A. George & J. W. H. Liu, Computer Solution of Large Sparse Positive Definite Systems,
1981 (minimum degree, elimination graphs); the tables are our own arrangement.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from model.frame.skeleton import I32, Skeleton


@dataclass(frozen=True, eq=False)
class Plan:
    """Where everything goes when a frame of one skeleton is factored.

    A list that has a varying number of entries for each of ``m`` things is kept as one flat array
    and ``m + 1`` starts: entries ``start[q]`` to ``start[q + 1]`` belong to thing ``q``.

    joints, blocks, spare : number of joints; of blocks of L below the diagonal; see below.
    order : (joints,) int32, joint that is eliminated in each step.
    step : (joints,) int32, step in which each joint is eliminated (the inverse of ``order``).
    column_start : (joints + 1,) int32, the blocks of each column; ``row`` : (blocks,) int32,
        the step each block's row belongs to, rising within a column.
    left_start : (joints + 1,), ``left_block``, ``left_column`` : for each row the blocks to the
        left of its diagonal, and the columns they stand in.
    update_start : (blocks + 1,), ``update_a``, ``update_b`` : for each block (i, j) the pairs of
        blocks (i, k) and (j, k) whose product is subtracted from it.
    filled : (blocks,) int32, 1 where no member joins the two joints, so the block starts at zero.
    member_block : (members,) int32, block that receives the member's coupling of its two ends.
        A second member between the same two joints gets a block of its own, one of ``spare``
        after the others; ``member_twin`` : (members,) int32 is the block that must be added to,
        -1 for all other members.
    member_late, member_early : (members,) int32, step of the end that is eliminated later, and
        earlier; ``turned`` : (members,) int32, 1 where the later end is the member's to end.
    """

    joints: int
    blocks: int
    spare: int
    order: I32
    step: I32
    column_start: I32
    row: I32
    left_start: I32
    left_block: I32
    left_column: I32
    update_start: I32
    update_a: I32
    update_b: I32
    filled: I32
    member_block: I32
    member_twin: I32
    member_late: I32
    member_early: I32
    turned: I32

    @property
    def flops(self) -> int:
        """Floating-point operations of the factorisation alone (one multiply-add counts two).

        6 x 6 products 432, solved blocks 252 - 36, lower triangles of A A' 252, Cholesky 112.
        """
        return 432 * len(self.update_a) + (216 + 252) * self.blocks + 112 * self.joints


def plan_for(skeleton: Skeleton) -> Plan:
    """The plan of a skeleton; made once for skeletons with the same joints and members."""
    return _plan(len(skeleton.joints), skeleton.key)


@lru_cache(maxsize=256)
def _plan(joints: int, key: bytes) -> Plan:
    members = np.frombuffer(key[4:], dtype=np.int32).reshape(-1, 2)
    return make_plan(joints, members)


def make_plan(joints: int, members: I32) -> Plan:
    """Plan for ``joints`` joints coupled by ``members`` (m, 2); joints without members are fine."""
    neighbours = [0] * joints
    for i, j in members.tolist():
        if i == j:
            raise ValueError(f"a member joins joint {i} to itself")
        neighbours[i] |= 1 << j
        neighbours[j] |= 1 << i
    order, later = _eliminate(neighbours)
    step = np.empty(joints, dtype=np.int32)
    step[order] = np.arange(joints, dtype=np.int32)
    rows = [sorted(int(step[i]) for i in _bits(later[v])) for v in order]
    block = {(i, j): b for b, (i, j) in enumerate((i, j) for j in range(joints) for i in rows[j])}
    left: list[list[tuple[int, int]]] = [[] for _ in range(joints)]
    for (i, j), b in block.items():
        left[i].append((b, j))
    updates = [[(block[i, k], bjk) for bjk, k in left[j] if (i, k) in block] for i, j in block]

    ends = step[members]
    late, early = ends.max(axis=1), ends.min(axis=1)
    member_block, member_twin, spare = [], [], 0
    seen: set[int] = set()
    for pair in zip(late.tolist(), early.tolist(), strict=True):
        b = block[pair]
        second = b in seen
        member_block.append(len(block) + spare if second else b)
        member_twin.append(b if second else -1)
        spare += second
        seen.add(b)
    return Plan(
        joints=joints,
        blocks=len(block),
        spare=spare,
        order=_int32(order),
        step=step,
        column_start=_starts(rows),
        row=_int32([i for column in rows for i in column]),
        left_start=_starts(left),
        left_block=_int32([b for row in left for b, _ in row]),
        left_column=_int32([k for row in left for _, k in row]),
        update_start=_starts(updates),
        update_a=_int32([a for pairs in updates for a, _ in pairs]),
        update_b=_int32([b for pairs in updates for _, b in pairs]),
        filled=_int32([b not in seen for b in range(len(block))]),
        member_block=_int32(member_block),
        member_twin=_int32(member_twin),
        member_late=late,
        member_early=early,
        turned=_int32(ends[:, 1] > ends[:, 0]),
    )


def _eliminate(neighbours: list[int]) -> tuple[list[int], list[int]]:
    """Minimum-degree order, and for each joint the set of neighbours it has left when it goes.

    Sets of joints are the bits of whole numbers. Ties go to the lowest joint number. Trying many
    orders (least fill, random ties, hill climbing) finds nothing better for rows of rings.
    """
    around = list(neighbours)
    alive = set(range(len(around)))
    order: list[int] = []
    while alive:
        joint = min(alive, key=lambda v: (around[v].bit_count(), v))
        alive.remove(joint)
        order.append(joint)
        gone = ~(1 << joint)
        for other in _bits(around[joint]):
            around[other] = (around[other] | around[joint]) & gone & ~(1 << other)
    return order, around


def _bits(number: int) -> Iterator[int]:
    while number:
        lowest = number & -number
        yield lowest.bit_length() - 1
        number ^= lowest


def _starts(lists: list[list[int]] | list[list[tuple[int, int]]]) -> I32:
    return np.cumsum([0] + [len(entries) for entries in lists], dtype=np.int32)


def _int32(values: object) -> I32:
    return np.asarray(values, dtype=np.int32).reshape(-1)
