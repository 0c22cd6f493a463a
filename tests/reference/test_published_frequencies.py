"""Natural frequencies: NAFEMS benchmarks, a two-storey frame, uniform beams.

Sources stand in ``data/frequencies.json``: The Standard NAFEMS Benchmarks, TNSB Rev. 3 (1990),
tests FV2, FV4, FV5; AFNOR/SFM validation guide, SDLX 01/89; R. D. Blevins, Formulas for Natural
Frequency and Mode Shape.
"""

from __future__ import annotations

import json
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

from model.solver.frame_file import solve_file

CASES = {
    case["id"]: case
    for case in json.loads((Path(__file__).parent / "data" / "frequencies.json").read_text())[
        "cases"
    ]
}
ALL = ["x", "y", "z", "rx", "ry", "rz"]
OUT_OF_PLANE = ["z", "rx", "ry"]


class Mesh:
    """Collects straight runs of members of one section into a frame file."""

    def __init__(self, section: dict, material: dict, plane: bool) -> None:
        self.nodes: dict[str, list[float]] = {}
        self.members: list[dict] = []
        self.supports: dict[str, list[str]] = {}
        self.masses: dict[str, float] = {}
        self.sections, self.materials = {"s": section}, {"m": material}
        self.plane = plane

    def node(self, place) -> str:
        name = " ".join(f"{v:.9g}" for v in np.round(place, 9) + 0.0)
        if name not in self.nodes:
            self.nodes[name] = [float(v) for v in place]
            if self.plane:
                self.supports[name] = list(OUT_OF_PLANE)
        return name

    def run(self, start, end, pieces: int, section: str = "s", material: str = "m") -> None:
        points = np.linspace(start, end, pieces + 1)
        for a, b in pairwise(points):
            self.members.append(
                {"from": self.node(a), "to": self.node(b), "section": section, "material": material}
            )

    def hold(self, place, directions) -> None:
        held = self.supports.setdefault(self.node(place), [])
        held += [d for d in directions if d not in held]

    def frequencies(self, count: int) -> np.ndarray:
        data = {
            "nodes": self.nodes,
            "materials": self.materials,
            "sections": self.sections,
            "members": self.members,
            "supports": self.supports,
            "masses": self.masses,
        }
        return np.array(solve_file(data, modes=count)["frequencies_Hz"])


def rectangle(y: float, z: float, j: float | None = None, **more) -> dict:
    j = (y * z**3 + z * y**3) / 12 if j is None else j
    return {"A": y * z, "Iy": y * z**3 / 12, "Iz": z * y**3 / 12, "J": j, **more}


def worst(name: str, got: np.ndarray, expected) -> float:
    off = float(np.abs(got / np.array(expected) - 1).max())
    print(f"{name}: worst relative difference {off:.1e}")
    return off


# ---- NAFEMS FV2: pin-ended double cross ------------------------------------------------------


def double_cross(pieces: int) -> np.ndarray:
    p = CASES["nafems_fv2"]["parameters"]
    side = p["section_side_m"]
    material = {"E": p["E_Pa"], "G": p["E_Pa"] / 2.6, "density": p["density_kg_m3"]}
    mesh = Mesh(rectangle(side, side, rotary=False), material, plane=True)
    for arm in range(p["arms"]):
        angle = 2 * np.pi * arm / p["arms"]
        end = p["arm_length_m"] * np.array([np.cos(angle), np.sin(angle), 0])
        mesh.run(np.zeros(3), end, pieces)
        mesh.hold(end, ["x", "y"])
    return mesh.frequencies(16)


@pytest.mark.parametrize("pieces", [4, 16])
def test_fv2_agrees_with_the_target_and_with_the_same_mesh_of_another_program(pieces):
    case = CASES["nafems_fv2"]
    got = double_cross(pieces)
    if pieces == 16:
        assert worst("FV2 target", got, case["target_Hz"]) < case["tolerance"]["against_target"]
    other = case["recomputed_Hz"][f"elements_per_arm_{pieces}"]
    assert worst("FV2 same mesh", got, other) < 1e-8  # printed to ten digits


# ---- NAFEMS FV4: cantilever with off-centre masses -------------------------------------------


