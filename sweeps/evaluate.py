"""From rows in the unit cube to a table of results, one row a frame."""

from __future__ import annotations

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.frame.variants import variants
from model.results.twist import Answers, answers, loose
from sweeps.study import Study

F64 = NDArray[np.float64]

OK = "ok"


def evaluate(
    study: Study, unit: F64, first_frame: int = 0, threads: int | None = None
) -> pd.DataFrame:
    """Solve the frames of a study at rows of the unit cube (n, inputs).

    Returns
    -------
    DataFrame
        ``frame`` (number in the design), the inputs as people read them, the result columns of
        ``sweeps.outputs`` and ``status``: ``ok``, or why the frame could not be built or solved.
        Results of such a frame are NaN.
    """
    first, again = _distinct(study, unit)
    rows = unit[first]
    batches, refused = variants(study.layout, study.columns(rows), len(rows))
    results = {name: np.full(len(rows), np.nan) for name in _COLUMNS}
    status = np.full(len(rows), OK, dtype=object)
    for fault in refused:
        status[fault.row] = f"refused: {fault}"
    for batch in batches:
        found = answers(batch, threads)
        for name, values in _columns(found).items():
            results[name][batch.rows] = values
        for k in np.flatnonzero(found.status):
            status[batch.rows[k]] = f"loose: {loose(batch, int(found.status[k]))}"
    table = study.table(unit)
    table.insert(0, "frame", np.arange(first_frame, first_frame + len(unit)))
    for name, values in results.items():
        table[name] = values[again]
    table["status"] = status[again].astype(str)
    return table


_COLUMNS = (
    "mass_kg",
    "twist_Nm_per_deg",
    "bend_N_per_mm",
    "axial_share",
    "twist_per_kg",
    "stock_m",
)


def _columns(found: Answers) -> dict[str, F64]:
    solved = found.status == 0
    return {
        "mass_kg": np.where(solved, found.mass, np.nan),
        "twist_Nm_per_deg": found.twist,
        "bend_N_per_mm": found.bend,
        "axial_share": found.axial_share,
        "twist_per_kg": found.twist_per_kg,
        "stock_m": np.where(solved, found.stock, np.nan),
    }


def _distinct(study: Study, unit: F64) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Rows that differ, and for every row which of them it equals."""
    keys = np.empty_like(unit)
    for k, given in enumerate(study.inputs):
        keys[:, k] = given.picked(unit[:, k]) if given.is_choice else unit[:, k]
    whole = np.ascontiguousarray(keys).view(np.dtype((np.void, keys.itemsize * keys.shape[1])))
    _, first, again = np.unique(whole.ravel(), return_index=True, return_inverse=True)
    order = np.argsort(first, kind="stable")
    place = np.empty_like(order)
    place[order] = np.arange(len(order))
    return first[order].astype(np.int64), place[again].astype(np.int64)
