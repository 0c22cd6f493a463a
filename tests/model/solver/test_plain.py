"""The plain solver: check frames, a dense reference, and failures that have a name."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from model.frame.batch import PINNED, Batch
from model.frame.skeleton import Skeleton
from model.solver.cases import Loads
from model.solver.solve import solve
from tests.model.solver import frames
from tests.model.solver.dense import solve_dense

TO_DEGREES = np.pi / 180

SHARES_B = [0.0044, 0.6125, 0.3711, 0.0120, 0.0]
SHARES_C = [0.9661, 0.0235, 0.0099, 0.0005, 0.0]
GROUPS_C = [0.0440, 0.0482, 0.0808, 0.2858, 0.1283, 0.2855, 0.1274]


def solved(batch: Batch, **options: object):
    return solve(
        batch,
        frames.twist_loads(batch),
        frames.held(batch.skeleton),
        energy_case=0,
        plain=True,
        **options,  # type: ignore[arg-type]
    )


@pytest.mark.parametrize(
    ("frame", "twist", "half_last_digit"),
    [
        (frames.frame_a, frames.TWIST_A, 5e-5),
        (frames.frame_b, frames.TWIST_B, 5e-5),
        (frames.frame_c, frames.TWIST_C, 5e-4),
    ],
)
def test_twist_stiffness_of_the_check_frames(frame, twist, half_last_digit) -> None:
    _, batch = frame()
    assert TO_DEGREES / solved(batch).compliance[0, 0] == pytest.approx(twist, abs=half_last_digit)


@pytest.mark.parametrize(
    ("frame", "bend", "half_last_digit"),
    [(frames.frame_b, frames.BEND_B, 5e-4), (frames.frame_c, frames.BEND_C, 5e-3)],
)
def test_bending_stiffness_of_the_check_frames(frame, bend, half_last_digit) -> None:
    skeleton, batch = frame()
    loads = frames.twist_and_bend_loads(batch)
    got = solve(batch, loads, frames.held(skeleton), plain=True)
    assert 1e-3 / got.compliance[0, 1] == pytest.approx(bend, abs=half_last_digit)


@pytest.mark.parametrize(
    ("frame", "shares"), [(frames.frame_b, SHARES_B), (frames.frame_c, SHARES_C)]
)
def test_energy_shares_of_the_check_frames(frame, shares) -> None:
    _, batch = frame()
    energy = solved(batch).energy[0]
    np.testing.assert_allclose(energy.sum(axis=0) / energy.sum(), shares, atol=5e-5)


def test_energy_shares_of_the_groups_of_c() -> None:
    energy = solved(frames.frame_c()[1]).energy[0]
    np.testing.assert_allclose(energy.sum(axis=1) / energy.sum(), GROUPS_C, atol=5e-5)


@pytest.mark.parametrize("frame", [frames.frame_a, frames.frame_b, frames.frame_c])
def test_energy_is_half_the_work_of_the_forces(frame) -> None:
    answer = solved(frames.varied(frame()[1], 5))
    work = answer.compliance[:, 0] / 2
    np.testing.assert_allclose(answer.energy.sum(axis=(1, 2)), work, rtol=1e-10)


def test_agrees_with_scipys_dense_cholesky() -> None:
    """Both carry the error of a matrix with condition number near 1e7."""
    skeleton, batch = frames.frame_c()
    batch = frames.varied(batch, 4)
    rng = np.random.default_rng(3)
    batch = replace(batch, ends=10 ** rng.uniform(-8, -4, batch.ends.shape))
    batch.present[1, 20:24] = False
    loads = frames.twist_and_bend_loads(batch)
    got = solve(batch, loads, frames.held(skeleton), displacements=True, plain=True)
    assert (got.status == 0).all() and got.displacement is not None
    for frame in range(4):
        compliance, u = solve_dense(batch, loads, frames.held(skeleton), frame)
        np.testing.assert_allclose(got.compliance[frame], compliance, rtol=1e-10)
        np.testing.assert_allclose(got.displacement[frame], u, rtol=0, atol=1e-9 * np.abs(u).max())


def test_held_directions_do_not_move() -> None:
    skeleton, batch = frames.frame_b()
    u = solved(batch, displacements=True).displacement[0, 0]
    joint, direction = frames.held(skeleton).T
    assert np.abs(u[joint, direction]).max() < 1e-10 * np.abs(u).max()


def test_other_support_same_answer() -> None:
    skeleton, batch = frames.frame_c()
    fl, fr, _, rr = frames.corners(skeleton)
    other = np.array([(fl, 0), (fl, 1), (fl, 2), (fr, 2), (rr, 1), (rr, 2)], dtype=np.int32)
    a = solved(batch).compliance
    b = solve(batch, frames.twist_loads(batch), other, plain=True).compliance
    np.testing.assert_allclose(a, b, rtol=1e-10)


def test_pinned_side_is_loose_and_says_where() -> None:
    """All ends of the open box pinned: the faces lozenge. A welded neighbour is not touched."""
    _, batch = frames.frame_b()
    batch = frames.varied(batch, 3)
    batch.ends[1, :, 2:] = PINNED
    answer = solved(batch)
    assert answer.status[0] == answer.status[2] == 0
    assert 1 <= answer.status[1] <= 6 * 36
    assert np.isnan(answer.compliance[1]).all() and np.isnan(answer.energy[1]).all()
    alone = solved(batch.frame(2))
    np.testing.assert_allclose(answer.compliance[2], alone.compliance[0], rtol=1e-12)


def test_not_a_number_marks_only_its_frame() -> None:
    _, batch = frames.frame_c()
    batch = frames.varied(batch, 3)
    batch.xyz[1, 17, 2] = np.nan
    answer = solved(batch)
    assert answer.status.tolist()[::2] == [0, 0]
    assert answer.status[1] != 0 and np.isnan(answer.compliance[1]).all()


def test_force_that_is_not_a_number_names_its_joint() -> None:
    skeleton, batch = frames.frame_c()
    loads = frames.twist_loads(batch)
    loads.value[0, 0, 1] = np.nan
    answer = solve(batch, loads, frames.held(skeleton), plain=True)
    assert answer.status[0] == 1 + 6 * skeleton.front[1] + 2


def test_member_without_length_is_loose() -> None:
    _, batch = frames.frame_c()
    batch.xyz[0, 5] = batch.xyz[0, 6]
    assert solved(batch).status[0] != 0


def with_spare_joint(batch: Batch) -> Batch:
    """One more joint, joined by one more member that is absent in frame 0."""
    old = batch.skeleton
    n = len(old.joints)
    skeleton = Skeleton(
        joints=(*old.joints, "spare"),
        members=np.vstack([old.members, [[3, n]]]).astype(np.int32),
        group=np.append(old.group, 0).astype(np.int32),
        groups=old.groups,
        up=np.vstack([old.up, [[0.3, 0.4, 0.5]]]),
        member_names=(*old.member_names, "spare"),
        front=old.front,
        rear=old.rear,
        rings=old.rings,
        mirror_joint=np.append(old.mirror_joint, -1).astype(np.int32),
        mirror_member=np.append(old.mirror_member, -1).astype(np.int32),
    )
    xyz = np.concatenate([batch.xyz, batch.xyz[:, 3:4]], axis=1)
    xyz[:, n] += [0.0, 0.0, 0.2]
    present = np.concatenate([batch.present, np.zeros((len(batch), 1), dtype=bool)], axis=1)
    return replace(batch, skeleton=skeleton, xyz=xyz, present=present)


def test_joint_without_members_is_left_out() -> None:
    _, batch = frames.frame_b()
    more = with_spare_joint(batch)
    more.xyz[0, -1] = more.xyz[0, 3]  # not even the absent member's length matters
    got = solved(more, displacements=True)
    assert got.status[0] == 0
    assert got.compliance[0, 0] == pytest.approx(solved(batch).compliance[0, 0], rel=1e-11)
    assert (got.displacement[0, :, -1] == 0).all()


def test_force_on_a_joint_without_members_is_loose() -> None:
    skeleton, batch = frames.frame_b()
    more = with_spare_joint(batch)
    loads = frames.twist_loads(more)
    spare = len(skeleton.joints)
    loads = Loads(
        np.append(loads.joint, spare).astype(np.int32),
        np.append(loads.direction, 1).astype(np.int32),
        np.concatenate([loads.value, np.ones((1, 1, 1))], axis=2),
    )
    answer = solve(more, loads, frames.held(skeleton), plain=True)
    assert answer.status[0] == 1 + 6 * spare + 1


def test_two_members_between_two_joints_add_up() -> None:
    """A second rail beside the first is as good as one with twice the rigidity."""
    skeleton, batch = frames.frame_a()
    double = replace(
        skeleton,
        members=np.vstack([skeleton.members, skeleton.members[:, ::-1]]).astype(np.int32),
        group=np.tile(skeleton.group, 2).astype(np.int32),
        up=np.tile(skeleton.up, (2, 1)),
    )
    twice = replace(batch, skeleton=double, present=np.ones((1, 26), dtype=bool))
    got = solve(twice, frames.twist_loads(twice), frames.held(double), plain=True)
    want = solved(batch).compliance[0, 0] / 2
    assert got.compliance[0, 0] == pytest.approx(want, rel=1e-10)


def test_rows_shared_by_all_frames_need_not_be_repeated() -> None:
    _, batch = frames.frame_c()
    many = frames.varied(batch, 6)
    shared = replace(many, rigidity=batch.rigidity, ends=batch.ends, line_mass=batch.line_mass)
    full = replace(
        many,
        rigidity=np.repeat(batch.rigidity, 6, axis=0),
        ends=np.repeat(batch.ends, 6, axis=0),
    )
    assert (solved(shared).compliance == solved(full).compliance).all()