def off_centre_masses(pieces: int, **section) -> np.ndarray:
    p = CASES["nafems_fv4"]["parameters"]
    d, length = p["diameter_m"], p["length_m"]
    second = np.pi * d**4 / 64
    values = {"A": np.pi * d**2 / 4, "Iy": second, "Iz": second, "J": 2 * second, **section}
    g = p["E_Pa"] / (2 * (1 + p["nu"]))
    mesh = Mesh(values, {"E": p["E_Pa"], "G": g, "density": p["density_kg_m3"]}, plane=False)
    mesh.materials["stiff"] = {"E": 1e6 * p["E_Pa"], "G": 1e6 * g, "density": 0}
    tip = np.array([length, 0, 0])
    mesh.run(np.zeros(3), tip, pieces)
    mesh.hold(np.zeros(3), ALL)
    for k in (1, 2):
        arm = np.array([length, p[f"offset{k}_m"], 0])
        mesh.run(tip, arm, 1, material="stiff")
        mesh.masses[mesh.node(arm)] = p[f"mass{k}_kg"]
    return mesh.frequencies(6)


def test_fv4_agrees_with_the_target():
    case = CASES["nafems_fv4"]
    got = off_centre_masses(40)
    allowed = case["tolerance"]["against_target_no_shear"]
    assert worst("FV4 target", got, case["target_Hz"]) < allowed
    other = case["recomputed_Hz"]["euler_with_rotary_inertia_40_elements"]
    assert worst("FV4 same mesh", got, other) < 1e-5  # the arms are a million times stiffer


def test_fv4_with_shear_and_without_rotary_inertia_agrees_with_another_program():
    case = CASES["nafems_fv4"]["recomputed_Hz"]
    area = 0.9 * np.pi * 0.25**2
    got = off_centre_masses(40, shear_y=area, shear_z=area)
    assert worst("FV4 shear", got, case["timoshenko_kappa_0_9_40_elements"]) < 1e-5
    got = off_centre_masses(5, rotary=False)
    assert worst("FV4 plain", got, case["euler_without_rotary_inertia_5_elements"]) < 1e-5


# ---- NAFEMS FV5: deep simply supported beam --------------------------------------------------


def deep_beam(pieces: int) -> np.ndarray:
    p = CASES["nafems_fv5"]["parameters"]
    a, length = p["side_m"], p["length_m"]
    section = rectangle(a, a, 0.1406 * a**4, shear_y=0.85 * a * a, shear_z=0.85 * a * a)
    g = p["E_Pa"] / (2 * (1 + p["nu"]))
    mesh = Mesh(section, {"E": p["E_Pa"], "G": g, "density": p["density_kg_m3"]}, plane=False)
    mesh.run([0, 0, 0], [length, 0, 0], pieces)
    mesh.hold([0, 0, 0], ["x", "y", "z", "rx"])
    mesh.hold([length, 0, 0], ["y", "z"])
    return mesh.frequencies(9)


def test_fv5_agrees_with_the_targets():
    case = CASES["nafems_fv5"]
    got = deep_beam(40)
    target, allowed = case["target_Hz"], case["tolerance"]
    flexure, torsion, extension = got[[0, 4, 7]], got[[2, 6]], got[[3]]
    assert np.allclose(got[[1, 5, 8]], flexure, rtol=1e-9)  # repeated in the other plane
    assert worst("FV5 flexure", flexure, target["flexure"]) < allowed["flexure"]
    assert worst("FV5 torsion", torsion, target["torsion_st_venant"]) < allowed["torsion"]
    assert worst("FV5 extension", extension, target["extension"]) < allowed["extension"]


def test_fv5_approaches_the_exact_timoshenko_beam():
    # the shapes of a loaded member leave an error of the second power of the mesh in deep beams
    exact = CASES["nafems_fv5"]["closed_form_Hz"]["timoshenko_kappa_0_85"]
    coarse = worst("FV5 exact, 40", deep_beam(40)[[0, 4, 7]], exact)
    fine = worst("FV5 exact, 80", deep_beam(80)[[0, 4, 7]], exact)
    assert fine == pytest.approx(coarse / 4, rel=0.02)
    assert fine < 2.5e-4


def test_fv5_agrees_with_the_same_mesh_of_another_program():
    other = CASES["nafems_fv5"]["recomputed_Hz"]["kappa_0_85_40_elements_St_Venant_J"]
    assert worst("FV5 same mesh", deep_beam(40), other) < 1e-8  # printed to ten digits


# ---- SDLX 01/89: two-storey frame ------------------------------------------------------------


def two_storeys(pieces: int) -> np.ndarray:
    p = CASES["sdlx_01_89"]["parameters"]
    # members lie in the x-y plane and bend there: Iz, the depth along local y
    section = rectangle(p["depth_m"], p["width_m"], rotary=False)
    material = {"E": p["E_Pa"], "G": p["E_Pa"] / 2.6, "density": p["density_kg_m3"]}
    mesh = Mesh(section, material, plane=True)
    for x in (-0.3, 0.3):
        mesh.run([x, 0, 0], [x, 0.36, 0], pieces)
        mesh.run([x, 0.36, 0], [x, 0.81, 0], pieces)
        mesh.hold([x, 0, 0], ALL)
    for y in (0.36, 0.81):
        mesh.run([-0.3, y, 0], [0.3, y, 0], pieces)
    return mesh.frequencies(9)


