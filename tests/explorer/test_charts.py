"""Charts are valid specifications of what their tables hold, and their words say the same."""

from __future__ import annotations

from typing import Any

import altair as alt
import numpy as np
import pandas as pd
import pytest

from explorer import charts, theme
from explorer.charts.binning import natural, stepwise
from explorer.numbers import SPACE as S
from explorer.units import INCH_POUND

DARK = pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])


def sweep(amount: int = 300) -> pd.DataFrame:
    random = np.random.default_rng(3)
    wall = random.uniform(1.2, 3.0, amount)
    floor = random.choice(["open", "single", "cross"], amount)
    mass = 40 + 12 * wall + 3 * (floor == "cross")
    return pd.DataFrame(
        {
            "frame": np.arange(amount) + 1000,
            "mass_kg": mass,
            "twist_Nm_per_deg": 900 * wall + 500 * (floor == "cross"),
            "tube.lower rails.wall_mm": wall,
            "span.cockpit.floor": floor,
        }
    )


def front_of(rows: pd.DataFrame) -> pd.DataFrame:
    ordered = rows.sort_values(["mass_kg", "twist_Nm_per_deg"], ascending=[True, False])
    best = ordered["twist_Nm_per_deg"].cummax().shift(fill_value=-1.0)
    return ordered[ordered["twist_Nm_per_deg"] > best]


def indices() -> pd.DataFrame:
    return pd.DataFrame(
        {
            "input": ["width", "wall", "size", "none"],
            "label": ["Dash: width", 'Lower rails: "wall"', "Side braces: size", "Track"],
            "first": [0.1, 0.38, 0.05, np.nan],
            "first_conf": [0.02, 0.03, 0.02, np.nan],
            "total": [0.15, 0.41, 0.06, np.nan],
            "total_conf": [0.03, 0.04, 0.02, np.nan],
        }
    )


def spec(chart: alt.LayerChart) -> dict[str, Any]:
    """The chart checked against the schema of Vega-Lite."""
    made: dict[str, Any] = chart.to_dict(validate=True)
    return made


def values(made: dict[str, Any], layer: int) -> list[dict[str, Any]]:
    part = made["layer"][layer]
    data = part.get("data", made.get("data"))
    rows: list[dict[str, Any]] = made["datasets"][data["name"]]
    return rows


def titles(made: dict[str, Any], channel: str) -> set[str]:
    found = (layer.get("encoding", {}).get(channel, {}) for layer in made["layer"])
    return {part["title"] for part in found if isinstance(part.get("title"), str)}


def names(made: dict[str, Any]) -> dict[str, dict[str, Any]]:
    return {layer.get("name", f"layer {i}"): layer for i, layer in enumerate(made["layer"])}


@DARK
def test_every_chart_wears_the_colours_of_the_page(dark):
    look = theme.colours(dark)
    rows, table = sweep(), indices()
    profile = pd.DataFrame({"position_mm": [0.0, 900, 2400], "angle_deg": [0.2, 0.15, 0.0]})
    stations = pd.DataFrame({"name": ["a", "b"], "position_mm": [0.0, 2400]})
    energy = pd.DataFrame({"group": ["rails"], "kind": ["bending"], "share": [1.0]})
    settling = table.dropna().assign(samples=64)
    made = [
        charts.front_chart(rows, front_of(rows), [1003], target=2000.0, dark=dark),
        charts.drivers_chart(table, dark=dark),
        charts.response_chart(rows, "tube.lower rails.wall_mm", "twist_Nm_per_deg", dark=dark),
        charts.response_chart(rows, "span.cockpit.floor", "twist_Nm_per_deg", dark=dark),
        charts.convergence_chart(settling, dark=dark),
        charts.profile_chart(profile, stations, dark=dark),
        charts.energy_bars(energy, dark=dark),
    ]
    for chart in made:
        config = spec(chart)["config"]
        assert config["axis"]["titleColor"] == look.ink
        assert config["axis"]["labelColor"] == look.muted
        assert spec(chart)["usermeta"]["embedOptions"]["renderer"] == "svg"


