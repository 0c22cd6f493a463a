"""Which input drives a result: Sobol' indices with intervals, a verdict and a sentence in words.

Estimators as SALib uses them: first order after Saltelli et al., Computer Physics Communications
181 (2010), total order after Jansen (1999), second order after Saltelli (2002). Intervals are
normal ones from a bootstrap over base samples (Archer, Saltelli & Sobol', 1997).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from sweeps.outputs import OUTPUTS
from sweeps.runs import Run, RunError

F64 = NDArray[np.float64]

RESAMPLES = 200
WIDTH = 1.959963984540054
"""Half width of a 95 % interval in standard deviations."""

LITTLE = 0.02
"""Inputs whose total index stays below this are taken to matter little; common practice, no
published source."""


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


@dataclass(frozen=True, eq=False)
class Drivers:
    """What drives one result column of a run.

    table : one row an input, most important first: input, label, first, first_interval, total,
        total_interval.
    pairs : one row a pair of inputs that act together, strongest first: one, other, second,
        second_interval.
    history : total index of each input from a quarter, a half and all of the samples.
    used, dropped : base samples behind the numbers, and those left out because a frame failed.
    """

    output: str
    table: pd.DataFrame
    pairs: pd.DataFrame
    history: pd.DataFrame
    verdict: str
    sentence: str
    used: int
    dropped: int


def drivers(
    run: Run, output: str = "twist_Nm_per_deg", table: pd.DataFrame | None = None
) -> Drivers:
    """Indices of a complete run for one of its result columns.

    Raises
    ------
    InputError
        No such column, or it does not vary. RunError: the run is not complete.
    """
    if output not in OUTPUTS:
        raise InputError("output", repr(output), f"use one of: {', '.join(OUTPUTS)}")
    if not run.complete:
        raise RunError(f"{run.folder}: {run.rows_solved} of {run.design.rows} frames are solved; "
                       "resume the sweep before asking what drives it")  # fmt: skip
    table = run.table() if table is None else table
    design = run.design
    results = table[output].to_numpy(np.float64).reshape(design.samples, -1)
    whole = np.isfinite(results).all(axis=1)
    results = results[whole]
    used = int(whole.sum())
    if used < 8:
        raise RunError(f"{run.folder}: only {used} base samples have no failed frame; "
                       "narrow the ranges")  # fmt: skip
    if np.ptp(results) <= 1e-12 * np.abs(results).max():
        raise InputError("output", output, "it is the same for every frame: nothing drives it")
    found = indices(results, len(run.study.inputs), run.second_order)
    labels = [i.label for i in run.study.inputs]
    paths = [i.path for i in run.study.inputs]
    rows = pd.DataFrame(
        {
            "input": paths,
            "label": labels,
            "first": found.first,
            "first_interval": found.first_interval,
            "total": found.total,
            "total_interval": found.total_interval,
        }
    ).iloc[found.order]
    dropped = len(whole) - used
    return Drivers(
        output,
        rows.reset_index(drop=True),
        _pairs(found, labels),
        _history(results, labels, run.second_order),
        verdict(found, used, dropped),
        sentence(found, labels, output),
        used,
        dropped,
    )


def indices(
    results: F64, inputs: int, second_order: bool, resamples: int = RESAMPLES, seed: int = 1
) -> Indices:
    """Indices from results (base samples, rows of a base sample) in the design's order."""
    a, b = results[:, 0], results[:, -1]
    ab = results[:, 1 : inputs + 1]
    ba = results[:, inputs + 1 : 2 * inputs + 1] if second_order else None
    spread = results.std()
    middle = results.mean()
    a, b, ab = (a - middle) / spread, (b - middle) / spread, (ab - middle) / spread
    ba = None if ba is None else (ba - middle) / spread
    first, total, second = _estimate(a, b, ab, ba)
    random = np.random.default_rng(seed)
    draws = random.integers(0, len(a), (resamples, len(a)))
    firsts, totals = np.empty((2, resamples, inputs))
    seconds = None if ba is None else np.empty((resamples, inputs, inputs))
    for k, draw in enumerate(draws):
        again = _estimate(a[draw], b[draw], ab[draw], None if ba is None else ba[draw])
        firsts[k], totals[k] = again[0], again[1]
        if seconds is not None:
            seconds[k] = again[2]
    order = np.argsort(-total, kind="stable")
    return Indices(
        first,
        WIDTH * firsts.std(axis=0, ddof=1),
        total,
        WIDTH * totals.std(axis=0, ddof=1),
        second,
        None if seconds is None else WIDTH * seconds.std(axis=0, ddof=1),
        order,
        _settled(total[order], totals[:, order]),
    )


