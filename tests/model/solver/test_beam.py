"""One member against closed forms, static condensation, and what nobody can argue with.

Closed forms: S. P. Timoshenko & J. M. Gere, Mechanics of Materials; shear as in J. S.
Przemieniecki, Theory of Matrix Structural Analysis, 1968. Natural stiffnesses with end springs
were computed by static condensation in an independent prototype and are printed to seven digits.
"""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from model.errors import InputError
from model.frame.batch import PINNED
from model.solver import beam

E, NU = 205e9, 0.3
G = E / (2 * (1 + NU))
ROOT, TIP = slice(0, 6), slice(6, 12)


def tube(outside: float = 0.0254, wall: float = 0.0016) -> np.ndarray:
    """Rigidities of a round tube, shear coefficient after G. R. Cowper, J. Appl. Mech. 1966."""
    inside = outside - 2 * wall
    a, i = np.pi / 4 * (outside**2 - inside**2), np.pi / 64 * (outside**4 - inside**4)
    m2 = (inside / outside) ** 2
    kappa = 6 * (1 + NU) * (1 + m2) ** 2
    kappa /= (7 + 6 * NU) * (1 + m2) ** 2 + (20 + 12 * NU) * m2
    return np.array([E * a, E * i, E * i, 2 * G * i, 1 / (G * kappa * a), 1 / (G * kappa * a)])


OBLONG = np.array([2.5e8, 4e5, 9e4, 7e4, 1 / 3e7, 1 / 5e7])
"""Rigidities that all differ, so that no two directions can be mixed up unseen."""


def cantilever(length: float, rigidity: np.ndarray, load: np.ndarray, ends=None) -> np.ndarray:
    """Tip displacement of a member along x, root held, local axes equal to vehicle axes."""
    xi, xj, up = np.zeros(3), np.array([length, 0, 0]), np.array([0, 0, 1.0])
    ends = np.zeros(6) if ends is None else ends
    k = beam.member_stiffness(xi, xj, up, rigidity, ends)
    return np.linalg.solve(k[TIP, TIP], load)


# ---- cantilever, all six end loads -----------------------------------------------------------


@pytest.mark.parametrize("direction", range(6))
def test_a_cantilever_moves_as_the_closed_forms_say(direction):
    length, p = 0.8, 3.0
    ea, eiy, eiz, gj, shear_y, shear_z = OBLONG
    load = np.zeros(6)
    load[direction] = p
    expected = np.zeros((6, 6))
    expected[0, 0] = p * length / ea
    expected[1, 1] = p * length**3 / (3 * eiz) + p * length * shear_y
    expected[1, 5] = p * length**2 / (2 * eiz)
    expected[2, 2] = p * length**3 / (3 * eiy) + p * length * shear_z
    expected[2, 4] = -p * length**2 / (2 * eiy)
    expected[3, 3] = p * length / gj
    expected[4, 4] = p * length / eiy
    expected[4, 2] = -p * length**2 / (2 * eiy)
    expected[5, 5] = p * length / eiz
    expected[5, 1] = p * length**2 / (2 * eiz)
    got = cantilever(length, OBLONG, load)
    assert got == pytest.approx(expected[direction], rel=1e-11, abs=1e-22)


def test_end_forces_of_a_cantilever_balance_its_load():
    length, load = 0.8, np.array([5.0, 7.0, -11.0, 2.0, 3.0, -4.0])
    tip = cantilever(length, OBLONG, load)
    xi, xj, up = np.zeros(3), np.array([length, 0, 0]), np.array([0, 0, 1.0])
    start, end = beam.member_end_forces(xi, xj, up, OBLONG, np.zeros(6), np.zeros(6), tip)
    assert end == pytest.approx(load, rel=1e-11)
    moment = load[3:] + np.cross([length, 0, 0], load[:3])
    assert start == pytest.approx(-np.concatenate([load[:3], moment]), rel=1e-11)