def test_few_frames_are_points_and_many_are_cells():
    rows = sweep(1999)
    few = names(spec(charts.front_chart(rows, front_of(rows))))
    assert "crowd" in few and "cells" not in few
    rows = sweep(2001)
    made = spec(charts.front_chart(rows, front_of(rows)))
    many = names(made)
    assert "cells" in many and "crowd" not in many
    counted = made["datasets"][many["cells"]["data"]["name"]]
    assert sum(cell["frames"] for cell in counted) == 2001


def test_the_front_chart_has_a_click_a_zoom_and_named_points():
    rows = sweep()
    made = spec(charts.front_chart(rows, front_of(rows)))
    assert {param["name"] for param in made["params"]} == set(charts.MODES)
    points = names(made)["front"]
    assert points["encoding"]["description"]["field"] == "said"
    assert points["mark"]["aria"] is True
    said = made["datasets"][points["data"]["name"]][0]["said"]
    assert said.startswith("Frame 1,") and said.endswith("N·m/deg")


def test_the_front_chart_marks_frames_picked_and_the_target():
    rows = sweep()
    made = spec(charts.front_chart(rows, front_of(rows), [1005, 1001], target=2000.0))
    letters = {row["letter"]: row["frame"] for row in values(made, len(made["layer"]) - 1)}
    assert letters == {"A": 1005, "B": 1001}
    said = [row.get("said") for name in made["datasets"] for row in made["datasets"][name]]
    assert f"target 2,000{S}N·m/deg" in said


def test_axes_carry_units_and_follow_the_display_units():
    rows = sweep()
    metric = spec(charts.front_chart(rows, front_of(rows)))
    inch = spec(charts.front_chart(rows, front_of(rows), units=INCH_POUND))
    assert titles(metric, "x") == {"Mass [kg]"}
    assert titles(metric, "y") == {"Twist stiffness [N·m/deg]"}
    assert titles(inch, "y") == {"Twist stiffness [ft·lbf/deg]"}
    kept, shown = values(metric, 0)[0], values(inch, 0)[0]
    assert shown["x"] == pytest.approx(kept["x"] / 0.45359237)
    assert shown["y"] == pytest.approx(kept["y"] / 1.3558179483314)


@pytest.mark.parametrize("amount", [300, 2500])
@pytest.mark.parametrize("colour", ["tube.lower rails.wall_mm", "span.cockpit.floor"])
def test_any_input_can_colour_the_front(amount, colour):
    rows = sweep(amount)
    made = spec(charts.front_chart(rows, front_of(rows), colour=colour, colour_words="The input"))
    hue = names(made)["front"]["encoding"]
    numeric = colour.endswith("_mm")
    assert hue["color"]["type"] == ("quantitative" if numeric else "nominal")
    assert hue["color"]["legend"]["title"] == ("The input [mm]" if numeric else "The input")
    assert ("shape" in hue) is not numeric  # choices differ by shape as well


def test_frames_without_a_result_are_left_out():
    rows = sweep()
    rows.loc[:9, "twist_Nm_per_deg"] = np.nan
    made = spec(charts.front_chart(rows, front_of(rows.dropna())))
    assert len(values(made, 0)) == 290


def test_a_sweep_without_a_frame_still_draws():
    rows = sweep(0)
    assert spec(charts.front_chart(rows, rows))
    assert charts.front_in_words(rows, rows) == ("Twist stiffness against mass of no frames.")


def test_clicks_come_back_as_ids():
    event = {"selection": {"frame": [{"frame": 1007}, {"other": 1}], "zoom": {"x": [1, 2]}}}
    assert charts.frames_clicked(event) == [1007]
    assert charts.frames_clicked({"selection": {"frame": {}}}) == []
    assert charts.frames_clicked(None) == []
    assert charts.input_clicked({"selection": {"input": [{"input": "wall"}]}}) == "wall"
    assert charts.input_clicked({"selection": {}}) is None


