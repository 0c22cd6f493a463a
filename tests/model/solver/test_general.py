"""One frame, any supports and loads: what must hold for every frame there is.

The frames come from seeds (``random_frames``): 4 to 14 joints, unlike sections, too many
supports. Tolerances are those of the arithmetic: extended-precision residuals leave 1e-12 or
better of the largest value.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from model.errors import InputError
from model.frame.batch import PINNED
from model.solver import beam, general, vibration
from model.solver.structure import Frame, assemble, frame_of
from tests.model.solver import frames
from tests.model.solver.random_frames import random_frame

seeds = st.integers(0, 10**6)
few = settings(max_examples=25, deadline=None)


def work(frame: Frame) -> np.ndarray:
    """(cases,) load times displacement, twice the strain energy [J]."""
    return np.einsum("cjk,cjk->c", frame.loads, general.solve(frame).displacement)


def turned(frame: Frame, q: np.ndarray) -> Frame:
    """The frame turned by q, with every joint held fully or not at all before."""
    loads = np.concatenate([frame.loads[..., :3] @ q.T, frame.loads[..., 3:] @ q.T], axis=-1)
    return replace(frame, xyz=frame.xyz @ q.T, up=frame.up @ q.T, loads=loads)


# ---- balance and energy ----------------------------------------------------------------------


@few
@given(seeds)
def test_supports_balance_loads(seed):
    frame = random_frame(seed, pins=True)
    answer = general.solve(frame)
    total = frame.loads + answer.reaction
    force = total[..., :3].sum(axis=1)
    moment = (total[..., 3:] + np.cross(frame.xyz, total[..., :3])).sum(axis=1)
    largest = np.abs(answer.reaction).max()
    assert np.abs(force).max() < 1e-9 * largest
    assert np.abs(moment).max() < 1e-9 * largest
    assert answer.residual.max() < 1e-12


@few
@given(seeds)
def test_end_forces_balance_every_joint(seed):
    frame = random_frame(seed)
    answer = general.solve(frame)
    i, j = frame.members.T
    axes = beam.member_axes(frame.xyz[i], frame.xyz[j], frame.up)
    total = np.zeros_like(frame.loads)
    for end, joint in ((0, i), (1, j)):
        for part in (slice(0, 3), slice(3, 6)):
            vehicle = np.einsum("mab,cma->cmb", axes, answer.end_force[:, :, end, part])
            for c in range(len(frame.cases)):
                np.add.at(total[c, :, part], joint, vehicle[c])
    outside = frame.loads + answer.reaction
    assert np.abs(total - outside).max() < 1e-9 * np.abs(outside).max()


@few
@given(seeds)
def test_the_energy_of_the_members_is_half_the_work_of_the_loads(seed):
    frame = random_frame(seed, pins=True)
    flexible = 10 ** np.random.default_rng(seed).uniform(-8, -5, frame.ends.shape)
    frame = replace(frame, ends=np.where(frame.ends == 0, flexible, frame.ends))
    answer = general.solve(frame)
    stored = answer.energy.sum(axis=(1, 2))
    assert stored == pytest.approx(work(frame) / 2, rel=1e-11)
    assert (answer.energy >= 0).all()


@few
@given(seeds)
def test_held_directions_do_not_move_and_free_ones_have_no_reaction(seed):
    frame = random_frame(seed)
    answer = general.solve(frame)
    assert not answer.displacement[:, frame.held].any()
    assert not answer.reaction[:, ~frame.held].any()


# ---- laws ------------------------------------------------------------------------------------


@few
@given(seeds)
def test_rigid_motions_strain_nothing(seed):
    frame = random_frame(seed, pins=True)
    stiffness = assemble(frame, beam.member_stiffness(*frame.geometry()))
    for k in range(3):
        axis = np.eye(3)[k]
        slide = np.zeros((len(frame.joints), 6))
        slide[:, k] = 1
        turn = np.concatenate([np.cross(axis, frame.xyz), np.tile(axis, (len(slide), 1))], axis=1)
        for motion in (slide, turn):
            force = stiffness @ motion.ravel()
            assert np.abs(force).max() < 1e-13 * abs(stiffness).max()


@few
@given(seeds)
def test_a_force_at_a_moves_b_as_a_force_at_b_moves_a(seed):
    frame = random_frame(seed)
    rng = np.random.default_rng(seed)
    a, b = (tuple(v) for v in rng.choice(np.argwhere(np.invert(frame.held)), 2, replace=False))
    loads = np.zeros_like(frame.loads)
    loads[(0, *a)] = loads[(1, *b)] = 1.0
    moved = general.solve(replace(frame, loads=loads)).displacement
    assert moved[(0, *b)] == pytest.approx(
        moved[(1, *a)], rel=1e-11, abs=1e-13 * np.abs(moved).max()
    )


@few
@given(seeds, seeds)
def test_turning_the_vehicle_turns_the_answer(seed, other):
    frame = random_frame(seed)
    clamped = np.flatnonzero(frame.held.sum(axis=1) == 6)
    held = np.zeros_like(frame.held)
    held[clamped] = True
    frame = replace(frame, held=held)
    q = np.linalg.qr(np.random.default_rng(other).standard_normal((3, 3)))[0]
    q *= np.sign(np.linalg.det(q))
    answer, again = general.solve(frame), general.solve(turned(frame, q))
    for part in (slice(0, 3), slice(3, 6)):
        expected = answer.displacement[..., part] @ q.T
        difference = np.abs(again.displacement[..., part] - expected).max()
        assert difference < 1e-10 * np.abs(expected).max()
    difference = np.abs(again.end_force - answer.end_force).max()
    assert difference < 1e-10 * np.abs(answer.end_force).max()


@few
@given(seeds)
def test_the_mirrored_vehicle_gives_the_mirrored_answer(seed):
    frame = random_frame(seed)
    mirror = np.array([1, -1, 1, -1, 1, -1.0])
    other = replace(
        frame,
        xyz=frame.xyz * mirror[:3],
        up=frame.up * mirror[:3],
        loads=frame.loads * mirror,
    )
    expected = general.solve(frame).displacement * mirror
    got = general.solve(other).displacement
    assert np.abs(got - expected).max() < 1e-11 * np.abs(expected).max()


@few
@given(seeds)
def test_adding_a_member_never_softens(seed):
    frame = random_frame(seed)
    last = len(frame.members) - 1
    connected = len(frame.joints) - 1  # the first members reach every joint
    if last < connected:
        return
    fewer = replace(
        frame,
        member_names=frame.member_names[:last],
        members=frame.members[:last],
        groups=frame.groups[:last],
        up=frame.up[:last],
        rigidity=frame.rigidity[:last],
        ends=frame.ends[:last],
        line_mass=frame.line_mass[:last],
        rotary=frame.rotary[:last],
    )
    assert (work(frame) <= work(fewer) * (1 + 1e-12)).all()


@few
@given(seeds, st.floats(0.1, 10))
def test_stiffness_grows_with_the_modulus_and_with_the_scale(seed, s):
    frame = random_frame(seed)
    stiffer = replace(frame, rigidity=frame.rigidity * np.array([s, s, s, s, 1 / s, 1 / s]))
    assert work(stiffer) == pytest.approx(work(frame) / s, rel=1e-11)
    # every length times s: areas s², second moments s⁴; forces the same, moments times s
    areas = np.array([s**2, s**4, s**4, s**4, s**-2, s**-2])
    larger = replace(
        frame,
        xyz=frame.xyz * s,
        rigidity=frame.rigidity * areas,
        loads=frame.loads * np.array([1, 1, 1, s, s, s]),
    )
    assert work(larger) == pytest.approx(work(frame) / s, rel=1e-10)


def test_free_rotations_of_joints_are_left_out():
    # a pinned tetrahedron: no joint rotation is held by anything
    xyz = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1.0]])
    pairs = np.array([(0, 1), (1, 2), (2, 0), (0, 3), (1, 3), (2, 3)], dtype=np.int32)
    held = np.zeros((4, 6), dtype=bool)
    held[0, :3] = held[1, 1:3] = held[2, 2] = True
    loads = np.zeros((1, 4, 6))
    loads[0, 3, :3] = 1, 2, 3
    ends = np.tile([0, *[PINNED] * 5], (6, 1))
    rigidity = np.tile([1e7, 1e3, 1e3, 1e3, 0, 0], (6, 1))
    frame = Frame(
        tuple("abcd"), xyz, tuple("123456"), pairs, ("",) * 6,
        np.tile([0.3, 0.5, 0.7], (6, 1)), rigidity, ends, np.ones(6), np.ones(6, dtype=bool),
        held, np.zeros(4), ("push",), loads,
    )  # fmt: skip
    answer = general.solve(frame)
    assert not answer.displacement[0, :, 3:].any()
    # joint d by resolution: bar forces x: -> bd, y: -> cd, the rest ad
    bd, cd = -1 * np.sqrt(2), -2 * np.sqrt(2)
    tension = answer.end_force[0, :, 1, 0]
    assert tension[[4, 5, 3]] == pytest.approx([bd, cd, 3 + 1 + 2], rel=1e-12)


# ---- slender, stiff, large -------------------------------------------------------------------


def chain(pieces: int, length: float = 10.0) -> Frame:
    """A cantilever tube along x in many pieces, 1 N down and 1 N·m about x at its tip."""
    xyz = np.zeros((pieces + 1, 3))
    xyz[:, 0] = np.linspace(0, length, pieces + 1)
    held = np.zeros((pieces + 1, 6), dtype=bool)
    held[0] = True
    loads = np.zeros((1, pieces + 1, 6))
    loads[0, -1, 2:4] = -1, 1
    rigidity = np.array([2.45e7, 1744.3, 1744.3, 1341.8, 0, 0])
    return Frame(
        tuple(str(k) for k in range(pieces + 1)), xyz, tuple(str(k) for k in range(pieces)),
        np.stack([np.arange(pieces), np.arange(1, pieces + 1)], axis=1).astype(np.int32),
        ("",) * pieces, np.tile([0, 0, 1.0], (pieces, 1)), np.tile(rigidity, (pieces, 1)),
        np.zeros((pieces, 6)), np.ones(pieces), np.ones(pieces, dtype=bool), held,
        np.zeros(pieces + 1), ("tip",), loads,
    )  # fmt: skip


def test_a_cantilever_in_3000_pieces_keeps_ten_digits():
    tip = general.solve(chain(3000)).displacement[0, -1]
    assert tip[2] == pytest.approx(-(10.0**3) / (3 * 1744.3), rel=1e-10)
    assert tip[3] == pytest.approx(10 / 1341.8, rel=1e-10)


def test_without_extended_precision_fewer_digits_are_left(monkeypatch):
    frame = random_frame(5)
    best = general.solve(frame).displacement
    monkeypatch.setattr(general, "EXTENDED", np.float64)
    plain = general.solve(frame).displacement
    assert np.abs(plain - best).max() < 1e-9 * np.abs(best).max()
    tip = general.solve(chain(300)).displacement[0, -1]
    assert tip[2] == pytest.approx(-(10.0**3) / (3 * 1744.3), rel=1e-6)


def test_members_too_unlike_for_sixteen_digits_are_named():
    frame = random_frame(5)
    rigidity = frame.rigidity.copy()
    rigidity[0, :4] *= 1e25
    with pytest.raises(InputError, match=r"m0.*check the units"):
        general.solve(replace(frame, rigidity=rigidity))


def test_a_frame_of_3000_members_balances():
    skeleton, batch = frames.frame_c(250)
    held = np.zeros((len(skeleton.joints), 6), dtype=bool)
    held[tuple(frames.held(skeleton).T)] = True
    loads = np.zeros((1, len(skeleton.joints), 6))
    loads[0, 500:510, 2] = -100
    answer = general.solve(frame_of(batch, held, ("weight",), loads))
    assert len(answer.frame.members) > 3000
    assert answer.reaction[0, :, 2].sum() == pytest.approx(1000, rel=1e-9)


# ---- vibration -------------------------------------------------------------------------------


@settings(max_examples=10, deadline=None)
@given(seeds)
def test_mode_shapes_have_unit_modal_mass_and_do_not_share_energy(seed):
    frame = random_frame(seed, pins=True)
    found = vibration.modes(frame, 6)
    shape = found.shape.reshape(len(found.shape), -1)
    mass = vibration.mass_matrix(frame)
    stiffness = assemble(frame, beam.member_stiffness(*frame.geometry()))
    square = (2 * np.pi * found.frequency) ** 2
    assert shape @ mass @ shape.T == pytest.approx(np.eye(len(shape)), abs=1e-9)
    energy = shape @ stiffness @ shape.T
    assert np.abs(energy - np.diag(square)).max() < 1e-8 * square.max()


def test_the_sparse_and_the_dense_way_find_the_same_modes(monkeypatch):
    frame = random_frame(11)
    dense = vibration.modes(frame, 5).frequency
    monkeypatch.setattr(vibration, "DENSE", 5)
    assert vibration.modes(frame, 5).frequency == pytest.approx(dense, rel=1e-9)


def test_a_frame_without_supports_has_six_modes_at_rest():
    frame = random_frame(11)
    frame = replace(frame, held=np.zeros_like(frame.held))
    frequency = vibration.modes(frame, 8).frequency
    assert frequency[:6].max() < 1e-6
    assert frequency[6] > 1


def test_a_frame_without_mass_has_no_frequencies():
    frame = random_frame(11)
    frame = replace(frame, line_mass=0 * frame.line_mass, lumps=0 * frame.lumps)
    with pytest.raises(InputError, match="density"):
        vibration.modes(frame, 1)


def test_a_point_mass_on_a_light_spring_is_the_textbook_oscillator():
    frame = chain(1, 0.5)
    frame = replace(frame, line_mass=np.zeros(1), lumps=np.array([0, 2.0]))
    k = 3 * 1744.3 / 0.5**3
    frequency = vibration.modes(frame, 6).frequency
    expected = [np.sqrt(k / 2) / (2 * np.pi)] * 2 + [np.sqrt(2.45e7 / 0.5 / 2) / (2 * np.pi)]
    assert frequency == pytest.approx(expected, rel=1e-10)
