"""Whether an arrangement contradicts itself; a contradiction is refused by field and remedy."""

from __future__ import annotations

from typing import TYPE_CHECKING

from model.errors import InputError
from model.frame.vocabulary import BRACING, ENTRIES, FACES, FALLBACK, GROUPS, MOST_BAYS
from model.stock.sections import SHAPES

if TYPE_CHECKING:
    from model.frame.layout import Hoop, Layout, Span, Station


def check_layout(layout: Layout) -> None:
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
    for kind, names in (
        ("station", [s.name for s in stations]),
        ("span", [s.name for s in spans]),
        ("hoop", [h.name for h in layout.hoops]),
    ):
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
    for k, station in enumerate(stations):
        _check_station(layout, station, layout.tall(k))
    for span in spans:
        _check_span(layout, span)
    for hoop in layout.hoops:
        _check_hoop(layout, hoop)
    layout.tube_group("lower rails")
    own = {span.tube for span in spans}
    for group, tube in layout.tubes.items():
        if group not in GROUPS and group not in FALLBACK.values() and group not in own:
            raise InputError("tube", repr(group), f"use one of: {', '.join(GROUPS)}")
        if tube.shape not in SHAPES:
            raise InputError(f"tube.{group}.shape", tube.shape, f"use one of: {', '.join(SHAPES)}")


def _check_station(layout: Layout, station: Station, tall: bool) -> None:
    path = f"station.{station.name}.ring"
    check_ring(station, station.ring)
    if station.ring != "open" and not tall:
        raise InputError(path, station.ring, "set it open: there is no upper rail here to brace to")
    at_axle = {layout.front_axle: layout.front_mount, layout.rear_axle: layout.rear_mount}
    high = at_axle.get(station.name) == "high" or layout.entry == "linkage"
    if station.name in at_axle and high and not tall:
        raise InputError(
            f"station.{station.name}",
            "no upper rail",
            "mount the suspension low with entry = spring mounts, or run upper rails here",
        )


def _check_span(layout: Layout, span: Span) -> None:
    if span.bays < 1 or span.bays > MOST_BAYS:
        raise InputError(f"span.{span.name}.bays", str(span.bays), f"use 1 to {MOST_BAYS}")
    for face in FACES:
        check_face(span, face, getattr(span, face))
    for face in span.clear:
        if face not in FACES:
            raise InputError(
                f"span.{span.name}.clear", repr(face), f"use faces: {', '.join(FACES)}"
            )
    if span.tube and span.tube not in layout.tubes:
        raise InputError(f"span.{span.name}.tube", repr(span.tube), "give this group a tube")


def _check_hoop(layout: Layout, hoop: Hoop) -> None:
    layout.station(hoop.station)
    if hoop.stays_to:
        layout.station(hoop.stays_to)
        if hoop.stays_to == hoop.station:
            raise InputError(
                f"hoop.{hoop.name}.stays_to", hoop.stays_to, "run the stays to another station"
            )
    if hoop.bracing not in ("open", "single", "cross"):
        raise InputError(
            f"hoop.{hoop.name}.bracing", hoop.bracing, "use one of: open, single, cross"
        )


def check_ring(station: Station, bracing: str) -> None:
    """Refuse a bracing that the ring of this station cannot have."""
    path = f"station.{station.name}.ring"
    _check_bracing(path, bracing)
    if bracing != "open" and station.clear:
        raise InputError(path, bracing, "set it open: this ring must stay clear")
    if bracing == "K":
        raise InputError(path, bracing, "use chevron: a K would brace one side only")


def check_face(span: Span, face: str, bracing: str) -> None:
    """Refuse a bracing that this face of the span cannot have."""
    field_name = f"span.{span.name}.{face}"
    _check_bracing(field_name, bracing)
    if bracing != "open" and face in span.clear:
        raise InputError(field_name, bracing, f"set it open: the {face} must stay clear here")
    if bracing == "chevron" and face in ("floor", "top"):
        raise InputError(field_name, bracing, "use K: a chevron would lean to one side")
    if bracing != "open" and face != "floor" and not span.upper:
        raise InputError(field_name, bracing, "set it open: there is no upper rail in this span")


def _check_bracing(field_name: str, bracing: str) -> None:
    if bracing not in BRACING:
        raise InputError(field_name, repr(bracing), f"use one of: {', '.join(BRACING)}")
