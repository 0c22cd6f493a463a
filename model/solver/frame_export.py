"""Write a frame of a batch as a frame file, with its tubes, supports and load cases."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from model.frame.batch import Batch
from model.frame.layout import Tube
from model.frame.skeleton import F64
from model.solver.cases import BENDING, TWIST, gauge, twist_and_bending
from model.solver.structure import DIRECTIONS, RELEASED, BoolArray


def to_json(
    batch: Batch,
    tubes: Mapping[str, Tube],
    row: int = 0,
    held: BoolArray | None = None,
    cases: Mapping[str, F64] | None = None,
) -> dict[str, Any]:
    """One frame of a batch in the form of the frame file (plain data, ready for JSON).

    tubes : tube by group, of this very frame.
    held : (joints, 6) bool; without it, the six-point support that carries nothing.
    cases : (joints, 6) forces [N], [N·m] by name; without them, the unit twist couple [1 N·m]
        and the unit force at mid-wheelbase [1 N].

    Members that are left out, and joints that no member meets, are not written.
    """
    skeleton = batch.skeleton
    one = batch.frame(row)
    here = np.flatnonzero(one.present[0])
    used = np.unique(skeleton.members[here])
    held = default_supports(one) if held is None else held
    cases = default_cases(one) if cases is None else cases
    groups = [skeleton.groups[g] for g in np.unique(skeleton.group[here])]
    return {
        "nodes": {skeleton.joints[j]: _floats(one.xyz[0, j]) for j in used},
        "materials": {tubes[g].material.name: _material(tubes[g]) for g in groups},
        "sections": {g: {"shape": tubes[g].shape, **_sizes(tubes[g])} for g in groups},
        "members": [_member(one, tubes, int(m)) for m in here],
        "supports": {
            skeleton.joints[j]: [DIRECTIONS[d] for d in np.flatnonzero(held[j])]
            for j in used
            if held[j].any()
        },
        "masses": {},
        "cases": {
            name: {"node_loads": {skeleton.joints[j]: _floats(load[j])
                                  for j in used if load[j].any()}}
            for name, load in cases.items()
        },
    }  # fmt: skip


def default_supports(batch: Batch) -> BoolArray:
    """(joints, 6) the statically determinate support on three mounts."""
    held = np.zeros((len(batch.skeleton.joints), 6), dtype=bool)
    joint, direction = gauge(batch.skeleton).T
    held[joint, direction] = True
    return held


def default_cases(batch: Batch) -> dict[str, F64]:
    """(joints, 6) unit twist couple and unit force at mid-wheelbase, of the first frame."""
    loads = twist_and_bending(batch)
    cases = {}
    for name, case in (("twist", TWIST), ("bending", BENDING)):
        force = np.zeros((len(batch.skeleton.joints), 6))
        force[loads.joint, loads.direction] = loads.value[0, case]
        cases[name] = force
    return cases


def _member(batch: Batch, tubes: Mapping[str, Tube], m: int) -> dict[str, Any]:
    skeleton = batch.skeleton
    start, end = skeleton.members[m]
    group = skeleton.groups[skeleton.group[m]]
    ends = batch.ends[0, skeleton.group[m]]
    return {
        "name": skeleton.member_names[m],
        "from": skeleton.joints[start],
        "to": skeleton.joints[end],
        "section": group,
        "material": tubes[group].material.name,
        "group": group,
        "up": _floats(skeleton.up[m]),
        "ends": [_end(ends, k) for k in (0, 1)],
    }


def _end(ends: F64, k: int) -> Any:
    """One end in the words of the file; what both ends share is halved between them."""
    flexibility = {"x": ends[0] / 2, "rx": ends[1] / 2, "ry": ends[2 + k], "rz": ends[4 + k]}
    if not any(flexibility.values()):
        return "rigid"
    bending = flexibility["ry"]
    only_bending = flexibility["x"] == flexibility["rx"] == 0 and bending == flexibility["rz"]
    if only_bending and bending < RELEASED:
        return float(1 / bending)
    return {
        key: "pinned" if value >= RELEASED / 2 else float(1 / value)
        for key, value in flexibility.items()
        if value > 0
    }


def _material(tube: Tube) -> dict[str, float]:
    material = tube.material
    return {
        "E": float(material.E),
        "G": float(material.G),
        "density": float(material.density),
        "yield": float(material.yield_strength),
    }


def _sizes(tube: Tube) -> dict[str, float]:
    return {name: float(size) for name, size in tube.sizes.items()}


def _floats(values: F64) -> list[float]:
    return [float(v) for v in values]
