"""How many stock lengths to buy, and which pieces to saw from each.

The cutting-stock problem by patterns (P. C. Gilmore and R. E. Gomory, Operations Research 9,
1961): every way to fill a bar is priced, the best mix of patterns is a small linear programme, and
new patterns are found by a knapsack until none helps; then whole bars by integer programming
over the patterns found (HiGHS through scipy).
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import Bounds, LinearConstraint, linprog, milp

from model.errors import InputError

F64 = NDArray[np.float64]

STOCK_LENGTH = 6.0
"""Length tube is usually sold in [m]; common practice, no published source."""
KERF = 0.002
"""Width of a saw cut [m]; common practice, no published source."""


MOST_PATTERNS = 60
"""Patterns that are added to the simple ones at most."""


@dataclass(frozen=True)
class Bar:
    """One stock length: the pieces sawn from it [m], and what is left over [m]."""

    pieces: tuple[float, ...]
    left: float


@dataclass(frozen=True)
class CuttingPlan:
    """Bars to buy. waste : part of the bought length that is left over or sawn away."""

    bars: tuple[Bar, ...]
    stock_length: float
    waste: float

    @property
    def count(self) -> int:
        """Stock lengths to buy."""
        return len(self.bars)


def cutting_plan(
    pieces: Sequence[float], stock_length: float = STOCK_LENGTH, kerf: float = KERF
) -> CuttingPlan:
    """Fewest stock lengths that the pieces can be sawn from.

    Parameters
    ----------
    pieces : lengths to saw, ends prepared [m]. Each piece costs its length and one kerf.
    stock_length, kerf : [m].

    Raises
    ------
    InputError
        A piece longer than the stock, or not a length.

    Notes
    -----
    The number of bars is the least that the patterns found can do; it is within one bar of the
    true least for all practical frames, and equal to it wherever the tests enumerate.
    """
    for piece in pieces:
        if not 0 < piece <= stock_length:
            raise InputError(
                "piece", f"{piece * 1e3:.1f} mm", f"use more than 0, at most {stock_length:g} m"
            )
    if not pieces:
        return CuttingPlan((), stock_length, 0.0)
    demand = Counter(round(float(p), 6) for p in pieces)
    lengths = np.array(sorted(demand, reverse=True))
    wanted = np.array([demand[round(float(v), 6)] for v in lengths], dtype=np.float64)
    room = stock_length + kerf + 1e-9
    taken = lengths + kerf
    simple = _first_fit(taken, wanted, room)
    if len(simple) <= int(np.ceil(float(taken @ wanted) / room - 1e-9)):  # none can do better
        patterns, counts = np.array(simple).T, np.ones(len(simple), dtype=np.int64)
    else:
        patterns = _generate(simple, taken, wanted, room)
        counts = _whole_bars(patterns, wanted)
    bars = _bars(patterns, counts, lengths, wanted, stock_length, kerf)
    bought = stock_length * len(bars)
    return CuttingPlan(bars, stock_length, 1.0 - float(lengths @ wanted) / bought)


def _generate(simple: list[F64], taken: F64, wanted: F64, room: float) -> F64:
    """(pieces, patterns) columns: how many of each length a bar gives, ``simple`` ones first."""
    patterns = [*simple, *(np.floor(room / t) * np.eye(len(taken))[k] for k, t in enumerate(taken))]
    for _ in range(MOST_PATTERNS):
        table = np.array(patterns).T
        found = linprog(
            np.ones(table.shape[1]), A_ub=-table, b_ub=-wanted, bounds=(0, None), method="highs"
        )
        price = -found.ineqlin.marginals
        sack = milp(
            -price,
            constraints=LinearConstraint(taken[None], -np.inf, room),
            bounds=Bounds(0, np.minimum(wanted, np.floor(room / taken))),
            integrality=np.ones(len(taken), dtype=np.int64),
            options={"time_limit": 0.5},
        )
        if sack.x is None or float(price @ sack.x) <= 1 + 1e-9:
            break
        patterns.append(np.rint(sack.x))
    return np.unique(np.array(patterns), axis=0).T


def _first_fit(taken: F64, wanted: F64, room: float) -> list[F64]:
    """The bars of first fit, longest first: patterns that always cover the demand."""
    bars: list[F64] = []
    space: list[float] = []
    for k, t in enumerate(taken):
        for _ in range(int(wanted[k])):
            place = next((b for b, s in enumerate(space) if s >= t), None)
            if place is None:
                bars.append(np.zeros(len(taken)))
                space.append(room)
                place = len(bars) - 1
            bars[place][k] += 1
            space[place] -= t
    return bars


def _whole_bars(patterns: F64, wanted: F64) -> NDArray[np.int64]:
    found = milp(
        np.ones(patterns.shape[1]),
        constraints=LinearConstraint(patterns, wanted, np.inf),
        integrality=np.ones(patterns.shape[1], dtype=np.int64),
        options={"time_limit": 5.0},
    )
    if found.x is None:
        raise RuntimeError(f"no cutting plan found: {found.message}")
    counts: NDArray[np.int64] = np.rint(found.x).astype(np.int64)
    return counts


def _bars(
    patterns: F64,
    counts: NDArray[np.int64],
    lengths: F64,
    wanted: F64,
    stock_length: float,
    kerf: float,
) -> tuple[Bar, ...]:
    """Saw the wanted pieces from the chosen bars; pieces beyond the demand stay unsawn."""
    still = wanted.copy()
    bars = []
    for pattern, count in zip(patterns.T, counts, strict=True):
        for _ in range(count):
            taken = np.minimum(pattern, still)
            still -= taken
            pieces = tuple(float(v) for v in np.repeat(lengths, taken.astype(int)))
            if pieces:
                used = sum(pieces) + kerf * len(pieces)
                bars.append(Bar(pieces, max(0.0, stock_length - used)))
    return tuple(sorted(bars, key=lambda bar: bar.left))
