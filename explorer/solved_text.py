"""A solved frame file as text for a terminal; starts without what only sweeps and pages need."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from explorer.numbers import SPACE, number, percent, with_unit
from explorer.terminal import pairs, table
from model.frame.skeleton import F64

NOISE = 1e-10
"""Part of the greatest value below which a value is shown as 0."""
_MOST = 12
"""Rows of a long table that a terminal shows; ``--json`` gives them all."""
_KINDS = ("axial", "bending", "torsion", "shear")


def solved_text(answer: Mapping[str, Any]) -> str:
    """A solved frame file for a person: for each case what moves, what holds, what carries."""
    parts = [pairs([("Mass", with_unit(answer["mass_kg"], "kg"))])]
    for name, case in answer["cases"].items():
        parts += [f"Case {name}", _moved(case), _held(case), _carried(case)]
    if "frequencies_Hz" in answer:
        rows = [(str(k), with_unit(f, "Hz")) for k, f in enumerate(answer["frequencies_Hz"], 1)]
        parts.append(table(("Mode", "Natural frequency"), rows, right={0, 1}))
    return "\n\n".join(part for part in parts if part)


def _moved(case: Mapping[str, Any]) -> str:
    """Movement of the joints that move most [mm], [deg]."""
    moved = _plain(case["displacements"])
    names = sorted(moved, key=lambda name: -float(np.linalg.norm(moved[name][:3])))
    rows = [
        (
            name,
            *(number(v * 1e3, 4) for v in moved[name][:3].tolist()),
            *(number(v, 4) for v in np.degrees(moved[name][3:]).tolist()),
        )
        for name in names[:_MOST]
    ]
    units = ("x [mm]", "y [mm]", "z [mm]", "rx [deg]", "ry [deg]", "rz [deg]")
    title = "Movement of the joints" + _cut(len(names), "joints that move most")
    return f"{title}\n{table(('Joint', *units), rows, right=range(1, 7))}"


def _held(case: Mapping[str, Any]) -> str:
    rows = [
        (name, *(number(v, 4) for v in row.tolist()))
        for name, row in _plain(case["reactions"], _forces(case)).items()
    ]
    units = ("Fx [N]", "Fy [N]", "Fz [N]", "Mx [N·m]", "My [N·m]", "Mz [N·m]")
    if not rows:
        return ""
    return f"Reactions\n{table(('Joint', *units), rows, right=range(1, 7))}"


def _carried(case: Mapping[str, Any]) -> str:
    """The members that store most energy, how they store it, and their axial force."""
    energy = {name: sum(parts.values()) for name, parts in case["energy"].items()}
    total = sum(energy.values()) or 1.0
    names = sorted(energy, key=lambda name: -energy[name])
    rows = []
    for name in names[:_MOST]:
        force = case["end_forces"][name]["to"][0]
        parts = case["energy"][name]
        rows.append(
            (
                name,
                f"{number(force, 4)}{SPACE}N",
                *(percent(parts[key] / total) for key in _KINDS),
                percent(energy[name] / total),
            )
        )
    title = "Strain energy by member" + _cut(len(names), "members that store most")
    head = ("Member", "Tension", *_KINDS, "Total")
    return f"{title}\n{table(head, rows, right=range(1, 7))}"


def _plain(rows: Mapping[str, list[float]], beside: F64 | None = None) -> dict[str, F64]:
    """Rows of six, what is nothing but rounding taken as 0.

    beside : (2,) greatest movement or force, rotation or moment in the case, where the rows
        alone do not show how great they are.
    """
    values = np.array(list(rows.values())).reshape(len(rows), 2, 3)
    greatest = np.abs(values).max(axis=(0, 2), initial=0.0)
    if beside is not None:
        greatest = np.maximum(greatest, beside)
    clean = np.where(np.abs(values) < NOISE * greatest[:, None], 0.0, values)
    return dict(zip(rows, clean.reshape(len(rows), 6), strict=True))


def _forces(case: Mapping[str, Any]) -> F64:
    """(2,) greatest force [N] and moment [N·m] at any member end."""
    ends = np.array([row for both in case["end_forces"].values() for row in both.values()])
    greatest: F64 = np.abs(ends).reshape(-1, 2, 3).max(axis=(0, 2), initial=0.0)
    return greatest


def _cut(count: int, what: str) -> str:
    return f" (the {_MOST} of {count:,} {what})" if count > _MOST else ""
