"""The frame on a canvas: a drawing goes in, the name of the member clicked comes out.

The canvas is our own small component: plain JavaScript on a two-dimensional canvas, inlined into
the page, so nothing is fetched and no graphics processor is needed. What it draws is decided
here; how it is turned, zoomed and pointed at is decided in ``assets/view3d.js``.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any, Literal

import numpy as np
import streamlit as st

from explorer import theme
from explorer.drawing import (
    FrameDrawing,
    Ghost,
    Label,
    Load,
    MemberKind,
    MemberValue,
    Station,
    Support,
    drawing_in_words,
    drawing_of,
)
from explorer.units import METRIC, Units

__all__ = [
    "FrameDrawing",
    "Ghost",
    "Label",
    "Load",
    "MemberKind",
    "MemberValue",
    "Station",
    "Support",
    "canvas_data",
    "drawing_in_words",
    "drawing_of",
    "frame_view",
]

Colour = Literal["plain", "value", "kind"]
View = Literal["3d", "side", "plan", "front"]

_HELP = (
    "Arrow keys turn the frame, with shift they move it; plus and minus zoom, 0 shows all, "
    "1 to 4 choose the 3D, side, plan and front views; n and p step through the members, "
    "Enter picks one, Escape picks none."
)
_ASSETS = Path(__file__).parent / "assets"
_SCRIPTS = ("view3d.js", "view3d_paint.js", "view3d_geometry.js")


def _asset(name: str) -> str:
    return (_ASSETS / name).read_text(encoding="utf-8")


_component = st.components.v2.component(
    "twistfront_frame",
    html=_asset("view3d.html"),
    css=_asset("view3d.css"),
    js="\n".join(_asset(name) for name in _SCRIPTS),
)


def frame_view(
    drawing: FrameDrawing,
    *,
    key: str,
    height: int = 440,
    colour: Colour = "plain",
    legend: bool = True,
    units: Units = METRIC,
    view: View = "3d",
    selected: str | None = None,
) -> str | None:
    """Draw a frame that can be turned; the name of the member picked in it, or None.

    key : name of the view in this session; what is picked and how the frame is turned stay with
        it when the drawing changes. height : of the canvas [px].
    colour : "plain" tubes true to scale, by "value" (colour and width) or by "kind" (colour and
        dashes; width by value when the drawing has one).
    view : where the eye starts. selected : the member to show as picked when the page, not the
        canvas, is the owner of what is picked.
    """
    kept = st.session_state.get(key) or {}
    shown = selected if selected is not None else kept.get("member")
    data = canvas_data(
        drawing, key=key, height=height, colour=colour, legend=legend, units=units, view=view
    )
    data["selected"] = drawing.names.index(shown) if shown in drawing.names else -1
    result = _component(key=key, data=data, on_member_change=lambda: None)
    picked = result.get("member")
    return picked if picked in drawing.names else None


def canvas_data(
    drawing: FrameDrawing,
    *,
    key: str,
    height: int = 440,
    colour: Colour = "plain",
    legend: bool = True,
    units: Units = METRIC,
    view: View = "3d",
) -> dict[str, Any]:
    """Everything the canvas is told, as plain data (lists, numbers, text)."""
    picked_out = set(drawing.picked_out)
    return {
        "key": key,
        "title": drawing.title,
        "words": drawing_in_words(drawing, units),
        "help": _HELP,
        "height": height,
        "colour": colour,
        "legend": legend,
        "view": view,
        "joints": _points(drawing.joints),
        "members": drawing.members.tolist(),
        "names": list(drawing.names),
        "details": _details(drawing, units),
        "outside": drawing.outside_mm.tolist(),
        "shown": drawing.shown.tolist(),
        "picked_out": [
            name in picked_out or group in picked_out
            for name, group in zip(drawing.names, drawing.groups, strict=True)
        ],
        "value": _value(drawing),
        "kind": _kind(drawing),
        "pickups": list(drawing.pickups),
        "supports": [[s.joint, s.held] for s in drawing.supports],
        "loads": [[a.joint, _direction(a.direction), a.words] for a in drawing.loads],
        "ghost": _ghost(drawing),
        "labels": [[list(label.at), label.words] for label in drawing.labels],
        "stations": [
            [station.name, drawing.foot_of(station).tolist()] for station in drawing.stations
        ],
        "ruler": _ruler(units),
        "light": theme.as_data(dark=False),
        "dark": theme.as_data(dark=True),
    }


def _points(xyz: Any) -> list[list[float]]:
    points: list[list[float]] = np.round(np.asarray(xyz, np.float64), 5).tolist()
    return points


def _details(drawing: FrameDrawing, units: Units) -> list[str]:
    details = []
    for m, length in enumerate(drawing.lengths):
        size = drawing.sizes[m] if drawing.sizes else ""
        tube = size or f"{units.write(float(drawing.outside_mm[m]), 'length')} outside"
        long = units.write(float(length) * 1000, "length")
        details.append(f"{drawing.groups[m]} · {tube} · {long} long")
    return details


def _value(drawing: FrameDrawing) -> dict[str, Any] | None:
    value = drawing.value
    if value is None:
        return None
    highest = value.highest or 1.0
    return {
        "words": value.words,
        "parts": [None if math.isnan(a) else round(a / highest, 4) for a in value.amount.tolist()],
        "texts": [value.write(m) for m in range(len(value.amount))],
        "ticks": [list(tick) for tick in value.ticks()],
    }


def _kind(drawing: FrameDrawing) -> dict[str, Any] | None:
    kind = drawing.kind
    if kind is None:
        return None
    return {"words": kind.words, "names": list(kind.names), "kind": kind.kind.tolist()}


def _direction(direction: tuple[float, float, float]) -> list[float]:
    length = math.hypot(*direction) or 1.0
    return [part / length for part in direction]


def _ghost(drawing: FrameDrawing) -> dict[str, Any] | None:
    ghost = drawing.ghost
    if ghost is None:
        return None
    return {
        "joints": _points(ghost.joints),
        "members": None if ghost.members is None else ghost.members.tolist(),
        "words": ghost.words,
        "swings": ghost.swings,
    }


def _ruler(units: Units) -> dict[str, Any]:
    steps = [10, 20, 50, 100, 200, 500, 1000, 2000]
    if units.unit("length") == "in":
        steps = [1, 2, 5, 10, 20, 50, 100]
    return {
        "unit": units.unit("length"),
        "per_metre": units.shown(1000.0, "length"),
        "steps": steps,
    }