def test_a_member_in_tension_has_a_positive_end_force_at_its_to_end():
    tip = cantilever(0.8, OBLONG, np.array([5.0, 0, 0, 0, 0, 0]))
    force = beam.member_end_forces(
        np.zeros(3), np.array([0.8, 0, 0]), np.array([0, 0, 1.0]), OBLONG, np.zeros(6),
        np.zeros(6), tip,
    )  # fmt: skip
    assert force[1, 0] == pytest.approx(5.0)
    assert force[0, 0] == pytest.approx(-5.0)


@pytest.mark.parametrize("kind", range(5))
def test_energy_by_kind_is_that_of_the_closed_forms(kind):
    length, load = 0.8, np.array([5.0, 7.0, -11.0, 2.0, 3.0, -4.0])
    ends = np.array([1e-9, 2e-6, 3e-6, 4e-6, 5e-6, 6e-6])
    ea, eiy, eiz, gj, shear_y, shear_z = OBLONG
    n, vy, vz, t, my, mz = load
    root_y, root_z = my - vz * length, mz + vy * length

    def parabola(m0: float, m1: float) -> float:
        return length / 6 * (m0**2 + m0 * m1 + m1**2)

    expected = [
        n**2 * length / (2 * ea),
        parabola(root_y, my) / eiy + parabola(root_z, mz) / eiz,
        t**2 * length / (2 * gj),
        (vy**2 * shear_y + vz**2 * shear_z) * length / 2,
        (1e-9 * n**2 + 2e-6 * t**2 + 3e-6 * root_y**2 + 4e-6 * my**2) / 2
        + (5e-6 * root_z**2 + 6e-6 * mz**2) / 2,
    ]
    tip = cantilever(length, OBLONG, load, ends)
    energy = beam.member_energy(
        np.zeros(3), np.array([length, 0, 0]), np.array([0, 0, 1.0]), OBLONG, ends,
        np.zeros(6), tip,
    )  # fmt: skip
    assert energy[kind] == pytest.approx(expected[kind], rel=1e-10)
    assert energy.sum() == pytest.approx(load @ tip / 2, rel=1e-10)


# ---- printed natural stiffnesses -------------------------------------------------------------


def test_natural_stiffness_of_a_welded_tube_agrees_with_the_printed_values():
    got = beam.natural_stiffness(np.array(0.5), tube(), np.zeros(6))
    printed = [4.904906e7, 2683.549, 13783.48, 6806.248, 13783.48]
    assert got[:5] == pytest.approx(printed, rel=5e-7)  # half of the seventh digit
    assert np.array_equal(got[2:5], got[5:])


def test_natural_stiffness_with_end_springs_agrees_with_the_printed_values():
    springs = np.array([2 / 3e8, 2 / 1e4, 1 / 2e4, 1 / 5e3, 1 / 2e4, 1 / 5e3])
    got = beam.natural_stiffness(np.array(0.5), tube(), springs)
    printed = [3.696254e7, 1746.295, 7227.471, 1157.041, 3564.229]
    assert got[:5] == pytest.approx(printed, rel=5e-7)  # half of the seventh digit


def test_fixity_factors_give_the_stiffness_of_monforton_and_wu():
    # G. R. Monforton, T. S. Wu, Matrix analysis of semi-rigidly connected frames, J. Struct.
    # Div. ASCE 89 (1963); factors 0.3 and 0.8, stiffness in units of EI/L, no shear.
    rigidity = tube() * np.array([1, 1, 1, 1, 0, 0])
    length, ei = 0.5, tube()[1]
    flex = [(1 - r) / r * length / (3 * ei) for r in (0.3, 0.8)]
    k = beam.natural_stiffness(np.array(length), rigidity, np.array([0, 0, *flex, *flex]))
    assert k[2:5] * length / ei == pytest.approx([0.957447, 0.382979, 2.553191], abs=5e-7)


