"""Side, plan, front and 3D views of a frame as SVG text: for reports, downloads and printing.

All views are parallel projections. Dimensions run between joint centres; nothing refers to the
outside of a tube. The text is valid XML without style sheets, scripts or references, so that it
stands alone as a file and inside a page.
"""

from __future__ import annotations

import math
import xml.etree.ElementTree as ET
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from explorer import drafting, theme
from explorer.drawing import FrameDrawing, drawing_in_words
from explorer.numbers import number
from explorer.units import METRIC, Units
from model.frame.skeleton import F64

View = Literal["side", "plan", "front", "3d"]
Colour = Literal["plain", "value", "kind"]

VIEWS: dict[View, str] = {
    "side": "Left side",
    "plan": "Plan",
    "front": "Front",
    "3d": "From the front left",
}
_EYES: dict[View, tuple[float, float]] = {  # angle round z, height above the horizon [deg]
    "side": (-90.0, 0.0),
    "plan": (-90.0, 90.0),
    "front": (180.0, 0.0),
    "3d": (-122.0, 24.0),
}
_FONT = "'Source Sans 3', 'Segoe UI', Helvetica, Arial, sans-serif"
_ROW = 28.0  # between two dimension lines [px]


@dataclass(frozen=True)
class _Style:
    look: theme.Colours
    colour: Colour
    units: Units
    dimensions: bool
    noted: bool = False
    """True where the unit of the dimensions is written beside the title of the view."""


@dataclass(frozen=True, eq=False)
class _Seen:
    """A view: the joints on its plane (x to the right, y down) and how near they are [m]."""

    view: View
    flat: F64
    near: F64
    low: F64
    size: F64


@dataclass(frozen=True)
class _Place:
    """Where a view stands in the picture: its rectangle [px] and pixels for one metre."""

    left: float
    top: float
    right: float
    bottom: float
    scale: float


def view_svg(
    drawing: FrameDrawing,
    view: View,
    *,
    units: Units = METRIC,
    colour: Colour = "plain",
    dimensions: bool = True,
    width: int = 900,
    dark: bool = False,
    ident: str = "frame",
) -> str:
    """One view of a frame as SVG text.

    dimensions : with wheelbase, length, width and height where the view shows them true.
    width : of the picture [px]; the height follows. dark : for a dark page (paper is white).
    ident : begins the ids in the text; different for every picture in one page.
    """
    sized = dimensions and view != "3d"
    style = _Style(theme.colours(dark), colour, units, sized, noted=sized)
    seen = _seen(drawing, view)
    left, top, right, bottom = _margins(drawing, view, style)
    scale = min((width - left - right) / seen.size[0], 430 / seen.size[1])
    height = math.ceil(seen.size[1] * scale + top + bottom)
    root = _root(drawing, (width, height), style, f"{ident}-{view}", VIEWS[view])
    start = left + (width - left - right - seen.size[0] * scale) / 2
    _frame(root, drawing, seen, (start, top), scale, style)
    _legend(root, drawing, style, (left, height - 14.0))
    return ET.tostring(root, encoding="unicode")


def sheet_svg(
    drawing: FrameDrawing,
    *,
    units: Units = METRIC,
    colour: Colour = "plain",
    dark: bool = False,
    ident: str = "sheet",
) -> str:
    """All four views on one landscape sheet (sides as 297 to 210), the true ones in one scale."""
    width, height, edge = 1188, 840, 48.0
    style = _Style(theme.colours(dark), colour, units, True)
    side, plan, front, _ = (_seen(drawing, view) for view in VIEWS)
    between, below = 130.0, 150.0
    upper = max(side.size[1], front.size[1])
    scale = min(
        (width - 2 * edge - between - 60) / (side.size[0] + front.size[0]),
        (height - 2 * below - 120) / (upper + plan.size[1]),
    )
    root = _root(drawing, (width, height), style, ident, "all views")
    base = 62 + upper * scale
    _frame(root, drawing, side, (edge, base - side.size[1] * scale), scale, style)
    second = edge + side.size[0] * scale + between
    _frame(root, drawing, front, (second, base - front.size[1] * scale), scale, style)
    _frame(root, drawing, plan, (edge, base + below), scale, style)
    _oblique(root, drawing, (second, base + below, plan.size[1] * scale, height - 100.0), style)
    drafting.rule(root, (edge, height - 86.0), (width - edge, height - 86.0), style.look.rule)
    drafting.words(
        root, drawing.title, (width - edge, height - 46.0), style.look.ink, size=16, anchor="end",
        bold=True,
    )  # fmt: skip
    said = f"Dimensions between joint centres, in {_name(units)}"
    drafting.words(root, said, (width - edge, height - 24.0), style.look.muted, anchor="end")
    _legend(root, drawing, style, (edge, height - 24.0))
    return ET.tostring(root, encoding="unicode")