def _estimate(a: F64, b: F64, ab: F64, ba: F64 | None) -> tuple[F64, F64, F64 | None]:
    both = np.concatenate([a, b])
    variance = both.var()
    first = (b[:, None] * (ab - a[:, None])).mean(axis=0) / variance
    gap = a[:, None] - ab
    total = 0.5 * (gap * gap).mean(axis=0) / variance
    if ba is None:
        return first, total, None
    second = np.full((ab.shape[1], ab.shape[1]), np.nan)
    base = a * b
    for j in range(ab.shape[1] - 1):
        pair = (ba[:, [j]] * ab[:, j + 1 :] - base[:, None]).mean(axis=0) / variance
        second[j, j + 1 :] = pair - first[j] - first[j + 1 :]
    return first, total, second


def _settled(total: F64, totals: F64) -> int:
    """Leading places whose order the bootstrap does not question; ``totals`` is ranked alike."""
    for place in range(len(total) - 1):
        if total[place] < LITTLE:
            return place
        gap = totals[:, place] - totals[:, place + 1]
        if np.quantile(gap, 0.025) <= 0:
            return place
    return len(total)


def verdict(found: Indices, used: int, dropped: int) -> str:
    """Whether the ranking can be relied on, in words."""
    matter = int((found.total >= LITTLE).sum())
    if found.settled >= matter:
        text = "Ranking settled."
    elif found.settled == 0:
        text = "Ranking not settled yet: add samples."
    else:
        places = "place" if found.settled == 1 else f"{found.settled} places"
        text = f"Ranking settled for the first {places}; add samples for the rest."
    if dropped:
        share = dropped / (used + dropped)
        text += (
            f" {dropped} of {used + dropped} base samples ({share:.1%}) hold a frame that failed "
            "and are left out; the numbers hold for the frames that can be built."
        )
    return text


def sentence(found: Indices, labels: list[str], output: str) -> str:
    """The strongest input in one sentence."""
    best = int(np.argmax(found.first))
    share, interval = float(found.first[best]), float(found.first_interval[best])
    low, high = max(0.0, share - interval), min(1.0, share + interval)
    text = (
        f"{labels[best]} explains {share:.0%} of the variation in {OUTPUTS[output].label} "
        f"({low:.0%} to {high:.0%})."
    )
    return text.replace("%", " %")


def _pairs(found: Indices, labels: list[str]) -> pd.DataFrame:
    columns = ["one", "other", "second", "second_interval"]
    if found.second is None or found.second_interval is None:
        return pd.DataFrame({c: [] for c in columns})
    j, k = np.triu_indices(len(labels), 1)
    value, interval = found.second[j, k], found.second_interval[j, k]
    order = np.argsort(-np.abs(value), kind="stable")
    return pd.DataFrame(
        {
            "one": [labels[n] for n in j[order]],
            "other": [labels[n] for n in k[order]],
            "second": value[order],
            "second_interval": interval[order],
        }
    )


def _history(results: F64, labels: list[str], second_order: bool) -> pd.DataFrame:
    parts = []
    for count in sorted({max(4, len(results) // 4), max(4, len(results) // 2), len(results)}):
        found = indices(results[:count], len(labels), second_order, 50)
        parts.append(
            pd.DataFrame(
                {
                    "samples": count,
                    "label": labels,
                    "total": found.total,
                    "total_interval": found.total_interval,
                }
            )
        )
    return pd.concat(parts, ignore_index=True)


def response(table: pd.DataFrame, path: str, output: str, bins: int = 16) -> pd.DataFrame:
    """Median and the middle 80 % of a result over one input.

    Returns
    -------
    DataFrame
        ``value`` (middle of the bin, or the option), ``low``, ``median``, ``high``, ``frames``.
    """
    sound = table[np.isfinite(table[output])]
    values = sound[path]
    distinct = pd.unique(values)
    if len(distinct) <= bins:
        groups = [(v, sound[output][values == v]) for v in sorted(distinct)]
    else:
        edges = np.linspace(values.min(), values.max(), bins + 1)
        number = np.clip(np.searchsorted(edges, values, side="right") - 1, 0, bins - 1)
        groups = [
            ((edges[k] + edges[k + 1]) / 2, sound[output][number == k])
            for k in range(bins)
            if (number == k).any()
        ]
    return pd.DataFrame(
        [(value, *np.quantile(part, [0.1, 0.5, 0.9]), len(part)) for value, part in groups],
        columns=["value", "low", "median", "high", "frames"],
    )
