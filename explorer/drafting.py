"""The pieces of a drawing in SVG: lines, words, dimension lines and legends; elements come out.

Places are pixels of the picture, x to the right and y down.
"""

from __future__ import annotations

import math
import xml.etree.ElementTree as ET
from typing import Literal

import numpy as np

from explorer import theme
from explorer.drawing import MemberKind, MemberValue

Point = tuple[float, float]
Anchor = Literal["start", "middle", "end"]

DASHES = ("", "9 6", "2.5 5", "12 5 2.5 5", "5 9", "16 4")
"""One pattern a kind, so that kinds differ without colour."""
CHAIN = "10 3 2 3"
"""The pattern of centre lines."""


def rule(parent: ET.Element, start: Point, end: Point, colour: str, dash: str = "") -> None:
    """A thin straight line."""
    line = {
        "x1": f"{start[0]:.1f}",
        "y1": f"{start[1]:.1f}",
        "x2": f"{end[0]:.1f}",
        "y2": f"{end[1]:.1f}",
        "stroke": colour,
        "stroke-width": "1",
    }
    ET.SubElement(parent, "line", line | ({"stroke-dasharray": dash} if dash else {}))


def words(
    parent: ET.Element,
    said: str,
    at: Point,
    colour: str,
    *,
    size: int = 13,
    anchor: Anchor = "start",
    bold: bool = False,
    turned: bool = False,
    rim: str | None = None,
) -> None:
    """A line of text; ``turned`` reads upwards, ``rim`` is a colour that keeps lines off it."""
    x, y = f"{at[0]:.1f}", f"{at[1]:.1f}"
    text = {"x": x, "y": y, "fill": colour, "font-size": str(size), "text-anchor": anchor}
    if bold:
        text["font-weight"] = "600"
    if turned:
        text["transform"] = f"rotate(-90 {x} {y})"
    if rim:
        text |= {"stroke": rim, "stroke-width": "4", "paint-order": "stroke"}
    ET.SubElement(parent, "text", text).text = said


def across(
    parent: ET.Element, ends: Point, feature: float, y: float, said: str, look: theme.Colours
) -> None:
    """A horizontal dimension from x to x at ``y``; extension lines come down from ``feature``."""
    left, right = min(ends), max(ends)
    for x in (left, right):
        rule(parent, (x, feature + 6), (x, y + 5), look.muted)
    rule(parent, (left, y), (right, y), look.ink)
    _arrow(parent, (left, y), math.pi, look.ink)
    _arrow(parent, (right, y), 0.0, look.ink)
    middle = ((left + right) / 2, y - 5)
    words(parent, said, middle, look.ink, anchor="middle", rim=look.background)


def upward(
    parent: ET.Element, ends: Point, feature: float, x: float, said: str, look: theme.Colours
) -> None:
    """A vertical dimension from y to y at ``x``; extension lines come from ``feature``."""
    top, bottom = min(ends), max(ends)
    for y in (top, bottom):
        rule(parent, (feature + 6, y), (x + 5, y), look.muted)
    rule(parent, (x, top), (x, bottom), look.ink)
    _arrow(parent, (x, top), -math.pi / 2, look.ink)
    _arrow(parent, (x, bottom), math.pi / 2, look.ink)
    middle = (x - 5, (top + bottom) / 2)
    words(parent, said, middle, look.ink, anchor="middle", turned=True, rim=look.background)


def diamond(parent: ET.Element, at: Point, look: theme.Colours) -> None:
    """The mark of a pickup."""
    x, y = at
    corners = f"{x:.1f},{y - 6:.1f} {x + 6:.1f},{y:.1f} {x:.1f},{y + 6:.1f} {x - 6:.1f},{y:.1f}"
    shape = {"points": corners, "fill": look.background, "stroke": look.ink, "stroke-width": "1.5"}
    ET.SubElement(parent, "polygon", shape)


def width_of(part: float) -> float:
    """Line width of a member by its part of the highest value (0..1) [px]."""
    return 2.0 + 8.0 * part


def value_legend(parent: ET.Element, value: MemberValue, at: Point, look: theme.Colours) -> None:
    """A wedge that grows and darkens with the value, with numbers; ``at``: lower left corner."""
    left, bottom = at
    length, steps = 190.0, 38
    axis = bottom - 20
    words(parent, value.words, (left, axis - 13), look.ink, size=12, bold=True)
    for step in np.linspace(0, 1, steps, endpoint=False):
        near, far = width_of(float(step)) / 2, width_of(float(step) + 1 / steps) / 2
        x, end = left + step * length, left + (step + 1 / steps) * length + 0.4
        corners = (
            f"{x:.1f},{axis - near:.1f} {end:.1f},{axis - far:.1f} "
            f"{end:.1f},{axis + far:.1f} {x:.1f},{axis + near:.1f}"
        )
        fill = theme.along(look.ramp, float(step))
        ET.SubElement(parent, "polygon", {"points": corners, "fill": fill})
    for part, said in value.ticks():
        x = left + part * length
        rule(parent, (x, axis + 7), (x, axis + 10), look.muted)
        words(parent, said, (x, bottom), look.ink, size=12, anchor="middle" if part else "start")


def kind_legend(parent: ET.Element, kind: MemberKind, at: Point, look: theme.Colours) -> None:
    """A sample of each kind in one row; ``at``: lower left corner."""
    left, bottom = at
    words(parent, kind.words, (left, bottom - 18), look.ink, size=12, bold=True)
    for k, name in enumerate(kind.names):
        hue = look.palette[k % len(look.palette)]
        stroke(parent, f"M{left:.1f} {bottom - 4:.1f}h30", hue, 6.0, k, look.background)
        words(parent, name, (left + 37, bottom), look.ink, size=12)
        left += 37 + 6.6 * len(name) + 20


def stroke(
    parent: ET.Element, path: str, colour: str, width: float, kind: int, ground: str
) -> None:
    """A member: one colour, or dashes of its kind over a paler one."""
    line = {"d": path, "fill": "none", "stroke": colour, "stroke-width": f"{width:.1f}"}
    dash = DASHES[max(kind, 0) % len(DASHES)]
    if dash:
        ET.SubElement(parent, "path", line | {"stroke": theme.mixed(colour, ground, 0.62)})
        line |= {"stroke-dasharray": dash, "stroke-linecap": "butt"}
    ET.SubElement(parent, "path", line)


def _arrow(parent: ET.Element, tip: Point, direction: float, colour: str) -> None:
    """A slim arrowhead whose tip touches the extension line."""
    corners = [tip]
    for turn in (2.87, -2.87):
        angle = direction + turn
        corners.append((tip[0] + 10 * math.cos(angle), tip[1] + 10 * math.sin(angle)))
    points = " ".join(f"{x:.1f},{y:.1f}" for x, y in corners)
    ET.SubElement(parent, "polygon", {"points": points, "fill": colour})
