"""The same frames solved one at a time by other means, each driven as well as we can drive it.

Every function takes frame ``k`` of a batch and its two load cases and gives the compliances
(cases,), so that speed is only ever compared between equal answers.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.linalg import solveh_banded
from scipy.sparse import coo_array
from scipy.sparse.csgraph import reverse_cuthill_mckee

from model.frame.batch import Batch
from model.frame.skeleton import F64, I32
from model.solver.beam import member_energy, member_stiffness
from model.solver.cases import Loads

OneFrame = Callable[[int], F64]


@dataclass(frozen=True, eq=False)
class Task:
    """Frames to be solved: what everybody is given."""

    batch: Batch
    loads: Loads
    held: I32

    @property
    def force_dofs(self) -> I32:
        """Row of the stiffness matrix of each load."""
        return 6 * self.loads.joint + self.loads.direction


def _member_matrices(task: Task, k: int) -> F64:
    batch, skeleton = task.batch, task.batch.skeleton
    i, j = skeleton.members.T
    g = skeleton.group
    xyz = batch.xyz[k]
    return member_stiffness(xyz[i], xyz[j], skeleton.up, batch.rigidity[k][g], batch.ends[k][g])


def _energies(task: Task, k: int, u: F64) -> F64:
    batch, skeleton = task.batch, task.batch.skeleton
    i, j = skeleton.members.T
    g = skeleton.group
    xyz, u = batch.xyz[k], u.reshape(-1, 6)
    energy = member_energy(
        xyz[i], xyz[j], skeleton.up, batch.rigidity[k][g], batch.ends[k][g], u[i], u[j]
    )
    total = np.zeros((len(skeleton.groups), 5))
    np.add.at(total, g, energy)
    return total


def _dofs(task: Task, place: I32) -> I32:
    """(members, 12) row of the matrix of every member direction, joints placed as told."""
    members = place[task.batch.skeleton.members]
    dofs: I32 = (6 * members[:, :, None] + np.arange(6)).reshape(-1, 12)
    return dofs


def dense(task: Task) -> OneFrame:
    """numpy's dense solver; members all at once, scattered by one bincount."""
    size = 6 * len(task.batch.skeleton.joints)
    dofs = _dofs(task, np.arange(size // 6, dtype=np.int32))
    where = (dofs[:, :, None] * size + dofs[:, None, :]).ravel()
    out = 6 * task.held[:, 0] + task.held[:, 1]

    def one(k: int) -> F64:
        matrix = np.bincount(where, _member_matrices(task, k).ravel(), size * size)
        matrix = matrix.reshape(size, size)
        matrix[out, out] *= 2
        force = np.zeros((size, 2))
        force[task.force_dofs] = task.loads.value[k].T
        u = np.asarray(np.linalg.solve(matrix, force), dtype=np.float64)
        _energies(task, k, u[:, 0])
        return np.einsum("dc,dc->c", force, u)

    return one


def banded(task: Task) -> OneFrame:
    """LAPACK's banded Cholesky; joints in reverse Cuthill-McKee order."""
    joints = len(task.batch.skeleton.joints)
    i, j = task.batch.skeleton.members.T
    graph = coo_array((np.ones(len(i)), (i, j)), shape=(joints, joints))
    order = reverse_cuthill_mckee((graph + graph.T).tocsr(), symmetric_mode=True)
    place = np.empty(joints, dtype=np.int32)
    place[order] = np.arange(joints, dtype=np.int32)
    dofs, size = _dofs(task, place), 6 * joints
    row = np.repeat(dofs[:, :, None], 12, axis=2).ravel()
    column = np.repeat(dofs[:, None, :], 12, axis=1).ravel()
    lower = row >= column
    band = int((row - column).max()) + 1
    where = ((row - column) * size + column)[lower]
    out = 6 * place[task.held[:, 0]] + task.held[:, 1]
    loaded = 6 * place[task.loads.joint] + task.loads.direction
    back = (6 * place[:, None] + np.arange(6)).ravel()

    def one(k: int) -> F64:
        values = _member_matrices(task, k).ravel()[lower]
        matrix = np.bincount(where, values, band * size).reshape(band, size)
        matrix[0, out] *= 2
        force = np.zeros((size, 2))
        force[loaded] = task.loads.value[k].T
        u = solveh_banded(matrix, force, lower=True, check_finite=False)
        _energies(task, k, u[back, 0])
        return np.einsum("dc,dc->c", force, u)

    return one


def opensees(task: Task, ops: Any, system: str = "UmfPack") -> OneFrame:
    """OpenSeesPy, Timoshenko members: one model, one factorisation, two load patterns.

    Everything that does not change is made ready outside; energies are not asked for.
    """
    skeleton, batch = task.batch.skeleton, task.batch
    modulus = 205e9
    shear_modulus = modulus / 2.6
    ups, which = np.unique(skeleton.up, axis=0, return_inverse=True)
    transformation = which.ravel().tolist()
    fixed: dict[int, list[int]] = {}
    for joint, direction in task.held.tolist():
        fixed.setdefault(joint, [0] * 6)[direction] = 1
    members = skeleton.members.tolist()
    groups = skeleton.group.tolist()
    units = np.eye(6)[task.loads.direction]

    def one(k: int) -> F64:
        ops.wipe()
        ops.model("basic", "-ndm", 3, "-ndf", 6)
        for joint, place in enumerate(batch.xyz[k].tolist()):
            ops.node(joint, *place)
        for joint, directions in fixed.items():
            ops.fix(joint, *directions)
        for tag, up in enumerate(ups.tolist()):
            ops.geomTransf("Linear", tag, *up)
        sections = []
        for ea, eiy, eiz, gj, slide_y, slide_z in batch.rigidity[k].tolist():
            sections.append(
                (
                    *(modulus, shear_modulus, ea / modulus, gj / shear_modulus),
                    *(eiy / modulus, eiz / modulus),
                    *(1 / (shear_modulus * slide_y), 1 / (shear_modulus * slide_z)),
                )
            )
        for m, (i, j) in enumerate(members):
            ops.element("ElasticTimoshenkoBeam", m, i, j, *sections[groups[m]], transformation[m])
        ops.timeSeries("Constant", 1)
        ops.system(system)
        ops.numberer("RCM" if system != "UmfPack" else "Plain")
        ops.constraints("Plain")
        ops.integrator("LoadControl", 0.0)
        ops.algorithm("Linear", "-factorOnce")
        ops.analysis("Static", "-noWarnings")
        answer = np.empty(2)
        for case in range(2):
            value = task.loads.value[k, case]
            ops.pattern("Plain", case + 1, 1)
            for joint, load in zip(task.loads.joint.tolist(), value[:, None] * units, strict=True):
                ops.load(joint, *load.tolist())
            if ops.analyze(1) != 0:
                raise RuntimeError("OpenSees did not solve")
            answer[case] = sum(
                f * ops.nodeDisp(int(j), int(d) + 1)
                for f, j, d in zip(value, task.loads.joint, task.loads.direction, strict=True)
            )
            ops.remove("loadPattern", case + 1)
        return answer

    return one


def pynite(task: Task, library: Any) -> OneFrame:
    """PyNite, sparse solver, both load cases in one analysis; it knows no shear deformation.

    Its local z lies along our ``up`` for members in a level plane; elsewhere the tubes are round.
    """
    skeleton, batch = task.batch.skeleton, task.batch
    modulus = 205e9
    names = ("FX", "FY", "FZ", "MX", "MY", "MZ")
    moves = ("DX", "DY", "DZ", "RX", "RY", "RZ")

    def one(k: int) -> F64:
        model = library.FEModel3D()
        model.add_material("steel", modulus, modulus / 2.6, 0.3, 7850.0)
        for name, place in zip(skeleton.joints, batch.xyz[k].tolist(), strict=True):
            model.add_node(name, *place)
        for joint in np.unique(task.held[:, 0]).tolist():
            directions = [(joint, d) in {tuple(h) for h in task.held.tolist()} for d in range(6)]
            model.def_support(skeleton.joints[joint], *directions)
        for g, (ea, eiy, eiz, gj, _, _) in zip(
            skeleton.groups, batch.rigidity[k].tolist(), strict=True
        ):
            model.add_section(g, ea / modulus, eiy / modulus, eiz / modulus, gj / modulus * 2.6)
        for m, (i, j) in enumerate(skeleton.members.tolist()):
            group = skeleton.groups[skeleton.group[m]]
            ends = skeleton.joints[i], skeleton.joints[j]
            model.add_member(f"m{m}", *ends, "steel", group)
        loads = task.loads
        for case in ("0", "1"):
            for joint, d, value in zip(
                loads.joint, loads.direction, loads.value[k, int(case)], strict=True
            ):
                model.add_node_load(skeleton.joints[joint], names[d], float(value), case)
            model.add_load_combo(case, {case: 1.0})
        model.analyze_linear(check_stability=False, sparse=True)
        return np.array(
            [
                sum(
                    f * getattr(model.nodes[skeleton.joints[j]], moves[d])[case]
                    for f, j, d in zip(
                        loads.value[k, int(case)], loads.joint, loads.direction, strict=True
                    )
                )
                for case in ("0", "1")
            ]
        )

    return one
