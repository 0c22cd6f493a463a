"""The compiled solver against its plain twin, and its promise about bits."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from model.frame.batch import PINNED, Batch
from model.frame.skeleton import Skeleton
from model.solver import kernel, plain
from model.solver.cases import Loads
from model.solver.compiled import LANES, Compiled
from model.solver.problem import Solution, empty_solution, problem
from model.solver.solve import compile_now, in_blocks, solve
from model.solver.workspace import make_work, tables_of, workspace_of
from tests.model.solver import frames
from tests.model.solver.dense import solve_dense

ROUNDING = 1e-14
"""Same formulas in the same order; only fused operations and reciprocals round differently."""
ANSWERS, RANDOM = 1e-11, 1e-9
"""Answers differ by rounding times condition number, which is some 1e6 for random heaps of
members; braced C keeps 1e-12. Relative to the largest entry of each array of a frame."""


@pytest.fixture(scope="module", autouse=True)
def _compiled() -> None:
    compile_now()


def random_frame(seed: int) -> Batch:
    """A random heap of joints and members, with every kind of section and end."""
    rng = np.random.default_rng(seed)
    joints, n, groups = int(rng.integers(4, 14)), int(rng.integers(1, 20)), 3
    pairs = [(i, j) for i in range(joints) for j in range(joints) if i < j]
    chain = {(k, k + 1) for k in range(joints - 1)}
    extra = {pairs[k] for k in rng.choice(len(pairs), size=min(len(pairs), 2 * joints))}
    members = [p if rng.uniform() < 0.5 else p[::-1] for p in sorted(chain | extra)]
    m = len(members)
    none = np.full(joints, -1, dtype=np.int32)
    skeleton = Skeleton(
        joints=tuple(f"j{k}" for k in range(joints)),
        members=np.array(members, dtype=np.int32),
        group=rng.integers(0, groups, m).astype(np.int32),
        groups=("a", "b", "c"),
        up=rng.normal(size=(m, 3)),
        member_names=tuple(f"m{k}" for k in range(m)),
        front=np.array([0, 1], dtype=np.int32),
        rear=np.array([2, 3], dtype=np.int32),
        rings=np.arange(4, dtype=np.int32)[None],
        mirror_joint=none,
        mirror_member=np.full(m, -1, dtype=np.int32),
    )
    nominal = [2e7, 3e3, 5e3, 4e3, 1.5e-7, 2e-7]
    ends = 10 ** rng.uniform(-7, -5, (n, groups, 6))
    ends[:, :, 0] *= 1e-3
    ends[rng.uniform(size=ends.shape) < 0.3] = 0.0
    ends[:, 2, 3] = PINNED
    present = rng.uniform(size=(n, m)) < 0.9
    present[:, [members.index(p) if p in members else members.index(p[::-1]) for p in chain]] = True
    return Batch(
        skeleton=skeleton,
        rows=np.arange(n, dtype=np.int64),
        xyz=np.cumsum(rng.uniform(0.2, 0.6, (joints, 3)), axis=0) * [1, -1, 1]
        + rng.uniform(-0.3, 0.3, (n, joints, 3)),
        rigidity=np.array(nominal) * rng.uniform(0.5, 2, (n, groups, 6)),
        ends=ends,
        line_mass=np.ones((n, groups)),
        present=present,
    )


def balanced_loads(batch: Batch, cases: int, seed: int = 0) -> Loads:
    """Random forces on all joints with their resultant taken out."""
    rng = np.random.default_rng(seed)
    n, joints = batch.xyz.shape[:2]
    value = rng.normal(size=(n, cases, joints, 6))
    for frame in range(n):
        rigid = np.zeros((joints, 6, 6))
        rigid[:, :3, :3] = rigid[:, 3:, 3:] = np.eye(3)
        x, y, z = batch.xyz[frame].T
        o = np.zeros(joints)
        cross = np.array([[o, z, -y], [-z, o, x], [y, -x, o]])
        rigid[:, :3, 3:] = np.moveaxis(cross, -1, 0)
        basis = np.linalg.qr(rigid.reshape(-1, 6))[0]
        flat = value[frame].reshape(cases, -1)
        value[frame] = (flat - flat @ basis @ basis.T).reshape(cases, joints, 6)
    joint, direction = np.divmod(np.arange(6 * joints), 6)
    return Loads(
        joint.astype(np.int32), direction.astype(np.int32), value.reshape(n, cases, -1).copy()
    )


def clamp(joint: int) -> np.ndarray:
    return np.array([(joint, d) for d in range(6)], dtype=np.int32)


def same(a: Solution, b: Solution, tolerance: float) -> None:
    assert (a.status == b.status).all()
    for name in ("compliance", "energy", "displacement"):
        x, y = getattr(a, name), getattr(b, name)
        if x is None:
            continue
        scale = np.nanmax(np.abs(y), axis=tuple(range(2, y.ndim)), keepdims=True)
        assert (np.isnan(x) == np.isnan(y)).all()
        assert np.nanmax(np.abs(x - y) / scale, initial=0.0) < tolerance, name


@pytest.mark.parametrize("seed", range(6))
def test_assembles_the_same_blocks_as_the_plain_twin(seed: int) -> None:
    batch = random_frame(seed)
    asked = problem(batch, balanced_loads(batch, 1), clamp(0), None)
    here = slice(0, min(LANES, len(batch)))
    diagonal, below = plain.assemble(asked, plain.take_members(asked, here))
    plain.support(asked, diagonal)
    layout = workspace_of(asked)
    tables, work = tables_of(asked, layout), make_work(layout, LANES)
    lanes = (0,) * LANES
    values = (asked.xyz, asked.rigidity, asked.ends, asked.present)
    kernel.take_in(lanes, work, layout, tables, *values, 0, here.stop)
    kernel.prepare(lanes, work, layout, tables)
    work[layout.diagonal * LANES : layout.motion * LANES] = 0.0
    for j in range(asked.plan.joints):
        kernel.add_members(lanes, work, layout, tables, j)
    vectors = work.reshape(-1, LANES)[:, here]
    blocks = vectors[layout.below : layout.diagonal].reshape(-1, 6, 6, here.stop)
    exists = np.flatnonzero(asked.plan.filled == 0)
    scale = np.abs(below).max(axis=(1, 2, 3), keepdims=True)
    assert (np.abs(blocks - below) <= ROUNDING * scale)[exists].all()
    rows, columns = np.tril_indices(6)
    triangles = vectors[layout.diagonal : layout.motion].reshape(-1, 21, here.stop)
    scale = np.abs(diagonal).max(axis=(1, 2, 3))[:, None, None]
    assert (np.abs(triangles - diagonal[:, rows, columns]) <= ROUNDING * scale).all()


@pytest.mark.parametrize(
    ("frame", "tolerance"),
    [(frames.frame_a, ANSWERS), (frames.frame_b, ANSWERS), (frames.frame_c, 1e-12)],
)
def test_agrees_with_the_plain_twin_on_the_check_frames(frame, tolerance) -> None:
    skeleton, batch = frame()
    batch = frames.varied(batch, 2 * LANES + 3)
    loads, held = frames.twist_loads(batch), frames.held(skeleton)
    options: dict[str, Any] = {"energy_case": 0, "displacements": True}
    same(
        solve(batch, loads, held, **options),
        solve(batch, loads, held, plain=True, **options),
        tolerance,
    )


@pytest.mark.parametrize("seed", range(12))
def test_agrees_with_the_plain_twin_on_random_frames(seed: int) -> None:
    batch = random_frame(seed)
    cases = 1 + seed % 4
    loads = balanced_loads(batch, cases)
    options: dict[str, Any] = {"energy_case": cases - 1, "displacements": True}
    got = solve(batch, loads, clamp(1), **options)
    assert (got.status == 0).any()
    same(got, solve(batch, loads, clamp(1), plain=True, **options), RANDOM)


@pytest.mark.parametrize("seed", range(6))
def test_agrees_with_scipys_dense_cholesky_on_random_frames(seed: int) -> None:
    batch = random_frame(100 + seed)
    loads = balanced_loads(batch, 2)
    got = solve(batch, loads, clamp(0), displacements=True)
    assert got.displacement is not None
    for frame in range(len(batch)):
        if got.status[frame] == 0:
            compliance, u = solve_dense(batch, loads, clamp(0), frame)
            np.testing.assert_allclose(got.compliance[frame], compliance, rtol=RANDOM)
            scale = np.abs(u).max()
            np.testing.assert_allclose(got.displacement[frame], u, rtol=0, atol=RANDOM * scale)


@pytest.mark.parametrize(
    ("frame", "twist", "half_last_digit"),
    [
        (frames.frame_a, frames.TWIST_A, 5e-5),
        (frames.frame_b, frames.TWIST_B, 5e-5),
        (frames.frame_c, frames.TWIST_C, 5e-4),
    ],
)
def test_twist_stiffness_of_the_check_frames(frame, twist, half_last_digit) -> None:
    skeleton, batch = frame()
    got = solve(batch, frames.twist_loads(batch), frames.held(skeleton)).compliance[0, 0]
    assert np.pi / 180 / got == pytest.approx(twist, abs=half_last_digit)


def troubled(n: int) -> Batch:
    """Variants of C: mechanisms, values that are not numbers, and absent members among them."""
    batch = frames.varied(frames.frame_c()[1], n, seed=5)
    batch.ends[1::7, :, 2:] = PINNED
    batch.present[1::7, 70:] = False
    batch.xyz[3::11, 9, 1] = np.nan
    batch.rigidity[5::13, 2, 3] = np.nan
    batch.xyz[6::17, 8] = batch.xyz[6::17, 9]
    batch.present[2::5, 75] = False
    return batch


def answers(batch: Batch, **options: object) -> list[np.ndarray]:
    loads, held = frames.twist_and_bend_loads(batch), frames.held(batch.skeleton)
    got = solve(batch, loads, held, energy_case=0, displacements=True, **options)  # type: ignore[arg-type]
    assert got.energy is not None and got.displacement is not None
    return [got.compliance, got.status, got.energy, got.displacement]


def equal_bits(a: list[np.ndarray], b: list[np.ndarray]) -> bool:
    return all(
        np.array_equal(x, y, equal_nan=x.dtype.kind == "f") for x, y in zip(a, b, strict=True)
    )


def test_bad_frames_are_marked_and_the_others_solved() -> None:
    n = 8 * LANES + 5
    batch = troubled(n)
    compliance, status, energy, displacement = answers(batch)
    bad = np.zeros(n, dtype=bool)
    for start, step in ((1, 7), (3, 11), (5, 13), (6, 17)):
        bad[start::step] = True
    assert ((status != 0) == bad).all()
    for array in (compliance, energy, displacement):
        assert (np.isnan(array).reshape(n, -1).all(axis=1) == bad).all()
        assert np.isfinite(array[~bad]).all()


@pytest.mark.parametrize(("threads", "block"), [(1, 1), (2, 8), (3, 13), (7, 64)])
def test_bits_do_not_depend_on_threads_or_blocks(threads: int, block: int) -> None:
    batch = troubled(150)
    assert equal_bits(answers(batch, threads=1), answers(batch, threads=threads, block=block))


def test_bits_do_not_depend_on_lane_or_neighbours() -> None:
    """The same frame alone, and in every lane between a mechanism and a frame with NaN."""
    batch = troubled(40)
    together = answers(batch)
    for frame in range(LANES + 1):
        alone = answers(batch.frame(frame))
        assert equal_bits(alone, [array[frame : frame + 1] for array in together])


def test_bits_do_not_depend_on_the_number_of_lanes() -> None:
    batch = troubled(40)
    asked = problem(batch, frames.twist_and_bend_loads(batch), frames.held(batch.skeleton), 0)
    answered: list[list[np.ndarray]] = []
    for lanes in (4, 8):
        solution = empty_solution(asked, True, False)
        Compiled(asked, solution, lanes).worker()(0, len(batch))
        assert solution.energy is not None
        answered.append([solution.compliance, solution.status, solution.energy])
    assert equal_bits(answered[0], answered[1])


def test_loose_frames_agree_with_the_twin_about_where() -> None:
    batch = troubled(60)
    loads, held = frames.twist_and_bend_loads(batch), frames.held(batch.skeleton)
    a, b = (solve(batch, loads, held, plain=twin).status for twin in (False, True))
    number = np.isfinite(batch.rigidity).all(axis=(1, 2))  # else the joint agrees, not more
    assert (a[number] == b[number]).all()
    assert ((a - 1) // 6 == (b - 1) // 6).all()


def test_absent_joint_and_force_on_it() -> None:
    """The four members of a joint absent: it is left out; pushed all the same, it is loose."""
    skeleton, batch = frames.frame_c()
    batch = frames.varied(batch, 3)
    joint = 18  # a high joint in mid-length, not loaded
    batch.present[1, (skeleton.members == joint).any(axis=1)] = False
    loads, held = frames.twist_and_bend_loads(batch), frames.held(skeleton)
    got = solve(batch, loads, held, displacements=True)
    assert (got.status == 0).all() and got.displacement is not None
    assert (got.displacement[1, :, joint] == 0).all()
    pushed = Loads(
        np.append(loads.joint, joint).astype(np.int32),
        np.append(loads.direction, 0).astype(np.int32),
        np.concatenate([loads.value, np.ones((3, 2, 1))], axis=2),
    )
    for twin in (False, True):
        status = solve(batch, pushed, held, plain=twin).status
        assert status.tolist() == [0, 1 + 6 * joint, 0]


def test_values_of_absent_members_do_not_matter() -> None:
    skeleton, batch = frames.frame_c()
    group = skeleton.groups.index("end")
    ring = skeleton.groups.index("t")
    batch = frames.varied(batch, 2)
    batch.present[:, skeleton.group == ring] = False
    other = replace(batch, rigidity=batch.rigidity.copy())
    other.rigidity[:, ring] = 0.0
    assert group != ring
    assert equal_bits(answers(batch), answers(other))


def test_strided_read_only_and_shared_arrays_are_taken_as_they_are() -> None:
    _, batch = frames.frame_c()
    many = frames.varied(batch, 11)
    wide = np.asfortranarray(np.repeat(many.xyz, 2, axis=0))
    wide.flags.writeable = False
    shared = replace(many, xyz=wide[::2], rigidity=batch.rigidity, present=batch.present)
    plainly = replace(many, rigidity=np.repeat(batch.rigidity, 11, axis=0))
    assert equal_bits(answers(shared), answers(plainly))


def test_no_frames_no_answers() -> None:
    skeleton, batch = frames.frame_c()
    one = frames.twist_loads(batch)
    loads = Loads(one.joint, one.direction, one.value[:0])
    got = solve(frames.varied(batch, 0), loads, frames.held(skeleton), energy_case=0)
    assert got.compliance.shape == (0, 1) and got.status.shape == (0,)


def test_two_members_between_two_joints_add_up() -> None:
    skeleton, batch = frames.frame_a()
    double = replace(
        skeleton,
        members=np.vstack([skeleton.members, skeleton.members[:, ::-1]]).astype(np.int32),
        group=np.tile(skeleton.group, 2).astype(np.int32),
        up=np.tile(skeleton.up, (2, 1)),
    )
    twice = replace(batch, skeleton=double, present=np.ones((1, 26), dtype=bool))
    np.testing.assert_allclose(answers(twice)[0], answers(batch)[0] / 2, rtol=ANSWERS)


def test_an_error_in_a_thread_reaches_the_caller() -> None:
    def make_worker():
        def work(first: int, last: int) -> None:
            if first == 30:
                raise ZeroDivisionError("frame 30")

        return work

    with pytest.raises(ZeroDivisionError, match="frame 30"):
        in_blocks(make_worker, 100, threads=2, block=10)


def test_solver_compiles_into_the_users_cache_when_the_package_cannot_be_written(
    tmp_path: Path,
) -> None:
    """A package folder without write permission, seen through numba's own choice of folder."""
    program = (
        "import numba.core.caching as c\n"
        "c.InTreeCacheLocator.from_function = classmethod(lambda *a: None)\n"
        "c.InTreeCacheLocatorFsAgnostic.from_function = classmethod(lambda *a: None)\n"
        "from model.solver.kernel import solve_frames\n"
        "print(solve_frames.stats.cache_path)\n"
    )
    root = Path(__file__).resolve().parents[3]
    done = subprocess.run(
        [sys.executable, "-c", program],
        cwd=root,
        env={"HOME": str(tmp_path), "XDG_CACHE_HOME": str(tmp_path), "PATH": "/usr/bin:/bin"},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    assert done.stdout.startswith(str(tmp_path))
