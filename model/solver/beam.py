"""One straight member: from its end positions and rigidities to stiffness, forces, energy, mass.

A member deforms in six natural ways only; everything else is rigid motion. In local axes
(x from one end to the other, the x-z plane contains ``up``) they are

====  ===========================================  =======================
 0    stretch                                      conjugate axial force N
 1    twist                                        conjugate torque T
 2,3  rotation of the from / to end about y,        conjugate end moments My
      measured against the chord (bends Iy)
 4,5  the same about z (bends Iz)                   conjugate end moments Mz
====  ===========================================  =======================

The stiffness in vehicle axes is B' D B with B the natural modes (6, 12) and D the natural
stiffness. Shear deformation and flexible ends only add to the flexibilities that D inverts, so
they cost nothing and need no extra degrees of freedom.

Every function takes leading axes ``(...)`` for any number of members and frames, and works in
complex arithmetic as well (no absolute values, no conjugates), so derivatives can be checked
with a complex step.

Sources: J. S. Przemieniecki, Theory of Matrix Structural Analysis, 1968 (Timoshenko member);
the arrangement with natural modes and end flexibilities is our own derivation.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from model.errors import InputError

Array = NDArray[Any]

PARALLEL = 1e-6
"""Sine of the smallest angle between a member and its ``up`` vector."""

KINDS = ("axial", "bending", "torsion", "shear", "joints")
"""Order of the kinds of strain energy in ``member_energy``."""


def member_axes(xi: Array, xj: Array, up: Array) -> Array:
    """Local axes of members.

    Parameters
    ----------
    xi, xj : (..., 3)
        Positions of the from and to end [m].
    up : (..., 3)
        A vector in the local x-z plane, on the side of positive z; any length but 0.

    Returns
    -------
    (..., 3, 3)
        Rows x, y, z: x from ``xi`` to ``xj``, y = up × x normalised, z = x × y.

    Raises
    ------
    InputError
        A member without length, or with ``up`` along it; names the first such entry.
    """
    along = xj - xi
    up = up + np.zeros_like(along)
    length = _length(along)
    _refuse(~(length.real > 0), "length", along, "give the two ends different positions")
    x = along / length[..., None]
    y = np.cross(up, x)
    sine = _length(y)
    flat = ~(sine.real > PARALLEL * _length(up).real)
    _refuse(flat, "up", up, "give a vector that does not lie along the member")
    y = y / sine[..., None]
    return np.stack([x, y, np.cross(x, y)], axis=-2)


def natural_stiffness(length: Array, rigidity: Array, ends: Array) -> Array:
    """Stiffness of members against their natural deformations.

    Parameters
    ----------
    length : (...)
        Length between joint centres [m].
    rigidity : (..., 6)
        EA [N], E·Iy, E·Iz, G·J [N·m²], 1/(G·Asy), 1/(G·Asz) [1/N].
    ends : (..., 6)
        End flexibilities: axial (both ends together) [m/N]; torsion (both together), bending
        with Iy at from, at to, with Iz at from, at to [rad/(N·m)]. 0 is rigid, 1e30 is free.

    Returns
    -------
    (..., 8)
        Axial [N/m], torsion, k11y, k12y, k22y, k11z, k12z, k22z [N·m/rad].

    Notes
    -----
    Bending in one plane, with a = L/3EI + 1/(G As L) and b = -L/6EI + 1/(G As L), has the
    flexibility [[a + e1, b], [b, a + e2]]. Its determinant is summed from positive parts
    (a² - b² multiplied out), so neither short stocky members nor free ends lose digits.
    """
    ea, eiy, eiz, gj, shear_y, shear_z = _last(rigidity)
    axial, torsion, y1, y2, z1, z2 = _last(ends)
    parts = [1 / (length / ea + axial), 1 / (length / gj + torsion)]
    for ei, shear, e1, e2 in ((eiy, shear_z, y1, y2), (eiz, shear_y, z1, z2)):
        bend, slide = length / (6 * ei), shear / length
        a, b = 2 * bend + slide, slide - bend
        q = 3 * bend * (bend + 2 * slide) + a * (e1 + e2) + e1 * e2
        parts += [(a + e2) / q, -b / q, (a + e1) / q]
    return np.stack(np.broadcast_arrays(*parts), axis=-1)


def natural_modes(axes: Array, length: Array) -> Array:
    """(..., 6, 12) natural deformations from end displacements in vehicle axes.

    axes : (..., 3, 3) local axes; length : (...) [m]. The twelve columns are ux uy uz rx ry rz
    of the from end, then of the to end.
    """
    x, y, z = (axes[..., k, :] for k in range(3))
    per_y, per_z = y / length[..., None], z / length[..., None]
    none = np.zeros_like(per_y)
    rows = [
        [-x, none, x, none],
        [none, -x, none, x],
        [-per_z, y, per_z, none],
        [-per_z, none, per_z, y],
        [per_y, z, -per_y, none],
        [per_y, none, -per_y, z],
    ]
    return np.stack([np.concatenate(row, axis=-1) for row in rows], axis=-2)


def member_stiffness(xi: Array, xj: Array, up: Array, rigidity: Array, ends: Array) -> Array:
    """(..., 12, 12) stiffness in vehicle axes [N/m, N, N·m]; arguments as above."""
    modes, stiffness = _modes_and_stiffness(xi, xj, up, rigidity, ends)
    result: Array = np.einsum("...ap,...ab,...bq->...pq", modes, stiffness, modes, optimize=True)
    return result


def natural_forces(
    xi: Array, xj: Array, up: Array, rigidity: Array, ends: Array, ui: Array, uj: Array
) -> Array:
    """(..., 6) N, T, My at from, My at to, Mz at from, Mz at to.

    ui, uj : (..., 6) displacements of the two ends in vehicle axes [m], [rad]. Tension is
    positive; the moments act on the member, positive about the local axes.
    """
    modes, stiffness = _modes_and_stiffness(xi, xj, up, rigidity, ends)
    displacement = np.concatenate(np.broadcast_arrays(ui, uj), axis=-1)
    result: Array = np.einsum(
        "...ab,...bp,...p->...a", stiffness, modes, displacement, optimize=True
    )
    return result


def member_end_forces(
    xi: Array, xj: Array, up: Array, rigidity: Array, ends: Array, ui: Array, uj: Array
) -> Array:
    """(..., 2, 6) forces that act on the member at from and to, in local axes.

    Each row is N, Vy, Vz [N], T, My, Mz [N·m], positive along the local axes; so a member in
    tension has a negative N at from and a positive one at to.
    """
    forces = natural_forces(xi, xj, up, rigidity, ends, ui, uj)
    return end_forces(_length(xj - xi), forces)


def end_forces(length: Array, forces: Array) -> Array:
    """(..., 2, 6) the same from natural forces (..., 6)."""
    n, t, y1, y2, z1, z2 = _last(forces)
    vy, vz = (z1 + z2) / length, -(y1 + y2) / length
    start = np.stack([-n, vy, vz, -t, y1, z1], axis=-1)
    end = np.stack([n, -vy, -vz, t, y2, z2], axis=-1)
    return np.stack([start, end], axis=-2)


def member_energy(
    xi: Array, xj: Array, up: Array, rigidity: Array, ends: Array, ui: Array, uj: Array
) -> Array:
    """(..., 5) strain energy [J]: axial, bending, torsion, shear, joints (flexible ends).

    The moment varies linearly from -m1 to m2, so each plane stores L/6EI (m1² - m1 m2 + m2²)
    in bending and (m1 + m2)²/(2 G As L) in shear.
    """
    forces = natural_forces(xi, xj, up, rigidity, ends, ui, uj)
    return energies(_length(xj - xi), rigidity, ends, forces)


def energies(length: Array, rigidity: Array, ends: Array, forces: Array) -> Array:
    """(..., 5) the same from natural forces (..., 6)."""
    ea, eiy, eiz, gj, shear_y, shear_z = _last(rigidity)
    n, t, y1, y2, z1, z2 = _last(forces)
    axial = n * n * length / (2 * ea)
    torsion = t * t * length / (2 * gj)
    bending = length / 6 * (
        (y1 * y1 - y1 * y2 + y2 * y2) / eiy + (z1 * z1 - z1 * z2 + z2 * z2) / eiz
    )  # fmt: skip
    shear = ((y1 + y2) ** 2 * shear_z + (z1 + z2) ** 2 * shear_y) / (2 * length)
    joints = np.einsum("...a,...a,...a->...", ends, forces, forces) / 2
    return np.stack(np.broadcast_arrays(axial, bending, torsion, shear, joints), axis=-1)


def consistent_mass(
    xi: Array,
    xj: Array,
    up: Array,
    rigidity: Array,
    ends: Array,
    line_mass: Array,
    rotary: Array | bool = True,
) -> Array:
    """Consistent mass matrix of members in vehicle axes.

    Parameters
    ----------
    line_mass : (...)
        Mass per length [kg/m]; the second moments of mass follow from it, EIy/EA and EIz/EA,
        as they do for any one material.
    rotary : (...) bool
        Whether cross-sections that tilt in bending have inertia. Turning about the member's own
        axis always has.

    Returns
    -------
    (..., 12, 12) [kg, kg·m, kg·m²]

    Notes
    -----
    The displacements between the ends are those of the loaded member itself, written in terms
    of its end moments: cubic plus shear, with the ends as flexible or free as they are. For
    rigid ends this is the matrix of Friedman & Kosmatka (Computers & Structures 47, 1993);
    without shear and rotary inertia it is the classical one (Przemieniecki 1968). All products
    have degree 6 or less, so four Gauss points integrate them exactly.
    """
    length = _length(xj - xi)
    axes = member_axes(xi, xj, up)
    modes = natural_modes(axes, length)
    stiffness = natural_matrix(natural_stiffness(length, rigidity, ends))
    forces = np.einsum("...ab,...bp->...ap", stiffness, modes)
    ea, eiy, eiz = (rigidity[..., k] for k in range(3))
    turning = line_mass / ea * np.asarray(rotary)
    points, weights = np.polynomial.legendre.leggauss(4)
    shape = (*np.broadcast_shapes(forces.shape[:-2], np.shape(line_mass)), 12, 12)
    mass: Array = np.zeros(shape, dtype=forces.dtype)
    for xi_g, weight in zip((points + 1) / 2, weights / 2, strict=True):
        fields = _fields(float(xi_g), axes, length, rigidity, forces)
        inertia = np.stack(
            np.broadcast_arrays(
                line_mass,
                line_mass,
                line_mass,
                line_mass / ea * (eiy + eiz),
                turning * eiy,
                turning * eiz,
            ),
            axis=-1,
        )
        factor = weight * length[..., None] * inertia
        mass = mass + np.einsum("...a,...ap,...aq->...pq", factor, fields, fields, optimize=True)
    return mass


def _fields(at: float, axes: Array, length: Array, rigidity: Array, forces: Array) -> Array:
    """(..., 6, 12) ux uy uz and rotations about x y z, in local axes, at a fraction of the length.

    The rigid part follows the chord; the rest is what the natural forces (..., 6, 12) do.
    """
    ea, eiy, eiz, gj, shear_y, shear_z = (v[..., None] for v in _last(rigidity))
    n, t, y1, y2, z1, z2 = (forces[..., k, :] for k in range(6))
    x, y, z = (axes[..., k, :] for k in range(3))
    span = length[..., None]
    none = np.zeros_like(x)
    near, far = 1 - at, at
    sag = (at / 3 - at**2 / 2 + at**3 / 6, -at / 6 + at**3 / 6)
    tilt = (1 / 3 - at + at**2 / 2, -1 / 6 + at**2 / 2)

    def line(axis: Array, i: float, j: float) -> Array:
        return np.concatenate([axis * i, none, axis * j, none], axis=-1)

    def mean_turn() -> Array:
        return np.concatenate([none, x / 2, none, x / 2], axis=-1)

    stretch = n * (at - 0.5) * span / ea
    twist = t * (at - 0.5) * span / gj
    sag_y = span**2 / eiz * (sag[0] * z1 + sag[1] * z2)
    sag_z = span**2 / eiy * (sag[0] * y1 + sag[1] * y2)
    tilt_y = span / eiy * (tilt[0] * y1 + tilt[1] * y2) + shear_z / span * (y1 + y2)
    tilt_z = span / eiz * (tilt[0] * z1 + tilt[1] * z2) + shear_y / span * (z1 + z2)
    rows = [
        line(x, 0.5, 0.5) + stretch,
        line(y, near, far) + sag_y,
        line(z, near, far) - sag_z,
        mean_turn() + twist,
        line(z / span, 1, -1) + tilt_y,
        line(y / span, -1, 1) + tilt_z,
    ]
    return np.stack(rows, axis=-2)


def _modes_and_stiffness(
    xi: Array, xj: Array, up: Array, rigidity: Array, ends: Array
) -> tuple[Array, Array]:
    length = _length(xj - xi)
    modes = natural_modes(member_axes(xi, xj, up), length)
    return modes, natural_matrix(natural_stiffness(length, rigidity, ends))


def natural_matrix(stiffness: Array) -> Array:
    """(..., 6, 6) the eight natural stiffnesses written as a matrix."""
    matrix = np.zeros((*stiffness.shape[:-1], 6, 6), dtype=stiffness.dtype)
    places = ((0, 0), (1, 1), (2, 2), (2, 3), (3, 3), (4, 4), (4, 5), (5, 5))
    for k, (a, b) in enumerate(places):
        matrix[..., a, b] = matrix[..., b, a] = stiffness[..., k]
    return matrix


def lengths(xi: Array, xj: Array) -> Array:
    """(...) distance between the ends [m]."""
    return _length(xj - xi)


def _length(vector: Array) -> Array:
    length: Array = np.sqrt(np.einsum("...k,...k->...", vector, vector))
    return length


def _last(array: Array) -> tuple[Array, ...]:
    return tuple(array[..., k] for k in range(array.shape[-1]))


def _refuse(bad: Array, field: str, given: Array, remedy: str) -> None:
    if bad.any():
        entry = int(np.flatnonzero(bad)[0])
        value = given.reshape(-1, 3)[entry].real.tolist()
        raise InputError(field, f"{value} (entry {entry})", remedy)
