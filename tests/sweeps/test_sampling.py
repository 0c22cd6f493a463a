"""Rows drawn a stretch at a time are SALib's rows, bit for bit."""

import numpy as np
import pytest
from SALib.sample import morris, sobol

from sweeps.sampling import Design


@pytest.mark.parametrize("second_order", [True, False])
@pytest.mark.parametrize("parts", [(), (0, 1, 0, 2, 1)])
def test_rows_are_salibs(second_order: bool, parts: tuple[int, ...]) -> None:
    for seed in (1, 7):
        design = Design(5, 64, second_order, seed, parts=parts)
        theirs = sobol.sample(
            design.problem(), 64, calc_second_order=second_order, seed=seed
        )  # fmt: skip
        assert np.array_equal(design.unit(), theirs)
        assert len(theirs) == design.rows


def test_screening_rows_are_salibs() -> None:
    design = Design(5, 16, seed=3, method="screening", parts=(0, 1, 0, 2, 1))
    assert np.array_equal(design.unit(), morris.sample(design.problem(), 16, seed=3))


@pytest.mark.parametrize("method", ["sobol", "screening"])
def test_any_stretch_of_base_samples_equals_the_whole(method: str) -> None:
    design = Design(4, 256, method=method, seed=5)
    whole, step = design.unit(), design.rows_per_sample
    for first, count in ((0, 1), (0, 64), (1, 2), (64, 64), (100, 37), (255, 1)):
        stretch = design.unit(first, count)
        assert np.array_equal(stretch, whole[first * step : (first + count) * step])
    for row in (0, 1, step, 17 * step + 3, design.rows - 1):
        assert np.array_equal(design.row(row), whole[row])


@pytest.mark.parametrize("method", ["sobol", "screening"])
def test_a_longer_design_begins_with_the_shorter_one(method: str) -> None:
    short = Design(5, 64, method=method, seed=3).unit()
    assert np.array_equal(short, Design(5, 128, method=method, seed=3).unit()[: len(short)])


def test_a_row_far_into_a_million_needs_no_million_rows() -> None:
    design = Design(20, 2**20)
    assert design.row(design.rows - 1).shape == (20,)
