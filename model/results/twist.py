"""Twist and bending stiffness, mass and axial share of every frame; where one frame twists."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from model.errors import LooseFrame
from model.frame.batch import Batch
from model.frame.skeleton import F64
from model.solver.cases import BENDING, TWIST, gauge, twist_and_bending
from model.solver.solve import Solution, solve

PER_DEGREE = np.pi / 180
"""One N·m/rad in N·m/deg."""

DIRECTIONS = ("x", "y", "z", "turning about x", "turning about y", "turning about z")


@dataclass(frozen=True, eq=False)
class Answers:
    """Results of a batch, one entry a frame; NaN where the frame is loose.

    mass : [kg]; stock : length of tube between joint centres [m].
    twist : twist stiffness [N·m/deg]; bend : bending stiffness [N/mm].
    axial_share : part of the strain energy under twist that is tension and compression.
    energy : (n, groups, 5) strain energy under a unit couple [J] by group and kind: axial,
        bending, torsion, shear, joints.
    status : (n,) int32, 0 solved, otherwise 1 + 6 x joint + direction of the loose direction.
    """

    mass: F64
    stock: F64
    twist: F64
    bend: F64
    axial_share: F64
    energy: F64
    status: NDArray[np.int32]

    @property
    def twist_per_kg(self) -> F64:
        """Twist stiffness for each kilogram of frame [N·m/deg per kg]."""
        ratio: F64 = self.twist / self.mass
        return ratio


def answers(batch: Batch, threads: int | None = None) -> Answers:
    """Solve every frame of a batch under twist and bending."""
    solution = solve(
        batch, twist_and_bending(batch), gauge(batch.skeleton), energy_case=TWIST, threads=threads
    )
    return answers_of(batch, solution)


def answers_of(batch: Batch, solution: Solution) -> Answers:
    """Read the result columns off a solution that holds the twist energies."""
    energy = solution.energy
    assert energy is not None
    length = np.where(batch.present, batch.lengths(), 0.0)
    line_mass = batch.line_mass[:, batch.skeleton.group]
    loose = solution.status != 0
    with np.errstate(divide="ignore", invalid="ignore"):
        twist = np.where(loose, np.nan, PER_DEGREE / solution.compliance[:, TWIST])
        bend = np.where(loose, np.nan, 1e-3 / solution.compliance[:, BENDING])
        by_kind = energy.sum(axis=1)
        axial = np.where(loose, np.nan, by_kind[:, 0] / by_kind.sum(axis=1))
    return Answers(
        mass=(length * line_mass).sum(axis=1),
        stock=length.sum(axis=1),
        twist=twist,
        bend=bend,
        axial_share=axial,
        energy=energy,
        status=solution.status,
    )


def loose(batch: Batch, status: int) -> LooseFrame:
    """The failure that a status other than 0 stands for, in words."""
    joint, direction = divmod(int(status) - 1, 6)
    name = batch.skeleton.joints[joint]
    if direction < 3:
        remedy = "brace a face that meets there, or weld the member ends that are pinned"
    else:
        remedy = "weld a member end that is pinned there"
    return LooseFrame(name, DIRECTIONS[direction], remedy)


@dataclass(frozen=True, eq=False)
class Profile:
    """Where a frame twists along its length.

    x : (rings,) position of each ring [m].
    angle : (rings,) rotation of each ring about x under a couple of 1 N·m [rad].
    bay_stiffness : (rings - 1,) couple over the difference of angle of neighbouring rings
        [N·m/deg]; infinite outside the axles, where nothing twists.
    names : name of each ring.
    """

    x: F64
    angle: F64
    bay_stiffness: F64
    names: tuple[str, ...]


def profile(batch: Batch, displacement: F64) -> Profile:
    """Rotation of every ring under the unit twist couple, for the first frame of a batch.

    displacement : (joints, 6) under the twist case [m], [rad]. A ring's rotation is the best fit
        of a rigid rotation about its centroid: sum(y w - z v) / sum(y² + z²) over its joints.
    """
    skeleton = batch.skeleton
    xyz = batch.xyz[0]
    held = np.zeros(len(skeleton.joints), dtype=bool)
    held[np.unique(skeleton.members[batch.present[0]])] = True
    angle, x = [], []
    for ring in skeleton.rings:
        joints = ring[held[ring]]
        y = xyz[joints, 1] - xyz[joints, 1].mean()
        z = xyz[joints, 2] - xyz[joints, 2].mean()
        v, w = displacement[joints, 1], displacement[joints, 2]
        angle.append(float((y * w - z * v).sum() / (y * y + z * z).sum()))
        x.append(float(xyz[joints, 0].mean()))
    difference = np.abs(np.diff(angle))
    still = difference < 1e-9 * max(float(np.ptp(angle)), 1e-300)
    with np.errstate(divide="ignore"):
        bays = np.where(still, np.inf, PER_DEGREE / difference)
    return Profile(np.array(x), np.array(angle), bays, skeleton.ring_names)
