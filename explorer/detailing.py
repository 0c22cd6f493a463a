"""The parts of the Candidate page: what if, the tables of the workshop, files to take away."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any, Literal

import pandas as pd
import streamlit as st

from explorer import handover, results, state, words
from explorer.detail_drawing import drawing_of_detail
from explorer.exports import (
    CUT_COLUMNS,
    JOINT_COLUMNS,
    STOCK_COLUMNS,
    centre_lines_dxf,
    csv_text,
    cut_rows,
    joint_rows,
    stock_rows,
)
from explorer.report import Subject, report_html
from explorer.subjects import frame_of_run, starting_values
from explorer.units import Units
from explorer.views_svg import Colour, View, view_svg
from model.results.detail import Detail
from model.results.whatif import WhatIf
from sweeps.runs import Run

SAFETY = (
    "A stiffness study is no proof of strength, of welds or of occupant protection. The rules "
    "that apply to the vehicle come first, and a licensed engineer signs where they ask for one."
)
"""What stands above all other cautions."""

_KINDS = {"add": "Add", "exchange": "Brace otherwise", "remove": "Leave out"}
_EVERYTHING = "all.zip"
_FILES = {
    "cut-list.csv": ("Cut list (CSV)", "text/csv"),
    "joints.csv": ("Joints (CSV)", "text/csv"),
    "stock.csv": ("Tube to buy (CSV)", "text/csv"),
    "report.html": ("Report (HTML)", "text/html"),
    "frame.json": ("Frame file (JSON)", "application/json"),
    "centre-lines.dxf": ("Centre lines (DXF)", "image/vnd.dxf"),
    "isometric.svg": ("3D view (SVG)", "image/svg+xml"),
    "side.svg": ("Side view (SVG)", "image/svg+xml"),
    "plan.svg": ("Plan (SVG)", "image/svg+xml"),
    "front.svg": ("Front view (SVG)", "image/svg+xml"),
    _EVERYTHING: ("Everything (ZIP)", "application/zip"),
}
_VIEWS: Mapping[str, View] = {
    "isometric.svg": "3d",
    "side.svg": "side",
    "plan.svg": "plan",
    "front.svg": "front",
}


def as_row(detail: Detail) -> pd.Series[Any]:
    """A frame looked at closely as a row of results."""
    return pd.Series({"mass_kg": detail.mass, "twist_Nm_per_deg": detail.twist})


def colour_by() -> Literal["value", "kind"]:
    """By what the members are coloured."""
    said = {"value": "Share of the strain energy", "kind": "How each member carries the twist"}
    chosen = st.segmented_control("Colour", list(said), default="value", required=True,
                                  format_func=lambda name: said[name],
                                  label_visibility="collapsed", key="colour members")  # fmt: skip
    return "kind" if chosen == "kind" else "value"


# --- what if --------------------------------------------------------------------------------


def what_if(run: Run, frame: int, units: Units) -> None:
    """Braces that could be added, changed or left out, best first; bracing can be tried on."""
    here = state.bench()
    braced = here.braced
    found = results.what_if(run, frame, braced, here.snapped)
    present = [k for k in _KINDS if any(change.kind == k for change in found.changes)]
    kind = st.segmented_control("What to change", present, default=present[0], required=True,
                                format_func=lambda name: _KINDS[name],
                                label_visibility="collapsed", key="what if kind")  # fmt: skip
    shown, numbers = changes_table(found, kind, units)
    key = f"what if {frame} {kind} {sorted(braced.items())}"
    event = st.dataframe(
        shown,
        key=key,
        hide_index=True,
        width="stretch",
        height=min(38 + 35 * len(shown), 320),
        on_select="rerun",
        selection_mode="single-row",
        column_config=_formats(units),
    )
    chosen = event["selection"]["rows"]
    change = found.changes[numbers[chosen[0]]] if chosen else None
    with st.container(horizontal=True, vertical_alignment="center"):
        ready = change is not None and bool(change.faces)
        if st.button("Try it on this frame", disabled=not ready, icon=":material/build:"):
            assert change is not None
            state.brace(dict.fromkeys(change.faces, change.bracing))
            st.rerun()
        if braced and st.button("As it was in the sweep", icon=":material/undo:"):
            state.brace({})
            st.rerun()
        if change is not None and not change.faces:
            st.caption("A single member cannot be tried on: bracing goes by whole faces.")
        elif change is None:
            st.caption("Each line is exact for that change alone; gains do not add up. Tick one "
                       "that braces a face to try it.")  # fmt: skip


def changes_table(found: WhatIf, kind: str, units: Units) -> tuple[pd.DataFrame, list[int]]:
    """Changes of one kind as a person reads them, and their numbers in ``found``."""
    numbers = [k for k, change in enumerate(found.changes) if change.kind == kind]
    standing = [k for k in numbers if found.twist[k] > 0]
    rows = [
        {
            "Change": words.capital(found.changes[k].name),
            "Twist": float(units.shown(float(found.gain[k]), "twist")),
            "Mass": float(units.shown(float(found.mass[k]), "mass")),
            "Ratio": float(units.shown(float(found.gain_per_kg[k]), "twist per mass")),
            "Then": float(units.shown(float(found.twist[k]), "twist")),
        }
        for k in standing
    ]
    return pd.DataFrame(rows, columns=["Change", "Twist", "Mass", "Ratio", "Then"]), standing


def _formats(units: Units) -> dict[str, Any]:
    column = st.column_config.NumberColumn
    return {
        "Change": st.column_config.TextColumn(width=330),
        "Twist": column(units.titled("Twist", "twist"), format="%+.0f", width=130),
        "Mass": column(units.titled("Mass", "mass"), format="%+.2f", width=100),
        "Ratio": column(
            units.titled(f"Twist per {units.unit('mass')}", "twist"), format="%.0f", width=160
        ),
        "Then": column(units.titled("Twist then", "twist"), format="%.0f", width=150),
    }


# --- to build it ----------------------------------------------------------------------------


def to_build(detail: Detail) -> None:
    """Cut list, tube to buy and joints, in the units of the workshop's files."""
    cuts, stock, joints = st.tabs(["Cut list", "Tube to buy", "Joints"])
    with cuts:
        rows = pd.DataFrame(cut_rows(detail.bill))
        st.dataframe(_titled(rows, _CUT), hide_index=True, width="stretch", height=320)
        st.caption("Lengths run between joint centres; notch and trim to the tubes that meet.")
    with stock:
        rows = pd.DataFrame(stock_rows(detail.bill))
        st.dataframe(_titled(rows, _STOCK), hide_index=True, width="stretch")
        st.caption("Net, without cutting waste.")
    with joints:
        rows = pd.DataFrame(joint_rows(detail.bill))
        st.dataframe(_titled(rows, _JOINTS), hide_index=True, width="stretch", height=320)


