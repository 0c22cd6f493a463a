"""Units a person sees: metric or inch and pound, from values kept in the units of the tables.

Tables and files carry one fixed unit in their column name (``mass_kg``, ``wall_mm``,
``twist_Nm_per_deg``); this module turns such values into the units chosen for display and says
how they are called. Nothing here changes what is stored.

Factors follow from the exact definitions of the inch (25.4 mm), the avoirdupois pound
(0.45359237 kg) and the standard acceleration of free fall (9.80665 m/s²).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeVar

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from explorer.numbers import with_unit

Value = TypeVar("Value", float, NDArray[np.float64], "pd.Series[float]")

INCH = 25.4
"""One inch [mm]."""
POUND = 0.45359237
"""One pound [kg]."""
POUND_FORCE = POUND * 9.80665
"""One pound-force [N]."""
FOOT = 12 * INCH / 1000
"""One foot [m]."""


@dataclass(frozen=True)
class Unit:
    """One unit of display: its name, and how many of it one table unit makes."""

    name: str
    factor: float = 1.0


@dataclass(frozen=True)
class Units:
    """A system of display units: name, and the unit of each quantity."""

    name: str
    of: Mapping[str, Unit]

    def unit(self, quantity: str) -> str:
        """Name of the unit of a quantity ("" when it has none)."""
        return self.of[quantity].name

    def shown(self, value: Value, quantity: str) -> Value:
        """A value in table units, in display units."""
        return value * self.of[quantity].factor

    def stored(self, value: Value, quantity: str) -> Value:
        """A value in display units, in table units."""
        return value / self.of[quantity].factor

    def write(self, value: float | None, quantity: str, figures: int = 3) -> str:
        """A value in table units, written with its display unit."""
        if value is None:
            return with_unit(None, "")
        return with_unit(self.shown(value, quantity), self.unit(quantity), figures)

    def titled(self, words: str, quantity: str) -> str:
        """A title with its unit: "Mass [kg]"."""
        return f"{words} [{self.unit(quantity)}]" if self.unit(quantity) else words


_METRIC = {
    "length": "mm",
    "stock": "m",
    "mass": "kg",
    "line mass": "kg/m",
    "twist": "N·m/deg",
    "twist per mass": "N·m/deg per kg",
    "bend": "N/mm",
    "force": "N",
    "moment": "N·m",
    "stress": "MPa",
    "angle": "deg",
    "frequency": "Hz",
    "none": "",
}
METRIC = Units(
    "Metric",
    {quantity: Unit(name) for quantity, name in _METRIC.items()} | {"share": Unit("%", 100.0)},
)
INCH_POUND = Units(
    "Inch and pound",
    {
        **METRIC.of,
        "length": Unit("in", 1 / INCH),
        "stock": Unit("ft", 1 / FOOT),
        "mass": Unit("lb", 1 / POUND),
        "line mass": Unit("lb/ft", FOOT / POUND),
        "twist": Unit("ft·lbf/deg", 1 / (POUND_FORCE * FOOT)),
        "twist per mass": Unit("ft·lbf/deg per lb", POUND / (POUND_FORCE * FOOT)),
        "bend": Unit("lbf/in", INCH / POUND_FORCE),
        "force": Unit("lbf", 1 / POUND_FORCE),
        "moment": Unit("ft·lbf", 1 / (POUND_FORCE * FOOT)),
        "stress": Unit("ksi", INCH**2 / POUND_FORCE / 1000),
    },
)
SYSTEMS = (METRIC, INCH_POUND)

_ENDINGS = (
    ("_Nm_per_deg", "twist"),
    ("twist_per_kg", "twist per mass"),
    ("_N_per_mm", "bend"),
    ("_kg_per_m", "line mass"),
    ("_mm", "length"),
    ("_kg", "mass"),
    ("_MPa", "stress"),
    ("_Hz", "frequency"),
    ("_deg", "angle"),
    ("_Nm", "moment"),
    ("_N", "force"),
    ("stock_m", "stock"),
    ("_share", "share"),
)
_WORDS = {
    "mass_kg": "Mass",
    "twist_Nm_per_deg": "Twist stiffness",
    "bend_N_per_mm": "Bending stiffness",
    "twist_per_kg": "Twist stiffness per mass",
    "axial_share": "Axial share",
    "stock_m": "Tube length",
    "first_twist_Hz": "First twist frequency",
    "frame": "Frame",
}


def quantity_of(column: str) -> str:
    """Which quantity a column of a table holds, by the unit at the end of its name."""
    for ending, quantity in _ENDINGS:
        if column.endswith(ending):
            return quantity
    return "none"


def words_of(column: str) -> str:
    """A column of results in words: "Twist stiffness"; other names without unit and dots."""
    if column in _WORDS:
        return _WORDS[column]
    for ending, _ in _ENDINGS:
        column = column.removesuffix(ending)
    plain = column.replace("_", " ").replace(".", ", ")
    return plain[:1].upper() + plain[1:]


def title_of(column: str, units: Units) -> str:
    """A column as an axis or table title: "Twist stiffness [N·m/deg]"."""
    return units.titled(words_of(column), quantity_of(column))
