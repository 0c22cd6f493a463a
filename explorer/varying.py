"""What a sweep may vary about a layout: the inputs that can be added, and their options."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from explorer.editing import nearest
from model.errors import InputError
from model.frame.consistency import check_face, check_ring
from model.frame.layout import Layout
from model.frame.vocabulary import BRACING, MOST_BAYS
from model.stock.tubes import StockSize
from sweeps.catalogue import Catalogue, catalogue
from sweeps.inputs import Input
from sweeps.study import Field, Study, field, fields

_USUAL = ("open", "single", "cross")
_SIZES_AROUND = 2


def addable(study: Study) -> list[Field]:
    """Fields that the sweep holds fixed and may vary, in the order of the layout.

    A tube varies either by its stock size or by its own sizes.
    """
    taken = {given.path for given in study.inputs}
    by_stock = {p.removesuffix("stock") for p in taken if p.endswith(".stock")}
    by_size = {p.rpartition(".")[0] + "." for p in taken if p.startswith("tube.")
               and p.endswith("_mm")}  # fmt: skip
    found = []
    for one in fields(study.layout):
        owner = one.path.rpartition(".")[0] + "."
        clash = (one.kind == "stock" and owner in by_size) or (
            one.place == "tube" and one.kind == "number" and owner in by_stock
        )
        if one.path not in taken and not clash:
            found.append(one)
    return found


def first_input(layout: Layout, path: str, usual: Study | None = None) -> Input:
    """A field as an input, with the range of the starting vehicle or a sensible one.

    Raises
    ------
    InputError
        The layout has no such field.
    """
    one = field(layout, path)
    for given in usual.inputs if usual is not None else ():
        if given.path == path:
            return given
    if one.kind == "number":
        return Input(path, one.label, one.unit, float(one.low), float(one.high))
    if one.kind == "count":
        near = range(max(1, int(one.value) - 1), min(MOST_BAYS, int(one.value) + 1) + 1)
        return Input(path, one.label, one.unit, options=tuple(near))
    options: Sequence[Any]
    if one.kind == "bracing":
        options = [option for option in _USUAL if option in bracings(layout, path)]
    elif one.kind == "material":
        options = list(catalogue().materials.values())
    else:
        options = _around(layout, one.owner, catalogue())
    return Input(path, one.label, one.unit, options=tuple(options))


def possible(layout: Layout, given: Input) -> list[Any]:
    """All that a choice could be among, those it is among included."""
    one = field(layout, given.path)
    if one.kind == "count":
        found: list[Any] = list(range(1, 9))
    elif one.kind == "bracing":
        found = list(bracings(layout, given.path))
    elif one.kind == "material":
        found = list(catalogue().materials.values())
    else:
        shelf = catalogue().stock
        lists = {o.list_name for o in given.options if isinstance(o, StockSize)}
        found = [size for name in shelf if name in lists for size in shelf[name].sizes]
    return [*found, *(option for option in given.options if option not in found)]


def bracings(layout: Layout, path: str) -> list[str]:
    """Bracings that a face or ring can have; sides count as their left one."""
    kind, owner, name = path.split(".")
    found = []
    for option in BRACING:
        try:
            if kind == "station":
                check_ring(layout.station(owner), option)
            else:
                check_face(layout.span(owner), "left" if name == "sides" else name, option)
        except InputError:
            continue
        found.append(option)
    return found


def ranged(given: Input, low: float | None, high: float | None) -> Input:
    """An input with another range, in the unit of its path."""
    if low is None or high is None:
        raise InputError(given.path, "nothing", "give from and to")
    return replace(given, low=float(low), high=float(high))


def _around(layout: Layout, group: str, shelf: Catalogue) -> list[StockSize]:
    tube = layout.tubes[group]
    name = tube.stock.partition("/")[0]
    fitting = [s for s in shelf.stock.values() if s.shape == tube.shape] or [*shelf.stock.values()]
    chosen = shelf.stock[name] if name in shelf.stock else fitting[0]
    middle = chosen.sizes.index(nearest(chosen, tube.shape, tube.sizes))
    return list(chosen.sizes[max(0, middle - _SIZES_AROUND) : middle + _SIZES_AROUND + 1])
