"""Frames that cannot stand, each next to a twin that can.

A mechanism must be refused with the joint, the direction and what would hold it; the stable
twin, which differs by one support, brace or weld, must solve.
"""

from __future__ import annotations

import copy

import numpy as np
import pytest

from model.errors import InputError, LooseFrame
from model.solver.frame_file import solve_file

ALL = ["x", "y", "z", "rx", "ry", "rz"]
PIN, WELD = ["pinned", "pinned"], ["rigid", "rigid"]
SQUARE = {"A": [0, 0, 0], "B": [1, 0, 0], "C": [1, 1, 0], "D": [0, 1, 0]}


def frame(nodes, members, supports, loads):
    """A frame file; members as (from, to) or (from, to, ends)."""
    return {
        "nodes": nodes,
        "materials": {"steel": {"E": 205e9, "G": 80e9, "density": 7850}},
        "sections": {"t": {"A": 1.2e-4, "Iy": 8.5e-9, "Iz": 8.5e-9, "J": 1.7e-8}},
        "members": [
            {
                "name": f"{a}{b}",
                "from": a,
                "to": b,
                "section": "t",
                "material": "steel",
                "ends": ends[0] if ends else WELD,
            }
            for a, b, *ends in members
        ],
        "supports": supports,
        "cases": {"c": {"node_loads": loads}},
    }


def down(joint):
    return {joint: [0, 0, -100, 0, 0, 0]}


def stands(data):
    answer = solve_file(data)["cases"]["c"]
    size = np.ptp(list(data["nodes"].values()), axis=0).max()
    moved = np.abs(np.array(list(answer["displacements"].values()))[:, :3]).max()
    assert moved < size  # loads are 100 N: anything larger would be finite nonsense
    return answer


def falls(data, joint, direction, remedy):
    with pytest.raises(LooseFrame) as caught:
        solve_file(data)
    assert caught.value.joint in joint
    assert caught.value.direction in direction
    assert remedy in caught.value.remedy


# ---- supports --------------------------------------------------------------------------------


def test_a_frame_without_supports_is_refused_in_its_own_words():
    data = frame({"A": [0, 0, 0], "B": [1, 0, 0]}, ["AB"], {}, down("B"))
    with pytest.raises(InputError, match="supports = none: hold at least six directions"):
        solve_file(data)
    data["supports"] = {"A": ALL}
    stands(data)


@pytest.mark.parametrize("missing", ALL)
def test_a_cantilever_that_lacks_one_direction_moves_in_it(missing):
    data = frame(
        {"A": [0, 0, 0], "B": [1, 0, 0]}, ["AB"], {"A": [d for d in ALL if d != missing]}, {}
    )
    data["cases"]["c"]["node_loads"] = down("B")
    # turning about y or z moves the tip sideways more than it turns the root
    expected = {"ry": ["z"], "rz": ["y"]}.get(missing, [missing])
    falls(data, "AB", expected, "the supports let the whole frame")
    data["supports"]["A"] = ALL
    stands(data)


def test_three_supports_that_meet_on_a_line_let_the_frame_turn():
    frame_ = frame(
        SQUARE, ["AB", "BC", "CD", "DA"],
        {"A": ["x", "y", "z"], "B": ["y", "z"]}, down("C"),
    )  # fmt: skip
    falls(frame_, "CD", ["z"], "let the whole frame turn; hold z")
    frame_["supports"]["D"] = ["z"]
    stands(frame_)


def test_a_simple_beam_spins_about_its_own_axis_unless_held():
    nodes = {"A": [0, 0, 0], "M": [0.5, 0, 0], "B": [1, 0, 0]}
    data = frame(nodes, ["AM", "MB"], {"A": ["x", "y", "z"], "B": ["y", "z"]}, down("M"))
    falls(data, "AMB", ["rx"], "hold rx")
    data["supports"]["A"].append("rx")
    answer = stands(data)
    deflection = 100 * 1.0**3 / (48 * 205e9 * 8.5e-9)
    assert answer["displacements"]["M"][2] == pytest.approx(-deflection, rel=1e-11)


def test_too_many_supports_are_fine():
    data = frame(SQUARE, ["AB", "BC", "CD", "DA"], dict.fromkeys("ABD", ALL), down("C"))
    stands(data)


def test_everything_held_moves_nothing_and_takes_the_loads_back():
    data = frame({"A": [0, 0, 0], "B": [1, 0, 0]}, ["AB"], {"A": ALL, "B": ALL}, down("B"))
    assert stands(data)["reactions"]["B"] == [0, 0, 100, 0, 0, 0]


# ---- parts -----------------------------------------------------------------------------------


