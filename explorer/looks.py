"""What pages show of one frame: key numbers, drawing, where it twists, what its groups do."""

from __future__ import annotations

from dataclasses import replace
from typing import Any, Literal

import numpy as np
import pandas as pd
import streamlit as st

from explorer.detail_drawing import KINDS, drawing_of_detail, outside_mm
from explorer.drawing import FrameDrawing, Station, drawing_of
from explorer.numbers import decimals, number, percent
from explorer.units import Units
from model.errors import DesignError
from model.frame.layout import Layout
from model.frame.variants import one
from model.results.detail import Detail, examine, own_tubes

_KEY_NUMBERS: tuple[tuple[str, str, str, Literal["normal", "inverse", "off"]], ...] = (
    ("Mass", "mass", "mass", "inverse"),
    ("Twist stiffness", "twist", "twist", "normal"),
    ("Bending stiffness", "bend", "bend", "normal"),
    ("Axial share", "share", "axial_share", "off"),
)


def couple(units: Units) -> float:
    """Couple at which the twist along the frame is shown, a round one in these units [N·m]."""
    return units.stored(1000.0, "moment")


def examined(layout: Layout) -> tuple[Detail | None, DesignError | None]:
    """A frame looked at closely, or why that cannot be."""
    try:
        return examine(layout), None
    except DesignError as fault:
        return None, fault


def key_numbers(detail: Detail, before: Detail | None, units: Units) -> None:
    """Mass, twist and bending stiffness, axial share; with the change against another frame."""
    row = st.container(horizontal=True)
    for label, quantity, name, better in _KEY_NUMBERS:
        share = quantity == "share"
        value, change = float(getattr(detail, name)), None
        then = value if before is None else float(getattr(before, name))
        if number(value) != number(then):
            places = 0 if share else decimals(units.shown(value, quantity))
            change = f"{units.shown(value - then, quantity):+,.{places}f}"
            change = change if change.strip("+-0.,") else None
        row.metric(
            label if share else units.titled(label, quantity),
            percent(value) if share else number(units.shown(value, quantity)),
            delta=change,
            delta_color=better,
            border=True,
        )


def drawing(layout: Layout, detail: Detail | None) -> FrameDrawing:
    """The drawing of a frame, even of one that does not hold together."""
    if detail is not None:
        return replace(drawing_of_detail(detail, layout.name), value=None, kind=None)
    batch = one(layout)
    tubes = own_tubes(layout, batch)
    skeleton, xyz = batch.skeleton, batch.xyz[0]
    return drawing_of(
        skeleton,
        xyz,
        {group: outside_mm(tube) for group, tube in tubes.items()},
        title=layout.name,
        present=batch.present[0],
        sizes={group: tube.label for group, tube in tubes.items()},
        stations=[Station(s.name, s.at * layout.wheelbase) for s in layout.stations],
        axles=(float(xyz[skeleton.front[0], 0]), float(xyz[skeleton.rear[0], 0])),
    )


def profile_tables(detail: Detail, units: Units) -> tuple[pd.DataFrame, pd.DataFrame]:
    """Twist angle at every ring under ``couple``, and where the stations are."""
    found, layout = detail.profile, detail.layout
    still = found.angle[int(np.argmax(found.x >= layout.wheelbase - 1e-9))]
    profile = pd.DataFrame(
        {
            "position_mm": found.x * 1e3,
            "angle_deg": np.abs(np.degrees((found.angle - still) * couple(units))),
        }
    )
    stations = pd.DataFrame(
        {
            "name": [s.name for s in layout.stations],
            "position_mm": [s.at * layout.wheelbase * 1e3 for s in layout.stations],
        }
    )
    return profile, stations


def group_table(detail: Detail, units: Units) -> pd.DataFrame:
    """Tube, mass and part of the strain energy of every group, the greatest energy first."""
    skeleton, masses = detail.batch.skeleton, detail.bill.by_group
    tubes = own_tubes(detail.layout, detail.batch)
    energy = np.zeros(len(skeleton.groups))
    np.add.at(energy, skeleton.group, detail.share)
    rows = [
        {
            "Group": name,
            "Tube": f"{tubes[name].shape} {tubes[name].label}",
            "Material": tubes[name].material.name,
            "Mass": float(units.shown(masses[name], "mass")),
            "Mass share": masses[name] / detail.mass,
            "Energy share": float(energy[g]),
        }
        for g, name in enumerate(skeleton.groups)
        if name in masses
    ]
    return pd.DataFrame(rows).sort_values("Energy share", ascending=False, ignore_index=True)


def energy_table(detail: Detail) -> pd.DataFrame:
    """Share of the strain energy under twist by group and kind: ``group, kind, share``."""
    skeleton = detail.batch.skeleton
    parts = np.zeros((len(skeleton.groups), len(KINDS)))
    np.add.at(parts, skeleton.group, detail.energy)
    return pd.DataFrame(
        {"group": group, "kind": kind, "share": float(parts[g, k])}
        for g, group in enumerate(skeleton.groups)
        for k, kind in enumerate(KINDS)
        if parts[:, k].any() and parts[g].any()
    )


def group_columns(units: Units) -> dict[str, Any]:
    """How the columns of ``group_table`` are shown."""

    def share() -> Any:
        return st.column_config.ProgressColumn(format="percent", min_value=0.0, max_value=1.0)

    return {
        "Mass": st.column_config.NumberColumn(units.titled("Mass", "mass"), format="%.2f"),
        "Mass share": share(),
        "Energy share": share(),
    }
