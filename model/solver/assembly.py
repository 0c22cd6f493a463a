"""One member as vector code: its stiffness into the blocks of its joints, its strain energy.

The same formulas as in ``beam``, written out. A member is seen from its later end (the joint
eliminated later) to its earlier one. Seen from the other end x and y turn round and z stays, and
the two bending moments change places; nothing else does.

Stiffness with x, y, z the local axes, s = k11 + 2 k12 + k22 in each plane, and rows u, r
(displacement, rotation) of the later end i::

    uu = ea xx' + s_z/L² yy' + s_y/L² zz'      ir-ir = t xx' + k11z zz' + k11y yy'
    iu-ir = (k11z + k12z)/L yz' - (k11y + k12y)/L zy'
    iu-jr = (k12z + k22z)/L yz' - (k12y + k22y)/L zy'
    ir-jr = -t xx' + k12z zz' + k12y yy'       jr-jr = t xx' + k22z zz' + k22y yy'

Source: see ``beam``; the arrangement is our own derivation.
"""

from __future__ import annotations

from dataclasses import dataclass

from model.solver.beam import PARALLEL
from model.solver.elimination import SIZE, low
from model.solver.vector import Code, Lanes, Scalars, Strip, vector_code

Vector = tuple[Lanes, Lanes, Lanes]

GIVEN = 12
"""Vectors of a group as packed: EA, EIy, EIz, GJ, 1/GAsy, 1/GAsz, six end flexibilities."""
GROUP = 14
"""Vectors of a group once prepared, see ``prepare_group``."""
TURNED = 1
"""What to add to the place of a group's end flexibilities seen from the to end."""
NEAR = 10
"""Place in a group of the end flexibilities: Iy at from, Iy at to, Iz at from, Iz at to."""
KEPT = 19
"""Vectors kept of a member: x, y, z (9), L, 1/L, ea, t, k11y, k12y, k22y, k11z, k12z, k22z."""
KINDS = 5


@vector_code
def prepare_group(code: Code, group: Strip, given: Strip) -> None:
    """1/EA, 1/6EIy, 1/6EIz, 1/GJ, 1/GAsy, 1/GAsz, axial, torsion, -, -, four bending ends."""
    group[0] = 1.0 / given[0]
    group[1] = 1.0 / (6.0 * given[1])
    group[2] = 1.0 / (6.0 * given[2])
    group[3] = 1.0 / given[3]
    for k in range(4, 8):
        group[k] = given[k]
    for k in range(4):
        group[NEAR + k] = given[8 + k]


@dataclass(frozen=True)
class _Plane:
    k11: Lanes
    k12: Lanes
    k22: Lanes


@vector_code
def assemble_member(
    code: Code,
    late: Strip,
    early: Strip,
    up: Scalars,
    here: Strip,
    group: Strip,
    late_end: Strip,
    early_end: Strip,
    late_diagonal: Strip,
    early_diagonal: Strip,
    below: Strip,
    kept: Strip,
) -> None:
    """Add one member to the two diagonal blocks; set its block below the diagonal.

    late, early : positions of the two joints. up : unit vector. here : 1 vector, 0 where absent.
    late_end, early_end : bending flexibility of that end, Iy in entry 0 and Iz in entry 2.
    kept : what ``add_energy`` needs later.
    """
    x, y, z, length, per_length = _axes(code, late, early, up)
    present = here[0] > 0.5

    def stiff(value: Lanes) -> Lanes:
        return present.pick(value, 0.0)

    ea = stiff(1.0 / (length * group[0] + group[6]))
    t = stiff(1.0 / (length * group[3] + group[7]))
    in_y = _plane(length, per_length, group[1], group[5], late_end[0], early_end[0])
    in_z = _plane(length, per_length, group[2], group[4], late_end[2], early_end[2])
    in_y = _Plane(stiff(in_y.k11), stiff(in_y.k12), stiff(in_y.k22))
    in_z = _Plane(stiff(in_z.k11), stiff(in_z.k12), stiff(in_z.k22))
    x, y, z = ((stiff(v[0]), stiff(v[1]), stiff(v[2])) for v in (x, y, z))
    length, per_length = stiff(length), stiff(per_length)
    bending = (in_y.k11, in_y.k12, in_y.k22, in_z.k11, in_z.k12, in_z.k22)
    for k, value in enumerate((*x, *y, *z, length, per_length, ea, t, *bending)):
        kept[k] = value

    y1, y2 = (in_y.k11 + in_y.k12) * per_length, (in_y.k12 + in_y.k22) * per_length
    z1, z2 = (in_z.k11 + in_z.k12) * per_length, (in_z.k12 + in_z.k22) * per_length
    uu = _spread(x, y, z, ea, (z1 + z2) * per_length, (y1 + y2) * per_length)
    ii = _spread(x, y, z, t, in_y.k11, in_z.k11)
    ij = _spread(x, y, z, -t, in_y.k12, in_z.k12)
    jj = _spread(x, y, z, t, in_y.k22, in_z.k22)
    for a in range(3):
        for b in range(a + 1):
            for diagonal, rotation in ((late_diagonal, ii), (early_diagonal, jj)):
                k, r = low(a, b), low(3 + a, 3 + b)
                diagonal[k] = diagonal[k] + uu[k]
                diagonal[r] = diagonal[r] + rotation[k]
    for a in range(3):
        for b in range(3):
            k = low(max(a, b), min(a, b))
            yz, zy = y[a] * z[b], z[a] * y[b]
            with_late = z1 * yz - y1 * zy
            with_early = z2 * yz - y2 * zy
            turn = low(3 + b, a)
            late_diagonal[turn] = late_diagonal[turn] + with_late
            early_diagonal[turn] = early_diagonal[turn] - with_early
            below[SIZE * a + b] = -uu[k]
            below[SIZE * a + 3 + b] = with_early
            below[SIZE * (3 + b) + a] = -with_late
            below[SIZE * (3 + a) + 3 + b] = ij[k]


