"""The front against brute force and against fronts known exactly.

Sources of the fronts and hypervolumes: Zitzler, Deb & Thiele, Evolutionary Computation 8 (2000);
Deb, Thiele, Laumanns & Zitzler 2002 (closed forms; ``tests/reference/data/fronts.json``).
"""

import json
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from model.errors import InputError
from sweeps.front import distance, front, unbeaten

EXACT = json.loads((Path(__file__).parents[1] / "reference/data/fronts.json").read_text())


def by_brute_force(costs: np.ndarray) -> set[int]:
    kept = set()
    for i, row in enumerate(costs):
        if np.isnan(row).any():
            continue
        no_worse = (costs <= row).all(axis=1)
        better = (costs < row).any(axis=1)
        equal_before = (costs[:i] == row).all(axis=1).any()
        if not (no_worse & better).any() and not equal_before:
            kept.add(i)
    return kept


@given(
    st.integers(2, 3).flatmap(
        lambda k: st.lists(st.tuples(*[st.integers(0, 5) | st.just(np.nan)] * k), max_size=30)
    )
)
def test_unbeaten_rows_equal_brute_force(rows: list[tuple[float, ...]]) -> None:
    costs = np.array(rows, dtype=float).reshape(len(rows), -1 if rows else 2)
    assert set(unbeaten(costs).tolist()) == by_brute_force(costs)


@pytest.mark.parametrize("columns", [2, 3, 4])
@pytest.mark.parametrize("levels", [8, 10**9])
def test_many_rows_equal_brute_force(columns: int, levels: int) -> None:
    """Few levels make ties in every column."""
    rng = np.random.default_rng(columns)
    costs = np.abs(rng.normal(size=(1500, columns)))
    costs /= np.linalg.norm(costs, axis=1)[:, None]  # a front that bulges: many rows stay
    costs = np.round(costs * (1 + 0.1 * rng.random((1500, 1))) * levels)
    assert set(unbeaten(costs).tolist()) == by_brute_force(costs)


def hypervolume(costs: np.ndarray, reference: float) -> float:
    """Area that a front of two columns dominates."""
    points = costs[unbeaten(costs)]
    left = np.append(points[1:, 0], reference)
    return float(((left - points[:, 0]) * (reference - points[:, 1])).sum())


@pytest.mark.parametrize("reference", [1.0, 1.1])
def test_the_front_of_zdt1_has_the_exact_hypervolume(reference: float) -> None:
    """Dense front points among beaten ones; the staircase misses at most 1 step of 1/20000."""
    rng = np.random.default_rng(2)
    f1 = np.linspace(0, 1, 20001)
    front_points = np.stack([f1, 1 - np.sqrt(f1)], axis=1)
    beaten = front_points[rng.integers(0, len(f1), 50000)] + rng.random((50000, 2)) * 0.5 + 1e-6
    mixed = rng.permutation(np.concatenate([front_points, beaten]))
    exact = EXACT["zdt1"]["hypervolume"][f"ref {reference:g},{reference:g}"]
    assert hypervolume(mixed, reference) == pytest.approx(exact, abs=1 / 20000)
    assert len(unbeaten(mixed)) == len(f1)


def test_the_front_of_dtlz2_keeps_every_point_of_the_sphere() -> None:
    """EXACT: f1² + f2² + f3² = 1; points pushed outwards are beaten."""
    rng = np.random.default_rng(3)
    sphere = np.abs(rng.normal(size=(400, 3)))
    sphere /= np.linalg.norm(sphere, axis=1)[:, None]
    outside = sphere * 1.3 + 0.05
    found = unbeaten(np.concatenate([outside, sphere]))
    assert sorted(found.tolist()) == list(range(400, 800))


def table(mass: list[float], twist: list[float]) -> pd.DataFrame:
    return pd.DataFrame({"frame": range(len(mass)), "mass_kg": mass, "twist_Nm_per_deg": twist})


def test_limits_knee_and_distance() -> None:
    frames = table([10, 12, 20, 15, np.nan], [1000, 2900, 3000, 2000, np.nan])
    found = front(frames)
    assert found.rows["frame"].tolist() == [0, 1, 2]
    assert found.knee == 1
    assert (found.counted, found.considered) == (4, 4)
    off = distance(found, frames.iloc[3])
    assert off.lighter == 3
    assert off.stiffer == 900
    assert distance(found, frames.iloc[1]) == type(off)(0.0, 0.0)
    assert front(frames, min_twist=2000).rows["frame"].tolist() == [1, 2]
    assert front(frames, max_mass=11).rows["frame"].tolist() == [0]
    assert front(frames, min_twist=9999).rows.empty
    with pytest.raises(InputError, match="use one of"):
        front(frames, x="beauty")


def test_a_million_rows_are_no_trouble() -> None:
    rng = np.random.default_rng(5)
    costs = rng.random((1_000_000, 2))
    found = costs[unbeaten(costs)]
    assert (np.diff(found[:, 0]) > 0).all()
    assert (np.diff(found[:, 1]) < 0).all()
    first = found[0]
    assert not ((costs <= first).all(axis=1) & (costs < first).any(axis=1)).any()
