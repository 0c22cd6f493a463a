"""What differs from frame to frame: joint positions and section values, one row a frame."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from model.errors import InputError
from model.frame.skeleton import F64, Skeleton

_STRIP = 256
"""Frames whose lengths are computed together: few enough to stay in the processor's cache."""

PINNED = 1e30
"""End flexibility [rad/(N·m)] that stands for a free end; large, and still squares safely."""


@dataclass(frozen=True, eq=False)
class Batch:
    """Frames of one skeleton, side by side.

    skeleton : what the frames share.
    rows : (n,) int64, the caller's row number of each frame.
    xyz : (n, joints, 3) float64 [m], x rearward from the front axle, y right, z up.
    rigidity : (n, groups, 6) float64: EA [N], E·Iy, E·Iz, G·J [N·m²], 1/(G·Asy), 1/(G·Asz) [1/N].
    ends : (n, groups, 6) float64, flexibility of the member ends: axial, both ends together
        [m/N]; torsion, both together; bending with Iy at from, at to; bending with Iz at from,
        at to [rad/(N·m)]. 0 is rigid, ``PINNED`` is free.
    line_mass : (n, groups) float64 [kg/m].
    present : (n, members) bool, False where a member is left out (no stiffness, no mass).
    track : (n, 2) float64 [m], front and rear track, when the twist couple comes in through the
        wheel linkages; None when it acts at the spring mounts alone.
    """

    skeleton: Skeleton
    rows: NDArray[np.int64]
    xyz: F64
    rigidity: F64
    ends: F64
    line_mass: F64
    present: NDArray[np.bool_]
    track: F64 | None = None

    def __len__(self) -> int:
        return len(self.rows)

    def frame(self, i: int) -> Batch:
        """The batch that holds only frame ``i`` of this one."""
        one = slice(i, i + 1)
        return Batch(
            self.skeleton,
            self.rows[one],
            self.xyz[one],
            self.rigidity[one],
            self.ends[one],
            self.line_mass[one],
            self.present[one],
            None if self.track is None else self.track[one],
        )

    def lengths(self) -> F64:
        """(n, members) length of every member between joint centres [m]."""
        i, j = self.skeleton.members.T
        length = np.empty((len(self.xyz), len(i)))
        for start in range(0, len(self.xyz), _STRIP):
            strip = self.xyz[start : start + _STRIP]
            along = strip[:, j] - strip[:, i]
            x, y, z = along[..., 0], along[..., 1], along[..., 2]
            length[start : start + _STRIP] = np.sqrt(x * x + y * y + z * z)
        return length


@dataclass(frozen=True)
class Refusal:
    """A frame that cannot be built: the caller's row, the field, the value, the remedy."""

    row: int
    field: str
    given: str
    remedy: str

    def as_error(self) -> InputError:
        """The same, to be raised."""
        return InputError(self.field, self.given, self.remedy)

    def __str__(self) -> str:
        return f"{self.field} = {self.given}: {self.remedy}"