@vector_code
def add_energy(
    code: Code,
    energy: Strip,
    u_late: Strip,
    u_early: Strip,
    group: Strip,
    late_end: Strip,
    early_end: Strip,
    kept: Strip,
) -> None:
    """Add a member's strain energy to its group's five: axial, bending, torsion, shear, joints.

    u_late, u_early : displacements of the two joints. Twice the energy is added up.
    """
    x, y, z = ((kept[3 * k], kept[3 * k + 1], kept[3 * k + 2]) for k in range(3))
    length, per_length, ea, t = kept[9], kept[10], kept[11], kept[12]
    in_y, in_z = _Plane(kept[13], kept[14], kept[15]), _Plane(kept[16], kept[17], kept[18])
    along = _minus(_three(u_early, 0), _three(u_late, 0))
    turn_late, turn_early = _three(u_late, 3), _three(u_early, 3)
    force = ea * _dot(x, along)
    torque = t * _dot(x, _minus(turn_early, turn_late))
    chord_y, chord_z = -_dot(z, along) * per_length, _dot(y, along) * per_length
    y1, y2 = _moments(in_y, _dot(y, turn_late) - chord_y, _dot(y, turn_early) - chord_y)
    z1, z2 = _moments(in_z, _dot(z, turn_late) - chord_z, _dot(z, turn_early) - chord_z)
    absent = length.equals(0.0)
    bend_y, bend_z = y1 * y1 - y1 * y2 + y2 * y2, z1 * z1 - z1 * z2 + z2 * z2
    slide_y, slide_z = (y1 + y2) * (y1 + y2), (z1 + z2) * (z1 + z2)
    joints = force * force * group[6] + torque * torque * group[7]
    joints = joints + y1 * y1 * late_end[0] + y2 * y2 * early_end[0]
    joints = joints + z1 * z1 * late_end[2] + z2 * z2 * early_end[2]
    stored = (
        force * force * length * group[0],
        2.0 * length * (bend_y * group[1] + bend_z * group[2]),
        torque * torque * length * group[3],
        per_length * (slide_y * group[5] + slide_z * group[4]),
        joints,
    )
    for kind, value in enumerate(stored):
        energy[kind] = energy[kind] + absent.pick(0.0, value)


def _axes(
    code: Code, late: Strip, early: Strip, up: Scalars
) -> tuple[Vector, Vector, Vector, Lanes, Lanes]:
    """Local axes, length and its inverse; not a number where ``up`` lies along the member."""
    along = _minus(_three(early, 0), _three(late, 0))
    square = _dot(along, along)
    length = code.sqrt(square)
    per_length = 1.0 / length
    x = _times(along, per_length)
    across = _cross((up[0], up[1], up[2]), x)
    sine = _dot(across, across)
    per_sine = (sine > PARALLEL**2).pick(1.0 / code.sqrt(sine), float("nan"))
    y = _times(across, per_sine)
    return x, y, _cross(x, y), length, per_length


def _plane(
    length: Lanes, per_length: Lanes, per_6ei: Lanes, shear: Lanes, e1: Lanes, e2: Lanes
) -> _Plane:
    """Bending stiffness of one plane from its flexibility [[a + e1, b], [b, a + e2]]."""
    bend, slide = length * per_6ei, shear * per_length
    a, b = bend + bend + slide, slide - bend
    q = 3.0 * bend * (bend + slide + slide) + a * (e1 + e2) + e1 * e2
    per_q = 1.0 / q
    return _Plane((a + e2) * per_q, -b * per_q, (a + e1) * per_q)


def _moments(plane: _Plane, turn_late: Lanes, turn_early: Lanes) -> tuple[Lanes, Lanes]:
    return (
        plane.k11 * turn_late + plane.k12 * turn_early,
        plane.k12 * turn_late + plane.k22 * turn_early,
    )


def _spread(x: Vector, y: Vector, z: Vector, a: Lanes, b: Lanes, c: Lanes) -> list[Lanes]:
    """Lower triangle of a xx' + b yy' + c zz'."""
    ax, by, cz = _times(x, a), _times(y, b), _times(z, c)
    return [ax[i] * x[j] + by[i] * y[j] + cz[i] * z[j] for i in range(3) for j in range(i + 1)]


def _three(strip: Strip, start: int) -> Vector:
    return strip[start], strip[start + 1], strip[start + 2]


def _minus(a: Vector, b: Vector) -> Vector:
    return a[0] - b[0], a[1] - b[1], a[2] - b[2]


def _times(a: Vector, factor: Lanes) -> Vector:
    return a[0] * factor, a[1] * factor, a[2] * factor


def _dot(a: Vector, b: Vector) -> Lanes:
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2]


def _cross(a: Vector, b: Vector) -> Vector:
    return (
        a[1] * b[2] - a[2] * b[1],
        a[2] * b[0] - a[0] * b[2],
        a[0] * b[1] - a[1] * b[0],
    )
