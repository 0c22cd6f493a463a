"""Stock lists: the tube sizes that can be bought, read from tables of data."""

from __future__ import annotations

import csv
import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from model.errors import InputError
from model.stock.sections import SHAPES, section_values

_METRES = {"mm": 1e-3, "in": 0.0254}


@dataclass(frozen=True)
class StockSize:
    """One size of a list: label in the list's unit, sizes [m]."""

    label: str
    shape: str
    sizes: Mapping[str, float]
    list_name: str

    @property
    def area(self) -> float:
        """Cross-section [m²]."""
        return float(section_values(self.shape, self.sizes).A)


@dataclass(frozen=True)
class StockList:
    """A list of sizes of one shape, with the standard it follows.

    name : its short name, such as ``metric-round``. title : what a person reads.
    """

    name: str
    title: str
    shape: str
    unit: str
    standard: str
    sizes: tuple[StockSize, ...]

    def size(self, label: str) -> StockSize:
        """The size of that label."""
        for size in self.sizes:
            if size.label == label:
                return size
        raise InputError("stock", f"{self.name}/{label}", f"use one of: {self._labels()}")

    def _labels(self) -> str:
        return ", ".join(s.label for s in self.sizes)


def next_size(
    stock: StockList, sizes: Mapping[str, float], rule: Literal["up", "nearest"] = "up"
) -> tuple[StockSize, str]:
    """The size of a list to buy for wanted sizes [m], and in words what that changes.

    rule : ``up``, the lightest size that is nowhere smaller than wanted; ``nearest``, whichever
        differs least in outside sizes (counted twice) and area, by ratio: a choice of ours, as a
        tube that fits its neighbours is worth more than its mass.

    Raises
    ------
    InputError
        Sizes that cannot be, or nothing on the list large enough.
    """
    names = SHAPES[stock.shape].sizes
    area = float(section_values(stock.shape, sizes).A)
    wanted = " x ".join(f"{sizes[n] / _METRES[stock.unit]:.4g}" for n in names)
    if rule == "up":
        # the last digit may be off after a conversion from inches
        fits = [s for s in stock.sizes if all(s.sizes[n] >= sizes[n] * (1 - 1e-9) for n in names)]
        if not fits:
            most = " x ".join(
                f"{max(s.sizes[n] for s in stock.sizes) / _METRES[stock.unit]:g}" for n in names
            )
            remedy = f"no size of {stock.name} is as large ({most} at most): use another list"
            raise InputError("stock", f"{wanted} {stock.unit}", remedy)
        best = min(fits, key=lambda s: s.area)
    elif rule == "nearest":
        outside = [n for n in names if n != "wall"]

        def off(size: StockSize) -> float:
            ratios = [abs(math.log(size.sizes[n] / sizes[n])) for n in outside]
            return 2 * sum(ratios) / len(ratios) + abs(math.log(size.area / area))

        best = min(stock.sizes, key=off)
    else:
        raise InputError("rule", repr(rule), "use up or nearest")
    changes = [_change(n, best.sizes[n] / sizes[n]) for n in names]
    told = [c for c in changes if c]
    if not told:
        return best, f"{best.label} {stock.unit} as wanted"
    told.append(_change("mass per metre", best.area / area) or "mass per metre as before")
    return best, f"{best.label} {stock.unit} instead of {wanted}: {', '.join(told)}"


def _change(what: str, ratio: float) -> str:
    """Such as ``wall +5.3 %``; nothing when it is less than a twentieth of a per cent."""
    percent = round((ratio - 1) * 100, 1)
    return f"{what} {percent:+.1f} %" if percent else ""


def parse_stock(name: str, text: str) -> StockList:
    """A stock list from CSV text.

    The first lines are comments ``# key: value`` for name, shape, unit (mm or in) and standard;
    then a header with the sizes of the shape, then one size a line.

    Raises
    ------
    InputError
        Names the line and column at fault.
    """
    facts: dict[str, str] = {}
    lines = text.removeprefix("\ufeff").splitlines()
    body = [(n, line) for n, line in enumerate(lines, 1) if line.strip()[:1] not in ("", "#")]
    for line in lines[: body[0][0]] if body else lines:
        if line.strip().startswith("#") and ":" in line:
            key, value = line.strip()[1:].split(":", 1)
            facts[key.strip()] = value.strip()
    shape, unit = facts.get("shape", ""), facts.get("unit", "")
    if shape not in SHAPES:
        raise InputError(f"{name}: shape", repr(shape), f"use one of: {', '.join(SHAPES)}")
    if unit not in _METRES:
        raise InputError(f"{name}: unit", repr(unit), "use mm or in")
    if not body:
        raise InputError(name, "no sizes", f"give a header line: {','.join(SHAPES[shape].sizes)}")
    header = _cells(name, *body[0])
    if sorted(header) != sorted(SHAPES[shape].sizes):
        raise InputError(
            f"{name} line {body[0][0]}", ",".join(header), f"use {','.join(SHAPES[shape].sizes)}"
        )
    sizes = [_size(name, shape, unit, header, number, line) for number, line in body[1:]]
    if not sizes:
        raise InputError(name, "no sizes", "give at least one size below the header line")
    seen: dict[str, int] = {}
    for (number, _), size in zip(body[1:], sizes, strict=True):
        if size.label in seen:
            first = f"it stands in line {seen[size.label]} already"
            raise InputError(f"{name} line {number}", size.label, f"{first}: leave one out")
        seen[size.label] = number
    sizes.sort(key=lambda s: s.area)
    standard = facts.get("standard", "")
    return StockList(name, facts.get("name", name), shape, unit, standard, tuple(sizes))


def _cells(name: str, number: int, line: str) -> list[str]:
    try:
        return [cell.strip() for cell in next(csv.reader([line]))]
    except csv.Error as fault:
        raise InputError(f"{name} line {number}", f"{line[:20]}...", str(fault)) from None


def _size(name: str, shape: str, unit: str, header: list[str], number: int, line: str) -> StockSize:
    cells = _cells(name, number, line)
    if len(cells) != len(header):
        raise InputError(f"{name} line {number}", line, f"give {len(header)} values")
    values = {}
    for column, cell in zip(header, cells, strict=True):
        try:
            values[column] = float(cell if "_" not in cell else "")
        except ValueError:
            raise InputError(f"{name} line {number}, {column}", cell, "give a number") from None
    try:
        # as if the list's unit were mm: what fits does not depend on it, and remedies read right
        section_values(shape, {n: values[n] / 1e3 for n in SHAPES[shape].sizes})
    except InputError as fault:
        given = cells[header.index(fault.field)]
        remedy = fault.remedy.replace(" mm", f" {unit}")
        raise InputError(f"{name} line {number}, {fault.field}", given, remedy) from None
    sizes = {n: values[n] * _METRES[unit] for n in SHAPES[shape].sizes}
    label = " x ".join(f"{values[n]:g}" for n in SHAPES[shape].sizes)
    return StockSize(label, shape, sizes, name)
