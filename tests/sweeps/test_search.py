"""Least mass for a twist stiffness: the same optimum from every start, and the known table.

Table: an independent prototype of the check box fully braced (36 joints, 102 members, groups
rail, ring, end, floor, top and both sides; outside 12-50 mm, wall 0.9-3.0 mm, outside over wall
at most 25) with its own gradients and SLSQP; masses to the digits it gave.
"""

from dataclasses import replace

import numpy as np
import pytest

from model.frame.layout import Tube
from model.results.detail import examine
from model.stock.materials import Material
from sweeps.search import Size, Sizing, least_mass, sized, sizing_front, sizing_of
from sweeps.study_file import read_study
from tests.model.solver.frames import frame_c

STEEL = Material("check", 205e9, 205e9 / 2.6, 7850.0, 235e6)

LEAST_MASS = {
    6000: 15.925,
    8000: 19.346,
    10000: 23.142,
    13787.385: 30.740,
    18000: 39.766,
    24000: 52.775,
    32000: 69.936,
    40000: 87.084,
}


def check_sizing() -> Sizing:
    _, batch = frame_c()
    tubes = {
        group: Tube("round tube", {"outside": 0.0254, "wall": 0.0016}, STEEL)
        for group in batch.skeleton.groups
    }
    together = [("rail",), ("ring",), ("end",), ("b",), ("t",), ("r", "l")]
    sizes = [
        Size(groups, name, low, high)
        for groups in together
        for name, low, high in (("outside", 0.012, 0.05), ("wall", 0.0009, 0.003))
    ]
    return Sizing(batch, tubes, sizes)


def test_the_best_possible_line_of_the_check_frame() -> None:
    problem = check_sizing()
    found = sizing_front(problem, list(LEAST_MASS))
    print(f"{problem.solves} frames solved for {len(found)} targets")
    for best in found:
        assert best.reached
        assert best.mass == pytest.approx(LEAST_MASS[best.target], rel=1e-3)


@pytest.mark.parametrize("target", [8000, 24000])
def test_every_start_ends_at_the_same_mass(target: float) -> None:
    problem = check_sizing()
    rng = np.random.default_rng(1)
    masses = [
        least_mass(problem, target, rng.uniform(problem.low, problem.high)).mass for _ in range(12)
    ]
    assert np.ptp(masses) < 1e-3 * min(masses)


def test_slopes_equal_central_differences() -> None:
    problem = check_sizing()
    x = np.random.default_rng(2).uniform(problem.low, problem.high)
    _, mass_slope, _, twist_slope = problem.evaluate(x)
    for k in range(len(x)):
        step = np.eye(len(x))[k] * 1e-5
        up, down = problem.evaluate(x + step), problem.evaluate(x - step)
        assert mass_slope[k] == pytest.approx((up[0] - down[0]) / 2e-5, rel=1e-6, abs=1e-6)
        assert twist_slope[k] == pytest.approx((up[2] - down[2]) / 2e-5, rel=1e-6, abs=1e-3)


def test_a_target_out_of_reach_is_said() -> None:
    assert not least_mass(check_sizing(), 1e7).reached


@pytest.mark.parametrize("vehicle", ["hill-climb-single-seater", "open-sports-car"])
def test_a_starting_vehicle_gets_lighter_at_its_own_stiffness(vehicle: str) -> None:
    study = read_study(vehicle)
    own = examine(study.layout)
    best = least_mass(sizing_of(study), own.twist)
    assert best.reached
    assert best.mass <= own.mass * (1 + 1e-6)
    again = examine(sized(study.layout, best))
    assert again.twist == pytest.approx(best.twist, rel=1e-6)
    assert again.mass == pytest.approx(best.mass, rel=1e-9)
    assert replace(study, layout=again.layout).layout.tubes
