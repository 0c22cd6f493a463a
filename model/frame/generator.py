"""From an arrangement and its bay counts to the skeleton that all its variants share."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from model.errors import InputError
from model.frame.layout import Layout
from model.frame.skeleton import F64, Skeleton
from model.frame.vocabulary import BRACING

CORNERS = ("low left", "low right", "high right", "high left")
_MIRROR_CORNER = (1, 0, 3, 2)

ALWAYS = -1
"""Face number of members that no bracing choice takes away."""

_X, _Z = (1.0, 0.0, 0.0), (0.0, 0.0, 1.0)


@dataclass(frozen=True)
class Extra:
    """A joint beside those of the rings.

    rule : ``middle`` between joints ``i`` and ``j``; ``hoop``, the top corner of hoop ``i`` on
        side ``j``; ``outrigger``, the outer end at station ``i`` on side ``j`` (-1 left, 1 right).
    """

    rule: str
    i: int
    j: int


@dataclass(frozen=True, eq=False)
class Scaffold:
    """A skeleton with what is needed to fill it for many frames.

    skeleton : joints and members, with every diagonal that any allowed bracing uses. Ring joints
        come first, ring by ring; then ``extra`` ones.
    faces : paths of the bracing choices, such as ``span.cockpit.floor``.
    face : (members,) int32, index into ``faces``, or ``ALWAYS``.
    patterns : (members, len(BRACING)) bool, the bracings in which the member is present.
    before, along : (rings,) station in front of each ring, and how far it lies towards the next
        one (0 at the station itself).
    roles : what each member is: the name of the group it belongs to by its place.
    """

    skeleton: Skeleton
    faces: tuple[str, ...]
    face: NDArray[np.int32]
    patterns: NDArray[np.bool_]
    before: NDArray[np.int32]
    along: F64
    extra: tuple[Extra, ...]
    roles: tuple[str, ...]


def scaffold(
    layout: Layout, bays: Sequence[int], allowed: Mapping[str, frozenset[str]] | None = None
) -> Scaffold:
    """The scaffold of a layout for given bay counts.

    bays : bays of each span, from front to rear.
    allowed : for each bracing path the bracings that may occur; the layout's own where absent.
        A bracing of ``MEETING`` shares a path with no other, for it has joints of its own.

    Raises
    ------
    InputError
        Braces would meet in the middle of a member that is not there.
    """
    rules = frozenset((allowed or {}).items())
    return _scaffold(_Arrangement(layout), tuple(bays), rules)


class _Arrangement:
    """A layout seen by what its scaffold depends on, so that equal ones share one."""

    def __init__(self, layout: Layout) -> None:
        self.layout = layout
        self._key = (
            layout.stations,
            layout.spans,
            layout.hoops,
            tuple(layout.tubes),
            (layout.front_axle, layout.rear_axle, layout.front_mount, layout.rear_mount),
        )

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Arrangement) and self._key == other._key

    def __hash__(self) -> int:
        return hash(self._key)


@lru_cache(maxsize=512)
def _scaffold(
    arrangement: _Arrangement, bays: tuple[int, ...], rules: frozenset[tuple[str, frozenset[str]]]
) -> Scaffold:
    builder = _Builder(arrangement.layout, bays, dict(rules))
    builder.lay_rings()
    builder.note_meeting_points()
    builder.place_rings()
    builder.place_spans()
    builder.place_outriggers()
    builder.place_hoops()
    return builder.finish()


@dataclass(frozen=True)
class _Panel:
    """A four-cornered face: diagonal 0-2 is the first one of an even bay, 1-3 the other.

    meet : by bracing, the edge (two corner numbers) in whose middle its braces meet, and the
        corners they come from.
    """

    path: str
    bracing: str
    group: str
    place: str
    quad: tuple[int, int, int, int]
    flip: bool
    tube: str
    meet: Mapping[str, tuple[tuple[int, int], tuple[int, int]]]


_MEET_SIDE = {"K": ((1, 2), (0, 3)), "chevron": ((2, 3), (0, 1))}
_MEET_PLAN = {"K": ((1, 2), (0, 3))}
_MEET_RING = {"chevron": ((2, 3), (0, 1))}


class _Builder:
    """Collects joints and members from front to rear; lives for one call of ``scaffold``."""

    def __init__(
        self, layout: Layout, bays: Sequence[int], allowed: Mapping[str, frozenset[str]]
    ) -> None:
        self.layout, self.bays, self.allowed = layout, bays, allowed
        self.corners = 2 if layout.rails == 2 else 4
        self.rings: list[str] = []
        self.station_ring: list[int] = []
        self.before: list[int] = []
        self.along: list[float] = []
        self.extra: list[Extra] = []
        self.extra_names: list[str] = []
        self.middle: dict[tuple[int, int], int] = {}
        self.met: dict[tuple[int, int], tuple[str, str]] = {}
        self.halved: set[tuple[int, int]] = set()
        self.ends: list[tuple[int, int]] = []
        self.group: list[str] = []
        self.names: list[str] = []
        self.roles: list[str] = []
        self.up: list[tuple[float, float, float]] = []
        self.face: list[int] = []
        self.patterns: list[list[bool]] = []
        self.faces: list[str] = []

    def lay_rings(self) -> None:
        layout = self.layout
        for i, station in enumerate(layout.stations):
            self.station_ring.append(len(self.rings))
            self.rings.append(station.name)
            self.before.append(i)
            self.along.append(0.0)
            if i < len(layout.spans):
                for k in range(1, self.bays[i]):
                    self.rings.append(f"{layout.spans[i].name} {k}")
                    self.before.append(i)
                    self.along.append(k / self.bays[i])

    def note_meeting_points(self) -> None:
        """A joint in the middle of every member in which K or chevron braces meet."""
        for panel in self._panels():
            for bracing in self._allowed(panel) & panel.meet.keys():
                i, j = sorted(panel.quad[c] for c in panel.meet[bracing][0])
                if (i, j) not in self.middle:
                    name = f"middle of {self._ring_joint(i)} - {self._ring_joint(j)}"
                    self.middle[i, j] = self._extra("middle", i, j, name)
                    self.met[i, j] = (panel.path, bracing)

    def place_rings(self) -> None:
        layout = self.layout
        for i, station in enumerate(layout.stations):
            tall = layout.tall(i)
            upright = tall and station.uprights
            self._ring(self.station_ring[i], station.bottom, tall and station.top, upright, upright)
        for i, span in enumerate(layout.spans):
            for k in range(1, self.bays[i]):
                self._ring(
                    self.station_ring[i] + k,
                    "floor" not in span.clear,
                    span.upper and "top" not in span.clear,
                    span.upper and "left" not in span.clear,
                    span.upper and "right" not in span.clear,
                    span.tube,
                )

    def place_spans(self) -> None:
        for i, span in enumerate(self.layout.spans):
            for k in range(self.bays[i]):
                ring = self.station_ring[i] + k
                a, b = self._joints(ring), self._joints(ring + 1)
                place = f"{span.name} {k + 1}"
                for corner, side in ((0, "left"), (1, "right")):
                    name = f"{place} lower {side} rail"
                    self._edge(a[corner], b[corner], "lower rails", name, span.tube)
                if span.upper:
                    for corner, side in ((3, "left"), (2, "right")):
                        name = f"{place} upper {side} rail"
                        self._edge(a[corner], b[corner], "upper rails", name, span.tube)
        for panel in self._panels():
            self._brace(panel)

    def place_outriggers(self) -> None:
        outer: dict[tuple[int, int], int] = {}
        for k, station in enumerate(self.layout.stations):
            if station.outrigger <= 0:
                continue
            joint = self._joints(self.station_ring[k])
            for corner, side, word in ((0, -1, "left"), (1, 1, "right")):
                name = f"{station.name} outrigger {word}"
                outer[k, side] = self._extra("outrigger", k, side, name)
                self._member(joint[corner], outer[k, side], "outriggers", name)
                if (k - 1, side) in outer:
                    span = self.layout.spans[k - 1].name
                    self._member(outer[k - 1, side], outer[k, side], "sills", f"{span} {word} sill")

    def place_hoops(self) -> None:
        layout = self.layout
        for k, hoop in enumerate(layout.hoops):
            foot = self._highest(hoop.station)
            top = [
                self._extra("hoop", k, side, f"{hoop.name} top {word}")
                for side, word in ((-1, "left"), (1, "right"))
            ]
            for side, word in ((0, "left"), (1, "right")):
                self._member(foot[side], top[side], "hoop", f"{hoop.name} {word} leg", up=_X)
            self._member(top[0], top[1], "hoop", f"{hoop.name} top bar", up=_X)
            if hoop.bracing in ("single", "cross"):
                self._member(foot[0], top[1], "hoop braces", f"{hoop.name} brace", up=_X)
            if hoop.bracing == "cross":
                self._member(foot[1], top[0], "hoop braces", f"{hoop.name} counter brace", up=_X)
            if hoop.stays_to:
                end = self._highest(hoop.stays_to)
                for side, word in ((0, "left"), (1, "right")):
                    self._member(top[side], end[side], "hoop stays", f"{hoop.name} {word} stay")

    def finish(self) -> Scaffold:
        layout = self.layout
        for pair, (path, bracing) in self.met.items():
            if pair not in self.halved:
                raise InputError(path, bracing, "keep the member in whose middle the braces meet")
        ring_joints = len(self.rings) * self.corners
        joints = (*(self._ring_joint(j) for j in range(ring_joints)), *self.extra_names)
        rings = np.arange(ring_joints, dtype=np.int32).reshape(-1, self.corners)
        members = np.array(self.ends, dtype=np.int32).reshape(-1, 2)
        mirror_joint = self._mirror_joints(rings)
        groups = tuple(g for g in layout.tubes if g in self.group)
        at = {s.name: r for s, r in zip(layout.stations, self.station_ring, strict=True)}

        def mount(axle: str, rail: str) -> NDArray[np.int32]:
            corners = (0, 1) if rail == "low" else (3, 2)
            return rings[at[axle], list(corners)]

        skeleton = Skeleton(
            joints=joints,
            members=members,
            group=np.array([groups.index(g) for g in self.group], dtype=np.int32),
            groups=groups,
            up=np.array(self.up, dtype=np.float64).reshape(-1, 3),
            member_names=tuple(self.names),
            front=mount(layout.front_axle, layout.front_mount),
            rear=mount(layout.rear_axle, layout.rear_mount),
            rings=rings,
            mirror_joint=mirror_joint,
            mirror_member=_mirror_members(members, mirror_joint),
            ring_names=tuple(self.rings),
        )
        return Scaffold(
            skeleton,
            tuple(self.faces),
            np.array(self.face, dtype=np.int32),
            np.array(self.patterns, dtype=bool).reshape(-1, len(BRACING)),
            np.array(self.before, dtype=np.int32),
            np.array(self.along, dtype=np.float64),
            tuple(self.extra),
            tuple(self.roles),
        )

    def _panels(self) -> Iterator[_Panel]:
        """Every face and ring that may carry braces, rings first, then bay by bay."""
        layout = self.layout
        for i, station in enumerate(layout.stations):
            if layout.tall(i):
                path, place = f"station.{station.name}.ring", f"{station.name} ring"
                quad = self._joints(self.station_ring[i])
                yield _Panel(path, station.ring, "ring braces", place, quad, False, "", _MEET_RING)
        bay_number = 0
        for i, span in enumerate(layout.spans):
            for k in range(self.bays[i]):
                ring = self.station_ring[i] + k
                a, b = self._joints(ring), self._joints(ring + 1)
                quads = {"floor": (a[0], b[0], b[1], a[1])}
                if span.upper:
                    quads["top"] = (a[3], b[3], b[2], a[2])
                    quads["left"] = (a[0], b[0], b[3], a[3])
                    quads["right"] = (a[1], b[1], b[2], a[2])
                for face, quad in quads.items():
                    side = face in ("left", "right")
                    yield _Panel(
                        f"span.{span.name}.{face}",
                        getattr(span, face),
                        "side braces" if side else f"{face} braces",
                        f"{span.name} {k + 1} {face}",
                        quad,
                        bay_number % 2 == 1,
                        span.tube,
                        _MEET_SIDE if side else _MEET_PLAN,
                    )
                bay_number += 1

    def _allowed(self, panel: _Panel) -> frozenset[str]:
        return self.allowed.get(panel.path, frozenset((panel.bracing,)))

    def _brace(self, panel: _Panel) -> None:
        """The diagonals that any allowed bracing puts into a panel."""
        allowed, quad = self._allowed(panel), panel.quad
        if panel.path not in self.faces:
            self.faces.append(panel.path)
        present = {
            "brace": {"single": not panel.flip, "parallel": True, "cross": True},
            "counter brace": {"single": panel.flip, "cross": True},
        }
        for (i, j), which in (((0, 2), "brace"), ((1, 3), "counter brace")):
            if any(present[which].get(b, False) for b in allowed):
                self._panel_member(panel, quad[i], quad[j], which, present[which])
        for bracing in sorted(allowed & panel.meet.keys()):
            edge, starts = panel.meet[bracing]
            first, second = sorted(quad[c] for c in edge)
            middle = self.middle[first, second]
            for corner, which in zip(starts, ("brace", "counter brace"), strict=True):
                self._panel_member(panel, quad[corner], middle, which, {bracing: True})

    def _panel_member(
        self, panel: _Panel, i: int, j: int, which: str, present: Mapping[str, bool]
    ) -> None:
        self._member(i, j, panel.group, f"{panel.place} {which}", panel.tube)
        self.face[-1] = self.faces.index(panel.path)
        self.patterns[-1] = [present.get(b, False) for b in BRACING]

    def _ring(
        self, ring: int, bottom: bool, top: bool, left: bool, right: bool, tube: str = ""
    ) -> None:
        name, joint = self.rings[ring], self._joints(ring)
        if bottom:
            self._edge(joint[0], joint[1], "cross members", f"{name} low cross member", tube)
        if top:
            self._edge(joint[3], joint[2], "top cross members", f"{name} high cross member", tube)
        for there, low, high, side in ((left, 0, 3, "left"), (right, 1, 2, "right")):
            if there:
                self._edge(joint[low], joint[high], "uprights", f"{name} {side} upright", tube)

    def _edge(self, i: int, j: int, group: str, name: str, tube: str = "") -> None:
        """A member between ring joints; in two halves when braces meet in its middle."""
        up = _X if group == "uprights" else _Z
        pair = (min(i, j), max(i, j))
        if pair not in self.middle:
            self._member(i, j, group, name, tube, up)
            return
        self.halved.add(pair)
        self._member(i, self.middle[pair], group, f"{name}, first half", tube, up)
        self._member(self.middle[pair], j, group, f"{name}, second half", tube, up)

    def _member(
        self,
        i: int,
        j: int,
        role: str,
        name: str,
        tube: str = "",
        up: tuple[float, float, float] = _Z,
    ) -> None:
        self.ends.append((i, j))
        self.group.append(tube or self.layout.tube_group(role))
        self.names.append(name)
        self.roles.append(role)
        self.up.append(up)
        self.face.append(ALWAYS)
        self.patterns.append([True] * len(BRACING))

    def _extra(self, rule: str, i: int, j: int, name: str) -> int:
        self.extra.append(Extra(rule, i, j))
        self.extra_names.append(name)
        return len(self.rings) * self.corners + len(self.extra) - 1

    def _joints(self, ring: int) -> tuple[int, int, int, int]:
        first = ring * self.corners
        return (first, first + 1, first + 2, first + 3)

    def _ring_joint(self, joint: int) -> str:
        ring, corner = divmod(joint, self.corners)
        return f"{self.rings[ring]} {CORNERS[corner]}"

    def _highest(self, station: str) -> tuple[int, int]:
        """Left and right joint of a station's highest rails."""
        k = [s.name for s in self.layout.stations].index(station)
        joint = self._joints(self.station_ring[k])
        return (joint[3], joint[2]) if self.layout.tall(k) else (joint[0], joint[1])

    def _mirror_joints(self, rings: NDArray[np.int32]) -> NDArray[np.int32]:
        partner = rings[:, list(_MIRROR_CORNER[: self.corners])].ravel()
        number = {extra: rings.size + k for k, extra in enumerate(self.extra)}
        other = []
        for extra in self.extra:
            if extra.rule == "middle":
                i, j = sorted((int(partner[extra.i]), int(partner[extra.j])))
                other.append(number.get(Extra("middle", i, j), -1))
            else:
                other.append(number[replace(extra, j=-extra.j)])
        return np.concatenate([partner, np.array(other, dtype=np.int32)]).astype(np.int32)


def _mirror_members(
    members: NDArray[np.int32], mirror_joint: NDArray[np.int32]
) -> NDArray[np.int32]:
    number = {frozenset((int(i), int(j))): m for m, (i, j) in enumerate(members)}
    return np.array(
        [
            number.get(frozenset((int(mirror_joint[i]), int(mirror_joint[j]))), -1)
            for i, j in members
        ],
        dtype=np.int32,
    )
