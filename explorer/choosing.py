"""The parts of the Front page: target and colour, the frames picked, the front as a table."""

from __future__ import annotations

from typing import Any

import pandas as pd
import streamlit as st

from explorer import furniture, state, words
from explorer.form import rounded
from explorer.units import Units, quantity_of
from sweeps.front import Front, distance
from sweeps.inputs import Input
from sweeps.outputs import OUTPUTS
from sweeps.runs import Run

_NONE = "none"
_RESULTS = ("mass_kg", "twist_Nm_per_deg", "twist_per_kg", "bend_N_per_mm", "axial_share")


def controls(run: Run, rows: pd.DataFrame) -> str | None:
    """Target and colour; the column that colours the points."""
    here = state.bench()
    units = here.shown_units
    wanted, hue, _ = st.columns([1, 1.6, 1.4], gap="medium", wrap=True)
    key = f"target {here.revision}"

    def take() -> None:
        typed = st.session_state[key]
        given = None if not typed or typed <= 0 else units.stored(float(typed), "twist")
        state.set_target(given)

    with wanted:
        st.number_input(
            units.titled("Least twist stiffness", "twist"),
            value=None if here.target is None else rounded(units.shown(here.target, "twist")),
            step=100.0,
            format="%.6g",
            placeholder="no target",
            key=key,
            on_change=take,
        )
    labels = {given.path: given.label for given in run.study.inputs}
    extra = {name: words.capital(OUTPUTS[name].label) for name in _RESULTS[2:]}
    with hue:
        chosen: str = st.selectbox(
            "Colour by",
            [_NONE, *labels, *extra],
            format_func=lambda name: {_NONE: "Nothing", **labels, **extra}[name],
            key=f"colour {run.name}",
        )
    return None if chosen == _NONE else chosen


def label_of(run: Run, column: str | None) -> str | None:
    """A column in words."""
    if column is None or column in OUTPUTS:
        return None
    return run.study.input(column).label


def picked(run: Run, rows: pd.DataFrame, best: Front) -> None:
    """The frame picked in a sentence and the way on; beside those kept, as a table."""
    here = state.bench()
    match = rows[rows["frame"] == here.candidate]
    if match.empty:
        _pick_one(best)
        return
    frame = match.iloc[0]
    st.markdown(words.frame_against_front(frame, distance(best, frame), here.shown_units))
    with st.container(horizontal=True):
        label = f"Detail frame {int(frame['frame']):,}"
        if st.button(label, type="primary", icon=":material/arrow_forward:", key="next"):
            furniture.go("candidate")
        kept = here.candidate in here.beside
        if st.button("Keep to compare", icon=":material/add:", disabled=kept):
            state.keep_beside([*here.beside, int(frame["frame"])])
            st.rerun()
        if here.beside and st.button("Forget those kept", icon=":material/close:"):
            state.keep_beside([])
            st.rerun()
    if len(here.picked) > 1:
        st.dataframe(compared(run, rows, here.picked, here.shown_units), width="stretch")


def _pick_one(best: Front) -> None:
    """What to do while no frame is picked."""
    with st.container(horizontal=True, vertical_alignment="center"):
        if best.knee is not None and st.button(f"Take frame {best.knee:,}", type="primary"):
            state.pick(best.knee)
            st.rerun()
        st.markdown("Pick a frame: click one in the picture or tick one in the table."
                    + (f" Frame {best.knee:,} is the knee: beyond it, stiffness costs most mass."
                       if best.knee is not None else ""))  # fmt: skip


def compared(run: Run, rows: pd.DataFrame, frames: tuple[int, ...], units: Units) -> pd.DataFrame:
    """Frames side by side, as text: results, then inputs that differ."""
    found = rows[rows["frame"].isin(frames)].set_index("frame")
    there = [frame for frame in frames if frame in found.index]
    heads = [f"{letter} · frame {frame:,}" for letter, frame in zip("ABCD", there, strict=False)]
    lines: dict[str, list[str]] = {}
    for name in _RESULTS:
        shown = units.shown(found[name], quantity_of(name))
        lines[words.short_title(name, units)] = [words.bare(value) for value in shown.loc[there]]
    for given in run.study.inputs:
        values = found.loc[there, given.path].tolist()
        if len(set(values)) > 1:
            lines[words.titled_input(given, units)] = [
                words.input_value(given, value, units) for value in values
            ]
    return pd.DataFrame.from_dict(lines, orient="index", columns=heads)


def front_table(run: Run, best: Front, target: float | None) -> None:
    """The frames of the front that reach the target; a row ticked is picked."""
    here = state.bench()
    units = here.shown_units
    rows = best.rows
    if target is not None:
        rows = rows[rows["twist_Nm_per_deg"] >= target]
    if rows.empty:
        st.caption("No frame of the front reaches the target. Lower it, or widen the ranges.")
        return
    rows = rows.reset_index(drop=True)
    shown = pd.DataFrame({"Frame": rows["frame"]})
    for name in _RESULTS:
        shown[words.short_title(name, units)] = _rounded(rows[name], name, units)
    for given in run.study.inputs:
        shown[words.titled_input(given, units)] = [
            words.input_cell(given, value, units) for value in rows[given.path]
        ]
    key = f"front rows {target} {units.name} {here.revision}"

    def take() -> None:
        chosen = st.session_state[key]["selection"]["rows"]
        if chosen:
            state.pick(int(rows["frame"].iloc[chosen[0]]))

    st.subheader(f"On the front: {len(rows)} frames", anchor=False)
    st.dataframe(
        shown,
        key=key,
        hide_index=True,
        width="stretch",
        height=min(38 + 35 * len(shown), 320),
        on_select=take,
        selection_mode="single-row",
        column_config=_formats(shown, run.study.inputs, units),
    )


def _rounded(values: pd.Series[float], column: str, units: Units) -> pd.Series[float]:
    """A result for a table: as many places as can be told apart."""
    shown = units.shown(values, quantity_of(column))
    return shown.round(1 if float(shown.max()) < 1000 else 0)


def _formats(shown: pd.DataFrame, inputs: tuple[Input, ...], units: Units) -> dict[str, Any]:
    frame = st.column_config.NumberColumn(pinned=True, format="localized")
    formats: dict[str, Any] = {"Frame": frame}
    for name in _RESULTS:
        title = words.short_title(name, units)
        whole = bool((shown[title] % 1 == 0).all())
        formats[title] = st.column_config.NumberColumn(format="localized" if whole else "%.1f")
    for given in inputs:
        title = words.titled_input(given, units)
        if pd.api.types.is_numeric_dtype(shown[title]):
            formats[title] = st.column_config.NumberColumn(format="%.4g")
    return formats
