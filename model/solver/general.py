"""Solve one frame under its load cases: displacements, reactions, end forces, energy.

The frame may have any joints, members and supports, too many supports included. The stiffness
matrix is scaled joint by joint, factored once, and each answer is refined against a residual
summed member by member in extended precision, so slender frames and stiff joints keep their
digits. A mechanism is found before anything is solved; see ``model.solver.loose``.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
import scipy.sparse as sp
from scipy.sparse.linalg import splu

from model.errors import InputError
from model.frame.skeleton import F64
from model.solver import beam, loose
from model.solver.structure import (
    RELEASED,
    BoolArray,
    Frame,
    Geometry,
    Idle,
    assemble,
    idle_rotations,
    member_matrices,
)

EXTENDED: type = np.longdouble
"""Eighty bits on most processors; where it is no more than a double, some digits fewer."""

REFINEMENTS = 12
SETTLED, GOOD = 1e-15, 1e-8
"""Refinement stops when a correction is below this part of the answer, or shrinks no more; an
answer whose last correction is above the second is no answer."""

SHIFT = 1e-15
"""Added to the diagonal of the scaled matrix; a mechanism can then be factored, and named."""

Extended = beam.Array


@dataclass(frozen=True, eq=False)
class Answer:
    """A solved frame, load case by load case.

    displacement : (C, J, 6) [m], [rad]; reaction : (C, J, 6) [N], [N·m], 0 where nothing is held.
    end_force : (C, M, 2, 6), see ``beam.member_end_forces``.
    energy : (C, M, 5) [J], kinds as ``beam.KINDS``.
    residual : (C,) largest unbalanced force over the largest force at any joint.
    """

    frame: Frame
    displacement: F64
    reaction: F64
    end_force: F64
    energy: F64
    residual: F64


@dataclass(frozen=True, eq=False)
class Factored:
    """A frame whose free directions are factored, idle motions grounded.

    free : (6J,) bool; scale : (free,) one over the root of a stiffness; solve : scaled right
    side to scaled answer.
    """

    free: BoolArray
    stiffness: sp.csc_matrix
    idle: Idle
    scale: F64
    solve: Callable[[F64], F64]


def solve(frame: Frame) -> Answer:
    """Solve every load case of a frame.

    Raises
    ------
    InputError
        The frame has no support at all.
    LooseFrame
        A part of the frame moves freely; names joint, direction and what would hold it.
    """
    if not frame.held.any():
        raise InputError("supports", "none", "hold at least six directions, three joints are best")
    factored = factor(frame)
    loose.check_idle_loads(frame, factored.idle)
    displacement = np.stack([_refined(frame, factored, load) for load in frame.loads]) \
        if frame.cases else np.zeros((0, len(frame.joints), 6), dtype=EXTENDED)  # fmt: skip
    return _answer(frame, displacement)


def unlike(frame: Frame) -> InputError:
    """The members are too unlike for sixteen digits; names the extremes."""
    rigidity = np.stack([frame.rigidity[:, k] / frame.lengths for k in range(4)], axis=1)
    soft, stiff = (
        frame.member_names[int(at)] for at in (rigidity.min(1).argmin(), rigidity.max(1).argmax())
    )
    return InputError(
        "stiffness of the members",
        f"{rigidity.min():.1e} ({soft}) to {rigidity.max():.1e} ({stiff})",
        "the digits do not suffice; check the units of sections and materials",
    )


def factor(frame: Frame) -> Factored:
    """Factor a supported frame, or say why it cannot carry load."""
    loose.check_pieces(frame)
    matrices = member_matrices(frame)
    stiffness = assemble(frame, matrices)
    idle = idle_rotations(frame, matrices)
    while True:
        factored = _factor(frame, stiffness, idle)
        spins = loose.spins_or_refuse(
            frame, stiffness + idle.grounding(), factored.free, factored.scale, factored.solve
        )
        if spins is None:
            return factored
        idle = idle.with_more(*spins)


def _factor(frame: Frame, stiffness: sp.csc_matrix, idle: Idle) -> Factored:
    free = ~frame.held.ravel()
    grounded = stiffness + idle.grounding()
    scale = 1 / np.sqrt(_largest_of_joint(grounded.diagonal())[free])
    grounded = grounded[free][:, free]
    if not free.any():
        return Factored(free, stiffness, idle, scale, lambda right: right)
    spread = sp.diags(scale)
    unit = (spread @ grounded @ spread + SHIFT * sp.identity(len(scale))).tocsc()
    factor = splu(
        unit,
        permc_spec="MMD_AT_PLUS_A",
        diag_pivot_thresh=0.0,
        options={"SymmetricMode": True},
    )
    return Factored(free, stiffness, idle, scale, factor.solve)


def _largest_of_joint(diagonal: F64) -> F64:
    """(6J,) largest stiffness of each joint against moving, and against turning.

    One scale for all three directions keeps a direction soft that is soft beside the others.
    """
    by_joint = diagonal.reshape(-1, 2, 3).max(axis=2, keepdims=True)
    by_joint = np.where(by_joint > 0, by_joint, 1.0)
    scale: F64 = np.repeat(by_joint, 3, axis=2).ravel()
    return scale


def _refined(frame: Frame, factored: Factored, load: F64) -> Extended:
    """(J, 6) displacement in extended precision."""
    geometry = frame.geometry(EXTENDED)
    free, scale = factored.free, factored.scale
    answer: Extended = np.zeros(load.size, dtype=EXTENDED)
    residual: Extended = load.ravel().astype(EXTENDED)
    change = previous = np.inf
    for _ in range(REFINEMENTS):
        right = scale * residual[free].astype(np.float64)
        correction = scale * factored.solve(right)
        answer[free] += correction
        largest = float(np.abs(answer[free] / scale).max(initial=0.0))
        previous, change = change, float(np.abs(correction / scale).max(initial=0.0))
        if change <= SETTLED * largest or not change < previous / 2:
            break
        residual = load.ravel() - _joint_forces(frame, _forces(frame, geometry, answer)[0])
    if not min(change, previous) <= GOOD * largest:
        raise unlike(frame)
    return answer.reshape(load.shape)


def _forces(frame: Frame, geometry: Geometry, displacement: Extended) -> tuple[Extended, Extended]:
    """(M, 12) forces that the joints exert on the members, vehicle axes; (M, 6) natural ones."""
    xi, xj, up, rigidity, ends = geometry
    ui, uj = (displacement.reshape(-1, 6)[frame.members[:, end]] for end in (0, 1))
    natural = beam.natural_forces(xi, xj, up, rigidity, ends, ui, uj)
    natural = np.where(_released(frame), 0.0, natural)
    modes = beam.natural_modes(beam.member_axes(xi, xj, up), beam.lengths(xi, xj))
    return np.einsum("map,ma->mp", modes, natural), natural


def _released(frame: Frame) -> BoolArray:
    """(M, 6) natural forces that a free end keeps at zero."""
    free: BoolArray = frame.ends >= RELEASED
    return free


def _joint_forces(frame: Frame, forces: Extended) -> Extended:
    """(6J,) sum of the member forces (M, 12) at every joint."""
    total = np.zeros((len(frame.joints), 6), dtype=forces.dtype)
    np.add.at(total, frame.members[:, 0], forces[:, :6])
    np.add.at(total, frame.members[:, 1], forces[:, 6:])
    return total.ravel()


def _answer(frame: Frame, displacement: Extended) -> Answer:
    geometry = frame.geometry(EXTENDED)
    xi, xj, _, rigidity, ends = geometry
    length = beam.lengths(xi, xj)
    members, joints, cases = len(frame.members), len(frame.joints), len(frame.cases)
    reaction = np.zeros((cases, joints, 6))
    end_force = np.zeros((cases, members, 2, 6))
    energy = np.zeros((cases, members, 5))
    residual = np.zeros(cases)
    for c, (u, load) in enumerate(zip(displacement, frame.loads, strict=True)):
        forces, natural = _forces(frame, geometry, u)
        unbalanced = _joint_forces(frame, forces).reshape(joints, 6) - load
        reaction[c] = np.where(frame.held, unbalanced, 0.0)
        largest = max(np.abs(forces).max(initial=0.0), np.abs(load).max(initial=0.0))
        open_force = np.abs(np.where(frame.held, 0.0, unbalanced)).max(initial=0.0)
        residual[c] = open_force / largest if largest > 0 else 0.0
        end_force[c] = beam.end_forces(length, natural)
        energy[c] = beam.energies(length, rigidity, ends, natural)
    return Answer(frame, displacement.astype(np.float64), reaction, end_force, energy, residual)


def result(answer: Answer) -> dict[str, Any]:
    """The answer as plain data, in the words of the frame file.

    Energy lists ``joints`` beside the four kinds where the ends of a member are springs.
    """
    frame = answer.frame
    supported = np.flatnonzero(frame.held.any(axis=1))
    sprung: BoolArray = np.any((frame.ends > 0) & ~_released(frame), axis=1)

    def row(values: F64) -> list[float]:
        return [float(v) + 0.0 for v in values]

    cases = {}
    for c, case in enumerate(frame.cases):
        ends, energy = answer.end_force[c], answer.energy[c]
        cases[case] = {
            "displacements": {
                name: row(answer.displacement[c, j]) for j, name in enumerate(frame.joints)
            },
            "reactions": {frame.joints[j]: row(answer.reaction[c, j]) for j in supported},
            "end_forces": {
                name: {"from": row(ends[m, 0]), "to": row(ends[m, 1])}
                for m, name in enumerate(frame.member_names)
            },
            "energy": {
                name: {
                    kind: float(value)
                    for kind, value in zip(beam.KINDS, energy[m], strict=True)
                    if kind != "joints" or sprung[m]
                }
                for m, name in enumerate(frame.member_names)
            },
        }
    return {"mass_kg": frame.mass, "cases": cases}
