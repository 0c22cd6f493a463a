"""Which input drives a result: Sobol' indices with intervals, a verdict and a sentence in words."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from sweeps.failures import FAILURE_COLUMNS, failures
from sweeps.indices import LITTLE, Bounds, Indices, bounds, indices
from sweeps.outputs import OUTPUTS
from sweeps.runs import Run, RunError

__all__ = ["LITTLE", "Drivers", "Indices", "drivers", "indices", "response", "sentence", "verdict"]

F64 = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Drivers:
    """What drives one result column of a run.

    table : one row an input (or group of inputs that are judged together), most important first:
        input (path; of a group its first), label, inputs (all paths), first, first_interval,
        total, total_interval, and first_low, first_high, total_low, total_high: what the index
        could be, whatever the frames that failed would have given. Equal to the index itself when
        none failed.
    pairs : one row a pair of inputs that act together, strongest first: one, other, second,
        second_interval, second_low, second_high.
    history : total index of each input from a quarter, a half and all of the samples.
    used, dropped : base samples behind the numbers, and those left out because a frame failed.
    affected : numbers of the base samples left out. failed : the frames that failed, as
        ``sweeps.failures.failures`` lists them.
    """

    output: str
    table: pd.DataFrame
    pairs: pd.DataFrame
    history: pd.DataFrame
    verdict: str
    sentence: str
    used: int
    dropped: int
    affected: tuple[int, ...]
    failed: pd.DataFrame


def drivers(
    run: Run, output: str = "twist_Nm_per_deg", table: pd.DataFrame | None = None
) -> Drivers:
    """Indices of a complete run for one of its result columns.

    Raises
    ------
    InputError
        No such column, or it does not vary. RunError: the run is not complete, or a screening.
    """
    if output not in OUTPUTS:
        raise InputError("output", repr(output), f"use one of: {', '.join(OUTPUTS)}")
    if run.study.method != "sobol":
        raise RunError(f"{run.folder}: is a screening and has elementary effects, no shares of "
                       "the variation; sweep with method sobol for those")  # fmt: skip
    if not run.complete:
        raise RunError(f"{run.folder}: {run.rows_solved} of {run.design.rows} frames are solved; "
                       "resume the sweep before asking what drives it")  # fmt: skip
    if table is None:
        paths = [i.path for i, _ in run.study.drawn]
        table = run.table((*FAILURE_COLUMNS, output))
        if not np.isfinite(table[output]).all():
            table = run.table((*FAILURE_COLUMNS, *paths, output))
    design, judged = run.design, run.study.judged
    results = table[output].to_numpy(np.float64).reshape(design.samples, -1)
    whole = np.isfinite(results).all(axis=1)
    sound = results[whole]
    used = int(whole.sum())
    if used < 8:
        remedy = "narrow the ranges" if used < len(whole) else "sweep with more samples"
        raise RunError(f"{run.folder}: only {used} base samples have no failed frame; {remedy}")
    if np.ptp(sound) <= 1e-12 * np.abs(sound).max():
        raise InputError("output", output, "it is the same for every frame: nothing drives it")
    found = _steady(indices(sound, design.judged, run.second_order), sound, run.second_order)
    dropped = len(whole) - used
    could = bounds(results, design.judged, run.second_order) if dropped else None
    labels = [group.name for group in judged]
    rows = pd.DataFrame(
        {
            "input": [group.paths[0] for group in judged],
            "label": labels,
            "inputs": [", ".join(group.paths) for group in judged],
            "first": found.first,
            "first_interval": found.first_interval,
            "total": found.total,
            "total_interval": found.total_interval,
            "first_low": found.first if could is None else np.fmin(found.first, could.first[0]),
            "first_high": found.first if could is None else np.fmax(found.first, could.first[1]),
            "total_low": found.total if could is None else np.fmin(found.total, could.total[0]),
            "total_high": found.total if could is None else np.fmax(found.total, could.total[1]),
        }
    ).iloc[found.order]
    failed = failures(table, output)
    return Drivers(
        output,
        rows.reset_index(drop=True),
        _pairs(found, could, labels),
        _history(sound, labels, run.second_order),
        verdict(found, used, dropped, could, len(failed)),
        sentence(found, labels, output),
        used,
        dropped,
        tuple(np.flatnonzero(~whole).tolist()),
        failed,
    )


def _steady(found: Indices, results: F64, second_order: bool) -> Indices:
    """The same, with no more places called settled than half of the samples rank alike."""
    first = results[: len(results) // 2]
    if np.ptp(first) == 0:
        return replace(found, settled=0)
    half = indices(first, len(found.order), second_order, 2)
    alike = np.append(half.order == found.order, False)
    return replace(found, settled=min(found.settled, int(np.argmin(alike))))


def verdict(
    found: Indices, used: int, dropped: int, could: Bounds | None = None, failed: int = 0
) -> str:
    """Whether the ranking can be relied on, in words.

    used, dropped : base samples behind the numbers and left out. could : bounds when some are
    left out. failed : frames that failed.
    """
    matter = int((found.total >= LITTLE).sum())
    settled = found.settled if could is None else min(found.settled, _beyond_doubt(found, could))
    if settled < min(found.settled, matter):
        text = (
            "Ranking not settled: frames that failed could change it."
            if settled == 0
            else f"Ranking settled for the first {_places(settled)}; frames that failed could "
            "change the rest."
        )
    elif found.settled >= matter:
        text = "Ranking settled."
    elif found.settled == 0:
        text = "Ranking not settled yet: add samples."
    else:
        places = _places(found.settled)
        text = f"Ranking settled for the first {places}; add samples for the rest."
    if dropped:
        share = dropped / (used + dropped)
        text += (
            f" {dropped} of {used + dropped} base samples ({share:.1%}) hold a frame that failed "
            "and are left out; the numbers hold for the frames that can be built."
        )
        if failed:
            text = text.replace("hold a frame that failed", f"hold the {failed} that failed")
    if could is not None:
        moved = max(
            float(np.abs(could.total - found.total).max()),
            float(np.abs(could.first - found.first).max()),
        )
        text += (
            " Had those frames given anything within the range of the others, no index would "
            f"differ by more than {moved:.2g}."
        )
    return text


def _places(count: int) -> str:
    return "place" if count == 1 else f"{count} places"


def _beyond_doubt(found: Indices, could: Bounds) -> int:
    """Leading places of the ranking that no result of the missing frames could change."""
    low, high = could.total[0][found.order], could.total[1][found.order]
    for place in range(len(low) - 1):
        if low[place] <= high[place + 1 :].max():
            return place
    return len(low)


def sentence(found: Indices, labels: list[str], output: str) -> str:
    """The strongest input in one sentence."""
    best = int(np.argmax(found.first))
    share, interval = float(found.first[best]), float(found.first_interval[best])
    low, share, high = (
        min(1.0, max(0.0, end)) for end in (share - interval, share, share + interval)
    )
    text = (
        f"{labels[best]} explains {share:.0%} of the variation in {OUTPUTS[output].label} "
        f"({low:.0%} to {high:.0%})."
    )
    return text.replace("%", " %")


def _pairs(found: Indices, could: Bounds | None, labels: list[str]) -> pd.DataFrame:
    columns = ["one", "other", "second", "second_interval", "second_low", "second_high"]
    if found.second is None or found.second_interval is None:
        return pd.DataFrame({c: [] for c in columns})
    j, k = np.triu_indices(len(labels), 1)
    value, interval = found.second[j, k], found.second_interval[j, k]
    low, high = (value, value)
    if could is not None and could.second is not None:
        low, high = np.fmin(value, could.second[0][j, k]), np.fmax(value, could.second[1][j, k])
    order = np.argsort(-np.abs(value), kind="stable")
    return pd.DataFrame(
        {
            "one": [labels[n] for n in j[order]],
            "other": [labels[n] for n in k[order]],
            "second": value[order],
            "second_interval": interval[order],
            "second_low": low[order],
            "second_high": high[order],
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
