"""A study: a layout, what may vary about it, and how many frames are asked for."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from model.frame.columns import Column
from model.frame.layout import Layout
from sweeps.fields import Field, field, fields, with_value
from sweeps.inputs import Input
from sweeps.links import Group, Link, check_groups, check_links, follower
from sweeps.sampling import METHODS, Design

__all__ = ["METHODS", "Field", "Group", "Link", "Study", "field", "fields", "input_values",
           "with_value"]  # fmt: skip

F64 = NDArray[np.float64]


@dataclass(frozen=True)
class Study:
    """What is asked.

    about : what the vehicle is, in words. samples : base samples of the sweep, a power of two.
    seed : 1 or more; the same seed gives the same frames.
    links : fields that follow another one and take no dimension of the design.
    groups : inputs that are judged together.
    """

    about: str
    layout: Layout
    inputs: tuple[Input, ...]
    samples: int = 1024
    seed: int = 1
    method: str = "sobol"
    links: tuple[Link, ...] = ()
    groups: tuple[Group, ...] = ()

    def __post_init__(self) -> None:
        if self.samples < 2 or self.samples & (self.samples - 1) or self.samples > 2**20:
            near = 2 ** max(1, min(20, round(float(np.log2(max(self.samples, 2))))))
            raise InputError("samples", str(self.samples), f"use a power of two, such as {near}")
        if self.seed < 1:
            raise InputError("seed", str(self.seed), "use 1 or more")
        if self.method not in METHODS:
            raise InputError("method", repr(self.method), f"use one of: {', '.join(METHODS)}")
        paths = [i.path for i in self.inputs] + [link.path for link in self.links]
        for path in paths:
            if paths.count(path) > 1:
                raise InputError(path, "given twice", "let each input vary once")
        check_links(self.links)
        self.drawn  # noqa: B018  links that do not fit are refused here
        check_groups(self.groups, [i.path for i in self.inputs])

    @property
    def name(self) -> str:
        """Name of the vehicle."""
        return self.layout.name

    def input(self, path: str) -> Input:
        """The input of that path."""
        for found in self.inputs:
            if found.path == path:
                return found
        raise InputError(
            "input", repr(path), f"use one of: {', '.join(i.path for i in self.inputs)}"
        )

    @property
    def drawn(self) -> tuple[tuple[Input, int | None], ...]:
        """Every field that is set from the unit cube, with its column there.

        The inputs in order, then the fields linked to one, as inputs of the same column; None as
        the column of a field linked to one that is held.
        """
        number = {i.path: k for k, i in enumerate(self.inputs)}
        linked = tuple(
            (follower(link, self.layout, self.inputs), number.get(link.same_as))
            for link in self.links
        )
        return (*((i, k) for k, i in enumerate(self.inputs)), *linked)

    @property
    def judged(self) -> tuple[Group, ...]:
        """What a sweep judges: the groups, and each other input by its label, in their order."""
        of = {path: group for group in self.groups for path in group.paths}
        alone = (of.get(i.path) or Group(i.label, (i.path,)) for i in self.inputs)
        return tuple(dict.fromkeys(alone))

    def design(self, second_order: bool = True) -> Design:
        """The rows to solve."""
        parts: tuple[int, ...] = ()
        if self.groups:
            place = {path: k for k, group in enumerate(self.judged) for path in group.paths}
            parts = tuple(place[i.path] for i in self.inputs)
        return Design(len(self.inputs), self.samples, second_order, self.seed, self.method, parts)

    def columns(self, unit: F64) -> dict[str, Column]:
        """Columns for ``model.frame.variants`` from rows in the unit cube (n, inputs)."""
        return {i.inner_path: i.column(_column(unit, k)) for i, k in self.drawn}

    def table(self, unit: F64) -> pd.DataFrame:
        """The same as people read them: file units, option labels; one column a field."""
        return pd.DataFrame({i.path: i.shown(_column(unit, k)) for i, k in self.drawn})

    def layout_at(self, unit: F64) -> Layout:
        """The layout of one row (inputs,) in the unit cube."""
        layout = self.layout
        for found, k in self.drawn:
            at = 0.0 if k is None else unit[k]
            value: Any
            if found.is_choice:
                value = found.options[int(found.picked(at))]
            else:
                value = float(found.numbers(at))
            layout = with_value(layout, found.path, value)
        return layout

    def with_layout(self, layout: Layout) -> Study:
        """The study of another layout; inputs and links whose path it no longer has are dropped."""
        known = {f.path for f in fields(layout)}
        inputs = tuple(i for i in self.inputs if i.path in known)
        links = tuple(x for x in self.links if x.path in known and x.same_as in known)
        return replace(
            self, layout=layout, inputs=inputs, links=links, groups=_judged(self.groups, inputs)
        )

    def with_input(self, given: Input) -> Study:
        """The study with an input added, or put in place of the one (or link) of the same path."""
        others = [i for i in self.inputs if i.path != given.path]
        place = next((k for k, i in enumerate(self.inputs) if i.path == given.path), len(others))
        links = tuple(link for link in self.links if link.path != given.path)
        return replace(self, inputs=(*others[:place], given, *others[place:]), links=links)

    def without_input(self, path: str) -> Study:
        """The study with an input held at the layout's own value; what is linked to it follows."""
        inputs = tuple(i for i in self.inputs if i.path != path)
        return replace(self, inputs=inputs, groups=_judged(self.groups, inputs))

    def with_link(self, link: Link) -> Study:
        """The study with a field that follows another one, in place of its own input or link."""
        held = self.without_input(link.path)
        links = (*(x for x in held.links if x.path != link.path), link)
        return replace(held, links=links)


def _column(unit: F64, k: int | None) -> F64:
    column: F64 = np.zeros(len(unit)) if k is None else unit[:, k]
    return column


def _judged(groups: tuple[Group, ...], inputs: tuple[Input, ...]) -> tuple[Group, ...]:
    """The groups without the paths that no longer vary, and without those left empty."""
    known = {i.path for i in inputs}
    kept = (replace(g, paths=tuple(p for p in g.paths if p in known)) for g in groups)
    return tuple(g for g in kept if g.paths)


def input_values(study: Study, unit: F64) -> Mapping[str, Any]:
    """Input values of one row, by path, as people read them."""
    row = study.table(unit[None]).iloc[0]
    return {str(path): value for path, value in row.items()}
