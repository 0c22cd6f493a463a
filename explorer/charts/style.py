"""One quiet look for every chart, light and dark.

Show a chart with ``st.altair_chart(chart, theme=None, alt=..._in_words(...))``: the chart brings
its own colours, and the host page must not lay others over them.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, cast

import altair as alt

from explorer import theme
from explorer.numbers import AXIS, PERCENT_AXIS


def config(dark: bool) -> dict[str, Any]:
    """Settings of a chart: colours, type, grid."""
    look = theme.colours(dark)
    words = {"labelFont": theme.FONT, "titleFont": theme.FONT}
    return {
        "background": "transparent",
        "font": theme.FONT,
        "view": {"stroke": None, "continuousWidth": 640, "continuousHeight": 320},
        "axis": {
            **words,
            "labelColor": look.muted,
            "titleColor": look.ink,
            "labelFontSize": 12,
            "titleFontSize": 13,
            "titleFontWeight": 600,
            "titlePadding": 10,
            "labelPadding": 5,
            "domainColor": look.rule,
            "tickColor": look.rule,
            "gridColor": look.rule,
            "gridOpacity": 0.6,
            "labelLimit": 240,
            "labelOverlap": "greedy",
        },
        "legend": {
            **words,
            "labelColor": look.ink,
            "titleColor": look.ink,
            "labelFontSize": 12,
            "titleFontSize": 12,
            "titleFontWeight": 600,
            "labelLimit": 260,
            "titleLimit": 320,
            "orient": "top",
            "direction": "horizontal",
            "offset": 8,
        },
        "text": {"font": theme.FONT, "fontSize": 12, "color": look.ink},
        "range": {
            "category": list(look.palette),
            "ramp": list(look.ramp),
            "heatmap": list(look.ramp),
        },
        "numberFormat": AXIS,
    }


def dressed(layers: Sequence[Any], dark: bool, height: int | alt.Step) -> alt.LayerChart:
    """Layers as one chart in the look of the workbench, as SVG so that its marks can be named."""
    usermeta = {"embedOptions": {"renderer": "svg", "actions": False}}
    shaped = alt.layer(*layers).properties(height=height, usermeta=usermeta)
    return cast(alt.LayerChart, shaped.configure(**config(dark)))


def axis(room: int = 90, **settings: Any) -> alt.Axis:
    """A horizontal axis of numbers with about one label in every ``room`` pixels."""
    ticks: Any = alt.expr(f"max(2, ceil(width / {room}))")
    return alt.Axis(tickCount=ticks, **({"format": AXIS} | settings))


def share_axis(**settings: Any) -> alt.Axis:
    """A horizontal axis of shares in per cent."""
    return axis(labelExpr=PERCENT_AXIS, **settings)


@alt.theme.register("twistfront light", enable=False)
def _light() -> alt.theme.ThemeConfig:
    return alt.theme.ThemeConfig(config=config(dark=False))  # type: ignore[typeddict-item]


@alt.theme.register("twistfront dark", enable=False)
def _dark() -> alt.theme.ThemeConfig:
    return alt.theme.ThemeConfig(config=config(dark=True))  # type: ignore[typeddict-item]