# ---- flexible and free ends ------------------------------------------------------------------


@pytest.mark.parametrize("seed", range(12))
def test_end_springs_equal_static_condensation(seed):
    rng = np.random.default_rng(seed)
    length = rng.uniform(0.1, 2.0)
    spring = 10 ** rng.uniform(3, 7, 6)
    xi, xj, up = np.zeros(3), np.array([length, 0, 0]), np.array([0, 0, 1.0])
    bare = beam.member_stiffness(xi, xj, up, OBLONG, np.zeros(6))
    # joints outside, member inside: 12 + 12 freedoms, a spring between each pair that may turn
    sprung = [0, 3, 4, 10, 5, 11]
    size = 12 + len(sprung)
    k = np.zeros((size, size))
    inside = [12 + sprung.index(d) if d in sprung else d for d in range(12)]
    k[np.ix_(inside, inside)] += bare
    for s, d in zip(spring, sprung, strict=True):
        pair = [d, 12 + sprung.index(d)]
        k[np.ix_(pair, pair)] += s * np.array([[1, -1], [-1, 1]])
    condensed = k[:12, :12] - k[:12, 12:] @ np.linalg.solve(k[12:, 12:], k[12:, :12])
    got = beam.member_stiffness(xi, xj, up, OBLONG, 1 / spring)
    assert np.abs(got - condensed).max() < 1e-12 * np.abs(condensed).max()


def test_a_pinned_end_carries_no_moment_and_the_other_end_is_exact():
    ends = np.array([0, 0, PINNED, 0, PINNED, 0])
    k = beam.natural_stiffness(np.array(0.5), OBLONG, ends)
    _, eiy, eiz, _, shear_y, shear_z = OBLONG
    assert k[4] == 1 / (0.5 / (3 * eiy) + shear_z / 0.5)
    assert k[7] == 1 / (0.5 / (3 * eiz) + shear_y / 0.5)
    assert np.abs(k[[2, 3, 5, 6]]).max() < 1e-25


def test_free_ends_leave_a_truss_bar():
    ends = np.array([0, *[PINNED] * 5])
    xj = np.array([0.3, 0.4, 0.0])
    k = beam.member_stiffness(np.zeros(3), xj, np.array([0, 0, 1.0]), OBLONG, ends)
    bar = OBLONG[0] / 0.5 * np.outer([-0.6, -0.8, 0, 0.6, 0.8, 0], [-0.6, -0.8, 0, 0.6, 0.8, 0])
    translations = [0, 1, 2, 6, 7, 8]
    # products of rounded cosines; free ends themselves leave less than 1e-28
    assert np.abs(k[np.ix_(translations, translations)] - bar).max() < 1e-15 * np.abs(bar).max()
    k[np.ix_(translations, translations)] = 0
    assert np.abs(k).max() < 1e-25


def test_deep_short_members_keep_their_digits():
    # k11 = (4 + phi) c, k12 = (2 - phi) c, c = EI/((1 + phi) L); phi about 4e10, the exact
    # values from the flexibilities in rational arithmetic
    from fractions import Fraction

    length, ei, slide = 1e-3, 1e5, 1e-1
    rigidity = np.array([1e8, ei, ei, 1e5, slide, slide])
    bend, w = Fraction(length) / (6 * Fraction(ei)), Fraction(slide) / Fraction(length)
    a, b = 2 * bend + w, w - bend
    k = beam.natural_stiffness(np.array(length), rigidity, np.zeros(6))
    assert k[2] == pytest.approx(float(a / (a * a - b * b)), rel=1e-15)
    assert k[3] == pytest.approx(float(-b / (a * a - b * b)), rel=1e-15)


# ---- axes ------------------------------------------------------------------------------------


