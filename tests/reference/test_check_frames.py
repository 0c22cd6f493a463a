"""Three frames whose answers two independent prototypes agree on: ladder A, open box B, braced C.

``tests.model.solver.frames`` says what they are. The numbers below were settled by a dense numpy
program and by OpenSeesPy before this solver existed, and are given to the digits shown; K is the
twist stiffness between the four corner joints [N·m/deg].
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from model.errors import LooseFrame
from model.frame.batch import PINNED
from model.results.twist import profile
from model.solver import general, vibration
from model.solver.structure import Frame, frame_of
from tests.model.solver import frames

BUILD = {"A": frames.frame_a, "B": frames.frame_b, "C": frames.frame_c}
CORNERS = {"A": (9, 8, 1, 0), "B": (33, 32, 1, 0), "C": (33, 32, 1, 0)}
"""Front left, front right, rear left, rear right (x forward, y left)."""
K = {"A": 973.1095, "B": 421.6251, "C": 13787.385}
PER_DEGREE = np.pi / 180
X, Y, Z = range(3)


def corners_held(name: str, directions) -> np.ndarray:
    """(joints, 6) held: pairs of corner (0 FL, 1 FR, 2 RL, 3 RR) and direction."""
    joints = len(BUILD[name]()[0].joints)
    held = np.zeros((joints, 6), dtype=bool)
    for corner, direction in directions:
        held[CORNERS[name][corner], direction] = True
    return held


FL, FR, RL, RR = range(4)
THREE_CORNERS = [(RL, Z), (RR, Z), (FL, Z), (RL, X), (RL, Y), (FL, Y)]


def twist_load(frame: Frame, four) -> np.ndarray:
    """(joints, 6) unit couple in front, its opposite at the rear, vertical corner forces."""
    load = np.zeros((len(frame.joints), 6))
    for left, right, sign in ((four[0], four[1], 1), (four[2], four[3], -1)):
        base = frame.xyz[left, Y] - frame.xyz[right, Y]
        load[left, Z], load[right, Z] = sign / base, -sign / base
    return load


def check_frame(name: str, held=None) -> Frame:
    """The frame under its unit twist couple, on three corners unless held otherwise."""
    _, batch = BUILD[name]()
    held = corners_held(name, THREE_CORNERS) if held is None else held
    frame = frame_of(batch, held, ("twist",), np.zeros((1, *held.shape)))
    return replace(frame, loads=twist_load(frame, CORNERS[name])[None])


def stiffness(frame: Frame) -> float:
    """Couple over the twist angle that is conjugate to it [N·m/deg]."""
    u = general.solve(frame).displacement[0]
    return PER_DEGREE / float((frame.loads[0] * u).sum())


def with_members(frame: Frame, pairs, like: str) -> Frame:
    """The frame with further members of the same tube as group ``like``."""
    model = frame.groups.index(like)
    count = len(pairs)

    def more(values):
        return np.concatenate([values, np.repeat(values[model : model + 1], count, axis=0)])

    along = np.array([frame.xyz[j] - frame.xyz[i] for i, j in pairs])
    upright = np.abs(along[:, Z]) > 0.99 * np.linalg.norm(along, axis=1)
    return replace(
        frame,
        member_names=frame.member_names + tuple(f"more {i} {j}" for i, j in pairs),
        members=np.concatenate([frame.members, np.array(pairs, dtype=np.int32)]),
        groups=frame.groups + (like,) * count,
        up=np.concatenate([frame.up, np.where(upright[:, None], [0, 1.0, 0], [0, 0, 1.0])]),
        rigidity=more(frame.rigidity),
        ends=more(frame.ends),
        line_mass=more(frame.line_mass),
        rotary=more(frame.rotary),
    )


def without(frame: Frame, gone) -> Frame:
    """The frame without the members for which ``gone(group, i, j)``."""
    keep = [
        m
        for m, (group, (i, j)) in enumerate(zip(frame.groups, frame.members, strict=True))
        if not gone(group, int(i), int(j))
    ]
    return replace(
        frame,
        member_names=tuple(frame.member_names[m] for m in keep),
        groups=tuple(frame.groups[m] for m in keep),
        **{
            field: getattr(frame, field)[keep]
            for field in ("members", "up", "rigidity", "ends", "line_mass", "rotary")
        },
    )


def pair(*joints):
    return lambda group, i, j: {i, j} == set(joints)


# ---- twist stiffness --------------------------------------------------------------------------


@pytest.mark.parametrize("name", K)
def test_mass(name):
    mass = {"A": 60.288, "B": 36.1055, "C": 51.5137}[name]
    assert check_frame(name).mass == pytest.approx(mass, abs=5e-4)


SUPPORTS = {
    "three corners": THREE_CORNERS,
    "rear axle and one side": [(RL, X), (RL, Y), (RL, Z), (RR, Z), (RR, X), (FR, Z)],
    "front axle": [(FL, X), (FL, Y), (FL, Z), (FR, Z), (RR, Y), (RR, Z)],
}


@pytest.mark.parametrize("support", SUPPORTS)
@pytest.mark.parametrize("name", K)
def test_every_determinate_support_gives_the_same_twist_stiffness(name, support):
    got = stiffness(check_frame(name, corners_held(name, SUPPORTS[support])))
    assert got == pytest.approx(K[name], rel=7e-8)  # half the last digit given
    assert got == pytest.approx(stiffness(check_frame(name)), rel=1e-11)


@pytest.mark.parametrize("name", K)
def test_the_bench_form_with_three_corners_held_agrees(name):
    frame = check_frame(name)
    fl, fr, rl, rr = CORNERS[name]
    load = np.zeros_like(frame.loads)
    load[0, fr, Z] = -1.0
    answer = general.solve(replace(frame, loads=load))
    front = frame.xyz[fl, Y] - frame.xyz[fr, Y]
    rear = frame.xyz[rl, Y] - frame.xyz[rr, Y]
    assert PER_DEGREE * front**2 / -answer.displacement[0, fr, Z] == pytest.approx(
        K[name], rel=7e-8
    )
    vertical = answer.reaction[0, [fl, rr, rl], Z]
    # the free rear corner must be held down
    assert vertical == pytest.approx([1, front / rear, -front / rear], rel=1e-11)


RINGS = {"A": (0, 1), "B": (0, 1, 2, 3), "C": (0, 1, 2, 3)}
TOO_MUCH = [
    ("rear corners clamped", {"A": 1.264, "B": 1.070, "C": 1.005}),
    ("rear ring held in place", {"B": 1.139, "C": 1.101}),
    ("corners held sideways", {"B": 1.336, "C": 1.160}),
    ("rear ring clamped", {"B": 1.218, "C": 1.106}),
]


@pytest.mark.parametrize(
    ("support", "name", "ratio"),
    [(support, name, ratio) for support, by in TOO_MUCH for name, ratio in by.items()],
)
def test_too_many_supports_stiffen_by_the_known_amount(support, name, ratio):
    fl, fr, rl, rr = CORNERS[name]
    held = np.zeros_like(check_frame(name).held)
    if support == "rear corners clamped":
        held[[rl, rr]] = True
    elif support == "rear ring held in place":
        held[list(RINGS[name]), :3] = True
    elif support == "rear ring clamped":
        held[list(RINGS[name])] = True
    else:
        held = corners_held(name, THREE_CORNERS)
        held[[fl, fr, rl, rr], Y] = True
        held[[rl, rr], X] = True
    frame = check_frame(name, held)
    if support == "corners held sideways":
        got = stiffness(frame)
    else:
        u = general.solve(frame).displacement[0]
        base = frame.xyz[fl, Y] - frame.xyz[fr, Y]
        got = PER_DEGREE / ((u[fl, Z] - u[fr, Z]) / base)
    assert got / K[name] == pytest.approx(ratio, abs=5.1e-4)


def test_bending_stiffness_under_a_force_on_the_two_low_joints_at_mid_length():
    for name, expected, digits in (("B", 566.272, 5e-4), ("C", 12763.57, 5e-3)):
        frame = check_frame(name)
        load = np.zeros_like(frame.loads)
        load[0, [16, 17], Z] = -0.5
        u = general.solve(replace(frame, loads=load)).displacement[0]
        four = u[list(CORNERS[name]), Z].mean()
        assert 1e-3 / -(u[[16, 17], Z].mean() - four) == pytest.approx(expected, abs=digits)


def test_every_bay_has_its_known_stiffness():
    expected = {"A": [3918, 3867, 3867, 3918], "C": [121938, 120516, 120812, 120784]}
    for name, bays in expected.items():
        _, batch = BUILD[name]()
        u = general.solve(check_frame(name)).displacement[0]
        got = profile(batch, u).bay_stiffness
        assert got[: len(bays)] == pytest.approx(bays, abs=0.6)
        assert got == pytest.approx(got[::-1], rel=1e-9)


def test_sections_alone_are_stiffer_than_the_corners():
    for name, expected, digits in (("A", 973.11, 5e-3), ("B", 423.03, 5e-3), ("C", 15126.3, 0.05)):
        _, batch = BUILD[name]()
        u = general.solve(check_frame(name)).displacement[0]
        bays = profile(batch, u).bay_stiffness
        assert 1 / (1 / bays).sum() == pytest.approx(expected, abs=digits)


# ---- energy shares and gradients -------------------------------------------------------------


def shares(frame: Frame) -> np.ndarray:
    """(members, 5) share of the strain energy by kind: axial, bending, torsion, shear, joints."""
    energy = general.solve(frame).energy[0]
    return energy / energy.sum()


def test_energy_shares_by_kind():
    expected = {"B": [0.0044, 0.6125, 0.3711, 0.0120, 0], "C": [0.9661, 0.0235, 0.0099, 0.0005, 0]}
    for name, kinds in expected.items():
        assert shares(check_frame(name)).sum(axis=0) == pytest.approx(kinds, abs=5.1e-5)


def test_energy_shares_by_group():
    expected = {"rail": 0.0440, "ring": 0.0482, "end": 0.0808, "b": 0.2858, "r": 0.1283,
                "t": 0.2855, "l": 0.1274}  # fmt: skip
    frame = check_frame("C")
    got = shares(frame).sum(axis=1)
    groups = np.array(frame.groups)
    for group, share in expected.items():
        assert got[groups == group].sum() == pytest.approx(share, abs=5.1e-5)


def test_a_share_is_the_elasticity_of_the_stiffness():
    # dlnK/dln(EA) of a group is its axial share, by Castigliano; checked by differences
    frame = check_frame("C")
    share = shares(frame)
    step = 1e-4
    for kind, column in ((0, 0), (1, 1), (1, 2), (2, 3)):
        for group in ("rail", "b"):
            mine = np.array([g == group for g in frame.groups])
            values = []
            for sign in (-1, 1):
                rigidity = frame.rigidity.copy()
                rigidity[mine, column] *= np.exp(sign * step)
                values.append(np.log(stiffness(replace(frame, rigidity=rigidity))))
            slope = (values[1] - values[0]) / (2 * step)
            if column in (0, 3):
                assert slope == pytest.approx(share[mine, kind].sum(), rel=1e-7)
            else:  # the bending share is split between the two planes
                assert 0 < slope < share[mine, kind].sum()


@pytest.mark.parametrize(
    ("axis", "expected"), [(Z, 1.218772), (Y, 0.347317), (X, -0.632936)], ids=["H", "W", "L"]
)
def test_stiffness_changes_with_height_width_and_length_as_known(axis, expected):
    frame = check_frame("C")
    values = []
    for factor in (np.exp(-1e-4), np.exp(1e-4)):
        xyz = frame.xyz.copy()
        xyz[:, axis] *= factor
        other = replace(frame, xyz=xyz)
        other = replace(other, loads=twist_load(other, CORNERS["C"])[None])
        values.append(np.log(stiffness(other)))
    # error of the central difference about 1e-8
    assert (values[1] - values[0]) / 2e-4 == pytest.approx(expected, abs=6e-7)


# ---- members added and taken away --------------------------------------------------------------


def face(k: int, a: int) -> tuple[int, int]:
    """Alternating diagonal of bay k (1..8) in face a: bottom, right, top, left."""
    near, far = a, (a + 1) % 4
    return (4 * (k - 1) + near, 4 * k + far) if k % 2 else (4 * (k - 1) + far, 4 * k + near)


@pytest.mark.parametrize(
    ("faces", "expected"), [((0,), 581.462), ((0, 2), 1080.208), ((0, 1, 2, 3), 13787.385)]
)
def test_braced_faces_gain_together_what_single_ones_do_not(faces, expected):
    box, braced = check_frame("B"), check_frame("C")
    thin = braced.rigidity[braced.groups.index("b")]
    pairs = [face(k, a) for k in range(1, 9) for a in faces]
    more = with_members(box, pairs, "ring")
    more.rigidity[len(box.members) :] = thin
    assert stiffness(more) == pytest.approx(expected, abs=5.1e-4)


def test_the_best_members_to_add_to_c():
    frame = check_frame("C")
    base = stiffness(frame)
    for joints in ((31, 32), (0, 7)):
        gain = stiffness(with_members(frame, [joints], "b")) - base
        assert gain == pytest.approx(197.12, abs=5.1e-3)


def test_what_members_of_c_are_worth():
    frame = check_frame("C")
    base = stiffness(frame)
    loss = base - stiffness(without(frame, pair(16, 19)))
    assert loss == pytest.approx(4.4572, abs=5.1e-5)
    loss = base - stiffness(without(frame, pair(28, 32)))
    assert loss == pytest.approx(5531.99, abs=5.1e-3)


def braces(group: str) -> bool:
    return group in "brtl"


def straight(k: int, a: int) -> tuple[int, int]:
    return 4 * (k - 1) + a, 4 * k + (a + 1) % 4


def test_diagonals_all_the_same_way_are_softer():
    frame = check_frame("C")
    model = frame.rigidity[frame.groups.index("b")]
    bare = without(frame, lambda group, i, j: braces(group))
    same = with_members(bare, [straight(k, a) for k in range(1, 9) for a in range(4)], "ring")
    same.rigidity[len(bare.members) :] = model
    assert stiffness(same) == pytest.approx(9529.39, abs=5.1e-3)


def test_both_diagonals_in_every_panel():
    frame = check_frame("C")
    missing = []
    for k in range(1, 9):
        for a in range(4):
            near, far = a, (a + 1) % 4
            crossed = {(4 * (k - 1) + near, 4 * k + far), (4 * (k - 1) + far, 4 * k + near)}
            missing += list(crossed - {face(k, a)})
    both = with_members(frame, missing, "b")
    assert stiffness(both) == pytest.approx(24438.1, abs=0.051)


def test_open_end_rings_cost_most_of_the_stiffness():
    frame = without(check_frame("C"), lambda group, i, j: group == "end")
    assert stiffness(frame) == pytest.approx(2486.43, abs=5.1e-3)


def test_braced_inner_rings_bring_almost_nothing():
    frame = with_members(check_frame("C"), [(4 * k, 4 * k + 2) for k in range(1, 8)], "end")
    assert stiffness(frame) == pytest.approx(13935.0, abs=0.051)


def test_one_face_left_open():
    frame = without(check_frame("C"), lambda group, i, j: group == "r")
    assert stiffness(frame) == pytest.approx(1881.57, abs=5.1e-3)


@pytest.mark.parametrize(
    ("bays", "expected", "mass"),
    [(2, 5988, 30.3), (3, 9470, 33.5), (4, 12460, 36.8), (5, 13023, 40.4), (6, 14219, 44.0),
     (8, 13787, 51.5), (10, 12774, 59.2), (12, 11728, 66.9)],
)  # fmt: skip
def test_more_bays_are_not_always_stiffer(bays, expected, mass):
    skeleton, batch = frames.frame_c(bays)
    held = np.zeros((len(skeleton.joints), 6), dtype=bool)
    held[tuple(frames.held(skeleton).T)] = True
    frame = frame_of(batch, held, ("twist",), np.zeros((1, *held.shape)))
    frame = replace(frame, xyz=frame.xyz * np.array([2.4 / (0.3 * bays), 1, 1]))
    frame = replace(frame, loads=twist_load(frame, frames.corners(skeleton))[None])
    assert stiffness(frame) == pytest.approx(expected, abs=0.51)
    assert frame.mass == pytest.approx(mass, abs=0.051)


# ---- flexible joints --------------------------------------------------------------------------

FIXITY = [0.95, 0.9, 0.8, 0.6, 0.4, 0.2, 0.0]
SOFTER: dict[str, list[float | None]] = {
    "B": [0.9419, 0.8886, 0.7939, 0.6386, 0.5093, 0.3759, None],
    "C": [0.9979, 0.9960, 0.9926, 0.9868, 0.9819, 0.9771, 0.9659],
}


def with_fixity(frame: Frame, r: float) -> Frame:
    """Every end with a spring s = (3EI/L) r/(1 - r) in bending; torsion as before."""
    ends = np.zeros_like(frame.ends)
    for column, ei in ((slice(2, 4), 1), (slice(4, 6), 2)):
        own = frame.lengths / (3 * frame.rigidity[:, ei])
        ends[:, column] = ((1 - r) / r * own if r > 0 else np.full(len(own), PINNED))[:, None]
    return replace(frame, ends=ends)


@pytest.mark.parametrize(
    ("name", "r", "expected"),
    [(n, r, k) for n, row in SOFTER.items() for r, k in zip(FIXITY, row, strict=True) if k],
)
def test_flexible_joints_soften_by_the_known_amount(name, r, expected):
    frame = check_frame(name)
    got = stiffness(with_fixity(frame, r)) / stiffness(frame)
    assert got == pytest.approx(expected, abs=5.1e-5)


def test_the_open_box_with_pinned_ends_is_a_mechanism():
    with pytest.raises(LooseFrame, match="weld the pinned ends"):
        stiffness(with_fixity(check_frame("B"), 0.0))


# ---- load entry -------------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "expected"), [("B", 423.389), ("C", 14964.77)])
def test_wheel_loads_through_a_linkage(name, expected):
    # hub 0.35 m outside the frame: force at the low corner, couple F a/h on the upright there
    frame = check_frame(name)
    fl, fr, rl, rr = CORNERS[name]
    load = np.zeros_like(frame.loads[0])
    for left, right, sign in ((fl, fr, 1), (rl, rr, -1)):
        force = sign / 1.4
        for low, side in ((left, 1), (right, -1)):
            high = {33: 34, 32: 35, 1: 2, 0: 3}[low]
            load[low, Z] += side * force
            load[low, Y] += force * 0.35 / 0.5
            load[high, Y] -= force * 0.35 / 0.5
    moment = (np.cross(frame.xyz, load[:, :3]) + load[:, 3:]).sum(axis=0)
    assert np.abs(moment).max() < 1e-12
    got = stiffness(replace(frame, loads=load[None]))
    assert got == pytest.approx(expected, rel=1.2e-6)  # half the last digit given


# ---- vibration -----------------------------------------------------------------------------------


def loaded(frame: Frame) -> Frame:
    lumps = np.zeros(len(frame.joints))
    lumps[[12, 13, 20, 21, 4, 5]] = 20, 20, 35, 35, 15, 15
    return replace(frame, lumps=lumps)


@pytest.mark.parametrize(
    ("name", "expected"), [("B", [11.597, 28.798, 33.752]), ("C", [55.289, 105.002, 120.215])]
)
def test_frequencies_on_three_corners(name, expected):
    # settled with the classical mass matrix; the shapes with shear differ by up to 1.5e-4
    got = vibration.modes(check_frame(name), 3).frequency
    assert got == pytest.approx(expected, rel=1.5e-4)


@pytest.mark.parametrize(
    ("name", "masses", "mode", "frequency", "share"),
    [("B", False, 0, 32.9, 0.922), ("C", False, 1, 171.2, 0.801),
     ("B", True, 0, 16.0, 0.576), ("C", True, None, 89.4, 0.501)],
)  # fmt: skip
def test_the_first_twist_mode_is_the_one_that_gives_the_twist(name, masses, mode, frequency, share):
    # each mode adds (g·shape)²/omega² to the twist of the free frame; the lowest mode with a
    # share above 0.3 is the twist mode
    frame = check_frame(name, np.zeros_like(check_frame(name).held))
    frame = loaded(frame) if masses else frame
    found = vibration.modes(frame, 40)
    elastic = found.frequency > 1e-3
    assert elastic.sum() == 34
    omega = 2 * np.pi * found.frequency[elastic]
    twist = np.einsum("jk,mjk->m", frame.loads[0], found.shape[elastic]) ** 2 / omega**2
    got = twist * K[name] / PER_DEGREE
    first = int(np.flatnonzero(got > 0.3)[0])
    if mode is not None:
        assert first == mode
    assert found.frequency[elastic][first] == pytest.approx(frequency, abs=0.051)
    assert got[first] == pytest.approx(share, abs=6e-4)


@pytest.mark.parametrize("name", K)
def test_all_modes_together_give_the_static_twist(name):
    frame = check_frame(name, np.zeros_like(check_frame(name).held))
    found = vibration.modes(frame, 6 * len(frame.joints))
    omega = 2 * np.pi * found.frequency[6:]
    twist = np.einsum("jk,mjk->m", frame.loads[0], found.shape[6:]) ** 2 / omega**2
    assert PER_DEGREE / twist.sum() == pytest.approx(K[name], rel=1e-7)