def test_a_part_that_hangs_on_nothing_is_named():
    data = frame(SQUARE, ["AB", "CD"], {"A": ALL}, down("B"))
    falls(data, "CD", ["every direction"], "nothing joins joints C, D to a support")
    data["members"] += frame(SQUARE, ["BC"], {}, {})["members"]
    stands(data)


# ---- pins ------------------------------------------------------------------------------------


def test_a_pinned_square_racks_and_a_diagonal_holds_it():
    supports = {"A": ["x", "y", "z"], "B": ["y", "z"], "C": ["z"], "D": ["z"]}
    sides = [("A", "B", PIN), ("B", "C", PIN), ("C", "D", PIN), ("D", "A", PIN)]
    push = {"C": [100, 0, 0, 0, 0, 0]}
    falls(frame(SQUARE, sides, supports, push), "CD", ["x"], "add a brace from")
    braced = stands(frame(SQUARE, [*sides, ("A", "C", PIN)], supports, push))
    # joint C by resolution: the diagonal carries 100·√2, CB pushes back 100
    assert braced["end_forces"]["AC"]["to"][0] == pytest.approx(100 * np.sqrt(2), rel=1e-12)
    assert braced["end_forces"]["BC"]["to"][0] == pytest.approx(-100, rel=1e-12)
    welded = [*sides[:3], ("D", "A", WELD)]
    falls(frame(SQUARE, welded, supports, push), "CD", ["x"], "weld the pinned ends")


def test_the_remedy_that_is_given_works():
    supports = {"A": ["x", "y", "z"], "B": ["y", "z"], "C": ["z"], "D": ["z"]}
    sides = [("A", "B", PIN), ("B", "C", PIN), ("C", "D", PIN), ("D", "A", PIN)]
    data = frame(SQUARE, sides, supports, {"C": [100, 0, 0, 0, 0, 0]})
    with pytest.raises(LooseFrame) as caught:
        solve_file(data)
    words = caught.value.remedy.split("add a brace from ")[1].split()
    start, end = words[0], words[2]
    stands(frame(SQUARE, [*sides, (start, end, PIN)], supports, {}))
    held = copy.deepcopy(data)
    held["supports"][caught.value.joint].append(caught.value.direction)
    stands(held)


def test_three_hinges_on_a_line_are_a_mechanism_and_two_are_a_beam():
    nodes = {"A": [0, 0, 0], "M": [0.5, 0, 0], "B": [1, 0, 0]}
    supports = {"A": ["x", "y", "z"], "B": ["x", "y", "z"]}
    pinned = frame(nodes, [("A", "M", PIN), ("M", "B", PIN)], supports, down("M"))
    falls(pinned, "M", ["y", "z"], "weld the pinned ends of AM, MB")
    half = [("A", "M", ["pinned", "rigid"]), ("M", "B", ["rigid", "pinned"])]
    stands(frame(nodes, half, supports, down("M")))


@pytest.mark.parametrize("off", [1e-12, 1e-9, 1e-7, 3e-6])
def test_a_hinge_nearly_on_the_line_is_one_as_well(off):
    nodes = {"A": [0, 0, 0], "M": [0.5, off, 0], "B": [1, 0, 0]}
    supports = {"A": ["x", "y", "z"], "B": ["x", "y", "z"], "M": ["z"]}
    data = frame(nodes, [("A", "M", PIN), ("M", "B", PIN)], supports, {"M": [0, 1, 0, 0, 0, 0]})
    falls(data, "M", ["y"], "weld the pinned ends")


def test_a_shallow_truss_stands():
    nodes = {"A": [0, 0, 0], "M": [0.5, 0.02, 0], "B": [1, 0, 0]}
    supports = {"A": ["x", "y", "z"], "B": ["x", "y", "z"], "M": ["z"]}
    data = frame(nodes, [("A", "M", PIN), ("M", "B", PIN)], supports, {"M": [0, 1, 0, 0, 0, 0]})
    tension = stands(data)["end_forces"]["AM"]["to"][0]
    assert tension == pytest.approx(np.hypot(0.5, 0.02) / 0.02 / 2, rel=1e-9)


def test_a_tetrahedron_of_pinned_bars_stands_until_one_bar_goes():
    nodes = {"a": [0, 0, 0], "b": [1, 0, 0], "c": [0, 1, 0], "d": [0, 0, 1]}
    bars = [(p, q, PIN) for p, q in ("ab", "bc", "ca", "ad", "bd", "cd")]
    supports = {"a": ["x", "y", "z"], "b": ["y", "z"], "c": ["z"]}
    loads = {"d": [10, 20, 30, 0, 0, 0]}
    stands(frame(nodes, bars, supports, loads))
    falls(frame(nodes, bars[:-1], supports, loads), "d", ["y", "z"], "add a brace from d to c")


