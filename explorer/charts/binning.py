"""Many rows made few enough to draw: counts in cells, and a middle and a band along one input."""

from __future__ import annotations

import re
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.frame.skeleton import F64

MANY = 2000
"""Above this number of rows, counts in cells are drawn instead of points."""
CHOICES = 10
"""Up to this number of different values, an input is drawn value by value."""


def cells(rows: pd.DataFrame, x: str, y: str, across: int = 64, up: int = 44) -> pd.DataFrame:
    """Counts of rows in a grid over two columns.

    One row out for every cell that holds frames: ``x1, x2, y1, y2`` its edges, ``frames`` how
    many it holds and ``frame`` the id of the one with the greatest ``y``; a third numeric column
    "colour" comes out as its median, another as its commonest entry.
    """
    xs, ys = (rows[name].to_numpy(np.float64) for name in (x, y))
    x_edges, y_edges = _edges(xs, across), _edges(ys, up)
    column = np.clip(np.searchsorted(x_edges, xs, "right") - 1, 0, across - 1)
    row = np.clip(np.searchsorted(y_edges, ys, "right") - 1, 0, up - 1)
    cell = row * across + column
    order = np.lexsort((ys, cell))
    ends = np.flatnonzero(np.append(np.diff(cell[order]) != 0, True))
    there = cell[order][ends]
    table = pd.DataFrame(
        {
            "x1": x_edges[there % across],
            "x2": x_edges[there % across + 1],
            "y1": y_edges[there // across],
            "y2": y_edges[there // across + 1],
            "frames": np.diff(np.append(-1, ends)),
            "frame": rows["frame"].to_numpy()[order][ends],
        }
    )
    if "colour" in rows:
        grouped = rows["colour"].groupby(cell)
        numeric = pd.api.types.is_numeric_dtype(rows["colour"])
        middle = grouped.median() if numeric else grouped.agg(lambda part: part.mode().iloc[0])
        table["colour"] = middle.reindex(there).to_numpy()
    return table


def response_table(rows: pd.DataFrame, given: str, output: str, bins: int = 20) -> pd.DataFrame:
    """The output along one input: ``value``, ``low``, ``median``, ``high`` (10, 50, 90 %), frames.

    Numbers are gathered in bins of about equally many frames at their mean; few different values
    or names stay as they are (then ``value`` is text and the rows are in natural order).
    """
    known = rows[[given, output]].dropna()
    values, out = known[given], known[output]
    if stepwise(rows[given]):
        groups = out.groupby(values.map(_name), sort=False)
        table = _bands(groups)
        table.insert(0, "value", table.index.astype(str))
        order = sorted(range(len(table)), key=lambda i: natural(str(table["value"].iloc[i])))
        return table.iloc[order].reset_index(drop=True)
    ranks = values.rank(method="first").to_numpy()
    amount = max(1, min(bins, len(known) // 20))
    bin_of = np.minimum((ranks - 1) * amount // max(len(known), 1), amount - 1)
    table = _bands(out.groupby(bin_of))
    table.insert(0, "value", values.groupby(bin_of).mean())
    return table.reset_index(drop=True)


def stepwise(values: pd.Series) -> bool:
    """True for names, and for numbers of which there are only a few."""
    if not pd.api.types.is_numeric_dtype(values) or pd.api.types.is_bool_dtype(values):
        return True
    return int(values.nunique()) <= CHOICES


def natural(text: str) -> list[tuple[int, float, str]]:
    """A key that sorts "5 x 1" before "25 x 1.5" before "cross"."""
    parts = re.findall(r"\d+(?:\.\d+)?|[^\d]+", text)
    return [(0, float(p), "") if p[0].isdigit() else (1, 0.0, p) for p in parts]


def _name(value: object) -> str:
    return f"{value:g}" if isinstance(value, int | float | np.number) else str(value)


def _bands(groups: Any) -> pd.DataFrame:
    parts = {"low": 0.1, "median": 0.5, "high": 0.9}
    table = pd.DataFrame({name: groups.quantile(part) for name, part in parts.items()})
    table["frames"] = groups.size()
    return table


def _edges(values: NDArray[np.float64], amount: int) -> F64:
    low, high = float(values.min()), float(values.max())
    if not high > low:
        low, high = low - 0.5, high + 0.5
    edges: F64 = np.linspace(low, high, amount + 1)
    return edges
