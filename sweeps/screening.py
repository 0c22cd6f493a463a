"""Which of many inputs matter at all: elementary effects of a screening run.

M. D. Morris, Technometrics 33 (1991); mean absolute effect after Campolongo, Cariboni & Saltelli,
Environmental Modelling & Software 22 (2007); analysed by SALib.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from sweeps.failures import FAILURE_COLUMNS, failures
from sweeps.outputs import OUTPUTS
from sweeps.runs import Run, RunError
from sweeps.sampling import LEVELS, Design

F64 = NDArray[np.float64]

STEP = LEVELS / (2 * (LEVELS - 1))
"""Step of a trajectory in the unit cube, as Morris chose it."""

LITTLE = 0.1
"""Inputs whose effect stays below this part of the greatest are taken to matter little; common
practice, no published source."""

RESAMPLES = 1000


@dataclass(frozen=True, eq=False)
class Screening:
    """Elementary effects on one result column, for a full step across the input's range.

    table : one row an input (or group judged together), greatest effect first: input (path; of a
        group its first), label, inputs (all paths), effect (mean of the absolute effects) and
        effect_interval (half width at 95 %), mean (signed; NaN for a group, whose inputs cancel
        each other), spread (standard deviation: large where the effect is not linear or hangs on
        other inputs), effect_low, effect_high (what the effect could be, whatever the frames that
        failed would have given).
    verdict : in words. used, dropped : trajectories behind the numbers, and those left out
        because a frame failed. failed : these frames.
    """

    output: str
    table: pd.DataFrame
    verdict: str
    used: int
    dropped: int
    failed: pd.DataFrame


def screening(
    run: Run, output: str = "twist_Nm_per_deg", table: pd.DataFrame | None = None
) -> Screening:
    """Elementary effects of a complete screening run.

    Raises
    ------
    InputError
        No such column. RunError: the run is not complete, or is no screening.
    """
    if output not in OUTPUTS:
        raise InputError("output", repr(output), f"use one of: {', '.join(OUTPUTS)}")
    if run.study.method != "screening":
        raise RunError(f'{run.folder}: is no screening; sweep with method = "screening"')
    if not run.complete:
        raise RunError(f"{run.folder}: {run.rows_solved} of {run.design.rows} frames are solved; "
                       "resume the sweep before asking what matters")  # fmt: skip
    if table is None:
        table = run.table((*FAILURE_COLUMNS, *(i.path for i, _ in run.study.drawn), output))
    design, judged = run.design, run.study.judged
    results = table[output].to_numpy(np.float64).reshape(design.samples, -1)
    whole = np.isfinite(results).all(axis=1)
    used = int(whole.sum())
    if used < 2:
        raise RunError(f"{run.folder}: only {used} trajectories have no failed frame; "
                       "narrow the ranges")  # fmt: skip
    unit = design.unit().reshape(design.samples, design.rows_per_sample, design.inputs)
    found = effects(design, unit[whole], results[whole])
    low, high = _bounds(design, unit, results)
    alone = np.array([len(group.paths) == 1 for group in judged])
    rows = pd.DataFrame(
        {
            "input": [group.paths[0] for group in judged],
            "label": [group.name for group in judged],
            "inputs": [", ".join(group.paths) for group in judged],
            "effect": found["mu_star"],
            "effect_interval": found["mu_star_conf"],
            "mean": np.where(alone, found["mu"], np.nan),
            "spread": found["sigma"],
            "effect_low": np.fmin(low, found["mu_star"]),
            "effect_high": np.fmax(high, found["mu_star"]),
        }
    )
    rows = rows.sort_values("effect", ascending=False, kind="stable").reset_index(drop=True)
    dropped = len(whole) - used
    said = _verdict(rows, used, dropped)
    return Screening(output, rows, said, used, dropped, failures(table, output))


def effects(design: Design, unit: F64, results: F64) -> dict[str, F64]:
    """SALib's mu, mu_star, mu_star_conf and sigma of whole trajectories.

    unit : (trajectories, rows of one, inputs); results : (trajectories, rows of one).
    """
    from SALib.analyze import morris  # slow to load

    found = morris.analyze(
        design.problem(),
        unit.reshape(-1, design.inputs),
        results.ravel(),
        num_resamples=RESAMPLES,
        num_levels=LEVELS,
        seed=1,
    )
    names = ("mu", "mu_star", "mu_star_conf", "sigma")
    return {name: np.ma.filled(np.ma.asarray(found[name], float), np.nan) for name in names}


def _bounds(design: Design, unit: F64, results: F64) -> tuple[F64, F64]:
    """Least and greatest mean absolute effect for missing results in the range of the others."""
    there = np.isfinite(results)
    low = np.where(there, results, results[there].min())
    high = np.where(there, results, results[there].max())
    least, most = low[:, 1:] - high[:, :-1], high[:, 1:] - low[:, :-1]
    nearest = np.where((least <= 0) & (most >= 0), 0.0, np.minimum(np.abs(least), np.abs(most)))
    farthest = np.maximum(np.abs(least), np.abs(most))
    changed = np.argmax(np.diff(unit, axis=1) != 0, axis=2)
    part = np.array(design.parts or range(design.inputs))[changed]
    ends = [
        np.bincount(part.ravel(), value.ravel(), design.judged) / (STEP * len(results))
        for value in (nearest, farthest)
    ]
    return ends[0], ends[1]


def _verdict(rows: pd.DataFrame, used: int, dropped: int) -> str:
    effect, high = rows["effect"].to_numpy(), rows["effect_high"].to_numpy()
    interval = rows["effect_interval"].to_numpy()
    line = LITTLE * effect[0]
    little = np.fmax(effect + interval, high) < line
    matter = effect - interval >= line
    names = ", ".join(rows["label"][matter])
    text = f"Matter: {names}." if names else "Nothing stands out."
    if little.any():
        text += f" Matter little (below {LITTLE:.0%} of the greatest effect): "
        text = text.replace("%", " %") + f"{', '.join(rows['label'][little])}."
    open_ones = rows["label"][~little & ~matter]
    if len(open_ones):
        text += f" Not certain yet: {', '.join(open_ones)}; add samples."
    if dropped:
        text += (
            f" {dropped} of {used + dropped} trajectories hold a frame that failed and are left "
            "out; what the effects could be with them is stated beside each."
        )
    return text
