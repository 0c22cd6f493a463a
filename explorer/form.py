"""Fields of a layout as things to type in and choose from; each writes to the bench at once."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import pandas as pd
import streamlit as st

from explorer import state
from explorer.editing import equipment, nearest
from explorer.units import Units
from explorer.words import plain
from model.errors import InputError
from model.frame.vocabulary import BRACING, RIGID
from model.stock.sections import SHAPES
from sweeps.catalogue import catalogue
from sweeps.inputs import option_label
from sweeps.study import Field

OWN_SIZE = "own size"
"""Stands in the choice of stock lists for sizes typed in."""

_BRACING_WORDS = {
    "open": "open",
    "single": "one diagonal, turning over",
    "parallel": "one diagonal, all one way",
    "cross": "cross",
    "K": "K",
    "chevron": "chevron",
}


def number(path: str, label: str, value: float, quantity: str, step: float | None = None) -> None:
    """A number with its unit. value : in the path's unit; step : likewise, 10 mm by custom."""
    here = state.bench()
    units = here.shown_units
    key = _key(path)

    def take() -> None:
        typed = st.session_state[key]
        state.set_field(path, None if typed is None else units.stored(float(typed), quantity))

    st.number_input(
        units.titled(label, quantity),
        value=rounded(units.shown(float(here.waiting.get(path) or value), quantity)),
        step=step if step is not None else _step(quantity, units),
        format="%.6g" if units.unit("length") == "mm" else "%.5g",
        key=key,
        on_change=take,
    )


def whole(path: str, label: str, value: int) -> None:
    """A count."""
    key = _key(path)
    st.number_input(
        label,
        value=int(value),
        step=1,
        key=key,
        on_change=lambda: state.set_field(path, st.session_state[key]),
    )


def choice(
    path: str,
    label: str,
    options: Sequence[Any],
    value: Any,
    said: Callable[[Any], str] = str,
    take: Callable[[Any], Any] = lambda chosen: chosen,
) -> None:
    """One of several. take : from the option shown to the value of the field."""
    key = _key(path)
    listed = list(options) if value in options else [value, *options]
    st.selectbox(
        label,
        listed,
        index=listed.index(value),
        format_func=said,
        key=key,
        on_change=lambda: state.set_field(path, take(st.session_state[key])),
    )


def switch(path: str, label: str, value: bool) -> None:
    """Yes or no."""
    key = _key(path)
    st.toggle(
        label,
        value=value,
        key=key,
        on_change=lambda: state.set_field(path, bool(st.session_state[key])),
    )


def several(path: str, label: str, options: Sequence[str], value: Sequence[str]) -> None:
    """Any of several at once."""
    key = _key(path)
    st.pills(
        label,
        options,
        selection_mode="multi",
        default=value,
        key=key,
        on_change=lambda: state.set_field(path, tuple(st.session_state[key])),
    )


def field(found: Field) -> None:
    """A number, count or bracing, by the words of the thing it belongs to."""
    label, quantity = label_of(found), "length" if found.unit == "mm" else "none"
    if found.kind == "number":
        number(found.path, label, found.value, quantity)
    elif found.kind == "count":
        whole(found.path, label, found.value)
    else:
        bracing(found, label)


def bracing(field: Field, label: str) -> None:
    """How a face or ring is braced; only what it can have is offered."""
    name = field.path.rsplit(".", 1)[1]
    never = {"ring": "K", "floor": "chevron", "top": "chevron"}.get(name)
    options = [option for option in BRACING if option != never]
    choice(field.path, label, options, field.value, lambda option: _BRACING_WORDS[option])


def tube(group: str) -> None:
    """Everything about one group's tube: list and size or own sizes, material, ends."""
    here = state.bench()
    made = here.study.layout.tubes[group]
    path = f"tube.{group}"
    shelf = catalogue().stock
    from_list = made.stock.partition("/")[0] if made.stock else OWN_SIZE
    _stock_list(path, from_list, made.shape, dict(made.sizes))
    if from_list != OWN_SIZE:
        sizes = shelf[from_list].sizes
        choice(
            f"{path}.stock",
            f"Size [{shelf[from_list].unit}]",
            [size.label for size in sizes],
            made.stock.partition("/")[2],
            take=lambda label: next(size for size in sizes if size.label == label),
        )
    else:
        choice(f"{path}.shape", "Shape", list(SHAPES), made.shape, _capital)
        row = st.columns(len(SHAPES[made.shape].sizes), wrap=True)
        for name, column in zip(SHAPES[made.shape].sizes, row, strict=True):
            with column:
                size = f"{path}.{name}_mm"
                step = None if name != "wall" else 0.1
                if name == "wall" and here.units == "inch":
                    step = 0.005
                number(size, _capital(name), made.sizes[name] * 1e3, "length", step)
    materials = catalogue().materials
    choice(
        f"{path}.material",
        "Material",
        list(materials),
        made.material.name,
        take=lambda name: materials[name],
    )
    _ends(path, made.rotation)