def test_local_axes_follow_up():
    axes = beam.member_axes(np.zeros(3), np.array([0, 2.0, 0]), np.array([0, 0.3, 5.0]))
    assert axes == pytest.approx(np.array([[0, 1, 0], [-1, 0, 0], [0, 0, 1]]), abs=1e-15)


def test_up_along_the_member_is_refused():
    ends = np.array([[1.0, 0, 0], [0, 0, 2.0]])
    with pytest.raises(InputError, match=r"up .*entry 1.*does not lie along the member"):
        beam.member_axes(np.zeros((2, 3)), ends, np.array([0, 0, 1.0]))


def test_a_member_without_length_is_refused():
    with pytest.raises(InputError, match="different positions"):
        beam.member_axes(np.zeros(3), np.zeros(3), np.array([0, 0, 1.0]))


# ---- what nobody can argue with --------------------------------------------------------------

coordinate = st.floats(-2, 2)
point = st.tuples(coordinate, coordinate, coordinate).map(np.array)
log_flex = st.sampled_from([0.0, 1e-9, 1e-5, 1e-2, PINNED])
ends_any = st.lists(log_flex, min_size=6, max_size=6).map(np.array)


def members():
    return st.tuples(point, point, point, ends_any).filter(
        lambda m: (
            np.linalg.norm(m[1] - m[0]) > 0.05
            and np.linalg.norm(np.cross(m[2], m[1] - m[0]))
            > 0.05 * np.linalg.norm(m[2]) * np.linalg.norm(m[1] - m[0])
            and np.linalg.norm(m[2]) > 0.05
        )
    )


def rigid_motions(xi: np.ndarray, xj: np.ndarray) -> np.ndarray:
    """(12, 6) three translations and three rotations about the origin."""
    columns = []
    for k in range(3):
        axis = np.eye(3)[k]
        columns.append(np.concatenate([axis, np.zeros(3), axis, np.zeros(3)]))
        columns.append(np.concatenate([np.cross(axis, xi), axis, np.cross(axis, xj), axis]))
    return np.array(columns).T


@settings(max_examples=60, deadline=None)
@given(members())
def test_rigid_motions_strain_nothing_and_k_is_symmetric(member):
    xi, xj, up, ends = member
    k = beam.member_stiffness(xi, xj, up, OBLONG, ends)
    assert np.abs(k - k.T).max() <= 1e-15 * np.abs(k).max()
    length = np.linalg.norm(xj - xi)
    # cancellation of terms k·length·rotation; 100 roundings of the largest of them
    allowed = 2e-14 * np.abs(k).max() * max(1.0, length) * (1 + np.abs([xi, xj]).max())
    assert np.abs(k @ rigid_motions(xi, xj)).max() <= allowed
    eigen = np.linalg.eigvalsh(k)
    assert eigen[0] >= -1e-14 * eigen[-1]


@settings(max_examples=40, deadline=None)
@given(members(), st.integers(0, 10**6))
def test_turning_the_vehicle_turns_the_matrices(member, seed):
    xi, xj, up, ends = member
    q = np.linalg.qr(np.random.default_rng(seed).standard_normal((3, 3)))[0]
    q *= np.sign(np.linalg.det(q))
    turn = np.kron(np.eye(4), q)
    for matrix in (
        lambda a, b, c: beam.member_stiffness(a, b, c, OBLONG, ends),
        lambda a, b, c: beam.consistent_mass(a, b, c, OBLONG, ends, np.array(2.0)),
    ):
        k, turned = matrix(xi, xj, up), matrix(q @ xi, q @ xj, q @ up)
        assert np.abs(turn @ k @ turn.T - turned).max() < 1e-11 * np.abs(k).max()


@settings(max_examples=40, deadline=None)
@given(members())
def test_the_mass_matrix_moves_the_whole_mass_and_is_not_negative(member):
    xi, xj, up, ends = member
    m = beam.consistent_mass(xi, xj, up, OBLONG, ends, np.array(2.0))
    mass = 2.0 * np.linalg.norm(xj - xi)
    push = np.tile([1.0, 2.0, 3.0, 0, 0, 0], 2)
    assert push @ m @ push == pytest.approx(14 * mass, rel=1e-11)
    eigen = np.linalg.eigvalsh(m)
    assert eigen[0] >= -1e-13 * eigen[-1]