def _oblique(
    root: ET.Element, drawing: FrameDrawing, free: tuple[float, float, float, float], style: _Style
) -> None:
    """Put the 3D view beside or below the plan, wherever it comes out larger.

    free : where the plan's right neighbour begins, top and height of the plan, end of the sheet.
    """
    second, top, deep, end = free
    width, edge, seen = 1188.0, 48.0, _seen(drawing, "3d")
    beside, under = (second - 40, top), (edge, top + deep + 112)
    fits = [
        min((width - edge - left) / seen.size[0], (end - up - 20) / seen.size[1], 420.0)
        for left, up in (beside, under)
    ]
    best = fits[0] if fits[0] >= fits[1] else fits[1]
    left, up = beside if fits[0] >= fits[1] else under
    if fits[0] < fits[1]:
        left += (width - 2 * edge - best * seen.size[0]) / 2
    _frame(root, drawing, seen, (left, up), best, replace(style, dimensions=False))


def _seen(drawing: FrameDrawing, view: View) -> _Seen:
    a, p = (math.radians(angle) for angle in _EYES[view])
    across = np.array([-math.sin(a), math.cos(a), 0.0])
    upward = np.array([-math.sin(p) * math.cos(a), -math.sin(p) * math.sin(a), math.cos(p)])
    towards = np.array([math.cos(p) * math.cos(a), math.cos(p) * math.sin(a), math.sin(p)])
    flat = np.stack([drawing.joints @ across, -(drawing.joints @ upward)], axis=1)
    used = flat[np.unique(drawing.members[drawing.shown])] if drawing.shown.any() else flat
    low = used.min(axis=0)
    size = np.maximum(used.max(axis=0) - low, 0.02)
    return _Seen(view, flat, drawing.joints @ towards, low, size)


def _margins(drawing: FrameDrawing, view: View, style: _Style) -> tuple[float, float, float, float]:
    """Room left, above, right and below [px]."""
    legend = {"value": 62.0, "kind": 48.0, "plain": 0.0}[style.colour]
    if not style.dimensions:
        return 28, 52, 28, 24 + legend
    rows = {"side": 2.0 if drawing.axles else 1.0, "plan": 0.0, "front": 1.0, "3d": 0.0}[view]
    stations = 40.0 if view == "plan" and drawing.stations else 0.0
    return 44, 56, 84, 26 + _ROW * rows + stations + 22 + legend


def _root(
    drawing: FrameDrawing, size: tuple[int, int], style: _Style, ident: str, view: str
) -> ET.Element:
    root = ET.Element(
        "svg",
        {
            "xmlns": "http://www.w3.org/2000/svg",
            "viewBox": f"0 0 {size[0]} {size[1]}",
            "width": str(size[0]),
            "height": str(size[1]),
            "role": "img",
            "aria-labelledby": f"{ident}-title {ident}-words",
            "font-family": _FONT,
            "stroke-linecap": "round",
            "style": "max-width:100%;height:auto",
        },
    )
    ET.SubElement(root, "title", {"id": f"{ident}-title"}).text = f"{drawing.title}: {view}"
    about = ET.SubElement(root, "desc", {"id": f"{ident}-words"})
    about.text = drawing_in_words(drawing, style.units)
    ET.SubElement(root, "rect", {"width": "100%", "height": "100%", "fill": style.look.background})
    return root


def _frame(
    root: ET.Element,
    drawing: FrameDrawing,
    seen: _Seen,
    corner: drafting.Point,
    scale: float,
    style: _Style,
) -> None:
    """Draw one view with its upper left corner at a place."""
    at = (seen.flat - seen.low) * scale + np.array(corner)
    right, bottom = np.array(corner) + seen.size * scale
    place = _Place(corner[0], corner[1], float(right), float(bottom), scale)
    title = (place.left, place.top - 28)
    drafting.words(root, VIEWS[seen.view], title, style.look.ink, size=14, bold=True)
    if style.noted:
        note = f"Dimensions between joint centres, in {_name(style.units)}"
        drafting.words(root, note, (title[0] + 80, title[1]), style.look.muted, size=12)
    if style.dimensions:
        _centre_lines(root, drawing, seen, place, style.look)
    nearness = seen.near[drawing.members].mean(axis=1)
    for m in np.argsort(nearness, kind="stable"):
        if drawing.shown[m]:
            _member(root, drawing, int(m), at[drawing.members[m]], scale, style)
    for j in drawing.pickups:
        drafting.diamond(root, (float(at[j, 0]), float(at[j, 1])), style.look)
    if style.dimensions:
        _dimensions(root, drawing, seen, place, style)


