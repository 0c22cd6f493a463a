"""Columns of changed values by path, checked: which frame gets what, and which is refused."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from model.errors import InputError
from model.frame.batch import Refusal
from model.frame.layout import Hoop, Layout, Station
from model.frame.skeleton import F64
from model.frame.vocabulary import FACES, MOST_BAYS
from model.stock.sections import SHAPES


@dataclass(frozen=True, eq=False)
class Choice:
    """A column of choices: ``options[index[row]]`` is what frame ``row`` has."""

    options: tuple[Any, ...]
    index: NDArray[np.int64]


Column = ArrayLike | Choice
"""One value a frame: numbers in SI for a dimension, a ``Choice`` for anything else."""


class Values:
    """The columns of ``n`` frames by path, and the first fault found in each frame."""

    def __init__(self, layout: Layout, columns: Mapping[str, Column], n: int) -> None:
        self.layout, self.n = layout, n
        self.columns = dict(columns)
        self.fault: list[Refusal | None] = [None] * n
        known = known_paths(layout)
        for path, column in columns.items():
            if path not in known:
                raise InputError("path", repr(path), f"use one of: {', '.join(sorted(known))}")
            length = len(column.index) if isinstance(column, Choice) else np.size(column)
            if length != n:
                raise InputError(path, f"{length} values", f"give {n}, one a frame")

    def number(self, path: str, default: float) -> F64:
        """(n,) float64 of a dimension."""
        column = self.columns.get(path, default)
        if isinstance(column, Choice):
            options = np.array([float(o) for o in column.options])
            return options[column.index]
        return np.broadcast_to(np.asarray(column, dtype=np.float64), (self.n,))

    def whole(self, path: str, default: int) -> NDArray[np.int64]:
        """(n,) whole numbers of a count; those that are none (and refused) become 0."""
        given = self.number(path, default)
        return np.rint(np.where(np.abs(given) < 1e9, given, 0.0)).astype(np.int64)

    def choice(self, path: str, default: Any) -> Choice:
        """The choice at a path, or the layout's own as the only option."""
        column = self.columns.get(path)
        if column is None:
            return Choice((default,), np.zeros(self.n, dtype=np.int64))
        if not isinstance(column, Choice):
            raise InputError(path, "numbers", "give a choice among named options")
        return column

    def refuse(self, bad: NDArray[np.bool_], field: str, given: F64, unit: str, do: str) -> None:
        """Note a fault in the rows where ``bad`` and no earlier fault stands."""
        scale = {"mm": 1e3}.get(unit, 1.0)
        name = f"{field}_{unit}" if unit else field
        for row in np.flatnonzero(bad):
            if self.fault[row] is None:
                text = f"{float(given[row]) * scale:.6g}"
                self.fault[row] = Refusal(int(row), name, text, do)

    def check_dimensions(self) -> None:
        """Refuse rows whose dimensions leave no room for a frame."""
        layout = self.layout
        wheelbase = self.number("wheelbase", layout.wheelbase)
        self.refuse(~((wheelbase >= 0.2) & (wheelbase <= 20)), "wheelbase", wheelbase, "mm",
                    "use 200 to 20000")  # fmt: skip
        for end, track in (("front", layout.track_front), ("rear", layout.track_rear)):
            t = self.number(f"track_{end}", track)
            self.refuse(~((t >= 0.1) & (t <= 5)), f"track_{end}", t, "mm", "use 100 to 5000")
        previous: F64 | None = None
        for k, station in enumerate(layout.stations):
            path = f"station.{station.name}"
            at = self.number(f"{path}.at", station.at)
            if previous is not None:
                before = layout.stations[k - 1].name
                gap = (at - previous) * wheelbase
                self.refuse(~(gap >= 0.02), f"{path}.at", at, "",
                            f"place it at least 20 mm behind station {before}")  # fmt: skip
            if station.name in (layout.front_axle, layout.rear_axle):
                self.refuse(at != station.at, f"{path}.at", at, "", "an axle station stays put")
            previous = at
            self._check_station(station, path, layout.tall(k))
        for span in layout.spans:
            bays = self.number(f"span.{span.name}.bays", span.bays)
            whole = (bays >= 1) & (bays <= MOST_BAYS) & (np.rint(bays) == bays)
            self.refuse(~whole, f"span.{span.name}.bays", bays, "",
                        f"use a whole number, 1 to {MOST_BAYS}")  # fmt: skip
        for hoop in layout.hoops:
            self._check_hoop(hoop)

    def _check_hoop(self, hoop: Hoop) -> None:
        path = f"hoop.{hoop.name}"
        width = self.number(f"{path}.width", hoop.width)
        self.refuse(~((width >= 0.02) & (width <= 5)), f"{path}.width", width, "mm",
                    "use 20 to 5000")  # fmt: skip
        lean = self.number(f"{path}.lean", hoop.lean)
        self.refuse(~(np.abs(lean) <= 2), f"{path}.lean", lean, "mm", "use -2000 to 2000")
        k = [s.name for s in self.layout.stations].index(hoop.station)
        rail = "height_high" if self.layout.tall(k) else "height_low"
        foot = self.number(f"station.{hoop.station}.{rail}", getattr(self.layout.stations[k], rail))
        height = self.number(f"{path}.height", hoop.height)
        self.refuse(~((height - foot >= 0.05) & (height <= 8)), f"{path}.height", height, "mm",
                    "keep the top at least 50 mm above the rails it stands on")  # fmt: skip

    def _check_station(self, station: Station, path: str, tall: bool) -> None:
        names = ("width_low", "width_high") if tall else ("width_low",)
        for name in names:
            width = self.number(f"{path}.{name}", getattr(station, name))
            self.refuse(~((width >= 0.02) & (width <= 5)), f"{path}.{name}", width, "mm",
                        "use 20 to 5000")  # fmt: skip
        low = self.number(f"{path}.height_low", station.height_low)
        self.refuse(~(np.abs(low) <= 5), f"{path}.height_low", low, "mm", "use -5000 to 5000")
        if station.outrigger > 0:
            outer = self.number(f"{path}.outrigger", station.outrigger)
            inner = self.number(f"{path}.width_low", station.width_low)
            self.refuse(~((outer - inner >= 0.04) & (outer <= 6)), f"{path}.outrigger", outer,
                        "mm", "reach at least 20 mm past the rails on each side")  # fmt: skip
        if tall:
            high = self.number(f"{path}.height_high", station.height_high)
            self.refuse(~(high - low >= 0.02), f"{path}.height_high", high, "mm",
                        "keep the upper rail at least 20 mm above the lower one")  # fmt: skip
            self.refuse(~(high <= 6), f"{path}.height_high", high, "mm", "use at most 6000")


def known_paths(layout: Layout) -> frozenset[str]:
    """Every path that a variant of this layout may change."""
    paths = {"wheelbase", "track_front", "track_rear"}
    for station in layout.stations:
        paths |= {
            f"station.{station.name}.{f}"
            for f in ("at", "width_low", "width_high", "height_low", "height_high", "ring")
        }
        if station.outrigger > 0:
            paths.add(f"station.{station.name}.outrigger")
    for hoop in layout.hoops:
        paths |= {f"hoop.{hoop.name}.{f}" for f in ("height", "width", "lean")}
    for span in layout.spans:
        paths |= {f"span.{span.name}.{f}" for f in ("bays", "sides", *FACES)}
    for group, tube in layout.tubes.items():
        paths |= {
            f"tube.{group}.{f}"
            for f in ("stock", "material", "rotation", "axial", *SHAPES[tube.shape].sizes)
        }
    return frozenset(paths)
