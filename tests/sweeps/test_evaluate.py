"""Rows of results: equal whatever the blocks and threads, never silently zero."""

from dataclasses import replace
from typing import Any

import numpy as np
import pandas as pd
import pytest

from model.results.detail import examine
from sweeps import evaluate as evaluating
from sweeps.evaluate import OK, evaluate
from sweeps.inputs import Input
from sweeps.sampling import Design
from sweeps.study import Study, with_value
from sweeps.study_file import read_study


@pytest.mark.parametrize(
    "vehicle", ["orchard-truck", "open-sports-car", "hill-climb-single-seater"]
)
def test_rows_equal_the_frames_examined_one_by_one(vehicle: str) -> None:
    study = read_study(vehicle)
    unit = Design(len(study.inputs), 2).unit()[::9]
    table = evaluate(study, unit, threads=1)
    assert (table["status"] == OK).all()
    for row, u in zip(table.itertuples(), unit, strict=True):
        found = examine(study.layout_at(u))
        assert row.twist_Nm_per_deg == pytest.approx(found.twist, rel=1e-9)
        assert row.mass_kg == pytest.approx(found.bill.mass, rel=1e-9)


def test_blocks_and_threads_do_not_change_a_bit() -> None:
    study = read_study("hill-climb-single-seater")
    unit = Design(len(study.inputs), 16).unit()
    whole = evaluate(study, unit, threads=2)
    parts = [evaluate(study, unit[k : k + 37], k, threads=1) for k in range(0, len(unit), 37)]
    pd.testing.assert_frame_equal(whole, pd.concat(parts, ignore_index=True), check_exact=True)


def test_a_longer_design_begins_with_the_shorter_one() -> None:
    for second_order in (True, False):
        short = Design(5, 64, second_order, 3).unit()
        assert np.array_equal(short, Design(5, 128, second_order, 3).unit()[: len(short)])


def test_frames_that_cannot_be_built_are_named_and_nan(small_study: Study) -> None:
    unit = np.full((4, len(small_study.inputs)), 0.5)
    wall = [i.path for i in small_study.inputs].index("tube.lower rails.wall_mm")
    unit[1, wall] = 20.0  # far outside the range: a wall of 38 mm
    unit[2, wall] = np.nan
    table = evaluate(small_study, unit)
    assert table["status"].str.startswith("refused: tube.lower rails.wall_mm").tolist() == [
        False, True, True, False,
    ]  # fmt: skip
    columns = ["mass_kg", "twist_Nm_per_deg", "bend_N_per_mm", "axial_share", "twist_per_kg"]
    assert table.loc[[1, 2], columns].isna().all(axis=None)
    assert (table.loc[[0, 3], columns].fillna(-1) >= 0).all(axis=None)


def test_loose_frames_are_named_and_the_others_keep_their_bits(small_study: Study) -> None:
    """Rails and braces pinned everywhere: only cross members that are welded hold the ladder."""
    layout = small_study.layout
    for group in ("lower rails", "floor braces"):
        layout = with_value(layout, f"tube.{group}.rotation_Nm_per_rad", 0.0)
    stiffness = Input(
        "tube.cross members.rotation_Nm_per_rad", "Weld", "Nm_per_rad", options=(0.0, 1e6)
    )
    study = replace(small_study, layout=layout, inputs=(*small_study.inputs, stiffness))
    unit = Design(5, 4, seed=3).unit()
    table = evaluate(study, unit)
    pinned = unit[:, 4] < 0.5
    bad = table["status"] != OK
    assert bad[pinned].all()
    assert table["status"][bad].str.startswith("loose: joint").all()
    assert table["twist_Nm_per_deg"][bad].isna().all()
    good = np.flatnonzero(~bad)
    if len(good):
        alone = evaluate(study, unit[good])
        assert np.array_equal(alone["twist_Nm_per_deg"], table["twist_Nm_per_deg"].iloc[good])


def test_equal_frames_are_found_even_where_their_marks_meet(
    small_study: Study, monkeypatch: pytest.MonkeyPatch
) -> None:
    unit = Design(4, 64, seed=2).unit()
    unit = np.concatenate([unit, unit[::7]])
    rows_one_by_one = []
    unique = np.unique

    def counting(*given: Any, **more: Any) -> Any:
        rows_one_by_one.append("axis" in more)
        return unique(*given, **more)

    monkeypatch.setattr(np, "unique", counting)
    first, again = evaluating._distinct(small_study, unit)
    assert not any(rows_one_by_one)
    monkeypatch.setattr(evaluating, "_MARKS", np.zeros(4, np.uint64))
    slowly = evaluating._distinct(small_study, unit)
    assert any(rows_one_by_one)
    assert np.array_equal(first, slowly[0])
    assert np.array_equal(again, slowly[1])
    columns = small_study.table(unit)
    assert len(first) == len(columns.drop_duplicates()) < len(unit)
    assert columns.iloc[first[again]].reset_index(drop=True).equals(columns)