def test_words_of_the_front_name_its_ends_the_target_and_the_picked():
    rows = pd.DataFrame(
        {
            "frame": [7, 8, 9],
            "mass_kg": [50.0, 60.0, 70.0],
            "twist_Nm_per_deg": [1000.0, 2500.0, 2000.0],
        }
    )
    words = charts.front_in_words(rows, rows.head(2), [9], target=2000.0)
    assert words == (
        f"Twist stiffness against mass of 3{S}frames. 2{S}frames on the front, from 50{S}kg with "
        f"1,000{S}N·m/deg to 60{S}kg with 2,500{S}N·m/deg. 2{S}frames reach the target of "
        f"2,000{S}N·m/deg. A is frame 9: 70{S}kg and 2,000{S}N·m/deg."
    )


def test_cells_count_every_row_and_name_the_stiffest():
    rows = sweep(5000).assign(colour=lambda r: r["span.cockpit.floor"])
    table = charts.cells(rows, "mass_kg", "twist_Nm_per_deg", 12, 9)
    assert table["frames"].sum() == 5000
    sample: list[Any] = list(table.sample(8, random_state=1).itertuples())
    for cell in sample:
        inside = rows[
            rows["mass_kg"].between(cell.x1, cell.x2)
            & rows["twist_Nm_per_deg"].between(cell.y1, cell.y2)
        ]
        assert len(inside) == cell.frames
        best = inside.sort_values("twist_Nm_per_deg").iloc[-1]
        assert best["frame"] == cell.frame
        commonest = inside["colour"].value_counts()
        assert commonest[cell.colour] == commonest.max()


def test_cells_of_equal_values_are_one_cell():
    rows = sweep(50).assign(mass_kg=5.0, twist_Nm_per_deg=2.0)
    assert charts.cells(rows, "mass_kg", "twist_Nm_per_deg")["frames"].tolist() == [50]


def test_a_band_along_numbers_has_bins_of_equal_size():
    rows = sweep(1000)
    table = charts.response_table(rows, "tube.lower rails.wall_mm", "twist_Nm_per_deg", bins=10)
    assert table["frames"].tolist() == [100] * 10
    assert table["value"].is_monotonic_increasing
    assert (table["low"] <= table["median"]).all() and (table["median"] <= table["high"]).all()
    first = rows.sort_values("tube.lower rails.wall_mm").head(100)["twist_Nm_per_deg"]
    expected = first.quantile([0.1, 0.5, 0.9]).to_numpy()
    assert table.loc[0, ["low", "median", "high"]].to_numpy(float) == pytest.approx(expected)


def test_choices_stay_as_they_are_in_natural_order():
    rows = pd.DataFrame({"size": ["25 x 1.5", "5 x 1", "25 x 1.5", None], "out": [1.0, 2, 3, 4]})
    table = charts.response_table(rows, "size", "out")
    assert table["value"].tolist() == ["5 x 1", "25 x 1.5"]
    assert table["median"].tolist() == [2, 2]
    assert stepwise(pd.Series([1, 2, 2])) and not stepwise(pd.Series(np.arange(50.0)))
    assert sorted(["cross", "10 a", "9 a"], key=natural) == ["9 a", "10 a", "cross"]


def test_the_response_follows_the_display_units():
    rows = sweep()
    made = spec(
        charts.response_chart(
            rows, "tube.lower rails.wall_mm", "mass_kg", label="Lower rails: wall", units=INCH_POUND
        )
    )
    assert titles(made, "x") == {"Lower rails: wall [in]"}
    assert titles(made, "y") == {"Mass [lb]"}
    words = charts.response_in_words(
        rows, "tube.lower rails.wall_mm", "mass_kg", label="Lower rails: wall"
    )
    assert words.startswith("Median mass goes from ")
    assert "as Lower rails: wall goes from 1.2" in words
    by_choice = charts.response_in_words(rows, "span.cockpit.floor", "twist_Nm_per_deg")
    assert "cross: " in by_choice and "open: " in by_choice


