"""The benchmark compares speeds only between equal answers; this keeps it able to run."""

from __future__ import annotations

import numpy as np
import pytest

from model.solver.plan import plan_for
from tests.benchmarks import others, ours
from tests.model.solver import frames


@pytest.mark.parametrize("frame", [frames.frame_a, frames.frame_c])
@pytest.mark.parametrize("solver", [others.dense, others.banded])
def test_other_ways_give_our_answers(frame, solver) -> None:
    task = ours.many(frame()[1], 3)
    want = ours.answers(task, threads=1)
    one = solver(task)
    np.testing.assert_allclose([one(k) for k in range(3)], want, rtol=1e-9)


def test_ladder_stays_flat_and_tubes_round() -> None:
    batch = ours.many(frames.frame_a()[1], 4).batch
    assert (batch.xyz[..., 2] == 0).all()
    batch = ours.many(frames.frame_c()[1], 4).batch
    np.testing.assert_allclose(batch.rigidity[..., 1], batch.rigidity[..., 2], rtol=1e-15)


def test_rates_count_frames() -> None:
    best, median = ours.Clock(processor=False).rates(lambda: None, 10, seconds=0.0)
    assert best >= median > 0


def test_operations_of_the_braced_box() -> None:
    """276 products, 154 blocks, 36 joints: counted by hand."""
    plan = plan_for(frames.frame_c()[1].skeleton)
    factor = 432 * 276 + (216 + 252) * 154 + 112 * 36
    assert ours.flops(plan, cases=2) == factor + 3 * (72 * 154 + 42 * 36)
