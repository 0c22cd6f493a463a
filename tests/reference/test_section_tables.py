"""Section values against the tables that tube merchants print, and against one worked example.

``data/sections_hollow.csv``: EN 10210-2 (hot finished) and EN 10219-2 (cold formed) hollow
sections. ``data/sections_round_inch.csv``: AISC Shapes Database, round HSS, and VVES technical
data T403. ``data/sections_channel.csv``: rolled channels of EN 10365 (PFC, UPE) with finite-element
values beside them. ``data/section_channel_pilkey.json``: W. D. Pilkey, Analysis and Design of
Elastic Beams, Wiley 2002, Example B.2. Columns ``..._table`` are as printed and held to half the
last printed digit; the others were computed from the definitions to ten digits, hence 1e-9.
"""

from __future__ import annotations

import csv
import json
from decimal import Decimal
from pathlib import Path

import numpy as np
import pytest

from model.stock.sections import SectionValues, rectangular_tube, section_reach, section_values
from model.stock.warping import channel_warping

DATA = Path(__file__).parent / "data"
STEEL = 7850.0
INCH = 0.0254


def rows(name: str) -> list[dict[str, str]]:
    with (DATA / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def half_last_digit(printed: str, significant: int = 0) -> float:
    """Half of the last digit; of digit ``significant`` where trailing zeros were not kept."""
    number = Decimal(printed)
    last = int(number.as_tuple().exponent)
    if significant:
        last = min(last, number.adjusted() - significant + 1)
    return float(Decimal(1).scaleb(last) / 2)


# --- EN hollow sections ---------------------------------------------------------------------

HOLLOW = {f"{row['designation']} {row['standard']}": row for row in rows("sections_hollow.csv")}
THREE_DIGITS = 3
"""What these standards print of every value; the file has lost some zeros at the end."""


def hollow(row: dict[str, str]) -> dict[str, float]:
    """Values by column of a row; z is the weak axis there, as it is here."""
    depth, width, wall = (float(row[c]) for c in ("height_m", "width_m", "wall_m"))
    if row["shape"] == "circular":
        sizes = {"outside": depth, "wall": wall}
        got = section_values("round tube", sizes)
        cy, cz = section_reach("round tube", sizes)
    else:
        outer, inner = float(row["corner_outer_m"]), float(row["corner_inner_m"])
        b, h, t = (np.asarray(size) for size in (width, depth, wall))
        got = rectangular_tube(b, h, t, 0.3, outer, inner)
        cy, cz = section_reach("rectangular tube", {"width": width, "depth": depth, "wall": wall})
    return {
        "mass_kg_per_m": float(STEEL * got.A),
        "A_m2": float(got.A),
        "Iy_m4": float(got.Iy),
        "Iz_m4": float(got.Iz),
        "Wely_m3": float(got.Iy / cz),
        "Welz_m3": float(got.Iz / cy),
        "J_m4": float(got.J),
    }


@pytest.mark.parametrize("name", HOLLOW)
def test_hollow_section_agrees_with_the_printed_table(name):
    for column, got in hollow(HOLLOW[name]).items():
        printed = HOLLOW[name][f"{column}_table"]
        allowed = half_last_digit(printed, THREE_DIGITS)
        assert got == pytest.approx(float(printed), rel=0, abs=allowed), column


@pytest.mark.parametrize("name", HOLLOW)
def test_hollow_section_agrees_with_its_definition_to_ten_digits(name):
    for column, got in hollow(HOLLOW[name]).items():
        assert got == pytest.approx(float(HOLLOW[name][column]), rel=1e-9), column


def test_one_outside_radius_is_enough_for_cold_formed_tube():
    """EN 10219-2 has both corners run round one centre, so the inner radius follows."""
    cold = [r for r in HOLLOW.values() if r["standard"] == "EN 10219-2" and r["corner_outer_m"]]
    assert cold
    for row in cold:
        got = section_values(
            "rectangular tube",
            {
                "width": float(row["width_m"]),
                "depth": float(row["height_m"]),
                "wall": float(row["wall_m"]),
                "corner_radius": float(row["corner_outer_m"]),
            },
        )
        assert pytest.approx(float(row["A_m2"]), rel=1e-9) == got.A
        assert got.Iy == pytest.approx(float(row["Iy_m4"]), rel=1e-9)
        assert pytest.approx(float(row["J_m4"]), rel=1e-9) == got.J


# --- inch tubes -----------------------------------------------------------------------------

INCH_ROUND = {row["designation"]: row for row in rows("sections_round_inch.csv")}


def inch_round(row: dict[str, str]) -> SectionValues:
    sizes = {key: float(row[f"{key}_in"]) * INCH for key in ("outside", "wall")}
    return section_values("round tube", sizes)


@pytest.mark.parametrize("name", [n for n, row in INCH_ROUND.items() if row["A_in2_table"]])
def test_inch_tube_agrees_with_the_printed_table(name):
    """The outside of HSS2.375 counts as 2.375, not as the 2.38 that stands in its size column."""
    row = INCH_ROUND[name]
    got = inch_round(row)
    half = float(row["outside_in"]) / 2
    values = {"A_in2": got.A / INCH**2, "I_in4": got.Iy / INCH**4, "S_in3": got.Iy / half / INCH**4}
    if row["J_in4_table"]:
        values["J_in4"] = got.J / INCH**4
    for column, value in values.items():
        printed = row[f"{column}_table"]
        allowed = half_last_digit(printed)
        assert value == pytest.approx(float(printed), rel=0, abs=allowed), column


@pytest.mark.parametrize("name", INCH_ROUND)
def test_inch_tube_agrees_with_its_definition_to_ten_digits(name):
    row, got = INCH_ROUND[name], inch_round(INCH_ROUND[name])
    assert pytest.approx(float(row["A_m2"]), rel=1e-9) == got.A
    assert got.Iy == pytest.approx(float(row["I_m4"]), rel=1e-9)
    assert pytest.approx(float(row["J_m4"]), rel=1e-9) == got.J
    assert pytest.approx(float(row["mass_kg_per_m"]), rel=1e-9) == STEEL * got.A


# --- channels -------------------------------------------------------------------------------


def test_channel_of_pilkeys_example():
    """Area and second moments to the digits printed; the mid-line formulas as near as they are."""
    example = json.loads((DATA / "section_channel_pilkey.json").read_text(encoding="utf-8"))
    line, printed, allowed = (example[k] for k in ("midline", "published", "tolerance"))
    t = line["thickness"]
    sizes = {
        "flange": line["flange_from_web_centre"] + t / 2,
        "depth": line["web_between_flange_centres"] + t,
        "wall": t,
    }
    got = section_values("channel", sizes)
    j, iw, centre = channel_warping(sizes)
    assert pytest.approx(printed["A"], abs=0.05) == got.A
    assert got.Iy == pytest.approx(printed["I_strong"], abs=5e-6)
    assert got.Iz == pytest.approx(printed["I_weak"], abs=5e-6)
    assert got.J == j == pytest.approx(printed["J"], rel=allowed["J_midline"])
    assert iw == pytest.approx(printed["Iw"], rel=allowed["Iw_midline"])
    published = printed["shear_centre_from_web_centre"]
    assert centre == pytest.approx(published, rel=allowed["shear_centre_midline"])


ROLLED = {row["designation"]: row for row in rows("sections_channel.csv")}


@pytest.mark.parametrize("name", ROLLED)
def test_rolled_channel_lies_between_channels_of_its_thin_and_its_thick_wall(name):
    """A rolled channel has a thin web and thick flanges; ours has one wall all round.

    Whatever contains a section has more area, second moment and torsion constant than it, so
    ours with the web's wall lies below and with the flange's above, by construction.
    """
    row = ROLLED[name]
    depth, flange = float(row["height_m"]), float(row["width_m"])
    low, high = (
        section_values("channel", {"flange": flange, "depth": depth, "wall": float(row[wall])})
        for wall in ("web_m", "flange_m")
    )
    for value, column in (("A", "A_m2"), ("Iy", "Iy_m4"), ("Iz", "Iz_m4"), ("J", "J_m4")):
        printed = float(row[f"{column}_table"])
        assert getattr(low, value) < printed < getattr(high, value), value


@pytest.mark.parametrize("name", ROLLED)
def test_warping_constant_of_a_rolled_channel_lies_between_the_same_two(name):
    """Finite-element values: the printed Iw of the UPE rows is some 10 % off them, and not used."""
    row = ROLLED[name]
    depth, flange = float(row["height_m"]), float(row["width_m"])
    low, high = (
        channel_warping({"flange": flange, "depth": depth, "wall": float(row[wall])})[1]
        for wall in ("web_m", "flange_m")
    )
    assert low < float(row["Iw_m6_fe"]) < high
