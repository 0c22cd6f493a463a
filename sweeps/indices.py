"""Sobol' indices from results in the design's order: values, intervals, bounds, ranking.

Estimators as SALib uses them: first order after Saltelli et al., Computer Physics Communications
181 (2010), total order after Jansen (1999), second order after Saltelli (2002). Intervals are
normal ones from a bootstrap over base samples (Archer, Saltelli & Sobol', 1997). Every estimate is
a mean over base samples over a variance, so all resamples are one matrix product of counts with
the terms of the means (own derivation, exact). Bounds for missing results by interval arithmetic
on the same terms (R. E. Moore, Interval Analysis, 1966).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

F64 = NDArray[np.float64]

RESAMPLES = 200
WIDTH = 1.959963984540054
"""Half width of a 95 % interval in standard deviations."""

LITTLE = 0.02
"""Inputs whose total index stays below this are taken to matter little; common practice, no
published source."""

_TERMS = 4_000_000
"""So many terms of the means are held at once."""


@dataclass(frozen=True, eq=False)
class Indices:
    """Indices of ``inputs`` inputs; intervals are half widths at 95 %.

    second : (inputs, inputs), upper triangle, NaN elsewhere; None without second order.
    settled : how many leading places of the ranking by total index are settled.
    """

    first: F64
    first_interval: F64
    total: F64
    total_interval: F64
    second: F64 | None
    second_interval: F64 | None
    order: NDArray[np.int64]
    settled: int


def indices(
    results: F64, inputs: int, second_order: bool, resamples: int = RESAMPLES, seed: int = 1
) -> Indices:
    """Indices from results (base samples, rows of a base sample) in the design's order."""
    scaled = (results - results.mean()) / results.std()
    first, total, second = (one[0] for one in _estimates(scaled, inputs, second_order, None))
    samples = len(results)
    random = np.random.default_rng(seed)
    counts = np.empty((resamples, samples), dtype=np.float32)
    for row in counts:
        row[:] = np.bincount(random.integers(0, samples, samples), minlength=samples)
    firsts, totals, seconds = _estimates(scaled, inputs, second_order, counts)
    order = np.argsort(-total, kind="stable")
    return Indices(
        first,
        WIDTH * firsts.std(axis=0, ddof=1),
        total,
        WIDTH * totals.std(axis=0, ddof=1),
        _square(second, inputs) if second_order else None,
        _square(WIDTH * seconds.std(axis=0, ddof=1), inputs) if second_order else None,
        order,
        _settled(total[order], totals[:, order]),
    )


