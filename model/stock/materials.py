"""Materials with their stiffness, density and strength, read from a table of data."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from typing import Any

from model.errors import InputError


@dataclass(frozen=True)
class Material:
    """One material; E, G, strengths [Pa], density [kg/m³], price per kg (an estimate to edit)."""

    name: str
    E: float
    G: float
    density: float
    yield_strength: float
    welded_strength: float | None = None
    price_per_kg: float | None = None
    note: str = ""
    source: str = ""


_NEEDED = ("E_GPa", "G_GPa", "density_kg_per_m3", "yield_MPa")
_NUMBERS = (*_NEEDED, "welded_MPa", "price_per_kg")
_TEXTS = ("note", "source")


def parse_materials(text: str) -> dict[str, Material]:
    """Materials by name from TOML, one table each.

    E_GPa, G_GPa, density_kg_per_m3 and yield_MPa are needed; welded_MPa (strength beside a
    weld), price_per_kg, note and source may be left out.

    Raises
    ------
    InputError
        Names the material and the key at fault, or the line where the text is no TOML.
    """
    try:
        tables = tomllib.loads(text.removeprefix("\ufeff"))
    except tomllib.TOMLDecodeError as fault:
        raise InputError("materials", "no TOML", str(fault)) from None
    return {name: _material(name, row) for name, row in tables.items()}


def _material(name: str, row: Any) -> Material:
    if not isinstance(row, dict):
        raise InputError(name, repr(row), f'write a table: ["name"] with {", ".join(_NEEDED)}')
    for key in row:
        if key not in (*_NUMBERS, *_TEXTS):
            raise InputError(f"{name}.{key}", repr(row[key]),
                             f"use only {', '.join((*_NUMBERS, *_TEXTS))}")  # fmt: skip
    for key in _NUMBERS:
        if key not in row and key not in _NEEDED:
            continue
        value = row.get(key)
        number = isinstance(value, int | float) and not isinstance(value, bool)
        if value is None or not number or not 0 < value < 1e6:
            given = repr(value) if key in row else "not given"
            raise InputError(f"{name}.{key}", given, "give a positive number")
    for key in _TEXTS:
        if not isinstance(row.get(key, ""), str):
            raise InputError(f"{name}.{key}", repr(row[key]), "give a text in quotes")
    if row["G_GPa"] >= row["E_GPa"]:
        raise InputError(f"{name}.G_GPa", f"{row['G_GPa']:g}", "stay below E; metals have E/2.6")
    welded = row.get("welded_MPa")
    if welded is not None and welded > row["yield_MPa"]:
        raise InputError(f"{name}.welded_MPa", f"{welded:g}",
                         f"stay at or below yield_MPa, {row['yield_MPa']:g}")  # fmt: skip
    price = row.get("price_per_kg")
    return Material(
        name,
        row["E_GPa"] * 1e9,
        row["G_GPa"] * 1e9,
        float(row["density_kg_per_m3"]),
        row["yield_MPa"] * 1e6,
        None if welded is None else welded * 1e6,
        None if price is None else float(price),
        row.get("note", ""),
        row.get("source", ""),
    )
