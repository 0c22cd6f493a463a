"""How a frame is arranged, in the trade's words: stations, spans, bracing, one tube a group."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TypeVar

from model.errors import InputError
from model.frame.consistency import check_layout
from model.frame.vocabulary import FALLBACK, RIGID
from model.stock.materials import Material
from model.stock.sections import SHAPES

_Named = TypeVar("_Named", "Station", "Span", "Hoop")


@dataclass(frozen=True)
class Station:
    """A key plane across the vehicle.

    at : position in wheelbases behind the front axle (0 front axle, 1 rear axle).
    width_low, width_high : distance between the left and right rails, joint centres [m].
    height_low, height_high : height of the rails above the ground, joint centres [m].
    ring : bracing of the ring's plane; ``bottom``, ``top``, ``uprights`` say which of the ring's
        own members are there.
    outrigger : distance between the outer ends of the outriggers at the lower rails [m], 0 for
        none. Outer ends of neighbouring stations are joined by sills.
    clear : the ring must stay open, because legs or an engine pass through it.
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
    outrigger: float = 0.0
    clear: bool = False


@dataclass(frozen=True)
class Span:
    """The stretch between one key station and the next, cut into bays of equal length.

    clear : faces that must stay open (cockpit opening, engine bay floor): no brace may be put
        there and the rings between the bays have no member there.
    upper : whether upper rails run through this span.
    tube : group whose tube everything in this span is made of (a subframe, a bolted upper
        structure); empty for the usual groups.
    """

    name: str
    bays: int = 1
    floor: str = "open"
    top: str = "open"
    left: str = "open"
    right: str = "open"
    upper: bool = True
    clear: tuple[str, ...] = ()
    tube: str = ""


@dataclass(frozen=True)
class Hoop:
    """A hoop across the vehicle, standing on the highest rails of a station.

    height : of its top above the ground [m]; width : of its top [m]; lean : how far the top
        lies behind the feet [m].
    stays_to : station whose highest rails the two stays run to, empty for none.
    bracing : of the hoop's plane, ``open``, ``single`` or ``cross``.
    """

    name: str
    station: str
    height: float
    width: float
    lean: float = 0.0
    stays_to: str = ""
    bracing: str = "open"


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
    hoops: tuple[Hoop, ...] = field(default=())

    def __post_init__(self) -> None:
        check_layout(self)

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

    def hoop(self, name: str) -> Hoop:
        """The hoop of that name."""
        return _named(self.hoops, "hoop", name)

    def tall(self, station: int) -> bool:
        """Whether upper rails reach the station of that number."""
        spans = self.spans[max(station - 1, 0) : station + 1]
        return any(span.upper for span in spans)

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


def with_hoop(layout: Layout, name: str, **change: object) -> Layout:
    """The layout with fields of one hoop changed."""
    layout.hoop(name)
    changed = (replace(h, **change) if h.name == name else h for h in layout.hoops)  # type: ignore[arg-type]
    return replace(layout, hoops=tuple(changed))


def with_tube(layout: Layout, group: str, **change: object) -> Layout:
    """The layout with fields of one group's tube changed."""
    if group not in layout.tubes:
        known = ", ".join(layout.tubes)
        raise InputError("tube", repr(group), f"use one of the groups that have a tube: {known}")
    tubes = dict(layout.tubes)
    tubes[group] = replace(tubes[group], **change)  # type: ignore[arg-type]
    return replace(layout, tubes=tubes)


def _named(items: tuple[_Named, ...], kind: str, name: str) -> _Named:
    for item in items:
        if item.name == name:
            return item
    known = ", ".join(item.name for item in items)
    raise InputError(kind, repr(name), f"use one of: {known}")
