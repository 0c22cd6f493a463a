"""Slopes with the joint positions: complex step for members, differences for frames."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from model.frame.batch import PINNED, Batch
from model.solver.beam import member_stiffness
from model.solver.gradient import energy_slope
from model.solver.solve import solve
from tests.model.solver import frames


@pytest.mark.parametrize("seed", range(20))
def test_slope_of_a_member_agrees_with_the_complex_step(seed: int) -> None:
    """Any direction, two bending planes, shear, springs at the ends."""
    rng = np.random.default_rng(seed)
    xi, up = rng.normal(size=(2, 3))
    xj = xi + rng.normal(size=3)
    rigidity = np.array([2e7, 3e3, 9e3, 4e3, 1e-6, 3e-6]) * rng.uniform(0.5, 2, 6)
    ends = 10 ** rng.uniform(-6, -4, 6) * (rng.uniform(size=6) < 0.7)
    ends[0] *= 1e-3
    if seed % 4 == 0:
        ends[3] = PINNED
    u = rng.normal(size=12)
    got = energy_slope(xi, xj, up, rigidity, ends, u[:6], u[6:])
    for k in range(3):
        moved = xj.astype(complex)
        moved[k] += 1e-30j
        want = (u @ member_stiffness(xi, moved, up, rigidity, ends) @ u).imag / 1e-30
        assert got[k] == pytest.approx(want, rel=1e-10, abs=1e-10 * np.abs(got).max())


def slopes(batch: Batch, **options: bool) -> np.ndarray:
    loads, held = frames.twist_loads(batch), frames.held(batch.skeleton)
    answer = solve(batch, loads, held, energy_case=0, gradients=True, **options)
    assert answer.gradient is not None and (answer.status == 0).all()
    return answer.gradient


def odd_frame(n: int) -> Batch:
    """C with unlike bending planes, springs and pins at the ends, and members left out."""
    batch = frames.varied(frames.frame_c()[1], n)
    rng = np.random.default_rng(7)
    batch.rigidity[:, :, 1] *= 3
    ends = 10 ** rng.uniform(-6, -5, batch.ends.shape)
    ends[:, :, 0] *= 1e-3
    ends[:, 5, 3] = PINNED
    up = batch.skeleton.up + rng.uniform(-0.4, 0.4, batch.skeleton.up.shape)
    batch.present[:, 75] = False
    return replace(batch, ends=ends, skeleton=replace(batch.skeleton, up=up))


def test_slopes_of_a_frame_agree_with_differences() -> None:
    """Central differences of 1e-5 m; joints that carry load keep their forces."""
    batch = odd_frame(1)
    got = slopes(batch)[0]
    rng = np.random.default_rng(2)
    loads, held = frames.twist_loads(batch), frames.held(batch.skeleton)
    inner = [j for j in range(36) if j not in frames.corners(batch.skeleton)]
    for _ in range(5):
        direction = np.zeros((36, 3))
        direction[inner] = rng.normal(size=(len(inner), 3))
        sides = []
        for step in (-1e-5, 1e-5):
            moved = replace(batch, xyz=batch.xyz + step * direction)
            sides.append(solve(moved, loads, held).compliance[0, 0])
        assert (got * direction).sum() == pytest.approx((sides[1] - sides[0]) / 2e-5, rel=1e-6)


def test_compiled_slopes_agree_with_the_plain_ones() -> None:
    batch = odd_frame(11)
    got, want = slopes(batch), slopes(batch, plain=True)
    scale = np.abs(want).max(axis=(1, 2), keepdims=True)
    assert (np.abs(got - want) / scale).max() < 1e-10


@pytest.mark.parametrize(("axis", "elasticity"), [(0, -0.632936), (1, 0.347317), (2, 1.218772)])
def test_elasticities_of_c_with_its_length_width_and_height(axis: int, elasticity: float) -> None:
    """d ln K / d ln L, W, H, settled with an independent prototype; forces change with the width.

    The unit couple's forces are 1 over the width, so their part is -2 C for each unit of ln W.
    """
    skeleton, batch = frames.frame_c()
    gradient = slopes(batch)[0]
    compliance = solve(batch, frames.twist_loads(batch), frames.held(skeleton)).compliance[0, 0]
    change = (gradient[:, axis] * batch.xyz[0, :, axis]).sum() - 2 * compliance * (axis == 1)
    assert -change / compliance == pytest.approx(elasticity, abs=5e-7)


def test_slopes_need_a_case() -> None:
    _, batch = frames.frame_b()
    with pytest.raises(ValueError, match="give energy_case"):
        solve(batch, frames.twist_loads(batch), frames.held(batch.skeleton), gradients=True)
