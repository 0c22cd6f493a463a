"""Results put down twice: records for machines with units in the keys, text for a terminal."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from explorer.detail_drawing import KINDS
from explorer.numbers import SPACE, number, percent
from explorer.terminal import pairs, table
from explorer.units import METRIC
from model.frame.skeleton import F64
from model.results.detail import Detail, bay_words, own_tubes

_KIND_KEYS = ("axial", "bending", "torsion", "shear", "joints")
NOISE = 1e-10
"""Part of the greatest value below which a value is shown as 0."""
_MOST = 12
"""Rows of a long table that a terminal shows; ``--json`` gives them all."""


def frame_record(detail: Detail) -> dict[str, Any]:
    """One frame: its results, and mass and energy share of each group."""
    by_kind = detail.energy.sum(axis=0)
    x, y, z = (v * 1e3 for v in detail.bill.centre)
    return {
        "mass_kg": detail.mass,
        "twist_Nm_per_deg": detail.twist,
        "bend_N_per_mm": detail.bend,
        "twist_Nm_per_deg_per_kg": detail.twist / detail.mass,
        "axial_share": detail.axial_share,
        "stock_m": float(detail.answers.stock[0]),
        "joints": len(detail.bill.joints),
        "members": int(detail.batch.present[0].sum()),
        "centre_of_gravity_mm": {"x": x, "y": y, "z": z},
        "energy_share": dict(zip(_KIND_KEYS, by_kind.tolist(), strict=True)),
        "groups": _groups(detail),
    }


def frame_text(detail: Detail) -> str:
    """One frame for a person: results, then the groups, most energy first."""
    record = frame_record(detail)
    x, _, z = (METRIC.write(v * 1e3, "length") for v in detail.bill.centre)
    results = pairs(
        [
            ("Mass", METRIC.write(detail.mass, "mass")),
            ("Twist stiffness", METRIC.write(detail.twist, "twist")),
            ("Bending stiffness", METRIC.write(detail.bend, "bend")),
            (
                "Twist stiffness per mass",
                METRIC.write(detail.twist / detail.mass, "twist per mass"),
            ),
            ("Axial share", percent(detail.axial_share)),
            ("Tube length", METRIC.write(record["stock_m"], "stock")),
            ("Joints, members", f"{record['joints']}, {record['members']}"),
            ("Centre of gravity", f"{x} behind the front axle, {z} above the ground"),
        ]
    )
    groups = sorted(record["groups"], key=lambda g: -g["energy_share"]["total"])
    rows = [
        (
            group["group"],
            f"{group['shape']} {group['size_mm']}",
            group["material"],
            METRIC.write(group["mass_kg"], "mass"),
            *(percent(group["energy_share"][key]) for key in ("total", *_KIND_KEYS[:3])),
        )
        for group in groups
    ]
    head = ("Group", "Tube [mm]", "Material", "Mass", "Energy", *_KIND_KEYS[:3])
    return f"{results}\n\n{table(head, rows, right=range(3, 7))}\n\n{bay_words(detail)}"


def _groups(detail: Detail) -> list[dict[str, Any]]:
    skeleton = detail.batch.skeleton
    tubes = own_tubes(detail.layout, detail.batch)
    energy = np.zeros((len(skeleton.groups), len(KINDS)))
    np.add.at(energy, skeleton.group, detail.energy)
    return [
        {
            "group": name,
            "shape": tubes[name].shape,
            "size_mm": tubes[name].label,
            "stock": tubes[name].stock or None,
            "material": tubes[name].material.name,
            "mass_kg": detail.bill.by_group[name],
            "energy_share": {"total": float(energy[g].sum())}
            | dict(zip(_KIND_KEYS, energy[g].tolist(), strict=True)),
        }
        for g, name in enumerate(skeleton.groups)
        if name in detail.bill.by_group
    ]


def solved_text(answer: Mapping[str, Any]) -> str:
    """A solved frame file for a person: for each case what moves, what holds, what carries."""
    parts = [pairs([("Mass", METRIC.write(answer["mass_kg"], "mass"))])]
    for name, case in answer["cases"].items():
        parts += [f"Case {name}", _moved(case), _held(case), _carried(case)]
    if "frequencies_Hz" in answer:
        rows = [
            (str(k), METRIC.write(f, "frequency"))
            for k, f in enumerate(answer["frequencies_Hz"], 1)
        ]
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
                *(percent(parts[key] / total) for key in _KIND_KEYS[:4]),
                percent(energy[name] / total),
            )
        )
    title = "Strain energy by member" + _cut(len(names), "members that store most")
    head = ("Member", "Tension", *_KIND_KEYS[:4], "Total")
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
