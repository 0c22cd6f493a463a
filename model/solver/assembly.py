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
GROUP = 12
"""Vectors of a group once prepared, see ``prepare_group``."""
NEAR = 8
"""Place in a group of the bending flexibilities of the ends: Iy at from, at to, Iz at from, at
to. Those of a member's later end start one further on where that is its to end."""
X, Y, Z, LENGTH, PER_LENGTH, EA, T, IN_Y, IN_Z, MEMBER = 0, 3, 6, 9, 10, 11, 12, 13, 16, 19
"""Places in a prepared member's strip: local axes, L, 1/L, axial and torsional stiffness, k11,
k12, k22 of bending with Iy and with Iz; their number."""
K11, K12, K22 = 0, 1, 2
TURNS = tuple(low(3 + a, 3 + b) for a in range(3) for b in range(a + 1))
"""Entries of a diagonal block that belong to rotations alone."""
KINDS = 5


@vector_code
def prepare_group(code: Code, group: Strip, given: Strip) -> None:
    """1/EA, 1/6EIy, 1/6EIz, 1/GJ, 1/GAsy, 1/GAsz, six end flexibilities."""
    group[0] = 1.0 / given[0]
    group[1] = 1.0 / (6.0 * given[1])
    group[2] = 1.0 / (6.0 * given[2])
    group[3] = 1.0 / given[3]
    for k in range(4, GROUP):
        group[k] = given[k]


@dataclass(frozen=True)
class _Plane:
    """Bending stiffness of one plane: end moments against rotations from the chord."""

    k11: Lanes
    k12: Lanes
    k22: Lanes

    @staticmethod
    def of(member: Strip, start: int) -> _Plane:
        return _Plane(*_three(member, start))

    def moments(self, late: Lanes, early: Lanes) -> tuple[Lanes, Lanes]:
        return self.k11 * late + self.k12 * early, self.k12 * late + self.k22 * early


@vector_code
def prepare_member(
    code: Code,
    member: Strip,
    late: Strip,
    early: Strip,
    up: Scalars,
    here: Strip,
    group: Strip,
    late_end: Strip,
    early_end: Strip,
) -> None:
    """Local axes, length and natural stiffness of one member into its strip.

    late, early : positions of the two joints. up : unit vector, then one at right angles to it,
    along which an absent member is imagined. here : 1 vector, 0 where absent. late_end,
    early_end : bending flexibility of that end, Iy in entry 0 and Iz in entry 2.
    """
    present = here[0] > 0.5
    apart = _minus(_three(early, 0), _three(late, 0))
    ax, ay, az = (present.pick(apart[k], up[3 + k]) for k in range(3))
    along = (ax, ay, az)
    length = code.sqrt(_dot(along, along))
    per_length = 1.0 / length
    x = _times(along, per_length)
    across = _cross((up[0], up[1], up[2]), x)
    sine = _dot(across, across)
    per_sine = (sine > PARALLEL**2).pick(1.0 / code.sqrt(sine), float("nan"))
    y = _times(across, per_sine)
    in_y = _plane(length, per_length, group[1], group[5], late_end[0], early_end[0])
    in_z = _plane(length, per_length, group[2], group[4], late_end[2], early_end[2])
    stiffness = (
        1.0 / (length * group[0] + group[6]),
        1.0 / (length * group[3] + group[7]),
        *(in_y.k11, in_y.k12, in_y.k22),
        *(in_z.k11, in_z.k12, in_z.k22),
    )
    for k, value in enumerate((*x, *y, *_cross(x, y), length, per_length)):
        member[k] = value
    for k, value in enumerate(stiffness):
        member[EA + k] = present.pick(value, 0.0)