def test_a_cantilever_pinned_at_its_root_falls():
    nodes = {"A": [0, 0, 0], "B": [1, 0, 0]}
    fallen = frame(nodes, [("A", "B", ["pinned", "rigid"])], {"A": ALL}, down("B"))
    falls(fallen, "B", ["y", "z"], "weld the pinned ends of AB")
    stands(frame(nodes, [("A", "B", ["rigid", "pinned"])], {"A": ALL}, down("B")))


def test_a_soft_spring_is_no_mechanism():
    data = frame({"A": [0, 0, 0], "B": [1, 0, 0]}, [("A", "B", [500.0, "rigid"])], {"A": ALL}, {})
    data["cases"]["c"]["node_loads"] = {"B": [0, 0, -1, 0, 0, 0]}
    moved = stands(data)["displacements"]["B"][2]
    assert moved == pytest.approx(-(1 / 500 + 1 / (3 * 205e9 * 8.5e-9)), rel=1e-11)


def test_a_pinned_brace_made_of_pieces_may_spin():
    nodes = {"A": [0, 0, 0], "P": [0.3, 0.1, 0], "Q": [0.6, 0.2, 0], "B": [0.9, 0.3, 0]}
    pieces = [("A", "P", ["pinned", "rigid"]), ("P", "Q"), ("Q", "B", ["rigid", "pinned"])]
    supports = {"A": ["x", "y", "z"], "B": ["x", "y", "z"]}
    data = frame(nodes, pieces, supports, down("Q"))
    answer = stands(data)
    # three-point bending at two thirds of the span: P a b / L
    length = np.hypot(0.9, 0.3)
    moment = 100 * (2 / 3) * (1 / 3) * length
    assert np.abs(answer["end_forces"]["QB"]["from"][4]) == pytest.approx(moment, rel=1e-9)
    assert np.abs(answer["end_forces"]["PQ"]["to"][3]) < 1e-9 * moment
    assert solve_file(data, modes=1)["frequencies_Hz"][0] > 1


def test_a_torque_on_a_brace_that_may_spin_is_refused():
    nodes = {"A": [0, 0, 0], "P": [0.3, 0, 0], "Q": [0.6, 0, 0], "B": [0.9, 0, 0]}
    pieces = [("A", "P", ["pinned", "rigid"]), ("P", "Q"), ("Q", "B", ["rigid", "pinned"])]
    supports = {"A": ["x", "y", "z"], "B": ["x", "y", "z"]}
    data = frame(nodes, pieces, supports, {"Q": [0, 0, 0, 5, 0, 0]})
    falls(data, "PQ", ["rx"], "puts a moment where every member end is pinned")


def test_a_moment_on_a_joint_of_pins_is_refused():
    data = frame(
        {"A": [0, 0, 0], "B": [1, 0, 0]}, [("A", "B", ["rigid", "pinned"])], {"A": ALL}, {}
    )
    data["cases"]["c"]["node_loads"] = {"B": [0, 0, -1e6, 0, 5, 0]}
    falls(data, "B", ["ry"], "take the moment away")


def test_a_box_of_pinned_members_needs_all_its_diagonals():
    nodes = {f"{x}{y}{z}": [x, y, z] for x in (0, 1) for y in (0, 1) for z in (0, 1)}
    names = list(nodes)
    edges = [(p, q, PIN) for k, p in enumerate(names) for q in names[k + 1 :]
             if sum(a != b for a, b in zip(p, q, strict=True)) == 1]  # fmt: skip
    diagonals = [("000", "110"), ("001", "111"), ("000", "101"), ("010", "111"),
                 ("000", "011"), ("100", "111")]  # fmt: skip
    supports = {"000": ["x", "y", "z"], "100": ["y", "z"], "010": ["z"]}
    braced = [*edges, *[(p, q, PIN) for p, q in diagonals]]
    assert len(braced) == 3 * 8 - 6
    stands(frame(nodes, braced, supports, down("111")))
    for k in range(len(edges), len(braced)):
        with pytest.raises(LooseFrame):
            solve_file(frame(nodes, braced[:k] + braced[k + 1 :], supports, down("111")))


def test_the_same_frame_scaled_to_a_toy_or_a_bridge_is_judged_alike():
    for scale in (1e-3, 1.0, 1e3):
        nodes = {n: [v * scale for v in p] for n, p in SQUARE.items()}
        supports = {"A": ["x", "y", "z"], "B": ["y", "z"], "C": ["z"], "D": ["z"]}
        sides = [("A", "B", PIN), ("B", "C", PIN), ("C", "D", PIN), ("D", "A", PIN)]
        push = {"C": [1e-3, 0, 0, 0, 0, 0]}
        falls(frame(nodes, sides, supports, push), "CD", ["x"], "brace")
        stands(frame(nodes, [*sides, ("A", "C", PIN)], supports, push))
