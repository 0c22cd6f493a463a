"""A front whose sizes carry tolerances: what each of its frames may turn out to be."""

from __future__ import annotations

from collections.abc import Mapping
from fnmatch import fnmatchcase

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from model.frame.columns import Column
from model.frame.layout import Layout
from model.frame.variants import variants
from model.results.twist import answers
from sweeps.fields import fields
from sweeps.front import Front, costs, unbeaten
from sweeps.inputs import Input
from sweeps.runs import Run

F64 = NDArray[np.float64]

COLUMNS = ("mass_kg", "twist_Nm_per_deg")


def with_tolerances(
    run: Run, found: Front, tolerances: Mapping[str, float], draws: int = 128, seed: int = 1
) -> pd.DataFrame:
    """The frames of a front of mass and twist stiffness, made again and again within tolerances.

    tolerances : plus or minus, in the unit of the path, by path or pattern
        (``tube.*.wall_mm``: 0.15). A size is normal about what the frame has, with half of the
        tolerance as its standard deviation and nothing beyond the tolerance; tubes of a group are
        off together, groups by themselves.

    Returns
    -------
    DataFrame
        One row a frame: ``frame``; of each column ``_low``, ``_middle`` and ``_high`` (5, 50 and
        95 per cent of the draws); ``stays`` (share of the draws in which no other frame of the
        front beats it), ``failed`` (draws that could not be built or solved; they count as
        beaten).

    Raises
    ------
    InputError
        A pattern that fits no number of the layout, or a tolerance that is not above 0.
    """
    random = np.random.default_rng(seed)
    made = np.full((len(found.rows), draws, len(COLUMNS)), np.nan)
    for k, frame in enumerate(found.rows["frame"]):
        layout = run.study.layout_at(run.design.row(int(frame)))
        columns = _columns(layout, tolerances, draws, random)
        for batch in variants(layout, columns, draws)[0]:
            answer = answers(batch, None)
            good = answer.status == 0
            made[k, batch.rows, 0] = np.where(good, answer.mass, np.nan)
            made[k, batch.rows, 1] = np.where(good, answer.twist, np.nan)
    stays = np.zeros(len(made))
    for draw in range(draws):
        here = pd.DataFrame(made[:, draw], columns=list(COLUMNS))
        stays[unbeaten(costs(here, COLUMNS))] += 1 / draws
    table = pd.DataFrame({"frame": found.rows["frame"].to_numpy()})
    for place, column in enumerate(COLUMNS):
        marks = [_quantile(made[:, :, place], q) for q in (0.05, 0.5, 0.95)]
        for name, values in zip(("low", "middle", "high"), marks, strict=True):
            table[f"{column}_{name}"] = values
    return table.assign(stays=stays, failed=np.isnan(made).any(axis=2).sum(axis=1))


def _quantile(values: F64, share: float) -> F64:
    """Quantile of each row over its sound values; NaN where there are none."""
    return np.array(
        [np.quantile(v[np.isfinite(v)], share) if np.isfinite(v).any() else np.nan for v in values]
    )


def _columns(
    layout: Layout, tolerances: Mapping[str, float], draws: int, random: np.random.Generator
) -> dict[str, Column]:
    numbers = [f for f in fields(layout) if f.kind == "number"]
    columns: dict[str, Column] = {}
    for pattern, off in tolerances.items():
        if not off > 0:
            raise InputError(f"tolerance of {pattern}", f"{off:g}", "give a number above 0")
        fitting = [f for f in numbers if fnmatchcase(f.path, pattern)]
        if not fitting:
            raise InputError("tolerance", repr(pattern), "name a number of the layout")
        for one in fitting:
            value = float(one.value)
            spread = Input(one.path, one.label, one.unit, value - off, value + off,
                           shape="normal", mean=value, sd=off / 2)  # fmt: skip
            columns[spread.inner_path] = spread.column(random.random(draws))
    return columns
