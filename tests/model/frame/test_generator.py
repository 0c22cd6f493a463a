"""The generator builds the joints and members that the arrangement describes."""

from dataclasses import replace

import numpy as np
import pytest

from model.errors import InputError
from model.frame.layout import Hoop, Layout, Span, Station, with_span, with_station, with_tube
from model.frame.variants import Choice, Column, brace_paths, one, variants
from model.results.twist import answers
from tests.model.frame.layouts import STEEL, box, ladder, random_layout, round_tube

LADDER_MASS = 60.288
"""Mass [kg] of a ladder 3.0 x 0.8 m, rails 50 x 100 x 3, five cross members 50 x 60 x 3, density
7850: 7850 (2 x 3.0 x 864e-6 + 5 x 0.8 x 624e-6) from outside minus inside rectangle."""


def test_a_ladder_of_four_bays_has_ten_joints_and_thirteen_members() -> None:
    batch = one(ladder())
    assert len(batch.skeleton.joints) == 10
    assert batch.present.sum() == 13
    mass = (batch.lengths() * batch.line_mass[:, batch.skeleton.group]).sum()
    assert mass == pytest.approx(LADDER_MASS, abs=5e-4)


@pytest.mark.parametrize(
    ("bracing", "members"), [("open", 70), ("single", 102), ("parallel", 102), ("cross", 134)]
)
def test_bracing_adds_one_or_two_diagonals_a_panel(bracing: str, members: int) -> None:
    batch = one(box(bracing=bracing))
    assert len(batch.skeleton.joints) == 36
    assert batch.present.sum() == members


def test_single_bracing_turns_over_from_bay_to_bay_and_parallel_does_not() -> None:
    def rises(bracing: str) -> list[bool]:
        batch = one(box(bracing=bracing))
        names = batch.skeleton.member_names
        left = [m for m, name in enumerate(names) if " left " in name and "brace" in name]
        ends = batch.xyz[0, batch.skeleton.members[left]]
        run = ends[:, 1] - ends[:, 0]
        return [bool(dx * dz > 0) for dx, dz in zip(run[:, 0], run[:, 2], strict=True)]

    assert rises("parallel") == [True] * 8
    assert rises("single") == [True, False] * 4


def test_a_clear_face_has_no_members_between_its_stations() -> None:
    layout = with_span(box(), "middle", clear=("top",))
    names = one(layout).skeleton.member_names
    assert not any("middle" in n and "high cross" in n for n in names)
    assert "front high cross member" in names


def test_every_joint_and_member_of_a_symmetric_frame_has_a_mirror_partner() -> None:
    skeleton = one(box(bracing="cross", ring="cross")).skeleton
    assert np.array_equal(
        skeleton.mirror_joint[skeleton.mirror_joint], np.arange(len(skeleton.joints))
    )
    assert (skeleton.mirror_member >= 0).all()


def test_joint_positions_are_mirror_images() -> None:
    rng = np.random.default_rng(3)
    for _ in range(20):
        batch = one(random_layout(rng, symmetric=True))
        flipped = batch.xyz[0, batch.skeleton.mirror_joint] * [1, -1, 1]
        assert np.array_equal(flipped, batch.xyz[0])


def test_no_two_members_join_the_same_joints() -> None:
    rng = np.random.default_rng(4)
    for _ in range(50):
        skeleton = one(random_layout(rng)).skeleton
        pairs = {frozenset(map(int, pair)) for pair in skeleton.members}
        assert len(pairs) == len(skeleton.members)
        assert len(set(skeleton.member_names)) == len(skeleton.members)


