"""What is said of given frames holds against exact values and a second implementation."""

import numpy as np
import pandas as pd
import pytest
from SALib.analyze import pawn

from model.errors import InputError
from sweeps.given_data import STATEMENT, given_data
from sweeps.runs import Run


@pytest.fixture
def cloud() -> pd.DataFrame:
    points = np.random.default_rng(4).random((4096, 4))
    table = pd.DataFrame(points, columns=["a", "b", "c", "d"])
    return table.assign(y=points[:, 0] + points[:, 1], held=3.0)


def test_the_sum_of_two_even_inputs_has_its_exact_shift(cloud: pd.DataFrame) -> None:
    """Own derivation: both distribution functions of the sum are known in closed form."""
    y = np.linspace(0, 2, 2001)
    whole = np.where(y < 1, y**2 / 2, 1 - (2 - y) ** 2 / 2)
    exact = []
    for low in np.arange(10) / 10:
        x = (low + (np.arange(200) + 0.5) / 2000)[:, None]
        exact.append(np.abs(np.clip(y - x, 0, 1).mean(axis=0) - whole).max())
    found = given_data(cloud, "y")
    rows = found.table.set_index("input")
    assert rows.loc[["a", "b"], "shift"].to_numpy() == pytest.approx(np.mean(exact), abs=0.02)
    # a tenth of the range is left open in each slice: a hundredth of the variance
    assert rows.loc[["a", "b"], "alone"].to_numpy() == pytest.approx(0.495, abs=0.025)
    assert rows.loc[["c", "d"], "alone"].to_numpy() == pytest.approx(0, abs=0.01)
    assert rows["above_chance"].to_dict() == {"a": True, "b": True, "c": False, "d": False}
    assert found.held == ("held",)
    assert found.statement == STATEMENT
    assert "Sobol' indices do not apply" in STATEMENT


def test_shifts_are_pawns(cloud: pd.DataFrame) -> None:
    names = ["a", "b", "c", "d"]
    problem = {"num_vars": 4, "names": names, "bounds": [[0, 1]] * 4}
    theirs = pawn.analyze(problem, cloud[names].to_numpy(), cloud["y"].to_numpy(), S=10)
    ours = given_data(cloud, "y", names, resamples=2).table.set_index("input").loc[names]
    # slices differ by the one row on their edge
    assert ours["shift"].to_numpy() == pytest.approx(theirs["mean"], abs=0.003)


def test_a_filtered_run_with_choices_is_judged(small_run: Run) -> None:
    table = small_run.table()
    light = table[table["mass_kg"] < table["mass_kg"].quantile(0.8)]
    found = given_data(light)
    paths = [i.path for i in small_run.study.inputs]
    assert sorted([*found.table["input"], *found.held]) == sorted(paths)
    assert found.table["shift"].between(0, 1).all()
    assert found.used == len(light)


def test_an_option_moves_the_result_by_just_its_own_distance() -> None:
    kind = np.repeat(["open", "cross"], 500)
    table = pd.DataFrame({"kind": kind, "y": np.where(kind == "open", 0.0, 10.0)})
    table["y"] += np.random.default_rng(1).random(1000)
    found = given_data(table, "y").table
    # with the option known, half of the frames are out of reach
    assert found["shift"].tolist() == pytest.approx([0.5])
    assert found["alone"][0] > 0.99


def test_what_cannot_be_judged_is_refused(cloud: pd.DataFrame) -> None:
    with pytest.raises(InputError, match="use a column"):
        given_data(cloud, "beauty")
    with pytest.raises(InputError, match="at least 64"):
        given_data(cloud.head(63), "y")
    with pytest.raises(InputError, match="nothing drives it"):
        given_data(cloud, "held")
    with pytest.raises(InputError, match="none vary"):
        given_data(cloud, "y", ["held"])
