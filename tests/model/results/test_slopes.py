"""Exact slopes against central differences of the batched solver."""

import numpy as np
import pytest

from model.frame.variants import variants
from model.results.detail import examine
from model.results.slopes import slopes
from model.results.twist import answers
from tests.model.frame.layouts import box, random_layout


@pytest.mark.parametrize("seed", range(12))
def test_every_slope_equals_the_central_difference(seed: int) -> None:
    layout = random_layout(np.random.default_rng(seed))
    detail = examine(layout)
    for slope in slopes(detail):
        step = 1e-3 * slope.value if slope.path.startswith("tube") else 1e-4
        steps = np.array([-2.0, -1.0, 1.0, 2.0])
        moved, _ = variants(layout, {slope.path: slope.value + steps * step}, 4)
        found = answers(moved[0], 1)
        weights = np.array([1.0, -8.0, 8.0, -1.0]) / (12 * step)  # fourth-order central difference
        twist, mass = weights @ found.twist, weights @ found.mass
        scale = max(abs(slope.value), 0.1)
        assert slope.twist * scale == pytest.approx(twist * scale, abs=1e-6 * detail.twist)
        assert slope.mass * scale == pytest.approx(mass * scale, abs=1e-6 * detail.mass)


def test_axial_give_and_a_light_frame_agree_with_the_energy_shares() -> None:
    """The elasticities of E add to one: twice as stiff a material makes twice as stiff a frame."""
    detail = examine(box(bracing="single"))
    total = 0.0
    for group, tube in detail.layout.tubes.items():
        walls = {s.path: s for s in slopes(detail)}
        wall, outside = (walls[f"tube.{group}.{n}"] for n in ("wall", "outside"))
        assert wall.twist > 0
        assert outside.twist > 0
        assert wall.value == tube.sizes["wall"]
        # A scales with both sizes squared, I with the fourth power: between 2 and 4
        both = wall.elasticity(detail.twist) + outside.elasticity(detail.twist)
        share = detail.answers.energy[0, detail.batch.skeleton.groups.index(group)].sum()
        share /= detail.answers.energy[0].sum()
        assert 2 * share <= both * (1 + 1e-9)
        assert both <= 4 * share * (1 + 1e-9)
        total += share
    assert total == pytest.approx(1.0, rel=1e-9)
