"""How a frame is arranged, in the trade's words: stations, spans, bracing, one tube a group."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TypeVar

from model.errors import InputError
from model.stock.materials import Material
from model.stock.sections import SHAPES

BRACING = ("open", "single", "parallel", "cross")
"""Ways to brace a face: none, one diagonal a bay (turning over from bay to bay), one diagonal a
bay (all the same way), both diagonals."""

FACES = ("floor", "top", "left", "right")

RIGID = math.inf
"""End stiffness of a welded end."""

GROUPS = (
    "lower rails",
    "upper rails",
    "cross members",
    "top cross members",
    "uprights",
    "side braces",
    "floor braces",
    "top braces",
    "ring braces",
)
"""Groups of members that share one tube size."""

FALLBACK: Mapping[str, str] = {
    "lower rails": "rails",
    "upper rails": "rails",
    "top cross members": "cross members",
    "cross members": "ring members",
    "uprights": "ring members",
    "side braces": "braces",
    "floor braces": "braces",
    "top braces": "braces",
    "ring braces": "braces",
}
"""The group whose tube is used when a group has none of its own."""

ENTRIES = ("spring mounts", "linkage")
"""How the twist couple enters: as vertical forces at the spring mounts alone, or with the
sideways forces that wishbones add at the upper and lower pickups of the same ring."""


MOST_BAYS = 20

_Named = TypeVar("_Named", "Station", "Span")


@dataclass(frozen=True)
class Station:
    """A key plane across the vehicle.

    at : position in wheelbases behind the front axle (0 front axle, 1 rear axle).
    width_low, width_high : distance between the left and right rails, joint centres [m].
    height_low, height_high : height of the rails above the ground, joint centres [m].
    ring : bracing of the ring's plane; ``bottom``, ``top``, ``uprights`` say which of the ring's
        own members are there.
    """

    name: str
    at: float
    width_low: float
    height_low: float
    width_high: float = 0.0
    height_high: float = 0.0
    ring: str = "open"
    bottom: bool = True
    top: bool = True
    uprights: bool = True


@dataclass(frozen=True)
class Span:
    """The stretch between one key station and the next, cut into bays of equal length.

    clear : faces that must stay open (cockpit opening, engine bay floor): no brace may be put
        there and the rings between the bays have no member there.
    upper : whether upper rails run through this span.
    """

    name: str
    bays: int = 1
    floor: str = "open"
    top: str = "open"
    left: str = "open"
    right: str = "open"
    upper: bool = True
    clear: tuple[str, ...] = ()


@dataclass(frozen=True)
class Tube:
    """What a group of members is made of, and how its ends are joined.

    sizes : the shape's sizes [m], as ``model.stock.sections.SHAPES`` names them.
    rotation : stiffness of a member end against turning [N·m/rad]; ``RIGID`` welded, 0 pinned.
    axial : stiffness of a member end along the member [N/m]; ``RIGID`` welded.
    stock : label of the stock size it was taken from, empty when it is no stock size.
    """

    shape: str
    sizes: Mapping[str, float]
    material: Material
    rotation: float = RIGID
    axial: float = RIGID
    stock: str = ""

    @property
    def label(self) -> str:
        """The size as the trade writes it, in millimetres: ``25 x 1.5``."""
        return " x ".join(f"{self.sizes[s] * 1e3:.4g}" for s in SHAPES[self.shape].sizes)


@dataclass(frozen=True)
class Mass:
    """A piece of equipment carried by the frame: ``kg`` at ``x``, ``y``, ``z`` [m]."""

    name: str
    kg: float
    x: float
    y: float
    z: float


@dataclass(frozen=True)
class Layout:
    """One frame arrangement.

    wheelbase, track_front, track_rear : [m].
    stations : key stations from front to rear; ``spans`` has one entry fewer.
    tubes : tube by group; a group without one uses the group that ``FALLBACK`` names.
    front_mount, rear_mount : rails that carry the suspension load at the axle stations.
    entry : one of ``ENTRIES``.
    """

    name: str
    wheelbase: float
    track_front: float
    track_rear: float
    stations: tuple[Station, ...]
    spans: tuple[Span, ...]
    tubes: Mapping[str, Tube]
    front_axle: str
    rear_axle: str
    front_mount: str = "low"
    rear_mount: str = "low"
    entry: str = "spring mounts"
    masses: tuple[Mass, ...] = field(default=())

    def __post_init__(self) -> None:
        _check(self)

    @property
    def rails(self) -> int:
        """2 when no span has upper rails, otherwise 4."""
        return 4 if any(span.upper for span in self.spans) else 2

    def station(self, name: str) -> Station:
        """The station of that name."""
        return _named(self.stations, "station", name)

    def span(self, name: str) -> Span:
        """The span of that name."""
        return _named(self.spans, "span", name)

    def tube_group(self, group: str) -> str:
        """The group whose tube ``group`` is made of."""
        found = group
        while found not in self.tubes:
            if found not in FALLBACK:
                raise InputError(f"tube.{group}", "missing", "give this group a tube")
            found = FALLBACK[found]
        return found


def with_station(layout: Layout, name: str, **change: object) -> Layout:
    """The layout with fields of one station changed."""
    layout.station(name)
    changed = (replace(s, **change) if s.name == name else s for s in layout.stations)  # type: ignore[arg-type]
    return replace(layout, stations=tuple(changed))


def with_span(layout: Layout, name: str, **change: object) -> Layout:
    """The layout with fields of one span changed."""
    layout.span(name)
    changed = (replace(s, **change) if s.name == name else s for s in layout.spans)  # type: ignore[arg-type]
    return replace(layout, spans=tuple(changed))


def with_tube(layout: Layout, group: str, **change: object) -> Layout:
    """The layout with fields of one group's tube changed."""
    if group not in layout.tubes:
        known = ", ".join(layout.tubes)
        raise InputError("tube", repr(group), f"use one of the groups that have a tube: {known}")
    tubes = dict(layout.tubes)
    tubes[group] = replace(tubes[group], **change)  # type: ignore[arg-type]
    return replace(layout, tubes=tubes)


