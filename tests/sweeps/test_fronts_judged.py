"""Fronts judged: hypervolume, three columns, the best line, tolerances.

Exact hypervolumes in closed form: ``tests/reference/data/fronts.json``.
"""

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from model.errors import InputError
from sweeps import jobs, runs
from sweeps.best_line import behind_line, behind_own_layout
from sweeps.front import Front, front
from sweeps.hypervolume import hypervolume
from sweeps.runs import Run
from sweeps.search import sizing_front, sizing_of
from sweeps.study_file import read_study
from sweeps.tolerances import with_tolerances

EXACT = json.loads((Path(__file__).parents[1] / "reference/data/fronts.json").read_text())


@pytest.mark.parametrize("name", ["zdt1", "zdt2"])
@pytest.mark.parametrize("end", [1.0, 1.1])
def test_hypervolume_of_two_columns_is_exact(name: str, end: float) -> None:
    f1 = np.linspace(0, 1, 20001)
    f2 = 1 - (np.sqrt(f1) if name == "zdt1" else f1**2)
    exact = EXACT[name]["hypervolume"][f"ref {end:g},{end:g}"]
    found = hypervolume(np.stack([f1, f2], axis=1), (end, end))
    assert found == pytest.approx(exact, abs=1 / 20000)  # one step of the stairs


@pytest.mark.parametrize("end", [1.0, 1.1, 2.0])
def test_hypervolume_of_three_columns_nears_the_exact_one(end: float) -> None:
    a, b = np.meshgrid(np.linspace(0, np.pi / 2, 50), np.linspace(0, np.pi / 2, 50))
    sphere = np.stack([np.cos(a) * np.cos(b), np.cos(a) * np.sin(b), np.sin(a)], axis=-1)
    exact = EXACT["dtlz2"]["hypervolume"][f"3 objectives, ref {end:g}"]
    found = hypervolume(sphere.reshape(-1, 3), (end,) * 3)
    assert exact * 0.94 < found < exact  # stairs of 50 by 50 lie inside


@given(st.integers(0, 10_000), st.integers(1, 30), st.integers(2, 3))
def test_hypervolume_equals_counting_cells(seed: int, count: int, columns: int) -> None:
    points = np.random.default_rng(seed).integers(0, 8, (count, columns)).astype(float)
    cells = np.stack(np.meshgrid(*[np.arange(6)] * columns), axis=-1).reshape(-1, columns)
    beaten = (points[:, None, :] <= cells[None]).all(axis=2).any(axis=0)
    assert hypervolume(points, (6,) * columns) == beaten.sum()


def test_hypervolume_of_nothing_and_of_the_wrong_shape() -> None:
    assert hypervolume(np.empty((0, 2)), (1, 1)) == 0
    assert hypervolume([[2.0, 2.0]], (1, 1)) == 0
    with pytest.raises(InputError, match="2 or 3 columns"):
        hypervolume([[1.0]], (2,))


def test_a_front_of_three_columns(small_run: Run) -> None:
    table = small_run.table()
    two = front(table)
    three = front(table, z="bend_N_per_mm")
    assert three.columns == ("mass_kg", "twist_Nm_per_deg", "bend_N_per_mm")
    assert set(two.rows["frame"]) <= set(three.rows["frame"])
    assert three.knee is None or three.knee in set(three.rows["frame"])
    costs = table[["mass_kg"]].assign(t=-table["twist_Nm_per_deg"], b=-table["bend_N_per_mm"])
    points = costs.to_numpy()
    for frame in three.rows["frame"]:
        no_worse = (points <= points[frame]).all(axis=1)
        assert not (no_worse & (points < points[frame]).any(axis=1)).any()


@pytest.fixture(scope="module")
def sized_run(tmp_path_factory: pytest.TempPathFactory) -> Run:
    """A run in which tube sizes alone vary."""
    study = read_study("orchard-truck")
    inputs = tuple(i for i in study.inputs if i.path.startswith("tube.") and i.low is not None)
    assert len(inputs) >= 2
    run = runs.prepare(replace(study, inputs=inputs, samples=64), tmp_path_factory.mktemp("sized"))
    jobs.carry_out(run)
    return run


def test_no_sampled_front_beats_the_best_line(sized_run: Run) -> None:
    found = front(sized_run.table())
    own = behind_own_layout(sized_run, found, 6)
    assert len(own) == min(6, len(found.rows))
    assert own["behind"].min() > -0.01
    problem = sizing_of(sized_run.study)
    problem.slender = None
    low, high = found.rows["twist_Nm_per_deg"].min(), found.rows["twist_Nm_per_deg"].max()
    line = sizing_front(problem, np.linspace(low, high, 12).tolist())
    against = behind_line(found, line).set_index("frame")
    print(f"behind the line: {against['behind'].median():.2f} % (median)")
    assert against["behind"].min() > -0.5  # the line is straight between its targets
    both = against.loc[own["frame"], "behind"].to_numpy()
    there = np.isfinite(both)
    assert both[there] == pytest.approx(own["behind"].to_numpy()[there], abs=0.5)


def test_beyond_the_line_nothing_is_claimed() -> None:
    rows = pd.DataFrame({"frame": [0], "mass_kg": [10.0], "twist_Nm_per_deg": [1e9]})
    found = Front(rows, "mass_kg", "twist_Nm_per_deg", None, 1, 1)
    assert behind_line(found, [])["behind"].isna().all()


def test_a_front_with_tolerances(sized_run: Run) -> None:
    found = front(sized_run.table())
    made = with_tolerances(sized_run, found, {"tube.*.wall_mm": 0.15}, 64)
    assert made["frame"].tolist() == found.rows["frame"].tolist()
    for column in ("mass_kg", "twist_Nm_per_deg"):
        own = found.rows[column].to_numpy()
        assert (made[f"{column}_low"] < own).all()
        assert (made[f"{column}_high"] > own).all()
        assert made[f"{column}_middle"].to_numpy() == pytest.approx(own, rel=0.02)
    assert made["stays"].between(0, 1 + 1e-9).all()
    assert made["stays"].mean() < 1
    assert (made["failed"] == 0).all()
    closer = with_tolerances(sized_run, found, {"tube.*.wall_mm": 1e-9}, 8)
    assert closer["stays"].to_numpy() == pytest.approx(1)
    with pytest.raises(InputError, match="name a number"):
        with_tolerances(sized_run, found, {"tube.nothing.*": 1.0})
    with pytest.raises(InputError, match="above 0"):
        with_tolerances(sized_run, found, {"tube.*.wall_mm": 0.0})
