"""One frame under twist: where along its length it twists, and which groups hold the energy."""

from __future__ import annotations

from typing import Any, cast

import altair as alt
import numpy as np
import pandas as pd

from explorer import theme
from explorer.charts.style import axis, dressed, share_axis
from explorer.numbers import listed, percent, with_unit
from explorer.units import METRIC, Units

BLACK, WHITE = "#0B0E11", "#FFFFFF"


def profile_chart(
    profile: pd.DataFrame,
    stations: pd.DataFrame,
    *,
    couple_Nm: float | None = None,
    units: Units = METRIC,
    dark: bool = False,
    height: int = 320,
) -> alt.LayerChart:
    """Twist angle along the length, with the stations named on top.

    profile : columns ``position_mm`` (behind the front axle) and ``angle_deg``.
    stations : columns ``name`` and ``position_mm``. couple_Nm : the couple that twists.
    """
    look = theme.colours(dark)
    shown = pd.DataFrame(
        {
            "position": units.shown(profile["position_mm"].to_numpy(np.float64), "length"),
            "angle": profile["angle_deg"].to_numpy(np.float64),
        }
    ).sort_values("position")
    marks = pd.DataFrame(
        {
            "position": units.shown(stations["position_mm"].to_numpy(np.float64), "length"),
            "name": stations["name"].astype(str).to_numpy(),
        }
    ).sort_values("position")
    ends = [*shown["position"], *marks["position"]]
    room = (max(ends) - min(ends)) * 0.02 if ends else 1.0
    scale = (
        alt.Scale(domain=[min(ends) - room, max(ends) + room], nice=False) if ends else alt.Scale()
    )
    under = "" if couple_Nm is None else f" at {units.write(couple_Nm, 'moment')}"
    title = f"Twist [deg{under}]"
    x_title = units.titled("Behind the front axle", "length")
    x = alt.X(
        "position:Q",
        title=x_title,
        scale=scale,
        axis=axis(grid=False),
    )
    named = [(float(x), str(n)) for x, n in zip(marks["position"], marks["name"], strict=True)]
    choose = "".join(f"abs(datum.value - {x:.9g}) < 1e-3 ? {_text(n)} : " for x, n in named)
    top = alt.X(
        "position:Q",
        scale=scale,
        axis=alt.Axis(
            orient="top",
            title=None,
            values=[x for x, _ in named],
            labelExpr=choose + "''",
            labelAngle=-30,
            labelAlign="left",
            labelOverlap=False,
            labelColor=look.ink,
            domain=False,
            tickSize=4,
            grid=False,
        ),
    )
    y = alt.Y("angle:Q", title=title, axis=alt.Axis(format=",~g", tickCount=5))
    rules = alt.Chart(marks).mark_rule(strokeDash=[3, 3], color=look.muted, opacity=0.7, aria=False)
    base = alt.Chart(shown).encode(
        x=x,
        y=y,
        tooltip=[
            alt.Tooltip("position:Q", title=x_title, format=",.4~r"),
            alt.Tooltip("angle:Q", title=title, format=",.3~r"),
        ],
    )
    line = base.mark_line(color=look.accent, strokeWidth=2.2)
    points = base.mark_point(filled=True, size=44, color=look.accent, opacity=1)
    chart: Any = dressed([rules.encode(x=top), line, points], dark, height)
    return cast(alt.LayerChart, chart.resolve_axis(x="independent"))


def profile_in_words(profile: pd.DataFrame, stations: pd.DataFrame, units: Units = METRIC) -> str:
    """Where the frame twists most for its length, and how much from end to end."""
    shown = profile.sort_values("position_mm")
    at = shown["position_mm"].to_numpy(np.float64)
    angle = shown["angle_deg"].to_numpy(np.float64)
    if len(at) < 2:
        return "Too few stations to show where the frame twists."
    names = stations.sort_values("position_mm")
    places = names["position_mm"].to_numpy(np.float64)
    turned = np.abs(np.diff(np.interp(places, at, angle)))
    whole = with_unit(float(abs(angle.max() - angle.min())), "deg")
    said = f"The frame twists by {whole} over {units.write(float(at[-1] - at[0]), 'length')}."
    if len(places) > 1 and turned.max() > 0:
        most = int(np.argmax(turned / np.maximum(np.diff(places), 1e-9)))
        between = [str(names["name"].iloc[most]), str(names["name"].iloc[most + 1])]
        said += (
            f" Most for its length between {listed(between)}: "
            f"{with_unit(float(turned[most]), 'deg')}."
        )
    return said