@vector_code
def assemble_member(
    code: Code, member: Strip, late_diagonal: Strip, early_diagonal: Strip, below: Strip
) -> None:
    """Add a prepared member to its two diagonal blocks; set its block below the diagonal.

    With zz' = I - xx' - yy' and zy' = yz' - X, X the matrix of "times x", every 3 x 3 part needs
    one product less. The parts below the diagonal are the negative ones, so those are made.
    """
    xx, yy = _products(_three(member, X)), _products(_three(member, Y))
    y1, y2 = _forces(member, IN_Y)
    z1, z2 = _forces(member, IN_Z)
    less = -member[PER_LENGTH]
    moves = _combined(xx, yy, -member[EA], (z1 + z2) * less, (y1 + y2) * less)
    for a in range(3):
        for b in range(3):
            k = low(max(a, b), min(a, b))
            below[SIZE * a + b] = moves[k]
            if b <= a:
                late_diagonal[k] = late_diagonal[k] - moves[k]
                early_diagonal[k] = early_diagonal[k] - moves[k]

    turns = _combined(xx, yy, member[T], member[IN_Y + K11], member[IN_Z + K11])
    for k, entry in enumerate(TURNS):
        late_diagonal[entry] = late_diagonal[entry] + turns[k]
    turns = _combined(xx, yy, member[T], member[IN_Y + K22], member[IN_Z + K22])
    for k, entry in enumerate(TURNS):
        early_diagonal[entry] = early_diagonal[entry] + turns[k]
    turns = _combined(xx, yy, -member[T], member[IN_Y + K12], member[IN_Z + K12])
    for a in range(3):
        for b in range(3):
            below[SIZE * (3 + a) + 3 + b] = turns[low(max(a, b), min(a, b))]

    x, y, z = (_three(member, axis) for axis in (X, Y, Z))
    y1, y2 = _forces(member, IN_Y)
    z1, z2 = _forces(member, IN_Z)
    late_x, early_x = _times(x, y1), _times(x, y2)
    late_yz, early_yz = y1 - z1, z2 - y2
    for a in range(3):
        for b in range(3):
            yz = y[a] * z[b]
            minus_late, with_early = late_yz * yz, early_yz * yz
            if a != b:
                k = 3 - a - b
                if (b - a) % 3 == 1:
                    minus_late, with_early = minus_late - late_x[k], with_early + early_x[k]
                else:
                    minus_late, with_early = minus_late + late_x[k], with_early - early_x[k]
            turn = low(3 + b, a)
            below[SIZE * (3 + b) + a] = minus_late
            late_diagonal[turn] = late_diagonal[turn] - minus_late
            below[SIZE * a + 3 + b] = with_early
            early_diagonal[turn] = early_diagonal[turn] - with_early


@vector_code
def add_energy(
    code: Code,
    energy: Strip,
    u_late: Strip,
    u_early: Strip,
    group: Strip,
    late_end: Strip,
    early_end: Strip,
    member: Strip,
) -> None:
    """Add a member's strain energy to its group's five: axial, bending, torsion, shear, joints.

    u_late, u_early : displacements of the two joints. Twice the energy is added up.
    """
    s = _Strained(member, u_late, u_early)
    length, per_length = member[LENGTH], member[PER_LENGTH]
    joints = s.n * s.n * group[6] + s.t * s.t * group[7]
    joints = joints + s.y1 * s.y1 * late_end[0] + s.y2 * s.y2 * early_end[0]
    joints = joints + s.z1 * s.z1 * late_end[2] + s.z2 * s.z2 * early_end[2]
    bend_y, slide_y = _bend_and_slide(s.y1, s.y2)
    bend_z, slide_z = _bend_and_slide(s.z1, s.z2)
    stored = (
        s.n * s.n * length * group[0],
        2.0 * length * (bend_y * group[1] + bend_z * group[2]),
        s.t * s.t * length * group[3],
        per_length * (slide_y * group[5] + slide_z * group[4]),
        joints,
    )
    present = member[EA] > 0.0
    for kind, value in enumerate(stored):
        energy[kind] = energy[kind] + present.pick(value, 0.0)


