"""What one frame is made of: mass by group, centre of gravity, cut list, joints, stock to buy."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from model.frame.batch import Batch
from model.frame.layout import Tube

LENGTH_STEP = 1e-4
"""Members whose lengths agree to this [m] are cut as one item."""


@dataclass(frozen=True)
class CutItem:
    """Pieces of one tube that are cut to the same length and joined to the same kinds of joint.

    length : between joint centres [m]; the ends still need notching to the tubes they meet.
    """

    item: int
    group: str
    size: str
    shape: str
    material: str
    length: float
    quantity: int
    mass_each: float
    members: tuple[str, ...]
    ends: tuple[str, ...]


@dataclass(frozen=True)
class JointRow:
    """One joint: where it is and which members meet there."""

    name: str
    x: float
    y: float
    z: float
    members: tuple[str, ...]


@dataclass(frozen=True)
class StockRow:
    """Tube of one size and material needed for the frame."""

    size: str
    shape: str
    material: str
    length: float
    mass: float
    pieces: int


@dataclass(frozen=True)
class Bill:
    """Everything to buy and cut for one frame.

    mass : of the tubes [kg]; ``by_group`` the same by group.
    centre : centre of gravity of the bare frame (x, y, z) [m].
    """

    mass: float
    centre: tuple[float, float, float]
    by_group: Mapping[str, float]
    cuts: tuple[CutItem, ...]
    joints: tuple[JointRow, ...]
    stock: tuple[StockRow, ...]


def bill(batch: Batch, tubes: Mapping[str, Tube]) -> Bill:
    """The bill of the first frame of a batch.

    tubes : tube by group, of this very frame (its sizes are printed, not read from the batch).
    """
    skeleton = batch.skeleton
    here = np.flatnonzero(batch.present[0])
    length = batch.lengths()[0]
    line_mass = batch.line_mass[0, skeleton.group]
    mass = length * line_mass
    ends = skeleton.members
    middle = (batch.xyz[0, ends[:, 0]] + batch.xyz[0, ends[:, 1]]) / 2
    total = float(mass[here].sum())
    x, y, z = (float(v) for v in mass[here] @ middle[here] / total)
    by_group = {
        name: float(mass[here][skeleton.group[here] == g].sum())
        for g, name in enumerate(skeleton.groups)
        if (skeleton.group[here] == g).any()
    }
    return Bill(
        total,
        (x, y, z),
        by_group,
        _cuts(batch, tubes, here.tolist(), length.tolist(), line_mass.tolist()),
        _joints(batch, here.tolist()),
        _stock(batch, tubes, here.tolist(), length.tolist(), mass.tolist()),
    )


def _cuts(
    batch: Batch,
    tubes: Mapping[str, Tube],
    here: list[int],
    length: list[float],
    line_mass: list[float],
) -> tuple[CutItem, ...]:
    skeleton = batch.skeleton
    same: dict[tuple[str, int], list[int]] = {}
    for m in here:
        key = (skeleton.groups[skeleton.group[m]], round(length[m] / LENGTH_STEP))
        same.setdefault(key, []).append(m)
    order = sorted(same, key=lambda key: (skeleton.groups.index(key[0]), -key[1]))
    items = []
    for number, key in enumerate(order, start=1):
        members = same[key]
        group = key[0]
        tube = tubes[group]
        items.append(
            CutItem(
                number,
                group,
                tube.label,
                tube.shape,
                tube.material.name,
                length[members[0]],
                len(members),
                length[members[0]] * line_mass[members[0]],
                tuple(skeleton.member_names[m] for m in members),
                tuple(" - ".join(skeleton.joints[j] for j in skeleton.members[m]) for m in members),
            )
        )
    return tuple(items)


def _joints(batch: Batch, here: list[int]) -> tuple[JointRow, ...]:
    skeleton = batch.skeleton
    meet: dict[int, list[str]] = {}
    for m in here:
        for j in skeleton.members[m]:
            meet.setdefault(int(j), []).append(skeleton.member_names[m])
    return tuple(
        JointRow(skeleton.joints[j], *_place(batch, j), tuple(meet[j])) for j in sorted(meet)
    )


def _place(batch: Batch, joint: int) -> tuple[float, float, float]:
    x, y, z = batch.xyz[0, joint].tolist()
    return x, y, z


def _stock(
    batch: Batch,
    tubes: Mapping[str, Tube],
    here: list[int],
    length: list[float],
    mass: list[float],
) -> tuple[StockRow, ...]:
    skeleton = batch.skeleton
    rows: dict[tuple[str, str, str], list[int]] = {}
    for m in here:
        tube = tubes[skeleton.groups[skeleton.group[m]]]
        rows.setdefault((tube.label, tube.shape, tube.material.name), []).append(m)
    return tuple(
        StockRow(*key, sum(length[m] for m in ms), sum(mass[m] for m in ms), len(ms))
        for key, ms in rows.items()
    )
