"""Twist stiffness of a frame with open rails: from ends that warp freely to ends held from warping.

A channel resists twist mostly by warping, and how far its joints hold the warping is seldom known,
so a single number is not honest. The torsion constant of a member whose ends are held from warping
depends on its length (Vlasov; Timoshenko & Gere); it is exact for full restraint and stands in for
the partly restrained one with a given bimoment spring.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from model.frame.batch import Batch
from model.frame.layout import Layout, Tube
from model.frame.variants import one
from model.results.twist import answers
from model.stock.warping import channel_warping, held_warping_torsion

_SAME = 1e-6
"""Lengths that agree to this [m] share a torsion constant."""


@dataclass(frozen=True)
class TwistRange:
    """Twist stiffness [N·m/deg] with member ends free to warp, and held from it."""

    free: float
    held: float


def twist_range(layout: Layout, spring: float = np.inf) -> TwistRange | None:
    """The range for a layout's channels; None when it has none.

    spring : bimoment that each channel end takes for each unit of warping [N·m³] at the upper end
        of the range; infinite holds the ends fully.

    Raises
    ------
    InputError
        The layout cannot be built.
    """
    batch = one(layout)
    open_groups = {g for g in batch.skeleton.groups if layout.tubes[g].shape == "channel"}
    if not open_groups:
        return None
    held = with_held_warping(batch, {g: layout.tubes[g] for g in open_groups}, spring)
    return TwistRange(float(answers(batch, 1).twist[0]), float(answers(held, 1).twist[0]))


def with_held_warping(batch: Batch, channels: Mapping[str, Tube], spring: float = np.inf) -> Batch:
    """The first frame of a batch with the torsion constants of channels held from warping.

    Members of one group and one length become a group of their own.
    """
    skeleton = batch.skeleton
    length = batch.lengths()[0]
    names, numbers, rows = list(skeleton.groups), skeleton.group.copy(), [*batch.rigidity[0]]
    source = list(range(len(names)))
    for name, tube in channels.items():
        g = skeleton.groups.index(name)
        mine = np.flatnonzero(skeleton.group == g)
        classes = np.round(length[mine] / _SAME)
        free, warping, _ = channel_warping(tube.sizes)
        for value in np.unique(classes):
            members = mine[classes == value]
            material = tube.material
            acting = held_warping_torsion(
                free, warping, material.E, material.G, length[members[0]], spring
            )
            row = batch.rigidity[0, g].copy()
            row[3] *= float(acting) / float(free)
            numbers[members] = len(names)
            names.append(f"{name}, {length[members[0]] * 1e3:.0f} mm")
            rows.append(row)
            source.append(g)
    return replace(
        batch.frame(0),
        skeleton=replace(skeleton, groups=tuple(names), group=numbers),
        rigidity=np.stack(rows)[None],
        ends=batch.ends[:1, source],
        line_mass=batch.line_mass[:1, source],
    )
