"""How fast twist stiffness and mass change with every size and dimension of one frame.

All from the displacements already solved; nothing is differenced. Sizes act through the member
flexibilities alone (Castigliano: complementary energy at fixed member forces). Dimensions move
joints: dC/dp = 2 u'(df/dp) - u'(dK/dp)u with the balanced load f and its displacement u. Joint
positions are linear in each dimension, so their slope is exact; member stiffnesses along that
slope are differentiated by the complex step, which is exact to rounding (Squire & Trapp, SIAM
Review 40, 1998).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from model.frame.batch import Batch
from model.frame.skeleton import F64
from model.frame.variants import position_slopes
from model.results.detail import Detail
from model.results.twist import PER_DEGREE
from model.solver.beam import member_axes, natural_forces, natural_modes, natural_stiffness
from model.solver.cases import twist_force
from model.stock.sections import section_slopes, section_values

_STEP = 1e-30


@dataclass(frozen=True)
class Slope:
    """Change of twist stiffness [N·m/deg] and mass [kg] for each unit of one SI value.

    path : as in ``model.frame.variants``. value : its present value.
    """

    path: str
    value: float
    twist: float
    mass: float

    def elasticity(self, twist: float) -> float:
        """Per cent of twist stiffness for each per cent of this value; ``twist`` as it is."""
        return self.twist * self.value / twist


def slopes(detail: Detail) -> tuple[Slope, ...]:
    """Slopes with respect to every tube size and every layout dimension of a solved frame."""
    return (*_size_slopes(detail), *_dimension_slopes(detail))


def _size_slopes(detail: Detail) -> list[Slope]:
    batch, layout = detail.batch, detail.layout
    skeleton = batch.skeleton
    length = np.where(batch.present[0], batch.lengths()[0], 0.0)
    energy = energy_by_rigidity(batch, detail.displacement)
    found = []
    for g, group in enumerate(skeleton.groups):
        tube = layout.tubes[group]
        mine = skeleton.group == g
        parts = energy[mine].sum(axis=0)
        values = section_values(tube.shape, tube.sizes)
        names = ("A", "Iy", "Iz", "J", "Asy", "Asz")
        own = np.array([float(getattr(values, name)) for name in names])
        for size, slope in section_slopes(tube.shape, tube.sizes).items():
            change = np.array([float(getattr(slope, name)) for name in names])
            compliance = -2.0 * float((parts * change / own).sum())
            found.append(
                Slope(
                    f"tube.{group}.{size}",
                    float(tube.sizes[size]),
                    _stiffness_slope(detail, compliance),
                    float(tube.material.density * change[0] * length[mine].sum()),
                )
            )
    return found


def energy_by_rigidity(batch: Batch, moved: F64) -> F64:
    """(members, 6) strain energy [J] stored in A, Iy, Iz, J, Asy and Asz."""
    skeleton = batch.skeleton
    i, j = skeleton.members.T
    rigidity, ends = batch.rigidity[0, skeleton.group], batch.ends[0, skeleton.group]
    forces = natural_forces(
        batch.xyz[0, i], batch.xyz[0, j], skeleton.up, rigidity, ends, moved[i], moved[j]
    )
    length = batch.lengths()[0]
    n, t, y1, y2, z1, z2 = forces.T
    ea, eiy, eiz, gj, shear_y, shear_z = rigidity.T
    energy = np.stack(
        [
            n * n * length / (2 * ea),
            length / (6 * eiy) * (y1 * y1 - y1 * y2 + y2 * y2),
            length / (6 * eiz) * (z1 * z1 - z1 * z2 + z2 * z2),
            t * t * length / (2 * gj),
            (z1 + z2) * (z1 + z2) * shear_y / (2 * length),
            (y1 + y2) * (y1 + y2) * shear_z / (2 * length),
        ],
        axis=1,
    )
    result: F64 = np.where(batch.present[0][:, None], energy, 0.0)
    return result


def _dimension_slopes(detail: Detail) -> list[Slope]:
    batch = detail.batch
    skeleton, moved = batch.skeleton, detail.displacement
    i, j = skeleton.members.T
    here = batch.present[0]
    xyz = batch.xyz[0]
    along = batch.xyz[0, j] - batch.xyz[0, i]
    unit = along / np.linalg.norm(along, axis=1)[:, None]
    line_mass = np.where(here, batch.line_mass[0, skeleton.group], 0.0)
    found = []
    for path, (value, move) in position_slopes(detail.layout).items():
        stepped = xyz + 1j * _STEP * move
        held = _twice_energy(batch, stepped, moved).imag[here].sum() / _STEP
        force = twist_force(skeleton, stepped, _stepped_track(batch, path)).imag / _STEP
        compliance = 2.0 * float((force * moved).sum()) - float(held)
        stretch = (unit * (move[j] - move[i])).sum(axis=1)
        found.append(
            Slope(
                path,
                value,
                _stiffness_slope(detail, compliance),
                float((line_mass * stretch).sum()),
            )
        )
    return found


def _twice_energy(batch: Batch, xyz: NDArray[Any], moved: F64) -> NDArray[Any]:
    """(members,) u'ku of every member at (complex) joint positions."""
    skeleton = batch.skeleton
    i, j = skeleton.members.T
    rigidity, ends = batch.rigidity[0, skeleton.group], batch.ends[0, skeleton.group]
    difference = xyz[j] - xyz[i]
    length = np.sqrt((difference * difference).sum(axis=1))
    modes = natural_modes(member_axes(xyz[i], xyz[j], skeleton.up), length)
    strain = np.einsum("map,mp->am", modes, np.concatenate([moved[i], moved[j]], axis=1))
    stretch, twist, y1, y2, z1, z2 = strain
    ea, t, k11y, k12y, k22y, k11z, k12z, k22z = natural_stiffness(length, rigidity, ends).T
    total: NDArray[Any] = (
        ea * stretch * stretch
        + t * twist * twist
        + k11y * y1 * y1 + 2 * k12y * y1 * y2 + k22y * y2 * y2
        + k11z * z1 * z1 + 2 * k12z * z1 * z2 + k22z * z2 * z2
    )  # fmt: skip
    return total


def _stepped_track(batch: Batch, path: str) -> NDArray[np.complex128] | None:
    if batch.track is None:
        return None
    step = np.array([path == "track_front", path == "track_rear"]) * 1j * _STEP
    stepped: NDArray[np.complex128] = batch.track[0] + step
    return stepped


def _stiffness_slope(detail: Detail, compliance: float) -> float:
    """Slope of K = 1/C [N·m/deg] from the slope of C [rad/(N·m)]."""
    return -compliance * detail.twist * detail.twist / PER_DEGREE