def test_drivers_are_ranked_with_whiskers_of_one_interval():
    made = spec(charts.drivers_chart(indices(), picked="wall"))
    bars = values(made, 0)
    assert [bar["label"] for bar in bars[:3]] == [
        'Lower rails: "wall"',
        "Dash: width",
        "Side braces: size",
    ]
    total = bars[0]
    assert (total["low"], total["high"]) == pytest.approx((0.37, 0.45))
    assert total["written"] == f"41{S}% ± 4.0{S}%"
    assert len(bars) == 6  # two bars for each of the three known inputs
    assert charts.drivers_in_words(indices(), "twist stiffness").startswith(
        f'What explains the variation in twist stiffness, greatest first: Lower rails: "wall" '
        f"41{S}% (± 4.0{S}%), 38{S}% on its own;"
    )


def test_inputs_of_one_label_are_told_apart():
    table = indices().assign(label="Wall").dropna()
    labels = {bar["label"] for bar in values(spec(charts.drivers_chart(table)), 0)}
    assert labels == {"Wall (wall)", "Wall (width)", "Wall (size)"}


def test_no_driver_is_said_in_words():
    table = indices().iloc[3:]
    assert charts.drivers_in_words(table, "mass") == "No input of the sweep changes the mass."


def test_convergence_shows_the_leading_inputs_at_every_size():
    known = indices().dropna()
    table = pd.concat(
        known.assign(samples=size, total=known["total"] + 0.02 / i)
        for i, size in enumerate((256, 512, 1024), start=1)
    )
    made = spec(charts.convergence_chart(table, most=2))
    assert {row["label"] for row in values(made, 0)} == {'Lower rails: "wall"', "Dash: width"}
    axis = made["layer"][0]["encoding"]["x"]["axis"]
    assert axis["labelExpr"] == '["256","512","1,024"][datum.value]'
    assert charts.convergence_in_words(table).startswith(
        f'From 512 to 1,024 base samples: Lower rails: "wall" moved by 0.3{S}% to 42{S}%;'
    )


def test_the_profile_names_its_stations_and_where_it_twists():
    profile = pd.DataFrame({"position_mm": [0.0, 1000, 2000], "angle_deg": [0.3, 0.25, 0.0]})
    stations = pd.DataFrame(
        {"name": ["front axle", 'the "dash"', "rear axle"], "position_mm": [0.0, 1000, 2000]}
    )
    made = spec(charts.profile_chart(profile, stations, couple_Nm=1000.0))
    top = made["layer"][0]["encoding"]["x"]["axis"]
    assert top["values"] == [0, 1000, 2000]
    assert '"the \\"dash\\""' in top["labelExpr"]
    assert titles(made, "y") == {f"Twist [deg at 1,000{S}N·m]"}
    assert charts.profile_in_words(profile, stations) == (
        f"The frame twists by 0.300{S}deg over 2,000{S}mm. Most for its length between "
        f'the "dash" and rear axle: 0.250{S}deg.'
    )


def test_energy_is_stacked_by_kind_with_the_greatest_group_first():
    table = pd.DataFrame(
        {
            "group": ["rails", "rails", "braces", "braces"],
            "kind": ["axial", "bending", "axial", "bending"],
            "share": [0.1, 0.2, 0.65, 0.05],
        }
    )
    made = spec(charts.energy_bars(table, kinds=("axial", "bending")))
    rows = values(made, 0)
    assert [row["group"] for row in rows] == ["braces", "braces", "rails", "rails"]
    assert [(row["start"], row["end"]) for row in rows[:2]] == [
        pytest.approx((0, 0.65)),
        pytest.approx((0.65, 0.70)),
    ]
    assert rows[1]["said"] == f"braces, bending: 5.0{S}%"
    assert charts.energy_in_words(table) == (
        f"Strain energy under twist by group: braces 70{S}% and rails 30{S}%. "
        f"By kind: axial 75{S}% and bending 25{S}%."
    )


def test_both_looks_are_registered_as_themes():
    for name in ("twistfront light", "twistfront dark"):
        assert name in alt.theme.names()
