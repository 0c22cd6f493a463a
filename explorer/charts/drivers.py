"""What drives an output: ranked indices, the output along one input, and how settled they are."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, cast

import altair as alt
import pandas as pd

from explorer import theme
from explorer.charts.binning import response_table, stepwise
from explorer.charts.front import SHAPES
from explorer.charts.style import axis, dressed, share_axis
from explorer.numbers import AXIS, PERCENT_AXIS, count, listed, number, percent
from explorer.units import METRIC, Units, quantity_of, words_of

INPUT = "input"
"""Name of the selection that holds the input clicked."""
TOTAL = "with all interactions (total)"
ALONE = "on its own (first-order)"

_DASHES = ([1, 0], [7, 3], [2, 3], [9, 3, 2, 3], [4, 4], [12, 4])


def drivers_chart(
    table: pd.DataFrame, *, most: int = 12, picked: str | None = None, dark: bool = False
) -> alt.LayerChart:
    """Bars of total index, greatest first, with the first-order index below each.

    table : one row an input, columns ``input, label, first, first_conf, total, total_conf``; the
    whiskers run one ``_conf`` to both sides. most : inputs shown. picked : input marked.
    """
    look = theme.colours(dark)
    top = _ranked(table).head(most)
    bars = _two_a_row(top)
    order = top["label"].tolist()
    weight = alt.expr(f"datum.value == {_quoted(_label_of(top, picked))} ? 700 : 400")
    names = alt.Axis(
        title=None,
        labelFontSize=13,
        labelFontWeight=cast(Any, weight),
        labelColor=look.ink,
        labelLimit=420,
        labelAlign="left",  # above its bars: long names leave the bars their room
        labelPadding=-2,
        labelOffset=-22,
        domain=False,
        ticks=False,
        zindex=1,
    )
    gaps = alt.Scale(paddingInner=0.46, paddingOuter=0.46)
    y = alt.Y("label:N", sort=order, axis=names, scale=gaps)
    offset = alt.YOffset("which:N", sort=[TOTAL, ALONE])
    title = "Share of the variation explained"
    lowest, highest = min(0.0, float(bars["low"].min())), float(bars["high"].max())
    reach = alt.Scale(domain=[lowest, highest + 0.06 * (highest - lowest)], nice=False)
    x = alt.X("value:Q", title=title, scale=reach, axis=share_axis())
    base = alt.Chart(bars).encode(y=y, yOffset=offset)
    body = theme.mixed(look.accent, look.background, 0.3)  # so that the whisker shows on it
    fill = alt.Scale(domain=[TOTAL, ALONE], range=[body, look.background])
    legend = alt.Legend(title=None, symbolType="square", symbolStrokeColor=look.accent)
    drawn = base.mark_bar(stroke=look.accent, strokeWidth=1.4, cursor="pointer").encode(
        x=x,
        fill=alt.Fill("which:N", scale=fill, legend=legend),
        description=alt.Description("said:N"),
        tooltip=[
            alt.Tooltip("label:N", title="Input"),
            alt.Tooltip("which:N", title="Counted"),
            alt.Tooltip("written:N", title="Share"),
        ],
    )
    click = alt.selection_point(name=INPUT, fields=[INPUT], on="click", toggle=False)
    whisker = base.mark_rule(strokeWidth=1.6, color=look.ink, aria=False).encode(
        x="low:Q", x2="high:Q"
    )
    written = (
        base.transform_filter(alt.datum.which == TOTAL)
        .mark_text(align="left", dx=8, fontWeight=600, color=look.ink, aria=False)
        .encode(x="high:Q", text="share:N")
    )
    rows = max(len(top), 1)
    return dressed([drawn.add_params(click), whisker, written], dark, 90 + 48 * rows)


def input_clicked(event: Mapping[str, Any] | None) -> str | None:
    """The input in what ``st.altair_chart(..., on_select="rerun")`` returned for the bars."""
    chosen = ((event or {}).get("selection") or {}).get(INPUT) or []
    return next((str(item[INPUT]) for item in chosen if item.get(INPUT)), None)


def drivers_in_words(table: pd.DataFrame, output: str) -> str:
    """What the bars show. output : name of the output in words ("twist stiffness")."""
    ranked = _ranked(table)
    if ranked.empty:
        return f"No input of the sweep changes the {output}."
    leading: list[Any] = list(ranked.head(3).itertuples())
    said = [
        f"{row.label} {percent(row.total)} (± {percent(row.total_conf)}), "
        f"{percent(row.first)} on its own"
        for row in leading
    ]
    rest = len(ranked) - len(said)
    more = f" {count(rest, 'further input')} below." if rest else ""
    return f"What explains the variation in {output}, greatest first: {'; '.join(said)}.{more}"


def response_chart(
    rows: pd.DataFrame,
    given: str,
    output: str,
    *,
    label: str | None = None,
    units: Units = METRIC,
    dark: bool = False,
    height: int = 320,
) -> alt.LayerChart:
    """The output over one input: median of all frames, and the band that holds 80 % of them.

    rows : the sweep, in table units. given : the input's column; label : its name in words.
    """
    look = theme.colours(dark)
    table = _in_units(response_table(rows, given, output), given, output, units)
    y_title = units.titled(words_of(output), quantity_of(output))
    x_title = units.titled(label or words_of(given), quantity_of(given))
    scale = alt.Scale(zero=False, nice=True)
    by_step = stepwise(rows[given])
    place: Any = alt.Undefined if by_step else ",.3~r"
    x: alt.X = (
        alt.X("value:N", title=x_title, sort=None, axis=alt.Axis(labelAngle=0))
        if by_step
        else alt.X("value:Q", title=x_title, scale=scale, axis=axis(80))
    )
    base = alt.Chart(table).encode(
        x=x,
        tooltip=[
            alt.Tooltip("value:N" if by_step else "value:Q", title=x_title, format=place),
            alt.Tooltip("high:Q", title="90 % lie below", format=",.4~r"),
            alt.Tooltip("median:Q", title="Median", format=",.4~r"),
            alt.Tooltip("low:Q", title="10 % lie below", format=",.4~r"),
            alt.Tooltip("frames:Q", title="Frames", format=AXIS),
        ],
    )
    y = alt.Y("low:Q", title=y_title, scale=scale, axis=alt.Axis(format=AXIS))
    middle = alt.Y("median:Q", title=y_title)
    if by_step:
        band = base.mark_bar(size=22, color=look.accent, opacity=0.28, cornerRadius=3)
        line = base.mark_tick(thickness=3, size=30, color=look.accent, opacity=1)
    else:
        band = base.mark_area(color=look.accent, opacity=0.2, line=False)
        line = base.mark_line(
            color=look.accent, strokeWidth=2.4, point={"size": 34, "filled": True, "opacity": 1}
        )
    layers = [band.encode(y=y, y2="high:Q"), line.encode(y=middle)]
    return dressed(layers, dark, height)


def response_in_words(
    rows: pd.DataFrame,
    given: str,
    output: str,
    *,
    label: str | None = None,
    units: Units = METRIC,
) -> str:
    """What the response chart shows."""
    table = response_table(rows, given, output)
    if table.empty:
        return "No solved frame to show."
    name, quantity = label or words_of(given), quantity_of(output)
    first, last = table.iloc[0], table.iloc[-1]
    ends = [units.write(float(row["median"]), quantity) for row in (first, last)]
    if stepwise(rows[given]):
        steps: list[Any] = list(table.itertuples())
        said = [f"{row.value}: {units.write(float(row.median), quantity)}" for row in steps]
        return f"Median {words_of(output).lower()} by {name}: {'; '.join(said)}."
    places = [units.write(float(row["value"]), quantity_of(given)) for row in (first, last)]
    band = [units.write(float(last[side]), quantity) for side in ("low", "high")]
    return (
        f"Median {words_of(output).lower()} goes from {ends[0]} to {ends[1]} as {name} "
        f"goes from {places[0]} to {places[1]}; at the end of it 80 % of the frames lie between "
        f"{listed(band)}."
    )


def convergence_chart(
    table: pd.DataFrame, *, most: int = 6, dark: bool = False, height: int = 300
) -> alt.LayerChart:
    """Total index of the leading inputs at a quarter, half and all of the sample, with whiskers.

    table : one row an input and sample size, columns ``input, label, samples, total,
    total_conf``; the greatest at the full size come first.
    """
    look = theme.colours(dark)
    sizes = sorted(table["samples"].unique())
    final = table[table["samples"] == sizes[-1]].sort_values("total", ascending=False)
    order = final["label"].head(most).tolist()
    drawn = table[table["label"].isin(order)].copy()
    place = {size: i for i, size in enumerate(sizes)}
    turn = {name: (i - (len(order) - 1) / 2) * 0.035 for i, name in enumerate(order)}
    drawn["place"] = drawn["samples"].map(place) + drawn["label"].map(turn)
    drawn["low"] = drawn["total"] - drawn["total_conf"]
    drawn["high"] = drawn["total"] + drawn["total_conf"]
    names = "[" + ",".join(_quoted(f"{int(size):,}") for size in sizes) + "]"
    ticks = alt.Axis(values=list(place.values()), labelExpr=f"{names}[datum.value]", grid=False)
    x = alt.X(
        "place:Q",
        title="Base samples",
        axis=ticks,
        scale=alt.Scale(domain=[-0.25, len(sizes) - 0.75], nice=False),
    )
    legend = alt.Legend(title=None, columns=3, symbolSize=80, orient="top")
    paint = alt.Scale(domain=order, range=list(look.palette[: len(order)]))
    base = alt.Chart(drawn).encode(
        x=x, color=alt.Color("label:N", scale=paint, sort=order, legend=legend)
    )
    y = alt.Y(
        "total:Q",
        title="Share explained, with interactions",
        axis=alt.Axis(labelExpr=PERCENT_AXIS, tickCount=6),
    )
    dash = alt.Scale(domain=order, range=list(_DASHES[: len(order)]))
    shape = alt.Scale(domain=order, range=list(SHAPES[: len(order)]))
    return dressed(
        [
            base.mark_line(strokeWidth=1.8).encode(
                y=y, strokeDash=alt.StrokeDash("label:N", scale=dash, sort=order, legend=legend)
            ),
            base.mark_rule(strokeWidth=1.4).encode(y="low:Q", y2="high:Q"),
            base.mark_point(filled=True, size=70, opacity=1).encode(
                y=y,
                shape=alt.Shape("label:N", scale=shape, sort=order, legend=legend),
                tooltip=[
                    alt.Tooltip("label:N", title="Input"),
                    alt.Tooltip("samples:Q", title="Base samples", format=AXIS),
                    alt.Tooltip("total:Q", title="Total index", format=".1%"),
                    alt.Tooltip("total_conf:Q", title="Interval to both sides", format=".1%"),
                ],
            ),
        ],
        dark,
        height,
    )


def convergence_in_words(table: pd.DataFrame) -> str:
    """What the convergence chart shows: how far the leading indices still moved."""
    sizes = sorted(table["samples"].unique())
    if len(sizes) < 2:
        return "One sample size only: nothing to compare yet."
    half, full = (table[table["samples"] == size].set_index("input") for size in sizes[-2:])
    moved = (full["total"] - half["total"]).abs()
    leading = full.sort_values("total", ascending=False).head(3)
    rows: list[Any] = list(leading.itertuples())
    said = [
        f"{row.label} moved by {percent(float(moved[name]))} to {percent(row.total)}"
        for name, row in zip(leading.index, rows, strict=True)
    ]
    sizes_said = [number(int(size)) for size in sizes[-2:]]
    return f"From {sizes_said[0]} to {sizes_said[1]} base samples: {'; '.join(said)}."


def _ranked(table: pd.DataFrame) -> pd.DataFrame:
    known = table.dropna(subset=["total"])
    ranked = known.sort_values("total", ascending=False, kind="stable").reset_index(drop=True)
    twice = ranked["label"].duplicated(keep=False)
    ranked.loc[twice, "label"] = ranked["label"] + " (" + ranked["input"] + ")"
    return pd.DataFrame(ranked)


def _two_a_row(top: pd.DataFrame) -> pd.DataFrame:
    parts = []
    for which, value in ((TOTAL, "total"), (ALONE, "first")):
        part = top[["input", "label"]].assign(which=which, value=top[value])
        part["low"] = top[value] - top[f"{value}_conf"]
        part["high"] = top[value] + top[f"{value}_conf"]
        part["share"] = [percent(v) for v in top[value]]
        part["written"] = [
            f"{percent(v)} ± {percent(c)}"
            for v, c in zip(top[value], top[f"{value}_conf"], strict=True)
        ]
        part["said"] = [
            f"{label}, {which}: {text}"
            for label, text in zip(part["label"], part["written"], strict=True)
        ]
        parts.append(part)
    return pd.concat(parts, ignore_index=True)


def _label_of(top: pd.DataFrame, name: str | None) -> str:
    match = top.loc[top["input"] == name, "label"]
    return str(match.iloc[0]) if len(match) else ""


def _quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def _in_units(table: pd.DataFrame, given: str, output: str, units: Units) -> pd.DataFrame:
    shown = table.copy()
    for column in ("low", "median", "high"):
        shown[column] = units.shown(shown[column], quantity_of(output))
    if pd.api.types.is_numeric_dtype(shown["value"]):
        shown["value"] = units.shown(shown["value"], quantity_of(given))
    elif quantity_of(given) != "none" and all(_is_number(text) for text in shown["value"]):
        values = [units.shown(float(text), quantity_of(given)) for text in shown["value"]]
        shown["value"] = [number(value) for value in values]
    return shown


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True
