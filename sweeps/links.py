"""Fields that follow another one, and inputs that are judged together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

from model.errors import InputError
from model.frame.layout import Layout
from model.stock.tubes import StockSize
from sweeps.fields import field
from sweeps.inputs import Input


@dataclass(frozen=True)
class Link:
    """A field that follows another one.

    path, same_as : with their units. plus : added to a number, in the unit of the path.
    """

    path: str
    same_as: str
    plus: float = 0.0


@dataclass(frozen=True)
class Group:
    """Inputs that are judged together: they change at once, and have one share of the result."""

    name: str
    paths: tuple[str, ...]


def follower(link: Link, layout: Layout, inputs: Sequence[Input]) -> Input:
    """A linked field as an input of the column that it follows.

    One that follows a held field is a choice of a single option.

    Raises
    ------
    InputError
        The two do not fit each other.
    """
    own, source = field(layout, link.path), field(layout, link.same_as)
    if link.path == link.same_as:
        raise InputError(f"{link.path}.same_as", repr(link.same_as), "name another field")
    alike = {"count": "number"}
    if own.unit != source.unit or (
        own.kind != source.kind and alike.get(source.kind, source.kind) != own.kind
    ):
        raise InputError(
            f"{link.path}.same_as", repr(link.same_as), f"name a field that is a {own.kind} too"
        )
    numeric = own.kind in ("number", "count")
    if link.plus and not numeric:
        raise InputError(f"{link.path}.plus", f"{link.plus:g}", "leave it out: this is no number")
    given = next((i for i in inputs if i.path == link.same_as), None)
    if given is None:
        options: tuple[Any, ...] = (_held(layout, link.same_as, source.kind, source.value),)
        given = Input(link.same_as, source.label, source.unit, options=options)
    moved = replace(given, path=link.path, label=own.label)
    if link.plus == 0:
        return moved
    if moved.is_choice:
        return replace(moved, options=tuple(option + link.plus for option in moved.options))
    plus = link.plus
    return replace(
        moved,
        low=_add(moved.low, plus),
        high=_add(moved.high, plus),
        peak=_add(moved.peak, plus),
        mean=_add(moved.mean, plus),
    )


def _add(value: float | None, plus: float) -> float | None:
    return None if value is None else value + plus


def _held(layout: Layout, path: str, kind: str, value: Any) -> Any:
    """The layout's own value of a field, as an option."""
    if kind not in ("stock", "material"):
        return value
    tube = layout.tubes[path.split(".")[1]]
    if kind == "material":
        return tube.material
    if not tube.stock:
        raise InputError(
            f"{path}", "a tube of its own sizes", "give the tube a stock size, or link its sizes"
        )
    list_name, _, label = tube.stock.partition("/")
    return StockSize(label, tube.shape, tube.sizes, list_name)


def check_links(links: Sequence[Link]) -> None:
    """Refuse a link to a field that is a link itself."""
    follows = {link.path: link.same_as for link in links}
    for link in links:
        if link.same_as in follows:
            raise InputError(
                f"{link.path}.same_as",
                repr(link.same_as),
                f"that is a link itself; name {follows[link.same_as]}",
            )


def check_groups(groups: Sequence[Group], paths: Sequence[str]) -> None:
    """Refuse groups that name what does not vary, or an input twice."""
    taken: dict[str, str] = {}
    names = [group.name for group in groups]
    for group in groups:
        where = f"judge_together.{group.name}"
        if names.count(group.name) > 1:
            raise InputError(where, "given twice", "give each group a name of its own")
        if not group.paths:
            raise InputError(where, "empty", "name the inputs to judge together")
        for path in group.paths:
            if path not in paths:
                raise InputError(where, repr(path), "name an input under [vary] that is no link")
            if path in taken:
                raise InputError(where, repr(path), f"it is in {taken[path]} already")
            taken[path] = group.name
