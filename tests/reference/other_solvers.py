"""The same frame solved by general-purpose libraries: OpenSeesPy and PyNite."""

from __future__ import annotations

from types import ModuleType

import numpy as np

from model.frame.batch import PINNED
from model.solver.beam import member_axes
from model.solver.structure import Frame

E, G = 205e9, 205e9 / 2.6
"""Any moduli do for statics: the libraries get area = EA / E and so on."""


def build_in_opensees(ops: ModuleType, frame: Frame) -> None:
    """Nodes, supports, masses and members; Timoshenko members where shear deforms."""
    ops.wipe()
    ops.model("basic", "-ndm", 3, "-ndf", 6)
    for j, place in enumerate(frame.xyz):
        ops.node(j, *place.tolist())
        ops.fix(j, *frame.held[j].astype(int).tolist())
        if frame.lumps[j]:
            ops.mass(j, *[float(frame.lumps[j])] * 3, 0.0, 0.0, 0.0)
    for m, (i, j) in enumerate(frame.members.tolist()):
        ops.geomTransf("Linear", m, *frame.up[m].tolist())
        ea, eiy, eiz, gj, slide_y, slide_z = frame.rigidity[m].tolist()
        mass = ("-mass", float(frame.line_mass[m]), "-cMass")
        if slide_y:
            shear = 1 / (G * slide_y), 1 / (G * slide_z)
            ops.element("ElasticTimoshenkoBeam", m, i, j, E, G, ea / E, gj / G, eiy / E, eiz / E,
                        *shear, m, *mass)  # fmt: skip
        else:
            ops.element("elasticBeamColumn", m, i, j, ea / E, E, G, gj / G, eiy / E, eiz / E,
                        m, *mass)  # fmt: skip


def solve_with_opensees(ops: ModuleType, frame: Frame) -> tuple[np.ndarray, np.ndarray]:
    """Displacements (cases, joints, 6) and local end forces (cases, members, 2, 6)."""
    displacement, force = [], []
    for load in frame.loads:
        build_in_opensees(ops, frame)
        ops.timeSeries("Linear", 1)
        ops.pattern("Plain", 1, 1)
        for j in range(len(frame.joints)):
            ops.load(j, *load[j].tolist())
        ops.system("FullGeneral")
        ops.numberer("Plain")
        ops.constraints("Plain")
        ops.integrator("LoadControl", 1.0)
        ops.algorithm("Linear")
        ops.analysis("Static")
        assert ops.analyze(1) == 0
        displacement.append([ops.nodeDisp(j) for j in range(len(frame.joints))])
        force.append([ops.eleResponse(m, "localForce") for m in range(len(frame.members))])
    return np.array(displacement), np.array(force).reshape(len(frame.loads), -1, 2, 6)


def frequencies_with_opensees(ops: ModuleType, frame: Frame, count: int) -> np.ndarray:
    """(count,) lowest frequencies [Hz], consistent mass."""
    build_in_opensees(ops, frame)
    return np.sqrt(ops.eigen("-fullGenLapack", count)) / (2 * np.pi)


def solve_with_pynite(pynite: ModuleType, frame: Frame) -> tuple[np.ndarray, np.ndarray]:
    """Displacements (cases, joints, 6) and local end forces (cases, members, 2, 6).

    The library's local axes are ours after a turn about the member, which is given to it.
    """
    model = pynite.FEModel3D()
    model.add_material("m", E, G, 0.3, 7850.0)
    for name, place, held in zip(frame.joints, frame.xyz, frame.held, strict=True):
        model.add_node(name, *place.tolist())
        model.def_support(name, *held.tolist())
    turns = []
    for m, name in enumerate(frame.member_names):
        ea, eiy, eiz, gj, *_ = frame.rigidity[m].tolist()
        i, j = (frame.joints[k] for k in frame.members[m])
        model.add_section(name, ea / E, eiy / E, eiz / E, gj / G)
        model.add_member(name, i, j, "m", name)
        turns.append(_turn(frame, m, model.members[name].T()[:3, :3]))
        model.members[name].rotation = float(np.degrees(turns[-1]))
        iy, jy, iz, jz = (bool(v) for v in frame.ends[m, 2:] >= PINNED)
        model.def_releases(name, Ryi=iy, Rzi=iz, Ryj=jy, Rzj=jz)
    for case, load in zip(frame.cases, frame.loads, strict=True):
        for j, name in enumerate(frame.joints):
            for direction, value in zip(("FX", "FY", "FZ", "MX", "MY", "MZ"), load[j], strict=True):
                model.add_node_load(name, direction, float(value), case)
        model.add_load_combo(case, {case: 1.0})
    model.analyze_linear(check_stability=False)
    displacement = [
        [[getattr(model.nodes[n], d)[c] for d in ("DX", "DY", "DZ", "RX", "RY", "RZ")]
         for n in frame.joints]
        for c in frame.cases
    ]  # fmt: skip
    force = [
        [np.ravel(model.members[name].f(c)).reshape(2, 6) for name in frame.member_names]
        for c in frame.cases
    ]
    return np.array(displacement), np.array(force)


def _turn(frame: Frame, m: int, theirs: np.ndarray) -> float:
    """Angle about local x from the library's axes (rows x, y, z) to ours [rad]."""
    i, j = frame.members[m]
    ours = member_axes(frame.xyz[i], frame.xyz[j], frame.up[m])
    return float(np.arctan2(ours[1] @ theirs[2], ours[1] @ theirs[1]))


def worst_difference(got: np.ndarray, expected: np.ndarray) -> float:
    """Largest difference over the largest value, lengths and angles (or forces and moments) apart.

    Arrays (cases, ..., 6); each case has its own largest value.
    """
    worst = 0.0
    for a, b in zip(got, expected, strict=True):
        for part in (slice(0, 3), slice(3, 6)):
            largest = np.abs(b[..., part]).max()
            worst = max(worst, float(np.abs(a[..., part] - b[..., part]).max() / largest))
    return worst