_CUT = {
    "item": "Item",
    "quantity": "Quantity",
    "length_mm": "Length [mm]",
    "size_mm": "Size [mm]",
    "shape": "Shape",
    "group": "Group",
    "material": "Material",
    "mass_kg": "Mass [kg]",
    "end_joints": "Between joints",
}
_STOCK = {
    "shape": "Shape",
    "size_mm": "Size [mm]",
    "material": "Material",
    "length_m": "Length [m]",
    "mass_kg": "Mass [kg]",
    "pieces": "Pieces",
}
_JOINTS = {
    "joint": "Joint",
    "x_mm": "Back [mm]",
    "y_mm": "Right [mm]",
    "z_mm": "Up [mm]",
    "members_meeting": "Members",
    "members": "Which meet here",
}


def _titled(rows: pd.DataFrame, titles: Mapping[str, str]) -> pd.DataFrame:
    return rows[list(titles)].rename(columns=titles)


def downloads(run: Run, frame: int, detail: Detail, units: Units) -> None:
    """Everything about the frame as files; each is made when it is asked for."""
    stem = f"{words.file_name(run.study.name)}-frame-{frame}"
    subject = _subject(run, frame)

    def data_of(name: str) -> Callable[[], bytes]:
        if name == _EVERYTHING:
            return lambda: handover.archive(handover.files(detail, subject, units), stem)
        return lambda: _text(name, detail, subject, units).encode("utf-8")

    def button(name: str, kind: Literal["primary", "secondary"] = "secondary") -> None:
        label, mime = _FILES[name]
        st.download_button(label, data_of(name), file_name=f"{stem}-{name}", mime=mime, type=kind,
                           key=f"take {name}", on_click="ignore",
                           icon=":material/download:")  # fmt: skip

    with st.container(horizontal=True):
        button("cut-list.csv", "primary")
        button("report.html")
        button(_EVERYTHING)
        with st.popover("One of the other files", icon=":material/description:"):
            for name in _FILES:
                if name not in ("cut-list.csv", "report.html", _EVERYTHING):
                    button(name)


