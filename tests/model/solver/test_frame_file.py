"""The frame file: read, refused in words, solved, and written from a batch."""

from __future__ import annotations

import copy
import json
from typing import Any

import numpy as np
import pytest

from model.errors import InputError
from model.frame.batch import PINNED, Batch
from model.frame.variants import one
from model.solver import general
from model.solver.frame_export import default_cases, default_supports, to_json
from model.solver.frame_file import parse, solve_file
from model.solver.structure import frame_of
from tests.model.frame.layouts import box, ladder, random_layout

EXAMPLE: dict[str, Any] = {
    "nodes": {"A": [0, 0, 0], "B": [1, 0, 0]},
    "materials": {"steel": {"E": 205e9, "G": 80e9, "density": 7850, "yield": 235e6}},
    "sections": {
        "t": {"shape": "round tube", "outside": 0.0254, "wall": 0.0016},
        "p": {"A": 1e-3, "Iy": 1e-7, "Iz": 2e-7, "J": 3e-7, "shear_y": None, "shear_z": None},
    },
    "members": [
        {
            "name": "m1",
            "from": "A",
            "to": "B",
            "section": "p",
            "material": "steel",
            "group": "rail",
            "up": [0, 0, 1],
            "ends": ["rigid", "rigid"],
        }
    ],
    "supports": {"A": ["x", "y", "z", "rx", "ry", "rz"]},
    "masses": {"B": 12.5},
    "cases": {"tip": {"node_loads": {"B": [0, 0, -100, 0, 0, 0]}}},
}


def changed(*path_and_value):
    """The example with one entry changed; ``...`` as value takes the entry away."""
    data = copy.deepcopy(EXAMPLE)
    *path, last, value = path_and_value
    place: Any = data
    for key in path:
        place = place[key]
    if value is ...:
        del place[last]
    else:
        place[last] = value
    return data


# ---- the answer ------------------------------------------------------------------------------


def test_the_answer_has_the_agreed_form():
    answer = solve_file(json.dumps(EXAMPLE), modes=2)
    assert set(answer) == {"mass_kg", "cases", "frequencies_Hz", "mode_shapes"}
    tip = answer["cases"]["tip"]
    assert set(tip) == {"displacements", "reactions", "end_forces", "energy"}
    assert set(tip["displacements"]) == {"A", "B"}
    assert set(tip["reactions"]) == {"A"}
    assert set(tip["end_forces"]["m1"]) == {"from", "to"}
    assert set(tip["energy"]["m1"]) == {"axial", "bending", "torsion", "shear"}
    assert len(answer["frequencies_Hz"]) == len(answer["mode_shapes"]) == 2
    json.dumps(answer, allow_nan=False)


def test_the_example_is_the_cantilever_of_the_textbook():
    answer = solve_file(EXAMPLE)
    tip = answer["cases"]["tip"]
    deflection = 100 / (3 * 205e9 * 1e-7)
    assert tip["displacements"]["B"] == pytest.approx([0, 0, -deflection, 0, 1.5 * deflection, 0])
    assert tip["reactions"]["A"] == pytest.approx([0, 0, 100, 0, -100, 0])
    assert tip["end_forces"]["m1"]["from"] == pytest.approx([0, 0, 100, 0, -100, 0])
    assert tip["end_forces"]["m1"]["to"] == pytest.approx([0, 0, -100, 0, 0, 0])
    assert tip["energy"]["m1"]["bending"] == pytest.approx(100 * deflection / 2)
    assert answer["mass_kg"] == pytest.approx(7.85)  # the frame alone, not what it carries


def test_frequencies_come_with_the_point_masses():
    # light bar, mass 12.5 kg on a cantilever: (1/2pi) sqrt(3EI/(L³ (m + 33/140 rho A L))),
    # Rayleigh's classical estimate, within 1 % of the first mode
    first = solve_file(EXAMPLE, modes=1)["frequencies_Hz"][0]
    mass = 12.5 + 33 / 140 * 7.85
    assert first == pytest.approx(np.sqrt(3 * 205e9 * 1e-7 / mass) / (2 * np.pi), rel=0.01)


