"""Elementary effects against exact values; a screening run from study to verdict."""

import itertools
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from sweeps import jobs, runs
from sweeps.drivers import drivers
from sweeps.links import Group
from sweeps.sampling import Design
from sweeps.screening import effects, screening
from sweeps.study import Study
from sweeps.study_file import parse_study
from sweeps.study_text import write_study

EXACT = json.loads((Path(__file__).parents[1] / "reference/data/sensitivity.json").read_text())


def analysed(function, inputs: int, samples: int, parts: tuple[int, ...] = ()):
    design = Design(inputs, samples, method="screening", parts=parts, seed=2)
    unit = design.unit()
    shape = (samples, design.rows_per_sample)
    return effects(design, unit.reshape(*shape, inputs), function(unit).reshape(shape))


def test_a_linear_function_has_its_own_slopes_and_no_spread() -> None:
    slopes = np.array(EXACT["linear_model"]["example"]["c"], float)
    found = analysed(lambda u: u @ slopes, 3, 16)
    assert found["mu_star"] == pytest.approx(slopes, rel=1e-12)
    assert found["sigma"] == pytest.approx(0, abs=1e-12)


def test_ishigami_on_the_grid() -> None:
    def ishigami(u: np.ndarray) -> np.ndarray:
        x = np.pi * (2 * u - 1)
        return np.sin(x[:, 0]) + 7 * np.sin(x[:, 1]) ** 2 + 0.1 * x[:, 2] ** 4 * np.sin(x[:, 0])

    found = analysed(ishigami, 3, 4096)
    # every effect there is on the four levels, by enumeration
    exact = np.zeros(3)
    for k in range(3):
        rest = itertools.product(range(4), range(4), (0, 1))
        pairs = []
        for p, q, low in rest:
            ends = np.insert(np.array([[p, q]] * 2), k, [low, low + 2], axis=1) / 3
            y = ishigami(ends)
            pairs.append(abs(y[1] - y[0]) * 1.5)
        exact[k] = np.mean(pairs)
    assert exact[1] == pytest.approx(7.875)  # the published value
    spread = found["mu_star_conf"] * 2 + 1e-9
    assert (np.abs(found["mu_star"] - exact) < spread).all()
    assert found["mu_star"][1] == pytest.approx(7.875, rel=1e-9)


def test_morris_function_falls_into_its_three_classes() -> None:
    """Twenty inputs: 8 to 10 linear, 1 to 7 not linear, 11 to 20 without importance."""

    def morris(u: np.ndarray) -> np.ndarray:
        w = 2 * (u - 0.5)
        for i in (2, 4, 6):
            w[:, i] = 2 * (1.1 * u[:, i] / (u[:, i] + 0.1) - 0.5)
        y = np.zeros(len(u))
        for i in range(20):
            y += (20 if i < 10 else (-1) ** (i + 1)) * w[:, i]
        for i, j in itertools.combinations(range(20), 2):
            y += (-15 if j < 6 else (-1) ** (i + j + 2)) * w[:, i] * w[:, j]
        for i, j, k in itertools.combinations(range(5), 3):
            y += -10 * w[:, i] * w[:, j] * w[:, k]
        return y + 5 * w[:, 0] * w[:, 1] * w[:, 2] * w[:, 3]

    found = analysed(morris, 20, 64)
    mean, spread = found["mu_star"], found["sigma"]
    assert mean[7:10] == pytest.approx(40, abs=6)
    assert (spread[7:10] < 15).all()
    assert (spread[:7] > 20).all()
    assert (mean[10:] < mean[:10].min()).all()


@pytest.fixture
def screened(small_study: Study, tmp_path: Path) -> runs.Run:
    group = Group("wheelbase and wall", ("wheelbase_mm", "tube.lower rails.wall_mm"))
    study = replace(small_study, method="screening", samples=32, groups=(group,))
    assert parse_study(write_study(study)) == study
    run = runs.prepare(study, tmp_path / "run")
    jobs.carry_out(run)
    return run


def test_a_screening_run_judges_inputs_and_groups(screened: runs.Run) -> None:
    assert screened.design.rows == 32 * 4
    found = screening(screened)
    assert len(found.table) == 3
    assert "wheelbase and wall" in set(found.table["label"])
    assert found.dropped == 0
    assert (found.table["effect_low"] == found.table["effect"]).all()
    assert found.verdict.startswith("Matter: ")
    with pytest.raises(runs.RunError, match="is a screening"):
        drivers(screened)


def test_a_failed_frame_of_a_screening_is_said_and_bounded(screened: runs.Run) -> None:
    table = screened.table()
    exact = screening(screened, table=table).table.set_index("input")["effect"]
    table.loc[9, "twist_Nm_per_deg"] = np.nan
    found = screening(screened, table=table)
    assert found.dropped == 1
    assert found.failed["frame"].tolist() == [9]
    assert "1 of 32 trajectories" in found.verdict
    bounded = found.table.set_index("input").loc[exact.index]
    assert (bounded["effect_low"] <= exact + 1e-9).all()
    assert (bounded["effect_high"] >= exact - 1e-9).all()
    assert (bounded["effect_high"] > bounded["effect_low"]).any()


def test_groups_of_a_sobol_run_are_judged_as_one(small_study: Study, tmp_path: Path) -> None:
    group = Group("span", ("span.battery bay.bays", "span.battery bay.floor"))
    study = replace(small_study, samples=64, groups=(group,))
    run = runs.prepare(study, tmp_path / "run")
    jobs.carry_out(run)
    assert run.design.rows == 64 * 8
    found = drivers(run)
    row = found.table.set_index("label").loc["span"]
    assert row["inputs"] == "span.battery bay.bays, span.battery bay.floor"
    assert found.table["total"].sum() > 0.9
    assert len(found.pairs) == 3

    whole = runs.prepare(replace(study, groups=()), tmp_path / "whole")
    jobs.carry_out(whole)
    single = drivers(whole).table.set_index("input")
    parts = single.loc[list(group.paths)]
    # together they explain at least the best of them, at most all their totals
    assert row["total"] + row["total_interval"] > parts["first"].max()
    assert row["first"] - row["first_interval"] < parts["total"].sum() + 0.1
