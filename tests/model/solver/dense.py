"""An independent answer: the whole stiffness matrix, six rows taken out, scipy's dense solver."""

from __future__ import annotations

import numpy as np
from scipy.linalg import cho_factor, cho_solve

from model.frame.batch import Batch
from model.frame.skeleton import F64, I32
from model.solver.beam import member_stiffness
from model.solver.cases import Loads


def stiffness(batch: Batch, frame: int) -> F64:
    """(6 joints, 6 joints) stiffness of one frame, joints in their own order."""
    skeleton = batch.skeleton
    joints = len(skeleton.joints)
    total = np.zeros((6 * joints, 6 * joints))
    for m, (i, j) in enumerate(skeleton.members):
        if not batch.present[frame, m]:
            continue
        g = skeleton.group[m]
        k = member_stiffness(
            batch.xyz[frame, i],
            batch.xyz[frame, j],
            skeleton.up[m],
            batch.rigidity[frame, g],
            batch.ends[frame, g],
        )
        dofs = np.concatenate([6 * i + np.arange(6), 6 * j + np.arange(6)])
        total[np.ix_(dofs, dofs)] += k
    return total


def solve_dense(batch: Batch, loads: Loads, held: I32, frame: int) -> tuple[F64, F64]:
    """Compliance (cases,) and displacement (cases, joints, 6) of one frame.

    The held directions and the joints without members are taken out of the matrix.
    """
    k = stiffness(batch, frame)
    joints = len(k) // 6
    out = {6 * int(j) + int(d) for j, d in held}
    used = np.zeros(joints, dtype=bool)
    used[batch.skeleton.members[batch.present[frame]]] = True
    free = [d for d in range(6 * joints) if d not in out and used[d // 6]]
    cases = loads.value.shape[1]
    force = np.zeros((6 * joints, cases))
    np.add.at(force, 6 * loads.joint + loads.direction, loads.value[frame].T)
    u = np.zeros((6 * joints, cases))
    u[free] = cho_solve(cho_factor(k[np.ix_(free, free)]), force[free])
    return np.einsum("dc,dc->c", force, u), u.T.reshape(cases, joints, 6)
