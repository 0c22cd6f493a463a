"""How a member's strain energy changes when its joints are moved and their displacements kept.

For forces f that stay as they are, the compliance C = f'u of a frame changes with a joint
position x by dC/dx = -sum over members of u' (dk/dx) u, k the member's stiffness and u the
displacements of its two ends: one solution gives every slope.
"""

from __future__ import annotations

import numpy as np

from model.solver.beam import Array, member_axes, natural_forces


def energy_slope(
    xi: Array, xj: Array, up: Array, rigidity: Array, ends: Array, ui: Array, uj: Array
) -> Array:
    """Slope of u'ku, twice the strain energy, with the position of the to end.

    Parameters
    ----------
    xi, xj : (..., 3)
        Positions of the from and to end [m].
    up : (..., 3)
        A vector in the local x-z plane; it stays as it is.
    rigidity, ends : (..., 6)
        As in ``beam.natural_stiffness``.
    ui, uj : (..., 6)
        Displacements of the two ends in vehicle axes [m], [rad].

    Returns
    -------
    (..., 3)
        Slope with ``xj`` [J/m]; that with ``xi`` is the opposite.

    Notes
    -----
    With v the natural deformations, D their stiffness and m = D v the natural forces, u'ku is
    v'Dv and its slope 2 m'dv - m' d(1/D) m. Only the length enters the flexibility 1/D. The axes
    turn by dx = (y dy' + z dz')/L, dy' and dz' being the parts of the movement along y and z, and
    roll about x so that y stays at right angles to ``up``. Own derivation.
    """
    axes = member_axes(xi, xj, up)
    along = xj - xi
    length = np.sqrt(np.einsum("...k,...k->...", along, along))
    n, t, y1, y2, z1, z2 = _last(natural_forces(xi, xj, up, rigidity, ends, ui, uj))
    slip_x, slip_y, slip_z = _last(_local(axes, uj[..., :3] - ui[..., :3]) / length[..., None])
    ix, iy, iz = _last(_local(axes, ui[..., 3:]))
    jx, jy, jz = _last(_local(axes, uj[..., 3:]))
    ea, eiy, eiz, gj, shear_y, shear_z = _last(np.asarray(rigidity))

    longer = -(n * n) / ea - t * t / gj
    for m1, m2, ei, shear in ((y1, y2, eiy, shear_z), (z1, z2, eiz, shear_y)):
        longer -= (m1 * m1 - m1 * m2 + m2 * m2) / (3 * ei)
        longer += (m1 + m2) ** 2 * shear / length**2
    longer += 2 * ((z1 + z2) * slip_y - (y1 + y2) * slip_z) / length

    roll = np.einsum("...k,...k->...", up, axes[..., 0, :])
    roll = roll / np.einsum("...k,...k->...", up, axes[..., 2, :])
    rolled = y1 * (iz - slip_y) + y2 * (jz - slip_y) - z1 * (iy + slip_z) - z2 * (jy + slip_z)
    aside = n * slip_y + (t * (jy - iy) - y1 * ix - y2 * jx + roll * rolled) / length
    upward = n * slip_z + (t * (jz - iz) - z1 * ix - z2 * jx) / length
    aside = aside + (z1 + z2) * slip_x / length
    upward = upward - (y1 + y2) * slip_x / length
    slope = np.stack(np.broadcast_arrays(longer, 2 * aside, 2 * upward), axis=-1)
    result: Array = np.einsum("...a,...ak->...k", slope, axes)
    return result


def _local(axes: Array, vector: Array) -> Array:
    result: Array = np.einsum("...ak,...k->...a", axes, vector)
    return result


def _last(array: Array) -> tuple[Array, ...]:
    return tuple(array[..., k] for k in range(array.shape[-1]))
