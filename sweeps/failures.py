"""Frames that could not be built or solved, with what they were and why."""

from __future__ import annotations

import numpy as np
import pandas as pd

from sweeps.outputs import OUTPUTS
from sweeps.runs import Run

OK = "ok"
"""Status of a frame that was built and solved."""

FAILURE_COLUMNS = ("frame", "status")


def failures(source: Run | pd.DataFrame, output: str | None = None) -> pd.DataFrame:
    """The frames of a run, or of its table, that have no result.

    output : a result column; any of them when not given.

    Returns
    -------
    DataFrame
        ``frame``, the inputs, and ``reason``, in the order of the design. A frame whose status is
        ok and which lacks a result all the same is among them.
    """
    table = source.table() if isinstance(source, Run) else source
    columns = [c for c in OUTPUTS if c in table.columns] if output is None else [output]
    present = np.isfinite(table[columns].to_numpy(np.float64))
    bad = ~present.all(axis=1) | (table["status"] != OK).to_numpy()
    found = table[bad]
    lacking = [
        "no result: " + ", ".join(c for c, there in zip(columns, row, strict=True) if not there)
        for row in present[bad]
    ]
    reasons = [
        said if said != OK else missing
        for said, missing in zip(found["status"], lacking, strict=True)
    ]
    kept = [c for c in found.columns if c not in OUTPUTS and c != "status"]
    listed: pd.DataFrame = found[kept].assign(reason=reasons).reset_index(drop=True)
    return listed
