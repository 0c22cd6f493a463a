"""What a run tells, put down twice: records for machines, text for a terminal."""

from __future__ import annotations

from typing import Any

import pandas as pd

from explorer.numbers import SPACE, count, number, percent
from explorer.terminal import pairs, table
from sweeps.drivers import Drivers
from sweeps.front import Front
from sweeps.jobs import Progress
from sweeps.outputs import OUTPUTS
from sweeps.runs import Run
from sweeps.screening import Screening

KEYS = {"twist_per_kg": "twist_Nm_per_deg_per_kg"}
"""Keys of records where a column's own name lacks the unit."""

_PAIRS = 5
"""Pairs of inputs that a terminal shows, ..."""
_PART = 0.005
"""... those that explain at least so much."""
_INDICES = (
    "Alone: first-order index, the part of the variation that this input explains by itself.\n"
    "With others: total index, with all it does together with other inputs. ± at 95 %."
)
_EFFECTS = (
    "Effect: mean change, whatever its sign, for a full step across the input's range, ± at 95 %.\n"
    "Mean: the same with sign. Spread: large where the effect bends or hangs on other inputs."
)
_HEADS = {
    "mass_kg": "Mass [kg]",
    "twist_Nm_per_deg": "Twist [N·m/deg]",
    "twist_per_kg": "per kg",
    "bend_N_per_mm": "Bending [N/mm]",
    "axial_share": "Axial share",
    "stock_m": "Tube [m]",
}


def column_of(given: str) -> str:
    """The result column that a person or program names by its own name or its key."""
    return next((column for column, key in KEYS.items() if key == given), given)


def sweep_record(run: Run, ended: Progress) -> dict[str, Any]:
    """How a sweep ended."""
    return {
        "folder": str(run.folder),
        "name": run.study.name,
        "state": ended.state,
        "samples": run.study.samples,
        "seed": run.study.seed,
        "method": run.study.method,
        "inputs": len(run.study.inputs),
        "frames": ended.rows,
        "frames_solved": ended.solved,
        "frames_failed_now": ended.failed,
        "seconds": ended.seconds,
    }


def sweep_text(run: Run, ended: Progress) -> str:
    """How a sweep ended, for a person."""
    study = run.study
    failed = f", {count(ended.failed, 'frame')} could not stand" if ended.failed else ""
    return pairs(
        [
            ("Run", str(run.folder)),
            ("Study", f"{study.name}, {count(len(study.inputs), 'input')}"),
            ("Samples", f"{study.samples:,} by {study.method}, seed {study.seed}"),
            ("Frames", f"{ended.solved:,} of {ended.rows:,} solved{failed}"),
            ("Time", f"{ended.seconds:.1f} s"),
        ]
    )


def drivers_record(run: Run, found: Drivers) -> dict[str, Any]:
    """Indices of every input and of every pair; intervals are half widths at 95 %."""
    return {
        "folder": str(run.folder),
        "name": run.study.name,
        "output": KEYS.get(found.output, found.output),
        "sentence": found.sentence,
        "verdict": found.verdict,
        "samples_used": found.used,
        "samples_dropped": found.dropped,
        "frames_failed": len(found.failed),
        "drivers": _records(found.table),
        "pairs": _records(found.pairs),
    }


def drivers_text(run: Run, found: Drivers) -> str:
    """What drives an output, for a person."""
    rows = [
        (
            str(row["label"]),
            _share(row["first"]),
            _interval(row["first_interval"]),
            _share(row["total"]),
            _interval(row["total_interval"]),
        )
        for _, row in found.table.iterrows()
    ]
    head = ("Input", "Alone", "±", "With others", "±")
    together = [
        (
            f"{row['one']} and {row['other']}",
            _share(row["second"]),
            _interval(row["second_interval"]),
        )
        for _, row in found.pairs.iterrows()
        if row["second"] > max(row["second_interval"], _PART)
    ][:_PAIRS]
    parts = [
        f"{run.study.name}: what drives {OUTPUTS[found.output].label}",
        found.sentence,
        table(head, rows, right=range(1, 5)),
        _INDICES,
    ]
    if together:
        parts.append(table(("Pairs that act together", "Part", "±"), together, right={1, 2}))
    return "\n\n".join([*parts, found.verdict])


def screening_record(run: Run, found: Screening) -> dict[str, Any]:
    """Elementary effects of every input, in the unit of the output; intervals at 95 %."""
    return {
        "folder": str(run.folder),
        "name": run.study.name,
        "output": KEYS.get(found.output, found.output),
        "verdict": found.verdict,
        "trajectories_used": found.used,
        "trajectories_dropped": found.dropped,
        "frames_failed": len(found.failed),
        "effects": _records(found.table),
    }


def screening_text(run: Run, found: Screening) -> str:
    """What matters at all, for a person."""
    output = OUTPUTS[found.output]
    rows = [
        (
            str(row["label"]),
            *(number(float(row[c])) for c in ("effect", "effect_interval", "mean", "spread")),
        )
        for _, row in found.table.iterrows()
    ]
    unit = f" [{output.unit}]" if output.unit else ""
    head = ("Input", f"Effect{unit}", "±", "Mean", "Spread")
    return "\n\n".join(
        [
            f"{run.study.name}: what matters at all for {output.label}",
            table(head, rows, right=range(1, 5)),
            _EFFECTS,
            found.verdict,
        ]
    )


def front_record(run: Run, found: Front) -> dict[str, Any]:
    """The frames that no other frame beats, lightest first."""
    inputs = [given.path for given, _ in run.study.drawn]
    return {
        "folder": str(run.folder),
        "name": run.study.name,
        "frames": run.design.rows,
        "frames_solved": found.considered,
        "frames_within_limits": found.counted,
        "knee_frame": found.knee,
        "front": [
            {
                "frame": row["frame"],
                **{KEYS.get(column, column): row[column] for column in OUTPUTS},
                "inputs": {path: row[path] for path in inputs},
            }
            for _, row in found.rows.iterrows()
        ],
    }


def front_text(run: Run, found: Front) -> str:
    """The frames that no other frame beats, for a person; the knee has a star."""
    said = (
        f"{run.study.name}: {count(len(found.rows), 'frame')} that no other frame beats, of "
        f"{count(found.counted, 'frame')} within the limits and {found.considered:,} solved."
    )
    if not run.complete:
        said += f"\nThe sweep is not finished: {run.rows_solved:,} of {run.design.rows:,} frames."
    if not len(found.rows):
        return (
            f"{run.study.name}: none of {count(found.considered, 'frame')} solved lies within the "
            "limits.\nWiden the limits, or the ranges of the sweep."
        )
    head = ["Frame", *_HEADS.values()]
    rows = [
        [
            f"{row['frame']}{SPACE}*" if row["frame"] == found.knee else f"{row['frame']}{SPACE} ",
            *(_written(row[column], column) for column in _HEADS),
        ]
        for _, row in found.rows.iterrows()
    ]
    foot = "" if found.knee is None else "\n\n* the knee: beyond it stiffness costs most mass"
    return f"{said}\n\n{table(head, rows, right=range(len(head)))}{foot}"


def _written(value: float, column: str) -> str:
    return percent(value) if column == "axial_share" else number(float(value), 4)


def _share(value: float) -> str:
    return percent(float(value)) if value > 0.0005 else f"0{SPACE}%"


def _interval(value: float) -> str:
    return f"{100 * float(value):.1f}"


def _records(rows: pd.DataFrame) -> list[dict[str, Any]]:
    return [{str(key): value for key, value in row.items()} for row in rows.to_dict("records")]
