"""The result columns: name, words, unit and which way is better."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Output:
    """One result column. ``more_is_better`` is None where neither is."""

    column: str
    label: str
    unit: str
    more_is_better: bool | None


OUTPUTS = {
    o.column: o
    for o in (
        Output("twist_Nm_per_deg", "twist stiffness", "N·m/deg", True),
        Output("mass_kg", "mass", "kg", False),
        Output("twist_per_kg", "twist stiffness for each kilogram", "N·m/deg per kg", True),
        Output("bend_N_per_mm", "bending stiffness", "N/mm", True),
        Output("axial_share", "axial share", "", None),
        Output("stock_m", "tube length", "m", False),
    )
}
"""Result columns by name, the most asked for first."""
