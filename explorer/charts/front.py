"""Two results against each other for all frames of a sweep, with the frames no other beats."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import altair as alt
import numpy as np
import pandas as pd

from explorer import theme
from explorer.charts.binning import MANY, cells, natural, stepwise
from explorer.charts.style import axis, dressed
from explorer.numbers import AXIS, count, listed, number
from explorer.units import METRIC, Units, quantity_of, title_of, words_of

FRAME = "frame"
"""Name of the selection that holds the frames clicked."""
ZOOM = "zoom"
"""Name of the selection that holds what part is shown."""
MODES = (FRAME, ZOOM)
"""For ``selection_mode``; with both, the part shown stays when the page runs again."""
LETTERS = "ABCDEFGH"
"""Marks of the frames picked, in order."""

SHAPES = ("circle", "square", "triangle-up", "diamond", "cross", "triangle-down")


def front_chart(
    rows: pd.DataFrame,
    front: pd.DataFrame,
    picked: Sequence[int] = (),
    *,
    x: str = "mass_kg",
    y: str = "twist_Nm_per_deg",
    target: float | None = None,
    colour: str | None = None,
    colour_words: str | None = None,
    units: Units = METRIC,
    dark: bool = False,
    height: int = 460,
) -> alt.LayerChart:
    """Scatter of all frames with the front; a click picks a frame.

    rows : every solved frame, columns ``frame``, ``x``, ``y`` (and ``colour``) in table units.
    front : those no other frame beats, same columns. picked : frame ids, marked A, B, C ...
    target : the least ``y`` wanted [table unit of y]. colour : column that colours the points.
    Above ``MANY`` rows, cells are drawn: a click takes the frame of greatest ``y`` in a cell.
    """
    look = theme.colours(dark)
    shown = _shown(rows, x, y, colour, units)
    best = _shown(front, x, y, colour, units).sort_values(["x", "y"])
    axes = _axes(shown, x, y, units, target)
    hue = _hue(shown, colour, colour_words, units)
    layers: list[Any] = []
    if len(shown) > MANY:
        layers.append(_cells(shown, axes, hue, look, (words_of(x), words_of(y))))
    else:
        layers.append(_points(shown, axes, hue, look, 26, ("crowd", x, y, units)))
    layers.append(_staircase(best, axes, look))
    if target is not None:
        layers += _target(target, y, axes, units, look)
    layers.append(_points(best, axes, hue, look, 80, ("front", x, y, units)))
    layers += _picked(shown, picked, axes, look)
    last = next(i for i, layer in enumerate(layers) if layer.name == "front")
    layers[last] = layers[last].add_params(*_hands())
    return dressed(layers, dark, height)


def frames_clicked(event: Mapping[str, Any] | None) -> list[int]:
    """Frame ids in what ``st.altair_chart(..., on_select="rerun")`` returned for the chart."""
    selection = (event or {}).get("selection") or {}
    chosen = selection.get(FRAME) or []
    return [int(item["frame"]) for item in chosen if item.get("frame") is not None]


def front_in_words(
    rows: pd.DataFrame,
    front: pd.DataFrame,
    picked: Sequence[int] = (),
    *,
    x: str = "mass_kg",
    y: str = "twist_Nm_per_deg",
    target: float | None = None,
    units: Units = METRIC,
) -> str:
    """What the chart shows, for those who cannot see it."""
    said = [f"{words_of(y)} against {words_of(x).lower()} of {count(len(rows), 'frame')}."]
    if len(front):
        ends = front.sort_values(x)
        low, high = (
            f"{units.write(float(row[x]), quantity_of(x))} with "
            f"{units.write(float(row[y]), quantity_of(y))}"
            for row in (ends.iloc[0], ends.iloc[-1])
        )
        said.append(f"{count(len(front), 'frame')} on the front, from {low} to {high}.")
    if target is not None and len(rows):
        reach = int((rows[y] >= target).sum())
        wanted = units.write(target, quantity_of(y))
        said.append(f"{count(reach, 'frame')} reach the target of {wanted}.")
    for letter, frame in zip(LETTERS, picked, strict=False):
        match = rows[rows["frame"] == frame]
        if len(match):
            row = match.iloc[0]
            values = [units.write(float(row[c]), quantity_of(c)) for c in (x, y)]
            said.append(f"{letter} is frame {number(frame)}: {listed(values)}.")
    return " ".join(said)


def _hands() -> list[alt.Parameter]:
    """A click picks, Ctrl and wheel zoom, shift and drag move, a double click shows all.

    A plain drag would end in a click on whatever mark it carries along; a plain wheel would keep
    the page from scrolling.
    """
    drag = "[pointerdown[event.shiftKey], window:pointerup] > window:pointermove!"
    return [
        alt.selection_point(
            name=FRAME, fields=["frame"], on="click[!event.shiftKey]", toggle=False
        ),
        alt.selection_interval(
            name=ZOOM, bind="scales", on=drag, translate=drag, zoom="wheel![event.ctrlKey]"
        ),
    ]


def _shown(rows: pd.DataFrame, x: str, y: str, colour: str | None, units: Units) -> pd.DataFrame:
    """The columns drawn, in display units; frames without a result are left out."""
    table = pd.DataFrame(
        {
            "frame": rows["frame"].to_numpy(),
            "x": units.shown(rows[x].to_numpy(np.float64), quantity_of(x)),
            "y": units.shown(rows[y].to_numpy(np.float64), quantity_of(y)),
        }
    )
    if colour is not None:
        values = rows[colour].reset_index(drop=True)
        numeric = pd.api.types.is_numeric_dtype(values)
        table["colour"] = units.shown(values, quantity_of(colour)) if numeric else values
    known = np.isfinite(table[["x", "y"]].to_numpy()).all(axis=1)
    return pd.DataFrame(table.loc[known].reset_index(drop=True))


@dataclass(frozen=True)
class _Axes:
    """The two axes, the same for every layer."""

    x_title: str
    y_title: str
    x_scale: alt.Scale
    y_scale: alt.Scale

    def x(self, field: str = "x:Q") -> alt.X:
        return alt.X(field, title=self.x_title, scale=self.x_scale, axis=axis())

    def y(self, field: str = "y:Q") -> alt.Y:
        return alt.Y(field, title=self.y_title, scale=self.y_scale, axis=alt.Axis(format=AXIS))


def _axes(shown: pd.DataFrame, x: str, y: str, units: Units, target: float | None) -> _Axes:
    wanted = [] if target is None else [units.shown(target, quantity_of(y))]
    return _Axes(
        title_of(x, units),
        title_of(y, units),
        _domain(shown["x"].to_numpy(np.float64), []),
        _domain(shown["y"].to_numpy(np.float64), wanted),
    )


def _domain(values: np.ndarray[Any, Any], more: list[float]) -> alt.Scale:
    if not len(values):
        return alt.Scale(zero=False)
    low, high = min(values.min(), *more, np.inf), max(values.max(), *more, -np.inf)
    room = (high - low or abs(high) or 1.0) * 0.04
    return alt.Scale(domain=[float(low - room), float(high + room)], zero=False, nice=False)


def _hue(
    shown: pd.DataFrame, colour: str | None, said: str | None, units: Units
) -> dict[str, Any] | None:
    """Channels that show a column: a ramp for numbers, colour and shape for choices."""
    if colour is None:
        return None
    title = units.titled(said or words_of(colour), quantity_of(colour))
    if pd.api.types.is_numeric_dtype(shown["colour"]) and not stepwise(shown["colour"]):
        legend = alt.Legend(title=title, gradientLength=190, gradientThickness=10)
        paint = alt.Color("colour:Q", scale=alt.Scale(range="ramp"), legend=legend)
        return {"field": "colour:Q", "title": title, "color": paint}
    names = sorted({_text(value) for value in shown["colour"].unique()}, key=natural)
    shown["colour"] = shown["colour"].map(_text)
    shape = alt.Scale(domain=names, range=[SHAPES[i % len(SHAPES)] for i in range(len(names))])
    legend = alt.Legend(title=title, symbolSize=80, columns=8)
    return {
        "field": "colour:N",
        "title": title,
        "color": alt.Color("colour:N", scale=alt.Scale(domain=names), legend=legend),
        "shape": alt.Shape("colour:N", scale=shape, legend=legend),
    }


def _text(value: object) -> str:
    return f"{value:g}" if isinstance(value, int | float | np.number) else str(value)


def _cells(
    shown: pd.DataFrame,
    axes: _Axes,
    hue: dict[str, Any] | None,
    look: theme.Colours,
    said: tuple[str, str],
) -> Any:
    table = cells(shown, "x", "y")
    for low, high in (("x1", "x2"), ("y1", "y2")):  # a hair of overlap: no seams between cells
        table[high] += 0.04 * (table[high] - table[low])
    counted = alt.Scale(type="log", range=[look.rule, theme.mixed(look.quiet, look.ink, 0.45)])
    legend = alt.Legend(
        title="Frames in a cell", gradientLength=150, gradientThickness=10, tickCount=3, format="~s"
    )
    plain = alt.Color("frames:Q", scale=counted, legend=legend)
    return (
        alt.Chart(table, name="cells")
        .mark_rect(clip=True, aria=False)
        .encode(
            x=axes.x("x1:Q"),
            x2="x2:Q",
            y=axes.y("y1:Q"),
            y2="y2:Q",
            color=plain if hue is None else hue["color"],
            tooltip=[
                alt.Tooltip("frames:Q", title="Frames here", format=AXIS),
                alt.Tooltip("frame:Q", title=f"Greatest {said[1].lower()}: frame", format=AXIS),
            ],
        )
    )


def _points(
    shown: pd.DataFrame,
    axes: _Axes,
    hue: dict[str, Any] | None,
    look: theme.Colours,
    size: int,
    what: tuple[str, str, str, Units],
) -> Any:
    name, x, y, units = what
    of_front = name == "front"
    plain = alt.value(look.accent if of_front else look.quiet)
    table = shown.assign(said=_spoken(shown, x, y, units)) if of_front else shown
    rim = {"stroke": look.background, "strokeWidth": 1.0}
    outline: dict[str, Any] = rim if of_front else {}
    tooltip = [
        alt.Tooltip("frame:Q", title="Frame", format=AXIS),
        alt.Tooltip("x:Q", title=title_of(x, units), format=",.4~r"),
        alt.Tooltip("y:Q", title=title_of(y, units), format=",.4~r"),
    ]
    if hue is not None:
        tooltip.append(alt.Tooltip(hue["field"], title=hue["title"]))
    fill = {} if hue is None else {c: hue[c] for c in ("color", "shape") if c in hue}
    return (
        alt.Chart(table, name=name)
        .mark_point(
            filled=True,
            clip=True,
            opacity=1.0 if of_front else 0.7,
            size=size,
            aria=of_front,
            cursor="pointer",
            **outline,
        )
        .encode(
            x=axes.x(),
            y=axes.y(),
            **(fill or {"color": plain}),
            **({"description": alt.Description("said:N")} if of_front else {}),
            tooltip=tooltip,
        )
    )


def _spoken(shown: pd.DataFrame, x: str, y: str, units: Units) -> list[str]:
    x_unit, y_unit = units.unit(quantity_of(x)), units.unit(quantity_of(y))
    return [
        f"Frame {number(int(frame))}: {number(a)} {x_unit}, {number(b)} {y_unit}"
        for frame, a, b in zip(shown["frame"], shown["x"], shown["y"], strict=True)
    ]


def _staircase(best: pd.DataFrame, axes: _Axes, look: theme.Colours) -> Any:
    """The greatest y that any frame up to an x reaches."""
    return (
        alt.Chart(best[["x", "y"]], name="staircase")
        .mark_line(interpolate="step-after", color=look.accent, strokeWidth=1.6, clip=True)
        .encode(x=axes.x(), y=axes.y())
    )


def _target(
    target: float,
    y: str,
    axes: _Axes,
    units: Units,
    look: theme.Colours,
) -> list[Any]:
    said = f"target {units.write(target, quantity_of(y))}"
    table = pd.DataFrame({"y": [units.shown(target, quantity_of(y))], "said": [said]})
    line = alt.Chart(table).encode(y=axes.y())
    place: dict[str, Any] = {"align": "right", "dx": -4, "dy": -9, "fontWeight": 600, "clip": True}
    words = line.encode(x=alt.value("width"), text="said:N")
    return [
        line.mark_rule(strokeDash=[7, 4], strokeWidth=1.6, color=look.warning, clip=True),
        words.mark_text(**place, stroke=look.background, strokeWidth=4, aria=False),
        words.mark_text(**place, color=look.warning),
    ]


def _picked(
    shown: pd.DataFrame,
    picked: Sequence[int],
    axes: _Axes,
    look: theme.Colours,
) -> list[Any]:
    letters = {frame: LETTERS[i] for i, frame in enumerate(picked[: len(LETTERS)])}
    table = shown.loc[shown["frame"].isin(list(letters)), ["frame", "x", "y"]]
    table = table.assign(letter=table["frame"].map(letters).astype(str))
    base = alt.Chart(table).encode(x=axes.x(), y=axes.y())
    ring = base.mark_point(
        size=300, stroke=look.ink, strokeWidth=2.4, fill="transparent", clip=True, aria=False
    )
    words = base.encode(text="letter:N")
    style: dict[str, Any] = {"dy": -19, "fontSize": 14, "fontWeight": 700, "aria": False}
    return [
        ring,
        words.mark_text(**style, stroke=look.background, strokeWidth=4),
        words.mark_text(**style, color=look.ink),
    ]