def energy_bars(
    table: pd.DataFrame, *, kinds: tuple[str, ...] = (), dark: bool = False
) -> alt.LayerChart:
    """Share of the strain energy by group, stacked by kind, the greatest group first.

    table : columns ``group``, ``kind``, ``share`` (of one). kinds : their order.
    """
    look = theme.colours(dark)
    order = list(kinds) or list(dict.fromkeys(table["kind"]))
    stacked = _stacked(table, order)
    groups = list(dict.fromkeys(stacked["group"]))
    paint = alt.Scale(domain=order, range=[look.palette[i % 6] for i in range(len(order))])
    label = alt.Axis(title=None, domain=False, ticks=False, labelFontSize=13, labelPadding=10)
    y = alt.Y("group:N", sort=groups, axis=label, scale=alt.Scale(paddingInner=0.35))
    base = alt.Chart(stacked).encode(y=y)
    bars = base.mark_bar(stroke=look.background, strokeWidth=1.5).encode(
        x=alt.X(
            "start:Q",
            title="Share of the strain energy under twist",
            axis=share_axis(),
        ),
        x2="end:Q",
        color=alt.Color("kind:N", scale=paint, sort=order, legend=alt.Legend(title=None)),
        description=alt.Description("said:N"),
        tooltip=[
            alt.Tooltip("group:N", title="Group"),
            alt.Tooltip("kind:N", title="Kind"),
            alt.Tooltip("written:N", title="Share"),
        ],
    )
    inside = base.mark_text(fontSize=11, aria=False, baseline="middle").encode(
        x="middle:Q",
        text="inside:N",
        color=alt.condition(f"datum.on == '{BLACK}'", alt.value(BLACK), alt.value(WHITE)),
    )
    totals = (
        alt.Chart(stacked.drop_duplicates("group", keep="last"))
        .mark_text(align="left", dx=7, fontWeight=600, color=look.ink, aria=False)
        .encode(y=y, x="end:Q", text="total:N")
    )
    on = {kind: _readable(look.palette[i % 6]) for i, kind in enumerate(order)}
    stacked["on"] = stacked["kind"].map(on)
    return dressed([bars, inside, totals], dark, 60 + 32 * max(len(groups), 1))


def energy_in_words(table: pd.DataFrame) -> str:
    """Which groups and which kinds hold the strain energy."""
    groups = table.groupby("group")["share"].sum().sort_values(ascending=False).head(3)
    kinds = table.groupby("kind")["share"].sum().sort_values(ascending=False)
    of_groups = [f"{name} {percent(float(share))}" for name, share in groups.items()]
    of_kinds = [f"{name} {percent(float(s))}" for name, s in kinds.items() if float(s) >= 0.005]
    return f"Strain energy under twist by group: {listed(of_groups)}. By kind: {listed(of_kinds)}."


def _stacked(table: pd.DataFrame, order: list[str]) -> pd.DataFrame:
    """Start and end of every segment, with what is written in and beside it."""
    wide = table.pivot_table(index="group", columns="kind", values="share", aggfunc="sum")
    wide = wide.reindex(columns=order).fillna(0.0)
    wide = wide.loc[wide.sum(axis=1).sort_values(ascending=False, kind="stable").index]
    ends = wide.cumsum(axis=1)
    longest = float(ends.to_numpy().max()) if len(wide) else 1.0
    rows = []
    for group in wide.index:
        for kind in order:
            share, end = float(wide.loc[group, kind]), float(ends.loc[group, kind])
            rows.append(
                {
                    "group": group,
                    "kind": kind,
                    "start": end - share,
                    "end": end,
                    "middle": end - share / 2,
                    "written": percent(share),
                    "inside": percent(share) if share > 0.1 * longest else "",
                    "total": percent(float(ends.loc[group].iloc[-1])),
                    "said": f"{group}, {kind}: {percent(share)}",
                }
            )
    return pd.DataFrame(rows)


def _readable(ground: str) -> str:
    """Black or white, whichever reads better on a colour."""
    better = theme.contrast(BLACK, ground) > theme.contrast(WHITE, ground)
    return BLACK if better else WHITE


def _text(value: str) -> str:
    return '"' + value.replace("\\", "\\\\").replace('"', '\\"') + '"'
