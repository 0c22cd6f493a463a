"""Fields of a layout beyond those a sweep may vary, and the one way to set any of them."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from model.errors import InputError
from model.frame.layout import Layout, Mass, with_station, with_tube
from model.frame.vocabulary import FALLBACK, GROUPS
from model.stock.sections import SHAPES, section_values
from model.stock.tubes import StockList, StockSize
from sweeps.study import with_value

_RING_MEMBERS = ("bottom", "top", "uprights")
_OF_VEHICLE = ("front_mount", "rear_mount", "entry")


def edited(layout: Layout, path: str, value: Any) -> Layout:
    """The layout with one field set.

    path : as in the study file, and besides ``front_mount``, ``rear_mount``, ``entry``,
        ``masses`` (all pieces of equipment at once), ``station.NAME`` (the members that its ring
        has), ``tube.GROUP`` (whether the group has a tube of its own) and ``tube.GROUP.shape``.
    value : in the path's unit, or the option itself.

    Raises
    ------
    InputError
        No such field, no value, or a layout that contradicts itself.
    """
    if value is None:
        raise InputError(path, "nothing", "give a value")
    if path in _OF_VEHICLE:
        return replace(layout, **{path: value})
    if path == "masses":
        return replace(layout, masses=tuple(value))
    if path.startswith("station.") and path.count(".") == 1:
        there = {name: name in value for name in _RING_MEMBERS}
        return with_station(layout, path.removeprefix("station."), **there)
    if path.startswith("tube.") and path.count(".") == 1:
        return _with_own_tube(layout, path.removeprefix("tube."), own=bool(value))
    group = path.removeprefix("tube.").removesuffix(".shape")
    if path == f"tube.{group}.shape":
        return _with_shape(layout, group, value)
    return with_value(layout, path, value)


def equipment(rows: Sequence[Mapping[str, Any]]) -> tuple[Mass, ...]:
    """Pieces of equipment from rows with ``name, kg, x_mm, y_mm, z_mm``; empty cells count 0."""
    found = []
    for number, row in enumerate(rows, 1):
        name = str(row.get("name") or f"item {number}").strip()
        kg = float(row.get("kg") or 0.0)
        if kg < 0:
            raise InputError(f"mass.{name}.kg", f"{kg:g}", "give 0 or more")
        x, y, z = (float(row.get(f"{axis}_mm") or 0.0) / 1e3 for axis in "xyz")
        found.append(Mass(name, kg, x, y, z))
    return tuple(found)


def without_own_tube(layout: Layout) -> list[str]:
    """Groups that could be given a tube of their own."""
    known = dict.fromkeys((*GROUPS, *FALLBACK.values()))
    return [group for group in known if group not in layout.tubes]


def _with_own_tube(layout: Layout, group: str, *, own: bool) -> Layout:
    """A group given a tube of its own, at first the one it shared; or made to share again."""
    tubes = dict(layout.tubes)
    if not own:
        del tubes[group]
        shared = replace(layout, tubes=tubes)
        shared.tube_group(group)  # refused where there is none to share
        return shared
    shared_by = group
    while shared_by not in tubes and shared_by in FALLBACK:
        shared_by = FALLBACK[shared_by]
    tubes[group] = tubes.get(shared_by) or next(iter(tubes.values()))
    return replace(layout, tubes=tubes)


def nearest(stock: StockList, shape: str, sizes: Mapping[str, float]) -> StockSize:
    """The size of a list that comes nearest: in cross-section, and twice as much in outside size.

    The weights are a choice of ours: a tube that fits its neighbours is worth more than its mass.
    """
    area = float(section_values(shape, sizes).A)

    def off(size: StockSize) -> float:
        outside = math.log(_outside(size.sizes) / _outside(sizes))
        return 2 * abs(outside) + abs(math.log(size.area / area))

    return min(stock.sizes, key=off)


def snapped(layout: Layout, stock: Mapping[str, StockList]) -> Layout:
    """The layout with every tube from stock: sizes of its own go to the nearest on the lists.

    The list is the one that most tubes of that shape come from, else the first of the shape;
    a tube whose shape is on no list stays as it is.
    """
    used = [tube.stock.partition("/")[0] for tube in layout.tubes.values() if tube.stock]
    for group, tube in layout.tubes.items():
        fitting = [name for name, found in stock.items() if found.shape == tube.shape]
        if tube.stock or not fitting:
            continue
        size = nearest(stock[max(fitting, key=used.count)], tube.shape, tube.sizes)
        layout = with_value(layout, f"tube.{group}.stock", size)
    return layout


def _outside(sizes: Mapping[str, float]) -> float:
    """The greatest outside size [m]."""
    return max(value for name, value in sizes.items() if name not in ("wall", "corner_radius"))


def _with_shape(layout: Layout, group: str, shape: str) -> Layout:
    """Another shape of tube with sizes as near as can be to those it had."""
    if group not in layout.tubes:
        raise InputError(f"tube.{group}.shape", repr(shape), "choose a group that has a tube")
    if shape not in SHAPES:
        raise InputError(f"tube.{group}.shape", repr(shape), f"use one of: {', '.join(SHAPES)}")
    had = layout.tubes[group].sizes
    outside = _outside(had)
    wall = had.get("wall", outside / 10)
    sizes = {
        name: had.get(name, wall if name == "wall" else outside) for name in SHAPES[shape].sizes
    }
    return with_tube(layout, group, shape=shape, sizes=sizes, stock="")
