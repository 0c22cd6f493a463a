"""From an arrangement and its bay counts to the skeleton that all its variants share."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from model.frame.layout import BRACING, Layout
from model.frame.skeleton import F64, Skeleton

CORNERS = ("low left", "low right", "high right", "high left")
_LOW_LEFT, _LOW_RIGHT, _HIGH_RIGHT, _HIGH_LEFT = range(4)
_MIRROR_CORNER = (1, 0, 3, 2)

ALWAYS = -1
"""Face number of members that no bracing choice takes away."""


@dataclass(frozen=True, eq=False)
class Scaffold:
    """A skeleton with what is needed to fill it for many frames.

    skeleton : joints and members, with every diagonal that any allowed bracing uses.
    faces : paths of the bracing choices, such as ``span.cockpit.floor``.
    face : (members,) int32, index into ``faces``, or ``ALWAYS``.
    patterns : (members, len(BRACING)) bool, the bracings in which the member is present.
    before, along : (rings,) station in front of each ring, and how far it lies towards the next
        one (0 at the station itself).
    roles : what each member is: rail, cross member, upright or brace.
    """

    skeleton: Skeleton
    faces: tuple[str, ...]
    face: NDArray[np.int32]
    patterns: NDArray[np.bool_]
    before: NDArray[np.int32]
    along: F64
    roles: tuple[str, ...]


def scaffold(
    layout: Layout, bays: Sequence[int], allowed: Mapping[str, frozenset[str]] | None = None
) -> Scaffold:
    """The scaffold of a layout for given bay counts.

    bays : bays of each span, from front to rear.
    allowed : for each bracing path the bracings that may occur; the layout's own where absent.
    """
    return _Builder(layout, bays, allowed or {}).build()


class _Builder:
    """Collects joints and members ring by ring; lives for one call of ``scaffold``."""

    def __init__(
        self, layout: Layout, bays: Sequence[int], allowed: Mapping[str, frozenset[str]]
    ) -> None:
        self.layout, self.bays, self.allowed = layout, bays, allowed
        self.corners = 2 if layout.rails == 2 else 4
        self.rings: list[str] = []
        self.before: list[int] = []
        self.along: list[float] = []
        self.ends: list[tuple[int, int]] = []
        self.group: list[str] = []
        self.names: list[str] = []
        self.roles: list[str] = []
        self.up: list[tuple[float, float, float]] = []
        self.face: list[int] = []
        self.patterns: list[list[bool]] = []
        self.faces: list[str] = []

    def build(self) -> Scaffold:
        station_ring = self._lay_rings()
        self._members_of_rings(station_ring)
        self._members_of_spans(station_ring)
        return self._finish(station_ring)

    def _lay_rings(self) -> list[int]:
        layout = self.layout
        station_ring: list[int] = []
        for i, station in enumerate(layout.stations):
            station_ring.append(len(self.rings))
            self.rings.append(station.name)
            self.before.append(i)
            self.along.append(0.0)
            if i < len(layout.spans):
                for k in range(1, self.bays[i]):
                    self.rings.append(f"{layout.spans[i].name} {k}")
                    self.before.append(i)
                    self.along.append(k / self.bays[i])
        return station_ring

    def _members_of_rings(self, station_ring: list[int]) -> None:
        layout = self.layout
        uppers = [False, *(span.upper for span in layout.spans), False]
        for i, station in enumerate(layout.stations):
            tall = uppers[i] or uppers[i + 1]
            self._ring(station_ring[i], station.bottom, tall and station.top,
                       tall and station.uprights, tall and station.uprights)  # fmt: skip
            if tall:
                self._diagonals(
                    f"station.{station.name}.ring",
                    station.ring,
                    "ring braces",
                    f"{station.name} ring",
                    self._joints(station_ring[i]),
                    flip=False,
                )
        for i, span in enumerate(layout.spans):
            for k in range(1, self.bays[i]):
                clear = span.clear
                self._ring(
                    station_ring[i] + k,
                    "floor" not in clear,
                    span.upper and "top" not in clear,
                    span.upper and "left" not in clear,
                    span.upper and "right" not in clear,
                )

    def _ring(self, ring: int, bottom: bool, top: bool, left: bool, right: bool) -> None:
        name, joint = self.rings[ring], self._joints(ring)
        if bottom:
            self._member(joint[0], joint[1], "cross members", f"{name} low cross member")
        if top:
            self._member(joint[3], joint[2], "top cross members", f"{name} high cross member")
        if left:
            self._member(joint[0], joint[3], "uprights", f"{name} left upright")
        if right:
            self._member(joint[1], joint[2], "uprights", f"{name} right upright")

    def _members_of_spans(self, station_ring: list[int]) -> None:
        bay_number = 0
        for i, span in enumerate(self.layout.spans):
            for k in range(self.bays[i]):
                ring = station_ring[i] + k
                a, b = self._joints(ring), self._joints(ring + 1)
                place = f"{span.name} {k + 1}"
                for corner, side in ((0, "left"), (1, "right")):
                    self._member(a[corner], b[corner], "lower rails", f"{place} lower {side} rail")
                if span.upper:
                    for corner, side in ((3, "left"), (2, "right")):
                        self._member(
                            a[corner], b[corner], "upper rails", f"{place} upper {side} rail"
                        )
                flip = bay_number % 2 == 1
                quads = {"floor": (a[0], b[0], b[1], a[1])}
                if span.upper:
                    quads["top"] = (a[3], b[3], b[2], a[2])
                    quads["left"] = (a[0], b[0], b[3], a[3])
                    quads["right"] = (a[1], b[1], b[2], a[2])
                for face, quad in quads.items():
                    group = "side braces" if face in ("left", "right") else f"{face} braces"
                    self._diagonals(
                        f"span.{span.name}.{face}", getattr(span, face), group,
                        f"{place} {face}", quad, flip,
                    )  # fmt: skip
                bay_number += 1

    def _diagonals(
        self,
        path: str,
        bracing: str,
        group: str,
        place: str,
        quad: tuple[int, int, int, int],
        flip: bool,
    ) -> None:
        """The diagonals of one panel: 0-2 is the first one of an even bay, 1-3 the other."""
        allowed = self.allowed.get(path, frozenset((bracing,)))
        if path not in self.faces:
            self.faces.append(path)
        face = self.faces.index(path)
        single_first = not flip
        for (i, j), first in (((0, 2), True), ((1, 3), False)):
            present = {
                "open": False,
                "single": first == single_first,
                "parallel": first,
                "cross": True,
            }
            if any(present[b] for b in allowed):
                which = "brace" if first else "counter brace"
                self._member(quad[i], quad[j], group, f"{place} {which}")
                self.face[-1] = face
                self.patterns[-1] = [present[b] for b in BRACING]

    def _joints(self, ring: int) -> tuple[int, int, int, int]:
        first = ring * self.corners
        return (first, first + 1, first + 2, first + 3)

    def _member(self, i: int, j: int, group: str, name: str) -> None:
        self.ends.append((i, j))
        self.group.append(self.layout.tube_group(group))
        self.names.append(name)
        self.roles.append(_ROLE[group])
        self.up.append((1.0, 0.0, 0.0) if group in _UP_IS_X else (0.0, 0.0, 1.0))
        self.face.append(ALWAYS)
        self.patterns.append([True] * len(BRACING))

    def _finish(self, station_ring: list[int]) -> Scaffold:
        layout = self.layout
        joints = tuple(f"{r} {c}" for r in self.rings for c in CORNERS[: self.corners])
        rings = np.arange(len(joints), dtype=np.int32).reshape(-1, self.corners)
        mirror_joint = rings[:, list(_MIRROR_CORNER[: self.corners])].ravel()
        members = np.array(self.ends, dtype=np.int32).reshape(-1, 2)
        groups = tuple(g for g in layout.tubes if g in self.group)
        at = {s.name: ring for s, ring in zip(layout.stations, station_ring, strict=True)}

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
            tuple(self.roles),
        )


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


_ROLE = {
    "lower rails": "rail",
    "upper rails": "rail",
    "cross members": "cross member",
    "top cross members": "cross member",
    "uprights": "upright",
    "side braces": "brace",
    "floor braces": "brace",
    "top braces": "brace",
    "ring braces": "brace",
}
_UP_IS_X = ("uprights",)
