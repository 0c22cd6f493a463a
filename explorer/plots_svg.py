"""Small plots as SVG text, for pages that stand alone: the twist profile, bars of shares."""

from __future__ import annotations

import math
import xml.etree.ElementTree as ET
from collections.abc import Callable, Sequence

import numpy as np

from explorer import drafting, theme
from explorer.numbers import number, percent
from explorer.units import METRIC, Units
from model.frame.skeleton import F64
from model.results.twist import Profile

COUPLE = 1000.0
"""Twist couple for which angles are drawn [N·m]."""

_WIDTH, _HEIGHT = 860, 300
_LEFT, _TOP, _RIGHT, _BOTTOM = 74.0, 24.0, 836.0, 236.0


def profile_svg(
    profile: Profile, axles: tuple[float, float], words: str, units: Units = METRIC
) -> str:
    """Rotation of every ring under a couple of 1000 N·m, along the vehicle, as SVG text.

    axles : x of the front and the rear axle [m]; the rear one is where rotation is nothing.
    words : what the plot says, for those who cannot see it.
    """
    look = theme.LIGHT
    angle = np.degrees(profile.angle) * COUPLE
    order = np.argsort(profile.x)
    x, angle = profile.x[order], angle[order]
    angle = angle - float(np.interp(axles[1], x, angle))
    if angle[np.abs(angle).argmax()] < 0:
        angle = -angle
    low, high = min(0.0, float(angle.min())), max(float(angle.max()), 1e-9)
    ticks = round_ticks(low, high)
    low, high = min(low, ticks[0]), max(high, ticks[-1])
    across = (float(x[0]), float(x[-1]))

    def place(at: float, turned: float) -> drafting.Point:
        right = _LEFT + (at - across[0]) / (across[1] - across[0]) * (_RIGHT - _LEFT)
        return right, _BOTTOM - (turned - low) / (high - low) * (_BOTTOM - _TOP)

    root = _root("twist-profile", "Twist profile", words)
    step = ticks[1] - ticks[0] if len(ticks) > 1 else 1.0
    for tick in ticks:
        _, y = place(across[0], tick)
        drafting.rule(root, (_LEFT, y), (_RIGHT, y), look.rule)
        said = f"{tick:.{max(0, -math.floor(math.log10(step)))}f}".replace("-", "−")
        drafting.words(root, said, (_LEFT - 8, y + 4), look.muted, size=12, anchor="end")
    for at, name in zip(axles, ("front axle", "rear axle"), strict=True):
        here, _ = place(at, low)
        drafting.rule(root, (here, _TOP), (here, _BOTTOM), look.muted, drafting.CHAIN)
        end: drafting.Anchor = "start" if here < (_LEFT + _RIGHT) / 2 else "end"
        aside = 6 if end == "start" else -6
        drafting.words(root, name, (here + aside, _TOP + 4), look.muted, size=12, anchor=end)
    _positions(root, x, place, low, units)
    points = [place(float(a), float(b)) for a, b in zip(x, angle, strict=True)]
    line = {"points": " ".join(f"{a:.1f},{b:.1f}" for a, b in points), "fill": "none"}
    ET.SubElement(root, "polyline", line | {"stroke": look.accent, "stroke-width": "2.5"})
    for (a, b), ring, turned in zip(points, order, angle, strict=True):
        dot = {"cx": f"{a:.1f}", "cy": f"{b:.1f}", "r": "4", "fill": look.accent}
        mark = ET.SubElement(root, "circle", dot)
        ET.SubElement(mark, "title").text = f"{profile.names[ring]}: {number(turned)} deg"
    return ET.tostring(root, encoding="unicode")


def share_bar(parts: Sequence[float], full: float, names: Sequence[str]) -> str:
    """A stacked bar of shares as SVG text; a bar of the share ``full`` fills the width."""
    look = theme.LIGHT
    said = ", ".join(
        f"{name} {percent(part)}" for name, part in zip(names, parts, strict=True) if part > 0
    )
    root = ET.Element(
        "svg", {"viewBox": "0 0 200 14", "width": "200", "height": "14", "role": "img"}
    )
    ET.SubElement(root, "title").text = said or "nothing"
    left = 0.0
    for k, part in enumerate(parts):
        width = max(part, 0.0) / (full or 1.0) * 200
        bar = {"x": f"{left:.2f}", "y": "1", "width": f"{width:.2f}", "height": "12"}
        ET.SubElement(root, "rect", bar | {"fill": look.palette[k % len(look.palette)]})
        left += width
    return ET.tostring(root, encoding="unicode")


def round_ticks(low: float, high: float) -> list[float]:
    """Round numbers that cover a stretch, about five of them."""
    stretch = max(high - low, 1e-12)
    power = 10.0 ** math.floor(math.log10(stretch / 4))
    step = next(s * power for s in (1.0, 2.0, 5.0, 10.0) if stretch / (s * power) <= 5)
    first, last = math.floor(low / step + 1e-9), math.ceil(high / step - 1e-9)
    return [k * step for k in range(first, last + 1)]


def _root(ident: str, title: str, words: str) -> ET.Element:
    look = theme.LIGHT
    root = ET.Element(
        "svg",
        {
            "viewBox": f"0 0 {_WIDTH} {_HEIGHT}",
            "width": str(_WIDTH),
            "height": str(_HEIGHT),
            "role": "img",
            "aria-labelledby": f"{ident}-title {ident}-words",
            "style": "max-width:100%;height:auto",
        },
    )
    ET.SubElement(root, "title", {"id": f"{ident}-title"}).text = title
    ET.SubElement(root, "desc", {"id": f"{ident}-words"}).text = words
    ET.SubElement(root, "rect", {"width": "100%", "height": "100%", "fill": look.background})
    return root


def _positions(
    root: ET.Element,
    x: F64,
    place: Callable[[float, float], drafting.Point],
    low: float,
    units: Units,
) -> None:
    """Marks of the rings below the plot, those with room for it with their position."""
    look = theme.LIGHT
    free = -math.inf
    for at in x:
        here, base = place(float(at), low)
        drafting.rule(root, (here, base), (here, base + 6), look.muted)
        said = number(round(units.shown(float(at) * 1e3, "length"), 1), 4)
        if here - 4 * len(said) > free:
            drafting.words(root, said, (here, base + 21), look.muted, size=12, anchor="middle")
            free = here + 4 * len(said) + 8
    middle = ((_LEFT + _RIGHT) / 2, _HEIGHT - 12.0)
    title = units.titled("Position behind the front axle", "length")
    drafting.words(root, title, middle, look.ink, anchor="middle")
    title = f"Rotation under {number(COUPLE)} N·m [deg]"
    side = (18.0, (_TOP + _BOTTOM) / 2)
    drafting.words(root, title, side, look.ink, anchor="middle", turned=True)
