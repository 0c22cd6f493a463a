"""The frame looked at closely is the frame that the sweep solved."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest

from model.errors import InputError
from sweeps.candidate import detail_of, layout_of, row_of
from sweeps.catalogue import catalogue
from sweeps.failures import OK
from sweeps.jobs import carry_out
from sweeps.runs import Run, RunError, prepare
from sweeps.study_file import read_study


@pytest.fixture(scope="module", params=sorted(catalogue().vehicles))
def run(request, tmp_path_factory) -> Run:
    study = dataclasses.replace(read_study(request.param), samples=16)
    made = prepare(study, tmp_path_factory.mktemp("run"))
    carry_out(made)
    return made


def test_a_frame_solved_again_has_its_stored_results(run):
    table = run.table()
    for frame in np.random.default_rng(3).integers(0, len(table), 12):
        row = table.iloc[frame]
        assert row["status"] == OK
        detail = detail_of(run, int(frame))
        # alone or among others, the same equations: rounding of a different order of sums
        for column, found in (
            ("mass_kg", detail.mass),
            ("twist_Nm_per_deg", detail.twist),
            ("bend_N_per_mm", detail.bend),
            ("axial_share", detail.axial_share),
        ):
            assert found == pytest.approx(row[column], rel=1e-9, abs=1e-12)


def test_the_row_of_a_frame_is_its_row_of_the_table(run):
    table = run.table()
    for frame in (0, 1, len(table) - 1):
        assert row_of(run, frame).equals(table.iloc[frame])
        assert row_of(run, frame)["frame"] == frame


def test_the_layout_holds_the_inputs_that_the_table_shows(run):
    row = row_of(run, 5)
    layout = layout_of(run, 5)
    assert layout.wheelbase * 1e3 == pytest.approx(row["wheelbase_mm"], rel=1e-12)
    for given in run.study.inputs:
        kind, owner, name = [*given.path.split("."), "", ""][:3]
        if kind == "tube" and name == "stock":
            assert layout.tubes[owner].stock == row[given.path]
        if kind == "span" and name == "bays":
            assert layout.span(owner).bays == row[given.path]


@pytest.mark.parametrize("frame", [-1, 10**6])
def test_a_frame_that_the_run_does_not_have_is_refused(run, frame):
    for ask in (layout_of, row_of, detail_of):
        with pytest.raises(InputError, match="use a frame of the run"):
            ask(run, frame)


def test_a_frame_not_solved_yet_has_a_layout_and_no_results(tmp_path):
    study = dataclasses.replace(read_study("orchard-truck"), samples=16)
    run = prepare(study, tmp_path / "run")
    assert layout_of(run, 3).wheelbase > 0
    with pytest.raises(InputError, match="not solved yet"):
        detail_of(run, 3)


@pytest.fixture
def changed(tmp_path):
    """A run one of whose rows is changed on disk by a function."""

    def change(column: str, value: object) -> Run:
        study = dataclasses.replace(read_study("orchard-truck"), samples=8)
        run = prepare(study, tmp_path / "run")
        carry_out(run)
        table = run.table()
        table[column] = table[column].where(table["frame"] != 4, value)
        run.write_block(0, table)
        return run

    return change


def test_a_stored_result_of_another_frame_is_noticed(changed):
    with pytest.raises(RunError, match=r"frame 4 is stored with twist_Nm_per_deg = 1234"):
        detail_of(changed("twist_Nm_per_deg", 1234.0), 4)


def test_a_frame_that_failed_is_refused_with_its_reason(changed):
    with pytest.raises(InputError, match=r"FRAME = 4: take another; this one was loose: joint A"):
        detail_of(changed("status", "loose: joint A moves freely in x: brace it"), 4)
