"""Materials read from a table: the units, and a fault for every way to get it wrong."""

from __future__ import annotations

import pytest

from model.errors import InputError
from model.stock.materials import parse_materials

GOOD = """
["mild steel"]
E_GPa = 210
G_GPa = 81
density_kg_per_m3 = 7850
yield_MPa = 235
welded_MPa = 200
price_per_kg = 2
note = "tube"
"""


def test_values_come_in_si_units():
    steel = parse_materials(GOOD)["mild steel"]
    assert (steel.E, steel.G, steel.density) == (210e9, 81e9, 7850.0)
    assert (steel.yield_strength, steel.welded_strength) == (235e6, 200e6)
    assert (steel.price_per_kg, steel.note, steel.source) == (2.0, "tube", "")


def test_strength_beside_a_weld_and_price_may_be_left_out():
    steel = parse_materials(GOOD.replace("welded_MPa = 200\nprice_per_kg = 2\n", ""))["mild steel"]
    assert steel.welded_strength is None
    assert steel.price_per_kg is None


@pytest.mark.parametrize(
    "old, new, field, said",
    [
        ("E_GPa = 210", "", "mild steel.E_GPa", "not given"),
        ("E_GPa = 210", "E_GPa = -1", "mild steel.E_GPa", "-1"),
        ("E_GPa = 210", "E_GPa = nan", "mild steel.E_GPa", "nan"),
        ("E_GPa = 210", "E_GPa = 210e9", "mild steel.E_GPa", "positive number"),
        ("yield_MPa = 235", "yield_MPa = true", "mild steel.yield_MPa", "True"),
        ("yield_MPa = 235", 'yield_MPa = "235"', "mild steel.yield_MPa", "'235'"),
        ("G_GPa = 81", "G_GPa = 810", "mild steel.G_GPa", "below E"),
        ("welded_MPa = 200", "welded_MPa = 300", "mild steel.welded_MPa", "235"),
        ("price_per_kg = 2", "price_per_kg = 0", "mild steel.price_per_kg", "positive"),
        ("price_per_kg", "prize_per_kg", "mild steel.prize_per_kg", "price_per_kg"),
        ('note = "tube"', "note = 3", "mild steel.note", "quotes"),
        ('["mild steel"]', "steel = 3\n['mild steel']", "steel", "table"),
        ("E_GPa = 210", "E_GPa = ", "materials", "line 3"),
    ],
)
def test_a_fault_names_the_material_and_the_key(old, new, field, said):
    assert old in GOOD
    with pytest.raises(InputError) as caught:
        parse_materials(GOOD.replace(old, new))
    assert caught.value.field == field
    assert said in str(caught.value)
