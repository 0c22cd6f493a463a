"""What varies, as things to type in and tick: ranges in a table, choices as lists of options.

The table offers what varied when the page was last built anew, so that a row unticked stays in
sight and can be ticked again; what is unticked is held at the value that the frame has.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

import pandas as pd
import streamlit as st

from explorer import state, varying, words
from explorer.form import rounded
from explorer.units import Units
from model.errors import DesignError
from sweeps.inputs import Input, option_label
from sweeps.study import Study, fields


def ranges(study: Study, units: Units) -> None:
    """The inputs with a range, as a table to edit; unticked ones are held fixed."""
    here = state.bench()
    offered = [given for given in state.offered() if not given.is_choice]
    if not offered:
        return
    now = {f.path: f.value for f in fields(study.layout)}
    quantities = [_quantity(given) for given in offered]
    key = f"ranges {here.units} {here.revision}"
    rows = pd.DataFrame(
        [
            {
                "Vary": given.path not in here.held_at_first,
                "Input": given.label,
                "From": _shown(given.low, quantity, units),
                "To": _shown(given.high, quantity, units),
                "Unit": units.unit(quantity) if quantity != "none" else "wheelbases",
                "Frame has": _shown(now.get(given.path), quantity, units),
            }
            for given, quantity in zip(offered, quantities, strict=True)
        ]
    )

    def take() -> None:
        changed, held = {}, set()
        for at, (given, quantity) in enumerate(zip(offered, quantities, strict=True)):
            cells = {**rows.iloc[at].to_dict(), **st.session_state[key]["edited_rows"].get(at, {})}
            changed[given.path] = _ranged(given, cells, quantity, units)
            if not cells["Vary"]:
                held.add(given.path)
        state.put_inputs(changed, held)

    st.data_editor(
        rows,
        key=key,
        on_change=guarded(take),
        hide_index=True,
        disabled=("Input", "Unit", "Frame has"),
        width="stretch",
        height=38 + 35 * len(offered),
        alt="Inputs that vary over a range, with from, to, unit and the value of the frame.",
        column_config={
            "Vary": st.column_config.CheckboxColumn("Vary", width=75),
            "Input": st.column_config.TextColumn("Over a range", width=220),
            "From": st.column_config.NumberColumn(width=80, format="%.6g"),
            "To": st.column_config.NumberColumn(width=80, format="%.6g"),
            "Unit": st.column_config.TextColumn(width=55),
            "Frame has": st.column_config.NumberColumn(width=80, format="%.6g"),
        },
    )


def choices(study: Study) -> None:
    """The inputs that are choices, each with its options; fewer than two hold it fixed."""
    here = state.bench()
    columns = st.columns(2, wrap=True)
    offered = [given for given in state.offered() if given.is_choice]
    for place, given in enumerate(offered):
        key = f"options {given.path} {here.revision}"
        options = {said(option): option for option in varying.possible(study.layout, given)}

        def take(
            given: Input = given, key: str = key, options: Mapping[str, Any] = options
        ) -> None:
            order = list(options)
            chosen = sorted(st.session_state[key], key=order.index)
            if len(chosen) < 2:
                state.put_inputs({}, {given.path})
            else:
                kept = replace(given, options=tuple(options[name] for name in chosen))
                state.put_inputs({given.path: kept}, set())

        held = given.path in here.held_at_first
        columns[place % 2].multiselect(
            words.plain(given.label),
            list(options),
            default=[] if held else [said(option) for option in given.options],
            key=key,
            on_change=guarded(take),
            placeholder="Held as the frame has it",
        )


def add_input(study: Study) -> None:
    """A further input, with a range to begin with."""
    offered = {given.path for given in state.offered()}
    found = {f.path: f.label for f in varying.addable(study) if f.path not in offered}
    key = f"add input {state.bench().revision}"

    def take() -> None:
        path = st.session_state[key]
        if path is not None:
            usual = state.original()
            state.put(study.with_input(varying.first_input(study.layout, path, usual)))

    st.selectbox(
        "Vary something else as well",
        list(found),
        index=None,
        format_func=lambda path: found[path],
        placeholder="Choose a dimension, bracing or tube",
        key=key,
        on_change=guarded(take),
    )


def said(option: Any) -> str:
    """An option as a person reads it: "25 x 1.5", "cross", "3"."""
    label = str(option_label(option))
    return label.partition("/")[2] or label


def guarded(take: Callable[[], None]) -> Callable[[], None]:
    """A callback that puts a fault on the bench instead of raising it; fields show anew."""

    def safely() -> None:
        here = state.bench()
        try:
            take()
        except DesignError as fault:
            here.trouble = fault
            here.revision += 1

    return safely


def _ranged(given: Input, cells: Mapping[str, Any], quantity: str, units: Units) -> Input:
    """The input with the range that stands in its row; untouched cells keep their exact value."""
    ends = []
    for side, old in (("From", given.low), ("To", given.high)):
        cell = cells[side]
        if cell is not None and cell == _shown(old, quantity, units):
            ends.append(old)
        else:
            ends.append(None if cell is None else units.stored(float(cell), quantity))
    return varying.ranged(given, *ends)


def _quantity(given: Input) -> str:
    return "length" if given.unit == "mm" else "none"


def _shown(value: Any, quantity: str, units: Units) -> float | None:
    return None if value is None else rounded(units.shown(float(value), quantity))