def _estimates(
    results: F64, inputs: int, second_order: bool, counts: NDArray[np.float32] | None
) -> tuple[F64, F64, F64]:
    """First, total and second-order (pairs) indices for each row of counts; of all rows once."""
    samples, one = results.shape[0], 2 + 2 * inputs + (inputs * (inputs - 1) // 2) * second_order
    sums = np.zeros((1 if counts is None else len(counts), one))
    step = max(1, _TERMS // one)
    for begin in range(0, samples, step):
        stretch = slice(begin, begin + step)
        terms = _terms(results[stretch], inputs, second_order)
        sums += terms.sum(axis=0) if counts is None else counts[:, stretch].astype(float) @ terms
    means = sums / samples
    variance = (means[:, 1] - means[:, 0] ** 2)[:, None]
    first = means[:, 2 : 2 + inputs] / variance
    total = means[:, 2 + inputs : 2 + 2 * inputs] / variance
    if not second_order:
        return first, total, np.empty((len(sums), 0))
    j, k = np.triu_indices(inputs, 1)
    second = means[:, 2 + 2 * inputs :] / variance - first[:, j] - first[:, k]
    return first, total, second


def _terms(results: F64, inputs: int, second_order: bool) -> F64:
    """(samples, terms) of which the estimators are means: two moments, first, total, pairs."""
    a, b, ab = results[:, 0], results[:, -1], results[:, 1 : inputs + 1]
    gap = ab - a[:, None]
    parts = [
        np.stack([(a + b) / 2, (a * a + b * b) / 2], axis=1),
        b[:, None] * gap,
        0.5 * gap * gap,
    ]
    if second_order:
        ba = results[:, inputs + 1 : 2 * inputs + 1]
        j, k = np.triu_indices(inputs, 1)
        parts.append(ba[:, j] * ab[:, k] - (a * b)[:, None])
    return np.concatenate(parts, axis=1)


def _square(pairs: F64, inputs: int) -> F64:
    square = np.full((inputs, inputs), np.nan)
    square[np.triu_indices(inputs, 1)] = pairs
    return square


def _settled(total: F64, totals: F64) -> int:
    """Leading places that the bootstrap grants to no later one; ``totals`` is ranked alike."""
    for place in range(len(total) - 1):
        if total[place] < LITTLE:
            return place
        gap = totals[:, place, None] - totals[:, place + 1 :]
        if (np.quantile(gap, 0.025, axis=0) <= 0).any():
            return place
    return len(total)


@dataclass(frozen=True, eq=False)
class Bounds:
    """Least and greatest that each index can be, whatever the missing results are.

    Holds for missing results anywhere within the range of those that are there. first, total :
    (2, inputs). second : (2, inputs, inputs), upper triangle; None without second order.
    """

    first: F64
    total: F64
    second: F64 | None


def bounds(results: F64, inputs: int, second_order: bool) -> Bounds:
    """Bounds of the indices of a design with missing results.

    results : (base samples, rows of a base sample) in the design's order, NaN where missing.
    """
    there = np.isfinite(results)
    middle, spread = results[there].mean(), results[there].std()
    scaled = (results - middle) / spread
    least, most = scaled[there].min(), scaled[there].max()
    whole = there.all(axis=1)
    sums = _terms(scaled[whole], inputs, second_order).sum(axis=0)[2:]
    low = np.where(there, scaled, least)[~whole]
    high = np.where(there, scaled, most)[~whole]
    (al, bl, abl), (ah, bh, abh) = (
        (s[:, 0:1], s[:, -1:], s[:, 1 : inputs + 1]) for s in (low, high)
    )
    gap = abl - ah, abh - al
    parts = [_product((bl, bh), gap), _half_square(gap)]
    j, k = np.triu_indices(inputs, 1)
    if second_order:
        bal, bah = (s[:, inputs + 1 : 2 * inputs + 1] for s in (low, high))
        pair = _product((bal[:, j], bah[:, j]), (abl[:, k], abh[:, k]))
        base = _product((al, ah), (bl, bh))
        parts.append((pair[0] - base[1], pair[1] - base[0]))
    touched = [np.concatenate([part[end] for part in parts], axis=1).sum(axis=0) for end in (0, 1)]
    ends = [(sums + one) / len(results) for one in touched]

    both = np.concatenate([scaled[:, 0], scaled[:, -1]])
    known = both[np.isfinite(both)]
    square = float(((known - known.mean()) ** 2).sum())
    reach = max((least - known.mean()) ** 2, (most - known.mean()) ** 2)
    smallest = square / len(both)
    largest = (square + (len(both) - len(known)) * reach) / len(both)
    lower = np.where(ends[0] >= 0, ends[0] / largest, ends[0] / smallest)
    upper = np.where(ends[1] >= 0, ends[1] / smallest, ends[1] / largest)
    first = np.stack([lower[:inputs], upper[:inputs]])
    total = np.stack([lower[inputs : 2 * inputs], upper[inputs : 2 * inputs]])
    if not second_order:
        return Bounds(first, total, None)
    pairs = (
        lower[2 * inputs :] - first[1, j] - first[1, k],
        upper[2 * inputs :] - first[0, j] - first[0, k],
    )
    return Bounds(first, total, np.stack([_square(p, inputs) for p in pairs]))


Interval = tuple[F64, F64]


def _product(one: Interval, other: Interval) -> Interval:
    corners = [p * q for p in one for q in other]
    return np.minimum.reduce(corners), np.maximum.reduce(corners)


def _half_square(one: Interval) -> Interval:
    low, high = one
    least = np.where((low <= 0) & (high >= 0), 0.0, np.minimum(low * low, high * high))
    return 0.5 * least, 0.5 * np.maximum(low * low, high * high)