def test_sdlx_01_89_agrees_with_the_target_and_with_another_program():
    case = CASES["sdlx_01_89"]
    got = two_storeys(16)
    assert worst("SDLX target", got, case["target_Hz"]) < case["tolerance"]["against_target"]
    other = case["recomputed_Hz"]["elements_per_member_16"]
    assert worst("SDLX same mesh", got, other) < 1e-8  # printed to ten digits


# ---- uniform beams ---------------------------------------------------------------------------

STEEL = {"E": 205e9, "G": 205e9 / 2.6, "density": 7850}
TUBE = {"A": 5.969026042e-5, "Iy": 2.700984284e-9, "Iz": 2.700984284e-9, "J": 5.4e-9}
"""Round tube 20 x 1 mm."""

BEAMS = {
    "cantilever_betaL": (ALL, []),
    "pinned_pinned_betaL": (["x", "y"], ["x", "y"]),
    "clamped_clamped_or_free_free_betaL": (ALL, ALL),
    "clamped_pinned_betaL": (ALL, ["x", "y"]),
}


def uniform_beam(pieces: int, left: list[str], right: list[str], count: int) -> np.ndarray:
    mesh = Mesh({**TUBE, "rotary": False}, STEEL, plane=True)
    mesh.run([0, 0, 0], [1, 0, 0], pieces)
    mesh.hold([0, 0, 0], left)
    mesh.hold([1, 0, 0], right)
    for directions in mesh.supports.values():
        if "x" not in directions:
            directions.append("x")  # bending only
    return mesh.frequencies(count)


def euler(beta: np.ndarray) -> np.ndarray:
    mass = STEEL["density"] * TUBE["A"]
    return beta**2 / (2 * np.pi) * np.sqrt(STEEL["E"] * TUBE["Iz"] / mass)


@pytest.mark.parametrize("name", BEAMS)
def test_uniform_beams_vibrate_as_the_tables_say(name):
    beta = np.array(CASES["euler_beam_modes"]["closed_form"][name])
    got = uniform_beam(8, *BEAMS[name], 3) / euler(beta) - 1
    print(f"{name}: {got}")
    # consistent mass in n pieces is too high by (beta L/n)⁴/1440 to first order
    assert got == pytest.approx((beta / 8) ** 4 / 1440, rel=0.06)


@pytest.mark.parametrize(("pieces", "error"), [(2, 3.9e-3), (4, 2.6e-4), (8, 1.6e-5), (16, 1e-6)])
def test_the_error_falls_with_the_fourth_power_of_the_mesh(pieces, error):
    # errors of a simply supported beam with consistent mass, from an independent prototype
    first = uniform_beam(pieces, *BEAMS["pinned_pinned_betaL"], 1)[0]
    off = first / euler(np.array([np.pi]))[0] - 1
    assert off == pytest.approx(error, rel=0.05)  # two printed digits


def test_the_simply_supported_tube_has_its_printed_frequency():
    # (pi/2L²) sqrt(EI/(rho A)) for 20 x 1 mm steel tube, 1 m: 53.9972 Hz; 16 pieces add 1e-6
    first = uniform_beam(16, *BEAMS["pinned_pinned_betaL"], 1)[0]
    assert first == pytest.approx(53.9972, abs=1.1e-4)


def test_a_free_beam_has_six_modes_at_rest_and_then_the_tabulated_one():
    mesh = Mesh({**TUBE, "rotary": False}, STEEL, plane=False)
    mesh.run([0, 0, 0], [1, 0, 0], 16)
    got = mesh.frequencies(7)
    assert got[:6].max() < 1e-3
    assert got[6] == pytest.approx(euler(np.array([4.730040745]))[0], rel=1e-5)


def test_rotary_inertia_lowers_a_frequency_as_rayleigh_says():
    # Rayleigh: 1/sqrt(1 + (pi r/L)²), r² = I/A, for a simply supported beam
    plain, rotary = (Mesh({**TUBE, "rotary": flag}, STEEL, plane=True) for flag in (False, True))
    first = []
    for mesh in (plain, rotary):
        mesh.run([0, 0, 0], [1, 0, 0], 32)
        mesh.hold([0, 0, 0], ["x", "y"])
        mesh.hold([1, 0, 0], ["x", "y"])
        first.append(mesh.frequencies(1)[0])
    ratio = 1 / np.sqrt(1 + np.pi**2 * TUBE["Iz"] / TUBE["A"])
    assert first[1] / first[0] == pytest.approx(ratio, rel=1e-8)
