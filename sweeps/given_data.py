"""What drives a result in frames that were chosen or filtered, or came from elsewhere.

Sobol' indices need the rows of a whole design; a filtered cloud has lost it, and its inputs hang
together. What still holds is how far a result's distribution moves when an input is known: the
mean Kolmogorov-Smirnov distance of F. Pianosi & T. Wagener, Environmental Modelling & Software 67
(2015) and 108 (2018, from given data), checked against SALib's PAWN.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from sweeps.indices import WIDTH
from sweeps.outputs import OUTPUTS

F64 = NDArray[np.float64]

MOST = 4096
"""So many frames are looked at; of more, as many evenly through the table."""

LEAST = 64

SLICES = 10
"""An input's range is cut into so many parts with as many frames in each."""

STATEMENT = (
    "Sobol' indices do not apply here: these frames are no whole design, and where they were "
    "chosen by their results their inputs no longer vary independently. Shift says how far the "
    "distribution of the result moves when the input is known, 0 not at all to 1; shifts do not "
    "add up to 1, and inputs that hang together share theirs."
)


@dataclass(frozen=True, eq=False)
class GivenData:
    """What drives one result column of given frames.

    table : one row an input, strongest first: input, shift, shift_interval (half width at 95 %),
        alone (part of the variance that follows the input; as a first-order index only where
        inputs are independent), alone_interval, above_chance.
    chance : shift of a column of random numbers, plus its interval: nothing below it is told from
        chance.
    held : inputs left out because they do not vary here. statement : what the numbers are not.
    """

    output: str
    table: pd.DataFrame
    chance: float
    used: int
    held: tuple[str, ...]
    statement: str = STATEMENT


def given_data(
    table: pd.DataFrame,
    output: str = "twist_Nm_per_deg",
    inputs: Sequence[str] | None = None,
    resamples: int = 100,
) -> GivenData:
    """How far each input shifts a result of a table of frames.

    inputs : columns to judge; when not given, all but frame, status and results.

    Raises
    ------
    InputError
        No such column, too few frames, or a result that does not vary.
    """
    if output not in table.columns:
        raise InputError("output", repr(output), "use a column of the table")
    if inputs is None:
        inputs = [c for c in table.columns if c not in {*OUTPUTS, "frame", "status", output}]
    for name in inputs:
        if name not in table.columns:
            raise InputError("inputs", repr(name), "use a column of the table")
    sound = table[np.isfinite(table[output].to_numpy(np.float64))]
    if len(sound) > MOST:
        sound = sound.iloc[np.linspace(0, len(sound) - 1, MOST).astype(np.int64)]
    if len(sound) < LEAST:
        raise InputError("frames", str(len(sound)), f"give at least {LEAST} that were solved")
    result = sound[output].to_numpy(np.float64)
    if np.ptp(result) <= 1e-12 * np.abs(result).max():
        raise InputError("output", output, "it is the same for every frame: nothing drives it")
    varying = [name for name in inputs if sound[name].nunique() > 1]
    if not varying:
        raise InputError("inputs", "none vary", "give frames that differ")
    random = np.random.default_rng(1)
    dummy = pd.Series(random.random(len(sound)))
    slices = [_slices(column, SLICES) for column in (*(sound[n] for n in varying), dummy)]
    count = len(sound)
    shift, alone = _measures(slices, result, np.ones(count))
    again = [_measures(slices, result, _counts(random, count)) for _ in range(resamples)]
    shift_interval, alone_interval = (
        WIDTH * np.std([one[k] for one in again], axis=0, ddof=1) for k in (0, 1)
    )
    chance = float(shift[-1] + shift_interval[-1])
    rows = pd.DataFrame(
        {
            "input": varying,
            "shift": shift[:-1],
            "shift_interval": shift_interval[:-1],
            "alone": alone[:-1],
            "alone_interval": alone_interval[:-1],
        }
    )
    rows["above_chance"] = rows["shift"] - rows["shift_interval"] > chance
    rows = rows.sort_values("shift", ascending=False, kind="stable").reset_index(drop=True)
    held = tuple(name for name in inputs if name not in varying)
    return GivenData(output, rows, chance, len(sound), held)


def _counts(random: np.random.Generator, count: int) -> F64:
    """How often each of ``count`` rows is drawn when as many are drawn again."""
    return np.bincount(random.integers(0, count, count), minlength=count).astype(np.float64)


def _slices(column: pd.Series, count: int) -> NDArray[np.int64]:
    """Slice of each row: by option where there are few, else as many rows in each."""
    values: NDArray[np.float64] | NDArray[np.str_]
    if pd.api.types.is_numeric_dtype(column):
        values = column.to_numpy(np.float64)
    else:
        values = column.to_numpy(str)
    distinct, place = np.unique(values, return_inverse=True)
    if len(distinct) <= count or values.dtype.kind != "f":
        return place.astype(np.int64)
    edges = np.unique(np.quantile(values.astype(float), np.linspace(0, 1, count + 1))[1:-1])
    return np.searchsorted(edges, values.astype(float), side="left").astype(np.int64)


def _measures(slices: list[NDArray[np.int64]], result: F64, weights: F64) -> tuple[F64, F64]:
    """Mean distance of distribution functions, and share of variance, of each column.

    weights : (n,) how often each row counts.
    """
    order = np.argsort(result, kind="stable")
    y, w = result[order], weights[order]
    last = np.append(y[1:] > y[:-1], True)
    whole = w.sum()
    all_rows = np.cumsum(w)[last] / whole
    middle = float(w @ y) / whole
    variance = float(w @ (y - middle) ** 2) / whole
    shift, alone = np.zeros((2, len(slices)))
    for k, given in enumerate(slices):
        member = np.arange(given.max() + 1)[:, None] == given[order]
        counted = member * w
        mass = counted.sum(axis=1)
        kept = mass > 1
        running = np.cumsum(counted[kept], axis=1)[:, last] / mass[kept, None]
        distance = np.abs(running - all_rows).max(axis=1)
        shift[k] = float(mass[kept] @ distance) / mass[kept].sum()
        mean = counted[kept] @ y / mass[kept]
        between = float(mass[kept] @ (mean - middle) ** 2) / whole
        # the part that slices of pure chance would explain is taken off (Fisher's correction)
        chance = (kept.sum() - 1) / (whole - kept.sum())
        alone[k] = between / variance - chance * (1 - between / variance)
    return shift, alone
