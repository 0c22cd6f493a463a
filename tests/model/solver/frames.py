"""The three check frames: an open ladder, an open box, and the same box fully braced.

Axes of these frames: x forward, y left, z up, x = 0 at the rear corners. Lengths in metres.
Tube sizes, joint numbers and stiffnesses were settled with two independent prototypes.
"""

from __future__ import annotations

import numpy as np

from model.frame.batch import Batch
from model.frame.skeleton import F64, I32, Skeleton
from model.solver.cases import Loads

E, POISSON, DENSITY = 205e9, 0.3, 7850.0
G = E / (2 * (1 + POISSON))

TWIST_A, TWIST_B, TWIST_C = 973.1095, 421.6251, 13787.385
"""Twist stiffness [N·m/deg] between the corner joints, to the digits given."""
BEND_B, BEND_C = 566.272, 12763.57
"""Bending stiffness [N/mm] of B and C, force on the two lower joints at mid-length."""


def round_tube(outside: float, wall: float) -> tuple[F64, float]:
    """Rigidities (6,) and mass a metre of a round tube; shear after Cowper 1966."""
    inside = outside - 2 * wall
    area = np.pi / 4 * (outside**2 - inside**2)
    second = np.pi / 64 * (outside**4 - inside**4)
    m2 = (1 + (inside / outside) ** 2) ** 2
    shape = 6 * (1 + POISSON) * m2
    shape /= (7 + 6 * POISSON) * m2 + (20 + 12 * POISSON) * (inside / outside) ** 2
    slide = 1 / (G * shape * area)
    bend = E * second
    return np.array([E * area, bend, bend, 2 * G * second, slide, slide]), DENSITY * area


def rectangular_tube(width: float, depth: float, wall: float) -> tuple[F64, float]:
    """The same for a rectangular tube with square corners; torsion after Bredt."""
    b, h = width - 2 * wall, depth - 2 * wall
    area = width * depth - b * h
    tall = (width * depth**3 - b * h**3) / 12
    flat = (depth * width**3 - h * b**3) / 12
    bm, hm = width - wall, depth - wall
    torsion = 4 * (bm * hm) ** 2 * wall / (2 * (bm + hm))
    per_y, per_z = 1 / (G * 2 * bm * wall), 1 / (G * 2 * hm * wall)
    return np.array([E * area, E * tall, E * flat, G * torsion, per_y, per_z]), DENSITY * area


def _build(
    xyz: F64,
    members: list[tuple[int, int, str]],
    tubes: dict[str, tuple[F64, float]],
    corners: tuple[int, int, int, int],
    rings: I32,
) -> tuple[Skeleton, Batch]:
    groups = tuple(tubes)
    ends = np.array([(i, j) for i, j, _ in members], dtype=np.int32)
    along = xyz[ends[:, 1]] - xyz[ends[:, 0]]
    upright = np.abs(along[:, 2]) > 0.99 * np.linalg.norm(along, axis=1)
    unknown = np.full(len(xyz), -1, dtype=np.int32)
    skeleton = Skeleton(
        joints=tuple(f"j{k}" for k in range(len(xyz))),
        members=ends,
        group=np.array([groups.index(g) for _, _, g in members], dtype=np.int32),
        groups=groups,
        up=np.where(upright[:, None], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]),
        member_names=tuple(f"{g} {k}" for k, (_, _, g) in enumerate(members)),
        front=np.array(corners[:2], dtype=np.int32),
        rear=np.array(corners[2:], dtype=np.int32),
        rings=rings,
        mirror_joint=unknown,
        mirror_member=np.full(len(members), -1, dtype=np.int32),
    )
    batch = Batch(
        skeleton=skeleton,
        rows=np.zeros(1, dtype=np.int64),
        xyz=xyz[None],
        rigidity=np.stack([rigidity for rigidity, _ in tubes.values()])[None],
        ends=np.zeros((1, len(groups), 6)),
        line_mass=np.array([[mass for _, mass in tubes.values()]]),
        present=np.ones((1, len(members)), dtype=bool),
    )
    return skeleton, batch


def frame_a(crosses: int = 5) -> tuple[Skeleton, Batch]:
    """Ladder: 3.0 long, 0.8 wide, two rails and ``crosses`` cross members at equal spacing."""
    x = np.linspace(0.0, 3.0, crosses)
    xyz = np.array([(xk, y, 0.0) for xk in x for y in (0.0, 0.8)])
    members = [
        (2 * k + side, 2 * k + 2 + side, "rail") for k in range(crosses - 1) for side in (0, 1)
    ]
    members += [(2 * k, 2 * k + 1, "cross") for k in range(crosses)]
    tubes = {
        "rail": rectangular_tube(0.050, 0.100, 0.003),
        "cross": rectangular_tube(0.050, 0.060, 0.003),
    }
    last = 2 * crosses - 2
    rings = np.arange(2 * crosses, dtype=np.int32).reshape(-1, 2)
    return _build(xyz, members, tubes, (last + 1, last, 1, 0), rings)


def frame_b(bays: int = 8) -> tuple[Skeleton, Batch]:
    """Open box: 0.3 m bays, 0.7 wide, 0.5 high, a diagonal in the two end rings only."""
    return _box(bays, braced=False)