def masses(units: Units) -> None:
    """The equipment as a table that can be edited, lengthened and shortened."""
    here = state.bench()
    key = _key("masses")
    rows = [
        {
            "name": mass.name,
            "kg": rounded(units.shown(mass.kg, "mass")),
            **{
                f"{axis}_mm": rounded(units.shown(getattr(mass, axis) * 1e3, "length"))
                for axis in "xyz"
            },
        }
        for mass in here.study.layout.masses
    ]

    def take() -> None:
        edits = st.session_state[key]
        kept = [dict(row) for row in rows]
        for at, cells in edits["edited_rows"].items():
            kept[int(at)].update(cells)
        kept = [row for at, row in enumerate(kept) if at not in edits["deleted_rows"]]
        kept += [dict(cells) for cells in edits["added_rows"] if cells]
        try:
            value = equipment([_stored(row, units) for row in kept])
        except InputError as found:
            here.fault = found
            return
        state.set_field("masses", value)
        here.revision += 1

    column = st.column_config.NumberColumn
    places = "%.0f" if units.unit("length") == "mm" else "%.1f"
    st.data_editor(
        pd.DataFrame(rows, columns=["name", "kg", "x_mm", "y_mm", "z_mm"]),
        key=key,
        on_change=take,
        num_rows="dynamic",
        hide_index=True,
        width="stretch",
        column_config={
            "name": st.column_config.TextColumn("What", width=100),
            "kg": column(units.unit("mass"), min_value=0, width=62, format="%.1f"),
            "x_mm": column("back", width=64, format=places),
            "y_mm": column("right", width=64, format=places),
            "z_mm": column("up", width=64, format=places),
        },
    )


def _stored(row: dict[str, Any], units: Units) -> dict[str, Any]:
    of = {"kg": "mass", "x_mm": "length", "y_mm": "length", "z_mm": "length"}
    return {
        name: units.stored(float(value), of[name]) if name in of and value is not None else value
        for name, value in row.items()
    }


def _stock_list(path: str, now: str, shape: str, sizes: dict[str, float]) -> None:
    """Which list the sizes come from; a new list gives the size nearest in cross-section."""
    shelf = catalogue().stock
    key = _key(f"{path}.list")

    def take() -> None:
        chosen = st.session_state[key]
        if chosen == OWN_SIZE:
            state.set_field(f"{path}.shape", shape)
        else:
            state.set_field(f"{path}.stock", nearest(shelf[chosen], shape, sizes))
        state.bench().revision += 1

    options = [*shelf, OWN_SIZE]
    st.selectbox(
        "From the list",
        options,
        index=options.index(now),
        format_func=lambda name: shelf[name].title if name in shelf else "Sizes of your own",
        key=key,
        on_change=take,
    )


def _ends(path: str, rotation: float) -> None:
    """Whether member ends are welded, pinned or give under rotation."""
    kinds = {"welded": RIGID, "pinned": 0.0, "springy": 5e4}
    now = "welded" if rotation == RIGID else "pinned" if rotation == 0 else "springy"
    said = {
        "welded": "Welded, rigid",
        "pinned": "Pinned",
        "springy": "Welded, but give a little",
    }
    choice(
        f"{path}.rotation",
        "Ends",
        list(kinds),
        now,
        lambda name: said[name],
        take=lambda name: kinds[name],
    )
    if now == "springy":
        field = f"{path}.rotation_Nm_per_rad"
        number(field, "Stiffness of an end [N·m/rad]", rotation, "none", 1000.0)


def rounded(value: float) -> float:
    """A number without the dust of a change of units."""
    return float(f"{value:.7g}")


def label_of(field: Field) -> str:
    """A field's words without the name of the thing it belongs to."""
    words = field.label
    for start in (f"{field.owner}, ", f"Position of {field.owner}"):
        if words.lower().startswith(start.lower()):
            words = words[len(start) :] or "Position [wheelbases]"
    return plain(_capital(words))


def _key(path: str) -> str:
    here = state.bench()
    return f"{path} {here.units} {here.revision}"


def _step(quantity: str, units: Units) -> float:
    if quantity == "length":
        return 0.25 if units.unit("length") == "in" else 10.0
    return 0.01


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


__all__ = ["bracing", "choice", "label_of", "masses", "number", "option_label", "tube", "whole"]