def test_variants_equal_the_layouts_built_one_by_one() -> None:
    base = box(bays=3)
    patterns = ("open", "single", "cross")
    index = np.array([0, 1, 2, 1, 0, 2])
    width = np.linspace(0.6, 0.8, 6)
    bays = np.array([2, 3, 2, 4, 3, 2])
    columns: dict[str, Column] = {
        "span.middle.floor": Choice(patterns, index),
        "span.middle.bays": bays,
        "station.rear.width_low": width,
        "tube.rails.wall": width / 400,
        "wheelbase": width * 3,
    }
    batches, refused = variants(base, columns, 6)
    assert refused == []
    assert sorted(int(r) for b in batches for r in b.rows) == list(range(6))
    for batch in batches:
        for k, row in enumerate(batch.rows):
            layout = with_span(base, "middle", floor=patterns[index[row]], bays=int(bays[row]))
            layout = with_station(layout, "rear", width_low=float(width[row]))
            sizes = {**layout.tubes["rails"].sizes, "wall": float(width[row] / 400)}
            layout = with_tube(layout, "rails", sizes=sizes)
            changed = {**layout.__dict__, "wheelbase": float(width[row] * 3)}
            alone = one(Layout(**changed))
            got = batch.frame(k)
            assert np.array_equal(got.xyz, alone.xyz)
            names = np.array(got.skeleton.member_names)[got.present[0]]
            assert sorted(names) == sorted(np.array(alone.skeleton.member_names)[alone.present[0]])
            rails = got.skeleton.groups.index("rails")
            assert np.array_equal(
                got.rigidity[0, rails],
                alone.rigidity[0, alone.skeleton.groups.index("rails")],
            )


@pytest.mark.parametrize(
    ("path", "value", "field"),
    [
        ("station.rear.width_low", -0.1, "station.rear.width_low_mm"),
        ("station.rear.height_high", 0.01, "station.rear.height_high_mm"),
        ("station.front.width_high", np.nan, "station.front.width_high_mm"),
        ("tube.rails.wall", 0.016, "tube.rails.wall_mm"),
        ("tube.rails.outside", np.inf, "tube.rails.outside_mm"),
        ("span.middle.bays", 0, "span.middle.bays"),
        ("wheelbase", 0.0, "wheelbase_mm"),
    ],
)
def test_an_impossible_dimension_is_refused_by_name_and_its_neighbours_are_built(
    path: str, value: float, field: str
) -> None:
    base = box()
    good = {"span.middle.bays": 8.0, "wheelbase": 2.4, "tube.rails.wall": 0.002,
            "tube.rails.outside": 0.032}.get(path, 0.7)  # fmt: skip
    batches, refused = variants(base, {path: np.array([good, value, good])}, 3)
    assert [r.row for r in refused] == [1]
    assert refused[0].field == field
    assert refused[0].remedy
    assert [int(r) for b in batches for r in b.rows] == [0, 2]


@pytest.mark.parametrize(
    ("change", "field"),
    [
        ({"spans": ()}, "span"),
        ({"front_axle": "nowhere"}, "station"),
        ({"entry": "by magic"}, "entry"),
        ({"front_mount": "middle"}, "front_mount"),
    ],
)
def test_a_contradictory_arrangement_is_refused_by_name(
    change: dict[str, object], field: str
) -> None:
    with pytest.raises(InputError) as refused:
        Layout(**{**box().__dict__, **change})
    assert refused.value.field == field
    assert refused.value.remedy


def test_a_brace_across_a_face_that_must_stay_clear_is_refused() -> None:
    layout = with_span(box(), "middle", clear=("top",))
    with pytest.raises(InputError, match=r"span.middle.top = cross: set it open"):
        with_span(layout, "middle", top="cross")
    with pytest.raises(InputError, match=r"span.middle.top = cross: set it open"):
        variants(
            layout,
            {"span.middle.top": Choice(("open", "cross"), np.array([0, 1]))},
            2,
        )


def test_a_ring_that_must_stay_clear_takes_no_brace_and_is_offered_none() -> None:
    layout = with_station(box(ring="open"), "rear", clear=True)
    with pytest.raises(InputError, match=r"station.rear.ring = single: set it open"):
        with_station(layout, "rear", ring="single")
    assert "station.front.ring" in brace_paths(layout)
    assert "station.rear.ring" not in brace_paths(layout)


def test_a_ladder_has_no_ring_to_brace_and_no_linkage() -> None:
    with pytest.raises(InputError, match="no upper rail"):
        with_station(ladder(), "front", ring="single")
    with pytest.raises(InputError, match="no upper rail"):
        Layout(**{**ladder().__dict__, "entry": "linkage"})


