"""What stays the same for many frames: which joints exist and which members join them."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

F64 = NDArray[np.float64]
I32 = NDArray[np.int32]


@dataclass(frozen=True, eq=False)
class Skeleton:
    """Joints, members and groups of a frame, without any dimension.

    joints : names of the joints.
    members : (members, 2) int32, joint numbers at the two ends.
    group : (members,) int32, number of the group in ``groups``.
    groups : names of the groups (members that share one tube size).
    up : (members, 3) float64, a vector in the member's local x-z plane.
    member_names : one name a member, unique.
    front, rear : (2,) int32, joints (left, right) that take the load at the axles.
    rings : (rings, corners) int32, joints of each ring from front to rear: left and right rail
        for two rails; low left, low right, high right, high left for four.
    mirror_joint, mirror_member : int32, the partner on the other side of the vehicle (itself
        when it lies on the middle plane; -1 when there is none).
    """

    joints: tuple[str, ...]
    members: I32
    group: I32
    groups: tuple[str, ...]
    up: F64
    member_names: tuple[str, ...]
    front: I32
    rear: I32
    rings: I32
    mirror_joint: I32
    mirror_member: I32
    ring_names: tuple[str, ...] = field(default=())

    @property
    def key(self) -> bytes:
        """Bytes that are equal for skeletons with the same elimination problem."""
        return len(self.joints).to_bytes(4, "little") + np.ascontiguousarray(self.members).tobytes()
