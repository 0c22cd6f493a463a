"""Twist and bending stiffness of whole frames.

Check values: an independent prototype (dense assembly in numpy, Euler-Bernoulli/Timoshenko member
of Przemieniecki 1968, Cowper's 1966 shear coefficient), agreeing with OpenSees'
ElasticTimoshenkoBeam to twelve digits on the stiffness matrix. Half the last digit printed.
"""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from model.errors import LooseFrame
from model.frame.layout import Layout, with_hoop, with_station, with_tube
from model.frame.variants import one
from model.results.detail import examine
from model.results.twist import PER_DEGREE, answers
from model.solver.cases import twist_and_bending
from tests.model.frame.layouts import box, ladder, random_layout


def test_ladder_check_frame() -> None:
    found = examine(ladder())
    assert found.twist == pytest.approx(973.1095, abs=5e-5)
    assert found.mass == pytest.approx(60.288, abs=5e-4)
    assert found.axial_share == pytest.approx(0.0, abs=1e-12)
    assert found.profile.bay_stiffness == pytest.approx([3918, 3867, 3867, 3918], abs=0.5)
    assert 1 / (1 / found.profile.bay_stiffness).sum() == pytest.approx(973.11, abs=5e-3)


def test_open_box_check_frame() -> None:
    found = examine(box())
    assert found.twist == pytest.approx(421.6251, abs=5e-5)
    assert found.bend == pytest.approx(566.272, abs=5e-4)
    assert found.mass == pytest.approx(36.1055, abs=5e-5)
    shares = found.answers.energy[0].sum(axis=0)
    shares = shares / shares.sum()
    assert shares[[0, 2, 1, 3]] == pytest.approx([0.0044, 0.3711, 0.6125, 0.0120], abs=5e-5)


def test_crossed_box_check_frame() -> None:
    found = examine(box(bracing="cross"))
    assert found.twist == pytest.approx(24438.1, abs=0.05)
    assert found.mass == pytest.approx(66.92, abs=5e-3)


def test_a_braced_box_pinned_everywhere_stands_as_a_truss() -> None:
    """Independent prototype: 0.9659 of the welded frame for the check frame's bracing."""
    welded = box(bracing="single")
    pinned = welded
    for group in welded.tubes:
        pinned = with_tube(pinned, group, rotation=0.0)
    found = examine(pinned)
    assert found.axial_share == pytest.approx(1.0, abs=1e-9)
    assert found.twist / examine(welded).twist == pytest.approx(0.9659, abs=2e-3)


def test_wheel_linkage_check_frame() -> None:
    """Couple over a hub track of 1.4 m through spring mounts and upper and lower pickups."""
    layout = Layout(**{**box().__dict__, "entry": "linkage"})
    assert examine(layout).twist == pytest.approx(423.389, abs=5e-4)


def test_twist_energy_is_half_the_compliance() -> None:
    found = examine(box(bracing="single"))
    assert found.answers.energy.sum() == pytest.approx(PER_DEGREE / found.twist / 2, rel=1e-10)
    assert found.energy.sum() == pytest.approx(1.0, rel=1e-12)


def test_every_load_set_balances_by_itself() -> None:
    rng = np.random.default_rng(1)
    for _ in range(30):
        batch = one(random_layout(rng))
        loads = twist_and_bending(batch)
        place = batch.xyz[0, loads.joint]
        for case in loads.value[0]:
            force = case[:, None] * np.eye(3)[loads.direction]
            assert force.sum(axis=0) == pytest.approx([0, 0, 0], abs=1e-12)
            assert np.cross(place, force).sum(axis=0) == pytest.approx([0, 0, 0], abs=1e-12)


def test_a_ladder_with_pinned_cross_members_is_loose_and_says_where() -> None:
    """Its rails roll freely about themselves; welded, or only softly welded, it stands."""
    with pytest.raises(LooseFrame, match=r"joint .* moves freely in turning about x"):
        examine(with_tube(ladder(), "cross members", rotation=0.0))
    soft = examine(with_tube(ladder(), "cross members", rotation=1e4)).twist
    assert 0 < soft < examine(ladder()).twist


@given(st.integers(0, 10_000), st.floats(0.5, 3.0))
def test_lengths_times_s_give_stiffness_times_s_cubed(seed: int, s: float) -> None:
    """All lengths, tube sizes included, times s: K of a homogeneous frame grows as s cubed."""
    layout = random_layout(np.random.default_rng(seed))
    big = Layout(
        **{
            **layout.__dict__,
            "wheelbase": layout.wheelbase * s,
            "track_front": layout.track_front * s,
            "track_rear": layout.track_rear * s,
        }
    )
    for station in layout.stations:
        names = ("width_low", "width_high", "height_low", "height_high", "outrigger")
        big = with_station(big, station.name, **{n: getattr(station, n) * s for n in names})
    for hoop in layout.hoops:
        shape = {n: getattr(hoop, n) * s for n in ("height", "width", "lean")}
        big = with_hoop(big, hoop.name, **shape)
    for group, tube in layout.tubes.items():
        big = with_tube(big, group, sizes={k: v * s for k, v in tube.sizes.items()})
    small_k, big_k = (answers(one(frame), 1).twist[0] for frame in (layout, big))
    assert big_k == pytest.approx(small_k * s**3, rel=1e-7)


@given(st.integers(0, 10_000))
def test_thicker_walls_never_soften(seed: int) -> None:
    layout = random_layout(np.random.default_rng(seed))
    before = answers(one(layout), 1).twist[0]
    for group, tube in layout.tubes.items():
        sizes = {**tube.sizes, "wall": tube.sizes["wall"] * 1.2}
        after = answers(one(with_tube(layout, group, sizes=sizes)), 1).twist[0]
        assert after >= before * (1 - 1e-9)


@given(st.integers(0, 10_000))
def test_a_mirrored_frame_is_as_stiff(seed: int) -> None:
    """Single diagonals turned over left to right: the same frame seen from behind."""
    batch = one(random_layout(np.random.default_rng(seed)))
    skeleton = replace(
        batch.skeleton,
        up=batch.skeleton.up * [1, -1, 1],
        front=batch.skeleton.front[::-1],
        rear=batch.skeleton.rear[::-1],
    )
    turned = replace(batch, skeleton=skeleton, xyz=batch.xyz * [1, -1, 1])
    assert answers(turned, 1).twist[0] == pytest.approx(answers(batch, 1).twist[0], rel=1e-9)
