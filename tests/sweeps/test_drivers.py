"""Indices against exact values and against SALib; verdicts that do not promise too much.

Exact indices: Ishigami & Homma 1990 and Saltelli & Sobol' 1995 (G function), both as in Saltelli
et al., Global Sensitivity Analysis: The Primer, 2008; closed forms. At 2^14 base samples the
sampling error allows 0.01.
"""

import json
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from SALib.analyze import sobol

from model.errors import InputError
from sweeps.drivers import _steady, drivers, indices, response, sentence, verdict
from sweeps.indices import _settled
from sweeps.runs import Run, RunError
from sweeps.sampling import Design

EXACT = json.loads((Path(__file__).parents[1] / "reference/data/sensitivity.json").read_text())
SAMPLES = 2**14


def ishigami(u: np.ndarray) -> np.ndarray:
    x = np.pi * (2 * u - 1)
    return np.sin(x[:, 0]) + 7 * np.sin(x[:, 1]) ** 2 + 0.1 * x[:, 2] ** 4 * np.sin(x[:, 0])


def g_function(a: list[float]) -> Callable[[np.ndarray], np.ndarray]:
    return lambda u: np.prod((np.abs(4 * u - 2) + a) / (1 + np.array(a)), axis=1)


def results(function: Callable[[np.ndarray], np.ndarray], inputs: int, samples: int) -> np.ndarray:
    return function(Design(inputs, samples).unit()).reshape(samples, -1)


def test_ishigami() -> None:
    found = indices(results(ishigami, 3, SAMPLES), 3, True)
    exact = EXACT["ishigami"]
    print("worst", np.abs(found.first - exact["S1"]).max(), np.abs(found.total - exact["ST"]).max())
    assert found.first == pytest.approx(exact["S1"], abs=0.01)
    assert found.total == pytest.approx(exact["ST"], abs=0.01)
    assert found.second is not None
    assert found.second[0, 2] == pytest.approx(exact["S2"]["13"], abs=0.01)
    assert found.second[0, 1] == pytest.approx(0.0, abs=0.01)
    assert found.settled == 3
    assert verdict(found, SAMPLES, 0) == "Ranking settled."


@pytest.mark.parametrize("case", [0, 1])
def test_g_function(case: int) -> None:
    exact = EXACT["g_function"]["cases"][case]
    inputs = len(exact["a"])
    found = indices(results(g_function(exact["a"]), inputs, SAMPLES), inputs, True)
    assert found.first == pytest.approx(exact["S1"], abs=0.01)
    assert found.total == pytest.approx(exact["ST"], abs=0.01)
    assert found.settled == 3  # the fourth is below 2 %, which is called little


@pytest.mark.parametrize("second_order", [True, False])
def test_values_equal_salibs_and_intervals_are_of_the_same_size(second_order: bool) -> None:
    samples, inputs = 512, 3
    values = ishigami(Design(inputs, samples, second_order).unit())
    problem = {"num_vars": 3, "names": ["a", "b", "c"], "bounds": [[0, 1]] * 3}
    theirs = sobol.analyze(
        problem, values, calc_second_order=second_order, num_resamples=400, seed=3
    )
    ours = indices(values.reshape(samples, -1), inputs, second_order, 400)
    assert ours.first == pytest.approx(theirs["S1"], rel=1e-12)
    assert ours.total == pytest.approx(theirs["ST"], rel=1e-12)
    # two bootstraps of 400 agree in their standard deviation to 1/sqrt(800), three times that
    assert ours.first_interval == pytest.approx(theirs["S1_conf"], rel=0.11)
    assert ours.total_interval == pytest.approx(theirs["ST_conf"], rel=0.11)
    if second_order:
        assert ours.second is not None
        both = np.isfinite(ours.second)
        assert ours.second[both] == pytest.approx(theirs["S2"][both], abs=1e-12)


def test_the_intervals_hold_the_exact_values_as_often_as_they_promise() -> None:
    exact = np.array(EXACT["ishigami"]["ST"])
    inside = []
    for seed in range(1, 41):
        values = ishigami(Design(3, 256, False, seed).unit()).reshape(256, -1)
        found = indices(values, 3, False, 100)
        inside.append(np.abs(found.total - exact) <= found.total_interval)
    assert np.mean(inside) > 0.85


def test_a_few_samples_are_not_called_settled() -> None:
    flat = results(lambda u: u @ np.array([1.0, 1.02, 0.98]), 3, 16)
    found = indices(flat, 3, True)
    assert found.settled == 0
    assert "add samples" in verdict(found, 16, 0)


def test_a_place_is_settled_only_against_every_later_one() -> None:
    """The second's interval is narrow and below the first's; the third's reaches over both."""
    random = np.random.default_rng(1)
    total = np.array([0.5, 0.45, 0.44])
    totals = total + random.normal(size=(2000, 3)) * np.array([0.005, 0.005, 0.1])
    assert _settled(total, totals) == 0
    assert _settled(total[:2], totals[:, :2]) == 2


def test_what_half_of_the_samples_rank_otherwise_is_not_called_settled() -> None:
    """One half of the samples of a sum led by A, the other of one led by B more strongly."""
    unit = Design(2, 512).unit().reshape(512, -1, 2)
    values = unit @ np.array([1.0, 0.2])
    values[256:] = unit[256:] @ np.array([0.1, 3.0])
    found = indices(values, 2, True)
    assert found.order.tolist() == [1, 0]
    assert found.settled > 0
    assert _steady(found, values, True).settled == 0
    values[:256] = 1.0
    assert _steady(indices(values, 2, True), values, True).settled == 0


def test_too_few_samples_are_not_blamed_on_failed_frames(small_run: Run) -> None:
    run = replace(small_run, study=replace(small_run.study, samples=4))
    with pytest.raises(RunError, match="sweep with more samples"):
        drivers(run, table=small_run.table().iloc[: run.design.rows])


def test_the_sentence_names_share_and_interval() -> None:
    found = indices(results(lambda u: u @ np.array([1.0, 2.0, 3.0]), 3, 1024), 3, True)
    words = sentence(found, ["A", "B", "Lower-rail wall"], "twist_Nm_per_deg")
    assert words.startswith("Lower-rail wall explains 64 % of the variation in twist stiffness (")


def test_failed_frames_are_left_out_by_whole_base_samples_and_said(small_run: Run) -> None:
    table = small_run.table()
    clean = drivers(small_run, table=table)
    assert clean.dropped == 0
    table.loc[5, "twist_Nm_per_deg"] = np.nan
    found = drivers(small_run, table=table)
    assert found.dropped == 1
    assert "1 of 16 base samples" in found.verdict
    assert np.isfinite(found.table["total"]).all()


def test_a_result_that_does_not_vary_or_does_not_exist_is_refused(small_run: Run) -> None:
    table = small_run.table().assign(mass_kg=3.0)
    with pytest.raises(InputError, match="nothing drives it"):
        drivers(small_run, "mass_kg", table)
    with pytest.raises(InputError, match="use one of"):
        drivers(small_run, "beauty")


def test_an_unfinished_run_has_no_drivers(small_run: Run) -> None:
    small_run.path_of(0).unlink()
    with pytest.raises(RunError, match="resume the sweep"):
        drivers(small_run)


def test_the_response_counts_every_frame_once(small_run: Run) -> None:
    table = small_run.table()
    for given in small_run.study.inputs:
        found = response(table, given.path, "twist_Nm_per_deg")
        assert found["frames"].sum() == len(table)
        assert (found["low"] <= found["median"]).all()
        assert (found["median"] <= found["high"]).all()
