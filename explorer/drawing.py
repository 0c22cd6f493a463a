"""A frame as something to draw: joints, members and what is to be seen on them; no picture yet.

Everything here is plain data in vehicle axes (x rearward from the front axle, y to the right,
z up) [m]. The canvas and the SVG views both draw from a ``FrameDrawing``.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TypeVar

import numpy as np
from numpy.typing import ArrayLike, NDArray

from explorer.numbers import count, listed, number, with_unit
from explorer.units import METRIC, Units
from model.errors import InputError
from model.frame.skeleton import F64, I32, Skeleton

Flags = NDArray[np.bool_]
Scalar = TypeVar("Scalar", np.float64, np.int32, np.bool_)


@dataclass(frozen=True, eq=False)
class MemberValue:
    """One number a member, shown by colour and width.

    words : what the number is ("Share of strain energy under twist").
    amount : (members,) float64, not negative; NaN where not known.
    unit, factor : shown is ``amount * factor`` in ``unit`` (a share of one in per cent).
    """

    words: str
    amount: F64
    unit: str = "%"
    factor: float = 100.0

    def __post_init__(self) -> None:
        amount = _frozen(self.amount, np.float64)
        object.__setattr__(self, "amount", amount)
        if amount.ndim != 1 or (amount < 0).any() or np.isinf(amount).any():
            raise InputError("member values", self.words, "one finite number a member, at least 0")

    @property
    def highest(self) -> float:
        """Greatest known amount; 0 when there is none."""
        known = self.amount[~np.isnan(self.amount)]
        return float(known.max()) if known.size else 0.0

    def write(self, member: int) -> str:
        """The number of one member with its unit."""
        return with_unit(float(self.amount[member]) * self.factor, self.unit, 2)

    def ticks(self) -> list[tuple[float, str]]:
        """Round numbers for a legend: place between 0 and the highest (0..1), text."""
        highest = (self.highest or 1.0) * self.factor
        step = _round_step(highest / 2.2)
        marks = [i * step for i in range(int(highest / step + 1e-9) + 1)]
        texts = [number(mark, 1) for mark in marks[:-1]] + [with_unit(marks[-1], self.unit, 1)]
        return [(round(mark / highest, 4), t) for mark, t in zip(marks, texts, strict=True)]


@dataclass(frozen=True, eq=False)
class MemberKind:
    """One kind a member (how it mostly carries load, which group it is in ...).

    words : what is told apart ("Carries load mostly by"); names : the kinds, in order.
    kind : (members,) int32, number in ``names``, -1 for none.
    """

    words: str
    names: tuple[str, ...]
    kind: I32

    def __post_init__(self) -> None:
        kind = _frozen(self.kind, np.int32)
        object.__setattr__(self, "kind", kind)
        if kind.ndim != 1 or (kind < -1).any() or (kind >= len(self.names)).any():
            raise InputError(
                "member kinds", self.words, f"numbers from -1 to {len(self.names) - 1}"
            )


@dataclass(frozen=True)
class Load:
    """A force drawn as an arrow that ends at a joint; only its direction is drawn."""

    joint: int
    direction: tuple[float, float, float]
    words: str = ""


@dataclass(frozen=True)
class Support:
    """A held joint; ``held`` names the directions, from "x", "y", "z"."""

    joint: int
    held: str = "z"


@dataclass(frozen=True, eq=False)
class Ghost:
    """A second shape: the deformed frame, a vibration mode or another frame.

    joints : (joints, 3) [m]; members : (members, 2) int32, or None for those of the drawing.
    words : what it is and how much it is enlarged. swings : drawn between -1 and 1 times the
    difference to the drawing, for ever (needs the joints of the drawing).
    """

    joints: F64
    words: str
    members: I32 | None = None
    swings: bool = False

    def __post_init__(self) -> None:
        object.__setattr__(self, "joints", _frozen(self.joints, np.float64))
        if self.members is not None:
            object.__setattr__(self, "members", _frozen(self.members, np.int32))


@dataclass(frozen=True)
class Station:
    """A plane across the vehicle at one x [m]."""

    name: str
    x: float


@dataclass(frozen=True)
class Label:
    """Words at a point [m]."""

    at: tuple[float, float, float]
    words: str


@dataclass(frozen=True, eq=False)
class FrameDrawing:
    """All that can be seen of one frame.

    joints : (joints, 3) float64 [m]. members : (members, 2) int32, joints at the two ends.
    names : one unique name a member; groups : name of the group of each member.
    outside_mm : (members,) float64, outside diameter or depth [mm].
    joint_names, sizes : a name a joint, a tube size a member ("25 x 1.5"); may be left out.
    present : (members,) bool, False for a brace that is left out; all when None.
    pickups : joints that take suspension load. axles : x of the front and rear axle [m].
    picked_out : names of members or groups to be stressed; of those not present, an outline.
    """

    title: str
    joints: F64
    members: I32
    names: tuple[str, ...]
    groups: tuple[str, ...]
    outside_mm: F64
    joint_names: tuple[str, ...] = ()
    sizes: tuple[str, ...] = ()
    present: Flags | None = None
    value: MemberValue | None = None
    kind: MemberKind | None = None
    pickups: tuple[int, ...] = ()
    loads: tuple[Load, ...] = ()
    supports: tuple[Support, ...] = ()
    ghost: Ghost | None = None
    labels: tuple[Label, ...] = ()
    stations: tuple[Station, ...] = ()
    axles: tuple[float, float] | None = None
    picked_out: tuple[str, ...] = ()
    shown: Flags = field(init=False)

    def __post_init__(self) -> None:
        put = object.__setattr__
        put(self, "joints", _frozen(self.joints, np.float64))
        put(self, "members", _frozen(self.members, np.int32))
        put(self, "outside_mm", _frozen(self.outside_mm, np.float64))
        amount = len(self.names)
        flags = np.ones(amount, np.bool_) if self.present is None else self.present
        put(self, "shown", _frozen(flags, np.bool_))
        _check(self, amount)

    @property
    def lengths(self) -> F64:
        """(members,) length between joint centres [m]."""
        ends = self.joints[self.members]
        length: F64 = np.linalg.norm(ends[:, 1] - ends[:, 0], axis=1)
        return length

    @property
    def extent(self) -> tuple[F64, F64]:
        """Least and greatest x, y, z of the joints that present members meet [m]."""
        used = self.joints[np.unique(self.members[self.shown])] if self.shown.any() else self.joints
        return used.min(axis=0), used.max(axis=0)

    def foot_of(self, station: Station) -> F64:
        """The lowest joint of a station, the left one of two [m]: where its name is written."""
        off = np.abs(self.joints[:, 0] - station.x)
        there = np.flatnonzero(off < off.min() + 1e-3)
        ends = self.joints[there]
        foot: F64 = ends[np.lexsort((ends[:, 1], np.round(ends[:, 2], 3)))[0]]
        return foot

    @property
    def wheelbase(self) -> float | None:
        """Distance of the axles [m], when they are known."""
        return None if self.axles is None else abs(self.axles[1] - self.axles[0])


def drawing_of(
    skeleton: Skeleton,
    xyz: ArrayLike,
    outside_mm: Mapping[str, float],
    *,
    title: str,
    present: ArrayLike | None = None,
    sizes: Mapping[str, str] | None = None,
    stations: Sequence[Station] = (),
    axles: tuple[float, float] | None = None,
) -> FrameDrawing:
    """The drawing of one frame of a skeleton.

    xyz : (joints, 3) [m]. outside_mm, sizes : by name of the group. present : (members,) bool.
    """
    groups = tuple(skeleton.groups[g] for g in skeleton.group)
    return FrameDrawing(
        title=title,
        joints=np.asarray(xyz, np.float64),
        members=skeleton.members,
        names=skeleton.member_names,
        groups=groups,
        outside_mm=np.array([outside_mm[g] for g in groups], np.float64),
        joint_names=skeleton.joints,
        sizes=tuple(sizes.get(g, "") for g in groups) if sizes else (),
        present=None if present is None else np.asarray(present, np.bool_),
        pickups=tuple(int(j) for j in np.concatenate([skeleton.front, skeleton.rear])),
        stations=tuple(stations),
        axles=axles,
    )


def drawing_in_words(drawing: FrameDrawing, units: Units = METRIC) -> str:
    """What a person sees in the drawing, as text for those who cannot see it."""
    low, high = drawing.extent
    length, width, height = (units.write(float(d) * 1000, "length", 3) for d in high - low)
    members = int(drawing.shown.sum())
    groups = sorted({g for g, there in zip(drawing.groups, drawing.shown, strict=True) if there})
    parts = [
        (
            f"{drawing.title}: {count(members, 'member')} in {count(len(groups), 'group')} "
            f"({listed(groups)}), {length} long, {width} wide, {height} high."
        )
    ]
    if drawing.value is not None and drawing.value.highest > 0:
        amount = np.where(drawing.shown, np.nan_to_num(drawing.value.amount), 0.0)
        top = np.argsort(-amount, kind="stable")[:3]
        said = [f"{drawing.names[m]} ({drawing.value.write(m)})" for m in top if amount[m] > 0]
        parts.append(f"{drawing.value.words}, greatest in {listed(said)}.")
    if drawing.kind is not None:
        kind = drawing.kind
        tally = [int(((kind.kind == k) & drawing.shown).sum()) for k in range(len(kind.names))]
        said = [f"{name} {n}" for name, n in zip(kind.names, tally, strict=True) if n]
        parts.append(f"{kind.words}: {listed(said)}.")
    if drawing.ghost is not None:
        parts.append(f"Drawn over it: {drawing.ghost.words}.")
    return " ".join(parts)


def _round_step(most: float) -> float:
    power = 10.0 ** math.floor(math.log10(most))
    return float(max(s for s in (1.0, 2.0, 5.0) if s * power <= most * (1 + 1e-9)) * power)


def _check(drawing: FrameDrawing, amount: int) -> None:
    joints = len(drawing.joints)
    for name, given, wanted in (
        ("joints", drawing.joints.shape, (joints, 3)),
        ("members", drawing.members.shape, (amount, 2)),
        ("outside_mm", drawing.outside_mm.shape, (amount,)),
        ("groups", (len(drawing.groups),), (amount,)),
        ("present", drawing.shown.shape, (amount,)),
        ("sizes", (len(drawing.sizes) or amount,), (amount,)),
        ("joint_names", (len(drawing.joint_names) or joints,), (joints,)),
    ):
        if given != wanted:
            raise InputError(f"drawing {name}", f"shape {given}", f"give shape {wanted}")
    if not np.isfinite(drawing.joints).all():
        raise InputError("drawing joints", "not a number", "give finite positions [m]")
    if amount and not (drawing.members.min() >= 0 and drawing.members.max() < joints):
        raise InputError("drawing members", "unknown joint", f"use joints 0 to {joints - 1}")
    if not (drawing.outside_mm > 0).all():
        raise InputError("drawing outside_mm", "not above 0", "give outside sizes [mm] above 0")
    if len(set(drawing.names)) != amount:
        raise InputError("drawing names", "a name twice", "give every member its own name")
    for shown in (drawing.value, drawing.kind):
        per_member = (
            None
            if shown is None
            else (shown.amount if isinstance(shown, MemberValue) else shown.kind)
        )
        if per_member is not None and per_member.shape != (amount,):
            raise InputError("member values", f"{len(per_member)}", f"give {amount}, one a member")
    marked = [*drawing.pickups, *(load.joint for load in drawing.loads)]
    marked += [support.joint for support in drawing.supports]
    if any(not 0 <= j < joints for j in marked):
        raise InputError("drawing marks", "unknown joint", f"use joints 0 to {joints - 1}")
    ghost = drawing.ghost
    own = ghost is not None and (ghost.swings or ghost.members is None)
    if ghost is not None and own and ghost.joints.shape != drawing.joints.shape:
        raise InputError("ghost joints", f"{len(ghost.joints)}", f"give {joints}, as drawn")


def _frozen(values: ArrayLike, kind: type[Scalar]) -> NDArray[Scalar]:
    array = np.array(values, dtype=kind)
    array.flags.writeable = False
    return array
