"""A frame without a result is listed, left out and bounded; nothing is silently zero."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from model.frame import variants as model_variants
from sweeps import evaluate as evaluating
from sweeps import jobs, runs
from sweeps.drivers import drivers
from sweeps.evaluate import OK
from sweeps.failures import failures
from sweeps.indices import bounds, indices
from sweeps.outputs import OUTPUTS
from sweeps.sampling import Design
from sweeps.study import Study


@pytest.fixture
def damage(monkeypatch: pytest.MonkeyPatch) -> Callable[..., None]:
    """Damage the built frames whose wheelbase [m] is given, before they are solved."""
    build = model_variants.variants

    def with_faults(loose: float, missing: float) -> None:
        def variants(layout, columns, n):
            batches, refused = build(layout, columns, n)
            for batch in batches:
                wheelbase = columns["wheelbase"][batch.rows]
                batch.present.flags.writeable = True
                batch.present[wheelbase == loose, 3:] = False
                batch.xyz[wheelbase == missing, 0] = np.nan
            return batches, refused

        monkeypatch.setattr(evaluating, "variants", variants)

    return with_faults


def test_one_loose_frame_and_one_nan_among_ten_thousand(
    small_study: Study, tmp_path: Path, damage: Callable[..., None]
) -> None:
    study = replace(small_study, samples=1024)
    whole = runs.prepare(study, tmp_path / "whole")
    jobs.carry_out(whole)
    design = whole.design
    assert design.rows == 10240
    wheelbase = next(k for k, i in enumerate(study.inputs) if i.path == "wheelbase_mm")
    # A with the wheelbase of B: these frames share it with few others
    places = [design.rows_per_sample * sample + 1 + wheelbase for sample in (77, 901)]
    values = [study.inputs[wheelbase].numbers(design.row(p))[wheelbase] * 1e-3 for p in places]
    damage(*values)
    run = runs.prepare(study, tmp_path / "damaged")
    ended = jobs.carry_out(run)
    table, good = run.table(), whole.table()
    bad = (table["wheelbase_mm"] * 1e-3).isin(values).to_numpy()
    assert bad[places].all()
    assert ended.failed == bad.sum() > 0
    results = list(OUTPUTS)
    assert table.loc[bad, results].isna().all(axis=None)
    assert (table.loc[bad, "status"] != OK).all()
    assert table["status"].str.startswith("loose: joint")[places].tolist() == [True, False]
    assert table["status"].str.startswith("no number: position")[places].tolist() == [False, True]
    assert (table.loc[~bad, results].to_numpy() == good.loc[~bad, results].to_numpy()).all()
    assert (table.loc[~bad, results] > 0).all(axis=None)

    listed = failures(run)
    assert listed["frame"].tolist() == np.flatnonzero(bad).tolist()
    assert listed["wheelbase_mm"].tolist() == table["wheelbase_mm"][bad].tolist()
    assert (listed["reason"].str.len() > 10).all()

    found = drivers(run)
    assert set(found.affected) == {77, 901}
    assert (found.used, found.dropped) == (1022, 2)
    assert "2 of 1024 base samples (0.2%) hold the" in found.verdict
    assert "no index would differ by more than" in found.verdict
    assert found.failed["frame"].tolist() == listed["frame"].tolist()
    exact = drivers(whole).table.set_index("input")
    bounded = found.table.set_index("input").loc[exact.index]
    for kind in ("first", "total"):
        assert (bounded[f"{kind}_low"] <= exact[kind]).all()
        assert (exact[kind] <= bounded[f"{kind}_high"]).all()
        assert (bounded[f"{kind}_high"] - bounded[f"{kind}_low"] < 0.1).all()
    assert (exact["total_low"] == exact["total"]).all()


@given(st.integers(0, 10_000), st.integers(1, 6))
def test_no_results_within_the_range_leave_the_bounds(seed: int, missing: int) -> None:
    random = np.random.default_rng(seed)
    unit = Design(3, 64).unit()
    values = (np.sin(6 * unit[:, 0]) + unit[:, 1] ** 2 * (1 + unit[:, 2])).reshape(64, -1)
    gone = random.choice(values.size, missing, replace=False)
    holes = values.copy()
    holes.flat[gone] = np.nan
    could = bounds(holes, 3, True)
    least, most = np.nanmin(holes), np.nanmax(holes)
    centre = np.nanmean(holes)
    assert could.second is not None
    for fill in (least, most, random.uniform(least, most, missing), random.choice([least, most],
                 missing), values.flat[gone]):  # fmt: skip
        filled = holes.copy()
        filled.flat[gone] = np.clip(fill, least, most)
        # the estimator about the same centre: it moves with the centre by chance
        shift = filled.mean() - centre
        found = indices(filled - centre, 3, True, 2)
        room = 1e-9 + 4 * abs(shift) / filled.std()
        for value, bound in (
            (found.first, could.first),
            (found.total, could.total),
        ):
            assert (value >= bound[0] - room).all()
            assert (value <= bound[1] + room).all()


def test_a_missing_result_of_a_frame_that_is_ok_is_listed_all_the_same(small_run) -> None:
    table = small_run.table()
    assert failures(small_run).empty
    table.loc[3, "bend_N_per_mm"] = np.nan
    assert failures(table)["reason"].tolist() == ["no result: bend_N_per_mm"]
    assert failures(table, "mass_kg").empty


def test_a_ranking_that_failed_frames_could_turn_is_not_called_settled(small_run) -> None:
    table = small_run.table()
    table.loc[table["frame"] % 40 == 3, "twist_Nm_per_deg"] = np.nan
    found = drivers(small_run, table=table)
    assert "frames that failed could change" in found.verdict
    assert "settled." not in found.verdict
    pairs = found.pairs
    assert (pairs["second_low"] <= pairs["second"]).all()
    assert (pairs["second"] <= pairs["second_high"]).all()
