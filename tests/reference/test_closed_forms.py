"""One member against closed forms evaluated by others (``data/closed_forms.json``).

Timoshenko & Gere, Mechanics of Materials; shear coefficient after G. R. Cowper, J. Appl. Mech.
33 (1966). Nine digits are kept, hence 1e-8.
"""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from model.solver.frame_file import solve_file

ROWS = {
    row["id"]: row
    for row in json.loads((Path(__file__).parent / "data" / "closed_forms.json").read_text())[
        "rows"
    ]
}


def tip(load: list[float], shear: bool) -> list[float]:
    """Tip displacement of the cantilever tube 25.4 x 1.6 mm, 0.6 m, that the rows are about."""
    row = ROWS["timoshenko_cantilever_tip"]
    data = {
        "nodes": {"A": [0, 0, 0], "B": [row["L_m"], 0, 0]},
        "materials": {"steel": {"E": row["E_Pa"], "G": row["G_Pa"], "density": 7850}},
        "sections": {
            "t": {
                "shape": "round tube",
                "outside": row["outside_m"],
                "wall": row["wall_m"],
                "shear": shear,
            }
        },
        "members": [{"from": "A", "to": "B", "section": "t", "material": "steel"}],
        "supports": {"A": ["x", "y", "z", "rx", "ry", "rz"]},
        "cases": {"tip": {"node_loads": {"B": load}}},
    }
    displacement: list[float] = solve_file(data)["cases"]["tip"]["displacements"]["B"]
    return displacement


def test_tip_deflection_with_shear():
    row = ROWS["timoshenko_cantilever_tip"]
    got = tip([0, 0, row["P_N"], 0, 0, 0], shear=True)[2]
    assert got == pytest.approx(row["deflection_m"], rel=1e-8)


def test_rotation_under_a_tip_moment():
    row = ROWS["cantilever_tip_moment_rotation"]
    got = tip([0, 0, 0, 0, row["M_Nm"], 0], shear=True)[4]
    assert got == pytest.approx(row["rotation_rad"], rel=1e-8)


def test_twist_of_a_round_tube():
    row = ROWS["round_tube_twist"]
    got = tip([0, 0, 0, row["T_Nm"], 0, 0], shear=True)[3]
    assert got == pytest.approx(row["twist_rad"], rel=1e-8)


def test_stretch_of_a_bar():
    row = ROWS["bar_stretch"]
    got = tip([row["N_N"], 0, 0, 0, 0, 0], shear=True)[0]
    assert got == pytest.approx(row["stretch_m"], rel=1e-8)
