"""One frame put down twice: a record for machines with units in the keys, text for a terminal."""

from __future__ import annotations

from typing import Any

import numpy as np

from explorer.detail_drawing import KINDS
from explorer.numbers import percent
from explorer.terminal import pairs, table
from explorer.units import METRIC
from model.results.detail import Detail, bay_words, own_tubes

_KIND_KEYS = ("axial", "bending", "torsion", "shear", "joints")


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
