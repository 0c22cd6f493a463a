"""The questions asked of every frame: which forces act, and where the frame is kept in place.

Twist
    A unit couple about the x axis acts on the front mounts and the opposite couple on the rear
    ones, as the wheels and springs bring them in. The forces balance by themselves, so any
    statically determinate support gives the same answer and carries nothing. The twist angle is
    the work-conjugate of the couple: front axle against rear axle, read at the loaded joints,
    blind to any motion of the frame as a whole. Positive twist turns the front about +x (right
    side up, seen from the driver) against the rear.

Bending
    A unit force acts downwards half-way between the axles, half on each lower rail, shared
    between the two nearest rings by the lever rule, and the mounts react it. The deflection is
    that of the loaded point against the straight line between the axles.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from model.frame.batch import Batch
from model.frame.skeleton import F64, I32, Skeleton

Array = NDArray[Any]

TWIST, BENDING = 0, 1
"""Row of each case in the loads of ``twist_and_bending``."""

_Y, _Z = 1, 2


@dataclass(frozen=True, eq=False)
class Loads:
    """Balanced sets of joint forces, one set a case, for every frame of a batch.

    joint, direction : (loaded,) int32, where a force acts; directions 0..5 are x, y, z, rx, ry,
        rz. Each pair occurs once.
    value : (n, cases, loaded) float64 [N] or [N·m]; every set has no resultant.
    """

    joint: I32
    direction: I32
    value: F64


def gauge(skeleton: Skeleton) -> I32:
    """(6, 2) joint and direction of a statically determinate support on three mounts."""
    rear_left, rear_right = skeleton.rear
    front_left = skeleton.front[0]
    held = [
        (rear_left, 0), (rear_left, _Y), (rear_left, _Z),
        (rear_right, _Z), (front_left, _Y), (front_left, _Z),
    ]  # fmt: skip
    return np.array(held, dtype=np.int32)


def twist_and_bending(batch: Batch) -> Loads:
    """Unit twist couple [N·m] and unit mid-wheelbase force [N] for every frame.

    The compliance of case ``TWIST`` is in rad/(N·m), of ``BENDING`` in m/N.
    """
    skeleton = batch.skeleton
    dofs = _loaded(skeleton, linkage=batch.track is not None)
    place = {dof: k for k, dof in enumerate(dofs)}
    value = np.zeros((len(batch), 2, len(dofs)))
    value[:, TWIST] = _twist(skeleton, batch.xyz, batch.track, place)
    _add_bending(batch, place, value[:, BENDING])
    joint, direction = np.array(dofs, dtype=np.int32).T
    return Loads(np.ascontiguousarray(joint), np.ascontiguousarray(direction), value)


def twist_force(skeleton: Skeleton, xyz: Array, track: Array | None) -> Array:
    """(joints, 6) forces of the unit twist couple on one frame.

    xyz : (joints, 3) [m]; track : (2,) [m] or None. Either may be complex (for derivatives).
    """
    dofs = _loaded(skeleton, linkage=track is not None)
    place = {dof: k for k, dof in enumerate(dofs)}
    values = _twist(skeleton, xyz[None], None if track is None else track[None], place)[0]
    force = np.zeros((len(xyz), 6), dtype=values.dtype)
    joint, direction = np.array(dofs).T
    force[joint, direction] = values
    return force


def _loaded(skeleton: Skeleton, linkage: bool) -> list[tuple[int, int]]:
    vertical = [*skeleton.rings[:, :2].ravel(), *skeleton.front, *skeleton.rear]
    dofs = [(int(j), _Z) for j in vertical]
    if linkage:
        for mounts in (skeleton.front, skeleton.rear):
            dofs += [(int(j), _Y) for j in _ring_of(skeleton, int(mounts[0]))]
    return list(dict.fromkeys(dofs))


def _ring_of(skeleton: Skeleton, joint: int) -> I32:
    ring = np.flatnonzero((skeleton.rings == joint).any(axis=1))[0]
    corners: I32 = skeleton.rings[ring]
    return corners


def _twist(
    skeleton: Skeleton, xyz: Array, track: Array | None, place: dict[tuple[int, int], int]
) -> Array:
    """(n, loaded) forces of the unit couple; complex positions give complex forces."""
    kind = np.result_type(xyz, np.float64 if track is None else track)
    value = np.zeros((len(xyz), len(place)), dtype=kind)
    for axle, (mounts, sign) in enumerate(((skeleton.front, 1.0), (skeleton.rear, -1.0))):
        left, right = (int(j) for j in mounts)
        base = xyz[:, right, 1] - xyz[:, left, 1]
        arm = base if track is None else track[:, axle]
        force = sign / arm
        value[:, place[right, _Z]] += force
        value[:, place[left, _Z]] -= force
        if track is not None:
            low_left, low_right, high_right, high_left = (int(j) for j in _ring_of(skeleton, left))
            height = xyz[:, high_right, 2] - xyz[:, low_right, 2]
            sideways = force * (arm - base) / 2 / height
            for joint in (low_left, low_right):
                value[:, place[joint, _Y]] += sideways
            for joint in (high_left, high_right):
                value[:, place[joint, _Y]] -= sideways
    return value


def _add_bending(batch: Batch, place: dict[tuple[int, int], int], value: F64) -> None:
    skeleton, xyz = batch.skeleton, batch.xyz
    ring_x = xyz[:, skeleton.rings[:, 0], 0]
    front, rear = xyz[:, skeleton.front[0], 0], xyz[:, skeleton.rear[0], 0]
    middle = (front + rear) / 2
    ahead = np.clip((ring_x <= middle[:, None]).sum(axis=1) - 1, 0, ring_x.shape[1] - 2)
    frames = np.arange(len(batch))
    near, far = ring_x[frames, ahead], ring_x[frames, ahead + 1]
    towards = (middle - near) / (far - near)
    share = np.zeros_like(ring_x)
    share[frames, ahead] = 1 - towards
    share[frames, ahead + 1] = towards
    for ring, corners in enumerate(skeleton.rings):
        for joint in corners[:2]:
            value[:, place[int(joint), _Z]] -= share[:, ring] / 2
    for joint in (*skeleton.front, *skeleton.rear):
        value[:, place[int(joint), _Z]] += 0.25