def test_modes_alone_need_no_supports():
    data = changed("supports", {})
    data["cases"] = {}
    frequencies = solve_file(data, modes=8)["frequencies_Hz"]
    assert max(frequencies[:6]) < 1e-6 < 1 < frequencies[6]


# ---- what entries mean -----------------------------------------------------------------------


def test_iy_bends_in_the_plane_of_up():
    upright = solve_file(EXAMPLE)["cases"]["tip"]["displacements"]["B"][2]
    data = changed("members", 0, "up", [0, 1, 0])
    flat = solve_file(data)["cases"]["tip"]["displacements"]["B"][2]
    assert upright / flat == pytest.approx(2.0)


def test_up_may_be_left_out_and_then_is_upwards():
    data = changed("members", 0, "up", ...)
    assert solve_file(data) == solve_file(EXAMPLE)


def test_shear_areas_add_shear_deformation():
    plain = solve_file(EXAMPLE)["cases"]["tip"]
    data = changed("sections", "p", "shear_z", 4e-4)
    sheared = solve_file(data)["cases"]["tip"]
    more = plain["displacements"]["B"][2] - sheared["displacements"]["B"][2]
    assert more == pytest.approx(100 / (80e9 * 4e-4))
    assert sheared["energy"]["m1"]["shear"] == pytest.approx(100 * more / 2)


def test_a_named_shape_shears_unless_told_otherwise():
    # Cowper 1966 for the round tube at Poisson's ratio 0.3: 0.534455289 A
    data = changed("members", 0, "section", "t")
    sheared = solve_file(data)["cases"]["tip"]["displacements"]["B"][2]
    data["sections"]["t"]["shear"] = False
    plain = solve_file(data)["cases"]["tip"]["displacements"]["B"][2]
    area, second = 1.196318e-4, 8.508815e-9  # printed to seven digits
    assert plain == pytest.approx(-100 / (3 * 205e9 * second), rel=5e-7)
    assert plain - sheared == pytest.approx(100 / (80e9 * 0.534455289 * area), rel=5e-7)


def test_a_pinned_end_turns_freely_about_all_axes():
    data = changed("members", 0, "ends", ["rigid", "pinned"])
    data["supports"]["B"] = ["rx", "ry", "rz", "y", "z"]
    data["cases"]["tip"]["node_loads"]["B"] = [5, 0, 0, 7, 8, 9]
    tip = solve_file(data)["cases"]["tip"]
    assert tip["end_forces"]["m1"]["to"] == pytest.approx([5, 0, 0, 0, 0, 0], abs=1e-12)
    assert tip["reactions"]["B"][3:] == pytest.approx([-7, -8, -9])


def test_a_stiffness_at_an_end_bends_there():
    data = changed("members", 0, "ends", [2000.0, "rigid"])
    tip = solve_file(data)["cases"]["tip"]
    deflection = 100 / (3 * 205e9 * 1e-7) + 100 / 2000
    assert tip["displacements"]["B"][2] == pytest.approx(-deflection)
    assert tip["energy"]["m1"]["joints"] == pytest.approx(100**2 / 2000 / 2)


def test_an_end_may_be_given_direction_by_direction():
    data = changed(
        "members", 0, "ends", [{"x": 1e6, "rx": 2e3, "ry": 3e3, "rz": 4e3}, {"rx": "rigid"}]
    )
    data["cases"]["tip"]["node_loads"]["B"] = [10, 20, 30, 40, 0, 0]
    u = solve_file(data)["cases"]["tip"]["displacements"]["B"]
    assert u[0] == pytest.approx(10 / (205e9 * 1e-3) + 10 / 1e6)
    assert u[1] == pytest.approx(20 / (3 * 205e9 * 2e-7) + 20 / 4e3)
    assert u[2] == pytest.approx(30 / (3 * 205e9 * 1e-7) + 30 / 3e3)
    assert u[3] == pytest.approx(40 / (80e9 * 3e-7) + 40 / 2e3)


def test_up_along_a_round_member_does_not_matter():
    data = changed("members", 0, "up", [1, 0, 0])
    data["members"][0]["section"] = "t"
    solve_file(data)


# ---- what is refused -------------------------------------------------------------------------

