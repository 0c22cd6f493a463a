"""Random frames from a seed: any shape, any rigidities, too many supports, always held."""

from __future__ import annotations

import numpy as np

from model.frame.batch import PINNED
from model.solver.structure import Frame

E, NU, DENSITY = 205e9, 0.3, 7850.0
G = E / (2 * (1 + NU))


def random_frame(
    seed: int, *, shear: bool = True, pins: bool = False, round_tubes: bool = False
) -> Frame:
    """A frame of 4 to 14 joints whose welded members connect all of them.

    pins : some of the further members have ends that are free to bend (torsion passes on).
    round_tubes : tubes instead of sections whose properties all differ.
    """
    rng = np.random.default_rng(seed)
    joints = int(rng.integers(4, 15))
    xyz = _points(rng, joints)
    members = [(int(rng.integers(k)), k) for k in range(1, joints)]
    tree = len(members)
    known = {frozenset(m) for m in members}
    for _ in range(int(rng.integers(0, 2 * joints))):
        i, j = (int(v) for v in rng.choice(joints, 2, replace=False))
        if frozenset((i, j)) not in known:
            known.add(frozenset((i, j)))
            members.append((i, j))
    count = len(members)
    ends = np.zeros((count, 6))
    if pins:
        ends[tree:, 2:4] = np.where(rng.random((count - tree, 2)) < 0.5, PINNED, 0.0)
        ends[tree:, 4:6] = ends[tree:, 2:4]
    held = np.zeros((joints, 6), dtype=bool)
    held[0] = True
    held[1:] = rng.random((joints - 1, 6)) < 0.1
    loads = rng.uniform(-1, 1, (2, joints, 6)) * np.array([1e3] * 3 + [1e2] * 3)
    rigidity, line_mass = _tubes(rng, count) if round_tubes else _sections(rng, count)
    if not shear:
        rigidity[:, 4:] = 0.0
    return Frame(
        joints=tuple(f"j{k}" for k in range(joints)),
        xyz=xyz,
        member_names=tuple(f"m{k}" for k in range(count)),
        members=np.array(members, dtype=np.int32),
        groups=("any",) * count,
        up=_up(rng, xyz, members),
        rigidity=rigidity,
        ends=ends,
        line_mass=line_mass,
        rotary=np.ones(count, dtype=bool),
        held=held,
        lumps=np.where(rng.random(joints) < 0.3, rng.uniform(1, 30, joints), 0.0),
        cases=("one", "two"),
        loads=loads,
    )


def _points(rng: np.random.Generator, count: int) -> np.ndarray:
    """(count, 3) points in a box the size of a vehicle, 0.15 m apart or more."""
    points = [rng.uniform(0, 1, 3) * (2.4, 0.8, 0.6)]
    while len(points) < count:
        point = rng.uniform(0, 1, 3) * (2.4, 0.8, 0.6)
        if min(np.linalg.norm(point - other) for other in points) > 0.15:
            points.append(point)
    return np.array(points)


def _up(rng: np.random.Generator, xyz: np.ndarray, members: list[tuple[int, int]]) -> np.ndarray:
    """(members, 3) random directions, none within 10 degrees of its member."""
    ups = []
    for i, j in members:
        along = (xyz[j] - xyz[i]) / np.linalg.norm(xyz[j] - xyz[i])
        up = rng.standard_normal(3)
        while np.linalg.norm(np.cross(up, along)) < 0.17 * np.linalg.norm(up):
            up = rng.standard_normal(3)
        ups.append(up)
    return np.array(ups)


def _sections(rng: np.random.Generator, count: int) -> tuple[np.ndarray, np.ndarray]:
    area = rng.uniform(1e-4, 1e-3, count)
    iy, iz, j = rng.uniform(0.3, 3, (3, count)) * area**2
    slide_y, slide_z = 1 / (G * area * rng.uniform(0.3, 0.9, (2, count)))
    rigidity = np.stack([E * area, E * iy, E * iz, G * j, slide_y, slide_z], axis=1)
    return rigidity, DENSITY * area


def _tubes(rng: np.random.Generator, count: int) -> tuple[np.ndarray, np.ndarray]:
    outside, wall = rng.uniform(0.015, 0.05, count), rng.uniform(0.001, 0.004, count)
    inside = outside - 2 * wall
    area, i = np.pi / 4 * (outside**2 - inside**2), np.pi / 64 * (outside**4 - inside**4)
    slide = 2 / (G * area)
    return np.stack([E * area, E * i, E * i, 2 * G * i, slide, slide], axis=1), DENSITY * area
