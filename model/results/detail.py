"""One frame looked at closely: every member's load and energy, the twist profile, the bill."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from model.frame.batch import Batch
from model.frame.bill import Bill, bill
from model.frame.layout import Layout, Tube
from model.frame.skeleton import F64
from model.frame.variants import one
from model.results.twist import PER_DEGREE, Answers, Profile, answers_of, loose, profile
from model.solver.beam import energies, natural_forces
from model.solver.cases import TWIST, gauge, twist_and_bending
from model.solver.solve import solve


@dataclass(frozen=True, eq=False)
class Detail:
    """Everything shown of one frame.

    layout, batch : the frame; ``batch`` holds it alone.
    answers : the result columns, one entry.
    displacement : (joints, 6) under a twist couple of 1 N·m [m], [rad].
    axial : (members,) axial force under that couple, tension positive [N per N·m].
    energy : (members, 5) share of the twist strain energy by kind; all shares sum to 1.
    profile : rotation of every ring. bill : mass, cut list, joints, stock.
    """

    layout: Layout
    batch: Batch
    answers: Answers
    displacement: F64
    axial: F64
    energy: F64
    profile: Profile
    bill: Bill

    @property
    def mass(self) -> float:
        """Mass of the bare frame [kg]."""
        return float(self.answers.mass[0])

    @property
    def twist(self) -> float:
        """Twist stiffness [N·m/deg]."""
        return float(self.answers.twist[0])

    @property
    def bend(self) -> float:
        """Bending stiffness [N/mm]."""
        return float(self.answers.bend[0])

    @property
    def axial_share(self) -> float:
        """Part of the twist strain energy that is tension and compression."""
        return float(self.answers.axial_share[0])

    @property
    def share(self) -> F64:
        """(members,) each member's share of the twist strain energy."""
        total: F64 = self.energy.sum(axis=1)
        return total


def examine(layout: Layout) -> Detail:
    """Build, solve and itemise one layout.

    Raises
    ------
    InputError
        The layout cannot be built.
    LooseFrame
        It can be built but a joint moves freely.
    """
    batch = one(layout)
    solution = solve(
        batch,
        twist_and_bending(batch),
        gauge(batch.skeleton),
        energy_case=TWIST,
        displacements=True,
        threads=1,
    )
    if solution.status[0]:
        raise loose(batch, int(solution.status[0]))
    assert solution.displacement is not None
    moved = solution.displacement[0, TWIST]
    forces, energy = _members(batch, moved)
    return Detail(
        layout,
        batch,
        answers_of(batch, solution),
        moved,
        forces[:, 0],
        energy / energy.sum(),
        profile(batch, moved),
        bill(batch, own_tubes(layout, batch)),
    )


def own_tubes(layout: Layout, batch: Batch) -> Mapping[str, Tube]:
    """Tube of every group that the frame has."""
    return {group: layout.tubes[group] for group in batch.skeleton.groups}


def _members(batch: Batch, moved: F64) -> tuple[F64, F64]:
    """Natural forces (members, 6) and energies (members, 5); zero for absent members."""
    skeleton = batch.skeleton
    i, j = skeleton.members.T
    rigidity, ends = batch.rigidity[0, skeleton.group], batch.ends[0, skeleton.group]
    forces = natural_forces(
        batch.xyz[0, i], batch.xyz[0, j], skeleton.up, rigidity, ends, moved[i], moved[j]
    )
    energy = energies(batch.lengths()[0], rigidity, ends, forces)
    here = batch.present[0][:, None]
    return np.where(here, forces, 0.0), np.where(here, energy, 0.0)


def bay_words(detail: Detail) -> str:
    """Where the frame twists most, in one sentence."""
    found = detail.profile
    front, rear = (float(detail.batch.xyz[0, m[0], 0]) for m in
                   (detail.batch.skeleton.front, detail.batch.skeleton.rear))  # fmt: skip
    between = (found.x[:-1] >= front - 1e-9) & (found.x[1:] <= rear + 1e-9)
    angle = np.abs(np.diff(found.angle)) * between
    if not angle.any():
        return "No bay between the axles twists on its own."
    rate = angle / np.diff(found.x)
    worst = int(np.argmax(rate))
    part = angle[worst] * detail.twist / PER_DEGREE
    return (
        f"It twists most for its length between {found.names[worst]} and "
        f"{found.names[worst + 1]}: {100 * part:.0f} % of the twist over "
        f"{(found.x[worst + 1] - found.x[worst]) * 1e3:.0f} mm."
    )