def _check(layout: Layout) -> None:
    """Refuse an arrangement that contradicts itself; dimensions are checked with the batch."""
    stations, spans = layout.stations, layout.spans
    if len(stations) < 2:
        raise InputError("station", f"{len(stations)} given", "give at least two key stations")
    if len(spans) != len(stations) - 1:
        raise InputError(
            "span",
            f"{len(spans)} given",
            f"give one span between each two stations, {len(stations) - 1} here",
        )
    for kind, names in (("station", [s.name for s in stations]), ("span", [s.name for s in spans])):
        for name in names:
            if not name or "." in name:
                raise InputError(f"{kind} name", repr(name), "use letters and no full stop")
            if names.count(name) > 1:
                raise InputError(f"{kind} name", repr(name), "use each name once")
    for axle, name, at in (("front", layout.front_axle, 0.0), ("rear", layout.rear_axle, 1.0)):
        station = layout.station(name)
        if station.at != at:
            raise InputError(
                f"station.{name}.at", f"{station.at:g}", f"the {axle} axle lies at {at:g}"
            )
    for axle, mount in (("front", layout.front_mount), ("rear", layout.rear_mount)):
        if mount not in ("low", "high"):
            raise InputError(f"{axle}_mount", repr(mount), "use low or high")
    if layout.entry not in ENTRIES:
        raise InputError("entry", repr(layout.entry), f"use one of: {', '.join(ENTRIES)}")
    uppers = [False, *(span.upper for span in spans), False]
    for station, before, after in zip(stations, uppers[:-1], uppers[1:], strict=True):
        _check_bracing(f"station.{station.name}.ring", station.ring)
        tall = before or after
        if station.ring != "open" and not tall:
            raise InputError(
                f"station.{station.name}.ring",
                station.ring,
                "set it open: there is no upper rail here to brace to",
            )
        at_axle = {layout.front_axle: layout.front_mount, layout.rear_axle: layout.rear_mount}
        high = at_axle.get(station.name) == "high" or layout.entry == "linkage"
        if station.name in at_axle and high and not tall:
            raise InputError(
                f"station.{station.name}",
                "no upper rail",
                "mount the suspension low with entry = spring mounts, or run upper rails here",
            )
    for span in spans:
        if span.bays < 1 or span.bays > MOST_BAYS:
            raise InputError(f"span.{span.name}.bays", str(span.bays), f"use 1 to {MOST_BAYS}")
        for face in FACES:
            check_face(span, face, getattr(span, face))
        for face in span.clear:
            if face not in FACES:
                raise InputError(
                    f"span.{span.name}.clear", repr(face), f"use faces: {', '.join(FACES)}"
                )
    layout.tube_group("lower rails")
    for group, tube in layout.tubes.items():
        if group not in GROUPS and group not in FALLBACK.values():
            raise InputError("tube", repr(group), f"use one of: {', '.join(GROUPS)}")
        if tube.shape not in SHAPES:
            raise InputError(f"tube.{group}.shape", tube.shape, f"use one of: {', '.join(SHAPES)}")


def check_face(span: Span, face: str, bracing: str) -> None:
    """Refuse a bracing that this face of the span cannot have."""
    field_name = f"span.{span.name}.{face}"
    _check_bracing(field_name, bracing)
    if bracing != "open" and face in span.clear:
        raise InputError(field_name, bracing, f"set it open: the {face} must stay clear here")
    if bracing != "open" and face != "floor" and not span.upper:
        raise InputError(field_name, bracing, "set it open: there is no upper rail in this span")


def _check_bracing(field_name: str, bracing: str) -> None:
    if bracing not in BRACING:
        raise InputError(field_name, repr(bracing), f"use one of: {', '.join(BRACING)}")


def _named(items: tuple[_Named, ...], kind: str, name: str) -> _Named:
    for item in items:
        if item.name == name:
            return item
    known = ", ".join(item.name for item in items)
    raise InputError(kind, repr(name), f"use one of: {known}")
