"""The part of a study file that says what varies: ranges, choices, links and groups."""

from __future__ import annotations

import difflib
from typing import Any

from model.errors import InputError
from model.frame.columns import known_paths
from model.frame.layout import Layout
from sweeps import study_values as read
from sweeps.catalogue import Catalogue
from sweeps.fields import Field, field, fields
from sweeps.inputs import SHAPES, Input, strip_unit, unit_of
from sweeps.links import Group, Link
from sweeps.study_values import Table

_KEYS = {
    "even": ("from", "to"),
    "triangular": ("from", "to", "peak"),
    "normal": ("from", "to", "mean", "sd"),
}


def read_vary(
    layout: Layout, vary: Table, shelf: Catalogue
) -> tuple[tuple[Input, ...], tuple[Link, ...]]:
    """Inputs and links of a ``[vary]`` table.

    Raises
    ------
    InputError
        Names the path, the value and what would do.
    """
    inputs, links = [], []
    for path, given in vary.items():
        about = _field(layout, path, "vary")
        if not isinstance(given, dict):
            raise InputError(
                f"vary.{path}", repr(given), "write { from = 1, to = 2 } or { choices = [...] }"
            )
        if "same_as" in given:
            links.append(_link(layout, path, given))
        else:
            inputs.append(_input(about, given, shelf))
    return tuple(inputs), tuple(links)


def read_groups(given: Table) -> tuple[Group, ...]:
    """Groups of a ``[judge_together]`` table."""
    found = []
    for name, paths in given.items():
        if not isinstance(paths, list) or not all(isinstance(p, str) for p in paths):
            raise InputError(f"judge_together.{name}", repr(paths), "give a list of paths")
        found.append(Group(name, tuple(paths)))
    return tuple(found)


def _field(layout: Layout, path: str, where: str) -> Field:
    paths = [f.path for f in fields(layout)]
    if path not in paths:
        inner = strip_unit(path)
        if inner in known_paths(layout) and unit_of(path) == "" and f"{path}_mm" in paths:
            name = f"{where}.{path}" if where == "vary" else where
            raise InputError(name, "no unit", f"write {path}_mm")
        near = difflib.get_close_matches(path, paths, 1, 0.5)
        raise InputError(where, repr(path), f"write {near[0]}" if near else "no such field")
    return field(layout, path)


def _link(layout: Layout, path: str, given: Table) -> Link:
    where = f"vary.{path}"
    read.known(where, given, ("same_as", "plus"))
    source = read.text(where, given, "same_as")
    _field(layout, source, f"{where}.same_as")
    return Link(path, source, read.number(where, given, "plus", 0.0))


def _input(about: Field, given: Table, shelf: Catalogue) -> Input:
    path = about.path
    where = f"vary.{path}"
    if about.kind == "stock":
        return Input(path, about.label, "", options=_stock_options(path, given, shelf))
    if "choices" in given:
        read.known(where, given, ("choices",))
        options = given["choices"]
        if not isinstance(options, list) or not options:
            raise InputError(f"{where}.choices", repr(options), "give a list of options")
        if about.kind == "material":
            options = [shelf.material(where, str(o)) for o in options]
        elif about.kind in ("number", "count"):
            for option in options:
                if not isinstance(option, int | float) or isinstance(option, bool):
                    raise InputError(f"{where}.choices", repr(option), "give numbers")
        return Input(path, about.label, about.unit, options=tuple(options))
    if about.kind != "number":
        read.known(where, given, ("choices", "same_as", "plus"))
        raise InputError(where, "no choices", "write { choices = [...] }")
    shape = read.text(where, given, "shape", "even")
    if shape not in SHAPES:
        raise InputError(f"{where}.shape", repr(shape), f"use one of: {', '.join(SHAPES)}")
    read.known(where, given, (*_KEYS[shape], "shape", "choices"))
    found = {key: read.number(where, given, key) for key in _KEYS[shape]}
    return Input(path, about.label, about.unit, found["from"], found["to"], (), shape,
                 found.get("peak"), found.get("mean"), found.get("sd"))  # fmt: skip


def _stock_options(path: str, given: Table, shelf: Catalogue) -> tuple[Any, ...]:
    where = f"vary.{path}"
    read.known(where, given, ("list", "from", "to", "sizes"))
    stock = shelf.stock_list(f"{where}.list", read.text(where, given, "list"))

    def size(label: Any) -> Any:
        return shelf.size(where, f"{stock.name}/{label}")

    if "sizes" in given:
        if not isinstance(given["sizes"], list) or not given["sizes"]:
            raise InputError(f"{where}.sizes", repr(given["sizes"]), "give a list of sizes")
        return tuple(sorted((size(label) for label in given["sizes"]), key=lambda s: s.area))
    low = size(read.text(where, given, "from")).area
    high = size(read.text(where, given, "to")).area
    return tuple(s for s in stock.sizes if low <= s.area <= high)