REFUSED = [
    (("colour", 1), "colour = 1: no such entry"),
    (("nodes", "A", [0, 0]), "nodes.A = [0, 0]: give 3 numbers"),
    (("nodes", "A", [0, 0, float("nan")]), "nodes.A[2] = NaN: give a number"),
    (("nodes", "A", [0, 0, "0"]), 'nodes.A[2] = "0": give a number'),
    (("nodes", "A", [0, 0, True]), "nodes.A[2] = true: give a number"),
    (("nodes", "C", [5, 5, 5]), "nodes.C = [5.0, 5.0, 5.0]: no member ends here"),
    (("nodes", "B", [0, 0, 0]), "members.m1 = A to B, no length"),
    (("nodes", {"A": [0, 0, 0]}), "nodes = 1 joints: give at least two"),
    (("nodes", ...), "nodes = missing: give an object"),
    (("materials", "steel", "E", ...), "materials.steel.E = missing: give a number above 0 in Pa"),
    (("materials", "steel", "E", 0), "materials.steel.E = 0: use a number above 0 in Pa"),
    (("materials", "steel", "G", float("inf")), "materials.steel.G = Infinity: give a number"),
    (("materials", "steel", "density", -1), "materials.steel.density = -1: use 0 or more"),
    (("materials", "steel", "yeild", 1), "materials.steel.yeild = 1: no such entry; did you mean"),
    (("sections", "p", "A", -1e-3), "sections.p.A = -0.001: use a number above 0 in m²"),
    (("sections", "p", "J", ...), "sections.p.J = missing: give a number above 0 in m⁴"),
    (("sections", "p", "shear_y", 0), "sections.p.shear_y = 0: use a number above 0 in m²"),
    (("sections", "p", "wall", 0.1), "sections.p.wall = 0.1: no such entry"),
    (("sections", "t", "shape", "tube"), 'sections.t.shape = "tube": name one of the shapes'),
    (("sections", "t", "wall", 0.02), "sections.t.wall = "),
    (("sections", "t", "wall", 0), "sections.t.wall = 0: use a number above 0 in m"),
    (("sections", "t", "shear", "no"), 'sections.t.shear = "no": use true or false'),
    (("members", []), "members = none: join the nodes"),
    (("members", {}), "members = {}: give a list"),
    (("members", 0, "from", "a"), 'members[0].from = "a": name one of the nodes; use A, B'),
    (("members", 0, "form", "A"), 'members[0].form = "A": no such entry; did you mean from?'),
    (("members", 0, "to", "A"), "members.m1 = A to A, no length"),
    (("members", 0, "to", ...), "members[0].to = missing: name one of the nodes"),
    (("members", 0, "section", "q"), 'members.m1.section = "q": name one of the sections; use'),
    (("members", 0, "material", "steal"), 'did you mean steel?'),
    (("members", 0, "up", [2, 0, 0]), "members.m1.up = [2.0, 0.0, 0.0]: it lies along the member"),
    (("members", 0, "up", [0, 0, 0]), "members.m1.up = [0, 0, 0]: give a direction"),
    (("members", 0, "ends", ["rigid"]), "members.m1.ends = 1: give two ends"),
    (("members", 0, "ends", ["rigid", "welded"]), 'members.m1.ends[1] = "welded": give "rigid", '),
    (("members", 0, "ends", ["rigid", -5]), "members.m1.ends[1] = -5: use"),
    (("members", 0, "ends", [{"x": "pinned"}, "rigid"]), "members.m1.ends[0].x"),
    (("members", 0, "ends", [{"y": 3}, "rigid"]), "members.m1.ends[0].y = 3: no such entry"),
    (("supports", "A", ["x", "up"]), 'supports.A[1] = "up": name one of the directions; use x, y'),
    (("supports", "Z", ["x"]), 'supports.Z = ["x"]: Z is none of the nodes; use A, B'),
    (("supports", "A", "x"), 'supports.A = "x": give a list'),
    (("supports", {}), "supports = none: hold at least six directions"),
    (("masses", "B", -1), "masses.B = -1: use 0 kg or more"),
    (("masses", "Z", 1), "masses.Z = 1: Z is none of the nodes"),
    (("cases", "tip", "loads", {}), "cases.tip.loads = {}: no such entry; did you mean node"),
    (("cases", "tip", "node_loads", "Z", [0] * 6), "Z is none of the nodes"),
    (("cases", "tip", "node_loads", "B", [1, 2, 3]), "give 6 numbers"),
]  # fmt: skip