def _text(name: str, detail: Detail, subject: Subject, units: Units) -> str:
    """The text of one file, made alone: the report takes its time."""
    makers: dict[str, Callable[[], str]] = {
        "cut-list.csv": lambda: csv_text(CUT_COLUMNS, cut_rows(detail.bill)),
        "joints.csv": lambda: csv_text(JOINT_COLUMNS, joint_rows(detail.bill)),
        "stock.csv": lambda: csv_text(STOCK_COLUMNS, stock_rows(detail.bill)),
        "frame.json": lambda: handover.frame_file(detail, subject),
        "centre-lines.dxf": lambda: centre_lines_dxf(detail.batch),
        "report.html": lambda: report_html(detail, subject, units),
    }
    if name in makers:
        return makers[name]()
    view = _VIEWS[name]
    drawing = drawing_of_detail(detail, f"{subject.name}: {subject.title}")
    colour: Colour = "value" if view == "3d" else "plain"
    return view_svg(drawing, view, units=units, colour=colour, ident=view)


def _subject(run: Run, frame: int) -> Subject:
    """What the files are about: the frame of the run, with what was changed about it here."""
    here = state.bench()
    subject = frame_of_run(run, frame)
    changed = [(words.face(path), bracing) for path, bracing in here.braced.items()]
    if here.snapped:
        changed.append(("Tubes", "nearest stock sizes"))
    if not changed:
        return subject
    return replace(subject, title=f"{subject.title}, changed", inputs=(*subject.inputs, *changed))


def inputs_table(run: Run, frame: int, units: Units) -> pd.DataFrame:
    """What was chosen for this frame, and what the starting frame has."""
    rows = results.solved(run)
    row = rows[rows["frame"] == frame].iloc[0]
    start = starting_values(run.study)
    return pd.DataFrame(
        {
            "Input": [given.label for given in run.study.inputs],
            "Unit": [units.unit("length") if g.unit == "mm" else "" for g in run.study.inputs],
            "This frame": [words.input_value(g, row[g.path], units) for g in run.study.inputs],
            "Start": [
                words.input_value(g, start[g.path], units) or "own size" for g in run.study.inputs
            ],
        }
    )


INPUT_COLUMNS = {
    "Input": st.column_config.TextColumn(width=195),
    "Unit": st.column_config.TextColumn(width=42),
    "This frame": st.column_config.TextColumn(width=78, alignment="right"),
    "Start": st.column_config.TextColumn(width=68, alignment="right"),
}
"""How the columns of ``inputs_table`` are shown."""


def stock_switch(run: Run, frame: int, detail: Detail) -> None:
    """Whether tubes are taken from stock lists, where the frame has sizes between them."""
    here = state.bench()
    loose = [
        group for group in detail.batch.skeleton.groups if not detail.layout.tubes[group].stock
    ]
    if not loose and not here.snapped:
        return
    st.toggle(
        "Take the tubes from stock lists",
        value=here.snapped,
        key=f"snap {run.name} {frame}",
        on_change=lambda: state.snap(not here.snapped),
        help="Sizes between those of the lists go to the nearest; mass and stiffness follow.",
    )


def go_on_from(run: Run, detail: Detail) -> None:
    """Make this frame the one on the Frame page, with the ranges of its sweep."""
    state.put_other(run.study.with_layout(detail.layout))