def test_upper_rails_over_part_of_the_length_leave_the_rest_a_ladder() -> None:
    layout = Layout(
        name="ladder with upper structure",
        wheelbase=2.0,
        track_front=1.2,
        track_rear=1.2,
        stations=(
            Station("front", 0, 0.6, 0.3),
            Station("dash", 0.4, 0.6, 0.3, 0.6, 0.8, ring="single"),
            Station("rear", 1, 0.6, 0.3, 0.6, 0.8, ring="single"),
        ),
        spans=(Span("nose", 2, upper=False), Span("cabin", 2, left="single", right="single")),
        tubes=box().tubes,
        front_axle="front",
        rear_axle="rear",
    )
    batch = one(layout)
    joined = np.unique(batch.skeleton.members)
    assert len(batch.skeleton.joints) == 20
    assert len(joined) == 16


@pytest.mark.parametrize(
    ("face", "bracing", "joints", "members"),
    [
        # two half-diagonals a bay; the member they meet at becomes two
        ("left", "K", 4, 4 * 2 + 4),
        ("left", "chevron", 4, 4 * 2 + 4),
        ("floor", "K", 4, 4 * 2 + 4),
    ],
)
def test_braces_that_meet_in_the_middle_of_a_member_add_a_joint_there(
    face: str, bracing: str, joints: int, members: int
) -> None:
    plain, met = one(box(bays=4)), one(with_span(box(bays=4), "middle", **{face: bracing}))
    assert len(met.skeleton.joints) - len(plain.skeleton.joints) == joints
    assert met.present.sum() - plain.present.sum() == members
    halves = [k for k, name in enumerate(met.skeleton.member_names) if "half" in name]
    assert np.ptp(met.lengths()[0, halves].reshape(-1, 2), axis=1) == pytest.approx(0, abs=1e-12)


def test_a_split_member_without_braces_changes_nothing() -> None:
    """K braces of next to no stiffness: the frame is as stiff as without them."""
    thin = {**box().tubes, "braces": round_tube(20, 1, replace(STEEL, E=1e3, G=1e3))}
    bare = Layout(**{**box().__dict__, "tubes": thin})
    braced = with_span(bare, "middle", left="K", right="K")
    assert answers(one(braced), 1).twist[0] == pytest.approx(
        answers(one(bare), 1).twist[0], rel=1e-6
    )


def test_meeting_braces_without_a_member_to_meet_at_are_refused() -> None:
    layout = with_span(box(), "middle", clear=("right",), left="K")
    assert one(layout).present.any()
    with pytest.raises(InputError, match=r"span.middle.floor = K: keep the member"):
        one(with_span(with_station(box(), "rear", bottom=False), "middle", floor="K"))


def test_a_hoop_stands_on_the_upper_rails_with_its_stays() -> None:
    hoop = Hoop("main hoop", "front", 0.9, 0.4, 0.1, "rear", "cross")
    tubes = {**box().tubes, "hoop": round_tube(40, 2)}
    batch = one(Layout(**{**box().__dict__, "tubes": tubes, "hoops": (hoop,)}))
    names = batch.skeleton.joints
    top = batch.xyz[0, names.index("main hoop top right")]
    assert top == pytest.approx([0.1, 0.2, 0.9])
    assert sum("main hoop" in name for name in batch.skeleton.member_names) == 7
    left, right = names.index("main hoop top left"), names.index("main hoop top right")
    assert batch.skeleton.mirror_joint[left] == right


def test_a_sweep_over_meeting_and_flat_bracings_equals_the_layouts_one_by_one() -> None:
    patterns = ("open", "single", "K", "chevron", "cross")
    index = np.arange(5)
    batches, refused = variants(box(bays=4), {"span.middle.sides": Choice(patterns, index)}, 5)
    assert refused == []
    found = np.empty(5)
    for batch in batches:
        found[batch.rows] = answers(batch, 1).twist
    alone = [
        answers(one(with_span(box(bays=4), "middle", left=p, right=p)), 1).twist[0]
        for p in patterns
    ]
    assert found == pytest.approx(alone, rel=1e-9)


def test_random_layouts_build_and_solve_or_are_refused_by_name() -> None:
    rng = np.random.default_rng(11)
    solved, refused = 0, []
    for _ in range(400):
        try:
            batch = one(random_layout(rng))
        except InputError as fault:
            refused.append(fault.remedy)
            continue
        found = answers(batch, 1)
        assert np.isfinite(found.twist[0]) or found.status[0]
        solved += bool(np.isfinite(found.twist[0]))
    assert all(refused)
    assert solved > 300
