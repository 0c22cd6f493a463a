"""Stock lists: the tube sizes that can be bought, read from tables of data."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass


@dataclass(frozen=True)
class StockSize:
    """One size of a list: label in the list's unit, sizes [m]."""

    label: str
    shape: str
    sizes: Mapping[str, float]
    list_name: str


@dataclass(frozen=True)
class StockList:
    """A list of sizes of one shape, with the standard it follows."""

    name: str
    shape: str
    unit: str
    standard: str
    sizes: tuple[StockSize, ...]
