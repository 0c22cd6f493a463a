"""The frames that no other frame beats, the knee among them, and how far another one is off."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from model.errors import InputError
from sweeps.outputs import OUTPUTS

F64 = NDArray[np.float64]


def unbeaten(costs: F64) -> NDArray[np.int64]:
    """Rows that no other row beats: none is as good in every column and better in one.

    Parameters
    ----------
    costs : (n, columns), less is better; rows with NaN are beaten. Of equal rows the first stays.

    Returns
    -------
    Row numbers, by the first column ascending.

    Notes
    -----
    Two columns by one sort; three by going through the sorted rows along the stairs that the
    last two columns make of the unbeaten ones (H. T. Kung, F. Luccio & F. P. Preparata, Journal of
    the ACM 22, 1975): n log n both. More columns against all unbeaten rows so far.
    """
    sound = np.flatnonzero(np.isfinite(costs).all(axis=1))
    kept = costs[sound]
    order = np.lexsort((*kept.T[::-1],)) if len(kept) else np.empty(0, dtype=np.int64)
    ranked = kept[order]
    if not len(ranked):
        return np.empty(0, dtype=np.int64)
    if ranked.shape[1] == 2:
        best = np.minimum.accumulate(ranked[:, 1])
        first = np.concatenate([[True], ranked[1:, 1] < best[:-1]])
        kept_rows: NDArray[np.int64] = sound[order[first]]
        return kept_rows
    if ranked.shape[1] == 3:
        steps: NDArray[np.int64] = sound[order[_along_stairs(ranked)]]
        return steps
    front = np.empty_like(ranked)
    members: list[int] = []
    for k, row in enumerate(ranked):
        seen = front[: len(members)]
        if not (seen <= row).all(axis=1).any():
            front[len(members)] = row
            members.append(k)
    found: NDArray[np.int64] = sound[order[members]]
    return found


def _along_stairs(ranked: F64) -> list[int]:
    """Unbeaten rows of three columns in ascending order.

    A row is beaten where the stairs (second column ascending, third descending) of the rows
    before it lie below it; otherwise it becomes a step and those that it undercuts go.
    """
    members: list[int] = []
    seconds: list[float] = []
    thirds: list[float] = []
    for k, (second, third) in enumerate(ranked[:, 1:].tolist()):
        place = bisect_right(seconds, second)
        if place and thirds[place - 1] <= third:
            continue
        members.append(k)
        begin = place - 1 if place and seconds[place - 1] == second else place
        end = begin
        while end < len(thirds) and thirds[end] >= third:
            end += 1
        seconds[begin:end] = [second]
        thirds[begin:end] = [third]
    return members


@dataclass(frozen=True, eq=False)
class Front:
    """The frames of a table that no other one beats.

    rows : the table's rows, lightest first. knee : frame number of the knee.
    counted : frames that meet the limits; considered : all frames that were solved.
    z : the third column, when there is one.
    """

    rows: pd.DataFrame
    x: str
    y: str
    knee: int | None
    counted: int
    considered: int
    z: str | None = None

    @property
    def columns(self) -> tuple[str, ...]:
        """The two or three columns."""
        return (self.x, self.y) if self.z is None else (self.x, self.y, self.z)


def front(
    table: pd.DataFrame,
    x: str = "mass_kg",
    y: str = "twist_Nm_per_deg",
    min_twist: float | None = None,
    max_mass: float | None = None,
    limits: Mapping[str, tuple[float | None, float | None]] | None = None,
    z: str | None = None,
) -> Front:
    """The front of two or three columns within limits.

    limits : least and greatest value by column, on top of ``min_twist`` [N·m/deg] and
        ``max_mass`` [kg].

    Raises
    ------
    InputError
        No such column.
    """
    bounds = dict(limits or {})
    if min_twist is not None:
        bounds["twist_Nm_per_deg"] = (min_twist, None)
    if max_mass is not None:
        bounds["mass_kg"] = (None, max_mass)
    columns = (x, y) if z is None else (x, y, z)
    for column in (*columns, *bounds):
        if column not in table.columns:
            raise InputError("column", repr(column), f"use one of: {', '.join(OUTPUTS)}")
    solved = table[np.isfinite(table["twist_Nm_per_deg"])]
    inside = np.ones(len(solved), dtype=bool)
    for column, (least, most) in bounds.items():
        values = solved[column].to_numpy()
        inside &= (values >= least) if least is not None else True
        inside &= (values <= most) if most is not None else True
    kept = solved[inside]
    rows = kept.iloc[unbeaten(costs(kept, columns))].reset_index(drop=True)
    return Front(rows, x, y, knee(rows, *columns), len(kept), len(solved), z)


def costs(table: pd.DataFrame, columns: Sequence[str]) -> F64:
    """(n, columns) values with the sign turned where more is better."""
    found = np.empty((len(table), len(columns)))
    for k, column in enumerate(columns):
        sign = -1.0 if column in OUTPUTS and OUTPUTS[column].more_is_better else 1.0
        found[:, k] = sign * table[column].to_numpy(np.float64)
    return found


def knee(rows: pd.DataFrame, x: str, y: str, z: str | None = None) -> int | None:
    """Frame number of the front's knee: farthest from the chord between its ends.

    Columns scaled to the front's range; the bend angle's cousin of Das, "On characterizing the
    knee of the Pareto curve" (Structural Optimization 18, 1999). Of three columns the plane
    through the ends of the scaled axes stands for the chord. None below three frames.
    """
    if len(rows) < 3:
        return None
    points = costs(rows, (x, y) if z is None else (x, y, z))
    span = np.ptp(points, axis=0)
    if (span == 0).any():
        return None
    scaled = (points - points.min(axis=0)) / span
    away = 1.0 - scaled.sum(axis=1)
    best = int(np.argmax(away))
    return int(rows["frame"].iloc[best]) if away[best] > 0 else None


@dataclass(frozen=True)
class Distance:
    """How far a frame is from the front.

    lighter : mass [kg] that the front saves at no less twist stiffness; 0 on the front.
    stiffer : twist stiffness [N·m/deg] that the front adds at no more mass.
    """

    lighter: float
    stiffer: float


def distance(found: Front, frame: pd.Series) -> Distance:
    """How far a frame of the table is from a front of mass against twist stiffness."""
    mass = found.rows["mass_kg"].to_numpy()
    twist = found.rows["twist_Nm_per_deg"].to_numpy()
    own_mass, own_twist = float(frame["mass_kg"]), float(frame["twist_Nm_per_deg"])
    as_stiff = mass[twist >= own_twist]
    as_light = twist[mass <= own_mass]
    lighter = own_mass - float(as_stiff.min()) if len(as_stiff) else 0.0
    stiffer = float(as_light.max()) - own_twist if len(as_light) else 0.0
    return Distance(max(0.0, lighter), max(0.0, stiffer))
