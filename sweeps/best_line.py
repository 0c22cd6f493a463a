"""How far a sampled front is from the best that its layouts allow."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pandas as pd

from sweeps.front import Front
from sweeps.runs import Run
from sweeps.search import LeastMass, least_mass, sizing_of


def behind_line(found: Front, line: Sequence[LeastMass]) -> pd.DataFrame:
    """How much heavier each frame of a front is than a line of least masses.

    line : of one layout, as ``sweeps.search.sizing_front`` gives it; between its targets the
        logarithms of mass and twist stiffness run straight.

    Returns
    -------
    DataFrame
        ``frame``, ``mass_kg``, ``twist_Nm_per_deg``, ``least_kg`` and ``behind`` (per cent; less
        than 0 where another layout does better than the line's), NaN beyond the line's ends.
    """
    reached = sorted((best.twist, best.mass) for best in line if best.reached)
    twist, mass = np.log(np.array(reached).reshape(-1, 2)).T
    rows = found.rows[["frame", "mass_kg", "twist_Nm_per_deg"]].copy()
    at = np.log(rows["twist_Nm_per_deg"].to_numpy(np.float64))
    least = np.exp(np.interp(at, twist, mass)) if len(twist) else np.full(len(at), np.nan)
    inside = (at >= twist[0] - 1e-9) & (at <= twist[-1] + 1e-9) if len(twist) else at != at
    return _behind(rows, np.where(inside, least, np.nan))


def behind_own_layout(run: Run, found: Front, most: int = 12) -> pd.DataFrame:
    """How much heavier each frame of a front is than its own layout needs to be.

    Joints and members stay as each frame has them; its tube sizes become free within the study's
    ranges, and are chosen by exact gradients for least mass at the frame's own twist stiffness.

    most : so many frames, evenly along the front.

    Returns
    -------
    DataFrame
        As ``behind_line``; never less than 0 but for rounding.
    """
    count = min(most, len(found.rows))
    picked = np.unique(np.linspace(0, len(found.rows) - 1, count).round().astype(np.int64))
    rows = found.rows.iloc[picked][["frame", "mass_kg", "twist_Nm_per_deg"]].copy()
    least = []
    for frame, twist in zip(rows["frame"], rows["twist_Nm_per_deg"], strict=True):
        layout = run.study.layout_at(run.design.row(int(frame)))
        problem = sizing_of(run.study, layout)
        problem.slender = None  # sampled frames need not keep to it either
        start = np.log([layout.tubes[s.groups[0]].sizes[s.name] for s in problem.sizes])
        tries = [least_mass(problem, float(twist), x) for x in (start, None)]
        least.append(min((t.mass for t in tries if t.reached), default=np.nan))
    return _behind(rows, np.array(least))


def _behind(rows: pd.DataFrame, least: np.ndarray) -> pd.DataFrame:
    rows["least_kg"] = least
    rows["behind"] = (rows["mass_kg"] / rows["least_kg"] - 1) * 100
    return rows.reset_index(drop=True)