def frame_c(bays: int = 8) -> tuple[Skeleton, Batch]:
    """B with one diagonal in every bay of all four faces; 4 (bays + 1) joints."""
    return _box(bays, braced=True)


def _box(bays: int, braced: bool) -> tuple[Skeleton, Batch]:
    corner = ((0.0, 0.0), (0.7, 0.0), (0.7, 0.5), (0.0, 0.5))
    xyz = np.array([(0.3 * k, y, z) for k in range(bays + 1) for y, z in corner])
    members = [(4 * k + c, 4 * k + 4 + c, "rail") for k in range(bays) for c in range(4)]
    members += [(4 * k + c, 4 * k + (c + 1) % 4, "ring") for k in range(bays + 1) for c in range(4)]
    members += [(0, 2, "end"), (4 * bays, 4 * bays + 2, "end")]
    tubes = {
        "rail": round_tube(0.032, 0.002),
        "ring": round_tube(0.0254, 0.0016),
        "end": round_tube(0.0254, 0.0016),
    }
    if braced:
        for k in range(1, bays + 1):
            for a, face in enumerate("brtl"):
                near, far = (a, (a + 1) % 4) if k % 2 else ((a + 1) % 4, a)
                members.append((4 * (k - 1) + near, 4 * k + far, face))
        tubes |= {face: round_tube(0.0254, 0.0012) for face in "brtl"}
    last = 4 * bays
    rings = np.arange(last + 4, dtype=np.int32).reshape(-1, 4)
    return _build(xyz, members, tubes, (last + 1, last, 1, 0), rings)


def corners(skeleton: Skeleton) -> tuple[int, int, int, int]:
    """Joints front left, front right, rear left, rear right."""
    fl, fr = (int(j) for j in skeleton.front)
    rl, rr = (int(j) for j in skeleton.rear)
    return fl, fr, rl, rr


def middle(skeleton: Skeleton) -> I32:
    """(2,) the lower joints at mid-length."""
    pair: I32 = skeleton.rings[len(skeleton.rings) // 2, :2]
    return pair


def twist_loads(batch: Batch) -> Loads:
    """Vertical forces on the four corners: unit couple in front, its opposite at the rear.

    The only self-balanced set of four vertical forces, null vector of [1; x; y], scaled by the
    mean of the two front forces times the front base.
    """
    four = np.array(corners(batch.skeleton), dtype=np.int32)
    value = np.stack([_balanced(xyz[four]) for xyz in batch.xyz])[:, None, :]
    return Loads(four, np.full(4, 2, dtype=np.int32), value)


def _balanced(xyz: F64) -> F64:
    null = np.linalg.svd(np.stack([np.ones(4), xyz[:, 0], xyz[:, 1]]))[2][3]
    base = xyz[0, 1] - xyz[1, 1]
    null = null * np.sign(null[0])
    scaled: F64 = null / (base * (abs(null[0]) + abs(null[1])) / 2)
    return scaled


def twist_and_bend_loads(batch: Batch) -> Loads:
    """Twist as above; bending: 1 N down on the two lower joints of the middle ring."""
    four = np.array(corners(batch.skeleton), dtype=np.int32)
    joint = np.concatenate([four, middle(batch.skeleton)]).astype(np.int32)
    value = np.zeros((len(batch), 2, 6))
    value[:, 0, :4] = twist_loads(batch).value[:, 0]
    x = batch.xyz[0, joint, 0]
    front = (x[4] - x[2]) / (x[0] - x[2]) / 2
    value[:, 1] = [front, front, 0.5 - front, 0.5 - front, -0.5, -0.5]
    return Loads(joint, np.full(6, 2, dtype=np.int32), value)


def held(skeleton: Skeleton) -> I32:
    """(6, 2) six-point support of three corners that carries nothing."""
    fl, _, rl, rr = corners(skeleton)
    return np.array([(rl, 0), (rl, 1), (rl, 2), (rr, 2), (fl, 1), (fl, 2)], dtype=np.int32)


def varied(batch: Batch, n: int, seed: int = 1, spread: float = 0.05) -> Batch:
    """``n`` frames like ``batch``, every coordinate and rigidity moved a little.

    The loaded joints stay where they are, so the forces still balance.
    """
    rng = np.random.default_rng(seed)
    skeleton = batch.skeleton
    xyz = batch.xyz + spread * 0.3 * rng.uniform(-1, 1, (n, *batch.xyz.shape[1:]))
    loaded = [*corners(skeleton), *middle(skeleton)]
    xyz[:, loaded] = batch.xyz[:, loaded]
    factor = 1 + spread * rng.uniform(-1, 1, (n, *batch.rigidity.shape[1:]))
    return Batch(
        skeleton=skeleton,
        rows=np.arange(n, dtype=np.int64),
        xyz=xyz,
        rigidity=batch.rigidity * factor,
        ends=np.repeat(batch.ends, n, axis=0),
        line_mass=np.repeat(batch.line_mass, n, axis=0),
        present=np.repeat(batch.present, n, axis=0),
    )
