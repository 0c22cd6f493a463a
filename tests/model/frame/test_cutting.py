"""Cutting plans against enumeration and against bounds nobody can argue with."""

import itertools
import math
from collections import Counter

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from model.errors import InputError
from model.frame.cutting import cutting_plan
from model.results.detail import examine
from sweeps.study_file import read_study


def fewest_by_enumeration(pieces: list[int], bar: int) -> int:
    """Least number of bars: try to pack into 1, 2, ... by depth-first search."""

    def fits(rest: tuple[int, ...], space: tuple[int, ...]) -> bool:
        if not rest:
            return True
        return any(
            fits(rest[1:], tuple(sorted((*space[:k], space[k] - rest[0], *space[k + 1 :]))))
            for k in range(len(space))
            if space[k] >= rest[0] and (k == 0 or space[k] != space[k - 1])
        )

    ordered = tuple(sorted(pieces, reverse=True))
    return next(n for n in itertools.count(1) if fits(ordered, (bar,) * n))


@settings(max_examples=25)
@given(st.lists(st.integers(1, 12), min_size=1, max_size=9))
def test_no_bar_more_than_enumeration_needs(pieces: list[int]) -> None:
    plan = cutting_plan([p / 10 for p in pieces], 1.2, 0.0)
    assert plan.count == fewest_by_enumeration(pieces, 12)


@settings(max_examples=25)
@given(st.lists(st.floats(0.05, 1.9), min_size=1, max_size=40))
def test_every_piece_is_sawn_once_and_every_bar_holds_its_pieces(pieces: list[float]) -> None:
    plan = cutting_plan(pieces, 2.0, 0.003)
    sawn = Counter(round(p, 6) for bar in plan.bars for p in bar.pieces)
    assert sawn == Counter(round(p, 6) for p in pieces)
    for bar in plan.bars:
        used = sum(bar.pieces) + 0.003 * (len(bar.pieces) - 1)
        assert used <= 2.0 + 1e-6
    assert plan.count >= math.ceil(sum(pieces) / 2.0 - 1e-9)
    assert 0 <= plan.waste < 1


def test_a_kerf_can_cost_a_bar() -> None:
    assert cutting_plan([1.0] * 6, 6.0, 0.0).count == 1
    assert cutting_plan([1.0] * 6, 6.0, 0.002).count == 2


def test_a_piece_longer_than_the_stock_is_refused() -> None:
    with pytest.raises(InputError, match=r"piece = 6100.0 mm: use more than 0, at most 6 m"):
        cutting_plan([6.1])


def test_the_tubes_of_a_starting_vehicle_are_bought_with_little_waste() -> None:
    found = examine(read_study("hill-climb-single-seater").layout)
    rails = [c.length for c in found.bill.cuts if c.group == "ring members"
             for _ in range(c.quantity)]  # fmt: skip
    plan = cutting_plan(rails)
    assert sum(len(bar.pieces) for bar in plan.bars) == len(rails)
    assert plan.count <= math.ceil(sum(rails) / 6.0) + 1