@pytest.mark.parametrize(("change", "words"), REFUSED, ids=[w[:50] for _, w in REFUSED])
def test_a_bad_entry_is_refused_with_its_name_its_value_and_a_remedy(change, words):
    with pytest.raises(InputError) as caught:
        solve_file(changed(*change))
    assert words in str(caught.value)
    assert "\n" not in str(caught.value)


def test_a_member_that_comes_twice_is_refused():
    data = copy.deepcopy(EXAMPLE)
    data["members"].append(data["members"][0])
    with pytest.raises(InputError, match=r"members.m1 = twice: give every member its own name"):
        parse(data)
    data["members"][1] = {**data["members"][0], "name": "m2", "from": "B", "to": "A"}
    with pytest.raises(InputError, match=r"members.m2 = B to A: m1 joins them already"):
        parse(data)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ('{"nodes": {', "frame file = line 1 column 12: not JSON"),
        ("[]", "frame file = []: give an object"),
        ('{"nodes": {"A": [0,0,0], "A": [1,0,0]}}', "A = twice in one object"),
        ("", "frame file = line 1 column 1: not JSON"),
    ],
)
def test_a_broken_text_is_refused(text, words):
    with pytest.raises(InputError) as caught:
        solve_file(text)
    assert words in str(caught.value)


@pytest.mark.parametrize("modes", [-1, 1.5, True, "3"])
def test_a_strange_number_of_modes_is_refused(modes):
    with pytest.raises(InputError, match=r"modes = .*whole number"):
        solve_file(EXAMPLE, modes)


# ---- written from a batch --------------------------------------------------------------------


LAYOUTS = {
    "ladder": ladder(),
    "box": box(bracing="single"),
    **{f"random {seed}": random_layout(np.random.default_rng(seed)) for seed in range(6)},
}


@pytest.fixture(params=LAYOUTS)
def batch_and_tubes(request):
    layout = LAYOUTS[request.param]
    return one(layout), layout.tubes


def test_a_written_frame_solves_to_the_same_answer(batch_and_tubes):
    batch, tubes = batch_and_tubes
    data = json.loads(json.dumps(to_json(batch, tubes)))
    answer = solve_file(data)
    held, cases = default_supports(batch), default_cases(batch)
    loads = np.stack(list(cases.values()))
    expected = general.solve(frame_of(batch, held, tuple(cases), loads))
    assert answer["mass_kg"] == pytest.approx(expected.frame.mass, rel=1e-12)
    for c, case in enumerate(cases):
        for j, name in enumerate(batch.skeleton.joints):
            if name in answer["cases"][case]["displacements"]:
                got = answer["cases"][case]["displacements"][name]
                size = np.abs(expected.displacement[c]).max()
                assert got == pytest.approx(expected.displacement[c, j], abs=1e-10 * size)


@pytest.mark.parametrize(
    "ends",
    [
        [0, 0, 1e-4, 1e-4, 1e-4, 1e-4],
        [0, 0, PINNED, 0, PINNED, 0],
        [2e-8, 0, 1e-4, 2e-4, 3e-4, 4e-4],
        [2e-8, PINNED, PINNED, PINNED, PINNED, PINNED],
        [0, 4e-4, 0, 0, 0, 0],
    ],
)
def test_ends_survive_writing_and_reading(batch_and_tubes, ends):
    batch, tubes = batch_and_tubes
    with_ends = Batch(
        batch.skeleton, batch.rows, batch.xyz, batch.rigidity,
        np.broadcast_to(np.array(ends, float), batch.ends.shape).copy(),
        batch.line_mass, batch.present, batch.track,
    )  # fmt: skip
    frame = parse(to_json(with_ends, tubes))
    assert frame.ends == pytest.approx(np.tile(ends, (len(frame.ends), 1)), rel=1e-14)