def test_the_mass_matrix_without_shear_is_the_classical_one():
    # Przemieniecki 1968: (rho A L/420) [156 22L 54 -13L; ...] and (rho I/30L) [36 3L -36 3L; ...]
    length, line_mass = 0.7, 7.85
    rigidity = OBLONG * np.array([1, 1, 1, 1, 0, 0])
    ea, _, eiz = rigidity[:3]
    s, s2 = length, length**2
    bend = [
        [156, 22 * s, 54, -13 * s],
        [22 * s, 4 * s2, 13 * s, -3 * s2],
        [54, 13 * s, 156, -22 * s],
        [-13 * s, -3 * s2, -22 * s, 4 * s2],
    ]
    tilt = [
        [36, 3 * s, -36, 3 * s],
        [3 * s, 4 * s2, -3 * s, -s2],
        [-36, -3 * s, 36, -3 * s],
        [3 * s, -s2, -3 * s, 4 * s2],
    ]
    args = np.zeros(3), np.array([s, 0, 0]), np.array([0, 0, 1.0]), rigidity, np.zeros(6)
    plane = np.ix_([1, 5, 7, 11], [1, 5, 7, 11])
    plain = beam.consistent_mass(*args, np.array(line_mass), rotary=False)
    full = beam.consistent_mass(*args, np.array(line_mass))
    classical = line_mass * s / 420 * np.array(bend)
    assert plain[plane] == pytest.approx(classical, rel=1e-12)
    rotary = line_mass * eiz / ea / (30 * s) * np.array(tilt)
    assert full[plane] == pytest.approx(classical + rotary, rel=1e-12)


def test_members_side_by_side_equal_members_one_by_one():
    rng = np.random.default_rng(3)
    xi, xj, up = rng.standard_normal((3, 5, 4, 3))
    rigidity = OBLONG * rng.uniform(0.5, 2, (5, 1, 6))
    ends = 10 ** rng.uniform(-8, -5, (4, 6))
    together = beam.member_stiffness(xi, xj, up, rigidity, ends)
    assert together.shape == (5, 4, 12, 12)
    alone = beam.member_stiffness(xi[2, 3], xj[2, 3], up[2, 3], rigidity[2, 0], ends[3])
    assert together[2, 3] == pytest.approx(alone, rel=1e-14, abs=1e-9)


def test_the_complex_step_gives_the_slope_with_length():
    # 1/(L/3EI) and its slope -3EI/L² for a pinned end, no shear; step 1e-30 has no cancellation
    rigidity = OBLONG * np.array([1, 1, 1, 1, 0, 0])
    ends = np.array([0, 0, PINNED, 0, PINNED, 0])
    k = beam.natural_stiffness(np.array(0.5 + 1e-30j), rigidity.astype(complex), ends)
    assert k[4].imag / 1e-30 == pytest.approx(-3 * rigidity[1] / 0.5**2, rel=1e-14)
    xj = np.array([0.5 + 1e-30j, 0.2, 0.1])
    up = np.array([0, 0, 1.0])
    step = beam.member_stiffness(np.zeros(3), xj, up, OBLONG, np.zeros(6)).imag / 1e-30
    h = 1e-6
    near, far = (
        beam.member_stiffness(np.zeros(3), np.array([0.5 + d, 0.2, 0.1]), up, OBLONG, np.zeros(6))
        for d in (-h, h)
    )
    # central difference: h² truncation and rounding over h, both about 1e-9 of the largest entry
    assert np.abs(step - (far - near) / (2 * h)).max() < 1e-8 * np.abs(step).max()
