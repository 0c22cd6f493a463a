"""What a sweep varies: one input is a path, and what it may become."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import ndtr, ndtri

from model.errors import InputError
from model.frame.columns import Choice, Column
from model.stock.materials import Material
from model.stock.tubes import StockSize

F64 = NDArray[np.float64]

UNITS = {"mm": 1e-3, "Nm_per_rad": 1.0, "N_per_m": 1.0}
"""Unit suffixes of paths in files, with their size in SI."""

SHAPES = ("even", "triangular", "normal")
"""How likely the values of a range are: all the same, most at a peak, or as a tolerance falls."""


@dataclass(frozen=True)
class Input:
    """One thing that varies.

    path : as in the study file, with its unit: ``station.dash.width_low_mm``.
    label : in words. unit : ``mm`` or empty.
    low, high : ends of a range in that unit; None for a choice.
    options : what may be chosen, in order (thinnest first for stock sizes).
    shape : one of ``SHAPES``. peak : likeliest value of a triangular range.
    mean, sd : mean and standard deviation of a normal range before its ends are cut off.
    """

    path: str
    label: str
    unit: str
    low: float | None = None
    high: float | None = None
    options: tuple[Any, ...] = ()
    shape: str = "even"
    peak: float | None = None
    mean: float | None = None
    sd: float | None = None

    def __post_init__(self) -> None:
        if self.shape not in SHAPES:
            raise InputError(
                f"{self.path}.shape", repr(self.shape), f"use one of: {', '.join(SHAPES)}"
            )
        if self.options:
            return
        if self.low is None or self.high is None:
            raise InputError(self.path, "no range", "give from and to, or choices")
        if not (np.isfinite(self.low) and np.isfinite(self.high) and self.low < self.high):
            raise InputError(
                self.path, f"{self.low:g} to {self.high:g}", "let from be less than to"
            )
        if self.shape == "triangular":
            self._within("peak", self.peak)
        if self.shape == "normal":
            self._within("mean", self.mean)
            if self.sd is None or not (np.isfinite(self.sd) and self.sd > 0):
                raise InputError(f"{self.path}.sd", f"{self.sd}", "give a number above 0")

    def _within(self, name: str, value: float | None) -> None:
        if value is None or not self.low <= value <= self.high:  # type: ignore[operator]
            given = "missing" if value is None else f"{value:g}"
            raise InputError(
                f"{self.path}.{name}", given, f"give a number from {self.low:g} to {self.high:g}"
            )

    @property
    def is_choice(self) -> bool:
        """Whether it is one of several options and not a number in a range."""
        return bool(self.options)

    @property
    def option_labels(self) -> tuple[Any, ...]:
        """The options as they stand in tables and files."""
        return tuple(option_label(option) for option in self.options)

    @property
    def words(self) -> str:
        """What it may become, in words."""
        if self.is_choice:
            return ", ".join(str(label) for label in self.option_labels)
        ends = f"{self.low:g} to {self.high:g} {self.unit}".strip()
        if self.shape == "triangular":
            return f"{ends}, most likely {self.peak:g}"
        if self.shape == "normal":
            return f"{ends}, normal with mean {self.mean:g} and standard deviation {self.sd:g}"
        return ends

    def picked(self, unit_values: ArrayLike) -> NDArray[np.int64]:
        """Option number for values in [0, 1]: equal bins."""
        u = np.asarray(unit_values, dtype=np.float64)
        count = len(self.options)
        return np.clip((u * count).astype(np.int64), 0, count - 1)

    def numbers(self, unit_values: ArrayLike) -> F64:
        """Values in the file's unit for values in [0, 1]: the inverse distribution function."""
        assert self.low is not None
        assert self.high is not None
        u = np.asarray(unit_values, dtype=np.float64)
        if self.shape == "triangular":
            assert self.peak is not None
            return _triangular(u, self.low, self.peak, self.high)
        if self.shape == "normal":
            assert self.mean is not None
            assert self.sd is not None
            return _cut_normal(u, self.mean, self.sd, self.low, self.high)
        return self.low + u * (self.high - self.low)

    def column(self, unit_values: ArrayLike) -> Column:
        """The column that ``model.frame.variants`` takes, in SI."""
        if not self.is_choice:
            return self.numbers(unit_values) * UNITS.get(self.unit, 1.0)
        index = self.picked(unit_values)
        if all(isinstance(option, int | float) for option in self.options):
            return np.array(self.options, dtype=np.float64)[index] * UNITS.get(self.unit, 1.0)
        return Choice(self.options, index)

    def shown(self, unit_values: ArrayLike) -> NDArray[Any]:
        """What the results table shows: numbers in the file's unit, or option labels."""
        if not self.is_choice:
            return self.numbers(unit_values)
        labels = np.array(self.option_labels, dtype=object)
        chosen = labels[self.picked(unit_values)]
        if all(isinstance(option, int | float) for option in self.options):
            return chosen.astype(np.float64)
        return chosen.astype(str)

    @property
    def inner_path(self) -> str:
        """The path in SI, without the unit."""
        return strip_unit(self.path)


def _triangular(u: F64, low: float, peak: float, high: float) -> F64:
    """Inverse distribution function of a triangle; own derivation from its two parabolas."""
    span = high - low
    rising = low + np.sqrt(np.clip(u, 0.0, None) * span * (peak - low))
    falling = high - np.sqrt(np.clip(1.0 - u, 0.0, None) * span * (high - peak))
    return np.where(np.isnan(u), u, np.where(u * span < peak - low, rising, falling))


def _cut_normal(u: F64, mean: float, sd: float, low: float, high: float) -> F64:
    """Inverse distribution function of a normal distribution with its ends cut off."""
    below, above = ndtr((low - mean) / sd), ndtr((high - mean) / sd)
    values: F64 = np.clip(mean + sd * ndtri(below + u * (above - below)), low, high)
    # in a far tail the distribution function is 1 to rounding: the ends are what was asked for
    return np.where(u <= 0.0, low, np.where(u >= 1.0, high, values))


def option_label(option: Any) -> Any:
    """An option as it stands in tables and files."""
    if isinstance(option, StockSize):
        return f"{option.list_name}/{option.label}"
    if isinstance(option, Material):
        return option.name
    return option


def strip_unit(path: str) -> str:
    """A path without its unit suffix."""
    for unit in UNITS:
        if path.endswith(f"_{unit}"):
            return path[: -len(unit) - 1]
    return path


def unit_of(path: str) -> str:
    """The unit suffix of a path, empty when it has none."""
    return next((unit for unit in UNITS if path.endswith(f"_{unit}")), "")