def _member(
    root: ET.Element, drawing: FrameDrawing, m: int, ends: F64, scale: float, style: _Style
) -> None:
    look, value, kind = style.look, drawing.value, drawing.kind
    width, body, number_of = drawing.outside_mm[m] / 1000 * scale, look.tube, 0
    width = min(max(width, 1.8), 22.0)
    said = f"{drawing.names[m]}, {drawing.groups[m]}"
    if value is not None and style.colour != "plain":
        part = float(np.nan_to_num(value.amount[m])) / (value.highest or 1.0)
        width = drafting.width_of(part)
        body = theme.along(look.ramp, part)
        said += f", {value.write(m)}"
    if kind is not None and style.colour == "kind":
        number_of = int(kind.kind[m])
        body = look.quiet if number_of < 0 else look.palette[number_of % len(look.palette)]
        said += f", {kind.names[number_of]}" if number_of >= 0 else ""
    (x1, y1), (x2, y2) = ends
    path = f"M{x1:.1f} {y1:.1f}L{x2:.1f} {y2:.1f}"
    tube = ET.SubElement(root, "g")
    ET.SubElement(tube, "title").text = said
    edge = theme.mixed(body, "#000000", 0.55)
    drafting.stroke(tube, path, edge, width + 1.6, 0, look.background)
    drafting.stroke(tube, path, body, width, number_of, look.background)


def _centre_lines(
    root: ET.Element, drawing: FrameDrawing, seen: _Seen, place: _Place, look: theme.Colours
) -> None:
    """The middle plane of the vehicle and the axles, where the view sees them edge on."""
    if seen.view == "plan":
        y = place.top - seen.low[1] * place.scale
        drafting.rule(root, (place.left - 14, y), (place.right + 14, y), look.muted, drafting.CHAIN)
    xs = [0.0] if seen.view == "front" else list(drawing.axles or ())
    for x in (place.left + (x - seen.low[0]) * place.scale for x in xs):
        start, end = (x, place.top - 14), (x, place.bottom + 14)
        drafting.rule(root, start, end, look.muted, drafting.CHAIN)


def _dimensions(
    root: ET.Element, drawing: FrameDrawing, seen: _Seen, place: _Place, style: _Style
) -> None:
    look = style.look
    across, upward = (_length(float(side), style.units) for side in seen.size)
    row = place.bottom + 32
    if seen.view == "plan":
        _stations(root, drawing, seen, place, style)
    else:
        if seen.view == "side" and drawing.axles and drawing.wheelbase:
            low, high = (place.left + (x - seen.low[0]) * place.scale for x in drawing.axles)
            said = f"wheelbase {_length(drawing.wheelbase, style.units)}"
            drafting.across(root, (low, high), place.bottom, row, said, look)
            row += _ROW
        drafting.across(root, (place.left, place.right), place.bottom, row, across, look)
    ends = (place.top, place.bottom)
    drafting.upward(root, ends, place.right, place.right + 36, upward, look)


def _stations(
    root: ET.Element, drawing: FrameDrawing, seen: _Seen, place: _Place, style: _Style
) -> None:
    """Names of the stations below the plan, with their distance behind the front axle."""
    free = -math.inf
    for station in sorted(drawing.stations, key=lambda station: station.x):
        x = place.left + (station.x - seen.low[0]) * place.scale
        drafting.rule(root, (x, place.bottom + 8), (x, place.bottom + 20), style.look.muted)
        at = _length(station.x, style.units)
        half = 3.2 * max(len(station.name), len(at))
        if x - half < free:
            continue
        free = x + half + 6
        for line, said in enumerate((station.name, at)):
            y = place.bottom + 34 + 16 * line
            colour = style.look.ink if line else style.look.muted
            drafting.words(root, said, (x, y), colour, size=12, anchor="middle")


def _legend(root: ET.Element, drawing: FrameDrawing, style: _Style, at: drafting.Point) -> None:
    if style.colour == "value" and drawing.value is not None:
        drafting.value_legend(root, drawing.value, at, style.look)
    elif style.colour == "kind" and drawing.kind is not None:
        drafting.kind_legend(root, drawing.kind, at, style.look)


def _name(units: Units) -> str:
    return "inches" if units.unit("length") == "in" else units.unit("length")


def _length(metres: float, units: Units) -> str:
    """A dimension without its unit: whole millimetres, or inches to a hundredth."""
    value = units.shown(metres * 1000, "length")
    if units.unit("length") == "mm":
        return number(float(round(value)))
    return f"{value:,.2f}".replace("-", "−")
