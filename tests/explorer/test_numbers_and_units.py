"""Numbers are written one way everywhere, and units follow from their definitions."""

from __future__ import annotations

import math

import numpy as np
import pytest

from explorer import numbers
from explorer.units import INCH_POUND, METRIC, quantity_of, title_of, words_of

S = numbers.SPACE


@pytest.mark.parametrize(
    ("value", "written"),
    [
        (12288, "12,288"),
        (1234.5, "1,234"),
        (99.96, "100"),
        (9.9999, "10.0"),
        (57.0, "57"),
        (0.5, "0.500"),
        (0.012345, "0.0123"),
        (-3.14159, "−3.14"),
        (0, "0"),
        (-0.0, "0"),
        (1.5e-7, "1.50×10⁻⁷"),
        (math.nan, "–"),
        (None, "–"),
        (math.inf, "∞"),
        (np.float64(4823.4), "4,823"),
    ],
)
def test_numbers_show_significant_figures_and_never_round_whole_digits(value, written):
    assert numbers.number(value) == written


@pytest.mark.parametrize(
    ("share", "written"),
    [
        (0.413, f"41{S}%"),
        (0.0996, f"10{S}%"),
        (0.0321, f"3.2{S}%"),
        (0.0004, f"<{S}0.1{S}%"),
        (0.0, f"0{S}%"),
        (-0.02, f"−2.0{S}%"),
        (math.nan, "–"),
    ],
)
def test_shares_are_written_in_per_cent(share, written):
    assert numbers.percent(share) == written


def test_changes_carry_their_sign():
    assert numbers.signed(0.424, "kg") == f"+0.424{S}kg"
    assert numbers.signed(-12, "kg") == f"−12{S}kg"
    assert numbers.signed(0, "kg") == f"±0{S}kg"


def test_counts_and_lists_read_as_sentences():
    assert numbers.count(0, "frame") == "no frames"
    assert numbers.count(1, "frame") == f"1{S}frame"
    assert numbers.count(12288, "frame") == f"12,288{S}frames"
    assert numbers.listed([]) == ""
    assert numbers.listed(["a", "b"]) == "a and b"
    assert numbers.listed(["a", "b", "c"], "or") == "a, b or c"


@pytest.mark.parametrize(
    ("quantity", "stored", "shown", "unit"),
    [
        ("length", 25.4, 1.0, "in"),
        ("mass", 0.45359237, 1.0, "lb"),
        ("stock", 0.3048, 1.0, "ft"),
        # 1 lbf = 4.4482216152605 N; 1 ft·lbf = 1.3558179483314 N·m (both exact)
        ("force", 4.4482216152605, 1.0, "lbf"),
        ("moment", 1.3558179483314004, 1.0, "ft·lbf"),
        ("twist", 1355.8179483314004, 1000.0, "ft·lbf/deg"),
        ("bend", 4.4482216152605 / 25.4, 1.0, "lbf/in"),
        ("line mass", 0.45359237 / 0.3048, 1.0, "lb/ft"),
        ("stress", 6.894757293168361, 1.0, "ksi"),
        ("twist per mass", 1.3558179483314004 / 0.45359237, 1.0, "ft·lbf/deg per lb"),
        ("share", 0.41, 41.0, "%"),
        ("angle", 2.0, 2.0, "deg"),
    ],
)
def test_inch_and_pound_units_follow_their_definitions(quantity, stored, shown, unit):
    assert INCH_POUND.shown(stored, quantity) == pytest.approx(shown, rel=1e-12)
    assert INCH_POUND.stored(shown, quantity) == pytest.approx(stored, rel=1e-12)
    assert INCH_POUND.unit(quantity) == unit


def test_metric_units_are_those_of_the_tables():
    kept = {quantity: METRIC.shown(1.0, quantity) for quantity in METRIC.of if quantity != "share"}
    assert set(kept.values()) == {1.0}


def test_both_systems_know_the_same_quantities():
    assert set(METRIC.of) == set(INCH_POUND.of)


@pytest.mark.parametrize(
    ("column", "title"),
    [
        ("mass_kg", "Mass [kg]"),
        ("twist_Nm_per_deg", "Twist stiffness [N·m/deg]"),
        ("bend_N_per_mm", "Bending stiffness [N/mm]"),
        ("twist_per_kg", "Twist stiffness per mass [N·m/deg per kg]"),
        ("axial_share", "Axial share [%]"),
        ("tube.lower rails.wall_mm", "Tube, lower rails, wall [mm]"),
        ("span.cockpit.floor", "Span, cockpit, floor"),
    ],
)
def test_a_column_says_what_it_holds_and_in_which_unit(column, title):
    assert title_of(column, METRIC) == title


def test_arrays_are_shown_like_numbers():
    assert INCH_POUND.shown(np.array([25.4, 50.8]), "length") == pytest.approx([1, 2])
    assert METRIC.write(None, "mass") == "–"
    assert METRIC.write(5120.4, "twist") == f"5,120{S}N·m/deg"
    assert quantity_of("frame") == "none"
    assert words_of("frame") == "Frame"
