"""Materials with their stiffness, density and strength, read from a table of data."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass

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


def parse_materials(text: str) -> dict[str, Material]:
    """Materials by name from TOML: one table each, E_GPa, G_GPa, density_kg_per_m3, yield_MPa."""
    found = {}
    for name, row in tomllib.loads(text).items():
        for key in ("E_GPa", "G_GPa", "density_kg_per_m3", "yield_MPa"):
            value = row.get(key)
            if not isinstance(value, int | float) or not 0 < value < 1e6:
                raise InputError(f"{name}.{key}", repr(value), "give a positive number")
        welded = row.get("welded_MPa")
        found[name] = Material(
            name,
            row["E_GPa"] * 1e9,
            row["G_GPa"] * 1e9,
            float(row["density_kg_per_m3"]),
            row["yield_MPa"] * 1e6,
            None if welded is None else welded * 1e6,
            row.get("price_per_kg"),
            row.get("note", ""),
            row.get("source", ""),
        )
    return found
