"""The plan: every block has its place, every update is there, and it costs little."""

from __future__ import annotations

import time

import numpy as np
import pytest

from model.solver.plan import Plan, make_plan, plan_for
from tests.model.solver.frames import frame_a, frame_b, frame_c


def random_members(rng: np.random.Generator, joints: int) -> np.ndarray:
    pairs = [(i, j) for i in range(joints) for j in range(joints) if i != j]
    chosen = rng.choice(len(pairs), size=min(3 * joints, len(pairs) // 3), replace=False)
    return np.array([pairs[k] for k in chosen], dtype=np.int32)


def factor_pattern(plan: Plan, members: np.ndarray) -> np.ndarray:
    """Where the Cholesky factor is not zero, from a dense elimination of the pattern."""
    pattern = np.eye(plan.joints, dtype=bool)
    i, j = plan.step[members].T
    pattern[i, j] = pattern[j, i] = True
    for k in range(plan.joints):
        below = np.flatnonzero(pattern[:, k] & (np.arange(plan.joints) > k))
        pattern[np.ix_(below, below)] = True
    return np.tril(pattern, -1)


@pytest.mark.parametrize("seed", range(20))
def test_blocks_are_exactly_the_nonzeros_of_the_factor(seed: int) -> None:
    rng = np.random.default_rng(seed)
    joints = int(rng.integers(3, 25))
    members = random_members(rng, joints)
    plan = make_plan(joints, members)
    column = np.repeat(np.arange(joints), np.diff(plan.column_start))
    got = np.zeros((joints, joints), dtype=bool)
    got[plan.row, column] = True
    assert (got == factor_pattern(plan, members)).all()
    assert sorted(plan.order) == list(range(joints))


@pytest.mark.parametrize("seed", range(20))
def test_updates_give_the_factor_of_a_scalar_matrix(seed: int) -> None:
    """Numbers instead of blocks: the plan must reproduce numpy's Cholesky factor."""
    rng = np.random.default_rng(100 + seed)
    joints = int(rng.integers(3, 25))
    members = random_members(rng, joints)
    plan = make_plan(joints, members)
    stiffness = np.eye(joints)
    for i, j in plan.step[members]:
        k = rng.uniform(0.5, 2)
        stiffness[i, i] += k
        stiffness[j, j] += k
        stiffness[i, j] -= k
        stiffness[j, i] -= k
    low = np.zeros(plan.blocks)
    diagonal = np.zeros(joints)
    for j in range(joints):
        left = plan.left_block[plan.left_start[j] : plan.left_start[j + 1]]
        diagonal[j] = np.sqrt(stiffness[j, j] - (low[left] ** 2).sum())
        for b in range(plan.column_start[j], plan.column_start[j + 1]):
            pairs = slice(plan.update_start[b], plan.update_start[b + 1])
            start = 0.0 if plan.filled[b] else stiffness[plan.row[b], j]
            done = (low[plan.update_a[pairs]] * low[plan.update_b[pairs]]).sum()
            low[b] = (start - done) / diagonal[j]
    want = np.linalg.cholesky(stiffness)
    column = np.repeat(np.arange(joints), np.diff(plan.column_start))
    np.testing.assert_allclose(diagonal, np.diag(want), rtol=1e-12)
    np.testing.assert_allclose(low, want[plan.row, column], rtol=1e-10, atol=1e-14)


def test_left_blocks_name_their_columns() -> None:
    plan = plan_for(frame_c()[0])
    column = np.repeat(np.arange(plan.joints), np.diff(plan.column_start))
    for i in range(plan.joints):
        part = slice(plan.left_start[i], plan.left_start[i + 1])
        assert (plan.row[plan.left_block[part]] == i).all()
        assert (column[plan.left_block[part]] == plan.left_column[part]).all()


def test_members_find_the_block_of_their_two_ends() -> None:
    skeleton, _ = frame_b()
    plan = plan_for(skeleton)
    column = np.repeat(np.arange(plan.joints), np.diff(plan.column_start))
    assert (plan.row[plan.member_block] == plan.member_late).all()
    assert (column[plan.member_block] == plan.member_early).all()
    late = np.where(plan.turned == 1, skeleton.members[:, 1], skeleton.members[:, 0])
    assert (plan.order[plan.member_late] == late).all()
    assert plan.filled.sum() == plan.blocks - len(skeleton.members)


def test_second_member_between_two_joints_gets_its_own_block() -> None:
    plan = make_plan(3, np.array([[0, 1], [1, 2], [1, 0]], dtype=np.int32))
    assert plan.member_block[2] == plan.blocks and plan.spare == 1
    assert plan.member_twin.tolist() == [-1, -1, plan.member_block[0]]


def test_skeletons_alike_share_one_plan() -> None:
    assert plan_for(frame_c()[0]) is plan_for(frame_c()[0])
    assert plan_for(frame_c()[0]) is not plan_for(frame_b()[0])


def test_check_frames_need_few_blocks() -> None:
    assert plan_for(frame_a()[0]).blocks == 17
    plan = plan_for(frame_c()[0])
    assert (plan.blocks, len(plan.update_a)) == (154, 276)


def test_plan_takes_milliseconds() -> None:
    skeleton, _ = frame_c()
    took = []
    for _ in range(5):
        start = time.perf_counter()
        make_plan(len(skeleton.joints), skeleton.members)
        took.append(time.perf_counter() - start)
    assert min(took) < 0.02


def test_member_from_a_joint_to_itself_is_refused() -> None:
    with pytest.raises(ValueError, match="joint 1 to itself"):
        make_plan(2, np.array([[1, 1]], dtype=np.int32))
