"""One frame of a run, built and solved again to be looked at closely."""

from __future__ import annotations

import math
from typing import Any

import pandas as pd

from model.errors import InputError
from model.frame.layout import Layout
from model.results.detail import Detail, examine
from sweeps.failures import OK
from sweeps.runs import Run, RunError

AGREES = 1e-9
"""Stored and solved again, results differ by rounding at most: relative."""


def layout_of(run: Run, frame: int) -> Layout:
    """The layout of one frame of a run, whether it is solved yet or not.

    Raises
    ------
    InputError
        The run has no such frame.
    """
    rows = run.design.rows
    if not 0 <= frame < rows:
        raise InputError("FRAME", str(frame), f"use a frame of the run, 0 to {rows - 1}")
    return run.study.layout_at(run.design.row(frame))


def row_of(run: Run, frame: int) -> pd.Series[Any]:
    """The stored row of one frame: its inputs as people read them, results and status.

    Raises
    ------
    InputError
        The run has no such frame, or has not solved it yet.
    """
    rows = run.design.rows
    if not 0 <= frame < rows:
        raise InputError("FRAME", str(frame), f"use a frame of the run, 0 to {rows - 1}")
    block = next(b for b in run.blocks if frame < run.rows_of(b).stop)
    if not run.path_of(block).exists():
        raise InputError("FRAME", str(frame), "not solved yet; resume the sweep or take another")
    found: pd.Series[Any] = run.read_block(block).iloc[frame - run.rows_of(block).start]
    return found


def detail_of(run: Run, frame: int) -> Detail:
    """One frame of a run, solved again and held against what the run stored of it.

    Raises
    ------
    InputError
        The run has no such frame, has not solved it, or found that it cannot stand.
    RunError
        The stored row is of another frame: the folder was changed, or another version wrote it.
    """
    row = row_of(run, frame)
    if row["status"] != OK:
        raise InputError("FRAME", str(frame), f"take another; this one was {row['status']}")
    detail = examine(layout_of(run, frame))
    for column, found in (
        ("mass_kg", detail.mass),
        ("twist_Nm_per_deg", detail.twist),
        ("bend_N_per_mm", detail.bend),
    ):
        if not math.isclose(float(row[column]), found, rel_tol=AGREES):
            raise RunError(
                f"{run.folder}: frame {frame} is stored with {column} = {row[column]:.6g} and "
                f"solves to {found:.6g}; sweep into a new folder with this version"
            )
    return detail
