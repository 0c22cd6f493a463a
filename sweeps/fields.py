"""What can be set about a layout, by path: what forms show and a sweep may vary."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

from model.errors import InputError
from model.frame.layout import Layout, with_hoop, with_span, with_station, with_tube
from model.stock.materials import Material
from model.stock.sections import SHAPES
from model.stock.tubes import StockSize
from sweeps.inputs import UNITS, option_label, strip_unit, unit_of


@dataclass(frozen=True)
class Field:
    """Something about a layout that can be set and that a sweep may vary.

    path : with its unit. label : in words. place : ``vehicle``, ``station``, ``span``, ``hoop``
        or ``tube``, with the name of the thing in ``owner``.
    kind : ``number``, ``count``, ``bracing``, ``stock`` or ``material``. value : in file units.
    low, high : sensible range for a sweep, in file units.
    """

    path: str
    label: str
    place: str
    owner: str
    kind: str
    unit: str
    value: Any
    low: float = 0.0
    high: float = 0.0


_STATION_WORDS = {
    "width_low": "width at the lower rails",
    "width_high": "width at the upper rails",
    "height_low": "height of the lower rails",
    "height_high": "height of the upper rails",
    "outrigger": "width over the outriggers",
}
_HOOP_WORDS = {"height": "height", "width": "width at the top", "lean": "lean"}


def fields(layout: Layout) -> tuple[Field, ...]:
    """Everything about a layout that can be set, in the order that a designer goes through it."""
    found = [
        _length("wheelbase_mm", "Wheelbase", "vehicle", "", layout.wheelbase),
        _length("track_front_mm", "Front track", "vehicle", "", layout.track_front),
        _length("track_rear_mm", "Rear track", "vehicle", "", layout.track_rear),
    ]
    for k, station in enumerate(layout.stations):
        path = f"station.{station.name}"
        if station.name not in (layout.front_axle, layout.rear_axle):
            found.append(
                Field(f"{path}.at", f"Position of {station.name}", "station", station.name,
                      "number", "", station.at, station.at - 0.05, station.at + 0.05)
            )  # fmt: skip
        names = ["width_low", "height_low"]
        if layout.tall(k):
            names += ["width_high", "height_high"]
        if station.outrigger > 0:
            names.append("outrigger")
        for name in names:
            words = f"{station.name}, {_STATION_WORDS[name]}"
            value = getattr(station, name)
            found.append(
                _length(f"{path}.{name}_mm", _capital(words), "station", station.name, value)
            )
        if layout.tall(k) and not station.clear:
            found.append(
                Field(f"{path}.ring", _capital(f"{station.name}, ring bracing"), "station",
                      station.name, "bracing", "", station.ring)
            )  # fmt: skip
    for span in layout.spans:
        path = f"span.{span.name}"
        found.append(
            Field(f"{path}.bays", _capital(f"{span.name}, bays"), "span", span.name, "count", "",
                  span.bays, max(1, span.bays - 1), span.bays + 1)
        )  # fmt: skip
        faces = {"floor": span.floor, "top": span.top}
        if span.left == span.right:
            faces["sides"] = span.left
        else:
            faces |= {"left": span.left, "right": span.right}
        for face, bracing in faces.items():
            clear = face in span.clear or (face == "sides" and {"left", "right"} & {*span.clear})
            if clear or (face != "floor" and not span.upper):
                continue
            found.append(
                Field(f"{path}.{face}", _capital(f"{span.name}, {face} bracing"), "span",
                      span.name, "bracing", "", bracing)
            )  # fmt: skip
    for hoop in layout.hoops:
        for name, words in _HOOP_WORDS.items():
            found.append(
                _length(f"hoop.{hoop.name}.{name}_mm", _capital(f"{hoop.name}, {words}"), "hoop",
                        hoop.name, getattr(hoop, name))
            )  # fmt: skip
    for group in layout.tubes:
        found += _tube_fields(layout, group)
    return tuple(found)


def field(layout: Layout, path: str) -> Field:
    """The field of that path."""
    for found in fields(layout):
        if found.path == path:
            return found
    raise InputError("path", repr(path), "use a path of this layout, with its unit")


def with_value(layout: Layout, path: str, value: Any) -> Layout:
    """The layout with one field set; ``value`` in the path's unit, or the option itself.

    Raises
    ------
    InputError
        No such field, or a layout that contradicts itself.
    """
    inner, scale = strip_unit(path), UNITS.get(unit_of(path), 1.0)
    if isinstance(value, int | float) and unit_of(path):
        value = float(value) * scale
    parts = inner.split(".")
    if parts[0] in ("wheelbase", "track_front", "track_rear") and len(parts) == 1:
        return replace(layout, **{parts[0]: value})
    if len(parts) != 3:
        raise InputError("path", repr(path), "write KIND.NAME.FIELD, such as span.cockpit.bays")
    kind, owner, name = parts
    if kind == "station":
        return with_station(layout, owner, **{name: value})
    if kind == "hoop":
        return with_hoop(layout, owner, **{name: value})
    if kind == "span":
        if name == "bays":
            value = int(value)
        names = ("left", "right") if name == "sides" else (name,)
        return with_span(layout, owner, **dict.fromkeys(names, value))
    if kind == "tube":
        return _with_tube_value(layout, owner, name, value)
    raise InputError("path", repr(path), "begin with station, span, hoop or tube")


def _with_tube_value(layout: Layout, group: str, name: str, value: Any) -> Layout:
    if isinstance(value, StockSize):
        return with_tube(
            layout, group, shape=value.shape, sizes=dict(value.sizes), stock=option_label(value)
        )
    if isinstance(value, Material) or name in ("rotation", "axial"):
        return with_tube(layout, group, **{name: value})
    if group in layout.tubes and name in SHAPES[layout.tubes[group].shape].sizes:
        sizes = {**layout.tubes[group].sizes, name: float(value)}
        return with_tube(layout, group, sizes=sizes, stock="")
    raise InputError(f"tube.{group}.{name}", str(value), "this tube has no such size")


def _tube_fields(layout: Layout, group: str) -> list[Field]:
    tube, path = layout.tubes[group], f"tube.{group}"
    found = [
        Field(f"{path}.stock", _capital(f"{group}, stock size"), "tube", group, "stock", "",
              tube.stock)
    ]  # fmt: skip
    for name in SHAPES[tube.shape].sizes:
        value = tube.sizes[name] * 1e3
        low, high = (value * 0.8, value * 1.25) if name != "wall" else (value * 0.6, value * 1.5)
        found.append(
            Field(f"{path}.{name}_mm", _capital(f"{group}, {name}"), "tube", group, "number",
                  "mm", value, round(low, 2), round(high, 2))
        )  # fmt: skip
    found.append(
        Field(f"{path}.material", _capital(f"{group}, material"), "tube", group, "material", "",
              tube.material.name)
    )  # fmt: skip
    return found


def _length(path: str, label: str, place: str, owner: str, metres: float) -> Field:
    value = metres * 1e3
    low, high = sorted((round(value * 0.9), round(value * 1.1)))
    if low == high:
        low, high = low - 20, high + 20
    return Field(path, label, place, owner, "number", "mm", value, low, high)


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]
