"""From rows in the unit cube to a table of results, one row a frame."""

from __future__ import annotations

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.frame.batch import Batch
from model.frame.variants import variants
from model.results.twist import Answers, answers, loose
from sweeps.failures import OK
from sweeps.study import Study

__all__ = ["OK", "evaluate"]

F64 = NDArray[np.float64]


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
            status[batch.rows[k]] = _reason(batch, int(k), int(found.status[k]))
    lacking = ~np.isfinite(np.stack([*results.values()])).all(axis=0) & (status == OK)
    for row in np.flatnonzero(lacking):
        names = ", ".join(n for n, values in results.items() if not np.isfinite(values[row]))
        status[row] = f"no result: {names}"
    table = study.table(unit)
    table.insert(0, "frame", np.arange(first_frame, first_frame + len(unit)))
    for name, values in results.items():
        table[name] = values[again]
    table["status"] = status[again].astype(str)
    return table


def _reason(batch: Batch, k: int, code: int) -> str:
    """Why frame ``k`` of a batch was not solved."""
    places = np.isfinite(batch.xyz[k]).all(axis=1)
    if not places.all():
        joint = batch.skeleton.joints[int(np.argmin(places))]
        return f"no number: position of joint {joint}"
    whole = np.isfinite(batch.rigidity[k]).all(axis=1) & np.isfinite(batch.line_mass[k])
    if not whole.all():
        return f"no number: section of {batch.skeleton.groups[int(np.argmin(whole))]}"
    return f"loose: {loose(batch, code)}"


_MARKS = np.random.default_rng(1).integers(1, 2**63, 4096).astype(np.uint64) * 2 + 1
"""Odd numbers that turn a row into one mark; rows are told apart by it, and compared all the same.
"""

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
    bits = np.ascontiguousarray(keys).view(np.uint64)
    # few of the low bits of a number vary (none of a choice's): the high ones are folded in
    marks = ((bits ^ (bits >> np.uint64(31))) * _MARKS[: bits.shape[1]]).sum(axis=1)
    _, first, again = np.unique(marks, return_index=True, return_inverse=True)
    if not np.array_equal(bits[first[again]], bits):  # two rows of one mark: one by one, then
        _, first, again = np.unique(bits, axis=0, return_index=True, return_inverse=True)
    order = np.argsort(first, kind="stable")
    place = np.empty_like(order)
    place[order] = np.arange(len(order))
    return first[order].astype(np.int64), place[again].astype(np.int64)