@vector_code
def add_gradient(
    code: Code,
    late: Strip,
    early: Strip,
    u_late: Strip,
    u_early: Strip,
    up: Scalars,
    group: Strip,
    member: Strip,
) -> None:
    """Add what a member contributes to the slope of the compliance with its joints' positions.

    late, early : slopes of the two joints. The formulas are those of ``gradient.energy_slope``.
    """
    s = _Strained(member, u_late, u_early)
    per_length = member[PER_LENGTH]
    bend_y, slide_y = _bend_and_slide(s.y1, s.y2)
    bend_z, slide_z = _bend_and_slide(s.z1, s.z2)
    longer = -(s.n * s.n * group[0] + s.t * s.t * group[3])
    longer = longer - 2.0 * (bend_y * group[1] + bend_z * group[2])
    longer = longer + per_length * per_length * (slide_y * group[5] + slide_z * group[4])
    across_y, across_z = (s.y1 + s.y2) * per_length, (s.z1 + s.z2) * per_length
    (_, iy, iz), (_, jy, jz) = s.late, s.early
    ix, jx = s.late[0], s.early[0]
    slip_x, slip_y, slip_z = s.slip
    longer = longer + 2.0 * (across_z * slip_y - across_y * slip_z)

    above = (up[0], up[1], up[2])
    roll = _dot(above, s.x) / _dot(above, s.z)
    rolled = s.y1 * (iz - slip_y) + s.y2 * (jz - slip_y)
    rolled = rolled - s.z1 * (iy + slip_z) - s.z2 * (jy + slip_z)
    aside = s.t * (jy - iy) - s.y1 * ix - s.y2 * jx + roll * rolled
    upward = s.t * (jz - iz) - s.z1 * ix - s.z2 * jx
    aside = s.n * slip_y + aside * per_length + across_z * slip_x
    upward = s.n * slip_z + upward * per_length - across_y * slip_x
    present = member[EA] > 0.0
    for k in range(3):
        slope = longer * s.x[k] + 2.0 * (aside * s.y[k] + upward * s.z[k])
        slope = present.pick(slope, 0.0)
        late[k] = late[k] + slope
        early[k] = early[k] - slope


class _Strained:
    """A member between displaced joints.

    x, y, z : local axes; n, t, y1, y2, z1, z2 : natural forces. slip : displacement of the early
    end against the late one over the length; late, early : rotations; all in local axes.
    """

    def __init__(self, member: Strip, u_late: Strip, u_early: Strip) -> None:
        self.x, self.y, self.z = (_three(member, axis) for axis in (X, Y, Z))
        axes = (self.x, self.y, self.z)
        in_y, in_z = _Plane.of(member, IN_Y), _Plane.of(member, IN_Z)
        moved = _minus(_three(u_early, 0), _three(u_late, 0))
        turn_late, turn_early = _three(u_late, 3), _three(u_early, 3)
        along = _dot(self.x, moved)
        per_length = member[PER_LENGTH]
        self.slip = tuple(
            part * per_length for part in (along, *(_dot(a, moved) for a in axes[1:]))
        )
        self.late = tuple(_dot(axis, turn_late) for axis in axes)
        self.early = tuple(_dot(axis, turn_early) for axis in axes)
        _, slip_y, slip_z = self.slip
        self.n = member[EA] * along
        self.t = member[T] * (self.early[0] - self.late[0])
        self.y1, self.y2 = in_y.moments(self.late[1] + slip_z, self.early[1] + slip_z)
        self.z1, self.z2 = in_z.moments(self.late[2] - slip_y, self.early[2] - slip_y)


def _plane(
    length: Lanes, per_length: Lanes, per_6ei: Lanes, shear: Lanes, e1: Lanes, e2: Lanes
) -> _Plane:
    """Bending stiffness of one plane from its flexibility [[a + e1, b], [b, a + e2]]."""
    bend, slide = length * per_6ei, shear * per_length
    a, b = bend + bend + slide, slide - bend
    q = 3.0 * bend * (bend + slide + slide) + a * (e1 + e2) + e1 * e2
    per_q = 1.0 / q
    return _Plane((a + e2) * per_q, -b * per_q, (a + e1) * per_q)


def _bend_and_slide(m1: Lanes, m2: Lanes) -> tuple[Lanes, Lanes]:
    """What the moment that varies along a member amounts to, in bending and in shear."""
    across = m1 + m2
    return m1 * m1 - m1 * m2 + m2 * m2, across * across


def _forces(member: Strip, plane: int) -> tuple[Lanes, Lanes]:
    """Force across the member for a turn of the later end, and of the earlier one."""
    k12, per_length = member[plane + K12], member[PER_LENGTH]
    return (member[plane + K11] + k12) * per_length, (member[plane + K22] + k12) * per_length


def _products(v: Vector) -> list[Lanes]:
    """Lower triangle of vv'."""
    return [v[a] * v[b] for a in range(3) for b in range(a + 1)]


def _combined(xx: list[Lanes], yy: list[Lanes], a: Lanes, b: Lanes, c: Lanes) -> list[Lanes]:
    """Lower triangle of a xx' + b yy' + c zz', zz' being what xx' and yy' leave of I."""
    ac, bc = a - c, b - c
    triangle = [ac * x + bc * y for x, y in zip(xx, yy, strict=True)]
    for k in range(3):
        triangle[low(k, k)] = triangle[low(k, k)] + c
    return triangle


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
